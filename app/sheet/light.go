package sheet

import (
	"context"
	"math"
	"strings"

	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// The light on a sheet: small maps, and a ledger to three decimals.
const (
	lightPixels = 160
	lightError  = 0.001
)

// toleranceAngle is the error of a machine that the sheet reckons with.
const toleranceAngle = 0.2 * facets.Degree

// Miscut is what a side that is cut wrong by a machine's error does to the light.
type Miscut struct {
	Side   facets.Side
	By     facets.Angle // added to every angle of the side
	Return float64      // light return in the first medium
	Error  float64      // its standard error
}

// Trace fills in a job's light: the maps of its plan in each medium, and what errors
// of the machine do to the light return in the first. It calls report, which may be
// nil, with the share of the work done. Errors are facets.Faults where the plan cannot
// be solved and *gems.RangeError where an index is not known; after ctx is cancelled,
// its cause.
func Trace(ctx context.Context, job *Job, media []*gems.Material, report func(done float64)) error {
	stone, err := job.Plan.Solve()
	if err != nil {
		return err
	}
	settings := trace.Settings{
		Head: facets.Angle(job.HeadDeg) * facets.Degree, Pixels: lightPixels, Error: lightError, Seed: 1, Workers: job.Workers, MapsLast: true,
	}
	scene := trace.Scene{Stone: stone, Material: job.Material, Surroundings: trace.Around(media...)}
	wrong := miscutPlans(job.Plan)
	weight := 1 / (1 + float64(len(wrong))/float64(len(media)))
	tell := func(done float64) {
		if report != nil {
			report(done)
		}
	}
	job.Light, err = trace.Run(ctx, scene, settings, func(r *trace.Result) { tell(weight * r.Done) })
	if err != nil {
		return err
	}
	job.Miscuts = nil
	for i, m := range wrong {
		stone, err := m.plan.Solve()
		if err != nil {
			continue // its corners do not come together at these angles: there is no stone to look at
		}
		scene := trace.Scene{Stone: stone, Material: job.Material, Surroundings: trace.Around(media[0])}
		r, err := trace.Run(ctx, scene, settings, nil)
		if err != nil {
			return err
		}
		c := &r.Columns[0]
		job.Miscuts = append(job.Miscuts,
			Miscut{Side: m.side, By: m.by, Return: c.Ledger.Returned, Error: c.StandardError.Returned})
		tell(weight + (1-weight)*float64(i+1)/float64(len(wrong)))
	}
	tell(1)
	return nil
}

// miscutPlan is a plan with one side's angles changed and its corners kept.
type miscutPlan struct {
	side facets.Side
	by   facets.Angle
	plan *facets.Plan
}

func miscutPlans(plan *facets.Plan) []miscutPlan {
	var all []miscutPlan
	for _, side := range []facets.Side{facets.Pavilion, facets.Crown} {
		for _, by := range []facets.Angle{-toleranceAngle, toleranceAngle} {
			changed := plan.Clone()
			changedAny := false
			for i := range changed.Tiers {
				t := &changed.Tiers[i]
				if off := t.Angle + by; t.Side == side && t.HasAngle && t.Angle > 0 && off > 0 && off < 90*facets.Degree {
					t.Angle, changedAny = off, true
				}
			}
			if changedAny {
				all = append(all, miscutPlan{side, by, changed})
			}
		}
	}
	return all
}

// miscutWords tells what errors of the machine do to the light return.
func (s *Sheet) miscutWords() string {
	if s.Light == nil || len(s.Miscuts) == 0 {
		return ""
	}
	in, c := s.Words, &s.Light.Columns[0]
	worst := c.StandardError.Returned
	var parts []string
	for _, m := range s.Miscuts {
		parts = append(parts, in.Say(m.told(), m.Return, math.Abs(m.By.Degrees())))
		worst = max(worst, m.Error)
	}
	return in.Say("Light return in %s: %.3f as planned; %s; each ± %.3f.", columnName(in, c), c.Ledger.Returned,
		strings.Join(parts, ", "), math.Ceil(worst*1000)/1000)
}

// told is how a miscut is told, with its light return and its angle filled in.
func (m Miscut) told() words.Key {
	switch {
	case m.Side == facets.Crown && m.By < 0:
		return "%.3f with the crown %.1f° flatter"
	case m.Side == facets.Crown:
		return "%.3f with the crown %.1f° steeper"
	case m.By < 0:
		return "%.3f with the pavilion %.1f° flatter"
	}
	return "%.3f with the pavilion %.1f° steeper"
}
