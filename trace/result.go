package trace

import (
	"time"

	"pavilight/facets"
)

// Result is what a run found, one column a medium, in the scene's order.
type Result struct {
	Columns []Column
	Rays    int           // that met the stone so far, the same for every column
	Elapsed time.Duration // since the run began
	Done    float64       // estimated share of the work done, 0 to 1; 1 in the final result
}

// Column is what was found in one surrounding.
type Column struct {
	Surrounding
	IndexStone    float64      // at the wavelength traced, at the D line for the spectrum
	IndexMedium   float64      // likewise
	Critical      facets.Angle // at those indices; meaningful only if HasCritical
	HasCritical   bool         // false where the stone is not the denser side
	Limits        []Limit      // of a stone traced as doubly refracting, at each principal index, the lowest first; else nil
	Ledger        Ledger       // means over the outline as seen
	StandardError Ledger       // of those means, from independent scramblings
	Lit           Lit
	From          [fromBins]float64 // returned + head by angle from the eye, bins of 5 degrees
	FromError     [fromBins]float64 // their standard errors
	LeakyArea     float64           // share of rays with leaked > 0.5
	LeakyError    float64           // its standard error
	WindowedArea  float64           // share of rays of which more than half leaves downward where they first meet the pavilion
	WindowedError float64           // its standard error
	PathLength    float64           // mm inside the stone, the mean of the light that leaves it; 0 where it was not asked for
	Segments      int64             // facet hits inside the stone
	Map           *Map              // nil in what is reported before the end if Settings.MapsLast
}

// Lit is the luminance under the settings' light, relative to a white diffuser that lies
// in the same place facing the eye with no head in the way: its surface, returned
// and leaked parts and their sum.
type Lit struct {
	Surface  float64 `json:"surface"`
	Returned float64 `json:"returned"`
	Leaked   float64 `json:"leaked"`
	Sum      float64 `json:"sum"`
}

// Limit is the critical angle at one principal index of a doubly refracting stone.
// The lowest index has the largest critical angle, on which warnings rest.
type Limit struct {
	Index       float64
	Critical    facets.Angle // inside the stone, from the normal; meaningful only if HasCritical
	HasCritical bool         // false where the stone is not the denser side
}
