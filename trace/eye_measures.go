package trace

import (
	"errors"
	"slices"
)

// darkBelow is the luminance, relative to the white diffuser's, below which a place of
// the stone counts as dark. Our own line: a tenth.
const darkBelow = 0.1

// Distance returns the viewing distance in mm.
func (s *Seen) Distance() float64 { return s.distance }

// Luminance returns the stone's mean luminance relative to the white diffuser's.
func (s *Seen) Luminance() Estimate {
	means := averages(s.each(func(xyz [3]float64) float64 { return xyz[1] }))
	return jackknife(len(means), func(without int) float64 { return meanWithout(means, without) })
}

// DarkArea returns the share of the stone whose luminance is under a tenth of the white
// diffuser's.
func (s *Seen) DarkArea() Estimate {
	return jackknife(len(s.averaged), func(without int) float64 {
		dark := 0
		for i := range s.places {
			if s.at(i, without)[1] < darkBelow {
				dark++
			}
		}
		return float64(dark) / float64(len(s.places))
	})
}

// Contrast returns the root mean square of the luminance about its mean, over the mean.
// E. Peli, Contrast in complex images, J. Opt. Soc. Am. A 7 (1990) 2032. Squares are
// products of independent pictures, so noise adds nothing.
func (s *Seen) Contrast() Estimate {
	luminance := s.each(func(xyz [3]float64) float64 { return xyz[1] })
	means := averages(luminance)
	squares := newPairs(luminance)
	ofMeans := make([][]float64, len(means))
	for i, m := range means {
		ofMeans[i] = []float64{m}
	}
	squaredMeans := newPairs(ofMeans)
	return jackknife(len(means), func(without int) float64 {
		m := squaredMeans.mean(without)
		if m <= 0 {
			return 0 // a black stone has no contrast
		}
		return squares.mean(without)/m - 1
	}).root()
}

// Fire returns how far the colours in the stone lie apart: the luminance-weighted root
// mean square of the distance in CIE 1976 u', v' from the chromaticity of the stone's
// mean light. It tells stones apart only under lights whose Small is set. The definition
// is ours; the chromaticity is that of CIE 015:2018.
func (s *Seen) Fire() Estimate {
	return jackknife(len(s.averaged), func(without int) float64 {
		var total [3]float64
		for i := range s.places {
			for c, v := range s.at(i, without) {
				total[c] += v
			}
		}
		u0, v0, ok := UniformChromaticity(total)
		if !ok || total[1] <= 0 {
			return 0 // a black stone has no fire
		}
		sum := 0.0
		for i := range s.places {
			xyz := s.at(i, without)
			if u, v, ok := UniformChromaticity(xyz); ok {
				sum += xyz[1] * ((u-u0)*(u-u0) + (v-v0)*(v-v0))
			}
		}
		return sum / total[1]
	}).root()
}

// Sparkle returns the root mean square, over the places where both views show the stone,
// of the change in luminance from one view to another, relative to the white
// diffuser's luminance: how strongly the stone twinkles when it rocks by the angle between
// them. The definition is ours. Squares are products of independent pictures, so noise
// adds nothing.
//
// Pictures that share their random numbers between the two views give a smaller
// error, not another value.
func Sparkle(first, second []*Picture, insideFirst, insideSecond []bool, distance float64) (Estimate, error) {
	if len(first) != len(second) {
		return Estimate{}, errors.New("sparkle needs as many pictures of the one view as of the other")
	}
	both := slices.Clone(insideFirst)
	for i := range both {
		both[i] = both[i] && i < len(insideSecond) && insideSecond[i]
	}
	if err := checkPictures(slices.Concat(first, second), both, distance); err != nil {
		return Estimate{}, err
	}
	for n := len(first); n >= leastPictures; n /= 2 {
		a, b := average(first, n, both, distance), average(second, n, both, distance)
		if a == nil || b == nil {
			continue
		}
		change := a.each(func(xyz [3]float64) float64 { return xyz[1] })
		for g := range change {
			for i := range change[g] {
				change[g][i] -= b.averaged[g][i][1]
			}
		}
		return jackknife(n, newPairs(change).mean).root(), nil
	}
	return Estimate{}, errFewRays
}

// at returns the mean of all pictures, or of all but one, at a place.
func (s *Seen) at(place, without int) (mean [3]float64) {
	count := 0.0
	for g := range s.averaged {
		if g == without {
			continue
		}
		count++
		for c, v := range s.averaged[g][place] {
			mean[c] += v
		}
	}
	for c := range mean {
		mean[c] /= count
	}
	return mean
}

// each returns one number a place of every picture.
func (s *Seen) each(of func([3]float64) float64) [][]float64 {
	all := make([][]float64, len(s.averaged))
	for g, picture := range s.averaged {
		all[g] = make([]float64, len(picture))
		for i, xyz := range picture {
			all[g][i] = of(xyz)
		}
	}
	return all
}

// averages returns the mean over the places of every picture.
func averages(pictures [][]float64) []float64 {
	means := make([]float64, len(pictures))
	for g, p := range pictures {
		for _, v := range p {
			means[g] += v / float64(len(p))
		}
	}
	return means
}

// meanWithout returns the mean of all numbers but one.
func meanWithout(numbers []float64, without int) float64 {
	sum, count := 0.0, 0.0
	for i, v := range numbers {
		if i != without {
			sum += v
			count++
		}
	}
	return sum / count
}
