package model

import (
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"
	"testing/synctest"

	"pavilight/facets"
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
