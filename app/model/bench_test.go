package model

import (
	"errors"
	"io/fs"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/disk"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

func bundledText(t *testing.T) []byte {
	t.Helper()
	text, err := fs.ReadFile(testdata.Plans(), testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	return text
}

// place is a bench with the bundled plan on a stand-in window and engine.
type place struct {
	*Bench
	window window
	engine engine
}

func newPlace(t *testing.T) *place {
	t.Helper()
	plan, err := facets.ReadPlan(strings.NewReader(string(bundledText(t))), testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	p := &place{engine: engine{step: make(chan float64)}}
	p.Bench, err = NewBench(NewDocument(plan, ""), p.window.do, func(Change) {}, func() {})
	if err != nil {
		t.Fatal(err)
	}
	p.Look.trace = p.engine.trace
	return p
}

// save saves the plan and waits for it.
func (p *place) save(t *testing.T, path string) {
	t.Helper()
	if err := p.trySave(path, false); err != nil {
		t.Fatal(err)
	}
}

func (p *place) trySave(path string, over bool) (told error) {
	p.Save(path, over, nil, func(err error) { told = err })
	p.window.settle()
	return told
}

func (p *place) tier(t *testing.T, name string) TierRow {
	t.Helper()
	rows := p.Tiers()
	i := slices.IndexFunc(rows, func(r TierRow) bool { return r.Name == name })
	if i < 0 {
		t.Fatalf("no tier %s", name)
	}
	return rows[i]
}

// The critical angles are those of Snell's law at the indices of the material table,
// computed here from the indices alone.
func TestTiersCarryTheCriticalAngles(t *testing.T) {
	p := newPlace(t)
	index := func(key string) float64 {
		m, err := gems.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		n, err := m.Index(gems.LineD)
		if err != nil {
			t.Fatal(err)
		}
		return n
	}
	row := p.tier(t, "P1")
	for _, tick := range row.Ticks {
		key := map[string]string{"a": "air", "w": "water", "o": "oil"}[tick.Letter]
		want := math.Asin(index(key)/index("corundum")) * 180 / math.Pi
		const rounding = 1e-9
		if math.Abs(tick.Angle.Degrees()-want) > rounding {
			t.Errorf("tick %s at %v, want %v° by Snell's law", tick.Letter, tick.Angle, want)
		}
		if tick.Angle < row.Low || tick.Angle > row.High {
			t.Errorf("tick %s lies outside its slider", tick.Letter)
		}
	}
	if len(row.Ticks) != 3 {
		t.Errorf("%d ticks on a pavilion tier, want air, water and oil", len(row.Ticks))
	}
	for _, name := range []string{"C1", "C2"} {
		if got := p.tier(t, name).Ticks; len(got) != 0 {
			t.Errorf("crown tier %s has ticks %v", name, got)
		}
	}
	if p.tier(t, "T").Slides || p.tier(t, "G1").Slides || !p.tier(t, "C3").Slides {
		t.Error("table and girdle can be set, or a crown tier cannot")
	}
}

func TestSliderRangeStaysWhileTheThumbMoves(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		before := p.tier(t, "C2")
		if err := p.SetAngle(before.Number, before.Angle+3*facets.Degree, true); err != nil {
			t.Fatal(err)
		}
		after := p.tier(t, "C2")
		if after.Low != before.Low || after.High != before.High {
			t.Errorf("the range went from %v..%v to %v..%v", before.Low, before.High, after.Low, after.High)
		}
		if err := p.SetAngle(before.Number, 70*facets.Degree, false); err != nil {
			t.Fatal(err)
		}
		if far := p.tier(t, "C2"); far.Low > 70*facets.Degree || far.High < 70*facets.Degree {
			t.Errorf("70° lies outside %v..%v", far.Low, far.High)
		}
		p.Look.Close()
		p.window.settle()
	})
}

func TestSetAngleRefusesWhatIsNoFacet(t *testing.T) {
	p := newPlace(t)
	for _, deg := range []float64{0, -1, 90, 91, math.NaN(), math.Inf(1)} {
		if err := p.SetAngle(0, facets.Angle(deg)*facets.Degree, false); err == nil {
			t.Errorf("an angle of %v° is taken", deg)
		}
	}
	if p.Doc.Modified() {
		t.Error("a refused angle changed the plan")
	}
}

func TestEditsAreNamedAndUndone(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		quartz, err := gems.Find("quartz")
		if err != nil {
			t.Fatal(err)
		}
		start := p.Doc.Plan()
		if err := p.SetAngle(0, 42*facets.Degree, false); err != nil {
			t.Fatal(err)
		}
		if err := p.SetWidth(6); err != nil {
			t.Fatal(err)
		}
		p.SetMaterial(quartz)
		var names []string
		for {
			name, ok := p.Doc.UndoName()
			if !ok {
				break
			}
			names = append(names, name.String())
			p.Undo()
		}
		if want := []string{"material", "width", "angle of P1"}; !slices.Equal(names, want) {
			t.Errorf("steps %v, want %v", names, want)
		}
		if p.Doc.Plan() != start || p.Doc.Modified() {
			t.Error("all undone is not the plan at the start")
		}
		for range names {
			p.Redo()
		}
		if got := p.Doc.Plan(); got.WidthMM != 6 || got.Material.Key != "quartz" || got.Tiers[0].Angle != 42*facets.Degree {
			t.Errorf("all redone: width %v, material %v, P1 at %v", got.WidthMM, got.Material, got.Tiers[0].Angle)
		}
		p.Look.Close()
		p.window.settle()
	})
}

