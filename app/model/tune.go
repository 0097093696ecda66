package model

import (
	"context"
	"errors"
	"image"
	"io/fs"
	"path/filepath"
	"runtime"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"time"

	"pavilight/app/disk"
	"pavilight/app/picture"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
	"pavilight/trace/tune"
)

// TuneTask is a question that the room for tuning asks.
type TuneTask int

// The questions.
const (
	FindBetter   TuneTask = iota // one better stone
	ShowField                    // the goal over the two things that vary
	TellErrors                   // what a machine's errors cost
	TradeTwo                     // the trade-off between two goals
	MoveMaterial                 // the plan in another material
)

// TuneTasks returns all questions in the order in which they are offered.
func TuneTasks() []TuneTask {
	return []TuneTask{FindBetter, ShowField, TellErrors, TradeTwo, MoveMaterial}
}

// Name returns the question's name on the screen.
func (t TuneTask) Name() words.Key {
	return [...]words.Key{"Find better angles", "Show the goal over two", "What errors cost", "Trade two goals off", "Another material"}[t]
}

// CanBeSteady reports whether the question can ask for a stone that forgives a slip. A
// trade-off shows stones as they are, and errors are tried out one by one.
func (t TuneTask) CanBeSteady() bool { return t != TellErrors && t != TradeTwo }

// doing says what a run is at before it tells more.
func (t TuneTask) doing() words.Key {
	return [...]words.Key{"searching", "seeing the field", "cutting with errors", "searching", "moving"}[t]
}

// searchPhases are what a search tells that it is at.
func searchPhases() []words.Key {
	return []words.Key{"looking round", "climbing", "walking on the steps", "settling on the steps", "comparing the last few",
		"tracing the winner anew", "done"}
}

// MeasureName returns what people call a measure, within a sentence.
func MeasureName(m tune.Measure) words.Key {
	return [...]words.Key{
		tune.LightReturn: "light return", tune.Leakage: "leakage", tune.HeadShade: "darkened by the head",
		tune.LeakyArea: "leaky area", tune.WindowedArea: "windowed area", tune.Weight: "weight", tune.Luminance: "luminance",
		tune.DarkArea: "dark area", tune.Contrast: "contrast", tune.Fire: "fire", tune.Sparkle: "sparkle",
	}[m]
}

// TuneChoice is one thing that may vary, and whether it shall.
type TuneChoice struct {
	tune.Variable
	Chosen bool
}

// Tune is the state behind the room in which a plan is tuned: what may vary, what the
// stone is to be good at, and what was found. Its methods run on the window's goroutine;
// a run's answers come back through do. A change of plan or question ends the run under
// way; what was found stays until the next run begins.
type Tune struct {
	Task     TuneTask
	Choices  []TuneChoice
	Aims     []tune.Aim
	Limits   tune.Limits
	Seen     []TuneAround // surroundings to choose from: the columns of the maps
	Light    *trace.Light // for what an eye sees; nil for the even light
	Tilts    []facets.Angle
	Worst    bool
	Step     float64 // degrees
	Steady   float64 // degrees; a stone counts no more than the worst with one angle off by up to so much, 0 for none
	Machine  tune.Machine
	Draws    int            // of TellErrors
	Cells    int            // of ShowField, along each edge; 0 for the usual number
	To       *gems.Material // of MoveMaterial
	KeepFile string         // remembers what was seen; empty for none

	Running bool
	Stopped bool   // the run was stopped before its end
	Phase   string // what the run is doing, in words
	Done    float64
	Trouble error // why there is no answer; nil if there is one

	Start, Best   *tune.Trial // so far; nil before the first
	StartPicture  *image.RGBA // light return as the stone stands; nil before it is traced
	BestPicture   *image.RGBA // light return of the best so far
	Outcome       *tune.Outcome
	Bodies        [2]*facets.Measures // of the outcome: as the stone stands, and of the best; nil where there is no stone
	Field         *tune.Field
	Tolerance     *tune.Tolerance
	Front         *tune.Front
	Moved         *tune.Moved
	Pick          *tune.Trial     // of the field or the front, by hand; nil for the best
	Chart         *image.RGBA     // of the field, the front or what errors cost; nil before there is one
	variablesUsed []tune.Variable // by the answer shown
	aimsUsed      []tune.Aim      // likewise
	limitsUsed    tune.Limits     // likewise
	steadyUsed    float64         // likewise, degrees
	planUsed      *facets.Plan    // likewise
	faceUpUsed    bool            // likewise: at no other tilt

	do       func(func())
	onChange func()
	words    *words.Words
	plan     *facets.Plan
	material *gems.Material
	head     facets.Angle
	number   int // of the run that counts
	cancel   context.CancelFunc
	finished chan struct{}
	painter  painter
	width    int // of the chart, pixels
	painted  sync.WaitGroup
}

