package trace

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"gonum.org/v1/gonum/mat"

	"pavilight/gems"
)

// Calcite at the sodium line.
const (
	calciteO, calciteE = 1.65834, 1.48613
	ghosh              = "Ghosh, Opt. Commun. 163 (1999) 95, at D"
)

// unit returns a random direction.
func unit(rng *rand.Rand) vec {
	d := vec{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}
	return d.scale(1 / d.length())
}

// walkOff is the angle in degrees between the wave vector and the ray of the
// extraordinary wave whose wave vector lies at an angle, in degrees, from the axis.
func walkOff(o, e, degree float64) (walk, index float64) {
	// A facet across the wave vector.
	sin, cos := math.Sincos(degree * math.Pi / 180)
	f := newFacetFrame(vec{0, 0, 1}, vec{0, 0, 1})
	w := newUniaxial(vec{sin, 0, cos}, o, e).extraordinary(&f, 1)
	return math.Acos(min(1, w.ray.dot(w.k)/w.k.length())) * 180 / math.Pi, w.k.length()
}

func TestWalkOff(t *testing.T) {
	const source = "tan of the ray's angle to the axis = (no/ne)² tan of the wave's, worked out apart; indices of "
	for _, row := range []struct {
		name         string
		o, e         float64
		degree, walk float64
		tolerance    float64
		source       string
	}{
		{"calcite, the greatest", calciteO, calciteE, 41.865, 6.2695, 5e-5, source + ghosh},
		{"calcite at 45", calciteO, calciteE, 45, 6.2323, 5e-5, source + ghosh},
		{"calcite, cleavage rhomb", calciteO, calciteE, 44.61, 6.241, 5e-4,
			source + ghosh + "; angle of the axis from memory"},
		{"zircon", 1.925, 1.984, 45.86, 1.729, 5e-4, source + "handbooks"},
		{"rutile", 2.61291, 2.90865, 48.07, 6.132, 5e-4, source + "DeVore, J. Opt. Soc. Am. 41 (1951) 416"},
		{"quartz", 1.54421, 1.55331, 45.17, 0.337, 5e-4, source + "Ghosh 1999"},
		{"corundum", 1.76808, 1.76000, 44.87, 0.262, 5e-4, source + "Malitson & Dodge 1972"},
		{"Iceland crystal, 101°52' rhomb", 5.0 / 3, 1.4865, 44.61, 6 + 40.0/60, 0.25,
			"Newton, Opticks, Query 25: the unusual ray parts by 6°40', measured by hand; ordinary ratio 5:3"},
	} {
		walk, _ := walkOff(row.o, row.e, row.degree)
		near(t, row.name, walk, row.walk, row.tolerance, row.source)
	}
	most, at := 0.0, 0.0
	for degree := 30.0; degree < 60; degree += 0.001 {
		if w, _ := walkOff(calciteO, calciteE, degree); w > most {
			most, at = w, degree
		}
	}
	near(t, "calcite, where it is greatest", at, 41.865, 0.002, source+ghosh)
	_, n := walkOff(calciteO, calciteE, 45)
	near(t, "calcite, index at 45", n, 1.56517, 5e-6, "1/n² = cos²/no² + sin²/ne²; indices of "+ghosh)
}

// TestCalcitePlate sends light at normal incidence through 10 mm with the axis at 45
// degrees: two rays come out side by side, as they went in.
func TestCalcitePlate(t *testing.T) {
	c := newUniaxial(vec{math.Sqrt2 / 2, 0, math.Sqrt2 / 2}, calciteO, calciteE)
	b, err := newBody(solid(t, box(20, 20, 5)))
	if err != nil {
		t.Fatal(err)
	}
	down := vec{0, 0, -1}
	l := fresh(down)
	in := outside(c, &l, down, down, 1)
	var at [2]vec
	for i, w := range in.waves {
		start := b.relative([3]float64{1, 2, 5})
		k, s := b.exit(start, w.ray)
		at[i] = fromMgl(b.place(start.plus(s, w.ray)))
		out := inside(c, w.k, w.extra, b.normal[k], 1)
		near(t, "direction beyond the plate", out.out.plus(-1, down).length(), 0, 1e-12,
			"both faces parallel")
	}
	near(t, "ordinary ray stays", at[0].x-1, 0, 1e-12, "normal incidence")
	near(t, "extraordinary ray shifts, mm", math.Abs(at[1].x-at[0].x), 1.0920, 5e-5,
		"10 mm times the tangent of 6.2323°; "+ghosh)
	near(t, "and not aside", at[1].y-at[0].y, 0, 1e-12, "the ray stays in the plane of wave vector and axis")
}

