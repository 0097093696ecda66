package trace

import (
	"fmt"
	"math"
	"slices"

	"pavilight/facets"
)

// body is a convex stone made ready for tracing. Positions in it are relative to
// a point well inside the stone and in units of the radius of the sphere about
// that point that just holds the stone, so the stone has size 1.
//
// With the origin inside, each facet's plane n.x = d becomes a row m = n/d, and
// the stone is the set where its gauge g(x) = max m.x is at most 1. Along a ray
// the gauge is convex and piecewise linear. So Newton's method, started outside
// the stone, walks in toward the exit without ever passing it and, being on
// straight pieces, ends exactly on it. Which row is largest at a point depends
// only on the point's direction, and a map by direction names the one or few
// rows that can be.
type body struct {
	middle vec     // of the stone's frame, mm: the origin of positions here
	unit   float64 // mm: the length 1 here

	rows   []vec // m of each facet
	normal []vec // n of each facet, unit, out of the stone
	side   []facets.Side

	byDirection cells // of rows, by direction from the middle
}

// directions is how many cells the map by direction has across each of its two
// halves; a power of two. The cost of building grows with it, the time a look-up
// takes falls: BenchmarkBody and BenchmarkExit.
const directions = 128

// newBody prepares a stone for tracing. It fails for a stone that holds no point
// clearly inside it.
func newBody(s *facets.Stone) (*body, error) {
	if len(s.Facets) < 4 || len(s.Facets) > math.MaxUint16 {
		return nil, fmt.Errorf("stone %q has %d facets: tracing takes 4 to %d", s.Name, len(s.Facets), math.MaxUint16)
	}
	b := &body{}
	for _, c := range s.Corners {
		b.middle = b.middle.plus(1/float64(len(s.Corners)), fromMgl(c))
	}
	for _, c := range s.Corners {
		b.unit = max(b.unit, fromMgl(c).plus(-1, b.middle).length())
	}
	// Start is measured from a sphere a little larger, so that rounding cannot
	// place a corner outside it.
	b.unit *= 1 + 1e-9
	for i, f := range s.Facets {
		n := fromMgl(f.Normal)
		d := (f.Distance - n.dot(b.middle)) / b.unit
		if !(d > 1e-7) || !(math.Abs(n.length()-1) < 1e-9) {
			return nil, fmt.Errorf("stone %q: facet %d (tier %q) passes through the middle of the stone or has no direction", s.Name, i, f.Tier)
		}
		b.rows = append(b.rows, n.scale(1/d))
		b.normal = append(b.normal, n)
		b.side = append(b.side, f.Side)
	}
	b.mapDirections()
	return b, nil
}

// mapDirections builds the map by direction. Directions are laid on two squares,
// u = x/s and v = y/s with s = |x|+|y|+|z|, one for each sign of z; the stone's
// directions fill the diamond |u|+|v| <= 1 of each. Within one octant the point
// (u, v, ±(1-|u|-|v|)) lies on a plane, so each row's value there is linear. Where the
// stone is its own mirror image, so are octants.
func (b *body) mapDirections() {
	b.byDirection = newCells(2 * directions * directions)
	acrossX := b.mirrored(vec{-1, 1, 1})
	acrossY := b.mirrored(vec{1, -1, 1})
	fs := make([]plane2, len(b.rows))
	for i := range 8 {
		o := octant(i)
		switch {
		case i&1 != 0 && acrossX != nil:
			b.byDirection.copy(o, octant(i&^1), acrossX)
			continue
		case i&2 != 0 && acrossY != nil:
			b.byDirection.copy(o, octant(i&^2), acrossY)
			continue
		}
		for j, m := range b.rows {
			// In |u| and |v|, both growing away from the middle of the square.
			sx, sy, sz := octantSigns(i)
			z := float64(sz) * m.z
			fs[j] = plane2{z, float64(sx)*m.x - z, float64(sy)*m.y - z}
		}
		b.byDirection.fill(fs, o)
	}
}

