// Package trace follows light through a convex stone and keeps the ledger of
// where it goes.
//
// Rays run from the eye back into the scene: light paths are reversible. A ray
// that enters an isotropic convex stone never splits inside: at each facet a
// known part leaves for good and the rest goes on.
//
// Viewer's frame. +Z to the eye, +X right, +Y up on every map; face-up, the
// stone's index 0 (its +x) points up the picture and indices grow anticlockwise.
// Up and down in the ledger are the viewer's.
package trace

import (
	"context"
	"errors"
	"time"

	"pavilight/facets"
	"pavilight/gems"
)

// View is where the eye stands: its direction in the stone's frame is
// (sin Tilt cos Turn, sin Tilt sin Turn, cos Tilt). The stone rocks about one
// axis lying in the picture, without spin. Tilt lies in [0°, 90°).
type View struct {
	Tilt, Turn facets.Angle
}

// Scene is one stone and what it is traced in.
type Scene struct {
	Stone    *facets.Stone
	Material *gems.Material   // what the stone is made of
	Media    []*gems.Material // what surrounds stone, lights and eye; one column each
}

// Settings say how a scene is viewed and how long it is traced. The zero value
// is face-up, without a head, over the spectrum, at the defaults named below.
type Settings struct {
	View       View
	Head       facets.Angle    // half-angle of the cone that the viewer's head blocks; 0 for none
	Wavelength gems.Wavelength // nm; 0 for the spectrum, equal energy weighted by V(lambda), 400 to 700 nm
	Below      float64         // luminance of what lies under the stone, 0 to 1 (white paper)
	Pixels     int             // of a map's edge; 0 means 300
	Samples    int             // mean rays per pixel at which tracing stops; 0 means until Error is reached
	Error      float64         // stop when the standard error of every ledger entry is below; 0 means 0.0005
	Seed       uint64          // same seed, same result, for any number of workers
	Workers    int             // goroutines that trace; 0 means all cores
}

// Result is what a run found, one column a medium, in the scene's order.
type Result struct {
	Columns []Column
	Rays    int           // that met the stone so far, the same for every column
	Elapsed time.Duration // since the run began
	Done    float64       // estimated share of the work done, 0 to 1; 1 in the final result
}

// Column is what was found in one medium.
type Column struct {
	Medium        *gems.Material
	IndexStone    float64      // at the wavelength traced, at the D line for the spectrum
	IndexMedium   float64      // likewise
	Critical      facets.Angle // at those indices; meaningful only if HasCritical
	HasCritical   bool         // false where the stone is not the denser side
	Ledger        Ledger       // means over the outline as seen
	StandardError Ledger       // of those means, from independent scramblings
	Lit           Lit
	From          [18]float64 // returned + head by angle from the eye, 5-degree bins
	LeakyArea     float64     // share of rays with leaked > 0.5
	WindowedArea  float64     // share of rays of which more than half leaves downward where they first meet the pavilion
	Segments      int64       // facet hits inside the stone
	Map           *Map
}

// Lit is the luminance under the even light relative to a white diffuser in the
// same place: its surface, returned and leaked parts and their sum.
type Lit struct {
	Surface  float64 `json:"surface"`
	Returned float64 `json:"returned"`
	Leaked   float64 `json:"leaked"`
	Sum      float64 `json:"sum"`
}

// Run traces the scene until the settings' error or samples are reached. It
// calls report, which may be nil, between passes with all that is known so far,
// coarse first; the result it is given is its own to keep. When ctx is cancelled
// Run returns the last complete result (nil if there is none) and the cause.
// All goroutines that Run starts have returned before it does.
func Run(ctx context.Context, scene Scene, settings Settings, report func(*Result)) (*Result, error) {
	return nil, errors.New("not yet")
}
