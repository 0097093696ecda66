// Package motion shows a stone in true colour, and makes moving pictures of a stone that
// rocks or wobbles: GIF, animated PNG, numbered PNG, and MP4 or WebM where ffmpeg is
// installed.
//
// Pictures are opaque sRGB, row 0 on top. The stone moves under a fixed eye and a fixed
// light.
package motion

import (
	"context"
	"image"
	"image/color"
	"math"
	"slices"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Still is a stone in true colour under one light.
type Still struct {
	Pixels int
	Span   float64      // mm across the whole picture
	XYZ    [][3]float32 // of every pixel, as trace.Map.XYZ; NaN outside the outline
	Light  *trace.Light
}

// Exposure is what a luminance is multiplied by on a screen: a white diffuser in the
// stone's place has two thirds of the screen's white, so that brighter places of the
// stone can be told from it.
const Exposure = 2.0 / 3

// Look pictures the scene's first surrounding under the settings' light, which must not
// be nil. Settings.Samples, the mean number of rays a pixel, must be given.
//
// Each ray has one wavelength, and a few rays a pixel would leave colours speckled by
// which wavelengths fell into it. So every pixel is divided by what the same rays show
// of a white sheet in even light of the same spectrum: where a place of the stone looks
// alike at all wavelengths the speckle is gone whatever the number of rays. (The
// estimate is a ratio of two means: its bias falls as the number of rays.) The sheet is
// that of the same settings, but for the light's shape: NewSheet; nil has it made.
func Look(ctx context.Context, scene trace.Scene, settings trace.Settings, sheet *Sheet) (*Still, error) {
	settings.Colour, settings.Error = true, 0
	scene.Surroundings = scene.Surroundings[:1]
	seen, err := trace.Run(ctx, scene, settings, nil)
	if err != nil {
		return nil, err
	}
	if sheet == nil {
		if sheet, err = NewSheet(ctx, scene.Stone, settings); err != nil {
			return nil, err
		}
	}
	return sheet.against(seen.Columns[0].Map, settings), nil
}

// against divides what was seen by what the same rays show of the white sheet.
func (sheet *Sheet) against(seen *trace.Map, settings trace.Settings) *Still {
	s := &Still{Pixels: seen.Pixels, Span: seen.Span, XYZ: seen.XYZ(), Light: settings.Light}
	white := settings.Light.Illuminant.White()
	// Below this part of the white, the rays of a pixel say nothing of a tristimulus value:
	// it is taken as in the grey of all three together.
	const least = 1e-3
	var holes []int // pixels of which nothing is known
	for i, v := range s.XYZ {
		if math.IsNaN(float64(v[1])) {
			continue // beside the stone
		}
		w := sheet.xyz[i]
		all := float64(w[0]) + float64(w[1]) + float64(w[2])
		if !(all > least*(white[0]+white[1]+white[2])) {
			holes = append(holes, i)
			continue
		}
		grey := (float64(v[0]) + float64(v[1]) + float64(v[2])) / all
		for c := range v {
			ratio := grey
			if float64(w[c]) > least*white[c] {
				ratio = float64(v[c]) / float64(w[c])
			}
			s.XYZ[i][c] = float32(ratio * white[c])
		}
	}
	s.fill(holes)
	s.calm(white)
	return s
}

// fill gives pixels the mean of those about them.
func (s *Still) fill(holes []int) {
	hole := make(map[int]bool, len(holes))
	for _, i := range holes {
		hole[i] = true
	}
	for _, i := range holes {
		s.XYZ[i], _ = s.mean(s.XYZ, i, 1, func(j int) bool { return !hole[j] && s.XYZ[j][1] == s.XYZ[j][1] })
	}
}

// mean returns the mean of the pixels about one, up to reach aside, and how many they are;
// black where there is none.
func (s *Still) mean(of [][3]float32, pixel, reach int, counts func(pixel int) bool) (mean [3]float32, n int) {
	x, y := pixel%s.Pixels, pixel/s.Pixels
	for row := max(0, y-reach); row <= min(s.Pixels-1, y+reach); row++ {
		for column := max(0, x-reach); column <= min(s.Pixels-1, x+reach); column++ {
			if j := row*s.Pixels + column; counts(j) {
				for c := range mean {
					mean[c] += of[j][c]
				}
				n++
			}
		}
	}
	for c := range mean {
		mean[c] /= float32(max(n, 1))
	}
	return mean, n
}

// coloured tells from what part of its luminance on a pixel's X or Z differs from a grey's
// so much that rays of different wavelengths take different ways there.
const coloured = 0.04

// A place is restless where so many of the pixels up to calmReach aside, itself included,
// are coloured. The reach is less than what an eye tells apart at the distance of a stone in
// the hand.
const (
	calmReach = 2
	restless  = 5 // of 25
)

// calm takes the speckle out of coloured places, where few rays of few wavelengths make a
// pixel: each pixel of a restless place becomes the mean of the restless ones about it. All
// others stay as they are, and so do edges between plain places.
func (s *Still) calm(white [3]float64) {
	hue, any := make([]bool, len(s.XYZ)), false
	for i, v := range s.XYZ {
		y := float64(v[1])
		x, z := float64(v[0])*white[1]/white[0], float64(v[2])*white[1]/white[2]
		hue[i] = math.Abs(x-y) > coloured*y || math.Abs(z-y) > coloured*y
		any = any || hue[i]
	}
	if !any {
		return
	}
	from := slices.Clone(s.XYZ)
	calmed := make([]bool, len(s.XYZ))
	for i, v := range from {
		if v[1] == v[1] {
			_, n := s.mean(from, i, calmReach, func(j int) bool { return hue[j] })
			calmed[i] = n >= restless
		}
	}
	for i := range s.XYZ {
		if calmed[i] {
			s.XYZ[i], _ = s.mean(from, i, calmReach, func(j int) bool { return calmed[j] })
		}
	}
}

// Sheet is what the rays of a picture show of a white sheet in even light.
type Sheet struct{ xyz [][3]float32 }

// NewSheet returns what the rays of the settings show of a white sheet under the stone's
// outline, in even light of the spectrum of the settings' light: a stone that cannot be
// seen, since it has the index of what surrounds it, on a ground that sends all light
// back.
func NewSheet(ctx context.Context, stone *facets.Stone, settings trace.Settings) (*Sheet, error) {
	even, err := trace.FindLight("even")
	if err != nil {
		return nil, err
	}
	clear, err := gems.Plain("clear", 1.5, 0)
	if err != nil {
		return nil, err
	}
	settings.Light, settings.Head, settings.Below = even.Under(settings.Light.Illuminant), 0, 0
	scene := trace.Scene{Stone: stone, Material: clear, Surroundings: trace.Around(clear), Ground: &trace.Ground{Reflectance: 1}}
	settings.Colour, settings.Error = true, 0
	r, err := trace.Run(ctx, scene, settings, nil)
	if err != nil {
		return nil, err
	}
	return &Sheet{r.Columns[0].Map.XYZ()}, nil
}

// Image returns the picture as an eye sees it that is used to the light, on a ground of
// the given colour.
func (s *Still) Image(ground color.RGBA) *image.RGBA {
	display := trace.NewDisplay(s.Light.Illuminant.White(), Exposure)
	img := image.NewRGBA(image.Rect(0, 0, s.Pixels, s.Pixels))
	level := func(v float64) uint8 { return uint8(min(max(v, 0), 1)*255 + 0.5) }
	for i, v := range s.XYZ {
		c := ground
		if !math.IsNaN(float64(v[1])) {
			seen := display.Colour([3]float64{float64(v[0]), float64(v[1]), float64(v[2])})
			c = color.RGBA{R: level(seen.R), G: level(seen.G), B: level(seen.B), A: 255}
		}
		img.SetRGBA(i%s.Pixels, i/s.Pixels, c)
	}
	return img
}