// TuneAround is a surrounding, and whether the stone is judged in it.
type TuneAround struct {
	Around
	Chosen bool
}

// NewTune returns the state before a plan was opened: light return, face-up, the usual
// machine. do hands work to the window's goroutine, in order, without waiting for it;
// onChange is called there after every change.
func NewTune(do func(func()), onChange func()) *Tune {
	t := &Tune{
		Aims: []tune.Aim{{Measure: tune.LightReturn, Weight: 1}}, Tilts: []facets.Angle{0},
		Limits: tune.Limits{LeastFacetMM: tune.UsualFacetMM, KeepRatio: 0.01},
		Step:   0.1, Machine: tune.UsualMachine(), Draws: 1000, do: do, onChange: onChange,
	}
	t.painter = painter{do: do, open: &t.painted}
	return t
}

// SetWords has the answers said in a language; before, it is English.
func (t *Tune) SetWords(w *words.Words) { t.words = w }

// SetPlan takes another state of the plan, or of how it is looked at. Choices and limits
// of tiers that are still there stay as they were; another plan has its mains chosen.
func (t *Tune) SetPlan(plan *facets.Plan, material *gems.Material, around []Around, head facets.Angle) {
	seen := make([]TuneAround, len(around))
	same := t.plan == plan && t.head == head && len(around) == len(t.Seen)
	for i, a := range around {
		seen[i] = TuneAround{a, i == 0}
		if i < len(t.Seen) {
			seen[i].Chosen = t.Seen[i].Chosen
			same = same && t.Seen[i].Around == a
		}
	}
	if same {
		return
	}
	t.Stop()
	before := t.Choices
	if t.plan != nil && (t.plan.Name != plan.Name || t.plan.File != plan.File) {
		before = nil
	}
	t.plan, t.material, t.Seen, t.head = plan, material, seen, head
	pattern := tune.PlanPattern{Plan: plan}
	t.Choices = nil
	chosen := false
	for _, v := range pattern.Variables() {
		c := TuneChoice{Variable: v}
		for _, old := range before {
			if old.Name == v.Name {
				c.Chosen = old.Chosen
				if old.Low <= v.Now && v.Now <= old.High { // else they were meant for another place
					c.Low, c.High = old.Low, old.High
				}
			}
		}
		chosen = chosen || c.Chosen
		t.Choices = append(t.Choices, c)
	}
	if !chosen {
		for _, name := range strings.Split(strings.Join(tune.Mains(pattern), "+"), "+") {
			for i := range t.Choices {
				t.Choices[i].Chosen = t.Choices[i].Chosen || t.Choices[i].Name == name
			}
		}
	}
	t.onChange()
}

// SeeIn has the stone judged in a surrounding, or not.
func (t *Tune) SeeIn(i int, chosen bool) {
	t.Seen[i].Chosen = chosen
	t.onChange()
}

// Ask takes another question. The answer to the last one stays until it is asked.
func (t *Tune) Ask(task TuneTask) {
	t.Task = task
	t.onChange()
}

// Aim takes other goals.
func (t *Tune) Aim(aims []tune.Aim) {
	t.Aims = aims
	t.onChange()
}

// Choose has a variable vary, or not.
func (t *Tune) Choose(i int, chosen bool) {
	t.Choices[i].Chosen = chosen
	t.onChange()
}

// SetLimits sets how far a variable may go. It fails in words where that means nothing.
func (t *Tune) SetLimits(i int, low, high float64) error {
	v := t.Choices[i].Variable
	least, most := tune.Widest(tune.PlanPattern{Plan: t.plan}, v)
	if !(low >= least && high <= most && low <= high) {
		return words.Errorf("%s: use limits from %g to %g %s, the smaller first", VariableName(t.words, v), least, most, unitName(v))
	}
	t.Choices[i].Low, t.Choices[i].High = low, high
	t.onChange()
	return nil
}

