package command

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"

	"pavilight/app/disk"
	"pavilight/facets"
)

// small is a plan of few facets, so that its searches take a second.
const small = `# A tent: kept as it is.
plan = 1
name = "Small Tent"
material = "quartz"
width_mm = 6
gear = 96

[[tier]]
name = "G"
side = "girdle"
index = 0
fold = 4
distance = 1

[[tier]]
name = "P" # mains
side = "pavilion"
angle = 40.0 # too flat
index = 0
fold = 4
level = 0

[[transfer]]

[[tier]]
name = "C"
side = "crown"
angle = 40.0
index = 0
fold = 4
level = 0.06

[[tier]]
name = "T"
side = "table"
table = 0.6
`

func TestTune(t *testing.T) {
	plan := file(t, "tent.toml", small)
	found := filepath.Join(t.TempDir(), "found.toml")
	args := []string{"tune", plan, "--vary", "P=38..46", "--step", "0.5", "--json", "--write", found, "--keep", filepath.Join(t.TempDir(), "seen")}
	got := runCommand(args...)
	if got.status != Done {
		t.Fatalf("status %d: %s", got.status, got.stderr)
	}
	var r struct {
		Plan, Material string
		Variables      []struct {
			Name           string
			Now, Low, High float64
		}
		Start, Best struct {
			Values   map[string]float64
			Score    float64
			Measures map[string]struct {
				Value float64
				Error float64 `json:"standard_error"`
			}
			Fits bool
		}
		Gain   float64
		Error  float64 `json:"gain_standard_error"`
		Better bool
		Tried  int
	}
	if err := json.Unmarshal([]byte(got.stdout), &r); err != nil {
		t.Fatal(err)
	}
	if !r.Better || !(r.Gain > 3*r.Error) || r.Best.Values["P"] < 38 || r.Best.Values["P"] > 46 || math.Mod(r.Best.Values["P"], 0.5) != 0 || !r.Best.Fits {
		t.Errorf("%+v", r)
	}
	if math.Abs(r.Best.Measures["return"].Value-r.Best.Score) > 1e-12 || r.Start.Values["P"] != 40 {
		t.Errorf("%+v", r)
	}
	// The plan that was written is the one that was found, and keeps its comments.
	text, err := os.ReadFile(found)
	if err != nil {
		t.Fatal(err)
	}
	for _, want := range []string{"# A tent: kept as it is.", "# mains", "# too flat"} {
		if !strings.Contains(string(text), want) {
			t.Errorf("the comment %q is lost:\n%s", want, text)
		}
	}
	looked := runCommand("look", found, "--in", "air", "--json", "--pixels", "16", "--error", "0.0003")
	var l struct {
		Media []struct{ Ledger struct{ Returned float64 } }
	}
	if err := json.Unmarshal([]byte(looked.stdout), &l); err != nil {
		t.Fatalf("%v: %s", err, looked.stderr)
	}
	if d := l.Media[0].Ledger.Returned - r.Best.Score; math.Abs(d) > 0.002 { // both to 0.0003 at most; the seeds differ
		t.Errorf("look returns %v, tune claims %v", l.Media[0].Ledger.Returned, r.Best.Score)
	}
	// The same again is shown from what was kept, for all but the time.
	again := runCommand(args...)
	cut := func(s string) string {
		a, rest, _ := strings.Cut(s, `"seconds"`)
		_, b, _ := strings.Cut(rest, "\n")
		return a + b
	}
	if cut(again.stdout) != cut(got.stdout) {
		t.Error("a run that was kept is shown otherwise")
	}
	// Another question is not answered from it.
	other := runCommand(append(args, "--head", "15")...)
	if other.status != OwnFault || !strings.Contains(other.stderr, "another plan, goal or set of limits") {
		t.Errorf("status %d: %s", other.status, other.stderr)
	}
}

