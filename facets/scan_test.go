package facets

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/testdata/budget"
)

func readScanFile(t testing.TB, name string) *Scan {
	t.Helper()
	f, err := os.Open(filepath.Join("testdata", "scans", name))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	sc, err := ReadScan(f, name, ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	return sc
}

// The same two solids as written by three general-purpose mesh programs, see
// testdata/scans/README.md for them and for VTK's volume and surface.
func TestScansOfOtherProgramsGiveTheSameStone(t *testing.T) {
	square := mustProportions(t, "square", "table=62,crown=33,pavilion=41,star=60,lower=60,girdle=4", 8)
	step := mustProportions(t, "step", "table=60,crown=35,pavilion=41,fan=5,steps=3,girdle=3,ratio=1.4,corner=12", 8)
	// Coordinates reach 7 mm and carry seven digits as float32: 5e-7 mm each.
	// A volume is off by that times the surface, 1e-4 mm3.
	const place, share = 2e-5, 1e-6
	for _, row := range []struct {
		file            string
		want            *Stone
		volume, surface float64 // by VTK
	}{
		{"square-own.obj", square, 184.09504616989, 184.85290010660},
		{"square-vtk-text.stl", square, 184.09504616989, 184.85290010660},
		{"square-vtk-binary.stl", square, 184.09504616989, 184.85290010660},
		{"square-vtk-text.ply", square, 184.09504616989, 184.85290010660},
		{"square-vtk-little.ply", square, 184.09504616989, 184.85290010660},
		{"square-vtk-big.ply", square, 184.09504616989, 184.85290010660},
		{"square-vtk.obj", square, 184.09504616989, 184.85290010660},
		{"square-assimp.obj", square, 184.09504616989, 184.85290010660},
		{"square-assimp.ply", square, 184.09504616989, 184.85290010660},
		{"square-assimp.stl", square, 184.09504616989, 184.85290010660},
		{"square-admesh-text.stl", square, 184.09504616989, 184.85290010660},
		{"square-admesh-binary.stl", square, 184.09504616989, 184.85290010660},
		{"step-own.obj", step, 247.03632014195, 236.30969311805},
		{"step-vtk-binary.stl", step, 247.03632014195, 236.30969311805},
		{"step-vtk-big.ply", step, 247.03632014195, 236.30969311805},
		{"step-assimp.ply", step, 247.03632014195, 236.30969311805},
	} {
		sc := readScanFile(t, row.file)
		if math.Abs(sc.Volume/row.volume-1) > share || math.Abs(sc.HullVolume/row.volume-1) > share {
			t.Errorf("%s: volume %.6f, hull %.6f, VTK says %.6f", row.file, sc.Volume, sc.HullVolume, row.volume)
		}
		if sc.OpenEdges != 0 || sc.TangledEdges != 0 || sc.Bodies != 1 || sc.Dent.Depth != 0 {
			t.Errorf("%s: open %d, tangled %d, bodies %d, dent %+v", row.file, sc.OpenEdges, sc.TangledEdges,
				sc.Bodies, sc.Dent)
		}
		for _, f := range sc.Facets {
			if f.Flatness > place || f.Triangles == 0 {
				t.Errorf("%s: a facet of %d triangles is out of flat by %g mm", row.file, f.Triangles, f.Flatness)
			}
		}
		s, err := sc.Stone(ScanPlacement{Name: "again"})
		if err != nil {
			t.Errorf("%s: %v", row.file, err)
			continue
		}
		surface := 0.0
		for _, f := range s.Facets {
			surface += f.Area
		}
		if math.Abs(surface/row.surface-1) > share {
			t.Errorf("%s: surface %.6f, VTK says %.6f", row.file, surface, row.surface)
		}
		sameSolid(t, row.file, s, row.want, place)
	}
}

// sameSolid compares two stones facet for facet, up to a half or quarter turn
// about the axis, which a symmetric stone leaves open.
func sameSolid(t *testing.T, name string, got, want *Stone, within float64) {
	t.Helper()
	if len(got.Facets) != len(want.Facets) {
		t.Errorf("%s: %d facets, want %d", name, len(got.Facets), len(want.Facets))
		return
	}
	least := math.Inf(1)
	for quarter := range 8 {
		turn := mgl64.Rotate3DZ(float64(quarter) * math.Pi / 4)
		least = min(least, hausdorff(got, want, turn))
	}
	if least > within {
		t.Errorf("%s: a corner lies %g mm from where it should, allowed %g", name, least, within)
	}
	for _, side := range []Side{Table, Crown, Girdle, Pavilion} {
		count := func(s *Stone) (n int) {
			for _, f := range s.Facets {
				if f.Side == side {
					n++
				}
			}
			return n
		}
		if count(got) != count(want) {
			t.Errorf("%s: %d facets of the %s, want %d", name, count(got), side, count(want))
		}
	}
}

// hausdorff is the greatest distance from a corner of one stone, turned, to
// the nearest corner of the other, both ways.
func hausdorff(a, b *Stone, turn mgl64.Mat3) float64 {
	far := 0.0
	var turned []mgl64.Vec3
	for _, c := range a.Corners {
		turned = append(turned, turn.Mul3x1(c))
	}
	for _, pair := range [2][2][]mgl64.Vec3{{turned, b.Corners}, {b.Corners, turned}} {
		for _, p := range pair[0] {
			near := math.Inf(1)
			for _, q := range pair[1] {
				near = min(near, p.Sub(q).Len())
			}
			far = max(far, near)
		}
	}
	return far
}

// grid covers every facet of a stone with n x n triangles for each of its fan
// and moves every point but those on edges by move along the facet's normal.
func grid(s *Stone, n int, move func() float64) *rawMesh {
	m := &rawMesh{format: "made"}
	type key [3]int64
	number := map[key]int32{}
	for _, f := range s.Facets {
		for j := 2; j < len(f.Corners); j++ {
			a, b, c := s.Corners[f.Corners[0]], s.Corners[f.Corners[j-1]], s.Corners[f.Corners[j]]
			at := func(u, v int) int32 {
				p := a.Add(b.Sub(a).Mul(float64(u) / float64(n))).Add(c.Sub(a).Mul(float64(v) / float64(n)))
				k := key{int64(math.Round(p[0] * 1e7)), int64(math.Round(p[1] * 1e7)), int64(math.Round(p[2] * 1e7))}
				if i, ok := number[k]; ok {
					return i
				}
				number[k] = int32(len(m.points))
				m.points = append(m.points, p.Add(f.Normal.Mul(move())))
				return number[k]
			}
			for u := range n {
				for v := range n - u {
					m.triangles = append(m.triangles, [3]int32{at(u, v), at(u+1, v), at(u, v+1)})
					if u+v < n-1 {
						m.triangles = append(m.triangles, [3]int32{at(u+1, v), at(u+1, v+1), at(u, v+1)})
					}
				}
			}
		}
	}
	return m
}

// binarySTL writes a mesh without going through a Stone.
func binarySTL(m *rawMesh) []byte {
	var b bytes.Buffer
	b.Write(make([]byte, stlHeaderBytes))
	binary.Write(&b, binary.LittleEndian, uint32(len(m.triangles)))
	for _, t := range m.triangles {
		b.Write(make([]byte, 12))
		for _, c := range t {
			for _, x := range m.points[c] {
				binary.Write(&b, binary.LittleEndian, float32(x))
			}
		}
		b.Write(make([]byte, 2))
	}
	return b.Bytes()
}

// A scanner's noise must not change the number of facets, and what is reported
// as flatness must be that noise.
func TestToleranceFollowsTheScatterOfTheScan(t *testing.T) {
	stone := mustProportions(t, "square", "", 8)
	for _, noise := range []float64{0, 0.0005, 0.002, 0.008} {
		rng := rand.New(rand.NewPCG(5, 6))
		raw := grid(stone, 24, func() float64 { return noise * (2*rng.Float64() - 1) })
		sc, err := ReadScan(bytes.NewReader(binarySTL(raw)), "made.stl", ScanOptions{})
		if err != nil {
			t.Fatal(err)
		}
		if len(sc.Facets) != len(stone.Facets) {
			t.Errorf("noise %g mm: %d facets, want %d (tolerance %g)", noise, len(sc.Facets), len(stone.Facets),
				sc.Tolerance)
			continue
		}
		if sc.Dent.Depth != 0 {
			t.Errorf("noise %g mm: taken for a dent %+v", noise, sc.Dent)
		}
		// Hundreds of points a facet come within a tenth of both ends of the
		// range; the fitted plane leans a little where rims round off.
		for _, f := range sc.Facets {
			if f.Flatness > 2*noise*1.3+1e-6 || f.Flatness < 2*noise*0.8 {
				t.Errorf("noise %g mm: flatness %g mm over %d triangles", noise, f.Flatness, f.Triangles)
			}
		}
		s, err := sc.Stone(ScanPlacement{})
		if err != nil {
			t.Fatal(err)
		}
		// Noise of standard deviation noise/sqrt(3) on hundreds of points tilts a
		// facet of 2 mm by less than a thousandth of its own size in noise.
		for _, f := range s.Facets {
			best := 0.0
			for _, g := range stone.Facets {
				best = max(best, f.Normal.Dot(g.Normal))
			}
			if off := math.Acos(min(1, best)) * 180 / math.Pi; off > 0.02+noise*30 {
				t.Errorf("noise %g mm: a facet is %.3f degrees off", noise, off)
			}
		}
	}
}

// dentedCube is a cube of edge 10 with a four-sided pit in the middle of its
// top, 4 wide and depth deep: its volume is 1000 - 16 depth / 3.
func dentedCube(depth float64) *rawMesh {
	m := &rawMesh{format: "made", points: []mgl64.Vec3{
		{0, 0, 0}, {10, 0, 0}, {10, 10, 0}, {0, 10, 0}, {0, 0, 10}, {10, 0, 10}, {10, 10, 10}, {0, 10, 10},
		{3, 3, 10}, {7, 3, 10}, {7, 7, 10}, {3, 7, 10}, {5, 5, 10 - depth},
	}}
	quad := func(a, b, c, d int32) { m.polygon([]int32{a, b, c, d}) }
	quad(3, 2, 1, 0)
	for i := range int32(4) {
		j := (i + 1) % 4
		quad(i, j, j+4, i+4)
		quad(i+4, j+4, j+8, i+8)
		m.polygon([]int32{i + 8, j + 8, 12})
	}
	return m
}

func TestDentIsShownAndFilledOnlyWhenAllowed(t *testing.T) {
	const depth = 0.25
	sc, err := ReadScan(bytes.NewReader(binarySTL(dentedCube(depth))), "pit.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(sc.Dent.Depth-depth) > 1e-6 || sc.Dent.At.Sub(mgl64.Vec3{5, 5, 10 - depth}).Len() > 1e-6 {
		t.Errorf("dent %+v, want %g deep at (5, 5, 9.75)", sc.Dent, depth)
	}
	if want := 16 * depth / 3; math.Abs(sc.Dent.Added-want) > 1e-4 {
		t.Errorf("the hull adds %.6f mm3, want %.6f", sc.Dent.Added, want)
	}
	_, err = sc.Stone(ScanPlacement{})
	if err == nil || !strings.Contains(err.Error(), "0.250 mm deep at (5.000, 5.000, 9.750)") {
		t.Errorf("a dented surface: %v", err)
	}
	s, err := sc.Stone(ScanPlacement{AllowHull: true})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(s.Volume()-1000) > 1e-3 || len(s.Facets) != 6 {
		t.Errorf("hull of %d facets, %.4f mm3", len(s.Facets), s.Volume())
	}
	note := strings.Join(s.Notes, "\n")
	for _, want := range []string{"0.250 mm deep", "1.3333 mm³", "(5.00, 5.00, 9.75)"} {
		if !strings.Contains(note, want) {
			t.Errorf("the stone's notes %q do not say %q", note, want)
		}
	}
	whole, err := ReadScan(bytes.NewReader(binarySTL(dentedCube(0))), "flat.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := whole.Stone(ScanPlacement{}); err != nil || whole.Dent.Depth != 0 {
		t.Errorf("without a pit: %v, %+v", err, whole.Dent)
	}
}

// Every corner of an angle of two bars lies on its hull's flats, the inner edge
// does not: half way up it lies 3 below both ends, farther below the pocket's lid.
func TestDentBetweenCornersOnTheHull(t *testing.T) {
	sc, err := ReadScan(bytes.NewReader(binarySTL(angledRough())), "angle.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if at := sc.Dent.At; math.Abs(sc.Dent.Depth-3) > 1e-5 || math.Abs(at[2]-3) > 1e-5 || math.Abs(min(at[0],
		at[1])-3) > 1e-5 {
		t.Errorf("dent %+v, want 3 deep half way up an inner wall", sc.Dent)
	}
	if want := 6 * 49.0 / 2; math.Abs(sc.Dent.Added-want) > 1e-3 {
		t.Errorf("the hull adds %.5f mm3, want %g", sc.Dent.Added, want)
	}
	if _, err := sc.Stone(ScanPlacement{}); err == nil {
		t.Error("an angle was taken for convex")
	}
}

