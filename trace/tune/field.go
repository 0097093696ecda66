package tune

import (
	"context"
	"errors"
	"fmt"
	"math"
)

// Field is the goal over two variables, on an even grid over their limits. Rows run
// from the lower limit of Y up, columns from the lower limit of X up; trials stand row
// by row. A Field that was handed over is not changed any more.
type Field struct {
	X, Y          Variable
	Columns, Rows int
	Trials        []Trial // row by row; those not seen yet have no Values
	Now           Trial   // the pattern as it stands, which lies on no grid
	Done          float64 // 0 to 1
}

// FieldSettings say how a field is laid out.
type FieldSettings struct {
	Columns, Rows int     // 2 to MostCells; 0 means 40
	Error         float64 // greatest standard error of a cell's score; 0 means 0.002
}

// MostCells bounds the columns and the rows of a field.
const MostCells = 200

// The stages of a field: every 8th column and row, then every 4th, and so on.
const coarsestField = 8

// fieldLook is the effort a cell begins with; each further look has twice the rays.
const (
	fieldRays   = 12_000
	fieldSeen   = 16 // rays a pixel
	fieldLooks  = 6
	fieldReport = 16 // cells between two reports
)

// Sweep tries every cell of a field over the problem's two variables, coarse first. It
// calls report, which may be nil, now and then with all that is known so far. When ctx
// is cancelled it returns the field as far as it is known, and the cause. Cells that a
// memory holds are not traced again.
func Sweep(ctx context.Context, p *Problem, s FieldSettings, memory *Memory, report func(*Field)) (*Field, error) {
	if s.Columns == 0 {
		s.Columns = 40
	}
	if s.Rows == 0 {
		s.Rows = 40
	}
	if s.Error == 0 {
		s.Error = 0.002
	}
	for _, n := range []int{s.Columns, s.Rows} {
		if n < 2 || n > MostCells {
			return nil, fmt.Errorf("a field of %d by %d: use 2 to %d columns and rows", s.Columns, s.Rows, MostCells)
		}
	}
	if len(p.Variables) != 2 {
		return nil, errors.New("a field needs two variables: name two tiers or proportions")
	}
	if !(s.Error > 0 && s.Error <= 1) {
		return nil, fmt.Errorf("a standard error of %g: use more than 0, at most 1", s.Error)
	}
	for _, v := range p.Variables {
		if !(v.Low < v.High) {
			return nil, fmt.Errorf("%s: a field needs a range, and its limits are %g and %g", v.Name, v.Low, v.High)
		}
	}
	free := *p
	free.Variables = []Variable{p.Variables[0], p.Variables[1]}
	free.Variables[0].Step, free.Variables[1].Step = 0, 0 // the grid has its own
	j, err := newJudge(&free)
	if err != nil {
		return nil, err
	}
	if err := memory.open(j); err != nil {
		return nil, err
	}
	return sweep(ctx, j, s, report)
}

// sweep is Sweep with a judge.
func sweep(ctx context.Context, j *judge, s FieldSettings, report func(*Field)) (*Field, error) {
	f := &Field{X: j.Variables[0], Y: j.Variables[1], Columns: s.Columns, Rows: s.Rows, Trials: make([]Trial, s.Columns*s.Rows)}
	tell := func(done int) {
		f.Done = float64(done) / float64(len(f.Trials))
		if report != nil {
			shown := *f
			shown.Trials = append([]Trial(nil), f.Trials...)
			report(&shown)
		}
	}
	var err error
	if f.Now, err = j.tryTo(ctx, j.start(), s.Error, true); err != nil {
		return f, err
	}
	done := 0
	for _, batch := range f.order(fieldReport) {
		seen := make([]Trial, len(batch))
		err := parallel(ctx, j.workers(), len(batch), func(ctx context.Context, i int) (err error) {
			seen[i], err = j.tryTo(ctx, f.at(batch[i]), s.Error, false)
			return err
		})
		for i, t := range seen {
			if len(t.Values) > 0 {
				f.Trials[batch[i]] = t
				done++
			}
		}
		tell(done)
		if err != nil {
			return f, err
		}
	}
	return f, nil
}

// tryTo looks longer and longer until the score's standard error is met.
func (j *judge) tryTo(ctx context.Context, x []float64, se float64, always bool) (t Trial, err error) {
	for look := range fieldLooks {
		t, err = j.try(ctx, x, effort{rays: fieldRays << look, seen: fieldSeen << look, always: always})
		if err != nil || !t.Seen || t.Error <= se {
			break
		}
	}
	return t, err
}

// at returns the values of a cell.
func (f *Field) at(cell int) []float64 {
	x, y := f.Place(cell%f.Columns, cell/f.Columns)
	return []float64{x, y}
}

// Place returns the values of a column and a row, which may lie between two.
func (f *Field) Place(column, row int) (x, y float64) {
	return f.place(float64(column), float64(row))
}

func (f *Field) place(column, row float64) (x, y float64) {
	x = f.X.Low + (f.X.High-f.X.Low)*column/float64(f.Columns-1)
	y = f.Y.Low + (f.Y.High-f.Y.Low)*row/float64(f.Rows-1)
	// 41.800000000000004 is no angle to print.
	return math.Round(x*1e9) / 1e9, math.Round(y*1e9) / 1e9
}

