package facets

import (
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
)

// Spread is a measured value that differs round the stone: its least, mean and
// greatest, equal where only one was given.
type Spread struct{ Min, Mean, Max float64 }

// varies reports whether the value is not the same all round.
func (s Spread) varies() bool { return s.Min != s.Max }

// Proportions is a stone as an appraiser measures it: an outline and named
// values, angles in degrees from the girdle plane and lengths in percent.
type Proportions struct {
	Outline string            // one of Outlines
	Values  map[string]Spread // by name, see ProportionsOf; a name left out takes its usual value
}

// Proportion is one value that an outline is measured by.
type Proportion struct {
	Name      string
	Low, High float64 // range that is taken
	Usual     float64 // taken where it was not measured
	Unit      string  // "%", "degrees", or empty for a number
	Varies    bool    // may be given as min..mean..max
	Meaning   string  // trade's definition, in one phrase
}

// Outlines returns the outlines that proportions are known for, in the order
// in which they are shown.
func Outlines() []string {
	return []string{"round", "oval", "pear", "marquise", "cushion", "step", "square", "triangle"}
}

// The values, with ranges wider than any stone worth cutting. The definitions
// are common practice among laboratories; the usual values are middle ones of
// the trade, no source.
const (
	meaningTable    = "width of the table as a share of the width"
	meaningCrown    = "angle of the crown mains, at the sides of a long stone"
	meaningPavilion = "angle of the pavilion mains, at the sides of a long stone"
	meaningStar     = "reach of the stars from the table's edge toward the girdle, seen from above"
	meaningLower    = "reach of the lower halves from the girdle toward the culet, seen from below"
	meaningGirdle   = "girdle at its thick places, as a share of the width"
	meaningCulet    = "width of the culet as a share of the width; 0 for a point"
	meaningRatio    = "length over width"
	meaningBow      = "turn of a side's outline from its middle to its end; 0 for straight sides"
	meaningKeel     = "length of the keel at the bottom as a share of the length; 0 for a point"
)

// ProportionsOf returns the values that an outline is measured by, nil for an unknown outline.
func ProportionsOf(outline string) []Proportion {
	brilliant := func(table, crown, pavilion float64) []Proportion {
		return []Proportion{
			{"table", 25, 85, table, "%", true, meaningTable},
			{"crown", 5, 60, crown, "degrees", true, meaningCrown},
			{"pavilion", 20, 65, pavilion, "degrees", true, meaningPavilion},
			{"star", 15, 85, 50, "%", true, meaningStar},
			{"lower", 15, 92, 75, "%", true, meaningLower},
			{"girdle", 0, 20, 3, "%", true, meaningGirdle},
			{"culet", 0, 30, 0, "%", false, meaningCulet},
		}
	}
	ratio := func(usual float64) Proportion {
		return Proportion{"ratio", 1, 4, usual, "", false, meaningRatio}
	}
	keel := Proportion{"keel", 0, 60, 0, "%", false, meaningKeel}
	bow := func(low, usual float64) Proportion {
		return Proportion{"bow", low, 30, usual, "degrees", false, meaningBow}
	}
	switch outline {
	case "round":
		return brilliant(57, 34.5, 41)
	case "oval":
		return append(brilliant(57, 35, 41), ratio(1.4), keel)
	case "pear":
		return append(brilliant(57, 35, 41), ratio(1.5), keel)
	case "marquise":
		return append(brilliant(57, 36, 42), ratio(2), keel)
	case "cushion":
		return append(brilliant(58, 36, 42), ratio(1.1), bow(3, 12),
			Proportion{"corner", 8, 40, 20, "%", false, "radius of the corners as a share of the width"})
	case "square":
		square := brilliant(65, 33, 41)
		square[3].Usual, square[4].Usual = 60, 60 // straight sides leave no room for shorter stars
		return square
	case "triangle":
		return append(brilliant(58, 34, 40), bow(0, 18))
	case "step":
		return []Proportion{
			{"table", 25, 85, 62, "%", true, meaningTable},
			{"crown", 5, 65, 35, "degrees", true, "mean angle of the crown steps"},
			{"pavilion", 20, 65, 41, "degrees", true, "angle of the step next to the keel or culet"},
			{"fan", 0, 15, 5, "degrees", false, "by how much each step is steeper than its neighbour, toward the girdle"},
			{"steps", 1, 6, 3, "", false, "steps above the girdle, and as many below"},
			{"girdle", 0, 20, 3, "%", true, meaningGirdle},
			{"culet", 0, 40, 0, "%", false, meaningCulet},
			ratio(1.4),
			{"corner", 0, 29, 12, "%", false, "what a cut corner takes off each side, as a share of the width; 0 for sharp corners"},
		}
	}
	return nil
}

