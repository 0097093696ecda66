package report

import (
	"image"
	"image/color"
	"math"
	"sort"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/facets"
	"pavilight/trace"
)

// The styles of type, points.
func body() drawing.Type   { return drawing.Type{Size: 9.5} }
func strong() drawing.Type { return drawing.Type{Size: 9.5, Bold: true} }
func small() drawing.Type  { return drawing.Type{Size: 8} }
func note() drawing.Type   { return drawing.Type{Size: 8, Bold: true} }

// Inks.
func black() drawing.Ink { return drawing.Grey(0x1a) }
func pale() drawing.Ink  { return drawing.Grey(0x58) }
func faint() drawing.Ink { return drawing.Grey(0xb0) }

func ink(c color.RGBA) drawing.Ink { return drawing.Ink(c) }

func pt(x, y float64) drawing.Point { return drawing.Point{X: x, Y: y} }

// paper is the colour of the ground around maps.
func paper() color.RGBA { return color.RGBA{255, 255, 255, 255} }

// shareInk returns the colour of an entry of the ledger in bars: of the returned light the
// bright end of its map, of the leaked light the middle of its own, the others grey.
func shareInk(q trace.Quantity) drawing.Ink {
	switch q {
	case trace.Returned:
		return ink(picture.Cividis().At(0.93))
	case trace.Leaked:
		return ink(picture.Cubehelix().At(0.72))
	case trace.Head:
		return drawing.Grey(0x38)
	case trace.Surface:
		return drawing.Grey(0xd2)
	default:
		return ink(color.RGBA{0xa8, 0x6e, 0x4f, 255})
	}
}

// onInk returns an ink that can be read on another.
func onInk(i drawing.Ink) drawing.Ink {
	if 0.2126*float64(i.R)+0.7152*float64(i.G)+0.0722*float64(i.B) < 120 {
		return drawing.Grey(255)
	}
	return black()
}

// shown are the entries of the ledger in the order of the bars.
func shown() []trace.Quantity {
	return []trace.Quantity{trace.Returned, trace.Leaked, trace.Head, trace.Surface, trace.Absorbed, trace.Unresolved}
}

// wholeParts rounds the shares of a ledger to whole parts of 100 that sum to 100: the
// largest remainders are rounded up.
func wholeParts(l trace.Ledger) map[trace.Quantity]int {
	parts := map[trace.Quantity]int{}
	order := shown()
	left := 100
	rest := map[trace.Quantity]float64{}
	for _, q := range order {
		v := 100 * max(0, q.Of(l))
		parts[q] = int(v)
		rest[q] = v - math.Floor(v)
		left -= parts[q]
	}
	sort.SliceStable(order, func(i, j int) bool { return rest[order[i]] > rest[order[j]] })
	for i := 0; i < left; i++ {
		parts[order[i%len(order)]]++
	}
	return parts
}

// bar is one row of a figure of bars.
type bar struct {
	name   string
	ledger trace.Ledger
	back   string // what comes back with its errors; empty for none
	group  string // a heading over this bar; empty for none
}

