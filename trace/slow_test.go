package trace

import (
	"iter"
	"maps"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"path/filepath"
	"slices"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// slow follows a viewing ray as one would write it on paper: every facet is asked
// for the nearest exit, the ray splits by recursion, and polarisation is carried as
// two electric fields, three complex numbers each in the stone's frame, that begin
// in two directions across the ray. Nothing is shared with the fast tracer.
type slow struct {
	planes   []facets.Facet
	n, m     float64
	eye      mgl64.Vec3
	headCos  float64
	averaged bool
	ledger   Ledger
}

// field is an electric field, mean square 1/2 at the eye.
type field [3]complex128

func (e field) along(v mgl64.Vec3) complex128 {
	return e[0]*complex(v[0], 0) + e[1]*complex(v[1], 0) + e[2]*complex(v[2], 0)
}

func along(v mgl64.Vec3, a complex128) field {
	return field{a * complex(v[0], 0), a * complex(v[1], 0), a * complex(v[2], 0)}
}

func (e field) plus(o field) field { return field{e[0] + o[0], e[1] + o[1], e[2] + o[2]} }

func (e field) power() float64 {
	return real(e[0]*cmplx.Conj(e[0]) + e[1]*cmplx.Conj(e[1]) + e[2]*cmplx.Conj(e[2]))
}

// meet splits fields travelling along d at an interface with normal v along d, from
// index n1 to n2: amplitudes by Fresnel's equations, Born & Wolf 1.5.2 (20), (21),
// with complex cosines. It returns the reflected fields, the share of power that
// goes through, and its direction.
func meet(es []field, d, v mgl64.Vec3, n1, n2 float64) (reflected []field, through float64, out mgl64.Vec3, inside []field) {
	cosI := d.Dot(v)
	cosT := cmplx.Sqrt(complex(1-(n1/n2)*(n1/n2)*(1-cosI*cosI), 0))
	s := d.Cross(v)
	if s.Len() < 1e-12 {
		s = d.Cross(mgl64.Vec3{0.3, 0.5, 0.8})
	}
	s = s.Normalize()
	mirrored := d.Sub(v.Mul(2 * cosI))
	p, pr := d.Cross(s), mirrored.Cross(s)
	c1, c2 := complex(n1*cosI, 0), complex(n2, 0)*cosT
	d1, d2 := complex(n2*cosI, 0), complex(n1, 0)*cosT
	rs, rp := (c1-c2)/(c1+c2), (d1-d2)/(d1+d2)
	ts, tp := 2*c1/(c1+c2), 2*c1/(d1+d2)
	total := imag(cosT) != 0 || cosT == 0
	if !total {
		out = d.Mul(n1 / n2).Add(v.Mul(real(cosT) - n1/n2*cosI))
	}
	pt := out.Cross(s)
	// Power that goes through: amplitude squared times n2 cosT / (n1 cosI).
	k := n2 * real(cosT) / (n1 * cosI)
	for _, e := range es {
		es, ep := e.along(s), e.along(p)
		reflected = append(reflected, along(s, rs*es).plus(along(pr, rp*ep)))
		if !total {
			through += k * (real(ts*es*cmplx.Conj(ts*es)) + real(tp*ep*cmplx.Conj(tp*ep)))
			root := complex(math.Sqrt(k), 0)
			inside = append(inside, along(s, root*ts*es).plus(along(pt, root*tp*ep)))
		}
	}
	return reflected, through, out, inside
}

// unpolarised returns two fields of equal power across d that sum to power.
func unpolarised(d mgl64.Vec3, power float64) []field {
	a := d.Cross(mgl64.Vec3{0.3, 0.5, 0.8}).Normalize()
	root := complex(math.Sqrt(power/2), 0)
	return []field{along(a, root), along(d.Cross(a), root)}
}

func power(es []field) (sum float64) {
	for _, e := range es {
		sum += e.power()
	}
	return sum
}

// enter sends one unit of viewing ray in through a facet at x.
func (o *slow) enter(facet int, x mgl64.Vec3) Ledger {
	d, v := o.eye.Mul(-1), o.planes[facet].Normal.Mul(-1)
	mirrored, _, in, es := meet(unpolarised(d, 1), d, v, o.m, o.n)
	o.ledger = Ledger{Surface: power(mirrored)}
	if len(es) > 0 {
		o.inside(facet, x, in, es, 0)
	}
	return o.ledger
}

func (o *slow) inside(from int, x, d mgl64.Vec3, es []field, depth int) {
	if power(es) < 1e-13 || depth == 3000 {
		o.ledger.Unresolved += power(es)
		return
	}
	if o.averaged {
		es = unpolarised(d, power(es))
	}
	exit, s := -1, math.Inf(1)
	for j, f := range o.planes {
		if slope := f.Normal.Dot(d); slope > 0 && j != from {
			if t := (f.Distance - f.Normal.Dot(x)) / slope; t < s {
				exit, s = j, t
			}
		}
	}
	x = x.Add(d.Mul(s))
	v := o.planes[exit].Normal
	es, through, out, _ := meet(es, d, v, o.n, o.m)
	switch up := out.Dot(o.eye); {
	case through == 0:
	case up <= 0:
		o.ledger.Leaked += through
	case up > o.headCos:
		o.ledger.Head += through
	default:
		o.ledger.Returned += through
	}
	o.inside(exit, x, d.Sub(v.Mul(2*d.Dot(v))), es, depth+1)
}

// stones returns the solids that the tracer is tried on: a sample plan of each kind of
// symmetry, two light guides and some random ones. TestLibraryLight traces all samples.
func stones(t testing.TB) map[string]*facets.Stone {
	t.Helper()
	all := map[string]*facets.Stone{}
	for _, name := range []string{"cushion", "oval", "prism", "rod", "round", "step", "triangle", "twist"} {
		f := "../testdata/plans/" + name + ".toml"
		p, err := facets.OpenPlan(f)
		if err != nil {
			t.Fatal(err)
		}
		s, err := p.Solve()
		if err != nil {
			t.Fatal(err)
		}
		all[filepath.Base(f)] = s
	}
	for _, n := range []int{6, 40, 150} {
		all["random "+string(rune('a'+n%26))] = randomStone(t, n, uint64(n))
	}
	return all
}

// each goes through stones in the order of their names.
func each(stones map[string]*facets.Stone) iter.Seq2[string, *facets.Stone] {
	return func(yield func(string, *facets.Stone) bool) {
		for _, name := range slices.Sorted(maps.Keys(stones)) {
			if !yield(name, stones[name]) {
				return
			}
		}
	}
}

// randomStone is the solid between n planes at random directions, all at about the
// same distance from the origin.
func randomStone(t testing.TB, n int, seed uint64) *facets.Stone {
	t.Helper()
	rng := rand.New(rand.NewPCG(seed, 1))
	planes := box(1.5, 1.5, 1.5)
	for range n {
		v := mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}.Normalize()
		side := facets.Crown
		if v[2] < 0 {
			side = facets.Pavilion
		}
		planes = append(planes, facets.Plane{Normal: v, Distance: 0.9 + 0.2*rng.Float64(), Side: side})
	}
	return solid(t, planes)
}

