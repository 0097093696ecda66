package facets

import (
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// VisibleGap is the width of the smallest step that a cutter sees at the lap,
// mm (common practice, no source). Planes that should share a corner and miss
// it by more are a fault; by less, a note.
const VisibleGap = 0.02

// noteworthyGap is the gap in mm above which a miss is noted at all: angles
// written to a hundredth of a degree stay below VisibleGap and above this.
const noteworthyGap = 1e-6

// Solution is a solved plan.
type Solution struct {
	Stone *Stone
	Scale float64      // mm per plan unit
	Tiers []SolvedTier // one a tier of the plan
	Gaps  []Gap        // near misses, none above VisibleGap
}

// SolvedTier is what solving found for a tier.
type SolvedTier struct {
	Angle    Angle     // from the girdle plane
	Index    []float64 // all its teeth in cutting order, in [0, gear); [0] for a flat
	Distance float64   // of its planes from the origin, plan units
}

// Gap is a miss between planes that nearly share a corner.
type Gap struct {
	Tier  string  // that was to pass through the corner; empty for a short edge of the finished stone
	Index float64 // of its facet
	With  string  // the corner, or the facets at the short edge
	MM    float64
}

// Solve cuts the plan and returns the stone, in mm. Errors are Faults: all that
// were found.
func (p *Plan) Solve() (*Stone, error) {
	s, err := p.Solution()
	if err != nil {
		return nil, err
	}
	return s.Stone, nil
}

// flatTries is how often a plan with table or culet rules is cut again when
// later tiers change the flat. The share at the end is piecewise linear in the
// depth of the cut, so a few secant steps suffice; halving as a last resort
// gives a bit a time.
const flatTries = 48

// flatTolerance is how near a flat's share of the width comes to the plan's.
const flatTolerance = 1e-12

// Solution cuts the plan and returns the stone with all that was found on the
// way. Errors are Faults: all that were found.
func (p *Plan) Solution() (*Solution, error) {
	if err := p.check(); err != nil {
		return nil, err
	}
	unit := p.unit()
	aims := map[int]*aim{} // by tier
	for i := range p.Tiers {
		if t := &p.Tiers[i]; t.Stop.Rule == StopTable || t.Stop.Rule == StopCulet {
			aims[i] = &aim{want: t.Stop.Value, share: t.Stop.Value, high: 1}
		}
	}
	rescaled := false
	for range flatTries {
		v := newSolver(p, unit, aims)
		v.run()
		if err := v.faults.Err(); err != nil {
			if retreated(aims) {
				continue
			}
			return nil, err
		}
		// The tolerances are shares of the solid's unit, so that must be the stone's size.
		if _, reach := v.stone(1).reach(); !rescaled && (reach > 8 || reach < 0.125) {
			unit *= reach
			rescaled = true
			continue
		}
		if v.flatsReached() {
			return v.finish()
		}
	}
	f := &Fault{File: p.File, Why: "the flats cannot be made as wide as the plan wants",
		Remedy: "cut the table and the culet after the tiers beside them"}
	for i := range p.Tiers {
		if aims[i] != nil {
			f.Tier, f.Line, f.Field = p.Tiers[i].Name, p.Tiers[i].Stop.Line, p.Tiers[i].Stop.Rule.String()
		}
	}
	return nil, Faults{f}
}

// aim searches for the share of the width at which a flat is to be cut so that
// it has the wanted share in the end, when later facets have cut it back.
type aim struct {
	want      float64
	share     float64 // to cut at
	low, high float64 // shares known to end too narrow and too wide
	lastShare float64 // of the cut before, 0 if there was none
	lastEnd   float64
}

// ended takes the share that the flat had in the end and sets the next one.
func (a *aim) ended(end float64) (reached bool) {
	if math.Abs(end-a.want) <= flatTolerance {
		return true
	}
	if end < a.want {
		a.low = math.Max(a.low, a.share)
	} else {
		a.high = math.Min(a.high, a.share)
	}
	next := a.share * a.want / end
	if a.lastShare > 0 && end != a.lastEnd {
		next = a.share + (a.want-end)*(a.share-a.lastShare)/(end-a.lastEnd)
	}
	a.lastShare, a.lastEnd = a.share, end
	if !(next > a.low && next < a.high) {
		next = (a.low + a.high) / 2
	}
	a.share = next
	return false
}

// retreated takes back the shares that led to faults which the plan's own did
// not: they were too wide. It reports false if all are the plan's own.
func retreated(aims map[int]*aim) bool {
	any := false
	for _, a := range aims {
		if a.share != a.want {
			a.high = a.share
			a.share = (a.low + a.high) / 2
			any = true
		}
	}
	return any
}

// check looks at what a plan that was changed after reading, or never read,
// may have wrong and solving cannot stand.
func (p *Plan) check() error {
	var fs Faults
	bad := func(t *Tier, field, got, why, remedy string) {
		f := &Fault{File: p.File, Field: field, Got: got, Why: why, Remedy: remedy}
		if t != nil {
			f.Tier, f.Line = t.Name, t.Line
		}
		fs = append(fs, f)
	}
	if p.Gear < 1 {
		bad(nil, "gear", fmt.Sprint(p.Gear), "the gear has no teeth", "give the number of teeth")
	}
	if !(p.WidthMM > 0) || math.IsInf(p.WidthMM, 0) {
		bad(nil, "width_mm", number(p.WidthMM), "this is no width", "give mm")
	}
	if len(p.Tiers) == 0 {
		bad(nil, "", "", "the plan has no tier", "add one")
	}
	total := 0
	for i := range p.Tiers {
		t := &p.Tiers[i]
		if t.HasAngle && !(t.Angle >= 0 && t.Angle <= 90*Degree*(1+1e-12)) {
			bad(t, "angle", number(t.Angle.Degrees()), "the angle is impossible",
				"give 0 to 90 degrees, measured from the girdle plane")
		}
		if math.IsNaN(t.Stop.Value) || math.Abs(t.Stop.Value) > 1e9 {
			bad(t, t.Stop.Rule.String(), number(t.Stop.Value), "this is not a finite number of sensible size",
				"give a length")
		}
		for _, x := range t.Index {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				bad(t, "index", number(x), "this is no index", "give a tooth")
			}
		}
		if t.Stop.Rule == NoStop {
			bad(t, "", "", "nothing says how deep the tier is cut", "give it a stop rule")
		}
		if t.Stop.Rule == StopMeet && (len(t.Stop.Corners) == 0 || slices.ContainsFunc(t.Stop.Corners,
			func(c []Mark) bool { return len(c) == 0 })) {
			bad(t, "meet", "", "it names no corner", "name three planes")
		}
		if t.Side < Pavilion || t.Side > Table {
			bad(t, "side", fmt.Sprint(int(t.Side)), "there is no such side",
				"it may be pavilion, girdle, crown or table")
		}
		if total += max(1, len(t.Index)) * max(1, t.Fold); total > MaxPlanFacets {
			bad(t, "", "", fmt.Sprintf("the plan has more than %d facets", MaxPlanFacets), "leave some out")
			break
		}
	}
	return fs.Err()
}

