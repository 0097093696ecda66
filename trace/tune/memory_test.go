package tune

import (
	"bytes"
	"context"
	"errors"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"reflect"
	"strings"
	"testing"
	"time"

	"pavilight/gems"
	"pavilight/testdata/budget"
)

// keptJudge returns a judge of a plain function with a memory.
func keptJudge(t testing.TB, path string, slow time.Duration) (*judge, *Memory) {
	t.Helper()
	j := plainJudge(span(2, -2, 2, 0), 0.001, func(x []float64) float64 {
		time.Sleep(slow)
		return math.Hypot(x[0]-1, x[1]+0.5) / 5
	})
	j.Material = material(t, "quartz")
	m := &Memory{Path: path, Purpose: "a plan"}
	if err := m.open(j); err != nil {
		t.Fatal(err)
	}
	return j, m
}

// killedFile names, in the environment of a process that is to be killed, its memory.
const killedFile = "PAVILIGHT_TEST_MEMORY"

// A process that is killed outright, in the middle of a line or not, leaves a memory from
// which the search ends where one that was not killed ends.
func TestKilled(t *testing.T) {
	if path := os.Getenv(killedFile); path != "" { // the process to be killed
		j, _ := keptJudge(t, path, time.Millisecond)
		search(context.Background(), j, nil)
		return
	}
	j := plainJudge(span(2, -2, 2, 0), 0.001, func(x []float64) float64 { return math.Hypot(x[0]-1, x[1]+0.5) / 5 })
	want, err := search(context.Background(), j, nil)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "seen")
	lines := func() int {
		text, _ := os.ReadFile(path)
		return strings.Count(string(text), "\n")
	}
	for round := range 2 {
		before := lines()
		victim := exec.Command(os.Args[0], "-test.run", "^TestKilled$")
		victim.Env = append(os.Environ(), killedFile+"="+path)
		if err := victim.Start(); err != nil {
			t.Fatal(err)
		}
		for deadline := time.Now().Add(20 * time.Second); lines() < before+50; time.Sleep(2 * time.Millisecond) {
			if time.Now().After(deadline) {
				victim.Process.Kill()
				t.Fatal("the other process writes nothing")
			}
		}
		if err := victim.Process.Kill(); err != nil {
			t.Fatal(err)
		}
		if err := victim.Wait(); err == nil {
			t.Fatal("it ended before it was killed")
		}
		if round == 1 { // as when the machine stops in the middle of a write
			text, _ := os.ReadFile(path)
			if err := os.WriteFile(path, text[:len(text)-7], 0o644); err != nil {
				t.Fatal(err)
			}
		}
	}
	j, m := keptJudge(t, path, 0)
	kept := len(j.known)
	if kept < 90 {
		t.Errorf("%d stones are remembered", kept)
	}
	got, err := search(context.Background(), j, nil)
	if err != nil {
		t.Fatal(err)
	}
	if err := m.Close(); err != nil {
		t.Fatal(err)
	}
	if got.Best.Score != want.Best.Score || got.Gain != want.Gain || got.Tried != want.Tried {
		t.Errorf("resumed to %+v, want %+v", got.Best, want.Best)
	}
	// And a run that ended is read back whole.
	j, m = keptJudge(t, path, 0)
	defer m.Close()
	j.observe = func(context.Context, []float64, effort) (sight, error) { return sight{}, errors.New("asked anew") }
	if again, err := search(context.Background(), j, nil); err != nil || again.Best.Score != want.Best.Score {
		t.Errorf("reopened: %v", err)
	}
}

