package trace

import (
	"math"
	"math/cmplx"

	"pavilight/gems"
)

// biaxial is a crystal with three principal indices alpha < beta < gamma. Its inverse
// dielectric tensor is, with one and two the optic axes,
//
//	1/beta² - half (one ⊗ two + two ⊗ one),   half = (1/alpha² - 1/gamma²)/2
//
// and Fresnel's equation of wave normals, with the angles between wave vector and axes,
//
//	1/n² = mean + half cos(a ± b),   mean = (1/alpha² + 1/gamma²)/2
//
// Born & Wolf, Principles of Optics, 7th ed., 15.2 and 15.3.3; minus is the
// faster wave. Times k.k = n² it reads for wave vectors of any size, real or complex,
//
//	mean k.k + half (k.one)(k.two) - 1 = ± half r,   r = √(k x one)² √(k x two)²
//
// with plus for the slower wave. D of either wave halves the angles between the planes
// that hold k and one of the axes (Fresnel's construction, 15.3.3): along
//
//	√(k x two)² (k x one) ± √(k x one)² (k x two)
//
// with plus for the faster wave. A uniaxial crystal is the limit in which both axes are
// one; then one of the two is the ordinary wave. Along an optic axis both waves are the
// same and D may lie anyhow across it, each with another ray: together they make the cone
// of internal conical refraction, of which two rays are followed here.
type biaxial struct {
	one, two           vec // optic axes, unit
	middle, mean, half float64

	axes  orientation // principal axes
	index [3]float64  // along them
}

// newBiaxial returns the crystal whose indices along the axes of o are p.
func newBiaxial(o *orientation, p gems.Principal) *biaxial {
	c := &biaxial{axes: *o, index: p}
	// With dispersion the order of the indices may change over the spectrum.
	low, mid, high := 0, 1, 2
	if p[low] > p[mid] {
		low, mid = mid, low
	}
	if p[mid] > p[high] {
		mid, high = high, mid
	}
	if p[low] > p[mid] {
		low, mid = mid, low
	}
	a, b, g := 1/(p[low]*p[low]), 1/(p[mid]*p[mid]), 1/(p[high]*p[high])
	c.middle, c.mean, c.half = b, (a+g)/2, (a-g)/2
	if a > g {
		// tan² of the angle between gamma and an axis is (a-b)/(b-g): 15.3.3.
		sin, cos := math.Sqrt((a-b)/(a-g)), math.Sqrt((b-g)/(a-g))
		c.one = o[high].scale(cos).plus(sin, o[low])
		c.two = o[high].scale(cos).plus(-sin, o[low])
	} else {
		c.one, c.two = o[high], o[high]
	}
	return c
}

// inverse returns the inverse dielectric tensor times d.
func (c *biaxial) inverse(d vec) vec {
	return d.scale(c.middle).plus(-c.half*d.dot(c.two), c.one).plus(-c.half*d.dot(c.one), c.two)
}

func (c *biaxial) entering(f facetFrame) [2]wave {
	l := c.line(&f)
	return c.pair(&l, 1)
}

func (c *biaxial) returning(f facetFrame, k vec, extra bool) (in wave, back [2]wave) {
	l := c.line(&f)
	inner := !extra
	if z := complex(k.dot(f.v), 0); l.hollow {
		inner = cmplx.Abs(l.inner[1]-z) < cmplx.Abs(l.outer[1]-z)
	}
	// Once more from what lies along the facet, as in a uniaxial crystal.
	if inner {
		in = c.wave(&l, l.inner[1], extra)
	} else {
		in = c.wave(&l, l.outer[1], extra)
	}
	if in.flux <= 0 {
		in = c.running(&f, k, extra)
	}
	return in, c.pair(&l, 0)
}

// pair returns the two waves of a line that go or decay against v, for side 0, or along
// it, for side 1.
//
// The power of both together is the sum of theirs: no power runs in their fields' mixed
// products. So close to an optic axis that rounding decides how D lies, that is what
// says how: both wave vectors are one there, and any mixture of the two fields will do.
func (c *biaxial) pair(l *throughline, side int) [2]wave {
	inner, outer := l.inner[side], l.outer[side]
	w := [2]wave{c.wave(l, inner, l.hollow), c.wave(l, outer, true)}
	const close = 1e-4
	if w[0].flux == 0 || w[1].flux == 0 || l.hollow || math.Abs(real(inner)-real(outer)) > close {
		return w
	}
	mixed := real(w[0].et)*real(w[1].hs) - real(w[0].es)*real(w[1].ht) +
		real(w[1].et)*real(w[0].hs) - real(w[1].es)*real(w[0].ht)
	d := c.displacement(w[1].k, true).plus(-mixed/2/w[0].flux, c.displacement(w[0].k, false))
	w[1] = c.vibrating(&l.facetFrame, w[1].k, d, true)
	return w
}