// bars draws ledgers as bars of 100 parts. A title brings a key of the colours with it.
func bars(w words, title string, rows []bar) figure {
	const barHeight, gap, nameWidth = 5.6, 1.6, 36.0
	endWidth := 0.0
	for _, r := range rows {
		if r.back != "" {
			endWidth = max(endWidth, small().Width(r.back)+3)
		}
	}
	p := &drawing.Page{Width: contentWidth}
	y, x := 0.0, 0.0
	key := shown()
	if title == "" {
		key = nil
	} else {
		y = body().Height() + 0.6
		p.Write(strong(), black(), drawing.Left, pt(0, y), title)
		y += 3.0
	}
	for _, q := range key {
		if q == trace.Absorbed || q == trace.Unresolved { // only where some bar shows it
			most := 0
			for _, r := range rows {
				most = max(most, wholeParts(r.ledger)[q])
			}
			if most == 0 {
				continue
			}
		}
		name := w.say(q.String())
		width := 4.4 + small().Width(name) + 4
		if x+width > contentWidth-endWidth+4 {
			x, y = 0, y+4.6
		}
		p.Rectangle(drawing.Style{Fill: shareInk(q)}, pt(x, y), 3.2, 3.2)
		p.Write(small(), black(), drawing.Left, pt(x+4.4, y+2.7), name)
		x += width
	}
	if title != "" {
		y += 5.4
	}
	long := contentWidth - nameWidth - endWidth
	if endWidth > 0 && title != "" {
		p.Write(small(), pale(), drawing.Right, pt(contentWidth, y-2.7), w.say("bar.back"))
	}
	for i, r := range rows {
		if r.group != "" {
			if i > 0 {
				y += 1.5
			}
			p.Write(note(), black(), drawing.Left, pt(0, y+note().Height()), r.group)
			y += note().Leading() + 0.4
		}
		p.Write(body(), black(), drawing.Left, pt(0, y+barHeight/2+body().Height()/2), body().Cut(r.name, nameWidth-2))
		parts := wholeParts(r.ledger)
		x := nameWidth
		for _, q := range shown() {
			v := max(0, q.Of(r.ledger)) * long
			if v < 0.05 {
				continue
			}
			p.Rectangle(drawing.Style{Fill: shareInk(q)}, pt(x, y), v, barHeight)
			if parts[q] > 0 {
				if number := w.number(float64(parts[q]), 0); strong().Width(number)+1 < v {
					p.Write(strong(), onInk(shareInk(q)), drawing.Middle, pt(x+v/2, y+barHeight/2+strong().Height()/2), number)
				}
			}
			x += v
		}
		// White between the parts, so that greys of like lightness stand apart in a copy.
		x = nameWidth
		for _, q := range shown() {
			v := max(0, q.Of(r.ledger)) * long
			x += v
			if v >= 0.05 && x < nameWidth+long-0.1 {
				p.Line(drawing.Style{Stroke: drawing.Grey(255), Width: 0.35}, pt(x, y), pt(x, y+barHeight))
			}
		}
		p.Write(small(), black(), drawing.Right, pt(contentWidth, y+barHeight/2+small().Height()/2), r.back)
		y += barHeight + gap
	}
	p.Height = y
	return figure{p, title}
}

// fewColours returns the same picture with a palette where 256 colours suffice: it takes a
// third of the time and room to write.
func fewColours(img *image.RGBA) image.Image {
	index := map[color.RGBA]uint8{}
	out := image.NewPaletted(img.Rect, nil)
	for i := range out.Pix {
		c := color.RGBA{img.Pix[4*i], img.Pix[4*i+1], img.Pix[4*i+2], img.Pix[4*i+3]}
		k, ok := index[c]
		if !ok {
			if len(out.Palette) == 256 {
				return img
			}
			k = uint8(len(out.Palette))
			index[c] = k
			out.Palette = append(out.Palette, c)
		}
		out.Pix[i] = k
	}
	return out
}

// mapped paints one quantity of a map, white outside the stone.
func mapped(m *trace.Map, q trace.Quantity) image.Image {
	colours := *coloursOf(q)
	colours.Outside = paper()
	img := image.NewRGBA(image.Rect(0, 0, m.Pixels, m.Pixels))
	picture.Paint(img, m.Field(q), m.Pixels, &colours)
	return fewColours(img)
}

func coloursOf(q trace.Quantity) *picture.ColourMap {
	if q == trace.Leaked {
		return picture.Cubehelix()
	}
	return picture.Cividis()
}

