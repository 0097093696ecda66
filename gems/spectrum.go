package gems

import (
	"math"
	"sort"
)

// The spectrum is sampled over the visible range, on the steps of the observer's table.
const (
	spectrumFirst = int((visibleLo - observerLo) / observerStep)
	spectrumSteps = int((visibleHi - visibleLo) / observerStep)
)

// luminousSum is the running integral of V(λ) from 400 to 700 nm at every step, by
// trapezia. It is never written to.
var luminousSum = integrateLuminous()

func integrateLuminous() (sum [spectrumSteps + 1]float64) {
	for i := range spectrumSteps {
		a, b := observer[spectrumFirst+i].y, observer[spectrumFirst+i+1].y
		sum[i+1] = sum[i] + observerStep*(a+b)/2
	}
	return sum
}

// SpectrumWavelength turns u, even over [0, 1), into a wavelength distributed as
// equal energy weighted by V(λ) from 400 to 700 nm. It is the exact inverse of the
// cumulative of VLambda, rises with u, and maps 0 to 400 nm and 1 to 700 nm.
func SpectrumWavelength(u float64) Wavelength {
	target := u * luminousSum[spectrumSteps]
	i := min(max(sort.SearchFloat64s(luminousSum[:], target), 1), spectrumSteps) - 1
	// Within the step V runs straight from v to v + s over the step's length, so the
	// area to x of its length is v·x + s·x²/2; the root is written so that it
	// stays exact where s is small or negative.
	v := observer[spectrumFirst+i].y
	s := observer[spectrumFirst+i+1].y - v
	area := (target - luminousSum[i]) / observerStep
	x := 2 * area / (v + math.Sqrt(v*v+2*s*area))
	return visibleLo + observerStep*(Wavelength(i)+Wavelength(min(x, 1)))
}
