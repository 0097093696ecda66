package trace

import (
	"context"
	"math"
	"math/rand/v2"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// general returns a traveller for a stone wholly in one medium.
func general(t *testing.T, s *facets.Stone, view View, medium *gems.Material, averaged bool) *traveller {
	t.Helper()
	tr := &traveller{tracer: prepare(t, s, view, averaged)}
	for range s.Facets {
		tr.medium = append(tr.medium, medium)
		tr.film = append(tr.film, nil)
	}
	return tr
}

func at550(tr *traveller, stone *gems.Material) *lambda {
	var at lambda
	tr.look(550, stone, &at)
	return &at
}

// TestTravellerAgrees compares the general tracer with the plain one ray by ray where
// both can: one medium all around.
func TestTravellerAgrees(t *testing.T) {
	rng := rand.New(rand.NewPCG(5, 6))
	stone, water := plain(t, "stone", 1.62), plain(t, "water", 1.333)
	for name, s := range each(stones(t)) {
		for _, averaged := range []bool{false, true} {
			view := View{Tilt: facets.Angle(rng.Float64()) / 2, Turn: facets.Angle(rng.Float64() * 6)}
			tr := general(t, s, view, water, averaged)
			tr.headCos = math.Cos(10 * math.Pi / 180)
			for range 10 {
				facet, x, ok := tr.outline.enter(tr.outline.half*(2*rng.Float64()-1), tr.outline.half*(2*rng.Float64()-1))
				if !ok {
					continue
				}
				var a, b sums
				want := tr.follow(facet, x, 1.62, 1.333, 0, &a)
				got := tr.send(facet, x, tr.outline.eye.scale(-1), at550(tr, stone), 0, &b)
				for q := Surface; q < quantities; q++ {
					near(t, name+": "+q.String(), q.Of(got), q.Of(want), 1e-11, "the plain tracer")
				}
				for _, i := range []int{leakyArea, windowedArea, firstFrom, firstFrom + 5} {
					near(t, name+": sums", b[i], a[i], 1e-11, "the plain tracer")
				}
			}
		}
	}
}

// TestDish checks the flat surface of a liquid above the stone.
func TestDish(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 1))
	for name, s := range each(stones(t)) {
		for _, row := range []struct{ liquid, stone float64 }{{1, 1.62}, {1.477, 1.62}, {1.477, 1.477}, {1.74, 1.62}} {
			liquid, stone := plain(t, "liquid", row.liquid), plain(t, "stone", row.stone)
			tr := general(t, s, View{Tilt: 0.1, Turn: 2}, liquid, false)
			tr.dish = &dish{liquid, 1.5}
			tr.faint = 1e-3
			for i := range 8 {
				facet, x, ok := tr.outline.enter(tr.outline.half*(2*rng.Float64()-1), tr.outline.half*(2*rng.Float64()-1))
				if !ok {
					continue
				}
				var a, b sums
				got := tr.send(facet, x, tr.outline.eye.scale(-1), at550(tr, stone), dice(i), &b)
				near(t, name+": sum", got.Sum(), 1, 1e-9, "light is neither made nor lost")
				first := math.Pow((row.liquid-1)/(row.liquid+1), 2)
				near(t, name+": surface", got.Surface, first, 1e-12, "normal incidence on the liquid")
				switch {
				case row.liquid == 1:
					want := tr.follow(facet, x, row.stone, 1, dice(i), &a)
					want.Returned, want.Surface = want.Returned+want.Surface, 0
					if up := 2*tr.toEye[facet]*tr.toEye[facet] - 1; up > 0 {
						near(t, name+": returned", got.Returned, want.Returned, 1.1e-3, "a dish of air is no dish, but for what the stone mirrors")
						near(t, name+": leaked", got.Leaked, want.Leaked, 1.1e-3, "a dish of air is no dish")
					}
				case row.liquid == row.stone:
					near(t, name+": leaked", got.Leaked, 1-first, 1e-12, "a stone in its own index is not there")
				}
			}
		}
	}
}

