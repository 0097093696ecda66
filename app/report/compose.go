package report

import (
	"image"
	"image/color"
	"image/draw"
	"math"
	"slices"
	"strconv"
	"strings"

	"pavilight/app/drawing"
	"pavilight/app/motion"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// composer writes the parts of a report in one language.
type composer struct {
	words
	cover *Cover
	parts []part
}

func (c *composer) add(parts ...part) { c.parts = append(c.parts, parts...) }

// medium returns the name of a surrounding.
func (c *composer) medium(m *gems.Material) string {
	if c.has(m.Key) {
		return c.say(m.Key)
	}
	return m.Name
}

// inside returns the words for a stone in a surrounding: "in air", "all in water".
func (c *composer) inside(col *trace.Column) string {
	switch {
	case col.Dish:
		return c.say("in.dish", "medium", c.medium(col.Medium))
	case col.Medium.Key == "air":
		return c.say("in.air")
	default:
		return c.say("in.around", "medium", c.medium(col.Medium))
	}
}

// columnName returns the heading of a column.
func (c *composer) columnName(col *trace.Column) string {
	switch {
	case col.Dish:
		return c.say("dish", "medium", c.medium(col.Medium))
	case col.Medium.Key == "air":
		return c.say("air")
	default:
		return c.say("around", "medium", c.medium(col.Medium))
	}
}

// compose composes the report on one stone.
func compose(f *Findings, cover *Cover) (*document, error) {
	w, err := wordsOf(cover.Language)
	if err != nil {
		return nil, err
	}
	c := &composer{words: w, cover: cover}
	c.where(f)
	c.rays(f)
	c.maps(f)
	c.tilts(f)
	c.wet(f)
	c.figures(f)
	c.measures(f)
	c.method([]*Findings{f})
	c.ending()
	d := &document{cover: cover, words: w, title: c.stoneName(&f.Stone), kind: w.say("report"), parts: c.parts}
	d.lines = append(d.lines, joined(", ", c.materialName(&f.Stone), c.sizeWords(&f.Stone), c.colourWords(f)))
	d.lines = append(d.lines, joined(", ", c.say("report"), c.originWords(&f.Stone), c.forWhom(), w.date(cover.Date)))
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

func (c *composer) forWhom() string {
	if c.cover.Client == "" {
		return ""
	}
	return c.say("for", "client", c.cover.Client)
}

func (c *composer) materialName(s *Stone) string {
	if key := "material." + s.Material.Key; c.has(key) {
		return c.say(key)
	}
	return s.Material.Name
}

// stoneName returns the stone's name; one by its proportions has that of its outline.
func (c *composer) stoneName(s *Stone) string {
	if s.Origin == FromProportions && c.has("outline."+s.Name) {
		return c.say("outline." + s.Name)
	}
	return s.Name
}

func (c *composer) originWords(s *Stone) string {
	return c.say([...]string{"from.plan", "from.proportions", "from.scan"}[s.Origin])
}

func (c *composer) sizeWords(s *Stone) string {
	m := &s.Measures
	if s.WidthTaken {
		return c.say("size.unknown")
	}
	size := c.say("size.long", "length", c.number(m.LengthMM, 2), "width", c.number(m.WidthMM, 2), "depth", c.number(m.DepthMM, 2))
	if m.Round {
		size = c.say("size.round", "width", c.number(m.WidthMM, 2), "depth", c.number(m.DepthMM, 2))
	}
	if carats, ok := s.Carats(); ok {
		size += ", " + c.say("carats", "carats", c.number(carats, 2))
	}
	return size
}

func (c *composer) colourWords(f *Findings) string {
	if f.Job.MaterialOf(&f.Stone).Absorption == nil {
		return c.say("colourless")
	}
	return ""
}

// part100 writes a share as whole parts of 100, as the bars do.
func (c *composer) part100(parts map[trace.Quantity]int, q trace.Quantity) string {
	return strconv.Itoa(parts[q])
}

// beyond reports whether two columns' light returns differ by more than their errors.
func beyond(a, b *trace.Column) bool {
	return estimateOf(a.Ledger.Returned, a.StandardError.Returned, nil).
		DiffersFrom(estimateOf(b.Ledger.Returned, b.StandardError.Returned, nil))
}

// scramblings is from how many independent runs trace takes its standard errors.
const scramblings = 16

// estimateOf joins the two errors of a figure; spread is nil where no measuring error is
// stated.
func estimateOf(value, sampling float64, spread *float64) trace.Estimate {
	e := trace.Estimate{Value: value, Error: sampling, Pictures: scramblings}
	if spread != nil {
		e.Error = math.Hypot(sampling, *spread)
	}
	return e
}

// second returns the surrounding that is set against the first one: that of the ray.
func (f *Findings) second() int {
	switch {
	case f.Ray != nil:
		return f.Ray.Second
	case len(f.Job.Media) > 1:
		return 1
	}
	return 0
}

// where says where the light goes, in words and as bars.
func (c *composer) where(f *Findings) {
	first := f.Columns[0].Column
	parts := wholeParts(first.Ledger)
	lead := c.say("where.lead", "medium", c.inside(first), "returned", c.part100(parts, trace.Returned),
		"leaked", c.part100(parts, trace.Leaked), "head", c.part100(parts, trace.Head), "surface", c.part100(parts, trace.Surface))
	if parts[trace.Absorbed] > 0 {
		lead += " " + c.say("where.absorbed", "absorbed", c.part100(parts, trace.Absorbed))
	}
	said := []text{{words: lead}}
	if second := f.second(); second > 0 {
		other := f.Columns[second].Column
		its := wholeParts(other.Ledger)
		key := "where.less"
		switch {
		case !beyond(first, other) || its[trace.Returned] == parts[trace.Returned]:
			key = "where.same"
		case other.Ledger.Returned > first.Ledger.Returned:
			key = "where.more"
		}
		fill := []string{"Medium", upper(c.inside(other)), "second", c.part100(its, trace.Returned), "leaked", c.part100(its, trace.Leaked)}
		if key != "where.same" {
			fill = append(fill, "first", c.part100(parts, trace.Returned))
		}
		words := c.say(key, fill...)
		if first.HasCritical && other.Ledger.Leaked > first.Ledger.Leaked+3*(first.StandardError.Leaked+other.StandardError.Leaked) {
			words += " " + c.why(first, other)
		} else if other.Ledger.Head > first.Ledger.Head+3*(first.StandardError.Head+other.StandardError.Head) && its[trace.Head] > parts[trace.Head] {
			words += " " + c.say("where.head", "headsecond", c.part100(its, trace.Head), "headfirst", c.part100(parts, trace.Head))
		}
		said = append(said, text{words: words})
	}
	c.add(heading{words: c.say("where")}, beside{texts: said, plates: c.looks(f)})
	var rows []bar
	for _, col := range f.Columns {
		rows = append(rows, bar{
			name: upper(c.columnName(col.Column)), ledger: col.Ledger,
			back: c.with(col.Ledger.Returned, col.StandardError.Returned, col.spreadOf(trace.Returned)),
		})
	}
	c.add(bars(c.words, c.say("bar.title"), rows), c.barNote(f))
}

// barNote explains the bars: the liquids where there are any.
func (c *composer) barNote(all ...*Findings) text {
	said := []string{c.say("bar.note", "errors", c.errorKind(all[0]))}
	if slices.ContainsFunc(all, func(f *Findings) bool { return f.Dish != nil }) {
		said = append(said, c.say("bar.around"))
	}
	return text{words: strings.Join(append(said, c.say("bar.grade")), " "), small: true}
}

// errorKind says which errors stand beside a figure.
func (c *composer) errorKind(f *Findings) string {
	if f.Columns[0].Spread != nil {
		return c.say("errors.two")
	}
	return c.say("errors.one")
}

// why says why more light leaks in the second of two surroundings.
func (c *composer) why(first, second *trace.Column) string {
	fill := []string{"first", c.medium(first.Medium), "criticalfirst", c.degrees(first.Critical.Degrees(), 0), "second", c.medium(second.Medium)}
	if !second.HasCritical {
		return c.say("where.why.none", fill...)
	}
	return c.say("where.why", append(fill, "criticalsecond", c.degrees(second.Critical.Degrees(), 0))...)
}

// lightWords names a light.
func (c *composer) lightWords(l *trace.Light) string {
	if c.has("picture." + l.Name) {
		return c.say("picture." + l.Name)
	}
	return c.say("picture.other", "light", l.Name)
}

// ground is what lies around the stone in pictures with nothing bright below.
func ground() color.RGBA { return color.RGBA{0x9c, 0x9c, 0x9c, 255} }

// whitePaper is white paper under the light of a picture.
func whitePaper(s *motion.Still) color.RGBA {
	white := s.Light.Illuminant.White()
	for i := range white {
		white[i] *= paperWhite
	}
	seen := trace.NewDisplay(s.Light.Illuminant.White(), motion.Exposure).Colour(white)
	level := func(v float64) uint8 { return uint8(min(max(v, 0), 1)*255 + 0.5) }
	return color.RGBA{level(seen.R), level(seen.G), level(seen.B), 255}
}

// padded returns a picture with a rim of its ground.
func padded(img *image.RGBA, ground color.RGBA) *image.RGBA {
	rim := img.Rect.Dx() / 16
	out := image.NewRGBA(image.Rect(0, 0, img.Rect.Dx()+2*rim, img.Rect.Dy()+2*rim))
	draw.Draw(out, out.Rect, image.NewUniform(ground), image.Point{}, draw.Src)
	draw.Draw(out, img.Rect.Add(image.Pt(rim, rim)), img, image.Point{}, draw.Src)
	return out
}

// picture returns a still with nothing bright below.
func (c *composer) picture(s *motion.Still) plate {
	return plate{image: fewColours(padded(s.Image(ground()), ground())), title: upper(c.lightWords(s.Light)), caption: c.say("paper.dark")}
}

// looks shows the stone in true colour.
func (c *composer) looks(f *Findings) plates {
	p := plates{edge: 37}
	for _, s := range f.Pictures {
		p.items = append(p.items, c.picture(s))
	}
	return p
}

// sideWords names the side of a facet.
func (c *composer) sideWords(s facets.Side) string { return c.say("side." + s.String()) }

// rays draws the one ray, and tells it step by step.
func (c *composer) rays(f *Findings) {
	if f.Ray == nil {
		return
	}
	var titles [2]string
	columns := [2]int{f.Ray.First, f.Ray.Second}
	for i, k := range columns {
		titles[i] = upper(c.inside(&f.Around.Columns[k]))
	}
	parts := []part{heading{words: c.say("ray")}, text{words: c.say("ray.intro") + " " + c.say("ray.angles")}, rayFigure(c.words, f, titles, c.rayHeight())}
	steps := columnsOf{c.steps(f, f.Ray.Paths[0])}
	if columns[0] != columns[1] {
		steps = append(steps, c.steps(f, f.Ray.Paths[1]))
	}
	if c.shortPaper() { // the drawing at least stays on the first page
		c.add(together{parts}, steps)
		return
	}
	c.add(together{append(parts, steps)})
}

// rayHeight is the height of the drawing of a ray, mm: less on short paper, so that it stays
// on the first page.
func (c *composer) rayHeight() float64 {
	if c.shortPaper() {
		return 37
	}
	return 46
}

func (c *composer) shortPaper() bool { return c.cover.Paper.Height < 290 }

// steps tells a path as far as it is drawn.
func (c *composer) steps(f *Findings, p *trace.Path) []string {
	said := []string{c.say("ray.enter", "side", c.sideWords(f.Solid.Facets[p.Facet].Side))}
	for i := 0; i <= mainExit(p); i++ {
		b := &p.Bounces[i]
		fill := []string{"n", strconv.Itoa(i + 1), "side", c.sideWords(f.Solid.Facets[b.Facet].Side), "angle", c.degrees(b.Incidence.Degrees(), 0)}
		if b.Total {
			said = append(said, c.say("ray.total", append(fill, "critical", c.degrees(p.Critical.Degrees(), 0))...))
			continue
		}
		key := "ray.part"
		if p.HasCritical {
			fill = append(fill, "critical", c.degrees(p.Critical.Degrees(), 0))
		} else {
			key += ".nolimit"
		}
		switch b.Goes {
		case trace.Leaked:
			key += ".down"
		case trace.Head:
			key += ".head"
		default:
			key += ".up"
		}
		said = append(said, c.say(key, append(fill, "left", c.number(100*b.Left, 0))...))
	}
	return said
}

func (c *composer) maps(f *Findings) {
	var columns []mapColumn
	for i := range f.Columns {
		columns = append(columns, mapColumn{upper(c.columnName(f.Columns[i].Column)), &f.Columns[i]})
	}
	alt := c.say("maps.alt", "count", strconv.Itoa(len(columns)))
	c.add(together{[]part{heading{words: c.say("maps")}, text{words: c.say("maps.text", "errors", c.errorKind(f))}, mapGrid(c.words, columns, alt)}})
}

func (c *composer) tilts(f *Findings) {
	first := &f.Tilts[0].Columns[0]
	worst := 0.0
	for _, t := range f.Tilts {
		for i := range t.Columns {
			worst = max(worst, t.Columns[i].StandardError.Returned, t.Columns[i].StandardError.Leaked)
		}
	}
	var curves [2][]curve
	for k := range f.Job.Media {
		name := c.columnName(&f.Around.Columns[k])
		for i, q := range []trace.Quantity{trace.Returned, trace.Leaked} {
			one := curve{name: name}
			for _, t := range f.Tilts {
				one.y = append(one.y, q.Of(t.Columns[k].Ledger))
			}
			curves[i] = append(curves[i], one)
		}
	}
	const height, gap = 26.0, 8.0
	p := &drawing.Page{Width: contentWidth, Height: height + chartHeight(len(f.Job.Media))}
	wide := (contentWidth - gap) / 2
	for i, key := range []string{"tilt.return", "tilt.leak"} {
		chart(p, c.words, c.say(key)+", "+c.say("parts"), f.Tilts, curves[i], pt(float64(i)*(wide+gap), 0), wide, height)
	}
	words := c.say("tilt.text", "medium", c.inside(first), "most", c.degrees(tiltMost.Degrees(), 0), "error", c.up(100*worst, 1))
	c.add(together{[]part{heading{words: c.say("tilt")}, text{words: words}, tiltStrip(c.words, f.Tilts, 0), figure{p, c.say("tilt.alt")}}})
}

func (c *composer) wet(f *Findings) {
	c.add(together{[]part{
		heading{words: c.say("wet")}, text{words: c.say("wet.text")}, wetBars(c.words, f.Wet),
		text{words: c.say("wet.note", "film", c.number(filmThickness/1000, 0), "index", c.number(filmIndex, 2)), small: true},
	}})
	first := f.Columns[0].Column
	words := c.say("paper.text", "leaked", c.part100(wholeParts(first.Ledger), trace.Leaked), "medium", c.inside(first))
	white := whitePaper(f.OnPaper)
	on := plate{image: fewColours(padded(f.OnPaper.Image(white), white)), title: c.say("paper.on"), caption: c.lightWords(f.OnPaper.Light)}
	on.title = upper(on.title)
	c.add(together{[]part{heading{words: c.say("paper")}, beside{[]text{{words: words}}, plates{items: []plate{c.picture(f.Pictures[0]), on}, edge: 37}}}})
}

// with writes a share of 100 with its errors.
func (w words) with(value, sampling float64, spread *float64) string {
	return w.withTo(2, value, sampling, spread)
}

// withTo does the same with so many decimals.
func (w words) withTo(decimals int, value, sampling float64, spread *float64) string {
	text := w.number(100*value, decimals) + " ± " + w.up(100*sampling, decimals)
	if spread != nil {
		text += " ± " + w.up(100**spread, decimals)
	}
	return text
}

// figures tells the numbers with their two errors.
func (c *composer) figures(f *Findings) {
	parts := []part{heading{words: c.say("figures")}, text{words: c.errorWords(f)}}
	t := table{head: []string{c.say("col.quantity")}}
	for _, col := range f.Columns {
		t.head = append(t.head, c.columnName(col.Column))
	}
	row := func(name string, cell func(col *Column) string) {
		cells := []string{name}
		for i := range f.Columns {
			cells = append(cells, cell(&f.Columns[i]))
		}
		t.rows = append(t.rows, cells)
	}
	for _, q := range shown() {
		if q == trace.Unresolved || q == trace.Absorbed && f.Job.MaterialOf(&f.Stone).Absorption == nil && !c.cover.Colleague {
			continue
		}
		row(c.say(q.String()), func(col *Column) string {
			return c.with(q.Of(col.Ledger), q.Of(col.StandardError), col.spreadOf(q))
		})
	}
	area := func(name string, of func(col *Column) (value, sampling float64), spread func(*Shares) *float64) {
		row(c.say(name), func(col *Column) string {
			value, sampling := of(col)
			if col.Spread == nil {
				return c.withTo(1, value, sampling, nil)
			}
			return c.withTo(1, value, sampling, spread(col.Spread))
		})
	}
	area("windowed", func(col *Column) (float64, float64) { return col.WindowedArea, col.WindowedError }, func(s *Shares) *float64 { return &s.Windowed })
	if c.cover.Colleague {
		area("leaky", func(col *Column) (float64, float64) { return col.LeakyArea, col.LeakyError }, func(s *Shares) *float64 { return &s.Leaky })
	}
	row(c.say("critical"), func(col *Column) string {
		if !col.HasCritical {
			return c.say("none")
		}
		return c.degrees(col.Critical.Degrees(), 2)
	})
	row(c.say("index"), func(col *Column) string { return c.number(col.IndexMedium, 4) })
	parts = append(parts, t)
	c.add(together{parts})
}

// errorWords says what the errors of the figures are.
func (c *composer) errorWords(f *Findings) string {
	if f.Columns[0].Spread == nil {
		return c.say("figures.one")
	}
	var names []string
	for _, u := range f.Job.Measured {
		name := u.Name
		if c.has("error." + name) {
			name = c.say("error." + name)
		}
		names = append(names, name+" ± "+c.number(u.Sigma, decimalsOf(u.Sigma))+unitOf(f, u.Name))
	}
	words := c.say("figures.two", "measured", strings.Join(names, ", "))
	words += " " + c.say("figures.draws", "draws", strconv.Itoa(draws))
	if f.Dish != nil {
		words += " " + c.say("figures.draws.dish")
	}
	return words
}

// decimalsOf returns how many decimals a number that a person wrote needs.
func decimalsOf(v float64) int {
	_, after, _ := strings.Cut(strconv.FormatFloat(v, 'f', -1, 64), ".")
	return min(len(after), 4)
}

// unitOf returns the sign of a proportion's unit.
func unitOf(f *Findings, name string) string {
	if f.Proportions == nil {
		return "°"
	}
	for _, k := range facets.ProportionsOf(f.Proportions.Outline) {
		if k.Name == name {
			return signOf(k.Unit)
		}
	}
	return ""
}

// signOf returns the sign of a unit as it stands behind a number.
func signOf(unit string) string {
	switch unit {
	case "degrees":
		return "°"
	case "%":
		return " %"
	}
	return ""
}

// measures lists the stone's measures.
func (c *composer) measures(f *Findings) {
	m := &f.Measures
	percent := func(v float64) string { return c.number(v, 1) + " %" }
	t := table{head: []string{"", "mm", "%"}}
	mm := func(v float64) string {
		if f.WidthTaken {
			return "–"
		}
		return c.number(v, 2)
	}
	row := func(key string, length, share string) { t.rows = append(t.rows, []string{c.say(key), length, share}) }
	row("measure.width", mm(m.WidthMM), percent(100))
	row("measure.length", mm(m.LengthMM), percent(100*m.Ratio))
	if !m.Round {
		row("measure.longest", mm(m.LongestMM), percent(100*m.LongestMM/m.WidthMM))
	}
	row("measure.depth", mm(m.DepthMM), percent(m.DepthPercent))
	row("measure.table", mm(m.TableWidthMM), percent(m.TablePercent))
	row("measure.crown", mm(m.CrownHeightMM), percent(m.CrownHeightPercent))
	row("measure.pavilion", mm(m.PavilionDepthMM), percent(m.PavilionDepthPercent))
	span := func(v facets.Span, decimals int) string {
		a, b := c.number(v.Min, decimals), c.number(v.Max, decimals)
		if a == b {
			return a
		}
		return a + "–" + b
	}
	girdle := "–"
	if !f.WidthTaken {
		girdle = span(m.GirdleMM, 2)
	}
	row("measure.girdle", girdle, span(m.GirdlePercent, 1)+" %")
	row("measure.culet", mm(m.CuletWidthMM), percent(m.CuletPercent))
	parts := []part{heading{words: c.say("measures")}, t}
	var lines []string
	rim := 0
	for i := range f.Solid.Facets {
		if f.Solid.Facets[i].Side == facets.Girdle {
			rim++
		}
	}
	key, fill := "measure.facets", []string{"count", strconv.Itoa(len(f.Solid.Facets))}
	if rim > 0 {
		key, fill = key+".girdle", append(fill, "girdle", strconv.Itoa(rim))
	}
	lines = append(lines, c.say(key, fill...))
	if p := f.Proportions; p != nil {
		lines = append(lines, c.say("measure.given", "values", c.given(p)))
	}
	if f.WidthTaken {
		lines = append(lines, c.say("measure.taken"))
	}
	if p := f.Proportions; p != nil {
		if usual := c.usual(p); usual != "" {
			lines = append(lines, c.say("measure.usual", "values", usual))
		}
	} else if len(f.Solid.Notes) > 0 {
		lines = append(lines, c.say("measure.notes", "notes", strings.Join(f.Solid.Notes, " ")))
	}
	parts = append(parts, text{words: strings.Join(lines, " "), small: true})
	c.add(parts...)
}

// valueWords writes one value of a stone's proportions.
func (c *composer) valueWords(k facets.Proportion, v facets.Spread) string {
	one := func(x float64) string { return c.number(x, decimalsOf(x)) }
	words := one(v.Mean)
	if v.Min != v.Max {
		words += " (" + one(v.Min) + "–" + one(v.Max) + ")"
	}
	return c.say("error."+k.Name) + " " + words + signOf(k.Unit)
}

// given lists the measured proportions.
func (c *composer) given(p *facets.Proportions) string {
	var all []string
	for _, k := range facets.ProportionsOf(p.Outline) {
		if v, ok := p.Values[k.Name]; ok {
			all = append(all, c.valueWords(k, v))
		}
	}
	return strings.Join(all, ", ")
}

// usual lists those that were not measured.
func (c *composer) usual(p *facets.Proportions) string {
	var all []string
	for _, k := range facets.ProportionsOf(p.Outline) {
		if _, ok := p.Values[k.Name]; !ok {
			all = append(all, c.valueWords(k, facets.Spread{Min: k.Usual, Mean: k.Usual, Max: k.Usual}))
		}
	}
	return strings.Join(all, ", ")
}

// method says how the figures came about, what the stones are made of, and what the
// report does not say.
func (c *composer) method(all []*Findings) {
	f := all[0]
	var lights []string
	for _, l := range f.Job.Lights {
		lights = append(lights, l.Name+": "+l.Source)
	}
	rays := f.Around.Rays
	words := c.say("method.text", "head", c.degrees(f.Job.Head.Degrees(), 0), "rays", c.thousands(rays), "seed", strconv.FormatUint(f.Job.Seed, 10))
	words += " " + c.say("method.shape")
	if c.cover.Colleague {
		words += " " + c.say("method.picture", "lights", strings.Join(lights, "; "))
	}
	c.add(heading{words: c.say("method")}, text{words: words})
	materials := []part{heading{words: c.say("material")}}
	seen := map[*gems.Material]bool{}
	for _, f := range all {
		if seen[f.Material] {
			continue
		}
		seen[f.Material] = true
		materials = append(materials, text{words: c.materialWords(f)})
	}
	c.add(together{materials})
	c.add(together{[]part{heading{words: c.say("says")}, text{words: c.say("says.grade") + " " + c.say("says.model") + " " + c.say("says.view")}}})
}

func (c *composer) materialWords(f *Findings) string {
	m := f.Material
	fill := []string{"name", c.materialName(&f.Stone), "index", c.number(f.Around.Columns[0].IndexStone, 4)}
	said := []string{c.say("material.nodensity", fill...)}
	if m.Density > 0 {
		said[0] = c.say("material.text", append(fill, "density", c.number(m.Density, 2))...)
	}
	if m.Character() != gems.Isotropic {
		said = append(said, c.say("material.doubly", "name", c.materialName(&f.Stone), "index", c.number(f.Around.Columns[0].IndexStone, 4)))
	}
	if f.Job.MaterialOf(&f.Stone).Absorption != nil {
		said = append(said, c.say("material.colour", "colour", f.Job.MaterialOf(&f.Stone).Describe().BodyColour))
	}
	if m.Fitted() && m.Group != gems.Plainly {
		said = append(said, c.say("material.fitted"))
	}
	if c.cover.Colleague && len(m.Rays) > 0 && m.Rays[0].Source != "" {
		said = append(said, c.say("material.source", "source", string(m.Rays[0].Source)))
	}
	return strings.Join(said, " ")
}

// thousands writes a count with spaces between the thousands.
func (c *composer) thousands(n int) string {
	text := strconv.Itoa(n)
	for i := len(text) - 3; i > 0; i -= 3 {
		text = text[:i] + "\u00a0" + text[i:]
	}
	return text
}

// terms are the glossary's lines, in the order in which they are shown; the last ones are
// for colleagues.
func terms(colleague bool) []string {
	all := []string{"return", "leak", "window", "limit", "index", "head", "around", "parts", "error", "spread"}
	if colleague {
		all = append(all, "polar")
	}
	return all
}

// ending closes the report: glossary, notes, who made it.
func (c *composer) ending() {
	var l list
	for _, t := range terms(c.cover.Colleague) {
		l.items = append(l.items, pair{c.say("gloss." + t), c.say("gloss." + t + ".is")})
	}
	c.add(heading{words: c.say("words")}, l)
	if c.cover.Notes != "" {
		c.add(heading{words: c.say("notes")}, text{words: c.cover.Notes})
	}
	sign := c.say("sign", "program", c.cover.Program, "date", c.date(c.cover.Date))
	if c.cover.Author != "" {
		sign = joined(" ", sign, upper(c.say("by", "author", c.cover.Author))+".")
	}
	c.add(text{words: sign, small: true})
}

// fileTitle returns the document's title.
func (d *document) fileTitle() string { return joined(", ", d.title, d.kind) }
