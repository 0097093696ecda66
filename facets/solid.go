package facets

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// Plane is one flat to be cut: the half-space that stays is
// Normal·p <= Distance.
type Plane struct {
	Tier     string
	Index    float64 // tooth on the gear; NaN where there is none
	Side     Side
	Normal   mgl64.Vec3 // unit, out of the stone
	Distance float64    // from the origin along Normal, mm; may be negative
}

// What can be wrong with a set of planes. The errors that FromPlanes returns
// wrap one of them.
var (
	ErrPlane   = errors.New("a plane is not a plane")
	ErrOpen    = errors.New("the planes leave the solid open")
	ErrEmpty   = errors.New("the planes leave nothing standing")
	ErrTangled = errors.New("the planes lie too close to each other to tell where they meet")
)

// weldTolerance is the distance, as a share of the stone's reach, within which
// a corner counts as lying on a plane. Coordinates carry about 2e-16 and a
// corner where three planes meet at flat angles loses up to four digits more,
// so 1e-10 lies two orders above the rounding; it also lies six orders below
// the 0.02 mm that a cutter sees on an 8 mm stone, so nothing visible is
// welded, and a flat left out because of it changes the volume by less than
// 1e-9 of itself.
const weldTolerance = 1e-10

// weldTries are the factors on weldTolerance that a cut tries one after the
// other until its corners fall into a consistent ring. All but the first are
// needed only where edges of about weldTolerance in length lie in the cut.
var weldTries = [...]float64{1, 4, 0.25, 16, 0.0625, 64}

// boxReach is half the edge of the block that the stone is cut from, in units
// of the solid's scale. What is left of the block's own faces in the end shows
// that the solid is open. Planes 0.01 degree from parallel still close inside.
const boxReach = 1e4

// boxFaces is the number of faces of that block; they come first in
// solid.faces.
const boxFaces = 6

// solid is a convex solid under the lap: a block that cut takes pieces off.
// Lengths are in units of the scale, about 1 for the stone itself.
//
// Every face keeps its ring of corners. A cut looks at all corners once and
// rewrites only the rings it touches, so n cuts cost O(n²) very small steps:
// 1,000 cuts take about 10 ms, less than a half-edge structure costs in care.
type solid struct {
	faces   []face       // in cutting order, the block's six first; dead ones stay with no ring
	corners []mgl64.Vec3 // also those that no ring uses any more

	// Scratch space of cut, of no meaning between cuts.
	class   []int8
	fresh   []crossing
	atAbove []int32 // by corner above the plane: 1 + its latest entry in fresh
	ring    []capEdge
	next    []int32 // by corner: 1 + place in ring of the edge that leaves it
	changes []change
}

// change is what a cut does to an old face: its new ring, nil if it is gone.
type change struct {
	face int32
	ring []int32
}

// face is one flat of a solid.
type face struct {
	normal   mgl64.Vec3
	distance float64
	ring     []int32 // corners anticlockwise seen from outside; never changed in place, so copies share it
}

// crossing is a corner that a cut makes on an edge.
type crossing struct {
	below, above int32 // the edge's ends
	faces        [2]int32
	corner       int32 // the new corner
	more         int32 // 1 + next crossing with the same above
}

// capEdge is an edge of the new flat, in the direction of its ring, with the
// face on the other side.
type capEdge struct {
	from, to int32
	beyond   int32
}

// touch says how a plane met a solid.
type touch int

const (
	misses     touch = iota // the plane lies wholly outside
	grazes                  // it touches a corner or an edge and takes nothing off
	coincides               // it lies on a flat that is there already
	cuts                    // it took something off
	swallows                // nothing would be left; the solid is as before
	unresolved              // see ErrTangled; the solid is as before
)

// newSolid returns the uncut block.
func newSolid() *solid {
	s := &solid{}
	const b = boxReach
	for i := range 8 {
		s.corners = append(s.corners, mgl64.Vec3{
			b * float64(2*(i&1)-1), b * float64(i&2-1), b * float64((i&4)/2-1),
		})
	}
	for _, f := range []struct {
		n mgl64.Vec3
		r []int32
	}{
		{mgl64.Vec3{-1, 0, 0}, []int32{0, 4, 6, 2}},
		{mgl64.Vec3{1, 0, 0}, []int32{1, 3, 7, 5}},
		{mgl64.Vec3{0, -1, 0}, []int32{0, 1, 5, 4}},
		{mgl64.Vec3{0, 1, 0}, []int32{2, 6, 7, 3}},
		{mgl64.Vec3{0, 0, -1}, []int32{0, 2, 3, 1}},
		{mgl64.Vec3{0, 0, 1}, []int32{4, 5, 7, 6}},
	} {
		s.faces = append(s.faces, face{normal: f.n, distance: b, ring: f.r})
	}
	return s
}