// variables returns what shall vary, of a plan that may be another than the one open.
func (t *Tune) variables(p tune.Pattern) ([]tune.Variable, error) {
	var names []string
	for _, c := range t.Choices {
		if c.Chosen {
			names = append(names, c.Name)
		}
	}
	if len(names) == 0 {
		return nil, words.Errorf("nothing is chosen that may vary; choose at least one tier")
	}
	vs, err := tune.Choose(p, names...)
	for i := range vs {
		for _, c := range t.Choices {
			if c.Name == vs[i].Name {
				vs[i].Low, vs[i].High = c.Low, c.High
			}
		}
		if vs[i].Unit == "degrees" {
			vs[i].Step = t.Step
		}
	}
	return vs, err
}

// problem returns the question that the room asks.
func (t *Tune) problem() (*tune.Problem, error) {
	if t.plan == nil || t.material == nil {
		return nil, words.Errorf("open a plan that says what it is made of")
	}
	plan := t.plan.Clone()
	plan.File = "" // what is tried stands in no file, so faults name none
	p := &tune.Problem{Pattern: tune.PlanPattern{Plan: plan}, Material: t.material, Limits: t.Limits, Head: t.head, Seed: 1,
		Workers: max(1, runtime.GOMAXPROCS(0)-1)} // the window stays alive
	p.Goal = tune.Goal{Aims: t.Aims, Worst: t.Worst}
	if t.Task.CanBeSteady() {
		p.Steady = facets.Angle(t.Steady) * facets.Degree
	}
	var around []Around
	for _, a := range t.Seen {
		if a.Chosen {
			around = append(around, a.Around)
		}
	}
	if len(around) == 0 {
		return p, words.Errorf("no surrounding is chosen; say in what the stone is seen")
	}
	for _, s := range surroundings(around) {
		for _, tilt := range t.Tilts {
			p.Goal.Cases = append(p.Goal.Cases, tune.Case{Surrounding: s, View: trace.View{Tilt: tilt}, Light: t.Light})
		}
	}
	if p.Limits.MainMargin > 0 || p.Limits.BreakMargin > 0 {
		p.Limits.MarginIn = around[0].Medium
	}
	var err error
	p.Variables, err = t.variables(p.Pattern)
	if t.Task == TellErrors { // it varies nothing
		err = nil
	}
	return p, err
}

// Begin starts a run of the task. Trouble says in words why it cannot.
func (t *Tune) Begin() {
	t.Stop()
	t.Trouble, t.Stopped, t.Start, t.Best, t.StartPicture, t.BestPicture = nil, false, nil, nil, nil, nil
	t.Outcome, t.Field, t.Tolerance, t.Front, t.Moved, t.Pick, t.Chart = nil, nil, nil, nil, nil, nil, nil
	t.Bodies = [2]*facets.Measures{}
	t.painter.forget()
	p, err := t.problem()
	if err == nil && t.Task == ShowField && len(p.Variables) != 2 {
		err = words.Errorf("a field lies over two things that vary, and %d are chosen", len(p.Variables))
	}
	if err == nil && t.Task == TradeTwo && len(p.Goal.Aims) != 2 {
		err = words.Errorf("a trade-off is between two goals; name the second one")
	}
	if err == nil && t.Task == MoveMaterial && t.To == nil {
		err = words.Errorf("choose the material to move to")
	}
	if err != nil {
		t.Trouble = err
		t.onChange()
		return
	}
	ctx, cancel := context.WithCancel(context.Background())
	t.number++
	t.variablesUsed, t.aimsUsed, t.limitsUsed, t.planUsed = p.Variables, p.Goal.Aims, p.Limits, t.plan
	t.steadyUsed = p.Steady.Degrees()
	t.faceUpUsed = !slices.ContainsFunc(p.Goal.Cases, func(c tune.Case) bool { return c.View.Tilt != 0 })
	t.Running, t.Phase, t.Done, t.cancel, t.finished = true, t.words.Say(t.Task.doing()), 0, cancel, make(chan struct{})
	r := &tuneRun{tune: t, number: t.number, problem: p, task: t.Task, to: t.To, machine: t.Machine, draws: t.Draws, cells: t.Cells, keep: t.KeepFile,
		plan: t.plan, choose: t.frozen(), pace: newPace()}
	finished := t.finished
	go func() {
		defer close(finished)
		defer cancel()
		err := r.work(ctx)
		cancelled := ctx.Err() != nil // now: on the way out this goroutine cancels it, too
		t.do(func() { t.ended(r.number, err, cancelled) })
	}()
	t.onChange()
}

