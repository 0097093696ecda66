package trace

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// prepare makes a stone ready and lets no path end early.
func prepare(t *testing.T, s *facets.Stone, view View, averaged bool) *tracer {
	t.Helper()
	tr, err := newTracer(s, Settings{View: view})
	if err != nil {
		t.Fatal(err)
	}
	tr.faint, tr.averaged = 0, averaged
	return tr
}

// toward returns the view whose eye lies in the direction d from the stone.
func toward(d mgl64.Vec3) View {
	return View{Tilt: facets.Angle(math.Acos(max(-1, min(1, d[2])))), Turn: facets.Angle(math.Atan2(d[1], d[0]))}
}

func mustFollow(t *testing.T, tr *tracer, n, m, u, v float64) *Path {
	t.Helper()
	facet, x, ok := tr.outline.enter(u, v)
	if !ok {
		t.Fatalf("the ray at %v, %v passes beside the stone", u, v)
	}
	return tr.path(facet, x, n, m, false)
}

// TestSlab is a plane-parallel plate, all orders of reflection summed without
// interference: it lets (1-R)/(1+R) through.
func TestSlab(t *testing.T) {
	const source = "geometric series of a plane-parallel plate"
	s := solid(t, box(200, 200, 0.05)) // wide enough that no order reaches the rim
	// Up to 45 degrees what comes back goes into the eye's half of space.
	for _, n := range []float64{1.333, 1.5, 2.417} {
		for _, degree := range []float64{0, 20, 40} {
			for _, averaged := range []bool{true, false} {
				tr := prepare(t, s, View{Tilt: facets.Angle(degree) * facets.Degree}, averaged)
				facet, x, _ := tr.outline.enter(0, 0)
				var none sums
				l := tr.follow(facet, x, n, 1, 0, &none)
				r := Fresnel(1, n, math.Cos(degree*math.Pi/180))
				plate := func(r float64) float64 { return (1 - r) / (1 + r) }
				want := (plate(r.Rs) + plate(r.Rp)) / 2
				if averaged {
					want = plate(r.Mean())
				}
				near(t, "goes through", l.Leaked, want, 1e-12, source)
				near(t, "comes back", l.Surface+l.Returned, 1-want, 1e-12, source)
				if degree == 0 {
					near(t, "goes straight through", l.Leaked, 2*n/(n*n+1), 1e-12, "2n/(n^2+1), the same at normal incidence")
				}
			}
		}
	}
}

// TestBoxTraps sends light in all directions from inside a lossless box: the share
// that meets every face beyond the critical angle never leaves.
func TestBoxTraps(t *testing.T) {
	tr := prepare(t, solid(t, box(1, 1.3, 0.7)), View{}, true)
	rng := rand.New(rand.NewPCG(3, 3))
	const rays = 40000
	for _, row := range []struct{ n, trapped float64 }{{1.5, 0.236068}, {1.76808, 0.474069}, {2.41726, 0.731251}} {
		trapped := 0
		for range rays {
			x := vec{0.1 * rng.Float64(), 0.1 * rng.Float64(), 0.1 * rng.Float64()}
			d := vec{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}
			d = d.scale(1 / d.length())
			caught := true
			for range 40 {
				j, s := tr.body.exit(x, d)
				x = x.plus(s, d)
				c := d.dot(tr.body.normal[j])
				caught = caught && Fresnel(row.n, 1, c).Total
				d = d.plus(-2*c, tr.body.normal[j])
			}
			if caught {
				trapped++
			}
		}
		p := row.trapped
		// Three rows, two-sided, at a level of 0.001 altogether.
		agree(t, fmt.Sprintf("trapped in a box of index %v", row.n), float64(trapped)/rays, math.Sqrt(p*(1-p)/rays), p, 0, 3.6, "3 cos C - 2, all directions alike")
	}
}

// roof is a long bar with a flat table and two faces below that slope by p.
func roof(t *testing.T, p facets.Angle) *facets.Stone {
	sin, cos := math.Sincos(p.Radians())
	return solid(t, []facets.Plane{
		{Normal: mgl64.Vec3{0, 0, 1}, Distance: 0, Side: facets.Table},
		{Normal: mgl64.Vec3{sin, 0, -cos}, Distance: 1, Side: facets.Pavilion},
		{Normal: mgl64.Vec3{-sin, 0, -cos}, Distance: 1, Side: facets.Pavilion},
		{Normal: mgl64.Vec3{0, 1, 0}, Distance: 20, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, -1, 0}, Distance: 20, Side: facets.Girdle},
	})
}

