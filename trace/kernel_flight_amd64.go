package trace

import (
	"math"
	"math/bits"
	"slices"
)

// inFlight is how many rays are followed at the same time: enough to keep the
// processor busy, few enough for its fastest memory.
const inFlight = 128

// flight is the rays that are followed at the same time, and what is the same for all
// of them. It holds no pointer, so that it is allocated on the boundary of a cache line.
type flight struct {
	eyex, eyey, eyez eight     // unit vector to the eye
	headCos          eight     // see tracer
	faint, cut       eight     // see tracer and kernel
	most             eightInts // bounces that are not the last
	pavilion         eightInts // twice the number of pavilion facets, which come first

	groups [inFlight / 8]group
}

// eight is one number for each ray of a group.
type (
	eight     [8]float32
	eightInts [8]int32
)

// group is eight rays on their way, side by side. Positions are the body's. The passes
// know the fields by name, wherever they stand.
type group struct {
	x, y, z    eight     // where the ray is: on the surface, going in
	dx, dy, dz eight     // unit vector along the ray
	s          eight     // how far the exit is at most
	facet      eightInts // twice the number of the facet that says so
	list       eightInts // of the facets in that direction
	arrived    eightInts // -1 where s is the exit, else 0

	i, q, u, v eight // Stokes vector of what is left in the ray, of one unit
	ax, ay, az eight // its axis a, see beam; b is direction × a
	eta        eight // index of the stone over that of the medium
	absorb     eight // natural absorption of the body, per unit of the stone
	weight     eight // of the ray in all means
	step       eight // to the exit, 0 where the ray has not arrived
	c, g2      eight // at the surface: cosine of incidence, squared cosine of refraction
	cos2, sin2 eight // and twice the angle between a and the plane of incidence

	through, up            eight     // what goes through at the surface, and its cosine to the eye
	outx, outy, outz       eight     // its direction, unit, where a light wants to know
	returned, head, leaked eight     // ledger so far
	absorbed               eight     // likewise
	unmet, windowed        eightInts // -1 where the pavilion is not met yet, where one sees through it
	bounces                eightInts // so far
	doubt                  eightInts // -1 where rounding may have chosen the way
	die                    eightInts // of the end-game
	bins                   eightInts // where the ray's bins stand in tables.bins, in bytes

	wide [8]float64 // scratch
	over int32      // bit i is set if the path of ray i is over
	_    [15]int32  // to a whole number of cache lines
}

// tables is what the passes look up, and how much of the flight is in use.
type tables struct {
	cells   *uint16
	lists   *list
	planes  *[4]float32
	normals *[4]float32
	bins    *float64 // of the angle from the eye
	busy    int      // groups
}

// eyeBins are the bins of one column, for each place in a group its own: so eight
// shares can be put down at a time without meeting in one bin.
type eyeBins [8][fromBins]float64

// errand is the rays that the kernel is sent to follow.
type errand struct {
	*kernel
	rays    []ray
	out     []Ledger
	lit     []float64 // luminance seen by each; nil where none is wanted
	columns []sums

	entrances []entrance // by facet, the last

	recall  bool    // rays are called back of which rounding may have chosen the way:
	doubted []int32 // their numbers,
	again   []ray   // and themselves, of negative weight, after all others

	flight *flight
	bins   []eyeBins       // by column
	ray    [inFlight]int32 // number of the ray in each place
	live   int             // places in use, the first ones
	next   int             // number of the next ray to enter
}

// follow does what tracer.followAll promises, but for adding up the ledgers.
//
// A ray that comes so close to an edge that float32 cannot tell which facet is next is
// followed again in float64, and what it had counted is taken back: it flies once more,
// for it flies alike every time, and weighs less than nothing. That is where float64
// knows all there is to know: under the even light, from afar, in a clear stone.
func (k *kernel) follow(rays []ray, out []Ledger, lit []float64, columns []sums) {
	coloured := slices.ContainsFunc(rays, func(r ray) bool { return r.absorb > 0 })
	e := &errand{kernel: k, rays: rays, out: out, lit: lit, columns: columns}
	e.recall = lit == nil && !coloured && !k.tracer.near && !k.single
	e.fly(coloured)
	for _, number := range e.doubted {
		r := &rays[number]
		out[number] = k.tracer.follow(int(r.facet), r.at, r.n, r.m, r.die, &columns[r.column])
	}
}

