package facets

import (
	"cmp"
	"container/heap"
	"fmt"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
)

// fitter holds what is the same for all orientations of one stone in one rough.
type fitter struct {
	rough     Rough
	allowance float64
	volume    float64 // mm³ of the rough
	notes     []string

	corners              []mgl64.Vec3 // of the stone, from its centroid
	beside               [][]int32    // by corner: those at the other ends of its edges
	sides                []mgl64.Vec3 // directions in the stone's frame along which a place may be kept out
	centroid             mgl64.Vec3
	roughAxis, stoneAxis mgl64.Vec3

	flats   []flat   // of the rough: all of a box or scan, the ends of a cylinder
	spheres []Sphere // to be avoided, dents included
	nodes   int      // choices made so far
	reach   float64  // mm: the rough lies within this of its frame's origin
}

func newFitter(r Rough, s *Stone) *fitter {
	f := &fitter{rough: r, allowance: r.allowance(), centroid: s.centroid(),
		spheres: slices.Clone(r.AvoidSpheres)}
	for _, c := range s.Corners {
		f.corners = append(f.corners, c.Sub(f.centroid))
	}
	f.beside = make([][]int32, len(f.corners))
	for _, e := range s.Edges {
		a, b := e.Corners[0], e.Corners[1]
		f.beside[a] = append(f.beside[a], int32(b))
		f.beside[b] = append(f.beside[b], int32(a))
	}
	for _, facet := range s.Facets {
		f.sides = append(f.sides, facet.Normal)
	}
	for _, c := range f.corners {
		f.sides = append(f.sides, c.Normalize())
	}
	for _, e := range s.Edges {
		if m := f.corners[e.Corners[0]].Add(f.corners[e.Corners[1]]); m.Len() > 0 {
			f.sides = append(f.sides, m.Normalize())
		}
	}
	f.stoneAxis = mgl64.Vec3{0, 0, 1}
	if r.StoneAxis.Len() > 0 {
		f.stoneAxis = r.StoneAxis.Normalize()
	}
	if r.Axis.Len() > 0 {
		f.roughAxis = r.Axis.Normalize()
	}
	half := r.Size.Mul(0.5)
	f.reach = half.Len()
	faces := func(axes ...int) {
		for _, k := range axes {
			for _, sign := range []float64{1, -1} {
				var n mgl64.Vec3
				n[k] = sign
				f.flats = append(f.flats, flat{normal: n, distance: half[k]})
			}
		}
	}
	switch r.Shape {
	case Box:
		faces(0, 1, 2)
		f.volume = 8 * half[0] * half[1] * half[2]
	case Cylinder:
		faces(2)
		f.volume = 2 * math.Pi * half[0] * half[0] * half[2]
	case Ellipsoid:
		f.volume = 4 * math.Pi / 3 * half[0] * half[1] * half[2]
	case Scanned:
		f.takeScan(r.Scan)
	}
	return f
}

// takeScan bounds the stone by the scan's hull and keeps it out of the dents.
func (f *fitter) takeScan(sc *Scan) {
	f.volume = sc.Volume
	hull := sc.hull
	if len(hull.triangles) > maxRoughPlanes {
		hull = innerHull(hull)
		f.notes = append(f.notes, fmt.Sprintf("The rough's hull was taken inside its scan with %d flats.",
			len(hull.triangles)))
	}
	for t := range hull.triangles {
		n, area := hull.normal(int32(t))
		if area == 0 {
			continue
		}
		p := flat{normal: n, distance: n.Dot(hull.points[hull.triangles[t][0]])}
		// Triangles of one flat give the same plane again and again.
		if len(f.flats) > 0 && f.flats[len(f.flats)-1] == p {
			continue
		}
		f.flats = append(f.flats, p)
	}
	for _, p := range sc.mesh.points {
		f.reach = max(f.reach, p.Len())
	}
	before := len(f.spheres)
	f.coverDents(sc)
	// Less than a thousandth is the triangulation's own roughness.
	if share := 1 - sc.Volume/sc.HullVolume; len(f.spheres) > before && share > 1e-3 {
		f.notes = append(f.notes, fmt.Sprintf("The rough is dented; the stone is kept out of the dents (%.4g mm³ between surface and hull).", sc.HullVolume-sc.Volume))
	}
}

