// Package tune searches for better angles: what a stone's shape may vary in, what it
// is to be good at, and under which limits at the lap. It also shows the goal over two
// angles, what errors of the machine cost, and how a plan moves to another material.
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
	Name string  // of the tier, of tiers joined by +, of a tier's stop rule (C1.girdle), or of the proportion
	Unit string  // "degrees" or "%"; empty for a plain number
	Now  float64 // value in the pattern as it stands, in Unit
	Low  float64 // least value allowed
	High float64 // greatest value allowed
	Step float64 // smallest step that the machine, or the eye, can set; 0 for none
}

// round returns the value on the variable's steps, within its limits.
func (v Variable) round(x float64) float64 {
	x = min(max(x, v.Low), v.High)
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

// stride returns the smallest change that counts: the step, or a 256th of the limits'
// span where there is none.
func (v Variable) stride() float64 {
	if v.Step > 0 {
		return v.Step
	}
	return (v.High - v.Low) / 256
}

// Pattern is a family of stones: one for each choice of some numbers.
type Pattern interface {
	// Variables returns what can be varied, each with its value now and the widest limits.
	Variables() []Variable
	// Build makes the stone of the named values; all others keep theirs. Errors are
	// faults in the words of the facets package.
	Build(names []string, values []float64) (*facets.Stone, error)
}

// PlanPattern varies the angles of a plan's tiers, and the sizes at which its stop
// rules stop. Its corners are kept: whatever the stop rules name stays met, and what
// cannot be met is an error.
type PlanPattern struct{ Plan *facets.Plan }

// How far an angle may go from where it stands unless the user widens the limits, and
// a size as a share of itself.
const (
	usualReach = 6.0 // degrees
	usualShare = 0.3
	usualStep  = 0.1 // degrees; the finest mark of a usual protractor: common practice, no source
	sizeStep   = 0.001
)

// Variables returns the angle of every tier that gives one and is neither level nor
// upright, then the size of every tier's stop rule that has one.
func (p PlanPattern) Variables() []Variable {
	var vs []Variable
	for i := range p.Plan.Tiers {
		t := &p.Plan.Tiers[i]
		if a := t.Angle.Degrees(); t.HasAngle && t.Side != facets.Table && a > 0 && a < 90 {
			vs = append(vs, Variable{Name: t.Name, Unit: "degrees", Now: a,
				Low: max(1, a-usualReach), High: min(89, a+usualReach), Step: usualStep})
		}
	}
	for i := range p.Plan.Tiers {
		t := &p.Plan.Tiers[i]
		switch x := t.Stop.Value; t.Stop.Rule {
		case facets.StopTable, facets.StopCulet:
			vs = append(vs, Variable{Name: t.Name + "." + t.Stop.Rule.String(), Unit: "%", Now: 100 * x,
				Low: 100 * x * (1 - usualShare), High: min(99, 100*x*(1+usualShare)), Step: 0.1})
		case facets.StopMeet, facets.NoStop:
		default:
			if x != 0 {
				low, high := min(x*(1-usualShare), x*(1+usualShare)), max(x*(1-usualShare), x*(1+usualShare))
				vs = append(vs, Variable{Name: t.Name + "." + t.Stop.Rule.String(), Now: x, Low: low, High: high, Step: sizeStep})
			}
		}
	}
	return vs
}

// Build solves the plan with the named values changed.
func (p PlanPattern) Build(names []string, values []float64) (*facets.Stone, error) {
	return p.With(names, values).Solve()
}

// With returns the plan with the named values changed. Of tiers joined by + the value
// is the first one's, and the others change by as much.
func (p PlanPattern) With(names []string, values []float64) *facets.Plan {
	plan := p.Plan.Clone()
	for k, name := range names {
		tiers := strings.Split(name, "+")
		change := facets.Angle(0)
		for n, tier := range tiers {
			i := slices.IndexFunc(plan.Tiers, func(t facets.Tier) bool { return t.Name == tier })
			switch {
			case i < 0:
				tier, rule, _ := cutLast(name)
				i = slices.IndexFunc(plan.Tiers, func(t facets.Tier) bool { return t.Name == tier && t.Stop.Rule.String() == rule })
				if i >= 0 {
					plan.Tiers[i].Stop.Value = values[k]
					if r := plan.Tiers[i].Stop.Rule; r == facets.StopTable || r == facets.StopCulet {
						plan.Tiers[i].Stop.Value = values[k] / 100
					}
				}
			case n == 0:
				change = facets.Angle(values[k])*facets.Degree - plan.Tiers[i].Angle
				plan.Tiers[i].Angle = facets.Angle(values[k]) * facets.Degree
			default:
				plan.Tiers[i].Angle = facets.Angle(math.Round((plan.Tiers[i].Angle+change).Degrees()*1e9)/1e9) * facets.Degree
			}
		}
	}
	return plan
}

// cutLast splits C1.girdle into tier and rule: tiers may have dots in their names.
func cutLast(name string) (tier, rule string, ok bool) {
	i := strings.LastIndexByte(name, '.')
	if i < 0 {
		return name, "", false
	}
	return name[:i], name[i+1:], true
}

// ProportionsPattern varies measured proportions.
type ProportionsPattern struct {
	Proportions *facets.Proportions
	WidthMM     float64
}

// Variables returns every proportion of the outline that is no count.
func (p ProportionsPattern) Variables() []Variable {
	var vs []Variable
	for _, k := range facets.ProportionsOf(p.Proportions.Outline) {
		v := Variable{Name: k.Name, Unit: k.Unit, Now: k.Usual, Low: k.Low, High: k.High, Step: 0.1}
		if given, ok := p.Proportions.Values[k.Name]; ok {
			v.Now = given.Mean
		}
		switch {
		case k.Unit == "degrees":
			v.Low, v.High = max(k.Low, v.Now-usualReach), min(k.High, v.Now+usualReach)
		case k.Name == "steps":
			v.Step = 1
		case k.Unit == "":
			v.Step = 0.01
		case k.Unit == "%" && v.Now > 0:
			v.Low, v.High = max(k.Low, v.Now*(1-usualShare)), min(k.High, v.Now*(1+usualShare))
		}
		vs = append(vs, v)
	}
	return vs
}

// Build makes the stone of the proportions with some of them changed.
func (p ProportionsPattern) Build(names []string, values []float64) (*facets.Stone, error) {
	return p.With(names, values).Stone(p.WidthMM)
}

// With returns the proportions with some of them changed.
func (p ProportionsPattern) With(names []string, values []float64) *facets.Proportions {
	changed := &facets.Proportions{Outline: p.Proportions.Outline, Values: map[string]facets.Spread{}}
	for name, v := range p.Proportions.Values {
		changed.Values[name] = v
	}
	for i, name := range names {
		changed.Values[name] = facets.Spread{Min: values[i], Mean: values[i], Max: values[i]}
	}
	return changed
}

// Widest returns how far a variable can go at all, whatever the usual limits are.
func Widest(p Pattern, v Variable) (low, high float64) {
	if q, ok := p.(ProportionsPattern); ok {
		for _, k := range facets.ProportionsOf(q.Proportions.Outline) {
			if k.Name == v.Name {
				return k.Low, k.High
			}
		}
	}
	switch v.Unit {
	case "degrees":
		return 0.1, 89.9
	case "%":
		return 0.1, 99
	}
	return math.Inf(-1), math.Inf(1)
}

// Choose returns the pattern's variables of the given names, in their order. Tiers
// joined by + move together: the first one's angle is the variable. An unknown name is
// an error that lists what can be varied.
func Choose(p Pattern, names ...string) ([]Variable, error) {
	all := p.Variables()
	known := make([]string, len(all))
	for i, v := range all {
		known[i] = v.Name
	}
	var chosen []Variable
	taken := map[string]bool{}
	for _, name := range names {
		var first Variable
		for n, part := range strings.Split(name, "+") {
			i := slices.Index(known, part)
			switch {
			case i < 0:
				return nil, fmt.Errorf("nothing named %q can be varied here; choose from %s", part, strings.Join(known, ", "))
			case taken[part]:
				return nil, fmt.Errorf("%q is named twice", part)
			case n == 0:
				first = all[i]
			case first.Unit != "degrees" || all[i].Unit != "degrees":
				return nil, fmt.Errorf("%q: only angles of a plan's tiers can be joined by +", name)
			}
			taken[part] = true
		}
		first.Name = name
		chosen = append(chosen, first)
	}
	return chosen, nil
}

// Mains returns what shapes the light most: the pavilion mains, the tiers that reach the
// stone's lowest point, and the crown mains, those that reach from the table to the
// girdle; or the largest tier of that side as seen from above where there are none such.
// Tiers of the same angle are joined by +. It returns fewer where there are none.
func Mains(p Pattern) []string {
	if _, ok := p.(ProportionsPattern); ok {
		return []string{"pavilion", "crown"}
	}
	stone, err := p.Build(nil, nil)
	if err != nil {
		return nil
	}
	low, high := math.Inf(1), math.Inf(-1)
	rim := map[int]bool{} // corners of the girdle
	for _, f := range stone.Facets {
		for _, c := range f.Corners {
			z := stone.Corners[c][2]
			low, high = min(low, z), max(high, z)
			if f.Side == facets.Girdle {
				rim[c] = true
			}
		}
	}
	near := (high - low) * 1e-6
	reaches := func(f *facets.Facet, end func(c int) bool) bool { return slices.ContainsFunc(f.Corners, end) }
	main := map[facets.Side]func(f *facets.Facet) bool{
		facets.Pavilion: func(f *facets.Facet) bool {
			return reaches(f, func(c int) bool { return stone.Corners[c][2] < low+near })
		},
		facets.Crown: func(f *facets.Facet) bool {
			return reaches(f, func(c int) bool { return stone.Corners[c][2] > high-near }) && reaches(f, func(c int) bool { return rim[c] })
		},
	}
	var names []string
	for _, side := range []facets.Side{facets.Pavilion, facets.Crown} {
		areas, mains := map[string]float64{}, map[string]bool{}
		for i := range stone.Facets {
			if f := &stone.Facets[i]; f.Side == side {
				areas[f.Tier] += f.Area * math.Abs(f.Normal[2])
				mains[f.Tier] = mains[f.Tier] || main[side](f)
			}
		}
		var best Variable
		found := false
		all := p.Variables()
		for _, v := range all {
			better := !found || mains[v.Name] && !mains[best.Name] || mains[v.Name] == mains[best.Name] && areas[v.Name] > areas[best.Name]
			if areas[v.Name] > 0 && v.Unit == "degrees" && better {
				best, found = v, true
			}
		}
		if !found {
			continue
		}
		joined := best.Name
		for _, v := range all {
			if v.Name != best.Name && v.Unit == "degrees" && areas[v.Name] > 0 && v.Now == best.Now && mains[v.Name] == mains[best.Name] {
				joined += "+" + v.Name
			}
		}
		names = append(names, joined)
	}
	return names
}
