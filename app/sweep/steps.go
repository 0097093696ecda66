package sweep

import (
	"fmt"
	"math"
	"strconv"
	"strings"
)

const mostSteps = 100_000

// steps returns the numbers that FROM..TO/STEP stands for, with as many decimals as
// were written, so that 0..1/0.1 has 0.3 and not its neighbour.
func steps(text string) ([]string, error) {
	fault := fmt.Errorf("%q: write a range like -20..20/10, the smaller number first and a step above 0", text)
	from, rest, _ := strings.Cut(text, "..")
	to, step, ok := strings.Cut(rest, "/")
	if !ok {
		return nil, fault
	}
	var v [3]float64
	decimals := 0
	for i, word := range []string{from, to, step} {
		var err error
		if v[i], err = strconv.ParseFloat(word, 64); err != nil || strings.ContainsAny(word, "eExXpP") {
			return nil, fault
		}
		if _, fraction, ok := strings.Cut(word, "."); ok {
			decimals = max(decimals, len(fraction))
		}
	}
	count := math.Floor((v[1]-v[0])/v[2] + 1e-9) // 1e-9 of a step forgives rounding
	if !(v[2] > 0 && count >= 0 && count < mostSteps) {
		return nil, fault
	}
	var all []string
	for i := range int(count) + 1 {
		all = append(all, strconv.FormatFloat(v[0]+float64(i)*v[2], 'f', decimals, 64))
	}
	return all, nil
}
