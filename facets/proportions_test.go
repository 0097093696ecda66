package facets

import (
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"
)

func mustProportions(t testing.TB, outline, pairs string, width float64) *Stone {
	t.Helper()
	p, err := ParseProportions(outline, pairs)
	if err != nil {
		t.Fatal(err)
	}
	s, err := p.Stone(width)
	if err != nil {
		t.Fatalf("%s %s: %v", outline, pairs, err)
	}
	return s
}

// tierFacets returns a stone's facets of one tier.
func tierFacets(s *Stone, tier string) []Facet {
	var out []Facet
	for _, f := range s.Facets {
		if f.Tier == tier {
			out = append(out, f)
		}
	}
	return out
}

// leanOf is a facet's angle from the girdle plane in degrees.
func leanOf(f Facet) float64 { return math.Acos(math.Abs(f.Normal[2])) * 180 / math.Pi }

// The closed construction, for a girdle radius of 1. Mains lie at azimuth 0;
// k = cos 22.5 and j = cos 11.25 degrees, t, s, l the table, star and
// lower-half shares, g half the girdle at its thick places.
//   - A main leans c and passes (1, 0, g): distance sin c + g cos c.
//   - The table's corners lie on the mains at radius t: height g + (1-t) tan c.
//   - Two mains meet over azimuth 22.5 at height g + (1 - r k) tan c at radius
//     r; the star's tip is there at r = t k + s (1 - t k), its chord on the
//     table at t k, so tan star = tan c (r k - t) / (r - t k).
//   - The chord between (1, 0, g) and the girdle point at 22.5 has its middle
//     at azimuth 11.25, radius j; the star's tip lies at radius r j along it,
//     so tan upper = (1 - r k) tan c / ((1 - r) j), distance j sin + g cos.
//   - Below likewise with q = 1 - l in place of r and the pavilion angle.
//
// The numbers were computed from these formulas in a separate program.
func TestRoundFollowsTheClosedConstruction(t *testing.T) {
	s := mustProportions(t, "round", "table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3", 2)
	const tolerance = 2e-12 // the table's 12 decimals
	for _, row := range []struct {
		tier           string
		count          int
		index          float64 // of the first, on 96 teeth
		lean, distance float64
	}{
		{"table", 1, math.NaN(), 0, 0.326783747411},
		{"crown main", 8, 0, 34, 0.584064030647},
		{"star", 8, 6, 21.501163243568, 0.493670350824},
		{"upper half", 16, 3, 40.441279305604, 0.659036544274},
		{"lower half", 16, 3, 41.761942779216, 0.675616999926},
		{"pavilion main", 8, 0, 40.5, 0.672260227298},
		{"girdle", 64, 0.75, 90, math.Cos(math.Pi / 64)},
	} {
		facets := tierFacets(s, row.tier)
		if len(facets) != row.count {
			t.Errorf("%s: %d facets, want %d", row.tier, len(facets), row.count)
			continue
		}
		if i := facets[0].Index; i != row.index && !(math.IsNaN(i) && math.IsNaN(row.index)) {
			t.Errorf("%s: first at index %v, want %v", row.tier, i, row.index)
		}
		for _, f := range facets {
			// An angle near 0 is acos of nearly 1 and loses half its digits: compare cosines.
			if math.Abs(math.Abs(f.Normal[2])-math.Cos(row.lean*math.Pi/180)) > tolerance {
				t.Errorf("%s at %v leans %.12f, want %.12f", row.tier, f.Index, leanOf(f), row.lean)
			}
			if math.Abs(f.Distance-row.distance) > tolerance {
				t.Errorf("%s at %v lies %.12f out, want %.12f", row.tier, f.Index, f.Distance, row.distance)
			}
		}
	}
	// Every corner is a true meet: 8 at the table, 8 star tips, 8 below at the
	// lower halves, the culet, and 64 above and below the girdle.
	if got, want := len(s.Corners), 8+8+8+1+2*64; got != want {
		t.Errorf("%d corners, want %d", got, want)
	}
}

