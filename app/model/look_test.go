package model

import (
	"context"
	"errors"
	"math"
	"sync"
	"testing"
	"testing/synctest"
	"time"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// window stands in for the window's goroutine: what is handed to it waits until
// the test lets it work.
type window struct {
	mu   sync.Mutex
	jobs []func()
}

func (w *window) do(f func()) {
	w.mu.Lock()
	defer w.mu.Unlock()
	w.jobs = append(w.jobs, f)
}

// work does what was handed over, and reports whether there was anything.
func (w *window) work() bool {
	w.mu.Lock()
	jobs := w.jobs
	w.jobs = nil
	w.mu.Unlock()
	for _, f := range jobs {
		f()
	}
	return len(jobs) > 0
}

// settle lets all goroutines come to rest and does what they handed over, until
// nothing comes any more.
func (w *window) settle() {
	for again := true; again; {
		synctest.Wait()
		again = w.work()
	}
}

// engine stands in for trace.Run: it reports when it is told to. The strip's runs,
// which want no reports, it answers at once.
type engine struct {
	mu      sync.Mutex
	scenes  []trace.Scene
	asked   []trace.Settings // with each
	strips  []trace.View
	step    chan float64 // the share done to report; 1 ends the run
	running int
	most    int // runs at a time
}

func (e *engine) trace(ctx context.Context, scene trace.Scene, s trace.Settings, report func(*trace.Result)) (*trace.Result, error) {
	e.mu.Lock()
	if report == nil {
		defer e.mu.Unlock()
		e.strips = append(e.strips, s.View)
		return resultOf(scene, 1), nil
	}
	e.scenes, e.asked = append(e.scenes, scene), append(e.asked, s)
	e.running++
	e.most = max(e.most, e.running)
	e.mu.Unlock()
	defer func() {
		e.mu.Lock()
		e.running--
		e.mu.Unlock()
	}()
	for {
		select {
		case <-ctx.Done():
			return nil, context.Cause(ctx)
		case share := <-e.step:
			result := resultOf(scene, share)
			if share >= 1 {
				return result, nil
			}
			report(result)
		}
	}
}

func resultOf(scene trace.Scene, share float64) *trace.Result {
	result := &trace.Result{Done: share}
	for _, m := range scene.Surroundings {
		result.Columns = append(result.Columns, trace.Column{Surrounding: m, Map: &trace.Map{}})
	}
	return result
}

// stand is a Look on a stand-in window and engine.
type stand struct {
	*Look
	window  window
	engine  engine
	changes map[Change]int
}

func newStand(t *testing.T) *stand {
	s := &stand{changes: map[Change]int{}, engine: engine{step: make(chan float64)}}
	look, err := NewLook(s.window.do, func(c Change) { s.changes[c]++ })
	if err != nil {
		t.Fatal(err)
	}
	look.trace = s.engine.trace
	s.Look = look
	return s
}

func stoneNamed(name string) func() (Subject, error) {
	s := Subject{Stone: &facets.Stone{Name: name}}
	return func() (Subject, error) { return s, nil }
}

var errOpen = errors.New("the stone is open at the culet")

func noStone() (Subject, error) { return Subject{}, errOpen }

func (s *stand) report(t *testing.T, share float64) {
	t.Helper()
	select {
	case s.engine.step <- share:
		s.window.settle()
	case <-time.After(time.Minute): // of the bubble's clock
		t.Fatal("no run takes the step")
	}
}

func TestLookComesToAFinalFrame(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		if p := s.Progress(); !p.Active || p.Share != 0 {
			t.Errorf("progress %+v right after the start", p)
		}
		s.window.settle()
		s.report(t, 0.1)
		if s.Frame == nil || s.Frame.Final || s.Frame.Result.Done != 0.1 {
			t.Fatalf("after the first report the frame is %+v", s.Frame)
		}
		s.report(t, 1)
		if !s.Frame.Final || s.Progress().Active || s.Progress().Share != 1 {
			t.Errorf("at the end: final %v, progress %+v", s.Frame.Final, s.Progress())
		}
		if s.changes[MapsChanged] != 2 || s.changes[StoneChanged] != 1 {
			t.Errorf("changes told: %v", s.changes)
		}
	})
}

