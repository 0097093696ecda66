package sheet

import (
	"fmt"
	"slices"
	"strings"

	"pavilight/app/drawing"
	"pavilight/app/stock"
)

// Paper is a size of paper, upright, mm.
type Paper struct {
	Name          string
	Width, Height float64
}

// Papers returns the sizes that a sheet can be set on. Source: ISO 216 and ANSI/ASME
// Y14.1 (letter).
func Papers() []Paper {
	return []Paper{{"a4", 210, 297}, {"letter", 215.9, 279.4}, {"a5", 148, 210}}
}

// PaperNamed returns the paper of a name.
func PaperNamed(name string) (Paper, error) {
	var known []string
	for _, p := range Papers() {
		if p.Name == strings.ToLower(name) {
			return p, nil
		}
		known = append(known, p.Name)
	}
	return Paper{}, fmt.Errorf("paper %q is not known; it may be %s", name, strings.Join(known, ", "))
}

// press lays a sheet out: it keeps the current page and how far it is filled.
type press struct {
	sheet *Sheet
	pages []*drawing.Page
	page  *drawing.Page
	y     float64 // upper edge of what is free, mm
	part  string  // heading to repeat on a page that goes on
	k     float64 // size of type over the usual one

	notes []fact   // texts that were cut short where they belong, in full
	later []func() // parts that found no room on the front page

	lacking bool // a letter was met that the typeface lacks
}

// The styles of type. None is smaller than 9 points, angles are bold and at least 12.
func (l *press) body() drawing.Type   { return drawing.Type{Size: 9 * l.k} }
func (l *press) strong() drawing.Type { return drawing.Type{Size: 9 * l.k, Bold: true} }
func (l *press) index() drawing.Type  { return drawing.Type{Size: 11 * l.k} }
func (l *press) tier() drawing.Type   { return drawing.Type{Size: 11 * l.k, Bold: true} }
func (l *press) angle() drawing.Type  { return drawing.Type{Size: 15 * l.k, Bold: true} }
func (l *press) head() drawing.Type   { return drawing.Type{Size: 12 * l.k, Bold: true} }
func (l *press) title() drawing.Type  { return drawing.Type{Size: 17 * l.k, Bold: true} }

// pt is a point on paper, mm.
func pt(x, y float64) drawing.Point { return drawing.Point{X: x, Y: y} }

// pale is the ink of what is not read at the lap.
func pale() drawing.Ink { return drawing.Grey(0x50) }

// margin returns the white edge of the paper, mm.
func (l *press) margin() float64 {
	if l.sheet.Paper.Width < 180 {
		return 10
	}
	return 13
}

func (l *press) left() float64  { return l.margin() }
func (l *press) right() float64 { return l.sheet.Paper.Width - l.margin() }
func (l *press) width() float64 { return l.right() - l.left() }

// bottom returns the lower edge of what can be filled: the foot is below.
func (l *press) bottom() float64 { return l.sheet.Paper.Height - l.margin() - 6*l.k }

// start begins a new page under a heading.
func (l *press) start(part, bookmark string) {
	level := 1
	if len(l.pages) == 0 {
		level = 0
	}
	l.part = part
	l.page = &drawing.Page{Width: l.sheet.Paper.Width, Height: l.sheet.Paper.Height, Bookmark: bookmark, Level: level}
	l.pages = append(l.pages, l.page)
	l.y = l.margin()
	if l.sheet.LightModel {
		l.banner(l.sheet.Words.Say("Light model, not cutting instructions: diamond is worked with other machines and training."))
	}
	if part != "" {
		l.heading(part)
	}
}

// begin starts a part on the page where the given height is free, else on a new one.
func (l *press) begin(part, bookmark string, height float64) {
	if l.page == nil || l.y+height > l.bottom() {
		l.start(part, bookmark)
		return
	}
	l.part = part
	l.y += 4 * l.k
	l.heading(part)
}

