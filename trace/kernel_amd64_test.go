package trace

import (
	"testing"
	"unsafe"
)

// TestFlightStandsOnCacheLines: a vector that straddles two lines costs twice.
func TestFlightStandsOnCacheLines(t *testing.T) {
	const line = 64
	tr, err := newTracer(brilliant(t), Settings{})
	if err != nil {
		t.Fatal(err)
	}
	f := newKernel(tr).newFlight()
	for name, at := range map[string]uintptr{
		"flight":     uintptr(unsafe.Pointer(f)),
		"groups":     unsafe.Offsetof(f.groups),
		"each group": unsafe.Sizeof(f.groups[0]),
	} {
		if at%line != 0 {
			t.Errorf("%s: %d bytes past a cache line", name, at%line)
		}
	}
}
