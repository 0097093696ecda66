package ui

import (
	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/words"
)

// tipArea lies over something that has no tip of its own, and tells one.
type tipArea struct {
	widget.BaseWidget
	tip tip
}

var _ desktop.Hoverable = (*tipArea)(nil)

func newTipArea(t tip) *tipArea {
	a := &tipArea{tip: t}
	a.ExtendBaseWidget(a)
	return a
}

// laidOver returns an object with a tip laid over it, or the object itself where there are no
// words.
func (l *tipLayer) laidOver(o fyne.CanvasObject, words words.Key) fyne.CanvasObject {
	if words == "" {
		return o
	}
	return container.NewStack(o, newTipArea(tip{l, words}))
}

// MouseIn waits for the tip.
func (a *tipArea) MouseIn(*desktop.MouseEvent) { a.tip.enter(a) }

// MouseMoved is not used.
func (a *tipArea) MouseMoved(*desktop.MouseEvent) {}

// MouseOut takes the tip away.
func (a *tipArea) MouseOut() { a.tip.leave() }

// CreateRenderer draws nothing.
func (a *tipArea) CreateRenderer() fyne.WidgetRenderer {
	return widget.NewSimpleRenderer(canvas.NewRectangle(nil))
}
