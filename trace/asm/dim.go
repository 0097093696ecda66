package main

import (
	"math"

	. "github.com/mmcloughlin/avo/operand"
)

// dim takes off the light of rays that have arrived what the body has absorbed on
// their way.
func dim() {
	eachGroup("dim", "Take off what the body has absorbed on the way.", func() {
		left := decay(mul(load(ray("step")), ray("absorb")))
		i := load(ray("i"))
		stays := mul(i, left)
		store(stays, ray("i"))
		store(add(sub(i, stays), ray("absorbed")), ray("absorbed"))
		for _, name := range []string{"q", "u", "v"} {
			store(mul(left, ray(name)), ray(name))
		}
	})
}

// decay is exp(-x) for x not below 0, within two rounding errors; exactly 1 for 0. It
// stops falling at the smallest number. 2^t is 2^n, which is an exponent, times 2^r for
// r within 1/2 of 0, by seven terms of its series.
func decay(x vector) vector {
	t := larger(mul(x, number(-1/math.Ln2)), number(-126))
	n := ctx.YMM()
	ctx.VROUNDPS(Imm(0), t, n) // to the nearest
	r := sub(t, n)
	term, series := 1.0, []float64{1}
	for k := range 7 {
		term *= math.Ln2 / float64(k+1)
		series = append(series, term)
	}
	sum := load(number(float32(series[7])))
	for k := 6; k >= 0; k-- {
		next := load(number(float32(series[k])))
		addProduct(next, sum, r)
		sum = next
	}
	return addInt(left(truncate(n), 23), sum)
}
