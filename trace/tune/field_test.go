package tune

import (
	"context"
	"errors"
	"math"
	"path/filepath"
	"testing"
)

// plainField sweeps a plain function.
func plainField(t *testing.T, vs []Variable, columns, rows int, f func(x, y float64) float64) *Field {
	t.Helper()
	j := plainJudge(vs, 0, func(x []float64) float64 { return -f(x[0], x[1]) })
	field, err := sweep(context.Background(), j, FieldSettings{columns, rows, 0.002}, nil)
	if err != nil {
		t.Fatal(err)
	}
	return field
}

// The contour of a cone is a circle, closed, and within the error of straight pieces.
func TestContourOfACone(t *testing.T) {
	f := plainField(t, span(2, -1, 1, 0), 41, 41, func(x, y float64) float64 { return -math.Hypot(x, y) })
	lines := f.Contours(-0.7)
	if len(lines) != 1 {
		t.Fatalf("%d lines, want 1", len(lines))
	}
	line := lines[0]
	if line[0] != line[len(line)-1] {
		t.Error("the circle is not closed")
	}
	const h = 2.0 / 40
	sag := h * h / (8 * 0.7) // of a chord of one square's side: the cone bends by 1/r
	length := 0.0
	for i, p := range line {
		if off := math.Abs(math.Hypot(p[0], p[1]) - 0.7); off > 2*sag {
			t.Fatalf("%v lies %.2g off the circle, want at most %.2g", p, off, 2*sag)
		}
		if i > 0 {
			length += math.Hypot(p[0]-line[i-1][0], p[1]-line[i-1][1])
		}
	}
	if want := 2 * math.Pi * 0.7; math.Abs(length-want) > 0.01*want {
		t.Errorf("length %.4f, want %.4f", length, want)
	}
}

// A saddle's contour at its own level has two branches whichever way it is cut, at the
// edges of the field lines stay open, and holes without stones are left out.
func TestContourCases(t *testing.T) {
	f := plainField(t, span(2, -1, 1, 0), 4, 4, func(x, y float64) float64 { return x * y })
	for _, level := range []float64{-0.05, 0.05} {
		lines := f.Contours(level)
		if len(lines) != 2 {
			t.Fatalf("the saddle has %d lines at %g, want 2", len(lines), level)
		}
		for _, line := range lines {
			if line[0] == line[len(line)-1] {
				t.Errorf("a branch at %g is closed", level)
			}
			sign := math.Copysign(1, line[0][0])
			for _, p := range line {
				if p[0]*sign < 0 || p[0]*p[1]*level <= 0 {
					t.Errorf("the branch at %g wanders to %v", level, p)
				}
			}
		}
	}
	if lines := f.Contours(2); len(lines) != 0 {
		t.Errorf("%d lines above the highest place", len(lines))
	}
	hole := plainField(t, span(2, -1, 1, 0), 9, 9, func(x, y float64) float64 {
		if x > 0.1 {
			return math.NaN()
		}
		return y
	})
	lines := hole.Contours(0.1)
	if len(lines) != 1 {
		t.Fatalf("%d lines beside the hole, want 1", len(lines))
	}
	for _, p := range lines[0] {
		if p[0] > 0.1 || math.Abs(p[1]-0.1) > 1e-9 {
			t.Errorf("a line at %v", p)
		}
	}
}

// A ridge of known slope is followed, and the region near the best lies about it.
func TestRidge(t *testing.T) {
	vs := []Variable{{Name: "P", Low: 38, High: 44, Now: 41}, {Name: "C", Low: 30, High: 40, Now: 35}}
	const slope = -0.22
	f := plainField(t, vs, 61, 41, func(x, y float64) float64 {
		across := x - 41 - slope*(y-34)
		return 0.8 - 0.3*across*across - 0.0005*(y-34)*(y-34)
	})
	r := f.Ridge()
	if len(r.Points) != 41 {
		t.Fatalf("the ridge has %d points, want one a row", len(r.Points))
	}
	if math.Abs(r.Slope-slope) > 3*r.SlopeError || r.SlopeError > 0.01 {
		t.Errorf("slope %.4f ± %.4f, want %.4f", r.Slope, r.SlopeError, slope)
	}
	best, _ := f.Best()
	if x, y := f.Place(best%61, best/61); math.Abs(x-41) > 0.06 || math.Abs(y-34) > 0.26 {
		t.Errorf("best at %v, %v", x, y)
	}
	near := f.Near()
	for i, in := range near {
		x, y := f.Place(i%61, i/61)
		across := x - 41 - slope*(y-34)
		drop := 0.3*across*across + 0.0005*(y-34)*(y-34)
		if in != (drop <= 0.008+1e-4) && math.Abs(drop-0.008) > 2e-4 {
			t.Errorf("%v, %v: near %v at a drop of %.4f", x, y, in, drop)
		}
	}
}

