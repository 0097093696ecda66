package tune

import (
	"context"
	"math"
	"strconv"
	"strings"

	"pavilight/facets"
	"pavilight/trace"
)

// Trial is one choice of values and what became of it.
type Trial struct {
	Values []float64 `json:"values"` // of the problem's variables, in their units
	// Score is what the goal makes of the stone, more is better; it is meaningful only if
	// Fit. Error is its standard error.
	Score float64 `json:"score"`
	Error float64 `json:"error"`
	// Measures holds, for every aim, the measure itself in the mean or worst case, and its
	// standard error.
	Measures      []float64 `json:"measures"`
	MeasureErrors []float64 `json:"measure_errors"`
	Fit           bool      `json:"fit"`             // there is such a stone and it keeps every limit
	Words         []string  `json:"words,omitempty"` // why not, otherwise
	Short         float64   `json:"short,omitempty"` // how far from fit: sum of the breaches, or a stone's absence
}

// noStone is how far from fit values count for which there is no stone at all. Any
// breach of limits counts as nearer.
const noStone = 100

// effort is how long a stone is looked at.
type effort struct {
	rays int     // at most, about
	err  float64 // or until the standard error of every entry is below, if above 0
}

// The efforts of a search: to find the region, to settle on the steps, to claim.
var (
	rough  = effort{rays: 12_000}
	fine   = effort{rays: 50_000}
	claims = effort{err: 0.0002}
)

// judge turns values into trials. It remembers all it was asked, so that a search that
// was stopped runs through what is known in no time. It is not for several goroutines
// at once: each trial already uses all workers.
type judge struct {
	*Problem
	ratio float64 // length over width to keep
	known map[string]Trial
	keep  func(key string, t Trial) error // writes down what is new; may be nil
	asked int
}

func newJudge(p *Problem) (*judge, error) {
	if err := p.check(); err != nil {
		return nil, err
	}
	j := &judge{Problem: p, known: map[string]Trial{}}
	if s, err := p.Pattern.Build(nil, nil); err == nil {
		j.ratio = s.Measure().Ratio
	}
	return j, nil
}

// key names a trial in the memory.
func (j *judge) key(values []float64, e effort, seed uint64) string {
	var b strings.Builder
	for _, v := range values {
		b.WriteString(strconv.FormatFloat(v, 'g', -1, 64))
		b.WriteByte(' ')
	}
	b.WriteString(strconv.Itoa(e.rays) + " " + strconv.FormatFloat(e.err, 'g', -1, 64) + " " + strconv.FormatUint(seed, 10))
	return b.String()
}

// try judges values at the problem's own seed.
func (j *judge) try(ctx context.Context, values []float64, e effort) (Trial, error) {
	return j.trySeed(ctx, values, e, j.Seed)
}

// trySeed judges values. The only errors are those of ctx, of the file that keeps the
// trials, and of a scene that cannot be traced at all.
func (j *judge) trySeed(ctx context.Context, values []float64, e effort, seed uint64) (Trial, error) {
	key := j.key(values, e, seed)
	if t, ok := j.known[key]; ok {
		return t, nil
	}
	t, err := j.measure(ctx, values, e, seed)
	if err != nil {
		return Trial{}, err
	}
	j.asked++
	j.known[key] = t
	if j.keep != nil {
		if err := j.keep(key, t); err != nil {
			return Trial{}, err
		}
	}
	return t, nil
}

func (j *judge) measure(ctx context.Context, values []float64, e effort, seed uint64) (Trial, error) {
	if err := context.Cause(ctx); err != nil {
		return Trial{}, err
	}
	t := Trial{Values: append([]float64(nil), values...)}
	for i, v := range j.Variables {
		if x := values[i]; !(x >= v.Low && x <= v.High) {
			t.Words = append(t.Words, v.Name+" lies outside its limits")
			t.Short += noStone
		}
	}
	if t.Short > 0 {
		return t, nil
	}
	s, err := j.Pattern.Build(j.names(), values)
	if err != nil {
		t.Words, t.Short = strings.Split(err.Error(), "\n"), noStone
		return t, nil
	}
	m := s.Measure()
	for _, b := range j.Limits.broken(s, &m, j.Material, j.ratio) {
		t.Words = append(t.Words, b.Words)
		t.Short += min(b.By, noStone/10)
	}
	t.Fit = t.Short == 0
	return t, j.look(ctx, s, &m, &t, e, seed)
}

// look traces the stone in every case and scores it.
func (j *judge) look(ctx context.Context, s *facets.Stone, m *facets.Measures, t *Trial, e effort, seed uint64) error {
	values := make([][measures]float64, len(j.Goal.Cases)) // by case
	errs := make([][measures]float64, len(j.Goal.Cases))
	for view, cases := range j.byView() {
		scene := trace.Scene{Stone: s, Material: j.Material}
		for _, k := range cases {
			scene.Surroundings = append(scene.Surroundings, j.Goal.Cases[k].Surrounding)
		}
		const pixels = 16 // the map itself is not wanted
		settings := trace.Settings{View: view, Head: j.Head, Pixels: pixels, Seed: seed, Workers: j.Workers, Error: e.err}
		if e.rays > 0 {
			settings.Samples = max(1, e.rays/(pixels*pixels))
		}
		r, err := trace.Run(ctx, scene, settings, nil)
		if err != nil {
			return err
		}
		for i, k := range cases {
			c := &r.Columns[i]
			values[k] = [measures]float64{c.Ledger.Returned, c.Ledger.Leaked, c.Ledger.Head, c.LeakyArea, c.WindowedArea, m.Carats(j.Material.Density)}
			errs[k] = [measures]float64{c.StandardError.Returned, c.StandardError.Leaked, c.StandardError.Head, c.LeakyError, c.WindowedError, 0}
		}
	}

	// The score of each case, then their mean or the worst.
	worst, worstScore, worstError := -1, math.Inf(1), 0.0
	var mean, spread float64
	for k := range values {
		score, variance := 0.0, 0.0
		for _, a := range j.Goal.Aims {
			score += a.Weight * values[k][a.Measure]
			variance += a.Weight * a.Weight * errs[k][a.Measure] * errs[k][a.Measure]
		}
		if score < worstScore {
			worst, worstScore, worstError = k, score, math.Sqrt(variance)
		}
		mean += score / float64(len(values))
		spread += variance
	}
	t.Score, t.Error = mean, math.Sqrt(spread)/float64(len(values))
	if j.Goal.Worst {
		t.Score, t.Error = worstScore, worstError
	}
	for _, a := range j.Goal.Aims {
		v, e := 0.0, 0.0
		if j.Goal.Worst {
			v, e = values[worst][a.Measure], errs[worst][a.Measure]
		} else {
			for k := range values {
				v += values[k][a.Measure] / float64(len(values))
				e = math.Hypot(e, errs[k][a.Measure]/float64(len(values)))
			}
		}
		t.Measures, t.MeasureErrors = append(t.Measures, v), append(t.MeasureErrors, e)
	}
	return nil
}

// byView returns the cases that share a view, which are traced together.
func (j *judge) byView() map[trace.View][]int {
	views := map[trace.View][]int{}
	for k, c := range j.Goal.Cases {
		views[c.View] = append(views[c.View], k)
	}
	return views
}

// merit orders trials for the search: fit stones by score, others below all of them
// by how far from fit they are.
func (t *Trial) merit() float64 {
	if t.Fit {
		return t.Score
	}
	return -1e3 - t.Short
}
