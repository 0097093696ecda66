package model

import (
	"io/fs"
	"slices"
	"testing"

	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/testdata"
)

// Every bundled plan stands in one group, and the outline that its stone has by
// measure is not at odds with the group's name.
func TestSampleGroups(t *testing.T) {
	files, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil {
		t.Fatal(err)
	}
	const readable = 9 // entries that are taken in at a glance
	seen := map[string]bool{}
	for _, g := range SampleGroups(files) {
		if len(g.Samples) > readable {
			t.Errorf("%s holds %d plans", g.Outline, len(g.Samples))
		}
		for _, s := range g.Samples {
			if !slices.Contains(SampleNames(), words.Key(s.Label)) {
				t.Errorf("%q has no words of its own in German and French: add it to SampleNames", s.Label)
			}
			if seen[s.File] {
				t.Errorf("%s stands twice", s.File)
			}
			seen[s.File] = true
			file, err := testdata.Plans().Open(s.File)
			if err != nil {
				t.Fatal(err)
			}
			plan, err := facets.ReadPlan(file, s.File)
			file.Close()
			if err != nil {
				t.Fatal(err)
			}
			stone, err := plan.Solve()
			if err != nil {
				t.Fatal(err)
			}
			m := stone.Measure()
			ratio := max(m.LengthMM, m.WidthMM) / min(m.LengthMM, m.WidthMM)
			sides := 0
			for _, f := range stone.Facets {
				if f.Side == facets.Girdle {
					sides++
				}
			}
			fits := map[string]bool{
				"Round":                ratio < 1.03 && sides >= 7,
				"Oval, pear, marquise": ratio > 1.1,
				"Cushion, square":      ratio < 1.4,
				"Five and six sides":   ratio < 1.2,
			}
			if fit, judged := fits[string(g.Outline)]; judged && !fit {
				t.Errorf("%s under %s: length over width %.3f, %d sides", s.File, g.Outline, ratio, sides)
			}
		}
	}
	if len(seen) != len(files) {
		t.Errorf("%d plans in the groups, %d bundled", len(seen), len(files))
	}
	if g := SampleGroups([]string{"novel-cut.toml"}); len(g) != 1 || g[0].Outline != "Other outlines" || g[0].Samples[0].Label != "Novel cut" {
		t.Errorf("a plan of no known outline: %+v", g)
	}
}
