package sweep

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"pavilight/app/cell"
	"pavilight/testdata/budget"
)

// jobs returns so many jobs with keys in no order.
func jobs(n int) (all []Job) {
	for i := range n {
		settings := json.RawMessage(fmt.Sprintf(`{"tilt":%d}`, i))
		key, err := Key("look", map[string]any{"tilt": i}, nil)
		if err != nil {
			panic(err)
		}
		all = append(all, Job{File: "plan.toml", Settings: settings, Key: key})
	}
	return all
}

// run does a shard of the jobs into a folder; job 4 fails. It counts what is done.
func run(t *testing.T, folder string, all []Job, shard Shard) (*Run, *int) {
	t.Helper()
	identity, err := NewIdentity("look", all, "one program", "one kernel")
	if err != nil {
		t.Fatal(err)
	}
	count := new(int)
	return &Run{
		Identity: identity, Jobs: all, Shard: shard, Path: filepath.Join(folder, shard.Name()), Report: func(int, int) {},
		Do: func(_ context.Context, place int) (Outcome, error) {
			*count++
			if place == 3 {
				return Outcome{Error: "no such\nstone"}, nil
			}
			return Outcome{Result: fmt.Appendf(nil, "{\n  \"name\": \"=a<b\",\n  \"media\": [{\"returned\": %d.5, \"from\": [1, 2]}, {\"returned\": -1}]\n}", place)}, nil
		},
	}, count
}

func do(t *testing.T, folder string, all []Job, shard Shard) {
	t.Helper()
	r, _ := run(t, folder, all, shard)
	if _, err := r.Go(t.Context()); err != nil {
		t.Fatal(err)
	}
}

