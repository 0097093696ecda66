package trace

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// faintShare is the share of a viewing ray below which its path is not split any
// more: it takes the whole exit or the whole reflection, with probabilities T and
// R. That is unbiased and keeps the ledger's sum. What it adds to the noise of a ray is
// of the size of the share, well below what the place of the ray in its pixel does
// (TestFaintPathsAddNoNoise), and it halves the way.
//
// A light may be hundreds of times as bright in a few places as on the whole. There
// what is faint is seen, and faintInLight holds.
const (
	faintShare   = 1e-2
	faintInLight = 1e-4
)

// mostBounces ends a path that will not leave; what it carries is unresolved. A
// path that is totally reflected for ever must be ended, and only such a path
// comes near this number.
const mostBounces = 10000

// tracer follows viewing rays through one body as one eye sees it.
type tracer struct {
	body    *body
	outline *outline
	toEye   []float64 // cosine between each facet's normal and the eye's direction
	headCos float64   // light that leaves closer to the eye than this comes from the head
	faint   float64   // see faintShare; less where tests compare whole paths

	averaged bool    // the two polarisations are averaged at every facet
	light    *Light  // nil for the even light
	below    float64 // luminance of what lies below
	kernel   *kernel // the fast form; nil for float64 throughout
	near     bool    // the eye stands at eyeAt; else it is far away
	eyeAt    vec
	bins     angleBins
}

func newTracer(s *facets.Stone, settings Settings) (*tracer, error) {
	b, err := newBody(s)
	if err != nil {
		return nil, err
	}
	t := &tracer{body: b, headCos: 2, faint: faintShare, averaged: settings.Averaged, bins: newAngleBins(),
		light: settings.Light, below: settings.Below}
	if settings.Light != nil {
		t.faint = faintInLight
	}
	if settings.Head > 0 {
		t.headCos = math.Cos(settings.Head.Radians())
	}
	f := settings.View.frame()
	t.near = settings.Distance > 0
	t.eyeAt = f.eye.scale(settings.Distance/b.unit).plus(settings.Aside/b.unit, f.right)
	corners := make([]vec, len(s.Corners))
	for i, c := range s.Corners {
		corners[i] = b.relative(c)
		if t.near {
			// As seen from there, on the picture's plane through the stone's middle.
			rest := settings.Distance/b.unit - corners[i].dot(f.eye)
			if rest < 1 {
				return nil, &InvalidError{fmt.Errorf("the eye, %g mm away, is too close to the stone: choose more than %.0f mm", settings.Distance, 2*b.unit)}
			}
			corners[i] = t.eyeAt.plus(settings.Distance/b.unit/rest, corners[i].plus(-1, t.eyeAt))
		}
	}
	t.outline = newOutline(b, f, corners, settings.Square/b.unit)
	for _, n := range b.normal {
		t.toEye = append(t.toEye, n.dot(t.outline.eye))
	}
	return t, nil
}

// arrive returns where the viewing ray through (u, v) of the picture meets the stone,
// on which facet and along which direction; ok is false where it passes beside.
func (t *tracer) arrive(u, v float64) (facet int, x, d vec, ok bool) {
	o := t.outline
	if !t.near {
		facet, x, ok = o.enter(u, v)
		return facet, x, o.eye.scale(-1), ok
	}
	d = o.centre.plus(u, o.right).plus(v, o.up).plus(-1, t.eyeAt)
	d = d.scale(1 / d.length())
	facet, s, ok := t.body.entry(t.eyeAt, d)
	return facet, t.eyeAt.plus(s, d), d, ok
}

// follow sends one unit of viewing ray into the stone through a facet at x and
// returns its ledger. n is the index of the stone, m that of the medium, at the
// ray's wavelength. What is not in the ledger goes into sums: where returned
// light comes from, and the shares of area.
func (t *tracer) follow(facet int, x vec, n, m float64, d dice, sums *sums) (l Ledger) {
	b, eye := t.body, t.outline.eye

	// Split at the first surface.
	cosI := t.toEye[facet]
	at := Fresnel(m, n, cosI)
	l.Surface = at.Mean()
	t.litSurface(2*cosI*cosI-1, l.Surface, sums)
	if at.Total {
		return l
	}
	dir := refract(eye.scale(-1), b.normal[facet].scale(-1), m/n, cosI, at.CosT)
	light := enterBeam(at, dir, b.normal[facet])
	eta := n / m
	metPavilion := false

	for range mostBounces {
		// Go to the next facet.
		j, s := b.exit(x, dir)
		x = x.plus(s, dir)
		sums[segmentCount]++
		cosI := min(1, dir.dot(b.normal[j]))
		at := Fresnel(n, m, cosI)

		// Shed what goes through, or all or nothing of a faint path.
		all := light.i
		var through float64
		if t.averaged {
			through = light.average(at)
		} else {
			through = light.reflect(at, b.normal[j])
		}
		if all < t.faint && through > 0 {
			through = light.decide(all, through, d.roll())
		}

		// Put it down where it goes.
		leaked := false
		if through > 0 {
			up := eta*dir.dot(eye) + (at.CosT-eta*cosI)*t.toEye[j]
			switch t.goes(up) {
			case Leaked:
				l.Leaked += through
				leaked = true
			case Head:
				l.Head += through
			default:
				l.Returned += through
			}
			if !leaked {
				sums[firstFrom+t.bins.of(up)] += through
			}
		}
		if !metPavilion && b.side[j] == facets.Pavilion {
			metPavilion = true
			if leaked && through > 0.5 {
				sums[windowedArea]++
			}
		}
		if light.i <= 0 {
			break
		}
		dir = dir.plus(-2*cosI, b.normal[j])
	}
	l.Unresolved = light.i
	if l.Leaked > 0.5 {
		sums[leakyArea]++
	}
	return l
}

// seen is the radiance that shows in a direction, relative to a white diffuser's.
func (t *tracer) seen(d vec, w gems.Wavelength) float64 {
	f := t.outline.frame
	up := d.dot(f.eye)
	switch {
	case up <= 0 && t.light != nil: // paper takes the light's colour
		return t.below * t.light.Illuminant.At(w)
	case up <= 0:
		return t.below
	case up > t.headCos:
		return 0
	case t.light == nil:
		return 1
	}
	return t.light.Radiance(mgl64.Vec3{d.dot(f.right), d.dot(f.up), up}, w)
}

// litSurface notes what the first surface shows under the even light, where it mirrors
// in a direction with cosine up to the eye: the light from above, the head, or what
// lies below.
func (t *tracer) litSurface(up, r float64, sums *sums) {
	switch {
	case up <= 0:
		sums[mirrorsBelow] += r
	case up <= t.headCos:
		sums[mirrorsLight] += r
	}
}

// angleBins sorts directions by their angle from the eye into bins of 5 degrees.
type angleBins struct {
	least [19]float64 // cosine at the far edge of each bin; bin k holds least[k] < cos <= least[k-1]
	guess [65]uint8   // bin of the cosine k/64
}

func newAngleBins() (a angleBins) {
	for k := range 18 {
		a.least[k] = math.Cos(float64(k+1) * 5 * math.Pi / 180)
	}
	a.least[17] = 0
	a.least[18] = -1
	for k := range a.guess {
		c := float64(k+1) / 64
		for c < 1 && c <= a.least[a.guess[k]] {
			a.guess[k]++
		}
	}
	return a
}

// of returns the bin of a direction whose cosine to the eye lies in (0, 1].
func (a *angleBins) of(cos float64) int {
	k := int(a.guess[min(64, int(cos*64))])
	for cos <= a.least[k] && k < 17 {
		k++
	}
	return k
}
