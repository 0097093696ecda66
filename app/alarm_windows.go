package main

import (
	"golang.org/x/sys/windows"
)

// alarm shows why the window cannot be opened where there is no terminal to print it
// to, as after a double click.
func alarm(err error) {
	if handle, missing := windows.GetStdHandle(windows.STD_ERROR_HANDLE); missing == nil && handle != 0 {
		return
	}
	text, textErr := windows.UTF16PtrFromString(err.Error())
	title, titleErr := windows.UTF16PtrFromString("Pavilight")
	if textErr == nil && titleErr == nil {
		windows.MessageBox(0, text, title, windows.MB_OK|windows.MB_ICONERROR)
	}
}
