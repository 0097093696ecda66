package tune

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
	"gonum.org/v1/gonum/stat/distmv"
	"gonum.org/v1/gonum/stat/samplemv"
)

// Progress is how far a search has come.
type Progress struct {
	Phase string // in words
	Tried int    // stones looked at
	Done  float64
	Start Trial // as it stands, with the search's own points
	Best  Trial // best so far, likewise
}

// Outcome is what a search found. Start and Best are traced anew, with points that the
// search never used, so that a stone cannot win by luck.
type Outcome struct {
	Start, Best Trial
	Gain        float64 // of Best over Start, in the score
	GainError   float64 // standard error of the gain
	Better      bool    // the gain is more than chance explains at 1 in 1,000
	Tried       int     // stones looked at
}

// certain is Student's t beyond which one result in 1,000 falls by chance, for the 15
// degrees of freedom of each standard error here (one-sided; table of Student's t).
const certain = 3.73

// Search looks for the values with the best score among those that fit, from the
// pattern as it stands and from elsewhere within the limits. It calls report, which
// may be nil, after each phase and now and then between. When ctx is cancelled it
// returns what is best so far, traced as the search traced it, and the cause.
func Search(ctx context.Context, p *Problem, memory *Memory, report func(Progress)) (*Outcome, error) {
	j, err := newJudge(p)
	if err != nil {
		return nil, err
	}
	if err := memory.open(j); err != nil {
		return nil, err
	}
	h := &hunt{judge: j, report: report}
	err = h.run(ctx)
	if err == nil && !h.best.Fit {
		return nil, h.nothingFits()
	}
	if err != nil {
		if len(h.best.Values) == 0 {
			return nil, err
		}
		return &Outcome{Start: h.start, Best: h.best, Gain: h.best.Score - h.start.Score,
			GainError: math.Hypot(h.best.Error, h.start.Error), Tried: j.asked}, err
	}
	return h.claim(ctx)
}

// hunt is the state of one search.
type hunt struct {
	*judge
	report      func(Progress)
	start, best Trial
	phase       string
	done        float64
	tries       []Trial // of the first phase
}

// The shape of a search.
const (
	startsAPerVariable = 24 // points laid over the limits at first, for each variable
	climbs             = 3  // of them that are climbed from, beside the pattern as it stands
	stepsPerVariable   = 40 // stones a climb may look at, for each variable
	strides            = 8  // widest stride of the last phase, in steps
)

func (h *hunt) tell(phase string, done float64) {
	h.phase, h.done = phase, done
	if h.report != nil {
		h.report(Progress{Phase: phase, Tried: h.asked, Done: done, Start: h.start, Best: h.best})
	}
}

// look tries values and keeps the best.
func (h *hunt) look(ctx context.Context, x []float64, e effort) (Trial, error) {
	t, err := h.try(ctx, x, e)
	if err == nil && (len(h.best.Values) == 0 || t.merit() > h.best.merit()) {
		h.best = t
		if h.report != nil {
			h.report(Progress{Phase: h.phase, Tried: h.asked, Done: h.done, Start: h.start, Best: h.best})
		}
	}
	return t, err
}

func (h *hunt) run(ctx context.Context) (err error) {
	if h.start, err = h.look(ctx, h.Problem.start(), rough); err != nil {
		return err
	}

	// Lay points over the limits.
	h.tell("looking round", 0.02)
	points := h.scatter()
	h.tries = append(h.tries, h.start)
	for i, x := range points {
		t, err := h.look(ctx, x, rough)
		if err != nil {
			return err
		}
		h.tries = append(h.tries, t)
		if i%8 == 7 {
			h.tell("looking round", 0.02+0.38*float64(i)/float64(len(points)))
		}
	}

	// Climb from the best of them and from the pattern as it stands.
	slices.SortStableFunc(h.tries, func(a, b Trial) int {
		switch {
		case a.merit() > b.merit():
			return -1
		case a.merit() < b.merit():
			return 1
		}
		return 0
	})
	from := [][]float64{h.start.Values}
	for _, t := range h.tries[:min(climbs, len(h.tries))] {
		from = append(from, t.Values)
	}
	for i, x := range from {
		h.tell("climbing", 0.4+0.3*float64(i)/float64(len(from)))
		if err := h.climb(ctx, x); err != nil {
			return err
		}
	}

	// Settle on the machine's steps, with a closer look.
	h.tell("settling on the steps", 0.7)
	return h.settle(ctx)
}

// scatter returns points spread evenly over the limits: a scrambled Halton sequence.
func (h *hunt) scatter() [][]float64 {
	d := len(h.Variables)
	src := rand.NewPCG(h.Seed, 0x746e65)
	m := mat.NewDense(startsAPerVariable*d, d, nil)
	samplemv.Halton{Kind: samplemv.Owen, Q: distmv.NewUnitUniform(d, nil), Src: src}.Sample(m)
	points := make([][]float64, m.RawMatrix().Rows)
	for i := range points {
		points[i] = h.inside(m.RawRowView(i))
	}
	return points
}

// inside maps the unit cube onto the limits; what lies outside the cube is put on its
// face.
func (h *hunt) inside(u []float64) []float64 {
	x := make([]float64, len(u))
	for i, v := range h.Variables {
		x[i] = v.Low + (v.High-v.Low)*min(max(u[i], 0), 1)
	}
	return x
}