func TestTunePrints(t *testing.T) {
	plan := file(t, "tent.toml", small)
	quick := []string{"tune", plan, "--vary", "P=41..43", "--step", "0.5"}
	got := runCommand(quick...)
	for _, want := range []string{"Small Tent, quartz", "light return in air, face-up, head 10°", "steeper", "as it stands", "more than chance", "weight, ct", "depth, % of width"} {
		if !strings.Contains(got.stdout, want) {
			t.Errorf("%q is missing:\n%s", want, got.stdout)
		}
	}
	if !strings.Contains(got.stderr, "100 %") {
		t.Errorf("no progress: %q", got.stderr)
	}
	got = runCommand(append(quick, "--csv")...)
	rows, err := csv.NewReader(strings.NewReader(got.stdout)).ReadAll()
	if err != nil || len(rows) < 4 || rows[1][0] != "P" {
		t.Errorf("%v: %v", err, rows)
	}
}

// A value may begin with a number below 0; a flag in its place is still a forgotten value.
func TestTuneTakesValuesBelowZero(t *testing.T) {
	plan := file(t, "tent.toml", small)
	quick := []string{"tune", plan, "--vary", "P=42..42.5", "--step", "0.5", "--tilts"}
	if got := runCommand(append(quick, "-10..10/10")...); got.status != Done || !strings.Contains(got.stdout, "rocked by -10°, 0°, 10°") {
		t.Errorf("exit status %d: %s%s", got.status, got.stdout, got.stderr)
	}
	if got := runCommand(append(quick, "--worst")...); got.status != CommandFault || !strings.Contains(got.stderr, "a value must follow") {
		t.Errorf("exit status %d: %s", got.status, got.stderr)
	}
}

