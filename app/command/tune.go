package command

import (
	"context"
	"errors"
	"fmt"
	"io/fs"
	"path/filepath"
	"strings"
	"time"

	"pavilight/app/disk"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace/tune"
)

// tuneCommand searches for better angles.
type tuneCommand struct {
	subjectFlags
	sweepFlags
	Vary string  `type:"word" placeholder:"NAMES" help:"What may change: tiers, or proportions, with commas between, each with limits if need be: P1=40..43,C2. Tiers joined by + change by as much: P1a+P1b. C1.girdle is the size at which that tier's stop rule stops. Without it the pavilion mains and the crown mains."`
	Step float64 `default:"0.1" type:"number" least:"0.001" most:"5" unit:"degrees" placeholder:"DEG" help:"The smallest step of an angle that the machine can set, 0.001 to 5 degrees (${default})."`
	tuneGoal
	tuneLimits

	Front     bool    `help:"Show the trade-off between two goals, not one best stone."`
	Field     string  `type:"word" placeholder:"COLSxROWS" help:"Show the goal over the two things that vary, on a grid such as 40x40, not one best stone."`
	Error     float64 `default:"0.002" type:"number" least:"0.00005" most:"0.1" placeholder:"E" help:"Greatest standard error of each cell of --field, 0.00005 to 0.1 (${default})."`
	Tolerance int     `type:"number" least:"20" most:"100000" unit:"stones" placeholder:"N" help:"Cut N stones with errors of the machine and tell what that costs, 20 to 100000; 1000 is enough for most."`
	Slips     string  `type:"word" placeholder:"K=V,..." help:"The machine's errors, as standard deviations: tilt, twist, angle, index (degrees), shift (mm), and the greatest overcut (mm). Without it tilt=0.2,twist=0.3,shift=0.03,angle=0.1,index=0.1,overcut=0.02 (common practice, no source)."`
	Loss      float64 `default:"1" type:"number" least:"0.01" most:"50" unit:"percent" placeholder:"P" help:"Light return that may be lost in 95 stones of 100, in percent of the light that falls in, 0.01 to 50; the precision that this needs is told (${default})."`
	To        string  `type:"word" placeholder:"NAME" help:"Move the plan to this material, by the tangent rule and by search, beside the original."`
	Refs      string  `type:"word" placeholder:"SIDE=A:B,..." help:"Reference angles of the tangent rule, such as pavilion=42:43,crown=37:42; without it published angles of the mains."`

	Keep    string `type:"word" placeholder:"FILE" help:"Remember in this file what was seen; a run that was stopped goes on from it, one that ended is shown again."`
	Write   string `type:"word" placeholder:"FILE" help:"Write the plan that was found into this file (.toml), comments kept."`
	Out     string `type:"word" placeholder:"DIR" help:"Write the pictures and tables of --field, --front or --tolerance into this folder; of a sweep the results, results.jsonl and results.csv."`
	Seed    uint64 `default:"1" type:"number" placeholder:"N" help:"Seed of the random numbers; the same seed gives the same results (${default})."`
	Workers int    `type:"number" least:"0" most:"1024" unit:"(0 for all cores)" placeholder:"N" help:"How many cores may trace, 0 to 1024; 0 for all (0)."`
}

// tuning is what tune is about, read from all flags.
type tuning struct {
	*tuneCommand
	call
	began    time.Time
	name     string
	plan     *facets.Plan        // nil for proportions
	shape    *facets.Proportions // nil for a plan
	width    float64             // mm
	material *gems.Material
	pattern  tune.Pattern
	problem  tune.Problem
	folder   *outFolder
	writes   disk.Stamp // what the file of --write held when the search began
	bar      *progress
}

// Run does what the flags ask for.
func (k *tuneCommand) Run(c call) error {
	t := &tuning{tuneCommand: k, call: c, began: time.Now(), bar: c.progress()}
	work, err := k.work()
	if err != nil {
		return err
	}
	if err := t.read(); err != nil {
		return err
	}
	if k.Out != "" { // told before the work, not after it
		if t.folder, err = openOut(k.Out); err != nil {
			return err
		}
	}
	if err := t.probe(); err != nil {
		return err
	}
	if k.Keep != "" {
		lock, err := disk.LockFile(k.Keep)
		if errors.Is(err, disk.ErrHeld) {
			return ownFault(fmt.Errorf("--keep %s: another search is writing to this file; wait for its end, or name another file", k.Keep))
		}
		if err != nil {
			return ownFault(fmt.Errorf("--keep %s: %w", k.Keep, err))
		}
		defer lock.Release()
	}
	err = work(t)
	t.bar.clear()
	return t.fault(err)
}

