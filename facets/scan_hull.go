package facets

import (
	"math"
	"math/bits"

	"github.com/go-gl/mathgl/mgl64"
)

// The convex hull is found on whole numbers: corners are first rounded to a
// grid of 2^-hullBits of the mesh's reach, far finer than any file of a scan,
// and then every question of side is answered exactly in 128-bit arithmetic.
// So a hull of thousands of points in one flat facet never goes wrong.
const hullBits = 36

// hullFace is a triangle of the hull, anticlockwise seen from outside.
type hullFace struct {
	corners [3]int32
	beyond  [3]int32 // face across the edge from corner i to i+1
	normal  [3]float64
	bound   float64 // a float64 value of side beyond it has the right sign
	first   int32   // first of the points outside it, chained by pointHull.chain; -1 for none
	far     int32   // the farthest of them
	reach   float64
	gone    bool
	mark    int32
}

// pointHull is the quickhull of Barber, Dobkin and Huhdanpaa (ACM Trans. Math.
// Softw. 22, 1996), triangles only, with points in a face's plane counted as
// not outside it.
type pointHull struct {
	points [][3]int64
	faces  []hullFace
	chain  []int32 // next point outside the same face
	mark   int32
	flat   bool // all points lie in one plane
}

// newHull returns the hull of points; flat is set and no faces are given if they all lie in a plane.
func newHull(points []mgl64.Vec3) *pointHull {
	h := &pointHull{points: make([][3]int64, len(points)), chain: make([]int32, len(points))}
	low, high := bounds(points)
	middle := low.Add(high).Mul(0.5)
	half := high.Sub(low).Mul(0.5)
	reach := max(half[0], half[1], half[2])
	if !(reach > 0) {
		h.flat = true
		return h
	}
	for i, p := range points {
		for k := range 3 {
			h.points[i][k] = int64(math.Round((p[k] - middle[k]) / reach * (1 << hullBits)))
		}
	}
	if !h.start() {
		h.flat = true
		return h
	}
	for work := []int32{0, 1, 2, 3}; len(work) > 0; {
		f := work[len(work)-1]
		work = work[:len(work)-1]
		if h.faces[f].gone || h.faces[f].first < 0 {
			continue
		}
		before := int32(len(h.faces))
		h.add(f)
		for i := before; i < int32(len(h.faces)); i++ {
			work = append(work, i)
		}
	}
	return h
}

// bounds returns the corners of the box that holds the points.
func bounds(points []mgl64.Vec3) (low, high mgl64.Vec3) {
	if len(points) == 0 {
		return low, high
	}
	low, high = points[0], points[0]
	for _, p := range points {
		for k := range 3 {
			low[k], high[k] = min(low[k], p[k]), max(high[k], p[k])
		}
	}
	return low, high
}

// start builds the first tetrahedron from far points and hands out the rest.
func (h *pointHull) start() bool {
	a := 0
	for i, p := range h.points {
		if p[0] < h.points[a][0] {
			a = i
		}
	}
	farthest := func(measure func(p [3]int64) float64) int {
		best, most := -1, 0.0
		for i, p := range h.points {
			if d := measure(p); d > most {
				best, most = i, d
			}
		}
		return best
	}
	b := farthest(func(p [3]int64) float64 { return lengthSq(between(h.points[a], p)) })
	if b < 0 {
		return false
	}
	ab := between(h.points[a], h.points[b])
	c := farthest(func(p [3]int64) float64 { return lengthSq(crossFloat(ab, between(h.points[a], p))) })
	if c < 0 {
		return false
	}
	f := h.face(int32(a), int32(b), int32(c))
	d := farthest(func(p [3]int64) float64 { return math.Abs(dotFloat(f.normal, between(h.points[a], p))) })
	if d < 0 {
		return false
	}
	side := h.side(&f, int32(d))
	if side == 0 {
		// The float measure was all rounding: look for any point off the plane exactly.
		for i := range h.points {
			if side = h.side(&f, int32(i)); side != 0 {
				d = i
				break
			}
		}
		if side == 0 {
			return false
		}
	}
	v := [4]int32{int32(a), int32(b), int32(c), int32(d)}
	if side > 0 {
		v[1], v[2] = v[2], v[1]
	}
	for _, t := range [4][3]int{{0, 1, 2}, {0, 3, 1}, {1, 3, 2}, {2, 3, 0}} {
		h.faces = append(h.faces, h.face(v[t[0]], v[t[1]], v[t[2]]))
	}
	for i := range h.faces {
		for e := range 3 {
			h.faces[i].beyond[e] = h.across(int32(i), e)
		}
	}
	for i := range h.points {
		h.assign(int32(i), 0)
	}
	return true
}