func TestOpenSurfaceNamesTheHole(t *testing.T) {
	m := dentedCube(0)
	m.triangles = m.triangles[:len(m.triangles)-1] // the last roof of the pit: edges 4, and twice sqrt(8)
	sc, err := ReadScan(bytes.NewReader(binarySTL(m)), "hole.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if sc.OpenEdges != 3 || math.Abs(sc.OpenLength-(4+2*math.Sqrt(8))) > 1e-5 {
		t.Errorf("%d open edges of %.6f mm, want 3 of %.6f", sc.OpenEdges, sc.OpenLength, 4+2*math.Sqrt(8))
	}
	if _, err = sc.Stone(ScanPlacement{}); err == nil || !strings.Contains(err.Error(),
		"open at 3 edges (9.657 mm)") {
		t.Errorf("an open surface: %v", err)
	}
	if s, err := sc.Stone(ScanPlacement{AllowHull: true}); err != nil || len(s.Facets) != 6 {
		t.Errorf("its hull: %v", err)
	}
}

func TestInsideOutAndMixedTrianglesAreTurned(t *testing.T) {
	m := dentedCube(0)
	for i := range m.triangles {
		if i%3 == 0 {
			c := &m.triangles[i]
			c[0], c[1] = c[1], c[0]
		}
	}
	sc, err := ReadScan(bytes.NewReader(binarySTL(m)), "mixed.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(sc.Volume-1000) > 1e-3 || sc.OpenEdges+sc.TangledEdges != 0 {
		t.Errorf("volume %v, %d open and %d tangled edges", sc.Volume, sc.OpenEdges, sc.TangledEdges)
	}
	if _, err := sc.Stone(ScanPlacement{}); err != nil {
		t.Error(err)
	}
}

