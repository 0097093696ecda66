package trace

import (
	"math"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"pavilight/facets"
)

// soiled returns a journey at a film on the top of a plate, between indices stone and
// outside, and the facet. The film scatters with an optical depth of depth, and takes
// 1 - albedo of what it does not let by.
func soiled(t *testing.T, stone, film, outside, depth, albedo float64) (*journey, int) {
	t.Helper()
	tr := general(t, solid(t, box(2, 2, 1)), View{}, plain(t, "outside", outside), false)
	at := at550(tr, plain(t, "stone", stone))
	f := &Film{Index: film, Thickness: 50000, Scatter: depth}
	f.Extinction = depth * (1/albedo - 1) * 550 / (4 * math.Pi * f.Thickness)
	for k, n := range tr.body.normal {
		if n.z > 0.5 {
			tr.film[k] = f
			tr.dish, tr.under = &dish{}, &under{} // so that all that leaves is kept on the stack
			return &journey{traveller: tr, lambda: at, sums: new(sums)}, k
		}
	}
	t.Fatal("the plate has no top")
	return nil, 0
}

// strew sends rays onto facet k, from inside the stone or from outside, in directions
// that draw gives by the cosine to the facet, and returns the shares that come out of the
// whole facet inside and outside, and how many of the latter have been scattered.
func (j *journey) strew(k, rays int, inside bool, draw func(i int) float64) (in, out, strewn estimate) {
	n := j.body.normal[k]
	side := fresh(n).a
	count := func(e *estimate, power float64) {
		e.mean += power / float64(rays)
		e.error += power * power / float64(rays)
	}
	for i := range rays {
		j.dice = dice(mix(uint64(i) + 77))
		j.stack = j.stack[:0]
		cos := draw(i)
		d := n.scale(cos).plus(math.Sqrt(1-cos*cos), side)
		var i1, o1, s1 float64
		if inside {
			l := leg{d: d, light: fresh(d), inside: true, seen: true}
			if j.soil(k, &l) {
				j.stack = append(j.stack, l)
			}
		} else {
			d = d.plus(-2*cos, n)
			j.land(k, leg{d: d, light: fresh(d), mirror: true})
		}
		for _, l := range j.stack {
			switch {
			case l.inside:
				i1 += l.light.i
			case l.strewn:
				s1 += l.light.i
				fallthrough
			default:
				o1 += l.light.i
			}
		}
		count(&in, i1)
		count(&out, o1)
		count(&strewn, s1)
	}
	for _, e := range []*estimate{&in, &out, &strewn} {
		e.error = math.Sqrt(max(0, e.error-e.mean*e.mean) / float64(rays))
	}
	return in, out, strewn
}

func straight(int) float64 { return 1 }

// TestSoilHalfSpace compares light that a deep scattering layer sends back with the
// exact theory of half-spaces that scatter in all directions alike.
func TestSoilHalfSpace(t *testing.T) {
	const rays = 6000
	for _, albedo := range []float64{0.5, 0.9, 0.99} {
		j, k := soiled(t, 1, 1, 1, 90, albedo)
		_, back, _ := j.strew(k, rays, false, straight)
		agree(t, "sent back by a half-space", back.mean, back.error, 1-hFunction(albedo)*math.Sqrt(1-albedo), 0, 4,
			"Chandrasekhar, Radiative Transfer, 1960, ch. V: 1 - H(1) sqrt(1 - albedo), H solved from its integral equation")
	}
	j, k := soiled(t, 1.5, 1.5, 1, 90, 0.9)
	_, back, _ := j.strew(k, 3*rays, false, straight)
	agree(t, "the same under a surface of index 1.5", back.mean, back.error, 0.26, 0.0005, 4,
		"Giovanelli, Optica Acta 2 (1955) 153: 0.2600; value from memory")
}

// hFunction is Chandrasekhar's H at cosine 1 for scattering in all directions alike,
// by iteration on 1/H(u) = sqrt(1-a) + a/2 integral of x H(x)/(x+u) over 0 to 1 (his
// equation (18) of ch. V).
func hFunction(albedo float64) float64 {
	const points = 64
	x, w := make([]float64, points), make([]float64, points)
	quad.Legendre{}.FixedLocations(x, w, 0, 1)
	h := make([]float64, points)
	for i := range h {
		h[i] = 1
	}
	at := func(u float64) float64 {
		s := math.Sqrt(1 - albedo)
		for i := range x {
			s += albedo / 2 * w[i] * x[i] * h[i] / (x[i] + u)
		}
		return 1 / s
	}
	for range 300 {
		next := make([]float64, points)
		for i := range x {
			next[i] = at(x[i])
		}
		h = next
	}
	return at(1)
}

