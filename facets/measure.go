package facets

import (
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
)

// Measures is a stone's size as the trade takes it; see Definitions. Lengths
// are in mm, percentages in percent of the width.
type Measures struct {
	WidthMM  float64
	LengthMM float64
	Ratio    float64 // length over width
	Round    bool    // whether width and length are taken over the corners
	// LongestMM is the greatest distance between two corners of the outline: what a calliper
	// shows at most, and a mount must let in.
	LongestMM float64
	DepthMM   float64

	DepthPercent         float64
	TablePercent         float64 // 0 without a table
	CrownHeightPercent   float64
	PavilionDepthPercent float64
	CuletPercent         float64 // 0 for a point or a keel

	GirdlePercent  Span    // thickness; Min is 0 where the rim is a knife edge
	GirdleMM       Span    // likewise, in mm
	GirdleHeightMM Heights // of the girdle over z = 0

	SmallestFacet   int     // into Stone.Facets
	SmallestFacetMM float64 // its least width
	SurfaceMM2      float64
	VolumeMM3       float64
	TableWidthMM    float64
	CuletWidthMM    float64
	CrownHeightMM   float64
	PavilionDepthMM float64
}

// Span is a value that differs round the stone: where it is least and most,
// and its mean along the rim.
type Span struct{ Min, Max, Mean float64 }

// Heights are the z of the girdle's lowest and highest place, and midway
// between its mean upper and its mean lower edge, in mm.
type Heights struct{ Min, Max, Middle float64 }

// Definition says how a measure is taken and who says so.
type Definition struct {
	Name    string // as in check --json
	Meaning string
	Source  string
}

// Definitions returns what the measures mean, in the order in which a sheet
// lists them.
func Definitions() []Definition {
	const trade = "common practice, no source"
	const formula = "formula: arithmetic; definition: " + trade
	return []Definition{
		{"width_mm",
			"least distance between two parallel lines that hold the outline; over the corners if it is round", trade},
		{"length_mm", "extent of the outline across the width", trade},
		{"longest_mm", "greatest distance between two corners of the outline", "geometry"},
		{"depth_mm", "from the table to the lowest point, along the axis", trade},
		{"table_percent",
			"width of the table over the width; corner to corner for a round, across the width otherwise", trade},
		{"crown_height_percent",
			"from the girdle's highest place to the table, over the width;" +
				" in a round (100 - table)/2 tan(crown angle)", formula},
		{"pavilion_depth_percent",
			"from the girdle's lowest place to the culet, over the width;" +
				" in a round (100 - culet)/2 tan(pavilion angle)", formula},
		{"girdle_percent",
			"height of the upright facets where least and most, over the width; least is 0 where the rim is sharp", trade},
		{"girdle_height_mm",
			"z of the girdle's lowest and highest place, and midway between its mean upper and lower edge",
			"this program's own"},
		{"culet_percent", "width of the level flat below, taken like the table; 0 for a point", trade},
		{"smallest_facet_mm", "least distance between two parallel lines that hold the narrowest facet", trade},
		{"area_mm2", "area of a facet's polygon; the surface is the sum of all", "geometry"},
		{"volume_mm3", "a third of the sum of facet area times facet distance", "Gauss's theorem"},
		{"carats", "volume times density, at 0.2 g a carat",
			"metric carat, 4th General Conference on Weights and Measures, 1907 (from memory)"},
	}
}

// Carats returns the weight in carats of 0.2 g at a density in g/cm3.
func (m *Measures) Carats(density float64) float64 { return m.VolumeMM3 * density / 200 }

// Volume returns the stone's volume in mm³.
func (s *Stone) Volume() float64 {
	middle, _ := s.reach() // cones from here are all positive, so nothing cancels
	sum := 0.0
	for i := range s.Facets {
		f := &s.Facets[i]
		sum += f.Area * (f.Distance - f.Normal.Dot(middle))
	}
	return sum / 3
}

