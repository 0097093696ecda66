package main

import (
	"fmt"
	"math"

	"github.com/mmcloughlin/avo/attr"
	"github.com/mmcloughlin/avo/build"
	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// ctx collects what is written.
var ctx = build.NewContext()

// vector is a register of eight float32 or int32, one a ray.
type vector = reg.VecVirtual

// triple is three vectors: a point or direction a ray. Its parts may be in memory.
type triple struct{ x, y, z Op }

// field is a place in a structure of package trace, by the name that go_asm.h
// gives it.
func field(base reg.Register, name string) Mem {
	return Mem{Symbol: Symbol{Name: name}, Base: base}
}

// spread is a constant in memory, eight times side by side.
func spread(name string, bits uint32) Mem {
	if m, ok := spreads[name]; ok {
		return m
	}
	m := ctx.StaticGlobal(name)
	ctx.DataAttributes(attr.RODATA | attr.NOPTR)
	for i := range 8 {
		ctx.AddDatum(4*i, U32(bits))
	}
	spreads[name] = m
	return m
}

var spreads = map[string]Mem{}

// number is a spread float32; its name is made from its value.
func number(v float32) Mem {
	bits := math.Float32bits(v)
	return spread(fmt.Sprintf("f%08x", bits), bits)
}

func load(m Op) vector {
	v := ctx.YMM()
	ctx.VMOVUPS(m, v)
	return v
}

func store(v vector, m Mem) { ctx.VMOVUPS(v, m) }

// In each of these the last operand may be in memory.

func add(a vector, b Op) vector { return three(ctx.VADDPS, a, b) }
func sub(a vector, b Op) vector { return three(ctx.VSUBPS, a, b) }
func mul(a vector, b Op) vector { return three(ctx.VMULPS, a, b) }
func div(a vector, b Op) vector { return three(ctx.VDIVPS, a, b) }
func and(a vector, b Op) vector { return three(ctx.VANDPS, a, b) }
func or(a vector, b Op) vector  { return three(ctx.VORPS, a, b) }

// without is b where the bits of a are not set.
func without(a vector, b Op) vector { return three(ctx.VANDNPS, a, b) }

// larger and smaller return b where either is not a number.
func larger(a vector, b Op) vector  { return three(ctx.VMAXPS, a, b) }
func smaller(a vector, b Op) vector { return three(ctx.VMINPS, a, b) }

func addInt(a vector, b Op) vector { return three(ctx.VPADDD, a, b) }
func subInt(a vector, b Op) vector { return three(ctx.VPSUBD, a, b) }
func mulInt(a vector, b Op) vector { return three(ctx.VPMULLD, a, b) }

func smallerInt(a vector, b Op) vector { return three(ctx.VPMINSD, a, b) }

func andInt(a vector, b Op) vector {
	v := ctx.YMM()
	ctx.VPAND(b, a, v)
	return v
}

func xorInt(a vector, b Op) vector {
	v := ctx.YMM()
	ctx.VPXOR(b, a, v)
	return v
}

// moreInt tells where a > b, signed.
func moreInt(a vector, b Op) vector { return three(ctx.VPCMPGTD, a, b) }

func three(instruction func(...Op), a vector, b Op) vector {
	v := ctx.YMM()
	instruction(b, a, v)
	return v
}

func left(a vector, bits int) vector {
	v := ctx.YMM()
	ctx.VPSLLD(Imm(uint64(bits)), a, v)
	return v
}

func right(a vector, bits int) vector {
	v := ctx.YMM()
	ctx.VPSRLD(Imm(uint64(bits)), a, v)
	return v
}

func squareRoot(a Op) vector { return two(ctx.VSQRTPS, a) }
func truncate(a Op) vector   { return two(ctx.VCVTTPS2DQ, a) }
func float(a Op) vector      { return two(ctx.VCVTDQ2PS, a) }

func two(instruction func(...Op), a Op) vector {
	v := ctx.YMM()
	instruction(a, v)
	return v
}

// The comparisons tell where they hold, in all bits; not where either is no number.
const (
	equal    = 0x00
	lessThan = 0x11
	atMost   = 0x12
	moreThan = 0x1e
	notAbove = 0x1a // a > b does not hold: also where either is no number
)

func compare(a vector, how int, b Op) vector {
	v := ctx.YMM()
	ctx.VCMPPS(Imm(uint64(how)), b, a, v)
	return v
}

// choose is a where the mask's uppermost bit is set, else b.
func choose(mask vector, a Op, b vector) vector {
	v := ctx.YMM()
	ctx.VBLENDVPS(mask, a, b, v)
	return v
}

// addProduct adds a b to sum, in place; subProduct takes it off.
func addProduct(sum, a vector, b Op) { ctx.VFMADD231PS(b, a, sum) }
func subProduct(sum, a vector, b Op) { ctx.VFNMADD231PS(b, a, sum) }

func dot(a triple, b triple) vector {
	sum := mul(in(a.x), b.x)
	addProduct(sum, in(a.y), b.y)
	addProduct(sum, in(a.z), b.z)
	return sum
}

// along is the point s along d from x, each part in a new register.
func along(x triple, s vector, d triple) (p [3]vector) {
	for i, from := range []Op{x.x, x.y, x.z} {
		p[i] = load(from)
		addProduct(p[i], s, []Op{d.x, d.y, d.z}[i])
	}
	return p
}

// in returns the operand as a register.
func in(a Op) vector {
	if v, ok := a.(vector); ok {
		return v
	}
	return load(a)
}

// rows loads a row of four numbers for each ray and turns the eight rows into four
// vectors.
func rows(row func(ray int) Mem) (a, b, c, d vector) {
	var r [4]vector
	for i := range r {
		r[i] = ctx.YMM()
		ctx.VBROADCASTF128(row(i), r[i])
		ctx.VINSERTF128(Imm(1), row(i+4), r[i], r[i])
	}
	ab01, ab23 := three(ctx.VUNPCKLPS, r[0], r[1]), three(ctx.VUNPCKLPS, r[2], r[3])
	cd01, cd23 := three(ctx.VUNPCKHPS, r[0], r[1]), three(ctx.VUNPCKHPS, r[2], r[3])
	return three(ctx.VUNPCKLPD, ab01, ab23), three(ctx.VUNPCKHPD, ab01, ab23),
		three(ctx.VUNPCKLPD, cd01, cd23), three(ctx.VUNPCKHPD, cd01, cd23)
}

// eachGroup writes a function that does body for each group of a flight. body is given
// the registers that hold where the flight and the group are.
func eachGroup(name, doc string, body func(flight, group reg.Register)) {
	ctx.Function(name)
	ctx.Attributes(attr.NOSPLIT)
	ctx.SignatureExpr("func(f uintptr)")
	ctx.Comment(doc)
	flight, group, left := ctx.GP64(), ctx.GP64(), ctx.GP64()
	ctx.Load(ctx.Param("f"), flight)
	ctx.LEAQ(field(flight, "flight_groups"), group)
	ctx.MOVQ(field(flight, "flight_busy"), left)
	ctx.Label("next")
	body(flight, group)
	ctx.LEAQ(field(group, "group__size"), group)
	ctx.DECQ(left)
	ctx.JNE(LabelRef("next"))
	// The caller's code may use the older vector instructions, which are slow while
	// the upper halves are in use.
	ctx.VZEROUPPER()
	ctx.RET()
}
