package chart

import (
	"math"
	"slices"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/trace/tune"
)

// Spread draws how often stones cut with errors come to which value: bars, the plan as it
// stands as a line, and the values below which 5, 50 and 95 of 100 stones lie. What the
// chart itself writes is in a language, English for nil.
func Spread(in *words.Words, title string, about []string, name string, values []float64, s tune.Spread) *drawing.Page {
	const high = 60.0
	width := chartMargin + chartLeft + chartEdge + chartMargin
	var lines []string
	for _, l := range about {
		lines = append(lines, bodyType.Wrap(l, width-2*chartMargin)...)
	}
	top := chartMargin + titleType.Leading() + float64(len(lines))*bodyType.Leading() + 6
	p := &drawing.Page{Width: width, Height: top + high + 14 + bodyType.Leading() + chartMargin}
	y := chartMargin + titleType.Height()
	p.Write(titleType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, titleType.Cut(title, width-2*chartMargin))
	y += bodyType.Leading() + 1
	for _, l := range lines {
		p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: y}, l)
		y += bodyType.Leading()
	}
	if len(values) == 0 {
		return p
	}
	least, most := min(slices.Min(values), s.Plan), max(slices.Max(values), s.Plan)
	if least == most {
		least, most = least-0.5e-3, most+0.5e-3
	}
	bins := max(5, int(math.Sqrt(float64(len(values)))))
	counts := make([]float64, bins)
	for _, v := range values {
		counts[min(bins-1, int(float64(bins)*(v-least)/(most-least)))]++
	}
	at := func(v float64) float64 { return chartMargin + chartLeft + chartEdge*(v-least)/(most-least) }
	base := top + high
	for i, n := range counts {
		x := chartMargin + chartLeft + chartEdge*float64(i)/float64(bins)
		tall := high * n / slices.Max(counts)
		p.Rectangle(drawing.Style{Fill: drawing.Grey(0xb0), Stroke: white, Width: 0.2}, drawing.Point{X: x, Y: base - tall}, chartEdge/float64(bins), tall)
	}
	p.Line(drawing.Style{Stroke: black, Width: 0.25}, drawing.Point{X: at(least), Y: base}, drawing.Point{X: at(most), Y: base})
	for _, v := range Levels(least, most, 6) {
		p.Line(drawing.Style{Stroke: black, Width: 0.2}, drawing.Point{X: at(v), Y: base}, drawing.Point{X: at(v), Y: base + 1})
		p.Write(smallType, black, drawing.Middle, drawing.Point{X: at(v), Y: base + 1.6 + smallType.Height()}, number(in, v))
	}
	for _, v := range []float64{s.Low, s.Median, s.High} {
		p.Line(drawing.Style{Stroke: black, Width: 0.25, Dash: []float64{1, 0.8}}, drawing.Point{X: at(v), Y: top}, drawing.Point{X: at(v), Y: base})
	}
	p.Line(drawing.Style{Stroke: black, Width: 0.5}, drawing.Point{X: at(s.Plan), Y: top}, drawing.Point{X: at(s.Plan), Y: base})
	p.Write(bodyType, black, drawing.Middle, drawing.Point{X: at((least + most) / 2), Y: base + 4.5 + bodyType.Height()}, name)
	p.Write(bodyType, black, drawing.Left, drawing.Point{X: chartMargin, Y: base + 14},
		in.Say("Bars: how many stones. Thick line: the plan without errors. Dashes: 5, 50 and 95 of 100 stones lie below."))
	return p
}
