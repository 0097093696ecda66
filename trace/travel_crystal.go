package trace

import (
	"math"

	"pavilight/facets"
)

// twin holds a doubly refracting stone's absorption at one wavelength, per unit of the
// stone, beside its crystal.
type twin struct {
	crystal
	natural [3]float64 // of light that vibrates along each principal axis
}

// along returns the absorption of a wave per unit of its ray's way.
func (c *twin) along(k vec, extra bool) float64 {
	if c.natural == [3]float64{} {
		return 0
	}
	return c.absorption(k, extra, c.natural)
}

// bothWaves is the power, as a share of the viewing ray, from which both waves of light
// that goes in are followed: the first time it does, that is. Choosing one there would
// be as right, but the two see different things, so following both is worth its time.
const bothWaves = 0.1

// landDouble is land on a doubly refracting stone.
func (j *journey) landDouble(k int, l leg) {
	n := j.body.normal[k]
	e := outside(j.twin.crystal, &l.light, l.d, n.scale(-1), j.lambda.medium[k])
	off := l
	off.d, off.light = l.d.plus(-2*l.d.dot(n), n), e.mirrored
	in := beam{i: e.power[0] + e.power[1]}
	j.settle(&l, &off.light, &in)
	j.turnBack(k, off)
	l.inside, l.mirror = true, false
	if in.i >= bothWaves {
		for i := range e.waves {
			if e.power[i] > 0 {
				l.become(&e.waves[i], e.power[i])
				j.stack = append(j.stack, l)
			}
		}
	} else if in.i > 0 {
		l.become(&e.waves[j.pick(e.power)], in.i)
		j.stack = append(j.stack, l)
	}
}

// become makes a leg one wave in the crystal.
func (l *leg) become(w *wave, power float64) {
	l.d, l.k, l.extra, l.light = w.ray, w.k, w.extra, beam{i: power}
}

// pick chooses one of two branches in proportion to their powers.
func (j *journey) pick(power [2]float64) int {
	switch {
	case power[1] <= 0:
		return 0
	case power[0] <= 0 || j.dice.roll()*(power[0]+power[1]) >= power[0]:
		return 1
	}
	return 0
}

// runDouble is run in a doubly refracting stone: at each facet what goes through is
// shed, and of the two waves that are reflected one is followed, chosen by a die in
// proportion to its power and given the power of both.
func (j *journey) runDouble(l leg) {
	b := j.body
	for ; l.bounces < mostBounces; l.bounces++ {
		k, s := b.exit(l.x, l.d)
		l.x = l.x.plus(s, l.d)
		l.path += s
		j.sums[segmentCount]++
		if a := j.twin.along(l.k, l.extra); a > 0 {
			left := l.light.i * math.Exp(-a*s)
			j.lose(l.light.i - left)
			if l.light.i = left; left == 0 {
				return
			}
		}
		at := inside(j.twin.crystal, l.k, l.extra, b.normal[k], j.lambda.medium[k])
		all := l.light.i
		through := at.through
		if through.i > 0 {
			through.grow(all * through.i)
		}
		reflected := beam{i: all * (at.power[0] + at.power[1])}
		j.settle(&l, &reflected, &through)
		if !l.seen && b.side[k] == facets.Pavilion {
			l.seen = true
			j.sees(through.i, at.out)
		}
		if through.i > 0 {
			left := l
			left.d, left.light, left.inside = at.out, through, false
			j.away(k, left)
		}
		if reflected.i <= 0 {
			return
		}
		l.become(&at.back[j.pick(at.power)], reflected.i)
	}
	j.ledger.Unresolved += l.light.i
}
