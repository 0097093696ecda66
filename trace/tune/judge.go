package tune

import (
	"context"
	"fmt"
	"math"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"sync"
	"sync/atomic"

	"pavilight/facets"
	"pavilight/trace"
)

// Trial is one choice of values and what became of it.
type Trial struct {
	Values []float64 `json:"values"` // of the problem's variables, in their units
	// Score is what the goal makes of the stone, more is better; it is meaningful only if
	// Seen. Error is its standard error.
	Score float64 `json:"score"`
	Error float64 `json:"error"`
	// Measures holds, for every aim, the measure itself in the mean or worst case, and its
	// standard error.
	Measures      []float64 `json:"measures,omitempty"`
	MeasureErrors []float64 `json:"measure_errors,omitempty"`
	Fit           bool      `json:"fit"`             // there is such a stone and it keeps every limit
	Seen          bool      `json:"seen"`            // it was traced: every fit one was
	Words         []string  `json:"words,omitempty"` // why it does not fit, otherwise
	Short         float64   `json:"short,omitempty"` // how far from fit: sum of the breaches, or a stone's absence

	freedom float64 // degrees of freedom of Error
}

// merit orders trials for the search: fit stones by score, others below all of them
// by how far from fit they are.
func (t *Trial) merit() float64 {
	if t.Fit {
		return t.Score
	}
	return -1e3 - t.Short
}

// sight is what was seen of one stone, before any goal weighs it.
type sight struct {
	Values [][]float64 `json:"values,omitempty"` // by case and wanted measure; empty where the stone was not traced
	Errors [][]float64 `json:"errors,omitempty"` // standard errors likewise
	Words  []string    `json:"words,omitempty"`  // why the stone is not fit; empty if it is
	Short  float64     `json:"short,omitempty"`
	// Pictures is how many independent pictures the errors of what an eye sees come from; 0
	// where nothing was measured so.
	Pictures int `json:"pictures,omitempty"`
}

// noStone is how far from fit values count for which there is no stone at all. Any
// breach of limits counts as nearer.
const noStone = 100

// effort is how long a stone is looked at.
type effort struct {
	rays    int     // at most, about
	err     float64 // or until the standard error of every entry is below, if above 0
	seen    int     // rays a pixel of the pictures that an eye sees
	another uint64  // for points independent of those of other efforts
	always  bool    // also where it breaks a limit
}

// The efforts of a search: to find the region, to settle on the steps, to choose among
// the last, to claim. Claims have points that the search never used, so that a stone
// cannot win by luck.
var (
	rough  = effort{rays: 12_000, seen: 16}
	fine   = effort{rays: 50_000, seen: 32}
	closer = effort{rays: 200_000, seen: 64, another: 0x9e3779b97f4a7c15}
	claims = effort{err: 0.0002, seen: 128, another: 0x6a09e667f3bcc908, always: true}
)

// judge turns values into trials. It remembers all it was asked, so that a search that
// was stopped runs through what is known in no time. Several goroutines may ask it:
// what it answers depends on the question alone.
type judge struct {
	*Problem
	ratio   float64                                                              // length over width to keep
	observe func(ctx context.Context, values []float64, e effort) (sight, error) // sees one stone; a plain function in tests
	keep    func(key string, s sight)                                            // writes down what is new; may be nil

	mu    sync.Mutex
	known map[string]sight
	asked map[string]bool // in this run
}

func newJudge(p *Problem) (*judge, error) {
	if err := p.check(); err != nil {
		return nil, err
	}
	j := &judge{Problem: p, known: map[string]sight{}, asked: map[string]bool{}}
	j.observe = j.see
	if s, err := p.Pattern.Build(nil, nil); err == nil {
		j.ratio = s.Measure().Ratio
	}
	return j, nil
}

// tried returns how many stones were asked for so far, known before or not.
func (j *judge) tried() int {
	j.mu.Lock()
	defer j.mu.Unlock()
	return len(j.asked)
}

func (j *judge) workers() int {
	if j.Workers > 0 {
		return j.Workers
	}
	return runtime.GOMAXPROCS(0)
}

// key names a question in the memory.
func key(values []float64, e effort, seed uint64) string {
	var b strings.Builder
	for _, v := range values {
		b.WriteString(strconv.FormatFloat(v, 'g', -1, 64))
		b.WriteByte(' ')
	}
	fmt.Fprintf(&b, "%d %g %d %d %v", e.rays, e.err, e.seen, seed^e.another, e.always)
	return b.String()
}

