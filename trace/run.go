// Package trace follows light through a convex stone and keeps the ledger of
// where it goes.
//
// Rays run from the eye back into the scene: light paths are reversible. A ray
// that enters an isotropic convex stone never splits inside: at each facet a
// known part leaves for good and the rest goes on.
//
// Viewer's frame. +Z to the eye, +X right, +Y up on every map; face-up, the
// stone's index 0 (its +x) points up the picture and indices grow anticlockwise.
// Up and down in the ledger are the viewer's.
package trace

import (
	"context"
	"errors"
	"fmt"
	"math"
	"runtime"
	"sync"
	"sync/atomic"
	"time"

	"pavilight/facets"
	"pavilight/gems"
)

// View is where the eye stands: its direction in the stone's frame is
// (sin Tilt cos Turn, sin Tilt sin Turn, cos Tilt). The stone rocks about one
// axis lying in the picture, without spin. Tilt lies in [0°, 90°).
type View struct {
	Tilt, Turn facets.Angle
}

// Scene is one stone and what it is traced in.
type Scene struct {
	Stone    *facets.Stone
	Material *gems.Material   // what the stone is made of
	Media    []*gems.Material // what surrounds stone, lights and eye; one column each
}

// Settings say how a scene is viewed and how long it is traced. The zero value
// is face-up, without a head, over the spectrum, at the defaults named below.
type Settings struct {
	View       View
	Head       facets.Angle    // half-angle of the cone that the viewer's head blocks; 0 for none
	Wavelength gems.Wavelength // nm; 0 for the spectrum, equal energy weighted by V(lambda), 400 to 700 nm
	Averaged   bool            // average the two polarisations at every facet instead of carrying the state of the light
	Below      float64         // luminance of what lies under the stone, 0 to 1 (white paper)
	Pixels     int             // of a map's edge; 0 means 300
	Samples    int             // mean rays per pixel at which tracing stops; 0 means until Error is reached
	Error      float64         // stop when the standard error of every ledger entry is below; 0 means 0.0005
	Seed       uint64          // same seed, same result, for any number of workers
	Workers    int             // goroutines that trace; 0 means all cores

	exact bool // trace in float64, also where there is a fast kernel in float32
}

// Result is what a run found, one column a medium, in the scene's order.
type Result struct {
	Columns []Column
	Rays    int           // that met the stone so far, the same for every column
	Elapsed time.Duration // since the run began
	Done    float64       // estimated share of the work done, 0 to 1; 1 in the final result
}

// Column is what was found in one medium.
type Column struct {
	Medium        *gems.Material
	IndexStone    float64      // at the wavelength traced, at the D line for the spectrum
	IndexMedium   float64      // likewise
	Critical      facets.Angle // at those indices; meaningful only if HasCritical
	HasCritical   bool         // false where the stone is not the denser side
	Ledger        Ledger       // means over the outline as seen
	StandardError Ledger       // of those means, from independent scramblings
	Lit           Lit
	From          [fromBins]float64 // returned + head by angle from the eye, bins of 5 degrees
	FromError     [fromBins]float64 // their standard errors
	LeakyArea     float64           // share of rays with leaked > 0.5
	LeakyError    float64           // its standard error
	WindowedArea  float64           // share of rays of which more than half leaves downward where they first meet the pavilion
	WindowedError float64           // its standard error
	Segments      int64             // facet hits inside the stone
	Map           *Map
}

// Lit is the luminance under the even light, relative to a white diffuser that lies
// in the same place facing the eye with no head in the way: its surface, returned
// and leaked parts and their sum.
type Lit struct {
	Surface  float64 `json:"surface"`
	Returned float64 `json:"returned"`
	Leaked   float64 `json:"leaked"`
	Sum      float64 `json:"sum"`
}

// Run traces the scene until the settings' error or samples are reached. It
// calls report, which may be nil, between passes with all that is known so far,
// coarse first; the result it is given is its own to keep. When ctx is cancelled
// Run returns the last complete result (nil if there is none) and the cause.
// All goroutines that Run starts have returned before it does.
//
// The sample points are the same for every medium, and depend on the seed alone:
// differences between media, and between stones of like outline, are more certain
// than each column's own error says.
func Run(ctx context.Context, scene Scene, settings Settings, report func(*Result)) (*Result, error) {
	start := time.Now()
	r, err := newRun(scene, settings)
	if err != nil {
		return nil, err
	}
	var last *Result
	for !r.finished() {
		if err := r.pass(ctx); err != nil {
			return last, err
		}
		last = r.result()
		last.Elapsed = time.Since(start)
		if report != nil {
			report(last)
		}
	}
	return last, nil
}

