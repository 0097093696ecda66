package ui

import (
	"testing"
	"time"
)

// TestScreens makes the pictures of the README: go test ./app/ui -run TestScreens
// -screenshots screens.
func TestScreens(t *testing.T) {
	if *pictures == "" {
		t.Skip("no screenshots are wanted: -screenshots names their folder")
	}
	s := newScreen(t, 1360, 860)
	settle := func() { time.Sleep(time.Second) } // until what was told of is drawn
	p := s.start(inLight, 1360, 860, t.TempDir())
	p.until("rocked")
	x, y := p.place("map 0 1")
	s.do("mousemove", x, y, "mousemove_relative", "--", "-34", "-20", "click", "1")
	p.until("followed")
	settle()
	s.shot("look-light")
	s.do("key", "ctrl+q")
	p.ended()

	p = s.start(inDark, 1360, 860, t.TempDir())
	p.until("rocked")
	s.do("mousemove", "1000", "700", "key", "ctrl+3")
	p.until("sheet")
	settle()
	s.shot("cut-dark")
	s.do("key", "ctrl+4")
	p.until("told")
	settle()
	s.shot("tell-dark")
	s.do("key", "ctrl+q")
	p.ended()
}
