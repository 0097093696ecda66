package sheet

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/words"
	"pavilight/facets"
)

// usualAllowance is what grinding and polish take all round where the plan says
// nothing, mm (common practice, no source).
const usualAllowance = 0.3

// Rough is the piece that the sheet reckons with.
type Rough struct {
	Stone       *facets.Stone // in the finished stone's frame; nil where the steps start from a block
	VolumeMM3   float64       // of the plan's rough, 0 where it names none or only a scan
	Words       words.Text    // its sizes, empty where the plan names none
	AllowanceMM float64
	TooSmall    bool // the rough does not hold the stone in any of the positions tried
}

// roughOf places the plan's rough about the finished stone, middle on middle, in the
// first of its positions along the axes that holds the stone.
func roughOf(p *facets.Plan, stone *facets.Stone) Rough {
	r := Rough{AllowanceMM: usualAllowance}
	ref := p.Rough
	if ref == nil {
		return r
	}
	if ref.HasAllowance {
		r.AllowanceMM = ref.AllowanceMM
	}
	middle, _ := middleOf(stone)
	for _, position := range roughPositions(ref) {
		var planes []facets.Plane
		for _, n := range position.normals {
			planes = append(planes, facets.Plane{Index: math.NaN(), Normal: n, Side: facing(n),
				Distance: position.support(n) + n.Dot(middle)})
		}
		piece, err := facets.FromPlanes("rough", planes)
		if err != nil {
			continue
		}
		if holds(piece, stone) {
			r.Stone = piece
			break
		}
	}
	half := func(k int) float64 { return ref.SizeMM[k] / 2 }
	switch ref.Shape {
	case "box":
		r.VolumeMM3 = 8 * half(0) * half(1) * half(2)
		r.Words = words.Later("box %s", sizes(ref.SizeMM...))
	case "cylinder":
		r.VolumeMM3 = math.Pi * half(0) * half(0) * ref.SizeMM[1]
		r.Words = words.Later("cylinder %s", sizes(ref.SizeMM...))
	case "ellipsoid":
		r.VolumeMM3 = 4 * math.Pi / 3 * half(0) * half(1) * half(2)
		r.Words = words.Later("ellipsoid %s", sizes(ref.SizeMM...))
	default:
		r.Words = words.Later("scan %s", ref.File)
	}
	r.TooSmall = r.Stone == nil && ref.Shape != "scan"
	return r
}

// facing returns the side of a plane by its normal.
func facing(n mgl64.Vec3) facets.Side {
	switch {
	case n[2] > 0.999:
		return facets.Table
	case n[2] > 1e-6:
		return facets.Crown
	case n[2] < -1e-6:
		return facets.Pavilion
	default:
		return facets.Girdle
	}
}

// position is a convex body about the origin by its distance in every direction.
type position struct {
	normals []mgl64.Vec3
	support func(n mgl64.Vec3) float64
}

// roughPositions returns the body with its axes along the stone's in every order,
// as given first. Round bodies are held by flats that touch them.
func roughPositions(ref *facets.RoughRef) []position {
	var all []position
	orders := [][3]int{{0, 1, 2}, {1, 0, 2}, {0, 2, 1}, {1, 2, 0}, {2, 0, 1}, {2, 1, 0}}
	switch ref.Shape {
	case "box", "ellipsoid":
		for _, o := range orders {
			half := mgl64.Vec3{ref.SizeMM[o[0]] / 2, ref.SizeMM[o[1]] / 2, ref.SizeMM[o[2]] / 2}
			if ref.Shape == "box" {
				all = append(all, position{sixWays(), func(n mgl64.Vec3) float64 {
					return math.Abs(n[0])*half[0] + math.Abs(n[1])*half[1] + math.Abs(n[2])*half[2]
				}})
				continue
			}
			all = append(all, position{roundWays(), func(n mgl64.Vec3) float64 {
				return math.Sqrt(n[0]*n[0]*half[0]*half[0] + n[1]*n[1]*half[1]*half[1] + n[2]*n[2]*half[2]*half[2])
			}})
		}
	case "cylinder":
		radius, half := ref.SizeMM[0]/2, ref.SizeMM[1]/2
		for axis := 2; axis >= 0; axis-- {
			all = append(all, position{drumWays(axis), func(n mgl64.Vec3) float64 {
				along := math.Abs(n[axis])
				return half*along + radius*math.Sqrt(math.Max(0, 1-along*along))
			}})
		}
	}
	return all
}

func sixWays() []mgl64.Vec3 {
	return []mgl64.Vec3{{1, 0, 0}, {-1, 0, 0}, {0, 1, 0}, {0, -1, 0}, {0, 0, 1}, {0, 0, -1}}
}

// drumWays returns 32 directions round an axis and both ends.
func drumWays(axis int) []mgl64.Vec3 {
	const sides = 32
	var all []mgl64.Vec3
	for i := range sides {
		sin, cos := math.Sincos(2 * math.Pi * float64(i) / sides)
		var n mgl64.Vec3
		n[(axis+1)%3], n[(axis+2)%3] = cos, sin
		all = append(all, n)
	}
	var end mgl64.Vec3
	end[axis] = 1
	return append(all, end, end.Mul(-1))
}

// roundWays returns directions all over the sphere.
func roundWays() []mgl64.Vec3 {
	const belts, sides = 8, 24
	all := []mgl64.Vec3{{0, 0, 1}, {0, 0, -1}}
	for b := 1; b < belts; b++ {
		z, r := math.Cos(math.Pi*float64(b)/belts), math.Sin(math.Pi*float64(b)/belts)
		for i := range sides {
			sin, cos := math.Sincos(2 * math.Pi * float64(i) / sides)
			all = append(all, mgl64.Vec3{r * cos, r * sin, z}.Normalize())
		}
	}
	return all
}

// holds reports whether every corner of the stone lies in the piece.
func holds(piece, stone *facets.Stone) bool {
	const slack = 1e-9 // mm, for a rough as large as the stone
	for i := range piece.Facets {
		f := &piece.Facets[i]
		for _, c := range stone.Corners {
			if f.Normal.Dot(c) > f.Distance+slack {
				return false
			}
		}
	}
	return true
}

// middleOf returns the middle and the extents of the stone's box.
func middleOf(s *facets.Stone) (middle, extent mgl64.Vec3) {
	low, high := s.Corners[0], s.Corners[0]
	for _, c := range s.Corners {
		for k := range c {
			low[k], high[k] = min(low[k], c[k]), max(high[k], c[k])
		}
	}
	return low.Add(high).Mul(0.5), high.Sub(low)
}
