package main

// splitAveraged splits the light of the rays that have arrived. Half of it counts as
// polarised across the plane of incidence (s) and half as along it (p).
func splitAveraged() {
	eachGroup("splitAveraged", "Split the light of the rays that have arrived, polarisations averaged.", func() {
		g := squareRoot(larger(load(ray("g2")), zero()))
		rs, rp := amplitudes(g)
		r := mul(rs, rs)
		addProduct(r, rp, rp)
		i := load(ray("i"))
		through := sub(i, mul(i, mul(r, number(0.5))))
		endGame(i, through)
		endPaths()
	})
}

// splitPolarised does so for light of any polarisation: it applies the Mueller matrix
// of the reflection between the turn of the axes and the turn back, as beam.reflect
// does. Here the axes stay right-handed, which changes the signs of u and v.
func splitPolarised() {
	eachGroup("splitPolarised", "Split the light of the rays that have arrived.", func() {
		g2 := load(ray("g2"))
		g := squareRoot(and(g2, magnitude()))
		rs, rp := amplitudes(g)
		// Total reflection takes all, and shifts the phase: rs rp* = (X + iY)²/(X² + Y²)
		// with X = e sinI² and Y = c g.
		rs, rp = choose(g2, one(), rs), choose(g2, one(), rp)
		inStep := mul(rs, rp)
		c := load(ray("c"))
		x := mul(sub(load(one()), mul(c, c)), ray("eta"))
		y := mul(c, g)
		x2, y2 := mul(x, x), mul(y, y)
		over := div(load(one()), add(x2, y2))
		inStep = choose(g2, mul(sub(x2, y2), over), inStep)
		xy := mul(mul(x, y), over)
		apart := choose(g2, add(xy, xy), load(zero()))

		cos, sin := load(ray("cos2")), load(ray("sin2"))
		q, u := turn(load(ray("q")), load(ray("u")), cos, sin)
		arrives := load(ray("i"))
		rs, rp = mul(mul(rs, rs), number(0.5)), mul(mul(rp, rp), number(0.5))
		mean, half := add(rs, rp), sub(rs, rp)
		i := mul(mean, arrives)
		addProduct(i, half, q)
		q = mul(q, mean)
		addProduct(q, half, arrives)
		v := load(ray("v"))
		v2 := mul(v, inStep)
		addProduct(v2, u, apart)
		u = mul(u, inStep)
		subProduct(u, v, apart)
		// The mirrored axes run the other way round, so turning back looks the same.
		q, u = turn(q, u, cos, sin)
		arrived := load(ray("arrived"))
		for k, name := range []string{"q", "u", "v"} {
			store(choose(arrived, []vector{q, u, v2}[k], load(ray(name))), ray(name))
		}

		stays, faint := endGame(arrives, larger(sub(arrives, i), zero()))
		// Where the end-game gave a faint path all, its polarised part grows alike.
		grown := choose(faint, div(stays, i), load(one()))
		for _, name := range []string{"q", "u", "v"} {
			store(mul(grown, ray(name)), ray(name))
		}
		endPaths()
	})
}

// amplitudes are Fresnel's reflected amplitudes. Under total reflection, with g = 0,
// both are 1.
func amplitudes(g vector) (rs, rp vector) {
	c := load(ray("c"))
	p, h := mul(c, ray("eta")), mul(g, ray("eta"))
	return div(sub(p, g), add(p, g)), div(sub(c, h), add(c, h))
}

// turn turns the axes of a Stokes vector.
func turn(q, u, cos2, sin2 vector) (q2, u2 vector) {
	q2, u2 = mul(q, cos2), mul(u, cos2)
	addProduct(q2, u, sin2)
	subProduct(u2, q, sin2)
	return q2, u2
}

// endGame lets all of a faint path go through or all of it stay, by the throw of a
// die. Nothing goes through for the rays that have not arrived.
func endGame(arrives, through vector) (stays, faint vector) {
	faint = and(compare(arrives, lessThan, all("faint")), compare(through, moreThan, zero()))
	faint = and(faint, ray("arrived"))
	// The die of sample.go: a counter, hashed.
	die := addInt(load(ray("die")), andInt(faint, spread("dieStep", dieStep)))
	store(die, ray("die"))
	die = mulInt(xorInt(die, right(die, 16)), spread("dieHash1", dieHash1))
	die = mulInt(xorInt(die, right(die, 15)), spread("dieHash2", dieHash2))
	die = xorInt(die, right(die, 15))
	throw := mul(float(right(die, 8)), number(1.0/(1<<24)))
	leaves := compare(mul(throw, arrives), lessThan, through)

	through = choose(faint, and(leaves, arrives), through)
	through = and(through, ray("arrived"))
	stays = sub(arrives, through)
	store(through, ray("through"))
	store(stays, ray("i"))
	return stays, faint
}

// The die's constants, as in sample.go.
const (
	dieStep  = 0x9e3779b9
	dieHash1 = 0x21f0aaad
	dieHash2 = 0x735a2d97
)

// endPaths counts the bounce and notes whose path is over: nothing is left, or it
// has come to its last bounce.
func endPaths() {
	arrived := load(ray("arrived"))
	bounces := subInt(load(ray("bounces")), arrived)
	store(bounces, ray("bounces"))
	over := compare(load(ray("i")), notAbove, all("cut"))
	over = and(or(over, moreInt(bounces, all("most"))), arrived)
	bits := ctx.GP32()
	ctx.VMOVMSKPS(over, bits)
	ctx.MOVL(bits, ray("over"))
}