func TestRoundOfTolkowsky(t *testing.T) {
	// Tolkowsky, Diamond Design (1919): table 53, crown 34.5, pavilion 40.75.
	// Without a girdle, stars half way and lower halves at three quarters, the
	// closed construction above gives these numbers (computed separately).
	s := mustProportions(t, "round", "table=53,crown=34.5,pavilion=40.75,star=50,lower=75,girdle=0", 1)
	if f, c, e := len(s.Facets), len(s.Corners), len(s.Edges); f != 57 || c != 41 || e != 96 {
		t.Errorf("%d facets, %d corners, %d edges; want 57, 41, 96", f, c, e)
	}
	m := s.Measure()
	var surface float64
	for _, f := range s.Facets {
		surface += f.Area
	}
	high, low := s.Facets[0].Distance, 0.0
	for _, c := range s.Corners {
		low = min(low, c[2])
	}
	for _, row := range []struct {
		name      string
		got, want float64
		tolerance float64
	}{
		{"star", leanOf(tierFacets(s, "star")[0]), 23.0697, 5e-5},
		{"upper half", leanOf(tierFacets(s, "upper half")[0]), 40.5782, 5e-5},
		{"lower half", leanOf(tierFacets(s, "lower half")[0]), 42.0134, 5e-5},
		{"crown height", high, 0.161511, 5e-7},
		{"pavilion depth", -low, 0.430828, 5e-7},
		{"volume", m.VolumeMM3, 0.189902, 5e-7},
		{"surface", surface, 1.918543, 5e-7},
	} {
		if math.Abs(row.got-row.want) > row.tolerance {
			t.Errorf("%s %.7f, want %.7f", row.name, row.got, row.want)
		}
	}
	octagon := mustProportions(t, "round", "table=53,crown=34.5,pavilion=40.75,girdle=0,culet=2", 1)
	if f, c, e := len(octagon.Facets), len(octagon.Corners), len(octagon.Edges); f != 58 || c != 48 || e != 104 {
		t.Errorf("with a culet %d facets, %d corners, %d edges; want 58, 48, 104", f, c, e)
	}
	if got := octagon.Measure().CuletPercent; math.Abs(got-2) > 1e-9 {
		t.Errorf("culet measures %v %%, want 2", got)
	}
}

// Historic proportions whose heights are printed: P. Tolkowsky 1919; A. Johnsen
// 1926 and S. Rösch 1927; W. F. Eppler 1939. Heights in percent of the width
// as quoted with them, to a digit.
func TestHeightsOfHistoricProportions(t *testing.T) {
	for _, row := range []struct {
		name                    string
		pairs                   string
		crown, pavilion, within float64
	}{
		{"Tolkowsky", "table=53,crown=34.5,pavilion=40.75", 16.2, 43.1, 0.06},
		{"Johnsen and Rösch", "table=56.1,crown=41.1,pavilion=38.7", 19.2, 40.0, 0.06},
		{"Eppler", "table=56,crown=33.2,pavilion=40.8", 14.4, 43.2, 0.06},
	} {
		s := mustProportions(t, "round", row.pairs+",girdle=2", 100)
		low := 0.0
		for _, c := range s.Corners {
			low = min(low, c[2])
		}
		crown, pavilion := s.Facets[0].Distance-1, -low-1 // less half the girdle
		if math.Abs(crown-row.crown) > row.within || math.Abs(pavilion-row.pavilion) > row.within {
			t.Errorf("%s: crown %.2f, pavilion %.2f; printed %.1f, %.1f", row.name, crown, pavilion, row.crown,
				row.pavilion)
		}
	}
}

// Weight formulas of the trade for diamond (density 3.515): carats = factor x
// length x width x depth (for the oval the square of the mean of length and
// width), as printed in trade texts on weight estimation. Their own corrections
// run to 5 % for depth and 2 % for a slightly thick girdle, so 7 % is what the
// printed factors claim. They are factors for stones as they are cut: long ones
// with a keel, step cuts with a full belly.
func TestWeightsAgreeWithTheTradesFormulas(t *testing.T) {
	const within = 0.07
	for _, row := range []struct {
		outline, pairs string
		factor         float64
	}{
		{"round", "table=57,crown=34.5,pavilion=41,girdle=3", 0.0061},
		{"oval", "ratio=1.3,girdle=4", 0.0062},
		{"oval", "ratio=1.5,girdle=4,keel=10", 0.0062},
		{"step", "ratio=1,fan=8", 0.0080},
		{"step", "ratio=1.5,fan=8", 0.0092},
		{"step", "ratio=2,fan=8", 0.0100},
		{"step", "ratio=2.5,fan=8,girdle=4", 0.0106},
		{"marquise", "ratio=1.5,girdle=4", 0.00565},
		{"marquise", "ratio=2,girdle=4", 0.00580},
		{"marquise", "ratio=2.5,girdle=4,keel=15", 0.00585},
		{"marquise", "ratio=3,girdle=4,keel=20", 0.00595},
		{"pear", "ratio=1.25,girdle=4", 0.00615},
		{"pear", "ratio=1.5,girdle=4", 0.0060},
		{"pear", "ratio=2,girdle=4", 0.00575},
		{"triangle", "bow=25,girdle=4", 0.0057},
	} {
		s := mustProportions(t, row.outline, row.pairs, 6)
		m := s.Measure()
		area := m.LengthMM * m.WidthMM
		if row.outline == "oval" {
			area = math.Pow((m.LengthMM+m.WidthMM)/2, 2)
		}
		got := m.Carats(3.515)
		want := row.factor * area * m.DepthMM
		if math.Abs(got/want-1) > within {
			t.Errorf("%s %s: %.3f ct, the formula says %.3f (%+.1f %%)", row.outline, row.pairs, got, want,
				100*(got/want-1))
		}
	}
}

