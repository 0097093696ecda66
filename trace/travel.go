package trace

import (
	"math"

	"pavilight/facets"
	"pavilight/gems"
)

// A traveller follows viewing rays where they may meet more than clean facets in one
// clear medium: body colour, films, facets in different media, the flat surface of
// a dish, something diffuse under the stone, a light of its own. It is tracer's
// general and slower sister, and gives the same ledger where both can.
//
// A path may split outside the stone. All its branches are followed, one after the
// other, each under the same end-game.
type traveller struct {
	*tracer
	colour *gems.Absorption // nil for none
	axes   *orientation     // of a doubly refracting stone; nil for a singly refracting one

	medium []*gems.Material // behind each facet
	film   []*Film          // on each facet; nil for none
	dish   *dish            // nil where the medium goes on for ever
	under  *under           // nil where light that leaves downward goes on for ever
	cup    *cup             // nil without a setting
}

// dish is a flat liquid surface across the line of sight, above the stone.
type dish struct {
	liquid *gems.Material
	level  float64 // above the stone's middle, in units of the stone
}

// under is a diffuse flat across the line of sight, under the stone.
type under struct {
	reflectance float64 // share it sends back, by Lambert's law
	level       float64 // of it, relative to the stone's middle, in units of the stone
}

// cup is a setting: a diffuse wall right behind the pavilion's facets, closed or open
// toward the culet.
type cup struct {
	reflectance float64
	opening     float64 // height, relative to the stone's middle, under which there is no wall
}

// leg is one branch of a path.
type leg struct {
	x, d    vec
	light   beam
	inside  bool
	k       vec     // wave vector inside a doubly refracting stone; d is then the ray
	extra   bool    // there, the extraordinary or slower wave
	path    float64 // inside the stone so far, in units of the stone
	strewn  bool    // has been scattered
	mirror  bool    // only mirrored so far, by the first surface
	seen    bool    // has met the pavilion
	bounces int
	door    int // facet by which it last left the stone; noDoor for one that never was inside
}

// noDoor stands for the facet where there is none.
const noDoor = -1

// traveller's indices at one wavelength.
type lambda struct {
	w      gems.Wavelength
	stone  float64
	medium []float64 // behind each facet
	liquid float64   // of the dish
	absorb float64   // natural absorption per unit of the stone
	twin   twin      // of a doubly refracting stone: meaningful only if the traveller has axes
}

// look looks up all indices at w; every material is known to have one there.
func (t *traveller) look(w gems.Wavelength, stone *gems.Material, at *lambda) {
	at.w = w
	at.stone, _ = stone.Index(w)
	at.medium = at.medium[:0]
	var last *gems.Material
	var n float64
	for _, m := range t.medium {
		if m != last {
			n, _ = m.Index(w)
			last = m
		}
		at.medium = append(at.medium, n)
	}
	if t.dish != nil {
		at.liquid, _ = t.dish.liquid.Index(w)
	}
	if t.axes != nil {
		p, _ := stone.Indices(w)
		at.twin = twin{newCrystal(t.axes, p), t.colour.Coefficients(w)}
		for i := range at.twin.natural {
			at.twin.natural[i] *= t.body.unit
		}
	} else {
		at.absorb = meanAbsorption(t.colour, w) * t.body.unit
	}
}

// meanAbsorption is the natural absorption per mm that light meets in the mean over all
// directions, to first order; 0 for no colour.
func meanAbsorption(colour *gems.Absorption, w gems.Wavelength) float64 {
	a := colour.Coefficients(w)
	return (a[0] + a[1] + a[2]) / 3
}

// journey is what one ray gathers.
type journey struct {
	*traveller
	*lambda
	ledger Ledger
	sums   *sums
	dice   dice
	stack  []leg
	window float64 // what left downward where light first met the pavilion
	doors  []share // by facet, what left there for good; nil where nobody asks
}

// share is power by the entry of the ledger that it counts in.
type share [quantities]float64

