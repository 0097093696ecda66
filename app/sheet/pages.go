package sheet

import (
	"fmt"
	"math"
	"strings"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/facets"
)

// Pages returns the sheet's pages: what is cut, each side with its steps, the film of
// the steps, other gears, and what to mind.
func (s *Sheet) Pages() []*drawing.Page {
	l := &press{sheet: s, k: 1}
	if s.Large {
		l.k = 1.25
	}
	l.front()
	for i := range s.Rows {
		if i == 0 || s.Rows[i].Turn {
			l.side(i)
		}
	}
	if !s.LightModel {
		l.film()
	}
	l.otherGears()
	l.mind()
	l.foot()
	return l.pages
}

// sideName returns the heading of a side; where nothing is told of the light alone, the
// side that lies to the lap.
func (s *Sheet) sideName(facing facets.Side) words.Key {
	switch {
	case s.LightModel && facing == facets.Crown:
		return "Crown"
	case s.LightModel:
		return "Pavilion"
	case facing == facets.Crown:
		return "Crown to the lap"
	}
	return "Pavilion to the lap"
}

// side sets the steps from a row on until the stone is turned.
func (l *press) side(first int) {
	s := l.sheet
	facing := s.Rows[first].Facing
	last := first + 1
	for last < len(s.Rows) && !s.Rows[last].Turn {
		last++
	}
	name := s.Words.Say(s.sideName(facing))
	l.start(joined(" – ", name, s.Plan.Name), name)
	if first > 0 && !s.LightModel {
		l.turn(&s.Rows[first])
	}
	l.overview(facing)
	l.table(s.Rows[first:last])
	if !s.LightModel {
		l.checks(facing)
	}
}

// turn sets the step in which the stone is turned.
func (l *press) turn(r *Row) {
	told := l.sheet.turnWords(r.Facing)
	if x := r.Tier.Transfer; x != nil && x.Note != "" && !l.sheet.LeaveOut.Any() {
		told += " " + x.Note
	}
	t := l.body()
	height := tall(t, l.width()-14, told) + 3
	l.page.Rectangle(drawing.Style{Stroke: black(), Width: medium}, pt(l.left(), l.y), l.width(), height)
	l.box(l.left()+2, l.y+1.8, 3.1*l.k)
	l.lines(t, black(), l.left()+8, l.y+1.5, l.width()-14, told)
	l.y += height + 2.5
}

// overview draws the side within the ring of the gear, with the sizes to take.
func (l *press) overview(facing facets.Side) {
	s := l.sheet
	in := s.Words
	edge := min(0.6*l.width(), 0.42*s.Paper.Height)
	d := ringDrawing{sheet: s, facing: facing, type_: l.body()}
	top := l.y
	scale, left := d.draw(l.page, pt(l.left()+edge/2, top+edge/2), edge)
	x := l.left() + edge + 4
	width := l.right() - x
	y := top
	from := words.Key("Seen from above, drawn %s : 1. %s")
	if facing == facets.Pavilion {
		from = "Seen from below, drawn %s : 1. %s"
	}
	y += l.lines(l.body(), pale(), x, y, width, in.Say(from, trimmed(in, scale, 2), l.ringWords(facing, left)))
	y += 2
	y += l.lines(l.strong(), black(), x, y, width, in.Say("Sizes"))
	y += 0.5
	for _, z := range s.Sizes(facing) {
		value := z.In(in)
		room, below := width-l.strong().Width(value)-2, 0.0
		if longestWord(l.body(), z.What) > room { // the value gets a line of its own
			room, below = width, tall(l.body(), width, z.What)
		}
		h := l.lines(l.body(), black(), x, y, room, z.What)
		l.page.Write(l.strong(), black(), drawing.Right, pt(x+width, y+below+l.body().Leading()*0.78), value)
		y += max(h, below+l.body().Leading()) + 0.8
	}
	// What is left of the column shows the stone from the side, as it lies to the lap.
	if free := top + edge - y - 2*l.body().Leading(); free > 25 && !s.LeaveOut.Any() {
		right, up := fromSide(0)
		if facing == facets.Pavilion {
			up, right = up.Mul(-1), right.Mul(-1)
		}
		v := fit(s.Solution.Stone, right, up, pt(x+width/2, y+3+free/2), width-2, free-4, 1e9)
		v.Scale = roundScale(v.Scale)
		v.solid(l.page, s.Solution.Stone, nil, 1)
		v.labels(l.page, s.Solution.Stone, l.body())
		l.page.Write(l.body(), pale(), drawing.Middle, pt(x+width/2, top+edge-0.3*l.body().Leading()),
			in.Say("From the side, index %d near, %s : 1", l.nearIndex(facing), trimmed(in, v.Scale, 2)))
	}
	l.y = max(top+edge, y) + 2
}

