package report

import (
	"bufio"
	"encoding/binary"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strconv"

	"pavilight/app/cell"
	"pavilight/trace"
)

// numbers is what a report's JSON holds of a stone. Keys that look --json has too mean
// the same.
type numbers struct {
	Plan         string            `json:"plan"`
	Material     string            `json:"material"`
	BodyColour   string            `json:"body_colour"`
	WidthMM      *float64          `json:"width_mm"` // null where nobody gave it
	Carats       *float64          `json:"carats"`   // null where not known
	Light        string            `json:"light"`
	HeadDeg      float64           `json:"head_deg"`
	Seed         uint64            `json:"seed"`
	Polarisation string            `json:"polarisation"`
	Measured     string            `json:"measuring_errors"` // as stated, empty for not included
	Media        []numbersMedium   `json:"media"`
	Tilts        []numbersTilt     `json:"tilts"`
	Pavilion     []numbersPavilion `json:"pavilion"`
}

type numbersMedium struct {
	Name          string        `json:"name"`
	Arrangement   string        `json:"arrangement"`
	IndexMedium   float64       `json:"index_medium"`
	IndexStone    float64       `json:"index_stone"`
	CriticalDeg   *float64      `json:"critical_angle_deg"` // null where there is none
	Ledger        trace.Ledger  `json:"ledger"`
	StandardError trace.Ledger  `json:"standard_error"`
	Spread        *trace.Ledger `json:"measuring_spread"` // null where no measuring error is stated
	Lit           trace.Lit     `json:"lit"`
	From          []float64     `json:"from"`
	LeakyArea     float64       `json:"leaky_area"`
	WindowedArea  float64       `json:"windowed_area"`
	Segments      int64         `json:"segments"`
}

type numbersTilt struct {
	TiltDeg float64             `json:"tilt_deg"`
	TurnDeg float64             `json:"turn_deg"`
	Media   []numbersTiltMedium `json:"media"`
}

type numbersTiltMedium struct {
	Name          string       `json:"name"`
	Ledger        trace.Ledger `json:"ledger"`
	StandardError trace.Ledger `json:"standard_error"`
}

type numbersPavilion struct {
	State         string       `json:"state"`
	Ledger        trace.Ledger `json:"ledger"`
	StandardError trace.Ledger `json:"standard_error"`
}

// arrangement is a column's word for how the stone lies in its surrounding.
func arrangement(c *trace.Column) string {
	if c.Dish {
		return "dish"
	}
	return "around"
}

// Numbers returns the findings as a value for encoding/json.
func (f *Findings) Numbers() any {
	n := numbers{
		Plan: f.Name, Material: f.Material.Key, BodyColour: f.Job.MaterialOf(&f.Stone).Describe().BodyColour,
		Light: "even", HeadDeg: f.Job.Head.Degrees(), Seed: f.Job.Seed, Polarisation: "full", Measured: f.Job.Measured.String(),
	}
	if !f.WidthTaken {
		n.WidthMM = &f.Measures.WidthMM
	}
	if carats, ok := f.Carats(); ok {
		n.Carats = &carats
	}
	for i := range f.Columns {
		c := &f.Columns[i]
		m := numbersMedium{
			Name: c.Medium.Key, Arrangement: arrangement(c.Column), IndexMedium: c.IndexMedium, IndexStone: c.IndexStone,
			Ledger: c.Ledger, StandardError: c.StandardError, Lit: c.Lit, From: c.From[:],
			LeakyArea: c.LeakyArea, WindowedArea: c.WindowedArea, Segments: c.Segments,
		}
		if c.HasCritical {
			critical := c.Critical.Degrees()
			m.CriticalDeg = &critical
		}
		if c.Spread != nil {
			m.Spread = &c.Spread.Ledger
		}
		n.Media = append(n.Media, m)
	}
	for _, t := range f.Tilts {
		one := numbersTilt{TiltDeg: math.Round(t.Angle.Degrees()*1e9) / 1e9}
		for i := range t.Columns {
			c := &t.Columns[i]
			one.Media = append(one.Media, numbersTiltMedium{c.Medium.Key, c.Ledger, c.StandardError})
		}
		n.Tilts = append(n.Tilts, one)
	}
	for _, c := range f.Wet {
		n.Pavilion = append(n.Pavilion, numbersPavilion{c.Name, c.Column.Ledger, c.Column.StandardError})
	}
	return n
}