// innerHull returns the hull of the points that are farthest in directions
// spread over the sphere: inside the old hull, and of few flats.
func innerHull(hull *mesh) *mesh {
	// A hull of V corners has 2 V - 4 triangles.
	directions := spreadDirections(maxRoughPlanes / 2)
	used := map[int32]bool{}
	var corners []int32
	for _, t := range hull.triangles {
		for _, c := range t {
			if !used[c] {
				used[c] = true
				corners = append(corners, c)
			}
		}
	}
	kept := map[int32]bool{}
	var points []mgl64.Vec3
	for _, d := range directions {
		best, most := int32(-1), math.Inf(-1)
		for _, c := range corners {
			if x := d.Dot(hull.points[c]); x > most {
				best, most = c, x
			}
		}
		if !kept[best] {
			kept[best] = true
			points = append(points, hull.points[best])
		}
	}
	h := newHull(points)
	inner := &mesh{points: points}
	inner.triangles, inner.opposite = h.triangles()
	return inner
}

// seenDent is the depth below the hull, in mm, from which a dent of the rough
// counts: what a cutter sees.
const seenDent = 0.02

// coverDents covers the surface that lies below the hull with spheres.
func (f *fitter) coverDents(sc *Scan) {
	m := sc.mesh
	// A triangle is the hull's own if one flat holds it; all its corners may lie
	// on the hull while its middle does not.
	// The hull may have been thinned, so its own triangles are known by name.
	own := make(map[[3]int32]bool, len(sc.hull.triangles))
	name := func(t [3]int32) [3]int32 {
		slices.Sort(t[:])
		return t
	}
	for _, t := range sc.hull.triangles {
		own[name(t)] = true
	}
	hint := 0
	onHull := func(t [3]int32) bool {
		if own[name(t)] {
			return true
		}
		holds := func(p *flat) bool {
			for _, c := range t {
				if p.distance-p.normal.Dot(m.points[c]) > seenDent {
					return false
				}
			}
			return true
		}
		if holds(&f.flats[hint]) {
			return true
		}
		for k := range f.flats {
			if holds(&f.flats[k]) {
				hint = k
				return true
			}
		}
		return false
	}
	// Spheres as wide as a fortieth of the rough keep little more out than the dent.
	least := max(seenDent, max(sc.Size[0], sc.Size[1], sc.Size[2])/80)
	var cover func(a, b, c mgl64.Vec3, depth int)
	cover = func(a, b, c mgl64.Vec3, depth int) {
		middle := a.Add(b).Add(c).Mul(1.0 / 3)
		radius := max(a.Sub(middle).Len(), b.Sub(middle).Len(), c.Sub(middle).Len())
		const mostDepth = 12 // 4096 pieces of one triangle: its edges shrink to a 64th
		if radius <= least || depth >= mostDepth {
			f.spheres = append(f.spheres, Sphere{middle, radius})
			return
		}
		// Halve the longest edge.
		ab, bc, ca := a.Sub(b).Len(), b.Sub(c).Len(), c.Sub(a).Len()
		switch {
		case ab >= bc && ab >= ca:
			m := a.Add(b).Mul(0.5)
			cover(a, m, c, depth+1)
			cover(m, b, c, depth+1)
		case bc >= ca:
			m := b.Add(c).Mul(0.5)
			cover(b, m, a, depth+1)
			cover(m, c, a, depth+1)
		default:
			m := c.Add(a).Mul(0.5)
			cover(c, m, b, depth+1)
			cover(m, a, b, depth+1)
		}
	}
	for _, t := range m.triangles {
		if !onHull(t) {
			cover(m.points[t[0]], m.points[t[1]], m.points[t[2]], 0)
		}
	}
}

// oriented is the stone in one orientation with its linear program.
type oriented struct {
	f       *fitter
	corners []mgl64.Vec3 // from the centroid, in the rough's frame
	turn    mgl64.Mat3
	last    int32 // corner at which the last support was found
	lp      linearProgram
}

// orient sets up the linear program: place of the centroid and scale, the
// greatest scale wanted.
func (f *fitter) orient(turn mgl64.Mat3) *oriented {
	o := &oriented{f: f, turn: turn, corners: make([]mgl64.Vec3, len(f.corners))}
	for i, c := range f.corners {
		o.corners[i] = turn.Mul3x1(c)
	}
	o.lp = linearProgram{variables: 4, goal: [4]float64{0, 0, 0, 1}, slack: overstep / 10}
	// Four far walls of a tetrahedron hold the first corner; their normals add
	// up to nothing, so that they bound the scale together.
	far := 100 * f.reach
	for i, n := range [4]mgl64.Vec3{{1, 1, 1}, {1, -1, -1}, {-1, 1, -1}, {-1, -1, 1}} {
		n = n.Normalize()
		o.lp.constraints = append(o.lp.constraints, constraint{a: [4]float64{n[0], n[1], n[2], o.support(n)},
			b: far})
		o.lp.basis[i] = i
	}
	for i := range f.flats {
		o.within(f.flats[i].normal, f.flats[i].distance)
	}
	switch f.rough.Shape {
	case Cylinder:
		for k := range 8 {
			o.within(toward(float64(k)*math.Pi/4).Vec3(0), f.rough.Size[0]/2)
		}
	case Ellipsoid:
		for _, n := range spreadDirections(26) {
			o.within(n, f.ellipsoidSupport(n))
		}
	}
	return o
}

