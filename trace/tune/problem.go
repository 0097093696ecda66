package tune

import (
	"errors"
	"fmt"
	"math"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Measure is something a stone can be good or bad at.
type Measure int

// The measures. All but Weight are shares of the outline's rays, 0 to 1.
const (
	LightReturn  Measure = iota // returned, of the ledger
	Leakage                     // leaked, of the ledger
	HeadShade                   // what the viewer's head darkens
	LeakyArea                   // share of rays with leaked > 0.5
	WindowedArea                // share of rays that see through the pavilion
	Weight                      // carats of the finished stone at the pattern's width
	measures
)

var measureWords = [...]string{"return", "leakage", "head", "leaky", "windowed", "weight"}

// String returns the measure's word on the command line.
func (m Measure) String() string { return measureWords[m] }

// ParseMeasure reads a measure's word.
func ParseMeasure(word string) (Measure, error) {
	for i, w := range measureWords {
		if w == word {
			return Measure(i), nil
		}
	}
	return 0, fmt.Errorf("there is no goal %q; choose from %v", word, measureWords)
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
}

// Goal is what a stone is to be good at: the weighted sum of its aims, in all cases.
type Goal struct {
	Aims  []Aim
	Cases []Case
	Worst bool // the worst case counts; otherwise their mean
}

// Limits are what the lap, the rough and the owner demand. A zero field demands
// nothing, except SmallestFacetMM, for which see there.
type Limits struct {
	GirdleMM         float64      // least thickness of the girdle anywhere
	MostDepthPercent float64      // greatest depth over width
	MostCrownPercent float64      // greatest crown height over width
	LeastCarats      float64      // least weight
	LeastFacetMM     float64      // least width of the narrowest facet
	MainMargin       facets.Angle // least angle of pavilion facets that reach the lowest point over the critical angle
	BreakMargin      facets.Angle // likewise of all other pavilion facets
	MarginIn         *gems.Material
	CleavageNormal   *[3]float64  // unit, in the stone's frame; no facet may lie within CleavageMargin of it
	CleavageMargin   facets.Angle // 5 degrees is common practice, no source
	KeepRatio        float64      // greatest change of length over width, as a share; 0 demands nothing
}

// Problem is a pattern, what may change in it, the goal and the limits.
type Problem struct {
	Pattern   Pattern
	Variables []Variable
	Material  *gems.Material
	Goal      Goal
	Limits    Limits
	Head      facets.Angle // half-angle of the viewer's head
	Seed      uint64
	Workers   int // 0 for all cores
}

// check refuses a problem that means nothing.
func (p *Problem) check() error {
	var faults []error
	fault := func(format string, args ...any) { faults = append(faults, fmt.Errorf(format, args...)) }
	if len(p.Variables) == 0 {
		fault("nothing may be varied: name at least one tier or proportion")
	}
	for _, v := range p.Variables {
		switch {
		case !(v.Low <= v.High):
			fault("%s: the limits %g to %g are the wrong way round", v.Name, v.Low, v.High)
		case math.IsInf(v.Low, 0) || math.IsInf(v.High, 0):
			fault("%s: a limit is not finite", v.Name)
		case !(v.Step >= 0):
			fault("%s: a step of %g makes no sense; give a positive one, or 0 for none", v.Name, v.Step)
		case v.Step > 0 && math.Floor(v.High/v.Step+1e-9) < math.Ceil(v.Low/v.Step-1e-9):
			fault("%s: no multiple of the step %g lies between %g and %g", v.Name, v.Step, v.Low, v.High)
		}
	}
	if len(p.Goal.Aims) == 0 {
		fault("no goal is named; choose from %v", measureWords)
	}
	for _, a := range p.Goal.Aims {
		if a.Weight == 0 || math.IsNaN(a.Weight) || math.IsInf(a.Weight, 0) {
			fault("the goal %v has weight %v; give a number other than 0", a.Measure, a.Weight)
		}
	}
	if len(p.Goal.Cases) == 0 {
		fault("no surrounding is named in which the stone is to be good")
	}
	if (p.Limits.MainMargin != 0 || p.Limits.BreakMargin != 0) && p.Limits.MarginIn == nil {
		fault("a margin over the critical angle needs the medium it is meant for")
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
