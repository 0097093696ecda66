package gems

import (
	"fmt"
	"slices"
	"strings"
)

// Fault is one thing wrong with a file of materials, told to the person who must mend
// it: where it stands, what was written, why it cannot be taken, and the remedy.
type Fault struct {
	File     string // as the user named it
	Line     int    // 1-based; 0 where no line can be named
	Material string // its key; empty where the fault belongs to none
	Field    string // the key of the entry
	Got      string // what was written; may be empty
	Why      string // what is wrong with it
	Remedy   string // what to do
}

// Error returns the fault in one line: file:line: material "x": field "got": why; remedy.
func (f *Fault) Error() string {
	var b strings.Builder
	b.WriteString(f.File)
	if f.Line > 0 {
		fmt.Fprintf(&b, ":%d", f.Line)
	}
	b.WriteString(": ")
	if f.Material != "" {
		fmt.Fprintf(&b, "material %q: ", f.Material)
	}
	if f.Field != "" {
		b.WriteString(f.Field)
		if f.Got != "" {
			fmt.Fprintf(&b, " %q", f.Got)
		}
		b.WriteString(": ")
	}
	b.WriteString(f.Why)
	if f.Remedy != "" {
		b.WriteString("; " + f.Remedy)
	}
	return b.String()
}

// Faults is every fault found in one file, in the order of its lines.
type Faults []*Fault

// Error returns all the faults, one a line.
func (fs Faults) Error() string {
	lines := make([]string, len(fs))
	for i, f := range fs {
		lines[i] = f.Error()
	}
	return strings.Join(lines, "\n")
}

// err returns nil for no faults, else the faults sorted by line.
func (fs Faults) err() error {
	if len(fs) == 0 {
		return nil
	}
	slices.SortStableFunc(fs, func(a, b *Fault) int { return a.Line - b.Line })
	return fs
}
