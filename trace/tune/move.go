package tune

import (
	"context"
	"errors"
	"fmt"
	"math"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// References are the angles from which and to which the tangent rule moves each half of a
// plan. Zero angles leave that half as it is.
type References struct {
	PavilionFrom, PavilionTo facets.Angle
	CrownFrom, CrownTo       facets.Angle
}

// ReferencesSource says where UsualReferences come from.
const ReferencesSource = "pavilion mains by refractive index: 43° under 1.6, 42° for almost all materials, 41° about 2 " +
	"(International Gem Society); the crown is left as it is"

// UsualReferences returns the published angles of pavilion mains for the two materials'
// indices, and none for the crown.
func UsualReferences(from, to *gems.Material) (References, error) {
	a, err := usualMain(from)
	if err != nil {
		return References{}, err
	}
	b, err := usualMain(to)
	return References{PavilionFrom: a, PavilionTo: b}, err
}

// usualMain returns the published angle; see ReferencesSource. About 2 is taken as 1.9 and
// above.
func usualMain(m *gems.Material) (facets.Angle, error) {
	n, err := m.Index(gems.LineD)
	switch {
	case err != nil:
		return 0, err
	case n < 1.6:
		return 43 * facets.Degree, nil
	case n < 1.9:
		return 42 * facets.Degree, nil
	}
	return 41 * facets.Degree, nil
}

// ByTangents returns the plan moved from one set of reference angles to another by the
// tangent rule of cutters: tan(new) = tan(old) tan(new reference)/tan(old reference), the
// crown and the pavilion apart.
func ByTangents(plan *facets.Plan, r References) (*facets.Plan, error) {
	for _, side := range []struct {
		side     facets.Side
		from, to facets.Angle
	}{{facets.Pavilion, r.PavilionFrom, r.PavilionTo}, {facets.Crown, r.CrownFrom, r.CrownTo}} {
		if side.from == 0 && side.to == 0 {
			continue
		}
		for _, a := range []facets.Angle{side.from, side.to} {
			if !(a > 0 && a < 90*facets.Degree) {
				return nil, fmt.Errorf("reference angle %v of the %v: use more than 0° and less than 90°", a, side.side)
			}
		}
		if side.from == side.to {
			continue
		}
		var err error
		if plan, err = plan.Stretched(side.side, math.Tan(side.to.Radians())/math.Tan(side.from.Radians())); err != nil {
			return nil, err
		}
	}
	return plan, nil
}

// Under is a tier of the pavilion that lies under the critical angle in a medium: light
// that comes straight down through the table leaves through it, and one sees through.
type Under struct {
	Tier     string
	Angle    facets.Angle
	Critical facets.Angle   // at the material's lower index
	Medium   *gems.Material // nothing is totally reflected if Critical is 90 degrees
}

// String tells it in words.
func (u Under) String() string {
	if u.Critical >= 90*facets.Degree {
		return fmt.Sprintf("pavilion %s: in %s nothing is totally reflected", u.Tier, u.Medium.Name)
	}
	return fmt.Sprintf("pavilion %s at %v lies under the critical angle %v in %s", u.Tier, u.Angle, u.Critical, u.Medium.Name)
}

// Passed returns the tiers of the pavilion that lie under the critical angle in a medium,
// in the order of the stone. A level culet does not count.
func Passed(stone *facets.Stone, material *gems.Material, media ...*gems.Material) ([]Under, error) {
	indices, err := material.Indices(gems.LineD)
	if err != nil {
		return nil, err
	}
	var list []Under
	for _, medium := range media {
		n, err := medium.Index(gems.LineD)
		if err != nil {
			return nil, err
		}
		critical, ok := trace.CriticalAngle(indices.Least(), n)
		if !ok {
			critical = 90 * facets.Degree
		}
		seen := map[string]bool{}
		for _, f := range stone.Facets {
			slope := facets.Angle(math.Acos(min(1, -f.Normal[2])))
			if f.Side == facets.Pavilion && f.Normal[2] > -1+1e-9 && slope < critical && !seen[f.Tier] {
				seen[f.Tier] = true
				list = append(list, Under{facetName(f), slope, critical, medium})
			}
		}
	}
	return list, nil
}

// Moved is a plan moved to another material, every way beside the original.
type Moved struct {
	From, To   *gems.Material
	References References
	Original   Trial // the plan in From
	Unchanged  Trial // the plan in To
	Tangent    Trial // moved by the tangent rule, in To
	Found      Trial // by search, in To
	Outcome    *Outcome
	Variables  []Variable // of the search

	TangentPlan, FoundPlan *facets.Plan
	// Passed is where the pavilion of each lies under the critical angle, in the order of
	// the trials above.
	Passed [4][]Under
}

// Move moves a plan from the problem's material to another: by the tangent rule, and by a
// search that begins there. choose returns what the search may vary of a plan. The media
// are those that the pavilion is held against. When ctx is cancelled Move returns what is
// known so far and the cause.
func Move(ctx context.Context, p *Problem, to *gems.Material, r References, choose func(Pattern) ([]Variable, error),
	media []*gems.Material, memory *Memory, report func(Progress)) (*Moved, error) {
	pattern, ok := p.Pattern.(PlanPattern)
	if !ok {
		return nil, errors.New("only a plan can be moved to another material: the tangent rule moves its tiers")
	}
	m := &Moved{From: p.Material, To: to, References: r}
	look := func(plan *facets.Plan, material *gems.Material, t *Trial, passed *[]Under) error {
		q := *p
		q.Pattern, q.Material = PlanPattern{plan}, material
		q.Limits = Limits{}
		q.Variables, _ = choose(q.Pattern)
		j, err := newJudge(&q)
		if err != nil {
			return err
		}
		if *t, err = j.try(ctx, j.start(), claims); err != nil {
			return err
		}
		stone, err := plan.Solve()
		if err != nil {
			return nil // the trial says why
		}
		*passed, err = Passed(stone, material, media...)
		return err
	}
	if err := look(pattern.Plan, m.From, &m.Original, &m.Passed[0]); err != nil {
		return nil, err
	}
	if err := look(pattern.Plan, m.To, &m.Unchanged, &m.Passed[1]); err != nil {
		return m, err
	}
	start := pattern.Plan
	moved, err := ByTangents(pattern.Plan, r)
	if err == nil {
		m.TangentPlan = moved
		err = look(moved, m.To, &m.Tangent, &m.Passed[2])
		if m.Tangent.Seen {
			start = moved
		}
	} else if ctx.Err() == nil {
		m.Tangent, err = Trial{Words: []string{err.Error()}, Short: noStone}, nil
	}
	if err != nil {
		return m, err
	}

	q := *p
	q.Pattern, q.Material = PlanPattern{start}, to
	if q.Variables, err = choose(q.Pattern); err != nil {
		return m, err
	}
	m.Variables = q.Variables
	m.Outcome, err = Search(ctx, &q, memory, report)
	if m.Outcome != nil {
		m.Found = m.Outcome.Best
		m.FoundPlan = PlanPattern{start}.With(q.names(), m.Found.Values)
		if stone, err := m.FoundPlan.Solve(); err == nil {
			m.Passed[3], _ = Passed(stone, to, media...) // the indices were known to the search
		}
	}
	return m, err
}
