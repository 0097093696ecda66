package trace

import (
	"slices"

	"pavilight/gems"
)

// chunkPoints is how many points of each of its scramblings a chunk has: some
// milliseconds of work, after which a cancelled run stops.
const chunkPoints = 1024

// chunk is the outcome of a stretch of points of some scramblings.
type chunk struct {
	unit  int // its number in the pass
	first int // of its scramblings

	rays    []int        // of each scrambling, which follow one another
	cells   [][]int32    // of the maps, into which each ray falls by its images
	weights []float64    // of each ray in every mean
	xyz     [][3]float64 // how its wavelength counts for X, Y and Z; nil where colour is not gathered
	ledgers [][]Ledger   // by column, of each ray
	lit     [][]float64  // likewise the luminance seen, where colour is gathered
	ways    [][]float64  // likewise the way inside times power, in units of the stone, where ways are
	sums    []sums       // by scrambling, and within that by column
}

// entry is one viewing ray where it meets the stone.
type entry struct {
	point      uint32 // number of its sample point
	facet      int32
	at, along  vec
	wavelength gems.Wavelength
	index      float64    // of the stone there
	xyz        [3]float64 // how the wavelength counts for X, Y and Z
	weight     float64    // in every mean
}

// scratch is what a worker writes on while it traces chunks.
type scratch struct {
	entries []entry // of all scramblings of a chunk, one after the other
	rays    []ray   // of all plain columns, likewise
	stone   remembered
}

// remembered is the index of a material at the wavelength at which it was asked for
// last: many runs know one wavelength only.
type remembered struct {
	at    gems.Wavelength
	index float64
}

func (r *remembered) of(m *gems.Material, w gems.Wavelength) float64 {
	if w != r.at {
		r.at = w
		r.index, _ = m.Index(w) // known to exist since newRun
	}
	return r.index
}

// trace follows points from and to of a chunk's scramblings in every surrounding.
func (r *run) trace(c *chunk, s *scratch, from, to uint32) {
	r.enterAll(c, s, from, to)
	columns, n := len(r.columns), len(s.entries)
	c.ledgers, c.lit, c.ways = make([][]Ledger, columns), make([][]float64, columns), make([][]float64, columns)
	c.sums = make([]sums, r.together*columns)
	s.rays = slices.Grow(s.rays[:0], columns*n)
	for k := range r.columns {
		if r.columns[k].traveller != nil {
			r.travel(c, s, k)
		} else {
			r.appendRays(c, s, k)
		}
	}
	ledgers := make([]Ledger, len(s.rays))
	var lit []float64
	if r.settings.lit() {
		lit = make([]float64, len(s.rays))
	}
	r.tracer.followAll(s.rays, ledgers, lit, c.sums)
	for k := range r.columns {
		if r.columns[k].traveller == nil {
			c.ledgers[k], ledgers = ledgers[:n], ledgers[n:]
			if lit != nil {
				c.lit[k], lit = lit[:n], lit[n:]
			}
		}
	}
}

// enterAll makes points entries, and finds where they belong in the maps.
func (r *run) enterAll(c *chunk, s *scratch, from, to uint32) {
	most := r.together * int(to-from)
	c.cells, c.weights = make([][]int32, len(r.put)), make([]float64, 0, most)
	for i := range c.cells {
		c.cells[i] = make([]int32, 0, most)
	}
	s.entries = slices.Grow(s.entries[:0], most)
	for k := range r.together {
		before := len(s.entries)
		for i := from; i < to; i++ {
			if e, u, v, ok := r.enter(r.points[c.first+k], i, s); ok {
				s.entries = append(s.entries, e)
				c.weights = append(c.weights, e.weight)
				r.appendCells(c.cells, u, v)
				if r.settings.Colour {
					c.xyz = append(c.xyz, e.xyz)
				}
			}
		}
		c.rays = append(c.rays, len(s.entries)-before)
	}
}

