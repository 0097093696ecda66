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
	cells  []cell       // row by row
	colour [][3]float32 // sums of X, Y and Z likewise; nil where colour was not gathered
	ways   []float32    // sums of way inside times power, mm; nil where they were not gathered
	inside []bool       // the pixel's middle shows the stone; shared, never written again
}

// cell is what fell into one pixel: sums over its rays.
type cell struct {
	Ledger
	weight float64 // of the rays
	rays   int32
}

func newMap(pixels int, span float64, inside []bool, colour, ways bool) *Map {
	m := &Map{Pixels: pixels, Span: span, cells: make([]cell, pixels*pixels), inside: inside}
	if colour {
		m.colour = make([][3]float32, pixels*pixels)
	}
	if ways {
		m.ways = make([]float32, pixels*pixels)
	}
	return m
}

func (m *Map) clone() *Map {
	c := *m
	c.cells, c.colour, c.ways = slices.Clone(m.cells), slices.Clone(m.colour), slices.Clone(m.ways)
	return &c
}

func (m *Map) add(pixel int, weight float64, l *Ledger) {
	c := &m.cells[pixel]
	c.Surface += weight * l.Surface
	c.Returned += weight * l.Returned
	c.Head += weight * l.Head
	c.Leaked += weight * l.Leaked
	c.Absorbed += weight * l.Absorbed
	c.Unresolved += weight * l.Unresolved
	c.weight += weight
	c.rays++
}

func (m *Map) addColour(pixel int, radiance float64, xyz [3]float64) {
	for i := range xyz {
		m.colour[pixel][i] += float32(radiance * xyz[i])
	}
}

// addWay adds a way inside times the power and weight of its light, in mm.
func (m *Map) addWay(pixel int, way float64) { m.ways[pixel] += float32(way) }

// At returns the mean ledger of the rays that fell into the pixel and their
// number, 0 outside the outline and where no ray fell yet.
func (m *Map) At(x, y int) (Ledger, int) {
	c := &m.cells[y*m.Pixels+x]
	if c.rays == 0 {
		return Ledger{}, 0
	}
	k := 1 / c.weight
	return Ledger{c.Surface * k, c.Returned * k, c.Head * k, c.Leaked * k, c.Absorbed * k, c.Unresolved * k}, int(c.rays)
}

// Inside reports whether the pixel shows the stone: its middle lies within the
// outline or a ray through it met the stone.
func (m *Map) Inside(x, y int) bool {
	i := y*m.Pixels + x
	return m.inside[i] || m.cells[i].rays > 0
}

// Field returns one quantity for every pixel, row by row from the top left. A
// pixel of the stone that no ray has met yet takes the mean of its surroundings,
// so a coarse run gives a coarse picture; outside the outline the field is NaN.
func (m *Map) Field(q Quantity) []float32 {
	return m.filled(
		func(i int) float32 { return float32(q.Of(m.cells[i].Ledger)) },
		func(i int) float32 { return float32(m.cells[i].weight) })
}

// XYZ returns the CIE 1931 tristimulus values of every pixel, in the order and with
// the gaps filled as by Field, relative to a white diffuser in the stone's place
// under the same light, whose Y is 1. It returns nil where colour was not gathered.
func (m *Map) XYZ() [][3]float32 {
	if m.colour == nil {
		return nil
	}
	xyz := make([][3]float32, len(m.cells))
	for k := range 3 {
		for i, v := range m.filled(
			func(i int) float32 { return m.colour[i][k] },
			func(i int) float32 { return float32(m.cells[i].rays) }) {
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
		func(i int) float32 { return m.ways[i] },
		func(i int) float32 { c := &m.cells[i]; return float32(c.Returned + c.Head + c.Leaked) })
}

// filled returns sum over weight of every pixel.
func (m *Map) filled(sum, weight func(pixel int) float32) []float32 {
	base := layer{m.Pixels, make([]float32, len(m.cells)), make([]float32, len(m.cells))}
	for i := range m.cells {
		base.sum[i], base.weight[i] = sum(i), weight(i)
	}
	base.fillFromCoarser()
	for i := range base.sum {
		if !m.inside[i] && m.cells[i].rays == 0 {
			base.sum[i] = float32(math.NaN())
		} else {
			base.sum[i] /= base.weight[i]
		}
	}
	return base.sum
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
