package gems

import (
	"fmt"
	"math"
	"strconv"

	"github.com/go-gl/mathgl/mgl64"
)

// Colour is an sRGB colour (IEC 61966-2-1) as screens show it, each part from 0 to 1.
type Colour struct{ R, G, B float64 }

// ParseColour reads a colour written as #rrggbb.
func ParseColour(s string) (Colour, error) {
	if len(s) == 7 && s[0] == '#' {
		if v, err := strconv.ParseUint(s[1:], 16, 32); err == nil {
			return Colour{float64(v>>16) / 255, float64(v>>8&255) / 255, float64(v&255) / 255}, nil
		}
	}
	return Colour{}, fmt.Errorf("colour %q is not of the form #rrggbb; write for instance #2a7f5e", s)
}

// String returns the colour as #rrggbb, rounded.
func (c Colour) String() string {
	b := func(v float64) int { return int(math.Round(255 * min(max(v, 0), 1))) }
	return fmt.Sprintf("#%02x%02x%02x", b(c.R), b(c.G), b(c.B))
}

// ColouredBody returns the absorption of a material through whose thickness in mm
// daylight (D65) takes the given colours, one for the ordinary and one for the
// extraordinary ray; an isotropic material takes the ordinary one. Reflections at
// the surfaces are not part of it. Many spectra have the same colour; this is a smooth
// one, and it is no measurement: under other lights the real stone may look otherwise.
//
// Source of the spectrum's form: W. Jakob and J. Hanika, Comput. Graph. Forum 38(2),
// 147 (2019).
func ColouredBody(ordinary, extraordinary Colour, thickness float64) (*Absorption, error) {
	name := fmt.Sprintf("%v along the ordinary and %v along the extraordinary ray", ordinary, extraordinary)
	if ordinary == extraordinary {
		name = ordinary.String()
	}
	curves, a, err := smoothCurves(name, thickness, ordinary, extraordinary)
	if err != nil {
		return nil, err
	}
	a.Ordinary, a.Extraordinary = curves[0], curves[1]
	return a, nil
}

// ThreeColouredBody is ColouredBody for a biaxial material: daylight takes the given
// colours where it vibrates along alpha, beta and gamma.
func ThreeColouredBody(alpha, beta, gamma Colour, thickness float64) (*Absorption, error) {
	name := fmt.Sprintf("%v along alpha, %v along beta and %v along gamma", alpha, beta, gamma)
	curves, a, err := smoothCurves(name, thickness, alpha, beta, gamma)
	if err != nil {
		return nil, err
	}
	a.Ordinary, a.Beta, a.Extraordinary = curves[0], curves[1], curves[2]
	return a, nil
}

// smoothCurves returns smooth curves of absorption per mm that make colours through a
// thickness, at the wavelengths of the absorption that they are for.
func smoothCurves(name string, thickness float64, colours ...Colour) (curves [][]float64, a *Absorption, err error) {
	if !(thickness > 0) || math.IsInf(thickness, 0) {
		return nil, nil, fmt.Errorf("thickness %g mm of a colour: not possible; use the millimetres of material "+
			"through which it was seen", thickness)
	}
	a = &Absorption{
		Name:   fmt.Sprintf("%s through %g mm", name, thickness),
		Source: "smooth spectrum through colours that a user gave (Jakob and Hanika 2019); computed",
	}
	for w := visibleLo; w <= visibleHi; w += sightStep {
		a.Wavelengths = append(a.Wavelengths, w)
	}
	sight := newSight()
	for _, c := range colours {
		transmittance := sight.smoothTransmittance(c)
		var curve []float64
		for _, w := range a.Wavelengths {
			curve = append(curve, -math.Log(transmittance.at(w))/thickness)
		}
		curves = append(curves, curve)
	}
	return curves, a, nil
}

// sigmoid is the smooth spectrum S(c0 t² + c1 t + c2) with S(x) = ½ + x/(2√(1+x²)),
// where t runs from −1 at 400 nm to 1 at 700 nm. Nil is clear: 1 everywhere.
type sigmoid []float64

// leastTransmittance keeps the logarithm finite: darker than this is black to any eye.
const leastTransmittance = 1e-6

func (c sigmoid) at(w Wavelength) float64 {
	if c == nil {
		return 1
	}
	t := float64((2*w - visibleLo - visibleHi) / (visibleHi - visibleLo))
	x := (c[0]*t+c[1])*t + c[2]
	return max(0.5+x/(2*math.Sqrt(1+x*x)), leastTransmittance)
}

