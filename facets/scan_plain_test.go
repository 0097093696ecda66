package facets

import (
	"fmt"
	"math"
	"strings"
	"testing"
)

// TestScanOfPlainNumbers reads blocks as drawing programs write them, with as few
// digits as the numbers have.
func TestScanOfPlainNumbers(t *testing.T) {
	for _, size := range [][3]float64{{4, 3, 2}, {4, 3, 2.5}, {120, 80, 60}, {0.5, 0.7, 0.9}} {
		var b strings.Builder
		for i := range 8 {
			v := [3]float64{}
			for k := range v {
				if i>>k&1 != 0 {
					v[k] = size[k]
				}
			}
			fmt.Fprintf(&b, "v %g %g %g\n", v[0], v[1], v[2])
		}
		b.WriteString("f 1 3 4 2\nf 5 6 8 7\nf 1 2 6 5\nf 3 7 8 4\nf 1 5 7 3\nf 2 4 8 6\n")
		sc, err := ReadScan(strings.NewReader(b.String()), "block.obj", ScanOptions{})
		if err != nil {
			t.Fatal(err)
		}
		s, err := sc.Stone(ScanPlacement{Name: "block"})
		if err != nil {
			t.Errorf("%v: %v", size, err)
			continue
		}
		if want := size[0] * size[1] * size[2]; len(s.Facets) != 6 || math.Abs(s.Volume()/want-1) > 1e-9 {
			t.Errorf("%v: %d facets, %v mm³, want 6 and %v (product of the edges)", size, len(s.Facets), s.Volume(), want)
		}
	}
}
