package trace

import (
	"context"
	"math"
	"testing"

	"pavilight/gems"
)

// TestAppearanceOfPlate knows how a plane-parallel plate looks: it mirrors and returns
// its part of the even light everywhere alike.
func TestAppearanceOfPlate(t *testing.T) {
	s := solid(t, box(4, 4, 0.02))
	scene := Scene{Stone: s, Material: plain(t, "stone", 1.5), Surroundings: Around(plain(t, "air", 1))}
	light, err := FindLight("even")
	if err != nil {
		t.Fatal(err)
	}
	a65, err := FindIlluminant("D65")
	if err != nil {
		t.Fatal(err)
	}
	looks, err := Appear(context.Background(), scene, Settings{Light: light.Under(a65), Seed: 5}, 3000, nil)
	if err != nil {
		t.Fatal(err)
	}
	a := looks[0]
	const back = 1 - 2*1.5/(1.5*1.5+1)
	within := func(what string, e Estimate, want float64) {
		t.Helper()
		if math.Abs(e.Value-want) > 4*e.Error+1e-3 {
			t.Errorf("%s: %v, want %v", what, e, want)
		}
	}
	within("luminance", a.Luminance, back)
	within("dark area", a.DarkArea, 1) // 0.077 lies under a tenth
	if a.Contrast.Value > 0.05 {       // a root of noise about 0, and the rim, where orders are lost
		t.Errorf("contrast: %v, want almost none", a.Contrast)
	}
	within("fire", a.Fire, 0)
	// In the middle of the plate, over so many pixels that the noise of colour is small.
	var middle [3]float64
	const reach = 20
	for y := a.Pixels/2 - reach; y < a.Pixels/2+reach; y++ {
		for x := a.Pixels/2 - reach; x < a.Pixels/2+reach; x++ {
			for c, v := range a.XYZ[y*a.Pixels+x] {
				middle[c] += float64(v) / (4 * reach * reach)
			}
		}
	}
	white := a65.White()
	for c := range 3 {
		near(t, "colour in the middle", middle[c], back*white[c]/white[1], 0.002, "white light stays white")
	}
}

// TestColourModeKeepsTheLedger gathers the same shares with wavelengths drawn for colour.
func TestColourModeKeepsTheLedger(t *testing.T) {
	diamond, err := gems.Find("diamond")
	if err != nil {
		t.Fatal(err)
	}
	scene := lump(t)
	scene.Material = diamond
	plainly := mustRun(t, scene, Settings{Pixels: 8, Samples: 600, Seed: 1})
	colour := mustRun(t, scene, Settings{Pixels: 8, Samples: 600, Seed: 2, Colour: true})
	for k := range plainly.Columns {
		a, b := plainly.Columns[k], colour.Columns[k]
		for q := Surface; q < quantities; q++ {
			se := math.Hypot(q.Of(a.StandardError), q.Of(b.StandardError))
			if d := math.Abs(q.Of(a.Ledger) - q.Of(b.Ledger)); d > 4.1*se+1e-9 {
				t.Errorf("%v: %v and %v differ by %.1f standard errors", q, q.Of(a.Ledger), q.Of(b.Ledger), d/se)
			}
		}
		near(t, "lit", b.Lit.Sum, a.Lit.Sum, 0.003, "the even light of the plain tracer")
	}
}

// TestUniformSurroundInColour: a lossless stone in a uniform surround shows the surround's
// colour too, above and below, whatever its dispersion.
func TestUniformSurroundInColour(t *testing.T) {
	diamond, err := gems.Find("diamond")
	if err != nil {
		t.Fatal(err)
	}
	light, err := FindLight("even")
	if err != nil {
		t.Fatal(err)
	}
	lamp, err := FindIlluminant("A")
	if err != nil {
		t.Fatal(err)
	}
	scene := Scene{Stone: stones(t)["round.toml"], Material: diamond, Surroundings: Around(plain(t, "air", 1))}
	for _, paths := range []bool{false, true} { // with a kernel and without
		r := mustRun(t, scene, Settings{Light: light.Under(lamp), Below: 1, Colour: true, Pixels: 8, Samples: 3000, Seed: 4, Paths: paths})
		m := r.Columns[0].Map
		var sum [3]float64
		rays := 0.0
		for i := range m.cells {
			rays += float64(m.cells[i].rays)
			for c, v := range m.colour[i] {
				sum[c] += float64(v)
			}
		}
		white := lamp.White()
		for c, name := range []string{"X", "Y", "Z"} {
			near(t, name, sum[c]/rays, white[c]/white[1], 0.01, "a lossless stone in a uniform surround shows the surround")
		}
	}
}
