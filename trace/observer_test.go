package trace

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/gems"
)

func TestObserverSums(t *testing.T) {
	const source = "sums of the CIE 1931 functions over 360 to 830 nm at 1 nm, computed " +
		"from the library's table: 106.8655, 106.8569, 106.8923"
	var sum [3]float64
	for i := range tableSteps {
		x, y, z := gems.Observer(tableLo + tableStep*gems.Wavelength(i))
		sum[0] += tableStep * x
		sum[1] += tableStep * y
		sum[2] += tableStep * z
	}
	// What lies beyond 380 to 780 nm; z̄ has 0.035 of its sum below 380 nm.
	for k, want := range []float64{106.8655, 106.8569, 106.8923} {
		near(t, "sum", sum[k], want, 0.04, source)
	}
}

// TestColourSampling takes the mean of a spectrum's weights over many wavelengths: it is
// the tristimulus integral, which is worked out otherwise.
func TestColourSampling(t *testing.T) {
	const points = 1 << 16
	for _, name := range IlluminantNames() {
		s := mustFindIlluminant(t, name)
		var mean [3]float64
		last := tracedLo
		for i := range points {
			w, xyz := colourWavelength((float64(i) + 0.5) / points)
			if !(w >= last && w <= tracedHi) {
				t.Fatalf("wavelength %v after %v", w, last)
			}
			last = w
			for k, v := range xyz {
				if !(v >= 0 && v <= 2.5) {
					t.Fatalf("weight %v at %v", v, w)
				}
				mean[k] += v * s.At(w) / points
			}
		}
		for k, want := range s.White() {
			// The midpoint rule: its error falls with the square of the number of points.
			near(t, name, mean[k], want, 1e-6, "Simpson's rule, exact for products of straight pieces")
		}
	}
	if w, _ := colourWavelength(0); w != tracedLo {
		t.Errorf("0 gives %v", w)
	}
	if w, _ := colourWavelength(math.Nextafter(1, 0)); !(w > 699 && w <= tracedHi) {
		t.Errorf("the last number below 1 gives %v", w)
	}
	near(t, "Y of equal energy", (&Illuminant{}).White()[1], 1, 1e-14, "the unit of luminance")
}

func TestUniformChromaticity(t *testing.T) {
	const source = "u' = 4x/(3 - 2x + 12y), v' = 9y/(3 - 2x + 12y) of the chromaticities " +
		"in IEC 61966-2-1, to four digits"
	for _, row := range []struct {
		name       string
		x, y, u, v float64
	}{
		{"red", 0.64, 0.33, 0.4507, 0.5229},
		{"green", 0.30, 0.60, 0.1250, 0.5625},
		{"blue", 0.15, 0.06, 0.1754, 0.1579},
		{"white", 0.3127, 0.3290, 0.1978, 0.4683},
	} {
		u, v, ok := UniformChromaticity([3]float64{7 * row.x, 7 * row.y, 7 * (1 - row.x - row.y)})
		if !ok {
			t.Fatal("no chromaticity")
		}
		near(t, row.name+" u'", u, row.u, 6e-5, source)
		near(t, row.name+" v'", v, row.v, 6e-5, source)
	}
	if _, _, ok := UniformChromaticity([3]float64{}); ok {
		t.Error("black has a chromaticity")
	}
}

