package trace

import (
	"errors"
	"fmt"
	"math"

	"pavilight/facets"
	"pavilight/gems"
)

// Settings say how a scene is viewed and how long it is traced. The zero value
// is face-up, without a head, over the spectrum, at the defaults named below.
//
// Light in a doubly refracting stone is one wave or the other, each polarised in its
// own way: there Averaged only averages the light outside, between the stone and a
// dish's surface.
type Settings struct {
	View       View
	Head       facets.Angle    // half-angle of the cone that the viewer's head blocks; 0 for none
	Wavelength gems.Wavelength // nm; 0 for the spectrum, equal energy weighted by V(lambda), 400 to 700 nm
	Averaged   bool            // average the two polarisations at every facet instead of carrying the state of the light
	Light      *Light          // what lights the scene; nil for the even light: the same radiance from every upward direction
	Below      float64         // luminance of what lies under the stone, 0 to 1 (white paper)
	Colour     bool            // gather colour: the maps then have X, Y, Z; not with one wavelength
	Paths      bool            // gather the mean way of the light inside the stone
	Distance   float64         // of the eye from the stone's middle, mm; 0 for an eye far away
	Aside      float64         // of the eye from the line of sight, to the right, mm: half the distance between two eyes
	Pixels     int             // of a map's edge; 0 means 300
	Square     float64         // mm; edge of the picture about the stone's middle, so that views share it; 0 for the outline's own
	Samples    int             // mean rays per pixel at which tracing stops; 0 means until Error is reached
	Error      float64         // stop when the standard error of every ledger entry is below; 0 means 0.0005
	MapsLast   bool            // what is reported before the end has no maps: where only the progress is of interest
	Seed       uint64          // same seed, same result, for any number of workers
	Workers    int             // goroutines that trace; 0 means all cores

	exact bool // trace in float64, also where there is a fast kernel in float32
}

// lit reports whether more must be known of the light seen than a ledger tells.
func (s Settings) lit() bool { return s.Light != nil || s.Colour }

// check refuses settings that mean nothing.
func (s Settings) check() error {
	in := func(name string, v, lo, hi float64) error {
		if v >= lo && v <= hi {
			return nil
		}
		return fmt.Errorf("%s %v is outside %v to %v", name, v, lo, hi)
	}
	tilt := math.Abs(s.View.Tilt.Degrees())
	if !(tilt < 90) {
		return fmt.Errorf("tilt %v is outside -90° to 90°", s.View.Tilt)
	}
	if math.IsNaN(s.View.Turn.Degrees()) || math.IsInf(s.View.Turn.Degrees(), 0) {
		return fmt.Errorf("turn is no angle")
	}
	if s.Colour && s.Wavelength != 0 {
		return errors.New("one wavelength has no colour: leave out the wavelength or the colour")
	}
	return errors.Join(
		in("head angle", s.Head.Degrees(), 0, 90),
		in("luminance below", s.Below, 0, 1),
		in("number of pixels", float64(s.Pixels), 0, 8192),
		in("edge of the picture", s.Square, 0, 1e6),
		in("samples a pixel", float64(s.Samples), 0, 1<<20),
		in("error", s.Error, 0, 1),
		in("distance of the eye", s.Distance, 0, 1e6),
		in("eye aside of the line of sight", s.Aside, -1e3, 1e3),
		in("number of workers", float64(s.Workers), 0, 1<<12),
	)
}

// wavelengths returns the ends of the range to be traced.
func (s Settings) wavelengths() []gems.Wavelength {
	if s.Wavelength != 0 {
		return []gems.Wavelength{s.Wavelength}
	}
	return []gems.Wavelength{gems.SpectrumWavelength(0), gems.SpectrumWavelength(1)}
}
