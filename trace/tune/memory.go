package tune

import (
	"bufio"
	"crypto/sha256"
	"encoding/hex"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"os"
)

// Memory is a file of what was seen, so that a run that was stopped or killed goes on
// where it was: it asks the same questions again and finds them answered. The file holds
// one JSON value a line; a last line that was cut short is dropped. A nil Memory keeps
// nothing.
type Memory struct {
	Path    string
	Purpose string // what the stones depend on beside the problem: the plan's text, the width
	file    *os.File
}

// mostMemory bounds the file that is read back.
const mostMemory = 256 << 20

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
	good, err := readMemory(io.LimitReader(f, mostMemory), head, j.known)
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
	m.file = f
	j.keep = func(key string, s sight) error {
		line, err := json.Marshal(memoryLine{key, s})
		if err == nil {
			_, err = f.Write(append(line, '\n'))
		}
		if err != nil {
			return &MemoryError{m.Path, err}
		}
		return nil
	}
	return nil
}

// Close ends the memory's use of its file.
func (m *Memory) Close() error {
	if m == nil || m.file == nil {
		return nil
	}
	f := m.file
	m.file = nil
	return f.Close()
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

func writeHead(f *os.File, head memoryHead) (int64, error) {
	line, err := json.Marshal(head)
	if err != nil {
		return 0, err
	}
	n, err := f.WriteAt(append(line, '\n'), 0)
	return int64(n), err
}

// readMemory reads whole lines into known and returns where the last one ends; 0 for
// an empty file.
func readMemory(r io.Reader, want memoryHead, known map[string]sight) (good int64, err error) {
	in := bufio.NewReader(r)
	for n := 0; ; n++ {
		line, err := in.ReadBytes('\n')
		if errors.Is(err, io.EOF) {
			if n == 0 && len(line) > 0 {
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
			known[l.Key] = l.sight
		}
		good += int64(len(line))
	}
}
