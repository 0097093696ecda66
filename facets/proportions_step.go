package facets

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// stepPlanes builds the planes of a step cut, for a width of 1.
//
// Seen from above every step is a frame of equal width: the table's margin is
// divided evenly among the crown steps, the half width among the pavilion's.
// A cut corner keeps its share of the frame as the frame shrinks, so that it
// ends in the keel's end below; its facets are flatter for that, at the same heights.
func (p *Proportions) stepPlanes() ([]Plane, *Fault) {
	const half = 0.5
	long := half * p.value("ratio").Mean
	cut := p.value("corner").Mean / 100
	steps := int(p.value("steps").Mean)
	fan := p.value("fan").Mean

	type side struct {
		faces mgl64.Vec2
		reach float64
		rate  float64 // inset for an inset of 1 on the straight sides
	}
	var sides []side
	for i := range 8 {
		sin, cos := math.Sincos(float64(i) * math.Pi / 4)
		s := side{mgl64.Vec2{cos, sin}, half, 1}
		switch {
		case i%4 == 0:
			s.faces, s.reach = mgl64.Vec2{math.Round(cos), 0}, long
		case i%2 == 0:
			s.faces = mgl64.Vec2{0, math.Round(sin)}
		case cut == 0:
			continue
		default:
			// The cut leg is in proportion to half - inset.
			s.reach = (long + half - cut) / math.Sqrt2
			s.rate = (2 - cut/half) / math.Sqrt2
		}
		sides = append(sides, s)
	}
	azimuths := make([]float64, len(sides))
	for i, s := range sides {
		azimuths[i] = math.Atan2(s.faces[1], s.faces[0])
	}
	values := map[string][]float64{}
	for _, name := range []string{"table", "crown", "pavilion", "girdle"} {
		v, f := p.round(name, azimuths)
		if f != nil {
			return nil, f
		}
		values[name] = v
	}
	// Angle of step j from the girdle, in degrees.
	crownAngle := func(i, j int) float64 { return values["crown"][i] + fan*(float64(steps-1)/2-float64(j)) }
	pavilionAngle := func(i, j int) float64 { return values["pavilion"][i] + fan*float64(steps-1-j) }
	for i := range sides {
		for _, a := range []float64{crownAngle(i, 0), crownAngle(i, steps-1), pavilionAngle(i, 0)} {
			if a <= 1 || a >= 85 {
				return nil, &Fault{File: "proportions", Field: "fan", Got: fmt.Sprint(fan),
					Why:    fmt.Sprintf("a step would stand at %.1f degrees", a),
					Remedy: "use fewer steps or a smaller fan: every step must lie between 1 and 85 degrees"}
			}
		}
	}
	tan := func(degrees float64) float64 { return math.Tan(degrees * math.Pi / 180) }

	rise := make([]float64, len(sides))
	meanRise, meanGirdle := 0.0, 0.0
	for i := range sides {
		for j := range steps {
			rise[i] += (1 - values["table"][i]/100) * half / float64(steps) * tan(crownAngle(i, j))
		}
		meanRise += rise[i] / float64(len(sides))
		meanGirdle += values["girdle"][i] / 100 / float64(len(sides))
	}
	tableHeight := meanGirdle/2 + meanRise
	culet := p.value("culet").Mean / 100
	planes := []Plane{{Tier: tierTable, Index: math.NaN(), Side: Table, Normal: mgl64.Vec3{0, 0, 1},
		Distance: tableHeight}}
	deepest := -meanGirdle / 2
	for i, s := range sides {
		// at is the point of the side's own middle line at an inset and a height.
		at := func(inset, z float64) mgl64.Vec3 { return s.faces.Mul(s.reach - s.rate*inset).Vec3(z) }
		z := tableHeight - rise[i]
		width := (1 - values["table"][i]/100) * half / float64(steps)
		for j := range steps {
			planes = append(planes, leaning(stepTier("crown", j), Crown, s.faces, tan(crownAngle(i, j))/s.rate,
				at(float64(j)*width, z)))
			z += width * tan(crownAngle(i, j))
		}
		z = tableHeight - rise[i] - values["girdle"][i]/100
		width = half / float64(steps)
		for j := range steps {
			planes = append(planes, leaning(stepTier("pavilion", j), Pavilion, s.faces, tan(pavilionAngle(i,
				j))/s.rate, at(float64(j)*width, z)))
			z -= width * tan(pavilionAngle(i, j))
			// The culet lies where the frame has shrunk to its width.
			inset := min(width, max(0, (1-culet)*half-float64(j)*width))
			deepest -= inset * tan(pavilionAngle(i, j)) / float64(len(sides))
		}
		if meanGirdle > 0 {
			n := s.faces.Vec3(0)
			planes = append(planes, Plane{Tier: tierGirdle, Index: indexOf(n), Side: Girdle, Normal: n,
				Distance: s.reach})
		}
	}
	if culet > 0 {
		planes = append(planes, Plane{Tier: tierCulet, Index: math.NaN(), Side: Pavilion,
			Normal: mgl64.Vec3{0, 0, -1}, Distance: -deepest})
	}
	return planes, nil
}

// stepTier names a step, counted from the girdle.
func stepTier(side string, j int) string { return fmt.Sprintf("%s step %d", side, j+1) }
