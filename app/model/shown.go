package model

import (
	"image"
	"math"
	"slices"

	"pavilight/app/picture"
	"pavilight/app/words"
	"pavilight/trace"
)

// Shown is what a row of maps shows: an entry of the ledger, which has the entry's own
// number, or one of two more that take a run of their own.
type Shown int

// What a row shows besides the entries of the ledger.
const (
	PathLength Shown = Shown(trace.Unresolved) + 1 + iota // mean way inside, mm
	TrueColour                                            // as an eye sees it under the chosen light
	shownCount
)

// Entry returns the entry of the ledger that is shown, false where it is none.
func (s Shown) Entry() (trace.Quantity, bool) {
	return trace.Quantity(s), s >= 0 && s <= Shown(trace.Unresolved)
}

// Choices lists what a row of maps can show.
func Choices() []Shown {
	var all []Shown
	for _, q := range Quantities() {
		all = append(all, Shown(q))
	}
	return append(all, PathLength, TrueColour)
}

// ShownName returns what a row of maps is called.
func ShownName(s Shown) words.Key {
	switch s {
	case PathLength:
		return "Path length"
	case TrueColour:
		return "True colour"
	}
	return QuantityName(trace.Quantity(s))
}

// ShownMeaning says what a row of maps shows, in a few words.
func ShownMeaning(s Shown) words.Key {
	switch s {
	case PathLength:
		return "mean way inside of the light that comes out, in mm"
	case TrueColour:
		return "to an eye used to the light; white paper at two thirds of the screen's white"
	}
	return QuantityMeaning(trace.Quantity(s))
}

// expose puts what is as bright as the white diffuser at two thirds of the screen's
// white, so that what is brighter has room.
const expose = 2.0 / 3

// extras is what is gathered besides the ledger, in a run of its own after the maps
// that the fast tracer knows.
type extras struct {
	paths, colour bool
	lights        []string // of the colour, by column; nil without
}

// extrasFor returns what the rows need.
func extrasFor(row [Rows]Shown, lights []string) (e extras) {
	for _, s := range row {
		e.paths = e.paths || s == PathLength
		e.colour = e.colour || s == TrueColour
	}
	if e.colour {
		e.lights = lights
	}
	return e
}

func (e extras) any() bool { return e.paths || e.colour }

// cover reports whether these are enough for those that are wanted.
func (e extras) cover(wanted extras) bool {
	return (e.paths || !wanted.paths) && (!wanted.colour || e.colour && slices.Equal(e.lights, wanted.lights))
}

// When the run for path length and colour stops: at an error of the ledger, which is not
// shown, or where a colour without noise is wanted, after so many rays a pixel.
const (
	extrasError = 0.002
	colourRays  = 32
)

// party is the columns that are seen under one light, which one run gathers.
type party struct {
	light   string // empty where no colour is wanted
	columns []int
}

// parties returns the columns by their light, in the order of their first.
func (e extras) parties(columns int) (all []party) {
	for j := range columns {
		light := ""
		if e.colour {
			light = e.lights[j]
		}
		k := slices.IndexFunc(all, func(p party) bool { return p.light == light })
		if k < 0 {
			k, all = len(all), append(all, party{light: light})
		}
		all[k].columns = append(all[k].columns, j)
	}
	return all
}

// settings returns those of the run that gathers the extras under one light.
func (e extras) settings(s trace.Settings, name string) (trace.Settings, error) {
	s.Paths, s.Colour, s.Error = e.paths, e.colour, max(s.Error, extrasError)
	if e.colour {
		light, err := findLight(name)
		if err != nil {
			return s, err
		}
		s.Light, s.Samples = light, colourRays
	}
	return s, nil
}

// findLight returns a light with a colour. The even light has none of its own and
// takes that of daylight.
func findLight(name string) (*trace.Light, error) {
	light, err := trace.FindLight(name)
	if err != nil || name != "even" {
		return light, err
	}
	daylight, err := trace.FindIlluminant("D65")
	if err != nil {
		return nil, err
	}
	return light.Under(daylight), nil
}