func (c *biaxial) at(f facetFrame, k vec, extra bool) wave {
	return c.running(&f, k, extra)
}

// throughline is all wave vectors k = q + z v that have the part q along a facet. It meets the
// two surfaces of wave vectors in up to four points: z there is real for waves that run,
// one of a pair of conjugates for waves that decay.
type throughline struct {
	facetFrame
	oneQ, oneV, twoQ, twoV vec     // k x one = oneQ + z oneV, and the same for two
	a, b, g                float64 // mean k.k + half (k.one)(k.two) - 1 = a z² + 2 b z + g

	outer, inner [2]complex128 // z of the wave that goes or decays against v, and along v
	hollow       bool          // the slower wave's surface is met in all four points
}

// line finds the waves that can meet at a facet. The slower wave's surface lies around
// the faster one's. Where the line meets it first and last is sought in a few steps; the
// other two points follow from the sum of the roots of the equation of fourth degree and
// from that of their products two by two. Its coefficients alone would not do: where the
// two waves are nearly the same, as near an optic axis, rounding would move its roots far.
func (c *biaxial) line(f *facetFrame) throughline {
	l := throughline{
		facetFrame: *f,
		oneQ:       f.q.cross(c.one), oneV: f.v.cross(c.one), twoQ: f.q.cross(c.two), twoV: f.v.cross(c.two),
	}
	oneQ, oneV, twoQ, twoV := f.q.dot(c.one), f.v.dot(c.one), f.q.dot(c.two), f.v.dot(c.two)
	l.a = c.mean + c.half*oneV*twoV
	l.b = c.half * (oneQ*twoV + twoQ*oneV) / 2
	l.g = c.mean*f.size*f.size + c.half*oneQ*twoQ - 1
	l.findOuter(c)
	l.findInner(c)
	return l
}

// findOuter finds where the line meets the slower wave's surface first and last, or a
// pair of waves that decay where it passes beside.
func (l *throughline) findOuter(c *biaxial) {
	// The surface lies within the sphere k.k = gamma².
	beyond := math.Sqrt(max(0, 1/(c.mean-c.half)-l.size*l.size))
	first, atFirst := l.meets(c, -1, -beyond)
	last, atLast := l.meets(c, 1, beyond)
	// The line may pass close over the hollow around an optic axis before it goes in.
	switch {
	case atFirst && !atLast:
		last = l.crossing(c, first, last)
	case atLast && !atFirst:
		first = l.crossing(c, last, first)
	case !atFirst && last-first > 1e-6:
		for i := 1; i < 16 && !atFirst; i++ {
			if z := first + float64(i)/16*(last-first); l.beyond(c, z) < 0 {
				first, last, atFirst = l.crossing(c, z, first), l.crossing(c, z, last), true
			}
		}
	}
	if atFirst || atLast {
		first, last = l.chord(c, first, last)
		l.outer = [2]complex128{complex(first, 0), complex(last, 0)}
	} else {
		z := l.decays(c)
		l.outer = [2]complex128{cmplx.Conj(z), z}
	}
}

// findInner finds the other two roots of
//
//	(a z² + 2 b z + g)² - half² (k x one)² (k x two)² = 0
func (l *throughline) findInner(c *biaxial) {
	h2 := c.half * c.half
	one2, two2 := l.oneV.dot(l.oneV), l.twoV.dot(l.twoV)
	oneX, twoX := l.oneQ.dot(l.oneV), l.twoQ.dot(l.twoV)
	z4 := l.a*l.a - h2*one2*two2
	z3 := 4*l.a*l.b - 2*h2*(oneX*two2+twoX*one2)
	z2 := 4*l.b*l.b + 2*l.a*l.g - h2*(l.oneQ.dot(l.oneQ)*two2+l.twoQ.dot(l.twoQ)*one2+4*oneX*twoX)

	sum, product := real(l.outer[0]+l.outer[1]), real(l.outer[0]*l.outer[1]) // of the outer two
	middle := (-z3/z4 - sum) / 2
	root2 := middle*middle - (z2/z4 - product - 2*middle*sum)
	if root2 <= 0 {
		root := math.Sqrt(-root2)
		l.inner = [2]complex128{complex(middle, -root), complex(middle, root)}
		return
	}
	low, high := middle-math.Sqrt(root2), middle+math.Sqrt(root2)
	const clearly = 1e-9 // above rounding
	if l.a*high*high+2*l.b*high+l.g > clearly {
		// Around an optic axis the outer surface has a hollow; the line passes through it.
		l.hollow = true
		low, high = high, low
	}
	l.inner = [2]complex128{complex(low, 0), complex(high, 0)}
}

