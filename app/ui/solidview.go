package ui

import (
	"image"
	"image/color"
	"math"
	"strconv"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/solid"
	"pavilight/facets"
	"pavilight/trace"
)

// solidView shows the stone as a solid that turns under the pointer, with the
// names of its tiers. A click on a facet selects its tier.
type solidView struct {
	widget.BaseWidget

	stone    *facets.Stone
	whole    *facets.Stone // sets place and scale; nil for the stone itself
	pose     solid.Pose
	selected string
	pick     func(tier string)
	stray    func(*fyne.KeyEvent)

	ray *model.Ray // drawn through the stone; nil for none

	picture *canvas.Image
	drawing *solid.Drawing
	labels  []solid.Label
	scale   float32 // device pixels a unit
	dragged bool
	focused bool
}

var (
	_ fyne.Draggable     = (*solidView)(nil)
	_ fyne.Focusable     = (*solidView)(nil)
	_ desktop.Mouseable  = (*solidView)(nil)
	_ desktop.Cursorable = (*solidView)(nil)
)

// mostLabels is how many tiers are named on the solid.
const mostLabels = 24

func newSolidView(pick func(tier string), stray func(*fyne.KeyEvent)) *solidView {
	s := &solidView{pose: restingPose(), picture: &canvas.Image{}, pick: pick, stray: stray}
	s.picture.ScaleMode = canvas.ImageScaleFastest
	s.picture.FillMode = canvas.ImageFillStretch
	s.ExtendBaseWidget(s)
	return s
}

// restingPose looks from above the girdle, so that crown and outline are read at once.
func restingPose() solid.Pose { return solid.FaceUp().Turned(0, 38*facets.Degree) }

func (s *solidView) show(stone *facets.Stone) {
	s.stone = stone
	s.redraw()
}

func (s *solidView) turnTo(p solid.Pose) {
	s.pose = p
	s.redraw()
}

func (s *solidView) selectTier(tier string) {
	if s.selected != tier {
		s.selected = tier
		s.redraw()
	}
}

// redraw paints the solid at the resolution of the screen. The toolkit reads the
// picture on this same goroutine, so one buffer will do.
func (s *solidView) redraw() {
	s.scale = 1
	if c := fyne.CurrentApp().Driver().CanvasForObject(s); c != nil {
		s.scale = c.Scale()
	}
	const most = 2048 // pixels; beyond, the screen's scaling has to do
	width := min(most, int(s.Size().Width*s.scale))
	height := min(most, int(s.Size().Height*s.scale))
	if s.stone == nil || width < 8 || height < 8 {
		s.Refresh()
		return
	}
	dst, ok := s.picture.Image.(*image.RGBA)
	if !ok || dst.Rect.Dx() != width || dst.Rect.Dy() != height {
		dst = image.NewRGBA(image.Rect(0, 0, width, height))
		s.picture.Image = dst
	}
	style := solid.Style{
		Width:    float64(1.25 * s.scale),
		Selected: s.selected,
		Colours: solid.Colours{
			Ground:   themedRGBA(colourPane),
			Body:     themedRGBA(colourBody),
			Shade:    themedRGBA(colourDusk),
			Edge:     themedRGBA(colourEdge),
			Selected: themedRGBA(theme.ColorNamePrimary),
		},
	}
	if s.ray != nil && s.ray.Path != nil && s.ray.Stone == s.stone {
		s.drawing = solid.Project(s.stone, s.pose, width, height, withRay)
		style.Glass, style.Colours.Hidden = 0.72, themedRGBA(colourBack)
		style.Colours.Edge = themedRGBA(colourDim)
		style.Rays = s.rays()
		s.drawing.Paint(dst, style)
		s.labels = s.bounceLabels()
	} else {
		whole := s.whole
		if whole == nil {
			whole = s.stone
		}
		s.drawing = solid.ProjectWithin(s.stone, whole, s.pose, width, height, alone)
		s.drawing.Paint(dst, style)
		const least, wide, high = 150, 26, 15 // square units of a facet that takes a name; of the name
		unit := float64(s.scale)
		s.labels = s.drawing.Labels(least*unit*unit, wide*unit, high*unit, s.selected)
	}
	s.Refresh()
}

// How much of the picture the stone takes by itself, and with light around it.
const (
	alone   = 0.88
	withRay = 0.72
)