// Weight follows from volume and density by definition: 0.2 g a carat.
func TestWeightIsVolumeTimesDensity(t *testing.T) {
	p := newPlace(t)
	s, err := p.subject(p.Doc.Plan())
	if err != nil {
		t.Fatal(err)
	}
	ct, ok := s.Carats()
	grams := ct * 0.2
	if want := s.Material.Density * s.Measures.VolumeMM3 / 1000; !ok || math.Abs(grams-want) > 1e-12 {
		t.Errorf("%v g, want %v g", grams, want)
	}
	s.Material = &gems.Material{Name: "unknown"}
	if _, ok := s.Carats(); ok {
		t.Error("a weight without a density")
	}
}

func TestOpenKeepsTheBenchWhenThePlanCannotBeHad(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		folder := t.TempDir()
		open := filepath.Join(folder, "open.toml")
		half := strings.Split(string(bundledText(t)), "[[transfer]]")[0]
		if err := os.WriteFile(open, []byte(half), 0o600); err != nil {
			t.Fatal(err)
		}
		doc := p.Doc
		for _, path := range []string{open, folder, filepath.Join(folder, "absent.toml")} {
			var told error
			p.Open(path, func(err error) { told = err })
			p.window.settle()
			if told == nil || p.Doc != doc {
				t.Errorf("%s: error %v, document replaced %v", filepath.Base(path), told, p.Doc != doc)
			}
			for _, line := range InWords(nil, told) {
				if strings.Contains(line, folder) {
					t.Errorf("%q names the folder, for which there is no room", line)
				}
			}
		}
	})
}

func TestSaveAndReopenGiveTheSamePlan(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		path := filepath.Join(t.TempDir(), "x.toml")
		if err := p.SetAngle(0, 41.75*facets.Degree, false); err != nil {
			t.Fatal(err)
		}
		p.save(t, path)
		if p.Doc.Modified() || p.Doc.Path != path {
			t.Errorf("after saving: modified %v, path %q", p.Doc.Modified(), p.Doc.Path)
		}
		want := p.Doc.Plan().Tiers[0].Angle
		p.Open(path, func(err error) {
			if err != nil {
				t.Error(err)
			}
		})
		p.Look.Close()
		p.window.settle()
		if got := p.Doc.Plan().Tiers[0].Angle; got != want {
			t.Errorf("reopened: P1 at %v, want %v", got, want)
		}
		p.Look.Close()
		p.window.settle()
	})
}

func TestDocumentNames(t *testing.T) {
	for _, c := range []struct{ name, path, title, file string }{
		{"Harbour Eight", "", "Harbour Eight", "harbour-eight.plan.toml"},
		{"Harbour Eight", "/a/b.toml", "Harbour Eight", "b.toml"},
		{"", "/a/b.toml", "b.toml", "b.toml"},
		{"", "", "unnamed plan", "stone.plan.toml"},
		{"  Émeraude / 7? ", "", "  Émeraude / 7? ", "meraude-7.plan.toml"},
	} {
		d := NewDocument(&facets.Plan{Name: c.name}, c.path)
		if d.Title(nil) != c.title || d.FileName() != c.file {
			t.Errorf("%q at %q: title %q, file %q; want %q, %q", c.name, c.path, d.Title(nil), d.FileName(), c.title, c.file)
		}
	}
}

