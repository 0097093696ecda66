package ui

import (
	"errors"
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
	b.list = newRayList(func(int) {}, w.strayKey)
	tall := func(t *wrapped) fyne.CanvasObject {
		return container.NewGridWrap(fyne.NewSize(stoneNarrow-24, 2*lineHeight()), t)
	}
	b.box = container.NewVBox(tall(b.title), b.list)
	b.box.Hide()
	copies := w.tips.button("Copy", nil, tipCopy, func() {
		if r := w.bench.Look.Ray; r != nil {
			w.app.Clipboard().SetContent(r.Text())
			w.report("The ray is on the clipboard, as a table.")
		}
	})
	saves := w.tips.button("Save…", nil, tipDraw, w.saveRay)
	closes := w.tips.button("Let go", nil, tipLetGo, w.bench.Look.Unfollow)
	head := container.NewVBox(
		container.NewHBox(newWord(colourDim, theme.SizeNameText, "Beside it"), b.chooser), tall(w.rayTitle))
	return container.New(layout.NewCustomPaddedLayout(8, 8, 14, 10), container.NewBorder(head,
		container.NewGridWithColumns(3, copies, saves, closes), nil, nil, container.NewVScroll(container.NewVBox(w.ray, b.box))))
}

// besideItems lists the surroundings in which a second ray can be followed.
func (w *window) besideItems() []*fyne.MenuItem {
	r := w.bench.Look.Ray
	if r == nil {
		return nil
	}
	none := fyne.NewMenuItem("no other ray", func() { w.bench.Look.FollowBeside(-1) })
	none.Checked = r.Beside == nil
	items := []*fyne.MenuItem{none}
	for j := range columns {
		if j == r.Column {
			continue
		}
		medium := strings.ToLower(w.bench.Look.Heading(j).Medium)
		item := fyne.NewMenuItem("the same in "+medium, func() { w.bench.Look.FollowBeside(j) })
		item.Checked = r.Beside != nil && r.Beside.Column == j
		items = append(items, item)
	}
	return items
}

// showRayLists tells the followed ray and the one beside it.
func (w *window) showRayLists(r *model.Ray) {
	w.rayTitle.setText(r.Title())
	lines, more := r.Lines()
	w.ray.show(lines, more, r.Step)
	b := &w.beside
	setVisible(b.box, r.Beside != nil)
	if r.Beside == nil {
		b.chooser.setText("no other ray")
		return
	}
	b.chooser.setText("the same in " + strings.ToLower(w.bench.Look.Heading(r.Beside.Column).Medium))
	b.title.setText(r.Beside.Title() + " (broken line)")
	lines, more = r.Beside.Lines()
	b.list.show(lines, more, -2) // no line is picked
	b.box.Refresh()
}

// saveRay asks for a file and draws the followed ray into it.
func (w *window) saveRay() {
	r := w.bench.Look.Ray
	if r == nil {
		return
	}
	page := r.Page(w.bench.Look.Subject.Stone.Name)
	w.askTarget("Draw the ray as .svg or .png, or tell it as .txt", "The ray cannot be drawn there", "ray.svg",
		[]string{".svg", ".png", ".txt"}, func(path string) {
			if err := writeRay(path, page, r.Text()); err != nil {
				w.explain("The ray was not drawn", err)
				return
			}
			w.report("Drawn as " + path)
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
		return errors.New(filepath.Base(path) + ": give the file the ending .svg, .png or .txt")
	}
	return disk.Replace(path, write)
}