// fly follows the rays of the errand.
func (e *errand) fly(coloured bool) {
	k := e.kernel
	e.flight, e.bins, e.entrances = k.newFlight(), make([]eyeBins, len(e.columns)), make([]entrance, len(k.planes))
	for e.live < inFlight && e.enter(e.live) {
		e.live++
	}
	mirror, split := mirrorPolarised, splitPolarised
	if k.tracer.averaged {
		mirror, split = mirrorAveraged, splitAveraged
	}
	in, f := &tables{&k.cells[0], &k.lists[0], &k.planes[0], &k.normals[0], &e.bins[0][0][0], 0}, e.flight
	for e.live > 0 {
		in.busy = (e.live + 7) / 8
		aim(in, f)
		look(in, f)
		aim(in, f)
		look(in, f)
		aim(in, f)
		settle(in, f)
		if e.lit != nil {
			depart(in, f)
		}
		mirror(in, f)
		if coloured {
			dim(in, f)
		}
		split(in, f)
		tally(in, f)
		bin(in, f)
		if e.lit != nil {
			e.shine(in.busy)
		}
		e.replace(in.busy)
	}
	for c := range e.bins {
		for place := range e.bins[c] {
			for bin, share := range e.bins[c][place] {
				e.columns[c][firstFrom+bin] += share
			}
		}
	}
}

// shine notes what is seen through the facets where light leaves.
func (e *errand) shine(busy int) {
	o := e.tracer.outline
	for n := range busy {
		g := &e.flight.groups[n]
		for i, through := range g.through {
			if through == 0 {
				continue
			}
			number := e.ray[8*n+i]
			r := &e.rays[number]
			out := vec{float64(g.outx[i]), float64(g.outy[i]), float64(g.outz[i])}
			seen := float64(through) * e.tracer.seen(out, r.wavelength)
			e.lit[number] += seen
			slot := litReturned
			if out.dot(o.eye) <= 0 {
				slot = litLeaked
			}
			e.columns[r.column][slot] += r.weight * seen
		}
	}
}

// newFlight returns an empty flight. It must not be inlined: on the stack of its
// caller it would not begin with a cache line.
//
//go:noinline
func (k *kernel) newFlight() *flight {
	t := k.tracer
	return &flight{
		eyex: spread(t.outline.eye.x), eyey: spread(t.outline.eye.y), eyez: spread(t.outline.eye.z),
		headCos: spread(t.headCos), faint: spread(t.faint), cut: spread(k.cut),
		most: spreadInt(k.most - 1), pavilion: spreadInt(2 * k.pavilion),
	}
}

// replace lets the rays leave whose paths are over and new ones enter in their places.
// When there are none left the last ray in flight moves up, so that the busy groups
// stay full. That is why it goes from the last place to the first.
func (e *errand) replace(busy int) {
	for n := busy - 1; n >= 0; n-- {
		for over := uint32(e.flight.groups[n].over); over != 0; {
			i := bits.Len32(over) - 1
			over &^= 1 << i
			place := 8*n + i
			if place >= e.live {
				continue
			}
			e.leave(place)
			if !e.enter(place) {
				e.live--
				e.move(e.live, place)
			}
		}
	}
}

// enter brings the next ray into the stone, to a place in the flight; it returns false
// when there is none. Rays that do not get into the stone are done at once.
func (e *errand) enter(place int) bool {
	t := e.tracer
	for e.next < len(e.rays)+len(e.again) {
		r, l := e.numbered(int32(e.next))
		e.ray[place] = int32(e.next)
		e.next++

		in := e.entrance(r)
		surface := in.at.Mean()
		*l = Ledger{Surface: surface}
		sums := &e.columns[r.column]
		if e.lit == nil {
			t.litSurface(in.mirrored.dot(t.outline.eye), math.Copysign(surface, r.weight), sums)
		} else {
			seen := surface * t.seen(in.mirrored, r.wavelength)
			e.lit[e.next-1] = seen
			sums[litSurface] += r.weight * seen
		}
		if in.at.Total {
			continue
		}
		dir, light := in.dir, &in.light

		g, i := &e.flight.groups[place/8], place%8
		g.x[i], g.y[i], g.z[i] = float32(r.at.x), float32(r.at.y), float32(r.at.z)
		g.dx[i], g.dy[i], g.dz[i] = float32(dir.x), float32(dir.y), float32(dir.z)
		// The exit is no farther than the sphere that holds the stone. Its facet is not
		// known, but the first look finds one nearer.
		xd := r.at.dot(dir)
		g.s[i] = float32(math.Sqrt(max(0, xd*xd+sphere*sphere-r.at.dot(r.at))) - xd)
		g.facet[i] = 0
		g.i[i], g.q[i], g.u[i], g.v[i] = float32(light.i), float32(light.q), float32(light.u), float32(light.v)
		g.ax[i], g.ay[i], g.az[i] = float32(light.a.x), float32(light.a.y), float32(light.a.z)
		g.eta[i], g.absorb[i], g.weight[i] = float32(r.n/r.m), float32(r.absorb), float32(r.weight)
		g.returned[i], g.head[i], g.leaked[i], g.absorbed[i] = 0, 0, 0, 0
		g.unmet[i], g.windowed[i], g.bounces[i], g.doubt[i] = -1, 0, 0, 0
		g.die[i] = int32(r.die)
		g.bins[i] = (r.column*8 + int32(i)) * fromBins * 8
		return true
	}
	return false
}