// The list of a ray and its text agree with the path, and what is mirrored, left and
// still inside makes the whole.
func TestRayTellsThePath(t *testing.T) {
	p := newPlace(t)
	subject, err := p.subject(p.Doc.Plan())
	if err != nil {
		t.Fatal(err)
	}
	p.Look.Frame = &Frame{Subject: subject, Settings: p.Look.Settings(), Around: p.Look.Around}
	p.Look.Follow(1, 0.4, 0.3)
	r := p.Look.Ray
	if r == nil || r.Path == nil {
		t.Fatal("no path")
	}
	lines, more := r.Lines(nil)
	if len(lines)+more != len(r.Path.Bounces)+1 {
		t.Errorf("%d lines and %d more for %d bounces and an entry", len(lines), more, len(r.Path.Bounces))
	}
	sum := r.Path.Surface + r.Path.Remaining
	for i, b := range r.Path.Bounces {
		sum += b.Left
		if line := lines[i+1]; (line.Left == "") != b.Total {
			t.Errorf("bounce %d: total %v, line %+v", i+1, b.Total, line)
		}
	}
	const perRay = 1e-9 // as the ledger promises
	if math.Abs(sum-1) > perRay {
		t.Errorf("the shares sum to %v", sum)
	}
	if rows := strings.Count(r.Text(nil), "\n"); rows != len(r.Path.Bounces)+4 {
		t.Errorf("the text has %d lines for %d bounces", rows, len(r.Path.Bounces))
	}
	// Drawn pieces hang together: each piece inside begins where the one before ended.
	at := r.Path.Entry
	for _, s := range r.Stretches(1) {
		if s.Inside {
			if s.From != at {
				t.Errorf("a piece begins at %v, the one before ended at %v", s.From, at)
			}
			at = s.To
		}
	}
	// Face-up, the way in comes straight from above.
	if way := r.Stretches(1)[0]; way.From.Sub(way.To).Sub(mgl64.Vec3{0, 0, 1}).Len() > 1e-9 {
		t.Errorf("the way in is %v", way.From.Sub(way.To))
	}
	p.Look.PickBounce(99)
	if p.Look.Ray.Step != len(r.Path.Bounces)-1 {
		t.Errorf("picked bounce %d", p.Look.Ray.Step)
	}
	// In a dish the liquid's surface takes its part first.
	p.Look.Frame.Around[1].Dish = true
	p.Look.Follow(1, 0.4, 0.3)
	d := p.Look.Ray.Path
	sum = d.Liquid + d.Surface + d.Remaining
	for _, b := range d.Bounces {
		sum += b.Left
	}
	if !d.Dish || d.Liquid <= 0 || math.Abs(sum-1) > perRay {
		t.Errorf("in a dish the shares sum to %v, of which the liquid mirrors %v", sum, d.Liquid)
	}
	if text := p.Look.Ray.Text(nil); !strings.Contains(text, "in a dish of water") || !strings.Contains(text, "liquid's surface") {
		t.Errorf("a ray in a dish is told as %s", text)
	}
	p.Look.Follow(0, 0.01, 0.01)
	if p.Look.Ray.Path != nil || !strings.Contains(p.Look.Ray.Title(nil), "beside") {
		t.Errorf("a ray beside the stone: %q", p.Look.Ray.Title(nil))
	}
}

func TestLedgerRows(t *testing.T) {
	l, err := NewLook(func(f func()) { f() }, func(Change) {})
	if err != nil {
		t.Fatal(err)
	}
	if l.Ledger() != nil {
		t.Error("a ledger before there is anything to tell")
	}
	column := trace.Column{
		Ledger:        trace.Ledger{Returned: 0.61234, Leaked: 0.2, Head: 0.1, Surface: 0.08766},
		StandardError: trace.Ledger{Returned: 0.00041},
		WindowedArea:  0.25,
	}
	l.Frame = &Frame{Result: &trace.Result{Columns: []trace.Column{column}}, Around: l.Around}
	names := map[string]LedgerCell{}
	for _, row := range l.Ledger() {
		names[row.Name] = row.Cells[0]
	}
	if c := names["Light return"]; c.Value != "0.6123" || c.Error != "±0.0005" {
		t.Errorf("light return reads %s %s; an error is never told smaller than it is", c.Value, c.Error)
	}
	if _, ok := names["Absorbed"]; ok {
		t.Error("an entry that is nothing takes a line")
	}
	if c := names["Window"]; c.Value != "0.2500" {
		t.Errorf("window reads %s", c.Value)
	}
	l.Frame.Result.Columns[0].Ledger.Absorbed = 0.01
	found := false
	for _, row := range l.Ledger() {
		found = found || row.Name == "Absorbed"
	}
	if !found {
		t.Error("absorbed light is not told")
	}
}

