package facets

import (
	"math/rand/v2"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
)

// A closed surface of triangles whose corners are among the points, with no
// point outside any of them, is the hull: the check is complete and exact.
func TestHullHoldsAllPoints(t *testing.T) {
	rng := rand.New(rand.NewPCG(3, 9))
	clouds := map[string]func() mgl64.Vec3{
		"ball": func() mgl64.Vec3 {
			return mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}.Normalize()
		},
		"block": func() mgl64.Vec3 { return mgl64.Vec3{rng.Float64(), rng.Float64(), rng.Float64()} },
		"lattice": func() mgl64.Vec3 {
			return mgl64.Vec3{float64(rng.IntN(6)), float64(rng.IntN(6)),
				float64(rng.IntN(6))}
		},
		"faces": func() mgl64.Vec3 { // of a cube: thousands of points in a plane
			p := mgl64.Vec3{rng.Float64(), rng.Float64(), rng.Float64()}
			p[rng.IntN(3)] = float64(rng.IntN(2))
			return p
		},
		"needle": func() mgl64.Vec3 {
			return mgl64.Vec3{rng.Float64(), 1e-6 * rng.Float64(),
				1e-9 * rng.Float64()}
		},
		"pancake": func() mgl64.Vec3 {
			return mgl64.Vec3{rng.Float64(), rng.Float64(),
				1e-9 * float64(rng.IntN(2))}
		},
	}
	for name, point := range clouds {
		for _, n := range []int{5, 50, 2000} {
			points := make([]mgl64.Vec3, n)
			for i := range points {
				points[i] = point()
			}
			h := newHull(points)
			if h.flat {
				if n > 5 {
					t.Errorf("%s of %d points is said to be flat", name, n)
				}
				continue
			}
			triangles, beyond := h.triangles()
			corners := map[int32]bool{}
			for i, c := range triangles {
				f := h.face(c[0], c[1], c[2])
				if f.normal == [3]float64{} {
					t.Fatalf("%s of %d: triangle %d has no area", name, n, i)
				}
				for p := range points {
					if h.side(&f, int32(p)) > 0 {
						t.Fatalf("%s of %d: point %d lies outside triangle %d", name, n, p, i)
					}
				}
				for e := range 3 {
					corners[c[e]] = true
					other := triangles[beyond[i][e]]
					back := false
					for k := range 3 {
						back = back || other[k] == c[(e+1)%3] && other[(k+1)%3] == c[e]
					}
					if !back {
						t.Fatalf("%s of %d: triangle %d is not joined along edge %d", name, n, i, e)
					}
				}
			}
			// Euler's formula for triangles: F = 2 V - 4.
			if len(triangles) != 2*len(corners)-4 {
				t.Errorf("%s of %d: %d triangles on %d corners", name, n, len(triangles), len(corners))
			}
		}
	}
}

func TestFlatCloudsHaveNoHull(t *testing.T) {
	for name, points := range map[string][]mgl64.Vec3{
		"none":  {},
		"one":   {{1, 2, 3}},
		"twice": {{1, 2, 3}, {1, 2, 3}},
		"line":  {{0, 0, 0}, {1, 2, 3}, {2, 4, 6}, {3, 6, 9}},
		"plane": {{0, 0, 5}, {1, 0, 5}, {0, 1, 5}, {1, 1, 5}, {0.3, 0.7, 5}},
	} {
		if h := newHull(points); !h.flat {
			t.Errorf("%s has a hull of %d faces", name, len(h.faces))
		}
	}
}

// The exact side must agree with whole-number arithmetic that cannot overflow.
func TestExactSideOfNearlyFlatPoints(t *testing.T) {
	const far = 1 << hullBits
	for _, row := range []struct {
		name       string
		a, b, c, q [3]int64
		want       int
	}{
		{"one step above", [3]int64{-far, -far, 0}, [3]int64{far, -far, 0}, [3]int64{0, far, 0}, [3]int64{0, 0,
			1}, 1},
		{"in the plane", [3]int64{-far, -far, 0}, [3]int64{far, -far, 0}, [3]int64{0, far, 0}, [3]int64{7, 9,
			0}, 0},
		{"one step below", [3]int64{-far, -far, 0}, [3]int64{far, -far, 0}, [3]int64{0, far, 0}, [3]int64{0, 0,
			-1}, -1},
		// The plane x + y + z = 0 through far corners, one step off it.
		{"slanted, above", [3]int64{far, -far, 0}, [3]int64{0, far, -far}, [3]int64{-far, 0, far}, [3]int64{1,
			0, 0}, 1},
		{"slanted, in it", [3]int64{far, -far, 0}, [3]int64{0, far, -far}, [3]int64{-far, 0, far}, [3]int64{far,
			-far + 3, -3}, 0},
		{"slanted, below", [3]int64{far, -far, 0}, [3]int64{0, far, -far}, [3]int64{-far, 0, far}, [3]int64{far,
			-far, -1}, -1},
	} {
		if got := exactSide(row.a, row.b, row.c, row.q); got != row.want {
			t.Errorf("%s: %d, want %d", row.name, got, row.want)
		}
	}
}

func BenchmarkHull100k(b *testing.B) {
	rng := rand.New(rand.NewPCG(3, 9))
	points := make([]mgl64.Vec3, 100_000)
	for i := range points {
		points[i] = mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}.Normalize().Mul(8)
	}
	b.ReportAllocs()
	for b.Loop() {
		newHull(points)
	}
}
