package trace

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
)

// Scene is one stone and what it is traced in.
type Scene struct {
	Stone    *facets.Stone
	Material *gems.Material // what the stone is made of; its body colour counts

	// Axis is, in the stone's frame and of any length but 0, the direction of the optic axis
	// of a uniaxial material; of a biaxial one, which has two, the acute bisectrix: the
	// direction that halves the acute angle between them. That is gamma's in a positive
	// material and alpha's in a negative one. Plane is any direction that with Axis spans the
	// plane of the two optic axes; it counts for a biaxial material alone, which needs it.
	//
	// The stone then refracts doubly: both waves are followed, each along its own ray. The
	// phase between the two is forgotten once they have parted: over a pixel and over the
	// spectrum it runs through many turns in a stone that is thicker than a few wavelengths
	// over its birefringence. Light close along an optic axis keeps it longer, and quartz
	// turns the polarisation of such light; neither is modelled. Exactly along an optic axis
	// of a biaxial stone a ray spreads into a cone, of which two rays are followed.
	//
	// With nil a uniaxial stone is traced as if singly refracting, at its ordinary index, and
	// a biaxial one at the mean of its three. An isotropic one has no axis, and any leaves it
	// as it is.
	Axis, Plane *mgl64.Vec3

	Surroundings []Surrounding // one column each
	Coatings     []Coating     // films on some tiers
	Ground       *Ground       // something diffuse under the stone; nil for nothing
	Setting      *Setting      // something diffuse behind the pavilion; nil for nothing
}

// Surrounding is what lies around the stone. With a Medium alone, stone, lights and
// eye are all in it.
type Surrounding struct {
	Medium *gems.Material
	Dish   bool // the medium is a liquid with a flat surface above the stone, across the line of sight; lights and eye are in air

	// Tiers, where not empty, names the only tiers that touch Medium. All other
	// facets touch Beyond.
	Tiers  []string
	Beyond *gems.Material
}

// Around returns surroundings in which each medium goes on for ever.
func Around(media ...*gems.Material) []Surrounding {
	s := make([]Surrounding, len(media))
	for i, m := range media {
		s[i].Medium = m
	}
	return s
}

// materials returns all that light may meet around the stone.
func (s Surrounding) materials() []*gems.Material {
	if len(s.Tiers) == 0 {
		return []*gems.Material{s.Medium}
	}
	return []*gems.Material{s.Medium, s.Beyond}
}

// Coating is a film on every facet of some tiers.
type Coating struct {
	Tiers []string
	Film
}

// Ground is a diffuse flat under the stone, across the line of sight: paper, a
// cloth. It touches the stone's lowest point.
type Ground struct {
	Reflectance float64 // share of light that it sends back, by Lambert's law; 0 to 1
}

// Setting is a diffuse wall right behind the facets of the pavilion.
type Setting struct {
	Reflectance float64 // share of light that it sends back, by Lambert's law; 0 to 1
	Open        float64 // share of the pavilion's depth, from the culet up, that it leaves open; 0 to 1
}

// mostScatter is the greatest optical depth of a film: white paint has about so much.
const mostScatter = 100

// liquidAbove is how far a dish's surface lies above the stone, in units of the
// radius of the sphere that holds the stone. The surface is wide, so the height only
// decides where light that it sends back meets the stone again.
const liquidAbove = 0.5

// double reports whether the stone is followed as doubly refracting.
func (s Scene) double() bool { return s.Axis != nil && s.Material.Character() != gems.Isotropic }

// orientation returns how the principal axes lie in a stone that is followed as doubly
// refracting.
func (s Scene) orientation() *orientation {
	axis := fromMgl(s.Axis.Normalize())
	character := s.Material.Character()
	if !character.Biaxial() {
		across := fresh(axis)
		return &orientation{across.a, across.b, axis}
	}
	plane := fromMgl(s.Plane.Normalize())
	plane = plane.plus(-plane.dot(axis), axis)
	plane = plane.scale(1 / plane.length())
	if character == gems.BiaxialPositive {
		return &orientation{plane, axis.cross(plane), axis}
	}
	return &orientation{axis, axis.cross(plane), plane}
}

