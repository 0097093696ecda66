package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/words"
)

// room is one of the four verbs of the job.
type room int

const (
	lookRoom room = iota
	tuneRoom
	cutRoom
	tellRoom
	rooms
)

func (r room) name() words.Key { return [...]words.Key{"Look", "Tune", "Cut", "Tell"}[r] }

// roomButton leads to a room; the one that is open is underlined.
type roomButton struct {
	widget.BaseWidget
	text             string
	open             bool
	tapped           func()
	hovered, focused bool
	tip              tip
}

var (
	_ fyne.Tappable     = (*roomButton)(nil)
	_ fyne.Focusable    = (*roomButton)(nil)
	_ desktop.Hoverable = (*roomButton)(nil)
)

func newRoomButton(text string, tapped func()) *roomButton {
	b := &roomButton{text: text, tapped: tapped}
	b.ExtendBaseWidget(b)
	return b
}

func (b *roomButton) setOpen(open bool) {
	if b.open != open {
		b.open = open
		b.Refresh()
	}
}

// Tapped enters the room.
func (b *roomButton) Tapped(*fyne.PointEvent) { b.tip.leave(); b.tapped() }

// TypedKey enters the room.
func (b *roomButton) TypedKey(e *fyne.KeyEvent) {
	if e.Name == fyne.KeyReturn || e.Name == fyne.KeyEnter || e.Name == fyne.KeySpace {
		b.tapped()
	}
}

// TypedRune is not used.
func (b *roomButton) TypedRune(rune) {}

// FocusGained shows the ring.
func (b *roomButton) FocusGained() { b.focused = true; b.Refresh() }

// FocusLost hides the ring.
func (b *roomButton) FocusLost() { b.focused = false; b.Refresh() }

// MouseIn marks the button.
func (b *roomButton) MouseIn(*desktop.MouseEvent) { b.hovered = true; b.Refresh(); b.tip.enter(b) }

// MouseMoved is not used.
func (b *roomButton) MouseMoved(*desktop.MouseEvent) {}

// MouseOut unmarks the button.
func (b *roomButton) MouseOut() { b.hovered = false; b.Refresh(); b.tip.leave() }

// CreateRenderer builds the word, its ground and its line.
func (b *roomButton) CreateRenderer() fyne.WidgetRenderer {
	r := &roomButtonRenderer{b: b, ground: canvas.NewRectangle(color.Transparent),
		under: canvas.NewRectangle(color.Transparent), text: canvas.NewText(b.text, color.Transparent)}
	r.ground.CornerRadius = 5
	r.under.CornerRadius = 1.5
	r.objects = []fyne.CanvasObject{r.ground, r.text, r.under}
	r.Refresh()
	return r
}

type roomButtonRenderer struct {
	b             *roomButton
	ground, under *canvas.Rectangle
	text          *canvas.Text
	objects       []fyne.CanvasObject
}

func (r *roomButtonRenderer) Destroy()                     {}
func (r *roomButtonRenderer) Objects() []fyne.CanvasObject { return r.objects }

func (r *roomButtonRenderer) MinSize() fyne.Size {
	bold := fyne.MeasureText(r.b.text, theme.Size(theme.SizeNameSubHeadingText), fyne.TextStyle{Bold: true})
	return bold.AddWidthHeight(24, 12)
}

func (r *roomButtonRenderer) Layout(size fyne.Size) {
	r.ground.Resize(size)
	text := r.text.MinSize()
	place(r.text, (size.Width-text.Width)/2, (size.Height-text.Height)/2, text.Width, text.Height)
	place(r.under, 10, size.Height-3, size.Width-20, 3)
}

func (r *roomButtonRenderer) Refresh() {
	r.text.TextSize = theme.Size(theme.SizeNameSubHeadingText)
	r.text.TextStyle.Bold = r.b.open
	r.text.Color = themed(colourDim)
	r.under.FillColor, r.ground.FillColor, r.ground.StrokeWidth = color.Transparent, color.Transparent, 0
	if r.b.open {
		r.text.Color, r.under.FillColor = themed(theme.ColorNameForeground), themed(theme.ColorNamePrimary)
	}
	if r.b.hovered {
		r.ground.FillColor = themed(theme.ColorNameHover)
	}
	if r.b.focused {
		r.ground.StrokeWidth, r.ground.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(r.b.Size())
	canvas.Refresh(r.b)
}

// progressLine is a thin line that fills from the left.
type progressLine struct {
	widget.BaseWidget
	share float64
}

func newProgressLine() *progressLine {
	p := &progressLine{}
	p.ExtendBaseWidget(p)
	return p
}

func (p *progressLine) show(share float64) {
	if p.share != share {
		p.share = share
		p.Refresh()
	}
}

// CreateRenderer builds the two lines.
func (p *progressLine) CreateRenderer() fyne.WidgetRenderer {
	r := &progressLineRenderer{p: p, ground: canvas.NewRectangle(color.Transparent), part: canvas.NewRectangle(color.Transparent)}
	r.ground.CornerRadius, r.part.CornerRadius = 2, 2
	r.Refresh()
	return r
}

type progressLineRenderer struct {
	p            *progressLine
	ground, part *canvas.Rectangle
}

func (r *progressLineRenderer) Destroy() {}
func (r *progressLineRenderer) Objects() []fyne.CanvasObject {
	return []fyne.CanvasObject{r.ground, r.part}
}
func (r *progressLineRenderer) MinSize() fyne.Size { return fyne.NewSize(90, 4) }

func (r *progressLineRenderer) Layout(size fyne.Size) {
	y := (size.Height - 4) / 2
	place(r.ground, 0, y, size.Width, 4)
	place(r.part, 0, y, size.Width*float32(min(1, max(0, r.p.share))), 4)
}

func (r *progressLineRenderer) Refresh() {
	r.ground.FillColor, r.part.FillColor = themed(colourLine), themed(theme.ColorNamePrimary)
	r.Layout(r.p.Size())
	canvas.Refresh(r.p)
}
