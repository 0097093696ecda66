package tune

import "math"

// Line is a contour's polyline, in the units of the field's X and Y. A closed one ends
// where it begins.
type Line [][2]float64

// Contours returns the lines along which the field's score has a level, by marching
// squares (Lorensen & Cline's marching cubes of 1987, in the plane), straight between
// grid points. A square with two opposite corners above the level is decided by the mean
// of its four. Squares in which no stone fits somewhere have no line.
func (f *Field) Contours(level float64) []Line {
	values := make([]float64, len(f.Trials))
	for i := range values {
		values[i] = f.Score(i%f.Columns, i/f.Columns)
	}
	m := marching{columns: f.Columns, values: values, level: level, next: map[crossing][]crossing{}}
	for row := range f.Rows - 1 {
		for column := range f.Columns - 1 {
			m.square(column, row)
		}
	}
	var lines []Line
	for _, chain := range m.chains(f.Rows) {
		var line Line
		for _, c := range chain {
			column, row := m.at(c)
			x, y := f.place(column, row)
			line = append(line, [2]float64{x, y})
		}
		lines = append(lines, line)
	}
	return lines
}

// crossing is an edge of the grid that a contour crosses: from a grid point to the next
// one right of it, or above it.
type crossing struct {
	column, row int
	upward      bool
}

// marching joins crossings to chains.
type marching struct {
	columns int
	values  []float64
	level   float64
	next    map[crossing][]crossing
}

func (m *marching) value(column, row int) float64 { return m.values[row*m.columns+column] }

// square joins the crossings of one square of the grid.
func (m *marching) square(column, row int) {
	corners := [4]float64{m.value(column, row), m.value(column+1, row), m.value(column+1, row+1), m.value(column, row+1)}
	edges := [4]crossing{{column, row, false}, {column + 1, row, true}, {column, row + 1, false}, {column, row, true}}
	var crossed []int
	mean := 0.0
	for i, v := range corners {
		if math.IsNaN(v) {
			return
		}
		mean += v / 4
		if (v >= m.level) != (corners[(i+1)%4] >= m.level) {
			crossed = append(crossed, i)
		}
	}
	switch len(crossed) {
	case 2:
		m.join(edges[crossed[0]], edges[crossed[1]])
	case 4:
		// The corners that lie on the middle's side hold together.
		if (corners[0] >= m.level) == (mean >= m.level) {
			m.join(edges[0], edges[1])
			m.join(edges[2], edges[3])
		} else {
			m.join(edges[3], edges[0])
			m.join(edges[1], edges[2])
		}
	}
}

func (m *marching) join(a, b crossing) {
	m.next[a] = append(m.next[a], b)
	m.next[b] = append(m.next[b], a)
}

// at returns where a crossing lies, in columns and rows.
func (m *marching) at(c crossing) (column, row float64) {
	a, b := m.value(c.column, c.row), 0.0
	if c.upward {
		b = m.value(c.column, c.row+1)
	} else {
		b = m.value(c.column+1, c.row)
	}
	t := (m.level - a) / (b - a)
	if c.upward {
		return float64(c.column), float64(c.row) + t
	}
	return float64(c.column) + t, float64(c.row)
}

// chains follows all crossings: open lines first, then closed ones, each in the order
// of its first crossing on the grid.
func (m *marching) chains(rows int) [][]crossing {
	var chains [][]crossing
	taken := map[crossing]bool{}
	follow := func(c crossing) {
		var chain []crossing
		first := c
		for {
			chain = append(chain, c)
			taken[c] = true
			on := false
			for _, n := range m.next[c] {
				if !taken[n] {
					c, on = n, true
					break
				}
			}
			if !on {
				break
			}
		}
		if len(m.next[first]) == 2 {
			chain = append(chain, first)
		}
		chains = append(chains, chain)
	}
	for _, ends := range []int{1, 2} {
		for row := range rows {
			for column := range m.columns {
				for _, upward := range []bool{false, true} {
					c := crossing{column, row, upward}
					if len(m.next[c]) == ends && !taken[c] {
						follow(c)
					}
				}
			}
		}
	}
	return chains
}
