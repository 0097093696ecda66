package ui

import (
	"image/color"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// wrapped is a short text broken into lines that fit the width it is given. It asks
// for no room of its own.
type wrapped struct {
	widget.BaseWidget
	text   string
	colour fyne.ThemeColorName
	size   fyne.ThemeSizeName
}

func newWrapped(colour fyne.ThemeColorName, size fyne.ThemeSizeName) *wrapped {
	w := &wrapped{colour: colour, size: size}
	w.ExtendBaseWidget(w)
	return w
}

func (w *wrapped) setText(text string) {
	if w.text != text {
		w.text = text
		w.Refresh()
	}
}

// high returns how tall the text is when it is broken at a width.
func (w *wrapped) high(width float32) float32 {
	size := theme.Size(w.size)
	lines := breakLines(w.text, func(s string) bool {
		return fyne.MeasureText(s, size, fyne.TextStyle{}).Width <= width
	})
	return float32(max(1, min(mostLines, len(lines)))) * fyne.MeasureText("M", size, fyne.TextStyle{}).Height
}

// CreateRenderer builds a stock of lines.
func (w *wrapped) CreateRenderer() fyne.WidgetRenderer {
	r := &wrappedRenderer{w: w}
	for i := range r.lines {
		r.lines[i] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.lines[i])
	}
	r.Refresh()
	return r
}

// mostLines is how many lines a wrapped text has; the rest is cut off.
const mostLines = 6

type wrappedRenderer struct {
	w       *wrapped
	lines   [mostLines]*canvas.Text
	objects []fyne.CanvasObject
}

func (r *wrappedRenderer) Destroy()                     {}
func (r *wrappedRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *wrappedRenderer) MinSize() fyne.Size           { return fyne.NewSize(20, 10) }

func (r *wrappedRenderer) Layout(size fyne.Size) {
	textSize := theme.Size(r.w.size)
	broken := breakLines(r.w.text, func(s string) bool {
		return fyne.MeasureText(s, textSize, fyne.TextStyle{}).Width <= size.Width
	})
	high := fyne.MeasureText("M", textSize, fyne.TextStyle{}).Height
	for i, t := range r.lines {
		t.Hidden = i >= len(broken) || float32(i+1)*high > size.Height+1
		if t.Hidden {
			continue
		}
		if t.Text != broken[i] {
			t.Text = broken[i]
			t.Refresh()
		}
		t.Move(fyne.NewPos(0, float32(i)*high))
		t.Resize(fyne.NewSize(size.Width, high))
	}
}

func (r *wrappedRenderer) Refresh() {
	for _, t := range r.lines {
		t.Color, t.TextSize = themed(r.w.colour), theme.Size(r.w.size)
	}
	r.Layout(r.w.Size())
	canvas.Refresh(r.w)
}

// breakLines breaks a text between words into lines that fit; a word that fits on
// no line stands alone.
func breakLines(text string, fits func(string) bool) []string {
	var lines []string
	current := ""
	for _, word := range strings.Fields(text) {
		longer := word
		if current != "" {
			longer = current + " " + word
		}
		if current == "" || fits(longer) {
			current = longer
			continue
		}
		lines = append(lines, current)
		current = word
	}
	if current != "" {
		lines = append(lines, current)
	}
	return lines
}
