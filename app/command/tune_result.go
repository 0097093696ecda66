package command

import (
	"encoding/csv"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"text/tabwriter"
	"time"

	"pavilight/app/cell"
	"pavilight/app/chart"
	"pavilight/app/disk"
	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/trace/tune"
)

// tuneAbout is what every answer of tune says of its question.
type tuneAbout struct {
	Plan        string         `json:"plan"`
	Material    string         `json:"material"`
	BodyColour  string         `json:"body_colour"`
	WidthMM     float64        `json:"width_mm"`
	Goal        []tuneAim      `json:"goal"`
	Cases       []tuneCase     `json:"cases"`
	Worst       bool           `json:"worst"`      // the worst case counts, not their mean
	SteadyDeg   float64        `json:"steady_deg"` // a stone counts no more than the worst of those with one angle off by so much
	HeadDeg     float64        `json:"head_deg"`
	Variables   []tuneVariable `json:"variables"`
	Seed        uint64         `json:"seed"`
	Seconds     float64        `json:"seconds,omitempty"` // left out in a sweep
	Interrupted bool           `json:"interrupted"`
}

type tuneAim struct {
	Measure string  `json:"measure"`
	Weight  float64 `json:"weight"`
}

type tuneCase struct {
	Medium      string  `json:"medium"`
	Arrangement string  `json:"arrangement"` // around or dish
	TiltDeg     float64 `json:"tilt_deg"`
	TurnDeg     float64 `json:"turn_deg"`
	Light       string  `json:"light"`
}

type tuneVariable struct {
	Name string  `json:"name"`
	Unit string  `json:"unit"`
	Now  float64 `json:"now"`
	Low  float64 `json:"low"`
	High float64 `json:"high"`
	Step float64 `json:"step"`
}

// tuneStone is one stone that was looked at.
type tuneStone struct {
	Values   map[string]float64     `json:"values"`
	Score    *float64               `json:"score"` // null where it was not traced
	Error    *float64               `json:"standard_error"`
	Measures map[string]tuneMeasure `json:"measures"`
	Fits     bool                   `json:"fits"`
	Why      []string               `json:"why,omitempty"` // it does not fit
}

type tuneMeasure struct {
	Value float64 `json:"value"`
	Error float64 `json:"standard_error"`
}

func (t *tuning) about(stopped error) tuneAbout {
	p := &t.problem
	a := tuneAbout{
		Plan: t.name, Material: t.material.Key, BodyColour: t.material.Describe().BodyColour, WidthMM: t.width,
		Worst: p.Goal.Worst, SteadyDeg: p.Steady.Degrees(), HeadDeg: p.Head.Degrees(), Seed: p.Seed, Seconds: time.Since(t.began).Seconds(), Interrupted: stopped != nil,
	}
	if t.inSweep {
		a.Seconds = 0
	}
	for _, aim := range p.Goal.Aims {
		a.Goal = append(a.Goal, tuneAim{aim.Measure.String(), aim.Weight})
	}
	for _, c := range p.Goal.Cases {
		one := tuneCase{Medium: c.Surrounding.Medium.Key, Arrangement: "around", TiltDeg: c.View.Tilt.Degrees(), TurnDeg: c.View.Turn.Degrees(), Light: "even"}
		if c.Surrounding.Dish {
			one.Arrangement = "dish"
		}
		if c.Light != nil {
			one.Light = c.Light.Name
		}
		a.Cases = append(a.Cases, one)
	}
	for _, v := range p.Variables {
		a.Variables = append(a.Variables, tuneVariable(v))
	}
	return a
}

// stone returns a trial as JSON has it.
func (t *tuning) stone(trial tune.Trial) tuneStone {
	s := tuneStone{Values: map[string]float64{}, Measures: map[string]tuneMeasure{}, Fits: trial.Fit, Why: trial.Words}
	for i, v := range trial.Values {
		s.Values[t.problem.Variables[i].Name] = v
	}
	if trial.Seen {
		s.Score, s.Error = &trial.Score, &trial.Error
		for i, m := range trial.Measures {
			s.Measures[t.problem.Goal.Aims[i].Measure.String()] = tuneMeasure{m, trial.MeasureErrors[i]}
		}
	}
	return s
}