// ParseProportions reads "name=value" pairs divided by commas for an outline,
// such as "table=56,crown=33.5..34..34.6". A value is a number, or least,
// mean and greatest joined by "..", or only least and greatest. Errors are
// Faults that list what is allowed.
func ParseProportions(outline, pairs string) (*Proportions, error) {
	const file = "proportions"
	known := ProportionsOf(outline)
	if known == nil {
		return nil, &Fault{File: file, Field: "outline", Got: outline, Why: "this outline is not known",
			Remedy: "use one of " + strings.Join(Outlines(), ", ")}
	}
	var faults Faults
	p := &Proportions{Outline: outline, Values: map[string]Spread{}}
	for _, pair := range strings.Split(pairs, ",") {
		if pair = strings.TrimSpace(pair); pair == "" {
			continue
		}
		name, text, ok := strings.Cut(pair, "=")
		name, text = strings.TrimSpace(name), strings.TrimSpace(text)
		if !ok {
			faults = append(faults, &Fault{File: file, Field: "value", Got: clip(pair),
				Why:    "this is no pair of name and value",
				Remedy: "write it like table=56"})
			continue
		}
		if _, twice := p.Values[name]; twice {
			faults = append(faults, &Fault{File: file, Field: clip(name), Got: clip(text),
				Why: "this value is given twice", Remedy: "leave one out"})
			continue
		}
		spread, f := parseSpread(clip(name), text)
		if f != nil {
			f.File = file
			faults = append(faults, f)
			continue
		}
		p.Values[name] = spread
	}
	faults = append(faults, p.check()...)
	if err := faults.Err(); err != nil {
		return nil, err
	}
	return p, nil
}

func parseSpread(name, text string) (Spread, *Fault) {
	parts := strings.Split(text, "..")
	var v [3]float64
	if len(parts) > len(v) {
		return Spread{}, &Fault{Field: name, Got: clip(text), Why: "this is more than least, mean and greatest",
			Remedy: "write it like 33.5..34..34.6"}
	}
	for i, part := range parts {
		x, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil || math.IsNaN(x) || math.IsInf(x, 0) {
			return Spread{}, &Fault{Field: name, Got: clip(text), Why: "this is not a number",
				Remedy: "write it like 34 or, least to greatest, 33.5..34..34.6"}
		}
		v[i] = x
	}
	switch len(parts) {
	case 1:
		return Spread{v[0], v[0], v[0]}, nil
	case 2:
		return Spread{v[0], (v[0] + v[1]) / 2, v[1]}, nil
	}
	return Spread{v[0], v[1], v[2]}, nil
}

