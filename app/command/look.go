package command

import (
	"context"
	"errors"
	"fmt"
	"io"
	"math"
	"slices"
	"strconv"
	"strings"
	"text/tabwriter"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// lookCommand traces a stone and prints its ledgers.
type lookCommand struct {
	subjectFlags
	sweepFlags
	sceneFlags
	Tilt        float64 `type:"number" least:"-89" most:"89" unit:"degrees" placeholder:"DEG" help:"How far the stone is rocked, -89 to 89 degrees (0)."`
	Turn        float64 `type:"number" least:"-360" most:"360" unit:"degrees" placeholder:"DEG" help:"Toward which azimuth it is rocked, -360 to 360 degrees (0)."`
	Below       float64 `type:"number" least:"0" most:"1" unit:"(1 is white paper)" placeholder:"L" help:"Luminance of what lies under the stone, 0 to 1; 1 is white paper (0)."`
	Head        float64 `default:"10" type:"number" least:"0" most:"90" unit:"degrees" placeholder:"DEG" help:"Half-angle of the cone that the viewer's head blocks, 0 to 90 degrees (${default})."`
	Wavelength  float64 `type:"number" least:"400" most:"700" unit:"nm" placeholder:"NM" help:"One wavelength, 400 to 700 nm; without it the spectrum."`
	Pixels      int     `default:"300" type:"number" least:"16" most:"2000" unit:"pixels" placeholder:"N" help:"Pixels of a map's edge, 16 to 2000 (${default})."`
	Samples     int     `type:"number" least:"1" most:"100000" unit:"rays a pixel" placeholder:"N" help:"Stop at N rays a pixel, 1 to 100000, instead of at an error."`
	Error       float64 `default:"0.0005" type:"number" least:"0.00001" most:"0.1" placeholder:"E" help:"Stop when the standard error of every ledger entry is below E, 0.00001 to 0.1 (${default})."`
	Seed        uint64  `default:"1" type:"number" placeholder:"N" help:"Seed of the random numbers; the same seed gives the same maps (${default})."`
	Workers     int     `type:"number" least:"0" most:"1024" unit:"(0 for all cores)" placeholder:"N" help:"How many cores may trace, 0 to 1024; 0 for all (0)."`
	Unpolarised bool    `help:"Average the two polarisations at every facet, instead of tracking the state of the light."`
	Colour      bool    `help:"Show the stone in true colour under the light too, and measure what an eye makes of it: dark area, contrast, fire, sparkle."`
	Paths       bool    `help:"Tell the mean way of the light inside the stone."`
	Tiers       bool    `help:"Tell by which tiers light is returned and leaks, in every surrounding."`
	Out         string  `type:"word" placeholder:"DIR" help:"Write the maps as pictures into this folder; of a sweep the results, results.jsonl and results.csv."`
}

// lookResult is what look prints as JSON.
type lookResult struct {
	Plan         string       `json:"plan"`
	Material     string       `json:"material"`
	BodyColour   string       `json:"body_colour"`
	WidthMM      float64      `json:"width_mm"`
	View         lookView     `json:"view"`
	Light        string       `json:"light"`
	HeadDeg      float64      `json:"head_deg"`
	WavelengthNM *float64     `json:"wavelength_nm"` // null for the spectrum
	Polarisation string       `json:"polarisation"`
	Arranged     []string     `json:"arranged,omitempty"` // what else differs from a bare stone in even light, in words
	Kernel       string       `json:"kernel"`             // form of arithmetic of clean facets in one medium
	Media        []lookMedium `json:"media"`
}

type lookView struct {
	TiltDeg float64 `json:"tilt_deg"`
	TurnDeg float64 `json:"turn_deg"`
}

// lookMedium is one column. The media are traced together, so each one's seconds are
// those of the whole run.
type lookMedium struct {
	Name          string       `json:"name"`
	Arrangement   string       `json:"arrangement"`
	IndexMedium   float64      `json:"index_medium"`
	IndexStone    float64      `json:"index_stone"`
	CriticalDeg   *float64     `json:"critical_angle_deg"` // null where there is none
	Ledger        trace.Ledger `json:"ledger"`
	StandardError trace.Ledger `json:"standard_error"`
	Lit           trace.Lit    `json:"lit"`
	From          []float64    `json:"from"`
	LeakyArea     float64      `json:"leaky_area"`
	WindowedArea  float64      `json:"windowed_area"`
	Segments      int64        `json:"segments"`
	Seconds       float64      `json:"seconds,omitempty"`        // left out in a sweep, whose results repeat to the bit
	PathLengthMM  *float64     `json:"path_length_mm,omitempty"` // only where it was asked for
	Seen          *lookSeen    `json:"seen,omitempty"`           // likewise
	Tiers         []lookTier   `json:"tiers,omitempty"`          // likewise
}

// lookTier is what leaves by the facets of one tier.
type lookTier struct {
	Tier          string     `json:"tier"`
	Side          string     `json:"side"`
	Returned      float64    `json:"returned"`
	Head          float64    `json:"head"`
	Leaked        float64    `json:"leaked"`
	StandardError tierErrors `json:"standard_error"`
}

type tierErrors struct {
	Returned float64 `json:"returned"`
	Head     float64 `json:"head"`
	Leaked   float64 `json:"leaked"`
}

func lookTiers(doors []trace.Door) []lookTier {
	var tiers []lookTier
	for _, d := range doors {
		tiers = append(tiers, lookTier{d.Tier, d.Side.String(), d.Returned, d.Head, d.Leaked,
			tierErrors{d.ReturnedError, d.HeadError, d.LeakedError}})
	}
	return tiers
}

// lookSeen is what an eye makes of the stone under one light.
type lookSeen struct {
	Light      string         `json:"light"`
	Spectrum   string         `json:"spectrum"`
	DistanceMM float64        `json:"distance_mm"`
	WidthMM    float64        `json:"width_mm"`
	Luminance  trace.Estimate `json:"luminance"`
	DarkArea   trace.Estimate `json:"dark_area"`
	Contrast   trace.Estimate `json:"contrast"`
	Fire       trace.Estimate `json:"fire"`
	Sparkle    trace.Estimate `json:"sparkle"`
}

// mostCells bounds the pixels of all maps together. One takes about 60 bytes, three
// times over while results are handed on.
const mostCells = 5e6

// Run traces the stone and prints what was found.
func (l *lookCommand) Run(c call) error {
	around, err := l.surroundings(c.library)
	if err != nil {
		return err
	}
	if most := int(math.Sqrt(mostCells / float64(len(around)))); l.Pixels > most {
		return commandFaultf("--pixels: %d pixels in %d surroundings do not fit into memory; use at most %d, or fewer surroundings",
			l.Pixels, len(around), most)
	}
	light, err := l.light(l.Colour)
	if err != nil {
		return err
	}
	s, err := l.subject(c)
	if err != nil {
		return err
	}
	if err := s.wantMaterial(); err != nil {
		return err
	}
	scene, err := l.scene(c.library, s)
	if err != nil {
		return err
	}
	settings := trace.Settings{
		Light:      light,
		Paths:      l.Paths,
		Distance:   l.Distance,
		Aside:      l.Aside,
		View:       trace.View{Tilt: facets.Angle(l.Tilt) * facets.Degree, Turn: facets.Angle(l.Turn) * facets.Degree},
		Head:       facets.Angle(l.Head) * facets.Degree,
		Wavelength: gems.Wavelength(l.Wavelength),
		Averaged:   l.Unpolarised,
		Below:      l.Below,
		Pixels:     l.Pixels,
		Samples:    l.Samples,
		Error:      l.Error,
		Seed:       l.Seed,
		Workers:    l.Workers,
		MapsLast:   true,
	}
	var folder *outFolder
	if l.Out != "" { // a folder that cannot be written is told before the work, not after it
		if folder, err = openOut(l.Out); err != nil {
			return err
		}
	}
	bar := c.progress()
	ledgers := 1.0 // share of the work
	if l.Colour {
		ledgers = 0.3
	}
	result, err := trace.Run(c, scene, settings, func(r *trace.Result) { bar.show(ledgers * r.Done) })
	var looks []trace.Appearance
	if err == nil && l.Colour {
		distance := l.Distance
		if distance == 0 {
			distance = usualDistance
		}
		looks, err = trace.Appear(c, scene, settings, distance, func(done float64) { bar.show(ledgers + (1-ledgers)*done) })
	}
	var doors [][]trace.Door
	for k := 0; err == nil && l.Tiers && k < len(scene.Surroundings); k++ {
		var d []trace.Door
		d, err = trace.Doors(c, scene, k, settings)
		doors = append(doors, d)
	}
	bar.clear()
	if err != nil {
		var outside *gems.RangeError
		var invalid *trace.InvalidError
		switch isRange := errors.As(err, &outside); {
		case errors.As(err, &invalid):
			return commandFault(err)
		case isRange && l.Wavelength != 0:
			return commandFaultf("--wavelength: %w", err)
		case isRange: // the spectrum reaches beyond what is known of a material
			return inputFault(err)
		}
		return err
	}
	if err := context.Cause(c); err != nil {
		return err
	}
	for _, column := range result.Columns {
		if e := column.StandardError.Max(); l.Samples == 0 && !(e < l.Error) {
			c.warn("%s: the standard error is %.2g, not below %g: the run ended at its greatest length", column.Medium.Name, e, l.Error)
		}
	}
	report := l.report(s, scene, result, looks)
	for k := range report.Media {
		if c.inSweep {
			report.Media[k].Seconds = 0
		}
	}
	for k := range doors {
		report.Media[k].Tiers = lookTiers(doors[k])
	}
	if folder != nil {
		if err := folder.write(c, s, report, result, looks); err != nil {
			return err
		}
	}
	if c.json {
		return printJSON(c.out, report)
	}
	printLook(c.out, s, scene, report, result, looks)
	if folder != nil {
		fmt.Fprintf(c.out, "\nMaps written to %s: %s\n", folder.path, strings.Join(folder.written, " "))
	}
	return nil
}

// usualDistance is that of a stone held in the hand, mm.
const usualDistance = 300

// surroundings reads a flag's list of names and plain refractive indices.
func surroundings(library *gems.Library, flag, list string) ([]*gems.Material, error) {
	const most = 12 // columns that a sheet can hold side by side
	names := strings.Split(list, ",")
	if len(names) > most {
		return nil, commandFaultf("%s: %d surroundings are too many; use at most %d", flag, len(names), most)
	}
	var media []*gems.Material
	seen := map[string]bool{}
	for _, name := range names {
		name = strings.TrimSpace(name)
		if name == "" {
			return nil, commandFaultf("%s %q: a name is missing beside a comma", flag, list)
		}
		m, err := surrounding(library, flag, name)
		if err != nil {
			return nil, err
		}
		if seen[m.Key] {
			return nil, commandFaultf("%s %q: %s stands there twice", flag, list, name)
		}
		seen[m.Key] = true
		media = append(media, m)
	}
	return media, nil
}

func surrounding(library *gems.Library, flag, name string) (*gems.Material, error) {
	index, err := strconv.ParseFloat(name, 64)
	if err != nil {
		return findMaterial(library, name)
	}
	m, err := gems.Plain(name, index, 0)
	if err != nil {
		return nil, commandFaultf("%s: %w", flag, err)
	}
	return m, nil
}

func (l *lookCommand) report(s *subject, scene trace.Scene, result *trace.Result, looks []trace.Appearance) *lookResult {
	report := &lookResult{
		Plan:         s.name,
		Material:     s.material.Key,
		Kernel:       trace.Kernel(),
		BodyColour:   scene.Material.Describe().BodyColour,
		WidthMM:      s.measures.WidthMM,
		View:         lookView{TiltDeg: l.Tilt, TurnDeg: l.Turn},
		Light:        l.Light,
		HeadDeg:      l.Head,
		Polarisation: "full",
	}
	report.Arranged = append(report.Arranged, l.arranged(s)...)
	if l.Below > 0 {
		report.Arranged = append(report.Arranged, fmt.Sprintf("luminance %g below", l.Below))
	}
	if l.Unpolarised {
		report.Polarisation = "averaged"
	}
	if l.Wavelength != 0 {
		report.WavelengthNM = &l.Wavelength
	}
	for i := range result.Columns {
		column := &result.Columns[i]
		medium := lookMedium{
			Name:          column.Medium.Key,
			Arrangement:   "around",
			IndexMedium:   column.IndexMedium,
			IndexStone:    column.IndexStone,
			Ledger:        column.Ledger,
			StandardError: column.StandardError,
			Lit:           column.Lit,
			From:          column.From[:],
			LeakyArea:     column.LeakyArea,
			WindowedArea:  column.WindowedArea,
			Segments:      column.Segments,
			Seconds:       result.Elapsed.Seconds(),
		}
		if column.HasCritical {
			critical := column.Critical.Degrees()
			medium.CriticalDeg = &critical
		}
		if column.Dish {
			medium.Arrangement = "dish"
		}
		if l.Paths {
			medium.PathLengthMM = &column.PathLength
		}
		if looks != nil {
			a := &looks[i]
			medium.Seen = &lookSeen{a.Light.Name, a.Light.Illuminant.Name, a.Distance, report.WidthMM, a.Luminance, a.DarkArea, a.Contrast, a.Fire, a.Sparkle}
		}
		report.Media = append(report.Media, medium)
	}
	return report
}

// viewWords says how the stone is seen and lit.
func (r *lookResult) viewWords() string {
	view := "seen face-up"
	if r.View.TiltDeg != 0 {
		view = fmt.Sprintf("tilted %g° toward azimuth %g°", r.View.TiltDeg, r.View.TurnDeg)
	}
	light := fmt.Sprintf("%s light", r.Light)
	head := "no head in the way"
	if r.HeadDeg > 0 {
		head = fmt.Sprintf("a head of %g° in the way", r.HeadDeg)
	}
	waves := "spectrum 400 to 700 nm"
	if r.WavelengthNM != nil {
		waves = fmt.Sprintf("%g nm", *r.WavelengthNM)
	}
	polarisation := "polarisation tracked in full"
	if r.Polarisation == "averaged" {
		polarisation = "polarisation averaged at every facet"
	}
	return strings.Join(append([]string{view, light, head, waves, polarisation}, r.Arranged...), ", ")
}

// stoneWords says what the stone is.
func (r *lookResult) stoneWords(s *subject) string {
	words := fmt.Sprintf("%s, %s, %.2f mm wide", s.material.Name, r.BodyColour, r.WidthMM)
	if carats := s.carats(); carats != nil {
		words += fmt.Sprintf(", %.2f ct", *carats)
	}
	return words
}

// remarks says how far the indices behind the numbers are to be trusted.
func remarks(s *subject, doubly bool, result *trace.Result) []string {
	var all []string
	if c := s.material.Character(); c != gems.Isotropic && !doubly {
		which := "ordinary"
		if c.Biaxial() {
			which = "mean"
		}
		all = append(all, fmt.Sprintf("%s is %s: traced as if singly refracting, at its %s index", s.material.Name, c, which))
	}
	var fitted []string
	for _, m := range append([]*gems.Material{s.material}, media(result)...) {
		if m.Fitted() && m.Group != gems.Plainly && !slices.Contains(fitted, m.Name) {
			fitted = append(fitted, m.Name)
		}
	}
	if len(fitted) > 0 {
		all = append(all, "index over the spectrum drawn through a few published numbers: "+strings.Join(fitted, ", "))
	}
	return all
}

func media(result *trace.Result) []*gems.Material {
	var all []*gems.Material
	for i := range result.Columns {
		all = append(all, result.Columns[i].Medium)
	}
	return all
}

func printLook(w io.Writer, s *subject, scene trace.Scene, r *lookResult, result *trace.Result, looks []trace.Appearance) {
	fmt.Fprintf(w, "%s: %s\n%s\n", r.Plan, r.stoneWords(s), r.viewWords())
	for _, remark := range remarks(s, scene.Axis != nil, result) {
		fmt.Fprintln(w, remark)
	}
	fmt.Fprintln(w)
	t := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	row := func(name string, cell func(i int) string) {
		fmt.Fprint(t, name)
		for i := range r.Media {
			fmt.Fprint(t, "\t", cell(i))
		}
		fmt.Fprintln(t)
	}
	row("", func(i int) string { return result.Columns[i].Medium.Name + dishWord(r.Media[i].Arrangement) })
	row("index around", func(i int) string { return fmt.Sprintf("%.4f", r.Media[i].IndexMedium) })
	row("index of the stone", func(i int) string { return fmt.Sprintf("%.4f", r.Media[i].IndexStone) })
	row("critical angle", func(i int) string { return inDegrees(r.Media[i].CriticalDeg, "there is none") })
	for k := range result.Columns[0].Limits { // the lowest first: warnings go by that one
		row(fmt.Sprintf("at its index %.4f", result.Columns[0].Limits[k].Index), func(i int) string {
			limit := result.Columns[i].Limits[k]
			if !limit.HasCritical {
				return "there is none"
			}
			return limit.Critical.String()
		})
	}
	for q := trace.Surface; q <= trace.Unresolved; q++ {
		row(q.String(), func(i int) string {
			return withError(q.Of(r.Media[i].Ledger), q.Of(r.Media[i].StandardError))
		})
	}
	row("leaky area", func(i int) string {
		return withError(r.Media[i].LeakyArea, result.Columns[i].LeakyError)
	})
	row("windowed area", func(i int) string {
		return withError(r.Media[i].WindowedArea, result.Columns[i].WindowedError)
	})
	row("lit, white paper 1", func(i int) string { return fmt.Sprintf("%.*f", decimals, r.Media[i].Lit.Sum) })
	if r.Media[0].PathLengthMM != nil {
		row("way inside", func(i int) string { return fmt.Sprintf("%.2f mm", *r.Media[i].PathLengthMM) })
	}
	t.Flush()
	if looks != nil {
		printSeen(w, looks, r)
	}
	for i := range r.Media {
		printTiers(w, result.Columns[i].Medium.Name+dishWord(r.Media[i].Arrangement), r.Media[i].Tiers)
	}
	rays := float64(result.Rays)
	fmt.Fprintf(w, "\nShares of one viewing ray, ± the standard error; the six from surface to unresolved sum to 1.\n"+
		"Leaky area: where more than half of the light leaks. Windowed area: where more than half leaks at the first\n"+
		"facet of the pavilion, so that one sees through. Lit: how bright the stone looks beside white paper, which is 1.\n"+
		"%s rays in %.2f s.\n", thousands(rays), result.Elapsed.Seconds())
}

// dishWord tells a column in a dish from one all around.
func dishWord(arrangement string) string {
	if arrangement == "dish" {
		return ", in a dish"
	}
	return ""
}

// printSeen prints what an eye makes of the stone.
func printSeen(w io.Writer, looks []trace.Appearance, r *lookResult) {
	first := looks[0]
	fmt.Fprintf(w, "\nTo an eye %g mm away, the stone %.2f mm wide, %s light of spectrum %s:\n", first.Distance, r.WidthMM,
		first.Light.Name, first.Light.Illuminant.Name)
	t := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	for _, m := range []struct {
		name string
		of   func(a *trace.Appearance) trace.Estimate
	}{
		{"luminance, white paper 1", func(a *trace.Appearance) trace.Estimate { return a.Luminance }},
		{"dark area", func(a *trace.Appearance) trace.Estimate { return a.DarkArea }},
		{"contrast", func(a *trace.Appearance) trace.Estimate { return a.Contrast }},
		{"fire", func(a *trace.Appearance) trace.Estimate { return a.Fire }},
		{"sparkle", func(a *trace.Appearance) trace.Estimate { return a.Sparkle }},
	} {
		fmt.Fprint(t, m.name)
		for i := range looks {
			fmt.Fprint(t, "\t", m.of(&looks[i]))
		}
		fmt.Fprintln(t)
	}
	t.Flush()
	if !first.Light.Small {
		fmt.Fprintln(w, "Fire tells stones apart only under small lamps (--light lamps).")
	}
}

// printTiers prints by which tiers light leaves in one surrounding.
func printTiers(w io.Writer, around string, tiers []lookTier) {
	if len(tiers) == 0 {
		return
	}
	fmt.Fprintf(w, "\nBy tier of the facet where a viewing ray leaves, in %s; the light that is seen came in there:\n", around)
	t := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	fmt.Fprintln(t, "tier\treturned\thead\tleaked")
	for _, d := range tiers {
		fmt.Fprintf(t, "%s\t%s\t%s\t%s\n", d.Tier, withError(d.Returned, d.StandardError.Returned),
			withError(d.Head, d.StandardError.Head), withError(d.Leaked, d.StandardError.Leaked))
	}
	t.Flush()
}

// thousands writes a count with its unit, to three figures.
func thousands(n float64) string {
	switch {
	case n >= 1e6:
		return fmt.Sprintf("%.3g million", n/1e6)
	case n >= 1e4:
		return fmt.Sprintf("%.0f thousand", math.Round(n/1e3))
	default:
		return fmt.Sprintf("%.0f", n)
	}
}
