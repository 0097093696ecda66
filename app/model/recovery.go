package model

import (
	"bytes"
	"cmp"
	"crypto/rand"
	"crypto/sha256"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"sync"
	"sync/atomic"
	"time"

	"pavilight/app/disk"
	"pavilight/app/words"
	"pavilight/facets"
)

// Recovery keeps unsaved work in a folder of the program's own, a file for each
// running program, so that a crash or a power cut loses no more than the last half
// minute. What a program keeps is marked by a lock that ends with it, however it ends.
// A nil Recovery keeps nothing.
type Recovery struct {
	folder string
	own    string // this program's file
	turns  atomic.Uint64

	mu    sync.Mutex
	turn  uint64     // of the last Keep or Drop
	mark  *disk.Lock // while this program may have kept work
	found map[string]*disk.Lock
}

// Work is a plan with the file that it belongs to.
type Work struct {
	Plan  *facets.Plan
	Path  string     // empty for a plan without a file
	Known disk.Stamp // what that file held when it was last read or written
}

// Work returns the document's plan as it is now.
func (d *Document) Work() Work { return Work{d.Plan(), d.Path, d.known} }

// Recovered is unsaved work that an earlier run of the program left behind.
type Recovered struct {
	Work
	Saved   time.Time // by the clock of its day
	Changed bool      // its file was written to since

	sequence uint64
	file     string
}

// kept is what a recovery file holds.
type kept struct {
	Sequence uint64     `json:"sequence"` // grows over all programs: no clock is asked which work is newer
	Path     string     `json:"path"`
	Known    disk.Stamp `json:"known"`
	Plan     string     `json:"plan"` // the text of a plan file
}

// NewRecovery keeps work in the folder, which is made when it is first needed.
func NewRecovery(folder string) *Recovery {
	name := strings.ToLower(rand.Text()[:16])
	return &Recovery{folder: folder, own: filepath.Join(folder, "unsaved-"+name+".json"), found: map[string]*disk.Lock{}}
}

// Turn numbers what is to be kept or dropped in the order in which it was decided, on
// whatever goroutine it is carried out.
func (r *Recovery) Turn() uint64 {
	if r == nil {
		return 0
	}
	return r.turns.Add(1)
}

