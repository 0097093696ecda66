package trace

import (
	"fmt"
	"math"
	"strconv"
	"strings"

	"pavilight/gems"
)

// Tables of light and of the observer run from 380 to 780 nm in steps of 5 nm; what
// is traced lies from 400 to 700 nm.
const (
	tableLo    gems.Wavelength = 380
	tableHi    gems.Wavelength = 780
	tableStep                  = 5 // nm
	tableSteps                 = int((tableHi-tableLo)/tableStep) + 1
	tracedLo   gems.Wavelength = 400
	tracedHi   gems.Wavelength = 700
	tracedFrom                 = int((tracedLo - tableLo) / tableStep) // the table's row at 400 nm
	tracedTo                   = int((tracedHi - tableLo) / tableStep) // and at 700 nm
)

// Illuminant is the relative spectrum of a light, straight between steps of 5 nm. It
// is scaled so that its mean over 400 to 700 nm weighted by V(λ) is 1, as that
// of equal energy is; its luminance is therefore that of equal energy. The zero value
// is equal energy, illuminant E.
type Illuminant struct {
	Name   string // as FindIlluminant knows it
	Source string // standard or formula, and how it was read
	power  []float64
}

// At returns the spectrum at w, 0 outside 380 to 780 nm.
func (s *Illuminant) At(w gems.Wavelength) float64 {
	x := float64(w-tableLo) / tableStep
	if !(x >= 0 && x <= float64(tableSteps-1)) { // the negation catches NaN too
		return 0
	}
	if s.power == nil {
		return 1
	}
	i := min(int(x), tableSteps-2)
	return s.power[i] + (x-float64(i))*(s.power[i+1]-s.power[i])
}

// White returns the tristimulus values, CIE 1931 and over 400 to 700 nm, of a perfect
// white diffuser under the illuminant; Y is 1.
func (s *Illuminant) White() [3]float64 { return tristimulus(tracedFrom, tracedTo, s.At) }

// tristimulus integrates a spectrum between two rows of the table, in units in which
// equal energy over the traced range has Y = 1. Simpson's rule is exact for products of
// up to three functions that run straight between rows, so the mean of sampled
// wavelengths tends to the same values.
func tristimulus(from, to int, spectrum func(gems.Wavelength) float64) (xyz [3]float64) {
	for i := from; i < to; i++ {
		lo := tableLo + tableStep*gems.Wavelength(i)
		for k, w := range [...]gems.Wavelength{lo, lo + tableStep/2.0, lo + tableStep} {
			weight := [...]float64{1, 4, 1}[k] / 6 * tableStep * spectrum(w) / luminousIntegral
			x, y, z := gems.Observer(w)
			xyz[0] += weight * x
			xyz[1] += weight * y
			xyz[2] += weight * z
		}
	}
	return xyz
}

// scaled returns the illuminant of the given spectrum, one value a row of the table.
func scaled(name, source string, at func(i int, w gems.Wavelength) float64) Illuminant {
	s := Illuminant{Name: name, Source: source, power: make([]float64, tableSteps)}
	for i := range s.power {
		s.power[i] = at(i, tableLo+tableStep*gems.Wavelength(i))
	}
	k := 1 / s.White()[1]
	for i := range s.power {
		s.power[i] *= k
	}
	return s
}

// The temperatures of full radiators and of daylight that may be asked for, in K.
const (
	leastPlanck, mostPlanck     = 1000, 50000
	leastDaylight, mostDaylight = 4000, 25000 // the range of the CIE's formula
)

// tabulated lists the illuminants that stand in tables, in the order of the standard.
var tabulated = [...]struct {
	name  string
	power *[tableSteps]float64
	about string
}{
	{"C", &spectrumC, "average daylight, obsolete"},
	{"D50", &spectrumD50, "daylight at the horizon, 5000 K"},
	{"D55", &spectrumD55, "daylight at mid-morning, 5500 K"},
	{"D75", &spectrumD75, "daylight of a north sky, 7500 K"},
	{"FL2", &spectrumFL2, "standard fluorescent lamp, 4200 K"},
	{"FL7", &spectrumFL7, "broad-band fluorescent lamp, 6500 K"},
	{"FL11", &spectrumFL11, "narrow-band fluorescent lamp, 4000 K"},
	{"LED-B1", &spectrumLEDB1, "blue-pumped phosphor LED, 2700 K"},
	{"LED-B2", &spectrumLEDB2, "blue-pumped phosphor LED, 3000 K"},
	{"LED-B3", &spectrumLEDB3, "blue-pumped phosphor LED, 4100 K"},
	{"LED-B4", &spectrumLEDB4, "blue-pumped phosphor LED, 5100 K"},
	{"LED-B5", &spectrumLEDB5, "blue-pumped phosphor LED, 6600 K"},
	{"LED-BH1", &spectrumLEDBH1, "phosphor LED with a red LED, 2900 K"},
	{"LED-RGB1", &spectrumLEDRGB1, "red, green and blue LEDs, 2800 K"},
	{"LED-V1", &spectrumLEDV1, "violet-pumped phosphor LED, 2700 K"},
	{"LED-V2", &spectrumLEDV2, "violet-pumped phosphor LED, 4100 K"},
}

