package tune

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Breach is a limit that a stone does not keep: by how much, relative to the limit, and
// in words.
type Breach struct {
	By    float64 // above 0
	Words string
}

// broken returns the limits that a stone of the material does not keep. ratio is the
// length over width that is to be kept.
func (l *Limits) broken(s *facets.Stone, m *facets.Measures, material *gems.Material, ratio float64) []Breach {
	var bs []Breach
	atLeast := func(what string, got, want float64, unit string) {
		if want > 0 && got < want {
			bs = append(bs, Breach{(want - got) / want, fmt.Sprintf("%s is %.3g%s, less than %.3g%s", what, got, unit, want, unit)})
		}
	}
	atMost := func(what string, got, want float64, unit string) {
		if want > 0 && got > want {
			bs = append(bs, Breach{(got - want) / want, fmt.Sprintf("%s is %.3g%s, more than %.3g%s", what, got, unit, want, unit)})
		}
	}
	atLeast("the girdle", m.GirdleMM.Min, l.GirdleMM, " mm")
	atMost("the depth", m.DepthPercent, l.MostDepthPercent, " %")
	atMost("the crown", m.CrownHeightPercent, l.MostCrownPercent, " %")
	atLeast("the weight", m.Carats(material.Density), l.LeastCarats, " ct")
	atLeast("the narrowest facet", m.SmallestFacetMM, l.LeastFacetMM, " mm")
	if l.KeepRatio > 0 && ratio > 0 {
		atMost("the change of length over width", math.Abs(m.Ratio/ratio-1), l.KeepRatio, "")
	}
	if l.MarginIn != nil {
		bs = append(bs, l.margins(s, material)...)
	}
	if l.CleavageNormal != nil && l.CleavageMargin > 0 {
		c := mgl64.Vec3(*l.CleavageNormal)
		for _, f := range s.Facets {
			off := facets.Angle(math.Acos(min(1, math.Abs(f.Normal.Dot(c)))))
			if off < l.CleavageMargin {
				bs = append(bs, Breach{float64((l.CleavageMargin - off) / l.CleavageMargin),
					fmt.Sprintf("a facet of %s lies %v from the cleavage, less than %v", facetName(f), off, l.CleavageMargin)})
			}
		}
	}
	return bs
}

// margins checks every tier of the pavilion against the critical angle for the lower
// index of the material.
func (l *Limits) margins(s *facets.Stone, material *gems.Material) (bs []Breach) {
	stone, err := material.Indices(gems.LineD)
	if err != nil {
		return nil // a material without an index at the D line was refused before
	}
	medium, err := l.MarginIn.Index(gems.LineD)
	if err != nil {
		return nil
	}
	critical, ok := trace.CriticalAngle(stone.Least(), medium)
	if !ok {
		return []Breach{{1, fmt.Sprintf("there is no critical angle from %s into %s", material.Name, l.MarginIn.Name)}}
	}
	lowest := math.Inf(1)
	for _, c := range s.Corners {
		lowest = min(lowest, c[2])
	}
	seen := map[string]bool{}
	for _, f := range s.Facets {
		if f.Side != facets.Pavilion || f.Normal[2] < -1+1e-9 || seen[f.Tier] {
			continue
		}
		margin, what := l.BreakMargin, "break"
		for _, c := range f.Corners {
			if s.Corners[c][2] < lowest+1e-6*s.Corners[c].Len() {
				margin, what = l.MainMargin, "main"
			}
		}
		slope := facets.Angle(math.Acos(-f.Normal[2]))
		if margin > 0 && slope < critical+margin {
			seen[f.Tier] = true
			bs = append(bs, Breach{float64((critical + margin - slope) / margin),
				fmt.Sprintf("pavilion %s %s at %v lies less than %v above the critical angle %v in %s", what, facetName(f), slope, margin, critical, l.MarginIn.Name)})
		}
	}
	return bs
}

func facetName(f facets.Facet) string {
	if f.Tier == "" {
		return f.Side.String()
	}
	return f.Tier
}
