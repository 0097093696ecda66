package trace

import (
	"context"
	"fmt"
	"math/rand/v2"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
)

// Segments, in the sense of these benchmarks, are facet hits inside the stone.

// BenchmarkPaths follows paths through a diamond brilliant face-up, the entry
// included: in float64 and by the kernel, with the polarisations averaged and in full.
func BenchmarkPaths(b *testing.B) {
	for _, form := range []string{"float64", "kernel"} {
		for _, averaged := range []bool{true, false} {
			b.Run(fmt.Sprintf("%s/averaged=%v", form, averaged), func(b *testing.B) {
				paths(b, brilliant(b), 2.417, form == "kernel", averaged)
			})
		}
	}
}

// BenchmarkFacets follows paths through solids of more and more facets.
func BenchmarkFacets(b *testing.B) {
	for _, n := range []int{60, 120, 250, 500} {
		b.Run(fmt.Sprint(n), func(b *testing.B) { paths(b, randomStone(b, n, 1), 2.417, true, true) })
	}
}

func paths(b *testing.B, s *facets.Stone, n float64, kernel, averaged bool) {
	tr, err := newTracer(s, Settings{})
	if err != nil {
		b.Fatal(err)
	}
	tr.averaged = averaged
	if kernel {
		tr.kernel = newKernel(tr)
	}
	rays := kernelRays(tr, n, 4000, rand.New(rand.NewPCG(1, 1)))
	for i := range rays {
		rays[i].m = 1
	}
	out, columns := make([]Ledger, len(rays)), make([]sums, 2)
	b.ReportAllocs()
	for b.Loop() {
		tr.followAll(rays, out, columns)
	}
	b.ReportMetric((columns[0][segmentCount]+columns[1][segmentCount])/b.Elapsed().Seconds()/1e6, "Msegments/s")
}

// BenchmarkBody prepares stones for tracing.
func BenchmarkBody(b *testing.B) {
	for name, s := range map[string]*facets.Stone{"brilliant": brilliant(b), "500": randomStone(b, 500, 1)} {
		b.Run(name, func(b *testing.B) {
			for b.Loop() {
				t, err := newTracer(s, Settings{})
				if err != nil {
					b.Fatal(err)
				}
				newKernel(t)
			}
		})
	}
}

func sixMaps(b *testing.B) Scene {
	var media []*gems.Material
	for _, name := range []string{"air", "water", "oil"} {
		m, err := gems.Find(name)
		if err != nil {
			b.Fatal(err)
		}
		media = append(media, m)
	}
	diamond, err := gems.Find("diamond")
	if err != nil {
		b.Fatal(err)
	}
	return Scene{Stone: brilliant(b), Material: diamond, Surroundings: Around(media...)}
}

// BenchmarkCoarse is what follows a slider's move: a new stone to the first coarse
// answer in three media.
func BenchmarkCoarse(b *testing.B) {
	scene := sixMaps(b)
	for b.Loop() {
		r, err := newRun(scene, Settings{Head: 10 * facets.Degree})
		if err != nil {
			b.Fatal(err)
		}
		if err := r.pass(context.Background()); err != nil {
			b.Fatal(err)
		}
		r.result()
	}
}

// BenchmarkLook is a whole run at the defaults.
func BenchmarkLook(b *testing.B) {
	scene := sixMaps(b)
	for _, workers := range []int{1, 2} {
		b.Run(fmt.Sprintf("workers=%d", workers), func(b *testing.B) {
			var rays, segments float64
			for b.Loop() {
				r, err := Run(context.Background(), scene, Settings{Head: 10 * facets.Degree, Workers: workers}, nil)
				if err != nil {
					b.Fatal(err)
				}
				rays = float64(r.Rays)
				segments = 0
				for _, c := range r.Columns {
					segments += float64(c.Segments)
				}
			}
			b.ReportMetric(rays, "rays")
			b.ReportMetric(segments, "segments")
		})
	}
}
