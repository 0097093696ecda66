package facets

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// girdleFacets is the number of girdle facets from a main's girdle point to
// the halves' point beside it: sixteen times this round a stone of eight mains.
const girdleFacets = 4

// skeleton returns the outline's skeleton for a width of 1, as a caliper finds
// it on the girdle's flats.
func (p *Proportions) skeleton() (*brilliant, *Fault) {
	const half = 0.5
	ratio := p.value("ratio").Mean
	var b *brilliant
	switch p.Outline {
	case "oval":
		b = curved(ellipse(half*ratio, half), 8)
	case "marquise":
		b = curved(marquise(half*ratio, half), 8)
	case "pear":
		b = curved(pear(ratio-half, half), 8)
	case "cushion":
		outline, ok := cushion(half*ratio, half, p.value("corner").Mean/100, p.value("bow").Mean*math.Pi/180)
		if !ok {
			return nil, &Fault{File: "proportions", Field: "bow", Got: p.value("bow").String(),
				Why:    "sides that turn so much do not meet corners of this radius at this ratio",
				Remedy: "use a smaller bow or a smaller corner"}
		}
		b = curved(outline, 8)
	case "square":
		b = polygonal(4)
	case "triangle":
		bow := p.value("bow").Mean * math.Pi / 180
		if bow < leastBow.Radians() {
			b = polygonal(3)
		} else {
			b = curved(triangle(bow), 6)
		}
	default:
		b = curved(ellipse(half, half), 8)
		// A round culet is measured over the corners of its octagon.
		b.culetHalf = half * math.Cos(math.Pi/8)
	}
	var rim []mgl64.Vec2
	for _, ring := range b.between {
		rim = append(rim, ring...)
	}
	o := outlineOf(rim)
	b.resize(1 / o.width)
	keel := p.value("keel").Mean / 100
	switch p.Outline {
	case "pear":
		b.keelFore = keel * o.length / o.width
	case "oval", "marquise":
		b.keelFore = keel / 2 * o.length / o.width
		b.keelAft = b.keelFore
	}
	return b, nil
}

// leastBow is the turn below which sides count as straight: the halves of so
// flat a side would differ by less than a machine sets.
const leastBow = 2 * Degree

// resize multiplies the outline.
func (b *brilliant) resize(factor float64) {
	for i := range b.mains {
		b.mains[i].at = b.mains[i].at.Mul(factor)
	}
	for _, ring := range b.between {
		for k := range ring {
			ring[k] = ring[k].Mul(factor)
		}
	}
	b.crownReference *= factor
	b.pavilionReference *= factor
}

// rim is an outline on which the mains stand at whole numbers and u runs once
// round from 0 to their number: place and outward unit normal. At a sharp
// point the normal is that of the main that stands there.
type rim func(u float64) (at, faces mgl64.Vec2)

// curved returns the skeleton of a smooth outline, mains at whole numbers of
// its rim, half a unit wide.
func curved(r rim, mains int) *brilliant {
	b := &brilliant{culetHalf: 0.5}
	for i := range mains {
		at, faces := r(float64(i))
		b.mains = append(b.mains, brilliantMain{at, faces, faces})
	}
	for i := range mains {
		// The halves meet on the girdle where the edge between the mains points.
		cross := crossing2(b.mains[i].crown(), b.mains[(i+1)%mains].crown())
		lo, hi := 0.0, 1.0
		for range 60 {
			mid := (lo + hi) / 2
			if at, _ := r(float64(i) + mid); cross[0]*at[1]-cross[1]*at[0] < 0 {
				lo = mid
			} else {
				hi = mid
			}
		}
		ring := []mgl64.Vec2{b.mains[i].at}
		for k := 1; k < 2*girdleFacets; k++ {
			u := hi * float64(k) / girdleFacets
			if k > girdleFacets {
				u = hi + (1-hi)*float64(k-girdleFacets)/girdleFacets
			}
			at, _ := r(float64(i) + u)
			ring = append(ring, at)
		}
		b.between = append(b.between, append(ring, b.mains[(i+1)%mains].at))
		b.straight = append(b.straight, false)
	}
	// The sides' mains are those nearest to the axis.
	b.crownReference = math.Inf(1)
	for _, m := range b.mains {
		b.crownReference = min(b.crownReference, m.crown().reach())
	}
	b.pavilionReference = b.crownReference
	return b
}

// arcPoint is the place at a normal's azimuth on a circle.
func arcPoint(centre mgl64.Vec2, radius, azimuth float64) (at, faces mgl64.Vec2) {
	faces = toward(azimuth)
	return centre.Add(faces.Mul(radius)), faces
}

// ellipse has half-length a and half-width b; equal ones make a circle.
func ellipse(a, b float64) rim {
	return func(u float64) (at, faces mgl64.Vec2) {
		sin, cos := math.Sincos(u * math.Pi / 4)
		return mgl64.Vec2{a * cos, b * sin}, mgl64.Vec2{b * cos, a * sin}.Normalize()
	}
}

// folded makes a whole outline of its upper half, u from 0 at +x to 4 at -x.
func folded(upper rim) rim {
	return func(u float64) (at, faces mgl64.Vec2) {
		if u = math.Mod(u, 8); u <= 4 {
			return upper(u)
		}
		at, faces = upper(8 - u)
		return mgl64.Vec2{at[0], -at[1]}, mgl64.Vec2{faces[0], -faces[1]}
	}
}