func TestTwoBodiesAreRefused(t *testing.T) {
	m := dentedCube(0)
	n, k := int32(len(m.points)), len(m.triangles)
	for _, p := range m.points[:n] {
		m.points = append(m.points, p.Add(mgl64.Vec3{20, 0, 0}))
	}
	for _, c := range m.triangles[:k] {
		m.triangles = append(m.triangles, [3]int32{c[0] + n, c[1] + n, c[2] + n})
	}
	sc, err := ReadScan(bytes.NewReader(binarySTL(m)), "two.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := sc.Stone(ScanPlacement{AllowHull: true}); err == nil || !strings.Contains(err.Error(),
		"2 separate surfaces") {
		t.Errorf("two bodies: %v", err)
	}
}

func TestCurvedSurfaceIsNoStone(t *testing.T) {
	ball := &rawMesh{format: "made"}
	const rings = 60
	ball.points = append(ball.points, mgl64.Vec3{0, 0, 4}, mgl64.Vec3{0, 0, -4})
	rng := rand.New(rand.NewPCG(1, 2))
	for i := 1; i < rings; i++ {
		for j := range rings {
			theta, phi := math.Pi*float64(i)/rings, 2*math.Pi*(float64(j)+0.5*float64(i%2))/rings
			p := mgl64.Vec3{math.Sin(theta) * math.Cos(phi), math.Sin(theta) * math.Sin(phi), math.Cos(theta)}
			ball.points = append(ball.points, p.Mul(4+0.001*rng.Float64()))
		}
	}
	at := func(i, j int) int32 { return int32(2 + (i-1)*rings + j%rings) }
	for j := range rings {
		ball.triangles = append(ball.triangles, [3]int32{0, at(1, j), at(1, j+1)}, [3]int32{1, at(rings-1, j+1),
			at(rings-1, j)})
		for i := 1; i < rings-1; i++ {
			ball.triangles = append(ball.triangles, [3]int32{at(i, j), at(i+1, j), at(i+1, j+1)}, [3]int32{at(i,
				j), at(i+1, j+1), at(i, j+1)})
		}
	}
	sc, err := ReadScan(bytes.NewReader(binarySTL(ball)), "bead.stl", ScanOptions{})
	if err != nil {
		t.Fatal(err)
	}
	if _, err := sc.Stone(ScanPlacement{AllowHull: true}); err == nil || !strings.Contains(err.Error(),
		"not made of flats") {
		t.Errorf("a bead gave %d flats at %g mm and %v", len(sc.Facets), sc.Tolerance, err)
	}
}

