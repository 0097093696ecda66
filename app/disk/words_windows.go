package disk

import (
	"errors"

	"golang.org/x/sys/windows"
)

// troubleOf names the trouble that the system numbers.
func troubleOf(err error) trouble {
	var n windows.Errno
	if !errors.As(err, &n) {
		return otherTrouble
	}
	switch n {
	case windows.ERROR_DISK_FULL, windows.ERROR_HANDLE_DISK_FULL:
		return diskFull
	case windows.ERROR_DISK_QUOTA_EXCEEDED:
		return overQuota
	case windows.ERROR_WRITE_PROTECT:
		return readOnly
	case windows.ERROR_FILE_TOO_LARGE:
		return fileTooLarge
	case windows.ERROR_NOT_READY, windows.ERROR_GEN_FAILURE, windows.ERROR_DEV_NOT_EXIST, windows.ERROR_UNEXP_NET_ERR,
		windows.ERROR_BAD_NETPATH, windows.ERROR_NETNAME_DELETED, windows.ERROR_DEVICE_NOT_CONNECTED:
		return driveGone
	case windows.ERROR_SHARING_VIOLATION, windows.ERROR_LOCK_VIOLATION:
		return inUse
	case windows.ERROR_FILENAME_EXCED_RANGE:
		return nameTooLong
	case windows.ERROR_TOO_MANY_OPEN_FILES:
		return tooManyOpen
	}
	return otherTrouble
}
