package tune

import (
	"bufio"
	"bytes"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"math"
	"os"
)

// Memory is a file of what was seen, so that a run that was stopped or killed goes on
// where it was: it asks the same questions again and finds them answered. The file holds
// one JSON value a line; a last line that was cut short is dropped. Where it cannot be
// written any more, as on a full disk, the search goes on without, and Close tells. One
// run at a time may use a file: whoever names it holds a lock on it. A nil Memory keeps
// nothing.
type Memory struct {
	Path    string
	Purpose string // what the stones depend on beside the problem: the plan's text, the width
	file    *os.File
	good    int64 // bytes of whole lines in the file
	err     error // why no more is written
}

// mostMemory bounds the file that is read back, mostMemoryLine a line of it.
const (
	mostMemory     = 256 << 20
	mostMemoryLine = 1 << 20
)

type memoryHead struct {
	Pavilight string `json:"pavilight"`
	Purpose   string `json:"purpose"`
}

type memoryLine struct {
	Key string `json:"key"`
	sight
}

// open reads what the file holds into the judge and has it write on.
func (m *Memory) open(j *judge) error {
	if m == nil {
		return nil
	}
	sum := sha256.Sum256([]byte(m.Purpose + "\n" + j.purpose()))
	head := memoryHead{"what was seen in tuning 1", hex.EncodeToString(sum[:])}
	f, err := os.OpenFile(m.Path, os.O_RDWR|os.O_CREATE, 0o644)
	if err != nil {
		return &MemoryError{m.Path, err}
	}
	good, err := readMemory(io.LimitReader(f, mostMemory), head, j.fits, j.known)
	if err == nil && good == 0 {
		good, err = writeHead(f, head)
	}
	if err == nil {
		if err = f.Truncate(good); err == nil {
			_, err = f.Seek(good, io.SeekStart)
		}
	}
	if err != nil {
		f.Close()
		return &MemoryError{m.Path, err}
	}
	m.file, m.good, m.err = f, good, nil
	j.keep = m.write
	return nil
}

// write adds a line. The judge calls it one at a time.
func (m *Memory) write(key string, s sight) {
	if m.err != nil {
		return
	}
	line, err := json.Marshal(memoryLine{key, s})
	if err == nil {
		_, err = m.file.Write(append(line, '\n'))
	}
	if err != nil {
		m.err = &MemoryError{m.Path, err}
		m.file.Truncate(m.good) // where it fails, too, the half line is dropped by the next run
		return
	}
	m.good += int64(len(line)) + 1
}

// Close ends the memory's use of its file. It returns a MemoryError if not all that was
// seen could be written.
func (m *Memory) Close() error {
	if m == nil || m.file == nil {
		return nil
	}
	f := m.file
	m.file = nil
	if err := f.Close(); err != nil && m.err == nil {
		m.err = &MemoryError{m.Path, err}
	}
	return m.err
}

// MemoryError says that the file of a Memory cannot be used.
type MemoryError struct {
	Path string
	Err  error
}

// Error names the file and what is wrong.
func (e *MemoryError) Error() string { return fmt.Sprintf("%s: %v", e.Path, e.Err) }

// Unwrap returns what is wrong.
func (e *MemoryError) Unwrap() error { return e.Err }

// What a memory's file may be instead.
var (
	errNoMemory    = errors.New("this file holds nothing that tuning saw; name another one, or a new one")
	errOtherMemory = errors.New("what this file holds was seen for another plan, goal or set of limits; name another one, or a new one")
)

func headLine(head memoryHead) []byte {
	line, _ := json.Marshal(head) // two texts: nothing that can fail
	return append(line, '\n')
}

func writeHead(f *os.File, head memoryHead) (int64, error) {
	n, err := f.WriteAt(headLine(head), 0)
	return int64(n), err
}

// fits reports whether what a line says was seen is an answer to this problem's
// questions: as many cases and measures, numbers of sensible size, a reason where there
// is no answer.
func (j *judge) fits(s sight) bool {
	const most = 1e6 // beyond any measure, in its unit
	if len(s.Values) == 0 {
		return len(s.Errors) == 0 && len(s.Words) > 0 && s.Short >= 0
	}
	cases, aims := len(j.Goal.Cases), len(j.Goal.Aims)
	if len(s.Values) != cases || len(s.Errors) != cases || s.Pictures < 0 || s.Pictures == 1 || !(s.Short >= 0) {
		return false
	}
	for k := range s.Values {
		if len(s.Values[k]) != aims || len(s.Errors[k]) != aims {
			return false
		}
		for i := range s.Values[k] {
			if v, e := s.Values[k][i], s.Errors[k][i]; !(math.Abs(v) <= most && e >= 0 && e <= most) {
				return false
			}
		}
	}
	return true
}

// readMemory reads whole lines into known and returns where the last one ends; 0 for
// an empty file and for one whose first line was cut short. Lines that do not fit are
// passed over: they are asked again.
func readMemory(r io.Reader, want memoryHead, fits func(sight) bool, known map[string]sight) (good int64, err error) {
	in := bufio.NewReaderSize(r, mostMemoryLine)
	for n := 0; ; n++ {
		line, err := in.ReadSlice('\n')
		if errors.Is(err, bufio.ErrBufferFull) {
			if n == 0 {
				return 0, errNoMemory
			}
			return good, nil // no line of ours is so long
		}
		if errors.Is(err, io.EOF) {
			if n == 0 && !bytes.HasPrefix(headLine(want), line) {
				return 0, errNoMemory // rather than cut off somebody's text
			}
			return good, nil // a line without an end was cut short
		}
		if err != nil {
			return 0, err
		}
		if n == 0 {
			var head memoryHead
			if json.Unmarshal(line, &head) != nil || head.Pavilight != want.Pavilight {
				return 0, errNoMemory
			}
			if head.Purpose != want.Purpose {
				return 0, errOtherMemory
			}
		} else {
			var l memoryLine
			if json.Unmarshal(line, &l) != nil {
				return good, nil // garbage from here on, as after a crash: it is asked again
			}
			if fits(l.sight) {
				known[l.Key] = l.sight
			}
		}
		good += int64(len(line))
	}
}
