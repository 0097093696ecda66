package sheet

import (
	"fmt"
	"image"
	"image/color"
	"math"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/app/picture"
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
	sub := joined(", ", s.Copy, by(s.Plan.Author))
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

func by(author string) string {
	if author == "" {
		return ""
	}
	return "plan by " + author
}

// fact is a name and what there is to say.
type fact struct{ name, value string }

func (l *press) factList() []fact {
	s := l.sheet
	m := &s.Measures
	list := []fact{{"Material", s.materialWords()}}
	size := sizes(m.LengthMM, m.WidthMM, m.DepthMM)
	if m.Round {
		size = fmt.Sprintf("%.2f mm across, %.2f mm high", m.WidthMM, m.DepthMM)
	}
	list = append(list, fact{"Finished", size})
	if c, ok := s.Carats(m.VolumeMM3); ok {
		list = append(list, fact{"Weight",
			fmt.Sprintf("%.2f ct (%.1f mm³ at %.2f g/cm³)", c, m.VolumeMM3, s.Material.Density)})
	} else {
		list = append(list, fact{"Weight", fmt.Sprintf("%.1f mm³; the material's density is not known", m.VolumeMM3)})
	}
	if !s.LightModel {
		list = append(list, fact{"Rough", s.roughWords()})
	}
	girdle := fmt.Sprintf("%.1f", m.GirdlePercent.Min)
	if most := fmt.Sprintf("%.1f", m.GirdlePercent.Max); most != girdle {
		girdle += " to " + most
	}
	shape := fmt.Sprintf("%d facets; table %.1f %%, crown %.1f %%, pavilion %.1f %%, girdle %s %% of the width",
		len(s.Solution.Stone.Facets), m.TablePercent, m.CrownHeightPercent, m.PavilionDepthPercent, girdle)
	list = append(list, fact{"Shape", shape})
	if !s.LightModel {
		list = append(list, fact{"Machine", s.machineWords()})
	}
	if s.Plan.Notes != "" && !s.LeaveOut.Any() {
		notes := strings.Join(strings.Fields(s.Plan.Notes), " ")
		if key := s.Plan.Material.Key; key != "" && key != s.Material.Key {
			notes = "(Written for " + key + ", not for this material.) " + notes
		}
		list = append(list, fact{"Notes", notes})
	}
	return list
}

func (s *Sheet) materialWords() string {
	m := s.Material
	words := m.Name
	if n, err := m.Indices(589.3); err == nil {
		if b := n.Birefringence(); b > 0.0005 {
			words += fmt.Sprintf(", refractive index %.3f to %.3f", n.Least(), n.Greatest())
		} else {
			words += fmt.Sprintf(", refractive index %.3f", n.Mean())
		}
	}
	if h := m.Hardness; h.Hi > 0 {
		if h.Lo == h.Hi {
			words += fmt.Sprintf(", hardness %g", h.Lo)
		} else {
			words += fmt.Sprintf(", hardness %g to %g", h.Lo, h.Hi)
		}
	}
	if m.Cleavage != "" {
		words += "; cleavage: " + m.Cleavage
	}
	return words
}

func (s *Sheet) roughWords() string {
	_, extent := middleOf(s.Solution.Stone)
	a := 2 * s.Rough.AllowanceMM
	box := extent.Add(mgl64.Vec3{a, a, a})
	volume, words := s.Rough.VolumeMM3, s.Rough.Words.String()
	if volume == 0 {
		volume = box[0] * box[1] * box[2]
		smallest := fmt.Sprintf("smallest box with %.2f mm all round %s", s.Rough.AllowanceMM, sizes(box[0], box[1], box[2]))
		words = joined("; ", words, smallest)
	}
	if c, ok := s.Carats(volume); ok {
		words += fmt.Sprintf(", %.2f ct", c)
	}
	words += fmt.Sprintf("; yield %.0f %%", 100*s.Measures.VolumeMM3/volume)
	if s.Rough.TooSmall {
		words += fmt.Sprintf(". It does not hold the stone along its axes, which needs %s", sizes(box[0], box[1], box[2]))
	}
	return words
}

func (s *Sheet) machineWords() string {
	m := &s.Machine
	words := fmt.Sprintf("%s; gear of %d teeth, %s° a tooth", m.Name, m.Gear, trimmed(360/float64(m.Gear), 4))
	if m.Gear != s.Plan.Gear {
		words += fmt.Sprintf(" (the plan is written for %d)", s.Plan.Gear)
	}
	words += fmt.Sprintf("; angles to %s°", trimmed(m.AngleStep.Degrees(), 3))
	if m.PavilionOffset != 0 || m.CrownOffset != 0 {
		words += fmt.Sprintf("; %s° added on the pavilion, %s° on the crown",
			signed(m.PavilionOffset.Degrees(), 2), signed(m.CrownOffset.Degrees(), 2))
	}
	if m.Cheater > 0 {
		words += fmt.Sprintf("; cheater ±%s°", trimmed(m.Cheater.Degrees(), 2))
	}
	if m.TableAdapter > 0 {
		words += fmt.Sprintf("; table adapter %s°", trimmed(m.TableAdapter.Degrees(), 2))
	}
	run := "same"
	if m.CrownReversed {
		run = "reversed"
	}
	return words + fmt.Sprintf("; crown numbers %s, transfer at %s", run, s.transferSetting())
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
		words := f.value
		words = l.short("the plan", words, l.right()-x, mostFactLines)
		l.need(tall(l.body(), l.right()-x, words))
		l.say(l.strong(), black(), l.left(), l.y+0.78*l.body().Leading(), f.name)
		l.y += l.lines(l.body(), black(), x, l.y, l.right()-x, words) + 0.7
	}
	l.y += 1
}

