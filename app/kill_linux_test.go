package main

import (
	"bufio"
	"bytes"
	"encoding/json"
	"errors"
	"flag"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"syscall"
	"testing"
	"time"
	"unsafe"

	"pavilight/app/disk"
	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/testdata"
)

// kills is how often the program is killed; a few times are a smoke test.
var kills = flag.Int("kills", 24, "how often TestKill kills the program; 900 for the real run")

// TestKill kills the program outright at random moments, half of them aimed into a write,
// and looks at what is left: every document is whole, old or new, nothing half-written is
// offered as one, and the next start finds the newest work and sweeps up.
//
// Saving and autosave run in a process of their own that does what the window does, with
// the code of package model that the window runs, but shows nothing; package ui kills the
// window itself. The commands are those of the built program.
func TestKill(t *testing.T) {
	if folder := os.Getenv(saverFolder); folder != "" { // the process to be killed
		saver(folder)
		return
	}
	if testing.Short() {
		t.Skip("the program is built and started over and over; run without -short")
	}
	program := builtProgram(t)
	total := tally{}
	for _, s := range []struct {
		name  string
		share int // of all kills, in per cent
		run   func(t *testing.T, program string, kills int) tally
	}{
		{"save and autosave", 50, killSaver},
		{"cut", 15, killCut},
		{"tune --write", 15, killTuneWrite},
		{"tune --keep", 10, killTuneKeep},
		{"tell", 10, killTell},
	} {
		t.Run(s.name, func(t *testing.T) {
			got := s.run(t, program, max(1, *kills*s.share/100))
			t.Logf("%d kills, of which %d between the start and the end of a write, %d of them with the new file half-way; %d processes ended before they were killed",
				got.kills, got.within, got.half, got.late)
			total.kills, total.within, total.half = total.kills+got.kills, total.within+got.within, total.half+got.half
		})
	}
	t.Logf("in all %d kills, %d of them within a write, %d with the new file half-way", total.kills, total.within, total.half)
}

// tally counts what happened to the processes.
type tally struct {
	kills  int // were killed
	within int // of those, in a write
	half   int // of those, with a new file begun that had not yet its name
	late   int // ended before
}

func builtProgram(t *testing.T) string {
	t.Helper()
	program := filepath.Join(t.TempDir(), "pavilight")
	build := exec.Command("go", "build", "-buildvcs=false", "-o", program, "pavilight/app")
	build.Env = append(os.Environ(), "CGO_ENABLED=0")
	if out, err := build.CombinedOutput(); err != nil {
		t.Fatalf("%v\n%s", err, out)
	}
	return program
}

// saverFolder names, in the environment of a process that is to be killed, where it works.
const saverFolder = "PAVILIGHT_TEST_SAVER"

// stoneNumber returns the plan that the saver saves or keeps at its nth step, long enough
// that half of it would show.
func stoneNumber(n int) (*facets.Plan, string) {
	content, err := fs.ReadFile(testdata.Plans(), testdata.Bundled)
	if err != nil {
		panic(err)
	}
	plan, err := facets.ReadPlan(bytes.NewReader(content), testdata.Bundled)
	if err != nil {
		panic(err)
	}
	number(plan, n)
	var text strings.Builder
	plan.Write(&text) // a builder takes all
	return plan, text.String()
}

func number(plan *facets.Plan, n int) {
	plan.Name = fmt.Sprintf("Stone %d", n)
	plan.Notes = strings.Repeat(fmt.Sprintf("This is stone number %d. ", n), 2000)
}

// saver edits a plan and saves or keeps it, over and over, and tells of each step before
// and after. It ends when it is killed.
func saver(folder string) {
	path := filepath.Join(folder, "stones", "mine.toml")
	plan, err := facets.OpenPlan(path)
	if err != nil {
		panic(err)
	}
	jobs := make(chan func(), 100)
	bench, err := model.NewBench(model.NewDocument(plan, path), func(f func()) { jobs <- f }, func(model.Change) {}, func() {})
	if err != nil {
		panic(err)
	}
	recovery := model.NewRecovery(filepath.Join(folder, "unsaved"))
	first := 1
	fmt.Sscanf(plan.Name, "Stone %d", &first)
	fmt.Println("ready")
	for n := first + 1; ; n++ {
		bench.Doc.Edit(words.Later("width"), "", func(p *facets.Plan) { number(p, n) })
		if n%3 != 0 {
			fmt.Println("begin", n)
			if err := recovery.Keep(recovery.Turn(), bench.Doc.Work()); err != nil {
				panic(err)
			}
			fmt.Println("kept", n)
			continue
		}
		fmt.Println("begin", n)
		saved := false
		bench.Save(path, false, recovery, func(err error) {
			if err != nil {
				panic(err)
			}
			saved = true
		})
		for !saved {
			(<-jobs)()
		}
		fmt.Println("saved", n)
	}
}

