package gems

import (
	"fmt"
	"strconv"
	"strings"
)

// Description is one material as tables, screens and JSON show it, all numbers with
// their sources. Indices are at the sodium D line, relative to air.
type Description struct {
	Key       string           `json:"key"`
	Name      string           `json:"name"`
	Names     []string         `json:"names"`
	Group     string           `json:"group"`
	Character string           `json:"character"`
	Rays      []RayDescription `json:"rays"`

	// Index and Birefringence are nil where the D line lies outside the range.
	Index         *float64   `json:"index"` // ordinary or mean
	Birefringence *float64   `json:"birefringence"`
	OpticAngle    *float64   `json:"optic_angle_deg"` // 2V, the acute angle between the axes of a biaxial material; else nil
	Range         [2]float64 `json:"range_nm"`
	Fitted        bool       `json:"fitted"` // over some of 400 to 700 nm

	Density      *float64    `json:"density"` // g/cm³
	DensityRange *[2]float64 `json:"density_range"`
	Hardness     *[2]float64 `json:"hardness"` // Mohs
	Cleavage     string      `json:"cleavage"`
	Toughness    string      `json:"toughness"`
	Cautions     []string    `json:"cautions"`
	BodyColour   string      `json:"body_colour"`
	Notes        string      `json:"notes"`

	DensitySource   Source `json:"density_source"`
	WearSource      Source `json:"hardness_and_cleavage_source"`
	ToughnessSource Source `json:"toughness_source"`
	CautionSource   Source `json:"caution_source"`
	ColourSource    Source `json:"body_colour_source"`
}

// RayDescription is one principal ray.
type RayDescription struct {
	Ray          string     `json:"ray"` // "" for an isotropic material
	Index        *float64   `json:"index"`
	Dispersion   *float64   `json:"dispersion"` // n_G − n_B; nil outside the range, or where none was found
	Abbe         *float64   `json:"abbe"`       // (n_d − 1)/(n_F − n_C), likewise
	Formula      string     `json:"formula"`
	Coefficients []float64  `json:"coefficients"`
	Range        [2]float64 `json:"range_nm"` // published
	Temperature  string     `json:"temperature"`
	Fitted       bool       `json:"fitted"`
	How          string     `json:"how"` // published, fitted, or published and where fitted
	Source       Source     `json:"source"`
	SpreadSource Source     `json:"dispersion_source"`
}

// AsIfColourless stands where no body colour is known.
const AsIfColourless = "as if colourless"

// Describe returns the material as tables show it.
func (m *Material) Describe() Description {
	lo, hi := m.Range()
	d := Description{
		Key: m.Key, Name: m.Name, Names: append([]string{}, m.Names...),
		Group: m.Group.String(), Character: m.Character().String(),
		Range: [2]float64{float64(lo), float64(hi)}, Fitted: m.Fitted(),
		Density: positive(m.Density), DensityRange: m.DensityRange.pair(), Hardness: m.Hardness.pair(),
		Cleavage: m.Cleavage, Toughness: m.Toughness, Cautions: append([]string{}, m.Cautions...),
		BodyColour: AsIfColourless, Notes: m.Notes,
		DensitySource: m.DensitySource, WearSource: m.WearSource,
		ToughnessSource: m.ToughnessSource, CautionSource: m.CautionSource,
	}
	if n, err := m.Index(LineD); err == nil {
		p, _ := m.Indices(LineD)
		birefringence := p.Birefringence()
		d.Index, d.Birefringence = &n, &birefringence
		if m.Character().Biaxial() {
			angle := p.OpticAngle()
			angle = min(angle, 180-angle)
			d.OpticAngle = &angle
		}
	}
	if m.Absorption != nil {
		d.BodyColour, d.ColourSource = m.Absorption.Name, m.Absorption.Source
	}
	for i := range m.Rays {
		r := m.Rays[i].describe()
		switch len(m.Rays) {
		case 2:
			r.Ray = [...]string{"ordinary", "extraordinary"}[i]
		case 3:
			r.Ray = [...]string{"alpha", "beta", "gamma"}[i]
		}
		d.Rays = append(d.Rays, r)
	}
	return d
}

// describe returns all of a ray but its name.
func (d *Dispersion) describe() RayDescription {
	lo, hi := d.usable()
	at := func(w Wavelength) *float64 {
		if w < lo || w > hi {
			return nil
		}
		n := d.at(w)
		return &n
	}
	r := RayDescription{
		Index: at(LineD), Formula: d.Kind.String(), Coefficients: append([]float64{}, d.Coefficients...),
		Range: [2]float64{float64(d.Lo), float64(d.Hi)}, Temperature: d.Temperature, Fitted: d.Fitted, How: d.how(),
		Source: d.Source, SpreadSource: d.SpreadSource,
	}
	if d.Kind == Constant {
		return r
	}
	if b, g := at(LineB), at(LineG); b != nil && g != nil {
		spread := *g - *b
		r.Dispersion = &spread
	}
	if c, y, f := at(LineC), at(LineHeliumD), at(LineF); c != nil && y != nil && f != nil && *f > *c {
		abbe := (*y - 1) / (*f - *c)
		r.Abbe = &abbe
	}
	return r
}

