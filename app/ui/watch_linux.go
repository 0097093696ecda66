package ui

import (
	"syscall"
	"time"
)

// threadTime returns how long the calling thread has been on the processor.
func threadTime() (time.Duration, bool) {
	const thisThread = 1 // RUSAGE_THREAD of getrusage(2)
	var u syscall.Rusage
	if err := syscall.Getrusage(thisThread, &u); err != nil {
		return 0, false
	}
	return time.Duration(u.Utime.Nano() + u.Stime.Nano()), true
}
