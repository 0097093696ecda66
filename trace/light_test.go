package trace

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/integrate/quad"

	"pavilight/facets"
	"pavilight/gems"
)

func mustFindLight(t *testing.T, name string, zenith ...mgl64.Vec3) *Light {
	t.Helper()
	l, err := FindLight(name, zenith...)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// zeniths are the eye, one beside it, one near the horizon and one behind the stone.
var zeniths = []mgl64.Vec3{{0, 0, 1}, {0, 1, 1}, {3, 0, 0.5}, {-0.4, 0.5, -0.5}}

// lightsAbout returns every light that the names and the zeniths give.
func lightsAbout(t *testing.T) (lights []*Light) {
	t.Helper()
	for _, name := range LightNames() {
		for i, z := range zeniths {
			if i > 0 && (name == "even" || name == "ring") {
				continue
			}
			lights = append(lights, mustFindLight(t, name, z))
		}
	}
	return lights
}

// TestLightsAreScaled draws directions as a white diffuser facing the eye receives them
// and expects its luminance to be 1.
func TestLightsAreScaled(t *testing.T) {
	const cells = 500 // a side: one direction in each cell of a square
	lights := lightsAbout(t)
	// Two-sided, one wrong alarm in a thousand over all lights.
	limit := 3.29
	for p := 1.0; p > 0.001/float64(len(lights)); limit += 0.01 {
		p = math.Erfc(limit / math.Sqrt2)
	}
	rng := rand.New(rand.NewPCG(19, 42))
	for _, l := range lights {
		sum, squares := 0.0, 0.0
		for i := range cells {
			for j := range cells {
				sin2 := (float64(i) + rng.Float64()) / cells
				sinA, cosA := math.Sincos(2 * math.Pi * (float64(j) + rng.Float64()) / cells)
				r := math.Sqrt(sin2)
				v := l.Luminance(mgl64.Vec3{r * cosA, r * sinA, math.Sqrt(1 - sin2)})
				sum += v
				squares += v * v
			}
		}
		const n = cells * cells
		mean := sum / n
		// Stratified directions scatter less than free ones, for which this is the error.
		se := math.Sqrt((squares/n - mean*mean) / n)
		if math.Abs(mean-1) > limit*se+1e-12 {
			t.Errorf("%s: a white diffuser has the luminance %.5f ± %.5f, z over %.2f", l.Name, mean, se, limit)
		}
	}
}

func TestRadianceIsLuminanceTimesSpectrum(t *testing.T) {
	rng := rand.New(rand.NewPCG(2, 7))
	for _, l := range lightsAbout(t) {
		for range 50 {
			d := mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}.Normalize()
			w := tracedLo + gems.Wavelength(rng.Float64())*(tracedHi-tracedLo)
			if l.Luminance(d) < 0 || d[2] <= 0 && (l.Luminance(d) != 0 || l.Radiance(d, w) != 0) {
				t.Errorf("%s from %v: luminance %v, radiance %v", l.Name, d, l.Luminance(d), l.Radiance(d, w))
			}
			near(t, l.Name, l.Radiance(d, w), l.Luminance(d)*l.Illuminant.At(w), 1e-12,
				"one spectrum for all directions")
		}
		if l.Source == "" {
			t.Errorf("%s has no source", l.Name)
		}
	}
	eye := mgl64.Vec3{0, 0, 1}
	a := mustFindIlluminant(t, "A")
	l := mustFindLight(t, "overcast")
	near(t, "the same sky in the spectrum A", l.Under(a).Radiance(eye, 600), l.Luminance(eye)*a.At(600), 1e-12,
		"another spectrum")
	if l.Illuminant.Name != "D65" {
		t.Error("Under changed the light it was asked of")
	}
}

const moonSpencer = "Moon & Spencer 1942: L = Lz (1 + 2 sin elevation)/3"

