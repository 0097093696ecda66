package facets

import (
	"cmp"
	"fmt"
	"math"
	"slices"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/optimize"
)

// RoughShape is the shape of a piece of rough, as far as it can be described.
type RoughShape int

// The shapes, each in the rough's own frame with its middle at the origin.
const (
	Box       RoughShape = iota // edges along x, y and z
	Cylinder                    // axis along z
	Ellipsoid                   // axes along x, y and z
	Scanned                     // as the scan's file has it
)

// String returns the shape's word as plan files write it.
func (s RoughShape) String() string {
	return [...]string{"box", "cylinder", "ellipsoid", "scan"}[s]
}

// DefaultAllowance is what is left of the rough all round for grinding and
// polish, in mm: common practice, no source.
const DefaultAllowance = 0.3

// Sphere is a ball in the rough's frame, in mm.
type Sphere struct {
	Centre mgl64.Vec3
	Radius float64
}

// Rough is a piece of rough and what the finished stone must keep clear of.
type Rough struct {
	Shape RoughShape
	// Size is in mm: the box's edges, the cylinder's diameter (x; y is not
	// used) and length (z), or the ellipsoid's three diameters.
	Size mgl64.Vec3
	Scan *Scan // for Scanned, read with ScanOptions.Rough

	// Allowance is left between the finished stone and everything that bounds
	// it, in mm; 0 means DefaultAllowance, a negative one means none.
	Allowance float64

	AvoidPlanes  []Plane  // cracks: the stone must lie wholly on one side; only Normal and Distance are used
	AvoidSpheres []Sphere // inclusions: the stone must lie wholly outside

	// Axis is a direction of the rough, such as its optic axis, that must lie
	// along StoneAxis of the stone, either way round; zero for none. StoneAxis
	// zero means the stone's own axis, +z.
	Axis, StoneAxis mgl64.Vec3
}

// Fit is the largest stone that was found to fit into a piece of rough.
type Fit struct {
	Scale          float64    // of the stone that was given
	WidthMM        float64    // finished size
	LengthMM       float64    //
	DepthMM        float64    //
	Yield          float64    // finished volume as a share of the rough's, which is also that of the weights
	RoughVolume    float64    // mm³
	Centre         mgl64.Vec3 // mm, rough's frame: where the stone's origin comes to lie
	RoughFromStone mgl64.Mat3 // turns a direction of the stone's frame into the rough's
	Tried          int        // orientations
	Notes          []string
}

// Limits of a fit.
const (
	mostRoughMM    = 1e5  // of a size: beyond it, it is a slip of the pen
	maxAvoid       = 200  // places to avoid
	maxRoughPlanes = 2000 // flats that a scanned rough is taken as
	coarseShare    = 0.005
	closer         = 60   // orientations that get a close look
	refined        = 6    // orientations that are improved after the first look
	mostNodes      = 200  // choices of a side at places to avoid, for each orientation
	allNodes       = 2000 // and for all together
	mostSides      = 24   // sides tried at each place
)

// overstep is how far the finished stone may reach into the allowance, in mm,
// so that curved rough needs a finite number of flats to be described: a
// thousandth of what a cutter sees.
const overstep = 2e-5

