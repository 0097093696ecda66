package facets

import (
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// Names of the tiers that proportions make, as the trade calls them.
const (
	tierTable        = "table"
	tierStar         = "star"
	tierCrownMain    = "crown main"
	tierUpperHalf    = "upper half"
	tierGirdle       = "girdle"
	tierLowerHalf    = "lower half"
	tierPavilionMain = "pavilion main"
	tierCulet        = "culet"
)

// proportionGear is the gear whose teeth number the facets.
const proportionGear = 96

// brilliant is the skeleton of a brilliant cut seen from above, in units of
// its width: where each main touches the girdle and which way it faces, and
// the girdle between.
type brilliant struct {
	mains []brilliantMain
	// between holds, for the gap after each main, the girdle's corners from
	// that main to the next, both included; nil where the two mains touch at
	// the same corner and nothing lies between them.
	between [][]mgl64.Vec2
	// straight: a gap is one straight side and takes one facet, not two halves.
	straight []bool
	// The distances from the axis for which the crown and pavilion angles are
	// given: those of the mains of the long sides.
	crownReference, pavilionReference float64
	// keel, both from the axis along x: where the mains that face +x and -x end below.
	keelFore, keelAft float64
	// culetHalf: half the culet's width for a culet of 1, between flats.
	culetHalf float64
}

type brilliantMain struct {
	at           mgl64.Vec2 // on the girdle's outline
	above, below mgl64.Vec2 // unit, the crown and the pavilion main's normal seen from above
}

// main is one of the two mains at a girdle point.
type main struct{ at, faces mgl64.Vec2 }

func (m brilliantMain) crown() main    { return main{m.at, m.above} }
func (m brilliantMain) pavilion() main { return main{m.at, m.below} }

// reach is the distance from the axis to the main's edge line at the girdle.
func (m main) reach() float64 { return m.at.Dot(m.faces) }

// brilliantPlanes builds the planes of a brilliant, for a width of 1.
//
// Every main passes its girdle point and its table corner, which is the girdle
// point scaled by the table, so that all mains would meet in one point above
// the stone; below, they meet in the culet or at the keel's ends. All other
// facets follow from corners: a star passes two table corners and a point on
// the edge between two mains; a half passes a main's girdle point, that same
// kind of point, and the girdle point between the mains.
// For the round this is the closed construction whose angles are
//
//	tan star = tan crown (r k - t R) / (r - t R k),  r = t R k + s (R - t R k)
//	tan upper = (R - r k) tan crown / ((R - r) j)
//	tan lower = (R - q k) tan pavilion / ((R - q) j),  q = R (1 - l)
//
// with k = cos 22.5 and j = cos 11.25 degrees, R the girdle's radius, t the
// table, s the stars and l the lower halves as shares of 1.
func (p *Proportions) brilliantPlanes() ([]Plane, *Fault) {
	b, fault := p.skeleton()
	if fault != nil {
		return nil, fault
	}
	n := len(b.mains)
	values, fault := p.dealt(b)
	if fault != nil {
		return nil, fault
	}
	share := func(name string, i int) float64 { return values[name][i] / 100 }
	slope := func(name string, i int) float64 { return math.Tan(values[name][i] * math.Pi / 180) }

	// Heights. The table is level; what varies moves the girdle.
	rise := make([]float64, n)
	meanRise, meanGirdle := 0.0, 0.0
	for i := range b.mains {
		rise[i] = (1 - share("table", i)) * b.crownReference * slope("crown", i)
		meanRise += rise[i] / float64(n)
		meanGirdle += share("girdle", i) / float64(n)
	}
	tableHeight := meanGirdle/2 + meanRise
	upper, lower := make([]float64, n), make([]float64, n)
	for i := range b.mains {
		upper[i] = tableHeight - rise[i]
		lower[i] = upper[i] - share("girdle", i)
	}

	var planes []Plane
	add := func(tier string, side Side, normal mgl64.Vec3, through mgl64.Vec3) {
		planes = append(planes, Plane{Tier: tier, Index: indexOf(normal), Side: side, Normal: normal,
			Distance: normal.Dot(through)})
	}
	add(tierTable, Table, mgl64.Vec3{0, 0, 1}, mgl64.Vec3{0, 0, tableHeight})
	crown, pavilion := make([]Plane, n), make([]Plane, n)
	corners := make([]mgl64.Vec3, n)
	for i, m := range b.mains {
		corners[i] = m.at.Mul(share("table", i)).Vec3(tableHeight)
		crown[i] = leaning(tierCrownMain, Crown, m.above, slope("crown", i)*b.crownReference/m.crown().reach(),
			m.at.Vec3(upper[i]))
		end := b.keelEnd(m.below)
		pavilion[i] = leaning(tierPavilionMain, Pavilion, m.below,
			slope("pavilion", i)*b.pavilionReference/(m.pavilion().reach()-end.Dot(m.below)), m.at.Vec3(lower[i]))
	}
	planes = append(planes, crown...)
	planes = append(planes, pavilion...)
	for i := range b.mains {
		if b.between[i] == nil {
			continue
		}
		j := (i + 1) % n
		from, to := b.mains[i], b.mains[j]
		// Seen from above, the edge between the mains runs from the axis (or
		// the keel's end) to where their girdle lines cross.
		cross := crossing2(from.crown(), to.crown())
		girdlePoint := onOutline(b.between[i], mgl64.Vec2{}, cross)
		along := girdlePoint.Normalize()
		edge := onOutline([]mgl64.Vec2{corners[i].Vec2(), corners[j].Vec2()}, mgl64.Vec2{}, cross).Dot(along)
		tip := onMains(crown[i], crown[j], along, edge+share("star", i)*(girdlePoint.Len()-edge))
		planes = append(planes, through(tierStar, Crown, corners[i], corners[j], tip))
		high := (upper[i] + upper[j]) / 2
		end := b.keelEnd(from.below.Add(to.below))
		lowAlong := crossing2(from.pavilion(), to.pavilion()).Sub(end).Normalize()
		lowTip := onMains(pavilion[i], pavilion[j], lowAlong, lowAlong.Dot(end)+(1-share("lower",
			i))*lowAlong.Dot(girdlePoint.Sub(end)))
		low := (lower[i] + lower[j]) / 2
		if b.straight[i] {
			planes = append(planes,
				through(tierUpperHalf, Crown, from.at.Vec3(upper[i]), to.at.Vec3(upper[j]), tip),
				through(tierLowerHalf, Pavilion, from.at.Vec3(lower[i]), to.at.Vec3(lower[j]), lowTip))
			continue
		}
		planes = append(planes,
			through(tierUpperHalf, Crown, from.at.Vec3(upper[i]), girdlePoint.Vec3(high), tip),
			through(tierUpperHalf, Crown, girdlePoint.Vec3(high), to.at.Vec3(upper[j]), tip),
			through(tierLowerHalf, Pavilion, from.at.Vec3(lower[i]), girdlePoint.Vec3(low), lowTip),
			through(tierLowerHalf, Pavilion, girdlePoint.Vec3(low), to.at.Vec3(lower[j]), lowTip))
	}
	if meanGirdle > 0 {
		for _, ring := range b.between {
			for k := 1; k < len(ring); k++ {
				d := ring[k].Sub(ring[k-1])
				add(tierGirdle, Girdle, mgl64.Vec3{d[1], -d[0], 0}.Normalize(), ring[k].Vec3(0))
			}
		}
	}
	if culet := p.value("culet").Mean / 100; culet > 0 {
		steep := math.Tan(p.value("pavilion").Mean * math.Pi / 180)
		depth := (b.pavilionReference - culet*b.culetHalf) * steep
		add(tierCulet, Pavilion, mgl64.Vec3{0, 0, -1}, mgl64.Vec3{0, 0, -meanGirdle/2 - depth})
	}
	return planes, nil
}

// dealt returns every value that may vary, by main for what belongs to mains
// and by the main before the gap for what belongs to gaps.
func (p *Proportions) dealt(b *brilliant) (map[string][]float64, *Fault) {
	var mains, gaps []float64
	var gapOf []int
	for i, m := range b.mains {
		mains = append(mains, azimuthOf(m.above))
		if b.between[i] != nil {
			gaps = append(gaps, azimuthOf(m.above.Add(b.mains[(i+1)%len(b.mains)].above)))
			gapOf = append(gapOf, i)
		}
	}
	values := map[string][]float64{}
	for _, name := range []string{"table", "crown", "pavilion", "girdle"} {
		v, f := p.round(name, mains)
		if f != nil {
			return nil, f
		}
		values[name] = v
	}
	for _, name := range []string{"star", "lower"} {
		v, f := p.round(name, gaps)
		if f != nil {
			return nil, f
		}
		values[name] = make([]float64, len(b.mains))
		for k, i := range gapOf {
			values[name][i] = v[k]
		}
	}
	return values, nil
}

// keelEnd is the point below which the pavilion facets that face a direction end.
func (b *brilliant) keelEnd(faces mgl64.Vec2) mgl64.Vec2 {
	// A facet square to the keel holds the whole of it; which end is named does not matter then.
	if faces[0] >= 0 {
		return mgl64.Vec2{b.keelFore, 0}
	}
	return mgl64.Vec2{-b.keelAft, 0}
}

func azimuthOf(v mgl64.Vec2) float64 { return math.Atan2(v[1], v[0]) }

// indexOf returns the tooth at a normal's azimuth, NaN for a level facet.
func indexOf(n mgl64.Vec3) float64 {
	if n[0] == 0 && n[1] == 0 {
		return math.NaN()
	}
	index := math.Atan2(n[1], n[0]) / (2 * math.Pi) * proportionGear
	// Rounding would otherwise make index 0 a hair below 96.
	index = math.Round(index*1e9) / 1e9
	if index == 0 {
		index = 0 // not -0
	}
	if index < 0 {
		index += proportionGear
	}
	return index
}

// leaning returns the plane of a given slope (tangent of the facet's angle)
// that faces a direction seen from above and passes a point.
func leaning(tier string, side Side, faces mgl64.Vec2, slope float64, through mgl64.Vec3) Plane {
	up := 1.0
	if side == Pavilion {
		up = -1
	}
	n := mgl64.Vec3{slope * faces[0], slope * faces[1], up}.Normalize()
	return Plane{Tier: tier, Index: indexOf(n), Side: side, Normal: n, Distance: n.Dot(through)}
}

// through returns the plane through three points, up on the crown and down on the pavilion.
func through(tier string, side Side, a, b, c mgl64.Vec3) Plane {
	n := b.Sub(a).Cross(c.Sub(a)).Normalize()
	if n[2] < 0 != (side == Pavilion) {
		n = n.Mul(-1)
	}
	return Plane{Tier: tier, Index: indexOf(n), Side: side, Normal: n, Distance: n.Dot(a)}
}

// crossing2 returns where the girdle lines of two mains cross, seen from above.
func crossing2(a, b main) mgl64.Vec2 {
	det := a.faces[0]*b.faces[1] - a.faces[1]*b.faces[0]
	ra, rb := a.reach(), b.reach()
	return mgl64.Vec2{(ra*b.faces[1] - rb*a.faces[1]) / det, (rb*a.faces[0] - ra*b.faces[0]) / det}
}

// onOutline returns where the ray from one point through another crosses a chain of corners.
func onOutline(chain []mgl64.Vec2, from, through mgl64.Vec2) mgl64.Vec2 {
	d := through.Sub(from)
	side := func(p mgl64.Vec2) float64 { return d[0]*(p[1]-from[1]) - d[1]*(p[0]-from[0]) }
	for i := 1; i < len(chain); i++ {
		a, b := side(chain[i-1]), side(chain[i])
		if a <= 0 && b >= 0 && b > a {
			return chain[i-1].Add(chain[i].Sub(chain[i-1]).Mul(a / (a - b)))
		}
	}
	return chain[len(chain)/2]
}

// onMains returns the point of two planes' common edge whose distance along a level direction is given.
func onMains(a, b Plane, along mgl64.Vec2, distance float64) mgl64.Vec3 {
	m := mgl64.Mat3FromRows(a.Normal, b.Normal, along.Vec3(0))
	return m.Inv().Mul3x1(mgl64.Vec3{a.Distance, b.Distance, distance})
}
