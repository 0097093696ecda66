package model

import (
	"context"
	"math"
	"testing"
	"testing/synctest"
	"time"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

// What takes a run of its own comes after the maps, and ends as soon as another stone
// is wanted.
func TestColourComesAfterTheMaps(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.SetRow(1, TrueColour)
		if err := s.SetLight("lamps", 0, 1, 2); err != nil {
			t.Fatal(err)
		}
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 0.1)
		if s.Frame == nil || !s.Late(1) || s.Late(0) {
			t.Fatal("the coarse maps wait for the colour")
		}
		if asked := s.engine.asked[0]; asked.Colour || asked.Light != nil {
			t.Error("the first run gathers colour")
		}
		s.report(t, 1)
		if s.Frame.Final || s.Progress().Share != 0.5 || !s.Progress().Active {
			t.Errorf("before the colour: final %v, progress %+v", s.Frame.Final, s.Progress())
		}
		asked := s.engine.asked[1]
		if !asked.Colour || asked.Paths || asked.Light == nil || asked.Light.Name != "lamps" {
			t.Errorf("the second run is asked for %+v", asked)
		}
		time.Sleep(time.Second) // the pace lets the next one through
		s.report(t, 0.5)
		if s.Late(1) || s.Frame.Final || s.Progress().Share != 0.75 {
			t.Errorf("late %v, final %v, progress %+v", s.Late(1), s.Frame.Final, s.Progress())
		}
		s.Show(stoneNamed("two"))
		s.window.settle()
		if n := len(s.engine.scenes); n != 3 || s.engine.scenes[2].Stone.Name != "two" {
			t.Fatalf("%d runs: another stone does not end the colour's", n)
		}
		s.report(t, 0.1)
		if !s.Late(1) {
			t.Error("the colours of one stone pass for those of another")
		}
		s.report(t, 1)
		s.report(t, 1)
		if !s.Frame.Final || s.Progress().Active || s.Late(1) {
			t.Errorf("at the end: final %v, late %v, %+v", s.Frame.Final, s.Late(1), s.Progress())
		}
	})
}

func TestOnlyWhatIsNotKnownIsTraced(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 1)
		runs := func() int { return len(s.engine.scenes) }
		s.SetRow(0, Shown(trace.Head))
		s.window.settle()
		if runs() != 1 {
			t.Error("an entry of the ledger is traced again")
		}
		s.SetRow(0, PathLength)
		s.window.settle()
		if runs() != 2 || !s.Late(0) {
			t.Fatalf("%d runs for the path length, late %v", runs(), s.Late(0))
		}
		s.report(t, 1)
		s.report(t, 1)
		if asked := s.engine.asked[2]; !asked.Paths || asked.Colour {
			t.Errorf("asked for %+v", asked)
		}
		s.SetRow(0, Shown(trace.Leaked))
		s.SetRow(0, PathLength)
		s.window.settle()
		if runs() != 3 || s.Late(0) {
			t.Errorf("%d runs to see a path length again, late %v", runs(), s.Late(0))
		}
		if err := s.SetLight("ring", 0, 1, 2); err != nil || runs() != 3 {
			t.Errorf("a light for no colour: %v, %d runs", err, runs())
		}
		s.SetRow(1, TrueColour)
		s.window.settle()
		s.report(t, 1)
		s.report(t, 1)
		before := runs()
		s.SetRow(1, Shown(trace.Leaked))
		s.SetRow(1, TrueColour)
		if !s.Late(1) {
			t.Error("colour is painted on the window's goroutine")
		}
		s.window.settle()
		if runs() != before || s.Late(1) {
			t.Errorf("colour that is known: %d runs more, late %v", runs()-before, s.Late(1))
		}
		if err := s.SetLight("moon", 0); err == nil || s.Lights()[0] != "ring" {
			t.Errorf("an unknown light: %v, now %s", err, s.Lights())
		}
	})
}