func TestUserCorrectsThePlacement(t *testing.T) {
	sc := readScanFile(t, "step-own.obj")
	plain, err := sc.Stone(ScanPlacement{})
	if err != nil {
		t.Fatal(err)
	}
	table := func(s *Stone) Facet {
		for _, f := range s.Facets {
			if f.Side == Table {
				return f
			}
		}
		t.Fatal("no table")
		return Facet{}
	}
	up := table(plain)
	// The file was turned by 2.1 rad about (1, 2, -0.5): up is where that takes z.
	axis := mgl64.QuatRotate(2.1, mgl64.Vec3{1, 2, -0.5}.Normalize()).Rotate(mgl64.Vec3{0, 0, 1})
	pointed, err := sc.Stone(ScanPlacement{Up: axis})
	if err != nil {
		t.Fatal(err)
	}
	if math.Abs(table(pointed).Area-up.Area) > 1e-6 {
		t.Errorf("pointed up: a table of %g mm2, want %g", table(pointed).Area, up.Area)
	}
	flipped, err := sc.Stone(ScanPlacement{Flip: true})
	if err != nil {
		t.Fatal(err)
	}
	lowest, highest := 0.0, 0.0
	for _, c := range flipped.Corners {
		lowest, highest = min(lowest, c[2]), max(highest, c[2])
	}
	if math.Abs(lowest+up.Distance) > 1e-6 {
		t.Errorf("flipped: the old table lies at %g, want %g", lowest, -up.Distance)
	}
	turned, err := sc.Stone(ScanPlacement{Turn: 90 * Degree})
	if err != nil {
		t.Fatal(err)
	}
	if d := hausdorff(plain, turned, mgl64.Rotate3DZ(math.Pi/2)); d > 1e-9 {
		t.Errorf("turned by 90 degrees: corners are %g mm off", d)
	}
	o := seenFromAbove(plain, mgl64.Ident3())
	if math.Abs(o.across[0]) > 1e-6 {
		t.Errorf("the length does not lie along x: the width lies along %v", o.across)
	}
}