// scale draws a colour map from 0 to 1, lying.
func scale(p *drawing.Page, w words, q trace.Quantity, at drawing.Point, width float64) {
	const height = 2.4
	colours := coloursOf(q)
	strip := image.NewRGBA(image.Rect(0, 0, 256, 1))
	for i := range 256 {
		strip.SetRGBA(i, 0, colours.At(float64(i)/255))
	}
	p.Place(strip, at, width, height)
	for i, v := range []float64{0, 0.5, 1} {
		align := []drawing.Align{drawing.Left, drawing.Middle, drawing.Right}[i]
		p.Write(small(), pale(), align, pt(at.X+v*width, at.Y+height+2.7), w.number(100*v, 0))
	}
}

// mapColumn is one column of maps.
type mapColumn struct {
	name   string
	column *Column
}

// mapGrid draws the maps of light return over those of leakage, one column a surrounding.
func mapGrid(w words, columns []mapColumn, alt string) figure {
	const nameWidth, gap, mostEdge = 24.0, 2.5, 40.0
	n := float64(len(columns))
	edge := min(mostEdge, (contentWidth-nameWidth-gap*(n-1))/n)
	p := &drawing.Page{Width: contentWidth}
	y := 0.0
	lines := 1
	for _, c := range columns {
		lines = max(lines, len(small().Wrap(c.name, edge)))
	}
	for i, c := range columns {
		x := nameWidth + float64(i)*(edge+gap) + edge/2
		wrapped := note().Wrap(c.name, edge)
		for k, line := range wrapped {
			p.Write(note(), black(), drawing.Middle, pt(x, y+note().Leading()*(float64(k+lines-min(lines, len(wrapped)))+0.8)), line)
		}
	}
	y += float64(lines)*note().Leading() + 1.2
	for _, q := range []trace.Quantity{trace.Returned, trace.Leaked} {
		name := w.say("maps.return")
		if q == trace.Leaked {
			name = w.say("maps.leak")
		}
		for k, line := range note().Wrap(upper(name), nameWidth-1) {
			p.Write(note(), black(), drawing.Left, pt(0, y+4+float64(k)*note().Leading()), line)
		}
		scale(p, w, q, pt(0, y+edge/2), nameWidth-8)
		for i, c := range columns {
			x := nameWidth + float64(i)*(edge+gap)
			p.Place(mapped(c.column.Map, q), pt(x, y), edge, edge)
			mean := w.with(q.Of(c.column.Ledger), q.Of(c.column.StandardError), c.column.spreadOf(q))
			p.Write(small(), pale(), drawing.Middle, pt(x+edge/2, y+edge+3), mean)
		}
		y += edge + 5
	}
	p.Height = y
	return figure{p, alt}
}

// mediumInk returns the ink of a curve: dark, blue, ochre and red, told apart also by their
// dashes and names.
func mediumInk(i int) drawing.Style {
	inks := []color.RGBA{{0x22, 0x22, 0x22, 255}, {0x1f, 0x6f, 0xb4, 255}, {0xb0, 0x7a, 0x10, 255}, {0xa8, 0x36, 0x36, 255}}
	dashes := [][]float64{nil, {2.2, 1}, {0.5, 1.1}, {3, 0.8, 0.5, 0.8}}
	return drawing.Style{Stroke: ink(inks[i%len(inks)]), Width: 0.5, Dash: dashes[i%len(dashes)]}
}

// curve is one line of a chart.
type curve struct {
	name string
	y    []float64
}

// tiltStrip draws the light return of the tilts as a row of maps, each over its angle.
func tiltStrip(w words, tilts []Tilt, column int) figure {
	const gap = 1.5
	n := float64(len(tilts))
	edge := (contentWidth - gap*(n-1)) / n
	p := &drawing.Page{Width: contentWidth, Height: edge + 4.2}
	for i, t := range tilts {
		x := float64(i) * (edge + gap)
		p.Place(mapped(t.Columns[column].Map, trace.Returned), pt(x, 0), edge, edge)
		p.Write(small(), pale(), drawing.Middle, pt(x+edge/2, edge+3.2), w.degrees(t.Angle.Degrees(), 0))
	}
	return figure{p, w.say("tilt.alt")}
}

