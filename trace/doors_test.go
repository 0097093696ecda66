package trace

import (
	"context"
	"math"
	"testing"

	"pavilight/facets"
)

// TestDoorsAddUpToTheLedger compares the sum over tiers with a run of its own points.
func TestDoorsAddUpToTheLedger(t *testing.T) {
	scene := Scene{Stone: stones(t)["round.toml"], Material: plain(t, "stone", 1.76), Surroundings: Around(plain(t, "water", 1.333))}
	settings := Settings{Wavelength: 550, Head: 10 * facets.Degree, View: View{Tilt: 5 * facets.Degree}, Seed: 7}
	doors, err := Doors(context.Background(), scene, 0, settings)
	if err != nil {
		t.Fatal(err)
	}
	settings.Seed, settings.Pixels, settings.Samples = 8, 16, 2000
	want := mustRun(t, scene, settings).Columns[0]
	var sum, spread Ledger
	byTier := map[string]Door{}
	for _, d := range doors {
		sum.Returned += d.Returned
		sum.Head += d.Head
		sum.Leaked += d.Leaked
		spread.Returned = math.Hypot(spread.Returned, d.ReturnedError)
		spread.Head = math.Hypot(spread.Head, d.HeadError)
		spread.Leaked = math.Hypot(spread.Leaked, d.LeakedError)
		byTier[d.Tier] = d
	}
	for _, q := range []Quantity{Returned, Head, Leaked} {
		se := math.Hypot(q.Of(spread), q.Of(want.StandardError))
		if d := math.Abs(q.Of(sum) - q.Of(want.Ledger)); d > 4.1*se { // Student's t, 15 degrees, 0.001
			t.Errorf("%v: the doors add up to %v, the ledger has %v, %.1f standard errors apart", q, q.Of(sum), q.Of(want.Ledger), d/se)
		}
	}
	// In water this stone's middle is a window: the pavilion leaks and the crown does not.
	if crown := byTier["C1"].Leaked + byTier["C2"].Leaked + byTier["T"].Leaked; crown > 0.01 || byTier["P1"].Leaked+byTier["P2"].Leaked < 0.25 {
		t.Errorf("leaked by the crown %v, by the pavilion %v and %v", crown, byTier["P1"].Leaked, byTier["P2"].Leaked)
	}
}

// TestDoorsOfPlate: light leaves a plate by its two faces, as the series of orders says.
func TestDoorsOfPlate(t *testing.T) {
	s := solid(t, box(50, 50, 0.005))
	doors, err := Doors(context.Background(), Scene{Stone: s, Material: plain(t, "stone", 1.5), Surroundings: Around(plain(t, "air", 1))}, 0, Settings{Wavelength: 550})
	if err != nil {
		t.Fatal(err)
	}
	const r = 0.04
	for _, d := range doors {
		switch d.Tier {
		case "table":
			near(t, "back through the table", d.Returned, (1-r)*(1-r)*r/(1-r*r), 2e-4, "geometric series of a plate")
		case "pavilion":
			near(t, "through the lower face", d.Leaked, (1-r)*(1-r)/(1-r*r), 2e-4, "geometric series of a plate")
		}
	}
}
