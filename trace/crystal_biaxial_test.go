package trace

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"slices"
	"testing"

	"pavilight/gems"
)

// Principal indices of biaxial crystals at the sodium line.
var (
	topaz     = gems.Principal{1.619, 1.621, 1.627}
	peridot   = gems.Principal{1.654, 1.671, 1.690}
	aragonite = gems.Principal{1.5301, 1.6816, 1.6859}
)

const (
	handbooks  = "indices of handbooks"
	fromMemory = "indices from memory"
	book       = "Born & Wolf, Principles of Optics, 7th ed., "
)

// upright is a crystal whose principal axes are x, y and z, alpha first.
func upright(p gems.Principal) *biaxial {
	return newBiaxial(&orientation{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, p)
}

// strong is a crystal at random in which the indices are far apart.
func strong(rng *rand.Rand) *biaxial {
	o := turned(rng)
	n := 1.3 + 1.2*rng.Float64()
	e := n * (1 + 0.3*rng.Float64())
	return newBiaxial(&o, gems.Principal{n, n + (e-n)*rng.Float64(), e})
}

func TestFresnelWaveNormals(t *testing.T) {
	const source = "Fresnel's equation of wave normals, " + book + "15.2 (24)"
	rng := rand.New(rand.NewPCG(12, 1))
	for range 2000 {
		c := strong(rng)
		s := unit(rng)
		var slow, fast float64
		for _, extra := range []bool{false, true} {
			k := waveAlong(c, s, extra)
			n2 := k.dot(k)
			sum := 0.0
			for i, axis := range c.axes {
				j, l := (i+1)%3, (i+2)%3
				part := s.dot(axis) * s.dot(axis)
				for _, m := range []int{j, l} {
					part *= 1/n2 - 1/(c.index[m]*c.index[m])
				}
				sum += part
			}
			near(t, "sum of s² (v² - vj²)(v² - vl²)", sum, 0, 1e-15, source)
			fast, slow = slow, math.Sqrt(n2)

			e := c.inverse(c.displacement(k, extra))
			near(t, "field across the ray", e.dot(rayOf(c, k, extra)), 0, 1e-14, book+"15.2")
			near(t, "D across the wave vector", displacement(c, e).dot(s), 0, 1e-14, book+"15.2")
		}
		if fast > slow {
			t.Fatalf("index %v of the faster wave, %v of the slower", fast, slow)
		}
		d := [2]vec{}
		for i, extra := range []bool{false, true} {
			d[i] = c.displacement(waveAlong(c, s, extra), extra)
		}
		near(t, "both D at right angles", d[0].dot(d[1]), 0, 1e-13, book+"15.2")
	}
}

// displacement returns D of a field.
func displacement(c *biaxial, e vec) (d vec) {
	for i, axis := range c.axes {
		d = d.plus(c.index[i]*c.index[i]*e.dot(axis), axis)
	}
	return d
}

// TestPrincipalPlanes looks at wave vectors in the three planes that hold two principal
// axes: one wave has the third index there, and the other is a uniaxial crystal's
// extraordinary one with its walk-off.
func TestPrincipalPlanes(t *testing.T) {
	const circle = "circle and ellipse of the sections of the surface of wave vectors, " + book + "15.3.3"
	const walk = "tan of the ray's angle to a principal axis = (n across/n along)² tan of the wave's, as in a uniaxial crystal"
	axes := orientation{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}
	for _, p := range []gems.Principal{topaz, peridot, aragonite} {
		c := upright(p)
		for i := range 3 {
			j, l := (i+1)%3, (i+2)%3 // the plane of the wave vectors
			for degree := 0.5; degree < 180; degree += 7.3 {
				sin, cos := math.Sincos(degree * math.Pi / 180)
				s := axes[j].scale(cos).plus(sin, axes[l])
				across, inside := p[i], 1/math.Sqrt(cos*cos/(p[l]*p[l])+sin*sin/(p[j]*p[j]))
				isSlow := across > inside
				k := waveAlong(c, s, isSlow)
				near(t, "index of the wave that vibrates across", k.length(), across, 1e-14, circle)
				near(t, "its ray along its wave vector", rayOf(c, k, isSlow).dot(s), 1, 1e-14, circle)
				k = waveAlong(c, s, !isSlow)
				near(t, "index of the wave that vibrates in the plane", k.length(), inside, 1e-14, circle)
				ray := rayOf(c, k, !isSlow)
				tan := sin / cos * p[l] * p[l] / (p[j] * p[j])
				near(t, "tan of its ray's angle", ray.dot(axes[l])/ray.dot(axes[j])/tan, 1, 1e-12, walk)
				near(t, "its ray in the plane", ray.dot(axes[i]), 0, 1e-14, walk)
			}
		}
	}
}

// TestOpticAxes looks along the optic axes, where both waves are one.
func TestOpticAxes(t *testing.T) {
	for _, row := range []struct {
		name    string
		p       gems.Principal
		degrees float64 // between the optic axes about gamma, and below the greatest of the cone
		cone    float64
		source  string
	}{
		{"topaz", topaz, 60.18, 0.2444, handbooks},
		{"peridot", peridot, 87.74, 1.2313, handbooks},
		{"aragonite", aragonite, 180 - 17.80, 1.8637, fromMemory},
	} {
		c := upright(row.p)
		near(t, row.name+": angle between the optic axes", math.Acos(c.one.dot(c.two))*180/math.Pi, row.degrees, 0.01,
			"tan²V = (α⁻² - β⁻²)/(β⁻² - γ⁻²), worked out apart, "+book+"15.3.3; "+row.source)
		for _, axis := range []vec{c.one, c.two, c.one.scale(-1)} {
			var rays [2]vec
			for i, extra := range []bool{false, true} {
				k := waveAlong(c, axis, extra)
				near(t, row.name+": index along an optic axis", k.length(), row.p[1], 1e-15, "beta, "+book+"15.3.3")
				rays[i] = rayOf(c, k, extra)
			}
			near(t, row.name+": greatest angle in the cone of internal conical refraction",
				math.Acos(rays[0].dot(rays[1]))*180/math.Pi, row.cone, 1e-3,
				"tan = β² √((α⁻² - β⁻²)(β⁻² - γ⁻²)), worked out apart, "+book+"15.3.4; "+row.source)
		}
	}
	c := upright(aragonite)
	k := waveAlong(c, c.one, false)
	near(t, "aragonite, minutes", math.Acos(rayOf(c, k, false).dot(rayOf(c, k, true)))*180*60/math.Pi, 60+50, 5,
		"Lloyd, Trans. R. Irish Acad. 17 (1837) 145, measured the cone as 1°50'; from memory")
}

// TestOpticAxesMeetFacets lets waves along an optic axis, along a principal axis and
// close to either meet facets that lie in every special way.
func TestOpticAxesMeetFacets(t *testing.T) {
	const source = "light is neither made nor lost"
	tried := 0
	for _, p := range []gems.Principal{topaz, peridot, aragonite, {1.6, 1.6 + 1e-9, 1.7}, {1.6, 1.7 - 1e-9, 1.7}, {1.7, 1.7 + 1e-12, 1.7 + 2e-12}} {
		c := upright(p)
		ways := []vec{c.one, c.two, c.axes[0], c.axes[1], c.axes[2], c.one.plus(1, c.axes[1]).scale(math.Sqrt2 / 2)}
		for _, way := range ways {
			for _, aside := range []float64{0, 1e-15, 1e-12, 1e-9, 1e-6, 1e-3} {
				n := way.plus(aside, vec{0.3, 0.5, 0.8})
				n = n.scale(1 / n.length())
				for _, v := range append(slices.Clone(ways), c.one.cross(c.axes[1]), vec{0.36, 0.48, 0.8}, n.plus(-1+1e-7, way)) {
					if l := v.length(); l > 1e-6 {
						v = v.scale(1 / l)
					} else {
						continue
					}
					for _, m := range []float64{1, 1.333, p[1], 1.9} {
						l := fresh(n)
						if n.dot(v) > 0 {
							e := outside(c, &l, n, v, m)
							near(t, "from outside", e.mirrored.i+e.power[0]+e.power[1], 1, singular, source)
						}
						for _, extra := range []bool{false, true} {
							k := waveAlong(c, n, extra)
							if rayOf(c, k, extra).dot(v) < 1e-6 {
								continue
							}
							tried++
							s := inside(c, k, extra, v, m)
							near(t, "from inside", s.power[0]+s.power[1]+s.through.i, 1, singular, source)
							for i, b := range s.back {
								if s.power[i] > 0 && !(b.ray.length() > 0.999 && b.ray.dot(v) <= 0) {
									t.Errorf("%v: a reflected ray runs along %v at the facet %v", p, b.ray, v)
								}
							}
						}
					}
				}
			}
		}
	}
	if tried < 3000 {
		t.Errorf("only %d meetings tried", tried)
	}
}

// TestUniaxialLimit lets the middle index come close to one of the others: what a facet
// does must come close to what it does in a uniaxial crystal.
func TestUniaxialLimit(t *testing.T) {
	const source = "closed forms of a uniaxial crystal"
	rng := rand.New(rand.NewPCG(12, 2))
	most := map[float64]float64{}
	tried := 0
	for range 300 {
		o := turned(rng)
		n := 1.4 + rng.Float64()
		e := n * (1 + 0.2*rng.Float64())
		v, m := unit(rng), 1+rng.Float64()/2
		along := unit(rng)
		for _, positive := range []bool{false, true} {
			one := newUniaxial(o[2], n, e)
			if !positive {
				one = newUniaxial(o[0], e, n)
			}
			k := waveAlong(one, along, true)
			if rayOf(one, k, true).dot(v) < 0.05 || along.cross(one.axis).length() < 0.1 {
				continue // the two axes lie further apart than 1e-4 and 3e-3
			}
			tried++
			want := inside(one, k, true, v, m)
			for _, apart := range []float64{0, 1e-9, 1e-6} {
				p := gems.Principal{n, n + apart, e}
				if !positive {
					p[1] = e - apart
				}
				c := newBiaxial(&o, p)
				// The extraordinary wave is the slower one of a positive crystal.
				got := inside(c, waveAlong(c, along, positive), positive, v, m)
				if !positive {
					got.power[0], got.power[1] = got.power[1], got.power[0]
				}
				for i := range 2 {
					most[apart] = max(most[apart], math.Abs(got.power[i]-want.power[i]))
				}
				most[apart] = max(most[apart], math.Abs(got.through.i-want.through.i),
					got.out.plus(-1, want.out).length())
			}
		}
	}
	near(t, "exactly uniaxial", most[0], 0, 1e-9, source)
	near(t, "1e-9 from it", most[1e-9], 0, 1e-5, source)
	near(t, "1e-6 from it", most[1e-6], 0, 1e-2, source)
	if tried < 150 || most[1e-6] < most[0] {
		t.Errorf("%d meetings, differences %v: this check cannot fail", tried, most)
	}
}

// TestIndicesInAnyOrder lets the indices change places, as dispersion may make them do
// over the spectrum: the same crystal must come out.
func TestIndicesInAnyOrder(t *testing.T) {
	rng := rand.New(rand.NewPCG(12, 6))
	for range 200 {
		c := strong(rng)
		k := waveAlong(c, unit(rng), true)
		v, m := unit(rng), 1.0
		if rayOf(c, k, true).dot(v) < 0.05 {
			continue
		}
		want := inside(c, k, true, v, m)
		for _, order := range [][3]int{{0, 2, 1}, {1, 0, 2}, {1, 2, 0}, {2, 0, 1}, {2, 1, 0}} {
			var o orientation
			var p gems.Principal
			for i, j := range order {
				o[i], p[i] = c.axes[j], c.index[j]
			}
			got := inside(newBiaxial(&o, p), k, true, v, m)
			for i := range 2 {
				near(t, "share of a reflected wave", got.power[i], want.power[i], 1e-9, "the same tensor")
			}
			near(t, "share that goes through", got.through.i, want.through.i, 1e-9, "the same tensor")
		}
	}
}

// TestHollow finds lines that meet the slower wave's surface four times, around an optic
// axis, and holds their waves against Maxwell's equations.
func TestHollow(t *testing.T) {
	rng := rand.New(rand.NewPCG(12, 3))
	found := 0
	for range 30000 {
		c := strong(rng)
		// Nearly along the optic axis, at a facet that nearly holds it, across the plane of the axes.
		d := c.one.plus(0.02, unit(rng))
		v := c.one.cross(c.two)
		v = v.cross(c.one).plus(0.05, unit(rng))
		v = v.scale(1 / v.length())
		if c.one.dot(c.two) > 0.98 {
			continue
		}
		k := d.scale(c.index[1] * (1 + 0.03*rng.Float64()) / d.length())
		f := newFacetFrame(v, k)
		l := c.line(&f)
		if !l.hollow {
			continue
		}
		found++
		z, _ := berreman(t, c, f)
		var want, got []float64
		for i := range z {
			near(t, "imaginary part", imag(z[i]), 0, 1e-6, "Berreman's matrix, four real eigenvalues")
			want = append(want, real(z[i]))
		}
		got = []float64{real(l.inner[0]), real(l.inner[1]), real(l.outer[0]), real(l.outer[1])}
		slices.Sort(want)
		slices.Sort(got)
		for i := range got {
			near(t, "normal part of the wave vector", got[i], want[i], 1e-7, "Berreman's matrix")
		}
		for _, w := range c.entering(f) {
			if !(w.flux > 0) {
				t.Errorf("a wave that enters has the flux %v", w.flux)
			}
			s := inside(c, w.k, w.extra, v, 1)
			near(t, "sum of the shares", s.power[0]+s.power[1]+s.through.i, 1, 1e-8, "light is neither made nor lost")
		}
	}
	if found < 30 {
		t.Errorf("only %d lines through a hollow", found)
	}
}

// TestIntoDenser lets light come from a medium in which neither wave may run on: all is
// mirrored, and both waves beyond decay.
func TestIntoDenser(t *testing.T) {
	rng := rand.New(rand.NewPCG(12, 4))
	both := 0
	for range 3000 {
		c := strong(rng)
		v, m := unit(rng), c.index[2]*(1.05+0.5*rng.Float64())
		d := unit(rng)
		if d.dot(v) < 0 {
			d = d.scale(-1)
		}
		f := newFacetFrame(v, d.scale(m))
		if f.size < c.index[2] || d.dot(v) < 1e-3 {
			continue
		}
		both++
		l := polarised(rng, d)
		e := outside(c, &l, d, v, m)
		near(t, "mirrored", e.mirrored.i, 1, 1e-11, "total reflection")
		// The same by the matrix: its two eigenvectors that decay along v.
		z, fields := berreman(t, c, f)
		var in []int
		for i := range z {
			if imag(z[i]) > 0 {
				in = append(in, i)
			}
		}
		if len(in) != 2 || cmplx.Abs(z[in[0]]-z[in[1]]) < 1e-4 {
			continue
		}
		zm := complex(math.Sqrt(m*m-f.size*f.size), 0)
		mm := complex(m, 0)
		p := f.t.scale(real(zm)/m).plus(-f.size/m, f.v)
		ss, pp, sp := l.along(f.s, p)
		// Unknown: both waves beyond, s and p mirrored; rows Et, Es, Ht, Hs. Light of s alone, then of p.
		var r [2][2]complex128 // mirrored s and p of each
		for j, incident := range [][]complex128{{0, 1, -zm, 0}, {zm / mm, 0, 0, mm}} {
			a, b := make([][]complex128, 4), make([]complex128, 4)
			s, q := []complex128{0, 1, zm, 0}, []complex128{-zm / mm, 0, 0, mm}
			for i := range 4 {
				a[i] = []complex128{fields[in[0]][i], fields[in[1]][i], -s[i], -q[i]}
				b[i] = incident[i]
			}
			x := solveComplex(a, b)
			r[j] = [2]complex128{x[2], x[3]}
		}
		mix := func(i int) float64 {
			return square(r[0][i])*ss + square(r[1][i])*pp + 2*real(r[0][i]*cmplx.Conj(r[1][i])*sp)
		}
		near(t, "mirrored, s less p", e.mirrored.q, mix(0)-mix(1), 1e-6, "Berreman's matrix; eigenvectors by gonum")
	}
	if both < 300 {
		t.Errorf("only %d meetings", both)
	}
}

// TestAbsorptionOfThree compares the coefficient in any direction with complex indices in
// Fresnel's equation.
func TestAbsorptionOfThree(t *testing.T) {
	const source = "Fresnel's equation of wave normals with complex principal indices, " + book + "15.6"
	rng := rand.New(rand.NewPCG(12, 5))
	for range 300 {
		c := strong(rng)
		s := unit(rng)
		if math.Hypot(s.cross(c.one).length(), 0) < 0.1 || s.cross(c.two).length() < 0.1 {
			continue // near an optic axis the two are not apart to first order
		}
		const small = 1e-7
		natural := [3]float64{rng.Float64(), rng.Float64(), rng.Float64()}
		for _, extra := range []bool{false, true} {
			// Newton's steps on the equation for 1/n², from the real solution.
			k := waveAlong(c, s, extra)
			x := complex(1/k.dot(k), 0)
			var v [3]complex128
			for i := range 3 {
				n := complex(c.index[i], small*natural[i])
				v[i] = 1 / (n * n)
			}
			for range 20 {
				var f, slope complex128
				for i, axis := range c.axes {
					part := complex(s.dot(axis)*s.dot(axis), 0)
					a, b := x-v[(i+1)%3], x-v[(i+2)%3]
					f += part * a * b
					slope += part * (a + b)
				}
				x -= f / slope
			}
			n := cmplx.Sqrt(1 / x)
			// A slab is longer along the ray than along the normal.
			got := c.absorption(k, extra, natural) / rayOf(c, k, extra).dot(s)
			near(t, "per length of the normal", got, imag(n)/small, 1e-5, source)
		}
	}
	one := newUniaxial(vec{0, 0, 1}, 1.64, 1.5)
	two := newBiaxial(&orientation{{1, 0, 0}, {0, 1, 0}, {0, 0, 1}}, gems.Principal{1.64, 1.64, 1.5})
	for range 100 {
		s := unit(rng)
		k := waveAlong(one, s, true)
		natural := [3]float64{0.7, 0.7, 0.1}
		near(t, "as in a uniaxial crystal", two.absorption(k, false, natural), one.absorption(k, true, natural), 1e-12,
			"1/n² = cos²/no² + sin²/ne² with complex indices, "+book+"15.6")
	}
}
