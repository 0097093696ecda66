package gems

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"math"
	"regexp"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2"
)

// Limits on a file of materials.
const (
	largestFile   = 1 << 20 // bytes
	mostMaterials = 1000
)

// ReadMaterials reads a user's own materials from a TOML 1.0 text of at most 1 MiB. The
// file name is only for messages. Any error is a Faults, with every fault found.
//
//	materials = 1                     # version of the format
//
//	[[material]]
//	key = "melt-12"                   # lower case; a bundled key replaces the bundled row
//	name = "Laboratory glass, melt 12"
//	source = "own refractometer, 2 March"
//	index = 1.62                      # one; [ordinary, extraordinary]; or [alpha, beta, gamma]
//	dispersion = 0.017                # n_G − n_B; without it the index is constant
//	density = 2.9                     # g/cm³
//	hardness = [5, 5.5]
//	cautions = ["holds lead"]
//
// In place of index and dispersion up to three [[material.ray]] give formulas: formula
// (constant, cauchy, sellmeier, resonance, pole, laurent or points), coefficients in the
// order that Kind says, range_nm, and as they apply temperature and vacuum = true. A
// [material.colour] gives the body colour: ordinary and extraordinary as "#rrggbb" seen
// through thickness_mm, or wavelength_nm with ordinary_per_mm and extraordinary_per_mm;
// with three indices alpha, beta and gamma, alpha_per_mm and so on, or ordinary for all.
// Other keys: names, cleavage, toughness, notes.
func ReadMaterials(r io.Reader, file string) ([]*Material, error) {
	data, err := io.ReadAll(io.LimitReader(r, largestFile+1))
	if err != nil {
		return nil, Faults{{File: file, Why: err.Error(), Remedy: "check that it can be read"}}
	}
	if len(data) > largestFile {
		return nil, Faults{{File: file, Why: "is larger than 1 MiB", Remedy: "give a file of materials"}}
	}
	data = bytes.TrimPrefix(data, []byte("\ufeff"))
	if f := crowded(data); f != nil {
		f.File = file
		return nil, Faults{f}
	}
	var root map[string]any
	if err := toml.Unmarshal(data, &root); err != nil {
		return nil, Faults{notTOML(err, file)}
	}
	d := &document{file: file, lines: lineNumbers(data)}
	ms := d.materials(root)
	if err := d.faults.err(); err != nil {
		if d.more > 0 {
			return nil, append(d.faults, &Fault{File: file, Why: fmt.Sprintf("and %d more faults", d.more),
				Remedy: "mend these first"})
		}
		return nil, err
	}
	return ms, nil
}

// notTOML tells where a text stops being TOML.
func notTOML(err error, file string) *Fault {
	const most = 200 // letters; the decoder may quote a whole line
	why := "this is not TOML: " + shorten(strings.TrimPrefix(err.Error(), "toml: "), most)
	f := &Fault{File: file, Why: why, Remedy: "correct this line"}
	var de *toml.DecodeError
	if errors.As(err, &de) {
		f.Line, _ = de.Position()
	}
	return f
}

// materials reads the whole document; what it returns counts only without faults.
func (d *document) materials(root map[string]any) []*Material {
	top := d.open(root, "", "")
	if _, ok := top.number("materials", 1, 1, "1, the version of the format"); !ok && !top.faulty("materials") {
		top.missing("materials", "write materials = 1, the version of the format, at the top")
	}
	tables := top.tables("material")
	top.close()
	if len(tables) > mostMaterials {
		d.fault("material", "", "material", "", fmt.Sprintf("%d of them", len(tables)),
			fmt.Sprintf("keep at most %d in one file", mostMaterials))
		return nil
	}
	var ms []*Material
	for _, t := range tables {
		m := t.material()
		if slices.ContainsFunc(ms, func(old *Material) bool { return m.Key != "" && old.Key == m.Key }) {
			t.fault("key", m.Key, "is used twice in this file", "give each material its own key")
		}
		ms = append(ms, m)
	}
	return ms
}

var keyForm = regexp.MustCompile(`^[a-z0-9]+(-[a-z0-9]+)*$`)

