package model

import (
	"os"
	"path/filepath"
	"time"

	"pavilight/app/disk"
	"pavilight/app/words"
	"pavilight/facets"
)

// Document is a plan that is being worked on, with its history and the file that
// it belongs to.
type Document struct {
	Path string // of its file; empty for a plan that has none yet

	history history[*facets.Plan]
	stamp   Stamp // of the file as it was read or written
}

// NewDocument returns a document of the plan as it was read from path, or of a
// bundled plan, which has no file, for an empty path.
func NewDocument(plan *facets.Plan, path string) *Document {
	return &Document{Path: path, history: newHistory(plan, true), stamp: StampOf(path)}
}

// recovered returns a document of work that was never saved to path.
func recovered(plan *facets.Plan, path string) *Document {
	return &Document{Path: path, history: newHistory(plan, false), stamp: StampOf(path)}
}

// Plan returns the present plan. It must not be changed; see Edit.
func (d *Document) Plan() *facets.Plan { return d.history.present() }

// Edit changes the plan as one step that the Edit menu calls name. Steps that
// follow each other with the same merge key, such as those of one drag, become
// one; an empty key never merges.
func (d *Document) Edit(name words.Text, merge string, change func(*facets.Plan)) {
	plan := d.Plan().Clone()
	change(plan)
	d.history.push(name, merge, plan)
}

// Settle ends a run of steps that become one.
func (d *Document) Settle() { d.history.settle() }

// Undo takes the last step back, false if there is none.
func (d *Document) Undo() bool { return d.history.undo() }

// Redo brings the step back that Undo took, false if there is none.
func (d *Document) Redo() bool { return d.history.redo() }

// UndoName names the step that Undo takes back, false if there is none.
func (d *Document) UndoName() (words.Text, bool) { return d.history.undoName() }

// RedoName names the step that Redo brings back, false if there is none.
func (d *Document) RedoName() (words.Text, bool) { return d.history.redoName() }

// Modified reports whether the plan differs from its file.
func (d *Document) Modified() bool { return d.history.modified() }

// Title names the plan, with a star while it differs from its file.
func (d *Document) Title() string {
	name := d.Plan().Name
	if name == "" && d.Path != "" {
		name = filepath.Base(d.Path)
	}
	if name == "" {
		name = "unnamed plan"
	}
	if d.Modified() {
		name += "*"
	}
	return name
}

// FileName suggests a name for the plan's file.
func (d *Document) FileName() string {
	if d.Path != "" {
		return filepath.Base(d.Path)
	}
	name := []rune{}
	for _, r := range d.Plan().Name {
		switch {
		case r >= 'A' && r <= 'Z':
			name = append(name, r-'A'+'a')
		case r >= 'a' && r <= 'z', r >= '0' && r <= '9':
			name = append(name, r)
		case len(name) > 0 && name[len(name)-1] != '-':
			name = append(name, '-')
		}
	}
	for len(name) > 0 && name[len(name)-1] == '-' {
		name = name[:len(name)-1]
	}
	if len(name) == 0 {
		return "stone" + facets.PlanEnding
	}
	return string(name) + facets.PlanEnding
}

// save writes the plan to path as a whole or not at all and goes on under that name.
func (d *Document) save(path string) error {
	if err := disk.Replace(path, d.Plan().Write); err != nil {
		return err
	}
	d.Path, d.stamp = path, StampOf(path)
	d.history.markSaved()
	return nil
}

// Stamp tells one state of a file from another; the zero value stands for no file.
type Stamp struct {
	changed time.Time
	bytes   int64
}

// StampOf returns the stamp of the file at path as it is now.
func StampOf(path string) Stamp {
	if path == "" {
		return Stamp{}
	}
	info, err := os.Stat(path)
	if err != nil {
		return Stamp{}
	}
	return Stamp{info.ModTime(), info.Size()}
}

// Outside says what happened to the document's file by other hands.
type Outside int

// What can have happened.
const (
	Untouched Outside = iota
	Changed           // the file holds something else now
	Gone              // the file is not there any more
)

// Seen compares the file's stamp as it is now with the one that the document knows,
// and remembers it, so that each change is told once. A plan whose file is gone
// counts as modified.
func (d *Document) Seen(now Stamp) Outside {
	before := d.stamp
	d.stamp = now
	switch {
	case d.Path == "" || now == before:
		return Untouched
	case now == Stamp{}:
		d.history.saved = -1
		return Gone
	}
	return Changed
}

// First returns the plan as it was when the document was opened, as far as is remembered.
func (d *Document) First() *facets.Plan { return d.history.steps[0].state }
