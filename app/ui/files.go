package ui

import (
	"errors"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/storage"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/disk"
	"pavilight/app/model"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/testdata"
)

// open reads the plan or scan at path; if it cannot be had the window keeps what it has.
func (w *window) open(path string) {
	w.commitTyping()
	w.bench.Open(path, func(err error) {
		if err != nil {
			w.explain("%s cannot be opened", err, filepath.Base(path))
			w.tell("refused")
			return
		}
		if w.bench.Doc.Path != "" { // a scan has no plan file yet
			w.files.keepRecent(w.bench.Doc.Path)
		}
		w.afterOpening()
		if w.bench.Doc.Path == "" {
			if m, err := w.bench.MaterialOf(w.bench.Doc.Plan().Material); err == nil {
				w.report("A scan, taken as %s and in millimetres: choose material and width above.", stock.NameOf(w.words, m))
			}
		}
	})
}

func (w *window) openSample(name string) {
	text, err := fs.ReadFile(testdata.Plans(), name)
	if err != nil {
		w.explain("The plan %s cannot be opened", err, name)
		return
	}
	w.openText(text, name)
}

// openText opens a plan that the program carries; it has no file of the user's yet.
func (w *window) openText(text []byte, name string) {
	w.commitTyping()
	if err := w.bench.OpenText(text, name); err != nil {
		w.explain("The plan %s cannot be opened", err, name)
		return
	}
	w.afterOpening()
}

func (w *window) afterOpening() {
	w.enter(lookRoom)
	w.list.scroll.ScrollToTop()
	w.say(nil)
	w.refreshMenu()
	w.look()
	w.tell("opened")
}

// commitTyping takes over what is being typed in a field.
func (w *window) commitTyping() {
	if f, ok := w.win.Canvas().Focused().(*numberField); ok {
		f.settle()
	}
}

// explain tells what went wrong, fault by fault, and that nothing is lost.
func (w *window) explain(title words.Key, err error, args ...any) {
	text := widget.NewLabel(strings.Join(model.InWords(w.words, err), "\n\n"))
	text.Wrapping = fyne.TextWrapWord
	text.Selectable = true
	keeps := newWrapped(colourDim, "text")
	keeps.setText(w.words.Say("The stone that was open stays as it is."))
	scroll := container.NewVScroll(text)
	scroll.SetMinSize(fyne.NewSize(min(560, w.win.Canvas().Size().Width-120), 170))
	d := dialog.NewCustom(w.words.Say(title, args...), w.words.Say("Close"), container.NewBorder(nil,
		container.NewGridWrap(fyne.NewSize(400, 24), keeps), nil, nil, scroll), w.win)
	w.raise(d)
}

// notice tells something that needs no answer.
func (w *window) notice(title, text words.Key, args ...any) {
	w.raise(dialog.NewCustom(w.words.Say(title), w.words.Say("Close"), widget.NewLabel(w.words.Say(text, args...)), w.win))
}

// openDialog asks which plan to open.
func (w *window) openDialog() {
	w.unlessUnsaved("Save them before you open another plan?", func() {
		d := dialog.NewFileOpen(func(r fyne.URIReadCloser, err error) {
			if err != nil {
				w.explain("The file cannot be opened", err)
				return
			}
			if r == nil {
				return // cancelled
			}
			path := r.URI().Path()
			r.Close()
			w.open(path)
		}, w.win)
		d.SetFilter(storage.NewExtensionFileFilter(append(model.ScanExtensions(), ".toml")))
		d.SetTitleText(w.words.Say("Open a plan or a scan"))
		w.showFileDialog(d)
	})
}

// askTarget asks for a file to write to and hands on its path. A name without an ending
// gets the first of those that are offered.
func (w *window) askTarget(title, trouble words.Key, name string, endings []string, then func(path string)) {
	d := dialog.NewFileSave(func(f fyne.URIWriteCloser, err error) {
		if err != nil {
			w.explain(trouble, err)
			return
		}
		if f == nil {
			return // cancelled
		}
		path := f.URI().Path()
		f.Close() // nothing was opened: see writeLater
		if filepath.Ext(path) == "" {
			path += endings[0]
		}
		then(path)
	}, w.win)
	d.SetFileName(name)
	d.SetFilter(storage.NewExtensionFileFilter(endings))
	d.SetTitleText(w.words.Say(title))
	w.showFileDialog(d)
}

// showFileDialog raises a question for a file where the plan lies.
func (w *window) showFileDialog(d *dialog.FileDialog) {
	if folder, err := storage.ListerForURI(storage.NewFileURI(w.folder())); err == nil {
		d.SetLocation(folder)
	}
	w.raise(d)
	size := w.win.Canvas().Size()
	d.Resize(fyne.NewSize(min(900, size.Width*0.9), min(620, size.Height*0.9))) // before it is raised it has no size to change
	w.tellOnceDrawn("choosing")
}

// folder is where the plan lies, else where the last one did, else the user's own.
func (w *window) folder() string {
	if p := w.bench.Doc.Path; p != "" {
		return filepath.Dir(p)
	}
	for _, p := range w.files.recent() {
		if exists(filepath.Dir(p)) {
			return filepath.Dir(p)
		}
	}
	if home, err := os.UserHomeDir(); err == nil {
		return home
	}
	return "."
}

