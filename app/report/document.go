package report

import (
	"image"
	"image/color"

	"pavilight/app/drawing"
)

// The report is a list of parts that both the pages of paper and the page for a browser
// are set from. Drawings are measured in mm of paper, at most contentWidth wide.

// contentWidth is the width of the type area on either paper, mm.
const contentWidth = 180.0

// part is one thing in a report, of the types below.
type part interface{}

// heading begins a part of the report. It stays with what follows.
type heading struct {
	words string
	page  bool // begins a page
}

// text is a paragraph.
type text struct {
	words string
	small bool
	bold  bool
}

// plate is a picture with a title over it and a caption below.
type plate struct {
	image   image.Image
	title   string
	caption string
	patch   color.RGBA // a small square of this colour before the caption; none if transparent
}

// plates are pictures side by side, all of one edge, mm.
type plates struct {
	items []plate
	edge  float64
}

// beside is paragraphs with pictures on their right.
type beside struct {
	texts  []text
	plates plates
}

// columnsOf are one or two columns of short paragraphs, each under half of a figure.
type columnsOf [][]string

// figure is a drawing.
type figure struct {
	page *drawing.Page
	alt  string // what it shows, for those who do not see it
}

// table is rows of cells under a head. The first column is set left, the others right.
type table struct {
	head []string
	rows [][]string
	wide bool // columns may be as wide as the page allows
}

// list is terms with their meaning.
type list struct{ items []pair }

type pair struct{ term, meaning string }

// together keeps parts on one page.
type together struct{ parts []part }

// document is a whole report.
type document struct {
	cover *Cover
	words words
	title string
	kind  string   // of report, empty where the title says it
	lines []string // under the title
	parts []part
}
