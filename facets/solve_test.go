package facets

import (
	"errors"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
)

// tierOf returns what solving found for the tier of a name.
func (s *Solution) tierOf(p *Plan, name string) *SolvedTier {
	for i := range p.Tiers {
		if p.Tiers[i].Name == name {
			return &s.Tiers[i]
		}
	}
	return nil
}

// headOf is a plan's head; width 2 makes the scale 1 for a girdle at distance 1.
const headOf = "plan = 1\nname = \"t\"\nmaterial = \"quartz\"\nwidth_mm = 2\ngear = 96\n"

// tierText writes a tier of a test's plan.
func tierText(name, side, rest string) string {
	return fmt.Sprintf("\n[[tier]]\nname = %q\nside = %q\n%s\n", name, side, rest)
}

const (
	fourWays = "index = [0, 24, 48, 72]\n"
	degree   = math.Pi / 180
)

// Each stop rule puts the plane where plain trigonometry says.
func TestStopRules(t *testing.T) {
	block := headOf + tierText("G", "girdle", fourWays+"distance = 1") +
		tierText("P", "pavilion", "angle = 45\n"+fourWays+"centre = 1")
	tan := func(deg float64) float64 { return math.Tan(deg * degree) }
	cos := func(deg float64) float64 { return math.Cos(deg * degree) }
	sin := func(deg float64) float64 { return math.Sin(deg * degree) }
	close := tierText("T", "table", "distance = 0.3")
	for _, row := range []struct {
		name, text, tier string
		distance, angle  float64
		source           string
	}{
		{"distance", block + close, "T", 0.3, 0, "as written"},
		{"centre", block + close, "P", cos(45), 45, "the plane crosses the axis at 1: D = cos A"},
		{"level", block + tierText("C", "crown", "angle = 30\n"+fourWays+"level = 0.2") + close, "C",
			sin(30) + 0.2*cos(30), 30,
			"through the point (1, 0, 0.2)"},
		{"girdle over a level edge", block + tierText("C", "crown",
			"angle = 30\n"+fourWays+"girdle = 0.07") + close, "C",
			sin(30) + 0.07*cos(30), 30, "the pavilion's edge on the girdle is z = 0"},
		{"edge with the girdle", block + tierText("C", "crown",
			"angle = 30\n"+fourWays+"edge = { with = \"G\", height = 0.2 }") + close,
			"C", sin(30) + 0.2*cos(30), 30, "the same as level"},
		{"edge with a pavilion step", block + tierText("Q", "pavilion",
			"angle = 30\n"+fourWays+"edge = { with = \"P\", height = -0.6 }") + close,
			"Q", sin(30)*0.4 + 0.6*cos(30), 30, "through the point (0.4, 0, -0.6) of the 45 degree facet"},
		{"meet a corner", block + tierText("C", "crown", "angle = 30\n"+fourWays+"level = 0.2") + close +
			tierText("D", "crown",
				"angle = 20\nindex = [12, 36, 60, 84]\nmeet = [\"C@0\", \"C@24\", \"G@0\"]"), "D",
			sin(20)*math.Sqrt2 + 0.2*cos(20), 20, "through the corner (1, 1, 0.2)"},
		{"meet by names alone", block + tierText("C", "crown",
			"angle = 30\n"+fourWays+"level = 0.2") + close +
			tierText("D", "crown", "angle = 20\nindex = [12, 36, 60, 84]\nmeet = [\"C\", \"G\"]"), "D",
			sin(20)*math.Sqrt2 + 0.2*cos(20), 20,
			"both neighbours are equally near and share the corner (1, 1, 0.2)"},
		{"meet on the axis", block + tierText("Q", "pavilion",
			"angle = 40\nindex = [12, 36, 60, 84]\nmeet = [\"P\", \"axis\"]") + close, "Q",
			cos(40), 40, "through the culet point (0, 0, -1)"},
		{"meet where one plane pierces the axis", block + tierText("Q", "pavilion",
			"angle = 40\nindex = [12, 36, 60, 84]\nmeet = [\"P@24\", \"axis\"]") + close, "Q",
			cos(40), 40, "the axis counts for two planes"},
		{"table", block + tierText("C", "crown", "angle = 45\n"+fourWays+"level = 0.2") + tierText("T",
			"table", "table = 0.6"), "T",
			0.2 + 0.4, 0, "a roof of 45 degrees from half width 1 to 0.6"},
		{"culet", block + close + tierText("U", "pavilion", "culet = 0.1"), "U", 0.9, 0,
			"a roof of 45 degrees from half width 1 to 0.1"},
		{"table cut back by later facets", block + tierText("C", "crown",
			"angle = 45\n"+fourWays+"level = 0.2") + tierText("T", "table", "table = 0.6") +
			tierText("D", "crown", "angle = 20\n"+fourWays+"edge = { with = \"C\", height = 0.4 }"), "T",
			0.4 + 0.2*tan(20), 0,
			"45 degrees to height 0.4 and half width 0.8, then 20 degrees to half width 0.6"},
	} {
		t.Run(row.name, func(t *testing.T) {
			p, err := readText(row.text)
			if err != nil {
				t.Fatal(err)
			}
			sol, err := p.Solution()
			if err != nil {
				t.Fatal(err)
			}
			got := sol.tierOf(p, row.tier)
			if d := math.Abs(got.Distance - row.distance); !(d < 1e-11) {
				t.Errorf("distance %.12f, want %.12f (%s)", got.Distance, row.distance, row.source)
			}
			if a := math.Abs(got.Angle.Degrees() - row.angle); !(a < 1e-10) {
				t.Errorf("angle %.12f, want %.12f", got.Angle.Degrees(), row.angle)
			}
			closeTo(t, "scale", sol.Scale, 1, 1e-12, "the girdle at distance 1 is 2 wide, and so is the plan")
			checkStone(t, sol.Stone, onTheirPlanes)
		})
	}
}