func TestChangesByOtherHandsAreToldOnce(t *testing.T) {
	path := filepath.Join(t.TempDir(), "x.toml")
	if err := os.WriteFile(path, []byte("one"), 0o600); err != nil {
		t.Fatal(err)
	}
	d := NewDocument(&facets.Plan{Name: "x"}, path)
	if got := d.Seen(disk.StampOf(path)); got != Untouched {
		t.Errorf("an untouched file is told as %v", got)
	}
	if err := os.WriteFile(path, []byte("another"), 0o600); err != nil {
		t.Fatal(err)
	}
	if got := d.Seen(disk.StampOf(path)); got != Changed {
		t.Errorf("a changed file is told as %v", got)
	}
	if got := d.Seen(disk.StampOf(path)); got != Untouched {
		t.Errorf("a change is told twice: %v", got)
	}
	if err := os.WriteFile(path, []byte("one"), 0o600); err != nil {
		t.Fatal(err)
	}
	if got := d.Seen(disk.StampOf(path)); got != Untouched {
		t.Errorf("a file that is as it was is told as %v", got)
	}
	os.Remove(path)
	if got := d.Seen(disk.StampOf(path)); got != Gone || !d.Modified() {
		t.Errorf("a file that is gone is told as %v, modified %v", got, d.Modified())
	}
	if err := os.WriteFile(path, []byte("one"), 0o600); err != nil {
		t.Fatal(err)
	}
	if got := d.Seen(disk.StampOf(path)); got != Back || d.Modified() {
		t.Errorf("a file that is back is told as %v, modified %v", got, d.Modified())
	}
	// The same length at the same time, as after a clock that was set back.
	before, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := errors.Join(os.WriteFile(path, []byte("two"), 0o600), os.Chtimes(path, before.ModTime(), before.ModTime())); err != nil {
		t.Fatal(err)
	}
	if got := d.Seen(disk.StampOf(path)); got != Changed {
		t.Errorf("a change that no clock shows is told as %v", got)
	}
	if d.KeepMine(); !d.Modified() {
		t.Error("a plan that is kept although its file differs does not count as modified")
	}
}

// What other hands wrote is not written over without the user's word.
func TestSavingLeavesWhatOthersWrote(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		path := filepath.Join(t.TempDir(), "x.toml")
		p.save(t, path)
		const theirs = "# theirs\n"
		if err := os.WriteFile(path, []byte(theirs), 0o600); err != nil {
			t.Fatal(err)
		}
		if err := p.SetWidth(9); err != nil {
			t.Fatal(err)
		}
		if err := p.trySave(path, false); !errors.Is(err, disk.ErrChanged) || !p.Doc.Modified() {
			t.Errorf("error %v, modified %v", err, p.Doc.Modified())
		}
		if got, _ := os.ReadFile(path); string(got) != theirs {
			t.Errorf("the file holds %q", got)
		}
		if err := p.trySave(path, true); err != nil || p.Doc.Modified() {
			t.Errorf("with the user's word: %v, modified %v", err, p.Doc.Modified())
		}
		p.save(t, path) // and from then on as usual
		p.Look.Close()
		p.window.settle()
	})
}

// A file that cannot be had just now, as on a drive that does not answer, keeps nobody from
// saving elsewhere, and when it answers at last the plan goes on under the new name.
func TestSavingElsewhereDoesNotWait(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		folder := t.TempDir()
		slow, quick := filepath.Join(folder, "slow.toml"), filepath.Join(folder, "quick.toml")
		p.save(t, slow)
		lock, err := disk.LockFile(slow)
		if err != nil {
			t.Fatal(err)
		}
		var order []string
		save := func(path string) {
			p.Save(path, false, nil, func(err error) {
				if err != nil {
					t.Error(err)
				}
				order = append(order, filepath.Base(path))
				if path == quick {
					lock.Release()
				}
			})
		}
		save(slow)
		save(quick)
		p.window.settle()
		time.Sleep(time.Second)
		p.window.settle()
		if got := strings.Join(order, " "); got != "quick.toml slow.toml" || p.Doc.Path != quick || p.Doc.Modified() {
			t.Errorf("saved %s; the plan is in %s, modified %v", got, p.Doc.Path, p.Doc.Modified())
		}
		p.Look.Close()
		p.window.settle()
	})
}

