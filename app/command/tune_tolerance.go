package command

import (
	"fmt"
	"slices"
	"strings"
	"text/tabwriter"

	"pavilight/app/chart"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace/tune"
)

// tuneMachine are errors of a machine as JSON has them.
type tuneMachine struct {
	TiltDeg   float64 `json:"tilt_deg"`
	TwistDeg  float64 `json:"twist_deg"`
	ShiftMM   float64 `json:"shift_mm"`
	AngleDeg  float64 `json:"angle_deg"`
	IndexDeg  float64 `json:"index_deg"`
	OvercutMM float64 `json:"overcut_mm"`
}

func newMachine(m tune.Machine) tuneMachine {
	return tuneMachine{m.DopTilt.Degrees(), m.Twist.Degrees(), m.ShiftMM, m.Angle.Degrees(), m.Index.Degrees(), m.OvercutMM}
}

type tuneSpread struct {
	Plan           float64 `json:"plan"`
	Mean           float64 `json:"mean"`
	MeanError      float64 `json:"mean_standard_error"`
	Deviation      float64 `json:"deviation"`
	DeviationError float64 `json:"deviation_standard_error"`
	Low            float64 `json:"low_5"`
	Median         float64 `json:"median"`
	High           float64 `json:"high_95"`
}

type tuneCause struct {
	What       string   `json:"what"`
	Tier       string   `json:"tier,omitempty"`
	Slope      *float64 `json:"slope"` // of light return, for each degree or mm; null where none is meant
	SlopeError *float64 `json:"slope_standard_error"`
	Alone      float64  `json:"alone"`
	AloneError float64  `json:"alone_standard_error"`
	Share      float64  `json:"share"`
}

// tolerance tells what a machine's errors cost.
func (t *tuning) tolerance() error {
	if t.plan == nil {
		return commandFaultf("--tolerance cuts a plan tier by tier, and proportions have none; name a plan")
	}
	if len(t.problem.Goal.Cases) != 1 {
		return commandFaultf("--tolerance looks at one surrounding and one tilt; there are %d cases", len(t.problem.Goal.Cases))
	}
	machine, err := readSlips(t.Slips)
	if err != nil {
		return err
	}
	p := &tune.ToleranceProblem{
		Plan: t.plan, Material: t.material, Case: t.problem.Goal.Cases[0], Head: t.problem.Head, Machine: machine,
		Draws: t.Tolerance, Loss: t.Loss / 100, Seed: t.Seed, Workers: t.Workers,
	}
	r, stopped := tune.Tolerate(t, p, t.bar.show)
	if r == nil {
		return stopped
	}
	result := struct {
		tuneAbout
		Slips       tuneMachine  `json:"slips"`
		SlipsSource string       `json:"slips_source"`
		Stones      int          `json:"stones"`
		Failed      int          `json:"failed"`
		Losing      int          `json:"losing_facets"`
		Return      tuneSpread   `json:"return"`
		Leaky       tuneSpread   `json:"leaky_area"`
		GapMM       tuneSpread   `json:"gap_mm"`
		EdgeMM      tuneSpread   `json:"edge_mm"`
		Causes      []tuneCause  `json:"causes"`
		Unexplained float64      `json:"unexplained"`
		Scales      []tune.Scale `json:"scales"`
		Loss        float64      `json:"loss"`
		Needed      float64      `json:"needed"`
		Precision   tuneMachine  `json:"precision"`
	}{
		t.about(stopped), newMachine(machine), t.slipsSource(), len(r.Draws), r.Failed, r.Losing,
		tuneSpread(r.Return), tuneSpread(r.Leaky), tuneSpread(r.GapMM), tuneSpread(r.EdgeMM),
		nil, r.Unknown, r.Scales, r.Loss, r.Needed, newMachine(r.Precise),
	}
	for _, c := range r.Causes {
		one := tuneCause{What: c.What, Tier: c.Tier, Alone: c.Alone, AloneError: c.AloneError, Share: c.Share}
		if c.HasSlope {
			one.Slope, one.SlopeError = &c.Slope, &c.SlopeError
		}
		result.Causes = append(result.Causes, one)
	}
	rows := [][]string{{"stone", "light return", "leaky area", "gap mm", "edge mm", "facets lost"}}
	var values []float64
	for i, d := range r.Draws {
		rows = append(rows, []string{fmt.Sprint(i + 1), exact(d.Return), exact(d.Leaky), exact(d.GapMM), exact(d.EdgeMM), fmt.Sprint(d.Lost)})
		values = append(values, d.Return)
	}
	page := chart.Spread(nil, t.name, []string{fmt.Sprintf("%s, %.2f mm, %s", t.material.Name, t.width, t.caseWords()), fmt.Sprintf("%d stones cut with errors: %s", len(r.Draws), slipWords(machine))},
		"light return", values, r.Return)
	if err := t.picture("tolerance", page, rows); err != nil {
		return err
	}
	return t.answer(stopped, result, func() [][]string { return rows }, func() { t.printTolerance(r, machine) })
}

