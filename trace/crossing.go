package trace

import (
	"math"
	"math/cmplx"
)

// Film is a layer between a facet and what surrounds it, parallel to the facet.
type Film struct {
	Index      float64 // refractive index
	Extinction float64 // imaginary part of the index; 0 for a clear film
	Thickness  float64 // nm
	Scatter    float64 // optical depth of what scatters in it, such as dust, straight through; 0 for a film without
}

// thick is the thickness in nm beyond which the orders of reflection in a film are
// summed without interference: over the spectrum, over a pixel and over the uneven
// thickness of such a film their phases cover many turns. Below it they interfere.
const thick = 5000

// crossing is what a facet does to light that arrives on it: shares of power that
// are reflected and that go through for each polarisation, and how the two stay
// together: rs rp* for the reflected, ts tp* (in units of power) for what goes
// through. What is neither reflected nor goes through is absorbed in a film.
type crossing struct {
	rs, rp, ts, tp float64
	rr, tt         complex128
	cosT           float64 // cosine of the direction beyond; 0 where nothing goes through
}

// plainCrossing is that of a clean facet.
func plainCrossing(n1, n2, cosI float64) crossing {
	r := Fresnel(n1, n2, cosI)
	c := crossing{rs: r.Rs, rp: r.Rp, ts: 1 - r.Rs, tp: 1 - r.Rp, rr: complex(r.InStep, r.Apart), cosT: r.CosT}
	c.tt = complex(math.Sqrt(c.ts*c.tp), 0)
	return c
}

// interfaceAmplitudes are the amplitude coefficients of one interface.
type interfaceAmplitudes struct{ rs, rp, ts, tp complex128 }

// amplitudes returns them from index n1 to n2 with the cosines c1 and c2 of the
// directions there, all of them complex where a medium absorbs or the light is
// evanescent. Born & Wolf, Principles of Optics, 7th ed., 1.5.2 (20) and (21).
func amplitudes(n1, c1, n2, c2 complex128) interfaceAmplitudes {
	return interfaceAmplitudes{
		rs: (n1*c1 - n2*c2) / (n1*c1 + n2*c2),
		rp: (n2*c1 - n1*c2) / (n2*c1 + n1*c2),
		ts: 2 * n1 * c1 / (n1*c1 + n2*c2),
		tp: 2 * n1 * c1 / (n2*c1 + n1*c2),
	}
}

// cosine is that of the direction in index n of light whose index times sine is k.
// Of the two roots it takes the one that decays.
func cosine(n complex128, k float64) complex128 {
	c := cmplx.Sqrt(1 - complex(k*k, 0)/(n*n))
	if imag(n*c) < 0 {
		c = -c
	}
	return c
}