// Files that hold something else are left alone, with words.
func TestMemoryFaults(t *testing.T) {
	folder := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
		return path
	}
	good := filepath.Join(folder, "good")
	_, m := keptJudge(t, good, 0)
	m.Close()
	text, err := os.ReadFile(good)
	if err != nil {
		t.Fatal(err)
	}
	for name, test := range map[string]struct{ path, purpose, words string }{
		"somebody's notes":     {write("notes", "dear diary\nmore\n"), "a plan", "nothing that tuning saw"},
		"notes without an end": {write("short", "dear diary"), "a plan", "nothing that tuning saw"},
		"another plan":         {good, "another plan", "another plan, goal or set of limits"},
		"a folder":             {folder, "a plan", folder},
		"no such folder":       {filepath.Join(folder, "a", "b"), "a plan", filepath.Join(folder, "a", "b")},
	} {
		j := plainJudge(span(2, -2, 2, 0), 0, func([]float64) float64 { return 0 })
		j.Material = material(t, "quartz")
		m := &Memory{Path: test.path, Purpose: test.purpose}
		err := m.open(j)
		var fault *MemoryError
		if !errors.As(err, &fault) || !strings.Contains(err.Error(), test.words) {
			t.Errorf("%s: %v", name, err)
		}
		m.Close()
	}
	for path, want := range map[string]string{"notes": "dear diary\nmore\n", "short": "dear diary", "good": string(text)} {
		if got, _ := os.ReadFile(filepath.Join(folder, path)); string(got) != want {
			t.Errorf("%s became %q", path, got)
		}
	}
	// A first line that was cut short, as on a full disk, is begun again.
	short := write("first line cut short", string(text[:20]))
	j, m := keptJudge(t, short, 0)
	m.Close()
	if again, _ := os.ReadFile(short); len(j.known) != 0 || string(again) != string(text) {
		t.Errorf("begun again it holds %q", again)
	}
	// Garbage after whole lines is cut off, and asked again.
	garbage := write("garbage", string(text)+`{"key":"1 2 12000 0 16 1 false","values":[[0.5]],"errors":[[0.1]]}`+"\n\x00\x00\x00\n")
	j, m = keptJudge(t, garbage, 0)
	m.Close()
	if len(j.known) != 1 {
		t.Errorf("%d stones are remembered before the garbage, want 1", len(j.known))
	}
	if left, _ := os.ReadFile(garbage); strings.Contains(string(left), "\x00") {
		t.Error("the garbage is still there")
	}
}

// A search whose memory cannot be written any more ends as one without, and Close tells.
func TestMemoryThatCannotBeWritten(t *testing.T) {
	path := filepath.Join(t.TempDir(), "seen")
	j, m := keptJudge(t, path, 0)
	whole, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	m.file.Close() // every write fails from here on
	want, err := search(context.Background(), plainJudge(j.Variables, 0.001, func(x []float64) float64 { return math.Hypot(x[0]-1, x[1]+0.5) / 5 }), nil)
	if err != nil {
		t.Fatal(err)
	}
	got, err := search(context.Background(), j, nil)
	if err != nil || got.Best.Score != want.Best.Score {
		t.Errorf("best %+v, %v", got, err)
	}
	var fault *MemoryError
	if err := m.Close(); !errors.As(err, &fault) {
		t.Errorf("closing tells %v", err)
	}
	if left, _ := os.ReadFile(path); string(left) != string(whole) {
		t.Errorf("the file holds %q", left)
	}
}

