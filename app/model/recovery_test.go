package model

import (
	"bytes"
	"encoding/json"
	"errors"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"testing/synctest"
	"time"

	"pavilight/app/disk"
	"pavilight/facets"
	"pavilight/testdata/budget"
)

func TestUnsavedWorkIsFoundAgain(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		if err := p.SetAngle(0, 41.25*facets.Degree, false); err != nil {
			t.Fatal(err)
		}
		r := NewRecovery(filepath.Join(t.TempDir(), "made when needed"))
		work := p.Doc.Work()
		work.Path = "/somewhere/mine.toml"
		if err := r.Keep(r.Turn(), work); err != nil {
			t.Fatal(err)
		}
		if found, err := r.Find(); len(found) != 0 || err != nil {
			t.Fatalf("a program finds its own work: %v, %v", found, err)
		}
		next := NewRecovery(r.folder)
		if found, err := next.Find(); len(found) != 0 || err != nil {
			t.Fatalf("the work of a running program is offered: %v, %v", found, err)
		}
		r.Close() // as the program's end does
		third := NewRecovery(r.folder)
		r = next
		found, err := r.Find()
		if err != nil || len(found) != 1 {
			t.Fatalf("found %v, %v", found, err)
		}
		if found, err := third.Find(); len(found) != 0 || err != nil {
			t.Fatalf("work is offered in two windows: %v, %v", found, err)
		}
		p.Recover(found[0])
		if got := p.Doc.Plan().Tiers[0].Angle; got != 41.25*facets.Degree {
			t.Errorf("recovered P1 at %v", got)
		}
		if !p.Doc.Modified() || p.Doc.Path != "/somewhere/mine.toml" {
			t.Errorf("recovered work: modified %v, path %q", p.Doc.Modified(), p.Doc.Path)
		}
		r.Discard(found[0])
		if found, _ := r.Find(); len(found) != 0 {
			t.Error("discarded work is found again")
		}
		if left, _ := os.ReadDir(r.folder); len(left) != 0 {
			t.Errorf("left in the folder: %v", left)
		}
		p.Look.Close()
		p.window.settle()
	})
}

// The clock has no say in which work is the newest: it may have been set back between two
// runs, and files may have been copied.
func TestTheNewestIsOfferedFirst(t *testing.T) {
	folder := t.TempDir()
	plan, err := facets.ReadPlan(strings.NewReader(string(bundledText(t))), "bundled")
	if err != nil {
		t.Fatal(err)
	}
	now := time.Now()
	for i := range 4 {
		r := NewRecovery(folder)
		older := plan.Clone()
		older.WidthMM = 99
		later := plan.Clone()
		later.WidthMM = float64(i + 1)
		first, second := r.Turn(), r.Turn()
		if err := errors.Join(r.Keep(second, Work{Plan: later}), r.Keep(first, Work{Plan: older})); err != nil { // it comes late, and has no say
			t.Fatal(err)
		}
		r.Drop(first) // nor has this
		back := now.Add(-time.Duration(i) * time.Hour)
		if err := os.Chtimes(r.own, back, back); err != nil {
			t.Fatal(err)
		}
		r.Close()
	}
	next := NewRecovery(folder)
	defer next.Close()
	found, err := next.Find()
	if err != nil || len(found) != 4 {
		t.Fatalf("found %v, %v", found, err)
	}
	for i, work := range found {
		if want := float64(4 - i); work.Plan.WidthMM != want {
			t.Errorf("place %d is work number %v, want %v", i, work.Plan.WidthMM, want)
		}
	}
}

// Work that is in its file after all is not offered; work whose file was written to since
// is, with word of that, and saving it asks.
func TestWorkAndItsFile(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "mine.toml")
	text := string(bundledText(t))
	plan, err := facets.ReadPlan(strings.NewReader(text), "mine.toml")
	if err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		name, file     string
		found, changed bool
	}{
		{"saved after all", text, false, false},
		{"not saved", "before", true, false},
		{"written by others", "theirs", true, true},
	} {
		r := NewRecovery(filepath.Join(folder, "unsaved"))
		if err := r.Keep(r.Turn(), Work{plan, path, disk.StampOfText("before")}); err != nil {
			t.Fatal(err)
		}
		r.Close()
		if err := os.WriteFile(path, []byte(c.file), 0o600); err != nil {
			t.Fatal(err)
		}
		next := NewRecovery(filepath.Join(folder, "unsaved"))
		found, err := next.Find()
		if err != nil || len(found) != map[bool]int{true: 1}[c.found] {
			t.Errorf("%s: found %v, %v", c.name, found, err)
			continue
		}
		if c.found {
			if found[0].Changed != c.changed {
				t.Errorf("%s: changed %v", c.name, found[0].Changed)
			}
			next.Discard(found[0])
		}
		next.Close()
	}
}