func (t *tuning) slipsSource() string {
	if t.Slips == "" {
		return tune.UsualMachineSource
	}
	return "given by the user; what was not given: " + tune.UsualMachineSource
}

func slipWords(m tune.Machine) string {
	return fmt.Sprintf("dop tilt %.3g°, twist %.3g°, shift %.3g mm, angle %.3g°, index %.3g°, overcut to %.3g mm",
		m.DopTilt.Degrees(), m.Twist.Degrees(), m.ShiftMM, m.Angle.Degrees(), m.Index.Degrees(), m.OvercutMM)
}

// mostCauses is how many causes are printed.
const mostCauses = 12

func (t *tuning) printTolerance(r *tune.Tolerance, machine tune.Machine) {
	w := t.out
	fmt.Fprintf(w, "%s\n%s\n%d stones cut with errors (standard deviations): %s; %s\n\n", t.stoneLine(), t.caseWords(), len(r.Draws), slipWords(machine), t.slipsSource())
	tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	fmt.Fprintln(tab, "\tby plan\tmean\tdeviation\t5 of 100 below\tmedian\t95 of 100 below")
	row := func(name string, s tune.Spread) {
		fmt.Fprintf(tab, "%s\t%.4f\t%.4f ± %.4f\t%.4f ± %.4f\t%.4f\t%.4f\t%.4f\n", name, s.Plan, s.Mean, s.MeanError, s.Deviation, s.DeviationError, s.Low, s.Median, s.High)
	}
	row("light return", r.Return)
	row("leaky area", r.Leaky)
	row("worst miss at a meet point, mm", r.GapMM)
	row("longest edge in its place, mm", r.EdgeMM)
	tab.Flush()
	if r.Losing > 0 {
		fmt.Fprintf(w, "In %d stones of %d a facet is gone.\n", r.Losing, len(r.Draws))
	}
	if r.Failed > 0 {
		fmt.Fprintf(w, "%d stones were no closed solid and are left out.\n", r.Failed)
	}
	if len(r.Causes) > 0 {
		fmt.Fprintln(w)
		tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
		fmt.Fprintln(tab, "what matters most\tspread of light return by it alone\tchange of light return")
		for _, c := range r.Causes[:min(mostCauses, len(r.Causes))] {
			slope := ""
			if c.HasSlope {
				unit := "degree"
				if c.What == "overcut" {
					unit = "mm"
				}
				slope = fmt.Sprintf("%+.3f ± %.3f a %s", c.Slope, c.SlopeError, unit)
			}
			fmt.Fprintf(tab, "%s\t%.4f ± %.4f\t%s\n", strings.TrimSpace(c.What+" "+c.Tier), c.Alone, c.AloneError, slope)
		}
		tab.Flush()
		fmt.Fprintf(w, "%.0f %% of the variance lies in errors that act together, or by leaps.\n", 100*r.Unknown)
	} else if r.Complete {
		fmt.Fprintln(w, "\nToo few stones to tell which error matters most; use more.")
	}
	if len(r.Scales) > 1 {
		fmt.Fprintln(w)
		tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
		fmt.Fprintln(tab, "all errors times\t95 stones of 100 lose less than")
		for _, s := range r.Scales {
			fmt.Fprintf(tab, "%g\t%.4f\n", s.Factor, s.Loss)
		}
		tab.Flush()
		switch {
		case r.Needed == 0:
			fmt.Fprintf(w, "No precision looked at keeps the loss under %g.\n", r.Loss)
		case r.Needed >= r.Scales[len(r.Scales)-1].Factor:
			fmt.Fprintf(w, "Even errors of %s keep the loss under %g.\n", slipWords(r.Precise), r.Loss)
		default:
			fmt.Fprintf(w, "To keep the loss under %g in 95 stones of 100, hold %s.\n", r.Loss, slipWords(r.Precise))
		}
	}
	t.printWritten()
}

