//go:build unix

package ui

import (
	"flag"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"testing"
	"time"
)

// hour is how long the real window is worked in; without it one round is a smoke test.
var hour = flag.Duration("hour", 0, "how long the soak works in the real window, as 1h; 0 for one round")

// state is what the window holds at rest, and how its thread was held since the last time.
type state map[string]float64

func readState(line string) state {
	words := strings.Fields(line)[1:]
	s := state{}
	for i := 0; i+1 < len(words); i += 2 {
		s[words[i]], _ = strconv.ParseFloat(words[i+1], 64)
	}
	return s
}

// state asks the window what it holds.
func (p *program) state() state {
	p.t.Helper()
	p.mu.Lock()
	before := len(p.states)
	p.mu.Unlock()
	if err := p.cmd.Process.Signal(syscall.SIGUSR1); err != nil {
		p.t.Fatal(err)
	}
	for until := time.Now().Add(p.patience); time.Now().Before(until); time.Sleep(50 * time.Millisecond) {
		p.mu.Lock()
		told := p.states[before:]
		p.mu.Unlock()
		if len(told) > 0 {
			return readState(told[0])
		}
	}
	p.t.Fatal("the window does not tell what it holds")
	return nil
}

// choose opens the file of the plan's folder that comes as the given one, by the toolkit's
// own dialog, which shows them in rows of icons after one for the folder above. It waits for
// the maps, for the places of the plan's tiers, which the entered room tells, and for more.
func (p *program) choose(number int, more ...string) {
	p.t.Helper()
	p.screen.do("key", "ctrl+o")
	p.until("choosing")
	const left, pitch, top = 424, 84, 240 // of the icons, in a window of 1360 x 860
	p.screen.do("mousemove", strconv.Itoa(left+(number+1)*pitch), strconv.Itoa(top), "click", "1")
	p.screen.do("mousemove", "1098", "720", "click", "1") // Open
	p.until("opened")
	p.until(append(more, "refined", "entered")...)
}

// drag moves the pointer from one place by steps, with the button down.
func (p *program) drag(from string, dx, dy, steps int) {
	p.t.Helper()
	x, y := p.place(from)
	atX, _ := strconv.Atoi(x)
	atY, _ := strconv.Atoi(y)
	p.screen.do("mousemove", x, y, "mousedown", "1")
	for range steps {
		atX, atY = atX+dx, atY+dy
		p.screen.do("mousemove", strconv.Itoa(atX), strconv.Itoa(atY))
		time.Sleep(20 * time.Millisecond) // a hand's pace, so that the drag is seen as one
	}
	p.screen.do("mouseup", "1")
}

// saveAs names the file that the window asks for.
func (p *program) saveAs(name string) {
	p.t.Helper()
	p.until("choosing")
	p.screen.do("key", "ctrl+a")
	p.screen.do("type", "--delay", "20", name)
	p.screen.do("key", "Return")
	p.until("written")
}

// worked is a sample that the soak works on; mains is the angle of its tier P1.
type worked struct {
	file  string
	mains float64
}

// workedPlans are in the order of a folder. They also have a tier C1, and make a stone with
// either half a degree off. The last is only looked at.
func workedPlans() []worked {
	return []worked{{"cushion.toml", 43}, {"octagon.toml", 57}, {"round-chequer.toml", 38}, {"round.toml", 41.5}}
}