// box is the planes of a block with the given half edges.
func box(x, y, z float64) []facets.Plane {
	return []facets.Plane{
		{Normal: mgl64.Vec3{1, 0, 0}, Distance: x, Side: facets.Girdle},
		{Normal: mgl64.Vec3{-1, 0, 0}, Distance: x, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, 1, 0}, Distance: y, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, -1, 0}, Distance: y, Side: facets.Girdle},
		{Normal: mgl64.Vec3{0, 0, 1}, Distance: z, Side: facets.Table},
		{Normal: mgl64.Vec3{0, 0, -1}, Distance: z, Side: facets.Pavilion},
	}
}

func solid(t testing.TB, planes []facets.Plane) *facets.Stone {
	t.Helper()
	s, err := facets.FromPlanes("test solid", planes)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// TestAgainstSlow compares whole ledgers ray by ray, without the end-game, with and
// without polarisation.
func TestAgainstSlow(t *testing.T) {
	const tolerance = 1e-9
	rng := rand.New(rand.NewPCG(7, 7))
	for name, s := range each(stones(t)) {
		for _, averaged := range []bool{false, true} {
			for _, medium := range []float64{1, 1.333, 1.6} {
				view := View{Tilt: facets.Angle(rng.Float64()*40) * facets.Degree, Turn: facets.Angle(rng.Float64()*360) * facets.Degree}
				tr, err := newTracer(s, Settings{View: view, Head: 10 * facets.Degree})
				if err != nil {
					t.Fatal(err)
				}
				tr.faint, tr.averaged = 0, averaged
				_, _, eye := view.Axes()
				o := &slow{planes: s.Facets, n: 1.544, m: medium, eye: eye, headCos: math.Cos(10 * math.Pi / 180), averaged: averaged}
				for range 12 {
					facet, x, ok := tr.outline.enter((2*rng.Float64()-1)*tr.outline.half, (2*rng.Float64()-1)*tr.outline.half)
					if !ok {
						continue
					}
					var none sums
					got := tr.follow(facet, x, o.n, o.m, 0, &none)
					want := o.enter(facet, tr.body.place(x))
					for q := Surface; q < quantities; q++ {
						if d := math.Abs(q.Of(got) - q.Of(want)); !(d <= tolerance) {
							t.Fatalf("%s, medium %v, averaged %v, %v: %v differs by %g\nfast %+v\nslow %+v", name, medium, averaged, view, q, d, got, want)
						}
					}
					near(t, name+": sum of the ledger", got.Sum(), 1, tolerance, "light is neither made nor lost")
				}
			}
		}
	}
}