// chart draws curves over the tilts, in parts of 100 from 0 to 100, in a frame.
func chart(p *drawing.Page, w words, title string, tilts []Tilt, curves []curve, at drawing.Point, width, height float64) {
	const room = 8.0
	p.Write(strong(), black(), drawing.Left, pt(at.X, at.Y+body().Height()), title)
	left, top := at.X+room, at.Y+body().Height()+2.5
	first, last := tilts[0].Angle, tilts[len(tilts)-1].Angle
	wide := width - room - small().Width(w.degrees(last.Degrees(), 0))/2 // half of the last number stands past the frame
	grid := drawing.Style{Stroke: drawing.Grey(0xdc), Width: 0.2}
	place := func(angle facets.Angle, v float64) drawing.Point {
		return pt(left+wide*float64((angle-first)/(last-first)), top+height*(1-v))
	}
	for _, v := range []float64{0, 0.25, 0.5, 0.75, 1} {
		p.Line(grid, place(first, v), place(last, v))
		p.Write(small(), pale(), drawing.Right, pt(left-1.2, place(first, v).Y+small().Height()/2), w.number(100*v, 0))
	}
	for i, t := range tilts {
		if i%2 == 0 {
			p.Line(grid, place(t.Angle, 0), place(t.Angle, 1))
			p.Write(small(), pale(), drawing.Middle, pt(place(t.Angle, 0).X, top+height+3.4), w.degrees(t.Angle.Degrees(), 0))
		}
	}
	for k, c := range curves {
		var points []drawing.Point
		for i, t := range tilts {
			points = append(points, place(t.Angle, c.y[i]))
		}
		p.Line(mediumInk(k), points...)
	}
	// The key stands under the axis, in as many lines as it needs.
	x, y := left, top+height+7.6
	for k, c := range curves {
		name := small().Cut(c.name, wide-8)
		if x > left && x+8+small().Width(name) > left+wide {
			x, y = left, y+keyLine
		}
		p.Line(mediumInk(k), pt(x, y-1), pt(x+7, y-1))
		x += 8 + p.Write(small(), black(), drawing.Left, pt(x+8, y), name) + 4
	}
}

// keyLine is the height of a line of a chart's key, mm.
const keyLine = 3.8

// chartHeight is what a chart of some curves takes beyond its frame, at most.
func chartHeight(curves int) float64 {
	return body().Height() + 2.5 + 9 + keyLine*float64((curves+1)/2-1)
}

// rayFigure draws a ray in two side views next to each other.
func rayFigure(w words, f *Findings, titles [2]string, height float64) figure {
	const gap, head = 8.0, 5.0
	two := 2
	if f.Ray.First == f.Ray.Second {
		two = 1
	}
	width := (contentWidth - gap) / 2
	p := &drawing.Page{Width: contentWidth, Height: head + height}
	for i := range two {
		x := float64(i) * (width + gap)
		p.Write(strong(), black(), drawing.Middle, pt(x+width/2, strong().Height()+0.5), titles[i])
		w.drawRay(p, f, f.Ray.Paths[i], pt(x, head), width, height)
	}
	return figure{p, w.say("ray.alt")}
}

