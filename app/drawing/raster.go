package drawing

import (
	"image"
	"image/color"
	"image/draw"
	"math"

	xdraw "golang.org/x/image/draw"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	"golang.org/x/image/vector"
)

// Raster returns the page as an opaque picture on white paper with the given number
// of pixels to the millimetre.
func (p *Page) Raster(perMM float64) *image.RGBA {
	size := image.Rect(0, 0, int(math.Round(p.Width*perMM)), int(math.Round(p.Height*perMM)))
	r := &rasterPainter{dst: image.NewRGBA(size), perMM: perMM}
	draw.Draw(r.dst, size, image.White, image.Point{}, draw.Src)
	p.paintAll(r)
	return r.dst
}

// rasterPainter draws on a picture.
type rasterPainter struct {
	dst    *image.RGBA
	perMM  float64
	shape  [][]Point // polygons in pixels, all with the same sense of turning
	buffer sfnt.Buffer
	vector vector.Rasterizer
}

// flush fills the gathered shape with an ink.
func (r *rasterPainter) flush(ink Ink) {
	low, high := Point{math.Inf(1), math.Inf(1)}, Point{math.Inf(-1), math.Inf(-1)}
	for _, ring := range r.shape {
		for _, p := range ring {
			low = Point{min(low.X, p.X), min(low.Y, p.Y)}
			high = Point{max(high.X, p.X), max(high.Y, p.Y)}
		}
	}
	box := image.Rect(int(math.Floor(max(low.X, -1))), int(math.Floor(max(low.Y, -1))),
		int(math.Ceil(min(high.X, 1e5)))+1, int(math.Ceil(min(high.Y, 1e5)))+1)
	box = box.Intersect(r.dst.Rect) // the rasteriser cuts off what reaches beyond its frame
	if len(r.shape) > 0 && !box.Empty() {
		r.vector.Reset(box.Dx(), box.Dy())
		at := func(p Point) (float32, float32) {
			return float32(p.X - float64(box.Min.X)), float32(p.Y - float64(box.Min.Y))
		}
		for _, ring := range r.shape {
			for i, p := range ring {
				if x, y := at(p); i == 0 {
					r.vector.MoveTo(x, y)
				} else {
					r.vector.LineTo(x, y)
				}
			}
			r.vector.ClosePath()
		}
		r.vector.Draw(r.dst, box, image.NewUniform(color.RGBA(ink)), image.Point{})
	}
	r.shape = r.shape[:0]
}

func (r *rasterPainter) pixels(p Point) Point { return Point{p.X * r.perMM, p.Y * r.perMM} }

func (r *rasterPainter) path(m *Path) {
	var rings [][]Point
	for _, ring := range m.Rings {
		var moved []Point
		for _, p := range ring {
			moved = append(moved, r.pixels(p))
		}
		rings = append(rings, moved)
	}
	r.style(&m.Style, rings, m.Closed)
}

func (r *rasterPainter) circle(m *Circle) {
	r.style(&m.Style, [][]Point{round(r.pixels(m.Centre), m.Radius*r.perMM)}, true)
}

// style fills and strokes rings in pixels.
func (r *rasterPainter) style(s *Style, rings [][]Point, closed bool) {
	if !s.Fill.none() {
		for _, ring := range rings {
			r.shape = append(r.shape, ring)
		}
		r.flush(s.Fill)
	}
	if s.Stroke.none() || s.Width <= 0 {
		return
	}
	half := s.Width * r.perMM / 2
	for _, ring := range rings {
		for _, line := range dashed(ring, closed, s.Dash, r.perMM) {
			for i, p := range line {
				r.shape = append(r.shape, round(p, half))
				if i > 0 {
					r.bar(line[i-1], p, half)
				}
			}
		}
	}
	r.flush(s.Stroke)
}

// bar adds the area within half of the line from a to b.
func (r *rasterPainter) bar(a, b Point, half float64) {
	l := math.Hypot(b.X-a.X, b.Y-a.Y)
	if l == 0 {
		return
	}
	x, y := (b.X-a.X)/l*half, (b.Y-a.Y)/l*half
	r.shape = append(r.shape, []Point{{a.X + y, a.Y - x}, {b.X + y, b.Y - x}, {b.X - y, b.Y + x}, {a.X - y, a.Y + x}})
}

