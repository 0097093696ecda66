package gems

import "math"

// Character is how a material splits light, with its sign.
type Character int

// The characters. A uniaxial material is positive where the extraordinary index is the
// greater; a biaxial one where its acute angle between optic axes is halved by the
// direction of gamma.
const (
	Isotropic Character = iota
	UniaxialPositive
	UniaxialNegative
	BiaxialPositive
	BiaxialNegative
)

// String returns the character in words.
func (c Character) String() string {
	return [...]string{
		"isotropic", "uniaxial positive", "uniaxial negative", "biaxial positive", "biaxial negative",
	}[c]
}

// Uniaxial reports whether there is one optic axis.
func (c Character) Uniaxial() bool { return c == UniaxialPositive || c == UniaxialNegative }

// Biaxial reports whether there are two optic axes.
func (c Character) Biaxial() bool { return c == BiaxialPositive || c == BiaxialNegative }

// Character returns the optic character at the sodium D line, or at the end of the
// range nearest to it.
func (m *Material) Character() Character {
	lo, hi := m.Range()
	p, err := m.Indices(min(max(LineD, lo), hi))
	switch {
	case err != nil || len(m.Rays) == 1:
		return Isotropic
	case len(m.Rays) == 2 && p.Extraordinary() >= p.Ordinary():
		return UniaxialPositive
	case len(m.Rays) == 2:
		return UniaxialNegative
	}
	if p.OpticAngle() < 90 {
		return BiaxialPositive
	}
	return BiaxialNegative
}

// OpticAngle returns the angle in degrees between the two optic axes, measured about the
// direction of gamma: under 90 in a positive biaxial material, over 90 in a negative one.
// Where two of the indices are equal it is 0 or 180, where all three are it is 0.
//
// tan²V = (α⁻² − β⁻²)/(β⁻² − γ⁻²) with V half the angle: Born and Wolf, section 15.3.
func (p Principal) OpticAngle() float64 {
	inverse := func(n float64) float64 { return 1 / (n * n) }
	alpha, beta, gamma := inverse(p[0]), inverse(p[1]), inverse(p[2])
	return 2 * math.Atan2(math.Sqrt(max(0, alpha-beta)), math.Sqrt(max(0, beta-gamma))) * 180 / math.Pi
}
