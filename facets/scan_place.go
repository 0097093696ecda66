package facets

import (
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
)

// Angles that tell the parts of a scanned stone apart.
const (
	// girdleLean: a facet this near to upright belongs to the girdle. Cutters
	// set it at 90 degrees and no crown or pavilion facet stands steeper than 80.
	girdleLean = 10 * Degree
	// girdleTrue: round the table's normal the girdle's facets stand upright to
	// this; machines set 90 degrees to a fraction of one, scans read a degree.
	girdleTrue = 2 * Degree
	// axisLean: the table's normal is roughly the axis of symmetry; the line
	// from the centre of the solid to the middle of the table shows the axis.
	axisLean = 8 * Degree
	// upLean: how far the direction that a user points out may miss the table's normal.
	upLean = 20 * Degree
	// roundLimit: an outline with less between length and width is turned by
	// its facets, not by its length.
	roundLimit = 1.02
)

// place moves a solid from a scan's frame to the stone's.
func place(loose *Stone, p ScanPlacement) (*Stone, error) {
	centre := loose.centroid()
	up, table := findTable(loose, centre)
	if p.Up.Len() > 0 {
		up, table = nearestFacet(loose, p.Up.Normalize())
	}
	stoneFromScan := mgl64.QuatBetweenVectors(up, mgl64.Vec3{0, 0, 1}).Mat4().Mat3()
	if p.Flip {
		// About x, so that a second flip undoes the first.
		stoneFromScan = mgl64.Diag3(mgl64.Vec3{1, -1, -1}).Mul3(stoneFromScan)
		table = lowestFacet(loose, stoneFromScan, table)
	}
	turn := mgl64.Rotate3DZ(-loose.lengthAzimuth(stoneFromScan, table)).Mul3(stoneFromScan)
	if tipPointsBack(seenFromAbove(loose, turn).hull) {
		turn = mgl64.Diag3(mgl64.Vec3{-1, -1, 1}).Mul3(turn)
	}
	middle := outlineCentre(seenFromAbove(loose, turn).hull)
	shift := mgl64.Vec3{-middle[0], -middle[1], -loose.girdleMiddle(turn, table)}
	last := mgl64.Rotate3DZ(p.Turn.Radians())
	return loose.moved(last.Mul3(turn), last.Mul3x1(shift), table)
}

// moved returns the solid turned and then shifted, its facets sorted into sides; facet table is the table.
func (s *Stone) moved(turn mgl64.Mat3, shift mgl64.Vec3, table int) (*Stone, error) {
	planes := make([]Plane, len(s.Facets))
	for i, f := range s.Facets {
		n := turn.Mul3x1(f.Normal).Normalize()
		if i == table && n[2] > 0 {
			n = mgl64.Vec3{0, 0, 1} // by choice of the frame; the turn leaves rounding
		}
		planes[i] = Plane{Tier: f.Tier, Index: f.Index, Side: sideOf(n, i == table), Normal: n,
			Distance: f.Distance + n.Dot(shift)}
	}
	moved, err := FromPlanes(s.Name, planes)
	if err != nil {
		return nil, &Fault{Field: "scan", Why: err.Error(), Remedy: "scan the stone again"}
	}
	moved.Notes = s.Notes
	return moved, nil
}

// sideOf tells the part of the stone from a normal.
func sideOf(n mgl64.Vec3, table bool) Side {
	switch {
	case table && n[2] > 0:
		return Table
	case math.Abs(n[2]) < math.Sin(float64(girdleLean)):
		return Girdle
	case n[2] > 0:
		return Crown
	}
	return Pavilion
}

// centroid returns the centre of the solid's volume.
func (s *Stone) centroid() mgl64.Vec3 {
	o := s.Corners[0]
	var sum mgl64.Vec3
	volume := 0.0
	for _, f := range s.Facets {
		a := s.Corners[f.Corners[0]].Sub(o)
		for j := 1; j+1 < len(f.Corners); j++ {
			b, c := s.Corners[f.Corners[j]].Sub(o), s.Corners[f.Corners[j+1]].Sub(o)
			v := a.Dot(b.Cross(c))
			volume += v
			sum = sum.Add(a.Add(b).Add(c).Mul(v / 4))
		}
	}
	return o.Add(sum.Mul(1 / volume))
}

// facetCentre returns the centre of a facet's area.
func (s *Stone) facetCentre(i int) mgl64.Vec3 {
	f := &s.Facets[i]
	o := s.Corners[f.Corners[0]]
	var sum mgl64.Vec3
	area := 0.0
	for j := 1; j+1 < len(f.Corners); j++ {
		b, c := s.Corners[f.Corners[j]].Sub(o), s.Corners[f.Corners[j+1]].Sub(o)
		a := b.Cross(c).Dot(f.Normal)
		area += a
		sum = sum.Add(b.Add(c).Mul(a / 3))
	}
	if area == 0 {
		return o
	}
	return o.Add(sum.Mul(1 / area))
}

