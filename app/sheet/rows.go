package sheet

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"pavilight/app/words"
	"pavilight/facets"
)

// Row is one step at the lap: a tier in the machine's terms.
type Row struct {
	Number     int // 1 for the first
	Tier       *facets.Tier
	Solved     *facets.SolvedTier
	Facing     facets.Side  // the side that faces the lap: Pavilion or Crown
	Turn       bool         // the stone is turned just before this step
	Flat       bool         // a table or a culet: level, at any index
	Reading    facets.Angle // what the angle scale is set to
	Miss       facets.Angle // by how much that is off the plan, for want of finer steps
	Settings   []Setting    // of its facets, in the order in which to cut them; one for a flat
	Step       facets.Step
	TooDeepMM  float64 // height or width that TooDeep costs
	TooDeepPct float64 // weight that it costs where the rough has nothing to spare, percent
}

// TooDeep is the mistake whose cost the sheet tells, mm (our choice: what half a
// second on a coarse lap takes off).
const TooDeep = 0.05

// rows works out the steps. Errors are facets.Faults.
func (s *Sheet) rows(steps []facets.Step) ([]Row, error) {
	var rows []Row
	var faults facets.Faults
	faces := facingOf(s.Plan.Tiers)
	for i := range s.Plan.Tiers {
		t := &s.Plan.Tiers[i]
		r := Row{Number: i + 1, Tier: t, Solved: &s.Solution.Tiers[i], Facing: faces[i], Step: steps[i]}
		r.Turn = i > 0 && faces[i] != faces[i-1]
		r.Flat = r.Solved.Angle == 0
		wanted := r.Solved.Angle
		if r.Flat && s.Machine.TableAdapter > 0 {
			wanted = s.Machine.TableAdapter
		}
		r.Reading, r.Miss = s.Machine.Reading(wanted, r.Facing)
		for _, index := range r.Solved.Index {
			r.Settings = append(r.Settings, s.Machine.Setting(s.Machine.Shown(index, s.Plan.Gear, r.Facing)))
		}
		if r.Flat { // level at any index: locked where the stone was transferred
			r.Settings = []Setting{s.Machine.Setting(ToGear(s.Machine.TransferIndex, s.Machine.Gear, s.Machine.Gear))}
		}
		if f := s.beyondReach(&r); f != nil {
			faults = append(faults, f)
		}
		if s.Opposites {
			r.Settings = oppositesFirst(r.Settings, s.Machine.Gear)
		} else {
			r.Settings = lapOrder(r.Settings, s.Machine.Gear)
		}
		r.TooDeepMM, r.TooDeepPct = s.tooDeep(&r)
		rows = append(rows, r)
	}
	return rows, faults.Err()
}

// beyondReach reports indices that lie between the teeth and that the machine's
// cheater does not reach.
func (s *Sheet) beyondReach(r *Row) *facets.Fault {
	var off []string
	most := facets.Angle(0)
	for i, set := range r.Settings {
		if !s.Machine.reaches(set) {
			off = append(off, fmt.Sprintf("%g", r.Solved.Index[i]))
			most = max(most, facets.Angle(math.Abs(set.Cheater.Radians())))
		}
	}
	if len(off) == 0 {
		return nil
	}
	f := &facets.Fault{
		File: s.Plan.File, Line: r.Tier.Line, Tier: r.Tier.Name, Field: "index", Got: strings.Join(off, " "),
		Why: fmt.Sprintf("it lies between the teeth of the gear of %d, and %s has no cheater", s.Machine.Gear, s.Machine.Name),
		Remedy: fmt.Sprintf("take a gear on which it is a tooth, or name a machine whose cheater reaches %.2f degrees",
			most.Degrees()),
	}
	if s.Machine.Cheater > 0 {
		f.Why = fmt.Sprintf("it lies %.2f degrees from a tooth of the gear of %d, and the cheater of %s reaches %.2f",
			most.Degrees(), s.Machine.Gear, s.Machine.Name, s.Machine.Cheater.Degrees())
	}
	return f
}