// JSON writes the findings' numbers.
func JSON(w io.Writer, f *Findings) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(f.Numbers())
}

// full writes a number with all its digits.
func full(v float64) string { return strconv.FormatFloat(v, 'g', -1, 64) }

// LedgerCSV writes the ledgers of every surrounding, one row an entry: the share, its
// standard error, and the spread from the measuring errors, empty where none are stated.
// The form is that of RFC 4180.
func LedgerCSV(w io.Writer, f *Findings) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	rows := [][]string{{"stone", "medium", "arrangement", "entry", "share", "standard_error", "measuring_spread"}}
	for i := range f.Columns {
		c := &f.Columns[i]
		row := func(entry string, v, e float64, spread func(*Shares) float64) {
			text := ""
			if c.Spread != nil {
				text = full(spread(c.Spread))
			}
			rows = append(rows, []string{cell.Text(f.Name), c.Medium.Key, arrangement(c.Column), entry, full(v), full(e), text})
		}
		for q := trace.Surface; q <= trace.Unresolved; q++ {
			row(q.String(), q.Of(c.Ledger), q.Of(c.StandardError), func(s *Shares) float64 { return q.Of(s.Ledger) })
		}
		row("leaky_area", c.LeakyArea, c.LeakyError, func(s *Shares) float64 { return s.Leaky })
		row("windowed_area", c.WindowedArea, c.WindowedError, func(s *Shares) float64 { return s.Windowed })
	}
	return out.WriteAll(rows)
}

// TiltCSV writes light return and leakage against the tilt, one row a tilt and surrounding.
func TiltCSV(w io.Writer, f *Findings) error {
	out := csv.NewWriter(w)
	out.UseCRLF = true
	rows := [][]string{{"stone", "tilt_deg", "turn_deg", "medium", "returned", "returned_error", "leaked", "leaked_error"}}
	for _, t := range f.Tilts {
		for i := range t.Columns {
			c := &t.Columns[i]
			rows = append(rows, []string{cell.Text(f.Name), full(math.Round(t.Angle.Degrees()*1e9) / 1e9), "0", c.Medium.Key,
				full(c.Ledger.Returned), full(c.StandardError.Returned), full(c.Ledger.Leaked), full(c.StandardError.Leaked)})
		}
	}
	return out.WriteAll(rows)
}

// MapCSV writes a map as a square of numbers, the top row first; a pixel outside the
// stone is empty.
func MapCSV(w io.Writer, m *trace.Map, q trace.Quantity) error {
	out := bufio.NewWriter(w)
	for i, v := range m.Field(q) {
		if v == v {
			out.WriteString(strconv.FormatFloat(float64(v), 'g', -1, 32))
		}
		if (i+1)%m.Pixels == 0 {
			out.WriteString("\r\n")
		} else {
			out.WriteByte(',')
		}
	}
	return out.Flush()
}

// PFM writes a map as a portable float map: 32-bit numbers, little-endian, the bottom row
// first; NaN outside the stone. Source of the form: P. Debevec's PFM, as Netpbm's
// pfm(5) describes it.
func PFM(w io.Writer, m *trace.Map, q trace.Quantity) error {
	out := bufio.NewWriter(w)
	fmt.Fprintf(out, "Pf\n%d %d\n-1.0\n", m.Pixels, m.Pixels)
	field := m.Field(q)
	var four [4]byte
	for row := m.Pixels - 1; row >= 0; row-- {
		for _, v := range field[row*m.Pixels : (row+1)*m.Pixels] {
			binary.LittleEndian.PutUint32(four[:], math.Float32bits(v))
			out.Write(four[:])
		}
	}
	return out.Flush()
}
