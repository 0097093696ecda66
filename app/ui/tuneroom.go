package ui

import (
	"fmt"
	"image"
	"math"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
	"pavilight/trace/tune"
)

// tuneBench is the room where better angles are searched for.
type tuneBench struct {
	tune *model.Tune

	// the question
	box     *fyne.Container // all of it
	goals   *fyne.Container
	other   *fyne.Container // how much the second goal counts
	worst   *widget.Check
	light   *fyne.Container
	steady  fyne.CanvasObject
	to      *fyne.Container
	toName  *chooser
	vary    *fyne.Container
	limits  *fyne.Container
	slips   *fyne.Container
	seen    *fyne.Container
	seenIn  string // of the checks that were built
	choices *fyne.Container
	shape   string // of the choices that were built
	checks  []*widget.Check
	fields  [][2]*numberField // the limits of the choices
	others  []*numberField    // all other numbers of the question
	record  *widget.Check
	lit     string // name of the light
	begin   *widget.Button

	// the answer
	hint    *wrapped
	hinted  *fyne.Container
	pair    *fyne.Container
	before  *canvas.Image
	after   *canvas.Image
	numbers [2]*wrapped
	chart   *pageView
	title   *line
	changes *factTable
	verdict *widget.Label
	take    *widget.Button
}

// tuneWide is the width of the pane of questions.
const tuneWide = 330

func (w *window) buildTuneRoom() fyne.CanvasObject {
	t := &w.tuning
	if t.tune == nil {
		t.tune = model.NewTune(w.do, w.refreshTune)
	}
	t.tune.SetWords(w.words)
	t.seenIn, t.shape, t.others = "", "", nil
	question := w.tuneQuestion()
	t.begin = widget.NewButton(w.words.Say("Search"), w.beginTune)
	t.begin.Importance = widget.HighImportance
	left := pane(container.New(layout.NewCustomPaddedLayout(12, 12, 14, 8),
		container.NewBorder(nil, container.New(layout.NewCustomPaddedLayout(8, 0, 0, 6), t.begin), nil, nil, w.tips.scroll(question))))
	t.box = container.New(&sideLayout{width: tuneWide}, left, pane(w.tuneAnswer()))
	w.refreshTune()
	return t.box
}

func (w *window) goalWords(m tune.Measure) string {
	if m == tune.HeadShade {
		return w.words.Say("least shade of the head")
	}
	if m.Better() < 0 {
		return w.words.Say("least %s", model.MeasureName(m))
	}
	return w.words.Say("most %s", model.MeasureName(m))
}