// clone returns a copy that can be cut on its own.
func (s *solid) clone() *solid {
	return &solid{
		faces:   slices.Clone(s.faces),
		corners: slices.Clone(s.corners),
	}
}

// lives reports whether anything is left of a face.
func (s *solid) lives(face int) bool { return len(s.faces[face].ring) > 0 }

// open returns the numbers of the block's faces that are still there.
func (s *solid) open() []int {
	var left []int
	for i := range boxFaces {
		if s.lives(i) {
			left = append(left, i)
		}
	}
	return left
}

// cut takes off everything beyond the plane. A new face is appended whether
// or not anything was taken off, so that face numbers follow the cuts; it has
// no ring unless the answer is cuts.
func (s *solid) cut(normal mgl64.Vec3, distance float64) touch {
	answer := unresolved
	for _, factor := range weldTries {
		answer = s.tryCut(normal, distance, factor*weldTolerance)
		if answer != unresolved {
			break
		}
	}
	if answer != cuts {
		s.faces = append(s.faces, face{normal: normal, distance: distance})
	}
	return answer
}

const (
	isBelow int8 = iota - 1
	isOn
	isAbove
)

// tryCut is one attempt at cut with the given tolerance. It changes nothing
// unless it returns cuts, in which case it has appended the new face.
func (s *solid) tryCut(normal mgl64.Vec3, distance, tolerance float64) touch {
	s.classify(normal, distance, tolerance)
	if t := s.walk(); t != cuts {
		return t
	}
	ring, ok := s.newRing()
	if !ok {
		return unresolved
	}
	for _, x := range s.fresh {
		s.corners = append(s.corners, s.place(x, normal, distance))
	}
	for _, c := range s.changes {
		s.faces[c.face].ring = c.ring
	}
	s.faces = append(s.faces, face{normal, distance, ring})
	return cuts
}

// classify sorts the corners into below, on and above the plane.
func (s *solid) classify(normal mgl64.Vec3, distance, tolerance float64) {
	n := len(s.corners)
	s.class = slices.Grow(s.class[:0], n)[:n]
	s.atAbove = slices.Grow(s.atAbove[:0], n)[:n]
	clear(s.atAbove)
	for i, c := range s.corners {
		switch d := normal[0]*c[0] + normal[1]*c[1] + normal[2]*c[2] - distance; {
		case d > tolerance:
			s.class[i] = isAbove
		case d < -tolerance:
			s.class[i] = isBelow
		default:
			s.class[i] = isOn
		}
	}
}

// walk goes round every ring and plans its change. A ring with corners above
// the plane vanishes if nothing of it lies below; else a new edge replaces the
// run of corners above.
func (s *solid) walk() touch {
	s.fresh, s.ring, s.changes = s.fresh[:0], s.ring[:0], s.changes[:0]
	var level [][2]int32 // edges of vanishing faces that lie in the plane
	anyOn, anyBelow, allOn := false, false, false
	for i := range s.faces {
		ring := s.faces[i].ring
		run := s.runAbove(ring)
		below := len(ring) - run.above - run.on
		anyOn = anyOn || run.on > 0
		anyBelow = anyBelow || below > 0
		allOn = allOn || run.on > 0 && run.on == len(ring)
		switch {
		case run.above == 0:
		case run.count > 1:
			return unresolved // at this tolerance the ring is not convex
		case below == 0:
			s.changes = append(s.changes, change{int32(i), nil})
			level = s.levelEdges(level, ring)
		case !s.shorten(int32(i), run):
			return unresolved
		}
	}
	switch {
	case !anyBelow:
		return swallows
	case len(s.changes) > 0 && allOn:
		return unresolved // a flat lies in the plane and yet a corner stands above it
	case len(s.changes) > 0:
	case allOn:
		return coincides
	case anyOn:
		return grazes
	default:
		return misses
	}
	for _, e := range level {
		if beyond, stays := s.across(e); stays {
			s.ring = append(s.ring, capEdge{e[0], e[1], beyond})
		}
	}
	return cuts
}

// aboveRun counts the corners of a ring by class and finds the run above.
type aboveRun struct {
	above, on int
	start     int // place of the run's first corner
	count     int // of runs
}

