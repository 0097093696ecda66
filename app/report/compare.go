package report

import (
	"fmt"
	"image"
	"image/color"
	"image/draw"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"

	"pavilight/app/drawing"
	"pavilight/gems"
	"pavilight/trace"
)

// MostCompared is how many stones find room beside each other.
const MostCompared = 4

// ComparisonPDF writes a report that sets stones side by side on pages of paper. All must
// have been gathered for the same job.
func ComparisonPDF(w io.Writer, all []*Findings, cover *Cover) error {
	d, err := composeComparison(all, cover)
	if err != nil {
		return err
	}
	return d.pdf(w)
}

// ComparisonHTML writes the same as a page for a browser.
func ComparisonHTML(w io.Writer, all []*Findings, cover *Cover) error {
	d, err := composeComparison(all, cover)
	if err != nil {
		return err
	}
	return d.html(w)
}

// Materials returns the names of the materials of stones, each once.
func Materials(all []*Findings) []string {
	var names []string
	for _, f := range all {
		if !slices.Contains(names, f.Material.Name) {
			names = append(names, f.Material.Name)
		}
	}
	return names
}

func composeComparison(all []*Findings, cover *Cover) (*document, error) {
	if len(all) < 2 || len(all) > MostCompared {
		return nil, fmt.Errorf("%d stones cannot be set side by side; use 2 to %d", len(all), MostCompared)
	}
	w, err := wordsOf(cover.Language)
	if err != nil {
		return nil, err
	}
	c := &composer{words: w, cover: cover}
	names := c.namesOf(all)
	c.sideBySide(all, names)
	c.differences(all, names)
	c.comparedMaps(all, names)
	c.comparedTilts(all, names)
	c.method(all)
	c.ending()
	d := &document{cover: cover, words: w, title: w.say("comparison", "count", strconv.Itoa(len(all))), parts: c.parts}
	for i, f := range all {
		d.lines = append(d.lines, names[i]+": "+joined(", ", c.materialName(&f.Stone), c.sizeWords(&f.Stone), c.colourWords(f), c.originWords(&f.Stone)))
	}
	d.lines = append(d.lines, joined(", ", c.forWhom(), w.date(cover.Date)))
	return d, nil
}

// namesOf returns the stones' names, told apart by numbers where they are alike.
func (c *composer) namesOf(all []*Findings) []string {
	var names []string
	for _, f := range all {
		name := c.stoneName(&f.Stone)
		one := name
		for n := 2; slices.Contains(names, one); n++ {
			one = fmt.Sprintf("%s (%d)", name, n)
		}
		names = append(names, one)
	}
	return names
}

// sideBySide shows the stones at one scale, and their ledgers as bars.
func (c *composer) sideBySide(all []*Findings, names []string) {
	widest := 0.0
	known := true
	for _, f := range all {
		known = known && !f.WidthTaken
		widest = max(widest, f.Pictures[0].Span)
	}
	said := []string{}
	if kinds := c.kinds(all); len(kinds) > 1 {
		said = append(said, c.say("compare.materials", "materials", strings.Join(kinds, ", ")))
	}
	if known {
		said = append(said, c.say("compare.text"))
	} else {
		said = append(said, c.say("compare.sizes"))
	}
	var items []plate
	for i, f := range all {
		still := f.Pictures[0]
		img := padded(still.Image(ground()), ground())
		if known {
			img = enlarged(img, widest/still.Span, ground())
		}
		items = append(items, plate{image: fewColours(img), title: names[i], caption: c.lightWords(still.Light) + ", " + c.say("paper.dark")})
	}
	edge := min(52, (contentWidth-platesGap*float64(len(all)-1))/float64(len(all)))
	parts := []part{heading{words: c.say("compare")}}
	for i, words := range said {
		parts = append(parts, text{words: words, bold: i == 0 && len(said) > 1})
	}
	c.add(together{append(parts, plates{items: items, edge: edge})})
	for k := range all[0].Columns {
		var rows []bar
		for i, f := range all {
			col := &f.Columns[k]
			one := bar{
				name: names[i], ledger: col.Ledger,
				back: c.with(col.Ledger.Returned, col.StandardError.Returned, col.spreadOf(trace.Returned)),
			}
			if i == 0 {
				one.group = upper(c.columnName(col.Column))
			}
			rows = append(rows, one)
		}
		title := ""
		if k == 0 {
			title = c.say("bar.title")
		}
		c.add(bars(c.words, title, rows))
	}
	c.add(c.barNote(all...))
}

// kinds returns the names of the materials of stones, each once.
func (c *composer) kinds(all []*Findings) []string {
	var kinds []string
	seen := map[*gems.Material]bool{}
	for _, f := range all {
		if !seen[f.Material] {
			seen[f.Material] = true
			kinds = append(kinds, c.materialName(&f.Stone))
		}
	}
	return kinds
}