// send sends one unit of viewing ray from x, on or outside the stone, along d. at
// the facet that it meets first. It returns the ledger; what is lit goes into sums.
func (t *traveller) send(facet int, x, d vec, at *lambda, dice dice, sums *sums) Ledger {
	return t.sendBy(facet, x, d, at, dice, sums, nil)
}

// sendBy does what send does and adds to doors, by facet, what left there for good.
func (t *traveller) sendBy(facet int, x, d vec, at *lambda, dice dice, sums *sums, doors []share) Ledger {
	j := &journey{traveller: t, lambda: at, sums: sums, dice: dice, doors: doors}
	first := leg{x: x, d: d, light: fresh(d), mirror: true, door: noDoor}
	if t.dish != nil {
		// Down through the liquid's surface, which mirrors its part straight back.
		up := -d.dot(t.outline.eye)
		c := plainCrossing(1, at.liquid, up)
		n := t.outline.eye.scale(-1)
		in := refract(d, n, 1/at.liquid, up, c.cosT)
		mirrored, through := first.light.meet(&c, d, n, in)
		j.put(Surface, mirrored.i, d.plus(2*up, t.outline.eye), &first)
		if t.averaged {
			through.forget()
		}
		first.light, first.d, first.mirror = through, in, false
	}
	j.land(facet, first)
	for len(j.stack) > 0 {
		l := j.stack[len(j.stack)-1]
		j.stack = j.stack[:len(j.stack)-1]
		if l.inside && j.axes != nil {
			j.runDouble(l)
		} else if l.inside {
			j.run(l)
		} else {
			j.roam(l)
		}
	}
	if j.ledger.Leaked > 0.5 {
		sums[leakyArea]++
	}
	if j.window > 0.5 {
		sums[windowedArea]++
	}
	return j.ledger
}

// crossing returns what facet k does to light inside or outside of it.
func (j *journey) crossing(k int, cosI float64, inside bool) crossing {
	n1, n2 := j.stone, j.lambda.medium[k]
	if !inside {
		n1, n2 = n2, n1
	}
	if f := j.film[k]; f != nil {
		return filmCrossing(n1, *f, n2, cosI, float64(j.w))
	}
	return plainCrossing(n1, n2, cosI)
}

// land lets a leg that comes from outside meet the stone's facet k at its x.
func (j *journey) land(k int, l leg) {
	v := j.body.normal[k].scale(-1)
	cosI := min(1, l.d.dot(v))
	if cosI <= 0 {
		// Grazing within rounding: passes beside.
		j.count(l, l.d)
		return
	}
	if j.axes != nil {
		j.landDouble(k, l)
		return
	}
	if j.film[k].scatters() {
		j.landOnSoil(k, l)
		return
	}
	c := j.crossing(k, cosI, false)
	in := refract(l.d, v, j.lambda.medium[k]/j.stone, cosI, c.cosT)
	mirrored, through := l.light.meet(&c, l.d, v, in)
	j.lose(l.light.i - mirrored.i - through.i)
	l2 := l
	l2.d, l2.light = l.d.plus(-2*cosI, v), mirrored
	l.d, l.light, l.inside, l.mirror = in, through, true, false
	j.settle(&l2, &l2.light, &l.light)
	j.turnBack(k, l2)
	if l.light.i > 0 {
		j.stack = append(j.stack, l)
	}
}

// turnBack lets a leg go on that facet k mirrors outside: toward the wall right behind
// the facet where it came from there, away otherwise.
func (j *journey) turnBack(k int, l leg) {
	switch {
	case l.light.i <= 0:
	case !l.mirror && j.walled(k, l.x):
		j.away(k, l)
	default:
		j.stack = append(j.stack, l)
	}
}

// walled reports whether the setting's wall lies behind facet k at x.
func (j *journey) walled(k int, x vec) bool {
	return j.cup != nil && j.body.side[k] == facets.Pavilion && x.z > j.cup.opening
}