// facingOf tells for every tier which side faces the lap. Girdle facets are cut with
// the tiers before them, or with those after where they come first after a transfer.
func facingOf(tiers []facets.Tier) []facets.Side {
	faces := make([]facets.Side, len(tiers))
	known := make([]bool, len(tiers))
	for i := range tiers {
		switch tiers[i].Side {
		case facets.Pavilion:
			faces[i], known[i] = facets.Pavilion, true
		case facets.Crown, facets.Table:
			faces[i], known[i] = facets.Crown, true
		case facets.Girdle:
			if i > 0 && known[i-1] && tiers[i].Transfer == nil {
				faces[i], known[i] = faces[i-1], true
			}
		}
	}
	for i := len(tiers) - 2; i >= 0; i-- {
		if !known[i] {
			faces[i], known[i] = faces[i+1], known[i+1]
		}
	}
	return faces // a plan of girdle facets alone is no solid; Pavilion is the zero Side
}

// StopIn says when to stop in a language, beginning with "until".
func (s *Sheet) StopIn(in *words.Words, r *Row) string { return s.stopWords(in, r, true) }

// stopWords says when to stop, with the machine's indices if they may be told.
func (s *Sheet) stopWords(in *words.Words, r *Row, indices bool) string {
	t, stop, mm := r.Tier, &r.Tier.Stop, s.Solution.Scale
	several := len(r.Solved.Index) > 4
	switch stop.Rule {
	case facets.StopDistance:
		d := r.Solved.Distance * mm
		if t.Side == facets.Girdle {
			if s.opposite(r) {
				return in.Say("until %.2f mm from the axis: %.2f mm across opposite facets", d, 2*d)
			}
			return in.Say("until %.2f mm from the axis", d)
		}
		if r.Flat {
			return s.heightWords(in, r, in.Say("until it stands"), " ", d*sign(t.Side))
		}
		return s.heightWords(in, r, in.Say("until its facets reach the axis"), ", ", d/math.Cos(r.Solved.Angle.Radians())*sign(t.Side))
	case facets.StopCentre:
		z := sign(t.Side) * stop.Value * mm
		what := in.Say("until it reaches the axis")
		if len(r.Solved.Index) > 2 {
			what = in.Say("until all its facets meet in one point on the axis")
		}
		return s.heightWords(in, r, what, ", ", z)
	case facets.StopMeet:
		return s.meetWords(in, r, indices)
	case facets.StopLevel:
		return s.heightWords(in, r, in.Say("until its edge on the girdle runs level"), ", ", stop.Value*mm)
	case facets.StopEdge:
		return s.heightWords(in, r, in.Say("until its edge with %s runs level", stop.With), ", ", stop.Value*mm)
	case facets.StopGirdle:
		if several {
			return in.Say("until %.2f mm of girdle is left, even all round", stop.Value*mm)
		}
		return in.Say("until %.2f mm of girdle is left", stop.Value*mm)
	case facets.StopTable:
		return in.Say("until the table is %.2f mm wide (%.1f %% of the width)",
			stop.Value*s.Measures.WidthMM, 100*stop.Value)
	case facets.StopCulet:
		return in.Say("until the culet flat is %.2f mm wide", stop.Value*s.Measures.WidthMM)
	}
	return ""
}

func sign(side facets.Side) float64 {
	if side == facets.Pavilion {
		return -1
	}
	return 1
}

