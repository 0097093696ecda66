//go:build !windows

package disk

import "os"

// createNew creates a file that is not there yet.
func createNew(path string) (*os.File, error) {
	return os.OpenFile(path, os.O_RDWR|os.O_CREATE|os.O_EXCL, 0o600)
}

// rename gives a file the name of another, which is replaced.
func rename(from, to string) error { return os.Rename(from, to) }
