package trace

import (
	"math"
	"math/rand/v2"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// cut adds facets at the angle from the girdle plane and at azimuths in degrees, all at
// one distance from the origin.
func cut(planes []facets.Plane, side facets.Side, angle, distance float64,
	azimuths ...float64) []facets.Plane {
	sin, cos := math.Sincos(angle * math.Pi / 180)
	if side == facets.Pavilion {
		cos = -cos
	}
	for _, a := range azimuths {
		y, x := math.Sincos(a * math.Pi / 180)
		planes = append(planes, facets.Plane{Normal: mgl64.Vec3{sin * x, sin * y, cos}.Normalize(),
			Distance: distance, Side: side})
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

// TestPathTracer compares three stones with what a general path tracer rendered of them:
// Cycles of Blender 3.4.1 on one processor, a mesh of the same planes with its glass
// shader (sharp, white) at the index, under a sky of one radiance above and none below,
// seen from straight above by parallel rays, box filter, 1000 bounces, no clamping, no
// denoising: 128 samples a pixel, 200 pixels across the square from -1 to 1, six seeds.
// The mean is over pixels that lie wholly inside the girdle's outline, its error from
// the spread of the seeds. Such a tracer averages the two polarisations at every facet,
// and what it shows is what the first surface mirrors from above and what is returned.
func TestPathTracer(t *testing.T) {
	const pixels = 200
	const source = "Cycles of Blender 3.4.1, 128 samples a pixel, six seeds"
	rng := rand.New(rand.NewPCG(34, 1))
	for _, row := range []struct {
		name        string
		stone       *facets.Stone
		index       float64
		inside      int // pixels
		mean, error float64
	}{
		{"round brilliant of index 2.417", brilliant(t), 2.417, 30952, 0.9233921, 5.3e-5},
		{"step cut of index 1.544", steps(t), 1.544, 38416, 0.9218552, 1.1e-5},
		{"lopsided stone of index 1.77", lopsided(t), 1.77, 20479, 0.6884702, 2.7e-5},
	} {
		tr := prepare(t, row.stone, View{}, true)
		tr.faint = faintShare
		var pixel [][2]float64 // middles
		const half = 1.0 / pixels
		for i := range pixels {
			for j := range pixels {
				x, y := -1+half*float64(2*i+1), -1+half*float64(2*j+1)
				in := true
				for _, f := range row.stone.Facets {
					if n := f.Normal; f.Side == facets.Girdle &&
						n[0]*x+n[1]*y+half*(math.Abs(n[0])+math.Abs(n[1])) > f.Distance+1e-9 {
						in = false
					}
				}
				if in {
					pixel = append(pixel, [2]float64{x, y})
				}
			}
		}
		near(t, row.name+": pixels inside", float64(len(pixel)), float64(row.inside), 0, source)

		// Replicas of all pixels, or of every eighth beginning with another.
		replicas, stride := 8, 8
		if *long {
			replicas, stride = 40, 1
		}
		var of []float64
		for r := range replicas {
			var total sums
			rays := 0.0
			for i := r % stride; i < len(pixel); i += stride {
				p := pixel[i]
				rays++
				from := tr.body.relative(mgl64.Vec3{p[0] + half*(2*rng.Float64()-1),
					p[1] + half*(2*rng.Float64()-1), 3})
				facet, s, ok := tr.body.entry(from, vec{0, 0, -1})
				if !ok {
					t.Fatalf("%s: a ray passes beside", row.name)
				}
				l := tr.follow(facet, from.plus(s, vec{0, 0, -1}), row.index, 1, dice(rng.Uint32()), &total)
				total.addLedger(l)
			}
			of = append(of, (total[mirrorsLight]+total[Returned])/rays)
		}
		mean, spread := 0.0, 0.0
		for _, v := range of {
			mean += v / float64(len(of))
		}
		for _, v := range of {
			spread += (v - mean) * (v - mean) / float64(len(of)*(len(of)-1))
		}
		what := row.name + ", mean from above"
		if *long {
			what += " " + longForm
		}
		// Student's t for seven degrees of freedom, two-sided: 0.001, three rows.
		agree(t, what, mean, math.Sqrt(spread), row.mean, row.error, 6, source)
	}
}