// TestPathInDish compares single rays in a dish with the general tracer, whose surface of
// the liquid lies so high that what it sends back does not meet the stone again.
func TestPathInDish(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 5))
	const source = "the general tracer"
	for name, s := range each(stones(t)) {
		for _, averaged := range []bool{false, true} {
			liquid, stone := plain(t, "liquid", 1.477), plain(t, "stone", 1.76)
			tr := general(t, s, View{Tilt: 0.13, Turn: 2}, liquid, averaged)
			tr.headCos, tr.faint = math.Cos(10*math.Pi/180), 1e-12
			tr.dish = &dish{liquid, 1e6}
			for range 5 {
				facet, x, ok := tr.outline.enter(tr.outline.half*(2*rng.Float64()-1), tr.outline.half*(2*rng.Float64()-1))
				if !ok {
					continue
				}
				var unused sums
				want := tr.send(facet, x, tr.outline.eye.scale(-1), at550(tr, stone), 0, &unused)
				p := tr.path(facet, x, 1.76, 1.477, true)
				got := Ledger{Surface: p.Liquid}
				// What the stone mirrors goes up through the liquid, or down.
				up := 2*tr.toEye[facet]*tr.toEye[facet] - 1
				share := func(power, up, back float64) {
					if up <= 0 {
						got.Leaked += power
						return
					}
					got.Leaked += back
					if power -= back; Fresnel(1.477, 1, up).CosT > tr.headCos {
						got.Head += power
					} else {
						got.Returned += power
					}
				}
				for _, b := range p.Bounces {
					share(b.Left, fromMgl(b.Leaving).dot(tr.outline.eye), b.Back)
				}
				if up > 0 {
					continue // its polarisation is not told
				}
				share(p.Surface, up, 0)
				const rest = 3e-4 // a path ends at 1e-4, sent three ways
				near(t, name+": surface", got.Surface, want.Surface, 1e-12, source)
				near(t, name+": leaked", got.Leaked, want.Leaked, rest, source)
				near(t, name+": returned", got.Returned, want.Returned, rest, source)
				near(t, name+": head", got.Head, want.Head, rest, source)
			}
		}
	}
}

// TestBodyColour is the plate again, with absorption.
func TestBodyColour(t *testing.T) {
	s := solid(t, box(200, 200, 0.5)) // 1 mm thick
	tr := general(t, s, View{}, plain(t, "air", 1), false)
	at := at550(tr, plain(t, "stone", 1.7))
	const natural = 0.35 // per mm
	at.absorb = natural * tr.body.unit
	facet, x, _ := tr.outline.enter(0, 0)
	var b sums
	l := tr.send(facet, x, tr.outline.eye.scale(-1), at, 0, &b)
	r, a := math.Pow(0.7/2.7, 2), math.Exp(-natural)
	const source = "Beer-Lambert law in the geometric series of a plate"
	through := (1 - r) * (1 - r) * a / (1 - r*r*a*a)
	back := r + (1-r)*(1-r)*a*a*r/(1-r*r*a*a)
	near(t, "through", l.Leaked, through, 1e-12, source)
	near(t, "back", l.Surface+l.Returned, back, 1e-12, source)
	near(t, "absorbed", l.Absorbed, 1-through-back, 1e-12, source)
}

// TestGround puts something diffuse under the stone.
func TestGround(t *testing.T) {
	air, stone := plain(t, "air", 1), plain(t, "stone", 1.54)
	for name, s := range each(stones(t)) {
		for i := range 6 {
			tr := general(t, s, View{}, air, true)
			tr.faint = 1e-3
			facet, x, ok := tr.outline.enter(tr.outline.half*0.1*float64(i-3), tr.outline.half*0.07)
			if !ok {
				continue
			}
			var b sums
			send := func() Ledger {
				return tr.send(facet, x, tr.outline.eye.scale(-1), at550(tr, stone), dice(i), &b)
			}
			bare := send()
			tr.under = &under{0, -1}
			black := send()
			near(t, name+": black paper", black.Leaked, bare.Leaked, 2e-3, "black paper sends nothing back")
			tr.under = &under{0.8, -1}
			grey := send()
			near(t, name+": sum over grey paper", grey.Sum(), 1, 1e-9, "light is neither made nor lost")
			tr.under = &under{1, -1}
			white := send()
			near(t, name+": leaked over white paper", white.Leaked, 0, 0, "white paper takes nothing")
			tr.under, tr.cup = nil, &cup{1, -2}
			set := send()
			near(t, name+": sum in a setting", set.Sum(), 1, 1e-9, "light is neither made nor lost")
		}
	}
}

// TestClosedWhiteSetting looks for light that gets past a wall that takes nothing.
func TestClosedWhiteSetting(t *testing.T) {
	s := stones(t)["round.toml"]
	scene := Scene{Stone: s, Material: plain(t, "stone", 1.5), Surroundings: Around(plain(t, "water", 1.333)), Setting: &Setting{Reflectance: 1}}
	doors, err := Doors(context.Background(), scene, 0, Settings{Wavelength: 550, Seed: 7})
	if err != nil {
		t.Fatal(err)
	}
	for _, d := range doors {
		if d.Tier == "P1" || d.Tier == "P2" {
			near(t, d.Tier+" lets out", d.Returned+d.Head+d.Leaked, 0, 0, "a closed white wall takes nothing")
		}
	}
}

