package ui

import (
	"image/color"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"
)

// mapView shows one map in a square, with the cross-hair and the number under the
// pointer, wherever among the maps the pointer is.
type mapView struct {
	widget.BaseWidget

	picture *canvas.Image
	point   func(x, y float64) // shares of the picture from its top left
	away    func()
	follow  func(x, y float64) // the ray through a place
	enlarge func()             // to the whole pane, or back
	stray   func(*fyne.KeyEvent)
	pressed time.Time // when the last press came, for the double click

	cross   fyne.Position // shares; shown if crossed
	crossed bool
	value   string // shown in the corner while crossed; empty beside the stone
	pin     fyne.Position
	pinned  bool // a ray through pin is followed
	focused bool
}

var (
	_ desktop.Hoverable  = (*mapView)(nil)
	_ desktop.Cursorable = (*mapView)(nil)
	_ desktop.Mouseable  = (*mapView)(nil)
	_ fyne.Focusable     = (*mapView)(nil)
)

func newMapView(point func(x, y float64), away func(), follow func(x, y float64)) *mapView {
	m := &mapView{picture: &canvas.Image{}, point: point, away: away, follow: follow}
	m.picture.ScaleMode = canvas.ImageScaleFastest
	m.picture.FillMode = canvas.ImageFillStretch // the layout keeps it square
	m.ExtendBaseWidget(m)
	return m
}

// show moves the cross-hair, or takes it away.
func (m *mapView) show(crossed bool, x, y float64, value string) {
	cross := fyne.NewPos(float32(x), float32(y))
	if crossed == m.crossed && cross == m.cross && value == m.value {
		return
	}
	m.crossed, m.cross, m.value = crossed, cross, value
	m.Refresh()
}

// showPin marks where the followed ray enters, or takes the mark away.
func (m *mapView) showPin(pinned bool, x, y float64) {
	pin := fyne.NewPos(float32(x), float32(y))
	if pinned != m.pinned || pin != m.pin {
		m.pinned, m.pin = pinned, pin
		m.Refresh()
	}
}

// square returns where the picture lies within the widget.
func (m *mapView) square() (fyne.Position, float32) {
	size := m.Size()
	edge := min(size.Width, size.Height)
	return fyne.NewPos((size.Width-edge)/2, (size.Height-edge)/2), edge
}

// shares returns a place of the widget as shares of the picture, false beside it.
func (m *mapView) shares(at fyne.Position) (x, y float64, ok bool) {
	corner, edge := m.square()
	if edge <= 0 {
		return 0, 0, false
	}
	x, y = float64((at.X-corner.X)/edge), float64((at.Y-corner.Y)/edge)
	return x, y, x >= 0 && y >= 0 && x <= 1 && y <= 1
}

func (m *mapView) ask(at fyne.Position) {
	if x, y, ok := m.shares(at); ok {
		m.point(x, y)
	} else {
		m.away()
	}
}

// MouseIn asks the maps.
func (m *mapView) MouseIn(e *desktop.MouseEvent) { m.ask(e.Position) }

// MouseMoved asks the maps.
func (m *mapView) MouseMoved(e *desktop.MouseEvent) { m.ask(e.Position) }

// MouseOut ends asking.
func (m *mapView) MouseOut() { m.away() }

// MouseDown follows the ray under the pointer, and takes the focus, so that the arrow
// keys move the cross-hair. A double click enlarges the map.
func (m *mapView) MouseDown(e *desktop.MouseEvent) {
	if c := fyne.CurrentApp().Driver().CanvasForObject(m); c != nil {
		c.Focus(m)
	}
	if e.Button != desktop.MouseButtonPrimary {
		return
	}
	// The toolkit's double tap would hold every single click back; so it is told here.
	if now := time.Now(); now.Sub(m.pressed) < fyne.CurrentApp().Driver().DoubleTapDelay() {
		m.pressed = time.Time{}
		m.enlarge()
		return
	} else {
		m.pressed = now
	}
	if x, y, ok := m.shares(e.Position); ok {
		m.follow(x, y)
	}
}

// MouseUp is not used.
func (m *mapView) MouseUp(*desktop.MouseEvent) {}

// Cursor is a cross-hair.
func (m *mapView) Cursor() desktop.Cursor { return desktop.CrosshairCursor }

// TypedKey moves the cross-hair by a fiftieth of the map; Enter follows the ray
// there, plus and minus enlarge the map and back, Escape takes the cross-hair away.
func (m *mapView) TypedKey(e *fyne.KeyEvent) {
	const step = 0.02
	at := m.cross
	if !m.crossed {
		at = fyne.NewPos(0.5, 0.5)
	}
	switch e.Name {
	case fyne.KeyLeft:
		at.X -= step
	case fyne.KeyRight:
		at.X += step
	case fyne.KeyUp:
		at.Y -= step
	case fyne.KeyDown:
		at.Y += step
	case fyne.KeyReturn, fyne.KeyEnter, fyne.KeySpace:
		m.follow(float64(at.X), float64(at.Y))
	case fyne.KeyPlus, fyne.KeyEqual, fyne.KeyMinus:
		m.enlarge()
		return
	case fyne.KeyEscape:
		if m.crossed {
			m.away()
		} else {
			m.stray(e)
		}
		return
	default:
		return
	}
	m.point(float64(min(1, max(0, at.X))), float64(min(1, max(0, at.Y))))
}

