package ui

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"testing"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/storage"
	"fyne.io/fyne/v2/test"
	"fyne.io/fyne/v2/theme"

	"pavilight/app/model"
	"pavilight/facets"
	"pavilight/testdata"
	"pavilight/trace"
)

// rig is the whole window on the toolkit's test driver. Work for the window waits in
// jobs until the test does it, on its own goroutine, as the toolkit would on its own.
type rig struct {
	*window
	mu   sync.Mutex
	jobs []func()
	come chan struct{}
	told []string
}

func newRig(t *testing.T, plan string) *rig {
	t.Helper()
	a := test.NewTempApp(t)
	a.Settings().SetTheme(newGreys(inDark, 1))
	file, err := testdata.Plans().Open(plan)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	p, err := facets.ReadPlan(file, plan)
	if err != nil {
		t.Fatal(err)
	}
	r := &rig{come: make(chan struct{}, 1)}
	w, err := newWindow(a, model.NewDocument(p, ""), "en", r.post, func(stage string) { r.told = append(r.told, stage) })
	if err != nil {
		t.Fatal(err)
	}
	r.window = w
	w.win.Resize(fyne.NewSize(usualWidth, usualHeight))
	w.enter(lookRoom)
	w.bench.Look.Adjust(func(s *trace.Settings) { s.Pixels, s.Error = 64, 0.01 })
	w.grid.onPixels = nil // keep the small maps
	w.bench.Begin()
	t.Cleanup(func() {
		w.stopRooms()
		r.drain()
	})
	return r
}

func (r *rig) post(f func()) {
	r.mu.Lock()
	r.jobs = append(r.jobs, f)
	r.mu.Unlock()
	select {
	case r.come <- struct{}{}:
	default:
	}
}

// keepFor begins keeping; at the test's end every claim is given up, as at the program's.
func (r *rig) keepFor(t *testing.T, folder string) {
	t.Helper()
	r.beginKeeping(folder)
	t.Cleanup(func() {
		r.endKeeping()
		r.keeper.recovery.Close()
		r.keeper.claims.Release()
	})
}

func (r *rig) drain() {
	r.mu.Lock()
	jobs := r.jobs
	r.jobs = nil
	r.mu.Unlock()
	for _, f := range jobs {
		f()
	}
}

// until does the window's work until the condition holds.
func (r *rig) until(t *testing.T, what string, done func() bool) {
	t.Helper()
	patience := time.After(90 * time.Second)
	for !done() {
		select {
		case <-r.come:
			r.drain()
		case <-patience:
			t.Fatalf("waited in vain for %s; troubles %v", what, r.bench.Troubles())
		}
	}
}

func (r *rig) refined(t *testing.T) {
	t.Helper()
	r.until(t, "refined maps", func() bool {
		l := r.bench.Look
		return l.Frame != nil && l.Frame.Final && l.Frame.Subject == l.Subject && !l.Progress().Active
	})
}

func (r *rig) row(t *testing.T, tier string) *tierRow {
	t.Helper()
	for _, row := range r.list.rows {
		if row.row.Name == tier {
			return row
		}
	}
	t.Fatalf("no tier %s in the list", tier)
	return nil
}

func (r *rig) angle(t *testing.T, tier string) float64 {
	t.Helper()
	for _, row := range r.bench.Tiers() {
		if row.Name == tier {
			return math.Round(row.Angle.Degrees()*1e6) / 1e6
		}
	}
	t.Fatalf("no tier %s in the plan", tier)
	return 0
}

func typeInto(r *rig, f *numberField, text string) {
	r.win.Canvas().Focus(f)
	test.Type(f, text)
	f.TypedKey(&fyne.KeyEvent{Name: fyne.KeyReturn})
}

func TestTypedAngleMovesTheMaps(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	before := r.bench.Look.Frame.Result.Columns[0].Ledger
	typeInto(r, r.row(t, "P1").field, "40,9") // focus marks all, typing replaces it
	if got := r.angle(t, "P1"); got != 40.9 {
		t.Fatalf("P1 stands at %v, want 40.9", got)
	}
	r.refined(t)
	if r.bench.Look.Frame.Result.Columns[0].Ledger == before {
		t.Error("the maps did not follow")
	}
	if got := r.row(t, "P1").slider.value; got != 40.9 {
		t.Errorf("the slider stands at %v", got)
	}
	if !strings.HasPrefix(r.win.Title(), "Harbour Eight*") {
		t.Errorf("title %q shows no change", r.win.Title())
	}
	if got := r.menu.undo.Label; got != "Undo angle of P1" {
		t.Errorf("the menu offers %q", got)
	}
	r.menu.undo.Action()
	if got := r.angle(t, "P1"); got != 41.5 || r.row(t, "P1").field.Text != "41.50" {
		t.Errorf("after undo the plan holds %v, the field %q", got, r.row(t, "P1").field.Text)
	}
	if strings.Contains(r.win.Title(), "*") {
		t.Errorf("title %q shows a change after all were taken back", r.win.Title())
	}
}