// drawRay draws the stone from the side and a path in it, within a box.
func (w words) drawRay(p *drawing.Page, f *Findings, path *trace.Path, at drawing.Point, width, height float64) {
	const above, below = 9.0, 9.0 // mm for the ray outside the stone
	right, up := f.Ray.Right, mgl64.Vec3{0, 0, 1}
	low, high := mgl64.Vec2{math.Inf(1), math.Inf(1)}, mgl64.Vec2{math.Inf(-1), math.Inf(-1)}
	for _, c := range f.Solid.Corners {
		q := mgl64.Vec2{right.Dot(c), c[2]}
		for k := range q {
			low[k], high[k] = min(low[k], q[k]), max(high[k], q[k])
		}
	}
	k := min((width-26)/(high[0]-low[0]), (height-above-below)/(high[1]-low[1]))
	place := func(v mgl64.Vec3) drawing.Point {
		return pt(at.X+width/2+k*(right.Dot(v)-(low[0]+high[0])/2), at.Y+above+k*(high[1]-up.Dot(v)))
	}
	toward := right.Cross(up)
	var rings [][]drawing.Point
	for i := range f.Solid.Facets {
		facet := &f.Solid.Facets[i]
		if facet.Normal.Dot(toward) <= 1e-9 {
			continue
		}
		var ring []drawing.Point
		for _, c := range facet.Corners {
			ring = append(ring, place(f.Solid.Corners[c]))
		}
		rings = append(rings, ring)
	}
	p.Polygons(drawing.Style{Fill: drawing.Grey(0xf4), Stroke: drawing.Grey(0xc4), Width: 0.18}, rings)
	p.Polygon(drawing.Style{Stroke: drawing.Grey(0x60), Width: 0.35}, hull(rings)...)

	line := ink(color.RGBA{0xb4, 0x2f, 0x1f, 255})
	wide := func(share float64) float64 { return 0.25 + 1.0*share }
	exit := mainExit(path)
	entry := place(path.Entry)
	// From the eye.
	eye := pt(entry.X, at.Y+0.8)
	p.Write(small(), pale(), drawing.Right, pt(eye.X-1.5, eye.Y+2.2), w.say("ray.eye"))
	p.Line(drawing.Style{Stroke: line, Width: wide(1)}, eye, entry)
	arrowhead(p, line, eye, pt(entry.X, (eye.Y+entry.Y)/2+1), wide(1))
	p.Line(drawing.Style{Stroke: line, Width: wide(path.Surface)}, entry, along(entry, place(path.Entry.Add(path.Mirrored)), 6))
	from := entry
	for i := 0; i <= exit; i++ {
		b := &path.Bounces[i]
		to := place(b.At)
		p.Line(drawing.Style{Stroke: line, Width: wide(b.Arrived)}, from, to)
		if b.Left > 0.01 {
			out := along(to, place(b.At.Add(b.Leaving)), 3+4*b.Left)
			p.Line(drawing.Style{Stroke: line, Width: wide(b.Left)}, to, out)
			arrowhead(p, line, to, out, wide(b.Left))
			if i == exit {
				w.endWords(p, b, to, out)
			}
		}
		from = to
	}
	for i := 0; i <= exit; i++ {
		b := &path.Bounces[i]
		to := place(b.At)
		// The number stands outside the stone, against the facet.
		n := f.Solid.Facets[b.Facet].Normal
		out := along(to, place(b.At.Add(n)), 4.2)
		if math.Hypot(out.X-to.X, out.Y-to.Y) < 1 {
			out = pt(to.X, to.Y+4.2)
		}
		if b.Left > 0.01 { // not upon the arrow: aside of it
			leaving := along(to, place(b.At.Add(b.Leaving)), 1)
			dx, dy := leaving.X-to.X, leaving.Y-to.Y
			if dx < 0 {
				dx, dy = -dx, -dy
			}
			out = pt(to.X+dy*4.4, to.Y-dx*4.4)
			if out.Y < to.Y == (b.At[2] < path.Entry[2]/2) { // outside rather than inside
				out = pt(to.X-dy*4.4, to.Y+dx*4.4)
			}
		}
		p.Circle(drawing.Style{Fill: drawing.Grey(255), Stroke: line, Width: 0.25}, out, 2.1)
		p.Write(note(), black(), drawing.Middle, pt(out.X, out.Y+note().Height()/2), w.number(float64(i+1), 0))
	}
}

