package facets

import (
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/mat"
)

// flat is a plane that a group of triangles lies on, in the scan's own frame.
type flat struct {
	normal   mgl64.Vec3
	distance float64
	area     float64
}

// flats is the division of a hull into flats at one tolerance.
type flats struct {
	tolerance float64 // how far a corner may lie from the plane of its flat
	planes    []flat
	raw       int // number of flats before slivers were taken out
}

// Bounds of a search for the tolerance.
const (
	// maxFlats is the most flats a stone may have; more is a curved surface.
	maxFlats = 2000
	// finestFactor: corners rounded to a grid lie up to sqrt(3)/2 of its step
	// from where they belong, and the plane they are held against is made of
	// such corners itself: two steps hold both.
	finestFactor = 2
	// coarsestShare of the mesh's reach: no facet scatters by more than a thirtieth of the stone.
	coarsestShare = 1.0 / 32
	// capFactor: a flat whose plane, if it were left out, would let its
	// neighbours rise by no more than this many tolerances is a rounded edge
	// or a rag of the triangulation, not a facet.
	capFactor = 2
	// mainShare leaves out a girdle: the rim of a thick one is a tenth of the surface.
	mainShare = 0.9
)

// curvedFall is the fall in both counts above which a surface is not made of
// flats. A cap of height t on a surface curved both ways has an area that
// grows with t, so that the number of flats falls by four over two steps of
// two, in each of the two counts; half of that sum divides flats from curves.
const curvedFall = 2 * math.Ln2

// findFlats divides the hull into flats. The tolerance comes from the data: the
// division is made at every tolerance from the file's own rounding upward, by
// factors of two. Below the scatter of the measured points the number of flats
// falls with each step; above it the number stands still until the tolerance
// begins to swallow true facets. The answer is the tolerance at which the
// number falls least from the step before to the step after; of several the finest.
//
// The search starts no lower than half the depth at which most of the surface
// lies below its hull: with fewer corners than that the hull of a noisy scan
// is a stone of its own.
func findFlats(surface, hull *mesh, resolution float64) (flats, bool) {
	low, high := bounds(hull.points)
	reach := high.Sub(low).Len() / 2
	g := newGrower(hull)
	var ladder []flats
	finest := max(finestFactor*resolution, reach*math.Ldexp(1, -44), usualDepth(surface, g)/2)
	for tolerance := finest; tolerance < coarsestShare*reach; tolerance *= 2 {
		ladder = append(ladder, g.divide(tolerance))
	}
	best, least := -1, curvedFall
	for i := 1; i+1 < len(ladder); i++ {
		if n := len(ladder[i].planes); n < 4 || n > maxFlats {
			continue
		}
		// Both counts, since the rim of a girdle that was ground round, not
		// faceted, falls into fewer and fewer strips while the rest stands still.
		before, after := &ladder[i-1], &ladder[i+1]
		fall := math.Log(float64(len(before.planes))/float64(len(after.planes))) +
			math.Log(float64(before.main())/float64(after.main()))
		if fall < least {
			best, least = i, fall
		}
	}
	if best < 0 {
		return flats{}, false
	}
	return ladder[best], true
}

// usualDepth is the median, by area, of how deep the surface's corners lie below its hull.
func usualDepth(surface *mesh, g *grower) float64 {
	const (
		looks     = 3e6 // corners times hull triangles: some 10 ms
		mostShown = 500
	)
	samples := min(mostShown, max(50, int(looks)/len(g.hull.triangles)))
	total := 0.0
	for t := range surface.triangles {
		_, a := surface.normal(int32(t))
		total += a
	}
	var depths []float64
	sum := 0.0
	for t, c := range surface.triangles {
		_, a := surface.normal(int32(t))
		sum += a
		// One look each time another share of the area has been passed.
		for float64(len(depths)) < sum/total*float64(samples)-0.5 {
			p := surface.points[c[0]]
			depth := math.Inf(1)
			for i, n := range g.normals {
				if g.areas[i] > 0 {
					depth = min(depth, n.Dot(g.hull.points[g.hull.triangles[i][0]].Sub(p)))
				}
			}
			depths = append(depths, depth)
		}
	}
	if len(depths) == 0 {
		return 0
	}
	slices.Sort(depths)
	return max(0, depths[len(depths)/2])
}

