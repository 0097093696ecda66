package chart

import (
	"math"
	"strconv"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/trace/tune"
)

// axis is a range of values along one side of a chart.
type axis struct{ low, high float64 }

// axisOf returns the axis that holds a variable's grid with half a cell on either side.
func axisOf(v tune.Variable, cells int) axis {
	half := (v.High - v.Low) / float64(cells-1) / 2
	return axis{v.Low - half, v.High + half}
}

func (a axis) share(v float64) float64 { return (v - a.low) / (a.high - a.low) }

// box is the square in which a chart is drawn.
type box struct {
	at   drawing.Point // upper left corner
	edge float64       // mm
	x, y axis
	in   *words.Words // the language of what is written
}

func (b *box) place(x, y float64) drawing.Point {
	return drawing.Point{X: b.at.X + b.edge*b.x.share(x), Y: b.at.Y + b.edge*(1-b.y.share(y))}
}

func (b *box) holds(x, y float64) bool {
	return x >= b.x.low && x <= b.x.high && y >= b.y.low && y <= b.y.high
}

func (b *box) line(p *drawing.Page, s drawing.Style, line [][2]float64) {
	points := make([]drawing.Point, len(line))
	for i, q := range line {
		points[i] = b.place(q[0], q[1])
	}
	if len(points) > 1 {
		p.Line(s, points...)
	}
}

// cross marks a place by a cross that shows on light and on dark.
func (b *box) cross(p *drawing.Page, at drawing.Point) {
	const arm = 2
	for _, s := range []drawing.Style{{Stroke: white, Width: 0.9}, {Stroke: black, Width: 0.4}} {
		p.Line(s, drawing.Point{X: at.X - arm, Y: at.Y}, drawing.Point{X: at.X + arm, Y: at.Y})
		p.Line(s, drawing.Point{X: at.X, Y: at.Y - arm}, drawing.Point{X: at.X, Y: at.Y + arm})
	}
}

// axes draws the frame, ticks at round values, and the variables' names.
func (b *box) axes(p *drawing.Page, x, y tune.Variable) {
	p.Rectangle(drawing.Style{Stroke: black, Width: 0.25}, b.at, b.edge, b.edge)
	const ticks = 6
	for _, v := range Levels(b.x.low, b.x.high, ticks) {
		at := drawing.Point{X: b.at.X + b.edge*b.x.share(v), Y: b.at.Y + b.edge}
		p.Line(drawing.Style{Stroke: black, Width: 0.2}, at, drawing.Point{X: at.X, Y: at.Y + 1})
		p.Write(smallType, black, drawing.Middle, drawing.Point{X: at.X, Y: at.Y + 1.6 + smallType.Height()}, number(b.in, v))
	}
	for _, v := range Levels(b.y.low, b.y.high, ticks) {
		at := drawing.Point{X: b.at.X, Y: b.at.Y + b.edge*(1-b.y.share(v))}
		p.Line(drawing.Style{Stroke: black, Width: 0.2}, at, drawing.Point{X: at.X - 1, Y: at.Y})
		p.Write(smallType, black, drawing.Right, drawing.Point{X: at.X - 1.6, Y: at.Y + smallType.Height()/2 - 0.3}, number(b.in, v))
	}
	p.Write(bodyType, black, drawing.Middle, drawing.Point{X: b.at.X + b.edge/2, Y: b.at.Y + b.edge + 4.5 + bodyType.Height()}, named(b.in, x))
	p.Write(bodyType, black, drawing.Left, drawing.Point{X: b.at.X - chartLeft, Y: b.at.Y - 1.5}, named(b.in, y))
}

// named is a variable's name with its unit.
func named(in *words.Words, v tune.Variable) string {
	if v.Unit == "" {
		return v.Name
	}
	return v.Name + ", " + in.Among([]words.Key{"degrees"}, v.Unit)
}

// number writes a number in as few digits as a tick needs.
func number(in *words.Words, v float64) string {
	return in.Decimal(strconv.FormatFloat(v, 'f', -1, 64))
}

// Levels returns round numbers from low to high, at most so many and about half as many
// or more: multiples of 1, 2 or 5 times a power of ten.
func Levels(low, high float64, most int) []float64 {
	if !(high > low) || math.IsInf(high-low, 0) || most < 1 {
		return nil
	}
	step := math.Pow(10, math.Floor(math.Log10((high-low)/float64(most))))
	for _, by := range []float64{2, 2.5, 2} { // 1, 2, 5, 10
		if (high-low)/step <= float64(most) {
			break
		}
		step *= by
	}
	digits := max(0, -int(math.Floor(math.Log10(step)+1e-9)))
	var levels []float64
	for k := math.Ceil(low/step - 1e-9); k*step <= high+1e-9*step; k++ {
		v, err := strconv.ParseFloat(strconv.FormatFloat(k*step, 'f', digits, 64), 64)
		if err == nil {
			levels = append(levels, v+0) // never -0
		}
	}
	return levels
}
