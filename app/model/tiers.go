package model

import (
	"math"
	"strings"
	"unicode"

	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// TierRow is what the list of tiers shows of one tier.
type TierRow struct {
	Number    int // in the plan
	Name      string
	Side      facets.Side
	Detail    string // how many facets, and until when they are cut
	Angle     facets.Angle
	Own       bool // the plan gives the angle; else the solver finds it and it cannot be set
	Slides    bool // the angle is to be set: not that of a table, girdle or culet
	Low, High facets.Angle
	Ticks     []Tick // critical angles within the slider's range, pavilion only
}

// Tick is a limit that a slider carries.
type Tick struct {
	Letter string // first letter of the surrounding
	Name   string // of the surrounding
	Angle  facets.Angle
}

// tierList makes rows and keeps each slider's range while its thumb moves.
type tierList struct {
	ranges map[string][2]facets.Angle // by tier's name
}

// rows returns the plan's tiers in cutting order. stone, which may be nil, tells
// the angles that the solver found.
func (l *tierList) rows(w *words.Words, plan *facets.Plan, stone *facets.Stone, ticks []Tick) []TierRow {
	if l.ranges == nil {
		l.ranges = map[string][2]facets.Angle{}
	}
	rows := make([]TierRow, len(plan.Tiers))
	for i := range plan.Tiers {
		t := &plan.Tiers[i]
		row := TierRow{Number: i, Name: t.Name, Side: t.Side, Detail: detail(w, t, plan.Gear), Angle: t.Angle, Own: t.HasAngle}
		if !t.HasAngle {
			row.Angle = foundAngle(stone, t.Name)
		}
		row.Slides = row.Own && t.Angle > 0 && (t.Side == facets.Pavilion || t.Side == facets.Crown)
		if row.Slides {
			var marks []Tick
			if t.Side == facets.Pavilion {
				marks = ticks
			}
			row.Low, row.High = l.span(t, marks)
			for _, m := range marks {
				if m.Angle >= row.Low && m.Angle <= row.High {
					row.Ticks = append(row.Ticks, m)
				}
			}
		}
		rows[i] = row
	}
	return rows
}

// How far a slider reaches to either side of the angle where it was first seen,
// and how far it is stretched to take in a critical angle.
const (
	sliderReach   = 8 * facets.Degree
	sliderStretch = 18 * facets.Degree
	sliderLeast   = 1 * facets.Degree
	sliderMost    = 89 * facets.Degree
)

// span returns the range of a tier's slider. It stays as it is while the angle is
// within, so that the thumb does not run away from the hand.
func (l *tierList) span(t *facets.Tier, ticks []Tick) (low, high facets.Angle) {
	if kept, ok := l.ranges[t.Name]; ok && t.Angle >= kept[0] && t.Angle <= kept[1] {
		return kept[0], kept[1]
	}
	low, high = t.Angle-sliderReach, t.Angle+sliderReach
	const air = facets.Degree // beyond a tick, so that it does not stand on the end
	for _, m := range ticks {
		if m.Angle > t.Angle-sliderStretch && m.Angle < t.Angle+sliderStretch {
			low, high = min(low, m.Angle-air), max(high, m.Angle+air)
		}
	}
	low = max(sliderLeast, facets.Angle(math.Floor(low.Degrees()))*facets.Degree)
	high = min(sliderMost, facets.Angle(math.Ceil(high.Degrees()))*facets.Degree)
	low, high = min(low, t.Angle), max(high, t.Angle)
	l.ranges[t.Name] = [2]facets.Angle{low, high}
	return low, high
}

// forget drops the ranges, for another plan, material or surroundings.
func (l *tierList) forget() { l.ranges = nil }

// foundAngle returns the angle of a tier's facets as they stand on the stone, NaN
// where there are none.
func foundAngle(stone *facets.Stone, tier string) facets.Angle {
	if stone != nil {
		for i := range stone.Facets {
			if f := &stone.Facets[i]; f.Tier == tier {
				across := math.Hypot(f.Normal[0], f.Normal[1])
				return facets.Angle(math.Atan2(across, math.Abs(f.Normal[2])))
			}
		}
	}
	return facets.Angle(math.NaN())
}

// detail says how many facets a tier has and when each is deep enough.
func detail(w *words.Words, t *facets.Tier, gear int) string {
	n := len(t.Indices(gear))
	count := w.Count(n, "%d facet", "%d facets", n)
	parts := []string{count}
	add := func(k words.Key, args ...any) { parts = append(parts, w.Say(k, args...)) }
	s := t.Stop
	switch s.Rule {
	case facets.StopDistance:
		add("distance %.4g", s.Value)
	case facets.StopCentre:
		add("to %.4g on the axis", s.Value)
	case facets.StopMeet:
		corners := make([]string, len(s.Corners))
		for i, marks := range s.Corners {
			names := make([]string, len(marks))
			for j, m := range marks {
				names[j] = m.String()
			}
			corners[i] = strings.Join(names, " ")
		}
		add("meet %s", strings.Join(corners, w.Say(" and ")))
	case facets.StopLevel:
		add("edge at the girdle %.4g", s.Value)
	case facets.StopEdge:
		add("edge with %s at %.4g", s.With, s.Value)
	case facets.StopGirdle:
		add("leaving %.4g of girdle", s.Value)
	case facets.StopTable, facets.StopCulet:
		add("%.4g of the width", s.Value)
	}
	if t.Temporary {
		add("temporary")
	}
	return strings.Join(parts, ", ")
}

// criticalTicks returns the critical angles of a material in the surroundings, at
// the sodium D line; a medium that is not the thinner side has none.
func criticalTicks(w *words.Words, material *gems.Material, around []Around) []Tick {
	var ticks []Tick
	if material == nil {
		return nil
	}
	n, err := material.Index(gems.LineD)
	if err != nil {
		return nil
	}
	for _, a := range around {
		m := a.Medium
		outside, err := m.Index(gems.LineD)
		if err != nil {
			continue
		}
		if angle, ok := trace.CriticalAngle(n, outside); ok {
			ticks = append(ticks, Tick{Letter: letterOf(w, m), Name: stock.NameOf(w, m), Angle: angle})
		}
	}
	return ticks
}

// letterOf returns the letter by which a surrounding's tick is known.
func letterOf(w *words.Words, m *gems.Material) string {
	for _, r := range stock.ShortOf(w, m) {
		return string(unicode.ToLower(r))
	}
	return "?"
}
