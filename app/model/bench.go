package model

import (
	"bytes"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"

	"pavilight/app/disk"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
)

// Bench is the work under way: the plan with its history, the maps of it, and the
// rows of tiers between the two.
type Bench struct {
	Doc      *Document
	Look     *Look
	Stock    *gems.Library // of all materials at hand
	words    *words.Words
	Selected string // name of the tier picked in the list or on the solid; may be empty

	solve    func(*facets.Plan) (*facets.Stone, error)
	do       func(func())
	onChange func()
	tiers    tierList
	saves    []*saving // the first to each path is under way
}

// NewBench returns a bench with the plan on it, its maps not yet asked for: see
// Begin. do hands work to the window's goroutine, in order, without waiting for it;
// onLook is told of the maps, onPlan of everything else.
func NewBench(doc *Document, do func(func()), onLook func(Change), onPlan func()) (*Bench, error) {
	b := &Bench{Doc: doc, Stock: gems.Standard(), do: do, onChange: onPlan, solve: (*facets.Plan).Solve}
	look, err := NewLook(do, onLook)
	if err != nil {
		return nil, err
	}
	b.Look = look
	return b, nil
}

// SetWords has the bench and the maps speak a language; before, it is English.
func (b *Bench) SetWords(w *words.Words) { b.words, b.Look.words = w, w }

// Words are those of the language that the bench speaks.
func (b *Bench) Words() *words.Words { return b.words }

// Begin asks for the maps of the plan.
func (b *Bench) Begin() { b.show() }

// show hands the present plan to the maps.
func (b *Bench) show() {
	plan := b.Doc.Plan()
	b.Look.Show(func() (Subject, error) { return b.subject(plan) })
	b.onChange()
}

// subject solves a plan and finds its material. It may run on any goroutine.
func (b *Bench) subject(plan *facets.Plan) (Subject, error) {
	material, err := b.MaterialOf(plan.Material)
	if err != nil {
		return Subject{}, err
	}
	stone, err := b.solve(plan)
	if err != nil {
		return Subject{}, err
	}
	return Subject{Stone: stone, Material: material, Measures: stone.Measure()}, nil
}

// MaterialOf returns the material that a plan names or brings along.
func (b *Bench) MaterialOf(ref facets.MaterialRef) (*gems.Material, error) {
	if ref.Key != "" {
		return b.Stock.Find(ref.Key)
	}
	return gems.Plain(ref.Name, ref.Index, ref.Density)
}

// Open reads and solves the plan or scan at path on another goroutine and puts it on
// the bench. If it cannot be had the bench stays as it is. A scan becomes a plan
// that cuts the same solid, of the material and for the gear that were on the bench,
// in millimetres, and has no file yet. done is told how it went.
func (b *Bench) Open(path string, done func(error)) {
	before := b.Doc.Plan()
	go func() {
		doc, err := b.read(path, before)
		b.do(func() {
			if err == nil {
				b.put(doc)
			}
			done(err)
		})
	}()
}

// ScanExtensions are the endings of the names of scans, in lower case.
func ScanExtensions() []string { return []string{".stl", ".obj", ".ply"} }

// read returns the document of a plan or scan that makes a stone.
func (b *Bench) read(path string, before *facets.Plan) (*Document, error) {
	if whole, err := filepath.Abs(path); err == nil {
		path = whole
	}
	var doc *Document
	if slices.Contains(ScanExtensions(), strings.ToLower(filepath.Ext(path))) {
		plan, err := readScan(path, before)
		if err != nil {
			return nil, err
		}
		doc = NewDocument(plan, "")
	} else {
		disk.SweepBeside(path)
		known := disk.StampOf(path) // before it is read: a change in between is told, not overlooked
		plan, err := facets.OpenPlan(path)
		if err != nil {
			return nil, err
		}
		doc = newDocument(plan, path, known, true)
	}
	_, err := b.subject(doc.Plan())
	return doc, err
}

