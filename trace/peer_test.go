package trace

import (
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// cut adds facets at the angle from the girdle plane and at azimuths in degrees, all at
// one distance from the origin.
func cut(planes []facets.Plane, side facets.Side, angle, distance float64, azimuths ...float64) []facets.Plane {
	sin, cos := math.Sincos(angle * math.Pi / 180)
	if side == facets.Pavilion {
		cos = -cos
	}
	for _, a := range azimuths {
		y, x := math.Sincos(a * math.Pi / 180)
		planes = append(planes, facets.Plane{Normal: mgl64.Vec3{sin * x, sin * y, cos}.Normalize(), Distance: distance, Side: side})
	}
	return planes
}

// steps is a square step cut of 21 facets with its corners left whole, 1.96 wide.
func steps(t testing.TB) *facets.Stone {
	square := []float64{0, 90, 180, 270}
	p := cut(nil, facets.Table, 0, 0.35, 0)
	p = cut(p, facets.Crown, 40, 0.72, square...)
	p = cut(p, facets.Crown, 28, 0.57, square...)
	p = cut(p, facets.Girdle, 90, 0.98, square...)
	p = cut(p, facets.Pavilion, 52, 0.80, square...)
	p = cut(p, facets.Pavilion, 43, 0.74, square...)
	return solid(t, p)
}

// lopsided has five sides, no symmetry and 16 facets, and lies within the square from -1 to 1.
func lopsided(t testing.TB) *facets.Stone {
	p := cut(nil, facets.Table, 0, 0.36, 0)
	for i, a := range []float64{10, 75, 150, 226, 300} {
		k := float64(i)
		p = cut(p, facets.Crown, 31+2*k, 0.63+0.009*k, a)
		p = cut(p, facets.Girdle, 90, 0.72+0.018*k, a)
		p = cut(p, facets.Pavilion, 39+1.5*k, 0.56-0.009*k, a+3)
	}
	return solid(t, p)
}
