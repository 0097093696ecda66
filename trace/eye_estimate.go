package trace

import (
	"fmt"
	"math"

	"gonum.org/v1/gonum/stat/distuv"
)

// Estimate is a measured value with its standard error, from a number of
// independent pictures.
type Estimate struct {
	Value    float64 `json:"value"`
	Error    float64 `json:"standard_error"`
	Pictures int     `json:"pictures"`
}

// String returns the value and its standard error.
func (e Estimate) String() string { return fmt.Sprintf("%.4f ± %.4f", e.Value, e.Error) }

// differentLevel is how seldom two equal stones may be called different.
const differentLevel = 0.01

// DiffersFrom reports whether two values, of independent pictures, are further apart than
// chance allows once in a hundred times: Welch's form of Student's t.
// B. L. Welch, Biometrika 34 (1947) 28.
func (e Estimate) DiffersFrom(o Estimate) bool {
	v1, v2 := e.Error*e.Error, o.Error*o.Error
	if v1+v2 == 0 {
		return e.Value != o.Value
	}
	freedom := (v1 + v2) * (v1 + v2) / (v1*v1/float64(e.Pictures-1) + v2*v2/float64(o.Pictures-1))
	t := math.Abs(e.Value-o.Value) / math.Sqrt(v1+v2)
	return 2*distuv.StudentsT{Mu: 0, Sigma: 1, Nu: freedom}.Survival(t) < differentLevel
}

// none stands for the picture to be left out where none is.
const none = -1

// jackknife estimates a quantity from n independent pictures. of returns it as computed
// from all but one of them, or from all for none.
//
// Noise adds to quantities that are not straight sums, in the first order by a share
// that falls with 1/n. The jackknife takes that off: n times the value from all less n-1
// times the mean of those from all but one. The next order is smaller by about the
// same factor again, and is counted as an error.
//
// M. H. Quenouille, Biometrika 43 (1956) 353; J. W. Tukey, Ann. Math. Stat. 29 (1958) 614.
func jackknife(n int, of func(without int) float64) Estimate {
	all := of(none)
	left := make([]float64, n)
	mean := 0.0
	for i := range left {
		left[i] = of(i)
		mean += left[i] / float64(n)
	}
	noise := float64(n-1) * (mean - all)
	spread := 0.0
	for _, v := range left {
		spread += (v - mean) * (v - mean)
	}
	e := Estimate{Value: all - noise, Error: math.Sqrt(spread * float64(n-1) / float64(n)), Pictures: n}
	if all != 0 {
		e.Error = math.Hypot(e.Error, noise*noise/all)
	}
	return e
}

// root returns the square root of an estimate of a square. Noise may take the square
// below 0, where the root is 0.
func (e Estimate) root() Estimate {
	if e.Value <= 0 {
		return Estimate{0, math.Sqrt(math.Abs(e.Value) + e.Error), e.Pictures}
	}
	root := math.Sqrt(e.Value)
	// The slope of the root, no steeper than from 0 to the error itself.
	return Estimate{root, min(e.Error/(2*root), math.Sqrt(e.Error)), e.Pictures}
}

// pairs holds the mean over the picture of the product of one quantity in two pictures,
// for each two. Products of a picture with itself hold its noise; the others do not, so
// that their mean is the true square without any bias.
type pairs [][]float64

// newPairs forms the products of n pictures of one quantity each.
func newPairs(pictures [][]float64) pairs {
	m := make(pairs, len(pictures))
	for i, a := range pictures {
		m[i] = make([]float64, len(pictures))
		for j, b := range pictures[:i] {
			sum := 0.0
			for k, v := range a {
				sum += v * b[k]
			}
			m[i][j] = sum / float64(len(a))
			m[j][i] = m[i][j]
		}
	}
	return m
}

// mean returns the mean over all pairs of different pictures, one picture left out.
func (m pairs) mean(without int) float64 {
	sum, count := 0.0, 0
	for i := range m {
		for j := range m[:i] {
			if i != without && j != without {
				sum += m[i][j]
				count++
			}
		}
	}
	return sum / float64(count)
}
