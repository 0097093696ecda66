package tune

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strings"
	"sync"

	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize"
	"gonum.org/v1/gonum/stat/distmv"
	"gonum.org/v1/gonum/stat/distuv"
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
	Nearby      []Trial // the best with one variable moved by NearStep either way: what a small error costs
}

// NearStep is how far Nearby moves an angle: an error that happens at the lap (common
// practice, no source). Other variables move by a step.
const NearStep = 0.1 // degrees

// chance is how seldom a gain of nothing may be claimed.
const chance = 1e-3

// certain returns Student's t beyond which chance alone leads so seldom (one-sided), for
// standard errors of so many degrees of freedom each.
func certain(freedom float64) float64 {
	return distuv.StudentsT{Mu: 0, Sigma: 1, Nu: freedom}.Quantile(1 - chance)
}

// Search looks for the values with the best score among those that fit, from the
// pattern as it stands and from elsewhere within the limits. Goals of light have cliffs:
// half a degree may take a third of the light away. So the search looks round before
// it climbs, climbs from several places, compares rather than follows slopes, and at
// last looks at every step about the winner.
//
// It calls report, which may be nil, now and then. When ctx is cancelled it returns
// what is best so far, traced as the search traced it, and the cause.
func Search(ctx context.Context, p *Problem, memory *Memory, report func(Progress)) (*Outcome, error) {
	j, err := newJudge(p)
	if err != nil {
		return nil, err
	}
	if err := memory.open(j); err != nil {
		return nil, err
	}
	return search(ctx, j, report)
}

// search is Search with a judge.
func search(ctx context.Context, j *judge, report func(Progress)) (*Outcome, error) {
	h := &hunt{judge: j, report: report}
	err := h.run(ctx)
	if err == nil && !h.best.Fit {
		return nil, h.nothingFits()
	}
	var o *Outcome
	if err == nil {
		o, err = h.claim(ctx)
	}
	if err != nil {
		if !h.best.Fit {
			return nil, err
		}
		return &Outcome{Start: h.start, Best: h.best, Gain: h.best.Score - h.start.Score,
			GainError: math.Hypot(h.best.Error, h.start.Error), Tried: j.tried()}, err
	}
	return o, nil
}

// hunt is the state of one search.
type hunt struct {
	*judge
	report func(Progress)
	tries  []Trial // of the first phase and the climbs

	telling     sync.Mutex // of what follows
	start, best Trial
	phase       string
	done        float64
}

// The shape of a search.
const (
	roundPerVariable = 100 // points laid over the limits at first, for each variable,
	mostRound        = 500 // but no more than this
	climbs           = 4   // of them that are climbed from, beside the pattern as it stands
	stepsPerVariable = 30  // stones a climb may look at, for each variable
	finalists        = 3   // that are walked from, step by step
	strides          = 8   // widest stride of a walk, in steps
	windowReach      = 3   // steps about the winner, in all directions, where two or fewer vary
	lastFew          = 10  // that are looked at closer, to choose one
)

// basin is how far apart, as a share of the limits' span, two places must lie in some
// variable to be climbed from both.
const basin = 1.0 / 12

func (h *hunt) tell(phase string, done float64) {
	h.telling.Lock()
	defer h.telling.Unlock()
	h.phase, h.done = phase, done
	h.tellLocked()
}

func (h *hunt) tellLocked() {
	if h.report != nil {
		h.report(Progress{Phase: h.phase, Tried: h.tried(), Done: h.done, Start: h.start, Best: h.best})
	}
}

// note keeps the best of what is seen.
func (h *hunt) note(t Trial) {
	h.telling.Lock()
	defer h.telling.Unlock()
	if len(h.best.Values) == 0 || t.merit() > h.best.merit() {
		h.best = t
		h.tellLocked()
	}
}

// lookAll tries many at once and keeps the best.
func (h *hunt) lookAll(ctx context.Context, all [][]float64, e effort) ([]Trial, error) {
	trials, err := h.tryAll(ctx, all, e)
	for _, t := range trials {
		if len(t.Values) > 0 { // what was seen before it was stopped counts
			h.note(t)
		}
	}
	return trials, err
}

