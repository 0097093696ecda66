package command

import (
	"fmt"
	"io"
	"math"
	"path/filepath"
	"slices"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/disk"
	"pavilight/facets"
)

// roughFlags say what piece of rough a stone is to be cut from.
type roughFlags struct {
	Rough     string  `type:"word" placeholder:"SHAPE:SIZES" help:"Rough to fit the stone into: box:12x11x9, cylinder:10x12, ellipsoid:12x11x9 in mm, or scan:FILE. A plan may bring its own."`
	Allowance float64 `default:"-1" type:"number" least:"-1" most:"100" unit:"mm (-1 for the usual 0.3)" placeholder:"MM" help:"Left of the rough all round for grinding and polish, 0 to 100 mm; without it 0.3."`
	Solid     string  `type:"word" placeholder:"FILE" help:"Write the solid into this file: .obj or .stl."`
}

// yield is the largest stone that fits into the rough.
type yield struct {
	Rough      string     `json:"rough"`
	WidthMM    float64    `json:"width_mm"`
	LengthMM   float64    `json:"length_mm"`
	DepthMM    float64    `json:"depth_mm"`
	Carats     *float64   `json:"carats"` // null where the density is not known
	Share      float64    `json:"yield"`  // of the rough's volume
	TiltDeg    float64    `json:"tilt_deg"`
	AzimuthDeg float64    `json:"azimuth_deg"`
	Centre     mgl64.Vec3 `json:"centre_mm"` // in the rough's frame
	Notes      []string   `json:"notes,omitempty"`

	planned float64 // width as it stands, mm
	tried   int     // orientations
}

// yield fits the stone into the rough that the flags or the plan name; nil where there
// is none.
func (f *roughFlags) yield(s *subject) (*yield, error) {
	ref, folder := s.rough, s.folder
	if f.Rough != "" {
		var err error
		if ref, err = facets.ParseRough(f.Rough); err != nil {
			return nil, commandFaultf("--rough: %w", err)
		}
		folder = ""
	}
	if ref == nil {
		return nil, nil
	}
	if f.Allowance >= 0 {
		with := *ref
		with.AllowanceMM, with.HasAllowance = f.Allowance, true
		ref = &with
	}
	rough, err := ref.Rough(folder)
	if err != nil {
		return nil, inputFault(err)
	}
	fit, err := rough.Fit(s.stone)
	if err != nil {
		return nil, inputFault(err)
	}
	y := &yield{Rough: roughWords(ref), WidthMM: fit.WidthMM, LengthMM: fit.LengthMM, DepthMM: fit.DepthMM, Share: fit.Yield, Centre: fit.Centre, Notes: fit.Notes, planned: s.measures.WidthMM, tried: fit.Tried}
	if rough.Scan != nil {
		y.Notes = append(slices.Clone(rough.Scan.Notes), y.Notes...)
	}
	if carats := s.carats(); carats != nil {
		scaled := *carats * fit.Scale * fit.Scale * fit.Scale
		y.Carats = &scaled
	}
	axis := fit.RoughFromStone.Mul3x1(mgl64.Vec3{0, 0, 1})
	y.TiltDeg = math.Acos(max(-1, min(1, axis[2]))) * 180 / math.Pi
	y.AzimuthDeg = math.Atan2(axis[1], axis[0]) * 180 / math.Pi
	return y, nil
}

// roughWords says what the rough is.
func roughWords(q *facets.RoughRef) string {
	if q.File != "" {
		return "scan " + q.File
	}
	sizes := make([]string, len(q.SizeMM))
	for i, v := range q.SizeMM {
		sizes[i] = fmt.Sprintf("%g", v)
	}
	return q.Shape + " " + strings.Join(sizes, " x ") + " mm"
}

// print tells the yield.
func (y *yield) print(w io.Writer) {
	weight := ""
	if y.Carats != nil {
		weight = fmt.Sprintf(", %.3f ct", *y.Carats)
	}
	fmt.Fprintf(w, "\nthe largest stone of this shape from %s: %.3f mm wide, %.3f long, %.3f deep%s, %.1f %% of the rough\n", y.Rough, y.WidthMM, y.LengthMM, y.DepthMM, weight, 100*y.Share)
	as := "this rough holds it"
	if y.WidthMM < y.planned {
		as = "this rough holds it in no orientation that was tried"
	}
	fmt.Fprintf(w, "as it stands the stone is %.3f mm wide: %s\n", y.planned, as)
	fmt.Fprintf(w, "the stone's axis leans %.1f° from the rough's height, toward azimuth %.1f°; the best of %d orientations that were tried\n",
		y.TiltDeg, y.AzimuthDeg, y.tried)
	for _, note := range y.Notes {
		fmt.Fprintln(w, note)
	}
}

// writeSolid writes the stone as the file's name says.
func writeSolid(path string, s *facets.Stone) error {
	var write func(w io.Writer, s *facets.Stone) error
	switch strings.ToLower(filepath.Ext(path)) {
	case ".obj":
		write = facets.WriteOBJ
	case ".stl":
		write = facets.WriteSTL
	default:
		return commandFaultf("--solid %s: name a file that ends in .obj or .stl", path)
	}
	if err := disk.Replace(path, func(w io.Writer) error { return write(w, s) }); err != nil {
		return ownFault(err)
	}
	return nil
}
