package trace

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata/budget"
)

// pixels is a panorama of RGBE pixels, row by row.
type pixels struct {
	wide, high int
	p          [][4]byte
}

// paint fills a panorama from the middle of each pixel: x from 0 at the left to 1, y
// from 0 at the top to 1.
func paint(high int, of func(x, y float64) [4]byte) pixels {
	s := pixels{wide: 2 * high, high: high}
	for i := range s.high {
		for j := range s.wide {
			s.p = append(s.p, of((float64(j)+0.5)/float64(s.wide), (float64(i)+0.5)/float64(s.high)))
		}
	}
	return s
}

func (s pixels) header() *bytes.Buffer {
	const head = "#?RADIANCE\n# painted\nEXPOSURE=2\nFORMAT=32-bit_rle_rgbe\n\n"
	return bytes.NewBufferString(fmt.Sprintf("%s-Y %d +X %d\n", head, s.high, s.wide))
}

// flat writes the pixels as they are.
func (s pixels) flat() []byte {
	b := s.header()
	for _, p := range s.p {
		b.Write(p[:])
	}
	return b.Bytes()
}

// oldRuns writes repeated pixels with the format's first run lengths.
func (s pixels) oldRuns() []byte {
	b := s.header()
	for row := range s.high {
		line := s.p[row*s.wide : (row+1)*s.wide]
		for x := 0; x < len(line); {
			b.Write(line[x][:])
			n := 1
			for x+n < len(line) && line[x+n] == line[x] {
				n++
			}
			for left := n - 1; left > 0; left >>= 8 {
				b.Write([]byte{1, 1, 1, byte(left)})
			}
			x += n
		}
	}
	return b.Bytes()
}

// newRuns writes the rows part by part, in runs and stretches.
func (s pixels) newRuns() []byte {
	b := s.header()
	for row := range s.high {
		line := s.p[row*s.wide : (row+1)*s.wide]
		b.Write([]byte{2, 2, byte(s.wide >> 8), byte(s.wide)})
		for part := range 4 {
			for x := 0; x < len(line); {
				n := 1
				for x+n < len(line) && n < 127 && line[x+n][part] == line[x][part] {
					n++
				}
				if n > 2 {
					b.Write([]byte{byte(128 + n), line[x][part]})
				} else {
					n = min(5, len(line)-x)
					b.WriteByte(byte(n))
					for i := range n {
						b.WriteByte(line[x+i][part])
					}
				}
				x += n
			}
		}
	}
	return b.Bytes()
}

func mustReadPanorama(t *testing.T, data []byte, zenith ...mgl64.Vec3) *Light {
	t.Helper()
	l, err := ReadPanorama(bytes.NewReader(data), "sky.hdr", zenith...)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

const rgbe = "G. Ward, Real pixels, Graphics Gems II (1991), and the picture format " +
	"of the Radiance reference, from memory"

func TestPixelsDecode(t *testing.T) {
	for _, row := range []struct {
		p    [4]byte
		want [3]float64
	}{
		{[4]byte{128, 64, 0, 129}, [3]float64{128.5 / 128, 64.5 / 128, 0.5 / 128}},
		{[4]byte{255, 255, 255, 128}, [3]float64{255.5 / 256, 255.5 / 256, 255.5 / 256}},
		{[4]byte{200, 100, 50, 0}, [3]float64{}},
	} {
		for k, v := range decode(row.p[:]) {
			near(t, "part", v, row.want[k], 0, rgbe)
		}
	}
}

// TestEvenPanorama is even light in front of D65, in each of the three ways of storing.
func TestEvenPanorama(t *testing.T) {
	white := paint(16, func(_, _ float64) [4]byte { return [4]byte{99, 99, 99, 140} })
	d65 := mustFindIlluminant(t, "D65")
	rng := rand.New(rand.NewPCG(1, 1))
	for name, data := range map[string][]byte{"flat": white.flat(), "old runs": white.oldRuns(), "new runs": white.newRuns()} {
		for _, z := range zeniths {
			l := mustReadPanorama(t, data, z)
			for range 20 {
				d := mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), math.Abs(rng.NormFloat64())}.Normalize()
				// Parts of 0.18° each; the cosine is bent a little within them and the plane cuts some.
				near(t, name, l.Luminance(d), 1, 2e-6, "even light on a white diffuser")
				near(t, name, l.Radiance(d, 480), d65.At(480), 3e-6, "equal parts are D65")
			}
			if d := (mgl64.Vec3{0.6, 0, -0.8}); l.Luminance(d) != 0 || l.Radiance(d, 500) != 0 {
				t.Errorf("%s: light from below the picture's plane", name)
			}
		}
	}
}