// Measure takes the stone's measures.
func (s *Stone) Measure() Measures {
	var m Measures
	points := make([]mgl64.Vec2, len(s.Corners))
	low, high := math.Inf(1), math.Inf(-1)
	for i, c := range s.Corners {
		points[i] = c.Vec2()
		low, high = math.Min(low, c[2]), math.Max(high, c[2])
	}
	o := outlineOf(points)
	m.WidthMM, m.LengthMM, m.Round = o.width, o.length, o.round
	m.Ratio, m.LongestMM = m.LengthMM/m.WidthMM, o.diameter
	m.DepthMM = high - low
	m.VolumeMM3 = s.Volume()
	m.SmallestFacetMM = math.Inf(1)
	for i := range s.Facets {
		f := &s.Facets[i]
		m.SurfaceMM2 += f.Area
		if w := s.facetWidth(i); w < m.SmallestFacetMM {
			m.SmallestFacet, m.SmallestFacetMM = i, w
		}
		switch {
		case f.Side == Table && f.Normal[2] > 0.5:
			m.TableWidthMM = math.Max(m.TableWidthMM, o.flat(s.seen(i)))
		case f.Normal[2] < -1+levelTolerance:
			m.CuletWidthMM = o.flat(s.seen(i))
		}
	}
	g := s.girdle(&o)
	m.GirdleHeightMM = Heights{g.low, g.high, g.middle}
	m.GirdleMM = Span{g.thin, g.thick, g.mean}
	m.CrownHeightMM, m.PavilionDepthMM = high-g.high, g.low-low
	percent := func(mm float64) float64 { return 100 * mm / m.WidthMM }
	m.DepthPercent = percent(m.DepthMM)
	m.TablePercent, m.CuletPercent = percent(m.TableWidthMM), percent(m.CuletWidthMM)
	m.CrownHeightPercent, m.PavilionDepthPercent = percent(m.CrownHeightMM), percent(m.PavilionDepthMM)
	m.GirdlePercent = Span{percent(g.thin), percent(g.thick), percent(g.mean)}
	return m
}

// levelTolerance is how far from 1 the z of a level facet's normal may be: the
// square of a hundredth of a degree, halved.
const levelTolerance = 1.5e-8

// seen returns a facet's corners as seen from above.
func (s *Stone) seen(facet int) []mgl64.Vec2 {
	list := make([]mgl64.Vec2, len(s.Facets[facet].Corners))
	for i, c := range s.Facets[facet].Corners {
		list[i] = s.Corners[c].Vec2()
	}
	return list
}

// facetWidth returns the least distance between two parallel lines that hold
// a facet.
func (s *Stone) facetWidth(facet int) float64 {
	f := &s.Facets[facet]
	least := math.Inf(1)
	for j, c := range f.Corners {
		a, b := s.Corners[c], s.Corners[f.Corners[(j+1)%len(f.Corners)]]
		in := f.Normal.Cross(b.Sub(a))
		l := in.Len()
		if l == 0 {
			continue
		}
		far := 0.0
		for _, k := range f.Corners {
			far = math.Max(far, in.Dot(s.Corners[k].Sub(a))/l)
		}
		least = math.Min(least, far)
	}
	return least
}

// girdleMeasures are heights and thicknesses along the rim, in mm.
type girdleMeasures struct {
	low, high, middle float64 // z
	thin, thick, mean float64
}

