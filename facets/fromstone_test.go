package facets

import (
	"bytes"
	"math"
	"testing"
)

// TestPlanOfAStoneCutsIt: the plan made from a solved or measured stone solves to the
// same corners, also after it was written and read.
func TestPlanOfAStoneCutsIt(t *testing.T) {
	same := func(t *testing.T, s *Stone) {
		t.Helper()
		p := PlanOf(s, 96)
		p.Material.Key = "quartz"
		var text bytes.Buffer
		if err := p.Write(&text); err != nil {
			t.Fatal(err)
		}
		back, err := ReadPlan(&text, "again.toml")
		if err != nil {
			t.Fatal(err)
		}
		for _, plan := range []*Plan{p, back} {
			again, err := plan.Solve()
			if err != nil {
				t.Fatal(err)
			}
			if len(again.Facets) != len(s.Facets) {
				t.Errorf("%d facets, want %d", len(again.Facets), len(s.Facets))
			}
			// Planes that met in one corner meet to the rounding of angles and distances,
			// which flat meets magnify by some thousands.
			const tolerance = 1e-6 // mm
			for _, c := range s.Corners {
				near := math.Inf(1)
				for _, d := range again.Corners {
					near = math.Min(near, c.Sub(d).Len())
				}
				if near > tolerance {
					t.Errorf("no corner within %g mm of %v: the nearest lies %g away", tolerance, c, near)
				}
			}
		}
	}
	samplePlans(t, func(t *testing.T, _ *Plan, s *Solution) { same(t, s.Stone) })
	t.Run("measured", func(t *testing.T) {
		p, err := ParseProportions("round", "table=56,crown=34,pavilion=40.5")
		if err != nil {
			t.Fatal(err)
		}
		s, err := p.Stone(6.5)
		if err != nil {
			t.Fatal(err)
		}
		same(t, s)
	})
}
