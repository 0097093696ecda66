// Package gems holds what stones and their surroundings are made of: refractive
// index and dispersion, density, hardness and cautions, every number with its
// source.
package gems

// Wavelength is a wavelength of light in air, in nanometres.
type Wavelength float64

// LineD is the sodium D line, to which gem tables refer, in nm.
const LineD Wavelength = 589.3

// Material is one species, liquid or other surrounding.
type Material struct {
	Key  string // as plan files and flags write it
	Name string // as people read it
}

// Index returns the refractive index at w; for a doubly refracting species the
// ordinary or mean index. It fails outside the published range.
func (m *Material) Index(w Wavelength) (float64, error) { return 0, nil }
