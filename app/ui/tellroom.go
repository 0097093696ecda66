package ui

import (
	"fmt"
	"path/filepath"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/storage"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/report"
	"pavilight/app/version"
	"pavilight/facets"
	"pavilight/trace"
)

// tellBench is the room where the report for a client is put together.
type tellBench struct {
	tell       *model.Tell
	pages      *pageTurner
	paper      *fyne.Container
	hint       *wrapped
	hinted     *fyne.Container
	trouble    *fyne.Container
	troubles   *widget.Label
	bar        *fyne.Container
	beside     *chooser
	letterhead *chooser
	notes      *wrapped
	pdf        *widget.Button
	html       *widget.Button
}

func (w *window) buildTellRoom() fyne.CanvasObject {
	t := &w.telling
	if t.tell == nil {
		t.tell = model.NewTell(w.do, w.refreshTell, w.bench.MaterialOf)
	}
	t.pages = w.newPageTurner(func(by int) { t.tell.Turn(t.tell.Page + by) }, t.tell.SetWidth)
	t.bar = container.NewBorder(nil, nil, nil, t.pages.bar)
	t.troubles = widget.NewLabel("")
	t.troubles.Wrapping = fyne.TextWrapWord
	t.troubles.Selectable = true
	heading := newWord(theme.ColorNameError, theme.SizeNameSubHeadingText, "There is no report").bold()
	t.trouble = container.NewCenter(container.NewGridWrap(fyne.NewSize(480, 300),
		container.NewBorder(heading, nil, nil, nil, container.NewVScroll(t.troubles))))
	t.hint = newWrapped(colourDim, theme.SizeNameText)
	t.hinted = container.NewCenter(container.NewGridWrap(fyne.NewSize(360, 4*lineHeight()), t.hint))
	t.paper = container.NewStack(ground(theme.ColorNameBackground), t.pages.page.scroll)
	right := container.NewBorder(pane(container.New(layout.NewCustomPaddedLayout(4, 4, 10, 10), t.bar)), nil, nil, nil,
		container.NewStack(t.paper, t.hinted, t.trouble))
	box := container.New(&sideLayout{width: tellWide}, pane(w.tellWishes()), right)
	w.refreshTell()
	return box
}

// tellWide is the width of the pane of wishes.
const tellWide = 300

// languageName returns a language in its own words.
func languageName(code string) string {
	if name, ok := map[string]string{"en": "English", "de": "Deutsch", "fr": "Français"}[code]; ok {
		return name
	}
	return code
}

