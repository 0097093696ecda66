package trace

import (
	"context"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// ofIndices is a material of constant indices: two for a uniaxial one, three for a
// biaxial one.
func ofIndices(t testing.TB, name string, indices ...float64) *gems.Material {
	t.Helper()
	m := plain(t, name, indices[0])
	for _, n := range indices[1:] {
		m.Rays = append(m.Rays, plain(t, name, n).Rays[0])
	}
	return m
}

// about returns principal axes of which the third is an optic axis.
func about(axis vec) *orientation {
	across := fresh(axis)
	return &orientation{across.a, across.b, axis}
}

// doubleSlow follows both waves at every facet by recursion.
type doubleSlow struct {
	slow
	c      crystal
	axes   [2]vec     // optic axes that the isotropic oracle has the waves' directions from
	absorb [3]float64 // natural absorption per mm along the principal axes
	deep   int        // bounces after which what is left counts as unresolved
	equal  bool       // the isotropic oracle
}

// sheds enters light that leaves along out.
func (o *doubleSlow) sheds(power float64, out mgl64.Vec3) {
	switch up := out.Dot(o.eye); {
	case power == 0:
	case up <= 0:
		o.ledger.Leaked += power
	case up > o.headCos:
		o.ledger.Head += power
	default:
		o.ledger.Returned += power
	}
}

func (o *doubleSlow) enter(facet int, x mgl64.Vec3) Ledger {
	d, v := o.eye.Mul(-1), o.planes[facet].Normal.Mul(-1)
	if o.equal {
		mirrored, _, in, es := meet(unpolarised(d, 1), d, v, o.m, o.n)
		o.ledger = Ledger{Surface: power(mirrored)}
		o.part(facet, x, in, es, 0)
		return o.ledger
	}
	l := fresh(fromMgl(d))
	e := outside(o.c, &l, fromMgl(d), fromMgl(v), o.m)
	o.ledger = Ledger{Surface: e.mirrored.i}
	for i, w := range e.waves {
		o.wave(facet, x, w, e.power[i], 0)
	}
	return o.ledger
}

// next returns the facet that a ray from one facet meets next, and where.
func (o *doubleSlow) next(from int, x, d mgl64.Vec3) (exit int, at mgl64.Vec3, s float64) {
	s = math.Inf(1)
	for j, f := range o.planes {
		if slope := f.Normal.Dot(d); slope > 0 && j != from {
			if t := (f.Distance - f.Normal.Dot(x)) / slope; t < s {
				exit, s = j, t
			}
		}
	}
	return exit, x.Add(d.Mul(s)), s
}

func (o *doubleSlow) wave(from int, x mgl64.Vec3, w wave, power float64, depth int) {
	if power < 1e-9 || depth == o.deep {
		o.ledger.Unresolved += power
		return
	}
	exit, x, s := o.next(from, x, w.ray.mgl())
	left := math.Exp(-o.c.absorption(w.k, w.extra, o.absorb) * s)
	o.ledger.Absorbed += power * (1 - left)
	power *= left
	at := inside(o.c, w.k, w.extra, fromMgl(o.planes[exit].Normal), o.m)
	o.sheds(power*at.through.i, at.out.mgl())
	for i, b := range at.back {
		o.wave(exit, x, b, power*at.power[i], depth+1)
	}
}

// part is the isotropic oracle: one index, but the fields along d are split into the same
// two directions as a crystal's waves have, and the phase between those is forgotten.
func (o *doubleSlow) part(from int, x, d mgl64.Vec3, es []field, depth int) {
	// Fresnel's construction, see biaxial.
	one, two := d.Cross(o.axes[0].mgl()).Normalize(), d.Cross(o.axes[1].mgl()).Normalize()
	a := one.Add(two)
	if a.Len() < 1 {
		a = one.Sub(two)
	}
	a = a.Normalize()
	b := d.Cross(a)
	for _, dir := range []mgl64.Vec3{a, b} {
		sum := 0.0
		for _, e := range es {
			sum += square(e.along(dir))
		}
		if sum < 1e-9 || depth == o.deep {
			o.ledger.Unresolved += sum
			continue
		}
		exit, x, _ := o.next(from, x, d)
		v := o.planes[exit].Normal
		back, through, out, _ := meet([]field{along(dir, complex(math.Sqrt(sum), 0))}, d, v, o.n, o.m)
		o.sheds(through, out)
		o.part(exit, x, d.Sub(v.Mul(2*d.Dot(v))), back, depth+1)
	}
}

// TestSmallBirefringence lets the two indices approach each other: the ledger of every
// ray must approach that of a singly refracting stone in which the same is forgotten,
// and not that of one in which nothing is.
func TestSmallBirefringence(t *testing.T) {
	const source = "an isotropic stone that forgets the phase between the same two directions"
	rng := rand.New(rand.NewPCG(9, 1))
	apart, rays := 0.0, 0.0
	differ := map[float64]float64{}
	for _, s := range each(stones(t)) {
		view := View{Tilt: facets.Angle(rng.Float64()) / 2, Turn: facets.Angle(rng.Float64() * 6)}
		tr := prepare(t, s, view, false)
		tr.faint = 0
		o := turned(rng)
		for ray := range 8 {
			facet, at, ok := tr.outline.enter(tr.outline.half*(2*rng.Float64()-1),
				tr.outline.half*(2*rng.Float64()-1))
			if !ok {
				continue
			}
			rays++
			x := tr.body.place(at)
			// A uniaxial stone and a biaxial one in turn, its optic axes 66 degrees apart.
			middle := 0.3 * float64(ray%2)
			sin, cos := math.Sqrt(middle), math.Sqrt(1-middle)
			oracle := doubleSlow{deep: 8, equal: true,
				slow: slow{planes: s.Facets, n: 1.7, m: 1.333, eye: tr.outline.eye.mgl(), headCos: 2}}
			oracle.axes = [2]vec{o[2].scale(cos).plus(sin, o[0]), o[2].scale(cos).plus(-sin, o[0])}
			want := oracle.enter(facet, x)
			near(t, "sum", want.Sum(), 1, 1e-9, "light is neither made nor lost")
			for _, birefringence := range []float64{1e-5, 1e-7} {
				double := oracle
				double.equal = false
				double.c = newCrystal(&o, gems.Principal{1.7, 1.7 + middle*birefringence, 1.7 + birefringence})
				got := double.enter(facet, x)
				for q := range quantities {
					differ[birefringence] += math.Abs(q.Of(got) - q.Of(want))
				}
			}
			var none sums
			full := tr.follow(facet, at, 1.7, 1.333, 0, &none)
			apart += max(0, math.Abs(full.Returned-want.Returned)-want.Unresolved)
		}
	}
	// A ray turns by about its bounces times the birefringence, and more where it leaves
	// close to the critical angle.
	near(t, "mean difference at birefringence 1e-5", differ[1e-5]/rays, 0, 1e-4, source)
	near(t, "mean difference at birefringence 1e-7", differ[1e-7]/rays, 0, 1e-6, source)
	if apart < 1000*differ[1e-7] || rays < 30 {
		t.Errorf("%v rays: a stone that forgets nothing differs by %g only: this check cannot fail", rays,
			apart/rays)
	}
}

// TestChosenBranches compares the tracer, which follows one reflected wave by the throw
// of a die, with both followed: the mean over many throws is the same. The indices are
// far apart and each wave has its colour.
func TestChosenBranches(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 2))
	one, two := ofIndices(t, "stone", 1.8, 1.55), ofIndices(t, "stone", 1.55, 1.62, 1.8)
	air := plain(t, "air", 1)
	const throws = 1500
	// One ray a stone, five entries, two-sided: a level of 0.001 altogether.
	const limit = 4.3
	biaxial := false // every other stone
	for name, s := range each(stones(t)) {
		tr := general(t, s, View{Tilt: 0.2, Turn: facets.Angle(rng.Float64() * 6)}, air, false)
		tr.faint, tr.headCos = 1e-4, math.Cos(10*math.Pi/180)
		axes := turned(rng)
		tr.axes = &axes
		stone, natural := one, [3]float64{0.2, 0.2, 0.05}
		if biaxial {
			stone, natural = two, [3]float64{0.2, 0.02, 0.1}
		}
		biaxial = !biaxial
		at := at550(tr, stone)
		unit := tr.body.unit
		at.twin.natural = natural
		facet, x, ok := tr.outline.enter(tr.outline.half*0.31, tr.outline.half*0.17)
		if !ok {
			continue
		}
		o := doubleSlow{slow: slow{planes: s.Facets, m: 1, eye: tr.outline.eye.mgl(), headCos: tr.headCos},
			c: at.twin.crystal, absorb: [3]float64{natural[0] / unit, natural[1] / unit, natural[2] / unit}, deep: 13}
		want := o.enter(facet, tr.body.place(x))
		near(t, name+": sum of both", want.Sum(), 1, 1e-9, "light is neither made nor lost")
		var mean, spread Ledger
		for i := range throws {
			var none sums
			l := tr.send(facet, x, tr.outline.eye.scale(-1), at, dice(mix(uint64(i))), &none)
			near(t, name+": sum", l.Sum(), 1, 1e-9, "light is neither made nor lost")
			for q := range quantities {
				*q.in(&mean) += q.Of(l) / throws
				*q.in(&spread) += q.Of(l) * q.Of(l) / throws
			}
		}
		for q := range quantities {
			m := q.Of(mean)
			se := math.Sqrt(max(0, q.Of(spread)-m*m) / throws)
			if q == Unresolved {
				continue // the slow one stops early
			}
			if d := math.Abs(m - q.Of(want)); d > limit*se+want.Unresolved+1e-9 {
				t.Errorf("%s: %v: mean %.6f ± %.6f, both followed %.6f", name, q, m, se, q.Of(want))
			}
		}
	}
}

