package trace

import (
	"context"
	"math"
	"testing"
)

// TestPathLengthsOfPlate knows the way of light in a plane-parallel plate seen
// straight on: what leaves at bounce k has gone k times the thickness d, and is
// (1-R)² R^(k-1) of the ray, so that the mean way is d / (1-R).
func TestPathLengthsOfPlate(t *testing.T) {
	const thick = 0.04 // full thickness, mm; the plate is wide enough that no order reaches the rim
	source := "geometric series of a plane-parallel plate: d / (1-R)"
	stone, air := plain(t, "stone", 2.4), plain(t, "air", 1)
	scene := Scene{Stone: solid(t, box(4, 4, thick/2)), Material: stone, Surroundings: Around(air)}
	for _, settings := range []Settings{
		{Paths: true, Wavelength: 589, Averaged: true, Pixels: 12, Samples: 8},
		{Paths: true, Colour: true, Averaged: true, Pixels: 12, Samples: 8},
	} {
		r, err := Run(context.Background(), scene, settings, nil)
		if err != nil {
			t.Fatal(err)
		}
		reflectance := math.Pow(1.4/3.4, 2)
		want := thick / (1 - reflectance)
		ways := r.Columns[0].Map.PathLengths()
		if len(ways) != 12*12 {
			t.Fatalf("%d pixels", len(ways))
		}
		for i, got := range ways {
			// Sums are kept in float32, and the endless series ends at random.
			if i%12 == 0 || i%12 == 11 || i/12 == 0 || i/12 == 11 {
				continue // its rim
			}
			near(t, "way in the plate", float64(got), want, 1e-2*want, source)
		}
		near(t, "its mean", r.Columns[0].PathLength, want, 1e-3*want, source)
	}
	r, err := Run(context.Background(), scene, Settings{Pixels: 12, Samples: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	if r.Columns[0].Map.PathLengths() != nil {
		t.Error("ways were gathered though nobody asked")
	}
}
