package trace

import (
	"context"
	"errors"
	"math"
	"runtime"
	"slices"
	"sync"
	"sync/atomic"
	"time"

	"pavilight/gems"
)

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

	pixelsInside float64   // how many pixels show the stone
	symmetry     *symmetry // nil where the whole picture must be traced
	images       int       // that each ray has in the map, itself included
}

// columnState is what one surrounding has gathered.
type columnState struct {
	scrambled [scramblings]sums
	mapped    *Map
	traveller *traveller // nil where the plain tracer will do
}

func newRun(scene Scene, settings Settings) (*run, error) {
	if err := errors.Join(settings.check(), scene.check()); err != nil {
		return nil, &InvalidError{err}
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
		if err := scene.known(w); err != nil {
			return nil, err
		}
	}
	var err error
	if r.tracer, err = newTracer(scene.Stone, settings); err != nil {
		return nil, err
	}
	if !settings.exact {
		r.tracer.kernel = newKernel(r.tracer)
	}
	for i := range r.points {
		r.points[i] = newPoints(settings.Seed, i)
	}
	r.images = 1
	if s := r.tracer.symmetry(scene.Stone, scene.byTier()); len(s.images) > 1 && (settings.Light == nil || settings.Light.turns()) && !scene.leans(r.tracer.outline.eye) {
		r.symmetry, r.images = &s, len(s.images)
	}
	inside := r.tracer.mask(settings.Pixels)
	for _, in := range inside {
		if in {
			r.pixelsInside++
		}
	}
	r.columns = make([]columnState, len(scene.Surroundings))
	for k := range r.columns {
		c := &r.columns[k]
		c.mapped = newMap(settings.Pixels, 2*r.tracer.outline.half*r.tracer.body.unit, inside, settings.Colour, settings.Paths)
		if !scene.plain(k, settings) && !(r.tracer.kernel != nil && scene.clean(k, settings)) {
			c.traveller = scene.traveller(k, settings, r.tracer)
		}
	}
	return r, nil
}

// finished reports whether the settings are met.
func (r *run) finished() bool {
	if r.chunks*chunkPoints >= mostPoints {
		return true
	}
	if r.rays == 0 {
		return false
	}
	rays, pixels := float64(r.rays*r.images), r.pixelsInside
	if r.settings.Samples > 0 {
		return rays >= float64(r.settings.Samples)*pixels
	}
	return r.error < r.settings.Error && rays >= leastRays*pixels
}

// done estimates the share of the work that is done. The error of scrambled
// points falls about as their number to the power of -3/4.
func (r *run) done() float64 {
	if r.finished() {
		return 1
	}
	rays, pixels := float64(r.rays*r.images), r.pixelsInside
	if r.settings.Samples > 0 {
		return rays / (float64(r.settings.Samples) * pixels)
	}
	return min(math.Pow(r.settings.Error/r.error, 4.0/3), rays/(leastRays*pixels), 0.99)
}

