package trace

// Kernel names the form of arithmetic in which plain scenes are traced on this
// processor: clean facets all around in one clear medium, under the even light. All
// others are traced in float64.
func Kernel() string {
	if hasVectors() {
		return "float32, eight rays at a time (AVX2)"
	}
	return "float64"
}

// ray is a viewing ray about to enter the stone.
type ray struct {
	facet  int32   // that it meets
	column int32   // whose medium it comes through
	at     vec     // where
	n, m   float64 // index of the stone and of the medium, at its wavelength
	die    dice    // for its end-game
}

// followAll does what follow does for many rays: it puts their ledgers in out and
// the rest into the sums of their columns, the ledger too. Where there is a kernel
// for this processor, and unless the caller wants float64, that is many times faster.
func (t *tracer) followAll(rays []ray, out []Ledger, columns []sums) {
	if t.kernel != nil {
		t.kernel.follow(rays, out, columns)
	} else {
		for i := range rays {
			r := &rays[i]
			out[i] = t.follow(int(r.facet), r.at, r.n, r.m, r.die, &columns[r.column])
		}
	}
	for i := range out {
		columns[rays[i].column].addLedger(out[i])
	}
}
