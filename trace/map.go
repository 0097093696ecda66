package trace

// Map holds the ledger of every pixel of the picture, as seen from the eye. Row 0
// is the top row, pixel (0, 0) the top left. The picture is a square about the
// middle of the stone's outline.
type Map struct {
	Pixels int     // of each edge
	Span   float64 // mm across the whole picture
}

// At returns the mean ledger of the rays that fell into the pixel and their
// number, 0 outside the outline and where no ray fell yet.
func (m *Map) At(x, y int) (Ledger, int) { return Ledger{}, 0 }

// Field returns one quantity for every pixel, row by row from the top left. A
// pixel without rays inside the outline takes the mean of its surroundings, so a
// coarse run gives a coarse picture; a pixel outside the outline is NaN.
func (m *Map) Field(q Quantity) []float32 { return nil }
