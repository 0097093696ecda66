package ui

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/test"

	"pavilight/app/model"
	"pavilight/app/sheet"
	"pavilight/testdata"
)

// inCut returns the window with the room for the sheet open and its pages in view,
// without their maps, which take a second.
func inCut(t *testing.T, size fyne.Size) *rig {
	t.Helper()
	r := newRig(t, testdata.Bundled)
	r.win.Resize(size)
	r.refined(t)
	r.cutting.cut.Wish.Maps = false
	r.enter(cutRoom)
	r.until(t, "the sheet", func() bool { return r.cutting.cut.Ready() && r.cutting.cut.Picture != nil })
	return r
}

func press(key fyne.KeyName) *fyne.KeyEvent { return &fyne.KeyEvent{Name: key} }

func TestCutRoomShowsThePages(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	c := &r.cutting
	if !r.cutBox.Visible() || r.body.Visible() || c.write.Disabled() || c.pages.page.picture.Image == nil {
		t.Fatalf("shown %v, to be written %v", r.cutBox.Visible(), !c.write.Disabled())
	}
	// The picture has the pixels of the screen: nothing is stretched.
	if got, want := c.cut.Picture.Rect.Dx(), c.pages.page.picture.Size().Width*r.win.Canvas().Scale(); float32(got) < want-1 || float32(got) > want+1 {
		t.Errorf("a page %v pixels wide is shown %v wide", got, want)
	}
	first := c.pages.page.picture.Image
	c.pages.page.TypedKey(press(fyne.KeyPageDown))
	r.until(t, "the second page", func() bool { return c.pages.page.picture.Image != first })
	if !strings.HasPrefix(c.pages.at.text, "page 2 of ") {
		t.Errorf("the bar says %q", c.pages.at.text)
	}
	// Another plan gives another sheet, the same plan does not.
	before := c.cut.Sheet
	r.enter(lookRoom)
	r.enter(cutRoom)
	if c.cut.Running {
		t.Error("the sheet of the same plan is laid out again")
	}
	typeInto(r, r.row(t, "P1").field, "41")
	r.until(t, "the other sheet", func() bool { return c.cut.Ready() && c.cut.Sheet != before })
	if c.cut.Sheet.Plan.Tiers[0].Angle.Degrees() != 41 {
		t.Errorf("P1 is on the sheet at %v", c.cut.Sheet.Plan.Tiers[0].Angle)
	}
}

func TestFilmGoesThroughTheSteps(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	c := &r.cutting
	r.showFilm(true)
	if !c.film.box.Visible() || c.paper.Visible() || len(c.film.bar.names) != len(r.bench.Doc.Plan().Tiers)+1 {
		t.Fatalf("the film is shown: %v, its steps %v", c.film.box.Visible(), c.film.bar.names)
	}
	whole := c.film.solid.stone
	test.Tap(c.film.next)
	if c.film.solid.stone == whole || c.film.solid.selected != "P1" || !strings.HasPrefix(c.film.title.text, "1 of ") {
		t.Errorf("after Next: %q, %q new", c.film.title.text, c.film.solid.selected)
	}
	c.film.bar.TypedKey(press(fyne.KeyEnd))
	last := c.film.bar.names[len(c.film.bar.names)-1]
	if c.film.solid.selected != last || !c.film.next.Disabled() {
		t.Errorf("at the end %q is new, want %q", c.film.solid.selected, last)
	}
	c.film.bar.MouseDown(&desktop.MouseEvent{PointEvent: fyne.PointEvent{Position: fyne.NewPos(1, 1)}})
	if c.cut.Step != 0 {
		t.Errorf("a click on the first bar leads to step %d", c.cut.Step)
	}
}

// A plan that makes no stone has no sheet, and the room says why.
func TestCutRoomSaysWhyThereIsNoSheet(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	c := &r.cutting
	c.cut.Machines = "/nonexistent"
	c.cut.Change(func(w *model.CutWish) { w.Machine = "gone" })
	r.until(t, "the trouble", func() bool { return c.cut.Trouble != nil && !c.cut.Running })
	if !c.trouble.Visible() || c.paper.Visible() || !strings.Contains(c.troubles.Text, "gone") || !c.write.Disabled() {
		t.Errorf("trouble shown %v: %q", c.trouble.Visible(), c.troubles.Text)
	}
}

