package command

import (
	"bytes"
	"context"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"reflect"
	"runtime"
	"slices"
	"strconv"
	"strings"

	"github.com/alecthomas/kong"

	"pavilight/app/disk"
	"pavilight/app/stock"
	"pavilight/app/sweep"
	"pavilight/facets"
	"pavilight/trace"
)

// sweepFlags make a sweep of a command: many plans and settings, on one machine or many.
type sweepFlags struct {
	More  []string `arg:"" optional:"" name:"more" help:"Further plans and scans: a sweep, with results for each."`
	Over  []string `sep:"none" placeholder:"FLAG=V,..." help:"Sweep over the values of a flag: tilt=0,10,20 or material=quartz,beryl; for a number also tilt=-20..20/5. Given again, all combinations are taken. Semicolons part values that have commas themselves: \"in=air,water;oil\"."`
	List  string   `type:"word" placeholder:"FILE" help:"Sweep over the lines of a file, each with what would stand after the command: a plan, flags, --over. Flags beside --list hold for all lines."`
	Shard string   `type:"word" placeholder:"K/N" help:"Do part K of N of a sweep, K from 1, and write it under --out. Parts may run on any machines, in any order, more than once; what was stopped goes on."`
	Merge string   `type:"word" placeholder:"DIR" help:"Put the parts of a sweep in this folder together; the results are the same bytes for any N."`
	CSV   bool     `name:"csv" help:"Print the results as CSV."`
	Mixed bool     `help:"With --merge, take parts from different builds of the program or kinds of processor, whose last digits may differ."`
}

// asked reports whether the flags make a sweep.
func (f *sweepFlags) asked() bool {
	return len(f.More) > 0 || len(f.Over) > 0 || f.List != "" || f.Shard != "" || f.Merge != "" || f.Mixed
}

// sweeping is a sweep that was asked for.
type sweeping struct {
	call
	parser  *kong.Kong
	line    *line
	verb    string
	flags   sweepFlags
	plan    string   // the first of the command line
	given   []string // its flags that hold for every job
	out     string
	workers int

	materials string            // file of the user's own materials, "" for none
	digests   map[string]string // of files that were read, by path
	jobs      []sweep.Job
	words     [][]string // that make each job
}

// newSweeping returns the sweep that the command line asks for, nil where it asks for none.
func newSweeping(c call, parser *kong.Kong, l *line, k *kong.Context) *sweeping {
	s := &sweeping{call: c, parser: parser, line: l, verb: k.Selected().Name, materials: materialsFile(l.Materials), digests: map[string]string{}}
	subject, flags := s.parsed()
	if flags == nil || !flags.asked() && !(s.verb == "look" && flags.CSV) { // one look as CSV is a sweep of one
		return nil
	}
	s.flags, s.plan, s.given = *flags, subject.Plan, givenWords(k)
	switch s.verb {
	case "look":
		s.out, s.workers = l.Look.Out, l.Look.Workers
	case "tune":
		s.out, s.workers = l.Tune.Out, l.Tune.Workers
	}
	return s
}

// materialsFile returns the file of the user's own materials, "" where there is none.
func materialsFile(named string) string {
	if named != "" {
		return named
	}
	own := stock.OwnFile()
	if _, err := os.Stat(own); err != nil {
		return ""
	}
	return own
}

// parsed returns the flags of the verb that were parsed last; nil for a verb that makes
// no sweeps.
func (s *sweeping) parsed() (*subjectFlags, *sweepFlags) {
	switch s.verb {
	case "look":
		return &s.line.Look.subjectFlags, &s.line.Look.sweepFlags
	case "tune":
		return &s.line.Tune.subjectFlags, &s.line.Tune.sweepFlags
	}
	return nil, nil
}

// ofTheSweep reports whether a flag is about the sweep as a whole and no setting of a job.
func ofTheSweep(name string) bool {
	return slices.Contains([]string{"help", "json", "csv", "materials", "workers", "out", "keep", "write",
		"over", "list", "shard", "merge", "mixed"}, name)
}

