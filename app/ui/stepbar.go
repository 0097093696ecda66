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

// stepBar shows the steps of a film side by side, each with the share of the rough that
// it takes off as a bar; a click or the arrow keys go to one.
type stepBar struct {
	widget.BaseWidget

	words   *words.Words
	names   []string  // the first one is the rough
	shares  []float64 // 0 to 1
	now     int
	goTo    func(step int)
	stray   func(*fyne.KeyEvent)
	focused bool
}

var (
	_ fyne.Focusable     = (*stepBar)(nil)
	_ fyne.Draggable     = (*stepBar)(nil)
	_ desktop.Mouseable  = (*stepBar)(nil)
	_ desktop.Cursorable = (*stepBar)(nil)
)

func newStepBar(in *words.Words, goTo func(int), stray func(*fyne.KeyEvent)) *stepBar {
	b := &stepBar{words: in, goTo: goTo, stray: stray}
	b.ExtendBaseWidget(b)
	return b
}

func (b *stepBar) show(names []string, shares []float64, now int) {
	b.names, b.shares, b.now = names, shares, now
	b.Refresh()
}

func (b *stepBar) at(x float32) {
	if n := len(b.names); n > 0 && b.Size().Width > 0 {
		b.goTo(min(n-1, max(0, int(x/b.Size().Width*float32(n)))))
	}
}

// MouseDown goes to the step under the pointer.
func (b *stepBar) MouseDown(e *desktop.MouseEvent) {
	if c := fyne.CurrentApp().Driver().CanvasForObject(b); c != nil {
		c.Focus(b)
	}
	b.at(e.Position.X)
}

// MouseUp is not used.
func (b *stepBar) MouseUp(*desktop.MouseEvent) {}

// Dragged runs through the steps.
func (b *stepBar) Dragged(e *fyne.DragEvent) { b.at(e.Position.X) }

// DragEnd is not used.
func (b *stepBar) DragEnd() {}

// Cursor tells that the steps can be picked.
func (b *stepBar) Cursor() desktop.Cursor { return desktop.PointerCursor }

// TypedKey goes from step to step.
func (b *stepBar) TypedKey(e *fyne.KeyEvent) {
	switch e.Name {
	case fyne.KeyLeft, fyne.KeyUp, fyne.KeyPageUp:
		b.goTo(b.now - 1)
	case fyne.KeyRight, fyne.KeyDown, fyne.KeyPageDown, fyne.KeySpace:
		b.goTo(b.now + 1)
	case fyne.KeyHome:
		b.goTo(0)
	case fyne.KeyEnd:
		b.goTo(len(b.names) - 1)
	default:
		b.stray(e)
	}
}

// TypedRune is not used.
func (b *stepBar) TypedRune(rune) {}

// FocusGained shows the frame.
func (b *stepBar) FocusGained() { b.focused = true; b.Refresh() }

// FocusLost hides the frame.
func (b *stepBar) FocusLost() { b.focused = false; b.Refresh() }

// CreateRenderer builds the frame; bars come with the steps.
func (b *stepBar) CreateRenderer() fyne.WidgetRenderer {
	r := &stepBarRenderer{b: b, frame: canvas.NewRectangle(color.Transparent), base: canvas.NewRectangle(color.Transparent),
		mark: canvas.NewRectangle(color.Transparent)}
	r.mark.CornerRadius = 4
	r.Refresh()
	return r
}

type stepBarRenderer struct {
	b                 *stepBar
	frame, base, mark *canvas.Rectangle
	bars              []*canvas.Rectangle
	words, parts      []*canvas.Text
	objects           []fyne.CanvasObject
}

func (r *stepBarRenderer) Destroy()                     {}
func (r *stepBarRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *stepBarRenderer) MinSize() fyne.Size           { return fyne.NewSize(120, 56+2*lineHeight()) }

func (r *stepBarRenderer) Layout(size fyne.Size) {
	b := r.b
	r.frame.Resize(size)
	n := len(b.names)
	if n == 0 {
		return
	}
	pitch := size.Width / float32(n)
	foot := lineHeight() + 4
	high := max(0, size.Height-foot-8-lineHeight())
	place(r.base, 0, size.Height-foot, size.Width, 1)
	place(r.mark, float32(b.now)*pitch, 2, pitch, size.Height-4)
	most := 0.01
	for _, v := range b.shares {
		most = max(most, v)
	}
	free := float32(0) // names that would run into each other are left out, but for the one in view
	for i, bar := range r.bars {
		tall := high * float32(b.shares[i]/most)
		if b.shares[i] > 0 {
			tall = max(tall, 1.5)
		}
		x := float32(i) * pitch
		place(bar, x+pitch*0.2, size.Height-foot-tall, pitch*0.6, tall)
		part := r.parts[i].MinSize()
		r.parts[i].Hidden = part.Width > pitch-2 && i != b.now || i == 0
		place(r.parts[i], x+(pitch-part.Width)/2, size.Height-foot-tall-part.Height-1, part.Width, part.Height)
		t := r.words[i]
		text := t.MinSize()
		left := min(max(0, x+(pitch-text.Width)/2), size.Width-text.Width)
		t.Hidden = left < free && i != b.now
		if !t.Hidden {
			free = left + text.Width + 4
		}
		if i == b.now && left < free-text.Width-4 && i > 0 { // it would lie on the one before
			r.words[i-1].Hidden = true
		}
		place(t, left, size.Height-foot+3, text.Width, text.Height)
	}
}

func (r *stepBarRenderer) Refresh() {
	b := r.b
	if len(r.bars) != len(b.names) {
		r.bars, r.words, r.parts = nil, nil, nil
		r.objects = []fyne.CanvasObject{r.mark, r.base}
		for range b.names {
			bar, word, part := canvas.NewRectangle(color.Transparent), canvas.NewText("", color.Transparent), canvas.NewText("", color.Transparent)
			r.bars, r.words, r.parts = append(r.bars, bar), append(r.words, word), append(r.parts, part)
			r.objects = append(r.objects, bar, word, part)
		}
		r.objects = append(r.objects, r.frame)
	}
	r.mark.FillColor, r.base.FillColor = themed(theme.ColorNameSelection), themed(colourLine)
	for i := range r.bars {
		r.bars[i].FillColor, r.words[i].Color = themed(colourDim), themed(colourDim)
		if i == b.now {
			r.bars[i].FillColor, r.words[i].Color = themed(theme.ColorNamePrimary), themed(theme.ColorNameForeground)
		}
		r.words[i].Text, r.words[i].TextSize = b.names[i], theme.CaptionTextSize()
		r.parts[i].Text, r.parts[i].TextSize, r.parts[i].Color = shareWords(b.words, b.shares[i]), theme.CaptionTextSize(), r.words[i].Color
	}
	r.frame.StrokeWidth, r.frame.StrokeColor = 0, color.Transparent
	if b.focused {
		r.frame.StrokeWidth, r.frame.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(b.Size())
	canvas.Refresh(b)
}

// shareWords writes a share of the rough, small ones too.
func shareWords(w *words.Words, share float64) string {
	switch {
	case share <= 0:
		return "0"
	case share < 0.001:
		return w.Say("<%.1f %%", 0.1)
	case share < 0.1:
		return w.Say("%.1f %%", 100*share)
	}
	return w.Say("%.0f %%", 100*share)
}