// TestPanoramaIsReadTheSameWay stores one picture of many colours in three ways.
func TestPanoramaIsReadTheSameWay(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 4))
	var last [4]byte
	s := paint(150, func(_, _ float64) [4]byte {
		if rng.IntN(3) == 0 {
			last = [4]byte{byte(128 + rng.IntN(128)), byte(rng.IntN(256)), byte(rng.IntN(256)), byte(120 + rng.IntN(10))}
		}
		return last
	})
	flat := mustReadPanorama(t, s.flat()).shape.(*panorama)
	for name, data := range map[string][]byte{"old runs": s.oldRuns(), "new runs": s.newRuns()} {
		other := mustReadPanorama(t, data).shape.(*panorama)
		for i, v := range flat.texels {
			if other.texels[i] != v {
				t.Fatalf("%s: texel part %d is %v, not %v", name, i, other.texels[i], v)
			}
		}
	}
	for i, p := range s.p {
		for k, want := range decode(p[:]) {
			if flat.texels[3*i+k] != float32(want) {
				t.Fatalf("texel %d, part %d: %v, not %v", i, k, flat.texels[3*i+k], want)
			}
		}
	}
}

// TestPanoramaLiesRight paints a lamp in one place and looks for it.
func TestPanoramaLiesRight(t *testing.T) {
	const lamp, dark = 150, 100
	for _, row := range []struct {
		name string
		x, y float64
		want mgl64.Vec3
	}{
		{"middle, half way down to the horizon", 0.5, 0.25, mgl64.Vec3{0, 1, 1}},
		{"three quarters to the right", 0.75, 0.25, mgl64.Vec3{1, 0, 1}},
		{"a quarter", 0.25, 0.25, mgl64.Vec3{-1, 0, 1}},
		{"the left edge", 0, 0.25, mgl64.Vec3{0, -1, 1}},
		{"near the top", 0.5, 0.05, DirectionOf(81*facets.Degree, 0)},
	} {
		s := paint(64, func(x, y float64) [4]byte {
			around := math.Abs(x - row.x)
			if min(around, 1-around) < 0.02 && math.Abs(y-row.y) < 0.02 {
				return [4]byte{200, 200, 200, lamp}
			}
			return [4]byte{200, 200, 200, dark}
		})
		l := mustReadPanorama(t, s.newRuns())
		if v := l.Luminance(row.want.Normalize()); v < 10 {
			t.Errorf("%s: luminance %v toward %v", row.name, v, row.want)
		}
		if v := l.Luminance(mgl64.Vec3{-row.want[0], -row.want[1], row.want[2] + 0.3}.Normalize()); v > 1e-9 {
			t.Errorf("%s: luminance %v on the other side", row.name, v)
		}
		// The zenith turned toward the top of the picture takes the lamp along.
		turned := mustReadPanorama(t, s.newRuns(), mgl64.Vec3{0, 1, 1})
		turn, err := zenithTo(mgl64.Vec3{0, 1, 1})
		if err != nil {
			t.Fatal(err)
		}
		if d := turn.Mul3x1(row.want.Normalize()); d[2] > 0.1 {
			if v := turned.Luminance(d); v < 10 {
				t.Errorf("%s: luminance %v toward %v under a turned zenith", row.name, v, d)
			}
		}
	}
}

