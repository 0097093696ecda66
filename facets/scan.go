package facets

import (
	"errors"
	"fmt"
	"io"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
)

// ScanOptions says how a scan file is to be read. The zero value is for a cut stone in millimetres.
type ScanOptions struct {
	Scale float64 // millimetres in one unit of the file; 0 means 1
	Rough bool    // the scan is of rough: no facets are looked for
}

// Scan is a measured surface, read and judged but not yet taken as a stone. It
// stays in the file's own frame, in millimetres. It is not changed after it was read.
type Scan struct {
	File       string
	Format     string  // in words
	Scale      float64 // millimetres in one unit of the file
	Resolution float64 // mm: step between neighbouring numbers of the file
	Triangles  int     // those read, without the ones of no extent
	Points     int     // distinct corners
	Size       mgl64.Vec3
	Volume     float64 // mm³ inside the surface; of no meaning if it is open
	HullVolume float64 // mm³ inside the convex hull

	OpenEdges    int        // edges with a triangle on one side only; 0 for a closed surface
	OpenLength   float64    // mm of such edges
	TangledEdges int        // edges where more than two triangles meet
	FirstOpen    mgl64.Vec3 // mm, file frame: where the first of either is
	Bodies       int        // separate surfaces in the file

	Tolerance float64     // mm: how far a corner may lie from its facet's plane, found from the data
	Facets    []ScanFacet // empty for rough and for a surface that is not made of flats
	Dent      Dent        // the deepest; Depth 0 if the surface is convex within Tolerance

	Notes []string // what a person should know of the file, one sentence each

	mesh, hull *mesh
}

// ScanFacet is one flat of a scanned surface, in the file's frame.
type ScanFacet struct {
	Normal    mgl64.Vec3 // unit, out of the solid
	Distance  float64    // mm, of its plane from the file's origin along Normal
	Area      float64    // mm², of the triangles that lie on it
	Triangles int        // 0 for a flat of the hull that bridges a dent
	Flatness  float64    // mm, from the lowest to the highest corner about its plane (ISO 1101 flatness, by least squares)
}

// Dent is a place where a surface lies below its convex hull.
type Dent struct {
	At    mgl64.Vec3 // mm, file frame
	Depth float64    // mm below the hull
	Added float64    // mm³ that taking the hull adds, over all dents
}

// shallowestDent is the depth below which a dent is not looked for, in mm: the
// wavelength of green light, below which flats and their edges mean nothing to light.
const shallowestDent = 0.0005

// dentFactor times the tolerance: one for the scatter about a plane, two for
// the rounded edges that capFactor leaves out.
const dentFactor = 1 + capFactor

// smallest and largest size of a stone, in mm, between which no remark about units is made.
const (
	smallestUsual = 0.5
	largestUsual  = 300
)

// ReadScan reads a triangulated surface: STL (text or binary), OBJ, or PLY
// (text or binary of either byte order), told apart by content. Corners that
// differ by rounding only become one, and the triangles of every piece are
// turned to face out. Units are taken as millimetres unless opts.Scale says
// otherwise. Errors are *Fault with file and line or byte; no more memory is
// taken than the bytes read call for, whatever a header claims.
func ReadScan(r io.Reader, file string, opts ScanOptions) (*Scan, error) {
	scale := opts.Scale
	if scale == 0 {
		scale = 1
	}
	if !(scale > 0) || math.IsInf(scale, 0) {
		return nil, &Fault{File: file, Field: "scale", Got: fmt.Sprint(opts.Scale),
			Why:    "a scale is a positive number",
			Remedy: "give the millimetres in one unit of the file: 1 for mm, 25.4 for inches, 1000 for metres"}
	}
	raw, err := readMesh(r, file)
	if err != nil {
		return nil, err
	}
	if len(raw.triangles) == 0 {
		return nil, &Fault{File: file, Field: "scan", Why: "the file holds no triangles",
			Remedy: "export the surface, not only its points"}
	}
	sc := &Scan{File: file, Format: raw.format, Scale: scale, Resolution: raw.resolution() * scale,
		Notes: raw.notes}
	for i := range raw.points {
		raw.points[i] = raw.points[i].Mul(scale)
	}
	if err := sc.join(raw); err != nil {
		return nil, err
	}
	if opts.Scale == 0 {
		sc.note("Units are taken as millimetres: %.3f x %.3f x %.3f mm.", sc.Size[0], sc.Size[1], sc.Size[2])
	}
	if largest := max(sc.Size[0], sc.Size[1], sc.Size[2]); largest < smallestUsual || largest > largestUsual {
		sc.note("A size of %.4g mm is unusual: check the units of the file and give a scale.", largest)
	}
	if !opts.Rough {
		sc.findFacets()
	}
	sc.Dent.Added = max(0, sc.HullVolume-sc.Volume)
	if sc.Dent.Depth == 0 {
		sc.Dent.Added = 0
	}
	return sc, nil
}