func TestTheSecondWindowIsTold(t *testing.T) {
	folder := t.TempDir()
	a, b := NewClaims(folder), NewClaims(folder)
	for i, step := range []struct {
		claims *Claims
		path   string
		want   bool
	}{
		{a, "/x/one.toml", false},
		{a, "/x/one.toml", false},
		{b, "/x/one.toml", true},
		{b, "/x/two.toml", false},
		{b, "/x/one.toml", true},
		{a, "/x/three.toml", false},
		{b, "/x/one.toml", false},
		{a, "/x/one.toml", true},
		{b, "", false},
		{a, "/x/one.toml", false},
	} {
		if got := step.claims.Take(step.path); got != step.want {
			t.Errorf("step %d, %s: open elsewhere is %v", i, step.path, got)
		}
	}
	a.Release()
	if left, _ := os.ReadDir(folder); len(left) != 0 {
		t.Errorf("left in the folder: %v", left)
	}
}

func TestDamagedWorkIsSetAsideInWords(t *testing.T) {
	for name, content := range map[string]string{
		"cut off":   `{"path":"a","plan":"plan = 1`,
		"rubbish":   "\x00\x01\x02",
		"no plan":   `{"path":"a","plan":"hello"}`,
		"empty":     "",
		"too large": `{"plan":"` + strings.Repeat("x", mostKept) + `"}`,
	} {
		r := NewRecovery(t.TempDir())
		if err := os.WriteFile(r.own, []byte(content), 0o600); err != nil {
			t.Fatal(err)
		}
		r = NewRecovery(r.folder) // the next run
		found, err := r.Find()
		if len(found) != 0 || err == nil || !strings.Contains(err.Error(), "damaged") {
			t.Errorf("%s: found %v, error %v", name, found, err)
		}
		if again, err := r.Find(); len(again) != 0 || err != nil {
			t.Errorf("%s: told twice: %v, %v", name, again, err)
		}
		left, _ := os.ReadDir(r.folder)
		if len(left) != 1 {
			t.Errorf("%s: %d files left, want the damaged one kept", name, len(left))
		}
	}
}

// Whatever the file holds, it is refused or is work whose plan can be kept and found again.
func FuzzReadKept(f *testing.F) {
	round, err := os.ReadFile("../../testdata/plans/rod.toml")
	if err != nil {
		f.Fatal(err)
	}
	whole, err := json.Marshal(kept{7, "/somewhere/mine.toml", disk.StampOfText("before"), string(round)})
	if err != nil {
		f.Fatal(err)
	}
	f.Add(whole)
	f.Add([]byte(`{"path":"../../x\u0000","plan":"plan = 1"}`))
	f.Add([]byte(`{"plan":` + strings.Repeat("[", 1000)))
	f.Add([]byte(`{"path":1,"plan":null,"plan":"x","PLAN":"y"}`))
	folder := f.TempDir()
	file := filepath.Join(folder, "unsaved-0.json")
	f.Fuzz(func(t *testing.T, data []byte) {
		if err := os.WriteFile(file, data, 0o600); err != nil {
			t.Fatal(err)
		}
		var work *Recovered
		var err error
		budget.Hold(t, 2000*len(data), func() { work, err = readRecovered(file) })
		if err != nil || work == nil {
			return
		}
		r := NewRecovery(folder)
		defer os.Remove(r.own)
		defer r.Close()
		if err := r.Keep(r.Turn(), work.Work); err != nil {
			t.Fatal(err)
		}
		again, err := readRecovered(r.own)
		if err != nil || again == nil {
			t.Fatalf("what was kept is not found again: %v", err)
		}
		var a, b bytes.Buffer
		if work.Plan.Write(&a) != nil || again.Plan.Write(&b) != nil || a.String() != b.String() || again.Path != work.Path || again.Known != work.Known || again.sequence == 0 {
			t.Errorf("%q of %q became %q of %q", a.String(), work.Path, b.String(), again.Path)
		}
	})
}