// tuneQuestion is the pane that asks.
func (w *window) tuneQuestion() fyne.CanvasObject {
	t := &w.tuning
	label := func(s words.Key) fyne.CanvasObject { return newWord(colourDim, theme.SizeNameText, w.words.Say(s)) }
	heading := func(s words.Key) fyne.CanvasObject {
		return newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, w.words.Say(s)).bold()
	}
	column := func(o ...fyne.CanvasObject) *fyne.Container {
		return container.New(layout.NewCustomPaddedVBoxLayout(4), o...)
	}
	row := func(name words.Key, o fyne.CanvasObject) *fyne.Container {
		return container.New(&formRow{}, w.tips.laidOver(label(name), tipOf(name)), o)
	}
	var tasks []string
	for _, task := range model.TuneTasks() {
		tasks = append(tasks, w.words.Say(task.Name()))
	}
	task := widget.NewSelect(tasks, nil)
	task.SetSelectedIndex(slices.Index(model.TuneTasks(), t.tune.Task))
	task.OnChanged = func(string) {
		for f := t.refused(); f != nil; f = t.refused() {
			f.revert() // it may not be asked for any more
		}
		t.tune.Ask(model.TuneTasks()[task.SelectedIndex()])
	}

	none := w.words.Say("nothing else")
	var goals []string
	for _, m := range tune.Measures() {
		goals = append(goals, w.goalWords(m))
	}
	first, second := widget.NewSelect(goals, nil), widget.NewSelect(append([]string{none}, goals...), nil)
	first.SetSelected(w.goalWords(t.tune.Aims[0].Measure))
	second.SetSelected(none)
	counts := newNumberField(func(s string) (float64, error) { return model.ParseNumber(s, "") }, w.plainNumber, 0.1)
	weight := 1.0
	if len(t.tune.Aims) == 2 {
		second.SetSelected(w.goalWords(t.tune.Aims[1].Measure))
		weight = math.Abs(t.tune.Aims[1].Weight)
	}
	aims := func() {
		var list []tune.Aim
		for k, chosen := range []string{first.Selected, second.Selected} {
			for _, m := range tune.Measures() {
				if w.goalWords(m) == chosen {
					list = append(list, tune.Aim{Measure: m, Weight: m.Better() * []float64{1, weight}[k]})
				}
			}
		}
		t.tune.Aim(list)
	}
	first.OnChanged = func(string) { aims() }
	second.OnChanged = func(string) { aims() }
	counts.commit = func(v float64) error {
		if !(v > 0 && v <= 1000) {
			return words.Errorf("the second goal counts more than 0 and at most 1000 times")
		}
		weight = v
		aims()
		return nil
	}
	counts.trouble = w.say
	counts.show(weight)
	t.others = append(t.others, counts)
	t.other = row("counting", container.NewBorder(nil, nil, nil, label("times"), counts))
	if t.lit == "" {
		t.lit = "even"
	}
	light := w.lightSelect(t.lit, func(name string) {
		l, err := trace.FindLight(name)
		w.say(err)
		if name == "even" {
			l = nil
		}
		t.tune.Light, t.lit = l, name
	})
	t.light = row("Light", light)
	t.steady = w.limitRow(row, "Forgives", "° off, either way", func() float64 { return t.tune.Steady }, func(v float64) { t.tune.Steady = v }, tune.MostSteady.Degrees(), 0.1)
	t.goals = column(heading("What it shall be good at"), row("First", first), row("And", second), t.other, t.light, t.steady)

	t.seen = container.New(layout.NewCustomPaddedVBoxLayout(0))
	rocked := widget.NewCheck(w.words.Say("also rocked by 10° either way"), nil)
	rocked.Checked = len(t.tune.Tilts) > 1
	rocked.OnChanged = func(on bool) {
		t.tune.Tilts = []facets.Angle{0}
		if on {
			t.tune.Tilts = []facets.Angle{0, 10 * facets.Degree, -10 * facets.Degree}
		}
	}
	t.worst = widget.NewCheck(w.words.Say("judged by the worst of these"), nil)
	t.worst.Checked = t.tune.Worst
	t.worst.OnChanged = func(on bool) { t.tune.Worst = on }
	t.toName = newChooser(theme.SizeNameText, nil)
	t.toName.setText(w.words.Say("choose…"))
	if t.tune.To != nil {
		t.toName.setText(stock.NameOf(w.words, t.tune.To))
	}
	t.toName.opens = func() {
		w.pickMaterial("What to cut it of", func(m *gems.Material) {
			t.toName.setText(stock.NameOf(w.words, m))
			t.tune.To = m
		})
	}
	t.to = row("Material", t.toName)
	t.choices = container.New(layout.NewCustomPaddedVBoxLayout(3))
	t.vary = column(heading("What may vary"),
		newLine(colourDim, theme.SizeNameCaptionText).with(w.words.Say("ticked tiers, between these limits; corners are kept")), t.choices)
	t.limits = column(append([]fyne.CanvasObject{heading("Limits of the stone")}, w.limitRows(row)...)...)
	t.slips = column(append([]fyne.CanvasObject{heading("Errors of machine and hand"),
		newLine(colourDim, theme.SizeNameCaptionText).with(w.words.Say("%s; yours may be others", model.MachineSource))}, w.slipRows(row)...)...)
	t.record = widget.NewCheck(w.recordWords(), nil)
	t.record.Checked = t.tune.KeepFile != ""
	t.record.OnChanged = w.chooseRecord
	return container.New(layout.NewCustomPaddedLayout(0, 0, 0, 12), container.New(layout.NewCustomPaddedVBoxLayout(10),
		task, t.to, t.goals, column(heading("Seen in"), t.seen, rocked, t.worst), t.vary, t.limits, t.slips, t.record))
}

func (w *window) plainNumber(v float64) string {
	return w.words.Decimal(strconv.FormatFloat(v, 'g', 6, 64))
}

