package gems

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// seen returns the linear sRGB of daylight through mm of a body, worked out plainly at
// every half nanometre and apart from the code under test.
func seen(a *Absorption, extraordinary bool, mm float64) [3]float64 {
	var through, clear [3]float64
	for w := visibleLo; w <= visibleHi; w += 0.5 {
		o, e := a.Coefficient(w)
		if extraordinary {
			o = e
		}
		x, y, z := Observer(w)
		p, f := DaylightD65(w), math.Exp(-o*mm)
		for i, v := range [3]float64{
			3.2406*x - 1.5372*y - 0.4986*z, // IEC 61966-2-1
			-0.9689*x + 1.8758*y + 0.0415*z,
			0.0557*x - 0.2040*y + 1.0570*z,
		} {
			clear[i] += p * v
			through[i] += p * v * f
		}
	}
	return [3]float64{through[0] / clear[0], through[1] / clear[1], through[2] / clear[2]}
}

// encoded is the transfer curve of IEC 61966-2-1.
func encoded(v float64) float64 {
	if v <= 0.0031308 {
		return 12.92 * v
	}
	return 1.055*math.Pow(v, 1/2.4) - 0.055
}

// A body made for a colour shows that colour through its thickness, for every corner
// and many inner points of what a screen can show.
func TestColouredBodyShowsItsColour(t *testing.T) {
	const (
		thickness = 5.0
		steps     = 2.0 // of the 255 of a screen: the margin at black takes 0.7, the finer sum here the rest
	)
	parts := []float64{0, 0.25, 0.5, 0.75, 1}
	for _, r := range parts {
		for _, g := range parts {
			for _, b := range parts {
				c := Colour{r, g, b}
				a, err := ColouredBody(c, c, thickness)
				if err != nil {
					t.Fatal(err)
				}
				got := seen(a, false, thickness)
				for i, want := range [3]float64{r, g, b} {
					if miss := 255 * (encoded(got[i]) - want); math.Abs(miss) > steps {
						t.Errorf("%v: part %d is off by %.2f steps", c, i, miss)
					}
				}
			}
		}
	}
}

func TestTwoColouredBody(t *testing.T) {
	light, dark := Colour{0.6, 0.8, 0.5}, Colour{0.05, 0.15, 0.05} // a tourmaline dark along its axis: its ordinary ray
	a, err := ColouredBody(dark, light, 3)
	if err != nil {
		t.Fatal(err)
	}
	for w := visibleLo; w <= visibleHi; w += 20 {
		if o, e := a.Coefficient(w); o <= e || e < 0 {
			t.Errorf("at %v the ordinary ray takes %g per mm, the extraordinary %g", w, o, e)
		}
	}
	// Bouguer, Lambert, Beer: through twice the body the light falls by the same share again.
	o, _ := a.Coefficient(550)
	if once, twice := math.Exp(-o*3), math.Exp(-o*6); math.Abs(twice-once*once) > 1e-15 {
		t.Errorf("once %g, twice %g", once, twice)
	}
	grey, err := ColouredBody(Colour{0.5, 0.5, 0.5}, Colour{0.5, 0.5, 0.5}, 2)
	if err != nil {
		t.Fatal(err)
	}
	for w := visibleLo; w <= visibleHi; w += 50 {
		if k, _ := grey.Coefficient(w); math.Abs(k-math.Log(1/linear(0.5))/2) > 1e-3 {
			t.Errorf("grey takes %g per mm at %v: not flat", k, w)
		}
	}
}

func TestThreeColouredBody(t *testing.T) {
	straw, blue, violet := Colour{0.8, 0.75, 0.5}, Colour{0.2, 0.3, 0.8}, Colour{0.5, 0.2, 0.6}
	three, err := ThreeColouredBody(straw, blue, violet, 4)
	if err != nil {
		t.Fatal(err)
	}
	for i, c := range []Colour{straw, blue, violet} {
		one, err := ColouredBody(c, c, 4)
		if err != nil {
			t.Fatal(err)
		}
		for w := visibleLo; w <= visibleHi; w += 25 {
			if got, _ := one.Coefficient(w); three.Coefficients(w)[i] != got {
				t.Errorf("principal axis %d at %v: %v, want %v as of the colour alone", i, w, three.Coefficients(w)[i], got)
			}
		}
	}
	a := &Absorption{Wavelengths: []Wavelength{400, 500}, Ordinary: []float64{1, 3}, Extraordinary: []float64{0, 2}}
	if got := a.Coefficients(450); got != [3]float64{2, 2, 1} {
		t.Errorf("of a uniaxial material %v", got)
	}
	if _, err := ThreeColouredBody(straw, blue, violet, 0); err == nil {
		t.Error("no thickness is no fault")
	}
}

func TestColourless(t *testing.T) {
	white := Colour{1, 1, 1}
	a, err := ColouredBody(white, white, 5)
	if err != nil {
		t.Fatal(err)
	}
	for _, body := range []*Absorption{a, nil, {}} {
		if o, e := body.Coefficient(500); o != 0 || e != 0 {
			t.Errorf("%+v takes %g and %g per mm", body, o, e)
		}
	}
}

func TestAbsorptionRunsStraightBetweenKnots(t *testing.T) {
	a := &Absorption{Wavelengths: []Wavelength{400, 500, 600}, Ordinary: []float64{1, 3, 0}, Extraordinary: []float64{0, 0, 2}}
	for _, row := range []struct {
		w    Wavelength
		o, e float64
	}{
		{300, 1, 0}, {400, 1, 0}, {450, 2, 0}, {500, 3, 0}, {575, 0.75, 1.5}, {600, 0, 2}, {700, 0, 2},
	} {
		if o, e := a.Coefficient(row.w); math.Abs(o-row.o) > 1e-12 || math.Abs(e-row.e) > 1e-12 {
			t.Errorf("%v: got %g, %g, want %g, %g", row.w, o, e, row.o, row.e)
		}
	}
	a.Extraordinary = nil
	if o, e := a.Coefficient(450); o != 2 || e != 2 {
		t.Errorf("without a second ray: %g, %g", o, e)
	}
}

func TestParseColour(t *testing.T) {
	c, err := ParseColour("#2a7f5E")
	if err != nil || c.String() != "#2a7f5e" || c.R != 42./255 {
		t.Errorf("%v, %v", c, err)
	}
	for _, bad := range []string{"", "2a7f5e", "#2a7f5", "#2a7f5e0", "#2a7f5g", "#+12345", "#12 456", "red"} {
		if _, err := ParseColour(bad); err == nil || !strings.Contains(err.Error(), "write") {
			t.Errorf("%q: %v", bad, err)
		}
	}
	for _, mm := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := ColouredBody(c, c, mm); err == nil {
			t.Errorf("%g mm is no error", mm)
		}
	}
}

func ExampleColouredBody() {
	dark, _ := ParseColour("#12301c")
	light, _ := ParseColour("#4f8a5b")
	body, _ := ColouredBody(dark, light, 5)
	o, e := body.Coefficient(650)
	fmt.Printf("per mm at 650 nm: %.2f ordinary, %.2f extraordinary\n", o, e)
	// Output: per mm at 650 nm: 1.05 ordinary, 0.58 extraordinary
}
