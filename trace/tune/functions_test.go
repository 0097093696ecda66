package tune

import (
	"context"
	"errors"
	"hash/fnv"
	"math"
	"math/rand/v2"
	"path/filepath"
	"strings"
	"testing"
	"time"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// plainJudge returns a judge of a plain function of the variables instead of stones:
// the goal is its negative. Every answer carries independent normal noise whose standard
// deviation falls with the root of the rays, as a traced stone's does.
func plainJudge(vs []Variable, noise float64, f func(x []float64) float64) *judge {
	one := Case{Surrounding: trace.Surrounding{Medium: &gems.Material{Key: "air"}}}
	j := &judge{
		Problem: &Problem{Variables: vs, Goal: Goal{Aims: []Aim{{LightReturn, 1}}, Cases: []Case{one}}, Seed: 1},
		known:   map[string]sight{}, asked: map[string]bool{},
	}
	j.observe = func(_ context.Context, x []float64, e effort) (sight, error) {
		rays := float64(e.rays)
		if e.err > 0 {
			rays = 1e6
		}
		sd := noise * math.Sqrt(float64(rough.rays)/rays)
		h := fnv.New64a()
		h.Write([]byte(key(x, e, j.Seed)))
		normal := rand.New(rand.NewPCG(h.Sum64(), 1)).NormFloat64()
		return sight{Values: [][]float64{{-f(x) + sd*normal}}, Errors: [][]float64{{sd}}}, nil
	}
	return j
}

func span(n int, low, high, now float64) []Variable {
	vs := make([]Variable, n)
	for i := range vs {
		vs[i] = Variable{Name: string(rune('a' + i)), Low: low, High: high, Now: now}
	}
	return vs
}

// The minima of published test functions are found, under noise.
func TestPublishedFunctions(t *testing.T) {
	tests := []struct {
		name      string
		source    string
		vs        []Variable
		scale     float64 // the function is divided by it
		noise     float64 // standard deviation of the roughest look, after that
		f         func(x []float64) float64
		minima    [][]float64
		tolerance float64 // in each variable
	}{
		{
			"Branin", "Branin, IBM J. Res. Dev. 16 (1972) 504; three equal minima of 0.397887",
			[]Variable{{Name: "a", Low: -5, High: 10, Now: 0}, {Name: "b", Low: 0, High: 15, Now: 14}}, 100, 0.001,
			func(x []float64) float64 {
				c := x[1] - 5.1/(4*math.Pi*math.Pi)*x[0]*x[0] + 5/math.Pi*x[0] - 6
				return c*c + 10*(1-1/(8*math.Pi))*math.Cos(x[0]) + 10
			},
			[][]float64{{-math.Pi, 12.275}, {math.Pi, 2.275}, {9.42478, 2.475}}, 0.3,
		},
		{
			"Himmelblau", "Himmelblau, Applied Nonlinear Programming (1972) 428; four minima of 0",
			span(2, -5, 5, 0), 100, 0.001,
			func(x []float64) float64 {
				a, b := x[0]*x[0]+x[1]-11, x[0]+x[1]*x[1]-7
				return a*a + b*b
			},
			[][]float64{{3, 2}, {-2.805118, 3.131312}, {-3.779310, -3.283186}, {3.584428, -1.848126}}, 0.15,
		},
		{
			"Rosenbrock's valley", "Rosenbrock, Comput. J. 3 (1960) 175; minimum at (1, 1)",
			span(2, -2, 2, -1.2), 10, 0.0001,
			func(x []float64) float64 {
				a, b := x[1]-x[0]*x[0], 1-x[0]
				return 100*a*a + b*b
			},
			[][]float64{{1, 1}}, 0.15,
		},
		{
			"Rastrigin, many humps", "Rastrigin (1974), as printed by Mühlenbein, Schomisch & Born, Parallel Comput. 17 (1991) 619; minimum at 0",
			span(2, -4.1, 5.2, 3), 40, 0.001,
			func(x []float64) float64 {
				sum := 10 * float64(len(x))
				for _, v := range x {
					sum += v*v - 10*math.Cos(2*math.Pi*v)
				}
				return sum
			},
			[][]float64{{0, 0}}, 0.05,
		},
		{
			"sphere in six variables", "sum of squares, minimum at 0.7",
			span(6, -3, 3, 2.5), 10, 0.0005,
			func(x []float64) float64 {
				sum := 0.0
				for _, v := range x {
					sum += (v - 0.7) * (v - 0.7)
				}
				return sum
			},
			[][]float64{{0.7, 0.7, 0.7, 0.7, 0.7, 0.7}}, 0.15,
		},
		{
			"Easom's needle on a plain", "Easom (1990), University of Louisville; minimum of -1 at (π, π), flat elsewhere",
			span(2, 0, 7, 0.5), 1, 0.001,
			func(x []float64) float64 {
				a, b := x[0]-math.Pi, x[1]-math.Pi
				return -math.Cos(x[0]) * math.Cos(x[1]) * math.Exp(-a*a-b*b)
			},
			[][]float64{{math.Pi, math.Pi}}, 0.1,
		},
		{
			"a cliff beside the best", "closed form: rises to 2, falls off beyond it",
			span(2, 0, 4, 1), 1, 0.001,
			func(x []float64) float64 {
				if x[0]+x[1] > 4 {
					return 0
				}
				return -(x[0] + x[1]) / 4 * math.Exp(-(x[0]-2)*(x[0]-2))
			},
			[][]float64{{2, 2}}, 0.15,
		},
	}
	for _, test := range tests {
		t.Run(test.name, func(t *testing.T) {
			j := plainJudge(test.vs, test.noise, func(x []float64) float64 { return test.f(x) / test.scale })
			o, err := search(context.Background(), j, nil)
			if err != nil {
				t.Fatal(err)
			}
			nearest := math.Inf(1)
			for _, m := range test.minima {
				far := 0.0
				for i := range m {
					far = max(far, math.Abs(o.Best.Values[i]-m[i]))
				}
				nearest = min(nearest, far)
			}
			if nearest > test.tolerance {
				t.Errorf("found %v, %.3g from the nearest of %v, want at most %g (%s)", o.Best.Values, nearest, test.minima, test.tolerance, test.source)
			}
			if !o.Better {
				t.Errorf("the gain %v ± %v is not claimed", o.Gain, o.GainError)
			}
		})
	}
}

// A function of pure noise has no best: the search must not claim one.
func TestNoiseIsNotClaimed(t *testing.T) {
	claimed := 0
	for seed := range uint64(20) {
		j := plainJudge(span(2, 0, 1, 0.5), 0.01, func([]float64) float64 { return 0 })
		j.Seed = seed
		o, err := search(context.Background(), j, nil)
		if err != nil {
			t.Fatal(err)
		}
		if o.Better {
			claimed++
		}
	}
	if claimed > 1 { // each at 1 in 1,000: two in 20 happen once in 5,000 runs
		t.Errorf("%d of 20 searches of noise claim a gain", claimed)
	}
}

// Where the goal is not a number the stone does not fit, and the search goes on.
func TestNotANumber(t *testing.T) {
	j := plainJudge(span(2, 0, 4, 1), 0, func(x []float64) float64 {
		if x[0] > 2 && x[1] > 1 {
			return math.NaN()
		}
		if x[0] < 0.5 {
			return math.Inf(-1)
		}
		return (x[0]-3)*(x[0]-3) + (x[1]-0.5)*(x[1]-0.5)
	})
	o, err := search(context.Background(), j, nil)
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(o.Best.Values[0]-3) > 0.1 || math.Abs(o.Best.Values[1]-0.5) > 0.1 {
		t.Errorf("found %v, want 3, 0.5", o.Best.Values)
	}
	j = plainJudge(span(1, 0, 4, 1), 0, func([]float64) float64 { return math.NaN() })
	_, err = search(context.Background(), j, nil)
	var none *NothingFitsError
	if !errors.As(err, &none) || !strings.Contains(err.Error(), "has no value here") {
		t.Errorf("a goal that is never a number: %v", err)
	}
}

// Values are judged after rounding to the machine's steps.
func TestOnTheSteps(t *testing.T) {
	vs := []Variable{{Name: "a", Low: 40, High: 44, Now: 41, Step: 0.25}, {Name: "b", Low: 0.1, High: 0.9, Now: 0.5, Step: 0.3}}
	j := plainJudge(vs, 0, func(x []float64) float64 { return math.Abs(x[0]-42.1) + math.Abs(x[1]-0.65) })
	inner := j.observe
	j.observe = func(ctx context.Context, x []float64, e effort) (sight, error) {
		for i, v := range vs {
			if n := x[i] / v.Step; math.Abs(n-math.Round(n)) > 1e-6 && !e.always {
				t.Errorf("%s was tried at %v, off the steps of %v", v.Name, x[i], v.Step)
			}
			if (x[i] < v.Low || x[i] > v.High) && !e.always {
				t.Errorf("%s was tried at %v, outside %v to %v", v.Name, x[i], v.Low, v.High)
			}
		}
		return inner(ctx, x, e)
	}
	o, err := search(context.Background(), j, nil)
	if err != nil {
		t.Fatal(err)
	}
	if o.Best.Values[0] != 42 || o.Best.Values[1] != 0.6 {
		t.Errorf("found %v, want 42, 0.6", o.Best.Values)
	}
}

// A run that is killed at any place goes on to the same answer from its memory, and
// asks nothing twice.
func TestResume(t *testing.T) {
	f := func(x []float64) float64 { return math.Hypot(x[0]-1, x[1]+0.5) / 5 }
	whole, err := search(context.Background(), plainJudge(span(2, -2, 2, 0), 0.001, f), nil)
	if err != nil {
		t.Fatal(err)
	}
	path := filepath.Join(t.TempDir(), "seen")
	open := func() (*judge, *Memory) {
		j := plainJudge(span(2, -2, 2, 0), 0.001, f)
		j.Material = material(t, "quartz")
		m := &Memory{Path: path, Purpose: "test"}
		if err := m.open(j); err != nil {
			t.Fatal(err)
		}
		return j, m
	}
	killed := errors.New("killed")
	total := 0
	var o *Outcome
	for kills := 0; ; kills++ {
		j, m := open()
		ctx, cancel := context.WithCancelCause(context.Background())
		inner, n := j.observe, 0
		j.observe = func(c context.Context, x []float64, e effort) (sight, error) {
			j.mu.Lock()
			n++
			total++
			if n == 90 {
				cancel(killed)
			}
			j.mu.Unlock()
			return inner(c, x, e)
		}
		o, err = search(ctx, j, nil)
		if err2 := m.Close(); err2 != nil {
			t.Fatal(err2)
		}
		cancel(nil)
		if err == nil {
			break
		}
		if !errors.Is(err, killed) {
			t.Fatal(err)
		}
		if o == nil || !o.Best.Fit {
			t.Fatalf("stopped after %d questions and kept nothing", total)
		}
		if kills > 50 {
			t.Fatal("it never ends")
		}
	}
	if o.Best.Score != whole.Best.Score || o.Gain != whole.Gain || o.Tried != whole.Tried {
		t.Errorf("resumed to %+v, want %+v", o, whole)
	}
	if total > whole.Tried {
		t.Errorf("%d stones were looked at, %d would do", total, whole.Tried)
	}
}

// Cancelling returns the cause and the best so far, and no goroutine goes on.
func TestCancel(t *testing.T) {
	ctx, cancel := context.WithTimeout(context.Background(), 20*time.Millisecond)
	defer cancel()
	j := plainJudge(span(2, -2, 2, 0), 0, func(x []float64) float64 {
		time.Sleep(time.Millisecond)
		return x[0]
	})
	o, err := search(ctx, j, nil)
	if !errors.Is(err, context.DeadlineExceeded) {
		t.Fatalf("error %v", err)
	}
	if o == nil || !o.Best.Fit {
		t.Fatal("nothing was kept")
	}
	if n := j.tried(); n == 0 {
		t.Fatal("nothing was tried")
	} else if time.Sleep(10 * time.Millisecond); j.tried() != n {
		t.Error("it goes on after it has returned")
	}
}

// A steady goal keeps off the cliff that the plain one climbs to: with errors of 0.1 about
// the best of a slope that falls off at 2, the best lies 0.1 before it.
func TestSteady(t *testing.T) {
	vs := []Variable{{Name: "a", Unit: "degrees", Low: 0, High: 3, Now: 1, Step: 0.05}}
	f := func(x []float64) float64 {
		if x[0] > 2+1e-9 {
			return 0
		}
		return -x[0]
	}
	for steady, want := range map[facets.Angle]float64{0: 2, 0.1 * facets.Degree: 1.9} {
		j := plainJudge(vs, 0, f)
		j.Steady = steady
		o, err := search(context.Background(), j, nil)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(o.Best.Values[0]-want) > 1e-6 {
			t.Errorf("steady within %v: found %v, want %v", steady, o.Best.Values, want)
		}
		if lost := math.Abs(o.Best.Score - (want - steady.Degrees())); lost > 1e-6 {
			t.Errorf("steady within %v: score %v", steady, o.Best.Score)
		}
	}
}

// A pit between the stone and the end of what is to be forgiven counts, and the more is to
// be forgiven the less a stone is worth.
func TestSteadySeesWhatLiesBetween(t *testing.T) {
	vs := []Variable{{Name: "a", Unit: "degrees", Low: 0, High: 3, Now: 1, Step: 0.1}}
	j := plainJudge(vs, 0, func(x []float64) float64 { // of 1 away from the pit, of 9 in it
		if math.Abs(x[0]-1.3) < 0.06 {
			return 9
		}
		return 1
	})
	last := math.Inf(1)
	for steady, want := range map[float64]float64{0: -1, 0.2: -1, 0.3: -9, 0.5: -9, 1: -9} {
		j.Steady = facets.Angle(steady) * facets.Degree
		got, err := j.try(context.Background(), []float64{1}, claims)
		if err != nil || got.Score != want {
			t.Errorf("steady within %g: %v, %v, want %v", steady, got.Score, err, want)
		}
	}
	for _, steady := range []float64{0, 0.1, 0.25, 0.5, 1, 2} {
		j.Steady = facets.Angle(steady) * facets.Degree
		got, err := j.try(context.Background(), []float64{1.9}, claims)
		if err != nil || got.Score > last {
			t.Errorf("steady within %g: %v after %v, %v", steady, got.Score, last, err)
		}
		last = got.Score
	}
	if last != -9 {
		t.Errorf("with the pit in reach the score is %v", last)
	}
	j.Steady = MostSteady + facets.Degree
	if err := j.check(); err == nil {
		t.Error("any slip can be asked for")
	}
}
