package model

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"syscall"
	"time"

	"pavilight/app/disk"
	"pavilight/facets"
)

// Recovery keeps unsaved work in a folder of the program's own, a file for each
// running program, so that a crash or a power cut loses no more than the last half
// minute.
type Recovery struct {
	folder string
	own    string // this program's file
}

// Recovered is unsaved work that an earlier run of the program left behind.
type Recovered struct {
	Plan  *facets.Plan
	Path  string // of the file that it belongs to; empty for none
	Saved time.Time

	file string
}

// kept is what a recovery file holds.
type kept struct {
	Path string `json:"path"`
	Plan string `json:"plan"` // the text of a plan file
}

// NewRecovery keeps work in the folder, which is made when it is first needed.
func NewRecovery(folder string) *Recovery {
	return &Recovery{folder, filepath.Join(folder, fmt.Sprintf("unsaved-%d.json", os.Getpid()))}
}

// Keep keeps the plan. It may run on any goroutine, one call at a time.
func (r *Recovery) Keep(plan *facets.Plan, path string) error {
	var text bytes.Buffer
	if err := plan.Write(&text); err != nil {
		return err
	}
	content, err := json.Marshal(kept{path, text.String()})
	if err != nil {
		return err
	}
	if err := os.MkdirAll(r.folder, 0o700); err != nil {
		return disk.InWords(r.own, err)
	}
	return disk.Replace(r.own, func(w io.Writer) error { _, err := w.Write(content); return err })
}

// Drop forgets what this program kept: the work is saved, or is not wanted.
func (r *Recovery) Drop() { os.Remove(r.own) }

// Find returns what programs that run no more left behind, newest first. A file
// that cannot be read is set aside, and the error says where it lies.
func (r *Recovery) Find() ([]Recovered, error) {
	files, err := filepath.Glob(filepath.Join(r.folder, "unsaved-*.json"))
	if err != nil {
		return nil, err
	}
	var found []Recovered
	var faults []error
	for _, file := range files {
		if file == r.own || stillRuns(file) {
			continue
		}
		work, err := readKept(file)
		if err != nil {
			aside := strings.TrimSuffix(file, ".json") + ".damaged"
			if os.Rename(file, aside) != nil {
				aside = file
			}
			faults = append(faults, fmt.Errorf("unsaved work of an earlier run cannot be read (%w); the file lies at %s", err, aside))
			continue
		}
		found = append(found, work)
	}
	slices.SortFunc(found, func(a, b Recovered) int { return b.Saved.Compare(a.Saved) })
	return found, errors.Join(faults...)
}

// Discard forgets work that was found.
func (r *Recovery) Discard(work Recovered) { os.Remove(work.file) }

// mostKept bounds what is read: a plan file in JSON's quoting.
const mostKept = 4 * facets.MaxPlanBytes

func readKept(file string) (Recovered, error) {
	info, err := os.Stat(file)
	if err != nil {
		return Recovered{}, err
	}
	if info.Size() > mostKept {
		return Recovered{}, fmt.Errorf("it holds %d bytes, more than any plan", info.Size())
	}
	content, err := os.ReadFile(file)
	if err != nil {
		return Recovered{}, err
	}
	var k kept
	if err := json.Unmarshal(content, &k); err != nil {
		return Recovered{}, err
	}
	name := "unsaved plan"
	if k.Path != "" {
		name = filepath.Base(k.Path)
	}
	plan, err := facets.ReadPlan(strings.NewReader(k.Plan), name)
	if err != nil {
		return Recovered{}, err
	}
	return Recovered{Plan: plan, Path: k.Path, Saved: info.ModTime(), file: file}, nil
}

// stillRuns reports whether the program that keeps the file is running.
func stillRuns(file string) bool {
	number := strings.TrimSuffix(strings.TrimPrefix(filepath.Base(file), "unsaved-"), ".json")
	pid, err := strconv.Atoi(number)
	if err != nil || pid <= 0 {
		return false
	}
	process, err := os.FindProcess(pid)
	if err != nil {
		return false
	}
	defer process.Release()
	if runtime.GOOS == "windows" {
		return true // it was found; there is no signal to ask with
	}
	err = process.Signal(syscall.Signal(0))
	return err == nil || errors.Is(err, syscall.EPERM)
}

// Recover puts unsaved work of an earlier run on the bench.
func (b *Bench) Recover(work Recovered) { b.put(recovered(work.Plan, work.Path)) }
