package trace

import (
	"context"
	"io/fs"
	"math"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
)

// What a sample plan's light has to be; all are this project's own choices.
const (
	// safeMargin is how far above the critical angle in air the pavilion of a sample
	// lies, degrees; a machine's error and a polisher's hand take up to one.
	safeMargin = 2
	// leastReturn is what a cut returns face-up in air past a head of 10 degrees.
	// The light guides that are no cuts return next to nothing.
	leastReturn = 0.5
	mostLeaked  = 0.27
	mostWindow  = 0.03
	// noteTolerance is how far a number of the notes may lie from the truth: half of its
	// last place, and what the light's own error adds.
	angleTolerance   = 0.06
	percentTolerance = 1
)

// less is what the notes of a sample say where a facet stays below safeMargin.
const less = "less than 2 degrees above the critical angle"

var (
	criticalNote = regexp.MustCompile(`critical angle in air \((\d+\.\d)\)`)
	returnNote   = regexp.MustCompile(`returns (\d+) percent of the light past a head of 10 degrees`)
	aboveNote    = regexp.MustCompile(`(\d+(?:\.\d)?)(?: degrees)? above`)
	decimalNote  = regexp.MustCompile(`\d+\.\d+`)
)

// TestLibraryLight traces every sample cut in air and holds its notes to what comes
// out: the critical angle, each angle and difference named, the light returned.
func TestLibraryLight(t *testing.T) {
	names, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil {
		t.Fatal(err)
	}
	for _, name := range names {
		if name == "prism.toml" || name == "rod.toml" {
			continue // light guides, no cuts
		}
		t.Run(name, func(t *testing.T) { libraryLight(t, name) })
	}
}

func libraryLight(t *testing.T, name string) {
	file, err := testdata.Plans().Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer file.Close()
	plan, err := facets.ReadPlan(file, name)
	if err != nil {
		t.Fatal(err)
	}
	sol, err := plan.Solution()
	if err != nil {
		t.Fatal(err)
	}
	material, err := gems.Find(plan.Material.Key)
	if err != nil {
		t.Fatal(err)
	}
	scene := Scene{Stone: sol.Stone, Material: material}
	for _, key := range []string{"air", "water"} {
		medium, err := gems.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		scene.Surroundings = append(scene.Surroundings, Around(medium)...)
	}
	result, err := Run(context.Background(), scene,
		Settings{Head: 10 * facets.Degree, Pixels: 64, Samples: 16, Seed: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	air, water := result.Columns[0], result.Columns[1]
	if l := air.Ledger; l.Returned < leastReturn || l.Leaked > mostLeaked || l.Unresolved >= 1e-6 || air.WindowedArea > mostWindow {
		t.Errorf("in air %.3f returned, %.3f leaked, %.3g unresolved, %.3f windowed", l.Returned, l.Leaked, l.Unresolved, air.WindowedArea)
	}
	if water.Ledger.Returned >= air.Ledger.Returned+air.Ledger.Head {
		t.Errorf("water takes nothing of the light: %.3f returned", water.Ledger.Returned)
	}

	critical := air.Critical.Degrees()
	notes := strings.Join(strings.Fields(plan.Notes), " ")
	size := sol.Stone.Measure()
	facts := []float64{critical, water.Critical.Degrees(), size.Ratio} // what a decimal may be
	var pavilion []float64
	for i := range plan.Tiers {
		angle := sol.Tiers[i].Angle.Degrees()
		tier := &plan.Tiers[i]
		if tier.Temporary || angle == 0 || tier.Side == facets.Girdle {
			continue
		}
		facts = append(facts, angle)
		if tier.Side == facets.Pavilion {
			pavilion = append(pavilion, angle)
			if angle < critical+safeMargin && !strings.Contains(notes, less) {
				t.Errorf("tier %s at %.2f lies %.2f above the critical angle in air; the notes do not say why", tier.Name, angle, angle-critical)
			}
		}
	}
	above := make([]float64, len(pavilion))
	for i, a := range pavilion {
		above[i] = a - critical
		facts = append(facts, above[i])
		for _, b := range pavilion {
			facts = append(facts, math.Abs(a-b))
		}
	}
	near := func(list []float64, v, within float64) bool {
		return slices.ContainsFunc(list, func(w float64) bool { return math.Abs(v-w) <= within })
	}
	number := func(s string) float64 {
		v, err := strconv.ParseFloat(s, 64)
		if err != nil {
			t.Fatal(err)
		}
		return v
	}
	if m := criticalNote.FindStringSubmatch(notes); m == nil || !near([]float64{critical}, number(m[1]), angleTolerance) {
		t.Errorf("the notes want \"critical angle in air (%.1f)\"", critical)
	}
	if m := returnNote.FindStringSubmatch(notes); m == nil || !near([]float64{100 * air.Ledger.Returned}, number(m[1]), percentTolerance) {
		t.Errorf("the notes want \"returns %.0f percent of the light past a head of 10 degrees\"", 100*air.Ledger.Returned)
	}
	for _, m := range aboveNote.FindAllStringSubmatch(notes, -1) {
		within := 0.56
		if strings.Contains(m[1], ".") {
			within = angleTolerance
		}
		if !near(above, number(m[1]), within) {
			t.Errorf("the notes say %q; no tier lies so far above the critical angle", m[0])
		}
	}
	for _, m := range decimalNote.FindAllString(notes, -1) {
		if !near(facts, number(m), angleTolerance) {
			t.Errorf("the notes say %s, which is nothing of this stone", m)
		}
	}
}
