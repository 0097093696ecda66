package report

import (
	"context"
	"fmt"
	"slices"

	"pavilight/app/motion"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Findings is all that was traced of one stone.
type Findings struct {
	Stone
	Job     *Job
	Around  *trace.Result // a column for each of the job's surroundings, all around
	Dish    *trace.Result // likewise for each that is a liquid, in a dish; nil without any
	Columns []Column      // the columns of both, in the order in which they are shown

	Pictures []*motion.Still // under each light, with nothing bright below
	OnPaper  *motion.Still   // loose on white paper, under the first light
	Tilts    []Tilt
	Wet      []Condition
	Ray      *Ray // nil where no ray shows what happens
}

// Column is one surrounding with what was found in it.
type Column struct {
	*trace.Column
	Spread *Shares // standard deviation from the measuring errors; nil where none are stated
}

// spreadOf returns the spread of one share, nil where no measuring error is stated.
func (c *Column) spreadOf(q trace.Quantity) *float64 {
	if c.Spread == nil {
		return nil
	}
	v := q.Of(c.Spread.Ledger)
	return &v
}

// Shares are a column's figures: of the ledger and of the area.
type Shares struct {
	trace.Ledger
	Leaky, Windowed float64
}

// Tilt is the stone rocked by an angle, seen in each of the surroundings all around.
type Tilt struct {
	Angle   facets.Angle
	Columns []trace.Column
}

// Condition is a state of the pavilion, or what lies on it, in air.
type Condition struct {
	Name   string // key of the words: "clean", "water", "grease" or "film"
	Column *trace.Column
}

// How much is traced of what is shown small, or beside the main figures.
const (
	usualError    = 0.0005
	dishSamples   = 2
	stillEdge     = 250. / 300 // of a picture in true colour, over that of a map
	paperEdge     = 180. / 300
	stillSamples  = 2
	paperWhite    = 0.8        // share of light that white paper sends back; common practice, no source
	tiltEdge      = 110. / 300 // likewise of the maps of tilts
	tiltSamples   = 6
	tiltMost      = 20 * facets.Degree
	tiltStep      = 5 * facets.Degree
	wetPixels     = 64
	wetError      = 0.001
	filmIndex     = 1.47 // of a clear grease
	filmThickness = 5000 // nm
)

// usual settings of every run.
func (j *Job) settings() trace.Settings {
	s := trace.Settings{Head: j.Head, Pixels: j.Pixels, Error: j.Error, Seed: j.Seed, Workers: j.Workers, MapsLast: true}
	if s.Pixels == 0 {
		s.Pixels = 300
	}
	if s.Error == 0 {
		s.Error = usualError
	}
	return s
}

// MaterialOf returns what a stone is traced as.
func (j *Job) MaterialOf(s *Stone) *gems.Material {
	if j.Body == nil {
		return s.Material
	}
	coloured := *s.Material
	coloured.Absorption = j.Body
	return &coloured
}

// liquid reports whether a surrounding can stand in a dish.
func liquid(m *gems.Material) bool {
	const least = 1.01 // above every gas
	n, err := m.Index(gems.LineD)
	return err == nil && n > least
}

// step is a part of the work, with about the share of time that it takes.
type step struct {
	weight float64
	do     func(report func(done float64)) error
}

// Gather traces all that a report shows of a stone. It calls report, which may be nil,
// with the share that is done. Errors are those of trace.Run; after ctx is cancelled its
// cause.
func Gather(ctx context.Context, job *Job, stone Stone, report func(done float64)) (*Findings, error) {
	if err := job.check(); err != nil {
		return nil, err
	}
	f := &Findings{Stone: stone, Job: job}
	steps := []step{
		{1, func(tell func(float64)) (err error) { f.Around, err = f.around(ctx, tell); return err }},
		{2, func(tell func(float64)) (err error) { f.Dish, err = f.dish(ctx, tell); return err }},
		{4, func(func(float64)) error { return f.pictures(ctx) }},
		{2, func(tell func(float64)) error { return f.tilts(ctx, tell) }},
		{2, func(func(float64)) error { return f.wet(ctx) }},
		{1, func(func(float64)) error { f.columns(); return f.ray(ctx) }},
	}
	if len(job.Measured) > 0 {
		steps = append(steps, step{4, func(tell func(float64)) error { return f.spread(ctx, tell) }})
	}
	total, done := 0.0, 0.0
	for _, s := range steps {
		total += s.weight
	}
	for _, s := range steps {
		tell := func(part float64) {
			if report != nil {
				report((done + s.weight*part) / total)
			}
		}
		if err := s.do(tell); err != nil {
			return nil, err
		}
		if err := context.Cause(ctx); err != nil {
			return nil, err
		}
		done += s.weight
		tell(0)
	}
	return f, nil
}

// scene returns the stone in the given surroundings.
func (f *Findings) scene(surroundings ...trace.Surrounding) trace.Scene {
	return trace.Scene{Stone: f.Solid, Material: f.Job.MaterialOf(&f.Stone), Surroundings: surroundings}
}

func (f *Findings) around(ctx context.Context, tell func(float64)) (*trace.Result, error) {
	return trace.Run(ctx, f.scene(trace.Around(f.Job.Media...)...), f.Job.settings(), func(r *trace.Result) { tell(r.Done) })
}

// dishes returns the surroundings in a dish.
func (j *Job) dishes() (all []trace.Surrounding) {
	for _, m := range j.Media {
		if liquid(m) {
			all = append(all, trace.Surrounding{Medium: m, Dish: true})
		}
	}
	return all
}

func (f *Findings) dish(ctx context.Context, tell func(float64)) (*trace.Result, error) {
	dishes := f.Job.dishes()
	if len(dishes) == 0 {
		return nil, nil
	}
	settings := f.Job.settings()
	if settings.Error >= usualError {
		// The general tracer takes its time: these rays suffice for maps, and bring the
		// error to about the usual one.
		settings.Samples = dishSamples
	}
	return trace.Run(ctx, f.scene(dishes...), settings, func(r *trace.Result) { tell(r.Done) })
}

// columns lines the columns up: all around first, then the dishes.
func (f *Findings) columns() {
	for _, r := range []*trace.Result{f.Around, f.Dish} {
		if r == nil {
			continue
		}
		for i := range r.Columns {
			f.Columns = append(f.Columns, Column{Column: &r.Columns[i]})
		}
	}
}

// pictures pictures the stone in true colour, in the first surrounding.
func (f *Findings) pictures(ctx context.Context) error {
	settings := f.Job.settings()
	settings.Pixels, settings.Samples, settings.Distance = int(stillEdge*float64(settings.Pixels)), stillSamples, motion.Distance(f.Solid)
	scene := f.scene(trace.Surrounding{Medium: f.Job.Media[0]})
	sheets := map[string]*motion.Sheet{} // by the light's spectrum
	for _, light := range f.Job.Lights {
		settings.Light = light
		sheet := sheets[light.Illuminant.Name]
		if sheet == nil {
			var err error
			if sheet, err = motion.NewSheet(ctx, f.Solid, settings); err != nil {
				return err
			}
			sheets[light.Illuminant.Name] = sheet
		}
		s, err := motion.Look(ctx, scene, settings, sheet)
		if err != nil {
			return err
		}
		f.Pictures = append(f.Pictures, s)
	}
	scene.Ground = &trace.Ground{Reflectance: paperWhite}
	settings.Light, settings.Pixels = f.Job.Lights[0], int(paperEdge*float64(f.Job.settings().Pixels))
	var err error
	f.OnPaper, err = motion.Look(ctx, scene, settings, nil)
	return err
}

// tilts rocks the stone.
func (f *Findings) tilts(ctx context.Context, tell func(float64)) error {
	settings := f.Job.settings()
	settings.Pixels, settings.Samples = int(tiltEdge*float64(settings.Pixels)), tiltSamples
	scene := f.scene(trace.Around(f.Job.Media...)...)
	for a := -tiltMost; a <= tiltMost+tiltStep/2; a += tiltStep {
		settings.View = motion.View(a, 0)
		r, err := trace.Run(ctx, scene, settings, nil)
		if err != nil {
			return err
		}
		f.Tilts = append(f.Tilts, Tilt{a, r.Columns})
		tell(float64(len(f.Tilts)) / float64(2*tiltMost/tiltStep+1))
	}
	return nil
}

// bySide returns the stone with each facet's side as its tier, so that a side can be
// wetted or soiled also where nobody knows the tiers.
func bySide(s *facets.Stone) *facets.Stone {
	sided := *s
	sided.Facets = slices.Clone(s.Facets)
	for i := range sided.Facets {
		sided.Facets[i].Tier = sided.Facets[i].Side.String()
	}
	return &sided
}

// wet finds what water, grease and a thin film on the pavilion do to the stone in air.
func (f *Findings) wet(ctx context.Context) error {
	air, err := gems.Find("air")
	if err != nil {
		return err
	}
	var liquids [2]*gems.Material
	for i, key := range []string{"water", "oil"} {
		if liquids[i], err = gems.Find(key); err != nil {
			return err
		}
	}
	settings := f.Job.settings()
	settings.Pixels, settings.Error = wetPixels, wetError
	pavilion := []string{facets.Pavilion.String()}
	scene := f.scene(
		trace.Surrounding{Medium: air},
		trace.Surrounding{Medium: liquids[0], Tiers: pavilion, Beyond: air},
		trace.Surrounding{Medium: liquids[1], Tiers: pavilion, Beyond: air},
	)
	scene.Stone = bySide(f.Solid)
	r, err := trace.Run(ctx, scene, settings, nil)
	if err != nil {
		return err
	}
	for i, name := range []string{"clean", "water", "grease"} {
		f.Wet = append(f.Wet, Condition{name, &r.Columns[i]})
	}
	scene.Surroundings = trace.Around(air)
	scene.Coatings = []trace.Coating{{Tiers: pavilion, Film: trace.Film{Index: filmIndex, Thickness: filmThickness}}}
	if r, err = trace.Run(ctx, scene, settings, nil); err != nil {
		return fmt.Errorf("a film on the pavilion: %w", err)
	}
	f.Wet = slices.Insert(f.Wet, 1, Condition{"film", &r.Columns[0]})
	return nil
}
