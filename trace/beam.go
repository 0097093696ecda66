package trace

import "math"

// beam is the light that is still on its way inside the stone: its share of the
// viewing ray and its state of polarisation, as a Stokes vector I, Q, U, V. Q
// counts light along the axis a against light along b, both unit vectors across
// the beam; U and V are 2 Re and 2 Im of the product of the two amplitudes.
//
// The axes are mirrored with the beam at each facet instead of being turned into
// the next plane of incidence. (a, b, direction) is therefore right- and
// left-handed in turn, which no entry of a ledger can tell: only I leaves the
// stone, and the other sign of V throughout would give the same I.
type beam struct {
	i, q, u, v float64
	a, b       vec
}

// enterBeam returns what one unit of unpolarised light becomes behind a surface
// with unit normal n, travelling along the unit vector d.
func enterBeam(at Reflection, d, n vec) beam {
	s := d.cross(n)
	if l := s.length(); l > 0 {
		s = s.scale(1 / l)
	} else { // straight through: any axes will do
		s = d.cross(vec{1, 0, 0})
		if math.Abs(d.x) > 0.9 {
			s = d.cross(vec{0, 1, 0})
		}
		s = s.scale(1 / s.length())
	}
	// Ts and Tp of either half.
	return beam{i: 1 - at.Mean(), q: (at.Rp - at.Rs) / 2, a: s, b: d.cross(s)}
}

// reflect mirrors the beam at a facet with unit normal n and returns the share of
// the viewing ray that goes through instead. The beam keeps what is reflected.
//
// Mueller matrix of a specular reflection between two turns of the axes: Collett,
// Field Guide to Polarization (2005), chapters on Mueller matrices; the sign of
// the p axis here is that of the mirrored axis, so rp enters as -rp.
func (l *beam) reflect(at Reflection, n vec) (through float64) {
	na, nb := n.dot(l.a), n.dot(l.b)
	l.a, l.b = l.a.plus(-2*na, n), l.b.plus(-2*nb, n)

	// Turn the axes so that a lies along s, across the plane of incidence: by the
	// angle whose cosine is nb/sinI and whose sine is -na/sinI.
	cos2, sin2 := 1.0, 0.0
	if sin2I := na*na + nb*nb; sin2I > 0 {
		cos2, sin2 = (nb*nb-na*na)/sin2I, -2*na*nb/sin2I
	}
	q, u := l.q*cos2+l.u*sin2, l.u*cos2-l.q*sin2

	mean, half := at.Mean(), (at.Rs-at.Rp)/2
	i := mean*l.i + half*q
	q = half*l.i + mean*q
	u, l.v = -at.InStep*u+at.Apart*l.v, -at.InStep*l.v-at.Apart*u
	through = l.i - i

	// Turn back.
	l.i, l.q, l.u = i, q*cos2-u*sin2, u*cos2+q*sin2
	return through
}

// average mirrors the beam like reflect but forgets its polarisation: half of it
// counts as s-, half as p-polarised at every facet.
func (l *beam) average(at Reflection) (through float64) {
	through = l.i * (1 - at.Mean())
	l.i -= through
	return through
}

// decide lets all of a faint beam, of which a share went through and the rest was
// reflected, go one of the two ways by the throw of a die in [0, 1).
func (l *beam) decide(all, through, throw float64) (goes float64) {
	if throw*all < through {
		*l = beam{}
		return all
	}
	l.grow(all)
	return 0
}

// grow gives the beam another power, in the same state of polarisation.
func (l *beam) grow(power float64) {
	k := power / l.i
	l.i, l.q, l.u, l.v = power, l.q*k, l.u*k, l.v*k
}
