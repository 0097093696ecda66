package command

import (
	"fmt"
	"io"
	"math"
	"strings"
	"text/tabwriter"
	"unicode/utf8"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// checkCommand solves and measures a stone.
type checkCommand struct {
	subjectFlags
	roughFlags
}

// checkResult is what check prints as JSON.
type checkResult struct {
	Facets               []checkFacet `json:"facets"`
	WidthMM              float64      `json:"width_mm"`
	LengthMM             float64      `json:"length_mm"`
	LongestMM            float64      `json:"longest_mm"`
	DepthMM              float64      `json:"depth_mm"`
	TablePercent         float64      `json:"table_percent"`
	CrownHeightPercent   float64      `json:"crown_height_percent"`
	PavilionDepthPercent float64      `json:"pavilion_depth_percent"`
	GirdlePercent        checkSpan    `json:"girdle_percent"`
	GirdleHeightMM       checkGirdle  `json:"girdle_height_mm"`
	VolumeMM3            float64      `json:"volume_mm3"`
	Carats               *float64     `json:"carats"`          // null where no density is known
	Rough                *yield       `json:"rough,omitempty"` // the largest such stone from the rough, where there is one
}

type checkSpan struct {
	Min float64 `json:"min"`
	Max float64 `json:"max"`
}

type checkGirdle struct {
	Min    float64 `json:"min"`
	Max    float64 `json:"max"`
	Middle float64 `json:"middle"`
}

type checkFacet struct {
	Tier     *string      `json:"tier"`  // null for a scan
	Index    *float64     `json:"index"` // null for a scan
	Side     string       `json:"side"`
	Normal   mgl64.Vec3   `json:"normal"`
	Distance float64      `json:"distance"` // mm
	AreaMM2  float64      `json:"area_mm2"`
	Corners  []mgl64.Vec3 `json:"corners"` // mm, anticlockwise seen from outside
}

// Run solves and measures the stone and prints what was found.
func (k *checkCommand) Run(c call) error {
	s, err := k.subject(c)
	if err != nil {
		return err
	}
	r := newCheckResult(s)
	if r.Rough, err = k.yield(s); err != nil {
		return err
	}
	if k.Solid != "" {
		if err := writeSolid(k.Solid, s.stone); err != nil {
			return err
		}
	}
	if c.json {
		return printJSON(c.out, r)
	}
	printCheck(c.out, s, r)
	if r.Rough != nil {
		r.Rough.print(c.out)
	}
	return nil
}

func newCheckResult(s *subject) *checkResult {
	m := s.measures
	r := &checkResult{
		WidthMM:              m.WidthMM,
		LengthMM:             m.LengthMM,
		LongestMM:            m.LongestMM,
		DepthMM:              m.DepthMM,
		TablePercent:         m.TablePercent,
		CrownHeightPercent:   m.CrownHeightPercent,
		PavilionDepthPercent: m.PavilionDepthPercent,
		GirdlePercent:        checkSpan{m.GirdlePercent.Min, m.GirdlePercent.Max},
		GirdleHeightMM:       checkGirdle{m.GirdleHeightMM.Min, m.GirdleHeightMM.Max, m.GirdleHeightMM.Middle},
		VolumeMM3:            m.VolumeMM3,
		Carats:               s.carats(),
	}
	for i := range s.stone.Facets {
		r.Facets = append(r.Facets, newCheckFacet(s.stone, &s.stone.Facets[i]))
	}
	return r
}

func newCheckFacet(stone *facets.Stone, f *facets.Facet) checkFacet {
	facet := checkFacet{Side: f.Side.String(), Normal: f.Normal, Distance: f.Distance, AreaMM2: f.Area}
	if f.Tier != "" {
		facet.Tier = &f.Tier
	}
	if !math.IsNaN(f.Index) {
		facet.Index = &f.Index
	}
	for _, corner := range f.Corners {
		facet.Corners = append(facet.Corners, stone.Corners[corner])
	}
	return facet
}

// carats returns the stone's weight, nil where its density is not known.
func (s *subject) carats() *float64 {
	if s.material == nil || s.material.Density == 0 {
		return nil
	}
	weight := s.measures.Carats(s.material.Density)
	return &weight
}

// rowName is how many columns the names of measures take.
const rowName = 16

func printCheck(w io.Writer, s *subject, r *checkResult) {
	fmt.Fprintf(w, "%s: a closed convex solid of %d facets, no fault found\n\n", s.name, len(r.Facets))
	row := func(name, format string, args ...any) {
		for i, arg := range args {
			if v, ok := arg.(float64); ok && math.Abs(v) < 0.0005 {
				args[i] = 0.0 // what rounds to nothing is written without a sign
			}
		}
		fmt.Fprintf(w, "%-*s %s\n", rowName, name, fmt.Sprintf(format, args...))
	}
	if s.material != nil {
		row("material", "%s", s.material.Name)
	}
	m := &s.measures
	row("width", "%.3f mm", m.WidthMM)
	row("length", "%.3f mm, %.4f of the width", m.LengthMM, m.Ratio)
	row("longest", "%.3f mm from corner to corner", m.LongestMM)
	row("depth", "%.3f mm, %.2f %% of the width", m.DepthMM, m.DepthPercent)
	row("table", "%.3f mm, %.2f %%", m.TableWidthMM, m.TablePercent)
	row("crown height", "%.3f mm, %.2f %%", m.CrownHeightMM, m.CrownHeightPercent)
	row("pavilion depth", "%.3f mm, %.2f %%", m.PavilionDepthMM, m.PavilionDepthPercent)
	row("culet", "%.3f mm, %.2f %%", m.CuletWidthMM, m.CuletPercent)
	row("girdle", "%.3f to %.3f mm, %.2f to %.2f %%, mean %.2f %%", m.GirdleMM.Min, m.GirdleMM.Max,
		m.GirdlePercent.Min, m.GirdlePercent.Max, m.GirdlePercent.Mean)
	row("girdle height", "%.3f to %.3f mm over z = 0, middle %.3f mm", m.GirdleHeightMM.Min, m.GirdleHeightMM.Max, m.GirdleHeightMM.Middle)
	row("smallest facet", "%s, %.3f mm across", facetName(&s.stone.Facets[m.SmallestFacet]), m.SmallestFacetMM)
	row("surface", "%.3f mm²", m.SurfaceMM2)
	row("volume", "%.3f mm³", m.VolumeMM3)
	if r.Carats != nil {
		row("weight", "%.3f ct", *r.Carats)
	} else {
		row("weight", "not known: nothing gives the density of its material")
	}
	fmt.Fprintln(w)
	t := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	fmt.Fprintln(t, "tier\tside\tangle\tfacets\tarea mm²\tindex")
	for _, g := range groups(s.stone) {
		fmt.Fprintf(t, "%s\t%s\t%s\t%d\t%.3f\t%s\n", g.tier, g.side, g.angle, g.count, g.area, strings.Join(g.indices, " "))
	}
	t.Flush()
	fmt.Fprintln(w, "\nHow the measures are taken [and who says so]")
	for _, d := range facets.Definitions() {
		fmt.Fprintf(w, "%-*s %s\n", rowName, definedRow(d.Name), hanging(d.Meaning+" ["+d.Source+"]", rowName+1))
	}
}

// definedRow returns the name of the row that shows a measure of the JSON.
func definedRow(name string) string {
	if name == "carats" {
		return "weight"
	}
	for _, unit := range []string{"_mm", "_mm2", "_mm3", "_percent"} {
		if bare, ok := strings.CutSuffix(name, unit); ok {
			name = bare
			break
		}
	}
	return strings.ReplaceAll(name, "_", " ")
}

// textWidth is how many columns running text takes.
const textWidth = 100

// hanging breaks words into lines of at most textWidth columns, all but the first of
// which begin after an indent; the first is taken to stand after it already.
func hanging(words string, indent int) string {
	var b strings.Builder
	column := indent
	for i, word := range strings.Fields(words) {
		n := utf8.RuneCountInString(word)
		switch {
		case i > 0 && column+1+n > textWidth:
			b.WriteString("\n" + strings.Repeat(" ", indent))
			column = indent
		case i > 0:
			b.WriteByte(' ')
			column++
		}
		b.WriteString(word)
		column += n
	}
	return b.String()
}

// facetName names a facet by its tier and index, or by its side in a scan.
func facetName(f *facets.Facet) string {
	switch {
	case f.Tier == "":
		return "a facet of the " + f.Side.String()
	case math.IsNaN(f.Index):
		return f.Tier
	default:
		return fmt.Sprintf("%s at index %g", f.Tier, f.Index)
	}
}

// group is a run of facets of one tier, side and angle.
type group struct {
	tier    string
	side    facets.Side
	angle   string
	count   int
	area    float64 // mm², of all of them
	indices []string
}

// groups gathers the facets by tier, side and angle in the order of the stone.
func groups(stone *facets.Stone) []*group {
	var all []*group
	find := func(tier string, side facets.Side, angle string) *group {
		for _, g := range all {
			if g.tier == tier && g.side == side && g.angle == angle {
				return g
			}
		}
		g := &group{tier: tier, side: side, angle: angle}
		all = append(all, g)
		return g
	}
	for i := range stone.Facets {
		f := &stone.Facets[i]
		name := f.Tier
		if name == "" {
			name = "–"
		}
		g := find(name, f.Side, girdleAngle(f.Normal).String())
		g.count++
		g.area += f.Area
		if !math.IsNaN(f.Index) {
			g.indices = append(g.indices, fmt.Sprintf("%g", math.Round(f.Index*1e4)/1e4))
		}
	}
	return all
}

// girdleAngle returns a facet's angle as the trade gives it: from the girdle plane,
// 0 for the table and 90 degrees for the girdle.
func girdleAngle(normal mgl64.Vec3) facets.Angle {
	return facets.Angle(math.Atan2(math.Hypot(normal[0], normal[1]), math.Abs(normal[2])))
}