func TestUnitsAreSaidAndScaled(t *testing.T) {
	sc := readScanFile(t, "step-own.obj")
	if !strings.Contains(strings.Join(sc.Notes, "\n"), "taken as millimetres") {
		t.Errorf("notes %q", sc.Notes)
	}
	f, err := os.Open("testdata/scans/step-own.obj")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	inches, err := ReadScan(f, "inches.obj", ScanOptions{Scale: 25.4})
	if err != nil {
		t.Fatal(err)
	}
	if want := sc.Volume * math.Pow(25.4, 3); math.Abs(inches.Volume/want-1) > 1e-12 {
		t.Errorf("volume %g, want %g", inches.Volume, want)
	}
	for _, bad := range []float64{-1, math.NaN(), math.Inf(1)} {
		if _, err := ReadScan(strings.NewReader("v 0 0 0"), "x.obj", ScanOptions{Scale: bad}); err == nil {
			t.Errorf("a scale of %v was taken", bad)
		}
	}
}

// The heads of hostile and damaged files: each must end in a fault with a place.
func hostileScans() map[string][]byte {
	square, err := os.ReadFile("testdata/scans/square-vtk-binary.stl")
	if err != nil {
		panic(err)
	}
	big, err := os.ReadFile("testdata/scans/square-vtk-big.ply")
	if err != nil {
		panic(err)
	}
	claim := append([]byte(nil), square...)
	binary.LittleEndian.PutUint32(claim[80:], math.MaxUint32)
	modest := append([]byte(nil), square...)
	binary.LittleEndian.PutUint32(modest[80:], 900_000)
	nan := append([]byte(nil), square...)
	binary.LittleEndian.PutUint32(nan[84+12:], math.Float32bits(float32(math.NaN())))
	huge := append([]byte(nil), square...)
	binary.LittleEndian.PutUint32(huge[84+12:], math.Float32bits(3e38))
	ply := func(header, body string) []byte {
		return []byte("ply\nformat ascii 1.0\n" + header + "end_header\n" + body)
	}
	const xyz = "property float x\nproperty float y\nproperty float z\n"
	const corners = "property list uchar int vertex_indices\n"
	return map[string][]byte{
		"empty.stl":    {},
		"claim.stl":    claim,
		"modest.stl":   modest,
		"short.stl":    square[:len(square)-7],
		"head.stl":     square[:50],
		"nan.stl":      nan,
		"huge.stl":     huge,
		"cut-text.stl": []byte("solid x\nfacet normal 0 0 1\nouter loop\nvertex 0 0 0\nvertex 1 0 0\n"),
		"word.stl":     []byte("solid x\nfacet normal 0 0 1\nouter loop\nvertex 0 0 zero\n"),
		"four.stl":     []byte("solid x\nfacet normal 0 0 1\nouter loop\nvertex 0 0 0\nvertex 1 0 0\nvertex 1 1 0\nvertex 0 1 0\nendloop\n"),
		"outside.stl":  []byte("solid x\nfacet\nvertex 0 0 0\nendsolid\n"),
		"long.obj":     []byte("v " + strings.Repeat("1", 100_000)),
		"joined.obj":   []byte("f " + strings.Repeat("1 \\\n", 100_000)),
		"index.obj":    []byte("v 0 0 0\nv 1 0 0\nf 1 2 3\n"),
		"zero.obj":     []byte("v 0 0 0\nv 1 0 0\nv 0 1 0\nf 0 1 2\n"),
		"inf.obj":      []byte("v 0 0 inf\n"),
		"points.obj":   []byte("v 0 0 0\nv 1 0 0\n"),
		"flat.obj":     []byte("v 0 0 0\nv 1 0 0\nv 0 1 0\nv 1 1 0\nf 1 2 4 3\n"),
		"promise.obj":  []byte("v 0 0 0\nf 1 \\"),
		"claim.ply":    ply("element vertex 4294967296\n"+xyz+"element face 1\n"+corners, ""),
		"faces.ply":    ply("element vertex 3\n"+xyz+"element face 4294967296\n"+corners, "0 0 0\n"),
		"other.ply":    ply("element vertex 3\n"+xyz+"element camera 4294967296\nproperty float x\n", "0 0 0\n"),
		"list.ply":     ply("element vertex 3\n"+xyz+"element face 1\nproperty list uint int vertex_indices\n", "0 0 0\n1 0 0\n0 1 0\n4294967295 0 1 2\n"),
		"index.ply": ply("element vertex 3\n"+xyz+"element face 1\n"+corners,
			"0 0 0\n1 0 0\n0 1 0\n3 0 1 7\n"),
		"noz.ply":        ply("element vertex 3\nproperty float x\nelement face 1\n"+corners, "0\n1\n2\n3 0 1 2\n"),
		"noface.ply":     ply("element vertex 1\n"+xyz, "0 0 0\n"),
		"cut.ply":        ply("element vertex 3\n"+xyz+"element face 1\n"+corners, "0 0 0\n1 0"),
		"endless.ply":    []byte("ply\nformat ascii 1.0\n" + strings.Repeat("comment\n", 2000)),
		"format.ply":     []byte("ply\nformat binary_middle_endian 1.0\nend_header\n"),
		"nohead.ply":     []byte("ply\nformat ascii 1.0\nelement vertex 3\n"),
		"short-big.ply":  big[:len(big)-5],
		"notply.ply":     []byte("solid x\n"),
		"picture.png":    []byte("\x89PNG\r\n\x1a\n\x00\x00\x00"),
		"prose":          []byte("a stone, a stone\n"),
		"strips.ply":     ply("element vertex 0\n"+xyz+"element tristrips 1\n"+corners, "3 0 1 2\n"),
		"badtype.ply":    ply("element vertex 3\nproperty quaternion x\n", ""),
		"badcount.ply":   ply("element vertex -3\n"+xyz, ""),
		"straycolumn":    ply("property float x\n", ""),
		"floatlist.ply":  ply("element vertex 0\n"+xyz+"element face 1\nproperty list float int vertex_indices\n", ""),
		"twodegrees.obj": []byte("v 0 0 0\nv 1 1 1\nf 1 2\n"),
	}
}