// filmCrossing is that of a facet under a film, from index n1 through the film into
// n2, at the wavelength in nm.
//
// A thin film interferes: Airy's formula, Born & Wolf 1.6.4 (58), with complex
// cosines, which holds frustrated total reflection too. In a thick one the powers of
// all orders are summed: R = R1 + T1² A R2 / (1 - A R1' R2), A the power left after
// two passes through the film.
func filmCrossing(n1 float64, f Film, n2, cosI, wavelength float64) crossing {
	k := n1 * math.Sqrt(max(0, 1-cosI*cosI))
	nf := complex(f.Index, f.Extinction)
	i1, i2 := complex(n1, 0), complex(n2, 0)
	c1, cf, c2 := complex(cosI, 0), cosine(nf, k), cosine(i2, k)
	a, b := amplitudes(i1, c1, nf, cf), amplitudes(nf, cf, i2, c2)
	once := cmplx.Exp(complex(0, 2*math.Pi*f.Thickness/wavelength) * nf * cf) // one pass
	// Flux through an interface against the incident: Re(n2 c2) / (n1 c1) for s, and
	// the same for p since both outer media are clear.
	out := real(i2*c2) / (n1 * cosI)
	var c crossing
	if out > 0 {
		c.cosT = real(c2)
	}
	if f.Thickness <= thick {
		layer := func(r1, t1, r2, t2 complex128) (r, t complex128) {
			d := 1 + r1*r2*once*once
			return (r1 + r2*once*once) / d, t1 * t2 * once / d
		}
		rs, ts := layer(a.rs, a.ts, b.rs, b.ts)
		rp, tp := layer(a.rp, a.tp, b.rp, b.tp)
		c.rs, c.rp, c.rr = square(rs), square(rp), rs*cmplx.Conj(rp)
		if out > 0 {
			c.ts, c.tp, c.tt = out*square(ts), out*square(tp), complex(out, 0)*ts*cmplx.Conj(tp)
		}
		return c
	}

	// From the far side of the first interface: r' = -r and t t' = 1 - r².
	twice := square(once) * square(once)
	layer := func(r1, r2 complex128) (r float64) {
		return square(r1) + square(1-r1*r1)*twice*square(r2)/(1-twice*square(r1)*square(r2))
	}
	c.rs, c.rp = layer(a.rs, b.rs), layer(a.rp, b.rp)
	both := cmplx.Conj
	c.rr = a.rs*both(a.rp) + (1-a.rs*a.rs)*both(1-a.rp*a.rp)*complex(twice, 0)*b.rs*both(b.rp)/
		(1-complex(twice, 0)*a.rs*both(a.rp)*b.rs*both(b.rp))
	if out > 0 {
		passed := func(r1, t1, r2, t2 complex128) float64 {
			return out * square(t1) * square(t2) * square(once) / (1 - twice*square(r1)*square(r2))
		}
		c.ts, c.tp = passed(a.rs, a.ts, b.rs, b.ts), passed(a.rp, a.tp, b.rp, b.tp)
		c.tt = complex(out*square(once), 0) * a.ts * both(a.tp) * b.ts * both(b.tp) /
			(1 - complex(twice, 0)*a.rs*both(a.rp)*b.rs*both(b.rp))
	}
	return c
}

// square returns the square of the modulus.
func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// meet splits a beam travelling along the unit vector d at a surface whose unit
// normal v points along d. out is the direction beyond, wanted only where something
// goes through. What neither part holds is absorbed.
func (l *beam) meet(c *crossing, d, v, out vec) (reflected, through beam) {
	va, vb := v.dot(l.a), v.dot(l.b)
	cos2, sin2 := 1.0, 0.0
	sin2I := va*va + vb*vb
	if sin2I > 0 {
		cos2, sin2 = (vb*vb-va*va)/sin2I, -2*va*vb/sin2I
	}
	q, u := l.q*cos2+l.u*sin2, l.u*cos2-l.q*sin2
	s, p := (l.i+q)/2, (l.i-q)/2
	uv := complex(u, l.v)

	rs, rp, ruv := c.rs*s, c.rp*p, -c.rr*uv
	q, u = rs-rp, real(ruv)
	reflected = beam{
		i: rs + rp, q: q*cos2 - u*sin2, u: u*cos2 + q*sin2, v: imag(ruv),
		a: l.a.plus(-2*va, v), b: l.b.plus(-2*vb, v),
	}
	if c.ts == 0 && c.tp == 0 {
		return reflected, beam{}
	}
	ts, tp, tuv := c.ts*s, c.tp*p, c.tt*uv
	through = beam{i: ts + tp, q: ts - tp, u: real(tuv), v: imag(tuv)}
	if sin2I > 1e-24 {
		through.a = l.a.scale(vb).plus(-va, l.b)
		through.b = v.plus(-v.dot(out), out)
		through.a, through.b = through.a.scale(1/through.a.length()), through.b.scale(1/through.b.length())
	} else { // straight through
		through.a, through.b = l.a, l.b
	}
	return reflected, through
}

// forget makes the beam unpolarised, keeping its power.
func (l *beam) forget() { l.q, l.u, l.v = 0, 0, 0 }

// fresh is a beam of unpolarised light of one unit along the unit vector d.
func fresh(d vec) beam {
	a := d.cross(vec{1, 0, 0})
	if math.Abs(d.x) > 0.9 {
		a = d.cross(vec{0, 1, 0})
	}
	a = a.scale(1 / a.length())
	return beam{i: 1, a: a, b: d.cross(a)}
}