// Keep keeps the work, unless something was kept or dropped at a later turn already. It
// may run on any goroutine.
func (r *Recovery) Keep(turn uint64, work Work) error {
	if r == nil {
		return nil
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	if turn < r.turn {
		return nil
	}
	var text bytes.Buffer
	if err := work.Plan.Write(&text); err != nil {
		return err
	}
	if err := os.MkdirAll(r.folder, 0o700); err != nil {
		return disk.InWords(r.own, err)
	}
	if r.mark == nil {
		mark, err := disk.Claim(markOf(r.own))
		if err != nil {
			return err
		}
		r.mark = mark
	}
	content, err := json.Marshal(kept{r.last() + 1, work.Path, work.Known, text.String()})
	if err != nil {
		return err
	}
	if err := disk.Replace(r.own, func(w io.Writer) error { _, err := w.Write(content); return err }); err != nil {
		return err
	}
	r.turn = turn
	return nil
}

// markOf returns the name of the lock beside a recovery file.
func markOf(file string) string { return strings.TrimSuffix(file, ".json") + ".lock" }

// noSequence is more than any program counts up to: the file is damaged.
const noSequence = 1 << 60

// last returns the highest sequence number of all that is kept.
func (r *Recovery) last() (last uint64) {
	for _, file := range r.files() {
		if k, _, err := readKept(file); err == nil && k.Sequence < noSequence {
			last = max(last, k.Sequence)
		}
	}
	return last
}

func (r *Recovery) files() []string {
	files, _ := filepath.Glob(filepath.Join(r.folder, "unsaved-*.json")) // the pattern is a good one
	return files
}

// Drop forgets what this program kept: the work is saved, or is not wanted. What was kept
// at a later turn stays.
func (r *Recovery) Drop(turn uint64) {
	if r == nil {
		return
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	if turn < r.turn {
		return
	}
	r.turn = turn
	os.Remove(r.own)
}

// Close ends the program's part in the folder. What it kept is offered from now on.
func (r *Recovery) Close() {
	if r == nil {
		return
	}
	r.mu.Lock()
	defer r.mu.Unlock()
	r.mark.Release()
	r.mark = nil
	for file, lock := range r.found {
		lock.Release()
		delete(r.found, file)
	}
}

// Find returns what programs that run no more left behind, newest first, and keeps it
// from being offered by another program until Close. Work that is in its file after all,
// as after a kill between saving and forgetting, is forgotten. A file that cannot be read
// is set aside, and the error says where it lies.
func (r *Recovery) Find() ([]Recovered, error) {
	r.mu.Lock()
	defer r.mu.Unlock()
	disk.Sweep(r.folder)
	var found []Recovered
	var faults []error
	for _, file := range r.files() {
		if file == r.own || !r.take(file) {
			continue
		}
		work, err := readRecovered(file)
		switch {
		case err != nil:
			aside := strings.TrimSuffix(file, ".json") + ".damaged"
			if os.Rename(file, aside) != nil {
				aside = file
			}
			r.release(file)
			faults = append(faults, words.Errorf("unsaved work of an earlier run cannot be read (%v); the file lies at %s", err, aside))
		case work == nil:
			os.Remove(file)
			r.release(file)
		default:
			found = append(found, *work)
		}
	}
	r.sweepMarks()
	slices.SortFunc(found, func(a, b Recovered) int {
		return cmp.Or(cmp.Compare(b.sequence, a.sequence), b.Saved.Compare(a.Saved))
	})
	return found, errors.Join(faults...)
}

// take claims a file whose program has ended; false if it runs, or another offers it.
func (r *Recovery) take(file string) bool {
	if r.found[file] != nil {
		return true
	}
	lock, err := disk.Claim(markOf(file))
	if err != nil {
		return !errors.Is(err, disk.ErrHeld) // no lock can be made: it is better offered twice than not
	}
	if _, err := os.Stat(file); err != nil {
		lock.Release() // another program has just dealt with it
		return false
	}
	r.found[file] = lock
	return true
}

func (r *Recovery) release(file string) {
	r.found[file].Release()
	delete(r.found, file)
}

// sweepMarks removes the marks of programs that ended and left nothing behind.
func (r *Recovery) sweepMarks() {
	marks, _ := filepath.Glob(filepath.Join(r.folder, "*.lock")) // the pattern is a good one
	for _, mark := range marks {
		if _, err := os.Stat(strings.TrimSuffix(mark, ".lock") + ".json"); err == nil {
			continue
		}
		if lock, err := disk.Claim(mark); err == nil {
			lock.Release()
		}
	}
}

// Discard forgets work that was found.
func (r *Recovery) Discard(work Recovered) {
	r.mu.Lock()
	defer r.mu.Unlock()
	os.Remove(work.file)
	r.release(work.file)
}

// mostKept bounds what is read: a plan file in JSON's quoting.
const mostKept = 4 * facets.MaxPlanBytes

func readKept(file string) (k kept, saved time.Time, err error) {
	info, err := os.Stat(file)
	if err != nil {
		return k, saved, err
	}
	if info.Size() > mostKept {
		return k, saved, words.Errorf("it holds %d bytes, more than any plan", info.Size())
	}
	content, err := os.ReadFile(file)
	if err == nil {
		err = json.Unmarshal(content, &k)
	}
	return k, info.ModTime(), err
}

// readRecovered reads kept work, nil if its file holds it.
func readRecovered(file string) (*Recovered, error) {
	k, saved, err := readKept(file)
	if err != nil {
		return nil, err
	}
	name := "unsaved plan"
	if k.Path != "" {
		name = filepath.Base(k.Path)
	}
	plan, err := facets.ReadPlan(strings.NewReader(k.Plan), name)
	if err != nil {
		return nil, err
	}
	now := disk.StampOf(k.Path)
	if now == disk.StampOfText(k.Plan) {
		return nil, nil
	}
	changed := now != k.Known && !now.Absent() && !now.Unreachable()
	return &Recovered{Work{plan, k.Path, k.Known}, saved, changed, k.Sequence, file}, nil
}

// Recover puts unsaved work of an earlier run on the bench.
func (b *Bench) Recover(work Recovered) { b.put(newDocument(work.Plan, work.Path, work.Known, false)) }

// Claims tells the windows of the program which files are open in them.
type Claims struct {
	folder string

	mu   sync.Mutex
	path string
	lock *disk.Lock
}

// NewClaims keeps claims in the folder, which is made when it is first needed.
func NewClaims(folder string) *Claims { return &Claims{folder: folder} }

// Take claims the file at path for this window, in place of the one that it had claimed,
// and reports whether another window has it open. It may run on any goroutine, and takes
// as long as the file's drive takes to answer. A nil Claims claims nothing.
func (c *Claims) Take(path string) (elsewhere bool) {
	if c == nil {
		return false
	}
	whole := path
	if resolved, err := filepath.EvalSymlinks(path); err == nil {
		whole = resolved
	}
	c.mu.Lock()
	defer c.mu.Unlock()
	if path == c.path && c.lock != nil {
		return false
	}
	c.lock.Release()
	c.path, c.lock = path, nil
	if path == "" {
		return false
	}
	if os.MkdirAll(c.folder, 0o700) != nil {
		return false
	}
	var err error
	c.lock, err = disk.Claim(filepath.Join(c.folder, fmt.Sprintf("open-%x.lock", sha256.Sum256([]byte(whole)))))
	return errors.Is(err, disk.ErrHeld)
}

// Release gives the claim up.
func (c *Claims) Release() { c.Take("") }