// tellWishes is the pane that says what the report shall be like.
func (w *window) tellWishes() fyne.CanvasObject {
	t := &w.telling
	change := func(f func(*model.TellWish)) { t.tell.Change(f) }
	label := func(s string) fyne.CanvasObject { return newWord(colourDim, theme.SizeNameText, s) }
	heading := func(s string) fyne.CanvasObject {
		return newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, s).bold()
	}
	row := func(words string, o fyne.CanvasObject) fyne.CanvasObject {
		return container.New(&formRow{}, label(words), o)
	}
	choose := func(options []string, chosen func(k int)) *widget.Select {
		s := widget.NewSelect(options, nil)
		s.SetSelected(options[0])
		s.OnChanged = func(string) { chosen(s.SelectedIndex()) }
		return s
	}
	whom := choose([]string{"a client", "a colleague"}, func(k int) { change(func(w *model.TellWish) { w.Colleague = k == 1 }) })
	var languages []string
	for _, code := range report.Languages() {
		languages = append(languages, languageName(code))
	}
	language := choose(languages, func(k int) { change(func(w *model.TellWish) { w.Language = report.Languages()[k] }) })
	papers := []string{"a4", "letter"}
	paper := choose([]string{paperWords("a4"), paperWords("letter")}, func(k int) { change(func(w *model.TellWish) { w.Paper = papers[k] }) })
	lights := trace.LightNames()
	var pictured [2]*widget.Select
	for k := range pictured {
		pictured[k] = widget.NewSelect(lights, nil)
		pictured[k].SetSelected(t.tell.Wish.Lights[k])
		pictured[k].OnChanged = func(name string) { change(func(w *model.TellWish) { w.Lights[k] = name }) }
	}
	entry := func(hint string, set func(*model.TellWish, string)) *widget.Entry {
		e := widget.NewEntry()
		e.SetPlaceHolder(hint)
		e.OnChanged = func(text string) { change(func(w *model.TellWish) { set(w, text) }) }
		return e
	}
	author := entry("your name", func(w *model.TellWish, s string) { w.Author = s })
	client := entry("the client's name", func(w *model.TellWish, s string) { w.Client = s })
	notes := widget.NewMultiLineEntry()
	notes.SetPlaceHolder("notes at the end of the report")
	notes.Wrapping = fyne.TextWrapWord
	notes.SetMinRowsVisible(3)
	notes.OnChanged = func(text string) { change(func(w *model.TellWish) { w.Notes = text }) }
	measured := widget.NewEntry()
	measured.SetPlaceHolder("crown=0.2, pavilion=0.1")
	measured.OnSubmitted = func(text string) { change(func(w *model.TellWish) { w.Measured = strings.TrimSpace(text) }) }
	t.letterhead = newChooser(theme.SizeNameText, w.letterheadItems)
	t.letterhead.setText("none")
	t.beside = newChooser(theme.SizeNameText, w.stonesBeside)
	t.beside.tip = tip{w.tips, tipOther}
	t.beside.setText("nothing")
	t.pdf = widget.NewButton("Save as PDF…", func() { w.writeReport(".pdf") })
	t.pdf.Importance = widget.HighImportance
	t.html = widget.NewButton("Save for a browser…", func() { w.writeReport(".html") })
	t.notes = newWrapped(colourDim, theme.SizeNameCaptionText)
	wishes := container.New(layout.NewCustomPaddedVBoxLayout(5), heading("Report on this stone"),
		row("For", whom), row("Language", language), row("Paper", paper), row("Beside it", t.beside),
		row("Pictured in", pictured[0]), row("and in", pictured[1]),
		gap(1), heading("Who tells whom"),
		row("Letterhead", t.letterhead), row("From", author), row("To", client), notes,
		gap(1), heading("How exactly it was measured"),
		newWord(colourDim, theme.SizeNameCaptionText, "standard deviations in degrees; Enter takes them"), measured)
	foot := container.New(layout.NewCustomPaddedVBoxLayout(6), container.New(&linesLayout{3}, t.notes), t.pdf, t.html)
	return container.New(layout.NewCustomPaddedLayout(12, 14, 14, 8),
		container.NewBorder(nil, container.New(layout.NewCustomPaddedLayout(0, 0, 0, 6), foot), nil, nil,
			container.NewVScroll(container.New(layout.NewCustomPaddedLayout(0, 0, 0, 12), wishes))))
}

// letterheadItems offers a picture at the head of the report.
func (w *window) letterheadItems() []*fyne.MenuItem {
	t := &w.telling
	return []*fyne.MenuItem{
		fyne.NewMenuItem("none", func() {
			t.letterhead.setText("none")
			t.tell.Change(func(w *model.TellWish) { w.Letterhead = "" })
		}),
		fyne.NewMenuItem("A picture…", func() {
			d := dialog.NewFileOpen(func(r fyne.URIReadCloser, err error) {
				if err != nil {
					w.explain("The picture cannot be opened", err)
					return
				}
				if r == nil {
					return // cancelled
				}
				path := r.URI().Path()
				r.Close()
				t.letterhead.setText(filepath.Base(path))
				t.tell.Change(func(w *model.TellWish) { w.Letterhead = path })
			}, w.win)
			d.SetFilter(storage.NewExtensionFileFilter([]string{".png", ".jpg", ".jpeg", ".gif"}))
			d.SetTitleText("A picture at the head of the report")
			w.showFileDialog(d)
		}),
	}
}