// faintStrewn is the power under which light that has been scattered goes one way only
// where it could go two. Its directions are chance already, so following more of them
// than one gains little.
const faintStrewn = 0.1

// settle averages the two beams of a split of leg l where that is asked for, and gives
// all the light to one of them where it has become faint.
func (j *journey) settle(l *leg, a, b *beam) {
	if j.averaged {
		a.forget()
		b.forget()
	}
	faint := j.faint
	if l.strewn {
		faint = max(faint, faintStrewn)
	}
	if all := a.i + b.i; all < faint && a.i > 0 && b.i > 0 {
		if j.dice.roll()*all < a.i {
			a.grow(all)
			*b = beam{}
		} else {
			b.grow(all)
			*a = beam{}
		}
	}
}

// run follows a leg inside the stone to its end, putting what leaves on the stack.
func (j *journey) run(l leg) {
	b := j.body
	for ; l.bounces < mostBounces; l.bounces++ {
		k, s := b.exit(l.x, l.d)
		l.x = l.x.plus(s, l.d)
		l.path += s
		j.sums[segmentCount]++
		if j.absorb > 0 {
			left := math.Exp(-j.absorb * s)
			j.lose(l.light.i * (1 - left))
			l.light.grow(l.light.i * left)
			if l.light.i == 0 { // a body so dark that nothing can be counted
				return
			}
		}
		if j.film[k].scatters() {
			if !j.soil(k, &l) {
				return
			}
			continue
		}
		v := b.normal[k]
		cosI := min(1, l.d.dot(v))
		c := j.crossing(k, cosI, true)
		out := vec{}
		if c.cosT > 0 {
			out = refract(l.d, v, j.stone/j.lambda.medium[k], cosI, c.cosT)
		}
		all := l.light.i
		reflected, through := l.light.meet(&c, l.d, v, out)
		j.lose(all - reflected.i - through.i)
		j.settle(&l, &reflected, &through)
		if !l.seen && b.side[k] == facets.Pavilion {
			l.seen = true
			j.sees(through.i, out)
		}
		if through.i > 0 {
			left := l
			left.d, left.light, left.inside = out, through, false
			j.away(k, left)
		}
		if reflected.i <= 0 {
			return
		}
		l.light = reflected
		l.d = l.d.plus(-2*cosI, v)
	}
	j.ledger.Unresolved += l.light.i
}

// sees notes what leaves along out where light first meets the pavilion.
func (j *journey) sees(power float64, out vec) {
	if power > 0 && out.dot(j.outline.eye) <= 0 {
		j.window += power
	}
}

// away lets a leg that has left the stone by facet k go on: the medium is endless,
// or it is pushed to be followed on.
func (j *journey) away(k int, l leg) {
	l.door = k
	up := l.d.dot(j.outline.eye)
	if j.walled(k, l.x) {
		// The wall sends its part back into the facet.
		n := j.body.normal[k].scale(-1)
		if j.scatter(&l, j.cup.reflectance, n) {
			j.land(k, l)
		}
		return
	}
	if up > 0 && j.dish == nil || up <= 0 && j.under == nil {
		j.count(l, l.d)
		return
	}
	j.stack = append(j.stack, l)
}

// count enters a leg that leaves the whole arrangement along d in the ledger.
func (j *journey) count(l leg, d vec) {
	q := Surface
	if !l.mirror {
		q = j.goes(d.dot(j.outline.eye))
	}
	j.put(q, l.light.i, d, &l)
}

