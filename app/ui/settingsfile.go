package ui

import (
	"encoding/json"
	"io"
	"os"
	"path/filepath"
	"runtime"

	"pavilight/app/disk"
)

// settingsFile returns the file in which the toolkit keeps the preferences, "" where the
// user has no folder for it.
func settingsFile() string {
	root, err := os.UserConfigDir()
	if runtime.GOOS == "darwin" {
		if root, err = os.UserHomeDir(); err == nil {
			root = filepath.Join(root, "Library", "Preferences")
		}
	}
	if err != nil {
		return ""
	}
	return filepath.Join(root, "fyne", appID, "preferences.json")
}

// mendSettings keeps a copy of the settings while they are whole and brings it back when
// they are not: the toolkit writes them in place, so a kill or a full disk may cut them
// short. It must run before the toolkit reads them. What fails leaves the usual settings.
func mendSettings(path string) {
	const most = 1 << 20 // bytes; settings are a few hundred
	read := func(path string) (content []byte, whole bool) {
		if info, err := os.Stat(path); err != nil || !info.Mode().IsRegular() || info.Size() > most {
			return nil, false
		}
		content, err := os.ReadFile(path)
		values := map[string]any{}
		return content, err == nil && json.Unmarshal(content, &values) == nil
	}
	if _, err := os.Stat(path); err != nil {
		return // a first start, or settings that the user removed
	}
	kept := path + ".whole"
	from, to := path, kept
	content, whole := read(from)
	if !whole {
		from, to = kept, path
		if content, whole = read(from); !whole {
			return
		}
	}
	if disk.StampOf(from) != disk.StampOf(to) {
		disk.Replace(to, func(w io.Writer) error { _, err := w.Write(content); return err })
	}
}
