package chart

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"pavilight/app/drawing"
	"pavilight/trace/tune"
)

func TestLevels(t *testing.T) {
	for _, test := range []struct {
		low, high float64
		most      int
		want      []float64
	}{
		{0, 1, 5, []float64{0, 0.2, 0.4, 0.6, 0.8, 1}},
		{0.553, 0.758, 8, []float64{0.6, 0.65, 0.7, 0.75}},
		{38.9, 43.1, 6, []float64{39, 40, 41, 42, 43}},
		{-0.3, 0.3, 4, []float64{-0.2, 0, 0.2}},
		{1, 1, 5, nil},
		{0, math.Inf(1), 5, nil},
		{math.NaN(), 1, 5, nil},
	} {
		if got := Levels(test.low, test.high, test.most); !slices.Equal(got, test.want) {
			t.Errorf("%g to %g by %d: %v, want %v", test.low, test.high, test.most, got, test.want)
		}
	}
}

// hill is a field whose best lies in the middle, with a corner where no stone fits.
func hill() *tune.Field {
	f := &tune.Field{
		X: tune.Variable{Name: "P1", Unit: "degrees", Low: 40, High: 44}, Y: tune.Variable{Name: "C2", Unit: "degrees", Low: 30, High: 38},
		Columns: 9, Rows: 9, Done: 1,
	}
	for i := range 81 {
		x, y := f.Place(i%9, i/9)
		f.Trials = append(f.Trials, tune.Trial{Values: []float64{x, y}, Fit: x+y < 81, Seen: true, Score: 0.8 - 0.02*((x-42)*(x-42)+(y-34)*(y-34)/4)})
	}
	f.Now = tune.Trial{Values: []float64{41, 33}, Fit: true, Seen: true, Score: 0.7}
	return f
}

// wordsOn returns all that is written on a page.
func wordsOn(p *drawing.Page) string {
	var all []string
	for _, m := range p.Marks {
		if t, ok := m.(*drawing.Text); ok {
			all = append(all, t.Words)
		}
	}
	return strings.Join(all, "\n")
}

// A field's chart names its axes and places, marks the best where it lies, and stays on
// its page.
func TestField(t *testing.T) {
	page := Field(hill(), FieldChart{Title: "Hill", Lines: []string{"quartz, 6 mm"}, Goal: "light return", Points: []Point{
		{42, 34, "Someone 1919"}, {42.01, 34, "Someone 1930"}, {39, 34, "Beyond"},
	}})
	text := wordsOn(page)
	for _, want := range []string{"Hill", "P1, degrees", "C2, degrees", "Someone 1919", "Beyond (outside the field)", "1 2", "42", "34"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q is missing in\n%s", want, text)
		}
	}
	// The best, 42 and 34, lies in the middle of the square.
	middle := drawing.Point{}
	for _, m := range page.Marks {
		if p, ok := m.(*drawing.Picture); ok && p.Width == chartEdge {
			middle = drawing.Point{X: p.At.X + chartEdge/2, Y: p.At.Y + chartEdge/2}
		}
	}
	best := false
	for _, m := range page.Marks {
		if c, ok := m.(*drawing.Circle); ok && c.Radius > 1 {
			best = math.Hypot(c.Centre.X-middle.X, c.Centre.Y-middle.Y) < 1e-6
		}
	}
	if !best {
		t.Error("the best is not marked in the middle")
	}
	inside(t, page)
	if img := page.Raster(2); img.Bounds().Dx() < 300 {
		t.Errorf("the picture is %v", img.Bounds())
	}
	empty := &tune.Field{X: tune.Variable{Low: 1, High: 2}, Y: tune.Variable{Low: 1, High: 2}, Columns: 3, Rows: 3, Trials: make([]tune.Trial, 9)}
	inside(t, Field(empty, FieldChart{Goal: "light return"})) // nothing seen yet
}

// inside fails for marks beyond the page.
func inside(t *testing.T, p *drawing.Page) {
	t.Helper()
	check := func(q drawing.Point, what string) {
		if q.X < 0 || q.Y < 0 || q.X > p.Width || q.Y > p.Height || math.IsNaN(q.X+q.Y) {
			t.Errorf("%s at %v lies beyond a page of %g by %g mm", what, q, p.Width, p.Height)
		}
	}
	for _, m := range p.Marks {
		switch m := m.(type) {
		case *drawing.Path:
			for _, ring := range m.Rings {
				for _, q := range ring {
					check(q, "a line")
				}
			}
		case *drawing.Circle:
			check(m.Centre, "a circle")
		case *drawing.Text:
			check(m.At, fmt.Sprintf("%q", m.Words))
		}
	}
}

func TestFrontAndSpread(t *testing.T) {
	f := &tune.Front{Start: tune.Trial{Seen: true, Measures: []float64{0.5, 0.2}, MeasureErrors: []float64{0, 0}}}
	for i := range 5 {
		v := float64(i)
		f.Points = append(f.Points, tune.Trial{Seen: true, Measures: []float64{0.6 + 0.02*v, 0.1 + 0.01*v*v}, MeasureErrors: []float64{0.001, 0.001}})
	}
	page := Front(f, FrontChart{Title: "Two goals", Aims: [2]string{"light return", "leakage"}})
	circles := 0
	for _, m := range page.Marks {
		if _, ok := m.(*drawing.Circle); ok {
			circles++
		}
	}
	if circles != 5 || !strings.Contains(wordsOn(page), "leakage") {
		t.Errorf("%d circles, want 5\n%s", circles, wordsOn(page))
	}
	inside(t, page)
	inside(t, Front(&tune.Front{Points: f.Points[:1]}, FrontChart{}))

	values := []float64{0.7, 0.71, 0.69, 0.7, 0.72, 0.7}
	page = Spread(nil, "Errors", []string{"six stones"}, "light return", values, tune.Spread{Plan: 0.715, Low: 0.692, Median: 0.7, High: 0.718})
	inside(t, page)
	tall := 0.0
	for _, m := range page.Marks {
		if r, ok := m.(*drawing.Path); ok && r.Closed && len(r.Rings[0]) == 4 {
			tall = max(tall, r.Rings[0][2].Y-r.Rings[0][0].Y)
		}
	}
	if math.Abs(tall-60) > 1e-9 {
		t.Errorf("the tallest bar is %g mm, want 60", tall)
	}
	inside(t, Spread(nil, "", nil, "", nil, tune.Spread{}))
	inside(t, Spread(nil, "", nil, "", []float64{1, 1}, tune.Spread{Plan: 1, Low: 1, Median: 1, High: 1}))
}
