package command

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"
	"strings"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
)

// subjectFlags say which stone a command is about.
type subjectFlags struct {
	Plan        string  `arg:"" optional:"" help:"A cut plan (.toml) or a scan (.stl, .obj, .ply); without it the bundled stone."`
	Round       string  `type:"word" placeholder:"K=V,..." help:"In place of PLAN, a round brilliant by its measured proportions: table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3,culet=0.5 (percent and degrees)."`
	Outline     string  `type:"word" placeholder:"NAME" help:"In place of PLAN, a stone of this outline, by --proportions: ${outlines}."`
	Proportions string  `type:"word" placeholder:"K=V,..." help:"The measured proportions of --outline, named as for --round: table=60,crown=35,pavilion=42,ratio=1.3; a wrong name is answered by all that the outline has."`
	Material    string  `type:"word" placeholder:"NAME" help:"What the stone is made of, in place of what the plan says."`
	Hull        bool    `help:"Take the convex hull of a scan that has dents or holes."`
	Width       float64 `type:"number" least:"0.1" most:"1000" unit:"mm" placeholder:"MM" help:"The stone's width, 0.1 to 1000 mm, in place of what the plan says."`
}

// subject is the stone that a command is about.
type subject struct {
	name     string
	stone    *facets.Stone
	material *gems.Material // nil where nothing says what the stone is made of
	measures facets.Measures
	rough    *facets.RoughRef // nil where the plan names none
	axis     *facets.Axis     // likewise
	folder   string           // of the plan, where the files it names lie
}

// subject finds, solves and measures the stone.
func (f *subjectFlags) subject(c call) (*subject, error) {
	if err := f.oneSource(); err != nil {
		return nil, err
	}
	s, err := f.solve(c)
	if err != nil {
		var faults facets.Faults
		var one *facets.Fault
		var told *fault
		if !errors.As(err, &told) && (errors.As(err, &faults) || errors.As(err, &one)) {
			return nil, inputFault(err)
		}
		return nil, err
	}
	for _, note := range s.stone.Notes {
		c.warn("%s", note)
	}
	s.measures = s.stone.Measure()
	return s, nil
}

// oneSource refuses more than one stone, and half a stone.
func (f *subjectFlags) oneSource() error {
	switch {
	case f.Plan != "" && f.Round != "":
		return commandFaultf("a PLAN and --round are two stones; leave one out")
	case f.Plan != "" && (f.Outline != "" || f.Proportions != ""):
		return commandFaultf("a PLAN and --outline are two stones; leave one out")
	case f.Round != "" && (f.Outline != "" || f.Proportions != ""):
		return commandFaultf("--round and --outline are two stones; leave one out")
	case f.Outline != "" && f.Proportions == "":
		return commandFaultf("--outline %s needs --proportions beside it, such as --proportions table=60,crown=35,pavilion=42", f.Outline)
	case f.Proportions != "" && f.Outline == "":
		return commandFaultf("--proportions needs --outline beside it")
	default:
		return nil
	}
}

// solve makes the solid of whatever the flags name.
func (f *subjectFlags) solve(c call) (*subject, error) {
	switch {
	case f.Round != "" || f.Outline != "":
		return f.measured(c)
	case f.Plan == "":
		plan, err := bundled()
		if err != nil {
			return nil, err
		}
		return f.planned(c, plan)
	}
	switch extension := strings.ToLower(filepath.Ext(f.Plan)); {
	case extension == ".toml":
		plan, err := facets.OpenPlan(f.Plan)
		if err != nil {
			return nil, err
		}
		return f.planned(c, plan)
	case isStoneFile(f.Plan):
		return f.scanned(c)
	default:
		return nil, f.neither()
	}
}

// bundled reads the plan that comes with the program.
func bundled() (*facets.Plan, error) {
	file, err := testdata.Plans().Open(testdata.Bundled)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	return facets.ReadPlan(file, testdata.Bundled)
}

// neither tells a file that is no plan and no scan by its name.
func (f *subjectFlags) neither() error {
	switch info, err := os.Stat(f.Plan); {
	case err != nil:
		return missing(f.Plan, err)
	case info.IsDir():
		return missing(f.Plan, errFolder)
	}
	return missing(f.Plan, errOther)
}

// Why a file is no input, beside what the system says.
var (
	errFolder = errors.New("this is a folder")
	errOther  = errors.New("this is neither a plan nor a scan by its name")
)

// missing is the fault of a file that cannot be had.
func missing(path string, err error) error {
	fault := &facets.Fault{
		File:   path,
		Why:    err.Error(),
		Remedy: "name a plan (.toml) or a scan (.stl, .obj, .ply)",
	}
	switch {
	case errors.Is(err, fs.ErrNotExist):
		fault.Why, fault.Remedy = "there is no such file", "check the name and the folder"
	case errors.Is(err, fs.ErrPermission):
		fault.Why, fault.Remedy = "it may not be read", "change its permissions or copy it"
	}
	return facets.Faults{fault}
}