// killSaver kills the saver.
func killSaver(t *testing.T, _ string, kills int) (n tally) {
	folder := t.TempDir()
	path := filepath.Join(folder, "stones", "mine.toml")
	if err := os.Mkdir(filepath.Dir(path), 0o700); err != nil {
		t.Fatal(err)
	}
	_, text := stoneNumber(0)
	if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
		t.Fatal(err)
	}
	newest := 0
	for n.kills < kills && !t.Failed() {
		c := exec.Command(os.Args[0], "-test.run=^TestKill$")
		c.Env = append(os.Environ(), saverFolder+"="+folder)
		c.Stderr = os.Stderr
		out, err := c.StdoutPipe()
		if err == nil {
			err = c.Start()
		}
		if err != nil {
			t.Fatal(err)
		}
		lines := bufio.NewReader(out)
		last := state{newest: newest}
		steps, aimed := rand.IntN(8), n.kills%2 == 0
		began := time.Now()
		var took time.Duration // of a step
		for {                  // some whole steps
			line, err := lines.ReadString('\n')
			if err != nil {
				t.Fatal("the saver ended by itself: ", err)
			}
			last.read(line)
			switch {
			case strings.HasPrefix(line, "begin"):
				began = time.Now()
			case !strings.HasPrefix(line, "ready"):
				took = time.Since(began)
			}
			if took > 0 && steps <= 0 && (!aimed || strings.HasPrefix(line, "begin")) {
				break
			}
			steps--
		}
		wait := 8 * took // that and more steps fit into
		if aimed {
			wait = took
		}
		time.Sleep(rand.N(max(wait, time.Microsecond)))
		c.Process.Kill()
		rest, _ := io.ReadAll(lines)
		if c.Wait(); c.ProcessState.Exited() {
			t.Fatal("the saver ended by itself")
		}
		for line := range strings.Lines(string(rest)) {
			last.read(line)
		}
		n.kills++
		if last.under > 0 {
			n.within++
		}
		halves, _ := filepath.Glob(filepath.Join(folder, "*", ".*.new")) // the pattern is a good one
		if len(halves) > 0 {
			n.half++
		}
		newest = last.check(t, folder, path)
	}
	return n
}

// state is what the saver told before it was killed.
type state struct {
	newest int // of the steps that ended
	under  int // the step that had begun and not ended; 0 for none
}

func (s *state) read(line string) {
	var word string
	var n int
	if fmt.Sscanf(line, "%s %d", &word, &n); word == "begin" {
		s.under = n
	} else if word == "kept" || word == "saved" {
		s.newest, s.under = n, 0
	}
}

// check looks at what was left, starts anew as the window does, and returns the number of
// the newest stone.
func (s *state) check(t *testing.T, folder, path string) int {
	t.Helper()
	numberOf := func(plan *facets.Plan, text string) int {
		n := -1
		fmt.Sscanf(plan.Name, "Stone %d", &n)
		if _, want := stoneNumber(n); text != want {
			t.Errorf("stone %d is not whole:\n%.300s", n, text)
		}
		return n
	}
	content, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	plan, err := facets.OpenPlan(path)
	if err != nil {
		t.Fatalf("the document is lost: %v", err)
	}
	inFile := numberOf(plan, string(content))
	onlyDocuments(t, filepath.Dir(path), []string{"mine.toml"})
	recovery := model.NewRecovery(filepath.Join(folder, "unsaved"))
	defer recovery.Close()
	found, err := recovery.Find()
	if err != nil || len(found) > 1 {
		t.Errorf("unsaved work: %v, %v", found, err)
	}
	newest := inFile
	if len(found) > 0 {
		var text strings.Builder
		found[0].Plan.Write(&text) // a builder takes all
		if newest = numberOf(found[0].Plan, text.String()); newest <= inFile {
			t.Errorf("stone %d is offered, but the file holds stone %d", newest, inFile)
		}
		if found[0].Path != path || found[0].Changed {
			t.Errorf("offered as work on %s, written to since: %v", found[0].Path, found[0].Changed)
		}
	}
	if newest != s.newest && (newest != s.under || s.under == 0) {
		t.Errorf("the newest is stone %d; stone %d was told to be kept or saved, stone %d was under way", newest, s.newest, s.under)
	}
	// The next start: it takes the work up, saves it and forgets it.
	disk.SweepBeside(path)
	if len(found) > 0 {
		if err := disk.Replace(path, found[0].Plan.Write); err != nil {
			t.Fatal(err)
		}
		recovery.Discard(found[0])
	}
	recovery.Close()
	for _, f := range []string{filepath.Dir(path), filepath.Join(folder, "unsaved")} {
		left, _ := os.ReadDir(f)
		if want := map[bool]int{true: 1}[f == filepath.Dir(path)]; len(left) != want {
			t.Errorf("after the next start %s holds %v", f, left)
		}
	}
	return newest
}