// Linear parts of a colour are kept this far from 0 and 1, which the sigmoid only
// reaches at infinity. Near black 0.0002 of linear light is less than a step of 255.
const colourMargin = 0.0002

// sight holds the share of every wavelength in the linear sRGB of daylight behind a
// body, such that a clear body is (1, 1, 1).
type sight []mgl64.Vec3

// sightStep is the spacing of the spectrum in nm; the steep flanks of saturated colours
// need a finer one than the observer's table has.
const sightStep = 1

func newSight() sight {
	// Rows of the matrix of IEC 61966-2-1, from memory; its white is D65.
	m := mgl64.Mat3FromRows(
		mgl64.Vec3{3.2406, -1.5372, -0.4986},
		mgl64.Vec3{-0.9689, 1.8758, 0.0415},
		mgl64.Vec3{0.0557, -0.2040, 1.0570},
	)
	var s sight
	var white mgl64.Vec3
	for w := visibleLo; w <= visibleHi; w += sightStep {
		row := observerAt(w)
		share := m.Mul3x1(mgl64.Vec3{row.x, row.y, row.z}.Mul(row.d65))
		s = append(s, share)
		white = white.Add(share)
	}
	for i, share := range s {
		s[i] = mgl64.Vec3{share[0] / white[0], share[1] / white[1], share[2] / white[2]}
	}
	return s
}

// colour returns the linear sRGB of daylight behind the spectrum.
func (s sight) colour(t sigmoid) mgl64.Vec3 {
	var sum mgl64.Vec3
	for i, share := range s {
		sum = sum.Add(share.Mul(t.at(visibleLo + sightStep*Wavelength(i))))
	}
	return sum
}

// smoothTransmittance returns the sigmoid whose colour in daylight is c.
//
// It walks from grey to the colour in even steps and mends the three coefficients
// after each by damped Gauss-Newton steps (Levenberg 1944, Marquardt 1963): Newton
// from afar would run into the flat ends of the sigmoid.
func (s sight) smoothTransmittance(c Colour) sigmoid {
	if min(c.R, c.G, c.B) >= 1 {
		return nil
	}
	want := mgl64.Vec3{linear(c.R), linear(c.G), linear(c.B)}
	for i, v := range want {
		want[i] = min(max(v, colourMargin), 1-colourMargin)
	}
	grey := (want[0] + want[1] + want[2]) / 3
	from := mgl64.Vec3{grey, grey, grey}
	x := 2*grey - 1
	c2 := x / math.Sqrt(1-x*x) // S(c2) = grey
	coefficients := mgl64.Vec3{0, 0, c2}
	const steps, mendings = 16, 40
	for i := 1; i <= steps; i++ {
		target := from.Add(want.Sub(from).Mul(float64(i) / steps))
		for range mendings {
			if !s.mend(&coefficients, target) {
				break
			}
		}
	}
	return coefficients[:]
}

// mend takes one damped Gauss-Newton step of the coefficients towards the target and
// reports whether it was worth taking.
func (s sight) mend(c *mgl64.Vec3, target mgl64.Vec3) bool {
	const (
		closeEnough = 1e-12 // squared distance in linear light
		nudge       = 1e-6
	)
	miss := func(c mgl64.Vec3) mgl64.Vec3 { return s.colour(c[:]).Sub(target) }
	r := miss(*c)
	if r.Dot(r) < closeEnough {
		return false
	}
	var columns [3]mgl64.Vec3
	for k := range columns {
		d := *c
		d[k] += nudge
		columns[k] = miss(d).Sub(r).Mul(1 / nudge)
	}
	jacobian := mgl64.Mat3FromCols(columns[0], columns[1], columns[2])
	normal, gradient := jacobian.Transpose().Mul3(jacobian), jacobian.Transpose().Mul3x1(r)
	for damping := 1e-9; damping < 10; damping *= 10 {
		damped := normal
		for k := range 3 {
			damped[4*k] += damping * (normal[4*k] + 1e-12)
		}
		next := c.Sub(damped.Inv().Mul3x1(gradient))
		if n := miss(next); n.Dot(n) < r.Dot(r) {
			*c = next
			return true
		}
	}
	return false
}

// linear undoes the transfer curve of IEC 61966-2-1.
func linear(v float64) float64 {
	if v <= 0.04045 {
		return v / 12.92
	}
	return math.Pow((v+0.055)/1.055, 2.4)
}
