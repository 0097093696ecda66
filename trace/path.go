package trace

import (
	"errors"
	"math"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// Path is one viewing ray followed facet by facet, in the stone's frame.
type Path struct {
	Wavelength  gems.Wavelength // nm
	IndexStone  float64
	IndexMedium float64
	Critical    facets.Angle // inside the stone, from the normal; meaningful only if HasCritical
	HasCritical bool
	AsIfSingly  bool // the stone refracts doubly; shown is a ray of its ordinary index, or of the mean of three, polarised as in a stone of that index

	Dish      bool         // the medium is a liquid with a flat surface; the eye is in air
	Liquid    float64      // share that its surface mirrors before the ray reaches the stone; 0 without a dish
	Facet     int          // of the stone, where the ray enters
	Entry     mgl64.Vec3   // mm
	Incidence facets.Angle // on that facet, from its normal
	Surface   float64      // share mirrored there
	Mirrored  mgl64.Vec3   // direction in which it goes, unit
	Bounces   []Bounce     // inside, in order
	Remaining float64      // share still inside after the last bounce
}

// Bounce is one meeting of a path with a facet from inside.
type Bounce struct {
	Facet     int          // of the stone
	At        mgl64.Vec3   // mm, in the stone's frame
	Incidence facets.Angle // from the facet's normal
	Total     bool         // totally reflected
	Arrived   float64      // share of the viewing ray that arrives
	Stayed    float64      // share that is reflected and goes on
	Left      float64      // share that leaves here
	Leaving   mgl64.Vec3   // direction in which it leaves the stone, unit; zero under total reflection
	Back      float64      // share that the liquid's surface in a dish sends back down, which is not followed
	FromEye   facets.Angle // between the eye's direction and that in which the rest leaves, in air above a dish
	Goes      Quantity     // Returned, Head or Leaked: the entry the rest counts in; Unresolved where all is sent back
}

// The share below which a shown path ends, and the most bounces it shows.
const (
	leastShown = 1e-4
	mostShown  = 500
)

// Follow follows the viewing ray of a distant eye through one point of the picture in
// one of the scene's surroundings, a medium all around or a dish, without films and body
// colour, until less than 1e-4 of it is left inside or after 500 bounces. x
// and y run from 0 to 1 across the picture from its top left corner; the
// wavelength is the settings', the sodium D line for the spectrum. ok is false
// where the ray passes beside the stone. In a doubly refracting stone a ray parts into
// ever more; shown is what a stone of its ordinary index, or of the mean of three, does, and
// the path says so.
func Follow(scene Scene, column int, settings Settings, x, y float64) (p *Path, ok bool, err error) {
	if err := settings.check(); err != nil {
		return nil, false, err
	}
	w := settings.Wavelength
	if w == 0 {
		w = gems.LineD
	}
	around := scene.Surroundings[column]
	if len(around.Tiers) > 0 {
		return nil, false, errors.New("a single ray is followed where all tiers touch one medium")
	}
	n, err := scene.Material.Index(w)
	if err != nil {
		return nil, false, err
	}
	m, err := around.Medium.Index(w)
	if err != nil {
		return nil, false, err
	}
	settings.Distance = 0
	t, err := newTracer(scene.Stone, settings)
	if err != nil {
		return nil, false, err
	}
	facet, at, ok := t.outline.enter((2*x-1)*t.outline.half, (1-2*y)*t.outline.half)
	if !ok {
		return nil, false, nil
	}
	p = t.path(facet, at, n, m, around.Dish)
	p.Wavelength, p.AsIfSingly = w, scene.double()
	return p, true, nil
}

// path follows a ray that enters through a facet at x. Light from the eye meets the
// surface of a dish head-on, so it goes straight on.
func (t *tracer) path(facet int, x vec, n, m float64, inDish bool) *Path {
	b, eye := t.body, t.outline.eye
	cosI := t.toEye[facet]
	at := Fresnel(m, n, cosI)
	p := &Path{
		IndexStone: n, IndexMedium: m,
		Facet:     facet,
		Entry:     b.place(x),
		Incidence: facets.Angle(math.Acos(min(1, cosI))),
		Dish:      inDish,
		Mirrored:  eye.scale(-1).plus(2*cosI, b.normal[facet]).mgl(),
	}
	p.Critical, p.HasCritical = CriticalAngle(n, m)
	if inDish {
		p.Liquid = Fresnel(1, m, 1).Mean()
	}
	p.Surface = (1 - p.Liquid) * at.Mean()
	if at.Total {
		return p
	}
	dir := refract(eye.scale(-1), b.normal[facet].scale(-1), m/n, cosI, at.CosT)
	light := enterBeam(at, dir, b.normal[facet])
	light.grow(light.i * (1 - p.Liquid))
	for len(p.Bounces) < mostShown && light.i >= leastShown {
		j, s := b.exit(x, dir)
		x = x.plus(s, dir)
		cosI := min(1, dir.dot(b.normal[j]))
		at := Fresnel(n, m, cosI)
		step := Bounce{
			Facet: j, At: b.place(x), Incidence: facets.Angle(math.Acos(cosI)),
			Total: at.Total, Arrived: light.i,
		}
		out, through := vec{}, beam{}
		if !at.Total {
			out = refract(dir, b.normal[j], n/m, cosI, at.CosT)
			c := plainCrossing(n, m, cosI)
			if t.averaged {
				light.forget()
			}
			_, through = light.meet(&c, dir, b.normal[j], out)
			if t.averaged {
				through.forget()
			}
		}
		if t.averaged {
			step.Left = light.average(at)
		} else {
			step.Left = light.reflect(at, b.normal[j])
		}
		step.Stayed = light.i
		if !at.Total {
			up := out.dot(eye)
			step.Leaving, step.Goes = out.mgl(), t.goes(up)
			if inDish && up > 0 {
				surface := plainCrossing(m, 1, min(1, up))
				back, _ := through.meet(&surface, out, eye, out)
				up, step.Back, step.Goes = surface.cosT, back.i, t.goes(surface.cosT)
				if surface.cosT == 0 {
					step.Goes = Unresolved
				}
			}
			step.FromEye = facets.Angle(math.Acos(max(-1, min(1, up))))
		}
		p.Bounces = append(p.Bounces, step)
		dir = dir.plus(-2*cosI, b.normal[j])
	}
	p.Remaining = light.i
	return p
}

// goes says in which entry of the ledger light counts that leaves the stone with
// cosine up to the eye.
func (t *tracer) goes(up float64) Quantity {
	switch {
	case up <= 0:
		return Leaked
	case up > t.headCos:
		return Head
	}
	return Returned
}

// place returns the point x of the body in the stone's frame, in mm; relative is its
// inverse.
func (b *body) place(x vec) mgl64.Vec3 { return b.middle.plus(b.unit, x).mgl() }

func (b *body) relative(x mgl64.Vec3) vec { return fromMgl(x).plus(-1, b.middle).scale(1 / b.unit) }
