// Package chart draws what tuning finds: the goal over two angles, trade-offs between two
// goals, and how a number spreads over many stones. Each chart is one page of the
// drawing package, for the screen, for paper and for files.
package chart

import (
	"image"
	"math"
	"strconv"

	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/app/words"
	"pavilight/trace/tune"
)

// Point is a place in a chart with a name.
type Point struct {
	X, Y  float64
	Words string
}

// FieldChart says what a chart of a field shows beside the field.
type FieldChart struct {
	Title  string
	Lines  []string     // under the title: stone, surroundings, goal
	Goal   string       // what the score is, beside the scale
	Points []Point      // further places, numbered and named under the chart
	In     *words.Words // the language of what the chart itself writes; nil for English
	Edge   float64      // of the square, mm; 0 means 120. Smaller ones leave the words larger on a small screen
}

// edgeOr returns the edge of a chart's square, mm.
func edgeOr(edge float64) float64 {
	if edge > 0 {
		return edge
	}
	return chartEdge
}

// Measures of a chart, mm.
const (
	chartEdge   = 120.0
	chartMargin = 12.0
	chartLeft   = 20.0 // room for the numbers of the upright axis
	scaleGap    = 6.0
	scaleWidth  = 5.0
	scaleRoom   = 30.0
)

var (
	titleType = drawing.Type{Size: 13, Bold: true}
	bodyType  = drawing.Type{Size: 9}
	smallType = drawing.Type{Size: 7.5}
	black     = drawing.Grey(0x22)
	pale      = drawing.Grey(0x60)
	white     = drawing.Grey(0xff)
)

// contourLines is about how many contours a field gets.
const contourLines = 8

// Field draws a field: every cell in its colour, contours at round scores, the region
// within 1 % of the best outlined, the ridge, the plan as it stands and the best. Cells
// without a stone that fits stay grey, cells not tried yet show a coarser one.
func Field(f *tune.Field, o FieldChart) *drawing.Page {
	lines, legend, b, p := fieldLayout(f, o)
	top := b.at.Y
	width := p.Width
	y := chartMargin + titleType.Height()
	p.Write(titleType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, titleType.Cut(o.Title, width-2*chartMargin))
	y += bodyType.Leading() + 1
	for _, l := range lines {
		p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, l)
		y += bodyType.Leading()
	}

	// Cells are drawn about their grid points, so the picture reaches half a cell beyond.
	low, high := scoreRange(f)
	colours := picture.Cividis()
	p.Place(cells(f, colours, low, high), b.at, b.edge, b.edge)
	b.axes(p, f.X, f.Y)

	levels := Levels(low, high, contourLines)
	for _, level := range levels {
		for _, line := range f.Contours(level) {
			b.line(p, drawing.Style{Stroke: white, Width: 0.2}, line)
		}
	}
	if best, ok := f.Best(); ok {
		top := f.Trials[best].Score
		for _, line := range f.Contours(top - tune.NearBest*math.Abs(top)) {
			b.line(p, drawing.Style{Stroke: black, Width: 0.35}, line)
		}
		var ridge tune.Line
		for _, r := range f.Ridge().Points {
			ridge = append(ridge, [2]float64{r.X, r.Y})
		}
		b.line(p, drawing.Style{Stroke: black, Width: 0.3, Dash: []float64{1.2, 0.8}}, ridge)
		x, y := f.Place(best%f.Columns, best/f.Columns)
		at := b.place(x, y)
		p.Circle(drawing.Style{Fill: white, Stroke: black, Width: 0.3}, at, 1.3)
	}
	if len(f.Now.Values) == 2 && b.holds(f.Now.Values[0], f.Now.Values[1]) {
		b.cross(p, b.place(f.Now.Values[0], f.Now.Values[1]))
	}
	b.points(p, o.Points)
	b.scale(p, colours, low, high, o.Goal)

	y = top + b.edge + 14
	for _, l := range legend {
		p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, l)
		y += bodyType.Leading()
	}
	return p
}

// fieldLayout breaks the words of a field's chart into lines, and places the field on an
// empty page.
func fieldLayout(f *tune.Field, o FieldChart) (lines, legend []string, b box, p *drawing.Page) {
	edge := edgeOr(o.Edge)
	width := chartMargin + chartLeft + edge + scaleGap + scaleWidth + scaleRoom
	for _, l := range o.Lines {
		lines = append(lines, bodyType.Wrap(l, width-2*chartMargin)...)
	}
	for _, l := range fieldLegend(f, o) {
		legend = append(legend, bodyType.Wrap(l, width-2*chartMargin)...)
	}
	top := chartMargin + titleType.Leading() + float64(len(lines))*bodyType.Leading() + 9
	b = box{at: drawing.Point{X: chartMargin + chartLeft, Y: top}, edge: edge, x: axisOf(f.X, f.Columns), y: axisOf(f.Y, f.Rows), in: o.In}
	return lines, legend, b, &drawing.Page{Width: width, Height: top + edge + 16 + float64(len(legend))*bodyType.Leading() + chartMargin}
}

