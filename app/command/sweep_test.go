package command

import (
	"bytes"
	"context"
	"encoding/csv"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"time"
)

// asProgram makes the test binary run a command line, one argument a line, in place of
// the tests.
const asProgram = "PAVILIGHT_TEST_COMMAND_LINE"

func TestMain(m *testing.M) {
	if args, ok := os.LookupEnv(asProgram); ok {
		os.Exit(Main(context.Background(), strings.Split(args, "\n"), Environment{Stdout: os.Stdout, Stderr: os.Stderr}))
	}
	os.Exit(m.Run())
}

// program returns a process that runs a command line.
func program(t *testing.T, args ...string) *exec.Cmd {
	t.Helper()
	cmd := exec.Command(os.Args[0])
	cmd.Env = append(os.Environ(), asProgram+"="+strings.Join(args, "\n"))
	return cmd
}

// sweepFolder goes to a fresh folder with two plans, one that is at fault and a list.
func sweepFolder(t *testing.T) {
	t.Helper()
	t.Chdir(t.TempDir())
	for name, text := range map[string]string{
		"tent.toml":     small,
		"my block.toml": fmt.Sprintf(cube, "spinel", "42", "centre = 0.6"),
		"broken.toml":   "plan = 1\nname = \"broken\"\n[[tier]]\nangle = 134\n",
		"list.txt": "# what is wanted\ntent.toml --over tilt=0..20/10\n\"my block.toml\" --in air,water --dish oil --over head=0,15\n" +
			"broken.toml\nabsent.toml\n--round table=56,crown=34,pavilion=41 --material diamond --width 6.5\n",
	} {
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// listed are the flags of a quick sweep over the list: 8 jobs, of which 2 fail.
func listed(args ...string) []string {
	return append([]string{"look", "--list", "list.txt", "--pixels", "20", "--samples", "4", "--over", "material=quartz"}, args...)
}

func mustRead(t *testing.T, path string) string {
	t.Helper()
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(text)
}

// results returns what lies in a folder of results.
func results(t *testing.T, folder string) string {
	t.Helper()
	return mustRead(t, filepath.Join(folder, "results.jsonl")) + mustRead(t, filepath.Join(folder, "results.csv"))
}

// A sweep makes the same bytes for any number of shards and workers, in any order, with a
// shard lost and done again and one done twice.
func TestSweepRepeats(t *testing.T) {
	sweepFolder(t)
	if o := runCommand(listed("--out", "whole", "--workers", "1")...); o.status != InputFault || !strings.Contains(o.stderr, "2 of 8 jobs failed") {
		t.Fatalf("status %d: %s", o.status, o.stderr)
	}
	want := results(t, "whole")
	for _, n := range []int{1, 2, 3, 7} {
		folder := fmt.Sprint("parts", n)
		for k := n; k >= 1; k-- {
			o := runCommand(listed("--out", folder, "--shard", fmt.Sprintf("%d/%d", k, n), "--workers", "2")...)
			if o.status != Done && !strings.Contains(o.stderr, "failed; their rows say why") {
				t.Fatalf("shard %d/%d: status %d: %s", k, n, o.status, o.stderr)
			}
		}
		if n == 7 {
			if err := os.Remove(filepath.Join(folder, "shard-2-of-7.jsonl")); err != nil {
				t.Fatal(err)
			}
			o := runCommand("look", "--merge", folder, "--out", folder)
			if o.status != InputFault || !strings.Contains(o.stderr, "--shard 2/7") || o.stdout != "" {
				t.Errorf("a lost shard: status %d: %s%s", o.status, o.stdout, o.stderr)
			}
			again := filepath.Join("again", "shard-1-of-7.jsonl")
			for _, args := range [][]string{{"--out", folder, "--shard", "2/7"}, {"--out", folder, "--shard", "1/7"}, {"--out", "again", "--shard", "1/7"}} {
				runCommand(listed(args...)...)
			}
			if err := os.Rename(again, filepath.Join(folder, "from-another-machine.jsonl")); err != nil {
				t.Fatal(err)
			}
		}
		if o := runCommand("look", "--merge", folder, "--out", folder); o.status != InputFault || !strings.Contains(o.stdout, "8 jobs, 2 failed") {
			t.Fatalf("%d shards: status %d: %s", n, o.status, o.stderr)
		}
		if got := results(t, folder); got != want {
			t.Errorf("%d shards make other bytes", n)
		}
	}
	if strings.Contains(want, "seconds") {
		t.Error("the results hold times")
	}
}

// sweepRow is a row of results.
type sweepRow struct {
	Job      int
	File     string
	Settings map[string]any
	Notes    []string
	Error    string
	Result   lookResult
}

func sweepRows(t *testing.T, text string) (rows []sweepRow) {
	t.Helper()
	for i, line := range strings.Split(strings.TrimSpace(text), "\n") {
		var r sweepRow
		if err := json.Unmarshal([]byte(line), &r); err != nil {
			t.Fatalf("line %d: %v", i+1, err)
		}
		if i > 0 {
			rows = append(rows, r)
		}
	}
	return rows
}

// A row says what the command says of the same plan with the same flags.
func TestSweepSaysWhatLookSays(t *testing.T) {
	sweepFolder(t)
	o := runCommand(listed("--json")...)
	rows := sweepRows(t, o.stdout)
	if o.status != InputFault || len(rows) != 8 {
		t.Fatalf("status %d, %d rows: %s", o.status, len(rows), o.stderr)
	}
	for i, args := range [][]string{
		0: {"tent.toml"}, 2: {"tent.toml", "--tilt", "20"}, 4: {"my block.toml", "--in", "air,water", "--dish", "oil", "--head", "15"},
		7: {"--round", "table=56,crown=34,pavilion=41", "--width", "6.5"},
	} {
		if args == nil {
			continue
		}
		alone := decoded[lookResult](t, append([]string{"look", "--pixels", "20", "--samples", "4", "--material", "quartz"}, args...)...)
		for k := range alone.Media {
			alone.Media[k].Seconds = 0
		}
		a, _ := json.Marshal(alone)
		b, _ := json.Marshal(rows[i].Result)
		if !bytes.Equal(a, b) {
			t.Errorf("job %d says\n%s\nlook says\n%s", i+1, b, a)
		}
	}
	if r := rows[2]; r.Job != 3 || r.File != "tent.toml" || r.Settings["tilt"] != 20.0 || r.Settings["material"] != "quartz" {
		t.Errorf("the third job is told as %+v", r)
	}
	for i, words := range map[int]string{5: "broken.toml:4", 6: "absent.toml: there is no such file"} {
		if !strings.Contains(rows[i].Error, words) || len(rows[i].Result.Media) > 0 {
			t.Errorf("job %d: %q, want words with %q", i+1, rows[i].Error, words)
		}
	}
	table, err := csv.NewReader(strings.NewReader(runCommand(listed("--csv")...).stdout)).ReadAll()
	if want := 1 + 3*3 + 2*3 + 2 + 3; err != nil || len(table) != want { // lines: a head, then one a surrounding or failure
		t.Fatalf("the table has %d lines, %v; want %d", len(table), err, want)
	}
	returned := slices.Index(table[0], "ledger.returned")
	if returned < 0 || table[1][returned] != exact(rows[0].Result.Media[0].Ledger.Returned) {
		t.Errorf("the table begins with %q and %q", table[0], table[1])
	}
}

// What is printed for people has a line for each surrounding, the settings that are not
// the same for all, and the numbers of the rows.
func TestSweepPrints(t *testing.T) {
	sweepFolder(t)
	o := runCommand(listed()...)
	rows := sweepRows(t, runCommand(listed("--json")...).stdout)
	lines := strings.Split(o.stdout, "\n")
	if want := 1 + 3*3 + 2*3 + 2 + 3 + 3; len(lines) != want { // a head, the rows, and the words at the end
		t.Fatalf("%d lines, want %d:\n%s", len(lines), want, o.stdout)
	}
	if got := strings.Fields(lines[0]); !slices.Equal(got[:4], []string{"job", "plan", "dish", "head"}) || strings.Contains(lines[0], "material") {
		t.Errorf("the head is %q", lines[0])
	}
	air := rows[1].Result.Media[0]
	for _, words := range []string{"2     tent.toml", "air", withError(air.Ledger.Returned, air.StandardError.Returned), withError(air.Ledger.Leaked, air.StandardError.Leaked)} {
		if !strings.Contains(lines[4], words) {
			t.Errorf("%q says nothing of %q", lines[4], words)
		}
	}
	if !strings.Contains(o.stdout, "oil, in a dish") || strings.Count(o.stdout, "no result") != 2 {
		t.Error(o.stdout)
	}
	found := runCommand("tune", "tent.toml", "--vary", "P=40..42", "--step", "1", "--over", "head=0,15")
	if found.status != Done || strings.Count(found.stdout, "P 40.00° → 4") != 2 || !strings.Contains(found.stdout, "gain") {
		t.Errorf("%s%s", found.stdout, found.stderr)
	}
	if field := runCommand("tune", "tent.toml", "--vary", "P=40..42,C=39..41", "--field", "2x2", "--error", "0.05", "--over", "head=0,15"); !strings.HasPrefix(field.stdout, "job,file,settings.error") {
		t.Errorf("%s%s", field.stdout, field.stderr)
	}
	if one := runCommand(quick("look", "tent.toml", "--csv")...); one.status != Done || strings.Count(one.stdout, "\n") != 4 || !strings.HasPrefix(one.stdout, "job,file") {
		t.Errorf("%s%s", one.stdout, one.stderr)
	}
}

// tune sweeps as look does.
func TestSweepOfTune(t *testing.T) {
	sweepFolder(t)
	args := func(more ...string) []string {
		return append([]string{"tune", "tent.toml", "--vary", "P=40..42", "--step", "1", "--over", "goal=return;leakage;return,leakage"}, more...)
	}
	if o := runCommand(args("--out", "whole", "--workers", "1")...); o.status != Done {
		t.Fatal(o.stderr)
	}
	for _, k := range []string{"1/2", "2/2"} {
		if o := runCommand(args("--out", "parts", "--shard", k)...); o.status != Done {
			t.Fatal(o.stderr)
		}
	}
	if o := runCommand("tune", "--merge", "parts", "--out", "parts"); o.status != Done {
		t.Fatal(o.stderr)
	}
	want := results(t, "whole")
	if got := results(t, "parts"); got != want {
		t.Errorf("two shards make\n%s\nnot\n%s", got, want)
	}
	if strings.Contains(want, "seconds") || !strings.Contains(want, `"best":{"values":{"P":`) || !strings.Contains(want, "best.values.P") {
		t.Errorf("the results are %s", want)
	}
}

// rowsDone counts the rows that the parts in a folder hold.
func rowsDone(folder string) (n int) {
	parts, _ := filepath.Glob(filepath.Join(folder, ".*.part"))
	for _, p := range parts {
		text, _ := os.ReadFile(p)
		n += max(0, strings.Count(string(text), "\n")-1)
	}
	return n
}

var kills = flag.Int("kills", 1, "how often a sweep is killed")

// A shard that is killed, at any moment and as often as may be, goes on to the same bytes.
func TestSweepKilled(t *testing.T) {
	sweepFolder(t)
	args := func(folder string) []string {
		return []string{"look", "tent.toml", "--over", "tilt=0..29/1", "--in", "air", "--pixels", "100", "--samples", "16", "--workers", "1",
			"--shard", "1/2", "--out", folder}
	}
	finish := func(folder string) string {
		if text, err := program(t, args(folder)...).CombinedOutput(); err != nil {
			t.Fatalf("%v: %s", err, text)
		}
		if n := rowsDone(folder); n > 0 {
			t.Errorf("%d rows are left behind", n)
		}
		return mustRead(t, filepath.Join(folder, "shard-1-of-2.jsonl"))
	}
	want := finish("whole")
	r := rand.New(rand.NewPCG(1, 1)) // moments differ all the same, as processes do
	done, outlived := 0, 0
	for done < *kills {
		killed := program(t, args("parts")...)
		if err := killed.Start(); err != nil {
			t.Fatal(err)
		}
		ended := make(chan error, 1)
		go func() { ended <- killed.Wait() }()
		before, grow := rowsDone("parts"), 1+r.IntN(4)
		for began := time.Now(); rowsDone("parts") < before+grow && len(ended) == 0; time.Sleep(time.Millisecond) {
			if time.Since(began) > time.Minute {
				t.Fatal("some jobs take more than a minute")
			}
		}
		time.Sleep(time.Duration(r.Int64N(int64(10 * time.Millisecond))))
		killed.Process.Kill()
		if err := <-ended; err != nil {
			done++
			continue
		}
		outlived++ // it was done before it could be killed
		if got := finish("parts"); got != want {
			t.Fatalf("after %d kills a shard became another one", done)
		}
		if err := os.RemoveAll("parts"); err != nil {
			t.Fatal(err)
		}
	}
	if finish("parts") != want {
		t.Errorf("after %d kills a shard became another one", done)
	}
	t.Logf("%d kills, %d runs to the end", done, outlived+1)
}

// Two machines that do the same part at once, as when an engine gives one up too early,
// do not disturb each other.
func TestSweepTwiceAtOnce(t *testing.T) {
	sweepFolder(t)
	args := func(folder string) []string { return listed("--shard", "1/2", "--out", folder) }
	runCommand(args("alone")...)
	var both []*exec.Cmd
	for range 2 {
		p := program(t, args("parts")...)
		if err := p.Start(); err != nil {
			t.Fatal(err)
		}
		both = append(both, p)
	}
	for _, p := range both {
		if err := p.Wait(); err != nil && p.ProcessState.ExitCode() != InputFault { // jobs of the list fail
			t.Error(err)
		}
	}
	const name = "shard-1-of-2.jsonl"
	if rowsDone("parts") > 0 {
		t.Errorf("%d rows are left behind", rowsDone("parts"))
	}
	if mustRead(t, filepath.Join("parts", name)) != mustRead(t, filepath.Join("alone", name)) {
		t.Error("two at once make other bytes than one")
	}
}

// A sweep that is stopped says so and keeps what it did; what is printed is all or none.
func TestSweepStopped(t *testing.T) {
	sweepFolder(t)
	ctx, cancel := context.WithCancelCause(t.Context())
	var stderr bytes.Buffer
	watch := watcher(func(text string) {
		stderr.WriteString(text)
		if strings.Contains(text, "traced 30 %") {
			cancel(errors.New("interrupted"))
		}
	})
	var stdout bytes.Buffer
	status := Main(ctx, listed("--out", "here"), Environment{Stdout: &stdout, Stderr: watch})
	if status != Stopped || stdout.Len() > 0 || !strings.Contains(stderr.String(), "3 of 8 jobs are done and kept") {
		t.Errorf("status %d: %s%s", status, stdout.String(), stderr.String())
	}
	runCommand(listed("--out", "here")...)
	runCommand(listed("--out", "there")...)
	if results(t, "here") != results(t, "there") {
		t.Error("a sweep that was stopped became another one")
	}
}

// A plan that is changed while the sweep runs ends it, since its rows would not belong
// together.
func TestSweepOfAPlanThatChanges(t *testing.T) {
	sweepFolder(t)
	var stderr bytes.Buffer
	watch := watcher(func(text string) {
		stderr.WriteString(text)
		if strings.Contains(text, "traced 20 %") {
			os.WriteFile("tent.toml", []byte(strings.Replace(small, "40.0", "41.0", 1)), 0o644)
		}
	})
	status := Main(t.Context(), listed("--out", "here"), Environment{Stdout: &bytes.Buffer{}, Stderr: watch})
	if status != InputFault || !strings.Contains(stderr.String(), "tent.toml (the stone of job 3) changed") {
		t.Errorf("status %d: %s", status, stderr.String())
	}
}

// Files that results depend on make another sweep when they change: the plan, the scan of
// the rough that lies beside it, materials of one's own, a panorama.
func TestSweepKnowsItsFiles(t *testing.T) {
	write := func(name, text string) {
		t.Helper()
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	materials := "materials = 1\n[[material]]\nkey = \"%s\"\nname = \"Shop glass\"\nindex = 1.6\ndensity = 2.9\nsource = \"measured here\"\n"
	panorama := "#?RADIANCE\nFORMAT=32-bit_rle_rgbe\n\n-Y 1 +X 2\n%s\x80\x80\x80\x80\x80\x80\x80"
	look := listed()
	for _, row := range []struct {
		name   string
		args   []string
		change func()
	}{
		{"plan", look, func() { write("tent.toml", strings.Replace(small, "40.0", "41.0", 1)) }},
		{"rough", []string{"tune", "bench/tent.toml", "--rough", "plan", "--vary", "P=40..41", "--step", "1", "--goal", "weight"}, func() {
			runCommand("check", "tent.toml", "--solid", "bench/rough.stl", "--width", "12")
		}},
		{"materials", append(look, "--materials", "own.toml"), func() { write("own.toml", fmt.Sprintf(materials, "other-glass")) }},
		{"panorama", append(look, "--light", "sky.hdr"), func() { write("sky.hdr", fmt.Sprintf(panorama, "\x40")) }},
	} {
		t.Run(row.name, func(t *testing.T) {
			sweepFolder(t)
			if err := os.Mkdir("bench", 0o755); err != nil {
				t.Fatal(err)
			}
			write("bench/tent.toml", strings.Replace(small, "gear = 96", "gear = 96\nrough = { shape = \"scan\", file = \"rough.stl\" }", 1))
			if o := runCommand("check", "tent.toml", "--solid", "bench/rough.stl", "--width", "10"); o.status != Done {
				t.Fatal(o.stderr)
			}
			write("own.toml", fmt.Sprintf(materials, "shop-glass"))
			write("sky.hdr", fmt.Sprintf(panorama, "\x80"))
			shard := func(k string) []string { return append(slices.Clone(row.args), "--out", "parts", "--shard", k) }
			first := runCommand(shard("1/2")...)
			if !strings.Contains(first.stdout, "Written") || strings.Contains(first.stderr, "own.toml") || strings.Contains(first.stderr, "sky.hdr") || strings.Contains(first.stderr, "rough") {
				t.Fatalf("%s%s", first.stdout, first.stderr)
			}
			if o := runCommand(shard("1/2")...); !strings.Contains(o.stdout, "Written") {
				t.Fatalf("the same again: %s", o.stderr)
			}
			row.change()
			if o := runCommand(shard("1/2")...); o.status != CommandFault || !strings.Contains(o.stderr, "another sweep") {
				t.Errorf("status %d: %s", o.status, o.stderr)
			}
			runCommand(shard("2/2")...)
			if o := runCommand(row.args[0], "--merge", "parts"); o.status != InputFault || !strings.Contains(o.stderr, "different sweeps") {
				t.Errorf("status %d: %s", o.status, o.stderr)
			}
		})
	}
}

func TestSweepRefuses(t *testing.T) {
	sweepFolder(t)
	for name, text := range map[string]string{
		"faults.txt": "tent.toml --tilt 95\n\ntent.toml --moon\ntent.toml --out here\ntent.toml --over out=a,b\n--help\n",
		"quote.txt":  "tent.toml\n\"tent.toml\n",
		"empty.txt":  "# nothing\n",
	} {
		if err := os.WriteFile(name, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	for _, row := range []struct {
		args   []string
		status int
		words  []string
	}{
		{[]string{"look", "--list", "faults.txt"}, InputFault, []string{"faults.txt:1:", "-89 to 89", "faults.txt:3:", "--moon", "faults.txt:4:", "--out", "faults.txt:5:", "faults.txt:6: --help"}},
		{[]string{"look", "--list", "quote.txt"}, InputFault, []string{"quote.txt:2:", "not closed"}},
		{[]string{"look", "--list", "empty.txt"}, InputFault, []string{"no job"}},
		{[]string{"look", "--list", "none.txt"}, InputFault, []string{"none.txt", "check the name"}},
		{[]string{"look", "tent.toml", "--list", "list.txt"}, CommandFault, []string{"--list"}},
		{[]string{"look", "tent.toml", "--over", "tilt=95"}, CommandFault, []string{"-89 to 89"}},
		{[]string{"look", "tent.toml", "--over", "moon=1"}, CommandFault, []string{"no flag --moon"}},
		{[]string{"look", "tent.toml", "--over", "workers=1,2"}, CommandFault, []string{"--workers"}},
		{[]string{"look", "tent.toml", "--over", "tilt=1", "--over", "tilt=2"}, CommandFault, []string{"twice"}},
		{[]string{"look", "tent.toml", "--shard", "1/2"}, CommandFault, []string{"--out"}},
		{[]string{"look", "tent.toml", "--shard", "0/2", "--out", "x"}, CommandFault, []string{"K from 1"}},
		{[]string{"look", "tent.toml", "--merge", "x"}, CommandFault, []string{"--merge"}},
		{[]string{"look", "--tilt", "3", "--merge", "x"}, CommandFault, []string{"--merge"}},
		{[]string{"look", "--merge", "x"}, InputFault, []string{"x", "cannot be read"}},
		{[]string{"look", "--merge", "."}, InputFault, []string{"no shard"}},
		{[]string{"look", "--mixed"}, CommandFault, []string{"--merge"}},
		{[]string{"tune", "tent.toml", "--over", "head=0,10", "--keep", "seen"}, CommandFault, []string{"--keep"}},
		{[]string{"tune", "tent.toml", "--over", "head=0,10", "--write", "a.toml"}, CommandFault, []string{"--write"}},
		{[]string{"look", "tent.toml", "--over", "tilt=1,2", "--out", filepath.Join(os.DevNull, "x")}, OwnFault, []string{"--out"}},
	} {
		o := runCommand(row.args...)
		if o.status != row.status || o.stdout != "" {
			t.Errorf("%q: status %d, want %d: %s%s", row.args, o.status, row.status, o.stdout, o.stderr)
		}
		for _, w := range row.words {
			if !strings.Contains(o.stderr, w) {
				t.Errorf("%q: %q says nothing of %q", row.args, o.stderr, w)
			}
		}
	}
	if o := runCommand(listed("--shard", "1/1", "--out", "parts")...); o.status != InputFault {
		t.Error(o.stderr)
	}
	if o := runCommand("tune", "--merge", "parts"); o.status != CommandFault || !strings.Contains(o.stderr, "pavilight look --merge parts") {
		t.Errorf("shards of another verb: status %d: %s", o.status, o.stderr)
	}
}
