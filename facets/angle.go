package facets

import (
	"math"
	"strconv"
)

// Angle is an angle in radians. Degrees exist only at the edges of the
// program: files, screen and command line.
type Angle float64

// Units of angle: 41.5*facets.Degree reads as it is spoken.
const (
	Radian Angle = 1
	Degree Angle = math.Pi / 180 * Radian
)

// Degrees returns the angle in degrees.
func (a Angle) Degrees() float64 { return float64(a / Degree) }

// Radians returns the angle in radians.
func (a Angle) Radians() float64 { return float64(a) }

// String returns the angle in degrees with two decimals and the degree sign.
func (a Angle) String() string { return strconv.FormatFloat(a.Degrees(), 'f', 2, 64) + "°" }
