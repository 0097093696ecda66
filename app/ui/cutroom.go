package ui

import (
	"fmt"
	"path/filepath"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/storage"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/sheet"
	"pavilight/facets"
)

// cutBench is the room where the sheet for the bench is laid out.
type cutBench struct {
	cut    *model.Cut
	of     *facets.Plan // the plan whose sheet is shown or being made
	box    *fyne.Container
	pages  *fyne.Container
	scroll *container.Scroll
	state  *wrapped
	write  *widget.Button
	line   *progressLine
}

func (w *window) buildCutRoom() fyne.CanvasObject {
	c := &w.cutting
	c.cut = model.NewCut(w.do, w.refreshCut)
	var papers []string
	for _, p := range sheet.Papers() {
		papers = append(papers, p.Name)
	}
	paper := widget.NewSelect(papers, nil)
	paper.SetSelected(c.cut.Paper)
	paper.OnChanged = func(name string) { c.cut.Paper = name; w.makeSheet() }
	large := widget.NewCheck("Type a quarter larger", func(on bool) { c.cut.Large = on; w.makeSheet() })
	maps := widget.NewCheck("With maps and ledger", nil)
	maps.Checked = c.cut.Maps
	maps.OnChanged = func(on bool) { c.cut.Maps = on; w.makeSheet() }
	c.write = widget.NewButton("Write the sheet…", w.writeSheet)
	c.write.Importance = widget.HighImportance
	c.state = newWrapped(colourDim, theme.SizeNameText)
	c.line = newProgressLine()
	heading := newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, "Sheet for the bench").bold()
	options := container.New(layout.NewCustomPaddedVBoxLayout(8), heading,
		container.NewBorder(nil, nil, newWord(colourDim, theme.SizeNameText, "Paper"), nil, paper),
		large, maps, c.write, c.line, container.NewGridWrap(fyne.NewSize(planWide-28, 220), c.state))
	c.pages = container.New(layout.NewCustomPaddedVBoxLayout(14))
	c.scroll = container.NewVScroll(container.NewCenter(container.New(layout.NewCustomPaddedLayout(14, 14, 14, 14), c.pages)))
	c.box = container.New(&sideLayout{width: planWide},
		pane(container.New(layout.NewCustomPaddedLayout(14, 14, 14, 14), options)),
		container.NewStack(ground(theme.ColorNameBackground), c.scroll))
	return c.box
}

// enterCut lays the sheet out anew if the plan is another than that on the screen.
func (w *window) enterCut() {
	if w.cutting.of != w.bench.Doc.Plan() {
		w.makeSheet()
	}
}

func (w *window) makeSheet() {
	w.cutting.of = w.bench.Doc.Plan()
	material, err := model.MaterialOf(w.cutting.of.Material)
	if err != nil {
		w.say(err)
		return
	}
	w.cutting.cut.Make(w.cutting.of, material, w.bench.Look.Around, w.bench.Look.Settings().Head, programName())
}

func (w *window) refreshCut() {
	c := &w.cutting
	setVisible(c.line, c.cut.Running)
	c.line.show(c.cut.Done)
	if c.cut.Ready() {
		c.write.Enable()
	} else {
		c.write.Disable()
	}
	switch {
	case c.cut.Running:
		c.state.setText("The pages are being laid out.")
	case c.cut.Trouble != nil:
		c.state.setText(strings.Join(model.InWords(c.cut.Trouble), "  "))
	default:
		c.state.setText(strings.Join(append([]string{fmt.Sprintf("%d pages, as they are printed.", len(c.cut.Pages))}, c.cut.Notes...), "  "))
		w.showPages()
	}
}

// showPages puts the pages on the screen, one under the other.
func (w *window) showPages() {
	c := &w.cutting
	c.pages.Objects = nil
	wide := min(820, max(300, w.win.Canvas().Size().Width-planWide-80))
	for _, img := range c.cut.Pages {
		page := canvas.NewImageFromImage(img)
		page.ScaleMode = canvas.ImageScaleFastest
		page.FillMode = canvas.ImageFillStretch
		high := wide * float32(img.Rect.Dy()) / float32(img.Rect.Dx())
		c.pages.Objects = append(c.pages.Objects, container.NewGridWrap(fyne.NewSize(wide, high), page))
	}
	c.pages.Refresh()
	c.scroll.Refresh()
	w.once("sheet")
}

// writeSheet asks for a file and writes the pages to it as PDF.
func (w *window) writeSheet() {
	d := dialog.NewFileSave(func(f fyne.URIWriteCloser, err error) {
		if err != nil {
			w.explain("The sheet cannot be written there", err)
			return
		}
		if f == nil {
			return // cancelled
		}
		path := f.URI().Path()
		f.Close() // nothing was opened: see writeLater
		if filepath.Ext(path) == "" {
			path += ".pdf"
		}
		if err := w.cutting.cut.Write(path); err != nil {
			w.explain("The sheet was not written", err)
			return
		}
		w.report("Written to " + path)
	}, w.win)
	d.SetFileName(w.cutting.cut.FileName())
	d.SetFilter(storage.NewExtensionFileFilter([]string{".pdf"}))
	d.SetTitleText("Write the sheet")
	w.showFileDialog(d)
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
