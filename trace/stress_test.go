package trace

import (
	"fmt"
	"math"
	"reflect"
	"slices"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// What nobody cuts and files may still hold: the numbers must stand all of it. Nothing
// here is compared with a table; what is asked for are laws (shares sum to 1, shares are no
// negative numbers, nothing is NaN) and that the tracers agree.

// stressStones are degenerate solids by name.
func stressStones(t testing.TB) map[string]*facets.Stone {
	t.Helper()
	all := map[string]*facets.Stone{
		"brilliant":    brilliant(t),
		"cube":         solid(t, box(1, 1, 1)),
		"needle":       solid(t, box(1e-3, 1e-3, 1)),
		"needle lying": solid(t, box(1, 1e-3, 1e-3)),
		"leaf":         solid(t, box(1, 1, 1e-3)),
		"a hair wide":  stretched(t, 1e-6),
		"a house wide": stretched(t, 1e4),
	}
	if *long {
		all["2,000 facets"] = ball(t, 2000)
	}
	all["wedge"] = wedge(t, 1)
	// Facets that differ by a millionth of a turn from their neighbours, and leave slivers
	// between them: needles of facets, a thousand times as long as wide.
	slivers := box(1, 1, 1)
	for i := range 200 {
		a := 1e-3*float64(i%20) + 0.7
		sinA, cosA := math.Sincos(a)
		sinF, cosF := math.Sincos(2 * math.Pi * float64(i/20) / 10)
		slivers = append(slivers, facets.Plane{Normal: mgl64.Vec3{sinA * cosF, sinA * sinF, -cosA}, Distance: 0.7, Side: facets.Pavilion})
	}
	all["slivers"] = solid(t, slivers)
	// A pyramid so slender that light runs into its tip through hundreds of facets.
	tip := []facets.Plane{{Normal: mgl64.Vec3{0, 0, 1}, Distance: 0, Side: facets.Table}}
	for i := range 8 {
		sinF, cosF := math.Sincos(2 * math.Pi * float64(i) / 8)
		n := mgl64.Vec3{cosF, sinF, -0.05}.Normalize()
		tip = append(tip, facets.Plane{Normal: n, Distance: n[0]*cosF + n[1]*sinF, Side: facets.Pavilion})
	}
	all["tip"] = solid(t, tip)
	return all
}

// wedge is a block that ends in an edge of so many degrees.
func wedge(t testing.TB, edge float64) *facets.Stone {
	sin, cos := math.Sincos(edge / 2 * math.Pi / 180)
	return solid(t, append(box(1, 1, 1)[:4],
		facets.Plane{Normal: mgl64.Vec3{sin, 0, cos}, Side: facets.Crown},
		facets.Plane{Normal: mgl64.Vec3{sin, 0, -cos}, Side: facets.Pavilion}))
}

// stretched is the brilliant at another size.
func stretched(t testing.TB, by float64) *facets.Stone {
	var planes []facets.Plane
	for _, f := range brilliant(t).Facets {
		planes = append(planes, facets.Plane{Normal: f.Normal, Distance: f.Distance * by, Side: f.Side})
	}
	return solid(t, planes)
}

// ball is the solid between n planes that all touch one sphere, spread evenly.
func ball(t testing.TB, n int) *facets.Stone {
	var planes []facets.Plane
	for i := range n {
		z := 1 - (2*float64(i)+1)/float64(n)
		r := math.Sqrt(1 - z*z)
		sin, cos := math.Sincos(float64(i) * math.Pi * (3 - math.Sqrt(5)))
		side := facets.Crown
		if z < 0 {
			side = facets.Pavilion
		}
		planes = append(planes, facets.Plane{Normal: mgl64.Vec3{r * cos, r * sin, z}, Distance: 1, Side: side})
	}
	return solid(t, planes)
}

// stressIndices are stones and the media that they are tried in: ratios of 1 and near it
// from either side, ordinary ones and extreme ones.
func stressIndices() map[float64][]float64 {
	return map[float64][]float64{
		1:   {1, 1 + 1e-9},
		1.5: {1, 1.5 - 1e-3, 1.5 - 1e-9, 1.5, 1.5 + 1e-6, 1.8},
		5:   {1},
	}
}

// stressSamples are rays a pixel.
func stressSamples() int {
	if *long {
		return 64
	}
	return 8
}

// finite fails the test where a number anywhere in a value is none. Pictures are NaN
// outside the stone, and are asked for their fields.
func finite(t *testing.T, what string, v reflect.Value) {
	t.Helper()
	switch v.Kind() {
	case reflect.Float32, reflect.Float64:
		if x := v.Float(); math.IsNaN(x) || math.IsInf(x, 0) {
			t.Errorf("%s is %v", what, x)
		}
	case reflect.Struct:
		for i := range v.NumField() {
			if v.Type().Field(i).IsExported() {
				finite(t, what+"."+v.Type().Field(i).Name, v.Field(i))
			}
		}
	case reflect.Array, reflect.Slice:
		for i := range v.Len() {
			finite(t, fmt.Sprintf("%s[%d]", what, i), v.Index(i))
		}
	}
}

// sane fails the test where a result breaks a law.
func sane(t *testing.T, what string, r *Result, tolerance float64) {
	t.Helper()
	if r.Rays == 0 {
		t.Errorf("%s: no ray met the stone", what)
		return
	}
	for i := range r.Columns {
		c := &r.Columns[i]
		column := *c
		column.Surrounding = Surrounding{} // its materials hold no results
		finite(t, what, reflect.ValueOf(column))
		if d := c.Ledger.Sum() - 1; !(math.Abs(d) <= tolerance) {
			t.Errorf("%s: the ledger sums to 1 %+.3g", what, d)
		}
		for q := range quantities {
			// The compensating sums of float32 shares may end below 0 by as much.
			if v := q.Of(c.Ledger); !(v >= -tolerance && v <= 1+tolerance) {
				t.Errorf("%s: %v is %g", what, q, v)
			}
			for k, v := range c.Map.Field(q) {
				if inside := c.Map.Inside(k%c.Map.Pixels, k/c.Map.Pixels); inside == (v != v) || math.IsInf(float64(v), 0) {
					t.Fatalf("%s: %v is %v at pixel %d, which shows the stone: %v", what, q, v, k, inside)
				}
			}
		}
		sum := 0.0
		for _, v := range c.From {
			sum += v
		}
		if want := c.Ledger.Returned + c.Ledger.Head; math.Abs(sum-want) > tolerance {
			t.Errorf("%s: the bins by angle hold %g of %g", what, sum, want)
		}
		for _, area := range []float64{c.LeakyArea, c.WindowedArea} {
			if !(area >= 0 && area <= 1+1e-12) {
				t.Errorf("%s: an area of %g", what, area)
			}
		}
	}
}

// Tolerances of the stress set. Rays sum to 1 within stressSum64 or stressSum32, as the
// package says of every stone.
//
// Unresolved is what 10,000 bounces did not bring out. Light that runs into an edge of an
// angle α meets the two faces at most π/α times, as unfolding shows: 180 times at a degree,
// and comes again from the other faces. What goes along a leaf or a needle a thousand times
// as long as thick meets them some thousand times. What is left are the few rays that
// go round and round under the skin of the ball of 2,000 facets: a hundred-thousandth is
// the bound, ten times that of the plans of the library, which have no such facets.
const (
	stressSum64      = 1e-9
	stressSum32      = 1e-6
	stressUnresolved = 1e-5
)

func TestStressedNumbers(t *testing.T) {
	worst := 0.0
	quick := []string{"cube", "leaf", "slivers", "wedge"}
	for name, stone := range each(stressStones(t)) {
		if !*long && !slices.Contains(quick, name) {
			continue
		}
		for n, media := range stressIndices() {
			scene := Scene{Stone: stone, Material: plain(t, "stone", n)}
			for _, m := range media {
				scene.Surroundings = append(scene.Surroundings, Surrounding{Medium: plain(t, "medium", m)})
			}
			// Light in a block keeps its angles to the axes, so at 45° it would leave exactly level.
			for _, tilt := range []float64{0, 44.3, 89.9} {
				what := fmt.Sprintf("%s of %g at %g°", name, n, tilt)
				s := Settings{View: View{Tilt: facets.Angle(tilt) * facets.Degree, Turn: 13 * facets.Degree}, Head: 10 * facets.Degree,
					Pixels: 16, Samples: stressSamples(), Seed: 3}
				fast := mustRun(t, scene, s)
				sane(t, what, fast, stressSum32)
				s.exact = true
				exact := mustRun(t, scene, s)
				sane(t, what+" in float64", exact, stressSum64)
				for k := range exact.Columns {
					a, b := &fast.Columns[k], &exact.Columns[k]
					in := fmt.Sprintf("%s in %g", what, media[k])
					worst = max(worst, a.Ledger.Unresolved, b.Ledger.Unresolved)
					if !(max(a.Ledger.Unresolved, b.Ledger.Unresolved) <= stressUnresolved) {
						t.Errorf("%s: %.3g and in float64 %.3g unresolved", in, a.Ledger.Unresolved, b.Ledger.Unresolved)
					}
					// Single precision parts a ray from its double after enough bounces; from there it is
					// another ray of the same kind, so the means keep within what chance allows.
					const rounding, errors = 1e-5, 5
					for q := range quantities {
						d, allowed := q.Of(a.Ledger)-q.Of(b.Ledger), rounding+errors*math.Hypot(q.Of(a.StandardError), q.Of(b.StandardError))
						if !(math.Abs(d) <= allowed) {
							t.Errorf("%s: %v differs by %.3g of %d rays, allowed %.3g", in, q, d, exact.Rays, allowed)
						}
					}
				}
			}
		}
	}
	t.Logf("at most %.3g unresolved", worst)
}

// An edge so sharp that 10,000 bounces are not enough says so, and loses nothing.
func TestSharpestEdge(t *testing.T) {
	scene := Scene{Stone: wedge(t, 0.005), Material: plain(t, "stone", 1.77), Surroundings: Around(plain(t, "air", 1))}
	r := mustRun(t, scene, Settings{View: View{Tilt: 89.9 * facets.Degree}, Pixels: 16, Samples: 64, Seed: 3, exact: true})
	sane(t, "an edge of 0.005°", r, stressSum64)
	if u := r.Columns[0].Ledger.Unresolved; !(u > stressUnresolved) {
		t.Errorf("%.3g unresolved: is the bound of bounces gone?", u)
	}
}

// The general tracer stands extremes of all that it knows.
func TestStressedSurroundings(t *testing.T) {
	air, water, uniaxial, biaxial := plain(t, "air", 1), plain(t, "water", 1.333), stressed(t, 1.7, 1.7+1e-9), stressed(t, 1.7, 1.7+1e-7, 1.9)
	lean, side := &mgl64.Vec3{1e-9, 0, 1}, &mgl64.Vec3{0, 1, 0}
	dark := *plain(t, "dark", 1.77)
	dark.Absorption = &gems.Absorption{Wavelengths: []gems.Wavelength{400, 700}, Ordinary: []float64{1e4, 1e4}, Extraordinary: []float64{1e4, 1e4}}
	all := stressStones(t)
	film := func(f Film) []Coating { return []Coating{{Film: f}} }
	for what, scene := range map[string]Scene{
		"a dish of the stone's own index":  {Material: plain(t, "stone", 1.5), Surroundings: []Surrounding{{Medium: plain(t, "medium", 1.5+1e-9), Dish: true}}},
		"a dish of a denser liquid":        {Material: plain(t, "stone", 1.5), Surroundings: []Surrounding{{Medium: plain(t, "medium", 5), Dish: true}}},
		"a dish of air":                    {Material: plain(t, "stone", 5), Surroundings: []Surrounding{{Medium: air, Dish: true}}},
		"no film":                          {Material: plain(t, "stone", 1.77), Surroundings: Around(air), Coatings: film(Film{Index: 1, Thickness: 0})},
		"a film of the stone's own index":  {Material: plain(t, "stone", 1.77), Surroundings: Around(air), Coatings: film(Film{Index: 1.77, Thickness: 4999})},
		"a metal-like film":                {Material: plain(t, "stone", 1.77), Surroundings: Around(air), Coatings: film(Film{Index: 1, Extinction: 10, Thickness: 1e6})},
		"white haze":                       {Material: plain(t, "stone", 1.77), Surroundings: Around(water), Coatings: film(Film{Index: 1.5, Thickness: 1e6, Scatter: 5})},
		"white paper and a closed setting": {Material: plain(t, "stone", 1.77), Surroundings: Around(air), Ground: &Ground{1}, Setting: &Setting{1, 0}},
		"black inside":                     {Material: &dark, Surroundings: Around(air)},
		"hardly doubly refracting":         {Material: uniaxial, Axis: lean, Surroundings: Around(air, plain(t, "own", 1.7))},
		"hardly biaxial":                   {Material: biaxial, Axis: lean, Plane: side, Surroundings: Around(air)},
	} {
		for _, name := range []string{"brilliant", "leaf", "slivers"} {
			if !*long && name != "slivers" {
				continue
			}
			scene.Stone = all[name]
			for i := range scene.Coatings {
				scene.Coatings[i].Tiers = []string{""}
			}
			r := mustRun(t, scene, Settings{View: View{Tilt: 30 * facets.Degree}, Head: 10 * facets.Degree, Pixels: 16, Samples: stressSamples(), Seed: 3})
			sane(t, what+" with the "+name, r, stressSum32) // the kernel knows body colour
			for k := range r.Columns {
				if u := r.Columns[k].Ledger.Unresolved; !(u <= stressUnresolved) {
					t.Errorf("%s with the %s: %.3g unresolved", what, name, u)
				}
			}
		}
	}
}

// stressed is a material of these principal indices.
func stressed(t testing.TB, indices ...float64) *gems.Material {
	m := *plain(t, "stone", indices[0])
	first := m.Rays[0]
	m.Rays = nil
	for _, n := range indices {
		d := first
		d.Coefficients = []float64{n}
		m.Rays = append(m.Rays, d)
	}
	return &m
}

// Scramblings whose points all missed the stone leave no NaN in the errors, and do not
// count as known.
func TestErrorsWithoutRays(t *testing.T) {
	var s [scramblings]sums
	if _, se := means(&s); se != (sums{}) {
		t.Errorf("without a ray the errors are %v", se)
	}
	s[3][rayCount], s[3][Returned] = 2, 1
	if mean, se := means(&s); mean[Returned] != 0.5 || se[Returned] != unknownError || se[Leaked] != unknownError {
		t.Errorf("with one scrambling: %g ± %g", mean[Returned], se[Returned])
	}
	s[5][rayCount], s[5][Returned] = 2, 2
	if mean, se := means(&s); mean[Returned] != 0.75 || math.Abs(se[Returned]-0.25) > 1e-15 {
		t.Errorf("0.5 and 1 make %g ± %g, want 0.75 ± 0.25", mean[Returned], se[Returned])
	}
	if complete(&s) {
		t.Error("two of the scramblings pass for all")
	}
	thin := Scene{Stone: solid(t, box(1, 1e-4, 1)), Material: plain(t, "stone", 1.5), Surroundings: Around(plain(t, "air", 1))}
	r, err := newRun(thin, Settings{Pixels: 4, Samples: 1, Seed: 1, Workers: 1})
	if err != nil {
		t.Fatal(err)
	}
	for !r.finished() {
		if err := r.pass(t.Context()); err != nil {
			t.Fatal(err)
		}
	}
	if !complete(&r.columns[0].scrambled) {
		t.Error("a run ended before every scrambling met the stone")
	}
}
