package main

import (
	"math"

	. "github.com/mmcloughlin/avo/operand"
	"github.com/mmcloughlin/avo/reg"
)

// tally puts what goes through a surface down in the ledger of its ray.
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

		// Rounding may have chosen where it goes, or whether any goes at all.
		// All rays of one way leave in one direction: here it pays to be careful.
		limit := load(number(2e-5))
		close := compare(and(up, magnitude()), lessThan, limit)
		close = or(close, compare(and(sub(up, all("headCos")), magnitude()), lessThan, limit))
		close = and(close, compare(through, moreThan, zero()))
		critical := compare(and(load(ray("g2")), magnitude()), lessThan, limit)
		close = or(close, and(critical, ray("arrived")))
		store(or(close, ray("doubt")), ray("doubt"))

		// The first meeting with the pavilion decides whether one sees through.
		meets := moreInt(load(all("pavilion")), ray("facet"))
		meets = and(meets, ray("arrived"))
		meets = and(meets, ray("unmet"))
		seen := and(and(meets, down), compare(through, moreThan, number(0.5)))
		store(or(seen, ray("windowed")), ray("windowed"))
		store(without(meets, ray("unmet")), ray("unmet"))
	})
}

// bin adds what leaves upward to the bins of 5 degrees of the angle from the eye, in
// float64. Each place in a group and each medium has bins of its own, which the caller
// adds up.
func bin() {
	eachGroup("bin", "Add what leaves upward to the bins by angle from the eye.", func() {
		up := load(ray("up"))
		share := mul(and(compare(up, moreThan, zero()), ray("through")), ray("weight"))
		wide := ctx.YMM()
		for half := range 2 {
			four := ctx.XMM()
			ctx.VEXTRACTF128(Imm(uint64(half)), share, four)
			ctx.VCVTPS2PD(four, wide)
			store(wide, ray("wide").Offset(32*half))
		}

		angle := arcCosine(smaller(larger(up, zero()), one()))
		k := smallerInt(truncate(mul(angle, number(18/(math.Pi/2)))), spread("lastBin", 17))
		bins, sum := address("bins"), ctx.XMM()
		eachNumber(addInt(left(k, 3), ray("bins")), func(i int, number reg.GPVirtual) {
			at := Mem{Base: bins, Index: number, Scale: 1}
			ctx.VMOVSD(at, sum)
			ctx.VADDSD(ray("wide").Offset(8*i), sum, sum)
			ctx.VMOVSD(sum, at)
		})
	})
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
