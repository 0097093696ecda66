//go:build !cgo

package main

import (
	"context"
	"errors"
)

// openWindow says that this build has none.
func openWindow(context.Context, string) error {
	return errors.New("this build has no window, only the commands (see pavilight --help); " +
		"build it with cgo, or run app/start, to have one")
}