// run does what the flags ask for.
func (s *sweeping) run() error {
	if err := s.consistent(); err != nil {
		return err
	}
	if s.flags.Merge != "" {
		return s.merge()
	}
	shard := sweep.Whole
	if s.flags.Shard != "" {
		var err error
		if shard, err = sweep.ParseShard(s.flags.Shard); err != nil {
			return commandFaultf("--shard %w", err)
		}
	}
	if err := s.expand(); err != nil {
		return err
	}
	program, err := programDigest()
	if err != nil {
		return ownFault(err)
	}
	identity, err := sweep.NewIdentity(s.verb, s.jobs, program, runtime.GOARCH+", "+trace.Kernel())
	if err != nil {
		return err
	}
	if s.out != "" {
		if _, err := openOut(s.out); err != nil {
			return err
		}
	}
	return s.do(identity, shard)
}

// consistent refuses flags that do not go together.
func (s *sweeping) consistent() error {
	f := &s.flags
	kept := ""
	if s.verb == "tune" && s.line.Tune.Keep != "" {
		kept = "--keep"
	} else if s.verb == "tune" && s.line.Tune.Write != "" {
		kept = "--write"
	}
	switch {
	case kept != "":
		return commandFaultf("%s names one file, and a sweep has many jobs; a sweep keeps what it has done by itself under --out", kept)
	case f.Merge != "" && (s.plan != "" || len(f.Over) > 0 || f.List != "" || f.Shard != "" || len(s.given) > 0):
		return commandFaultf("--merge takes all from the parts in its folder; leave out plans and other flags than --out, --json and --mixed")
	case f.Mixed && f.Merge == "":
		return commandFaultf("--mixed belongs to --merge")
	case f.List != "" && s.plan != "":
		return commandFaultf("a PLAN and --list are two sources of jobs; leave one out")
	case f.Shard != "" && s.out == "":
		return commandFaultf("--shard writes a file for --merge to read: name its folder by --out DIR")
	}
	return nil
}

// expand makes the jobs.
func (s *sweeping) expand() error {
	base := slices.Clone(s.given)
	for _, over := range s.flags.Over {
		base = append(base, "--over="+over)
	}
	if s.flags.List == "" {
		words := base
		if s.plan != "" {
			words = append(append(words, s.plan), s.flags.More...)
		}
		if err := s.expandLine(words); err != nil {
			return commandFault(err)
		}
		return nil
	}
	lines, err := sweep.OpenList(s.flags.List)
	var p *os.PathError
	if errors.As(err, &p) {
		return inputFault(fmt.Errorf("--list %s: the file cannot be read: %w; check the name and the folder", s.flags.List, p.Err))
	}
	if err != nil {
		return inputFault(err)
	}
	const most = 20 // faults that are told at once
	var faults []error
	for _, l := range lines {
		if err := s.expandLine(append(slices.Clone(base), l.Words...)); err != nil {
			faults = append(faults, fmt.Errorf("%s:%d: %w", s.flags.List, l.Number, err))
		}
		if len(faults) == most {
			faults = append(faults, errors.New("and perhaps more"))
			break
		}
	}
	if len(faults) > 0 {
		return inputFault(errors.Join(faults...))
	}
	return nil
}

// expandLine makes the jobs of one line: each plan with each combination of settings.
func (s *sweeping) expandLine(words []string) error {
	k, err := s.parse(words)
	if errors.Is(err, errAnswered) {
		return errors.New("--help and --version are no jobs; write them on a command line of their own")
	}
	if err != nil {
		return err
	}
	subject, flags := s.parsed()
	plans := append([]string{subject.Plan}, flags.More...)
	for _, p := range k.Path {
		if p.Flag != nil && ofTheSweep(p.Flag.Name) && p.Flag.Name != "over" {
			return fmt.Errorf("--%s is for the sweep as a whole; write it on the command line", p.Flag.Name)
		}
	}
	var overs []sweep.Over
	for _, text := range flags.Over {
		o, err := sweep.ParseOver(text, func(name string) bool { return isNumber(flagNamed(k, name)) })
		if err != nil {
			return err
		}
		f := flagNamed(k, o.Name)
		switch {
		case f == nil:
			return fmt.Errorf("--over %q: %s has no flag --%s", text, s.verb, o.Name)
		case ofTheSweep(o.Name):
			return fmt.Errorf("--over %q: --%s is no setting that results depend on", text, o.Name)
		case slices.ContainsFunc(overs, func(other sweep.Over) bool { return other.Name == o.Name }):
			return fmt.Errorf("--over %s stands there twice; write all its values behind one", o.Name)
		}
		overs = append(overs, o)
	}
	given := givenWords(k)
	all, shown := settingsOf(k)
	values := make([]map[string]any, len(overs)) // what each word of a flag stands for
	for i, o := range overs {
		values[i] = map[string]any{}
		for _, word := range o.Values {
			k, err := s.parse(append(slices.Clone(given), "--"+o.Name+"="+word))
			if err != nil {
				return err
			}
			values[i][word] = flagNamed(k, o.Name).Target.Interface()
		}
	}
	for _, plan := range plans {
		for _, combination := range sweep.Product(overs) {
			job := slices.Clone(given)
			if plan != "" {
				job = append(job, plan)
			}
			for i, word := range combination {
				job = append(job, "--"+overs[i].Name+"="+word)
				all[overs[i].Name], shown[overs[i].Name] = values[i][word], values[i][word]
			}
			if err := s.add(plan, job, all, shown); err != nil {
				return err
			}
		}
	}
	return nil
}

