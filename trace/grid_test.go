package trace

import (
	"context"
	"math"
	"testing"

	"pavilight/facets"
)

// TestGridFoldsTheMap compares maps whose pixels share cells, where turns and mirrors
// bring them onto one another, with maps that keep every pixel, from the same rays.
func TestGridFoldsTheMap(t *testing.T) {
	all := stones(t)
	for _, test := range []struct {
		name   string
		stone  *facets.Stone
		view   View
		pixels int
		folds  int // the images that bring pixels onto pixels, by what the picture's square allows
		put    int // by the number of images over that
	}{
		{"8 turns and mirrors", all["round.toml"], View{}, 31, 8, 2},
		{"even number of pixels", all["round.toml"], View{}, 30, 8, 2},
		{"mirror across the edge", all["round.toml"], View{Tilt: 12 * facets.Degree, Turn: 90 * facets.Degree}, 31, 2, 1},
		{"mirror across the diagonal", all["round.toml"], View{Tilt: 12 * facets.Degree, Turn: 45 * facets.Degree}, 30, 2, 1},
		{"2 turns and mirrors", solid(t, box(1, 0.7, 0.5)), View{}, 31, 4, 1},
		{"5 turns", pinwheel(t), View{}, 31, 1, 5},
		{"none", randomStone(t, 40, 5), View{}, 31, 1, 1},
	} {
		t.Run(test.name, func(t *testing.T) {
			scene := Scene{Stone: test.stone, Material: plain(t, "stone", 1.76), Surroundings: Around(plain(t, "air", 1))}
			settings := Settings{View: test.view, Wavelength: 550, Pixels: test.pixels, Samples: 2}
			folded := untraced(t, scene, settings)
			if folded.grid.folds != test.folds || len(folded.put) != test.put {
				t.Errorf("%d images fold, %d are put into the map; want %d and %d", folded.grid.folds, len(folded.put), test.folds, test.put)
			}
			whole := untraced(t, scene, settings)
			lone := noSymmetry()
			whole.grid, _ = lone.grid(whole.tracer, test.pixels)
			whole.put = nil
			for i := range whole.images {
				whole.put = append(whole.put, i)
			}
			whole.columns[0].mapped = newMap(whole.grid, 1, false, false)
			for _, r := range []*run{folded, whole} {
				if err := r.pass(context.Background()); err != nil {
					t.Fatal(err)
				}
			}
			if folded.grid.area != whole.grid.area {
				t.Errorf("%d pixels show the stone, want %d", folded.grid.area, whole.grid.area)
			}
			a, b := folded.columns[0].mapped, whole.columns[0].mapped
			for y := range test.pixels {
				for x := range test.pixels {
					in, n := a.At(x, y)
					of, m := b.At(x, y)
					// A ray on a pixel's very edge may round into the next.
					if d := difference(in, of).Max(); d > 1e-9 && n > 1 && float64(m) > 1 {
						t.Errorf("pixel %d, %d: the ledger differs by %g", x, y, d)
					}
					if a.Inside(x, y) != b.Inside(x, y) {
						t.Errorf("pixel %d, %d: inside must be %v", x, y, b.Inside(x, y))
					}
				}
			}
		})
	}
}

// TestPicturesCountRaysAlike: where mirror lines run through pixels their rays stand for
// two or more, so every pixel counts as it would in a map that keeps every pixel.
func TestPicturesCountRaysAlike(t *testing.T) {
	scene := Scene{Stone: stones(t)["round.toml"], Material: plain(t, "stone", 1.76), Surroundings: Around(plain(t, "air", 1))}
	p := mustRun(t, scene, Settings{Colour: true, Pixels: 9, Samples: 3000}).Columns[0].Map.picture()
	middle, aside := float64(p.Rays[4*9+4]), float64(p.Rays[4*9+5])
	// About 3000 distinct rays over 16 images each: a standard deviation below 3000/sqrt(3000/16).
	near(t, "rays in the middle pixel over those beside it", middle/aside, 1, 0.2, "by area")
}

// TestMirroredOctants looks up directions in a map of which most octants are copies.
func TestMirroredOctants(t *testing.T) {
	b, err := newBody(brilliant(t))
	if err != nil {
		t.Fatal(err)
	}
	if b.mirrored(vec{-1, 1, 1}) == nil || b.mirrored(vec{1, -1, 1}) == nil {
		t.Fatal("a brilliant is its own mirror image across x and y")
	}
	if b.mirrored(vec{1, 1, -1}) != nil {
		t.Error("a brilliant is not its own mirror image across z")
	}
	for i := range 20000 {
		// Points of a spiral over the sphere.
		z := 1 - (2*float64(i)+1)/20000
		sin, cos := math.Sincos(2.39996 * float64(i))
		y := vec{math.Sqrt(1-z*z) * cos, math.Sqrt(1-z*z) * sin, z}
		want := 0.0
		for _, m := range b.rows {
			want = max(want, m.dot(y))
		}
		if _, got := b.largest(y); got < want-1e-14 {
			t.Fatalf("direction %v: gauge %.16g, want %.16g", y, got, want)
		}
	}
}