// in returns where l keeps the entry that q names.
func (q Quantity) in(l *Ledger) *float64 {
	return [...]*float64{&l.Surface, &l.Returned, &l.Head, &l.Leaked, &l.Absorbed, &l.Unresolved}[q]
}

// TestDoubleScenes lets doubly refracting stones meet all there is around them.
func TestDoubleScenes(t *testing.T) {
	rng := rand.New(rand.NewPCG(9, 4))
	zircon, sphene := ofIndices(t, "zircon", 1.925, 1.984), ofIndices(t, "sphene", 1.9, 1.907, 2.034)
	air, water := plain(t, "air", 1), plain(t, "water", 1.333)
	biaxial := false
	for name, s := range each(stones(t)) {
		stone := zircon
		if biaxial {
			stone = sphene
		}
		biaxial = !biaxial
		tier := ""
		for _, f := range s.Facets {
			tier = f.Tier
		}
		scene := Scene{Stone: s, Material: stone, Axis: &mgl64.Vec3{0.3, 0.2, 0.5}, Plane: &mgl64.Vec3{0.1, 1, 0},
			Ground: &Ground{0.5}, Setting: &Setting{0.4, 0.5}}
		scene.Surroundings = []Surrounding{{Medium: air}, {Medium: water, Dish: true}}
		if tier != "" {
			scene.Surroundings = append(scene.Surroundings,
				Surrounding{Medium: water, Beyond: air, Tiers: []string{tier}})
		}
		for _, averaged := range []bool{false, true} {
			settings := Settings{Averaged: averaged, Head: 10 * facets.Degree}
			plain, err := newTracer(s, settings)
			if err != nil {
				t.Fatal(err)
			}
			for k := range scene.Surroundings {
				tr := scene.traveller(k, settings, plain)
				at := at550(tr, stone)
				for i := range 20 {
					half := plain.outline.half
					facet, x, ok := plain.outline.enter(half*(2*rng.Float64()-1), half*(2*rng.Float64()-1))
					if !ok {
						continue
					}
					var none sums
					l := tr.send(facet, x, plain.outline.eye.scale(-1), at, dice(i), &none)
					near(t, name+": sum", l.Sum(), 1, 1e-9, "light is neither made nor lost")
				}
			}
		}
	}
	// Seen along the axis, in the exact middle of everything.
	var columns []Column
	for _, stone := range []*gems.Material{zircon, sphene} {
		scene := Scene{Stone: stones(t)["round.toml"], Material: stone, Axis: &mgl64.Vec3{0, 0, 2}, Plane: &mgl64.Vec3{0, 3, 1},
			Surroundings: Around(air, plain(t, "dense", 2.4))}
		columns = append(columns, mustRun(t, scene, Settings{Wavelength: 550, Pixels: 6, Samples: 4, Below: 1}).Columns...)
	}
	// Seen exactly along an optic axis, where each ray spreads into a cone.
	c := upright(gems.Principal{1.9, 1.907, 2.034})
	bisectrix := c.one.plus(1, c.two).mgl()
	turn := mgl64.QuatBetweenVectors(c.one.mgl(), mgl64.Vec3{0, 0, 1})
	bisectrix = turn.Rotate(bisectrix)
	across := turn.Rotate(c.one.plus(-1, c.two).mgl())
	columns = append(columns, mustRun(t, Scene{Stone: stones(t)["round.toml"], Material: sphene, Axis: &bisectrix, Plane: &across,
		Surroundings: Around(air)}, Settings{Wavelength: 550, Pixels: 6, Samples: 4, Below: 1}).Columns...)
	for _, c := range columns {
		near(t, "uniform surround", c.Lit.Sum+c.Ledger.Unresolved, 1, 1e-9,
			"a lossless stone in a uniform surround shows the surround")
		near(t, "unresolved", c.Ledger.Unresolved, 0, 1e-6, "a brilliant lets its light go")
	}
}

