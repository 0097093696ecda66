package ui

import (
	"image"
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// pageView shows a page of paper as it is printed: as wide as the pane, to be read, or as
// a whole. It lies in a scroll and takes keys: page up and down turn the page, the arrows
// move it.
type pageView struct {
	widget.BaseWidget

	picture *canvas.Image
	shape   float64 // height over width
	whole   bool
	onWidth func(pixels int)          // the page takes so many across; may be nil
	turn    func(by int)              // to another page
	pick    func(x, y float64)        // a place of the picture, in shares from its top left; may be nil
	keys    func(*fyne.KeyEvent) bool // takes keys first; may be nil
	stray   func(*fyne.KeyEvent)
	scroll  *container.Scroll
	focused bool
}

var (
	_ fyne.Focusable    = (*pageView)(nil)
	_ desktop.Mouseable = (*pageView)(nil)
)

func newPageView(turn func(by int), stray func(*fyne.KeyEvent)) *pageView {
	p := &pageView{picture: &canvas.Image{}, shape: 297.0 / 210, turn: turn, stray: stray}
	p.picture.ScaleMode = canvas.ImageScaleFastest
	p.picture.FillMode = canvas.ImageFillStretch // the layout keeps its shape
	p.ExtendBaseWidget(p)
	p.scroll = container.NewVScroll(p)
	return p
}

// Measures of the page on the screen, units.
const (
	pageMargin = 14
	mostPage   = 880 // wider, lines are too long to read
)

// show puts another picture on the page, nil for an empty one.
func (p *pageView) show(img *image.RGBA, shape float64) {
	if img == nil {
		p.picture.Image = nil
	} else {
		p.picture.Image = img
	}
	if p.shape != shape {
		p.shape = shape
		p.scroll.Refresh()
	}
	p.Refresh()
}

func (p *pageView) setWhole(whole bool) {
	p.whole = whole
	p.scroll.ScrollToTop()
	p.scroll.Refresh()
	p.Refresh()
}

// across returns how wide the page is in a pane of this size.
func (p *pageView) across(size fyne.Size) float32 {
	wide := min(mostPage, size.Width-2*pageMargin)
	if p.whole {
		wide = min(wide, (size.Height-2*pageMargin)/float32(p.shape))
	}
	return max(20, wide)
}

// MouseDown takes the focus.
func (p *pageView) MouseDown(*desktop.MouseEvent) {
	if c := fyne.CurrentApp().Driver().CanvasForObject(p); c != nil {
		c.Focus(p)
	}
}

// MouseUp picks the place under the pointer.
func (p *pageView) MouseUp(e *desktop.MouseEvent) {
	if p.pick == nil {
		return
	}
	at, size := p.picture.Position(), p.picture.Size()
	x, y := float64((e.Position.X-at.X)/size.Width), float64((e.Position.Y-at.Y)/size.Height)
	if x >= 0 && y >= 0 && x <= 1 && y <= 1 {
		p.pick(x, y)
	}
}

// TypedKey turns and moves the page.
func (p *pageView) TypedKey(e *fyne.KeyEvent) {
	if p.keys != nil && p.keys(e) {
		return
	}
	const step = 60
	turn := p.turn
	if turn == nil {
		turn = func(int) {}
	}
	move := func(by float32) {
		most := max(0, p.Size().Height-p.scroll.Size().Height)
		p.scroll.ScrollToOffset(fyne.NewPos(0, min(most, max(0, p.scroll.Offset.Y+by))))
	}
	switch e.Name {
	case fyne.KeyPageDown, fyne.KeyRight:
		turn(1)
	case fyne.KeyPageUp, fyne.KeyLeft:
		turn(-1)
	case fyne.KeyHome:
		turn(-1 << 20)
	case fyne.KeyEnd:
		turn(1 << 20)
	case fyne.KeyDown:
		move(step)
	case fyne.KeyUp:
		move(-step)
	case fyne.KeySpace:
		move(p.scroll.Size().Height * 0.9)
	default:
		p.stray(e)
	}
}

// TypedRune is not used.
func (p *pageView) TypedRune(rune) {}

// FocusGained shows the frame.
func (p *pageView) FocusGained() { p.focused = true; p.Refresh() }

// FocusLost hides the frame.
func (p *pageView) FocusLost() { p.focused = false; p.Refresh() }

// CreateRenderer builds the page and its edge.
func (p *pageView) CreateRenderer() fyne.WidgetRenderer {
	r := &pageViewRenderer{p: p, edge: canvas.NewRectangle(color.Transparent), paper: canvas.NewRectangle(color.White)}
	r.objects = []fyne.CanvasObject{r.edge, r.paper, p.picture}
	r.Refresh()
	return r
}

type pageViewRenderer struct {
	p           *pageView
	edge, paper *canvas.Rectangle
	objects     []fyne.CanvasObject
}

func (r *pageViewRenderer) Destroy()                     {}
func (r *pageViewRenderer) Objects() []fyne.CanvasObject { return r.objects }

// MinSize is the height of the page at the width of the scroll.
func (r *pageViewRenderer) MinSize() fyne.Size {
	if r.p.whole {
		return fyne.NewSize(60, 60)
	}
	return fyne.NewSize(60, r.p.across(r.p.scroll.Size())*float32(r.p.shape)+2*pageMargin)
}

func (r *pageViewRenderer) Layout(size fyne.Size) {
	p := r.p
	wide := p.across(size)
	high := wide * float32(p.shape)
	x, y := (size.Width-wide)/2, max(pageMargin, (size.Height-high)/2)
	if !p.whole {
		y = pageMargin
	}
	const frame = 2
	place(r.edge, x-frame, y-frame, wide+2*frame, high+2*frame)
	place(r.paper, x, y, wide, high)
	place(p.picture, x, y, wide, high)
	if c := fyne.CurrentApp().Driver().CanvasForObject(p); c != nil && p.onWidth != nil && size.Width > 2*pageMargin {
		p.onWidth(int(wide*c.Scale() + 0.5))
	}
}

func (r *pageViewRenderer) Refresh() {
	r.edge.FillColor = themed(colourLine)
	if r.p.focused {
		r.edge.FillColor = themed(theme.ColorNameFocus)
	}
	empty := r.p.picture.Image == nil && r.p.pick != nil // a chart comes as a whole
	r.edge.Hidden, r.paper.Hidden = empty, empty
	r.Layout(r.p.Size())
	r.p.picture.Refresh()
	canvas.Refresh(r.p)
}
