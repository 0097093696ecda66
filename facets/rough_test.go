package facets

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/mat"
	"gonum.org/v1/gonum/optimize/convex/lp"
)

// solidOf returns a solid from normals and distances.
func solidOf(t testing.TB, planes ...[4]float64) *Stone {
	t.Helper()
	var ps []Plane
	for _, p := range planes {
		n := mgl64.Vec3{p[0], p[1], p[2]}
		ps = append(ps, Plane{Index: math.NaN(), Normal: n.Normalize(), Distance: p[3] / n.Len()})
	}
	s, err := FromPlanes("solid", ps)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// cuboid is a box of the given edges, its middle away from the origin.
func cuboid(t testing.TB, x, y, z float64) *Stone {
	return solidOf(t, [4]float64{1, 0, 0, x/2 + 1}, [4]float64{-1, 0, 0, x/2 - 1}, [4]float64{0, 1, 0,
		y / 2}, [4]float64{0, -1, 0, y / 2},
		[4]float64{0, 0, 1, z/2 - 2}, [4]float64{0, 0, -1, z/2 + 2})
}

// octahedron has corners at 1 on the axes: edge sqrt 2.
func octahedron(t testing.TB) *Stone {
	var planes [][4]float64
	for i := range 8 {
		planes = append(planes, [4]float64{float64(i&1*2 - 1), float64(i&2 - 1), float64(i&4/2 - 1), 1})
	}
	return solidOf(t, planes...)
}

// tetrahedron has corners at alternate corners of the cube of edge 2: edge sqrt 8.
func tetrahedron(t testing.TB) *Stone {
	return solidOf(t, [4]float64{1, 1, 1, 1}, [4]float64{1, -1, -1, 1}, [4]float64{-1, 1, -1, 1},
		[4]float64{-1, -1, 1, 1})
}

func mustFit(t testing.TB, r Rough, s *Stone) Fit {
	t.Helper()
	f, err := r.Fit(s)
	if err != nil {
		t.Fatal(err)
	}
	checkFit(t, r, s, f)
	return f
}

// checkFit makes sure, corner by corner and without the search's own means,
// that the stone lies where it may.
func checkFit(t testing.TB, r Rough, s *Stone, f Fit) {
	t.Helper()
	const within = 2 * overstep
	gap := r.allowance()
	half := r.Size.Mul(0.5)
	at := func(p mgl64.Vec3) mgl64.Vec3 { return f.Centre.Add(f.RoughFromStone.Mul3x1(p).Mul(f.Scale)) }
	for _, c := range s.Corners {
		p := at(c)
		switch r.Shape {
		case Box:
			for k := range 3 {
				if math.Abs(p[k])+gap > half[k]+within {
					t.Fatalf("corner %v is out of the box", p)
				}
			}
		case Cylinder:
			if p.Vec2().Len()+gap > half[0]+within || math.Abs(p[2])+gap > half[2]+within {
				t.Fatalf("corner %v is out of the cylinder", p)
			}
		case Ellipsoid:
			// Walk the ellipsoid's surface for the nearest point.
			for _, d := range spreadDirections(2000) {
				q := mgl64.Vec3{half[0] * d[0], half[1] * d[1], half[2] * d[2]}
				n := mgl64.Vec3{d[0] / half[0], d[1] / half[1], d[2] / half[2]}.Normalize()
				if n.Dot(q)-n.Dot(p) < gap-within {
					t.Fatalf("corner %v is within %v of the ellipsoid", p, n.Dot(q)-n.Dot(p))
				}
			}
		}
	}
	inside := func(p mgl64.Vec3) float64 { // least distance from the facets' planes; positive inside
		local := f.RoughFromStone.Transpose().Mul3x1(p.Sub(f.Centre))
		least := math.Inf(1)
		for _, facet := range s.Facets {
			least = min(least, f.Scale*facet.Distance-facet.Normal.Dot(local))
		}
		return least
	}
	for _, b := range r.AvoidSpheres {
		for _, d := range spreadDirections(500) {
			if inside(b.Centre.Add(d.Mul(b.Radius+gap))) > within {
				t.Fatalf("sphere %v reaches into the stone", b)
			}
		}
	}
	for _, pl := range r.AvoidPlanes {
		low, high := math.Inf(1), math.Inf(-1)
		for _, c := range s.Corners {
			d := pl.Normal.Dot(at(c)) - pl.Distance
			low, high = min(low, d), max(high, d)
		}
		if low < gap-within && high > -gap+within {
			t.Fatalf("the stone lies across plane %v", pl)
		}
	}
	if r.Shape == Scanned {
		for _, tr := range r.Scan.mesh.triangles {
			a, b, c := r.Scan.mesh.points[tr[0]], r.Scan.mesh.points[tr[1]], r.Scan.mesh.points[tr[2]]
			const n = 12
			for u := range n + 1 {
				for v := range n + 1 - u {
					p := a.Add(b.Sub(a).Mul(float64(u) / n)).Add(c.Sub(a).Mul(float64(v) / n))
					if inside(p) > within {
						t.Fatalf("the rough's surface passes through the stone at %v", p)
					}
				}
			}
		}
		if _, in := r.Scan.mesh.holds(f.Centre.Add(f.RoughFromStone.Mul3x1(s.centroid()).Mul(f.Scale))); !in {
			t.Fatal("the stone lies outside the rough")
		}
	}
}

// Closed forms for bodies whose best position is known.
func TestLargestStoneInSimpleRough(t *testing.T) {
	for _, row := range []struct {
		name   string
		rough  Rough
		stone  *Stone
		want   float64 // scale
		within float64 // relative: exact orientations are among those tried, others are approached
		source string
	}{
		{"cube in cube", Rough{Shape: Box, Size: mgl64.Vec3{10, 10, 10},
			Allowance: -1}, cuboid(t, 2, 2, 2), 5, 1e-6, "identity"},
		{"default allowance", Rough{Shape: Box, Size: mgl64.Vec3{10, 10, 10}}, cuboid(t, 2, 2, 2), 4.7, 1e-6,
			"(10 - 2 x 0.3) / 2"},
		{"slab in box", Rough{Shape: Box, Size: mgl64.Vec3{4, 6, 9},
			Allowance: -1}, cuboid(t, 9, 4, 6), 1, 1e-6, "identity, turned"},
		{"cube in sphere", Rough{Shape: Ellipsoid, Size: mgl64.Vec3{10, 10, 10},
			Allowance: -1}, cuboid(t, 2, 2, 2), 5 / math.Sqrt(3), 2e-5,
			"the cube's diagonal is the diameter"},
		{"cube in sphere less allowance", Rough{Shape: Ellipsoid, Size: mgl64.Vec3{10, 10, 10},
			Allowance: 0.5}, cuboid(t, 2, 2, 2), 4.5 / math.Sqrt(3), 2e-5,
			"the allowance shrinks the sphere"},
		{"box in ellipsoid", Rough{Shape: Ellipsoid, Size: mgl64.Vec3{12, 8, 6},
			Allowance: -1}, cuboid(t, 6, 4, 3), 2 / math.Sqrt(3), 2e-5,
			"the stretched cube in the sphere"},
		{"cube in cylinder", Rough{Shape: Cylinder, Size: mgl64.Vec3{10, 0, 10},
			Allowance: -1}, cuboid(t, 2, 2, 2), 5 / math.Sqrt2, 2e-5,
			"the square's diagonal is the diameter"},
		{"octahedron in cube", Rough{Shape: Box, Size: mgl64.Vec3{1, 1, 1},
			Allowance: -1}, octahedron(t), 0.75, 2e-3,
			"edge 3 sqrt 2 / 4 (Croft, Proc. London Math. Soc. 41, 279, 1980; value from memory)"},
		{"tetrahedron in cube", Rough{Shape: Box, Size: mgl64.Vec3{1, 1, 1},
			Allowance: -1}, tetrahedron(t), 0.5, 2e-3,
			"edge sqrt 2 (Croft 1980; value from memory)"},
		{"crack across", Rough{Shape: Box, Size: mgl64.Vec3{10, 4, 4}, Allowance: -1,
			AvoidPlanes: []Plane{{Normal: mgl64.Vec3{1, 0, 0}, Distance: 2}}},
			cuboid(t, 4, 2, 2), 1.75, 1e-6, "7 mm of length are left on one side"},
		{"crack with allowance", Rough{Shape: Box, Size: mgl64.Vec3{10, 6, 6}, Allowance: 0.5,
			AvoidPlanes: []Plane{{Normal: mgl64.Vec3{1, 0, 0}, Distance: 2}}},
			cuboid(t, 4, 2, 2), 1.5, 1e-6, "7 less 2 x 0.5"},
		{"inclusion in the middle", Rough{Shape: Box, Size: mgl64.Vec3{10, 10, 10}, Allowance: -1,
			AvoidSpheres: []Sphere{{mgl64.Vec3{}, 1}}},
			cuboid(t, 2, 2, 2), (5 - 1/math.Sqrt(3)) / 2, 1e-6,
			"a cube in the corner whose own corner touches the sphere"},
		{"inclusion near a face", Rough{Shape: Box, Size: mgl64.Vec3{10, 10, 10}, Allowance: -1,
			AvoidSpheres: []Sphere{{mgl64.Vec3{0, 0, 4.8}, 0.2}}},
			cuboid(t, 2, 2, 2), 4.8, 1e-6, "0.4 mm of the height are lost, or as much at a side"},
	} {
		t.Run(row.name, func(t *testing.T) {
			f := mustFit(t, row.rough, row.stone)
			if math.Abs(f.Scale/row.want-1) > row.within {
				t.Errorf("scale %.8f, want %.8f (%s)", f.Scale, row.want, row.source)
			}
		})
	}
}

func TestYieldIsTheShareOfTheRough(t *testing.T) {
	stone := mustProportions(t, "round", "table=56,crown=34,pavilion=40.5", 6)
	m := stone.Measure()
	for _, row := range []struct {
		rough  Rough
		volume float64
	}{
		{Rough{Shape: Box, Size: mgl64.Vec3{9, 9, 7}}, 9 * 9 * 7},
		{Rough{Shape: Cylinder, Size: mgl64.Vec3{9, 0, 7}}, math.Pi / 4 * 81 * 7},
		{Rough{Shape: Ellipsoid, Size: mgl64.Vec3{10, 9, 8}}, math.Pi / 6 * 10 * 9 * 8},
	} {
		f := mustFit(t, row.rough, stone)
		if math.Abs(f.RoughVolume/row.volume-1) > 1e-12 {
			t.Errorf("%s: rough of %g mm3, want %g", row.rough.describe(), f.RoughVolume, row.volume)
		}
		want := math.Pow(f.WidthMM/m.WidthMM, 3) * m.VolumeMM3 / row.volume
		if math.Abs(f.Yield/want-1) > 1e-9 || f.Yield <= 0 || f.Yield >= 1 {
			t.Errorf("%s: yield %g, want %g", row.rough.describe(), f.Yield, want)
		}
	}
	// In a cylinder as wide as deep enough, the round's width is the diameter less twice 0.3.
	f := mustFit(t, Rough{Shape: Cylinder, Size: mgl64.Vec3{8.6, 0, 30}, Axis: mgl64.Vec3{0, 0, 1}}, stone)
	if math.Abs(f.WidthMM-8) > 1e-4 {
		t.Errorf("width %.6f mm, want 8", f.WidthMM)
	}
	if again := mustFit(t, Rough{Shape: Cylinder, Size: mgl64.Vec3{8.6, 0, 30},
		Axis: mgl64.Vec3{0, 0, 1}}, stone); again.Scale != f.Scale || again.Centre != f.Centre {
		t.Error("the same question had another answer")
	}
}

func TestAxisIsKept(t *testing.T) {
	stone := mustProportions(t, "oval", "", 6)
	axis := mgl64.Vec3{1, 2, 3}.Normalize()
	own := mgl64.Vec3{0, 1, 1}.Normalize()
	r := Rough{Shape: Box, Size: mgl64.Vec3{12, 9, 8}, Axis: axis, StoneAxis: own}
	f := mustFit(t, r, stone)
	if got := math.Abs(f.RoughFromStone.Mul3x1(own).Dot(axis)); math.Abs(got-1) > 1e-12 {
		t.Errorf("the axes are %v apart", Angle(math.Acos(got)))
	}
	r.Axis = mgl64.Vec3{}
	if free := mustFit(t, r, stone); free.Scale < f.Scale {
		t.Errorf("free to turn the stone has scale %g, held %g", free.Scale, f.Scale)
	}
}

// scanOfRough reads a made mesh as rough.
func scanOfRough(t testing.TB, m *rawMesh) *Scan {
	t.Helper()
	sc, err := ReadScan(bytes.NewReader(binarySTL(m)), "rough.stl", ScanOptions{Rough: true})
	if err != nil {
		t.Fatal(err)
	}
	return sc
}

func TestScannedRoughFitsLikeTheShapeItHas(t *testing.T) {
	stone := mustProportions(t, "cushion", "", 6)
	flat := Rough{Shape: Scanned, Scan: scanOfRough(t, dentedCube(0))}
	box := Rough{Shape: Box, Size: mgl64.Vec3{10, 10, 10}}
	a, b := mustFit(t, flat, stone), mustFit(t, box, stone)
	// The search starts alike; float32 corners and a shifted origin remain.
	if math.Abs(a.Scale/b.Scale-1) > 1e-4 || math.Abs(a.RoughVolume-1000) > 1e-3 {
		t.Errorf("scan: scale %.6f of %.3f mm3; box: %.6f", a.Scale, a.RoughVolume, b.Scale)
	}
}

func TestDentedRoughKeepsTheStoneOut(t *testing.T) {
	cube := cuboid(t, 2, 2, 2)
	whole := mustFit(t, Rough{Shape: Scanned, Scan: scanOfRough(t, dentedCube(0)), Allowance: -1}, cube)
	pit := mustFit(t, Rough{Shape: Scanned, Scan: scanOfRough(t, dentedCube(3)), Allowance: -1}, cube)
	// Under the pit a cube of 7 is left for sure; the spheres that cover the
	// pit's walls, up to an eightieth of the rough in radius, cost a little of it.
	if pit.Scale >= whole.Scale || pit.Scale < (7-0.3)/2 {
		t.Errorf("scale %.4f with a pit 3 deep, %.4f without", pit.Scale, whole.Scale)
	}
	if len(pit.Notes) == 0 || !strings.Contains(pit.Notes[0], "dented") {
		t.Errorf("notes %q", pit.Notes)
	}
}

// angledRough is an angle of two bars 3 wide and 6 thick.
func angledRough() *rawMesh {
	m := &rawMesh{format: "made"}
	ring := []mgl64.Vec2{{0, 0}, {10, 0}, {10, 3}, {3, 3}, {3, 10}, {0, 10}}
	for _, z := range []float64{0, 6} {
		for _, p := range ring {
			m.points = append(m.points, p.Vec3(z))
		}
	}
	for _, q := range [][]int32{{3, 2, 1, 0}, {5, 4, 3, 0}} {
		m.polygon(q)
		m.polygon([]int32{q[3] + 6, q[2] + 6, q[1] + 6, q[0] + 6})
	}
	for i := range int32(6) {
		j := (i + 1) % 6
		m.polygon([]int32{i, j, j + 6, i + 6})
	}
	return m
}

// The pocket between the bars, closed by the hull, is a triangle with legs of 7
// and would take a cube of 3.5 (the square in a right triangle has half its
// leg); the bars take one of 3.
func TestAngledRoughDoesNotFillItsPocket(t *testing.T) {
	sc := scanOfRough(t, angledRough())
	if sc.OpenEdges+sc.TangledEdges != 0 || math.Abs(sc.Volume-306) > 1e-3 {
		t.Fatalf("the rough was made wrong: %d open edges, %.4f mm3", sc.OpenEdges, sc.Volume)
	}
	f := mustFit(t, Rough{Shape: Scanned, Scan: sc, Allowance: -1}, cuboid(t, 2, 2, 2))
	// The spheres that cover the bars' inner walls reach 0.125 into the width.
	if f.Scale > 1.5+1e-5 || f.Scale < (3-3*0.125)/2 {
		t.Errorf("scale %.4f, want nearly 1.5", f.Scale)
	}
}

func TestRoughFaultsSayWhatToMend(t *testing.T) {
	open := dentedCube(0)
	open.triangles = open.triangles[1:]
	for _, row := range []struct {
		name  string
		rough Rough
		want  string
	}{
		{"no size", Rough{Shape: Box}, "positive millimetres"},
		{"NaN", Rough{Shape: Ellipsoid, Size: mgl64.Vec3{1, math.NaN(), 1}}, "positive millimetres"},
		{"all allowance", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 0.6}}, "leaves nothing"},
		{"no scan", Rough{Shape: Scanned}, "no scan was read"},
		{"open scan", Rough{Shape: Scanned, Scan: scanOfRough(t, open)}, "open at 3 edges"},
		{"shape", Rough{Shape: 9}, "box, cylinder, ellipsoid or scan"},
		{"plane", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 5}, AvoidPlanes: []Plane{{}}}, "unit normal"},
		{"sphere", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 5}, AvoidSpheres: []Sphere{{Radius: -1}}}, "radius"},
		{"axis", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 5}, Axis: mgl64.Vec3{math.NaN(), 0, 1}}, "direction"},
		{"too many", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 5},
			AvoidSpheres: make([]Sphere, 201)}, "more than 200"},
		{"nothing left", Rough{Shape: Box, Size: mgl64.Vec3{5, 5, 5},
			AvoidSpheres: []Sphere{{Radius: 9}}}, "nothing is left"},
	} {
		_, err := row.rough.Fit(cuboid(t, 2, 2, 2))
		var f *Fault
		var fs Faults
		if !errors.As(err, &f) && !errors.As(err, &fs) || !strings.Contains(fmt.Sprint(err), row.want) {
			t.Errorf("%s: %v does not say %q", row.name, err, row.want)
		}
	}
}