// mostSteps is far more than it takes but where the line only just touches a surface.
const mostSteps = 40

// beyond is positive where the line is outside the outer surface.
func (l *throughline) beyond(c *biaxial, z float64) float64 {
	r := l.oneQ.plus(z, l.oneV).length() * l.twoQ.plus(z, l.twoV).length()
	return l.a*z*z + 2*l.b*z + l.g - c.half*r
}

// crossing finds the place where the line comes out of the outer surface between a z
// inside and one outside.
func (l *throughline) crossing(c *biaxial, in, out float64) float64 {
	for range 60 {
		if z := (in + out) / 2; l.beyond(c, z) > 0 {
			out = z
		} else {
			in = z
		}
	}
	return (in + out) / 2
}

// meets returns the z farthest along sign at which the line meets the outer surface, or,
// with ok false, where it comes closest on its way from start, outside. Each step solves
// a z² + 2 b z + g = half r with r drawn straight on from the z of the step before.
func (l *throughline) meets(c *biaxial, sign, start float64) (z float64, ok bool) {
	z = start
	for range mostSteps {
		one, two := l.oneQ.plus(z, l.oneV), l.twoQ.plus(z, l.twoV)
		r1, r2 := one.length(), two.length()
		slope := 0.0
		if r1 > 0 {
			slope += one.dot(l.oneV) * r2 / r1
		}
		if r2 > 0 {
			slope += two.dot(l.twoV) * r1 / r2
		}
		b := l.b - c.half*slope/2
		g := l.g - c.half*(r1*r2-slope*z)
		square := b*b - l.a*g
		next := (sign*math.Sqrt(max(0, square)) - b) / l.a
		moved := math.Abs(next - z)
		z, ok = next, square > 0
		if moved <= 1e-12 { // the next would move by the square of it
			break
		}
	}
	return z, ok
}

// chord returns both z at which the line meets the outer surface once more, from one
// equation with r drawn straight through the two. They are then rounded alike: close to
// grazing, where they are nearly one, their fields would otherwise not fit together.
func (l *throughline) chord(c *biaxial, first, last float64) (float64, float64) {
	one, two := l.oneQ.plus(first, l.oneV), l.twoQ.plus(first, l.twoV)
	oneLast, twoLast := l.oneQ.plus(last, l.oneV), l.twoQ.plus(last, l.twoV)
	r, rLast := one.length()*two.length(), oneLast.length()*twoLast.length()
	if r+rLast == 0 {
		return first, last
	}
	// The slope of the chord, with no difference of like numbers: of r² by its factors.
	slope := one.plus(1, oneLast).dot(l.oneV)*twoLast.dot(twoLast) +
		one.dot(one)*two.plus(1, twoLast).dot(l.twoV)
	slope /= r + rLast
	b := l.b - c.half*slope/2
	root := math.Sqrt(max(0, b*b-l.a*(l.g-c.half*(r-slope*first))))
	return (-root - b) / l.a, (root - b) / l.a
}

// decays returns a complex z, with a positive imaginary part, at which the line meets the
// surfaces. It steps as meets does.
func (l *throughline) decays(c *biaxial) complex128 {
	z := complex(-l.b/l.a, math.Sqrt(max(0, l.g/l.a-l.b*l.b/(l.a*l.a))))
	var r complex128
	for step := range mostSteps {
		one, two := complexLine(l.oneQ, l.oneV, z), complexLine(l.twoQ, l.twoV, z)
		one2, two2 := one.dot(one), two.dot(two)
		next := cmplx.Sqrt(one2) * cmplx.Sqrt(two2)
		if step > 0 && real(next*cmplx.Conj(r)) < 0 {
			next = -next // on with the same branch of the root
		}
		r = next
		var slope complex128
		if r != 0 {
			slope = r * (one.along(l.oneV)/one2 + two.along(l.twoV)/two2)
		}
		half := complex(c.half, 0)
		b := complex(l.b, 0) - half*slope/2
		g := complex(l.g, 0) - half*(r-slope*z)
		root := cmplx.Sqrt(b*b - complex(l.a, 0)*g)
		if imag(root) < 0 {
			root = -root
		}
		before := z
		z = (root - b) / complex(l.a, 0)
		if cmplx.Abs(z-before) <= 1e-15 {
			break
		}
	}
	if imag(z) < 0 {
		z = cmplx.Conj(z)
	}
	return z
}

