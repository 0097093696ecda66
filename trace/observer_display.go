package trace

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/gems"
)

// Display shows tristimulus values on an sRGB screen as an eye sees them that is used
// to the light: the light's white becomes the screen's.
type Display struct {
	adapt  mgl64.Mat3 // from X, Y, Z under the light to those under the screen's white
	expose float64
}

// NewDisplay returns a display for a light whose white diffuser has the tristimulus
// values white. Luminance is multiplied by expose, so that what has 1/expose of
// the white diffuser's luminance is the brightest the screen can show.
//
// The eye's adaptation is the linear Bradford transform (ICC.1:2022, annex E).
func NewDisplay(white [3]float64, expose float64) *Display {
	cones := mgl64.Mat3FromRows(
		mgl64.Vec3{0.8951, 0.2664, -0.1614},
		mgl64.Vec3{-0.7502, 1.7135, 0.0367},
		mgl64.Vec3{0.0389, -0.0685, 1.0296},
	)
	from, to := cones.Mul3x1(white), cones.Mul3x1(screenWhite)
	gain := mgl64.Diag3(mgl64.Vec3{to[0] / from[0], to[1] / from[1], to[2] / from[2]})
	return &Display{adapt: cones.Inv().Mul3(gain).Mul3(cones), expose: expose}
}

// Colour returns the sRGB colour of tristimulus values.
//
// Gamut: luminance is kept. A colour that the screen cannot show moves straight
// toward the grey of its luminance until no part lies below 0 or above 1; what is
// as bright as the screen's white or brighter is white.
func (d *Display) Colour(xyz [3]float64) gems.Colour {
	seen := d.adapt.Mul3x1(xyz).Mul(d.expose)
	rgb := intoGamut(linearFromXYZ(seen), seen[1])
	return gems.Colour{R: encode(rgb[0]), G: encode(rgb[1]), B: encode(rgb[2])}
}

// intoGamut moves linear red, green and blue toward the grey of luminance y until all
// lie within 0 to 1.
func intoGamut(rgb mgl64.Vec3, y float64) mgl64.Vec3 {
	if !(y > 0) { // black, or no number at all
		return mgl64.Vec3{}
	}
	if y >= 1 {
		return mgl64.Vec3{1, 1, 1}
	}
	keep := 1.0 // of the distance from grey
	for _, v := range rgb {
		if v < 0 {
			keep = min(keep, y/(y-v))
		} else if v > 1 {
			keep = min(keep, (1-y)/(v-y))
		}
	}
	for i, v := range rgb {
		rgb[i] = min(max(y+keep*(v-y), 0), 1) // the bounds take off rounding alone
	}
	return rgb
}

// screenWhite is D65 as IEC 61966-2-1 takes it, the sums of the rows of its matrix.
var screenWhite = mgl64.Vec3{0.9505, 1, 1.0890}

// linearFromXYZ applies the matrix of IEC 61966-2-1 that undoes the one it prints for
// the other direction; the inverse it prints, to four digits, differs by up to 1e-4
// and would tint the white.
func linearFromXYZ(xyz mgl64.Vec3) mgl64.Vec3 { return srgbFromXYZ.Mul3x1(xyz) }

// xyzFromSRGB is the matrix that IEC 61966-2-1 prints from linear red, green and blue
// to X, Y, Z, and srgbFromXYZ its inverse.
var (
	xyzFromSRGB = mgl64.Mat3FromRows(
		mgl64.Vec3{0.4124, 0.3576, 0.1805},
		mgl64.Vec3{0.2126, 0.7152, 0.0722},
		mgl64.Vec3{0.0193, 0.1192, 0.9505},
	)
	srgbFromXYZ = xyzFromSRGB.Inv()
)

// encode applies the transfer curve of IEC 61966-2-1 to a linear part.
func encode(v float64) float64 {
	if v <= 0.0031308 {
		return 12.92 * v
	}
	return 1.055*math.Pow(v, 1/2.4) - 0.055
}