// octantSigns returns the signs of x, y and z in an octant.
func octantSigns(i int) (sx, sy, sz int) { return 1 - 2*(i&1), 1 - i&2, 1 - i>>1&2 }

// octant returns that part of the map by direction.
func octant(i int) *region {
	const half = directions / 2
	sx, sy, sz := octantSigns(i)
	// Its first cell touches the middle of its half of the map.
	// In float32 too, a list must name both facets that tie at an edge.
	o := &region{step: 1.0 / half, side: half, first: half*directions + half, right: sx, up: sy * directions, rounding: 2e-5}
	if sx < 0 {
		o.first--
	}
	if sy < 0 {
		o.first -= directions
	}
	if sz < 0 {
		o.first += directions * directions
	}
	// One cell more than the diamond needs, for look-ups that round across its rim.
	o.outside = func(u, v, size float64) bool { return u+v > 1+1.0/half }
	return o
}

// mirrored returns for each row which is its mirror image; nil if one has none. What
// solving a plan rounds off does not count.
func (b *body) mirrored(signs vec) []uint16 {
	const same = 1e-12
	images := make([]uint16, len(b.rows))
	for j, m := range b.rows {
		image := vec{signs.x * m.x, signs.y * m.y, signs.z * m.z}
		k := slices.IndexFunc(b.rows, func(r vec) bool {
			return math.Abs(r.x-image.x) < same && math.Abs(r.y-image.y) < same && math.Abs(r.z-image.z) < same
		})
		if k < 0 {
			return nil
		}
		images[j] = uint16(k)
	}
	return images
}

// largest returns the row that is largest at y and its value there: the gauge.
func (b *body) largest(y vec) (row int, gauge float64) {
	s := math.Abs(y.x) + math.Abs(y.y) + math.Abs(y.z)
	const half = directions / 2
	k := half / s
	col, line := int(y.x*k+half), int(y.y*k+half)
	// y.x = s, at the rim of the square, belongs to the last cell.
	col, line = min(col, directions-1), min(line, directions-1)
	if y.z < 0 {
		line += directions
	}
	names := b.byDirection.at(line*directions + col)
	row = int(names[0])
	gauge = b.rows[row].dot(y)
	for _, j := range names[1:] {
		if g := b.rows[j].dot(y); g > gauge {
			row, gauge = int(j), g
		}
	}
	return row, gauge
}

// onExit is how far, in units of the stone, a Newton step may still move when it
// counts as standing on the exit: some rounding errors of a point of size 1. Where
// facets meet, rows tie within rounding and steps of that size could alternate.
const onExit = 1e-14

// exit returns the facet through which the ray from x along the unit vector d
// leaves the stone and how far that is, at least 0. x lies inside the stone or on
// it; a facet that d leads away from is never chosen.
func (b *body) exit(x, d vec) (facet int, s float64) {
	// From the sphere that holds the stone, or just outside it.
	xd := x.dot(d)
	s = math.Sqrt(max(0, xd*xd+1-x.dot(x))) - xd
	for {
		j, _ := b.largest(x.plus(s, d))
		m := b.rows[j]
		slope := m.dot(d)
		if slope <= 0 {
			// Rounding at a corner on the sphere itself: the step is already nil.
			return b.exitSlowly(x, d)
		}
		next := (1 - m.dot(x)) / slope
		if next > s-onExit {
			return j, max(0, min(next, s))
		}
		s = next
	}
}

// exitSlowly does what exit does by asking every facet: the nearest plane that
// the ray runs toward. It never fails.
func (b *body) exitSlowly(x, d vec) (facet int, s float64) {
	s = math.Inf(1)
	for j, m := range b.rows {
		if slope := m.dot(d); slope > 0 {
			if t := (1 - m.dot(x)) / slope; t < s {
				facet, s = j, t
			}
		}
	}
	return facet, max(0, s)
}