// material reads one [[material]].
func (t *table) material() *Material {
	key, ok := t.text("key")
	t.name = key
	switch {
	case !ok:
		t.missing("key", `name it in lower case, such as key = "melt-12"`)
	case !keyForm.MatchString(key):
		t.fault("key", key, "is not a key", "use lower-case letters and digits, joined by single hyphens")
	}
	m := &Material{Key: key, Group: Plainly}
	if m.Name, ok = t.text("name"); !ok {
		m.Name = key
	}
	m.Names = t.texts("names")
	source, ok := t.text("source")
	if !ok || strings.TrimSpace(source) == "" {
		t.missing("source", `say where the numbers come from, if only source = "own measurement"`)
	}
	from := Source(source + "; " + string(Given))
	m.Rays = t.rays(from)
	if density, ok := t.number("density", 0, greatestMass, "0 (not known) to 25 g/cm³"); ok {
		m.Density, m.DensitySource = density, from
		m.DensityRange = Span{density, density}
	}
	if h := t.numbers("hardness", 0, 10, "one or two numbers from 0 to 10 on Mohs's scale"); len(h) > 0 {
		m.Hardness, m.WearSource = Span{slices.Min(h), slices.Max(h)}, from
		if len(h) > 2 {
			t.fault("hardness", fmt.Sprint(h), "more than two numbers", "give one, or the least and the greatest")
		}
	}
	m.Cleavage, _ = t.text("cleavage")
	if m.Cleavage != "" {
		m.WearSource = from
	}
	if m.Toughness, ok = t.text("toughness"); ok {
		m.ToughnessSource = from
	}
	if m.Cautions = t.texts("cautions"); len(m.Cautions) > 0 {
		m.CautionSource = from
	}
	m.Notes, _ = t.text("notes")
	m.Absorption = t.colour(from, len(m.Rays) == 3)
	t.close()
	return m
}

// rays reads index and dispersion, or the formulas in their place.
func (t *table) rays(from Source) []Dispersion {
	written := t.tables("ray")
	indices := t.numbers("index", leastIndex, greatestIndex, "one to three numbers from 1 (air) to 5")
	spread, hasSpread := t.number("dispersion", 0, 1, "the difference of the indices at G and B, 0 to 1")
	switch {
	case len(written) > 0 && (len(indices) > 0 || hasSpread):
		t.fault("ray", "", "stands beside index or dispersion", "keep the one or the other")
	case len(written) > 3 || len(indices) > 3:
		t.fault("index", "", "has more than three rays",
			"give one, two (ordinary, extraordinary) or three (alpha, beta, gamma)")
	case len(written) == 0 && len(indices) == 0:
		if !t.faulty("index") && !t.faulty("ray") {
			t.missing("index", "write index = 1.62, or [[material.ray]] with a formula")
		}
	case len(indices) == 3 && !slices.IsSorted(indices):
		t.fault("index", fmt.Sprint(indices), "is not in ascending order",
			"write alpha, beta, gamma, the least first")
	}
	var rays []Dispersion
	for _, n := range indices {
		if !hasSpread {
			rays = append(rays, Dispersion{Kind: Constant, Coefficients: []float64{n},
				Lo: visibleLo, Hi: visibleHi, Fitted: true, Source: from})
			continue
		}
		fit := fitted(n, spread, from, from)
		if least := fit.at(visibleHi); least < leastIndex {
			t.fault("dispersion", fmt.Sprint(spread), fmt.Sprintf("gives the index %.3g at %v", least, visibleHi),
				"check it: it is the index at G less that at B, mostly under 0.3")
		}
		rays = append(rays, fit)
	}
	for _, r := range written {
		rays = append(rays, r.ray(from))
	}
	if len(written) > 0 && !slices.ContainsFunc(written, (*table).anyFault) {
		t.together(rays)
	}
	return rays
}