// frozen returns what shall vary as it is chosen now: a run must not see later choices.
func (t *Tune) frozen() func(tune.Pattern) ([]tune.Variable, error) {
	choices := append([]TuneChoice(nil), t.Choices...)
	f := &Tune{Choices: choices, Step: t.Step}
	return f.variables
}

// Stop ends the run under way and keeps what it found. It does not wait; see Wait.
func (t *Tune) Stop() {
	if t.cancel != nil {
		t.cancel()
	}
}

// Wait returns when the goroutine of the last run has ended. It must not be called on
// the window's goroutine where do waits for that.
func (t *Tune) Wait() {
	if t.finished != nil {
		<-t.finished
	}
	t.painted.Wait()
}

func (t *Tune) ended(number int, err error, cancelled bool) {
	if number != t.number {
		return
	}
	t.Running, t.cancel = false, nil
	if t.Stopped = cancelled; !cancelled {
		t.Trouble = err
		t.Done = 1
	}
	t.onChange()
}

// tuneRun is one run; it belongs to its own goroutine.
type tuneRun struct {
	tune    *Tune
	number  int
	problem *tune.Problem
	task    TuneTask
	to      *gems.Material
	machine tune.Machine
	draws   int
	cells   int
	keep    string
	plan    *facets.Plan
	choose  func(tune.Pattern) ([]tune.Variable, error)
	pace    *pace
	wanted  atomic.Pointer[tune.Trial] // to be painted
}

// hand gives the window's goroutine something to take, unless another run counts by then.
func (r *tuneRun) hand(take func(t *Tune)) {
	t := r.tune
	t.do(func() {
		if r.number == t.number {
			take(t)
			t.paintChart()
			t.onChange()
		}
	})
}

// progress hands over how far a search has come, a few times a second.
func (r *tuneRun) progress(p tune.Progress) {
	if len(p.Best.Values) > 0 {
		best := p.Best
		r.wanted.Store(&best)
	}
	if !r.pace.due(time.Now()) {
		return
	}
	r.hand(func(t *Tune) {
		t.Phase, t.Done = t.words.Among(searchPhases(), p.Phase), p.Done
		if len(p.Start.Values) > 0 {
			t.Start = &p.Start
		}
		if len(p.Best.Values) > 0 {
			t.Best = &p.Best
		}
	})
}

func (r *tuneRun) share(done float64) {
	if r.pace.due(time.Now()) {
		r.hand(func(t *Tune) { t.Done = done })
	}
}

// work does the task.
func (r *tuneRun) work(ctx context.Context) error {
	var memory *tune.Memory
	if r.keep != "" {
		var text strings.Builder
		r.plan.Write(&text) // a builder takes all
		memory = &tune.Memory{Path: r.keep, Purpose: text.String()}
		lock, err := disk.LockFile(r.keep)
		if errors.Is(err, disk.ErrHeld) {
			return words.Errorf("another search is writing to the record %s; wait for its end, or keep another one", filepath.Base(r.keep))
		}
		if err != nil {
			return err
		}
		defer lock.Release()
	}
	return errors.Join(recordInWords(r.do(ctx, memory)), recordInWords(memory.Close()))
}

// recordInWords puts what the disk says of the record into words with a remedy.
func recordInWords(err error) error {
	var memory *tune.MemoryError
	var system *fs.PathError
	if errors.As(err, &memory) && errors.As(memory.Err, &system) {
		return words.Errorf("not all that was seen is in the record: %v", disk.InWords(memory.Path, system))
	}
	return err
}