// onlyDocuments checks that the folder holds these files and nothing else but hidden files
// that a write left, which no dialog and no pattern offers.
func onlyDocuments(t *testing.T, folder string, names []string) (leftovers int) {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		switch name := e.Name(); {
		case slices.Contains(names, name):
		case strings.HasPrefix(name, ".") && strings.HasSuffix(name, ".new"):
			leftovers++
		default:
			t.Errorf("%s was left in the folder", name)
		}
	}
	return leftovers
}

// victim is a command of the built program that writes files into a folder.
type victim struct {
	program string
	args    []string
	folder  string
	olds    map[string][]byte // what the files held before
	news    map[string][]byte // what a run that is not killed writes
	whole   time.Duration     // of such a run
	write   time.Duration     // of one file

	patience int // how many may end before they are killed, until none is aimed at any more
}

// learn runs the command to its end, with other arguments for the old files.
func (v *victim) learn(t *testing.T, old []string) {
	t.Helper()
	run := func(args []string) map[string][]byte {
		began := time.Now()
		if out, err := exec.Command(v.program, args...).CombinedOutput(); err != nil {
			t.Fatalf("%v: %v\n%s", args, err, out)
		}
		v.whole = time.Since(began)
		return v.files(t)
	}
	v.olds = run(old)
	v.news = run(v.args)
	if len(v.news) == 0 || len(v.news) != len(v.olds) {
		t.Fatalf("it writes %d files, and %d with the old arguments", len(v.news), len(v.olds))
	}
	for name, content := range v.news {
		if bytes.Equal(content, v.olds[name]) {
			t.Fatalf("%s is the same before and after", name)
		}
	}
	v.write = 2 * time.Millisecond // to begin with
}

// files returns what the folder's documents hold.
func (v *victim) files(t *testing.T) map[string][]byte {
	t.Helper()
	all := map[string][]byte{}
	entries, err := os.ReadDir(v.folder)
	if err != nil {
		t.Fatal(err)
	}
	for _, e := range entries {
		if strings.HasPrefix(e.Name(), ".") {
			continue
		}
		if all[e.Name()], err = os.ReadFile(filepath.Join(v.folder, e.Name())); err != nil {
			t.Fatal(err)
		}
	}
	return all
}

// kill runs the command and kills it: at any moment, or aimed at a write. Then it looks
// at each file, and now and then at a run that is not killed.
func (v *victim) kill(t *testing.T, n *tally) {
	t.Helper()
	for name, content := range v.olds {
		if err := os.WriteFile(filepath.Join(v.folder, name), content, 0o600); err != nil {
			t.Fatal(err)
		}
	}
	seen := watchFolder(t, v.folder)
	defer seen.close()
	// It runs with less right to the processor than this process, which has to be quick.
	c := exec.Command("nice", append([]string{"-n", "19", v.program}, v.args...)...)
	if err := c.Start(); err != nil {
		t.Fatal(err)
	}
	ended := make(chan struct{})
	go func() { c.Wait(); close(ended) }()
	if n.kills%4 != 0 && n.late < v.patience { // aimed at one of the writes
		seen.write(rand.IntN(len(v.news)), ended, rand.N(v.write))
	} else {
		select {
		case <-time.After(rand.N(v.whole)):
		case <-ended:
		}
	}
	c.Process.Kill()
	<-ended
	under, took := seen.under()
	if took > 0 {
		v.write = (3*v.write + took) / 4
	}
	if c.ProcessState.Exited() {
		n.late++
		return
	}
	n.kills++
	if under {
		n.within++
		n.half++ // a write of a command begins and ends with that
	}
	names := []string{}
	for name, content := range v.files(t) {
		names = append(names, name)
		if !bytes.Equal(content, v.olds[name]) && !bytes.Equal(content, v.news[name]) {
			t.Errorf("%s is neither as before nor as after: %d bytes", name, len(content))
		}
	}
	if len(names) != len(v.news) {
		t.Errorf("the files are %v", names)
	}
	leftovers := onlyDocuments(t, v.folder, names)
	if n.kills%8 == 1 || leftovers > 2 {
		if out, err := exec.Command(v.program, v.args...).CombinedOutput(); err != nil {
			t.Errorf("after a kill: %v\n%s", err, out)
		}
		if left := onlyDocuments(t, v.folder, names); left > 0 {
			t.Errorf("%d files are left over by the next run", left)
		}
	}
}

