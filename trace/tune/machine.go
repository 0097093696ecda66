package tune

import (
	"fmt"
	"math"
	"math/rand/v2"
	"slices"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// Machine is how far a machine and a hand miss. All but Overcut are standard deviations
// of normal errors about what the plan says.
type Machine struct {
	DopTilt facets.Angle // of each side: about each of two level axes, when the stone is turned on the dop
	Twist   facets.Angle // of each side: about the stone's axis, likewise
	ShiftMM float64      // of each side: along each of two level axes, likewise
	Angle   facets.Angle // of each tier
	Index   facets.Angle // of each tier, in azimuth
	// Overcut is the most that a facet is cut too deep, in mm: even from 0 to it, since
	// what was cut too little is cut on.
	OvercutMM float64
}

// UsualMachine returns errors that are common practice, no source.
func UsualMachine() Machine {
	return Machine{
		DopTilt: 0.2 * facets.Degree, Twist: 0.3 * facets.Degree, ShiftMM: 0.03,
		Angle: 0.1 * facets.Degree, Index: 0.1 * facets.Degree, OvercutMM: 0.02,
	}
}

// UsualMachineSource says where the numbers of UsualMachine come from.
const UsualMachineSource = "common practice, no source"

// scaled returns the machine with all errors larger by a factor.
func (m Machine) scaled(by float64) Machine {
	return Machine{m.DopTilt * facets.Angle(by), m.Twist * facets.Angle(by), m.ShiftMM * by,
		m.Angle * facets.Angle(by), m.Index * facets.Angle(by), m.OvercutMM * by}
}

func (m Machine) check() error {
	for _, x := range []struct {
		name        string
		value, most float64
	}{
		{"dop tilt", m.DopTilt.Degrees(), 10}, {"twist", m.Twist.Degrees(), 10}, {"shift", m.ShiftMM, 10},
		{"angle", m.Angle.Degrees(), 10}, {"index", m.Index.Degrees(), 10}, {"overcut", m.OvercutMM, 10},
	} {
		if !(x.value >= 0 && x.value <= x.most) {
			return fmt.Errorf("machine error %s %g: use 0 to %g", x.name, x.value, x.most)
		}
	}
	return nil
}

// bench is a solved plan, ready to be cut with errors.
type bench struct {
	plan   *facets.Plan
	solved *facets.Solution
	planes [][]facets.Plane // by tier, mm; none for tiers that leave no facet
	middle [][]mgl64.Vec3   // of the facet that each plane leaves in the finished stone
	side   []int            // by tier: 0 before the stone is turned, 1 after
	turned int              // the side that moves when the stone is turned: the one without the table
	about  mgl64.Vec3       // the point that the dop tilts about
	corner [][]place        // facets that share a corner by plan, four or more
}

// place names a facet by its tier and its number in the tier.
type place struct{ tier, number int }

func newBench(plan *facets.Plan) (*bench, error) {
	solved, err := plan.Solution()
	if err != nil {
		return nil, err
	}
	b := &bench{plan: plan, solved: solved}
	// The finished facets, by what cut them. Planes that left none are not cut with errors:
	// they are trial cuts and preforms that later cuts take off.
	found := map[int]place{} // by facet of the stone
	turn := 0
	for i := range plan.Tiers {
		if t := &plan.Tiers[i]; t.Transfer != nil {
			turn = 1 - turn
		}
		b.side = append(b.side, turn)
		var planes []facets.Plane
		var middles []mgl64.Vec3
		for _, p := range solved.Planes(plan, i) {
			for k := range solved.Stone.Facets {
				f := &solved.Stone.Facets[k]
				if f.Normal.Sub(p.Normal).Len() < samePlane && math.Abs(f.Distance-p.Distance) < samePlane*plan.WidthMM {
					if _, taken := found[k]; !taken {
						found[k] = place{i, len(planes)}
						planes, middles = append(planes, p), append(middles, centroid(solved.Stone, f))
					}
					break
				}
			}
		}
		b.planes, b.middle = append(b.planes, planes), append(b.middle, middles)
	}
	if turn == 0 && !slices.ContainsFunc(plan.Tiers, func(t facets.Tier) bool { return t.Transfer != nil }) {
		// A plan that says nothing is turned where the side changes.
		for i := range plan.Tiers {
			b.side[i] = 0
			if s := plan.Tiers[i].Side; s == facets.Crown || s == facets.Table {
				b.side[i] = 1
			}
		}
	}
	for i := range plan.Tiers {
		if plan.Tiers[i].Side == facets.Table {
			b.turned = 1 - b.side[i]
		}
	}
	h := solved.Stone.Measure().GirdleHeightMM.Middle
	b.about = mgl64.Vec3{0, 0, h}
	b.corners(found)
	return b, nil
}

// samePlane is how near two planes are one, as a share of the stone's size: far above
// rounding, far below anything that is cut.
const samePlane = 1e-7

// centroid returns the middle of a facet's area.
func centroid(s *facets.Stone, f *facets.Facet) mgl64.Vec3 {
	var sum mgl64.Vec3
	total := 0.0
	a := s.Corners[f.Corners[0]]
	for i := 1; i+1 < len(f.Corners); i++ {
		b, c := s.Corners[f.Corners[i]], s.Corners[f.Corners[i+1]]
		area := b.Sub(a).Cross(c.Sub(a)).Len()
		sum = sum.Add(a.Add(b).Add(c).Mul(area / 3))
		total += area
	}
	if total == 0 {
		return a
	}
	return sum.Mul(1 / total)
}

// corners finds where four facets or more meet by plan.
func (b *bench) corners(found map[int]place) {
	s := b.solved.Stone
	meet := make([][]place, len(s.Corners))
	for k := range s.Facets {
		p, ok := found[k]
		if !ok {
			continue
		}
		for _, c := range s.Facets[k].Corners {
			meet[c] = append(meet[c], p)
		}
	}
	for _, list := range meet {
		if len(list) > 3 {
			b.corner = append(b.corner, list)
		}
	}
}

// slips is one draw of everything that may go wrong, in units of the machine's errors.
type slips struct {
	tilt, shift [2]float64
	twist       float64
	angle       []float64   // by tier
	index       []float64   // by tier
	overcut     [][]float64 // by tier and facet, 0 to 1
}

// draw draws errors. The n-th draw of a seed is always the same.
func (b *bench) draw(seed uint64, n int) slips {
	rng := rand.New(rand.NewPCG(seed, uint64(n)))
	e := slips{
		tilt: [2]float64{rng.NormFloat64(), rng.NormFloat64()}, shift: [2]float64{rng.NormFloat64(), rng.NormFloat64()},
		twist: rng.NormFloat64(),
	}
	for i := range b.planes {
		e.angle = append(e.angle, rng.NormFloat64())
		e.index = append(e.index, rng.NormFloat64())
		cuts := make([]float64, len(b.planes[i]))
		for k := range cuts {
			cuts[k] = rng.Float64()
		}
		e.overcut = append(e.overcut, cuts)
	}
	return e
}

// slipsOf returns no error at all.
func slipsOf(b *bench) slips {
	s := slips{angle: make([]float64, len(b.planes)), index: make([]float64, len(b.planes))}
	for i := range b.planes {
		s.overcut = append(s.overcut, make([]float64, len(b.planes[i])))
	}
	return s
}

// cutting is a stone cut with errors.
type cutting struct {
	stone *facets.Stone
	gapMM float64 // the deepest miss where facets should meet in one corner: see Draw
	edge  float64 // mm, the longest edge where there should be a corner
	lost  int     // facets that the others took off
}

// cut cuts the stone with errors. A tier's angle and index turn each of its facets about
// the facet's own middle: a cutter brings a facet to its corners and spreads what is
// left over. Turning the stone on the dop moves all of one side against the other.
func (b *bench) cut(m Machine, e *slips) (*cutting, error) {
	toDop := mgl64.QuatRotate(m.DopTilt.Radians()*e.tilt[0], mgl64.Vec3{1, 0, 0}).
		Mul(mgl64.QuatRotate(m.DopTilt.Radians()*e.tilt[1], mgl64.Vec3{0, 1, 0})).
		Mul(mgl64.QuatRotate(m.Twist.Radians()*e.twist, mgl64.Vec3{0, 0, 1}))
	shift := mgl64.Vec3{m.ShiftMM * e.shift[0], m.ShiftMM * e.shift[1], 0}
	var planes []facets.Plane
	first := make([]int, len(b.planes))
	for i := range b.planes {
		first[i] = len(planes)
		t := &b.plan.Tiers[i]
		for k, p := range b.planes[i] {
			through := b.middle[i][k]
			p.Normal = b.tilted(t, p.Normal, m.Angle*facets.Angle(e.angle[i]), m.Index*facets.Angle(e.index[i]))
			p.Distance = p.Normal.Dot(through) - m.OvercutMM*e.overcut[i][k]
			if b.side[i] == b.turned {
				// x goes to R(x - about) + about + shift.
				d := p.Distance - p.Normal.Dot(b.about)
				p.Normal = toDop.Rotate(p.Normal).Normalize()
				p.Distance = d + p.Normal.Dot(b.about.Add(shift))
			}
			planes = append(planes, p)
		}
	}
	stone, err := facets.FromPlanes(b.plan.Name, planes)
	if err != nil {
		return nil, err
	}
	c := &cutting{stone: stone}
	return c, b.gaps(c, planes, first)
}

// tilted returns a facet's normal at another angle and azimuth. The table and other flats
// have no azimuth: their error of angle tips them toward index 0, that of the index
// across it.
func (b *bench) tilted(t *facets.Tier, n mgl64.Vec3, angle, index facets.Angle) mgl64.Vec3 {
	level := math.Hypot(n[0], n[1])
	if level < 1e-9 {
		s := math.Copysign(1, n[2])
		return mgl64.Vec3{math.Sin(angle.Radians()), math.Sin(index.Radians()), s}.Normalize()
	}
	from := math.Atan2(level, math.Abs(n[2])) + angle.Radians() // from the girdle plane
	azimuth := math.Atan2(n[1], n[0]) + index.Radians()
	z := math.Cos(from)
	if t.Side == facets.Pavilion {
		z = -z
	}
	return mgl64.Vec3{math.Sin(from) * math.Cos(azimuth), math.Sin(from) * math.Sin(azimuth), z}
}

// miss returns how far planes are from a common point: the spread of their distances from
// the point that is nearest to all of them by least squares.
func miss(planes []facets.Plane) float64 {
	var normal mgl64.Mat3
	var right mgl64.Vec3
	for _, p := range planes {
		n := p.Normal
		normal = normal.Add(n.OuterProd3(n))
		right = right.Add(n.Mul(p.Distance))
	}
	x := normal.Inv().Mul3x1(right)
	low, high := math.Inf(1), math.Inf(-1)
	for _, p := range planes {
		off := p.Distance - p.Normal.Dot(x)
		low, high = min(low, off), max(high, off)
	}
	return high - low
}

// gaps measures how far facets miss the corners that they should share, and counts
// facets that are gone.
func (b *bench) gaps(c *cutting, planes []facets.Plane, first []int) error {
	// FromPlanes keeps the order of the planes and leaves out those that take nothing off.
	number := make([]int, 0, len(c.stone.Facets)) // by facet: its plane
	at := 0
	for i := range c.stone.Facets {
		f := &c.stone.Facets[i]
		for at < len(planes) && (planes[at].Tier != f.Tier || planes[at].Normal.Sub(f.Normal).Len() > 1e-9) {
			at++
		}
		if at == len(planes) {
			return fmt.Errorf("facet %d of the cut stone belongs to no plane", i)
		}
		number = append(number, at)
		at++
	}
	c.lost = len(planes) - len(c.stone.Facets)
	around := make([][]int, len(c.stone.Corners))
	for i, f := range c.stone.Facets {
		for _, k := range f.Corners {
			around[k] = append(around[k], number[i])
		}
	}
	byPlane := make([][]int, len(planes)) // corners of the stone
	for k, list := range around {
		for _, p := range list {
			byPlane[p] = append(byPlane[p], k)
		}
	}
	for _, corner := range b.corner {
		members := make([]int, len(corner))
		meeting := make([]facets.Plane, len(corner))
		for i, p := range corner {
			members[i] = first[p.tier] + p.number
			meeting[i] = planes[members[i]]
		}
		c.gapMM = max(c.gapMM, miss(meeting))
		var split []mgl64.Vec3
		for _, p := range members {
			for _, k := range byPlane[p] {
				if !slices.ContainsFunc(around[k], func(q int) bool { return !slices.Contains(members, q) }) {
					split = append(split, c.stone.Corners[k])
				}
			}
		}
		for i, x := range split {
			for _, y := range split[:i] {
				c.edge = max(c.edge, x.Sub(y).Len())
			}
		}
	}
	return nil
}
