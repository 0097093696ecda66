package ui

import (
	"strings"
	"testing"
	"time"
)

// stackOf writes the window's goroutine as the run-time system does, the innermost call
// first, before that of another goroutine.
func stackOf(state string, calls ...string) string {
	lines := []string{"goroutine 7 [running]:", "pavilight/app/ui.(*pulse).beat(0xc1)", "\t/beat.go:1 +0x1", "",
		"goroutine 1 [" + state + ", locked to thread]:"}
	for _, c := range append(calls, "fyne.io/fyne/v2/internal/driver/glfw.(*gLDriver).runGL(0xc2)", "pavilight/app/ui.Run()", "main.main()") {
		lines = append(lines, c, "\t/file.go:1 +0x1")
	}
	return strings.Join(append(lines, ""), "\n")
}

func TestStacksTellWhoseWorkItIs(t *testing.T) {
	const (
		drawing = "fyne.io/fyne/v2/internal/driver/glfw.(*gLDriver).drawSingleFrame(0xc3)"
		layout  = "pavilight/app/ui.(*grid).Layout(0xc4)"
		tapped  = "pavilight/app/ui.(*chooser).Tapped(0xc5)"
		polling = "fyne.io/fyne/v2/internal/driver/glfw.(*gLDriver).pollEvents(...)"
		watch   = "pavilight/app/ui.watched.func1.1()"
	)
	for _, tt := range []struct {
		name, stack string
		whose       whose
		call        string
		waits       bool
	}{
		{"a handler of the toolkit's", stackOf("runnable", "fyne.io/fyne/v2/widget.(*Entry).TypedRune(0xc6)", polling), toolkits, "", false},
		{"a tap that opens a menu", stackOf("running", "fyne.io/fyne/v2/widget.NewMenu()", tapped, polling), ours, tapped, false},
		{"the outer one of two", stackOf("running", layout, "fyne.io/fyne/v2.(*Container).Refresh()", tapped, polling), ours, tapped, false},
		{"a frame", stackOf("syscall", "runtime.cgocall()", drawing), frames, "", false},
		{"a layout within a frame", stackOf("runnable", layout, drawing), ours, layout, false},
		{"posted work, behind its watch", stackOf("running", layout, watch), ours, layout, false},
		{"a lock", stackOf("sync.Mutex.Lock", "sync.(*Mutex).Lock()", tapped, polling), ours, tapped, true},
		{"the collector", stackOf("GC assist wait", tapped, polling), ours, tapped, false},
	} {
		s, ok := readStack(tt.stack)
		if !ok || s.whose != tt.whose || s.call != tt.call || s.waits() != tt.waits {
			t.Errorf("%s: %v %q waits %v, %v", tt.name, s.whose, s.call, s.waits(), ok)
		}
	}
	for _, stack := range []string{"", "goroutine 1 [running]:\nmain.main()\n", "goroutine 12 [running]:\nx()\n"} {
		if _, ok := readStack(stack); ok {
			t.Errorf("%q is taken for the loop's", stack)
		}
	}
}

// A call of ours counts from the look before the first that sees it to the one after the
// last, so that it is never taken for shorter than it is; frames count apart.
func TestPulseNeverTakesHoldsForShorter(t *testing.T) {
	ms := func(n int) time.Duration { return time.Duration(n) * time.Millisecond }
	at := func(n int) mark { return mark{clock: 2 * ms(n), thread: ms(n)} }
	tap := seen{whose: ours, call: "pavilight/app/ui.tap(1)", state: "running"}
	other := seen{whose: ours, call: "pavilight/app/ui.tap(2)", state: "running"}
	frame := seen{whose: frames, state: "syscall"}
	var said strings.Builder
	p := &pulse{say: &said}
	p.answered(at(0), ms(1))
	for _, l := range []struct {
		n int
		s seen
	}{{15, frame}, {35, frame}, {45, tap}, {60, tap}, {90, tap}, {100, other}, {110, frame}} {
		p.look(at(l.n), l.s)
	}
	p.answered(at(120), ms(130))
	if got, want := said.String(), "HELD 65 ms by pavilight/app/ui.tap(1)\n"; got != want { // 35 to 100
		t.Errorf("told %q, want %q", got, want)
	}
	if p.longest[ours] != ms(65) || p.longest[frames] != ms(35) || p.frames != 2 || p.unseen != ms(30) {
		t.Errorf("longest %v, %d frames, unseen %v", p.longest, p.frames, p.unseen)
	}
	said.Reset()
	p.look(at(135), seen{whose: ours, call: "pavilight/app/ui.save(1)", state: "syscall"})
	p.answered(mark{clock: ms(400), thread: ms(136)}, ms(1))
	if !strings.HasPrefix(said.String(), "WAITED ") || strings.Contains(said.String(), "HELD") {
		t.Errorf("told %q of a wait", said.String())
	}
}
