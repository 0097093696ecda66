package model

import (
	"slices"
	"strings"

	"pavilight/app/words"
)

// SampleGroup is bundled plans of like outlines.
type SampleGroup struct {
	Outline words.Key
	Samples []Sample
}

// Sample is one bundled plan.
type Sample struct{ Label, File string }

// sampleOutline is a group, and the first words of the names of its files.
type sampleOutline struct {
	outline words.Key
	words   string
}

// sampleOutlines are the groups in the order of the menu. "Other outlines" takes what none names.
func sampleOutlines() []sampleOutline {
	return []sampleOutline{
		{"Round", "round"},
		{"Oval, pear, marquise", "oval pear marquise"},
		{"Cushion, square", "cushion square"},
		{"Rectangle, octagon", "rectangle step barrow octagon trapezoid"},
		{"Triangle", "triangle trillion"},
		{"Five and six sides", "pentagon hexagon twist"},
		{"Other outlines", "kite shield half freeform"},
		{"Blocks to check by", "prism rod"},
	}
}

// SampleGroups sorts bundled plans, named by their files, into groups by outline. One
// that is not known goes to the other outlines. Empty groups are left out.
func SampleGroups(files []string) []SampleGroup {
	outlines := sampleOutlines()
	groups := make([]SampleGroup, len(outlines))
	others := 0
	for i, o := range outlines {
		groups[i].Outline = o.outline
		if o.outline == "Other outlines" {
			others = i
		}
	}
	for _, file := range files {
		label := strings.ReplaceAll(strings.TrimSuffix(file, ".toml"), "-", " ")
		first, _, _ := strings.Cut(label, " ")
		group := others
		for i, o := range outlines {
			if slices.Contains(strings.Fields(o.words), first) {
				group = i
			}
		}
		groups[group].Samples = append(groups[group].Samples, Sample{strings.ToUpper(label[:1]) + label[1:], file})
	}
	return slices.DeleteFunc(groups, func(g SampleGroup) bool { return len(g.Samples) == 0 })
}

// SampleNames are the labels of the bundled plans.
func SampleNames() []words.Key {
	return []words.Key{
		"Round", "Round chequer", "Round dome", "Round eleven", "Round nine", "Round seven", "Round star", "Round step",
		"Oval", "Oval keel", "Oval mixed", "Pear", "Marquise", "Marquise keel", "Cushion", "Cushion long", "Square brilliant",
		"Square step", "Barrow", "Octagon", "Rectangle", "Step", "Trapezoid", "Triangle", "Triangle step", "Trillion", "Hexagon",
		"Pentagon", "Twist", "Freeform", "Half moon", "Kite", "Shield", "Prism", "Rod",
	}
}