func (h *hunt) run(ctx context.Context) (err error) {
	always := rough
	always.always = true // the stone as it stands is shown, whatever limits it breaks
	if h.start, err = h.try(ctx, h.Problem.start(), always); err != nil {
		return err
	}
	if h.start.Fit && h.within(h.start.Values) {
		h.note(h.start)
	}

	h.tell("looking round", 0.01)
	h.tries = append(h.tries, h.start)
	points := h.scatter()
	const batch = 16
	for i := 0; i < len(points); i += batch {
		seen, err := h.lookAll(ctx, points[i:min(i+batch, len(points))], rough)
		if err != nil {
			return err
		}
		h.tries = append(h.tries, seen...)
		h.tell("looking round", 0.4*float64(i)/float64(len(points)))
	}

	h.tell("climbing", 0.4)
	from := append([][]float64{h.rounded(h.start.Values)}, h.apart(h.tries, climbs)...)
	peaks := make([]Trial, len(from))
	err = parallel(ctx, h.workers(), len(from), func(ctx context.Context, i int) (err error) {
		peaks[i], err = h.climb(ctx, from[i])
		return err
	})
	if err != nil {
		return err
	}
	h.tries = append(h.tries, peaks...)

	h.tell("walking on the steps", 0.6)
	var last []Trial
	for i, x := range h.apart(h.tries, finalists) {
		t, err := h.walk(ctx, x, strides, rough)
		if err != nil {
			return err
		}
		last = append(last, t)
		h.tell("walking on the steps", 0.6+0.1*float64(i+1)/finalists)
	}
	return h.settle(ctx, last)
}

// within reports whether values lie within the limits of their variables.
func (h *hunt) within(x []float64) bool {
	for i, v := range h.Variables {
		if x[i] < v.Low || x[i] > v.High {
			return false
		}
	}
	return true
}

// apart returns the values of the best tries that lie in different places.
func (h *hunt) apart(tries []Trial, most int) [][]float64 {
	sorted := slices.Clone(tries)
	sortByMerit(sorted)
	var chosen [][]float64
	for _, t := range sorted {
		x := h.rounded(t.Values)
		near := slices.ContainsFunc(chosen, func(y []float64) bool {
			for i, v := range h.Variables {
				if math.Abs(x[i]-y[i]) > basin*(v.High-v.Low) {
					return false
				}
			}
			return true
		})
		if !near {
			chosen = append(chosen, x)
		}
		if len(chosen) == most {
			break
		}
	}
	return chosen
}

// sortByMerit sorts trials, the best first, those of equal merit as they stood.
func sortByMerit(trials []Trial) {
	slices.SortStableFunc(trials, func(a, b Trial) int {
		switch {
		case a.merit() > b.merit():
			return -1
		case a.merit() < b.merit():
			return 1
		}
		return 0
	})
}

// scatter returns points spread evenly over the limits: a scrambled Halton sequence.
func (h *hunt) scatter() [][]float64 {
	d := len(h.Variables)
	src := rand.NewPCG(h.Seed, 0x746e65)
	m := mat.NewDense(min(roundPerVariable*d, mostRound), d, nil)
	samplemv.Halton{Kind: samplemv.Owen, Q: distmv.NewUnitUniform(d, nil), Src: src}.Sample(m)
	points := make([][]float64, m.RawMatrix().Rows)
	for i := range points {
		points[i] = h.inside(m.RawRowView(i))
	}
	return points
}

// inside maps the unit cube onto the limits, on the steps; what lies outside the cube
// is put on its face.
func (h *hunt) inside(u []float64) []float64 {
	x := make([]float64, len(u))
	for i, v := range h.Variables {
		x[i] = v.round(v.Low + (v.High-v.Low)*min(max(u[i], 0), 1))
	}
	return x
}

// rounded puts values on the steps, within the limits.
func (h *hunt) rounded(x []float64) []float64 {
	y := make([]float64, len(x))
	for i, v := range h.Variables {
		y[i] = v.round(x[i])
	}
	return y
}