// TestPanoramaKeepsColours expects the chromaticity of each primary of sRGB.
func TestPanoramaKeepsColours(t *testing.T) {
	const points = 1 << 14
	for k, want := range [3][2]float64{{0.64, 0.33}, {0.30, 0.60}, {0.15, 0.06}} {
		var p [4]byte
		p[k], p[3] = 255, 138
		s := paint(8, func(_, _ float64) [4]byte { return p })
		l := mustReadPanorama(t, s.flat())
		var mean [3]float64
		for i := range points {
			w, xyz := colourWavelength((float64(i) + 0.5) / points)
			for c, v := range xyz {
				mean[c] += v * l.Radiance(mgl64.Vec3{0, 0, 1}, w) / points
			}
		}
		x, y := chromaticity(mean)
		// The other parts decode to half a step of 256, 0.2 % of white.
		near(t, "x", x, want[0], 4e-3, "primaries of IEC 61966-2-1")
		near(t, "y", y, want[1], 4e-3, "primaries of IEC 61966-2-1")
		near(t, "Y", mean[1], 1, 1e-5, "a white diffuser's luminance under this light is 1")
		near(t, "luminance", l.Luminance(mgl64.Vec3{0, 0, 1}), 1, 1e-5, "the same without wavelengths")

		// In front of another spectrum the level is set anew.
		var luminance float64
		other := l.Under(mustFindIlluminant(t, "A"))
		for i := range points {
			w, xyz := colourWavelength((float64(i) + 0.5) / points)
			luminance += xyz[1] * other.Radiance(mgl64.Vec3{0, 0, 1}, w) / points
		}
		near(t, "Y in front of A", luminance, 1, 1e-5, "a white diffuser's luminance under this light is 1")
	}
	for i := range primarySpectra[0] {
		sum := 0.0
		for k := range primarySpectra {
			if v := primarySpectra[k][i]; v < 0 || v > 1 {
				t.Errorf("primary %d has %v in row %d", k, v, i)
			}
			sum += primarySpectra[k][i]
		}
		near(t, "sum of the primaries", sum, 1, 2e-7, "equal parts are D65")
	}
}

// repeated gives the same row again and again, so that a large picture needs no memory.
type repeated struct {
	row  []byte
	left int
	at   int
}

func (r *repeated) Read(p []byte) (int, error) {
	if r.left == 0 {
		return 0, io.EOF
	}
	n := copy(p, r.row[r.at:])
	if r.at += n; r.at == len(r.row) {
		r.at = 0
		r.left--
	}
	return n, nil
}

func TestLargePanoramaIsAveragedDown(t *testing.T) {
	const wide = 2500
	row := []byte{2, 2, wide >> 8, wide & 0xff}
	run := func(n int, value byte) {
		for ; n > 0; n -= 127 {
			row = append(row, 128+byte(min(n, 127)), value)
		}
	}
	run(wide/2, 50) // red is three times as strong in the right half
	run(wide/2, 150)
	for x := 0; x < wide; x += 2 { // green alternates
		row = append(row, 2, 100, 200)
	}
	run(wide, 100)
	run(wide, 130)
	head := fmt.Sprintf("#?RGBE\n\n-Y %d +X %d\n", wide/2, wide)
	body := &repeated{row: row, left: wide / 2}
	l, err := ReadPanorama(io.MultiReader(strings.NewReader(head), body), "large.hdr")
	if err != nil {
		t.Fatal(err)
	}
	p := l.shape.(*panorama)
	if p.wide != keptWide || p.high != keptWide/2 || len(p.texels) != 3*keptWide*keptWide/2 {
		t.Fatalf("kept %d × %d and %d numbers", p.wide, p.high, len(p.texels))
	}
	for x, mantissa := range map[int]float64{0: 50.5, keptWide/2 - 1: 50.5, keptWide/2 + 1: 150.5, keptWide - 1: 150.5} {
		near(t, "red", float64(p.texels[3*(100*keptWide+x)]), mantissa/256*4, 1e-6,
			"exponent 130: 2² × mantissa/256")
	}
	near(t, "green received", p.received[1], 150.5/256*4, 2e-3,
		"the mean of alternate columns, which are met 1.22 to a texel")
}