// harm kills the command so many times.
func (v *victim) harm(t *testing.T, kills int) (n tally) {
	v.patience = 8*kills + 20
	for n.kills < kills && n.late < 20*kills+50 && !t.Failed() {
		v.kill(t, &n)
	}
	if n.kills < kills {
		t.Errorf("only %d of %d processes were killed before they ended", n.kills, kills)
	}
	return n
}

// watch tells what happens to the files of a folder, by inotify(7).
type watch struct {
	t    *testing.T
	file *os.File
	come chan event
	all  []event
}

type event struct {
	name string
	mask uint32
	at   time.Time
}

func watchFolder(t *testing.T, folder string) *watch {
	t.Helper()
	fd, err := syscall.InotifyInit1(syscall.IN_CLOEXEC | syscall.IN_NONBLOCK)
	if err == nil {
		_, err = syscall.InotifyAddWatch(fd, folder, syscall.IN_CREATE|syscall.IN_MOVED_FROM|syscall.IN_DELETE)
	}
	if err != nil {
		t.Fatal("inotify: ", err)
	}
	w := &watch{t: t, file: os.NewFile(uintptr(fd), "inotify"), come: make(chan event, 1000)}
	go func() {
		defer close(w.come)
		for buffer := make([]byte, 64<<10); ; {
			n, err := w.file.Read(buffer)
			if err != nil {
				return
			}
			for rest := buffer[:n]; len(rest) >= syscall.SizeofInotifyEvent; {
				e := (*syscall.InotifyEvent)(unsafe.Pointer(&rest[0]))
				name := rest[syscall.SizeofInotifyEvent : syscall.SizeofInotifyEvent+e.Len]
				rest = rest[syscall.SizeofInotifyEvent+e.Len:]
				w.come <- event{string(bytes.TrimRight(name, "\x00")), e.Mask, time.Now()}
			}
		}
	}()
	return w
}

func (w *watch) close() { w.file.Close() }

// write returns in the nth write, counted from 0, so long after its beginning, or when the
// process has ended.
func (w *watch) write(nth int, ended <-chan struct{}, after time.Duration) {
	for {
		select {
		case e := <-w.come:
			w.all = append(w.all, e)
			if e.mask&syscall.IN_CREATE == 0 || strings.HasPrefix(e.name, ".pavilight.") {
				continue
			}
			if nth--; nth < 0 {
				for time.Since(e.at) < after { // sleeping would last too long
				}
				return
			}
		case <-ended:
			return
		}
	}
}

// under reports whether a write had begun and not ended, and how long the last whole one
// took. The process must have ended.
func (w *watch) under() (under bool, took time.Duration) {
	for { // what the kernel still has to tell
		select {
		case e := <-w.come:
			w.all = append(w.all, e)
			continue
		case <-time.After(3 * time.Millisecond):
		}
		break
	}
	open := map[string]time.Time{}
	for _, e := range w.all {
		if strings.HasPrefix(e.name, ".pavilight.") {
			continue
		}
		if e.mask&syscall.IN_CREATE != 0 {
			open[e.name] = e.at
		} else if began, ok := open[e.name]; ok {
			took = e.at.Sub(began)
			delete(open, e.name)
		}
	}
	return len(open) > 0, took
}

// tent is a plan of few facets, so that little time goes into anything but writing.
func tent(t *testing.T, folder, material, remark string) string {
	t.Helper()
	text := fmt.Sprintf(`plan = 1
name = "Tent"
material = %q
width_mm = 6
gear = 96
[[tier]]
name = "G"
side = "girdle"
index = 0
fold = 4
distance = 1
[[tier]]
name = "P"
side = "pavilion"
angle = 40
index = 0
fold = 4
level = -0.03
[[transfer]]
[[tier]]
name = "C"
side = "crown"
angle = 40
index = 0
fold = 4
level = 0.03
[[tier]]
name = "T"
side = "table"
table = 0.6
`, material) + remark
	path := filepath.Join(folder, "tent.toml")
	if err := errors.Join(os.MkdirAll(folder, 0o700), os.WriteFile(path, []byte(text), 0o600)); err != nil {
		t.Fatal(err)
	}
	return path
}