// TestAxisAcross has the axis in the face and across the plane of incidence: there
// both waves obey Snell's law, and Fresnel's equations, each with its own index.
func TestAxisAcross(t *testing.T) {
	c := newUniaxial(vec{0, 1, 0}, calciteO, calciteE)
	sin, cos := math.Sincos(math.Pi / 4)
	d, down := vec{sin, 0, -cos}, vec{0, 0, -1}
	l := fresh(d)
	in := outside(c, &l, d, down, 1)
	angle := func(w wave) float64 { return math.Acos(w.ray.dot(down)) * 180 / math.Pi }
	near(t, "ordinary ray", angle(in.waves[0]), 25.239, 5e-4, "asin(sin 45/no); "+ghosh)
	near(t, "extraordinary ray", angle(in.waves[1]), 28.412, 5e-4, "asin(sin 45/ne); "+ghosh)
	// The ordinary field lies across the axis, in the plane: p. The other is s.
	p, s := Fresnel(1, calciteO, cos), Fresnel(1, calciteE, cos)
	near(t, "power of the ordinary wave", in.power[0], (1-p.Rp)/2, 1e-14, "Fresnel's equation for p at no")
	near(t, "power of the extraordinary wave", in.power[1], (1-s.Rs)/2, 1e-14,
		"Fresnel's equation for s at ne")
	near(t, "mirrored", in.mirrored.i, (p.Rp+s.Rs)/2, 1e-14, "Fresnel's equations")
	near(t, "polarisation of what is mirrored", in.mirrored.q, (s.Rs-p.Rp)/2, 1e-14, "Fresnel's equations")

	out := inside(c, in.waves[1].k, true, down, 1)
	near(t, "extraordinary wave, from inside", out.power[1], s.Rs, 1e-14, "Fresnel's equation for s at ne")
	near(t, "makes no ordinary one", out.power[0], 0, 1e-28, "symmetry about the plane of incidence")
}

// meeting is light that meets a facet of a uniaxial or a biaxial crystal at random.
func meeting(rng *rand.Rand) (c crystal, v vec, m float64) {
	o := turned(rng)
	n := 1.3 + 1.5*rng.Float64()
	e := n * (1 + 0.3*(rng.Float64()-0.5))
	p := gems.Principal{n, n, e}
	if rng.IntN(2) == 1 {
		p[1] += (e - n) * rng.Float64()
	}
	return newCrystal(&o, p), unit(rng), 1 + rng.Float64()
}

// turned returns principal axes at random.
func turned(rng *rand.Rand) orientation {
	z := unit(rng)
	x := unit(rng).cross(z)
	x = x.scale(1 / x.length())
	return orientation{x, z.cross(x), z}
}

// waveAlong returns the wave vector along the unit vector n of one of a crystal's waves.
func waveAlong(c crystal, n vec, extra bool) vec {
	waves := c.entering(newFacetFrame(n, n))
	if extra {
		return waves[1].k
	}
	return waves[0].k
}

// rayOf returns the direction of the ray of the wave k.
func rayOf(c crystal, k vec, extra bool) vec {
	return c.at(newFacetFrame(k.scale(1/k.length()), k), k, extra).ray
}