// across finds the neighbour over an edge by search; used for the tetrahedron only.
func (h *pointHull) across(f int32, e int) int32 {
	from, to := h.faces[f].corners[e], h.faces[f].corners[(e+1)%3]
	for i := range h.faces {
		for k := range 3 {
			if h.faces[i].corners[k] == to && h.faces[i].corners[(k+1)%3] == from {
				return int32(i)
			}
		}
	}
	return -1
}

// face returns a triangle with what side needs to know of it.
func (h *pointHull) face(a, b, c int32) hullFace {
	ab, ac := between(h.points[a], h.points[b]), between(h.points[a], h.points[c])
	f := hullFace{corners: [3]int32{a, b, c}, normal: crossFloat(ab, ac), first: -1}
	// The differences are exact; a component of the cross product is off by at
	// most 2u, and the scalar product by 4u more, of the sum of absolute
	// products (u = 2^-53); 8u covers both.
	most := 0.0
	for k := range 3 {
		i, j := (k+1)%3, (k+2)%3
		most += math.Abs(ab[i]*ac[j]) + math.Abs(ab[j]*ac[i])
	}
	f.bound = 8 * math.Ldexp(most, -53) * (1 << (hullBits + 1))
	return f
}

// side returns +1 for a point outside the face's plane, 0 for one in it and -1 for one inside, exactly.
func (h *pointHull) side(f *hullFace, p int32) int {
	a := h.points[f.corners[0]]
	q := h.points[p]
	d := f.normal[0]*float64(q[0]-a[0]) + f.normal[1]*float64(q[1]-a[1]) + f.normal[2]*float64(q[2]-a[2])
	switch {
	case d > f.bound:
		return 1
	case d < -f.bound:
		return -1
	}
	return exactSide(a, h.points[f.corners[1]], h.points[f.corners[2]], q)
}

// exactSide is the sign of (b-a)x(c-a)·(q-a). Differences fit in hullBits+2
// bits, the product in 3(hullBits+2)+3 = 117 of the 127 at hand.
func exactSide(a, b, c, q [3]int64) int {
	var ab, ac, aq [3]int64
	for k := range 3 {
		ab[k], ac[k], aq[k] = b[k]-a[k], c[k]-a[k], q[k]-a[k]
	}
	var sum wide
	for k := range 3 {
		i, j := (k+1)%3, (k+2)%3
		minor := product(ab[i], ac[j]).minus(product(ab[j], ac[i]))
		sum = sum.plus(minor.times(aq[k]))
	}
	switch {
	case sum.hi < 0:
		return -1
	case sum.hi == 0 && sum.lo == 0:
		return 0
	}
	return 1
}

// wide is a 128-bit whole number in two's complement.
type wide struct {
	hi int64
	lo uint64
}

func product(a, b int64) wide {
	hi, lo := bits.Mul64(uint64(a), uint64(b))
	if a < 0 {
		hi -= uint64(b)
	}
	if b < 0 {
		hi -= uint64(a)
	}
	return wide{int64(hi), lo}
}

func (w wide) plus(v wide) wide {
	lo, carry := bits.Add64(w.lo, v.lo, 0)
	hi, _ := bits.Add64(uint64(w.hi), uint64(v.hi), carry)
	return wide{int64(hi), lo}
}

func (w wide) minus(v wide) wide {
	lo, borrow := bits.Sub64(w.lo, v.lo, 0)
	hi, _ := bits.Sub64(uint64(w.hi), uint64(v.hi), borrow)
	return wide{int64(hi), lo}
}

func (w wide) times(c int64) wide {
	hi, lo := bits.Mul64(w.lo, uint64(c))
	if c < 0 {
		hi -= w.lo
	}
	return wide{int64(hi + uint64(w.hi)*uint64(c)), lo}
}

