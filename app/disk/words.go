package disk

import (
	"errors"
	"io/fs"
	"path/filepath"

	"pavilight/app/words"
)

// trouble is what may keep a file from being written, as the systems number it.
type trouble int

const (
	otherTrouble trouble = iota
	diskFull
	overQuota
	readOnly
	fileTooLarge
	driveGone
	inUse
	nameTooLong
	tooManyOpen
)

// InWords says why a file could not be written and what to do.
func InWords(path string, err error) error {
	folder := filepath.Dir(path)
	told := func(text words.Key, args ...any) error { return &wordedError{words.Later(text, args...), err} }
	var worded *wordedError
	switch {
	case errors.As(err, &worded), errors.Is(err, ErrChanged):
		return err
	}
	switch troubleOf(err) {
	case diskFull:
		return told("the disk that holds %s is full; make room or save elsewhere", folder)
	case overQuota:
		return told("your share of the disk that holds %s is used up; make room or save elsewhere", folder)
	case readOnly:
		return told("the disk that holds %s can only be read; save into another folder", folder)
	case fileTooLarge:
		return told("%s would be larger than files may be there; save elsewhere", path)
	case driveGone:
		return told("the drive that holds %s does not answer; plug it in again, or save into another folder", folder)
	case inUse:
		return told("%s is in use by another program; close it there, or save under another name", path)
	case nameTooLong:
		return told("the name of %s is too long; save under a shorter one", path)
	case tooManyOpen:
		return told("the system has no room for more open files; close other programs and try again")
	}
	switch {
	case errors.Is(err, fs.ErrPermission):
		return told("%s cannot be written to; save into another folder", folder)
	case errors.Is(err, fs.ErrNotExist):
		return told("the folder %s is not there; if it lies on a drive that was taken out, plug it in again, else save into another folder, under a name without a slash", folder)
	}
	return told("%s could not be written: %v; save under another name", path, err)
}

// wordedError is an error that was put into words once.
type wordedError struct {
	said words.Text
	err  error
}

func (e *wordedError) Error() string { return e.said.String() }

// Saying returns what the error says, for any language.
func (e *wordedError) Saying() words.Text { return e.said }

func (e *wordedError) Unwrap() error { return e.err }