// measureName is what people call a measure, with its unit.
func measureName(m tune.Measure) string {
	if m == tune.Weight {
		return m.Name() + ", ct"
	}
	return m.Name()
}

// goalWords says in words what the stone is to be good at.
func (t *tuning) goalWords() string {
	var parts []string
	for _, a := range t.problem.Goal.Aims {
		word := measureName(a.Measure)
		switch {
		case len(t.problem.Goal.Aims) > 1:
			word = fmt.Sprintf("%+g × %s", a.Weight, word)
		case a.Weight < 0:
			word = "little " + word
		}
		parts = append(parts, word)
	}
	return strings.Join(parts, " ")
}

// caseWords says in words how the stone is seen.
func (t *tuning) caseWords() string {
	var media, tilts, lights []string
	add := func(list []string, word string) []string {
		for _, w := range list {
			if w == word {
				return list
			}
		}
		return append(list, word)
	}
	byEye := false
	for _, a := range t.problem.Goal.Aims {
		byEye = byEye || a.Measure.ByEye()
	}
	for _, c := range t.problem.Goal.Cases {
		name := c.Surrounding.Medium.Key
		if c.Surrounding.Dish {
			name = "a dish of " + name
		}
		media = add(media, name)
		tilts = add(tilts, fmt.Sprintf("%g°", c.View.Tilt.Degrees()))
		if c.Light != nil {
			lights = add(lights, c.Light.Name)
		} else {
			lights = add(lights, "even")
		}
	}
	words := "in " + strings.Join(media, ", ")
	if len(tilts) == 1 && tilts[0] == "0°" {
		words += ", face-up"
	} else {
		words += ", rocked by " + strings.Join(tilts, ", ")
	}
	if byEye {
		words += ", light " + strings.Join(lights, ", ")
	}
	words += fmt.Sprintf(", head %g°", t.problem.Head.Degrees())
	if t.problem.Steady > 0 {
		words += fmt.Sprintf(", steady within %g°", t.problem.Steady.Degrees())
	}
	if len(t.problem.Goal.Cases) > 1 {
		if t.problem.Goal.Worst {
			words += ", the worst case"
		} else {
			words += ", mean of all cases"
		}
	}
	return words
}

func (t *tuning) stoneLine() string {
	return fmt.Sprintf("%s, %s, %.2f mm", t.name, t.material.Key, t.width)
}

// value writes a variable's value with its unit.
func valueOf(v tune.Variable, x float64) string {
	switch v.Unit {
	case "degrees":
		return strconv.FormatFloat(x, 'f', 2, 64) + "°"
	case "%":
		return strconv.FormatFloat(x, 'f', 1, 64) + " %"
	}
	return strconv.FormatFloat(x, 'f', 3, 64)
}

// changeOf writes a change of a variable; none as such.
func changeOf(v tune.Variable, by float64) string {
	if math.Abs(by) < 5e-4 {
		return "as it is"
	}
	if v.Unit == "degrees" {
		side := "steeper"
		if by < 0 {
			side = "flatter"
		}
		return fmt.Sprintf("%.2f° %s", math.Abs(by), side)
	}
	return strings.TrimSpace(fmt.Sprintf("%+.3g %s", by, v.Unit))
}

