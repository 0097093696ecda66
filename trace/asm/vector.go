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

// here is where the pass that is being written stands: the registers that point to
// the tables, the flight and the group it works on.
var here struct{ tables, flight, group reg.Register }

// ray, all and table are the fields of that name in the group, the flight and the
// tables; go_asm.h has their places.
func ray(name string) Mem   { return field(here.group, "group_"+name) }
func all(name string) Mem   { return field(here.flight, "flight_"+name) }
func table(name string) Mem { return field(here.tables, "tables_"+name) }

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

// in returns the operand as a register.
func in(a Op) vector {
	if v, ok := a.(vector); ok {
		return v
	}
	return load(a)
}

// rows loads a row of four numbers for each ray and turns the eight rows into four
// vectors.
func rows(row func(i int) Mem) (a, b, c, d vector) {
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

// eachNumber takes the eight numbers out of v, one after the other. That is quicker
// than to store them and load them again.
func eachNumber(v vector, use func(i int, number reg.GPVirtual)) {
	upper := ctx.XMM()
	ctx.VEXTRACTI128(Imm(1), v, upper)
	for i := range 8 {
		four := v.AsX()
		if i >= 4 {
			four = upper
		}
		number := ctx.GP64()
		ctx.VPEXTRD(Imm(uint64(i%4)), four, number.As32())
		use(i, number)
	}
}

// eachGroup writes a function that does body for each busy group of a flight.
func eachGroup(name, doc string, body func()) {
	ctx.Function(name)
	ctx.Attributes(attr.NOSPLIT)
	ctx.SignatureExpr("func(t, f uintptr)")
	ctx.Comment(doc)
	here.tables, here.flight, here.group = ctx.GP64(), ctx.GP64(), ctx.GP64()
	left := ctx.GP64()
	ctx.Load(ctx.Param("t"), here.tables)
	ctx.Load(ctx.Param("f"), here.flight)
	ctx.LEAQ(all("groups"), here.group)
	ctx.MOVQ(table("busy"), left)
	ctx.Label("next")
	body()
	ctx.LEAQ(ray("_size"), here.group)
	ctx.DECQ(left)
	ctx.JNE(LabelRef("next"))
	// The caller's code may use the older vector instructions, which are slow while
	// the upper halves are in use.
	ctx.VZEROUPPER()
	ctx.RET()
}