// A field comes coarse first, every stage filled; stopped, it keeps what it has and
// resumes from a memory to the same field.
func TestFieldStages(t *testing.T) {
	vs := span(2, -1, 1, 0.3)
	f := func(x []float64) float64 { return x[0]*x[0] + x[1]*x[1] }
	path := filepath.Join(t.TempDir(), "seen")
	settings := FieldSettings{20, 20, 0.002}
	whole, err := sweep(context.Background(), plainJudge(vs, 0.001, f), settings, nil)
	if err != nil {
		t.Fatal(err)
	}
	stopped := errors.New("stopped")
	var field *Field
	asked := 0
	for round := 0; ; round++ {
		j := plainJudge(vs, 0.001, f)
		j.Material = material(t, "quartz")
		m := &Memory{Path: path}
		if err := m.open(j); err != nil {
			t.Fatal(err)
		}
		inner := j.observe
		j.observe = func(ctx context.Context, x []float64, e effort) (sight, error) {
			j.mu.Lock()
			asked++
			j.mu.Unlock()
			return inner(ctx, x, e)
		}
		ctx, cancel := context.WithCancelCause(context.Background())
		reports := 0
		field, err = sweep(ctx, j, settings, func(f *Field) {
			if reports++; reports == 1 && f.Done < 1 {
				for i, v := range f.Filled() {
					if math.IsNaN(v) {
						t.Errorf("after the first stage cell %d is empty", i)
						break
					}
				}
			}
			if reports == 8*(round+1) {
				cancel(stopped)
			}
		})
		m.Close()
		cancel(nil)
		if err == nil {
			break
		}
		if !errors.Is(err, stopped) || round > 10 {
			t.Fatal(err)
		}
	}
	for i := range whole.Trials {
		if whole.Trials[i].Score != field.Trials[i].Score {
			t.Fatalf("cell %d is %v, want %v", i, field.Trials[i].Score, whole.Trials[i].Score)
		}
	}
	if asked > 401+4 {
		t.Errorf("%d questions for 401 stones", asked)
	}
	if whole.Now.Values[0] != 0.3 || whole.Done != 1 {
		t.Errorf("now %v, done %v", whole.Now.Values, whole.Done)
	}
}

func TestFieldFaults(t *testing.T) {
	p := roundProblem(t)
	for name, change := range map[string]func(*Problem, *FieldSettings){
		"one variable": func(p *Problem, _ *FieldSettings) { p.Variables = p.Variables[:1] },
		"no range":     func(p *Problem, _ *FieldSettings) { p.Variables[1].Low = p.Variables[1].High },
		"one column":   func(_ *Problem, s *FieldSettings) { s.Columns = 1 },
		"too many":     func(_ *Problem, s *FieldSettings) { s.Rows = 5000 },
		"error":        func(_ *Problem, s *FieldSettings) { s.Error = math.NaN() },
	} {
		q, s := *p, FieldSettings{}
		q.Variables = append([]Variable(nil), p.Variables...)
		change(&q, &s)
		if _, err := Sweep(context.Background(), &q, s, nil, nil); err == nil {
			t.Errorf("%s passes", name)
		}
	}
}

// BenchmarkField is held against 60 s on two cores.
func BenchmarkField(b *testing.B) {
	p := roundProblem(b)
	p.Limits = Limits{}
	for b.Loop() {
		f, err := Sweep(context.Background(), p, FieldSettings{}, nil, nil)
		if err != nil {
			b.Fatal(err)
		}
		worst, fit := 0.0, 0
		for i := range f.Trials {
			if f.Trials[i].Fit {
				worst = max(worst, f.Trials[i].Error)
				fit++
			}
		}
		b.ReportMetric(worst, "error")
		b.ReportMetric(float64(fit), "stones")
	}
}