// IlluminantNames returns the names that FindIlluminant knows, the two that take a
// temperature last.
func IlluminantNames() []string {
	names := []string{"E", "A", "D65"}
	for _, t := range tabulated {
		names = append(names, t.name)
	}
	return append(names, "planck-2700", "daylight-5000")
}

// FindIlluminant returns the illuminant of that name, in capitals or not: E (equal
// energy), a CIE illuminant, or planck- or daylight- followed by a temperature in
// kelvin, for instance planck-2700 and daylight-5000. An unknown name is an error
// that lists the known ones.
func FindIlluminant(name string) (Illuminant, error) {
	wanted := strings.ToUpper(strings.TrimSpace(name))
	switch wanted {
	case "E":
		return Illuminant{Name: "E", Source: "CIE 015:2018: the same power at every wavelength"}, nil
	case "A":
		return illuminantA(), nil
	case "D65":
		return scaled("D65", "CIE 015:2018, daylight, 6500 K", func(_ int, w gems.Wavelength) float64 {
			return gems.DaylightD65(w)
		}), nil
	}
	for _, t := range tabulated {
		if wanted == t.name {
			row := func(i int, _ gems.Wavelength) float64 { return t.power[i] }
			return scaled(t.name, "CIE 015:2018, "+t.about, row), nil
		}
	}
	if kind, kelvin, ok := strings.Cut(wanted, "-"); ok && (kind == "PLANCK" || kind == "DAYLIGHT") {
		temperature, err := strconv.ParseFloat(strings.TrimSuffix(kelvin, "K"), 64)
		if err != nil {
			return Illuminant{}, fmt.Errorf("illuminant %q: %q is no temperature; "+
				"write kelvins, for instance %s-5000", name, kelvin, strings.ToLower(kind))
		}
		if kind == "PLANCK" {
			return Planck(temperature)
		}
		return Daylight(temperature)
	}
	return Illuminant{}, fmt.Errorf("illuminant %q is not known; use one of %s "+
		"(the last two with any temperature in kelvin)", name, strings.Join(IlluminantNames(), ", "))
}

// illuminantA is an incandescent lamp, by the standard's own formula and constants.
func illuminantA() Illuminant {
	formula := func(_ int, w gems.Wavelength) float64 {
		const c = 1.435e7 / 2848 // nm
		l := float64(w)
		return 100 * math.Pow(560/l, 5) * math.Expm1(c/560) / math.Expm1(c/l)
	}
	return scaled("A", "CIE 015:2018, incandescent lamp, by its formula", formula)
}

// Planck returns a full radiator of the given temperature, 1000 to 50000 K.
func Planck(kelvin float64) (Illuminant, error) {
	if !(kelvin >= leastPlanck && kelvin <= mostPlanck) {
		return Illuminant{}, fmt.Errorf("full radiator of %g K is outside %d to %d K",
			kelvin, leastPlanck, mostPlanck)
	}
	name := "planck-" + strconv.FormatFloat(kelvin, 'g', -1, 64)
	law := func(_ int, w gems.Wavelength) float64 {
		l := float64(w)
		return math.Pow(560/l, 5) / math.Expm1(1.4388e7/(l*kelvin))
	}
	return scaled(name, "Planck's law, c2 = 1.4388e-2 m K (CIE 015:2018)", law), nil
}

// Daylight returns a phase of daylight of the given correlated colour temperature,
// 4000 to 25000 K on the present scale, on which D65 is 6504 K.
func Daylight(kelvin float64) (Illuminant, error) {
	if !(kelvin >= leastDaylight && kelvin <= mostDaylight) {
		return Illuminant{}, fmt.Errorf("daylight of %g K is outside %d to %d K",
			kelvin, leastDaylight, mostDaylight)
	}
	x, y := daylightLocus(kelvin)
	m := 0.0241 + 0.2562*x - 0.7341*y
	m1 := (-1.3515 - 1.7703*x + 5.9114*y) / m
	m2 := (0.0300 - 31.4424*x + 30.0717*y) / m
	name := "daylight-" + strconv.FormatFloat(kelvin, 'g', -1, 64)
	phase := func(i int, _ gems.Wavelength) float64 {
		return max(0, daylightMean[i]+m1*daylightYellowBlue[i]+m2*daylightPinkGreen[i])
	}
	return scaled(name, "CIE 015:2018, daylight of a colour temperature", phase), nil
}

// daylightLocus returns the chromaticity x, y of daylight, CIE 015:2018.
func daylightLocus(kelvin float64) (x, y float64) {
	u := 1000 / kelvin
	if kelvin <= 7000 {
		x = 0.244063 + (0.09911+(2.9678-4.6070*u)*u)*u
	} else {
		x = 0.237040 + (0.24748+(1.9018-2.0064*u)*u)*u
	}
	return x, -3*x*x + 2.870*x - 0.275
}
