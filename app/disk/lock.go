package disk

import (
	"errors"
	"os"
	"time"

	"pavilight/app/words"
)

// Lock is a claim on a file, which ends with the program however that ends.
type Lock struct {
	file   *os.File
	remove bool
}

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
	if l.remove && renamesOpenFiles {
		os.Remove(f.Name()) // while it is held, so that nobody claims a file without a name
	}
	f.Close()
	if l.remove && !renamesOpenFiles {
		os.Remove(f.Name()) // fails if another has opened it meanwhile, as it should
	}
}

// holdTarget locks the file that is about to be replaced, for the moment between a look
// at what it holds and the replacing. A file that is not there needs none.
// release may be called more than once.
func holdTarget(path string) (release func(), err error) {
	const patience, pause = 2 * time.Second, 5 * time.Millisecond
	for end := time.Now().Add(patience); ; time.Sleep(pause) {
		f, err := os.Open(path)
		if err != nil {
			return func() {}, nil // what is wrong, if anything is, the replacing says in words
		}
		held := tryLock(f) == errHeld
		late := time.Now().After(end)
		if !held && (isStill(f) || late) {
			return func() { f.Close() }, nil
		}
		f.Close()
		if late {
			return nil, words.Errorf("%s is being written by another program; try again, or save under another name", path)
		}
	}
}