func TestHostilePanoramas(t *testing.T) {
	white := paint(16, func(_, _ float64) [4]byte { return [4]byte{99, 99, 99, 140} })
	good := white.newRuns()
	head := "#?RADIANCE\nFORMAT=32-bit_rle_rgbe\n\n"
	black := paint(8, func(_, _ float64) [4]byte { return [4]byte{} })
	lower := paint(8, func(_, y float64) [4]byte {
		if y > 0.5 {
			return [4]byte{99, 99, 99, 140}
		}
		return [4]byte{}
	})
	row8 := head + "-Y 4 +X 8\n\x02\x02\x00\x08"
	for name, row := range map[string]struct {
		data, says string
		short      bool
	}{
		"empty":                 {"", "line 1: the file is cut short", true},
		"another kind of file":  {"\x89PNG\r\n\x1a\n1234", "no Radiance picture", false},
		"header without end":    {"#?RADIANCE\n" + strings.Repeat("A", mostHeader), "longer than 64 KiB", false},
		"header cut short":      {"#?RADIANCE\nFORMAT=32-bit", "line 2: the file is cut short", true},
		"other colours":         {"#?RADIANCE\nFORMAT=32-bit_rle_xyze\n\n-Y 2 +X 4\n", "line 2: FORMAT", false},
		"other primaries":       {"#?RADIANCE\nPRIMARIES= .7 .3 .17 .8 .13 .05 .31 .33\n\n-Y 2 +X 4\n", "convert the picture to sRGB", false},
		"primaries not numbers": {"#?RADIANCE\nPRIMARIES= NaN .3 .17 .8 .13 .05 .31 .33\n\n-Y 2 +X 4\n", "convert", false},
		"on its side":           {head + "+X 4 -Y 2\n", "upright", false},
		"no size":               {head + "\n", "upright", false},
		"no whole number":       {head + "-Y 2.0 +X 4\n", "whole numbers", false},
		"negative":              {head + "-Y -2 +X -4\n", "whole numbers", false},
		"too large a number":    {head + "-Y 99999999999999999999 +X 4\n", "whole numbers", false},
		"too large":             {head + "-Y 50000 +X 100000\n", "scale the picture down", false},
		"not the whole sphere":  {head + "-Y 4 +X 4\n", "twice as wide as high", false},
		"large and empty":       {head + "-Y 8192 +X 16384\n", "row 1 of 8192: the file is cut short", true},
		"pixels cut short":      {string(good[:len(good)-3]), "row 16 of 16: the file is cut short", true},
		"flat cut short":        {string(white.flat()[:300]), "cut short", true},
		"row of another width":  {head + "-Y 4 +X 8\n\x02\x02\x00\x09", "says it is 9 pixels wide", false},
		"run over the end":      {row8 + "\x8a\x10", "a run of 10 pixels does not fit", false},
		"stretch over the end":  {row8 + "\x090123456789", "does not fit", false},
		"run of nothing":        {row8 + "\x80" + strings.Repeat("\x80", 200), "does not fit", false},
		"stretch of nothing":    {row8 + "\x00\x00", "does not fit", false},
		"old run at the start":  {head + "-Y 1 +X 2\n\x01\x01\x01\x01", "does not fit", false},
		"old run over the end":  {head + "-Y 1 +X 2\n\x05\x05\x05\x80\x01\x01\x01\x09", "does not fit", false},
		"old run in two digits": {head + "-Y 1 +X 2\n\x05\x05\x05\x80\x01\x01\x01\x00\x01\x01\x01\x01", "a run of 256 pixels", false},
		"huge old run":          {head + "-Y 2 +X 4\n\x05\x05\x05\x80\x01\x01\x01\x00\x01\x01\x01\x00\x01\x01\x01\xff", "does not fit", false},
		"black":                 {string(black.flat()), "black above the plane", false},
		"black above":           {string(lower.flat()), "black above the plane", false},
	} {
		l, err := ReadPanorama(strings.NewReader(row.data), "sky.hdr")
		if err == nil {
			t.Errorf("%s: read as %v", name, l.Name)
			continue
		}
		if !strings.HasPrefix(err.Error(), "sky.hdr: ") || !strings.Contains(err.Error(), row.says) {
			t.Errorf("%s: error %q does not say %q", name, err, row.says)
		}
		if errors.Is(err, io.ErrUnexpectedEOF) != row.short {
			t.Errorf("%s: error %q wraps io.ErrUnexpectedEOF: %v", name, err, !row.short)
		}
	}
	broken := errors.New("the disk is gone")
	disk := io.MultiReader(bytes.NewReader(good[:90]), &failing{broken})
	if _, err := ReadPanorama(disk, "sky.hdr"); !errors.Is(err, broken) {
		t.Errorf("a reading error is told as %v", err)
	}
	_, err := ReadPanorama(bytes.NewReader(good), "sky.hdr", mgl64.Vec3{})
	if err == nil || !strings.Contains(err.Error(), "no direction") {
		t.Errorf("a zenith of no direction is told as %v", err)
	}
	// What older programs write is taken.
	for name, head := range map[string]string{
		"carriage returns": "#?RADIANCE\r\nFORMAT=32-bit_rle_rgbe\r\n\r\n-Y 1 +X 2\r\n",
		"own primaries":    "#?RGBE\nPRIMARIES= 0.640 0.330 0.290 0.600 0.150 0.060 0.333 0.333\n\n-Y 1 +X 2\n",
	} {
		if _, err := ReadPanorama(strings.NewReader(head+"\x05\x05\x05\x80\x05\x05\x05\x80and more"), "sky.hdr"); err != nil {
			t.Errorf("%s: %v", name, err)
		}
	}
}