func (s *solid) runAbove(ring []int32) aboveRun {
	var r aboveRun
	for j, c := range ring {
		switch s.class[c] {
		case isAbove:
			r.above++
			if s.class[ring[(j+len(ring)-1)%len(ring)]] != isAbove {
				r.start = j
				r.count++
			}
		case isOn:
			r.on++
		}
	}
	return r
}

// levelEdges appends the edges of a ring that lie in the plane.
func (s *solid) levelEdges(list [][2]int32, ring []int32) [][2]int32 {
	for j, a := range ring {
		if b := ring[(j+1)%len(ring)]; s.class[a] == isOn && s.class[b] == isOn {
			list = append(list, [2]int32{a, b})
		}
	}
	return list
}

// shorten plans the ring of a face that loses a run of corners.
func (s *solid) shorten(face int32, run aboveRun) bool {
	ring := s.faces[face].ring
	n := len(ring)
	kept := make([]int32, 0, n-run.above+2)
	for j := range n - run.above {
		kept = append(kept, ring[(run.start+run.above+j)%n])
	}
	from, to := kept[len(kept)-1], kept[0]
	if s.class[from] == isBelow {
		from = s.cross(from, ring[run.start], face)
		kept = append(kept, from)
	}
	if s.class[to] == isBelow {
		to = s.cross(to, ring[(run.start+run.above-1)%n], face)
		kept = append(kept, to)
	}
	s.ring = append(s.ring, capEdge{from: to, to: from, beyond: face})
	s.changes = append(s.changes, change{face, kept})
	return from != to && len(kept) >= 3
}

// cross returns the new corner on the edge between a corner below and one
// above, as met on the way round a face. Both faces of the edge meet it.
func (s *solid) cross(below, above, face int32) int32 {
	for k := s.atAbove[above]; k != 0; k = s.fresh[k-1].more {
		if x := &s.fresh[k-1]; x.below == below {
			x.faces[1] = face
			return x.corner
		}
	}
	corner := int32(len(s.corners) + len(s.fresh))
	s.fresh = append(s.fresh, crossing{below, above, [2]int32{face, -1}, corner, s.atAbove[above]})
	s.atAbove[above] = int32(len(s.fresh))
	return corner
}

// across returns the face on the other side of an edge of a vanishing face,
// and whether that face stays.
func (s *solid) across(e [2]int32) (beyond int32, stays bool) {
	for i := range s.faces {
		ring := s.faces[i].ring
		for j, a := range ring {
			if a != e[1] || ring[(j+1)%len(ring)] != e[0] {
				continue
			}
			goes := slices.ContainsFunc(s.changes, func(c change) bool {
				return c.face == int32(i) &&
					c.ring == nil
			})
			return int32(i), !goes
		}
	}
	return -1, false
}

// newRing links the edges of the new flat to its ring. It reports false if
// they do not form exactly one.
func (s *solid) newRing() ([]int32, bool) {
	if len(s.ring) < 3 {
		return nil, false
	}
	n := len(s.corners) + len(s.fresh)
	s.next = slices.Grow(s.next[:0], n)[:n]
	clear(s.next)
	for j, e := range s.ring {
		if s.next[e.from] != 0 {
			return nil, false
		}
		s.next[e.from] = int32(j) + 1
	}
	ring := make([]int32, 0, len(s.ring))
	first := s.ring[0]
	k := slices.IndexFunc(s.ring, func(e capEdge) bool { return e.to == first.from })
	if k < 0 {
		return nil, false
	}
	last := s.ring[k]
	for e, seen := first, 0; ; {
		if last.beyond != e.beyond {
			ring = append(ring, e.from)
		} else if !s.smooth(e.beyond, e.from) {
			return nil, false
		}
		if seen++; e.to == first.from {
			return ring, seen == len(s.ring) && len(ring) >= 3
		}
		j := s.next[e.to]
		if j == 0 || seen > len(s.ring) {
			return nil, false
		}
		last, e = e, s.ring[j-1]
	}
}

// smooth takes a corner out of a face's ring: it lies between two edges toward
// the new flat, so the two share a line there and it is no corner any more.
func (s *solid) smooth(face, corner int32) bool {
	k := slices.IndexFunc(s.changes, func(c change) bool { return c.face == face })
	if k < 0 {
		s.changes = append(s.changes, change{face, s.faces[face].ring})
		k = len(s.changes) - 1
	}
	old := s.changes[k].ring
	ring := make([]int32, 0, len(old))
	for _, c := range old {
		if c != corner {
			ring = append(ring, c)
		}
	}
	s.changes[k].ring = ring
	return len(ring) >= 3
}

