package trace

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// View is where the eye stands: its direction in the stone's frame is
// (sin Tilt cos Turn, sin Tilt sin Turn, cos Tilt). The stone rocks about one
// axis lying in the picture, without spin. Tilt lies in [0°, 90°).
type View struct {
	Tilt, Turn facets.Angle
}

// frame is the viewer's frame in the stone's coordinates: unit vectors to the
// right and up the picture and toward the eye.
type frame struct{ right, up, eye vec }

// frame returns the viewer's axes in the stone's frame.
func (v View) frame() frame {
	// Face-up, index 0 (+x) points up the picture and +y to the left; the rocking
	// turns these axes and the eye's about one axis that lies in the picture.
	sin, cos := math.Sincos(v.Turn.Radians())
	turned := mgl64.QuatRotate(v.Tilt.Radians(), mgl64.Vec3{-sin, cos, 0})
	return frame{
		right: fromMgl(turned.Rotate(mgl64.Vec3{0, -1, 0})),
		up:    fromMgl(turned.Rotate(mgl64.Vec3{1, 0, 0})),
		eye:   fromMgl(turned.Rotate(mgl64.Vec3{0, 0, 1})),
	}
}

// Axes returns the viewer's right, up and eye direction as unit vectors in the
// stone's frame.
func (v View) Axes() (right, up, eye mgl64.Vec3) {
	f := v.frame()
	return f.right.mgl(), f.up.mgl(), f.eye.mgl()
}
