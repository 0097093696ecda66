package trace

import (
	"context"
	"errors"

	"pavilight/facets"
)

// Appearance is what an eye makes of the stone in one surrounding under one light. The
// measures hold for that light, that distance and that size of stone only.
type Appearance struct {
	Surrounding
	Light    *Light
	Distance float64 // of the eye, mm

	Luminance Estimate // mean over the stone, relative to the white diffuser's
	DarkArea  Estimate // see Seen
	Contrast  Estimate
	Fire      Estimate
	Sparkle   Estimate // against the stone rocked by 2 degrees more

	Pixels int
	XYZ    [][3]float32 // the picture itself, as Map.XYZ
}

// How appearances are gathered: so many independent pictures, of so many rays a pixel
// each unless the settings say otherwise, and the rocking that sparkle is told for.
const (
	appearancePictures = 8
	appearanceRays     = 3
	sparkleRock        = 2 * facets.Degree
)

// Appear looks at the scene as an eye does from a distance in mm, under the settings'
// light (the even light if none is named): pictures in colour, averaged to what the eye
// tells apart, and measures of them. Settings.Samples is the number of rays a pixel of
// all pictures together, 24 if 0; Pixels and Error are chosen here. It calls report,
// which may be nil, with the share that is done.
func Appear(ctx context.Context, scene Scene, settings Settings, distance float64, report func(done float64)) ([]Appearance, error) {
	if !(distance > 0) {
		return nil, errors.New("the eye's distance must be above 0 mm")
	}
	if settings.Light == nil {
		even, err := FindLight("even")
		if err != nil {
			return nil, err
		}
		settings.Light = even
	}
	settings.Colour, settings.Error = true, 0
	if settings.Samples == 0 {
		settings.Samples = appearanceRays * appearancePictures
	}
	settings.Samples = max(1, settings.Samples/appearancePictures)
	var err error
	if settings.Square, err = scene.square(settings); err != nil {
		return nil, err
	}
	settings.Pixels = max(64, PixelsForEye(settings.Square, distance))

	seed := settings.Seed
	var looks [2][][]*Map // by rocking, column and picture
	for rock := range looks {
		looks[rock] = make([][]*Map, len(scene.Surroundings))
		view := settings
		view.View.Tilt += facets.Angle(rock) * sparkleRock
		for i := range appearancePictures {
			view.Seed = mix(seed + uint64(i))
			r, err := Run(ctx, scene, view, nil)
			if err != nil {
				return nil, err
			}
			for k := range r.Columns {
				looks[rock][k] = append(looks[rock][k], r.Columns[k].Map)
			}
			if report != nil {
				report(float64(rock*appearancePictures+i+1) / (2 * appearancePictures))
			}
		}
	}
	all := make([]Appearance, len(scene.Surroundings))
	for k := range all {
		a := &all[k]
		a.Surrounding, a.Light, a.Distance, a.Pixels = scene.Surroundings[k], settings.Light, distance, settings.Pixels
		first, second := looks[0][k], looks[1][k]
		seen, err := LookAt(pictures(first), first[0].grid.insidePixels(), distance)
		if err != nil {
			return nil, err
		}
		a.Luminance, a.DarkArea, a.Contrast, a.Fire = seen.Luminance(), seen.DarkArea(), seen.Contrast(), seen.Fire()
		if a.Sparkle, err = Sparkle(pictures(first), pictures(second), first[0].grid.insidePixels(), second[0].grid.insidePixels(), distance); err != nil {
			return nil, err
		}
		a.XYZ = joined(first).XYZ()
	}
	return all, nil
}

// square returns the edge in mm of a picture about the stone's middle that holds it
// from every side.
func (s Scene) square(settings Settings) (float64, error) {
	t, err := newTracer(s.Stone, settings)
	if err != nil {
		return 0, err
	}
	// From nearby the stone looks larger by what lies before its middle.
	size := 2 * t.body.unit
	if d := settings.Distance; d > 0 {
		size *= d / (d - t.body.unit)
	}
	return size, nil
}

// picture returns the map's colours as the measures of an eye take them.
func (m *Map) picture() *Picture {
	n := len(m.grid.cell)
	p := &Picture{Pixels: m.Pixels, Pitch: m.Span / float64(m.Pixels), Sum: make([][3]float64, n), Rays: make([]int32, n)}
	for i, at := range m.grid.cell {
		// Where a mirror line runs through a pixel each ray stands for two or more.
		times := int32(m.grid.folds) / m.grid.shared[at]
		for c, v := range m.colour[at] {
			p.Sum[i][c] = float64(v) * float64(times)
		}
		p.Rays[i] = m.cells[at].rays * times
	}
	return p
}

func pictures(maps []*Map) []*Picture {
	all := make([]*Picture, len(maps))
	for i, m := range maps {
		all[i] = m.picture()
	}
	return all
}

// joined returns the sum of maps of one size.
func joined(maps []*Map) *Map {
	sum := maps[0].clone()
	for _, m := range maps[1:] {
		for i := range m.cells {
			sum.cells[i].rays += m.cells[i].rays
			for c := range sum.colour[i] {
				sum.colour[i][c] += m.colour[i][c]
			}
		}
	}
	return sum
}
