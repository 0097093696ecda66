package trace

import (
	"fmt"
	"math"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/gems"
)

// Light is what shines on the scene. It is fixed to the viewer and stands still while
// the stone rocks. Directions are unit vectors in the viewer's frame (+X right, +Y
// up, +Z to the eye) and point to where the light comes from. A Light is not changed
// by its use; many goroutines may share one.
type Light struct {
	Name       string
	Source     string     // standard, or the geometry where it is our own
	Illuminant Illuminant // spectrum, the same in every direction save in a panorama
	// Small tells that most of the light comes from sources under 6° across: only then do
	// the colours of a stone's fire stand apart.
	Small bool

	shape shape
	scale float64 // of the shape's luminance, so that a white diffuser's is 1
}

// shape is the luminance of a light by direction, in any unit.
type shape interface {
	// luminance of a direction with +Z not below 0.
	luminance(from mgl64.Vec3) float64
	// illuminance of a plane that faces the eye, in the same unit times π: 1 for a shape
	// of luminance 1 in every upward direction.
	illuminance() float64
}

// Radiance returns the spectral radiance that arrives from a direction, relative to
// that of a perfect white diffuser under equal energy that lies in the stone's
// place facing the eye, with no head in the way. So the mean over the upper half
// space of radiance times cosine, over π, is 1 when weighted by V(λ) at equal energy.
// It is 0 from below the picture's plane: what lies there is not the light's affair.
func (l *Light) Radiance(from mgl64.Vec3, w gems.Wavelength) float64 {
	if !(from[2] > 0) {
		return 0
	}
	return l.scale * l.shape.luminance(from) * l.Illuminant.At(w)
}

// Luminance returns the luminance in a direction, relative to the white diffuser's.
func (l *Light) Luminance(from mgl64.Vec3) float64 {
	if !(from[2] > 0) {
		return 0
	}
	return l.scale * l.shape.luminance(from)
}

// Under returns the same light with another spectrum.
func (l *Light) Under(s Illuminant) *Light {
	other := *l
	other.Illuminant = s
	return &other
}

// newLight scales the shape.
func newLight(name, source, illuminant string, s shape) (*Light, error) {
	spectrum, err := FindIlluminant(illuminant)
	if err != nil {
		return nil, err
	}
	e := s.illuminance()
	if !(e > 0) || math.IsInf(e, 0) {
		return nil, fmt.Errorf("light %q sends no light to a plane that faces the eye; turn its zenith toward the eye", name)
	}
	return &Light{Name: name, Source: source, Illuminant: spectrum, shape: s, scale: 1 / e}, nil
}

// LightNames returns the names that FindLight knows.
func LightNames() []string { return []string{"even"} }

// FindLight returns the light of that name.
func FindLight(name string, zenith ...mgl64.Vec3) (*Light, error) {
	switch strings.ToLower(strings.TrimSpace(name)) {
	case "even":
		return newLight("even", "the same luminance in every direction above the picture's plane", "E", evenShape{})
	}
	return nil, fmt.Errorf("light %q is not known; use one of %s", name, strings.Join(LightNames(), ", "))
}

// evenShape is the same in every direction.
type evenShape struct{}

func (evenShape) luminance(mgl64.Vec3) float64 { return 1 }
func (evenShape) illuminance() float64         { return 1 }
