package disk

import (
	"errors"
	"os"

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