// Angles and indices that corners give agree with the closed construction of
// the round brilliant.
func TestSolvedAngles(t *testing.T) {
	_, star, upper, lower := brilliantT53()
	k, rl := math.Cos(math.Pi/8), 0.25
	tip := (1 - rl*k) * math.Tan(40.75*degree) // depth of the lower halves' tips
	text := headOf +
		tierText("G", "girdle",
			"index = 3\nfold = 8\nmirror = true\ndistance = "+number(math.Cos(math.Pi/16))) +
		tierText("P", "pavilion", fmt.Sprintf("angle = 40.75\nindex = 0\nfold = 8\ncentre = %s",
			number(math.Tan(40.75*degree)))) +
		// A trial flat marks the height of the tips on the ridges between the mains.
		tierText("F", "pavilion", fmt.Sprintf("angle = 0\ndistance = %s\ntemporary = true",
			number((1-math.Hypot(rl, 0)*k)*math.Tan(40.75*degree)))) +
		tierText("L", "pavilion",
			"index = 3\nfold = 8\nmirror = true\nmeet = [[\"P@0\", \"G@3\", \"G@93\"], [\"P@0\", \"P@12\", \"F\"]]") +
		tierText("M", "crown",
			fmt.Sprintf("angle = 34.5\nindex = 0\nfold = 8\nmeet = [\"P@0\", \"G@3\", \"G@93\"]")) +
		tierText("T", "table", "distance = 0.3")
	p, err := readText(text)
	if err != nil {
		t.Fatal(err)
	}
	sol, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	got := sol.tierOf(p, "L").Angle
	if d := math.Abs((got - lower).Degrees()); d > 1e-9 {
		t.Errorf("lower halves at %.9f°, want %.9f (tips at depth %g)", got.Degrees(), lower.Degrees(), tip)
	}
	if star <= 0 || upper <= 0 {
		t.Error("the closed construction is gone")
	}
}

