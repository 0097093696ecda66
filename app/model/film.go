package model

import (
	"strings"

	"pavilight/app/words"
	"pavilight/facets"
)

// FilmStep is the stone under the lap after one step.
type FilmStep struct {
	Title  string
	Facts  [][2]string // what the machine is set to, what goes, what a mistake costs
	Stone  *facets.Stone
	Whole  *facets.Stone // what the steps start from: sets the scale
	Tier   string        // whose facets are new; empty for the rough
	Facing facets.Side   // the side that faces the lap
	Turned bool          // the stone was turned just before
}

// Film returns the step in view, false before there is a sheet, or where the material is
// not worked in such steps.
func (c *Cut) Film() (FilmStep, bool) {
	if c.Sheet == nil || c.Sheet.LightModel {
		return FilmStep{}, false
	}
	if c.Step == 0 {
		return c.filmOfRough(), true
	}
	s := c.Sheet
	r := &s.Rows[c.Step-1]
	f := FilmStep{Stone: r.Step.Stone, Whole: c.whole, Tier: r.Tier.Name, Facing: r.Facing, Turned: r.Turn}
	say := c.words.Say
	f.Title = say("%d of %d   %s", r.Number, len(s.Rows), r.Tier.Name)
	add := func(name words.Key, value string) { f.Facts = append(f.Facts, [2]string{say(name), value}) }
	if r.Turn {
		add("First", say("turn the stone: the %s faces the lap now", c.words.Within(say(SideName(r.Facing)))))
	} else {
		add("To the lap", c.words.Within(say(SideName(r.Facing))))
	}
	add("Set", say("%.2f°", r.Reading.Degrees()))
	var indices []string
	for _, set := range r.Settings {
		indices = append(indices, c.words.Decimal(set.String()))
	}
	add("Index", strings.Join(indices, "  "))
	add("Until", strings.TrimPrefix(s.StopIn(c.words, r), say("until ")))
	before := c.Off(c.Step - 1)
	if len(r.Step.New) == 0 {
		add("Takes off", say("nothing of this rough"))
	} else {
		add("Takes off", say("%.1f mm³, %.1f %% of the rough", r.Step.Removed, 100*(c.Off(c.Step)-before)))
		add("Layer", say("%.2f mm where it is thickest", r.Step.Depth))
	}
	add("So far", say("%.0f %% of the rough is off", 100*c.Off(c.Step)))
	if !r.Tier.Temporary {
		add("A slip", say("%.2f mm too deep costs %.2f mm of width or height, and %.1f %% of the weight "+
			"if the rest is cut smaller to match", 0.05, r.TooDeepMM, r.TooDeepPct))
	}
	if note := strings.TrimSpace(r.Tier.Note); note != "" {
		add("Note", note)
	}
	return f, true
}

func (c *Cut) filmOfRough() FilmStep {
	say := c.words.Say
	rough := say("a box %.0f %% larger than the stone; the plan names no rough", 100*facets.BlockMargin)
	switch {
	case c.Sheet.Rough.Stone != nil:
		rough = c.words.Text(c.Sheet.Rough.Words)
	case c.Sheet.Rough.TooSmall:
		rough = say("a box around the stone; the plan's rough does not hold it along its axes")
	}
	f := FilmStep{Title: say("Before the first cut"), Stone: c.whole, Whole: c.whole, Facing: facets.Pavilion}
	if len(c.Sheet.Rows) > 0 {
		f.Facing = c.Sheet.Rows[0].Facing
	}
	f.Facts = [][2]string{{say("Rough"), rough}, {say("Volume"), say("%.1f mm³", c.whole.Volume())}}
	if carats, ok := c.Sheet.Carats(c.whole.Volume()); ok {
		f.Facts = append(f.Facts, [2]string{say("Weight"), say("%.2f ct", carats)})
	}
	return f
}

// Steps returns how many steps the film has after the rough, 0 before there is a sheet.
func (c *Cut) Steps() int {
	if c.Sheet == nil || c.Sheet.LightModel {
		return 0
	}
	return len(c.Sheet.Rows)
}

// Off returns the share of the rough that is off after so many steps.
func (c *Cut) Off(steps int) float64 {
	if c.Sheet == nil || c.whole == nil {
		return 0
	}
	off := 0.0
	for i := range c.Sheet.Rows[:steps] {
		off += c.Sheet.Rows[i].Step.Removed
	}
	return off / c.whole.Volume()
}

// GoTo brings another step of the film into view; beyond the ends it stays.
func (c *Cut) GoTo(step int) {
	step = max(0, min(step, c.Steps()))
	if step != c.Step {
		c.Step = step
		c.onChange()
	}
}
