package trace

import (
	"math"

	"pavilight/facets"
)

// Reflection is what a smooth interface between two transparent media does to
// light that arrives on it.
type Reflection struct {
	Rs, Rp float64 // power reflectances of s- and p-polarised light, in [0, 1]
	CosT   float64 // cosine of the refracted direction; 0 under total reflection
	Total  bool    // total internal reflection: Rs = Rp = 1

	// rs rp* = InStep + i Apart, the product of the amplitude reflectances, tells
	// how the two polarisations stay together. Under total reflection it is
	// exp(i delta), delta the phase by which the s part is ahead.
	InStep, Apart float64
}

// Mean returns the reflectance of unpolarised light.
func (r Reflection) Mean() float64 { return (r.Rs + r.Rp) / 2 }

// Fresnel returns what the interface from index n1 to index n2 does to light
// arriving with cosine cosI in [0, 1] to the interface's normal. Both indices
// are positive. At grazing incidence (cosI = 0) everything is reflected; at
// equal indices nothing is.
//
// Fresnel's equations: Born & Wolf, Principles of Optics, 7th ed., section 1.5.2,
// equation (21a) for the amplitudes, with its signs: at normal incidence rp = -rs.
// Total reflection: section 1.5.4, equation (60) for the phase.
func Fresnel(n1, n2, cosI float64) Reflection {
	eta := n1 / n2
	cos2T := 1 - eta*eta*(1-cosI*cosI)
	if cos2T <= 0 {
		if eta == 1 { // grazing an interface that is none
			return Reflection{}
		}
		// tan(delta/2) = cosI sqrt(sin2I - nu2) / sin2I with nu = n2/n1
		sin2I := 1 - cosI*cosI
		k := cosI / (eta * sin2I)
		half2 := -cos2T * k * k // its square
		return Reflection{
			Rs: 1, Rp: 1, Total: cos2T < 0 || eta > 1,
			InStep: (1 - half2) / (1 + half2),
			Apart:  2 * k * math.Sqrt(-cos2T) / (1 + half2),
		}
	}
	cosT := math.Sqrt(cos2T)
	rs := (n1*cosI - n2*cosT) / (n1*cosI + n2*cosT)
	rp := (n2*cosI - n1*cosT) / (n2*cosI + n1*cosT)
	return Reflection{Rs: rs * rs, Rp: rp * rp, CosT: cosT, InStep: rs * rp}
}

// CriticalAngle returns the angle of incidence, from the normal, beyond which
// light inside index n1 is totally reflected at the interface to index n2. From
// the thin into the dense side, and between equals, there is none and ok is
// false.
func CriticalAngle(n1, n2 float64) (angle facets.Angle, ok bool) {
	if n1 <= n2 {
		return 0, false
	}
	return facets.Angle(math.Asin(n2 / n1)), true
}

// Brewster returns the angle of incidence, from the normal, at which an
// interface from index n1 to index n2 reflects no p-polarised light.
func Brewster(n1, n2 float64) facets.Angle { return facets.Angle(math.Atan2(n2, n1)) }

// refract returns the direction in which light travelling along the unit
// vector d goes on behind an interface with unit normal n, d.n = cosI > 0, where
// eta = n1/n2 and cosT is the cosine that Fresnel gives (Snell's law as a
// vector; unit length by construction).
func refract(d, n vec, eta, cosI, cosT float64) vec {
	return d.scale(eta).plus(cosT-eta*cosI, n)
}
