package ui

import (
	"fmt"
	"io/fs"
	"path/filepath"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/driver/desktop"

	"pavilight/app/guide"
	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/testdata"
)

// menus holds the items whose words or state follow the work.
type menus struct {
	main       *fyne.MainMenu
	undo, redo *fyne.MenuItem
	tier       []*fyne.MenuItem // about the tier that is picked
	save       *fyne.MenuItem
	recent     *fyne.MenuItem
	plan       *fyne.MenuItem
	stone      *fyne.MenuItem
	themes     map[brightness]*fyne.MenuItem
	shown      string // what was last written into them
}

func control(key fyne.KeyName) fyne.Shortcut {
	return &desktop.CustomShortcut{KeyName: key, Modifier: fyne.KeyModifierShortcutDefault}
}

// redoToo is the other way to redo that many people's hands know; the menu names one.
func redoToo() fyne.Shortcut { return controlShift(fyne.KeyZ) }

func controlShift(key fyne.KeyName) fyne.Shortcut {
	return &desktop.CustomShortcut{KeyName: key, Modifier: fyne.KeyModifierShortcutDefault | fyne.KeyModifierShift}
}

// item returns an item of a menu; shortcut may be nil.
func (w *window) item(label words.Key, shortcut fyne.Shortcut, do func()) *fyne.MenuItem {
	i := fyne.NewMenuItem(w.words.Say(label), do)
	i.Shortcut = shortcut
	return i
}

func (w *window) buildMenu() *fyne.MainMenu {
	m := &w.menu
	m.save = w.item("Save", control(fyne.KeyS), w.save)
	m.recent = w.item("Open recent", nil, nil)
	m.recent.ChildMenu = fyne.NewMenu("")
	samples := w.item("Open sample", nil, nil)
	samples.ChildMenu = fyne.NewMenu("", w.sampleItems()...)
	quit := w.item("Quit", control(fyne.KeyQ), w.requestClose)
	quit.IsQuit = true
	file := fyne.NewMenu(w.words.Say("File"),
		w.item("Open…", control(fyne.KeyO), w.openDialog),
		m.recent, samples,
		fyne.NewMenuItemSeparator(),
		m.save,
		w.item("Save as…", controlShift(fyne.KeyS), w.saveAs),
		fyne.NewMenuItemSeparator(),
		w.item("Print the sheet…", control(fyne.KeyP), w.printSheet),
		fyne.NewMenuItemSeparator(),
		quit)

	m.undo = w.item("Undo", &fyne.ShortcutUndo{}, w.undo)
	m.redo = w.item("Redo", &fyne.ShortcutRedo{}, w.redo)
	m.tier = w.tierItems()
	edit := fyne.NewMenu(w.words.Say("Edit"), append([]*fyne.MenuItem{m.undo, m.redo, fyne.NewMenuItemSeparator()}, m.tier...)...)

	doors := make([]*fyne.MenuItem, 0, rooms)
	for r, key := range []fyne.KeyName{fyne.Key1, fyne.Key2, fyne.Key3, fyne.Key4} {
		doors = append(doors, w.item(room(r).name(), control(key), func() { w.enter(room(r)) }))
	}
	m.plan = w.item("Plan at the left", control(fyne.KeyL), func() { w.fold(planPaneKey) })
	m.stone = w.item("Stone at the right", control(fyne.KeyR), func() { w.fold(stonePaneKey) })
	m.themes = map[brightness]*fyne.MenuItem{}
	theme := w.item("Theme", nil, nil)
	theme.ChildMenu = fyne.NewMenu("")
	for _, b := range []brightness{asSystem, inLight, inDark} {
		label := map[brightness]words.Key{asSystem: "As the system", inLight: "Light|theme", inDark: "Dark"}[b]
		m.themes[b] = w.item(label, nil, func() { w.setTheme(b) })
		theme.ChildMenu.Items = append(theme.ChildMenu.Items, m.themes[b])
	}
	view := fyne.NewMenu(w.words.Say("View"), append(doors,
		fyne.NewMenuItemSeparator(),
		m.plan, m.stone,
		w.item("Enlarge a map, or all six", control(fyne.KeyM), w.enlarge),
		fyne.NewMenuItemSeparator(),
		w.item("Larger text", control(fyne.KeyEqual), func() { w.scaleText(1) }),
		w.item("Smaller text", control(fyne.KeyMinus), func() { w.scaleText(-1) }),
		theme, w.languageItem(),
		fyne.NewMenuItemSeparator(),
		w.item("Stop or go on", control(fyne.KeyPeriod), w.stopOrResume))...)

	guides := w.item("Guide", nil, nil)
	guides.ChildMenu = fyne.NewMenu("")
	for _, page := range guide.Pages() {
		guides.ChildMenu.Items = append(guides.ChildMenu.Items, fyne.NewMenuItem(page.Title, func() { w.showGuide(page) }))
	}
	help := fyne.NewMenu(w.words.Say("Help"),
		w.item("First steps", nil, w.firstSteps),
		guides,
		w.item("Copy diagnostics", nil, w.copyDiagnostics),
		fyne.NewMenuItemSeparator(),
		w.item("Licences", nil, w.licences),
		w.item("About Pavilight", nil, w.about))
	m.main = fyne.NewMainMenu(file, edit, view, help)
	return m.main
}