// climb runs a published optimiser from x: Nelder and Mead's simplex for few
// variables, the covariance matrix adaptation of Hansen and Ostermeier for many.
func (h *hunt) climb(ctx context.Context, x []float64) error {
	d := len(x)
	u := make([]float64, d)
	for i, v := range h.Variables {
		u[i] = 0.5
		if v.High > v.Low {
			u[i] = min(max((x[i]-v.Low)/(v.High-v.Low), 0), 1)
		}
	}
	var failed error
	problem := optimize.Problem{
		Func: func(u []float64) float64 {
			t, err := h.look(ctx, h.inside(u), rough)
			if err != nil {
				failed = err
				return math.Inf(1)
			}
			outside := 0.0
			for _, c := range u {
				outside += max(0, -c, c-1)
			}
			return -t.merit() + outside // away from the limits' far side
		},
		Status: func() (optimize.Status, error) {
			if failed != nil {
				return optimize.Failure, failed
			}
			return optimize.NotTerminated, nil
		},
	}
	settings := &optimize.Settings{
		FuncEvaluations: stepsPerVariable * d,
		Converger:       &optimize.FunctionConverge{Absolute: 1e-5, Iterations: 8 * d},
	}
	var method optimize.Method = &optimize.NelderMead{SimplexSize: 0.12}
	if d > 4 {
		method = &optimize.CmaEsChol{InitStepSize: 0.15, Src: rand.NewPCG(h.Seed, 0x636d61)}
	}
	_, err := optimize.Minimize(problem, u, settings, method)
	if failed != nil {
		return failed
	}
	if err != nil && !isLimit(err) {
		return fmt.Errorf("the optimiser failed: %w", err)
	}
	return nil
}

// isLimit reports whether the optimiser only says that it ran to its limit.
func isLimit(err error) bool {
	_, early := err.(optimize.ErrFunc)
	return early
}

// settle rounds the best values to the steps and walks over the steps, in ever smaller
// strides, until none beside is better. Diagonal strides follow the ridge along which
// two angles trade off.
func (h *hunt) settle(ctx context.Context) error {
	at := make([]float64, len(h.Variables))
	for i, v := range h.Variables {
		at[i] = v.round(h.best.Values[i])
	}
	h.best = Trial{} // what was seen with a rougher look does not count any more
	start, err := h.try(ctx, h.Problem.start(), fine)
	if err != nil {
		return err
	}
	h.start = start
	if h.best, err = h.try(ctx, at, fine); err != nil {
		return err
	}
	for stride := strides; stride >= 1; stride /= 2 {
		for moved := true; moved; {
			moved = false
			for _, x := range h.beside(h.best.Values, stride) {
				before := h.best.merit()
				if _, err := h.look(ctx, x, fine); err != nil {
					return err
				}
				moved = moved || h.best.merit() > before
			}
		}
		h.tell("settling on the steps", 0.7+0.25*(1-float64(stride)/strides))
	}
	return nil
}

// beside returns the values one stride away along each variable and each pair.
func (h *hunt) beside(x []float64, stride int) [][]float64 {
	step := func(i int, sign float64) float64 {
		v := h.Variables[i]
		by := v.Step
		if by == 0 {
			by = (v.High - v.Low) / 256
		}
		return v.round(x[i] + sign*float64(stride)*by)
	}
	var all [][]float64
	add := func(change func(y []float64)) {
		y := slices.Clone(x)
		change(y)
		if !slices.Equal(x, y) {
			all = append(all, y)
		}
	}
	for i := range x {
		for _, a := range []float64{-1, 1} {
			add(func(y []float64) { y[i] = step(i, a) })
			for k := i + 1; k < len(x); k++ {
				for _, b := range []float64{-1, 1} {
					add(func(y []float64) { y[i], y[k] = step(i, a), step(k, b) })
				}
			}
		}
	}
	return all
}

// claim traces the start and the best anew, with points that the search never used.
func (h *hunt) claim(ctx context.Context) (*Outcome, error) {
	h.tell("tracing the winner anew", 0.95)
	seed := h.Seed ^ 0x6a09e667f3bcc908
	o := &Outcome{}
	var err error
	if o.Start, err = h.trySeed(ctx, h.Problem.start(), claims, seed); err != nil {
		return nil, err
	}
	if o.Best, err = h.trySeed(ctx, h.best.Values, claims, seed); err != nil {
		return nil, err
	}
	o.Gain = o.Best.Score - o.Start.Score
	o.GainError = math.Hypot(o.Best.Error, o.Start.Error)
	o.Better = o.Best.Fit && (!o.Start.Fit || o.Gain > certain*o.GainError)
	if o.Start.Fit && !(o.Gain > 0) { // nothing was found: the stone as it stands is the best
		o.Best, o.Gain, o.Better = o.Start, 0, false
	}
	o.Tried = h.asked
	h.tell("done", 1)
	return o, nil
}

// nothingFits says in words why no stone was found.
func (h *hunt) nothingFits() error {
	words := h.best.Words
	if len(words) > 3 {
		words = words[:3]
	}
	return &NothingFitsError{Nearest: h.best, Words: words}
}

// NothingFitsError says that no values within the limits give a stone that keeps them.
type NothingFitsError struct {
	Nearest Trial
	Words   []string // what is wrong with the nearest
}

// Error names the nearest stone's faults and the remedy.
func (e *NothingFitsError) Error() string {
	return fmt.Sprintf("no stone within the limits was found; the nearest, at %v, fails since %v; widen the limits", e.Nearest.Values, e.Words)
}