// A stretch of the round in one direction keeps planes plane and meets met, so
// an oval must be the stretched round facet for facet.
func TestOvalIsAStretchedRound(t *testing.T) {
	const ratio = 1.5
	const values = "table=57,crown=35,pavilion=41,star=50,lower=75,girdle=3"
	oval := mustProportions(t, "oval", values+",ratio=1.5", 1)
	round := mustProportions(t, "round", values, 1)
	want := round.Volume() * ratio
	// The oval's width is what a caliper finds on its girdle's flats, which is
	// less than over the corners: at most by the sagitta of a 64th on both sides.
	within := 3 * 2 * (1 - math.Cos(math.Pi/64)) * ratio * ratio * want
	if got := oval.Volume(); math.Abs(got-want) > within {
		t.Errorf("volume %v, want %v within %v", got, want, within)
	}
	side := tierFacets(oval, "crown main")
	for _, f := range side {
		want := math.NaN()
		switch f.Index {
		case 0, 48:
			want = math.Atan(math.Tan(35*math.Pi/180) / ratio)
		case 24, 72:
			want = 35 * math.Pi / 180
		default:
			continue
		}
		if got := leanOf(f) * math.Pi / 180; math.Abs(got-want) > 1e-3 {
			t.Errorf("main at %v leans %v, want %v", f.Index, got, want)
		}
	}
}

// Corner counts show that all facets truly meet: one corner where many planes
// pass, none split by a gap. For n mains and m girdle facets a brilliant has n
// table corners, n star tips, n tips below, the culet and 2 m at the girdle; n
// sides of a straight outline share corners between two mains.
func TestFacetsMeet(t *testing.T) {
	for _, row := range []struct {
		outline, pairs  string
		facets, corners int
	}{
		{"round", "", 57 + 64, 3*8 + 1 + 2*64},
		{"round", "culet=1", 58 + 64, 3*8 + 8 + 2*64},
		{"oval", "", 57 + 64, 3*8 + 1 + 2*64},
		{"marquise", "", 57 + 64, 3*8 + 1 + 2*64},
		{"pear", "", 57 + 64, 3*8 + 1 + 2*64},
		{"cushion", "", 57 + 64, 3*8 + 1 + 2*64},
		{"marquise", "keel=20", 57 + 64, 3*8 + 2 + 2*64},
		{"pear", "keel=20", 57 + 64, 3*8 + 2 + 2*64},
		{"triangle", "", 43 + 48, 3*6 + 1 + 2*48},
		{"triangle", "bow=0", 1 + 3*6 + 3 + 3, 3*3 + 1 + 2*3},
		{"square", "", 1 + 4*4 + 2*4 + 4 + 4, 3*4 + 1 + 2*4},
		{"step", "", 1 + 3*8 + 8 + 3*8, 8 + 3*8 + 3*8 + 2}, // the keel's two ends
		{"step", "corner=0,ratio=1,steps=2", 1 + 2*4 + 4 + 2*4, 4 + 2*4 + 2*4 + 1},
		{"step", "culet=10", 1 + 3*8 + 8 + 3*8 + 1, 8 + 3*8 + 3*8 + 8},
	} {
		s := mustProportions(t, row.outline, row.pairs, 7)
		if len(s.Facets) != row.facets || len(s.Corners) != row.corners {
			t.Errorf("%s %s: %d facets and %d corners, want %d and %d", row.outline, row.pairs,
				len(s.Facets), len(s.Corners), row.facets, row.corners)
		}
	}
}