// heading sets a part's heading with a line below.
func (l *press) heading(words string) {
	_, missing := drawing.Clean(words)
	l.lacking = l.lacking || missing
	l.y += l.head().Height()
	l.page.Write(l.head(), black(), drawing.Left, pt(l.left(), l.y), l.head().Cut(words, l.width()))
	l.y += 2.2 * l.k
	l.rule(l.y)
	l.y += 2.5 * l.k
}

// banner sets a warning across the page.
func (l *press) banner(words string) {
	t := l.strong()
	lines := t.Wrap(words, l.width()-6)
	height := float64(len(lines))*t.Leading() + 3
	l.page.Rectangle(drawing.Style{Fill: drawing.Grey(0xe6), Stroke: black(), Width: medium},
		pt(l.left(), l.y), l.width(), height)
	for i, line := range lines {
		l.say(t, black(), l.left()+3, l.y+1.5+t.Leading()*(float64(i)+0.8), line)
	}
	l.y += height + 3
}

// rule draws a line across the page.
func (l *press) rule(y float64) {
	l.page.Line(drawing.Style{Stroke: black(), Width: medium}, pt(l.left(), y), pt(l.right(), y))
}

// need begins a further page where less than the given height is free, and reports
// whether it did.
func (l *press) need(height float64) bool {
	if l.y+height <= l.bottom() {
		return false
	}
	part, head := l.part, ""
	if part != "" {
		head = l.sheet.Words.Say("%s, continued", part)
	}
	l.start(head, "")
	l.part = part
	return true
}

// say sets one line of text on a baseline.
func (l *press) say(t drawing.Type, ink drawing.Ink, x, y float64, words string) float64 {
	_, missing := drawing.Clean(words)
	l.lacking = l.lacking || missing
	return l.page.Write(t, ink, drawing.Left, pt(x, y), words)
}

// lines sets a text in a column and returns its height.
func (l *press) lines(t drawing.Type, ink drawing.Ink, x, y, width float64, words string) float64 {
	_, missing := drawing.Clean(words)
	l.lacking = l.lacking || missing
	wrapped := t.Wrap(words, width)
	for i, line := range wrapped {
		l.page.Write(t, ink, drawing.Left, pt(x, y+t.Leading()*(float64(i)+0.78)), line)
	}
	return float64(len(wrapped)) * t.Leading()
}

// longestWord returns the width of a text's longest word.
func longestWord(t drawing.Type, words string) float64 {
	longest := 0.0
	for word := range strings.FieldsSeq(words) {
		longest = max(longest, t.Width(word))
	}
	return longest
}

// tall returns the height of a text in a column.
func tall(t drawing.Type, width float64, words string) float64 {
	return float64(len(t.Wrap(words, width))) * t.Leading()
}

// short returns a text cut to a number of lines of a column; the whole of one that is
// longer is kept for the notes under the given heading.
func (l *press) short(heading, words string, width float64, most int) string {
	t := l.body()
	wrapped := t.Wrap(words, width)
	if len(wrapped) <= most {
		return words
	}
	if !slices.ContainsFunc(l.notes, func(n fact) bool { return n.name == heading }) {
		l.notes = append(l.notes, fact{heading, words})
	}
	last := t.Cut(wrapped[most-1]+" "+wrapped[most], width-t.Width("…")-0.01)
	return strings.Join(append(wrapped[:most-1:most-1], strings.TrimSuffix(last, "…")+"…"), "\n")
}

// subhead sets a heading within a page, kept together with the given height below it.
func (l *press) subhead(words string, with float64) {
	l.need(tall(l.head(), l.width(), words) + 2 + with)
	l.y += 1.5 * l.k
	l.y += l.lines(l.head(), black(), l.left(), l.y, l.width(), words) + 0.8*l.k
}

// paragraph sets a text across the page.
func (l *press) paragraph(t drawing.Type, ink drawing.Ink, words string) {
	for _, line := range t.Wrap(words, l.width()) {
		l.need(t.Leading())
		l.lines(t, ink, l.left(), l.y, l.width()+1, line)
		l.y += t.Leading()
	}
}

