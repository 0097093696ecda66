package ui

import (
	"fmt"
	"os"
	"os/signal"
	"runtime"
	"runtime/debug"
	"strconv"
	"strings"
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

// watchThread returns what tells, on any thread, how long the calling one has been on the
// processor; false where the system does not tell.
func watchThread() (func() time.Duration, bool) {
	file, err := os.Open(fmt.Sprintf("/proc/self/task/%d/schedstat", syscall.Gettid()))
	if err != nil {
		return nil, false
	}
	return func() time.Duration {
		var text [64]byte
		n, _ := file.ReadAt(text[:], 0)
		onProcessor, _, _ := strings.Cut(string(text[:n]), " ")
		ns, _ := strconv.ParseInt(onProcessor, 10, 64)
		return time.Duration(ns)
	}, true
}

// tellState answers each SIGUSR1 until stop is closed.
func tellState(p *pulse, stop <-chan struct{}) {
	asked := make(chan os.Signal, 1)
	signal.Notify(asked, syscall.SIGUSR1)
	defer signal.Stop(asked)
	for {
		select {
		case <-stop:
			return
		case <-asked:
			debug.FreeOSMemory() // collects, so that what is in use is told, not what has run up
			var m runtime.MemStats
			runtime.ReadMemStats(&m)
			files, _ := os.ReadDir("/proc/self/fd")
			fmt.Fprintf(os.Stderr, "STATE heap_kB %d resident_kB %d goroutines %d files %d %s\n",
				m.HeapAlloc/1024, residentKB(), runtime.NumGoroutine(), len(files), p)
		}
	}
}

// residentKB returns how much of the program is in memory, 0 where that is not told.
func residentKB() int {
	text, _ := os.ReadFile("/proc/self/status")
	for line := range strings.Lines(string(text)) {
		if rest, ok := strings.CutPrefix(line, "VmRSS:"); ok {
			kB, _ := strconv.Atoi(strings.TrimSpace(strings.TrimSuffix(strings.TrimSpace(rest), "kB")))
			return kB
		}
	}
	return 0
}