// Fit returns the largest size of the stone that fits, best of many
// orientations: a fixed spread over all turns (or over the spins that keep
// Axis), the best of them improved by a simplex search (Nelder and Mead 1965).
// For one orientation the size is exact: the stone, scaled by s and moved to
// c, lies in a convex body if u·c + s h(u) <= H(u) for every direction u, with
// h and H the support functions of stone and body, which is a linear program
// in c and s; flats give their normals, curved rough gives u where it is
// overstepped (Kelley's cutting planes, J. SIAM 8, 1960). Places to avoid, and
// the dents of a scanned rough, are kept outside by a plane between them and
// the stone; the choice among planes along the stone's facets, corners and
// edges is searched but not proved best. What is returned always fits.
// Errors are Faults.
func (r Rough) Fit(s *Stone) (Fit, error) {
	if err := r.check().Err(); err != nil {
		return Fit{}, err
	}
	f := newFitter(r, s)
	turns := f.turns()
	type attempt struct {
		turn  mgl64.Mat3
		scale float64
	}
	tried := make([]attempt, len(turns))
	// A first look at all, good to a share of the rough; then a close one at the best.
	coarse := 0.0
	if r.Shape == Ellipsoid || r.Shape == Cylinder {
		coarse = coarseShare * min(r.Size[0], r.Size[2])
	}
	for i, turn := range turns {
		tried[i] = attempt{turn, f.bound(turn, max(overstep, coarse))}
	}
	byScale := func(a, b attempt) int { return cmp.Compare(b.scale, a.scale) }
	slices.SortStableFunc(tried, byScale)
	for i := range min(closer, len(tried)) {
		tried[i].scale = f.bound(tried[i].turn, overstep)
	}
	slices.SortStableFunc(tried[:min(closer, len(tried))], byScale)
	for i := range min(refined, len(tried)) {
		turn, scale := f.improve(tried[i].turn)
		if scale > tried[i].scale {
			tried = append(tried, attempt{turn, scale})
		}
	}
	slices.SortStableFunc(tried, byScale)

	best := Fit{Tried: len(tried), RoughVolume: f.volume}
	for _, a := range tried {
		// No orientation can be better than it is with nothing to avoid.
		if a.scale <= best.Scale {
			break
		}
		if f.nodes >= f.mostNodes() {
			f.notes = append(f.notes, "The search among the places to avoid was ended; a larger stone may fit.")
			break
		}
		if scale, centre, ok := f.avoiding(a.turn, best.Scale); ok && scale > best.Scale {
			best.Scale, best.Centre, best.RoughFromStone = scale, centre, a.turn
		}
	}
	if best.Scale <= 0 {
		return Fit{}, &Fault{File: "rough", Field: "size", Got: r.describe(),
			Why:    "nothing is left between the allowance and the places to avoid",
			Remedy: "reduce the allowance or the places to avoid, or take a larger piece"}
	}
	m := s.Measure()
	best.WidthMM, best.LengthMM, best.DepthMM = best.Scale*m.WidthMM, best.Scale*m.LengthMM, best.Scale*m.DepthMM
	best.Yield = math.Pow(best.Scale, 3) * s.Volume() / f.volume
	best.Notes = f.notes
	return best, nil
}

// allowance returns the allowance in force.
func (r Rough) allowance() float64 {
	switch {
	case r.Allowance == 0:
		return DefaultAllowance
	case r.Allowance < 0:
		return 0
	}
	return r.Allowance
}

func (r Rough) describe() string {
	if r.Shape == Scanned {
		return "scan"
	}
	return fmt.Sprintf("%s %g x %g x %g mm", r.Shape, r.Size[0], r.Size[1], r.Size[2])
}

// check finds what is wrong with the description.
func (r Rough) check() Faults {
	var fs Faults
	add := func(field, got, why, remedy string) {
		fs = append(fs, &Fault{File: "rough", Field: field, Got: got, Why: why, Remedy: remedy})
	}
	finite := func(v mgl64.Vec3) bool {
		for _, x := range v {
			if math.IsNaN(x) || math.IsInf(x, 0) {
				return false
			}
		}
		return true
	}
	switch r.Shape {
	case Box, Cylinder, Ellipsoid:
		size := r.Size
		if r.Shape == Cylinder {
			size[1] = size[0]
		}
		if !(min(size[0], size[1], size[2]) > 0) || !finite(size) || max(size[0], size[1], size[2]) > mostRoughMM {
			add("size", r.describe(), "sizes are positive millimetres", "give what a caliper reads")
		} else if 2*r.allowance() >= min(size[0], size[1], size[2]) {
			add("allowance", fmt.Sprint(r.allowance()), "an allowance on both sides leaves nothing of "+r.describe(), "reduce it")
		}
	case Scanned:
		switch {
		case r.Scan == nil:
			add("scan", "", "no scan was read", "read the scan of the rough first")
		case r.Scan.OpenEdges+r.Scan.TangledEdges > 0:
			add("scan", r.Scan.File, fmt.Sprintf("the surface is open at %d edges, so inside and outside cannot be told", r.Scan.OpenEdges+r.Scan.TangledEdges),
				"close the holes in the scanning program")
		case r.Scan.Bodies > 1:
			add("scan", r.Scan.File, fmt.Sprintf("the file holds %d separate surfaces", r.Scan.Bodies),
				"keep the rough alone")
		}
	default:
		add("shape", fmt.Sprint(int(r.Shape)), "this shape is not known", "use box, cylinder, ellipsoid or scan")
	}
	if math.IsNaN(r.Allowance) || math.IsInf(r.Allowance, 0) {
		add("allowance", fmt.Sprint(r.Allowance), "this is not a length", "give millimetres")
	}
	if n := len(r.AvoidPlanes) + len(r.AvoidSpheres); n > maxAvoid {
		add("avoid", fmt.Sprint(n), fmt.Sprintf("more than %d places to avoid", maxAvoid),
			"join neighbouring ones into one larger sphere")
	}
	for _, p := range r.AvoidPlanes {
		if !(math.Abs(p.Normal.Len()-1) < 1e-6) || math.IsNaN(p.Distance) || math.IsInf(p.Distance, 0) {
			add("avoid", fmt.Sprint(p.Normal, p.Distance), "a plane has a unit normal and a distance",
				"give the direction across the crack")
		}
	}
	for _, b := range r.AvoidSpheres {
		if !finite(b.Centre) || !(b.Radius >= 0) || math.IsInf(b.Radius, 0) {
			add("avoid", fmt.Sprint(b.Centre, b.Radius), "a sphere has a centre and a radius in millimetres",
				"measure the inclusion again")
		}
	}
	if !finite(r.Axis) || !finite(r.StoneAxis) {
		add("axis", fmt.Sprint(r.Axis, r.StoneAxis), "an axis is a direction", "give three numbers")
	}
	return fs
}