// enlarged returns a picture in the middle of one that is k times as wide.
func enlarged(img *image.RGBA, k float64, ground color.RGBA) *image.RGBA {
	edge := int(math.Round(k * float64(img.Rect.Dx())))
	out := image.NewRGBA(image.Rect(0, 0, edge, edge))
	draw.Draw(out, out.Rect, image.NewUniform(ground), image.Point{}, draw.Src)
	rim := (edge - img.Rect.Dx()) / 2
	draw.Draw(out, img.Rect.Add(image.Pt(rim, rim)), img, image.Point{}, draw.Src)
	return out
}

// Difference is how far two stones are apart in one share of the ledger.
type Difference struct {
	Value   float64 // the second less the first
	Error   float64 // standard error of that, of sampling and measuring together
	Differs bool    // further apart than chance allows once in a hundred times
}

// difference compares one share in the same surrounding of two stones.
func difference(a, b *Column, q trace.Quantity) Difference {
	first := estimateOf(q.Of(a.Ledger), q.Of(a.StandardError), a.spreadOf(q))
	second := estimateOf(q.Of(b.Ledger), q.Of(b.StandardError), b.spreadOf(q))
	return Difference{
		Value: second.Value - first.Value, Error: math.Hypot(first.Error, second.Error), Differs: second.DiffersFrom(first),
	}
}

// differences tells for each further stone how far it is from the first.
func (c *composer) differences(all []*Findings, names []string) {
	first := all[0]
	both := ""
	if first.Columns[0].Spread != nil {
		both = c.say("compare.both")
	}
	c.add(heading{words: c.say("compare.differ")}, text{words: c.errorWords(first)}, text{words: c.say("compare.verdict", "both", both)})
	for i, f := range all[1:] {
		t := table{head: []string{c.say("col.quantity"), names[0], names[i+1], c.say("compare.against", "name", names[0])}, wide: true}
		for k := range f.Columns {
			a, b := &first.Columns[k], &f.Columns[k]
			for _, q := range []trace.Quantity{trace.Returned, trace.Leaked} {
				d := difference(a, b, q)
				verdict := c.say("compare.same")
				if d.Differs {
					verdict = c.say("compare.differs")
				}
				t.rows = append(t.rows, []string{
					upper(c.columnName(a.Column)) + ": " + c.say(q.String()),
					c.with(q.Of(a.Ledger), q.Of(a.StandardError), a.spreadOf(q)),
					c.with(q.Of(b.Ledger), q.Of(b.StandardError), b.spreadOf(q)),
					c.say("compare.difference", "difference", c.signed(100*d.Value, 2), "error", c.up(100*d.Error, 2), "verdict", verdict),
				})
			}
		}
		c.add(t)
	}
}

// comparedMaps shows the maps of all stones in the first surrounding, and in the one that
// is set against it.
func (c *composer) comparedMaps(all []*Findings, names []string) {
	shown := []int{0}
	if second := all[0].second(); second > 0 {
		shown = append(shown, second)
	}
	for n, k := range shown {
		var columns []mapColumn
		for i, f := range all {
			columns = append(columns, mapColumn{names[i], &f.Columns[k]})
		}
		parts := []part{heading{words: c.say("compare.maps", "medium", c.inside(all[0].Columns[k].Column))}}
		if n == 0 {
			parts = append(parts, text{words: c.say("maps.text", "errors", c.errorKind(all[0]))})
		}
		alt := c.say("maps.alt", "count", strconv.Itoa(len(columns)))
		c.add(together{append(parts, mapGrid(c.words, columns, alt))})
	}
}

// comparedTilts sets the tilt curves of all stones into one chart.
func (c *composer) comparedTilts(all []*Findings, names []string) {
	const height, gap = 30.0, 8.0
	first := &all[0].Tilts[0].Columns[0]
	p := &drawing.Page{Width: contentWidth, Height: height + chartHeight(len(all))}
	wide := (contentWidth - gap) / 2
	worst := 0.0
	for n, q := range []trace.Quantity{trace.Returned, trace.Leaked} {
		var curves []curve
		for i, f := range all {
			one := curve{name: names[i]}
			for _, t := range f.Tilts {
				one.y = append(one.y, q.Of(t.Columns[0].Ledger))
				worst = max(worst, q.Of(t.Columns[0].StandardError))
			}
			curves = append(curves, one)
		}
		title := c.say([]string{"tilt.return", "tilt.leak"}[n]) + ", " + c.say("parts")
		chart(p, c.words, title, all[0].Tilts, curves, pt(float64(n)*(wide+gap), 0), wide, height)
	}
	words := c.say("compare.tilt.text", "medium", c.inside(first), "most", c.degrees(tiltMost.Degrees(), 0), "error", c.up(100*worst, 1))
	c.add(together{[]part{heading{words: c.say("tilt")}, text{words: words}, figure{p, c.say("tilt.alt")}}})
}
