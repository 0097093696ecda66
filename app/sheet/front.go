package sheet

import (
	"image"
	"image/color"
	"math"
	"slices"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// front sets the page that says what is cut.
func (l *press) front() {
	s := l.sheet
	l.start("", s.Plan.Name)
	t := l.title()
	lines := t.Wrap(s.Plan.Name, l.width())
	if len(lines) > 3 {
		lines = append(lines[:2], t.Cut(strings.Join(lines[2:], " "), l.width()))
	}
	for _, line := range lines {
		_, missing := drawing.Clean(s.Plan.Name)
		l.lacking = l.lacking || missing
		l.page.Write(t, black(), drawing.Left, pt(l.left(), l.y+0.8*t.Leading()), line)
		l.y += t.Leading()
	}
	sub := joined(", ", s.Words.Say(s.Copy), s.by())
	if sub != "" {
		l.y += l.lines(l.body(), pale(), l.left(), l.y, l.width(), sub)
	}
	l.y += 1
	l.rule(l.y)
	l.y += 2
	l.facts()
	l.threeViews()
	l.whole(l.maps)
	crowded := len(l.later) > 0
	l.whole(l.tolerance)
	l.whole(l.care)
	if crowded { // the maps open a further page, and what is left follows them
		parts := l.later
		l.later = nil
		l.start("", "")
		for _, part := range parts {
			l.whole(part)
		}
	}
}

// by says whose plan it is, where that is known.
func (s *Sheet) by() string {
	if s.Plan.Author == "" {
		return ""
	}
	return s.Words.Say("plan by %s", s.Plan.Author)
}

// fact is a name and what there is to say.
type fact struct{ name, value string }

func (l *press) factList() []fact {
	s := l.sheet
	in, m := s.Words, &s.Measures
	list := []fact{{in.Say("Material"), s.materialWords()}}
	size := in.Text(sizes(m.LengthMM, m.WidthMM, m.DepthMM))
	if m.Round {
		size = in.Say("%.2f mm across, %.2f mm high", m.WidthMM, m.DepthMM)
	} else {
		size = in.Say("%s, longest %.2f mm", size, m.LongestMM)
	}
	list = append(list, fact{in.Say("Finished"), size})
	weight := in.Say("%.1f mm³; the material's density is not known", m.VolumeMM3)
	if c, ok := s.Carats(m.VolumeMM3); ok {
		weight = in.Say("%.2f ct (%.1f mm³ at %.2f g/cm³)", c, m.VolumeMM3, s.Material.Density)
	}
	list = append(list, fact{in.Say("Weight"), weight})
	if !s.LightModel {
		list = append(list, fact{in.Say("Rough"), s.roughWords()})
	}
	girdle := in.Say("%.1f", m.GirdlePercent.Min)
	if most := in.Say("%.1f", m.GirdlePercent.Max); most != girdle {
		girdle = in.Say("%s to %s", girdle, most)
	}
	shape := in.Say("%d facets; table %.1f %%, crown %.1f %%, pavilion %.1f %%, girdle %s %% of the width",
		len(s.Solution.Stone.Facets), m.TablePercent, m.CrownHeightPercent, m.PavilionDepthPercent, girdle)
	list = append(list, fact{in.Say("Shape"), shape})
	if !s.LightModel {
		list = append(list, fact{in.Say("Machine"), s.machineWords()})
	}
	if s.Plan.Notes != "" && !s.LeaveOut.Any() {
		notes := in.Among([]words.Key{ShapeAlone}, strings.Join(strings.Fields(s.Plan.Notes), " "))
		if key := s.Plan.Material.Key; key != "" && key != s.Material.Key {
			notes = in.Say("(Written for %s, not for this material.) %s", stock.KeyOf(in, key), notes)
		}
		list = append(list, fact{in.Say("Notes"), notes})
	}
	return list
}

func (s *Sheet) materialWords() string {
	in, m := s.Words, s.Material
	told := []string{stock.NameOf(in, m)}
	if n, err := m.Indices(589.3); err == nil {
		if b := n.Birefringence(); b > 0.0005 {
			told = append(told, in.Say("refractive index %.3f to %.3f", n.Least(), n.Greatest()))
		} else {
			told = append(told, in.Say("refractive index %.3f", n.Mean()))
		}
	}
	if h := m.Hardness; h.Hi > 0 {
		if h.Lo == h.Hi {
			told = append(told, in.Say("hardness %g", h.Lo))
		} else {
			told = append(told, in.Say("hardness %g to %g", h.Lo, h.Hi))
		}
	}
	split := ""
	if m.Cleavage != "" {
		split = in.Say("cleavage: %s", stock.CleavageOf(in, m))
	}
	return joined(in.Say("; "), strings.Join(told, ", "), split)
}

func (s *Sheet) roughWords() string {
	in := s.Words
	_, extent := middleOf(s.Solution.Stone)
	a := 2 * s.Rough.AllowanceMM
	box := extent.Add(mgl64.Vec3{a, a, a})
	least := sizes(box[0], box[1], box[2])
	volume, told := s.Rough.VolumeMM3, in.Text(s.Rough.Words)
	if volume == 0 {
		volume = box[0] * box[1] * box[2]
		told = joined(in.Say("; "), told, in.Say("smallest box with %.2f mm all round %s", s.Rough.AllowanceMM, least))
	}
	if c, ok := s.Carats(volume); ok {
		told = joined(", ", told, in.Say("%.2f ct", c))
	}
	told = joined(in.Say("; "), told, in.Say("yield %.0f %%", 100*s.Measures.VolumeMM3/volume))
	if s.Rough.TooSmall {
		told = in.Say("%s. It does not hold the stone along its axes, which needs %s", told, least)
	}
	return told
}

func (s *Sheet) machineWords() string {
	in, m := s.Words, &s.Machine
	gear := in.Say("gear of %d teeth, %s° a tooth", m.Gear, trimmed(in, 360/float64(m.Gear), 4))
	if m.Gear != s.Plan.Gear {
		gear = in.Say("%s (the plan is written for %d)", gear, s.Plan.Gear)
	}
	told := []string{in.Among([]words.Key{plainName}, m.Name), gear, in.Say("angles to %s°", trimmed(in, m.AngleStep.Degrees(), 3))}
	if m.PavilionOffset != 0 || m.CrownOffset != 0 {
		told = append(told, in.Say("%s° added on the pavilion, %s° on the crown",
			signed(in, m.PavilionOffset.Degrees(), 2), signed(in, m.CrownOffset.Degrees(), 2)))
	}
	if m.Cheater > 0 {
		told = append(told, in.Say("cheater ±%s°", trimmed(in, m.Cheater.Degrees(), 2)))
	}
	if m.TableAdapter > 0 {
		told = append(told, in.Say("table adapter %s°", trimmed(in, m.TableAdapter.Degrees(), 2)))
	}
	run := words.Key("crown numbers same, transfer at %s")
	if m.CrownReversed {
		run = "crown numbers reversed, transfer at %s"
	}
	return strings.Join(append(told, in.Say(run, s.transferSetting().In(in))), in.Say("; "))
}

// mostFactLines is how long a fact may be on the front page.
const mostFactLines = 9

func (l *press) facts() {
	name := 0.0
	list := l.factList()
	for _, f := range list {
		name = max(name, l.strong().Width(f.name))
	}
	x := l.left() + name + 3
	for _, f := range list {
		told := l.short(l.sheet.Words.Say("Notes on the plan"), f.value, l.right()-x, mostFactLines)
		l.need(tall(l.body(), l.right()-x, told))
		l.say(l.strong(), black(), l.left(), l.y+0.78*l.body().Leading(), f.name)
		l.y += l.lines(l.body(), black(), x, l.y, l.right()-x, told) + 0.7
	}
	l.y += 1
}

// threeViews draws the finished stone from above, from below and from the side at one
// scale, with its sizes.
func (l *press) threeViews() {
	in, stone := l.sheet.Words, l.sheet.Solution.Stone
	_, extent := middleOf(stone)
	t := l.body()
	const usual, closest = 6.0, 1.5 // mm between the views
	heights, label := 0.0, 0.0
	for _, b := range l.sheet.bands() {
		heights = max(heights, t.Width(in.Say(b.what, 10.0))+7)
		if b.seen() {
			label = max(label, t.Width(in.Say(b.what, b.high)))
		}
	}
	height := min(0.2*l.sheet.Paper.Height, 52)
	scale := roundScale(min(height/extent[0], height/extent[2], (l.width()-heights-2*usual)/(3*extent[1])))
	below, side := in.Say("from below"), in.Say("from the side")
	cell := func(words string) float64 { return max(scale*extent[1], t.Width(words)) }
	// On narrow paper the words may be wider than the views: these stand closer, and are
	// drawn smaller if need be.
	var above string
	var gap float64
	for {
		above = in.Say("from above, drawn %s : 1", trimmed(in, scale, 2))
		gap = min(usual, (l.width()-heights-cell(above)-cell(below)-cell(side))/2)
		across := cell(above) + cell(below) + 2*max(closest, gap) + (cell(side)+scale*extent[1])/2 + bandsAway + label
		smaller := roundScale(0.99 * scale)
		if across <= l.width() || smaller == 0 {
			break
		}
		scale = smaller
	}
	gap = max(closest, gap)
	tall := scale * max(extent[0], extent[2])
	l.need(tall + 3*t.Leading())
	middle := l.y + tall/2 + 1
	x := l.left()
	for _, look := range []struct {
		words string
		axes  func() (mgl64.Vec3, mgl64.Vec3)
	}{
		{above, fromAbove}, {below, fromBelow},
		{side, func() (mgl64.Vec3, mgl64.Vec3) { return fromSide(0) }},
	} {
		right, up := look.axes()
		at := pt(x+cell(look.words)/2, middle)
		v := fit(stone, right, up, at, 1e9, 1e9, scale)
		v.solid(l.page, stone, nil, 0.8)
		l.page.Write(t, pale(), drawing.Middle, pt(at.X, l.y+tall+2+t.Leading()), look.words)
		x += cell(look.words) + gap
		if look.words == side {
			l.heights(&v, at.X+scale*extent[1]/2)
		}
	}
	l.y += tall + 2*t.Leading() + 2.5
}

// band is a part of the stone's height.
type band struct {
	what     words.Key // with its height to be filled in
	high     float64   // mm
	from, to float64   // z, mm
}

// seen reports whether the band is high enough to see.
func (b band) seen() bool { return b.to-b.from >= 0.005 }

// bands returns crown, girdle and pavilion.
func (s *Sheet) bands() []band {
	m, g := &s.Measures, s.Measures.GirdleHeightMM
	return []band{
		{"crown %.2f", m.CrownHeightMM, g.Max, g.Max + m.CrownHeightMM},
		{"girdle %.2f", g.Max - g.Min, g.Min, g.Max},
		{"pavilion %.2f", m.PavilionDepthMM, g.Min - m.PavilionDepthMM, g.Min},
	}
}

// bandsAway is how far from the view from the side the heights are written, mm.
const bandsAway = 5.1

// heights writes the heights of crown, girdle and pavilion beside the view from the
// side, which ends at x. A line leads from each to its place.
func (l *press) heights(v *View, x float64) {
	x += 1.5
	in := l.sheet.Words
	bands := slices.DeleteFunc(l.sheet.bands(), func(b band) bool { return !b.seen() })
	t := l.body()
	s1 := drawing.Style{Stroke: drawing.Grey(0x40), Width: thin}
	y := make([]float64, len(bands))
	for i, b := range bands {
		y[i] = v.Point(mgl64.Vec3{0, 0, (b.from + b.to) / 2}).Y
		if i > 0 {
			y[i] = max(y[i], y[i-1]+t.Leading())
		}
	}
	for i, b := range bands {
		top, bottom := v.Point(mgl64.Vec3{0, 0, b.to}).Y, v.Point(mgl64.Vec3{0, 0, b.from}).Y
		for _, at := range []float64{top, bottom} {
			l.page.Line(s1, pt(x, at), pt(x+2, at))
		}
		l.page.Line(s1, pt(x+1, top), pt(x+1, bottom))
		l.page.Line(s1, pt(x+1, (top+bottom)/2), pt(x+3, y[i]))
		l.page.Write(t, black(), drawing.Left, pt(x+bandsAway-1.5, y[i]+t.Height()/2), in.Say(b.what, b.high))
	}
}

// maps sets the maps and the ledger, side by side or, on narrow paper, one below the
// other.
func (l *press) maps() {
	light := l.sheet.Light
	if light == nil || len(light.Columns) == 0 {
		return
	}
	t := l.body()
	in := l.sheet.Words
	quantities := []struct {
		q    trace.Quantity
		name string
		map_ *picture.ColourMap
	}{{trace.Returned, in.Say("return|of light"), picture.Cividis()}, {trace.Leaked, in.Say("leakage"), picture.Cubehelix()}}
	columns := float64(len(light.Columns))
	names := 14 * l.k // the column of names
	for _, q := range quantities {
		names = max(names, t.Width(q.name)+2)
	}
	beside := l.width() > (25+14*columns+70)*l.k
	edge := min((l.width()-26*l.k)/(2*columns)-2, 27)
	// Long names in the ledger take from the maps, as long as something is left of those.
	ledger := l.ledgerColumns()
	if room := (l.width()-names-11*l.k-ledger.least(len(light.Columns)))/columns - 2; beside && room < edge {
		const least = 14 // mm
		edge, beside = room, room >= least
	}
	room := (l.width() - names - 11*l.k) / columns
	if beside {
		room -= ledger.least(len(light.Columns)) / columns
	} else {
		edge = min((l.width()-26*l.k)/columns-2, 22)
	}
	// The maps stand as far apart as their heads need, where there is room for that.
	apart := edge + 2
	for i := range light.Columns {
		apart = max(apart, min(t.Width(columnName(in, &light.Columns[i]))+headsApart, room))
	}
	x := l.left()
	scale := x + names + columns*apart
	heads := l.heads(t, apart)
	at := x // of the ledger
	if beside {
		at = scale + 11*l.k
	}
	table := l.ledgerHeads(at, ledger).height() + float64(2+int(trace.Unresolved))*t.Leading() +
		tall(t, l.right()-at, l.ledgerNote())
	height := max(heads.height()+2*edge+3, table) + 1
	if !beside {
		height = heads.height() + 2*edge + 5 + table
	}
	l.subhead(in.Say("Where the light goes, seen face-up"), height)
	top := l.y
	left := func(i int) float64 { return x + names + float64(i)*apart + (apart-(edge+2))/2 }
	for row, q := range quantities {
		y := top + heads.height() + float64(row)*(edge+1.5)
		l.page.Write(t, pale(), drawing.Left, pt(x, y+edge/2), q.name)
		for i := range light.Columns {
			c := &light.Columns[i]
			l.page.Place(paletted(c.Map.Field(q.q), c.Map.Pixels, q.map_), pt(left(i), y), edge, edge)
			if row == 0 {
				heads.write(l.page, i, pale(), drawing.Middle, pt(left(i)+edge/2, top))
			}
		}
		l.scale(q.map_, pt(scale, y), edge)
	}
	if beside {
		l.ledger(at, top, ledger)
	} else {
		l.ledger(at, top+heads.height()+2*edge+4, ledger)
	}
	l.y = top + height
}

// headsApart is the least white between the heads of two columns, mm.
const headsApart = 2.5

// heads are the names of the light's columns, each in as many lines as it needs.
type heads struct {
	type_ drawing.Type
	lines [][]string
}

// heads returns the names of the columns for columns of the given width.
func (l *press) heads(t drawing.Type, width float64) heads {
	h := heads{type_: t}
	const rounding = 1e-9 // mm, of a column that is as wide as its head
	for i := range l.sheet.Light.Columns {
		h.lines = append(h.lines, t.Wrap(columnName(l.sheet.Words, &l.sheet.Light.Columns[i]), width-headsApart+rounding))
	}
	return h
}

// most returns how many lines the longest head has.
func (h heads) most() int {
	n := 0
	for _, lines := range h.lines {
		n = max(n, len(lines))
	}
	return n
}

func (h heads) height() float64 { return float64(h.most()) * h.type_.Leading() }

// write sets the head of a column below a point; the last lines of all heads are level.
func (h heads) write(p *drawing.Page, column int, ink drawing.Ink, align drawing.Align, below drawing.Point) {
	lines := h.lines[column]
	for k, line := range lines {
		down := float64(h.most()-len(lines)+k) + 0.78
		p.Write(h.type_, ink, align, pt(below.X, below.Y+down*h.type_.Leading()), line)
	}
}

// columnName returns what a column is called: the medium by its key.
func columnName(in *words.Words, c *trace.Column) string {
	name := stock.KeyOf(in, c.Medium.Key)
	if name == "" {
		name = c.Medium.Name
	}
	if _, err := strconv.ParseFloat(name, 64); err == nil { // a medium that is nothing but its index
		name = in.Decimal(name)
	}
	if c.Dish {
		name = in.Say("%s, dish", name)
	}
	return name
}

// scale draws the scale of a colour map, 0 below and 1 above.
func (l *press) scale(m *picture.ColourMap, at drawing.Point, height float64) {
	img := image.NewPaletted(image.Rect(0, 0, 1, 128), palette(m))
	for y := range 128 {
		img.Pix[y] = shade(float64(127-y) / 127)
	}
	l.page.Place(img, at, 2.2, height)
	t := l.body()
	l.page.Write(t, pale(), drawing.Left, pt(at.X+3, at.Y+t.Height()), "1")
	l.page.Write(t, pale(), drawing.Left, pt(at.X+3, at.Y+height), "0")
}

// palette returns a colour map in 255 steps, with white paper for what lies outside.
func palette(m *picture.ColourMap) color.Palette {
	p := color.Palette{color.RGBA{255, 255, 255, 255}}
	for i := range 255 {
		p = append(p, m.At(float64(i)/254))
	}
	return p
}

// shade returns the place of a value in a palette.
func shade(v float64) uint8 {
	if math.IsNaN(v) {
		return 0
	}
	return uint8(1 + math.Round(254*min(max(v, 0), 1)))
}

// paletted turns a field into a picture.
func paletted(field []float32, pixels int, m *picture.ColourMap) image.Image {
	img := image.NewPaletted(image.Rect(0, 0, pixels, pixels), palette(m))
	for i, v := range field {
		img.Pix[i] = shade(float64(v))
	}
	return img
}

// ledgerColumns are the least widths of the ledger's columns, mm: that of the names of
// its rows, and those of the numbers, with the white before them.
type ledgerColumns struct{ names, numbers float64 }

// least returns the least width of a ledger with so many columns of numbers.
func (c ledgerColumns) least(columns int) float64 { return c.names + float64(columns)*c.numbers }

func (l *press) ledgerColumns() ledgerColumns {
	in, t := l.sheet.Words, l.body()
	c := ledgerColumns{names: 25 * l.k}
	for _, k := range []words.Key{"critical angle", "windowed area"} {
		c.names = max(c.names, t.Width(in.Say(k))+headsApart)
	}
	for q := trace.Surface; q <= trace.Absorbed; q++ {
		c.names = max(c.names, t.Width(in.Say(shareName(q)))+headsApart)
	}
	for i := range l.sheet.Light.Columns {
		head := l.strong().Width(columnName(in, &l.sheet.Light.Columns[i]))
		c.numbers = max(c.numbers, head+headsApart, t.Width(in.Say("%.3f", 1.0))+headsApart)
	}
	return c
}

// wide returns how wide the columns of numbers are where the ledger begins at x.
func (c ledgerColumns) wide(l *press, x float64) float64 {
	return (l.right() - x - c.names) / float64(len(l.sheet.Light.Columns))
}

// ledgerHeads returns the heads of the columns of a ledger that begins at x.
func (l *press) ledgerHeads(x float64, c ledgerColumns) heads {
	return l.heads(l.strong(), c.wide(l, x))
}

// ledger sets the numbers beside the maps.
func (l *press) ledger(x, y float64, columns ledgerColumns) {
	light := l.sheet.Light
	in, t := l.sheet.Words, l.body()
	wide := columns.wide(l, x)
	right := func(i int) float64 { return x + columns.names + wide*float64(i+1) }
	row := func(name string, cell func(c *trace.Column) string) {
		l.page.Write(t, black(), drawing.Left, pt(x, y+0.78*t.Leading()), name)
		for i := range light.Columns {
			l.page.Write(t, black(), drawing.Right, pt(right(i), y+0.78*t.Leading()), cell(&light.Columns[i]))
		}
		y += t.Leading()
	}
	heads := l.ledgerHeads(x, columns)
	for i := range light.Columns {
		heads.write(l.page, i, black(), drawing.Right, pt(right(i), y))
	}
	y += heads.height()
	for q := trace.Surface; q <= trace.Absorbed; q++ {
		row(in.Say(shareName(q)), func(c *trace.Column) string { return in.Say("%.3f", q.Of(c.Ledger)) })
	}
	row(in.Say("critical angle"), func(c *trace.Column) string {
		if !c.HasCritical {
			return in.Say("none")
		}
		return in.Say("%.1f°", c.Critical.Degrees())
	})
	row(in.Say("windowed area"), func(c *trace.Column) string { return in.Say("%.0f %%", 100*c.WindowedArea) })
	l.lines(t, pale(), x, y, l.right()-x, l.ledgerNote())
}

// ledgerNote says what the ledger's numbers are.
func (l *press) ledgerNote() string {
	in, worst := l.sheet.Words, 0.0
	for i := range l.sheet.Light.Columns {
		worst = max(worst, l.sheet.Light.Columns[i].StandardError.Max())
	}
	return in.Say("shares of a viewing ray, ± %.3f; head of %s° in the way",
		math.Ceil(worst*1000)/1000, trimmed(in, l.sheet.HeadDeg, 1))
}

// shareName returns what a share of the ledger is called.
func shareName(q trace.Quantity) words.Key {
	switch q {
	case trace.Surface:
		return "surface|what it mirrors"
	case trace.Returned:
		return "returned"
	case trace.Head:
		return "head"
	case trace.Leaked:
		return "leaked"
	}
	return "absorbed"
}

// tolerance sets the note on what errors cost.
func (l *press) tolerance() {
	s := l.sheet
	if s.LightModel {
		return
	}
	in := s.Words
	var told []string
	tier, far := s.longest()
	if tier != "" {
		told = append(told, in.Say("An angle wrong by %.1f° moves the far end of the longest facet (%s, %.2f mm) "+
			"by %.3f mm; a gap of %.2f mm shows.", toleranceAngle.Degrees(), tier, far, far*math.Tan(toleranceAngle.Radians()), facets.VisibleGap))
	}
	if w := s.criticalWords(); w != "" && !s.LeaveOut.Angles {
		told = append(told, w)
	}
	if w := s.miscutWords(); w != "" {
		told = append(told, w)
	}
	for _, g := range s.Solution.Gaps {
		if g.Tier == "" || s.LeaveOut.Indices {
			continue
		}
		told = append(told, in.Say("%s misses %s by %.3f mm in the plan itself.", g.Tier, g.With, g.MM))
		if len(told) > 5 {
			break
		}
	}
	if len(told) == 0 {
		return
	}
	l.subhead(in.Say("What an error costs"), 2*l.body().Leading())
	for _, w := range told {
		l.item(false, l.left(), l.width(), w)
	}
}

// longest returns the tier of the facet that reaches farthest along its slope, and
// how far, mm.
func (s *Sheet) longest() (tier string, mm float64) {
	stone := s.Solution.Stone
	for i := range stone.Facets {
		f := &stone.Facets[i]
		if math.Abs(f.Normal[2]) > 0.999999 || math.Abs(f.Normal[2]) < 1e-6 {
			continue
		}
		level := mgl64.Vec3{-f.Normal[1], f.Normal[0], 0}.Normalize()
		slope := f.Normal.Cross(level)
		low, high := math.Inf(1), math.Inf(-1)
		for _, c := range f.Corners {
			d := slope.Dot(stone.Corners[c])
			low, high = min(low, d), max(high, d)
		}
		if high-low > mm+1e-9 {
			tier, mm = f.Tier, high-low
		}
	}
	return tier, mm
}

// criticalWords tells how far the flattest pavilion facet stands from the critical
// angle in each medium.
func (s *Sheet) criticalWords() string {
	if s.Light == nil {
		return ""
	}
	var flattest *Row
	for i := range s.Rows {
		r := &s.Rows[i]
		if r.Tier.Side == facets.Pavilion && !r.Tier.Temporary && !r.Flat &&
			(flattest == nil || r.Solved.Angle < flattest.Solved.Angle) {
			flattest = r
		}
	}
	if flattest == nil {
		return ""
	}
	in := s.Words
	var parts []string
	for i := range s.Light.Columns {
		c := &s.Light.Columns[i]
		if !c.HasCritical {
			continue
		}
		margin := (flattest.Solved.Angle - c.Critical).Degrees()
		where := words.Key("%.1f° above it in %s")
		if margin < 0 {
			where = "%.1f° below it in %s"
		}
		parts = append(parts, in.Say(where, math.Abs(margin), columnName(in, c)))
	}
	if len(parts) == 0 {
		return ""
	}
	return in.Say("Light that comes straight down meets %s, the flattest pavilion tier, at its own %.2f°. "+
		"Past the critical angle it turns back, short of it most leaks: %s stands %s.",
		flattest.Tier.Name, flattest.Solved.Angle.Degrees(), flattest.Tier.Name, listed(in, parts))
}

// care sets what to mind with this material.
func (l *press) care() {
	in, m := l.sheet.Words, l.sheet.Material
	l.subhead(in.Say("%s: take care", stock.NameOf(in, m)), 2*l.body().Leading())
	for _, caution := range stock.CautionsOf(in, m) {
		l.item(false, l.left(), l.width(), caution)
	}
	if len(m.Cautions) == 0 {
		l.item(false, l.left(), l.width(),
			in.Say("Nothing is known of this material's own dangers: ask its seller for a safety data sheet before cutting it."))
	}
	if m.Toughness != "" {
		l.item(false, l.left(), l.width(), in.Say("How it bears work: %s", stock.ToughnessOf(in, m)))
	}
}