// save writes the plan to its file, or asks for one if it has none.
func (w *window) save() { w.saveThen(func() {}) }

func (w *window) saveThen(then func()) {
	w.commitTyping()
	if w.bench.Doc.Path == "" {
		w.saveAsThen(then)
		return
	}
	w.write(w.bench.Doc.Path, then)
}

func (w *window) saveAs() { w.commitTyping(); w.saveAsThen(func() {}) }

// saveAsThen asks for a file and writes the plan to it.
func (w *window) saveAsThen(then func()) {
	w.askTarget("Save the plan as", "The plan cannot be saved there", w.bench.Doc.FileName(), []string{facets.PlanEnding, ".toml"},
		func(path string) { w.write(path, then) })
}

func (w *window) write(path string, then func()) { w.writeOver(path, false, then) }

// writeOver writes the plan; over says that the user knows of what other hands wrote.
func (w *window) writeOver(path string, over bool, then func()) {
	w.tell("saving")
	doc := w.bench.Doc
	w.bench.Save(path, over, w.keeper.recovery, func(err error) {
		switch {
		case errors.Is(err, disk.ErrChanged) && doc == w.bench.Doc:
			w.askOver(path, then)
		case err != nil:
			w.explain("The plan was not saved", err)
			w.tell("refused")
		default:
			w.keeper.forgetTaken()
			w.files.keepRecent(path)
			w.refreshMenu()
			w.report("Saved as %s", path)
			w.tell("saved")
			w.look()
			then()
		}
	})
}

// askOver asks what to do about a file that other hands wrote to since it was read.
func (w *window) askOver(path string, then func()) {
	var d *dialog.CustomDialog
	choice := func(label words.Key, do func()) *widget.Button {
		return widget.NewButton(w.words.Say(label), func() { d.Hide(); do() })
	}
	text := widget.NewLabel(w.words.Say("“%s” was written to by another program or window\n"+
		"since it was read here. Nothing was saved yet.", filepath.Base(path)))
	d = dialog.NewCustomWithoutButtons(w.words.Say("The file has changed"), text, w.win)
	d.SetButtons([]fyne.CanvasObject{
		choice("Cancel", func() {}),
		choice("Replace it", func() { w.writeOver(path, true, then) }),
		choice("Save as…", func() { w.saveAsThen(then) }),
	})
	w.raise(d)
	w.tell("refused")
}

// dropped takes files that were dropped on the window.
func (w *window) dropped(_ fyne.Position, uris []fyne.URI) {
	if len(uris) == 0 {
		return
	}
	path := uris[0].Path()
	if len(uris) > 1 {
		w.report("Several files were dropped; the first is opened.")
	}
	w.unlessUnsaved("Save them before you open %s?", func() { w.open(path) }, filepath.Base(path))
}

// unlessUnsaved does what would lose unsaved work, but asks before it if there is any.
func (w *window) unlessUnsaved(question words.Key, do func(), args ...any) {
	w.commitTyping()
	if !w.bench.Doc.Modified() {
		do()
		return
	}
	var d *dialog.CustomDialog
	w.asked = map[string]*widget.Button{}
	choice := func(label words.Key, importance widget.Importance, then func()) *widget.Button {
		b := widget.NewButton(w.words.Say(label), func() { d.Hide(); w.asked = nil; then() })
		b.Importance = importance
		w.asked[string(label)] = b
		return b
	}
	name := strings.TrimSuffix(w.bench.Doc.Title(w.words), "*")
	text := widget.NewLabel(w.words.Say("“%s” has changes that are not saved.", name) + "\n" + w.words.Say(question, args...))
	d = dialog.NewCustomWithoutButtons(w.words.Say("Unsaved changes"), text, w.win)
	d.SetButtons([]fyne.CanvasObject{
		choice("Cancel", widget.MediumImportance, func() {}),
		choice("Discard", widget.MediumImportance, do),
		choice("Save", widget.HighImportance, func() { w.saveThen(do) }),
	})
	w.raise(d)
	w.tellOnceDrawn("asked")
}

// requestClose closes the window, but asks first if work would be lost.
func (w *window) requestClose() {
	w.unlessUnsaved("Save them before you leave?", w.close)
}

// close ends the window; what is unsaved is not wanted.
func (w *window) close() {
	if w.closed {
		return
	}
	w.closed = true
	w.dropKept()
	w.leave()
}

// closeKept ends the window without a question; what is unsaved is kept.
func (w *window) closeKept() {
	if w.closed {
		return
	}
	w.closed = true
	w.keepNow()
	w.leave()
}

func (w *window) leave() {
	w.files.keepWindowSize(w.win.Canvas().Size())
	w.endKeeping()
	w.stopRooms()
	w.keeper.recovery.Close()
	w.keeper.claims.Release()
	w.win.Close()
}

// stopRooms ends what runs in any room and waits for it.
func (w *window) stopRooms() {
	w.bench.Look.Close()
	w.tuning.tune.Stop()
	w.cutting.cut.Stop()
	w.telling.tell.Stop()
	w.tuning.tune.Wait()
	w.cutting.cut.Wait()
	w.telling.tell.Wait()
}
