package ui

import (
	"io"
	"log"
	"os"
	"strings"
	"sync"
)

// toolkitLog takes what the toolkit writes to the log: mostly of what a desktop lacks and
// the program does without, such as a bus or a folder for videos. It belongs into the
// diagnostics, not on the terminal of a user.
type toolkitLog struct {
	mu    sync.Mutex
	lines []string
	also  io.Writer // for scripts that drive the window; nil for nobody
}

// loggedLines is how many of the last lines are remembered.
const loggedLines = 30

// Write remembers the last lines.
func (l *toolkitLog) Write(text []byte) (int, error) {
	l.mu.Lock()
	defer l.mu.Unlock()
	l.lines = append(l.lines, strings.Split(strings.TrimSuffix(string(text), "\n"), "\n")...)
	l.lines = l.lines[max(0, len(l.lines)-loggedLines):]
	if l.also != nil {
		return l.also.Write(text)
	}
	return len(text), nil
}

// String returns the lines that are remembered.
func (l *toolkitLog) String() string {
	if l == nil {
		return ""
	}
	l.mu.Lock()
	defer l.mu.Unlock()
	return strings.Join(l.lines, "\n")
}

// takeToolkitLog has the toolkit's log remembered.
func takeToolkitLog() *toolkitLog {
	l := &toolkitLog{}
	if os.Getenv(stagesVariable) != "" {
		l.also = os.Stderr
	}
	log.SetOutput(l)
	return l
}
