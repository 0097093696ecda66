package trace

import (
	"context"
	"errors"
	"math"
	"reflect"
	"runtime"
	"strings"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
)

func plain(t testing.TB, name string, index float64) *gems.Material {
	t.Helper()
	m, err := gems.Plain(name, index, 1)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

func mustRun(t testing.TB, scene Scene, s Settings) *Result {
	t.Helper()
	r, err := Run(context.Background(), scene, s, nil)
	if err != nil {
		t.Fatal(err)
	}
	return r
}

// lump is a scene of a random solid in two media.
func lump(t testing.TB) Scene {
	return Scene{Stone: randomStone(t, 40, 5), Material: plain(t, "stone", 1.62), Surroundings: Around(plain(t, "air", 1), plain(t, "water", 1.333))}
}

func TestSameForAnyNumberOfWorkers(t *testing.T) {
	settings := Settings{View: View{Tilt: 7 * facets.Degree}, Head: 10 * facets.Degree, Wavelength: 550, Pixels: 40, Samples: 40, Seed: 3}
	settings.Workers = 1
	scene := lump(t)
	want := mustRun(t, scene, settings)
	for _, workers := range []int{2, 7} {
		settings.Workers = workers
		got := mustRun(t, scene, settings)
		for k := range want.Columns {
			a, b := want.Columns[k], got.Columns[k]
			for i := range a.Map.cells {
				if a.Map.cells[i] != b.Map.cells[i] {
					t.Fatalf("%d workers: pixel %d of column %d differs: %+v, %+v", workers, i, k, a.Map.cells[i], b.Map.cells[i])
				}
			}
			a.Map, b.Map = nil, nil
			if !reflect.DeepEqual(a, b) {
				t.Errorf("%d workers: column %d differs:\n%+v\n%+v", workers, k, a, b)
			}
		}
	}
	settings.Seed = 4
	if got := mustRun(t, scene, settings); got.Columns[0].Ledger == want.Columns[0].Ledger {
		t.Error("another seed gives the very same ledger")
	}
}

func TestRunReportsCoarseFirstAndStops(t *testing.T) {
	before := runtime.NumGoroutine()
	stop := errors.New("enough")
	ctx, cancel := context.WithCancelCause(context.Background())
	var reports []*Result
	last, err := Run(ctx, lump(t), Settings{Wavelength: 550, Pixels: 100, Samples: 100000}, func(r *Result) {
		reports = append(reports, r)
		if len(reports) == 3 {
			cancel(stop)
		}
	})
	if !errors.Is(err, stop) {
		t.Errorf("the error is %v, want the cause of the cancellation", err)
	}
	if len(reports) != 3 || last != reports[2] {
		t.Fatalf("%d reports; the last complete result must be returned", len(reports))
	}
	if !(reports[0].Rays < reports[1].Rays && reports[1].Rays < reports[2].Rays && reports[0].Done < reports[2].Done) {
		t.Error("reports must grow")
	}
	if r, err := Run(ctx, lump(t), Settings{}, nil); r != nil || !errors.Is(err, stop) {
		t.Errorf("without a report there is no last one, and the error is %v", err)
	}
	if first := reports[0].Columns[0].Map; &first.cells[0] == &last.Columns[0].Map.cells[0] {
		t.Error("a reported map must be its own")
	}
	runtime.Gosched()
	if now := runtime.NumGoroutine(); now > before+1 { // the closer of the last pass may be on its last line
		t.Errorf("%d goroutines left of %d", now, before)
	}
}

// TestMapsLast reports progress without maps, and the same result.
func TestMapsLast(t *testing.T) {
	settings := Settings{Wavelength: 550, Pixels: 20, Samples: 2000}
	want := mustRun(t, lump(t), settings)
	settings.MapsLast = true
	reports := 0
	got, err := Run(context.Background(), lump(t), settings, func(r *Result) {
		reports++
		if last := r.Done == 1; (r.Columns[0].Map != nil) != last {
			t.Errorf("report %d, the last %v: map %v", reports, last, r.Columns[0].Map != nil)
		}
	})
	if err != nil {
		t.Fatal(err)
	}
	if reports < 2 || !reflect.DeepEqual(got.Columns, want.Columns) {
		t.Errorf("%d reports, or another result", reports)
	}
}

// TestErrorCovers asks over 200 seeds whether the 95 % interval of the standard
// error holds the converged value as often as it should.
func TestErrorCovers(t *testing.T) {
	scene := lump(t)
	scene.Surroundings = scene.Surroundings[1:]
	settings := Settings{Wavelength: 589.3, Pixels: 4, Samples: 1 << 16, Seed: 99}
	truth := mustRun(t, scene, settings).Columns[0]
	settings.Samples = 1
	const seeds = 200
	student := 2.131 // 97.5 % point for 15 degrees of freedom, table of Student's t
	var covered [quantities]int
	for seed := range seeds {
		settings.Seed = uint64(seed)
		c := mustRun(t, scene, settings).Columns[0]
		for q := range quantities {
			if math.Abs(q.Of(c.Ledger)-q.Of(truth.Ledger)) <= student*q.Of(c.StandardError) {
				covered[q]++
			}
		}
	}
	for _, q := range []Quantity{Returned, Leaked, Surface} {
		// 190 expected, standard deviation 3.1; three rows at a level of 0.003 altogether.
		if covered[q] < 179 || covered[q] == seeds {
			t.Errorf("%v: %d of %d intervals hold the converged value %.6f", q, covered[q], seeds, q.Of(truth.Ledger))
		}
	}
}

// TestEndGameIsUnbiased compares paths split to the end with paths that are decided
// early, in both states of polarisation.
func TestEndGameIsUnbiased(t *testing.T) {
	for _, averaged := range []bool{false, true} {
		scene := lump(t)
		at := func(faint float64, seed uint64) Column {
			r, err := newRun(scene, Settings{Wavelength: 550, Pixels: 4, Samples: 1, Seed: seed, Averaged: averaged, exact: true})
			if err != nil {
				t.Fatal(err)
			}
			r.tracer.faint = faint
			for range 5 {
				if err := r.pass(context.Background()); err != nil {
					t.Fatal(err)
				}
			}
			return r.result().Columns[0]
		}
		early, late := at(0.3, 1), at(1e-9, 2)
		for q := Surface; q < quantities; q++ {
			se := math.Hypot(q.Of(early.StandardError), q.Of(late.StandardError))
			if d := math.Abs(q.Of(early.Ledger) - q.Of(late.Ledger)); d > 4.1*se+1e-12 { // Student's t, 15 degrees, 0.001
				t.Errorf("averaged %v: %v differs by %g, %g standard errors", averaged, q, d, d/se)
			}
		}
		near(t, "sum of the means", early.Ledger.Sum(), 1, 1e-12, "light is neither made nor lost")
	}
}

// TestFaintPathsAddNoNoise compares what is left to chance with the share at which paths
// are decided and far below: neither means nor maps may become less certain by it.
func TestFaintPathsAddNoNoise(t *testing.T) {
	scene := Scene{Stone: brilliant(t), Material: plain(t, "diamond", 2.417), Surroundings: Around(plain(t, "air", 1), plain(t, "water", 1.333))}
	seen := func(faint float64, seed uint64) *Result {
		r := untraced(t, scene, Settings{Wavelength: 550, Pixels: 60, Seed: seed, Averaged: true})
		r.tracer.faint = faint
		if err := r.pass(context.Background()); err != nil {
			t.Fatal(err)
		}
		return r.result()
	}
	const seeds = 12
	var spread, scatter [2][2]float64 // by column, with faint paths decided at faintShare and far below
	for k := range scene.Surroundings {
		for i, faint := range []float64{faintShare, faintShare / 1000} {
			var maps [seeds][]float32
			for seed := range seeds {
				c := seen(faint, uint64(seed)).Columns[k]
				spread[k][i] += c.StandardError.Returned * c.StandardError.Returned / seeds
				maps[seed] = c.Map.Field(Returned)
			}
			for seed := range seeds - 1 {
				for p := range maps[seed] {
					if d := float64(maps[seed+1][p] - maps[seed][p]); d == d {
						scatter[k][i] += d * d
					}
				}
			}
		}
		// A variance of 12 x 15 degrees of freedom has a standard error of 11 percent.
		if ratio := spread[k][0] / spread[k][1]; ratio > 1.4 {
			t.Errorf("column %d: the mean's variance grows to %.2f of what it is", k, ratio)
		}
		if ratio := scatter[k][0] / scatter[k][1]; ratio > 1.05 {
			t.Errorf("column %d: the map's variance grows to %.3f of what it is", k, ratio)
		}
	}
}

// TestUniformSurround shows exactly the surround, whatever the stone.
func TestUniformSurround(t *testing.T) {
	for name, s := range each(stones(t)) {
		scene := Scene{Stone: s, Material: plain(t, "stone", 1.9), Surroundings: Around(plain(t, "air", 1), plain(t, "dense", 2.2))}
		for _, c := range mustRun(t, scene, Settings{Wavelength: 550, Pixels: 8, Samples: 4, Below: 1, View: View{Tilt: 20 * facets.Degree}, exact: true}).Columns {
			near(t, name+" in "+c.Medium.Name, c.Lit.Sum+c.Ledger.Unresolved, 1, 1e-12, "a lossless stone in a uniform surround shows the surround")
			if c.Ledger.Unresolved > 1e-6 {
				t.Errorf("%s: unresolved %g", name, c.Ledger.Unresolved)
			}
			from := 0.0
			for _, f := range c.From {
				from += f
			}
			near(t, name+": where light comes from", from, c.Ledger.Returned+c.Ledger.Head, 1e-12, "sum of the bins")
		}
	}
}

// TestHead moves light from returned to head and nowhere else; the bins tell how much.
func TestHead(t *testing.T) {
	scene := lump(t)
	settings := Settings{Wavelength: 550, Pixels: 4, Samples: 100, exact: true}
	free := mustRun(t, scene, settings)
	settings.Head = 15 * facets.Degree
	headed := mustRun(t, scene, settings)
	for k := range free.Columns {
		a, b := free.Columns[k], headed.Columns[k]
		near(t, "returned + head", b.Ledger.Returned+b.Ledger.Head, a.Ledger.Returned, 1e-12, "the head only takes from what returns")
		near(t, "head", b.Ledger.Head, a.From[0]+a.From[1]+a.From[2], 1e-12, "three bins of 5 degrees")
		near(t, "leaked", b.Ledger.Leaked, a.Ledger.Leaked, 0, "the head is above")
	}
}

// TestMapIsThePicture checks what the map shows against single rays and the ledger.
func TestMapIsThePicture(t *testing.T) {
	// A bar that lies along x, so upright in the picture, flat table.
	s := solid(t, box(3, 1, 0.5))
	scene := Scene{Stone: s, Material: plain(t, "stone", 1.5), Surroundings: Around(plain(t, "air", 1))}
	c := mustRun(t, scene, Settings{Wavelength: 550, Pixels: 30, Samples: 30}).Columns[0]
	near(t, "span", c.Map.Span, 6, 1e-6, "the bar is 6 mm long")
	field := c.Map.Field(Leaked)
	// After two reflections of R = 0.04 the share is faint, and it goes up at the next
	// surface with probability R: for the mean of 30 rays or more, five standard errors.
	const thrown = 5 * 0.96 * 0.04 * 0.04 * 0.2 / 5.4
	for y := range 30 {
		for x := range 30 {
			inside := x >= 10 && x < 20
			if c.Map.Inside(x, y) != inside || math.IsNaN(float64(field[y*30+x])) == inside {
				t.Fatalf("pixel %d, %d: inside must be %v", x, y, inside)
			}
			if inside {
				near(t, "leaked", float64(field[y*30+x]), 12.0/13, thrown, "2n/(n^2+1), but for faint paths decided by a throw")
				if l, n := c.Map.At(x, y); n == 0 || math.Abs(l.Sum()-1) > 1e-6 { // single precision
					t.Fatalf("pixel %d, %d: %d rays, sum %v", x, y, n, l.Sum())
				}
			}
		}
	}
}

// TestFieldFillsGaps gives a pixel that no ray met the mean around it.
func TestFieldFillsGaps(t *testing.T) {
	m := newMap(newGrid(5, noSymmetry().images, func(column, row int) bool { return column < 4 || row < 4 }), 5, false, false)
	m.cells[0] = cell{Ledger{Returned: 1.2}, 2, 2}
	m.cells[6] = cell{Ledger{Returned: 0.2}, 1, 1}
	f := m.Field(Returned)
	near(t, "a pixel with rays", float64(f[0]), 0.6, 1e-7, "mean of its rays")
	near(t, "a gap in the same block", float64(f[1]), 1.4/3, 1e-7, "mean of the block's rays")
	if !math.IsNaN(float64(f[24])) {
		t.Error("outside the outline the field must be NaN")
	}
}

func TestSettingsFaults(t *testing.T) {
	scene := lump(t)
	for _, row := range []struct {
		name string
		s    Settings
		want string
	}{
		{"tilt", Settings{View: View{Tilt: 95 * facets.Degree}}, "tilt"},
		{"no number", Settings{View: View{Tilt: facets.Angle(math.NaN())}}, "tilt"},
		{"head", Settings{Head: 91 * facets.Degree}, "head"},
		{"pixels", Settings{Pixels: -1}, "pixels"},
		{"below", Settings{Below: 1.5}, "below"},
		{"error", Settings{Error: math.NaN()}, "error"},
		{"workers", Settings{Workers: -2}, "workers"},
	} {
		if _, err := Run(context.Background(), scene, row.s, nil); err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: error %v must name %q", row.name, err, row.want)
		}
	}
	diamond, err := gems.Find("diamond")
	if err != nil {
		t.Fatal(err)
	}
	scene.Material = diamond
	if _, err := Run(context.Background(), scene, Settings{Wavelength: 5000}, nil); err == nil {
		t.Error("a wavelength outside the published range must be an error")
	}
}
