package sheet

import (
	"fmt"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/facets"
)

// View is a parallel projection: where the stone's frame lies on paper.
type View struct {
	Right, Up mgl64.Vec3    // unit and orthogonal: the paper's directions in the stone's frame
	Origin    mgl64.Vec3    // point of the stone, mm, that falls on At
	At        drawing.Point // mm on paper
	Scale     float64       // mm on paper for a mm of the stone
}

// toward returns the direction to the viewer.
func (v *View) toward() mgl64.Vec3 { return v.Right.Cross(v.Up) }

// Point returns where a point of the stone falls on paper.
func (v *View) Point(p mgl64.Vec3) drawing.Point {
	d := p.Sub(v.Origin)
	return pt(v.At.X+v.Scale*v.Right.Dot(d), v.At.Y-v.Scale*v.Up.Dot(d))
}

// The directions of the views. From above and from below index 0 points up the
// paper; from the side the table is up.
func fromAbove() (right, up mgl64.Vec3) { return mgl64.Vec3{0, -1, 0}, mgl64.Vec3{1, 0, 0} }
func fromBelow() (right, up mgl64.Vec3) { return mgl64.Vec3{0, 1, 0}, mgl64.Vec3{1, 0, 0} }

// fromSide looks at the girdle with the given azimuth toward the viewer.
func fromSide(azimuth facets.Angle) (right, up mgl64.Vec3) {
	sin, cos := math.Sincos(azimuth.Radians())
	return mgl64.Vec3{-sin, cos, 0}, mgl64.Vec3{0, 0, 1}
}

// fromLap looks aslant at the side that faces the lap, so that its facets and the
// girdle are both seen.
func fromLap(facing facets.Side) (right, up mgl64.Vec3) {
	const slant = 40 // degrees from the axis
	const turn = 15  // degrees, so that no edge hides behind another
	sinS, cosS := math.Sincos(float64(slant * facets.Degree))
	sinT, cosT := math.Sincos(float64(turn * facets.Degree))
	z := 1.0
	if facing == facets.Pavilion {
		z = -1
	}
	toward := mgl64.Vec3{-sinS * cosT, -sinS * sinT, z * cosS}
	axis := mgl64.Vec3{0, 0, z}
	up = axis.Sub(toward.Mul(axis.Dot(toward))).Normalize()
	return up.Cross(toward), up
}

// fit returns the view that shows the stone's box within width × height mm about a
// point on paper, at most at the given scale.
func fit(stone *facets.Stone, right, up mgl64.Vec3, at drawing.Point, width, height, most float64) View {
	v := View{Right: right, Up: up, At: at}
	low, high := mgl64.Vec2{math.Inf(1), math.Inf(1)}, mgl64.Vec2{math.Inf(-1), math.Inf(-1)}
	for _, c := range stone.Corners {
		p := mgl64.Vec2{right.Dot(c), up.Dot(c)}
		for k := range p {
			low[k], high[k] = min(low[k], p[k]), max(high[k], p[k])
		}
	}
	middle := low.Add(high).Mul(0.5)
	v.Origin = right.Mul(middle[0]).Add(up.Mul(middle[1]))
	v.Scale = min(width/(high[0]-low[0]), height/(high[1]-low[1]), most)
	return v
}

// roundScale returns the largest scale not above s that a ruler can be used with.
func roundScale(s float64) float64 {
	best := 0.0
	for decade := -2; decade <= 3; decade++ {
		for _, step := range []float64{1, 1.5, 2, 2.5, 3, 4, 5, 6, 8} {
			if v := step * math.Pow10(decade); v <= s*(1+1e-9) {
				best = max(best, v)
			}
		}
	}
	return best
}

// Lines and greys of drawings.
const (
	thin   = 0.18 // mm
	medium = 0.3
	thick  = 0.55
)

// edgeOn is the cosine, toward the viewer, below which a facet shows nothing but its
// edge.
const edgeOn = 1e-9