// FieldCell returns the cell of a field at a place of its chart, in shares of the page from
// its upper left corner; ok is false beside the field.
func FieldCell(f *tune.Field, o FieldChart, x, y float64) (column, row int, ok bool) {
	_, _, b, p := fieldLayout(f, o)
	right, up := (x*p.Width-b.at.X)/b.edge, (b.at.Y+b.edge-y*p.Height)/b.edge
	column, row = int(math.Floor(right*float64(f.Columns))), int(math.Floor(up*float64(f.Rows)))
	return column, row, column >= 0 && column < f.Columns && row >= 0 && row < f.Rows
}

// points marks places by a dot with its number; places that lie together share one label.
func (b *box) points(p *drawing.Page, points []Point) {
	const together = 3 // mm
	var at []drawing.Point
	var labels []string
next:
	for i, q := range points {
		if !b.holds(q.X, q.Y) {
			continue
		}
		dot := b.place(q.X, q.Y)
		p.Circle(drawing.Style{Fill: white, Stroke: black, Width: 0.25}, dot, 0.7)
		for k, o := range at {
			if math.Hypot(o.X-dot.X, o.Y-dot.Y) < together {
				labels[k] += " " + strconv.Itoa(i+1)
				continue next
			}
		}
		at, labels = append(at, dot), append(labels, strconv.Itoa(i+1))
	}
	for k, words := range labels {
		width, tall := smallType.Width(words)+1.2, 3.2
		left := at[k].X - width - 2.4
		if left < b.at.X {
			left = at[k].X + 2.4
		}
		p.Rectangle(drawing.Style{Fill: white, Stroke: black, Width: 0.15}, drawing.Point{X: left, Y: at[k].Y - tall/2}, width, tall)
		p.Write(smallType, black, drawing.Left, drawing.Point{X: left + 0.6, Y: at[k].Y + smallType.Height()/2 - 0.25}, words)
	}
}

// fieldLegend says what is drawn, and names the points.
func fieldLegend(f *tune.Field, o FieldChart) []string {
	lines := []string{o.In.Say("Cross: as it stands. Circle: the best. Black line: within 1 %% of the best. Dashes: the ridge. White lines: equal %s. "+
		"Light grey: no such stone can be cut, or it breaks a limit.", o.Goal)}
	if f.Done < 1 {
		lines = append(lines, o.In.Say("%d %% of the cells are seen so far.", int(100*f.Done)))
	}
	for i, q := range o.Points {
		point := strconv.Itoa(i+1) + "  " + q.Words
		if q.X < f.X.Low || q.X > f.X.High || q.Y < f.Y.Low || q.Y > f.Y.High {
			point = o.In.Say("%s (outside the field)", point)
		}
		lines = append(lines, point)
	}
	return lines
}

// scoreRange returns the least and the greatest score of the field, never equal.
func scoreRange(f *tune.Field) (low, high float64) {
	low, high = math.Inf(1), math.Inf(-1)
	for i := range f.Trials {
		if t := &f.Trials[i]; t.Fit {
			low, high = min(low, t.Score), max(high, t.Score)
		}
	}
	if low > high {
		return 0, 1
	}
	if high-low < 1e-9 {
		return low - 0.5e-3, high + 0.5e-3
	}
	return low, high
}

// cells paints one pixel a cell, row 0 below.
func cells(f *tune.Field, colours *picture.ColourMap, low, high float64) image.Image {
	const enlarged = 8 // so that no renderer blurs cells into each other
	img := image.NewRGBA(image.Rect(0, 0, f.Columns*enlarged, f.Rows*enlarged))
	for i, v := range f.Filled() {
		c := colours.At((v - low) / (high - low))
		x, y := i%f.Columns*enlarged, (f.Rows-1-i/f.Columns)*enlarged
		for dy := range enlarged {
			for dx := range enlarged {
				img.SetRGBA(x+dx, y+dy, c)
			}
		}
	}
	return img
}

// scale draws the colours with their scores, upright at the right.
func (b *box) scale(p *drawing.Page, colours *picture.ColourMap, low, high float64, goal string) {
	at := drawing.Point{X: b.at.X + b.edge + scaleGap, Y: b.at.Y}
	img := image.NewRGBA(image.Rect(0, 0, 1, 256))
	for i := range 256 {
		img.SetRGBA(0, 255-i, colours.At(float64(i)/255))
	}
	p.Place(img, at, scaleWidth, b.edge)
	for _, v := range Levels(low, high, contourLines) {
		y := at.Y + b.edge*(high-v)/(high-low)
		p.Line(drawing.Style{Stroke: black, Width: 0.2}, drawing.Point{X: at.X + scaleWidth, Y: y}, drawing.Point{X: at.X + scaleWidth + 1, Y: y})
		p.Write(smallType, black, drawing.Left, drawing.Point{X: at.X + scaleWidth + 1.6, Y: y + smallType.Height()/2 - 0.3}, number(b.in, v))
	}
	p.Write(smallType, pale, drawing.Left, drawing.Point{X: at.X, Y: at.Y - 1.5}, smallType.Cut(goal, scaleWidth+scaleRoom))
}
