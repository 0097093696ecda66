package trace

import (
	"math"
	"strings"
	"testing"

	"pavilight/gems"
)

const cie15 = "CIE 015:2018, as stored in the open library colour-science/colour at 9d743142, read"

func mustFindIlluminant(t *testing.T, name string) Illuminant {
	t.Helper()
	s, err := FindIlluminant(name)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// chromaticity returns x, y.
func chromaticity(xyz [3]float64) (x, y float64) {
	sum := xyz[0] + xyz[1] + xyz[2]
	return xyz[0] / sum, xyz[1] / sum
}

// stepped sums a spectrum over the rows of the table as the CIE does for tables of 5 nm.
func stepped(s *Illuminant) (xyz [3]float64) {
	for i := range tableSteps {
		w := tableLo + tableStep*gems.Wavelength(i)
		x, y, z := gems.Observer(w)
		xyz[0] += x * s.At(w)
		xyz[1] += y * s.At(w)
		xyz[2] += z * s.At(w)
	}
	return xyz
}

func TestIlluminantsHaveTheirPublishedChromaticity(t *testing.T) {
	// Half a unit of the last printed digit, and since the rows below 380 and above 780 nm
	// are missing and tables of 1 nm are taken at 5 nm, 2.5e-5 more.
	const five, four = 3e-5, 1.1e-4
	for _, row := range []struct {
		name            string
		x, y, tolerance float64
	}{
		{"A", 0.44758, 0.40745, five},
		{"C", 0.31006, 0.31616, five},
		{"D50", 0.34570, 0.35850, five},
		{"D55", 0.33243, 0.34744, five},
		{"D65", 0.31271, 0.32903, five},
		{"D75", 0.29903, 0.31488, five},
		{"FL2", 0.3721, 0.3751, four},
		{"FL7", 0.3129, 0.3292, four},
		{"FL11", 0.3805, 0.3769, four},
		{"LED-B1", 0.4560, 0.4078, four},
		{"LED-B2", 0.4357, 0.4012, four},
		{"LED-B3", 0.3756, 0.3723, four},
		{"LED-B4", 0.3422, 0.3502, four},
		{"LED-B5", 0.3118, 0.3236, four},
		{"LED-BH1", 0.4474, 0.4066, four},
		{"LED-RGB1", 0.4557, 0.4211, four},
		{"LED-V1", 0.4548, 0.4044, four},
		{"LED-V2", 0.3781, 0.3775, four},
	} {
		s := mustFindIlluminant(t, row.name)
		x, y := chromaticity(stepped(&s))
		near(t, row.name+" x", x, row.x, row.tolerance, cie15)
		near(t, row.name+" y", y, row.y, row.tolerance, cie15)

		// What is traced ends at 400 and 700 nm and runs straight between rows: that costs up to
		// 0.0006, in an incandescent lamp's x, and lamps with lines 0.0004.
		x, y = chromaticity(s.White())
		near(t, row.name+" x over 400 to 700 nm", x, row.x, 6e-4, cie15)
		near(t, row.name+" y over 400 to 700 nm", y, row.y, 6e-4, cie15)
		near(t, row.name+" luminance", s.White()[1], 1, 1e-12, "every illuminant is scaled so")
	}
}

func TestPlanckianColours(t *testing.T) {
	const source = "Robertson, J. Opt. Soc. Am. 58 (1968) 1528: CIE 1960 u, v by " +
		"reciprocal temperature, read in the same library"
	for _, row := range []struct{ megakelvin, u, v float64 }{
		{20, 0.18133, 0.26846}, {50, 0.18388, 0.27709}, {100, 0.19032, 0.29326}, {150, 0.19962, 0.30921},
		{200, 0.21142, 0.32312}, {300, 0.24010, 0.34308}, {400, 0.27218, 0.35407}, {500, 0.30505, 0.35907},
	} {
		s, err := Planck(1e6 / row.megakelvin)
		if err != nil {
			t.Fatal(err)
		}
		u, v, ok := UniformChromaticity(stepped(&s))
		if !ok {
			t.Fatal("no chromaticity")
		}
		// Five digits, and what lies below 380 nm: 0.03 % of the integral of z̄.
		near(t, s.Name+" u", u, row.u, 6e-5, source)
		near(t, s.Name+" v", v*2/3, row.v, 6e-5, source)
	}
	a, p := mustFindIlluminant(t, "A"), mustFindIlluminant(t, "planck-2856K")
	for w := tracedLo; w <= tracedHi; w += 50 {
		// c2/T is 1.435e7/2848 nm in A's own formula, 0.8 nm more than 1.4388e7/2856 nm: between
		// 400 and 560 nm that makes 6e-4.
		near(t, "A against a radiator of 2856 K", p.At(w)/a.At(w), 1, 7e-4,
			"CIE 015:2018: A is Planck's law of 2856 K")
	}
}

func TestDaylightLocus(t *testing.T) {
	const source = "tests of the open library colour-science/colour at 9d743142, read"
	for _, row := range []struct{ kelvin, x, y float64 }{
		{4000, 0.382343625, 0.383766261015578},
		{7000, 0.305357431486880, 0.321646345474552},
		{25000, 0.24985367, 0.254799464210944},
	} {
		x, y := daylightLocus(row.kelvin)
		near(t, "x", x, row.x, 1e-8, source)
		near(t, "y", y, row.y, 1e-8, source)
	}
	// The tables of the D series are those spectra, at temperatures that the new value of c2
	// raised, with the weights of the components rounded to three digits.
	for name, kelvin := range map[string]float64{"D50": 5000, "D55": 5500, "D65": 6500, "D75": 7500} {
		made, err := Daylight(kelvin * 1.4388 / 1.4380)
		if err != nil {
			t.Fatal(err)
		}
		table := mustFindIlluminant(t, name)
		for w := tableLo; w <= tableHi; w += tableStep {
			near(t, name+" at "+w.String(), made.At(w)/table.At(w), 1, 2e-3, cie15)
		}
	}
}

func TestIlluminantNames(t *testing.T) {
	for _, name := range IlluminantNames() {
		s := mustFindIlluminant(t, " "+strings.ToLower(name))
		if !strings.EqualFold(s.Name, name) || s.Source == "" {
			t.Errorf("%q: found %q with source %q", name, s.Name, s.Source)
		}
		for w := tableLo; w <= tableHi; w++ {
			if v := s.At(w); !(v >= 0) || math.IsInf(v, 0) {
				t.Errorf("%s has the power %v at %v", name, v, w)
			}
		}
		for _, w := range []gems.Wavelength{379.9, 780.1, gems.Wavelength(math.NaN())} {
			if s.At(w) != 0 {
				t.Errorf("%s has power at %v", name, w)
			}
		}
	}
	for name, says := range map[string]string{
		"D66":              "use one of E, A, D65",
		"":                 "use one of",
		"planck-":          "no temperature",
		"planck-5e9":       "outside 1000 to 50000 K",
		"planck-NaN":       "outside",
		"daylight-3900":    "outside 4000 to 25000 K",
		"daylight--6500":   "outside",
		"daylight-sixteen": "daylight-5000",
	} {
		if _, err := FindIlluminant(name); err == nil || !strings.Contains(err.Error(), says) {
			t.Errorf("%q: error %v does not say %q", name, err, says)
		}
	}
}
