package model

import (
	"path/filepath"

	"pavilight/app/disk"
	"pavilight/app/words"
	"pavilight/facets"
)

// Document is a plan that is being worked on, with its history and the file that
// it belongs to.
type Document struct {
	Path string // of its file; empty for a plan that has none yet

	history history[*facets.Plan]
	known   disk.Stamp   // what the file held when it was read or written
	seen    disk.Stamp   // what it held when it was last looked at
	onDisk  *facets.Plan // what the file was read as or written from
}

// NewDocument returns a document of the plan as it was read from path, or of a
// bundled plan, which has no file, for an empty path.
func NewDocument(plan *facets.Plan, path string) *Document {
	return newDocument(plan, path, disk.StampOf(path), true)
}

// newDocument returns a document whose file holds what known tells; the plan may be work
// that was never saved to it.
func newDocument(plan *facets.Plan, path string, known disk.Stamp, saved bool) *Document {
	d := &Document{Path: path, history: newHistory(plan, saved), known: known, seen: known}
	if saved {
		d.onDisk = plan
	}
	return d
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

// inFile reports whether the plan stands in its file as it is, and was read from there, so
// that its lines mean something.
func (d *Document) inFile() bool {
	return d.Path != "" && !d.Modified() && filepath.Base(d.Path) == filepath.Base(d.Plan().File)
}

// Title names the plan, with a star while it differs from its file.
func (d *Document) Title(w *words.Words) string {
	name := d.Plan().Name
	if name == "" && d.Path != "" {
		name = filepath.Base(d.Path)
	}
	if name == "" {
		name = w.Say("unnamed plan")
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
	const most = 60 // letters: systems take 255 bytes with what is added
	name := []rune{}
	for _, r := range d.Plan().Name {
		if len(name) == most {
			break
		}
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

// saved goes on under the name of the file that the plan, which may no longer be the
// present one, was written to.
func (d *Document) saved(plan *facets.Plan, path string, now disk.Stamp) {
	d.Path, d.known, d.seen, d.onDisk = path, now, now, plan
	d.markSaved()
}

// markSaved says that the plan on disk is that of the step that made it.
func (d *Document) markSaved() {
	d.history.markSaved(func(p *facets.Plan) bool { return p == d.onDisk })
}

// Outside says what happened to the document's file by other hands.
type Outside int

// What can have happened.
const (
	Untouched Outside = iota
	Changed           // the file holds something else now
	Gone              // the file is not there any more
	Lost              // the file, or the drive that it lies on, does not answer
	Back              // the file is there again and holds what it held
)

// Seen compares what the file holds now with what was seen last, and remembers it, so
// that each change is told once. A plan whose file is gone counts as modified.
func (d *Document) Seen(now disk.Stamp) Outside {
	last := d.seen
	if d.Path == "" || now == last {
		return Untouched
	}
	d.seen = now
	out := func(s disk.Stamp) bool { return s.Absent() || s.Unreachable() }
	switch {
	case out(now):
		d.history.saved = -1
		if now.Unreachable() {
			return Lost
		}
		return Gone
	case now == d.known && out(last):
		d.markSaved()
		return Back
	case now == d.known: // it was changed, and changed back
		return Untouched
	}
	return Changed
}

// KeepMine takes note that the user was told of what the file holds now and wants to keep
// the plan as it is here: it counts as modified, and saving it writes over the file.
func (d *Document) KeepMine() {
	d.known, d.onDisk = d.seen, nil
	d.history.saved = -1
}

// First returns the plan as it was when the document was opened, as far as is remembered.
func (d *Document) First() *facets.Plan { return d.history.steps[0].state }
