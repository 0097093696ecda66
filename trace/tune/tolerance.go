package tune

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"slices"

	"gonum.org/v1/gonum/stat"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// ToleranceProblem asks what a machine's errors cost a plan.
type ToleranceProblem struct {
	Plan     *facets.Plan
	Material *gems.Material
	Case     Case // how the stone is seen; its light does not count
	Head     facets.Angle
	Machine  Machine
	Draws    int     // stones cut with errors, 20 to MostDraws; 0 means 1,000
	Loss     float64 // of light return that is put up with in 95 stones of 100; 0 means UsualLoss
	Seed     uint64
	Workers  int // 0 for all cores

	// observe returns the light return and the leaky area of a stone, seen with the points
	// of a seed; a plain function in tests.
	observe func(ctx context.Context, stone *facets.Stone, seed uint64) ([2]float64, error)
}

// MostDraws bounds the draws of a tolerance.
const MostDraws = 100_000

// UsualLoss is a loss of light return that is put up with, a choice of our own.
const UsualLoss = 0.01

// Spread tells how a number differs from stone to stone. The noise of tracing is not in
// Deviation: each stone is traced twice with independent points, and the deviation
// is taken from what the two have in common.
type Spread struct {
	Plan                      float64 // of the stone without errors
	Mean, MeanError           float64
	Deviation, DeviationError float64 // standard deviation, and its standard error
	Low, Median, High         float64 // below which 5, 50 and 95 of 100 stones lie
}

// Draw is one stone cut with errors.
type Draw struct {
	Return float64 // light return, the mean of two looks
	Leaky  float64 // leaky area, likewise
	// GapMM is by how much facets that should share a corner miss it, square to the facets:
	// what would have to be cut off to mend it. EdgeMM is the longest edge that is seen
	// there instead; where facets lie flat to each other it is far longer. Both are the
	// worst of the stone.
	GapMM, EdgeMM float64
	Lost          int // facets that the others took off

	looks [2][2]float64 // by look: light return, leaky area
	slips slips
}

// Tolerance is what a machine's errors cost a plan.
type Tolerance struct {
	Machine  Machine
	Draws    []Draw
	Return   Spread // of the light return
	Leaky    Spread // of the leaky area
	GapMM    Spread // of the deepest miss at a meet point
	EdgeMM   Spread // of the longest edge in place of a meet point
	Losing   int    // draws in which some facet is gone
	Failed   int    // draws that gave no solid at all, counted in no spread
	Causes   []Cause
	Unknown  float64 // share of the return's variance that no single cause explains
	Loss     float64 // see Needed
	Scales   []Scale // what larger and smaller errors would cost
	Needed   float64 // by how much all errors may be multiplied, so that 95 stones of 100 lose no more than Loss; 0 if none is small enough
	Precise  Machine // the machine's errors multiplied by Needed
	Complete bool    // false where it was stopped before its end
}

// Scale is what errors cost that are all larger or smaller by a factor.
type Scale struct {
	Factor float64
	Loss   float64 // of light return, that 95 stones of 100 stay under
	Draws  int
}

// progress of a tolerance: the draws, then the scales.
const mostDone = 0.7

