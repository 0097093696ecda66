package ui

import (
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/test"
)

// boxOf is where a text stands, less the air over and under it.
func boxOf(t *canvas.Text, air float32) area {
	return area{t.Position().X, t.Position().Y + air, t.MinSize().Width, t.MinSize().Height - 2*air}
}

// TestNamesOfCurvesStandApart lays out curves whose peaks lie at the same place, at many
// sizes: rounding must not keep the names from coming to rest, and none covers another.
func TestNamesOfCurvesStandApart(t *testing.T) {
	test.NewTempApp(t)
	p := newFromPlot(nil)
	for high := range 20 {
		var curves [columns][fromBins]float64
		for j := range curves {
			curves[j][4] = 0.031 + 0.017*float64(high)
		}
		p.show(curves, [columns]string{"air", "water", "oil"}, 10, true)
		r := test.WidgetRenderer(p).(*fromPlotRenderer)
		for height := float32(100); height < 260; height += 0.7 {
			r.Layout(fyne.NewSize(230, height))
			for i, a := range r.names {
				for _, b := range r.names[:i] {
					const air = 2 // over and under the ink
					if boxOf(a, air).meets(boxOf(b, air)) {
						t.Fatalf("height %v: %q at %v and %q at %v", height, a.Text, a.Position(), b.Text, b.Position())
					}
				}
			}
		}
	}
}
