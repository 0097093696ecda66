package trace

import (
	"errors"
	"fmt"
	"math"
	"math/bits"

	"pavilight/facets"
)

// Picture is the stone as it looks under a light, from rays that are independent of
// those of any other picture with which it is measured.
type Picture struct {
	Pixels int          // of each edge; pixel 0 is the top left, row by row
	Pitch  float64      // mm a pixel
	Sum    [][3]float64 // of the rays' X, Y, Z, in units in which the white diffuser's Y is 1
	Rays   []int32      // how many rays met the stone in each pixel
}

// eyeResolution is what a healthy eye tells apart: 1 minute of arc, the gap of the
// normal row of ISO 8596's test sign. Pictures are averaged over a disc of that diameter.
const eyeResolution = facets.Degree / 60

// discPixels is the least diameter of the eye's disc in pixels: in a coarser picture the
// pixels themselves would blur more than the eye does.
const discPixels = 2

// The least number of independent pictures that an error is taken from.
const leastPictures = 4

// PixelsForEye returns how many pixels an edge of a picture span mm across needs at
// least, so that it can be measured as an eye sees it from a distance in mm.
func PixelsForEye(span, distance float64) int {
	return int(math.Ceil(discPixels * span / eyeDisc(distance)))
}

// eyeDisc returns the diameter in mm of what the eye sees as one point.
func eyeDisc(distance float64) float64 { return 2 * distance * math.Tan(eyeResolution.Radians()/2) }

// Seen is a number of independent pictures of one stone under one light, averaged to
// the resolution of the eye. Its measures are means over the stone's outline.
type Seen struct {
	distance float64
	places   []int          // pixels of the picture that show the stone
	averaged [][][3]float64 // by picture and place
}

// LookAt averages pictures to what an eye tells apart from a distance in mm: each pixel
// of the stone takes the mean over the part of the stone within half a minute of
// arc. inside tells which pixels show the stone. Where a single picture has pixels
// about which it says nothing, pictures are joined; at least 4 must be left. A power of two is
// measured, 64 at most; the others join them.
func LookAt(pictures []*Picture, inside []bool, distance float64) (*Seen, error) {
	if err := checkPictures(pictures, inside, distance); err != nil {
		return nil, err
	}
	var places []int
	for i, in := range inside {
		if in {
			places = append(places, i)
		}
	}
	for n := mostTogether(len(pictures)); n >= leastPictures; n /= 2 {
		if s := average(pictures, n, places, distance); s != nil {
			return s, nil
		}
	}
	return nil, errFewRays
}

var errFewRays = errors.New("too few rays to measure the picture as an eye sees it; " +
	"trace more samples a pixel, or fewer pixels")

// mostTogether returns the largest power of two, up to 64, that is no more than n.
func mostTogether(n int) int { return min(1<<(bits.Len(uint(n))-1), 64) }

// checkPictures checks that pictures are of one size and fine enough.
func checkPictures(pictures []*Picture, inside []bool, distance float64) error {
	if !(distance > 0) || math.IsInf(distance, 0) {
		return fmt.Errorf("viewing distance %g mm: not possible; give the millimetres from the eye to the stone",
			distance)
	}
	if len(pictures) < leastPictures {
		return fmt.Errorf("%d pictures: at least %d independent ones are needed for an error",
			len(pictures), leastPictures)
	}
	first := pictures[0]
	cells := first.Pixels * first.Pixels
	for _, p := range pictures {
		alike := p.Pixels == first.Pixels && p.Pitch == first.Pitch
		if !alike || len(p.Sum) != cells || len(p.Rays) != cells || len(inside) != cells {
			return errors.New("pictures of different sizes cannot be measured together")
		}
	}
	if span := first.Pitch * float64(first.Pixels); first.Pixels < PixelsForEye(span, distance) {
		return fmt.Errorf("%d pixels over %.3g mm are coarser than an eye at %g mm; use at least %d",
			first.Pixels, span, distance, PixelsForEye(span, distance))
	}
	return nil
}