// limitRows are the fields of the limits; an empty one demands nothing.
func (w *window) limitRows(row func(words.Key, fyne.CanvasObject) *fyne.Container) (rows []fyne.CanvasObject) {
	t := &w.tuning
	l := &t.tune.Limits
	for _, f := range []struct {
		name, unit words.Key
		value      *float64
		most, step float64
	}{
		{"Facets from", "mm wide", &l.LeastFacetMM, 100, 0.05},
		{"Girdle from", "mm thick", &l.GirdleMM, 100, 0.05},
		{"Depth to", "%% of width", &l.MostDepthPercent, 500, 1},
		{"Crown to", "%% of width", &l.MostCrownPercent, 500, 1},
		{"Weight from", "ct", &l.LeastCarats, 1e5, 0.1},
		{"Mains over", "° past critical", nil, 45, 0.5},
		{"Others over", "° past critical", nil, 45, 0.5},
		{"Angle steps", "°", &t.tune.Step, 5, 0.1},
	} {
		get, set := func() float64 { return *f.value }, func(v float64) { *f.value = v }
		switch f.name {
		case "Mains over":
			get, set = func() float64 { return l.MainMargin.Degrees() }, func(v float64) { l.MainMargin = facets.Angle(v) * facets.Degree }
		case "Others over":
			get, set = func() float64 { return l.BreakMargin.Degrees() }, func(v float64) { l.BreakMargin = facets.Angle(v) * facets.Degree }
		}
		rows = append(rows, w.limitRow(row, f.name, f.unit, get, set, f.most, f.step))
	}
	return rows
}

// limitRow is one number with its unit; an empty field is 0.
func (w *window) limitRow(row func(words.Key, fyne.CanvasObject) *fyne.Container, name, unit words.Key, get func() float64, set func(float64),
	most, step float64) fyne.CanvasObject {
	field := newNumberField(func(s string) (float64, error) {
		if strings.TrimSpace(s) == "" {
			return 0, nil
		}
		return model.ParseNumber(s, "")
	}, func(v float64) string {
		if v == 0 {
			return ""
		}
		return w.plainNumber(v)
	}, step)
	field.SetPlaceHolder("–")
	field.commit = func(v float64) error {
		if !(v >= 0 && v <= most) {
			return words.Errorf("%s: use 0 to %g", name, most)
		}
		set(v)
		return nil
	}
	field.trouble = w.say
	field.tip = tip{w.tips, tipLimit}
	field.show(get())
	w.tuning.others = append(w.tuning.others, field)
	return row(name, container.NewBorder(nil, nil, container.NewGridWrap(fyne.NewSize(74, field.MinSize().Height), field), nil,
		newLine(colourDim, theme.SizeNameText).with(w.words.Say(unit))))
}

// slipRows are the fields of the errors.
func (w *window) slipRows(row func(words.Key, fyne.CanvasObject) *fyne.Container) (rows []fyne.CanvasObject) {
	m := &w.tuning.tune.Machine
	angle := func(a *facets.Angle) (func() float64, func(float64)) {
		return func() float64 { return a.Degrees() }, func(v float64) { *a = facets.Angle(v) * facets.Degree }
	}
	length := func(x *float64) (func() float64, func(float64)) {
		return func() float64 { return *x }, func(v float64) { *x = v }
	}
	add := func(name, unit words.Key, get func() float64, set func(float64), step float64) {
		rows = append(rows, w.limitRow(row, name, unit, get, set, 10, step))
	}
	get, set := angle(&m.DopTilt)
	add("Dop tilt", "° a side", get, set, 0.05)
	get, set = angle(&m.Twist)
	add("Twist", "° a side", get, set, 0.05)
	get, set = length(&m.ShiftMM)
	add("Shift", "mm a side", get, set, 0.01)
	get, set = angle(&m.Angle)
	add("Angle", "° a tier", get, set, 0.05)
	get, set = angle(&m.Index)
	add("Index", "° a tier", get, set, 0.05)
	get, set = length(&m.OvercutMM)
	add("Overcut", "mm a facet, at most", get, set, 0.01)
	return rows
}