// work returns what is asked for: one thing at a time.
func (k *tuneCommand) work() (func(*tuning) error, error) {
	work, asked := (*tuning).search, []string{}
	for _, w := range []struct {
		flag string
		is   bool
		work func(*tuning) error
	}{
		{"--front", k.Front, (*tuning).front},
		{"--field", k.Field != "", (*tuning).field},
		{"--tolerance", k.Tolerance != 0, (*tuning).tolerance},
		{"--to", k.To != "", (*tuning).move},
	} {
		if w.is {
			work, asked = w.work, append(asked, w.flag)
		}
	}
	switch {
	case len(asked) > 1:
		return nil, commandFaultf("%s are different questions; ask them one after the other", strings.Join(asked, " and "))
	case k.Write != "" && len(asked) == 1 && asked[0] != "--to":
		return nil, commandFaultf("--write needs one plan that was found; %s finds none", asked[0])
	case k.Write != "" && (k.Round != "" || k.Outline != ""):
		return nil, commandFaultf("--write writes a plan, and proportions are none; the values are printed")
	case k.Out != "" && (len(asked) == 0 || k.To != ""):
		return nil, commandFaultf("--out is for the pictures of --field, --front and --tolerance; --write FILE.toml keeps the plan that is found")
	case k.Refs != "" && k.To == "":
		return nil, commandFaultf("--refs belongs to --to")
	case k.Slips != "" && k.Tolerance == 0:
		return nil, commandFaultf("--slips belongs to --tolerance")
	}
	return work, nil
}

// read makes the problem of all flags.
func (t *tuning) read() error {
	if err := t.readStone(); err != nil {
		return err
	}
	t.problem = tune.Problem{Pattern: t.pattern, Material: t.material, Seed: t.Seed, Workers: t.Workers}
	if err := t.readGoal(t); err != nil {
		return err
	}
	if err := t.readLimits(t); err != nil {
		return err
	}
	var err error
	t.problem.Variables, err = t.choose(t.pattern)
	return err
}

// readStone reads the plan or the proportions.
func (t *tuning) readStone() (err error) {
	if err := t.oneSource(); err != nil {
		return err
	}
	if t.Round != "" || t.Outline != "" {
		outline, values := t.Outline, t.Proportions
		if t.Round != "" {
			outline, values = "round", t.Round
		}
		if t.shape, err = facets.ParseProportions(outline, values); err != nil {
			return commandFault(err)
		}
		if t.width = t.Width; t.width == 0 {
			t.width = usualWidth
			t.warn("No --width: the stone is taken as %d mm wide.", usualWidth)
		}
		if t.material, err = t.namedMaterial(t.library); err != nil {
			return err
		}
		if t.material == nil {
			return (&subject{}).wantMaterial()
		}
		t.name = outline + " by its proportions"
		t.pattern = tune.ProportionsPattern{Proportions: t.shape, WidthMM: t.width}
		return nil
	}
	if t.Plan != "" && strings.ToLower(filepath.Ext(t.Plan)) != ".toml" && isStoneFile(t.Plan) {
		return commandFaultf("a scan says nothing of how its facets meet, so there is nothing to keep while angles change; name a plan or measured proportions")
	}
	if t.Plan != "" && !isStoneFile(t.Plan) {
		return inputFault(t.neither())
	}
	var faults facets.Faults
	if t.plan, t.material, err = t.subjectFlags.plan(t.call); err != nil {
		if errors.As(err, &faults) {
			return inputFault(err)
		}
		return err
	}
	t.name, t.width, t.pattern = t.plan.Name, t.plan.WidthMM, tune.PlanPattern{Plan: t.plan}
	return nil
}

// choose returns what may vary of a pattern: what --vary names, or the mains.
func (t *tuning) choose(pattern tune.Pattern) ([]tune.Variable, error) {
	var names []string
	limits := map[string][2]float64{}
	if t.Vary == "" {
		if names = tune.Mains(pattern); len(names) == 0 {
			return nil, commandFaultf("no pavilion or crown tier has an angle of its own; name what may change by --vary")
		}
	} else {
		for _, part := range splitList(t.Vary) {
			name, span, ok := strings.Cut(part, "=")
			name = strings.TrimSpace(name)
			names = append(names, name)
			if !ok {
				continue
			}
			low, high, ok := strings.Cut(span, "..")
			v, err := readNumbers("--vary", low+","+high, 2, 2)
			if !ok || err != nil {
				return nil, commandFaultf("--vary %q: write the limits like P1=40..43", part)
			}
			limits[name] = [2]float64{v[0], v[1]}
		}
	}
	vs, err := tune.Choose(pattern, names...)
	if err != nil {
		return nil, commandFaultf("--vary: %w", err)
	}
	for i := range vs {
		v := &vs[i]
		if v.Unit == "degrees" {
			v.Step = t.Step
		}
		if l, ok := limits[v.Name]; ok {
			low, high := tune.Widest(pattern, *v)
			if !(l[0] >= low && l[1] <= high) {
				return nil, commandFaultf("--vary %s=%g..%g: out of range; use limits from %g to %g %s", v.Name, l[0], l[1], low, high, v.Unit)
			}
			v.Low, v.High = l[0], l[1]
		}
	}
	return vs, nil
}