func (sc *Scan) note(format string, args ...any) {
	sc.Notes = append(sc.Notes, fmt.Sprintf(format, args...))
}

// weldFactors of the file's resolution are tried in turn until the surface
// closes: most programs write a shared corner the same way each time, some
// round it apart by a few steps.
var weldFactors = [...]float64{1.5, 12, 100}

// join welds the corners, closes the surface as far as it goes and measures it.
func (sc *Scan) join(raw *rawMesh) error {
	var joined seams
	var dropped int
	for i, factor := range weldFactors {
		m, lost := weld(raw, factor*sc.Resolution)
		if len(m.triangles) == 0 {
			break
		}
		s := m.connect()
		if i == 0 || s.open+s.tangled < joined.open+joined.tangled {
			sc.mesh, joined, dropped = m, s, lost
		}
		if s.open+s.tangled == 0 {
			break
		}
	}
	flat := &Fault{File: sc.File, Field: "scan", Why: "all corners lie in one plane or point",
		Remedy: "export the whole surface of the stone"}
	if sc.mesh == nil {
		return flat
	}
	hull, ok := sc.mesh.hullMesh()
	if !ok {
		return flat
	}
	sc.hull = hull
	sc.Triangles, sc.Points = len(sc.mesh.triangles), len(sc.mesh.points)
	low, high := bounds(sc.mesh.points)
	sc.Size = high.Sub(low)
	sc.Volume, sc.HullVolume = sc.mesh.volume(), hull.volume()
	sc.OpenEdges, sc.OpenLength, sc.TangledEdges = joined.open, joined.length, joined.tangled
	sc.FirstOpen, sc.Bodies = joined.first, joined.bodies
	if dropped > 0 {
		sc.note("%d triangles of no extent were left out.", dropped)
	}
	if joined.turned > 0 {
		sc.note("%d of %d triangles faced into the stone and were turned.", joined.turned, sc.Triangles)
	}
	return nil
}

// findFacets groups the surface into flats and looks for dents.
func (sc *Scan) findFacets() {
	f, ok := findFlats(sc.mesh, sc.hull, sc.Resolution)
	if !ok {
		return
	}
	sc.Tolerance = f.tolerance
	reach := max(shallowestDent, dentFactor*f.tolerance)
	owner := sc.assign(f.planes, reach)
	members := make([][]int32, len(f.planes))
	for t, i := range owner {
		if i >= 0 {
			members[i] = append(members[i], int32(t))
		}
	}
	rim := sc.rims(owner)
	for i, p := range f.planes {
		facet := ScanFacet{Normal: p.normal, Distance: p.distance, Triangles: len(members[i])}
		better, ok := fit(sc.mesh, members[i], p.normal)
		facet.Area = better.area
		// A flat that bridges a dent has only its rim on the surface, and the
		// hull knows its plane better than a fit to the rim.
		if ok && better.area > p.area/2 && better.normal.Dot(p.normal) > 0 {
			facet.Normal, facet.Distance = better.normal, better.distance
		}
		facet.Flatness = sc.flatness(&facet, members[i], rim)
		sc.Facets = append(sc.Facets, facet)
	}
	// What the facets scatter in the middle is no dent, nor are the rounded edges that were left out.
	limit := max(reach, capFactor*f.tolerance+sc.usualFlatness())
	sc.Dent = sc.deepest(owner, f.planes, limit)
}

// usualFlatness is the median over the facets that have a surface.
func (sc *Scan) usualFlatness() float64 {
	var all []float64
	for _, f := range sc.Facets {
		if f.Triangles > 0 {
			all = append(all, f.Flatness)
		}
	}
	if len(all) == 0 {
		return 0
	}
	slices.Sort(all)
	return all[len(all)/2]
}