// support is the stone's extent along a direction, from its centroid. It climbs
// from corner to higher corner along edges, which on a convex solid ends at the
// highest, and starts where the last one ended.
func (o *oriented) support(u mgl64.Vec3) float64 {
	height := func(i int32) float64 {
		c := &o.corners[i]
		return u[0]*c[0] + u[1]*c[1] + u[2]*c[2]
	}
	most := height(o.last)
	for climbing := true; climbing; {
		climbing = false
		for _, i := range o.f.beside[o.last] {
			if h := height(i); h > most {
				o.last, most, climbing = i, h, true
				break
			}
		}
	}
	return most
}

// wall is the constraint that the stone stays behind a plane, less the allowance.
func (o *oriented) wall(u mgl64.Vec3, distance float64) constraint {
	return constraint{a: [4]float64{u[0], u[1], u[2], o.support(u)}, b: distance - o.f.allowance}
}

func (o *oriented) within(u mgl64.Vec3, distance float64) {
	o.lp.constraints = append(o.lp.constraints, o.wall(u, distance))
}

// solve maximises the scale, adding flats of curved rough until no corner
// oversteps it by more than a length in mm.
func (o *oriented) solve(overstep float64) (scale float64, centre mgl64.Vec3, ok bool) {
	const rounds = 60 // each takes most of what the one before overstepped
	for range rounds {
		if o.lp.solve() != lpOptimal {
			return 0, centre, false
		}
		scale = o.lp.corner[3]
		centre = mgl64.Vec3{o.lp.corner[0], o.lp.corner[1], o.lp.corner[2]}
		if scale <= 0 {
			return 0, centre, false
		}
		if !o.cutCurved(scale, centre, overstep) {
			return scale, centre, true
		}
	}
	return 0, centre, false
}

// mostCuts is the number of flats added at a time.
const mostCuts = 6

// cutCurved adds flats for the corners that reach farthest out of curved
// rough, false if none oversteps.
func (o *oriented) cutCurved(scale float64, centre mgl64.Vec3, overstep float64) bool {
	type cut struct {
		u    mgl64.Vec3
		over float64
	}
	var cuts []cut
	half := o.f.rough.Size.Mul(0.5)
	switch o.f.rough.Shape {
	case Cylinder:
		for _, c := range o.corners {
			p := centre.Add(c.Mul(scale)).Vec2()
			if over := p.Len() + o.f.allowance - half[0]; over > overstep {
				cuts = append(cuts, cut{p.Normalize().Vec3(0), over})
			}
		}
	case Ellipsoid:
		least := min(half[0], half[1], half[2])
		for _, c := range o.corners {
			p := centre.Add(c.Mul(scale))
			// A point at a share r of the way out holds a ball of (1 - r) of the
			// least half axis: most corners need no closer look.
			r := mgl64.Vec3{p[0] / half[0], p[1] / half[1], p[2] / half[2]}.Len()
			if (1-r)*least >= o.f.allowance-overstep {
				continue
			}
			n, inside := o.f.nearestOnEllipsoid(p)
			if over := o.f.allowance - inside; over > overstep {
				cuts = append(cuts, cut{n, over})
			}
		}
	}
	slices.SortStableFunc(cuts, func(a, b cut) int { return cmp.Compare(b.over, a.over) })
	for _, c := range cuts[:min(mostCuts, len(cuts))] {
		distance := half[0]
		if o.f.rough.Shape == Ellipsoid {
			distance = o.f.ellipsoidSupport(c.u)
		}
		o.within(c.u, distance)
	}
	return len(cuts) > 0
}

// ellipsoidSupport is the rough's extent along a direction.
func (f *fitter) ellipsoidSupport(u mgl64.Vec3) float64 {
	half := f.rough.Size.Mul(0.5)
	return mgl64.Vec3{half[0] * u[0], half[1] * u[1], half[2] * u[2]}.Len()
}

