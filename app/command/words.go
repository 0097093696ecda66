package command

import (
	"encoding/json"
	"fmt"
	"io"
	"math"
	"strconv"
)

// printJSON prints v as JSON for people and programs: indented, numbers in full.
func printJSON(w io.Writer, v any) error {
	e := json.NewEncoder(w)
	e.SetIndent("", "  ")
	e.SetEscapeHTML(false)
	return e.Encode(v)
}

// inDegrees writes an angle with two decimals, none for nil.
func inDegrees(angle *float64, none string) string {
	if angle == nil {
		return none
	}
	return strconv.FormatFloat(*angle, 'f', 2, 64) + "°"
}

// decimals of a share and of its error in tables.
const decimals = 5

// withError writes a share and its standard error. The error is rounded up, so that
// it is never told smaller than it is.
func withError(value, standardError float64) string {
	scale := math.Pow10(decimals)
	up := max(0, math.Ceil(standardError*scale-1e-6)/scale) // 1e-6 of the last digit forgives rounding
	return fmt.Sprintf("%.*f ± %.*f", decimals, value, decimals, up)
}