// assign gives every triangle the flat it lies on within reach, -1 for none,
// walking from neighbour to neighbour so that most need one look.
func (sc *Scan) assign(planes []flat, reach float64) []int32 {
	const unseen = -2
	owner := make([]int32, len(sc.mesh.triangles))
	for i := range owner {
		owner[i] = unseen
	}
	queue := make([]int32, 0, len(owner))
	visit := func(t, hint int32) {
		n, _ := sc.mesh.normal(t)
		best, least := int32(-1), reach
		if hint >= 0 && planes[hint].holds(sc.mesh, t, reach) && n.Dot(planes[hint].normal) > 0.5 {
			best = hint
		} else {
			for i := range planes {
				if n.Dot(planes[i].normal) <= 0.5 {
					continue // more than 60 degrees off: not this flat's surface
				}
				if d := planes[i].farthest(sc.mesh, t); d <= least {
					best, least = int32(i), d
				}
			}
		}
		owner[t] = best
		queue = append(queue, t)
	}
	for t := range owner {
		if owner[t] != unseen {
			continue
		}
		queue = queue[:0]
		visit(int32(t), -1)
		for i := 0; i < len(queue); i++ {
			for _, next := range sc.mesh.opposite[queue[i]] {
				if next >= 0 && owner[next] == unseen {
					visit(next, owner[queue[i]])
				}
			}
		}
	}
	sc.settle(owner, planes, reach)
	return owner
}

// settle gives triangles along the edges of the flats to the flat they fit
// best, since the walk let each flat reach over its edges.
func (sc *Scan) settle(owner []int32, planes []flat, reach float64) {
	// A flat at the least angle worth the name reaches over by a few rows of
	// triangles; each round takes back one. What is left after that many lies
	// in both planes.
	const rounds = 16
	for range rounds {
		changed := false
		for t, own := range owner {
			least := reach
			if own >= 0 {
				least = planes[own].farthest(sc.mesh, int32(t))
			}
			n, area := sc.mesh.normal(int32(t))
			if area == 0 {
				continue
			}
			for _, next := range sc.mesh.opposite[t] {
				if next < 0 || owner[next] < 0 || owner[next] == own {
					continue
				}
				p := &planes[owner[next]]
				if d := p.farthest(sc.mesh, int32(t)); d < least && n.Dot(p.normal) > 0.5 {
					owner[t], least, changed = owner[next], d, true
				}
			}
		}
		if !changed {
			return
		}
	}
}

// farthest returns the distance of a triangle's farthest corner from the plane.
func (p *flat) farthest(m *mesh, t int32) float64 {
	far := 0.0
	for _, c := range m.triangles[t] {
		far = max(far, math.Abs(p.normal.Dot(m.points[c])-p.distance))
	}
	return far
}

// deepest returns the deepest point below the flats, Depth 0 if none lies
// deeper than reach. Only triangles that lie on no flat are looked at, at their
// corners and at points between, since a triangle may sink with its corners up.
func (sc *Scan) deepest(owner []int32, planes []flat, reach float64) Dent {
	const steps = 4 // along an edge
	var d Dent
	deepest := reach
	for t, own := range owner {
		if own >= 0 {
			continue
		}
		c := sc.mesh.triangles[t]
		a, ab, ac := sc.mesh.points[c[0]], sc.mesh.points[c[1]].Sub(sc.mesh.points[c[0]]),
			sc.mesh.points[c[2]].Sub(sc.mesh.points[c[0]])
		for u := range steps + 1 {
			for v := range steps + 1 - u {
				p := a.Add(ab.Mul(float64(u) / steps)).Add(ac.Mul(float64(v) / steps))
				depth := math.Inf(1)
				for i := range planes {
					if depth = min(depth, planes[i].distance-planes[i].normal.Dot(p)); depth <= deepest {
						break
					}
				}
				if depth > deepest {
					deepest, d = depth, Dent{At: p, Depth: depth}
				}
			}
		}
	}
	return d
}

// flatness returns the height of a facet's corners about its plane. Corners on
// the rim belong to the neighbours as well and are rounded by every scanner;
// they count only where a facet has no others.
func (sc *Scan) flatness(f *ScanFacet, members []int32, rim []bool) float64 {
	for _, rims := range []bool{false, true} {
		low, high := math.Inf(1), math.Inf(-1)
		for _, t := range members {
			for _, c := range sc.mesh.triangles[t] {
				if rim[c] == rims {
					d := f.Normal.Dot(sc.mesh.points[c]) - f.Distance
					low, high = min(low, d), max(high, d)
				}
			}
		}
		if high >= low {
			return high - low
		}
	}
	return 0
}

// rims tells the points where triangles of different flats meet.
func (sc *Scan) rims(owner []int32) []bool {
	const none = -2
	first := make([]int32, len(sc.mesh.points))
	for i := range first {
		first[i] = none
	}
	rim := make([]bool, len(sc.mesh.points))
	for t, own := range owner {
		for _, c := range sc.mesh.triangles[t] {
			if first[c] == none {
				first[c] = own
			}
			rim[c] = rim[c] || first[c] != own
		}
	}
	return rim
}

