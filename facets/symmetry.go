package facets

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"sort"

	"github.com/go-gl/mathgl/mgl64"
)

// Symmetry is how a stone maps to itself about its z axis.
type Symmetry struct {
	Order   int     // turns by 360/Order degrees change nothing; 1 is no symmetry
	Mirrors []Angle // azimuths in [0, 180) degrees of the upright mirror planes, Order of them or none
}

// sameFacet is how far apart the unit normals, and the distances as a share of
// the stone's reach, of two facets that count as images of each other may lie:
// what solving leaves, with a margin.
const sameFacet = 1e-8

// Symmetry finds the stone's symmetry from its planes; what the plan says of
// folds does not matter.
func (s *Stone) Symmetry() Symmetry {
	_, reach := s.reach()
	same := newPlaneSet(s, reach)
	// The order divides the number of facets at each slope, so the slope with
	// the fewest facets gives all candidates.
	few := same.fewest()
	if len(few) == 0 {
		return Symmetry{Order: 1}
	}
	sym := Symmetry{Order: 1}
	for n := len(few); n > 1; n-- {
		if len(few)%n == 0 && same.holds(func(v mgl64.Vec3) mgl64.Vec3 {
			return mgl64.Rotate3DZ(2 * math.Pi / float64(n)).Mul3x1(v)
		}) {
			sym.Order = n
			break
		}
	}
	first := math.Atan2(s.Facets[few[0]].Normal[1], s.Facets[few[0]].Normal[0])
	for _, k := range few {
		n := s.Facets[k].Normal
		at := math.Mod((first+math.Atan2(n[1], n[0]))/2+2*math.Pi, math.Pi)
		if math.Pi-at < 1e-9 {
			at = 0
		}
		sin2, cos2 := math.Sincos(2 * at)
		if same.holds(func(v mgl64.Vec3) mgl64.Vec3 {
			return mgl64.Vec3{cos2*v[0] + sin2*v[1], sin2*v[0] - cos2*v[1], v[2]}
		}) {
			// Two facets half a turn apart give the mirror and its normal; the
			// other mirrors follow from the order.
			for j := range sym.Order {
				m := math.Mod(at+math.Pi*float64(j)/float64(sym.Order), math.Pi)
				if math.Pi-m < 1e-9 {
					m = 0
				}
				sym.Mirrors = append(sym.Mirrors, Angle(m))
			}
			slices.Sort(sym.Mirrors)
			break
		}
	}
	return sym
}

// planeSet finds the facet with a given plane.
type planeSet struct {
	stone *Stone
	reach float64
	byZ   []int // facets in the order of their normal's z
}

func newPlaneSet(s *Stone, reach float64) *planeSet {
	p := &planeSet{s, reach, make([]int, len(s.Facets))}
	for i := range p.byZ {
		p.byZ[i] = i
	}
	slices.SortFunc(p.byZ, func(a, b int) int {
		return cmp.Compare(s.Facets[a].Normal[2],
			s.Facets[b].Normal[2])
	})
	return p
}

// fewest returns the smallest set of facets off the axis that share slope and
// distance.
func (p *planeSet) fewest() []int {
	used := make([]bool, len(p.stone.Facets))
	var best []int
	for _, i := range p.byZ {
		f := &p.stone.Facets[i]
		if used[i] || math.Hypot(f.Normal[0], f.Normal[1]) < 1e-6 {
			continue
		}
		var set []int
		for _, j := range p.byZ {
			g := &p.stone.Facets[j]
			if math.Abs(f.Normal[2]-g.Normal[2]) < sameFacet &&
				math.Abs(f.Distance-g.Distance) < sameFacet*p.reach {
				set = append(set, j)
				used[j] = true
			}
		}
		if best == nil || len(set) < len(best) {
			best = set
		}
	}
	return best
}

// holds reports whether a map takes every facet's plane to a facet's plane.
func (p *planeSet) holds(move func(mgl64.Vec3) mgl64.Vec3) bool {
	for i := range p.stone.Facets {
		f := &p.stone.Facets[i]
		n := move(f.Normal)
		from := sort.Search(len(p.byZ),
			func(k int) bool { return p.stone.Facets[p.byZ[k]].Normal[2] >= n[2]-sameFacet })
		found := false
		for k := from; k < len(p.byZ) && !found; k++ {
			g := &p.stone.Facets[p.byZ[k]]
			if g.Normal[2] > n[2]+sameFacet {
				break
			}
			found = g.Normal.Sub(n).Len() < sameFacet && math.Abs(g.Distance-f.Distance) < sameFacet*p.reach
		}
		if !found {
			return false
		}
	}
	return true
}

