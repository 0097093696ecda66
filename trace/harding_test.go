package trace

import (
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

const harding = "Harding, Faceting limits, Gems & Gemology, Fall 1975, appendix"

// block is a long bar along y with the section of a cut stone: width 2, two faces below
// that slope by p, two above by b and a table of the given width. With a table of the
// full width it has no faces above.
func block(t testing.TB, p, b facets.Angle, table float64) *facets.Stone {
	face := func(side facets.Side, a facets.Angle, toward float64) facets.Plane {
		sin, cos := math.Sincos(a.Radians())
		if side == facets.Pavilion {
			cos = -cos
		}
		return facets.Plane{Normal: mgl64.Vec3{toward * sin, 0, cos}, Distance: sin, Side: side}
	}
	planes := []facets.Plane{
		{Normal: mgl64.Vec3{0, 0, 1}, Distance: (1 - table/2) * math.Tan(b.Radians()), Side: facets.Table},
		face(facets.Pavilion, p, 1), face(facets.Pavilion, p, -1),
		{Normal: mgl64.Vec3{0, 1, 0}, Distance: 30, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, -1, 0}, Distance: 30, Side: facets.Girdle},
	}
	if b > 0 {
		planes = append(planes, face(facets.Crown, b, 1), face(facets.Crown, b, -1))
	}
	return solid(t, planes)
}

// into follows the ray that comes from tilt degrees toward +x and meets the block's
// surface at x, between y's ends. It starts a hair inside the facet at that x.
func into(t testing.TB, s *facets.Stone, tilt, x, n float64) *Path {
	t.Helper()
	view := View{Tilt: facets.Angle(tilt) * facets.Degree}
	tr, err := newTracer(s, Settings{View: view})
	if err != nil {
		t.Fatal(err)
	}
	tr.faint = 0
	top, facet := math.Inf(1), -1
	for i, f := range s.Facets {
		if f.Normal[2] > 0 {
			if z := (f.Distance - f.Normal[0]*x) / f.Normal[2]; z < top {
				top, facet = z, i
			}
		}
	}
	return tr.path(facet, tr.body.relative(mgl64.Vec3{x, 0.3, top}), n, 1, false)
}

// TestHardingCritical has rays just inside and just outside the paper's limits.
func TestHardingCritical(t *testing.T) {
	for _, row := range []struct{ r, c, low, high, live float64 }{
		{1.45, 43.603, 43.277, 46.723, 47.737},
		{1.544, 40.366, 43.382, 46.618, 44.248},
		{1.577, 39.354, 43.416, 46.584, 43.155},
		{1.62, 38.118, 43.458, 46.542, 41.818},
		{1.654, 37.200, 43.490, 46.510, 40.823},
		{1.72, 35.549, 43.548, 46.452, 39.033},
		{1.76, 34.624, 43.581, 46.419, 38.028},
		{1.93, 31.207, 43.706, 46.294, 34.312},
		{2.158, 27.606, 43.843, 46.157, 30.383},
		{2.417, 24.440, 43.967, 46.033, 26.918},
	} {
		roof := func(p float64) *facets.Stone { return block(t, facets.Angle(p)*facets.Degree, 0, 2) }
		// Dead centre: straight down, the first face is met at its slope.
		near(t, "slope at which a dead centre ends", edgeOf(15, 60,
			func(p float64) bool { return into(t, roof(p), 0, 0.4, row.r).Bounces[0].Total }),
			row.c, 6e-4, harding+": P < C is a dead centre, C worked out")
		// The ray that runs symmetrically, in and out 5 degrees from the axis.
		for _, p := range []float64{row.low, row.high} {
			tilt := 5.0
			if p > 45 {
				tilt = -5
			}
			path := into(t, roof(p), tilt, 0.4, row.r)
			if len(path.Bounces) < 3 || !path.Bounces[0].Total && row.r > 1.46 {
				t.Fatalf("R %v, P %v: the ray is not reflected twice: %+v", row.r, p, path.Bounces)
			}
			near(t, "divergence of table-to-table rays at the limits of the head's shadow",
				path.Bounces[2].FromEye.Degrees(), 10, 0.01,
				harding+": sin(D'/2) = R sin(D/2), worked out")
		}
		// One eye 6 degrees from the axis sees the first face exactly at its critical angle.
		path := into(t, roof(row.live), -6, 0.4, row.r)
		near(t, "least incidence under a live centre", path.Bounces[0].Incidence.Degrees(), row.c, 0.01,
			harding+": sin 6° = R sin(P - C), worked out")
	}
}

// edgeOf returns where f turns from false to true between lo and hi.
func edgeOf(lo, hi float64, f func(float64) bool) float64 {
	for range 40 {
		if m := (lo + hi) / 2; f(m) {
			hi = m
		} else {
			lo = m
		}
	}
	return hi
}

