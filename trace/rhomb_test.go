package trace

import (
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// fresnelRhomb is a block in which light that enters an end at right angles meets two
// parallel faces at the angle of incidence, one after the other, and leaves the other end
// at right angles. along is the direction of that light.
func fresnelRhomb(t *testing.T, incidence facets.Angle) (s *facets.Stone, start, along mgl64.Vec3) {
	sin, cos := math.Sincos(incidence.Radians())
	along = mgl64.Vec3{cos, 0, -sin}
	end := 2 * sin * sin / cos
	return solid(t, []facets.Plane{
		{Normal: mgl64.Vec3{1, 0, 0}, Distance: 1, Side: facets.Crown},
		{Normal: mgl64.Vec3{-1, 0, 0}, Distance: 1, Side: facets.Pavilion},
		{Normal: mgl64.Vec3{0, 1, 0}, Distance: 1, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, -1, 0}, Distance: 1, Side: facets.Girdle},
		{Normal: along, Distance: end, Side: facets.Pavilion},
		{Normal: along.Mul(-1), Distance: end, Side: facets.Table},
	}), mgl64.Vec3{0, 0.1, 2 * sin / cos}, along
}

// TestFresnelRhomb sends linearly polarised light, at 45 degrees to the plane of
// incidence, through two total reflections in the tracers' own beams: it comes out
// circularly polarised. Through two rhombs it comes out linear again, across.
func TestFresnelRhomb(t *testing.T) {
	const n = 1.51
	const source = "Fresnel's rhomb of index 1.51: Born & Wolf 1.5.4, angles from memory, equation (60) reproduces them"
	// The angles are printed to half a minute, the retardance to as much.
	const printed = 1e-3
	for _, row := range []struct {
		name      string
		incidence facets.Angle
	}{{"54°37.4'", (54 + 37.4/60) * facets.Degree}, {"48°37.5'", (48 + 37.5/60) * facets.Degree}} {
		s, start, along := fresnelRhomb(t, row.incidence)
		b, err := newBody(s)
		if err != nil {
			t.Fatal(err)
		}
		linear := beam{i: 1, u: 1, a: vec{0, 1, 0}} // half along y, across the plane of incidence
		linear.b = fromMgl(along).cross(linear.a)
		for form, reflect := range map[string]func(l *beam, k int, d vec){
			"plain": func(l *beam, k int, d vec) {
				l.reflect(Fresnel(n, 1, d.dot(b.normal[k])), b.normal[k])
			},
			"general": func(l *beam, k int, d vec) {
				c := plainCrossing(n, 1, d.dot(b.normal[k]))
				*l, _ = l.meet(&c, d, b.normal[k], vec{})
			},
		} {
			through := func(l beam) beam {
				x, d := b.relative(start), fromMgl(along)
				for bounce, want := range []int{0, 1} {
					k, step := b.exit(x, d)
					if k != want {
						t.Fatalf("%s: bounce %d is on face %d", row.name, bounce, k)
					}
					x = x.plus(step, d)
					reflect(&l, k, d)
					d = d.plus(-2*d.dot(b.normal[k]), b.normal[k])
				}
				if k, _ := b.exit(x, d); k != 4 {
					t.Fatalf("%s: the light leaves by face %d", row.name, k)
				}
				return l
			}
			one := through(linear)
			near(t, form+": I", one.i, 1, 1e-14, "total reflection")
			near(t, form+": |V| behind one rhomb", math.Abs(one.v), 1, printed, source)
			near(t, form+": linear part behind one rhomb", math.Hypot(one.q, one.u), 0, printed, source)
			two := through(one)
			near(t, form+": U behind two rhombs", two.u*sign(two.a.dot(linear.a)*two.b.dot(linear.b)), -1,
				printed, source+": a half-wave plate turns it across")
			near(t, form+": V behind two rhombs", two.v, 0, 2*printed, source)
		}
	}
}

func sign(x float64) float64 { return math.Copysign(1, x) }