// nearestOnEllipsoid returns the normal at the nearest point of the ellipsoid
// and how deep the point lies inside (negative outside). The nearest point is
// a_i² p_i / (t + a_i²) with the one t above -min a_i² that puts it on the
// surface (Hart, Graphics Gems IV, 1994); the normal is p_i / (t + a_i²).
func (f *fitter) nearestOnEllipsoid(p mgl64.Vec3) (mgl64.Vec3, float64) {
	a := f.rough.Size.Mul(0.5)
	// The sum below falls with t and is hollow from below; at this start one of
	// its terms is 1, so that Newton's steps climb to the root and never pass it.
	t := math.Inf(-1)
	for k := range 3 {
		t = max(t, a[k]*math.Abs(p[k])-a[k]*a[k])
	}
	for range 50 {
		sum, slope := -1.0, 0.0
		for k := range 3 {
			if d := t + a[k]*a[k]; d > 0 {
				x := a[k] * p[k] / d
				sum += x * x
				slope -= 2 * x * x / d
			}
		}
		step := -sum / slope
		if !(step > 1e-15*a[0]*a[0]) {
			break
		}
		t += step
	}
	var n mgl64.Vec3
	for k := range 3 {
		if d := t + a[k]*a[k]; d > 0 {
			n[k] = p[k] / d
		}
	}
	if n.Len() == 0 { // the middle of the ellipsoid
		n[slices.Index(a[:], min(a[0], a[1], a[2]))] = 1
	}
	n = n.Normalize()
	// The support plane's distance is the depth, exact where q is nearest.
	return n, f.ellipsoidSupport(n) - n.Dot(p)
}

// bound returns the largest scale in one orientation with nothing to avoid, 0
// if none fits, to within an overstep in mm; never less than the true one.
func (f *fitter) bound(turn mgl64.Mat3, overstep float64) float64 {
	scale, _, _ := f.orient(turn).solve(overstep)
	return scale
}

// choice is a linear program with some sides chosen, in the order of its scale.
type choice struct {
	extra  []constraint
	scale  float64
	centre mgl64.Vec3
}

type choices []choice

func (c choices) Len() int           { return len(c) }
func (c choices) Less(i, j int) bool { return c[i].scale > c[j].scale }
func (c choices) Swap(i, j int)      { c[i], c[j] = c[j], c[i] }
func (c *choices) Push(x any)        { *c = append(*c, x.(choice)) }
func (c *choices) Pop() any {
	last := (*c)[len(*c)-1]
	*c = (*c)[:len(*c)-1]
	return last
}

// avoiding returns the largest scale found in one orientation with all places
// avoided, if it is above floor: a side is chosen for the place that reaches
// deepest into the stone until none does.
func (f *fitter) avoiding(turn mgl64.Mat3, floor float64) (float64, mgl64.Vec3, bool) {
	o := f.orient(turn)
	scale, centre, ok := o.solve(overstep)
	if !ok {
		return 0, centre, false
	}
	place := func(scale float64, centre mgl64.Vec3) mgl64.Vec3 {
		return centre.Sub(turn.Mul3x1(f.centroid).Mul(scale))
	}
	if len(f.spheres)+len(f.rough.AvoidPlanes) == 0 {
		return scale, place(scale, centre), true
	}
	base := o.lp.constraints
	sides := make([]mgl64.Vec3, len(f.sides))
	supports := make([]float64, len(f.sides))
	for i, u := range f.sides {
		sides[i] = turn.Mul3x1(u)
		supports[i] = o.support(sides[i])
	}
	var best choice
	found := false
	open := choices{}
	// First straight down, always on to the best of the sides just tried, which
	// soon gives a stone that fits; then back to what promised more.
	c, more := choice{nil, scale, centre}, true
	for nodes := 0; more && c.scale > floor && nodes < mostNodes && f.nodes < f.mostNodes(); nodes++ {
		f.nodes++
		options := o.options(c.scale, c.centre, sides, supports)
		if options == nil {
			best, found, floor = c, true, c.scale
		}
		var down choice
		for _, option := range options {
			next := choice{extra: append(slices.Clone(c.extra), option)}
			o.lp.constraints = append(base[:len(base):len(base)], next.extra...)
			o.lp.basis = [4]int{0, 1, 2, 3}
			if next.scale, next.centre, ok = o.solve(overstep); !ok || next.scale <= floor {
				continue
			}
			if next.scale > down.scale {
				next, down = down, next
			}
			if next.scale > 0 {
				heap.Push(&open, next)
			}
		}
		switch {
		case !found && down.scale > 0:
			c = down
			continue
		case down.scale > 0:
			heap.Push(&open, down)
		}
		if more = len(open) > 0; more {
			c = heap.Pop(&open).(choice)
		}
	}
	return best.scale, place(best.scale, best.centre), found
}

