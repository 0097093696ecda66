package trace

import (
	"math"
	"math/rand/v2"
	"runtime"
	"sync"
	"testing"
)

// forward follows light the way it runs, from a uniform dome above to the eye: a tracer
// for tests only, that shares nothing with the others. Positions are those of a body.
// Polarisation is averaged at every facet.
type forward struct {
	planes []forwardPlane
	n, m   float64
	dish   bool    // m is a liquid with a flat surface across z
	level  float64 // of the surface
	rng    *rand.Rand

	seen func(cos, power float64) // is told of light that leaves everything upward, with its cosine to z
}

// fresnel is the reflectance of unpolarised light from n1 to n2, and the cosine beyond:
// Born & Wolf 1.5.2 (21).
func fresnel(n1, n2, cosI float64) (r, cosT float64) {
	sinT2 := (n1 / n2) * (n1 / n2) * (1 - cosI*cosI)
	if sinT2 >= 1 {
		return 1, 0
	}
	cosT = math.Sqrt(1 - sinT2)
	s := (n1*cosI - n2*cosT) / (n1*cosI + n2*cosT)
	p := (n2*cosI - n1*cosT) / (n2*cosI + n1*cosT)
	return (s*s + p*p) / 2, cosT
}

// faint light goes all one way or all the other.
const faintForward = 0.1

// follow follows light that travels outside the stone from x along d. first tells that it
// has not met the stone yet: what the stone's surface mirrors then is not seen unless
// the stone lies in a dish.
func (f *forward) follow(x, d vec, power float64, first bool) {
	facet, far := -1, math.Inf(1)
	near := 1e-9
	for i := range f.planes {
		p := &f.planes[i]
		slope, gap := p.normal.dot(d), p.distance-p.normal.dot(x)
		switch {
		case slope < 0:
			if s := gap / slope; s > near {
				facet, near = i, s
			}
		case slope > 0:
			far = min(far, gap/slope)
		}
	}
	if facet < 0 || near >= far {
		f.leaves(x, d, power)
		return
	}
	x = x.plus(near, d)
	normal := f.planes[facet].normal
	cosI := -d.dot(normal)
	r, cosT := fresnel(f.m, f.n, cosI)
	if !first || f.dish {
		f.leaves(x, d.plus(2*cosI, normal), power*r)
	}
	if power *= 1 - r; power == 0 {
		return
	}
	d = d.scale(f.m/f.n).plus(f.m/f.n*cosI-cosT, normal)
	for range 10000 {
		exit, s := -1, math.Inf(1)
		for i := range f.planes {
			p := &f.planes[i]
			if slope := p.normal.dot(d); slope > 0 && i != facet {
				if t := (p.distance - p.normal.dot(x)) / slope; t < s {
					exit, s = i, t
				}
			}
		}
		facet = exit
		x = x.plus(s, d)
		normal := f.planes[exit].normal
		cosI := d.dot(normal)
		r, cosT := fresnel(f.n, f.m, cosI)
		out := power * (1 - r)
		power *= r
		if all := out + power; all < faintForward && out > 0 {
			if f.rng.Float64()*all < out {
				out, power = all, 0
			} else {
				out, power = 0, all
			}
		}
		if out > 0 {
			f.leaves(x, d.scale(f.n/f.m).plus(cosT-f.n/f.m*cosI, normal), out)
		}
		if power == 0 {
			return
		}
		d = d.plus(-2*cosI, normal)
	}
}

// leaves lets light that runs outside the stone leave everything, or come down again.
func (f *forward) leaves(x, d vec, power float64) {
	if d.z <= 0 || power == 0 {
		return // leaked
	}
	if !f.dish {
		f.seen(d.z, power)
		return
	}
	r, cosT := fresnel(f.m, 1, d.z)
	if r < 1 {
		f.seen(cosT, power*(1-r))
	}
	back := power * r
	if back < faintForward {
		if f.rng.Float64()*faintForward >= back {
			return
		}
		back = faintForward
	}
	x = x.plus((f.level-x.z)/d.z, d)
	f.follow(x, vec{d.x, d.y, -d.z}, back, false)
}

type forwardPlane struct {
	normal   vec
	distance float64
}

// direction draws one from the cone about -z whose cosine is at least cos, evenly by
// solid angle, and a point on a disc of radius 1 across it, two units before the middle.
func direction(rng *rand.Rand, cos float64) (x, d vec) {
	c := 1 - rng.Float64()*(1-cos)
	s := math.Sqrt(1 - c*c)
	sin, co := math.Sincos(2 * math.Pi * rng.Float64())
	d = vec{s * co, s * sin, -c}
	l := fresh(d)
	sin, co = math.Sincos(2 * math.Pi * rng.Float64())
	r := math.Sqrt(rng.Float64())
	return l.a.scale(r*co).plus(r*sin, l.b).plus(-2, d), d
}