// nearIndex returns the machine's number of the plan's index 0, which the view from
// the side has toward the viewer.
func (l *press) nearIndex(facing facets.Side) int {
	m := &l.sheet.Machine
	return m.Setting(m.Shown(0, l.sheet.Plan.Gear, facing)).Tooth
}

// ringWords tells what the ring shows.
func (l *press) ringWords(facing facets.Side, left []string) string {
	in, m := l.sheet.Words, &l.sheet.Machine
	var told string
	switch {
	case l.sheet.LightModel:
		return in.Say("The ring is the plan's gear of %d.", m.Gear)
	case l.sheet.LeaveOut.Indices:
		told = in.Say("The ring has %d teeth, index %d up.", m.Gear, m.Gear)
	case facing == facets.Crown && m.CrownReversed:
		told = in.Say("The ring is the gear of %d as the machine shows it on this side, after transfer.", m.Gear)
	default:
		told = in.Say("The ring is the gear of %d as the machine shows it on this side.", m.Gear)
	}
	if len(left) > 0 {
		told = in.Say("%s Too small for their name: %s; see the steps.", told, listed(in, left))
	}
	return told
}

// columns of the table of steps, mm.
type columns struct {
	tick, number, picture, tier, angle, index, stop float64 // left edges
	end                                             float64
}

func (l *press) columns() columns {
	k := l.k
	c := columns{tick: l.left(), end: l.right()}
	c.number = c.tick + 6*k
	if l.sheet.LightModel {
		c.number = c.tick
	}
	c.picture = c.number + 6*k
	c.tier = c.picture
	if l.picture() > 0 {
		c.tier += l.picture() + 2
	}
	widest := 12 * k
	for i := range l.sheet.Rows {
		widest = max(widest, l.tier().Width(l.sheet.Rows[i].Tier.Name)+2)
	}
	c.angle = c.tier + min(widest, 24*k)
	c.index = c.angle + 23*k
	// The indices get what the longest tier needs at eight a line, within bounds.
	need := 0.0
	for i := range l.sheet.Rows {
		index := l.indexWords(&l.sheet.Rows[i])
		need = max(need, l.gridWidth(l.index(), index[:min(len(index), 8)]))
	}
	free := c.end - c.index
	c.stop = c.index + min(max(need+columnGap, 0.25*free), 0.5*free)
	return c
}

// picture returns the edge of the small picture in the table, 0 where there is no
// room for one.
func (l *press) picture() float64 {
	if l.width()/l.k < 150 {
		return 0
	}
	return 15
}

// table sets the steps.
func (l *press) table(rows []Row) {
	c := l.columns()
	for i, part := range l.parts(c, rows) {
		height := l.rowHeight(c, &part)
		if i == 0 { // never alone at the foot of a page
			l.need(height + l.strong().Leading() + 0.6)
			l.tableHead(c)
		}
		if l.need(height) {
			l.tableHead(c)
		}
		l.row(c, &part, height)
		l.y += height
		l.page.Line(drawing.Style{Stroke: drawing.Grey(0x90), Width: thin}, pt(l.left(), l.y), pt(l.right(), l.y))
	}
	l.y += 1.5
	l.between(rows)
}

// parts returns the rows, those with more indices than a page holds cut into several.
func (l *press) parts(c columns, rows []Row) []Row {
	room := l.bottom() - l.margin() - 6*l.head().Leading()
	most := max(1, int(room/l.index().Leading()))
	var all []Row
	for _, r := range rows {
		across := l.gridAcross(l.index(), c.stop-c.index-columnGap, l.indexWords(&r))
		for n := most * across; len(r.Settings) > n; {
			part := r
			part.Settings = r.Settings[:n]
			all = append(all, part)
			r.Settings = r.Settings[n:]
		}
		all = append(all, r)
	}
	return all
}

