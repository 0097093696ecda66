package command

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"image/png"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"time"

	"pavilight/app/disk"
	"pavilight/app/drawing"
	"pavilight/app/sheet"
	"pavilight/app/version"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
)

// cutCommand makes the sheet for the bench.
type cutCommand struct {
	subjectFlags
	More     []string `arg:"" optional:"" name:"more" help:"Further plans, to be bound with the first into one booklet."`
	Machine  string   `type:"word" placeholder:"NAME" help:"The machine that the numbers are for: its name in the folder of machines, or its file (.toml)."`
	Language string   `default:"en" type:"word" placeholder:"NAME" help:"The sheet's language: en, de, fr (${default})."`
	Paper    string   `default:"a4" type:"word" placeholder:"NAME" help:"The paper: a4, letter or a5 (${default})."`
	Large    bool     `help:"Set type a quarter larger."`
	Order    string   `default:"lap" type:"word" placeholder:"NAME" help:"The order of a tier's indices: lap, as they follow on the gear, or opposites, each facet before the one that faces it (${default})."`
	Gears    string   `type:"word" placeholder:"N,..." help:"Add the indices on these gears, the facets that do not fit marked."`
	LeaveOut string   `name:"leave-out" type:"word" placeholder:"PARTS" help:"Make a pupil's copy without these parts, and a teacher's copy beside it: angles, indices, stops, with commas between."`
	As       string   `default:"pdf" type:"word" placeholder:"KINDS" help:"What to write: pdf, svg, png, with commas between; svg and png give a file a page (${default})."`
	Title    string   `default:"Cutting sheets" type:"word" placeholder:"WORDS" help:"The title of a booklet (${default})."`
	In       string   `default:"air,water,oil" type:"word" placeholder:"NAMES" help:"The surroundings of the small maps (${default})."`
	Head     float64  `default:"10" type:"number" least:"0" most:"90" unit:"degrees" placeholder:"DEG" help:"Half-angle of the cone that the viewer's head blocks, 0 to 90 degrees (${default})."`
	NoMaps   bool     `name:"no-maps" help:"Leave out the maps and the ledger."`
	Out      string   `type:"word" placeholder:"DIR" help:"Write into this folder, not into the current one."`
}

// cutResult is what cut prints as JSON.
type cutResult struct {
	Files  []string   `json:"files"`
	Pages  int        `json:"pages"`
	Sheets []cutSheet `json:"sheets"`
}

// cutSheet is one plan's sheet.
type cutSheet struct {
	Plan       string    `json:"plan"`
	Material   string    `json:"material"`
	WidthMM    float64   `json:"width_mm"`
	Carats     *float64  `json:"carats"` // null where no density is known
	Machine    string    `json:"machine"`
	Gear       int       `json:"gear"`
	LightModel bool      `json:"light_model_only"`
	Steps      []cutStep `json:"steps"`
}

// cutStep is one tier as the machine shows it.
type cutStep struct {
	Tier       string   `json:"tier"`
	ToLap      string   `json:"to_lap"` // the side that faces the lap
	AngleDeg   float64  `json:"angle_deg"`
	SetDeg     float64  `json:"set_angle_deg"`
	Set        []string `json:"set_index"`
	Stop       string   `json:"stop"`
	RemovedMM3 float64  `json:"removed_mm3"`
	LayerMM    float64  `json:"layer_mm"`
}

