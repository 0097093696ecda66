package command

import (
	"fmt"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
	"pavilight/trace/tune"
)

// tuneGoal says what the stone is to be good at.
type tuneGoal struct {
	Goal     string  `default:"return" type:"word" placeholder:"NAMES" help:"What the stone is to be good at: return, leakage, head, leaky, windowed, weight, luminance, dark, contrast, fire, sparkle, with commas between, each with its weight if need be: return=1,windowed=-0.5 (${default}). What is bad counts below 0 by itself."`
	In       string  `default:"air" type:"word" placeholder:"NAMES" help:"What surrounds the stone: names of the material table or plain refractive indices, with commas between (${default})."`
	Dish     string  `type:"word" placeholder:"NAMES" help:"Liquids in a dish with a flat surface, seen from the air above, as further surroundings."`
	Tilts    string  `default:"0" type:"word" placeholder:"DEG,..." help:"The stone is rocked by these angles, with commas between, or from one to another by steps: -20..20/10 (${default})."`
	Turn     float64 `type:"number" least:"-360" most:"360" unit:"degrees" placeholder:"DEG" help:"Toward which azimuth it is rocked, -360 to 360 degrees (0)."`
	Light    string  `default:"even" type:"word" placeholder:"NAMES" help:"The lights for luminance, dark, contrast, fire and sparkle: ${lights}, with commas between (${default})."`
	Worst    bool    `help:"The worst surrounding, tilt and light counts, not their mean."`
	Steady   float64 `type:"number" least:"0" most:"2" unit:"degrees" placeholder:"DEG" help:"A stone counts no more than the worst of those with one angle off by up to so much, 0 to 2 degrees, seen every 0.1 degrees: keeps off cliffs, and takes several times as long (0)."`
	Head     float64 `default:"10" type:"number" least:"0" most:"90" unit:"degrees" placeholder:"DEG" help:"Half-angle of the cone that the viewer's head blocks, 0 to 90 degrees (${default})."`
	Distance float64 `type:"number" least:"0" most:"100000" unit:"mm" placeholder:"MM" help:"Distance of the eye for what is seen; 0 is one foot (0)."`
}

// tuneLimits say what the lap, the rough and the owner demand.
type tuneLimits struct {
	GirdleMM    float64 `name:"girdle-mm" type:"number" least:"0" most:"100" unit:"mm" placeholder:"MM" help:"The girdle is nowhere thinner, 0 to 100 mm (0)."`
	FacetMM     float64 `name:"facet-mm" default:"0.3" type:"number" least:"0" most:"100" unit:"mm" placeholder:"MM" help:"No facet is narrower, 0 to 100 mm (${default}; common practice, no source)."`
	MostDepth   float64 `name:"most-depth" type:"number" least:"0" most:"500" unit:"percent" placeholder:"P" help:"Greatest depth, in percent of the width."`
	MostCrown   float64 `name:"most-crown" type:"number" least:"0" most:"500" unit:"percent" placeholder:"P" help:"Greatest crown height, in percent of the width."`
	LeastCarats float64 `name:"least-carats" type:"number" least:"0" most:"100000" unit:"ct" placeholder:"CT" help:"Least weight of the finished stone."`
	LeastYield  float64 `name:"least-yield" type:"number" least:"0" most:"100" unit:"percent" placeholder:"P" help:"Least weight in percent of the rough's; needs --rough."`
	Rough       string  `type:"word" placeholder:"SHAPE:MM" help:"Cut the largest stone from this rough: box:10x8x7, cylinder:DIAMETERxHEIGHT, ellipsoid:AxBxC in mm, scan:FILE, or plan for what the plan says."`
	KeepRatio   float64 `name:"keep-ratio" default:"1" type:"number" least:"0" most:"100" unit:"percent" placeholder:"P" help:"Length over width changes by no more, 0 to 100 percent; 0 leaves it free (${default})."`
	Margin      string  `type:"word" placeholder:"MEDIUM:MAINS:BREAKS" help:"Pavilion angles lie above the critical angle in this medium, at the lower index, by so many degrees: mains, then all others. air:2:1 is an example."`
	Cleavage    string  `type:"word" placeholder:"TILT,AZIM,MARGIN" help:"No facet lies within MARGIN degrees (5 if left out; common practice, no source) of the cleavage plane with this normal: degrees from the stone's axis and around it. plan takes the plan's axis."`
}

