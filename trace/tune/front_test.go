package tune

import (
	"context"
	"math"
	"testing"
)

// The published fronts of two test problems are found: Schaffer's (Proc. 1st Int. Conf.
// Genetic Algorithms, 1985, 93), straight in its variable, and Fonseca & Fleming's (Evol.
// Comput. 3 (1995) 1), which bends the wrong way for any mix of weights.
func TestFronts(t *testing.T) {
	tests := []struct {
		name  string
		vs    []Variable
		f     func(x []float64) [2]float64
		front func(first float64) float64 // the second aim on the front, for the first
		ends  [2]float64                  // of the first aim
	}{
		{"Schaffer", span(1, -4, 6, 5), func(x []float64) [2]float64 { return [2]float64{x[0] * x[0], (x[0] - 2) * (x[0] - 2)} },
			func(a float64) float64 { return math.Pow(math.Sqrt(a)-2, 2) }, [2]float64{0, 4}},
		{"Fonseca and Fleming", span(2, -2, 2, 1.5), func(x []float64) [2]float64 {
			var a, b float64
			for _, v := range x {
				a += (v - 1/math.Sqrt2) * (v - 1/math.Sqrt2)
				b += (v + 1/math.Sqrt2) * (v + 1/math.Sqrt2)
			}
			return [2]float64{1 - math.Exp(-a), 1 - math.Exp(-b)}
		}, func(a float64) float64 { // on the front both variables are alike
			v := 1/math.Sqrt2 - math.Sqrt(-math.Log(1-a)/2)
			return 1 - math.Exp(-2*(v+1/math.Sqrt2)*(v+1/math.Sqrt2))
		}, [2]float64{0, 1 - math.Exp(-4)}},
	}
	for _, test := range tests {
		j := plainJudge(test.vs, 0, nil)
		j.Goal.Aims = []Aim{{Leakage, -1}, {HeadShade, -1}}
		j.observe = func(_ context.Context, x []float64, _ effort) (sight, error) {
			v := test.f(x)
			return sight{Values: [][]float64{v[:]}, Errors: [][]float64{{0, 0}}}, nil
		}
		f, err := tradeOff(context.Background(), j, nil)
		if err != nil {
			t.Fatal(err)
		}
		if len(f.Points) < 8 || len(f.Points) > frontPoints {
			t.Errorf("%s: %d points", test.name, len(f.Points))
		}
		for i, p := range f.Points {
			a, b := p.Measures[0], p.Measures[1]
			if off := b - test.front(a); off > 0.08 || off < -1e-9 {
				t.Errorf("%s: %v, %v lies %.3f off the front", test.name, a, b, off)
			}
			if i > 0 && (a <= f.Points[i-1].Measures[0] || b >= f.Points[i-1].Measures[1]) {
				t.Errorf("%s: point %d beats or is beaten by the one before", test.name, i)
			}
		}
		first, last := f.Points[0].Measures[0], f.Points[len(f.Points)-1].Measures[0]
		if span := test.ends[1] - test.ends[0]; math.Abs(first-test.ends[0]) > 0.05*span || math.Abs(last-test.ends[1]) > 0.05*span {
			t.Errorf("%s: the front runs from %v to %v, want %v", test.name, first, last, test.ends)
		}
	}
	j := plainJudge(span(1, 0, 1, 0), 0, nil)
	if _, err := TradeOff(context.Background(), j.Problem, nil, nil); err == nil {
		t.Error("a trade-off of one goal passes")
	}
}
