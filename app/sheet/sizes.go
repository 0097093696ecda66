package sheet

import (
	"math"
	"slices"

	"pavilight/app/words"
	"pavilight/facets"
)

// Size is a length that a caliper or a depth gauge can take on the stone.
type Size struct {
	What string // it is, in the language of the sheet
	MM   float64
	Most float64 // where the length differs round the stone: its largest; else 0
}

// In returns the size in mm as a language writes it.
func (z Size) In(in *words.Words) string {
	if z.Most > z.MM+0.005 {
		return in.Say("%.2f to %.2f mm", z.MM, z.Most)
	}
	return in.Say("%.2f mm", z.MM)
}

// sizes writes two lengths or three: 8.00 × 8.00 × 4.90 mm.
func sizes(mm ...float64) words.Text {
	if len(mm) == 2 {
		return words.Later("%.2f × %.2f mm", mm[0], mm[1])
	}
	return words.Later("%.2f × %.2f × %.2f mm", mm[0], mm[1], mm[2])
}

// Sizes returns what to measure before the stone leaves a side.
func (s *Sheet) Sizes(side facets.Side) []Size {
	in, m := s.Words, &s.Measures
	var all []Size
	if s.girdleCutOn(side) {
		all = append(all, s.across(side)...)
		if m.Round {
			all = append(all, Size{What: in.Say("girdle, corner to corner"), MM: m.WidthMM})
		} else {
			all = append(all, Size{What: in.Say("girdle, length"), MM: m.LengthMM}, Size{What: in.Say("girdle, width"), MM: m.WidthMM})
		}
	}
	girdle := Size{What: in.Say("girdle thickness, thin to thick"), MM: m.GirdleMM.Min, Most: m.GirdleMM.Max}
	if side == facets.Pavilion {
		all = append(all, Size{What: in.Say("culet to the girdle's lower line"), MM: m.PavilionDepthMM})
		if s.LightModel {
			return all
		}
		all = append(all,
			Size{What: in.Say("rough left above the girdle's lower line, at least"),
				MM: m.DepthMM - m.PavilionDepthMM + s.Rough.AllowanceMM},
			Size{What: in.Say("culet to the dop side, at least"), MM: m.DepthMM + s.Rough.AllowanceMM},
		)
		if m.CuletWidthMM > 0 {
			all = append(all, Size{What: in.Say("culet flat"), MM: m.CuletWidthMM})
		}
		return all
	}
	all = append(all, girdle, Size{What: in.Say("girdle's upper line to the table"), MM: m.CrownHeightMM})
	if m.TableWidthMM > 0 {
		all = append(all, Size{What: in.Say("table width"), MM: m.TableWidthMM})
	}
	return append(all, Size{What: in.Say("table to culet"), MM: m.DepthMM})
}

// girdleCutOn reports whether a lasting girdle tier is cut while the side faces the lap.
func (s *Sheet) girdleCutOn(side facets.Side) bool {
	return slices.ContainsFunc(s.Rows, func(r Row) bool {
		return r.Facing == side && r.Tier.Side == facets.Girdle && !r.Tier.Temporary
	})
}

// across returns what a caliper takes on each girdle tier of the side: the distance
// between opposite facets, or to the far side where a facet has none opposite.
func (s *Sheet) across(side facets.Side) []Size {
	var all []Size
	for i := range s.Rows {
		r := &s.Rows[i]
		if r.Facing != side || r.Tier.Side != facets.Girdle {
			continue
		}
		if !s.opposite(r) {
			if !r.Tier.Temporary {
				all = append(all, s.farSide(r))
			}
			continue
		}
		what := s.Words.Say("%s, across opposite facets", r.Tier.Name)
		if r.Tier.Temporary {
			what = s.Words.Say("%s (for now)", what)
		}
		all = append(all, Size{What: what, MM: 2 * r.Solved.Distance * s.Solution.Scale})
	}
	return all
}

// farSide returns how far the finished stone reaches from a girdle facet to the other
// side: what a caliper takes where no facet lies opposite.
func (s *Sheet) farSide(r *Row) Size {
	z := Size{What: s.Words.Say("%s, from a facet to the far side", r.Tier.Name), MM: math.Inf(1)}
	for _, plane := range s.Solution.Planes(s.Plan, r.Number-1) {
		far := 0.0
		for _, c := range s.Solution.Stone.Corners {
			far = max(far, plane.Distance-plane.Normal.Dot(c))
		}
		z.MM, z.Most = min(z.MM, far), max(z.Most, far)
	}
	return z
}

