package facets

import "math"

// maxLPVariables is the most variables a linearProgram may have: three of place and one of size.
const maxLPVariables = 4

// constraint is a·x <= b over a linearProgram's variables. Unused entries of a are zero.
type constraint struct {
	a [maxLPVariables]float64
	b float64
}

// linearProgram maximises goal·x under constraints, for up to four variables.
// It is a dual simplex method (Lemke 1954) with the basis written out: the
// optimum is the corner of as many constraints as there are variables, and a
// violated constraint takes the place of one of them. Constraints may be added
// after a solution, and the next one starts from there, which is what cutting
// planes need and what a general solver does not offer.
type linearProgram struct {
	variables   int
	goal        [maxLPVariables]float64
	constraints []constraint
	basis       [maxLPVariables]int // numbers of the constraints that meet in the optimum
	corner      [maxLPVariables]float64
	slack       float64 // by how much, per unit of a, a constraint may be overstepped
}

// lpStatus says how a solution ended.
type lpStatus int

const (
	lpOptimal lpStatus = iota
	lpEmpty            // no point obeys all constraints
	lpStuck            // rounding kept the corner from settling
)

// lpBland is the number of exchanges after which the first violated constraint
// is taken in place of the worst, which cannot cycle (Bland 1977); lpMost ends it.
const (
	lpBland = 200
	lpMost  = 2000
)

// solve finds the optimum from the present basis, whose multipliers must not
// be negative.
func (l *linearProgram) solve() lpStatus {
	n := l.variables
	for exchange := range lpMost {
		var m [maxLPVariables][maxLPVariables]float64
		var rhs [maxLPVariables]float64
		for i := range n {
			c := &l.constraints[l.basis[i]]
			m[i], rhs[i] = c.a, c.b
		}
		inverse, ok := invert(m, n)
		if !ok {
			return lpStuck
		}
		for k := range n {
			l.corner[k] = 0
			for i := range n {
				l.corner[k] += inverse[k][i] * rhs[i]
			}
		}
		enter, worst := -1, l.slack
		for j := range l.constraints {
			c := &l.constraints[j]
			over := c.a[0]*l.corner[0] + c.a[1]*l.corner[1] + c.a[2]*l.corner[2] + c.a[3]*l.corner[3] - c.b
			if over > worst && !l.inBasis(j) {
				enter, worst = j, over
				if exchange > lpBland {
					break
				}
			}
		}
		if enter < 0 {
			return lpOptimal
		}
		// Multipliers of goal and of the entering constraint over the basis.
		leave, least := -1, math.Inf(1)
		for i := range n {
			lambda, mu := 0.0, 0.0
			for k := range n {
				lambda += l.goal[k] * inverse[k][i]
				mu += l.constraints[enter].a[k] * inverse[k][i]
			}
			if mu <= 1e-12 {
				continue // mu is a ratio of unit-sized rows; less is rounding
			}
			ratio := max(lambda, 0) / mu
			if ratio < least || ratio == least && l.basis[i] < l.basis[leave] {
				leave, least = i, ratio
			}
		}
		if leave < 0 {
			return lpEmpty
		}
		l.basis[leave] = enter
	}
	return lpStuck
}

func (l *linearProgram) inBasis(j int) bool {
	for i := range l.variables {
		if l.basis[i] == j {
			return true
		}
	}
	return false
}

// invert returns the inverse of the leading n x n block, false if it is singular to rounding.
func invert(m [maxLPVariables][maxLPVariables]float64,
	n int) (inv [maxLPVariables][maxLPVariables]float64, ok bool) {
	for i := range n {
		inv[i][i] = 1
	}
	for col := range n {
		pivot := col
		for r := col + 1; r < n; r++ {
			if math.Abs(m[r][col]) > math.Abs(m[pivot][col]) {
				pivot = r
			}
		}
		if math.Abs(m[pivot][col]) < 1e-14 {
			return inv, false
		}
		m[col], m[pivot] = m[pivot], m[col]
		inv[col], inv[pivot] = inv[pivot], inv[col]
		f := 1 / m[col][col]
		for k := range n {
			m[col][k] *= f
			inv[col][k] *= f
		}
		for r := range n {
			if f := m[r][col]; r != col && f != 0 {
				for k := range n {
					m[r][k] -= f * m[col][k]
					inv[r][k] -= f * inv[col][k]
				}
			}
		}
	}
	return inv, true
}