// together checks what only all the rays show: a range that they share, and their order.
func (t *table) together(rays []Dispersion) {
	m := Material{Rays: rays}
	lo, hi := m.Range()
	p, err := m.Indices(min(max(LineD, lo), hi))
	switch {
	case lo > hi || err != nil:
		t.fault("ray", "", "have ranges that do not meet", "give formulas for the same wavelengths")
	case lo >= visibleHi || hi <= visibleLo:
		t.fault("ray", "", "say nothing about light that is seen", "give formulas for some of 400 to 700 nm")
	case len(rays) == 3 && !slices.IsSorted(p[:]):
		t.fault("ray", "", "are not in ascending order", "write alpha, beta, gamma, the least first")
	}
}

// ray reads one [[material.ray]].
func (t *table) ray(from Source) Dispersion {
	d := Dispersion{Source: from}
	formula, ok := t.text("formula")
	kinds := map[string]Kind{"constant": Constant, "cauchy": Cauchy, "sellmeier": Sellmeier,
		"resonance": Resonance, "pole": Pole, "laurent": Laurent, "points": Points}
	kind, known := kinds[formula]
	switch {
	case !ok:
		t.missing("formula", "name its form, such as sellmeier")
	case !known:
		t.fault("formula", formula, "is not a form known here",
			"use constant, cauchy, sellmeier, resonance, pole, laurent or points")
	}
	d.Kind = kind
	d.Coefficients = t.numbers("coefficients", -1e6, 1e6, "numbers in the formula's order")
	if len(d.Coefficients) == 0 && !t.faulty("coefficients") {
		t.missing("coefficients", "list them in the formula's order")
	}
	d.Temperature, _ = t.text("temperature")
	d.Vacuum = t.flag("vacuum")
	limits := t.numbers("range_nm", 100, 100000, "the least and the greatest wavelength in nm")
	switch {
	case len(limits) == 0:
		if !t.faulty("range_nm") {
			t.missing("range_nm", "give the wavelengths for which the formula was published, such as [400, 700]")
		}
	case len(limits) != 2 || limits[0] >= limits[1]:
		t.fault("range_nm", fmt.Sprint(limits), "is not a range", "give two wavelengths in nm, the shorter first")
	default:
		d.Lo, d.Hi = Wavelength(limits[0]), Wavelength(limits[1])
	}
	t.close()
	if !t.anyFault() {
		t.probe(&d)
	}
	return d
}

// probe tries a formula over its range: a slip in a coefficient mostly shows there.
func (t *table) probe(d *Dispersion) {
	if why := d.misshapen(); why != "" {
		t.fault("coefficients", "", why, "see the order and number that the formula asks for")
		return
	}
	const steps = 64
	before := math.Inf(1)
	for i := range steps + 1 {
		w := d.Lo + (d.Hi-d.Lo)*Wavelength(i)/steps
		n := d.at(w)
		if !(n >= leastIndex && n <= greatestIndex) {
			t.fault("coefficients", "", fmt.Sprintf("give an index of %.4g at %v", n, w),
				"check them and their unit (formulas take µm); an index lies between 1 and 5")
			return
		}
		if w >= visibleLo && w <= visibleHi {
			if n > before {
				t.fault("coefficients", "", fmt.Sprintf("make the index rise with the wavelength at %v", w),
					"check them: in a clear material it falls from violet to red")
				return
			}
			before = n
		}
	}
}

// misshapen says what is wrong with the number or order of the coefficients, "" if
// nothing is.
func (d *Dispersion) misshapen() string {
	n := len(d.Coefficients)
	switch d.Kind {
	case Constant:
		if n != 1 {
			return "a constant has one"
		}
	case Sellmeier, Laurent:
		if n%2 != 0 {
			return "come in pairs"
		}
	case Resonance, Pole:
		if n < 4 || n%2 != 0 {
			return "are a, d and pairs b, c"
		}
	case Points:
		if n < 4 || n%2 != 0 {
			return "are two or more pairs of wavelength in nm and index"
		}
		for i := 2; i < n; i += 2 {
			if d.Coefficients[i] <= d.Coefficients[i-2] {
				return "have wavelengths that do not ascend"
			}
		}
		if d.Lo < Wavelength(d.Coefficients[0]) || d.Hi > Wavelength(d.Coefficients[n-2]) {
			return "do not reach over range_nm"
		}
	}
	return ""
}

