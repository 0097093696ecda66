package trace

import "math"

// grid is the pixels of a picture, and the cell of the map that keeps what fell into
// each. Some turns and mirrors of a symmetric stone bring pixels onto pixels: quarter
// turns, and mirrors along the picture's edges and diagonals. All pixels that they bring
// onto one another see the same rays, so they share one cell, and only one of them is
// filled. A grid is never written again once it is made.
type grid struct {
	pixels int     // of each edge
	cell   []int32 // of each pixel, row by row from the top left
	first  []int32 // pixel of each cell, the first of those that share it
	shared []int32 // by how many pixels each cell is shared
	inside []bool  // by cell: its pixels' middles show the stone
	folds  int     // by how many pixels a cell is shared that lies on no mirror line
	area   int     // how many pixels' middles show the stone
}

// newGrid returns the grid of a picture of which the images with the matrices in folds,
// itself among them, bring pixels onto pixels. shows tells whether the stone shows at
// the middle of a pixel.
func newGrid(pixels int, folds [][4]float64, shows func(column, row int) bool) *grid {
	g := &grid{pixels: pixels, cell: make([]int32, pixels*pixels), folds: len(folds)}
	whole := make([][4]int, len(folds))
	for i, m := range folds {
		for k, v := range m {
			whole[i][k] = int(math.Round(v))
		}
	}
	for i := range g.cell {
		if g.cell[i] > 0 {
			continue
		}
		g.first, g.shared = append(g.first, int32(i)), append(g.shared, 0)
		n := len(g.first) // numbers are one too high until all are given
		g.inside = append(g.inside, shows(i%pixels, i/pixels))
		// In half pixels from the picture's middle, right and up.
		u, v := 2*(i%pixels)+1-pixels, pixels-1-2*(i/pixels)
		for _, m := range whole {
			column, row := (m[0]*u+m[1]*v+pixels-1)/2, (pixels-1-m[2]*u-m[3]*v)/2
			if at := row*pixels + column; g.cell[at] == 0 {
				g.cell[at] = int32(n)
				g.shared[n-1]++
			}
		}
	}
	for i := range g.cell {
		g.cell[i]--
	}
	for c, inside := range g.inside {
		if inside {
			g.area += int(g.shared[c])
		}
	}
	return g
}

// insidePixels tells of each pixel whether its middle shows the stone.
func (g *grid) insidePixels() []bool {
	inside := make([]bool, len(g.cell))
	for i, c := range g.cell {
		inside[i] = g.inside[c]
	}
	return inside
}

// grid returns the grid of a picture, and the images of each ray that must be put into
// it: one of all those that the grid has in one.
func (s *symmetry) grid(t *tracer, pixels int) (g *grid, put []int) {
	var folds [][4]float64
	for i, m := range s.images {
		// It must keep the picture's middle too.
		if u, v := s.image(0, 0, i); math.Hypot(u, v) < sameFacet && ontoPixels(m) {
			folds = append(folds, m)
		}
	}
	done := make([]bool, len(s.images))
	for i, m := range s.images {
		if done[i] {
			continue
		}
		put = append(put, i)
		for _, f := range folds {
			for j, image := range s.images {
				done[j] = done[j] || sameMatrix(product(f, m), image)
			}
		}
	}
	step := 2 * t.outline.half / float64(pixels)
	return newGrid(pixels, folds, func(column, row int) bool {
		_, _, _, ok := t.arrive((float64(column)+0.5)*step-t.outline.half, t.outline.half-(float64(row)+0.5)*step)
		return ok
	}), put
}

// ontoPixels reports whether a turn or mirror about the middle of a picture brings
// pixels onto pixels.
func ontoPixels(m [4]float64) bool {
	for _, v := range m {
		if math.Abs(v-math.Round(v)) > sameFacet {
			return false
		}
	}
	return true
}

// product is the matrix of b followed by a.
func product(a, b [4]float64) [4]float64 {
	return [4]float64{
		a[0]*b[0] + a[1]*b[2], a[0]*b[1] + a[1]*b[3],
		a[2]*b[0] + a[3]*b[2], a[2]*b[1] + a[3]*b[3],
	}
}

func sameMatrix(a, b [4]float64) bool {
	for k := range a {
		if math.Abs(a[k]-b[k]) > sameFacet {
			return false
		}
	}
	return true
}
