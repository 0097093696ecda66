package trace

import (
	"math"
	"math/bits"

	"golang.org/x/sys/cpu"

	"pavilight/facets"
)

//go:generate go -C asm run .

// The passes over a flight, written by the generator in asm. Each takes the first
// busy groups.
//
//go:noescape
func aim(t *tables, f *flight)

//go:noescape
func look(t *tables, f *flight)

//go:noescape
func settle(t *tables, f *flight)

//go:noescape
func mirrorAveraged(t *tables, f *flight)

//go:noescape
func mirrorPolarised(t *tables, f *flight)

//go:noescape
func splitAveraged(t *tables, f *flight)

//go:noescape
func splitPolarised(t *tables, f *flight)

//go:noescape
func tally(t *tables, f *flight)

// hasVectors reports whether this processor has what the passes are written in.
func hasVectors() bool { return cpu.X86.HasAVX2 && cpu.X86.HasFMA }

// eight is one number for each ray of a group.
type (
	eight     [8]float32
	eightInts [8]int32
)

// group is eight rays on their way, side by side. Positions are the body's. The
// passes know the fields by name and nothing of what the order is.
type group struct {
	x, y, z    eight // where the ray is: on the surface, going in
	dx, dy, dz eight // unit vector along the ray
	s          eight // the exit is at most this far

	facet   eightInts // twice the number of the plane that says so
	arrived eightInts // -1 where s is the exit, else 0

	i, q, u, v eight // Stokes vector of what is still in the ray, of one unit
	ax, ay, az eight // its axis a; see beam. b is direction × a
	eta        eight // index of the stone over that of the medium

	c, g2, cos2, sin2        eight // at the surface; see the passes
	through, up              eight // what goes through at the surface, and its cosine to the eye
	returned, head, leaked   eight // ledger so far
	unmet, windowed, bounces eightInts
	die                      eightInts // of the end-game
	bins                     eightInts // byte offset of the ray's bins in flight.bins

	list eightInts  // of the facets in the direction of the exit
	bin  eightInts  // scratch
	wide [8]float64 // scratch
	over int32      // bits of the rays whose path is over
	_    [7]int32   // a whole number of cache lines
}

// flight is the rays that are followed at the same time. The passes work on groups;
// between them rays that are done make room for others. A flight holds no pointer, so
// that it is allocated on the boundary of a cache line.
type flight struct {
	eyex, eyey, eyez eight
	headCos          eight
	faint, cut       eight
	most, pavilion   eightInts // last bounce; twice the number of pavilion facets, which come first

	groups [inFlight / 8]group
}

// tables is what the passes look up.
type tables struct {
	cells   *uint16     // map by direction: number of the list of each cell
	lists   *list       // lists by number
	planes  *[4]float32 // m and twice the number of each facet
	normals *[4]float32 // n and n.eye of each facet
	bins    *float64    // of the angle from the eye
	busy    int         // groups of the flight in use
}

// list is two of the facets that can be the largest in a direction, and where more
// stand: twice their numbers, and the number of the next list, 0 for none.
type list struct{ a, b, next, _ uint16 }

// inFlight is how many rays are followed at the same time: enough to keep the
// processor busy, few enough for its fastest memory. BenchmarkStep compares.
const inFlight = 128

// kernel is a tracer in the form that the passes work on.
type kernel struct {
	tracer   *tracer
	order    []int // facet of the stone by number here
	cells    []uint16
	lists    []list
	planes   [][4]float32
	normals  [][4]float32
	pavilion int

	cut  float64 // a path ends when no more than this is left in it
	most int     // and at this bounce
}

// mostVectorFacets keeps twice a facet's number in 16 bits.
const mostVectorFacets = 1 << 15

// newKernel returns the kernel of a tracer, nil where this processor or a number of
// facets beyond reason has none.
func newKernel(t *tracer) *kernel {
	if !hasVectors() || len(t.body.rows) >= mostVectorFacets {
		return nil
	}
	k := &kernel{tracer: t, most: mostBounces}
	b := t.body
	number := make([]uint16, len(b.rows))
	for _, pavilion := range []bool{true, false} {
		for j := range b.rows {
			if (b.side[j] == facets.Pavilion) == pavilion {
				number[j] = uint16(2 * len(k.order))
				k.order = append(k.order, j)
			}
		}
		if pavilion {
			k.pavilion = len(k.order)
		}
	}
	for i, j := range k.order {
		m, n := b.rows[j], b.normal[j]
		k.planes = append(k.planes, [4]float32{float32(m.x), float32(m.y), float32(m.z), math.Float32frombits(uint32(2 * i))})
		k.normals = append(k.normals, [4]float32{float32(n.x), float32(n.y), float32(n.z), float32(t.toEye[j])})
	}
	// Lists keep their numbers; what is longer than a pair goes on behind them. List 0
	// is empty and the end of every chain; its facets are as good as any.
	k.cells = b.byDirection.list
	k.lists = make([]list, len(b.byDirection.spans))
	for at, sp := range b.byDirection.spans {
		names := b.byDirection.names[sp.first : sp.first+sp.n]
		for ; len(names) > 0; at = len(k.lists) - 1 {
			k.lists[at] = list{a: number[names[0]], b: number[names[min(1, len(names)-1)]]}
			if names = names[min(2, len(names)):]; len(names) > 0 {
				k.lists[at].next = uint16(len(k.lists))
				k.lists = append(k.lists, list{})
			}
		}
	}
	if len(k.lists) > math.MaxUint16 {
		return nil
	}
	return k
}