// wave returns the wave of a line at z.
func (c *biaxial) wave(l *throughline, z complex128, slower bool) wave {
	if imag(z) == 0 {
		return c.running(&l.facetFrame, l.q.plus(real(z), l.v), slower)
	}
	k := complexLine(l.q, l.v, z)
	one, two := complexLine(l.oneQ, l.oneV, z), complexLine(l.twoQ, l.twoV, z)
	root1, root2 := cmplx.Sqrt(one.dot(one)), cmplx.Sqrt(two.dot(two))
	r, both := root1*root2, one.dot(two)
	// Which of the two it is depends on the branches of the roots.
	side := complex(l.a, 0)*z*z + complex(2*l.b, 0)*z + complex(l.g, 0)
	half := complex(c.half, 0)
	slower = cmplx.Abs(side-half*r) < cmplx.Abs(side+half*r)
	// Of sum and difference take the one that cancels less; the other D is across.
	sum := cmplx.Abs(r+both) > cmplx.Abs(r-both)
	if !sum {
		root1 = -root1
	}
	d := one.scale(root2).plus(root1, two)
	if sum == slower {
		d = k.cross(d)
	}
	e := complexVec{c.inverse(d.re), c.inverse(d.im)}
	h := k.cross(e)
	return wave{extra: slower, et: e.along(l.t), es: e.along(l.s), ht: h.along(l.t), hs: h.along(l.s)}
}

// running returns the wave with the wave vector k, which solves its equation.
func (c *biaxial) running(f *facetFrame, k vec, slower bool) wave {
	return c.vibrating(f, k, c.displacement(k, slower), slower)
}

// vibrating returns the wave with the wave vector k whose D is d.
func (c *biaxial) vibrating(f *facetFrame, k, d vec, slower bool) wave {
	e := c.inverse(d)
	h := k.cross(e)
	ray := e.cross(h)
	w := wave{
		k: k, ray: ray.scale(1 / ray.length()), extra: slower,
		et: complex(e.dot(f.t), 0), es: complex(e.dot(f.s), 0),
		ht: complex(h.dot(f.t), 0), hs: complex(h.dot(f.s), 0),
	}
	w.flux = real(w.et)*real(w.hs) - real(w.es)*real(w.ht)
	return w
}

// displacement returns D of the wave k, of unit size.
func (c *biaxial) displacement(k vec, slower bool) vec {
	n := k.scale(1 / k.length())
	across := func(axis vec) vec {
		w := n.cross(axis)
		if l := w.length(); l > 1e-12 {
			return w.scale(1 / l)
		}
		return fresh(n).a // along the axis any will do
	}
	one, two := across(c.one), across(c.two)
	d := one.plus(1, two)
	sum := d.dot(d) > 2 // else the difference cancels less
	if !sum {
		d = one.plus(-1, two)
	}
	d = d.plus(-d.dot(n), n) // rounding counts near the axes
	d = d.scale(1 / d.length())
	if sum == slower {
		d = n.cross(d)
	}
	return d
}

// absorption is the power that the field loses in a length, as a share of that which it
// carries along the ray: a complex part of the tensor, n a along each principal axis, and
// the Poynting vector. Born & Wolf 15.6.
func (c *biaxial) absorption(k vec, slower bool, natural [3]float64) float64 {
	e := c.inverse(c.displacement(k, slower))
	lost := 0.0
	for i, axis := range c.axes {
		along := e.dot(axis)
		lost += c.index[i] * natural[i] * along * along
	}
	return lost / e.cross(k.cross(e)).length()
}

// complexVec is a vector of complex numbers.
type complexVec struct{ re, im vec }

// complexLine returns a + z b.
func complexLine(a, b vec, z complex128) complexVec {
	return complexVec{a.plus(real(z), b), b.scale(imag(z))}
}

// along returns the product of a and the real vector b.
func (a complexVec) along(b vec) complex128 { return complex(a.re.dot(b), a.im.dot(b)) }

// dot returns the sum of the products of the components, without a conjugate.
func (a complexVec) dot(b complexVec) complex128 {
	return complex(a.re.dot(b.re)-a.im.dot(b.im), a.re.dot(b.im)+a.im.dot(b.re))
}

func (a complexVec) scale(z complex128) complexVec {
	x, y := real(z), imag(z)
	return complexVec{a.re.scale(x).plus(-y, a.im), a.im.scale(x).plus(y, a.re)}
}

// plus returns a + z b.
func (a complexVec) plus(z complex128, b complexVec) complexVec {
	b = b.scale(z)
	return complexVec{a.re.plus(1, b.re), a.im.plus(1, b.im)}
}

func (a complexVec) cross(b complexVec) complexVec {
	return complexVec{
		a.re.cross(b.re).plus(-1, a.im.cross(b.im)),
		a.re.cross(b.im).plus(1, a.im.cross(b.re)),
	}
}