// settingsOf returns the value of every flag that results depend on, and those that were
// given.
func settingsOf(k *kong.Context) (all, given map[string]any) {
	all, given = map[string]any{}, map[string]any{}
	for _, f := range k.Selected().Flags {
		if !ofTheSweep(f.Name) {
			all[f.Name] = f.Target.Interface()
		}
	}
	for _, p := range k.Path {
		if p.Flag != nil && !ofTheSweep(p.Flag.Name) {
			given[p.Flag.Name] = p.Flag.Target.Interface()
		}
	}
	return all, given
}

// add adds a job: its plan, the words that make it, all its settings, and those that
// were given.
func (s *sweeping) add(plan string, words []string, all, given map[string]any) error {
	if len(s.jobs) == sweep.MostJobs {
		return fmt.Errorf("more than %d jobs; cut the list into several sweeps", sweep.MostJobs)
	}
	settings, err := json.Marshal(given)
	if err != nil {
		return err
	}
	files := map[string]string{}
	if plan == "" {
		files["stone"] = "bundled" // or proportions, which are settings
	}
	for role, path := range s.inputs(plan, all) {
		files[role] = s.fileDigest(path)
	}
	key, err := sweep.Key(s.verb, all, files)
	if err != nil {
		return err
	}
	s.jobs = append(s.jobs, sweep.Job{File: plan, Settings: settings, Key: key})
	s.words = append(s.words, words)
	return nil
}

func (s *sweeping) parse(words []string) (*kong.Context, error) {
	return s.parser.Parse(append([]string{s.verb}, words...))
}

// flagNamed returns a flag of the command that was parsed, nil for none.
func flagNamed(k *kong.Context, name string) *kong.Flag {
	for _, f := range k.Selected().Flags {
		if f.Name == name {
			return f
		}
	}
	return nil
}

func isNumber(f *kong.Flag) bool {
	return f != nil && slices.Contains([]reflect.Kind{reflect.Float64, reflect.Int, reflect.Uint64}, f.Target.Kind())
}

// givenWords returns the flags that were given and are settings of jobs, as words.
func givenWords(k *kong.Context) (words []string) {
	seen := map[string]bool{}
	for _, p := range k.Path {
		if p.Flag == nil || ofTheSweep(p.Flag.Name) || seen[p.Flag.Name] {
			continue
		}
		seen[p.Flag.Name] = true
		values := []string{fmt.Sprint(p.Flag.Target.Interface())}
		switch v := p.Flag.Target.Interface().(type) {
		case float64:
			values[0] = strconv.FormatFloat(v, 'g', -1, 64)
		case []string:
			values = v
		}
		for _, v := range values {
			words = append(words, "--"+p.Flag.Name+"="+v)
		}
	}
	return words
}

// inputs returns the files that a job reads, by the part they play.
func (s *sweeping) inputs(plan string, settings map[string]any) map[string]string {
	files := map[string]string{}
	if plan != "" {
		files["stone"] = plan
	}
	if s.materials != "" {
		files["materials"] = s.materials
	}
	light, _ := settings["light"].(string)
	lights := []string{light}
	if s.verb == "tune" {
		lights = splitList(light)
	}
	for i, name := range lights {
		if strings.HasSuffix(strings.ToLower(name), ".hdr") {
			files[fmt.Sprint("light ", i+1)] = name
		}
	}
	rough, _ := settings["rough"].(string)
	if path := roughFile(plan, rough); path != "" {
		files["rough"] = path
	}
	return files
}