func (l *press) tableHead(c columns) {
	in, t := l.sheet.Words, l.strong()
	l.need(3 * t.Leading())
	y := l.y + t.Leading()*0.78
	l.say(t, black(), c.tier, y, in.Say("Tier"))
	l.say(t, black(), c.angle, y, in.Say("Angle"))
	l.say(t, black(), c.index, y, in.Say("Index"))
	last := words.Key("Cut|how far")
	if l.sheet.LightModel {
		last = "Facets"
	}
	l.say(t, black(), c.stop, y, in.Say(last))
	l.y += t.Leading() + 0.6
	l.rule(l.y)
}

// columnGap is the white between two columns, mm.
const columnGap = 3

const rowPad = 1.6 // mm above and below the text of a row

// angleWords returns the big number of a row and what stands under it.
func (l *press) angleWords(r *Row) (big, small string) {
	s := l.sheet
	if s.LeaveOut.Angles {
		return "", ""
	}
	in := s.Words
	big = in.Decimal(fmt.Sprintf("%.*f°", s.Machine.decimals(), r.Reading.Degrees()))
	switch {
	case r.Flat && s.Machine.TableAdapter > 0:
		small = in.Say("with the adapter of %s°", trimmed(in, s.Machine.TableAdapter.Degrees(), 2))
	case s.Machine.offset(r.Facing) != 0,
		math.Abs(r.Miss.Degrees()) > 0.0051: // more than rounding to a hundredth
		small = in.Say("plan %.2f°", r.Solved.Angle.Degrees())
	}
	return big, small
}

// indexWords returns the settings of a row.
func (l *press) indexWords(r *Row) []string {
	switch {
	case l.sheet.LeaveOut.Indices:
		return nil
	case r.Flat:
		return []string{l.sheet.Words.Say("any, as %s", r.Settings[0].In(l.sheet.Words))}
	default:
		return settingWords(l.sheet.Words, r.Settings)
	}
}

// mostNoteLines is how long a tier's note may be in the table of steps.
const mostNoteLines = 6

// cutWords returns when to stop and what the step does.
func (l *press) cutWords(c columns, r *Row) (main, small string) {
	s := l.sheet
	in := s.Words
	switch {
	case s.LightModel:
		return s.areaWords(r.Tier.Name), ""
	case s.LeaveOut.Stops:
	default:
		main = s.stopWords(in, r, !s.LeaveOut.Indices)
	}
	var parts []string
	if r.Tier.Temporary {
		parts = append(parts, in.Say("for now; later cuts take it off"))
	}
	if r.Tier.Stage != "" && r.Tier.Stage != "cut" {
		parts = append(parts, in.Among([]words.Key{"preform", "polish"}, r.Tier.Stage))
	}
	if !s.LeaveOut.Any() && r.Tier.Note != "" {
		parts = append(parts, l.short(in.Say("Notes on tier %s", r.Tier.Name), r.Tier.Note, c.end-c.stop, mostNoteLines))
	}
	return main, strings.Join(parts, in.Say("; "))
}

// areaWords returns how many facets of the finished stone a tier has and how large they are.
func (s *Sheet) areaWords(tier string) string {
	n, area := 0, 0.0
	for i := range s.Solution.Stone.Facets {
		if f := &s.Solution.Stone.Facets[i]; f.Tier == tier {
			n, area = n+1, area+f.Area
		}
	}
	if n == 1 {
		return s.Words.Say("1, %.2f mm²", area)
	}
	return s.Words.Say("%d, %.2f mm² in all", n, area)
}

func (l *press) rowHeight(c columns, r *Row) float64 {
	_, small := l.angleWords(r)
	angle := l.angle().Leading()
	if small != "" {
		angle += tall(l.body(), c.index-c.angle-2, small)
	}
	index := l.grid(l.index(), 0, 0, c.stop-c.index-columnGap, l.indexWords(r), false)
	main, note := l.cutWords(c, r)
	cut := tall(l.body(), c.end-c.stop, main)
	if note != "" {
		cut += tall(l.body(), c.end-c.stop, note)
	}
	return max(angle, index, cut, l.picture()-2*rowPad+0.6, tall(l.tier(), c.angle-c.tier-1, r.Tier.Name)) + 2*rowPad
}

