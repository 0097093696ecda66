package gems

// Kind names the form of a dispersion formula. In every form λ stands for the
// wavelength in µm, the unit of the literature; this file alone converts.
type Kind int

// The forms, with the order of their coefficients.
const (
	Constant  Kind = iota // n = c0, known at one line only
	Cauchy                // n = c0 + c1/λ² + c2/λ⁴ + …
	Sellmeier             // n² = 1 + Σ A λ²/(λ² − B²); A, B, A, B, …
	Resonance             // n² = a + d λ² + Σ b λ²/(λ² − c); a, d, b, c, b, c, …
	Pole                  // n² = a + d λ² + Σ b/(λ² − c); a, d, b, c, b, c, …
	Laurent               // n² = Σ c λᵖ; c, p, c, p, …
	Water                 // IAPWS R9-97; temperature in K, density in kg/m³
	Points                // measured points, joined by straight lines over 1/λ²; nm, n, nm, n, …
)

// String returns the form as people read it, for wavelengths in µm where it has them.
func (k Kind) String() string {
	return [...]string{
		"constant",
		"n = c0 + c1/λ² + c2/λ⁴ + …",
		"n² = 1 + Σ A λ²/(λ² − B²)",
		"n² = a + d λ² + Σ b λ²/(λ² − c)",
		"n² = a + d λ² + Σ b/(λ² − c)",
		"n² = Σ c λᵖ",
		"IAPWS R9-97",
		"measured points",
	}[k]
}

// The visible range over which fits are made and the spectrum is sampled.
const (
	visibleLo Wavelength = 400
	visibleHi Wavelength = 700
)

// Dispersion is the refractive index of one ray as a function of wavelength.
type Dispersion struct {
	Kind         Kind
	Coefficients []float64  // in the order that Kind says, for wavelengths in µm
	Lo, Hi       Wavelength // published range, nm
	Temperature  string     // as published, "20 °C" or "room"; empty where not known
	Fitted       bool       // fitted here, through fewer published numbers
	Continued    bool       // carried on to 400 and 700 nm from a published range that ends inside: fitted there
	Vacuum       bool       // the formula gives the index against vacuum
	Source       Source     // of formula and coefficients; for a fit, of the index
	SpreadSource Source     // for a fit, of the dispersion that goes with the index
}

// usable returns the range over which at may be called.
func (d *Dispersion) usable() (lo, hi Wavelength) {
	if d.Continued {
		return min(d.Lo, visibleLo), max(d.Hi, visibleHi)
	}
	return d.Lo, d.Hi
}

// fittedSomewhere reports whether some of 400 to 700 nm rests on a fit.
func (d *Dispersion) fittedSomewhere() bool {
	return d.Fitted || d.Continued && (d.Lo > visibleLo || d.Hi < visibleHi)
}

// at returns the index relative to air at w, which must lie in the usable range.
func (d *Dispersion) at(w Wavelength) float64 {
	switch {
	case w < d.Lo:
		return d.continued(d.Lo, w)
	case w > d.Hi:
		return d.continued(d.Hi, w)
	}
	n := d.formula(w)
	if d.Vacuum {
		n /= airAgainstVacuum(w)
	}
	return n
}

// continued carries the index on from the edge of the published range to w as two
// Cauchy terms that keep value and slope over 1/λ² at the edge.
func (d *Dispersion) continued(edge, w Wavelength) float64 {
	const step = 0.01 // nm; the slope's error is of the order of 1e-9
	inside := edge + step
	if edge == d.Hi {
		inside = edge - step
	}
	atEdge := d.at(edge)
	slope := (d.at(inside) - atEdge) / (inside.inverseSquare() - edge.inverseSquare())
	return atEdge + slope*(w.inverseSquare()-edge.inverseSquare())
}

// formula evaluates the published form at w.
func (d *Dispersion) formula(w Wavelength) float64 {
	c := d.Coefficients
	switch d.Kind {
	case Constant:
		return c[0]
	case Cauchy:
		return cauchy(c, w)
	case Sellmeier:
		return sellmeier(c, w)
	case Resonance:
		return resonance(c, w)
	case Pole:
		return pole(c, w)
	case Laurent:
		return laurent(c, w)
	case Water:
		return waterAgainstVacuum(c[1], c[0], w)
	default:
		return points(c, w)
	}
}

// fitted returns two Cauchy terms through the index at the sodium D line and the
// dispersion from B (686.7 nm) to G (430.8 nm), the two numbers that gem tables print.
func fitted(nD, bToG float64, indexSource, spreadSource Source) Dispersion {
	c1 := bToG / (LineG.inverseSquare() - LineB.inverseSquare())
	return twoTerms(nD, c1, indexSource, spreadSource)
}

// fittedAbbe returns two Cauchy terms through the index at the sodium D line and the
// Abbe number (n_d − 1)/(n_F − n_C), which chemists print.
func fittedAbbe(nD, abbe float64, indexSource, spreadSource Source) Dispersion {
	span := LineF.inverseSquare() - LineC.inverseSquare()
	shift := LineHeliumD.inverseSquare() - LineD.inverseSquare() // n_d = nD + c1·shift
	c1 := (nD - 1) / (abbe*span - shift)
	return twoTerms(nD, c1, indexSource, spreadSource)
}

// twoTerms returns n = c0 + c1/λ² through nD at the sodium D line, over the visible range.
func twoTerms(nD, c1 float64, indexSource, spreadSource Source) Dispersion {
	return Dispersion{
		Kind:         Cauchy,
		Coefficients: []float64{nD - c1*LineD.inverseSquare(), c1},
		Lo:           visibleLo,
		Hi:           visibleHi,
		Fitted:       true,
		Source:       indexSource,
		SpreadSource: spreadSource,
	}
}
