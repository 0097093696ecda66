package tune

import (
	"math"
	"testing"
)

// The angles of the historic proportions agree with the heights that are tabulated beside
// them: crown (100 - table)/2 tan(crown), pavilion 50 tan(pavilion), in percent.
func TestHistoricProportions(t *testing.T) {
	heights := map[string][2]float64{ // crown and pavilion, percent; trade tables
		"Tolkowsky 1919": {16.2, 43.1}, "Johnsen 1926": {19.2, 40.0}, "Eppler 1939": {14.4, 43.2},
		"Parker 1951": {10.5, 43.4}, "Eulitz 1968": {14.45, 43.15}, "Scandinavian 1969": {14.6, 43.1},
	}
	list := HistoricProportions()
	if len(list) != len(heights) {
		t.Errorf("%d proportions, %d heights", len(list), len(heights))
	}
	for _, h := range list {
		want := heights[h.Name]
		crown := (100 - h.Table) / 2 * math.Tan(h.Crown*math.Pi/180)
		pavilion := 50 * math.Tan(h.Pavilion*math.Pi/180)
		const tabulated = 0.12 // percent: heights to 0.1 and angles to 0.1 degree
		if math.Abs(crown-want[0]) > tabulated || math.Abs(pavilion-want[1]) > tabulated || h.Source == "" {
			t.Errorf("%s: crown %.2f %%, pavilion %.2f %%, want %v", h.Name, crown, pavilion, want)
		}
	}
}
