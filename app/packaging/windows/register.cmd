@echo off
rem Offers Pavilight under "Open with" for cut plans (.toml) to the user who runs this.
rem What opens .toml files by default stays as it is. unregister.cmd takes it back.
setlocal
set "program=%~dp0pavilight-window.exe"
if not exist "%program%" (
  echo pavilight-window.exe must lie beside this file. 1>&2
  exit /b 1
)
set "classes=HKCU\Software\Classes"
reg add "%classes%\Pavilight.Plan" /ve /d "Cut plan" /f >nul
if errorlevel 1 exit /b 1
reg add "%classes%\Pavilight.Plan\DefaultIcon" /ve /d "%program%,0" /f >nul
if errorlevel 1 exit /b 1
reg add "%classes%\Pavilight.Plan\shell\open\command" /ve /d "\"%program%\" \"%%1\"" /f >nul
if errorlevel 1 exit /b 1
reg add "%classes%\.toml\OpenWithProgids" /v Pavilight.Plan /t REG_SZ /d "" /f >nul
if errorlevel 1 exit /b 1
echo Pavilight is offered under "Open with" for .toml files.
