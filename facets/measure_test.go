package facets

import (
	"math"
	"testing"
)

// The measures of the sample plans follow from their angles by the trade's
// formulas.
func TestMeasureByFormula(t *testing.T) {
	_, sol := solveFile(t, "../testdata/plans/round.toml")
	m := sol.Stone.Measure()
	tan := func(deg float64) float64 { return math.Tan(deg * math.Pi / 180) }
	for _, row := range []struct {
		what      string
		got, want float64
		source    string
	}{
		{"width", m.WidthMM, 8, "the plan's width_mm"},
		{"pavilion depth", m.PavilionDepthPercent, 50 * tan(41.5), "(100 - culet)/2 tan(pavilion angle)"},
		{"crown height", m.CrownHeightPercent, (100 - m.TablePercent) / 2 * tan(35),
			"(100 - table)/2 tan(crown angle)"},
		{"the parts of the depth", m.CrownHeightPercent + m.GirdlePercent.Max + m.PavilionDepthPercent,
			m.DepthPercent, "they add up in a round"},
		{"girdle, thin and thick", m.GirdlePercent.Min, m.GirdlePercent.Max, "the halves leave it level"},
		{"girdle in plan units", m.GirdleMM.Mean, 0.05 * sol.Scale, "the plan's rule girdle = 0.05"},
		{"middle of the girdle", m.GirdleHeightMM.Middle, (m.GirdleHeightMM.Min + m.GirdleHeightMM.Max) / 2,
			"level edges"},
		{"smallest facet", m.SmallestFacetMM, m.GirdleMM.Mean, "the girdle facets are the narrowest"},
	} {
		closeTo(t, row.what, row.got, row.want, 1e-11, row.source)
	}
	if !m.Round || m.CuletPercent != 0 {
		t.Errorf("round %v, culet %g; want true and 0", m.Round, m.CuletPercent)
	}
	_, sol = solveFile(t, "../testdata/plans/step.toml")
	m = sol.Stone.Measure()
	for _, row := range []struct {
		what      string
		got, want float64
		source    string
	}{
		{"length / width", m.Ratio, 1.3, "the girdle's distances"},
		{"table", m.TablePercent, 58, "the plan's rule"},
		{"girdle", m.GirdleMM.Max, 0.05 * sol.Scale, "the plan's rule"},
		{"pavilion depth", m.PavilionDepthMM / sol.Scale, 0.5 + (1-0.2/tan(57)-0.3/tan(49))*tan(41.5),
			"three slopes one below the other"},
		{"width of the table", m.TableWidthMM, 0.58 * 7, "arithmetic"},
	} {
		closeTo(t, row.what, row.got, row.want, 1e-11, row.source)
	}
}

// A block with an octagonal rim of no height, a wedge-shaped girdle, and a
// keel: definitions in places where they could slip.
func TestMeasureOddShapes(t *testing.T) {
	wedge := []Plane{
		{Side: Table, Normal: tilted(Crown, 0, 0, 0).Normal, Distance: 1},
		{Side: Girdle, Normal: tilted(Girdle, 90, 0, 0).Normal, Distance: 1}, {Side: Girdle,
			Normal: tilted(Girdle, 90, 180, 0).Normal, Distance: 1},
		{Side: Girdle, Normal: tilted(Girdle, 90, 90, 0).Normal, Distance: 1.5}, {Side: Girdle,
			Normal: tilted(Girdle, 90, 270, 0).Normal, Distance: 1.5},
		tilted(Pavilion, 10, 0, 0),
	}
	s, err := FromPlanes("wedge", wedge)
	if err != nil {
		t.Fatal(err)
	}
	m := s.Measure()
	slope := math.Tan(10 * math.Pi / 180)
	for _, row := range []struct {
		what      string
		got, want float64
		source    string
	}{
		{"width", m.WidthMM, 2, "2 by 3"},
		{"length", m.LengthMM, 3, "2 by 3"},
		{"longest", m.LongestMM, math.Sqrt(4 + 9), "Pythagoras"},
		{"thin", m.GirdleMM.Min, 1 - slope, "the floor rises to z = tan 10 at x = 1"},
		{"thick", m.GirdleMM.Max, 1 + slope, "and falls to -tan 10 at x = -1"},
		{"mean", m.GirdleMM.Mean, 1, "as much above as below"},
		{"lowest", m.GirdleHeightMM.Min, -slope, "geometry"},
		{"highest", m.GirdleHeightMM.Max, 1, "geometry"},
		{"middle", m.GirdleHeightMM.Middle, 0.5, "mean upper edge 1, mean lower edge 0"},
		{"table", m.TablePercent, 100, "the whole top"},
		{"volume", m.VolumeMM3, 6, "2 · 3 · mean height 1"},
	} {
		closeTo(t, row.what, row.got, row.want, 1e-12, row.source)
	}
	planes, _, _, _ := brilliantT53()
	if s, err = FromPlanes("", planes); err != nil {
		t.Fatal(err)
	}
	if m = s.Measure(); m.GirdleMM.Max != 0 || math.Abs(m.GirdleHeightMM.Middle) > 1e-12 ||
		math.Abs(m.GirdleHeightMM.Max) > 1e-12 {
		t.Errorf("a sharp rim at z = 0 measures %+v, %+v", m.GirdleMM, m.GirdleHeightMM)
	}
	if s, err = FromPlanes("", append(planes, Plane{Side: Pavilion, Normal: tilted(Pavilion, 0, 0, 0).Normal,
		Distance: 0.8})); err != nil {
		t.Fatal(err)
	}
	// The culet's eight corners lie on the ridges between the mains.
	p := 40.75 * math.Pi / 180
	closeTo(t, "culet", s.Measure().CuletWidthMM, 2*(math.Tan(p)-0.8)/math.Tan(p)/math.Cos(math.Pi/8), 1e-12,
		"corner to corner")
}

