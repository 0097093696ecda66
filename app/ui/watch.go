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

// beginWatch keeps the pulse of the window's thread, which must be the caller's, for
// scripts that drive the window; the returned function ends it. At each SIGUSR1 the
// program tells what it holds, and what was seen since the last time, in a line:
// "STATE heap_kB 34120 resident_kB 240332 goroutines 21 files 17 beats 3511 ...".
func beginWatch(do func(func())) (end func()) {
	thread, ok := watchThread()
	if !ok || os.Getenv(stagesVariable) == "" {
		return func() {}
	}
	p := &pulse{say: os.Stderr}
	stop := make(chan struct{})
	go p.beat(do, thread, stop)
	go tellState(p, stop)
	return func() {
		close(stop)
		fmt.Fprintf(os.Stderr, "WATCH %s\n", p)
	}
}
