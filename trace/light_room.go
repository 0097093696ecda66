package trace

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// The room, in metres from the stone; +x to the right and +y up the picture as seen from
// its zenith, +z to the ceiling. It is our own. The stone lies on a table 0.75 m high in
// a room of 5 × 4 m, 2.7 m high, by day. Luminances in cd/m²: what a meter shows in
// such rooms, no source.
var (
	roomLo = mgl64.Vec3{-2, -2.5, -0.75}
	roomHi = mgl64.Vec3{3, 1.5, 1.95}

	// Of the walls toward -x, +x, -y, +y, then floor and ceiling.
	roomFaces = [6]float64{60, 60, 60, 60, 20, 80}

	roomPanels = [...]panel{
		// Two windows in the left wall, 1.1 m wide, from 0.9 to 2.3 m over the floor.
		{face: 0, lo: mgl64.Vec2{-1.9, 0.15}, hi: mgl64.Vec2{-0.8, 1.55}, luminance: 3000},
		{face: 0, lo: mgl64.Vec2{-0.2, 0.15}, hi: mgl64.Vec2{0.9, 1.55}, luminance: 3000},
		// Four panels of 0.6 m in the ceiling.
		{face: 5, lo: mgl64.Vec2{-0.9, -1.5}, hi: mgl64.Vec2{-0.3, -0.9}, luminance: 4000},
		{face: 5, lo: mgl64.Vec2{1.1, -1.5}, hi: mgl64.Vec2{1.7, -0.9}, luminance: 4000},
		{face: 5, lo: mgl64.Vec2{-0.9, 0.3}, hi: mgl64.Vec2{-0.3, 0.9}, luminance: 4000},
		{face: 5, lo: mgl64.Vec2{1.1, 0.3}, hi: mgl64.Vec2{1.7, 0.9}, luminance: 4000},
	}
)

const roomNote = "a room of 5 × 4 × 2.7 m by day, the stone on a table 0.75 m high; " +
	"two windows 1.1 × 1.4 m to the left (3000 cd/m²), four ceiling panels of 0.6 m (4000 cd/m²), " +
	"walls 60, ceiling 80, floor 20 cd/m²; our own geometry"

// panel is a bright rectangle in a face of the room. Its bounds are along the two axes
// that the face spans, in the order x, y, z.
type panel struct {
	face      int // numbered as roomFaces
	lo, hi    mgl64.Vec2
	luminance float64
}

// roomShape is the room seen from the stone.
type roomShape struct {
	turned mgl64.Mat3 // from the room's frame to the viewer's
	inRoom mgl64.Mat3
}

func newRoom(turned mgl64.Mat3) *roomShape {
	return &roomShape{turned: turned, inRoom: turned.Transpose()}
}

func (s *roomShape) luminance(from mgl64.Vec3) float64 {
	d := s.inRoom.Mul3x1(from)
	face, t := 0, math.Inf(1)
	for axis, v := range d {
		switch {
		case v < 0 && roomLo[axis]/v < t:
			face, t = 2*axis, roomLo[axis]/v
		case v > 0 && roomHi[axis]/v < t:
			face, t = 2*axis+1, roomHi[axis]/v
		}
	}
	u, v := spanned(face)
	x, y := d[u]*t, d[v]*t
	for i := range roomPanels {
		if p := &roomPanels[i]; p.face == face && x >= p.lo[0] && x <= p.hi[0] && y >= p.lo[1] && y <= p.hi[1] {
			return p.luminance
		}
	}
	return roomFaces[face]
}

// illuminance adds up the faces and what the panels have more than the face they
// hang on.
func (s *roomShape) illuminance() (sum float64) {
	for face, l := range roomFaces {
		u, v := spanned(face)
		sum += l * s.share(face, mgl64.Vec2{roomLo[u], roomLo[v]}, mgl64.Vec2{roomHi[u], roomHi[v]})
	}
	for _, p := range roomPanels {
		sum += (p.luminance - roomFaces[p.face]) * s.share(p.face, p.lo, p.hi)
	}
	return sum
}

// spanned returns the two axes along which a face of the room extends.
func spanned(face int) (u, v int) {
	return [...]int{1, 0, 0}[face/2], [...]int{2, 2, 1}[face/2]
}

// share returns the illuminance, over π, by a rectangle of luminance 1 in a face.
func (s *roomShape) share(face int, lo, hi mgl64.Vec2) float64 {
	u, v := spanned(face)
	corner := func(x, y float64) (c mgl64.Vec3) {
		c[face/2] = [...]mgl64.Vec3{roomLo, roomHi}[face%2][face/2]
		c[u], c[v] = x, y
		return s.turned.Mul3x1(c)
	}
	return polygonShare([]mgl64.Vec3{
		corner(lo[0], lo[1]), corner(hi[0], lo[1]), corner(hi[0], hi[1]), corner(lo[0], hi[1]),
	})
}

// polygonShare returns the illuminance, over π, of the plane z = 0 at the origin by the
// part above it of a flat convex polygon of luminance 1: the sum over its edges of the
// angle an edge spans times the height of the normal of the triangle it spans with
// the origin, over 2π (J. H. Lambert, Photometria, 1760).
func polygonShare(corners []mgl64.Vec3) float64 {
	var above []mgl64.Vec3
	for i, a := range corners {
		b := corners[(i+1)%len(corners)]
		if a[2] >= 0 {
			above = append(above, a)
		}
		if (a[2] < 0) != (b[2] < 0) {
			above = append(above, a.Add(b.Sub(a).Mul(a[2]/(a[2]-b[2]))))
		}
	}
	sum := 0.0
	for i, a := range above {
		b := above[(i+1)%len(above)]
		normal := a.Cross(b)
		if l := normal.Len(); l > 0 {
			sum += math.Atan2(l, a.Dot(b)) * normal[2] / l
		}
	}
	return math.Abs(sum) / (2 * math.Pi)
}
