package gems

import (
	"math"
	"testing"
)

// linesRow holds the index at the lines B, C, D, d, e, F and G; 0 where the line lies
// outside the published range.
type linesRow struct {
	key  string
	axis int // into Principal
	n    [7]float64
}

// Source: worked out from the cited coefficients by a second, independent program and
// rounded to five decimals; computed. It finds slips in coefficients and forms.
var linesRows = []linesRow{
	{"diamond", 0, [7]float64{2.40728, 2.40991, 2.41726, 2.41749, 2.42359, 2.43554, 2.45172}},
	{"corundum", 0, [7]float64{1.76369, 1.76488, 1.76808, 1.76817, 1.77071, 1.77551, 1.78180}},
	{"corundum", 2, [7]float64{1.75570, 1.75687, 1.76000, 1.76010, 1.76258, 1.76728, 1.77345}},
	{"quartz", 0, [7]float64{1.54097, 1.54185, 1.54421, 1.54428, 1.54614, 1.54966, 1.55428}},
	{"quartz", 2, [7]float64{1.54996, 1.55087, 1.55331, 1.55338, 1.55531, 1.55895, 1.56372}},
	{"zirconia", 0, [7]float64{2.14506, 2.14860, 2.15846, 2.15877, 2.16697, 2.18315, 2.20546}},
	{"rutile", 0, [7]float64{2.55673, 2.57092, 2.61291, 2.61427, 2.65203, 2.73451, 2.86904}},
	{"rutile", 2, [7]float64{2.83810, 2.85588, 2.90865, 2.91035, 2.95806, 3.06304, 3.23678}},
	{"spinel", 0, [7]float64{1.71130, 1.71260, 1.71610, 1.71621, 1.71903, 1.72440, 1.73149}},
	{"yag", 0, [7]float64{1.82629, 1.82799, 1.83265, 1.83279, 1.83657, 1.84383, 1.85351}},
	{"ggg", 0, [7]float64{1.96026, 1.96287, 1.97014, 1.97037, 1.97642, 1.98833, 2.00472}},
	{"strontium-titanate", 0, [7]float64{2.36893, 2.37892, 2.40799, 2.40892, 2.43459, 2.48973, 2.57851}},
	{"moissanite", 0, [7]float64{2.62312, 2.62950, 2.64743, 2.64799, 2.66304, 2.69299, 0}},
	{"moissanite", 2, [7]float64{2.66215, 2.66917, 2.68897, 2.68958, 2.70628, 2.73973, 0}},
	{"chrysoberyl", 1, [7]float64{1.73857, 1.73971, 1.74273, 1.74282, 1.74522, 1.74976, 1.75572}},
	{"chrysoberyl", 2, [7]float64{1.74410, 1.74527, 1.74836, 1.74845, 1.75091, 1.75554, 1.76162}},
	{"chrysoberyl", 0, [7]float64{1.73667, 1.73780, 1.74078, 1.74087, 1.74323, 1.74768, 1.75350}},
	{"calcite", 0, [7]float64{1.65302, 1.65446, 1.65834, 1.65846, 1.66160, 1.66765, 1.67577}},
	{"calcite", 2, [7]float64{1.48371, 1.48435, 1.48613, 1.48618, 1.48765, 1.49049, 1.49430}},
	{"fluorite", 0, [7]float64{1.43196, 1.43246, 1.43381, 1.43385, 1.43494, 1.43703, 1.43978}},
	{"silica-glass", 0, [7]float64{1.45560, 1.45637, 1.45840, 1.45846, 1.46008, 1.46313, 1.46712}},
	{"crown-glass", 0, [7]float64{1.51343, 1.51432, 1.51673, 1.51680, 1.51872, 1.52238, 1.52720}},
	{"flint-glass", 0, [7]float64{1.61329, 1.61503, 1.61989, 1.62004, 1.62408, 1.63208, 1.64325}},
	{"scheelite", 0, [7]float64{1.90987, 1.91260, 1.92018, 1.92041, 1.92669, 1.93893, 0}},
	{"scheelite", 2, [7]float64{1.92595, 1.92886, 1.93696, 1.93721, 1.94391, 1.95700, 0}},
	{"lithium-niobate", 0, [7]float64{2.27376, 2.28051, 2.29967, 2.30027, 2.31659, 2.34989, 2.39855}},
	{"lithium-niobate", 2, [7]float64{2.19134, 2.19712, 2.21351, 2.21402, 2.22795, 2.25627, 2.29755}},
	{"sphalerite", 0, [7]float64{2.33498, 2.34318, 2.36694, 2.36770, 2.38843, 2.43183, 2.49745}},
	{"zincite", 0, [7]float64{1.97618, 1.98281, 2.00274, 2.00339, 2.02177, 2.06357, 0}},
	{"zincite", 2, [7]float64{1.99204, 1.99884, 2.01921, 2.01988, 2.03859, 2.08085, 0}},
	{"periclase", 0, [7]float64{1.73198, 1.73345, 1.73748, 1.73760, 1.74088, 1.74723, 1.75576}},
	{"bromellite", 0, [7]float64{1.71533, 1.71621, 1.71855, 1.71862, 1.72046, 1.72392, 0}},
	{"bromellite", 2, [7]float64{1.73017, 1.73122, 1.73402, 1.73411, 1.73632, 1.74048, 0}},
	{"glycerol", 0, [7]float64{1.46834, 1.46911, 1.47127, 1.47133, 1.47308, 1.47643, 1.48081}},
}

func TestFormulasAtSevenLines(t *testing.T) {
	const rounding = 0.5e-5 + 1e-9 // of the table's fifth decimal
	lines := [7]Wavelength{LineB, LineC, LineD, LineHeliumD, LineMercuryE, LineF, LineG}
	for _, row := range linesRows {
		m := mustFind(t, row.key)
		for i, want := range row.n {
			if want == 0 {
				continue
			}
			p, err := m.Indices(lines[i])
			if err != nil {
				t.Fatal(err)
			}
			if got := p[row.axis]; math.Abs(got-want) > rounding {
				t.Errorf("%s, axis %d at %v: got %.6f, want %.5f ± %g (computed from %s)",
					row.key, row.axis, lines[i], got, want, rounding, m.Rays[min(row.axis, len(m.Rays)-1)].Source)
			}
		}
	}
}