// pass traces further points of every scrambling: as many as there are already,
// up to a bound.
func (r *run) pass(ctx context.Context) error {
	chunks := max(1, min(r.chunks, mostChunksAPass))
	units := chunks * scramblings
	var next atomic.Int64
	var workers sync.WaitGroup
	adder := adder{run: r, waiting: map[int]*chunk{}}
	for range min(r.settings.Workers, units) {
		workers.Go(func() {
			for ctx.Err() == nil {
				unit := int(next.Add(1)) - 1
				if unit >= units {
					return
				}
				adder.take(r.trace(unit, unit%scramblings, r.chunks+unit/scramblings))
			}
		})
	}
	workers.Wait()
	if adder.added < units {
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

// adder takes chunks into a run in the order of their numbers, whoever traced them:
// sums of rounded numbers depend on their order. It takes one of every scrambling at a
// time. The workers do that themselves, one at a time, so that a run keeps no more
// processors busy than it was given.
type adder struct {
	run     *run
	mutex   sync.Mutex // over what follows
	waiting map[int]*chunk
	added   int
	adding  bool // a worker is at it; it takes along what is handed in meanwhile
}

func (a *adder) take(c *chunk) {
	a.mutex.Lock()
	defer a.mutex.Unlock()
	a.waiting[c.unit] = c
	if a.adding {
		return
	}
	a.adding = true
	for batch := a.next(); batch != nil; batch = a.next() {
		a.mutex.Unlock()
		a.run.add(batch)
		a.mutex.Lock()
		a.added += len(batch)
	}
	a.adding = false
}

// next takes the next chunk of every scrambling off those that wait; nil if one of
// them is not there yet.
func (a *adder) next() (batch []*chunk) {
	for i := range scramblings {
		c := a.waiting[a.added+i]
		if c == nil {
			return nil
		}
		batch = append(batch, c)
	}
	for _, c := range batch {
		delete(a.waiting, c.unit)
	}
	return batch
}

// chunk is the outcome of a run of points of one scrambling.
type chunk struct {
	unit, scrambling int
	entries          []entry
	pixels           [][]int32   // by image, in which it lies for each entry
	weights          []float64   // of each entry
	ledgers          [][]Ledger  // by column, of each entry
	lit              [][]float64 // likewise the luminance seen, where colour is gathered
	ways             [][]float64 // likewise the way inside times power, in units of the stone, where ways are
	sums             []sums      // by column
}

// entry is one viewing ray where it meets the stone.
type entry struct {
	point      uint32 // number of its sample point
	facet      int32
	at, along  vec
	wavelength gems.Wavelength
	index      float64    // of the stone there
	xyz        [3]float64 // how the wavelength counts for X, Y and Z; Y is the ray's weight in every mean
}

// trace follows one chunk of points in every surrounding.
func (r *run) trace(unit, scrambling, number int) *chunk {
	c := &chunk{unit: unit, scrambling: scrambling, sums: make([]sums, len(r.columns))}
	c.entries, c.pixels = make([]entry, 0, chunkPoints), make([][]int32, r.images)
	for i := range c.pixels {
		c.pixels[i] = make([]int32, 0, chunkPoints)
	}
	c.weights = make([]float64, 0, chunkPoints)
	points := r.points[scrambling]
	for i := uint32(number * chunkPoints); i < uint32((number+1)*chunkPoints); i++ {
		if e, u, v, ok := r.enter(points, i); ok {
			c.entries = append(c.entries, e)
			c.weights = append(c.weights, e.xyz[1])
			r.appendPixels(c.pixels, u, v)
		}
	}
	c.ledgers, c.lit = make([][]Ledger, len(r.columns)), make([][]float64, len(r.columns))
	c.ways = make([][]float64, len(r.columns))
	rays := make([]ray, 0, len(r.columns)*len(c.entries)) // of all plain columns, one after the other
	for k := range r.columns {
		if t := r.columns[k].traveller; t != nil {
			c.ledgers[k], c.lit[k], c.ways[k] = r.travel(t, points, k, c.entries, &c.sums[k])
		} else {
			rays = r.plainRays(rays, points, k, c.entries)
		}
	}
	ledgers := make([]Ledger, len(rays))
	var lit []float64
	if r.settings.lit() {
		lit = make([]float64, len(rays))
	}
	r.tracer.followAll(rays, ledgers, lit, c.sums)
	n := len(c.entries)
	for k := range r.columns {
		if r.columns[k].traveller == nil {
			c.ledgers[k], ledgers = ledgers[:n], ledgers[n:]
			if lit != nil {
				c.lit[k], lit = lit[:n], lit[n:]
			}
		}
	}
	return c
}

// enter makes sample point i an entry, at (u, v) of the picture; ok is false where it
// passes beside the stone.
func (r *run) enter(points points, i uint32) (e entry, u, v float64, ok bool) {
	px, py, pw := points.at(i)
	if r.symmetry != nil {
		u, v = r.symmetry.place(px, py)
	} else {
		u, v = (2*px-1)*r.tracer.outline.half, (2*py-1)*r.tracer.outline.half
	}
	facet, x, d, ok := r.tracer.arrive(u, v)
	if !ok {
		return entry{}, 0, 0, false
	}
	e = entry{point: i, facet: int32(facet), at: x, along: d, xyz: [3]float64{1, 1, 1}}
	switch {
	case r.settings.Wavelength != 0:
		e.wavelength = r.settings.Wavelength
	case r.settings.Colour:
		e.wavelength, e.xyz = colourWavelength(pw)
	default:
		e.wavelength = gems.SpectrumWavelength(pw)
	}
	e.index, _ = r.scene.Material.Index(e.wavelength) // known to exist since newRun
	return e, u, v, true
}

// appendPixels appends, by image, the pixel in which that of (u, v) of the picture lies.
func (r *run) appendPixels(pixels [][]int32, u, v float64) {
	k, n := float64(r.settings.Pixels)/(2*r.tracer.outline.half), r.settings.Pixels
	for i := range pixels {
		iu, iv := u, v
		if i > 0 {
			iu, iv = r.symmetry.image(u, v, i)
		}
		column, row := int((r.tracer.outline.half+iu)*k), int((r.tracer.outline.half+iv)*k)
		// Images may round across the picture's edge.
		column, row = max(0, min(column, n-1)), max(0, min(row, n-1))
		pixels[i] = append(pixels[i], int32((n-1-row)*n+column))
	}
}

// plainRays appends a column's rays for the plain tracer.
func (r *run) plainRays(rays []ray, points points, column int, entries []entry) []ray {
	medium := r.scene.Surroundings[column].Medium
	unit, colour := r.tracer.body.unit, r.scene.Material.Absorption
	for i := range entries {
		e := &entries[i]
		m, _ := medium.Index(e.wavelength) // known to exist since newRun
		rays = append(rays, ray{
			facet: e.facet, column: int32(column), at: e.at, along: e.along,
			n: e.index, m: m, absorb: meanAbsorption(colour, e.wavelength) * unit,
			wavelength: e.wavelength, weight: e.xyz[1], die: newDice(points, e.point, column),
		})
	}
	return rays
}

// travel traces entries with a general tracer; lit is what is seen by each, ways the
// way inside times power.
func (r *run) travel(t *traveller, points points, column int, entries []entry, total *sums) (ledgers []Ledger, lit, ways []float64) {
	ledgers, lit, ways = make([]Ledger, len(entries)), make([]float64, len(entries)), make([]float64, len(entries))
	var at lambda
	for i := range entries {
		e := &entries[i]
		t.look(e.wavelength, r.scene.Material, &at)
		var one sums
		ledgers[i] = t.send(int(e.facet), e.at, e.along, &at, newDice(points, e.point, column), &one)
		one.addLedger(ledgers[i])
		one[rayCount] = 1
		lit[i] = one[litSurface] + one[litReturned] + one[litLeaked]
		ways[i] = one[pathLength]
		segments := one[segmentCount]
		total.addWeighted(e.xyz[1], &one)
		total[segmentCount] += segments - e.xyz[1]*segments // a count knows no weight
	}
	return ledgers, lit, ways
}

// add takes chunks into the run's sums and maps. It goes through the map image by
// image, since each image of all entries falls on one sector of it: a part that stays
// in the processor's memory.
func (r *run) add(batch []*chunk) {
	for _, c := range batch {
		r.rays += len(c.entries)
		for k := range r.columns {
			r.columns[k].scrambled[c.scrambling].add(&c.sums[k])
		}
	}
	for k := range r.columns {
		mapped := r.columns[k].mapped
		for image := range r.images {
			for _, c := range batch {
				for i, pixel := range c.pixels[image] {
					mapped.add(int(pixel), c.weights[i], &c.ledgers[k][i])
				}
				if r.settings.Colour {
					for i, pixel := range c.pixels[image] {
						mapped.addColour(int(pixel), c.lit[k][i], c.entries[i].xyz)
					}
				}
				if r.settings.Paths {
					for i, pixel := range c.pixels[image] {
						mapped.addWay(int(pixel), c.weights[i]*c.ways[k][i]*r.tracer.body.unit)
					}
				}
			}
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
	for k := range r.columns {
		mean, se := means(&r.columns[k].scrambled)
		c := Column{
			Surrounding:   r.scene.Surroundings[k],
			Ledger:        mean.ledger(),
			StandardError: se.ledger(),
			Lit:           mean.lit(r.settings.Below),
			LeakyArea:     mean[leakyArea],
			LeakyError:    se[leakyArea],
			WindowedArea:  mean[windowedArea],
			WindowedError: se[windowedArea],
			Map:           r.columns[k].mapped.clone(),
		}
		c.IndexStone, _ = r.scene.Material.Index(shown) // both known to exist since newRun
		c.IndexMedium, _ = c.Medium.Index(shown)
		if r.columns[k].traveller != nil || r.settings.lit() {
			c.Lit = mean.litByLight()
		}
		if r.columns[k].traveller != nil {
			if leaves := c.Ledger.Returned + c.Ledger.Head + c.Ledger.Leaked; leaves > 0 {
				c.PathLength = mean[pathLength] / leaves * r.tracer.body.unit
			}
		}
		for s := range r.columns[k].scrambled {
			c.Segments += int64(r.columns[k].scrambled[s][segmentCount])
		}
		copy(c.From[:], mean[firstFrom:])
		copy(c.FromError[:], se[firstFrom:])
		c.Critical, c.HasCritical = CriticalAngle(c.IndexStone, c.IndexMedium)
		if r.scene.double() {
			p, _ := r.scene.Material.Indices(shown)
			indices := p[:]
			slices.Sort(indices)
			for _, n := range slices.Compact(indices) {
				l := Limit{Index: n}
				l.Critical, l.HasCritical = CriticalAngle(n, c.IndexMedium)
				c.Limits = append(c.Limits, l)
			}
		}
		res.Columns = append(res.Columns, c)
	}
	return res
}