// With three corners and neither angle nor index both are found; the facet of
// the cube's corner has the octahedron's angle.
func TestSolvedIndex(t *testing.T) {
	text := headOf + tierText("G", "girdle", fourWays+"distance = 1") +
		tierText("B", "pavilion", "angle = 0\ndistance = 1") + tierText("T", "table", "distance = 1") +
		// Trial facets mark the middles of three edges.
		tierText("X", "crown", "angle = 45\nindex = 0\ndistance = 1.06066017177982128\ntemporary = true") +
		tierText("Y", "crown", "angle = 45\nindex = 24\ndistance = 1.06066017177982128\ntemporary = true") +
		tierText("Z", "girdle", "index = 12\ndistance = 1.06066017177982128\ntemporary = true") +
		tierText("C", "crown",
			"meet = [[\"X\", \"Z\", \"G@0\"], [\"Y\", \"Z\", \"G@24\"], [\"X\", \"Y\", \"T\"]]")
	p, err := readText(text)
	if err != nil {
		t.Fatal(err)
	}
	sol, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	got := sol.tierOf(p, "C")
	if want := math.Atan(math.Sqrt2) / degree; math.Abs(got.Angle.Degrees()-want) > 1e-9 ||
		len(got.Index) != 1 || math.Abs(got.Index[0]-12) > 1e-9 {
		t.Errorf("angle %v, index %v; want %.6f°, 12 (the octahedron's face, atan √2)", got.Angle.Degrees(),
			got.Index, want)
	}
}

