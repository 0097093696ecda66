package model

import (
	"fmt"
	"strconv"
	"strings"
)

// Carats returns the subject's weight, false where its density is not known.
func (s Subject) Carats() (float64, bool) {
	if s.Stone == nil || s.Material == nil || s.Material.Density == 0 {
		return 0, false
	}
	const (
		mm3PerCM3  = 1000
		gramsCarat = 0.2
	)
	return s.Measures.VolumeMM3 / mm3PerCM3 * s.Material.Density / gramsCarat, true
}

// Weight returns the stone's weight in words, empty where it is not known.
func (b *Bench) Weight() string {
	if ct, ok := b.Look.Subject.Carats(); ok {
		return fmt.Sprintf("%.2f ct", ct)
	}
	return ""
}

// Facts returns what is known of the selected tier and of the stone, names and
// values. A name without a value is a heading.
func (b *Bench) Facts() [][2]string {
	s := b.Look.Subject
	if s.Stone == nil {
		return nil
	}
	m := s.Measures
	facts := append(b.tierFacts(), [][2]string{
		{"Stone", ""},
		{"Width", fmt.Sprintf("%.3f mm", m.WidthMM)},
		{"Length", fmt.Sprintf("%.3f mm", m.LengthMM)},
		{"Depth", fmt.Sprintf("%.3f mm", m.DepthMM)},
		{"Table", fmt.Sprintf("%.2f %% of width", m.TablePercent)},
		{"Crown height", fmt.Sprintf("%.2f %%", m.CrownHeightPercent)},
		{"Pavilion depth", fmt.Sprintf("%.2f %%", m.PavilionDepthPercent)},
		{"Girdle", fmt.Sprintf("%.2f to %.2f %%", m.GirdlePercent.Min, m.GirdlePercent.Max)},
		{"Facets", strconv.Itoa(len(s.Stone.Facets))},
		{"Volume", fmt.Sprintf("%.2f mm³", m.VolumeMM3)},
	}...)
	if ct, ok := s.Carats(); ok {
		facts = append(facts, [2]string{"Weight", fmt.Sprintf("%.3f ct", ct)})
	} else {
		facts = append(facts, [2]string{"Weight", "density not known"})
	}
	return facts
}

// tierFacts returns what a cutter asks of the selected tier.
func (b *Bench) tierFacts() [][2]string {
	plan := b.Doc.Plan()
	for i := range plan.Tiers {
		t := &plan.Tiers[i]
		if t.Name != b.Selected {
			continue
		}
		angle := t.Angle
		if !t.HasAngle {
			angle = foundAngle(b.Look.Subject.Stone, t.Name)
		}
		facts := [][2]string{
			{t.Name, ""},
			{"Angle", FormatAngle(angle) + "°"},
			{"Facets", strconv.Itoa(len(t.Indices(plan.Gear)))},
			{"Index", indexWords(t.Indices(plan.Gear))},
		}
		if t.Note != "" {
			facts = append(facts, [2]string{"Note", t.Note})
		}
		return facts
	}
	return nil
}

// indexWords writes index settings, separated by spaces.
func indexWords(teeth []float64) string {
	words := make([]string, len(teeth))
	for i, t := range teeth {
		words[i] = strconv.FormatFloat(t, 'f', -1, 64)
	}
	return strings.Join(words, " ")
}

// LightInWords says how the stone is looked at, for the status line.
func (l *Look) LightInWords() string {
	s := l.settings
	light := "even light from above"
	if s.Below > 0 {
		light += fmt.Sprintf(", %.2g from below", s.Below)
	}
	waves := "spectrum 400 to 700 nm"
	if s.Wavelength != 0 {
		waves = s.Wavelength.String()
	}
	polarisation := "polarisation carried along"
	if s.Averaged {
		polarisation = "polarisation averaged at every facet"
	}
	return strings.Join([]string{light, waves, polarisation}, "  ·  ")
}
