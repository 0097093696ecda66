package facets

import (
	"bytes"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestRoughOfAPlan(t *testing.T) {
	// A block of rough twice a cube's edge, without allowance: the cube doubles. The
	// same rough as a scan, and with a ball in its middle, which leaves less than half.
	cube, err := FromPlanes("cube", testBox(1, 1, 1))
	if err != nil {
		t.Fatal(err)
	}
	folder := t.TempDir()
	var scan bytes.Buffer
	big, err := FromPlanes("rough", testBox(2, 2, 2))
	if err != nil {
		t.Fatal(err)
	}
	if err := WriteSTL(&scan, big); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(folder, "rough.stl"), scan.Bytes(), 0o644); err != nil {
		t.Fatal(err)
	}
	for _, row := range []struct {
		text  string
		avoid []RoughFlaw
		scale float64
	}{
		{"box:4x4x4", nil, 2},
		{"scan:rough.stl", nil, 2},
		{"box:4x6x4", []RoughFlaw{{PointMM: [3]float64{0, 1, 0}, Normal: [3]float64{0, 2, 0}}}, 2},
		{"box:4x8x4", []RoughFlaw{{PointMM: [3]float64{0, 2.5, 0}, RadiusMM: 0.5}}, 2},
	} {
		q, err := ParseRough(row.text)
		if err != nil {
			t.Fatal(err)
		}
		q.HasAllowance, q.Avoid = true, row.avoid
		r, err := q.Rough(folder)
		if err != nil {
			t.Fatal(err)
		}
		fit, err := r.Fit(cube)
		if err != nil {
			t.Fatal(err)
		}
		if math.Abs(fit.Scale-row.scale) > 1e-3 {
			t.Errorf("%s: scale %.5f, want %g (arithmetic)", row.text, fit.Scale, row.scale)
		}
	}
}

// testBox is the planes of a block with the given half edges.
func testBox(x, y, z float64) []Plane {
	var ps []Plane
	for i, h := range []float64{x, y, z} {
		for _, sign := range []float64{1, -1} {
			p := Plane{Distance: h, Side: Girdle}
			p.Normal[i] = sign
			if i == 2 {
				p.Side = Table
				if sign < 0 {
					p.Side = Pavilion
				}
			}
			ps = append(ps, p)
		}
	}
	return ps
}

func TestRoughTextFaults(t *testing.T) {
	for text, want := range map[string]string{
		"box":           "sizes are missing",
		"box:1x2":       "needs 3 sizes",
		"cylinder:3":    "needs 2 sizes",
		"pyramid:1x1x1": "not known",
		"box:1xax3":     "no size",
		"box:1x-2x3":    "no size",
	} {
		if _, err := ParseRough(text); err == nil || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want words %q", text, err, want)
		}
	}
	q, err := ParseRough("scan:absent.stl")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := q.Rough(t.TempDir()); err == nil || !strings.Contains(err.Error(), "absent.stl") {
		t.Errorf("an absent scan: %v", err)
	}
}
