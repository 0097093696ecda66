package disk

import (
	"errors"
	"io/fs"
	"os"
	"time"

	"golang.org/x/sys/windows"
)

// tryLock locks the file for as long as it is open, or returns errHeld at once. Locks are
// binding on this system, so the one byte that is locked lies where no file reaches.
func tryLock(f *os.File) error {
	err := windows.LockFileEx(windows.Handle(f.Fd()), windows.LOCKFILE_EXCLUSIVE_LOCK|windows.LOCKFILE_FAIL_IMMEDIATELY,
		0, 1, 0, &windows.Overlapped{OffsetHigh: 0x7fffffff})
	if errors.Is(err, windows.ERROR_LOCK_VIOLATION) || errors.Is(err, windows.ERROR_IO_PENDING) {
		return errHeld
	}
	return err
}

// createNew creates a file that is not there yet, so that it can be renamed while it is open.
func createNew(path string) (*os.File, error) {
	name, err := windows.UTF16PtrFromString(path)
	if err == nil {
		var h windows.Handle
		h, err = windows.CreateFile(name, windows.GENERIC_READ|windows.GENERIC_WRITE,
			windows.FILE_SHARE_READ|windows.FILE_SHARE_WRITE|windows.FILE_SHARE_DELETE, nil, windows.CREATE_NEW, windows.FILE_ATTRIBUTE_NORMAL, 0)
		if err == nil {
			return os.NewFile(uintptr(h), path), nil
		}
	}
	return nil, &fs.PathError{Op: "open", Path: path, Err: err}
}

// rename gives a file the name of another, which is replaced. Whoever has the other open at
// that moment, to read it, to index it, to look for viruses, keeps it from being replaced:
// that passes.
func rename(from, to string) error {
	for end := time.Now().Add(patience); ; time.Sleep(pause) {
		err := os.Rename(from, to)
		passes := errors.Is(err, windows.ERROR_ACCESS_DENIED) || errors.Is(err, windows.ERROR_SHARING_VIOLATION)
		if !passes || time.Now().After(end) {
			return err
		}
	}
}
