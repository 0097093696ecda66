package facets

import (
	"bytes"
	"encoding/csv"
	"flag"
	"fmt"
	"math"
	"math/rand/v2"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
)

var (
	soak = flag.Bool("soak", false,
		"run the long checks: 10,000 random solids against Qhull, many more cuts")
	writeQhull = flag.Bool("write-qhull", false,
		"write testdata/qhull/plans.csv anew from the qhull-bin of this machine")
)

// Qhull (Barber, Dobkin, Huhdanpaa, ACM Trans. Math. Softw. 22, 469, 1996) as
// packaged by Debian in qhull-bin is the independent judge of solids. Its
// answers for the sample plans are kept in a table for machines without it.
const (
	qhullTable = "../testdata/qhull/plans.csv"
	// qhullAgreement is the relative agreement asked for in volume, and in
	// corners as a share of the reach.
	qhullAgreement = 1e-9
)

// qhull intersects half-spaces about an inner point and returns the corners and
// the volume of their hull:
//
//	qhalf Fp < half-spaces; qconvex Qt FS < corners
func qhull(planes []Plane, inside mgl64.Vec3) (corners []mgl64.Vec3, volume float64, err error) {
	var in bytes.Buffer
	fmt.Fprintf(&in, "3 1\n%.17g %.17g %.17g\n4\n%d\n", inside[0], inside[1], inside[2], len(planes))
	for _, p := range planes {
		fmt.Fprintf(&in, "%.17g %.17g %.17g %.17g\n", p.Normal[0], p.Normal[1], p.Normal[2], -p.Distance)
	}
	half := exec.Command("qhalf", "Fp")
	half.Stdin = &in
	out, err := half.Output()
	if err != nil {
		return nil, 0, fmt.Errorf("qhalf: %w", err)
	}
	lines := strings.Split(strings.TrimSpace(string(out)), "\n")
	for _, l := range lines[2:] {
		var c mgl64.Vec3
		if _, err := fmt.Sscan(l, &c[0], &c[1], &c[2]); err != nil {
			return nil, 0, err
		}
		corners = append(corners, c)
	}
	hull := exec.Command("qconvex", "Qt", "FS")
	hull.Stdin = bytes.NewReader(append([]byte("3\n"), bytes.Join(bytes.Split(out, []byte("\n"))[1:],
		[]byte("\n"))...))
	out, err = hull.Output()
	if err != nil {
		return nil, 0, fmt.Errorf("qconvex: %w", err)
	}
	var zero, count int
	var area float64
	if _, err := fmt.Sscan(string(out), &zero, &count, &area, &volume); err != nil {
		return nil, 0, fmt.Errorf("qconvex: %w: %s", err, out)
	}
	return corners, volume, nil
}

func haveQhull() bool {
	_, err := exec.LookPath("qhalf")
	_, err2 := exec.LookPath("qconvex")
	return err == nil && err2 == nil
}

// planesOf returns all the planes that a plan cuts, in mm, also those of which
// nothing is left, made anew from the solved angles, indices and distances.
func planesOf(p *Plan, sol *Solution) []Plane {
	var list []Plane
	for i := range p.Tiers {
		got := &sol.Tiers[i]
		for _, index := range got.Index {
			q := tilted(p.Tiers[i].Side, got.Angle.Degrees(), 360*index/float64(p.Gear),
				got.Distance*sol.Scale)
			list = append(list, q)
		}
	}
	return list
}

// compareQhull fails unless volume and corners agree with Qhull's.
func compareQhull(t *testing.T, s *Stone, corners []mgl64.Vec3, volume float64) {
	t.Helper()
	closeTo(t, "volume", s.Volume(), volume, qhullAgreement, "Qhull")
	_, reach := s.reach()
	far := func(from, to []mgl64.Vec3) float64 {
		worst := 0.0
		for _, a := range from {
			near := math.Inf(1)
			for _, b := range to {
				near = math.Min(near, a.Sub(b).Len())
			}
			worst = math.Max(worst, near)
		}
		return worst / reach
	}
	if d := far(s.Corners, corners); d > qhullAgreement {
		t.Errorf("a corner lies %g of the reach from all of Qhull's", d)
	}
	if d := far(corners, s.Corners); d > qhullAgreement {
		t.Errorf("a corner of Qhull's lies %g of the reach from all of ours", d)
	}
}

// planFiles returns the sample plans' files.
func planFiles(t testing.TB) []string {
	t.Helper()
	files, err := filepath.Glob("../testdata/plans/*.toml")
	if err != nil || len(files) < 8 {
		t.Fatalf("%d sample plans found, want at least 8 (%v)", len(files), err)
	}
	slices.Sort(files)
	return files
}

