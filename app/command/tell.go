package command

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"time"
	"unicode/utf8"

	"pavilight/app/disk"
	"pavilight/app/report"
	"pavilight/app/version"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

// tellCommand makes the report for a client.
type tellCommand struct {
	subjectFlags
	More       []string `arg:"" optional:"" name:"more" help:"Further plans and scans: a report each, or one of all with --compare."`
	Compare    bool     `help:"Set the stones side by side in one report, the first one against the others."`
	In         string   `default:"air,water,oil" type:"word" placeholder:"NAMES" help:"Up to four surroundings; liquids are shown in a dish too (${default})."`
	Lights     string   `default:"overcast,room" type:"word" placeholder:"NAMES" help:"One or two lights of the pictures in true colour: ${lights}, or paths of .hdr panoramas (${default})."`
	Body       string   `type:"word" placeholder:"COLOUR:MM" help:"Body colour #rrggbb as seen through so many mm of daylight."`
	Head       float64  `default:"10" type:"number" least:"0" most:"90" unit:"degrees" placeholder:"DEG" help:"Half-angle of the cone that the viewer's head blocks, 0 to 90 degrees (${default})."`
	Measured   string   `type:"word" placeholder:"K=V,..." help:"How exactly the stone was measured: standard deviations such as crown=0.2,pavilion=0.1,table=0.5; of plans and scans the angles of crown and pavilion."`
	Pixels     int      `default:"300" type:"number" least:"48" most:"1000" unit:"pixels" placeholder:"N" help:"Pixels of a map's edge, 48 to 1000 (${default})."`
	Error      float64  `default:"0.0005" type:"number" least:"0.00001" most:"0.1" placeholder:"E" help:"Trace until the standard error of every ledger entry is below E, 0.00001 to 0.1 (${default})."`
	Seed       uint64   `default:"1" type:"number" placeholder:"N" help:"Seed of the random numbers; the same seed gives the same report (${default})."`
	Workers    int      `type:"number" least:"0" most:"1024" unit:"(0 for all cores)" placeholder:"N" help:"How many cores may trace, 0 to 1024; 0 for all (0)."`
	Language   string   `default:"en" type:"word" placeholder:"NAME" help:"The report's language: en, de, fr (${default})."`
	Depth      string   `default:"client" type:"word" placeholder:"NAME" help:"Whom it is for: client, or colleague with more terms and numbers (${default})."`
	Letterhead string   `type:"word" placeholder:"FILE" help:"A picture (PNG, JPEG, GIF; at most 10 MB) at the head of the report."`
	Author     string   `type:"word" placeholder:"WORDS" help:"Who makes the report."`
	Client     string   `type:"word" placeholder:"WORDS" help:"Whom it is made for."`
	Notes      string   `type:"word" placeholder:"WORDS" help:"Notes at the end of the report."`
	Date       string   `type:"word" placeholder:"YYYY-MM-DD" help:"The report's date; without it today, or what SOURCE_DATE_EPOCH says."`
	Paper      string   `default:"a4" type:"word" placeholder:"NAME" help:"The paper: a4 or letter (${default})."`
	As         string   `default:"pdf,html" type:"word" placeholder:"KINDS" help:"What to write: pdf, html, json, csv (ledger, tilt curves, maps), pfm (maps as 32-bit numbers), none, with commas between (${default})."`
	movingFlags
	Out string `type:"word" placeholder:"DIR" help:"Write into this folder, not into the current one."`
}

// tellResult is what tell prints as JSON.
type tellResult struct {
	Files  []string `json:"files"`
	Stones []any    `json:"stones"`
}

// teller is a tell command made ready: what its flags say.
type teller struct {
	*tellCommand
	job    report.Job
	cover  report.Cover
	kinds  []string
	moving *mover // nil for none
	folder string
}