// overStreams returns the means of some numbers that sample adds up, over independent
// streams of random numbers, and their errors from the spread of the streams.
func overStreams(numbers, samples int, sample func(rng *rand.Rand, add []float64)) []estimate {
	const streams = 64
	totals := make([][]float64, streams)
	var workers sync.WaitGroup
	turn := make(chan int)
	for range runtime.GOMAXPROCS(0) {
		workers.Go(func() {
			for i := range turn {
				rng := rand.New(rand.NewPCG(77, uint64(i)))
				add := make([]float64, numbers)
				for range samples / streams {
					sample(rng, add)
				}
				totals[i] = add
			}
		})
	}
	for i := range streams {
		turn <- i
	}
	close(turn)
	workers.Wait()
	all := make([]estimate, numbers)
	for k := range all {
		each := float64(samples / streams)
		for _, total := range totals {
			all[k].mean += total[k] / each / streams
		}
		spread := 0.0
		for _, total := range totals {
			d := total[k]/each - all[k].mean
			spread += d * d
		}
		all[k].error = math.Sqrt(spread / (streams * (streams - 1)))
	}
	return all
}

// forwardPlanes are a body's facets.
func forwardPlanes(b *body) (planes []forwardPlane) {
	for j, n := range b.normal {
		planes = append(planes, forwardPlane{n, 1 / b.rows[j].length()})
	}
	return planes
}

// TestReciprocity lights a stone by a uniform dome and gathers, tracing forward, what
// comes out into a cone of 2 degrees about the eye. The tracer says the same from the eye
// back: the mean of returned over the cone, radiance counted over n squared.
//
// Both count per unit of the cone's solid angle and of the disc's area that holds the
// stone. A dome of radiance 1 in air has the radiance n² times what the surface lets
// through in a liquid; forgetting n² must be seen.
func TestReciprocity(t *testing.T) {
	const source = "reciprocity of light, L/n² being kept; a tracer for tests only that runs forward"
	// Samples for an error of some 10 % or, in the long form, which takes minutes, 0.5 %.
	samples, words := 1<<18, ""
	if *long {
		samples, words = 1<<27, " "+longForm
	}
	cosCone := math.Cos(2 * math.Pi / 180)
	s := lopsided(t)
	for _, row := range []struct {
		name        string
		n, m, light float64 // light: cosine of the cone in the medium from which it comes
		dish        bool
		more        int // times as many samples
	}{
		{"in air", 1.77, 1, 0, false, 1},
		{"in a dish of index 1.477", 2.417, 1.477, math.Sqrt(1 - 1/(1.477*1.477)), true, 2},
	} {
		samples := samples * row.more
		medium := plain(t, "medium", row.m)
		tr := general(t, s, View{}, medium, true)
		tr.faint = 1e-2
		const level = 1.5
		if row.dish {
			tr.dish = &dish{medium, level}
		}

		// Backward.
		at := at550(tr, plain(t, "stone", row.n))
		back := overStreams(1, samples/8, func(rng *rand.Rand, add []float64) {
			x, d := direction(rng, cosCone)
			through, share := d, 1.0
			if row.dish { // bent down at the surface, where areas across it grow
				_, cosT := fresnel(1, row.m, -d.z)
				through = vec{d.x / row.m, d.y / row.m, -cosT}
				share = -d.z / cosT
			}
			if facet, far, ok := tr.body.entry(x, through); ok {
				var none sums
				add[0] += share * tr.send(facet, x.plus(far, through), d, at, dice(rng.Uint32()),
					&none).Returned
			}
		})[0]

		// Forward.
		planes := forwardPlanes(tr.body)
		seen := overStreams(1, samples, func(rng *rand.Rand, add []float64) {
			x, d := direction(rng, row.light)
			radiance := 1.0
			if row.dish {
				r, _ := fresnel(row.m, 1, -d.z)
				radiance = row.m * row.m * (1 - r)
			}
			f := forward{planes: planes, n: row.n, m: row.m, dish: row.dish, level: level, rng: rng}
			f.seen = func(cos, power float64) {
				if cos > cosCone {
					add[0] += radiance * power
				}
			}
			f.follow(x, d, 1, true)
		})[0]
		k := (1 - row.light) / (1 - cosCone) // solid angles
		seen.mean, seen.error = seen.mean*k, seen.error*k
		agree(t, row.name+", light into 2° about the eye"+words, seen.mean, seen.error, back.mean, back.error,
			4, source)
		if joint := math.Hypot(seen.error, back.error); *long && joint > 0.005*back.mean {
			t.Errorf("%s: the joint error is %.2g of %.4g: not 0.5 %% or better", row.name, joint, back.mean)
		}
		if row.dish {
			wrong := 1 / (row.m * row.m)
			if math.Abs(seen.mean*wrong-back.mean) <= 4*math.Hypot(seen.error*wrong, back.error) {
				t.Errorf("without n² forward gives %.5f, backward %.5f: this check cannot fail",
					seen.mean*wrong, back.mean)
			}
		}
	}
}
