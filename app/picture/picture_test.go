package picture

import (
	"bytes"
	"errors"
	"image"
	"image/color"
	"image/png"
	"math"
	"strings"
	"testing"

	"golang.org/x/image/font"
)

// lightness returns the CIE 1976 L* of an sRGB colour, 0 to 100. Sources: CIE 15:2004,
// equation 8.3; IEC 61966-2-1 for sRGB.
func lightness(c color.RGBA) float64 {
	linear := func(v uint8) float64 {
		x := float64(v) / 255
		if x <= 0.04045 {
			return x / 12.92
		}
		return math.Pow((x+0.055)/1.055, 2.4)
	}
	y := 0.2126*linear(c.R) + 0.7152*linear(c.G) + 0.0722*linear(c.B)
	if y <= 216.0/24389 {
		return y * 24389 / 27
	}
	return 116*math.Cbrt(y) - 16
}

func TestLightnessGrowsEvenly(t *testing.T) {
	// Half a level of green, the heaviest channel, moves L* by at most this.
	const rounding = 0.25
	tests := []struct {
		name   string
		m      *ColourMap
		off    float64 // largest distance from the straight line from first to last, in L*
		source string
	}{
		{"cividis", Cividis(), 2, "the paper straightens the lightness in CAM02-UCS, which differs from L* by about one"},
		{"cubehelix", Cubehelix(), 6, "monotone by construction in Rec. 601 luma, not straightened in L*"},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			first, last := lightness(tt.m.Table[0]), lightness(tt.m.Table[255])
			if last-first < 70 {
				t.Errorf("lightness runs from %.1f to %.1f: too little to read values by", first, last)
			}
			for i, c := range tt.m.Table {
				if i > 0 && lightness(c) < lightness(tt.m.Table[i-1])-rounding {
					t.Errorf("entry %d is darker than the one before", i)
				}
				line := first + (last-first)*float64(i)/255
				if d := math.Abs(lightness(c) - line); d > tt.off {
					t.Errorf("entry %d: L* %.2f, %.2f from the straight line; at most %.1f: %s", i, lightness(c), d, tt.off, tt.source)
				}
				if c.A != 255 {
					t.Errorf("entry %d is not opaque", i)
				}
			}
		})
	}
}

// The ends and the middle of the published table, as the CC0 table prints them in
// floating point, times 255.
func TestCividisIsThePublishedTable(t *testing.T) {
	tests := []struct {
		v       float64
		r, g, b float64
	}{
		{0, 0.000000, 0.135112, 0.304751},
		{128.0 / 255, 0.488697, 0.485318, 0.471008},
		{1, 0.995737, 0.909344, 0.217772},
	}
	for _, tt := range tests {
		got := Cividis().At(tt.v)
		want := color.RGBA{R: level(tt.r), G: level(tt.g), B: level(tt.b), A: 255}
		if got != want {
			t.Errorf("at %.3f: got %v, want %v", tt.v, got, want)
		}
	}
}

func TestOutsideIsUnlikeEveryValue(t *testing.T) {
	// Twice the step of 8-bit rounding of two neighbours on the scale, and well above
	// what an eye tells apart in one picture.
	const least = 30
	for _, m := range []*ColourMap{Cividis(), Cubehelix()} {
		for i, c := range m.Table {
			d := math.Sqrt(square(c.R, m.Outside.R) + square(c.G, m.Outside.G) + square(c.B, m.Outside.B))
			if d < least {
				t.Errorf("%s: entry %d %v is only %.0f from the grey outside", m.Name, i, c, d)
			}
		}
	}
}

func square(a, b uint8) float64 { return (float64(a) - float64(b)) * (float64(a) - float64(b)) }

func TestAtKeepsToTheScale(t *testing.T) {
	m := Cividis()
	tests := []struct {
		name string
		v    float64
		want color.RGBA
	}{
		{"below", -0.3, m.Table[0]},
		{"zero", 0, m.Table[0]},
		{"half", 0.5, m.Table[128]},
		{"one", 1, m.Table[255]},
		{"above", 1.7, m.Table[255]},
		{"infinite", math.Inf(1), m.Table[255]},
		{"outside the outline", math.NaN(), m.Outside},
	}
	for _, tt := range tests {
		if got := m.At(tt.v); got != tt.want {
			t.Errorf("%s: At(%v) = %v, want %v", tt.name, tt.v, got, tt.want)
		}
	}
}

func TestPaint(t *testing.T) {
	nan := float32(math.NaN())
	field := []float32{0, 0.25, 0.75, nan}
	m := Cubehelix()
	for _, size := range []int{2, 6, 7} {
		dst := image.NewRGBA(image.Rect(0, 0, size, size))
		Paint(dst, field, 2, m)
		for y := range size {
			for x := range size {
				want := m.At(float64(field[y*2/size*2+x*2/size]))
				if got := dst.RGBAAt(x, y); got != want {
					t.Fatalf("%d pixels: at %d, %d: %v, want %v", size, x, y, got, want)
				}
			}
		}
	}
}