// Marks that fit corners which give different cuts, corners beyond the unknowns
// that miss, and facets of a tier whose own corners miss are told.
func TestMisses(t *testing.T) {
	block := headOf + tierText("G", "girdle", fourWays+"distance = 1") +
		tierText("P", "pavilion", "angle = 45\n"+fourWays+"centre = 1")
	crown := tierText("C", "crown", "angle = 30\n"+fourWays+"level = 0.2")
	table := tierText("T", "table", "distance = 0.4")
	// The ends stand farther out than the sides.
	oblong := headOf + tierText("G", "girdle", "index = [24, 72]\ndistance = 1") + tierText("H", "girdle",
		"index = [0, 48]\ndistance = 1.001") +
		tierText("P", "pavilion", "angle = 45\n"+fourWays+"centre = 1") + table
	for _, row := range []struct{ name, text, tier, why string }{
		{"two corners beside the index", block + crown + table + tierText("D", "crown",
			"angle = 50\nindex = 6\nmeet = [\"C@0\", \"C\", \"G\", \"T\"]"),
			"D", "share no corner on the stone"},
		{"a tie", block + crown + table + tierText("J", "crown", "angle = 35\nindex = 14\ndistance = 0.84") +
			tierText("D", "crown", "angle = 25\nindex = 12\nmeet = [\"C\", \"T\", \"J\"]"), "D",
			"fit several corners that give different cuts"},
		{"a corner beyond the unknowns that misses", block + crown + table +
			tierText("D", "crown",
				"angle = 20\nindex = [12]\nmeet = [[\"C@0\", \"C@24\", \"G@0\"], [\"C@48\", \"C@72\", \"T\"]]"),
			"D", "misses corner C@48 C@72 T by"},
		{"corners on the wrong side", block + crown + table +
			tierText("D", "crown",
				"index = [60]\nmeet = [[\"C@0\", \"C@24\", \"G@0\"], [\"C@0\", \"C@24\", \"T\"]]"), "D",
			"would need"},
		{"corners level across the facet", block + crown + table +
			tierText("D", "crown",
				"index = [0]\nmeet = [[\"C@0\", \"C@24\", \"G@0\"], [\"C@0\", \"C@72\", \"G@0\"]]"), "D",
			"every angle fits"},
		{"no corner at another index", block + tierText("C", "crown",
			"angle = 30\nindex = [0, 24, 48]\nlevel = 0.2") +
			tierText("D", "crown", "angle = 20\nindex = [12, 66]\nmeet = [\"C\", \"G\"]") + table, "D",
			"the facet at index 66 finds no such corner"},
		{"an edge with a level tier", block + table + tierText("C", "crown",
			"angle = 30\n"+fourWays+"edge = { with = \"T\", height = 0.2 }"),
			"C", "that tier is level"},
		{"an edge between equal slopes", block + crown + tierText("D", "crown",
			"angle = 30\n"+fourWays+"edge = { with = \"C\", height = 0.3 }") + table,
			"D", "the same slope"},
		{"an edge that would not be level", block + crown + tierText("D", "crown",
			"angle = 20\nindex = [12, 36, 60, 84]\nedge = { with = \"C\", height = 0.3 }") + table,
			"D", "it has no facet at index 12"},
		{"a facet that is gone", block + tierText("C", "crown",
			"angle = 30\n"+fourWays+"level = 0.2\ntemporary = true") + tierText("T", "table",
			"distance = 0.1") +
			tierText("D", "crown", "angle = 20\nindex = 0\nmeet = [\"C@0\", \"T\", \"G@0\"]"), "D",
			"nothing of that facet is left"},
		{"a tier that is gone", block + tierText("C", "crown",
			"angle = 30\n"+fourWays+"level = 0.2\ntemporary = true") + tierText("T", "table",
			"distance = 0.1") +
			tierText("D", "crown", "angle = 20\nindex = 0\nmeet = [\"C\", \"T\", \"G\"]"), "D",
			"nothing of that tier is left"},
		{"a girdle left over nothing", headOf + tierText("G", "girdle",
			fourWays+"distance = 1") + tierText("C", "crown", "angle = 30\n"+fourWays+"girdle = 0.1") + table,
			"C", "the other side of the girdle is not cut yet"},
		{"levels that differ", strings.Replace(oblong, "1.001", "1.1", 1) + tierText("C", "crown",
			"angle = 50\n"+fourWays+"level = 0.2"), "C", "misses its place by the rule level"},
		{"a fully visible miss", strings.Replace(oblong, "1.001", "1.05", 1) + tierText("C", "crown",
			"angle = 50\n"+fourWays+"level = 0.2"), "C", "0.038 mm"},
	} {
		t.Run(row.name, func(t *testing.T) {
			p, err := readText(row.text)
			if err != nil {
				t.Fatal(err)
			}
			_, err = p.Solution()
			var fs Faults
			if !errors.As(err, &fs) {
				t.Fatalf("got %v, want faults", err)
			}
			for _, f := range fs {
				if f.Tier == row.tier && strings.Contains(f.Why, row.why) {
					return
				}
			}
			t.Errorf("got %v, want tier %s: %s", err, row.tier, row.why)
		})
	}
	// 0.001 beyond is 0.001 sin 50 on the facet: below what a cutter sees, so
	// noted only.
	sol := solveText(t, oblong+tierText("C", "crown", "angle = 50\n"+fourWays+"level = 0.2"))
	sol.Gaps = slices.DeleteFunc(sol.Gaps, func(g Gap) bool { return g.Tier == "" })
	if len(sol.Gaps) != 2 || math.Abs(sol.Gaps[0].MM-0.001*math.Sin(50*degree)) > 1e-9 {
		t.Errorf("gaps %+v, want two of %.6f mm", sol.Gaps, 0.001*math.Sin(50*degree))
	}
}

// Tuning: an angle changes, the corners stay. In the round plan the crown's
// halves, mains, stars and table meet as before, whatever the mains' angle.
func TestCornersAreKept(t *testing.T) {
	p, before := solveFile(t, "../testdata/plans/round.toml")
	for _, change := range []struct {
		tier  string
		angle float64
	}{{"P1", 41}, {"P1", 41.9}, {"C2", 33}, {"C2", 36.2}, {"C1", 40.2}, {"P2", 42.2}} {
		q := p.Clone()
		for i := range q.Tiers {
			if q.Tiers[i].Name == change.tier {
				q.Tiers[i].Angle = Angle(change.angle) * Degree
			}
		}
		sol, err := q.Solution()
		if err != nil {
			t.Errorf("%s at %g°: %v", change.tier, change.angle, err)
			continue
		}
		a, b := before.Stone, sol.Stone
		if len(a.Facets) != len(b.Facets) || len(a.Corners) != len(b.Corners) ||
			len(a.Edges) != len(b.Edges) {
			t.Errorf("%s at %g°: %d facets, %d corners, %d edges; before %d, %d, %d", change.tier,
				change.angle,
				len(b.Facets), len(b.Corners), len(b.Edges), len(a.Facets), len(a.Corners), len(a.Edges))
		}
		for i := range a.Facets {
			if len(a.Facets[i].Corners) != len(b.Facets[i].Corners) {
				t.Errorf("%s at %g°: facet %s has another shape", change.tier, change.angle,
					facetName(a.Facets[i].Tier, a.Facets[i].Index))
				break
			}
		}
		if len(sol.Gaps) > 0 {
			t.Errorf("%s at %g°: gaps %v", change.tier, change.angle, sol.Gaps)
		}
		if p.Tiers[0].Angle != 41.5*Degree {
			t.Fatal("the original changed")
		}
	}
}

