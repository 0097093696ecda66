package ui

import (
	"path/filepath"
	"strconv"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/sheet"
	"pavilight/app/version"
	"pavilight/app/words"
)

// cutBench is the room where the sheet for the bench is laid out.
type cutBench struct {
	cut      *model.Cut
	box      *fyne.Container
	doors    [2]*roomButton // pages, film
	pages    *pageTurner
	paper    *fyne.Container // page and what goes with it
	film     *filmView
	trouble  *fyne.Container
	troubles *widget.Label
	bar      *fyne.Container
	machine  *chooser
	gears    *widget.Entry
	notes    *wrapped
	write    *widget.Button
	print    *widget.Button
	filming  bool
	toPrint  bool // once it is laid out
}

func (w *window) buildCutRoom() fyne.CanvasObject {
	c := &w.cutting
	if c.cut == nil {
		machines, _ := sheet.UserMachines() // without a folder there is the plain machine
		c.cut = model.NewCut(machines, w.do, w.refreshCut)
		c.cut.Wish.Language = w.words.Language()
	}
	c.cut.SetWords(w.words)
	c.pages = w.newPageTurner(func(by int) { c.cut.Turn(c.cut.Page + by) }, c.cut.SetWidth)
	c.film = newFilmView(w.words, c.cut, w.do, w.strayKey)
	for k, name := range []words.Key{"Pages", "Step by step"} {
		c.doors[k] = newRoomButton(w.words.Say(name), func() { w.showFilm(k == 1) })
	}
	c.doors[0].setOpen(true)
	c.bar = container.NewBorder(nil, nil, container.NewHBox(c.doors[0], c.doors[1]), c.pages.bar)
	c.troubles = widget.NewLabel("")
	c.troubles.Wrapping = fyne.TextWrapWord
	c.troubles.Selectable = true
	heading := newWord(theme.ColorNameError, theme.SizeNameSubHeadingText, w.words.Say("There is no sheet of this plan")).bold()
	c.trouble = container.NewCenter(container.NewGridWrap(fyne.NewSize(560, 300),
		container.NewBorder(heading, nil, nil, nil, container.NewVScroll(c.troubles))))
	c.paper = container.NewStack(ground(theme.ColorNameBackground), c.pages.page.scroll)
	right := container.NewBorder(pane(container.New(layout.NewCustomPaddedLayout(4, 4, 10, 10), c.bar)), nil, nil, nil,
		container.NewStack(c.paper, c.film.box, c.trouble))
	c.box = container.New(&sideLayout{width: planWide}, pane(w.cutWishes()), right)
	w.showFilm(false)
	w.refreshCut()
	return c.box
}