// lines returns the results of the shards in a folder as they are written.
func lines(t *testing.T, folder string) string {
	t.Helper()
	results, _, err := Merge(folder, false)
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := results.WriteLines(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func TestDeal(t *testing.T) {
	all := jobs(23)
	for of := 1; of <= 40; of++ {
		dealt := make([]int, len(all))
		least, most := len(all), 0
		for k := 1; k <= of; k++ {
			mine := Shard{k, of}.Deal(all)
			if !slices.IsSorted(mine) {
				t.Errorf("shard %d/%d is not in the order of the list: %v", k, of, mine)
			}
			least, most = min(least, len(mine)), max(most, len(mine))
			for _, i := range mine {
				dealt[i]++
			}
		}
		if slices.Min(dealt) != 1 || slices.Max(dealt) != 1 {
			t.Errorf("%d shards: jobs are dealt %v times", of, dealt)
		}
		if most-least > 1 {
			t.Errorf("%d shards have from %d to %d jobs", of, least, most)
		}
	}
}

func TestKey(t *testing.T) {
	key := func(verb string, tilt any, file string) string {
		k, err := Key(verb, map[string]any{"tilt": tilt, "head": 10}, map[string]string{"stone": file})
		if err != nil {
			t.Fatal(err)
		}
		return k
	}
	first := key("look", 0.0, "ab")
	if again := key("look", 0.0, "ab"); again != first {
		t.Errorf("the same job has the keys %s and %s", first, again)
	}
	for name, other := range map[string]string{"verb": key("tune", 0.0, "ab"), "setting": key("look", 0.5, "ab"), "file": key("look", 0.0, "ac")} {
		if other == first {
			t.Errorf("another %s has the same key", name)
		}
	}
}

func TestParseShard(t *testing.T) {
	for text, want := range map[string]Shard{"1/1": {1, 1}, "2/7": {2, 7}, " 7 / 7": {7, 7}, "100000/100000": {100000, 100000}} {
		if s, err := ParseShard(text); err != nil || s != want {
			t.Errorf("%q: %v, %v", text, s, err)
		}
	}
	for _, text := range []string{"", "3", "0/3", "4/3", "-1/3", "1/0", "a/b", "1/100001", "1/2/3", "99999999999999999999/2"} {
		if s, err := ParseShard(text); err == nil {
			t.Errorf("%q is taken for %v", text, s)
		}
	}
}

// The results are the same bytes for any number of shards, done in any order.
func TestAnyNumberOfShards(t *testing.T) {
	all := jobs(11)
	want := ""
	for _, of := range []int{1, 2, 3, 7, 20} {
		folder := t.TempDir()
		for k := of; k >= 1; k-- {
			do(t, folder, all, Shard{k, of})
		}
		got := lines(t, folder)
		if want == "" {
			want = got
		}
		if got != want {
			t.Errorf("%d shards make\n%s\nnot\n%s", of, got, want)
		}
		if left, _ := filepath.Glob(filepath.Join(folder, ".*.part")); len(left) > 0 {
			t.Errorf("%d shards leave %q behind", of, left)
		}
	}
	if n := strings.Count(want, "\n"); n != 12 {
		t.Errorf("%d lines, want a header and 11 rows", n)
	}
}

// A shard that was stopped goes on: what it had done is not done again, a line that was
// cut short is, and so is a job that failed.
func TestGoesOn(t *testing.T) {
	all := jobs(11)
	whole, folder := t.TempDir(), t.TempDir()
	do(t, whole, all, Whole)
	r, count := run(t, folder, all, Whole)
	stop := errors.New("stopped")
	work := r.Do
	r.Do = func(ctx context.Context, place int) (Outcome, error) {
		if *count == 6 {
			return Outcome{}, stop
		}
		return work(ctx, place)
	}
	if _, err := r.Go(t.Context()); !errors.Is(err, stop) {
		t.Fatalf("stopped by %v", err)
	}
	parts := r.parts()
	if len(parts) != 1 {
		t.Fatalf("a run that was stopped leaves %q", parts)
	}
	text, err := os.ReadFile(parts[0])
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(parts[0], text[:len(text)-20], 0o600); err != nil { // within the row of job 6
		t.Fatal(err)
	}
	r, count = run(t, folder, all, Whole)
	if _, err := r.Go(t.Context()); err != nil {
		t.Fatal(err)
	}
	if want := 11 - 5 + 1; *count != want { // 5 whole rows, of which one failed
		t.Errorf("%d jobs were done, want %d", *count, want)
	}
	if got, want := lines(t, folder), lines(t, whole); got != want {
		t.Errorf("went on to\n%s\nnot to\n%s", got, want)
	}
	r, count = run(t, folder, all, Whole)
	if _, err := r.Go(t.Context()); err != nil || *count != 1 {
		t.Errorf("a shard that is done does %d jobs again (%v), want the one that failed", *count, err)
	}
}

// What another program, or a run of other plans, left half done is not gone on from.
func TestGoesOnOnlyFromItsOwn(t *testing.T) {
	all := jobs(5)
	for name, foreign := range map[string]func(r *Run){
		"another program": func(r *Run) { r.Identity.Programs = []string{"another"} },
		"another sweep":   func(r *Run) { r.Identity.List = "another" },
		"another part":    func(r *Run) { r.Shard = Shard{1, 2} },
	} {
		folder := t.TempDir()
		first, _ := run(t, folder, all, Whole)
		foreign(first)
		stop := errors.New("stopped")
		work := first.Do
		first.Do = func(ctx context.Context, place int) (Outcome, error) {
			if place >= 2 {
				return Outcome{}, stop
			}
			return work(ctx, place)
		}
		if _, err := first.Go(t.Context()); !errors.Is(err, stop) {
			t.Fatal(err)
		}
		r, count := run(t, folder, all, Whole)
		if _, err := r.Go(t.Context()); err != nil || *count != 5 {
			t.Errorf("%s: %d jobs are done, want all 5: %v", name, *count, err)
		}
		if left := first.parts(); len(left) != 1 {
			t.Errorf("%s: its notes became %q", name, left)
		}
	}
}

// What is not this shard of this sweep is not written over.
func TestTaken(t *testing.T) {
	all := jobs(5)
	for name, text := range map[string]string{"something else": "a,b\n1,2\n", "an empty file": "", "another form": `{"sweep":2,"verb":"look"}` + "\n"} {
		folder := t.TempDir()
		path := filepath.Join(folder, Whole.Name())
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		r, count := run(t, folder, all, Whole)
		var taken *TakenError
		if _, err := r.Go(t.Context()); !errors.As(err, &taken) || *count != 0 {
			t.Errorf("%s: %v after %d jobs", name, err, *count)
		}
		if left, _ := os.ReadFile(path); string(left) != text {
			t.Errorf("%s became %q", name, left)
		}
	}
	folder := t.TempDir()
	do(t, folder, all, Whole)
	r, _ := run(t, folder, jobs(6), Whole)
	var taken *TakenError
	if _, err := r.Go(t.Context()); !errors.As(err, &taken) {
		t.Errorf("another sweep: %v", err)
	}
	r, _ = run(t, folder, all, Whole)
	r.Identity.Programs = []string{"another"}
	if _, err := r.Go(t.Context()); !errors.As(err, &taken) {
		t.Errorf("another program: %v", err)
	}
}

// change writes a shard's file again with one text in place of another.
func change(t *testing.T, from, to, old, with string) {
	t.Helper()
	text, err := os.ReadFile(from)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Contains(text, []byte(old)) {
		t.Fatalf("%s holds no %q", from, old)
	}
	if err := os.WriteFile(to, bytes.Replace(text, []byte(old), []byte(with), 1), 0o600); err != nil {
		t.Fatal(err)
	}
}

func TestMerge(t *testing.T) {
	all := jobs(11)
	part := func(k int) string { return Shard{k, 3}.Name() }
	for _, row := range []struct {
		name  string
		spoil func(folder string)
		mixed bool
		words string // of the error, "" for none
	}{
		{"as they are", func(string) {}, false, ""},
		{"a repeat", func(f string) { change(t, filepath.Join(f, part(2)), filepath.Join(f, "copy.jsonl"), "", "") }, false, ""},
		{"a folder of a shard's name", func(f string) {
			if err := os.Mkdir(filepath.Join(f, "shard-4-of-3.jsonl"), 0o700); err != nil {
				t.Fatal(err)
			}
		}, false, ""},
		{"earlier results", func(f string) {
			if err := os.WriteFile(filepath.Join(f, "results.jsonl"), []byte(lines(t, f)), 0o600); err != nil {
				t.Fatal(err)
			}
		}, false, ""},
		{"a lost shard", func(f string) { os.Remove(filepath.Join(f, part(2))) }, false, "shard 2 of 3 is missing; run again with --shard 2/3"},
		{"two lost shards", func(f string) { os.Remove(filepath.Join(f, part(1))); os.Remove(filepath.Join(f, part(3))) }, false, "--shard 1/3, --shard 3/3"},
		{"a shard cut short", func(f string) { os.Truncate(filepath.Join(f, part(3)), 400) }, false, "--shard 3/3"},
		{"a changed number", func(f string) { p := filepath.Join(f, part(1)); change(t, p, p, ".5", ".6") }, false, "--shard 1/3"},
		{"a shard still being done", func(f string) { p := filepath.Join(f, part(1)); change(t, p, p, "rows_sha256", "rows_sha255") }, false, "--shard 1/3"},
		{"unequal repeats", func(f string) {
			os.MkdirAll(filepath.Join(f, "x"), 0o700)
			r, _ := run(t, filepath.Join(f, "x"), all, Shard{2, 3})
			r.Do = func(context.Context, int) (Outcome, error) { return Outcome{Result: []byte("{}")}, nil }
			if _, err := r.Go(t.Context()); err != nil {
				t.Fatal(err)
			}
			os.Rename(filepath.Join(f, "x", part(2)), filepath.Join(f, "other.jsonl"))
		}, false, "both shard 2/3 and differ"},
		{"another number of shards", func(f string) { do(t, f, all, Shard{1, 4}) }, false, "one of 3 shards"},
		{"another sweep", func(f string) { os.Remove(filepath.Join(f, part(2))); do(t, f, jobs(10), Shard{2, 3}) }, false, "different sweeps"},
		{"another kernel", func(f string) { p := filepath.Join(f, part(3)); change(t, p, p, "one kernel", "two kernel") }, false, "run shard 3/3 again"},
		{"another program", func(f string) { p := filepath.Join(f, part(3)); change(t, p, p, "one program", "two program") }, false, "--mixed"},
		{"another kernel, allowed", func(f string) { p := filepath.Join(f, part(3)); change(t, p, p, "one kernel", "two kernel") }, true, ""},
		{"jobs that are not the shard's", func(f string) { p := filepath.Join(f, part(1)); change(t, p, p, `"shard":1`, `"shard":2`) }, false, "differ"},
		{"a shard that holds another's jobs", func(f string) {
			head, _, err := open(filepath.Join(f, part(1)))
			_, rows, err2 := open(filepath.Join(f, part(2)))
			if err := errors.Join(err, err2, write(filepath.Join(f, part(1)), head, rows)); err != nil {
				t.Fatal(err)
			}
		}, false, "remove them and run all again"},
		{"nothing", func(f string) {
			for k := 1; k <= 3; k++ {
				os.Remove(filepath.Join(f, part(k)))
			}
		}, false, "holds no shard"},
	} {
		t.Run(row.name, func(t *testing.T) {
			folder := t.TempDir()
			for k := 1; k <= 3; k++ {
				do(t, folder, all, Shard{k, 3})
			}
			row.spoil(folder)
			results, _, err := Merge(folder, row.mixed)
			var told *MergeError
			switch {
			case row.words == "" && (err != nil || results.Len() != 11):
				t.Errorf("%v", err)
			case row.words != "" && (!errors.As(err, &told) || !strings.Contains(err.Error(), row.words)):
				t.Errorf("%v, want words with %q", err, row.words)
			case row.mixed && !slices.Equal(results.Identity.Kernels, []string{"one kernel", "two kernel"}):
				t.Errorf("the kernels are told as %q", results.Identity.Kernels)
			}
		})
	}
}

func TestTable(t *testing.T) {
	folder := t.TempDir()
	all := jobs(4)
	all[0].File = "@plan.toml"
	do(t, folder, all, Whole)
	results, _, err := Merge(folder, false)
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := results.WriteTable(&b); err != nil {
		t.Fatal(err)
	}
	rows, err := csv.NewReader(&b).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	want := [][]string{
		{"job", "file", "settings.tilt", "name", "returned", "notes", "error", "key"},
		{"1", "'@plan.toml", "0", "'=a<b", "0.5", "", "", all[0].Key},
		{"1", "'@plan.toml", "0", "'=a<b", "-1", "", "", all[0].Key},
		{"2", "plan.toml", "1", "'=a<b", "1.5", "", "", all[1].Key},
		{"2", "plan.toml", "1", "'=a<b", "-1", "", "", all[1].Key},
		{"3", "plan.toml", "2", "'=a<b", "2.5", "", "", all[2].Key},
		{"3", "plan.toml", "2", "'=a<b", "-1", "", "", all[2].Key},
		{"4", "plan.toml", "3", "", "", "", "no such; stone", all[3].Key},
	}
	if fmt.Sprint(rows) != fmt.Sprint(want) {
		t.Errorf("the table is\n%q\nnot\n%q", rows, want)
	}
}

func TestReadList(t *testing.T) {
	text := "\ufeff# tilts\r\n\r\nplan.toml --tilt 10\r\n  'my plan.toml'\t--in \"air,white oil\" --body #a03048:5\nx\"y z\"w ''\n"
	same := func(a, b Line) bool { return a.Number == b.Number && slices.Equal(a.Words, b.Words) }
	got, err := ReadList(strings.NewReader(text), "list")
	want := []Line{
		{3, []string{"plan.toml", "--tilt", "10"}},
		{4, []string{"my plan.toml", "--in", "air,white oil", "--body", "#a03048:5"}},
		{5, []string{"xy zw", ""}},
	}
	if err != nil || !slices.EqualFunc(got, want, same) {
		t.Errorf("%v, %v; want %v", got, err, want)
	}
	for text, words := range map[string]string{"": "no job", "# only\n": "no job", "a\n\"b\n": "list:2: a \" is opened", "a\x00b": "NUL"} {
		if got, err := ReadList(strings.NewReader(text), "list"); err == nil || !strings.Contains(err.Error(), words) {
			t.Errorf("%q: %v, %v", text, got, err)
		}
	}
}

func TestParseOver(t *testing.T) {
	isNumber := func(name string) bool { return name == "tilt" }
	for text, want := range map[string]string{
		"tilt=0,10, 20":         `{"tilt" ["0" "10" "20"]}`,
		"--tilt=-10..10/10,45":  `{"tilt" ["-10" "0" "10" "45"]}`,
		"tilt=0..1/0.1":         `{"tilt" ["0.0" "0.1" "0.2" "0.3" "0.4" "0.5" "0.6" "0.7" "0.8" "0.9" "1.0"]}`,
		"tilt=0..1/0.3":         `{"tilt" ["0.0" "0.3" "0.6" "0.9"]}`,
		"in=air,water; oil":     `{"in" ["air,water" "oil"]}`,
		"tilts=-20..20/10;0":    `{"tilts" ["-20..20/10" "0"]}`,
		"film=P1=1.48:20;P2=1:": `{"film" ["P1=1.48:20" "P2=1:"]}`,
	} {
		if o, err := ParseOver(text, isNumber); err != nil || fmt.Sprintf("%q", o) != want {
			t.Errorf("%q: %q, %v; want %s", text, o, err, want)
		}
	}
	for _, text := range []string{"", "tilt", "tilt=", "=1", "tilt=1,,2", "tilt=1..0/1", "tilt=0..1", "tilt=0..1/0", "tilt=0..1/-1",
		"tilt=0..1e9/1", "tilt=0..1000000/1", "tilt=a..b/c", "tilt=0..NaN/1", "tilt=0..Inf/1"} {
		if o, err := ParseOver(text, isNumber); err == nil {
			t.Errorf("%q is taken for %q", text, o)
		}
	}
	got := fmt.Sprint(Product([]Over{{"a", []string{"1", "2"}}, {"b", []string{"x", "y"}}}))
	if want := "[[1 x] [1 y] [2 x] [2 y]]"; got != want {
		t.Errorf("%s, want %s", got, want)
	}
}

// Whatever a file of results holds, it is refused or its rows can be written, read again
// and put into a table.
func FuzzReadResults(f *testing.F) {
	folder := f.TempDir()
	all := jobs(3)
	identity, err := NewIdentity("look", all, "one program", "one kernel")
	if err != nil {
		f.Fatal(err)
	}
	r := &Run{Identity: identity, Jobs: all, Shard: Shard{1, 1}, Path: filepath.Join(folder, "seed.jsonl"), Report: func(int, int) {},
		Do: func(_ context.Context, place int) (Outcome, error) {
			return Outcome{Result: []byte(`{"name":"=a<b","media":[{"returned":0.5,"from":[1,2]}],"points":[]}`), Notes: []string{"-n"}}, nil
		}}
	if _, err := r.Go(context.Background()); err != nil {
		f.Fatal(err)
	}
	whole, err := os.ReadFile(r.Path)
	if err != nil {
		f.Fatal(err)
	}
	f.Add(whole)
	f.Add(whole[:len(whole)-20])
	head, rows, _ := bytes.Cut(whole, []byte("\n"))
	f.Add(append(bytes.Replace(head, []byte(`"rows_sha256"`), []byte(`"x"`), 1), append([]byte("\n"), rows...)...))
	f.Add([]byte(`{"sweep":1,"jobs":2}` + "\n" + `{"job":3,"settings":{},"result":{}}` + "\n"))
	f.Add([]byte(`{"sweep":1,"jobs":2147483648,"of":-1}` + "\n"))
	f.Add([]byte(`{"sweep":1,"jobs":9,"shard":1,"of":1}` + "\n" + `{"job":1,"settings":{"a":[[1]],"b":{"c":null}},"result":[{"":"="}]}` + "\n"))
	path := filepath.Join(folder, "fuzz.jsonl")
	f.Fuzz(func(t *testing.T, data []byte) {
		var head header
		var rows []line
		var err error
		budget.Hold(t, 200*len(data), func() { head, rows, err = read(bytes.NewReader(data)) })
		if err != nil {
			if len(rows) > 0 {
				t.Errorf("rows beside %v", err)
			}
			return
		}
		for i := range rows {
			if rows[i].Job > head.Jobs || !bytes.Contains(data, rows[i].text) {
				t.Errorf("row %q of %d jobs", rows[i].text, head.Jobs)
			}
		}
		results := Results{Identity: head.Identity, lines: rows}
		var table bytes.Buffer
		if err := results.WriteTable(&table); err == nil {
			cells, err := csv.NewReader(&table).ReadAll()
			if err != nil || len(cells) < 1 {
				t.Fatalf("the table does not read: %v", err)
			}
			for _, row := range cells[1:] {
				for _, text := range row {
					if text != cell.Text(text) {
						t.Errorf("a spreadsheet takes %q for a formula", text)
					}
				}
			}
		}
		if err := write(path, head, rows); err != nil {
			t.Fatal(err)
		}
		_, again, err := open(path)
		if err != nil || digestOf(again) != digestOf(rows) {
			t.Errorf("read again: %v, %d rows, were %d", err, len(again), len(rows))
		}
	})
}

// Whatever a list holds, it is refused or each of its lines has words.
func FuzzReadList(f *testing.F) {
	f.Add([]byte("plan.toml --tilt 10\n# note\n\n\"a plan.toml\" --in 'air, water'\r\n"))
	f.Add([]byte("\ufeff'"))
	f.Add([]byte("\"\" ''\n\x00"))
	f.Fuzz(func(t *testing.T, data []byte) {
		var lines []Line
		var err error
		budget.Hold(t, 100*len(data), func() { lines, err = ReadList(bytes.NewReader(data), "list.txt") })
		if err != nil {
			if !strings.HasPrefix(err.Error(), "list.txt:") {
				t.Errorf("%v names no file", err)
			}
			return
		}
		for _, l := range lines {
			if len(l.Words) == 0 || l.Number < 1 {
				t.Errorf("line %+v", l)
			}
		}
	})
}