// assign hands a point to the first face, from number from on, that it stands
// outside of; a point that stands outside none is within the hull.
func (h *pointHull) assign(p, from int32) {
	for i := from; i < int32(len(h.faces)); i++ {
		f := &h.faces[i]
		if h.side(f, p) <= 0 {
			continue
		}
		h.chain[p], f.first = f.first, p
		d := dotFloat(f.normal, between(h.points[f.corners[0]], h.points[p]))
		if f.chainEmpty(h) || d > f.reach {
			f.far, f.reach = p, d
		}
		return
	}
}

// chainEmpty reports whether the point just chained is the only one.
func (f *hullFace) chainEmpty(h *pointHull) bool { return h.chain[f.first] < 0 }

// horizonEdge is an edge between a face that the new point sees and one that it does not.
type horizonEdge struct {
	from, to int32
	stays    int32
}

// add takes the farthest point outside face f into the hull.
func (h *pointHull) add(f int32) {
	eye := h.faces[f].far
	h.mark++
	var seen []int32
	var horizon []horizonEdge
	// Depth first, edges in turning order, gives the horizon as one ring.
	type step struct {
		face int32
		edge int // first edge to look at
		n    int // edges looked at
	}
	h.faces[f].mark = h.mark
	seen = append(seen, f)
	stack := []step{{f, 0, 0}}
	most := 3
	for len(stack) > 0 {
		top := &stack[len(stack)-1]
		if top.n == most || (len(stack) > 1 && top.n == 2) {
			stack = stack[:len(stack)-1]
			continue
		}
		e := (top.edge + top.n) % 3
		top.n++
		face := &h.faces[top.face]
		next := face.beyond[e]
		g := &h.faces[next]
		if g.mark == h.mark {
			continue
		}
		from, to := face.corners[e], face.corners[(e+1)%3]
		if h.side(g, eye) <= 0 {
			horizon = append(horizon, horizonEdge{from, to, next})
			continue
		}
		g.mark = h.mark
		seen = append(seen, next)
		back := 0
		for g.corners[back] != to { // its edge to..from leads back
			back++
		}
		stack = append(stack, step{next, (back + 1) % 3, 0})
	}
	before := int32(len(h.faces))
	n := int32(len(horizon))
	for i, e := range horizon {
		nf := h.face(e.from, e.to, eye)
		nf.beyond = [3]int32{e.stays, before + (int32(i)+1)%n, before + (int32(i)+n-1)%n}
		h.faces = append(h.faces, nf)
		stays := &h.faces[e.stays]
		for k := range 3 {
			if stays.corners[k] == e.to && stays.corners[(k+1)%3] == e.from {
				stays.beyond[k] = before + int32(i)
			}
		}
	}
	for _, s := range seen {
		face := &h.faces[s]
		face.gone = true
		for p := face.first; p >= 0; {
			next := h.chain[p]
			if p != eye {
				h.assign(p, before)
			}
			p = next
		}
		face.first = -1
	}
}

// triangles returns the faces that stand, and for each edge the number of the
// face across it in that same list.
func (h *pointHull) triangles() (corners, beyond [][3]int32) {
	number := make([]int32, len(h.faces))
	n := int32(0)
	for i := range h.faces {
		if !h.faces[i].gone {
			number[i] = n
			n++
		}
	}
	for i := range h.faces {
		if f := &h.faces[i]; !f.gone {
			corners = append(corners, f.corners)
			beyond = append(beyond, [3]int32{number[f.beyond[0]], number[f.beyond[1]], number[f.beyond[2]]})
		}
	}
	return corners, beyond
}

func between(a, b [3]int64) [3]float64 {
	return [3]float64{float64(b[0] - a[0]), float64(b[1] - a[1]), float64(b[2] - a[2])}
}

func crossFloat(a, b [3]float64) [3]float64 {
	return [3]float64{a[1]*b[2] - a[2]*b[1], a[2]*b[0] - a[0]*b[2], a[0]*b[1] - a[1]*b[0]}
}

func dotFloat(a, b [3]float64) float64 { return a[0]*b[0] + a[1]*b[1] + a[2]*b[2] }

func lengthSq(a [3]float64) float64 { return dotFloat(a, a) }