// fromKey returns the values and the rays of a key.
func fromKey(name string, n int) (values []float64, e effort) {
	fields := strings.Fields(name)
	for _, f := range fields[:n] {
		v, _ := strconv.ParseFloat(f, 64) // key wrote it
		values = append(values, v)
	}
	e.rays, _ = strconv.Atoi(fields[n])
	return values, e
}

// try judges values, and where the problem wants it steady, those beside them too. The
// only errors are those of ctx and of the file that keeps what was seen.
func (j *judge) try(ctx context.Context, values []float64, e effort) (Trial, error) {
	t, err := j.tryAlone(ctx, values, e)
	if err != nil || j.Steady == 0 || !t.Seen {
		return t, err
	}
	for _, x := range j.within(values, j.Steady.Degrees()) {
		beside, err := j.tryAlone(ctx, x, e)
		if err == nil && !beside.Seen { // limits are for the stone itself
			free := e
			free.always = true
			beside, err = j.tryAlone(ctx, x, free)
		}
		if err != nil {
			return t, err
		}
		if !beside.Seen {
			t.Fit, t.Seen, t.Short = false, false, t.Short+noStone/2
			t.Words = append(t.Words, "an error that is to be forgiven leaves none: "+beside.Words[0])
			return t, nil
		}
		if beside.Score < t.Score {
			t.Score, t.Error = beside.Score, beside.Error
		}
	}
	return t, nil
}

// nearby returns the values with one variable moved, either way: angles by so many
// degrees, others by their step.
func (j *judge) nearby(x []float64, degrees float64) [][]float64 {
	var all [][]float64
	for i, v := range j.Variables {
		by := v.stride()
		if v.Unit == "degrees" {
			by = degrees
		}
		for _, sign := range []float64{-1, 1} {
			y := slices.Clone(x)
			y[i] = math.Round((y[i]+sign*by)*1e9) / 1e9
			all = append(all, y)
		}
	}
	return all
}

// within returns the values with one variable off by up to so many degrees either way, a
// SlipStep apart and at the ends: a cliff may lie between. Others are off by their step.
func (j *judge) within(x []float64, degrees float64) (all [][]float64) {
	for by := SlipStep; by < degrees-1e-9; by += SlipStep {
		for k, y := range j.nearby(x, by) {
			if j.Variables[k/2].Unit == "degrees" {
				all = append(all, y)
			}
		}
	}
	return append(all, j.nearby(x, degrees)...)
}

// tryAlone judges one choice of values.
func (j *judge) tryAlone(ctx context.Context, values []float64, e effort) (Trial, error) {
	name := key(values, e, j.Seed)
	j.mu.Lock()
	s, ok := j.known[name]
	j.asked[name] = true
	j.mu.Unlock()
	if !ok {
		if err := context.Cause(ctx); err != nil {
			return Trial{}, err
		}
		var err error
		if s, err = j.observe(ctx, values, e); err != nil {
			return Trial{}, err
		}
		s = s.finite()
		j.mu.Lock()
		_, again := j.known[name]
		j.known[name] = s
		if j.keep != nil && !again {
			j.keep(name, s)
		}
		j.mu.Unlock()
	}
	return j.Goal.weigh(values, s), nil
}

// tryAll judges several choices at once, each with one worker.
func (j *judge) tryAll(ctx context.Context, all [][]float64, e effort) ([]Trial, error) {
	trials := make([]Trial, len(all))
	err := parallel(ctx, j.workers(), len(all), func(ctx context.Context, i int) (err error) {
		trials[i], err = j.try(ctx, all[i], e)
		return err
	})
	return trials, err
}

// parallel calls do for 0 to n-1 from several goroutines, all of which have returned
// before it does. It returns the error of the lowest number that failed; after an error
// or when ctx is cancelled no further numbers are begun.
func parallel(ctx context.Context, workers, n int, do func(ctx context.Context, i int) error) error {
	ctx, cancel := context.WithCancelCause(ctx)
	defer cancel(nil)
	errs := make([]error, n)
	var next atomic.Int64
	var all sync.WaitGroup
	for range min(workers, n) {
		all.Go(func() {
			for ctx.Err() == nil {
				i := int(next.Add(1)) - 1
				if i >= n {
					return
				}
				if errs[i] = do(ctx, i); errs[i] != nil {
					cancel(errs[i])
				}
			}
		})
	}
	all.Wait()
	for _, err := range errs {
		if err != nil {
			return err
		}
	}
	return context.Cause(ctx)
}

