package model

import (
	"context"
	"image"
	"math"
	"slices"

	"pavilight/app/picture"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// Strip shows how the stone looks as it rocks: the maps and ledgers, coarse, over a
// range of tilts. It is replaced, never changed.
type Strip struct {
	Tilts   []facets.Angle  // in growing order, negative away from the view's turn
	Results []*trace.Result // by tilt; nil where it is not traced yet
	Around  []Around        // the columns
	Done    bool

	subject  Subject
	settings trace.Settings
}

// StripRange is how far the strip rocks to either side unless the user sets another
// range. It rocks along the view's turn.
const StripRange = 20 * facets.Degree

// How far the user may let the strip rock.
const (
	leastStripRange = 0.5 // degrees
	mostStripRange  = 80
)

// StripRange returns how far the strip rocks to either side.
func (l *Look) StripRange() facets.Angle { return l.reach }

// SetStripRange lets the strip rock as far to either side, and traces it anew.
func (l *Look) SetStripRange(reach facets.Angle) error {
	if deg := reach.Degrees(); !(deg >= leastStripRange && deg <= mostStripRange) {
		return words.Errorf("the strip rocks from %v° to %v° to either side", leastStripRange, mostStripRange)
	}
	if reach != l.reach {
		l.reach, l.latest.reach = reach, reach
		l.restart()
	}
	return nil
}

// Stops of the strip.
const (
	stripStops  = 9
	stripPixels = 72
	stripError  = 0.002 // enough for a curve an inch high
)

// newStrip returns a strip with nothing traced yet.
func newStrip(subject Subject, settings trace.Settings, around []Around, reach facets.Angle) *Strip {
	settings.Pixels, settings.Error, settings.View.Tilt = stripPixels, stripError, 0
	s := &Strip{
		Tilts: make([]facets.Angle, stripStops), Results: make([]*trace.Result, stripStops),
		Around: around, subject: subject, settings: settings,
	}
	for i := range s.Tilts {
		s.Tilts[i] = reach * facets.Angle(2*i-stripStops+1) / (stripStops - 1)
	}
	return s
}

// like reports whether the other strip would show the same.
func (s *Strip) like(o *Strip) bool {
	return o != nil && s.subject == o.subject && s.settings == o.settings &&
		slices.Equal(s.Around, o.Around) && slices.Equal(s.Tilts, o.Tilts)
}

// order returns the stops, the middle one first.
func (s *Strip) order() []int {
	order := make([]int, len(s.Tilts))
	for k := range order {
		order[k] = len(s.Tilts)/2 + (k+1)/2*(1-2*(k%2))
	}
	return order
}

// traceStrip traces the stops and hands over a new strip after each.
func (l *Look) traceStrip(ctx context.Context, s *Strip, hand func(*Strip)) error {
	scene := trace.Scene{Stone: s.subject.Stone, Material: s.subject.Material, Surroundings: surroundings(s.Around)}
	for k, i := range s.order() {
		settings := s.settings
		settings.View.Tilt = s.Tilts[i]
		result, err := l.trace(ctx, scene, settings, nil)
		if err != nil {
			return err
		}
		next := *s
		next.Results = slices.Clone(s.Results)
		next.Results[i], next.Done = result, k == len(s.Tilts)-1
		s = &next
		hand(s)
	}
	return nil
}

// StripPicture paints the small map of a stop, of the first column, of what StripMeaning
// tells; nil where it is not traced yet.
func (l *Look) StripPicture(stop int) *image.RGBA {
	if l.Strip == nil || l.Strip.Results[stop] == nil || len(l.Strip.Results[stop].Columns) == 0 {
		return nil
	}
	m := l.Strip.Results[stop].Columns[0].Map
	entry := l.stripEntry()
	field := m.Field(entry)
	dst := image.NewRGBA(image.Rect(0, 0, m.Pixels, m.Pixels))
	picture.Paint(dst, field, m.Pixels, l.maps[entry])
	clearOutside(dst, field)
	return dst
}

// StripShare returns the mean of what StripMeaning tells at a stop in a column's
// surrounding, false where it is not traced yet.
func (l *Look) StripShare(stop, column int) (float64, bool) {
	if l.Strip == nil || l.Strip.Results[stop] == nil || column >= len(l.Strip.Results[stop].Columns) {
		return 0, false
	}
	return l.stripEntry().Of(l.Strip.Results[stop].Columns[column].Ledger), true
}

// StripStop returns the stop of the strip at which the maps stand, false between two.
func (l *Look) StripStop() (int, bool) {
	if l.Strip == nil {
		return 0, false
	}
	for i, t := range l.Strip.Tilts {
		if math.Abs((t - l.settings.View.Tilt).Degrees()) < sameAngle {
			return i, true
		}
	}
	return 0, false
}
