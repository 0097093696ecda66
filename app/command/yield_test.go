package command

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

// TestCheckFitsIntoRough fits the bundled round into a cylinder made for it: its own
// width and depth with the allowance all round, and no more.
func TestCheckFitsIntoRough(t *testing.T) {
	bare := decoded[checkResult](t, "check")
	if bare.Rough != nil {
		t.Errorf("a yield without rough: %+v", bare.Rough)
	}
	// A cylinder a little longer than the round is deep: the width decides. (In a long one
	// the stone lies on its side and is larger.)
	r := decoded[checkResult](t, "check", "--rough", "cylinder:10x7", "--allowance", "0")
	if y := r.Rough; y == nil || math.Abs(y.WidthMM-10) > 0.15 || y.WidthMM < 10-1e-3 {
		t.Errorf("the width from a cylinder of 10 mm: %+v", y) // tilted a little it may be a trifle wider
	}
	with := decoded[checkResult](t, "check", "--rough", "cylinder:10x7")
	if got, want := with.Rough.WidthMM/r.Rough.WidthMM, 0.94; math.Abs(got-want) > 1e-2 {
		t.Errorf("0.3 mm all round of 10 mm leaves %v, want %v", got, want)
	}
	if share := r.Rough.Share; math.Abs(share-*r.Rough.Carats/(math.Pi*25*7*4.0/200)) > 1e-3 {
		t.Errorf("yield %v against weights", share)
	}
	plan := file(t, "own.toml", strings.Replace(bundledText(t), "gear = 96\n", "gear = 96\nrough = { shape = \"box\", size_mm = [20, 20, 20] }\n", 1))
	if own := decoded[checkResult](t, "check", plan); own.Rough == nil || own.Rough.Rough != "box 20 x 20 x 20 mm" {
		t.Errorf("a plan's own rough: %+v", own.Rough)
	}
}

// TestCheckTellsWhatTheRoughHolds asks for a stone of 8 mm from rough on either side of it.
func TestCheckTellsWhatTheRoughHolds(t *testing.T) {
	for _, row := range []struct{ rough, words string }{
		{"box:20x20x20", "8.000 mm wide: this rough holds it\n"},
		{"box:7x7x4", "8.000 mm wide: this rough holds it in no orientation"},
	} {
		if got := runCommand("check", "--rough", row.rough); got.status != Done || !strings.Contains(got.stdout, row.words) {
			t.Errorf("%s: exit status %d, %s", row.rough, got.status, got.stdout)
		}
	}
}

func bundledText(t *testing.T) string {
	t.Helper()
	text, err := os.ReadFile("../../testdata/plans/round.toml")
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// TestCheckWritesTheSolid reads back what was written.
func TestCheckWritesTheSolid(t *testing.T) {
	want := decoded[checkResult](t, "check")
	for _, name := range []string{"stone.obj", "stone.stl"} {
		path := filepath.Join(t.TempDir(), name)
		if got := runCommand("check", "--solid", path); got.status != Done {
			t.Fatal(got.stderr)
		}
		again := decoded[checkResult](t, "check", path)
		if len(again.Facets) != len(want.Facets) || math.Abs(again.VolumeMM3/want.VolumeMM3-1) > 1e-5 {
			t.Errorf("%s: %d facets, %v mm³; want %d, %v", name, len(again.Facets), again.VolumeMM3, len(want.Facets), want.VolumeMM3)
		}
	}
	for _, row := range []struct {
		args   []string
		status int
		words  string
	}{
		{[]string{"check", "--solid", "stone.txt"}, CommandFault, ".obj or .stl"},
		{[]string{"check", "--rough", "pyramid:3"}, CommandFault, "box, cylinder"},
		{[]string{"check", "--rough", "box:0.1x9x9"}, InputFault, "allowance"},
		{[]string{"check", "--rough", "scan:absent.stl"}, InputFault, "absent.stl"},
	} {
		if got := runCommand(row.args...); got.status != row.status || !strings.Contains(got.stderr, row.words) {
			t.Errorf("%v: exit status %d, %s", row.args, got.status, got.stderr)
		}
	}
}
