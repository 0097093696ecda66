package trace

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// vec is a vector in the stone's frame. The inner loop uses it instead of
// mgl64.Vec3, an array, which the compiler keeps in memory rather than in
// registers: BenchmarkReflect measures the difference.
type vec struct{ x, y, z float64 }

func fromMgl(v mgl64.Vec3) vec { return vec{v[0], v[1], v[2]} }

func (a vec) mgl() mgl64.Vec3 { return mgl64.Vec3{a.x, a.y, a.z} }

func (a vec) dot(b vec) float64 { return a.x*b.x + a.y*b.y + a.z*b.z }

// plus returns a + s b.
func (a vec) plus(s float64, b vec) vec { return vec{a.x + s*b.x, a.y + s*b.y, a.z + s*b.z} }

func (a vec) scale(s float64) vec { return vec{s * a.x, s * a.y, s * a.z} }

func (a vec) cross(b vec) vec {
	return vec{a.y*b.z - a.z*b.y, a.z*b.x - a.x*b.z, a.x*b.y - a.y*b.x}
}

func (a vec) length() float64 { return math.Sqrt(a.dot(a)) }
