package gems

import "math"

// cauchy returns n = c0 + c1/λ² + c2/λ⁴ + …
func cauchy(c []float64, w Wavelength) float64 {
	x, n := w.inverseSquare(), 0.0
	for i := len(c) - 1; i >= 0; i-- {
		n = n*x + c[i]
	}
	return n
}

// sellmeier returns n of n² = 1 + Σ A λ²/(λ² − B²).
func sellmeier(c []float64, w Wavelength) float64 {
	l2, n2 := w.square(), 1.0
	for i := 0; i+1 < len(c); i += 2 {
		n2 += c[i] * l2 / (l2 - c[i+1]*c[i+1])
	}
	return math.Sqrt(n2)
}

// resonance returns n of n² = a + d λ² + Σ b λ²/(λ² − c).
func resonance(c []float64, w Wavelength) float64 {
	l2 := w.square()
	n2 := c[0] + c[1]*l2
	for i := 2; i+1 < len(c); i += 2 {
		n2 += c[i] * l2 / (l2 - c[i+1])
	}
	return math.Sqrt(n2)
}

// pole returns n of n² = a + d λ² + Σ b/(λ² − c).
func pole(c []float64, w Wavelength) float64 {
	l2 := w.square()
	n2 := c[0] + c[1]*l2
	for i := 2; i+1 < len(c); i += 2 {
		n2 += c[i] / (l2 - c[i+1])
	}
	return math.Sqrt(n2)
}

// laurent returns n of n² = Σ c λᵖ.
func laurent(c []float64, w Wavelength) float64 {
	l, n2 := w.micrometres(), 0.0
	for i := 0; i+1 < len(c); i += 2 {
		n2 += c[i] * math.Pow(l, c[i+1])
	}
	return math.Sqrt(n2)
}

// points returns n between measured points, straight over 1/λ² between neighbours:
// over that variable the index of a glass is nearly a straight line.
func points(c []float64, w Wavelength) float64 {
	i := 2
	for i+2 < len(c) && Wavelength(c[i]) < w {
		i += 2
	}
	x0, x1 := Wavelength(c[i-2]).inverseSquare(), Wavelength(c[i]).inverseSquare()
	t := (w.inverseSquare() - x0) / (x1 - x0)
	return c[i-1] + t*(c[i+1]-c[i-1])
}

// waterAgainstVacuum returns the index of water and steam against vacuum at a density
// in kg/m³ and a temperature in K.
//
// Source: IAPWS R9-97, Release on the Refractive Index of Ordinary Water Substance;
// coefficients read in the open package iapws.
func waterAgainstVacuum(density, kelvin float64, w Wavelength) float64 {
	const (
		a0, a1, a2, a3 = 0.244257733, 9.74634476e-3, -3.73234996e-3, 2.68678472e-4
		a4, a5, a6, a7 = 1.58920570e-3, 2.45934259e-3, 0.900704920, -1.66626219e-2
		ultraviolet    = 0.229202
		infrared       = 5.432937
	)
	rho := density / 1000
	t := kelvin / 273.15
	l := w.micrometres() / 0.589
	l2 := l * l
	// The Lorentz-Lorenz quotient (n² − 1)/(n² + 2).
	q := rho * (a0 + a1*rho + a2*t + a3*l2*t + a4/l2 +
		a5/(l2-ultraviolet*ultraviolet) + a6/(l2-infrared*infrared) + a7*rho*rho)
	return math.Sqrt((1 + 2*q) / (1 - q))
}

// airAgainstVacuum returns the index of standard air against vacuum: dry, 15 °C,
// 101.325 kPa, 450 ppm carbon dioxide.
//
// Source: Ciddor, Appl. Opt. 35, 1566 (1996), 230 to 1690 nm.
func airAgainstVacuum(w Wavelength) float64 {
	x := w.inverseSquare()
	return 1 + 0.05792105/(238.0185-x) + 0.00167917/(57.362-x)
}