// finite returns the sight, or that of no fit stone where a number is none.
func (s sight) finite() sight {
	for _, rows := range [][][]float64{s.Values, s.Errors} {
		for _, row := range rows {
			for _, v := range row {
				if math.IsNaN(v) || math.IsInf(v, 0) {
					return sight{Words: append(s.Words, "the goal has no value here"), Short: s.Short + noStone}
				}
			}
		}
	}
	return s
}

// fitted is how large a stone comes out of its rough.
type fitted struct {
	scale float64 // of the pattern's size
	yield float64 // share of the rough
}

// see builds and traces one stone.
func (j *judge) see(ctx context.Context, values []float64, e effort) (s sight, err error) {
	for i, v := range j.Variables {
		if x := values[i]; !(x >= v.Low && x <= v.High) && !e.always {
			s.Words = append(s.Words, fmt.Sprintf("%s lies outside its limits, %g to %g", v.Name, v.Low, v.High))
			s.Short += noStone
		}
	}
	if s.Short > 0 {
		return s, nil
	}
	stone, err := j.Pattern.Build(j.names(), values)
	if err != nil {
		return sight{Words: strings.Split(err.Error(), "\n"), Short: noStone}, nil
	}
	m := stone.Measure()
	size := fitted{1, 1}
	if j.Rough != nil {
		fit, err := j.Rough.Fit(stone)
		if err != nil {
			return sight{Words: strings.Split(err.Error(), "\n"), Short: noStone}, nil
		}
		size = fitted{fit.Scale, fit.Yield}
	}
	for _, b := range j.Limits.broken(stone, &m, j, size) {
		s.Words = append(s.Words, b.Words)
		s.Short += min(b.By, noStone/10)
	}
	if len(s.Words) > 0 && !e.always {
		return s, nil
	}
	carats := m.Carats(j.Material.Density) * math.Pow(size.scale, 3)
	s.Values, s.Errors = make([][]float64, len(j.Goal.Cases)), make([][]float64, len(j.Goal.Cases))
	err = j.look(ctx, stone, carats, e, &s)
	if err != nil && ctx.Err() == nil {
		return sight{Words: []string{"the stone cannot be traced: " + err.Error()}, Short: noStone}, nil
	}
	return s, err
}

// look traces the stone in every case.
func (j *judge) look(ctx context.Context, stone *facets.Stone, carats float64, e effort, s *sight) error {
	wanted := j.Goal.wanted()
	for k := range s.Values {
		s.Values[k], s.Errors[k] = make([]float64, len(wanted)), make([]float64, len(wanted))
	}
	set := func(k int, m Measure, value, se float64) {
		if i := slices.Index(wanted, m); i >= 0 {
			s.Values[k][i], s.Errors[k][i] = value, se
		}
	}
	workers := 1
	if e.err > 0 {
		workers = j.workers() // such a long look is for one stone
	}
	if slices.ContainsFunc(wanted, func(m Measure) bool { return !m.ByEye() }) {
		for _, cases := range j.alike(func(a, b *Case) bool { return a.View == b.View }) {
			const pixels = 16 // the map itself is not wanted
			scene := j.scene(stone, cases)
			settings := trace.Settings{View: j.Goal.Cases[cases[0]].View, Head: j.Head, Pixels: pixels,
				Seed: j.Seed ^ e.another, Workers: workers, Error: e.err}
			if e.rays > 0 {
				settings.Samples = max(1, e.rays/(pixels*pixels))
			}
			r, err := trace.Run(ctx, scene, settings, nil)
			if err != nil {
				return err
			}
			for i, k := range cases {
				c := &r.Columns[i]
				set(k, LightReturn, c.Ledger.Returned, c.StandardError.Returned)
				set(k, Leakage, c.Ledger.Leaked, c.StandardError.Leaked)
				set(k, HeadShade, c.Ledger.Head, c.StandardError.Head)
				set(k, LeakyArea, c.LeakyArea, c.LeakyError)
				set(k, WindowedArea, c.WindowedArea, c.WindowedError)
				set(k, Weight, carats, 0)
			}
		}
	}
	if slices.ContainsFunc(wanted, Measure.ByEye) {
		distance := j.Distance
		if distance == 0 {
			distance = UsualDistance
		}
		for _, cases := range j.alike(func(a, b *Case) bool { return a.View == b.View && a.Light == b.Light }) {
			first := &j.Goal.Cases[cases[0]]
			settings := trace.Settings{View: first.View, Light: first.Light, Head: j.Head, Samples: e.seen,
				Seed: j.Seed ^ e.another, Workers: workers}
			all, err := trace.Appear(ctx, j.scene(stone, cases), settings, distance, nil)
			if err != nil {
				return err
			}
			for i, k := range cases {
				a := &all[i]
				for _, m := range []trace.Estimate{a.Luminance, a.DarkArea, a.Contrast, a.Fire, a.Sparkle} {
					if s.Pictures == 0 || m.Pictures < s.Pictures {
						s.Pictures = m.Pictures
					}
				}
				set(k, Luminance, a.Luminance.Value, a.Luminance.Error)
				set(k, DarkArea, a.DarkArea.Value, a.DarkArea.Error)
				set(k, Contrast, a.Contrast.Value, a.Contrast.Error)
				set(k, Fire, a.Fire.Value, a.Fire.Error)
				set(k, Sparkle, a.Sparkle.Value, a.Sparkle.Error)
			}
		}
	}
	return nil
}