// The tangent rule of cutters: to change one side's angles and keep the view
// from above, multiply all tangents by one number; it is a stretch along z.
// All that a stretch keeps is kept: the other side, every facet's area seen from above, the corners; heights
// and volume of the side grow by the ratio.
func TestStretched(t *testing.T) {
	for _, file := range planFiles(t) {
		p, before := solveFile(t, file)
		a := before.Stone.Measure()
		if a.GirdleHeightMM.Max-a.GirdleHeightMM.Min != 0 && a.GirdleMM.Max-a.GirdleMM.Min > 1e-9 ||
			a.Ratio > 2 {
			continue // a scalloped rim lies on both sides of the plane that stays, the prism and the rod have no sides
		}
		for _, side := range []Side{Pavilion, Crown} {
			for _, ratio := range []float64{0.93, 1.04} {
				q, err := p.Stretched(side, ratio)
				if err != nil {
					t.Errorf("%s: %v", file, err)
					continue
				}
				sol, err := q.Solution()
				if err != nil {
					t.Errorf("%s, %v × %g: %v", file, side, ratio, err)
					continue
				}
				b := sol.Stone.Measure()
				crown, pavilion := 1.0, ratio
				if side == Crown {
					crown, pavilion = ratio, 1
				}
				closeTo(t, file+": crown height", b.CrownHeightMM, crown*a.CrownHeightMM, 1e-9, "stretch")
				closeTo(t, file+": pavilion depth", b.PavilionDepthMM, pavilion*a.PavilionDepthMM, 1e-9,
					"stretch")
				closeTo(t, file+": girdle", b.GirdleMM.Max, a.GirdleMM.Max, 1e-9, "the rim stays")
				for i := range p.Tiers {
					closeTo(t, file+": "+p.Tiers[i].Name+" seen from above",
						sol.Stone.seenArea(p.Tiers[i].Name),
						before.Stone.seenArea(p.Tiers[i].Name), 1e-8, "the view from above stays")
				}
				if len(sol.Stone.Corners) != len(before.Stone.Corners) ||
					len(sol.Stone.Edges) != len(before.Stone.Edges) {
					t.Errorf("%s, %v × %g: corners or edges changed", file, side, ratio)
				}
			}
		}
	}
	p, _ := solveFile(t, "../testdata/plans/round.toml")
	// Examples printed with the rule in the trade: from 43 to 41 takes 44.5 to
	// 42.492; from 42 to 37 takes 47 to 41.907 and 27 to 23.095.
	set := map[string]float64{"P1": 43, "P2": 44.5, "C2": 42, "C1": 47, "C3": 27}
	for i := range p.Tiers {
		if a, ok := set[p.Tiers[i].Name]; ok {
			p.Tiers[i].Angle = Angle(a) * Degree
		}
	}
	q, err := p.Stretched(Pavilion, math.Tan(41*degree)/math.Tan(43*degree))
	if err != nil {
		t.Fatal(err)
	}
	if q, err = q.Stretched(Crown, math.Tan(37*degree)/math.Tan(42*degree)); err != nil {
		t.Fatal(err)
	}
	want := map[string]float64{"P1": 41, "P2": 42.492, "C2": 37, "C1": 41.907, "C3": 23.095}
	for i := range q.Tiers {
		if w, ok := want[q.Tiers[i].Name]; ok && math.Abs(q.Tiers[i].Angle.Degrees()-w) > 5e-4 {
			t.Errorf("%s became %v, want %g° (printed to a thousandth)", q.Tiers[i].Name,
				q.Tiers[i].Angle.Degrees(), w)
		}
	}
	for _, bad := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := p.Stretched(Crown, bad); err == nil {
			t.Errorf("a stretch by %g passed", bad)
		}
	}
	if _, err := p.Stretched(Girdle, 1.1); err == nil {
		t.Error("a stretched girdle passed")
	}
}