// TestDichroism looks along and across the axis of a plate of dark tourmaline, which
// takes the ordinary ray.
func TestDichroism(t *testing.T) {
	const source = "Beer-Lambert law for each wave in the geometric series of a plate"
	const ordinary, extraordinary = 3.0, 0.1 // per mm
	s := solid(t, box(200, 200, 0.5))        // 1 mm thick
	m := ofIndices(t, "tourmaline", 1.64, 1.62)
	m.Absorption = &gems.Absorption{Wavelengths: []gems.Wavelength{400}, Ordinary: []float64{ordinary},
		Extraordinary: []float64{extraordinary}}
	through := func(axis mgl64.Vec3) float64 {
		r := mustRun(t, Scene{Stone: s, Material: m, Axis: &axis, Surroundings: Around(plain(t, "air", 1))},
			Settings{Wavelength: 589.3, Pixels: 2, Samples: 1000})
		return r.Columns[0].Ledger.Leaked
	}
	plate := func(n, a float64) float64 {
		r, left := math.Pow((n-1)/(n+1), 2), math.Exp(-a)
		return (1 - r) * (1 - r) * left / (1 - r*r*left*left)
	}
	// The end-game throws for what is fainter than 1e-4.
	near(t, "along the axis", through(mgl64.Vec3{0, 0, 1}), plate(1.64, ordinary), 1e-4, source)
	near(t, "across the axis", through(mgl64.Vec3{0, 1, 0}),
		(plate(1.64, ordinary)+plate(1.62, extraordinary))/2, 1e-4, source)
	if dark, light := through(mgl64.Vec3{0, 0, 1}), through(mgl64.Vec3{1, 0, 0}); dark > light/5 {
		t.Errorf("a tourmaline dark down its axis must come out dark: %v along, %v across", dark, light)
	}
}

