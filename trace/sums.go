package trace

import "math"

// sums holds what is added up over rays, one number a slot.
type sums [slots]float64

// The slots of sums after the ledger's entries, which come first in its order.
const (
	mirrorsLight = int(quantities) + iota // first surface mirrors the light above
	mirrorsBelow                          // first surface mirrors what lies below
	leakyArea                             // rays with leaked > 0.5
	windowedArea                          // rays that see through the pavilion
	segmentCount                          // facet hits inside the stone
	litSurface                            // luminance under a light: first surface,
	litReturned                           // what is returned,
	litLeaked                             // what shows from below
	pathLength                            // inside the stone, weighted by power, in its own units
	rayCount                              // or the rays' weights
	firstFrom                             // bins of returned + head by angle from the eye
	slots        = firstFrom + fromBins
)

// fromBins is how many bins of 5 degrees there are from the eye to the horizon.
const fromBins = 18

func (s *sums) addLedger(l Ledger) {
	s[Surface] += l.Surface
	s[Returned] += l.Returned
	s[Head] += l.Head
	s[Leaked] += l.Leaked
	s[Absorbed] += l.Absorbed
	s[Unresolved] += l.Unresolved
}

// addRay adds the ledger of one ray of a weight.
func (s *sums) addRay(weight float64, l *Ledger) {
	s[Surface] += weight * l.Surface
	s[Returned] += weight * l.Returned
	s[Head] += weight * l.Head
	s[Leaked] += weight * l.Leaked
	s[Absorbed] += weight * l.Absorbed
	s[Unresolved] += weight * l.Unresolved
	s[rayCount] += weight
}

func (s *sums) add(o *sums) {
	for i := range s {
		s[i] += o[i]
	}
}

// addWeighted adds k times o.
func (s *sums) addWeighted(k float64, o *sums) {
	for i := range s {
		s[i] += k * o[i]
	}
}

// ledger reads the ledger's slots.
func (s *sums) ledger() Ledger {
	return Ledger{s[Surface], s[Returned], s[Head], s[Leaked], s[Absorbed], s[Unresolved]}
}

// unknownError stands for the standard error of a mean of which nothing is known: as
// large as a share can be.
const unknownError = 1

// means returns the mean over rays of every slot, and its standard error from the
// spread of the means of independent scramblings. Both are 0 without a ray. A scrambling
// whose points have all missed the stone so far does not count; with one alone the errors
// are unknownError.
func means(scrambled *[scramblings]sums) (mean, standardError sums) {
	var total sums
	met := 0.0 // scramblings with a ray
	for r := range scrambled {
		total.add(&scrambled[r])
		if scrambled[r][rayCount] > 0 {
			met++
		}
	}
	if met == 0 {
		return sums{}, sums{}
	}
	for i := range mean {
		mean[i] = total[i] / total[rayCount]
		if met == 1 {
			standardError[i] = unknownError
			continue
		}
		var spread float64
		for r := range scrambled {
			if scrambled[r][rayCount] == 0 {
				continue
			}
			d := scrambled[r][i]/scrambled[r][rayCount] - mean[i]
			spread += d * d
		}
		standardError[i] = math.Sqrt(spread / (met * (met - 1)))
	}
	return mean, standardError
}

// complete reports whether every scrambling has a ray.
func complete(scrambled *[scramblings]sums) bool {
	for r := range scrambled {
		if !(scrambled[r][rayCount] > 0) {
			return false
		}
	}
	return true
}

// lit reads what is seen under the even light when what lies below the stone has
// the luminance below.
func (s *sums) lit(below float64) Lit {
	l := Lit{
		Surface:  s[mirrorsLight] + below*s[mirrorsBelow],
		Returned: s[Returned],
		Leaked:   below * s[Leaked],
	}
	l.Sum = l.Surface + l.Returned + l.Leaked
	return l
}

// litByLight reads what the general tracer saw under its light.
func (s *sums) litByLight() Lit {
	l := Lit{Surface: s[litSurface], Returned: s[litReturned], Leaked: s[litLeaked]}
	l.Sum = l.Surface + l.Returned + l.Leaked
	return l
}