func TestTuneField(t *testing.T) {
	plan := file(t, "tent.toml", small)
	out := t.TempDir()
	got := runCommand("tune", plan, "--field", "5x4", "--vary", "P=40..44,C=36..42", "--error", "0.02", "--out", out, "--json")
	if got.status != Done {
		t.Fatal(got.stderr)
	}
	var r struct {
		Columns, Rows int
		Cells         []struct {
			X, Y  float64
			Score *float64
			Near  bool `json:"near_best"`
		}
		Best struct{ Score float64 }
	}
	if err := json.Unmarshal([]byte(got.stdout), &r); err != nil {
		t.Fatal(err)
	}
	if r.Columns != 5 || r.Rows != 4 || len(r.Cells) != 20 || r.Cells[0].X != 40 || r.Cells[19].Y != 42 {
		t.Errorf("%+v", r)
	}
	for _, c := range r.Cells {
		if c.Score != nil && *c.Score > r.Best.Score {
			t.Errorf("a cell of %v is better than the best, %v", *c.Score, r.Best.Score)
		}
	}
	f, err := os.Open(filepath.Join(out, "field.png"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	if _, err := png.Decode(f); err != nil {
		t.Error(err)
	}
	if rows, err := os.ReadFile(filepath.Join(out, "field.csv")); err != nil || bytes.Count(rows, []byte("\n")) != 21 {
		t.Errorf("the table: %v\n%s", err, rows)
	}
}

func TestTuneToleranceAndMove(t *testing.T) {
	plan := file(t, "tent.toml", small)
	got := runCommand("tune", plan, "--tolerance", "20", "--slips", "angle=0.2,overcut=0.01", "--json")
	if got.status != Done {
		t.Fatal(got.stderr)
	}
	var r struct {
		Stones int
		Slips  map[string]float64
		Return struct{ Plan, Mean, Deviation float64 }
		Gap    struct{ Mean float64 } `json:"gap_mm"`
		Scales []struct{ Factor, Loss float64 }
	}
	if err := json.Unmarshal([]byte(got.stdout), &r); err != nil {
		t.Fatal(err)
	}
	if r.Stones != 20 || math.Abs(r.Slips["angle_deg"]-0.2) > 1e-12 || math.Abs(r.Slips["tilt_deg"]-0.2) > 1e-12 || r.Return.Deviation <= 0 || r.Gap.Mean <= 0 || len(r.Scales) != 5 {
		t.Errorf("%+v", r)
	}

	found := filepath.Join(t.TempDir(), "found.toml")
	got = runCommand("tune", plan, "--to", "diamond", "--vary", "P=40..42", "--step", "0.5", "--write", found)
	if got.status != Done {
		t.Fatal(got.stderr)
	}
	for _, want := range []string{"quartz as it stands", "diamond unchanged", "diamond by the tangent rule", "diamond by search", "Medicinal white oil", "References of the tangent rule"} {
		if !strings.Contains(got.stdout, want) {
			t.Errorf("%q is missing:\n%s", want, got.stdout)
		}
	}
	if text, _ := os.ReadFile(found); !strings.Contains(string(text), `material = "diamond"`) {
		t.Errorf("written as\n%s", text)
	}
}

func TestTuneFaults(t *testing.T) {
	plan := file(t, "tent.toml", small)
	notes := file(t, "notes.txt", "my notes")
	for _, test := range []struct {
		args   []string
		status int
		words  string
	}{
		{[]string{plan, "--vary", "Q"}, CommandFault, "nothing named"},
		{[]string{plan, "--vary", "P=44..40"}, CommandFault, "wrong way round"},
		{[]string{plan, "--vary", "P=40"}, CommandFault, "write the limits like"},
		{[]string{plan, "--vary", "P=-5..40"}, CommandFault, "out of range"},
		{[]string{plan, "--goal", "beauty"}, CommandFault, "there is no goal"},
		{[]string{plan, "--goal", "return=x"}, CommandFault, "is no number"},
		{[]string{plan, "--tilts", "20..0"}, CommandFault, "the smaller first"},
		{[]string{plan, "--tilts", "-20..20/0.01"}, CommandFault, "--tilts"},
		{[]string{plan, "--field", "4"}, CommandFault, "40x40"},
		{[]string{plan, "--field", "4x4", "--vary", "P"}, CommandFault, "two things that vary"},
		{[]string{plan, "--front"}, CommandFault, "between two goals"},
		{[]string{plan, "--front", "--field", "3x3"}, CommandFault, "different questions"},
		{[]string{plan, "--field", "4x4", "--write", "x.toml"}, CommandFault, "finds none"},
		{[]string{plan, "--write", "x.txt"}, CommandFault, "ends in .toml"},
		{[]string{plan, "--out", t.TempDir()}, CommandFault, "--write FILE.toml keeps"},
		{[]string{plan, "--write", "no/such/folder/x.toml"}, OwnFault, "cannot be written"},
		{[]string{plan, "--slips", "angle=1"}, CommandFault, "belongs to --tolerance"},
		{[]string{plan, "--tolerance", "20", "--slips", "wobble=1"}, CommandFault, "there is no error"},
		{[]string{plan, "--refs", "pavilion=1:2"}, CommandFault, "belongs to --to"},
		{[]string{plan, "--to", "quarz"}, InputFault, "quarz"},
		{[]string{plan, "--to", "diamond", "--refs", "girdle=1:2"}, CommandFault, "no side"},
		{[]string{plan, "--margin", "air"}, CommandFault, "air:2:1"},
		{[]string{plan, "--cleavage", "plan"}, CommandFault, "names no axis"},
		{[]string{plan, "--rough", "plan"}, CommandFault, "names no rough"},
		{[]string{plan, "--rough", "box:3x4"}, CommandFault, "3 sizes"},
		{[]string{plan, "--least-yield", "30"}, CommandFault, "needs the rough"},
		{[]string{plan, "--most-depth", "20", "--most-crown", "60"}, CommandFault, "raise the other"},
		{[]string{plan, "--vary", "P", "--girdle-mm", "5"}, InputFault, "Widen the limits"},
		{[]string{plan, "--keep", notes}, OwnFault, "holds nothing that tuning saw"},
		{[]string{"stone.stl"}, CommandFault, "a scan says nothing"},
		{[]string{"--round", "table=57"}, CommandFault, "what the stone is made of"},
		{[]string{"--round", "table=57", "--material", "diamond", "--tolerance", "20"}, CommandFault, "proportions have none"},
	} {
		got := runCommand(append([]string{"tune"}, test.args...)...)
		if got.status != test.status || !strings.Contains(got.stderr, test.words) || got.stdout != "" {
			t.Errorf("%v: status %d, want %d; %s", test.args, got.status, test.status, got.stderr)
		}
	}
	if text, _ := os.ReadFile(notes); string(text) != "my notes" {
		t.Errorf("the user's notes became %q", text)
	}
}

// A search that is stopped tells the best so far, keeps what it saw, and ends with the
// status of a stop; begun again it goes on to the answer of a run that was not stopped.
func TestTuneStopped(t *testing.T) {
	plan := file(t, "tent.toml", small)
	kept := filepath.Join(t.TempDir(), "seen")
	args := []string{"tune", plan, "--vary", "P=39..45", "--step", "0.25", "--json"}
	ctx, cancel := context.WithCancelCause(context.Background())
	watch := watcher(func(text string) {
		if strings.Contains(text, "20 %") {
			cancel(errors.New("interrupted"))
		}
	})
	var stdout bytes.Buffer
	status := Main(ctx, append(args, "--keep", kept), Environment{Stdout: &stdout, Stderr: watch})
	var r struct {
		Interrupted bool
		Best        struct{ Fits bool }
	}
	if err := json.Unmarshal(stdout.Bytes(), &r); status != Stopped || err != nil || !r.Interrupted || !r.Best.Fits {
		t.Fatalf("status %d, %v: %s", status, err, stdout.String())
	}
	resumed, whole := runCommand(append(args, "--keep", kept)...), runCommand(args...)
	cut := func(s string) string {
		a, rest, _ := strings.Cut(s, `"seconds"`)
		_, b, _ := strings.Cut(rest, "\n")
		return a + b
	}
	if resumed.status != Done || cut(resumed.stdout) != cut(whole.stdout) {
		t.Errorf("resumed to\n%s\nnot to\n%s", resumed.stdout, whole.stdout)
	}
}

// watcher is a writer that shows what is written.
type watcher func(text string)

func (w watcher) Write(b []byte) (int, error) {
	w(string(b))
	return len(b), nil
}

// Two searches would write into each other's lines: the second is refused in words.
func TestTuneRefusesARecordInUse(t *testing.T) {
	kept := filepath.Join(t.TempDir(), "seen")
	lock, err := disk.LockFile(kept)
	if err != nil {
		t.Fatal(err)
	}
	defer lock.Release()
	got := runCommand("tune", file(t, "tent.toml", small), "--keep", kept)
	if got.status != OwnFault || !strings.Contains(got.stderr, "another search is writing to this file; wait") {
		t.Errorf("status %d: %s", got.status, got.stderr)
	}
}

// A plan that is edited while a search for a better one runs keeps the edits, and the plan
// that was found is printed rather than lost.
func TestTuneLeavesWhatWasEditedMeanwhile(t *testing.T) {
	plan := file(t, "tent.toml", small)
	edited := small + "# a second thought\n"
	var said strings.Builder
	var once sync.Once
	watch := watcher(func(text string) {
		said.WriteString(text)
		once.Do(func() {
			if err := os.WriteFile(plan, []byte(edited), 0o600); err != nil {
				t.Error(err)
			}
		})
	})
	args := []string{"tune", plan, "--vary", "P=39..41", "--step", "1", "--write", plan}
	status := Main(context.Background(), args, Environment{Stdout: io.Discard, Stderr: watch})
	if status != OwnFault || !strings.Contains(said.String(), "was changed by another program") {
		t.Errorf("status %d: %s", status, said.String())
	}
	if got, _ := os.ReadFile(plan); string(got) != edited {
		t.Errorf("the edited plan became\n%s", got)
	}
	_, printed, _ := strings.Cut(said.String(), "so that it is not lost:\n")
	printed, _, _ = strings.Cut(printed, "pavilight: ")
	if p, err := facets.ReadPlan(strings.NewReader(printed), "printed"); err != nil || p.Name == "" {
		t.Errorf("the plan that is printed cannot be read: %v\n%s", err, printed)
	}
}