// readGoal reads goals and cases.
func (g *tuneGoal) readGoal(t *tuning) error {
	p := &t.problem
	for _, part := range splitList(g.Goal) {
		word, weight, has := strings.Cut(part, "=")
		m, err := tune.ParseMeasure(strings.TrimSpace(word))
		if err != nil {
			return commandFaultf("--goal: %w", err)
		}
		aim := tune.Aim{Measure: m, Weight: m.Better()}
		if has {
			if aim.Weight, err = strconv.ParseFloat(strings.TrimSpace(weight), 64); err != nil {
				return commandFaultf("--goal %q: %q is no number; write the weight like return=1", part, weight)
			}
		}
		p.Goal.Aims = append(p.Goal.Aims, aim)
	}
	scene := sceneFlags{In: g.In, Dish: g.Dish}
	around, err := scene.surroundings(t.library)
	if err != nil {
		return err
	}
	tilts, err := readTilts(g.Tilts)
	if err != nil {
		return err
	}
	var lights []*trace.Light
	for _, name := range splitList(g.Light) {
		flags := sceneFlags{Light: name}
		l, err := flags.light(name != "even")
		if err != nil {
			return err
		}
		lights = append(lights, l)
	}
	const mostCases = 100
	if n := len(around) * len(tilts) * len(lights); n > mostCases {
		return commandFaultf("%d surroundings, %d tilts and %d lights are %d cases; use at most %d", len(around), len(tilts), len(lights), n, mostCases)
	}
	for _, s := range around {
		for _, tilt := range tilts {
			for _, l := range lights {
				p.Goal.Cases = append(p.Goal.Cases, tune.Case{Surrounding: s, Light: l,
					View: trace.View{Tilt: facets.Angle(tilt) * facets.Degree, Turn: facets.Angle(g.Turn) * facets.Degree}})
			}
		}
	}
	p.Goal.Worst = g.Worst
	p.Steady = facets.Angle(g.Steady) * facets.Degree
	p.Head, p.Distance = facets.Angle(g.Head)*facets.Degree, g.Distance
	return nil
}

// readTilts reads angles with commas between, or FROM..TO/STEP.
func readTilts(text string) ([]float64, error) {
	var tilts []float64
	for _, part := range splitList(text) {
		from, rest, span := strings.Cut(part, "..")
		to, step, stepped := strings.Cut(rest, "/")
		if !span {
			to, step = from, "1"
		} else if !stepped {
			step = "5"
		}
		v, err := readNumbers("--tilts", from+","+to+","+step, 3, 3)
		if err != nil {
			return nil, commandFaultf("--tilts %q: write angles like 0,10,20 or -20..20/10", part)
		}
		if !(v[0] > -90 && v[1] < 90 && v[0] <= v[1] && v[2] > 0) || (v[1]-v[0])/v[2] > 100 {
			return nil, commandFaultf("--tilts %q: use angles over -90 and under 90 degrees, the smaller first, and a step above 0", part)
		}
		for i := 0; v[0]+float64(i)*v[2] <= v[1]+1e-9; i++ {
			tilts = append(tilts, v[0]+float64(i)*v[2])
		}
	}
	return tilts, nil
}

// readLimits reads the limits.
func (f *tuneLimits) readLimits(t *tuning) error {
	l := &t.problem.Limits
	*l = tune.Limits{
		GirdleMM: f.GirdleMM, LeastFacetMM: f.FacetMM, MostDepthPercent: f.MostDepth, MostCrownPercent: f.MostCrown,
		LeastCarats: f.LeastCarats, LeastYield: f.LeastYield / 100, KeepRatio: f.KeepRatio / 100,
	}
	if f.Margin != "" {
		parts := strings.Split(f.Margin, ":")
		bad := commandFaultf("--margin %q: write the medium and degrees for mains and breaks, such as air:2:1", f.Margin)
		if len(parts) < 2 || len(parts) > 3 {
			return bad
		}
		medium, err := surroundings(t.library, "--margin", parts[0])
		if err != nil {
			return err
		}
		v, err := readNumbers("--margin", strings.Join(parts[1:], ","), 1, 2)
		if err != nil {
			return bad
		}
		l.MarginIn, l.MainMargin = medium[0], facets.Angle(v[0])*facets.Degree
		if len(v) == 2 {
			l.BreakMargin = facets.Angle(v[1]) * facets.Degree
		}
	}
	if err := f.readCleavage(t); err != nil {
		return err
	}
	return f.readRough(t)
}

