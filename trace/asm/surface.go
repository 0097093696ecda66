package main

import . "github.com/mmcloughlin/avo/operand"

// mirror moves each ray that has arrived to its exit and turns it there. A ray still
// on its way moves nowhere and turns nowhere: its step and its turn are masked to 0.
// What becomes of its light is the affair of split.
//
// Letters as in Fresnel's equations: c and g are the cosines of incidence and
// refraction, e = n/m the ratio of the indices.
func mirror(name string, polarised bool) {
	eachGroup(name, "Move the rays that have arrived to their exit, and mirror them there.", func() {
		n, normalToEye := normals()
		// The least cosine turns back a grazing ray that rounding would let pass by.
		c := larger(dot(n, direction()), number(leastCosine))
		store(c, ray("c"))
		e := load(ray("eta"))
		g2 := refracted(c, e)
		store(g2, ray("g2"))
		// The cosine between the way out and the eye; of no meaning under total reflection.
		eye := triple{load(all("eyex")), load(all("eyey")), load(all("eyez"))}
		up := mul(dot(eye, direction()), e)
		bend := sub(squareRoot(and(g2, magnitude())), mul(c, e))
		addProduct(up, bend, normalToEye)
		store(up, ray("up"))

		if polarised {
			turnAxes(n)
		}

		step := and(load(ray("s")), ray("arrived"))
		store(step, ray("step"))
		turn := and(add(c, c), ray("arrived"))
		var xx, xd vector // x.x and x.d
		for i, axis := range []struct{ x, d, n Op }{
			{position().x, direction().x, n.x},
			{position().y, direction().y, n.y},
			{position().z, direction().z, n.z},
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

		// The next exit is no farther than the sphere that holds the stone:
		// |x + s d| = r, for unit d: s = sqrt((x.d)² + r² - x.x) - x.d
		root := sub(load(number(sphere*sphere)), xx)
		addProduct(root, xd, xd)
		start := sub(squareRoot(larger(root, zero())), xd)
		store(choose(load(ray("arrived")), start, load(ray("s"))), ray("s"))
	})
}

// leastCosine is of the angle of incidence: some rounding errors of a cosine.
const leastCosine = 1e-6

// sphere is the radius of the sphere that Newton's method starts from: it holds the
// stone, of radius 1, with room for many rounding errors.
const sphere = 1.001

// normals loads the normal of each ray's facet, and its cosine to the eye.
func normals() (n triple, toEye vector) {
	normals, facet := address("normals"), ctx.GP64()
	x, y, z, toEye := rows(func(i int) Mem {
		ctx.MOVL(ray("facet").Offset(4*i), facet.As32())
		return Mem{Base: normals, Index: facet, Scale: 8}
	})
	return triple{x, y, z}, toEye
}

// turnAxes mirrors the axis a of the light's polarisation and stores the turn that
// would lay it across the plane of incidence, as the cosine and sine of twice the
// angle: that is how Stokes vectors turn. The other axis is b = d × a.
func turnAxes(n triple) {
	d := direction()
	a := [3]vector{load(ray("ax")), load(ray("ay")), load(ray("az"))}
	na := dot(n, triple{a[0], a[1], a[2]})
	cross := func(d1, a2, d2, a1 Op) vector {
		v := mul(in(a2), d1)
		subProduct(v, in(a1), d2)
		return v
	}
	nb := dot(n, triple{cross(d.y, a[2], d.z, a[1]), cross(d.z, a[0], d.x, a[2]), cross(d.x, a[1], d.y, a[0])})
	off := and(add(na, na), ray("arrived"))
	for i, to := range []string{"ax", "ay", "az"} {
		subProduct(a[i], off, []Op{n.x, n.y, n.z}[i])
		store(a[i], ray(to))
	}

	// The angle's cosine is nb/sinI, its sine -na/sinI. Straight on there is no plane
	// of incidence and no turn: that is what the tiny number is for.
	cos, sin := mul(nb, nb), mul(na, nb)
	sin2I := add(cos, number(tiny))
	addProduct(sin2I, na, na)
	cos = add(cos, number(tiny))
	subProduct(cos, na, na)
	over := div(load(one()), sin2I)
	store(mul(cos, over), ray("cos2"))
	store(mul(mul(sin, number(-2)), over), ray("sin2"))
}

// tiny is far below the square of a rounding error and far above the smallest number.
const tiny = 1e-30
