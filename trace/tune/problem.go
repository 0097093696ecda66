package tune

import (
	"errors"
	"fmt"
	"math"
	"slices"
	"strings"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Measure is something a stone can be good or bad at.
type Measure int

// The measures. Those of the ledger are shares of the outline's rays, 0 to 1.
const (
	LightReturn  Measure = iota // returned, of the ledger
	Leakage                     // leaked, of the ledger
	HeadShade                   // what the viewer's head darkens
	LeakyArea                   // share of rays with leaked > 0.5
	WindowedArea                // share of rays that see through the pavilion
	Weight                      // carats of the finished stone, of the size that fits the rough where there is one
	Luminance                   // of the stone as an eye sees it under the case's light, relative to a white diffuser
	DarkArea                    // share of it that looks dark, see trace.Seen
	Contrast                    // likewise
	Fire                        // likewise
	Sparkle                     // likewise
	measures
)

// measureWords are the measures' words, and whether more of them is better.
var measureWords = [...]struct {
	word   string
	better float64 // 1 or -1
	name   string
}{
	LightReturn:  {"return", 1, "light return"},
	Leakage:      {"leakage", -1, "leakage"},
	HeadShade:    {"head", -1, "darkened by the head"},
	LeakyArea:    {"leaky", -1, "leaky area"},
	WindowedArea: {"windowed", -1, "windowed area"},
	Weight:       {"weight", 1, "weight"},
	Luminance:    {"luminance", 1, "luminance"},
	DarkArea:     {"dark", -1, "dark area"},
	Contrast:     {"contrast", 1, "contrast"},
	Fire:         {"fire", 1, "fire"},
	Sparkle:      {"sparkle", 1, "sparkle"},
}

// Measures returns all measures.
func Measures() []Measure {
	all := make([]Measure, measures)
	for i := range all {
		all[i] = Measure(i)
	}
	return all
}

// String returns the measure's word on the command line.
func (m Measure) String() string { return measureWords[m].word }

// Name returns what people call the measure.
func (m Measure) Name() string { return measureWords[m].name }

// ByEye reports whether the measure is taken from pictures as an eye sees them, not from
// the ledger.
func (m Measure) ByEye() bool { return m >= Luminance }

// Better returns 1 where more of the measure is better, and -1 where less is.
func (m Measure) Better() float64 { return measureWords[m].better }

// ParseMeasure reads a measure's word.
func ParseMeasure(word string) (Measure, error) {
	var words []string
	for i, w := range measureWords {
		if w.word == word {
			return Measure(i), nil
		}
		words = append(words, w.word)
	}
	return 0, fmt.Errorf("there is no goal %q; choose from %s", word, strings.Join(words, ", "))
}

// Aim is one measure and how much it counts: above 0 where more is better, below 0
// where less is.
type Aim struct {
	Measure Measure
	Weight  float64
}

// Case is one way in which the stone is seen.
type Case struct {
	Surrounding trace.Surrounding
	View        trace.View
	Light       *trace.Light // for the measures of what is seen; nil for the even light
}

// Goal is what a stone is to be good at: the weighted sum of its aims, in all cases.
type Goal struct {
	Aims  []Aim
	Cases []Case
	Worst bool // the worst case counts; otherwise their mean

	toward *toward // in place of the weighted sum, for trade-offs
}

// Limits are what the lap, the rough and the owner demand. A zero field demands nothing.
type Limits struct {
	GirdleMM         float64        // least thickness of the girdle anywhere
	MostDepthPercent float64        // greatest depth over width
	MostCrownPercent float64        // greatest crown height over width
	LeastCarats      float64        // least weight, of the size that fits the rough where there is one
	LeastYield       float64        // least share of the rough's weight, 0 to 1; needs Problem.Rough
	LeastFacetMM     float64        // least width of the narrowest facet, girdle aside; UsualFacetMM is usual
	MainMargin       facets.Angle   // least angle of pavilion facets that reach the lowest point over the critical angle
	BreakMargin      facets.Angle   // likewise of all other pavilion facets
	MarginIn         *gems.Material // the medium that the margins are meant for; nil demands none of them
	CleavageNormal   *[3]float64    // unit, in the stone's frame; no facet may lie within CleavageMargin of it
	CleavageMargin   facets.Angle   // UsualCleavageMargin is usual
	KeepRatio        float64        // greatest change of length over width, as a share of it
}

// Limits that are usual at the lap: common practice, no source.
const (
	UsualFacetMM        = 0.3
	UsualCleavageMargin = 5 * facets.Degree
)

// Problem is a pattern, what may change in it, the goal and the limits.
type Problem struct {
	Pattern   Pattern
	Variables []Variable
	Material  *gems.Material
	Goal      Goal
	Limits    Limits
	Rough     *facets.Rough // what the stone is cut from: it is then as large as fits; nil where the pattern fixes its size
	Head      facets.Angle  // half-angle of the viewer's head
	Distance  float64       // of the eye, mm, for what is seen; 0 means UsualDistance
	// Steady, where above 0, has a stone count no more than the worst of those whose angles
	// are off by up to so much, one at a time, seen every SlipStep: a best that stands at a
	// cliff is no best. Other variables are off by their step.
	Steady  facets.Angle
	Seed    uint64
	Workers int // 0 for all cores
}

// MostSteady is the greatest slip that a search can be asked to forgive, and SlipStep, in
// degrees, how far apart the slips lie that it sees. What light does between two of them
// stays unseen.
const (
	MostSteady = 2 * facets.Degree
	SlipStep   = 0.1
)

// UsualDistance is how far an eye is taken to be from the stone, in mm: one foot, as
// Harding (1975) took it.
const UsualDistance = 304.8

// check refuses a problem that means nothing.
func (p *Problem) check() error {
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if len(p.Variables) == 0 {
		fault("nothing may be varied: name at least one tier or proportion")
	}
	for _, v := range p.Variables {
		faults = append(faults, v.check())
	}
	if len(p.Goal.Aims) == 0 {
		fault("no goal is named; choose from %v", Measures())
	}
	for i, a := range p.Goal.Aims {
		if a.Weight == 0 || math.IsNaN(a.Weight) || math.IsInf(a.Weight, 0) {
			fault("the goal %v has weight %v; give a number other than 0", a.Measure, a.Weight)
		}
		if slices.ContainsFunc(p.Goal.Aims[:i], func(b Aim) bool { return a.Measure == b.Measure }) {
			fault("the goal %v is named twice", a.Measure)
		}
	}
	if !(p.Distance >= 0) || math.IsInf(p.Distance, 0) {
		fault("the eye's distance is %g mm; give a positive number, or 0 for the usual one", p.Distance)
	}
	if !(p.Steady >= 0 && p.Steady <= MostSteady) {
		fault("steady within %v: use 0 to %v", p.Steady, MostSteady)
	}
	if len(p.Goal.Cases) == 0 {
		fault("no surrounding is named in which the stone is to be good")
	}
	faults = append(faults, p.checkIndices(), p.Limits.check(p))
	return errors.Join(faults...)
}

func (v Variable) check() error {
	switch {
	case math.IsNaN(v.Low) || math.IsInf(v.Low, 0) || math.IsNaN(v.High) || math.IsInf(v.High, 0):
		return fmt.Errorf("%s: the limits %g to %g are not finite", v.Name, v.Low, v.High)
	case v.Low > v.High:
		return fmt.Errorf("%s: the limits %g to %g are the wrong way round", v.Name, v.Low, v.High)
	case !(v.Step >= 0) || math.IsInf(v.Step, 0):
		return fmt.Errorf("%s: a step of %g makes no sense; give a positive one, or 0 for none", v.Name, v.Step)
	case v.Step > 0 && math.Floor(v.High/v.Step+1e-9) < math.Ceil(v.Low/v.Step-1e-9):
		return fmt.Errorf("%s: no multiple of the step %g lies between %g and %g", v.Name, v.Step, v.Low, v.High)
	}
	return nil
}

// checkIndices makes sure that all indices are known over the spectrum.
func (p *Problem) checkIndices() error {
	if p.Material == nil {
		return errors.New("nothing says what the stone is made of: name a material")
	}
	materials := []*gems.Material{p.Material}
	for _, c := range p.Goal.Cases {
		if c.Surrounding.Medium == nil {
			return errors.New("a surrounding without a medium")
		}
		materials = append(materials, c.Surrounding.Medium)
	}
	if p.Limits.MarginIn != nil {
		materials = append(materials, p.Limits.MarginIn)
	}
	for _, m := range materials {
		for _, u := range []float64{0, 1} {
			if _, err := m.Index(gems.SpectrumWavelength(u)); err != nil {
				return err
			}
		}
	}
	return nil
}

// check refuses limits that contradict each other or themselves.
func (l *Limits) check(p *Problem) error {
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	for _, x := range []struct {
		name  string
		value float64
	}{
		{"the girdle's least thickness", l.GirdleMM}, {"the greatest depth", l.MostDepthPercent},
		{"the greatest crown height", l.MostCrownPercent}, {"the least weight", l.LeastCarats},
		{"the least yield", l.LeastYield}, {"the least width of a facet", l.LeastFacetMM},
		{"the margin of the mains", l.MainMargin.Degrees()}, {"the margin of the breaks", l.BreakMargin.Degrees()},
		{"the margin over the cleavage", l.CleavageMargin.Degrees()}, {"the change of length over width", l.KeepRatio},
	} {
		if !(x.value >= 0) || math.IsInf(x.value, 0) {
			fault("%s is %g; give a positive number, or 0 to leave it free", x.name, x.value)
		}
	}
	if l.MostDepthPercent > 0 && l.MostCrownPercent > l.MostDepthPercent {
		fault("a crown of %g %% is allowed and a depth of only %g %%: lower the one or raise the other", l.MostCrownPercent, l.MostDepthPercent)
	}
	if l.LeastYield > 1 {
		fault("a yield of %g: no stone weighs more than its rough; give a share, 0 to 1", l.LeastYield)
	}
	if l.LeastYield > 0 && p.Rough == nil {
		fault("a least yield needs the rough that it is a share of")
	}
	if p.Material != nil && p.Material.Density == 0 {
		if l.LeastCarats > 0 {
			fault("a least weight needs the density of %s, which is not known; leave the limit out", p.Material.Name)
		}
		if slices.ContainsFunc(p.Goal.Aims, func(a Aim) bool { return a.Measure == Weight }) {
			fault("the goal weight needs the density of %s, which is not known", p.Material.Name)
		}
	}
	if (l.MainMargin != 0 || l.BreakMargin != 0) && l.MarginIn == nil {
		fault("a margin over the critical angle needs the medium it is meant for")
	}
	if l.MarginIn != nil && p.Material != nil {
		stone, err := p.Material.Indices(gems.LineD)
		medium, err2 := l.MarginIn.Index(gems.LineD)
		if err == nil && err2 == nil {
			if _, ok := trace.CriticalAngle(stone.Least(), medium); !ok {
				fault("there is no critical angle from %s into %s, so no margin over it; name another medium", p.Material.Name, l.MarginIn.Name)
			}
		}
	}
	if c := l.CleavageNormal; c != nil {
		if d := math.Sqrt(c[0]*c[0] + c[1]*c[1] + c[2]*c[2]); !(math.Abs(d-1) < 1e-6) {
			fault("the cleavage's normal %v is no unit vector", *c)
		}
	} else if l.CleavageMargin > 0 {
		fault("a margin over the cleavage needs the direction of the cleavage: give the plan an axis")
	}
	return errors.Join(faults...)
}

func (p *Problem) names() []string {
	names := make([]string, len(p.Variables))
	for i, v := range p.Variables {
		names[i] = v.Name
	}
	return names
}

// start returns the values as the pattern stands.
func (p *Problem) start() []float64 {
	x := make([]float64, len(p.Variables))
	for i, v := range p.Variables {
		x[i] = v.Now
	}
	return x
}

// wanted returns the measures of the aims, in their order.
func (g *Goal) wanted() []Measure {
	ms := make([]Measure, len(g.Aims))
	for i, a := range g.Aims {
		ms[i] = a.Measure
	}
	return ms
}

// purpose says what sights depend on beside the pattern and the values, so that a
// memory is not read by another problem. Weights do not count: they only weigh what
// was seen.
func (p *Problem) purpose() string {
	var b strings.Builder
	fmt.Fprintf(&b, "%q of %s", p.names(), p.Material.Key)
	fmt.Fprintf(&b, " %v head %v distance %v", p.Goal.wanted(), p.Head, p.Distance)
	for _, c := range p.Goal.Cases {
		fmt.Fprintf(&b, " in %s dish %v %v beyond %v view %v", c.Surrounding.Medium.Key, c.Surrounding.Dish, c.Surrounding.Tiers,
			c.Surrounding.Beyond != nil, c.View)
		if c.Light != nil {
			fmt.Fprintf(&b, " under %s", c.Light.Name)
		}
	}
	l := p.Limits
	margin := ""
	if l.MarginIn != nil {
		margin = l.MarginIn.Key
	}
	cleavage := [3]float64{}
	if l.CleavageNormal != nil {
		cleavage = *l.CleavageNormal
	}
	l.MarginIn, l.CleavageNormal = nil, nil
	fmt.Fprintf(&b, " limits %+v %s %v", l, margin, cleavage)
	if r := p.Rough; r != nil {
		fmt.Fprintf(&b, " rough %v %v scanned %v less %v avoid %v %v axis %v %v", r.Shape, r.Size, r.Scan != nil, r.Allowance,
			r.AvoidPlanes, r.AvoidSpheres, r.Axis, r.StoneAxis)
	}
	for _, v := range p.Variables {
		fmt.Fprintf(&b, " %+v", v)
	}
	return b.String()
}