// The small linear program against gonum's general simplex method.
func TestLinearProgramAgreesWithGonum(t *testing.T) {
	rng := rand.New(rand.NewPCG(8, 8))
	for try := range 200 {
		// Random walls round the origin bound the place; the scale takes a positive share of each.
		m := 8 + rng.IntN(30)
		l := linearProgram{variables: 4, goal: [4]float64{0, 0, 0, 1}, slack: 1e-11}
		for i, n := range [4]mgl64.Vec3{{1, 1, 1}, {1, -1, -1}, {-1, 1, -1}, {-1, -1, 1}} {
			n = n.Normalize()
			l.constraints = append(l.constraints, constraint{[4]float64{n[0], n[1], n[2], 1}, 50})
			l.basis[i] = i
		}
		for range m {
			n := mgl64.Vec3{rng.NormFloat64(), rng.NormFloat64(), rng.NormFloat64()}.Normalize()
			l.constraints = append(l.constraints, constraint{[4]float64{n[0], n[1], n[2], 0.5 + rng.Float64()},
				1 + rng.Float64()})
		}
		if l.solve() != lpOptimal {
			t.Fatalf("try %d did not end", try)
		}
		// The dual in gonum's form: min b·y, A^T y = goal, y >= 0; its value is the primal's.
		a := mat.NewDense(4, len(l.constraints), nil)
		c := make([]float64, len(l.constraints))
		for j, con := range l.constraints {
			for i := range 4 {
				a.Set(i, j, con.a[i])
			}
			c[j] = con.b
		}
		want, _, err := lp.Simplex(c, a, l.goal[:], 1e-12, nil)
		if err != nil {
			t.Fatalf("try %d: gonum: %v", try, err)
		}
		if math.Abs(l.corner[3]-want) > 1e-9 {
			t.Errorf("try %d: %.12f, gonum says %.12f", try, l.corner[3], want)
		}
	}
	// No point obeys x <= -1 and -x <= -1.
	l := linearProgram{variables: 3, goal: [4]float64{0, 0, 1}, basis: [4]int{0, 1, 2}, slack: 1e-9,
		constraints: []constraint{
			{[4]float64{1, 0, 0}, 9}, {[4]float64{0, 1, 0}, 9}, {[4]float64{0, 0, 1}, 9},
			{[4]float64{1, 0, 0}, -1}, {[4]float64{-1, 0, 0}, -1}}}
	if got := l.solve(); got != lpEmpty {
		t.Errorf("contradicting walls ended with status %d", got)
	}
}

func BenchmarkFit(b *testing.B) {
	stone := mustProportions(b, "round", "", 6)
	for name, r := range map[string]Rough{
		"box":       {Shape: Box, Size: mgl64.Vec3{9, 9, 7}},
		"ellipsoid": {Shape: Ellipsoid, Size: mgl64.Vec3{10, 9, 8}},
		"spheres": {Shape: Box, Size: mgl64.Vec3{9, 9, 7},
			AvoidSpheres: []Sphere{{mgl64.Vec3{1, 0, 0}, 0.5}, {mgl64.Vec3{-2, 2, 1}, 0.3}}},
	} {
		b.Run(name, func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				if _, err := r.Fit(stone); err != nil {
					b.Fatal(err)
				}
			}
		})
	}
}
