package ui

import (
	"runtime"
	"testing"
	"time"
)

// Waiting does not count, work does, however busy the machine is.
func TestWatchCountsWorkNotWaiting(t *testing.T) {
	if _, ok := threadTime(); !ok {
		t.Skip("this system tells no times of threads")
	}
	runtime.LockOSThread()
	defer runtime.UnlockOSThread()
	if held := timed(func() { time.Sleep(2 * longestHold) }); held > longestHold {
		t.Errorf("waiting counts as %v of work", held)
	}
	work := func() {
		for start, _ := threadTime(); ; {
			if now, _ := threadTime(); now-start > 2*longestHold {
				return
			}
		}
	}
	if held := timed(work); held < longestHold {
		t.Errorf("work counts as %v", held)
	}
}