// TypedRune is not used.
func (m *mapView) TypedRune(rune) {}

// FocusGained shows the frame.
func (m *mapView) FocusGained() { m.focused = true; m.Refresh() }

// FocusLost hides the frame.
func (m *mapView) FocusLost() { m.focused = false; m.Refresh() }

// CreateRenderer builds the picture, the cross-hair and the number.
func (m *mapView) CreateRenderer() fyne.WidgetRenderer {
	r := &mapViewRenderer{m: m, frame: canvas.NewRectangle(color.Transparent),
		plate: canvas.NewRectangle(color.Transparent), pin: canvas.NewCircle(color.Transparent),
		halo: canvas.NewCircle(color.Transparent), value: canvas.NewText("", color.Transparent)}
	for i := range r.hair {
		r.hair[i] = canvas.NewRectangle(color.Transparent)
	}
	r.plate.CornerRadius = 3
	r.value.TextStyle.Bold = true
	r.objects = []fyne.CanvasObject{m.picture, r.hair[0], r.hair[1], r.hair[2], r.hair[3], r.halo, r.pin, r.plate, r.value, r.frame}
	r.Refresh()
	return r
}

type mapViewRenderer struct {
	m            *mapView
	hair         [4]*canvas.Rectangle // dark and broad below, light and thin above
	frame, plate *canvas.Rectangle
	pin, halo    *canvas.Circle // light over dark
	value        *canvas.Text
	objects      []fyne.CanvasObject
}

func (r *mapViewRenderer) Destroy()                     {}
func (r *mapViewRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *mapViewRenderer) MinSize() fyne.Size           { return fyne.NewSquareSize(96) }

func (r *mapViewRenderer) Layout(fyne.Size) {
	corner, edge := r.m.square()
	r.m.picture.Move(corner)
	r.m.picture.Resize(fyne.NewSquareSize(edge))
	r.frame.Move(corner)
	r.frame.Resize(fyne.NewSquareSize(edge))
	x, y := corner.X+r.m.cross.X*edge, corner.Y+r.m.cross.Y*edge
	for i, broad := range []float32{3, 1} {
		across, down := r.hair[2*i], r.hair[2*i+1]
		across.Move(fyne.NewPos(corner.X, y-broad/2))
		across.Resize(fyne.NewSize(edge, broad))
		down.Move(fyne.NewPos(x-broad/2, corner.Y))
		down.Resize(fyne.NewSize(broad, edge))
	}
	px, py := corner.X+r.m.pin.X*edge, corner.Y+r.m.pin.Y*edge
	const pin = 5
	place(r.halo, px-pin-1, py-pin-1, 2*pin+2, 2*pin+2)
	place(r.pin, px-pin, py-pin, 2*pin, 2*pin)
	size := r.value.MinSize()
	// The number keeps to the upper left corner, and gives way to the pointer.
	at := corner.AddXY(3, 3)
	if r.m.cross.X < 0.35 && r.m.cross.Y < 0.25 {
		at = corner.AddXY(edge-size.Width-13, 3)
	}
	r.plate.Move(at)
	r.plate.Resize(size.AddWidthHeight(10, 2))
	r.value.Move(at.AddXY(5, 1))
	r.value.Resize(size)
}

func (r *mapViewRenderer) Refresh() {
	m := r.m
	for i, h := range r.hair {
		h.FillColor = color.NRGBA{0, 0, 0, 110}
		if i >= 2 {
			h.FillColor = color.NRGBA{255, 255, 255, 235}
		}
		h.Hidden = !m.crossed
	}
	r.halo.StrokeColor, r.halo.StrokeWidth = color.NRGBA{0, 0, 0, 200}, 4
	r.pin.StrokeColor, r.pin.StrokeWidth = color.White, 2
	r.pin.Hidden, r.halo.Hidden = !m.pinned, !m.pinned
	r.value.Text, r.value.TextSize = m.value, theme.TextSize()
	r.value.Color, r.plate.FillColor = themed(theme.ColorNameForeground), themed(colourPane)
	r.value.Hidden = !m.crossed || m.value == ""
	r.plate.Hidden = r.value.Hidden
	r.frame.StrokeWidth, r.frame.StrokeColor = 0, color.Transparent
	if m.focused {
		r.frame.StrokeWidth, r.frame.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(m.Size())
	canvas.Refresh(m)
}