// failing always fails.
type failing struct{ err error }

func (f *failing) Read([]byte) (int, error) { return 0, f.err }

// FuzzReadPanorama looks for files that break the reader; what it takes must be a light.
func FuzzReadPanorama(f *testing.F) {
	s := paint(4, func(x, y float64) [4]byte { return [4]byte{byte(9 * x), byte(7 * y), 2, 128} })
	f.Add(s.flat())
	f.Add(s.oldRuns())
	f.Add(s.newRuns())
	f.Add([]byte("#?RGBE\n\n-Y 1 +X 2\n\x05\x05\x05\xff\x01\x01\x01\x01"))
	f.Add([]byte("#?RADIANCE\nFORMAT=32-bit_rle_rgbe\n\n-Y 8192 +X 16384\n\x02\x02\x40\x00\xff"))
	f.Fuzz(func(t *testing.T, data []byte) {
		var l *Light
		var err error
		// keptWide × keptWide/2 texels and a row, however few bytes claim them.
		const most = 3*4*keptWide*keptWide/2 + 64*mostWide
		budget.Hold(t, most, func() { l, err = ReadPanorama(bytes.NewReader(data), "fuzz.hdr") })
		if err != nil {
			if !strings.HasPrefix(err.Error(), "fuzz.hdr: ") || len(err.Error()) > 400 {
				t.Errorf("error %q", err)
			}
			return
		}
		for _, d := range []mgl64.Vec3{{0, 0, 1}, {0.6, 0, 0.8}, {0, -0.8, 0.6}} {
			if v := l.Luminance(d); !(v >= 0) || math.IsInf(v, 0) {
				t.Errorf("luminance %v from %v", v, d)
			}
			for _, w := range []gems.Wavelength{400, 550, 700} {
				if v := l.Radiance(d, w); !(v >= 0) || math.IsInf(v, 0) {
					t.Errorf("radiance %v from %v at %v", v, d, w)
				}
			}
		}
	})
}