// unit returns a length of the plan that is about the stone's size.
func (p *Plan) unit() float64 {
	most := 0.0
	for i := range p.Tiers {
		t := &p.Tiers[i]
		if t.Stop.Rule == StopDistance || t.Stop.Rule == StopCentre {
			most = math.Max(most, math.Abs(t.Stop.Value))
		}
	}
	if most == 0 {
		return 1
	}
	return most
}

// solver cuts one plan once. Lengths are in the solid's unit until finish.
type solver struct {
	plan   *Plan
	unit   float64 // plan units in one of the solid's
	aims   map[int]*aim
	solid  *solid
	tiers  []SolvedTier
	byName map[string]int
	planes []Plane // one a cut, in the order of the solid's faces after the block's
	tierOf []int   // by cut
	first  []int   // by tier: its first cut, -1 if it failed
	took   []bool  // by cut: whether it took anything off
	lostTo []int   // by cut: 1 + the tier that took the facet off
	pend   []Gap   // in the solid's unit
	faults Faults
	failed bool

	corners cornerList
}

func newSolver(p *Plan, unit float64, aims map[int]*aim) *solver {
	v := &solver{
		plan: p, unit: unit, aims: aims, solid: newSolid(), corners: cornerList{stale: true},
		byName: map[string]int{},
		tiers:  make([]SolvedTier, len(p.Tiers)), first: make([]int, len(p.Tiers)),
	}
	for i := range v.first {
		v.first[i] = -1
	}
	return v
}

