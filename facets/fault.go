package facets

import (
	"fmt"
	"sort"
	"strings"
)

// Fault is one thing wrong with an input, told to the person who must mend it:
// where it stands, what was written, why it cannot be taken, and the remedy.
type Fault struct {
	File   string // as the user named it; empty for a plan that no file holds as it is
	Line   int    // 1-based; 0 where no line can be named
	Tier   string // tier's name; empty where the fault belongs to no tier
	Field  string // key or part of the file
	Got    string // what was written, as written; may be empty
	Why    string // what is wrong with it
	Remedy string // what to do
}

// Error returns the fault in one line: file:line: tier "P1": angle "134": why; remedy.
func (f *Fault) Error() string {
	var b strings.Builder
	if f.File != "" {
		b.WriteString(f.File)
		if f.Line > 0 {
			fmt.Fprintf(&b, ":%d", f.Line)
		}
		b.WriteString(": ")
	}
	if f.Tier != "" {
		fmt.Fprintf(&b, "tier %q: ", shorten(f.Tier))
	}
	if f.Field != "" {
		b.WriteString(shorten(f.Field))
		if f.Got != "" {
			fmt.Fprintf(&b, " %q", shorten(f.Got))
		}
		b.WriteString(": ")
	}
	b.WriteString(f.Why)
	if f.Remedy != "" {
		b.WriteString("; " + f.Remedy)
	}
	return b.String()
}

// Faults is every fault found in one input, in the order of its lines.
type Faults []*Fault

// Error returns all the faults, one a line.
func (fs Faults) Error() string {
	lines := make([]string, len(fs))
	for i, f := range fs {
		lines[i] = f.Error()
	}
	return strings.Join(lines, "\n")
}

// Err returns nil for no faults, else the faults sorted by line.
func (fs Faults) Err() error {
	if len(fs) == 0 {
		return nil
	}
	sort.SliceStable(fs, func(i, j int) bool { return fs[i].Line < fs[j].Line })
	return fs
}