// main returns how many of the largest flats make up mainShare of the surface.
func (f *flats) main() int {
	areas := make([]float64, len(f.planes))
	total := 0.0
	for i, p := range f.planes {
		areas[i] = p.area
		total += p.area
	}
	slices.Sort(areas)
	sum := 0.0
	for n := range areas {
		if sum += areas[len(areas)-1-n]; sum >= mainShare*total {
			return n + 1
		}
	}
	return len(areas)
}

// grower divides one hull again and again.
type grower struct {
	hull    *mesh
	normals []mgl64.Vec3
	areas   []float64
	order   []int32 // triangles by falling area
	owner   []int32 // by triangle: round in which it was claimed; 0 for none
	touched []int32 // by triangle: last growth that looked at it
	growth  int32
}

func newGrower(hull *mesh) *grower {
	n := len(hull.triangles)
	g := &grower{hull: hull, normals: make([]mgl64.Vec3, n), areas: make([]float64, n),
		order: make([]int32, n), owner: make([]int32, n), touched: make([]int32, n)}
	for t := range n {
		g.normals[t], g.areas[t] = hull.normal(int32(t))
		g.order[t] = int32(t)
	}
	slices.SortStableFunc(g.order, func(a, b int32) int {
		switch {
		case g.areas[a] > g.areas[b]:
			return -1
		case g.areas[a] < g.areas[b]:
			return 1
		}
		return int(a - b)
	})
	return g
}

// divide groups the hull's triangles at one tolerance, largest first.
func (g *grower) divide(tolerance float64) flats {
	clear(g.owner)
	f := flats{tolerance: tolerance}
	var members []int32
	for _, seed := range g.order {
		if g.owner[seed] != 0 || g.areas[seed] == 0 {
			continue
		}
		n := g.normals[seed]
		p := flat{normal: n, distance: n.Dot(g.hull.points[g.hull.triangles[seed][0]])}
		// The plane of one triangle is as good as the triangle is large; a
		// second and third growth start from the plane of the whole group.
		for range 3 {
			members = g.grow(seed, p, tolerance, members[:0])
			p = g.plane(members)
		}
		for _, t := range members {
			g.owner[t] = int32(len(f.planes)) + 1
		}
		f.planes = append(f.planes, p)
		if len(f.planes) > maxFlats {
			f.raw = len(f.planes)
			return f
		}
	}
	f.raw = len(f.planes)
	f.planes = withoutSlivers(f.planes, capFactor*tolerance)
	return f
}

// grow collects the unclaimed triangles that hang together with seed and lie within tolerance of the plane.
func (g *grower) grow(seed int32, p flat, tolerance float64, members []int32) []int32 {
	g.growth++
	members = append(members, seed)
	g.touched[seed] = g.growth
	for i := 0; i < len(members); i++ {
		for _, n := range g.hull.opposite[members[i]] {
			if n < 0 || g.touched[n] == g.growth || g.owner[n] != 0 {
				continue
			}
			g.touched[n] = g.growth
			if p.holds(g.hull, n, tolerance) && g.normals[n].Dot(p.normal) >= 0 {
				members = append(members, n)
			}
		}
	}
	return members
}

// holds reports whether all corners of a triangle lie within tolerance of the plane.
func (p *flat) holds(m *mesh, t int32, tolerance float64) bool {
	for _, c := range m.triangles[t] {
		if math.Abs(p.normal.Dot(m.points[c])-p.distance) > tolerance {
			return false
		}
	}
	return true
}

// plane returns the plane of a group: its normal is that of the group's whole
// area, its place the mean of the group.
func (g *grower) plane(members []int32) flat {
	var p flat
	var sum mgl64.Vec3
	for _, t := range members {
		sum = sum.Add(g.normals[t].Mul(g.areas[t]))
		p.area += g.areas[t]
	}
	p.normal = sum.Normalize()
	for _, t := range members {
		c := g.hull.triangles[t]
		middle := g.hull.points[c[0]].Add(g.hull.points[c[1]]).Add(g.hull.points[c[2]]).Mul(1.0 / 3)
		p.distance += p.normal.Dot(middle) * g.areas[t] / p.area
	}
	return p
}

