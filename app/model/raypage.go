package model

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/app/solid"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// Measures of a ray's page, in mm.
const (
	rayPageWide = 180
	rayPageEdge = 10
	rayPageView = 78 // edge of a view
	rayPageRow  = 4.2
	rayPageMost = 14 // lines of a list
)

// Page draws the followed ray for print: the stone from the side and from above with
// the ray in it, and a line a bounce below. The side view looks across the ray's first
// way inside. The ray beside it, if any, is dashed, its list at the right.
func (r *Ray) Page(w *words.Words, stone string) *drawing.Page {
	p := &drawing.Page{Width: rayPageWide}
	ink := drawing.Grey(0)
	y := rayPageEdge + 4.0
	p.Write(drawing.Type{Size: 12, Bold: true}, ink, drawing.Left, drawing.Point{X: rayPageEdge, Y: y}, stone)
	y += 4
	views := []struct {
		name words.Key
		pose solid.Pose
	}{{"from the side", r.sidePose()}, {"from above, index 0 up", solid.FaceUp()}}
	for k, v := range views {
		at := drawing.Point{X: rayPageEdge + float64(k)*(rayPageWide-2*rayPageEdge-rayPageView), Y: y}
		r.drawView(p, at, v.pose)
		p.Write(drawing.Type{Size: 8}, drawing.Grey(90), drawing.Middle,
			drawing.Point{X: at.X + rayPageView/2, Y: at.Y + rayPageView + 3}, w.Say(v.name))
	}
	y += rayPageView + 10
	bottom := y
	for k, one := range []*Ray{r, r.Beside} {
		if one != nil {
			x := rayPageEdge + float64(k)*rayPageWide/2
			bottom = max(bottom, one.writeList(w, p, drawing.Point{X: x, Y: y}, k == 1))
		}
	}
	p.Height = bottom + rayPageEdge
	return p
}

// sidePose holds the stone with the table up, so that the first level step of the ray
// runs across the picture.
func (r *Ray) sidePose() solid.Pose {
	side := solid.Profile()
	if r.Path == nil {
		return side
	}
	from := r.Path.Entry
	for _, b := range r.Path.Bounces {
		step := b.At.Sub(from)
		step[2] = 0
		if step.Len() > 1e-3*solid.Radius(r.Stone) {
			v := side.View(step)
			return side.Turned(facets.Angle(math.Atan2(v[2], v[0])), 0)
		}
		from = b.At
	}
	return side
}

// drawView draws the stone and the rays into a square.
func (r *Ray) drawView(p *drawing.Page, at drawing.Point, pose solid.Pose) {
	const units, share = 1000, 0.58 // light outside reaches 0.7 radii beyond the stone
	d := solid.Project(r.Stone, pose, units, units, share)
	place := func(v mgl64.Vec3) drawing.Point {
		q := d.Point(v)
		return drawing.Point{X: at.X + q[0]*rayPageView/units, Y: at.Y + q[1]*rayPageView/units}
	}
	for _, front := range []bool{false, true} {
		style := drawing.Style{Stroke: drawing.Grey(215), Width: 0.12}
		if front {
			style = drawing.Style{Stroke: drawing.Grey(120), Width: 0.18}
		}
		var rings [][]drawing.Point
		for i := range r.Stone.Facets {
			f := &r.Stone.Facets[i]
			if (pose.View(f.Normal)[2] > 0) != front {
				continue
			}
			var ring []drawing.Point
			for _, c := range f.Corners {
				ring = append(ring, place(r.Stone.Corners[c]))
			}
			rings = append(rings, ring)
		}
		p.Polygons(style, rings)
	}
	for k, one := range []*Ray{r.Beside, r} {
		if one == nil {
			continue
		}
		for _, s := range one.Stretches(0.7 * solid.Radius(r.Stone)) {
			style := drawing.Style{Stroke: stretchInk(s), Width: 0.2 + 0.5*s.Share}
			if k == 0 {
				style.Dash = []float64{1.6, 1}
			}
			p.Line(style, place(s.From), place(s.To))
		}
	}
	if r.Path != nil {
		for i, b := range r.Path.Bounces {
			const faint = 0.05
			if b.Arrived < faint || i >= rayPageMost {
				break
			}
			q := place(b.At)
			p.Circle(drawing.Style{Fill: drawing.Grey(255), Stroke: drawing.Grey(0), Width: 0.15}, q, 1.5)
			p.Write(drawing.Type{Size: 6}, drawing.Grey(0), drawing.Middle, drawing.Point{X: q.X, Y: q.Y + 0.75}, fmt.Sprint(i+1))
		}
	}
}

// stretchInk is dark inside; outside it tells where the light goes, on white paper.
func stretchInk(s Stretch) drawing.Ink {
	if s.Inside || s.Goes == trace.Unresolved {
		return drawing.Grey(20)
	}
	switch s.Goes {
	case trace.Returned:
		return drawing.Ink{R: 0xa8, G: 0x80, B: 0x00, A: 255}
	case trace.Leaked:
		return drawing.Ink{R: 0x2f, G: 0x6f, B: 0x9f, A: 255}
	}
	return drawing.Grey(130)
}

// writeList writes a line a bounce and returns the y of the last.
func (r *Ray) writeList(in *words.Words, p *drawing.Page, at drawing.Point, dashed bool) float64 {
	head, body := drawing.Type{Size: 9, Bold: true}, drawing.Type{Size: 8}
	title := r.Title(in)
	if dashed {
		title = in.Say("%s (dashed)", title)
	}
	const wide = rayPageWide/2 - rayPageEdge - 2
	p.Write(head, drawing.Grey(0), drawing.Left, at, head.Cut(title, wide))
	lines, more := r.Lines(in)
	if len(lines) > rayPageMost {
		more += len(lines) - rayPageMost
		lines = lines[:rayPageMost]
	}
	starts := []float64{0, 7, 25, 42, 58}
	row := func(cells ...string) {
		at.Y += rayPageRow
		for i, c := range cells {
			p.Write(body, drawing.Grey(0), drawing.Left, drawing.Point{X: at.X + starts[i], Y: at.Y}, c)
		}
	}
	if len(lines) > 0 {
		row("", in.Say("facet"), in.Say("incidence"), in.Say("stays"), in.Say("leaves"))
	}
	for _, l := range lines {
		leaves := l.Goes
		if l.Left != "" {
			leaves = l.Left + " " + l.Goes
		}
		row(l.Number, l.Facet, l.Angle, l.Stayed, leaves)
	}
	if more > 0 {
		row("", in.Say("and %d more, each carrying less", more))
	}
	return at.Y
}