// tuneAnswer is the pane that answers.
func (w *window) tuneAnswer() fyne.CanvasObject {
	t := &w.tuning
	t.hint = newWrapped(colourDim, theme.SizeNameText)
	t.hinted = container.NewCenter(container.NewGridWrap(fyne.NewSize(360, 6*lineHeight()), t.hint))
	picture := func() *canvas.Image {
		return &canvas.Image{ScaleMode: canvas.ImageScaleFastest, FillMode: canvas.ImageFillContain}
	}
	t.before, t.after = picture(), picture()
	var sides []fyne.CanvasObject
	for k, name := range []words.Key{"As it stands", "The best found"} {
		t.numbers[k] = newWrapped(theme.ColorNameForeground, theme.SizeNameText)
		sides = append(sides, container.NewBorder(newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, w.words.Say(name)).bold(),
			container.New(&linesLayout{2}, t.numbers[k]), nil, nil, []*canvas.Image{t.before, t.after}[k]))
	}
	legend := newLine(colourDim, theme.SizeNameCaptionText).with(
		w.words.Say("The pictures show light return in the first surrounding, from 0, dark, to 1, bright, as in Look."))
	t.pair = container.New(layout.NewCustomPaddedLayout(14, 10, 16, 8),
		container.NewBorder(nil, legend, nil, nil, container.New(&pairLayout{}, sides...)))
	t.chart = newPageView(nil, w.strayKey)
	t.chart.whole = true
	t.chart.onWidth = t.tune.SetChartWidth
	t.chart.pick = t.tune.PickAt
	t.chart.keys = func(e *fyne.KeyEvent) bool {
		by := map[fyne.KeyName][2]int{fyne.KeyLeft: {-1, 0}, fyne.KeyRight: {1, 0}, fyne.KeyUp: {0, 1}, fyne.KeyDown: {0, -1}}
		step, ok := by[e.Name]
		if ok {
			t.tune.PickNext(step[0], step[1])
		}
		return ok
	}
	t.title = newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, "").bold()
	t.changes = newFactTable()
	t.changes.names = 78
	t.verdict = widget.NewLabel("")
	t.verdict.Wrapping = fyne.TextWrapWord
	t.verdict.Selectable = true
	t.take = widget.NewButton(w.words.Say("Take it into the plan"), w.takeTuned)
	told := container.New(layout.NewCustomPaddedLayout(14, 12, 8, 14), container.NewBorder(t.title, t.take, nil, nil,
		container.NewVScroll(container.New(layout.NewCustomPaddedVBoxLayout(8), gap(1), t.changes.box,
			container.New(layout.NewCustomPaddedLayout(-6, 0, -6, 0), t.verdict)))))
	return container.New(&rightLayout{width: filmWords}, container.NewStack(t.hinted, t.pair, t.chart.scroll), told)
}

// enterTune takes the plan as it stands, and how it is looked at.
func (w *window) enterTune() {
	plan := w.bench.Doc.Plan()
	material, err := w.bench.MaterialOf(plan.Material)
	if err != nil {
		w.say(err)
		return
	}
	w.tuning.tune.SetPlan(plan, material, w.bench.Look.Around, w.bench.Look.Settings().Head)
}

func (w *window) beginTune() {
	t := &w.tuning
	if t.tune.Running {
		t.tune.Stop()
		return
	}
	w.commitTyping()
	if f := t.refused(); f != nil { // an answer would be to another question than the one that stands there
		w.win.Canvas().Focus(f)
		f.settle() // tells why, again
		return
	}
	t.tune.Begin()
}

// refused returns a number of the question that was not taken, nil if all were.
func (t *tuneBench) refused() *numberField {
	all := slices.Clone(t.others)
	for _, pair := range t.fields {
		all = append(all, pair[:]...)
	}
	for _, f := range all {
		if f.refused() {
			return f
		}
	}
	return nil
}

// recordWords offers to keep a record, or names the one that is kept.
func (w *window) recordWords() string {
	if path := w.tuning.tune.KeepFile; path != "" {
		return w.words.Say("record: %s", filepath.Base(path))
	}
	return w.words.Say("keep a record to go on from")
}

// chooseRecord asks for the file that remembers what was seen, or forgets it.
func (w *window) chooseRecord(on bool) {
	t := &w.tuning
	if !on {
		t.tune.KeepFile = ""
		t.record.SetText(w.recordWords())
		return
	}
	if t.tune.KeepFile != "" {
		return
	}
	d := dialog.NewFileSave(func(f fyne.URIWriteCloser, err error) {
		if err != nil || f == nil {
			t.record.SetChecked(false)
			if err != nil {
				w.explain("The record cannot be kept there", err)
			}
			return
		}
		t.tune.KeepFile = f.URI().Path()
		f.Close() // nothing was opened: see writeLater
		t.record.SetText(w.recordWords())
	}, w.win)
	d.SetFileName(strings.TrimSuffix(w.bench.Doc.FileName(), ".toml") + "-tune.jsonl")
	d.SetTitleText(w.words.Say("Keep a record of what was seen"))
	w.showFileDialog(d)
}

