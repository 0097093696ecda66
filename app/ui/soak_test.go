package ui

import (
	"flag"
	"runtime"
	"slices"
	"testing"
	"time"

	"pavilight/facets"
	"pavilight/testdata"
)

// edits is how many edits the soak makes; a few of them are a smoke test.
var edits = flag.Int("edits", 12, "edits of the soak run; 500 for the real one")

// TestMemoryStaysFlat edits the plan over and over, as a person who plays with a
// slider does, and compares the memory in use early and late. The longest hold of
// the window's goroutine is told, not judged: that depends on the machine.
func TestMemoryStaysFlat(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	var longest, held time.Duration
	edited := 0
	timed := func(f func()) {
		edited++
		start := time.Now()
		f()
		took := time.Since(start)
		longest, held = max(longest, took), held+took
	}
	c2 := r.row(t, "C2").number
	// The history holds at most so many steps; edits that merge into one, as those of a
	// drag, keep it out of the measure.
	edit := func(i int) {
		angle := 35.01 + 0.01*float64(i%100)
		timed(func() {
			if err := r.bench.SetAngle(c2, facets.Angle(angle)*facets.Degree, true); err != nil {
				t.Fatal(err)
			}
		})
		stone := r.bench.Look.Subject.Stone
		r.until(t, "the next stone", func() bool { return r.bench.Look.Subject.Stone != stone })
	}
	inUse := func() uint64 {
		r.told = nil
		edit(50)
		r.until(t, "the end of all tracing", func() bool { return slices.Contains(r.told, "rocked") })
		var m runtime.MemStats
		runtime.GC()
		runtime.ReadMemStats(&m)
		return m.HeapAlloc
	}
	for i := range *edits / 5 {
		edit(i)
	}
	const slack = 4 << 20 // a few frames more or fewer in use
	var early, late uint64
	for range 3 { // what other tests left in the process comes and goes; what grows here grows each time
		early = inUse()
		for i := range *edits {
			edit(i + 1)
		}
		if late = inUse(); late <= early+slack {
			break
		}
	}
	t.Logf("%d edits: %d kB in use early, %d kB late; an edit held the window's goroutine for %v, at most %v",
		*edits, early/1024, late/1024, held/time.Duration(edited), longest)
	if late > early+slack {
		t.Errorf("memory in use grew from %d to %d bytes over %d edits", early, late, *edits)
	}
}
