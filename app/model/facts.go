package model

import (
	"strconv"
	"strings"

	"pavilight/app/words"
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
		return b.words.Say("%.2f ct", ct)
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
	m, say := s.Measures, b.words.Say
	facts := append(b.tierFacts(), [][2]string{
		{say("Stone"), ""},
		{say("Width"), say("%.3f mm", m.WidthMM)},
		{say("Length"), say("%.3f mm", m.LengthMM)},
		{say("Longest"), say("%.3f mm", m.LongestMM)},
		{say("Depth"), say("%.3f mm", m.DepthMM)},
		{say("Table"), say("%.2f %% of width", m.TablePercent)},
		{say("Crown height"), say("%.2f %%", m.CrownHeightPercent)},
		{say("Pavilion depth"), say("%.2f %%", m.PavilionDepthPercent)},
		{say("Girdle"), say("%.2f to %.2f %%", m.GirdlePercent.Min, m.GirdlePercent.Max)},
		{say("Facets"), strconv.Itoa(len(s.Stone.Facets))},
		{say("Volume"), say("%.2f mm³", m.VolumeMM3)},
	}...)
	if ct, ok := s.Carats(); ok {
		facts = append(facts, [2]string{say("Weight"), say("%.3f ct", ct)})
	} else {
		facts = append(facts, [2]string{say("Weight"), say("density not known")})
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
		say := b.words.Say
		facts := [][2]string{
			{t.Name, ""},
			{say("Angle"), b.words.Decimal(FormatAngle(angle)) + "°"},
			{say("Facets"), strconv.Itoa(len(t.Indices(plan.Gear)))},
			{say("Index"), indexWords(b.words, t.Indices(plan.Gear))},
		}
		if t.Note != "" {
			facts = append(facts, [2]string{say("Note"), t.Note})
		}
		return facts
	}
	return nil
}

// indexWords writes index settings, separated by spaces.
func indexWords(w *words.Words, teeth []float64) string {
	all := make([]string, len(teeth))
	for i, t := range teeth {
		all[i] = w.Decimal(strconv.FormatFloat(t, 'f', -1, 64))
	}
	return strings.Join(all, " ")
}

// StoneIndex writes the stone's refractive index, as the maps have it; empty before there
// are any.
func (l *Look) StoneIndex() string {
	if l.Frame == nil || len(l.Frame.Result.Columns) == 0 {
		return ""
	}
	return l.words.Say("%.3f", l.Frame.Result.Columns[0].IndexStone)
}

// LightInWords says how the stone is looked at, for the status line.
func (l *Look) LightInWords() string {
	s := l.settings
	say := l.words.Say
	light := say("even light from above")
	if s.Below > 0 {
		light = say("%s, %.2g from below", light, s.Below)
	}
	waves := say("spectrum 400 to 700 nm")
	if s.Wavelength != 0 {
		waves = s.Wavelength.String()
	}
	polarisation := say("polarisation tracked in full")
	if s.Averaged {
		polarisation = say("polarisation averaged at every facet")
	}
	return strings.Join([]string{light, waves, polarisation}, "  ·  ")
}