// Run makes the reports and writes them.
func (t *tellCommand) Run(c call) error {
	r, err := t.ready(c.library)
	if err != nil {
		return err
	}
	sources, err := t.sources()
	if err != nil {
		return err
	}
	if t.Compare && len(sources) < 2 {
		return commandFaultf("--compare sets two or more stones side by side; name another one")
	}
	if t.Compare && len(sources) > report.MostCompared {
		return commandFaultf("--compare: %d stones do not fit side by side; use at most %d", len(sources), report.MostCompared)
	}
	if _, err := openOut(r.folder); err != nil { // told before the work, not after it
		return err
	}
	var stones []report.Stone
	var bases []string
	var failed []error
	for _, source := range sources {
		stone, err := r.stone(c, source)
		switch {
		case err == nil:
			stones, bases = append(stones, *stone), append(bases, baseName(source, bases))
		case len(sources) == 1 || !isInputFault(err):
			return err
		default:
			failed = append(failed, err)
		}
	}
	if t.Compare && len(failed) > 0 {
		return inputFault(errors.Join(failed...))
	}
	bar := newProgress(c.env.bar, c.env.Terminal)
	defer bar.clear()
	var result tellResult
	var all []*report.Findings
	for i := range stones {
		share := 1.0 // of the time, that the report takes
		if r.moving != nil {
			share = 0.2
		}
		show := func(from, share float64) func(float64) {
			return func(done float64) { bar.show((float64(i) + from + share*done) / float64(len(stones))) }
		}
		f, err := report.Gather(c, &r.job, stones[i], show(0, share))
		if err != nil {
			if err = r.gatherFault(stones[i].Name, err); len(sources) == 1 || t.Compare || !isInputFault(err) {
				return err
			}
			failed = append(failed, err)
			continue
		}
		all = append(all, f)
		result.Stones = append(result.Stones, f.Numbers())
		files, err := r.files(f, bases[i])
		if err != nil {
			return err
		}
		if r.moving != nil {
			frames, err := r.moving.render(c, f.Solid, r.job.MaterialOf(&f.Stone), show(share, 1-share))
			if err != nil {
				return err
			}
			films, err := r.moving.files(c, frames, bases[i])
			if err != nil {
				return err
			}
			files = append(files, films...)
		}
		if err := r.write(c, files, &result); err != nil {
			return err
		}
	}
	if t.Compare {
		files, err := r.comparison(c, all)
		if err != nil {
			return err
		}
		if err := r.write(c, files, &result); err != nil {
			return err
		}
	}
	bar.clear()
	if len(failed) > 0 {
		if len(result.Files) > 0 {
			c.warn("written: %s", strings.Join(result.Files, " "))
		}
		return inputFault(fmt.Errorf("%w\n%d of %d stones could not be reported on; the others are done", errors.Join(failed...), len(failed), len(sources)))
	}
	if c.json {
		return printJSON(c.out, result)
	}
	printTell(c.out, all, &result)
	return nil
}

// isInputFault reports whether an error is the fault of the input.
func isInputFault(err error) bool {
	var f *fault
	return errors.As(err, &f) && f.status == InputFault
}

// sources returns the flags of each stone.
func (t *tellCommand) sources() ([]subjectFlags, error) {
	if err := t.oneSource(); err != nil {
		return nil, err
	}
	if len(t.More) > 0 && (t.Round != "" || t.Outline != "") {
		return nil, commandFaultf("a PLAN and proportions are two stones; leave one out")
	}
	all := []subjectFlags{t.subjectFlags}
	for _, path := range t.More {
		one := t.subjectFlags
		one.Plan = path
		all = append(all, one)
	}
	return all, nil
}

// most letters of what a user may write into a report.
const (
	mostNotes = 4000
	mostName  = 200
)

// ready reads the flags that are the same for every stone.
func (t *tellCommand) ready(library *gems.Library) (*teller, error) {
	r := &teller{tellCommand: t, folder: t.Out}
	if r.folder == "" {
		r.folder = "."
	}
	var err error
	if r.kinds, err = wordsOf("--as", t.As, "pdf", "html", "json", "csv", "pfm", "none"); err != nil {
		return nil, err
	}
	r.job = report.Job{Head: facets.Angle(t.Head) * facets.Degree, Pixels: t.Pixels, Error: t.Error, Seed: t.Seed, Workers: t.Workers}
	if r.job.Media, err = surroundings(library, "--in", t.In); err != nil {
		return nil, err
	}
	const mostMedia = 4
	if len(r.job.Media) > mostMedia {
		return nil, commandFaultf("--in: %d surroundings do not fit on a page; use at most %d", len(r.job.Media), mostMedia)
	}
	names := splitList(t.Lights)
	if len(names) > 2 {
		return nil, commandFaultf("--lights: %d lights do not fit on a page; use one or two", len(names))
	}
	for _, name := range names {
		light, err := (&sceneFlags{Light: name}).light(true)
		if err != nil {
			return nil, err
		}
		r.job.Lights = append(r.job.Lights, light)
	}
	if t.Body != "" {
		if r.job.Body, err = readBody(t.Body, nil); err != nil {
			return nil, err
		}
	}
	if t.Measured != "" {
		if r.job.Measured, err = report.ReadUncertainties(t.Measured); err != nil {
			return nil, commandFaultf("--measured: %w", err)
		}
	}
	if r.moving, err = t.mover(&r.job); err != nil {
		return nil, err
	}
	return r, r.readCover()
}

