package model

import (
	"math"
	"strconv"
	"strings"

	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace/tune"
)

// Shown returns the stone that the answer is about: what was picked by hand, else the best
// so far; nil before there is one.
func (t *Tune) Shown() *tune.Trial {
	if t.Pick != nil {
		return t.Pick
	}
	return t.Best
}

// Kept returns the plan as the answer has it, false before there is one that fits, or when
// the plan was changed since the question was asked.
func (t *Tune) Kept() (*facets.Plan, bool) {
	if t.planUsed == nil || t.plan != t.planUsed {
		return nil, false
	}
	if t.Moved != nil {
		if t.Moved.FoundPlan == nil || !t.Moved.Found.Fit {
			return nil, false
		}
		plan := t.Moved.FoundPlan.Clone()
		plan.File = t.planUsed.File
		plan.Material = facets.MaterialRef{Key: t.Moved.To.Key}
		return plan, true
	}
	shown := t.Shown()
	if shown == nil || !shown.Fit {
		return nil, false
	}
	return t.planOf(shown), true
}

func (t *Tune) planOf(trial *tune.Trial) *facets.Plan {
	names := make([]string, len(t.variablesUsed))
	for i, v := range t.variablesUsed {
		names[i] = v.Name
	}
	values := make([]float64, len(trial.Values))
	for i, x := range trial.Values {
		values[i] = onStep(t.variablesUsed[i], x)
	}
	return tune.PlanPattern{Plan: t.planUsed}.With(names, values)
}

// onStep returns a value as the machine can set it: the cells of a field lie between.
func onStep(v tune.Variable, x float64) float64 {
	if v.Step <= 0 {
		return x
	}
	return math.Round(math.Round(x/v.Step)*v.Step*1e9) / 1e9
}

// VariableName returns what a variable is called: that of a tier's angle is the tier's own.
func VariableName(w *words.Words, v tune.Variable) string {
	tier, rule, ok := strings.Cut(v.Name, ".")
	what, known := map[string]words.Key{
		"distance": "%s distance", "centre": "%s centre", "level": "%s level", "edge": "%s edge", "girdle": "%s girdle",
		"table": "%s table", "culet": "%s culet",
	}[rule]
	if !ok || !known {
		return v.Name
	}
	return w.Say(what, tier)
}

// unitName returns the unit of a variable; a plain number has none.
func unitName(v tune.Variable) words.Key {
	if v.Unit == "degrees" {
		return "degrees"
	}
	return words.Key(strings.ReplaceAll(v.Unit, "%", "%%")) // a sign, in any language
}

// valueWords writes a value of a variable.
func (t *Tune) valueWords(v tune.Variable, x float64) string {
	if v.Unit == "degrees" {
		return t.words.Say("%.2f°", x)
	}
	return t.words.Say("%.3f", x)
}

// changeWords writes a change of a variable in a cutter's terms.
func (t *Tune) changeWords(v tune.Variable, by float64) string {
	switch {
	case math.Abs(by) < 5e-4:
		return t.words.Say("as it is")
	case v.Unit == "degrees" && by > 0:
		return t.words.Say("%s steeper", t.valueWords(v, by))
	case v.Unit == "degrees":
		return t.words.Say("%s flatter", t.valueWords(v, -by))
	}
	return t.words.Say("%+.3f", by)
}

// Changes tells a cutter what the answer changes, and what that does to weight and depth: a
// name and what becomes of it.
func (t *Tune) Changes() [][2]string {
	shown := t.Shown()
	if t.Moved != nil && len(t.Moved.Found.Values) > 0 {
		return t.changes(t.Moved.Variables, t.Moved.Found.Values)
	}
	if shown == nil || len(shown.Values) != len(t.variablesUsed) {
		return nil
	}
	lines := t.changes(t.variablesUsed, shown.Values)
	if before, after := t.Bodies[0], t.Bodies[1]; before != nil && after != nil && t.Pick == nil {
		if density := t.material.Density; density > 0 {
			lines = append(lines, [2]string{t.words.Say("Weight"),
				t.words.Say("%.3f to %.3f ct", before.Carats(density), after.Carats(density))})
		}
		lines = append(lines, [2]string{t.words.Say("Depth"),
			t.words.Say("%.2f to %.2f %% of width", before.DepthPercent, after.DepthPercent)})
	}
	return lines
}

func (t *Tune) changes(vs []tune.Variable, values []float64) (lines [][2]string) {
	for i, v := range vs {
		if i < len(values) {
			x := onStep(v, values[i])
			lines = append(lines, [2]string{VariableName(t.words, v),
				t.words.Say("%s to %s, %s", t.valueWords(v, v.Now), t.valueWords(v, x), t.changeWords(v, x-v.Now))})
		}
	}
	return lines
}

