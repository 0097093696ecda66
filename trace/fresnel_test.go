package trace

import (
	"math"
	"testing"

	"gonum.org/v1/gonum/integrate/quad"

	"pavilight/facets"
)

const bornWolf = "Born & Wolf, Principles of Optics, section 1.5"

func TestFresnel(t *testing.T) {
	// Six printed digits: half a unit of the last.
	const digits = 6e-7
	const source = "closed form of Fresnel's equations, worked out apart from this code"
	for _, row := range []struct {
		name           string
		n1, n2, degree float64
		rs, rp         float64
	}{
		{"air to 1.5 at 30", 1, 1.5, 30, 0.057796, 0.025249},
		{"air to 1.5 at 45", 1, 1.5, 45, 0.092013, 0.008466},
		{"air to 1.5 at 60", 1, 1.5, 60, 0.176571, 0.001802},
		{"air to 1.5 at 85", 1, 1.5, 85, 0.732345, 0.493254},
		{"air to diamond at 45", 1, 2.41726, 45, 0.282498, 0.079805},
		{"air to diamond at 75", 1, 2.41726, 75, 0.625409, 0.035613},
		{"inside 1.5 at 20", 1.5, 1, 20, 0.059063, 0.024394},
		{"inside 1.5 at 0.99 C", 1.5, 1, 41.3922, 0.633921, 0.351939},
		{"inside diamond at 10", 2.41726, 1, 10, 0.200648, 0.144698},
		{"inside diamond at 20", 2.41726, 1, 20, 0.363602, 0.033387},
		{"inside diamond at 28 in air", 2.41726, 1, 28, 1, 1},
	} {
		tolerance := digits
		if row.degree == 41.3922 {
			tolerance = 3e-5 // the angle itself is printed to 4 digits, near the critical angle
		}
		r := Fresnel(row.n1, row.n2, math.Cos(row.degree*math.Pi/180))
		near(t, row.name+" Rs", r.Rs, row.rs, tolerance, source)
		near(t, row.name+" Rp", r.Rp, row.rp, tolerance, source)
	}
	near(t, "diamond at normal incidence", Fresnel(1, 2.41726, 1).Mean(), 0.17201, 5e-6,
		"((n-1)/(n+1))^2 with n_D of F. Peter, Z. Phys. 15 (1923) 358")
}

func TestFresnelLaws(t *testing.T) {
	for _, n := range []float64{1.333, 1.5, 1.768, 2.417} {
		for degree := 0.5; degree < 90; degree++ {
			cosI := math.Cos(degree * math.Pi / 180)
			out := Fresnel(1, n, cosI)
			back := Fresnel(n, 1, out.CosT)
			near(t, "the same from both sides: Rs", back.Rs, out.Rs, 1e-12, "reversibility of light, Stokes 1849")
			near(t, "the same from both sides: Rp", back.Rp, out.Rp, 1e-12, "reversibility of light, Stokes 1849")
			near(t, "Snell's law", math.Sqrt(1-out.CosT*out.CosT)*n, math.Sqrt(1-cosI*cosI), 1e-12, "Snell's law")
		}
		r45 := Fresnel(1, n, math.Sqrt2/2)
		near(t, "Rp(45) = Rs(45)^2", r45.Rp, r45.Rs*r45.Rs, 1e-14, "identity of Fresnel's equations")
		near(t, "Rp at Brewster's angle", Fresnel(1, n, math.Cos(Brewster(1, n).Radians())).Rp, 0, 1e-28, bornWolf+".3")
		near(t, "equal indices", Fresnel(n, n, 0.3).Mean(), 0, 1e-30, "no interface, no reflection")
	}
	near(t, "Brewster's angle of 1.5", Brewster(1, 1.5).Degrees(), 56.310, 5e-4, "tan B = n")
}

