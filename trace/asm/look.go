package main

import (
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// look is one rough step of Newton's method: at the farthest point that the exit
// can be, ask the map by direction for the facet that is likely the one passed
// there, and come back to its plane. Any facet will do: it costs a step at worst.
func look() {
	eachGroup("look", "One step toward the exit, by the likeliest facet.", func(flight, group reg.Register) {
		s := load(field(group, "group_s"))
		cells, lists, planes := tables(flight)
		storeCells(group, s)

		name := ctx.GP64()
		m, number := namedRows(planes, func(ray int) reg.Register {
			ctx.MOVL(field(group, "group_cell").Offset(4*ray), name.As32())
			ctx.MOVWLZX(Mem{Base: cells, Index: name, Scale: 2}, name.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: name, Scale: 8}, name.As32())
			return name
		})
		facet := load(field(group, "group_facet"))
		s, facet = try(group, m, number, s, facet)
		store(s, field(group, "group_s"))
		store(facet, field(group, "group_facet"))
	})
}

// settle is an exact step: every facet is tried that can be the one passed in that
// direction. A ray that none of them brings nearer stands on its exit.
func settle() {
	eachGroup("settle", "One step toward the exit, by every facet that can be it; notes who has arrived.", func(flight, group reg.Register) {
		s := load(field(group, "group_s"))
		facet := load(field(group, "group_facet"))
		cells, lists, planes := tables(flight)
		storeCells(group, s)

		// Each list is a chain of pairs. First the first pair of every ray.
		name, more, list := ctx.GP64(), ctx.GP64(), ctx.GP64()
		ctx.XORL(more.As32(), more.As32())
		m, number := namedRows(planes, func(ray int) reg.Register {
			cell := field(group, "group_cell").Offset(4 * ray)
			ctx.MOVL(cell, list.As32())
			ctx.MOVWLZX(Mem{Base: cells, Index: list, Scale: 2}, list.As32())
			ctx.MOVL(list.As32(), cell)
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8}, name.As32())
			return name
		})
		near, nearest := try(group, m, number, s, facet)

		ctx.Label("pair")
		m, number = namedRows(planes, func(ray int) reg.Register {
			cell := field(group, "group_cell").Offset(4 * ray)
			ctx.MOVL(cell, list.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8, Disp: 2}, name.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8, Disp: 4}, list.As32())
			ctx.MOVL(list.As32(), cell)
			ctx.ORL(list.As32(), more.As32())
			return name
		})
		n, f := try(group, m, number, near, nearest)
		ctx.VMOVAPS(n, near)
		ctx.VMOVAPS(f, nearest)

		// Then, where any list is longer, the next pairs.
		ctx.TESTL(more.As32(), more.As32())
		ctx.JEQ(LabelRef("settled"))
		ctx.XORL(more.As32(), more.As32())
		m, number = namedRows(planes, func(ray int) reg.Register {
			ctx.MOVL(field(group, "group_cell").Offset(4*ray), list.As32())
			ctx.MOVWLZX(Mem{Base: lists, Index: list, Scale: 8}, name.As32())
			return name
		})
		n, f = try(group, m, number, near, nearest)
		ctx.VMOVAPS(n, near)
		ctx.VMOVAPS(f, nearest)
		ctx.JMP(LabelRef("pair"))

		ctx.Label("settled")
		store(compare(s, equal, near), field(group, "group_arrived"))
		store(near, field(group, "group_s"))
		store(nearest, field(group, "group_facet"))
	})
}

// tables loads where the map by direction and the planes are.
func tables(flight reg.Register) (cells, lists, planes reg.Register) {
	c, l, p := ctx.GP64(), ctx.GP64(), ctx.GP64()
	ctx.MOVQ(field(flight, "flight_cells"), c)
	ctx.MOVQ(field(flight, "flight_lists"), l)
	ctx.MOVQ(field(flight, "flight_planes"), p)
	return c, l, p
}

// storeCells finds the cell of the map by direction in which each ray's farthest
// point lies, as body.largest does.
func storeCells(group reg.Register, s vector) {
	y := along(position(group), s, direction(group))
	size := and(y[0], magnitude())
	size = add(size, and(y[1], magnitude()))
	size = add(size, and(y[2], magnitude()))
	half := number(directions / 2)
	// A little less, so that the rim of the square belongs to the last cell.
	k := div(load(number(directions/2*(1-1.0/(1<<22)))), size)
	column, line := load(half), load(half)
	addProduct(column, y[0], k)
	addProduct(line, y[1], k)
	cell := addInt(truncate(column), left(truncate(line), log2Directions))
	// The lower half of the map begins directions² cells on: the sign's bit, moved.
	cell = addInt(cell, andInt(right(y[2], 31-2*log2Directions), spread("lower", directions*directions)))
	// Whatever the numbers are, stay in the table.
	cell = andInt(cell, spread("inTable", 2*directions*directions-1))
	store(cell, field(group, "group_cell"))
}

// The size of the map by direction, as in body.go; a test compares them.
const (
	log2Directions = 7
	directions     = 1 << log2Directions
)

// namedRows loads for each ray the plane with the doubled number that name returns,
// as m, and that number.
func namedRows(planes reg.Register, name func(ray int) reg.Register) (m triple, number vector) {
	x, y, z, number := rows(func(ray int) Mem { return Mem{Base: planes, Index: name(ray), Scale: 8} })
	return triple{x, y, z}, number
}

// try brings the exit back to the plane m.x = 1 where the ray runs out through that
// nearer than s. Where rounding puts the ray's start beyond the plane the exit is
// where the ray is.
func try(group reg.Register, m triple, number, s, facet vector) (near, nearest vector) {
	slope := dot(m, direction(group))
	rest := load(one())
	x := position(group)
	subProduct(rest, in(m.x), x.x)
	subProduct(rest, in(m.y), x.y)
	subProduct(rest, in(m.z), x.z)
	to := larger(div(rest, slope), zero())
	nearer := and(compare(to, lessThan, s), compare(slope, moreThan, zero()))
	return choose(nearer, to, s), choose(nearer, number, facet)
}

func position(group reg.Register) triple {
	return triple{field(group, "group_x"), field(group, "group_y"), field(group, "group_z")}
}

func direction(group reg.Register) triple {
	return triple{field(group, "group_dx"), field(group, "group_dy"), field(group, "group_dz")}
}

func one() Mem       { return number(1) }
func zero() Mem      { return number(0) }
func magnitude() Mem { return spread("magnitude", 1<<31-1) }