func TestOvercastSky(t *testing.T) {
	l := mustFindLight(t, "overcast")
	eye := mgl64.Vec3{0, 0, 1}
	near(t, "zenith over white diffuser", l.Luminance(eye), 9.0/7, 1e-9, "horizontal illuminance 7π/9 Lz")
	for _, row := range []struct{ zenithAngle, ratio float64 }{{0, 1}, {30, 0.9107}, {45, 0.8047}, {60, 0.6667}, {75, 0.5059}, {89.999999, 0.3333}} {
		d := DirectionOf(facets.Angle(90-row.zenithAngle)*facets.Degree, 1)
		near(t, "ratio to the zenith", l.Luminance(d)/l.Luminance(eye), row.ratio, 6e-5, moonSpencer)
	}
	for _, row := range []struct{ halfAngle, share float64 }{{10, 0.03857}, {15, 0.08515}, {20, 0.14741}, {30, 0.30742}, {45, 0.58368}} {
		share := quad.Fixed(func(a float64) float64 {
			return l.Luminance(DirectionOf(math.Pi/2-facets.Angle(a), 2)) * 2 * math.Sin(a) * math.Cos(a)
		}, 0, row.halfAngle*math.Pi/180, 32, nil, 0)
		near(t, "share of a cone about the zenith", share, row.share, 6e-6, moonSpencer+", integrated")
	}
	// A zenith beside the eye turns the sky with it, and the ground comes up behind.
	tilted := mustFindLight(t, "overcast", mgl64.Vec3{0, 1, 1})
	horizon, zenith := tilted.Luminance(mgl64.Vec3{0, -1, 1.0001}.Normalize()), tilted.Luminance(mgl64.Vec3{0, 1, 1}.Normalize())
	near(t, "horizon over zenith", horizon/zenith, 1.0/3, 1e-3, moonSpencer)
	ground := tilted.Luminance(mgl64.Vec3{0, -1, 0.9}.Normalize())
	near(t, "ground over zenith", ground/zenith, 0.2*7/9, 1e-6, "a diffuse ground has the luminance ρ E/π")
}

func TestGeneralSky(t *testing.T) {
	const source = "type 1 of ISO 15469/CIE S 011, worked out apart from its formula"
	one := newGeneralSky(4, -0.70, 0, -1, 0, mgl64.Vec3{0, 0, 1})
	for _, row := range []struct{ zenithAngle, ratio float64 }{{0, 1}, {30, 0.9317}, {45, 0.8326}, {60, 0.6652}, {75, 0.4245}, {90, 0.3349}} {
		d := DirectionOf(facets.Angle(90-row.zenithAngle)*facets.Degree, 1)
		if row.zenithAngle == 90 {
			d = mgl64.Vec3{1, 0, 0}
		}
		near(t, "ratio to the zenith", one.luminance(d), row.ratio, 6e-5, source)
	}
	near(t, "horizontal illuminance", newSky(one, mgl64.Ident3(), nil).level*math.Pi, 2.4495, 6e-5, source)

	// The clear sky of CIE 22 (1973), of which type 12 is the heir: its constant is 0.91
	// where the new one's is 1 - 10 exp(-3π/2) = 0.9102.
	const kittler = "R. Kittler 1967, as coded in NREL/Radiance src/gen/skybright.cal, " +
		"read: (0.91 + 10 exp(-3γ) + 0.45 cos²γ)(1 - exp(-0.32/cos Z))"
	for _, elevation := range []facets.Angle{15, 45, 70} {
		sun := DirectionOf(elevation*facets.Degree, 0)
		sky := newClearSky(sun)
		old := func(d mgl64.Vec3) float64 {
			gamma := math.Acos(min(1, d.Dot(sun)))
			return (0.91 + 10*math.Exp(-3*gamma) + 0.45*math.Pow(math.Cos(gamma), 2)) * (1 - math.Exp(-0.32/d[2]))
		}
		for _, d := range []mgl64.Vec3{sun, DirectionOf(20*facets.Degree, 3), DirectionOf(50*facets.Degree, 1), DirectionOf(1*facets.Degree, 2)} {
			near(t, "clear sky", sky.luminance(d), old(d)/old(mgl64.Vec3{0, 0, 1}), 3e-4*sky.luminance(d),
				kittler)
		}
	}
}

