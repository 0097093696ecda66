//go:build unix

package disk

import (
	"errors"
	"syscall"
)

// troubleOf names the trouble that the system numbers.
func troubleOf(err error) trouble {
	var n syscall.Errno
	if !errors.As(err, &n) {
		return otherTrouble
	}
	switch n {
	case syscall.ENOSPC:
		return diskFull
	case syscall.EDQUOT:
		return overQuota
	case syscall.EROFS:
		return readOnly
	case syscall.EFBIG:
		return fileTooLarge
	case syscall.EIO, syscall.ENODEV, syscall.ENXIO, syscall.ESTALE, syscall.ENOTCONN, syscall.EHOSTDOWN, syscall.ETIMEDOUT:
		return driveGone
	case syscall.EBUSY, syscall.ETXTBSY:
		return inUse
	case syscall.ENAMETOOLONG:
		return nameTooLong
	case syscall.EMFILE, syscall.ENFILE:
		return tooManyOpen
	}
	return otherTrouble
}
