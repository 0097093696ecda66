// Package report makes the report that explains a stone's light to a client: what comes
// back to the eye, what shows what lies under the stone, and why water changes it, on
// pages of paper (PDF) and on a page for a browser (HTML), with the numbers as CSV,
// JSON and pictures of 32-bit numbers.
//
// A Job and a Stone give Findings, all that was traced; Findings give a document in one of
// the languages. Equal input gives equal bytes. A report states numbers and their errors;
// it has no grades and no words of praise.
package report

import (
	"errors"
	"fmt"
	"image"
	"strings"
	"time"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Origin is how a stone's shape came to be known.
type Origin int

// The origins of a shape.
const (
	FromPlan Origin = iota
	FromProportions
	FromScan
)

// Stone is a stone to be reported on.
type Stone struct {
	Name        string
	Solid       *facets.Stone
	Material    *gems.Material
	Measures    facets.Measures
	Origin      Origin
	Proportions *facets.Proportions // of a stone FromProportions
	WidthTaken  bool                // nobody gave the width: sizes and weight are not told
}

// Carats returns the stone's weight; ok is false where the density or the width is not
// known.
func (s *Stone) Carats() (carats float64, ok bool) {
	if s.Material.Density <= 0 || s.WidthTaken {
		return 0, false
	}
	return s.Measures.Carats(s.Material.Density), true
}

// Job is how stones are looked at: the same for all that are compared.
type Job struct {
	Media    []*gems.Material // surroundings, the first of them the one that all others are compared with
	Lights   []*trace.Light   // of the pictures in true colour; one or two
	Body     *gems.Absorption // body colour in place of the material's; nil for none
	Head     facets.Angle     // half-angle of the cone that the viewer's head blocks
	Pixels   int              // of a map's edge; 0 means 300
	Error    float64          // of every ledger entry; 0 means 0.0005
	Seed     uint64
	Workers  int
	Measured Uncertainties // how exactly the stones were measured; empty for not stated
}

// Cover is what a document says besides what was found.
type Cover struct {
	Language   string // "en", "de" or "fr"
	Colleague  bool   // with the terms and tables for a colleague, else for a client
	Letterhead image.Image
	Author     string // who signs; empty for nobody
	Client     string
	Notes      string
	Date       time.Time
	Program    string // the program and its version
	Paper      Paper
}

// Paper is a size of paper, upright, mm.
type Paper struct{ Width, Height float64 }

// PaperNamed returns the paper of a name, a4 (ISO 216) or letter (ANSI/ASME Y14.1).
func PaperNamed(name string) (Paper, error) {
	switch strings.ToLower(name) {
	case "a4":
		return Paper{210, 297}, nil
	case "letter":
		return Paper{215.9, 279.4}, nil
	}
	return Paper{}, fmt.Errorf("paper %q is not known; use a4 or letter", name)
}

// check refuses a job that cannot be done.
func (j *Job) check() error {
	switch {
	case len(j.Media) == 0:
		return errors.New("a report needs at least one surrounding")
	case len(j.Media) > mostMedia:
		return fmt.Errorf("%d surroundings are too many for a page; use at most %d", len(j.Media), mostMedia)
	case len(j.Lights) < 1 || len(j.Lights) > 2:
		return fmt.Errorf("%d lights: give one or two", len(j.Lights))
	}
	return nil
}

// mostMedia is how many surroundings find room beside each other on a page, with the
// dishes of those that are liquids.
const mostMedia = 4