func TestHostileScansEndInAFaultWithAPlace(t *testing.T) {
	for name, data := range hostileScans() {
		var before, after runtime.MemStats
		runtime.ReadMemStats(&before)
		_, err := ReadScan(bytes.NewReader(data), name, ScanOptions{})
		runtime.ReadMemStats(&after)
		var f *Fault
		if !errors.As(err, &f) {
			t.Errorf("%s: %v is no fault", name, err)
			continue
		}
		if f.File != name || f.Why == "" || f.Remedy == "" || f.Line == 0 && !strings.HasPrefix(f.Field,
			"byte ") && f.Field != "scan" {
			t.Errorf("%s: %v names no place or remedy", name, err)
		}
		// The reader's own buffers and lines, never what a header claims.
		if used := after.TotalAlloc - before.TotalAlloc; used > 4<<20 {
			t.Errorf("%s: %d bytes of input took %d of memory", name, len(data), used)
		}
	}
}

func TestFaultNamesByteOrLine(t *testing.T) {
	for _, row := range []struct{ file, want string }{
		{"claim.stl", `claim.stl: byte 80 "4294967295": the header claims more than 1000000 triangles`},
		{"nan.stl", `nan.stl: byte 96 "NaN": a coordinate is not a number`},
		{"short.stl", `short.stl: byte 1977: the file ends within triangle 38 of the 38 its header claims`},
		{"index.obj", `index.obj:3: scan "3": a face names vertex 3, but 2 are defined so far`},
		{"word.stl", `word.stl:4: scan "zero": this is not a number`},
		{"index.ply", `face 1 names a vertex that is not among the 3`},
	} {
		_, err := ReadScan(bytes.NewReader(hostileScans()[row.file]), row.file, ScanOptions{})
		if err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %v\nwant %s", row.file, err, row.want)
		}
	}
}

func TestEveryTruncationIsSurvived(t *testing.T) {
	for _, name := range []string{"square-vtk-text.stl", "square-vtk-binary.stl", "square-vtk-text.ply",
		"square-vtk-little.ply",
		"square-vtk-big.ply", "square-vtk.obj"} {
		data, err := os.ReadFile("testdata/scans/" + name)
		if err != nil {
			t.Fatal(err)
		}
		step := 1
		if testing.Short() {
			step = 7
		}
		for n := 0; n < len(data); n += step * (1 + len(data)/2000) {
			sc, err := ReadScan(bytes.NewReader(data[:n]), name, ScanOptions{})
			var f *Fault
			if err != nil && !errors.As(err, &f) {
				t.Fatalf("%s cut at %d: %v is no fault", name, n, err)
			}
			if err == nil {
				// An OBJ cut at a line is a file of fewer faces: it must not pass for whole.
				if s, err := sc.Stone(ScanPlacement{}); err == nil && math.Abs(s.Volume()/184.09505-1) > 1e-6 {
					t.Fatalf("%s cut at %d passes for a stone", name, n)
				}
			}
		}
	}
}

