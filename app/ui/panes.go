package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// groundWidget is a plain ground in a colour of the theme, which it follows.
type groundWidget struct {
	widget.BaseWidget
	name fyne.ThemeColorName
}

func newGround(name fyne.ThemeColorName) *groundWidget {
	g := &groundWidget{name: name}
	g.ExtendBaseWidget(g)
	return g
}

// CreateRenderer builds the rectangle.
func (g *groundWidget) CreateRenderer() fyne.WidgetRenderer {
	r := &groundRenderer{g: g, rect: canvas.NewRectangle(color.Transparent)}
	r.Refresh()
	return r
}

type groundRenderer struct {
	g    *groundWidget
	rect *canvas.Rectangle
}

func (r *groundRenderer) Destroy()                     {}
func (r *groundRenderer) Objects() []fyne.CanvasObject { return []fyne.CanvasObject{r.rect} }
func (r *groundRenderer) MinSize() fyne.Size           { return fyne.Size{} }
func (r *groundRenderer) Layout(size fyne.Size)        { r.rect.Resize(size) }
func (r *groundRenderer) Refresh() {
	r.rect.FillColor = themed(r.g.name)
	r.rect.Refresh()
}

// paneLayout places the plan at the left, the maps in the middle and the stone at
// the right. Where the window is narrow the stone gives way, unless it was asked for.
type paneLayout struct {
	files fileMemory
}

// Widths of the side panes, and below which width of the window the stone gives way.
const (
	planWide    = 272
	planNarrow  = 250
	stoneWide   = 276
	stoneNarrow = 236
	narrow      = 1180
	paneGap     = 6
)

// shown reports which of the side panes are to be seen at this width.
func (p *paneLayout) shown(width float32) (plan, stone bool) {
	plan = p.files.pane(planPaneKey, true)
	stone = p.files.pane(stonePaneKey, width >= narrow)
	return plan, stone
}

// MinSize is the least that the middle pane needs beside the plan.
func (p *paneLayout) MinSize(objects []fyne.CanvasObject) fyne.Size {
	return fyne.NewSize(planNarrow+paneGap+objects[1].MinSize().Width, objects[1].MinSize().Height)
}

// Layout gives the side panes their width and the maps the rest.
func (p *paneLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	plan, stone := p.shown(size.Width)
	left, right := float32(planWide), float32(stoneWide)
	if size.Width < narrow {
		left, right = planNarrow, stoneNarrow
	}
	setVisible(objects[0], plan)
	setVisible(objects[2], stone)
	x, width := float32(0), size.Width
	if plan {
		place(objects[0], 0, 0, left, size.Height)
		x, width = left+paneGap, width-left-paneGap
	}
	if stone {
		place(objects[2], size.Width-right, 0, right, size.Height)
		width -= right + paneGap
	}
	place(objects[1], x, 0, max(0, width), size.Height)
}

func setVisible(o fyne.CanvasObject, visible bool) {
	if o.Visible() != visible {
		if visible {
			o.Show()
		} else {
			o.Hide()
		}
	}
}

// headerLayout sets the plan at the left, the rooms in the middle of what the plan
// leaves, and the progress at the right. Where there is little room the progress is made
// narrower, then the weight goes, which stands beside the stone, too, then the index, and
// then the title is cut.
type headerLayout struct{ title, index, weight *line }

// headerAir lies between the parts of the header, at the least.
const headerAir = 12

// MinSize asks for the height alone and for as much width as the doors need.
func (*headerLayout) MinSize(objects []fyne.CanvasObject) fyne.Size {
	size := fyne.NewSize(0, 0)
	for _, o := range objects {
		size.Height = max(size.Height, o.MinSize().Height)
	}
	size.Width = objects[1].MinSize().Width + objects[2].MinSize().Width + 200
	return size
}

// Layout centres the doors on the window unless left or right press on them.
func (h *headerLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	doors, right := objects[1].MinSize(), objects[2].MinSize()
	room := size.Width - doors.Width - right.Width - 2*headerAir // for the plan
	h.title.most = 0
	for _, l := range []*line{h.weight, h.index} {
		setVisible(l, true)
	}
	for _, l := range []*line{h.weight, h.index} {
		if objects[0].MinSize().Width > room {
			setVisible(l, false)
		}
	}
	if over := objects[0].MinSize().Width - room; over > 0 {
		const least = 40
		h.title.most = max(least, h.title.MinSize().Width-over)
	}
	left := objects[0].MinSize()
	right.Width = min(progressUsual, max(right.Width, size.Width-doors.Width-left.Width-2*headerAir))
	x := (size.Width - doors.Width) / 2
	x = max(x, left.Width+headerAir)
	x = min(x, size.Width-right.Width-headerAir-doors.Width)
	place(objects[0], 0, (size.Height-left.Height)/2, max(0, min(left.Width, x-headerAir)), left.Height)
	place(objects[1], x, (size.Height-doors.Height)/2, doors.Width, doors.Height)
	place(objects[2], size.Width-right.Width, (size.Height-right.Height)/2, right.Width, right.Height)
}

