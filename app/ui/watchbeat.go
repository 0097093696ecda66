package ui

import (
	"fmt"
	"io"
	"runtime"
	"slices"
	"strings"
	"sync"
	"time"
)

// The toolkit's own handlers run code of ours that no watch on posted work sees: keys and
// taps, drags and wheels, and layouts while a frame is drawn. So a heartbeat is posted to
// the window's thread, and as long as its answer is late, the stack of that thread is
// looked at: whose work is it at?
const (
	beatEvery = 5 * time.Millisecond
	beatLate  = 10 * time.Millisecond // beyond, the thread is looked at
)

// whose tells whose work the window's thread is at.
type whose int

const (
	toolkits whose = iota // its own handling of events, with nothing of ours
	frames                // drawing, with nothing of ours
	ours                  // ours, in a handler, in posted work or in a layout
	owners
)

func (w whose) String() string { return [...]string{"toolkit", "frame", "ours"}[w] }

// seen is one look at the window's thread.
type seen struct {
	whose whose
	call  string // the outermost call of ours, with its arguments; empty if none is ours
	state string // of the goroutine, as running or syscall
}

// readStack finds the window's goroutine, which is the first, in the stacks of all; false
// where it is not among them or not in the toolkit's loop.
func readStack(all string) (seen, bool) {
	const first = "goroutine 1 ["
	if !strings.HasPrefix(all, first) {
		at := strings.Index(all, "\n"+first)
		if at < 0 {
			return seen{}, false
		}
		all = all[at+1:]
	}
	stack, _, _ := strings.Cut(all, "\n\n")
	lines := strings.Split(stack, "\n")
	state, _, _ := strings.Cut(strings.TrimPrefix(lines[0], first), "]")
	s := seen{}
	loop := false
	for _, l := range lines[1:] {
		if strings.Contains(l, ".(*gLDriver).runGL(") {
			loop = true
			break
		}
		switch {
		case strings.HasPrefix(l, "\t"):
		case strings.HasPrefix(l, "pavilight/app/ui.watched") || strings.HasPrefix(l, "pavilight/app/ui.timed("):
		case strings.HasPrefix(l, "pavilight/"):
			s.whose, s.call = ours, l
		case s.whose == toolkits && strings.Contains(l, ".drawSingleFrame("):
			s.whose = frames
		}
	}
	s.state, _, _ = strings.Cut(state, ",")
	return s, loop
}

// waits reports whether it is ours and waits for something: then time passes, though none
// on the processor. What the run-time system makes it wait for is no wait of its own.
func (s seen) waits() bool {
	switch s.state {
	case "running", "runnable", "preempted", "copystack", "semacquire":
		return false
	}
	return s.whose == ours && !strings.HasPrefix(s.state, "GC ")
}

// pulse takes the beats' answers and the looks, and adds up who held the thread. Its times
// are the thread's own on the processor, so that other programs do not count; waits are
// told apart, on the clock.
type pulse struct {
	say io.Writer

	mu      sync.Mutex
	begun   bool // the first answer has come
	beats   int
	late    []time.Duration // how late beats were answered, on the clock
	longest [owners]time.Duration
	frames  int           // that were seen
	drawing time.Duration // in them
	unseen  time.Duration // the longest on the processor between two looks
	lastAt  mark          // the last answer or look
	last    seen
	looked  bool          // last was a look, not an answer
	span    time.Duration // of the call under way
	wait    time.Duration // in it
	waited  time.Duration // the longest
}

// mark is a moment: on the clock, and how long the window's thread has been on the
// processor by then.
type mark struct{ clock, thread time.Duration }

// answered takes the answer to a beat that was so late.
func (p *pulse) answered(at mark, late time.Duration) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if p.begun { // what came before the loop is not the loop's
		p.unseen = max(p.unseen, at.thread-p.lastAt.thread)
	}
	if p.looked {
		p.add(p.last, at)
		p.close()
	}
	p.begun = true
	p.beats++
	p.late = append(p.late, late)
	p.lastAt, p.looked, p.span, p.wait = at, false, 0, 0
}

