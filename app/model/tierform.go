package model

import (
	"math"
	"slices"
	"strconv"
	"strings"

	"pavilight/app/words"
	"pavilight/facets"
)

// TierForm is a tier as a form holds it: text, as people write it.
type TierForm struct {
	Name      string
	Side      facets.Side
	Angle     string // empty where the corners give it
	Index     string // teeth, separated by spaces
	Fold      string // empty for 1
	Mirror    bool
	Rule      facets.Rule
	Stop      string // a number; corners for a meet, apart by ";" where there are several
	With      string // name of the other tier, of an edge
	Temporary bool
	Note      string
}

// FormOf returns the form of a tier, numbers written as the language does.
func FormOf(w *words.Words, t *facets.Tier) TierForm {
	f := TierForm{
		Name: t.Name, Side: t.Side, Index: indexWords(w, t.Index), Mirror: t.Mirror,
		Rule: t.Stop.Rule, With: t.Stop.With, Temporary: t.Temporary, Note: t.Note,
	}
	if t.HasAngle {
		f.Angle = w.Decimal(FormatAngle(t.Angle))
	}
	if t.Fold > 1 {
		f.Fold = strconv.Itoa(t.Fold)
	}
	switch t.Stop.Rule {
	case facets.NoStop:
	case facets.StopMeet:
		f.Stop = cornerWords(w, t.Stop.Corners)
	default:
		f.Stop = w.Decimal(strconv.FormatFloat(t.Stop.Value, 'f', -1, 64))
	}
	return f
}

// cornerWords writes corners: marks apart by spaces, corners by semicolons.
func cornerWords(w *words.Words, corners [][]facets.Mark) string {
	all := make([]string, len(corners))
	for i, marks := range corners {
		each := make([]string, len(marks))
		for j, m := range marks {
			name, tooth, has := strings.Cut(m.String(), "@")
			if has {
				tooth = "@" + w.Decimal(tooth)
			}
			each[j] = name + tooth
		}
		all[i] = strings.Join(each, " ")
	}
	return strings.Join(all, "; ")
}

// fill writes the form into a tier. The error says what is wrong in which field.
func (f TierForm) fill(t *facets.Tier) error {
	name := strings.TrimSpace(f.Name)
	if name == "" || strings.ContainsAny(name, "@;\" \t\n") || name == facets.AxisName {
		return words.Errorf("name: give the tier a short name without spaces, such as P1")
	}
	t.Name, t.Side, t.Mirror, t.Temporary, t.Note = name, f.Side, f.Mirror, f.Temporary, strings.TrimSpace(f.Note)
	t.HasAngle, t.Angle = false, 0
	if strings.TrimSpace(f.Angle) != "" {
		a, err := ParseAngle(f.Angle)
		if err != nil {
			return words.Errorf("angle: %v", err)
		}
		if a > 90*facets.Degree {
			return words.Errorf("angle: a facet's angle goes from 0° for the table to 90° for the girdle")
		}
		t.HasAngle, t.Angle = true, a
	}
	t.Index = nil
	for _, word := range strings.Fields(f.Index) {
		tooth, err := ParseNumber(word, "")
		if err != nil {
			return words.Errorf("index: %v", err)
		}
		if tooth < 0 {
			return words.Errorf("index: teeth are counted from 0, so there is none of %g", tooth)
		}
		t.Index = append(t.Index, tooth)
	}
	t.Fold = 0
	if text := strings.TrimSpace(f.Fold); text != "" {
		n, err := strconv.Atoi(text)
		if err != nil || n < 1 || n > facets.MaxPlanFacets {
			return words.Errorf("repeated: write how often round the gear, as a whole number")
		}
		t.Fold = n
	}
	return f.fillStop(&t.Stop)
}

func (f TierForm) fillStop(s *facets.Stop) error {
	*s = facets.Stop{Rule: f.Rule, Line: s.Line}
	switch f.Rule {
	case facets.NoStop:
		return words.Errorf("cut until: choose when a facet is deep enough")
	case facets.StopMeet:
		corners, err := parseCorners(f.Stop)
		s.Corners = corners
		return err
	case facets.StopEdge:
		s.With = strings.TrimSpace(f.With)
		if s.With == "" {
			return words.Errorf("cut until: name the tier that the edge is made with")
		}
	}
	v, err := ParseNumber(f.Stop, "")
	if err != nil {
		return words.Errorf("cut until: %v", err)
	}
	s.Value = v
	return nil
}

// parseCorners reads corners: marks apart by spaces, corners by semicolons.
func parseCorners(text string) ([][]facets.Mark, error) {
	var corners [][]facets.Mark
	for _, part := range strings.Split(text, ";") {
		var marks []facets.Mark
		for _, word := range strings.Fields(part) {
			name, tooth, has := strings.Cut(word, "@")
			m := facets.Mark{Tier: name, HasIndex: has}
			if has {
				v, err := ParseNumber(tooth, "")
				if err != nil {
					return nil, words.Errorf("cut until: %q names no tooth; write it as P1@6", word)
				}
				m.Index = v
			}
			if name == "" {
				return nil, words.Errorf("cut until: %q names no tier; write it as P1@6", word)
			}
			marks = append(marks, m)
		}
		if len(marks) > 0 {
			corners = append(corners, marks)
		}
	}
	if len(corners) == 0 {
		return nil, words.Errorf("cut until: name the facets that meet there, such as P1@6 P1@18 G1@12")
	}
	return corners, nil
}

