package command

import (
	"fmt"
	"math"
	"os"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// sceneFlags say what a stone lies in, what lies on it and what shines on it.
type sceneFlags struct {
	In         string   `default:"air,water,oil" type:"word" placeholder:"NAMES" help:"What surrounds the stone: names of the material table or plain refractive indices, with commas between (${default})."`
	Dish       string   `type:"word" placeholder:"NAMES" help:"More columns: liquids in a dish with a flat surface, seen from the air above."`
	Wet        string   `type:"word" placeholder:"TIERS" help:"Only these tiers touch what --in names, with commas between; all others are in air."`
	Film       []string `sep:"none" placeholder:"TIERS=INDEX:NM" help:"A film on some tiers: its refractive index and thickness, then after colons, where wanted, its extinction and the optical depth of the dust in it. May be given again."`
	Ground     string   `type:"word" placeholder:"R" help:"Diffuse ground under the stone that sends back this share of light, 0 to 1: white paper is 0.8 or so."`
	Setting    string   `type:"word" placeholder:"R[,OPEN]" help:"Diffuse wall right behind the pavilion that sends back this share of light; OPEN is the share of the pavilion's depth left open at the culet."`
	Body       string   `type:"word" placeholder:"COLOUR:MM" help:"Body colour #rrggbb as seen through so many mm of daylight; COLOUR/COLOUR for ordinary and extraordinary ray, three for alpha, beta and gamma."`
	Axis       string   `type:"word" placeholder:"TILT,AZIM[,SPIN]" help:"How the crystal lies in the stone: both rays of a doubly refracting stone are followed. Direction of the optic axis, of a biaxial stone of the acute bisectrix, in degrees from the table's normal and around it; SPIN turns the plane of the two optic axes about the bisectrix, from the plane that holds the table's normal (0). plan takes the plan's axis."`
	Light      string   `default:"even" type:"word" placeholder:"NAME" help:"The light: ${lights}, or the path of a .hdr panorama (${default})."`
	Illuminant string   `type:"word" placeholder:"NAME" help:"Another spectrum for the light: ${illuminants}."`
	Zenith     string   `type:"word" placeholder:"ELEV,AZIM" help:"Where the light's zenith stands, in degrees over the picture's plane and around it from up, anticlockwise; without it the eye."`
	Distance   float64  `type:"number" least:"0" most:"100000" unit:"mm" placeholder:"MM" help:"Distance of the eye; 0 is far away (0)."`
	Aside      float64  `type:"number" least:"-100" most:"100" unit:"mm" placeholder:"MM" help:"How far right of the line of sight the eye stands: half the distance between two eyes (0)."`
}

// surroundings reads --in, --dish and --wet.
func (f *sceneFlags) surroundings(library *gems.Library) ([]trace.Surrounding, error) {
	media, err := surroundings(library, "--in", f.In)
	if err != nil {
		return nil, err
	}
	all := trace.Around(media...)
	if f.Wet != "" {
		air, err := gems.Find("air")
		if err != nil {
			return nil, err
		}
		for i := range all {
			all[i].Tiers, all[i].Beyond = splitList(f.Wet), air
		}
	}
	if f.Dish != "" {
		liquids, err := surroundings(library, "--dish", f.Dish)
		if err != nil {
			return nil, err
		}
		for _, m := range liquids {
			all = append(all, trace.Surrounding{Medium: m, Dish: true})
		}
	}
	return all, nil
}

// scene returns the stone in all that the flags put around it.
func (f *sceneFlags) scene(library *gems.Library, s *subject) (trace.Scene, error) {
	scene := trace.Scene{Stone: s.stone, Material: s.material}
	var err error
	if scene.Surroundings, err = f.surroundings(library); err != nil {
		return scene, err
	}
	for _, text := range f.Film {
		c, err := readFilm(text)
		if err != nil {
			return scene, err
		}
		scene.Coatings = append(scene.Coatings, c)
	}
	if f.Ground != "" {
		r, err := readNumbers("--ground", f.Ground, 1, 1)
		if err != nil {
			return scene, err
		}
		scene.Ground = &trace.Ground{Reflectance: r[0]}
	}
	if f.Setting != "" {
		r, err := readNumbers("--setting", f.Setting, 1, 2)
		if err != nil {
			return scene, err
		}
		scene.Setting = &trace.Setting{Reflectance: r[0]}
		if len(r) == 2 {
			scene.Setting.Open = r[1]
		}
	}
	if f.Axis != "" {
		a, err := f.readAxis(s)
		if err != nil {
			return scene, err
		}
		axis, plane := a.Directions()
		scene.Axis, scene.Plane = &axis, &plane
	}
	if f.Body != "" {
		a, err := readBody(f.Body, s.material)
		if err != nil {
			return scene, err
		}
		coloured := *s.material
		coloured.Absorption = a
		scene.Material = &coloured
	}
	return scene, nil
}

// readAxis reads --axis.
func (f *sceneFlags) readAxis(s *subject) (facets.Axis, error) {
	if f.Axis == "plan" {
		if s.axis == nil {
			return facets.Axis{}, commandFaultf("--axis plan: the plan names no axis; write axis = { tilt = 90, azimuth = 0 } " +
				"into it, or give the angles here")
		}
		return *s.axis, nil
	}
	v, err := readNumbers("--axis", f.Axis, 2, 3)
	if err != nil {
		return facets.Axis{}, err
	}
	for _, degrees := range v {
		if math.Abs(degrees) > 360 {
			return facets.Axis{}, commandFaultf("--axis %q: %g is out of range; give degrees, -360 to 360", f.Axis, degrees)
		}
	}
	v = append(v, 0)
	return facets.Axis{Tilt: facets.Angle(v[0]) * facets.Degree, Azimuth: facets.Angle(v[1]) * facets.Degree,
		Spin: facets.Angle(v[2]) * facets.Degree}, nil
}

// axisWords says how the crystal lies in the stone.
func (f *sceneFlags) axisWords(s *subject) string {
	a, err := f.readAxis(s)
	if err != nil {
		return ""
	}
	words := fmt.Sprintf("%.6g, %.6g °", a.Tilt.Degrees(), a.Azimuth.Degrees())
	switch c := s.material.Character(); {
	case c.Uniaxial():
		return "optic axis " + words
	case c.Biaxial():
		words = fmt.Sprintf("acute bisectrix %s, plane of the optic axes turned by %.6g °", words, a.Spin.Degrees())
		if angle := s.material.Describe().OpticAngle; angle != nil {
			words += fmt.Sprintf(", the two %.0f ° apart", *angle)
		}
		return words
	}
	return "optic axis " + words + " without effect in a singly refracting stone"
}

// arranged says in words what the flags put around the stone, beyond the surroundings
// that have a column of their own.
func (f *sceneFlags) arranged(s *subject) (words []string) {
	add := func(asked bool, format string, args ...any) {
		if asked {
			words = append(words, fmt.Sprintf(format, args...))
		}
	}
	add(f.Wet != "", "only %s wet and all else in air", f.Wet)
	for _, film := range f.Film {
		words = append(words, filmWords(film))
	}
	add(f.Ground != "", "ground that sends back %s", f.Ground)
	wall, open, partly := strings.Cut(f.Setting, ",")
	add(f.Setting != "", "a wall behind the pavilion that sends back %s", wall)
	add(partly, "open over %s of its depth", open)
	if f.Axis != "" {
		words = append(words, f.axisWords(s))
	}
	add(f.Illuminant != "", "spectrum %s", f.Illuminant)
	add(f.Zenith != "", "zenith of the light %s °", f.Zenith)
	add(f.Distance > 0, "eye %g mm away", f.Distance)
	add(f.Aside != 0, "and %g mm aside", f.Aside)
	return words
}

// light returns the light to trace with: nil for the even light without a spectrum of
// its own, which the fast tracer knows.
func (f *sceneFlags) light(colour bool) (*trace.Light, error) {
	if f.Light == "even" && f.Illuminant == "" && !colour && f.Zenith == "" {
		return nil, nil
	}
	var zenith []mgl64.Vec3
	if f.Zenith != "" {
		v, err := readNumbers("--zenith", f.Zenith, 2, 2)
		if err != nil {
			return nil, err
		}
		zenith = append(zenith, trace.DirectionOf(facets.Angle(v[0])*facets.Degree, facets.Angle(v[1])*facets.Degree))
	}
	var light *trace.Light
	var err error
	if strings.HasSuffix(strings.ToLower(f.Light), ".hdr") {
		file, openErr := os.Open(f.Light)
		if openErr != nil {
			return nil, inputFault(missing(f.Light, openErr))
		}
		defer file.Close()
		if light, err = trace.ReadPanorama(file, f.Light, zenith...); err != nil {
			return nil, inputFault(err)
		}
	} else if light, err = trace.FindLight(f.Light, zenith...); err != nil {
		return nil, commandFaultf("--light: %w", err)
	}
	spectrum := f.Illuminant
	if spectrum == "" && f.Light == "even" && colour {
		spectrum = "D65" // daylight, since equal energy is the colour of no lamp
	}
	if spectrum != "" {
		i, err := trace.FindIlluminant(spectrum)
		if err != nil {
			return nil, commandFaultf("--illuminant: %w", err)
		}
		light = light.Under(i)
	}
	return light, nil
}

// filmWords says what a film is that readFilm has taken.
func filmWords(text string) string {
	c, _ := readFilm(text)
	words := fmt.Sprintf("a film of index %g, %g nm thick", c.Index, c.Thickness)
	if c.Extinction > 0 {
		words += fmt.Sprintf(", of extinction %g", c.Extinction)
	}
	if c.Scatter > 0 {
		words += fmt.Sprintf(", with dust of optical depth %g", c.Scatter)
	}
	return words + " on " + strings.Join(c.Tiers, ",")
}

// readFilm reads TIERS=INDEX:NM, TIERS=INDEX:NM:EXTINCTION or TIERS=INDEX:NM:EXTINCTION:SCATTER.
func readFilm(text string) (trace.Coating, error) {
	tiers, rest, ok := strings.Cut(text, "=")
	bad := commandFaultf("--film %q: write tiers, refractive index and thickness in nm, such as P1,P2=1.48:20000", text)
	if !ok || strings.TrimSpace(tiers) == "" {
		return trace.Coating{}, bad
	}
	var numbers []float64
	for _, part := range strings.Split(rest, ":") {
		v, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil {
			return trace.Coating{}, bad
		}
		numbers = append(numbers, v)
	}
	if len(numbers) < 2 || len(numbers) > 4 {
		return trace.Coating{}, bad
	}
	c := trace.Coating{Tiers: splitList(tiers), Film: trace.Film{Index: numbers[0], Thickness: numbers[1]}}
	if len(numbers) > 2 {
		c.Extinction = numbers[2]
	}
	if len(numbers) > 3 {
		c.Scatter = numbers[3]
	}
	return c, nil
}

// readBody reads COLOUR:MM, or more colours with slashes between: one for each ray of the
// material; nil where there are several.
func readBody(text string, material *gems.Material) (*gems.Absorption, error) {
	written, thickness, ok := strings.Cut(text, ":")
	mm, err := strconv.ParseFloat(thickness, 64)
	if !ok || err != nil {
		return nil, commandFaultf("--body %q: write a colour and the millimetres it was seen through, such as #a03048:5", text)
	}
	var colours []gems.Colour
	for _, part := range strings.Split(written, "/") {
		c, err := gems.ParseColour(part)
		if err != nil {
			return nil, commandFaultf("--body: %w", err)
		}
		colours = append(colours, c)
	}
	if n := len(colours); n > 1 && material != nil && n != len(material.Rays) {
		more := [...]string{"", "", ", or two with a slash between, for its ordinary and extraordinary ray",
			", or three with slashes between, for alpha, beta and gamma"}[len(material.Rays)]
		return nil, commandFaultf("--body %q: %s is %v: give one colour%s", text, material.Name, material.Character(), more)
	}
	var a *gems.Absorption
	switch len(colours) {
	case 1:
		a, err = gems.ColouredBody(colours[0], colours[0], mm)
	case 2:
		a, err = gems.ColouredBody(colours[0], colours[1], mm)
	case 3:
		a, err = gems.ThreeColouredBody(colours[0], colours[1], colours[2], mm)
	default:
		return nil, commandFaultf("--body %q: no stone has more than three rays: give one to three colours", text)
	}
	if err != nil {
		return nil, commandFaultf("--body: %w", err)
	}
	return a, nil
}

// readNumbers reads so many numbers with commas between.
func readNumbers(flag, text string, least, most int) ([]float64, error) {
	var vs []float64
	for _, part := range splitList(text) {
		v, err := strconv.ParseFloat(part, 64)
		if err != nil || v != v {
			return nil, commandFaultf("%s %q: %q is no number", flag, text, part)
		}
		vs = append(vs, v)
	}
	if len(vs) < least || len(vs) > most {
		want := fmt.Sprint(least)
		if most != least {
			want = fmt.Sprintf("%d or %d", least, most)
		}
		return nil, commandFaultf("%s %q: give %s numbers with commas between", flag, text, want)
	}
	return vs, nil
}

func splitList(text string) []string {
	parts := strings.Split(text, ",")
	for i := range parts {
		parts[i] = strings.TrimSpace(parts[i])
	}
	return parts
}
