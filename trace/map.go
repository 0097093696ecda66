package trace

import "math"

// Map holds the ledger of every pixel of the picture, as seen from the eye. Row 0
// is the top row, pixel (0, 0) the top left. The picture is a square about the
// middle of the stone's outline, which touches its edges.
type Map struct {
	Pixels int     // of each edge
	Span   float64 // mm across the whole picture
	cells  []cell  // row by row
	inside []bool  // the pixel's middle shows the stone; shared, never written again
}

// cell is what fell into one pixel: sums over its rays.
type cell struct {
	Ledger
	rays int32
}

func (m *Map) clone() *Map {
	c := *m
	c.cells = append([]cell(nil), m.cells...)
	return &c
}

func (m *Map) add(pixel int, l *Ledger) {
	c := &m.cells[pixel]
	c.Surface += l.Surface
	c.Returned += l.Returned
	c.Head += l.Head
	c.Leaked += l.Leaked
	c.Absorbed += l.Absorbed
	c.Unresolved += l.Unresolved
	c.rays++
}

// At returns the mean ledger of the rays that fell into the pixel and their
// number, 0 outside the outline and where no ray fell yet.
func (m *Map) At(x, y int) (Ledger, int) {
	c := &m.cells[y*m.Pixels+x]
	if c.rays == 0 {
		return Ledger{}, 0
	}
	k := 1 / float64(c.rays)
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
	base := layer{m.Pixels, make([]float32, len(m.cells)), make([]float32, len(m.cells))}
	for i := range m.cells {
		base.sum[i] = float32(q.Of(m.cells[i].Ledger))
		base.rays[i] = float32(m.cells[i].rays)
	}
	base.fillFromCoarser()
	for i := range base.sum {
		if !m.inside[i] && m.cells[i].rays == 0 {
			base.sum[i] = float32(math.NaN())
		} else {
			base.sum[i] /= base.rays[i]
		}
	}
	return base.sum
}

// layer is one level of a pyramid: sums and numbers of rays, so that a mean can
// be had at any level.
type layer struct {
	size      int
	sum, rays []float32
}

// fillFromCoarser gives each empty cell the mean of the coarser cell around it,
// which is filled in the same way. A single cell without rays counts one ray of
// nothing.
func (l *layer) fillFromCoarser() {
	if l.size == 1 {
		if l.rays[0] == 0 {
			l.rays[0] = 1
		}
		return
	}
	empty := false
	up := layer{size: (l.size + 1) / 2}
	up.sum = make([]float32, up.size*up.size)
	up.rays = make([]float32, up.size*up.size)
	for y := range l.size {
		for x := range l.size {
			i, j := y*l.size+x, y/2*up.size+x/2
			up.sum[j] += l.sum[i]
			up.rays[j] += l.rays[i]
			empty = empty || l.rays[i] == 0
		}
	}
	if !empty {
		return
	}
	up.fillFromCoarser()
	for y := range l.size {
		for x := range l.size {
			if i, j := y*l.size+x, y/2*up.size+x/2; l.rays[i] == 0 {
				l.sum[i], l.rays[i] = up.sum[j]/up.rays[j], 1
			}
		}
	}
}
