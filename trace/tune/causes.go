package tune

import (
	"math"
	"slices"

	"gonum.org/v1/gonum/mat"

	"pavilight/facets"
)

// Cause is one error of the machine and what it does to the light return, the others
// left as they fall.
type Cause struct {
	What string // dop tilt, twist, shift, angle, index, overcut
	Tier string // of the tier; empty for an error of a whole side

	// Slope is the change of light return with the error: for each degree steeper, each
	// degree of azimuth onward, each mm of overcut. It is meaningful only if HasSlope: tilt
	// and shift have no direction that counts.
	Slope, SlopeError float64
	HasSlope          bool

	// Alone is the standard deviation of the light return that this error makes by itself,
	// with its standard error. Share is its part of the return's variance.
	Alone, AloneError float64
	Share             float64
}

// factor is one drawn number: its values over the draws and its variance.
type factor struct {
	cause    int
	values   []float64
	unit     float64 // of the machine's error: what a value of 1 stands for
	variance float64
	even     bool // may act by its square, too
}

// causes finds what each error does by least squares over all draws: a slope and a
// bend for each. It returns them in falling order of Alone, and the share of the
// variance that is left over; nil where the draws are too few to tell them apart.
func causes(b *bench, m Machine, draws []Draw) (list []Cause, unknown float64) {
	var factors []factor
	add := func(c Cause, unit, variance float64, even bool, of func(s *slips) float64) {
		if unit == 0 {
			return
		}
		k := slices.IndexFunc(list, func(o Cause) bool { return o.What == c.What && o.Tier == c.Tier })
		if k < 0 {
			k = len(list)
			list = append(list, c)
		}
		f := factor{cause: k, unit: unit, variance: variance, even: even}
		for i := range draws {
			f.values = append(f.values, of(&draws[i].slips))
		}
		factors = append(factors, f)
	}
	for axis := range 2 {
		add(Cause{What: "dop tilt"}, m.DopTilt.Degrees(), 1, true, func(s *slips) float64 { return s.tilt[axis] })
		add(Cause{What: "shift"}, m.ShiftMM, 1, true, func(s *slips) float64 { return s.shift[axis] })
	}
	add(Cause{What: "twist", HasSlope: true}, m.Twist.Degrees(), 1, true, func(s *slips) float64 { return s.twist })
	for i := range b.planes {
		n := len(b.planes[i])
		if n == 0 {
			continue
		}
		t := &b.plan.Tiers[i]
		flat := t.Side == facets.Table || t.HasAngle && t.Angle == 0
		add(Cause{What: "angle", Tier: t.Name, HasSlope: !flat}, m.Angle.Degrees(), 1, true, func(s *slips) float64 { return s.angle[i] })
		add(Cause{What: "index", Tier: t.Name, HasSlope: !flat}, m.Index.Degrees(), 1, true, func(s *slips) float64 { return s.index[i] })
		add(Cause{What: "overcut", Tier: t.Name, HasSlope: true}, m.OvercutMM, 1.0/(12*float64(n)), false, func(s *slips) float64 {
			mean := 0.0
			for _, u := range s.overcut[i] {
				mean += (u - 0.5) / float64(n)
			}
			return mean
		})
	}
	bends := 0
	for _, f := range factors {
		if f.even {
			bends++
		}
	}
	columns := 1 + len(factors) + bends
	if len(draws) < 2*columns {
		return nil, 1
	}

	x := mat.NewDense(len(draws), columns, nil)
	y := mat.NewVecDense(len(draws), nil)
	for i := range draws {
		y.SetVec(i, draws[i].Return)
		x.Set(i, 0, 1)
		bend := 1 + len(factors)
		for k, f := range factors {
			x.Set(i, 1+k, f.values[i])
			if f.even {
				x.Set(i, bend, f.values[i]*f.values[i]-1)
				bend++
			}
		}
	}
	beta, errs, left, total, ok := leastSquares(x, y)
	if !ok {
		return nil, 1
	}
	variance := make([]float64, len(list)) // by cause
	doubt := make([]float64, len(list))    // variance of that
	bend := 1 + len(factors)
	for k, f := range factors {
		c := &list[f.cause]
		if c.HasSlope {
			c.Slope, c.SlopeError = beta[1+k]/f.unit, errs[1+k]/f.unit
		}
		// A coefficient's square is too large by the square of its error.
		part := func(i int, v float64) {
			variance[f.cause] += (beta[i]*beta[i] - errs[i]*errs[i]) * v
			doubt[f.cause] += (4*beta[i]*beta[i] + 2*errs[i]*errs[i]) * errs[i] * errs[i] * v * v
		}
		part(1+k, f.variance)
		if f.even {
			part(bend, 2) // the variance of a normal number's square
			bend++
		}
	}
	for k := range list {
		c := &list[k]
		c.Alone = math.Sqrt(max(variance[k], 0))
		se := math.Sqrt(doubt[k])
		c.AloneError = min(se/(2*c.Alone), math.Sqrt(se))
		if total > 0 {
			c.Share = max(variance[k], 0) / total
		}
	}
	slices.SortStableFunc(list, func(a, b Cause) int {
		switch {
		case a.Alone > b.Alone:
			return -1
		case a.Alone < b.Alone:
			return 1
		}
		return 0
	})
	if total > 0 {
		unknown = min(left/total, 1)
	}
	return list, unknown
}

// leastSquares fits y = x beta and returns the coefficients, their standard errors, the
// variance that is left over and that of y. ok is false where the columns of x are not
// independent.
func leastSquares(x *mat.Dense, y *mat.VecDense) (beta, errs []float64, left, total float64, ok bool) {
	n, p := x.Dims()
	var normal mat.SymDense
	normal.SymOuterK(1, x.T())
	var chol mat.Cholesky
	if !chol.Factorize(&normal) {
		return nil, nil, 0, 0, false
	}
	var right, b mat.VecDense
	right.MulVec(x.T(), y)
	if chol.SolveVecTo(&b, &right) != nil {
		return nil, nil, 0, 0, false
	}
	var fitted mat.VecDense
	fitted.MulVec(x, &b)
	mean := mat.Sum(y) / float64(n)
	for i := range n {
		e := y.AtVec(i) - fitted.AtVec(i)
		left += e * e / float64(n-p)
		total += (y.AtVec(i) - mean) * (y.AtVec(i) - mean) / float64(n-1)
	}
	var inverse mat.SymDense
	if chol.InverseTo(&inverse) != nil {
		return nil, nil, 0, 0, false
	}
	for i := range p {
		beta = append(beta, b.AtVec(i))
		errs = append(errs, math.Sqrt(left*inverse.At(i, i)))
	}
	return beta, errs, left, total, true
}
