package ui

import (
	"fmt"
	"image"
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
)

// tiltStops is how many small maps the strip shows.
const tiltStops = 9

// tiltStrip shows the stone as it rocks: small maps, and above them the mean of the
// same quantity as a curve for each surrounding. A click tilts the large maps.
type tiltStrip struct {
	widget.BaseWidget
	tip tip

	look    *model.Look
	choose  func(stop int)
	stray   func(*fyne.KeyEvent)
	strip   *model.Strip
	images  [tiltStops]*canvas.Image
	focused bool
}

var (
	_ fyne.Tappable  = (*tiltStrip)(nil)
	_ fyne.Focusable = (*tiltStrip)(nil)
)

func newTiltStrip(look *model.Look, choose func(stop int)) *tiltStrip {
	s := &tiltStrip{look: look, choose: choose}
	for i := range s.images {
		s.images[i] = &canvas.Image{ScaleMode: canvas.ImageScaleFastest, FillMode: canvas.ImageFillStretch}
	}
	s.ExtendBaseWidget(s)
	return s
}

// show paints the small maps anew, of the quantity that the first row shows.
func (s *tiltStrip) show() {
	s.strip = s.look.Strip
	for i := range s.images {
		var img image.Image
		if s.strip != nil && i < len(s.strip.Tilts) {
			if p := s.look.StripPicture(i); p != nil {
				img = p
			}
		}
		s.images[i].Image = img
		s.images[i].Refresh()
	}
	s.Refresh()
}

// Tapped tilts the maps to the stop under the pointer.
func (s *tiltStrip) Tapped(e *fyne.PointEvent) {
	if c := fyne.CurrentApp().Driver().CanvasForObject(s); c != nil {
		c.Focus(s)
	}
	pitch := (s.Size().Width - curveNames) / tiltStops
	if stop := int(e.Position.X / pitch); s.strip != nil && stop >= 0 && stop < tiltStops {
		s.choose(stop)
	}
}

// TypedKey goes from stop to stop.
func (s *tiltStrip) TypedKey(e *fyne.KeyEvent) {
	now, at := s.look.StripStop()
	if !at {
		now = tiltStops / 2
	}
	switch e.Name {
	case fyne.KeyLeft:
		now--
	case fyne.KeyRight:
		now++
	case fyne.KeyHome:
		now = 0
	case fyne.KeyEnd:
		now = tiltStops - 1
	default:
		s.stray(e)
		return
	}
	if s.strip != nil && now >= 0 && now < tiltStops {
		s.choose(now)
	}
}

// TypedRune is not used.
func (s *tiltStrip) TypedRune(rune) {}

// FocusGained shows the frame.
func (s *tiltStrip) FocusGained() { s.focused = true; s.Refresh() }

// FocusLost hides the frame.
func (s *tiltStrip) FocusLost() { s.focused = false; s.Refresh() }

// MouseIn waits for the tip.
func (s *tiltStrip) MouseIn(*desktop.MouseEvent) { s.tip.enter(s) }

// MouseMoved is not used.
func (s *tiltStrip) MouseMoved(*desktop.MouseEvent) {}

// MouseOut takes the tip away.
func (s *tiltStrip) MouseOut() { s.tip.leave() }

// CreateRenderer builds the small maps, their degrees and the curves.
func (s *tiltStrip) CreateRenderer() fyne.WidgetRenderer {
	r := &tiltStripRenderer{s: s, frame: canvas.NewRectangle(color.Transparent), now: canvas.NewRectangle(color.Transparent),
		top: canvas.NewRectangle(color.Transparent), bottom: canvas.NewRectangle(color.Transparent)}
	r.now.CornerRadius = 4
	r.objects = []fyne.CanvasObject{r.now, r.top, r.bottom}
	for i := range s.images {
		r.degrees[i] = canvas.NewText("", color.Transparent)
		r.degrees[i].Alignment = fyne.TextAlignCenter
		r.objects = append(r.objects, s.images[i], r.degrees[i])
	}
	for j := range columns {
		for i := range r.lines[j] {
			r.lines[j][i] = canvas.NewLine(color.Transparent)
			r.objects = append(r.objects, r.lines[j][i])
		}
		r.names[j] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.names[j])
	}
	r.objects = append(r.objects, r.frame)
	r.Refresh()
	return r
}

