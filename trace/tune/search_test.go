package tune

import (
	"context"
	"flag"
	"math"
	"testing"
	"time"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

var soak = flag.Bool("soak", false, "also compare the search with a fine sweep, which takes minutes")

// samplePlan reads one of the sample plans.
func samplePlan(t testing.TB, name string) *facets.Plan {
	t.Helper()
	f, err := testdata.Plans().Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	p, err := facets.ReadPlan(f, name)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

func material(t testing.TB, key string) *gems.Material {
	t.Helper()
	m, err := gems.Find(key)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// inAir is the goal of light return, face-up in air.
func inAir(t testing.TB, aims ...Aim) Goal {
	if len(aims) == 0 {
		aims = []Aim{{LightReturn, 1}}
	}
	return Goal{Aims: aims, Cases: []Case{{Surrounding: trace.Around(material(t, "air"))[0]}}}
}

// roundProblem is the search that has to be fast: two angles of the round plan.
func roundProblem(t testing.TB) *Problem {
	p := samplePlan(t, "round.toml")
	vs, err := Choose(PlanPattern{p}, "P1", "C2")
	if err != nil {
		t.Fatal(err)
	}
	vs[0].Low, vs[0].High, vs[0].Step = 36, 43, 0.05
	vs[1].Low, vs[1].High, vs[1].Step = 24, 40, 0.05
	return &Problem{
		Pattern: PlanPattern{p}, Variables: vs, Material: material(t, "corundum"), Goal: inAir(t),
		Limits: Limits{GirdleMM: 0.1, LeastFacetMM: UsualFacetMM}, Head: 10 * facets.Degree, Seed: 1,
	}
}

// BenchmarkTwoAngles is held against 10 s on two cores.
func BenchmarkTwoAngles(b *testing.B) {
	p := roundProblem(b)
	for b.Loop() {
		o, err := Search(context.Background(), p, nil, nil)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(o.Best.Score, "return")
		b.ReportMetric(float64(o.Tried), "stones")
	}
}

// TestFineSweep compares the search with a sweep of all steps: everywhere on every
// fourth step, and on every step wherever the sweep comes near its best.
func TestFineSweep(t *testing.T) {
	if !*soak {
		t.Skip("slow; run with -soak")
	}
	p := roundProblem(t)
	o, err := Search(context.Background(), p, nil, nil)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("search: %v %.5f ± %.5f, %d stones", o.Best.Values, o.Best.Score, o.Best.Error, o.Tried)
	p.Seed = 77 // other points than the search's
	j, err := newJudge(p)
	if err != nil {
		t.Fatal(err)
	}
	ctx := context.Background()
	began := time.Now()
	const coarse = 4
	var grid [][]float64
	a, b := p.Variables[0], p.Variables[1]
	for i := 0; a.Low+float64(i)*a.Step <= a.High+1e-9; i += coarse {
		for k := 0; b.Low+float64(k)*b.Step <= b.High+1e-9; k += coarse {
			grid = append(grid, []float64{a.round(a.Low + float64(i)*a.Step), b.round(b.Low + float64(k)*b.Step)})
		}
	}
	seen, err := j.tryAll(ctx, grid, rough)
	if err != nil {
		t.Fatal(err)
	}
	sortByMerit(seen)
	t.Logf("coarse sweep: %d stones, best %v %.5f, %v", len(seen), seen[0].Values, seen[0].Score, time.Since(began))
	var all [][]float64
	for _, s := range seen {
		if s.merit() < seen[0].merit()-0.012 {
			break
		}
		for i := -coarse / 2; i <= coarse/2; i++ {
			for k := -coarse / 2; k <= coarse/2; k++ {
				all = append(all, []float64{a.round(s.Values[0] + float64(i)*a.Step), b.round(s.Values[1] + float64(k)*b.Step)})
			}
		}
	}
	all = distinct(all)
	if seen, err = j.tryAll(ctx, all, fine); err != nil {
		t.Fatal(err)
	}
	sortByMerit(seen)
	all = nil
	for _, s := range seen[:min(40, len(seen))] {
		all = append(all, s.Values)
	}
	t.Logf("fine sweep: %d stones, best %v %.5f, %v", len(seen), seen[0].Values, seen[0].Score, time.Since(began))
	close := effort{rays: 800_000}
	if seen, err = j.tryAll(ctx, all, close); err != nil {
		t.Fatal(err)
	}
	sortByMerit(seen)
	for _, s := range seen[:8] {
		t.Logf("  %v %.5f ± %.5f", s.Values, s.Score, s.Error)
	}
	best := seen[0]
	mine, err := j.try(ctx, o.Best.Values, close)
	if err != nil {
		t.Fatal(err)
	}
	t.Logf("sweep's best %v %.5f ± %.5f, the search's %v %.5f", best.Values, best.Score, best.Error, mine.Values, mine.Score)
	const step = 0.05 + 1e-9
	for i := range best.Values {
		if d := math.Abs(best.Values[i] - mine.Values[i]); d > step && best.Score-mine.Score > certain(scramblingFreedom)*math.Hypot(best.Error, mine.Error) {
			t.Errorf("%s: the search is off by %.2f°, and that costs %.5f of light return", p.Variables[i].Name, d, best.Score-mine.Score)
		}
	}
}

// The search improves sample plans of four outlines by more than the joint error of
// start and best allows for chance, over the one angle that matters most.
func TestImprovesSamplePlans(t *testing.T) {
	for _, test := range []struct{ name, material string }{
		{"round.toml", "corundum"}, {"cushion.toml", "chrysoberyl"}, {"step.toml", "beryl"}, {"triangle.toml", "spinel"},
	} {
		plan := samplePlan(t, test.name)
		main := Mains(PlanPattern{plan})[0]
		vs, err := Choose(PlanPattern{plan}, main)
		if err != nil {
			t.Fatal(err)
		}
		vs[0].Low, vs[0].High, vs[0].Step = vs[0].Now-3, vs[0].Now+1.5, 0.5
		o, err := Search(context.Background(), &Problem{
			Pattern: PlanPattern{plan}, Variables: vs, Material: material(t, test.material), Goal: inAir(t), Head: 10 * facets.Degree, Seed: 1,
		}, nil, nil)
		if err != nil {
			t.Errorf("%s: %v", test.name, err)
			continue
		}
		if !o.Better || o.Gain < 4*o.GainError {
			t.Errorf("%s, %s: %.4f ± %.4f from %v to %v", test.name, main, o.Gain, o.GainError, o.Start.Values, o.Best.Values)
		}
	}
}

// Student's t at 1 in 1,000, one-sided, as tables print it.
func TestCertain(t *testing.T) {
	for freedom, want := range map[float64]float64{3: 10.215, 7: 4.785, 15: 3.733} {
		if got := certain(freedom); math.Abs(got-want) > 5.1e-4 {
			t.Errorf("%g degrees of freedom: %.4f, want %.3f (table of Student's t)", freedom, got, want)
		}
	}
}