// TestRightAnglePrism turns all the light that entered.
func TestRightAnglePrism(t *testing.T) {
	s := roof(t, 45*facets.Degree)
	for _, averaged := range []bool{false, true} {
		tr := prepare(t, s, View{}, averaged)
		facet, x, ok := tr.outline.enter(0.01, 0.02)
		if !ok {
			t.Fatal("no entry")
		}
		var none sums
		l := tr.follow(facet, x, 1.5, 1, 0, &none)
		near(t, "surface", l.Surface, 0.04, 1e-12, "((n-1)/(n+1))^2")
		near(t, "returned", l.Returned, 0.96, 1e-9, "45 degrees lie beyond the critical angle of 41.81")
		near(t, "leaked", l.Leaked, 0, 0, "45 degrees lie beyond the critical angle of 41.81")
	}

	// In at one short face, out at the other, a quarter turn; into a second prism, a
	// quarter turn more.
	half := math.Sqrt2 / 2
	d := mgl64.Vec3{-half, 0, half} // in along the normal of the face toward +x
	share := 1.0
	for turn := 1; turn <= 2; turn++ {
		tr := prepare(t, s, toward(d.Mul(-1)), false)
		p := mustFollow(t, tr, 1.5, 1, 0.01, 0.02)
		if !p.Bounces[0].Total || p.Bounces[1].Total {
			t.Fatalf("prism %d: first face must turn all, second let out: %+v", turn, p.Bounces[:2])
		}
		out := p.Bounces[1]
		share *= out.Left
		near(t, "share after the prism", share, math.Pow(0.96*0.96, float64(turn)), 1e-12, "two faces at normal incidence, ((n-1)/(n+1))^2 lost at each")
		near(t, "cosine of the turn", out.Leaving.Dot(d), 0, 1e-12, "law of reflection at 45 degrees")
		// The second prism stands so that the light enters it as it did the first.
		d = mgl64.Vec3{-half, 0, half}
	}
}

// TestRoofDivergence is the plane theory of two pavilion reflections.
func TestRoofDivergence(t *testing.T) {
	for _, row := range []struct{ p, n, phi float64 }{
		{40.75, 2.417, 44.964},
		{43, 1.544, math.Asin(1.544*math.Sin(8*math.Pi/180)) * 180 / math.Pi},
	} {
		tr := prepare(t, roof(t, facets.Angle(row.p)*facets.Degree), View{}, false)
		p := mustFollow(t, tr, row.n, 1, 0.01, 0.05)
		if len(p.Bounces) < 3 {
			t.Fatalf("P %v: only %d bounces", row.p, len(p.Bounces))
		}
		third := p.Bounces[2]
		near(t, "divergence inside", third.Incidence.Degrees(), 180-4*row.p, 1e-9, "Harding, Gems & Gemology, Fall 1975: D = 4 (45 - P)")
		near(t, "divergence outside", third.FromEye.Degrees(), row.phi, 0.005, "the same with Snell's law")
	}
}

// TestMinimumDeviation of a 60 degree prism of N-BK7.
func TestMinimumDeviation(t *testing.T) {
	const n = 1.51680 // n_d, Schott's data sheet
	s := roof(t, 60*facets.Degree)
	in := math.Asin(n * math.Sin(math.Pi/6))
	// Light enters the table at that angle from its normal and leaves through the
	// face that slopes by 60 degrees.
	d := mgl64.Vec3{math.Sin(in), 0, -math.Cos(in)}
	tr := prepare(t, s, toward(d.Mul(-1)), false)
	p := mustFollow(t, tr, n, 1, 0.01, 0)
	out := p.Bounces[0].Leaving
	near(t, "deviation", math.Acos(out.Dot(d))*180/math.Pi, 38.647, 5e-4, "2 asin(n sin 30) - 60 with Schott's n_d")
}

// TestRodGuides keeps light within the acceptance cone of a square rod and loses it
// through the sides beyond.
func TestRodGuides(t *testing.T) {
	const n, m = 1.5168, 1.477
	s := solid(t, box(1, 1, 40))
	accept := math.Asin(math.Sqrt(n*n-m*m)/m) * 180 / math.Pi // numerical aperture over the medium's index
	for _, row := range []struct {
		tilt  float64
		guide bool
	}{{2, true}, {accept - 0.1, true}, {accept + 0.1, false}, {accept + 8, false}} {
		tr := prepare(t, s, View{Tilt: facets.Angle(row.tilt) * facets.Degree}, false)
		p := mustFollow(t, tr, n, m, 0, 1e-3-tr.outline.half) // on the end toward the eye
		if s.Facets[p.Facet].Side != facets.Table {
			t.Fatalf("tilt %v: the ray enters by a %v facet", row.tilt, s.Facets[p.Facet].Side)
		}
		sides, lost := 0, 0.0
		for _, b := range p.Bounces {
			if s.Facets[b.Facet].Side == facets.Girdle {
				sides++
				lost += b.Left
			}
		}
		if sides == 0 {
			t.Fatalf("tilt %v: no side was met", row.tilt)
		}
		if row.guide {
			near(t, "lost through the sides", lost, 0, 0, "acceptance cone, sin = sqrt(n^2 - m^2)/m")
		} else if !(lost > 0.05) {
			t.Errorf("tilt %v beyond the acceptance cone of %.2f: only %v lost through the sides", row.tilt, accept, lost)
		}
	}
}

