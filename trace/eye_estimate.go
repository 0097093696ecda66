package trace

import (
	"fmt"
	"math"
	"math/bits"

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

// set is a set of pictures, one bit each.
type set uint64

func (s set) has(g int) bool { return s>>g&1 != 0 }

// halved estimates a quantity from n independent pictures, n a power of two up to 64. of
// returns it as computed from a set of them.
//
// The pictures are split into halves in n-1 ways, any two of which share half of each half:
// the squared differences between the halves give the error, for straight means the
// usual one. Noise adds to quantities that are no straight means a share that, in the
// first order, is twice as large from half the pictures as from all; noise is that share,
// and is taken off. The next order is smaller by about the same factor again, and counts
// as an error. Halves, unlike leaving out one picture, also serve where a quantity
// jumps at a threshold.
//
// P. J. McCarthy, Pseudo-replication: half samples, Rev. Int. Stat. Inst. 37 (1969) 239.
func halved(n int, of func(set) float64) (e Estimate, noise float64) {
	full := set(1)<<n - 1
	all, mean, spread := of(full), 0.0, 0.0
	for split := 1; split < n; split++ {
		var half set
		for g := range n {
			half |= set(bits.OnesCount(uint(g&split))&1) << g
		}
		a, b := of(half), of(full&^half)
		mean += (a + b) / float64(2*(n-1))
		spread += (a - b) * (a - b) / float64(4*(n-1))
	}
	noise = mean - all
	e = Estimate{Value: all - noise, Error: math.Sqrt(spread), Pictures: n}
	if all != 0 {
		e.Error = math.Hypot(e.Error, noise*min(math.Abs(noise/all), 1))
	}
	return e, noise
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

// mean returns the mean over all pairs of different pictures of a set.
func (m pairs) mean(of set) float64 {
	sum, count := 0.0, 0
	for i := range m {
		for j := range m[:i] {
			if of.has(i) && of.has(j) {
				sum += m[i][j]
				count++
			}
		}
	}
	return sum / float64(count)
}