// progressUsual is the width of what a room is at, where there is room.
const progressUsual = 360

// progressLayout sets what a room is at, how far it is, and the button that stops it side by
// side; the first takes what the others leave.
type progressLayout struct{}

// MinSize is that of a short line.
func (*progressLayout) MinSize(objects []fyne.CanvasObject) fyne.Size {
	stop := objects[2].MinSize()
	return fyne.NewSize(150+8+50+8+stop.Width, stop.Height)
}

// Layout makes the second wider where there is room.
func (l *progressLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	const high, air, wide = 6, 8, 90
	stop := objects[2].MinSize()
	bar := min(wide, max(50, size.Width-stop.Width-2*air-190))
	place(objects[2], size.Width-stop.Width, (size.Height-stop.Height)/2, stop.Width, stop.Height)
	place(objects[1], size.Width-stop.Width-air-bar, (size.Height-high)/2, bar, high)
	place(objects[0], 0, (size.Height-lineHeight())/2, max(0, size.Width-stop.Width-2*air-bar), lineHeight())
}

// squareLayout gives its first object a square of the full width, and the rest a
// line below.
type squareLayout struct{}

// MinSize cannot know the width yet: it asks for the square of a pane.
func (*squareLayout) MinSize(objects []fyne.CanvasObject) fyne.Size {
	return fyne.NewSize(stoneNarrow, stoneNarrow+objects[1].MinSize().Height+8)
}

// Layout keeps the square within what it was given.
func (*squareLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	below := objects[1].MinSize().Height
	place(objects[0], 6, 6, max(0, size.Width-12), max(0, size.Height-below-8))
	place(objects[1], 6, size.Height-below-2, max(0, size.Width-12), below)
}

// factTable is a list of names and values; a long value takes several lines.
type factTable struct {
	box   *fyne.Container
	rows  []factRow
	names float32 // their width
}

type factRow struct {
	name  *line
	value *wrapped
}

func newFactTable() *factTable {
	t := &factTable{names: factNames}
	t.box = &fyne.Container{Layout: t}
	return t
}

func (t *factTable) show(facts [][2]string) {
	if len(facts) != len(t.rows) {
		t.box.Objects, t.rows = nil, nil
		for range facts {
			r := factRow{newLine(colourDim, theme.SizeNameText), newWrapped(theme.ColorNameForeground, theme.SizeNameText)}
			t.rows = append(t.rows, r)
			t.box.Objects = append(t.box.Objects, r.name, r.value)
		}
	}
	for i, f := range facts {
		heading := f[1] == ""
		if t.rows[i].name.style.Bold != heading {
			t.rows[i].name.style.Bold = heading
			t.rows[i].name.Refresh()
		}
		t.rows[i].name.setText(f[0])
		t.rows[i].value.setText(f[1])
	}
	t.box.Refresh()
}

// factNames is the usual width of the names.
const factNames = 100

// each walks the rows with the place of each, and returns the height of all.
func (t *factTable) each(width float32, do func(r factRow, y, high float32)) float32 {
	y := float32(0)
	for i, r := range t.rows {
		if r.value.text == "" && i > 0 {
			y += 8 // before a heading
		}
		high := max(lineHeight(), r.value.high(width-t.names)) + 1
		do(r, y, high)
		y += high
	}
	return y
}

// MinSize is the height that the values need at the width of the pane.
func (t *factTable) MinSize([]fyne.CanvasObject) fyne.Size {
	width := max(stoneNarrow-28, t.box.Size().Width)
	return fyne.NewSize(120, t.each(width, func(factRow, float32, float32) {}))
}

// Layout sets the values in one column.
func (t *factTable) Layout(_ []fyne.CanvasObject, size fyne.Size) {
	t.each(size.Width, func(r factRow, y, high float32) {
		place(r.name, 0, y, t.names-6, lineHeight())
		place(r.value, t.names, y, max(0, size.Width-t.names), high)
	})
}
