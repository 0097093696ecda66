package tune

import (
	"context"
	"errors"
	"fmt"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/stat"

	"pavilight/facets"
	"pavilight/trace"
)

// pyramid is a plan of few facets: a square girdle, four pavilion and four crown facets.
const pyramid = `plan = 1
name = "Small Tent"
material = "quartz"
width_mm = 6
gear = 96

[[tier]]
name = "G"
side = "girdle"
index = 0
fold = 4
distance = 1

[[tier]]
name = "P"
side = "pavilion"
angle = 43
index = 0
fold = 4
level = 0

[[transfer]]

[[tier]]
name = "C"
side = "crown"
angle = 40
index = 0
fold = 4
level = 0.06

[[tier]]
name = "T"
side = "table"
distance = 0.5
`

func readPlan(t testing.TB, text string) *facets.Plan {
	t.Helper()
	p, err := facets.ReadPlan(strings.NewReader(text), "test.toml")
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// A stone cut without errors is the plan's, and each error moves what it should by as
// much as it should.
func TestCutWithOneError(t *testing.T) {
	for _, name := range []string{"round.toml", "oval.toml", "step.toml", "triangle.toml", "cushion.toml", "twist.toml"} {
		b, err := newBench(samplePlan(t, name))
		if err != nil {
			t.Fatal(err)
		}
		none := slipsOf(b)
		c, err := b.cut(UsualMachine(), &none)
		if err != nil {
			t.Fatal(err)
		}
		want := b.solved.Stone
		if len(c.stone.Facets) != len(want.Facets) || math.Abs(c.stone.Volume()-want.Volume()) > 1e-9*want.Volume() || c.lost != 0 {
			t.Errorf("%s: %d facets of %v mm³ without errors, want %d of %v", name, len(c.stone.Facets), c.stone.Volume(), len(want.Facets), want.Volume())
		}
		if c.gapMM > 1e-6 {
			t.Errorf("%s: a gap of %g mm without errors", name, c.gapMM)
		}
	}

	b, err := newBench(readPlan(t, pyramid))
	if err != nil {
		t.Fatal(err)
	}
	m := Machine{DopTilt: facets.Degree, Twist: facets.Degree, ShiftMM: 0.1, Angle: facets.Degree, Index: facets.Degree, OvercutMM: 0.2}
	tier := map[string]int{"G": 0, "P": 1, "C": 2, "T": 3}
	facet := func(c *cutting, name string, azimuth float64) *facets.Facet {
		for i := range c.stone.Facets {
			f := &c.stone.Facets[i]
			if f.Tier == name && (name == "T" || f.Normal.Dot(mgl64.Vec3{math.Cos(azimuth), math.Sin(azimuth), 0}) > 0.6) {
				return f
			}
		}
		t.Fatalf("no facet of %s at %v", name, azimuth)
		return nil
	}
	cut := func(change func(s *slips)) *cutting {
		s := slipsOf(b)
		change(&s)
		c, err := b.cut(m, &s)
		if err != nil {
			t.Fatal(err)
		}
		return c
	}
	near := func(what string, got, want float64) {
		t.Helper()
		if math.Abs(got-want) > 1e-9 {
			t.Errorf("%s: %v, want %v", what, got, want)
		}
	}
	whole := cut(func(*slips) {})
	deg := facets.Degree.Radians()

	over := cut(func(s *slips) { s.overcut[tier["P"]][0] = 0.5 })
	near("overcut", facet(whole, "P", 0).Distance-facet(over, "P", 0).Distance, 0.1)
	near("another facet of the tier", facet(whole, "P", math.Pi).Distance, facet(over, "P", math.Pi).Distance)

	steep := cut(func(s *slips) { s.angle[tier["C"]] = 1 })
	near("angle", math.Acos(facet(steep, "C", 0).Normal[2]), 41*deg)
	turn := cut(func(s *slips) { s.index[tier["C"]] = 1 })
	near("index", math.Atan2(facet(turn, "C", 0).Normal[1], facet(turn, "C", 0).Normal[0]), deg)

	// The crown bears the table and stays; the side below moves against it.
	moved := cut(func(s *slips) { s.shift[0] = 1 })
	near("shift of the girdle", facet(moved, "G", 0).Distance, 3+0.1)
	near("shift behind", facet(moved, "G", math.Pi).Distance, 3-0.1)
	near("the crown stays", facet(moved, "C", 0).Distance, facet(whole, "C", 0).Distance)
	twisted := cut(func(s *slips) { s.twist = 1 })
	near("twist", math.Atan2(facet(twisted, "P", 0).Normal[1], facet(twisted, "P", 0).Normal[0]), deg)
	tilted := cut(func(s *slips) { s.tilt[1] = 1 }) // about +y, which takes +x down
	near("tilt", facet(tilted, "G", 0).Normal[2], -math.Sin(deg))
	near("tilt keeps sizes", facet(tilted, "G", 0).Distance-facet(tilted, "G", 0).Normal[2]*b.about[2], 3)

	// Two girdle and two pavilion facets meet at each corner of the girdle. With one main
	// deeper by d, its edge on the next girdle facet begins d/sin 43° along the girdle and
	// ends d/cos 43° up it; at the culet the edge is only d/sin 43° long.
	const d = 0.1
	near("edge at the girdle", over.edge, d/(math.Sin(43*deg)*math.Cos(43*deg)))
	// Four planes through a point but one: three meet, the fourth misses by d. Least squares
	// shares it out by the one linear relation that the normals obey, here
	// sin 43° (G0 - G90) - (P0 - P90) = 0, so that the misses are in proportion to its
	// coefficients: ± sin 43° and ± 1, of squares 2 (1 + sin² 43°) in sum; the spread is 2 of
	// the largest. At the culet the relation is P0 - P90 + P180 - P270 = 0: d/4 each.
	sin := math.Sin(43 * deg)
	near("miss", over.gapMM, max(2*d/(2*(1+sin*sin)), 2*d/4))
}

// The standard errors that a spread claims are those found when the whole is repeated
// (brute force), for the mean and for the deviation, with noise in every look.
func TestToleranceErrorsByBruteForce(t *testing.T) {
	p := &ToleranceProblem{
		Plan: readPlan(t, pyramid), Material: material(t, "quartz"), Case: Case{Surrounding: trace.Around(material(t, "air"))[0]},
		Machine: UsualMachine(), Draws: 40, Workers: 2,
	}
	const noise = 0.002
	p.observe = func(_ context.Context, s *facets.Stone, seed uint64) ([2]float64, error) {
		v := s.Volume()
		h := fnv.New64a()
		fmt.Fprint(h, seed, v)
		rng := rand.New(rand.NewPCG(h.Sum64(), 1))
		return [2]float64{v/100 + noise*rng.NormFloat64(), s.Corners[0].Len()}, nil
	}
	b, err := newBench(p.Plan)
	if err != nil {
		t.Fatal(err)
	}
	// The truth, from many draws without noise.
	var volumes []float64
	for i := range 3000 {
		s := b.draw(999, i)
		c, err := b.cut(p.Machine, &s)
		if err != nil {
			t.Fatal(err)
		}
		volumes = append(volumes, c.stone.Volume()/100)
	}
	mean, deviation := stat.MeanStdDev(volumes, nil)
	var means, deviations, meanErrors, deviationErrors []float64
	const repeats = 150
	for r := range repeats {
		p.Seed = uint64(r + 1)
		b, err := newBench(p.Plan)
		if err != nil {
			t.Fatal(err)
		}
		draws, failed, err := p.draws(context.Background(), b, p.Machine, p.Draws, func(float64) {})
		if err != nil || failed > 0 {
			t.Fatal(err, failed)
		}
		s := spread(draws, 0, func(d *Draw) [2]float64 { return [2]float64{d.looks[0][0], d.looks[1][0]} })
		means, deviations = append(means, s.Mean), append(deviations, s.Deviation*s.Deviation)
		meanErrors = append(meanErrors, s.MeanError)
		deviationErrors = append(deviationErrors, 2*s.Deviation*s.DeviationError) // of the square
	}
	check := func(what string, values, claimed []float64, truth float64) {
		t.Helper()
		m, scatter := stat.MeanStdDev(values, nil)
		claim := stat.Mean(claimed, nil)
		if off := math.Abs(m-truth) / (scatter / math.Sqrt(repeats)); off > 4 {
			t.Errorf("%s: mean %.4g over the repeats, want %.4g: %.1f standard errors off", what, m, truth, off)
		}
		// A scatter of 150 is known to 6 %; 4 of those are allowed.
		if math.Abs(claim/scatter-1) > 0.24 {
			t.Errorf("%s: standard error %.4g claimed, %.4g found by repeating", what, claim, scatter)
		}
	}
	check("mean", means, meanErrors, mean)
	check("variance", deviations, deviationErrors, deviation*deviation)
}

// The regression finds slopes and single spreads that are put in, within its errors.
func TestCauses(t *testing.T) {
	b, err := newBench(readPlan(t, pyramid))
	if err != nil {
		t.Fatal(err)
	}
	m := UsualMachine()
	const (
		slope = -0.3  // per degree of P's angle
		bend  = 0.004 // per square of the dop tilt's unit, both axes
		deep  = 2.0   // per mm of C's overcut
		noise = 0.004
	)
	rng := rand.New(rand.NewPCG(5, 5))
	var draws []Draw
	for i := range 1500 {
		s := b.draw(3, i)
		over := 0.0
		for _, u := range s.overcut[2] {
			over += m.OvercutMM * u / 4
		}
		y := 0.7 + slope*m.Angle.Degrees()*s.angle[1] - bend*(s.tilt[0]*s.tilt[0]+s.tilt[1]*s.tilt[1]) + deep*over + noise*rng.NormFloat64()
		draws = append(draws, Draw{Return: y, slips: s})
	}
	list, unknown := causes(b, m, draws)
	find := func(what, tier string) Cause {
		for _, c := range list {
			if c.What == what && c.Tier == tier {
				return c
			}
		}
		t.Fatalf("no cause %s %s", what, tier)
		return Cause{}
	}
	within := func(what string, got, se, want float64) {
		t.Helper()
		if !(se > 0) || math.Abs(got-want) > 4*se || se > 0.2*math.Abs(want)+1e-3 {
			t.Errorf("%s: %.5f ± %.5f, want %.5f", what, got, se, want)
		}
	}
	p, c, tilt, none := find("angle", "P"), find("overcut", "C"), find("dop tilt", ""), find("index", "C")
	within("slope of P", p.Slope, p.SlopeError, slope)
	within("spread by P", p.Alone, p.AloneError, math.Abs(slope)*m.Angle.Degrees())
	within("slope of overcut", c.Slope, c.SlopeError, deep)
	within("spread by overcut", c.Alone, c.AloneError, deep*m.OvercutMM/math.Sqrt(12*4))
	within("spread by tilt", tilt.Alone, tilt.AloneError, bend*2) // two squares of variance 2 each
	if none.Alone > 3*none.AloneError {
		t.Errorf("an error that does nothing makes %.5f ± %.5f", none.Alone, none.AloneError)
	}
	total := noise*noise + slope*slope*0.01 + 4*bend*bend + deep*deep*m.OvercutMM*m.OvercutMM/48
	if math.Abs(unknown-noise*noise/total) > 0.05 {
		t.Errorf("%.3f of the variance is left over, want %.3f", unknown, noise*noise/total)
	}
	if list[0].What != "angle" || list[0].Tier != "P" {
		t.Errorf("the first cause is %s %s", list[0].What, list[0].Tier)
	}
}

// The whole with real light: repeatable for any number of workers, and smaller errors
// lose less.
func TestTolerate(t *testing.T) {
	p := &ToleranceProblem{
		Plan: readPlan(t, pyramid), Material: material(t, "quartz"), Case: Case{Surrounding: trace.Around(material(t, "air"))[0]},
		Head: 10 * facets.Degree, Machine: UsualMachine().scaled(2), Draws: leastDraws, Seed: 1, Workers: 1,
	}
	one, err := Tolerate(context.Background(), p, nil)
	if err != nil {
		t.Fatal(err)
	}
	p.Workers = 3
	three, err := Tolerate(context.Background(), p, nil)
	if err != nil {
		t.Fatal(err)
	}
	if one.Return != three.Return || one.Needed != three.Needed || len(one.Draws) != leastDraws {
		t.Errorf("one worker: %+v, three: %+v", one.Return, three.Return)
	}
	if !one.Complete || one.Return.Deviation <= 0 || one.GapMM.Mean <= 0.01 || one.GapMM.Mean > 0.2 {
		t.Errorf("return %+v, gap %+v", one.Return, one.GapMM)
	}
	for i, s := range one.Scales[1:] {
		if s.Factor <= one.Scales[i].Factor {
			t.Error("the scales are out of order")
		}
	}
	first, last := one.Scales[0], one.Scales[len(one.Scales)-1]
	if !(first.Loss < last.Loss) {
		t.Errorf("errors of %v lose %.4f, of %v %.4f", first.Factor, first.Loss, last.Factor, last.Loss)
	}
	if n := one.Needed; n > 0 && math.Abs(one.Precise.DopTilt.Degrees()-0.4*n) > 1e-12 {
		t.Errorf("precision %v at %v", one.Precise, n)
	}
}

func TestToleranceFaults(t *testing.T) {
	good := ToleranceProblem{
		Plan: readPlan(t, pyramid), Material: material(t, "quartz"), Case: Case{Surrounding: trace.Around(material(t, "air"))[0]},
		Machine: UsualMachine(),
	}
	for name, change := range map[string]func(*ToleranceProblem){
		"few draws":   func(p *ToleranceProblem) { p.Draws = 3 },
		"NaN":         func(p *ToleranceProblem) { p.Machine.Angle = facets.Angle(math.NaN()) },
		"negative":    func(p *ToleranceProblem) { p.Machine.OvercutMM = -1 },
		"loss":        func(p *ToleranceProblem) { p.Loss = 2 },
		"no material": func(p *ToleranceProblem) { p.Material = nil },
	} {
		p := good
		change(&p)
		if _, err := Tolerate(context.Background(), &p, nil); err == nil {
			t.Errorf("%s passes", name)
		}
	}
	p := good
	p.Machine.OvercutMM = 9 // nothing is left of the stone
	if _, err := Tolerate(context.Background(), &p, nil); err == nil || !strings.Contains(err.Error(), "smaller errors") {
		t.Errorf("a stone that is cut away: %v", err)
	}
	ctx, cancel := context.WithCancelCause(context.Background())
	stop := errors.New("stop")
	p = good
	p.Draws, p.Workers = 100, 1
	p.observe = func(context.Context, *facets.Stone, uint64) ([2]float64, error) { return [2]float64{0.5, 0}, nil }
	got, err := Tolerate(ctx, &p, func(done float64) {
		if done > 0.3 {
			cancel(stop)
		}
	})
	if !errors.Is(err, stop) || got == nil || len(got.Draws) < leastDraws || got.Complete {
		t.Errorf("stopped: %v, %v", got, err)
	}
}

// BenchmarkTolerance is held against 30 s on two cores.
func BenchmarkTolerance(b *testing.B) {
	p := &ToleranceProblem{
		Plan: samplePlan(b, "round.toml"), Material: material(b, "corundum"), Case: Case{Surrounding: trace.Around(material(b, "air"))[0]},
		Head: 10 * facets.Degree, Machine: UsualMachine(), Seed: 1,
	}
	for b.Loop() {
		t, err := Tolerate(context.Background(), p, nil)
		if err != nil {
			b.Fatal(err)
		}
		b.ReportMetric(t.Return.Deviation, "deviation")
		b.ReportMetric(t.Return.DeviationError, "error")
		b.ReportMetric(t.Unknown, "unknown")
		b.ReportMetric(t.Needed, "needed")
	}
}
