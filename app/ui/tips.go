package ui

import (
	"image/color"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/words"
)

// tipDelay is how long the pointer rests on a control before its tip comes.
const tipDelay = 600 * time.Millisecond

// tipLayer lies over the window's content, lets the pointer through, and shows one tip
// at a time.
type tipLayer struct {
	box   *fyne.Container
	plate *canvas.Rectangle
	text  *wrapped
	do    func(func()) // hands work to the toolkit's goroutine
	words *words.Words
	delay time.Duration
	over  fyne.CanvasObject // the control that the pointer rests on; nil for none
	visit int               // counts the controls that it came to
	shown func()            // told when a tip came; may be nil
}

func newTipLayer(do func(func()), in *words.Words) *tipLayer {
	l := &tipLayer{do: do, words: in, delay: tipDelay, plate: canvas.NewRectangle(color.Transparent),
		text: newWrapped(theme.ColorNameForeground, theme.SizeNameCaptionText)}
	l.plate.CornerRadius, l.plate.StrokeWidth = 4, 1
	l.box = &fyne.Container{Objects: []fyne.CanvasObject{l.plate, l.text}} // placed by hand
	l.plate.Hide()
	l.text.Hide()
	return l
}

// scroll returns a scroller in which a tip goes when what it is about moves away from under
// the pointer: the toolkit tells of no such leaving.
func (l *tipLayer) scroll(content fyne.CanvasObject) *container.Scroll {
	s := container.NewVScroll(content)
	s.OnScrolled = func(fyne.Position) { l.leave() }
	return s
}

// enter says that the pointer came to a control.
func (l *tipLayer) enter(over fyne.CanvasObject, words string) {
	l.leave()
	if words == "" {
		return
	}
	l.over = over
	l.visit++
	visit := l.visit
	time.AfterFunc(l.delay, func() {
		l.do(func() {
			if l.visit == visit && l.over == over {
				l.show(over, words)
			}
		})
	})
}

// leave says that the pointer left, or pressed, the control.
func (l *tipLayer) leave() {
	l.over = nil
	if l.plate.Visible() {
		l.plate.Hide()
		l.text.Hide()
		l.box.Refresh()
	}
}

// tipWide is the most that a tip extends, and tipAir what lies around its words.
const (
	tipWide = 250
	tipAir  = 6
)

// show puts the words below the control, or above it where there is no room below.
func (l *tipLayer) show(over fyne.CanvasObject, words string) {
	driver := fyne.CurrentApp().Driver()
	if c := driver.CanvasForObject(over); c == nil || c.Overlays().Top() != nil {
		return // a menu or a question is open
	}
	l.text.setText(words)
	width := min(tipWide, fyne.MeasureText(words, theme.CaptionTextSize(), fyne.TextStyle{}).Width+2)
	size := fyne.NewSize(width, l.text.high(width)).AddWidthHeight(2*tipAir, 2*tipAir)
	// Within the layer.
	at := driver.AbsolutePositionForObject(over).Subtract(driver.AbsolutePositionForObject(l.box))
	at.Y += over.Size().Height + 4
	if at.Y+size.Height > l.box.Size().Height {
		at.Y -= over.Size().Height + 8 + size.Height
	}
	at.X = max(4, min(at.X, l.box.Size().Width-size.Width-4))
	l.plate.FillColor, l.plate.StrokeColor = themed(colourPane), themed(colourDim)
	place(l.plate, at.X, at.Y, size.Width, size.Height)
	place(l.text, at.X+tipAir, at.Y+tipAir, width, size.Height-2*tipAir)
	l.plate.Show()
	l.text.Show()
	l.box.Refresh() // what was hidden has no canvas yet that it could ask for a repaint
	if l.shown != nil {
		l.shown()
	}
}

// tip is what a control tells of itself when the pointer rests on it; the zero tip
// tells nothing.
type tip struct {
	layer *tipLayer
	words words.Key
}

func (t *tip) enter(over fyne.CanvasObject) {
	if t.layer != nil {
		t.layer.enter(over, t.layer.words.Say(t.words))
	}
}

func (t *tip) leave() {
	if t.layer != nil {
		t.layer.leave()
	}
}

// tipButton is a button that has a tip.
type tipButton struct {
	widget.Button
	tip tip
}

// button returns a button with a tip; icon may be nil.
func (l *tipLayer) button(label words.Key, icon fyne.Resource, words words.Key, tapped func()) *tipButton {
	b := &tipButton{tip: tip{l, words}}
	b.Text, b.Icon, b.OnTapped = l.words.Say(label), icon, tapped
	b.ExtendBaseWidget(b)
	return b
}

// MouseIn waits for the tip.
func (b *tipButton) MouseIn(e *desktop.MouseEvent) { b.Button.MouseIn(e); b.tip.enter(b) }

// MouseOut takes the tip away.
func (b *tipButton) MouseOut() { b.Button.MouseOut(); b.tip.leave() }

// Tapped takes the tip away and does what the button is for.
func (b *tipButton) Tapped(e *fyne.PointEvent) { b.tip.leave(); b.Button.Tapped(e) }
