package command

import (
	"bytes"
	"context"
	"image"
	"image/png"
	"os"
	"path/filepath"
	"reflect"
	"testing"

	"pavilight/app/picture"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

// scene is the bundled stone in air, put together by hand.
func scene(t *testing.T) trace.Scene {
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
	material, err := gems.Find(plan.Material.Key)
	if err != nil {
		t.Fatal(err)
	}
	air, err := gems.Find("air")
	if err != nil {
		t.Fatal(err)
	}
	return trace.Scene{Stone: stone, Material: material, Surroundings: trace.Around(air)}
}

// byHand are the settings of a quick look without any other flag.
func byHand() trace.Settings {
	return trace.Settings{Head: 10 * facets.Degree, Pixels: 20, Samples: 4, Error: 0.0005, Seed: 1}
}

// Every flag of look must reach the tracer: the command finds what the tracer finds with
// the settings made by hand, and something else than without the flag.
func TestFlagsReachTheTracer(t *testing.T) {
	tests := []struct {
		args []string
		set  func(*trace.Settings)
	}{
		{[]string{"--tilt", "12"}, func(s *trace.Settings) { s.View.Tilt = 12 * facets.Degree }},
		{[]string{"--tilt", "-12", "--turn", "33"}, func(s *trace.Settings) {
			s.View = trace.View{Tilt: -12 * facets.Degree, Turn: 33 * facets.Degree}
		}},
		{[]string{"--head", "0"}, func(s *trace.Settings) { s.Head = 0 }},
		{[]string{"--head", "25.5"}, func(s *trace.Settings) { s.Head = 25.5 * facets.Degree }},
		{[]string{"--wavelength", "450"}, func(s *trace.Settings) { s.Wavelength = 450 }},
		{[]string{"--below", "0.5"}, func(s *trace.Settings) { s.Below = 0.5 }},
		{[]string{"--unpolarised"}, func(s *trace.Settings) { s.Averaged = true }},
		{[]string{"--seed", "7"}, func(s *trace.Settings) { s.Seed = 7 }},
		{[]string{"--pixels", "500"}, func(s *trace.Settings) { s.Pixels = 500 }},
		{[]string{"--samples", "4000"}, func(s *trace.Settings) { s.Samples = 4000 }},
	}
	found := func(s trace.Settings) lookMedium {
		result, err := trace.Run(context.Background(), scene(t), s, nil)
		if err != nil {
			t.Fatal(err)
		}
		c := result.Columns[0]
		return lookMedium{Ledger: c.Ledger, StandardError: c.StandardError, Lit: c.Lit, From: c.From[:],
			LeakyArea: c.LeakyArea, WindowedArea: c.WindowedArea, IndexStone: c.IndexStone, Segments: c.Segments}
	}
	plain := found(byHand())
	for _, tt := range tests {
		settings := byHand()
		tt.set(&settings)
		want := found(settings)
		if reflect.DeepEqual(want, plain) {
			t.Errorf("%q: the tracer finds the same without it", tt.args)
		}
		// The flags under test come last and take the place of quick's.
		r := decoded[lookResult](t, append(quick("look", "--in", "air"), tt.args...)...)
		m := r.Media[0]
		got := lookMedium{Ledger: m.Ledger, StandardError: m.StandardError, Lit: m.Lit, From: m.From,
			LeakyArea: m.LeakyArea, WindowedArea: m.WindowedArea, IndexStone: m.IndexStone, Segments: m.Segments}
		if !reflect.DeepEqual(got, want) {
			t.Errorf("%q: got %+v, want %+v", tt.args, got, want)
		}
	}
}

// --error ends a run as soon as every entry of the ledger is that certain.
func TestErrorEndsTheRun(t *testing.T) {
	for _, limit := range []string{"0.02", "0.001"} {
		r := decoded[lookResult](t, "look", "--in", "air", "--pixels", "16", "--error", limit)
		want := map[string]float64{"0.02": 0.02, "0.001": 0.001}[limit]
		if got := r.Media[0].StandardError.Max(); !(got > 0 && got < want) {
			t.Errorf("--error %s: the largest error is %v", limit, got)
		}
	}
}

// Each picture must hold the map of its own quantity, in its own colours.
func TestMapsShowTheirQuantity(t *testing.T) {
	result, err := trace.Run(context.Background(), scene(t), byHand(), nil)
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	if got := runCommand(quick("look", "--in", "air", "--out", dir)...); got.status != Done {
		t.Fatal(got.stderr)
	}
	tests := []struct {
		file     string
		quantity trace.Quantity
		colours  *picture.ColourMap
	}{
		{"return-air.png", trace.Returned, picture.Cividis()},
		{"leakage-air.png", trace.Leaked, picture.Cubehelix()},
	}
	for _, tt := range tests {
		data, err := os.ReadFile(filepath.Join(dir, tt.file))
		if err != nil {
			t.Fatal(err)
		}
		img, err := png.Decode(bytes.NewReader(data))
		if err != nil {
			t.Fatal(err)
		}
		want := image.NewRGBA(image.Rect(0, 0, 300, 300)) // 20 pixels, each drawn as 15
		picture.Paint(want, result.Columns[0].Map.Field(tt.quantity), 20, tt.colours)
		if !holds(img, want) {
			t.Errorf("%s does not hold the map of %s", tt.file, tt.quantity)
		}
	}
}

// holds reports whether part can be found in img, pixel by pixel.
func holds(img image.Image, part *image.RGBA) bool {
	room := img.Bounds().Size().Sub(part.Rect.Size())
	for dy := 0; dy <= room.Y; dy++ {
		for dx := 0; dx <= room.X; dx++ {
			if heldAt(img, part, dx, dy) {
				return true
			}
		}
	}
	return false
}

func heldAt(img image.Image, part *image.RGBA, dx, dy int) bool {
	for y := range part.Rect.Dy() {
		for x := range part.Rect.Dx() {
			r, g, b, _ := img.At(x+dx, y+dy).RGBA()
			want := part.RGBAAt(x, y)
			if uint8(r>>8) != want.R || uint8(g>>8) != want.G || uint8(b>>8) != want.B {
				return false
			}
		}
	}
	return true
}