// ScanPlacement says how a scan is taken as a stone. The zero value finds the
// table and refuses a surface that is open or dented.
type ScanPlacement struct {
	Name      string
	Up        mgl64.Vec3 // direction of the file's frame that points out of the table; zero: it is found
	Flip      bool       // turn the stone over, table down, after that
	Turn      Angle      // then turn it about its axis, anticlockwise seen from the table
	AllowHull bool       // take the convex hull of a surface that is dented or open, with a note
}

// Stone returns the solid that the scan's facets bound, placed in the
// package's frame: +z out of the table, z = 0 midway between the mean upper and
// lower girdle edge, the axis through the middle of the outline, the length
// along x. Every note that the stone carries must stay with what is shown of
// it. Errors are *Fault.
func (sc *Scan) Stone(p ScanPlacement) (*Stone, error) {
	notes := append([]string(nil), sc.Notes...)
	flaws := sc.flaws()
	if sc.Bodies > 1 {
		return nil, sc.fault(fmt.Sprintf("the file holds %d separate surfaces", sc.Bodies),
			"keep the stone alone: delete mount, wax, holder and specks")
	}
	if len(flaws) > 0 && !p.AllowHull {
		return nil, flaws.Err()
	}
	if len(sc.Facets) == 0 {
		return nil, sc.fault("the surface is not made of flats: no number of them between 4 and 2000 fits it",
			"a scan of a faceted stone is needed; rough, beads and domes cannot be traced")
	}
	if sc.Dent.Depth > 0 {
		notes = append(notes, fmt.Sprintf("Taken as its convex hull: a dent %.3f mm deep at (%.2f, %.2f, %.2f) mm of the file was filled; %.4f mm³ (%.2f %%) were added.",
			sc.Dent.Depth, sc.Dent.At[0], sc.Dent.At[1], sc.Dent.At[2], sc.Dent.Added,
			100*sc.Dent.Added/sc.HullVolume))
	}
	if sc.OpenEdges+sc.TangledEdges > 0 {
		notes = append(notes, fmt.Sprintf("Taken as its convex hull: the surface had %d open edges, so what the hull added is not known.",
			sc.OpenEdges+sc.TangledEdges))
	}
	planes := make([]Plane, len(sc.Facets))
	for i, f := range sc.Facets {
		planes[i] = Plane{Index: math.NaN(), Normal: f.Normal, Distance: f.Distance}
	}
	loose, err := FromPlanes(p.Name, planes)
	if err != nil {
		return nil, sc.fault(err.Error(), "scan the whole stone; a side may be missing")
	}
	// Flats that are nearly parallel may meet far outside of what was scanned.
	const most = 10 // times the scan's size
	lo, hi := loose.Corners[0], loose.Corners[0]
	for _, c := range loose.Corners {
		for k := range 3 {
			lo[k], hi[k] = min(lo[k], c[k]), max(hi[k], c[k])
		}
	}
	if size := hi.Sub(lo).Len(); !(size <= most*sc.Size.Len()) {
		return nil, sc.fault(fmt.Sprintf("its flats meet %.3g mm apart, and the surface is %.3g mm across", size, sc.Size.Len()),
			"scan the whole stone; a side may be missing")
	}
	placed, err := place(loose, p)
	if err != nil {
		var f *Fault
		if errors.As(err, &f) {
			f.File = sc.File
		}
		return nil, err
	}
	placed.Notes = append(notes, placed.Notes...)
	return placed, nil
}

func (sc *Scan) fault(why, remedy string) *Fault {
	return &Fault{File: sc.File, Field: "scan", Why: why, Remedy: remedy}
}

// flaws lists what keeps the surface from being a convex solid.
func (sc *Scan) flaws() Faults {
	var fs Faults
	if n := sc.OpenEdges + sc.TangledEdges; n > 0 {
		fs = append(fs, sc.fault(fmt.Sprintf("the surface is open at %d edges (%.3f mm), the first at (%.3f, %.3f, %.3f) mm",
			n, sc.OpenLength, sc.FirstOpen[0], sc.FirstOpen[1], sc.FirstOpen[2]),
			"close the holes in the scanning program, or allow the convex hull"))
	}
	if d := sc.Dent; d.Depth > 0 {
		fs = append(fs, sc.fault(fmt.Sprintf("the surface is dented: %.3f mm deep at (%.3f, %.3f, %.3f) mm; its convex hull has %.4f mm³ (%.2f %%) more",
			d.Depth, d.At[0], d.At[1], d.At[2], d.Added, 100*d.Added/sc.HullVolume),
			"only convex stones can be traced: allow the convex hull if the dent does not matter"))
	}
	return fs
}
