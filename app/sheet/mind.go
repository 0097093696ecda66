package sheet

import (
	"fmt"
	"strings"

	"pavilight/app/drawing"
)

// otherGears sets the indices on further gears, with the facets that do not fit.
func (l *press) otherGears() {
	s := l.sheet
	if len(s.Gears) == 0 || s.LeaveOut.Indices {
		return
	}
	l.start("Other gears – "+s.Plan.Name, "Other gears")
	l.paragraph(l.body(), pale(), "An index with a sign lies between teeth: the tooth, and what the cheater adds. "+
		"Tiers marked × do not fit the gear.")
	for _, gear := range s.Gears {
		m := s.Machine
		m.TransferIndex = ToGear(m.TransferIndex, m.Gear, gear)
		m.Gear = gear
		off := 0
		type lineOf struct {
			name  string
			words []string
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
			table = append(table, lineOf{name, settingWords(settings)})
		}
		head := fmt.Sprintf("Gear of %d, %s° a tooth: every facet fits", gear, trimmed(360/float64(gear), 4))
		if off > 0 {
			head = fmt.Sprintf("Gear of %d, %s° a tooth: %d facets do not fit", gear, trimmed(360/float64(gear), 4), off)
		}
		l.subhead(head, 3*l.index().Leading())
		x := l.left() + 26*l.k
		for _, row := range table {
			h := l.grid(l.index(), x, l.y, l.right()-x, row.words, false)
			l.need(h)
			l.lines(l.tier(), black(), l.left(), l.y, 25*l.k, row.name)
			l.grid(l.index(), x, l.y, l.right()-x, row.words, true)
			l.y += max(h, tall(l.tier(), 25*l.k, row.name)) + 0.6
		}
	}
}

// mind sets polishing, the user's own notes, and the cautions.
func (l *press) mind() {
	s := l.sheet
	l.begin("Polish, notes and care – "+s.Plan.Name, "Polish, notes and care", 0.45*s.Paper.Height)
	for _, part := range l.later {
		part()
	}
	for _, n := range l.notes {
		l.subhead("Notes on "+n.name, 2*l.body().Leading())
		l.paragraph(l.body(), black(), n.value)
	}
	if !s.LightModel {
		if len(s.Plan.Polish) > 0 {
			l.subhead("Polish", l.body().Leading())
			for _, words := range s.Plan.Polish {
				l.item(true, l.left(), l.width(), words)
			}
		}
		l.subhead("Laps and grits", 4*l.body().Leading())
		for _, words := range s.Machine.Grit {
			l.item(false, l.left(), l.width(), words)
		}
		for range max(0, 3-len(s.Machine.Grit)) {
			l.y += 7 * l.k
			l.blank(l.left(), l.y, l.width())
		}
		l.y += 3
	}
	if !s.LightModel {
		l.subhead("At every stone", 2*l.body().Leading())
		for _, words := range benchCautions() {
			l.item(false, l.left(), l.width(), words)
		}
	}
	l.subhead("What this sheet is", 2*l.body().Leading())
	l.paragraph(l.body(), black(), "Shape and light are computed from the plan. "+
		"The maps are a model: they grade no stone and replace no laboratory. Not modelled: inclusions, haze, colour zones, fluorescence, fracture filling.")
	if !s.LeaveOut.Any() {
		l.paragraph(l.body(), black(), "The plan file travels inside this PDF as an attachment; saved from there it opens in Pavilight again.")
	}
	if l.lacking {
		l.paragraph(l.body(), black(), fmt.Sprintf("%c stands for a letter that this sheet's typeface does not hold: "+
			"it has Latin, Greek and Cyrillic. The attached plan keeps the full text.", drawing.Missing))
	}
	l.y += 3
	l.need(14)
	l.y += 7 * l.k
	l.say(l.body(), black(), l.left(), l.y, "Cut by")
	l.blank(l.left()+13*l.k, l.y, l.width()/2-18*l.k)
	l.say(l.body(), black(), l.left()+l.width()/2, l.y, "on")
	l.blank(l.left()+l.width()/2+7*l.k, l.y, l.width()/2-7*l.k)
	l.y += 4
	l.paragraph(l.body(), pale(), strings.TrimSpace(s.Program))
	l.need(12)
	l.ruler(l.left(), l.y+10)
	l.y += 12
}

// benchCautions are the dangers of the bench whatever the stone. Sources: the usual
// cautions of lapidary work (common practice, no source), and for dust the US limits
// that the materials' own cautions quote.
func benchCautions() []string {
	return []string{
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