// Saves follow each other; what is edited meanwhile stays unsaved.
func TestEditsDuringASaveStayUnsaved(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		path := filepath.Join(t.TempDir(), "x.toml")
		var told []error
		done := func(err error) { told = append(told, err) }
		drag := func(deg facets.Angle) {
			if err := p.SetAngle(0, deg*facets.Degree, true); err != nil {
				t.Fatal(err)
			}
		}
		drag(41.1)
		p.Save(path, false, nil, done)
		drag(41.2)
		p.Save(path, false, nil, done)
		drag(41.3)
		p.window.settle()
		if err := errors.Join(told...); err != nil || len(told) != 2 || p.Saving() {
			t.Fatalf("told %v", told)
		}
		plan, err := facets.OpenPlan(path)
		if err != nil {
			t.Fatal(err)
		}
		if got := plan.Tiers[0].Angle; got != 41.2*facets.Degree || !p.Doc.Modified() {
			t.Errorf("the file has P1 at %v; modified %v", got, p.Doc.Modified())
		}
		if p.Undo(); p.Doc.Modified() {
			t.Error("the step that was saved counts as modified")
		}
		p.Look.Close()
		p.window.settle()
	})
}

// Faults of a plan that no file holds as it is name no file and no line.
func TestFaultsNameTheFileThatHoldsThem(t *testing.T) {
	synctest.Test(t, func(t *testing.T) { // a place's goroutines are its own
		p := newPlace(t)
		tooSteep := func(plan *facets.Plan) {
			for i := range plan.Tiers {
				if plan.Tiers[i].Name == "P1" {
					plan.Tiers[i].Angle = 89 * facets.Degree
				}
			}
		}
		p.Doc.Edit(words.Later("angle"), "", tooSteep)
		_, p.Look.Trouble = p.subject(p.Doc.Plan())
		if lines := p.Troubles(); len(lines) == 0 || strings.Contains(strings.Join(lines, ""), ".toml") || !strings.HasPrefix(lines[0], "tier ") {
			t.Errorf("a plan that was changed: %q", lines)
		}
		// Saved as it is and read again, its faults stand in its file.
		plan := p.Doc.Plan().Clone()
		path := filepath.Join(t.TempDir(), "mine.toml")
		plan.File = path
		p.Doc = NewDocument(plan, path)
		_, p.Look.Trouble = p.subject(plan)
		if lines := p.Troubles(); len(lines) == 0 || !strings.HasPrefix(lines[0], "mine.toml:") {
			t.Errorf("a plan in its file: %q", lines)
		}
	})
}

// A solid that is written as a scan and opened comes back as a plan of the same
// volume; STL keeps 24 bits of each coordinate.
func TestAScanBecomesAPlan(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		want, err := p.subject(p.Doc.Plan())
		if err != nil {
			t.Fatal(err)
		}
		path := filepath.Join(t.TempDir(), "scan.stl")
		file, err := os.Create(path)
		if err != nil {
			t.Fatal(err)
		}
		if err := errors.Join(facets.WriteSTL(file, want.Stone), file.Close()); err != nil {
			t.Fatal(err)
		}
		var told error
		p.Open(path, func(err error) { told = err })
		p.Look.Close()
		p.window.settle()
		if told != nil {
			t.Fatal(told)
		}
		got, err := p.subject(p.Doc.Plan())
		if err != nil {
			t.Fatal(err)
		}
		const float32Rounding = 1e-5 // of a volume, from coordinates good to 6e-8 each
		if d := got.Measures.VolumeMM3/want.Measures.VolumeMM3 - 1; math.Abs(d) > float32Rounding {
			t.Errorf("the volume is off by %g", d)
		}
		if p.Doc.Modified() || p.Doc.Path != "" || got.Material.Key != "corundum" {
			t.Errorf("modified %v, path %q, material %s", p.Doc.Modified(), p.Doc.Path, got.Material.Key)
		}
		p.Look.Close()
		p.window.settle()
	})
}
