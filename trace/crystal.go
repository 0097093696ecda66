package trace

import (
	"math"
	"math/cmplx"
)

// crystal is a uniaxial medium at one wavelength: its dielectric tensor is o across the
// optic axis and e along it. It is not optically active: quartz turns the plane of
// polarisation of light along its axis, which no ledger here can tell.
//
// In each direction two waves run. Fields are those of plane waves
// exp(i (k.x - wt)) with k in units of the wave vector in vacuum, so that its length
// is the index of refraction, and H in units in which H = k x E. From Maxwell's
// equations, Born & Wolf, Principles of Optics, 7th ed., 15.2 and 15.3:
//
//	ordinary       k.k = o                       E = k x c
//	extraordinary  o k.k + (e-o) (k.c)² = o e    E = o c - (k.c) k
//
// c the optic axis. The ordinary ray runs along k; the extraordinary along the normal
// of its surface of wave vectors, o k + (e-o) (k.c) c.
type crystal struct {
	axis vec     // c, unit
	o, e float64 // squares of the ordinary and the extraordinary index
}

// newCrystal returns the crystal with the given indices. axis is a unit vector.
func newCrystal(axis vec, ordinary, extraordinary float64) crystal {
	return crystal{axis, ordinary * ordinary, extraordinary * extraordinary}
}

// wave is a plane wave in a crystal at a facet.
type wave struct {
	k     vec  // wave vector
	ray   vec  // unit, the direction of the energy; it and k mean nothing where flux is 0
	extra bool // the extraordinary one

	// The fields along the facet: electric and magnetic, along t and s of its frame.
	et, es, ht, hs complex128

	// flux is the power that goes through the facet along its normal, at these fields;
	// 0 where the wave is evanescent.
	flux float64
}

// facetFrame is a facet as light meets it: v its unit normal, t the direction along the
// facet of the wave vector's part q there, s the normal of the plane of incidence, t x s = v.
type facetFrame struct {
	v, t, s vec
	q       vec     // along the facet, the same for all waves that meet there
	size    float64 // of q
}

func newFacetFrame(v, k vec) facetFrame {
	f := facetFrame{v: v, q: k.plus(-k.dot(v), v)}
	f.size = f.q.length()
	const upright = 1e-13 // below, q is rounding and has no direction
	if f.size > upright {
		f.t = f.q.scale(1 / f.size)
		f.t = f.t.plus(-f.t.dot(v), v)
	} else {
		f.t = fresh(v).a
	}
	f.t = f.t.scale(1 / f.t.length())
	f.s = v.cross(f.t)
	return f
}

// ordinary returns the ordinary wave at a facet whose energy runs along v, or against
// it for sign -1; where there is none, the evanescent one that decays that way.
func (c *crystal) ordinary(f *facetFrame, sign float64) wave {
	z2 := c.o - f.size*f.size
	if z2 > 0 {
		return c.running(f, f.q.plus(sign*math.Sqrt(z2), f.v), false)
	}
	z, ct, cs, cv := complex(0, sign*math.Sqrt(-z2)), f.t.dot(c.axis), f.s.dot(c.axis), f.v.dot(c.axis)
	q, kc := complex(f.size, 0), complex(f.size*ct, 0)+z*complex(cv, 0)
	return wave{
		et: -z * complex(cs, 0), es: z*complex(ct, 0) - q*complex(cv, 0),
		ht: kc*q - complex(c.o*ct, 0), hs: complex(-c.o*cs, 0),
	}
}

// extraordinary is the same for the extraordinary wave.
func (c *crystal) extraordinary(f *facetFrame, sign float64) wave {
	ct, cs, cv := f.t.dot(c.axis), f.s.dot(c.axis), f.v.dot(c.axis)
	// With k = q + z v its equation is a z² + 2 b z + g = 0, and a z + b is the part of
	// the energy along v.
	d := c.e - c.o
	qc := f.size * ct
	a, b := c.o+d*cv*cv, d*qc*cv
	g := c.o*f.size*f.size + d*qc*qc - c.o*c.e
	root2 := b*b - a*g
	if root2 > 0 {
		return c.running(f, f.q.plus((sign*math.Sqrt(root2)-b)/a, f.v), true)
	}
	z := complex(-b/a, sign*math.Sqrt(-root2)/a)
	q, kc := complex(f.size, 0), complex(qc, 0)+z*complex(cv, 0)
	o := complex(c.o, 0)
	return wave{
		extra: true,
		et:    o*complex(ct, 0) - kc*q, es: o * complex(cs, 0),
		ht: -o * z * complex(cs, 0), hs: o * (z*complex(ct, 0) - q*complex(cv, 0)),
	}
}