func TestPaintLeavesTheRestAlone(t *testing.T) {
	whole := blank(10, 10)
	Paint(whole.SubImage(image.Rect(3, 4, 5, 6)).(*image.RGBA), []float32{0, 0, 0, 0}, 2, Cividis())
	for y := range 10 {
		for x := range 10 {
			want := grey(paper)
			if (image.Point{X: x, Y: y}).In(image.Rect(3, 4, 5, 6)) {
				want = Cividis().Table[0]
			}
			if got := whole.RGBAAt(x, y); got != want {
				t.Fatalf("at %d, %d: %v, want %v", x, y, got, want)
			}
		}
	}
	before := append([]byte(nil), whole.Pix...)
	Paint(whole, []float32{1, 1, 1}, 2, Cividis()) // not a square
	if string(before) != string(whole.Pix) {
		t.Error("a field of the wrong length was painted")
	}
}

func testPlate(pixels int) Plate {
	field := make([]float32, pixels*pixels)
	for i := range field {
		field[i] = float32(i%pixels) / float32(pixels)
	}
	field[0] = float32(math.NaN())
	return Plate{Title: "Light return", Medium: "in air", Field: field, Pixels: pixels, Colours: Cividis(), Lines: []string{"mean 0.5"}}
}

// Every pixel of the field must be found in the picture, whole and in its place.
func TestSingleHoldsTheWholeMap(t *testing.T) {
	for _, pixels := range []int{1, 40, 300, 310} {
		p := testPlate(pixels)
		img, err := Single(p)
		if err != nil {
			t.Fatal(err)
		}
		factor := p.edge() / pixels
		if factor*pixels != p.edge() || p.edge() < leastMap {
			t.Fatalf("%d pixels are drawn on %d", pixels, p.edge())
		}
		const head = margin + titleSize + lineStep + 14
		for y := range p.edge() {
			for x := range p.edge() {
				want := p.Colours.At(float64(p.Field[y/factor*pixels+x/factor]))
				if got := img.RGBAAt(margin+x, head+y); got != want {
					t.Fatalf("%d pixels: at %d, %d: %v, want %v", pixels, x, y, got, want)
				}
			}
		}
		// The scale: its lowest row is the colour of 0, its highest that of 1.
		x := margin + p.edge() + 14
		if img.RGBAAt(x, head+p.edge()-1) != p.Colours.Table[0] || img.RGBAAt(x, head) != p.Colours.Table[255] {
			t.Errorf("%d pixels: the scale does not run from 0 below to 1 above", pixels)
		}
	}
}

func TestDrawingRefusesWhatIsNoMap(t *testing.T) {
	if _, err := Single(Plate{Field: make([]float32, 3), Pixels: 2, Colours: Cividis()}); !errors.Is(err, errField) {
		t.Errorf("three values as a square: %v", err)
	}
	for name, s := range map[string]Sheet{
		"empty":     {},
		"ragged":    {Rows: [][]Plate{{testPlate(4), testPlate(4)}, {testPlate(4)}}},
		"two sizes": {Rows: [][]Plate{{testPlate(4), testPlate(5)}}},
	} {
		if _, err := s.Draw(); !errors.Is(err, errSheet) {
			t.Errorf("%s: %v", name, err)
		}
	}
}

func TestSheetHoldsEveryMap(t *testing.T) {
	a, b := testPlate(30), testPlate(30)
	b.Colours = Cubehelix()
	s := Sheet{Title: "x", Lines: []string{"y"}, Rows: [][]Plate{{a, a, a}, {b, b, b}}, Ledger: [][]string{{"1", "2"}, {"3"}, {}}}
	img, err := s.Draw()
	if err != nil {
		t.Fatal(err)
	}
	// The last column of a field is the brightest; each map shows it over its whole height.
	for _, p := range []Plate{a, b} {
		want, found := p.Colours.At(float64(p.Field[29])), 0
		for y := range img.Rect.Dy() {
			for x := range img.Rect.Dx() - margin - scaleRoom {
				if img.RGBAAt(x, y) == want {
					found++
				}
			}
		}
		if factor := p.edge() / 30; found != 3*factor*p.edge() {
			t.Errorf("%s: %d pixels of the brightest column, want %d", p.Colours.Name, found, 3*factor*p.edge())
		}
	}
}

func TestEncodePNG(t *testing.T) {
	want := blank(5, 4)
	want.SetRGBA(2, 1, color.RGBA{R: 9, G: 8, B: 7, A: 255})
	var file bytes.Buffer
	if err := EncodePNG(&file, want); err != nil {
		t.Fatal(err)
	}
	got, err := png.Decode(&file)
	if err != nil {
		t.Fatal(err)
	}
	if got.Bounds() != want.Rect || color.RGBAModel.Convert(got.At(2, 1)) != want.At(2, 1) {
		t.Errorf("the file holds another picture")
	}
	if err := EncodePNG(&file, image.NewRGBA(image.Rectangle{})); err == nil {
		t.Error("an empty picture was written")
	}
}

func TestWrap(t *testing.T) {
	l, err := newLetters()
	if err != nil {
		t.Fatal(err)
	}
	const width = 120
	text := "a stone that is seen from above in even light, withaverylongwordthatfitsnowhere between"
	lines := wrap(l.body, text, width)
	if len(lines) < 4 {
		t.Errorf("wrapped into %d lines only: %q", len(lines), lines)
	}
	for _, line := range lines {
		if got := font.MeasureString(l.body, line).Ceil(); got > width {
			t.Errorf("%q is %d pixels wide, at most %d allowed", line, got, width)
		}
	}
	if got := strings.Join(wrap(l.body, text, 10000), " "); got != text {
		t.Errorf("text that fits was changed to %q", got)
	}
	if got := wrap(l.body, "  ", width); len(got) != 0 {
		t.Errorf("blanks became %q", got)
	}
}