// Writing and reading back gives the same solid.
func TestExportedMeshesReadBack(t *testing.T) {
	kinds := [][2]string{
		{"step", "steps=1,corner=0,fan=0"}, {"step", "culet=20"}, {"step", "girdle=0"}, {"square", "girdle=0"},
		{"marquise", "keel=30"}, {"round", "girdle=0"}, {"round", "culet=6"}, {"triangle", "bow=0"},
	}
	for _, outline := range Outlines() {
		kinds = append(kinds, [2]string{outline, ""})
	}
	for _, kind := range kinds {
		outline := strings.TrimSpace(kind[0] + " " + kind[1])
		stone := mustProportions(t, kind[0], kind[1], 6.5)
		for _, format := range []struct {
			file   string
			write  func(*bytes.Buffer) error
			within float64 // mm
		}{
			{"a.obj", func(b *bytes.Buffer) error { return WriteOBJ(b, stone) }, 1e-9}, // prints every digit
			{"a.stl", func(b *bytes.Buffer) error { return WriteSTL(b, stone) }, 2e-5}, // float32, planes refitted
		} {
			var first, second bytes.Buffer
			if err := errors.Join(format.write(&first), format.write(&second)); err != nil {
				t.Fatal(err)
			}
			if !bytes.Equal(first.Bytes(), second.Bytes()) {
				t.Errorf("%s %s: two exports differ", outline, format.file)
			}
			sc, err := ReadScan(&first, format.file, ScanOptions{})
			if err != nil {
				t.Fatal(err)
			}
			again, err := sc.Stone(ScanPlacement{})
			if err != nil {
				t.Errorf("%s %s: %v", outline, format.file, err)
				continue
			}
			if len(again.Facets) != len(stone.Facets) {
				t.Errorf("%s %s: %d facets, want %d", outline, format.file, len(again.Facets), len(stone.Facets))
			}
			if got, want := again.Volume(), stone.Volume(); math.Abs(got/want-1) > 1e-6 {
				t.Errorf("%s %s: volume %.8f, want %.8f", outline, format.file, got, want)
			}
			// The placement moves the axis to the middle of the outline.
			shift := outlineCentre(seenFromAbove(stone, mgl64.Ident3()).hull)
			moved := &Stone{Corners: make([]mgl64.Vec3, len(stone.Corners))}
			for i, c := range stone.Corners {
				moved.Corners[i] = c.Sub(shift.Vec3(stone.girdleMiddle(mgl64.Ident3(), 0)))
			}
			least := math.Inf(1)
			for turn := range 24 { // a round stone's first facet may stand at any of its mains or halves
				if least > format.within {
					least = min(least, hausdorff(again, moved, mgl64.Rotate3DZ(float64(turn)*math.Pi/12)))
				}
			}
			if least > format.within {
				t.Errorf("%s %s: a corner is %g mm off", outline, format.file, least)
			}
		}
	}
}

func FuzzReadSTL(f *testing.F) { fuzzScan(f, ".stl") }
func FuzzReadOBJ(f *testing.F) { fuzzScan(f, ".obj") }
func FuzzReadPLY(f *testing.F) { fuzzScan(f, ".ply") }

// fuzzScan starts from the small files of one format, whole and hostile.
func fuzzScan(f *testing.F, ending string) {
	files, err := filepath.Glob("testdata/scans/square*" + ending)
	if err != nil || len(files) == 0 {
		f.Fatal("no seed files", err)
	}
	for _, name := range files {
		data, err := os.ReadFile(name)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(data)
	}
	for name, data := range hostileScans() {
		if strings.HasSuffix(name, ending) && len(data) < 4096 {
			f.Add(data)
		}
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		var sc *Scan
		var err error
		budget.Hold(t, scanMemory(len(data)), func() {
			sc, err = ReadScan(bytes.NewReader(data), "fuzz"+ending, ScanOptions{})
		})
		var fault *Fault
		if err != nil {
			if !errors.As(err, &fault) {
				t.Fatalf("%v is no fault", err)
			}
			return
		}
		s, err := sc.Stone(ScanPlacement{AllowHull: true})
		var faults Faults
		if err != nil {
			if !errors.As(err, &fault) && !errors.As(err, &faults) {
				t.Fatalf("%v is no fault", err)
			}
			return
		}
		if len(s.Corners)-len(s.Edges)+len(s.Facets) != 2 || !(s.Volume() > 0) {
			t.Fatalf("a solid of %d facets is not closed", len(s.Facets))
		}
		for _, c := range s.Corners {
			if x := c.Len(); math.IsNaN(x) || math.IsInf(x, 0) {
				t.Fatalf("a corner at %v", c)
			}
		}
		// Written out, the solid reads back.
		var b bytes.Buffer
		if err := WriteOBJ(&b, s); err != nil {
			t.Fatal(err)
		}
		again, err := ReadScan(&b, "again.obj", ScanOptions{})
		if err != nil {
			t.Fatalf("what was written does not read: %v", err)
		}
		if again.OpenEdges+again.TangledEdges > 0 || math.Abs(again.Volume/s.Volume()-1) > 1e-6 {
			t.Errorf("volume %g with %d open edges, was %g", again.Volume, again.OpenEdges, s.Volume())
		}
	})
}