// rays returns the followed ray as lines, each over a darker or lighter one so that
// it stands out from the stone.
func (s *solidView) rays() []solid.Ray {
	var casings, lines []solid.Ray
	reach := 0.7 * solid.Radius(s.stone)
	if s.ray.Beside != nil { // in broken lines
		for _, p := range s.ray.Beside.Stretches(reach) {
			c := themedRGBA(theme.ColorNameForeground)
			if !p.Inside && p.Goes != trace.Unresolved {
				c = color.RGBAModel.Convert(entryColour(p.Goes)).(color.RGBA)
			}
			lines = append(lines, broken(solid.Ray{From: p.From, To: p.To, Colour: c, Width: float64(s.scale) * (1 + p.Share)}, reach/14)...)
		}
	}
	for _, p := range s.ray.Stretches(reach) {
		width := float64(s.scale) * (1 + 1.8*p.Share)
		c := themedRGBA(theme.ColorNameForeground)
		if !p.Inside && p.Bounce >= 0 || p.Goes == trace.Surface && !p.Inside {
			c = color.RGBAModel.Convert(entryColour(p.Goes)).(color.RGBA)
		}
		if p.Bounce == s.ray.Step && p.Bounce >= 0 {
			width += 1.6 * float64(s.scale)
			if p.Inside {
				c = themedRGBA(theme.ColorNamePrimary)
			}
		}
		casings = append(casings, solid.Ray{From: p.From, To: p.To, Colour: themedRGBA(colourPane), Width: width + 2*float64(s.scale)})
		lines = append(lines, solid.Ray{From: p.From, To: p.To, Colour: c, Width: width})
	}
	return append(casings, lines...)
}

// broken parts a line into dashes of that length, mm.
func broken(r solid.Ray, dash float64) []solid.Ray {
	along := r.To.Sub(r.From)
	var dashes []solid.Ray
	n := int(along.Len()/dash) + 1
	for i := 0; i < n; i += 2 {
		d := r
		d.From = r.From.Add(along.Mul(float64(i) / float64(n)))
		d.To = r.From.Add(along.Mul(float64(min(i+1, n)) / float64(n)))
		dashes = append(dashes, d)
	}
	return dashes
}

// bounceLabels numbers the bounces that carry enough to be followed by eye.
func (s *solidView) bounceLabels() []solid.Label {
	var labels []solid.Label
	for i, b := range s.ray.Path.Bounces {
		const faint = 0.02
		if b.Arrived < faint || i >= mostLabels {
			break
		}
		at := s.drawing.Point(b.At)
		labels = append(labels, solid.Label{Tier: strconv.Itoa(i + 1), X: at[0], Y: at[1]})
	}
	return labels
}

func (s *solidView) showRay(r *model.Ray) {
	s.ray = r
	s.redraw()
}

// Resize draws anew.
func (s *solidView) Resize(size fyne.Size) {
	if size == s.Size() {
		return
	}
	s.BaseWidget.Resize(size)
	s.redraw()
}

// Dragged turns the stone as if the pointer held its near side.
func (s *solidView) Dragged(e *fyne.DragEvent) {
	s.dragged = true
	radius := float64(min(s.Size().Width, s.Size().Height)) / 2
	if radius <= 0 {
		return
	}
	turn := func(by float32) facets.Angle { return facets.Angle(float64(by) / radius) }
	s.turnTo(s.pose.Turned(turn(e.Dragged.DX), turn(-e.Dragged.DY)))
}

// DragEnd is not used.
func (s *solidView) DragEnd() {}

// MouseDown takes the focus.
func (s *solidView) MouseDown(*desktop.MouseEvent) {
	s.dragged = false
	if c := fyne.CurrentApp().Driver().CanvasForObject(s); c != nil {
		c.Focus(s)
	}
}

// MouseUp selects the tier of the facet under the pointer, unless the stone was turned.
func (s *solidView) MouseUp(e *desktop.MouseEvent) {
	if s.dragged || s.drawing == nil || e.Button != desktop.MouseButtonPrimary {
		return
	}
	tier := ""
	if i, ok := s.drawing.Facet(float64(e.Position.X*s.scale), float64(e.Position.Y*s.scale)); ok {
		tier = s.stone.Facets[i].Tier
	}
	s.pick(tier)
}

