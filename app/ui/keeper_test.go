package ui

import (
	"os"
	"path/filepath"
	"slices"
	"testing"

	"pavilight/testdata"
)

// The second window is told that the file is open in the first, and neither writes over
// what the other has saved.
func TestTwoWindowsOnOneFile(t *testing.T) {
	folder, own := t.TempDir(), t.TempDir()
	path := filepath.Join(folder, "mine.toml")
	text, err := os.ReadFile("../../testdata/plans/" + testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, text, 0o600); err != nil {
		t.Fatal(err)
	}
	stage := func(r *rig, want string) {
		t.Helper()
		r.until(t, want, func() bool { return slices.Contains(r.told, want) })
		r.told = nil
	}
	var windows [2]*rig
	for i := range windows {
		r := newRig(t, testdata.Bundled)
		r.keepFor(t, own)
		r.open(path)
		stage(r, "opened")
		windows[i] = r
		r.until(t, "a look at the file", func() bool { return !r.keeper.looking.Load() })
	}
	a, b := windows[0], windows[1]
	stage(b, "shared")
	b.escape()
	if slices.Contains(a.told, "shared") {
		t.Error("the first window is told, too")
	}
	typeInto(b, b.row(t, "P1").field, "41,25")
	b.menu.save.Action()
	stage(b, "saved")
	hers, err := os.ReadFile(path)
	if err != nil || string(hers) == string(text) {
		t.Fatalf("%v; the file is as it was: %v", err, string(hers) == string(text))
	}
	// The first has not looked yet: its save is what finds the change.
	typeInto(a, a.row(t, "P1").field, "40")
	a.told = nil
	a.menu.save.Action()
	stage(a, "refused")
	if now, _ := os.ReadFile(path); string(now) != string(hers) {
		t.Error("what the other window saved is gone")
	}
	if !a.bench.Doc.Modified() {
		t.Error("a plan that was not saved counts as saved")
	}
	a.escape()
	a.look()
	stage(a, "changed")
	a.escape() // keeps mine
	a.menu.save.Action()
	stage(a, "saved")
	if now, _ := os.ReadFile(path); string(now) == string(hers) {
		t.Error("the save that the user insisted on was not made")
	}
	b.look()
	stage(b, "changed")
}

// Work that was taken up stays on the disk until it is kept anew.
func TestWorkThatWasTakenUpIsNotLostAgain(t *testing.T) {
	folder := t.TempDir()
	r := newRig(t, testdata.Bundled)
	r.keepFor(t, folder)
	typeInto(r, r.row(t, "P1").field, "41,25")
	r.keepNow()
	r.endKeeping()
	r.keeper.recovery.Close()

	next := newRig(t, testdata.Bundled)
	next.keepFor(t, folder)
	next.keeper.keeping.Store(true) // busy, so that nothing is kept just now
	found, err := next.keeper.recovery.Find()
	if err != nil || len(found) != 1 {
		t.Fatalf("found %v, %v", found, err)
	}
	next.take(found[0])
	if left, _ := filepath.Glob(filepath.Join(folder, "unsaved-*.json")); len(left) != 1 {
		t.Errorf("before it is kept anew: %v", left)
	}
	next.keeper.keeping.Store(false)
	next.keep()
	next.until(t, "the keeping", func() bool { return len(next.keeper.taken) == 0 })
	next.endKeeping()
	next.keeper.recovery.Close() // as a kill does

	last := newRig(t, testdata.Bundled)
	last.keepFor(t, folder)
	if found, err := last.keeper.recovery.Find(); err != nil || len(found) != 1 || found[0].Plan.Tiers[0].Angle.Degrees() != 41.25 {
		t.Errorf("after another end found %v, %v", found, err)
	}
}
