package ui

import (
	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/widget"
)

// raise shows a dialog that the Escape key closes as its Cancel button does.
func (w *window) raise(d dialog.Dialog) {
	w.dialogs = append(w.dialogs, d)
	d.SetOnClosed(func() {
		for i := range w.dialogs {
			if w.dialogs[i] == d {
				w.dialogs = append(w.dialogs[:i], w.dialogs[i+1:]...)
				return
			}
		}
	})
	d.Show()
}

// escape closes the dialog on top, false if there is none.
func (w *window) escape() bool {
	if len(w.dialogs) == 0 {
		return false
	}
	w.dialogs[len(w.dialogs)-1].Hide()
	return true
}

// formEntry is a field of a dialog that leaves Escape to the dialog.
type formEntry struct {
	widget.Entry
	escape func() bool
}

func (w *window) newFormEntry() *formEntry {
	e := &formEntry{escape: w.escape}
	e.ExtendBaseWidget(e)
	return e
}

// TypedKey leaves Escape to the dialog.
func (e *formEntry) TypedKey(key *fyne.KeyEvent) {
	if key.Name == fyne.KeyEscape {
		e.escape()
		return
	}
	e.Entry.TypedKey(key)
}
