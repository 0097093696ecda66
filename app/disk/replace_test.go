package disk

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
)

func text(s string) func(io.Writer) error {
	return func(w io.Writer) error { _, err := io.WriteString(w, s); return err }
}

func TestReplace(t *testing.T) {
	path := filepath.Join(t.TempDir(), "stone.toml")
	for _, want := range []string{"first", "second, longer", "3"} {
		if err := Replace(path, text(want)); err != nil {
			t.Fatal(err)
		}
		if got, _ := os.ReadFile(path); string(got) != want {
			t.Errorf("file holds %q, want %q", got, want)
		}
	}
	if left, _ := os.ReadDir(filepath.Dir(path)); len(left) != 1 {
		t.Errorf("%d files in the folder, want the one", len(left))
	}
}

func TestReplaceKeepsTheOldFileWhenWritingFails(t *testing.T) {
	path := filepath.Join(t.TempDir(), "stone.toml")
	if err := Replace(path, text("kept")); err != nil {
		t.Fatal(err)
	}
	full := func(w io.Writer) error {
		io.WriteString(w, "half a pl")
		return &os.PathError{Op: "write", Path: path, Err: syscall.ENOSPC}
	}
	err := Replace(path, full)
	if err == nil || !strings.Contains(err.Error(), "full") {
		t.Errorf("error %v, want one that says the disk is full", err)
	}
	if got, _ := os.ReadFile(path); string(got) != "kept" {
		t.Errorf("file holds %q after a failed write", got)
	}
	if left, _ := os.ReadDir(filepath.Dir(path)); len(left) != 1 {
		t.Errorf("%d files left in the folder, want the one", len(left))
	}
}

func TestReplaceThroughALink(t *testing.T) {
	folder := t.TempDir()
	target, link := filepath.Join(folder, "real.toml"), filepath.Join(folder, "link.toml")
	if err := errors.Join(os.WriteFile(target, []byte("old"), 0o600), os.Symlink(target, link)); err != nil {
		t.Skip("no links here: ", err)
	}
	if err := Replace(link, text("new")); err != nil {
		t.Fatal(err)
	}
	info, err := os.Lstat(link)
	if err != nil || info.Mode()&os.ModeSymlink == 0 {
		t.Error("the link was replaced by a file")
	}
	if got, _ := os.ReadFile(target); string(got) != "new" {
		t.Errorf("the file behind the link holds %q", got)
	}
	if info, _ := os.Stat(target); info.Mode().Perm() != 0o600 {
		t.Errorf("rights became %v, want them kept", info.Mode().Perm())
	}
}

func TestReplaceRefusalsHaveARemedy(t *testing.T) {
	folder := t.TempDir()
	protected := filepath.Join(folder, "protected.toml")
	if err := os.WriteFile(protected, []byte("x"), 0o444); err != nil {
		t.Fatal(err)
	}
	for name, path := range map[string]string{
		"a folder":                folder,
		"a folder that is absent": filepath.Join(folder, "absent", "x.toml"),
		"a protected file":        protected,
	} {
		err := Replace(path, text("y"))
		if err == nil || !strings.ContainsAny(err.Error(), ";") {
			t.Errorf("%s: error %v, want one with a remedy after a semicolon", name, err)
		}
	}
	if err := InWords("/a/b", fmt.Errorf("wrapped: %w", os.ErrPermission)); !strings.Contains(err.Error(), "another folder") {
		t.Errorf("no remedy in %q", err)
	}
}
