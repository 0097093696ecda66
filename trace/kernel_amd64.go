package trace

import (
	"math"

	"golang.org/x/sys/cpu"

	"pavilight/facets"
)

// kernel is a tracer in float32 that follows many rays at the same time, eight to a
// vector. It does what tracer.follow does, by the same method, and knows body colour
// and lights besides:
//
//	aim     find the list of facets in the direction of the ray's farthest exit
//	look    come back to the plane of the likeliest of them
//	aim, look once more, and aim
//	settle  come back to the plane of any of the list; who comes no nearer has arrived
//	depart  find the directions in which their light leaves, where a light wants to know
//	mirror  move those who have arrived to their exits and turn them
//	dim     take off what the body absorbs, where it has a colour
//	split   part their light into what goes through and what stays
//	tally   put down what goes through in the rays' ledgers
//	bin     and in the bins of the angle from the eye
//
// Each of these is one short pass over all rays in flight, so that the processor works
// on several groups of eight while others wait for memory. A ray that has not arrived,
// one in ten, sits out the second half of the round. Between rounds new rays take the
// places of those whose paths are over.
//
// The passes are written by the generator in asm. They are the only part of the
// program that is not Go; TestKernelAgainstFloat64 holds them to what float64 finds.
type kernel struct {
	tracer   *tracer
	cells    []uint16     // map by direction: number of the list of each cell
	lists    []list       // by number
	planes   [][4]float32 // row m and twice the number of each facet, those of the pavilion first
	normals  [][4]float32 // normal n and n.eye likewise
	pavilion int          // how many facets the pavilion has

	cut  float64 // a path ends when no more than this is left in it
	most int     // and at this bounce

	single bool // rays in doubt are left as they are
}

// list is two of the facets that can be the largest in a direction, and where more
// stand: twice their numbers, and the number of the next list, 0 for none. Doubled, a
// number is a row's place in units that the processor can scale by.
type list struct{ a, b, next, _ uint16 }

// mostFacets keeps doubled numbers in 16 bits.
const mostFacets = 1 << 15

//go:generate go -C asm run .

// The passes. Each works on the busy groups of the flight.
//
//go:noescape
func aim(t *tables, f *flight)

//go:noescape
func look(t *tables, f *flight)

//go:noescape
func settle(t *tables, f *flight)

//go:noescape
func depart(t *tables, f *flight)

//go:noescape
func mirrorAveraged(t *tables, f *flight)

//go:noescape
func mirrorPolarised(t *tables, f *flight)

//go:noescape
func dim(t *tables, f *flight)

//go:noescape
func splitAveraged(t *tables, f *flight)

//go:noescape
func splitPolarised(t *tables, f *flight)

//go:noescape
func tally(t *tables, f *flight)

//go:noescape
func bin(t *tables, f *flight)

// hasVectors reports whether this processor, and the system for it, has what the
// passes are written in.
func hasVectors() bool { return cpu.X86.HasAVX2 && cpu.X86.HasFMA }

// newKernel returns the kernel of a tracer; nil on a processor that has none, and for
// stones of more facets than it can number.
func newKernel(t *tracer) *kernel {
	b := t.body
	if !hasVectors() || len(b.rows) >= mostFacets {
		return nil
	}
	k := &kernel{tracer: t, most: mostBounces, cells: b.byDirection.list}

	doubled := make([]uint16, len(b.rows)) // number of each of the body's facets
	add := func(j int) {
		doubled[j] = uint16(2 * len(k.planes))
		m, n := b.rows[j], b.normal[j]
		number := math.Float32frombits(uint32(doubled[j]))
		k.planes = append(k.planes, [4]float32{float32(m.x), float32(m.y), float32(m.z), number})
		k.normals = append(k.normals, [4]float32{float32(n.x), float32(n.y), float32(n.z), float32(t.toEye[j])})
	}
	for j, side := range b.side {
		if side == facets.Pavilion {
			add(j)
		}
	}
	k.pavilion = len(k.planes)
	for j, side := range b.side {
		if side != facets.Pavilion {
			add(j)
		}
	}

	// Lists keep their numbers; what is longer than a pair goes on behind them. List 0
	// is empty, the end of every chain, and its facets are as good as any.
	k.lists = make([]list, len(b.byDirection.spans))
	for at, span := range b.byDirection.spans {
		names := b.byDirection.names[span.first : span.first+span.n]
		for len(names) > 0 {
			pair := list{a: doubled[names[0]], b: doubled[names[0]]}
			if names = names[1:]; len(names) > 0 {
				pair.b, names = doubled[names[0]], names[1:]
			}
			if len(names) > 0 {
				pair.next = uint16(len(k.lists))
				k.lists = append(k.lists, list{})
			}
			k.lists[at] = pair
			at = int(pair.next)
		}
	}
	if len(k.lists) > math.MaxUint16 {
		return nil
	}
	return k
}

// cutAt ends paths where no more than least is left, or at so many facets. Nothing is
// followed again in float64, which knows no such cut.
func (k *kernel) cutAt(least float64, most int) { k.cut, k.most, k.single = least, most, true }