func TestSunlight(t *testing.T) {
	const ies = "IES RP-21 (1984), by hand at 45°: 127.5 exp(-0.21/0.70711) 0.70711 = " +
		"66.99 klx over 0.8 + 15.5 √0.70711 = 13.83 klx"
	sky, sun := mustFindLight(t, "clear"), mustFindLight(t, "sun")
	blue := DirectionOf(60*facets.Degree, 200*facets.Degree)
	near(t, "sun and sky over sky alone", sky.Luminance(blue)/sun.Luminance(blue), 1+4.842, 2e-3, ies)
	centre := DirectionOf(usualSunElevation, usualSunAzimuth)
	if beside := DirectionOf(usualSunElevation+2.6*facets.Degree, usualSunAzimuth); sun.Luminance(centre) < 100*sun.Luminance(beside) {
		t.Errorf("the sun's disc has the luminance %v, beside it %v",
			sun.Luminance(centre), sun.Luminance(beside))
	}
	zenith := mgl64.Vec3{0, 1, 1}
	for name, row := range map[string]struct {
		zenith, sun mgl64.Vec3
		says        string
	}{
		"sun under the horizon": {mgl64.Vec3{0, 0, 1}, mgl64.Vec3{0, 1, -0.2}, "over the horizon"},
		"under the sky's":       {zenith, mgl64.Vec3{0, -1, 1.1}, "over the horizon"},
		"no sun":                {zenith, mgl64.Vec3{}, "sun"},
		"no zenith":             {mgl64.Vec3{}, zenith, "zenith"},
		"not a number":          {mgl64.Vec3{math.NaN(), 0, 1}, zenith, "zenith"},
	} {
		if _, err := ClearSky(row.zenith, row.sun, true); err == nil || !strings.Contains(err.Error(), row.says) {
			t.Errorf("%s: error %v does not say %q", name, err, row.says)
		}
	}
}

func TestDiscShare(t *testing.T) {
	for _, degree := range []float64{0.5, 2.5, 20, 60} {
		a := facets.Angle(degree) * facets.Degree
		r := a.Radians()
		near(t, "overhead", discShare(1, a), math.Pow(math.Sin(r), 2), 1e-15,
			"illuminance of a disc overhead: π L sin²")
		near(t, "half below", discShare(0, a), (r-math.Sin(r)*math.Cos(r))/math.Pi, 1e-7*r,
			"a disc on the horizon: L (a - sin a cos a)")
		for _, e := range []float64{0.1, 0.7, 0.999} {
			sin := math.Sin(e * r)
			near(t, "the parts above and below", discShare(sin, a)-discShare(-sin, a), math.Pow(math.Sin(r), 2)*sin, 1e-7*r,
				"the cosine is odd about the plane")
		}
		near(t, "below", discShare(-math.Sin(r)-1e-9, a), 0, 0, "below the plane")
	}
}

func TestPolygonShare(t *testing.T) {
	const source = "view factor of a rectangle parallel to and over the corner of a " +
		"surface element, Howell, Catalog of Radiation Configuration Factors B-3; from memory"
	for _, s := range [][2]float64{{0.5, 0.5}, {2, 0.3}, {10, 10}} {
		x, y := s[0], s[1]
		want := (x/math.Hypot(1, x)*math.Atan(y/math.Hypot(1, x)) + y/math.Hypot(1, y)*math.Atan(x/math.Hypot(1, y))) / (2 * math.Pi)
		corners := []mgl64.Vec3{{0, 0, 1}, {x, 0, 1}, {x, y, 1}, {0, y, 1}}
		near(t, "parallel rectangle", polygonShare(corners), want, 1e-14, source)
	}
	wall := []mgl64.Vec3{{-1e6, 1, -1e6}, {1e6, 1, -1e6}, {1e6, 1, 1e6}, {-1e6, 1, 1e6}}
	near(t, "a wall without end, cut at the horizon", polygonShare(wall), 0.5, 1e-5,
		"half of all that a level plane sees")
	near(t, "below", polygonShare([]mgl64.Vec3{{0, 0, -1}, {1, 0, -1}, {0, 1, -1}}), 0, 0, "below the plane")

	for _, z := range zeniths {
		turned, err := zenithTo(z)
		if err != nil {
			t.Fatal(err)
		}
		room, sum := newRoom(turned), 0.0
		for face := range roomFaces {
			u, v := spanned(face)
			sum += room.share(face, mgl64.Vec2{roomLo[u], roomLo[v]}, mgl64.Vec2{roomHi[u], roomHi[v]})
		}
		near(t, "all faces of the room", sum, 1, 1e-14, "a closed room fills the half space")
	}
}

func TestRoomStandsWhereItSays(t *testing.T) {
	room, err := zenithTo(mgl64.Vec3{0, 0, 1})
	if err != nil {
		t.Fatal(err)
	}
	s := newRoom(room)
	for _, row := range []struct {
		name      string
		at        mgl64.Vec3
		luminance float64
	}{
		{"first window", mgl64.Vec3{-2, -1.35, 0.85}, 3000},
		{"second window", mgl64.Vec3{-2, 0.35, 0.85}, 3000},
		{"between the windows", mgl64.Vec3{-2, -0.5, 0.85}, 60},
		{"below the sill", mgl64.Vec3{-2, 0.35, 0.1}, 60},
		{"panel", mgl64.Vec3{1.4, 0.6, 1.95}, 4000},
		{"over the stone", mgl64.Vec3{0, 0, 1.95}, 80},
		{"right wall", mgl64.Vec3{3, 1, 1}, 60},
		{"wall at the top", mgl64.Vec3{0.5, 1.5, 1}, 60},
		{"floor", mgl64.Vec3{0.5, 1, -0.75}, 20},
	} {
		near(t, row.name, s.luminance(row.at.Normalize()), row.luminance, 0, "the room's own note")
	}
}