// search looks for the best stone.
func (t *tuning) search() error {
	memory := t.memory()
	o, err := tune.Search(t, &t.problem, memory, t.report())
	t.forget(memory)
	if o == nil {
		return err
	}
	result := struct {
		tuneAbout
		Start     tuneStone   `json:"start"`
		Best      tuneStone   `json:"best"`
		Gain      float64     `json:"gain"`
		GainError float64     `json:"gain_standard_error"`
		Better    bool        `json:"better"` // the gain is more than chance explains at 1 in 1,000
		Nearby    []tuneStone `json:"nearby"`
		Tried     int         `json:"tried"`
		Wrote     string      `json:"wrote,omitempty"`
	}{t.about(err), t.stone(o.Start), t.stone(o.Best), o.Gain, o.GainError, o.Better, nil, o.Tried, t.Write}
	for _, n := range o.Nearby {
		result.Nearby = append(result.Nearby, t.stone(n))
	}
	if plan, ok := t.pattern.(tune.PlanPattern); ok {
		if err := t.write(plan.With(t.names(), o.Best.Values)); err != nil {
			return err
		}
	}
	return t.answer(err, result,
		func() [][]string {
			rows := [][]string{{"name", "unit", "now", "best"}}
			for i, v := range t.problem.Variables {
				rows = append(rows, []string{v.Name, v.Unit, exact(v.Now), exact(o.Best.Values[i])})
			}
			rows = append(rows, []string{"score", "", exact(o.Start.Score), exact(o.Best.Score)},
				[]string{"standard error", "", exact(o.Start.Error), exact(o.Best.Error)})
			for i, a := range t.problem.Goal.Aims {
				row := []string{a.Measure.String(), "", "", exact(o.Best.Measures[i])}
				if o.Start.Seen {
					row[2] = exact(o.Start.Measures[i])
				}
				rows = append(rows, row)
			}
			return rows
		},
		func() { t.printOutcome(o) })
}

func (t *tuning) names() []string {
	var names []string
	for _, v := range t.problem.Variables {
		names = append(names, v.Name)
	}
	return names
}

// report shows the progress of a search.
func (t *tuning) report() func(tune.Progress) {
	return func(p tune.Progress) { t.bar.show(p.Done) }
}

// nearLoss is the loss within NearStep beside the best that is worth a warning, as a
// share of the score.
const nearLoss = 0.02

func (t *tuning) printOutcome(o *tune.Outcome) {
	w := t.out
	fmt.Fprintf(w, "%s\n%s %s\n\n", t.stoneLine(), t.goalWords(), t.caseWords())
	t.printChanges(w, t.problem.Variables, o.Best.Values)
	fmt.Fprintln(w)
	tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	fmt.Fprintln(tab, "\tas it stands\tbest")
	row := func(name string, of func(tr *tune.Trial) (float64, float64)) {
		cell := func(tr *tune.Trial) string {
			if !tr.Seen {
				return "–"
			}
			return withError(of(tr))
		}
		fmt.Fprintf(tab, "%s\t%s\t%s\n", name, cell(&o.Start), cell(&o.Best))
	}
	for i, a := range t.problem.Goal.Aims {
		row(measureName(a.Measure), func(tr *tune.Trial) (float64, float64) { return tr.Measures[i], tr.MeasureErrors[i] })
	}
	if len(t.problem.Goal.Aims) > 1 || t.problem.Steady > 0 {
		row("goal", func(tr *tune.Trial) (float64, float64) { return tr.Score, tr.Error })
	}
	t.printBodies(tab, o)
	tab.Flush()
	fmt.Fprintln(w)
	switch {
	case !o.Start.Seen:
		fmt.Fprintf(w, "As it stands there is no such stone: %s.\n", strings.Join(o.Start.Words, "; "))
	case !o.Start.Fit:
		fmt.Fprintf(w, "As it stands the stone breaks limits: %s.\n", strings.Join(o.Start.Words, "; "))
	case o.Better:
		fmt.Fprintf(w, "The gain of %s is more than chance explains.\n", withError(o.Gain, o.GainError))
	default:
		fmt.Fprintln(w, "Nothing better was found than the stone as it stands.")
	}
	for i, v := range t.problem.Variables {
		if x := o.Best.Values[i]; v.High > v.Low && (x < v.Low+v.Step*0.999 || x > v.High-v.Step*0.999) {
			fmt.Fprintf(w, "%s stands at its limit, %g to %g: wider ones, by --vary %s=LOW..HIGH, may do better.\n", v.Name, v.Low, v.High, v.Name)
		}
	}
	t.printNearby(w, o)
	fmt.Fprintf(w, "%d stones looked at; both shown are traced anew, with points that the search never used.\n", o.Tried)
	if t.problem.Rough != nil {
		fmt.Fprintln(w, "Weights are of the largest stone of the shape that the rough holds.")
	}
	if t.Write != "" {
		fmt.Fprintf(w, "Written to %s\n", t.Write)
	}
}