func black() drawing.Ink { return drawing.Grey(0) }

// solid draws the facets that face the viewer: those of the rough grey, new ones
// darker with bold edges, all others white. New facets that are seen edge-on are a
// bold line. The weight is that of the lines over their usual one.
func (v *View) solid(p *drawing.Page, stone *facets.Stone, fresh []int, weight float64) {
	toward := v.toward()
	ring := func(f *facets.Facet) []drawing.Point {
		points := make([]drawing.Point, len(f.Corners))
		for i, c := range f.Corners {
			points[i] = v.Point(stone.Corners[c])
		}
		return points
	}
	for pass := range 2 {
		for i := range stone.Facets {
			f := &stone.Facets[i]
			isNew := slices.Contains(fresh, i)
			facing := f.Normal.Dot(toward)
			if facing < -edgeOn || facing < edgeOn && !isNew || isNew != (pass == 1) {
				continue
			}
			s := drawing.Style{Fill: drawing.Grey(255), Stroke: black(), Width: medium * weight}
			switch {
			case isNew && facing < edgeOn:
				s.Width = 2 * thick * weight
			case isNew:
				s.Fill, s.Width = drawing.Grey(0xb0), thick*weight
			case f.Tier == "":
				s.Fill, s.Stroke, s.Width = drawing.Grey(0xe6), drawing.Grey(0x78), thin*weight
			}
			p.Polygon(s, ring(f)...)
		}
	}
}

// leastSlope is the cosine, toward the viewer, below which a facet is seen too flat to
// carry its name.
const leastSlope = 0.05

// labels writes each facet's tier name where it fits, and returns the tiers that are
// seen but could not be written anywhere, and where the names stand.
func (v *View) labels(p *drawing.Page, stone *facets.Stone, t drawing.Type) (left []string, places []written) {
	toward := v.toward()
	named, seen := map[string]bool{}, map[string]bool{}
	var order []string
	for i := range stone.Facets {
		f := &stone.Facets[i]
		if f.Normal.Dot(toward) < leastSlope || f.Tier == "" {
			continue
		}
		if !seen[f.Tier] {
			seen[f.Tier] = true
			order = append(order, f.Tier)
		}
		points := make([]drawing.Point, len(f.Corners))
		for k, c := range f.Corners {
			points[k] = v.Point(stone.Corners[c])
		}
		at := centroid(points)
		name := t.Cut(f.Tier, 30)
		w, h := t.Width(name)/2+0.4, t.Height()/2+0.4
		if inside(points, pt(at.X-w, at.Y-h)) && inside(points, pt(at.X+w, at.Y-h)) &&
			inside(points, pt(at.X-w, at.Y+h)) && inside(points, pt(at.X+w, at.Y+h)) {
			p.Write(t, black(), drawing.Middle, pt(at.X, at.Y+t.Height()/2), name)
			named[f.Tier] = true
			places = append(places, written{at, 2 * w})
		}
	}
	for _, name := range order {
		if !named[name] {
			left = append(left, name)
		}
	}
	return left, places
}

// centroid returns the centre of a convex polygon's area.
func centroid(ring []drawing.Point) drawing.Point {
	o := ring[0]
	var x, y, area float64
	for i := 1; i+1 < len(ring); i++ {
		a := pt(ring[i].X-o.X, ring[i].Y-o.Y)
		b := pt(ring[i+1].X-o.X, ring[i+1].Y-o.Y)
		c := a.X*b.Y - a.Y*b.X
		area += c
		x += c * (a.X + b.X) / 3
		y += c * (a.Y + b.Y) / 3
	}
	if area == 0 {
		return o
	}
	return pt(o.X+x/area, o.Y+y/area)
}