// TestTrichroism looks along each principal axis of a plate with a colour for each.
func TestTrichroism(t *testing.T) {
	const source = "Beer-Lambert law for each wave in the geometric series of a plate"
	s := solid(t, box(200, 200, 0.5)) // 1 mm thick
	index, natural := [3]float64{1.62, 1.64, 1.70}, [3]float64{1.5, 0.4, 0.1}
	m := ofIndices(t, "stone", index[:]...)
	m.Absorption = &gems.Absorption{Wavelengths: []gems.Wavelength{400}, Ordinary: natural[:1], Beta: natural[1:2], Extraordinary: natural[2:]}
	plate := func(i int) float64 {
		r, left := math.Pow((index[i]-1)/(index[i]+1), 2), math.Exp(-natural[i])
		return (1 - r) * (1 - r) * left / (1 - r*r*left*left)
	}
	// The acute bisectrix is gamma's direction, the other in the plane of the axes alpha's.
	for along, row := range [3]struct{ axis, plane mgl64.Vec3 }{
		{mgl64.Vec3{1, 0, 0}, mgl64.Vec3{0, 0, 1}}, {mgl64.Vec3{1, 0, 0}, mgl64.Vec3{0, 1, 0}}, {mgl64.Vec3{0, 0, 1}, mgl64.Vec3{0, 1, 0}},
	} {
		r := mustRun(t, Scene{Stone: s, Material: m, Axis: &row.axis, Plane: &row.plane, Surroundings: Around(plain(t, "air", 1))},
			Settings{Wavelength: 589.3, Pixels: 2, Samples: 1000})
		// The end-game throws for what is fainter than 1e-4.
		near(t, "along "+[...]string{"alpha", "beta", "gamma"}[along], r.Columns[0].Ledger.Leaked,
			(plate((along+1)%3)+plate((along+2)%3))/2, 1e-4, source)
	}
}

