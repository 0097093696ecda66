package motion

import (
	"bytes"
	"context"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"image"
	"image/color"
	"image/gif"
	"image/png"
	"math"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"testing"

	"pavilight/app/picture"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

func bundled(t *testing.T) *facets.Stone {
	t.Helper()
	file, err := testdata.Plans().Open(testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	plan, err := facets.ReadPlan(file, testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	stone, err := plan.Solve()
	if err != nil {
		t.Fatal(err)
	}
	return stone
}

func found(t *testing.T, key string) *gems.Material {
	t.Helper()
	m, err := gems.Find(key)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func light(t *testing.T, name string) *trace.Light {
	t.Helper()
	l, err := trace.FindLight(name)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// TestGreyIsGreyAtEveryPixel: a stone that cannot be seen (its index is that of what is
// around it) on a ground that sends back half of all light is grey, by Lambert's law: every
// pixel has half the white's tristimulus values, whatever rays fell into it.
func TestGreyIsGreyAtEveryPixel(t *testing.T) {
	clear, err := gems.Plain("clear", 1.5, 0)
	if err != nil {
		t.Fatal(err)
	}
	even := light(t, "even")
	// LED-B4 is dark at the ends of the spectrum: some pixels get rays of such wavelengths
	// alone, since there is one ray a pixel or none.
	for _, spectrum := range []string{"D65", "A", "LED-B4"} {
		s, err := trace.FindIlluminant(spectrum)
		if err != nil {
			t.Fatal(err)
		}
		scene := trace.Scene{Stone: bundled(t), Material: clear, Surroundings: trace.Around(clear), Ground: &trace.Ground{Reflectance: 0.5}}
		still, err := Look(context.Background(), scene, trace.Settings{Light: even.Under(s), Pixels: 380, Samples: 1, Seed: 3}, nil)
		if err != nil {
			t.Fatal(err)
		}
		white, inside := s.White(), 0
		for i, v := range still.XYZ {
			if v[1] != v[1] {
				continue
			}
			inside++
			for c := range v {
				// Sums of float32 in both: some 1e-6.
				if math.Abs(float64(v[c])/white[c]-0.5) > 1e-4 {
					t.Fatalf("%s: pixel %d is %v, half the white %v", spectrum, i, v, white)
				}
			}
		}
		if inside < 80000 {
			t.Fatalf("%s: %d pixels show the stone", spectrum, inside)
		}
	}
}

// TestLookAgreesWithAppear: the mean luminance of a picture is that of trace.Appear, which
// takes means without dividing by the white sheet. The picture's own error is that of
// few rays a pixel: 1 % of the luminance, by its scatter over seeds.
func TestLookAgreesWithAppear(t *testing.T) {
	scene := trace.Scene{Stone: bundled(t), Material: found(t, "corundum"), Surroundings: trace.Around(found(t, "air"))}
	settings := trace.Settings{Light: light(t, "overcast"), Head: 10 * facets.Degree, Seed: 1}
	looks, err := trace.Appear(context.Background(), scene, trace.Settings{
		Light: settings.Light, Head: settings.Head, Seed: 2, Samples: 8,
	}, 2000, nil)
	if err != nil {
		t.Fatal(err)
	}
	settings.Distance, settings.Pixels, settings.Samples = 2000, 64, 4
	still, err := Look(context.Background(), scene, settings, nil)
	if err != nil {
		t.Fatal(err)
	}
	sum, n := 0.0, 0.0
	for _, v := range still.XYZ {
		if v[1] == v[1] {
			sum += float64(v[1])
			n++
		}
	}
	// Pixels on the rim count in full here, by their part of the stone there: the rim is
	// an eighth of this picture, and differs from the middle by a fifth.
	want, tolerance := looks[0].Luminance, 0.03
	if got := sum / n; math.Abs(got-want.Value) > tolerance*want.Value+3*want.Error {
		t.Errorf("mean luminance %.4f, by Appear %v", got, want)
	}
}

// TestImageHasTheDisplaysColours: what is read back from a picture is what the display
// says, and the ground beside the stone.
func TestImageHasTheDisplaysColours(t *testing.T) {
	l := light(t, "overcast")
	nan := float32(math.NaN())
	white := l.Illuminant.White()
	s := &Still{Pixels: 2, Light: l, XYZ: [][3]float32{
		{float32(white[0]), float32(white[1]), float32(white[2])}, {0, 0, 0}, {nan, nan, nan}, {0.3, 0.2, 0.1}},
	}
	img := s.Image(color.RGBA{1, 2, 3, 255})
	// The white has two thirds of the screen's luminance: IEC 61966-2-1 encodes 2/3 as
	// 1.055 (2/3)^(1/2.4) - 0.055 = 0.8360, times 255.
	for i, want := range []color.RGBA{{213, 213, 213, 255}, {0, 0, 0, 255}, {1, 2, 3, 255}} {
		if got := img.RGBAAt(i%2, i/2); got != want {
			t.Errorf("pixel %d: %v, want %v", i, got, want)
		}
	}
	if c := img.RGBAAt(1, 1); !(c.R > c.G && c.G > c.B) {
		t.Errorf("red light is shown as %v", c)
	}
}

func job(t *testing.T, shows Shows) *Job {
	return &Job{
		Stone: bundled(t), Material: found(t, "corundum"), Medium: found(t, "air"), Light: light(t, "overcast"), Head: 10 * facets.Degree,
		Seed: 1, Shows: shows, Most: 20 * facets.Degree, Frames: 8, PerSecond: 20, Size: 48,
	}
}

func rendered(t *testing.T, j *Job) []*image.RGBA {
	t.Helper()
	frames, err := j.Render(context.Background(), nil)
	if err != nil {
		t.Fatal(err)
	}
	return frames
}

// TestRockPassesEveryPlaceTwice: frames at equal tilts are one picture, and the tilt goes
// to both sides as a sine.
func TestRockPassesEveryPlaceTwice(t *testing.T) {
	j := job(t, Return)
	frames := rendered(t, j)
	for i, f := range frames {
		tilt, _ := j.tilt(i)
		if want := 20 * math.Sin(2*math.Pi*float64(i)/8); math.Abs(tilt.Degrees()-want) > 1e-9 {
			t.Errorf("frame %d leans %v, want %g°", i, tilt, want)
		}
		for k, g := range frames[:i] {
			other, _ := j.tilt(k)
			if same := math.Abs(float64(tilt-other)) < 1e-9; same != (f == g) {
				t.Errorf("frames %d and %d lean %v and %v: one picture is %v", k, i, other, tilt, f == g)
			}
		}
	}
	j.Path = Circle
	if tilt, turn := j.tilt(2); tilt != j.Most || math.Abs(turn.Degrees()-90) > 1e-9 {
		t.Errorf("a quarter round: %v toward %v", tilt, turn)
	}
}

// TestFramesOfAMapHaveItsColours: every pixel of a map's frame is a colour of the map or the
// ground, and the frame in the middle is the map that trace gives.
func TestFramesOfAMapHaveItsColours(t *testing.T) {
	j := job(t, Leakage)
	frames := rendered(t, j)
	cm := picture.Cubehelix()
	for i, f := range frames {
		for y := range 48 {
			for x := range 48 {
				if c := f.RGBAAt(x, y); c != ground() && !slices.Contains(cm.Table[:], c) {
					t.Fatalf("frame %d at %d, %d: %v is no colour of the map", i, x, y, c)
				}
			}
		}
	}
	settings := j.settings()
	settings.Samples = 8
	r, err := trace.Run(context.Background(), trace.Scene{Stone: j.Stone, Material: j.Material, Surroundings: trace.Around(j.Medium)}, settings, nil)
	if err != nil {
		t.Fatal(err)
	}
	field, n := r.Columns[0].Map.Field(trace.Leaked), settings.Pixels
	for _, at := range [][2]int{{24, 24}, {10, 20}, {30, 12}, {35, 35}} {
		want := cm.At(float64(field[(2*at[1]+1)*n/96*n+(2*at[0]+1)*n/96])) // the nearest pixel
		if got := frames[0].RGBAAt(at[0], at[1]); got != want {
			t.Errorf("at %v: %v, the map says %v", at, got, want)
		}
	}
}

// TestSheetOfABlockIsThatOfTheStone: the white sheet that all frames share is, inside the
// stone, the one that the stone itself would give.
func TestSheetOfABlockIsThatOfTheStone(t *testing.T) {
	j := job(t, Colour)
	shared, err := j.sheet(context.Background())
	if err != nil {
		t.Fatal(err)
	}
	own, err := NewSheet(context.Background(), j.Stone, j.settings())
	if err != nil {
		t.Fatal(err)
	}
	n := j.settings().Pixels
	middle := (n/2)*n + n/2
	for i := middle - 5; i < middle+5; i++ {
		for c := range 3 {
			if d := math.Abs(float64(shared.xyz[i][c] - own.xyz[i][c])); !(d < 1e-4) {
				t.Errorf("pixel %d: %v and %v", i, shared.xyz[i], own.xyz[i])
			}
		}
	}
}

func TestGIFComesOutAgain(t *testing.T) {
	j := job(t, Return)
	frames := rendered(t, j)
	var b bytes.Buffer
	if err := GIF(&b, frames, 20); err != nil {
		t.Fatal(err)
	}
	g, err := gif.DecodeAll(&b)
	if err != nil {
		t.Fatal(err)
	}
	if len(g.Image) != 8 || g.LoopCount != 0 {
		t.Errorf("%d frames, loop count %d", len(g.Image), g.LoopCount)
	}
	for i, f := range frames {
		if g.Delay[i] != 5 {
			t.Errorf("frame %d lasts %d hundredths of a second, want 5", i, g.Delay[i])
		}
		for y := range 48 {
			for x := range 48 {
				r, gr, bl, _ := g.Image[i].At(x, y).RGBA()
				if got := (color.RGBA{uint8(r >> 8), uint8(gr >> 8), uint8(bl >> 8), 255}); got != f.RGBAAt(x, y) {
					t.Fatalf("frame %d at %d, %d: %v, was %v: these maps have fewer than 256 colours", i, x, y, got, f.RGBAAt(x, y))
				}
			}
		}
	}
	// Uneven rates: all together last as long as they should.
	b.Reset()
	if err := GIF(&b, frames, 30); err != nil {
		t.Fatal(err)
	}
	if g, err = gif.DecodeAll(&b); err != nil {
		t.Fatal(err)
	}
	sum := 0
	for _, d := range g.Delay {
		sum += d
	}
	if sum != 8*100/30 {
		t.Errorf("8 frames at 30 a second last %d hundredths", sum)
	}
}

// TestManyColoursAreGathered: a picture of 4096 colours is shown in 256, each near its own.
func TestManyColoursAreGathered(t *testing.T) {
	img := image.NewRGBA(image.Rect(0, 0, 64, 64))
	for i := range 4096 {
		img.SetRGBA(i%64, i/64, color.RGBA{uint8(i % 16 * 17), uint8(i / 16 % 16 * 17), uint8(i / 256 * 17), 255})
	}
	palette := gathered([]*image.RGBA{img})
	if len(palette) != 256 {
		t.Fatalf("%d colours", len(palette))
	}
	worst := 0
	for i := 0; i < len(img.Pix); i += 4 {
		c := palette.Convert(color.RGBA{img.Pix[i], img.Pix[i+1], img.Pix[i+2], 255}).(color.RGBA)
		for k, v := range []uint8{c.R, c.G, c.B} {
			worst = max(worst, int(math.Abs(float64(v)-float64(img.Pix[i+k]))))
		}
	}
	// 4096 even colours in 256 boxes: 16 each, of 2 × 2 × 4 steps of 17 levels at best; the
	// mean lies within 1.5 steps, and a cut that is not the best costs one more.
	if worst > 43 {
		t.Errorf("a colour is %d levels off", worst)
	}
}

// TestAPNGFramesAreWhole takes an animated PNG apart by its own reading of the standard and
// makes a single PNG of every frame, which the standard library decodes.
func TestAPNGFramesAreWhole(t *testing.T) {
	frames := rendered(t, job(t, Return))
	var b bytes.Buffer
	if err := APNG(&b, frames, 20); err != nil {
		t.Fatal(err)
	}
	still, err := png.Decode(bytes.NewReader(b.Bytes())) // a program that knows no animation
	if err != nil || !same(still, frames[0]) {
		t.Errorf("the still picture is not the first frame: %v", err)
	}
	const signature = "\x89PNG\r\n\x1a\n"
	rest := b.Bytes()[len(signature):]
	var header []byte
	var data [][]byte
	next, kinds := uint32(0), []string{}
	sequence := func(v uint32) {
		if v != next {
			t.Errorf("sequence number %d, want %d", v, next)
		}
		next++
	}
	for len(rest) > 0 {
		n := binary.BigEndian.Uint32(rest)
		kind, body := string(rest[4:8]), rest[8:8+n]
		if binary.BigEndian.Uint32(rest[8+n:]) != crc32.ChecksumIEEE(rest[4:8+n]) {
			t.Errorf("%s: wrong check sum", kind)
		}
		rest = rest[12+n:]
		kinds = append(kinds, kind)
		switch kind {
		case "IHDR":
			header = body
		case "acTL":
			if count, plays := binary.BigEndian.Uint32(body), binary.BigEndian.Uint32(body[4:]); count != 8 || plays != 0 {
				t.Errorf("%d frames, played %d times", count, plays)
			}
		case "fcTL":
			sequence(binary.BigEndian.Uint32(body))
			if w, num, den := binary.BigEndian.Uint32(body[4:]), binary.BigEndian.Uint16(body[20:]), binary.BigEndian.Uint16(body[22:]); w != 48 || num != 1 || den != 20 || len(body) != 26 {
				t.Errorf("frame of width %d lasts %d/%d s", w, num, den)
			}
		case "IDAT":
			data = append(data, body)
		case "fdAT":
			sequence(binary.BigEndian.Uint32(body))
			data = append(data, body[4:])
		}
	}
	if kinds[0] != "IHDR" || kinds[1] != "acTL" || kinds[2] != "fcTL" || kinds[3] != "IDAT" || kinds[len(kinds)-1] != "IEND" {
		t.Errorf("chunks %v", kinds)
	}
	if len(data) != len(frames) {
		t.Fatalf("%d pictures", len(data))
	}
	for i, d := range data {
		one := &bytes.Buffer{}
		w := &chunkWriter{w: one}
		w.raw([]byte(signature))
		w.chunk("IHDR", header)
		w.chunk("IDAT", d)
		w.chunk("IEND", nil)
		if img, err := png.Decode(one); err != nil || !same(img, frames[i]) {
			t.Errorf("frame %d comes out otherwise: %v", i, err)
		}
	}
}

func same(a image.Image, b *image.RGBA) bool {
	if a.Bounds() != b.Bounds() {
		return false
	}
	for y := range b.Rect.Dy() {
		for x := range b.Rect.Dx() {
			r, g, bl, _ := a.At(x, y).RGBA()
			if (color.RGBA{uint8(r >> 8), uint8(g >> 8), uint8(bl >> 8), 255}) != b.RGBAAt(x, y) {
				return false
			}
		}
	}
	return true
}

func TestEqualJobsGiveEqualFilms(t *testing.T) {
	j := job(t, Colour)
	j.Frames, j.Size = 4, 40
	var a, b bytes.Buffer
	if err := GIF(&a, rendered(t, j), 20); err != nil {
		t.Fatal(err)
	}
	j.Workers = 1
	if err := GIF(&b, rendered(t, j), 20); err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(a.Bytes(), b.Bytes()) {
		t.Error("two films of one job differ")
	}
}

// TestVideoGivesTheFramesToFFmpeg stands a script in for ffmpeg, which notes what it is
// given.
func TestVideoGivesTheFramesToFFmpeg(t *testing.T) {
	if runtime.GOOS == "windows" {
		t.Skip("the script is one of a shell")
	}
	folder := t.TempDir()
	t.Setenv("PATH", folder)
	frames := []*image.RGBA{image.NewRGBA(image.Rect(0, 0, 5, 5)), image.NewRGBA(image.Rect(0, 0, 5, 5))}
	if _, err := Video(context.Background(), frames, 20, "mp4"); !errors.Is(err, ErrNoEncoder) {
		t.Errorf("without ffmpeg: %v", err)
	}
	script := func(text string) {
		if err := os.WriteFile(filepath.Join(folder, "ffmpeg"), []byte("#!/bin/sh\n"+text), 0o755); err != nil {
			t.Fatal(err)
		}
	}
	script(`for last; do :; done
in=; for a; do case "$a" in */%04d.png) in=${a%/*};; esac; done
test -s "$in/0000.png" && test -s "$in/0001.png" && ! test -e "$in/0002.png" || exit 9
echo "$@" > "$last"
`)
	for kind, codec := range map[string]string{"mp4": "libx264", "webm": "libvpx-vp9"} {
		film, err := Video(context.Background(), frames, 20, kind)
		if err != nil {
			t.Fatal(err)
		}
		for _, want := range []string{"-framerate 20", codec, "yuv420p", "film." + kind} {
			if !strings.Contains(string(film), want) {
				t.Errorf("%s: ffmpeg was called with %s", kind, film)
			}
		}
	}
	script("echo no such codec >&2; exit 1\n")
	if _, err := Video(context.Background(), frames, 20, "mp4"); err == nil || !strings.Contains(err.Error(), "no such codec") {
		t.Errorf("a failing ffmpeg: %v", err)
	}
	if _, err := Video(context.Background(), frames, 20, "avi"); err == nil {
		t.Error("a film of another kind was made")
	}
}

func TestJobRefuses(t *testing.T) {
	for _, row := range []struct {
		name string
		mend func(*Job)
		want string
	}{
		{"one frame", func(j *Job) { j.Frames = 1 }, "1 frames"},
		{"too large", func(j *Job) { j.Size = 3000 }, "3000 pixels"},
		{"too much", func(j *Job) { j.Size, j.Frames = 1600, 720 }, "memory"},
		{"no tilt", func(j *Job) { j.Most = 0 }, "tilt"},
		{"no light", func(j *Job) { j.Light = nil }, "light"},
		{"too fast", func(j *Job) { j.PerSecond = 100 }, "100 pictures a second"},
	} {
		j := job(t, Colour)
		row.mend(j)
		if _, err := j.Render(context.Background(), nil); err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %v", row.name, err)
		}
	}
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	if _, err := job(t, Colour).Render(ctx, nil); !errors.Is(err, context.Canceled) {
		t.Errorf("a cancelled film: %v", err)
	}
}