// A slider that moves faster than the maps come must still move the maps.
func TestEveryStartedRunGivesItsCoarseAnswer(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		for _, name := range []string{"two", "three", "four"} {
			s.Show(stoneNamed(name))
			s.window.settle()
		}
		if len(s.engine.scenes) != 1 {
			t.Fatalf("%d runs before the first answer, want one", len(s.engine.scenes))
		}
		s.report(t, 0.1)
		if s.Frame == nil || s.Frame.Subject.Stone.Name != "one" {
			t.Fatal("the first coarse answer was not shown")
		}
		if n := len(s.engine.scenes); n != 2 || s.engine.scenes[1].Stone.Name != "four" {
			t.Fatalf("%d runs, want the second on the newest stone", n)
		}
		s.report(t, 0.1)
		if s.Frame.Subject.Stone.Name != "four" {
			t.Errorf("frame shows %q", s.Frame.Subject.Stone.Name)
		}
		s.report(t, 1)
		if s.engine.most != 1 {
			t.Errorf("%d runs at a time, want one", s.engine.most)
		}
	})
}

func TestAnAnsweredRunEndsAtOnceForANewStone(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 0.1)
		s.Show(stoneNamed("two"))
		s.window.settle() // without any further step of the engine
		if n := len(s.engine.scenes); n != 2 || s.engine.scenes[1].Stone.Name != "two" {
			t.Fatalf("%d runs, want the new stone's to have begun", n)
		}
		s.Close()
	})
}

func TestLateReportsAreIgnored(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 0.1)
		// The second report is on its way to the window when the user stops.
		s.engine.step <- 0.2
		synctest.Wait()
		time.Sleep(time.Second) // the pace lets the next one through
		s.engine.step <- 0.3
		synctest.Wait()
		s.Stop()
		s.window.settle()
		if got := s.Frame.Result.Done; got != 0.1 {
			t.Errorf("the frame moved on to %v after Stop", got)
		}
		if p := s.Progress(); !p.Stopped || p.Active {
			t.Errorf("progress %+v, want stopped", p)
		}
		s.Resume()
		s.window.settle()
		s.report(t, 1)
		if !s.Frame.Final || s.Progress().Stopped {
			t.Errorf("after going on: final %v, %+v", s.Frame.Final, s.Progress())
		}
	})
}

func TestAPlanThatCannotBeSolvedLeavesTheStone(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("good"))
		s.window.settle()
		s.report(t, 0.1) // still coarse
		s.Show(noStone)
		s.window.settle()
		if !errors.Is(s.Trouble, errOpen) {
			t.Fatalf("trouble is %v", s.Trouble)
		}
		if s.Subject.Stone == nil || s.Subject.Stone.Name != "good" || s.Frame == nil {
			t.Fatal("the good stone is gone")
		}
		s.report(t, 1) // its maps are refined all the same
		if !s.Frame.Final || !errors.Is(s.Trouble, errOpen) {
			t.Errorf("final %v, trouble %v", s.Frame.Final, s.Trouble)
		}
		runs := len(s.engine.scenes)
		s.Show(noStone)
		s.window.settle()
		if len(s.engine.scenes) != runs {
			t.Error("maps that were complete were traced again")
		}
		s.Show(stoneNamed("mended"))
		s.window.settle()
		if s.Trouble != nil || s.Subject.Stone.Name != "mended" {
			t.Errorf("after mending: trouble %v, stone %q", s.Trouble, s.Subject.Stone.Name)
		}
		s.Close()
	})
}

func TestTracingErrorsAreTold(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		failure := errors.New("index known only from 400 to 700 nm")
		s.Look.trace = func(context.Context, trace.Scene, trace.Settings, func(*trace.Result)) (*trace.Result, error) {
			return nil, failure
		}
		s.Show(stoneNamed("one"))
		s.window.settle()
		if !errors.Is(s.Trouble, failure) || s.Progress().Active {
			t.Errorf("trouble %v, progress %+v", s.Trouble, s.Progress())
		}
	})
}

