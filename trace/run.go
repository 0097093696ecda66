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
// calls report, which may be nil, after each pass with all that is known so far,
// coarse first; the result it is given is its own to keep. When ctx is cancelled
// Run returns the last result that was reported (nil if there is none) and the cause.
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
		if report == nil && !r.finished() {
			continue
		}
		last = r.result()
		last.Elapsed = time.Since(start)
		if report != nil {
			report(last)
		}
	}
	return last, nil
}

const (
	leastPoints = 512         // of each scrambling
	firstPoints = chunkPoints // in the first pass, unless fewer will do
	passPoints  = 16 << 10    // in one pass at most
	mostPoints  = 1 << 30     // the sequence has 2^32
	leastRays   = 4           // a pixel, before the error alone may end a run
)

// run is the state of one call of Run.
type run struct {
	scene    Scene
	settings Settings
	tracer   *tracer
	points   [scramblings]points
	columns  []columnState

	traced   int // points of each scrambling so far
	together int // scramblings that are traced together
	rays     int
	error    float64 // largest standard error of any ledger entry

	symmetry *symmetry // nil where the whole picture must be traced
	images   int       // that each ray has in the picture, itself included
	grid     *grid     // of the maps
	put      []int     // images of each ray that are put into the maps
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
	if s := r.tracer.symmetry(scene.Stone, scene.byTier()); (settings.Light == nil || settings.Light.turns()) && !scene.leans(r.tracer.outline.eye) {
		r.lay(s)
	} else {
		r.lay(noSymmetry())
	}
	return r, nil
}

// lay lays the sample points of the run into the sector of a symmetry, and makes maps.
func (r *run) lay(s symmetry) {
	r.symmetry, r.images = nil, len(s.images)
	if r.images > 1 {
		r.symmetry = &s
	}
	scene, settings := &r.scene, &r.settings
	r.grid, r.put = s.grid(r.tracer, settings.Pixels)
	r.columns = make([]columnState, len(scene.Surroundings))
	r.together = max(1, 4/len(r.columns))
	for k := range r.columns {
		c := &r.columns[k]
		c.mapped = newMap(r.grid, 2*r.tracer.outline.half*r.tracer.body.unit, settings.Colour, settings.Paths)
		if !scene.plain(k, *settings) && !(r.tracer.kernel != nil && scene.clean(k, *settings)) {
			c.traveller = scene.traveller(k, *settings, r.tracer)
			r.together = 1
		}
	}
}

// wanted is how many points of each scrambling give the mean number of rays a pixel that
// the settings ask for.
func (r *run) wanted() int {
	o := r.tracer.outline
	area := 4 * o.half * o.half // into which points are laid
	if r.symmetry != nil {
		area = r.symmetry.area()
	}
	pixel := 2 * o.half / float64(r.settings.Pixels)
	n := float64(r.settings.Samples) * area / (pixel * pixel) / scramblings
	return max(leastPoints, int(math.Ceil(n)))
}

// finished reports whether the settings are met.
func (r *run) finished() bool {
	switch {
	case r.traced >= mostPoints:
		return true
	case r.rays == 0, len(r.columns) > 0 && !complete(&r.columns[0].scrambled): // all columns have the same rays
		return false
	case r.settings.Samples > 0:
		return r.traced >= r.wanted()
	}
	return r.error < r.settings.Error && r.raysAPixel() >= leastRays
}

// raysAPixel counts a stone that lies between the middles of the pixels as one.
func (r *run) raysAPixel() float64 { return float64(r.rays*r.images) / float64(max(1, r.grid.area)) }

// done estimates the share of the work that is done. The error of scrambled
// points falls about as their number to the power of -3/4.
func (r *run) done() float64 {
	switch {
	case r.finished():
		return 1
	case r.settings.Samples > 0:
		return min(float64(r.traced)/float64(r.wanted()), 0.99)
	}
	return min(math.Pow(r.settings.Error/r.error, 4.0/3), r.raysAPixel()/leastRays, 0.99)
}

// pass traces further points of every scrambling, so that after any pass all scramblings
// have traced alike: as many as there are already, up to a bound and to what is wanted.
func (r *run) pass(ctx context.Context) error {
	n := min(max(firstPoints, r.traced), passPoints)
	if left := r.wanted() - r.traced; r.settings.Samples > 0 && left > 0 {
		n = min(n, left)
	}
	a := adder{run: r, waiting: map[int]*chunk{}, batch: scramblings / r.together}
	units := (n + chunkPoints - 1) / chunkPoints * a.batch
	var next atomic.Int64
	var workers sync.WaitGroup
	for range min(r.settings.Workers, units) {
		workers.Go(func() {
			var s scratch
			for ctx.Err() == nil {
				unit := int(next.Add(1)) - 1
				if unit >= units {
					return
				}
				first := unit / a.batch * chunkPoints
				c := &chunk{unit: unit, first: unit % a.batch * r.together}
				r.trace(c, &s, uint32(r.traced+first), uint32(r.traced+min(first+chunkPoints, n)))
				a.take(c)
			}
		})
	}
	workers.Wait()
	if a.added < units {
		return context.Cause(ctx)
	}
	r.traced += n
	r.error = 0
	for i := range r.columns {
		_, se := means(&r.columns[i].scrambled)
		r.error = max(r.error, se.ledger().Max())
	}
	return nil
}

// adder takes chunks into a run in the order of their numbers, whoever traced them:
// sums of rounded numbers depend on their order. It takes a batch at a time, which is
// alike of every scrambling. The workers do that themselves, one at a time, so that a run
// keeps no more processors busy than it was given.
type adder struct {
	run     *run
	batch   int        // chunks in a batch
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

// next takes the next batch off the chunks that wait; nil if one of it is not there yet.
func (a *adder) next() (batch []*chunk) {
	for i := range a.batch {
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
		}
		switch {
		case res.Done == 1: // nothing more will be put into the map
			c.Map = r.columns[k].mapped
		case !r.settings.MapsLast:
			c.Map = r.columns[k].mapped.clone()
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