// withoutSlivers leaves out, smallest first, the planes without which the
// solid would nowhere rise above them by more than height.
func withoutSlivers(planes []flat, height float64) []flat {
	order := make([]int, len(planes))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case planes[a].area < planes[b].area:
			return -1
		case planes[a].area > planes[b].area:
			return 1
		}
		return 0
	})
	gone := make([]bool, len(planes))
	l := linearProgram{variables: 3}
	for _, i := range order {
		if rise, ok := riseWithout(&l, planes, gone, i, height/100); ok && rise <= height {
			gone[i] = true
		}
	}
	kept := planes[:0:0]
	for i, p := range planes {
		if !gone[i] {
			kept = append(kept, p)
		}
	}
	return kept
}

// riseWithout returns how far the solid of the other planes reaches beyond
// plane i; false if it is open there.
func riseWithout(l *linearProgram, planes []flat, gone []bool, i int, slack float64) (float64, bool) {
	p := &planes[i]
	// The solid's corner nearest to the plane's own middle is not known, so
	// the box that starts the search is simply very large.
	const far = 1e7
	l.constraints = l.constraints[:0]
	for k := range 3 {
		c := constraint{b: far}
		c.a[k] = math.Copysign(1, p.normal[k])
		l.constraints = append(l.constraints, c)
		l.basis[k], l.goal[k] = k, p.normal[k]
	}
	for j := range planes {
		if j != i && !gone[j] {
			n := planes[j].normal
			l.constraints = append(l.constraints, constraint{a: [4]float64{n[0], n[1], n[2]}, b: planes[j].distance})
		}
	}
	l.slack = slack
	if l.solve() != lpOptimal {
		return 0, false
	}
	for k := range 3 {
		if l.basis[k] < 3 {
			return 0, false
		}
	}
	c := l.corner
	return p.normal.Dot(mgl64.Vec3{c[0], c[1], c[2]}) - p.distance, true
}

// fit returns the plane of least squares through triangles, weighted by area,
// with its normal on the side of near, and false if they do not fix one.
func fit(m *mesh, members []int32, near mgl64.Vec3) (flat, bool) {
	var p flat
	var mean mgl64.Vec3
	for _, t := range members {
		_, a := m.normal(t)
		c := m.triangles[t]
		mean = mean.Add(m.points[c[0]].Add(m.points[c[1]]).Add(m.points[c[2]]).Mul(a / 3))
		p.area += a
	}
	if p.area == 0 {
		return p, false
	}
	mean = mean.Mul(1 / p.area)
	// The second moment of a triangle about a point: A/12 (sum of v vT + s sT), s = sum of v.
	moment := mat.NewSymDense(3, nil)
	for _, t := range members {
		_, a := m.normal(t)
		c := m.triangles[t]
		v := [4]mgl64.Vec3{m.points[c[0]].Sub(mean), m.points[c[1]].Sub(mean), m.points[c[2]].Sub(mean)}
		v[3] = v[0].Add(v[1]).Add(v[2])
		for i := range 3 {
			for j := i; j < 3; j++ {
				sum := 0.0
				for _, u := range v {
					sum += u[i] * u[j]
				}
				moment.SetSym(i, j, moment.At(i, j)+sum*a/12)
			}
		}
	}
	var eigen mat.EigenSym
	if !eigen.Factorize(moment, true) {
		return p, false
	}
	var vectors mat.Dense
	eigen.VectorsTo(&vectors) // by rising eigenvalue: the first is the normal
	p.normal = mgl64.Vec3{vectors.At(0, 0), vectors.At(1, 0), vectors.At(2, 0)}.Normalize()
	if p.normal.Dot(near) < 0 {
		p.normal = p.normal.Mul(-1)
	}
	p.distance = p.normal.Dot(mean)
	return p, true
}