// spreadDirections returns n directions spread evenly over the sphere (the spiral of
// Fibonacci's sequence; Gonzalez, Math. Geosci. 42, 2010).
func spreadDirections(n int) []mgl64.Vec3 {
	golden := math.Pi * (3 - math.Sqrt(5))
	out := make([]mgl64.Vec3, n)
	for i := range out {
		z := 1 - (2*float64(i)+1)/float64(n)
		r := math.Sqrt(1 - z*z)
		sin, cos := math.Sincos(golden * float64(i))
		out[i] = mgl64.Vec3{r * cos, r * sin, z}
	}
	return out
}

// turns returns the orientations to try, each the rough's frame from the stone's.
func (f *fitter) turns() []mgl64.Mat3 {
	var out []mgl64.Mat3
	if f.rough.Axis.Len() > 0 {
		const spins = 72 // five degrees apart
		for _, sign := range []float64{1, -1} {
			base := mgl64.QuatBetweenVectors(f.stoneAxis, f.roughAxis.Mul(sign))
			for k := range spins {
				spin := mgl64.QuatRotate(2*math.Pi*float64(k)/spins, f.roughAxis)
				out = append(out, spin.Mul(base).Normalize().Mat4().Mat3())
			}
		}
		return out
	}
	const spins = 12 // thirty degrees apart; what lies between is found by improving
	directions := []mgl64.Vec3{{0, 0, 1}, {0, 0, -1}, {1, 0, 0}, {-1, 0, 0}, {0, 1, 0}, {0, -1, 0}}
	directions = append(directions, spreadDirections(120)...)
	for _, d := range directions {
		base := mgl64.QuatBetweenVectors(mgl64.Vec3{0, 0, 1}, d)
		for k := range spins {
			spin := mgl64.QuatRotate(2*math.Pi*float64(k)/spins, d)
			out = append(out, spin.Mul(base).Normalize().Mat4().Mat3())
		}
	}
	return out
}

// improve searches near an orientation for a better one.
func (f *fitter) improve(turn mgl64.Mat3) (mgl64.Mat3, float64) {
	turned := func(x []float64) mgl64.Mat3 {
		v := mgl64.Vec3{x[0], 0, 0}
		if len(x) == 3 {
			v = mgl64.Vec3{x[0], x[1], x[2]}
		} else {
			v = f.roughAxis.Mul(x[0])
		}
		angle := v.Len()
		if angle == 0 {
			return turn
		}
		return mgl64.QuatRotate(angle, v.Mul(1/angle)).Mat4().Mat3().Mul3(turn)
	}
	variables := 3
	if f.rough.Axis.Len() > 0 {
		variables = 1
	}
	problem := optimize.Problem{Func: func(x []float64) float64 {
		return -f.bound(turned(x), overstep)
	}}
	// A step of some degrees at first; done when the size changes by less than a millionth.
	method := &optimize.NelderMead{SimplexSize: 0.1}
	settings := &optimize.Settings{FuncEvaluations: 250,
		Converger: &optimize.FunctionConverge{Relative: 1e-7, Iterations: 25}}
	result, err := optimize.Minimize(problem, make([]float64, variables), settings, method)
	if result == nil || err != nil && result.X == nil {
		return turn, 0
	}
	return turned(result.X), -result.F
}
