package ui

import (
	"fmt"
	"io/fs"
	"path/filepath"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/driver/desktop"

	"pavilight/app/model"
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

func controlShift(key fyne.KeyName) fyne.Shortcut {
	return &desktop.CustomShortcut{KeyName: key, Modifier: fyne.KeyModifierShortcutDefault | fyne.KeyModifierShift}
}

func item(label string, shortcut fyne.Shortcut, do func()) *fyne.MenuItem {
	i := fyne.NewMenuItem(label, do)
	i.Shortcut = shortcut
	return i
}

func (w *window) buildMenu() *fyne.MainMenu {
	m := &w.menu
	m.save = item("Save", control(fyne.KeyS), w.save)
	m.recent = fyne.NewMenuItem("Open recent", nil)
	m.recent.ChildMenu = fyne.NewMenu("")
	samples := fyne.NewMenuItem("Open sample", nil)
	samples.ChildMenu = fyne.NewMenu("", w.sampleItems()...)
	quit := item("Quit", control(fyne.KeyQ), w.requestClose)
	quit.IsQuit = true
	file := fyne.NewMenu("File",
		item("Open…", control(fyne.KeyO), w.openDialog),
		m.recent, samples,
		fyne.NewMenuItemSeparator(),
		m.save,
		item("Save as…", controlShift(fyne.KeyS), w.saveAs),
		fyne.NewMenuItemSeparator(),
		item("Print the sheet…", control(fyne.KeyP), w.printSheet),
		fyne.NewMenuItemSeparator(),
		quit)

	m.undo = item("Undo", &fyne.ShortcutUndo{}, w.undo)
	m.redo = item("Redo", &fyne.ShortcutRedo{}, w.redo)
	m.tier = w.tierItems()
	edit := fyne.NewMenu("Edit", append([]*fyne.MenuItem{m.undo, m.redo, fyne.NewMenuItemSeparator()}, m.tier...)...)

	doors := make([]*fyne.MenuItem, 0, rooms)
	for r, key := range []fyne.KeyName{fyne.Key1, fyne.Key2, fyne.Key3, fyne.Key4} {
		doors = append(doors, item(room(r).String(), control(key), func() { w.enter(room(r)) }))
	}
	m.plan = item("Plan at the left", control(fyne.KeyL), func() { w.fold(planPaneKey) })
	m.stone = item("Stone at the right", control(fyne.KeyR), func() { w.fold(stonePaneKey) })
	m.themes = map[brightness]*fyne.MenuItem{}
	theme := fyne.NewMenuItem("Theme", nil)
	theme.ChildMenu = fyne.NewMenu("")
	for _, b := range []brightness{asSystem, inLight, inDark} {
		label := map[brightness]string{asSystem: "As the system", inLight: "Light", inDark: "Dark"}[b]
		m.themes[b] = fyne.NewMenuItem(label, func() { w.setTheme(b) })
		theme.ChildMenu.Items = append(theme.ChildMenu.Items, m.themes[b])
	}
	view := fyne.NewMenu("View", append(doors,
		fyne.NewMenuItemSeparator(),
		m.plan, m.stone,
		item("Enlarge a map, or all six", control(fyne.KeyM), w.enlarge),
		fyne.NewMenuItemSeparator(),
		item("Larger text", control(fyne.KeyEqual), func() { w.scaleText(1) }),
		item("Smaller text", control(fyne.KeyMinus), func() { w.scaleText(-1) }),
		theme,
		fyne.NewMenuItemSeparator(),
		item("Stop or go on", control(fyne.KeyPeriod), w.stopOrResume))...)

	help := fyne.NewMenu("Help",
		fyne.NewMenuItem("First steps", w.firstSteps),
		fyne.NewMenuItem("Copy diagnostics", w.copyDiagnostics),
		fyne.NewMenuItemSeparator(),
		fyne.NewMenuItem("About Pavilight", w.about))
	m.main = fyne.NewMainMenu(file, edit, view, help)
	return m.main
}

// sampleItems lists the bundled plans, a menu for each kind of outline.
func (w *window) sampleItems() []*fyne.MenuItem {
	files, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil {
		return nil // the pattern is sound
	}
	var groups []*fyne.MenuItem
	for _, g := range model.SampleGroups(files) {
		group := fyne.NewMenuItem(g.Outline, nil)
		group.ChildMenu = fyne.NewMenu("")
		for _, s := range g.Samples {
			group.ChildMenu.Items = append(group.ChildMenu.Items, fyne.NewMenuItem(s.Label, func() {
				w.unlessUnsaved("open another plan", func() { w.openSample(s.File) })
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
	undo, canUndo := w.bench.Doc.UndoName()
	redo, canRedo := w.bench.Doc.RedoName()
	wide := w.win.Canvas().Size().Width
	plan, stone := w.panes.shown(wide)
	recent := w.files.recent()
	_, picked := w.selectedTier()
	shown := fmt.Sprint(picked, undo, canUndo, redo, canRedo, w.bench.Doc.Modified(), plan, stone, w.files.brightness(), recent)
	if shown == m.shown {
		return
	}
	m.shown = shown
	m.undo.Label, m.undo.Disabled = strings.TrimSpace("Undo "+undo), !canUndo
	m.redo.Label, m.redo.Disabled = strings.TrimSpace("Redo "+redo), !canRedo
	for _, i := range m.tier {
		i.Disabled = !picked && i.Label != "New tier…"
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
		return fyne.NewMenuItem(label+"  (gone: forget it)", func() {
			w.files.forgetRecent(path)
			w.refreshMenu()
		})
	}
	return fyne.NewMenuItem(label, func() { w.unlessUnsaved("open another plan", func() { w.open(path) }) })
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

// scaleText makes the text larger or smaller by a tenth.
func (w *window) scaleText(steps float32) {
	const least, most = 0.8, 1.6
	scale := min(most, max(least, w.files.textScale()+steps/10))
	w.app.Preferences().SetFloat(scaleKey, float64(scale))
	w.applyTheme()
}

func (w *window) applyTheme() {
	w.app.Settings().SetTheme(newGreys(w.files.brightness(), w.files.textScale()))
	if w.solid != nil {
		w.solid.redraw()
	}
}
