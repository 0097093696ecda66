// Package solid draws a cut stone as a solid: facets lit plainly, edges on top,
// the hidden edges faintly behind if wanted. It is drawing, not light tracing:
// the shading tells the facets apart and says nothing of brilliance.
//
// Frame. The picture is the viewer's: +Z to the eye, +X right, +Y up; the
// projection is parallel. Face-up, index 0 points up the picture and indices
// grow anticlockwise, as on the maps.
package solid

import (
	"cmp"
	"image"
	"image/color"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// Pose is how the stone is held before the viewer: the rotation that takes
// directions of the stone's frame into the viewer's.
type Pose struct {
	viewFromStone mgl64.Quat
}

// FaceUp looks down on the table, index 0 up the picture.
func FaceUp() Pose { return Pose{mgl64.QuatRotate(math.Pi/2, mgl64.Vec3{0, 0, 1})} }

// Profile looks at the girdle from the side with the table up and index 0 to
// the viewer.
func Profile() Pose {
	// Face-up has index 0 at the top; the stone tips back by a quarter turn about
	// the picture's horizontal, so that its near side is the one that was lowest:
	// turn it half round first.
	half := mgl64.QuatRotate(math.Pi, mgl64.Vec3{0, 0, 1})
	back := mgl64.QuatRotate(-math.Pi/2, mgl64.Vec3{1, 0, 0})
	return Pose{back.Mul(half).Mul(FaceUp().viewFromStone)}
}

// FaceDown looks up at the culet, index 0 up the picture.
func FaceDown() Pose {
	over := mgl64.QuatRotate(math.Pi, mgl64.Vec3{0, 1, 0})
	return Pose{over.Mul(FaceUp().viewFromStone)}
}

// Turned returns the pose after the viewer has turned the stone by the angles
// about the picture's vertical (right is positive) and horizontal (toward the
// viewer at the bottom, that is up the picture, is positive) axes.
func (p Pose) Turned(right, up facets.Angle) Pose {
	about := mgl64.QuatRotate(right.Radians(), mgl64.Vec3{0, 1, 0}).
		Mul(mgl64.QuatRotate(-up.Radians(), mgl64.Vec3{1, 0, 0}))
	return Pose{about.Mul(p.viewFromStone).Normalize()}
}

// Spun returns the pose after a turn in the plane of the picture, anticlockwise
// positive.
func (p Pose) Spun(by facets.Angle) Pose {
	return Pose{mgl64.QuatRotate(by.Radians(), mgl64.Vec3{0, 0, 1}).Mul(p.viewFromStone).Normalize()}
}

// View returns a direction or point of the stone's frame in the viewer's.
func (p Pose) View(v mgl64.Vec3) mgl64.Vec3 { return p.viewFromStone.Rotate(v) }

// Colours are what a drawing is painted with. All are opaque.
type Colours struct {
	Ground   color.RGBA // behind the stone
	Body     color.RGBA // a facet that faces the lamp
	Shade    color.RGBA // a facet that the lamp only grazes
	Edge     color.RGBA
	Hidden   color.RGBA // edges behind; transparent for none
	Selected color.RGBA // facets of the selected tier
}

// Ray is a straight piece of light drawn over the stone, in the stone's frame.
type Ray struct {
	From, To mgl64.Vec3 // mm
	Colour   color.RGBA
	Width    float64 // pixels
}

// Style is how a drawing looks.
type Style struct {
	Colours  Colours
	Width    float64 // of an edge in pixels; 0 means 1.4
	Selected string  // tier whose facets are picked out; empty for none
	Glass    float64 // how much of the ground shows through the facets, 0 to 1
	Rays     []Ray   // drawn on top, in this order
}

// Drawing is a stone projected onto a picture: it paints it and answers what
// lies under a point. It is not changed after it was made.
type Drawing struct {
	stone  *facets.Stone
	pose   Pose
	centre mgl64.Vec3   // of the stone, mm
	scale  float64      // pixels a mm
	middle mgl64.Vec2   // of the picture, pixels
	points []mgl64.Vec3 // corners in pixels, +Y down, depth in Z
	front  []bool       // by facet: it faces the viewer
}

// Project fits the stone into a picture of width x height pixels, so that the sphere
// that holds it takes the given share of the shorter edge. The scale is the same in
// every pose, so a stone that turns does not breathe.
func Project(stone *facets.Stone, pose Pose, width, height int, share float64) *Drawing {
	return ProjectWithin(stone, stone, pose, width, height, share)
}

// ProjectWithin is Project with the place and the scale at which it would show whole, so
// that a stone stays where it is while pieces are cut off it.
func ProjectWithin(stone, whole *facets.Stone, pose Pose, width, height int, share float64) *Drawing {
	centre, radius := bounds(whole.Corners)
	d := &Drawing{
		stone:  stone,
		pose:   pose,
		centre: centre,
		scale:  share * float64(min(width, height)) / 2 / radius,
		middle: mgl64.Vec2{float64(width) / 2, float64(height) / 2},
		points: make([]mgl64.Vec3, len(stone.Corners)),
		front:  make([]bool, len(stone.Facets)),
	}
	for i, c := range stone.Corners {
		d.points[i] = d.Point(c)
	}
	for i := range stone.Facets {
		d.front[i] = pose.View(stone.Facets[i].Normal)[2] > 0
	}
	return d
}

// Point returns where a point of the stone's frame, in mm, falls in the picture: X
// and Y in pixels from the top left corner, Z toward the eye in mm.
func (d *Drawing) Point(v mgl64.Vec3) mgl64.Vec3 {
	p := d.pose.View(v.Sub(d.centre))
	return mgl64.Vec3{d.middle[0] + d.scale*p[0], d.middle[1] - d.scale*p[1], p[2]}
}

// Radius returns the radius of the sphere that holds a stone, in mm.
func Radius(stone *facets.Stone) float64 {
	_, radius := bounds(stone.Corners)
	return radius
}

// bounds returns the middle of the corners' box and the distance of the corner
// farthest from it. A stone without extent gets radius 1.
func bounds(corners []mgl64.Vec3) (centre mgl64.Vec3, radius float64) {
	if len(corners) == 0 {
		return mgl64.Vec3{}, 1
	}
	low, high := corners[0], corners[0]
	for _, c := range corners {
		for k := range 3 {
			low[k], high[k] = min(low[k], c[k]), max(high[k], c[k])
		}
	}
	centre = low.Add(high).Mul(0.5)
	for _, c := range corners {
		radius = max(radius, c.Sub(centre).Len())
	}
	if radius == 0 {
		radius = 1
	}
	return centre, radius
}

// Facet returns the number of the facet seen at the pixel, false beside the stone.
func (d *Drawing) Facet(x, y float64) (int, bool) {
	for i := range d.stone.Facets {
		if d.front[i] && d.holds(i, x, y) {
			return i, true
		}
	}
	return 0, false
}

// holds reports whether the projected facet covers the point. Facets that face
// the viewer run clockwise in a picture whose y grows downward.
func (d *Drawing) holds(facet int, x, y float64) bool {
	ring := d.stone.Facets[facet].Corners
	for k, c := range ring {
		a, b := d.points[c], d.points[ring[(k+1)%len(ring)]]
		if (b[0]-a[0])*(y-a[1])-(b[1]-a[1])*(x-a[0]) > 0 {
			return false
		}
	}
	return true
}

// Label is the name of a tier and where it is written.
type Label struct {
	Tier string
	X, Y float64 // pixels, the middle of the largest facet of the tier that is seen
}

// Labels names each tier once, on the facet of it that shows most area, largest
// first. It leaves out those whose facets show less than least square pixels, and
// those whose name would lie on another's: closer than wide and high, in pixels. The
// tier called first comes first, however small.
func (d *Drawing) Labels(least, wide, high float64, first string) []Label {
	type shown struct {
		Label
		area float64
	}
	var found []shown
	at := map[string]int{} // tier's place in found
	for i := range d.stone.Facets {
		f := &d.stone.Facets[i]
		if !d.front[i] || f.Tier == "" {
			continue
		}
		area, x, y := d.centroid(i)
		if area < least && f.Tier != first {
			continue
		}
		k, seen := at[f.Tier]
		if !seen {
			at[f.Tier] = len(found)
			found = append(found, shown{Label{f.Tier, x, y}, area})
		} else if area > found[k].area*nearlyAlike {
			found[k] = shown{Label{f.Tier, x, y}, area}
		}
	}
	slices.SortStableFunc(found, func(a, b shown) int {
		if (a.Tier == first) != (b.Tier == first) {
			return map[bool]int{true: -1, false: 1}[a.Tier == first]
		}
		return cmp.Compare(b.area, a.area)
	})
	var labels []Label
	for _, s := range found {
		clear := !slices.ContainsFunc(labels, func(l Label) bool {
			return math.Abs(l.X-s.X) < wide && math.Abs(l.Y-s.Y) < high
		})
		if clear {
			labels = append(labels, s.Label)
		}
	}
	return labels
}

// nearlyAlike keeps a label on the facet it is on while another of its tier shows
// only a little more, so that labels do not flicker from rounding in a face-up view.
const nearlyAlike = 1.02

// centroid returns the area of the projected facet in square pixels and its centroid.
func (d *Drawing) centroid(facet int) (area, x, y float64) {
	ring := d.stone.Facets[facet].Corners
	origin := d.points[ring[0]]
	for k := 1; k+1 < len(ring); k++ {
		a, b := d.points[ring[k]].Sub(origin), d.points[ring[k+1]].Sub(origin)
		part := (a[0]*b[1] - a[1]*b[0]) / 2
		area += part
		x += part * (a[0] + b[0]) / 3
		y += part * (a[1] + b[1]) / 3
	}
	if area == 0 {
		return 0, origin[0], origin[1]
	}
	return math.Abs(area), origin[0] + x/area, origin[1] + y/area
}

// Paint draws the stone over the whole of dst.
func (d *Drawing) Paint(dst *image.RGBA, style Style) {
	fill(dst, style.Colours.Ground)
	for i := range d.stone.Facets {
		if d.front[i] {
			d.paintFacet(dst, i, style)
		}
	}
	width := style.Width
	if width == 0 {
		width = 1.4
	}
	for _, e := range d.stone.Edges {
		seen := d.front[e.Facets[0]] || d.front[e.Facets[1]]
		a, b := d.points[e.Corners[0]], d.points[e.Corners[1]]
		switch {
		case seen:
			stroke(dst, a[0], a[1], b[0], b[1], width, style.Colours.Edge)
		case style.Colours.Hidden.A > 0:
			stroke(dst, a[0], a[1], b[0], b[1], width*0.7, style.Colours.Hidden)
		}
	}
	for _, r := range style.Rays {
		a, b := d.Point(r.From), d.Point(r.To)
		stroke(dst, a[0], a[1], b[0], b[1], r.Width, r.Colour)
	}
}

// paintFacet fills one facet. The lamp stands above the viewer's left shoulder.
func (d *Drawing) paintFacet(dst *image.RGBA, facet int, style Style) {
	f := &d.stone.Facets[facet]
	lamp := mgl64.Vec3{-0.45, 0.6, 0.66}.Normalize()
	lit := (1 + d.pose.View(f.Normal).Dot(lamp)) / 2 // half-way Lambert: no facet goes black
	c := blend(style.Colours.Shade, style.Colours.Body, lit*lit)
	if style.Selected != "" && f.Tier == style.Selected {
		c = blend(style.Colours.Selected, c, 0.25)
	}
	c = blend(c, style.Colours.Ground, style.Glass)
	ring := make([][2]float64, len(f.Corners))
	for k, corner := range f.Corners {
		ring[k] = [2]float64{d.points[corner][0], d.points[corner][1]}
	}
	fillConvex(dst, ring, c)
}