// Numbers are typed over, not into: after Enter, after a click that follows it, and after
// clicks that follow each other quickly. A single later click sets the cursor.
func TestNumbersAreTypedOver(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	f := r.row(t, "P1").field
	click := func() {
		e := &desktop.MouseEvent{Button: desktop.MouseButtonPrimary}
		e.Position = fyne.NewPos(f.Size().Width-2, f.Size().Height/2)
		f.MouseDown(e)
		f.MouseUp(e)
	}
	enter := func(text string) {
		for _, c := range text { // test.Type would give the field the focus anew
			f.TypedRune(c)
		}
		f.TypedKey(&fyne.KeyEvent{Name: fyne.KeyReturn})
	}
	want := func(when string, angle float64) {
		t.Helper()
		if got := r.angle(t, "P1"); got != angle {
			t.Errorf("%s: P1 stands at %v, want %v", when, got, angle)
		}
	}
	typeInto(r, f, "41.6")
	enter("41.7")
	want("typed on after Enter", 41.7)
	click()
	enter("41.8")
	want("clicked after Enter", 41.8)
	click()
	f.DoubleTapped(&fyne.PointEvent{})
	click()
	enter("41.9")
	want("clicked three times", 41.9)
	click()
	f.doubled = time.Time{} // long after
	click()
	if f.SelectedText() != "" {
		t.Errorf("a second, later click leaves %q marked", f.SelectedText())
	}
}

func TestRefusedEntryKeepsThePlan(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	for _, text := range []string{"abc", "95", "0", "1e300", strings.Repeat("7", 300)} {
		f := r.row(t, "P1").field
		typeInto(r, f, text)
		if got := r.angle(t, "P1"); got != 41.5 {
			t.Fatalf("%.20q: P1 stands at %v, want it kept", text, got)
		}
		if !strings.HasPrefix(r.message.text, "Not taken: ") || r.message.colour != theme.ColorNameError {
			t.Errorf("%.20q: the window says %q", text, r.message.text)
		}
		f.TypedKey(&fyne.KeyEvent{Name: fyne.KeyEscape})
		if f.Text != "41.50" || r.message.text != "" {
			t.Errorf("%.20q: after Escape the field holds %q and the window says %q", text, f.Text, r.message.text)
		}
	}
}

func TestDragIsOneStep(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	s := r.row(t, "C2").slider
	from := s.place(s.value, s.Size().Width)
	for _, d := range []float32{3, 6, 9, 12} {
		s.Dragged(&fyne.DragEvent{PointEvent: fyne.PointEvent{Position: fyne.NewPos(from+d, trackAt)}})
	}
	s.DragEnd()
	if got := r.angle(t, "C2"); got <= 35 {
		t.Fatalf("the drag left C2 at %v", got)
	}
	r.bench.Undo()
	if got := r.angle(t, "C2"); got != 35 {
		t.Errorf("one undo leads to %v, want 35", got)
	}
}

func TestArrowKeysStepTheNumber(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	f := r.row(t, "P1").field
	r.win.Canvas().Focus(f)
	for range 3 {
		f.TypedKey(&fyne.KeyEvent{Name: fyne.KeyUp})
	}
	f.TypedKey(&fyne.KeyEvent{Name: fyne.KeyDown})
	if got := r.angle(t, "P1"); got != 41.7 {
		t.Errorf("P1 stands at %v, want two steps of 0.1 on from 41.5", got)
	}
}