// do does the task with a memory, which may be nil.
func (r *tuneRun) do(ctx context.Context, memory *tune.Memory) error {
	switch r.task {
	case ShowField:
		f, err := tune.Sweep(ctx, r.problem, tune.FieldSettings{Columns: r.cells, Rows: r.cells}, memory, func(f *tune.Field) {
			if r.pace.due(time.Now()) {
				r.hand(func(t *Tune) { t.Field, t.Done = f, f.Done })
			}
		})
		if f != nil {
			r.hand(func(t *Tune) {
				t.Field = f
				if best, ok := f.Best(); ok {
					t.Start, t.Best = &f.Now, &f.Trials[best]
				}
			})
		}
		return err
	case TellErrors:
		o, err := tune.Tolerate(ctx, &tune.ToleranceProblem{Plan: r.plan, Material: r.problem.Material, Case: r.problem.Goal.Cases[0],
			Head: r.problem.Head, Machine: r.machine, Draws: r.draws, Seed: 1, Workers: r.problem.Workers}, r.share)
		if o != nil {
			r.hand(func(t *Tune) { t.Tolerance = o })
		}
		return err
	case TradeTwo:
		f, err := tune.TradeOff(ctx, r.problem, memory, r.progress)
		if f != nil {
			r.hand(func(t *Tune) { t.Front = f })
		}
		return err
	case MoveMaterial:
		refs, err := tune.UsualReferences(r.problem.Material, r.to)
		if err != nil {
			return err
		}
		media := []*gems.Material{}
		for _, c := range r.problem.Goal.Cases {
			media = append(media, c.Surrounding.Medium)
		}
		m, err := tune.Move(ctx, r.problem, r.to, refs, r.choose, media, memory, r.progress)
		if m != nil {
			r.hand(func(t *Tune) { t.Moved, t.Outcome = m, m.Outcome })
		}
		return err
	}
	return r.search(ctx, memory)
}

// search looks for the best stone and paints the best so far beside the start.
func (r *tuneRun) search(ctx context.Context, memory *tune.Memory) error {
	searching, done := context.WithCancel(ctx)
	painted := make(chan struct{})
	go func() {
		defer close(painted)
		r.paintBest(searching)
	}()
	o, err := tune.Search(ctx, r.problem, memory, r.progress)
	done()
	<-painted
	if o != nil {
		last := r.picture(context.WithoutCancel(ctx), &o.Best)
		bodies := [2]*facets.Measures{r.body(&o.Start), r.body(&o.Best)}
		r.hand(func(t *Tune) {
			t.Outcome, t.Start, t.Best, t.Bodies = o, &o.Start, &o.Best, bodies
			if last != nil {
				t.BestPicture = last
			}
		})
	}
	return err
}

// paintBest paints the start, and then every now and then the best so far.
func (r *tuneRun) paintBest(ctx context.Context) {
	start := r.picture(ctx, nil)
	r.hand(func(t *Tune) { t.StartPicture = start })
	const rest = 500 * time.Millisecond // painting takes time from the search
	var shown *tune.Trial
	for {
		select {
		case <-ctx.Done():
			return
		case <-time.After(rest):
		}
		best := r.wanted.Load()
		if best == nil || best == shown || !best.Fit {
			continue
		}
		shown = best
		if img := r.picture(ctx, best); img != nil {
			r.hand(func(t *Tune) { t.BestPicture = img })
		}
	}
}

// stone returns that of a trial, of the plan as it stands for nil.
func (r *tuneRun) stone(trial *tune.Trial) (*facets.Stone, error) {
	var names []string
	var values []float64
	if trial != nil {
		for _, v := range r.problem.Variables {
			names = append(names, v.Name)
		}
		values = trial.Values
	}
	return r.problem.Pattern.Build(names, values)
}

// body returns the measures of a trial's stone, nil if there is none.
func (r *tuneRun) body(trial *tune.Trial) *facets.Measures {
	stone, err := r.stone(trial)
	if err != nil {
		return nil
	}
	m := stone.Measure()
	return &m
}

// tunePixels is the edge of the two pictures.
const tunePixels = 240

// picture paints the light return of a trial, of the plan as it stands for nil; nil if it
// cannot be had.
func (r *tuneRun) picture(ctx context.Context, trial *tune.Trial) *image.RGBA {
	stone, err := r.stone(trial)
	if err != nil {
		return nil
	}
	first := r.problem.Goal.Cases[0]
	result, err := trace.Run(ctx, trace.Scene{Stone: stone, Material: r.problem.Material, Surroundings: []trace.Surrounding{first.Surrounding}},
		trace.Settings{View: first.View, Head: r.problem.Head, Pixels: tunePixels, Samples: 8, Seed: r.problem.Seed, Workers: 1}, nil)
	if err != nil {
		return nil
	}
	img := image.NewRGBA(image.Rect(0, 0, tunePixels, tunePixels))
	field := result.Columns[0].Map.Field(trace.Returned)
	picture.Paint(img, field, tunePixels, picture.Cividis())
	clearOutside(img, field)
	return img
}
