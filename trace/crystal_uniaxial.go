package trace

import "math"

// uniaxial is a crystal whose dielectric tensor is o across the optic axis and e along
// it. Its waves, from Maxwell's equations, Born & Wolf, Principles of Optics, 7th ed.,
// 15.2 and 15.3:
//
//	ordinary       k.k = o                       E = k x c
//	extraordinary  o k.k + (e-o) (k.c)² = o e    E = o c - (k.c) k
//
// c the optic axis. The ordinary ray runs along k; the extraordinary along the normal
// of its surface of wave vectors, o k + (e-o) (k.c) c.
type uniaxial struct {
	axis vec     // c, unit
	o, e float64 // squares of the ordinary and the extraordinary index
}

// newUniaxial returns the crystal with the given indices. axis is a unit vector.
func newUniaxial(axis vec, ordinary, extraordinary float64) *uniaxial {
	return &uniaxial{axis, ordinary * ordinary, extraordinary * extraordinary}
}

func (c *uniaxial) entering(f facetFrame) [2]wave {
	return [2]wave{c.ordinary(&f, 1), c.extraordinary(&f, 1)}
}

func (c *uniaxial) returning(f facetFrame, k vec, extra bool) (in wave, back [2]wave) {
	// Once more from what lies along the facet, rounded as the reflected waves are:
	// close to grazing that counts.
	if extra {
		in = c.extraordinary(&f, 1)
	} else {
		in = c.ordinary(&f, 1)
	}
	if in.flux <= 0 {
		in = c.running(&f, k, extra)
	}
	return in, [2]wave{c.ordinary(&f, -1), c.extraordinary(&f, -1)}
}

func (c *uniaxial) at(f facetFrame, k vec, extra bool) wave {
	return c.running(&f, k, extra)
}

// ordinary returns the ordinary wave at a facet whose energy runs along v, or against
// it for sign -1; where there is none, the evanescent one that decays that way.
func (c *uniaxial) ordinary(f *facetFrame, sign float64) wave {
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
func (c *uniaxial) extraordinary(f *facetFrame, sign float64) wave {
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
func (c *uniaxial) running(f *facetFrame, k vec, extra bool) wave {
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
func (c *uniaxial) ray(k vec, extra bool) vec {
	if extra {
		k = k.scale(c.o).plus((c.e-c.o)*k.dot(c.axis), c.axis)
	}
	return k.scale(1 / k.length())
}

// polarisation returns the electric field of the wave k, of any size. Along the optic
// axis both waves are the same and any two directions across it will do.
func (c *uniaxial) polarisation(k vec, extra bool) vec {
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

// absorption is a of light that vibrates across the axis and x of light along it. A complex
// part of the tensor makes the wave vector complex, and only its part along the ray counts.
// From the extraordinary wave's 1/n² = cos²/o + sin²/e (Born & Wolf 15.3 (11); absorbing
// crystals 15.6) it is, per length along the wave's normal,
//
//	n³ (a cos² / no³ + x sin² / ne³)
//
// with the angle between k and the axis, and along the ray shorter by the cosine of
// the angle between the two.
func (c *uniaxial) absorption(k vec, extra bool, natural [3]float64) float64 {
	a, x := natural[0], natural[2]
	if !extra || a == x && c.o == c.e {
		return a
	}
	n := k.length()
	cos := k.dot(c.axis) / n
	cos2 := cos * cos
	along := n * n * n * (a*cos2/(c.o*math.Sqrt(c.o)) + x*(1-cos2)/(c.e*math.Sqrt(c.e)))
	return along * c.ray(k, true).dot(k) / n
}
