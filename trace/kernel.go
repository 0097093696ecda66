package trace

import "pavilight/gems"

// Kernel names the form of arithmetic in which scenes of clean facets in one medium all
// around are traced on this processor. All others are traced in float64.
func Kernel() string {
	if hasVectors() {
		return "float32, eight rays at a time (AVX2)"
	}
	return "float64"
}

// ray is a viewing ray about to enter the stone.
type ray struct {
	facet      int32   // that it meets
	column     int32   // whose medium it comes through
	at, along  vec     // where, and in which direction, a unit vector
	n, m       float64 // index of the stone and of the medium, at its wavelength
	absorb     float64 // natural absorption of the stone there, per unit of the stone
	wavelength gems.Wavelength
	weight     float64 // in all means
	die        dice    // for its end-game
}

// followAll does what follow does for many rays: it puts their ledgers in out and the
// rest into the sums of their columns, the ledgers too. What each ray sees of a light
// goes into lit; it is nil for the even light without colour, which the sums tell of.
//
// Without a kernel there must be neither light nor colour, nor a body that absorbs.
func (t *tracer) followAll(rays []ray, out []Ledger, lit []float64, columns []sums) {
	if t.kernel != nil {
		t.kernel.follow(rays, out, lit, columns)
	} else {
		for i := range rays {
			r := &rays[i]
			out[i] = t.follow(int(r.facet), r.at, r.n, r.m, r.die, &columns[r.column])
		}
	}
	for i := range out {
		columns[rays[i].column].addRay(rays[i].weight, &out[i])
	}
}
