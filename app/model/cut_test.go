package model

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"

	"pavilight/app/sheet"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
)

// cutRoom returns a room with the bundled plan in it, on the test's own goroutine.
// settle does the window's work until all is done.
func cutRoom(t *testing.T, maps bool) (room *Cut, settle func()) {
	t.Helper()
	plan, err := facets.ReadPlan(bytes.NewReader(bundledText(t)), "harbour-eight.toml")
	if err != nil {
		t.Fatal(err)
	}
	corundum, err := gems.Find("corundum")
	if err != nil {
		t.Fatal(err)
	}
	air, err := gems.Find("air")
	if err != nil {
		t.Fatal(err)
	}
	var mu sync.Mutex
	var queue []func()
	room = NewCut(sheet.Machines(t.TempDir()), func(f func()) {
		mu.Lock()
		defer mu.Unlock()
		queue = append(queue, f)
	}, func() {})
	room.Wish.Maps = maps
	room.SetWidth(120)
	settle = func() {
		for {
			room.Wait()
			mu.Lock()
			all := queue
			queue = nil
			mu.Unlock()
			if len(all) == 0 {
				return
			}
			for _, f := range all {
				f()
			}
		}
	}
	t.Cleanup(func() { room.Stop(); settle() })
	room.SetSubject(plan, corundum, []Around{{Medium: air}}, 10*facets.Degree, "test")
	return room, settle
}

func TestTheSheetIsLaidOutAndWritten(t *testing.T) {
	c, settle := cutRoom(t, false)
	if !c.Running || c.Ready() {
		t.Error("right after asking, the sheet counts as made")
	}
	settle()
	if !c.Ready() || c.Pages() < 2 || c.Picture == nil || c.Picture.Rect.Dx() != 120 {
		t.Fatalf("ready %v, %d pages, trouble %v", c.Ready(), c.Pages(), c.Trouble)
	}
	if got, want := float64(c.Picture.Rect.Dy()), 120*297.0/210; math.Abs(got-want) > 1 {
		t.Errorf("an A4 page (ISO 216) 120 pixels wide is %v high, want %.0f", got, want)
	}
	first := c.Picture
	c.Turn(1)
	settle()
	if c.Page != 1 || bytes.Equal(first.Pix, c.Picture.Pix) {
		t.Error("the second page looks like the first")
	}
	c.Turn(99)
	if c.Page != c.Pages()-1 {
		t.Errorf("turned beyond the end to %d of %d", c.Page, c.Pages())
	}
	path := filepath.Join(t.TempDir(), c.FileName())
	var files []string
	c.Write(path, func(f []string, err error) {
		if err != nil {
			t.Error(err)
		}
		files = f
	})
	settle()
	if text, err := os.ReadFile(path); err != nil || !bytes.HasPrefix(text, []byte("%PDF-")) || len(files) != 1 {
		t.Errorf("the file begins with %.8q, %v; told %v", text, err, files)
	}
}

// The sheet speaks the language that is asked for, whatever the room speaks.
func TestTheSheetSpeaksTheLanguage(t *testing.T) {
	c, settle := cutRoom(t, false)
	c.SetWords(words.In("fr"))
	c.Change(func(w *CutWish) { w.Language, w.Large = "de", true })
	settle()
	if got := c.Sheet.Words.Language(); got != "de" {
		t.Fatalf("the sheet speaks %s", got)
	}
	if got, want := c.Sheet.Sizes(facets.Crown)[0].What, "Dicke der Rundiste, dünn bis dick"; got != want {
		t.Errorf("it says %q, want %q", got, want)
	}
	if s, ok := c.Film(); !ok || s.Title != "Avant la première taille" {
		t.Errorf("the film beside it begins %q", s.Title)
	}
}

// What is asked last is what is laid out, and a sheet of the same plan is not made again.
func TestTheNewestWishWins(t *testing.T) {
	c, settle := cutRoom(t, false)
	c.Change(func(w *CutWish) { w.Paper = "letter" })
	c.Change(func(w *CutWish) { w.Paper, w.Large = "a5", true })
	settle()
	if !c.Ready() || !c.Sheet.Large || c.Sheet.Paper.Name != "a5" {
		t.Errorf("ready %v, trouble %v", c.Ready(), c.Trouble)
	}
	before := c.Sheet
	s := c.subject
	air := []Around{{Medium: s.media[0]}}
	c.SetSubject(s.plan, s.material, air, s.head, s.program)
	if c.Running || c.Sheet != before {
		t.Error("the same subject is laid out again")
	}
	c.Change(func(w *CutWish) { w.Paper = "papyrus" })
	settle()
	if c.Ready() || c.Trouble == nil || c.Pages() != 0 {
		t.Errorf("unknown paper: ready %v, trouble %v", c.Ready(), c.Trouble)
	}
}