// LightName returns what a light is called on the screen.
func LightName(name string) words.Key {
	return map[string]words.Key{
		"even": "even daylight", "overcast": "overcast sky", "clear": "clear sky, no sun", "sun": "sun and clear sky",
		"room": "room with a window", "lamps": "small lamps", "ring": "ring of light",
	}[name]
}

// LightNames lists the lights that the stone can be seen under.
func LightNames() []string { return trace.LightNames() }

// Lights returns the names of the lights that colour is seen under, by column.
func (l *Look) Lights() []string { return slices.Clone(l.lights) }

// OneLight returns the light of all columns, false where they differ.
func (l *Look) OneLight() (string, bool) {
	for _, name := range l.lights {
		if name != l.lights[0] {
			return "", false
		}
	}
	return l.lights[0], true
}

// SetLight chooses the light that colour is seen under in the given columns.
func (l *Look) SetLight(name string, columns ...int) error {
	if _, err := findLight(name); err != nil {
		return err
	}
	lights := slices.Clone(l.lights)
	for _, j := range columns {
		lights[j] = name
	}
	if !slices.Equal(lights, l.lights) {
		l.lights = lights
		l.wantExtras()
		l.onChange(StateChanged)
	}
	return nil
}

// ShowsColour reports whether a row shows true colour.
func (l *Look) ShowsColour() bool { return extrasFor(l.Row, l.lights).colour }

// wantExtras traces anew if the rows need what is neither known nor under way.
func (l *Look) wantExtras() {
	wanted := extrasFor(l.Row, l.lights)
	l.latest.extras = wanted
	known := !wanted.any() || l.Frame != nil && l.Frame.Seen != nil && l.Frame.extras.cover(wanted) ||
		l.running != nil && !l.stopped && l.running.request.extras.cover(wanted)
	if !known {
		l.restart()
	}
}

// knows reports whether the frame holds what a row shows.
func (f *Frame) knows(i int) bool {
	if _, plain := f.Row[i].Entry(); plain {
		return f.Result != nil
	}
	return f.Seen != nil && f.extras.cover(extrasFor([Rows]Shown{f.Row[i], f.Row[i]}, f.extras.lights))
}

// paintRow fills in one row of a frame.
func (l *Look) paintRow(f *Frame, i int) {
	from := f.Result
	entry, plain := f.Row[i].Entry()
	if !plain {
		from = f.Seen
	}
	f.Fields[i], f.Late[i], f.Most[i] = nil, true, 1
	if !f.knows(i) {
		for _, dst := range f.Pictures[i] {
			clear(dst.Pix) // nothing is known yet
		}
		return
	}
	f.Late[i] = false
	f.Fields[i] = make([][]float32, len(from.Columns))
	if f.Row[i] == PathLength {
		f.Most[i] = scaleOf(from)
	}
	for j := range from.Columns {
		m, dst := from.Columns[j].Map, f.Pictures[i][j]
		switch {
		case m == nil: // its light's turn has not come
			clear(dst.Pix)
			continue
		case plain:
			f.Fields[i][j] = m.Field(entry)
			picture.Paint(dst, f.Fields[i][j], m.Pixels, l.maps[f.Row[i]])
		case f.Row[i] == PathLength:
			f.Fields[i][j] = m.PathLengths()
			scaled := make([]float32, len(f.Fields[i][j]))
			for k, v := range f.Fields[i][j] {
				scaled[k] = v / float32(f.Most[i])
			}
			picture.Paint(dst, scaled, m.Pixels, l.maps[f.Row[i]])
		default:
			f.Fields[i][j] = paintColour(dst, m, f.extras.lights[j])
		}
		clearOutside(dst, f.Fields[i][j])
	}
}

