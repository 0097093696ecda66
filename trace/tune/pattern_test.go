package tune

import (
	"math"
	"slices"
	"strings"
	"testing"

	"pavilight/facets"
)

func TestMains(t *testing.T) {
	for name, want := range map[string]string{
		"round.toml": "P1 C2", "triangle.toml": "P2 C1", "oval.toml": "P24 D21+D3+D9+D15", "cushion.toml": "P1 C1",
		"step.toml": "P3a+P3b C3a+C3b+C3c", "twist.toml": "P1 C2",
	} {
		got := strings.Join(Mains(PlanPattern{samplePlan(t, name)}), " ")
		if got != want {
			t.Errorf("%s: mains %q, want %q", name, got, want)
		}
	}
}

// Joined tiers change by as much; sizes of stop rules change in their own units; what is
// unknown, named twice or no angle is refused in words.
func TestChoose(t *testing.T) {
	p := PlanPattern{samplePlan(t, "step.toml")}
	vs, err := Choose(p, "P1a+P1b+P1c", "G2.distance")
	if err != nil {
		t.Fatal(err)
	}
	if vs[0].Now != 57 || vs[1].Now != 1.3 {
		t.Errorf("%+v", vs)
	}
	changed := p.With([]string{"P1a+P1b+P1c", "G2.distance"}, []float64{55.5, 1.4})
	for _, tier := range changed.Tiers {
		switch tier.Name {
		case "P1a", "P1b", "P1c":
			if math.Abs(tier.Angle.Degrees()-55.5) > 1e-9 {
				t.Errorf("%s went to %v", tier.Name, tier.Angle)
			}
		case "G2":
			if tier.Stop.Value != 1.4 {
				t.Errorf("G2 went to %v", tier.Stop.Value)
			}
		}
	}
	if p.Plan.Tiers[3].Angle != 57*facets.Degree {
		t.Error("the plan itself was changed")
	}
	for words, names := range map[string][]string{
		"nothing named": {"Q9"}, "named twice": {"P1a", "P1a"}, "only angles": {"P1a+G2.distance"}, `"P1a" is named twice`: {"P1a+P1a"},
	} {
		if _, err := Choose(p, names...); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("%q: %v", names, err)
		}
	}
	shape, err := facets.ParseProportions("round", "table=56,pavilion=40.8")
	if err != nil {
		t.Fatal(err)
	}
	q := ProportionsPattern{shape, 6.5}
	vs, err = Choose(q, "pavilion", "table", "star", "lower", "girdle")
	if err != nil || vs[0].Now != 40.8 || vs[1].Now != 56 {
		t.Errorf("%+v, %v", vs, err)
	}
	stone, err := q.Build([]string{"table", "pavilion"}, []float64{60, 41.2})
	if err != nil {
		t.Fatal(err)
	}
	if m := stone.Measure(); math.Abs(m.TablePercent-60) > 1e-6 {
		t.Errorf("table %v, want 60 %%", m.TablePercent)
	}
	if !slices.ContainsFunc(stone.Facets, func(f facets.Facet) bool {
		return f.Side == facets.Pavilion && math.Abs(math.Acos(-f.Normal[2])-41.2*facets.Degree.Radians()) < 1e-9
	}) {
		t.Error("no facet at 41.2°")
	}
}
