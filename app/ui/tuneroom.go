package ui

import (
	"fmt"
	"image"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/facets"
	"pavilight/trace/tune"
)

// tuneBench is the room where better angles are searched for.
type tuneBench struct {
	tune    *model.Tune
	of      *facets.Plan // the plan that is being tuned
	choices *fyne.Container
	shape   string // of the choices that were built
	fields  [][2]*numberField
	search  *widget.Button
	take    *widget.Button
	line    *progressLine
	state   *wrapped
	before  *canvas.Image
	after   *canvas.Image
	numbers [2]*line
	changes *factTable
	verdict *wrapped
}

// goals are what the search can be for, in words.
func goals() []struct {
	words string
	aims  []tune.Aim
} {
	return []struct {
		words string
		aims  []tune.Aim
	}{
		{"Most light return", []tune.Aim{{Measure: tune.LightReturn, Weight: 1}}},
		{"Least leakage", []tune.Aim{{Measure: tune.Leakage, Weight: 1}}},
		{"Smallest leaky area", []tune.Aim{{Measure: tune.LeakyArea, Weight: 1}}},
		{"Light return and little shade of the head", []tune.Aim{{Measure: tune.LightReturn, Weight: 1}, {Measure: tune.HeadShade, Weight: 1}}},
	}
}

func (w *window) buildTuneRoom() fyne.CanvasObject {
	t := &w.tuning
	t.tune = model.NewTune(w.do, w.refreshTune)
	var words []string
	for _, g := range goals() {
		words = append(words, g.words)
	}
	goal := widget.NewSelect(words, nil)
	goal.SetSelected(words[0])
	goal.OnChanged = func(chosen string) {
		for _, g := range goals() {
			if g.words == chosen {
				t.tune.Aims = g.aims
			}
		}
	}
	rocked := widget.NewCheck("also rocked by 10° either way", func(on bool) {
		t.tune.Tilts = []facets.Angle{0}
		if on {
			t.tune.Tilts = []facets.Angle{0, 10 * facets.Degree, -10 * facets.Degree}
		}
	})
	worst := widget.NewCheck("judged by the worst of them", func(on bool) { t.tune.Worst = on })
	t.search = widget.NewButton("Search", func() {
		if t.tune.Running {
			t.tune.Stop()
		} else {
			w.commitTyping()
			t.tune.Begin()
		}
	})
	t.search.Importance = widget.HighImportance
	t.take = widget.NewButton("Take these angles", w.takeTuned)
	t.line, t.state = newProgressLine(), newWrapped(colourDim, theme.SizeNameText)
	t.choices = container.New(layout.NewCustomPaddedVBoxLayout(3))
	heading := func(s string) fyne.CanvasObject {
		return newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, s).bold()
	}
	top := container.New(layout.NewCustomPaddedVBoxLayout(6), heading("What it shall be good at"), goal, rocked, worst, gap(1),
		heading("What may vary"), newWord(colourDim, theme.SizeNameCaptionText, "ticked tiers, between these limits"))
	foot := container.New(layout.NewCustomPaddedVBoxLayout(6), t.search, t.line,
		container.NewGridWrap(fyne.NewSize(tuneWide-28, 4*lineHeight()), t.state))
	left := pane(container.New(layout.NewCustomPaddedLayout(14, 10, 14, 14),
		container.NewBorder(top, foot, nil, nil, container.NewVScroll(t.choices))))

	picture := func() *canvas.Image {
		return &canvas.Image{ScaleMode: canvas.ImageScaleFastest, FillMode: canvas.ImageFillContain}
	}
	t.before, t.after = picture(), picture()
	var sides []fyne.CanvasObject
	for k, name := range []string{"As it stands", "The best so far"} {
		t.numbers[k] = newLine(theme.ColorNameForeground, theme.SizeNameText)
		sides = append(sides, container.NewBorder(heading(name), t.numbers[k], nil, nil,
			container.NewGridWrap(fyne.NewSquareSize(250), []*canvas.Image{t.before, t.after}[k])))
	}
	t.changes = newFactTable()
	t.verdict = newWrapped(theme.ColorNameForeground, theme.SizeNameText)
	right := pane(container.New(layout.NewCustomPaddedLayout(14, 14, 18, 18), container.NewBorder(
		container.NewHBox(sides[0], gap(30), sides[1]), nil, nil, nil,
		container.NewBorder(container.NewGridWrap(fyne.NewSize(560, 4*lineHeight()), t.verdict),
			container.NewHBox(t.take), nil, nil, container.NewVScroll(t.changes.box)))))
	return container.New(&sideLayout{width: tuneWide}, left, right)
}

// tuneWide is the width of the pane of questions.
const tuneWide = 330