// takeTuned makes the answer the plan, as one step that can be undone.
func (w *window) takeTuned() {
	t := &w.tuning
	plan, ok := t.tune.Kept()
	if !ok {
		return
	}
	name := words.Later("tuned angles")
	if t.tune.Moved != nil {
		name = words.Later("move to %s", stock.NameOf(w.words, t.tune.Moved.To))
	}
	w.bench.Adopt(name, plan)
	w.enter(lookRoom)
	w.report("Taken into the plan; Undo brings the other back.")
}

func (w *window) refreshTune() {
	t := &w.tuning
	if t.take == nil { // the state tells of itself before the room is built
		return
	}
	w.showQuestion()
	todo := map[model.TuneTask]words.Key{model.ShowField: "Show the field", model.TellErrors: "Try the errors out"}[t.tune.Task]
	if todo == "" {
		todo = "Search"
	}
	if t.tune.Running {
		todo = "Stop"
	}
	if label := w.words.Say(todo); t.begin.Text != label {
		t.begin.SetText(label)
	}
	_, ok := t.tune.Kept()
	enable(t.take, ok && !t.tune.Running)

	show := func(o *canvas.Image, img *image.RGBA) {
		if img == nil {
			o.Image = nil
		} else {
			o.Image = img
		}
		o.Refresh()
	}
	pictures, charts := t.tune.StartPicture != nil, t.tune.Charted()
	setVisible(t.pair, pictures && !charts)
	setVisible(t.chart.scroll, charts)
	setVisible(t.hinted, !pictures && !charts)
	if charts {
		t.chart.show(t.tune.Chart, t.tune.ChartShape())
	} else {
		show(t.before, t.tune.StartPicture)
		show(t.after, t.tune.BestPicture)
		for k, trial := range []*tune.Trial{t.tune.Start, t.tune.Best} {
			t.numbers[k].setText(strings.Join(t.tune.TrialWords(trial), ", "))
		}
	}
	hint := taskHint(t.tune.Task)
	lines := t.tune.Verdict()
	title := words.Key("")
	switch {
	case t.tune.Trouble != nil:
		title, lines = "No answer", model.InWords(w.words, t.tune.Trouble)
	case t.tune.Running:
		title, hint = "So far", "The first look takes a moment."
	case t.tune.Stopped:
		title = "Stopped"
		if _, kept := t.tune.Kept(); kept {
			title = "Stopped; the best so far is kept"
		}
	case len(lines) > 0:
		title = "Found"
	}
	t.hint.setText(w.words.Say(hint))
	t.title.setText(w.words.Say(title))
	t.changes.show(t.tune.Changes())
	if text := strings.Join(lines, "\n\n"); t.verdict.Text != text {
		t.verdict.SetText(text)
	}
	w.refreshProgress()
	w.tellReady(tuneRoom, "answered", !t.tune.Running && len(lines) > 0)
}

// taskHint says what a question is about, before it was asked.
func taskHint(task model.TuneTask) words.Key {
	switch task {
	case model.ShowField:
		return "Tick two tiers. The goal is shown over both angles, coarse first: pick a place by a click and take it into the plan."
	case model.TellErrors:
		return "A thousand stones are cut with small errors of machine and hand. It shows what they cost in light and at the meet points, " +
			"and which error matters most."
	case model.TradeTwo:
		return "Name two goals. Stones are sought of which none is better in both than another; pick the one you want."
	case model.MoveMaterial:
		return "Choose another material. The plan is moved there by the tangent rule, and by search, and both are set beside the original."
	}
	return "Tick the tiers whose angles may change, and say what the stone shall be good at. Facets keep their meet points while angles change. " +
		"The best so far appears here beside the stone as it stands."
}

// at is what the room is at, for the header.
func (t *tuneBench) at(w *words.Words) runState {
	s := runState{share: t.tune.Done, active: t.tune.Running}
	if t.tune.Running {
		s.words = w.Say("%s %.0f %%", t.tune.Phase, 100*t.tune.Done)
	}
	return s
}

// showQuestion shows the parts of the question that the task has.
func (w *window) showQuestion() {
	t := &w.tuning
	errs, move, two := t.tune.Task == model.TellErrors, t.tune.Task == model.MoveMaterial, len(t.tune.Aims) == 2
	eye := false
	for _, a := range t.tune.Aims {
		eye = eye || a.Measure.ByEye()
	}
	changed := false
	for _, part := range []struct {
		o     fyne.CanvasObject
		shown bool
	}{
		{t.goals, !errs}, {t.other, two && t.tune.Task != model.TradeTwo}, {t.light, eye}, {t.steady, t.tune.Task.CanBeSteady()}, {t.to, move},
		{t.vary, !errs}, {t.limits, !errs}, {t.slips, errs}, {t.record, !errs}, {t.worst, !errs},
	} {
		if part.o.Visible() != part.shown {
			setVisible(part.o, part.shown)
			changed = true
		}
	}
	w.showSeen()
	w.showChoices()
	if changed {
		t.goals.Refresh()
		t.box.Refresh()
	}
}