// What was put in must be measured on the solid.
func TestProportionsAreMeasuredBack(t *testing.T) {
	for _, row := range []struct {
		outline, pairs string
		table, ratio   float64
	}{
		{"round", "table=61", 61, 1},
		{"oval", "table=61,ratio=1.7", 61, 1.7},
		{"marquise", "table=61,ratio=2.2", 61, 2.2},
		{"pear", "table=61,ratio=1.6", 61, 1.6},
		{"cushion", "table=61,ratio=1.2", 61, 1.2},
		{"step", "table=61,ratio=1.8", 61, 1.8},
	} {
		s := mustProportions(t, row.outline, row.pairs, 7.3)
		m := s.Measure()
		// The table's own corners and the girdle's flats differ by up to the
		// girdle's sagitta, 0.13 % of the width.
		if math.Abs(m.TablePercent-row.table) > 0.2 || math.Abs(m.WidthMM-7.3) > 1e-9 || math.Abs(m.Ratio/row.ratio-1) > 0.002 {
			t.Errorf("%s %s: table %.3f, width %.6f, ratio %.4f", row.outline, row.pairs, m.TablePercent,
				m.WidthMM, m.Ratio)
		}
		if math.Abs(m.GirdlePercent.Max-3) > 1e-6 {
			t.Errorf("%s: girdle %.6f %%, want 3 at the thick places", row.outline, m.GirdlePercent.Max)
		}
		if math.Abs(m.GirdleHeightMM.Middle) > 0.005*7.3 {
			t.Errorf("%s: the girdle's middle lies at %.4f mm", row.outline, m.GirdleHeightMM.Middle)
		}
	}
}

func TestSpreadsAreMetRoundTheStone(t *testing.T) {
	s := mustProportions(t, "round", "table=56,crown=33.5..34..34.8,pavilion=40.3..40.5..40.6,girdle=3", 6)
	for _, row := range []struct {
		tier             string
		least, mean, top float64
	}{
		{"crown main", 33.5, 34, 34.8},
		{"pavilion main", 40.3, 40.5, 40.6},
	} {
		least, top, sum := math.Inf(1), 0.0, 0.0
		facets := tierFacets(s, row.tier)
		if len(facets) != 8 {
			t.Fatalf("%d facets of %s", len(facets), row.tier)
		}
		for _, f := range facets {
			least, top, sum = min(least, leanOf(f)), max(top, leanOf(f)), sum+leanOf(f)/8
		}
		const within = 1e-6
		if math.Abs(least-row.least) > within || math.Abs(top-row.top) > within || math.Abs(sum-row.mean) > within {
			t.Errorf("%s: %.7f..%.7f..%.7f, want %g..%g..%g", row.tier, least, sum, top, row.least, row.mean, row.top)
		}
	}
	again := mustProportions(t, "round", "table=56,crown=33.5..34..34.8,pavilion=40.3..40.5..40.6,girdle=3", 6)
	for i := range s.Facets {
		if s.Facets[i].Normal != again.Facets[i].Normal {
			t.Fatal("the same proportions gave another stone")
		}
	}
}

func TestProportionFaultsSayWhatIsAllowed(t *testing.T) {
	for _, row := range []struct{ name, outline, pairs, want string }{
		{"unknown outline", "blob", "", "round, oval, pear"},
		{"unknown value", "round", "tabel=56", "table 25 to 85 %"},
		{"value of another outline", "round", "keel=5", "culet 0 to 30 %"},
		{"out of range", "round", "crown=134", "crown 5 to 60 degrees"},
		{"not a number", "round", "crown=steep", "33.5..34..34.6"},
		{"NaN", "round", "crown=NaN", "33.5..34..34.6"},
		{"no pair", "round", "56", "table=56"},
		{"twice", "round", "table=56,table=57", "leave one out"},
		{"order", "round", "crown=35..34..36", "least..mean..greatest"},
		{"four numbers", "round", "crown=1..2..3..4", "33.5..34..34.6"},
		{"one for the whole stone", "oval", "ratio=1.3..1.4", "give one number"},
		{"steps", "step", "steps=2.5", "whole number"},
	} {
		_, err := ParseProportions(row.outline, row.pairs)
		if err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %v does not say %q", row.name, err, row.want)
		}
	}
	_, err := ParseProportions("round", "tabel=56,crown=134,star=x")
	var faults Faults
	if !errors.As(err, &faults) || len(faults) != 3 {
		t.Errorf("three faults at once, got %v", err)
	}
	for _, row := range []struct{ name, outline, pairs, want string }{
		{"no room for stars", "round", "table=80,star=15,crown=20", "leave no room"},
		{"mean nearly at the end", "round", "crown=33..33.01..35", "must lie between"},
		{"hollow sides", "cushion", "ratio=4,bow=30,corner=40", "smaller bow"},
		{"steps that overhang", "step", "fan=15,steps=6,pavilion=41", "fewer steps"},
	} {
		p, err := ParseProportions(row.outline, row.pairs)
		if err != nil {
			t.Errorf("%s: %v", row.name, err)
			continue
		}
		if _, err = p.Stone(6); err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %v does not say %q", row.name, err, row.want)
		}
	}
	p, _ := ParseProportions("round", "table=56")
	for _, w := range []float64{0, -1, math.NaN(), math.Inf(1)} {
		if _, err := p.Stone(w); err == nil {
			t.Errorf("a width of %v was taken", w)
		}
	}
}

