//go:build !linux

package ui

import "time"

// threadTime is not told here.
func threadTime() (time.Duration, bool) { return 0, false }

// watchThread is not to be had here.
func watchThread() (func() time.Duration, bool) { return nil, false }

// tellState is never called here.
func tellState(*pulse, <-chan struct{}) {}
