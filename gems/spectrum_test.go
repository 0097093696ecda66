package gems

import (
	"math"
	"testing"
)

func TestObserverAnchors(t *testing.T) {
	for _, row := range []struct {
		w       Wavelength
		x, y, z float64
	}{ // CIE 015:2018; read
		{450, 0.3362, 0.0380, 1.77211}, {500, 0.0049, 0.3230, 0.2720}, {550, 0.43345, 0.99495, 0.00875},
		{555, 0.51205, 1.0, 0.00575}, {600, 1.0622, 0.6310, 0.0008}, {650, 0.2835, 0.1070, 0},
	} {
		const digits = 1e-6
		x, y, z := Observer(row.w)
		if math.Abs(x-row.x) > digits || math.Abs(y-row.y) > digits || math.Abs(z-row.z) > digits {
			t.Errorf("%v: got %g %g %g, want %g %g %g", row.w, x, y, z, row.x, row.y, row.z)
		}
		if VLambda(row.w) != y {
			t.Errorf("V(λ) at %v is %g, ȳ is %g", row.w, VLambda(row.w), y)
		}
	}
	for _, w := range []Wavelength{379.9, 780.1, 0, -5, Wavelength(math.NaN()), Wavelength(math.Inf(1))} {
		if x, y, z := Observer(w); x != 0 || y != 0 || z != 0 || VLambda(w) != 0 || DaylightD65(w) != 0 {
			t.Errorf("observer at %v is not 0", w)
		}
	}
}

func TestWhitePoints(t *testing.T) {
	for _, row := range []struct {
		name            string
		power           func(Wavelength) float64
		x, y, tolerance float64
		source          string
	}{
		{"D65", DaylightD65, 0.31271, 0.32903, 2e-5, "CIE 015:2018, sums over 5 nm; read"},
		{"equal energy", func(Wavelength) float64 { return 1 }, 1. / 3, 1. / 3, 1e-4, "exact but for the tables' rounding"},
	} {
		var sum [3]float64
		for w := Wavelength(380); w <= 780; w += 5 {
			x, y, z := Observer(w)
			p := row.power(w)
			sum = [3]float64{sum[0] + p*x, sum[1] + p*y, sum[2] + p*z}
		}
		whole := sum[0] + sum[1] + sum[2]
		if x, y := sum[0]/whole, sum[1]/whole; math.Abs(x-row.x) > row.tolerance || math.Abs(y-row.y) > row.tolerance {
			t.Errorf("%s: got %.5f, %.5f, want %.5f, %.5f ± %g (%s)", row.name, x, y, row.x, row.y, row.tolerance, row.source)
		}
	}
}

// SpectrumWavelength against its definition: the area under V(λ) from 400 nm to the
// wavelength is the share u of the whole.
func TestSpectrumInvertsItsCumulative(t *testing.T) {
	const rounding = 1e-12
	var whole float64
	area := func(to Wavelength) float64 { // exact for straight pieces: trapezia on a grid that holds the knots
		var sum float64
		for w := visibleLo; w < to; w += 0.5 {
			next := min(w+0.5, to)
			sum += float64(next-w) * (VLambda(w) + VLambda(next)) / 2
		}
		return sum
	}
	whole = area(visibleHi)
	before := Wavelength(0)
	for i := range 2001 {
		u := float64(i) / 2000
		w := SpectrumWavelength(u)
		if got := area(w) / whole; math.Abs(got-u) > rounding {
			t.Fatalf("u %g gives %v, below which lies %.15g", u, w, got)
		}
		if w <= before || w < visibleLo || w > visibleHi {
			t.Fatalf("u %g gives %v after %v", u, w, before)
		}
		before = w
	}
	if lo, hi := SpectrumWavelength(0), SpectrumWavelength(1); lo != visibleLo || hi != visibleHi {
		t.Errorf("ends at %v and %v", lo, hi)
	}
}

func BenchmarkSpectrumWavelength(b *testing.B) {
	b.ReportAllocs()
	u := 0.0
	for b.Loop() {
		if u += 0.1234; u >= 1 {
			u--
		}
		SpectrumWavelength(u)
	}
}
