package facets

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// Step is the stone under the lap as it is after one tier.
type Step struct {
	Tier    int     // into Plan.Tiers
	Stone   *Stone  // mm, in the finished stone's frame; facets of the rough have no tier
	New     []int   // into Stone.Facets: what the tier cut; empty if this rough has nothing there
	Removed float64 // mm³ that the tier took off
	Depth   float64 // mm, the thickest layer that it took off, measured square to its facet
}

// BlockMargin is how much larger than the finished stone the block is that
// Steps starts from where no rough is given.
const BlockMargin = 0.08

// Block returns the box that holds the stone, larger about its middle by the
// given share of its size.
func (s *Stone) Block(margin float64) *Stone {
	low, high := s.Corners[0], s.Corners[0]
	for _, c := range s.Corners {
		for k := range c {
			low[k], high[k] = math.Min(low[k], c[k]), math.Max(high[k], c[k])
		}
	}
	var planes []Plane
	for k := range 3 {
		middle, half := (low[k]+high[k])/2, (high[k]-low[k])/2*(1+margin)
		for _, sign := range []float64{-1, 1} {
			p := Plane{Index: math.NaN(), Distance: sign*middle + half}
			p.Normal[k] = sign
			p.Side = Girdle
			switch {
			case k == 2 && sign < 0:
				p.Side = Pavilion
			case k == 2:
				p.Side = Table
			}
			planes = append(planes, p)
		}
	}
	block, err := FromPlanes("rough", planes)
	if err != nil {
		panic(err) // a stone has extent, so its box is closed
	}
	return block
}

// Steps returns the partly cut stone after each tier of the plan that was
// solved, in cutting order, starting from a convex rough in the finished
// stone's frame, or from the Block of BlockMargin where rough is nil. Temporary
// facets stand until later tiers take them off. After the last tier the stone
// is the finished one if the rough holds it; where it does not, facets of the
// rough remain.
func (p *Plan) Steps(solved *Solution, rough *Stone) ([]Step, error) {
	if len(solved.Tiers) != len(p.Tiers) {
		return nil, fmt.Errorf("the solution has %d tiers and the plan %d; solve the plan again",
			len(solved.Tiers), len(p.Tiers))
	}
	if rough == nil {
		rough = solved.Stone.Block(BlockMargin)
	}
	_, unit := rough.reach()
	s := newSolid()
	var planes []Plane
	cut := func(plane Plane) error { // distances in mm
		planes = append(planes, plane)
		switch s.cut(plane.Normal, plane.Distance/unit) {
		case swallows:
			return fmt.Errorf("tier %q takes the whole rough off; is the rough in its place?", plane.Tier)
		case unresolved:
			return fmt.Errorf("%w: tier %q, index %g", ErrTangled, plane.Tier, plane.Index)
		}
		return nil
	}
	for _, f := range rough.Facets {
		if err := cut(Plane{Index: math.NaN(), Side: f.Side, Normal: f.Normal, Distance: f.Distance}); err != nil {
			return nil, err
		}
	}
	if left := s.open(); len(left) > 0 {
		return nil, fmt.Errorf("%w toward %s: the rough is no closed solid", ErrOpen, directions(left))
	}
	before := s.stone(p.Name, planes, mgl64.Vec3{}, unit)
	steps := make([]Step, 0, len(p.Tiers))
	for i := range p.Tiers {
		step := Step{Tier: i}
		first := len(planes)
		for _, plane := range solved.Planes(p, i) {
			for _, c := range before.Corners {
				step.Depth = math.Max(step.Depth, plane.Normal.Dot(c)-plane.Distance)
			}
			if err := cut(plane); err != nil {
				return nil, err
			}
		}
		step.Stone = s.stone(p.Name, planes, mgl64.Vec3{}, unit)
		number := 0
		for k := range planes {
			if s.lives(boxFaces + k) {
				if k >= first {
					step.New = append(step.New, number)
				}
				number++
			}
		}
		if len(step.New) == 0 {
			step.Depth = 0 // a layer within the weld tolerance
		}
		step.Removed = before.Volume() - step.Stone.Volume()
		steps = append(steps, step)
		before = step.Stone
	}
	return steps, nil
}

// Planes returns the planes of a tier of the solved plan in cutting order, in mm.
func (s *Solution) Planes(p *Plan, tier int) []Plane {
	t, got := &p.Tiers[tier], &s.Tiers[tier]
	v := solver{plan: p}
	var planes []Plane
	for _, index := range got.Index {
		plane := Plane{Tier: t.Name, Index: index, Side: t.Side,
			Normal: v.normal(t, got.Angle, index), Distance: got.Distance * s.Scale}
		if plane.Normal[0] == 0 && plane.Normal[1] == 0 {
			plane.Index = math.NaN()
		}
		planes = append(planes, plane)
	}
	return planes
}