// TestHardingLargestRay turns a ray until it meets the second face at the critical angle.
func TestHardingLargestRay(t *testing.T) {
	const r, p = 2.417, 40.75
	c := math.Asin(1/r) * 180 / math.Pi
	s := block(t, p*facets.Degree, 34.5*facets.Degree, 0.8)
	// Light that comes in by the bezel toward +x and meets the near face first.
	second := func(tilt float64) Bounce { return into(t, s, tilt, 0.75, r).Bounces[1] }
	tilt := edgeOf(20, 50, func(tilt float64) bool { return second(tilt).Incidence.Degrees() < c })
	first := into(t, s, tilt, 0.75, r)
	if first.Bounces[0].Facet == first.Bounces[1].Facet ||
		s.Facets[first.Bounces[1].Facet].Side != facets.Pavilion {
		t.Fatalf("the ray must meet both faces below: %+v", first.Bounces[:2])
	}
	// Its angle inside from the axis, between entry and first bounce.
	in := first.Bounces[0].At.Sub(first.Entry).Normalize()
	theta := math.Acos(-in[2]) * 180 / math.Pi
	near(t, "largest ray, printed", theta, 33.32, 0.015,
		"Harding, Diamond Design Revisited: 33.32° for 40.75°")
	near(t, "largest ray", theta, 33.310, 2e-3, harding+": 180 - C - 3P, worked out")
}

// TestHardingTables finds the largest and the smallest table: with the largest, a ray
// that grazes the table's edge reaches the culet; with the smallest, a ray that comes
// straight down just beyond the table's edge does.
func TestHardingTables(t *testing.T) {
	for _, row := range []struct {
		r, p, b       float64
		largest       float64
		smallest      float64
		printed       float64
		printedWithin float64
	}{
		{2.417, 40.75, 34.5, 0.5364, 0.4694, 0.53, 0.007},
		{2.158, 41, 34, 0.5968, 0.4310, 0, 0},
		{1.76, 41, 37, 0.7370, 0.4033, 0, 0},
		{1.74, 42, 37, 0.7596, 0.4061, 0, 0},
		{1.62, 42, 38, 0.8180, 0.3868, 0, 0},
		{1.544, 43, 42, 0.8826, 0.4247, 0, 0},
	} {
		p, b := facets.Angle(row.p)*facets.Degree, facets.Angle(row.b)*facets.Degree
		// Which face below is met first tells on which side of the culet the ray comes down.
		beyond := func(table, tilt, x float64) bool {
			s := block(t, p, b, 2*table)
			return s.Facets[into(t, s, tilt, x, row.r).Bounces[0].Facet].Normal[0] > 0
		}
		const hair = 1e-9
		const grazing = 89.7 // degrees; the sine differs from 1 by 1.4e-5, and light still gets in
		largest := edgeOf(0.2, 0.99, func(table float64) bool { return beyond(table, grazing, table-hair) })
		smallest := edgeOf(0.2, 0.99, func(table float64) bool { return beyond(table, 0, table+hair) })
		near(t, "largest table", largest, row.largest, 6e-5,
			harding+": tan C (tan P + tan B)/(tan C tan B + 1), worked out")
		near(t, "smallest table", smallest, row.smallest, 6e-5,
			harding+": tan θ (tan P + tan B)/(tan θ tan B + 1), sin B = R sin(B - θ), worked out")
		if row.printed > 0 {
			near(t, "largest table for diamond, printed", largest, row.printed, row.printedWithin,
				harding+": 53 %")
		}
	}
	// Without a bezel the ray that grazes meets the culet at a share of the width.
	s := block(t, 40.75*facets.Degree, 0, 2)
	far := edgeOf(0.1, 0.9, func(x float64) bool {
		return s.Facets[into(t, s, 89.7, x, 2.417).Bounces[0].Facet].Normal[0] > 0
	})
	near(t, "largest table without a bezel, printed", far, 0.392, 6e-4,
		"Harding, Diamond Design Revisited: 0.392")
	near(t, "largest table without a bezel", far, 0.3916, 6e-5, harding+": tan C tan P, worked out")
}

// TestHardingBezel follows rays that come straight down by the table and leave by the
// bezel opposite.
func TestHardingBezel(t *testing.T) {
	for _, row := range []struct{ r, p, b float64 }{{2.417, 40.75, 34.5}, {2.158, 41, 34}, {1.76, 41, 37}} {
		s := block(t, facets.Angle(row.p)*facets.Degree, facets.Angle(row.b)*facets.Degree, 1)
		d := 4 * (45 - row.p)
		rad := math.Pi / 180
		phi := row.b - math.Asin(row.r*math.Sin((row.b-d)*rad))/rad
		found := false
		for x := -0.49; x < 0; x += 0.02 {
			path := into(t, s, 0, x, row.r)
			if len(path.Bounces) < 3 || s.Facets[path.Bounces[2].Facet].Side != facets.Crown {
				continue
			}
			found = true
			near(t, "table-to-bezel ray outside", path.Bounces[2].FromEye.Degrees(), math.Abs(phi), 1e-6,
				harding+": sin(B - φ) = R sin(B - D)")
		}
		if !found {
			t.Errorf("R %v: no ray goes from the table to the bezel", row.r)
		}
	}
}