// TestAbsorptionByDirection compares the extraordinary wave's coefficient with complex
// indices in the equation of its surface.
func TestAbsorptionByDirection(t *testing.T) {
	const source = "1/n² = cos²/no² + sin²/ne² with complex indices, Born & Wolf 15.6"
	rng := rand.New(rand.NewPCG(9, 3))
	for range 200 {
		const no, ne, small = 1.64, 1.5, 1e-7
		c := newUniaxial(vec{0, 0, 1}, no, ne)
		a, x := rng.Float64(), rng.Float64()
		d := unit(rng)
		cos2 := complex(d.z*d.z, 0)
		o, e := complex(no, small*a), complex(ne, small*x)
		n := cmplx.Sqrt(1 / (cos2/(o*o) + (1-cos2)/(e*e)))
		k := d.scale(real(n))
		// Along the ray a slab's thickness is longer than along the normal.
		near(t, "per length of the normal", c.absorption(k, true, [3]float64{a, a, x})/c.ray(k, true).dot(d), imag(n)/small,
			1e-6, source)
	}
}

// doubled sends the two waves of a ray straight down into a stone with a flat table at
// height 0 to depth below it, and returns how far apart they get there.
func doubled(c crystal, depth float64) float64 {
	down := vec{0, 0, -1}
	l := fresh(down)
	in := outside(c, &l, down, down, 1)
	o, e := in.waves[0].ray, in.waves[1].ray
	return o.scale(depth/-o.z).plus(-depth/-e.z, e).length()
}

// TestDoubling looks at the back edge of a zircon: a stone cut so that one back facet
// leaks and the other does not shows their common edge twice.
func TestDoubling(t *testing.T) {
	const minute = math.Pi / 180 / 60
	const source = "walk-off times depth, over the reading distance of 300 mm; 1 minute of arc is what the eye parts"
	tilted := vec{math.Sqrt2 / 2, 0, math.Sqrt2 / 2}
	apart := func(o, e float64) float64 { return doubled(newUniaxial(tilted, o, e), 5) / 300 / minute }
	near(t, "zircon 5 mm deep, minutes", apart(1.925, 1.984), 5*math.Tan(1.729*math.Pi/180)/300/minute, 2e-3,
		source)
	z, c, q := apart(1.925, 1.984), apart(1.76808, 1.76), apart(1.54421, 1.55331)
	if !(z > 1 && c < 1 && q < 1) {
		t.Errorf("zircon %.2f', corundum %.2f', quartz %.2f': only zircon's edges must be seen double",
			z, c, q)
	}

	// In the picture: across the edge the leak falls in two steps, one for each wave.
	sin, cos := math.Sincos(12 * math.Pi / 180)
	s := solid(t, []facets.Plane{
		{Normal: mgl64.Vec3{0, 0, 1}, Distance: 0, Side: facets.Table},
		{Normal: mgl64.Vec3{sin, 0, -cos}, Distance: 5 * cos, Side: facets.Pavilion},
		{Normal: mgl64.Vec3{-math.Sqrt2 / 2, 0, -math.Sqrt2 / 2}, Distance: 5 * math.Sqrt2 / 2,
			Side: facets.Pavilion},
		{Normal: mgl64.Vec3{1, 0, 0}, Distance: 8, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, 1, 0}, Distance: 4, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, -1, 0}, Distance: 4, Side: facets.Girdle},
	})
	tr := general(t, s, View{}, plain(t, "air", 1), false)
	tr.axes = about(tilted)
	at := at550(tr, ofIndices(t, "zircon", 1.925, 1.984))
	width := 5 * math.Tan(1.729*math.Pi/180)
	first := func(x float64) float64 { // what leaves where the ray first meets the pavilion
		j := &journey{traveller: tr, lambda: at, sums: &sums{}}
		j.land(0, leg{x: tr.body.relative(mgl64.Vec3{x, 0.3, 0}), d: vec{0, 0, -1},
			light: fresh(vec{0, 0, -1})})
		for _, l := range j.stack {
			if l.inside {
				j.runDouble(l)
			}
		}
		return j.window
	}
	// The extraordinary ray walks away from the axis in a positive crystal.
	middle := doubledStep(first, width)
	near(t, "width of the step, mm", middle, width, 2e-3, source)
}

