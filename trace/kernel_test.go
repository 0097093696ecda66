package trace

import (
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"regexp"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// brilliant is a round brilliant of 121 facets, width 2: table 56 %, crown 34°,
// pavilion 40.5°, stars 50 %, lower halves 75 %, a girdle of 64 facets. The angles of
// stars and halves follow from those.
func brilliant(t testing.TB) *facets.Stone {
	t.Helper()
	const table, girdle, mainCrown = 0.56, 0.03, 34.0
	top := girdle + (1-table)*math.Tan(mainCrown*math.Pi/180)
	var planes []facets.Plane
	// tier cuts eight facets, or sixteen with a mirror, through the point at radius r
	// and height z over index 0.
	tier := func(side facets.Side, angle, azimuth float64, fold int, mirror bool, r, z float64) {
		sin, cos := math.Sincos(angle * math.Pi / 180)
		if side == facets.Pavilion {
			cos = -cos
		}
		for k := range fold {
			for _, a := range []float64{azimuth, -azimuth}[:1+map[bool]int{true: 1}[mirror]] {
				y, x := math.Sincos(a*math.Pi/180 + 2*math.Pi*float64(k)/float64(fold))
				planes = append(planes, facets.Plane{
					Normal:   mgl64.Vec3{sin * x, sin * y, cos}.Normalize(),
					Distance: sin*r*math.Cos(azimuth*math.Pi/180) + cos*z,
					Side:     side,
				})
			}
		}
	}
	tier(facets.Table, 0, 0, 1, false, 0, top)
	tier(facets.Crown, mainCrown, 0, 8, false, 1, girdle)
	tier(facets.Crown, 40.4412793056041, 11.25, 8, true, 1, girdle)
	tier(facets.Crown, 21.50116324356753, 22.5, 8, false, table, top)
	tier(facets.Girdle, 90, 2.8125, 64, false, 1, 0)
	tier(facets.Pavilion, 40.5, 0, 8, false, 1, -girdle)
	tier(facets.Pavilion, 41.76194277921584, 11.25, 8, true, 1, -girdle)
	return solid(t, planes)
}

// kernelRays are rays into a stone at random, off its mirror planes, in two media.
func kernelRays(tr *tracer, n float64, number int, rng *rand.Rand) (rays []ray) {
	for len(rays) < number {
		facet, x, ok := tr.outline.enter((2*rng.Float64()-1)*tr.outline.half, (2*rng.Float64()-1)*tr.outline.half)
		if ok {
			column := len(rays) % 2
			rays = append(rays, ray{int32(facet), int32(column), x, n + 0.01*rng.Float64(), []float64{1, 1.333}[column], dice(rng.Uint32())})
		}
	}
	return rays
}

// TestKernelAgainstFloat64 follows the same rays in both forms. float32 lets a ray
// that comes within 1e-6 of an edge or of the critical angle take another way, so
// most rays must agree closely and the means within what the others can do.
func TestKernelAgainstFloat64(t *testing.T) {
	all := stones(t)
	all["brilliant"] = brilliant(t)
	all["random 500"] = randomStone(t, 500, 500)
	rng := rand.New(rand.NewPCG(11, 3))
	for name, s := range all {
		for _, averaged := range []bool{false, true} {
			t.Run(fmt.Sprintf("%s averaged=%v", name, averaged), func(t *testing.T) {
				view := View{Tilt: facets.Angle(1+rng.Float64()*30) * facets.Degree, Turn: facets.Angle(rng.Float64()*360) * facets.Degree}
				tr, err := newTracer(s, Settings{View: view, Head: 10 * facets.Degree})
				if err != nil {
					t.Fatal(err)
				}
				tr.averaged = averaged
				fast := *tr
				if fast.kernel = newKernel(&fast); fast.kernel == nil {
					t.Skip("this processor has no kernel")
				}
				const number = 20000
				rays := kernelRays(tr, 1.6+rng.Float64(), number, rng)
				want, got := make([]Ledger, number), make([]Ledger, number)
				wantSums, gotSums := make([]sums, 2), make([]sums, 2)
				tr.followAll(rays, want, wantSums)
				fast.followAll(rays, got, gotSums)

				// Whole ways differ for rays astray; the others differ by rounding alone.
				astray := 0
				var rounding Ledger
				for i := range rays {
					if d := math.Abs(got[i].Sum() - 1); !(d <= 1e-6) {
						t.Fatalf("ray %d: the ledger's sum is off by %g", i, d)
					}
					d := difference(got[i], want[i])
					if d.Max() > 1e-4 {
						astray++
						continue
					}
					for q := range quantities {
						*entry64(&rounding, q) += (q.Of(got[i]) - q.Of(want[i])) / number
					}
				}
				// Seen: 4 to 7 in 10 000.
				if astray > number/500 {
					t.Errorf("%d of %d rays go another way", astray, number)
				}
				if worst := difference(rounding, Ledger{}).Max(); worst > 1e-6 {
					t.Errorf("rays that go the same way differ by %.2g in the mean", worst)
				}
				// The rays astray go either way at random, each by less than 1.
				stray := 5*math.Sqrt(float64(astray+1))/number + 1e-6
				for c := range gotSums {
					for slot := range slots {
						limit := stray
						if slot == segmentCount {
							limit = 0.005 * wantSums[c][slot] / number
						}
						if d := math.Abs(gotSums[c][slot]-wantSums[c][slot]) / number; !(d <= limit) {
							t.Errorf("column %d, slot %d: mean %.7f, want %.7f", c, slot, gotSums[c][slot]/number, wantSums[c][slot]/number)
						}
					}
				}
			})
		}
	}
}

// difference returns how far the entries of two ledgers are apart.
func difference(a, b Ledger) (d Ledger) {
	for q := range quantities {
		*entry64(&d, q) = math.Abs(q.Of(a) - q.Of(b))
	}
	return d
}

func entry64(l *Ledger, q Quantity) *float64 {
	return [...]*float64{&l.Surface, &l.Returned, &l.Head, &l.Leaked, &l.Absorbed, &l.Unresolved}[q]
}

// TestKernelHasNoOldInstructions reads the kernel's passes as the assembler gets
// them. An instruction of the older encoding (SSE: its name does not begin with V)
// while the upper halves of the vector registers are in use costs tens of
// nanoseconds, and Go's own code uses those, so a pass must clear the halves before
// it returns. (The disassembler of the Go tools does not know the newer encoding.)
func TestKernelHasNoOldInstructions(t *testing.T) {
	source, err := os.ReadFile("kernel_amd64.s")
	if err != nil {
		t.Fatal(err)
	}
	vector := regexp.MustCompile(`\b[XY]\d+\b`)
	vectors, returns, last := 0, 0, ""
	for i, line := range strings.Split(string(source), "\n") {
		fields := strings.Fields(line)
		if len(fields) == 0 || strings.HasPrefix(fields[0], "//") {
			continue
		}
		name := fields[0]
		if vector.MatchString(line) {
			vectors++
			if !strings.HasPrefix(name, "V") {
				t.Errorf("line %d: old instruction: %s", i+1, line)
			}
		}
		if name == "RET" {
			returns++
			if last != "VZEROUPPER" {
				t.Errorf("line %d: a pass returns without clearing the upper halves", i+1)
			}
		}
		last = name
	}
	if vectors < 500 || returns != 9 {
		t.Errorf("%d vector instructions and %d passes found: the test looks in the wrong place", vectors, returns)
	}
}