func TestCriticalAngle(t *testing.T) {
	const common = "common practice, no source"
	for _, row := range []struct {
		name             string
		n1, n2           float64
		degree, accuracy float64
		source           string
	}{
		{"diamond in air", 2.41726, 1, 24.4, 0.05, common},
		{"diamond in air", 2.4176, 1, 24 + 26.0/60, 0.5 / 60, "Tolkowsky, Diamond Design (1919): 24 deg 26 min"},
		{"crown glass in air", 1.52, 1, 42, 1, common},
		{"diamond in water, measured indices", 2.41726, 1.33335, 33.48, 0.005, "Peter 1923, and IAPWS R9-97, worked out"},
		{"diamond in water, rounded indices", 2.42, 1.33, 33.3, 0.05, "arithmetic of the rounded 1.33 and 2.42 only"},
		{"corundum in water", 1.76808, 1.33335, 48.949, 5e-4, "Malitson & Dodge 1972, and IAPWS R9-97, worked out"},
	} {
		c, ok := CriticalAngle(row.n1, row.n2)
		if !ok {
			t.Errorf("%s: no critical angle", row.name)
		}
		near(t, row.name, c.Degrees(), row.degree, row.accuracy, row.source)
	}
	for _, n := range [][2]float64{{1, 1.5}, {1.333, 2.417}, {1.5, 1.5}} {
		if c, ok := CriticalAngle(n[0], n[1]); ok {
			t.Errorf("from %v into %v there is no critical angle, got %v", n[0], n[1], c)
		}
	}

	// Light inside diamond at 28 degrees (common practice, no source).
	cos28 := math.Cos(28 * math.Pi / 180)
	if !Fresnel(2.417, 1, cos28).Total {
		t.Error("light inside diamond at 28° must be totally reflected in air")
	}
	if Fresnel(2.417, 1.333, cos28).Total {
		t.Error("light inside diamond at 28° must not be totally reflected in water")
	}
}

func TestRetardanceOfTotalReflection(t *testing.T) {
	delta := func(n float64, a facets.Angle) float64 {
		r := Fresnel(n, 1, math.Cos(a.Radians()))
		return math.Atan2(r.Apart, r.InStep) * 180 / math.Pi
	}
	const minute = 1.0 / 60
	// One of Fresnel's rhombs: two reflections of 45 degrees each.
	near(t, "n 1.51 at 48°37.5'", delta(1.51, (48+37.5*minute)*facets.Degree), 45, 0.01, bornWolf+".4; angles from memory, equation (60) reproduces them")
	near(t, "n 1.51 at 54°37.4'", delta(1.51, (54+37.4*minute)*facets.Degree), 45, 0.01, bornWolf+".4; angles from memory, equation (60) reproduces them")
	most := 0.0
	for a := 41.5; a < 90; a += 0.001 {
		most = max(most, delta(1.51, facets.Angle(a)*facets.Degree))
	}
	near(t, "greatest at n 1.51", most, 45+56*minute, minute, bornWolf+".4: 45 deg 56 min, from memory")
	near(t, "n 2.417 at 45", delta(2.417, 45*facets.Degree), 78.081, 5e-4, "equation (60), worked out apart")
	near(t, "n 1.5 at 45", delta(1.5, 45*facets.Degree), 36.870, 5e-4, "equation (60), worked out apart: 2 atan(1/3)")
}

// TestDiffuseReflectance integrates over all directions of a half space: the
// strongest single check of the reflectances.
func TestDiffuseReflectance(t *testing.T) {
	const source = "closed form of Walsh 1926 and Judd 1942, from memory, confirmed by quadrature elsewhere"
	for _, row := range []struct{ n, outside, inside float64 }{
		{1.333, 0.066406, 0.474591},
		{1.5, 0.091778, 0.596346},
		{1.76808, 0.129705, 0.721604},
		{2.41726, 0.212218, 0.865178},
	} {
		// Cosine-weighted: integral of R(c) 2c dc over c from 0 to 1. Inside, the
		// part beyond the critical angle is 1 exactly and the rest runs from there.
		mean := func(n1, n2, from float64) float64 {
			return quad.Fixed(func(s float64) float64 {
				c := from + (1-from)*s*s // s squared: the slope is infinite at the critical angle
				return Fresnel(n1, n2, c).Mean() * 2 * c * (1 - from) * 2 * s
			}, 0, 1, 400, nil, 0)
		}
		near(t, "outside", mean(1, row.n, 0), row.outside, 2e-6, source)
		cosC := math.Sqrt(1 - 1/(row.n*row.n))
		near(t, "inside", mean(row.n, 1, cosC)+cosC*cosC, row.inside, 2e-6, source)
	}
}
