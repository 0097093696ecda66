package main

import (
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// aim finds in the map by direction, for the farthest point that each ray's exit can
// be, the list of the facets that can be passed in that direction. It does what
// body.largest does.
func aim() {
	eachGroup("aim", "Find the list of facets in the direction of each ray's exit.", func() {
		s := load(ray("s"))
		var y [3]vector
		for i, x := range []Op{position().x, position().y, position().z} {
			y[i] = load(x)
			addProduct(y[i], s, []Op{direction().x, direction().y, direction().z}[i])
		}
		size := and(y[0], magnitude())
		size = add(size, and(y[1], magnitude()))
		size = add(size, and(y[2], magnitude()))
		// A little less than half, so that the rim of the square belongs to the last cell.
		k := div(load(number(directions/2*(1-1.0/(1<<22)))), size)
		column, line := load(number(directions/2)), load(number(directions/2))
		addProduct(column, y[0], k)
		addProduct(line, y[1], k)
		cell := addInt(truncate(column), left(truncate(line), log2Directions))
		// The lower half of the map begins directions² cells on: the sign's bit, moved.
		cell = addInt(cell, andInt(right(y[2], 31-2*log2Directions), spread("lower", directions*directions)))
		// Whatever the numbers are, stay in the table.
		cell = andInt(cell, spread("inTable", 2*directions*directions-1))

		cells := address("cells")
		eachNumber(cell, func(i int, number reg.GPVirtual) {
			ctx.MOVWLZX(Mem{Base: cells, Index: number, Scale: 2}, number.As32())
			ctx.MOVL(number.As32(), ray("list").Offset(4*i))
		})
	})
}

// The size of the map by direction, as in body.go.
const (
	log2Directions = 7
	directions     = 1 << log2Directions
)

// look is one rough step of Newton's method: come back to the plane of the facet that
// is the likeliest in that direction. Any facet will do: it costs a step at worst.
func look() {
	eachGroup("look", "One step toward the exit, by the likeliest facet.", func() {
		lists, planes := address("lists"), address("planes")
		name := ctx.GP64()
		m, number := rowsOf(planes, func(i int) reg.Register {
			ctx.MOVL(ray("list").Offset(4*i), name.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: name, Scale: 8}, name.As32())
			return name
		})
		s, facet := try(m, number, load(ray("s")), load(ray("facet")))
		store(s, ray("s"))
		store(facet, ray("facet"))
	})
}

// settle is an exact step: every facet of the list is tried. A ray that none of them
// brings nearer stands on its exit. A list is a chain of pairs.
func settle() {
	eachGroup("settle", "One step toward the exit, by every facet that can be it; notes who has arrived.", func() {
		lists, planes := address("lists"), address("planes")
		near, nearest := load(ray("s")), load(ray("facet"))
		doubt := load(ray("doubt"))
		name, list, more := ctx.GP64(), ctx.GP64(), ctx.GP64()

		ctx.Label("pair")
		m, number := rowsOf(planes, func(i int) reg.Register {
			ctx.MOVL(ray("list").Offset(4*i), name.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: name, Scale: 8}, name.As32())
			return name
		})
		tell(doubt, m, number, near, nearest)
		s, facet := try(m, number, near, nearest)
		ctx.XORL(more.As32(), more.As32())
		m, number = rowsOf(planes, func(i int) reg.Register {
			ctx.MOVL(ray("list").Offset(4*i), list.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8, Disp: 2}, name.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8, Disp: 4}, list.As32())
			ctx.MOVL(list.As32(), ray("list").Offset(4*i))
			ctx.ORL(list.As32(), more.As32())
			return name
		})
		tell(doubt, m, number, s, facet)
		s, facet = try(m, number, s, facet)
		ctx.VMOVAPS(s, near)
		ctx.VMOVAPS(facet, nearest)
		// Where any list is longer, go on to the next pair of all.
		ctx.TESTL(more.As32(), more.As32())
		ctx.JNE(LabelRef("pair"))

		store(compare(near, equal, ray("s")), ray("arrived"))
		store(near, ray("s"))
		store(nearest, ray("facet"))
		store(doubt, ray("doubt"))
	})
}

// tell marks the rays in doubt: where they come to the plane of their facet they are so
// close to another that rounding may have decided between the two.
func tell(doubt vector, m triple, name, s, facet vector) {
	slope, x := dot(m, direction()), position()
	gap := load(one())
	subProduct(gap, in(m.x), x.x)
	subProduct(gap, in(m.y), x.y)
	subProduct(gap, in(m.z), x.z)
	subProduct(gap, slope, s)
	tied := compare(and(gap, magnitude()), lessThan, tieLimit())
	tied = and(tied, compare(slope, moreThan, zero()))
	same := ctx.YMM()
	ctx.VPCMPEQD(name, facet, same)
	ctx.VORPS(without(same, tied), doubt, doubt)
}

// tieLimit is how close two facets' planes count as tied, as a share of their distance
// from the middle of the stone: many rounding errors, and more with every facet, since
// they add up.
func tieLimit() vector {
	limit := load(number(2e-6))
	addProduct(limit, float(ray("bounces")), number(2.5e-7))
	return limit
}

// address loads where a table is.
func address(name string) reg.GPVirtual {
	at := ctx.GP64()
	ctx.MOVQ(table(name), at)
	return at
}

// rowsOf loads for each ray the plane with the doubled number that name returns, as m,
// and that number.
func rowsOf(planes reg.Register, name func(i int) reg.Register) (m triple, number vector) {
	x, y, z, number := rows(func(i int) Mem { return Mem{Base: planes, Index: name(i), Scale: 8} })
	return triple{x, y, z}, number
}

// try brings the exit back to the plane m.x = 1 where the ray runs out through that
// nearer than s. Where rounding puts the ray's start beyond the plane the exit is
// where the ray is.
func try(m triple, number, s, facet vector) (near, nearest vector) {
	slope := dot(m, direction())
	rest, x := load(one()), position()
	subProduct(rest, in(m.x), x.x)
	subProduct(rest, in(m.y), x.y)
	subProduct(rest, in(m.z), x.z)
	to := larger(div(rest, slope), zero())
	nearer := and(compare(to, lessThan, s), compare(slope, moreThan, zero()))
	return choose(nearer, to, s), choose(nearer, number, facet)
}

func position() triple  { return triple{ray("x"), ray("y"), ray("z")} }
func direction() triple { return triple{ray("dx"), ray("dy"), ray("dz")} }

func one() Mem       { return number(1) }
func zero() Mem      { return number(0) }
func magnitude() Mem { return spread("magnitude", 1<<31-1) }
