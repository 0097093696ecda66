package picture

import (
	"errors"
	"image"
)

// Sheet is a grid of maps: a row for each quantity, a column for each surrounding.
// All plates of a sheet have the same number of pixels.
type Sheet struct {
	Title  string    // the stone
	Lines  []string  // material, size, view, light, under the title
	Rows   [][]Plate // one row a quantity, one plate a medium
	Ledger [][]string
	Legend string // what the scales count
}

var errSheet = errors.New("picture: the rows of a sheet must hold the same number of plates of one size")

func (s *Sheet) valid() bool {
	if len(s.Rows) == 0 || len(s.Rows[0]) == 0 {
		return false
	}
	first := s.Rows[0][0]
	for _, row := range s.Rows {
		if len(row) != len(s.Rows[0]) {
			return false
		}
		for i := range row {
			if !row[i].valid() || row[i].Pixels != first.Pixels {
				return false
			}
		}
	}
	return true
}

// Draw returns the picture of the sheet: title, the media over the columns, the
// quantities left of the rows' maps with one scale a row, and Ledger[i] under the
// i-th column.
func (s *Sheet) Draw() (*image.RGBA, error) {
	if !s.valid() {
		return nil, errSheet
	}
	const gap = 14
	edge := s.Rows[0][0].edge()
	columns := len(s.Rows[0])
	tallest := 0
	for _, lines := range s.Ledger {
		tallest = max(tallest, len(lines))
	}
	rowStep := lineStep + edge + gap
	width := 2*margin + columns*(edge+gap) + scaleRoom
	text := width - 2*margin
	l, err := newLetters()
	if err != nil {
		return nil, err
	}
	var above []string
	for _, line := range s.Lines {
		above = append(above, wrap(l.body, line, text)...)
	}
	legend := wrap(l.body, s.Legend, text)
	head := margin + titleSize + lineStep*len(above) + 12
	height := head + lineStep + len(s.Rows)*rowStep + lineStep*(tallest+1+len(legend)) + margin
	dst := blank(width, height)
	l.dst = dst

	l.write(l.title, margin, margin+titleSize-3, left, ink, cut(l.title, s.Title, text))
	for i, line := range above {
		l.write(l.body, margin, margin+titleSize+lineStep*(i+1)-2, left, ink, line)
	}
	for c := range columns {
		x := margin + c*(edge+gap)
		l.write(l.body, x+edge/2, head+bodySize, middle, ink, cut(l.body, s.Rows[0][c].Medium, edge))
	}
	y := head + lineStep
	for _, row := range s.Rows {
		l.write(l.body, margin, y+bodySize, left, ink, row[0].Title)
		for c := range row {
			row[c].paint(dst, image.Pt(margin+c*(edge+gap), y+lineStep))
		}
		l.scale(row[0].Colours, margin+columns*(edge+gap), y+lineStep, edge)
		y += rowStep
	}
	for c, lines := range s.Ledger {
		for i, line := range lines {
			l.write(l.body, margin+c*(edge+gap), y+bodySize+lineStep*i, left, ink, cut(l.body, line, edge))
		}
	}
	for i, line := range legend {
		l.write(l.body, margin, y+bodySize+lineStep*(tallest+1+i)-8, left, pale, line)
	}
	return dst, nil
}
