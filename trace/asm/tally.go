package main

import (
	"math"

	. "github.com/mmcloughlin/avo/operand"
)

// tally puts what goes through a surface down in the ledger of its ray, and in the
// bins by angle from the eye.
func tally() {
	eachGroup("tally", "Put down where the light goes that has gone through.", func() {
		through, up := load(ray("through")), load(ray("up"))
		down := compare(up, atMost, zero())
		toHead := compare(up, moreThan, all("headCos"))

		deposit := func(name string, share vector) {
			store(add(share, ray(name)), ray(name))
		}
		deposit("leaked", and(down, through))
		deposit("head", and(toHead, through))
		deposit("returned", without(or(down, toHead), through))

		// The first meeting with the pavilion decides whether one sees through.
		meets := moreInt(load(all("pavilion")), ray("facet"))
		meets = and(meets, ray("arrived"))
		meets = and(meets, ray("unmet"))
		seen := and(and(meets, down), compare(through, moreThan, number(0.5)))
		store(or(seen, ray("windowed")), ray("windowed"))
		store(without(meets, ray("unmet")), ray("unmet"))

		bin(without(down, through), up)
	})
}

// bin adds shares to the bins of 5 degrees of the angle from the eye. Each place in
// a group and each medium has bins of its own, which the caller adds up.
func bin(share, up vector) {
	angle := arcCosine(smaller(larger(up, zero()), one()))
	k := truncate(mul(angle, number(18/(math.Pi/2))))
	k = smallerInt(k, spread("lastBin", 17))
	store(addInt(left(k, 3), ray("bins")), ray("bin"))

	bins, at, sum := ctx.GP64(), ctx.GP64(), ctx.XMM()
	ctx.MOVQ(table("bins"), bins)
	wide := ctx.YMM()
	for half := range 2 {
		four := ctx.XMM()
		ctx.VEXTRACTF128(Imm(uint64(half)), share, four)
		ctx.VCVTPS2PD(four, wide)
		store(wide, ray("wide").Offset(32*half))
	}
	for i := range 8 {
		ctx.MOVL(ray("bin").Offset(4*i), at.As32())
		ctx.VMOVSD(Mem{Base: bins, Index: at, Scale: 1}, sum)
		ctx.VADDSD(ray("wide").Offset(8*i), sum, sum)
		ctx.VMOVSD(sum, Mem{Base: bins, Index: at, Scale: 1})
	}
}

// arcCosine is in [0, pi/2] for x in [0, 1], within 2e-8 and rounding. Abramowitz &
// Stegun, Handbook of Mathematical Functions, 4.4.46.
func arcCosine(x vector) vector {
	sum := load(number(-0.0012624911))
	for _, a := range []float32{0.0066700901, -0.0170881256, 0.0308918810, -0.0501743046, 0.0889789874, -0.2145988016, 1.5707963050} {
		next := load(number(a))
		addProduct(next, sum, x)
		sum = next
	}
	return mul(sum, squareRoot(sub(load(one()), x)))
}