// how says in words where the index is published and where it is fitted.
func (d *Dispersion) how() string {
	switch {
	case d.Fitted && d.Kind == Constant:
		return fmt.Sprintf("one value, taken as constant over %g to %g nm", float64(d.Lo), float64(d.Hi))
	case d.Fitted:
		return fmt.Sprintf("fitted over %g to %g nm", float64(d.Lo), float64(d.Hi))
	}
	words := fmt.Sprintf("published for %g to %g nm", float64(d.Lo), float64(d.Hi))
	if d.Continued && d.Lo > visibleLo {
		words += fmt.Sprintf(", fitted from there to %g nm", float64(visibleLo))
	}
	if d.Continued && d.Hi < visibleHi {
		words += fmt.Sprintf(", fitted on to %g nm", float64(visibleHi))
	}
	return words
}

func (s Span) pair() *[2]float64 {
	if s == (Span{}) {
		return nil
	}
	return &[2]float64{s.Lo, s.Hi}
}

// String returns "7" or "7 to 7.5"; "" for an unknown span.
func (s Span) String() string {
	switch {
	case s == (Span{}):
		return ""
	case s.Lo == s.Hi:
		return short(s.Lo)
	}
	return short(s.Lo) + " to " + short(s.Hi)
}

func short(v float64) string { return strconv.FormatFloat(v, 'f', -1, 64) }

func positive(v float64) *float64 {
	if v <= 0 {
		return nil
	}
	return &v
}

// Heading names the columns of Row.
func Heading() []string {
	return []string{
		"key", "name", "index at D", "dispersion B to G", "character", "density g/cm³", "hardness", "index known",
	}
}

// Row returns the material as one row of the short table, under Heading.
func (m *Material) Row() []string {
	d := m.Describe()
	var indices []string
	for _, r := range d.Rays {
		indices = append(indices, decimals(r.Index, 3))
	}
	density := "-"
	if d.Density != nil {
		density = short(*d.Density)
	}
	known := fmt.Sprintf("%g to %g nm", d.Range[0], d.Range[1])
	if m.Rays[0].Fitted {
		known += ", fitted"
	} else if d.Fitted {
		known += ", fitted in part"
	}
	return []string{d.Key, d.Name, strings.Join(indices, " "), decimals(d.Rays[0].Dispersion, 3), d.Character,
		density, m.Hardness.String(), known}
}

// decimals writes a number with n decimals, an unknown one as a dash.
func decimals(v *float64, n int) string {
	if v == nil {
		return "-"
	}
	return strconv.FormatFloat(*v, 'f', n, 64)
}

// Entry is one line of a material's page: what, the value, and where it comes from.
type Entry struct {
	Label, Value string
	Source       Source // empty where the value needs none
}

// Entries returns the material's page, for `pavilight gems NAME` and for the window.
func (d Description) Entries() []Entry {
	es := []Entry{
		{"name", strings.Join(append([]string{d.Name}, d.Names...), ", "), ""},
		{"group", d.Group, ""},
		{"optic character", d.Character, ""},
	}
	for _, r := range d.Rays {
		es = append(es, r.entries()...)
	}
	if d.Birefringence != nil && *d.Birefringence > 0 {
		es = append(es, Entry{"birefringence", decimals(d.Birefringence, 4), ""})
	}
	if d.OpticAngle != nil {
		es = append(es, Entry{"optic angle 2V", decimals(d.OpticAngle, 0) + "° between the optic axes, by the three indices",
			"Born and Wolf, Principles of Optics, section 15.3; computed"})
	}
	if d.Density != nil {
		value := short(*d.Density) + " g/cm³"
		if s := d.DensityRange; s != nil && s[0] < s[1] {
			value += fmt.Sprintf(" (%s to %s)", short(s[0]), short(s[1]))
		}
		es = append(es, Entry{"density", value, d.DensitySource})
	}
	if d.Hardness != nil {
		hardness := Span{d.Hardness[0], d.Hardness[1]}
		es = append(es, Entry{"hardness", hardness.String() + " on Mohs's scale", d.WearSource})
	}
	if d.Cleavage != "" {
		es = append(es, Entry{"cleavage", d.Cleavage, d.WearSource})
	}
	if d.Toughness != "" {
		es = append(es, Entry{"toughness", d.Toughness, d.ToughnessSource})
	}
	es = append(es, Entry{"body colour", d.BodyColour, d.ColourSource})
	for _, c := range d.Cautions {
		es = append(es, Entry{"caution", c, d.CautionSource})
	}
	if d.Notes != "" {
		es = append(es, Entry{"note", d.Notes, ""})
	}
	return es
}

// entries returns index, formula and dispersion of one ray.
func (r RayDescription) entries() []Entry {
	of := strings.TrimSpace(r.Ray + " index")
	value := decimals(r.Index, 5) + " at the sodium D line, " + r.How
	if r.Temperature == "room" {
		value += ", room temperature"
	} else if r.Temperature != "" {
		value += ", " + r.Temperature
	}
	coefficients := make([]string, len(r.Coefficients))
	for i, c := range r.Coefficients {
		coefficients[i] = strconv.FormatFloat(c, 'g', 10, 64)
	}
	formula := Entry{"formula", r.Formula + " with " + strings.Join(coefficients, ", "), r.Source}
	if r.Fitted && r.Dispersion != nil {
		formula.Source = "fitted to the index and its dispersion; computed"
	}
	es := []Entry{{of, value, r.Source}, formula}
	if r.Dispersion != nil {
		source := r.SpreadSource
		if source == "" {
			source = r.Source
		}
		es = append(es, Entry{"dispersion", fmt.Sprintf("%s from B to G, Abbe number %s",
			decimals(r.Dispersion, 4), decimals(r.Abbe, 1)), source})
	}
	return es
}
