package trace

import (
	"cmp"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// symmetry is how a stone looks the same to the eye from several sides: turned by
// parts of a full turn about the line of sight, and mirrored. One sector of the
// picture then holds all there is to see. Sample points are laid into that sector, and
// what is found for one counts in the map at all its images. Means over the outline are
// means over the sector, so nothing is biased and errors stay those of the rays traced.
type symmetry struct {
	turns  int     // it looks the same turned by 1/turns of a full turn; 1 if only so
	mirror bool    // it also looks the same mirrored
	axis   float64 // angle of a mirror line from the picture's right; 0 if there is none

	middle [2]float64   // of the picture's square to the point about which it is symmetric
	reach  float64      // from that point to the farthest corner of the outline
	images [][4]float64 // the turns and mirrors, as matrices row by row; the first changes nothing
}

// place lays a point of the unit square into the sector, evenly by area. The sector
// may reach beyond the outline. u and v are the picture's, from its middle.
func (s *symmetry) place(x, y float64) (u, v float64) {
	r := s.reach * math.Sqrt(x)
	sin, cos := math.Sincos(s.axis + 2*math.Pi*y/float64(len(s.images)))
	return s.middle[0] + r*cos, s.middle[1] + r*sin
}

// area is that of the sector.
func (s *symmetry) area() float64 { return math.Pi * s.reach * s.reach / float64(len(s.images)) }

// image returns image number i of the point (u, v) of the picture; number 0 is itself.
func (s *symmetry) image(u, v float64, i int) (float64, float64) {
	u, v = u-s.middle[0], v-s.middle[1]
	m := &s.images[i]
	return s.middle[0] + m[0]*u + m[1]*v, s.middle[1] + m[2]*u + m[3]*v
}

// noSymmetry is that of a stone that looks different from every side.
func noSymmetry() symmetry { return symmetry{images: [][4]float64{{1, 0, 0, 1}}} }

// findImages lists the images.
func (s *symmetry) findImages() {
	for k := range s.turns {
		sin, cos := math.Sincos(2 * math.Pi * float64(k) / float64(s.turns))
		s.images = append(s.images, [4]float64{cos, -sin, sin, cos})
		if s.mirror {
			// Mirrored at the axis, then turned: about the axis turned by half as much.
			sin, cos := math.Sincos(2*s.axis + 2*math.Pi*float64(k)/float64(s.turns))
			s.images = append(s.images, [4]float64{cos, sin, sin, -cos})
		}
	}
}

// sameFacet is how far two facets may be from images of each other, in radians and in
// units of the stone: well above what solving a plan rounds off, well below what any
// ledger shows.
const sameFacet = 1e-8

// symmetry finds the symmetry of what the eye sees. Where byTier is set facets of
// unlike tiers are unlike. An eye that is near sees none.
func (t *tracer) symmetry(s *facets.Stone, byTier bool) (found symmetry) {
	o := t.outline
	found = symmetry{turns: 1, middle: [2]float64{-o.centre.dot(o.right), -o.centre.dot(o.up)}}
	for _, c := range s.Corners {
		x := t.body.relative(c)
		found.reach = max(found.reach, math.Hypot(x.dot(o.right), x.dot(o.up)))
	}
	defer found.findImages()
	rings := t.rings(s, byTier)
	if t.near || len(rings) == 0 {
		return found
	}
	// An image of the first facet of a ring is a facet of that ring, so no other turns
	// and mirror lines can be than those that bring it there.
	ring := slices.MinFunc(rings, func(a, b ring) int { return len(a.azimuths) - len(b.azimuths) }).azimuths
	for _, a := range ring {
		if turn := a - ring[0]; turn > 0 && alike(rings, func(a float64) float64 { return a + turn }) {
			found.turns++
		}
		if sum := a + ring[0]; !found.mirror && alike(rings, func(a float64) float64 { return sum - a }) {
			found.mirror, found.axis = true, sum/2
		}
	}
	return found
}

// turns reports whether a light is the same all around the line of sight, so that it
// leaves a stone its symmetry.
func (l *Light) turns() bool {
	switch s := l.shape.(type) {
	case evenShape, ringShape:
		return true
	case *skyShape:
		_, overcast := s.distribution.(overcastSky)
		return overcast && s.inSky.Mul3x1(mgl64.Vec3{0, 0, 1})[2] > 1-1e-12 && s.sunLuminance == 0
	}
	return false
}

// ring is the facets that differ only in their azimuth in the picture.
type ring struct {
	facing, distance float64 // cosine of their normals to the eye; from the stone's middle
	side             facets.Side
	tier             string
	azimuths         []float64 // of their normals, from the picture's right, growing, in [0, 2π)
}

// rings sorts the facets into rings. One that faces the eye straight, or away from it,
// stays where it is under every turn and mirror, and is left out.
func (t *tracer) rings(s *facets.Stone, byTier bool) (rings []ring) {
	order := make([]int, len(t.toEye))
	for j := range order {
		order[j] = j
	}
	slices.SortFunc(order, func(a, b int) int { return cmp.Compare(t.toEye[a], t.toEye[b]) })
	for _, j := range order {
		n := t.body.normal[j]
		x, y := n.dot(t.outline.right), n.dot(t.outline.up)
		if math.Hypot(x, y) < sameFacet {
			continue
		}
		f := ring{facing: t.toEye[j], distance: 1 / t.body.rows[j].length(), side: t.body.side[j]}
		if byTier {
			f.tier = s.Facets[j].Tier
		}
		at := -1
		for i := len(rings) - 1; i >= 0 && at < 0 && f.facing-rings[i].facing < sameFacet; i-- {
			if r := &rings[i]; math.Abs(r.distance-f.distance) < sameFacet && r.side == f.side && r.tier == f.tier {
				at = i
			}
		}
		if at < 0 {
			rings = append(rings, f)
			at = len(rings) - 1
		}
		rings[at].azimuths = append(rings[at].azimuths, wrap(math.Atan2(y, x)))
	}
	for _, r := range rings {
		slices.Sort(r.azimuths)
	}
	return rings
}

// alike reports whether a change of azimuth brings every facet where one like it is.
func alike(rings []ring, change func(azimuth float64) float64) bool {
	for _, r := range rings {
		for _, a := range r.azimuths {
			b := wrap(change(a))
			i, _ := slices.BinarySearch(r.azimuths, b)
			n := len(r.azimuths)
			apart := min(angleApart(b, r.azimuths[i%n]), angleApart(b, r.azimuths[(i+n-1)%n]))
			if apart > sameFacet {
				return false
			}
		}
	}
	return true
}

// wrap brings an angle into [0, 2π).
func wrap(a float64) float64 {
	if a = math.Mod(a, 2*math.Pi); a < 0 {
		a += 2 * math.Pi
	}
	return a
}

func angleApart(a, b float64) float64 {
	d := math.Abs(a - b)
	return min(d, 2*math.Pi-d)
}