// planned solves a plan.
func (f *subjectFlags) planned(c call, plan *facets.Plan) (*subject, error) {
	if f.Width != 0 {
		plan.WidthMM = f.Width
	}
	material, materialErr := f.materialOf(c.library, plan)
	if f.Material != "" && materialErr != nil {
		return nil, materialErr
	}
	solution, err := plan.Solution()
	var faults facets.Faults
	if materialErr != nil && (err == nil || errors.As(err, &faults)) { // all faults at once
		return nil, append(facets.Faults{materialFault(plan, materialErr)}, faults...)
	}
	if err != nil {
		return nil, err
	}
	for _, gap := range solution.Gaps {
		c.warn("%s", gapWords(gap))
	}
	return &subject{name: plan.Name, stone: solution.Stone, material: material, rough: plan.Rough, axis: plan.Axis,
		folder: filepath.Dir(plan.File)}, nil
}

// materialOf returns what the flag, or else the plan, says that the stone is made of.
func (f *subjectFlags) materialOf(library *gems.Library, plan *facets.Plan) (*gems.Material, error) {
	switch ref := plan.Material; {
	case f.Material != "":
		return f.namedMaterial(library)
	case ref.Key != "":
		return library.Find(ref.Key)
	default:
		return gems.Plain(ref.Name, ref.Index, ref.Density)
	}
}

// materialFault is the fault of a plan whose material cannot be had.
func materialFault(plan *facets.Plan, err error) *facets.Fault {
	return &facets.Fault{File: plan.File, Line: plan.Material.Line, Field: "material", Why: err.Error()}
}

// gapWords tells a near miss between planes that nearly share a corner.
func gapWords(g facets.Gap) string {
	where := "the finished stone"
	if g.Tier != "" {
		where = fmt.Sprintf("tier %s at index %g", g.Tier, g.Index)
	}
	return fmt.Sprintf("%s: misses %s by %.4f mm, less than is seen at the lap", where, g.With, g.MM)
}

// wantMaterial fails where nothing says what the stone is made of.
func (s *subject) wantMaterial() error {
	if s.material == nil {
		return commandFaultf("nothing says what the stone is made of: add --material NAME (pavilight gems lists the names)")
	}
	return nil
}

// scanned reads a scan, scaled to the width that the flag asks for.
func (f *subjectFlags) scanned(c call) (*subject, error) {
	s := &subject{name: strings.TrimSuffix(filepath.Base(f.Plan), filepath.Ext(f.Plan))}
	var err error
	if s.material, err = f.namedMaterial(c.library); err != nil {
		return nil, err
	}
	if s.stone, err = readScan(f.Plan, s.name, f.Hull, 0); err != nil || f.Width == 0 {
		return s, err
	}
	s.stone, err = readScan(f.Plan, s.name, f.Hull, f.Width/s.stone.Measure().WidthMM)
	return s, err
}

// readScan reads a scan at a scale, mm in one unit of the file, 0 for 1.
func readScan(path, name string, hull bool, scale float64) (*facets.Stone, error) {
	file, err := os.Open(path)
	if err != nil {
		return nil, missing(path, err)
	}
	defer file.Close()
	if info, err := file.Stat(); err == nil && info.IsDir() {
		return nil, missing(path, errFolder)
	}
	scan, err := facets.ReadScan(file, path, facets.ScanOptions{Scale: scale})
	if err != nil {
		return nil, err
	}
	return scan.Stone(facets.ScanPlacement{Name: name, AllowHull: hull})
}

// namedMaterial returns the material of the flag, nil without one.
func (f *subjectFlags) namedMaterial(library *gems.Library) (*gems.Material, error) {
	if f.Material == "" {
		return nil, nil
	}
	m, err := findMaterial(library, f.Material)
	if err != nil {
		return nil, inputFault(fmt.Errorf("--material: %w", err))
	}
	return m, nil
}

// usualWidth is the width in mm of a measured stone whose width nobody gave. Shares and
// percentages do not depend on it.
const usualWidth = 10

// measured makes a stone from measured proportions.
func (f *subjectFlags) measured(c call) (*subject, error) {
	outline, values := f.Outline, f.Proportions
	if f.Round != "" {
		outline, values = "round", f.Round
	}
	proportions, err := facets.ParseProportions(outline, values)
	if err != nil {
		return nil, commandFault(err)
	}
	s := &subject{name: outline + " by its proportions"}
	if s.material, err = f.namedMaterial(c.library); err != nil {
		return nil, err
	}
	width := f.Width
	if width == 0 {
		width = usualWidth
		c.warn("No --width: the stone is taken as %d mm wide.", usualWidth)
	}
	s.stone, err = proportions.Stone(width)
	return s, err
}
