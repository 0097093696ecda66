package picture

import (
	"errors"
	"image"
	"image/draw"
	"strconv"
)

// Plate is one map with what has to stand beside it.
type Plate struct {
	Title   string    // the quantity: "Light return"
	Medium  string    // the surrounding: "in water, 1.333"
	Legend  string    // what the scale counts: "share of the viewing ray"
	Lines   []string  // numbers under the map; long ones are wrapped
	Field   []float32 // Pixels × Pixels values from 0 to 1, NaN outside the outline
	Pixels  int       // of each edge of the field
	Colours *ColourMap
}

// The levels of grey of paper and inks.
const (
	paper = 0xf4
	ink   = 0x22
	pale  = 0x60
)

// Measures of a picture, in pixels.
const (
	margin     = 18
	leastMap   = 300 // a smaller map is enlarged by a whole factor to at least this
	scaleWidth = 16
	scaleRoom  = 64 // scale, its numbers and the gap to the map
)

var errField = errors.New("picture: a field must be a square of at least one pixel")

// edge returns how many pixels of the picture the map takes: a whole multiple of
// its own, so that no pixel of it is wider than another.
func (p *Plate) edge() int {
	if p.Pixels >= leastMap {
		return p.Pixels
	}
	return p.Pixels * ((leastMap + p.Pixels - 1) / p.Pixels)
}

func (p *Plate) valid() bool { return p.Pixels > 0 && len(p.Field) == p.Pixels*p.Pixels }

// Single returns the picture of one map: title, medium, map, scale from 0 to 1 with
// its legend, numbers.
func Single(p Plate) (*image.RGBA, error) {
	if !p.valid() {
		return nil, errField
	}
	edge := p.edge()
	const head = margin + titleSize + lineStep + 14
	width := edge + scaleRoom
	l, err := newLetters()
	if err != nil {
		return nil, err
	}
	var lines []string
	for _, line := range p.Lines {
		lines = append(lines, wrap(l.body, line, width)...)
	}
	legend := wrap(l.body, p.Legend, width)
	dst := blank(2*margin+width, head+edge+12+lineStep*(len(lines)+len(legend))+margin)
	l.dst = dst
	l.write(l.title, margin, margin+titleSize-3, left, ink, cut(l.title, p.Title, width))
	l.write(l.body, margin, margin+titleSize+lineStep-2, left, ink, cut(l.body, p.Medium, width))
	p.paint(dst, image.Pt(margin, head))
	l.scale(p.Colours, margin+edge+14, head, edge)
	y := head + edge + 12 + bodySize
	for i, line := range append(lines, legend...) {
		level := uint8(ink)
		if i >= len(lines) {
			level = pale
		}
		l.write(l.body, margin, y, left, level, line)
		y += lineStep
	}
	return dst, nil
}

// paint paints the map with its upper left corner at the given place.
func (p *Plate) paint(dst *image.RGBA, at image.Point) {
	edge := p.edge()
	part := dst.SubImage(image.Rect(at.X, at.Y, at.X+edge, at.Y+edge)).(*image.RGBA)
	Paint(part, p.Field, p.Pixels, p.Colours)
}

// scale draws the colour map upright from 0 below to 1 above, with its numbers.
func (l *letters) scale(cm *ColourMap, x, y, height int) {
	for row := range height {
		c := cm.At(1 - (float64(row)+0.5)/float64(height))
		draw.Draw(l.dst, image.Rect(x, y+row, x+scaleWidth, y+row+1), image.NewUniform(c), image.Point{}, draw.Src)
	}
	const ticks = 4
	for i := range ticks + 1 {
		v := float64(i) / ticks
		at := y + int((1-v)*float64(height-1)+0.5)
		draw.Draw(l.dst, image.Rect(x+scaleWidth, at, x+scaleWidth+4, at+1), image.NewUniform(grey(ink)), image.Point{}, draw.Src)
		label := min(max(at+5, y+bodySize-4), y+height)
		l.write(l.body, x+scaleWidth+7, label, left, ink, strconv.FormatFloat(v, 'f', -1, 64))
	}
}

func blank(width, height int) *image.RGBA {
	dst := image.NewRGBA(image.Rect(0, 0, width, height))
	draw.Draw(dst, dst.Rect, image.NewUniform(grey(paper)), image.Point{}, draw.Src)
	return dst
}