// check finds every fault of the values that needs no geometry, in the order of the names.
func (p *Proportions) check() Faults {
	const file = "proportions"
	known := ProportionsOf(p.Outline)
	if known == nil {
		return Faults{{File: file, Field: "outline", Got: clip(p.Outline), Why: "this outline is not known",
			Remedy: "use one of " + strings.Join(Outlines(), ", ")}}
	}
	var faults Faults
	var names []string
	for name := range p.Values {
		names = append(names, name)
	}
	slices.Sort(names)
	for _, name := range names {
		v := p.Values[name]
		i := slices.IndexFunc(known, func(k Proportion) bool { return k.Name == name })
		if i < 0 {
			faults = append(faults, &Fault{File: file, Field: "value", Got: clip(name),
				Why: "the outline " + p.Outline + " has no such value", Remedy: "use " + listProportions(known)})
			continue
		}
		k := known[i]
		got := v.String()
		switch {
		case !(v.Min >= k.Low && v.Max <= k.High):
			faults = append(faults, &Fault{File: file, Field: name, Got: got, Why: "out of range",
				Remedy: "use " + k.span() + ": " + k.Meaning})
		case !(v.Min <= v.Mean && v.Mean <= v.Max):
			faults = append(faults, &Fault{File: file, Field: name, Got: got,
				Why:    "least, mean and greatest are out of order",
				Remedy: "write least..mean..greatest"})
		case v.varies() && !k.Varies:
			faults = append(faults, &Fault{File: file, Field: name, Got: got,
				Why: "this value is one for the whole stone", Remedy: "give one number"})
		case name == "steps" && v.Mean != math.Trunc(v.Mean):
			faults = append(faults, &Fault{File: file, Field: name, Got: got, Why: "steps are counted",
				Remedy: "give a whole number"})
		}
	}
	return faults
}

func (s Spread) String() string {
	f := func(x float64) string { return strconv.FormatFloat(x, 'g', -1, 64) }
	if !s.varies() && s.Mean == s.Min {
		return f(s.Mean)
	}
	return f(s.Min) + ".." + f(s.Mean) + ".." + f(s.Max)
}

// span is the range as a person reads it.
func (k Proportion) span() string {
	return strings.TrimSpace(fmt.Sprintf("%s %g to %g %s", k.Name, k.Low, k.High, k.Unit))
}

func listProportions(known []Proportion) string {
	spans := make([]string, len(known))
	for i, k := range known {
		spans[i] = k.span()
	}
	return strings.Join(spans, ", ")
}

// value returns the spread of a name, the usual one where it was not given.
func (p *Proportions) value(name string) Spread {
	if v, ok := p.Values[name]; ok {
		return v
	}
	for _, k := range ProportionsOf(p.Outline) {
		if k.Name == name {
			return Spread{k.Usual, k.Usual, k.Usual}
		}
	}
	return Spread{}
}

// round deals a value out to the facets of one tier, whose azimuths are given
// in turning order. It swings once round the stone: greatest at one facet,
// least at the one farthest round, with
//
//	v = least + (greatest - least) w^x,  w = (1 + cos(azimuth - start)) / 2,
//
// w scaled to reach 0 and 1, and the exponent x chosen so that the mean is
// met. start is the facet three places on for each value before this one in
// the outline's list, so that the extremes of several values do not coincide.
func (p *Proportions) round(name string, azimuths []float64) ([]float64, *Fault) {
	v := p.value(name)
	out := make([]float64, len(azimuths))
	if !v.varies() {
		for i := range out {
			out[i] = v.Mean
		}
		return out, nil
	}
	place := slices.IndexFunc(ProportionsOf(p.Outline), func(k Proportion) bool { return k.Name == name })
	start := azimuths[3*place%len(azimuths)]
	w := make([]float64, len(azimuths))
	for i, a := range azimuths {
		w[i] = (1 + math.Cos(a-start)) / 2
	}
	low, high := slices.Min(w), slices.Max(w)
	const tie = 1e-9 // of w: facets that stand alike to rounding
	least, greatest := 0, 0
	for i := range w {
		w[i] = (w[i] - low) / (high - low)
		switch {
		case w[i] < tie:
			w[i] = 0
			least++
		case w[i] > 1-tie:
			w[i] = 1
			greatest++
		}
	}
	deal := func(x float64) float64 {
		sum := 0.0
		for i := range w {
			out[i] = v.Min + (v.Max-v.Min)*math.Pow(w[i], x)
			sum += out[i]
		}
		return sum / float64(len(w))
	}
	// Between a 1000th and 1000 the exponent covers all means that leave
	// every other facet strictly between the extremes.
	lo, hi := math.Log(1e-3), math.Log(1e3)
	n := float64(len(w))
	if deal(math.Exp(lo)) < v.Mean || deal(math.Exp(hi)) > v.Mean {
		from := v.Min + (v.Max-v.Min)*float64(greatest)/n
		to := v.Max - (v.Max-v.Min)*float64(least)/n
		return nil, &Fault{File: "proportions", Field: name, Got: v.String(),
			Why:    fmt.Sprintf("no %d facets have these extremes and this mean", len(w)),
			Remedy: fmt.Sprintf("measure the mean again; it must lie between %.4g and %.4g", from, to)}
	}
	for range 200 { // halves the interval to below rounding
		mid := (lo + hi) / 2
		if deal(math.Exp(mid)) > v.Mean {
			lo = mid
		} else {
			hi = mid
		}
	}
	deal(math.Exp(hi))
	return out, nil
}