// running returns the wave with the wave vector k, which solves its equation.
func (c *crystal) running(f *facetFrame, k vec, extra bool) wave {
	e := c.polarisation(k, extra)
	h := k.cross(e)
	w := wave{
		k: k, ray: c.ray(k, extra), extra: extra,
		et: complex(e.dot(f.t), 0), es: complex(e.dot(f.s), 0),
		ht: complex(h.dot(f.t), 0), hs: complex(h.dot(f.s), 0),
	}
	w.flux = real(w.et)*real(w.hs) - real(w.es)*real(w.ht)
	return w
}

// ray returns the unit vector along which the energy of the wave k runs.
func (c *crystal) ray(k vec, extra bool) vec {
	if extra {
		k = k.scale(c.o).plus((c.e-c.o)*k.dot(c.axis), c.axis)
	}
	return k.scale(1 / k.length())
}

// polarisation returns the electric field of the wave k, of any size. Along the optic
// axis both waves are the same and any two directions across it will do.
func (c *crystal) polarisation(k vec, extra bool) vec {
	n := k.scale(1 / k.length())
	w := n.cross(c.axis)
	if l := w.length(); l > 1e-12 {
		w = w.scale(1 / l)
		w = w.plus(-w.dot(n), n) // rounding counts near the axis
		w = w.scale(1 / w.length())
	} else {
		w = fresh(n).a
	}
	if !extra {
		return w
	}
	// D lies across k and w; E follows from the inverse tensor. The same as
	// o c - (k.c) k but for its size, with no difference of like numbers near the axis.
	d := w.cross(n)
	return d.plus((c.o/c.e-1)*d.dot(c.axis), c.axis)
}

// absorption returns the natural absorption per length along the ray of the wave k,
// where it is a along the ordinary ray and x along the extraordinary ray across the axis.
//
// To first order in the absorption a complex part of the tensor makes the wave vector
// complex, and only its part along the ray counts. From the extraordinary wave's
// 1/n² = cos²/o + sin²/e (Born & Wolf 15.3 (11); absorbing crystals 15.6) it is, per
// length along the wave's normal,
//
//	n³ (a cos² / no³ + x sin² / ne³)
//
// with the angle between k and the axis, and along the ray shorter by the cosine of
// the angle between the two.
func (c *crystal) absorption(k vec, extra bool, a, x float64) float64 {
	if !extra || a == x && c.o == c.e {
		return a
	}
	n := k.length()
	cos := k.dot(c.axis) / n
	cos2 := cos * cos
	along := n * n * n * (a*cos2/(c.o*math.Sqrt(c.o)) + x*(1-cos2)/(c.e*math.Sqrt(c.e)))
	return along * c.ray(k, true).dot(k) / n
}

// shares is what a facet does to one unit of light inside a crystal: shares of power.
type shares struct {
	back    [2]wave    // ordinary and extraordinary waves that are reflected
	power   [2]float64 // of them
	through beam       // what goes through; its power may be 0
	out     vec        // the direction in which it goes, unit
}

// inside splits a wave that meets a facet with unit normal v, along which its energy
// runs, from inside; m is the index beyond.
//
// The fields along the facet are the same on both sides. Beyond it there are only waves
// that leave: H.t = -z E.s and z H.s = m² E.t there, z the part of their wave vector
// along v. That makes two equations for the two reflected amplitudes.
func (c *crystal) inside(k vec, extra bool, v vec, m float64) shares {
	f := newFacetFrame(v, k)
	// Once more from what lies along the facet, rounded as the reflected waves are:
	// close to grazing that counts.
	in := c.ordinary(&f, 1)
	if extra {
		in = c.extraordinary(&f, 1)
	}
	if in.flux <= 0 {
		in = c.running(&f, k, extra)
	}
	r := shares{back: [2]wave{c.ordinary(&f, -1), c.extraordinary(&f, -1)}}
	z := cmplx.Sqrt(complex(m*m-f.size*f.size, 0))
	m2 := complex(m*m, 0)
	leaves := func(w *wave) (a, b complex128) { return w.ht + z*w.es, z*w.hs - m2*w.et }
	io, ie := leaves(&in)
	amplitude := solve2(leaves, &r.back, -io, -ie)
	es, hs := in.es, in.hs
	for i := range r.back {
		w := &r.back[i]
		es += amplitude[i] * w.es
		hs += amplitude[i] * w.hs
		r.power[i] = -square(amplitude[i]) * w.flux / in.flux
	}
	if real(z) > 0 {
		// Along s and along (z t - q v)/m.
		ep := hs / complex(m, 0)
		toPower := real(z) / in.flux
		ss, pp, sp := toPower*square(es), toPower*square(ep), complex(toPower, 0)*es*cmplx.Conj(ep)
		r.through = beam{i: ss + pp, q: ss - pp, u: 2 * real(sp), v: 2 * imag(sp), a: f.s}
		r.through.b = f.t.scale(real(z)/m).plus(-f.size/m, f.v)
		r.out = f.q.plus(real(z), f.v).scale(1 / m)
	}
	if !(math.Abs(r.power[0]+r.power[1]+r.through.i-1) < singular) {
		// At isolated directions the two evanescent waves are one and the equations
		// fail, or the wave grazes: nothing gets through the facet as a wave.
		back := c.running(&f, k.plus(-2*k.dot(v), v), extra)
		r = shares{back: [2]wave{back, back}, power: [2]float64{1, 0}}
	}
	return r
}

