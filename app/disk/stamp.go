package disk

import (
	"crypto/sha256"
	"errors"
	"fmt"
	"hash"
	"io"
	"io/fs"
	"os"
	"strconv"
	"strings"
)

// Stamp tells what a file holds from anything else that it may hold. It is of the content
// alone: no clock, which may be wrong or set back, has a say. The zero value stands for
// no file.
type Stamp struct {
	state stampState
	bytes int64
	sum   [sha256.Size]byte
}

type stampState uint8

const (
	absent stampState = iota
	unreachable
	present
)

// Absent reports whether there is no file.
func (s Stamp) Absent() bool { return s.state == absent }

// Unreachable reports whether nothing can be said, as of a file on a drive that does not
// answer.
func (s Stamp) Unreachable() bool { return s.state == unreachable }

// mostStamped bounds what is read: of a longer file the beginning and the length count.
const mostStamped = 4 << 20

// StampOf returns the stamp of the file at path as it is now; no path is no file.
func StampOf(path string) Stamp {
	if path == "" {
		return Stamp{}
	}
	info, err := os.Stat(path)
	switch {
	case errors.Is(err, fs.ErrNotExist):
		return Stamp{}
	case err != nil, !info.Mode().IsRegular():
		return Stamp{state: unreachable}
	}
	f, err := os.Open(path)
	if errors.Is(err, fs.ErrNotExist) {
		return Stamp{}
	}
	if err != nil {
		return Stamp{state: unreachable}
	}
	defer f.Close()
	s := newStamper()
	if _, err := io.Copy(s, io.LimitReader(f, mostStamped)); err != nil {
		return Stamp{state: unreachable}
	}
	if s.bytes == mostStamped {
		s.bytes = max(s.bytes, info.Size())
	}
	return s.stamp()
}

// StampOfText returns the stamp of a file that holds the text.
func StampOfText(text string) Stamp {
	s := newStamper()
	io.WriteString(s, text)
	return s.stamp()
}

// stamper makes the stamp of what is written to it.
type stamper struct {
	hash  hash.Hash
	bytes int64
}

func newStamper() *stamper { return &stamper{hash: sha256.New()} }

func (s *stamper) Write(p []byte) (int, error) {
	if room := mostStamped - s.bytes; room > 0 {
		s.hash.Write(p[:min(int64(len(p)), room)])
	}
	s.bytes += int64(len(p))
	return len(p), nil
}

func (s *stamper) stamp() Stamp {
	t := Stamp{state: present, bytes: s.bytes}
	s.hash.Sum(t.sum[:0])
	return t
}

// MarshalText writes the stamp for a file that outlives the program.
func (s Stamp) MarshalText() ([]byte, error) {
	switch s.state {
	case absent:
		return []byte("absent"), nil
	case unreachable:
		return []byte("unreachable"), nil
	}
	return fmt.Appendf(nil, "%d %x", s.bytes, s.sum), nil
}

// UnmarshalText reads what MarshalText wrote; an empty text is no file.
func (s *Stamp) UnmarshalText(text []byte) error {
	*s = Stamp{}
	switch string(text) {
	case "", "absent":
		return nil
	case "unreachable":
		s.state = unreachable
		return nil
	}
	size, sum, _ := strings.Cut(string(text), " ")
	n, err := strconv.ParseInt(size, 10, 64)
	var raw []byte
	if err == nil {
		_, err = fmt.Sscanf(sum, "%x", &raw)
	}
	if err != nil || n < 0 || len(raw) != sha256.Size {
		return fmt.Errorf("%q tells nothing of a file", text)
	}
	s.state, s.bytes = present, n
	copy(s.sum[:], raw)
	return nil
}
