package ui

import (
	"testing"

	"pavilight/testdata"
)

// Every question for a file comes up, within the window, and Escape takes it away.
func TestFileQuestionsComeUp(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	for _, tt := range []struct {
		name string
		ask  func()
	}{
		{"open", r.openDialog},
		{"save as", r.saveAs},
		{"save the sheet", r.writeSheet},
		{"save the report", func() { r.writeReport(".pdf") }},
		{"keep a record", func() { r.chooseRecord(true) }},
		{"a letterhead", func() { r.letterheadItems()[1].Action() }},
		{"a stone beside", func() { r.stonesBeside()[2].Action() }},
	} {
		tt.ask()
		top := r.win.Canvas().Overlays().Top()
		if top == nil || len(r.dialogs) != 1 {
			t.Fatalf("%s: no question comes up", tt.name)
		}
		if size, whole := top.MinSize(), r.win.Canvas().Size(); size.Width > whole.Width || size.Height > whole.Height {
			t.Errorf("%s: it takes %v of a window of %v", tt.name, size, whole)
		}
		if !r.escape() || len(r.dialogs) != 0 {
			t.Errorf("%s: Escape does not take it away", tt.name)
		}
	}
}