// singular is how far the shares may be from summing to 1 before they count as the
// outcome of equations without a solution.
const singular = 1e-6

// entering is what a facet does to light that comes from outside.
type entering struct {
	mirrored beam
	waves    [2]wave    // ordinary and extraordinary waves that go in
	power    [2]float64 // of them
}

// outside splits a beam that travels in index m along d and meets a facet whose unit
// normal v points into the crystal.
//
// Outside there are the beam and what is mirrored: the fields less those of the beam
// obey H.t = z E.s and z H.s = -m² E.t.
func (c *crystal) outside(l *beam, d, v vec, m float64) entering {
	f := newFacetFrame(v, d.scale(m))
	z := math.Sqrt(max(0, m*m-f.size*f.size))
	r := entering{waves: [2]wave{c.ordinary(&f, 1), c.extraordinary(&f, 1)}}
	cz, cm, m2 := complex(z, 0), complex(m, 0), complex(m*m, 0)
	comes := func(w *wave) (a, b complex128) { return w.ht - cz*w.es, cz*w.hs + m2*w.et }
	// For one unit of field along s, and along p = (z t - q v)/m.
	ofS := solve2(comes, &r.waves, -2*cz, 0)
	ofP := solve2(comes, &r.waves, 0, 2*cm*cz)
	p := f.t.scale(z/m).plus(-f.size/m, f.v)
	ss, pp, sp := l.along(f.s, p)

	both := func(s, p complex128) float64 { // the power of an amplitude that s and p make together
		return square(s)*ss + square(p)*pp + 2*real(s*cmplx.Conj(p)*sp)
	}
	rss, rsp, rps, rpp := complex128(-1), complex128(0), complex128(0), complex128(-1)
	for i := range r.waves {
		w := &r.waves[i]
		rss += ofS[i] * w.es
		rsp += ofP[i] * w.es
		rps += ofS[i] * w.hs / cm
		rpp += ofP[i] * w.hs / cm
		if w.flux > 0 {
			r.power[i] = w.flux / z * both(ofS[i], ofP[i])
		}
	}
	s, q := both(rss, rsp), both(rps, rpp)
	// <Es Ep*> of what is mirrored.
	conj := cmplx.Conj
	x := rss*conj(rps)*complex(ss, 0) + rsp*conj(rpp)*complex(pp,
		0) + rss*conj(rpp)*sp + rsp*conj(rps)*conj(sp)
	r.mirrored = beam{
		i: s + q, q: s - q, u: 2 * real(x), v: 2 * imag(x),
		a: f.s, b: f.t.scale(-z/m).plus(-f.size/m, f.v),
	}
	return r
}

// along returns the beam's powers along s and p, which lie across it at right angles, and
// the mean of the one amplitude times the other's conjugate.
func (l *beam) along(s, p vec) (ss, pp float64, sp complex128) {
	aa, bb, ab := (l.i+l.q)/2, (l.i-l.q)/2, complex(l.u/2, l.v/2)
	as, bs, ap, bp := l.a.dot(s), l.b.dot(s), l.a.dot(p), l.b.dot(p)
	ss = as*as*aa + bs*bs*bb + 2*as*bs*real(ab)
	pp = ap*ap*aa + bp*bp*bb + 2*ap*bp*real(ab)
	sp = complex(as*ap*aa+bs*bp*bb, 0) + complex(as*bp, 0)*ab + complex(bs*ap, 0)*cmplx.Conj(ab)
	return ss, pp, sp
}

// solve2 returns the amplitudes x of two waves with
// sum x[i] condition(w[i]) = (a, b).
func solve2(condition func(*wave) (a, b complex128), w *[2]wave, a, b complex128) (x [2]complex128) {
	a0, b0 := condition(&w[0])
	a1, b1 := condition(&w[1])
	d := a0*b1 - a1*b0
	return [2]complex128{(a*b1 - a1*b) / d, (a0*b - a*b0) / d}
}
