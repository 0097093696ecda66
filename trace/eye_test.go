package trace

import (
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/stat"
)

const reading = 300.0 // mm, the distance that is taken unless another is given

// fineView is a square stone whose middle 60 × 60 of 70 × 70 pixels show it.
const fineView, fineEdge = 70, 5

func fineInside() []bool {
	inside := make([]bool, fineView*fineView)
	for i := range inside {
		x, y := i%fineView, i/fineView
		inside[i] = x >= fineEdge && x < fineView-fineEdge && y >= fineEdge && y < fineView-fineEdge
	}
	return inside
}

// photograph makes n independent pictures of what scene shows at a pixel of the stone,
// one ray a pixel, each with its own noise, which noise draws.
func photograph(n int, pitch float64, scene func(x, y int) [3]float64, noise func([3]float64) [3]float64) []*Picture {
	pictures := make([]*Picture, n)
	for g := range pictures {
		p := blank(fineView, pitch)
		for i, in := range fineInside() {
			if in {
				p.Sum[i] = noise(scene(i%fineView, i/fineView))
				p.Rays[i] = 1
			}
		}
		pictures[g] = p
	}
	return pictures
}

// blank returns a picture without rays.
func blank(edge int, pitch float64) *Picture {
	return &Picture{Pixels: edge, Pitch: pitch, Sum: make([][3]float64, edge*edge), Rays: make([]int32, edge*edge)}
}

// uniform shows the same grey everywhere.
func uniform(y float64) func(x, _ int) [3]float64 {
	return func(_, _ int) [3]float64 { return grey(y) }
}

func exact(v [3]float64) [3]float64 { return v }

// grainy returns noise like that of a few rays a pixel: each part is either 0 or many
// times too bright.
func grainy(rng *rand.Rand) func([3]float64) [3]float64 {
	const times = 3
	return func(v [3]float64) [3]float64 {
		if rng.IntN(times) == 0 {
			return [3]float64{times * v[0], times * v[1], times * v[2]}
		}
		return [3]float64{}
	}
}

