package command

import (
	"encoding/json"
	"image/gif"
	"image/png"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"pavilight/trace"
)

// roughly makes a report small and rough: what is tested here is not how fine it is.
var roughly = []string{"--pixels", "48", "--error", "0.02", "--lights", "overcast"}

// tellInto runs tell with the given arguments into a new folder.
func tellInto(t *testing.T, args ...string) (outcome, string) {
	t.Helper()
	folder := t.TempDir()
	all := slices.Concat([]string{"tell", "--out", folder, "--date", "2026-03-31"}, roughly, args)
	return runCommand(all...), folder
}

// TestTellSaysWhatLookSays: for the same seed, pixels and error, the numbers of a report are
// those of look --json to the last digit.
func TestTellSaysWhatLookSays(t *testing.T) {
	type media struct {
		Media []struct {
			Name, Arrangement string
			Ledger            trace.Ledger
			StandardError     trace.Ledger `json:"standard_error"`
			LeakyArea         float64      `json:"leaky_area"`
			WindowedArea      float64      `json:"windowed_area"`
			Segments          int64
		}
	}
	looked := runCommand("look", "--json", "--pixels", "48", "--error", "0.02", "--seed", "7")
	told, folder := tellInto(t, "--seed", "7", "--as", "json")
	if looked.status != Done || told.status != Done {
		t.Fatalf("statuses %d and %d\n%s%s", looked.status, told.status, looked.stderr, told.stderr)
	}
	content, err := os.ReadFile(filepath.Join(folder, "round-report.json"))
	if err != nil {
		t.Fatal(err)
	}
	var a, b media
	if err := json.Unmarshal([]byte(looked.stdout), &a); err != nil {
		t.Fatal(err)
	}
	if err := json.Unmarshal(content, &b); err != nil {
		t.Fatal(err)
	}
	if len(a.Media) != 3 || len(b.Media) != 5 {
		t.Fatalf("%d and %d columns", len(a.Media), len(b.Media))
	}
	for i := range a.Media {
		if a.Media[i] != b.Media[i] {
			t.Errorf("look says %+v, tell %+v", a.Media[i], b.Media[i])
		}
	}
}