// withError writes a number with its standard error; it shows no digits that the error
// makes worthless.
func (t *Tune) withError(v, e float64) string {
	decimals := 4
	if e > 0 {
		decimals = max(1, min(5, 1-int(math.Floor(math.Log10(e)))))
	}
	write := func(x float64) string { return t.words.Decimal(strconv.FormatFloat(x, 'f', decimals, 64)) }
	return write(v) + " ± " + write(e)
}

// why says why a stone does not fit.
func why(trial *tune.Trial) string { return strings.Join(trial.Words, "; ") }

// TrialWords tells what a stone measures, a line an aim; empty where it was not seen.
func (t *Tune) TrialWords(trial *tune.Trial) []string {
	if trial == nil {
		return nil
	}
	if !trial.Seen {
		return []string{why(trial)}
	}
	var lines []string
	for i, a := range t.aimsUsed {
		if i < len(trial.Measures) {
			line := t.words.Say(MeasureName(a.Measure)) + " " + t.withError(trial.Measures[i], trial.MeasureErrors[i])
			if a.Measure == tune.Weight {
				line += " ct"
			}
			lines = append(lines, line)
		}
	}
	return lines
}

// nearLoss is the loss by a small error that is worth a warning, as a share of the score.
const nearLoss = 0.02

// Verdict says what the answer is worth, in words that its numbers bear, a paragraph each;
// empty before there is one.
func (t *Tune) Verdict() []string {
	lines := t.answerWords()
	if len(lines) > 0 && t.Tolerance == nil && t.Trouble == nil && t.faceUpUsed {
		lines = append(lines, t.words.Say("Judged face-up only, not rocked."))
	}
	return lines
}

func (t *Tune) answerWords() []string {
	switch {
	case t.Moved != nil:
		return t.movedWords()
	case t.Tolerance != nil:
		return t.toleranceWords()
	case t.Front != nil && len(t.Front.Points) > 0:
		lines := []string{t.words.Say("%d stones of which none is better in both than another. Click one, or use the arrow keys.", len(t.Front.Points))}
		if t.Pick != nil {
			lines = append(lines, t.words.Say("Picked: %s.", strings.Join(t.TrialWords(t.Pick), ", ")))
		}
		return lines
	case t.Field != nil:
		return t.fieldWords()
	case t.Outcome != nil:
		return t.outcomeWords(t.Outcome, t.variablesUsed)
	}
	return nil
}

func (t *Tune) outcomeWords(o *tune.Outcome, vs []tune.Variable) (lines []string) {
	switch {
	case !o.Best.Fit:
		lines = append(lines, t.words.Say("No stone that keeps the limits was found."))
	case !o.Start.Seen:
		lines = append(lines, t.words.Say("As it stands there is no such stone: %s.", why(&o.Start)))
	case !o.Start.Fit:
		lines = append(lines, t.words.Say("As it stands the stone breaks limits: %s.", why(&o.Start)))
	case o.Better:
		lines = append(lines, t.words.Say("Better by %s of the goal: more than chance explains.", t.withError(o.Gain, o.GainError)))
	case t.Stopped:
		lines = append(lines, t.words.Say("Stopped before the best was traced anew: how much better it is stays open."))
	default:
		lines = append(lines, t.words.Say("Nothing better was found than the stone as it stands, beyond what chance explains."))
	}
	if t.steadyUsed > 0 && o.Start.Seen && o.Best.Seen {
		lines = append(lines, t.words.Say("With one angle off by up to %g° the goal is at worst %s as it stands, %s at the best.",
			t.steadyUsed, t.withError(o.Start.Score, o.Start.Error), t.withError(o.Best.Score, o.Best.Error)))
	}
	for i, v := range vs {
		if x := o.Best.Values[i]; v.High > v.Low && (x < v.Low+v.Step*0.999 || x > v.High-v.Step*0.999) {
			lines = append(lines, t.words.Say("%s stands at a limit of its %s to %s: wider ones may do better.",
				VariableName(t.words, v), t.valueWords(v, v.Low), t.valueWords(v, v.High)))
		}
	}
	for i, near := range o.Nearby {
		v := vs[i/2]
		by := t.changeWords(v, near.Values[i/2]-o.Best.Values[i/2])
		switch loss := o.Best.Score - near.Score; {
		case !near.Seen:
			lines = append(lines, t.words.Say("Careful: with %s %s there is no such stone.", VariableName(t.words, v), by))
		case loss > nearLoss*math.Abs(o.Best.Score):
			lines = append(lines, t.words.Say("Careful: with %s %s it loses %.3f. The best stands at an edge; ask for one that forgives a slip, or rock the stone, too, to find a calmer place.", VariableName(t.words, v), by, loss))
		}
	}
	return append(lines, t.words.Say("%d stones were looked at. Both shown are traced anew, with rays that the search has not seen.", o.Tried))
}

