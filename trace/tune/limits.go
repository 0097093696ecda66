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

// broken returns the limits that a stone does not keep when it comes out of its rough at
// a size.
func (l *Limits) broken(s *facets.Stone, m *facets.Measures, j *judge, size fitted) []Breach {
	var bs []Breach
	material, ratio := j.Material, j.ratio
	atLeast := func(what string, got, want float64, unit string) {
		if want > 0 && got < want {
			bs = append(bs, Breach{(want - got) / want, fmt.Sprintf("%s is %.4g%s, less than %.4g%s", what, got, unit, want, unit)})
		}
	}
	atMost := func(what string, got, want float64, unit string) {
		if want > 0 && got > want {
			bs = append(bs, Breach{(got - want) / want, fmt.Sprintf("%s is %.4g%s, more than %.4g%s", what, got, unit, want, unit)})
		}
	}
	atLeast("the girdle", m.GirdleMM.Min*size.scale, l.GirdleMM, " mm")
	atMost("the depth", m.DepthPercent, l.MostDepthPercent, " %")
	atMost("the crown", m.CrownHeightPercent, l.MostCrownPercent, " %")
	atLeast("the weight", m.Carats(material.Density)*math.Pow(size.scale, 3), l.LeastCarats, " ct")
	if j.Rough != nil {
		atLeast("the yield", size.yield, l.LeastYield, "")
	}
	if l.LeastFacetMM > 0 {
		f, width := narrowest(s)
		atLeast("the narrowest facet, "+facetName(s.Facets[f])+",", width*size.scale, l.LeastFacetMM, " mm")
	}
	if l.KeepRatio > 0 && ratio > 0 {
		atMost("the change of length over width, as a share,", math.Abs(m.Ratio/ratio-1), l.KeepRatio, "")
	}
	if l.MarginIn != nil {
		bs = append(bs, l.margins(s, material)...)
	}
	if l.CleavageNormal != nil && l.CleavageMargin > 0 {
		c := mgl64.Vec3(*l.CleavageNormal)
		seen := map[string]bool{}
		for _, f := range s.Facets {
			off := facets.Angle(math.Acos(min(1, math.Abs(f.Normal.Dot(c)))))
			if name := facetName(f); off < l.CleavageMargin && !seen[name] {
				seen[name] = true
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
		return nil // refused before
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
		if slope < critical+margin {
			seen[f.Tier] = true
			bs = append(bs, Breach{float64((critical + margin - slope) / (critical + margin)),
				fmt.Sprintf("pavilion %s %s at %v lies less than %v above the critical angle %v in %s",
					what, facetName(f), slope, margin, critical, l.MarginIn.Name)})
		}
	}
	return bs
}

// narrowest returns the facet of the least width, and that width: between the nearest two
// parallel lines that hold it, one of which lies along an edge. The girdle does not
// count: its height has a limit of its own.
func narrowest(s *facets.Stone) (facet int, width float64) {
	width = math.Inf(1)
	for i := range s.Facets {
		f := &s.Facets[i]
		if f.Side == facets.Girdle {
			continue
		}
		for k, c := range f.Corners {
			a, b := s.Corners[c], s.Corners[f.Corners[(k+1)%len(f.Corners)]]
			along := b.Sub(a).Normalize()
			reach := 0.0
			for _, other := range f.Corners {
				reach = max(reach, s.Corners[other].Sub(a).Cross(along).Len())
			}
			if reach < width {
				facet, width = i, reach
			}
		}
	}
	return facet, width
}

func facetName(f facets.Facet) string {
	if f.Tier == "" {
		return f.Side.String()
	}
	return f.Tier
}