// roughFile returns the scan of the rough that tune looks for stones in, "" for none.
func roughFile(plan, rough string) string {
	if rough == "" {
		return ""
	}
	var p *facets.Plan
	if plan != "" {
		p, _ = facets.OpenPlan(plan) // faults are the job's to tell
	}
	ref, folder, err := (&tuneLimits{Rough: rough}).roughRef(p)
	switch {
	case err != nil || ref.File == "":
		return ""
	case filepath.IsAbs(ref.File):
		return ref.File
	}
	return filepath.Join(folder, ref.File)
}

// fileDigest returns the digest of a file, read once, and a word where there is none.
func (s *sweeping) fileDigest(path string) string {
	if d, ok := s.digests[path]; ok {
		return d
	}
	d, err := hashFile(path)
	if err != nil {
		d = "none" // the job will say why
	}
	s.digests[path] = d
	return d
}

// hashFile returns the SHA-256 of an ordinary file.
func hashFile(path string) (string, error) {
	info, err := os.Stat(path)
	if err != nil {
		return "", err
	}
	if !info.Mode().IsRegular() {
		return "", fmt.Errorf("%s is no ordinary file", path)
	}
	f, err := os.Open(path)
	if err != nil {
		return "", err
	}
	defer f.Close()
	h := sha256.New()
	if _, err := io.Copy(h, f); err != nil {
		return "", err
	}
	return hex.EncodeToString(h.Sum(nil)), nil
}

// programDigest tells this build of the program from others.
func programDigest() (string, error) {
	path, err := os.Executable()
	if err != nil {
		return "", fmt.Errorf("the program cannot find its own file: %w", err)
	}
	d, err := hashFile(path)
	if err != nil {
		return "", fmt.Errorf("the program cannot read its own file: %w", err)
	}
	return d[:32], nil
}

// do does a shard's jobs and hands on what comes of them.
func (s *sweeping) do(identity sweep.Identity, shard sweep.Shard) error {
	bar := s.progress()
	done, of := 0, 0
	run := &sweep.Run{Identity: identity, Jobs: s.jobs, Shard: shard, Do: s.job, Report: func(d, n int) {
		if done, of = d, n; n > 0 {
			bar.show(float64(d) / float64(n))
		}
	}}
	if s.out != "" {
		run.Path, run.Results = filepath.Join(s.out, resultLines), s.flags.Shard == ""
		if !run.Results {
			run.Path = filepath.Join(s.out, shard.Name())
		}
	}
	results, err := run.Go(s)
	bar.clear()
	if s.Err() != nil && s.out != "" {
		s.warn("%d of %d jobs are done and kept; the same command goes on from there", done, of)
	}
	if err != nil {
		return s.sweepFault(err)
	}
	if s.flags.Shard != "" {
		return s.told(results, run.Path)
	}
	return s.deliver(results)
}

// job does one job.
func (s *sweeping) job(ctx context.Context, place int) (out sweep.Outcome, err error) {
	words := append(slices.Clone(s.words[place]), "--workers="+strconv.Itoa(s.workers))
	k, err := s.parse(words)
	if err != nil {
		return out, err
	}
	var text, notes bytes.Buffer
	c := s.call
	c.out, c.json, c.inSweep = &text, true, true
	c.env.Stdout, c.env.Stderr, c.env.Terminal = io.Discard, &notes, false
	failed := runJob(k, c)
	if ctx.Err() != nil {
		return out, context.Cause(ctx)
	}
	all, _ := settingsOf(k)
	for role, path := range s.inputs(s.jobs[place].File, all) {
		if now, err := hashFile(path); err == nil && now != s.fileDigest(path) || err != nil && s.fileDigest(path) != "none" {
			return out, inputFault(fmt.Errorf("%s (the %s of job %d) changed while the sweep ran; leave it alone and run the same command again",
				path, role, place+1))
		}
	}
	for line := range strings.Lines(notes.String()) {
		out.Notes = append(out.Notes, strings.TrimPrefix(strings.TrimSpace(line), "pavilight: "))
	}
	if failed != nil {
		out.Error = failed.Error()
		return out, nil
	}
	out.Result = text.Bytes()
	return out, nil
}

