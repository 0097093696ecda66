package ui

import (
	"flag"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"testing"
	"time"
)

// writeTasks has the run of the ten tasks written down.
var writeTasks = flag.Bool("tasks", false, "write TASKS.md from the run of the ten tasks")

// How fast a person who knows the window is: to bring the pointer to a place and press, and
// for a key.
const (
	paceOfClicks = 700 * time.Millisecond
	paceOfKeys   = 150 * time.Millisecond
)

// hand does a task at a person's pace and counts what it does.
type hand struct {
	*program
	clicks, keys, moves int
	waited              time.Duration // for the window
}

func (h *hand) at(name string, dx int) (x, y string) {
	x, y = h.place(name)
	n, _ := strconv.Atoi(x)
	return strconv.Itoa(n + dx), y
}

func (h *hand) press(x, y string) {
	h.clicks++
	time.Sleep(paceOfClicks)
	h.screen.do("mousemove", x, y, "click", "1")
}

func (h *hand) click(name string) { h.press(h.place(name)) }

func (h *hand) point(name string) {
	h.moves++
	time.Sleep(paceOfClicks)
	x, y := h.place(name)
	h.screen.do("mousemove", x, y)
}

// key presses keys one after the other; a shortcut counts as one.
func (h *hand) key(keys ...string) {
	for _, k := range keys {
		h.keys++
		time.Sleep(paceOfKeys)
		h.screen.do("key", k)
	}
}

func (h *hand) write(text string) {
	h.keys += len(text)
	h.screen.do("type", "--delay", strconv.Itoa(int(paceOfKeys.Milliseconds())), text)
}

func (h *hand) until(stage string) {
	h.t.Helper()
	began := time.Now()
	h.program.until(stage)
	h.waited += time.Since(began)
}

// task is one of the things that a practitioner does without help.
type task struct {
	name, how string
	do        func(h *hand)
	seen      func() error // what came of it, outside the window; nil where the window tells
}