// OffTooth is an index that falls between two teeth of a gear.
type OffTooth struct {
	Tier    string
	Index   float64 // as it should be
	Nearest int     // the tooth to use in its place, in [0, gear)
	Off     Angle   // how far the facet is then turned, positive toward higher index
}

// String tells it to the cutter.
func (o OffTooth) String() string {
	return fmt.Sprintf("%s: tooth %d is %.3f° off", facetName(o.Tier, o.Index), o.Nearest,
		math.Abs(o.Off.Degrees()))
}

// OffTeeth returns the facets of a solved plan whose index the gear cannot
// set, in cutting order. Some machines set fractions of a tooth by a cheater;
// that is for the cutter to judge.
func (p *Plan) OffTeeth(sol *Solution) []OffTooth {
	var list []OffTooth
	for i := range p.Tiers {
		t := &p.Tiers[i]
		if sol.Tiers[i].Angle == 0 {
			continue
		}
		for _, x := range sol.Tiers[i].Index {
			if o := offTooth(t.Name, x,
				p.Gear); math.Abs(float64(o.Off)) > sameTooth*2*math.Pi/float64(p.Gear) {
				list = append(list, o)
			}
		}
	}
	return list
}

func offTooth(tier string, index float64, gear int) OffTooth {
	r := math.Round(index)
	return OffTooth{tier, index, int(r) % gear, azimuth(r-index, gear)}
}

// ToGear returns the plan for another index gear, and the facets that fall
// between that gear's teeth. Their indices keep the fraction, so that the
// stone stays the same, unless snap is set: then they move to the nearest
// tooth, and with them the stone's shape.
func (p *Plan) ToGear(gear int, snap bool) (*Plan, []OffTooth, error) {
	if gear < 3 || gear > 1000 {
		return nil, nil, Faults{{File: p.File, Field: "gear", Got: fmt.Sprint(gear),
			Why:    "no index gear has so many teeth",
			Remedy: "give the number of teeth, 3 to 1000"}}
	}
	sol, err := p.Solution()
	if err != nil {
		return nil, nil, err
	}
	ratio := float64(gear) / float64(p.Gear)
	move := func(x float64) float64 {
		y := onGear(x*ratio, float64(gear))
		if 2*y > float64(gear) {
			y -= float64(gear)
		}
		// Halves round away from index 0, so mirror images stay such.
		if r := math.Round(y); snap || math.Abs(y-r) < sameTooth {
			y = r
		}
		return onGear(y, float64(gear))
	}
	q := p.Clone()
	q.Gear = gear
	var off []OffTooth
	at := map[string]int{}
	for i := range q.Tiers {
		t := &q.Tiers[i]
		at[t.Name] = i
		if sol.Tiers[i].Angle != 0 {
			for _, x := range sol.Tiers[i].Index {
				if o := offTooth(t.Name, x*ratio,
					gear); math.Abs(float64(o.Off)) > sameTooth*2*math.Pi/float64(gear) {
					off = append(off, o)
				}
			}
		}
		// A fold that does not divide the gear has to be written out to be snapped.
		if snap && t.Fold > 1 && gear%t.Fold != 0 && len(t.Index) > 0 {
			t.Index, t.Fold, t.Mirror = slices.Clone(sol.Tiers[i].Index), 0, false
		}
		for k, x := range t.Index {
			t.Index[k] = move(x)
		}
	}
	for i := range q.Tiers {
		for _, c := range q.Tiers[i].Stop.Corners {
			for k := range c {
				if !c[k].HasIndex {
					continue
				}
				// The mark follows the facet that it names.
				x := c[k].Index
				c[k].Index = move(x)
				j := at[c[k].Tier]
				old, now := sol.Tiers[j].Index, q.Tiers[j].Indices(gear)
				if n := slices.IndexFunc(old, func(y float64) bool {
					return teethApart(x, y,
						float64(p.Gear)) < sameTooth
				}); n >= 0 &&
					len(old) == len(now) && len(q.Tiers[j].Index) > 0 {
					c[k].Index = now[n]
				}
			}
		}
	}
	return q, off, nil
}