// scene returns the stone in the surroundings of some cases.
func (j *judge) scene(stone *facets.Stone, cases []int) trace.Scene {
	scene := trace.Scene{Stone: stone, Material: j.Material}
	for _, k := range cases {
		scene.Surroundings = append(scene.Surroundings, j.Goal.Cases[k].Surrounding)
	}
	return scene
}

// alike returns the cases in groups that can be traced together.
func (j *judge) alike(same func(a, b *Case) bool) [][]int {
	var groups [][]int
next:
	for k := range j.Goal.Cases {
		for g := range groups {
			if same(&j.Goal.Cases[groups[g][0]], &j.Goal.Cases[k]) {
				groups[g] = append(groups[g], k)
				continue next
			}
		}
		groups = append(groups, []int{k})
	}
	return groups
}

// scramblingFreedom is the degrees of freedom of a standard error of the ledger, which
// comes from 16 independent scramblings.
const scramblingFreedom = 15

// weigh scores what was seen: every case by the weighted sum of the aims, then their
// mean or the worst of them.
func (g *Goal) weigh(values []float64, s sight) Trial {
	t := Trial{
		Values: append([]float64(nil), values...),
		Fit:    len(s.Words) == 0, Seen: len(s.Values) > 0,
		Words: s.Words, Short: s.Short, freedom: scramblingFreedom,
	}
	if s.Pictures > 0 {
		t.freedom = float64(s.Pictures - 1)
	}
	if !t.Seen {
		return t
	}
	n := float64(len(s.Values))
	worst, worstScore, worstError := -1, math.Inf(1), 0.0
	var mean, spread float64
	for k := range s.Values {
		score, variance := 0.0, 0.0
		for i, a := range g.Aims {
			score += a.Weight * s.Values[k][i]
			variance += a.Weight * a.Weight * s.Errors[k][i] * s.Errors[k][i]
		}
		if score < worstScore {
			worst, worstScore, worstError = k, score, math.Sqrt(variance)
		}
		mean += score / n
		spread += math.Sqrt(variance) / n // cases share their points, so their errors may go together
	}
	t.Score, t.Error = mean, spread
	if g.Worst {
		t.Score, t.Error = worstScore, worstError
	}
	for i := range g.Aims {
		v, e := 0.0, 0.0
		if g.Worst {
			v, e = s.Values[worst][i], s.Errors[worst][i]
		} else {
			for k := range s.Values {
				v += s.Values[k][i] / n
				e += s.Errors[k][i] / n
			}
		}
		t.Measures, t.MeasureErrors = append(t.Measures, v), append(t.MeasureErrors, e)
	}
	if g.toward != nil {
		t.Score = g.toward.score(t.Measures)
	}
	return t
}