func (v *solver) fault(t *Tier, field, got, why, remedy string) {
	line := t.Line
	if field == t.Stop.Rule.String() && t.Stop.Line > 0 {
		line = t.Stop.Line
	}
	v.faults = append(v.faults, &Fault{
		File: v.plan.File, Line: line, Tier: t.Name, Field: field, Got: got, Why: why, Remedy: remedy,
	})
}

// run cuts all tiers. A tier that fails is left out; what depends on it is not
// reported again.
func (v *solver) run() {
	for i := range v.plan.Tiers {
		t := &v.plan.Tiers[i]
		if v.place(i) {
			v.cutTier(i)
		} else {
			v.failed = true
		}
		if _, ok := v.byName[t.Name]; !ok {
			v.byName[t.Name] = i
		}
	}
	if v.failed {
		return
	}
	if left := v.solid.open(); len(left) > 0 {
		v.faults = append(v.faults, &Fault{File: v.plan.File, Why: "the solid stays open toward " +
			directions(left),
			Remedy: "add the tiers that close it there"})
		return
	}
	v.removed()
}

// place finds angle, indices and distance of a tier.
func (v *solver) place(i int) bool {
	t := &v.plan.Tiers[i]
	got := &v.tiers[i]
	got.Angle = t.Angle
	got.Index = t.Indices(v.plan.Gear)
	if t.Stop.Rule == StopMeet {
		return v.meet(i)
	}
	if !t.HasAngle {
		v.fault(t, "angle", "", "the angle is missing and cannot be found",
			"give it, or name two corners in meet")
		return false
	}
	if len(t.Index) == 0 && t.Angle != 0 {
		v.fault(t, "index", "", "the index is missing and cannot be found", "give it")
		return false
	}
	switch t.Stop.Rule {
	case StopTable, StopCulet:
		return v.flat(i)
	}
	for k, index := range got.Index {
		d, ok := v.stop(t, got.Angle, index)
		if !ok {
			return false
		}
		if k == 0 {
			got.Distance = d * v.unit
		} else if gap := math.Abs(d - got.Distance/v.unit); gap > weldTolerance {
			v.pend = append(v.pend, Gap{t.Name, index, "its place by the rule " + t.Stop.Rule.String(), gap})
		}
	}
	return true
}

// up is +1 on the crown side and -1 on the pavilion side.
func up(side Side) float64 {
	if side == Pavilion {
		return -1
	}
	return 1
}

// normal returns the normal of a tier's facet.
func (v *solver) normal(t *Tier, angle Angle, index float64) mgl64.Vec3 {
	if t.Side == Table || angle == 0 {
		return mgl64.Vec3{0, 0, up(t.Side)}
	}
	sinF, cosF := math.Sincos(azimuth(index, v.plan.Gear).Radians())
	if t.Side == Girdle {
		return mgl64.Vec3{cosF, sinF, 0}
	}
	sinA, cosA := math.Sincos(angle.Radians())
	return mgl64.Vec3{sinA * cosF, sinA * sinF, up(t.Side) * cosA}
}

// stop returns the distance at which a rule that needs no corner stops the
// facet at an index.
func (v *solver) stop(t *Tier, angle Angle, index float64) (float64, bool) {
	sinA, cosA := math.Sincos(angle.Radians())
	value := t.Stop.Value / v.unit
	s := up(t.Side)
	switch t.Stop.Rule {
	case StopDistance:
		return value, true
	case StopCentre:
		if cosA < 1e-9 {
			v.fault(t, "centre", number(t.Stop.Value), "an upright facet never crosses the axis",
				"use distance or meet")
			return 0, false
		}
		return cosA * value, true
	case StopLevel:
		g, ok := v.girdleAt(t, index)
		if !ok {
			return 0, false
		}
		return sinA*v.solid.faces[g].distance + s*cosA*value, true
	case StopGirdle:
		g, ok := v.girdleAt(t, index)
		if !ok {
			return 0, false
		}
		r := v.solid.faces[g].distance
		z, ok := v.otherEdge(v.solid.middleOf(g), -s)
		if !ok {
			v.fault(t, "girdle", number(t.Stop.Value), "the other side of the girdle is not cut yet",
				"cut it first, or stop by level")
			return 0, false
		}
		return sinA*r + s*cosA*(z+s*value), true
	case StopEdge:
		return v.edge(t, sinA, s*cosA, index)
	}
	v.fault(t, "", "", "nothing says how deep the tier is cut", "give it a stop rule")
	return 0, false
}

