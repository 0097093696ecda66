package ui

import (
	"image/png"
	"io"
	"path/filepath"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"

	"pavilight/app/disk"
	"pavilight/app/drawing"
	"pavilight/app/model"
	"pavilight/app/words"
)

// rayBeside is the second ray of the pane that tells a followed one.
type rayBeside struct {
	chooser *chooser
	title   *wrapped
	list    *rayList
	box     *fyne.Container // title and list
}

// buildRayBox builds the pane that tells the followed ray, and the one beside it.
func (w *window) buildRayBox() *fyne.Container {
	b := &w.beside
	b.chooser = newChooser(theme.SizeNameText, w.besideItems)
	b.chooser.tip = tip{w.tips, tipBeside}
	b.title = newWrapped(theme.ColorNameForeground, theme.SizeNameText)
	b.list = newRayList(w.words, func(int) {}, w.strayKey)
	tall := func(t *wrapped) fyne.CanvasObject {
		return container.NewGridWrap(fyne.NewSize(stoneNarrow-24, 2*lineHeight()), t)
	}
	b.box = container.NewVBox(tall(b.title), b.list)
	b.box.Hide()
	copies := w.tips.button("Copy", nil, tipCopy, func() {
		if r := w.bench.Look.Ray; r != nil {
			w.app.Clipboard().SetContent(r.Text(w.words))
			w.report("The ray is on the clipboard, as a table.")
		}
	})
	saves := w.tips.button("Save…", nil, tipDraw, w.saveRay)
	closes := w.tips.button("Let go", nil, tipLetGo, w.bench.Look.Unfollow)
	head := container.NewVBox(
		container.NewHBox(newWord(colourDim, theme.SizeNameText, w.words.Say("Beside it")), b.chooser), tall(w.rayTitle))
	return container.New(layout.NewCustomPaddedLayout(8, 8, 14, 10), container.NewBorder(head,
		container.NewGridWithColumns(3, copies, saves, closes), nil, nil, container.NewVScroll(container.NewVBox(w.ray, b.box))))
}

// besideItems lists the surroundings in which a second ray can be followed.
func (w *window) besideItems() []*fyne.MenuItem {
	r := w.bench.Look.Ray
	if r == nil {
		return nil
	}
	none := w.item("no other ray", nil, func() { w.bench.Look.FollowBeside(-1) })
	none.Checked = r.Beside == nil
	items := []*fyne.MenuItem{none}
	for j := range columns {
		if j == r.Column {
			continue
		}
		item := fyne.NewMenuItem(w.sameIn(j), func() { w.bench.Look.FollowBeside(j) })
		item.Checked = r.Beside != nil && r.Beside.Column == j
		items = append(items, item)
	}
	return items
}

// sameIn offers the same ray in a column's surrounding.
func (w *window) sameIn(column int) string {
	return w.words.Say("the same in %s", w.words.Within(w.bench.Look.Heading(column).Medium))
}

// showRayLists tells the followed ray and the one beside it.
func (w *window) showRayLists(r *model.Ray) {
	w.rayTitle.setText(r.Title(w.words))
	lines, more := r.Lines(w.words)
	w.ray.show(lines, more, r.Step)
	b := &w.beside
	setVisible(b.box, r.Beside != nil)
	if r.Beside == nil {
		b.chooser.setText(w.words.Say("no other ray"))
		return
	}
	b.chooser.setText(w.sameIn(r.Beside.Column))
	b.title.setText(w.words.Say("%s (broken line)", r.Beside.Title(w.words)))
	lines, more = r.Beside.Lines(w.words)
	b.list.show(lines, more, -2) // no line is picked
	b.box.Refresh()
}

// saveRay asks for a file and draws the followed ray into it.
func (w *window) saveRay() {
	r := w.bench.Look.Ray
	if r == nil {
		return
	}
	page := r.Page(w.words, w.bench.Look.Subject.Stone.Name)
	w.askTarget("Draw the ray as .svg or .png, or tell it as .txt", "The ray cannot be drawn there", "ray.svg",
		[]string{".svg", ".png", ".txt"}, func(path string) {
			if err := writeRay(path, page, r.Text(w.words)); err != nil {
				w.explain("The ray was not drawn", err)
				return
			}
			w.report("Drawn as %s", path)
			w.tell("drawn")
		})
}

// writeRay writes the page, or the text, by the ending of the file's name.
func writeRay(path string, page *drawing.Page, text string) error {
	const dotsPerMM = 12 // 300 an inch
	write := map[string]func(io.Writer) error{
		".svg": page.SVG,
		".png": func(to io.Writer) error { return png.Encode(to, page.Raster(dotsPerMM)) },
		".txt": func(to io.Writer) error {
			_, err := io.WriteString(to, text)
			return err
		},
	}[strings.ToLower(filepath.Ext(path))]
	if write == nil {
		return words.Errorf("%s: give the file the ending .svg, .png or .txt", filepath.Base(path))
	}
	return disk.Replace(path, write)
}