// readCover reads what the report says besides what is found.
func (r *teller) readCover() error {
	t := r.tellCommand
	if !slices.Contains(report.Languages(), t.Language) {
		return commandFaultf("--language %q is not known; use one of %s", t.Language, strings.Join(report.Languages(), ", "))
	}
	depth, err := wordsOf("--depth", t.Depth, "client", "colleague")
	if err != nil {
		return err
	}
	r.cover = report.Cover{
		Language: t.Language, Colleague: slices.Contains(depth, "colleague"), Author: t.Author, Client: t.Client,
		Notes: t.Notes, Program: version.Current().Name(),
	}
	for _, text := range []struct {
		flag, words string
		most        int
	}{{"--author", t.Author, mostName}, {"--client", t.Client, mostName}, {"--notes", t.Notes, mostNotes}} {
		if n := utf8.RuneCountInString(text.words); n > text.most {
			return commandFaultf("%s: %d letters are too many; use at most %d", text.flag, n, text.most)
		}
	}
	if r.cover.Paper, err = report.PaperNamed(t.Paper); err != nil {
		return commandFaultf("--paper: %w", err)
	}
	if t.Letterhead != "" {
		if r.cover.Letterhead, err = report.OpenLetterhead(t.Letterhead); err != nil {
			return inputFault(fmt.Errorf("--letterhead: %w", err))
		}
	}
	r.cover.Date, err = t.date()
	return err
}

// date returns the day of the report.
func (t *tellCommand) date() (time.Time, error) {
	if t.Date != "" {
		day, err := time.Parse(time.DateOnly, t.Date)
		if err != nil || day.Year() < 1 {
			return day, commandFaultf("--date %q is no day; write it like 2026-03-31", t.Date)
		}
		return day, nil
	}
	day, err := sourceDate()
	if err == nil && day.IsZero() {
		now := time.Now()
		day = time.Date(now.Year(), now.Month(), now.Day(), 0, 0, 0, 0, time.UTC)
	}
	return day, err
}

// stone brings in the stone of one source.
func (r *teller) stone(c call, flags subjectFlags) (*report.Stone, error) {
	scan := flags.Plan != "" && isStoneFile(flags.Plan) && !strings.EqualFold(filepath.Ext(flags.Plan), ".toml")
	if scan && flags.Width == 0 {
		return nil, inputFault(fmt.Errorf("%s: a scan does not say in which unit it was measured; give the stone's width with --width MM", flags.Plan))
	}
	s, err := flags.subject(c)
	if err != nil {
		return nil, err
	}
	if err := s.wantMaterial(); err != nil {
		return nil, fmt.Errorf("%s: %w", s.name, err)
	}
	stone := &report.Stone{Name: s.name, Solid: s.stone, Material: s.material, Measures: s.measures}
	switch {
	case scan:
		stone.Origin = report.FromScan
	case flags.Round != "" || flags.Outline != "":
		outline, values := flags.Outline, flags.Proportions
		if flags.Round != "" {
			outline, values = "round", flags.Round
		}
		stone.Origin, stone.WidthTaken = report.FromProportions, flags.Width == 0
		stone.Name = outline
		if stone.Proportions, err = facets.ParseProportions(outline, values); err != nil {
			return nil, commandFault(err)
		}
	}
	if err := r.job.Measured.Fits(stone); err != nil {
		return nil, commandFaultf("--measured: %w", err)
	}
	return stone, nil
}

// baseName returns the beginning of a stone's file names, none of the taken ones.
func baseName(flags subjectFlags, taken []string) string {
	base := facets.FileStem(testdata.Bundled)
	switch {
	case flags.Round != "":
		base = "round"
	case flags.Outline != "":
		base = flags.Outline
	case flags.Plan != "":
		base = facets.FileStem(flags.Plan)
	}
	name := base
	for n := 2; slices.Contains(taken, name); n++ {
		name = fmt.Sprintf("%s-%d", base, n)
	}
	return name
}