// order returns all cells in batches, coarse ones first.
func (f *Field) order(size int) [][]int {
	var batches [][]int
	taken := make([]bool, len(f.Trials))
	for stride := coarsestField; stride >= 1; stride /= 2 {
		var stage []int
		for row := 0; row < f.Rows; row += stride {
			for column := 0; column < f.Columns; column += stride {
				if cell := row*f.Columns + column; !taken[cell] {
					taken[cell] = true
					stage = append(stage, cell)
				}
			}
		}
		for len(stage) > 0 {
			n := min(size, len(stage))
			batches, stage = append(batches, stage[:n]), stage[n:]
		}
	}
	return batches
}

// Score returns the score of a cell, NaN where no stone fits or none was tried yet.
func (f *Field) Score(column, row int) float64 {
	t := &f.Trials[row*f.Columns+column]
	if !t.Fit {
		return math.NaN()
	}
	return t.Score
}

// Filled returns a score for every cell, row by row: where a cell was not tried yet
// that of the coarser cell below and left of it, NaN where no stone fits.
func (f *Field) Filled() []float64 {
	filled := make([]float64, len(f.Trials))
	for row := range f.Rows {
		for column := range f.Columns {
			filled[row*f.Columns+column] = math.NaN()
			for stride := 1; stride <= coarsestField; stride *= 2 {
				from := row/stride*stride*f.Columns + column/stride*stride
				if len(f.Trials[from].Values) > 0 {
					if f.Trials[from].Fit {
						filled[row*f.Columns+column] = f.Trials[from].Score
					}
					break
				}
			}
		}
	}
	return filled
}

// Best returns the best cell, false where none fits yet.
func (f *Field) Best() (cell int, ok bool) {
	cell = -1
	for i := range f.Trials {
		if t := &f.Trials[i]; t.Fit && (cell < 0 || t.Score > f.Trials[cell].Score) {
			cell = i
		}
	}
	return cell, cell >= 0
}

// NearBest is how near the best, as a share of it, a cell counts as being as good.
const NearBest = 0.01

// Near tells of every cell whether it is within NearBest of the best.
func (f *Field) Near() []bool {
	near := make([]bool, len(f.Trials))
	best, ok := f.Best()
	if !ok {
		return near
	}
	top := f.Trials[best].Score
	for i := range f.Trials {
		near[i] = f.Trials[i].Fit && f.Trials[i].Score >= top-NearBest*math.Abs(top)
	}
	return near
}

// RidgePoint is the best X for one Y.
type RidgePoint struct {
	X, Y, Score float64
}

// Ridge is the line along which the two variables trade off: from the best cell up and
// down, row by row, the best column near that of the row before.
type Ridge struct {
	Points []RidgePoint // Y rising
	// Slope is dX/dY along the ridge, by least squares, with its standard error; it is
	// meaningful only where there are three points or more.
	Slope, SlopeError float64
}

// How the ridge is followed: it may wander by a share of the columns from row to row,
// and ends where the score falls too far below the best.
const (
	ridgeWander = 0.08
	ridgeDrop   = 0.1 // of the best
)

// Ridge follows the ridge through the best cell.
func (f *Field) Ridge() Ridge {
	var r Ridge
	best, ok := f.Best()
	if !ok {
		return r
	}
	top := f.Trials[best].Score
	reach := max(1, int(math.Round(ridgeWander*float64(f.Columns))))
	add := func(column, row int) RidgePoint {
		x, y := f.Place(column, row)
		return RidgePoint{x, y, f.Score(column, row)}
	}
	follow := func(step int) (points []RidgePoint) {
		column := best % f.Columns
		for row := best/f.Columns + step; row >= 0 && row < f.Rows; row += step {
			next := -1
			for c := max(0, column-reach); c <= min(f.Columns-1, column+reach); c++ {
				if s := f.Score(c, row); !math.IsNaN(s) && (next < 0 || s > f.Score(next, row)) {
					next = c
				}
			}
			if next < 0 || f.Score(next, row) < top-ridgeDrop*math.Abs(top) {
				break
			}
			column = next
			points = append(points, add(column, row))
		}
		return points
	}
	down := follow(-1)
	for i := len(down) - 1; i >= 0; i-- {
		r.Points = append(r.Points, down[i])
	}
	r.Points = append(r.Points, add(best%f.Columns, best/f.Columns))
	r.Points = append(r.Points, follow(1)...)
	r.fit()
	return r
}

// fit finds the slope.
func (r *Ridge) fit() {
	n := float64(len(r.Points))
	if n < 3 {
		return
	}
	var my, mx float64
	for _, p := range r.Points {
		my += p.Y / n
		mx += p.X / n
	}
	var yy, xy float64
	for _, p := range r.Points {
		yy += (p.Y - my) * (p.Y - my)
		xy += (p.Y - my) * (p.X - mx)
	}
	r.Slope = xy / yy
	left := 0.0
	for _, p := range r.Points {
		e := p.X - mx - r.Slope*(p.Y-my)
		left += e * e
	}
	r.SlopeError = math.Sqrt(left / (n - 2) / yy)
}