// findTable returns the normal and number of the table. A flat may be the table
// if it is no smaller than tableShare of the largest; for it speaks that a
// girdle closes round its normal, and that its middle lies on the axis through
// the solid's centre; of those with most to speak for them it is the largest.
// (A step cut's pavilion has flats larger than its table, but neither holds for them.)
func findTable(s *Stone, centre mgl64.Vec3) (mgl64.Vec3, int) {
	largest := 0.0
	for _, f := range s.Facets {
		largest = max(largest, f.Area)
	}
	best, bestRank := 0, -1
	for i, f := range s.Facets {
		if f.Area < tableShare*largest {
			continue
		}
		rank := 0
		if s.girdleCloses(f.Normal) {
			rank++
		}
		if s.facetCentre(i).Sub(centre).Normalize().Dot(f.Normal) > math.Cos(float64(axisLean)) {
			rank++
		}
		if rank > bestRank || rank == bestRank && f.Area > s.Facets[best].Area {
			best, bestRank = i, rank
		}
	}
	return s.Facets[best].Normal, best
}

// tableShare: a single step's two pavilion flats are half again as large as
// its table; smaller flats are kept out, for which both may hold by chance.
const tableShare = 0.4

// girdleCloses reports whether the upright facets about an axis face all
// round: no gap between their azimuths reaches a half turn.
func (s *Stone) girdleCloses(axis mgl64.Vec3) bool {
	e1 := axis.Cross(mgl64.Vec3{1, 0, 0})
	if e1.Len() < 0.5 {
		e1 = axis.Cross(mgl64.Vec3{0, 1, 0})
	}
	e1 = e1.Normalize()
	e2 := axis.Cross(e1)
	var azimuths []float64
	for _, f := range s.Facets {
		if math.Abs(f.Normal.Dot(axis)) < math.Sin(float64(girdleTrue)) {
			azimuths = append(azimuths, math.Atan2(f.Normal.Dot(e2), f.Normal.Dot(e1)))
		}
	}
	return len(azimuths) >= 3 && widestGap(azimuths) < math.Pi-float64(girdleLean)
}

// nearestFacet returns the facet that faces most nearly along up; beyond
// upLean the direction itself is taken and the facet is no table.
func nearestFacet(s *Stone, up mgl64.Vec3) (mgl64.Vec3, int) {
	best := 0
	for i, f := range s.Facets {
		if f.Normal.Dot(up) > s.Facets[best].Normal.Dot(up) {
			best = i
		}
	}
	if s.Facets[best].Normal.Dot(up) < math.Cos(float64(upLean)) {
		return up, -1
	}
	return s.Facets[best].Normal, best
}

// lowestFacet returns the facet opposite the old table after a flip, if there is a flat: its number, else -1.
func lowestFacet(s *Stone, turn mgl64.Mat3, oldTable int) int {
	for i, f := range s.Facets {
		if i != oldTable && turn.Mul3x1(f.Normal)[2] > math.Cos(float64(Degree)) {
			return i
		}
	}
	return -1
}

// widestGap returns the widest angle between neighbours among azimuths.
func widestGap(azimuths []float64) float64 {
	slices.Sort(azimuths)
	gap := azimuths[0] + 2*math.Pi - azimuths[len(azimuths)-1]
	for i := 1; i < len(azimuths); i++ {
		gap = max(gap, azimuths[i]-azimuths[i-1])
	}
	return gap
}

// seenFromAbove returns the outline of the solid after a turn.
func seenFromAbove(s *Stone, turn mgl64.Mat3) outline {
	points := make([]mgl64.Vec2, len(s.Corners))
	for i, c := range s.Corners {
		points[i] = turn.Mul3x1(c).Vec2()
	}
	return outlineOf(points)
}

// outlineCentre returns the centre of the outline's area.
func outlineCentre(ring []mgl64.Vec2) mgl64.Vec2 {
	var sum mgl64.Vec2
	area := 0.0
	for j := 1; j+1 < len(ring); j++ {
		b, c := ring[j].Sub(ring[0]), ring[j+1].Sub(ring[0])
		a := b[0]*c[1] - b[1]*c[0]
		area += a
		sum = sum.Add(b.Add(c).Mul(a / 3))
	}
	return ring[0].Add(sum.Mul(1 / area))
}

// lengthAzimuth returns the azimuth, in radians, to turn to index 0: that of
// the outline's length, or for a round outline that of a mirror plane.
func (s *Stone) lengthAzimuth(turn mgl64.Mat3, table int) float64 {
	along, stretch := principalAxis(seenFromAbove(s, turn).hull)
	if stretch >= roundLimit {
		return along
	}
	return s.mirrorAzimuth(turn, table)
}