// Checks returns what to tick before the stone leaves a side, in words.
func (s *Sheet) Checks(side facets.Side) []string {
	in := s.Words
	var list []string
	add := func(k words.Key, args ...any) { list = append(list, in.Say(k, args...)) }
	var names []string
	count := 0
	for i := range s.Rows {
		if r := &s.Rows[i]; r.Facing == side && !r.Tier.Temporary {
			names = append(names, r.Tier.Name)
			count += len(r.Settings)
		}
	}
	if len(names) == 0 {
		return nil
	}
	all := in.Say("All %d facets of %s are cut", count, listed(in, names))
	if count == 1 {
		all = in.Say("%s is cut", names[0])
	}
	add("%s; corners meet within %.2f mm under the loupe", all, facets.VisibleGap)
	add("No scratch, pit or chip left; polish even in every facet")
	if s.girdleCutOn(side) {
		add("Girdle measured at three places or more; all within 0.02 mm of the size above")
	}
	if side == facets.Pavilion {
		add("Culet to girdle line measured; rough above the girdle line is at least %.2f mm deep",
			s.Measures.DepthMM-s.Measures.PavilionDepthMM+s.Rough.AllowanceMM)
	} else {
		add("Table, girdle thickness and total height measured")
	}
	if !s.turnAfter(side) {
		if c, ok := s.Carats(s.Measures.VolumeMM3); ok {
			add("Cleaned and weighed: the plan gives %.2f ct", c)
		}
		return list
	}
	add("Stone and both dops clean, dry and in line; gear locked at %s for the transfer", s.transferSetting().In(in))
	if over := s.overWords(); over != "" && !s.LeaveOut.Indices {
		add("After transfer: %s", over)
	}
	return list
}

// turnAfter reports whether the stone is turned after the side.
func (s *Sheet) turnAfter(side facets.Side) bool {
	return slices.ContainsFunc(s.Rows, func(r Row) bool { return r.Turn && r.Facing != side })
}

// transferSetting returns where the gear stands during transfer.
func (s *Sheet) transferSetting() Setting {
	return s.Machine.Setting(ToGear(s.Machine.TransferIndex, s.Machine.Gear, s.Machine.Gear))
}

// overWords names a crown facet and a pavilion facet that stand over each other, with
// the machine's number of each: the check that the transfer kept the index. Among the
// pairs it takes one whose numbers would show a wrong sense of turning.
func (s *Sheet) overWords() string {
	in := s.Words
	best, told := -1.0, ""
	for i := range s.Rows {
		c := &s.Rows[i]
		if c.Facing != facets.Crown || c.Flat || c.Tier.Side == facets.Girdle || c.Tier.Temporary {
			continue
		}
		for j := range s.Rows {
			p := &s.Rows[j]
			if p.Facing != facets.Pavilion || p.Flat || p.Tier.Temporary {
				continue
			}
			for _, index := range c.Solved.Index {
				if !slices.ContainsFunc(p.Solved.Index, func(k float64) bool { return math.Abs(k-index) < nearTooth }) {
					continue
				}
				// A number tells most where it is farthest from being its own reverse.
				half := float64(s.Plan.Gear) / 2
				from := ToGear(index-ToGear(s.Machine.TransferIndex, s.Machine.Gear, s.Plan.Gear), s.Plan.Gear, s.Plan.Gear)
				telling := math.Mod(from, half)
				telling = min(telling, half-telling)
				if telling > best+nearTooth {
					best = telling
					told = in.Say("%s at %s lies over %s, which was cut at %s",
						c.Tier.Name, s.Machine.Setting(s.Machine.Shown(index, s.Plan.Gear, facets.Crown)).In(in),
						p.Tier.Name, s.Machine.Setting(s.Machine.Shown(index, s.Plan.Gear, facets.Pavilion)).In(in))
				}
			}
		}
	}
	return told
}

// mirrored reports whether the finished stone is its own mirror image about the
// plane through the axis and the index of the transfer, so that numbers running
// the wrong way round cut the same stone.
func (s *Sheet) mirrored() bool {
	about := 2 * ToGear(s.Machine.TransferIndex, s.Machine.Gear, s.Plan.Gear)
	for i := range s.Rows {
		r := &s.Rows[i]
		if r.Facing != facets.Crown || r.Flat {
			continue
		}
		for _, index := range r.Solved.Index {
			image := ToGear(about-index, s.Plan.Gear, s.Plan.Gear)
			if !slices.ContainsFunc(r.Solved.Index, func(k float64) bool {
				d := math.Abs(k - image)
				return min(d, float64(s.Plan.Gear)-d) < nearTooth
			}) {
				return false
			}
		}
	}
	return true
}

// turnWords tells how to turn the stone and how the numbers run afterwards.
func (s *Sheet) turnWords(to facets.Side) string {
	in, m := s.Words, &s.Machine
	turn := words.Key("Turn the stone: lock the gear at %s, transfer, and cut the crown.")
	if to == facets.Pavilion {
		turn = "Turn the stone: lock the gear at %s, transfer, and cut the pavilion."
	}
	run := words.Key("Crown numbers run as on the pavilion.")
	switch {
	case m.CrownReversed && s.mirrored():
		run = "Crown numbers run the other way round the stone; for this plan that makes no difference."
	case m.CrownReversed:
		run = "Crown numbers run the other way round the stone. The numbers on this sheet allow for it."
	}
	return in.Say(turn, s.transferSetting().In(in)) + " " + in.Say(run)
}
