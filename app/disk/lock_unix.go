//go:build linux || darwin || freebsd || netbsd || openbsd || dragonfly

package disk

import (
	"errors"
	"os"
	"syscall"
)

// tryLock locks the file for as long as it is open, or returns errHeld at once. Other
// errors mean that there are no locks where it lies.
func tryLock(f *os.File) error {
	for {
		err := syscall.Flock(int(f.Fd()), syscall.LOCK_EX|syscall.LOCK_NB)
		switch {
		case errors.Is(err, syscall.EINTR):
			continue
		case errors.Is(err, syscall.EWOULDBLOCK):
			return errHeld
		}
		return err
	}
}