// EditTier puts what the form holds in a tier's place. A new name is followed
// wherever the plan speaks of the tier.
func (b *Bench) EditTier(number int, form TierForm) error {
	return b.change(words.Later("tier %s", form.Name), func(p *facets.Plan) error {
		t := &p.Tiers[number]
		before := t.Name
		if err := form.fill(t); err != nil {
			return err
		}
		if err := alone(p, number); err != nil {
			return err
		}
		rename(p, before, t.Name)
		return nil
	})
}

// InsertTier puts a new tier before the one of that number, or last.
func (b *Bench) InsertTier(number int, form TierForm) error {
	return b.change(words.Later("new tier %s", form.Name), func(p *facets.Plan) error {
		var t facets.Tier
		if err := form.fill(&t); err != nil {
			return err
		}
		p.Tiers = slices.Insert(p.Tiers, number, t)
		return alone(p, number)
	})
}

// RemoveTier takes a tier out of the plan.
func (b *Bench) RemoveTier(number int) error {
	name := b.Doc.Plan().Tiers[number].Name
	return b.change(words.Later("remove tier %s", name), func(p *facets.Plan) error {
		if t := p.Tiers[number].Transfer; t != nil && number+1 < len(p.Tiers) && p.Tiers[number+1].Transfer == nil {
			p.Tiers[number+1].Transfer = t // the stone is still turned at this place
		}
		p.Tiers = slices.Delete(p.Tiers, number, number+1)
		if len(p.Tiers) == 0 {
			return words.Errorf("a plan needs a tier")
		}
		return nil
	})
}

// MoveTier moves a tier in the cutting order, earlier for -1, later for +1. Where
// the stone is turned does not move.
func (b *Bench) MoveTier(number, by int) error {
	to := number + by
	if to < 0 || to >= len(b.Doc.Plan().Tiers) {
		return nil
	}
	name := b.Doc.Plan().Tiers[number].Name
	return b.change(words.Later("order of tier %s", name), func(p *facets.Plan) error {
		a, c := &p.Tiers[number], &p.Tiers[to]
		*a, *c = *c, *a
		a.Transfer, c.Transfer = c.Transfer, a.Transfer
		return nil
	})
}

// change makes a step of what do does to the plan, or none where it fails.
func (b *Bench) change(name words.Text, do func(*facets.Plan) error) error {
	plan := b.Doc.Plan().Clone()
	if err := do(plan); err != nil {
		return err
	}
	b.Doc.Edit(name, "", func(p *facets.Plan) { *p = *plan })
	b.show()
	return nil
}

// alone reports a name that another tier bears already.
func alone(p *facets.Plan, number int) error {
	for i := range p.Tiers {
		if i != number && p.Tiers[i].Name == p.Tiers[number].Name {
			return words.Errorf("name: there is a tier %q already; give this one another name", p.Tiers[i].Name)
		}
	}
	return nil
}

// rename lets every mark and edge that speaks of a tier follow its new name.
func rename(p *facets.Plan, before, after string) {
	if before == after {
		return
	}
	for i := range p.Tiers {
		s := &p.Tiers[i].Stop
		if s.With == before {
			s.With = after
		}
		for _, marks := range s.Corners {
			for j := range marks {
				if marks[j].Tier == before {
					marks[j].Tier = after
				}
			}
		}
	}
}

// RuleWords says in a few words when a facet is deep enough.
func RuleWords(r facets.Rule) words.Key {
	switch r {
	case facets.StopDistance:
		return "its plane is this far from the origin"
	case facets.StopCentre:
		return "it crosses the axis this far from z = 0"
	case facets.StopMeet:
		return "it meets these facets in a corner"
	case facets.StopLevel:
		return "its edge at the girdle lies at this height"
	case facets.StopEdge:
		return "its edge with a tier lies at this height"
	case facets.StopGirdle:
		return "this much girdle is left"
	case facets.StopTable:
		return "the table is this wide, of the width"
	case facets.StopCulet:
		return "the culet is this wide, of the width"
	}
	return ""
}

// Rules lists the stop rules in the order of a menu.
func Rules() []facets.Rule {
	return []facets.Rule{facets.StopDistance, facets.StopCentre, facets.StopMeet, facets.StopLevel,
		facets.StopEdge, facets.StopGirdle, facets.StopTable, facets.StopCulet}
}

// NewForm suggests a tier to be cut after the one of that number.
func (b *Bench) NewForm(after int) TierForm {
	plan := b.Doc.Plan()
	like := plan.Tiers[after]
	f := FormOf(b.words, &like)
	f.Note, f.Temporary = "", false
	for n := 1; ; n++ {
		f.Name = strings.TrimRight(like.Name, "0123456789") + strconv.Itoa(n)
		if !slices.ContainsFunc(plan.Tiers, func(t facets.Tier) bool { return t.Name == f.Name }) {
			break
		}
	}
	if angle := foundAngle(b.Look.Subject.Stone, like.Name); f.Angle == "" && !math.IsNaN(float64(angle)) {
		f.Angle = b.words.Decimal(FormatAngle(angle))
	}
	return f
}