// place computes where a crossing lies. Interpolation along the edge is always
// sane and keeps the corner between the edge's ends; one step onto the three
// planes then takes away the error that the ends brought along, where the
// planes meet steeply enough for the step to be better than what it corrects.
func (s *solid) place(x crossing, normal mgl64.Vec3, distance float64) mgl64.Vec3 {
	a, b := s.corners[x.below], s.corners[x.above]
	da, db := normal.Dot(a)-distance, normal.Dot(b)-distance
	p := a.Add(b.Sub(a).Mul(da / (da - db)))
	if x.faces[1] < 0 {
		return p
	}
	f, g := &s.faces[x.faces[0]], &s.faces[x.faces[1]]
	return onPlanes(p, f.normal, f.distance, g.normal, g.distance, normal, distance)
}

// flattest is the smallest triple product of three unit normals at which their
// planes fix a corner better than interpolation does: the rounding of the
// residuals, 2e-16, grows by its inverse and stays below weldTolerance / 10.
const flattest = 1e-5

// onPlanes moves p onto the common point of three planes, unless they are too
// flat to each other to fix one or the point is not near.
func onPlanes(p, n0 mgl64.Vec3, d0 float64, n1 mgl64.Vec3, d1 float64, n2 mgl64.Vec3, d2 float64) mgl64.Vec3 {
	c12, c20, c01 := n1.Cross(n2), n2.Cross(n0), n0.Cross(n1)
	det := n0.Dot(c12)
	if math.Abs(det) < flattest {
		return p
	}
	for range 2 {
		r0, r1, r2 := d0-n0.Dot(p), d1-n1.Dot(p), d2-n2.Dot(p)
		p = p.Add(c12.Mul(r0 / det)).Add(c20.Mul(r1 / det)).Add(c01.Mul(r2 / det))
	}
	return p
}

// FromPlanes returns the closed solid that all the planes bound, in any
// consistent unit of length. Planes that take nothing off (they lie outside,
// touch a corner or an edge only, or repeat another) are left out; the others
// keep their order as the stone's facets. Corners that several planes share
// within weldTolerance are one corner, and V - E + F = 2 always holds. The
// error wraps ErrPlane, ErrOpen, ErrEmpty or ErrTangled.
func FromPlanes(name string, planes []Plane) (*Stone, error) {
	if err := sound(planes); err != nil {
		return nil, err
	}
	// The first pass finds where the solid lies and how large it is, the
	// second cuts it at the origin with its own size as the unit, so that the
	// tolerance is a share of the stone whatever the unit and place.
	scale := 0.0
	for _, p := range planes {
		scale = math.Max(scale, math.Abs(p.Distance))
	}
	if scale == 0 {
		return nil, fmt.Errorf("%w: all pass through the origin", ErrEmpty)
	}
	var middle mgl64.Vec3
	for range 3 {
		s, err := cutAll(planes, middle, scale)
		if err != nil {
			return nil, err
		}
		stone := s.stone(name, planes, middle, scale)
		centre, reach := stone.reach()
		if off := centre.Sub(middle).Len(); off < 0.5*reach && scale < 4*reach && reach < 4*scale {
			return stone, stone.sound()
		}
		middle, scale = centre, reach
	}
	return nil, fmt.Errorf("%w: the solid is too small beside its distance from the origin", ErrTangled)
}

// sound reports the first plane that is none.
func sound(planes []Plane) error {
	for _, p := range planes {
		l := p.Normal.Len()
		if !(math.Abs(l-1) < 1e-9) || math.IsNaN(p.Distance) || math.IsInf(p.Distance, 0) {
			return fmt.Errorf("%w: tier %q, index %g: normal %v, distance %g", ErrPlane, p.Tier, p.Index,
				p.Normal, p.Distance)
		}
	}
	return nil
}

// cutAll cuts the planes from a block, with middle as origin and scale as
// unit.
func cutAll(planes []Plane, middle mgl64.Vec3, scale float64) (*solid, error) {
	s := newSolid()
	for _, p := range planes {
		switch s.cut(p.Normal, (p.Distance-p.Normal.Dot(middle))/scale) {
		case swallows:
			return nil, fmt.Errorf("%w after tier %q, index %g", ErrEmpty, p.Tier, p.Index)
		case unresolved:
			return nil, fmt.Errorf("%w: tier %q, index %g", ErrTangled, p.Tier, p.Index)
		}
	}
	if left := s.open(); len(left) > 0 {
		return nil, fmt.Errorf("%w toward %s", ErrOpen, directions(left))
	}
	return s, nil
}

