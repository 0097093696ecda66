package sheet

import (
	"strings"

	"pavilight/app/drawing"
	"pavilight/app/words"
)

// otherGears sets the indices on further gears, with the facets that do not fit.
func (l *press) otherGears() {
	s := l.sheet
	if len(s.Gears) == 0 || s.LeaveOut.Indices {
		return
	}
	in := s.Words
	l.start(in.Say("Other gears – %s", s.Plan.Name), in.Say("Other gears|on the sheet"))
	l.paragraph(l.body(), pale(), in.Say("An index with a sign lies between teeth: the tooth, and what the cheater adds. "+
		"Tiers marked × do not fit the gear."))
	for _, gear := range s.Gears {
		m := s.Machine
		m.TransferIndex = ToGear(m.TransferIndex, m.Gear, gear)
		m.Gear = gear
		off := 0
		type lineOf struct {
			name  string
			index []string
		}
		var table []lineOf
		for i := range s.Rows {
			r := &s.Rows[i]
			if r.Flat {
				continue
			}
			var settings []Setting
			misfit := 0
			for _, index := range r.Solved.Index {
				set := m.Setting(m.Shown(index, s.Plan.Gear, r.Facing))
				if set.Part != 0 {
					misfit++
				}
				settings = append(settings, set)
			}
			off += misfit
			name := r.Tier.Name
			if misfit > 0 {
				name += " ×"
			}
			if s.Opposites {
				settings = oppositesFirst(settings, gear)
			} else {
				settings = lapOrder(settings, gear)
			}
			table = append(table, lineOf{name, settingWords(in, settings)})
		}
		tooth := trimmed(in, 360/float64(gear), 4)
		head := in.Say("Gear of %d, %s° a tooth: every facet fits", gear, tooth)
		if off > 0 {
			head = in.Say("Gear of %d, %s° a tooth: %d facets do not fit", gear, tooth, off)
		}
		l.subhead(head, 3*l.index().Leading())
		x := l.left() + 26*l.k
		for _, row := range table {
			h := l.grid(l.index(), x, l.y, l.right()-x, row.index, false)
			l.need(h)
			l.lines(l.tier(), black(), l.left(), l.y, 25*l.k, row.name)
			l.grid(l.index(), x, l.y, l.right()-x, row.index, true)
			l.y += max(h, tall(l.tier(), 25*l.k, row.name)) + 0.6
		}
	}
}

// mind sets polishing, the user's own notes, and the cautions.
func (l *press) mind() {
	s := l.sheet
	in := s.Words
	l.begin(in.Say("Polish, notes and care – %s", s.Plan.Name), in.Say("Polish, notes and care"), 0.45*s.Paper.Height)
	for _, part := range l.later {
		part()
	}
	for _, n := range l.notes {
		l.subhead(n.name, 2*l.body().Leading())
		l.paragraph(l.body(), black(), n.value)
	}
	if !s.LightModel {
		if len(s.Plan.Polish) > 0 {
			l.subhead(in.Say("Polish"), l.body().Leading())
			for _, step := range s.Plan.Polish {
				l.item(true, l.left(), l.width(), step)
			}
		}
		l.subhead(in.Say("Laps and grits"), 4*l.body().Leading())
		for _, note := range s.Machine.Grit {
			l.item(false, l.left(), l.width(), note)
		}
		for range max(0, 3-len(s.Machine.Grit)) {
			l.y += 7 * l.k
			l.blank(l.left(), l.y, l.width())
		}
		l.y += 3
	}
	if !s.LightModel {
		l.subhead(in.Say("At every stone"), 2*l.body().Leading())
		for _, caution := range benchCautions() {
			l.item(false, l.left(), l.width(), in.Say(caution))
		}
	}
	l.subhead(in.Say("What this sheet is"), 2*l.body().Leading())
	l.paragraph(l.body(), black(), in.Say("Shape and light are computed from the plan. "+
		"The maps are a model: they grade no stone and replace no laboratory. Not modelled: inclusions, haze, colour zones, fluorescence, fracture filling."))
	if !s.LeaveOut.Any() {
		l.paragraph(l.body(), black(), in.Say("The plan file travels inside this PDF as an attachment; saved from there it opens in Pavilight again."))
	}
	if l.lacking {
		l.paragraph(l.body(), black(), in.Say("%s stands for a letter that this sheet's typeface does not hold: "+
			"it has Latin, Greek and Cyrillic. The attached plan keeps the full text.", string(drawing.Missing)))
	}
	l.y += 3
	l.need(14)
	l.y += 7 * l.k
	l.signed(l.left(), l.width()/2-5*l.k, 13*l.k, in.Say("Cut by"))
	l.signed(l.left()+l.width()/2, l.width()/2, 7*l.k, in.Say("on|a day"))
	l.y += 4
	l.paragraph(l.body(), pale(), strings.TrimSpace(s.Program))
	l.need(12)
	l.ruler(l.left(), l.y+10)
	l.y += 12
}

// signed sets a line to write on after its name, which gets at least the given room.
func (l *press) signed(x, width, room float64, name string) {
	room = max(room, l.body().Width(name)+2)
	l.say(l.body(), black(), x, l.y, name)
	l.blank(x+room, l.y, width-room)
}

// benchCautions are the dangers of the bench whatever the stone. Sources: the usual
// cautions of lapidary work (common practice, no source), and for dust the US limits
// that the materials' own cautions quote.
func benchCautions() []words.Key {
	return []words.Key{
		"Wear eye protection. Keep hair, sleeves, cords and gloves away from moving laps and spindles.",
		"Cut wet: dust of stones, laps and metal oxides harms the lungs. Wipe up wet, never blow or sweep dry.",
		"Water and mains: use a residual-current switch and a drip loop, and keep hands dry at plugs and switches.",
		"Dopping: hot wax and flame burn, adhesives and solvents give off vapour and catch fire. " +
			"Work aired, away from flame, and cool slowly.",
		"Polishing powders (cerium, aluminium, chromium, tin and zirconium oxides, diamond): keep them damp, off skin and food, " +
			"and read their safety data sheets. Laps of lead or with lead need gloves and washed hands.",
		"Local rules and licensed practice come before anything on this sheet.",
	}
}
