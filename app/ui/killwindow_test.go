package ui

import (
	"bytes"
	"flag"
	"fmt"
	"math/rand/v2"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"pavilight/app/disk"
	"pavilight/app/model"
)

// windowKills is how often the window is killed; a few times are a smoke test.
var windowKills = flag.Int("kills", 2, "how often TestKillWindow kills the real window; 100 for the real run")

// TestKillWindow edits and saves in the real window, over and over, and kills it at random:
// in a save, between saves, and while it keeps unsaved work after it was told to end. The
// file is whole, old or new, and what is kept beside it is newer than the file.
func TestKillWindow(t *testing.T) {
	s := newScreen(t, 1360, 860)
	text, err := os.ReadFile("../../testdata/plans/round.toml")
	if err != nil {
		t.Fatal(err)
	}
	home := t.TempDir()
	path := filepath.Join(home, "stones", "mine.toml")
	if err := os.Mkdir(filepath.Dir(path), 0o700); err != nil {
		t.Fatal(err)
	}
	k := &killing{screen: s, home: home, path: path, text: string(text)}
	within, ended := 0, 0
	for n := range *windowKills {
		if err := os.WriteFile(path, text, 0o600); err != nil {
			t.Fatal(err)
		}
		ending := n%3 == 1
		p := k.edit(ending)
		if ending {
			p.cmd.Process.Signal(syscall.SIGTERM)
			time.Sleep(rand.N(40 * time.Millisecond))
		}
		p.cmd.Process.Kill()
		p.cmd.Wait()
		if p.cmd.ProcessState.Exited() { // it was quicker
			ended++
		}
		if k.check(t, p, ending && p.cmd.ProcessState.Exited()) {
			within++
		}
		if t.Failed() {
			t.Fatalf("at kill %d the window had said\n%s", n, p.said())
		}
	}
	t.Logf("%d kills of the window, %d of them within a write; %d times it had ended by itself, as it was told", *windowKills-ended, within, ended)
}

// killing is a file that a window is killed over.
type killing struct {
	screen     *screen
	home, path string
	text       string
	x, y       string // of the field for the angle of P1, once it is known
	typed      []string
}

// content is what the file holds with the ith of the typed angles, from 1; 0 is as it was.
func (k *killing) content(i int) string {
	if i == 0 {
		return k.text
	}
	return strings.Replace(k.text, "angle = 41.5", "angle = "+k.typed[i-1], 1)
}

// edit starts the window, types some angles and saves after each, or after none where it
// is to be told to end. It returns at the moment for a kill.
func (k *killing) edit(ending bool) *program {
	const edits = 4
	p := k.screen.start(inDark, 1360, 860, k.home, k.path)
	p.until("opened")
	if k.x == "" {
		p.until("refined")
		k.x, k.y = p.place("field P1")
	}
	k.typed = nil
	for i := range edits {
		k.typed = append(k.typed, fmt.Sprintf("41.%d", 61+i))
	}
	// One click: after Enter all is marked, and what is typed next replaces it. Quick clicks
	// would be double ones, of which the toolkit tells a moment later, amid the typing.
	keys := []string{"mousemove", k.x, k.y, "click", "1"}
	one := func(angle string) []string {
		return []string{"type", "--delay", "8", "--args", "1", angle, "key", "--delay", "8", "Return"}
	}
	if ending {
		k.screen.do(append(keys, one(k.typed[0])...)...)
		time.Sleep(200 * time.Millisecond)
		return p
	}
	for _, angle := range k.typed {
		keys = append(append(keys, one(angle)...), "key", "--delay", "8", "ctrl+s")
	}
	done := make(chan struct{})
	go func() { defer close(done); k.screen.do(keys...) }()
	saves := 1 + rand.IntN(edits)
	for range saves {
		p.until("saving")
	}
	time.Sleep(rand.N(8 * time.Millisecond))
	p.cmd.Process.Kill() // now: what is left of the typing goes to nobody
	<-done
	return p
}

// check looks at what a kill left, and reports whether it fell into a write.
func (k *killing) check(t *testing.T, p *program, ended bool) (within bool) {
	t.Helper()
	for range p.stages { // until its output ends
	}
	said := p.said()
	begun, done := strings.Count(said, "READY saving"), strings.Count(said, "READY saved")
	within = begun > done
	content, err := os.ReadFile(k.path)
	if err != nil {
		t.Error("the document is lost: ", err)
		return
	}
	inFile := -1
	for i := done; i <= begun; i++ {
		if string(content) == k.content(i) {
			inFile = i
		}
	}
	if inFile < 0 {
		t.Errorf("%d saves had begun and %d ended; the file holds\n%s", begun, done, angles(string(content)))
	}
	unsaved := filepath.Join(k.home, ".config", "fyne", appID, "unsaved")
	if left, _ := filepath.Glob(filepath.Join(unsaved, ".*.new")); len(left) > 0 {
		within = true
	}
	recovery := model.NewRecovery(unsaved)
	defer recovery.Close()
	found, err := recovery.Find()
	if err != nil || len(found) > 1 {
		t.Errorf("unsaved work: %v, %v", found, err)
	}
	if ended && len(found) == 0 {
		t.Error("it ended in its own time and kept nothing")
	}
	for _, work := range found {
		var text bytes.Buffer
		if err := work.Plan.Write(&text); err != nil {
			t.Error(err)
		}
		// Saves that were asked for wait for each other: it is the plan of the one that was
		// under way, or a later one.
		newer := false
		for i := inFile + 1; i <= max(begun, 1); i++ {
			newer = newer || text.String() == k.content(i)
		}
		if !newer || work.Path != k.path || work.Changed {
			t.Errorf("the file holds the plan number %d of %d, and this is offered for %s (%v):\n%s", inFile, begun, work.Path, work.Changed, angles(text.String()))
		}
		recovery.Discard(work)
	}
	disk.SweepBeside(k.path)
	if left, _ := os.ReadDir(filepath.Dir(k.path)); len(left) != 1 {
		t.Errorf("the next start leaves %v", left)
	}
	return within
}

// angles returns the lines of a plan that tell angles.
func angles(plan string) (lines string) {
	for line := range strings.Lines(plan) {
		if strings.HasPrefix(line, "angle") {
			lines += line
		}
	}
	return lines
}
