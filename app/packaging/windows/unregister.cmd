@echo off
rem Takes back what register.cmd has entered.
setlocal
set "classes=HKCU\Software\Classes"
reg delete "%classes%\Pavilight.Plan" /f >nul
reg delete "%classes%\.toml\OpenWithProgids" /v Pavilight.Plan /f >nul
echo Pavilight is no longer offered for .toml files.
