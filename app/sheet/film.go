package sheet

import "pavilight/facets"

// film sets the stone after every step as small pictures, with what each step takes
// off and what a mistake in it costs.
func (l *press) film() {
	s := l.sheet
	in := s.Words
	l.begin(in.Say("Step by step – %s", s.Plan.Name), in.Say("Step by step"), 0.6*s.Paper.Height)
	from := in.Say("from a box %.0f %% larger than the stone", 100*facets.BlockMargin)
	if s.Rough.Stone != nil {
		from = in.Say("from the plan's rough, %s", s.Rough.Words)
	}
	l.paragraph(l.body(), pale(), in.Say("The stone after each step, %s, seen from the lap. "+
		"Grey: what is left of the rough. Dark: what the step cut. Off: what it takes off, of the rough; layer: the thickest part of it.", from))
	if !s.LeaveOut.Angles {
		l.paragraph(l.body(), pale(), in.Say("Cost: what %.2f mm too deep takes of width or height, "+
			"and of the weight if the rough has nothing to spare and all the rest is cut smaller to match.", TooDeep))
	}
	l.y += 2
	across := max(2, int(l.width()/(40*l.k)))
	gap := 4.0
	cell := (l.width() - gap*float64(across-1)) / float64(across)
	t := l.body()
	picture := 0.8 * cell
	total := s.blockVolume()
	under := 4 * t.Leading()
	for i := range s.Rows {
		under = max(under, tall(t, cell, l.frameWords(&s.Rows[i], total)))
	}
	height := picture + l.tier().Leading() + under + 3
	for i := range s.Rows {
		r := &s.Rows[i]
		column := i % across
		if column == 0 && i > 0 {
			l.y += height
		}
		if column == 0 {
			l.need(height)
		}
		x := l.left() + float64(column)*(cell+gap)
		l.frame(r, x, cell, picture, total)
	}
	l.y += height
}

// blockVolume returns the volume that the steps start from, mm³.
func (s *Sheet) blockVolume() float64 {
	v := s.Rows[len(s.Rows)-1].Step.Stone.Volume()
	for i := range s.Rows {
		v += s.Rows[i].Step.Removed
	}
	return v
}

// frame sets one picture of the film with its words.
func (l *press) frame(r *Row, x, cell, picture, total float64) {
	t := l.body()
	right, up := fromLap(r.Facing)
	v := fit(r.Step.Stone, right, up, pt(x+cell/2, l.y+picture/2), cell-2, picture-2, 1e9)
	v.solid(l.page, r.Step.Stone, r.Step.New, 0.8)
	y := l.y + picture + 0.5
	in := l.sheet.Words
	head := in.Say("%d  %s", r.Number, r.Tier.Name)
	if r.Turn {
		head = in.Say("%s  (turned)", head)
	}
	l.say(l.tier(), black(), x, y+0.78*l.tier().Leading(), l.tier().Cut(head, cell))
	y += l.tier().Leading()
	l.lines(t, black(), x, y, cell, l.frameWords(r, total))
}

// frameWords tells under a picture of the film what the step takes off, of the given
// volume, and what a mistake in it costs.
func (l *press) frameWords(r *Row, total float64) string {
	in := l.sheet.Words
	told := in.Say("off %.1f mm³, %.1f %%\nlayer %.2f mm", r.Step.Removed, 100*r.Step.Removed/total, r.Step.Depth)
	if len(r.Step.New) == 0 {
		told = in.Say("takes nothing off this rough")
	}
	if !l.sheet.LeaveOut.Angles && !r.Tier.Temporary {
		told = joined("\n", told, in.Say("cost %.2f mm, %.1f %%", r.TooDeepMM, r.TooDeepPct))
	}
	return told
}
