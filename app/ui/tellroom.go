package ui

import (
	"path/filepath"
	"slices"
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
	"pavilight/app/words"
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
		t.tell.Wish.Language = w.words.Language()
	}
	t.tell.SetWords(w.words)
	t.pages = w.newPageTurner(func(by int) { t.tell.Turn(t.tell.Page + by) }, t.tell.SetWidth)
	t.bar = container.NewBorder(nil, nil, nil, t.pages.bar)
	t.troubles = widget.NewLabel("")
	t.troubles.Wrapping = fyne.TextWrapWord
	t.troubles.Selectable = true
	heading := newWord(theme.ColorNameError, theme.SizeNameSubHeadingText, w.words.Say("There is no report")).bold()
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

// tellWishes is the pane that says what the report shall be like.
func (w *window) tellWishes() fyne.CanvasObject {
	t := &w.telling
	change := func(f func(*model.TellWish)) { t.tell.Change(f) }
	label := func(s words.Key) fyne.CanvasObject { return newWord(colourDim, theme.SizeNameText, w.words.Say(s)) }
	heading := func(s words.Key) fyne.CanvasObject {
		return newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, w.words.Say(s)).bold()
	}
	row := func(name words.Key, o fyne.CanvasObject) fyne.CanvasObject {
		return container.New(&formRow{}, w.tips.laidOver(label(name), tipOf(name)), o)
	}
	choose := func(options []string, now int, chosen func(k int)) *widget.Select {
		s := widget.NewSelect(options, nil)
		s.SetSelected(options[max(0, now)])
		s.OnChanged = func(string) { chosen(s.SelectedIndex()) }
		return s
	}
	wish := t.tell.Wish
	reader := 0
	if wish.Colleague {
		reader = 1
	}
	whom := choose([]string{w.words.Say("a client"), w.words.Say("a colleague")}, reader, func(k int) { change(func(w *model.TellWish) { w.Colleague = k == 1 }) })
	var languages []string
	for _, code := range report.Languages() {
		languages = append(languages, words.NameOf(code))
	}
	language := choose(languages, slices.Index(report.Languages(), wish.Language), func(k int) { change(func(w *model.TellWish) { w.Language = report.Languages()[k] }) })
	papers := []string{"a4", "letter"}
	paper := choose([]string{w.paperWords("a4"), w.paperWords("letter")}, slices.Index(papers, wish.Paper), func(k int) { change(func(w *model.TellWish) { w.Paper = papers[k] }) })
	var pictured [2]*widget.Select
	for k := range pictured {
		pictured[k] = w.lightSelect(wish.Lights[k], func(name string) { change(func(w *model.TellWish) { w.Lights[k] = name }) })
	}
	entry := func(hint words.Key, now string, set func(*model.TellWish, string)) *widget.Entry {
		e := widget.NewEntry()
		e.SetPlaceHolder(w.words.Say(hint))
		e.SetText(now)
		e.OnChanged = func(text string) { change(func(w *model.TellWish) { set(w, text) }) }
		return e
	}
	author := entry("your name", wish.Author, func(w *model.TellWish, s string) { w.Author = s })
	client := entry("the client's name", wish.Client, func(w *model.TellWish, s string) { w.Client = s })
	notes := widget.NewMultiLineEntry()
	notes.SetPlaceHolder(w.words.Say("notes at the end of the report"))
	notes.SetText(wish.Notes)
	notes.Wrapping = fyne.TextWrapWord
	notes.SetMinRowsVisible(3)
	notes.OnChanged = func(text string) { change(func(w *model.TellWish) { w.Notes = text }) }
	measured := widget.NewEntry()
	measured.SetPlaceHolder(w.words.Say("crown=%.1f, pavilion=%.1f", 0.2, 0.1))
	measured.SetText(wish.Measured)
	measured.OnSubmitted = func(text string) { change(func(w *model.TellWish) { w.Measured = strings.TrimSpace(text) }) }
	t.letterhead = newChooser(theme.SizeNameText, w.letterheadItems)
	t.letterhead.setText(w.letterheadWords())
	t.beside = newChooser(theme.SizeNameText, w.stonesBeside)
	t.beside.tip = tip{w.tips, tipOther}
	t.beside.setText(w.besideWords())
	t.pdf = widget.NewButton(w.words.Say("Save as PDF…"), func() { w.writeReport(".pdf") })
	t.pdf.Importance = widget.HighImportance
	t.html = widget.NewButton(w.words.Say("Save for a browser…"), func() { w.writeReport(".html") })
	t.notes = newWrapped(colourDim, theme.SizeNameCaptionText)
	wishes := container.New(layout.NewCustomPaddedVBoxLayout(5), heading("Report on this stone"),
		row("For", whom), row("Language", language), row("Paper", paper), row("Beside it", t.beside),
		row("Pictured in", pictured[0]), row("and in", pictured[1]),
		gap(1), heading("Who tells whom"),
		row("Letterhead", t.letterhead), row("From", author), row("To", client), notes,
		gap(1), heading("How exactly it was measured"),
		newLine(colourDim, theme.SizeNameCaptionText).with(w.words.Say("deviations in degrees; Enter takes them")), measured)
	foot := container.New(layout.NewCustomPaddedVBoxLayout(6), container.New(&linesLayout{3}, t.notes), t.pdf, t.html)
	return container.New(layout.NewCustomPaddedLayout(12, 14, 14, 8),
		container.NewBorder(nil, container.New(layout.NewCustomPaddedLayout(0, 0, 0, 6), foot), nil, nil,
			w.tips.scroll(container.New(layout.NewCustomPaddedLayout(0, 0, 0, 12), wishes))))
}