func TestWhatWasNotMeasuredIsNamed(t *testing.T) {
	s := mustProportions(t, "round", "table=56,crown=34,pavilion=40.5", 6)
	if len(s.Notes) != 1 || !strings.Contains(s.Notes[0], "star 50 %, lower 75 %, girdle 3 %, culet 0 %") {
		t.Errorf("notes %q", s.Notes)
	}
}

// Any values in range end in a closed solid with all its facets or in a fault.
func TestAnyProportionsCloseOrAreRefused(t *testing.T) {
	rng := rand.New(rand.NewPCG(11, 4))
	made := map[string]int{}
	const tries = 150
	for _, outline := range Outlines() {
		for range tries {
			p := &Proportions{Outline: outline, Values: map[string]Spread{}}
			for _, k := range ProportionsOf(outline) {
				// A third of the way from the usual value to the ends of the range.
				low, high := k.Usual+(k.Low-k.Usual)/3, k.Usual+(k.High-k.Usual)/3
				v := low + rng.Float64()*(high-low)
				if k.Name == "steps" {
					v = math.Round(v)
				}
				p.Values[k.Name] = Spread{v, v, v}
			}
			s, err := p.Stone(5)
			if err != nil {
				var f *Fault
				if !errors.As(err, &f) || f.Remedy == "" {
					t.Fatalf("%s %s: %v", outline, p, err)
				}
				continue
			}
			made[outline]++
			if len(s.Corners)-len(s.Edges)+len(s.Facets) != 2 || !(s.Volume() > 0) {
				t.Fatalf("%s %s is not closed", outline, p)
			}
		}
	}
	for _, outline := range Outlines() {
		if made[outline] < tries*2/3 {
			t.Errorf("%s: only %d of %d plausible sets of values made a stone", outline, made[outline], tries)
		}
	}
}

func FuzzParseProportions(f *testing.F) {
	f.Add("round", "table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3,culet=0.5")
	f.Add("step", "steps=3,fan=5,corner=12,ratio=1.4")
	f.Add("pear", "keel=20,crown=33..34..35")
	f.Add("cushion", "bow=,=,,==,corner=1e309")
	f.Fuzz(func(t *testing.T, outline, pairs string) {
		p, err := ParseProportions(outline, pairs)
		if err != nil {
			return
		}
		again, err := ParseProportions(outline, p.String())
		if err != nil {
			t.Fatalf("%q reads, but %q does not: %v", pairs, p.String(), err)
		}
		if again.String() != p.String() {
			t.Fatalf("%q became %q", p.String(), again.String())
		}
		if s, err := p.Stone(5); err == nil && !(s.Volume() > 0) {
			t.Fatalf("%q has no volume", pairs)
		}
	})
}

func BenchmarkProportionsRound(b *testing.B) {
	p, err := ParseProportions("round", "table=56,crown=34,pavilion=40.5")
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := p.Stone(6); err != nil {
			b.Fatal(err)
		}
	}
}

func ExampleParseProportions() {
	p, err := ParseProportions("round", "table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3,culet=0.5")
	if err != nil {
		panic(err)
	}
	s, err := p.Stone(6.5)
	if err != nil {
		panic(err)
	}
	m := s.Measure()
	fmt.Printf("%d facets, %.2f mm, depth %.1f %%, %.3f ct as diamond\n",
		len(s.Facets), m.WidthMM, m.DepthPercent, m.Carats(3.515))
	// Output: 122 facets, 6.50 mm, depth 60.3 %, 1.006 ct as diamond
}
