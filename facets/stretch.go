package facets

import (
	"fmt"
	"math"
)

// Stretched returns the plan with one side made steeper or flatter as a whole:
// the tangents of its angles are multiplied by ratio, and its stops move with
// them, so that the view from above, the corners and the other side stay. It
// is the cutters' tangent rule, a stretch along z from the girdle's edge on
// that side (lowest for the pavilion, highest for the crown). Angles that the
// solver finds follow by themselves. The side is Pavilion or Crown; the table
// goes with the crown. Errors are Faults.
func (p *Plan) Stretched(side Side, ratio float64) (*Plan, error) {
	if side != Pavilion && side != Crown || !(ratio > 0) || math.IsInf(ratio, 0) {
		return nil, Faults{{File: p.File, Field: "stretch", Got: fmt.Sprintf("%v by %g", side, ratio),
			Why:    "only the pavilion or the crown can be stretched, by a number above 0",
			Remedy: "give one of them and a number near 1"}}
	}
	sol, err := p.Solution()
	if err != nil {
		return nil, err
	}
	height := sol.Stone.Measure().GirdleHeightMM
	from := height.Min / sol.Scale
	if side == Crown {
		from = height.Max / sol.Scale
	}
	lift := func(z float64) float64 { return from + ratio*(z-from) }
	q := p.Clone()
	for i := range q.Tiers {
		t := &q.Tiers[i]
		if t.Side != side && !(side == Crown && t.Side == Table) {
			continue
		}
		s := up(t.Side)
		old := sol.Tiers[i].Angle
		if t.HasAngle && t.Angle != 0 {
			t.Angle = Angle(math.Atan(ratio * math.Tan(t.Angle.Radians())))
		}
		switch t.Stop.Rule {
		case StopDistance:
			if old == 0 {
				t.Stop.Value = s * lift(s*t.Stop.Value)
				break
			}
			// The trace on the plane z = from stays.
			sinA, cosA := math.Sincos(old.Radians())
			r := (t.Stop.Value - s*cosA*from) / sinA
			sinA, cosA = math.Sincos(t.Angle.Radians())
			t.Stop.Value = sinA*r + s*cosA*from
		case StopCentre:
			t.Stop.Value = s * lift(s*t.Stop.Value)
		case StopLevel, StopEdge:
			t.Stop.Value = lift(t.Stop.Value)
		}
	}
	return q, nil
}
