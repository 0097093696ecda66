// Package disk writes files so that none is ever half-written.
package disk

import (
	"errors"
	"fmt"
	"io"
	"io/fs"
	"os"
	"path/filepath"
	"runtime"
	"syscall"
)

// Replace replaces the file at path as a whole or leaves it as it was: the
// text goes to a new file beside it, which takes the name only once it is safely
// on the disk. A link stays a link. Errors are in words with a remedy.
func Replace(path string, write func(io.Writer) error) (err error) {
	target := path
	if resolved, err := filepath.EvalSymlinks(path); err == nil {
		target = resolved
	}
	mode := fs.FileMode(0o644)
	if info, err := os.Stat(target); err == nil {
		if info.IsDir() {
			return fmt.Errorf("%s is a folder; give the file another name", path)
		}
		if info.Mode().Perm()&0o200 == 0 {
			return fmt.Errorf("%s is write-protected; save under another name", path)
		}
		mode = info.Mode().Perm()
	}
	temporary, err := os.CreateTemp(filepath.Dir(target), "."+filepath.Base(target)+".*.new")
	if err != nil {
		return InWords(path, err)
	}
	defer func() {
		if err != nil {
			temporary.Close()
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
	if err := temporary.Close(); err != nil {
		return err
	}
	if err := os.Rename(temporary.Name(), target); err != nil {
		return err
	}
	if folder, err := os.Open(filepath.Dir(target)); err == nil {
		folder.Sync() // makes the new name last through a power cut where the system can; no loss otherwise
		folder.Close()
	}
	return nil
}

// InWords says why a file could not be written and what to do.
func InWords(path string, err error) error {
	folder := filepath.Dir(path)
	switch {
	case errors.Is(err, fs.ErrPermission), errors.Is(err, syscall.EROFS):
		return fmt.Errorf("%s cannot be written to; save into another folder", folder)
	case errors.Is(err, fs.ErrNotExist):
		return fmt.Errorf("the folder %s is not there; save into another folder", folder)
	case errors.Is(err, syscall.ENOSPC):
		return fmt.Errorf("the disk that holds %s is full; make room or save elsewhere", folder)
	}
	return fmt.Errorf("%s could not be written: %w; save under another name", path, err)
}
