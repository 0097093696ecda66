package ui

import (
	"image/color"
	"math"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// tick is a mark above a slider: a letter and where it stands.
type tick struct {
	letter string
	at     float64
}

// tickSlider sets a number between two ends. Ticks above the track show limits
// that the hand is moving toward. While it is dragged it previews; when it is let
// go, or stepped by a key, it settles.
type tickSlider struct {
	tip tip
	widget.DisableableWidget

	low, high, value float64
	step             float64
	ticks            []tick

	preview func(float64)
	settled func()
	gained  func()
	stray   func(*fyne.KeyEvent) // takes keys that the slider has no use for; may be nil

	dragging, hovered, focused bool
}

var (
	_ fyne.Draggable     = (*tickSlider)(nil)
	_ fyne.Focusable     = (*tickSlider)(nil)
	_ fyne.Scrollable    = (*tickSlider)(nil)
	_ desktop.Mouseable  = (*tickSlider)(nil)
	_ desktop.Hoverable  = (*tickSlider)(nil)
	_ desktop.Cursorable = (*tickSlider)(nil)
)

// mostTicks is how many ticks a slider draws.
const mostTicks = 3

func newTickSlider(step float64) *tickSlider {
	s := &tickSlider{high: 1, step: step}
	s.ExtendBaseWidget(s)
	return s
}

// show moves the thumb without telling anybody.
func (s *tickSlider) show(low, high, value float64, ticks []tick) {
	s.low, s.high, s.value, s.ticks = low, high, value, ticks
	s.Refresh()
}

const (
	thumbRadius  = 6.5
	sliderHeight = 27
	trackAt      = 18 // down from the top, to the middle of the track
)

// place returns where a number stands across the widget.
func (s *tickSlider) place(v float64, width float32) float32 {
	if !(s.high > s.low) {
		return thumbRadius
	}
	share := min(1, max(0, (v-s.low)/(s.high-s.low)))
	return thumbRadius + float32(share)*(width-2*thumbRadius)
}

// number is the inverse of place, on whole steps.
func (s *tickSlider) number(x float32) float64 {
	width := s.Size().Width - 2*thumbRadius
	if width <= 0 {
		return s.value
	}
	share := min(1, max(0, float64((x-thumbRadius)/width)))
	return min(s.high, max(s.low, onStep(s.low+share*(s.high-s.low), s.step)))
}

// onStep rounds to whole steps and off the dust of binary fractions.
func onStep(v, step float64) float64 {
	v = math.Round(v/step) * step
	const decimals = 1e9
	return math.Round(v*decimals) / decimals
}

func (s *tickSlider) set(v float64) {
	v = min(s.high, max(s.low, v))
	if v == s.value || s.Disabled() {
		return
	}
	s.value = v
	s.Refresh()
	if s.preview != nil {
		s.preview(v)
	}
}

func (s *tickSlider) settle() {
	if s.settled != nil && !s.Disabled() {
		s.settled()
	}
}

// MouseDown takes the focus and jumps to the pointer.
func (s *tickSlider) MouseDown(e *desktop.MouseEvent) {
	s.tip.leave()
	if e.Button != desktop.MouseButtonPrimary || s.Disabled() {
		return
	}
	if c := fyne.CurrentApp().Driver().CanvasForObject(s); c != nil {
		c.Focus(s)
	}
	// Taking hold of the thumb does not move it.
	if math.Abs(float64(e.Position.X-s.place(s.value, s.Size().Width))) > thumbRadius {
		s.set(s.number(e.Position.X))
	}
}

// MouseUp settles a click; a drag settles when it ends.
func (s *tickSlider) MouseUp(*desktop.MouseEvent) {
	if !s.dragging {
		s.settle()
	}
}

// Dragged follows the pointer.
func (s *tickSlider) Dragged(e *fyne.DragEvent) {
	s.tip.leave()
	s.dragging = true
	s.set(s.number(e.Position.X))
}

// DragEnd settles.
func (s *tickSlider) DragEnd() {
	s.dragging = false
	s.settle()
}

// Scrolled steps while the slider has the focus.
func (s *tickSlider) Scrolled(e *fyne.ScrollEvent) {
	if !s.focused || e.Scrolled.DY == 0 {
		return
	}
	s.set(onStep(s.value+math.Copysign(s.step, float64(e.Scrolled.DY)), s.step))
	s.settle()
}

// TypedKey steps: arrows by one, page keys by ten, Home and End to the ends.
func (s *tickSlider) TypedKey(e *fyne.KeyEvent) {
	switch e.Name {
	case fyne.KeyLeft, fyne.KeyDown:
		s.set(onStep(s.value-s.step, s.step))
	case fyne.KeyRight, fyne.KeyUp:
		s.set(onStep(s.value+s.step, s.step))
	case fyne.KeyPageDown:
		s.set(onStep(s.value-10*s.step, s.step))
	case fyne.KeyPageUp:
		s.set(onStep(s.value+10*s.step, s.step))
	case fyne.KeyHome:
		s.set(s.low)
	case fyne.KeyEnd:
		s.set(s.high)
	default:
		if s.stray != nil {
			s.stray(e)
		}
		return
	}
	s.settle()
}

// TypedRune is not used.
func (s *tickSlider) TypedRune(rune) {}

// FocusGained shows the ring.
func (s *tickSlider) FocusGained() {
	s.focused = true
	s.Refresh()
	if s.gained != nil {
		s.gained()
	}
}

// FocusLost hides the ring.
func (s *tickSlider) FocusLost() {
	s.focused = false
	s.Refresh()
}

// MouseIn marks the thumb.
func (s *tickSlider) MouseIn(*desktop.MouseEvent) { s.hovered = true; s.Refresh(); s.tip.enter(s) }

// MouseMoved is not used.
func (s *tickSlider) MouseMoved(*desktop.MouseEvent) {}

// MouseOut unmarks the thumb.
func (s *tickSlider) MouseOut() { s.hovered = false; s.Refresh(); s.tip.leave() }

// Cursor tells that the thumb moves sideways.
func (s *tickSlider) Cursor() desktop.Cursor { return desktop.HResizeCursor }

// CreateRenderer builds the track, the filled part, the ticks and the thumb.
func (s *tickSlider) CreateRenderer() fyne.WidgetRenderer {
	r := &tickSliderRenderer{
		s:     s,
		track: canvas.NewRectangle(color.Transparent),
		part:  canvas.NewRectangle(color.Transparent),
		ring:  canvas.NewCircle(color.Transparent),
		thumb: canvas.NewCircle(color.Transparent),
	}
	r.objects = []fyne.CanvasObject{r.track, r.part}
	for i := range mostTicks {
		r.marks[i] = canvas.NewRectangle(color.Transparent)
		r.letters[i] = canvas.NewText("", color.Transparent)
		r.letters[i].Alignment = fyne.TextAlignCenter
		r.objects = append(r.objects, r.marks[i], r.letters[i])
	}
	r.objects = append(r.objects, r.ring, r.thumb)
	r.Refresh()
	return r
}

type tickSliderRenderer struct {
	s           *tickSlider
	track, part *canvas.Rectangle
	ring, thumb *canvas.Circle
	marks       [mostTicks]*canvas.Rectangle
	letters     [mostTicks]*canvas.Text
	objects     []fyne.CanvasObject
}

func (r *tickSliderRenderer) Destroy()                     {}
func (r *tickSliderRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *tickSliderRenderer) MinSize() fyne.Size           { return fyne.NewSize(90, sliderHeight) }

func (r *tickSliderRenderer) Layout(size fyne.Size) {
	s := r.s
	at := s.place(s.value, size.Width)
	r.track.Move(fyne.NewPos(thumbRadius, trackAt-1.5))
	r.track.Resize(fyne.NewSize(max(0, size.Width-2*thumbRadius), 3))
	r.part.Move(fyne.NewPos(thumbRadius, trackAt-1.5))
	r.part.Resize(fyne.NewSize(max(0, at-thumbRadius), 3))
	r.thumb.Move(fyne.NewPos(at-thumbRadius, trackAt-thumbRadius))
	r.thumb.Resize(fyne.NewSquareSize(2 * thumbRadius))
	const ring = thumbRadius + 3
	r.ring.Move(fyne.NewPos(at-ring, trackAt-ring))
	r.ring.Resize(fyne.NewSquareSize(2 * ring))
	for i := range mostTicks {
		shown := i < len(s.ticks) && s.ticks[i].at >= s.low && s.ticks[i].at <= s.high
		if !shown {
			r.marks[i].Hide()
			r.letters[i].Hide()
			continue
		}
		x := s.place(s.ticks[i].at, size.Width)
		r.marks[i].Move(fyne.NewPos(x-0.75, trackAt-7))
		r.marks[i].Resize(fyne.NewSize(1.5, 14))
		r.letters[i].Move(fyne.NewPos(x-8, -3))
		r.letters[i].Resize(fyne.NewSize(16, 13))
		r.marks[i].Show()
		r.letters[i].Show()
	}
}

func (r *tickSliderRenderer) Refresh() {
	s := r.s
	r.track.FillColor, r.track.CornerRadius = themed(theme.ColorNameInputBorder), 1.5
	r.part.FillColor, r.part.CornerRadius = themed(theme.ColorNamePrimary), 1.5
	r.thumb.FillColor = themed(theme.ColorNamePrimary)
	r.thumb.StrokeColor, r.thumb.StrokeWidth = themed(colourPane), 1.5
	if s.hovered || s.dragging {
		r.thumb.FillColor = themed(theme.ColorNameForeground)
	}
	if s.Disabled() {
		r.part.FillColor, r.thumb.FillColor = themed(theme.ColorNameDisabled), themed(theme.ColorNameDisabled)
	}
	r.ring.FillColor = color.Transparent
	if s.focused {
		r.ring.FillColor = themed(theme.ColorNameFocus)
	}
	for i := range mostTicks {
		r.marks[i].FillColor = themed(colourDim)
		r.letters[i].Color = themed(colourDim)
		r.letters[i].TextSize = 10
		if i < len(s.ticks) {
			r.letters[i].Text = s.ticks[i].letter
		}
		r.letters[i].Refresh()
	}
	r.Layout(s.Size())
	canvas.Refresh(s)
}