// TestDishBends sends a slanting ray through a liquid's surface into a block of the same
// index: its way to the sloping face below is that of the bent ray.
func TestDishBends(t *testing.T) {
	const slope = 20 * facets.Degree
	liquid := plain(t, "liquid", 1.477)
	tr := general(t, block(t, slope, 0, 2), View{}, liquid, false)
	tr.dish = &dish{liquid, 1.5}
	at := at550(tr, liquid)
	x := tr.body.relative(mgl64.Vec3{0, 0.1, 0})
	for _, degree := range []float64{-40, 5, 30, 60} {
		sin, cos := math.Sincos(degree * math.Pi / 180)
		var b sums
		l := tr.send(0, x, vec{sin, 0, -cos}, at, 0, &b)
		r := Fresnel(1, 1.477, cos).Mean()
		near(t, "goes through", l.Leaked, 1-r, 1e-12, "Fresnel's equations at the liquid's surface")
		bent := math.Asin(math.Abs(sin) / 1.477)
		near(t, "way in the block", b[pathLength]/l.Leaked*tr.body.unit, math.Sin(slope.Radians())/math.Cos(bent-slope.Radians()), 1e-9,
			"Snell's law, and the distance of the face below")
	}
}

// TestLambert draws directions from a diffuse surface.
func TestLambert(t *testing.T) {
	const source = "Lambert's cosine law: means of the cosine and its square"
	j := &journey{}
	rng := rand.New(rand.NewPCG(8, 2))
	const throws = 20000
	n := unit(rng)
	var first, second float64
	var along vec
	for i := range throws {
		j.dice = dice(mix(uint64(i)))
		d := j.lambert(n)
		near(t, "length", d.length(), 1, 1e-12, "a direction")
		c := d.dot(n)
		first, second = first+c/throws, second+c*c/throws
		along = along.plus(1.0/throws, d)
	}
	// Variances 1/18 and 1/12 of the cosine and its square, 1/4 of each part across.
	agree(t, "mean cosine", first, math.Sqrt(1.0/18/throws), 2.0/3, 0, 4, source)
	agree(t, "mean square of the cosine", second, math.Sqrt(1.0/12/throws), 0.5, 0, 4, source)
	agree(t, "mean direction aside", along.plus(-along.dot(n), n).length(), math.Sqrt(0.5/throws), 0, 0, 4, "the same all round")
}

// TestHeadAboveDish: the head is judged where light leaves the dish. Light that comes
// straight down through a table and is reflected by a bottom slanted by α goes up at 2α,
// and by Snell's law at asin(n sin 2α) in the air whatever liquid lies between: 9.53° for
// n = 1.9 and α = 2.5°, where in water it is 7.13°. Later reflections go wider.
func TestHeadAboveDish(t *testing.T) {
	sin, cos := math.Sincos(2.5 * math.Pi / 180)
	planes := append(box(1, 1, 1)[:5], facets.Plane{Normal: mgl64.Vec3{sin, 0, -cos}, Distance: 0.5, Side: facets.Pavilion})
	scene := Scene{Stone: solid(t, planes), Material: plain(t, "stone", 1.9),
		Surroundings: []Surrounding{{Medium: plain(t, "water", 1.333), Dish: true}}}
	// What the table mirrors comes back straight, and counts within any head.
	r := math.Pow((1.9-1.333)/(1.9+1.333), 2) * math.Pow(1-math.Pow(0.333/2.333, 2), 2)
	for _, row := range []struct {
		degrees float64
		in      bool
	}{{7, false}, {8.5, false}, {9.4, false}, {9.7, true}} {
		c := &mustRun(t, scene, Settings{Head: facets.Angle(row.degrees) * facets.Degree, Pixels: 8, Samples: 8, Seed: 1}).Columns[0]
		if got := c.Ledger.Head - r; row.in != (got > 0.01) || !row.in && math.Abs(got) > 1e-3 {
			t.Errorf("within %g° of the eye come %g, wanted any: %v (Snell's law at both surfaces)", row.degrees, got, row.in)
		}
		if near, far := c.From[0]-r, c.From[1]; math.Abs(near) > 1e-3 || !(far > 0.01) {
			t.Errorf("from 0 to 5° come %g and to 10° %g (Snell's law at both surfaces)", near, far)
		}
	}
}