// TestPathKeepsTheSum adds up what each bounce sheds; leaving one out must show.
func TestPathKeepsTheSum(t *testing.T) {
	for name, s := range each(stones(t)) {
		tr := prepare(t, s, View{Tilt: 5 * facets.Degree, Turn: 30 * facets.Degree}, false)
		p := mustFollow(t, tr, 1.6, 1, 0.031, 0.047)
		sum := p.Surface + p.Remaining
		largest := 0.0
		for _, b := range p.Bounces {
			sum += b.Left
			largest = max(largest, b.Left)
			near(t, name+": arrived", b.Arrived, b.Left+b.Stayed, 1e-12, "light is neither made nor lost")
		}
		near(t, name+": sum", sum, 1, 1e-9, "light is neither made nor lost")
		if without := sum - largest; math.Abs(without-1) <= 1e-9 {
			t.Errorf("%s: the sum without one deposit is still %v: this check cannot fail", name, without)
		}
	}
}

// TestReversibility sends light back along a path: the share is the same.
func TestReversibility(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 4))
	tried := 0
	for name, s := range each(stones(t)) {
		for _, averaged := range []bool{false, true} {
			for range 10 {
				tr := prepare(t, s, View{Tilt: facets.Angle(rng.Float64()) / 2, Turn: facets.Angle(rng.Float64() * 6)}, averaged)
				facet, x, ok := tr.outline.enter(tr.outline.half*(2*rng.Float64()-1), tr.outline.half*(2*rng.Float64()-1))
				if !ok {
					continue
				}
				p := tr.path(facet, x, 1.7, 1, false)
				for k, b := range p.Bounces {
					if b.Left < 1e-3 {
						continue
					}
					back := prepare(t, s, toward(b.Leaving), averaged)
					q := back.path(b.Facet, fromMgl(b.At).plus(-1, back.body.middle).scale(1/back.body.unit), 1.7, 1, false)
					if len(q.Bounces) <= k || q.Bounces[k].Facet != facet {
						t.Fatalf("%s: the way back of bounce %d misses facet %d", name, k, facet)
					}
					near(t, name+": share on the way back", q.Bounces[k].Left, b.Left, 1e-9, "reversibility, Helmholtz")
					near(t, name+": direction back", q.Bounces[k].Leaving.Sub(tr.outline.eye.mgl()).Len(), 0, 1e-7, "reversibility, Helmholtz")
					tried++
				}
			}
		}
	}
	if tried < 100 {
		t.Errorf("only %d ways back tried", tried)
	}
}

// TestFrame fixes the signs of the viewer's frame.
func TestFrame(t *testing.T) {
	const source = "the frame's definition: index 0 up, indices anticlockwise"
	is := func(what string, got, want mgl64.Vec3) {
		t.Helper()
		near(t, what, got.Sub(want).Len(), 0, 1e-15, source)
	}
	right, up, eye := View{}.Axes()
	is("face-up, index 0 points up", up, mgl64.Vec3{1, 0, 0})
	is("face-up, a quarter turn on points left", right, mgl64.Vec3{0, -1, 0})
	is("face-up, the table faces the eye", eye, mgl64.Vec3{0, 0, 1})

	tilt, turn := 25*facets.Degree, 70*facets.Degree
	_, _, eye = View{tilt, turn}.Axes()
	st, ct := math.Sincos(tilt.Radians())
	su, cu := math.Sincos(turn.Radians())
	is("tilted eye", eye, mgl64.Vec3{st * cu, st * su, ct})
	_, _, back := View{-tilt, turn}.Axes()
	_, _, opposite := View{tilt, turn + 180*facets.Degree}.Axes()
	is("a negative tilt is half a turn more", back, opposite)
	right, up, eye = View{tilt, turn}.Axes()
	is("right-handed", right.Cross(up), eye)
	// Without spin: the axis of the rocking keeps its place in the picture.
	axis := mgl64.Vec3{-su, cu, 0}
	near(t, "axis against right", axis.Dot(right), axis.Dot(mgl64.Vec3{0, -1, 0}), 1e-15, source)
	near(t, "axis against up", axis.Dot(up), axis.Dot(mgl64.Vec3{1, 0, 0}), 1e-15, source)
}
