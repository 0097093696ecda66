package facets

import (
	"cmp"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
)

// outline is a stone's outline as seen from above, with its size as the trade
// measures it.
type outline struct {
	hull     []mgl64.Vec2 // corners, anticlockwise
	width    float64      // least distance of two parallel lines that hold it; over the corners if round
	length   float64      // extent across that; the width again if round
	across   mgl64.Vec2   // unit, along the width
	round    bool
	diameter float64 // greatest distance of two corners
}

// An outline is round when corners that reach within roundShare of the
// farthest follow each other by no more than an octagon's 45 degrees (and a
// degree for measured stones), and its length is not above roundRatio times
// its width. The share keeps square cushions out, whose sides bow less.
const (
	roundShare = 0.99
	roundGap   = 46 * Degree
	roundRatio = 1.02
)

// outlineOf measures the outline of points seen from above. It has no corners
// if the points lie on a line.
func outlineOf(points []mgl64.Vec2) outline {
	o := outline{hull: convexHull(points)}
	if len(o.hull) < 3 {
		return o
	}
	o.diameter = diameter(o.hull)
	o.width = math.Inf(1)
	n := len(o.hull)
	for i, a := range o.hull {
		e := o.hull[(i+1)%n].Sub(a)
		l := e.Len()
		if l == 0 {
			continue
		}
		dir := mgl64.Vec2{e[1] / l, -e[0] / l}
		if dir[1] < 0 || dir[1] == 0 && dir[0] < 0 {
			dir = dir.Mul(-1)
		}
		// Of directions that tie to rounding the one with the least azimuth counts.
		w := extent(o.hull, dir)
		tie := math.Abs(w-o.width) <= 1e-9*o.diameter
		if w < o.width && !tie || tie && math.Atan2(dir[1], dir[0]) < math.Atan2(o.across[1], o.across[0]) {
			o.width, o.across = w, dir
		}
	}
	o.length = extent(o.hull, mgl64.Vec2{-o.across[1], o.across[0]})
	if o.length < roundRatio*o.width && evenlyRound(o.hull) {
		o.round = true
		o.width, o.length = o.diameter, o.diameter
	}
	return o
}

// evenlyRound reports whether far corners stand all round.
func evenlyRound(hull []mgl64.Vec2) bool {
	low, high := hull[0], hull[0]
	for _, c := range hull {
		for k := range c {
			low[k], high[k] = math.Min(low[k], c[k]), math.Max(high[k], c[k])
		}
	}
	middle := low.Add(high).Mul(0.5)
	far := 0.0
	for _, c := range hull {
		far = math.Max(far, c.Sub(middle).Len())
	}
	var azimuths []float64
	for _, c := range hull {
		if d := c.Sub(middle); d.Len() >= roundShare*far {
			azimuths = append(azimuths, math.Atan2(d[1], d[0]))
		}
	}
	slices.Sort(azimuths)
	for i, a := range azimuths {
		next := azimuths[(i+1)%len(azimuths)]
		if i+1 == len(azimuths) {
			next += 2 * math.Pi
		}
		if next-a > roundGap.Radians() {
			return false
		}
	}
	return true
}

// flat returns how wide a flat of the stone with this outline is: corner to
// corner for a round, across the width otherwise.
func (o *outline) flat(points []mgl64.Vec2) float64 {
	if len(points) == 0 {
		return 0
	}
	if o.round {
		return diameter(points)
	}
	return extent(points, o.across)
}

// extent returns the extent of points along a unit direction.
func extent(points []mgl64.Vec2, dir mgl64.Vec2) float64 {
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range points {
		d := dir.Dot(p)
		low, high = math.Min(low, d), math.Max(high, d)
	}
	return high - low
}

// diameter returns the greatest distance between two points.
func diameter(points []mgl64.Vec2) float64 {
	most := 0.0
	for i, a := range points {
		for _, b := range points[:i] {
			dx, dy := a[0]-b[0], a[1]-b[1]
			most = math.Max(most, dx*dx+dy*dy)
		}
	}
	return math.Sqrt(most)
}

// convexHull returns the corners of the hull of points, anticlockwise, by
// Andrew's monotone chain (Inform. Process. Lett. 9, 216, 1979).
func convexHull(points []mgl64.Vec2) []mgl64.Vec2 {
	p := apart(slices.Clone(points))
	if len(p) < 3 {
		return p
	}
	size := 0.0
	for _, c := range p {
		size = math.Max(size, c.Len())
	}
	// Twice the area of a triangle below which its middle point is no corner.
	least := weldTolerance * size * size
	var hull []mgl64.Vec2
	half := func(keep int, c mgl64.Vec2) {
		for len(hull) >= keep+2 {
			a, b := hull[len(hull)-2], hull[len(hull)-1]
			if (b[0]-a[0])*(c[1]-a[1])-(b[1]-a[1])*(c[0]-a[0]) > least {
				break
			}
			hull = hull[:len(hull)-1]
		}
		hull = append(hull, c)
	}
	for _, c := range p {
		half(0, c)
	}
	keep := len(hull) - 1
	for i := len(p) - 2; i >= 0; i-- {
		half(keep, p[i])
	}
	return hull[:len(hull)-1]
}

// apart leaves out points that lie within rounding of another, as the upper and
// lower ends of upright edges do when they are seen from above.
func apart(points []mgl64.Vec2) []mgl64.Vec2 {
	reach := 0.0
	for _, p := range points {
		reach = max(reach, p.Len())
	}
	near := weldTolerance * reach
	slices.SortFunc(points, func(a, b mgl64.Vec2) int {
		return cmp.Or(cmp.Compare(a[0], b[0]),
			cmp.Compare(a[1], b[1]))
	})
	var kept []mgl64.Vec2
	for _, p := range points {
		twin := false
		for k := len(kept) - 1; k >= 0 && p[0]-kept[k][0] <= near && !twin; k-- {
			twin = math.Abs(p[1]-kept[k][1]) <= near
		}
		if !twin {
			kept = append(kept, p)
		}
	}
	return kept
}
