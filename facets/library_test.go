package facets

import (
	"cmp"
	"fmt"
	"math"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// What a sample plan has to keep to beside solving; all are this project's own
// choices of what a cutter can hold and set.
const (
	leastFacetMM  = 0.3  // width of the narrowest facet; a girdle's height is judged by leastGirdleMM
	leastGirdleMM = 0.14 // a thinner girdle chips in setting (common practice, no source)
)

// notCuts are the sample plans that light guides are checked by; they are no cuts.
var notCuts = []string{"prism.toml", "rod.toml"}

// cut is a sample plan that is meant to be cut.
type cut struct {
	file string
	plan *Plan
	sol  *Solution
	size Measures
}

// library returns the sample plans that are meant to be cut, solved.
func library(t *testing.T) []cut {
	t.Helper()
	var all []cut
	for _, file := range planFiles(t) {
		name := filepath.Base(file)
		if slices.Contains(notCuts, name) {
			continue
		}
		p, sol := solveFile(t, file)
		all = append(all, cut{name, p, sol, sol.Stone.Measure()})
	}
	return all
}

// TestLibraryCanBeCut: no near misses, whole teeth, nothing too small to hold, and
// depths measured from the stone, not from the drawing.
func TestLibraryCanBeCut(t *testing.T) {
	for _, c := range library(t) {
		for i := range c.plan.Tiers {
			tier := &c.plan.Tiers[i]
			if tier.Stop.Rule == StopDistance && i > 0 && tier.Side != Girdle {
				t.Errorf("%s: tier %s stops by distance; only the first tier and the outline may", c.file, tier.Name)
			}
		}
		for _, g := range c.sol.Gaps {
			t.Errorf("%s: %s@%g misses %s by %g mm", c.file, g.Tier, g.Index, g.With, g.MM)
		}
		for _, o := range c.plan.OffTeeth(c.sol) {
			t.Errorf("%s: %v", c.file, o)
		}
		s := c.sol.Stone
		for i := range s.Facets {
			f := &s.Facets[i]
			if w := s.facetWidth(i); f.Side != Girdle && w < leastFacetMM {
				t.Errorf("%s: %s is %.3f mm across, want at least %g", c.file, facetName(f.Tier, f.Index), w, leastFacetMM)
			}
		}
		if c.size.GirdleMM.Min < leastGirdleMM {
			t.Errorf("%s: the girdle is %.3f mm thin, want at least %g", c.file, c.size.GirdleMM.Min, leastGirdleMM)
		}
		if c.plan.Name == "" || c.plan.Author == "" || len(c.plan.Notes) < 200 {
			t.Errorf("%s: a sample has a name, an author and notes that give its reasons", c.file)
		}
	}
}

// By how much two cuts differ at least, as unlike tells it. The sine of an angle near 40
// degrees changes by 0.013 a degree.
const (
	likeShape = 0.01 // a degree in any one facet is another shape
	likeCut   = 0.05 // but where the facets join in the same way, it takes four to be another cut
)

// TestLibraryIsVaried: many cuts, none of them another one scaled or turned, with many
// ways of joining facets, and the kinds that a cutter would look for.
func TestLibraryIsVaried(t *testing.T) {
	all := library(t)
	if len(all) < 24 {
		t.Errorf("%d cuts, want at least 24", len(all))
	}
	structures := map[string][]string{}
	names, materials := map[string]bool{}, map[string]bool{}
	steps, bulging, uneven, oddGear, single := 0, 0, 0, 0, 0
	for i, c := range all {
		m := meetStructure(c.sol.Stone)
		for _, d := range all[:i] {
			least := likeShape
			if slices.Equal(m, meetStructure(d.sol.Stone)) {
				least = likeCut
			}
			if off := unlike(&c, &d); off < least {
				t.Errorf("%s is %s again: their facets differ by %g at most, want %g", c.file, d.file, off, least)
			}
		}
		structures[strings.Join(m, ", ")] = append(structures[strings.Join(m, ", ")], c.file)
		if names[c.plan.Name] {
			t.Errorf("%s: another sample is called %q", c.file, c.plan.Name)
		}
		names[c.plan.Name] = true
		materials[c.plan.Material.Key] = true
		below, above := rows(c.sol.Stone, Pavilion), rows(c.sol.Stone, Crown)
		if len(below) >= 3 && len(above) >= 3 {
			steps++
		}
		if len(below) >= 3 && below[0] > 70*Degree {
			bulging++
		}
		sym := c.sol.Stone.Symmetry()
		if len(sym.Mirrors) == 0 {
			uneven++
		}
		if sym.Order == 1 && len(sym.Mirrors) == 1 {
			single++ // pear, kite, shield, half moon, trapezoid
		}
		if c.plan.Gear%2 == 1 {
			oddGear++
		}
	}
	t.Logf("%d cuts in %d meet structures, for %d materials", len(all), len(structures), len(materials))
	for _, row := range []struct {
		kind       string
		got, least int
	}{
		{"meet structures", len(structures), 12},
		{"materials", len(materials), 12},
		{"step cuts with three rows a side", steps, 2},
		{"bulging pavilions", bulging, 1},
		{"cuts without a mirror", uneven, 1},
		{"cuts with one mirror and no fold", single, 2},
		{"cuts on an odd gear", oddGear, 1},
	} {
		if row.got < row.least {
			t.Errorf("%d %s, want at least %d: %v", row.got, row.kind, row.least, structures)
		}
	}
}

// rows returns the angles of the facets of a side that stand at one index, girdle
// first, where most do so: the rows of a step cut.
func rows(s *Stone, side Side) []Angle {
	at := map[int64][]Angle{}
	var best []Angle
	for i := range s.Facets {
		f := &s.Facets[i]
		if f.Side != side || math.IsNaN(f.Index) {
			continue
		}
		k := int64(math.Round(f.Index / sameTooth))
		at[k] = append(at[k], Angle(math.Acos(math.Abs(f.Normal[2]))))
		if len(at[k]) > len(best) {
			best = at[k]
		}
	}
	slices.SortFunc(best, func(a, b Angle) int { return cmp.Compare(b, a) })
	return best
}

// unlike returns how far two cuts are from being one cut turned, mirrored or scaled:
// the largest difference between their facets' slopes, distances (as shares of the
// width) and areas (as shares of its square), both sorted, none of which depends on
// size or turn. Cuts with another number of facets are infinitely far apart.
func unlike(a, b *cut) float64 {
	list := func(c *cut) [][3]float64 {
		w := c.size.WidthMM
		var l [][3]float64
		for i := range c.sol.Stone.Facets {
			f := &c.sol.Stone.Facets[i]
			// Rounding must not decide the order of facets that are images of each other.
			l = append(l, [3]float64{math.Round(f.Normal[2]*1e6) / 1e6, math.Round(f.Distance/w*1e6) / 1e6, f.Area / w / w})
		}
		slices.SortFunc(l, func(x, y [3]float64) int { return slices.Compare(x[:], y[:]) })
		return l
	}
	la, lb := list(a), list(b)
	if len(la) != len(lb) {
		return math.Inf(1)
	}
	far := 0.0
	for i := range la {
		for k := range la[i] {
			far = math.Max(far, math.Abs(la[i][k]-lb[i][k]))
		}
	}
	return far
}

// meetStructure returns the kinds of meets that a stone has: for each corner, how many
// facets of each side come together there. Angles, outline, folds and the number of
// like rows do not matter; corners on the axis, where the fold decides, do not count.
// Cuts that differ here are joined in different ways; cuts that agree may still be.
func meetStructure(s *Stone) []string {
	_, reach := s.reach()
	meets := make([][Table + 1]int, len(s.Corners))
	for i := range s.Facets {
		for _, c := range s.Facets[i].Corners {
			meets[c][s.Facets[i].Side]++
		}
	}
	var kinds []string
	for i, c := range s.Corners {
		if math.Hypot(c[0], c[1]) > sameFacet*reach {
			m := meets[i]
			kinds = append(kinds, fmt.Sprintf("%d pavilion %d girdle %d crown %d table", m[Pavilion], m[Girdle], m[Crown], m[Table]))
		}
	}
	slices.Sort(kinds)
	return slices.Compact(kinds)
}