// mirrorAzimuth returns the azimuth, of those of the largest facets of one part
// of the stone and half way between two of them, across which the stone is most
// nearly its own mirror image; the first of several alike.
func (s *Stone) mirrorAzimuth(turn mgl64.Mat3, table int) float64 {
	normals := make([]mgl64.Vec3, len(s.Facets))
	for i, f := range s.Facets {
		normals[i] = turn.Mul3x1(f.Normal)
	}
	level := math.Sin(float64(Degree))
	var own []float64
	for _, side := range []Side{Crown, Pavilion, Girdle} {
		largest := 0.0
		leans := func(i int) bool {
			return sideOf(normals[i], i == table) == side && math.Hypot(normals[i][0], normals[i][1]) > level
		}
		for i, f := range s.Facets {
			if leans(i) {
				largest = max(largest, f.Area)
			}
		}
		for i, f := range s.Facets {
			// Facets of one tier differ by rounding or a scanner's noise.
			if leans(i) && f.Area > 0.99*largest && len(own) < 16 {
				own = append(own, azimuthOf(normals[i].Vec2()))
			}
		}
		if len(own) > 0 {
			break
		}
	}
	if len(own) == 0 {
		return 0
	}
	candidates := own
	for _, a := range own[1:] {
		candidates = append(candidates, (own[0]+a)/2, (own[0]+a)/2+math.Pi/2)
	}
	best, least := own[0], math.Inf(1)
	for _, a := range candidates {
		sin, cos := math.Sincos(2 * a)
		off := 0.0
		for _, n := range normals {
			image := mgl64.Vec3{cos*n[0] + sin*n[1], sin*n[0] - cos*n[1], n[2]}
			nearest := -1.0
			for _, m := range normals {
				nearest = max(nearest, image.Dot(m))
			}
			off += 1 - nearest
		}
		// Alike to a thousandth of a degree a facet is alike.
		if alike := 1e-10 * float64(len(normals)); off < least-alike {
			best, least = a, off
		}
	}
	return best
}

// tipPointsBack reports whether the outline's point, if it has one end more
// pointed than the other, lies toward -x: the bulk then lies toward +x.
func tipPointsBack(ring []mgl64.Vec2) bool {
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range ring {
		low, high = min(low, p[0]), max(high, p[0])
	}
	// A hundredth of the length: below it the ends are alike and the turn is left alone.
	return outlineCentre(ring)[0]-(low+high)/2 > (high-low)/100
}

// principalAxis returns the azimuth along which an outline is longest by its
// second moments, which for a symmetric outline is its axis whatever the
// girdle's flats, and the ratio of its extents by them.
func principalAxis(ring []mgl64.Vec2) (azimuth, stretch float64) {
	centre := outlineCentre(ring)
	var xx, xy, yy float64
	for i := range ring {
		// Second moments of the triangle from the centre to an edge, times 12.
		a, b := ring[i].Sub(centre), ring[(i+1)%len(ring)].Sub(centre)
		area := a[0]*b[1] - a[1]*b[0]
		xx += area * (a[0]*a[0] + a[0]*b[0] + b[0]*b[0])
		yy += area * (a[1]*a[1] + a[1]*b[1] + b[1]*b[1])
		xy += area * (2*a[0]*a[1] + a[0]*b[1] + a[1]*b[0] + 2*b[0]*b[1]) / 2
	}
	half := math.Hypot((xx-yy)/2, xy)
	mean := (xx + yy) / 2
	return math.Atan2(2*xy, xx-yy) / 2, math.Sqrt((mean + half) / (mean - half))
}

// girdleMiddle returns the height midway between the mean upper and the mean
// lower girdle edge, each weighted by length; without girdle facets the mean
// height of the edges between what faces up and what faces down.
func (s *Stone) girdleMiddle(turn mgl64.Mat3, table int) float64 {
	side := func(i int) Side { return sideOf(turn.Mul3x1(s.Facets[i].Normal), i == table) }
	type mean struct{ sum, length float64 }
	var upper, lower, knife mean
	for _, e := range s.Edges {
		a, b := turn.Mul3x1(s.Corners[e.Corners[0]]), turn.Mul3x1(s.Corners[e.Corners[1]])
		l := a.Sub(b).Len()
		lowSide, highSide := side(e.Facets[0]), side(e.Facets[1])
		if lowSide > highSide {
			lowSide, highSide = highSide, lowSide
		}
		m := &knife
		switch {
		case lowSide == Girdle && highSide > Girdle:
			m = &upper
		case lowSide == Pavilion && highSide == Girdle:
			m = &lower
		case lowSide == Pavilion && highSide > Girdle:
		default:
			continue
		}
		m.sum, m.length = m.sum+l*(a[2]+b[2])/2, m.length+l
	}
	switch {
	case upper.length > 0 && lower.length > 0:
		return (upper.sum/upper.length + lower.sum/lower.length) / 2
	case knife.length > 0:
		return knife.sum / knife.length
	}
	return 0
}