// threeViews draws the finished stone from above, from below and from the side at one
// scale, with its sizes.
func (l *press) threeViews() {
	stone := l.sheet.Solution.Stone
	_, extent := middleOf(stone)
	t := l.body()
	gap := 6.0
	heights := t.Width("pavilion 00.00") + 7
	const side = "from the side"
	height := min(0.2*l.sheet.Paper.Height, 52)
	scale := roundScale(min(height/extent[0], height/extent[2], (l.width()-heights-2*gap)/(3*extent[1])))
	above := fmt.Sprintf("from above, drawn %s : 1", trimmed(scale, 2))
	cell := func(words string) float64 { return max(scale*extent[1], t.Width(words)) }
	tall := scale * max(extent[0], extent[2])
	// On narrow paper the words may be wider than the views, and the views stand closer.
	const least = 1.5
	gap = max(least, min(gap, (l.width()-heights-cell(above)-cell("from below")-cell(side))/2))
	l.need(tall + 3*t.Leading())
	middle := l.y + tall/2 + 1
	x := l.left()
	for _, look := range []struct {
		words string
		axes  func() (mgl64.Vec3, mgl64.Vec3)
	}{
		{above, fromAbove}, {"from below", fromBelow},
		{side, func() (mgl64.Vec3, mgl64.Vec3) { return fromSide(0) }},
	} {
		right, up := look.axes()
		at := pt(x+cell(look.words)/2, middle)
		v := fit(stone, right, up, at, 1e9, 1e9, scale)
		v.solid(l.page, stone, nil, 0.8)
		l.page.Write(t, pale(), drawing.Middle, pt(at.X, l.y+tall+2+t.Leading()), look.words)
		x += cell(look.words) + gap
		if look.words == side {
			l.heights(&v, at.X+scale*extent[1]/2+1.5)
		}
	}
	l.y += tall + 2*t.Leading() + 2.5
}

// heights writes the heights of crown, girdle and pavilion beside the view from the
// side. A line leads from each to its place.
func (l *press) heights(v *View, x float64) {
	s := l.sheet
	m := &s.Measures
	g := m.GirdleHeightMM
	type band struct {
		words    string
		from, to float64 // z, mm
	}
	bands := []band{
		{fmt.Sprintf("crown %.2f", m.CrownHeightMM), g.Max, g.Max + m.CrownHeightMM},
		{fmt.Sprintf("girdle %.2f", g.Max-g.Min), g.Min, g.Max},
		{fmt.Sprintf("pavilion %.2f", m.PavilionDepthMM), g.Min - m.PavilionDepthMM, g.Min},
	}
	bands = slices.DeleteFunc(bands, func(b band) bool { return b.to-b.from < 0.005 }) // nothing to see
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
		l.page.Write(t, black(), drawing.Left, pt(x+3.6, y[i]+t.Height()/2), b.words)
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
	columns := float64(len(light.Columns))
	beside := l.width() > (25+14*columns+70)*l.k
	edge := min((l.width()-26*l.k)/(2*columns)-2, 27)
	rows := 2 + int(trace.Unresolved) + 1
	table := float64(rows) * t.Leading()
	height := max(t.Leading()+2*edge+3, table) + 1
	if !beside {
		edge = min((l.width()-26*l.k)/columns-2, 22)
		height = 2*t.Leading() + 2*edge + 5 + table
	}
	l.subhead("Where the light goes, seen face-up", height)
	top := l.y
	quantities := []struct {
		q     trace.Quantity
		words string
		map_  *picture.ColourMap
	}{{trace.Returned, "return", picture.Cividis()}, {trace.Leaked, "leakage", picture.Cubehelix()}}
	x := l.left()
	for row, q := range quantities {
		y := top + t.Leading() + float64(row)*(edge+1.5)
		l.page.Write(t, pale(), drawing.Left, pt(x, y+edge/2), q.words)
		for i := range light.Columns {
			c := &light.Columns[i]
			at := pt(x+14*l.k+float64(i)*(edge+2), y)
			l.page.Place(paletted(c.Map.Field(q.q), c.Map.Pixels, q.map_), at, edge, edge)
			if row == 0 {
				l.page.Write(t, pale(), drawing.Middle, pt(at.X+edge/2, top+0.78*t.Leading()), columnName(c))
			}
		}
		l.scale(q.map_, pt(x+14*l.k+columns*(edge+2), y), edge)
	}
	if beside {
		l.ledger(x+14*l.k+columns*(edge+2)+11*l.k, top)
	} else {
		l.ledger(x, top+t.Leading()+2*edge+4)
	}
	l.y = top + height
}

