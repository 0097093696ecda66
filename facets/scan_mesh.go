package facets

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// mesh is a triangulated surface whose corners are shared: what is one place is one point.
type mesh struct {
	points    []mgl64.Vec3
	triangles [][3]int32
	opposite  [][3]int32 // triangle across the edge from corner i to i+1; -1 where the edge is open
}

// weld joins the corners of a file that lie within tolerance of each other and
// drops the triangles that are nothing then. Points that no triangle uses are left out.
func weld(raw *rawMesh, tolerance float64) (*mesh, int) {
	// A cell is sixteen times the tolerance, so that few points need a look
	// into a neighbouring cell and few share one.
	cell := 16 * tolerance
	if cell == 0 {
		cell = math.SmallestNonzeroFloat64
	}
	type key [3]int64
	grid := make(map[key]int32, len(raw.points)/4)
	number := make([]int32, len(raw.points)) // 1 + place in m.points
	m := &mesh{}
	var next []int32 // other point of the same cell, 1 + place
	find := func(p mgl64.Vec3) int32 {
		var base key
		var step [3]int64
		for k := range 3 {
			at := math.Floor(p[k] / cell)
			base[k] = int64(at)
			switch within := p[k] - at*cell; {
			case within < tolerance:
				step[k] = -1
			case within > cell-tolerance:
				step[k] = 1
			}
		}
		for corner := range 8 {
			c, used := base, true
			for k := range 3 {
				if corner>>k&1 == 1 {
					c[k] += step[k]
					used = used && step[k] != 0
				}
			}
			if !used {
				continue
			}
			for q := grid[c]; q != 0; q = next[q-1] {
				if m.points[q-1].Sub(p).Len() <= tolerance {
					return q
				}
			}
		}
		m.points = append(m.points, p)
		next = append(next, grid[base])
		grid[base] = int32(len(m.points))
		return grid[base]
	}
	dropped := 0
	for _, t := range raw.triangles {
		var c [3]int32
		for i, v := range t {
			if number[v] == 0 {
				number[v] = find(raw.points[v])
			}
			c[i] = number[v] - 1
		}
		if c[0] == c[1] || c[1] == c[2] || c[2] == c[0] {
			dropped++
			continue
		}
		m.triangles = append(m.triangles, c)
	}
	return m, dropped
}

// halfEdge is one side of an edge on its way round a triangle.
type halfEdge struct {
	other    int32 // the edge's end with the greater number
	triangle int32
	corner   int8
	forward  bool // runs from the smaller number to the greater
}

// seams says where a surface fails to be closed.
type seams struct {
	open    int        // edges with one triangle
	tangled int        // edges with more than two
	turned  int        // triangles whose corners ran the wrong way round
	length  float64    // of the open edges
	first   mgl64.Vec3 // middle of the first open or tangled edge
	bodies  int        // separate pieces
	biggest int        // triangles of the largest piece
}

