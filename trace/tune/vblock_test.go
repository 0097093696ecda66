package tune

import (
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// The plane theories of the round brilliant hold exactly in a long V-shaped block: two
// pavilion slopes, a table, two bezel slopes, all rays in one plane. Here our tracer
// reproduces their limits: M. Tolkowsky, Diamond Design (1919), and B. L. Harding, Gems &
// Gemology 15 (1975) 78.

// vblock is such a block: pavilion slope p and bezel slope b in degrees, table over width.
// Its half width is 1 and its girdle lies at z = 0.
func vblock(t testing.TB, p, b, table float64) *facets.Stone {
	t.Helper()
	const long = 3.0
	slope := func(name string, side facets.Side, deg, sign, up float64) facets.Plane {
		sin, cos := math.Sincos(deg * math.Pi / 180)
		return facets.Plane{Tier: name, Side: side, Index: math.NaN(), Normal: mgl64.Vec3{sign * sin, 0, up * cos}, Distance: sin}
	}
	planes := []facets.Plane{
		slope("P+", facets.Pavilion, p, 1, -1), slope("P-", facets.Pavilion, p, -1, -1),
		{Tier: "end", Side: facets.Girdle, Index: math.NaN(), Normal: mgl64.Vec3{0, 1, 0}, Distance: long},
		{Tier: "end", Side: facets.Girdle, Index: math.NaN(), Normal: mgl64.Vec3{0, -1, 0}, Distance: long},
		{Tier: "T", Side: facets.Table, Index: math.NaN(), Normal: mgl64.Vec3{0, 0, 1}, Distance: (1 - table) * math.Tan(b*math.Pi/180)},
	}
	if table < 1 {
		planes = append(planes, slope("B+", facets.Crown, b, 1, 1), slope("B-", facets.Crown, b, -1, 1))
	}
	s, err := facets.FromPlanes("V-block", planes)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// shoot follows the viewing ray of an eye tilted toward +x (toward -x below 0) that enters
// the block's top at x, half a hair off the middle plane.
func shoot(t testing.TB, s *facets.Stone, index, tilt, x float64) *trace.Path {
	t.Helper()
	const aside = 1e-3 // off y = 0
	stone, err := gems.Plain("block", index, 0)
	if err != nil {
		t.Fatal(err)
	}
	top := mgl64.Vec3{x, aside, math.Inf(1)}
	for _, f := range s.Facets {
		if f.Normal[2] > 1e-9 {
			top[2] = min(top[2], (f.Distance-f.Normal[0]*x)/f.Normal[2])
		}
	}
	view := trace.View{Tilt: facets.Angle(math.Abs(tilt)) * facets.Degree}
	if tilt < 0 {
		view.Turn = 180 * facets.Degree
	}
	right, up, _ := view.Axes()
	var low, high [2]float64
	for k, axis := range []mgl64.Vec3{right, up} {
		low[k], high[k] = math.Inf(1), math.Inf(-1)
		for _, c := range s.Corners {
			low[k], high[k] = min(low[k], axis.Dot(c)), max(high[k], axis.Dot(c))
		}
	}
	half := max(high[0]-low[0], high[1]-low[1]) / 2
	px := (1 + (right.Dot(top)-(low[0]+high[0])/2)/half) / 2
	py := (1 - (up.Dot(top)-(low[1]+high[1])/2)/half) / 2
	p, ok, err := trace.Follow(trace.Scene{Stone: s, Material: stone, Surroundings: trace.Around(material(t, "air"))}, 0,
		trace.Settings{View: view, Head: 10 * facets.Degree}, px, py)
	if err != nil || !ok {
		t.Fatalf("no ray at %g: %v", x, err)
	}
	if p.Entry.Sub(top).Len() > 1e-6 {
		t.Fatalf("the ray enters at %v, not at %v", p.Entry, top)
	}
	return p
}

// crossing finds where a yes becomes a no, or the other way round, by halving.
func switchover(t testing.TB, low, high float64, yes func(v float64) bool) float64 {
	t.Helper()
	first := yes(low)
	if yes(high) == first {
		t.Fatalf("%v at both %g and %g", first, low, high)
	}
	for range 50 {
		if mid := (low + high) / 2; yes(mid) == first {
			low = mid
		} else {
			high = mid
		}
	}
	return (low + high) / 2
}

const (
	grazing = 89.99        // degrees: sin is 1 to 2e-8, and enough light still enters to be followed
	minute  = 0.5 / 60     // half the last printed digit of angles in degrees and minutes
	printed = 0.5e-3 * 1.1 // of degrees with three decimals
)

// Tolkowsky's limits of the pavilion, as printed, for his critical angle of 24°26'.
func TestTolkowskyLimits(t *testing.T) {
	const n = 2.4176 // asin(1/n) = 24° 26'
	bounce := func(tilt, x float64, number int) func(p float64) bool {
		return func(p float64) bool { return shoot(t, vblock(t, p, 1, 1), n, tilt, x).Bounces[number].Total }
	}
	tests := []struct {
		name      string
		low, high float64
		yes       func(p float64) bool
		want      float64
		source    string
	}{
		{"a vertical ray at the first face", 15, 40, bounce(0, 0.5, 0), 24 + 26.0/60, "critical angle used"},
		{"all rays at the first face", 40, 60, bounce(grazing, -0.5, 0), 48 + 52.0/60, "equation 9"},
		{"a vertical ray at the second face", 45, 55, bounce(0, 0.5, 1), (180 - 24 - 26.0/60) / 3, "3α + c = 180°"},
		{"a grazing ray at the second face", 41, 46, bounce(grazing, 0.97, 1), 43 + 43.0/60, "equation 10"},
	}
	for _, test := range tests {
		if got := switchover(t, test.low, test.high, test.yes); math.Abs(got-test.want) > minute {
			t.Errorf("%s: %.4f°, want %.4f° ± %.4f (Tolkowsky 1919, %s)", test.name, got, test.want, minute, test.source)
		}
	}
}

// Harding's limits of the pavilion: what the head blocks of rays from table to table, and
// the live centre for both eyes; computed from the formulas of the paper.
func TestHardingPavilion(t *testing.T) {
	for _, row := range []struct{ n, low, high, live float64 }{
		{1.45, 43.277, 46.723, 47.737}, {1.544, 43.382, 46.618, 44.248}, {1.577, 43.416, 46.584, 43.155}, {1.62, 43.458, 46.542, 41.818},
		{1.654, 43.490, 46.510, 40.823}, {1.72, 43.548, 46.452, 39.033}, {1.76, 43.581, 46.419, 38.028}, {1.93, 43.706, 46.294, 34.312},
		{2.158, 43.843, 46.157, 30.383}, {2.417, 43.967, 46.033, 26.918},
	} {
		// A ray that comes in 5° to one side of the line of sight and leaves 5° to the other
		// turns by 10°: the edge of the head. It leaves through the table at its third bounce.
		blocked := func(tilt float64) func(p float64) bool {
			return func(p float64) bool {
				out := shoot(t, vblock(t, p, 1, 1), row.n, tilt, 0.5).Bounces[2]
				return out.Goes == trace.Head && !out.Total
			}
		}
		if got := switchover(t, 42.5, 45, blocked(+5)); math.Abs(got-row.low) > printed {
			t.Errorf("n %g: the head blocks from %.4f°, want %.3f° (Harding 1975)", row.n, got, row.low)
		}
		if got := switchover(t, 45, 47.5, blocked(-5)); math.Abs(got-row.high) > printed {
			t.Errorf("n %g: the head blocks to %.4f°, want %.3f° (Harding 1975)", row.n, got, row.high)
		}
		live := func(p float64) bool {
			return shoot(t, vblock(t, p, 1, 1), row.n, 6, -0.01).Bounces[0].Total
		}
		if got := switchover(t, 22, 52, live); math.Abs(got-row.live) > printed {
			t.Errorf("n %g: the centre lives from %.4f°, want %.3f° (Harding 1975)", row.n, got, row.live)
		}
	}
}

// Harding's largest and smallest table: the culet just sees a grazing ray from the table's
// far edge, and the vertical ray that enters the bezel beside it.
func TestHardingTable(t *testing.T) {
	for _, row := range []struct{ n, p, b, most, least float64 }{
		{2.417, 40.75, 34.5, 0.5364, 0.4694}, {2.158, 41, 34, 0.5968, 0.4310}, {1.76, 41, 37, 0.7370, 0.4033},
		{1.74, 42, 37, 0.7596, 0.4061}, {1.62, 42, 38, 0.8180, 0.3868}, {1.544, 43, 42, 0.8826, 0.4247},
	} {
		near := func(tilt, off float64) func(table float64) bool {
			return func(table float64) bool {
				s := vblock(t, row.p, row.b, table)
				return s.Facets[shoot(t, s, row.n, tilt, table+off).Bounces[0].Facet].Tier == "P+"
			}
		}
		const hair = 1e-7
		if got := switchover(t, 0.2, 0.95, near(grazing, -hair)); math.Abs(got-row.most) > 1e-4 {
			t.Errorf("n %g: the largest table is %.5f, want %.4f (Harding 1975)", row.n, got, row.most)
		}
		if got := switchover(t, 0.2, 0.95, near(0, hair)); math.Abs(got-row.least) > 1e-4 {
			t.Errorf("n %g: the smallest table is %.5f, want %.4f (Harding 1975)", row.n, got, row.least)
		}
	}
}