// climb runs a published optimiser from x and returns the best it saw: Nelder and
// Mead's simplex for few variables, the covariance matrix adaptation of Hansen and
// Ostermeier for many. Both only compare, so cliffs do not throw them.
func (h *hunt) climb(ctx context.Context, x []float64) (peak Trial, err error) {
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
			t, err := h.try(ctx, h.inside(u), rough)
			if err != nil {
				failed = err
				return math.Inf(1)
			}
			h.note(t)
			if len(peak.Values) == 0 || t.merit() > peak.merit() {
				peak = t
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
		Converger:       &optimize.FunctionConverge{Absolute: 1e-5, Iterations: 5 * d},
	}
	var method optimize.Method = &optimize.NelderMead{SimplexSize: 0.1}
	if d > 4 {
		method = &optimize.CmaEsChol{InitStepSize: 0.15, Src: rand.NewPCG(h.Seed, 0x636d61)}
	}
	_, err = optimize.Minimize(problem, u, settings, method)
	if failed != nil {
		return peak, failed
	}
	if _, ended := err.(optimize.ErrFunc); err != nil && !ended {
		return peak, fmt.Errorf("the optimiser failed: %w", err)
	}
	return peak, nil
}

// walk moves from x over the steps, in ever smaller strides, until none beside is
// better. Diagonal strides follow the ridge along which two angles trade off.
func (h *hunt) walk(ctx context.Context, x []float64, widest int, e effort) (Trial, error) {
	at, err := h.try(ctx, x, e)
	if err != nil {
		return at, err
	}
	for stride := widest; stride >= 1; stride /= 2 {
		for moved := true; moved; {
			moved = false
			seen, err := h.lookAll(ctx, h.beside(at.Values, stride), e)
			if err != nil {
				return at, err
			}
			for _, t := range seen {
				if t.merit() > at.merit() {
					at, moved = t, true
				}
			}
		}
	}
	return at, nil
}

// settle chooses among the finalists by closer looks, and among all steps about the
// best of them.
func (h *hunt) settle(ctx context.Context, last []Trial) error {
	h.tell("settling on the steps", 0.7)
	// What was seen with a rougher look does not compare with a closer one.
	var all [][]float64
	for _, t := range last {
		all = append(all, t.Values)
	}
	if h.within(h.start.Values) {
		all = append(all, h.rounded(h.start.Values))
	}
	seen, err := h.tryAll(ctx, all, fine)
	if err != nil {
		return err
	}
	sortByMerit(seen)
	h.telling.Lock()
	h.best = seen[0]
	h.telling.Unlock()
	at, err := h.walk(ctx, seen[0].Values, 2, fine)
	if err != nil {
		return err
	}
	h.tell("settling on the steps", 0.8)
	around := []Trial{at}
	for moved := true; moved; { // until the best lies in the middle of its window
		seen, err := h.lookAll(ctx, h.window(at.Values), fine)
		if err != nil {
			return err
		}
		around, moved = append(around, seen...), false
		for _, t := range seen {
			if t.merit() > at.merit() {
				at, moved = t, true
			}
		}
	}

	h.tell("comparing the last few", 0.88)
	sortByMerit(around)
	around = slices.CompactFunc(around, func(a, b Trial) bool { return slices.Equal(a.Values, b.Values) })
	around = around[:min(lastFew, len(around))]
	all = nil
	for _, t := range around {
		all = append(all, t.Values)
	}
	close, err := h.tryAll(ctx, all, closer)
	if err != nil {
		return err
	}
	// The first look chose these, so its luck is in their scores; the closer look counts.
	sortByMerit(close)
	h.telling.Lock()
	h.best = close[0]
	h.telling.Unlock()
	return nil
}

// window returns all values within a few steps, or, where more than two vary, those
// one step away along each variable and each pair.
func (h *hunt) window(x []float64) [][]float64 {
	if len(x) > 2 {
		return h.beside(x, 1)
	}
	var all [][]float64
	for a := -windowReach; a <= windowReach; a++ {
		if len(x) == 1 {
			all = append(all, []float64{h.stepped(x, 0, a)})
			continue
		}
		for b := -windowReach; b <= windowReach; b++ {
			all = append(all, []float64{h.stepped(x, 0, a), h.stepped(x, 1, b)})
		}
	}
	return distinct(all)
}