// seenArea returns the area of a tier's facets projected along z.
func (s *Stone) seenArea(tier string) float64 {
	sum := 0.0
	for _, f := range s.Facets {
		if f.Tier == tier {
			sum += f.Area * math.Abs(f.Normal[2])
		}
	}
	return sum
}

// The same plan in other units of length, and far larger or smaller, is the
// same stone.
func TestPlanUnits(t *testing.T) {
	for _, file := range planFiles(t) {
		p, sol := solveFile(t, file)
		for _, unit := range []float64{25.4, 1e-4, 1e5} {
			q := p.Clone()
			for i := range q.Tiers {
				if r := q.Tiers[i].Stop.Rule; r != StopTable && r != StopCulet {
					q.Tiers[i].Stop.Value *= unit
				}
			}
			got, err := q.Solution()
			if err != nil {
				t.Errorf("%s × %g: %v", file, unit, err)
				continue
			}
			closeTo(t, fmt.Sprintf("%s × %g: volume", filepath.Base(file), unit), got.Stone.Volume(),
				sol.Stone.Volume(), 1e-10, "scaling")
			if len(got.Stone.Corners) != len(sol.Stone.Corners) {
				t.Errorf("%s × %g: %d corners, want %d", file, unit, len(got.Stone.Corners),
					len(sol.Stone.Corners))
			}
		}
	}
}

// A turned plan gives the turned stone: all indices moved by one tooth.
func TestTurnedPlan(t *testing.T) {
	for _, file := range planFiles(t) {
		p, sol := solveFile(t, file)
		q := p.Clone()
		for i := range q.Tiers {
			tier := &q.Tiers[i]
			if len(tier.Index) > 0 && sol.Tiers[i].Angle != 0 {
				tier.Index, tier.Fold, tier.Mirror = nil, 0, false
				for _, x := range sol.Tiers[i].Index {
					tier.Index = append(tier.Index, math.Mod(x+5, float64(p.Gear)))
				}
			}
			for _, c := range tier.Stop.Corners {
				for k := range c {
					c[k].Index = math.Mod(c[k].Index+5, float64(p.Gear))
				}
			}
		}
		got, err := q.Solution()
		if err != nil {
			t.Errorf("%s: %v", file, err)
			continue
		}
		closeTo(t, filepath.Base(file)+": volume", got.Stone.Volume(), sol.Stone.Volume(), 1e-11,
			"turning keeps the volume")
		turn := mgl64.Rotate3DZ(azimuth(5, p.Gear).Radians())
		for i, f := range sol.Stone.Facets {
			if d := turn.Mul3x1(f.Normal).Sub(got.Stone.Facets[i].Normal).Len(); d > 1e-9 {
				t.Errorf("%s: normal %d is off by %g", file, i, d)
				break
			}
		}
	}
}

