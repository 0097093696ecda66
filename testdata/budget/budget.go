// Package budget holds what reads files from strangers to the memory and the time it may
// take. It is for tests.
package budget

import (
	"fmt"
	"runtime/metrics"
	"testing"
	"time"
)

// longest is far beyond what any input of the tests takes, also on a machine that is
// busy with other work: who takes longer hangs.
const longest = 2 * time.Minute

// slack in bytes covers what the runtime counts late and the test's own doings.
const slack = 4 << 20

// Hold calls do and fails the test where that sets aside more than most bytes of memory
// in all, freed again or not. It panics where do hangs, so that fuzzing keeps the input.
func Hold(t testing.TB, most int, do func()) {
	t.Helper()
	watch := time.AfterFunc(longest, func() { panic(fmt.Sprintf("it takes more than %v", longest)) })
	defer watch.Stop()
	before := setAside()
	do()
	if used := setAside() - before; used > uint64(most)+slack {
		t.Errorf("%.1f MiB of memory were set aside, more than the %.1f that the input calls for",
			float64(used)/(1<<20), float64(most)/(1<<20))
	}
}

// setAside returns how many bytes of memory the program has asked for so far.
func setAside() uint64 {
	sample := []metrics.Sample{{Name: "/gc/heap/allocs:bytes"}}
	metrics.Read(sample)
	return sample[0].Value.Uint64()
}
