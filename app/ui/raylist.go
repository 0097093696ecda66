package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/words"
)

// rayList tells a ray bounce by bounce, a line each. The arrow keys step along it.
type rayList struct {
	widget.BaseWidget

	pick    func(step int) // -1 for the entry
	stray   func(*fyne.KeyEvent)
	words   *words.Words
	lines   []model.RayLine
	more    int
	step    int
	focused bool
}

var (
	_ desktop.Mouseable = (*rayList)(nil)
	_ fyne.Focusable    = (*rayList)(nil)
)

func newRayList(in *words.Words, pick func(step int), stray func(*fyne.KeyEvent)) *rayList {
	l := &rayList{words: in, pick: pick, stray: stray, step: -1}
	l.ExtendBaseWidget(l)
	return l
}

func (l *rayList) show(lines []model.RayLine, more, step int) {
	l.lines, l.more, l.step = lines, more, step
	l.Refresh()
}

// MouseDown takes the focus and picks the line under the pointer.
func (l *rayList) MouseDown(e *desktop.MouseEvent) {
	if c := fyne.CurrentApp().Driver().CanvasForObject(l); c != nil {
		c.Focus(l)
	}
	row := int(e.Position.Y/rayLineHigh()) - 1 // below the headings
	if row >= 0 && row < len(l.lines) {
		l.pick(row - 1)
	}
}

// MouseUp is not used.
func (l *rayList) MouseUp(*desktop.MouseEvent) {}

// TypedKey steps along the ray.
func (l *rayList) TypedKey(e *fyne.KeyEvent) {
	switch e.Name {
	case fyne.KeyUp, fyne.KeyLeft:
		l.pick(l.step - 1)
	case fyne.KeyDown, fyne.KeyRight:
		l.pick(l.step + 1)
	case fyne.KeyHome:
		l.pick(-1)
	case fyne.KeyEnd:
		l.pick(len(l.lines))
	default:
		l.stray(e)
	}
}

// TypedRune is not used.
func (l *rayList) TypedRune(rune) {}

// FocusGained shows the frame.
func (l *rayList) FocusGained() { l.focused = true; l.Refresh() }

// FocusLost hides the frame.
func (l *rayList) FocusLost() { l.focused = false; l.Refresh() }

// rayColumns are the headings of the list, and where each begins as a share of its width.
func rayColumns() []struct {
	heading words.Key
	at      float32
} {
	return []struct {
		heading words.Key
		at      float32
	}{{"", 0}, {"facet", 0.075}, {"angle", 0.3}, {"stays", 0.475}, {"leaves", 0.68}}
}

func rayLineHigh() float32 { return lineHeight() + 1 }

// CreateRenderer builds the headings; lines are built as they are needed.
func (l *rayList) CreateRenderer() fyne.WidgetRenderer {
	r := &rayListRenderer{l: l, mark: canvas.NewRectangle(color.Transparent), frame: canvas.NewRectangle(color.Transparent)}
	r.mark.CornerRadius = 3
	r.Refresh()
	return r
}

type rayListRenderer struct {
	l           *rayList
	mark, frame *canvas.Rectangle
	cells       [][]*canvas.Text
	swatches    []*canvas.Rectangle
	objects     []fyne.CanvasObject
}

func (r *rayListRenderer) Destroy()                     {}
func (r *rayListRenderer) Objects() []fyne.CanvasObject { return r.objects }

func (r *rayListRenderer) MinSize() fyne.Size {
	rows := 1 + len(r.l.lines)
	if r.l.more > 0 {
		rows++
	}
	return fyne.NewSize(180, float32(rows)*rayLineHigh()+2)
}

func (r *rayListRenderer) Layout(size fyne.Size) {
	high := rayLineHigh()
	r.frame.Resize(size)
	place(r.mark, 0, float32(r.l.step+2)*high, size.Width, high)
	for i, row := range r.cells {
		for j, t := range row {
			place(t, 4+rayColumns()[j].at*(size.Width-4), float32(i)*high, 10, high)
		}
	}
	for i, s := range r.swatches {
		place(s, 4+rayColumns()[4].at*(size.Width-4)-11, float32(i+1)*high+(high-8)/2, 8, 8)
	}
}

// rows returns what the list writes, the headings first.
func (r *rayListRenderer) rows() [][]string {
	var rows [][]string
	var head []string
	for _, c := range rayColumns() {
		head = append(head, r.l.words.Say(c.heading))
	}
	rows = append(rows, head)
	for _, line := range r.l.lines {
		leaves := line.Goes
		if line.Left != "" {
			leaves = line.Left + " " + line.Goes
		}
		rows = append(rows, []string{line.Number, line.Facet, line.Angle, line.Stayed, leaves})
	}
	if r.l.more > 0 {
		rows = append(rows, []string{"", r.l.words.Say("and more, each carrying less"), "", "", ""})
	}
	return rows
}

func (r *rayListRenderer) Refresh() {
	rows := r.rows()
	for len(r.cells) < len(rows) {
		row := make([]*canvas.Text, len(rayColumns()))
		for j := range row {
			row[j] = canvas.NewText("", color.Transparent)
		}
		r.cells = append(r.cells, row)
	}
	for len(r.swatches) < len(r.l.lines) {
		s := canvas.NewRectangle(color.Transparent)
		s.CornerRadius = 2
		r.swatches = append(r.swatches, s)
	}
	r.objects = []fyne.CanvasObject{r.mark}
	for i, row := range r.cells {
		for j, t := range row {
			t.Hidden = i >= len(rows)
			if t.Hidden {
				continue
			}
			t.Text, t.TextSize, t.Color = rows[i][j], theme.TextSize(), themed(theme.ColorNameForeground)
			if i == 0 || j == 0 {
				t.TextSize, t.Color = theme.CaptionTextSize(), themed(colourDim)
			}
			r.objects = append(r.objects, t)
		}
	}
	for i, s := range r.swatches {
		s.Hidden = i >= len(r.l.lines) || r.l.lines[i].Left == ""
		if !s.Hidden {
			s.FillColor = entryColour(r.l.lines[i].Entry)
			r.objects = append(r.objects, s)
		}
	}
	r.mark.FillColor = themed(theme.ColorNameSelection)
	r.mark.Hidden = len(r.l.lines) == 0 || r.l.step < -1
	r.frame.StrokeWidth, r.frame.StrokeColor = 0, color.Transparent
	if r.l.focused {
		r.frame.StrokeWidth, r.frame.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.objects = append(r.objects, r.frame)
	r.Layout(r.l.Size())
	canvas.Refresh(r.l)
}
