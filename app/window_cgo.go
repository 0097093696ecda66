//go:build cgo

package main

import (
	"context"
	"os"
	"runtime"

	"fyne.io/fyne/v2/app"
	"fyne.io/fyne/v2/widget"
)

// openWindow opens the window on the plan or scan of the given path, on the bundled
// stone for "", and returns when it was closed.
func openWindow(ctx context.Context, path string) error {
	if err := displayAnswers(runtime.GOOS, os.Getenv); err != nil {
		return err
	}
	a := app.NewWithID("org.pavilight")
	w := a.NewWindow("Pavilight")
	w.SetContent(widget.NewLabel(path))
	w.ShowAndRun()
	return nil
}