// dielectric returns a crystal's tensor in the frame of a facet: t, s, v.
func dielectric(c crystal, f facetFrame) (eps [3][3]float64) {
	add := func(k float64, d vec) {
		parts := [3]float64{d.dot(f.t), d.dot(f.s), d.dot(f.v)}
		for i := range 3 {
			for j := range 3 {
				eps[i][j] += k * parts[i] * parts[j]
			}
		}
	}
	switch c := c.(type) {
	case *uniaxial:
		across := fresh(c.axis)
		add(c.o, across.a)
		add(c.o, across.b)
		add(c.e, c.axis)
	case *biaxial:
		for i, axis := range c.axes {
			add(c.index[i]*c.index[i], axis)
		}
	}
	return eps
}

// polarised returns a beam of one unit along d in a random state of full polarisation.
func polarised(rng *rand.Rand, d vec) beam {
	l := fresh(d)
	p := unit(rng)
	l.q, l.u, l.v = p.x, p.y, p.z
	return l
}

// TestCrystalKeepsAllLight meets facets at random from both sides.
func TestCrystalKeepsAllLight(t *testing.T) {
	rng := rand.New(rand.NewPCG(4, 4))
	const source = "light is neither made nor lost"
	total, evanescent, givenUp := 0, 0, 0
	for range 40000 {
		c, v, m := meeting(rng)
		d := unit(rng)
		if d.dot(v) < 0 {
			d = d.scale(-1)
		}
		l := polarised(rng, d)
		e := outside(c, &l, d, v, m)
		near(t, "from outside", e.mirrored.i+e.power[0]+e.power[1], 1, 1e-12, source)
		near(t, "what is mirrored stays polarised", math.Hypot(e.mirrored.q,
			math.Hypot(e.mirrored.u, e.mirrored.v)), e.mirrored.i, 1e-11,
			"a mirror does not depolarise")
		if e.power == [2]float64{} && e.waves[0].flux+e.waves[1].flux > 0 {
			givenUp++
		}
		for i, w := range e.waves {
			if e.power[i] == 0 {
				continue
			}
			u := unit(rng)
			if u.dot(w.ray) < 0 {
				u = u.scale(-1)
			}
			s := inside(c, w.k, w.extra, u, m)
			all := s.power[0] + s.power[1] + s.through.i
			if w.ray.dot(u) > 0.03 {
				near(t, "from inside", all, 1, 1e-12, source)
			} else { // rounding counts over the square of the cosine
				near(t, "from inside, grazing", all, 1, singular, source)
			}
			if f := newFacetFrame(u, w.k); s.through.i == 0 && f.size < m {
				givenUp++ // the equations failed
			} else if s.through.i == 0 {
				total++
				if s.back[0].flux == 0 || s.back[1].flux == 0 {
					evanescent++
				}
			}
		}
	}
	if total < 1000 || evanescent < 100 {
		t.Errorf("only %d total reflections, %d with a reflected wave missing, were tried", total, evanescent)
	}
	if givenUp > 4 {
		t.Errorf("%d facets were taken as mirrors since the shares did not sum to 1", givenUp)
	}
}

// TestCrystalReversed turns every wave round: each share is the same on the way back.
func TestCrystalReversed(t *testing.T) {
	const source = "reversibility of light; Lorentz's theorem for a symmetric dielectric tensor"
	rng := rand.New(rand.NewPCG(4, 5))
	for range 5000 {
		c, v, m := meeting(rng)
		d := unit(rng)
		if d.dot(v) < 0 {
			d = d.scale(-1)
		}
		l := fresh(d)
		e := outside(c, &l, d, v, m)
		for i, w := range e.waves {
			if e.power[i] == 0 {
				continue
			}
			// Out again the way it came: the two polarisations of unpolarised light have
			// half the power each.
			s := inside(c, w.k.scale(-1), w.extra, v.scale(-1), m)
			near(t, "in and out", s.through.i, 2*e.power[i], 1e-10, source)
			near(t, "direction", s.out.plus(1, d).length(), 0, 1e-10, source)
			for j, back := range s.back {
				if s.power[j] == 0 {
					continue
				}
				again := inside(c, back.k.scale(-1), back.extra, v.scale(-1), m)
				near(t, "one wave into the other", again.power[i], s.power[j], 1e-10, source)
			}
		}
	}
}