// Each column has its own light: columns under one are traced in one run, and another's
// stay dark until their turn.
func TestLightsByColumn(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.SetRow(1, TrueColour)
		if err := s.SetLight("lamps", 1); err != nil {
			t.Fatal(err)
		}
		if _, one := s.OneLight(); one || s.Lights()[1] != "lamps" || s.Lights()[0] == "lamps" {
			t.Errorf("the lights are %v", s.Lights())
		}
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 1)
		for k, want := range []struct {
			light   string
			columns []int
		}{{s.Lights()[0], []int{0, 2}}, {"lamps", []int{1}}} {
			asked, scene := s.engine.asked[k+1], s.engine.scenes[k+1]
			if asked.Light == nil || asked.Light.Name != want.light || len(scene.Surroundings) != len(want.columns) {
				t.Fatalf("run %d: under %v, %d columns", k, asked.Light, len(scene.Surroundings))
			}
			for i, j := range want.columns {
				if scene.Surroundings[i].Medium != s.Around[j].Medium {
					t.Errorf("run %d traces %s in place of column %d", k, scene.Surroundings[i].Medium.Name, j)
				}
			}
			time.Sleep(time.Second) // the pace lets the next one through
			s.report(t, 0.5)
			if known := s.Frame.Seen.Columns[1].Map != nil; known != (k == 1) || s.Frame.Seen.Columns[2].Map == nil {
				t.Errorf("run %d: column 1 known %v, column 2 %v", k, known, s.Frame.Seen.Columns[2].Map != nil)
			}
			s.report(t, 1)
		}
		if !s.Frame.Final || s.Late(1) {
			t.Errorf("at the end: final %v, late %v", s.Frame.Final, s.Late(1))
		}
	})
}

// TestExtrasOfARealStone traces the bundled stone: the numbers of the maps are those of
// the tracer's own means.
func TestExtrasOfARealStone(t *testing.T) {
	file, err := testdata.Plans().Open(testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	plan, err := facets.ReadPlan(file, testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	b := &Bench{Stock: gems.Standard(), solve: (*facets.Plan).Solve}
	subject, err := b.subject(plan)
	if err != nil {
		t.Fatal(err)
	}
	l, err := NewLook(func(func()) {}, func(Change) {})
	if err != nil {
		t.Fatal(err)
	}
	row := [Rows]Shown{PathLength, TrueColour}
	e := extrasFor(row, []string{"lamps", "lamps", "lamps"})
	settings, err := e.settings(trace.Settings{Pixels: 48, Seed: 1, Workers: 1}, "lamps")
	if err != nil {
		t.Fatal(err)
	}
	scene := trace.Scene{Stone: subject.Stone, Material: subject.Material, Surroundings: surroundings(l.Around)}
	seen, err := trace.Run(context.Background(), scene, settings, nil)
	if err != nil {
		t.Fatal(err)
	}
	f := l.paint(Frame{Subject: subject, Settings: settings, Around: l.Around, Result: seen, Seen: seen, Row: row, extras: e})
	for j, c := range seen.Columns {
		mean := func(field []float32) float64 {
			sum, n := 0.0, 0
			for _, v := range field {
				if v == v {
					sum, n = sum+float64(v), n+1
				}
			}
			return sum / float64(n)
		}
		// The means differ by how light counts: by pixel here, by power there; pixels at
		// the rim count in full; and what is rarely met is met by chance.
		if got, want := mean(f.Fields[0][j]), c.PathLength; math.Abs(got-want) > 0.15*want {
			t.Errorf("column %d: path length %.2f mm in the map, %.2f in the mean", j, got, want)
		}
		if got, want := mean(f.Fields[1][j]), c.Lit.Sum; math.Abs(got-want) > 0.15*want {
			t.Errorf("column %d: luminance %.3f in the map, %.3f in the mean", j, got, want)
		}
		if c.PathLength > f.Most[0] {
			t.Errorf("column %d: the mean %.2f mm lies above the scale's %v", j, c.PathLength, f.Most[0])
		}
		colourful := 0
		for k := 0; k < len(f.Pictures[1][j].Pix); k += 4 {
			if p := f.Pictures[1][j].Pix[k : k+3]; max(p[0], p[1], p[2])-min(p[0], p[1], p[2]) > 40 {
				colourful++
			}
		}
		if j == 0 && colourful == 0 { // in oil little comes back
			t.Error("no fire in air under small lamps")
		}
	}
}

func TestRoundAbove(t *testing.T) {
	for _, tt := range []struct{ v, want float64 }{
		{0, 1}, {1, 1}, {1.01, 1.5}, {7, 8}, {8.5, 10}, {23, 30}, {0.031, 0.04}, {math.NaN(), 1},
	} {
		if got := roundAbove(tt.v); math.Abs(got-tt.want) > 1e-12 {
			t.Errorf("roundAbove(%v) = %v, want %v", tt.v, got, tt.want)
		}
	}
}
