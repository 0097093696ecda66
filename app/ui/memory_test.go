package ui

import (
	"slices"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"

	"pavilight/app/model"
	"pavilight/testdata"
)

// childOf returns an item of the menu behind another, by what it says.
func childOf(t *testing.T, items []*fyne.MenuItem, label, child string) *fyne.MenuItem {
	t.Helper()
	for _, i := range items {
		if i.Label != label || i.ChildMenu == nil {
			continue
		}
		for _, c := range i.ChildMenu.Items {
			if c.Label == child {
				return c
			}
		}
	}
	t.Fatalf("no %q with %q in the menu", label, child)
	return nil
}

// Each column takes its own light from the menu of its heading, which then stands there,
// and the light, the strip's range and the room are those of the next run, too.
func TestLookIsRemembered(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	if r.grid.shining[1].text != "" {
		t.Errorf("a light stands over maps that need none: %q", r.grid.shining[1].text)
	}
	head := r.grid.headHeight()
	r.grid.setRow(0, model.TrueColour)
	childOf(t, r.grid.mediaItems(1), "Light of true colour", "small lamps").Action()
	if got := r.grid.shining[1].text; got != "small lamps" {
		t.Errorf("over the column stands %q", got)
	}
	if r.grid.headHeight() <= head {
		t.Error("the light has no room over the maps")
	}
	if got := r.shines.text; got != "several lights" {
		t.Errorf("the light of all columns is told as %q", got)
	}
	if !childOf(t, r.grid.mediaItems(1), "Light of true colour", "small lamps").Checked {
		t.Error("the light is not ticked in its menu")
	}
	want := r.bench.Look.Lights()
	test.Type(r.grid.reach, "35")
	r.grid.reach.settle()
	r.enter(cutRoom)

	look, err := model.NewLook(func(func()) {}, func(model.Change) {})
	if err != nil {
		t.Fatal(err)
	}
	r.files.recall(look)
	if got := look.Lights(); !slices.Equal(got, want) || got[1] != "lamps" {
		t.Errorf("the next run has the lights %v, want %v", got, want)
	}
	if got := look.StripRange().Degrees(); got != r.bench.Look.StripRange().Degrees() || got == 20 {
		t.Errorf("the next run rocks by %v", got)
	}
	if r.files.room() != cutRoom {
		t.Errorf("the next run opens the room %v", r.files.room())
	}
}

// What was damaged is as if it had not been remembered.
func TestUnsoundMemoryIsLeft(t *testing.T) {
	prefs := test.NewTempApp(t).Preferences()
	prefs.SetFloat(rangeKey, -7)
	prefs.SetStringList(lightsKey, []string{"moon", "ring", ""})
	prefs.SetInt(roomKey, 99)
	look, err := model.NewLook(func(func()) {}, func(model.Change) {})
	if err != nil {
		t.Fatal(err)
	}
	fileMemory{prefs}.recall(look)
	if got := look.Lights(); !slices.Equal(got, []string{"room", "ring", "room"}) {
		t.Errorf("the lights are %v", got)
	}
	if look.StripRange() != model.StripRange || (fileMemory{prefs}).room() != lookRoom {
		t.Errorf("it rocks by %v in the room %v", look.StripRange(), fileMemory{prefs}.room())
	}
}