// inside reports whether a point lies in a convex polygon of either sense.
func inside(ring []drawing.Point, p drawing.Point) bool {
	sense := 0.0
	for i, a := range ring {
		b := ring[(i+1)%len(ring)]
		c := (b.X-a.X)*(p.Y-a.Y) - (b.Y-a.Y)*(p.X-a.X)
		if c*sense < 0 {
			return false
		}
		if c != 0 {
			sense = c
		}
	}
	return true
}

// ringDrawing is a stone seen along its axis within the ring of the index gear.
type ringDrawing struct {
	sheet  *Sheet
	facing facets.Side
	type_  drawing.Type
}

// ringRoom is how far the ring's numbers reach beyond the stone, in heights of type.
const ringRoom = 4.9

// draw draws the stone within a square of the given edge about at, and returns its
// scale and the tiers that found no room for their name.
func (d *ringDrawing) draw(p *drawing.Page, at drawing.Point, edge float64) (scale float64, lost []string) {
	right, up := fromAbove()
	if d.facing == facets.Pavilion {
		right, up = fromBelow()
	}
	stone := d.sheet.Solution.Stone
	reach := 0.0
	for _, c := range stone.Corners {
		reach = max(reach, math.Hypot(c[0], c[1]))
	}
	room := ringRoom * d.type_.Height()
	if d.sheet.LeaveOut.Indices {
		room /= 2
	}
	v := View{Right: right, Up: up, At: at, Scale: roundScale((edge/2 - room) / reach)}
	v.solid(p, stone, nil, 1)
	left, labels := v.labels(p, stone, d.type_)
	radius := v.Scale*reach + 0.9*d.type_.Height()
	taken := append(d.gear(p, &v, radius), labels...)
	for _, tier := range left {
		if !d.callOut(p, &v, tier, radius, edge, &taken) {
			lost = append(lost, tier)
		}
	}
	return v.Scale, lost
}

// written is where words stand on a drawing: their middle, and how wide they are.
type written struct {
	at    drawing.Point
	width float64
}

// mostTried is how many facets of a tier a place for its name is sought from.
const mostTried = 24

// callOut writes a tier's name outside the ring, with a line to one of its facets: the
// place with the shortest line that runs into no other words. It reports false where
// there is none within the square of the given edge.
func (d *ringDrawing) callOut(p *drawing.Page, v *View, tier string, radius, edge float64, taken *[]written) bool {
	stone := d.sheet.Solution.Stone
	h := d.type_.Height()
	name := d.type_.Cut(tier, 30)
	width := d.type_.Width(name)
	shortest := math.Inf(1)
	var from, to drawing.Point
	tried := 0
	for i := range stone.Facets {
		f := &stone.Facets[i]
		if f.Tier != tier || f.Normal.Dot(v.toward()) < leastSlope || tried == mostTried {
			continue
		}
		tried++
		points := make([]drawing.Point, len(f.Corners))
		for k, c := range f.Corners {
			points[k] = v.Point(stone.Corners[c])
		}
		c := centroid(points)
		for r := radius + 2.9*h; r < radius+7*h; r += h / 2 {
			const steps = 120
			for k := range steps {
				sin, cos := math.Sincos(2 * math.Pi * float64(k) / steps)
				at := pt(v.At.X+r*sin, v.At.Y-r*cos)
				length := math.Hypot(at.X-c.X, at.Y-c.Y)
				if length >= shortest || math.Abs(at.X-v.At.X)+width/2 > edge/2 || math.Abs(at.Y-v.At.Y)+h > edge/2 {
					continue
				}
				if slices.ContainsFunc(*taken, func(o written) bool {
					return math.Abs(o.at.X-at.X) < (o.width+width)/2+0.6*h && math.Abs(o.at.Y-at.Y) < 1.9*h
				}) || nearLine(c, at, *taken, 0.9*h) {
					continue
				}
				shortest, from, to = length, c, at
			}
		}
	}
	if math.IsInf(shortest, 1) {
		return false
	}
	*taken = append(*taken, written{to, width})
	p.Circle(drawing.Style{Fill: black()}, from, 0.45)
	end := 1 - h/shortest // the line stops short of the name
	p.Line(drawing.Style{Stroke: black(), Width: thin}, from,
		pt(from.X+(to.X-from.X)*end, from.Y+(to.Y-from.Y)*end))
	p.Write(d.type_, black(), drawing.Middle, pt(to.X, to.Y+h/2), name)
	return true
}