// showSeen lists the surroundings.
func (w *window) showSeen() {
	t := &w.tuning
	names := ""
	for _, s := range t.tune.Seen {
		names += s.Medium.Name + fmt.Sprint(s.Dish) + "\x00"
	}
	if names == t.seenIn {
		return
	}
	t.seenIn, t.seen.Objects = names, nil
	for i, s := range t.tune.Seen {
		name := w.words.Within(stock.ShortOf(w.words, s.Medium))
		if s.Dish {
			name = w.words.Say("a dish of %s", name)
		}
		check := widget.NewCheck(name, nil)
		check.Checked = s.Chosen
		check.OnChanged = func(on bool) { t.tune.SeeIn(i, on) }
		t.seen.Add(check)
	}
	t.seen.Refresh()
}

// showChoices lists what may vary, with its limits.
func (w *window) showChoices() {
	t := &w.tuning
	shape := ""
	for _, c := range t.tune.Choices {
		shape += c.Name + "\x00"
	}
	if shape != t.shape {
		t.shape = shape
		t.choices.Objects, t.fields, t.checks = nil, nil, nil
		for i, c := range t.tune.Choices {
			check := widget.NewCheck(model.VariableName(w.words, c.Variable), nil)
			check.OnChanged = func(on bool) { t.tune.Choose(i, on) }
			t.checks = append(t.checks, check)
			var pair [2]*numberField
			for k := range pair {
				pair[k] = newNumberField(func(s string) (float64, error) { return model.ParseNumber(strings.TrimSuffix(s, "°"), "") },
					func(v float64) string { return w.words.Say("%.4g", v) }, 0.5)
				pair[k].commit = func(v float64) error {
					low, high := t.tune.Choices[i].Low, t.tune.Choices[i].High
					if k == 0 {
						low = v
					} else {
						high = v
					}
					return t.tune.SetLimits(i, low, high)
				}
				pair[k].trouble = w.say
				pair[k].tip = tip{w.tips, [...]words.Key{tipLeast, tipMost}[k]}
			}
			t.fields = append(t.fields, pair)
			box := func(f *numberField) fyne.CanvasObject {
				return container.NewGridWrap(fyne.NewSize(64, f.MinSize().Height), f)
			}
			limits := container.NewHBox(box(pair[0]), newWord(colourDim, theme.SizeNameText, w.words.Say("to|between two limits")), box(pair[1]))
			t.choices.Add(container.NewBorder(nil, nil, nil, limits, check))
		}
		t.choices.Refresh()
	}
	for i, c := range t.tune.Choices {
		if t.checks[i].Checked != c.Chosen {
			t.checks[i].Checked = c.Chosen // SetChecked would answer
			t.checks[i].Refresh()
		}
		t.fields[i][0].show(c.Low)
		t.fields[i][1].show(c.High)
	}
}

// pairLayout sets two pictures beside each other, or one above the other where that makes
// them larger.
type pairLayout struct{}

// MinSize is what two small pictures need.
func (*pairLayout) MinSize([]fyne.CanvasObject) fyne.Size { return fyne.NewSize(320, 200) }

// Layout decides by the shape of the room.
func (*pairLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	const air, words = 16, 80 // words over and under a picture
	if min((size.Width-air)/2, size.Height-words) >= min(size.Width, (size.Height-air)/2-words) {
		wide := (size.Width - air) / 2
		high := min(size.Height, wide+words)
		place(objects[0], 0, 0, wide, high)
		place(objects[1], wide+air, 0, wide, high)
		return
	}
	high := (size.Height - air) / 2
	place(objects[0], 0, 0, size.Width, high)
	place(objects[1], 0, high+air, size.Width, high)
}

// linesLayout gives a text the full width and the height of so many lines.
type linesLayout struct{ lines float32 }

// MinSize is the height of the lines.
func (l *linesLayout) MinSize([]fyne.CanvasObject) fyne.Size {
	return fyne.NewSize(20, l.lines*lineHeight())
}

// Layout gives it all there is.
func (l *linesLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	place(objects[0], 0, 0, size.Width, size.Height)
}