// printBodies adds what the change does to the stone's body: its weight at the plan's
// width, and its depth. From rough the weight depends on what fits, and is a goal.
func (t *tuning) printBodies(w io.Writer, o *tune.Outcome) {
	if t.problem.Rough != nil {
		return
	}
	weights, depths := "weight, ct", "depth, % of width"
	for _, tr := range []*tune.Trial{&o.Start, &o.Best} {
		weight, depth := "–", "–"
		if stone, err := t.pattern.Build(t.names(), tr.Values); err == nil {
			m := stone.Measure()
			depth = fmt.Sprintf("%.2f", m.DepthPercent)
			if t.material.Density > 0 {
				weight = fmt.Sprintf("%.3f", m.Carats(t.material.Density))
			}
		}
		weights, depths = weights+"\t"+weight, depths+"\t"+depth
	}
	if !slices.ContainsFunc(t.problem.Goal.Aims, func(a tune.Aim) bool { return a.Measure == tune.Weight }) {
		fmt.Fprintln(w, weights)
	}
	fmt.Fprintln(w, depths)
}

// printNearby tells what a small error costs at the best.
func (t *tuning) printNearby(w io.Writer, o *tune.Outcome) {
	for i, near := range o.Nearby {
		v := t.problem.Variables[i/2]
		by := near.Values[i/2] - o.Best.Values[i/2]
		switch loss := o.Best.Score - near.Score; {
		case !near.Seen:
			fmt.Fprintf(w, "Careful: with %s %s there is no such stone: %s.\n", v.Name, changeOf(v, by), near.Words[0])
		case loss > nearLoss*math.Abs(o.Best.Score):
			fmt.Fprintf(w, "Careful: with %s %s it loses %.3f: the best stands at an edge. --tilts or other limits may find a calmer place, and --tolerance tells what errors cost.\n",
				v.Name, changeOf(v, by), loss)
		}
	}
}

// printChanges tells a cutter which tiers change, and by how much.
func (t *tuning) printChanges(w io.Writer, vs []tune.Variable, best []float64) {
	tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	for i, v := range vs {
		fmt.Fprintf(tab, "%s\t%s\t→ %s\t%s\n", v.Name, valueOf(v, v.Now), valueOf(v, best[i]), changeOf(v, best[i]-v.Now))
	}
	tab.Flush()
}