// girdleAt returns the girdle face at an index.
func (v *solver) girdleAt(t *Tier, index float64) (int, bool) {
	best := -1
	var there []string
	for k := range v.planes {
		if p := &v.planes[k]; p.Side == Girdle && v.solid.lives(boxFaces+k) {
			if teethApart(p.Index, index, float64(v.plan.Gear)) < sameTooth {
				best = boxFaces + k
			}
			there = append(there, facetName(p.Tier, p.Index))
		}
	}
	if best < 0 && !v.failed {
		v.fault(t, t.Stop.Rule.String(), number(t.Stop.Value),
			fmt.Sprintf("no girdle facet stands at index %s", number(index)),
			"use meet, or an index of the girdle; there are "+several(there))
	}
	return best, best >= 0
}

// middleOf returns a point in the upright line that halves an upright face,
// seen from outside. The foot of its normal may lie beside the face.
func (s *solid) middleOf(g int) mgl64.Vec3 {
	f := &s.faces[g]
	along := mgl64.Vec3{-f.normal[1], f.normal[0], 0}
	low, high := math.Inf(1), math.Inf(-1)
	for _, c := range f.ring {
		u := along.Dot(s.corners[c])
		low, high = math.Min(low, u), math.Max(high, u)
	}
	return f.normal.Mul(f.distance).Add(along.Mul((low + high) / 2))
}

// otherEdge returns the height at which the faces that look down (toward < 0)
// or up bound the upright line through p.
func (v *solver) otherEdge(p mgl64.Vec3, toward float64) (z float64, found bool) {
	for k := boxFaces; k < len(v.solid.faces); k++ {
		f := &v.solid.faces[k]
		if nz := f.normal[2] * toward; nz > 1e-9 && v.solid.lives(k) {
			at := (f.distance - f.normal[0]*p[0] - f.normal[1]*p[1]) / f.normal[2]
			if !found || at*toward < z*toward {
				z = at
			}
			found = true
		}
	}
	return z, found
}

// edge returns the distance of a facet whose edge with another tier's facet at
// the same index lies at a height.
func (v *solver) edge(t *Tier, sinA, nz, index float64) (float64, bool) {
	faces, ok := v.nearest(t, t.Stop.With, index)
	if !ok {
		return 0, false
	}
	g := &v.solid.faces[faces[0]]
	p := &v.planes[faces[0]-boxFaces]
	r := math.Hypot(g.normal[0], g.normal[1])
	switch {
	case r < 1e-9:
		v.fault(t, "edge", t.Stop.With, "that tier is level, so its edges all lie at one height",
			"stop by meet or level")
		return 0, false
	case len(faces) > 1 || teethApart(p.Index, index, float64(v.plan.Gear)) > sameTooth:
		v.fault(t, "edge", t.Stop.With,
			fmt.Sprintf("it has no facet at index %s, so the edge would not be level", number(index)),
			"use an index that both tiers have, or stop by meet")
		return 0, false
	case math.Abs(r*nz-sinA*g.normal[2]) < 1e-9:
		v.fault(t, "edge", t.Stop.With, "both tiers have the same slope and make no edge",
			"change the angle of one")
		return 0, false
	}
	h := t.Stop.Value / v.unit
	return sinA*(g.distance-g.normal[2]*h)/r + nz*h, true
}

// flat places a table or culet that is a share of the width.
func (v *solver) flat(i int) bool {
	t := &v.plan.Tiers[i]
	r := outlineOf(v.solid.fromAbove())
	if r.length > boxReach/2 {
		if !v.failed {
			v.fault(t, t.Stop.Rule.String(), number(t.Stop.Value),
				"the outline is not cut yet, so the width is not known",
				"cut the girdle first")
		}
		return false
	}
	z, ok := v.solid.heightOfFlat(&r, v.aims[i].share*r.width, up(t.Side))
	if !ok {
		if !v.failed {
			v.fault(t, t.Stop.Rule.String(), number(t.Stop.Value),
				"the stone is nowhere this wide on this side, or not yet closed there",
				"cut the main facets of this side first, or ask for a smaller flat")
		}
		return false
	}
	v.tiers[i].Distance = up(t.Side) * z * v.unit
	return true
}