// TestTellBatch: each stone gets its files, a broken one is told and keeps none of the
// others back.
func TestTellBatch(t *testing.T) {
	input := t.TempDir()
	good := filepath.Join(input, "good.toml")
	if err := os.WriteFile(good, roundPlan(t), 0o600); err != nil {
		t.Fatal(err)
	}
	broken := filepath.Join(input, "broken.toml")
	if err := os.WriteFile(broken, []byte("plan = 1\nname = \"Broken\"\nsparkle = 3\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	o, folder := tellInto(t, good, broken, filepath.Join(input, "none.toml"), "--as", "json")
	if o.status != InputFault {
		t.Errorf("status %d", o.status)
	}
	for _, want := range []string{"broken.toml", "sparkle", "none.toml", "2 of 3 stones", "good-report.json"} {
		if !strings.Contains(o.stderr, want) {
			t.Errorf("the message lacks %q:\n%s", want, o.stderr)
		}
	}
	if got := namesIn(t, folder); !slices.Equal(got, []string{"good-report.json"}) {
		t.Errorf("written: %v", got)
	}
}

func roundPlan(t *testing.T) []byte {
	t.Helper()
	content, err := os.ReadFile("../../testdata/plans/round.toml")
	if err != nil {
		t.Fatal(err)
	}
	return content
}

// TestTellCompares: two stones of different materials are compared, and it is said.
func TestTellCompares(t *testing.T) {
	o, folder := tellInto(t, "--compare", "../../testdata/plans/round.toml", "../../testdata/plans/step.toml", "--as", "html,csv", "--in", "air")
	if o.status != Done {
		t.Fatalf("status %d: %s", o.status, o.stderr)
	}
	if !strings.Contains(o.stderr, "different materials (Corundum, Beryl)") {
		t.Errorf("nothing is said of the materials:\n%s", o.stderr)
	}
	want := []string{"comparison.html"}
	for _, stone := range []string{"round", "step"} {
		want = append(want, stone+"-leakage-air.csv", stone+"-ledger.csv", stone+"-return-air.csv", stone+"-tilt.csv")
	}
	slices.Sort(want)
	if got := namesIn(t, folder); !slices.Equal(got, want) {
		t.Errorf("written %v, want %v", got, want)
	}
}

// TestTellMoves: moving pictures can be read back, one file a frame where asked.
func TestTellMoves(t *testing.T) {
	o, folder := tellInto(t, "--as", "none", "--moving", "gif,png,apng", "--show", "return", "--frames", "4", "--size", "40", "--in", "air")
	if o.status != Done {
		t.Fatalf("status %d: %s", o.status, o.stderr)
	}
	want := []string{"round-tilt-return-001.png", "round-tilt-return-002.png", "round-tilt-return-003.png", "round-tilt-return-004.png",
		"round-tilt-return.apng", "round-tilt-return.gif"}
	if got := namesIn(t, folder); !slices.Equal(got, want) {
		t.Fatalf("written %v", got)
	}
	file, err := os.Open(filepath.Join(folder, want[5]))
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	if g, err := gif.DecodeAll(file); err != nil || len(g.Image) != 4 {
		t.Errorf("the gif: %v", err)
	}
	one, err := os.Open(filepath.Join(folder, want[4]))
	if err != nil {
		t.Fatal(err)
	}
	defer one.Close()
	if img, err := png.Decode(one); err != nil || img.Bounds().Dx() != 40 {
		t.Errorf("the animated png: %v", err)
	}
}

func TestTellRefuses(t *testing.T) {
	t.Setenv("PATH", t.TempDir()) // no ffmpeg
	folder := t.TempDir()
	words := filepath.Join(folder, "logo.png")
	if err := os.WriteFile(words, []byte("no picture"), 0o600); err != nil {
		t.Fatal(err)
	}
	large := filepath.Join(folder, "large.png")
	if err := os.WriteFile(large, nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if err := os.Truncate(large, 200<<20); err != nil {
		t.Fatal(err)
	}
	round := "../../testdata/plans/round.toml"
	for _, row := range []struct {
		name   string
		args   []string
		status int
		want   string
	}{
		{"a scan without a scale", []string{"../../facets/testdata/scans/square-own.obj", "--material", "quartz"}, InputFault, "--width"},
		{"a stone of nothing known", []string{"--round", "table=57", "--width", "6"}, CommandFault, "--material"},
		{"a letterhead that is no picture", []string{"--letterhead", words}, InputFault, "no picture"},
		{"a letterhead of 200 MB", []string{"--letterhead", large}, InputFault, "at most 10 MB"},
		{"one stone compared", []string{"--compare", round}, CommandFault, "two or more"},
		{"five stones compared", []string{"--compare", round, round, round, round, round}, CommandFault, "at most 4"},
		{"an unknown language", []string{"--language", "la"}, CommandFault, "en, de, fr"},
		{"an unknown depth", []string{"--depth", "pupil"}, CommandFault, "client, colleague"},
		{"three lights", []string{"--lights", "room,lamps,ring"}, CommandFault, "one or two"},
		{"five surroundings", []string{"--in", "air,water,oil,ethanol,glycerol"}, CommandFault, "at most 4"},
		{"a day that is none", []string{"--date", "2026-02-30"}, CommandFault, "2026-03-31"},
		{"errors of what was not measured", []string{"--measured", "table=0.5"}, CommandFault, "crown, pavilion"},
		{"errors that are none", []string{"--measured", "crown=much"}, CommandFault, "above 0"},
		{"a film without ffmpeg", []string{"--moving", "mp4"}, OwnFault, "ffmpeg is not installed"},
		{"an unknown motion", []string{"--moving", "gif", "--motion", "fall"}, CommandFault, "tilt or turn"},
		{"long notes", []string{"--notes", strings.Repeat("x", 5000)}, CommandFault, "at most 4000"},
		{"proportions and a further plan", []string{"--round", "table=57", round, round}, CommandFault, "two stones"},
	} {
		o, out := tellInto(t, row.args...)
		if o.status != row.status || !strings.Contains(o.stderr, row.want) {
			t.Errorf("%s: status %d, want %d with %q:\n%s", row.name, o.status, row.status, row.want, o.stderr)
		}
		if got := namesIn(t, out); len(got) > 0 {
			t.Errorf("%s: written %v", row.name, got)
		}
		if o.stdout != "" {
			t.Errorf("%s: printed %q", row.name, o.stdout)
		}
	}
}

// TestTellLeavesNoHalfFile: what cannot be written is told, and what stood there stays.
func TestTellLeavesNoHalfFile(t *testing.T) {
	folder := t.TempDir()
	if err := os.MkdirAll(filepath.Join(folder, "round-report.json", "in the way"), 0o755); err != nil {
		t.Fatal(err)
	}
	o := runCommand(slices.Concat([]string{"tell", "--out", folder, "--as", "json", "--in", "air"}, roughly)...)
	if o.status != OwnFault || !strings.Contains(o.stderr, "round-report.json") {
		t.Errorf("status %d: %s", o.status, o.stderr)
	}
	if got := namesIn(t, folder); !slices.Equal(got, []string{"round-report.json"}) {
		t.Errorf("left: %v", got)
	}
}