// item sets a text with a box to tick, or with a dot, in front.
func (l *press) item(tick bool, x, width float64, words string) {
	t := l.body()
	indent := 5.5 * l.k
	height := tall(t, width-indent, words)
	l.need(height)
	if tick {
		l.box(x, l.y+0.35*l.k, 3.1*l.k)
	} else {
		l.page.Circle(drawing.Style{Fill: black()}, pt(x+1.6*l.k, l.y+0.55*t.Leading()), 0.45*l.k)
	}
	l.lines(t, black(), x+indent, l.y, width-indent, words)
	l.y += height + 1.1*l.k
}

// grid sets words in cells of equal width, so that they stand in columns, and returns
// its height. With draw false it only measures.
func (l *press) grid(t drawing.Type, x, y, width float64, words []string, draw bool) float64 {
	cell, across := gridCell(t, words), l.gridAcross(t, width, words)
	for i, w := range words {
		if draw {
			l.say(t, black(), x+float64(i%across)*cell, y+t.Leading()*(float64(i/across)+0.78), w)
		}
	}
	return float64((len(words)+across-1)/across) * t.Leading()
}

// gridCell returns the width of a grid's cells with the white between them.
func gridCell(t drawing.Type, words []string) float64 {
	cell := 0.0
	for _, w := range words {
		cell = max(cell, t.Width(w))
	}
	return cell + 0.5*t.Width("00")
}

// gridAcross returns how many words of a grid stand in a line of the given width: an
// even number where opposite indices follow each other, so that pairs stay together.
func (l *press) gridAcross(t drawing.Type, width float64, words []string) int {
	n := max(1, int((width+0.5*t.Width("00")+1e-9)/gridCell(t, words)))
	if l.sheet.Opposites && n > 2 {
		n -= n % 2
	}
	return n
}

// gridWidth returns the width of words in one line of a grid.
func (l *press) gridWidth(t drawing.Type, words []string) float64 {
	return float64(len(words)) * gridCell(t, words)
}

// whole sets a part where all of it fits on the page; else it is left for later.
func (l *press) whole(part func()) {
	pages, page, marks, y := len(l.pages), l.page, len(l.page.Marks), l.y
	part()
	if len(l.pages) > pages {
		l.pages, l.page, l.y = l.pages[:pages], page, y
		page.Marks = page.Marks[:marks]
		l.later = append(l.later, part)
	}
}

// box draws a box to tick.
func (l *press) box(x, y, edge float64) {
	l.page.Rectangle(drawing.Style{Stroke: black(), Width: medium}, pt(x, y), edge, edge)
}

// ruler draws a check ruler of 50 mm.
func (l *press) ruler(x, y float64) {
	s := drawing.Style{Stroke: black(), Width: thin}
	const long = 50
	l.page.Line(s, pt(x, y), pt(x+long, y))
	for mm := 0; mm <= long; mm++ {
		tick := 1.2
		switch {
		case mm%10 == 0:
			tick = 3
		case mm%5 == 0:
			tick = 2
		}
		l.page.Line(s, pt(x+float64(mm), y), pt(x+float64(mm), y-tick))
	}
	t := l.body()
	words := l.sheet.Words.Say("50 mm: measure it; printed at 100 %%, sizes on paper are true")
	width := l.right() - x - long - 2
	l.lines(t, black(), x+long+2, y-tall(t, width, words)+0.22*t.Leading(), width, words)
}

// foot writes the foot of every page.
func (l *press) foot() {
	in, t := l.sheet.Words, l.body()
	for i, page := range l.pages {
		y := l.sheet.Paper.Height - l.margin()
		page.Line(drawing.Style{Stroke: drawing.Grey(0x90), Width: thin},
			pt(l.left(), y-t.Leading()), pt(l.right(), y-t.Leading()))
		of := in.Say("page %d of %d", i+1, len(l.pages))
		page.Write(t, pale(), drawing.Right, pt(l.right(), y), of)
		name := joined(", ", l.sheet.Plan.Name, stock.NameOf(in, l.sheet.Material), in.Say(l.sheet.Copy))
		page.Write(t, pale(), drawing.Left, pt(l.left(), y), t.Cut(name, l.width()-t.Width(of)-4))
	}
}