func TestABadFileKeepsTheStone(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	folder := t.TempDir()
	write := func(name, text string) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, []byte(text), 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	good, err := os.ReadFile("../../testdata/plans/" + testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	stone := r.bench.Look.Subject.Stone
	for name, path := range map[string]string{
		"missing":          filepath.Join(folder, "missing.toml"),
		"a folder":         folder,
		"empty":            write("empty.toml", ""),
		"rubbish":          write("rubbish.toml", "\x00\xff\x17\x80"),
		"unknown material": write("material.toml", strings.Replace(string(good), `"corundum"`, `"unobtainium"`, 1)),
		"impossible angle": write("angle.toml", strings.Replace(string(good), "angle = 41.5", "angle = 141.5", 1)),
		"open solid":       write("open.toml", strings.Split(string(good), "[[transfer]]")[0]),
	} {
		r.told = nil
		r.dropped(fyne.Position{}, []fyne.URI{storage.NewFileURI(path)})
		r.until(t, name+" to be refused", func() bool { return len(r.told) > 0 })
		if r.told[0] != "refused" {
			t.Errorf("%s: the window tells %v", name, r.told)
		}
		top := r.win.Canvas().Overlays().Top()
		if top == nil {
			t.Errorf("%s: no dialog", name)
			continue
		}
		r.win.Canvas().Overlays().Remove(top)
		if r.bench.Look.Subject.Stone != stone || r.bench.Doc.Plan().Name != "Harbour Eight" {
			t.Fatalf("%s: the stone is gone", name)
		}
	}
}

func TestAPlanThatMakesNoStoneIsToldInThePane(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	stone := r.bench.Look.Subject.Stone
	typeInto(r, r.row(t, "P1").field, "60") // the mains no longer meet the halves
	r.until(t, "the fault", func() bool { return r.fault.Visible() })
	if r.bench.Look.Subject.Stone != stone || r.solid.stone != stone {
		t.Error("the last good stone is not shown any more")
	}
	if !strings.Contains(r.troubles.Text, "P1") || !strings.Contains(r.troubles.Text, ";") {
		t.Errorf("the pane says %q: want the tier and a remedy", r.troubles.Text)
	}
	r.bench.Undo()
	r.until(t, "the stone again", func() bool { return !r.fault.Visible() })
}

func TestOpenEditSaveUndo(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	text, err := os.ReadFile("../../testdata/plans/" + testdata.Bundled)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "mine.toml")
	if err := os.WriteFile(path, text, 0o600); err != nil {
		t.Fatal(err)
	}
	r.open(path)
	r.until(t, "the plan", func() bool { return r.bench.Doc.Path == path })
	typeInto(r, r.row(t, "C3").field, "22°30'")
	r.told = nil
	r.menu.save.Action()
	r.until(t, "the save", func() bool { return slices.Contains(r.told, "saved") })
	saved, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if want := strings.Replace(string(text), "angle = 22.2", "angle = 22.5", 1); string(saved) != want {
		t.Errorf("the file holds\n%s\nwant it unchanged but for the one angle", saved)
	}
	if r.bench.Doc.Modified() {
		t.Error("the plan counts as changed after it was saved")
	}
	r.told = nil
	r.requestClose()
	if len(r.told) != 0 {
		t.Errorf("closing a saved plan asks: %v", r.told)
	}
}

func TestUnsavedWorkIsAskedFor(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	typeInto(r, r.row(t, "P1").field, "41")
	r.requestClose()
	if r.asked == nil || r.win.Canvas().Overlays().Top() == nil {
		t.Fatal("closing with unsaved changes asks nothing")
	}
	test.Tap(r.asked["Cancel"])
	if got := r.angle(t, "P1"); got != 41 {
		t.Errorf("after Cancel P1 stands at %v", got)
	}
	discarded := false
	r.unlessUnsaved("try", func() { discarded = true })
	test.Tap(r.asked["Discard"])
	if !discarded {
		t.Error("Discard does not go on")
	}
}

func TestPointingAsksAllMaps(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	test.MoveMouse(r.win.Canvas(), fyne.CurrentApp().Driver().AbsolutePositionForObject(r.grid.maps[1][0]).AddXY(90, 90))
	for i := range model.Rows {
		for j := range columns {
			m := r.grid.maps[i][j]
			want, ok := r.bench.Look.UnderPointer(i, j)
			if !m.crossed || !ok || !strings.HasPrefix(m.value, fmt.Sprintf("%.3f", want)) {
				t.Errorf("map %d %d: cross-hair %v, number %q, want %v", i, j, m.crossed, m.value, want)
			}
		}
	}
}