// marquise is two arcs that meet in points at +x and -x.
func marquise(a, b float64) rim {
	radius := (a*a + b*b) / (2 * b)
	spread := math.Asin(a / radius) // from the middle of an arc to its end
	return folded(func(u float64) (at, faces mgl64.Vec2) {
		at, faces = arcPoint(mgl64.Vec2{0, b - radius}, radius, math.Pi/2+(u-2)/2*spread)
		switch u {
		case 0:
			return mgl64.Vec2{a, 0}, mgl64.Vec2{1, 0}
		case 4:
			return mgl64.Vec2{-a, 0}, mgl64.Vec2{-1, 0}
		}
		return at, faces
	})
}

// pear is a half circle of radius b toward -x and two arcs to a point at x = tip.
func pear(tip, b float64) rim {
	radius := (tip*tip + b*b) / (2 * b)
	spread := math.Asin(min(1, tip/radius)) // 1 but for rounding where the point is none
	return folded(func(u float64) (at, faces mgl64.Vec2) {
		switch {
		case u == 0:
			return mgl64.Vec2{tip, 0}, mgl64.Vec2{1, 0}
		case u < 2:
			return arcPoint(mgl64.Vec2{0, b - radius}, radius, math.Pi/2-(2-u)/2*spread)
		}
		return arcPoint(mgl64.Vec2{}, b, u*math.Pi/4)
	})
}

// cushion has bowed sides that turn by bow to each end, and round corners;
// false if a side would have to be hollow.
func cushion(a, b, corner, bow float64) (rim, bool) {
	// Radii of the long side's arc (across x) and the end's, less the corner's:
	// from the two conditions that the arcs run into the corner's arc.
	sin, cos := math.Sincos(bow)
	det := (1-cos)*(1-cos) - sin*sin
	end := ((a-corner)*(1-cos) - (b-corner)*sin) / det
	side := ((b-corner)*(1-cos) - (a-corner)*sin) / det
	quarter := func(azimuth float64) (at, faces mgl64.Vec2) {
		switch {
		case azimuth <= bow:
			return arcPoint(mgl64.Vec2{a - end - corner, 0}, end+corner, azimuth)
		case azimuth >= math.Pi/2-bow:
			return arcPoint(mgl64.Vec2{0, b - side - corner}, side+corner, azimuth)
		}
		return arcPoint(mgl64.Vec2{a - end - corner + end*cos, end * sin}, corner, azimuth)
	}
	return folded(func(u float64) (at, faces mgl64.Vec2) {
		if u <= 2 {
			return quarter(u * math.Pi / 4)
		}
		at, faces = quarter((4 - u) * math.Pi / 4)
		return mgl64.Vec2{-at[0], at[1]}, mgl64.Vec2{-faces[0], faces[1]}
	}), end >= 0 && side >= 0
}

// triangle has three sides, the first facing +x, that turn by bow from their
// middle to sharp corners: six mains, at the sides' middles and the corners.
func triangle(bow float64) rim {
	// With the corners at a distance of 1 from the axis half a side is
	// sin 60 degrees, and the arc's centre lies on the side's middle line.
	radius := math.Sin(math.Pi/3) / math.Sin(bow)
	centre := math.Cos(math.Pi/3) - radius*math.Cos(bow)
	return func(u float64) (at, faces mgl64.Vec2) {
		u = math.Mod(u, 6)
		if corner := math.Mod(u, 2); corner == 1 {
			faces = toward(u * math.Pi / 3)
			return faces, faces
		}
		side := 2 * math.Round(u/2) // the main in the middle of the nearest side
		turn := side * math.Pi / 3
		return arcPoint(toward(turn).Mul(centre), radius, turn+(u-side)*bow)
	}
}

// crownPeak is how far out, as a share of a straight side's distance, the edge
// between the two crown mains along it would reach the girdle's height. The
// table's edge lies inside the mains by this factor, and the upper half cuts
// off what is beyond 1: near to 1 the half stands too steep, far from it the
// star finds no room.
const crownPeak = 1.2

// polygonal returns the skeleton of a brilliant with straight sides at a
// distance of 1 from the axis, the first facing +x: two mains at each corner.
// Below they face half way between the side and the corner.
func polygonal(sides int) *brilliant {
	b := &brilliant{culetHalf: 0.5}
	half := math.Pi / float64(sides)
	lean := math.Atan((crownPeak - 1) / math.Tan(half))
	for i := range sides {
		square := 2 * half * float64(i)
		var ends [2]mgl64.Vec2
		for k, sign := range [2]float64{-1, 1} {
			ends[k] = toward(square + sign*half).Mul(1 / math.Cos(half))
			b.mains = append(b.mains, brilliantMain{ends[k], toward(square + sign*lean), toward(square + sign*half/2)})
		}
		b.between = append(b.between, ends[:], nil)
		b.straight = append(b.straight, true, false)
	}
	b.crownReference, b.pavilionReference = b.mains[0].crown().reach(), b.mains[0].pavilion().reach()
	return b
}

// toward is the unit vector at an azimuth in radians.
func toward(azimuth float64) mgl64.Vec2 {
	sin, cos := math.Sincos(azimuth)
	return mgl64.Vec2{cos, sin}
}