// memory returns the file that --keep names, nil for none.
func (t *tuning) memory() *tune.Memory {
	if t.Keep == "" {
		return nil
	}
	var b strings.Builder
	fmt.Fprintf(&b, "%g mm of %s %g %g\n", t.width, t.material.Key, indexOf(t.material), t.material.Density)
	if t.plan != nil {
		t.plan.Write(&b) // a builder takes all
	} else {
		fmt.Fprintf(&b, "%s %s", t.shape.Outline, t.shape)
	}
	return &tune.Memory{Path: t.Keep, Purpose: b.String()}
}

func indexOf(m *gems.Material) float64 {
	n, err := m.Index(gems.LineD)
	if err != nil {
		return 0
	}
	return n
}

// probe makes sure that the files can be written, before the work.
func (t *tuning) probe() error {
	if t.Write == "" {
		return nil
	}
	if !strings.HasSuffix(strings.ToLower(t.Write), ".toml") {
		return commandFaultf("--write %s: a plan's file ends in .toml", t.Write)
	}
	if err := disk.Writable(filepath.Dir(t.Write)); err != nil {
		return unwritable(t.Write, err)
	}
	t.writes = disk.StampOf(t.Write)
	return nil
}

// write writes the plan that was found. If that fails, as where the file was edited during
// the search, the plan is printed: the search may have taken hours.
func (t *tuning) write(plan *facets.Plan) error {
	if t.Write == "" || plan == nil {
		return nil
	}
	_, err := disk.ReplaceKnown(t.Write, t.writes, plan.Write)
	if err == nil {
		return nil
	}
	t.bar.clear()
	t.warn("the plan that was found could not be written; here it is, so that it is not lost:")
	plan.Write(t.env.Stderr)
	return ownFault(fmt.Errorf("--write %w", err))
}

// forget ends the use of the file that --keep names.
func (t *tuning) forget(memory *tune.Memory) {
	if err := memory.Close(); err != nil {
		t.bar.clear()
		t.warn("--keep: not all that was seen could be remembered: %v", memoryInWords(err))
	}
}

// memoryInWords puts what the disk says of the file that --keep names into words with a
// remedy.
func memoryInWords(err error) error {
	var memory *tune.MemoryError
	var system *fs.PathError
	if errors.As(err, &memory) && errors.As(memory.Err, &system) {
		return fmt.Errorf("%s: %w", memory.Path, disk.InWords(memory.Path, system))
	}
	return err
}

// fault says whose fault an error is.
func (t *tuning) fault(err error) error {
	var told *fault
	var none *tune.NothingFitsError
	var memory *tune.MemoryError
	var faults facets.Faults
	var one *facets.Fault
	var outside *gems.RangeError
	switch {
	case err == nil || errors.As(err, &told):
		return err
	case t.Err() != nil && errors.Is(err, context.Cause(t)):
		return err
	case errors.As(err, &memory):
		return ownFault(fmt.Errorf("--keep %w", memoryInWords(err)))
	case errors.As(err, &none), errors.As(err, &outside):
		return inputFault(err)
	case errors.As(err, &faults), errors.As(err, &one):
		return inputFault(err)
	}
	return commandFault(err) // what else the engine refuses was asked for by flags
}

// answer prints a result: at the end, or what there is of it when it was stopped.
func (t *tuning) answer(stopped error, result any, csv func() [][]string, words func()) error {
	if stopped != nil && t.Err() == nil {
		return stopped
	}
	t.bar.clear()
	c := t.call
	if stopped != nil {
		c.out = t.env.Stdout // a command that was stopped prints nothing more
		c.warn("stopped; this is the best so far")
	}
	t.call.out = c.out
	var err error
	switch {
	case t.json:
		err = printJSON(c.out, result)
	case t.CSV:
		err = printCSV(c.out, csv())
	default:
		words()
	}
	return errors.Join(stopped, err)
}