// heightWords tells a height over the plan's z = 0 as a distance that a gauge can
// take: from the nearer line of the finished girdle, or, at the girdle itself, by the
// rough that is left. What goes before it is joined by comma.
func (s *Sheet) heightWords(in *words.Words, r *Row, what, comma string, z float64) string {
	const same = 0.005 // mm, what two decimals can tell
	g := s.Measures.GirdleHeightMM
	switch {
	case z < g.Min-same:
		return in.Say("%s%s%.2f mm below the finished girdle's lower line", what, comma, g.Min-z)
	case z > g.Max+same:
		return in.Say("%s%s%.2f mm above the finished girdle's upper line", what, comma, z-g.Max)
	case r.Facing == facets.Pavilion:
		top := g.Max + s.Measures.CrownHeightMM
		return in.Say("%s at the girdle line, with %.2f mm or more of rough left to the dop side",
			what, top-z+s.Rough.AllowanceMM)
	case z > g.Min+same:
		return in.Say("%s%s%.2f mm above the girdle's lower line", what, comma, z-g.Min)
	default:
		return in.Say("%s at the girdle line", what)
	}
}

// meetWords names the corners that a tier is cut to by their facets.
func (s *Sheet) meetWords(in *words.Words, r *Row, indices bool) string {
	var corners []string
	for _, corner := range r.Tier.Stop.Corners {
		var marks []string
		for _, m := range corner {
			marks = append(marks, s.markWords(in, r, m, indices))
		}
		corners = append(corners, listed(in, marks))
	}
	where := words.Key("until it meets the corner of %s")
	isAxis := func(m facets.Mark) bool { return m.Tier == facets.AxisName }
	if len(corners) == 1 && slices.ContainsFunc(r.Tier.Stop.Corners[0], isAxis) {
		where = "until it meets where they cross %s"
		if r.Tier.Side == facets.Pavilion {
			where = "until it meets the culet point: %s"
		}
	}
	told := in.Say(where, strings.Join(corners, in.Say("; and the corner of ")))
	if !r.Flat && len(r.Settings) > 1 {
		return in.Say("%s; likewise for each facet", told)
	}
	return told
}

// markWords names a facet of a corner: P1 at 12, in the numbers that the machine shows
// on the side where the tier that is named was cut.
func (s *Sheet) markWords(in *words.Words, r *Row, m facets.Mark, indices bool) string {
	if m.Tier == facets.AxisName {
		return in.Say("the axis")
	}
	if !m.HasIndex || !indices {
		return m.Tier
	}
	// What is cut on this side is told as this side's numbers; a facet of the other side
	// lies in the dop and is told by the number at which it meets this side.
	shown := s.Machine.Setting(s.Machine.Shown(m.Index, s.Plan.Gear, r.Facing))
	return in.Say("%s at %s", m.Tier, in.Decimal(shown.String()))
}

// listed joins words with commas and a last "and".
func listed(in *words.Words, all []string) string {
	if len(all) < 2 {
		return strings.Join(all, "")
	}
	return strings.Join(all[:len(all)-1], ", ") + in.Say(" and ") + all[len(all)-1]
}

// opposite reports whether every facet of the tier has one opposite.
func (s *Sheet) opposite(r *Row) bool {
	g := float64(s.Plan.Gear)
	for _, i := range r.Solved.Index {
		if !slices.ContainsFunc(r.Solved.Index, func(j float64) bool {
			d := math.Mod(math.Abs(i-j), g)
			return math.Abs(d-g/2) < nearTooth
		}) {
			return false
		}
	}
	return true
}

// tooDeep returns what a facet of the tier cut TooDeep costs: width for a girdle
// facet, else height on the axis; and the share of the weight that is lost if all
// the plan is then cut smaller to keep its shape.
func (s *Sheet) tooDeep(r *Row) (mm, percent float64) {
	whole := s.Measures.DepthMM
	cosA := math.Cos(r.Solved.Angle.Radians())
	if r.Tier.Side == facets.Girdle || cosA < 1e-6 {
		mm, whole = 2*TooDeep, s.Measures.WidthMM
	} else {
		mm = TooDeep / cosA
	}
	left := max(0, 1-mm/whole)
	return mm, 100 * (1 - left*left*left)
}
