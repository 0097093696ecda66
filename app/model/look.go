package model

import (
	"context"
	"errors"
	"image"
	"runtime"
	"slices"
	"sync/atomic"
	"time"

	"pavilight/app/picture"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Subject is a stone ready to be looked at.
type Subject struct {
	Stone    *facets.Stone
	Material *gems.Material
	Measures facets.Measures
}

// Around is what surrounds the stone in one column.
type Around struct {
	Medium *gems.Material
	Dish   bool // the stone lies in a dish of the medium and is seen through its surface, from air
}

// surroundings returns the columns as the tracer takes them.
func surroundings(around []Around) []trace.Surrounding {
	s := make([]trace.Surrounding, len(around))
	for i, a := range around {
		s[i] = trace.Surrounding{Medium: a.Medium, Dish: a.Dish}
	}
	return s
}

// Rows is how many quantities the grid of maps shows at once.
const Rows = 2

// Look is the state behind the maps: what is traced, how far it has come and what
// was found so far. A change of stone or settings ends the run under way as soon
// as that has given its first, coarse answer, and starts another; a stone that
// cannot be had leaves the last good one where it is.
type Look struct {
	Subject Subject  // the last stone that could be had; its Stone is nil before the first
	Frame   *Frame   // the maps; nil before the first answer
	Trouble error    // why the latest plan or settings could not be shown; nil if they are
	Around  []Around // one column each
	Row     [Rows]Shown
	Pointer Pointer
	Ray     *Ray   // the ray that is followed; nil for none
	Strip   *Strip // how it looks when rocked; nil before the first maps are refined

	do       func(func())
	onChange func(Change)
	words    *words.Words
	trace    tracing
	settings trace.Settings
	lights   []string     // that colour is seen under, by column; replaced, never changed
	reach    facets.Angle // of the strip
	maps     [shownCount]*picture.ColourMap

	latest  request // what should be shown
	waiting bool    // latest has not been started yet
	running *run
	number  int
	stopped bool // by the user; a change starts anew
	buffers buffers
}

// Change says what an onChange is about.
type Change int

// The changes, one at a time.
const (
	StoneChanged   Change = iota // Subject or Trouble
	MapsChanged                  // Frame, and with it the ledger
	StateChanged                 // Progress
	PointerChanged               // Pointer
	RayChanged                   // Ray
	StripChanged                 // Strip
)

// Pointer is where the maps are being asked, in shares of the picture from its top
// left corner.
type Pointer struct {
	Over bool
	X, Y float64
}

// Frame is one state of the maps. It is replaced, never changed; its pictures may
// be shown until the frame after it has come.
type Frame struct {
	Subject  Subject
	Settings trace.Settings
	Around   []Around
	Result   *trace.Result
	Seen     *trace.Result // path length and colour, where a row shows them; nil before the first
	Row      [Rows]Shown
	Fields   [Rows][][]float32   // by row and column: shares, mm, or luminance; nil where nothing is known yet
	Pictures [Rows][]*image.RGBA // by row and column; clear outside the outline
	Late     [Rows]bool          // nothing is known yet: the pictures are those before, or clear
	Most     [Rows]float64       // the number at the top of the row's scale
	Share    float64             // of the work done
	Final    bool                // the run reached its goal

	extras extras // gathered in Seen
}

// tracing is trace.Run or, in tests, what stands in for it.
type tracing func(context.Context, trace.Scene, trace.Settings, func(*trace.Result)) (*trace.Result, error)

// request is one stone, how to get it and how to look at it.
type request struct {
	solve    func() (Subject, error)
	settings trace.Settings
	around   []Around
	extras   extras
	reach    facets.Angle // of the strip
	strip    *Strip       // the last that is complete, which need not be traced again; may be nil
	lastGood bool         // not the latest plan, which cannot be had, but the stone before it
}

// run is one run under way. Its fields belong to the window's goroutine, but for
// pending, which hands frames over.
type run struct {
	number   int
	request  request
	cancel   context.CancelFunc
	finished chan struct{}
	answered bool // its first frame has arrived
	share    float64
	pending  atomic.Pointer[Frame]
}

// DefaultMapPixels is the edge of a map before the window's size is known.
const DefaultMapPixels = 300

// NewLook returns the state before anything was shown: air, water and oil, light
// return over leakage, face-up, a head of 10 degrees.
//
// do hands work to the window's goroutine, in order, without waiting for it;
// onChange is called there.
func NewLook(do func(func()), onChange func(Change)) (*Look, error) {
	l := &Look{
		Row:      [Rows]Shown{Shown(trace.Returned), Shown(trace.Leaked)},
		reach:    StripRange,
		do:       do,
		onChange: onChange,
		trace:    trace.Run,
		settings: trace.Settings{
			Head:    10 * facets.Degree,
			Pixels:  DefaultMapPixels,
			Seed:    1,
			Workers: max(1, runtime.GOMAXPROCS(0)-1), // one core stays with the window
		},
	}
	for _, key := range []string{"air", "water", "oil"} {
		m, err := gems.Find(key)
		if err != nil {
			return nil, err
		}
		l.Around = append(l.Around, Around{Medium: m})
		l.lights = append(l.lights, "room")
	}
	for q := range l.maps {
		l.maps[q] = colourMap(Shown(q))
	}
	return l, nil
}

// colourMap returns the colours of a quantity: one map for light that serves the
// viewer, another for light that is lost to them.
func colourMap(s Shown) *picture.ColourMap {
	if s == Shown(trace.Returned) || s == Shown(trace.Surface) {
		return picture.Cividis()
	}
	return picture.Cubehelix()
}

// Show asks for the maps of another stone. solve is called once or more often, on
// another goroutine.
func (l *Look) Show(solve func() (Subject, error)) {
	l.latest = request{solve: solve, settings: l.settings, around: l.Around, extras: extrasFor(l.Row, l.lights), reach: l.reach}
	l.restart()
}

// Settings returns how the stone is looked at.
func (l *Look) Settings() trace.Settings { return l.settings }

// Adjust changes how the stone is looked at and traces anew if that is a change.
func (l *Look) Adjust(change func(*trace.Settings)) {
	before := l.settings
	change(&l.settings)
	if l.settings == before {
		return
	}
	l.latest.settings = l.settings
	l.restart()
}

// SetAround puts another surrounding into a column and traces anew.
func (l *Look) SetAround(column int, a Around) {
	if l.Around[column] == a {
		return
	}
	around := slices.Clone(l.Around)
	around[column] = a
	l.Around, l.latest.around = around, around
	l.restart()
}

// SetRow lets a row show something else. What is known is painted on another goroutine and
// comes a moment later; what is not is traced.
func (l *Look) SetRow(row int, s Shown) {
	if l.Row[row] == s {
		return
	}
	l.Row[row] = s
	if l.Frame != nil {
		l.show(l.repaint(l.Frame))
		l.paintLater()
	}
	l.wantExtras()
	l.onChange(MapsChanged)
}

// Stop ends the run under way; what was found stays.
func (l *Look) Stop() {
	l.stopped, l.waiting = true, false
	if l.running != nil {
		l.running.cancel()
	}
	l.onChange(StateChanged)
}

// Resume traces again what Stop ended.
func (l *Look) Resume() { l.restart() }

// Close ends the run under way and waits until all of its goroutines have
// returned. It may be called on the window's goroutine: runs never wait for that.
func (l *Look) Close() {
	l.stopped, l.waiting = true, false
	if l.running != nil {
		l.running.cancel()
		<-l.running.finished
	}
}

func (l *Look) restart() {
	if l.latest.solve == nil {
		return
	}
	l.stopped, l.waiting = false, true
	l.advance()
	l.onChange(StateChanged)
}

// advance starts what is waiting, or makes room for it: a run that has given its
// coarse answer is cancelled, one that has not is let come to it, so that the maps
// follow a moving slider however fast it moves.
func (l *Look) advance() {
	switch {
	case !l.waiting:
	case l.running == nil:
		l.waiting = false
		l.start(l.latest)
	case l.running.answered:
		l.running.cancel()
	}
}

func (l *Look) start(q request) {
	ctx, cancel := context.WithCancel(context.Background())
	l.number++
	if l.Strip != nil && l.Strip.Done {
		q.strip = l.Strip
	}
	r := &run{number: l.number, request: q, cancel: cancel, finished: make(chan struct{})}
	l.running = r
	row := l.Row
	go func() {
		defer close(r.finished)
		err := l.trail(ctx, r, row)
		l.do(func() { l.ended(r, err) })
	}()
}

// solveError marks an error that came from the plan, not from the tracing.
type solveError struct{ error }

func (e solveError) Unwrap() error { return e.error }

// trail solves and traces, on a goroutine of its own, and hands over what it finds.
func (l *Look) trail(ctx context.Context, r *run, row [Rows]Shown) error {
	subject, err := r.request.solve()
	if err != nil {
		return solveError{err}
	}
	l.do(func() { l.solved(r, subject) })
	scene := trace.Scene{Stone: subject.Stone, Material: subject.Material, Surroundings: surroundings(r.request.around)}
	pace := newPace()
	extras := r.request.extras
	parts := 1.0 // of the work
	if extras.any() {
		parts = 2
	}
	hand := func(f Frame) {
		f.Subject, f.Settings, f.Around, f.Row = subject, r.request.settings, r.request.around, row
		painted := l.paint(f)
		if late := r.pending.Swap(painted); late != nil {
			l.buffers.giveBack(late) // nobody has seen it; the new one takes its turn
			return
		}
		l.do(func() { l.arrived(r, r.pending.Swap(nil)) })
	}
	result, err := l.trace(ctx, scene, r.request.settings, func(result *trace.Result) {
		if ctx.Err() == nil && pace.due(time.Now()) {
			hand(Frame{Result: result, Share: result.Done / parts})
		}
	})
	if err != nil {
		return err
	}
	hand(Frame{Result: result, Share: 1 / parts, Final: parts == 1})
	if extras.any() {
		if err := l.traceExtras(ctx, scene, r.request, func(seen *trace.Result, final bool) {
			if final || pace.due(time.Now()) {
				hand(Frame{Result: result, Seen: seen, extras: extras, Share: (1 + seen.Done) / parts, Final: final})
			}
		}); err != nil {
			return err
		}
	}
	strip := newStrip(subject, r.request.settings, r.request.around, r.request.reach)
	if strip.like(r.request.strip) {
		return nil
	}
	return l.traceStrip(ctx, strip, func(s *Strip) { l.do(func() { l.rocked(r, s) }) })
}

// traceExtras gathers what the fast maps do not hold, one light after the other, and hands
// it over as it comes. Columns whose light's turn has not come have no map.
func (l *Look) traceExtras(ctx context.Context, scene trace.Scene, q request, hand func(*trace.Result, bool)) error {
	whole := &trace.Result{Columns: make([]trace.Column, len(q.around))}
	parties := q.extras.parties(len(q.around))
	for k, party := range parties {
		settings, err := q.extras.settings(q.settings, party.light)
		if err != nil {
			return err
		}
		part := scene
		part.Surroundings = nil
		for _, j := range party.columns {
			part.Surroundings = append(part.Surroundings, scene.Surroundings[j])
		}
		with := func(seen *trace.Result) *trace.Result {
			together := *seen
			together.Columns = slices.Clone(whole.Columns)
			together.Done = (float64(k) + seen.Done) / float64(len(parties))
			for i, j := range party.columns {
				together.Columns[j] = seen.Columns[i]
			}
			return &together
		}
		seen, err := l.trace(ctx, part, settings, func(seen *trace.Result) {
			if ctx.Err() == nil {
				hand(with(seen), false)
			}
		})
		if err != nil {
			return err
		}
		whole = with(seen)
		hand(whole, k == len(parties)-1)
	}
	return nil
}

// rocked takes a strip, as far as it has come.
func (l *Look) rocked(r *run, s *Strip) {
	if !l.stale(r) && !l.stopped {
		l.Strip = s
		l.onChange(StripChanged)
	}
}

// pace spaces the frames of a run: the first at once, then ten a second, and four
// once two seconds have gone and little changes any more.
type pace struct{ began, last time.Time }

func newPace() *pace { return &pace{} }

func (p *pace) due(now time.Time) bool {
	if p.began.IsZero() {
		p.began, p.last = now, now
		return true
	}
	wait := 100 * time.Millisecond
	if now.Sub(p.began) > 2*time.Second {
		wait = 250 * time.Millisecond
	}
	if now.Sub(p.last) < wait {
		return false
	}
	p.last = now
	return true
}

// paint fills in a frame's fields and pictures. It may run on any goroutine.
func (l *Look) paint(f Frame) *Frame {
	columns := f.Result.Columns
	f.Pictures = l.buffers.take(len(columns), f.Settings.Pixels)
	for i := range f.Row {
		l.paintRow(&f, i)
	}
	return &f
}

// repaint makes the frame anew for what the rows show now. It is called on the window's
// goroutine, so what is painted already is copied, and the rest is left to paintLater.
func (l *Look) repaint(f *Frame) *Frame {
	again := *f
	again.Row = l.Row
	again.Pictures = l.buffers.take(len(f.Result.Columns), f.Settings.Pixels)
	for i := range again.Row {
		if again.Row[i] != f.Row[i] {
			again.Fields[i], again.Late[i], again.Most[i] = nil, true, 1
		}
		for j, dst := range again.Pictures[i] {
			if again.Row[i] == f.Row[i] {
				copy(dst.Pix, f.Pictures[i][j].Pix)
			} else {
				clear(dst.Pix)
			}
		}
	}
	return &again
}

// clearOutside lets the window's ground show around the stone, in any theme.
func clearOutside(dst *image.RGBA, field []float32) {
	for i, v := range field {
		if v != v { // NaN
			clear(dst.Pix[4*i : 4*i+4])
		}
	}
}

// solved takes a stone that could be had.
func (l *Look) solved(r *run, subject Subject) {
	if l.stale(r) {
		return
	}
	if r.request.lastGood {
		return
	}
	l.Subject, l.Trouble = subject, nil
	l.onChange(StoneChanged)
}

// arrived takes a frame, unless its run is no longer the one that counts.
func (l *Look) arrived(r *run, f *Frame) {
	if f == nil {
		return
	}
	if l.stale(r) || l.stopped && !f.Final {
		l.buffers.giveBack(f)
		return
	}
	r.answered, r.share = true, f.Share
	if f.Row != l.Row { // another quantity was chosen meanwhile
		painted := f
		f = l.repaint(painted)
		l.buffers.giveBack(painted)
	}
	l.show(f)
	l.paintLater()
	l.onChange(MapsChanged)
	l.advance()
}

func (l *Look) show(f *Frame) {
	before := l.Frame
	if before != nil {
		f.keepLate(before)
		l.buffers.giveBack(before)
	}
	l.Frame = f
	if before == nil || before.Subject != f.Subject || before.Settings != f.Settings || !slices.Equal(before.Around, f.Around) {
		l.followAgain()
	}
}

// ended takes the end of a run, however it came.
func (l *Look) ended(r *run, err error) {
	if l.stale(r) {
		return
	}
	r.cancel()
	l.running = nil
	var unsolved solveError
	switch {
	case errors.As(err, &unsolved):
		l.Trouble = unsolved.error
		l.onChange(StoneChanged)
		l.finishLastGood(r)
	case err != nil && !errors.Is(err, context.Canceled):
		l.Trouble = err
		l.onChange(StoneChanged)
	}
	l.advance()
	l.onChange(StateChanged)
}

// finishLastGood goes on with the last good stone, whose maps may have been left
// coarse, or be of other settings, when the plan that cannot be solved came.
func (l *Look) finishLastGood(failed *run) {
	good, q := l.Subject, failed.request
	if l.waiting || good.Stone == nil || l.Frame != nil && l.Frame.Final && l.Frame.Subject == good &&
		l.Frame.Settings == q.settings && slices.Equal(l.Frame.Around, q.around) && l.Frame.extras.cover(q.extras) {
		return
	}
	q.solve = func() (Subject, error) { return good, nil }
	q.lastGood = true
	l.start(q)
}

func (l *Look) stale(r *run) bool { return l.running == nil || r.number != l.running.number }

// Progress is how far the maps have come.
type Progress struct {
	Active  bool // a run is under way
	Stopped bool // by the user, before the goal
	Share   float64
}

// Progress returns how far the maps have come.
func (l *Look) Progress() Progress {
	refined := l.running != nil && l.Frame != nil && l.Frame.Final && l.running.share == 1
	p := Progress{Active: l.running != nil && !refined || l.waiting, Stopped: l.stopped && (l.Frame == nil || !l.Frame.Final)}
	switch {
	case l.running != nil:
		p.Share = l.running.share
	case l.Frame != nil:
		p.Share = l.Frame.Share
	}
	if p.Stopped {
		p.Active = false
	}
	return p
}

// Point asks the maps at a place of the picture, in shares from its top left.
func (l *Look) Point(x, y float64) {
	l.Pointer = Pointer{true, min(1, max(0, x)), min(1, max(0, y))}
	l.onChange(PointerChanged)
}

// PointAway ends asking.
func (l *Look) PointAway() {
	l.Pointer = Pointer{}
	l.onChange(PointerChanged)
}
