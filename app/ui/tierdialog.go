package ui

import (
	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
)

// tierDialog is the form of one tier.
type tierDialog struct {
	name, angle, index, fold, stop, with, note *formEntry
	side, rule                                 *widget.Select
	mirror, temporary                          *widget.Check
	wrong                                      *wrapped
}

// askTier shows a form and takes it once it can be taken; until then it stays, with
// the reason told in it.
func (w *window) askTier(title string, form model.TierForm, take func(model.TierForm) error) {
	t := &tierDialog{}
	entry := func(text string, hint words.Key) *formEntry {
		e := w.newFormEntry()
		e.SetText(text)
		e.SetPlaceHolder(w.words.Say(hint))
		return e
	}
	t.name = entry(form.Name, "P3")
	t.angle = entry(form.Angle, "empty where the corners give it")
	t.index = entry(form.Index, "teeth apart by spaces: 0 12 24")
	t.fold = entry(form.Fold, "1")
	t.stop = entry(form.Stop, "0.71, or facets: P1@6 P1@18 G1@12")
	t.with = entry(form.With, "only for an edge: P1")
	t.note = entry(form.Note, "")
	var sides, rules []string
	for _, s := range sideOrder() {
		sides = append(sides, w.words.Say(model.SideName(s)))
	}
	for _, r := range model.Rules() {
		rules = append(rules, w.words.Say(model.RuleWords(r)))
	}
	t.side = widget.NewSelect(sides, nil)
	t.side.SetSelected(w.words.Say(model.SideName(form.Side)))
	t.rule = widget.NewSelect(rules, nil)
	t.rule.SetSelected(w.words.Say(model.RuleWords(form.Rule)))
	t.mirror = widget.NewCheck(w.words.Say("and mirrored"), nil)
	t.mirror.Checked = form.Mirror
	t.temporary = widget.NewCheck(w.words.Say("later tiers may take it off"), nil)
	t.temporary.Checked = form.Temporary
	t.wrong = newWrapped(theme.ColorNameError, theme.SizeNameText)

	label := func(text words.Key) fyne.CanvasObject {
		return newWord(colourDim, theme.SizeNameText, w.words.Say(text))
	}
	narrowEntry := func(e *formEntry) fyne.CanvasObject {
		return container.NewGridWrap(fyne.NewSize(70, e.MinSize().Height), e)
	}
	fields := container.New(layout.NewFormLayout(),
		label("Name"), t.name,
		label("Side"), t.side,
		label("Angle"), t.angle,
		label("Index"), t.index,
		label("Repeated"), container.NewHBox(narrowEntry(t.fold), label("times round the gear"), t.mirror),
		label("Cut until"), t.rule,
		label(""), t.stop,
		label("Edge with"), t.with,
		label("Temporary"), t.temporary,
		label("Note"), t.note)
	body := container.NewBorder(nil, container.NewGridWrap(fyne.NewSize(440, 3*lineHeight()), t.wrong), nil, nil, fields)
	d := dialog.NewCustomWithoutButtons(title, container.NewVScroll(body), w.win)
	done := func() {
		if err := take(t.form()); err != nil {
			t.wrong.setText(w.words.Error(err))
			return
		}
		d.Hide()
	}
	for _, e := range []*formEntry{t.name, t.angle, t.index, t.fold, t.stop, t.with, t.note} {
		e.OnSubmitted = func(string) { done() }
	}
	ok := widget.NewButton(w.words.Say("Take it"), done)
	ok.Importance = widget.HighImportance
	d.SetButtons([]fyne.CanvasObject{widget.NewButton(w.words.Say("Cancel"), d.Hide), ok})
	d.Resize(fyne.NewSize(520, min(560, w.win.Canvas().Size().Height-60)))
	w.raise(d)
	w.win.Canvas().Focus(t.name)
}

// form reads the fields back.
func (t *tierDialog) form() model.TierForm {
	f := model.TierForm{
		Name: t.name.Text, Angle: t.angle.Text, Index: t.index.Text, Fold: t.fold.Text, Mirror: t.mirror.Checked,
		Stop: t.stop.Text, With: t.with.Text, Temporary: t.temporary.Checked, Note: t.note.Text,
	}
	if i := t.side.SelectedIndex(); i >= 0 {
		f.Side = sideOrder()[i]
	}
	if i := t.rule.SelectedIndex(); i >= 0 {
		f.Rule = model.Rules()[i]
	}
	return f
}

// selectedTier returns the number of the tier that is picked, false for none.
func (w *window) selectedTier() (int, bool) {
	for i, t := range w.bench.Doc.Plan().Tiers {
		if t.Name == w.bench.Selected {
			return i, true
		}
	}
	return 0, false
}

func (w *window) editTier() {
	i, ok := w.selectedTier()
	if !ok {
		return
	}
	before := w.bench.Doc.Plan().Tiers[i]
	w.askTier(w.words.Say("Tier %s", before.Name), model.FormOf(w.words, &before), func(f model.TierForm) error {
		return w.selecting(f.Name, w.bench.EditTier(i, f))
	})
}

// addTier asks for a tier to be cut after the one that is picked, or last.
func (w *window) addTier() {
	tiers := w.bench.Doc.Plan().Tiers
	i, ok := w.selectedTier()
	if !ok {
		i = len(tiers) - 1
	}
	form := w.bench.NewForm(i)
	if form.Side == facets.Table { // a second table makes no sense
		form.Side = facets.Crown
	}
	w.askTier(w.words.Say("New tier, cut after %s", tiers[i].Name), form, func(f model.TierForm) error {
		return w.selecting(f.Name, w.bench.InsertTier(i+1, f))
	})
}

func (w *window) removeTier() {
	if i, ok := w.selectedTier(); ok {
		w.say(w.bench.RemoveTier(i))
	}
}

func (w *window) moveTier(by int) {
	if i, ok := w.selectedTier(); ok {
		w.say(w.bench.MoveTier(i, by))
	}
}

// selecting picks a tier unless there was an error, which it passes on.
func (w *window) selecting(tier string, err error) error {
	if err == nil {
		w.bench.Select(tier)
		w.list.reveal(tier)
	}
	return err
}

// tierItems are the menu items about the picked tier, for the menu bar and for a
// click with the other button.
func (w *window) tierItems() []*fyne.MenuItem {
	return []*fyne.MenuItem{
		w.item("Edit tier…", control(fyne.KeyE), w.editTier),
		w.item("New tier…", control(fyne.KeyN), w.addTier),
		w.item("Cut tier earlier", control(fyne.KeyUp), func() { w.moveTier(-1) }),
		w.item("Cut tier later", control(fyne.KeyDown), func() { w.moveTier(1) }),
		w.item("Remove tier", control(fyne.KeyDelete), w.removeTier),
	}
}