// cutWishes is the pane that says how the sheet shall look.
func (w *window) cutWishes() fyne.CanvasObject {
	c := &w.cutting
	change := func(f func(*model.CutWish)) { c.cut.Change(f) }
	label := func(s words.Key) fyne.CanvasObject { return newWord(colourDim, theme.SizeNameText, w.words.Say(s)) }
	heading := func(s words.Key) fyne.CanvasObject {
		return newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, w.words.Say(s)).bold()
	}
	var languages []string
	for _, code := range words.Languages() {
		languages = append(languages, words.NameOf(code))
	}
	language := widget.NewSelect(languages, nil)
	language.SetSelected(words.NameOf(c.cut.Wish.Language))
	language.OnChanged = func(string) {
		change(func(wish *model.CutWish) { wish.Language = words.Languages()[language.SelectedIndex()] })
	}
	var papers []string
	for _, p := range sheet.Papers() {
		papers = append(papers, w.paperWords(p.Name))
	}
	paper := widget.NewSelect(papers, nil)
	paper.SetSelected(w.paperWords(c.cut.Wish.Paper))
	paper.OnChanged = func(chosen string) {
		for _, p := range sheet.Papers() {
			if w.paperWords(p.Name) == chosen {
				change(func(wish *model.CutWish) { wish.Paper = p.Name })
			}
		}
	}
	orders := []string{w.words.Say("in gear order"), w.words.Say("opposites first")}
	order := widget.NewSelect(orders, nil)
	order.SetSelected(orders[0])
	if c.cut.Wish.Opposites {
		order.SetSelected(orders[1])
	}
	order.OnChanged = func(chosen string) { change(func(w *model.CutWish) { w.Opposites = chosen == orders[1] }) }
	c.machine = newChooser(theme.SizeNameText, w.machineItems)
	c.machine.tip = tip{w.tips, tipMachine}
	c.machine.setText(w.machineWords(c.cut.Wish.Machine))
	check := func(label words.Key, on bool, set func(*model.CutWish, bool)) fyne.CanvasObject {
		box := widget.NewCheck(w.words.Say(label), nil)
		box.Checked = on
		box.OnChanged = func(on bool) { change(func(w *model.CutWish) { set(w, on) }) }
		return box
	}
	c.gears = widget.NewEntry()
	c.gears.SetPlaceHolder("64, 80")
	var gears []string
	for _, g := range c.cut.Wish.Gears {
		gears = append(gears, strconv.Itoa(g))
	}
	c.gears.SetText(strings.Join(gears, ", "))
	c.gears.OnSubmitted = func(text string) {
		gears, err := model.ReadGears(text)
		w.say(err)
		if err == nil {
			change(func(w *model.CutWish) { w.Gears = gears })
		}
	}
	c.write = widget.NewButton(w.words.Say("Save as PDF…"), w.writeSheet)
	c.write.Importance = widget.HighImportance
	c.print = widget.NewButton(w.words.Say("Print…"), w.printSheet)
	c.notes = newWrapped(colourDim, theme.SizeNameCaptionText)
	row := func(name words.Key, o fyne.CanvasObject) fyne.CanvasObject {
		return container.New(&formRow{}, w.tips.laidOver(label(name), tipOf(name)), o)
	}
	wishes := container.New(layout.NewCustomPaddedVBoxLayout(5), heading("Sheet for the bench"),
		row("Language", language), row("Paper", paper), row("Machine", c.machine), row("Indices", order), row("Other gears", c.gears),
		check("Type a quarter larger", c.cut.Wish.Large, func(w *model.CutWish, on bool) { w.Large = on }),
		check("With maps and ledger", c.cut.Wish.Maps, func(w *model.CutWish, on bool) { w.Maps = on }),
		gap(1), heading("For a pupil, leave out"),
		check("Angles", c.cut.Wish.LeaveOut.Angles, func(w *model.CutWish, on bool) { w.LeaveOut.Angles = on }),
		check("Indices", c.cut.Wish.LeaveOut.Indices, func(w *model.CutWish, on bool) { w.LeaveOut.Indices = on }),
		check("Where to stop", c.cut.Wish.LeaveOut.Stops, func(w *model.CutWish, on bool) { w.LeaveOut.Stops = on }))
	foot := container.New(layout.NewCustomPaddedVBoxLayout(6),
		container.NewGridWrap(fyne.NewSize(planWide-28, 6*lineHeight()), c.notes), c.write, c.print)
	return container.New(layout.NewCustomPaddedLayout(12, 14, 14, 14),
		container.NewBorder(nil, foot, nil, nil, w.tips.scroll(wishes)))
}

// machineWords names one of the user's machines, or the one that nobody has described.
func (w *window) machineWords(name string) string {
	if name == "" {
		return w.words.Say("plain, none named")
	}
	return name
}

func (w *window) paperWords(name string) string {
	for _, p := range sheet.Papers() {
		if p.Name == name {
			return w.words.Say("%s  %g × %g mm", words.Upper(name), p.Width, p.Height)
		}
	}
	return name
}

