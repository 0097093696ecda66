package trace

// Ledger splits one unit of viewing ray by where it goes. The six entries sum
// to 1. A mean over rays is a Ledger too, and so is its standard error (which
// sums to nothing in particular).
type Ledger struct {
	Surface    float64 `json:"surface"`    // mirrored by the first surface it meets, wherever that sends it
	Returned   float64 `json:"returned"`   // leaves the stone upward, where light can come from
	Head       float64 `json:"head"`       // leaves upward within the viewer's own head, which blocks the light
	Leaked     float64 `json:"leaked"`     // leaves downward: what shows there lies under the stone
	Absorbed   float64 `json:"absorbed"`   // is absorbed inside
	Unresolved float64 `json:"unresolved"` // is still inside when tracing ended
}

// Sum returns the sum of the six entries, 1 for a ray or a mean of rays.
func (l Ledger) Sum() float64 {
	return l.Surface + l.Returned + l.Head + l.Leaked + l.Absorbed + l.Unresolved
}

// Max returns the largest of the six entries.
func (l Ledger) Max() float64 {
	return max(l.Surface, l.Returned, l.Head, l.Leaked, l.Absorbed, l.Unresolved)
}

// Quantity names one entry of the ledger, for maps.
type Quantity int

// The quantities in the order of the ledger.
const (
	Surface Quantity = iota
	Returned
	Head
	Leaked
	Absorbed
	Unresolved
	quantities // how many there are
)

// String returns the quantity's word as ledgers write it.
func (q Quantity) String() string {
	return [...]string{"surface", "returned", "head", "leaked", "absorbed", "unresolved"}[q]
}

// Of returns the entry of l that q names.
func (q Quantity) Of(l Ledger) float64 {
	return [...]float64{l.Surface, l.Returned, l.Head, l.Leaked, l.Absorbed, l.Unresolved}[q]
}
