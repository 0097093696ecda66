// Package sheet makes the sheet that goes to the bench: a cut plan in the terms of
// the user's machine, with drawings, sizes, check lists and cautions, on pages of
// paper. It speaks the language that its Job names; what the plan's author and the
// machine's owner wrote stands as they wrote it.
//
// Everything on a sheet follows from a Job; equal jobs give equal pages. Drawings
// follow the plan: index 0 points up the picture, indices grow anticlockwise seen
// from above the table and clockwise seen from below. Numbers beside them are what
// the machine shows.
package sheet

import (
	"bytes"
	"fmt"
	"path/filepath"
	"strings"
	"time"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Job is what a sheet is made from.
type Job struct {
	Plan     *facets.Plan
	Material *gems.Material
	Machine  Machine
	Light    *trace.Result // face-up maps and ledger, one column a medium; nil leaves them out
	Miscuts  []Miscut      // what errors of the machine do to the light; see Trace
	HeadDeg  float64       // half-angle of the head in Light, degrees

	Paper     Paper
	Large     bool // type a quarter larger
	Opposites bool // indices with the opposite ones first, else in the order of the gear
	Gears     []int
	LeaveOut  LeaveOut
	Copy      words.Key // PupilsCopy or TeachersCopy; empty for the usual one

	Words   *words.Words // the language of the pages; nil for English
	Program string       // the program and its version
	Workers int          // of Trace; 0 for all cores
	Date    time.Time    // of the PDF; the zero Date is allowed
}

// The copies that are made where parts are left out.
const (
	PupilsCopy   words.Key = "pupil's copy"
	TeachersCopy words.Key = "teacher's copy"
)

// ShapeAlone are the notes of a plan that is made from a stone's shape, in English; the
// sheet says them in its own language.
const ShapeAlone words.Key = "Made from the shape alone. What the facets were cut to meet is not known: " +
	"every tier stops by distance."

// LeaveOut names the parts that a pupil has to find.
type LeaveOut struct {
	Angles, Indices, Stops bool
}

// Any reports whether anything is left out.
func (l LeaveOut) Any() bool { return l.Angles || l.Indices || l.Stops }

// Sheet is a job worked out: what its pages say.
type Sheet struct {
	Job
	Solution *facets.Solution
	Measures facets.Measures
	Rows     []Row // one a tier, in cutting order
	Rough    Rough

	// LightModel is set for materials that are not worked on the machines that the
	// sheet speaks of: it then shows the plan's light and shape and gives no steps.
	LightModel bool
}

// New works a job out. Errors of the plan, and indices that the machine cannot
// set, are facets.Faults.
func New(job Job) (*Sheet, error) {
	solved, err := job.Plan.Solution()
	if err != nil {
		return nil, err
	}
	s := &Sheet{Job: job, Solution: solved, Measures: solved.Stone.Measure()}
	s.LightModel = job.Material.Key == "diamond"
	if s.LightModel { // the plan's own numbers, for there is nothing to set
		s.Machine = Machine{Name: "the plan's own numbers", Cheater: 180 * facets.Degree}
	}
	if s.Machine.Gear == 0 {
		s.Machine.Gear = job.Plan.Gear
	}
	s.Rough = roughOf(job.Plan, solved.Stone)
	steps, err := job.Plan.Steps(solved, s.Rough.Stone)
	if err != nil {
		return nil, err
	}
	if s.Rows, err = s.rows(steps); err != nil {
		return nil, err
	}
	return s, nil
}

// Carats returns the weight of a volume of the sheet's material, and false where
// its density is not known.
func (s *Sheet) Carats(mm3 float64) (float64, bool) {
	m := facets.Measures{VolumeMM3: mm3}
	return m.Carats(s.Material.Density), s.Material.Density > 0
}

// FileName returns a name for the sheet's file, without folder and ending, made
// from the plan file's name.
func (s *Sheet) FileName() string {
	base := facets.FileStem(s.Plan.File)
	if base == "" || base == "." || base == string(filepath.Separator) {
		base = "plan"
	}
	return base + "-cut"
}

// Document returns the sheet's pages with the plan file attached. A sheet with
// parts left out carries no plan.
func (s *Sheet) Document() (*drawing.Document, error) {
	return document([]*Sheet{s}, s.Pages(), s.Plan.Name)
}

func document(sheets []*Sheet, pages []*drawing.Page, title string) (*drawing.Document, error) {
	first := sheets[0]
	d := &drawing.Document{
		Title:    joined(", ", title, first.Words.Say(first.Copy)),
		Subject:  first.Words.Say("cutting sheet"),
		Language: first.Words.Language(),
		Creator:  first.Program,
		Date:     first.Date,
		Pages:    pages,
	}
	used := map[string]bool{}
	for _, s := range sheets {
		if len(sheets) == 1 {
			d.Author = s.Plan.Author
		}
		if s.LeaveOut.Any() {
			continue
		}
		var text bytes.Buffer
		if err := s.Plan.Write(&text); err != nil {
			return nil, err
		}
		name := filepath.Base(s.Plan.File)
		if !strings.HasSuffix(strings.ToLower(name), ".toml") {
			name = "plan.toml"
		}
		stem := facets.FileStem(name)
		for n, ending := 2, name[len(stem):]; used[name]; n++ {
			name = fmt.Sprintf("%s-%d%s", stem, n, ending)
		}
		used[name] = true
		d.Attachments = append(d.Attachments, drawing.Attachment{
			Name: name, About: s.Words.Say("the cut plan of this sheet, for %s", s.Program), Content: text.Bytes(),
		})
	}
	return d, nil
}

// joined joins the parts that are not empty.
func joined(with string, parts ...string) string {
	var full []string
	for _, p := range parts {
		if p != "" {
			full = append(full, p)
		}
	}
	return strings.Join(full, with)
}

// Notes returns what the user should know that is no error, in the language of whoever
// asks, which need not be the sheet's.
func (s *Sheet) Notes(in *words.Words) []string {
	var notes []string
	between := 0
	for i := range s.Rows {
		r := &s.Rows[i]
		for _, set := range r.Settings {
			if set.Part != 0 {
				between++
			}
		}
		if len(r.Step.New) == 0 {
			notes = append(notes, in.Say("tier %s takes nothing off the rough that the steps start from", r.Tier.Name))
		}
	}
	if between > 0 {
		notes = append(notes, in.Say("%d facets lie between the teeth of the gear of %d; "+
			"the sheet gives tooth and cheater", between, s.Machine.Gear))
	}
	if s.Rough.TooSmall {
		notes = append(notes, in.Say("the plan's rough does not hold the stone along its axes; "+
			"the steps start from a box around the stone"))
	}
	return notes
}
