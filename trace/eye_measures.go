package trace

import (
	"errors"
	"math"
	"math/bits"
)

// darkBelow is the luminance, relative to the white diffuser's, below which a place of
// the stone counts as dark. Our own line: a tenth.
const darkBelow = 0.1

// Distance returns the viewing distance in mm.
func (s *Seen) Distance() float64 { return s.distance }

// Luminance returns the stone's mean luminance relative to the white diffuser's.
func (s *Seen) Luminance() Estimate {
	means := averages(s.each(func(xyz [3]float64) float64 { return xyz[1] }))
	e, _ := halved(len(means), func(of set) float64 { return meanOf(means, of) })
	return e
}

// DarkArea returns the share of the stone whose luminance is under a tenth of the white
// diffuser's. Noise moves places over that line; what it is found to add is taken off, but
// counts as an error in full, since it is itself known no better.
func (s *Seen) DarkArea() Estimate {
	e, noise := halved(len(s.averaged), func(of set) float64 {
		dark := 0
		for _, xyz := range s.mean(of) {
			if xyz[1] < darkBelow {
				dark++
			}
		}
		return float64(dark) / float64(len(s.places))
	})
	e.Error = math.Hypot(e.Error, noise)
	return e
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
	square, _ := halved(len(means), func(of set) float64 {
		m := squaredMeans.mean(of)
		if m <= 0 {
			return 0 // a black stone has no contrast
		}
		return squares.mean(of)/m - 1
	})
	return square.root()
}

// Fire returns how far the colours in the stone lie apart: the luminance-weighted root
// mean square of the distance in CIE 1976 u', v' from the chromaticity of the stone's
// mean light. It tells stones apart only under lights whose Small is set. The definition
// is ours; the chromaticity is that of CIE 015:2018.
func (s *Seen) Fire() Estimate {
	square, _ := halved(len(s.averaged), func(of set) float64 {
		seen := s.mean(of)
		var total [3]float64
		for _, xyz := range seen {
			for c, v := range xyz {
				total[c] += v
			}
		}
		u0, v0, ok := UniformChromaticity(total)
		if !ok || total[1] <= 0 {
			return 0 // a black stone has no fire
		}
		sum := 0.0
		for _, xyz := range seen {
			if u, v, ok := UniformChromaticity(xyz); ok {
				sum += xyz[1] * ((u-u0)*(u-u0) + (v-v0)*(v-v0))
			}
		}
		return sum / total[1]
	})
	return square.root()
}

// Sparkle returns the root mean square, over the places where both views show the stone,
// of the change in luminance from one view to another, relative to the white
// diffuser's luminance: how strongly the stone twinkles when it rocks by the angle between
// them. The definition is ours. Squares are products of independent pictures, so noise
// adds nothing.
//
// Places are the same where they lie as far from the picture's middle, in mm: the pictures
// of the two views may differ a little in size. Pictures that share their random numbers
// between the views give a smaller error, not another value.
func Sparkle(first, second []*Picture, insideFirst, insideSecond []bool, distance float64) (Estimate, error) {
	if len(first) != len(second) {
		return Estimate{}, errors.New("sparkle needs as many pictures of the one view as of the other")
	}
	if err := checkPictures(first, insideFirst, distance); err != nil {
		return Estimate{}, err
	}
	if err := checkPictures(second, insideSecond, distance); err != nil {
		return Estimate{}, err
	}
	here, there := samePlaces(first[0], second[0], insideFirst, insideSecond)
	for n := mostTogether(len(first)); n >= leastPictures; n /= 2 {
		a, b := average(first, n, here, distance), average(second, n, there, distance)
		if a == nil || b == nil {
			continue
		}
		change := a.each(func(xyz [3]float64) float64 { return xyz[1] })
		for g := range change {
			for i := range change[g] {
				change[g][i] -= b.averaged[g][i][1]
			}
		}
		square, _ := halved(n, newPairs(change).mean)
		return square.root(), nil
	}
	return Estimate{}, errFewRays
}

// samePlaces returns, side by side, the pixels of two pictures that lie as far from the
// middle, to half a pixel, and show the stone in both.
func samePlaces(a, b *Picture, insideA, insideB []bool) (inA, inB []int) {
	// from carries the middle of a's ith pixel along an edge to the pixel of b there.
	from := func(i int) int {
		mm := (float64(i) + 0.5 - float64(a.Pixels)/2) * a.Pitch
		return int(math.Floor(mm/b.Pitch + float64(b.Pixels)/2))
	}
	for place, in := range insideA {
		x, y := from(place%a.Pixels), from(place/a.Pixels)
		if in && x >= 0 && y >= 0 && x < b.Pixels && y < b.Pixels && insideB[y*b.Pixels+x] {
			inA, inB = append(inA, place), append(inB, y*b.Pixels+x)
		}
	}
	return inA, inB
}

// mean returns the mean of a set of pictures, place by place.
func (s *Seen) mean(of set) [][3]float64 {
	mean := make([][3]float64, len(s.places))
	share := 1 / float64(bits.OnesCount64(uint64(of)))
	for g, picture := range s.averaged {
		if !of.has(g) {
			continue
		}
		for i := range mean {
			for c, v := range picture[i] {
				mean[i][c] += share * v
			}
		}
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

// meanOf returns the mean of a set of numbers.
func meanOf(numbers []float64, of set) float64 {
	sum, count := 0.0, 0.0
	for i, v := range numbers {
		if of.has(i) {
			sum += v
			count++
		}
	}
	return sum / count
}
