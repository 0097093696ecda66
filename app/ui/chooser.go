package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// chooser is a heading that can be changed for another: a word with a small mark
// beside it, and a menu of the others.
type chooser struct {
	widget.BaseWidget
	tip tip

	text    string
	size    fyne.ThemeSizeName
	items   func() []*fyne.MenuItem
	opens   func() // in place of a menu; may be nil
	hovered bool
	focused bool
}

var (
	_ fyne.Tappable     = (*chooser)(nil)
	_ fyne.Focusable    = (*chooser)(nil)
	_ desktop.Hoverable = (*chooser)(nil)
)

func newChooser(size fyne.ThemeSizeName, items func() []*fyne.MenuItem) *chooser {
	c := &chooser{size: size, items: items}
	c.ExtendBaseWidget(c)
	return c
}

func (c *chooser) setText(text string) {
	if c.text != text {
		c.text = text
		c.Refresh()
	}
}

func (c *chooser) open() {
	c.tip.leave()
	if c.opens != nil {
		c.opens()
		return
	}
	on := fyne.CurrentApp().Driver().CanvasForObject(c)
	if on == nil {
		return
	}
	at := fyne.CurrentApp().Driver().AbsolutePositionForObject(c)
	widget.ShowPopUpMenuAtPosition(fyne.NewMenu("", c.items()...), on, at.AddXY(0, c.Size().Height))
}

// Tapped opens the menu.
func (c *chooser) Tapped(*fyne.PointEvent) { c.open() }

// TypedKey opens the menu.
func (c *chooser) TypedKey(e *fyne.KeyEvent) {
	switch e.Name {
	case fyne.KeyReturn, fyne.KeyEnter, fyne.KeySpace, fyne.KeyDown:
		c.open()
	}
}

// TypedRune is not used.
func (c *chooser) TypedRune(rune) {}

// FocusGained shows the ring.
func (c *chooser) FocusGained() { c.focused = true; c.Refresh() }

// FocusLost hides the ring.
func (c *chooser) FocusLost() { c.focused = false; c.Refresh() }

// MouseIn marks it.
func (c *chooser) MouseIn(*desktop.MouseEvent) { c.hovered = true; c.Refresh(); c.tip.enter(c) }

// MouseMoved is not used.
func (c *chooser) MouseMoved(*desktop.MouseEvent) {}

// MouseOut unmarks it.
func (c *chooser) MouseOut() { c.hovered = false; c.Refresh(); c.tip.leave() }

// CreateRenderer builds the word and the mark.
func (c *chooser) CreateRenderer() fyne.WidgetRenderer {
	r := &chooserRenderer{c: c, ground: canvas.NewRectangle(color.Transparent),
		text: canvas.NewText("", color.Transparent), mark: canvas.NewImageFromResource(theme.NewColoredResource(theme.MenuDropDownIcon(), colourDim))}
	r.ground.CornerRadius = 4
	r.text.TextStyle.Bold = true
	r.objects = []fyne.CanvasObject{r.ground, r.text, r.mark}
	r.Refresh()
	return r
}

type chooserRenderer struct {
	c       *chooser
	ground  *canvas.Rectangle
	text    *canvas.Text
	mark    *canvas.Image
	objects []fyne.CanvasObject
}

// chooserMark is the edge of the mark beside the word; a fifth of it is air on either side.
const chooserMark = 17

func (r *chooserRenderer) Destroy()                     {}
func (r *chooserRenderer) Objects() []fyne.CanvasObject { return r.objects }

func (r *chooserRenderer) MinSize() fyne.Size {
	return r.text.MinSize().AddWidthHeight(3+chooserMark, 2)
}

func (r *chooserRenderer) Layout(size fyne.Size) {
	word := r.text.MinSize()
	r.ground.Resize(size)
	r.text.Move(fyne.NewPos(3, (size.Height-word.Height)/2))
	r.text.Resize(word)
	r.mark.Move(fyne.NewPos(3+word.Width, (size.Height-chooserMark)/2))
	r.mark.Resize(fyne.NewSquareSize(chooserMark))
}

func (r *chooserRenderer) Refresh() {
	r.text.Text, r.text.TextSize = r.c.text, theme.Size(r.c.size)
	r.text.Color = themed(theme.ColorNameForeground)
	r.mark.Refresh()
	r.ground.FillColor = color.Transparent
	r.ground.StrokeWidth = 0
	if r.c.hovered {
		r.ground.FillColor = themed(theme.ColorNameHover)
	}
	if r.c.focused {
		r.ground.StrokeWidth, r.ground.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(r.c.Size())
	canvas.Refresh(r.c)
}
