package trace

import (
	"math"
	"slices"
)

// Map holds the ledger of every pixel of the picture, as seen from the eye. Row 0
// is the top row, pixel (0, 0) the top left. The picture is a square about the
// middle of the stone's outline, which touches its edges.
type Map struct {
	Pixels int          // of each edge
	Span   float64      // mm across the whole picture
	grid   *grid        // which cell keeps what fell into a pixel; shared
	cells  []cell       // in the grid's order
	colour [][3]float32 // sums of X, Y and Z likewise; nil where colour was not gathered
	ways   []float32    // sums of way inside times power, mm; nil where they were not gathered
}

// cell is what fell into one pixel: sums over its rays.
type cell struct {
	Ledger
	weight float64 // of the rays
	rays   int32
}

func newMap(g *grid, span float64, colour, ways bool) *Map {
	n := len(g.first)
	m := &Map{Pixels: g.pixels, Span: span, grid: g, cells: make([]cell, n)}
	if colour {
		m.colour = make([][3]float32, n)
	}
	if ways {
		m.ways = make([]float32, n)
	}
	return m
}

func (m *Map) clone() *Map {
	c := *m
	c.cells, c.colour, c.ways = slices.Clone(m.cells), slices.Clone(m.colour), slices.Clone(m.ways)
	return &c
}

func (m *Map) add(at int32, weight float64, l *Ledger) {
	c := &m.cells[at]
	c.Surface += weight * l.Surface
	c.Returned += weight * l.Returned
	c.Head += weight * l.Head
	c.Leaked += weight * l.Leaked
	c.Absorbed += weight * l.Absorbed
	c.Unresolved += weight * l.Unresolved
	c.weight += weight
	c.rays++
}

func (m *Map) addColour(at int32, radiance float64, xyz [3]float64) {
	for i := range xyz {
		m.colour[at][i] += float32(radiance * xyz[i])
	}
}

// addWay adds a way inside times the power and weight of its light, in mm.
func (m *Map) addWay(at int32, way float64) { m.ways[at] += float32(way) }

// At returns the mean ledger of the rays that fell into the pixel and their
// number, 0 outside the outline and where no ray fell yet.
func (m *Map) At(x, y int) (Ledger, int) {
	c := &m.cells[m.grid.cell[y*m.Pixels+x]]
	if c.rays == 0 {
		return Ledger{}, 0
	}
	k := 1 / c.weight
	return Ledger{c.Surface * k, c.Returned * k, c.Head * k, c.Leaked * k, c.Absorbed * k, c.Unresolved * k}, int(c.rays)
}

// Inside reports whether the pixel shows the stone: its middle lies within the
// outline or a ray through it met the stone.
func (m *Map) Inside(x, y int) bool {
	c := m.grid.cell[y*m.Pixels+x]
	return m.grid.inside[c] || m.cells[c].rays > 0
}

// Field returns one quantity for every pixel, row by row from the top left. A
// pixel of the stone that no ray has met yet takes the mean of its surroundings,
// so a coarse run gives a coarse picture; outside the outline the field is NaN.
func (m *Map) Field(q Quantity) []float32 {
	return m.filled(
		func(c int) float32 { return float32(q.Of(m.cells[c].Ledger)) },
		func(c int) float32 { return float32(m.cells[c].weight) })
}

// XYZ returns the CIE 1931 tristimulus values of every pixel, in the order and with
// the gaps filled as by Field, relative to a white diffuser in the stone's place
// under the same light, whose Y is 1. It returns nil where colour was not gathered.
func (m *Map) XYZ() [][3]float32 {
	if m.colour == nil {
		return nil
	}
	xyz := make([][3]float32, m.Pixels*m.Pixels)
	for k := range 3 {
		for i, v := range m.filled(
			func(c int) float32 { return m.colour[c][k] },
			func(c int) float32 { return float32(m.cells[c].rays) }) {
			xyz[i][k] = v
		}
	}
	return xyz
}

// PathLengths returns the mean way inside the stone, in mm, of the light of each pixel
// that leaves it from inside, in the order and with the gaps filled as by Field; a
// pixel from which nothing comes out is such a gap. It returns nil where ways were not
// gathered.
func (m *Map) PathLengths() []float32 {
	if m.ways == nil {
		return nil
	}
	return m.filled(
		func(c int) float32 { return m.ways[c] },
		func(c int) float32 { l := &m.cells[c]; return float32(l.Returned + l.Head + l.Leaked) })
}

// filled returns sum over weight of every pixel; both are of a cell.
func (m *Map) filled(sum, weight func(cell int) float32) []float32 {
	if m.grid == nil {
		return nil // the zero Map has no pixels
	}
	mean, gaps := make([]float32, len(m.cells)), false
	for c := range m.cells {
		if !m.grid.inside[c] && m.cells[c].rays == 0 {
			mean[c] = float32(math.NaN())
			continue
		}
		if w := weight(c); w != 0 {
			mean[c] = sum(c) / w
		} else {
			gaps = true
		}
	}
	var base layer
	if gaps {
		base = layer{m.Pixels, make([]float32, len(m.grid.cell)), make([]float32, len(m.grid.cell))}
		for i, c := range m.grid.cell {
			base.sum[i], base.weight[i] = sum(int(c)), weight(int(c))
		}
		base.fillFromCoarser()
	}
	field := make([]float32, len(m.grid.cell))
	for i, c := range m.grid.cell {
		field[i] = mean[c]
		if gaps && weight(int(c)) == 0 && m.grid.inside[c] {
			field[i] = base.sum[i] / base.weight[i]
		}
	}
	return field
}

// layer is one level of a pyramid: sums and the weights of their rays, so that a mean
// can be had at any level.
type layer struct {
	size        int
	sum, weight []float32
}

// fillFromCoarser gives each empty cell the mean of the coarser cell around it,
// which is filled in the same way. A single cell without rays counts one ray of
// nothing.
func (l *layer) fillFromCoarser() {
	if l.size == 1 {
		if l.weight[0] == 0 {
			l.weight[0] = 1
		}
		return
	}
	empty := false
	up := layer{size: (l.size + 1) / 2}
	up.sum = make([]float32, up.size*up.size)
	up.weight = make([]float32, up.size*up.size)
	for y := range l.size {
		for x := range l.size {
			i, j := y*l.size+x, y/2*up.size+x/2
			up.sum[j] += l.sum[i]
			up.weight[j] += l.weight[i]
			empty = empty || l.weight[i] == 0
		}
	}
	if !empty {
		return
	}
	up.fillFromCoarser()
	for y := range l.size {
		for x := range l.size {
			if i, j := y*l.size+x, y/2*up.size+x/2; l.weight[i] == 0 {
				l.sum[i], l.weight[i] = up.sum[j]/up.weight[j], 1
			}
		}
	}
}
