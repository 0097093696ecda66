// Package stock is the materials at hand, the bundled table and the user's own file, and
// what the languages call them and say of them.
package stock

import (
	"errors"
	"fmt"
	"io/fs"
	"os"
	"path/filepath"

	"pavilight/gems"
)

// OwnFile returns where the user's own materials are looked for: materials.toml in
// Pavilight's folder of settings. It is empty where the system names no such folder.
func OwnFile() string {
	folder, err := os.UserConfigDir()
	if err != nil {
		return ""
	}
	return filepath.Join(folder, "pavilight", "materials.toml")
}

// Open returns the bundled materials and those of the file at path after them; one of
// the same key takes the bundled one's place. With an empty path it takes OwnFile, if
// that is there. What is wrong with the file is told in words, all faults at once.
func Open(path string) (*gems.Library, error) {
	library := gems.Standard()
	own := path == ""
	if own {
		path = OwnFile()
	}
	if path == "" {
		return library, nil
	}
	f, err := os.Open(path)
	if own && errors.Is(err, fs.ErrNotExist) {
		return library, nil
	}
	if err != nil {
		var p *fs.PathError
		if errors.As(err, &p) {
			err = p.Err
		}
		return nil, fmt.Errorf("%s: the materials cannot be read: %w; name a TOML file of materials", path, err)
	}
	defer f.Close()
	materials, err := gems.ReadMaterials(f, path)
	if err != nil {
		return nil, err
	}
	return library.With(materials...), nil
}
