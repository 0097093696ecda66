package picture

import (
	"image"
	"image/color"
	"math"

	"pavilight/gems"
)

// Seen paints tristimulus values of pixels x pixels, row by row from the top left, in
// the colours that colour gives them; NaN, outside the stone, is neutral grey.
func Seen(xyz [][3]float32, pixels int, colour func(xyz [3]float64) gems.Colour) *image.RGBA {
	img := image.NewRGBA(image.Rect(0, 0, pixels, pixels))
	for i, v := range xyz {
		c := grey(outside)
		if !math.IsNaN(float64(v[1])) {
			s := colour([3]float64{float64(v[0]), float64(v[1]), float64(v[2])})
			c = color.RGBA{level(s.R), level(s.G), level(s.B), 255}
		}
		img.SetRGBA(i%pixels, i/pixels, c)
	}
	return img
}
