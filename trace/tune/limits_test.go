package tune

import (
	"context"
	"errors"
	"math"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// Every limit refuses the stone that breaks it by a hair, in words, and takes the one
// that keeps it by a hair. The round plan's own measures are the edge.
func TestLimits(t *testing.T) {
	p := roundProblem(t)
	p.Limits = Limits{}
	stone, err := p.Pattern.Build(nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	m := stone.Measure()
	carats := m.Carats(p.Material.Density)
	_, narrow := narrowest(stone)
	air := material(t, "air")
	// Critical angle at corundum's lower index at the D line, 1.760 (extraordinary ray).
	indices, err := p.Material.Indices(589.3)
	if err != nil {
		t.Fatal(err)
	}
	critical := facets.Angle(math.Asin(1 / indices.Least()))
	up := [3]float64{0, 0, 1}
	rough := &facets.Rough{Shape: facets.Box, Size: mgl64.Vec3{12, 12, 9}}
	fit, err := rough.Fit(stone)
	if err != nil {
		t.Fatal(err)
	}
	const hair = 1e-3
	tests := []struct {
		name  string
		set   func(l *Limits, by float64) // by: how much the stone keeps it, as a share; below 0 it breaks it
		words string
		rough *facets.Rough
	}{
		{"girdle", func(l *Limits, by float64) { l.GirdleMM = m.GirdleMM.Min * (1 - by) }, "the girdle", nil},
		{"depth", func(l *Limits, by float64) { l.MostDepthPercent = m.DepthPercent * (1 + by) }, "the depth", nil},
		{"crown", func(l *Limits, by float64) { l.MostCrownPercent = m.CrownHeightPercent * (1 + by) }, "the crown", nil},
		{"weight", func(l *Limits, by float64) { l.LeastCarats = carats * (1 - by) }, "the weight", nil},
		{"weight from the rough", func(l *Limits, by float64) { l.LeastCarats = carats * math.Pow(fit.Scale, 3) * (1 - by) }, "the weight", rough},
		{"yield", func(l *Limits, by float64) { l.LeastYield = fit.Yield * (1 - by) }, "the yield", rough},
		{"facet", func(l *Limits, by float64) { l.LeastFacetMM = narrow * (1 - by) }, "the narrowest facet", nil},
		{"mains", func(l *Limits, by float64) {
			l.MarginIn, l.MainMargin = air, 41.5*facets.Degree-critical-facets.Angle(by)
		}, "pavilion main P1", nil},
		{"breaks", func(l *Limits, by float64) {
			l.MarginIn, l.BreakMargin = air, 42.7*facets.Degree-critical-facets.Angle(by)
		}, "pavilion break P2", nil},
		{"cleavage", func(l *Limits, by float64) {
			tilted := mgl64.Vec3{math.Sin(0.1), 0, math.Cos(0.1)} // 0.1 from the table
			l.CleavageNormal, l.CleavageMargin = (*[3]float64)(&tilted), facets.Angle(0.1-by)
		}, "from the cleavage", nil},
		{"cleavage along the table", func(l *Limits, by float64) {
			if l.CleavageNormal = &up; by > 0 {
				l.CleavageNormal = nil
				return
			}
			l.CleavageMargin = UsualCleavageMargin
		}, "a facet of T lies", nil},
	}
	for _, test := range tests {
		for _, by := range []float64{-hair, hair} {
			q := *p
			q.Rough = test.rough
			test.set(&q.Limits, by)
			j, err := newJudge(&q)
			if err != nil {
				t.Fatalf("%s: %v", test.name, err)
			}
			got, err := j.try(context.Background(), j.start(), glance)
			if err != nil {
				t.Fatal(err)
			}
			words := strings.Join(got.Words, "; ")
			if got.Fit != (by > 0) || !got.Fit && (!strings.Contains(words, test.words) || !(got.Short > 0)) {
				t.Errorf("%s by %g: fit %v, %q", test.name, by, got.Fit, words)
			}
		}
	}
}

var glance = effort{rays: 1000}

// What a stone from a piece of rough weighs is its share of the rough's own weight, at 0.2 g
// a carat.
func TestWeightFromRough(t *testing.T) {
	p := *roundProblem(t)
	p.Limits = Limits{}
	p.Goal.Aims = []Aim{{Measure: Weight, Weight: 1}}
	p.Rough = &facets.Rough{Shape: facets.Box, Size: mgl64.Vec3{12, 12, 9}}
	stone, err := p.Pattern.Build(nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	fit, err := p.Rough.Fit(stone)
	if err != nil {
		t.Fatal(err)
	}
	j, err := newJudge(&p)
	if err != nil {
		t.Fatal(err)
	}
	got, err := j.try(context.Background(), j.start(), glance)
	if err != nil || !got.Seen {
		t.Fatalf("%+v, %v", got, err)
	}
	want := 12 * 12 * 9 * fit.Yield * p.Material.Density / 200
	if math.Abs(got.Measures[0]/want-1) > 1e-9 {
		t.Errorf("weighs %g ct, want %g", got.Measures[0], want)
	}
}

// The outline and the ratio of length to width are kept where that is asked for.
func TestKeepRatio(t *testing.T) {
	plan := samplePlan(t, "step.toml")
	vs, err := Choose(PlanPattern{plan}, "G2.distance")
	if err != nil {
		t.Fatal(err)
	}
	p := &Problem{Pattern: PlanPattern{plan}, Variables: vs, Material: material(t, "beryl"), Goal: inAir(t), Limits: Limits{KeepRatio: 0.02}}
	j, err := newJudge(p)
	if err != nil {
		t.Fatal(err)
	}
	for value, want := range map[float64]bool{1.3: true, 1.31: true, 1.35: false} {
		got, err := j.try(context.Background(), []float64{value}, glance)
		if err != nil {
			t.Fatal(err)
		}
		if got.Fit != want {
			t.Errorf("length %g: fit %v, want %v (%v)", value, got.Fit, want, got.Words)
		}
	}
}

// What means nothing is refused before the first stone, all at once and in words.
func TestProblemFaults(t *testing.T) {
	air := material(t, "air")
	for name, test := range map[string]struct {
		change func(p *Problem)
		words  string
	}{
		"nothing varies":    {func(p *Problem) { p.Variables = nil }, "nothing may be varied"},
		"wrong way round":   {func(p *Problem) { p.Variables[0].Low = 44 }, "wrong way round"},
		"not finite":        {func(p *Problem) { p.Variables[0].High = math.NaN() }, "not finite"},
		"step":              {func(p *Problem) { p.Variables[0].Step = -1 }, "a step of -1"},
		"no multiple":       {func(p *Problem) { p.Variables[0].Low, p.Variables[0].High, p.Variables[0].Step = 40.1, 40.4, 0.5 }, "no multiple"},
		"no goal":           {func(p *Problem) { p.Goal.Aims = nil }, "no goal"},
		"no weight":         {func(p *Problem) { p.Goal.Aims = []Aim{{LightReturn, 0}} }, "has weight 0"},
		"twice":             {func(p *Problem) { p.Goal.Aims = []Aim{{Leakage, -1}, {Leakage, -2}} }, "named twice"},
		"no surrounding":    {func(p *Problem) { p.Goal.Cases = nil }, "no surrounding"},
		"no material":       {func(p *Problem) { p.Material = nil }, "name a material"},
		"margin in nothing": {func(p *Problem) { p.Limits.MainMargin = 0.1 }, "needs the medium"},
		"no critical angle": {func(p *Problem) { p.Limits.MarginIn, p.Material = p.Material, air }, "no critical angle"},
		"crown over depth":  {func(p *Problem) { p.Limits.MostCrownPercent, p.Limits.MostDepthPercent = 60, 20 }, "raise the other"},
		"negative girdle":   {func(p *Problem) { p.Limits.GirdleMM = -1 }, "girdle's least thickness is -1"},
		"yield of nothing":  {func(p *Problem) { p.Limits.LeastYield = 0.3 }, "needs the rough"},
		"yield over 1":      {func(p *Problem) { p.Limits.LeastYield, p.Rough = 1.2, &facets.Rough{} }, "no stone weighs more"},
		"no cleavage":       {func(p *Problem) { p.Limits.CleavageMargin = 0.1 }, "direction of the cleavage"},
		"cleavage's length": {func(p *Problem) { p.Limits.CleavageNormal = &[3]float64{1, 1, 0} }, "no unit vector"},
	} {
		p := roundProblem(t)
		test.change(p)
		if _, err := Search(context.Background(), p, nil, nil); err == nil || !strings.Contains(err.Error(), test.words) {
			t.Errorf("%s: %v, want words of %q", name, err, test.words)
		}
	}
	p := roundProblem(t)
	p.Variables[0].Low, p.Goal.Cases, p.Limits.GirdleMM = 44, nil, math.Inf(1)
	if _, err := Search(context.Background(), p, nil, nil); err == nil || strings.Count(err.Error(), "\n") != 2 {
		t.Errorf("three faults are told as %q", err)
	}
}

// Limits that exclude every solid end in words that name the nearest stone and why.
func TestNothingFits(t *testing.T) {
	p := roundProblem(t)
	p.Limits.GirdleMM = 3
	p.Variables[0].Step, p.Variables[1].Step = 0.5, 1
	_, err := Search(context.Background(), p, nil, nil)
	var none *NothingFitsError
	if !errors.As(err, &none) || !strings.Contains(err.Error(), "the girdle is") || !strings.Contains(err.Error(), "P1 ") {
		t.Errorf("%v", err)
	}
	p = roundProblem(t)
	for i := range p.Variables {
		p.Variables[i].Low, p.Variables[i].High = 60, 65
	}
	if _, err = Search(context.Background(), p, nil, nil); !errors.As(err, &none) || !strings.Contains(err.Error(), "tier") {
		t.Errorf("no solid at all: %v", err)
	}
}
