package sweep

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
	"slices"

	"pavilight/app/disk"
)

// Row is the result of one job.
type Row struct {
	Job      int             `json:"job"` // from 1, its place in the list
	File     string          `json:"file"`
	Settings json.RawMessage `json:"settings"`
	Key      string          `json:"key"`
	Notes    []string        `json:"notes,omitempty"`  // warnings
	Error    string          `json:"error,omitempty"`  // in place of a result
	Result   json.RawMessage `json:"result,omitempty"` // what the verb prints as JSON, without times
}

// header is the first line of a file.
type header struct {
	Identity
	Shard  int    `json:"shard,omitempty"` // 0 in the results of the whole sweep
	Of     int    `json:"of,omitempty"`
	Rows   int    `json:"rows"`
	Digest string `json:"rows_sha256,omitempty"` // empty while rows are still being added
}

// line is a row as it stands in the file, and what it says but for the result, which
// would take the memory twice.
type line struct {
	Row
	text []byte // with its end of line
}

func newLine(r Row) (line, error) {
	text, err := encode(r)
	r.Result = nil
	return line{r, text}, err
}

// encode writes a value as one line.
func encode(v any) ([]byte, error) {
	var b bytes.Buffer
	e := json.NewEncoder(&b)
	e.SetEscapeHTML(false)
	err := e.Encode(v)
	return b.Bytes(), err
}

// digestOf returns the digest of rows.
func digestOf(rows []line) string {
	h := sha256.New()
	for i := range rows {
		h.Write(rows[i].text)
	}
	return hex.EncodeToString(h.Sum(nil))
}

// Bounds of a file that is read.
const (
	mostFile = 4 << 30
	mostLine = 64 << 20
)

// Why a file is not taken.
var (
	errForeign = errors.New("it holds no results of a sweep")
	errDamaged = errors.New("it is damaged or cut short")
)

// read reads a file. Rows end at the first that is not whole; of a file that says how
// many it has, errDamaged tells when they are not all there as they were written.
func read(r io.Reader) (header, []line, error) {
	in := bufio.NewReaderSize(io.LimitReader(r, mostFile), 1<<16)
	var head header
	first, err := readLine(in)
	if err != nil || json.Unmarshal(first, &head) != nil || head.Form == 0 {
		return header{}, nil, errForeign
	}
	switch {
	case head.Form != Form:
		return header{}, nil, fmt.Errorf("%w: it has form %d, and this program reads form %d", errForeign, head.Form, Form)
	case head.Jobs < 0 || head.Jobs > MostJobs || head.Of < 0 || head.Of > MostShards || head.Shard < 0 || head.Shard > head.Of:
		return header{}, nil, fmt.Errorf("%w: its first line has numbers out of range", errForeign)
	}
	var rows []line
	for {
		text, err := readLine(in)
		if err != nil {
			break
		}
		l := line{text: text}
		if json.Unmarshal(text, &l.Row) != nil || l.Job < 1 || l.Job > head.Jobs || (l.Error == "") == (l.Result == nil) {
			break
		}
		l.Result = nil
		rows = append(rows, l)
	}
	if head.Digest != "" && (len(rows) != head.Rows || digestOf(rows) != head.Digest) {
		return head, nil, errDamaged
	}
	return head, rows, nil
}

// readLine returns the next line with its end; a last one without end is none.
func readLine(in *bufio.Reader) ([]byte, error) {
	var text []byte
	for {
		part, err := in.ReadSlice('\n')
		text = append(text, part...)
		switch {
		case len(text) > mostLine:
			return nil, errDamaged
		case err == nil:
			return text, nil
		case !errors.Is(err, bufio.ErrBufferFull):
			return nil, err
		}
	}
}

// open reads the file at path.
func open(path string) (header, []line, error) {
	f, err := os.Open(path)
	if err != nil {
		return header{}, nil, err
	}
	defer f.Close()
	return read(f)
}

// write replaces the file at path by the rows, whole or not at all.
func write(path string, head header, rows []line) error {
	head.Rows, head.Digest = len(rows), digestOf(rows)
	first, err := encode(head)
	if err != nil {
		return err
	}
	return disk.Replace(path, func(w io.Writer) error {
		b := bufio.NewWriter(w)
		b.Write(first)
		for i := range rows {
			b.Write(rows[i].text)
		}
		return b.Flush()
	})
}

// sorted puts rows into the order of the list.
func sorted(rows []line) []line {
	slices.SortStableFunc(rows, func(a, b line) int { return a.Job - b.Job })
	return rows
}