// leans reports whether the optic axis counts and does not point along the line of
// sight, toward eye: then a stone with symmetric facets does not look symmetric. With two
// optic axes it never does.
func (s Scene) leans(eye vec) bool {
	const along = 1e-9
	return s.double() && (s.Material.Character().Biaxial() || fromMgl(s.Axis.Normalize()).cross(eye).length() > along)
}

// clean reports whether column k is clean facets in one medium, far away from anything
// else: what a kernel knows.
func (s Scene) clean(k int, settings Settings) bool {
	around := s.Surroundings[k]
	return !s.double() && !around.Dish && len(around.Tiers) == 0 && len(s.Coatings) == 0 && s.Ground == nil && s.Setting == nil &&
		!settings.Paths
}

// plain reports whether column k is clean facets of a clear stone, under the even light,
// seen from afar: what the tracer without a kernel knows.
func (s Scene) plain(k int, settings Settings) bool {
	return s.clean(k, settings) && s.Material.Absorption == nil && settings.Distance == 0 && !settings.lit()
}

// byTier reports whether it matters which tier a facet belongs to.
func (s Scene) byTier() bool {
	for _, around := range s.Surroundings {
		if len(around.Tiers) > 0 {
			return true
		}
	}
	return len(s.Coatings) > 0
}

// check refuses a scene that means nothing.
func (s Scene) check() error {
	share := func(name string, v float64) error {
		if v >= 0 && v <= 1 {
			return nil
		}
		return fmt.Errorf("%s %v is outside 0 to 1", name, v)
	}
	var faults []error
	if s.Axis != nil {
		faults = append(faults, s.checkAxis())
	}
	if s.Ground != nil {
		faults = append(faults, share("reflectance of the ground", s.Ground.Reflectance))
	}
	if s.Setting != nil {
		faults = append(faults, share("reflectance of the setting", s.Setting.Reflectance), share("open part of the setting", s.Setting.Open))
	}
	for _, c := range s.Coatings {
		faults = append(faults, s.tiersExist("film", c.Tiers))
		if !(c.Index >= 1 && c.Index <= 5) {
			faults = append(faults, fmt.Errorf("index %v of a film is outside 1 to 5", c.Index))
		}
		if !(c.Extinction >= 0 && c.Extinction <= 10) {
			faults = append(faults, fmt.Errorf("extinction %v of a film is outside 0 to 10", c.Extinction))
		}
		if !(c.Thickness >= 0 && c.Thickness <= 1e6) {
			faults = append(faults, fmt.Errorf("thickness %v nm of a film is outside 0 to 1,000,000", c.Thickness))
		}
		switch {
		case !(c.Scatter >= 0 && c.Scatter <= mostScatter):
			faults = append(faults, fmt.Errorf("scattering %v of a film is outside 0 to %d", c.Scatter, mostScatter))
		case c.Scatter > 0 && c.Thickness <= thick:
			faults = append(faults, fmt.Errorf("a film that scatters must be thicker than %d nm, not %v nm", thick, c.Thickness))
		}
	}
	for _, around := range s.Surroundings {
		if around.Dish && len(around.Tiers) > 0 {
			faults = append(faults, errors.New("a stone in a dish is wetted all over: choose the dish or some tiers"))
		}
		faults = append(faults, s.tiersExist("liquid", around.Tiers))
	}
	return errors.Join(faults...)
}

