package gems

import "strconv"

// Wavelength is a wavelength of light in air, in nanometres. Formulas published for
// the wavelength in vacuum, 0.03 % longer, are taken as they stand: the index of
// no stone here changes by more than 1e-4 over it.
type Wavelength float64

// Fraunhofer's lines and their modern neighbours. Gem tables refer the index to D,
// the middle of the sodium doublet, and measure dispersion from B to G.
const (
	LineB        Wavelength = 686.7
	LineC        Wavelength = 656.27
	LineD        Wavelength = 589.3
	LineHeliumD  Wavelength = 587.56 // helium d, to which glass catalogues refer
	LineMercuryE Wavelength = 546.07 // mercury e
	LineF        Wavelength = 486.13
	LineG        Wavelength = 430.8
)

// String returns the wavelength with its unit.
func (w Wavelength) String() string { return strconv.FormatFloat(float64(w), 'f', -1, 64) + " nm" }

// micrometres returns the wavelength in µm, the unit of published formulas.
func (w Wavelength) micrometres() float64 { return float64(w) / 1000 }

// square returns λ² in µm².
func (w Wavelength) square() float64 { l := w.micrometres(); return l * l }

// inverseSquare returns 1/λ² in µm⁻².
func (w Wavelength) inverseSquare() float64 { return 1 / w.square() }
