package trace

import (
	"math"

	"pavilight/facets"
)

// A soiled film scatters: grease with dust in it. Light that has gone into it is
// followed from one scattering to the next, in all directions alike, until it leaves
// the film on either side or is absorbed (the equation of radiative transfer in a plane
// layer, Chandrasekhar, Radiative Transfer, 1960, ch. I; the film is so thin that light
// leaves it where it went in). Only what meets no grain keeps its polarisation.
//
// Light beyond the critical angle to the film does not enter it: grains that touch the
// stone itself, through the film, are not modelled.

// scatters reports whether there is such a film. f may be nil.
func (f *Film) scatters() bool { return f != nil && f.Scatter > 0 }

// The faces of a film, as heights in it.
const (
	atStone   = 0.0
	atOutside = 1.0
)

// soil lets a leg inside the stone meet facet k, which has a film that scatters. What
// comes out of the film goes onto the stack; l becomes what its inner face mirrors, ok
// false where that is nothing.
func (j *journey) soil(k int, l *leg) (ok bool) {
	f, v := j.film[k], j.body.normal[k]
	cosI := min(1, l.d.dot(v))
	c := plainCrossing(j.stone, f.Index, cosI)
	in := refract(l.d, v, j.stone/f.Index, cosI, c.cosT)
	reflected, into := l.light.meet(&c, l.d, v, in)
	j.settle(l, &reflected, &into)
	first := !l.seen && j.body.side[k] == facets.Pavilion
	l.seen = l.seen || first
	if into.i > 0 {
		w := *l
		w.d, w.light = in, into
		if w = j.wander(k, w, atStone); first && !w.inside {
			j.sees(w.light.i, w.d)
		}
		j.emerge(k, w)
	}
	l.light, l.d = reflected, l.d.plus(-2*cosI, v)
	return reflected.i > 0
}

// landOnSoil is land on a facet with a film that scatters.
func (j *journey) landOnSoil(k int, l leg) {
	f, v := j.film[k], j.body.normal[k].scale(-1)
	cosI := min(1, l.d.dot(v))
	c := plainCrossing(j.lambda.medium[k], f.Index, cosI)
	in := refract(l.d, v, j.lambda.medium[k]/f.Index, cosI, c.cosT)
	mirrored, into := l.light.meet(&c, l.d, v, in)
	j.settle(&l, &mirrored, &into)
	off := l
	off.d, off.light = l.d.plus(-2*cosI, v), mirrored
	j.turnBack(k, off)
	if into.i > 0 {
		l.d, l.light = in, into
		j.emerge(k, j.wander(k, l, atOutside))
	}
}

// emerge lets a leg go on that has come out of the film on facet k.
func (j *journey) emerge(k int, l leg) {
	switch {
	case l.light.i <= 0:
	case l.inside:
		l.mirror = false
		l.bounces++
		j.stack = append(j.stack, l)
	case l.mirror:
		j.stack = append(j.stack, l)
	default:
		j.away(k, l)
	}
}

// wander follows a leg in the film on facet k from one of its faces until it leaves
// the film; inside then says on which side. At each face it goes through or stays by
// the throw of a die.
func (j *journey) wander(k int, l leg, height float64) leg {
	f, n := j.film[k], j.body.normal[k]
	absorb := 4 * math.Pi * f.Extinction / float64(j.w) * f.Thickness // on a way straight through
	for range mostBounces {
		cos := l.d.dot(n)
		face, beyond, v := atOutside, j.lambda.medium[k], n
		if cos < 0 {
			face, beyond, v = atStone, j.stone, n.scale(-1)
		}
		cosI := min(1, math.Abs(cos))
		// The way to the next grain, as a share of the film's thickness.
		free := -math.Log1p(-j.dice.roll()) / f.Scatter
		toFace := math.Abs(face-height) / max(cosI, 1e-12)
		way := min(free, toFace)
		if absorb > 0 {
			left := l.light.i * math.Exp(-absorb*way)
			j.lose(l.light.i - left)
			l.light.grow(left)
			if left == 0 {
				return l
			}
		}
		if free < toFace {
			height += free * cos
			power := l.light.i
			l.d, l.strewn = j.anyDirection(), true
			l.light = fresh(l.d)
			l.light.grow(power)
			continue
		}
		height = face
		c := plainCrossing(f.Index, beyond, cosI)
		out := vec{}
		if c.cosT > 0 {
			out = refract(l.d, v, f.Index/beyond, cosI, c.cosT)
		}
		power := l.light.i
		back, through := l.light.meet(&c, l.d, v, out)
		if j.dice.roll()*power < through.i {
			through.grow(power)
			l.d, l.light, l.inside = out, through, face == atStone
			if j.averaged {
				l.light.forget()
			}
			return l
		}
		back.grow(power)
		l.d, l.light = l.d.plus(-2*cosI, v), back
		if j.averaged {
			l.light.forget()
		}
	}
	j.ledger.Unresolved += l.light.i
	l.light = beam{}
	return l
}

// anyDirection draws a direction, all alike.
func (j *journey) anyDirection() vec {
	z := 2*j.dice.roll() - 1
	sin, cos := math.Sincos(2 * math.Pi * j.dice.roll())
	r := math.Sqrt(max(0, 1-z*z))
	return vec{r * cos, r * sin, z}
}