// entrance is what the first surface does to a ray.
type entrance struct {
	n, m          float64 // of the ray, as its direction along
	along         vec
	at            Reflection
	mirrored, dir vec  // where it goes, outside and in
	light         beam // inside
}

// entrance returns what the first surface does to a ray. It remembers that of each facet:
// at one wavelength all rays from afar fare alike there.
func (e *errand) entrance(r *ray) *entrance {
	in := &e.entrances[r.facet]
	if in.n == r.n && in.m == r.m && in.along == r.along {
		return in
	}
	n := e.tracer.body.normal[r.facet]
	cosI := -r.along.dot(n)
	at := Fresnel(r.m, r.n, cosI)
	*in = entrance{n: r.n, m: r.m, along: r.along, at: at, mirrored: r.along.plus(2*cosI, n)}
	if !at.Total {
		in.dir = refract(r.along, n.scale(-1), r.m/r.n, cosI, at.CosT)
		in.light = enterBeam(at, in.dir, n)
	}
	return in
}

// sphere is the radius of the sphere that Newton's method starts from: it holds the
// stone, of radius 1, with room for many rounding errors. The pass mirror has it too.
const sphere = 1.001

// numbered returns a ray by its number, and where its ledger goes: nowhere, for those
// that fly again.
func (e *errand) numbered(number int32) (*ray, *Ledger) {
	if i := int(number) - len(e.rays); i >= 0 {
		return &e.again[i], new(Ledger)
	}
	return &e.rays[number], &e.out[number]
}

// leave writes the ledger of a ray whose path is over.
func (e *errand) leave(place int) {
	g, i := &e.flight.groups[place/8], place%8
	r, l := e.numbered(e.ray[place])
	sums := &e.columns[r.column]
	l.Returned, l.Head, l.Leaked = float64(g.returned[i]), float64(g.head[i]), float64(g.leaked[i])
	l.Absorbed, l.Unresolved = float64(g.absorbed[i]), float64(g.i[i])
	sums[segmentCount] += math.Copysign(float64(g.bounces[i]), r.weight)
	if l.Leaked > 0.5 {
		sums[leakyArea] += r.weight
	}
	if g.windowed[i] != 0 {
		sums[windowedArea] += r.weight
	}
	if e.recall && g.doubt[i] != 0 && r.weight > 0 {
		e.doubted = append(e.doubted, e.ray[place])
		back := *r
		back.weight = -back.weight
		e.again = append(e.again, back)
	}
}

// move moves the ray in one place to another. It leaves an empty place: there is no
// light in it that could go anywhere.
func (e *errand) move(from, to int) {
	e.ray[to] = e.ray[from]
	a, i := &e.flight.groups[from/8], from%8
	b, j := &e.flight.groups[to/8], to%8
	b.x[j], b.y[j], b.z[j] = a.x[i], a.y[i], a.z[i]
	b.dx[j], b.dy[j], b.dz[j] = a.dx[i], a.dy[i], a.dz[i]
	b.s[j], b.facet[j] = a.s[i], a.facet[i]
	b.i[j], b.q[j], b.u[j], b.v[j] = a.i[i], a.q[i], a.u[i], a.v[i]
	b.ax[j], b.ay[j], b.az[j] = a.ax[i], a.ay[i], a.az[i]
	b.eta[j], b.absorb[j], b.weight[j] = a.eta[i], a.absorb[i], a.weight[i]
	b.returned[j], b.head[j], b.leaked[j], b.absorbed[j] = a.returned[i], a.head[i], a.leaked[i], a.absorbed[i]
	b.unmet[j], b.windowed[j], b.bounces[j] = a.unmet[i], a.windowed[i], a.bounces[i]
	b.doubt[j] = a.doubt[i]
	b.die[j], b.bins[j] = a.die[i], a.bins[i]
	a.i[i], a.q[i], a.u[i], a.v[i] = 0, 0, 0, 0
}

func spread(v float64) (e eight) {
	for i := range e {
		e[i] = float32(v)
	}
	return e
}

func spreadInt(v int) (e eightInts) {
	for i := range e {
		e[i] = int32(v)
	}
	return e
}