func spreadFloat(v float64) (e eight) {
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

// follow follows the rays and puts their ledgers in out and the rest in sums, by the
// rays' columns.
func (k *kernel) follow(rays []ray, out []Ledger, columns []sums) {
	t := k.tracer
	f := &flight{
		eyex: spreadFloat(t.outline.eye.x), eyey: spreadFloat(t.outline.eye.y), eyez: spreadFloat(t.outline.eye.z),
		headCos: spreadFloat(t.headCos), faint: spreadFloat(t.faint), cut: spreadFloat(k.cut),
		most: spreadInt(k.most - 1), pavilion: spreadInt(2 * k.pavilion),
	}
	bins := make([][8][fromBins]float64, len(columns))
	in := &tables{&k.cells[0], &k.lists[0], &k.planes[0], &k.normals[0], &bins[0][0][0], 0}
	var which [inFlight]int32 // ray by place
	next := 0
	enter := func(place int) bool {
		for next < len(rays) {
			r := &rays[next]
			next++
			if k.enter(f, place, r, &out[next-1], &columns[r.column]) {
				which[place] = int32(next - 1)
				return true
			}
		}
		return false
	}
	live := 0
	for live < inFlight && enter(live) {
		live++
	}
	mirror, split := mirrorPolarised, splitPolarised
	if t.averaged {
		mirror, split = mirrorAveraged, splitAveraged
	}
	for live > 0 {
		in.busy = (live + 7) / 8
		aim(in, f)
		look(in, f)
		aim(in, f)
		look(in, f)
		aim(in, f)
		settle(in, f)
		mirror(in, f)
		split(in, f)
		tally(in, f)
		for gi := in.busy - 1; gi >= 0; gi-- {
			for over := uint32(f.groups[gi].over); over != 0; {
				lane := bits.Len32(over) - 1
				over &^= 1 << lane
				place := 8*gi + lane
				if place >= live {
					continue
				}
				r := which[place]
				k.leave(f, place, &out[r], &columns[rays[r].column])
				if !enter(place) {
					live--
					if place != live {
						move(f, place, live)
						which[place] = which[live]
					}
					f.groups[live/8].rest(live % 8)
				}
			}
		}
	}
	for c := range bins {
		for lane := range bins[c] {
			for b, v := range bins[c][lane] {
				columns[c][firstFrom+b] += v
			}
		}
	}
}

func (k *kernel) enter(f *flight, place int, r *ray, l *Ledger, sums *sums) bool {
	t := k.tracer
	b, eye := t.body, t.outline.eye
	cosI := t.toEye[r.facet]
	at := Fresnel(r.m, r.n, cosI)
	*l = Ledger{Surface: at.Mean()}
	t.litSurface(int(r.facet), l.Surface, sums)
	if at.Total {
		return false
	}
	dir := refract(eye.scale(-1), b.normal[r.facet].scale(-1), r.m/r.n, cosI, at.CosT)
	light := enterBeam(at, dir, b.normal[r.facet])
	xd := r.at.dot(dir)
	s := math.Sqrt(max(0, xd*xd+1.002-r.at.dot(r.at))) - xd

	g, i := &f.groups[place/8], place%8
	g.x[i], g.y[i], g.z[i] = float32(r.at.x), float32(r.at.y), float32(r.at.z)
	g.dx[i], g.dy[i], g.dz[i] = float32(dir.x), float32(dir.y), float32(dir.z)
	g.s[i] = float32(s)
	g.facet[i] = 0
	g.i[i], g.q[i], g.u[i], g.v[i] = float32(light.i), float32(light.q), float32(light.u), float32(light.v)
	g.ax[i], g.ay[i], g.az[i] = float32(light.a.x), float32(light.a.y), float32(light.a.z)
	g.eta[i] = float32(r.n / r.m)
	g.returned[i], g.head[i], g.leaked[i] = 0, 0, 0
	g.unmet[i], g.windowed[i], g.bounces[i] = -1, 0, 0
	g.die[i] = int32(r.die)
	g.bins[i] = (r.column*8 + int32(i)) * fromBins * 8
	return true
}

func (k *kernel) leave(f *flight, place int, l *Ledger, sums *sums) {
	g, i := &f.groups[place/8], place%8
	l.Returned, l.Head, l.Leaked = float64(g.returned[i]), float64(g.head[i]), float64(g.leaked[i])
	l.Unresolved = float64(g.i[i])
	sums[segmentCount] += float64(g.bounces[i])
	if l.Leaked > 0.5 {
		sums[leakyArea]++
	}
	if g.windowed[i] != 0 {
		sums[windowedArea]++
	}
}

// rest empties a place: there is no light in it that could go anywhere.
func (g *group) rest(i int) { g.i[i], g.q[i], g.u[i], g.v[i] = 0, 0, 0, 0 }

func move(f *flight, to, from int) {
	a, i := &f.groups[to/8], to%8
	b, j := &f.groups[from/8], from%8
	a.x[i], a.y[i], a.z[i] = b.x[j], b.y[j], b.z[j]
	a.dx[i], a.dy[i], a.dz[i] = b.dx[j], b.dy[j], b.dz[j]
	a.s[i], a.facet[i] = b.s[j], b.facet[j]
	a.i[i], a.q[i], a.u[i], a.v[i] = b.i[j], b.q[j], b.u[j], b.v[j]
	a.ax[i], a.ay[i], a.az[i] = b.ax[j], b.ay[j], b.az[j]
	a.eta[i] = b.eta[j]
	a.returned[i], a.head[i], a.leaked[i] = b.returned[j], b.head[j], b.leaked[j]
	a.unmet[i], a.windowed[i], a.bounces[i] = b.unmet[j], b.windowed[j], b.bounces[j]
	a.die[i], a.bins[i] = b.die[j], b.bins[j]
}