// girdle measures the rim. Its upright facets are walked along their level
// direction; where the outline has none, the rim is sharp.
func (s *Stone) girdle(o *outline) girdleMeasures {
	g := girdleMeasures{low: math.Inf(1), high: math.Inf(-1), thin: math.Inf(1)}
	run, area, moment := 0.0, 0.0, 0.0 // along the rim: its length, ∫ thickness, ∫ middle height
	for i := range s.Facets {
		f := &s.Facets[i]
		if f.Side != Girdle {
			continue
		}
		along := mgl64.Vec3{-f.Normal[1], f.Normal[0], 0}.Normalize()
		var places []float64
		for _, c := range f.Corners {
			places = append(places, along.Dot(s.Corners[c]))
			g.low, g.high = math.Min(g.low, s.Corners[c][2]), math.Max(g.high, s.Corners[c][2])
		}
		slices.Sort(places)
		tolerance := weldTolerance * o.diameter
		places = slices.CompactFunc(places, func(a, b float64) bool { return math.Abs(b-a) <= tolerance })
		var last, lastLow, lastHigh float64
		for k, u := range places {
			low, high := s.chord(i, along, u, tolerance)
			g.thin, g.thick = math.Min(g.thin, high-low), math.Max(g.thick, high-low)
			if k > 0 {
				step := u - last
				run += step
				area += step * (high - low + lastHigh - lastLow) / 2
				moment += step * (high + low + lastHigh + lastLow) / 4
			}
			last, lastLow, lastHigh = u, low, high
		}
	}
	around := 0.0
	for i, c := range o.hull {
		around += o.hull[(i+1)%len(o.hull)].Sub(c).Len()
	}
	if run < around*(1-sharpShare) {
		g.thin = 0
		sharp, z := s.sharpRim(o)
		run += sharp
		moment += z
		for _, c := range s.rimCorners(o) {
			g.low, g.high = math.Min(g.low, s.Corners[c][2]), math.Max(g.high, s.Corners[c][2])
		}
	}
	g.mean, g.middle = area/run, moment/run
	return g
}

// sharpShare is the share of the outline that may lack a girdle facet through
// rounding alone.
const sharpShare = 1e-6

// chord returns the lower and upper z of an upright facet at a place along it.
func (s *Stone) chord(facet int, along mgl64.Vec3, u, tolerance float64) (low, high float64) {
	f := &s.Facets[facet]
	low, high = math.Inf(1), math.Inf(-1)
	for j, c := range f.Corners {
		a, b := s.Corners[c], s.Corners[f.Corners[(j+1)%len(f.Corners)]]
		ua, ub := along.Dot(a), along.Dot(b)
		if u < math.Min(ua, ub)-tolerance || u > math.Max(ua, ub)+tolerance {
			continue
		}
		za, zb := a[2], b[2]
		if math.Abs(ub-ua) > tolerance {
			za += (zb - za) * (u - ua) / (ub - ua)
			zb = za
		}
		low, high = math.Min(low, math.Min(za, zb)), math.Max(high, math.Max(za, zb))
	}
	return low, high
}

// rimCorners returns the corners that lie on the outline.
func (s *Stone) rimCorners(o *outline) []int {
	var list []int
	for i, c := range s.Corners {
		p := c.Vec2()
		for j, a := range o.hull {
			e := o.hull[(j+1)%len(o.hull)].Sub(a)
			d := p.Sub(a)
			if math.Abs(e[0]*d[1]-e[1]*d[0]) <= sharpShare*e.Len()*o.diameter {
				list = append(list, i)
				break
			}
		}
	}
	return list
}

// sharpRim returns the length of the outline that is a sharp edge, seen from
// above, and the integral of its height along it.
func (s *Stone) sharpRim(o *outline) (length, moment float64) {
	on := map[int]bool{}
	for _, c := range s.rimCorners(o) {
		on[c] = true
	}
	for _, e := range s.Edges {
		a, b := e.Corners[0], e.Corners[1]
		if !on[a] || !on[b] || s.Facets[e.Facets[0]].Side == Girdle || s.Facets[e.Facets[1]].Side == Girdle {
			continue
		}
		if s.Facets[e.Facets[0]].Normal[2]*s.Facets[e.Facets[1]].Normal[2] >= 0 {
			continue // both face up, or both down: the edge is not the outline
		}
		l := s.Corners[a].Vec2().Sub(s.Corners[b].Vec2()).Len()
		length += l
		moment += l * (s.Corners[a][2] + s.Corners[b][2]) / 2
	}
	return length, moment
}