// directions names the open sides of the block for a message.
func directions(left []int) string {
	words := [...]string{"-x", "+x", "-y", "+y", "-z (below)", "+z (above)"}
	var named []string
	for _, i := range left {
		named = append(named, words[i])
	}
	return strings.Join(named, ", ")
}

// stone returns what is left of the solid, with its faces named by planes (one
// for each cut) and its lengths multiplied by scale and moved by middle.
func (s *solid) stone(name string, planes []Plane, middle mgl64.Vec3, scale float64) *Stone {
	t := &Stone{Name: name}
	number := make([]int, len(s.corners)) // 1 + place in t.Corners
	for i := boxFaces; i < len(s.faces); i++ {
		f := &s.faces[i]
		if len(f.ring) == 0 {
			continue
		}
		p := planes[i-boxFaces]
		corners := make([]int, len(f.ring))
		for j, c := range f.ring {
			if number[c] == 0 {
				t.Corners = append(t.Corners, s.corners[c].Mul(scale).Add(middle))
				number[c] = len(t.Corners)
			}
			corners[j] = number[c] - 1
		}
		t.Facets = append(t.Facets, Facet{
			Tier: p.Tier, Index: p.Index, Side: p.Side, Normal: f.normal,
			Distance: f.distance*scale + f.normal.Dot(middle), Corners: corners,
		})
	}
	for i := range t.Facets {
		t.Facets[i].Area = t.area(i)
	}
	t.findEdges()
	return t
}

// area returns the area of a facet.
func (s *Stone) area(facet int) float64 {
	f := &s.Facets[facet]
	if len(f.Corners) < 3 {
		return 0
	}
	var sum mgl64.Vec3
	o := s.Corners[f.Corners[0]]
	for j := 1; j+1 < len(f.Corners); j++ {
		sum = sum.Add(s.Corners[f.Corners[j]].Sub(o).Cross(s.Corners[f.Corners[j+1]].Sub(o)))
	}
	return sum.Dot(f.Normal) / 2
}

// findEdges fills in the edges from the facets' corners, in the order in which
// the facets reach them.
func (s *Stone) findEdges() {
	seen := make(map[[2]int]int, 3*len(s.Facets))
	s.Edges = s.Edges[:0]
	for i, f := range s.Facets {
		for j, a := range f.Corners {
			key := [2]int{a, f.Corners[(j+1)%len(f.Corners)]}
			if key[0] > key[1] {
				key[0], key[1] = key[1], key[0]
			}
			if e, ok := seen[key]; ok {
				s.Edges[e].Facets[1] = i
				continue
			}
			seen[key] = len(s.Edges)
			s.Edges = append(s.Edges, Edge{Corners: key, Facets: [2]int{i, -1}})
		}
	}
}

// thinnest is the least ratio of volume to surface, in the stone's reach, at
// which its planes can be told apart: four orders above weldTolerance.
const thinnest = 1e-6

// sound checks that the stone is closed and no mere sheet: every edge has two
// facets and Euler's formula holds.
func (s *Stone) sound() error {
	for _, e := range s.Edges {
		if e.Facets[1] < 0 {
			return fmt.Errorf("%w: an edge at %v has one facet only", ErrTangled, s.Corners[e.Corners[0]])
		}
	}
	if len(s.Corners)-len(s.Edges)+len(s.Facets) != 2 {
		return fmt.Errorf("%w: %d corners, %d edges and %d facets do not close",
			ErrTangled, len(s.Corners), len(s.Edges), len(s.Facets))
	}
	surface := 0.0
	for i := range s.Facets {
		surface += s.Facets[i].Area
	}
	if _, reach := s.reach(); !(s.Volume() > thinnest*reach*surface) {
		return fmt.Errorf("%w: the solid is thinner than %g of its size", ErrTangled, thinnest)
	}
	return nil
}

// reach returns the middle of the stone's corners and the distance of the
// farthest from it.
func (s *Stone) reach() (mgl64.Vec3, float64) {
	low, high := s.Corners[0], s.Corners[0]
	for _, c := range s.Corners {
		for k := range c {
			low[k], high[k] = math.Min(low[k], c[k]), math.Max(high[k], c[k])
		}
	}
	middle, far := low.Add(high).Mul(0.5), 0.0
	for _, c := range s.Corners {
		far = math.Max(far, c.Sub(middle).Len())
	}
	return middle, far
}