// TestSoilBetweenMedia holds a film that absorbs nothing to the law that makes equal what
// it passes either way between two uniform fields of light, each with n squared.
func TestSoilBetweenMedia(t *testing.T) {
	const rays = 20000
	rng := rand.New(rand.NewPCG(3, 9))
	lambertian := func(int) float64 { return math.Sqrt(1 - rng.Float64()) }
	for _, depth := range []float64{0.2, 2, 20} {
		j, k := soiled(t, 1.77, 1.48, 1, depth, 1)
		stayed, out, _ := j.strew(k, rays, true, lambertian)
		near(t, "kept and let out", stayed.mean+out.mean, 1, 1e-9, "light is neither made nor lost")
		in, back, _ := j.strew(k, rays, false, lambertian)
		near(t, "let in and sent back", in.mean+back.mean, 1, 1e-9, "light is neither made nor lost")
		agree(t, "let out of a stone, times n squared", 1.77*1.77*out.mean, 1.77*1.77*out.error, in.mean, in.error, 4,
			"Stokes's and Kirchhoff's reciprocity of uniform fields")
	}
}

// TestSoilWithoutDust takes the dust out of a soiled film.
func TestSoilWithoutDust(t *testing.T) {
	const rays = 20000
	for _, degree := range []float64{0, 20, 33, 40, 60} {
		cos := math.Cos(degree * math.Pi / 180)
		j, k := soiled(t, 1.77, 1.48, 1, 1e-9, 1)
		c := filmCrossing(1.77, *j.film[k], 1, cos, 550)
		in, _, _ := j.strew(k, rays, true, func(int) float64 { return cos })
		agree(t, "kept by a film with hardly any dust", in.mean, in.error+1e-9, (c.rs+c.rp)/2, 0, 4, "R1 + T1^2 R2/(1 - R1 R2)")
	}
	// Of an unhindered beam e^-depth is not scattered.
	const depth = 0.7
	j, k := soiled(t, 1, 1, 1, depth, 1)
	_, out, strewn := j.strew(k, rays, true, straight)
	agree(t, "not scattered", out.mean-strewn.mean, math.Sqrt(0.25/rays), math.Exp(-depth), 0, 4, "Beer-Lambert law")
}

// TestSoilDulls puts soil on the pavilion of a bundled stone: what a clear film leaves
// bright, soil does not.
func TestSoilDulls(t *testing.T) {
	s := stones(t)["round.toml"]
	run := func(f Film, view View) Column {
		scene := Scene{Stone: s, Material: plain(t, "stone", 1.77), Surroundings: Around(plain(t, "air", 1)),
			Coatings: []Coating{{Tiers: []string{"P1", "P2"}, Film: f}}}
		c := mustRun(t, scene, Settings{Wavelength: 550, View: view, Seed: 3, Pixels: 8, Samples: 200}).Columns[0]
		near(t, "sum", c.Ledger.Sum(), 1, 1e-9, "light is neither made nor lost")
		return c
	}
	estimates := func(c Column, q Quantity) estimate { return estimate{q.Of(c.Ledger), q.Of(c.StandardError)} }
	for _, view := range []View{{}, {Tilt: 12 * facets.Degree, Turn: 1}} {
		clear := run(Film{Index: 1.48, Thickness: 20000}, view)
		dusty := run(Film{Index: 1.48, Thickness: 20000, Scatter: 0.5}, view)
		dirty := run(Film{Index: 1.48, Thickness: 20000, Scatter: 0.5, Extinction: 0.001}, view)
		above(t, "leaked under dust more than under a clear film", estimates(dusty, Leaked), estimates(clear, Leaked), 10,
			"Harding, Gems & Gemology 1975: oil keeps the critical angle; dust throws light within it")
		above(t, "absorbed by dark dust", estimates(dirty, Absorbed), estimate{}, 10, "Beer-Lambert law")
		above(t, "returned under dust more than under dark dust", estimates(dusty, Returned), estimates(dirty, Returned), 10, "the same")
	}
}