// Order and mirrors of the samples' symmetry, by their design.
func TestSymmetry(t *testing.T) {
	for _, row := range []struct {
		plan           string
		order, mirrors int
		first          float64 // azimuth of the first mirror, degrees
	}{
		{"round", 8, 8, 0}, {"step", 2, 2, 0}, {"oval", 2, 2, 0}, {"triangle", 3, 3, 0}, {"cushion", 4, 4, 0},
		{"twist", 6, 0, 0}, {"pear", 1, 1, 0}, {"freeform", 1, 0, 0}, {"round-seven", 7, 7, 0}, {"round-eleven", 11, 11, 0},
		{"prism", 2, 2, 0}, {"rod", 4, 4, 0},
	} {
		p, sol := solveFile(t, "../testdata/plans/"+row.plan+".toml")
		y := sol.Stone.Symmetry()
		if y.Order != row.order || len(y.Mirrors) != row.mirrors {
			t.Errorf("%s: order %d with %d mirrors, want %d with %d", row.plan, y.Order, len(y.Mirrors),
				row.order, row.mirrors)
			continue
		}
		for k, m := range y.Mirrors {
			if want := row.first + 180*float64(k)/float64(row.order); math.Abs(m.Degrees()-want) > 1e-6 {
				t.Errorf("%s: mirror %d at %v, want %g°", row.plan, k, m, want)
			}
		}
		if off := p.OffTeeth(sol); len(off) > 0 {
			t.Errorf("%s: %v falls between teeth", row.plan, off[0])
		}
	}
	// A single facet moved breaks all of it.
	p, _ := solveFile(t, "../testdata/plans/round.toml")
	p.Tiers[0].Index[0] = 0.5
	p.Tiers = p.Tiers[:2]
	p.Tiers = append(p.Tiers, Tier{Name: "T", Side: Table, HasAngle: true, Stop: Stop{Rule: StopDistance,
		Value: 0.2}})
	sol, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	if y := sol.Stone.Symmetry(); y.Order != 1 || len(y.Mirrors) > 0 {
		t.Errorf("a facet half a tooth off leaves order %d and %d mirrors", y.Order, len(y.Mirrors))
	}
	if off := p.OffTeeth(sol); len(off) != 1 || off[0].Tier != "P1" ||
		math.Abs(math.Abs(off[0].Off.Degrees())-1.875) > 1e-9 {
		t.Errorf("off teeth %v, want P1@0.5 by 1.875°", off)
	}
}

// Gears: 5.4 of any index chart: 360/N degrees a tooth. From 96 to 64 teeth the
// eight-fold round keeps all its facets; to 80 its halves fall between teeth.
func TestOtherGear(t *testing.T) {
	p, sol := solveFile(t, "../testdata/plans/round.toml")
	q, off, err := p.ToGear(64, false)
	if err != nil || len(off) > 0 {
		t.Fatalf("64 teeth: %v, %v", off, err)
	}
	got, err := q.Solution()
	if err != nil {
		t.Fatal(err)
	}
	closeTo(t, "volume on 64 teeth", got.Stone.Volume(), sol.Stone.Volume(), 1e-12, "the same stone")
	if q.Tiers[0].Index[1] != 8 {
		t.Errorf("index 12 of 96 became %g of 64, want 8", q.Tiers[0].Index[1])
	}
	q, off, err = p.ToGear(80, false)
	if err != nil {
		t.Fatal(err)
	}
	if len(off) != 48 || math.Abs(math.Abs(off[0].Off.Degrees())-2.25) > 1e-9 {
		t.Errorf("80 teeth: %d facets off, the first %v; want 48 by half a tooth of 4.5°", len(off), off[0])
	}
	if got, err = q.Solution(); err != nil {
		t.Fatal(err)
	}
	closeTo(t, "volume on 80 teeth", got.Stone.Volume(), sol.Stone.Volume(), 1e-12,
		"fractions keep the stone")
	q, _, err = p.ToGear(80, true)
	if err != nil {
		t.Fatal(err)
	}
	if got, err = q.Solution(); err != nil {
		t.Fatal(err)
	}
	if y := got.Stone.Symmetry(); y.Order != 8 || len(y.Mirrors) != 8 ||
		got.Stone.Volume() == sol.Stone.Volume() {
		t.Errorf("snapped to 80 teeth: order %d, %d mirrors, the same volume: %v", y.Order, len(y.Mirrors),
			got.Stone.Volume() == sol.Stone.Volume())
	}
	if _, _, err := p.ToGear(1, false); err == nil {
		t.Error("a gear of one tooth passed")
	}
}

