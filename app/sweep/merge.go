package sweep

import (
	"bytes"
	"errors"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
)

// MergeError tells why shards do not make a whole, and what to do.
type MergeError struct{ Words string }

func (e *MergeError) Error() string { return e.Words }

func mergeErrorf(format string, args ...any) error { return &MergeError{fmt.Sprintf(format, args...)} }

// shardFile is a shard that was read.
type shardFile struct {
	name string
	head header
	rows []line
}

// Merge puts the shards in a folder together: whatever their files are called, and each
// as often as it likes so long as it is the same. Notes tell which files were left out.
// Mixed allows shards of several builds of the program and kinds of processor, whose
// numbers may differ in the last places.
func Merge(folder string, mixed bool) (results *Results, notes []string, err error) {
	files, notes, err := shardFiles(folder)
	if err != nil {
		return nil, nil, err
	}
	if len(files) == 0 {
		return nil, notes, mergeErrorf("%s holds no shard of a sweep; run the sweep with --shard 1/N to N/N --out %s first", folder, folder)
	}
	if err := together(files, mixed); err != nil {
		return nil, notes, err
	}
	of := files[0].head.Of
	byNumber := map[int]*shardFile{}
	for i := range files {
		f := &files[i]
		first, twice := byNumber[f.head.Shard]
		if !twice {
			byNumber[f.head.Shard] = f
			continue
		}
		if difference := first.difference(f); difference != "" {
			return nil, notes, mergeErrorf("%s and %s are both shard %d/%d and differ: %s; remove the wrong one, "+
				"or both and run --shard %d/%d again", first.name, f.name, f.head.Shard, of, difference, f.head.Shard, of)
		}
	}
	if missing := missingShards(byNumber, of); missing != "" {
		return nil, notes, mergeErrorf("%s", missing)
	}
	return assembled(byNumber, of, notes)
}

// shardFiles reads the shards in a folder, in the order of their names.
func shardFiles(folder string) (files []shardFile, notes []string, err error) {
	entries, err := os.ReadDir(folder)
	if err != nil {
		return nil, nil, err
	}
	for _, e := range entries {
		name := e.Name()
		if e.IsDir() || strings.HasPrefix(name, ".") || filepath.Ext(name) != ".jsonl" {
			continue
		}
		path := filepath.Join(folder, name)
		if info, err := os.Stat(path); err != nil || !info.Mode().IsRegular() {
			continue
		}
		head, rows, err := open(path)
		switch {
		case err == nil && head.Of > 0 && head.Digest == "":
			err = errDamaged
		case err == nil && head.Of == 0:
			continue // results that were put together earlier
		}
		if err != nil {
			notes = append(notes, fmt.Sprintf("%s is left out: %v", name, err))
			continue
		}
		files = append(files, shardFile{name, head, rows})
	}
	return files, notes, nil
}

// together reports why shards do not belong together.
func together(files []shardFile, mixed bool) error {
	first := &files[0]
	for i := range files {
		f := &files[i]
		switch a, b := first.head, f.head; {
		case a.Verb != b.Verb:
			return mergeErrorf("%s is of a sweep of %s and %s of one of %s; give each sweep a folder of its own", first.name, a.Verb, f.name, b.Verb)
		case !a.sameJobs(b.Identity):
			return mergeErrorf("%s and %s are of different sweeps (%d and %d jobs): the list, a plan or a setting is not the same; "+
				"run the older one again from the same list and plans, or give each sweep a folder of its own", first.name, f.name, a.Jobs, b.Jobs)
		case a.Of != b.Of:
			return mergeErrorf("%s is one of %d shards and %s one of %d; keep the shards of one number only", first.name, a.Of, f.name, b.Of)
		case !mixed && !slices.Equal(a.Kernels, b.Kernels):
			return mergeErrorf("%s was made on %s and %s on %s, and their numbers may differ in the last places; run shard %s again on the same kind "+
				"of machine, or take them as they are with --mixed", first.name, strings.Join(a.Kernels, ", "), f.name, strings.Join(b.Kernels, ", "),
				Shard{b.Shard, b.Of})
		case !mixed && !slices.Equal(a.Programs, b.Programs):
			return mergeErrorf("%s and %s were made by different builds of the program; run shard %s again with the same one, "+
				"or take them as they are with --mixed", first.name, f.name, Shard{b.Shard, b.Of})
		}
	}
	return nil
}

// difference tells the first difference of two files of one shard, "" for none.
func (f *shardFile) difference(g *shardFile) string {
	for i := range f.rows {
		if i >= len(g.rows) || !bytes.Equal(f.rows[i].text, g.rows[i].text) {
			return fmt.Sprintf("first at job %d", f.rows[i].Job)
		}
	}
	if len(g.rows) > len(f.rows) {
		return fmt.Sprintf("first at job %d", g.rows[len(f.rows)].Job)
	}
	return ""
}

// missingShards tells which shards are not there, "" for none.
func missingShards(there map[int]*shardFile, of int) string {
	const most = 20 // that are named
	var names, flags []string
	count := 0
	for k := 1; k <= of; k++ {
		if there[k] != nil {
			continue
		}
		if count++; count <= most {
			names = append(names, fmt.Sprint(k))
			flags = append(flags, "--shard "+Shard{k, of}.String())
		}
	}
	if count == 0 {
		return ""
	}
	more := ""
	if count > most {
		more = fmt.Sprintf(" and %d more", count-most)
	}
	shards, verb := "shard", "is"
	if count > 1 {
		shards, verb = "shards", "are"
	}
	return fmt.Sprintf("%s %s%s of %d %s missing; run again with %s%s", shards, strings.Join(names, ", "), more, of, verb, strings.Join(flags, ", "), more)
}

// assembled returns all rows in the order of the list.
func assembled(shards map[int]*shardFile, of int, notes []string) (*Results, []string, error) {
	r := &Results{Identity: shards[1].head.Identity}
	var programs, kernels []string
	for k := 1; k <= of; k++ {
		r.lines = append(r.lines, shards[k].rows...)
		programs = append(programs, shards[k].head.Programs...)
		kernels = append(kernels, shards[k].head.Kernels...)
	}
	sorted(r.lines)
	slices.Sort(programs)
	slices.Sort(kernels)
	r.Identity.Programs, r.Identity.Kernels = slices.Compact(programs), slices.Compact(kernels)
	jobs := make([]Job, 0, len(r.lines))
	for i := range r.lines {
		l := &r.lines[i]
		jobs = append(jobs, Job{l.File, l.Settings, l.Key})
	}
	check, err := NewIdentity(r.Identity.Verb, jobs, "", "")
	if err != nil || !check.sameJobs(r.Identity) {
		return nil, notes, errors.Join(mergeErrorf("the shards do not hold the jobs that they say they hold; remove them and run all again"), err)
	}
	return r, notes, nil
}
