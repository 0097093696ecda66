package facets

import (
	"cmp"
	"fmt"
	"math"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// cornerList has the live corners of a solid with the faces that meet there.
type cornerList struct {
	stale bool
	at    []int32   // numbers of the solid's corners
	faces [][]int32 // by place in at
}

// refresh brings the list up to the solid.
func (l *cornerList) refresh(s *solid) {
	if !l.stale {
		return
	}
	l.stale = false
	l.at, l.faces = l.at[:0], l.faces[:0]
	place := make([]int32, len(s.corners))
	for i := range s.faces {
		for _, c := range s.faces[i].ring {
			if place[c] == 0 {
				l.at = append(l.at, c)
				l.faces = append(l.faces, nil)
				place[c] = int32(len(l.at))
			}
			l.faces[place[c]-1] = append(l.faces[place[c]-1], int32(i))
		}
	}
}

// facetsOf returns the numbers of the cuts of a tier, and false if the tier
// failed or is not cut yet.
func (v *solver) facetsOf(name string) (from, to int, ok bool) {
	i, ok := v.byName[name]
	if !ok || v.first[i] < 0 {
		return 0, 0, false
	}
	return v.first[i], v.first[i] + len(v.tiers[i].Index), true
}

// nearest returns the standing faces of a tier that are nearest to an index:
// two where they tie. A NaN index takes all of them.
func (v *solver) nearest(t *Tier, name string, index float64) ([]int, bool) {
	from, to, ok := v.facetsOf(name)
	if !ok {
		if !v.failed {
			v.fault(t, t.Stop.Rule.String(), name, "there is no tier of this name so far",
				"cut it before this tier")
		}
		return nil, false
	}
	var near []int
	least := math.Inf(1)
	for k := from; k < to; k++ {
		if !v.solid.lives(boxFaces + k) {
			continue
		}
		d := 0.0
		if x := v.planes[k].Index; !math.IsNaN(x) && !math.IsNaN(index) {
			d = teethApart(x, index, float64(v.plan.Gear))
		}
		switch {
		case d < least-sameTooth:
			near, least = append(near[:0], boxFaces+k), d
		case d <= least+sameTooth:
			near = append(near, boxFaces+k)
		}
	}
	if len(near) == 0 {
		if !v.failed {
			v.fault(t, t.Stop.Rule.String(), name, "nothing of that tier is left at this point",
				"stop by a tier that still stands")
		}
		return nil, false
	}
	return near, true
}

// marked returns the faces that a mark stands for, seen from an index.
func (v *solver) marked(t *Tier, m Mark, index float64) ([]int, bool) {
	if !m.HasIndex {
		return v.nearest(t, m.Tier, index)
	}
	from, to, ok := v.facetsOf(m.Tier)
	if !ok {
		if !v.failed {
			v.fault(t, "meet", m.String(), "there is no tier of this name so far", "cut it before this tier")
		}
		return nil, false
	}
	var there []string
	for k := from; k < to; k++ {
		x := v.planes[k].Index
		if math.IsNaN(x) || teethApart(x, m.Index, float64(v.plan.Gear)) < sameTooth {
			if v.solid.lives(boxFaces + k) {
				return []int{boxFaces + k}, true
			}
			if !v.failed {
				v.fault(t, "meet", m.String(), "nothing of that facet is left at this point",
					"stop by a facet that still stands")
			}
			return nil, false
		}
		there = append(there, facetName(m.Tier, x))
	}
	v.fault(t, "meet", m.String(), "that tier has no facet at this index", "it has "+several(there))
	return nil, false
}

// cornersFor returns the corners of the solid that marks stand for, seen from
// an index. More than one means that the marks fit several.
func (v *solver) cornersFor(t *Tier, marks []Mark, index float64) ([]mgl64.Vec3, bool) {
	var groups [][]int
	onAxis := false
	for _, m := range marks {
		if m.Tier == AxisName {
			onAxis = true
			continue
		}
		g, ok := v.marked(t, m, index)
		if !ok {
			return nil, false
		}
		groups = append(groups, g)
	}
	v.corners.refresh(v.solid)
	var whole, part []mgl64.Vec3
	for k, c := range v.corners.at {
		p := v.solid.corners[c]
		if onAxis && math.Hypot(p[0], p[1]) > axisTolerance {
			continue
		}
		faces := v.corners.faces[k]
		every, each := true, true
		named := map[int]bool{}
		for _, g := range groups {
			n := 0
			for _, f := range g {
				if slices.Contains(faces, int32(f)) {
					n++
					named[f] = true
				}
			}
			every = every && n == len(g)
			each = each && n > 0
		}
		planes := len(named)
		if onAxis {
			planes += 2
		}
		switch {
		case !each || planes < 3:
		case every:
			whole = append(whole, p)
		default:
			part = append(part, p)
		}
	}
	switch {
	case len(whole) > 0:
		return whole, true
	case len(part) > 0:
		return part, true
	case onAxis && len(groups) == 1:
		if p, ok := v.pierced(groups[0]); ok {
			return []mgl64.Vec3{p}, true
		}
	}
	if !v.failed {
		v.fault(t, "meet", markNames(marks), "these planes share no corner on the stone as it stands",
			"corners there with them: "+several(v.candidates(groups, index)))
	}
	return nil, false
}

// axisTolerance is how far off the axis a corner may lie, in the solid's unit,
// to count as on it: a few corners' rounding in a row.
const axisTolerance = 1e-8

// pierced returns where the axis leaves the stone through one of the faces.
func (v *solver) pierced(faces []int) (mgl64.Vec3, bool) {
	for _, k := range faces {
		f := &v.solid.faces[k]
		if math.Abs(f.normal[2]) < 1e-9 {
			continue
		}
		p := mgl64.Vec3{0, 0, f.distance / f.normal[2]}
		out := slices.ContainsFunc(v.solid.faces, func(o face) bool {
			return len(o.ring) > 0 && o.normal.Dot(p)-o.distance > axisTolerance
		})
		if !out {
			return p, true
		}
	}
	return mgl64.Vec3{}, false
}

// candidates names corners that hold at least two of the named groups,
// nearest to the index first.
func (v *solver) candidates(groups [][]int, index float64) []string {
	type candidate struct {
		name  string
		wants int
		apart float64
	}
	var list []candidate
	for k, c := range v.corners.at {
		held := 0
		for _, g := range groups {
			if slices.ContainsFunc(g, func(f int) bool {
				return slices.Contains(v.corners.faces[k],
					int32(f))
			}) {
				held++
			}
		}
		if held < min(2, len(groups)) {
			continue
		}
		name, whole := v.cornerName(k)
		if !whole {
			continue
		}
		p := v.solid.corners[c]
		tooth := math.Atan2(p[1], p[0]) / (2 * math.Pi) * float64(v.plan.Gear)
		apart := 0.0
		if !math.IsNaN(index) {
			apart = teethApart(tooth, index, float64(v.plan.Gear))
		}
		list = append(list, candidate{name, -held, apart})
	}
	slices.SortStableFunc(list, func(a, b candidate) int {
		return cmp.Or(cmp.Compare(a.wants, b.wants), cmp.Compare(a.apart, b.apart))
	})
	var names []string
	for _, c := range list[:min(len(list), 6)] {
		names = append(names, c.name)
	}
	return names
}

// cornerName names a corner by its facets, and reports whether all of them
// belong to the plan.
func (v *solver) cornerName(k int) (string, bool) {
	var words []string
	for _, f := range v.corners.faces[k] {
		if f < boxFaces {
			return "", false
		}
		p := &v.planes[f-boxFaces]
		words = append(words, facetName(p.Tier, p.Index))
	}
	if len(words) > 4 {
		words = append(words[:4], "...")
	}
	return "[" + strings.Join(words, " ") + "]", true
}

// attempt is one way to take the marks of a meet rule.
type attempt struct {
	angle    Angle
	index    float64
	distance float64
	misses   []float64 // of the corners beyond the unknowns
	why      string    // why it does not work; empty if it does
}

// meet finds what a tier that stops at corners leaves open: the distance, with
// two corners the angle, with three the index as well.
func (v *solver) meet(i int) bool {
	t := &v.plan.Tiers[i]
	got := &v.tiers[i]
	own := math.NaN()
	if len(t.Index) > 0 {
		own = t.Index[0]
	}
	best, ok := v.atCorners(t, own)
	if !ok {
		return false
	}
	got.Angle, got.Distance = best.angle, best.distance*v.unit
	if len(t.Index) == 0 && got.Angle != 0 {
		got.Index = expand([]float64{best.index}, t.Fold, t.Mirror, v.plan.Gear)
	}
	for k, m := range best.misses {
		v.pend = append(v.pend, Gap{t.Name, got.Index[0], "corner " +
			markNames(t.Stop.Corners[len(t.Stop.Corners)-len(best.misses)+k]), m})
	}
	// The other facets of the tier have the same angle and depth; where their
	// own corners can be named in the same words, they must fit as well.
	for _, index := range got.Index[1:] {
		for _, marks := range t.Stop.Corners {
			if slices.ContainsFunc(marks, func(m Mark) bool { return m.HasIndex }) {
				continue
			}
			before := len(v.faults)
			corners, found := v.cornersFor(t, marks, index)
			v.faults = v.faults[:before]
			if !found {
				v.fault(t, "meet", markNames(marks), fmt.Sprintf("the facet at index %s finds no such corner",
					number(index)),
					"give these facets a tier of their own")
				return false
			}
			n := v.normal(t, got.Angle, index)
			least := math.Inf(1)
			for _, c := range corners {
				least = math.Min(least, math.Abs(n.Dot(c)-best.distance))
			}
			if least > weldTolerance {
				v.pend = append(v.pend, Gap{t.Name, index, "corner " + markNames(marks), least})
			}
		}
	}
	return true
}

// mostAttempts bounds the ways in which marks that each fit several corners
// are combined.
const mostAttempts = 256

// atCorners solves a tier's meet rule at an index (NaN if the rule is to find
// it). Marks that fit several corners are fine as long as all give the same.
func (v *solver) atCorners(t *Tier, index float64) (attempt, bool) {
	ways := [][]mgl64.Vec3{nil}
	for _, marks := range t.Stop.Corners {
		corners, ok := v.cornersFor(t, marks, index)
		if !ok {
			return attempt{}, false
		}
		var more [][]mgl64.Vec3
		for _, w := range ways {
			for _, c := range corners {
				more = append(more, append(slices.Clip(slices.Clone(w)), c))
			}
		}
		if ways = more; len(ways) > mostAttempts {
			v.fault(t, "meet", "", "the names fit too many corners",
				"name each facet with its index, as in P1@6")
			return attempt{}, false
		}
	}
	var good []attempt
	why := ""
	for _, w := range ways {
		a := v.through(t, index, w)
		if a.why != "" {
			why = a.why
			continue
		}
		if !slices.ContainsFunc(good, func(b attempt) bool { return a.same(&b) }) {
			good = append(good, a)
		}
	}
	switch {
	case len(good) == 0:
		v.fault(t, "meet", "", why, "check the corners, or give the angle and one corner")
		return attempt{}, false
	case len(good) > 1:
		// Corners that agree with each other go before those that do not.
		slices.SortStableFunc(good, func(a, b attempt) int { return cmp.Compare(a.worst(), b.worst()) })
		if good[0].worst() > weldTolerance || good[1].worst() <= weldTolerance || len(good[0].misses) == 0 {
			var names []string
			for _, w := range ways {
				for _, c := range w {
					for k, at := range v.corners.at {
						if name, whole := v.cornerName(k); whole && v.solid.corners[at] == c &&
							!slices.Contains(names, name) {
							names = append(names, name)
						}
					}
				}
			}
			v.fault(t, "meet", "", "the names fit several corners that give different cuts: "+several(names),
				"name the facets with their index, as in P1@6")
			return attempt{}, false
		}
	}
	return good[0], true
}

func (a *attempt) worst() float64 {
	w := 0.0
	for _, m := range a.misses {
		w = math.Max(w, m)
	}
	return w
}

// same reports whether two attempts are the same cut to rounding.
func (a *attempt) same(b *attempt) bool {
	return math.Abs(float64(a.angle-b.angle)) < 1e-9 && math.Abs(a.distance-b.distance) < 1e-9 &&
		(math.Abs(a.index-b.index) < sameTooth || math.IsNaN(a.index) && math.IsNaN(b.index)) &&
		math.Abs(a.worst()-b.worst()) < 1e-9
}

// sameCorner is the distance, in the solid's unit, below which two corners
// give no direction.
const sameCorner = 1e-6

// leastSlope is how far a solved facet must be from level and from upright.
const leastSlope = Angle(1e-6)

// through lays a tier's plane through corners.
func (v *solver) through(t *Tier, index float64, corners []mgl64.Vec3) attempt {
	a := attempt{angle: t.Angle, index: index}
	used := 1
	var n mgl64.Vec3
	free := math.IsNaN(index) && (t.Side == Crown || t.Side == Pavilion) && !(t.HasAngle && t.Angle == 0)
	switch {
	case free || math.IsNaN(index) && t.Side == Girdle:
		if n, used, a.why = v.normalThrough(t, corners); a.why != "" {
			return a
		}
		flat := math.Hypot(n[0], n[1])
		a.angle = Angle(math.Atan2(flat, math.Abs(n[2])))
		if t.Side == Girdle {
			a.angle = 90 * Degree
		}
		a.index = onGear(math.Atan2(n[1], n[0])/(2*math.Pi)*float64(v.plan.Gear), float64(v.plan.Gear))
		n = v.normal(t, a.angle, a.index)
	case !t.HasAngle:
		// n = (sin A cos F, sin A sin F, ±cos A) is square to the line between
		// the corners: sin A u ± cos A w = 0, with u along the azimuth F.
		if len(corners) < 2 {
			a.why = "the angle is missing and one corner does not give it"
			return a
		}
		used = 2
		d := corners[1].Sub(corners[0])
		sinF, cosF := math.Sincos(azimuth(index, v.plan.Gear).Radians())
		u, w := d[0]*cosF+d[1]*sinF, up(t.Side)*d[2]
		if d.Len() < sameCorner || math.Hypot(u, w) < sameCorner*d.Len() {
			a.why = "the two corners lie level across the facet, so that every angle fits"
			return a
		}
		if u < 0 {
			u, w = -u, -w
		}
		a.angle = Angle(math.Atan2(-w, u))
		if a.angle < leastSlope || a.angle > 90*Degree-leastSlope {
			a.why = fmt.Sprintf("a facet of the %s at this index through these corners would need %s degrees",
				t.Side, number(math.Round(a.angle.Degrees()*100)/100))
			return a
		}
		n = v.normal(t, a.angle, index)
	default:
		n = v.normal(t, t.Angle, index)
	}
	a.distance = n.Dot(corners[0])
	for _, c := range corners[used:] {
		a.misses = append(a.misses, math.Abs(n.Dot(c)-a.distance))
	}
	return a
}

// normalThrough returns the normal, out of the stone, of the plane through
// three corners, or of the upright one through two.
func (v *solver) normalThrough(t *Tier, corners []mgl64.Vec3) (n mgl64.Vec3, used int, why string) {
	if t.Side == Girdle {
		if len(corners) < 2 {
			return n, 0, "the index is missing and one corner does not give it"
		}
		d := corners[1].Sub(corners[0])
		n = mgl64.Vec3{d[1], -d[0], 0}
		if n.Len() < sameCorner {
			return n, 0, "the two corners lie one above the other, so that every index fits"
		}
		n = n.Normalize()
		if n.Dot(corners[0]) < 0 {
			n = n.Mul(-1)
		}
		return n, 2, ""
	}
	if len(corners) < 3 {
		return n, 0, "the index is missing; with the angle it needs three corners"
	}
	n = corners[1].Sub(corners[0]).Cross(corners[2].Sub(corners[0]))
	if n.Len() < sameCorner*sameCorner {
		return n, 0, "the three corners lie on a line"
	}
	n = n.Normalize()
	if n[2]*up(t.Side) < 0 {
		n = n.Mul(-1)
	}
	if math.Abs(n[2]) < 1e-9 || math.Hypot(n[0], n[1]) < 1e-9 {
		return n, 0, fmt.Sprintf("the facet through these corners is upright or level and no part of the %s", t.Side)
	}
	return n, 3, ""
}
