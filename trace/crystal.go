package trace

import (
	"math"
	"math/cmplx"

	"pavilight/gems"
)

// A crystal is a doubly refracting medium at one wavelength. In each direction two waves
// run, whose energy may run along other directions than their wave vectors.
//
// Fields are those of plane waves exp(i (k.x - wt)) with k in units of the wave vector in
// vacuum, so that its length is the index of refraction, and H in units in which
// H = k x E.
//
// It is not optically active: quartz turns the plane of polarisation of light along its
// axis, which no ledger here can tell.
type crystal interface {
	// entering returns the two waves at a facet whose energy runs along its normal v;
	// in place of one that cannot, the evanescent one that decays along v.
	entering(f facetFrame) [2]wave

	// returning returns the wave k that arrives at a facet along v, and the two whose
	// energy runs or decays back from it.
	returning(f facetFrame, k vec, extra bool) (in wave, back [2]wave)

	// at returns the wave k, which solves the crystal's equation, at a facet.
	at(f facetFrame, k vec, extra bool) wave

	// absorption returns the natural absorption per length along the ray of the wave k,
	// to first order, where natural is that of light which vibrates along each principal
	// axis, in the order of gems.Principal.
	absorption(k vec, extra bool, natural [3]float64) float64
}

// orientation holds the principal axes of a crystal, unit and at right angles, in the
// order of gems.Principal. The third of a uniaxial one is its optic axis.
type orientation [3]vec

// newCrystal returns the crystal whose indices along the axes of o are p.
func newCrystal(o *orientation, p gems.Principal) crystal {
	if p[0] == p[1] {
		return newUniaxial(o[2], p.Ordinary(), p.Extraordinary())
	}
	return newBiaxial(o, p)
}

// wave is a plane wave in a crystal at a facet.
type wave struct {
	k     vec  // wave vector
	ray   vec  // unit, the direction of the energy; it and k mean nothing where flux is 0
	extra bool // the extraordinary one; in a biaxial crystal the slower one

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

// shares is what a facet does to one unit of light inside a crystal: shares of power.
type shares struct {
	back    [2]wave    // the two waves that are reflected
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
func inside(c crystal, k vec, extra bool, v vec, m float64) shares {
	f := newFacetFrame(v, k)
	in, back := c.returning(f, k, extra)
	r := shares{back: back}
	z := cmplx.Sqrt(complex(m*m-f.size*f.size, 0))
	m2 := complex(m*m, 0)
	leaves := func(w *wave) (a, b complex128) { return w.ht + z*w.es, z*w.hs - m2*w.et }
	var a, b [2]complex128
	for i := range r.back {
		a[i], b[i] = leaves(&r.back[i])
	}
	ia, ib := leaves(&in)
	amplitude := solve2(a, b, -ia, -ib)
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
		// At isolated directions two of the waves are one and the equations fail, or the
		// wave grazes: nothing gets through the facet as a wave.
		same := 0
		if extra {
			same = 1
		}
		r = shares{back: back}
		switch {
		case back[same].flux < 0:
			r.power[same] = 1
		case back[1-same].flux < 0:
			r.power[1-same] = 1
		default:
			r.back[0], r.power[0] = c.at(f, k.scale(-1), extra), 1
		}
	}
	return r
}

// singular is how far the shares may be from summing to 1 before they count as the
// outcome of equations without a solution.
const singular = 1e-9

// entering is what a facet does to light that comes from outside.
type entering struct {
	mirrored beam
	waves    [2]wave    // the two that go in
	power    [2]float64 // of them
}

// outside splits a beam that travels in index m along d and meets a facet whose unit
// normal v points into the crystal.
//
// Outside there are the beam and what is mirrored: the fields less those of the beam
// obey H.t = z E.s and z H.s = -m² E.t.
func outside(c crystal, l *beam, d, v vec, m float64) entering {
	f := newFacetFrame(v, d.scale(m))
	z := math.Sqrt(max(0, m*m-f.size*f.size))
	r := entering{waves: c.entering(f)}
	cz, cm, m2 := complex(z, 0), complex(m, 0), complex(m*m, 0)
	comes := func(w *wave) (a, b complex128) { return w.ht - cz*w.es, cz*w.hs + m2*w.et }
	var a, b [2]complex128
	for i := range r.waves {
		a[i], b[i] = comes(&r.waves[i])
	}
	// For one unit of field along s, and along p = (z t - q v)/m.
	ofS, ofP := solve2(a, b, -2*cz, 0), solve2(a, b, 0, 2*cm*cz)
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
		if w.flux > 0 && z > 0 {
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
	if !(math.Abs(r.mirrored.i+r.power[0]+r.power[1]-l.i) < singular*l.i) {
		// As from inside: light that grazes is mirrored.
		r.mirrored = beam{i: ss + pp, q: ss - pp, u: 2 * real(sp), v: 2 * imag(sp), a: r.mirrored.a, b: r.mirrored.b}
		r.power = [2]float64{}
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

// solve2 returns the x with sum a[i] x[i] = a0 and sum b[i] x[i] = b0.
func solve2(a, b [2]complex128, a0, b0 complex128) [2]complex128 {
	d := a[0]*b[1] - a[1]*b[0]
	return [2]complex128{(a0*b[1] - a[1]*b0) / d, (a[0]*b0 - a0*b[0]) / d}
}