// look takes a look while an answer is late. What lies between two looks counts for both
// calls of ours, so that none is taken for shorter than it is.
func (p *pulse) look(at mark, s seen) {
	p.mu.Lock()
	defer p.mu.Unlock()
	if !p.begun {
		return
	}
	p.unseen = max(p.unseen, at.thread-p.lastAt.thread)
	if p.looked && (s.whose != p.last.whose || s.call != p.last.call) {
		if p.last.whose == ours {
			p.add(p.last, at)
		}
		p.close()
	}
	p.add(s, at)
	p.lastAt, p.last, p.looked = at, s, true
}

func (p *pulse) add(s seen, until mark) {
	p.span += until.thread - p.lastAt.thread
	if s.waits() {
		p.wait += until.clock - p.lastAt.clock
	}
}

// close ends the span of one call, or of one frame.
func (p *pulse) close() {
	p.longest[p.last.whose] = max(p.longest[p.last.whose], p.span)
	if p.last.whose == frames {
		p.frames++
		p.drawing += p.span
	}
	if p.last.whose == ours && p.span > longestHold {
		fmt.Fprintf(p.say, "HELD %d ms by %s\n", p.span.Milliseconds(), p.last.call)
	}
	if p.wait > longestHold {
		fmt.Fprintf(p.say, "WAITED %d ms by %s: %s\n", p.wait.Milliseconds(), p.last.call, p.last.state)
	}
	p.waited = max(p.waited, p.wait)
	p.span, p.wait = 0, 0
}

// String tells what was seen since the last time, and forgets it.
func (p *pulse) String() string {
	p.mu.Lock()
	defer p.mu.Unlock()
	slices.Sort(p.late)
	at := func(share float64) time.Duration {
		if len(p.late) == 0 {
			return 0
		}
		return p.late[min(len(p.late)-1, int(share*float64(len(p.late))))]
	}
	ms := func(d time.Duration) float64 { return float64(d.Microseconds()) / 1000 }
	mean := 0.0
	if p.frames > 0 {
		mean = ms(p.drawing) / float64(p.frames)
	}
	s := fmt.Sprintf("beats %d late_median %.1f late_99 %.1f late_most %.1f ours_most %.1f waited_most %.1f toolkit_most %.1f "+
		"frames %d frame_mean %.1f frame_most %.1f unseen_most %.1f",
		p.beats, ms(at(0.5)), ms(at(0.99)), ms(at(1)), ms(p.longest[ours]), ms(p.waited), ms(p.longest[toolkits]),
		p.frames, mean, ms(p.longest[frames]), ms(p.unseen))
	p.beats, p.late, p.longest, p.waited, p.frames, p.drawing, p.unseen = 0, nil, [owners]time.Duration{}, 0, 0, 0, 0
	return s
}

// beat keeps the pulse of the window's thread until stop is closed. do hands work to that
// thread and thread tells how long it has been on the processor.
func (p *pulse) beat(do func(func()), thread func() time.Duration, stop <-chan struct{}) {
	began := time.Now()
	now := func() mark { return mark{time.Since(began), thread()} }
	clock := time.NewTicker(beatEvery)
	defer clock.Stop()
	stacks := make([]byte, 1<<20)
	answers := make(chan struct{}, 1)
	waiting := false
	var asked time.Duration
	for {
		select {
		case <-stop:
			return
		case <-answers:
			waiting = false
		case <-clock.C:
			switch {
			case !waiting:
				waiting, asked = true, time.Since(began)
				from := asked
				do(func() {
					at := now()
					p.answered(at, at.clock-from)
					answers <- struct{}{}
				})
			case time.Since(began)-asked >= beatLate:
				n := runtime.Stack(stacks, true)
				if s, ok := readStack(string(stacks[:n])); ok && len(answers) == 0 {
					p.look(now(), s)
				}
			}
		}
	}
}
