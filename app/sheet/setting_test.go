package sheet

import (
	"math"
	"slices"
	"strings"
	"testing"

	"pavilight/facets"
)

// TestSettingsByHand compares with tables worked by hand: azimuth over 360 degrees times
// the teeth, the nearest tooth, and the rest times 360 over the teeth.
func TestSettingsByHand(t *testing.T) {
	type set struct {
		tooth int
		part  float64 // of a tooth
	}
	gears := []int{32, 64, 72, 77, 80, 96, 120}
	for _, row := range []struct {
		azimuth float64 // degrees
		want    []set   // by gear
	}{
		{0, []set{{32, 0}, {64, 0}, {72, 0}, {77, 0}, {80, 0}, {96, 0}, {120, 0}}},
		{11.25, []set{{1, 0}, {2, 0}, {2, 0.25}, {2, 0.40625}, {2, 0.5}, {3, 0}, {4, -0.25}}},
		{22.5, []set{{2, 0}, {4, 0}, {4, 0.5}, {5, -0.1875}, {5, 0}, {6, 0}, {7, 0.5}}},
		{30, []set{{3, -1.0 / 3}, {5, 1.0 / 3}, {6, 0}, {6, 5.0 / 12}, {7, -1.0 / 3}, {8, 0}, {10, 0}}},
		{45, []set{{4, 0}, {8, 0}, {9, 0}, {10, -0.375}, {10, 0}, {12, 0}, {15, 0}}},
		{360.0 / 7, []set{{5, -3.0 / 7}, {9, 1.0 / 7}, {10, 2.0 / 7}, {11, 0}, {11, 3.0 / 7}, {14, -2.0 / 7}, {17, 1.0 / 7}}},
		{60, []set{{5, 1.0 / 3}, {11, -1.0 / 3}, {12, 0}, {13, -1.0 / 6}, {13, 1.0 / 3}, {16, 0}, {20, 0}}},
		{72, []set{{6, 0.4}, {13, -0.2}, {14, 0.4}, {15, 0.4}, {16, 0}, {19, 0.2}, {24, 0}}},
		{180, []set{{16, 0}, {32, 0}, {36, 0}, {38, 0.5}, {40, 0}, {48, 0}, {60, 0}}},
		{359, []set{{32, -32.0 / 360}, {64, -64.0 / 360}, {72, -0.2}, {77, -77.0 / 360}, {80, -80.0 / 360}, {96, -96.0 / 360}, {120, -1.0 / 3}}},
	} {
		for k, gear := range gears {
			m := Plain()
			m.Gear = gear
			const planGear = 360
			got := m.Setting(m.Shown(row.azimuth, planGear, facets.Pavilion))
			want := row.want[k]
			degrees := want.part * 360 / float64(gear)
			const tolerance = 1e-9 // teeth and degrees: rounding of the fractions above
			if got.Tooth != want.tooth || math.Abs(got.Part-want.part) > tolerance || math.Abs(got.Cheater.Degrees()-degrees) > tolerance {
				t.Errorf("%g degrees on a gear of %d: %d and %g tooth, %g degrees; want %d and %g tooth, %g degrees",
					row.azimuth, gear, got.Tooth, got.Part, got.Cheater.Degrees(), want.tooth, want.part, degrees)
			}
		}
	}
}

func TestSettingWords(t *testing.T) {
	m := Plain()
	m.Gear = 96
	for _, row := range []struct {
		shown        float64
		short, words string
	}{
		{0, "96", "96"},
		{12.4, "12+1.50°", "12 + 0.4 tooth = 1.50 degrees"},
		{12.6, "13−1.50°", "13 − 0.4 tooth = 1.50 degrees"},
		{95.9, "96−0.38°", "96 − 0.1 tooth = 0.38 degrees"},
		{0.1, "96+0.38°", "96 + 0.1 tooth = 0.38 degrees"},
		{12.00004, "12", "12"},
	} {
		got := m.Setting(row.shown)
		if got.String() != row.short || got.Words(nil) != row.words {
			t.Errorf("%g: %q, %q; want %q, %q", row.shown, got, got.Words(nil), row.short, row.words)
		}
	}
}