// columnName returns what a column is called: the medium's key.
func columnName(c *trace.Column) string {
	name := c.Medium.Key
	if name == "" {
		name = c.Medium.Name
	}
	if c.Dish {
		name += ", dish"
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

// ledger sets the numbers beside the maps.
func (l *press) ledger(x, y float64) {
	light := l.sheet.Light
	t := l.body()
	wide := (l.right() - x - 25*l.k) / float64(len(light.Columns))
	row := func(name string, cell func(c *trace.Column) string, t drawing.Type) {
		l.page.Write(l.body(), black(), drawing.Left, pt(x, y+0.78*t.Leading()), name)
		for i := range light.Columns {
			l.page.Write(t, black(), drawing.Right, pt(x+25*l.k+wide*float64(i+1), y+0.78*t.Leading()), cell(&light.Columns[i]))
		}
		y += t.Leading()
	}
	row("", func(c *trace.Column) string { return columnName(c) }, l.strong())
	for q := trace.Surface; q <= trace.Absorbed; q++ {
		row(q.String(), func(c *trace.Column) string { return fmt.Sprintf("%.3f", q.Of(c.Ledger)) }, t)
	}
	row("critical angle", func(c *trace.Column) string {
		if !c.HasCritical {
			return "none"
		}
		return fmt.Sprintf("%.1f°", c.Critical.Degrees())
	}, t)
	row("windowed area", func(c *trace.Column) string { return fmt.Sprintf("%.0f %%", 100*c.WindowedArea) }, t)
	worst := 0.0
	for i := range light.Columns {
		worst = max(worst, light.Columns[i].StandardError.Max())
	}
	note := fmt.Sprintf("shares of a viewing ray, ± %.3f; head of %s° in the way",
		math.Ceil(worst*1000)/1000, trimmed(l.sheet.HeadDeg, 1))
	l.lines(t, pale(), x, y, l.right()-x, note)
}

// tolerance sets the note on what errors cost.
func (l *press) tolerance() {
	s := l.sheet
	if s.LightModel {
		return
	}
	var words []string
	tier, far := s.longest()
	if tier != "" {
		words = append(words, fmt.Sprintf("An angle wrong by %.1f° moves the far end of the longest facet (%s, %.2f mm) "+
			"by %.3f mm; a gap of %.2f mm shows.", toleranceAngle.Degrees(), tier, far, far*math.Tan(toleranceAngle.Radians()), facets.VisibleGap))
	}
	if w := s.criticalWords(); w != "" && !s.LeaveOut.Angles {
		words = append(words, w)
	}
	if w := s.miscutWords(); w != "" {
		words = append(words, w)
	}
	for _, g := range s.Solution.Gaps {
		if g.Tier == "" || s.LeaveOut.Indices {
			continue
		}
		words = append(words, fmt.Sprintf("%s misses %s by %.3f mm in the plan itself.", g.Tier, g.With, g.MM))
		if len(words) > 5 {
			break
		}
	}
	if len(words) == 0 {
		return
	}
	l.subhead("What an error costs", 2*l.body().Leading())
	for _, w := range words {
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
	var parts []string
	for i := range s.Light.Columns {
		c := &s.Light.Columns[i]
		if !c.HasCritical {
			continue
		}
		margin := (flattest.Solved.Angle - c.Critical).Degrees()
		where := "above"
		if margin < 0 {
			where = "below"
		}
		parts = append(parts, fmt.Sprintf("%.1f° %s it in %s", math.Abs(margin), where, columnName(c)))
	}
	if len(parts) == 0 {
		return ""
	}
	return fmt.Sprintf("Light that comes straight down meets %s, the flattest pavilion tier, at its own %.2f°. "+
		"Past the critical angle it turns back, short of it most leaks: %s stands %s.",
		flattest.Tier.Name, flattest.Solved.Angle.Degrees(), flattest.Tier.Name, listed(nil, parts))
}

// care sets what to mind with this material.
func (l *press) care() {
	m := l.sheet.Material
	l.subhead(m.Name+": take care", 2*l.body().Leading())
	for _, words := range m.Cautions {
		l.item(false, l.left(), l.width(), words)
	}
	if len(m.Cautions) == 0 {
		l.item(false, l.left(), l.width(),
			"Nothing is known of this material's own dangers: ask its seller for a safety data sheet before cutting it.")
	}
	if m.Toughness != "" {
		l.item(false, l.left(), l.width(), "How it bears work: "+m.Toughness)
	}
}