// paintColour paints a map in true colour and returns its luminance, relative to the
// white diffuser's.
func paintColour(dst *image.RGBA, m *trace.Map, name string) []float32 {
	light, err := findLight(name)
	if err != nil {
		return nil // the light was found before it was traced with
	}
	xyz := m.XYZ()
	if len(xyz) != m.Pixels*m.Pixels || dst.Rect.Dx() != m.Pixels {
		return nil
	}
	display := trace.NewDisplay(light.Illuminant.White(), expose)
	copy(dst.Pix, picture.Seen(xyz, m.Pixels, display.Colour).Pix)
	luminance := make([]float32, len(xyz))
	for k := range xyz {
		luminance[k] = xyz[k][1]
	}
	return luminance
}

// scaleOf returns the path length at the top of the scale, in mm: a round number above
// one and a half times the largest mean, which few pixels exceed. From the means it moves little while
// the maps refine.
func scaleOf(r *trace.Result) float64 {
	largest := 0.0
	for i := range r.Columns {
		largest = max(largest, r.Columns[i].PathLength)
	}
	return roundAbove(1.5 * largest)
}

// roundAbove returns the least number of 1, 1.5, 2, 3, 4, 5, 6 or 8 times a power of
// ten that is not below v; 1 for 0.
func roundAbove(v float64) float64 {
	if !(v > 0) || math.IsInf(v, 0) {
		return 1
	}
	ten := math.Pow(10, math.Floor(math.Log10(v)))
	for _, k := range []float64{1, 1.5, 2, 3, 4, 5, 6, 8} {
		if k*ten >= v {
			return k * ten
		}
	}
	return 10 * ten
}

// paintLater paints, on another goroutine, what the frame holds and does not show yet: some
// hundred thousand pixels would hold the window's up.
func (l *Look) paintLater() {
	f := l.Frame
	for i := range f.Row {
		if f.Late[i] && f.knows(i) {
			go func() {
				painted := l.paint(*f)
				l.do(func() {
					if l.Frame != f {
						l.buffers.giveBack(painted)
						return
					}
					l.show(painted)
					l.onChange(MapsChanged)
				})
			}()
			return
		}
	}
}

// keepLate lets the rows of a frame that nothing is known for yet show what was there
// before, which is marked as late.
func (f *Frame) keepLate(before *Frame) {
	for i := range f.Row {
		if !f.Late[i] || before.Row[i] != f.Row[i] || len(before.Pictures[i]) != len(f.Pictures[i]) {
			continue
		}
		for j, dst := range f.Pictures[i] {
			if src := before.Pictures[i][j]; src.Rect == dst.Rect {
				copy(dst.Pix, src.Pix)
			}
		}
		f.Most[i] = before.Most[i]
	}
}

// Late reports whether a row still shows the stone, view or light before the present.
func (l *Look) Late(row int) bool { return l.Frame != nil && l.Frame.Late[row] }

// Scale is the scale beside a row of maps.
type Scale struct {
	Colours *picture.ColourMap // nil where colours stand for themselves
	Most    float64            // at the top: 1 or, of path lengths, mm; 0 is at the bottom
}

// Scale returns the scale of a row.
func (l *Look) Scale(row int) Scale {
	s := Scale{Colours: l.maps[l.Row[row]], Most: 1}
	switch l.Row[row] {
	case TrueColour:
		s.Colours = nil
	case PathLength:
		if l.Frame != nil && l.Frame.Row[row] == PathLength {
			s.Most = l.Frame.Most[row]
		}
	}
	return s
}

// ValueText writes a number of a row's maps.
func (l *Look) ValueText(row int, v float64) string {
	switch l.Row[row] {
	case PathLength:
		return l.words.Say("%.1f mm", v)
	case TrueColour:
		return l.words.Say("Y %.2f", v) // CIE 1931, of the white diffuser 1
	}
	return l.words.Say("%.3f", v)
}

// stripEntry is the entry of the ledger that the strip shows: the first row's, light
// return where that shows none.
func (l *Look) stripEntry() trace.Quantity {
	if q, ok := l.Row[0].Entry(); ok {
		return q
	}
	return trace.Returned
}

// StripMeaning says what the curves of the strip are.
func (l *Look) StripMeaning() string {
	return l.words.Say("mean %s, 0 below, 1 above; a click tilts the maps", l.words.Within(l.words.Say(QuantityName(l.stripEntry()))))
}