type tiltStripRenderer struct {
	s           *tiltStrip
	frame, now  *canvas.Rectangle
	top, bottom *canvas.Rectangle
	degrees     [tiltStops]*canvas.Text
	lines       [columns][tiltStops - 1]*canvas.Line
	names       [columns]*canvas.Text
	objects     []fyne.CanvasObject
}

// Measures of the strip.
const (
	curveHigh  = 44
	smallMap   = 46
	curveNames = 44 // right of the curves
)

func (r *tiltStripRenderer) Destroy()                     {}
func (r *tiltStripRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *tiltStripRenderer) MinSize() fyne.Size {
	return fyne.NewSize(tiltStops*smallMap+curveNames, curveHigh+smallMap+lineHeight()+8)
}

func (r *tiltStripRenderer) Layout(size fyne.Size) {
	s := r.s
	r.frame.Resize(size)
	width := size.Width - curveNames
	pitch := width / tiltStops
	place(r.top, 0, 0, width-pitch/2, 1)
	place(r.bottom, 0, curveHigh, width-pitch/2, 1)
	edge := min(smallMap, pitch-4)
	for i := range tiltStops {
		x := float32(i) * pitch
		place(s.images[i], x+(pitch-edge)/2, curveHigh+4, edge, edge)
		place(r.degrees[i], x, curveHigh+4+edge+1, pitch, lineHeight())
	}
	if stop, ok := s.look.StripStop(); ok {
		place(r.now, float32(stop)*pitch+1, 0, pitch-2, curveHigh+4+edge+2+lineHeight())
	}
	at := func(stop, column int) (fyne.Position, bool) {
		share, known := s.look.StripShare(stop, column)
		return fyne.NewPos((float32(stop)+0.5)*pitch, curveHigh*(1-float32(share))), known
	}
	var ends []float32
	for j := range columns {
		for i, l := range r.lines[j] {
			a, known := at(i, j)
			b, also := at(i+1, j)
			l.Hidden = !known || !also
			l.Position1, l.Position2 = a, b
		}
		end, known := at(tiltStops-1, j)
		r.names[j].Hidden = !known
		ends = append(ends, end.Y)
	}
	const apart = 12 // names over each other, which keep off the small maps
	for j, y := range spread(ends, apart, 2, curveHigh-4) {
		text := r.names[j].MinSize()
		place(r.names[j], width-pitch/2+8, y-text.Height/2, text.Width, text.Height)
	}
}

func (r *tiltStripRenderer) Refresh() {
	s := r.s
	_, at := s.look.StripStop()
	r.now.FillColor, r.now.Hidden = themed(theme.ColorNameSelection), !at || s.strip == nil
	r.top.FillColor, r.bottom.FillColor = themed(colourLine), themed(colourLine)
	for i, t := range r.degrees {
		t.TextSize, t.Color = theme.CaptionTextSize(), themed(colourDim)
		t.Text = ""
		if s.strip != nil && i < len(s.strip.Tilts) {
			t.Text = fmt.Sprintf("%.0f°", s.strip.Tilts[i].Degrees())
		}
	}
	for j := range columns {
		for _, l := range r.lines[j] {
			l.StrokeColor, l.StrokeWidth = themed(theme.ColorNameForeground), []float32{2.2, 1.5, 0.9}[j]
		}
		r.names[j].Text, r.names[j].TextSize = "", theme.CaptionTextSize()
		r.names[j].Color = themed(colourDim)
		if s.strip != nil && j < len(s.strip.Around) {
			r.names[j].Text = s.look.NameOf(s.strip.Around[j].Medium)
		}
	}
	r.frame.StrokeWidth, r.frame.StrokeColor = 0, color.Transparent
	if s.focused {
		r.frame.StrokeWidth, r.frame.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(s.Size())
	canvas.Refresh(s)
}
