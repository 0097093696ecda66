package trace

import (
	"context"
	"fmt"
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

func TestSymmetryIsFound(t *testing.T) {
	round := brilliant(t)
	// The same stone with one star a hundredth of a degree off.
	var planes []facets.Plane
	for i, f := range round.Facets {
		p := facets.Plane{Normal: f.Normal, Distance: f.Distance, Side: f.Side}
		if i == 20 {
			p.Normal[0] += 1e-4
			p.Normal = p.Normal.Normalize()
		}
		planes = append(planes, p)
	}
	all := stones(t)
	const source = "by construction"
	tests := []struct {
		name   string
		stone  *facets.Stone
		view   View
		turns  int
		mirror bool
	}{
		{"brilliant", round, View{}, 8, true},
		{"brilliant spun", round, View{Turn: 17 * facets.Degree}, 8, true},
		{"brilliant rocked across a main", round, View{Tilt: 10 * facets.Degree, Turn: 45 * facets.Degree}, 1, true},
		{"brilliant rocked across a half", round, View{Tilt: 10 * facets.Degree, Turn: 22.5 * facets.Degree}, 1, true},
		{"brilliant rocked askew", round, View{Tilt: 10 * facets.Degree, Turn: 17 * facets.Degree}, 1, false},
		{"one facet off", solid(t, planes), View{}, 1, false},
		{"random", randomStone(t, 40, 5), View{}, 1, false},
		{"sample plan", all["round.toml"], View{}, 8, true},
		{"block", solid(t, box(1, 0.7, 0.5)), View{}, 2, true},
		{"square block", solid(t, box(1, 1, 0.5)), View{}, 4, true},
		{"pinwheel", pinwheel(t), View{}, 5, false},
	}
	for _, test := range tests {
		tr, err := newTracer(test.stone, Settings{View: test.view})
		if err != nil {
			t.Fatal(err)
		}
		if s := tr.symmetry(test.stone, false); s.turns != test.turns || s.mirror != test.mirror {
			t.Errorf("%s: %d turns, mirror %v; want %d, %v (%s)", test.name, s.turns, s.mirror, test.turns, test.mirror, source)
		}
	}
}

func TestLightsThatTurn(t *testing.T) {
	for _, test := range []struct {
		name   string
		zenith []mgl64.Vec3
		want   bool
	}{
		{"even", nil, true},
		{"ring", nil, true},
		{"overcast", nil, true},
		{"overcast", []mgl64.Vec3{{0, 1, 1}}, false},
		{"clear", nil, false},
		{"sun", nil, false},
		{"room", nil, false},
		{"lamps", nil, false},
	} {
		l, err := FindLight(test.name, test.zenith...)
		if err != nil {
			t.Fatal(err)
		}
		if l.turns() != test.want {
			t.Errorf("%s, zenith %v: turns %v", test.name, test.zenith, !test.want)
		}
		// What is said to turn must shine alike from all around.
		for k := range 8 {
			sin, cos := math.Sincos(float64(k))
			if a, b := l.Luminance(mgl64.Vec3{0.6 * cos, 0.6 * sin, 0.8}), l.Luminance(mgl64.Vec3{0.6, 0, 0.8}); l.turns() && math.Abs(a-b) > 1e-12 {
				t.Errorf("%s turns, but shines %v and %v", test.name, a, b)
			}
		}
	}
}

// pinwheel is a stone that looks the same turned by a fifth of a turn but not mirrored.
func pinwheel(t testing.TB) *facets.Stone {
	planes := box(3, 3, 0.6)
	for i := range planes[:4] {
		planes[i].Distance = 30 // out of the way
	}
	for k := range 5 {
		for _, f := range []struct{ azimuth, angle, distance float64 }{{0, 90, 1}, {10, 45, 0.8}, {25, 130, 0.75}} {
			sin, cos := math.Sincos(f.angle * math.Pi / 180)
			y, x := math.Sincos(f.azimuth*math.Pi/180 + 2*math.Pi*float64(k)/5)
			p := facets.Plane{Distance: f.distance, Side: facets.Girdle}
			p.Normal[0], p.Normal[1], p.Normal[2] = sin*x, sin*y, cos
			p.Normal = p.Normal.Normalize()
			planes = append(planes, p)
		}
	}
	return solid(t, planes[4:])
}

// TestSectorShowsTheWholePicture compares a run over one sector with one over the
// whole picture: means within their errors, maps pixel by pixel.
func TestSectorShowsTheWholePicture(t *testing.T) {
	all := stones(t)
	for _, test := range []struct {
		name  string
		stone *facets.Stone
		view  View
	}{
		{"sample plan", all["round.toml"], View{}},
		{"rocked", all["round.toml"], View{Tilt: 12 * facets.Degree, Turn: 45 * facets.Degree}},
		{"block", solid(t, box(1, 0.7, 0.5)), View{}},
		{"pinwheel", pinwheel(t), View{Turn: 40 * facets.Degree}},
	} {
		t.Run(test.name, func(t *testing.T) {
			scene := Scene{Stone: test.stone, Material: plain(t, "stone", 1.76), Surroundings: Around([]*gems.Material{plain(t, "air", 1), plain(t, "water", 1.333)}...)}
			settings := Settings{View: test.view, Head: 10 * facets.Degree, Wavelength: 550, Pixels: 12, Samples: 1500}
			sector := mustRun(t, scene, settings)
			settings.Seed = 1
			r, err := newRun(scene, settings)
			if err != nil {
				t.Fatal(err)
			}
			if r.images == 1 {
				t.Fatal("no symmetry found: nothing to compare")
			}
			r.lay(noSymmetry())
			for !r.finished() {
				if err := r.pass(context.Background()); err != nil {
					t.Fatal(err)
				}
			}
			whole := r.result()
			for k := range whole.Columns {
				a, b := sector.Columns[k], whole.Columns[k]
				for q := range quantities {
					se := math.Hypot(q.Of(a.StandardError), q.Of(b.StandardError))
					// Student's t for 15 degrees of freedom at a level of 0.0001 a row.
					if d := math.Abs(q.Of(a.Ledger) - q.Of(b.Ledger)); d > 5.2*se+1e-7 {
						t.Errorf("column %d, %v: %.6f in the sector, %.6f in the whole, %.1f standard errors", k, q, q.Of(a.Ledger), q.Of(b.Ledger), d/se)
					}
				}
				for i := range a.Map.Pixels * a.Map.Pixels {
					x, y := i%a.Map.Pixels, i/a.Map.Pixels
					in, n := a.Map.At(x, y)
					of, m := b.Map.At(x, y)
					if n < 300 || m < 300 {
						continue
					}
					// A share lies in [0, 1], so a mean of n rays strays by less than 0.5/sqrt(n).
					if d := math.Abs(in.Returned - of.Returned); d > 5*math.Hypot(0.5/math.Sqrt(float64(n)), 0.5/math.Sqrt(float64(m))) {
						t.Errorf("column %d, %s: returned %.4f in the sector, %.4f in the whole", k, fmt.Sprintf("pixel %d, %d", x, y), in.Returned, of.Returned)
					}
				}
			}
		})
	}
}