// machineItems lists the user's machines as the folder has them now.
func (w *window) machineItems() []*fyne.MenuItem {
	c := &w.cutting
	choose := func(name string) *fyne.MenuItem {
		i := fyne.NewMenuItem(w.machineWords(name), func() {
			c.machine.setText(w.machineWords(name))
			c.cut.Change(func(w *model.CutWish) { w.Machine = name })
		})
		i.Checked = c.cut.Wish.Machine == name
		return i
	}
	items := []*fyne.MenuItem{choose("")}
	for _, name := range c.cut.Machines.Names() {
		items = append(items, choose(name))
	}
	return append(items, fyne.NewMenuItemSeparator(),
		w.item("Describe another…", nil, w.describeMachine))
}

// describeMachine asks for the name of a new machine, writes a description to start from,
// and opens it with the system's editor.
func (w *window) describeMachine() {
	name := w.newFormEntry()
	name.SetPlaceHolder(w.words.Say("old red|name of a machine"))
	help := newWrapped(colourDim, theme.SizeNameText)
	help.setText(w.words.Say("A file with a line for each of the machine's numbers is opened in the system's editor. " +
		"Set the numbers, save it, and choose the machine from this list."))
	content := container.NewVBox(name, container.NewGridWrap(fyne.NewSize(380, 4*lineHeight()), help))
	d := dialog.NewCustomConfirm(w.words.Say("Name of the machine"), w.words.Say("Describe it"), w.words.Say("Cancel"), content, func(yes bool) {
		if yes {
			w.newMachine(strings.TrimSpace(name.Text))
		}
	}, w.win)
	w.raise(d)
	w.win.Canvas().Focus(name)
}

func (w *window) newMachine(name string) {
	path, err := w.cutting.cut.NewMachine(name)
	if err != nil {
		w.explain("The machine cannot be described", err)
		return
	}
	w.report("Described in %s", path)
	go func() {
		if err := openWithSystem(path); err != nil {
			w.do(func() { w.explain("The description was written, but not opened", err) })
		}
	}()
}

// showFilm shows the steps one by one, or the pages.
func (w *window) showFilm(film bool) {
	c := &w.cutting
	c.filming = film
	c.film.halt()
	c.doors[0].setOpen(!film)
	c.doors[1].setOpen(film)
	w.refreshCut()
}

// enterCut lays the sheet out anew if the plan, or how it is looked at, is another.
func (w *window) enterCut() {
	plan := w.bench.Doc.Plan()
	material, err := w.bench.MaterialOf(plan.Material)
	if err != nil {
		w.say(err)
		return
	}
	w.cutting.cut.SetSubject(plan, material, w.bench.Look.Around, w.bench.Look.Settings().Head, version.Current().Name())
	w.refreshCut()
}

func (w *window) refreshCut() {
	c := &w.cutting
	if c.notes == nil { // the state tells of itself before the room is built
		return
	}
	failed := c.cut.Trouble != nil
	setVisible(c.trouble, failed)
	setVisible(c.film.box, c.filming && !failed)
	setVisible(c.paper, !c.filming && !failed)
	if turns := !c.filming && c.cut.Pages() > 0; turns != c.pages.bar.Visible() {
		setVisible(c.pages.bar, turns)
		c.bar.Refresh() // it had no room while it was hidden
	}
	if failed {
		c.troubles.SetText(strings.Join(model.InWords(w.words, c.cut.Trouble), "\n\n"))
	}
	enable(c.write, c.cut.Ready())
	enable(c.print, c.cut.Ready())
	var notes []string
	if c.cut.Wish.LeaveOut.Any() {
		notes = append(notes, w.words.Say("A teacher's copy with the answers is saved beside the pupil's."))
	}
	for _, n := range c.cut.Notes() {
		notes = append(notes, words.Upper(n)+".")
	}
	c.notes.setText(strings.Join(notes, " "))
	if !failed && c.filming {
		c.film.refresh()
	}
	if !failed && !c.filming {
		c.pages.show(c.cut.Page, c.cut.Pages(), c.cut.Picture, c.cut.Shape())
	}
	w.refreshProgress()
	w.tellReady(cutRoom, "sheet", c.cut.Ready() && c.cut.Picture != nil)
	if c.toPrint && c.cut.Ready() {
		w.printSheet()
	}
}

