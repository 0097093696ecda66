// Package tune searches for better angles: what a stone's shape may vary in, what it
// is to be good at, and under which limits at the lap.
//
// Every candidate is traced with the same sample points (common random numbers), so a
// comparison of two candidates is much more certain than either value, and the same
// problem always gives the same answer. What the search found is traced anew with
// independent points before it is claimed.
package tune

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"pavilight/facets"
)

// Variable is one number of a stone that the search may change.
type Variable struct {
	Name string  // of the tier, or of the proportion
	Unit string  // "degrees" or "%"; empty for a plain number
	Now  float64 // value in the pattern as it stands, in Unit
	Low  float64 // least value allowed
	High float64 // greatest value allowed
	Step float64 // smallest step that the machine, or the eye, can set; 0 for none
}

// round returns the value on the variable's steps, within its limits.
func (v Variable) round(x float64) float64 {
	if v.Step > 0 {
		x = math.Round(x/v.Step) * v.Step
		if x < v.Low-v.Step*1e-9 {
			x += v.Step
		}
		if x > v.High+v.Step*1e-9 {
			x -= v.Step
		}
		// 41.800000000000004 is no setting of a machine.
		x = math.Round(x*1e9) / 1e9
	}
	return min(max(x, v.Low), v.High)
}

// Pattern is a family of stones: one for each choice of some numbers.
type Pattern interface {
	// Variables returns what can be varied, each with its value now and the widest limits.
	Variables() []Variable
	// Build makes the stone of the named values; all others keep theirs. Errors are
	// faults in the words of the facets package.
	Build(names []string, values []float64) (*facets.Stone, error)
}

// PlanPattern varies the angles of a plan's tiers. Its corners are kept: whatever the
// stop rules name stays met, and what cannot be met is an error.
type PlanPattern struct{ Plan *facets.Plan }

// Variables returns the angle of every tier that gives one and is neither level nor
// upright.
func (p PlanPattern) Variables() []Variable {
	var vs []Variable
	for i := range p.Plan.Tiers {
		t := &p.Plan.Tiers[i]
		if a := t.Angle.Degrees(); t.HasAngle && t.Side != facets.Table && a > 0 && a < 90 {
			vs = append(vs, Variable{Name: t.Name, Unit: "degrees", Now: a, Low: max(1, a-15), High: min(89, a+15), Step: 0.1})
		}
	}
	return vs
}

// Build solves the plan with the named tiers at other angles.
func (p PlanPattern) Build(names []string, values []float64) (*facets.Stone, error) {
	return p.With(names, values).Solve()
}

// With returns the plan with the named tiers at other angles.
func (p PlanPattern) With(names []string, values []float64) *facets.Plan {
	plan := p.Plan.Clone()
	for i := range plan.Tiers {
		if k := slices.Index(names, plan.Tiers[i].Name); k >= 0 {
			plan.Tiers[i].Angle = facets.Angle(values[k]) * facets.Degree
		}
	}
	return plan
}

// ProportionsPattern varies measured proportions.
type ProportionsPattern struct {
	Proportions *facets.Proportions
	WidthMM     float64
}

// Variables returns every proportion of the outline.
func (p ProportionsPattern) Variables() []Variable {
	var vs []Variable
	for _, k := range facets.ProportionsOf(p.Proportions.Outline) {
		v := Variable{Name: k.Name, Unit: k.Unit, Now: k.Usual, Low: k.Low, High: k.High, Step: 0.1}
		if given, ok := p.Proportions.Values[k.Name]; ok {
			v.Now = given.Mean
		}
		vs = append(vs, v)
	}
	return vs
}

// Build makes the stone of the proportions with some of them changed.
func (p ProportionsPattern) Build(names []string, values []float64) (*facets.Stone, error) {
	changed := &facets.Proportions{Outline: p.Proportions.Outline, Values: map[string]facets.Spread{}}
	for name, v := range p.Proportions.Values {
		changed.Values[name] = v
	}
	for i, name := range names {
		changed.Values[name] = facets.Spread{Min: values[i], Mean: values[i], Max: values[i]}
	}
	return changed.Stone(p.WidthMM)
}

// Choose returns the pattern's variables of the given names, in their order. An
// unknown name is an error that lists what can be varied.
func Choose(p Pattern, names ...string) ([]Variable, error) {
	all := p.Variables()
	known := make([]string, len(all))
	for i, v := range all {
		known[i] = v.Name
	}
	var chosen []Variable
	for _, name := range names {
		i := slices.Index(known, name)
		switch {
		case i < 0:
			return nil, fmt.Errorf("nothing named %q can be varied here; choose from %s", name, strings.Join(known, ", "))
		case slices.ContainsFunc(chosen, func(v Variable) bool { return v.Name == name }):
			return nil, fmt.Errorf("%q is named twice", name)
		}
		chosen = append(chosen, all[i])
	}
	return chosen, nil
}