func TestSheetIsWrittenFromTheRoom(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	path := filepath.Join(t.TempDir(), "sheet.pdf")
	r.writeSheetTo(path)
	r.until(t, "the file", func() bool { return strings.Contains(r.message.text, path) })
	if text, err := os.ReadFile(path); err != nil || !strings.HasPrefix(string(text), "%PDF-") {
		t.Errorf("%.8q, %v", text, err)
	}
	r.writeSheetTo(filepath.Join(path, "no-folder", "sheet.pdf"))
	r.until(t, "the refusal", func() bool { return len(r.dialogs) == 1 })
	r.escape()
}

// A new machine's description is written once, is then in the list, and its numbers are
// those of the sheet.
func TestMachineIsDescribed(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	c := &r.cutting
	c.cut.Machines = sheet.Machines(filepath.Join(t.TempDir(), "machines"))
	if _, err := c.cut.NewMachine("old red"); err != nil {
		t.Fatal(err)
	}
	for _, bad := range []string{"old red", "", "../up", ".hidden"} {
		if path, err := c.cut.NewMachine(bad); err == nil {
			t.Errorf("%q is written to %s", bad, path)
		}
	}
	before := c.cut.Sheet
	for _, item := range r.machineItems() {
		if item.Label == "old red" {
			item.Action()
		}
	}
	r.until(t, "the sheet for it", func() bool { return c.cut.Ready() && c.cut.Sheet != before })
	if c.cut.Sheet.Machine.Name != "old red" || c.machine.text != "old red" {
		t.Errorf("the sheet is for %q, the pane says %q", c.cut.Sheet.Machine.Name, c.machine.text)
	}
}

// The room for tuning finds a better plan by hand; it is taken as one step that can be
// undone.
func TestTuneRoomFindsAndTakes(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.enter(tuneRoom)
	u := &r.tuning
	if !r.tuneBox.Visible() || r.body.Visible() || len(u.fields) == 0 || !u.take.Disabled() || !u.hinted.Visible() {
		t.Fatalf("shown %v, %d choices, nothing to take yet %v", r.tuneBox.Visible(), len(u.fields), u.take.Disabled())
	}
	for i, c := range u.tune.Choices {
		u.tune.Choose(i, c.Name == "P1")
		if c.Name == "P1" {
			if err := u.tune.SetLimits(i, 41, 41.5); err != nil {
				t.Fatal(err)
			}
		}
	}
	test.Tap(u.begin)
	if u.begin.Text != "Stop" || !r.running().active || r.stop.Disabled() {
		t.Errorf("while it runs: %q, active %v", u.begin.Text, r.running().active)
	}
	r.until(t, "an answer", func() bool { return !u.tune.Running })
	if u.tune.Trouble != nil || u.verdict.Text == "" || u.before.Image == nil || u.after.Image == nil || u.take.Disabled() {
		t.Fatalf("trouble %v, verdict %q, to be taken %v", u.tune.Trouble, u.verdict.Text, !u.take.Disabled())
	}
	want := u.tune.Best.Values[0]
	test.Tap(u.take)
	if got := r.angle(t, "P1"); got != want || r.room != lookRoom {
		t.Errorf("taken: P1 at %v, want %v", got, want)
	}
	if name, ok := r.bench.Doc.UndoName(); !ok || name.String() != "tuned angles" {
		t.Errorf("to be undone: %q", name)
	}
	r.undo()
	if got := r.angle(t, "P1"); got != 41.5 {
		t.Errorf("after Undo P1 at %v", got)
	}
}

// Each question shows the parts that it has, and Stop in the header ends it.
func TestTuneRoomAsksWhatTheQuestionNeeds(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.enter(tuneRoom)
	u := &r.tuning
	for _, task := range model.TuneTasks() {
		u.tune.Ask(task)
		errs := task == model.TellErrors
		if u.slips.Visible() != errs || u.vary.Visible() == errs || u.to.Visible() != (task == model.MoveMaterial) {
			t.Errorf("%v: errors %v, tiers %v, material %v", task, u.slips.Visible(), u.vary.Visible(), u.to.Visible())
		}
	}
	u.tune.Ask(model.TradeTwo)
	test.Tap(u.begin)
	if !strings.Contains(u.verdict.Text, "two goals") {
		t.Errorf("one goal to trade off: %q", u.verdict.Text)
	}
	u.tune.Ask(model.TellErrors)
	test.Tap(u.begin)
	r.stopOrResume()
	r.until(t, "the end", func() bool { return !u.tune.Running })
	if !u.tune.Stopped {
		t.Error("Stop in the header did not end it")
	}
}

