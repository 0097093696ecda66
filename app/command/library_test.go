package command

import (
	"bytes"
	"encoding/csv"
	"fmt"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// samplePlans returns the files of all sample plans.
func samplePlans(t *testing.T) []string {
	t.Helper()
	files, err := filepath.Glob("../../testdata/plans/*.toml")
	if err != nil || len(files) < 24 {
		t.Fatalf("%d sample plans found, want at least 24 (%v)", len(files), err)
	}
	return files
}

// TestCheckTellsWhatItMeasures: every measure of every sample plan stands beside what it
// means and who says so.
func TestCheckTellsWhatItMeasures(t *testing.T) {
	words := func(s string) string { return strings.Join(strings.Fields(s), " ") }
	for _, path := range samplePlans(t) {
		got := runCommand("check", path)
		if got.status != Done || got.stderr != "" {
			t.Errorf("%s: exit status %d\n%s", path, got.status, got.stderr)
			continue
		}
		measures, meanings, found := strings.Cut(got.stdout, "How the measures are taken")
		if !found {
			t.Fatalf("%s: no definitions\n%s", path, got.stdout)
		}
		for _, d := range facets.Definitions() {
			row := definedRow(d.Name)
			if !strings.Contains(measures, "\n"+row) && !strings.Contains(measures, row+" mm²") {
				t.Errorf("%s: %q is defined but not measured", path, row)
			}
			if !strings.Contains(words(meanings), words(row+" "+d.Meaning+" ["+d.Source+"]")) {
				t.Errorf("%s: nothing tells what %q means", path, row)
			}
		}
		for _, line := range strings.Split(meanings, "\n") {
			if n := len([]rune(line)); n > textWidth {
				t.Errorf("a line of %d columns: %s", n, line)
			}
		}
	}
}

// TestCheckAgreesWithQhull compares what check --json prints with Qhull (Barber, Dobkin,
// Huhdanpaa, ACM Trans. Math. Softw. 22, 469, 1996): the volumes with the kept table
// and, where Debian's qhull-bin is installed, the corners that qhalf finds from the
// printed planes and the area that qconvex finds from those.
func TestCheckAgreesWithQhull(t *testing.T) {
	const agreement = 1e-9 // relative, of lengths as a share of the stone's
	table, err := os.Open("../../testdata/qhull/plans.csv")
	if err != nil {
		t.Fatal(err)
	}
	defer table.Close()
	read := csv.NewReader(table)
	read.Comment = '#'
	rows, err := read.ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	kept := map[string]string{}
	for _, row := range rows[1:] {
		kept[row[0]] = row[1]
	}
	_, noHalf := exec.LookPath("qhalf")
	_, noConvex := exec.LookPath("qconvex")
	near := func(got, want float64) bool { return math.Abs(got-want) <= agreement*math.Abs(want) }
	for _, path := range samplePlans(t) {
		r := decoded[checkResult](t, "check", path)
		want, err := strconv.ParseFloat(kept[filepath.Base(path)], 64)
		if err != nil {
			t.Errorf("%s: no row in Qhull's table: %v", path, err)
		}
		if !near(r.VolumeMM3, want) {
			t.Errorf("%s: volume %.12g mm³, Qhull's %.12g", path, r.VolumeMM3, want)
		}
		if noHalf != nil || noConvex != nil {
			continue
		}
		corners, area, volume := qhull(t, r)
		total, apart := 0.0, 0.0
		for _, f := range r.Facets {
			total += f.AreaMM2
			for _, c := range f.Corners {
				least := math.Inf(1)
				for _, q := range corners {
					least = min(least, c.Sub(q).Len())
				}
				apart = max(apart, least)
			}
		}
		if !near(total, area) || !near(r.VolumeMM3, volume) || apart > agreement*(r.LengthMM+r.DepthMM) {
			t.Errorf("%s: area %.12g mm² and volume %.12g mm³, Qhull's %.12g and %.12g; a corner lies %.3g mm from all of Qhull's",
				path, total, r.VolumeMM3, area, volume, apart)
		}
	}
}

// qhull intersects the half-spaces of the facets and measures the hull of the corners:
// qhalf Fp < half-spaces, qconvex Qt FS < corners.
func qhull(t *testing.T, r checkResult) (corners []mgl64.Vec3, area, volume float64) {
	t.Helper()
	var inside mgl64.Vec3
	var planes bytes.Buffer
	n := 0.0
	for _, f := range r.Facets {
		for _, c := range f.Corners {
			inside, n = inside.Add(c), n+1
		}
		fmt.Fprintf(&planes, "%.17g %.17g %.17g %.17g\n", f.Normal[0], f.Normal[1], f.Normal[2], -f.Distance)
	}
	inside = inside.Mul(1 / n)
	run := func(in, name string, args ...string) string {
		cmd := exec.Command(name, args...)
		cmd.Stdin = strings.NewReader(in)
		out, err := cmd.Output()
		if err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		return string(out)
	}
	points := run(fmt.Sprintf("3 1\n%.17g %.17g %.17g\n4\n%d\n%s", inside[0], inside[1], inside[2], len(r.Facets), planes.String()),
		"qhalf", "Fp")
	for _, line := range strings.Split(strings.TrimSpace(points), "\n")[2:] {
		var c mgl64.Vec3
		if _, err := fmt.Sscan(line, &c[0], &c[1], &c[2]); err != nil {
			t.Fatal(err)
		}
		corners = append(corners, c)
	}
	var zero, count int
	if _, err := fmt.Sscan(run(points, "qconvex", "Qt", "FS"), &zero, &count, &area, &volume); err != nil {
		t.Fatal(err)
	}
	return corners, area, volume
}

// TestLookAtAnyStone: look runs on every sample plan, on measured proportions and on a
// scan alike, and pictures some of each.
func TestLookAtAnyStone(t *testing.T) {
	plan, err := facets.OpenPlan("../../testdata/plans/pear.toml")
	if err != nil {
		t.Fatal(err)
	}
	solid, err := plan.Solve()
	if err != nil {
		t.Fatal(err)
	}
	var mesh bytes.Buffer
	if err := facets.WriteOBJ(&mesh, solid); err != nil {
		t.Fatal(err)
	}
	scan := file(t, "pear.obj", mesh.String())
	stones := [][]string{
		{"--round", "table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3,culet=0.5", "--material", "diamond", "--width", "6.5"},
		{"--outline", "oval", "--proportions", "ratio=1.3,table=58,crown=34,pavilion=41,girdle=3", "--material", "corundum", "--width", "6"},
		{scan, "--material", plan.Material.Key},
	}
	for _, path := range samplePlans(t) {
		stones = append(stones, []string{path})
	}
	seen := map[string]lookMedium{}
	for i, stone := range stones {
		args := append([]string{"look", "--in", "air"}, stone...)
		dir := t.TempDir()
		pictured := i%6 < 3 // of each kind; pictures take long to write
		if pictured {
			args = append(args, "--out", dir)
		}
		r := decoded[lookResult](t, quick(args...)...)
		if len(r.Media) != 1 || !(math.Abs(r.Media[0].Ledger.Sum()-1) < 1e-6) || r.Media[0].Segments == 0 || !(r.WidthMM > 0) {
			t.Errorf("look %v: %+v", stone, r)
		}
		seen[filepath.Base(stone[0])] = r.Media[0]
		pictures, err := filepath.Glob(filepath.Join(dir, "*.png"))
		if err != nil || pictured != (len(pictures) > 0) {
			t.Errorf("look %v wrote the pictures %q (%v)", stone, pictures, err)
		}
	}
	// A scan of a plan's solid is the same stone.
	a, b := seen["pear.toml"], seen["pear.obj"]
	if within := 4 * math.Hypot(a.StandardError.Returned, b.StandardError.Returned); !(math.Abs(a.Ledger.Returned-b.Ledger.Returned) < within) {
		t.Errorf("the plan returns %v, a scan of its solid %v, more than 4 standard errors (%v) apart", a.Ledger.Returned, b.Ledger.Returned, within)
	}
}