// endWords says at the end of an arrow where the light comes from that is seen there.
func (w words) endWords(p *drawing.Page, b *trace.Bounce, from, to drawing.Point) {
	key := "ray.above"
	switch b.Goes {
	case trace.Leaked:
		key = "ray.below"
	case trace.Head:
		key = "ray.own"
	}
	align, x := drawing.Left, to.X+2
	if to.X < from.X {
		align, x = drawing.Right, to.X-2
	}
	y := to.Y + 1
	if to.Y > from.Y {
		y += 1.5
	}
	p.Write(small(), pale(), align, pt(x, y), w.say(key))
}

// along returns the point at a distance from a toward b, mm.
func along(a, b drawing.Point, distance float64) drawing.Point {
	l := math.Hypot(b.X-a.X, b.Y-a.Y)
	if l < 1e-9 {
		return a
	}
	return pt(a.X+(b.X-a.X)*distance/l, a.Y+(b.Y-a.Y)*distance/l)
}

// arrowhead draws the head of an arrow that ends at b.
func arrowhead(p *drawing.Page, i drawing.Ink, a, b drawing.Point, width float64) {
	l := math.Hypot(b.X-a.X, b.Y-a.Y)
	if l < 1e-9 {
		return
	}
	x, y := (b.X-a.X)/l, (b.Y-a.Y)/l
	long, half := 1.6+width, 0.7+width/2
	p.Polygon(drawing.Style{Fill: i}, pt(b.X+x*0.8, b.Y+y*0.8),
		pt(b.X-x*(long-0.8)-y*half, b.Y-y*(long-0.8)+x*half), pt(b.X-x*(long-0.8)+y*half, b.Y-y*(long-0.8)-x*half))
}

// hull returns the convex hull of the points of some rings (Andrew's monotone chain).
func hull(rings [][]drawing.Point) []drawing.Point {
	var all []drawing.Point
	for _, r := range rings {
		all = append(all, r...)
	}
	sort.Slice(all, func(i, j int) bool { return all[i].X < all[j].X || all[i].X == all[j].X && all[i].Y < all[j].Y })
	var chain []drawing.Point
	half := func(points []drawing.Point) {
		start := len(chain)
		for _, q := range points {
			for len(chain) >= start+2 {
				a, b := chain[len(chain)-2], chain[len(chain)-1]
				if (b.X-a.X)*(q.Y-a.Y)-(b.Y-a.Y)*(q.X-a.X) > 0 {
					break
				}
				chain = chain[:len(chain)-1]
			}
			chain = append(chain, q)
		}
		chain = chain[:len(chain)-1]
	}
	half(all)
	back := make([]drawing.Point, len(all))
	for i, q := range all {
		back[len(all)-1-i] = q
	}
	half(back)
	return chain
}

// wetBars draws what comes back in each state of the pavilion.
func wetBars(w words, wet []Condition) figure {
	const barHeight, gap, nameWidth, endWidth = 5.2, 1.8, 46.0, 24.0
	p := &drawing.Page{Width: contentWidth}
	y := 0.0
	long := contentWidth - nameWidth - endWidth
	for _, c := range wet {
		p.Write(body(), black(), drawing.Left, pt(0, y+barHeight/2+body().Height()/2), w.say("wet."+c.Name))
		p.Rectangle(drawing.Style{Fill: drawing.Grey(0xee)}, pt(nameWidth, y), long, barHeight)
		v := max(0, c.Column.Ledger.Returned) * long
		p.Rectangle(drawing.Style{Fill: shareInk(trace.Returned)}, pt(nameWidth, y), v, barHeight)
		figures := w.number(100*c.Column.Ledger.Returned, 1) + " ± " + w.up(100*c.Column.StandardError.Returned, 1)
		p.Write(body(), black(), drawing.Right, pt(contentWidth, y+barHeight/2+body().Height()/2), figures)
		y += barHeight + gap
	}
	p.Height = y
	return figure{p, w.say("wet")}
}