// doubledStep finds the two places where f steps, about half its height each, and
// returns how far apart they are.
func doubledStep(f func(float64) float64, width float64) float64 {
	high, low := f(3*width), f(-3*width)
	edge := func(level float64) float64 {
		a, b := -3*width, 3*width
		for range 50 {
			if m := (a + b) / 2; f(m) > level {
				b = m
			} else {
				a = m
			}
		}
		return a
	}
	return math.Abs(edge(low+0.75*(high-low)) - edge(low+0.25*(high-low)))
}

func TestAxisFaults(t *testing.T) {
	scene := lump(t)
	scene.Material = ofIndices(t, "zircon", 1.925, 1.984)
	topaz, err := gems.Find("topaz")
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range []struct {
		name  string
		axis  mgl64.Vec3
		stone *gems.Material
		film  []Coating
		want  string
	}{
		{"no length", mgl64.Vec3{}, scene.Material, nil, "length zero"},
		{"no number", mgl64.Vec3{math.NaN(), 0, 1}, scene.Material, nil, "finite"},
		{"endless", mgl64.Vec3{0, math.Inf(1), 1}, scene.Material, nil, "finite"},
		{"film", mgl64.Vec3{0, 0, 1}, scene.Material, []Coating{{Film: Film{Index: 1.4}}}, "film"},
		{"biaxial", mgl64.Vec3{0, 0, 1}, topaz, nil, "biaxial"},
		{"biaxial, no length", mgl64.Vec3{}, topaz, nil, "length zero"},
	} {
		s := scene
		s.Axis, s.Material, s.Coatings = &row.axis, row.stone, row.film
		if _, err := Run(context.Background(), s, Settings{Wavelength: 550}, nil); err == nil ||
			!strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: error %v must say %q", row.name, err, row.want)
		}
	}
}

// TestPlaneFaults has the acute bisectrix right and the plane of the optic axes wrong.
func TestPlaneFaults(t *testing.T) {
	scene := lump(t)
	scene.Material, scene.Axis = ofIndices(t, "topaz", 1.619, 1.621, 1.627), &mgl64.Vec3{0, 0, 2}
	for want, plane := range map[string]*mgl64.Vec3{
		"two optic axes": nil,
		"length zero":    {},
		"finite":         {math.Inf(-1), 0, 0},
		"along":          {0, 0, -1},
	} {
		scene.Plane = plane
		if _, err := Run(context.Background(), scene, Settings{Wavelength: 550}, nil); err == nil ||
			!strings.Contains(err.Error(), want) {
			t.Errorf("plane %v: error %v must say %q", plane, err, want)
		}
	}
}

// TestOrientation lays the principal axes by the sign of the material.
func TestOrientation(t *testing.T) {
	scene := lump(t)
	scene.Axis, scene.Plane = &mgl64.Vec3{0, 0, 2}, &mgl64.Vec3{0, 3, 1}
	x, y, z := vec{-1, 0, 0}, vec{0, 1, 0}, vec{0, 0, 1} // z x y is -x
	for _, row := range []struct {
		name    string
		indices []float64
		want    orientation // alpha, beta, gamma
	}{
		{"positive: gamma halves the acute angle", topaz[:], orientation{y, x, z}},
		{"negative: alpha does", aragonite[:], orientation{z, x, y}},
	} {
		scene.Material = ofIndices(t, row.name, row.indices...)
		got := scene.orientation()
		for i := range got {
			if got[i].plus(-1, row.want[i]).length() > 1e-15 {
				t.Errorf("%s: %v, want %v (definition of the acute bisectrix)", row.name, got, row.want)
			}
		}
		c := newBiaxial(got, gems.Principal(row.indices))
		if across := c.one.dot(vec{1, 0, 0}); math.Abs(across) > 1e-15 {
			t.Errorf("%s: optic axis %v out of its plane", row.name, c.one)
		}
		if lean := math.Abs(c.one.z); lean < math.Sqrt2/2 {
			t.Errorf("%s: optic axis %v more than 45 degrees from the acute bisectrix", row.name, c.one)
		}
	}
}