// Lines of the right form that answer other questions, or no question, are passed over.
func TestMemoryThatDoesNotFit(t *testing.T) {
	path := filepath.Join(t.TempDir(), "seen")
	_, m := keptJudge(t, path, 0)
	m.Close()
	head, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	const name = `{"key":"1 2 12000 0 16 1 false",`
	for what, line := range map[string]string{
		"no values":             name + `"short":1}`,
		"two cases":             name + `"values":[[0.5],[0.5]],"errors":[[0.1],[0.1]]}`,
		"no measure":            name + `"values":[[]],"errors":[[]]}`,
		"two measures":          name + `"values":[[0.5,0.5]],"errors":[[0.1,0.1]]}`,
		"no errors":             name + `"values":[[0.5]]}`,
		"an error below 0":      name + `"values":[[0.5]],"errors":[[-0.1]]}`,
		"a giant":               name + `"values":[[1e300]],"errors":[[0.1]]}`,
		"a single picture":      name + `"values":[[0.5]],"errors":[[0.1]],"pictures":1}`,
		"less than no distance": name + `"words":["too thin"],"short":-5}`,
	} {
		good := name + `"values":[[0.25]],"errors":[[0.1]]}`
		if err := os.WriteFile(path, []byte(string(head)+line+"\n"+strings.Replace(good, "1 2", "3 4", 1)+"\n"), 0o600); err != nil {
			t.Fatal(err)
		}
		j, m := keptJudge(t, path, 0)
		m.Close()
		if _, ok := j.known["3 4 12000 0 16 1 false"]; !ok || len(j.known) != 1 {
			t.Errorf("%s: %v is remembered, want the line after it alone", what, j.known)
		}
	}
}

// Whatever the file holds, it is left alone with words, or what is read from it answers
// questions of the problem, and it is kept up to the first line that nobody wrote.
func FuzzReadMemory(f *testing.F) {
	path := filepath.Join(f.TempDir(), "seen")
	_, m := keptJudge(f, path, 0)
	m.Close()
	head, err := os.ReadFile(path)
	if err != nil {
		f.Fatal(err)
	}
	f.Add(true, []byte(`{"key":"1 2 12000 0 16 1 false","values":[[0.5]],"errors":[[0.1]]}`+"\n"))
	f.Add(true, []byte(`{"key":"1 2 12000 0 16 1 false","words":["the girdle is thin"],"short":3.5}`+"\n{"))
	f.Add(true, []byte(`{"key":"","values":[[],[1e999]],"errors":null,"pictures":-1}`+"\n\x00\n"))
	f.Add(false, []byte(`{"pavilight":"what was seen in tuning 1","purpose":""}`+"\n"))
	f.Add(false, []byte("dear diary\n"))
	f.Add(false, []byte{})
	f.Fuzz(func(t *testing.T, ours bool, data []byte) {
		if ours {
			data = append(bytes.Clone(head), data...)
		}
		if err := os.WriteFile(path, data, 0o600); err != nil {
			t.Fatal(err)
		}
		open := func() (*judge, error) {
			j := plainJudge(span(2, -2, 2, 0), 0.001, func([]float64) float64 { return 0 })
			j.Material = &gems.Material{Key: "quartz"}
			m := &Memory{Path: path, Purpose: "a plan"}
			defer m.Close()
			return j, m.open(j)
		}
		var j *judge
		var err error
		budget.Hold(t, 100*len(data)+4*mostMemoryLine, func() { j, err = open() })
		after, readErr := os.ReadFile(path)
		if readErr != nil {
			t.Fatal(readErr)
		}
		if err != nil {
			var fault *MemoryError
			if !errors.As(err, &fault) || !bytes.Equal(after, data) {
				t.Fatalf("%v; the file became %q", err, after)
			}
			return
		}
		begun := bytes.HasPrefix(head, data) && bytes.Equal(after, head) // its first line was cut short, or there was none
		if !begun && !bytes.HasPrefix(data, after) || !bytes.HasPrefix(after, head) {
			t.Fatalf("the file became %q", after)
		}
		for name, s := range j.known {
			trial := j.Goal.weigh([]float64{1, 2}, s)
			if math.IsNaN(trial.Score) || math.IsInf(trial.Score, 0) || !(trial.Error >= 0) ||
				!trial.Seen && len(trial.Words) == 0 || trial.Seen && len(trial.Measures) != 1 {
				t.Errorf("%q: %+v", name, trial)
			}
		}
		again, err := open()
		if err != nil || !reflect.DeepEqual(again.known, j.known) {
			t.Errorf("read again: %v, %d answers, were %d", err, len(again.known), len(j.known))
		}
	})
}
