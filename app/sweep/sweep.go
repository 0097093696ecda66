// Package sweep deals many jobs out to many machines and puts their results together
// again, so that the outcome is the same bytes for any number of shards.
//
// A job is one stone under one set of settings; its key is a digest of all that its
// result depends on. A shard is every job whose rank by key leaves a certain remainder,
// so that who does what depends on the jobs and the number of shards alone. Results are
// JSON lines: a header, then a row a job in the order of the list.
package sweep

import (
	"cmp"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"fmt"
	"slices"
	"strconv"
	"strings"
)

// Form is the version of the files; a file of another form is not read.
const Form = 1

// Bounds of what is read or asked for.
const (
	MostJobs   = 1_000_000
	MostShards = 100_000
)

// Job is one stone under one set of settings.
type Job struct {
	File     string          // the plan or scan as it was written; "" where the settings name the stone
	Settings json.RawMessage // what was asked for, by the name of the flag
	Key      string          // digest of all that the result depends on, by Key
}

// Key returns the digest of what a result depends on: the verb, the value of every
// setting, and the digest of every file that is read, by its role.
func Key(verb string, settings map[string]any, files map[string]string) (string, error) {
	text, err := json.Marshal(struct { // maps are written in the order of their keys
		Form     int
		Verb     string
		Settings map[string]any
		Files    map[string]string
	}{Form, verb, settings, files})
	if err != nil {
		return "", err
	}
	return digest(text), nil
}

// digest returns the first half of the SHA-256 of a text, 32 hexadecimal digits.
func digest(text []byte) string {
	sum := sha256.Sum256(text)
	return hex.EncodeToString(sum[:16])
}

// Identity says which results belong together.
type Identity struct {
	Form     int      `json:"sweep"`
	Verb     string   `json:"verb"`
	Jobs     int      `json:"jobs"`
	List     string   `json:"list"`     // digest of all jobs
	Programs []string `json:"programs"` // digests of the programs that did it
	Kernels  []string `json:"kernels"`  // processors and forms of arithmetic that did it
}

// NewIdentity returns the identity of a sweep over the jobs on this machine.
func NewIdentity(verb string, jobs []Job, program, kernel string) (Identity, error) {
	h := sha256.New()
	for i := range jobs {
		line, err := encode(Row{Job: i + 1, File: jobs[i].File, Settings: jobs[i].Settings, Key: jobs[i].Key})
		if err != nil {
			return Identity{}, err
		}
		h.Write(line)
	}
	return Identity{
		Form: Form, Verb: verb, Jobs: len(jobs), List: hex.EncodeToString(h.Sum(nil)[:16]),
		Programs: []string{program}, Kernels: []string{kernel},
	}, nil
}

// sameJobs reports whether both are about the same jobs, whoever did them.
func (a Identity) sameJobs(b Identity) bool {
	return a.Form == b.Form && a.Verb == b.Verb && a.Jobs == b.Jobs && a.List == b.List
}

// sameMakers reports whether the same program on the same kind of machine did both.
func (a Identity) sameMakers(b Identity) bool {
	return slices.Equal(a.Programs, b.Programs) && slices.Equal(a.Kernels, b.Kernels)
}

// Shard is the part Number, 1 to Of, of a sweep in so many parts.
type Shard struct{ Number, Of int }

// Whole is a sweep in one part.
var Whole = Shard{1, 1}

// ParseShard reads K/N.
func ParseShard(text string) (Shard, error) {
	k, n, ok := strings.Cut(text, "/")
	number, err1 := strconv.Atoi(strings.TrimSpace(k))
	of, err2 := strconv.Atoi(strings.TrimSpace(n))
	if !ok || err1 != nil || err2 != nil || of < 1 || of > MostShards || number < 1 || number > of {
		return Shard{}, fmt.Errorf("%q is no shard; write K/N with K from 1 to N and N to %d, such as 2/7 "+
			"(add 1 to a number that counts from 0)", text, MostShards)
	}
	return Shard{number, of}, nil
}

func (s Shard) String() string { return fmt.Sprintf("%d/%d", s.Number, s.Of) }

// Name returns the name of the shard's file.
func (s Shard) Name() string { return fmt.Sprintf("shard-%d-of-%d.jsonl", s.Number, s.Of) }

// Deal returns the places of the jobs that are the shard's, in the order of the list.
// Jobs are dealt like cards, in the order of their keys: shards differ by one job at
// most, and settings that repeat through a list do not all fall to the same shard.
func (s Shard) Deal(jobs []Job) []int {
	order := make([]int, len(jobs))
	for i := range order {
		order[i] = i
	}
	slices.SortFunc(order, func(a, b int) int {
		return cmp.Or(cmp.Compare(jobs[a].Key, jobs[b].Key), cmp.Compare(a, b))
	})
	var mine []int
	for rank := s.Number - 1; rank < len(order); rank += s.Of {
		mine = append(mine, order[rank])
	}
	slices.Sort(mine)
	return mine
}