// Run makes the sheet and writes it.
func (k *cutCommand) Run(c call) error {
	job, err := k.job()
	if err != nil {
		return err
	}
	kinds, err := wordsOf("--as", k.As, "pdf", "svg", "png")
	if err != nil {
		return err
	}
	media, err := surroundings(c.library, "--in", k.In)
	if err != nil {
		return err
	}
	plans, materials, err := k.plans(c)
	if err != nil {
		return err
	}
	folder := k.Out
	if folder == "" {
		folder = "."
	}
	if _, err := openOut(folder); err != nil { // told before the work, not after it
		return err
	}
	bar := newProgress(c.env.bar, c.env.Terminal)
	defer bar.clear()
	var sheets []*sheet.Sheet
	for i, plan := range plans {
		one := job
		one.Plan, one.Material = plan, materials[i]
		if !k.NoMaps {
			report := func(done float64) { bar.show((float64(i) + done) / float64(len(plans))) }
			if err := sheet.Trace(c, &one, media, report); err != nil {
				return lightFault(plan, err)
			}
		}
		s, err := newSheet(one)
		if err != nil {
			return err
		}
		sheets = append(sheets, s)
	}
	bar.clear()
	for _, s := range sheets {
		for _, note := range s.Notes(nil) {
			c.warn("%s: %s", s.Plan.Name, note)
		}
	}
	files, pages, err := k.documents(sheets, kinds)
	if err != nil {
		return err
	}
	if err := context.Cause(c); err != nil {
		return err
	}
	result := cutResult{Pages: pages}
	for _, f := range files {
		path := filepath.Join(folder, f.name)
		whole := func(w io.Writer) error { _, err := w.Write(f.content); return err }
		if err := disk.Replace(path, whole); err != nil {
			return ownFault(err)
		}
		result.Files = append(result.Files, path)
	}
	for _, s := range sheets {
		result.Sheets = append(result.Sheets, newCutSheet(s))
	}
	if c.json {
		return printJSON(c.out, result)
	}
	printCut(c.out, &result)
	return nil
}

// job reads the flags that are the same for every plan.
func (k *cutCommand) job() (sheet.Job, error) {
	job := sheet.Job{Machine: sheet.Plain(), HeadDeg: k.Head, Large: k.Large, Program: version.Current().Name()}
	if !slices.Contains(words.Languages(), k.Language) {
		return job, commandFaultf("--language %q is not known; use one of %s", k.Language, strings.Join(words.Languages(), ", "))
	}
	job.Words = words.In(k.Language)
	var err error
	if job.Paper, err = sheet.PaperNamed(k.Paper); err != nil {
		return job, commandFaultf("--paper: %w", err)
	}
	order, err := wordsOf("--order", k.Order, "lap", "opposites")
	if err != nil {
		return job, err
	}
	job.Opposites = slices.Contains(order, "opposites")
	if k.Machine != "" {
		machines, err := sheet.UserMachines()
		if err != nil {
			return job, ownFault(err)
		}
		if job.Machine, err = machines.Open(k.Machine); err != nil {
			return job, inputFault(err)
		}
	}
	if k.Gears != "" {
		for text := range strings.SplitSeq(k.Gears, ",") {
			n, err := strconv.Atoi(strings.TrimSpace(text))
			if err != nil || n < 3 || n > 1000 {
				return job, commandFaultf("--gears %q: %q is no gear; give numbers of teeth, 3 to 1000, with commas between",
					k.Gears, text)
			}
			job.Gears = append(job.Gears, n)
		}
	}
	if k.LeaveOut != "" {
		parts, err := wordsOf("--leave-out", k.LeaveOut, "angles", "indices", "stops")
		if err != nil {
			return job, err
		}
		job.LeaveOut = sheet.LeaveOut{
			Angles:  slices.Contains(parts, "angles"),
			Indices: slices.Contains(parts, "indices"),
			Stops:   slices.Contains(parts, "stops"),
		}
	}
	job.Date, err = sourceDate()
	return job, err
}

// wordsOf reads a list of words with commas between, each one of the known ones.
func wordsOf(flag, list string, known ...string) ([]string, error) {
	var all []string
	for word := range strings.SplitSeq(list, ",") {
		word = strings.TrimSpace(word)
		if !slices.Contains(known, word) {
			return nil, commandFaultf("%s %q: %q is not known; use %s", flag, list, word, strings.Join(known, ", "))
		}
		if !slices.Contains(all, word) {
			all = append(all, word)
		}
	}
	return all, nil
}

