package trace

import "math"

// outline is a body as the eye sees it: for each point of the picture, the facet
// that a ray from there enters and where. Picture coordinates run to the right
// and up in the viewer's frame, in units of the stone, about the middle of the
// outline's bounding square.
type outline struct {
	*frame
	centre vec     // of the picture's square, relative to the body's middle
	half   float64 // half the square's edge
	front  cells   // facets toward the eye, by place in the picture
	back   cells   // facets away from it or edge-on
	lower  []plane2
	upper  []plane2
	facet  [2][]int // facet number of each function of front and back
}

// looks is how many cells the maps by place have across; a power of two.
const looks = 32

// newOutline projects the body along the eye's direction. corners are the body's
// own, relative to its middle. square, above 0, is the edge of another square for the
// picture, about the body's middle.
func newOutline(b *body, f frame, corners []vec, square float64) *outline {
	o := &outline{frame: &f}
	lo, hi := vec{math.Inf(1), math.Inf(1), 0}, vec{math.Inf(-1), math.Inf(-1), 0}
	for _, c := range corners {
		x, y := c.dot(f.right), c.dot(f.up)
		lo, hi = vec{min(lo.x, x), min(lo.y, y), 0}, vec{max(hi.x, x), max(hi.y, y), 0}
	}
	o.half = max(hi.x-lo.x, hi.y-lo.y) / 2
	o.centre = vec{}.plus((lo.x+hi.x)/2, f.right).plus((lo.y+hi.y)/2, f.up)
	if square > 0 {
		o.half, o.centre = square/2, vec{}
	}

	// Along the eye's direction a facet toward the eye bounds the stone from above
	// at height (1 - m.p)/m.eye over the picture's point p, the lowest of them all
	// is the surface; a facet away from it bounds the stone from below, the highest
	// counts. A facet seen edge-on bounds the picture itself: its height is made
	// steep instead of infinite.
	const edgeOn = 1e-9
	for j, m := range b.rows {
		e := m.dot(f.eye)
		toward := e > 0
		if math.Abs(e) < edgeOn {
			e, toward = -edgeOn, false
		}
		h := plane2{(1 - m.dot(o.centre)) / e, -m.dot(f.right) / e, -m.dot(f.up) / e}
		if toward {
			o.upper = append(o.upper, plane2{-h.a, -h.b, -h.c})
			o.facet[0] = append(o.facet[0], j)
		} else {
			o.lower = append(o.lower, h)
			o.facet[1] = append(o.facet[1], j)
		}
	}
	whole := region{u: -o.half, v: -o.half, step: 2 * o.half / looks, side: looks, right: 1, up: looks, rounding: 1e-14}
	for _, side := range []struct {
		cells *cells
		fs    []plane2
	}{{&o.front, o.upper}, {&o.back, o.lower}} {
		*side.cells = newCells(looks * looks)
		side.cells.fill(side.fs, &whole)
	}
	return o
}

// enter returns where the ray at (u, v) of the picture meets the stone and on
// which facet; ok is false where it passes beside the stone.
func (o *outline) enter(u, v float64) (facet int, at vec, ok bool) {
	k := looks / (2 * o.half)
	col, row := int((u+o.half)*k), int((v+o.half)*k)
	if uint(col) >= looks || uint(row) >= looks {
		return 0, vec{}, false
	}
	cell := row*looks + col
	facet, top := 0, math.Inf(-1)
	for _, j := range o.front.at(cell) {
		if h := o.upper[j].at(u, v); h > top {
			facet, top = o.facet[0][j], h
		}
	}
	for _, j := range o.back.at(cell) {
		if o.lower[j].at(u, v) >= -top {
			return 0, vec{}, false
		}
	}
	return facet, o.centre.plus(u, o.right).plus(v, o.up).plus(-top, o.eye), true
}
