// Package facets holds the shape of a cut stone: a convex solid bounded by flat
// facets, and the ways to get one: from a cut plan, from measured proportions
// or from a scan.
//
// Frame. Right-handed, +z out of the table toward a face-up viewer; z = 0 is the
// plane that the plan's lengths refer to; azimuth 0 lies along +x at index 0 and
// grows toward +y, that is anticlockwise as seen from the table. Normals are unit
// length and point out of the stone. A solved stone is in millimetres.
package facets

import (
	"github.com/go-gl/mathgl/mgl64"
)

// Side is the part of the stone that a facet belongs to.
type Side int

// The sides in the order in which a stone is read from below to above.
const (
	Pavilion Side = iota // below the girdle, normal downward
	Girdle               // the rim, normal level
	Crown                // above the girdle, normal upward
	Table                // the flat on top, normal along +z
)

// String returns the side's word as plan files write it.
func (s Side) String() string {
	return [...]string{"pavilion", "girdle", "crown", "table"}[s]
}

// Facet is one flat face of a stone.
type Facet struct {
	Tier     string     // name of the tier that cut it; empty for a scan
	Index    float64    // its tooth on the plan's gear; NaN where there is none (scans, table)
	Side     Side       // which part of the stone it belongs to
	Normal   mgl64.Vec3 // unit, out of the stone
	Distance float64    // of its plane from the origin along Normal, mm; may be negative
	Corners  []int      // into Stone.Corners, anticlockwise seen from outside
	Area     float64    // mm²
}

// Edge is a straight edge of a stone between two facets.
type Edge struct {
	Corners [2]int // into Stone.Corners, the lower number first
	Facets  [2]int // into Stone.Facets, the lower number first
}

// Stone is a closed convex solid in millimetres, in the package's frame. It is
// not changed after it was made, so it may be shared.
type Stone struct {
	Name    string
	Facets  []Facet
	Corners []mgl64.Vec3 // mm
	Edges   []Edge
	Notes   []string // what must be said wherever the stone is shown, such as a dent that was filled; one sentence each
}
