package trace

import "math"

// plane2 is a linear function over a picture or a face of directions:
// a + b u + c v.
type plane2 struct{ a, b, c float64 }

func (p plane2) at(u, v float64) float64 { return p.a + p.b*u + p.c*v }

// cells answers, for any point of a square, which of many linear functions can
// be the largest there: one, mostly, or a short list. The square is cut into
// cells; lists are conservative, so the true largest is always among those named.
// The one that is largest in the middle of the cell comes first.
type cells struct {
	list  []uint16 // number of each cell's list
	spans []span   // where each list stands in names
	names []uint16

	known map[[3]uint16]uint16 // numbers of the lists of up to three names, which many cells share
}

// span is a run of cells.names.
type span struct{ first, n uint32 }

// at returns the list of a cell.
func (c *cells) at(cell int) []uint16 {
	s := c.spans[c.list[cell]]
	return c.names[s.first : s.first+s.n]
}

// newCells returns the map of n cells that all have an empty list, number 0.
func newCells(n int) cells {
	return cells{list: make([]uint16, n), spans: []span{{}}, known: map[[3]uint16]uint16{}}
}

// region is part of a map: side x side cells, a power of two, from (u, v) on, in
// steps of step.
type region struct {
	u, v, step float64
	side       int
	cell       func(column, row int) int     // the number of one of its cells
	outside    func(u, v, size float64) bool // whether a part of it is not wanted; nil if all is
	margin     float64                       // by how much a function must be larger to count as larger
	stack      []uint16                      // lists of the quarters being worked on
	survivors  []rise                        // scratch
}

// rise is a function over a square: its value at the first corner, and how much it rises
// to the next along u and v.
type rise struct{ at, du, dv float64 }

// fill names, for each cell of the square, the functions that can be largest. The
// square is quartered from the whole list down: a function is dropped where another
// beats it at all four corners, for then, both being linear, it beats it everywhere
// between.
func (c *cells) fill(fs []plane2, sq *region) {
	all := make([]uint16, len(fs))
	sq.margin = 0
	size := float64(sq.side) * sq.step
	for i, f := range fs {
		all[i] = uint16(i)
		sq.margin = max(sq.margin, math.Abs(f.a)+(math.Abs(f.b)+math.Abs(f.c))*(math.Abs(sq.u)+math.Abs(sq.v)+size))
	}
	sq.margin *= 1e-14 // some rounding errors of the largest value in the square
	c.quarter(fs, sq, all, 0, 0, sq.side)
}

// quarter fills n x n cells from a column and row on, of which list is known to name
// all functions that count.
func (c *cells) quarter(fs []plane2, sq *region, list []uint16, column, row, n int) {
	u, v, w := sq.u+float64(column)*sq.step, sq.v+float64(row)*sq.step, float64(n)*sq.step
	if sq.outside != nil && sq.outside(u, v, w) {
		return
	}
	mark := len(sq.stack)
	if len(list) > 1 {
		sq.stack = appendLargest(sq.stack, fs, list, sq, u, v, w)
		list = sq.stack[mark:]
	}
	if len(list) == 1 || n == 1 {
		number := c.store(fs, list, u+w/2, v+w/2)
		for r := row; r < row+n; r++ {
			for k := column; k < column+n; k++ {
				c.list[sq.cell(k, r)] = number
			}
		}
	} else {
		h := n / 2
		c.quarter(fs, sq, list, column, row, h)
		c.quarter(fs, sq, list, column+h, row, h)
		c.quarter(fs, sq, list, column, row+h, h)
		c.quarter(fs, sq, list, column+h, row+h, h)
	}
	sq.stack = sq.stack[:mark]
}

// appendLargest appends to to those of list that can be the largest in the square of
// size w at (u, v).
func appendLargest(to []uint16, fs []plane2, list []uint16, sq *region, u, v, w float64) []uint16 {
	// One that nowhere reaches what another has everywhere is out: a cheap first sieve.
	floor := math.Inf(-1)
	sq.survivors = sq.survivors[:0]
	for _, j := range list {
		f := &fs[j]
		s := rise{f.at(u, v), f.b * w, f.c * w}
		floor = max(floor, s.at+min(0, s.du)+min(0, s.dv))
		sq.survivors = append(sq.survivors, s)
	}
	floor -= sq.margin
	mark, n := len(to), 0
	var champion [4]int // who is largest at each corner
	best := [4]float64{floor, floor, floor, floor}
	for i, j := range list {
		s := sq.survivors[i]
		if s.at+max(0, s.du)+max(0, s.dv) < floor {
			continue
		}
		for k, g := range [4]float64{s.at, s.at + s.du, s.at + s.dv, s.at + s.du + s.dv} {
			if g > best[k] {
				best[k], champion[k] = g, n
			}
		}
		to = append(to, j)
		sq.survivors[n] = s
		n++
	}
	sq.survivors = sq.survivors[:n]

	kept := mark
	for i := range sq.survivors {
		s := &sq.survivors[i]
		beaten := false
		for _, k := range champion {
			c := &sq.survivors[k]
			// The least lead of the champion over the square, from its corner's and its slopes'.
			lead := c.at - s.at + min(0, c.du-s.du) + min(0, c.dv-s.dv)
			beaten = beaten || k != i && lead > sq.margin
		}
		if !beaten {
			to[kept] = to[mark+i]
			kept++
		}
	}
	return to[:kept]
}

// store keeps a list for a cell whose middle is (u, v) and returns its number.
func (c *cells) store(fs []plane2, list []uint16, u, v float64) uint16 {
	first := 0
	for i := range list {
		if fs[list[i]].at(u, v) > fs[list[first]].at(u, v) {
			first = i
		}
	}
	list[0], list[first] = list[first], list[0]
	var key [3]uint16
	if len(list) <= len(key) {
		for i, j := range list {
			key[i] = j + 1
		}
		if number, ok := c.known[key]; ok {
			return number
		}
	}
	number := uint16(len(c.spans))
	c.spans = append(c.spans, span{uint32(len(c.names)), uint32(len(list))})
	c.names = append(c.names, list...)
	if len(list) <= len(key) {
		c.known[key] = number
	}
	return number
}
