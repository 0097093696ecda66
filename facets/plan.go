package facets

import (
	"math"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// PlanVersion is the version of the plan file that this program reads and
// writes.
const PlanVersion = 1

// PlanEnding is how the name of a new plan's file ends. Any name is read; by this one
// a desktop knows plans from other TOML files.
const PlanEnding = ".plan.toml"

// FileStem returns the name of a plan's or scan's file without folder and ending:
// "oval" for "stones/oval.plan.toml", "" for no path.
func FileStem(path string) string {
	name := filepath.Base(path)
	if end := len(name) - len(PlanEnding); end > 0 && strings.EqualFold(name[end:], PlanEnding) {
		return name[:end]
	}
	return strings.TrimSuffix(name, filepath.Ext(name))
}

// Limits of a plan file: beyond them it is refused unread.
const (
	MaxPlanBytes  = 1 << 20
	MaxPlanFacets = 2000
)

// AxisName is the name that stands for the stone's axis among the marks of a
// corner.
const AxisName = "axis"

// Plan is a cut plan: what a cutter does, tier by tier. Its lengths are
// relative; the solved stone is scaled so that its width is WidthMM.
type Plan struct {
	File     string // as the user named it; for messages
	Name     string
	Author   string
	Notes    string
	Material MaterialRef
	WidthMM  float64 // of the finished stone, mm
	Gear     int     // teeth on the index gear
	Axis     *Axis   // nil where the plan names none
	Rough    *RoughRef
	Polish   []string // one remark a step
	Tiers    []Tier   // in cutting order

	layout *layout // the text it was read from; nil for a plan that was not read
}

// MaterialRef says what a plan is to be cut from: a key of the material table,
// or a material of the plan's own.
type MaterialRef struct {
	Key     string  // empty where the plan brings its own table
	Name    string  // of the plan's own material
	Index   float64 // refractive index of the plan's own material at the sodium D line
	Density float64 // of the plan's own material, g/cm3; 0 where it names none
	Line    int     // in the plan file; 0 where it was not read
}

// Axis is a direction in the stone to keep an eye on: an optic axis, the acute
// bisectrix of two, or the normal of a cleavage.
type Axis struct {
	Tilt    Angle // from +z
	Azimuth Angle // from +x toward +y

	// Spin turns the plane of two optic axes about their bisectrix: from the plane
	// that holds +z and the bisectrix, right-handed; for a bisectrix along +z from
	// the direction of Azimuth.
	Spin Angle
}

// Directions returns the unit vector along the axis, and one across it that lies in the
// plane of two optic axes. Tilt, Azimuth and Spin are Euler angles about z, y and z.
func (a Axis) Directions() (axis, plane mgl64.Vec3) {
	sinT, cosT := math.Sincos(a.Tilt.Radians())
	sinA, cosA := math.Sincos(a.Azimuth.Radians())
	sinS, cosS := math.Sincos(a.Spin.Radians())
	growing := mgl64.Vec3{cosT * cosA, cosT * sinA, -sinT} // where the axis goes with more tilt
	around := mgl64.Vec3{-sinA, cosA, 0}
	return mgl64.Vec3{sinT * cosA, sinT * sinA, cosT}, growing.Mul(cosS).Add(around.Mul(sinS))
}

// RoughRef is what a plan says about the piece it is to be cut from.
type RoughRef struct {
	Shape        string      // box, cylinder, ellipsoid or scan
	SizeMM       []float64   // box and ellipsoid: three extents; cylinder: diameter and height
	File         string      // of the scan
	AllowanceMM  float64     // for grinding and polish, all round
	HasAllowance bool        // false where the plan leaves the allowance to the program
	Avoid        []RoughFlaw // places to keep out of the stone
}

// RoughFlaw is a place in the rough that the stone must not hold: a ball, or
// all that lies beyond a plane. Positions are in the rough's frame, mm.
type RoughFlaw struct {
	PointMM  [3]float64
	RadiusMM float64    // of the ball; 0 for a plane
	Normal   [3]float64 // of the plane, toward the part to avoid; zero for a ball
}

// Tier is a set of facets that are cut one after the other at one angle and
// one depth.
type Tier struct {
	Name      string
	Side      Side
	Angle     Angle // from the girdle plane, 0 to 90 degrees
	HasAngle  bool  // false where the solver finds the angle from the corners
	Index     []float64
	Fold      int  // each index is repeated this many times round the gear; 0 is once
	Mirror    bool // each index i is joined by -i before it is repeated
	Stop      Stop
	Temporary bool // later cuts may remove its facets
	Note      string
	Stage     string    // preform, cut or polish; empty is cut
	Transfer  *Transfer // the stone is turned just before this tier; nil where it is not
	Line      int       // in the plan file; 0 for a tier that was not read

	block *block
}

// Transfer is the place in a plan where the stone is turned on the dop.
type Transfer struct {
	Note string
	Line int

	block *block
}

// Rule is the way in which a cutter knows that a facet is deep enough.
type Rule int

// The stop rules of a plan.
const (
	NoStop       Rule = iota
	StopDistance      // the plane is Stop.Value from the origin
	StopCentre        // the plane crosses the axis Stop.Value from z = 0
	StopMeet          // the plane passes through Stop.Corners
	StopLevel         // its edge on the girdle facet at its own index lies at height Stop.Value
	StopEdge          // its edge with tier Stop.With lies at height Stop.Value
	StopGirdle        // it leaves Stop.Value of the girdle facet at its own index
	StopTable         // the flat is Stop.Value wide, as a share of the stone's width
	StopCulet         // likewise, below
)

var ruleWords = [...]string{"", "distance", "centre", "meet", "level", "edge", "girdle", "table", "culet"}

// String returns the rule's key in a plan file.
func (r Rule) String() string { return ruleWords[r] }

// Stop is the stop rule of a tier.
type Stop struct {
	Rule    Rule
	Value   float64  // plan units, or a share of the width
	With    string   // name of the other tier, of StopEdge
	Corners [][]Mark // of StopMeet: the marks of each corner
	Line    int
}

// Mark is one of the planes that make a corner.
type Mark struct {
	Tier     string // or AxisName
	Index    float64
	HasIndex bool // false stands for the tier's facets nearest to the own index
}

// String returns the mark as plan files write it: P1@6, or P1.
func (m Mark) String() string {
	if !m.HasIndex {
		return m.Tier
	}
	return m.Tier + "@" + number(m.Index)
}

// Clone returns a copy that can be changed without changing the original.
func (p *Plan) Clone() *Plan {
	c := *p
	c.Polish = slices.Clone(p.Polish)
	if p.Axis != nil {
		a := *p.Axis
		c.Axis = &a
	}
	if p.Rough != nil {
		r := *p.Rough
		r.SizeMM, r.Avoid = slices.Clone(r.SizeMM), slices.Clone(r.Avoid)
		c.Rough = &r
	}
	c.Tiers = slices.Clone(p.Tiers)
	for i := range c.Tiers {
		t := &c.Tiers[i]
		t.Index = slices.Clone(t.Index)
		t.Stop.Corners = slices.Clone(t.Stop.Corners)
		for j := range t.Stop.Corners {
			t.Stop.Corners[j] = slices.Clone(t.Stop.Corners[j])
		}
		if t.Transfer != nil {
			x := *t.Transfer
			t.Transfer = &x
		}
	}
	return &c
}

// Indices returns all the teeth of a tier on the given gear, each in [0, gear),
// in cutting order: each index, repeated round the gear, then its mirror
// images. Where the tier has no index it is [0]: for a flat it does not matter.
func (t *Tier) Indices(gear int) []float64 {
	base := t.Index
	if len(base) == 0 {
		base = []float64{0}
	}
	return expand(base, t.Fold, t.Mirror, gear)
}

// sameTooth is the distance, in teeth, within which two indices are one place:
// far above the rounding of a fold's division, far below any gear's tooth.
const sameTooth = 1e-7

// expand repeats indices by fold and mirror, without duplicates.
func expand(base []float64, fold int, mirror bool, gear int) []float64 {
	g := float64(gear)
	var all []float64
	seen := map[int64]bool{}
	add := func(i float64) {
		i = onGear(i, g)
		place := func(i float64) int64 { return int64(math.Round(i / sameTooth)) }
		// Neighbouring places, also across index 0, are the same tooth.
		for _, j := range [...]float64{i, i - g, i + g} {
			for step := int64(-1); step <= 1; step++ {
				if seen[place(j)+step] {
					return
				}
			}
		}
		seen[place(i)] = true
		all = append(all, i)
	}
	for _, i := range base {
		for _, sign := range []float64{1, -1} {
			if sign < 0 && !mirror {
				continue
			}
			for k := range max(1, fold) {
				add(sign*i + float64(k)*g/float64(max(1, fold)))
			}
		}
	}
	return all
}

// onGear returns the index in [0, gear), with teeth that differ from a whole
// number by rounding alone made whole.
func onGear(i, gear float64) float64 {
	i = math.Mod(i, gear)
	if i < 0 {
		i += gear
	}
	if r := math.Round(i); math.Abs(i-r) < 1e-9 {
		i = r
	}
	if i >= gear {
		i -= gear
	}
	return i + 0 // never -0
}

// teethApart returns the distance between two indices the short way round.
func teethApart(i, j, gear float64) float64 {
	d := math.Mod(math.Abs(i-j), gear)
	return math.Min(d, gear-d)
}

// azimuth returns the azimuth of an index.
func azimuth(index float64, gear int) Angle {
	return Angle(2 * math.Pi * index / float64(gear))
}

// number writes a number in the shortest way that reads back to it.
func number(v float64) string {
	s := strconv.FormatFloat(v, 'f', -1, 64)
	if len(strings.TrimLeft(s, "-0.")) > 17 || len(s) > 21 {
		s = strconv.FormatFloat(v, 'e', -1, 64)
	}
	return s
}

// degrees writes an angle in degrees in the shortest way that reads back to
// it.
func degrees(a Angle) string {
	for range 2 {
		for digits := 1; digits <= 17; digits++ {
			s := strconv.FormatFloat(a.Degrees(), 'g', digits, 64)
			if v, err := strconv.ParseFloat(s, 64); err == nil && Angle(v)*Degree == a {
				return number(v)
			}
		}
		// No decimal falls on this very angle: take the next one that has one.
		v, _ := strconv.ParseFloat(strconv.FormatFloat(a.Degrees(), 'g', 17, 64), 64)
		a = Angle(v) * Degree
	}
	return number(a.Degrees())
}
