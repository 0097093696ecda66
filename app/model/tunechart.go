package model

import (
	"image"

	"pavilight/app/chart"
	"pavilight/app/drawing"
	"pavilight/trace/tune"
)

// SetChartWidth says how many pixels of the screen a chart takes across.
func (t *Tune) SetChartWidth(pixels int) {
	t.width = max(1, min(pixels, mostPageWidth))
	t.paintChart()
}

// ChartShape returns the height of the chart over its width.
func (t *Tune) ChartShape() float64 {
	if t.Chart == nil {
		return 1
	}
	return float64(t.Chart.Rect.Dy()) / float64(t.Chart.Rect.Dx())
}

// Charted reports whether the answer is a chart, be it painted yet or not.
func (t *Tune) Charted() bool {
	return t.Field != nil || t.Front != nil && len(t.Front.Points) > 0 || t.Tolerance != nil && len(t.Tolerance.Draws) > 0
}

// chartKey tells one chart from another.
type chartKey struct{ answer, pick any }

// paintChart has the chart of the answer painted, if it has one.
func (t *Tune) paintChart() {
	var key any
	var draw func() *drawing.Page
	switch field, front, tolerance, pick := t.Field, t.Front, t.Tolerance, t.Pick; {
	case field != nil:
		o := t.fieldChart()
		key, draw = chartKey{field, pick}, func() *drawing.Page { return chart.Field(field, o) }
	case front != nil && len(front.Points) > 0:
		o := chart.FrontChart{In: t.words, Title: t.planUsed.Name, Edge: t.chartEdge()}
		for i, a := range t.aimsUsed[:2] {
			o.Aims[i] = t.words.Say(MeasureName(a.Measure))
		}
		for i := range front.Points {
			if pick == &front.Points[i] {
				o.Mark = i + 1
			}
		}
		key, draw = chartKey{front, pick}, func() *drawing.Page { return chart.Front(front, o) }
	case tolerance != nil && len(tolerance.Draws) > 0:
		title := t.planUsed.Name
		about := []string{t.words.Say("light return of %d stones cut with errors", len(tolerance.Draws))}
		in, name := t.words, t.words.Say(MeasureName(tune.LightReturn))
		values := make([]float64, len(tolerance.Draws))
		for i, d := range tolerance.Draws {
			values[i] = d.Return
		}
		key, draw = chartKey{tolerance, nil}, func() *drawing.Page {
			return chart.Spread(in, title, about, name, values, tolerance.Return)
		}
	default:
		return
	}
	t.painter.paint(painting{key, t.width, draw, func(img *image.RGBA, _ *drawing.Page) {
		t.Chart = img
		t.onChange()
	}})
}

// chartEdge returns the edge of the chart's square, mm, so that its words can be read at the
// width that it has on the screen.
func (t *Tune) chartEdge() float64 {
	const legible = 3.6         // pixels a mm
	const about = 73            // mm beside the square
	const least, most = 50, 120 // mm
	return min(most, max(least, float64(t.width)/legible-about))
}

// goalName says what the score of the answer is.
func (t *Tune) goalName() string {
	if len(t.aimsUsed) == 1 {
		return t.words.Say(MeasureName(t.aimsUsed[0].Measure))
	}
	return t.words.Say("goal")
}

func (t *Tune) fieldChart() chart.FieldChart {
	o := chart.FieldChart{In: t.words, Title: t.planUsed.Name, Goal: t.goalName(), Edge: t.chartEdge()}
	if len(t.aimsUsed) == 1 && t.aimsUsed[0].Weight < 0 {
		o.Goal = "−" + o.Goal
	}
	if t.Pick != nil && len(t.Pick.Values) == 2 {
		o.Points = []chart.Point{{X: t.Pick.Values[0], Y: t.Pick.Values[1], Words: t.words.Say("picked")}}
	}
	return o
}

// PickAt picks what stands at a place of the chart, in shares of its picture from the top
// left corner. Beside all of it the best counts again.
func (t *Tune) PickAt(x, y float64) {
	if t.Chart == nil {
		return
	}
	switch {
	case t.Field != nil:
		column, row, ok := chart.FieldCell(t.Field, t.fieldChart(), x, y)
		t.pickCell(column, row, ok)
	case t.Front != nil && len(t.Front.Points) > 0:
		point, ok := chart.FrontPoint(t.Front, t.chartEdge(), x, y)
		t.Pick = nil
		if ok {
			t.Pick = &t.Front.Points[point]
		}
		t.picked()
	}
}

func (t *Tune) pickCell(column, row int, ok bool) {
	t.Pick = nil
	if ok {
		trial := &t.Field.Trials[row*t.Field.Columns+column]
		if len(trial.Values) == 0 { // not seen yet
			return
		}
		t.Pick = trial
	}
	t.picked()
}

func (t *Tune) picked() {
	t.paintChart()
	t.onChange()
}

// PickNext moves what is picked: on a field by cells to the right and up, on a front from
// point to point.
func (t *Tune) PickNext(right, up int) {
	switch {
	case t.Field != nil:
		f := t.Field
		at, known := f.Best()
		for i := range f.Trials {
			if t.Pick == &f.Trials[i] || t.Pick != nil && sameValues(t.Pick, &f.Trials[i]) {
				at, known = i, true
			}
		}
		if known {
			column, row := at%f.Columns+right, at/f.Columns+up
			if column >= 0 && column < f.Columns && row >= 0 && row < f.Rows {
				t.pickCell(column, row, true)
			}
		}
	case t.Front != nil && len(t.Front.Points) > 0:
		at := -1
		for i := range t.Front.Points {
			if t.Pick == &t.Front.Points[i] {
				at = i
			}
		}
		at = max(0, min(len(t.Front.Points)-1, at+right+up))
		t.Pick = &t.Front.Points[at]
		t.picked()
	}
}

func sameValues(a, b *tune.Trial) bool {
	return len(a.Values) == 2 && len(b.Values) == 2 && a.Values[0] == b.Values[0] && a.Values[1] == b.Values[1]
}
