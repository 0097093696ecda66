package trace

import (
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"
)

func TestFilmOfNothing(t *testing.T) {
	for _, cosI := range []float64{1, 0.9, 0.7, 0.3, 0.05} {
		for _, f := range []Film{{Index: 1.4}, {Index: 1.62, Thickness: 800}, {Index: 1, Thickness: 300},
			{Index: 1.62, Thickness: 9000}, {Index: 1, Thickness: 9000}} {
			plain := plainCrossing(1.62, 1, cosI)
			c := filmCrossing(1.62, f, 1, cosI, 550)
			near(t, "Rs", c.rs, plain.rs, 1e-12, "no thickness, or a film of the stone or of the air: no film")
			near(t, "Rp", c.rp, plain.rp, 1e-12, "the same")
			near(t, "Ts", c.ts, plain.ts, 1e-12, "the same")
			near(t, "Tp", c.tp, plain.tp, 1e-12, "the same")
			near(t, "cosT", c.cosT, plain.cosT, 1e-12, "Snell's law knows no film")
			// A thick film's path adds a phase that is the same for s and p, so the two
			// still keep together.
			near(t, "rs rp*", real(c.rr), real(plain.rr), 1e-12, "the same")
			near(t, "ts tp*", real(c.tt), real(plain.tt), 1e-12, "the same")
		}
	}
}

func TestClearFilmKeepsAllLight(t *testing.T) {
	for _, d := range []float64{20, 137, 900, 4999, 5001, 1e5} {
		for degree := 1.0; degree < 90; degree += 4 {
			for _, f := range []float64{1.33, 1.48, 1.9} {
				c := filmCrossing(1.77, Film{Index: f, Thickness: d}, 1, math.Cos(degree*math.Pi/180), 589)
				near(t, "s", c.rs+c.ts, 1, 1e-10, "a clear film absorbs nothing")
				near(t, "p", c.rp+c.tp, 1, 1e-10, "a clear film absorbs nothing")
			}
		}
	}
}

func TestThickFilm(t *testing.T) {
	const n1, nf, n2 = 1.77, 1.48, 1.0
	for degree := 0.0; degree < 90; degree += 3 {
		cosI := math.Cos(degree * math.Pi / 180)
		c := filmCrossing(n1, Film{Index: nf, Thickness: 2e4}, n2, cosI, 589)
		first := Fresnel(n1, nf, cosI)
		if first.Total {
			near(t, "beyond the film's own critical angle", c.rs, 1, 1e-12, "total reflection")
			continue
		}
		second := Fresnel(nf, n2, first.CosT)
		sum := func(r1, r2 float64) float64 { return r1 + (1-r1)*(1-r1)*r2/(1-r1*r2) }
		near(t, "Rs", c.rs, sum(first.Rs, second.Rs), 1e-12, "R1 + T1^2 R2/(1 - R1 R2)")
		near(t, "Rp", c.rp, sum(first.Rp, second.Rp), 1e-12, "R1 + T1^2 R2/(1 - R1 R2)")
		if critical, _ := CriticalAngle(n1, n2); degree > critical.Degrees() {
			near(t, "an oil film keeps the critical angle", c.rs, 1, 1e-12, "Snell's law through parallel layers")
		} else if degree > 0 && c.rs >= 1-1e-9 {
			t.Errorf("%v degrees: total reflection inside the critical angle", degree)
		}
	}
}

func TestThinFilm(t *testing.T) {
	const n = 1.77
	quarter := Film{Index: math.Sqrt(n), Thickness: 137.5 / math.Sqrt(n)}
	near(t, "quarter wave of index sqrt(n)", filmCrossing(n, quarter, 1, 1, 550).rs, 0, 1e-28, "Born & Wolf 1.6.4")
	half := Film{Index: 1.38, Thickness: 275 / 1.38}
	near(t, "half wave", filmCrossing(n, half, 1, 1, 550).rs, math.Pow((n-1)/(n+1), 2), 1e-12, "Born & Wolf 1.6.4: as if it were not there")

	// Frustrated total reflection through a gap of air between equal media.
	for _, d := range []float64{50, 200, 600} {
		for _, degree := range []float64{38, 45, 60} {
			sin, cos := math.Sincos(degree * math.Pi / 180)
			kappa := 2 * math.Pi / 550 * math.Sqrt(n*n*sin*sin-1)
			sh := math.Pow(math.Sinh(kappa*d), 2)
			a := (n*n - 1) * (n*n - 1) / (4 * n * n * cos * cos * (n*n*sin*sin - 1))
			b := a * math.Pow((n*n+1)*sin*sin-1, 2)
			c := filmCrossing(n, Film{Index: 1, Thickness: d}, n, cos, 550)
			const source = "closed form of Hall 1902 and Zhu, Yu, Hawley & Roy, Am. J. Phys. 54 (1986) 601; formula from memory"
			near(t, "s through the gap", c.ts, 1/(1+a*sh), 1e-12, source)
			near(t, "p through the gap", c.tp, 1/(1+b*sh), 1e-12, source)
		}
	}
}

func TestAbsorbingFilmDulls(t *testing.T) {
	// Dirt on the pavilion takes light even beyond the critical angle.
	for _, d := range []float64{300, 20000} {
		c := filmCrossing(1.77, Film{Index: 1.6, Extinction: 0.05, Thickness: d}, 1, math.Cos(45*math.Pi/180), 550)
		if !(c.rs < 0.9 && c.rp < 0.9 && c.ts == 0 && c.tp == 0) {
			t.Errorf("thickness %v: %+v: light at 45° must be dulled, and none go through", d, c)
		}
	}
}

// TestMeetAgainstFields splits beams in all states of polarisation at a facet and compares
// them, as matrices of means of products of their fields, with fields split on paper.
func TestMeetAgainstFields(t *testing.T) {
	const source = "Fresnel's equations for fields, Born & Wolf 1.5.2 (20), (21)"
	rng := rand.New(rand.NewPCG(2, 8))
	for range 2000 {
		n1, n2 := 1+1.5*rng.Float64(), 1+1.5*rng.Float64()
		d, v := unit(rng), unit(rng)
		cosI := d.dot(v)
		if cosI < 0 {
			v, cosI = v.scale(-1), -cosI
		}
		l := polarised(rng, d)
		// A fully polarised beam is one field.
		ea := complex(math.Sqrt(max(0, (1+l.q)/2)), 0)
		eb := complex(l.u, -l.v) / (2 * ea)
		e := along(l.a.mgl(), ea).plus(along(l.b.mgl(), eb))
		back, _, out, inside := meet([]field{e}, d.mgl(), v.mgl(), n1, n2)
		c := plainCrossing(n1, n2, cosI)
		reflected, through := l.meet(&c, d, v, fromMgl(out))
		near(t, "reflected", apart(reflected, back), 0, 1e-9, source)
		near(t, "gone through", apart(through, inside), 0, 1e-9, source)
	}
}

// apart is the greatest difference between the matrices of a beam and of fields.
func apart(l beam, es []field) (most float64) {
	a, b := along(l.a.mgl(), 1), along(l.b.mgl(), 1)
	aa, bb, ab := complex((l.i+l.q)/2, 0), complex((l.i-l.q)/2, 0), complex(l.u/2, l.v/2)
	for i := range 3 {
		for j := range 3 {
			m := aa*a[i]*a[j] + bb*b[i]*b[j] + ab*a[i]*b[j] + cmplx.Conj(ab)*b[i]*a[j]
			for _, e := range es {
				m -= e[i] * cmplx.Conj(e[j])
			}
			most = max(most, cmplx.Abs(m))
		}
	}
	return most
}
