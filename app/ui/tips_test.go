package ui

import (
	"testing"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"

	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/testdata"
	"pavilight/trace"
)

func TestTipsComeAndGo(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.tips.delay = time.Millisecond
	driver := fyne.CurrentApp().Driver()
	over := func(o fyne.CanvasObject) {
		test.MoveMouse(r.win.Canvas(), driver.AbsolutePositionForObject(o).AddXY(o.Size().Width/2, o.Size().Height/2))
	}
	for _, tt := range []struct {
		name  string
		over  fyne.CanvasObject
		words words.Key
	}{
		{"field of the view", r.head, tipHead},
		{"button in the corner", r.stop, tipStop},
		{"chooser", r.grid.media[2], tipMedium},
		{"door", r.doors[cutRoom], tipRoom(cutRoom)},
		{"angle", r.row(t, "P1").field, tipAngle},
		{"slider", r.row(t, "P2").slider, tipSlider},
		{"ledger", r.grid.ledger.lines[1].tip, model.QuantityMeaning(trace.Leaked)},
		{"strip", r.grid.strip, tipStrip},
		{"curve", r.from, tipFrom},
	} {
		over(tt.over)
		r.until(t, "the tip of the "+tt.name, r.tips.plate.Visible)
		if r.tips.text.text != r.words.Say(tt.words) {
			t.Errorf("%s: the tip says %q", tt.name, r.tips.text.text)
		}
		at, size, whole := r.tips.plate.Position(), r.tips.plate.Size(), r.tips.box.Size()
		if at.X < 0 || at.Y < 0 || at.X+size.Width > whole.Width || at.Y+size.Height > whole.Height {
			t.Errorf("%s: the tip at %v of %v leaves the window's %v", tt.name, at, size, whole)
		}
		over(r.grid.scales[0])
		if r.tips.plate.Visible() {
			t.Errorf("%s: the tip stays when the pointer leaves", tt.name)
		}
	}

	// Gone before its time, it does not come at all; nor over an open menu.
	r.tips.enter(r.head, r.words.Say(tipHead))
	r.tips.leave()
	time.Sleep(20 * time.Millisecond)
	r.drain()
	if r.tips.plate.Visible() {
		t.Error("a tip comes after the pointer has left")
	}
	// Nor does it stay where what it is about goes away from under the pointer.
	r.win.Resize(fyne.NewSize(1024, 300))
	for name, away := range map[string]func(){
		"scrolls": func() { r.list.scroll.Scrolled(&fyne.ScrollEvent{Scrolled: fyne.NewDelta(0, -40)}) },
		"leaves":  func() { r.enter(tuneRoom); r.enter(lookRoom) },
	} {
		r.tips.show(r.row(t, "C1").slider, r.words.Say(tipSlider))
		if !r.tips.plate.Visible() {
			t.Fatal("no tip is shown")
		}
		away()
		if r.tips.plate.Visible() {
			t.Errorf("the tip stays when its control %s", name)
		}
	}
	r.win.Resize(fyne.NewSize(1360, 860))
	row := r.grid.row[0]
	over(row)
	r.until(t, "a tip", r.tips.plate.Visible)
	row.open()
	if r.tips.plate.Visible() {
		t.Error("the tip lies over the menu")
	}
	r.tips.show(r.head, tipHead)
	if r.tips.plate.Visible() {
		t.Error("a tip comes while a menu is open")
	}
}
