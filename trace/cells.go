package trace

import "math"

// plane2 is a linear function over a picture or a face of directions:
// a + b u + c v.
type plane2 struct{ a, b, c float64 }

func (p plane2) at(u, v float64) float64 { return p.a + p.b*u + p.c*v }

// cells answers, for any point of a square, which of many linear functions can
// be the largest there: one, mostly, or a short list. The square is cut into
// side x side cells; lists are conservative, so the true largest is always
// among those named.
type cells struct {
	spans []span   // one a cell
	names []uint16 // the lists that spans point into
}

// span is a run of cells.names.
type span struct{ first, n uint32 }

func (c *cells) list(cell int) []uint16 {
	s := c.spans[cell]
	return c.names[s.first : s.first+s.n]
}

// fill names, for each cell of the square [u0, u0+size] x [v0, v0+size], the
// functions that can be largest. The square is side cells across, a power of
// two; place gives a cell's number from its column and row. Cells for which
// outside says so are left empty. The square is quartered from the whole list
// down: a function is dropped where another beats it at all four corners, for
// then, both being linear, it beats it everywhere between.
func (c *cells) fill(fs []plane2, u0, v0, size float64, side int, place func(col, row int) int, outside func(u, v, size float64) bool) {
	all := make([]uint16, len(fs))
	for i := range fs {
		all[i] = uint16(i)
	}
	stack := make([]uint16, 0, 4*len(fs)) // lists of the quarters being worked on
	var corners [][4]float64

	// How much larger a function must be to count as larger: some rounding errors
	// of the largest value in the square.
	margin := 0.0
	for _, f := range fs {
		margin = max(margin, math.Abs(f.a)+(math.Abs(f.b)+math.Abs(f.c))*(math.Abs(u0)+math.Abs(v0)+size))
	}
	margin *= 1e-14

	var quarter func(list []uint16, col, row, n int)
	quarter = func(list []uint16, col, row, n int) {
		step := size / float64(side)
		u, v, w := u0+float64(col)*step, v0+float64(row)*step, float64(n)*step
		if outside != nil && outside(u, v, w) {
			return
		}
		mark := len(stack)
		if len(list) > 1 {
			corners = corners[:0]
			var champion [4]int
			for i, j := range list {
				f := fs[j]
				at := f.at(u, v)
				du, dv := f.b*w, f.c*w
				q := [4]float64{at, at + du, at + dv, at + du + dv}
				corners = append(corners, q)
				for k := range q {
					if q[k] > corners[champion[k]][k] {
						champion[k] = i
					}
				}
			}
			for i, j := range list {
				if !beaten(i, champion, corners, margin) {
					stack = append(stack, j)
				}
			}
			list = stack[mark:]
		}
		if len(list) == 1 || n == 1 {
			s := c.store(list)
			for r := row; r < row+n; r++ {
				for k := col; k < col+n; k++ {
					c.spans[place(k, r)] = s
				}
			}
		} else {
			h := n / 2
			quarter(list, col, row, h)
			quarter(list, col+h, row, h)
			quarter(list, col, row+h, h)
			quarter(list, col+h, row+h, h)
		}
		stack = stack[:mark]
	}
	quarter(all, 0, 0, side)
}

// beaten reports whether one of the champions is larger than function i at all
// four corners, by more than margin.
func beaten(i int, champion [4]int, corners [][4]float64, margin float64) bool {
	q := &corners[i]
	for _, k := range champion {
		c := &corners[k]
		if k != i && c[0] > q[0]+margin && c[1] > q[1]+margin && c[2] > q[2]+margin && c[3] > q[3]+margin {
			return true
		}
	}
	return false
}

// store keeps a list and returns where it stands; neighbours with the same list
// mostly come one after the other and share it.
func (c *cells) store(list []uint16) span {
	n := len(list)
	if have := len(c.names); have >= n {
		same := true
		for i := range list {
			if c.names[have-n+i] != list[i] {
				same = false
				break
			}
		}
		if same {
			return span{uint32(have - n), uint32(n)}
		}
	}
	first := len(c.names)
	c.names = append(c.names, list...)
	return span{uint32(first), uint32(n)}
}
