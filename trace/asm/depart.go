package main

import . "github.com/mmcloughlin/avo/operand"

// depart finds the directions in which light leaves the stone where rays have arrived,
// for those who want to know more of them than their angle from the eye. It comes
// before mirror, and does with the same numbers what that does for up.
func depart() {
	eachGroup("depart", "Find the directions in which light leaves.", func() {
		n, _ := normals()
		c := larger(dot(n, direction()), number(leastCosine))
		e := load(ray("eta"))
		bend := sub(squareRoot(larger(refracted(c, e), zero())), mul(c, e))
		for i, name := range []string{"outx", "outy", "outz"} {
			out := mul(e, [...]Op{direction().x, direction().y, direction().z}[i])
			addProduct(out, bend, [...]Op{n.x, n.y, n.z}[i])
			store(out, ray(name))
		}
	})
}

// refracted is the square of the cosine of refraction by Snell's law,
// g² = 1 - e²(1 - c²), negative under total reflection.
func refracted(c, e vector) vector {
	e2, g2 := mul(e, e), load(one())
	g2 = sub(g2, e2)
	addProduct(g2, mul(c, c), e2)
	return g2
}
