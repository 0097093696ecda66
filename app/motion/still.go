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
// estimate is a ratio of two means: its bias falls as the number of rays.)
func Look(ctx context.Context, scene trace.Scene, settings trace.Settings) (*Still, error) {
	settings.Colour, settings.Error = true, 0
	scene.Surroundings = scene.Surroundings[:1]
	seen, err := trace.Run(ctx, scene, settings, nil)
	if err != nil {
		return nil, err
	}
	sheet, err := whiteSheet(ctx, scene.Stone, settings)
	if err != nil {
		return nil, err
	}
	return against(sheet, seen.Columns[0].Map, settings), nil
}

// against divides what was seen by what the same rays show of the white sheet.
func against(sheet [][3]float32, seen *trace.Map, settings trace.Settings) *Still {
	s := &Still{Pixels: seen.Pixels, Span: seen.Span, XYZ: seen.XYZ(), Light: settings.Light}
	white := settings.Light.Illuminant.White()
	const least = 1e-3 // of the white: below, the rays of a pixel say nothing of this part
	for i := range s.XYZ {
		if math.IsNaN(float64(s.XYZ[i][1])) {
			continue // beside the stone
		}
		y := 1.0
		if w := float64(sheet[i][1]); w > least*white[1] {
			y = float64(s.XYZ[i][1]) / w
		}
		for c := range 3 {
			ratio := y
			if w := float64(sheet[i][c]); w > least*white[c] {
				ratio = float64(s.XYZ[i][c]) / w
			}
			s.XYZ[i][c] = float32(ratio * white[c])
		}
	}
	s.calm(white)
	return s
}

// coloured tells from what part of its luminance on a pixel's X or Z differs from a grey's
// so much that rays of different wavelengths take different ways there.
const coloured = 0.04

// calmReach is how far a coloured pixel looks about itself, pixels: less than what an eye
// tells apart at the distance of a stone in the hand.
const calmReach = 2

// calm takes the speckle out of coloured places, where few rays of few wavelengths make a
// pixel: each coloured pixel becomes the mean of the coloured ones about it. All others
// stay as they are, and so do edges.
func (s *Still) calm(white [3]float64) {
	hue := make([]bool, len(s.XYZ))
	for i, v := range s.XYZ {
		y := float64(v[1])
		x, z := float64(v[0])*white[1]/white[0], float64(v[2])*white[1]/white[2]
		hue[i] = math.Abs(x-y) > coloured*y || math.Abs(z-y) > coloured*y
	}
	from := slices.Clone(s.XYZ)
	n := s.Pixels
	for i := range s.XYZ {
		if !hue[i] {
			continue
		}
		var sum [3]float32
		count := float32(0)
		for y := max(0, i/n-calmReach); y <= min(n-1, i/n+calmReach); y++ {
			for x := max(0, i%n-calmReach); x <= min(n-1, i%n+calmReach); x++ {
				if hue[y*n+x] {
					for c := range sum {
						sum[c] += from[y*n+x][c]
					}
					count++
				}
			}
		}
		for c := range sum {
			s.XYZ[i][c] = sum[c] / count
		}
	}
}

// whiteSheet returns what the same rays show of a white sheet under the stone's outline,
// in even light of the spectrum: a stone that cannot be seen, since it has the index of
// what surrounds it, on a ground that sends all light back.
func whiteSheet(ctx context.Context, stone *facets.Stone, settings trace.Settings) ([][3]float32, error) {
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
	return r.Columns[0].Map.XYZ(), nil
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