func TestFramesAreCoalesced(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		for i := range 50 { // the window does not come to work meanwhile
			s.engine.step <- float64(i) / 100
			synctest.Wait()
			time.Sleep(200 * time.Millisecond)
		}
		if n := len(s.window.jobs); n > 1 {
			t.Errorf("%d jobs wait for the window, want one", n)
		}
		s.window.settle()
		// The frames of the first two seconds come at 200 ms, the later at 400 ms.
		if got := s.Frame.Result.Done; got < 0.48 {
			t.Errorf("the window was given share %v, want the newest", got)
		}
		if n := len(s.buffers.free); n > mostSets {
			t.Errorf("%d sets of pictures kept", n)
		}
		s.Close()
	})
}

func TestCloseWaitsForTheRun(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.Close()
		s.engine.mu.Lock()
		defer s.engine.mu.Unlock()
		if s.engine.running != 0 {
			t.Error("a run goes on after Close")
		} // the bubble fails the test if any goroutine is left
	})
}

func TestSettingsAndMediaReachTheRun(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 0.5)
		diamond, err := gems.Find("diamond")
		if err != nil {
			t.Fatal(err)
		}
		s.SetAround(1, Around{Medium: diamond, Dish: true})
		s.Adjust(func(s *trace.Settings) { s.View.Tilt = 5 * facets.Degree })
		s.window.settle()
		last := s.engine.scenes[len(s.engine.scenes)-1]
		if last.Surroundings[1].Medium != diamond || !last.Surroundings[1].Dish || last.Surroundings[0].Medium.Key != "air" {
			t.Errorf("media of the run: %v", last.Surroundings)
		}
		runs := len(s.engine.scenes)
		s.Adjust(func(*trace.Settings) {})
		s.window.settle()
		if len(s.engine.scenes) != runs {
			t.Error("settings that did not change started a run")
		}
		s.Close()
	})
}

func TestPaceSpacesFrames(t *testing.T) {
	p := newPace()
	start := time.Unix(0, 0)
	got := 0
	for ms := 0; ms < 10000; ms++ {
		if p.due(start.Add(time.Duration(ms) * time.Millisecond)) {
			got++
		}
	}
	// One at once, twenty in the first two seconds, four a second in the other eight.
	if want := 1 + 20 + 32; got < want-2 || got > want {
		t.Errorf("%d frames in ten seconds, want about %d", got, want)
	}
}

// After the maps the strip is traced, from the middle out, and not again for
// another tilt of the same stone.
func TestStripFollowsTheMaps(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		s := newStand(t)
		s.Show(stoneNamed("one"))
		s.window.settle()
		s.report(t, 1)
		if s.Strip == nil || !s.Strip.Done || s.Strip.Tilts[0] != -StripRange || s.Strip.Tilts[stripStops-1] != StripRange {
			t.Fatalf("the strip after the maps: %+v", s.Strip)
		}
		if len(s.engine.strips) != stripStops || s.engine.strips[0].Tilt != 0 {
			t.Errorf("the strip was traced at %v, want the middle first and each stop once", s.engine.strips)
		}
		s.Adjust(func(set *trace.Settings) { set.View.Tilt = s.Strip.Tilts[2] })
		s.window.settle()
		s.report(t, 1)
		if len(s.engine.strips) != stripStops {
			t.Error("the strip was traced again for another tilt of the maps")
		}
		if stop, ok := s.StripStop(); !ok || stop != 2 {
			t.Errorf("the maps stand at stop %d, %v", stop, ok)
		}
		s.Adjust(func(set *trace.Settings) { set.View.Turn = facets.Degree })
		s.window.settle()
		s.report(t, 1)
		if len(s.engine.strips) != 2*stripStops {
			t.Error("the strip was not traced again for another direction of rocking")
		}
		if err := s.SetStripRange(45 * facets.Degree); err != nil {
			t.Fatal(err)
		}
		s.window.settle()
		s.report(t, 1)
		if len(s.engine.strips) != 3*stripStops || s.Strip.Tilts[0] != -45*facets.Degree || s.engine.strips[2*stripStops].Turn != facets.Degree {
			t.Errorf("the strip of another range: %d stops traced, from %v", len(s.engine.strips), s.Strip.Tilts[0])
		}
		for _, bad := range []float64{0, -5, 81, math.NaN()} {
			if err := s.SetStripRange(facets.Angle(bad) * facets.Degree); err == nil || s.StripRange() != 45*facets.Degree {
				t.Errorf("a range of %v° is taken", bad)
			}
		}
	})
}