// runJob runs a command; a panic of it becomes an error.
func runJob(k *kong.Context, c call) (err error) {
	defer func() {
		if r := recover(); r != nil {
			err = fmt.Errorf("this is a fault of the program, not yours: %v", r)
		}
	}()
	return k.Run(c)
}

// sweepFault says whose fault an error of a sweep is.
func (s *sweeping) sweepFault(err error) error {
	var told *fault
	var taken *sweep.TakenError
	var parts *sweep.MergeError
	switch {
	case errors.As(err, &told), s.Err() != nil:
		return err
	case errors.As(err, &taken):
		return commandFault(err)
	case errors.As(err, &parts):
		return inputFault(err)
	}
	return ownFault(err)
}

// merge puts shards together.
func (s *sweeping) merge() error {
	results, notes, err := sweep.Merge(s.flags.Merge, s.flags.Mixed)
	for _, n := range notes {
		s.warn("%s", n)
	}
	var p *os.PathError
	if errors.As(err, &p) {
		return inputFault(fmt.Errorf("--merge %s: the folder cannot be read: %w", s.flags.Merge, p.Err))
	}
	if err != nil {
		return s.sweepFault(err)
	}
	if results.Identity.Verb != s.verb {
		return commandFaultf("%s holds a sweep of %s; say pavilight %s --merge %s", s.flags.Merge, results.Identity.Verb,
			results.Identity.Verb, s.flags.Merge)
	}
	if s.out == "" {
		return s.deliver(results)
	}
	if _, err := openOut(s.out); err != nil {
		return err
	}
	if err := results.Save(filepath.Join(s.out, resultLines)); err != nil {
		return s.sweepFault(err)
	}
	return s.deliver(results)
}

// The files of results.
const (
	resultLines = "results.jsonl"
	resultTable = "results.csv"
)

// deliver prints the results of a whole sweep, or writes the table beside the lines that
// are written already.
func (s *sweeping) deliver(results *sweep.Results) error {
	if s.out == "" {
		write := func(w io.Writer) error { return s.print(w, results) }
		switch {
		case s.json:
			write = results.WriteLines
		case s.flags.CSV:
			write = results.WriteTable
		}
		if err := write(s.env.Stdout); err != nil { // printed even where jobs failed
			return ownFault(fmt.Errorf("the results cannot be written: %w", err))
		}
		return failures(results)
	}
	table := filepath.Join(s.out, resultTable)
	if err := disk.Replace(table, results.WriteTable); err != nil {
		return ownFault(err)
	}
	return s.told(results, filepath.Join(s.out, resultLines), table)
}

// told tells what was written, and what failed.
func (s *sweeping) told(results *sweep.Results, paths ...string) error {
	failed := len(results.Failed())
	var err error
	if s.json {
		err = printJSON(s.env.Stdout, struct {
			Jobs    int      `json:"jobs"`
			Failed  int      `json:"failed"`
			Written []string `json:"written"`
		}{results.Len(), failed, paths})
	} else {
		_, err = fmt.Fprintf(s.env.Stdout, "%d jobs, %d failed. Written: %s\n", results.Len(), failed, strings.Join(paths, " "))
	}
	if err != nil {
		return ownFault(fmt.Errorf("the results cannot be written: %w", err))
	}
	return failures(results)
}

// failures tells which jobs failed.
func failures(results *sweep.Results) error {
	const most = 10 // that are named
	failed := results.Failed()
	if len(failed) == 0 {
		return nil
	}
	var words []string
	for _, r := range failed[:min(most, len(failed))] {
		first, _, _ := strings.Cut(r.Error, "\n")
		words = append(words, fmt.Sprintf("job %d: %s", r.Job, first))
	}
	count := len(failed)
	if count > most {
		words = append(words, fmt.Sprintf("and %d more", count-most))
	}
	return inputFault(fmt.Errorf("%d of %d jobs failed; their rows say why\n%s", count, results.Len(), strings.Join(words, "\n")))
}