// scanMemory is what reading a scan of so many bytes may set aside. Its hull, its flats
// and the tables between corners, edges and triangles take some kilobytes a triangle; the
// shortest face of a text format is ten bytes.
func scanMemory(size int) int { return 2000 * size }

func BenchmarkReadScan200k(b *testing.B) {
	stone := mustProportions(b, "round", "", 8)
	for _, noise := range []float64{0, 0.001} {
		rng := rand.New(rand.NewPCG(5, 6))
		data := binarySTL(grid(stone, 26, func() float64 { return noise * (2*rng.Float64() - 1) }))
		b.Run(fmt.Sprintf("noise=%g", noise), func(b *testing.B) {
			b.ReportAllocs()
			for b.Loop() {
				sc, err := ReadScan(bytes.NewReader(data), "made.stl", ScanOptions{})
				if err != nil {
					b.Fatal(err)
				}
				if _, err := sc.Stone(ScanPlacement{}); err != nil {
					b.Fatal(err)
				}
				b.ReportMetric(float64(sc.Triangles), "triangles")
			}
		})
	}
}

// Meshes that no scanner makes, in which every triangle is in everybody's way, end in a
// fault or a closed solid, in a memory and time that follow their size.
func TestHostileMeshes(t *testing.T) {
	const n = 3000
	rng := rand.New(rand.NewPCG(11, 12))
	corner := func() string {
		return fmt.Sprintf("v %g %g %g\n", 10*rng.Float64(), 10*rng.Float64(), 10*rng.Float64())
	}
	any := func(of int) int { return 1 + rng.IntN(of) }
	for name, line := range map[string]func(i int) (points, face string){
		"triangles apart": func(i int) (string, string) {
			return corner() + corner() + corner(), fmt.Sprintf("f %d %d %d\n", 3*i+1, 3*i+2, 3*i+3)
		},
		"one edge of all": func(i int) (string, string) { return corner(), fmt.Sprintf("f 1 2 %d\n", i+1) },
		"a flat tangle": func(i int) (string, string) {
			return fmt.Sprintf("v %g %g 0\n", rng.Float64(), rng.Float64()), fmt.Sprintf("f %d %d %d\n", any(n), any(n), any(n))
		},
		"a tangle":          func(i int) (string, string) { return corner(), fmt.Sprintf("f %d %d %d\n", any(n), any(n), any(n)) },
		"the same triangle": func(i int) (string, string) { return corner(), "f 1 2 3\n" },
		"a long line": func(i int) (string, string) {
			return fmt.Sprintf("v %d 0 0\n", i), fmt.Sprintf("f %d %d %d\n", any(n), any(n), any(n))
		},
	} {
		var points, faces strings.Builder
		for i := range n {
			p, f := line(i)
			points.WriteString(p)
			faces.WriteString(f)
		}
		text := points.String() + faces.String()
		budget.Hold(t, scanMemory(len(text)), func() {
			sc, err := ReadScan(strings.NewReader(text), "mesh.obj", ScanOptions{})
			var s *Stone
			if err == nil {
				s, err = sc.Stone(ScanPlacement{AllowHull: true})
			}
			var fault *Fault
			var faults Faults
			switch {
			case err == nil && !(s.Volume() > 0):
				t.Errorf("%s: a solid without volume", name)
			case err != nil && !errors.As(err, &fault) && !errors.As(err, &faults):
				t.Errorf("%s: %v is no fault", name, err)
			}
		})
	}
}

// Flats that meet far away from the surface make no stone of it.
func TestFlatsThatMeetFarAway(t *testing.T) {
	sc := &Scan{File: "far.obj", Size: mgl64.Vec3{1, 1, 1}, Bodies: 1, mesh: &mesh{}}
	for _, p := range []mgl64.Vec3{{1, 0, 1e-3}, {-1, 0, 1e-3}, {0, 1, 1e-3}, {0, -1, 1e-3}, {0, 0, -1}} {
		sc.Facets = append(sc.Facets, ScanFacet{Normal: p.Normalize(), Distance: 0.5, Area: 1, Triangles: 2})
	}
	s, err := sc.Stone(ScanPlacement{})
	if err == nil || !strings.Contains(err.Error(), "its flats meet") {
		t.Errorf("%v, %v", s != nil, err)
	}
}
