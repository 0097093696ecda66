package model

import (
	"bytes"
	"encoding/json"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"testing/synctest"

	"pavilight/facets"
	"pavilight/testdata/budget"
)

// gonePID returns the number of a process that has ended.
func gonePID(t *testing.T) int {
	t.Helper()
	c := exec.Command(os.Args[0], "-test.run=^$")
	if err := c.Run(); err != nil {
		t.Fatal(err)
	}
	return c.Process.Pid
}

// leave makes the recovery's file look like one of a program that has ended.
func leave(t *testing.T, r *Recovery) {
	t.Helper()
	if err := os.Rename(r.own, filepath.Join(r.folder, "unsaved-"+strconv.Itoa(gonePID(t))+".json")); err != nil {
		t.Fatal(err)
	}
}

func TestUnsavedWorkIsFoundAgain(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		if err := p.SetAngle(0, 41.25*facets.Degree, false); err != nil {
			t.Fatal(err)
		}
		r := NewRecovery(filepath.Join(t.TempDir(), "made when needed"))
		if err := r.Keep(p.Doc.Plan(), "/somewhere/mine.toml"); err != nil {
			t.Fatal(err)
		}
		if found, err := r.Find(); len(found) != 0 || err != nil {
			t.Fatalf("a program finds its own work: %v, %v", found, err)
		}
		leave(t, r)
		found, err := r.Find()
		if err != nil || len(found) != 1 {
			t.Fatalf("found %v, %v", found, err)
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
		p.Look.Close()
		p.window.settle()
	})
}

func TestWorkOfARunningProgramIsLeftAlone(t *testing.T) {
	r := NewRecovery(t.TempDir())
	other := filepath.Join(r.folder, "unsaved-"+strconv.Itoa(os.Getppid())+".json")
	if err := os.WriteFile(other, []byte("{}"), 0o600); err != nil {
		t.Fatal(err)
	}
	if found, err := r.Find(); len(found) != 0 || err != nil {
		t.Errorf("found %v, %v", found, err)
	}
	if _, err := os.Stat(other); err != nil {
		t.Error("another program's work was touched: ", err)
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
		leave(t, r)
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
	whole, err := json.Marshal(kept{"/somewhere/mine.toml", string(round)})
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
		var work Recovered
		var err error
		budget.Hold(t, 2000*len(data), func() { work, err = readKept(file) })
		if err != nil {
			return
		}
		r := &Recovery{folder, filepath.Join(folder, "unsaved-1.json")}
		if err := r.Keep(work.Plan, work.Path); err != nil {
			t.Fatal(err)
		}
		again, err := readKept(r.own)
		if err != nil {
			t.Fatalf("what was kept is not found again: %v", err)
		}
		var a, b bytes.Buffer
		if work.Plan.Write(&a) != nil || again.Plan.Write(&b) != nil || a.String() != b.String() || again.Path != work.Path {
			t.Errorf("%q of %q became %q of %q", a.String(), work.Path, b.String(), again.Path)
		}
	})
}