// exact writes a number for programs: in full.
func exact(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

func printCSV(w io.Writer, rows [][]string) error {
	c := csv.NewWriter(w)
	for _, row := range rows {
		safe := make([]string, len(row))
		for i, text := range row {
			safe[i] = cell.Text(text)
		}
		if err := c.Write(safe); err != nil {
			return err
		}
	}
	c.Flush()
	return c.Error()
}

// picture writes a chart into the folder, and its numbers beside it.
func (t *tuning) picture(name string, page *drawing.Page, rows [][]string) error {
	if t.folder == nil {
		return nil
	}
	const dotsPerMM = 8 // about 200 to the inch
	path := filepath.Join(t.folder.path, name+".png")
	if err := disk.Replace(path, func(w io.Writer) error { return picture.EncodePNG(w, page.Raster(dotsPerMM)) }); err != nil {
		return ownFault(err)
	}
	table := filepath.Join(t.folder.path, name+".csv")
	if err := disk.Replace(table, func(w io.Writer) error { return printCSV(w, rows) }); err != nil {
		return ownFault(err)
	}
	t.folder.written = append(t.folder.written, name+".png", name+".csv")
	return nil
}

func (t *tuning) printWritten() {
	if t.folder != nil && len(t.folder.written) > 0 {
		fmt.Fprintf(t.out, "\nWritten to %s: %s\n", t.folder.path, strings.Join(t.folder.written, " "))
	}
}

// field shows the goal over two variables.
func (t *tuning) field() error {
	settings, err := readGrid(t.Field)
	if err != nil {
		return err
	}
	settings.Error = t.Error
	if n := len(t.problem.Variables); n != 2 {
		return commandFaultf("--field needs two things that vary, and there are %d: name two by --vary", n)
	}
	memory := t.memory()
	f, stopped := tune.Sweep(t, &t.problem, settings, memory, func(f *tune.Field) { t.bar.show(f.Done) })
	t.forget(memory)
	if f == nil {
		return stopped
	}
	best, ok := f.Best()
	if !ok && stopped == nil {
		return inputFault(fmt.Errorf("no cell of the field has a stone that fits; the first fails since %s; widen the limits",
			strings.Join(f.Trials[0].Words, "; ")))
	}
	if !ok {
		return stopped
	}
	ridge := f.Ridge()
	near := f.Near()
	result := struct {
		tuneAbout
		Columns int         `json:"columns"`
		Rows    int         `json:"rows"`
		Now     tuneStone   `json:"now"`
		Best    tuneStone   `json:"best"`
		Ridge   tuneRidge   `json:"ridge"`
		Cells   []fieldCell `json:"cells"`
	}{t.about(stopped), f.Columns, f.Rows, t.stone(f.Now), t.stone(f.Trials[best]), newRidge(ridge), nil}
	rows := [][]string{{f.X.Name, f.Y.Name, "score", "standard error", "fits", "within 1 % of the best"}}
	count := 0
	for i := range f.Trials {
		tr := &f.Trials[i]
		x, y := f.Place(i%f.Columns, i/f.Columns)
		cell := fieldCell{X: x, Y: y, Near: near[i]}
		row := []string{exact(x), exact(y), "", "", strconv.FormatBool(tr.Fit), strconv.FormatBool(near[i])}
		if tr.Fit {
			cell.Score, cell.Error = &tr.Score, &tr.Error
			row[2], row[3] = exact(tr.Score), exact(tr.Error)
		}
		if near[i] {
			count++
		}
		result.Cells = append(result.Cells, cell)
		rows = append(rows, row)
	}
	page := chart.Field(f, chart.FieldChart{
		Title: t.name, Goal: t.goalWords(),
		Lines:  []string{fmt.Sprintf("%s, %.2f mm", t.material.Name, t.width), t.goalWords() + " " + t.caseWords()},
		Points: t.historic(f),
	})
	if err := t.picture("field", page, rows); err != nil {
		return err
	}
	return t.answer(stopped, result, func() [][]string { return rows }, func() {
		w := t.out
		fmt.Fprintf(w, "%s\n%s %s\n\n", t.stoneLine(), t.goalWords(), t.caseWords())
		b := f.Trials[best]
		if f.Now.Seen {
			fmt.Fprintf(w, "as it stands   %s %s, %s %s: %s\n", f.X.Name, valueOf(f.X, f.Now.Values[0]), f.Y.Name, valueOf(f.Y, f.Now.Values[1]), withError(f.Now.Score, f.Now.Error))
		}
		fmt.Fprintf(w, "best cell      %s %s, %s %s: %s\n", f.X.Name, valueOf(f.X, b.Values[0]), f.Y.Name, valueOf(f.Y, b.Values[1]), withError(b.Score, b.Error))
		fmt.Fprintf(w, "near the best  within 1 %% of it, cells: %d of %d\n", count, len(f.Trials))
		if len(ridge.Points) >= 3 {
			fmt.Fprintf(w, "ridge          the best %s changes by %.3f ± %.3f for each 1 that %s does, from %s to %s\n", f.X.Name, ridge.Slope, ridge.SlopeError, f.Y.Name,
				valueOf(f.Y, ridge.Points[0].Y), valueOf(f.Y, ridge.Points[len(ridge.Points)-1].Y))
		}
		t.printWritten()
	})
}

type fieldCell struct {
	X     float64  `json:"x"`
	Y     float64  `json:"y"`
	Score *float64 `json:"score"` // null where no stone fits
	Error *float64 `json:"standard_error"`
	Near  bool     `json:"near_best"`
}

type tuneRidge struct {
	Points     []tune.RidgePoint `json:"points"`
	Slope      *float64          `json:"slope"` // null for fewer than three points
	SlopeError *float64          `json:"slope_standard_error"`
}

func newRidge(r tune.Ridge) tuneRidge {
	t := tuneRidge{Points: r.Points}
	if len(r.Points) >= 3 {
		t.Slope, t.SlopeError = &r.Slope, &r.SlopeError
	}
	return t
}

// historic returns published proportions as points of a field over the round brilliant's
// pavilion and crown, whichever stands on which axis.
func (t *tuning) historic(f *tune.Field) (points []chart.Point) {
	if t.shape == nil || t.shape.Outline != "round" {
		return nil
	}
	across := f.X.Name == "pavilion" && f.Y.Name == "crown"
	if !across && !(f.X.Name == "crown" && f.Y.Name == "pavilion") {
		return nil
	}
	for _, h := range tune.HistoricProportions() {
		p := chart.Point{X: h.Pavilion, Y: h.Crown, Words: fmt.Sprintf("%s: table %g %%, crown %g°, pavilion %g°", h.Name, h.Table, h.Crown, h.Pavilion)}
		if !across {
			p.X, p.Y = p.Y, p.X
		}
		points = append(points, p)
	}
	return points
}

// front shows a trade-off.
func (t *tuning) front() error {
	if n := len(t.problem.Goal.Aims); n != 2 {
		return commandFaultf("--front is between two goals, and there are %d: name two by --goal", n)
	}
	memory := t.memory()
	searches := 0
	last := 0.0
	f, stopped := tune.TradeOff(t, &t.problem, memory, func(p tune.Progress) {
		if p.Done < last { // another search has begun
			searches++
		}
		last = p.Done
		t.bar.show(min(0.95, (float64(searches)+p.Done)/7))
	})
	t.forget(memory)
	if f == nil {
		return stopped
	}
	aims := t.problem.Goal.Aims
	result := struct {
		tuneAbout
		Start  tuneStone   `json:"start"`
		Points []tuneStone `json:"points"`
		Tried  int         `json:"tried"`
	}{t.about(stopped), t.stone(f.Start), nil, f.Tried}
	rows := [][]string{append(t.names(), aims[0].Measure.String(), "standard error", aims[1].Measure.String(), "standard error")}
	for _, p := range f.Points {
		result.Points = append(result.Points, t.stone(p))
		var row []string
		for _, v := range p.Values {
			row = append(row, exact(v))
		}
		rows = append(rows, append(row, exact(p.Measures[0]), exact(p.MeasureErrors[0]), exact(p.Measures[1]), exact(p.MeasureErrors[1])))
	}
	page := chart.Front(f, chart.FrontChart{Title: t.name, Lines: []string{t.stoneLine(), t.caseWords()},
		Aims: [2]string{measureName(aims[0].Measure), measureName(aims[1].Measure)}})
	if err := t.picture("trade-off", page, rows); err != nil {
		return err
	}
	return t.answer(stopped, result, func() [][]string { return rows }, func() {
		fmt.Fprintf(t.out, "%s\n%s\n\n", t.stoneLine(), t.caseWords())
		tab := tabwriter.NewWriter(t.out, 0, 0, 3, ' ', 0)
		fmt.Fprintf(tab, "%s\t%s\t%s\n", strings.Join(t.names(), "\t"), measureName(aims[0].Measure), measureName(aims[1].Measure))
		line := func(tr tune.Trial, note string) {
			for i, v := range tr.Values {
				fmt.Fprintf(tab, "%s\t", valueOf(t.problem.Variables[i], v))
			}
			fmt.Fprintf(tab, "%s\t%s\t%s\n", withError(tr.Measures[0], tr.MeasureErrors[0]), withError(tr.Measures[1], tr.MeasureErrors[1]), note)
		}
		if f.Start.Seen {
			line(f.Start, "as it stands")
		}
		for _, p := range f.Points {
			line(p, "")
		}
		tab.Flush()
		fmt.Fprintf(t.out, "\n%d stones looked at. No stone seen beats one of those found in both. To take one, vary by its values and --write it.\n", f.Tried)
		t.printWritten()
	})
}
