package trace

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"

	"pavilight/facets"
)

// brilliantOf is a round brilliant of width 2 with the proportions named in the study's
// reports and, where those name none, middle ones of the trade.
func brilliantOf(t *testing.T, table, crown, pavilion float64) *facets.Stone {
	t.Helper()
	p, err := facets.ParseProportions("round",
		fmt.Sprintf("table=%g,crown=%g,pavilion=%g,star=50,lower=75,girdle=3,culet=0.5", table, crown,
			pavilion))
	if err != nil {
		t.Fatal(err)
	}
	s, err := p.Stone(2)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// crownless is the same with no crown at all: the table is as wide as the girdle.
func crownless(t *testing.T, pavilion float64) *facets.Stone {
	whole := brilliantOf(t, 56, 34, pavilion)
	var planes []facets.Plane
	girdle := math.Inf(-1)
	for _, f := range whole.Facets {
		if f.Side == facets.Pavilion || f.Side == facets.Girdle {
			planes = append(planes, facets.Plane{Normal: f.Normal, Distance: f.Distance, Side: f.Side})
		}
		if f.Side == facets.Crown {
			continue
		}
		for _, c := range f.Corners {
			if f.Side == facets.Girdle {
				girdle = max(girdle, whole.Corners[c][2])
			}
		}
	}
	return solid(t, cut(planes, facets.Table, 0, girdle, 0))
}

// TestStudyOf1998 asks whether the trends hold that were reported of the study of the round
// brilliant by Hemphill, Reinitz, Johnson and Shigley, Gems & Gemology 34(3), Fall 1998:
// even light from above on a diamond; what comes back upward is weighted by a factor
// that is 1 straight up and falls to 0 toward the horizon. The reports give neither
// that factor nor any value, so only the order of stones is checked, and it must be
// the same for three factors that fall in different ways.
func TestStudyOf1998(t *testing.T) {
	const source = "trend of the 1998 study as reported in JCK, autumn 1998"
	samples := 1 << 15
	if *long {
		samples = 1 << 20
	}
	factors := []func(cos float64) float64{
		func(cos float64) float64 { return cos },
		func(cos float64) float64 { return cos * cos },
		func(cos float64) float64 { return 1 - math.Acos(cos)*2/math.Pi },
	}
	known := map[string][]estimate{}
	weighted := func(name string, stone func() *facets.Stone) []estimate {
		if e, ok := known[name]; ok {
			return e
		}
		b, err := newBody(stone())
		if err != nil {
			t.Fatal(err)
		}
		planes := forwardPlanes(b)
		e := overStreams(len(factors), samples, func(rng *rand.Rand, add []float64) {
			x, d := direction(rng, 0)
			f := forward{planes: planes, n: 2.417, m: 1, rng: rng}
			f.seen = func(cos, power float64) {
				for i, factor := range factors {
					add[i] += factor(cos) * power
				}
			}
			f.follow(x, d, 1, true)
		})
		for i := range e { // per light that falls on the girdle's outline
			k := 2 * b.unit * b.unit
			e[i] = estimate{e[i].mean * k, e[i].error * k}
		}
		known[name] = e
		return e
	}
	type stone struct{ table, crown, pavilion float64 }
	name := func(s stone) string {
		return fmt.Sprintf("table %v crown %v pavilion %v", s.table, s.crown, s.pavilion)
	}
	of := func(s stone) []estimate {
		return weighted(name(s), func() *facets.Stone {
			if s.crown == 0 {
				return crownless(t, s.pavilion)
			}
			return brilliantOf(t, s.table, s.crown, s.pavilion)
		})
	}
	for _, row := range []struct {
		what        string
		more, less  stone
		onlyForLong bool // stones too much alike for few samples
	}{
		{"no crown at all returns the most", stone{100, 0, 40.5}, stone{56, 23, 40.5}, true},
		{"a crown above 34.5° never returns much", stone{56, 23, 40.5}, stone{56, 40, 40.5}, false},
		{"a crown above 34.5° never returns much", stone{56, 23, 40.5}, stone{56, 37, 40.5}, true},
		{"the best crown of 10° or more has 23°", stone{56, 23, 40.5}, stone{56, 10, 40.5}, true},
		{"the best crown of 10° or more has 23°", stone{56, 23, 40.5}, stone{56, 15, 40.5}, true},
		{"the best crown of 10° or more has 23°", stone{56, 23, 40.5}, stone{56, 30, 40.5}, true},
		{"tables under 57 % return more", stone{56, 34, 40.5}, stone{70, 34, 40.5}, false},
		{"tables under 57 % return more", stone{56, 34, 40.5}, stone{62, 34, 40.5}, true},
		{"pavilions of 38 to 42° return more", stone{56, 34, 40.5}, stone{56, 34, 36}, false},
		{"pavilions of 38 to 42° return more", stone{56, 34, 41}, stone{56, 34, 46}, true},
		{"crown 34.5° returns less than the most", stone{56, 23, 40.5}, stone{56, 34.5, 40.5}, true},
		{"Tolkowsky's cut is not the greatest", stone{56, 23, 40.5}, stone{53, 34.5, 40.75}, true},
		{"Tolkowsky's cut is not the greatest", stone{100, 0, 40.5}, stone{53, 34.5, 40.75}, false},
	} {
		if row.onlyForLong && !*long {
			continue
		}
		more, less := of(row.more), of(row.less)
		if row.onlyForLong {
			row.what += " " + longForm
		}
		for i := range factors {
			// Three factors and five to thirteen rows, one-sided.
			above(t, row.what, more[i], less[i], 3, source)
		}
	}
}