func TestShownRunsBackAfterTransfer(t *testing.T) {
	for _, row := range []struct {
		name        string
		reversed    bool
		transfer    float64
		index, want float64
		side        facets.Side
	}{
		{"pavilion", true, 96, 12, 12, facets.Pavilion},
		{"reversed about 96", true, 96, 12, 84, facets.Crown},
		{"reversed about 96, the index itself", true, 96, 0, 0, facets.Crown},
		{"reversed about 24", true, 24, 12, 36, facets.Crown},
		{"reversed about 24, the index itself", true, 24, 24, 24, facets.Crown},
		{"reversed about 48", true, 48, 11, 85, facets.Crown},
		{"same", false, 24, 12, 12, facets.Crown},
	} {
		m := Machine{Gear: 96, CrownReversed: row.reversed, TransferIndex: row.transfer}
		if got := m.Shown(row.index, 96, row.side); got != row.want {
			t.Errorf("%s: index %g shows %g, want %g", row.name, row.index, got, row.want)
		}
	}
}

func TestReading(t *testing.T) {
	for _, row := range []struct {
		name               string
		step, offset       float64
		angle, shown, miss float64
	}{
		{"hundredths", 0.01, 0, 41.5, 41.5, 0},
		{"tenths, down", 0.1, 0, 41.54, 41.5, -0.04},
		{"tenths, up", 0.1, 0, 41.57, 41.6, 0.03},
		{"quarters", 0.25, 0, 41.6, 41.5, -0.1},
		{"offset", 0.1, 0.3, 41.5, 41.8, 0},
		{"offset below", 0.1, -1.25, 41.5, 40.3, 0.05},
		{"no step given", 0, 0, 41.504, 41.5, -0.004},
	} {
		m := Machine{AngleStep: facets.Angle(row.step) * facets.Degree, CrownOffset: facets.Angle(row.offset) * facets.Degree}
		shown, miss := m.Reading(facets.Angle(row.angle)*facets.Degree, facets.Crown)
		if math.Abs(shown.Degrees()-row.shown) > 1e-9 || math.Abs(miss.Degrees()-row.miss) > 1e-9 {
			t.Errorf("%s: shows %.9f, off by %.9f; want %g, %g", row.name, shown.Degrees(), miss.Degrees(), row.shown, row.miss)
		}
	}
}

func TestOrders(t *testing.T) {
	m := Plain()
	m.Gear = 96
	settings := func(indices ...float64) (all []Setting) {
		for _, i := range indices {
			all = append(all, m.Setting(i))
		}
		return all
	}
	for _, row := range []struct {
		name           string
		given          []float64
		lap, opposites string
	}{
		{"eight", []float64{12, 0, 24, 36, 84, 48, 60, 72}, "96 12 24 36 48 60 72 84", "96 48 24 72 12 60 36 84"},
		{"three have no opposites", []float64{64, 32, 0}, "96 32 64", "96 32 64"},
		{"four, off the axes", []float64{6, 42, 54, 90}, "6 42 54 90", "6 54 42 90"},
		{"between teeth", []float64{48.4, 0.4}, "96+1.50° 48+1.50°", "96+1.50° 48+1.50°"},
		{"one", []float64{5}, "5", "5"},
	} {
		lap := strings.Join(settingWords(nil, lapOrder(settings(row.given...), 96)), " ")
		opposites := strings.Join(settingWords(nil, oppositesFirst(settings(row.given...), 96)), " ")
		if lap != row.lap || opposites != row.opposites {
			t.Errorf("%s: lap %q, opposites %q; want %q, %q", row.name, lap, opposites, row.lap, row.opposites)
		}
	}
}

func TestFacingOf(t *testing.T) {
	tier := func(side facets.Side, turned bool) facets.Tier {
		x := facets.Tier{Side: side}
		if turned {
			x.Transfer = &facets.Transfer{}
		}
		return x
	}
	p, c := facets.Pavilion, facets.Crown
	for _, row := range []struct {
		name  string
		tiers []facets.Tier
		want  []facets.Side
	}{
		{"girdle after pavilion", []facets.Tier{tier(facets.Pavilion, false), tier(facets.Girdle, false), tier(facets.Crown, true)}, []facets.Side{p, p, c}},
		{"girdle first", []facets.Tier{tier(facets.Girdle, false), tier(facets.Pavilion, false), tier(facets.Table, true)}, []facets.Side{p, p, c}},
		{"girdle after the turn", []facets.Tier{tier(facets.Pavilion, false), tier(facets.Girdle, true), tier(facets.Crown, false)}, []facets.Side{p, c, c}},
		{"crown first", []facets.Tier{tier(facets.Table, false), tier(facets.Girdle, false), tier(facets.Pavilion, true)}, []facets.Side{c, c, p}},
	} {
		if got := facingOf(row.tiers); !slices.Equal(got, row.want) {
			t.Errorf("%s: %v, want %v", row.name, got, row.want)
		}
	}
}
