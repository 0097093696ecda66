package sweep

import (
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"

	"pavilight/app/disk"
)

// Outcome is what became of a job: a result, or an error in words.
type Outcome struct {
	Notes  []string
	Error  string
	Result []byte // JSON
}

// Run is one shard of a sweep on this machine.
type Run struct {
	Identity Identity
	Jobs     []Job // of the whole sweep
	Shard    Shard

	// Path is the file that the rows go to; "" keeps them in memory alone. A run that
	// was stopped, or killed, goes on from the files beside it that hold what was done.
	Path string
	// Results says that the file is of the whole sweep, not of a shard.
	Results bool
	// Do does the job at a place of Jobs. An error of it ends the run.
	Do func(ctx context.Context, place int) (Outcome, error)
	// Report is told how many of the shard's jobs are done.
	Report func(done, of int)
}

// TakenError tells that a file is in the way.
type TakenError struct {
	Path string
	Why  string
}

func (e *TakenError) Error() string {
	return fmt.Sprintf("%s is there already and %s; choose another folder with --out, or move it away", e.Path, e.Why)
}

// Go does the jobs that are not done yet, writes the file and returns the rows. Rows
// that failed are done again. It stops after the job in hand when ctx is cancelled.
func (r *Run) Go(ctx context.Context) (*Results, error) {
	head := header{Identity: r.Identity}
	if !r.Results {
		head.Shard, head.Of = r.Shard.Number, r.Shard.Of
	}
	done, err := r.done(head)
	if err != nil {
		return nil, err
	}
	mine := r.Shard.Deal(r.Jobs)
	notes, err := r.notebook(head)
	if err != nil {
		return nil, err
	}
	defer notes.close()
	rows := make([]line, 0, len(mine))
	for i, place := range mine {
		r.Report(i, len(mine))
		job := &r.Jobs[place]
		if old, ok := done[place+1]; ok && old.Key == job.Key {
			rows = append(rows, old)
			continue
		}
		out, err := r.Do(ctx, place)
		if err != nil {
			return nil, err
		}
		l, err := newLine(Row{Job: place + 1, File: job.File, Settings: job.Settings, Key: job.Key,
			Notes: out.Notes, Error: out.Error, Result: out.Result})
		if err != nil {
			return nil, err
		}
		if err := notes.note(l.text); err != nil {
			return nil, err
		}
		rows = append(rows, l)
	}
	r.Report(len(mine), len(mine))
	if r.Path != "" {
		if err := write(r.Path, head, rows); err != nil {
			return nil, err
		}
		notes.close() // not every system removes what is open
		r.clear(head)
	}
	return &Results{Identity: r.Identity, lines: rows}, nil
}

// done returns the rows that an earlier run left, by the number of the job.
func (r *Run) done(head header) (map[int]line, error) {
	rows := map[int]line{}
	if r.Path == "" {
		return rows, nil
	}
	take := func(lines []line) {
		for _, l := range lines {
			if l.Error == "" {
				rows[l.Job] = l
			}
		}
	}
	old, lines, err := open(r.Path)
	switch {
	case errors.Is(err, fs.ErrNotExist), errors.Is(err, errDamaged):
	case errors.Is(err, errForeign):
		return nil, &TakenError{r.Path, "holds something else"}
	case err != nil:
		return nil, err
	case !old.sameJobs(head.Identity):
		return nil, &TakenError{r.Path, "is of another sweep: of another list, other plans or other settings"}
	case !old.sameMakers(head.Identity):
		return nil, &TakenError{r.Path, "was made by another build of the program or another kind of processor"}
	default:
		take(lines)
	}
	for _, path := range r.parts() {
		if part, lines, err := open(path); err == nil && part.same(head) {
			take(lines)
		}
	}
	return rows, nil
}

// same reports whether both are of the same part of the same sweep, by the same makers.
func (a header) same(b header) bool {
	return a.sameJobs(b.Identity) && a.sameMakers(b.Identity) && a.Shard == b.Shard && a.Of == b.Of
}

// parts returns the files in which runs of this shard note what they have done.
func (r *Run) parts() []string {
	folder, base := filepath.Split(r.Path)
	entries, err := os.ReadDir(filepath.Clean(folder))
	if err != nil {
		return nil
	}
	var paths []string
	for _, e := range entries {
		if ok, _ := filepath.Match("."+base+".*.part", e.Name()); ok && e.Type().IsRegular() {
			paths = append(paths, filepath.Join(folder, e.Name()))
		}
	}
	return paths
}

// clear removes the notes of this shard, which is written whole. What stays does no harm.
func (r *Run) clear(head header) {
	for _, path := range r.parts() {
		if part, _, err := open(path); err == nil && part.same(head) {
			os.Remove(path)
		}
	}
}

// notebook is a file in which a run notes each row at once. Each run has its own, so
// that two that do the same shard never write into one.
type notebook struct{ f *os.File }

func (r *Run) notebook(head header) (*notebook, error) {
	if r.Path == "" {
		return &notebook{}, nil
	}
	folder, base := filepath.Split(r.Path)
	f, err := os.CreateTemp(filepath.Clean(folder), "."+base+".*.part")
	if err != nil {
		return nil, disk.InWords(r.Path, err)
	}
	n := &notebook{f}
	first, err := encode(head)
	if err == nil {
		err = n.note(first)
	}
	if err != nil {
		f.Close()
		return nil, err
	}
	return n, nil
}

func (n *notebook) note(text []byte) error {
	if n.f == nil {
		return nil
	}
	if _, err := n.f.Write(text); err != nil {
		return disk.InWords(n.f.Name(), err)
	}
	return nil
}

func (n *notebook) close() {
	if n.f != nil {
		n.f.Close() // twice does no harm
	}
}

// Results are rows in the order of the list.
type Results struct {
	Identity Identity
	lines    []line
}

// Len returns how many rows there are.
func (r *Results) Len() int { return len(r.lines) }

// Row returns the row at a place, from 0.
func (r *Results) Row(i int) (row Row, err error) {
	err = json.Unmarshal(r.lines[i].text, &row)
	return row, err
}

// Failed returns the rows that have an error.
func (r *Results) Failed() (failed []Row) {
	for i := range r.lines {
		if r.lines[i].Error != "" {
			failed = append(failed, r.lines[i].Row)
		}
	}
	return failed
}

// Save writes the results of a whole sweep as JSON lines into the file at path, unless
// that holds something else.
func (r *Results) Save(path string) error {
	whole := &Run{Identity: r.Identity, Path: path, Results: true}
	head := header{Identity: r.Identity}
	if _, err := whole.done(head); err != nil {
		return err
	}
	return write(path, head, r.lines)
}

// WriteLines writes the results of a whole sweep as JSON lines.
func (r *Results) WriteLines(w io.Writer) error {
	first, err := encode(header{Identity: r.Identity, Rows: len(r.lines), Digest: digestOf(r.lines)})
	if err != nil {
		return err
	}
	if _, err := w.Write(first); err != nil {
		return err
	}
	for i := range r.lines {
		if _, err := w.Write(r.lines[i].text); err != nil {
			return err
		}
	}
	return nil
}