func mustLookAt(t *testing.T, pictures []*Picture, distance float64) *Seen {
	t.Helper()
	s, err := LookAt(pictures, fineInside(), distance)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

func grey(y float64) [3]float64 { return [3]float64{0.95 * y, y, 1.09 * y} }

// within fails the test where an estimate lies further from want than its own error allows.
func within(t *testing.T, what string, e Estimate, want float64, source string) {
	t.Helper()
	// Student's t with 7 or more degrees of freedom beyond 5.4: once in a thousand.
	const limit = 5.4
	if !(e.Error > 0) || !(math.Abs(e.Value-want) <= limit*e.Error) {
		t.Errorf("%s: %v, want %v (%s)", what, e, want, source)
	}
}

func TestEyeResolution(t *testing.T) {
	near(t, "a minute of arc at 300 mm", eyeDisc(reading), 0.087266, 5e-7, "300 mm × π/10800")
	if n := PixelsForEye(8, reading); n != 184 {
		t.Errorf("8 mm at 300 mm: %d pixels, want 2 × 8/0.087266 = 183.3, rounded up", n)
	}
}

// TestAveragingBlursAsADiscDoes compares a sine grating before and after with the transfer
// function of a disc.
func TestAveragingBlursAsADiscDoes(t *testing.T) {
	const source = "Fourier transform of a disc of diameter d: 2 J1(π f d)/(π f d)"
	for _, diameter := range []float64{2, 3.3, 6} { // pixels
		pitch := eyeDisc(reading) / diameter
		for _, period := range []float64{10, 15, 30} {
			pixel := math.Sin(math.Pi/period) / (math.Pi / period) // a pixel shows its mean
			wave := func(x, _ int) [3]float64 { return grey(1 + pixel*math.Sin(2*math.Pi*(float64(x)+0.5)/period)) }
			s := mustLookAt(t, photograph(leastPictures, pitch, wave, exact), reading)
			// A column well inside, against the edges' mean over the stone alone.
			sum, squares := 0.0, 0.0
			for i, place := range s.places {
				if x := place % fineView; x >= 20 && x < 50 {
					v := s.averaged[0][i][1] - 1
					sum += v
					squares += v * v
				}
			}
			z := math.Pi * diameter / period
			// Pixels have the disc's spread and not quite its shape: that shows in the fourth order.
			near(t, "amplitude", math.Sqrt(2*squares/(60*30)), 2*math.J1(z)/z, 1e-3+2e-3*math.Pow(z, 4), source)
			near(t, "mean", sum/(60*30), 0, 1e-9, "three whole periods or more")
		}
	}
	flat := mustLookAt(t, photograph(leastPictures, 0.02, uniform(0.7), exact), reading)
	for i := range flat.places {
		near(t, "a flat stone", flat.averaged[0][i][1], 0.7, 1e-14,
			"the mean is over the stone alone, up to its edge")
	}
}

func TestDarkArea(t *testing.T) {
	// Two fifths of the stone lie in the dark.
	bands := func(x, _ int) [3]float64 {
		if (x-fineEdge)/12%5 < 2 {
			return grey(0.02)
		}
		return grey(5)
	}
	pitch := eyeDisc(reading) / 2
	e := mustLookAt(t, photograph(leastPictures, pitch, bands, exact), reading).DarkArea()
	near(t, "without noise", e.Value, 23.0/60, 1e-12,
		"24 of 60 columns, of which the one at the edge is lit by its neighbour")
	near(t, "without noise", e.Error, 0, 1e-15, "no noise, no error")

	// Where the light grows slowly, noise makes places seem dark that are not, and more than
	// the other way round.
	growing := func(x, _ int) [3]float64 { return grey(2 * math.Pow(float64(x-fineEdge)/60, 4)) }
	e = mustLookAt(t, photograph(leastPictures, pitch, growing, exact), reading).DarkArea()
	near(t, "without noise", e.Value, math.Pow(0.05, 0.25), 1.0/60, "2 x⁴ < 0.1, to a column")
	rng := rand.New(rand.NewPCG(9, 9))
	within(t, "with noise", mustLookAt(t, photograph(16, pitch, growing, grainy(rng)), reading).DarkArea(), e.Value,
		"the same scene without noise")
}

// TestContrast measures gratings, through noise that alone would show more contrast than
// they do.
func TestContrast(t *testing.T) {
	const source = "Peli, J. Opt. Soc. Am. A 7 (1990) 2032: the RMS contrast of a sine " +
		"grating is its Michelson contrast over √2"
	pitch := eyeDisc(reading) / 2
	for _, michelson := range []float64{0.1, 0.5, 0.9} {
		const period, blur = 30, 0.9945 // 2 J1(z)/z for 2 pixels across and 30 a period
		wave := func(x, _ int) [3]float64 {
			return grey(0.6 * (1 + michelson*math.Sin(2*math.Pi*float64(x-fineEdge)/period)))
		}
		e := mustLookAt(t, photograph(leastPictures, pitch, wave, exact), reading).Contrast()
		near(t, "without noise", e.Value, blur*michelson/math.Sqrt2, 0.01*michelson, source)

		rng := rand.New(rand.NewPCG(4, uint64(100*michelson)))
		noisy := mustLookAt(t, photograph(16, pitch, wave, grainy(rng)), reading)
		within(t, "with noise", noisy.Contrast(), e.Value, source)

		// Squares of noisy pictures themselves would be far off, so the check can fail.
		one := &Seen{places: noisy.places, averaged: noisy.averaged[:1]}
		v := one.each(func(xyz [3]float64) float64 { return xyz[1] })[0]
		mean, square := averages([][]float64{v})[0], 0.0
		for _, y := range v {
			square += y * y / float64(len(v))
		}
		if naive := math.Sqrt(square/(mean*mean) - 1); naive < 1.3*e.Value && michelson < 0.9 {
			t.Errorf("the noise is too faint to tell: contrast %v without care, %v true", naive, e.Value)
		}
	}
	even := mustLookAt(t, photograph(leastPictures, pitch, uniform(0.5), exact), reading)
	near(t, "an even stone", even.Contrast().Value, 0, 1e-7, "no contrast; the square is good to 1e-15")
	black := mustLookAt(t, photograph(leastPictures, pitch, uniform(0), exact), reading)
	near(t, "a black stone", black.Contrast().Value, 0, 0, "no contrast")
	near(t, "a black stone", black.Fire().Value, 0, 0, "no fire")
	near(t, "a black stone", black.DarkArea().Value, 1, 0, "all dark")
}

// TestFire has halves of two primaries whose distance in u', v' is known.
func TestFire(t *testing.T) {
	const source = "chromaticities of IEC 61966-2-1 in u', v': red 0.4507, 0.5229, green " +
		"0.1250, 0.5625; each by its own weight, the mean between by D = X + 15Y + 3Z"
	red, green := xyzFromSRGB.Mul3x1(mgl64.Vec3{1, 0, 0}), xyzFromSRGB.Mul3x1(mgl64.Vec3{0, 1, 0})
	scene := func(x, _ int) [3]float64 {
		if x < fineView/2 {
			return red
		}
		return green
	}
	// By hand: the mean's place on the line between is shared by D, the luminance by Y.
	weight := func(c mgl64.Vec3) float64 { return c[0] + 15*c[1] + 3*c[2] }
	distance := math.Hypot(0.4507-0.1250, 0.5229-0.5625)
	p := weight(red) / (weight(red) + weight(green)) // of the way from green to red
	y := red[1] / (red[1] + green[1])
	want := distance * math.Sqrt(y*(1-p)*(1-p)+(1-y)*p*p)

	pitch := eyeDisc(reading) / 2
	e := mustLookAt(t, photograph(leastPictures, pitch, scene, exact), reading).Fire()
	near(t, "without noise", e.Value, want, 0.02*want, source+"; two columns of sixty mix")

	// Noise of colour: one wavelength a ray, the mean colour kept.
	rng := rand.New(rand.NewPCG(6, 2))
	coloured := func(v [3]float64) [3]float64 {
		k := 3 * rng.Float64()
		j := 3 - k
		return [3]float64{k * v[0], (k + j) / 3 * v[1], j * v[2]}
	}
	// X and Z of each pixel swing between nothing and twice their mean.
	noisy := mustLookAt(t, photograph(16, pitch, scene, func(v [3]float64) [3]float64 {
		c := coloured(v)
		return [3]float64{c[0] / 1.5, c[1], c[2] / 1.5}
	}), reading)
	within(t, "with noise of colour", noisy.Fire(), e.Value, "the same scene without noise")

	greys := func(x, _ int) [3]float64 { return grey(0.1 + float64(x)) }
	colourless := mustLookAt(t, photograph(leastPictures, pitch, greys, exact), reading)
	near(t, "a grey stone", colourless.Fire().Value, 0, 1e-7, "no colour, no fire; the square is good to 1e-15")
}

func TestSparkle(t *testing.T) {
	sparkle := func(first, second []*Picture) Estimate {
		t.Helper()
		e, err := Sparkle(first, second, fineInside(), fineInside(), reading)
		if err != nil {
			t.Fatal(err)
		}
		return e
	}
	pitch := eyeDisc(reading) / 2
	first := func(x, y int) [3]float64 { return grey(1 + 0.2*math.Sin(float64(y)/9)) }
	second := func(x, y int) [3]float64 {
		if x < fineEdge+15 { // a quarter of the stone
			return grey(1.4 + 0.2*math.Sin(float64(y)/9))
		}
		return first(x, y)
	}
	// A quarter changes by 0.4: √(0.4²/4); the edge between is blurred over two columns.
	const want, edge = 0.2, 0.005
	exactly := sparkle(photograph(4, pitch, first, exact), photograph(4, pitch, second, exact))
	near(t, "without noise", exactly.Value, want, edge, "arithmetic")

	rng := rand.New(rand.NewPCG(8, 8))
	noisy := sparkle(photograph(16, pitch, first, grainy(rng)), photograph(16, pitch, second, grainy(rng)))
	within(t, "with noise", noisy, exactly.Value, "the same scenes without noise")

	still := sparkle(photograph(16, pitch, first, grainy(rng)), photograph(16, pitch, first, grainy(rng)))
	if still.Value > 5.4*still.Error {
		t.Errorf("a stone that does not rock sparkles by %v", still)
	}
	// Pictures of another size: the second view's pixels are a tenth smaller, and what it
	// shows at a distance from the middle is the same.
	zoomed := func(x, y int) [3]float64 {
		carry := func(i int) int { return int(math.Floor((float64(i)+0.5-fineView/2)*0.9 + fineView/2)) }
		return first(carry(x), carry(y))
	}
	smaller := sparkle(photograph(4, pitch, first, exact), photograph(4, 0.9*pitch, zoomed, exact))
	// Half a pixel of a gradient of 0.2/9 at most, from the one and from the other.
	near(t, "the same stone in smaller pixels", smaller.Value, 0, 0.2/9, "no change")

	eight, four := photograph(8, pitch, first, exact), photograph(4, pitch, second, exact)
	if _, err := Sparkle(eight, four, fineInside(), fineInside(), reading); err == nil {
		t.Error("unequal numbers of pictures are taken")
	}
}

// TestSparseRaysAreJoined leaves most pixels of most pictures without a ray.
func TestSparseRaysAreJoined(t *testing.T) {
	pitch := eyeDisc(reading) / 2
	scene := func(x, _ int) [3]float64 { return grey(float64(x%7) / 3) }
	rng := rand.New(rand.NewPCG(1, 5))
	pictures := photograph(64, pitch, scene, exact)
	for _, p := range pictures {
		for i := range p.Rays {
			if rng.IntN(4) > 0 {
				p.Rays[i], p.Sum[i] = 0, [3]float64{}
			}
		}
	}
	s := mustLookAt(t, pictures, reading)
	if n := len(s.averaged); n >= 64 || n < leastPictures {
		t.Fatalf("%d pictures were measured", n)
	}
	want := mustLookAt(t, photograph(leastPictures, pitch, scene, exact), reading).Luminance().Value
	within(t, "luminance", s.Luminance(), want, "the same scene with all rays")
	for _, p := range pictures {
		clear(p.Rays)
	}
	if _, err := LookAt(pictures, fineInside(), reading); err == nil || !strings.Contains(err.Error(), "trace more samples") {
		t.Errorf("pictures without a ray: %v", err)
	}
}

func TestPicturesThatCannotBeMeasured(t *testing.T) {
	scene := uniform(1)
	fine, coarse := eyeDisc(reading)/2, eyeDisc(reading)/1.5
	other := photograph(4, fine, scene, exact)
	other[2].Pixels--
	for name, row := range map[string]struct {
		pictures []*Picture
		distance float64
		says     string
	}{
		"too few":         {photograph(3, fine, scene, exact), reading, "at least 4"},
		"too coarse":      {photograph(4, coarse, scene, exact), reading, "use at least 94"}, // 70 × 2/1.5
		"distance 0":      {photograph(4, fine, scene, exact), 0, "millimetres"},
		"no distance":     {photograph(4, fine, scene, exact), math.NaN(), "millimetres"},
		"different sizes": {other, reading, "different sizes"},
	} {
		if _, err := LookAt(row.pictures, fineInside(), row.distance); err == nil || !strings.Contains(err.Error(), row.says) {
			t.Errorf("%s: error %v does not say %q", name, err, row.says)
		}
	}
}

func TestDiffersFrom(t *testing.T) {
	for _, row := range []struct {
		name    string
		a, b    Estimate
		differs bool
	}{
		// Two-sided 1 % points of Student's t: 2.750 at 30 degrees of freedom, 3.707 at 6.
		{"just under at 30", Estimate{2.74 * math.Sqrt2, 1, 16}, Estimate{0, 1, 16}, false},
		{"just over at 30", Estimate{2.76 * math.Sqrt2, 1, 16}, Estimate{0, 1, 16}, true},
		{"just under at 6", Estimate{0, 1, 4}, Estimate{3.69 * math.Sqrt2, 1, 4}, false},
		{"just over at 6", Estimate{0, 1, 4}, Estimate{3.72 * math.Sqrt2, 1, 4}, true},
		{"one without error", Estimate{1, 0, 16}, Estimate{0, 0.1, 16}, true},
		{"both without error", Estimate{1, 0, 16}, Estimate{1, 0, 16}, false},
	} {
		if got := row.a.DiffersFrom(row.b); got != row.differs {
			t.Errorf("%s: %v (Student's t table, e.g. Abramowitz & Stegun 26.10; from memory)", row.name, got)
		}
	}
}

// TestHalves estimates the square of a mean from noisy numbers, many times over: the
// mean of its values is true and its errors are honest.
func TestHalves(t *testing.T) {
	const n, repeats, mean = 16, 2000, 0.5
	rng := rand.New(rand.NewPCG(7, 3))
	sum, squares, errors := 0.0, 0.0, 0.0
	for range repeats {
		v := make([]float64, n)
		for i := range v {
			v[i] = mean + rng.NormFloat64()
		}
		e, _ := halved(n, func(of set) float64 { m := meanOf(v, of); return m * m })
		// A straight mean has the usual error.
		plain, _ := halved(n, func(of set) float64 { return meanOf(v, of) })
		usual := stat.StdErr(stat.StdDev(v, nil), n)
		near(t, "error of a mean", plain.Error, usual, 1e-12, "s/√n")
		near(t, "mean", plain.Value, stat.Mean(v, nil), 1e-12, "arithmetic")
		sum += e.Value / repeats
		squares += e.Value * e.Value / repeats
		errors += e.Error / repeats
	}
	scatter := math.Sqrt(squares - sum*sum)
	if z := (sum - mean*mean) / (scatter / math.Sqrt(repeats)); math.Abs(z) > 3.3 {
		t.Errorf("mean of the estimates %v, want %v, z = %.1f; without care it would be %v",
			sum, mean*mean, z, mean*mean+1.0/n)
	}
	if errors < 0.9*scatter || errors > 1.5*scatter {
		t.Errorf("mean error %v, the estimates scatter by %v", errors, scatter)
	}
}

// BenchmarkMeasures measures 16 pictures of the usual size, averaging them included.
func BenchmarkMeasures(b *testing.B) {
	const edge = 300
	rng := rand.New(rand.NewPCG(1, 2))
	inside := make([]bool, edge*edge)
	for i := range inside {
		inside[i] = math.Hypot(float64(i%edge)-edge/2, float64(i/edge)-edge/2) < edge/2
	}
	pictures := make([]*Picture, 16)
	for g := range pictures {
		p := blank(edge, 8.0/edge)
		for i := range p.Sum {
			p.Sum[i], p.Rays[i] = [3]float64{rng.Float64(), rng.Float64(), rng.Float64()}, 1
		}
		pictures[g] = p
	}
	for b.Loop() {
		s, err := LookAt(pictures, inside, reading)
		if err != nil {
			b.Fatal(err)
		}
		s.Luminance()
		s.DarkArea()
		s.Contrast()
		s.Fire()
	}
}
