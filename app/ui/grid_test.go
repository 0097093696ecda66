package ui

import (
	"math"
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"

	"pavilight/testdata"
)

// choose picks the item of that label from a chooser's menu.
func choose(t *testing.T, items []*fyne.MenuItem, label string) {
	t.Helper()
	for _, i := range items {
		if i.Label == label {
			i.Action()
			return
		}
	}
	t.Fatalf("no item %q", label)
}

func TestRowsShowPathLengthAndColour(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	if r.shining.Visible() {
		t.Error("a light is offered that lights nothing")
	}
	choose(t, r.grid.quantityItems(0), "Path length")
	choose(t, r.grid.quantityItems(1), "True colour")
	if r.grid.maps[0][0].picture.Translucency == 0 {
		t.Error("maps that are not known yet look as if they were")
	}
	choose(t, r.lightItems(0, 1, 2), "small lamps")
	if !r.shining.Visible() || r.shines.text != "small lamps" {
		t.Errorf("the light: offered %v, %q", r.shining.Visible(), r.shines.text)
	}
	r.refined(t)
	if r.grid.maps[0][0].picture.Translucency != 0 || r.grid.maps[1][2].picture.Translucency != 0 {
		t.Error("maps that are known look as if they were not")
	}
	if got := r.grid.scales[0].numbers(); got[0] == "1" || got[0] == "" || got[2] != "0" {
		t.Errorf("the scale of the path length reads %v", got)
	}
	if got := r.grid.scales[1].numbers(); got != [3]string{} {
		t.Errorf("colours have a scale: %v", got)
	}
	at := fyne.CurrentApp().Driver().AbsolutePositionForObject(r.grid.maps[1][0])
	test.MoveMouse(r.win.Canvas(), at.AddXY(90, 90))
	for i, want := range []string{" mm", "Y "} {
		if got := r.grid.maps[i][0].value; !strings.Contains(got, want) {
			t.Errorf("row %d tells %q under the pointer", i, got)
		}
	}
	if r.bench.Look.StripMeaning()[:18] != "mean light return," {
		t.Errorf("the strip shows %q", r.bench.Look.StripMeaning())
	}
}

func TestSamplesAreOpenedByOutline(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	for _, g := range r.sampleItems() {
		if g.Label == "Triangle" {
			choose(t, g.ChildMenu.Items, "Trillion")
		}
	}
	if got := r.bench.Doc.Plan().File; got != "trillion.toml" {
		t.Errorf("on the bench lies %q", got)
	}
}

func TestStripTakesItsOwnRange(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	rocked := func() bool { s := r.bench.Look.Strip; return s != nil && s.Done && !r.bench.Look.Progress().Active }
	r.until(t, "the strip", rocked)
	typeInto(r, r.grid.reach, "33")
	r.until(t, "the strip of another range", func() bool { return rocked() && r.bench.Look.Strip.Tilts[0].Degrees() < -32 })
	if got := r.bench.Look.Strip.Tilts; math.Abs(got[len(got)-1].Degrees()-33) > 1e-9 {
		t.Errorf("the strip ends at %v", got[len(got)-1])
	}
	typeInto(r, r.grid.reach, "95")
	if !strings.HasPrefix(r.message.text, "Not taken: ") || r.bench.Look.StripRange().Degrees() > 34 {
		t.Errorf("95° is taken; the window says %q", r.message.text)
	}
}
