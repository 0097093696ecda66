package model

import (
	"math"

	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// QuantityName returns what a row of maps or of the ledger is called.
func QuantityName(q trace.Quantity) words.Key {
	switch q {
	case trace.Surface:
		return "Mirrored"
	case trace.Returned:
		return "Light return"
	case trace.Head:
		return "Head"
	case trace.Leaked:
		return "Leakage"
	case trace.Absorbed:
		return "Absorbed"
	}
	return "Unresolved"
}

// QuantityMeaning says what a quantity is, in a few words.
func QuantityMeaning(q trace.Quantity) words.Key {
	switch q {
	case trace.Surface:
		return "mirrored by the first surface"
	case trace.Returned:
		return "leaves upward, where light comes from"
	case trace.Head:
		return "leaves upward into the viewer's own head"
	case trace.Leaked:
		return "leaves downward: one sees what lies below"
	case trace.Absorbed:
		return "absorbed inside the stone"
	}
	return "still inside when tracing ended"
}

// Quantities lists what a row of maps can show, in the order of the ledger.
func Quantities() []trace.Quantity {
	return []trace.Quantity{trace.Returned, trace.Leaked, trace.Head, trace.Surface, trace.Absorbed}
}

// NameOf names a surrounding in short, as it stands within a sentence.
func (l *Look) NameOf(m *gems.Material) string { return l.words.Within(stock.ShortOf(l.words, m)) }

// Heading is what stands above a column of maps.
type Heading struct {
	Medium   string // its name
	Index    string // of the medium
	Critical string // the critical angle toward it, in words
}

// Heading returns what stands above a column.
func (l *Look) Heading(column int) Heading {
	a := l.Around[column]
	h := Heading{Medium: stock.ShortOf(l.words, a.Medium)}
	if a.Dish {
		h.Medium = l.words.Say("Dish of %s", l.words.Within(h.Medium))
	}
	if l.Frame == nil || column >= len(l.Frame.Result.Columns) || l.Frame.Around[column] != a {
		return h
	}
	c := &l.Frame.Result.Columns[column]
	h.Index = l.words.Say("%.3f", c.IndexMedium)
	if c.HasCritical {
		h.Critical = l.words.Say("critical %.1f°", c.Critical.Degrees())
	} else {
		h.Critical = l.words.Say("no critical angle")
	}
	return h
}

// LedgerRow is one line of the ledger under the maps.
type LedgerRow struct {
	Name    string
	Meaning words.Key // in a few words
	Entry   trace.Quantity
	Main    bool // what one looks for first
	Area    bool // an area of the picture, not one of the six entries
	Cells   []LedgerCell
}

// LedgerCell is one number of the ledger, with its standard error.
type LedgerCell struct {
	Share       float64
	Value       string // four decimals
	Error       string // of one standard error: ±0.0004
	Significant bool   // false for what would read as naught
}

// Ledger returns the rows under the maps: the entries that matter, then how much
// of the face leaks and how much of it one sees through. Nil before the first answer.
func (l *Look) Ledger() []LedgerRow {
	if l.Frame == nil {
		return nil
	}
	columns := l.Frame.Result.Columns
	var rows []LedgerRow
	for _, q := range append(Quantities(), trace.Unresolved) {
		row := LedgerRow{Name: l.words.Say(QuantityName(q)), Meaning: QuantityMeaning(q), Entry: q, Main: q == trace.Returned || q == trace.Leaked}
		matters := q != trace.Unresolved && q != trace.Absorbed
		for i := range columns {
			c := l.cell(q.Of(columns[i].Ledger), q.Of(columns[i].StandardError))
			matters = matters || c.Significant
			row.Cells = append(row.Cells, c)
		}
		if matters {
			rows = append(rows, row)
		}
	}
	leaky, window := LedgerRow{Name: l.words.Say("Leaky area"), Area: true,
		Meaning: "share of the rays of which more than half leaves downward in the end"}, LedgerRow{Name: l.words.Say("Window|one sees through"), Area: true,
		Meaning: "share of the rays of which more than half leaves downward where they first meet the pavilion: there one sees through"}
	for i := range columns {
		leaky.Cells = append(leaky.Cells, l.cell(columns[i].LeakyArea, columns[i].LeakyError))
		window.Cells = append(window.Cells, l.cell(columns[i].WindowedArea, columns[i].WindowedError))
	}
	return append(rows, leaky, window)
}

func (l *Look) cell(share, standardError float64) LedgerCell {
	const naught = 5e-5 // what four decimals write as 0.0000
	return LedgerCell{
		Share:       share,
		Value:       l.words.Say("%.4f", share),
		Error:       l.words.Say("±%.4f", math.Ceil(standardError*1e4)/1e4), // never told smaller than it is
		Significant: share >= naught,
	}
}

// UnderPointer returns what the map of a row and column holds under the pointer,
// false where there is no stone or nothing is known.
func (l *Look) UnderPointer(row, column int) (float64, bool) {
	if !l.Pointer.Over || l.Frame == nil || column >= len(l.Frame.Fields[row]) {
		return 0, false
	}
	field := l.Frame.Fields[row][column]
	pixels := l.Frame.Settings.Pixels
	if len(field) != pixels*pixels {
		return 0, false
	}
	at := func(share float64) int { return min(pixels-1, int(share*float64(pixels))) }
	i := at(l.Pointer.Y)*pixels + at(l.Pointer.X)
	if i < 0 || i >= len(field) || math.IsNaN(float64(field[i])) {
		return 0, false
	}
	return float64(field[i]), true
}

// Place returns where the pointer is on the stone as seen, in mm right of and above
// the middle of the picture; false when it is nowhere.
func (l *Look) Place() (x, y float64, ok bool) {
	if !l.Pointer.Over || l.Frame == nil || len(l.Frame.Result.Columns) == 0 {
		return 0, 0, false
	}
	span := l.Frame.Result.Columns[0].Map.Span
	return (l.Pointer.X - 0.5) * span, (0.5 - l.Pointer.Y) * span, true
}

// Status says how far the maps have come.
func (l *Look) Status() string {
	p := l.Progress()
	switch {
	case p.Active && p.Share == 0:
		return l.words.Say("tracing")
	case p.Active:
		return l.words.Say("refining %2.0f %%", 100*p.Share)
	case p.Stopped && l.Frame != nil:
		return l.words.Say("stopped at %2.0f %%, errors up to ±%.4f", 100*p.Share, l.worstError())
	case p.Stopped:
		return l.words.Say("stopped")
	case l.Frame != nil:
		return l.words.Say("done, errors up to ±%.4f", l.worstError())
	}
	return ""
}

// worstError returns the largest standard error of the frame's ledgers.
func (l *Look) worstError() float64 {
	worst := 0.0
	for i := range l.Frame.Result.Columns {
		worst = max(worst, l.Frame.Result.Columns[i].StandardError.Max())
	}
	return worst
}

// SideName returns what a side of the stone is called.
func SideName(s facets.Side) words.Key {
	return [...]words.Key{facets.Pavilion: "Pavilion", facets.Girdle: "Girdle", facets.Crown: "Crown", facets.Table: "Table"}[s]
}
