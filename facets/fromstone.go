package facets

import (
	"cmp"
	"fmt"
	"math"
	"slices"
)

// Facets of a stone are cut as one tier if their angles and distances agree this well,
// as a share of a radian and of the stone's size: the rounding of a file in single
// precision over a small facet, which is far less than any machine can set.
const oneTier = 1e-5

// PlanOf returns a plan that cuts the stone as it is: its facets gathered into tiers
// of one angle and one distance, girdle first, then pavilion and crown from steep to
// flat. Indices are azimuths on a gear of the given number of teeth and fall between
// its teeth where they must. A stone has no history: what it was cut to meet, and in
// which order, is not known, so every tier stops by distance.
func PlanOf(s *Stone, gear int) *Plan {
	p := &Plan{Name: s.Name, Gear: gear, WidthMM: s.Measure().WidthMM}
	_, reach := s.reach()
	type group struct {
		side     Side
		angle    Angle
		distance float64
		index    []float64
	}
	var groups []*group
	for i := range s.Facets {
		f := &s.Facets[i]
		level := math.Hypot(f.Normal[0], f.Normal[1])
		angle := Angle(math.Atan2(level, math.Abs(f.Normal[2])))
		side := f.Side
		switch {
		case math.Abs(f.Normal[2]) < oneTier: // a plan's girdle is upright, and nothing else is
			side, angle = Girdle, 90*Degree
		case f.Normal[2] < 0:
			side = Pavilion
		case side != Table || level > oneTier:
			side = Crown
		}
		if level <= oneTier {
			angle = 0
		}
		k := slices.IndexFunc(groups, func(g *group) bool {
			return g.side == side && math.Abs(float64(g.angle-angle)) < oneTier &&
				math.Abs(g.distance-f.Distance) < oneTier*reach
		})
		if k < 0 {
			groups = append(groups, &group{side: side, angle: angle, distance: f.Distance})
			k = len(groups) - 1
		}
		azimuth := 0.0
		if angle > 0 {
			azimuth = math.Atan2(f.Normal[1], f.Normal[0])
		}
		groups[k].index = append(groups[k].index, onGear(azimuth*float64(gear)/(2*math.Pi), float64(gear)))
	}
	order := [...]int{Pavilion: 1, Girdle: 0, Crown: 2, Table: 3}
	slices.SortStableFunc(groups, func(a, b *group) int {
		return cmp.Or(cmp.Compare(order[a.side], order[b.side]), cmp.Compare(b.angle, a.angle))
	})
	letters := [...]string{Pavilion: "P", Girdle: "G", Crown: "C", Table: "T"}
	count := map[Side]int{}
	for i, g := range groups {
		count[g.side]++
		slices.Sort(g.index)
		t := Tier{
			Name: fmt.Sprintf("%s%d", letters[g.side], count[g.side]), Side: g.side, Angle: g.angle, HasAngle: true,
			Index: g.index, Stop: Stop{Rule: StopDistance, Value: g.distance},
		}
		if i > 0 && order[g.side] >= order[Crown] && order[groups[i-1].side] < order[Crown] {
			t.Transfer = &Transfer{}
		}
		p.Tiers = append(p.Tiers, t)
	}
	return p
}