// lightSelect chooses among the lights, by the names that people give them.
func (w *window) lightSelect(now string, chosen func(name string)) *widget.Select {
	names := trace.LightNames()
	var said []string
	for _, name := range names {
		said = append(said, w.words.Say(model.LightName(name)))
	}
	s := widget.NewSelect(said, nil)
	s.SetSelectedIndex(slices.Index(names, now))
	s.OnChanged = func(string) { chosen(names[s.SelectedIndex()]) }
	return s
}

// letterheadItems offers a picture at the head of the report.
func (w *window) letterheadItems() []*fyne.MenuItem {
	t := &w.telling
	return []*fyne.MenuItem{
		w.item("none", nil, func() {
			t.tell.Change(func(w *model.TellWish) { w.Letterhead = "" })
			t.letterhead.setText(w.letterheadWords())
		}),
		w.item("A picture…", nil, func() {
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
				t.tell.Change(func(w *model.TellWish) { w.Letterhead = path })
				t.letterhead.setText(w.letterheadWords())
			}, w.win)
			d.SetFilter(storage.NewExtensionFileFilter([]string{".png", ".jpg", ".jpeg", ".gif"}))
			d.SetTitleText(w.words.Say("A picture at the head of the report"))
			w.showFileDialog(d)
		}),
	}
}

// letterheadWords names the picture at the head of the report.
func (w *window) letterheadWords() string {
	if path := w.telling.tell.Wish.Letterhead; path != "" {
		return filepath.Base(path)
	}
	return w.words.Say("none")
}

// besideWords names the stone that is set beside.
func (w *window) besideWords() string {
	switch plan := w.telling.tell.Beside; plan {
	case nil:
		return w.words.Say("nothing")
	case w.bench.Doc.First():
		return w.words.Say("as it was opened")
	default:
		return plan.Name
	}
}

// stonesBeside offers another stone to set beside.
func (w *window) stonesBeside() []*fyne.MenuItem {
	t := &w.telling
	take := func(plan *facets.Plan) {
		t.tell.SetBeside(plan)
		t.beside.setText(w.besideWords())
	}
	before := w.item("the plan as it was opened", nil, func() { take(w.bench.Doc.First()) })
	before.Disabled = w.bench.Doc.First() == w.bench.Doc.Plan()
	return []*fyne.MenuItem{
		w.item("nothing", nil, func() { take(nil) }),
		before,
		w.item("Another plan…", nil, func() {
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
				take(plan)
			}, w.win)
			d.SetFilter(storage.NewExtensionFileFilter([]string{".toml"}))
			d.SetTitleText(w.words.Say("The plan to set beside this one"))
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
		t.troubles.SetText(strings.Join(model.InWords(w.words, t.tell.Trouble), "\n\n"))
	}
	hint := w.words.Say("The light is traced for the report: maps, pictures in true colour, tilts, a wet pavilion and the ray that explains it.")
	if t.tell.Stopped {
		hint = w.words.Say("Stopped. Go on, at the upper right, traces the light for the report.")
	}
	t.hint.setText(hint)
	enable(t.pdf, t.tell.Ready())
	enable(t.html, t.tell.Ready())
	t.notes.setText(strings.Join(t.tell.Notes(), " "))
	if some {
		t.pages.show(t.tell.Page, t.tell.Pages(), t.tell.Picture, t.tell.Shape())
	}
	w.refreshProgress()
	w.tellReady(tellRoom, "told", t.tell.Ready() && t.tell.Picture != nil)
}

// at is what the room is at, for the header.
func (t *tellBench) at(w *words.Words) runState {
	s := runState{share: t.tell.Done, active: t.tell.Running, stopped: t.tell.Stopped}
	switch {
	case t.tell.Running:
		s.words = w.Say("tracing the report %.0f %%", 100*t.tell.Done)
	case t.tell.Trouble != nil:
		s.words = w.Say("no report")
	case t.tell.Stopped:
		s.words = w.Say("stopped")
	case t.tell.Pages() > 0:
		s.words = w.Say("%d pages, as they are printed", t.tell.Pages())
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
		w.report("Written to %s", path)
		w.tell("written")
	})
}
