package trace

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/integrate/quad"

	"pavilight/facets"
)

// discShare returns the illuminance, over π, of a plane by a disc of luminance 1 and the
// given half-angle, whose centre stands over the plane at an elevation with the
// sine sinE. It is sin²(half-angle) sinE for a disc wholly above the plane; of one that
// the plane cuts, the part above counts.
func discShare(sinE float64, halfAngle facets.Angle) float64 {
	a := halfAngle.Radians()
	e := math.Asin(max(-1, min(1, sinE)))
	switch {
	case e >= a:
		return math.Pow(math.Sin(a), 2) * sinE
	case e <= -a:
		return 0
	}
	// Circles about the disc's centre at the angle r meet the plane's normal under cosines
	// up + across·cos ψ; only where that is positive does light arrive.
	circle := func(r float64) float64 {
		up, across := math.Cos(r)*sinE, math.Sin(r)*math.Cos(e)
		switch {
		case up >= across:
			return 2 * math.Pi * up * math.Sin(r)
		case up <= -across:
			return 0
		}
		half := math.Acos(-up / across)
		return 2 * (up*half + across*math.Sin(half)) * math.Sin(r)
	}
	// The circle that touches the plane is where the integrand bends.
	bend := math.Abs(e)
	return (quad.Fixed(circle, 0, bend, 32, nil, 0) + quad.Fixed(circle, bend, a, 256, nil, 0)) / math.Pi
}

// The lamps' geometry: bulbs as in a shop or over a bench, none in the middle of the
// viewer's head. Every lamp has the same luminance.
const (
	lampDiameter = 0.060 // m, a common frosted bulb
	lampDistance = 1.0   // m from the stone
	lampSurround = 0.1   // of the illuminance comes evenly from the rest of the half space
	lampsNote    = "six frosted bulbs 60 mm across, 1 m from the stone (3.4° each), at 35° to 68° elevation, " +
		"and a tenth of the illuminance evenly from all around; our own geometry"
	ringInner    = 0.080 // m, radius
	ringOuter    = 0.110 // m
	ringDistance = 0.300 // m, the eye's
	ringNote     = "a ring lamp of 160 to 220 mm about the eye, 300 mm from the stone " +
		"(14.9° to 20.1° from the eye), dark elsewhere; our own geometry"
	lampsOverOthers = 1 - lampSurround
)

// lampPlaces are the elevation and azimuth of each lamp about the zenith, in degrees.
var lampPlaces = [...][2]facets.Angle{{62, 20}, {40, 95}, {68, 150}, {35, 215}, {55, 265}, {45, 330}}

// lampsShape is a number of equal discs before an even surround.
type lampsShape struct {
	centres   []mgl64.Vec3 // in the viewer's frame
	halfAngle facets.Angle
	cosHalf   float64
	surround  float64 // luminance; that of a lamp is 1
}

func newLamps(turned mgl64.Mat3) *lampsShape {
	half := facets.Angle(math.Asin(lampDiameter / 2 / lampDistance))
	s := &lampsShape{halfAngle: half, cosHalf: math.Cos(half.Radians())}
	for _, p := range lampPlaces {
		s.centres = append(s.centres, turned.Mul3x1(DirectionOf(p[0]*facets.Degree, p[1]*facets.Degree)))
	}
	s.surround = s.lamps() * lampSurround / lampsOverOthers
	return s
}

// lamps is the illuminance by the lamps alone, over π.
func (s *lampsShape) lamps() (sum float64) {
	for _, c := range s.centres {
		sum += discShare(c[2], s.halfAngle)
	}
	return sum
}

func (s *lampsShape) luminance(from mgl64.Vec3) float64 {
	for _, c := range s.centres {
		if from.Dot(c) >= s.cosHalf {
			return 1 + s.surround
		}
	}
	return s.surround
}

func (s *lampsShape) illuminance() float64 { return s.lamps() + s.surround }

// ringShape is a ring about the eye.
type ringShape struct{}

func (ringShape) luminance(from mgl64.Vec3) float64 {
	if r := math.Hypot(from[0], from[1]) / from[2]; r >= ringInner/ringDistance && r <= ringOuter/ringDistance {
		return 1
	}
	return 0
}

func (ringShape) illuminance() float64 {
	sinSquare := func(radius float64) float64 { t := radius / ringDistance; return t * t / (1 + t*t) }
	return sinSquare(ringOuter) - sinSquare(ringInner)
}