// mostNodes is the number of choices that all orientations may take together:
// as many as some seconds allow.
func (f *fitter) mostNodes() int {
	const (
		work      = 2e9
		perSphere = 20 // sides looked at before one is clear
		perFlat   = 60 // exchanges of a linear program
	)
	cost := perSphere*len(f.spheres) + perFlat*mostSides*len(f.flats)
	return min(allNodes, max(50, work/(1+cost)))
}

// options returns the sides from which the place that reaches deepest into the
// stone may be kept out, nil if none reaches in.
func (o *oriented) options(scale float64, centre mgl64.Vec3, sides []mgl64.Vec3,
	supports []float64) []constraint {
	f := o.f
	deepest := overstep
	var out []constraint
	for _, p := range f.rough.AvoidPlanes {
		// The stone may lie on either side; it reaches over the plane by the lesser of the two.
		above := p.Normal.Dot(centre) + scale*o.support(p.Normal) - p.Distance + f.allowance
		back := p.Normal.Mul(-1)
		below := back.Dot(centre) + scale*o.support(back) + p.Distance + f.allowance
		if over := min(above, below); over > deepest {
			deepest = over
			out = []constraint{o.wall(p.Normal, p.Distance), o.wall(back, -p.Distance)}
		}
	}
	worst := -1
	for i, s := range f.spheres {
		keep := s.Radius + f.allowance
		d := s.Centre.Sub(centre)
		over := math.Inf(1)
		for k, u := range sides {
			if over = min(over, scale*supports[k]-u.Dot(d)+keep); over <= deepest {
				break
			}
		}
		if over > deepest {
			deepest, worst = over, i
		}
	}
	if worst < 0 {
		if out == nil && f.rough.Shape == Scanned && len(f.spheres) > len(f.rough.AvoidSpheres) {
			// The stone touches no dent, yet it may lie wholly inside one.
			if near, inside := f.rough.Scan.mesh.holds(centre); !inside {
				return o.sidesOf(Sphere{centre, max(near-f.allowance, 0)}, scale, centre, sides, supports)
			}
		}
		return out
	}
	return o.sidesOf(f.spheres[worst], scale, centre, sides, supports)
}

// sidesOf returns the walls between the stone and a sphere, those that it oversteps least first.
func (o *oriented) sidesOf(s Sphere, scale float64, centre mgl64.Vec3, sides []mgl64.Vec3,
	supports []float64) []constraint {
	keep := s.Radius + o.f.allowance
	d := s.Centre.Sub(centre)
	order := make([]int, len(sides))
	over := make([]float64, len(sides))
	for k, u := range sides {
		order[k], over[k] = k, scale*supports[k]-u.Dot(d)
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case over[a] < over[b]:
			return -1
		case over[a] > over[b]:
			return 1
		}
		return a - b
	})
	var out []constraint
	for _, k := range order[:min(mostSides, len(order))] {
		u := sides[k]
		out = append(out, constraint{a: [4]float64{u[0], u[1], u[2], supports[k]}, b: u.Dot(s.Centre) - keep})
	}
	return out
}

// holds reports whether a point lies inside a closed mesh, by counting the
// triangles that a ray from it passes, and its distance from the nearest corner.
func (m *mesh) holds(p mgl64.Vec3) (near float64, inside bool) {
	// A direction along nothing: a ray through an edge would be counted twice.
	d := mgl64.Vec3{0.4301, 0.5867, 0.6861}
	near = math.Inf(1)
	for _, t := range m.triangles {
		a, b, c := m.points[t[0]].Sub(p), m.points[t[1]].Sub(p), m.points[t[2]].Sub(p)
		near = min(near, a.Len(), b.Len(), c.Len())
		// Signs of the volumes of ray and edges (Plücker): all alike if the line passes.
		u, v, w := d.Dot(a.Cross(b)), d.Dot(b.Cross(c)), d.Dot(c.Cross(a))
		if (u > 0) != (v > 0) || (v > 0) != (w > 0) {
			continue
		}
		n := b.Sub(a).Cross(c.Sub(a))
		if ahead := n.Dot(a) / n.Dot(d); ahead > 0 {
			inside = !inside
		}
	}
	return near, inside
}