// languageItem lists the languages, each in its own words.
func (w *window) languageItem() *fyne.MenuItem {
	choose := w.item("Language", nil, nil)
	choose.ChildMenu = fyne.NewMenu("")
	for _, code := range append([]string{""}, words.Languages()...) {
		name := words.NameOf(code)
		if code == "" {
			name = w.words.Say("As the system")
		}
		one := fyne.NewMenuItem(name, func() { w.setLanguage(code) })
		one.Checked = code == w.files.language()
		choose.ChildMenu.Items = append(choose.ChildMenu.Items, one)
	}
	return choose
}

// sampleItems lists the bundled plans, a menu for each kind of outline.
func (w *window) sampleItems() []*fyne.MenuItem {
	files, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil {
		return nil // the pattern is sound
	}
	var groups []*fyne.MenuItem
	for _, g := range model.SampleGroups(files) {
		group := w.item(g.Outline, nil, nil)
		group.ChildMenu = fyne.NewMenu("")
		for _, s := range g.Samples {
			group.ChildMenu.Items = append(group.ChildMenu.Items, fyne.NewMenuItem(w.words.Among(model.SampleNames(), s.Label), func() {
				w.unlessUnsaved("Save them before you open another plan?", func() { w.openSample(s.File) })
			}))
		}
		groups = append(groups, group)
	}
	return groups
}

// refreshMenu writes what has changed; a menu is costly to refresh, so it is left
// alone otherwise.
func (w *window) refreshMenu() {
	m := &w.menu
	if m.main == nil {
		return
	}
	undoStep, canUndo := w.bench.Doc.UndoName()
	redoStep, canRedo := w.bench.Doc.RedoName()
	undo, redo := w.words.Say("Undo"), w.words.Say("Redo")
	if canUndo {
		undo = w.words.Say("Undo %s", undoStep)
	}
	if canRedo {
		redo = w.words.Say("Redo %s", redoStep)
	}
	wide := w.win.Canvas().Size().Width
	plan, stone := w.panes.shown(wide)
	recent := w.files.recent()
	_, picked := w.selectedTier()
	shown := fmt.Sprint(picked, undo, canUndo, redo, canRedo, w.bench.Doc.Modified(), plan, stone, w.files.brightness(), recent)
	if shown == m.shown {
		return
	}
	m.shown = shown
	m.undo.Label, m.undo.Disabled = undo, !canUndo
	m.redo.Label, m.redo.Disabled = redo, !canRedo
	for _, i := range m.tier {
		i.Disabled = !picked && i.Label != w.words.Say("New tier…")
	}
	m.save.Disabled = !w.bench.Doc.Modified() && w.bench.Doc.Path != ""
	m.plan.Checked, m.stone.Checked = plan, stone
	for b, i := range m.themes {
		i.Checked = b == w.files.brightness()
	}
	m.recent.Disabled = len(recent) == 0
	m.recent.ChildMenu.Items = nil
	for _, path := range recent {
		m.recent.ChildMenu.Items = append(m.recent.ChildMenu.Items, w.recentItem(path))
	}
	m.main.Refresh()
}

func (w *window) recentItem(path string) *fyne.MenuItem {
	label := filepath.Base(path) + "  –  " + filepath.Dir(path)
	if !exists(path) {
		return fyne.NewMenuItem(w.words.Say("%s  (gone: forget it)", label), func() {
			w.files.forgetRecent(path)
			w.refreshMenu()
		})
	}
	return fyne.NewMenuItem(label, func() { w.unlessUnsaved("Save them before you open another plan?", func() { w.open(path) }) })
}

// undo takes back what is being typed, if anything is, else the last step.
func (w *window) undo() {
	if f, ok := w.win.Canvas().Focused().(*numberField); ok && f.pending() {
		f.revert()
		return
	}
	w.bench.Undo()
}

func (w *window) redo() {
	if f, ok := w.win.Canvas().Focused().(*numberField); ok && f.pending() {
		f.TypedShortcut(&fyne.ShortcutRedo{})
		return
	}
	w.bench.Redo()
}

// fold shows a side pane or folds it away, and remembers it.
func (w *window) fold(key string) {
	plan, stone := w.panes.shown(w.win.Canvas().Size().Width)
	now := map[string]bool{planPaneKey: plan, stonePaneKey: stone}[key]
	w.files.keepPane(key, !now)
	w.body.Refresh()
	w.refreshMenu()
}

// enlarge lets the map with the focus, or the first, fill the pane, or brings all back.
func (w *window) enlarge() {
	for i := range w.grid.maps {
		for j, m := range w.grid.maps[i] {
			if m.focused {
				w.grid.toggle(i, j)
				return
			}
		}
	}
	w.grid.toggle(0, 0)
}

func (w *window) setTheme(b brightness) {
	w.app.Preferences().SetString(themeKey, string(b))
	w.applyTheme()
	w.refreshMenu()
}

// The scales of text that are offered.
const (
	leastScale = 0.8
	mostScale  = 1.6
)

// scaleText makes the text larger or smaller by a tenth.
func (w *window) scaleText(steps float32) {
	scale := min(mostScale, max(leastScale, w.files.textScale()+steps/10))
	w.app.Preferences().SetFloat(scaleKey, float64(scale))
	w.applyTheme()
}

func (w *window) applyTheme() {
	w.app.Settings().SetTheme(newGreys(w.files.brightness(), w.files.textScale()))
	if w.solid != nil {
		w.solid.redraw()
	}
}