// Tolerate draws machine errors many times and traces every stone. It calls report,
// which may be nil, with the share that is done. When ctx is cancelled it returns what
// is known of the draws so far (nil if that is too little) and the cause.
func Tolerate(ctx context.Context, p *ToleranceProblem, report func(done float64)) (*Tolerance, error) {
	q := *p
	if q.Draws == 0 {
		q.Draws = 1000
	}
	if q.Loss == 0 {
		q.Loss = UsualLoss
	}
	if q.Workers == 0 {
		q.Workers = runtime.GOMAXPROCS(0)
	}
	if err := q.check(); err != nil {
		return nil, err
	}
	if q.observe == nil {
		q.observe = q.trace
	}
	b, err := newBench(q.Plan)
	if err != nil {
		return nil, err
	}
	tell := func(done float64) {
		if report != nil {
			report(done)
		}
	}
	none := slipsOf(b)
	nominal := Draw{slips: none}
	if err := q.look(ctx, b.solved.Stone, &nominal); err != nil {
		return nil, err
	}
	t := &Tolerance{Machine: q.Machine, Loss: q.Loss}
	var stopped error
	t.Draws, t.Failed, stopped = q.draws(ctx, b, q.Machine, q.Draws, func(done float64) { tell(mostDone * done) })
	if len(t.Draws) < leastDraws {
		if stopped != nil {
			return nil, stopped
		}
		return nil, fmt.Errorf("%d of %d stones cut with these errors are no closed solid; use smaller errors", t.Failed, q.Draws)
	}
	for i := range t.Draws {
		if t.Draws[i].Lost > 0 {
			t.Losing++
		}
	}
	t.Return = spread(t.Draws, nominal.Return, func(d *Draw) [2]float64 { return [2]float64{d.looks[0][0], d.looks[1][0]} })
	t.Leaky = spread(t.Draws, nominal.Leaky, func(d *Draw) [2]float64 { return [2]float64{d.looks[0][1], d.looks[1][1]} })
	t.GapMM = spread(t.Draws, 0, func(d *Draw) [2]float64 { return [2]float64{d.GapMM, d.GapMM} })
	t.EdgeMM = spread(t.Draws, 0, func(d *Draw) [2]float64 { return [2]float64{d.EdgeMM, d.EdgeMM} })
	t.Causes, t.Unknown = causes(b, q.Machine, t.Draws)
	if stopped != nil {
		return t, stopped
	}
	if err := q.precision(ctx, b, t, nominal.Return, func(done float64) { tell(mostDone + (1-mostDone)*done) }); err != nil {
		return t, err
	}
	t.Complete = true
	tell(1)
	return t, nil
}

// leastDraws is the fewest stones that a spread is told of.
const leastDraws = 20

func (p *ToleranceProblem) check() error {
	var faults []error
	if p.Draws < leastDraws || p.Draws > MostDraws {
		faults = append(faults, fmt.Errorf("%d draws: use %d to %d", p.Draws, leastDraws, MostDraws))
	}
	if !(p.Loss > 0 && p.Loss < 1) {
		faults = append(faults, fmt.Errorf("a loss of %g: give a share of the light between 0 and 1", p.Loss))
	}
	if p.Material == nil || p.Case.Surrounding.Medium == nil {
		faults = append(faults, errors.New("name the stone's material and what surrounds it"))
	}
	return errors.Join(append(faults, p.Machine.check())...)
}

// drawRays is how long each of a stone's two looks is.
const drawRays = 12_000

// trace returns what a look with the points of a seed sees.
func (p *ToleranceProblem) trace(ctx context.Context, stone *facets.Stone, seed uint64) ([2]float64, error) {
	const pixels = 16
	r, err := trace.Run(ctx,
		trace.Scene{Stone: stone, Material: p.Material, Surroundings: []trace.Surrounding{p.Case.Surrounding}},
		trace.Settings{View: p.Case.View, Head: p.Head, Pixels: pixels, Samples: drawRays / (pixels * pixels), Seed: seed, Workers: 1}, nil)
	if err != nil {
		return [2]float64{}, err
	}
	return [2]float64{r.Columns[0].Ledger.Returned, r.Columns[0].LeakyArea}, nil
}

// look looks at a stone twice, with independent points that are the same for every stone.
func (p *ToleranceProblem) look(ctx context.Context, stone *facets.Stone, d *Draw) (err error) {
	seeds := [2]uint64{p.Seed, p.Seed ^ claims.another}
	for k := range d.looks {
		if d.looks[k], err = p.observe(ctx, stone, seeds[k]); err != nil {
			return err
		}
	}
	d.Return = (d.looks[0][0] + d.looks[1][0]) / 2
	d.Leaky = (d.looks[0][1] + d.looks[1][1]) / 2
	return nil
}