// berreman returns the four waves at a facet by eigenvectors of a matrix instead of
// closed forms: the wave vectors' parts along the normal, and the fields (Et, Es, Ht,
// Hs) of each, for the tangential wave vector size along t.
//
// With the normal components eliminated Maxwell's equations are
// d/dz (Et, Es, Ht, Hs) = i M (Et, Es, Ht, Hs): Teitler & Henvis, J. Opt. Soc. Am. 60
// (1970) 830; Berreman, J. Opt. Soc. Am. 62 (1972) 502.
func berreman(t *testing.T, c crystal, f facetFrame) (z []complex128, fields [4][]complex128) {
	t.Helper()
	eps := dielectric(c, f)
	// From k x E = H and k x H = -eps E with k = (q, 0, z); 0 is t, 1 is s, 2 is v:
	// Hv = q Es; Ev = -(eps20 Et + eps21 Es + q Hs)/eps22;
	// z Et = Hs + q Ev; z Es = -Ht; z Hs = eps00 Et + eps01 Es + eps02 Ev;
	// z Ht = q Hv - eps10 Et - eps11 Es - eps12 Ev.
	q := f.size
	ev := [4]float64{-eps[2][0] / eps[2][2], -eps[2][1] / eps[2][2], 0, -q / eps[2][2]}
	m := mat.NewDense(4, 4, nil)
	for j := range 4 {
		m.Set(0, j, q*ev[j])
		m.Set(2, j, -eps[1][2]*ev[j])
		m.Set(3, j, eps[0][2]*ev[j])
	}
	add := func(i, j int, v float64) { m.Set(i, j, m.At(i, j)+v) }
	add(0, 3, 1)
	add(1, 2, -1)
	add(2, 0, -eps[1][0])
	add(2, 1, q*q-eps[1][1])
	add(3, 0, eps[0][0])
	add(3, 1, eps[0][1])
	var eigen mat.Eigen
	if !eigen.Factorize(m, mat.EigenRight) {
		t.Fatal("no eigenvalues")
	}
	var vectors mat.CDense
	eigen.VectorsTo(&vectors)
	z = eigen.Values(nil)
	for j := range 4 {
		for i := range 4 {
			fields[j] = append(fields[j], vectors.At(i, j))
		}
	}
	return z, fields
}

// solveComplex solves a x = b by elimination.
func solveComplex(a [][]complex128, b []complex128) []complex128 {
	n := len(b)
	for i := range n {
		p := i
		for r := i; r < n; r++ {
			if cmplx.Abs(a[r][i]) > cmplx.Abs(a[p][i]) {
				p = r
			}
		}
		a[i], a[p], b[i], b[p] = a[p], a[i], b[p], b[i]
		for r := range n {
			if r == i {
				continue
			}
			k := a[r][i] / a[i][i]
			for j := range n {
				a[r][j] -= k * a[i][j]
			}
			b[r] -= k * b[i]
		}
	}
	for i := range n {
		b[i] /= a[i][i]
	}
	return b
}