func TestFoldAndMirror(t *testing.T) {
	for _, row := range []struct {
		index  []float64
		fold   int
		mirror bool
		gear   int
		want   string
	}{
		{[]float64{3}, 4, true, 96, "[3 27 51 75 93 21 45 69]"},
		{[]float64{0}, 4, true, 96, "[0 24 48 72]"},
		{[]float64{12}, 4, true, 96, "[12 36 60 84]"},
		{[]float64{96}, 0, false, 96, "[0]"},
		{[]float64{0, 96, 24}, 0, false, 96, "[0 24]"},
		{[]float64{1}, 7, false, 77, "[1 12 23 34 45 56 67]"},
		{[]float64{0}, 3, false, 64, "[0 21.333333333333332 42.666666666666664]"},
		{nil, 0, false, 96, "[0]"},
	} {
		tier := Tier{Index: row.index, Fold: row.fold, Mirror: row.mirror}
		if got := fmt.Sprint(tier.Indices(row.gear)); got != row.want {
			t.Errorf("%v fold %d mirror %v on %d: got %s, want %s", row.index, row.fold, row.mirror, row.gear,
				got, row.want)
		}
	}
}

// A plan that was built by the program and not read may be anything; solving
// tells what is wrong.
func TestSolveUnreadPlans(t *testing.T) {
	good := func() *Plan {
		p, err := readText(barrel)
		if err != nil {
			t.Fatal(err)
		}
		return p
	}
	for _, row := range []struct {
		name   string
		change func(*Plan)
	}{
		{"no tier", func(p *Plan) { p.Tiers = nil }},
		{"no gear", func(p *Plan) { p.Gear = 0 }},
		{"no width", func(p *Plan) { p.WidthMM = 0 }},
		{"width not a number", func(p *Plan) { p.WidthMM = math.NaN() }},
		{"angle not a number", func(p *Plan) { p.Tiers[1].Angle = Angle(math.NaN()) }},
		{"angle of 200 degrees", func(p *Plan) { p.Tiers[1].Angle = 200 * Degree }},
		{"index not a number", func(p *Plan) { p.Tiers[1].Index[0] = math.NaN() }},
		{"infinite length", func(p *Plan) { p.Tiers[1].Stop.Value = math.Inf(1) }},
		{"no rule", func(p *Plan) { p.Tiers[1].Stop = Stop{} }},
		{"unknown side", func(p *Plan) { p.Tiers[1].Side = 9 }},
		{"no such tier to meet", func(p *Plan) {
			p.Tiers[1].Stop = Stop{Rule: StopMeet, Corners: [][]Mark{{{Tier: "Z"}, {Tier: "Y"}, {Tier: "X"}}}}
		}},
		{"meet without corners", func(p *Plan) { p.Tiers[1].Stop = Stop{Rule: StopMeet} }},
		{"edge with nothing", func(p *Plan) { p.Tiers[2].Stop = Stop{Rule: StopEdge} }},
		{"no angle", func(p *Plan) { p.Tiers[1].HasAngle = false }},
		{"no index", func(p *Plan) { p.Tiers[1].Index = nil }},
		{"an upright crown with a centre point", func(p *Plan) {
			p.Tiers[2].Angle,
				p.Tiers[2].Stop = 90*Degree, Stop{Rule: StopCentre, Value: 1}
		}},
		{"3,000 facets", func(p *Plan) { p.Tiers[1].Fold = 3000 }},
		{"all angles zero", func(p *Plan) {
			for i := range p.Tiers {
				p.Tiers[i].Angle = 0
			}
		}},
	} {
		t.Run(row.name, func(t *testing.T) {
			p := good()
			row.change(p)
			_, err := p.Solve()
			var fs Faults
			if !errors.As(err, &fs) || len(fs) == 0 {
				t.Errorf("got %v, want faults", err)
			}
		})
	}
}

func ExamplePlan_Solve() {
	p, err := OpenPlan("../testdata/plans/round.toml")
	if err != nil {
		fmt.Println(err)
		return
	}
	s, err := p.Solve()
	if err != nil {
		fmt.Println(err)
		return
	}
	m := s.Measure()
	fmt.Printf("%s: %d facets, table %.1f %%, depth %.1f %%\n", s.Name, len(s.Facets), m.TablePercent,
		m.DepthPercent)
	// Output: Harbour Eight: 73 facets, table 56.1 %, depth 62.1 %
}
