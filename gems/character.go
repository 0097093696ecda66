package gems

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
	// tan²V = (α⁻² − β⁻²)/(β⁻² − γ⁻²) with V from gamma's direction to an optic axis
	// (Born and Wolf, section 15.3); positive where V is under 45 degrees.
	inverse := func(n float64) float64 { return 1 / (n * n) }
	alpha, beta, gamma := inverse(p[0]), inverse(p[1]), inverse(p[2])
	if alpha-beta < beta-gamma {
		return BiaxialPositive
	}
	return BiaxialNegative
}
