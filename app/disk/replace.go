// Package disk writes files so that none is ever half-written, and keeps two programs
// from writing over each other.
package disk

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"math/rand/v2"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"time"

	"pavilight/app/words"
)

// Replace replaces the file at path as a whole or leaves it as it was: the
// text goes to a new file beside it, which takes the name only once it is safely
// on the disk. A link stays a link. Errors are in words with a remedy. What a program
// that was killed while it wrote this file left beside it is removed.
func Replace(path string, write func(io.Writer) error) error {
	return replace(path, write, func(string) error { return nil })
}

// ReplaceKnown is Replace for a file that is believed to hold what known tells. If other
// hands have written to it since, it is left alone and the error is ErrChanged. A file
// that is gone is written again. It returns what the file holds now.
func ReplaceKnown(path string, known Stamp, write func(io.Writer) error) (Stamp, error) {
	sum := newStamper()
	err := replace(path, func(w io.Writer) error { return write(io.MultiWriter(w, sum)) }, func(target string) error {
		switch now := StampOf(target); {
		case now.Unreachable():
			return words.Errorf("%s cannot be read, so nothing tells whether other hands wrote to it; save under another name", path)
		case now != known && !now.Absent():
			return words.Errorf("%s: %v", path, ErrChanged)
		}
		return nil
	})
	if err != nil {
		return Stamp{}, err
	}
	return sum.stamp(), nil
}

// ErrChanged tells that a file holds something else than the program believes.
var ErrChanged = words.Errorf("the file was changed by another program or window since it was read; nothing was written")

// replace writes the new file. Before it takes the name mayTake is asked, and from then on
// nobody else replaces the target.
func replace(path string, write func(io.Writer) error, mayTake func(target string) error) (err error) {
	target := path
	if resolved, err := filepath.EvalSymlinks(path); err == nil {
		target = resolved
	}
	mode := fs.FileMode(0o644)
	if info, err := os.Stat(target); err == nil {
		if info.IsDir() {
			return words.Errorf("%s is a folder; give the file another name", path)
		}
		if !info.Mode().IsRegular() {
			return words.Errorf("%s is a device or the like, no file that can be replaced; give the file another name", path)
		}
		if info.Mode().Perm()&0o200 == 0 {
			return words.Errorf("%s is write-protected; save under another name", path)
		}
		mode = info.Mode().Perm()
	}
	folder, name := filepath.Dir(target), newName(filepath.Base(target))
	sweep(folder, name)
	temporary, err := createHeld(folder, name)
	if err != nil {
		return InWords(path, err)
	}
	defer func() {
		temporary.Close()
		if err != nil {
			os.Remove(temporary.Name())
			err = InWords(path, err)
		}
	}()
	if err := write(temporary); err != nil {
		return err
	}
	if err := temporary.Chmod(mode); err != nil && runtime.GOOS != "windows" {
		return err
	}
	if err := temporary.Sync(); err != nil {
		return err
	}
	release, err := holdTarget(target)
	if err != nil {
		return err
	}
	defer release()
	if err := mayTake(target); err != nil {
		return err
	}
	// The new file stays open, and with that claimed, until it bears its name: nobody takes
	// it for a leftover. What it holds is on the disk since Sync.
	if err := rename(temporary.Name(), target); err != nil {
		return err
	}
	if folder, err := os.Open(folder); err == nil {
		folder.Sync() // makes the new name last through a power cut where the system can; no loss otherwise
		folder.Close()
	}
	return nil
}

// newName is the pattern for the new files that are to replace a file; they are hidden
// and end in .new, so that no dialog and no shell pattern takes one for a plan.
func newName(base string) string {
	const longest = 100 // bytes of 255 that a name may have
	if len(base) > longest {
		base = strings.ToValidUTF8(base[:longest], "")
	}
	return "." + base + ".*.new"
}

// createHeld creates a new file that is locked while it is open, which tells it from one
// that a killed program left behind.
func createHeld(folder, pattern string) (*os.File, error) {
	before, after, _ := strings.Cut(pattern, "*")
	for try := 1; ; try++ {
		f, err := createNew(filepath.Join(folder, fmt.Sprint(before, rand.Int64N(1e10)+1, after)))
		if errors.Is(err, fs.ErrExist) && try < mostTries {
			continue
		}
		if err != nil {
			return nil, err
		}
		if tryLock(f) != errHeld && isStill(f) || try == mostTries {
			return f, nil
		}
		f.Close() // another program was just sweeping, and took it for a leftover
		os.Remove(f.Name())
	}
}

// mostTries bounds what is tried again while other programs come in between. There are
// file systems whose files never look like the same file twice.
const mostTries = 20

// isStill reports whether the open file still bears its name.
func isStill(f *os.File) bool {
	here, err := f.Stat()
	if err != nil {
		return false
	}
	there, err := os.Lstat(f.Name())
	return err == nil && os.SameFile(here, there)
}

// sweep removes the files of the pattern that no program is writing any more.
func sweep(folder, pattern string) {
	before, after, _ := strings.Cut(pattern, "*")
	entries, err := os.ReadDir(folder)
	if err != nil {
		return
	}
	for _, e := range entries {
		middle, isNew := strings.CutSuffix(e.Name(), after)
		middle, ours := strings.CutPrefix(middle, before)
		if before == anyFile { // the digits follow the last dot
			middle = middle[strings.LastIndex(middle, ".")+1:]
		}
		if isNew && ours && e.Type().IsRegular() && middle != "" && strings.Trim(middle, "0123456789") == "" {
			sweepOne(filepath.Join(folder, e.Name()))
		}
	}
}

// anyFile begins the names of all new files.
const anyFile = "."

// Sweep removes all that killed programs left in the folder while they wrote.
func Sweep(folder string) { sweep(folder, anyFile+"*.new") }

// SweepBeside removes what killed programs left while they wrote the file at path.
func SweepBeside(path string) {
	if resolved, err := filepath.EvalSymlinks(path); err == nil {
		path = resolved
	}
	sweep(filepath.Dir(path), newName(filepath.Base(path)))
}

// sweepOne removes one new file if nobody holds it.
func sweepOne(path string) {
	f, err := os.OpenFile(path, os.O_RDWR, 0)
	if err != nil {
		return
	}
	defer f.Close()
	switch err := tryLock(f); {
	case err == errHeld:
		return
	case err != nil: // there are no locks here: only what is old is a leftover for sure
		const surely = 24 * time.Hour
		info, err := f.Stat()
		if err != nil || time.Since(info.ModTime()).Abs() < surely {
			return
		}
	}
	if !removesOpenFiles {
		f.Close()
	}
	os.Remove(path)
}

// Writable makes sure that files can be made in the folder. Errors are those of the
// system.
func Writable(folder string) error {
	const pattern = ".pavilight.*.new"
	sweep(folder, pattern)
	f, err := createHeld(folder, pattern)
	if err != nil {
		return err
	}
	f.Close()
	return os.Remove(f.Name())
}