// stepped returns variable i some steps on.
func (h *hunt) stepped(x []float64, i, steps int) float64 {
	v := h.Variables[i]
	return v.round(x[i] + float64(steps)*v.stride())
}

// beside returns the values one stride away along each variable and each pair.
func (h *hunt) beside(x []float64, stride int) [][]float64 {
	var all [][]float64
	add := func(change func(y []float64)) {
		y := slices.Clone(x)
		change(y)
		if !slices.Equal(x, y) {
			all = append(all, y)
		}
	}
	for i := range x {
		for _, a := range []int{-stride, stride} {
			add(func(y []float64) { y[i] = h.stepped(x, i, a) })
			for k := i + 1; k < len(x); k++ {
				for _, b := range []int{-stride, stride} {
					add(func(y []float64) { y[i], y[k] = h.stepped(x, i, a), h.stepped(x, k, b) })
				}
			}
		}
	}
	return distinct(all)
}

// distinct drops values that stand there twice: limits may fold strides together.
func distinct(all [][]float64) [][]float64 {
	slices.SortFunc(all, slices.Compare[[]float64])
	return slices.CompactFunc(all, slices.Equal[[]float64])
}

// claim traces the start and the best anew, with points that the search never used.
func (h *hunt) claim(ctx context.Context) (*Outcome, error) {
	h.tell("tracing the winner anew", 0.93)
	o := &Outcome{}
	var err error
	if o.Start, err = h.try(ctx, h.Problem.start(), claims); err != nil {
		return nil, err
	}
	if o.Best, err = h.try(ctx, h.best.Values, claims); err != nil {
		return nil, err
	}
	o.Gain = o.Best.Score - o.Start.Score
	o.GainError = math.Hypot(o.Best.Error, o.Start.Error)
	startFits := o.Start.Fit && h.within(o.Start.Values)
	o.Better = o.Best.Fit && (!startFits || o.Gain > certain(min(o.Best.freedom, o.Start.freedom))*o.GainError)
	if startFits && !(o.Gain > 0) { // nothing was found: the stone as it stands is the best
		o.Best, o.Gain, o.Better = o.Start, 0, false
	}
	beside := h.nearby(o.Best.Values, NearStep)
	o.Nearby = make([]Trial, len(beside))
	if err = parallel(ctx, h.workers(), len(beside), func(ctx context.Context, i int) (err error) {
		o.Nearby[i], err = h.tryAlone(ctx, beside[i], nearLook)
		return err
	}); err != nil {
		return nil, err
	}
	o.Tried = h.tried()
	h.tell("done", 1)
	return o, nil
}

// nearLook looks at stones that nobody wants to cut, limits or not.
var nearLook = effort{rays: 50_000, seen: 32, another: claims.another, always: true}

// nothingFits says in words why no stone was found.
func (h *hunt) nothingFits() error {
	nearest := h.start
	for _, t := range append(h.tries, h.best) {
		if len(t.Values) > 0 && (h.within(t.Values) && t.Short < nearest.Short || !h.within(nearest.Values)) {
			nearest = t
		}
	}
	return &NothingFitsError{Names: h.names(), Nearest: nearest, Words: nearest.Words}
}

// NothingFitsError says that no values within the limits give a stone that keeps them.
type NothingFitsError struct {
	Names   []string // of the variables
	Nearest Trial
	Words   []string // what is wrong with the nearest
}

// Error names the nearest stone's faults and the remedy.
func (e *NothingFitsError) Error() string {
	at := make([]string, len(e.Names))
	for i, name := range e.Names {
		at[i] = fmt.Sprintf("%s %g", name, e.Nearest.Values[i])
	}
	words := slices.Clone(e.Words)
	if len(words) > 3 {
		words = append(words[:3], "and more")
	}
	return fmt.Sprintf("no stone within the limits was found. Nearest comes %s, where %s. Widen the limits.",
		strings.Join(at, ", "), strings.Join(words, "; "))
}