// roam follows a leg outside the stone until it lands, leaves or is swallowed.
func (j *journey) roam(l leg) {
	eye := j.outline.eye
	for ; l.bounces < mostBounces; l.bounces++ {
		up := l.d.dot(eye)
		if k, s, ok := j.body.entry(l.x, l.d); ok {
			l.x = l.x.plus(s, l.d)
			j.land(k, l)
			return
		}
		switch {
		case up > 0 && j.dish != nil:
			// The liquid's surface: part goes out into air, part comes back down.
			l.x = l.x.plus(max(0, j.dish.level-l.x.dot(eye))/up, l.d)
			c := plainCrossing(j.liquid, 1, up)
			out := refract(l.d, eye, j.liquid, up, c.cosT)
			back, through := l.light.meet(&c, l.d, eye, out)
			j.settle(&l, &back, &through)
			if through.i > 0 {
				left := l
				left.light = through
				j.count(left, out)
			}
			if back.i <= 0 {
				return
			}
			l.light = back
			l.d = l.d.plus(-2*up, eye)
		case up > 0 || j.under == nil:
			j.count(l, l.d)
			return
		default:
			// The diffuse ground: a part is sent back in a direction by Lambert's law.
			l.x = l.x.plus(max(0, l.x.dot(eye)-j.under.level)/max(-up, 1e-12), l.d)
			if !j.scatter(&l, j.under.reflectance, eye) {
				return
			}
		}
	}
	j.ledger.Unresolved += l.light.i
}

// scatter lets a diffuse surface with unit normal n take its part of a leg and send
// the rest back; ok is false where nothing is sent. What it takes is lost below.
func (j *journey) scatter(l *leg, reflectance float64, n vec) (ok bool) {
	sent, kept := l.light, l.light
	sent.grow(l.light.i * reflectance)
	kept.grow(l.light.i - sent.i)
	j.settle(l, &sent, &kept)
	q := Leaked
	if l.mirror {
		q = Surface
	}
	j.put(q, kept.i, l.d, l)
	if sent.i <= 0 {
		return false
	}
	l.d = j.lambert(n)
	l.light = fresh(l.d)
	l.light.grow(sent.i)
	l.strewn = true
	l.bounces++
	return true
}

// lambert draws a direction about the unit vector n by Lambert's cosine law.
func (j *journey) lambert(n vec) vec {
	u := j.dice.roll()
	sin, cos := math.Sincos(2 * math.Pi * j.dice.roll())
	r := math.Sqrt(u)
	axes := fresh(n)
	return n.scale(math.Sqrt(1-u)).plus(r*cos, axes.a).plus(r*sin, axes.b)
}

// lose counts light that is absorbed. Of a clear surface, rounding leaves a trifle of
// either sign: the negative half is not counted.
func (j *journey) lose(power float64) {
	if power > 0 {
		j.ledger.Absorbed += power
	}
}

// put enters power of a leg that leaves along d in the ledger, and in the sums what is
// seen of it.
func (j *journey) put(q Quantity, power float64, d vec, l *leg) {
	if power == 0 {
		return
	}
	up := d.dot(j.outline.eye)
	lit := litReturned
	switch q {
	case Surface:
		j.ledger.Surface += power
		lit = litSurface
	case Leaked:
		j.ledger.Leaked += power
		lit = litLeaked
	case Head:
		j.ledger.Head += power
	default:
		j.ledger.Returned += power
	}
	if q == Returned || q == Head {
		j.sums[firstFrom+j.bins.of(up)] += power
	}
	j.sums[pathLength] += power * l.path
	if j.doors != nil && l.door != noDoor {
		j.doors[l.door][q] += power
	}
	j.sums[lit] += power * j.seen(d, j.w)
}

// entry returns the facet through which a ray from x outside along the unit vector d
// enters the body and how far that is; ok is false where it does not, as for a ray
// that leads away from a facet it has just left.
func (b *body) entry(x, d vec) (facet int, s float64, ok bool) {
	// A touch within rounding of the stone's edges is none.
	const touch = 1e-12
	facet, s = -1, touch
	far := math.Inf(1)
	for j, m := range b.rows {
		slope, gap := m.dot(d), 1-m.dot(x)
		switch {
		case slope < 0:
			if t := gap / slope; t > s {
				facet, s = j, t
			}
		case slope > 0:
			far = min(far, gap/slope)
		case gap < 0:
			return 0, 0, false
		}
	}
	return facet, s, facet >= 0 && s < far-touch
}
