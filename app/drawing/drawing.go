// Package drawing holds pages of lines, text and pictures, and puts the same page
// out as PDF, as SVG and as a raster picture. The page itself is the record of what
// was drawn: tests read its marks.
//
// Frame. Lengths are millimetres on paper, the origin is the page's upper left
// corner, +x runs right and +y down. Sizes of type are points (1/72 inch).
package drawing

import (
	"image"
	"image/color"
)

// Point is a place on a page, mm.
type Point struct{ X, Y float64 }

// Ink is an opaque colour; the zero Ink draws nothing.
type Ink color.RGBA

// Grey returns the neutral ink of a level, 0 black to 255 white.
func Grey(level uint8) Ink { return Ink{R: level, G: level, B: level, A: 255} }

// none reports whether the ink draws nothing.
func (i Ink) none() bool { return i.A == 0 }

// Page is one sheet of paper with what is drawn on it, in the order of drawing.
type Page struct {
	Width, Height float64 // mm
	Bookmark      string  // the page's entry in the outline of a PDF; empty for none
	Level         int     // of the bookmark, 0 the outermost
	Marks         []Mark
}

// Mark is one thing drawn: a *Path, *Circle, *Text or *Picture.
type Mark interface{ paint(painter) }

// painter is what an output must be able to draw.
type painter interface {
	path(*Path)
	circle(*Circle)
	text(*Text)
	picture(*Picture)
}

// Path is one or more lines or polygons in one style.
type Path struct {
	Rings  [][]Point
	Closed bool // each ring returns to its first point
	Style
}

// Style is how lines and areas look.
type Style struct {
	Fill   Ink
	Stroke Ink
	Width  float64   // of the stroke, mm
	Dash   []float64 // lengths drawn and left out in turn, mm; nil for a solid line
}

// Circle is a circle.
type Circle struct {
	Centre Point
	Radius float64 // mm
	Style
}

// Align says which part of a text stands at its place.
type Align int

// The alignments of a text.
const (
	Left Align = iota
	Middle
	Right
)

// Type is a size and weight of type.
type Type struct {
	Size float64 // points
	Bold bool
}

// Text is one line of text.
type Text struct {
	At    Point // on the baseline
	Type  Type
	Align Align
	Ink   Ink
	Words string // made of letters that the typeface holds
}

// Picture is a raster picture.
type Picture struct {
	At            Point   // upper left corner
	Width, Height float64 // mm
	Image         image.Image
}

func (m *Path) paint(p painter)    { p.path(m) }
func (m *Circle) paint(p painter)  { p.circle(m) }
func (m *Text) paint(p painter)    { p.text(m) }
func (m *Picture) paint(p painter) { p.picture(m) }

func (p *Page) add(m Mark) { p.Marks = append(p.Marks, m) }

// Line draws a line through the points.
func (p *Page) Line(s Style, points ...Point) {
	s.Fill = Ink{}
	p.add(&Path{Rings: [][]Point{points}, Style: s})
}

// Polygon draws a closed polygon.
func (p *Page) Polygon(s Style, points ...Point) {
	p.add(&Path{Rings: [][]Point{points}, Closed: true, Style: s})
}

// Polygons draws several closed polygons in one style.
func (p *Page) Polygons(s Style, rings [][]Point) {
	p.add(&Path{Rings: rings, Closed: true, Style: s})
}

// Rectangle draws a rectangle from its upper left corner.
func (p *Page) Rectangle(s Style, at Point, width, height float64) {
	p.Polygon(s, at, Point{at.X + width, at.Y}, Point{at.X + width, at.Y + height}, Point{at.X, at.Y + height})
}

// Circle draws a circle.
func (p *Page) Circle(s Style, centre Point, radius float64) {
	p.add(&Circle{Centre: centre, Radius: radius, Style: s})
}

// Write sets one line of text on the baseline at a point and returns its width in
// mm. Letters that the typeface lacks are set as Missing.
func (p *Page) Write(t Type, ink Ink, align Align, at Point, words string) float64 {
	words, _ = Clean(words)
	if words == "" {
		return 0
	}
	p.add(&Text{At: at, Type: t, Align: align, Ink: ink, Words: words})
	return t.Width(words)
}

// Place sets a raster picture.
func (p *Page) Place(img image.Image, at Point, width, height float64) {
	p.add(&Picture{At: at, Width: width, Height: height, Image: img})
}

// paintAll draws the page with a painter.
func (p *Page) paintAll(to painter) {
	for _, m := range p.Marks {
		m.paint(to)
	}
}

// left returns the x of the text's left end.
func (m *Text) left() float64 {
	switch m.Align {
	case Middle:
		return m.At.X - m.Type.Width(m.Words)/2
	case Right:
		return m.At.X - m.Type.Width(m.Words)
	default:
		return m.At.X
	}
}
