package ui

import (
	"image/color"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// line is one line of text that is cut with an ellipsis where it has no room. It
// costs one text object and asks for no width of its own.
type line struct {
	widget.BaseWidget

	text    string
	colour  fyne.ThemeColorName
	size    fyne.ThemeSizeName
	style   fyne.TextStyle
	align   fyne.TextAlign
	natural bool    // asks for the room that its text takes
	most    float32 // but no wider than this; 0 for any width
}

func newLine(colour fyne.ThemeColorName, size fyne.ThemeSizeName) *line {
	l := &line{colour: colour, size: size}
	l.ExtendBaseWidget(l)
	return l
}

func newWord(colour fyne.ThemeColorName, size fyne.ThemeSizeName, text string) *line {
	l := &line{colour: colour, size: size, text: text, natural: true}
	l.ExtendBaseWidget(l)
	return l
}

func (l *line) bold() *line                    { l.style.Bold = true; return l }
func (l *line) monospaced() *line              { l.style.Monospace = true; return l }
func (l *line) with(text string) *line         { l.text = text; return l }
func (l *line) aligned(a fyne.TextAlign) *line { l.align = a; return l }

// setText shows another text; it does nothing if the text stays.
func (l *line) setText(text string) {
	if text != l.text {
		l.text = text
		l.Refresh()
	}
}

func (l *line) setColour(name fyne.ThemeColorName) {
	if name != l.colour {
		l.colour = name
		l.Refresh()
	}
}

// CreateRenderer builds the one text object.
func (l *line) CreateRenderer() fyne.WidgetRenderer {
	r := &lineRenderer{l: l, text: canvas.NewText("", color.Transparent)}
	r.Refresh()
	return r
}

type lineRenderer struct {
	l    *line
	text *canvas.Text
}

func (r *lineRenderer) Destroy()                     {}
func (r *lineRenderer) Objects() []fyne.CanvasObject { return []fyne.CanvasObject{r.text} }

func (r *lineRenderer) MinSize() fyne.Size {
	size := fyne.MeasureText(r.l.text, theme.Size(r.l.size), r.l.style)
	switch {
	case !r.l.natural:
		size.Width = 8
	case r.l.most > 0:
		size.Width = min(size.Width, r.l.most)
	}
	if r.l.text == "" {
		size.Height = fyne.MeasureText("M", theme.Size(r.l.size), r.l.style).Height
	}
	return size
}

func (r *lineRenderer) Layout(size fyne.Size) {
	text := cutToWidth(r.l.text, size.Width, theme.Size(r.l.size), r.l.style)
	if r.text.Text != text {
		r.text.Text = text
		r.text.Refresh()
	}
	height := r.text.MinSize().Height
	r.text.Move(fyne.NewPos(0, (size.Height-height)/2))
	r.text.Resize(fyne.NewSize(size.Width, height))
}

func (r *lineRenderer) Refresh() {
	r.text.Color = themed(r.l.colour)
	r.text.TextSize = theme.Size(r.l.size)
	r.text.TextStyle = r.l.style
	r.text.Alignment = r.l.align
	r.Layout(r.l.Size())
	r.text.Refresh()
}

// cutToWidth returns the text, or as much of it as fits, with an ellipsis.
func cutToWidth(text string, width, size float32, style fyne.TextStyle) string {
	const rounding = 0.5 // of measured text, in units
	if width <= 0 || fyne.MeasureText(text, size, style).Width <= width+rounding {
		return text
	}
	runes := []rune(text)
	low, high := 0, len(runes) // the longest start that fits has at least low runes
	for low < high {
		middle := (low + high + 1) / 2
		if fyne.MeasureText(string(runes[:middle])+"…", size, style).Width <= width {
			low = middle
		} else {
			high = middle - 1
		}
	}
	return strings.TrimRight(string(runes[:low]), " ,") + "…"
}