// sourceDate returns the date that reproducible builds ask for, the zero date without
// one. Source: reproducible-builds.org, SOURCE_DATE_EPOCH specification 1.1.
func sourceDate() (time.Time, error) {
	text, ok := os.LookupEnv("SOURCE_DATE_EPOCH")
	if !ok || text == "" {
		return time.Time{}, nil
	}
	seconds, err := strconv.ParseInt(text, 10, 64)
	if err != nil || seconds < 0 {
		return time.Time{}, commandFaultf("SOURCE_DATE_EPOCH %q is no number of seconds since 1970; mend or unset it", text)
	}
	return time.Unix(seconds, 0).UTC(), nil
}

// plans reads the plans and finds their materials. All faults are told at once.
func (k *cutCommand) plans(c call) (plans []*facets.Plan, materials []*gems.Material, err error) {
	if err := k.oneSource(); err != nil {
		return nil, nil, err
	}
	if len(k.More) > 0 && (k.Round != "" || k.Outline != "") {
		return nil, nil, commandFaultf("a PLAN and proportions are two stones; leave one out")
	}
	paths := append([]string{k.Plan}, k.More...)
	var faults facets.Faults
	for _, path := range paths {
		one := k.subjectFlags
		one.Plan = path
		plan, material, err := one.plan(c)
		var fs facets.Faults
		var told *fault
		switch {
		case (!errors.As(err, &told) || told.status == InputFault) && errors.As(err, &fs):
			faults = append(faults, fs...)
		case err != nil:
			return nil, nil, err
		}
		plans, materials = append(plans, plan), append(materials, material)
	}
	if len(faults) > 0 {
		return nil, nil, inputFault(faults)
	}
	return plans, materials, nil
}

// plan reads the plan that the flags name, or makes one of the stone that they name.
func (f *subjectFlags) plan(c call) (*facets.Plan, *gems.Material, error) {
	var plan *facets.Plan
	var err error
	switch {
	case f.Round == "" && f.Outline == "" && f.Plan == "":
		plan, err = bundled()
	case strings.ToLower(filepath.Ext(f.Plan)) == ".toml":
		plan, err = facets.OpenPlan(f.Plan)
	default:
		return f.planOfStone(c)
	}
	if err != nil {
		return nil, nil, err
	}
	if f.Width != 0 {
		plan.WidthMM = f.Width
	}
	material, err := f.materialOf(c.library, plan)
	if err != nil && f.Material == "" {
		err = facets.Faults{materialFault(plan, err)}
	}
	return plan, material, err
}

// usualGear is the gear of a plan that is made from a stone: it has teeth for the
// symmetries 2, 3, 4, 6 and 8.
const usualGear = 96

// planOfStone makes a plan of a scan or of measured proportions.
func (f *subjectFlags) planOfStone(c call) (*facets.Plan, *gems.Material, error) {
	s, err := f.subject(c)
	if err != nil {
		return nil, nil, err
	}
	if err := s.wantMaterial(); err != nil {
		return nil, nil, err
	}
	plan := facets.PlanOf(s.stone, usualGear)
	plan.Name, plan.Material.Key = s.name, s.material.Key
	plan.File = strings.ReplaceAll(s.name, " ", "-") + ".toml"
	plan.Notes = sheet.ShapeAlone.English()
	return plan, s.material, nil
}

// lightFault says whose fault it is that a plan's light cannot be traced.
func lightFault(plan *facets.Plan, err error) error {
	var outside *gems.RangeError
	var faults facets.Faults
	switch {
	case errors.As(err, &outside):
		return inputFault(fmt.Errorf("%s: the maps cannot be traced: %w; or leave them out with --no-maps", plan.File, err))
	case errors.As(err, &faults):
		return inputFault(err)
	}
	return err
}

// newSheet works a job out; faults are the input's.
func newSheet(job sheet.Job) (*sheet.Sheet, error) {
	s, err := sheet.New(job)
	var faults facets.Faults
	if errors.As(err, &faults) {
		return nil, inputFault(err)
	}
	return s, err
}

// madeFile is a file to be written.
type madeFile struct {
	name    string
	content []byte
}

