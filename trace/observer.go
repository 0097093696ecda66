package trace

import (
	"math"
	"sort"

	"pavilight/gems"
)

const tracedSteps = tracedTo - tracedFrom

// colourSum is the running integral of x̄ + ȳ + z̄ from 400 to 700 nm at every row of
// the table, by trapezia, which is exact: the functions run straight between rows. It
// is never written to.
var colourSum = func() (sum [tracedSteps + 1]float64) {
	for i := range tracedSteps {
		sum[i+1] = sum[i] + tableStep*(matchingSum(i)+matchingSum(i+1))/2
	}
	return sum
}()

// luminousIntegral is the integral of ȳ, that is V(λ), from 400 to 700 nm, in nm.
var luminousIntegral = func() (sum float64) {
	for i := range tracedSteps + 1 {
		_, y, _ := gems.Observer(tracedLo + tableStep*gems.Wavelength(i))
		if i == 0 || i == tracedSteps {
			y /= 2
		}
		sum += tableStep * y
	}
	return sum
}()

// matchingSum is x̄ + ȳ + z̄ at row i from 400 nm.
func matchingSum(i int) float64 {
	x, y, z := gems.Observer(tracedLo + tableStep*gems.Wavelength(i))
	return x + y + z
}

// colourWavelength turns u, even over [0, 1), into a wavelength from 400 to 700 nm
// distributed as x̄ + ȳ + z̄, and the weights by which the radiance found at that
// wavelength counts: the mean of weight times radiance is the light's X, Y and Z, in
// units in which equal energy of radiance 1 has Y = 1. The wavelength rises with u.
//
// No weight exceeds 2.5, so a few wavelengths a pixel already give its colour.
func colourWavelength(u float64) (w gems.Wavelength, xyz [3]float64) {
	target := u * colourSum[tracedSteps]
	i := min(max(sort.SearchFloat64s(colourSum[:], target), 1), tracedSteps) - 1
	// Within the step the density runs straight from v to v + s over the step's length,
	// so the area to t of it is v·t + s·t²/2; this root is exact for small s of any sign.
	v := matchingSum(i)
	s := matchingSum(i+1) - v
	area := (target - colourSum[i]) / tableStep
	t := 2 * area / (v + math.Sqrt(v*v+2*s*area))
	w = tracedLo + tableStep*(gems.Wavelength(i)+gems.Wavelength(min(t, 1)))
	x, y, z := gems.Observer(w)
	k := colourSum[tracedSteps] / luminousIntegral / (x + y + z)
	return w, [3]float64{k * x, k * y, k * z}
}

// UniformChromaticity returns the CIE 1976 chromaticity u', v' of tristimulus values
// X, Y, Z, which lies in the plane where equal distances look about equally
// different (CIE 015:2018). Black has none: ok is false.
func UniformChromaticity(xyz [3]float64) (u, v float64, ok bool) {
	d := xyz[0] + 15*xyz[1] + 3*xyz[2]
	if !(d > 0) {
		return 0, 0, false
	}
	return 4 * xyz[0] / d, 9 * xyz[1] / d, true
}