func TestDisplayShowsPublishedColours(t *testing.T) {
	const source = "tests of the open library colour-science/colour at 9d743142, read"
	d := NewDisplay(screenWhite, 1)
	for _, row := range []struct{ xyz, srgb mgl64.Vec3 }{
		{mgl64.Vec3{0.20654008, 0.12197225, 0.05136952}, mgl64.Vec3{0.70573936, 0.19248266, 0.22354169}},
		{mgl64.Vec3{0.14222010, 0.23042768, 0.10495772}, mgl64.Vec3{0.25847003, 0.58276102, 0.29718877}},
	} {
		c := d.Colour(row.xyz)
		// The two matrices of IEC 61966-2-1, four digits each, undo each other to 2e-4.
		near(t, "red", c.R, row.srgb[0], 3e-4, source)
		near(t, "green", c.G, row.srgb[1], 3e-4, source)
		near(t, "blue", c.B, row.srgb[2], 3e-4, source)
	}
	near(t, "the curve", encode(0.18), 0.461356129500442, 1e-12, source)
	near(t, "the curve's two parts meet", encode(0.0031308), encode(math.Nextafter(0.0031308, 1)), 1e-7,
		"IEC 61966-2-1")

	// A screen's colour comes back from its tristimulus values.
	rng := rand.New(rand.NewPCG(5, 8))
	for range 100 {
		rgb := mgl64.Vec3{rng.Float64(), rng.Float64(), rng.Float64()}
		c := d.Colour(xyzFromSRGB.Mul3x1(rgb))
		near(t, "red", c.R, encode(rgb[0]), 1e-12, "there and back")
		near(t, "green", c.G, encode(rgb[1]), 1e-12, "there and back")
		near(t, "blue", c.B, encode(rgb[2]), 1e-12, "there and back")
	}
}

func TestDisplayAdapts(t *testing.T) {
	const source = "Bradford matrix from D65 to D50, tests of the open library " +
		"colour-science/colour at 9d743142, read"
	toD50 := mgl64.Mat3FromRows(
		mgl64.Vec3{1.04792979, 0.02294687, -0.05019227},
		mgl64.Vec3{0.02962781, 0.99043443, -0.01707380},
		mgl64.Vec3{-0.00924304, 0.01505519, 0.75187428},
	)
	d := NewDisplay([3]float64{0.96429568, 1, 0.82510460}, 1)
	there := d.adapt.Mul3(toD50)
	for i, v := range there {
		want := 0.0
		if i%4 == 0 {
			want = 1
		}
		near(t, "there and back", v, want, 1e-4, source) // its D65 differs by 6e-5
	}
	for _, name := range IlluminantNames() {
		s := mustFindIlluminant(t, name)
		c := NewDisplay(s.White(), 1).Colour(mgl64.Vec3(s.White()).Mul(0.5))
		for _, v := range []float64{c.R, c.G, c.B} {
			near(t, "half of the white of "+name, v, encode(0.5), 1e-9,
				"an adapted eye sees a white diffuser white")
		}
	}
}

func TestDisplayKeepsLuminanceInGamut(t *testing.T) {
	d := NewDisplay(screenWhite, 1)
	decode := func(c gems.Colour) mgl64.Vec3 {
		undo := func(v float64) float64 {
			if v <= 0.04045 {
				return v / 12.92
			}
			return math.Pow((v+0.055)/1.055, 2.4)
		}
		return mgl64.Vec3{undo(c.R), undo(c.G), undo(c.B)}
	}
	for w := tracedLo; w <= tracedHi; w += 10 {
		x, y, z := gems.Observer(w)
		for _, level := range []float64{0.01, 0.5, 0.99} {
			rgb := decode(d.Colour([3]float64{level * x / y, level, level * z / y}))
			near(t, "luminance of "+w.String(), xyzFromSRGB.Mul3x1(rgb)[1], level, 2e-5,
				"the colour moves in a plane of equal luminance; the curve's parts meet to 1e-5")
			if least, most := min(rgb[0], rgb[1], rgb[2]), max(rgb[0], rgb[1], rgb[2]); least > 1e-9 && most < 1-1e-9 {
				t.Errorf("%v at %v is grayer than it must be: %v", w, level, rgb)
			}
		}
		bright := d.Colour([3]float64{2 * x / y, 2, 2 * z / y})
		near(t, "the least part of a colour brighter than white", min(bright.R, bright.G, bright.B), 1, 1e-12,
			"white")
	}
	for _, xyz := range [][3]float64{{}, {math.NaN(), math.NaN(), 1}, {1, -1, 1}} {
		if c := d.Colour(xyz); c != (gems.Colour{}) {
			t.Errorf("%v shows as %v, not black", xyz, c)
		}
	}
	// Twice the exposure shows half the luminance as white.
	half := NewDisplay(screenWhite, 2).Colour(screenWhite.Mul(0.5))
	near(t, "half of white at twice the exposure", min(half.R, half.G, half.B), 1, 1e-12, "white")
}