// stonesBeside offers another stone to set beside.
func (w *window) stonesBeside() []*fyne.MenuItem {
	t := &w.telling
	take := func(words string, plan *facets.Plan) {
		t.beside.setText(words)
		t.tell.SetBeside(plan)
	}
	before := fyne.NewMenuItem("the plan as it was opened", func() { take("as it was opened", w.bench.Doc.First()) })
	before.Disabled = w.bench.Doc.First() == w.bench.Doc.Plan()
	return []*fyne.MenuItem{
		fyne.NewMenuItem("nothing", func() { take("nothing", nil) }),
		before,
		fyne.NewMenuItem("Another plan…", func() {
			d := dialog.NewFileOpen(func(r fyne.URIReadCloser, err error) {
				if err == nil && r == nil {
					return // cancelled
				}
				var plan *facets.Plan
				if err == nil {
					path := r.URI().Path()
					r.Close()
					plan, err = facets.OpenPlan(path)
				}
				if err != nil {
					w.explain("The other plan cannot be opened", err)
					return
				}
				take(plan.Name, plan)
			}, w.win)
			d.SetFilter(storage.NewExtensionFileFilter([]string{".toml"}))
			d.SetTitleText("The plan to set beside this one")
			w.showFileDialog(d)
		}),
	}
}

// enterTell has the report be of the plan as it stands.
func (w *window) enterTell() {
	w.telling.tell.SetSubject(w.bench.Doc.Plan(), w.bench.Look.Around, w.bench.Look.Settings().Head, version.Current().Name())
	w.refreshTell()
}

func (w *window) refreshTell() {
	t := &w.telling
	if t.notes == nil { // the state tells of itself before the room is built
		return
	}
	failed, some := t.tell.Trouble != nil, t.tell.Pages() > 0
	setVisible(t.trouble, failed)
	setVisible(t.hinted, !failed && !some)
	setVisible(t.paper, !failed && some)
	if some != t.pages.bar.Visible() {
		setVisible(t.pages.bar, some)
		t.bar.Refresh() // it had no room while it was hidden
	}
	if failed {
		t.troubles.SetText(strings.Join(model.InWords(t.tell.Trouble), "\n\n"))
	}
	hint := "The light is traced for the report: maps, pictures in true colour, tilts, a wet pavilion and the ray that explains it."
	if t.tell.Stopped {
		hint = "Stopped. Go on, at the upper right, traces the light for the report."
	}
	t.hint.setText(hint)
	enable(t.pdf, t.tell.Ready())
	enable(t.html, t.tell.Ready())
	t.notes.setText(strings.Join(t.tell.Notes(), " "))
	if some {
		t.pages.show(t.tell.Page, t.tell.Pages(), t.tell.Picture, t.tell.Shape())
	}
	w.refreshProgress()
	if t.tell.Ready() && t.tell.Picture != nil {
		w.once("told")
	}
}

// at is what the room is at, for the header.
func (t *tellBench) at() runState {
	s := runState{share: t.tell.Done, active: t.tell.Running, stopped: t.tell.Stopped}
	switch {
	case t.tell.Running:
		s.words = fmt.Sprintf("tracing the report %.0f %%", 100*t.tell.Done)
	case t.tell.Trouble != nil:
		s.words = "no report"
	case t.tell.Stopped:
		s.words = "stopped"
	case t.tell.Pages() > 0:
		s.words = fmt.Sprintf("%d pages, as they are printed", t.tell.Pages())
	}
	return s
}

// writeReport asks for a file with that ending and writes the report to it.
func (w *window) writeReport(ending string) {
	t := &w.telling
	w.askTarget("Save the report", "The report cannot be written there", t.tell.FileName(ending), []string{ending}, w.writeReportTo)
}

func (w *window) writeReportTo(path string) {
	w.telling.tell.Write(path, func(err error) {
		if err != nil {
			w.explain("The report was not written", err)
			return
		}
		w.report("Written to " + path)
	})
}