// at is what the room is at, for the header.
func (c *cutBench) at(w *words.Words) runState {
	s := runState{share: c.cut.Done, active: c.cut.Running, stopped: c.cut.Stopped}
	switch {
	case c.cut.Running && c.cut.Sheet != nil && c.cut.Wish.Maps:
		s.words = w.Say("tracing the maps %.0f %%", 100*c.cut.Done)
	case c.cut.Running:
		s.words = w.Say("laying the pages out")
	case c.cut.Trouble != nil:
		s.words = w.Say("no sheet")
	case c.cut.Stopped:
		s.words = w.Say("stopped, without maps")
	case c.cut.Pages() > 0:
		s.words = w.Say("%d pages, as they are printed", c.cut.Pages())
	}
	return s
}

// writeSheet asks for a file and writes the pages to it as PDF.
func (w *window) writeSheet() {
	c := &w.cutting
	w.askTarget("Save the sheet", "The sheet cannot be written there", c.cut.FileName(), []string{".pdf"}, func(path string) {
		answers, two := c.cut.AnswersName(path)
		if two && exists(answers) {
			w.raise(dialog.NewConfirm(w.words.Say("The teacher's copy"), w.words.Say("%s is there already. Replace it?", filepath.Base(answers)),
				func(yes bool) {
					if yes {
						w.writeSheetTo(path)
					}
				}, w.win))
			return
		}
		w.writeSheetTo(path)
	})
}

func (w *window) writeSheetTo(path string) {
	w.cutting.cut.Write(path, func(files []string, err error) {
		if err != nil {
			w.explain("The sheet was not written", err)
			return
		}
		w.report("Written to %s", strings.Join(files, w.words.Say(" and ")))
		w.tell("written")
	})
}

// printSheet hands the sheet to the system's own viewer, which prints it.
func (w *window) printSheet() {
	w.enter(cutRoom)
	w.cutting.toPrint = !w.cutting.cut.Ready()
	if w.cutting.toPrint {
		w.report("The sheet is printed as soon as it is laid out.")
		return
	}
	w.report("The sheet is handed to the system's viewer.")
	w.cutting.cut.Print(openWithSystem, func(path string, err error) {
		if err != nil {
			w.explain("The sheet was not opened for printing", err)
			return
		}
		w.report("The sheet is open in the system's viewer: print it from there.")
		w.tell("printed")
	})
}

// sideLayout gives its first object a fixed width at the left and the other the rest.
type sideLayout struct{ width float32 }

// MinSize is the side and a little beside it.
func (l *sideLayout) MinSize([]fyne.CanvasObject) fyne.Size { return fyne.NewSize(l.width+200, 200) }

// Layout sets the two side by side.
func (l *sideLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	place(objects[0], 0, 0, l.width, size.Height)
	place(objects[1], l.width+paneGap, 0, max(0, size.Width-l.width-paneGap), size.Height)
}

// formRow sets a name of fixed width before a field.
type formRow struct{}

// formNames is the width of the names.
const formNames = 82

// MinSize is the height of the taller one.
func (*formRow) MinSize(objects []fyne.CanvasObject) fyne.Size {
	return fyne.NewSize(formNames+80, max(objects[0].MinSize().Height, objects[1].MinSize().Height))
}

// Layout gives the field the rest.
func (*formRow) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	high := objects[0].MinSize().Height
	place(objects[0], 0, (size.Height-high)/2, formNames, high)
	place(objects[1], formNames, 0, max(0, size.Width-formNames), size.Height)
}
