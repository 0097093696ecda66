package gems

import (
	"math"
	"sort"
)

// luminousStep is the spacing of the table of V(λ), in nm.
const luminousStep = 5

// luminous is V(λ), the CIE 1924 photopic luminous efficiency, every 5 nm from 400 to
// 700 nm. It is never written to.
//
// Source: CIE 1924, kept by CIE 018 and ISO/CIE 23539, as stored in the open library
// colour-science/colour (BSD-3); read.
var luminous = [...]float64{
	0.000396, 0.00064, 0.00121, 0.00218, 0.004, 0.0073, 0.0116, 0.01684, 0.023, 0.0298, // 400
	0.038, 0.048, 0.06, 0.0739, 0.09098, 0.1126, 0.13902, 0.1693, 0.20802, 0.2586, // 450
	0.323, 0.4073, 0.503, 0.6082, 0.71, 0.7932, 0.862, 0.9148501, 0.954, 0.9803, // 500
	0.9949501, 1, 0.995, 0.9786, 0.952, 0.9154, 0.87, 0.8163, 0.757, 0.6949, // 550
	0.631, 0.5668, 0.503, 0.4412, 0.381, 0.321, 0.265, 0.217, 0.175, 0.1382, // 600
	0.107, 0.0816, 0.061, 0.04458, 0.032, 0.0232, 0.017, 0.01192, 0.00821, 0.005723, // 650
	0.004102, // 700
}

// luminousSum is the running integral of V(λ) at the table's points, by trapezia. It is
// never written to.
var luminousSum = integrate(luminous)

func integrate(v [len(luminous)]float64) (sum [len(luminous)]float64) {
	for i := 1; i < len(v); i++ {
		sum[i] = sum[i-1] + luminousStep*(v[i-1]+v[i])/2
	}
	return sum
}

// VLambda returns the CIE 1924 photopic luminous efficiency at w, straight between
// the table's 5 nm steps, and 0 outside 400 to 700 nm, where the table ends.
func VLambda(w Wavelength) float64 {
	if !(w >= visibleLo && w <= visibleHi) {
		return 0
	}
	x := float64(w-visibleLo) / luminousStep
	i := min(int(x), len(luminous)-2)
	return luminous[i] + (x-float64(i))*(luminous[i+1]-luminous[i])
}

// SpectrumWavelength turns u, even over [0, 1), into a wavelength distributed as
// equal energy weighted by V(λ) from 400 to 700 nm. It is the exact inverse of the
// cumulative of VLambda, rises with u, and maps 0 to 400 nm.
func SpectrumWavelength(u float64) Wavelength {
	target := u * luminousSum[len(luminousSum)-1]
	i := sort.SearchFloat64s(luminousSum[:], target)
	i = min(max(i, 1), len(luminous)-1) - 1
	// Within the step V runs straight from v to v + s over the step's length, so the
	// area to x of its length is v·x + s·x²/2; the root is written so that it
	// stays exact where s is small or negative.
	v, s := luminous[i], luminous[i+1]-luminous[i]
	area := (target - luminousSum[i]) / luminousStep
	x := 2 * area / (v + math.Sqrt(v*v+2*s*area))
	return min(visibleHi, visibleLo+luminousStep*(Wavelength(i)+Wavelength(x))) // rounding may pass the end
}
