package ui

import (
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"
	"fyne.io/fyne/v2/widget"

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