// Cursor tells that the stone can be taken hold of.
func (s *solidView) Cursor() desktop.Cursor { return desktop.PointerCursor }

// TypedKey turns the stone: arrows by five degrees, Home back to rest.
func (s *solidView) TypedKey(e *fyne.KeyEvent) {
	const step = 5 * facets.Degree
	switch e.Name {
	case fyne.KeyLeft:
		s.turnTo(s.pose.Turned(-step, 0))
	case fyne.KeyRight:
		s.turnTo(s.pose.Turned(step, 0))
	case fyne.KeyUp:
		s.turnTo(s.pose.Turned(0, step))
	case fyne.KeyDown:
		s.turnTo(s.pose.Turned(0, -step))
	case fyne.KeyPageUp:
		s.turnTo(s.pose.Spun(step))
	case fyne.KeyPageDown:
		s.turnTo(s.pose.Spun(-step))
	case fyne.KeyHome:
		s.turnTo(restingPose())
	case fyne.KeyEscape:
		if s.selected != "" && s.ray == nil {
			s.pick("")
		} else {
			s.stray(e)
		}
	}
}

// TypedRune is not used.
func (s *solidView) TypedRune(rune) {}

// FocusGained shows the frame.
func (s *solidView) FocusGained() { s.focused = true; s.Refresh() }

// FocusLost hides the frame.
func (s *solidView) FocusLost() { s.focused = false; s.Refresh() }

// CreateRenderer builds the picture and a stock of labels.
func (s *solidView) CreateRenderer() fyne.WidgetRenderer {
	r := &solidViewRenderer{s: s, frame: canvas.NewRectangle(color.Transparent)}
	r.objects = []fyne.CanvasObject{s.picture}
	for i := range mostLabels {
		r.plates[i] = canvas.NewRectangle(color.Transparent)
		r.plates[i].CornerRadius = 3
		r.labels[i] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.plates[i], r.labels[i])
	}
	r.objects = append(r.objects, r.frame)
	r.Refresh()
	return r
}

type solidViewRenderer struct {
	s       *solidView
	plates  [mostLabels]*canvas.Rectangle
	labels  [mostLabels]*canvas.Text
	frame   *canvas.Rectangle
	objects []fyne.CanvasObject
}

func (r *solidViewRenderer) Destroy()                     {}
func (r *solidViewRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *solidViewRenderer) MinSize() fyne.Size           { return fyne.NewSize(120, 120) }

func (r *solidViewRenderer) Layout(size fyne.Size) {
	s := r.s
	s.picture.Resize(size)
	r.frame.Resize(size)
	for i, t := range r.labels {
		if t.Hidden {
			continue
		}
		l := s.labels[i]
		text := t.MinSize()
		at := fyne.NewPos(float32(math.Round(l.X))/s.scale-text.Width/2, float32(math.Round(l.Y))/s.scale-text.Height/2)
		t.Move(at)
		t.Resize(text)
		r.plates[i].Move(at.AddXY(-3, 0))
		r.plates[i].Resize(text.AddWidthHeight(6, 0))
	}
}

func (r *solidViewRenderer) Refresh() {
	s := r.s
	for i, t := range r.labels {
		shown := i < len(s.labels) && s.stone != nil
		t.Hidden, r.plates[i].Hidden = !shown, !shown
		if !shown {
			continue
		}
		t.Text, t.TextSize = s.labels[i].Tier, theme.CaptionTextSize()
		t.TextStyle.Bold = s.labels[i].Tier == s.selected
		t.Color = themed(theme.ColorNameForeground)
		plate := themedRGBA(colourPane)
		plate.R, plate.G, plate.B, plate.A = tint(plate.R), tint(plate.G), tint(plate.B), tint(255)
		r.plates[i].FillColor = plate
	}
	r.frame.StrokeWidth, r.frame.StrokeColor = 0, color.Transparent
	if s.focused {
		r.frame.StrokeWidth, r.frame.StrokeColor = 2, themed(theme.ColorNameFocus)
	}
	r.Layout(s.Size())
	s.picture.Refresh()
	canvas.Refresh(s)
}

// tint is a channel at three quarters, premultiplied.
func tint(v uint8) uint8 { return uint8(int(v) * 3 / 4) }
