package facets

import (
	"fmt"
	"math"
	"math/rand/v2"
	"testing"
)

// steppedRound is a plan of rings of facets, each met by the next: rings times
// around facets a side.
func steppedRound(rings, around int) *Plan {
	p := &Plan{File: "bench", Name: "rings", Material: MaterialRef{Key: "quartz"}, WidthMM: 10,
		Gear: 2 * around}
	ring := func(offset float64) []float64 {
		list := make([]float64, around)
		for i := range list {
			list[i] = 2*float64(i) + offset
		}
		return list
	}
	add := func(name string, side Side, angle, offset float64, stop Stop) {
		p.Tiers = append(p.Tiers, Tier{Name: name, Side: side, Angle: Angle(angle) * Degree, HasAngle: true,
			Index: ring(offset), Stop: stop})
	}
	add("G", Girdle, 90, 0, Stop{Rule: StopDistance, Value: 1})
	for _, side := range []Side{Pavilion, Crown} {
		last, name := "", ""
		for k := range rings {
			name = fmt.Sprintf("%v%d", side, k)
			angle := 50 - 30*float64(k)/float64(rings)
			switch k {
			case 0:
				add(name, side, angle, 0, Stop{Rule: StopLevel, Value: 0.02 * up(side)})
			case 1:
				add(name, side, angle, 1, Stop{Rule: StopMeet, Corners: [][]Mark{{{Tier: last},
					{Tier: "G"}}}})
			default:
				// Through the corner where a facet of the ring before last meets two of the last.
				add(name, side, angle, float64(k%2), Stop{Rule: StopMeet, Corners: [][]Mark{{{Tier: last},
					{Tier: p.Tiers[len(p.Tiers)-2].Name}}}})
			}
			last = name
		}
	}
	p.Tiers = append(p.Tiers, Tier{Name: "T", Side: Table, HasAngle: true, Stop: Stop{Rule: StopTable,
		Value: 0.3}})
	return p
}

// The bounds that solving must keep: 5 ms for 120 facets with meets, 200 ms
// for 1,000, on one core.
func BenchmarkSolve(b *testing.B) {
	for _, size := range []struct{ rings, around int }{{3, 17}, {4, 16}, {10, 48}} {
		p := steppedRound(size.rings, size.around)
		s, err := p.Solve()
		if err != nil {
			b.Fatal(err)
		}
		b.Run(fmt.Sprintf("%d facets with meets", len(s.Facets)), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := p.Solve(); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
	b.Run("round.toml", func(b *testing.B) {
		p, _ := solveFile(b, "../testdata/plans/round.toml")
		b.ReportAllocs()
		for b.Loop() {
			if _, err := p.Solve(); err != nil {
				b.Fatal(err)
			}
		}
	})
}

func BenchmarkFromPlanes(b *testing.B) {
	for _, n := range []int{120, 1000} {
		r := rand.New(rand.NewPCG(1, 2))
		var planes []Plane
		for range n {
			planes = append(planes, Plane{Normal: randomDirection(r), Distance: 1})
		}
		b.Run(fmt.Sprintf("%d facets", n), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := FromPlanes("", planes); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}

func BenchmarkMeasure(b *testing.B) {
	_, sol := solveFile(b, "../testdata/plans/round.toml")
	b.ReportAllocs()
	for b.Loop() {
		if m := sol.Stone.Measure(); math.IsNaN(m.VolumeMM3) {
			b.Fatal(m)
		}
	}
}
