// Package gems holds what stones and their surroundings are made of: refractive
// index and dispersion, body colour, density, hardness and cautions, every number
// with its source.
//
// Units. Wavelengths in nanometres, densities in g/cm³, hardness on Mohs's scale,
// absorption per millimetre of path.
//
// Refractive indices are relative to air at the same wavelength, as refractometers,
// gem tables and the published formulas of crystals and glasses give them: air is 1.
// A formula for the index against vacuum, such as that of water, is divided by the
// index of air once, here, and nowhere else.
package gems

import (
	"fmt"
	"math"
)

// Material is one species, glass, coating, liquid or other surrounding. A Material
// that Find or a Library returned is not changed by this package; treat it as
// read-only where it is shared.
type Material struct {
	Key   string   // as plan files and flags write it, lower case
	Name  string   // as people read it
	Names []string // varieties and trade names, which Find understands too
	Group Group    // what sort of material it is

	// Rays holds the index of each principal ray: one for an isotropic material,
	// ordinary and extraordinary for a uniaxial one, alpha, beta and gamma in
	// ascending order for a biaxial one.
	Rays []Dispersion

	Density      float64     // g/cm³, the usual value; 0 if not known
	DensityRange Span        // g/cm³, as found in nature or in trade
	Hardness     Span        // Mohs; zero for a liquid, a gas or where not known
	Cleavage     string      // in words; empty where the sources name none
	Toughness    string      // how it bears knocks, pressure and heat, in words
	Cautions     []string    // what the material itself brings, in words for the bench
	Absorption   *Absorption // body colour; nil means as if colourless
	Notes        string      // how the numbers were chosen, where sources disagree

	DensitySource   Source
	WearSource      Source // of hardness and cleavage
	ToughnessSource Source
	CautionSource   Source
}

// Span is a range of values, Lo ≤ Hi. The zero Span means not known.
type Span struct{ Lo, Hi float64 }

// Group says what sort of material a row is.
type Group int

// The groups, in the order in which tables list them.
const (
	Mineral   Group = iota // grown in nature, or its synthetic twin
	Synthetic              // a crystal that is gem material only when made
	Glass
	Organic
	Coating
	Liquid
	Gas
	Plainly // a constant index that a user gave
)

// String returns the group's word.
func (g Group) String() string {
	return [...]string{
		"mineral", "synthetic crystal", "glass", "organic", "coating", "liquid", "gas", "user's own",
	}[g]
}

// Principal holds the refractive indices along the three principal axes: three
// equal values for an isotropic material; ordinary, ordinary, extraordinary for a
// uniaxial one, whose optic axis is the third; alpha, beta, gamma in ascending
// order for a biaxial one.
type Principal [3]float64

// Ordinary returns the ordinary index of a uniaxial material, alpha of a biaxial one.
func (p Principal) Ordinary() float64 { return p[0] }

// Extraordinary returns the extraordinary index of a uniaxial material, gamma of a
// biaxial one.
func (p Principal) Extraordinary() float64 { return p[2] }

// Least returns the least of the three, on which warnings about critical angles rest.
func (p Principal) Least() float64 { return min(p[0], p[1], p[2]) }

// Greatest returns the greatest of the three.
func (p Principal) Greatest() float64 { return max(p[0], p[1], p[2]) }

// Birefringence returns the greatest less the least index, 0 for an isotropic material.
func (p Principal) Birefringence() float64 { return p.Greatest() - p.Least() }

// Mean returns the arithmetic mean of the three.
func (p Principal) Mean() float64 { return (p[0] + p[1] + p[2]) / 3 }

// Index returns the refractive index at w relative to air: the ordinary index of a
// uniaxial material, the mean of the three of a biaxial one. It fails outside the
// range that Range returns.
func (m *Material) Index(w Wavelength) (float64, error) {
	p, err := m.Indices(w)
	if err != nil {
		return 0, err
	}
	if len(m.Rays) == 3 {
		return p.Mean(), nil
	}
	return p.Ordinary(), nil
}

// Indices returns the principal refractive indices at w relative to air. It fails
// outside the range that Range returns.
func (m *Material) Indices(w Wavelength) (Principal, error) {
	if lo, hi := m.Range(); !(w >= lo && w <= hi) { // the negation catches NaN too
		return Principal{}, &RangeError{Material: m.Name, Wavelength: w, Lo: lo, Hi: hi}
	}
	switch len(m.Rays) {
	case 1:
		n := m.Rays[0].at(w)
		return Principal{n, n, n}, nil
	case 2:
		o := m.Rays[0].at(w)
		return Principal{o, o, m.Rays[1].at(w)}, nil
	default:
		return Principal{m.Rays[0].at(w), m.Rays[1].at(w), m.Rays[2].at(w)}, nil
	}
}

// Range returns the wavelengths over which the material's index is known, or
// fitted and then said so.
func (m *Material) Range() (lo, hi Wavelength) {
	lo, hi = 0, Wavelength(math.Inf(1))
	for i := range m.Rays {
		rayLo, rayHi := m.Rays[i].usable()
		lo, hi = max(lo, rayLo), min(hi, rayHi)
	}
	return lo, hi
}

// Fitted reports whether the index over some part of 400 to 700 nm is a fit of two
// terms through fewer published numbers, not a published formula.
func (m *Material) Fitted() bool {
	for i := range m.Rays {
		if m.Rays[i].fittedSomewhere() {
			return true
		}
	}
	return false
}

// RangeError is a wavelength at which a material's index is not known.
type RangeError struct {
	Material   string
	Wavelength Wavelength
	Lo, Hi     Wavelength
}

// Error names the wavelength, the range and the remedy.
func (e *RangeError) Error() string {
	return fmt.Sprintf("%s: %g nm is outside the range of its refractive index, %g to %g nm; choose "+
		"a wavelength inside",
		e.Material, float64(e.Wavelength), float64(e.Lo), float64(e.Hi))
}

// The least and the greatest constant index that Plain takes: no transparent solid
// or liquid lies outside.
const (
	leastIndex    = 1.0
	greatestIndex = 5.0
	greatestMass  = 25.0 // g/cm³, above the densest element
)

// Plain returns a material of constant index over 400 to 700 nm, such as a plan's
// table or a number in place of a liquid's name. A density of 0 means not known.
func Plain(name string, index, density float64) (*Material, error) {
	if !(index >= leastIndex && index <= greatestIndex) {
		return nil, fmt.Errorf("index %g of %q: no transparent material has it; use %g (air) to %g",
			index, name, leastIndex, greatestIndex)
	}
	if !(density >= 0 && density <= greatestMass) {
		return nil, fmt.Errorf("density %g of %q: impossible; use 0 (not known) to %g g/cm³",
			density, name, greatestMass)
	}
	return &Material{
		Key:   name,
		Name:  name,
		Group: Plainly,
		Rays: []Dispersion{{
			Kind: Constant, Coefficients: []float64{index},
			Lo: visibleLo, Hi: visibleHi, Fitted: true, Source: given,
		}},
		Density:       density,
		DensitySource: given,
	}, nil
}
