package command

import (
	"fmt"
	"io"
	"strings"
)

// progress shows how far a run has come: a bar that is redrawn on a terminal, a line
// for every tenth elsewhere.
type progress struct {
	w        io.Writer
	terminal bool
	shown    int // percent on a terminal, tenths elsewhere; -1 before the first
}

func newProgress(w io.Writer, terminal bool) *progress {
	return &progress{w: w, terminal: terminal, shown: -1}
}

// show tells that the share done, 0 to 1, has been reached. It never goes back.
func (p *progress) show(done float64) {
	const width = 40
	if !p.terminal {
		tenths := int(done*10 + 1e-9) // so that 0.3 counts as three tenths
		if tenths > p.shown && tenths > 0 {
			fmt.Fprintf(p.w, "traced %d %%\n", tenths*10)
			p.shown = tenths
		}
		return
	}
	if percent := int(done*100 + 1e-9); percent > p.shown {
		filled := percent * width / 100
		fmt.Fprintf(p.w, "\r[%s%s] %3d %%", strings.Repeat("=", filled), strings.Repeat(" ", width-filled), percent)
		p.shown = percent
	}
}

// clear takes the bar off the terminal.
func (p *progress) clear() {
	if p.terminal && p.shown >= 0 {
		fmt.Fprint(p.w, "\r\x1b[K")
	}
}
