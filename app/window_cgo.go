//go:build cgo

package main

import (
	"context"
	"os"
	"runtime"

	"pavilight/app/ui"
)

// openWindow opens the window on the plan or scan of the given path, on the bundled
// stone for "", and returns when it was closed.
func openWindow(ctx context.Context, path string) error {
	if err := displayAnswers(runtime.GOOS, os.Getenv); err != nil {
		return err
	}
	if err := openGLAnswers(); err != nil {
		return err
	}
	return ui.Run(ctx, ui.Options{Path: path})
}