// gatherFault says whose fault it is that a stone cannot be traced.
func (r *teller) gatherFault(name string, err error) error {
	var outside *gems.RangeError
	var invalid *trace.InvalidError
	switch {
	case errors.As(err, &outside), errors.Is(err, report.ErrNoStones):
		return inputFault(fmt.Errorf("%s: %w", name, err))
	case errors.As(err, &invalid):
		return commandFaultf("%s: %w", name, err)
	}
	return err
}

// files makes the files of one stone, all at the same time: most of it is packing
// pictures.
func (r *teller) files(f *report.Findings, base string) ([]madeFile, error) {
	var files []madeFile
	var writers []func(io.Writer) error
	make := func(name string, write func(io.Writer) error) {
		files, writers = append(files, madeFile{name: base + name}), append(writers, write)
	}
	for _, kind := range r.kinds {
		switch kind {
		case "pdf":
			if !r.Compare {
				make("-report.pdf", func(w io.Writer) error { return report.PDF(w, f, &r.cover) })
			}
		case "html":
			if !r.Compare {
				make("-report.html", func(w io.Writer) error { return report.HTML(w, f, &r.cover) })
			}
		case "json":
			make("-report.json", func(w io.Writer) error { return report.JSON(w, f) })
		case "csv", "pfm":
			if kind == "csv" {
				make("-ledger.csv", func(w io.Writer) error { return report.LedgerCSV(w, f) })
				make("-tilt.csv", func(w io.Writer) error { return report.TiltCSV(w, f) })
			}
			for _, row := range shownRows() {
				for i := range f.Columns {
					column := f.Columns[i].Column
					name := "-" + row.file + "-" + fileWord(column.Medium.Key)
					if column.Dish {
						name += "-dish"
					}
					make(name+"."+kind, func(w io.Writer) error {
						if kind == "csv" {
							return report.MapCSV(w, column.Map, row.quantity)
						}
						return report.PFM(w, column.Map, row.quantity)
					})
				}
			}
		}
	}
	faults := slices.Repeat([]error{nil}, len(files))
	var all sync.WaitGroup
	for i := range files {
		all.Go(func() {
			var b bytes.Buffer
			faults[i] = writers[i](&b)
			files[i].content = b.Bytes()
		})
	}
	all.Wait()
	return files, errors.Join(faults...)
}

// write writes files into the folder, each whole or not at all.
func (r *teller) write(c call, files []madeFile, result *tellResult) error {
	for _, f := range files {
		if err := context.Cause(c); err != nil {
			return err
		}
		path := filepath.Join(r.folder, f.name)
		whole := func(w io.Writer) error { _, err := w.Write(f.content); return err }
		if err := disk.Replace(path, whole); err != nil {
			return ownFault(err)
		}
		result.Files = append(result.Files, path)
	}
	return nil
}

func printTell(w io.Writer, all []*report.Findings, r *tellResult) {
	for _, f := range all {
		fmt.Fprintf(w, "%s: light return", f.Name)
		for i := range f.Columns {
			c := f.Columns[i].Column
			with := ","
			if i == 0 {
				with = ""
			}
			fmt.Fprintf(w, "%s %s%s %s", with, c.Medium.Key, strings.ReplaceAll(dishWord(columnArrangement(c)), ",", ""), withError(c.Ledger.Returned, c.StandardError.Returned))
		}
		fmt.Fprintln(w)
	}
	fmt.Fprintf(w, "%d files written: %s\n", len(r.Files), strings.Join(r.Files, " "))
}

func columnArrangement(c *trace.Column) string {
	if c.Dish {
		return "dish"
	}
	return "around"
}

// comparison makes the files of the stones side by side.
func (r *teller) comparison(c call, all []*report.Findings) (files []madeFile, err error) {
	if names := report.Materials(all); len(names) > 1 {
		c.warn("the stones are of different materials (%s): the report says so beside what differs", strings.Join(names, ", "))
	}
	for _, kind := range r.kinds {
		write := report.ComparisonPDF
		if kind == "html" {
			write = report.ComparisonHTML
		} else if kind != "pdf" {
			continue
		}
		var b bytes.Buffer
		if err := write(&b, all, &r.cover); err != nil {
			return nil, err
		}
		files = append(files, madeFile{"comparison." + kind, b.Bytes()})
	}
	return files, nil
}