func TestRayIsFollowedAndSteppedByKeys(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.bench.Look.Follow(0, 0.3, 0.35)
	if !r.rayBox.Visible() || r.factBox.Visible() || len(r.ray.lines) < 4 {
		t.Fatalf("the ray's list shows %d lines", len(r.ray.lines))
	}
	for range 2 {
		r.ray.TypedKey(&fyne.KeyEvent{Name: fyne.KeyDown})
	}
	if r.bench.Look.Ray.Step != 1 || r.ray.step != 1 {
		t.Errorf("two steps lead to bounce %d", r.bench.Look.Ray.Step)
	}
	// The ray is followed again through the stone that comes next.
	path := r.bench.Look.Ray.Path
	typeInto(r, r.row(t, "P1").field, "41")
	r.refined(t)
	if r.bench.Look.Ray.Path == path || r.bench.Look.Ray.Stone != r.bench.Look.Subject.Stone {
		t.Error("the ray still runs through the stone before")
	}
	r.strayKey(&fyne.KeyEvent{Name: fyne.KeyEscape})
	if r.rayBox.Visible() || !r.factBox.Visible() {
		t.Error("Escape does not let the ray go")
	}
}

func TestSelectingGoesBothWays(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	test.Tap(r.row(t, "C2"))
	if r.solid.selected != "C2" || !r.row(t, "C2").selected {
		t.Error("a tier picked in the list is not picked out on the stone")
	}
	r.solid.pick("P1")
	if !r.row(t, "P1").selected || r.row(t, "C2").selected {
		t.Error("a tier picked on the stone is not picked in the list")
	}
}

// Nothing is cut off at the two sizes, in any sample: every word and number of the
// header, the headings and the ledger is shown whole, and all within the window.
func TestNothingIsCutOff(t *testing.T) {
	for _, size := range []fyne.Size{{Width: 1360, Height: 860}, {Width: 1024, Height: 700}} {
		r := newRig(t, testdata.Bundled)
		r.win.Resize(size)
		r.refined(t)
		whole := []*line{r.title, r.weight, r.state}
		for j := range columns {
			whole = append(whole, r.grid.indices[j], r.grid.critical[j])
		}
		for _, l := range r.grid.ledger.lines[:r.grid.ledger.shown] {
			whole = append(whole, l.name)
			whole = append(whole, l.value[:]...)
			whole = append(whole, l.error[:]...)
		}
		for _, l := range whole {
			at := fyne.CurrentApp().Driver().AbsolutePositionForObject(l)
			if shown := shownText(l); shown != l.text {
				t.Errorf("%v: %q is cut to %q", size, l.text, shown)
			}
			if at.X < 0 || at.Y < 0 || at.X+l.Size().Width > size.Width+1 || at.Y+l.Size().Height > size.Height+1 {
				t.Errorf("%v: %q stands at %v, outside the window", size, l.text, at)
			}
		}
		for i := range model.Rows {
			for j := range columns {
				m := r.grid.maps[i][j]
				at := fyne.CurrentApp().Driver().AbsolutePositionForObject(m)
				if m.Size().Width < 150 || at.X+m.Size().Width > size.Width || at.Y+m.Size().Height > size.Height {
					t.Errorf("%v: map %d %d is %v at %v", size, i, j, m.Size(), at)
				}
			}
		}
	}
}

func shownText(l *line) string { return test.WidgetRenderer(l).(*lineRenderer).text.Text }

func TestThemeContrast(t *testing.T) {
	// WCAG 2.1, success criteria 1.4.3 (text, 4.5 to 1) and 1.4.11 (marks, 3 to 1).
	const forText, forMarks = 4.5, 3
	for _, c := range []struct {
		ink, ground fyne.ThemeColorName
		least       float64
	}{
		{theme.ColorNameForeground, theme.ColorNameBackground, forText},
		{theme.ColorNameForeground, colourPane, forText},
		{theme.ColorNameForeground, theme.ColorNameInputBackground, forText},
		{theme.ColorNameForeground, theme.ColorNameButton, forText},
		{theme.ColorNameForeground, theme.ColorNameMenuBackground, forText},
		{colourDim, colourPane, forText},
		{colourDim, theme.ColorNameBackground, forText},
		{theme.ColorNameError, theme.ColorNameBackground, forText},
		{theme.ColorNameError, theme.ColorNameInputBackground, forText},
		{theme.ColorNameForegroundOnPrimary, theme.ColorNamePrimary, forText},
		{theme.ColorNamePrimary, colourPane, forMarks},
		{colourEdge, colourBody, forMarks},
	} {
		for _, b := range []brightness{inLight, inDark} {
			g := newGreys(b, 1)
			ink, ground := luminance(g.Color(c.ink, 0)), luminance(g.Color(c.ground, 0))
			ratio := (max(ink, ground) + 0.05) / (min(ink, ground) + 0.05)
			if ratio < c.least {
				t.Errorf("%s: %s on %s has contrast %.2f, want %.1f", b, c.ink, c.ground, ratio, c.least)
			}
		}
	}
}

