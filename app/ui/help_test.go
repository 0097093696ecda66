package ui

import (
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/guide"
	"pavilight/app/licences"
	"pavilight/testdata"
)

// TestLicencesAreShown reads the dialog as a person would: its first lines, the module
// of the window, and the last line after scrolling down.
func TestLicencesAreShown(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.licences()
	top := r.win.Canvas().Overlays().Top()
	if top == nil {
		t.Fatal("no dialog is open")
	}
	var list *widget.List
	shown := func() (lines []string) {
		for _, o := range test.LaidOutObjects(top) {
			switch o := o.(type) {
			case *widget.List:
				list = o
			case *line:
				lines = append(lines, o.text)
			}
		}
		return lines
	}
	first := strings.Join(shown(), "\n")
	if list == nil {
		t.Fatal("the dialog holds no list")
	}
	all := strings.Split(strings.TrimSpace(licences.ThirdParty()), "\n")
	if !strings.Contains(first, all[0]) || !strings.Contains(first, "fyne.io/fyne/v2 v2.8.1") {
		t.Errorf("the dialog begins with\n%s", first)
	}
	list.ScrollToBottom()
	if last := strings.Join(shown(), "\n"); !strings.Contains(last, all[len(all)-1]) || strings.Contains(last, all[0]) {
		t.Errorf("scrolled down the dialog shows\n%s", last)
	}
	if size := top.MinSize(); size.Width > r.win.Canvas().Size().Width || size == (fyne.Size{}) {
		t.Errorf("the dialog wants %v of %v", size, r.win.Canvas().Size())
	}
}

// TestGuideIsShown reads a page of the guide as a person would, from its first words to its
// last, and opens the plan that it has people write.
func TestGuideIsShown(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.win.Resize(fyne.NewSize(1024, 700))
	for _, page := range guide.Pages() {
		r.showGuide(page)
		top := r.win.Canvas().Overlays().Top()
		if top == nil {
			t.Fatalf("%s: no dialog is open", page.File)
		}
		var shown strings.Builder
		var open *widget.Button
		for _, o := range test.LaidOutObjects(top) {
			switch o := o.(type) {
			case *widget.RichText:
				shown.WriteString(o.String() + " ")
			case *widget.Label:
				shown.WriteString(o.Text + " ")
			case *widget.Button:
				if o.Text == "Open this plan" {
					open = o
				}
			}
		}
		plan := ""
		for _, part := range page.Parts {
			if part.Kind == "toml" {
				plan = part.Text
			}
			words := strings.Fields(strings.NewReplacer("#", "", "*", "", "`", "").Replace(part.Text))
			if part.Kind != "" {
				words = strings.Fields(part.Text)
			}
			for _, word := range []string{words[0], words[len(words)-1]} {
				if !strings.Contains(shown.String(), word) {
					t.Errorf("%s: %q is not shown", page.File, word)
				}
			}
		}
		if size := top.MinSize(); size.Width > r.win.Canvas().Size().Width || size.Height > r.win.Canvas().Size().Height {
			t.Errorf("%s: the dialog wants %v of %v", page.File, size, r.win.Canvas().Size())
		}
		if (plan != "") != (open != nil) {
			t.Fatalf("%s: its plan can be opened: %v", page.File, open != nil)
		}
		if open == nil {
			r.win.Canvas().Overlays().Remove(top)
			continue
		}
		test.Tap(open)
		r.drain()
		if name := r.bench.Doc.Plan().Name; r.win.Canvas().Overlays().Top() != nil || !strings.Contains(plan, "name = \""+name+"\"") {
			t.Errorf("%s: %q is open, and a dialog %v", page.File, name, r.win.Canvas().Overlays().Top())
		}
	}
}
