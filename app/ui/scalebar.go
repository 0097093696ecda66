package ui

import (
	"image"
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/picture"
	"pavilight/app/words"
)

// scaleBar is the scale of a row of maps, from 0 below to 1 or another number above,
// with a pointer at each number under the cross-hair. It is empty where colours stand
// for themselves.
type scaleBar struct {
	widget.BaseWidget
	words *words.Words
	scale model.Scale
	name  string // of the colour map shown; empty for none
	strip *canvas.Image
	marks []float64
}

func newScaleBar(in *words.Words) *scaleBar {
	s := &scaleBar{words: in, strip: &canvas.Image{}}
	s.strip.ScaleMode = canvas.ImageScaleFastest
	s.ExtendBaseWidget(s)
	return s
}

func (s *scaleBar) show(scale model.Scale) {
	name := ""
	if scale.Colours != nil {
		name = scale.Colours.Name
	}
	if name == s.name && scale.Most == s.scale.Most {
		return
	}
	s.name, s.scale = name, scale
	s.strip.Image = nil
	if m := scale.Colours; m != nil {
		s.strip.Image = stripOf(m)
	}
	s.strip.Hidden = s.name == ""
	s.strip.Refresh()
	s.Refresh()
}

// numbers are what stands beside the strip, the top first.
func (s *scaleBar) numbers() [3]string {
	if s.scale.Colours == nil {
		return [3]string{}
	}
	write := func(v float64) string { return s.words.Say("%.3g", v) }
	return [3]string{write(s.scale.Most), write(s.scale.Most / 2), "0"}
}

// stripOf paints a colour map as a strip, 1 on top.
func stripOf(m *picture.ColourMap) image.Image {
	img := image.NewRGBA(image.Rect(0, 0, 1, len(m.Table)))
	for i, c := range m.Table {
		img.SetRGBA(0, len(m.Table)-1-i, c)
	}
	return img
}

func (s *scaleBar) mark(values []float64) {
	if len(values) == 0 && len(s.marks) == 0 {
		return
	}
	s.marks = values
	s.Refresh()
}

// CreateRenderer builds the strip, its three numbers and the pointers.
func (s *scaleBar) CreateRenderer() fyne.WidgetRenderer {
	r := &scaleBarRenderer{s: s}
	r.objects = []fyne.CanvasObject{s.strip}
	for i := range r.numbers {
		r.numbers[i] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.numbers[i])
	}
	for i := range r.marks {
		r.marks[i] = canvas.NewRectangle(color.Transparent)
		r.objects = append(r.objects, r.marks[i])
	}
	r.Refresh()
	return r
}

type scaleBarRenderer struct {
	s       *scaleBar
	numbers [3]*canvas.Text
	marks   [columns]*canvas.Rectangle
	objects []fyne.CanvasObject
}

func (r *scaleBarRenderer) Destroy()                     {}
func (r *scaleBarRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *scaleBarRenderer) MinSize() fyne.Size           { return fyne.NewSize(scaleWide, 60) }

func (r *scaleBarRenderer) Layout(size fyne.Size) {
	const strip, air = 12, 6
	high := max(0, size.Height-2*air)
	r.s.strip.Move(fyne.NewPos(0, air))
	r.s.strip.Resize(fyne.NewSize(strip, high))
	for i, t := range r.numbers {
		text := t.MinSize()
		t.Move(fyne.NewPos(strip+6, air+high*float32(i)/2-text.Height/2))
		t.Resize(text)
	}
	for i, m := range r.marks {
		m.Hidden = i >= len(r.s.marks) || r.s.scale.Colours == nil
		if !m.Hidden {
			m.Move(fyne.NewPos(-3, air+high*float32(1-min(1, max(0, r.s.marks[i])))-1))
			m.Resize(fyne.NewSize(strip+6, 2))
		}
	}
}

func (r *scaleBarRenderer) Refresh() {
	for i, t := range r.numbers {
		t.Text = r.s.numbers()[i]
		t.Color, t.TextSize = themed(colourDim), theme.CaptionTextSize()
	}
	for _, m := range r.marks {
		m.FillColor = themed(theme.ColorNameForeground)
	}
	r.Layout(r.s.Size())
	canvas.Refresh(r.s)
}