// nearLine reports whether the middle of any words lies nearer to the line than the
// distance.
func nearLine(a, b drawing.Point, all []written, distance float64) bool {
	l := math.Hypot(b.X-a.X, b.Y-a.Y)
	return slices.ContainsFunc(all, func(o written) bool {
		p := o.at
		t := min(max(((p.X-a.X)*(b.X-a.X)+(p.Y-a.Y)*(b.Y-a.Y))/(l*l), 0), 1)
		return math.Hypot(p.X-a.X-t*(b.X-a.X), p.Y-a.Y-t*(b.Y-a.Y)) < distance
	})
}

// gear draws the ring: a tick for every tooth, longer ones with their number where a
// tier of this side has a facet. It returns where the numbers stand.
func (d *ringDrawing) gear(p *drawing.Page, v *View, radius float64) (taken []written) {
	m := &d.sheet.Machine
	p.Circle(drawing.Style{Stroke: drawing.Grey(0x60), Width: thin}, v.At, radius)
	place := func(shown, r float64) drawing.Point {
		// The plan's azimuth of a number, back through what Shown does.
		i := shown
		if d.facing == facets.Crown && m.CrownReversed {
			i = 2*m.TransferIndex - shown
		}
		sin, cos := math.Sincos(2 * math.Pi * i / float64(m.Gear))
		dir := mgl64.Vec3{cos, sin, 0}
		return pt(v.At.X+r*v.Right.Dot(dir), v.At.Y-r*v.Up.Dot(dir))
	}
	tick := func(shown, length, width float64) {
		p.Line(drawing.Style{Stroke: black(), Width: width}, place(shown, radius), place(shown, radius+length))
	}
	h := d.type_.Height()
	if spacing := 2 * math.Pi * radius / float64(m.Gear); spacing > 0.7 {
		for i := range m.Gear {
			tick(float64(i), 0.35*h, thin)
		}
	}
	if d.sheet.LeaveOut.Indices {
		return nil
	}
	type number struct {
		shown float64
		words string
	}
	var numbers []number
	seen := map[string]bool{}
	// A girdle has the most facets and the least need of a ring: its numbers come last.
	for _, girdle := range []bool{false, true} {
		for i := range d.sheet.Rows {
			r := &d.sheet.Rows[i]
			if r.Facing != d.facing || r.Flat || r.Tier.Temporary || (r.Tier.Side == facets.Girdle) != girdle {
				continue
			}
			for _, s := range r.Settings {
				words := fmt.Sprint(s.Tooth)
				switch {
				case s.Part > 0:
					words += "+"
				case s.Part < 0:
					words += "−"
				}
				if !seen[s.String()] {
					seen[s.String()] = true
					numbers = append(numbers, number{float64(s.Tooth) + s.Part, words})
				}
			}
		}
	}
	// Numbers that would run into each other stand farther out, or are left to the table.
	for _, n := range numbers {
		tick(n.shown, 0.7*h, medium)
		width := d.type_.Width(n.words)
		for row := range 2 {
			at := place(n.shown, radius+(1.5+1.5*float64(row))*h)
			if slices.ContainsFunc(taken, func(o written) bool {
				return math.Abs(o.at.X-at.X) < (o.width+width)/2+0.4 && math.Abs(o.at.Y-at.Y) < 1.25*h
			}) {
				continue
			}
			taken = append(taken, written{at, width})
			p.Write(d.type_, black(), drawing.Middle, pt(at.X, at.Y+h/2), n.words)
			break
		}
	}
	return taken
}