// readScan returns the plan that cuts a scanned solid.
func readScan(path string, before *facets.Plan) (*facets.Plan, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, &facets.Fault{File: path, Why: "the file cannot be opened", Remedy: "check its name and folder"}
	}
	defer file.Close()
	scan, err := facets.ReadScan(file, path, facets.ScanOptions{})
	if err != nil {
		return nil, err
	}
	stone, err := scan.Stone(facets.ScanPlacement{Name: strings.TrimSuffix(filepath.Base(path), filepath.Ext(path))})
	if err != nil {
		return nil, err
	}
	plan := facets.PlanOf(stone, before.Gear)
	plan.Material, plan.File = before.Material, path
	return plan, nil
}

// OpenText puts a bundled plan on the bench; name is its file's, for messages.
func (b *Bench) OpenText(text []byte, name string) error {
	plan, err := facets.ReadPlan(bytes.NewReader(text), name)
	if err != nil {
		return err
	}
	if _, err := b.subject(plan); err != nil {
		return err
	}
	b.put(NewDocument(plan, ""))
	return nil
}

func (b *Bench) put(doc *Document) {
	b.Doc, b.Selected = doc, ""
	b.tiers.forget()
	b.show()
}

// Save writes the present plan to path on another goroutine, as a whole or not at all,
// and tells done. A file that other hands have written to since it was read is left as it
// is, with an error that is disk.ErrChanged, but where over says that the user knows: then,
// and under a new name, whatever is there is replaced. Saves to one path follow each other
// in the order in which they are asked for; one to another path does not wait for a drive
// that does not answer. A recovery, which may be nil, keeps the plan until it is safely in
// its file, and forgets it then.
func (b *Bench) Save(path string, over bool, recovery *Recovery, done func(error)) {
	doc := b.Doc
	doc.Settle()
	s := &saving{doc: doc, plan: doc.Plan(), path: path, over: over, recovery: recovery, done: done}
	waits := b.writing(path)
	if b.saves = append(b.saves, s); !waits {
		b.write(s)
	}
}

// writing reports whether a plan is being written to the path.
func (b *Bench) writing(path string) bool {
	return slices.ContainsFunc(b.saves, func(s *saving) bool { return s.path == path })
}

// KeepMine keeps the plan as it is here although other hands wrote to its file, of which
// the user was told: it counts as modified, and saving it replaces what they wrote.
func (b *Bench) KeepMine() {
	b.Doc.KeepMine()
	b.onChange()
}

// Saving reports whether the plan's file is being written just now.
func (b *Bench) Saving() bool { return b.writing(b.Doc.Path) }

// saving is one wish to write a plan.
type saving struct {
	doc      *Document
	plan     *facets.Plan
	path     string
	over     bool
	recovery *Recovery
	done     func(error)
}

// write carries out a save, and then the next to the same path.
func (b *Bench) write(s *saving) {
	work := Work{Plan: s.plan, Path: s.doc.Path, Known: s.doc.known}
	checked := !s.over && s.path == s.doc.Path
	turn := s.recovery.Turn()
	keep := s.doc.onDisk != s.plan
	go func() {
		if keep {
			s.recovery.Keep(turn, work) // if that fails there is still the save itself
		}
		now, err := writePlan(s.plan, s.path, checked, work.Known)
		if err == nil {
			s.recovery.Drop(turn)
		}
		b.do(func() {
			if err == nil && s.doc.Path == work.Path { // else it goes by another name since
				s.doc.saved(s.plan, s.path, now)
			}
			b.saves = slices.DeleteFunc(b.saves, func(other *saving) bool { return other == s })
			if i := slices.IndexFunc(b.saves, func(next *saving) bool { return next.path == s.path }); i >= 0 {
				b.write(b.saves[i])
			}
			b.onChange()
			s.done(err)
		})
	}()
}