// The report follows the plan, and what is written on it follows the fields.
func TestTellRoomShowsTheReport(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	u := &r.telling
	u.tell.Pixels, u.tell.Error = 48, 0.02
	r.enter(tellRoom)
	if !r.tellBox.Visible() || r.body.Visible() || !u.hinted.Visible() || !u.pdf.Disabled() {
		t.Errorf("shown %v, hint %v", r.tellBox.Visible(), u.hinted.Visible())
	}
	r.until(t, "the report", func() bool { return u.tell.Ready() && u.tell.Picture != nil })
	if !u.paper.Visible() || u.pdf.Disabled() || !strings.HasPrefix(u.pages.at.text, "page 1 of ") {
		t.Errorf("pages shown %v, %q", u.paper.Visible(), u.pages.at.text)
	}
	first := u.pages.page.picture.Image
	u.pages.page.TypedKey(press(fyne.KeyPageDown))
	r.until(t, "the second page", func() bool { return u.pages.page.picture.Image != first })
	if items := r.stonesBeside(); !items[1].Disabled {
		t.Error("an unchanged plan can be set beside itself")
	}
	path := filepath.Join(t.TempDir(), "report.html")
	r.writeReportTo(path)
	r.until(t, "the file", func() bool { return strings.Contains(r.message.text, path) })
	if _, err := os.Stat(path); err != nil {
		t.Error(err)
	}
}

// Nothing of the rooms lies outside the window at the two sizes.
func TestRoomsFitTheWindow(t *testing.T) {
	for _, size := range []fyne.Size{{Width: 1360, Height: 860}, {Width: 1024, Height: 700}} {
		r := inCut(t, size)
		inside := func(name string, o fyne.CanvasObject) {
			t.Helper()
			at := fyne.CurrentApp().Driver().AbsolutePositionForObject(o)
			if at.X < 0 || at.Y < 0 || at.X+o.Size().Width > size.Width+1 || at.Y+o.Size().Height > size.Height+1 || o.Size().Width < 10 {
				t.Errorf("%v: %s is %v at %v", size, name, o.Size(), at)
			}
		}
		c := &r.cutting
		inside("write", c.write)
		inside("print", c.print)
		inside("page scroll", c.pages.page.scroll)
		inside("turner", c.pages.bar)
		r.enter(tuneRoom)
		inside("begin", r.tuning.begin)
		inside("take", r.tuning.take)
		r.telling.tell.Pixels, r.telling.tell.Error = 48, 0.02
		r.enter(tellRoom)
		inside("report's pdf", r.telling.pdf)
		inside("report's html", r.telling.html)
		r.enter(cutRoom)
		r.showFilm(true)
		c.cut.GoTo(c.cut.Steps())
		inside("solid", c.film.solid)
		inside("steps", c.film.bar)
		inside("next", c.film.next)
	}
}

// No search begins while a number that is not taken stands in the question: its answer would
// be to another one. The field is marked and has the focus, and the reason is told.
func TestNoSearchWithARefusedNumber(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.enter(tuneRoom)
	r.drain()
	limit, forgives := r.tuning.fields[0][1], r.tuning.others[1]
	for _, tt := range []struct {
		field      *numberField
		text, want string
	}{{limit, "abc", "not a number"}, {forgives, "20", "Forgives: use 0 to 2"}} {
		typeInto(r, tt.field, tt.text)
		r.win.Canvas().Unfocus()
		if !tt.field.refused() || tt.field.Text != tt.text {
			t.Fatalf("%q stands there as %q, refused %v", tt.text, tt.field.Text, tt.field.refused())
		}
		r.say(nil)
		r.tuning.begin.OnTapped()
		if r.tuning.tune.Running || r.win.Canvas().Focused() != tt.field || !strings.Contains(r.message.text, tt.want) {
			t.Errorf("%q: running %v, focus %T, message %q", tt.text, r.tuning.tune.Running, r.win.Canvas().Focused(), r.message.text)
		}
		tt.field.revert()
		if tt.field.refused() {
			t.Errorf("%q: taken back it is still marked", tt.text)
		}
	}
	r.tuning.begin.OnTapped()
	if !r.tuning.tune.Running {
		t.Errorf("no search begins: %v", r.tuning.tune.Trouble)
	}
	r.tuning.tune.Stop()
}
