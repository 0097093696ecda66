package facets

import (
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// ParseRough reads a description of rough as a person types it: a shape, a colon and
// its sizes in mm with x between, such as box:12x11x9, cylinder:10x12 (diameter and
// length), ellipsoid:12x11x9, or scan: and the name of the file that holds it. Errors
// are *Fault.
func ParseRough(text string) (*RoughRef, error) {
	fault := func(why, remedy string) error {
		return &Fault{File: "rough", Field: "shape", Got: text, Why: why, Remedy: remedy}
	}
	shape, rest, ok := strings.Cut(text, ":")
	shape = strings.TrimSpace(shape)
	if !ok {
		return nil, fault("the sizes are missing", "write box:12x11x9, cylinder:10x12, ellipsoid:12x11x9 or scan:FILE")
	}
	q := &RoughRef{Shape: shape}
	if shape == Scanned.String() {
		q.File = rest
		return q, nil
	}
	for _, part := range strings.Split(rest, "x") {
		v, err := strconv.ParseFloat(strings.TrimSpace(part), 64)
		if err != nil || !(v > 0 && v <= mostRoughMM) {
			return nil, fault(fmt.Sprintf("%q is no size", shorten(part)), "give mm above 0 with x between")
		}
		q.SizeMM = append(q.SizeMM, v)
	}
	want, known := map[string]int{Box.String(): 3, Ellipsoid.String(): 3, Cylinder.String(): 2}[shape]
	switch {
	case !known:
		return nil, fault("this shape of rough is not known", "it may be box, cylinder, ellipsoid or scan")
	case len(q.SizeMM) != want:
		return nil, fault(fmt.Sprintf("a %s needs %d sizes", shape, want), "box and ellipsoid have three extents, a cylinder diameter and length")
	}
	return q, nil
}

// Rough returns the piece that the description stands for. A scan's file is looked for
// from folder, where the plan lies, and read. Errors are *Fault.
func (q *RoughRef) Rough(folder string) (Rough, error) {
	var r Rough
	shapes := []RoughShape{Box, Cylinder, Ellipsoid, Scanned}
	i := slices.IndexFunc(shapes, func(s RoughShape) bool { return s.String() == q.Shape })
	if i < 0 {
		return r, &Fault{File: "rough", Field: "shape", Got: q.Shape, Why: "this shape is not known", Remedy: "use box, cylinder, ellipsoid or scan"}
	}
	r.Shape = shapes[i]
	switch {
	case r.Shape == Scanned:
		path := q.File
		if !filepath.IsAbs(path) {
			path = filepath.Join(folder, path)
		}
		if info, err := os.Stat(path); err == nil && !info.Mode().IsRegular() { // to open some waits for ever
			return r, &Fault{File: path, Field: "rough", Why: "this is no file that holds a scan", Remedy: "name a scan (.stl, .obj, .ply)"}
		}
		f, err := os.Open(path)
		if err != nil {
			return r, &Fault{File: path, Field: "rough", Why: "the scan of the rough cannot be read", Remedy: "name a file that is there"}
		}
		defer f.Close()
		if r.Scan, err = ReadScan(f, path, ScanOptions{Rough: true}); err != nil {
			return r, err
		}
	case r.Shape == Cylinder && len(q.SizeMM) == 2:
		r.Size = mgl64.Vec3{q.SizeMM[0], q.SizeMM[0], q.SizeMM[1]}
	case len(q.SizeMM) == 3:
		r.Size = mgl64.Vec3{q.SizeMM[0], q.SizeMM[1], q.SizeMM[2]}
	}
	if q.HasAllowance {
		r.Allowance = q.AllowanceMM
		if q.AllowanceMM == 0 {
			r.Allowance = -1 // none, as Rough says it
		}
	}
	for _, f := range q.Avoid {
		at := mgl64.Vec3(f.PointMM)
		if f.RadiusMM > 0 {
			r.AvoidSpheres = append(r.AvoidSpheres, Sphere{at, f.RadiusMM})
		} else {
			n := mgl64.Vec3(f.Normal).Normalize()
			r.AvoidPlanes = append(r.AvoidPlanes, Plane{Normal: n, Distance: n.Dot(at)})
		}
	}
	return r, nil
}