// cutTier cuts the facets of a tier and reports those that touch nothing.
func (v *solver) cutTier(i int) {
	t := &v.plan.Tiers[i]
	got := &v.tiers[i]
	v.first[i] = len(v.planes)
	v.corners.stale = true
	missed := map[touch][]string{}
	d := got.Distance / v.unit
	for _, index := range got.Index {
		n := v.normal(t, got.Angle, index)
		p := Plane{Tier: t.Name, Index: index, Side: t.Side, Normal: n, Distance: d}
		if n[0] == 0 && n[1] == 0 {
			p.Index = math.NaN()
		}
		how := v.solid.cut(n, d)
		v.planes = append(v.planes, p)
		v.tierOf = append(v.tierOf, i)
		v.lostTo = append(v.lostTo, 0)
		v.took = append(v.took, how == cuts)
		if how != cuts {
			missed[how] = append(missed[how], facetName(t.Name, p.Index))
		}
	}
	for k := range v.planes {
		if v.lostTo[k] == 0 && !v.solid.lives(boxFaces+k) {
			v.lostTo[k] = i + 1
		}
	}
	for _, how := range []touch{misses, grazes, coincides, swallows, unresolved} {
		names := missed[how]
		if len(names) == 0 {
			continue
		}
		who := several(names)
		switch how {
		case misses:
			v.fault(t, "", "", who+" never touches the stone",
				"cut it deeper, cut it before the tiers that are in its place, or delete it")
		case grazes:
			v.fault(t, "", "", who+" touches a corner or an edge only and takes nothing off",
				"cut it deeper or delete it")
		case coincides:
			v.fault(t, "", "", who+" lies on a facet that is there already",
				"delete one of the two, or mark the earlier one temporary and cut this one deeper")
		case swallows:
			v.fault(t, "", "", who+" would take the whole stone off", "cut it less deep")
			v.failed = true
		case unresolved:
			v.fault(t, "", "", who+" lies too close to other planes to tell where they meet",
				"move it apart or make it meet them at a corner")
			v.failed = true
		}
	}
}

// removed reports finished facets that later tiers took off.
func (v *solver) removed() {
	for i := range v.plan.Tiers {
		t := &v.plan.Tiers[i]
		if t.Temporary || v.first[i] < 0 {
			continue
		}
		lost := map[int][]string{}
		for k := v.first[i]; k < v.first[i]+len(v.tiers[i].Index); k++ {
			// A facet that took nothing off in its turn is reported already.
			if to := v.lostTo[k]; to > 0 && v.took[k] {
				lost[to] = append(lost[to], facetName(t.Name, v.planes[k].Index))
			}
		}
		for to, t2 := range v.plan.Tiers {
			names := lost[to+1]
			switch {
			case len(names) == 0:
			case to == i:
				v.fault(t, "", "", several(names)+" is taken off by the other facets of its own tier",
					"cut the tier less deep, or give fewer indices")
			default:
				v.fault(t, "", "", fmt.Sprintf("%s is taken off by tier %q", several(names), t2.Name),
					"mark the tier temporary = true if it shall go, else cut "+t2.Name+" less deep")
			}
		}
	}
}

// stone returns the stone with its lengths in the solid's unit multiplied by
// scale.
func (v *solver) stone(scale float64) *Stone {
	return v.solid.stone(v.plan.Name, v.planes, mgl64.Vec3{}, scale)
}

// flatsReached compares the flats of the finished solid with the plan and
// corrects the aims of those that later tiers changed.
func (v *solver) flatsReached() bool {
	if len(v.aims) == 0 {
		return true
	}
	reached := true
	r := outlineOf(v.solid.fromAbove())
	for i := range v.aims {
		k := boxFaces + v.first[i]
		var ring []mgl64.Vec2
		for _, c := range v.solid.faces[k].ring {
			ring = append(ring, v.solid.corners[c].Vec2())
		}
		if !v.aims[i].ended(r.flat(ring) / r.width) {
			reached = false
		}
	}
	return reached
}