func (s Scene) checkAxis() error {
	direction := func(what string, a *mgl64.Vec3) error {
		switch l := a.Len(); {
		case l == 0:
			return fmt.Errorf("the %s has length zero: give it a direction, or leave it out", what)
		case !(l > 0) || math.IsInf(l, 0):
			return fmt.Errorf("the %s %v is no direction: give it finite numbers, or leave it out", what, *a)
		}
		return nil
	}
	if err := direction("optic axis", s.Axis); err != nil {
		return err
	}
	if s.double() && len(s.Coatings) > 0 {
		return errors.New("a film on a doubly refracting stone is not followed: leave out the film or the optic axis")
	}
	if !s.Material.Character().Biaxial() {
		return nil
	}
	if s.Plane == nil {
		return fmt.Errorf("%s is biaxial: give the plane of its two optic axes beside their bisectrix", s.Material.Name)
	}
	if err := direction("plane of the optic axes", s.Plane); err != nil {
		return err
	}
	const apart = 1e-6
	if s.Axis.Normalize().Cross(s.Plane.Normalize()).Len() < apart {
		return errors.New("the direction in the plane of the optic axes lies along their bisectrix: give another one in that plane")
	}
	return nil
}

func (s Scene) tiersExist(what string, tiers []string) error {
	for _, name := range tiers {
		if !slices.ContainsFunc(s.Stone.Facets, func(f facets.Facet) bool { return f.Tier == name }) {
			return fmt.Errorf("%s on tier %q: the stone has no facet of that tier; its tiers are %s", what, name, strings.Join(s.tiers(), ", "))
		}
	}
	return nil
}

// InvalidError is a scene or a setting that means nothing: the caller's to mend.
type InvalidError struct{ Err error }

func (e *InvalidError) Error() string { return e.Err.Error() }
func (e *InvalidError) Unwrap() error { return e.Err }

// tiers returns the names of the stone's tiers in the order of its facets.
func (s Scene) tiers() (names []string) {
	for _, f := range s.Stone.Facets {
		if !slices.Contains(names, f.Tier) {
			names = append(names, f.Tier)
		}
	}
	return names
}

// known fails where the stone or a medium has no index at w.
func (s Scene) known(w gems.Wavelength) error {
	if _, err := s.Material.Index(w); err != nil {
		return err
	}
	for _, around := range s.Surroundings {
		for _, m := range around.materials() {
			if _, err := m.Index(w); err != nil {
				return err
			}
		}
	}
	return nil
}

// traveller returns the general tracer for column k.
func (s Scene) traveller(k int, settings Settings, plain *tracer) *traveller {
	around := s.Surroundings[k]
	t := &traveller{tracer: plain, colour: s.Material.Absorption}
	if s.double() {
		t.axes = s.orientation()
	}
	for _, f := range s.Stone.Facets {
		medium := around.Medium
		if len(around.Tiers) > 0 && !slices.Contains(around.Tiers, f.Tier) {
			medium = around.Beyond
		}
		t.medium = append(t.medium, medium)
		var film *Film
		for i := range s.Coatings {
			if slices.Contains(s.Coatings[i].Tiers, f.Tier) {
				film = &s.Coatings[i].Film
			}
		}
		t.film = append(t.film, film)
	}
	lowest, highest := math.Inf(1), math.Inf(-1) // along the line of sight
	culet, girdle := math.Inf(1), math.Inf(-1)   // along the stone's axis, of the pavilion
	for _, f := range s.Stone.Facets {
		for _, c := range f.Corners {
			x := plain.body.relative(s.Stone.Corners[c])
			h := x.dot(plain.outline.eye)
			lowest, highest = min(lowest, h), max(highest, h)
			if f.Side == facets.Pavilion {
				culet, girdle = min(culet, x.z), max(girdle, x.z)
			}
		}
	}
	if around.Dish {
		t.dish = &dish{around.Medium, highest + liquidAbove}
	}
	if s.Ground != nil {
		t.under = &under{s.Ground.Reflectance, lowest}
	}
	if s.Setting != nil {
		t.cup = &cup{s.Setting.Reflectance, culet + s.Setting.Open*(girdle-culet)}
	}
	return t
}
