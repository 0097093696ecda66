package ui

import (
	"fmt"
	"os"
	"time"
)

// longestHold is how much of the processor one piece of our work may take on the
// toolkit's goroutine: beyond, the window feels stuck.
const longestHold = 50 * time.Millisecond

// watched returns do with a watch on it: each piece of work that takes the window's
// thread for longer than longestHold is told on stderr, a line each: "HELD 61 ms". It
// measures time of the thread's own on the processor, not on the clock, so that neither
// other programs nor the drawing of frames between pieces count. Only scripts that drive
// the window want it, and only some systems tell such times; elsewhere do is returned.
func watched(do func(func())) func(func()) {
	if _, ok := threadTime(); !ok || os.Getenv(stagesVariable) == "" {
		return do
	}
	return func(f func()) {
		do(func() {
			if held := timed(f); held > longestHold {
				fmt.Fprintf(os.Stderr, "HELD %d ms\n", held.Milliseconds())
			}
		})
	}
}

// timed does work and returns how long its thread was on the processor for it. The
// goroutine must be bound to its thread, as the toolkit's is.
func timed(f func()) time.Duration {
	before, _ := threadTime()
	f()
	after, _ := threadTime()
	return after - before
}
