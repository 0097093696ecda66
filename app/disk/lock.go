package disk

import (
	"errors"
	"os"
	"path/filepath"
	"runtime"
	"strings"
	"time"

	"pavilight/app/words"
)

// Lock is a claim on a file, which ends with the program however that ends.
type Lock struct {
	file   *os.File
	remove bool
}

// removesOpenFiles tells whether a file can be removed, or replaced by another, while it is
// open.
const removesOpenFiles = runtime.GOOS != "windows"

// ErrHeld tells that another program, or another part of this one, holds the lock.
var ErrHeld = errors.New("another program holds it")

// errHeld is what tryLock returns for a file that another has locked; any other error
// means that there are no locks where the file lies.
var errHeld = ErrHeld

// LockFile claims the file at path, which is made if it is not there. If another holds
// it the error is ErrHeld. Where the system has no locks the claim is granted.
func LockFile(path string) (*Lock, error) {
	for try := 1; ; try++ {
		f, err := os.OpenFile(path, os.O_RDWR|os.O_CREATE, 0o644)
		if err != nil {
			return nil, InWords(path, err)
		}
		if tryLock(f) == errHeld {
			f.Close()
			return nil, ErrHeld
		}
		if isStill(f) || try == mostTries {
			return &Lock{file: f}, nil
		}
		f.Close() // whoever held it has just removed it
	}
}

// Claim is LockFile for a file that stands for the claim and nothing else: it is removed
// when the claim is released.
func Claim(path string) (*Lock, error) {
	l, err := LockFile(path)
	if l != nil {
		l.remove = true
	}
	return l, err
}

// Release gives the claim up. A nil Lock is none.
func (l *Lock) Release() {
	if l == nil || l.file == nil {
		return
	}
	f := l.file
	l.file = nil
	if l.remove && removesOpenFiles {
		os.Remove(f.Name()) // while it is held, so that nobody claims a file without a name
	}
	f.Close()
	if l.remove && !removesOpenFiles {
		os.Remove(f.Name()) // fails if another has opened it meanwhile, as it should
	}
}

// How long another program is waited for that is just writing the same file.
const (
	patience = 2 * time.Second
	pause    = 5 * time.Millisecond
)

// holdTarget claims the file that is about to be replaced, for the moment between a look
// at what it holds and the replacing. A file that is not there needs none.
// release may be called more than once.
func holdTarget(path string) (release func(), err error) {
	hold := holdItself
	if !removesOpenFiles { // nor replaces: what stands for it lies beside it
		hold = holdBeside
	}
	for end := time.Now().Add(patience); ; time.Sleep(pause) {
		late := time.Now().After(end)
		release, err = hold(path, late)
		if release != nil {
			return release, nil
		}
		if late && errors.Is(err, ErrHeld) {
			return nil, words.Errorf("%s is being written by another program; try again, or save under another name", path)
		}
		if late {
			return func() {}, nil // what is wrong, if anything is, the replacing says in words
		}
	}
}

// holdItself locks the file.
func holdItself(path string, late bool) (release func(), err error) {
	f, err := os.Open(path)
	if err != nil {
		return func() {}, nil
	}
	if tryLock(f) != errHeld && (isStill(f) || late) {
		return func() { f.Close() }, nil
	}
	f.Close()
	return nil, ErrHeld
}

// holdBeside locks a file that stands for it, of a name that a new file never has and that
// is swept up like one.
func holdBeside(path string, _ bool) (release func(), err error) {
	folder, base := filepath.Split(path)
	claim, err := Claim(folder + strings.Replace(newName(base), "*", "0", 1))
	if err != nil { // also while the file is going away
		return nil, err
	}
	return claim.Release, nil
}
