package tune

import (
	"context"
	"errors"
	"math"
	"slices"
)

// Front is a trade-off between two aims: stones of which none is better in both than
// another.
type Front struct {
	Start  Trial   // the pattern as it stands
	Points []Trial // the first aim rising; traced anew, with points that the search never used
	Tried  int
}

// The shape of the search for a front.
const (
	frontMixes  = 7  // searches, from the one aim to the other
	frontPoints = 24 // stones of the front that are traced anew
)

// TradeOff searches for the front of the problem's two aims, whose weights give only the
// direction in which each is better. It climbs for each aim and for several mixes of both,
// and keeps of all stones that it saw those that no other beats in both. When ctx is cancelled it
// returns the front so far, traced as the search traced it, and the cause.
func TradeOff(ctx context.Context, p *Problem, memory *Memory, report func(Progress)) (*Front, error) {
	if len(p.Goal.Aims) != 2 {
		return nil, errors.New("a trade-off is between two goals: name two")
	}
	if p.Steady > 0 {
		return nil, errors.New("a trade-off shows stones as they are, not what errors make of them: leave steady out")
	}
	j, err := newJudge(p)
	if err != nil {
		return nil, err
	}
	if err := memory.open(j); err != nil {
		return nil, err
	}
	return tradeOff(ctx, j, report)
}

// tradeOff is TradeOff with a judge.
func tradeOff(ctx context.Context, j *judge, report func(Progress)) (*Front, error) {
	aims := j.Goal.Aims
	sign := [2]float64{math.Copysign(1, aims[0].Weight), math.Copysign(1, aims[1].Weight)}
	f := &Front{}
	seek := func(goal Goal) (Trial, error) {
		problem := *j.Problem
		problem.Goal = goal
		j.Problem = &problem
		h := &hunt{judge: j, report: report}
		err := h.run(ctx)
		if err == nil && !h.best.Fit {
			err = h.nothingFits()
		}
		return h.best, err
	}
	mixes := make([]func() error, 0, frontMixes)
	var ends [2]Trial
	goal := j.Goal
	for a := range ends {
		mixes = append(mixes, func() (err error) {
			// The other aim counts a little, so that of two stones equal in one the better wins.
			one := goal
			one.Aims = []Aim{aims[0], aims[1]}
			one.Aims[a].Weight, one.Aims[1-a].Weight = sign[a], 1e-3*sign[1-a]
			ends[a], err = seek(one)
			return err
		})
	}
	for i := 1; i < frontMixes-1; i++ {
		mixes = append(mixes, func() error {
			share := float64(i) / (frontMixes - 1)
			between := goal
			between.toward = &toward{sign: sign, share: [2]float64{share, 1 - share}}
			for a := range ends {
				between.toward.ideal[a] = ends[a].Measures[a]
				between.toward.span[a] = max(math.Abs(ends[0].Measures[a]-ends[1].Measures[a]), 1e-6)
			}
			_, err := seek(between)
			return err
		})
	}
	var failed error
	for _, mix := range mixes {
		if failed = mix(); failed != nil {
			break
		}
	}
	f.Tried = j.tried()
	var none *NothingFitsError
	if errors.As(failed, &none) {
		return nil, failed
	}
	all := j.everySeen()
	f.Points = thin(unbeaten(all, sign), frontPoints)
	if failed != nil {
		if len(f.Points) == 0 {
			return nil, failed
		}
		return f, failed
	}

	var values [][]float64
	for _, t := range f.Points {
		values = append(values, t.Values)
	}
	again, err := j.tryAll(ctx, append(values, j.start()), claimsOfFront)
	if err != nil {
		return f, err
	}
	f.Start = again[len(again)-1]
	f.Points = unbeaten(again[:len(again)-1], sign)
	f.Tried = j.tried()
	return f, nil
}

// toward scores how far a stone stays behind the best of two aims: the larger of both
// shortfalls, weighted, and a little of their sum. Unlike a weighted sum this reaches
// every stone of a front, also where it bends inward (the augmented Chebyshev norm of
// Steuer & Choo, Math. Program. 26 (1983) 326).
type toward struct {
	sign, share, ideal, span [2]float64
}

func (w *toward) score(measures []float64) float64 {
	worst, sum := math.Inf(-1), 0.0
	for a := range w.ideal {
		short := w.sign[a] * (w.ideal[a] - measures[a]) / w.span[a]
		worst, sum = max(worst, w.share[a]*short), sum+short
	}
	return -worst - 1e-3*sum
}

// claimsOfFront looks at a stone of the front anew.
var claimsOfFront = effort{rays: 200_000, seen: 64, another: claims.another, always: true}

// everySeen returns all fit trials on the steps that were seen with a fine look or better,
// or with any where there are none.
func (j *judge) everySeen() []Trial {
	j.mu.Lock()
	defer j.mu.Unlock()
	type best struct {
		rays  int
		trial Trial
	}
	by := map[string]best{}
	for name := range j.asked {
		s, ok := j.known[name]
		if !ok || len(s.Words) > 0 {
			continue
		}
		values, e := fromKey(name, len(j.Variables))
		at := key(values, effort{}, 0)
		if old, ok := by[at]; !ok || e.rays > old.rays {
			by[at] = best{e.rays, j.Goal.weigh(values, s)}
		}
	}
	var all []Trial
	for _, b := range by {
		all = append(all, b.trial)
	}
	slices.SortFunc(all, func(a, b Trial) int { return slices.Compare(a.Values, b.Values) })
	return all
}

// unbeaten returns the trials that no other beats in both aims, the first aim rising.
func unbeaten(all []Trial, sign [2]float64) []Trial {
	sorted := slices.Clone(all)
	slices.SortStableFunc(sorted, func(a, b Trial) int {
		for i := range sign {
			switch x, y := sign[i]*a.Measures[i], sign[i]*b.Measures[i]; {
			case x > y:
				return -1
			case x < y:
				return 1
			}
		}
		return 0
	})
	var kept []Trial
	best := math.Inf(-1)
	for _, t := range sorted {
		if v := sign[1] * t.Measures[1]; v > best {
			best = v
			kept = append(kept, t)
		}
	}
	slices.SortStableFunc(kept, func(a, b Trial) int {
		if a.Measures[0] < b.Measures[0] {
			return -1
		}
		return 1
	})
	return kept
}

// thin keeps the two ends and, between them, points that stand about evenly apart.
func thin(points []Trial, most int) []Trial {
	if len(points) <= most {
		return points
	}
	length := make([]float64, len(points)) // along the front, both aims by their range
	var low, high [2]float64
	for a := range low {
		low[a], high[a] = math.Inf(1), math.Inf(-1)
		for _, p := range points {
			low[a], high[a] = min(low[a], p.Measures[a]), max(high[a], p.Measures[a])
		}
	}
	for i := 1; i < len(points); i++ {
		step := 0.0
		for a := range low {
			if high[a] > low[a] {
				step = math.Hypot(step, (points[i].Measures[a]-points[i-1].Measures[a])/(high[a]-low[a]))
			}
		}
		length[i] = length[i-1] + step
	}
	var kept []Trial
	next := 0
	for i, p := range points {
		if length[i] >= length[len(points)-1]*float64(next)/float64(most-1)-1e-12 {
			kept = append(kept, p)
			for next < most && length[i] >= length[len(points)-1]*float64(next)/float64(most-1)-1e-12 {
				next++
			}
		}
	}
	return kept
}