// enterTune takes the plan as it stands.
func (w *window) enterTune() {
	if plan := w.bench.Doc.Plan(); w.tuning.of != plan {
		material, err := model.MaterialOf(plan.Material)
		if err != nil {
			w.say(err)
			return
		}
		w.tuning.of = plan
		w.tuning.tune.SetPlan(plan, material, w.bench.Look.Around[:1], w.bench.Look.Settings().Head)
	}
}

// takeTuned makes the best so far the plan, as one step that can be undone.
func (w *window) takeTuned() {
	if plan, ok := w.tuning.tune.Kept(); ok {
		w.bench.Adopt("tuned angles", plan)
		w.enter(lookRoom)
	}
}

func (w *window) refreshTune() {
	t := &w.tuning
	if t.line == nil { // the state tells of itself before the room is built
		return
	}
	w.showChoices()
	setVisible(t.line, t.tune.Running)
	t.line.show(t.tune.Done)
	label := "Search"
	if t.tune.Running {
		label = "Stop"
	}
	if t.search.Text != label {
		t.search.SetText(label)
	}
	if _, ok := t.tune.Kept(); ok && !t.tune.Running {
		t.take.Enable()
	} else {
		t.take.Disable()
	}
	switch {
	case t.tune.Trouble != nil:
		t.state.setText(strings.Join(model.InWords(t.tune.Trouble), "  "))
	case t.tune.Running:
		t.state.setText(t.tune.Phase)
	case t.tune.Stopped:
		t.state.setText("Stopped; the best so far is kept.")
	case t.tune.Outcome != nil:
		t.state.setText(fmt.Sprintf("Done: %d stones were looked at.", t.tune.Outcome.Tried))
	default:
		t.state.setText("Seen face-up in " + strings.ToLower(w.bench.Look.Around[0].Medium.Name) + ", the first column of Look.")
	}
	show := func(o *canvas.Image, img *image.RGBA) {
		if img == nil {
			o.Image = nil
		} else if o.Image != img {
			o.Image = img
		}
		o.Refresh()
	}
	show(t.before, t.tune.StartPicture)
	show(t.after, t.tune.BestPicture)
	for k, trial := range []*tune.Trial{t.tune.Start, t.tune.Best} {
		text := ""
		if trial != nil && len(trial.Measures) > 0 {
			var words []string
			for i, aim := range t.tune.Aims {
				if i < len(trial.Measures) {
					words = append(words, fmt.Sprintf("%s %.4f", aim.Measure, trial.Measures[i]))
				}
			}
			text = strings.Join(words, ", ")
		}
		t.numbers[k].setText(text)
	}
	var facts [][2]string
	for _, c := range t.tune.Changes() {
		name, rest, _ := strings.Cut(c, "  ")
		facts = append(facts, [2]string{name, strings.ReplaceAll(rest, "→", "to")}) // the typeface has no arrow
	}
	t.changes.show(facts)
	t.verdict.setText(verdict(t.tune))
}

// verdict says what a search that has ended is worth, in words that its numbers bear.
func verdict(t *model.Tune) string {
	o := t.Outcome
	switch {
	case o == nil:
		return ""
	case !o.Better:
		return "Nothing was found that is better by more than chance explains."
	}
	return fmt.Sprintf("Better by %.4f ± %.4f of the goal, judged on rays that the search has not seen. "+
		"What was tried nearby tells how much a small error costs; look at it in Look before you cut.", o.Gain, o.GainError)
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
		t.choices.Objects, t.fields = nil, nil
		for i, c := range t.tune.Choices {
			check := widget.NewCheck(c.Name, nil)
			check.Checked = c.Chosen
			check.OnChanged = func(on bool) { t.tune.Choose(i, on) }
			var pair [2]*numberField
			for k := range pair {
				pair[k] = newNumberField(func(s string) (float64, error) { return model.ParseNumber(strings.TrimSuffix(s, "°"), "") },
					func(v float64) string { return fmt.Sprintf("%.4g", v) }, 0.5)
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
			}
			t.fields = append(t.fields, pair)
			box := func(f *numberField) fyne.CanvasObject {
				return container.NewGridWrap(fyne.NewSize(62, f.MinSize().Height), f)
			}
			limits := container.NewHBox(box(pair[0]), newWord(colourDim, theme.SizeNameText, "to"), box(pair[1]))
			t.choices.Add(container.NewBorder(nil, nil, nil, limits, check))
		}
		t.choices.Refresh()
	}
	for i, c := range t.tune.Choices {
		t.fields[i][0].show(c.Low)
		t.fields[i][1].show(c.High)
	}
}

// at is what the room is at, for the header.
func (t *tuneBench) at() runState {
	s := runState{share: t.tune.Done, active: t.tune.Running}
	if t.tune.Running {
		s.words = t.tune.Phase
	}
	return s
}