func (l *press) row(c columns, r *Row, height float64) {
	y := l.y + rowPad
	first := y + l.angle().Leading()*0.7 // baseline of the big number; all columns share it
	if !l.sheet.LightModel {
		l.box(c.tick, first-3.6*l.k, 4*l.k)
	}
	l.say(l.body(), pale(), c.number, first, fmt.Sprint(r.Number))
	if edge := l.picture(); edge > 0 {
		l.thumbnail(r, pt(c.picture+edge/2, l.y+min(height, edge+1)/2), edge-1)
	}
	on := func(t drawing.Type) float64 { return first - 0.78*t.Leading() } // top of a text whose first line is on it
	l.lines(l.tier(), black(), c.tier, on(l.tier()), c.angle-c.tier-1, r.Tier.Name)
	big, small := l.angleWords(r)
	if big == "" && l.sheet.LeaveOut.Angles {
		l.blank(c.angle, first, c.index-c.angle-4)
	}
	l.say(l.angle(), black(), c.angle, first, big)
	l.lines(l.body(), pale(), c.angle, first+1, c.index-c.angle-2, small)
	if l.sheet.LeaveOut.Indices {
		l.blank(c.index, first, c.stop-c.index-columnGap)
	}
	l.grid(l.index(), c.index, on(l.index()), c.stop-c.index-columnGap, l.indexWords(r), true)
	main, note := l.cutWords(c, r)
	h := 0.0
	if l.sheet.LeaveOut.Stops {
		l.blank(c.stop, first, c.end-c.stop)
		main, h = "", l.body().Leading()
	}
	if main != "" {
		h = l.lines(l.body(), black(), c.stop, on(l.body()), c.end-c.stop, main)
	}
	if note != "" {
		l.lines(l.body(), pale(), c.stop, on(l.body())+h, c.end-c.stop, note)
	}
}

// blank draws a line to write on.
func (l *press) blank(x, y, width float64) {
	l.page.Line(drawing.Style{Stroke: drawing.Grey(0x60), Width: thin}, pt(x, y+0.6), pt(x+width, y+0.6))
}

// thumbnail draws the stone after a step along the axis, the new facets picked out.
func (l *press) thumbnail(r *Row, at drawing.Point, edge float64) {
	right, up := fromAbove()
	if r.Facing == facets.Pavilion {
		right, up = fromBelow()
	}
	v := fit(r.Step.Stone, right, up, at, edge, edge, 1e9)
	v.solid(l.page, r.Step.Stone, r.Step.New, 0.5)
}

// between explains the settings between teeth, if there are any.
func (l *press) between(rows []Row) {
	if l.sheet.LeaveOut.Indices {
		return
	}
	in := l.sheet.Words
	var told []string
	for i := range rows {
		for _, set := range rows[i].Settings {
			if set.Part != 0 && len(told) < 4 {
				told = append(told, set.Words(in))
			}
		}
	}
	if len(told) == 0 {
		return
	}
	l.paragraph(l.strong(), black(), in.Say("Between teeth: %s. Plus is toward higher numbers. "+
		"Mind the cheater: set it back before the next tier, and cut these facets by eye to their corners.",
		strings.Join(told, in.Say("; "))))
	l.y += 1
}

// checks sets the list to tick before the stone leaves the side.
func (l *press) checks(facing facets.Side) {
	list := l.sheet.Checks(facing)
	if len(list) == 0 {
		return
	}
	head := words.Key("Before it leaves the dop")
	if l.sheet.turnAfter(facing) {
		head = "Before transfer"
	}
	all := 0.0
	for _, check := range list {
		all += tall(l.body(), l.width()-5.5*l.k, check) + 1.1*l.k
	}
	l.subhead(l.sheet.Words.Say(head), min(all, 80))
	for _, check := range list {
		l.item(true, l.left(), l.width(), check)
	}
}

// trimmed writes a number with at most the given decimals.
func trimmed(in *words.Words, v float64, decimals int) string {
	text := fmt.Sprintf("%.*f", decimals, v)
	if strings.Contains(text, ".") {
		text = strings.TrimRight(strings.TrimRight(text, "0"), ".")
	}
	return in.Decimal(text)
}
