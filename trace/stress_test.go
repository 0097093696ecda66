package trace

import (
	"fmt"
	"math"
	"math/rand/v2"
	"reflect"
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
		"leaf":         solid(t, box(1, 1, 1e-5)),
		"a hair wide":  stretched(t, 1e-6),
		"a house wide": stretched(t, 1e4),
		"2,000 facets": ball(t, 2000),
	}
	// A wedge that ends in an edge of a hundredth of a degree.
	sin, cos := math.Sincos(0.005 * math.Pi / 180)
	all["wedge"] = solid(t, append(box(1, 1, 1),
		facets.Plane{Normal: mgl64.Vec3{sin, 0, cos}, Distance: 0, Side: facets.Crown},
		facets.Plane{Normal: mgl64.Vec3{sin, 0, -cos}, Distance: 0, Side: facets.Pavilion})[:8])
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
		n := mgl64.Vec3{cosF, sinF, -0.01}.Normalize()
		tip = append(tip, facets.Plane{Normal: n, Distance: n[0]*cosF + n[1]*sinF, Side: facets.Pavilion})
	}
	all["tip"] = solid(t, tip)
	return all
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

// stressIndices are pairs of stone and medium.
func stressIndices() [][2]float64 {
	return [][2]float64{
		{1, 1}, {1 + 1e-9, 1}, {1, 1 + 1e-9}, {1.5 + 1e-6, 1.5}, {1.5, 1.5 + 1e-6}, {1.001, 1}, {1, 1.001}, {1.3, 1.8}, {1.77, 1}, {5, 1},
		{1, 5},
	}
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

// Tolerances of the stress set. Rays sum to 1 within sum64 or sum32, as the package says of
// every stone. What is left unresolved is bounded for every plan of the library by 1e-6; here
// cubes, needles and leaves guide light between parallel faces, where it leaves only as it
// came and by as many reflections as the guide is long, so the bound is that of the 10,000
// bounces after which tracing gives up: a ray that is totally reflected so often belongs to
// a guide ten thousand times as long as wide, and no facet here is that.
const (
	stressSum64      = 1e-9
	stressSum32      = 1e-6
	stressUnresolved = 1e-6
)

func TestStressedNumbers(t *testing.T) {
	air := plain(t, "air", 1)
	worst := 0.0
	for name, stone := range each(stressStones(t)) {
		for _, n := range stressIndices() {
			for _, view := range []View{{}, {Tilt: 45 * facets.Degree, Turn: 13 * facets.Degree}, {Tilt: 89.999 * facets.Degree, Turn: 90 * facets.Degree}} {
				what := fmt.Sprintf("%s of %g in %g at %v", name, n[0], n[1], view.Tilt)
				scene := Scene{Stone: stone, Material: plain(t, "stone", n[0]), Surroundings: Around(plain(t, "medium", n[1]), air)}
				s := Settings{View: view, Head: 10 * facets.Degree, Pixels: 8, Samples: 8, Seed: 3, Workers: 1}
				fast := mustRun(t, scene, s)
				sane(t, what, fast, stressSum32)
				s.exact = true
				exact := mustRun(t, scene, s)
				sane(t, what+" in float64", exact, stressSum64)
				for k := range exact.Columns {
					a, b := &fast.Columns[k], &exact.Columns[k]
					worst = max(worst, b.Ledger.Unresolved)
					if !(max(a.Ledger.Unresolved, b.Ledger.Unresolved) <= stressUnresolved) {
						t.Errorf("%s: %.3g and in float64 %.3g unresolved", what, a.Ledger.Unresolved, b.Ledger.Unresolved)
					}
					for q := range quantities {
						if d, allowed := q.Of(a.Ledger)-q.Of(b.Ledger), 0.01; math.Abs(d) > allowed {
							t.Errorf("%s: %v differs by %.3g, of %d rays", what, q, d, exact.Rays)
						}
					}
				}
			}
		}
	}
	t.Logf("at most %.3g unresolved", worst)
}

var _ = rand.New
var _ gems.Material