// killCommand kills a command that writes into a folder of its own; its arguments follow
// from plan and folder.
func killCommand(t *testing.T, program string, kills int, remark string, args func(plan, folder string) []string) tally {
	t.Helper()
	place := t.TempDir()
	v := &victim{program: program, folder: filepath.Join(place, "written")}
	if err := os.Mkdir(v.folder, 0o700); err != nil {
		t.Fatal(err)
	}
	v.args = args(tent(t, filepath.Join(place, "new"), "quartz", remark), v.folder)
	v.learn(t, args(tent(t, filepath.Join(place, "old"), "beryl", remark), v.folder))
	return v.harm(t, kills)
}

func killCut(t *testing.T, program string, kills int) tally {
	return killCommand(t, program, kills, "", func(plan, folder string) []string {
		return []string{"cut", plan, "--no-maps", "--as", "pdf,svg", "--out", folder}
	})
}

func killTell(t *testing.T, program string, kills int) tally {
	return killCommand(t, program, kills, "", func(plan, folder string) []string {
		return []string{"tell", plan, "--in", "air", "--lights", "even", "--pixels", "48", "--error", "0.05", "--as", "pdf,html,json,csv", "--out", folder}
	})
}

// tuneArgs asks for a search that takes a moment.
func tuneArgs(plan string, more ...string) []string {
	return append([]string{"tune", plan, "--vary", "P=38..42", "--step", "1", "--json"}, more...)
}

// killTuneWrite kills searches that write the plan found; they have a record to go on
// from, so that most of their time is that of the start and the write.
func killTuneWrite(t *testing.T, program string, kills int) tally {
	const lines = 8000 // so that the write takes a moment; 1 MiB is the most that a plan may be
	remark := strings.Repeat("# A long remark that stays in the plan, line by line.\n", lines)
	return killCommand(t, program, kills, remark, func(plan, folder string) []string {
		return tuneArgs(plan, "--write", filepath.Join(folder, "found.toml"), "--keep", filepath.Join(filepath.Dir(plan), "seen"))
	})
}

// answer returns what a search printed but for the time that it took.
func answer(out []byte) string {
	a, rest, _ := strings.Cut(string(out), `"seconds"`)
	_, b, _ := strings.Cut(rest, "\n")
	return a + b
}

// killTuneKeep kills searches anywhere and begins them again with their record, until they
// end; the end is that of a search that was never killed. A line of the record is one call
// of the system, which no kill cuts in two, so none of these counts as within a write.
func killTuneKeep(t *testing.T, program string, kills int) (n tally) {
	folder := t.TempDir()
	plan, seen := tent(t, folder, "quartz", ""), filepath.Join(folder, "seen")
	began := time.Now()
	out, err := exec.Command(program, tuneArgs(plan)...).Output()
	if err != nil {
		t.Fatal(err)
	}
	whole, want := time.Since(began), answer(out)
	for n.kills < kills && !t.Failed() {
		c := exec.Command(program, tuneArgs(plan, "--keep", seen)...)
		var out, said bytes.Buffer
		c.Stdout, c.Stderr = &out, &said
		if err := c.Start(); err != nil {
			t.Fatal(err)
		}
		end := time.AfterFunc(rand.N(whole), func() { c.Process.Kill() })
		err := c.Wait()
		end.Stop()
		if err == nil {
			if got := answer(out.Bytes()); got != want {
				t.Errorf("a search that was killed and went on ends in\n%s\nnot in\n%s", got, want)
			}
			os.Remove(seen)
			n.late++
			continue
		}
		if c.ProcessState.Exited() {
			t.Errorf("%v: %s", err, said.String())
		}
		n.kills++
		content, err := os.ReadFile(seen)
		if errors.Is(err, fs.ErrNotExist) {
			continue // it had not come so far
		}
		for line := range strings.Lines(string(content)) {
			if strings.HasSuffix(line, "\n") && !json.Valid([]byte(line)) {
				t.Errorf("the record has a line %q", line)
			}
		}
	}
	return n
}