// Stone returns the solid of these proportions, widthMM wide, on the design's
// frame: length along x (a pear's point toward +x), z = 0 midway between the
// mean upper and lower girdle edge at the mains. Indices are on a gear of 96.
// Values that were not given are named in its notes. Errors are *Fault or
// Faults.
func (p *Proportions) Stone(widthMM float64) (*Stone, error) {
	faults := p.check()
	if !(widthMM > 0) || widthMM > 1e4 {
		faults = append(faults, &Fault{File: "proportions", Field: "width", Got: fmt.Sprint(widthMM),
			Why:    "a width is a positive number of millimetres",
			Remedy: "give the stone's width, such as 6.5"})
	}
	if err := faults.Err(); err != nil {
		return nil, err
	}
	var planes []Plane
	var f *Fault
	if p.Outline == "step" {
		planes, f = p.stepPlanes()
	} else {
		planes, f = p.brilliantPlanes()
	}
	if f != nil {
		return nil, f
	}
	for i := range planes {
		planes[i].Distance *= widthMM
	}
	s, err := FromPlanes(p.Outline, planes)
	if err != nil {
		return nil, &Fault{File: "proportions", Field: "values", Got: p.String(), Why: err.Error(),
			Remedy: "use values nearer to the usual ones"}
	}
	needed := slices.DeleteFunc(planes, func(pl Plane) bool { return pl.Side == Girdle })
	if f := allPresent(s, needed); f != nil {
		f.Got = p.String()
		return nil, f
	}
	if left := p.left(); len(left) > 0 {
		s.Notes = append(s.Notes, "Not measured and taken at a usual value: "+strings.Join(left, ", ")+".")
	}
	return s, nil
}

// left lists the values that were not given.
func (p *Proportions) left() []string {
	var out []string
	for _, k := range ProportionsOf(p.Outline) {
		if _, ok := p.Values[k.Name]; !ok {
			out = append(out, strings.TrimSpace(fmt.Sprintf("%s %g %s", k.Name, k.Usual, k.Unit)))
		}
	}
	return out
}

// String returns the values as they may be written on the command line.
func (p *Proportions) String() string {
	var pairs []string
	for _, k := range ProportionsOf(p.Outline) {
		if v, ok := p.Values[k.Name]; ok {
			pairs = append(pairs, k.Name+"="+v.String())
		}
	}
	return strings.Join(pairs, ",")
}

// allPresent reports the facets that the others cut away. The girdle's own may
// go: a thin girdle runs to a knife edge between its thick places.
func allPresent(s *Stone, planes []Plane) *Fault {
	type key struct {
		tier  string
		index float64
	}
	keyOf := func(tier string, index float64) key {
		if math.IsNaN(index) {
			index = -1
		}
		return key{tier, index}
	}
	there := map[key]bool{}
	for _, f := range s.Facets {
		there[keyOf(f.Tier, f.Index)] = true
	}
	gone := map[string]int{}
	var order []string
	for _, pl := range planes {
		if there[keyOf(pl.Tier, pl.Index)] {
			continue
		}
		if gone[pl.Tier] == 0 {
			order = append(order, pl.Tier)
		}
		gone[pl.Tier]++
	}
	if len(order) == 0 {
		return nil
	}
	var parts []string
	for _, tier := range order {
		parts = append(parts, fmt.Sprintf("%d of tier %q", gone[tier], tier))
	}
	return &Fault{File: "proportions", Field: "values",
		Why:    "these values leave no room for some facets: " + strings.Join(parts, ", "),
		Remedy: "use values nearer to the usual ones"}
}