// writePlan writes the plan and returns what the file holds then.
func writePlan(plan *facets.Plan, path string, checked bool, known disk.Stamp) (disk.Stamp, error) {
	if checked {
		return disk.ReplaceKnown(path, known, plan.Write)
	}
	var text bytes.Buffer
	if err := plan.Write(&text); err != nil {
		return disk.Stamp{}, err
	}
	err := disk.Replace(path, func(w io.Writer) error { _, err := w.Write(text.Bytes()); return err })
	return disk.StampOfText(text.String()), err
}

// Tiers returns the rows of the list, in cutting order.
func (b *Bench) Tiers() []TierRow {
	material, err := b.MaterialOf(b.Doc.Plan().Material)
	if err != nil {
		material = b.Look.Subject.Material
	}
	return b.tiers.rows(b.words, b.Doc.Plan(), b.Look.Subject.Stone, criticalTicks(b.words, material, b.Look.Around))
}

// SetAngle gives a tier another angle. With merge the step joins the one before if
// that set the same tier's angle, as the steps of a drag do until Settle.
func (b *Bench) SetAngle(tier int, angle facets.Angle, merge bool) error {
	if !(angle > 0 && angle < 90*facets.Degree) {
		return words.Errorf("a facet's angle lies between 0°, the table's, and 90°, the girdle's")
	}
	t := b.Doc.Plan().Tiers[tier]
	if t.HasAngle && math.Abs((t.Angle-angle).Degrees()) < sameAngle {
		return nil
	}
	key := ""
	if merge {
		key = "angle of " + t.Name
	}
	b.Doc.Edit(words.Later("angle of %s", t.Name), key, func(p *facets.Plan) {
		p.Tiers[tier].Angle, p.Tiers[tier].HasAngle = angle, true
	})
	b.show()
	return nil
}

// sameAngle is the difference in degrees below which two angles are written alike.
const sameAngle = 5e-7

// SetWidth gives the stone another width in mm.
func (b *Bench) SetWidth(mm float64) error {
	const narrowest, widest = 0.1, 1000 // mm; beyond, it is a slip of the pen
	if !(mm >= narrowest && mm <= widest) {
		return words.Errorf("a stone is from %v to %v mm wide", narrowest, widest)
	}
	if mm == b.Doc.Plan().WidthMM {
		return nil
	}
	b.Doc.Edit(words.Later("width"), "", func(p *facets.Plan) { p.WidthMM = mm })
	b.show()
	return nil
}

// SetMaterial makes the stone of another material.
func (b *Bench) SetMaterial(m *gems.Material) {
	if b.Doc.Plan().Material.Key == m.Key {
		return
	}
	b.Doc.Edit(words.Later("material"), "", func(p *facets.Plan) { p.Material = facets.MaterialRef{Key: m.Key} })
	b.tiers.forget()
	b.show()
}

// SetAround puts another surrounding into a column of the maps.
func (b *Bench) SetAround(column int, a Around) {
	b.tiers.forget()
	b.Look.SetAround(column, a)
	b.onChange()
}

// Adopt takes over a plan that was found by other means, as one step.
func (b *Bench) Adopt(name words.Text, plan *facets.Plan) {
	b.Doc.Edit(name, "", func(p *facets.Plan) { *p = *plan })
	b.show()
}

// Undo takes the last step back.
func (b *Bench) Undo() {
	if b.Doc.Undo() {
		b.show()
	}
}

// Redo brings back the step that Undo took.
func (b *Bench) Redo() {
	if b.Doc.Redo() {
		b.show()
	}
}

// Select picks a tier, in the list and on the solid.
func (b *Bench) Select(tier string) {
	if b.Selected != tier {
		b.Selected = tier
		b.onChange()
	}
}

// Troubles says why the present plan cannot be shown, one fault a line; empty when
// it is shown.
func (b *Bench) Troubles() []string {
	err := b.Look.Trouble
	if !b.Doc.inFile() {
		err = withoutPlace(err)
	}
	return InWords(b.words, err)
}
