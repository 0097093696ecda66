package report

import (
	"context"
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/trace"
)

// Ray is one viewing ray through the same point of the picture, followed in two
// surroundings. Light goes the same way in both directions, so it shows how light from
// above reaches the eye, or how the eye comes to see what lies below.
type Ray struct {
	X, Y   float64 // of the picture, from its top left corner, 0 to 1
	First  int     // surrounding, into Job.Media
	Second int     // likewise; the same as First where there is only one
	Paths  [2]*trace.Path
	Right  mgl64.Vec3 // level direction to the right of the side view in which it is drawn, unit
}

// mainExit returns the bounce at which most of the path leaves, among the first few; -1
// for none.
func mainExit(p *trace.Path) int {
	best := -1
	for i := range min(len(p.Bounces), mostDrawn) {
		if best < 0 || p.Bounces[i].Left > p.Bounces[best].Left {
			best = i
		}
	}
	return best
}

// mostDrawn is how many bounces of a path can be told apart in a drawing.
const mostDrawn = 4

// ray finds the ray that best shows why the surroundings differ: of those through a grid of
// points, the one of which most comes back in the first surrounding and most leaks in the
// second, after few bounces in one plane. Where the second leaks no more than the first,
// each shall show what most of the light does there.
func (f *Findings) ray(ctx context.Context) error {
	clear := *f.Material
	clear.Absorption = nil // body colour takes part of the light; its way stays
	scene := trace.Scene{Stone: f.Solid, Material: &clear, Surroundings: trace.Around(f.Job.Media...)}
	second := 0
	leaks := func(k int) float64 { return f.Around.Columns[k].Ledger.Leaked }
	const clearly = 0.03 // more of the light, so that a drawing shows what the numbers say
	for k := 1; k < len(f.Job.Media); k++ {
		if second == 0 || leaks(second)-leaks(0) < clearly && leaks(k) > leaks(second) {
			second = k
		}
	}
	wanted := [2]trace.Quantity{trace.Returned, trace.Leaked}
	if leaks(second)-leaks(0) < clearly {
		for i, k := range []int{0, second} {
			wanted[i] = trace.Returned
			if leaks(k) > f.Around.Columns[k].Ledger.Returned {
				wanted[i] = trace.Leaked
			}
		}
	}
	best := 0.0
	const rings, around = 5, 8
	for ring := 1; ring <= rings; ring++ {
		for k := range around {
			if err := context.Cause(ctx); err != nil {
				return err
			}
			radius := 0.42 * (float64(ring) - 0.4) / rings
			sin, cos := math.Sincos(2 * math.Pi * (float64(k) + 0.3) / around)
			r := Ray{X: 0.5 + radius*cos, Y: 0.5 + radius*sin, First: 0, Second: second}
			score := 0.0
			for i, column := range []int{0, second} {
				p, ok, err := trace.Follow(scene, column, f.Job.settings(), r.X, r.Y)
				if err != nil {
					return err
				}
				if !ok {
					score = math.Inf(-1)
					break
				}
				r.Paths[i] = p
				exit := mainExit(p)
				if exit < 0 || p.Bounces[exit].Goes != wanted[i] {
					continue
				}
				score += p.Bounces[exit].Left * (1 - 0.1*float64(exit)) * planarity(p, exit)
				if f.Solid.Facets[p.Facet].Side == facets.Table {
					score += 0.2
				}
			}
			if score > best {
				best = score
				r.Right = sideways(r.Paths[0])
				f.Ray = &r
			}
		}
	}
	return nil
}

// corners returns the points of a path from its entry to a bounce.
func corners(p *trace.Path, last int) []mgl64.Vec3 {
	points := []mgl64.Vec3{p.Entry}
	for i := 0; i <= last && i < len(p.Bounces); i++ {
		points = append(points, p.Bounces[i].At)
	}
	return points
}

// sideways returns the level direction in which a path spreads most: its first level step.
func sideways(p *trace.Path) mgl64.Vec3 {
	points := corners(p, mainExit(p))
	longest := mgl64.Vec3{1, 0, 0}
	best := 0.0
	for i := 1; i < len(points); i++ {
		d := points[i].Sub(points[i-1])
		d[2] = 0
		if l := d.Len(); l > best*(1+1e-9) {
			best, longest = l, d.Mul(1/l)
		}
	}
	return longest
}

// planarity is 1 for a path that lies in one upright plane and falls to 0 as it leaves it.
func planarity(p *trace.Path, exit int) float64 {
	points := corners(p, exit)
	right := sideways(p)
	across := mgl64.Vec3{-right[1], right[0], 0}
	off, long := 0.0, 1e-12
	for i := 1; i < len(points); i++ {
		d := points[i].Sub(points[0])
		off, long = max(off, math.Abs(d.Dot(across))), max(long, d.Len())
	}
	return max(0, 1-2*off/long)
}