// enter makes sample point i an entry, at (u, v) of the picture; ok is false where it
// passes beside the stone.
func (r *run) enter(points points, i uint32, s *scratch) (e entry, u, v float64, ok bool) {
	px, py := points.place(i)
	if r.symmetry != nil {
		u, v = r.symmetry.place(px, py)
	} else {
		u, v = (2*px-1)*r.tracer.outline.half, (2*py-1)*r.tracer.outline.half
	}
	facet, x, d, ok := r.tracer.arrive(u, v)
	if !ok {
		return entry{}, 0, 0, false
	}
	e = entry{point: i, facet: int32(facet), at: x, along: d, xyz: [3]float64{1, 1, 1}}
	switch {
	case r.settings.Wavelength != 0:
		e.wavelength = r.settings.Wavelength
	case r.settings.Colour:
		e.wavelength, e.xyz = colourWavelength(points.wavelength(i))
	default:
		e.wavelength = gems.SpectrumWavelength(points.wavelength(i))
	}
	e.weight = e.xyz[1]
	e.index = s.stone.of(r.scene.Material, e.wavelength)
	return e, u, v, true
}

// appendCells appends, by image, the cell of the maps that keeps what is seen at (u, v)
// of the picture.
func (r *run) appendCells(cells [][]int32, u, v float64) {
	half, n := r.tracer.outline.half, r.settings.Pixels
	k := float64(n) / (2 * half)
	for i, image := range r.put {
		iu, iv := u, v
		if image > 0 {
			iu, iv = r.symmetry.image(u, v, image)
		}
		column, row := int((half+iu)*k), int((half+iv)*k)
		// Images may round across the picture's edge.
		column, row = max(0, min(column, n-1)), max(0, min(row, n-1))
		cells[i] = append(cells[i], r.grid.cell[(n-1-row)*n+column])
	}
}

// appendRays appends the rays of one column for the plain tracer.
func (r *run) appendRays(c *chunk, s *scratch, column int) {
	medium := r.scene.Surroundings[column].Medium
	unit, colour := r.tracer.body.unit, r.scene.Material.Absorption
	var outside remembered
	next := 0
	for scrambling, n := range c.rays {
		for i := range s.entries[next : next+n] {
			e := &s.entries[next+i]
			s.rays = append(s.rays, ray{
				facet: e.facet, column: int32(scrambling*len(r.columns) + column), at: e.at, along: e.along,
				n: e.index, m: outside.of(medium, e.wavelength), absorb: meanAbsorption(colour, e.wavelength) * unit,
				wavelength: e.wavelength, weight: e.weight, die: newDice(r.points[c.first+scrambling], e.point, column),
			})
		}
		next += n
	}
}

// travel traces one column with its general tracer.
func (r *run) travel(c *chunk, s *scratch, column int) {
	t, n := r.columns[column].traveller, len(s.entries)
	ledgers, lit, ways := make([]Ledger, n), make([]float64, n), make([]float64, n)
	var at lambda
	next := 0
	for scrambling, n := range c.rays {
		total := &c.sums[scrambling*len(r.columns)+column]
		for i := next; i < next+n; i++ {
			e := &s.entries[i]
			t.look(e.wavelength, r.scene.Material, &at)
			var one sums
			die := newDice(r.points[c.first+scrambling], e.point, column)
			ledgers[i] = t.send(int(e.facet), e.at, e.along, &at, die, &one)
			one.addLedger(ledgers[i])
			one[rayCount] = 1
			lit[i] = one[litSurface] + one[litReturned] + one[litLeaked]
			ways[i] = one[pathLength]
			segments := one[segmentCount]
			total.addWeighted(e.weight, &one)
			total[segmentCount] += segments - e.weight*segments // a count knows no weight
		}
		next += n
	}
	c.ledgers[column], c.lit[column], c.ways[column] = ledgers, lit, ways
}

// add takes chunks into the run's sums and maps. It goes through a map image by
// image, since each image of all rays falls on one part of it: a part that stays in the
// processor's memory.
func (r *run) add(batch []*chunk) {
	for _, c := range batch {
		for scrambling, n := range c.rays {
			r.rays += n
			for k := range r.columns {
				r.columns[k].scrambled[c.first+scrambling].add(&c.sums[scrambling*len(r.columns)+k])
			}
		}
	}
	for k := range r.columns {
		mapped := r.columns[k].mapped
		for image := range r.put {
			for _, c := range batch {
				for i, cell := range c.cells[image] {
					mapped.add(cell, c.weights[i], &c.ledgers[k][i])
				}
				if r.settings.Colour {
					for i, cell := range c.cells[image] {
						mapped.addColour(cell, c.lit[k][i], c.xyz[i])
					}
				}
				if r.settings.Paths {
					for i, cell := range c.cells[image] {
						mapped.addWay(cell, c.weights[i]*c.ways[k][i]*r.tracer.body.unit)
					}
				}
			}
		}
	}
}