// draws cuts and traces n stones.
func (p *ToleranceProblem) draws(ctx context.Context, b *bench, m Machine, n int, report func(done float64)) (cut []Draw, failed int, err error) {
	all := make([]Draw, n)
	state := make([]int, n) // 0 not begun or stopped, 1 done, 2 no solid
	finished := make(chan struct{}, n)
	told := make(chan struct{})
	go func() { // one goroutine reports, so report need not bear several at once
		defer close(told)
		done := 0
		for range finished {
			if done++; done%16 == 0 || done == n {
				report(float64(done) / float64(n))
			}
		}
	}()
	err = parallel(ctx, p.Workers, n, func(ctx context.Context, i int) error {
		defer func() { finished <- struct{}{} }()
		d := Draw{slips: b.draw(p.Seed, i)}
		c, err := b.cut(m, &d.slips)
		if err != nil {
			state[i] = 2
			return nil
		}
		d.GapMM, d.EdgeMM, d.Lost = c.gapMM, c.edge, c.lost
		if err := p.look(ctx, c.stone, &d); err != nil {
			return err
		}
		all[i], state[i] = d, 1
		return nil
	})
	close(finished)
	<-told
	for i, s := range state {
		switch s {
		case 1:
			cut = append(cut, all[i])
		case 2:
			failed++
		}
	}
	return cut, failed, err
}

// spread tells how a number differs over the draws; of returns the two looks at it.
func spread(draws []Draw, plan float64, of func(*Draw) [2]float64) Spread {
	n := float64(len(draws))
	s := Spread{Plan: plan}
	values := make([]float64, len(draws))
	var means [2]float64
	for i := range draws {
		v := of(&draws[i])
		values[i] = (v[0] + v[1]) / 2
		means[0] += v[0] / n
		means[1] += v[1] / n
	}
	s.Mean = (means[0] + means[1]) / 2
	// The product of two looks' deviations has the variance between stones as its mean.
	products := make([]float64, len(draws))
	for i := range draws {
		v := of(&draws[i])
		products[i] = (v[0] - means[0]) * (v[1] - means[1])
	}
	mean, deviation := stat.MeanStdDev(products, nil)
	variance := mean * n / (n - 1)
	standardError := deviation / math.Sqrt(n)
	s.Deviation = math.Sqrt(max(variance, 0))
	s.DeviationError = min(standardError/(2*s.Deviation), math.Sqrt(standardError)) // the root's slope, bounded near 0
	_, all := stat.MeanStdDev(values, nil)
	s.MeanError = all / math.Sqrt(n)
	slices.Sort(values)
	s.Low = stat.Quantile(0.05, stat.LinInterp, values, nil)
	s.Median = stat.Quantile(0.5, stat.LinInterp, values, nil)
	s.High = stat.Quantile(0.95, stat.LinInterp, values, nil)
	return s
}

// precision finds how small the errors must be.
func (p *ToleranceProblem) precision(ctx context.Context, b *bench, t *Tolerance, nominal float64, report func(done float64)) error {
	loss := func(draws []Draw) float64 {
		values := make([]float64, len(draws))
		for i := range draws {
			values[i] = nominal - draws[i].Return
		}
		slices.Sort(values)
		return stat.Quantile(0.95, stat.LinInterp, values, nil)
	}
	t.Scales = []Scale{{1, loss(t.Draws), len(t.Draws)}}
	n := min(len(t.Draws), max(leastDraws, p.Draws/8))
	factors := []float64{2, 0.5, 0.25, 0.125}
	for k, factor := range factors {
		draws, _, err := p.draws(ctx, b, p.Machine.scaled(factor), n, func(done float64) {
			report((float64(k) + done) / float64(len(factors)))
		})
		if err != nil {
			return err
		}
		if len(draws) >= leastDraws {
			t.Scales = append(t.Scales, Scale{factor, loss(draws), len(draws)})
		}
	}
	slices.SortFunc(t.Scales, func(a, b Scale) int {
		if a.Factor < b.Factor {
			return -1
		}
		return 1
	})
	// From small to large, until the loss is too great; between two, straight.
	below := Scale{}
	for _, s := range t.Scales {
		if s.Loss > p.Loss {
			t.Needed = below.Factor + (s.Factor-below.Factor)*max(0, p.Loss-below.Loss)/(s.Loss-below.Loss)
			break
		}
		below = s
		t.Needed = s.Factor
	}
	t.Precise = p.Machine.scaled(t.Needed)
	return nil
}