// average joins the pictures to n and averages each about the pixels given. It returns nil
// where one of them has no ray about some pixel, and without any pixel.
func average(pictures []*Picture, n int, places []int, distance float64) *Seen {
	if len(places) == 0 {
		return nil
	}
	s := &Seen{distance: distance, places: places}
	k := newEyeKernel(eyeDisc(distance) / pictures[0].Pitch)
	for g := range n {
		// Every nth picture from the gth on, so that all are used.
		joined := joinPictures(pictures, g, n)
		seen := make([][3]float64, len(s.places))
		for i, place := range s.places {
			xyz, ok := k.mean(joined, place)
			if !ok {
				return nil
			}
			seen[i] = xyz
		}
		s.averaged = append(s.averaged, seen)
	}
	return s
}

// joinPictures adds up every nth picture from the gth on.
func joinPictures(pictures []*Picture, g, n int) *Picture {
	if g+n >= len(pictures) {
		return pictures[g]
	}
	first := pictures[g]
	sum := &Picture{
		Pixels: first.Pixels,
		Pitch:  first.Pitch,
		Sum:    append([][3]float64(nil), first.Sum...),
		Rays:   append([]int32(nil), first.Rays...),
	}
	for i := g + n; i < len(pictures); i += n {
		for j, rays := range pictures[i].Rays {
			sum.Rays[j] += rays
			for c, v := range pictures[i].Sum[j] {
				sum.Sum[j][c] += v
			}
		}
	}
	return sum
}

// eyeKernel is the eye's disc on the grid of pixels: the share of each pixel that a
// disc covers, in a square of reach pixels to each side.
//
// A pixel already is a mean over its square, and weighing whole pixels by their cover
// blurs further. The disc is made smaller so that all together spread light as far, by
// the second moment, as the eye's disc alone.
type eyeKernel struct {
	reach int
	cover []float64
}

// newEyeKernel takes the diameter of the eye's disc in pixels, at least discPixels.
func newEyeKernel(diameter float64) *eyeKernel {
	// Along each axis a disc spreads light by radius²/4, a pixel by 1/12.
	spread := diameter*diameter/16 - 1.0/12
	lo, hi := 0.0, diameter/2
	for range 30 {
		if middle := (lo + hi) / 2; coverBy(middle).spread() < spread {
			lo = middle
		} else {
			hi = middle
		}
	}
	return coverBy(hi)
}

// coverBy covers pixels by a disc about the middle of one, of a radius in pixels.
func coverBy(radius float64) *eyeKernel {
	k := &eyeKernel{reach: int(math.Ceil(max(radius-0.5, 0)))}
	const fine = 32 // parts of a pixel's edge
	for y := -k.reach; y <= k.reach; y++ {
		for x := -k.reach; x <= k.reach; x++ {
			covered := 0
			for j := range fine {
				for i := range fine {
					dx := float64(x) + (float64(i)+0.5)/fine - 0.5
					dy := float64(y) + (float64(j)+0.5)/fine - 0.5
					if dx*dx+dy*dy <= radius*radius {
						covered++
					}
				}
			}
			k.cover = append(k.cover, float64(covered)/(fine*fine))
		}
	}
	return k
}

// spread is the mean square distance of the kernel's pixels from its middle, along
// one axis.
func (k *eyeKernel) spread() float64 {
	sum, total, i := 0.0, 0.0, 0
	for range 2*k.reach + 1 {
		for x := -k.reach; x <= k.reach; x++ {
			sum += k.cover[i] * float64(x*x)
			total += k.cover[i]
			i++
		}
	}
	if total == 0 {
		return 0
	}
	return sum / total
}

// mean returns the mean over the rays within the disc about a pixel. ok is false where
// there is none.
func (k *eyeKernel) mean(p *Picture, place int) (xyz [3]float64, ok bool) {
	column, row := place%p.Pixels, place/p.Pixels
	rays, i := 0.0, 0
	for y := row - k.reach; y <= row+k.reach; y++ {
		for x := column - k.reach; x <= column+k.reach; x++ {
			cover := k.cover[i]
			i++
			if x < 0 || y < 0 || x >= p.Pixels || y >= p.Pixels || cover == 0 {
				continue
			}
			j := y*p.Pixels + x
			rays += cover * float64(p.Rays[j])
			for c, v := range p.Sum[j] {
				xyz[c] += cover * v
			}
		}
	}
	if rays == 0 {
		return xyz, false
	}
	for c := range xyz {
		xyz[c] /= rays
	}
	return xyz, true
}