// documents sets the sheets into files: one document, or a pupil's and a teacher's.
func (k *cutCommand) documents(sheets []*sheet.Sheet, kinds []string) (files []madeFile, pages int, err error) {
	base := sheets[0].FileName()
	if len(sheets) > 1 {
		base += "-booklet"
	}
	add := func(name string, sheets []*sheet.Sheet) error {
		d, err := k.document(sheets)
		if err != nil {
			return err
		}
		pages += len(d.Pages)
		made, err := inKinds(d, name, kinds)
		files = append(files, made...)
		return err
	}
	if !sheets[0].LeaveOut.Any() {
		err = add(base, sheets)
		return files, pages, err
	}
	for _, copies := range []struct {
		suffix   string
		copy     words.Key
		leaveOut sheet.LeaveOut
	}{
		{"-pupil", sheet.PupilsCopy, sheets[0].LeaveOut},
		{"-teacher", sheet.TeachersCopy, sheet.LeaveOut{}},
	} {
		var changed []*sheet.Sheet
		for _, s := range sheets {
			one := *s
			one.LeaveOut, one.Copy = copies.leaveOut, copies.copy
			changed = append(changed, &one)
		}
		if err := add(base+copies.suffix, changed); err != nil {
			return nil, 0, err
		}
	}
	return files, pages, nil
}

func (k *cutCommand) document(sheets []*sheet.Sheet) (*drawing.Document, error) {
	if len(sheets) > 1 {
		return sheet.Booklet(sheets[0].Words.Among([]words.Key{sheet.BookletTitle}, k.Title), sheets)
	}
	return sheets[0].Document()
}

// inKinds puts a document out in each of the kinds asked for.
func inKinds(d *drawing.Document, name string, kinds []string) (files []madeFile, err error) {
	const perMM = 150 / 25.4 // 150 dots an inch
	for _, kind := range kinds {
		if kind == "pdf" {
			var b bytes.Buffer
			if err := d.PDF(&b); err != nil {
				return nil, err
			}
			files = append(files, madeFile{name + ".pdf", b.Bytes()})
			continue
		}
		for i, page := range d.Pages {
			var b bytes.Buffer
			if kind == "svg" {
				err = page.SVG(&b)
			} else {
				err = png.Encode(&b, page.Raster(perMM))
			}
			if err != nil {
				return nil, err
			}
			files = append(files, madeFile{fmt.Sprintf("%s-%d.%s", name, i+1, kind), b.Bytes()})
		}
	}
	return files, nil
}

func newCutSheet(s *sheet.Sheet) cutSheet {
	out := cutSheet{
		Plan: s.Plan.Name, Material: s.Material.Key, WidthMM: s.Measures.WidthMM,
		Machine: s.Machine.Name, Gear: s.Machine.Gear, LightModel: s.LightModel,
	}
	if carats, ok := s.Carats(s.Measures.VolumeMM3); ok {
		out.Carats = &carats
	}
	for i := range s.Rows {
		r := &s.Rows[i]
		step := cutStep{
			Tier: r.Tier.Name, ToLap: r.Facing.String(), AngleDeg: r.Solved.Angle.Degrees(), SetDeg: r.Reading.Degrees(),
			Stop: s.StopIn(nil, r), RemovedMM3: r.Step.Removed, LayerMM: r.Step.Depth,
		}
		for _, set := range r.Settings {
			step.Set = append(step.Set, set.String())
		}
		out.Steps = append(out.Steps, step)
	}
	return out
}

func printCut(w io.Writer, r *cutResult) {
	for i := range r.Sheets {
		s := &r.Sheets[i]
		weight := "weight not known"
		if s.Carats != nil {
			weight = fmt.Sprintf("%.2f ct", *s.Carats)
		}
		fmt.Fprintf(w, "%s: %s, %.2f mm wide, %s; %d steps on a gear of %d, %s\n",
			s.Plan, s.Material, s.WidthMM, weight, len(s.Steps), s.Gear, s.Machine)
	}
	fmt.Fprintf(w, "%d pages written: %s\n", r.Pages, strings.Join(r.Files, " "))
}
