package gems

import "slices"

// Absorption is a body colour: how strongly a material absorbs, by wavelength.
type Absorption struct {
	Name          string
	Wavelengths   []Wavelength // ascending knots
	Ordinary      []float64    // per mm at the knots, ≥ 0; alpha's of a biaxial material
	Beta          []float64    // per mm at the knots, of a biaxial material; empty means as Ordinary
	Extraordinary []float64    // per mm at the knots; empty means as Ordinary; gamma's of a biaxial material
	Source        Source
}

// Coefficient returns the absorption per mm of path for the ordinary and the
// extraordinary ray: light falls to exp(−c·mm). Between knots it runs straight,
// beyond them it stays as at the last. For a nil Absorption it is 0, as if colourless.
func (a *Absorption) Coefficient(w Wavelength) (ordinary, extraordinary float64) {
	if a == nil || len(a.Wavelengths) == 0 {
		return 0, 0
	}
	i, t := a.locate(w)
	ordinary = between(a.Ordinary, i, t)
	if len(a.Extraordinary) == 0 {
		return ordinary, ordinary
	}
	return ordinary, between(a.Extraordinary, i, t)
}

// Coefficients returns the absorption per mm of path for light that vibrates along each
// principal axis, in the order of Principal; otherwise it is like Coefficient.
func (a *Absorption) Coefficients(w Wavelength) [3]float64 {
	ordinary, extraordinary := a.Coefficient(w)
	if a == nil || len(a.Beta) == 0 {
		return [3]float64{ordinary, ordinary, extraordinary}
	}
	i, t := a.locate(w)
	return [3]float64{ordinary, between(a.Beta, i, t), extraordinary}
}

// locate returns the knot at or below w and how far on, 0 to 1, w lies to the next.
func (a *Absorption) locate(w Wavelength) (i int, t float64) {
	i, exact := slices.BinarySearch(a.Wavelengths, w)
	switch {
	case exact:
		return i, 0
	case i == 0:
		return 0, 0
	case i == len(a.Wavelengths):
		return i - 1, 0
	}
	lo, hi := a.Wavelengths[i-1], a.Wavelengths[i]
	return i - 1, float64((w - lo) / (hi - lo))
}

// between returns the value t of the way from knot i to the next.
func between(values []float64, i int, t float64) float64 {
	if t == 0 {
		return values[i]
	}
	return values[i] + t*(values[i+1]-values[i])
}