// A regular polygon counts as round from eight corners on; a square with bowed
// sides or cut corners does not.
func TestRoundOutlines(t *testing.T) {
	polygon := func(n int, bow float64) *Stone {
		planes := []Plane{{Side: Table, Normal: tilted(Crown, 0, 0, 0).Normal, Distance: 1}, {Side: Pavilion,
			Normal: tilted(Pavilion, 0, 0, 0).Normal, Distance: 1}}
		for i := range n {
			a := 360 / float64(n) * (float64(i) + 0.5)
			planes = append(planes, tilted(Girdle, 90, a, 1+bow*math.Pow(math.Sin(2*a*math.Pi/180), 2)))
		}
		s, err := FromPlanes("", planes)
		if err != nil {
			t.Fatal(err)
		}
		return s
	}
	for _, row := range []struct {
		name  string
		n     int
		bow   float64
		round bool
		width float64 // 0: not asked
	}{
		{"triangle", 3, 0, false, 3}, {"square", 4, 0, false, 2}, {"hexagon", 6, 0, false, 2}, {"seven", 7, 0,
			false, 0},
		{"octagon", 8, 0, true, 2 / math.Cos(math.Pi/8)}, {"sixteen", 16, 0, true, 2 / math.Cos(math.Pi/16)},
		{"sixty-four", 64, 0, true, 2 / math.Cos(math.Pi/64)},
		{"cushion of 16", 16, 0.08, false, 0}, {"cushion of 64", 64, 0.08, false, 0}, {"rounds off by 0.2 %",
			64, 0.002, true, 0},
	} {
		m := polygon(row.n, row.bow).Measure()
		if m.Round != row.round {
			t.Errorf("%s: round %v, want %v", row.name, m.Round, row.round)
		}
		if row.width > 0 {
			closeTo(t, row.name+": width", m.WidthMM, row.width, 1e-9,
				"geometry of the regular polygon of inradius 1")
		}
	}
}

// Weight formulas of the trade for diamond (mm to carats) against the solids.
// The formulas state corrections of 1 to 5 % for depth and girdle, which is
// the tolerance.
func TestWeightFormulas(t *testing.T) {
	const (
		diamond = 3.515 // g/cm³
		source  = "weight formulas in Pagel-Theisen, Diamond Grading ABC, as quoted in the trade"
		stated  = 0.05
	)
	for _, row := range []struct {
		plan    string
		formula func(l, w, h float64) float64
		source  string
	}{
		{"round", func(l, w, h float64) float64 { return w * w * h * 0.0061 }, "D² H 0.0061"},
		{"oval", func(l, w, h float64) float64 { return (l + w) / 2 * (l + w) / 2 * h * 0.0062 },
			"(mean D)² H 0.0062"},
		{"step", func(l, w, h float64) float64 { return l * w * h * (0.0080 + (l/w-1)/0.5*0.0012) },
			"L W H 0.0080 to 0.0092 for L:W 1 to 1.5"},
		{"triangle", func(l, w, h float64) float64 { return l * w * h * 0.0057 }, "L W H 0.0057"},
	} {
		_, sol := solveFile(t, "../testdata/plans/"+row.plan+".toml")
		m := sol.Stone.Measure()
		closeTo(t, row.plan, m.Carats(diamond), row.formula(m.LengthMM, m.WidthMM, m.DepthMM), stated,
			row.source+", "+source)
	}
}

func TestDefinitionsAreWhole(t *testing.T) {
	seen := map[string]bool{}
	for _, d := range Definitions() {
		if d.Name == "" || d.Meaning == "" || d.Source == "" || seen[d.Name] {
			t.Errorf("definition %+v is not whole or stands twice", d)
		}
		seen[d.Name] = true
	}
}

// TestMeasuresGiveProportionsBack measures stones made of measured proportions: what
// went in must come out, for every outline whose table is measured across its width.
func TestMeasuresGiveProportionsBack(t *testing.T) {
	for _, outline := range Outlines() {
		p, err := ParseProportions(outline, "")
		if err != nil {
			t.Fatal(err)
		}
		s, err := p.Stone(8)
		if err != nil {
			t.Fatal(err)
		}
		m := s.Measure()
		const source = "the proportions that the stone was made of"
		if math.Abs(m.WidthMM-8) > 1e-6 {
			t.Errorf("%s: width %.6f mm, want 8 (%s)", outline, m.WidthMM, source)
		}
		want := p.value("table").Mean
		if outline != "triangle" && math.Abs(m.TablePercent-want) > 1e-6 {
			t.Errorf("%s: table %.6f %%, want %g (%s)", outline, m.TablePercent, want, source)
		}
		if r := p.value("ratio").Mean; r > 0 && math.Abs(m.Ratio-r) > 1e-6 {
			t.Errorf("%s: length over width %.6f, want %g (%s)", outline, m.Ratio, r, source)
		}
	}
}
