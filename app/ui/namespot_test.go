package ui

import (
	"testing"

	"fyne.io/fyne/v2"
)

func TestAreaIsCrossed(t *testing.T) {
	a := area{10, 10, 20, 10}
	for _, tt := range []struct {
		name string
		p, q fyne.Position
		want bool
	}{
		{"through", fyne.NewPos(0, 15), fyne.NewPos(40, 15), true},
		{"over", fyne.NewPos(0, 9), fyne.NewPos(40, 9), false},
		{"within", fyne.NewPos(12, 12), fyne.NewPos(14, 14), true},
		{"short of it", fyne.NewPos(0, 15), fyne.NewPos(9, 15), false},
		{"past a corner", fyne.NewPos(0, 25), fyne.NewPos(12, 21), false},
		{"over a corner", fyne.NewPos(5, 15), fyne.NewPos(15, 25), true},
		{"upright", fyne.NewPos(20, 0), fyne.NewPos(20, 40), true},
		{"upright beside", fyne.NewPos(31, 0), fyne.NewPos(31, 40), false},
	} {
		if got := a.crossed(tt.p, tt.q); got != tt.want {
			t.Errorf("%s: crossed %v", tt.name, got)
		}
	}
}

// The name of a low curve under a high one's peak finds a place that is on neither.
func TestNamesLieOnNoCurve(t *testing.T) {
	var high, low []fyne.Position
	for i := range 18 {
		x := float32(10 * i)
		high = append(high, fyne.NewPos(x, 20+float32((i-9)*(i-9))))
		low = append(low, fyne.NewPos(x, 98-float32(i%2)))
	}
	curves := [][]fyne.Position{high, low}
	within, size := area{0, 0, 170, 100}, fyne.NewSize(24, 14)
	var taken []area
	for own := range curves {
		at := spotAt(own, size, curves, taken, within)
		box := area{at.X, at.Y + 2, size.Width, size.Height - 4}
		for _, c := range curves {
			for n := range len(c) - 1 {
				if box.crossed(c[n], c[n+1]) {
					t.Fatalf("the name of curve %d at %v lies on a curve", own, at)
				}
			}
		}
		if at.X < 0 || at.Y < 0 || at.X+size.Width > 170 || at.Y+size.Height > 100 {
			t.Errorf("the name of curve %d at %v leaves the plot", own, at)
		}
		for _, other := range taken {
			if box.meets(other) {
				t.Errorf("the name of curve %d lies on another", own)
			}
		}
		taken = append(taken, area{at.X, at.Y, size.Width, size.Height})
	}
}

func TestSpreadKeepsOrderAndEnds(t *testing.T) {
	got := spread([]float32{38, 40, 10}, 11, 0, 40)
	for i, want := range []float32{29, 40, 10} {
		if got[i] != want {
			t.Errorf("spread to %v", got)
			break
		}
	}
	if got := spread([]float32{2, 1, 3}, 11, 0, 40); got[1] != 1 || got[0] != 12 || got[2] != 23 {
		t.Errorf("spread from the top to %v", got)
	}
}
