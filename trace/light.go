package trace

import (
	"fmt"
	"math"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// Light is what shines on the scene. It is fixed to the viewer and stands still while
// the stone rocks. Directions are unit vectors in the viewer's frame (+X right, +Y
// up, +Z to the eye) and point to where the light comes from. A Light is not changed
// by its use; many goroutines may share one.
type Light struct {
	Name       string
	Source     string     // standard, or the geometry where it is our own
	Illuminant Illuminant // spectrum, the same in every direction; in a panorama, of its white
	// Small tells that most of the light comes from sources less than 6° across: only
	// then do the colours of a stone's fire stand apart.
	Small bool

	shape shape
	scale float64 // of the shape's luminance, so that a white diffuser's is 1
}

// shape is the luminance of a light by direction, in any unit.
type shape interface {
	// luminance of a direction above the picture's plane.
	luminance(from mgl64.Vec3) float64
	// illuminance of a plane that faces the eye, over π: 1 for a shape of luminance 1 in
	// every direction above the picture's plane.
	illuminance() float64
}

// coloured is a shape whose spectrum differs from direction to direction.
type coloured interface {
	shape
	// radiance of a direction at w, relative to the illuminant's.
	radiance(from mgl64.Vec3, w gems.Wavelength) float64
	// under returns the same shape before another illuminant.
	under(s *Illuminant) shape
}

// Radiance returns the spectral radiance that arrives from a direction, relative to
// that of a perfect white diffuser under equal energy that lies in the stone's
// place facing the eye, with no head in the way. The mean of radiance times cosine
// over the upper half space, weighted by V(λ) at equal energy, is that of the
// radiance 1 in every direction. It is 0 from below the picture's plane, and in it:
// what lies there is not the light's affair.
func (l *Light) Radiance(from mgl64.Vec3, w gems.Wavelength) float64 {
	if !(from[2] > 0) {
		return 0
	}
	if c, ok := l.shape.(coloured); ok {
		return l.scale * c.radiance(from, w) * l.Illuminant.At(w)
	}
	return l.scale * l.shape.luminance(from) * l.Illuminant.At(w)
}

// Luminance returns the luminance in a direction, relative to the white diffuser's
// and to the same bounds as Radiance.
func (l *Light) Luminance(from mgl64.Vec3) float64 {
	if !(from[2] > 0) {
		return 0
	}
	return l.scale * l.shape.luminance(from)
}

// Under returns the same light with another spectrum. A panorama's colours are then
// colours in front of that spectrum.
func (l *Light) Under(s Illuminant) *Light {
	other := *l
	other.Illuminant = s
	if c, ok := l.shape.(coloured); ok {
		other.shape = c.under(&s)
		other.scale = 1 / other.shape.illuminance()
	}
	return &other
}

// newLight scales a shape, so that a white diffuser in its light has luminance 1.
func newLight(name, source, illuminant string, s shape) (*Light, error) {
	spectrum, err := FindIlluminant(illuminant)
	if err != nil {
		return nil, err
	}
	e := s.illuminance()
	if !(e > 0) || math.IsInf(e, 0) {
		return nil, fmt.Errorf("light %q: nothing of it reaches a plane that faces the eye; "+
			"turn its zenith toward the eye", name)
	}
	return &Light{Name: name, Source: source, Illuminant: spectrum, shape: s, scale: 1 / e}, nil
}

// LightNames returns the names that FindLight knows.
func LightNames() []string {
	return []string{"even", "overcast", "clear", "sun", "room", "lamps", "ring"}
}

// FindLight returns the light of that name. Skies, the room and the lamps stand about
// a zenith, which is the eye unless one is given: a vector in the viewer's frame of
// any length but 0. The even light and the ring belong to the eye and take none.
func FindLight(name string, zenith ...mgl64.Vec3) (*Light, error) {
	eye := mgl64.Vec3{0, 0, 1}
	up := eye
	if len(zenith) > 0 {
		up = zenith[0]
	}
	name = strings.ToLower(strings.TrimSpace(name))
	turned, err := zenithTo(up)
	if err != nil {
		return nil, fmt.Errorf("light %q: %w", name, err)
	}
	if (name == "even" || name == "ring") && !(up.Normalize()[2] > 1-eyeTolerance) {
		return nil, fmt.Errorf("light %q belongs to the eye and has no zenith of its own; "+
			"leave the zenith out", name)
	}
	switch name {
	case "even":
		return newLight(name, "the same luminance in every direction above the picture's plane",
			"E", evenShape{})
	case "overcast":
		return newLight(name, "CIE standard overcast sky (Moon & Spencer 1942; ISO 15469/CIE S 011), "+
			groundNote, "D65", newSky(overcastSky{}, turned, nil))
	case "clear", "sun":
		sun := turned.Mul3x1(DirectionOf(usualSunElevation, usualSunAzimuth))
		return ClearSky(turned.Mul3x1(eye), sun, name == "sun")
	case "room":
		return newLight(name, roomNote, "LED-B4", newRoom(turned))
	case "lamps":
		l, err := newLight(name, lampsNote, "A", newLamps(turned))
		if err == nil {
			l.Small = true
		}
		return l, err
	case "ring":
		return newLight(name, ringNote, "LED-B5", ringShape{})
	}
	return nil, fmt.Errorf("light %q is not known; use one of %s", name, strings.Join(LightNames(), ", "))
}

// DirectionOf returns the unit vector, in the viewer's frame, at an elevation over the
// picture's plane (90° is the eye) and at an azimuth in the picture: 0 is up, and
// it grows anticlockwise, as the indices of a stone seen face-up do.
func DirectionOf(elevation, azimuth facets.Angle) mgl64.Vec3 {
	sinE, cosE := math.Sincos(elevation.Radians())
	sinA, cosA := math.Sincos(azimuth.Radians())
	return mgl64.Vec3{-cosE * sinA, cosE * cosA, sinE}
}

// zenithTo returns the shortest turn that takes the eye's direction to the zenith.
func zenithTo(zenith mgl64.Vec3) (mgl64.Mat3, error) {
	length := zenith.Len()
	if !(length > 0) || math.IsInf(length, 0) {
		return mgl64.Mat3{}, fmt.Errorf("zenith %v is no direction; give an elevation and an azimuth", zenith)
	}
	z := zenith.Mul(1 / length)
	if z[0] == 0 && z[1] == 0 && z[2] > 0 {
		return mgl64.Ident3(), nil
	}
	return mgl64.QuatBetweenVectors(mgl64.Vec3{0, 0, 1}, z).Mat4().Mat3(), nil
}

// eyeTolerance is how far below 1 the cosine between a zenith and the eye may lie by
// rounding alone.
const eyeTolerance = 1e-14

// evenShape is the same in every direction.
type evenShape struct{}

func (evenShape) luminance(mgl64.Vec3) float64 { return 1 }
func (evenShape) illuminance() float64         { return 1 }
