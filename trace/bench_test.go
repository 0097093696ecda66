package trace

import (
	"context"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"strings"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
)

var planes = flag.String("planes", "", "write the brilliant's planes here (nx,ny,nz,distance) when BenchmarkGrid runs")

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

// BenchmarkGrid is the work on which other tracers are compared (SPEED.md): parallel
// rays face-up on a grid of 300 x 300 off the mirror planes into the diamond
// brilliant in air, the polarisations averaged, entries included. A path is cut when
// less than 1e-6 is left or at its 200th facet; float64, which knows no cut, decides
// by a die at 1e-6 instead. The ledger is reported too, so that a tracer cannot win by
// doing less.
func BenchmarkGrid(b *testing.B) {
	if *planes != "" {
		var rows strings.Builder
		for _, f := range brilliant(b).Facets {
			fmt.Fprintf(&rows, "%.15f,%.15f,%.15f,%.15f\n", f.Normal[0], f.Normal[1], f.Normal[2], f.Distance)
		}
		if err := os.WriteFile(*planes, []byte(rows.String()), 0o644); err != nil {
			b.Fatal(err)
		}
	}
	for _, form := range []string{"float64", "kernel"} {
		for _, averaged := range []bool{true, false} {
			b.Run(fmt.Sprintf("%s/averaged=%v", form, averaged), func(b *testing.B) {
				tr := benchTracer(b, brilliant(b), form == "kernel", averaged)
				tr.faint = 1e-6
				if tr.kernel != nil {
					tr.kernel.cutAt(1e-6, 200)
				}
				const grid = 300
				out, columns := make([]Ledger, grid*grid), make([]sums, 1)
				rays := make([]ray, 0, grid*grid)
				for b.Loop() {
					rays, columns[0] = rays[:0], sums{}
					for i := range grid * grid {
						u, v := -1+2*(float64(i%grid)+0.5137)/grid, -1+2*(float64(i/grid)+0.5291)/grid
						if facet, x, ok := tr.outline.enter(u*tr.outline.half, v*tr.outline.half); ok {
							rays = append(rays, ray{facet: int32(facet), at: x, along: vec{0, 0, -1}, n: 2.417, m: 1, weight: 1, die: dice(i)})
						}
					}
					tr.followAll(rays, out[:len(rays)], nil, columns)
				}
				n, l := float64(len(rays)), columns[0].ledger()
				b.ReportMetric(columns[0][segmentCount]*float64(b.N)/b.Elapsed().Seconds()/1e6, "Msegments/s")
				b.ReportMetric(columns[0][segmentCount]/n, "segments/ray")
				b.ReportMetric(l.Surface/n, "surface")
				b.ReportMetric(l.Returned/n, "returned")
				b.ReportMetric(l.Leaked/n, "leaked")
			})
		}
	}
}

func benchTracer(b *testing.B, s *facets.Stone, kernel, averaged bool) *tracer {
	b.Helper()
	tr, err := newTracer(s, Settings{Averaged: averaged})
	if err != nil {
		b.Fatal(err)
	}
	if kernel {
		if tr.kernel = newKernel(tr); tr.kernel == nil {
			b.Skip("this processor has no kernel")
		}
	}
	return tr
}

func paths(b *testing.B, s *facets.Stone, n float64, kernel, averaged bool) {
	tr := benchTracer(b, s, kernel, averaged)
	rays := kernelRays(tr, n, 4000, rand.New(rand.NewPCG(1, 1)))
	for i := range rays {
		rays[i].m = 1
	}
	out, columns := make([]Ledger, len(rays)), make([]sums, 2)
	b.ReportAllocs()
	for b.Loop() {
		tr.followAll(rays, out, nil, columns)
	}
	b.ReportMetric((columns[0][segmentCount]+columns[1][segmentCount])/b.Elapsed().Seconds()/1e6, "Msegments/s")
}

// BenchmarkBody prepares stones for tracing.
func BenchmarkBody(b *testing.B) {
	for _, n := range []int{60, 120, 500} {
		b.Run(fmt.Sprint(n), func(b *testing.B) {
			s := randomStone(b, n, 1)
			for b.Loop() {
				tr, err := newTracer(s, Settings{})
				if err != nil {
					b.Fatal(err)
				}
				newKernel(tr)
			}
		})
	}
}

// BenchmarkPicture is the picture of the diamond brilliant in air under the even
// light, for one index, the polarisations averaged, on one worker. rms is its pixels' error against a picture of
// 2000 rays a pixel: of everything that comes from above, surface and returned.
func BenchmarkPicture(b *testing.B) {
	scene := sixMaps(b)
	scene.Surroundings = scene.Surroundings[:1]
	settings := Settings{Wavelength: 589.3, Pixels: 150, Workers: 1, Averaged: true}
	above := func(samples int, seed uint64) ([]float32, []bool) {
		settings.Samples, settings.Seed = samples, seed
		r, err := Run(context.Background(), scene, settings, nil)
		if err != nil {
			b.Fatal(err)
		}
		m := r.Columns[0].Map
		sum := m.Field(Surface)
		for i, v := range m.Field(Returned) {
			sum[i] += v
		}
		return sum, m.grid.insidePixels()
	}
	want, inside := above(2000, 99)
	for _, samples := range []int{4, 8, 10, 16, 32, 64} {
		b.Run(fmt.Sprintf("samples=%d", samples), func(b *testing.B) {
			var got []float32
			for b.Loop() {
				got, _ = above(samples, 1)
			}
			b.ReportMetric(rms(got, want, inside), "rms")
		})
	}
}

func rms(got, want []float32, inside []bool) float64 {
	sum, n := 0.0, 0.0
	for i, in := range inside {
		if in {
			d := float64(got[i] - want[i])
			sum += d * d
			n++
		}
	}
	return math.Sqrt(sum / n)
}

// BenchmarkMaps is six maps of 300 x 300, returned and leaked in three media. rms is
// the worst of their pixel errors against maps of 1000 rays a pixel, error the largest
// standard error of any ledger entry.
func BenchmarkMaps(b *testing.B) {
	scene := sixMaps(b)
	settings := Settings{Head: 10 * facets.Degree}
	maps := func(samples int, seed uint64) *Result {
		settings.Samples, settings.Seed = samples, seed
		r, err := Run(context.Background(), scene, settings, nil)
		if err != nil {
			b.Fatal(err)
		}
		return r
	}
	want := maps(1000, 99)
	for _, samples := range []int{4, 8, 16, 32, 64} {
		b.Run(fmt.Sprintf("samples=%d", samples), func(b *testing.B) {
			var got *Result
			for b.Loop() {
				got = maps(samples, 1)
			}
			worst, se := 0.0, 0.0
			for k, c := range got.Columns {
				se = max(se, c.StandardError.Max())
				for _, q := range []Quantity{Returned, Leaked} {
					worst = max(worst, rms(c.Map.Field(q), want.Columns[k].Map.Field(q), c.Map.grid.insidePixels()))
				}
			}
			b.ReportMetric(worst, "rms")
			b.ReportMetric(se, "error")
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
