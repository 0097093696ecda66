package chart

import (
	"math"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/trace/tune"
)

// FrontChart says what a chart of a trade-off shows beside it.
type FrontChart struct {
	Title string
	Lines []string
	Aims  [2]string    // what the two goals are
	Mark  int          // number of the point that is filled, from 1; 0 for none
	Edge  float64      // of the square, mm; 0 means 120
	In    *words.Words // the language of what the chart itself writes; nil for English
}

// Front draws a trade-off: the stones that no other beats in both goals, with their
// standard errors, and the plan as it stands.
func Front(f *tune.Front, o FrontChart) *drawing.Page {
	edge := edgeOr(o.Edge)
	width := chartMargin + chartLeft + edge + chartMargin
	var lines []string
	for _, l := range o.Lines {
		lines = append(lines, bodyType.Wrap(l, width-2*chartMargin)...)
	}
	p, top := frontPage(len(lines), edge)
	y := chartMargin + titleType.Height()
	p.Write(titleType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, titleType.Cut(o.Title, width-2*chartMargin))
	y += bodyType.Leading() + 1
	for _, l := range lines {
		p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, l)
		y += bodyType.Leading()
	}
	b := frontBox(f, top, edge)
	b.in = o.In
	b.axes(p, tune.Variable{Name: o.Aims[0]}, tune.Variable{Name: o.Aims[1]})
	var line tune.Line
	for _, t := range f.Points {
		line = append(line, [2]float64{t.Measures[0], t.Measures[1]})
	}
	b.line(p, drawing.Style{Stroke: pale, Width: 0.2}, line)
	for i, t := range f.Points {
		x, y := t.Measures[0], t.Measures[1]
		fill := white
		if i+1 == o.Mark {
			fill = black
		}
		b.line(p, drawing.Style{Stroke: black, Width: 0.2}, tune.Line{{x - t.MeasureErrors[0], y}, {x + t.MeasureErrors[0], y}})
		b.line(p, drawing.Style{Stroke: black, Width: 0.2}, tune.Line{{x, y - t.MeasureErrors[1]}, {x, y + t.MeasureErrors[1]}})
		p.Circle(drawing.Style{Fill: fill, Stroke: black, Width: 0.3}, b.place(x, y), 0.9)
	}
	if f.Start.Seen {
		b.cross(p, b.place(f.Start.Measures[0], f.Start.Measures[1]))
	}
	p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: top + edge + 14},
		o.In.Say("Cross: as it stands. Circles: no other stone seen beats them in both. Bars: standard errors."))
	return p
}

// frontBox places the trade-off below top.
func frontBox(f *tune.Front, top, edge float64) box {
	all := f.Points
	if f.Start.Seen {
		all = append([]tune.Trial{f.Start}, all...)
	}
	return box{at: drawing.Point{X: chartMargin + chartLeft, Y: top}, edge: edge, x: around(all, 0), y: around(all, 1)}
}

// FrontPoint returns the number of the point of a trade-off nearest to a place of its chart
// of that edge and without lines under the title, in shares of the page from its upper left corner; ok is
// false far from all.
func FrontPoint(f *tune.Front, edge, x, y float64) (point int, ok bool) {
	edge = edgeOr(edge)
	p, top := frontPage(0, edge)
	b := frontBox(f, top, edge)
	const reach = 6.0 // mm
	nearest := reach
	for i, t := range f.Points {
		q := b.place(t.Measures[0], t.Measures[1])
		if d := math.Hypot(q.X-x*p.Width, q.Y-y*p.Height); d < nearest {
			point, nearest, ok = i, d, true
		}
	}
	return point, ok
}

// frontPage returns an empty page with so many lines under the title, and where the chart
// begins on it.
func frontPage(lines int, edge float64) (p *drawing.Page, top float64) {
	top = chartMargin + titleType.Leading() + float64(lines)*bodyType.Leading() + 6
	return &drawing.Page{Width: chartMargin + chartLeft + edge + chartMargin,
		Height: top + edge + 14 + bodyType.Leading() + chartMargin}, top
}

// around returns the axis that holds a measure of all trials with a little room.
func around(all []tune.Trial, aim int) axis {
	low, high := math.Inf(1), math.Inf(-1)
	for _, t := range all {
		low, high = min(low, t.Measures[aim]-t.MeasureErrors[aim]), max(high, t.Measures[aim]+t.MeasureErrors[aim])
	}
	if !(low < high) {
		return axis{low - 0.01, low + 0.01}
	}
	room := 0.06 * (high - low)
	return axis{low - room, high + room}
}