// work does one round of what people do in the window, ended at rest with the last plan.
func (p *program) work(round int, folder string) {
	p.t.Helper()
	s, plans := p.screen, workedPlans()
	number := round % (len(plans) - 1)
	copyPlan(p.t, plans[number].file, folder)
	p.choose(number)

	// Edits: typed, stepped, dragged, taken back and done again.
	p.click("field P1")
	s.do("type", "--delay", "30", strings.Replace(fmt.Sprintf("%.1f", plans[number].mains+0.1*float64(1+round%3)), ".", ",", 1))
	s.do("key", "Return")
	p.until("refined")
	s.do("key", "Up", "Up", "Down")
	p.until("refined")
	p.drag("slider C1", 1, 0, 4)
	p.until("refined")
	s.do("key", "ctrl+z")
	p.until("refined")
	s.do("key", "ctrl+y")
	p.until("refined")

	// Looks: over the maps, rocked, along a ray, another quantity, the solid turned.
	for _, m := range []string{"map 0 0", "map 1 2", "map 0 1"} {
		p.drag(m, 3, 1, 10) // the first press follows a ray
	}
	p.click("strip")
	s.do("key", "Left", "Left")
	p.until("refined")
	s.do("key", "Right", "Right")
	p.until("refined")
	p.drag("solid", 4, 3, 15)
	shown := 1 + round%7
	for _, downs := range []int{shown, 1} { // then light return again
		p.click("row 0")
		time.Sleep(300 * time.Millisecond)
		s.do(append([]string{"key"}, slices.Repeat([]string{"Down"}, downs)...)...)
		s.do("key", "Return")
		time.Sleep(300 * time.Millisecond)
		if downs > 5 { // path lengths and colours are traced
			p.until("refined")
		}
	}

	// A better angle, the sheet, the report.
	s.do("key", "ctrl+2")
	p.until("entered")
	p.click("search")
	p.until("answered")
	s.do("key", "ctrl+1")
	p.until("entered")
	s.do("key", "ctrl+s")
	p.until("saved")
	s.do("key", "ctrl+3")
	p.until("sheet")
	sheet := fmt.Sprintf("sheet-%d.pdf", round)
	p.click("save sheet")
	p.saveAs(sheet)
	s.do("key", "ctrl+4")
	p.until("told")
	report := fmt.Sprintf("report-%d.pdf", round)
	p.click("save report")
	p.saveAs(report)
	for _, written := range []string{sheet, report} {
		path := filepath.Join(folder, written)
		if text, err := os.ReadFile(path); err != nil || !strings.HasPrefix(string(text), "%PDF") {
			p.t.Errorf("%s was told of and is no PDF (%v)", written, err)
		}
		os.Remove(path)
	}
	p.choose(len(plans)-1, "rocked")
	time.Sleep(time.Second)
}

// TestAnHourInTheWindow works in the built program's window as a person does: opens, edits,
// looks, tunes, sheets and reports. After each round, at rest with the same plan, the window
// tells what it holds. After a warm-up of a sixth of the time nothing may grow or shrink by
// more than a twentieth, the mean of the last third against that of the first; and no call
// of ours may hold the window's thread for more than longestHold.
func TestAnHourInTheWindow(t *testing.T) {
	s := newScreen(t, 1360, 860)
	home := t.TempDir()
	folder := filepath.Join(home, "plans")
	if err := os.MkdirAll(folder, 0o700); err != nil {
		t.Fatal(err)
	}
	for _, w := range workedPlans() {
		copyPlan(t, w.file, folder)
	}
	p := s.start(inDark, 1360, 860, home, filepath.Join(folder, "round.toml"))
	p.patience = 5 * time.Minute // other programs may want the machine, too
	p.until("rocked")
	p.state() // forgets the start

	began := time.Now()
	var states []state
	warm := 0
	for round := 0; round == 0 || time.Since(began) < *hour; round++ {
		p.work(round, folder)
		states = append(states, p.state())
		if time.Since(began) < *hour/6 {
			warm = len(states)
		}
		t.Logf("%v: %v", time.Since(began).Round(time.Second), states[round])
	}
	s.do("key", "ctrl+q")
	p.ended()

	for _, what := range []string{"ours_most", "waited_most", "toolkit_most", "frame_most", "unseen_most", "late_99"} {
		t.Logf("%s: at most %.1f ms in %d rounds", what, slices.Max(column(states, what)), len(states))
	}
	if most := slices.Max(column(states, "unseen_most")); most > float64(longestHold.Milliseconds()) {
		t.Errorf("for %.0f ms nobody looked at the window's thread: a hold may have been missed", most)
	}
	held := states[warm:]
	const least = 9 // rounds that make a comparison
	if len(held) < least {
		return
	}
	for _, what := range []string{"heap_kB", "resident_kB", "goroutines", "files"} {
		all := column(held, what)
		third := len(all) / 3
		early, late := mean(all[:third]), mean(all[len(all)-third:])
		t.Logf("%s: %.0f to %.0f, the first third %.1f, the last %.1f, %+.1f %%", what, slices.Min(all), slices.Max(all),
			early, late, 100*(late/early-1))
		const flat = 0.05
		if late > early*(1+flat) || late < early*(1-flat) {
			t.Errorf("%s is not flat: %v", what, all)
		}
	}
}

func column(states []state, what string) (values []float64) {
	for _, s := range states {
		values = append(values, s[what])
	}
	return values
}

func mean(values []float64) float64 {
	sum := 0.0
	for _, v := range values {
		sum += v
	}
	return sum / float64(len(values))
}