// move moves the plan to another material.
func (t *tuning) move() error {
	if t.plan == nil {
		return commandFaultf("--to moves a plan tier by tier, and proportions have none; name a plan")
	}
	to, err := findMaterial(t.library, t.To)
	if err != nil {
		return inputFault(fmt.Errorf("--to: %w", err))
	}
	refs, err := tune.UsualReferences(t.material, to)
	if err != nil {
		return err
	}
	source := tune.ReferencesSource
	if t.Refs != "" {
		if refs, err = readRefs(t.Refs); err != nil {
			return err
		}
		source = "given by the user"
	}
	media, err := mediaOf()
	if err != nil {
		return err
	}
	memory := t.memory()
	if memory != nil {
		memory.Purpose += "\nto " + to.Key
	}
	m, stopped := tune.Move(t, &t.problem, to, refs, t.choose, media, memory, t.report())
	t.forget(memory)
	if m == nil {
		return stopped
	}
	if m.FoundPlan != nil {
		found := m.FoundPlan.Clone()
		found.Material = facets.MaterialRef{Key: to.Key}
		if err := t.write(found); err != nil {
			return err
		}
	}
	type column struct {
		tuneStone
		How      string   `json:"how"`
		Material string   `json:"material"`
		Warnings []string `json:"warnings"`
	}
	result := struct {
		tuneAbout
		To         string             `json:"to"`
		References map[string]float64 `json:"references_deg"`
		Source     string             `json:"references_source"`
		Stones     []column           `json:"stones"`
		Wrote      string             `json:"wrote,omitempty"`
	}{t.about(stopped), to.Key, map[string]float64{
		"pavilion_from": refs.PavilionFrom.Degrees(), "pavilion_to": refs.PavilionTo.Degrees(),
		"crown_from": refs.CrownFrom.Degrees(), "crown_to": refs.CrownTo.Degrees(),
	}, source, nil, t.Write}
	all := []struct {
		how      string
		material *gems.Material
		plan     *facets.Plan
		trial    tune.Trial
	}{
		{"as it stands", m.From, t.plan, m.Original},
		{"unchanged", m.To, t.plan, m.Unchanged},
		{"by the tangent rule", m.To, m.TangentPlan, m.Tangent},
		{"by search", m.To, m.FoundPlan, m.Found},
	}
	for i, a := range all {
		if a.plan == nil && !a.trial.Seen && len(a.trial.Words) == 0 {
			continue
		}
		one := column{tuneStone: t.stone(a.trial), How: a.how, Material: a.material.Key, Warnings: []string{}}
		for _, u := range m.Passed[i] {
			one.Warnings = append(one.Warnings, u.String())
		}
		result.Stones = append(result.Stones, one)
	}
	rows := [][]string{{"tier"}}
	for _, c := range result.Stones {
		rows[0] = append(rows[0], c.Material+" "+c.How)
	}
	for i := range t.plan.Tiers {
		tier := &t.plan.Tiers[i]
		if !tier.HasAngle || tier.Angle == 0 || tier.Angle >= 90*facets.Degree {
			continue
		}
		row := []string{tier.Name}
		for k, a := range all {
			switch {
			case k >= len(result.Stones):
			case a.plan == nil:
				row = append(row, "")
			default:
				row = append(row, fmt.Sprintf("%.2f", a.plan.Tiers[i].Angle.Degrees()))
			}
		}
		rows = append(rows, row)
	}
	score := []string{"goal"}
	for _, c := range result.Stones {
		if c.Score == nil {
			score = append(score, "–")
		} else {
			score = append(score, withError(*c.Score, *c.Error))
		}
	}
	rows = append(rows, score)
	return t.answer(stopped, result, func() [][]string { return rows }, func() {
		w := t.out
		fmt.Fprintf(w, "%s, moved to %s\n%s %s\n\n", t.stoneLine(), to.Key, t.goalWords(), t.caseWords())
		tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
		for _, row := range rows {
			fmt.Fprintln(tab, strings.Join(row, "\t"))
		}
		tab.Flush()
		fmt.Fprintf(w, "\nReferences of the tangent rule: %s.\n", source)
		if slices.ContainsFunc(m.Passed[:], func(list []tune.Under) bool { return len(list) > 0 }) {
			fmt.Fprintln(w, "Light that comes straight down leaks at these tiers; critical angles at the stone's lowest index:")
		}
		for i, c := range result.Stones {
			for _, line := range passedWords(m.Passed[i]) {
				fmt.Fprintf(w, "%s %s: %s.\n", c.Material, c.How, line)
			}
			if !c.Fits && len(c.Why) > 0 {
				fmt.Fprintf(w, "%s %s: %s.\n", c.Material, c.How, strings.Join(c.Why, "; "))
			}
		}
		if t.Write != "" {
			fmt.Fprintf(w, "Written to %s\n", t.Write)
		}
	})
}

// passedWords tells in one line a medium which tiers lie under its critical angle.
func passedWords(list []tune.Under) (lines []string) {
	for i := 0; i < len(list); {
		first := list[i]
		var tiers []string
		for ; i < len(list) && list[i].Medium == first.Medium; i++ {
			tiers = append(tiers, fmt.Sprintf("%s at %v", list[i].Tier, list[i].Angle))
		}
		if first.Critical >= 90*facets.Degree {
			lines = append(lines, "in "+first.Medium.Name+" nothing is totally reflected")
			continue
		}
		verb := "lie"
		if len(tiers) == 1 {
			verb = "lies"
		}
		lines = append(lines, fmt.Sprintf("%s %s under the critical angle %v in %s", strings.Join(tiers, ", "), verb, first.Critical, first.Medium.Name))
	}
	return lines
}