// luminance is the relative luminance of WCAG 2.1.
func luminance(c interface{ RGBA() (r, g, b, a uint32) }) float64 {
	r, g, b, _ := c.RGBA()
	linear := func(v uint32) float64 {
		x := float64(v) / 0xffff
		if x <= 0.03928 {
			return x / 12.92
		}
		return math.Pow((x+0.055)/1.055, 2.4)
	}
	return 0.2126*linear(r) + 0.7152*linear(g) + 0.0722*linear(b)
}

func TestPreferencesThatWereDamagedAreNotBelieved(t *testing.T) {
	a := test.NewTempApp(t)
	m := fileMemory{a.Preferences()}
	for _, v := range []float64{math.NaN(), math.Inf(1), -3, 0, 1e9} {
		a.Preferences().SetFloat(widthKey, v)
		if got := m.windowSize().Width; got != usualWidth {
			t.Errorf("a remembered width of %v gives %v", v, got)
		}
		a.Preferences().SetFloat(scaleKey, v)
		if got := m.textScale(); got != 1 {
			t.Errorf("a remembered scale of text of %v gives %v", v, got)
		}
	}
	a.Preferences().SetString(themeKey, "plaid")
	if m.brightness() != asSystem {
		t.Error("an unknown theme is believed")
	}
	if got := newGreys(inDark, float32(math.NaN())).scale; got != 1 {
		t.Errorf("a text scale that is no number gives %v", got)
	}
}

func TestFileChangedByOtherHands(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	path := filepath.Join(t.TempDir(), "mine.toml")
	r.write(path, func() {})
	r.until(t, "the save", func() bool { return slices.Contains(r.told, "saved") })
	r.keepFor(t, t.TempDir())
	text, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(path, append(text, "# a remark\n"...), 0o600); err != nil {
		t.Fatal(err)
	}
	r.look()
	r.until(t, "the question", func() bool { return len(r.dialogs) > 0 })
	r.escape() // keeps what is in the window
	os.Remove(path)
	r.look()
	r.until(t, "word of the loss", func() bool { return strings.Contains(r.message.text, "gone") })
	if !strings.Contains(r.win.Title(), "*") {
		t.Error("a plan whose file is gone does not count as unsaved")
	}
}

func TestUnsavedWorkIsOfferedAtTheNextStart(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	folder := t.TempDir()
	r.keepFor(t, folder)
	typeInto(r, r.row(t, "P1").field, "41,25")
	r.keepNow() // as when a signal ends the program
	r.endKeeping()
	r.keeper.recovery.Close() // as the program's end does
	again := newRig(t, testdata.Bundled)
	again.keepFor(t, folder)
	again.offerRecovered()
	if len(again.told) == 0 || again.told[len(again.told)-1] != "offered" {
		t.Fatalf("the window tells %v", again.told)
	}
	found, err := again.keeper.recovery.Find()
	if err != nil || len(found) != 1 {
		t.Fatalf("found %v, %v", found, err)
	}
	again.bench.Recover(found[0])
	if got := again.angle(t, "P1"); got != 41.25 {
		t.Errorf("recovered P1 at %v", got)
	}
}

func TestEnlargingAMapAndBack(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	small := r.grid.maps[1][2].Size().Width
	r.grid.toggle(1, 2)
	if got := r.grid.maps[1][2].Size().Width; got < 2*small || r.grid.maps[0][0].Visible() || r.grid.strip.Visible() {
		t.Errorf("enlarged from %v to %v; others shown: %v", small, got, r.grid.maps[0][0].Visible())
	}
	r.win.Canvas().Focus(r.grid.maps[1][2])
	r.grid.maps[1][2].TypedKey(&fyne.KeyEvent{Name: fyne.KeyEscape})
	if got := r.grid.maps[1][2].Size().Width; got != small || !r.grid.maps[0][0].Visible() || !r.grid.ledger.lines[0].name.Visible() {
		t.Errorf("back at %v, want %v and all six", got, small)
	}
}

func TestEscapeClosesTheDialogOnTop(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.addTier()
	if len(r.dialogs) != 1 {
		t.Fatalf("%d dialogs open", len(r.dialogs))
	}
	field, ok := r.win.Canvas().Focused().(*formEntry)
	if !ok {
		t.Fatal("the form's first field has not the focus")
	}
	field.TypedKey(&fyne.KeyEvent{Name: fyne.KeyEscape})
	if len(r.dialogs) != 0 || r.bench.Doc.Modified() {
		t.Errorf("after Escape %d dialogs, modified %v", len(r.dialogs), r.bench.Doc.Modified())
	}
}