// colour reads [material.colour]; nil where there is none. three says that the material has
// three indices.
func (t *table) colour(from Source, three bool) *Absorption {
	c := t.table("colour")
	if c == nil {
		return nil
	}
	defer c.close()
	rays := []string{"ordinary", "extraordinary"}
	switch {
	case c.has("alpha") || c.has("alpha_per_mm"):
		rays = []string{"alpha", "beta", "gamma"}
		if !three {
			c.fault("alpha", "", "is for a material of three indices", "write ordinary and extraordinary")
		}
	case three && (c.has("extraordinary") || c.has("extraordinary_per_mm")):
		c.fault("extraordinary", "", "is not a ray of a material of three indices",
			"write alpha, beta and gamma, or ordinary alone for all three")
	}
	var a *Absorption
	var curves [][]float64
	if c.has("wavelength_nm") {
		a, curves = c.curves(rays)
	} else {
		a, curves = c.seenColours(rays)
	}
	if c.anyFault() {
		return nil
	}
	a.Source = from
	a.Ordinary, a.Extraordinary = curves[0], curves[len(curves)-1]
	if len(curves) == 3 {
		a.Beta = curves[1]
	}
	return a
}

// curves reads curves of absorption for rays; the second of two may be left out.
func (c *table) curves(rays []string) (a *Absorption, curves [][]float64) {
	a = &Absorption{Name: "curve of the user's own"}
	for _, w := range c.numbers("wavelength_nm", 100, 100000, "wavelengths in nm") {
		a.Wavelengths = append(a.Wavelengths, Wavelength(w))
	}
	const most = 1e4 // per mm: beyond any use of a transparent stone
	for _, ray := range rays {
		curves = append(curves, c.numbers(ray+"_per_mm", 0, most, "absorption per mm, 0 or more"))
	}
	if c.anyFault() {
		return a, curves
	}
	distinct := slices.Compact(slices.Clone(a.Wavelengths))
	if len(distinct) < 2 || len(distinct) < len(a.Wavelengths) || !slices.IsSorted(a.Wavelengths) {
		c.fault("wavelength_nm", "", "is not a list of two or more wavelengths in ascending order", "sort it")
	}
	for i, ray := range rays {
		if n := len(curves[i]); n != len(a.Wavelengths) && (n > 0 || len(rays) == 3 || i == 0) {
			c.fault(ray+"_per_mm", "", "has not one number for each wavelength", "give all lists the same length")
		}
	}
	return a, curves
}

// seenColours reads colours of rays that were seen through a thickness; the second of two
// may be left out.
func (c *table) seenColours(rays []string) (a *Absorption, curves [][]float64) {
	var colours []Colour
	for i, ray := range rays {
		written, ok := c.text(ray)
		if !ok && i == 1 && len(rays) == 2 && !c.faulty(ray) {
			colours = append(colours, colours[0])
			continue
		}
		colour, err := ParseColour(written)
		switch {
		case !ok && !c.faulty(ray):
			c.missing(ray, fmt.Sprintf(`write the colour seen, such as %s = "#2a7f5e", or a curve with wavelength_nm`, ray))
		case ok && err != nil:
			c.fault(ray, written, "is not a colour", "write it as #rrggbb, such as #2a7f5e")
		}
		colours = append(colours, colour)
	}
	const least, most = 1e-3, 1e4
	thickness, has := c.number("thickness_mm", least, most, "the millimetres through which the colour was seen")
	if !has && !c.faulty("thickness_mm") {
		c.missing("thickness_mm", "give the millimetres through which the colour was seen")
	}
	if c.anyFault() {
		return nil, nil
	}
	body, err := ColouredBody(colours[0], colours[1], thickness)
	if len(rays) == 3 {
		body, err = ThreeColouredBody(colours[0], colours[1], colours[2], thickness)
	}
	if err != nil {
		c.fault("colour", "", err.Error(), "")
		return nil, nil
	}
	if len(rays) == 3 {
		return body, [][]float64{body.Ordinary, body.Beta, body.Extraordinary}
	}
	return body, [][]float64{body.Ordinary, body.Extraordinary}
}