func TestLampsAndRing(t *testing.T) {
	l := mustFindLight(t, "lamps")
	if !l.Small || mustFindLight(t, "room").Small {
		t.Error("the lamps alone are small")
	}
	lamps := l.shape.(*lampsShape)
	half := math.Asin(0.03)
	for _, c := range lamps.centres {
		side := c.Cross(mgl64.Vec3{0, 0, 1}).Normalize()
		in := c.Mul(math.Cos(half * 0.99)).Add(side.Mul(math.Sin(half * 0.99)))
		out := c.Mul(math.Cos(half * 1.01)).Add(side.Mul(math.Sin(half * 1.01)))
		if l.Luminance(in) < 50 || l.Luminance(out) != l.scale*lamps.surround {
			t.Errorf("lamp at %v: luminance %v within, %v without", c, l.Luminance(in), l.Luminance(out))
		}
		if head := math.Acos(c[2]) * 180 / math.Pi; head < 10+2 {
			t.Errorf("a lamp stands %.1f° from the eye, in the viewer's head", head)
		}
	}
	near(t, "the surround's share", l.scale*lamps.surround, 0.1, 1e-12, "a tenth of the illuminance, evenly")

	ring := mustFindLight(t, "ring")
	for _, row := range []struct {
		fromEye float64
		lit     bool
	}{{0, false}, {14.8, false}, {15.0, true}, {20.0, true}, {20.2, false}, {60, false}} {
		if got := ring.Luminance(DirectionOf(facets.Angle(90-row.fromEye)*facets.Degree, 1)) > 0; got != row.lit {
			t.Errorf("ring at %v° from the eye: lit %v (radii of 80 and 110 mm at 300 mm)", row.fromEye, got)
		}
	}
}

func TestDirections(t *testing.T) {
	for _, row := range []struct {
		elevation, azimuth facets.Angle
		want               mgl64.Vec3
	}{
		{90, 0, mgl64.Vec3{0, 0, 1}},
		{0, 0, mgl64.Vec3{0, 1, 0}},
		{0, 90, mgl64.Vec3{-1, 0, 0}}, // anticlockwise: to the left
		{30, 180, mgl64.Vec3{0, -math.Sqrt(3) / 2, 0.5}},
	} {
		d := DirectionOf(row.elevation*facets.Degree, row.azimuth*facets.Degree)
		near(t, "direction", d.Sub(row.want).Len(), 0, 1e-15, "azimuth 0 up the picture, growing anticlockwise")
	}
	for name, row := range map[string]struct {
		light  string
		zenith mgl64.Vec3
		says   string
	}{
		"unknown":            {"candle", mgl64.Vec3{0, 0, 1}, "use one of even, overcast"},
		"no direction":       {"room", mgl64.Vec3{}, "no direction"},
		"without end":        {"room", mgl64.Vec3{math.Inf(1), 0, 0}, "no direction"},
		"ring with a zenith": {"ring", mgl64.Vec3{0, 1, 1}, "leave the zenith out"},
		"even with a zenith": {"even", mgl64.Vec3{1, 0, 0}, "leave the zenith out"},
	} {
		if _, err := FindLight(row.light, row.zenith); err == nil || !strings.Contains(err.Error(), row.says) {
			t.Errorf("%s: error %v does not say %q", name, err, row.says)
		}
	}
	if _, err := FindLight(" Even ", DirectionOf(90*facets.Degree, 0).Mul(3)); err != nil {
		t.Error("the eye as zenith is refused:", err)
	}
}

// BenchmarkRadiance asks for what a ray that leaves the stone brings back.
func BenchmarkRadiance(b *testing.B) {
	for _, name := range LightNames() {
		b.Run(name, func(b *testing.B) {
			l, err := FindLight(name)
			if err != nil {
				b.Fatal(err)
			}
			d := DirectionOf(50*facets.Degree, 1)
			b.ReportAllocs()
			for b.Loop() {
				l.Radiance(d, 555)
			}
		})
	}
}