// Each pass traces chunks of every scrambling, so that after any pass all
// scramblings have traced alike. A chunk is some milliseconds of work, after which
// a cancelled run stops.
const (
	chunkPoints     = 1024
	mostChunksAPass = 16      // of each scrambling
	mostPoints      = 1 << 30 // of each scrambling; the sequence has 2^32
	leastRays       = 4       // a pixel, before the error alone may end a run
)

// run is the state of one call of Run.
type run struct {
	scene    Scene
	settings Settings
	tracer   *tracer
	points   [scramblings]points
	columns  []columnState

	chunks int // of each scrambling traced so far
	rays   int
	error  float64 // largest standard error of any ledger entry

	pixelsInside float64 // how many pixels show the stone
}

// columnState is what one medium has gathered.
type columnState struct {
	scrambled [scramblings]sums
	mapped    *Map
}

func newRun(scene Scene, settings Settings) (*run, error) {
	if err := settings.check(); err != nil {
		return nil, err
	}
	if settings.Pixels == 0 {
		settings.Pixels = 300
	}
	if settings.Error == 0 {
		settings.Error = 0.0005
	}
	if settings.Workers == 0 {
		settings.Workers = runtime.GOMAXPROCS(0)
	}
	r := &run{scene: scene, settings: settings, error: math.Inf(1)}

	// Both ends of the range that will be asked for must be known; then all between are.
	for _, w := range settings.wavelengths() {
		if _, _, err := scene.indices(w); err != nil {
			return nil, err
		}
	}
	var err error
	if r.tracer, err = newTracer(scene.Stone, settings.View, settings.Head); err != nil {
		return nil, err
	}
	r.tracer.averaged = settings.Averaged
	if !settings.exact {
		r.tracer.kernel = newKernel(r.tracer)
	}
	for i := range r.points {
		r.points[i] = newPoints(settings.Seed, i)
	}
	r.columns = make([]columnState, len(scene.Media))
	inside := r.tracer.outline.mask(settings.Pixels)
	for _, in := range inside {
		if in {
			r.pixelsInside++
		}
	}
	for i := range r.columns {
		r.columns[i].mapped = &Map{
			Pixels: settings.Pixels,
			Span:   2 * r.tracer.outline.half * r.tracer.body.unit,
			cells:  make([]cell, settings.Pixels*settings.Pixels),
			inside: inside,
		}
	}
	return r, nil
}

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
	return errors.Join(
		in("head angle", s.Head.Degrees(), 0, 90),
		in("luminance below", s.Below, 0, 1),
		in("number of pixels", float64(s.Pixels), 0, 8192),
		in("samples a pixel", float64(s.Samples), 0, 1<<20),
		in("error", s.Error, 0, 1),
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

// indices returns the index of the stone and of each medium at w.
func (s Scene) indices(w gems.Wavelength) (stone float64, media []float64, err error) {
	if stone, err = s.Material.Index(w); err != nil {
		return 0, nil, err
	}
	for _, m := range s.Media {
		n, err := m.Index(w)
		if err != nil {
			return 0, nil, err
		}
		media = append(media, n)
	}
	return stone, media, nil
}

// finished reports whether the settings are met.
func (r *run) finished() bool {
	if r.chunks*chunkPoints >= mostPoints {
		return true
	}
	if r.rays == 0 {
		return false
	}
	pixels := r.pixelsInside
	if r.settings.Samples > 0 {
		return float64(r.rays) >= float64(r.settings.Samples)*pixels
	}
	return r.error < r.settings.Error && float64(r.rays) >= leastRays*pixels
}

// done estimates the share of the work that is done. The error of scrambled
// points falls about as their number to the power of -3/4.
func (r *run) done() float64 {
	if r.finished() {
		return 1
	}
	pixels := r.pixelsInside
	if r.settings.Samples > 0 {
		return float64(r.rays) / (float64(r.settings.Samples) * pixels)
	}
	return min(math.Pow(r.settings.Error/r.error, 4.0/3), float64(r.rays)/(leastRays*pixels), 0.99)
}

// pass traces further points of every scrambling: as many as there are already,
// up to a bound.
func (r *run) pass(ctx context.Context) error {
	chunks := max(1, min(r.chunks, mostChunksAPass))
	units := chunks * scramblings
	done := make(chan *chunk)
	var next atomic.Int64
	var workers sync.WaitGroup
	for range min(r.settings.Workers, units) {
		workers.Go(func() {
			for ctx.Err() == nil {
				unit := int(next.Add(1)) - 1
				if unit >= units {
					return
				}
				done <- r.trace(unit, unit%scramblings, r.chunks+unit/scramblings)
			}
		})
	}
	go func() {
		workers.Wait()
		close(done)
	}()

	// Chunks are added in the order of their numbers, whoever traced them: sums of
	// rounded numbers depend on their order.
	waiting := map[int]*chunk{}
	added := 0
	for c := range done {
		waiting[c.unit] = c
		for waiting[added] != nil {
			r.add(waiting[added])
			delete(waiting, added)
			added++
		}
	}
	if added < units {
		return context.Cause(ctx)
	}
	r.chunks += chunks
	r.error = 0
	for i := range r.columns {
		_, se := means(&r.columns[i].scrambled)
		r.error = max(r.error, se.ledger().Max())
	}
	return nil
}

// chunk is the outcome of a run of points of one scrambling.
type chunk struct {
	unit, scrambling int
	entries          []entry
	ledgers          [][]Ledger // by column, of each entry
	sums             []sums     // by column
}

// entry is one viewing ray where it meets the stone.
type entry struct {
	point      uint32 // number of its sample point
	facet      int32
	pixel      int32
	at         vec
	wavelength gems.Wavelength
}

// trace follows one chunk of points in every medium.
func (r *run) trace(unit, scrambling, number int) *chunk {
	c := &chunk{unit: unit, scrambling: scrambling}
	points := r.points[scrambling]
	pixels, o := r.settings.Pixels, r.tracer.outline
	for i := uint32(number * chunkPoints); i < uint32((number+1)*chunkPoints); i++ {
		px, py, pw := points.at(i)
		facet, x, ok := o.enter((2*px-1)*o.half, (2*py-1)*o.half)
		if !ok {
			continue
		}
		w := r.settings.Wavelength
		if w == 0 {
			w = gems.SpectrumWavelength(pw)
		}
		pixel := (pixels-1-int(py*float64(pixels)))*pixels + int(px*float64(pixels))
		c.entries = append(c.entries, entry{i, int32(facet), int32(pixel), x, w})
	}
	rays := make([]ray, 0, len(r.scene.Media)*len(c.entries))
	for k, medium := range r.scene.Media {
		for i := range c.entries {
			e := &c.entries[i]
			// Both indices are known to be in range since newRun.
			n, _ := r.scene.Material.Index(e.wavelength)
			m, _ := medium.Index(e.wavelength)
			rays = append(rays, ray{e.facet, int32(k), e.at, n, m, newDice(points, e.point, k)})
		}
	}
	ledgers := make([]Ledger, len(rays))
	c.sums = make([]sums, len(r.scene.Media))
	r.tracer.followAll(rays, ledgers, c.sums)
	for k := range c.sums {
		c.sums[k][rayCount] = float64(len(c.entries))
		c.ledgers = append(c.ledgers, ledgers[k*len(c.entries):(k+1)*len(c.entries)])
	}
	return c
}

// add takes a chunk into the run's sums and maps.
func (r *run) add(c *chunk) {
	r.rays += len(c.entries)
	for k := range r.columns {
		col := &r.columns[k]
		col.scrambled[c.scrambling].add(&c.sums[k])
		for i := range c.entries {
			col.mapped.add(int(c.entries[i].pixel), &c.ledgers[k][i])
		}
	}
}

// result returns all that is known so far.
func (r *run) result() *Result {
	res := &Result{Rays: r.rays, Done: r.done()}
	shown := r.settings.Wavelength
	if shown == 0 {
		shown = gems.LineD
	}
	stone, media, _ := r.scene.indices(shown) // in range since newRun
	for k := range r.columns {
		mean, se := means(&r.columns[k].scrambled)
		c := Column{
			Medium:        r.scene.Media[k],
			IndexStone:    stone,
			IndexMedium:   media[k],
			Ledger:        mean.ledger(),
			StandardError: se.ledger(),
			Lit:           mean.lit(r.settings.Below),
			LeakyArea:     mean[leakyArea],
			LeakyError:    se[leakyArea],
			WindowedArea:  mean[windowedArea],
			WindowedError: se[windowedArea],
			Map:           r.columns[k].mapped.clone(),
		}
		for s := range r.columns[k].scrambled {
			c.Segments += int64(r.columns[k].scrambled[s][segmentCount])
		}
		copy(c.From[:], mean[firstFrom:])
		copy(c.FromError[:], se[firstFrom:])
		c.Critical, c.HasCritical = CriticalAngle(c.IndexStone, c.IndexMedium)
		res.Columns = append(res.Columns, c)
	}
	return res
}