func (f *tuneLimits) readCleavage(t *tuning) error {
	if f.Cleavage == "" {
		return nil
	}
	l := &t.problem.Limits
	l.CleavageMargin = tune.UsualCleavageMargin
	var tilt, azimuth facets.Angle
	if f.Cleavage == "plan" {
		if t.plan == nil || t.plan.Axis == nil {
			return commandFaultf("--cleavage plan: the plan names no axis; write its tilt and azimuth")
		}
		tilt, azimuth = t.plan.Axis.Tilt, t.plan.Axis.Azimuth
	} else {
		v, err := readNumbers("--cleavage", f.Cleavage, 2, 3)
		if err != nil {
			return err
		}
		tilt, azimuth = facets.Angle(v[0])*facets.Degree, facets.Angle(v[1])*facets.Degree
		if len(v) == 3 {
			l.CleavageMargin = facets.Angle(v[2]) * facets.Degree
		}
	}
	sinT, cosT := math.Sincos(tilt.Radians())
	sinA, cosA := math.Sincos(azimuth.Radians())
	l.CleavageNormal = &[3]float64{sinT * cosA, sinT * sinA, cosT}
	return nil
}

// readRough reads --rough.
func (f *tuneLimits) readRough(t *tuning) error {
	if f.Rough == "" {
		return nil
	}
	ref, folder, err := f.roughRef(t.plan)
	if err != nil {
		return err
	}
	rough, err := ref.Rough(folder)
	if err != nil {
		return inputFault(err)
	}
	t.problem.Rough = &rough
	return nil
}

// roughRef returns what --rough says, and the folder from which it names files.
func (f *tuneLimits) roughRef(plan *facets.Plan) (ref *facets.RoughRef, folder string, err error) {
	if f.Rough == "plan" {
		if plan == nil || plan.Rough == nil {
			return nil, "", commandFaultf("--rough plan: the plan names no rough; write its shape and sizes, such as box:10x8x7")
		}
		return plan.Rough, filepath.Dir(plan.File), nil
	}
	if ref, err = facets.ParseRough(f.Rough); err != nil {
		return nil, "", commandFaultf("--rough: %w", err)
	}
	return ref, "", nil
}

// readSlips reads the machine's errors.
func readSlips(text string) (tune.Machine, error) {
	m := tune.UsualMachine()
	if text == "" {
		return m, nil
	}
	for _, part := range splitList(text) {
		name, value, ok := strings.Cut(part, "=")
		v, err := strconv.ParseFloat(strings.TrimSpace(value), 64)
		if !ok || err != nil {
			return m, commandFaultf("--slips %q: write like angle=0.1", part)
		}
		angle := facets.Angle(v) * facets.Degree
		switch strings.TrimSpace(name) {
		case "tilt":
			m.DopTilt = angle
		case "twist":
			m.Twist = angle
		case "angle":
			m.Angle = angle
		case "index":
			m.Index = angle
		case "shift":
			m.ShiftMM = v
		case "overcut":
			m.OvercutMM = v
		default:
			return m, commandFaultf("--slips: there is no error %q; use tilt, twist, shift, angle, index, overcut", name)
		}
	}
	return m, nil
}

// readRefs reads the reference angles of the tangent rule.
func readRefs(text string) (r tune.References, err error) {
	for _, part := range splitList(text) {
		side, angles, _ := strings.Cut(part, "=")
		from, to, ok := strings.Cut(angles, ":")
		v, err := readNumbers("--refs", from+","+to, 2, 2)
		if !ok || err != nil {
			return r, commandFaultf("--refs %q: write the old and the new angle like pavilion=42:43", part)
		}
		a, b := facets.Angle(v[0])*facets.Degree, facets.Angle(v[1])*facets.Degree
		switch side {
		case "pavilion":
			r.PavilionFrom, r.PavilionTo = a, b
		case "crown":
			r.CrownFrom, r.CrownTo = a, b
		default:
			return r, commandFaultf("--refs: there is no side %q; use pavilion and crown", side)
		}
	}
	return r, nil
}

// readGrid reads COLSxROWS.
func readGrid(text string) (s tune.FieldSettings, err error) {
	a, b, ok := strings.Cut(strings.ToLower(text), "x")
	s.Columns, err = strconv.Atoi(a)
	if err == nil && ok {
		s.Rows, err = strconv.Atoi(b)
	}
	if err != nil || !ok || s.Columns < 2 || s.Rows < 2 || s.Columns > tune.MostCells || s.Rows > tune.MostCells {
		return s, commandFaultf("--field %q: write columns and rows like 40x40, each 2 to %d", text, tune.MostCells)
	}
	return s, nil
}

// mediaOf returns air, water and oil, which warnings about the pavilion are for.
func mediaOf() ([]*gems.Material, error) {
	var media []*gems.Material
	for _, name := range []string{"air", "water", "oil"} {
		m, err := gems.Find(name)
		if err != nil {
			return nil, fmt.Errorf("the material table has no %s: %w", name, err)
		}
		media = append(media, m)
	}
	return media, nil
}
