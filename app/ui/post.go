package ui

import (
	"time"

	"fyne.io/fyne/v2"
)

// post hands work to the toolkit's goroutine: the one door there.
func post(f func()) { fyne.Do(f) }

// throttle spaces changes of text, which costs more than pictures.
type throttle struct{ last time.Time }

// textEvery is how often numbers that keep changing are written anew.
const textEvery = 240 * time.Millisecond

// due reports whether it is time again; what is final always is.
func (t *throttle) due(final bool) bool {
	now := time.Now()
	if !final && now.Sub(t.last) < textEvery {
		return false
	}
	t.last = now
	return true
}