// TestTenTasks does what a practitioner does, with the pointer and the keyboard alone, in
// the built program. Its seconds are those of a person who knows where things are.
func TestTenTasks(t *testing.T) {
	s := newScreen(t, 1360, 860)
	home := t.TempDir()
	folder := filepath.Join(home, "plans")
	if err := os.MkdirAll(folder, 0o700); err != nil {
		t.Fatal(err)
	}
	for _, name := range []string{"oval.toml", "round.toml"} {
		copyPlan(t, name, folder)
	}
	// What stands in for the system's viewer notes what it is given.
	viewed := filepath.Join(home, "viewed")
	tools := filepath.Join(home, "bin")
	if err := os.MkdirAll(tools, 0o700); err != nil {
		t.Fatal(err)
	}
	viewer := "#!/bin/sh\nhead -c 4 \"$1\" > " + viewed + "\n"
	if err := os.WriteFile(filepath.Join(tools, "xdg-open"), []byte(viewer), 0o700); err != nil {
		t.Fatal(err)
	}
	t.Setenv("PATH", tools+string(os.PathListSeparator)+os.Getenv("PATH"))

	path := filepath.Join(folder, "round.toml")
	holds := func(path, part string) func() error {
		return func() error {
			text, err := os.ReadFile(path)
			if err == nil && !strings.Contains(string(text), part) {
				err = fmt.Errorf("%s holds no %q", filepath.Base(path), part)
			}
			return err
		}
	}
	p := s.start(inDark, 1360, 860, home, filepath.Join(folder, "oval.toml"))
	p.until("rocked")
	tasks := []task{
		{name: "Open a plan", how: "Ctrl+O, click the file, click Open; ends with refined maps", do: func(h *hand) {
			h.key("ctrl+o")
			h.until("choosing")
			h.press("592", "240") // the second file of the folder, in a window of 1360 x 860
			h.press("1098", "720")
			h.until("opened")
			h.until("refined")
			h.program.until("rocked") // no part of it
		}},
		{name: "Rock it", how: "click the small map at 10° in the strip; ends with refined maps", do: func(h *hand) {
			h.press(h.at("strip", 110))
			h.until("refined")
		}},
		{name: "Change one angle", how: "click the field of P1, type 41,8, Enter; ends with refined maps", do: func(h *hand) {
			h.click("field P1")
			h.write("41,8")
			h.key("Return")
			h.until("refined")
		}},
		{name: "Undo", how: "Ctrl+Z; ends with refined maps", do: func(h *hand) {
			h.key("ctrl+z")
			h.until("refined")
		}},
		{name: "Compare media", how: "air, water and oil stand side by side; another: click the third heading, go down to glycerol, Enter; ends with refined maps",
			do: func(h *hand) {
				h.click("medium 2")
				h.key("Down", "Down", "Down", "Down", "Down", "Return")
				h.until("refined")
			}},
		{name: "Follow a ray", how: "click a map; ends with the path in the stone and a line a bounce", do: func(h *hand) {
			h.click("map 0 0")
			h.until("followed")
		}},
		{name: "Find the window", how: "point at the leakage map in water: the number stands there, the share of the area in the ledger's line below", do: func(h *hand) {
			h.point("map 1 1")
			h.until("pointed")
		}},
		{name: "Save", how: "change an angle as above, then Ctrl+S; ends with the whole file on the disk", do: func(h *hand) {
			h.click("field P1")
			h.write("41,6")
			h.key("Return", "ctrl+s")
			h.until("saved")
		}, seen: holds(path, "angle = 41.6\n")},
		{name: "Print the sheet", how: "Ctrl+P; ends with the PDF in the system's viewer", do: func(h *hand) {
			h.key("ctrl+p")
			h.until("printed")
		}, seen: holds(viewed, "%PDF")},
		{name: "Recover after a crash", how: "killed with an unsaved change; started again: click Take them up; ends with refined maps of the changed plan", do: func(h *hand) {
			h.screen.do("key", "ctrl+1")
			h.program.until("entered")
			h.program.click("field P1")
			h.screen.do("type", "--delay", "40", "42,1")
			h.screen.do("key", "Return")
			waitForKept(h.t, home, "42.1")
			h.cmd.Process.Kill()
			h.cmd.Wait()
			*h = hand{program: s.start(inDark, 1360, 860, home)}
			h.until("offered")
			h.click("answer Take them up")
			h.until("opened")
			h.until("refined")
		}},
	}
	var rows []string
	for i, task := range tasks {
		h := &hand{program: p}
		p.forget()
		began := time.Now()
		task.do(h)
		took := time.Since(began)
		if h.program != p { // started anew: its time begins there
			p, took = h.program, time.Since(h.program.began)
		}
		if task.seen != nil {
			if err := task.seen(); err != nil {
				t.Errorf("%s: %v", task.name, err)
			}
		}
		t.Logf("%s: %.1f s, of which %.1f s waiting; %d clicks, %d keys, %d pointings", task.name, took.Seconds(), h.waited.Seconds(), h.clicks, h.keys, h.moves)
		rows = append(rows, fmt.Sprintf("| %d | %s | %.1f | %.1f | %d | %d | %s |", i+1, task.name, took.Seconds(), h.waited.Seconds(),
			h.clicks+h.moves, h.keys, task.how))
	}
	s.do("key", "ctrl+q")
	p.until("asked")
	p.click("answer Discard")
	p.ended()
	if *writeTasks {
		if err := os.WriteFile("TASKS.md", []byte(tasksPage(rows)), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// waitForKept waits until unsaved work that holds the text lies in the user's folders.
func waitForKept(t *testing.T, home, part string) {
	t.Helper()
	for until := time.Now().Add(patience); time.Now().Before(until); time.Sleep(200 * time.Millisecond) {
		found := false
		filepath.WalkDir(filepath.Join(home, ".config"), func(path string, entry fs.DirEntry, err error) error {
			if err == nil && entry.Type().IsRegular() && strings.Contains(path, "unsaved") {
				text, _ := os.ReadFile(path) // it may be gone again
				found = found || strings.Contains(string(text), part)
			}
			return nil
		})
		if found {
			return
		}
	}
	t.Fatal("no unsaved work is kept")
}

func tasksPage(rows []string) string {
	return fmt.Sprintf(`# Ten tasks

What a practitioner does in the window, each done in the built program on a virtual display with the pointer and the keyboard
alone, by %[1]s:

    go test ./app/ui -run TestTenTasks -tasks

The seconds are those of a person who knows the window: %.1[2]f s to point at a place and press, %.2[3]f s for a key. Waiting is
the part of them in which only the program works. Clicks count places that were pointed at, too; a shortcut is one key. This
run: %[4]d processors, OpenGL in software, a load of %[6]s by this and other programs.

| | task | seconds | of which waiting | clicks | keys | how |
| --- | --- | --- | --- | --- | --- | --- |
%[5]s
`, "`TestTenTasks`", paceOfClicks.Seconds(), paceOfKeys.Seconds(), runtime.NumCPU(), strings.Join(rows, "\n"), load())
}

// load is how many threads wanted a processor in the last minute.
func load() string {
	text, _ := os.ReadFile("/proc/loadavg")
	average, _, _ := strings.Cut(string(text), " ")
	return average
}