// finish scales the stone to its width and judges the gaps.
func (v *solver) finish() (*Solution, error) {
	mm := v.plan.WidthMM / outlineOf(v.solid.fromAbove()).width
	sol := &Solution{Scale: mm / v.unit, Tiers: v.tiers}
	for _, g := range v.pend {
		g.MM *= mm
		if g.MM > VisibleGap {
			t := &v.plan.Tiers[v.byName[g.Tier]]
			v.fault(t, t.Stop.Rule.String(), "", fmt.Sprintf("at index %s the facet misses %s by %.3f mm",
				number(g.Index), g.With, g.MM),
				"give these facets a tier of their own, or mend the angle or the index")
		} else if g.MM > noteworthyGap {
			sol.Gaps = append(sol.Gaps, g)
		}
	}
	if err := v.faults.Err(); err != nil {
		return nil, err
	}
	sol.Stone = v.stone(mm)
	if err := sol.Stone.sound(); err != nil {
		return nil, Faults{{File: v.plan.File, Why: "the solid does not close: " + err.Error(),
			Remedy: "move planes that nearly coincide apart"}}
	}
	for _, e := range sol.Stone.Edges {
		a, b := sol.Stone.Corners[e.Corners[0]], sol.Stone.Corners[e.Corners[1]]
		if l := a.Sub(b).Len(); l < VisibleGap {
			f, g := &sol.Stone.Facets[e.Facets[0]], &sol.Stone.Facets[e.Facets[1]]
			sol.Gaps = append(sol.Gaps, Gap{Index: math.NaN(),
				With: facetName(f.Tier, f.Index) + " " + facetName(g.Tier, g.Index), MM: l})
		}
	}
	return sol, nil
}

// facetName returns P1@6, or P1 for a facet without an index, for a message.
func facetName(tier string, index float64) string {
	if math.IsNaN(index) {
		return shorten(tier)
	}
	return shorten(tier) + "@" + number(math.Round(index*1e4)/1e4)
}

// several lists names for a message, the first few of many.
func several(names []string) string {
	const most = 8
	switch n := len(names); {
	case n == 0:
		return "none"
	case n > most:
		return strings.Join(names[:most], ", ") + fmt.Sprintf(" and %d more", n-most)
	}
	return strings.Join(names, ", ")
}

// fromAbove returns the live corners seen from above.
func (s *solid) fromAbove() []mgl64.Vec2 {
	seen := make([]bool, len(s.corners))
	var list []mgl64.Vec2
	for i := range s.faces {
		for _, c := range s.faces[i].ring {
			if !seen[c] {
				seen[c] = true
				list = append(list, s.corners[c].Vec2())
			}
		}
	}
	return list
}

// heightOfFlat returns the height at which a level cut through the solid is as
// wide as wanted, coming from above (up > 0) or below.
func (s *solid) heightOfFlat(r *outline, wanted, up float64) (float64, bool) {
	var heights []float64
	for i := range s.faces {
		for _, c := range s.faces[i].ring {
			heights = append(heights, up*s.corners[c][2])
		}
	}
	slices.Sort(heights)
	heights = slices.Compact(heights)
	if len(heights) < 2 || heights[len(heights)-1] > boxReach/2 {
		return 0, false
	}
	outer, inner := heights[len(heights)-1], 0.0
	found := false
	for k := len(heights) - 2; k >= 0; k-- {
		if r.flat(s.section(up*heights[k])) >= wanted {
			inner, found = heights[k], true
			break
		}
		outer = heights[k]
	}
	if !found {
		return 0, false
	}
	for range 200 {
		z := inner + (outer-inner)/2
		if z == inner || z == outer {
			break
		}
		if r.flat(s.section(up*z)) >= wanted {
			inner = z
		} else {
			outer = z
		}
	}
	return up * inner, true
}

// section returns the corners of a level cut through the solid.
func (s *solid) section(z float64) []mgl64.Vec2 {
	var list []mgl64.Vec2
	for i := range s.faces {
		ring := s.faces[i].ring
		for j, c := range ring {
			a, b := s.corners[c], s.corners[ring[(j+1)%len(ring)]]
			if a[2] <= z && b[2] > z { // each edge counts once: its other face goes down it
				t := (z - a[2]) / (b[2] - a[2])
				list = append(list, mgl64.Vec2{a[0] + t*(b[0]-a[0]), a[1] + t*(b[1]-a[1])})
			}
		}
	}
	return list
}