func (t *Tune) fieldWords() (lines []string) {
	if t.Pick != nil {
		if !t.Pick.Fit {
			return []string{t.words.Say("There is no stone that fits here: %s.", why(t.Pick))}
		}
		lines = append(lines, t.words.Say("Picked: %s.", strings.Join(t.TrialWords(t.Pick), ", ")))
	} else if best, ok := t.Field.Best(); ok {
		lines = append(lines, t.words.Say("Best of the field: %s.", strings.Join(t.TrialWords(&t.Field.Trials[best]), ", ")))
	}
	if t.Field.Now.Seen {
		lines = append(lines, t.words.Say("As it stands: %s.", strings.Join(t.TrialWords(&t.Field.Now), ", ")))
	}
	return append(lines, t.words.Say("Click a place, or move with the arrow keys, to pick it."))
}

func (t *Tune) toleranceWords() []string {
	o := t.Tolerance
	lines := []string{
		t.words.Say("%d stones were cut with errors (%s).", len(o.Draws), MachineSource),
		t.words.Say("Light return %.4f without errors; with them %.4f on average, and 90 stones of 100 between %.4f and %.4f.",
			o.Return.Plan, o.Return.Mean, o.Return.Low, o.Return.High),
		t.words.Say("Corners that should meet miss by up to %.3f mm in half of the stones, by up to %.3f mm in 95 of 100.",
			o.GapMM.Median, o.GapMM.High),
	}
	for i, c := range o.Causes {
		const most = 3
		if i == most || c.Share < 0.01 {
			break
		}
		what := t.words.Among(causes(), c.What)
		if c.Tier != "" {
			what = t.words.Say("%s of %s", what, c.Tier)
		}
		lines = append(lines, t.words.Say("%s makes %.0f %% of the differences in light return.", words.Upper(what), 100*c.Share))
	}
	switch {
	case !o.Complete:
		lines = append(lines, t.words.Say("Stopped before the end."))
	case o.Needed == 0:
		lines = append(lines, t.words.Say("Errors of no size keep 95 stones of 100 within %.3f of the light return.", o.Loss))
	default:
		lines = append(lines, t.words.Say("With all errors %.2g times as large, 95 stones of 100 lose no more than %.3f: angles to %.2f°.",
			o.Needed, o.Loss, o.Precise.Angle.Degrees()))
	}
	return lines
}

func (t *Tune) movedWords() (lines []string) {
	m := t.Moved
	from, to := stock.NameOf(t.words, m.From), stock.NameOf(t.words, m.To)
	say := t.words.Say
	for i, a := range []struct {
		how   string
		trial *tune.Trial
	}{
		{say("As it stands, in %s", from), &m.Original}, {say("Unchanged, in %s", to), &m.Unchanged},
		{say("By the tangent rule, in %s", to), &m.Tangent}, {say("By search, in %s", to), &m.Found},
	} {
		measured := t.TrialWords(a.trial)
		if len(measured) == 0 {
			continue
		}
		line := a.how + ": " + strings.Join(measured, ", ") + "."
		for k, u := range m.Passed[i] {
			const most = 2
			if k == most {
				line += " " + say("And more lie under critical angles.")
				break
			}
			line += " " + say("Careful: %s.", t.underWords(u))
		}
		lines = append(lines, line)
	}
	return lines
}

// underWords says that a tier lies under a critical angle.
func (t *Tune) underWords(u tune.Under) string {
	medium := t.words.Within(stock.ShortOf(t.words, u.Medium))
	if u.Critical >= 90*facets.Degree {
		return t.words.Say("pavilion %s: in %s nothing is totally reflected", u.Tier, medium)
	}
	return t.words.Say("pavilion %s at %.2f° lies under the critical angle %.2f° in %s",
		u.Tier, u.Angle.Degrees(), u.Critical.Degrees(), medium)
}

// MachineSource says where the errors of the usual machine come from.
const MachineSource words.Key = "common practice, no source"

// causes are what can go wrong at the lap, as the answer names it.
func causes() []words.Key {
	return []words.Key{"dop tilt", "shift", "twist", "angle", "index", "overcut"}
}