// TestAgainstBerreman solves the same boundary by a matrix: waves from eigenvectors, all
// four amplitudes from one system.
func TestAgainstBerreman(t *testing.T) {
	const source = "Berreman, J. Opt. Soc. Am. 62 (1972) 502; eigenvectors by gonum"
	rng := rand.New(rand.NewPCG(4, 6))
	flux := func(f []complex128) float64 { return real(f[0]*cmplx.Conj(f[3]) - f[1]*cmplx.Conj(f[2])) }
	tried := 0
	for range 3000 {
		c, v, m := meeting(rng)
		// A wave that runs toward the facet, from inside.
		extra := rng.IntN(2) == 1
		k := waveAlong(c, unit(rng), extra)
		if rayOf(c, k, extra).dot(v) < 0 {
			k = k.scale(-1)
		}
		f := newFacetFrame(v, k)
		got := inside(c, k, extra, v, m)
		z, fields := berreman(t, c, f)

		// The incident wave is the one with its z; those whose energy runs or decays
		// back are the reflected ones.
		incident, nearest := -1, math.Inf(1)
		var back []int
		for i := range z {
			if d := cmplx.Abs(z[i] - complex(k.dot(v), 0)); d < nearest {
				incident, nearest = i, d
			}
		}
		for i := range z {
			if math.Abs(imag(z[i])) > 1e-7 && imag(z[i]) < 0 || math.Abs(imag(z[i])) <= 1e-7 &&
				flux(fields[i]) < 0 {
				back = append(back, i)
			}
		}
		if len(back) != 2 {
			t.Fatalf("%d waves run back: %v", len(back), z)
		}
		if nearest > 1e-7 {
			t.Fatalf("no wave of the matrix has z = %v: %v", k.dot(v), z)
		}
		// Unknown: two reflected, s and p beyond. Rows: Et, Es, Ht, Hs.
		zm := cmplx.Sqrt(complex(m*m-f.size*f.size, 0))
		mm := complex(m, 0)
		a := make([][]complex128, 4)
		b := make([]complex128, 4)
		s := []complex128{0, 1, -zm, 0}
		p := []complex128{zm / mm, 0, 0, mm}
		for i := range 4 {
			a[i] = []complex128{fields[back[0]][i], fields[back[1]][i], -s[i], -p[i]}
			b[i] = -fields[incident][i]
		}
		x := solveComplex(a, b)
		in := flux(fields[incident])
		if d := cmplx.Abs(z[0] - z[1]); in < 1e-3 || d < 1e-4 {
			continue // eigenvectors of like eigenvalues are uncertain
		}
		tried++
		near(t, "through, s and p", got.through.i, (flux(s)*square(x[2])+flux(p)*square(x[3]))/in, 1e-6,
			source)
		near(t, "through, s less p", got.through.q, (flux(s)*square(x[2])-flux(p)*square(x[3]))/in, 1e-6,
			source)
		if real(zm) > 0 {
			sp := x[2] * cmplx.Conj(x[3]) * zm / complex(in, 0)
			near(t, "through, phase", cmplx.Abs(complex(got.through.u, got.through.v)-2*sp), 0, 1e-6, source)
		}
		// Match by z.
		for i, w := range got.back {
			if w.flux == 0 {
				continue
			}
			for j := range back {
				if cmplx.Abs(z[back[j]]-complex(w.k.dot(v), 0)) < 1e-7 {
					near(t, "reflected", got.power[i], -flux(fields[back[j]])*square(x[j])/in, 1e-6, source)
				}
			}
		}
	}
	if tried < 2000 {
		t.Errorf("only %d meetings compared", tried)
	}
}

// BenchmarkCrystal sends a wave from facet to facet.
func BenchmarkCrystal(b *testing.B) {
	for name, p := range map[string]gems.Principal{"uniaxial": {1.619, 1.619, 1.627}, "biaxial": topaz} {
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			rng := rand.New(rand.NewPCG(4, 7))
			o := turned(rng)
			c := newCrystal(&o, p)
			var facets [64]vec
			for i := range facets {
				facets[i] = unit(rng)
			}
			w := wave{k: waveAlong(c, unit(rng), true), extra: true}
			w.ray = rayOf(c, w.k, true)
			for i := 0; b.Loop(); i++ {
				v := facets[i%len(facets)]
				if v.dot(w.ray) < 0 {
					v = v.scale(-1)
				}
				s := inside(c, w.k, w.extra, v, 1)
				if s.power[i%2] > 0 {
					w = s.back[i%2]
				}
			}
		})
	}
}
