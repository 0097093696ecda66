package facets

import (
	"io"
	"strings"
)

// Write writes the plan as a plan file. What was read from a file and not
// changed since is written as it stood, comments, order and line ends
// included; what changed is mended in place. ReadPlan reads the same plan back.
func (p *Plan) Write(w io.Writer) error {
	l := p.layout
	if l == nil {
		l = &layout{newline: "\n"}
	}
	var b strings.Builder
	if l.bom {
		b.WriteString("\ufeff")
	}
	part := func(text string) {
		if text == "" {
			return
		}
		if s := b.String(); s != "" && s != "\ufeff" {
			if !strings.HasSuffix(s, "\n") {
				b.WriteString(l.newline)
			}
		}
		b.WriteString(text)
	}
	table := func(header string, blk *block, want []pair) {
		text := blk.render(header, want, l.newline)
		if blk == nil && b.Len() > 0 && !strings.HasSuffix(b.String(), "\n"+l.newline) {
			text = l.newline + text
		}
		part(text)
	}
	part(l.head.render("", p.headPairs(), l.newline))
	for _, blk := range l.before {
		p.writeTable(table, blk)
	}
	if p.Rough != nil && p.tableBlock("rough") == nil && !l.head.has("rough") {
		table("[rough]", nil, p.roughPairs())
	}
	for i := range p.Tiers {
		t := &p.Tiers[i]
		if x := t.Transfer; x != nil {
			table("[[transfer]]", x.block, x.pairs())
		}
		table("[[tier]]", t.block, t.pairs())
	}
	for _, blk := range l.after {
		p.writeTable(table, blk)
	}
	_, err := io.WriteString(w, b.String())
	return err
}

// has reports whether the block as read has a key, dotted or not.
func (b *block) has(key string) bool {
	if b == nil {
		return false
	}
	for _, e := range b.entries {
		if e.key == key || strings.HasPrefix(e.key, key+".") {
			return true
		}
	}
	return false
}

// tableBlock returns the block of one of the plan's own tables.
func (p *Plan) tableBlock(name string) *block {
	if p.layout == nil {
		return nil
	}
	for _, list := range [][]*block{p.layout.before, p.layout.after} {
		for _, b := range list {
			if b.header[0] == name {
				return b
			}
		}
	}
	return nil
}

// writeTable writes one of the plan's own tables where it stood.
func (p *Plan) writeTable(table func(string, *block, []pair), b *block) {
	if want := p.tablePairs(b.header[0]); want != nil {
		table("["+b.header[0]+"]", b, want)
	}
}

func (p *Plan) tablePairs(name string) []pair {
	switch {
	case name == "material" && p.Material.Key == "":
		return p.Material.pairs()
	case name == "axis" && p.Axis != nil:
		return p.Axis.pairs()
	case name == "rough" && p.Rough != nil:
		return p.roughPairs()
	}
	return nil
}

// remember notes what the plan as read would be written as, so that Write can
// tell what changed.
func (p *Plan) remember() {
	p.layout.head.wrote = p.headPairs()
	for _, list := range [][]*block{p.layout.before, p.layout.after} {
		for _, b := range list {
			b.wrote = p.tablePairs(b.header[0])
		}
	}
	for i := range p.Tiers {
		t := &p.Tiers[i]
		t.block.wrote = t.pairs()
		if t.Transfer != nil {
			t.Transfer.block.wrote = t.Transfer.pairs()
		}
	}
}

func (p *Plan) headPairs() []pair {
	list := []pair{{"plan", number(PlanVersion)}, {"name", quote(p.Name)}}
	if p.Author != "" {
		list = append(list, pair{"author", quote(p.Author)})
	}
	if p.Notes != "" {
		list = append(list, pair{"notes", quote(p.Notes)})
	}
	switch {
	case p.Material.Key != "":
		list = append(list, pair{"material", quote(p.Material.Key)})
	case p.tableBlock("material") == nil:
		list = append(list, pair{"material", inline(p.Material.pairs())})
	}
	list = append(list, pair{"width_mm", number(p.WidthMM)}, pair{"gear", number(float64(p.Gear))})
	if len(p.Polish) > 0 {
		words := make([]string, len(p.Polish))
		for i, s := range p.Polish {
			words[i] = quote(s)
		}
		list = append(list, pair{"polish", "[" + strings.Join(words, ", ") + "]"})
	}
	if p.Axis != nil && p.tableBlock("axis") == nil {
		list = append(list, pair{"axis", inline(p.Axis.pairs())})
	}
	if p.Rough != nil && p.layout != nil && p.layout.head.has("rough") {
		list = append(list, pair{"rough", inline(p.roughPairs())})
	}
	return list
}