func solveFile(t testing.TB, file string) (*Plan, *Solution) {
	t.Helper()
	p, err := OpenPlan(file)
	if err != nil {
		t.Fatal(err)
	}
	sol, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	return p, sol
}

func TestPlansAgreeWithQhull(t *testing.T) {
	if *writeQhull {
		writeQhullTable(t)
	}
	f, err := os.Open(qhullTable)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	rd := csv.NewReader(f)
	rd.Comment = '#'
	rows, err := rd.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	kept := map[string]float64{}
	for _, row := range rows[1:] {
		if kept[row[0]], err = strconv.ParseFloat(row[1], 64); err != nil {
			t.Fatal(err)
		}
	}
	for _, file := range planFiles(t) {
		name := filepath.Base(file)
		t.Run(name, func(t *testing.T) {
			p, sol := solveFile(t, file)
			s := sol.Stone
			checkStone(t, s, onTheirPlanes)
			want, ok := kept[name]
			if !ok {
				t.Fatalf("%s has no row for it; run go test ./facets -run Qhull -write-qhull with qhull-bin installed", qhullTable)
			}
			closeTo(t, "volume", s.Volume(), want, qhullAgreement, qhullTable)
			if haveQhull() {
				inside, _ := s.reach()
				corners, volume, err := qhull(planesOf(p, sol), inside)
				if err != nil {
					t.Fatal(err)
				}
				compareQhull(t, s, corners, volume)
			}
		})
	}
}

func writeQhullTable(t *testing.T) {
	t.Helper()
	if !haveQhull() {
		t.Fatal("qhull-bin is not installed")
	}
	version, err := exec.Command("qconvex", "-V").Output()
	if err != nil {
		t.Fatal(err)
	}
	var b strings.Builder
	fmt.Fprintf(&b, "# Volumes in mm3 of the sample plans' solids by Qhull (%s), Debian package qhull-bin.\n",
		strings.TrimSpace(string(version)))
	b.WriteString("# Made by: go test ./facets -run TestPlansAgreeWithQhull -write-qhull\n")
	b.WriteString("# which pipes each solid's half-spaces and an inner point to qhalf Fp, and its corners to qconvex Qt FS.\n")
	b.WriteString("plan,volume_mm3\n")
	for _, file := range planFiles(t) {
		p, sol := solveFile(t, file)
		inside, _ := sol.Stone.reach()
		_, volume, err := qhull(planesOf(p, sol), inside)
		if err != nil {
			t.Fatal(err)
		}
		fmt.Fprintf(&b, "%s,%.13g\n", filepath.Base(file), volume)
	}
	if err := os.MkdirAll(filepath.Dir(qhullTable), 0o777); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(qhullTable, []byte(b.String()), 0o666); err != nil {
		t.Fatal(err)
	}
}

// randomSolid returns planes of a random kind that enclose the origin.
func randomSolid(r *rand.Rand) []Plane {
	n := 6 + r.IntN(80)
	var list []Plane
	add := func(v mgl64.Vec3, d float64) { list = append(list, Plane{Normal: v, Distance: d}) }
	switch r.IntN(3) {
	case 0: // any slope, any depth
		for range n {
			add(randomDirection(r), 0.5+r.Float64())
		}
	case 1: // round a ball: every plane counts
		for range n {
			add(randomDirection(r), 1)
		}
	default: // many planes through few points, as meets make them
		for range 2 + r.IntN(6) {
			p := randomDirection(r)
			for range 3 + r.IntN(8) {
				v := p.Add(randomDirection(r).Mul(0.8)).Normalize()
				if d := v.Dot(p); d > 0.2 {
					add(v, d)
				}
			}
		}
	}
	return append(list, blockPlanes(2, 2, 2)...)
}

func TestRandomSolidsAgreeWithQhull(t *testing.T) {
	if !haveQhull() {
		t.Skip("needs Debian's qhull-bin; without it the sample plans' table and the closed forms judge")
	}
	count := 25
	if *soak {
		count = 10000
	}
	for seed := range count {
		planes := randomSolid(rand.New(rand.NewPCG(3, uint64(seed))))
		s, err := FromPlanes("", planes)
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		corners, volume, err := qhull(planes, mgl64.Vec3{})
		if err != nil {
			t.Fatalf("seed %d: %v", seed, err)
		}
		compareQhull(t, s, corners, volume)
		if t.Failed() {
			t.Fatalf("seed %d, %d planes", seed, len(planes))
		}
	}
}
