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
	first      int                           // the number of its first cell
	right, up  int                           // how much larger that of the next is, along u and along v
	outside    func(u, v, size float64) bool // whether a part of it is not wanted; nil if all is
	rounding   float64                       // share of the largest value by which a function must be larger to count as larger
	margin     float64                       // that value
	stack      []uint16                      // lists of the quarters being worked on
	survivors  []corners                     // scratch
}

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
	sq.margin *= sq.rounding
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
	switch {
	case len(list) == 1 || n == 1:
		number := c.store(fs, list, u+w/2, v+w/2)
		for r := row; r < row+n; r++ {
			for k := column; k < column+n; k++ {
				c.list[sq.cell(k, r)] = number
			}
		}
	case len(list) == 2 || len(list) <= few && n <= scanned:
		c.scan(fs, sq, list, column, row, n)
	default:
		h := n / 2
		c.quarter(fs, sq, list, column, row, h)
		c.quarter(fs, sq, list, column+h, row, h)
		c.quarter(fs, sq, list, column, row+h, h)
		c.quarter(fs, sq, list, column+h, row+h, h)
	}
	sq.stack = sq.stack[:mark]
}

// copy fills a part of the map with the lists of another, in which each function stands
// for one of images.
func (c *cells) copy(to, from *region, images []uint16) {
	numbers := make([]uint16, len(c.spans)) // of the new lists, by those of the old; 0 where unknown
	for row := range from.side {
		for column := range from.side {
			old := c.list[from.cell(column, row)]
			if old != 0 && numbers[old] == 0 {
				var list []uint16
				span := c.spans[old]
				for _, j := range c.names[span.first : span.first+span.n] {
					list = append(list, images[j])
				}
				numbers[old] = c.number(list)
			}
			c.list[to.cell(column, row)] = numbers[old]
		}
	}
}

// few is how many functions scan takes at most, and scanned in how many cells across if
// there are more than two: so that building takes the least time.
const (
	few     = 4
	scanned = 4
)

// scan fills n x n cells of which it is known that one of a few functions is the largest.
// It does what quarter does, cell by cell: for so few that is quicker.
func (c *cells) scan(fs []plane2, sq *region, list []uint16, column, row, n int) {
	// A function is out where another's lead in the middle of the cell is more than it can
	// lose on the way to a corner.
	var f [few]plane2
	for i, j := range list {
		f[i] = fs[j]
	}
	var lost [few][few]float64
	for i := range list {
		for j := range list {
			lost[i][j] = sq.margin + (math.Abs(f[i].b-f[j].b)+math.Abs(f[i].c-f[j].c))*sq.step/2
		}
	}
	var numbers [1 << few][few]uint16 // of the lists, by which are in and which comes first; one too high
	for r := row; r < row+n; r++ {
		v := sq.v + (float64(r)+0.5)*sq.step
		for k := column; k < column+n; k++ {
			u := sq.u + (float64(k)+0.5)*sq.step
			var at [few]float64
			first := 0
			for i := range list {
				if at[i] = f[i].at(u, v); at[i] > at[first] {
					first = i
				}
			}
			in := 1 << first
			for i := range list {
				beaten := false
				for j := range list {
					beaten = beaten || at[j]-at[i] > lost[i][j]
				}
				if !beaten {
					in |= 1 << i
				}
			}
			number := &numbers[in][first]
			if *number == 0 {
				*number = c.number(pick(list, in, first)) + 1
			}
			c.list[sq.cell(k, r)] = *number - 1
		}
	}
}

// pick returns those of list whose bits are set in in, the first of them first.
func pick(list []uint16, in, first int) []uint16 {
	picked := []uint16{list[first]}
	for i, j := range list {
		if i != first && in>>i&1 != 0 {
			picked = append(picked, j)
		}
	}
	return picked
}

// cell returns the number of one of its cells.
func (r *region) cell(column, row int) int { return r.first + column*r.right + row*r.up }

// appendLargest appends to to those of list that can be the largest in the square of
// size w at (u, v).
func appendLargest(to []uint16, fs []plane2, list []uint16, sq *region, u, v, w float64) []uint16 {
	// One that nowhere reaches what another has everywhere is out: a cheap first sieve.
	floor := math.Inf(-1)
	sq.survivors = sq.survivors[:0]
	for _, j := range list {
		f := &fs[j]
		at, du, dv := f.at(u, v), f.b*w, f.c*w
		s := corners{at, at + du, at + dv, at + du + dv}
		if l := s.least(); l > floor {
			floor = l
		}
		sq.survivors = append(sq.survivors, s)
	}
	floor -= sq.margin
	mark, n := len(to), 0
	var champion [4]int // who is largest at each corner
	best := corners{floor, floor, floor, floor}
	for i, j := range list {
		s := &sq.survivors[i]
		if s.below(floor) {
			continue
		}
		for k, g := range s {
			if g > best[k] {
				best[k], champion[k] = g, n
			}
		}
		to = append(to, j)
		sq.survivors[n] = *s
		n++
	}
	sq.survivors = sq.survivors[:n]

	kept := mark
	for i := range sq.survivors {
		s := &sq.survivors[i]
		beaten := false
		for k, c := range champion {
			if k > 0 && c == champion[k-1] || c == i {
				continue
			}
			beaten = beaten || s.beaten(&sq.survivors[c], sq.margin)
		}
		if !beaten {
			to[kept] = to[mark+i]
			kept++
		}
	}
	return to[:kept]
}

// corners is the values of a linear function at the corners of a square.
type corners [4]float64

// least is the least value in the square. (The comparisons here are plain ones: max and
// min have more to care about, and this is where a map's time goes.)
func (s *corners) least() float64 {
	l := s[0]
	for _, v := range s[1:] {
		if v < l {
			l = v
		}
	}
	return l
}

// below reports whether the function is below a level everywhere.
func (s *corners) below(level float64) bool {
	return s[0] < level && s[1] < level && s[2] < level && s[3] < level
}

// beaten reports whether another function is larger everywhere.
func (s *corners) beaten(by *corners, margin float64) bool {
	return by[0]-s[0] > margin && by[1]-s[1] > margin && by[2]-s[2] > margin && by[3]-s[3] > margin
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
	return c.number(list)
}

// number keeps a list as it is and returns its number.
func (c *cells) number(list []uint16) uint16 {
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
