package disk

import (
	"errors"
	"fmt"
	"io"
	"os"
	"path/filepath"
	"runtime"
	"strconv"
	"strings"
	"sync"
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
	noSpace := syscall.ENOSPC
	if runtime.GOOS == "windows" {
		noSpace = 112 // ERROR_DISK_FULL
	}
	full := func(w io.Writer) error {
		io.WriteString(w, "half a pl")
		return &os.PathError{Op: "write", Path: path, Err: noSpace}
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
	if info, err := os.Lstat(link); err != nil || info.Mode()&os.ModeSymlink == 0 {
		t.Skip("what is made here is no link: ", err)
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
	if info, _ := os.Stat(target); info.Mode().Perm() != 0o600 && runtime.GOOS != "windows" {
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

func TestLeftoversAreSwept(t *testing.T) {
	folder := t.TempDir()
	path := filepath.Join(folder, "stone.toml")
	left := filepath.Join(folder, ".stone.toml.123456.new")
	others := []string{
		filepath.Join(folder, ".other.toml.123456.new"), // may be swept when that file is written
		filepath.Join(folder, ".stone.toml.mine.new"),   // not named by this program
	}
	for _, p := range append(others, left) {
		if err := os.WriteFile(p, []byte("half"), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	held, err := createHeld(folder, newName("stone.toml")) // as of a program that is just writing
	if err != nil {
		t.Fatal(err)
	}
	defer held.Close()
	if err := Replace(path, text("whole")); err != nil {
		t.Fatal(err)
	}
	if _, err := os.Stat(left); !errors.Is(err, os.ErrNotExist) {
		t.Error("the leftover of a killed program is still there")
	}
	for _, p := range append(others, held.Name()) {
		if _, err := os.Stat(p); err != nil {
			t.Errorf("%s was swept: %v", filepath.Base(p), err)
		}
	}
}

func TestReplaceKnownRefusesWhatItDoesNotKnow(t *testing.T) {
	path := filepath.Join(t.TempDir(), "stone.toml")
	known, err := ReplaceKnown(path, Stamp{}, text("mine"))
	if err != nil || known != StampOf(path) || known != StampOfText("mine") {
		t.Fatalf("%v, stamp %v", err, known)
	}
	before, err := os.Stat(path)
	if err != nil {
		t.Fatal(err)
	}
	// The same length and the same time, as after a clock that was set back.
	if err := errors.Join(os.WriteFile(path, []byte("hers"), 0o600), os.Chtimes(path, before.ModTime(), before.ModTime())); err != nil {
		t.Fatal(err)
	}
	if _, err := ReplaceKnown(path, known, text("mine again")); !errors.Is(err, ErrChanged) {
		t.Errorf("error %v, want ErrChanged", err)
	}
	if got, _ := os.ReadFile(path); string(got) != "hers" {
		t.Errorf("the file holds %q", got)
	}
	if left, _ := os.ReadDir(filepath.Dir(path)); len(left) != 1 {
		t.Errorf("%d files in the folder, want the one", len(left))
	}
	os.Remove(path)
	if _, err := ReplaceKnown(path, known, text("again")); err != nil {
		t.Errorf("a file that is gone is not written again: %v", err)
	}
}

// Many hands count in one file: whoever finds it changed reads it again. Were one write
// lost, the count would be short.
func TestNoWriteIsLostAmongMany(t *testing.T) {
	const hands, counts = 6, 12
	path := filepath.Join(t.TempDir(), "count")
	if err := Replace(path, text("0")); err != nil {
		t.Fatal(err)
	}
	var all sync.WaitGroup
	for range hands {
		all.Go(func() {
			for done := 0; done < counts; {
				content, err := os.ReadFile(path)
				if err != nil {
					t.Error(err)
					return
				}
				n, _ := strconv.Atoi(string(content))
				switch _, err = ReplaceKnown(path, StampOfText(string(content)), text(strconv.Itoa(n+1))); {
				case err == nil:
					done++
				case !errors.Is(err, ErrChanged):
					t.Error(err)
					return
				}
			}
		})
	}
	all.Wait()
	if got, _ := os.ReadFile(path); string(got) != strconv.Itoa(hands*counts) {
		t.Errorf("%d times counted up, the file says %s", hands*counts, got)
	}
}

func TestLocks(t *testing.T) {
	path := filepath.Join(t.TempDir(), "record")
	first, err := LockFile(path)
	if err != nil {
		t.Fatal(err)
	}
	if _, err := LockFile(path); !errors.Is(err, ErrHeld) {
		t.Errorf("a second claim: %v", err)
	}
	first.Release()
	first.Release() // once is enough, twice does no harm
	if _, err := os.Stat(path); err != nil {
		t.Error("a file that was locked is gone")
	}
	second, err := LockFile(path)
	if err != nil {
		t.Errorf("after the release: %v", err)
	}
	second.Release()
	claim, err := Claim(path)
	if err != nil {
		t.Fatal(err)
	}
	claim.Release()
	if _, err := os.Stat(path); !errors.Is(err, os.ErrNotExist) {
		t.Error("the file of a claim is still there")
	}
	if _, err := LockFile(filepath.Join(path, "absent", "x")); err == nil || !strings.Contains(err.Error(), ";") {
		t.Errorf("no folder: %v, want a remedy", err)
	}
}

func TestStampsOutliveTheProgram(t *testing.T) {
	for _, s := range []Stamp{{}, {state: unreachable}, StampOfText(""), StampOfText("a stone")} {
		text, err := s.MarshalText()
		if err != nil {
			t.Fatal(err)
		}
		var back Stamp
		if err := back.UnmarshalText(text); err != nil || back != s {
			t.Errorf("%q reads as %v, %v", text, back, err)
		}
	}
	for _, bad := range []string{"x", "5", "5 zz", "-1 " + strings.Repeat("00", 32), "5 00"} {
		if err := new(Stamp).UnmarshalText([]byte(bad)); err == nil {
			t.Errorf("%q is taken", bad)
		}
	}
	large := filepath.Join(t.TempDir(), "large")
	content := strings.Repeat("x", mostStamped+9)
	if err := os.WriteFile(large, []byte(content), 0o600); err != nil {
		t.Fatal(err)
	}
	if StampOf(large) != StampOfText(content) {
		t.Error("a large file has two stamps")
	}
}