func (m *MaterialRef) pairs() []pair {
	list := []pair{}
	if m.Name != "" {
		list = append(list, pair{"name", quote(m.Name)})
	}
	list = append(list, pair{"index", number(m.Index)})
	if m.Density != 0 {
		list = append(list, pair{"density", number(m.Density)})
	}
	return list
}

func (a *Axis) pairs() []pair {
	list := []pair{{"tilt", degrees(a.Tilt)}, {"azimuth", degrees(a.Azimuth)}}
	if a.Spin != 0 {
		list = append(list, pair{"spin", degrees(a.Spin)})
	}
	return list
}

func (p *Plan) roughPairs() []pair {
	q := p.Rough
	list := []pair{{"shape", quote(q.Shape)}}
	if len(q.SizeMM) > 0 {
		list = append(list, pair{"size_mm", numbers(q.SizeMM)})
	}
	if q.File != "" {
		list = append(list, pair{"file", quote(q.File)})
	}
	if q.HasAllowance {
		list = append(list, pair{"allowance_mm", number(q.AllowanceMM)})
	}
	if len(q.Avoid) > 0 {
		words := make([]string, len(q.Avoid))
		for i, f := range q.Avoid {
			what := []pair{{"point_mm", numbers(f.PointMM[:])}}
			if f.RadiusMM > 0 {
				what = append(what, pair{"radius_mm", number(f.RadiusMM)})
			} else {
				what = append(what, pair{"normal", numbers(f.Normal[:])})
			}
			words[i] = inline(what)
		}
		list = append(list, pair{"avoid", "[" + strings.Join(words, ", ") + "]"})
	}
	return list
}

func (x *Transfer) pairs() []pair {
	if x.Note == "" {
		return nil
	}
	return []pair{{"note", quote(x.Note)}}
}

func (t *Tier) pairs() []pair {
	list := []pair{{"name", quote(t.Name)}, {"side", quote(t.Side.String())}}
	implied := t.Side == Table || t.Side == Girdle || t.Stop.Rule == StopCulet
	if t.HasAngle && (!implied || t.block.has("angle")) {
		list = append(list, pair{"angle", degrees(t.Angle)})
	}
	switch {
	case len(t.Index) == 1 && (t.Fold > 1 || t.Mirror):
		list = append(list, pair{"index", number(t.Index[0])})
	case len(t.Index) > 0:
		list = append(list, pair{"index", numbers(t.Index)})
	}
	if t.Fold > 0 {
		list = append(list, pair{"fold", number(float64(t.Fold))})
	}
	if t.Mirror {
		list = append(list, pair{"mirror", "true"})
	}
	switch s := &t.Stop; s.Rule {
	case NoStop:
	case StopMeet:
		corners := make([]string, len(s.Corners))
		for i, c := range s.Corners {
			words := make([]string, len(c))
			for j, m := range c {
				words[j] = quote(m.String())
			}
			corners[i] = "[" + strings.Join(words, ", ") + "]"
		}
		text := "[" + strings.Join(corners, ", ") + "]"
		if len(corners) == 1 {
			text = corners[0]
		}
		list = append(list, pair{"meet", text})
	case StopEdge:
		list = append(list, pair{"edge", inline([]pair{{"with", quote(s.With)}, {"height",
			number(s.Value)}})})
	default:
		list = append(list, pair{s.Rule.String(), number(s.Value)})
	}
	if t.Temporary {
		list = append(list, pair{"temporary", "true"})
	}
	if t.Stage != "" {
		list = append(list, pair{"stage", quote(t.Stage)})
	}
	if t.Note != "" {
		list = append(list, pair{"note", quote(t.Note)})
	}
	return list
}

func numbers(list []float64) string {
	words := make([]string, len(list))
	for i, v := range list {
		words[i] = number(v)
	}
	return "[" + strings.Join(words, ", ") + "]"
}

func inline(list []pair) string {
	words := make([]string, len(list))
	for i, p := range list {
		words[i] = p.key + " = " + p.text
	}
	return "{ " + strings.Join(words, ", ") + " }"
}