// The maps come after the pages, are kept for other wishes, and can be stopped.
func TestMapsOfTheSheet(t *testing.T) {
	c, settle := cutRoom(t, true)
	settle()
	if c.Sheet == nil || c.Sheet.Light == nil {
		t.Fatalf("no light on the sheet; trouble %v", c.Trouble)
	}
	light := c.Sheet.Light
	c.Change(func(w *CutWish) { w.Opposites = true })
	settle()
	if c.Sheet.Light != light || !c.Sheet.Opposites {
		t.Error("another order of indices traces the maps anew")
	}
	c.subject.head++ // as if another head was set
	c.SetSubject(c.subject.plan, c.subject.material, []Around{{Medium: c.subject.media[0]}}, 5*facets.Degree, "test")
	c.Stop()
	settle()
	if !c.Stopped || c.Running || c.Trouble != nil {
		t.Errorf("stopped %v, running %v, trouble %v", c.Stopped, c.Running, c.Trouble)
	}
}

// A pupil's copy has the teacher's beside it; the pupil's carries no plan.
func TestPupilsCopyHasTheAnswersBesideIt(t *testing.T) {
	c, settle := cutRoom(t, false)
	c.Change(func(w *CutWish) { w.LeaveOut.Angles = true })
	settle()
	folder := t.TempDir()
	var files []string
	c.Write(filepath.Join(folder, c.FileName()), func(f []string, err error) { files = f })
	settle()
	if len(files) != 2 || filepath.Base(files[0]) != "harbour-eight-cut-pupil.pdf" || filepath.Base(files[1]) != "harbour-eight-cut-teacher.pdf" {
		t.Fatalf("written: %v", files)
	}
	for i, attached := range []bool{false, true} {
		text, err := os.ReadFile(files[i])
		if err != nil {
			t.Fatal(err)
		}
		if got := bytes.Contains(text, []byte("/Type /EmbeddedFile")); got != attached {
			t.Errorf("%s: a plan is attached: %v", files[i], got)
		}
	}
}

// Printing writes a file for the system's viewer; a viewer that fails is told of.
func TestPrintingOpensAFile(t *testing.T) {
	c, settle := cutRoom(t, false)
	settle()
	t.Setenv("TMPDIR", t.TempDir())
	shown, told := "", error(nil)
	c.Print(func(path string) error {
		text, err := os.ReadFile(path)
		if err != nil || !bytes.HasPrefix(text, []byte("%PDF-")) {
			t.Errorf("%s: %v", path, err)
		}
		shown = path
		return errors.New("no viewer")
	}, func(path string, err error) { told = err })
	settle()
	if shown == "" || told == nil || told.Error() != "no viewer" {
		t.Errorf("shown %q, told %v", shown, told)
	}
}

// What the steps take off, as the film tells it, adds up to the rough less the stone, by
// the solver's own volumes; and a machine of the user's is what the film speaks for.
func TestFilmOfTheSteps(t *testing.T) {
	c, settle := cutRoom(t, false)
	settle()
	f, ok := c.Film()
	if !ok || f.Tier != "" || f.Stone != f.Whole {
		t.Fatalf("the film begins with %+v", f)
	}
	block, last := c.whole.Volume(), c.Sheet.Solution.Stone.Volume()
	const rounding = 1e-9
	if got, want := c.Off(c.Steps()), 1-last/block; math.Abs(got-want) > rounding {
		t.Errorf("after the last step %v of the rough is off, want %v", got, want)
	}
	turned := 0
	for step := 1; step <= c.Steps(); step++ {
		c.GoTo(step)
		f, _ := c.Film()
		if f.Tier != c.subject.plan.Tiers[step-1].Name || f.Stone.Volume() > block*(1-c.Off(step-1)) {
			t.Errorf("step %d: %s", step, f.Title)
		}
		if f.Turned {
			turned++
		}
	}
	if c.GoTo(99); c.Step != c.Steps() || turned != 1 {
		t.Errorf("at step %d of %d, turned %d times", c.Step, c.Steps(), turned)
	}
	machine := strings.Replace(sheet.MachineTemplate, "pavilion_angle_offset = 0.0", "pavilion_angle_offset = 1.5", 1)
	if err := os.WriteFile(filepath.Join(string(c.Machines), "mine.toml"), []byte(machine), 0o600); err != nil {
		t.Fatal(err)
	}
	c.GoTo(1)
	plain, _ := c.Film()
	c.Change(func(w *CutWish) { w.Machine = "mine" })
	settle()
	mine, _ := c.Film()
	find := func(f FilmStep) string {
		for _, fact := range f.Facts {
			if fact[0] == "Set" {
				return fact[1]
			}
		}
		return ""
	}
	if find(plain) != "41.50°" || find(mine) != "43.00°" {
		t.Errorf("set %q, with an offset of 1.5° %q", find(plain), find(mine))
	}
}

func TestGearsAreRead(t *testing.T) {
	if got, err := ReadGears("64, 80"); err != nil || len(got) != 2 || got[0] != 64 || got[1] != 80 {
		t.Errorf("%v, %v", got, err)
	}
	for _, bad := range []string{"x", "2", "64 1001"} {
		if _, err := ReadGears(bad); err == nil {
			t.Errorf("%q passes", bad)
		}
	}
}