// connect finds what lies across every edge, and turns the triangles of each
// piece to run the same way round, with the normals out of it.
func (m *mesh) connect() seams {
	// A counting sort by the smaller corner puts the sides of an edge together.
	start := make([]int32, len(m.points)+1)
	for _, t := range m.triangles {
		for i := range 3 {
			start[min(t[i], t[(i+1)%3])+1]++
		}
	}
	for i := 1; i < len(start); i++ {
		start[i] += start[i-1]
	}
	sides := make([]halfEdge, start[len(m.points)])
	fill := make([]int32, len(m.points))
	for ti, t := range m.triangles {
		for i := range 3 {
			a, b := t[i], t[(i+1)%3]
			low := min(a, b)
			sides[start[low]+fill[low]] = halfEdge{max(a, b), int32(ti), int8(i), a < b}
			fill[low]++
		}
	}
	m.opposite = make([][3]int32, len(m.triangles))
	for i := range m.opposite {
		m.opposite[i] = [3]int32{-1, -1, -1}
	}
	same := make([][3]bool, len(m.triangles)) // the neighbour runs along the edge the same way
	var s seams
	flaw := func(low int32, side halfEdge) {
		if s.open+s.tangled == 0 {
			s.first = m.points[low].Add(m.points[side.other]).Mul(0.5)
		}
	}
	for low := range len(m.points) {
		group := sides[start[low]:start[low+1]]
		for i := range group {
			if group[i].triangle < 0 {
				continue
			}
			mate, count := -1, 1
			for j := i + 1; j < len(group); j++ {
				if group[j].triangle >= 0 && group[j].other == group[i].other {
					count++
					if mate < 0 {
						mate = j
					}
				}
			}
			a := group[i]
			switch {
			case count == 1:
				flaw(int32(low), a)
				s.open++
				s.length += m.points[low].Sub(m.points[a.other]).Len()
			case count > 2:
				flaw(int32(low), a)
				s.tangled++
				for j := i + 1; j < len(group); j++ {
					if group[j].other == a.other {
						group[j].triangle = -1
					}
				}
			default:
				b := group[mate]
				m.opposite[a.triangle][a.corner], m.opposite[b.triangle][b.corner] = b.triangle, a.triangle
				same[a.triangle][a.corner] = a.forward == b.forward
				same[b.triangle][b.corner] = a.forward == b.forward
				group[mate].triangle = -1
			}
		}
	}
	m.turn(same, &s)
	return s
}

// turn walks every piece, gives its triangles one sense of rotation, and turns
// the whole piece if its volume is negative.
func (m *mesh) turn(same [][3]bool, s *seams) {
	const unseen, kept, swapped = 0, 1, 2
	state := make([]int8, len(m.triangles))
	var queue []int32
	for first := range m.triangles {
		if state[first] != unseen {
			continue
		}
		s.bodies++
		state[first] = kept
		queue = append(queue[:0], int32(first))
		for i := 0; i < len(queue); i++ {
			t := queue[i]
			for e, n := range m.opposite[t] {
				if n < 0 || state[n] != unseen {
					continue
				}
				state[n] = state[t]
				if same[t][e] {
					state[n] = kept + swapped - state[t]
				}
				queue = append(queue, n)
			}
		}
		s.biggest = max(s.biggest, len(queue))
		volume, swaps := 0.0, 0
		for _, t := range queue {
			v := m.tripleProduct(t)
			if state[t] == swapped {
				v, swaps = -v, swaps+1
			}
			volume += v
		}
		goes := int8(swapped)
		if volume < 0 {
			goes, swaps = kept, len(queue)-swaps
		}
		s.turned += swaps
		for _, t := range queue {
			if state[t] == goes {
				c, o := &m.triangles[t], &m.opposite[t]
				c[1], c[2] = c[2], c[1]
				o[0], o[2] = o[2], o[0]
			}
		}
	}
}

// tripleProduct is six times the volume between the first point of the mesh and a triangle.
func (m *mesh) tripleProduct(t int32) float64 {
	c, o := m.triangles[t], m.points[0]
	return m.points[c[0]].Sub(o).Dot(m.points[c[1]].Sub(o).Cross(m.points[c[2]].Sub(o)))
}

// volume is the volume inside a closed mesh, in its units cubed.
func (m *mesh) volume() float64 {
	sum := 0.0
	for t := range m.triangles {
		sum += m.tripleProduct(int32(t))
	}
	return sum / 6
}

// normal returns the unit normal and the area of a triangle; a triangle of no area has a zero normal.
func (m *mesh) normal(t int32) (mgl64.Vec3, float64) {
	c := m.triangles[t]
	n := m.points[c[1]].Sub(m.points[c[0]]).Cross(m.points[c[2]].Sub(m.points[c[0]]))
	l := n.Len()
	if l == 0 {
		return mgl64.Vec3{}, 0
	}
	return n.Mul(1 / l), l / 2
}

// hullMesh returns the hull of the mesh's points as a mesh of its own, on the same points.
func (m *mesh) hullMesh() (*mesh, bool) {
	h := newHull(m.points)
	if h.flat {
		return nil, false
	}
	out := &mesh{points: m.points}
	out.triangles, out.opposite = h.triangles()
	return out, true
}