// round returns a circle as a polygon that turns like the bars do, to a fiftieth of a
// pixel.
func round(c Point, radius float64) []Point {
	n := max(8, int(math.Ceil(math.Pi/math.Acos(1-min(1, 0.02/max(radius, 0.02))))))
	ring := make([]Point, n)
	for i := range ring {
		sin, cos := math.Sincos(2 * math.Pi * float64(i) / float64(n))
		ring[i] = Point{c.X + radius*cos, c.Y + radius*sin}
	}
	return ring
}

// dashed cuts a ring into the lines to be drawn.
func dashed(ring []Point, closed bool, dash []float64, perMM float64) [][]Point {
	if closed && len(ring) > 0 {
		ring = append(ring[:len(ring):len(ring)], ring[0])
	}
	total := 0.0
	for _, d := range dash {
		total += d
	}
	if total <= 0 {
		return [][]Point{ring}
	}
	var lines [][]Point
	k, left := 0, dash[0]*perMM
	var line []Point
	for i := 1; i < len(ring); i++ {
		a, b := ring[i-1], ring[i]
		l := math.Hypot(b.X-a.X, b.Y-a.Y)
		for done := 0.0; done < l; {
			at := func(d float64) Point { return Point{a.X + (b.X-a.X)*d/l, a.Y + (b.Y-a.Y)*d/l} }
			step := min(left, l-done)
			if k%2 == 0 {
				if len(line) == 0 {
					line = append(line, at(done))
				}
				line = append(line, at(done+step))
			}
			done, left = done+step, left-step
			if left <= 0 {
				if len(line) > 0 {
					lines, line = append(lines, line), nil
				}
				k++
				left = max(dash[k%len(dash)]*perMM, 1e-6)
			}
		}
	}
	if len(line) > 0 {
		lines = append(lines, line)
	}
	return lines
}

func (r *rasterPainter) text(m *Text) {
	f := m.Type.face()
	at := r.pixels(Point{m.left(), m.At.Y})
	size := m.Type.Size * MMPerPoint * r.perMM
	for _, letter := range m.Words {
		g, err := f.font.GlyphIndex(&r.buffer, letter)
		if err != nil {
			continue
		}
		// The outline is had in font units and scaled here, so that no letter is rounded.
		segments, err := f.font.LoadGlyph(&r.buffer, g, f.em, nil)
		if err == nil {
			r.outline(segments, at, size/float64(f.em))
		}
		at.X += f.advances[letter] * size
	}
	r.flush(m.Ink)
}

// outline adds a letter.
func (r *rasterPainter) outline(segments sfnt.Segments, at Point, scale float64) {
	place := func(p fixed.Point26_6) Point { return Point{at.X + float64(p.X)*scale, at.Y + float64(p.Y)*scale} }
	var ring []Point
	for _, s := range segments {
		switch s.Op {
		case sfnt.SegmentOpMoveTo:
			if len(ring) > 0 {
				r.shape = append(r.shape, ring)
			}
			ring = []Point{place(s.Args[0])}
		case sfnt.SegmentOpLineTo:
			ring = append(ring, place(s.Args[0]))
		case sfnt.SegmentOpQuadTo:
			a, b, c := ring[len(ring)-1], place(s.Args[0]), place(s.Args[1])
			const pieces = 6
			for i := 1; i <= pieces; i++ {
				t := float64(i) / pieces
				u := 1 - t
				ring = append(ring, Point{u*u*a.X + 2*u*t*b.X + t*t*c.X, u*u*a.Y + 2*u*t*b.Y + t*t*c.Y})
			}
		case sfnt.SegmentOpCubeTo: // TrueType outlines have none
			ring = append(ring, place(s.Args[2]))
		}
	}
	if len(ring) > 0 {
		r.shape = append(r.shape, ring)
	}
}

func (r *rasterPainter) picture(m *Picture) {
	a, b := r.pixels(m.At), r.pixels(Point{m.At.X + m.Width, m.At.Y + m.Height})
	box := image.Rect(int(math.Round(a.X)), int(math.Round(a.Y)), int(math.Round(b.X)), int(math.Round(b.Y)))
	var scaler xdraw.Scaler = xdraw.ApproxBiLinear
	if box.Dx() >= m.Image.Bounds().Dx() {
		scaler = xdraw.NearestNeighbor // as PDF viewers show a picture: its pixels grow
	}
	scaler.Scale(r.dst, box, m.Image, m.Image.Bounds(), draw.Over, nil)
}
