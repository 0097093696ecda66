package tune

import (
	"context"
	"math"
	"strings"
	"testing"

	"pavilight/facets"
)

// The tangent rule as printed, and its exact invariants on a real plan: an affine stretch
// of each half. Source of the rule: new angle = atan(tan(old) tan(new reference)/tan(old
// reference)), Gemology pages on faceting by tangent ratio; 57° at a reference of 43 to 39
// by the rule is printed as 53.21° (Washington's example).
func TestByTangents(t *testing.T) {
	old := 57 * facets.Degree
	if got := math.Atan(math.Tan(old.Radians())*math.Tan(39*facets.Degree.Radians())/math.Tan(43*facets.Degree.Radians())) / facets.Degree.Radians(); math.Abs(got-53.21) > 0.005 {
		t.Errorf("57° goes to %.3f°, printed 53.21°", got)
	}
	plan := samplePlan(t, "round.toml")
	r := References{PavilionFrom: 42 * facets.Degree, PavilionTo: 43 * facets.Degree, CrownFrom: 37 * facets.Degree, CrownTo: 42 * facets.Degree}
	moved, err := ByTangents(plan, r)
	if err != nil {
		t.Fatal(err)
	}
	a, err := plan.Solve()
	if err != nil {
		t.Fatal(err)
	}
	b, err := moved.Solve()
	if err != nil {
		t.Fatal(err)
	}
	ma, mb := a.Measure(), b.Measure()
	kp := math.Tan(43*facets.Degree.Radians()) / math.Tan(42*facets.Degree.Radians())
	kc := math.Tan(42*facets.Degree.Radians()) / math.Tan(37*facets.Degree.Radians())
	near := func(what string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-8*math.Abs(want)+1e-9 {
			t.Errorf("%s: %v, want %v", what, got, want)
		}
	}
	near("pavilion depth", mb.PavilionDepthMM, kp*ma.PavilionDepthMM)
	near("crown height", mb.CrownHeightMM, kc*ma.CrownHeightMM)
	near("table", mb.TablePercent, ma.TablePercent)
	near("girdle", mb.GirdleMM.Max, ma.GirdleMM.Max)
	if len(a.Corners) != len(b.Corners) {
		t.Fatal("meet points changed")
	}
	for i := range a.Facets {
		near("azimuth of "+a.Facets[i].Tier, math.Atan2(b.Facets[i].Normal[1], b.Facets[i].Normal[0]), math.Atan2(a.Facets[i].Normal[1], a.Facets[i].Normal[0]))
		near("area from above of "+a.Facets[i].Tier, b.Facets[i].Area*math.Abs(b.Facets[i].Normal[2]), a.Facets[i].Area*math.Abs(a.Facets[i].Normal[2]))
	}
	if _, err := ByTangents(plan, References{PavilionFrom: 42 * facets.Degree}); err == nil {
		t.Error("a reference of 0° passes")
	}
}

// Critical angles that the warnings rest on, at the lower index: quartz 40.4° in air and
// 59.7° in water, corundum 34.6° and 49.2° (closed form asin(m/n); indices of mineral
// tables: quartz 1.544, corundum 1.760, water 1.333).
func TestPassed(t *testing.T) {
	stone, err := samplePlan(t, "round.toml").Solve() // pavilion at 41.5° and 42.7°
	if err != nil {
		t.Fatal(err)
	}
	air, water, oil := material(t, "air"), material(t, "water"), material(t, "oil")
	tests := []struct {
		material string
		in       int // which medium
		critical float64
		under    int // tiers
	}{
		{"corundum", 0, 34.6, 0}, {"corundum", 1, 49.2, 2}, {"quartz", 0, 40.4, 0}, {"quartz", 1, 59.7, 2},
		{"diamond", 1, 33.5, 0}, {"fluorite", 0, 44.2, 2}, {"fluorite", 2, 90, 2},
	}
	media := []int{0, 1, 2}
	for _, test := range tests {
		list, err := Passed(stone, material(t, test.material), air, water, oil)
		if err != nil {
			t.Fatal(err)
		}
		count := 0
		for _, u := range list {
			if u.Medium == []any{air, water, oil}[media[test.in]] {
				count++
				if math.Abs(u.Critical.Degrees()-test.critical) > 0.15 {
					t.Errorf("%s: critical angle %v, want %v", test.material, u.Critical, test.critical)
				}
				if !strings.Contains(u.String(), u.Medium.Name) {
					t.Errorf("%q does not name the medium", u)
				}
			}
		}
		if count != test.under {
			t.Errorf("%s in medium %d: %d tiers are under the critical angle, want %d", test.material, test.in, count, test.under)
		}
	}
}

// Moving to quartz: the tangent plan keeps the view from above, and the search, which
// begins there, ends no worse than it.
func TestMove(t *testing.T) {
	plan := samplePlan(t, "round.toml")
	p := &Problem{Pattern: PlanPattern{plan}, Material: material(t, "corundum"), Goal: inAir(t), Head: 10 * facets.Degree, Seed: 1}
	to := material(t, "quartz")
	r, err := UsualReferences(p.Material, to)
	if err != nil {
		t.Fatal(err)
	}
	if r.PavilionFrom != 42*facets.Degree || r.PavilionTo != 43*facets.Degree {
		t.Errorf("references %v: %s", r, ReferencesSource)
	}
	choose := func(p Pattern) ([]Variable, error) {
		vs, err := Choose(p, "P1")
		if err == nil {
			vs[0].Low, vs[0].High, vs[0].Step = vs[0].Now-1, min(vs[0].Now+1, 43.2), 0.2
		}
		return vs, err
	}
	m, err := Move(context.Background(), p, to, r, choose, nil, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	if m.Found.Score < m.Tangent.Score-1e-12 || !m.Found.Fit || !m.Original.Seen || !m.Unchanged.Seen {
		t.Errorf("found %.4f, tangent %.4f, unchanged %.4f, original %.4f", m.Found.Score, m.Tangent.Score, m.Unchanged.Score, m.Original.Score)
	}
	if m.TangentPlan == nil || m.FoundPlan == nil {
		t.Error("a plan is missing")
	}
}
