package main

import (
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// surface moves each ray that has arrived to its exit, splits it there and mirrors
// what stays. A ray still on its way moves nowhere, turns nowhere and sheds nothing:
// its step, its turn and its share are masked to 0.
//
// Letters as in Fresnel's equations: c and g are the cosines of incidence and
// refraction, e = n/m the ratio of the indices.
func surface(name string, polarised bool) {
	eachGroup(name, "Split the light of the rays that have arrived and mirror what stays.", func(flight, group reg.Register) {
		n, normalToEye := normals(flight, group)
		// The least cosine turns back a grazing ray that rounding would let pass by.
		c := larger(dot(n, direction(group)), number(leastCosine))
		e := load(field(group, "group_eta"))
		// Snell: g² = 1 - e²(1 - c²), negative under total reflection.
		e2, g2 := mul(e, e), load(one())
		g2 = sub(g2, e2)
		addProduct(g2, mul(c, c), e2)
		g := squareRoot(and(g2, magnitude()))

		// The cosine between the way out and the eye; of no meaning under total reflection.
		up := mul(dot(eye(flight), direction(group)), e)
		bend := sub(g, mul(c, e))
		addProduct(up, bend, normalToEye)
		store(up, field(group, "group_up"))

		var q, u vector
		var turn rotation
		if polarised {
			turn = turnAxes(group, n)
			q, u = turn.turn(load(field(group, "group_q")), load(field(group, "group_u")))
		}
		mirror(flight, group, n, c)

		arrives := load(field(group, "group_i"))
		if polarised {
			reflectPolarised(flight, group, arrives, q, u, c, e, g, g2, turn)
		} else {
			reflectAveraged(flight, group, arrives, c, e, larger(g2, zero()))
		}
		endPaths(flight, group)
	})
}

// leastCosine is of the angle of incidence: some rounding errors of a cosine.
const leastCosine = 1e-6

// normals loads the normal of each ray's facet, and its cosine to the eye.
func normals(flight, group reg.Register) (n triple, toEye vector) {
	table, facet := ctx.GP64(), ctx.GP64()
	ctx.MOVQ(field(flight, "flight_normals"), table)
	x, y, z, toEye := rows(func(ray int) Mem {
		ctx.MOVL(field(group, "group_facet").Offset(4*ray), facet.As32())
		return Mem{Base: table, Index: facet, Scale: 8}
	})
	return triple{x, y, z}, toEye
}

// mirror moves the rays to their exits, turns them there and starts the search for
// the next exit on the sphere that holds the stone.
func mirror(flight, group reg.Register, n triple, c vector) {
	step := and(load(field(group, "group_s")), field(group, "group_arrived"))
	turn := and(add(c, c), field(group, "group_arrived"))
	var xx, xd vector // x.x and x.d
	for i, axis := range []struct{ x, d, n Op }{
		{position(group).x, direction(group).x, n.x},
		{position(group).y, direction(group).y, n.y},
		{position(group).z, direction(group).z, n.z},
	} {
		x, d := load(axis.x), load(axis.d)
		addProduct(x, step, d)
		subProduct(d, turn, axis.n)
		store(x, axis.x.(Mem))
		store(d, axis.d.(Mem))
		if i == 0 {
			xx, xd = mul(x, x), mul(x, d)
		} else {
			addProduct(xx, x, x)
			addProduct(xd, x, d)
		}
	}

	// |x + s d| = r, for unit d: s = sqrt((x.d)² + r² - x.x) - x.d
	root := sub(load(number(sphere*sphere)), xx)
	addProduct(root, xd, xd)
	start := sub(squareRoot(larger(root, zero())), xd)
	store(choose(load(field(group, "group_arrived")), start, load(field(group, "group_s"))), field(group, "group_s"))
}

// sphere is the radius of the sphere that Newton's method starts from: it holds the
// stone, of radius 1, with room for many rounding errors.
const sphere = 1.001

// reflectAveraged takes half of the light as polarised across the plane of
// incidence and half as along it.
func reflectAveraged(flight, group reg.Register, arrives, c, e, g2 vector) {
	g := squareRoot(g2)
	p, h := mul(c, e), mul(g, e)
	rs := div(sub(p, g), add(p, g))
	rp := div(sub(c, h), add(c, h))
	r := mul(rs, rs)
	addProduct(r, rp, rp)
	r = mul(r, number(0.5))
	through := sub(arrives, mul(arrives, r))
	through, _ = endGame(flight, group, arrives, through)
	store(through, field(group, "group_through"))
	store(sub(arrives, through), field(group, "group_i"))
}

// rotation is by the angle whose double has this cosine and sine: that is how Stokes
// vectors turn.
type rotation struct{ cos, sin vector }

func (r rotation) turn(q, u vector) (vector, vector) {
	q2, u2 := mul(q, r.cos), mul(u, r.cos)
	addProduct(q2, u, r.sin)
	subProduct(u2, q, r.sin)
	return q2, u2
}

// turnAxes mirrors the axis a of the light's polarisation and returns the turn that
// would lay it across the plane of incidence. The other axis is b = d × a.
func turnAxes(group reg.Register, n triple) rotation {
	d := direction(group)
	a := [3]vector{load(field(group, "group_ax")), load(field(group, "group_ay")), load(field(group, "group_az"))}
	na := dot(n, triple{a[0], a[1], a[2]})
	cross := func(d1, a2, d2, a1 Op) vector {
		v := mul(in(a2), d1)
		subProduct(v, in(a1), d2)
		return v
	}
	nb := dot(n, triple{cross(d.y, a[2], d.z, a[1]), cross(d.z, a[0], d.x, a[2]), cross(d.x, a[1], d.y, a[0])})
	off := and(add(na, na), field(group, "group_arrived"))
	for i, to := range []string{"group_ax", "group_ay", "group_az"} {
		subProduct(a[i], off, []Op{n.x, n.y, n.z}[i])
		store(a[i], field(group, to))
	}

	// The angle's cosine is nb/sinI, its sine -na/sinI. Straight on there is no plane
	// of incidence and no turn: that is what the tiny number is for.
	cos, sin := mul(nb, nb), mul(na, nb)
	sin2I := add(cos, number(tiny))
	addProduct(sin2I, na, na)
	cos = add(cos, number(tiny))
	subProduct(cos, na, na)
	sin = mul(sin, number(-2))
	over := div(load(one()), sin2I)
	return rotation{mul(cos, over), mul(sin, over)}
}

// tiny is far below the square of a rounding error and far above the smallest number.
const tiny = 1e-30

// reflectPolarised applies the Mueller matrix of the reflection, as beam.reflect
// does, between the turn and the turn back. Here the axes stay right-handed, which
// changes the signs of u and v. q and u are turned already.
func reflectPolarised(flight, group reg.Register, arrives, q, u, c, e, g, g2 vector, turn rotation) {
	p, h := mul(c, e), mul(g, e)
	rs := div(sub(p, g), add(p, g))
	rp := div(sub(c, h), add(c, h))
	// Total reflection takes all, and shifts the phase: rs rp* = (X + iY)²/(X² + Y²)
	// with X = e sinI² and Y = c g.
	rs, rp = choose(g2, one(), rs), choose(g2, one(), rp)
	inStep := mul(rs, rp)
	x := mul(c, c)
	x = mul(sub(load(one()), x), e)
	y := mul(c, g)
	x2, y2 := mul(x, x), mul(y, y)
	over := div(load(one()), add(x2, y2))
	inStep = choose(g2, mul(sub(x2, y2), over), inStep)
	xy := mul(mul(x, y), over)
	apart := choose(g2, add(xy, xy), load(zero()))

	rs, rp = mul(mul(rs, rs), number(0.5)), mul(mul(rp, rp), number(0.5))
	mean, half := add(rs, rp), sub(rs, rp)
	i := mul(mean, arrives)
	addProduct(i, half, q)
	q = mul(q, mean)
	addProduct(q, half, arrives)
	v := load(field(group, "group_v"))
	v2 := mul(v, inStep)
	addProduct(v2, u, apart)
	u = mul(u, inStep)
	subProduct(u, v, apart)
	// The mirrored axes run the other way round, so turning back looks like this too.
	q, u = turn.turn(q, u)

	// Store what is settled whatever the end-game says, so that registers suffice.
	arrived := load(field(group, "group_arrived"))
	for i, name := range []string{"group_q", "group_u", "group_v"} {
		store(choose(arrived, []Op{q, u, v2}[i], load(field(group, name))), field(group, name))
	}

	through, faint := endGame(flight, group, arrives, larger(sub(arrives, i), zero()))
	stays := sub(arrives, through)
	store(through, field(group, "group_through"))
	store(stays, field(group, "group_i"))
	// Where the end-game gave the faint path all, its polarised part grows alike.
	grown := choose(faint, div(stays, i), load(one()))
	for _, name := range []string{"group_q", "group_u", "group_v"} {
		store(mul(grown, field(group, name)), field(group, name))
	}
}

// endGame lets all of a faint path go through or all of it stay, by the throw of a
// die, and masks the rays that have not arrived.
func endGame(flight, group reg.Register, arrives, through vector) (goes, faint vector) {
	faint = and(compare(arrives, lessThan, field(flight, "flight_faint")), compare(through, moreThan, zero()))
	faint = and(faint, field(group, "group_arrived"))
	// The die of sample.go: a counter, hashed.
	die := load(field(group, "group_die"))
	die = addInt(die, andInt(faint, spread("dieStep", dieStep)))
	store(die, field(group, "group_die"))
	die = mulInt(xorInt(die, right(die, 16)), spread("dieHash1", dieHash1))
	die = mulInt(xorInt(die, right(die, 15)), spread("dieHash2", dieHash2))
	die = xorInt(die, right(die, 15))
	throw := mul(float(right(die, 8)), number(1.0/(1<<24)))
	leaves := compare(mul(throw, arrives), lessThan, through)
	goes = choose(faint, and(leaves, arrives), through)
	return and(goes, field(group, "group_arrived")), faint
}

// The die's constants, as in sample.go; a test compares them.
const (
	dieStep  = 0x9e3779b9
	dieHash1 = 0x21f0aaad
	dieHash2 = 0x735a2d97
)

// endPaths counts the bounce and notes whose path is over: nothing is left, or it
// has come to its last bounce.
func endPaths(flight, group reg.Register) {
	arrived := load(field(group, "group_arrived"))
	bounces := subInt(load(field(group, "group_bounces")), arrived)
	store(bounces, field(group, "group_bounces"))
	over := compare(load(field(group, "group_i")), notAbove, field(flight, "flight_cut"))
	over = or(over, moreInt(bounces, field(flight, "flight_most")))
	over = and(over, arrived)
	bits := ctx.GP32()
	ctx.VMOVMSKPS(over, bits)
	ctx.MOVL(bits, field(group, "group_over"))
}

func eye(flight reg.Register) triple {
	return triple{load(field(flight, "flight_eyex")), load(field(flight, "flight_eyey")), load(field(flight, "flight_eyez"))}
}