// TestLimits gives the critical angle at both indices where light is refracted doubly.
func TestLimits(t *testing.T) {
	scene := lump(t)
	scene.Material, scene.Axis = ofIndices(t, "zircon", 1.925, 1.984), &mgl64.Vec3{0, 1, 0}
	limits := untraced(t, scene, Settings{Wavelength: 589.3}).result().Columns[0].Limits
	if len(limits) != 2 {
		t.Fatalf("%d limits, want 2", len(limits))
	}
	near(t, "zircon in air, lower index", limits[0].Critical.Degrees(), 31.30, 5e-3,
		"asin 1/n, indices of handbooks")
	near(t, "zircon in air, higher index", limits[1].Critical.Degrees(), 30.27, 5e-3,
		"asin 1/n, indices of handbooks")
	scene.Material, scene.Plane = ofIndices(t, "topaz", topaz[:]...), &mgl64.Vec3{1, 0, 0}
	limits = untraced(t, scene, Settings{Wavelength: 589.3}).result().Columns[0].Limits
	if len(limits) != 3 {
		t.Fatalf("%d limits, want 3", len(limits))
	}
	for i, want := range []float64{38.1458, 38.0903, 37.9249} {
		near(t, "topaz in air, one of three indices", limits[i].Critical.Degrees(), want, 1e-3, "asin 1/n, indices of handbooks")
	}
	scene.Axis = nil
	if l := untraced(t, scene, Settings{Wavelength: 589.3}).result().Columns[0].Limits; l != nil {
		t.Errorf("without an axis there must be none: %v", l)
	}
}

// untraced is a run that has traced nothing yet.
func untraced(t *testing.T, scene Scene, settings Settings) *run {
	t.Helper()
	r, err := newRun(scene, settings)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// TestAxisBreaksSymmetry traces one sector of a symmetric stone only where the axis
// points along the line of sight.
func TestAxisBreaksSymmetry(t *testing.T) {
	scene := Scene{Stone: brilliant(t), Material: ofIndices(t, "zircon", 1.925, 1.984),
		Surroundings: Around(plain(t, "air", 1))}
	scene.Plane = &mgl64.Vec3{1, 0, 0}
	zircon, topaz := scene.Material, ofIndices(t, "topaz", topaz[:]...)
	for _, row := range []struct {
		stone  *gems.Material
		axis   *mgl64.Vec3
		images int
	}{{zircon, nil, 16}, {zircon, &mgl64.Vec3{0, 0, -3}, 16}, {zircon, &mgl64.Vec3{0.1, 0, 1}, 1}, {topaz, &mgl64.Vec3{0, 0, 1}, 1}} {
		scene.Material, scene.Axis = row.stone, row.axis
		if got := untraced(t, scene, Settings{Wavelength: 550}).images; got != row.images {
			t.Errorf("axis %v: %d images of a sector, want %d", row.axis, got, row.images)
		}
	}
}

// TestFollowTellsOfDoubleRefraction: a shown path of a stone that refracts doubly must say
// that it does not.
func TestFollowTellsOfDoubleRefraction(t *testing.T) {
	scene := lump(t)
	scene.Material = ofIndices(t, "zircon", 1.925, 1.984)
	for _, axis := range []*mgl64.Vec3{nil, {0, 0, 1}} {
		scene.Axis = axis
		p, ok, err := Follow(scene, 0, Settings{}, 0.5, 0.5)
		if err != nil || !ok {
			t.Fatal(ok, err)
		}
		if p.AsIfSingly != (axis != nil) || p.IndexStone != 1.925 {
			t.Errorf("axis %v: as if singly refracting is %v at index %v, want %v at the ordinary 1.925",
				axis, p.AsIfSingly, p.IndexStone, axis != nil)
		}
	}
}
