package main

import (
	"bytes"
	"errors"
	"os"
	"os/exec"
	"path/filepath"
	"strings"
	"syscall"
	"testing"
	"time"

	"pavilight/app/command"
	"pavilight/app/disk"
	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
)

// ownMounts names, in the environment of a process that has mounts of its own, the program.
const ownMounts = "PAVILIGHT_TEST_MOUNTS"

// TestFaults tries the real file systems of the system: a full disk, one that can only be
// read, a drive that vanishes and comes back, a limit on files, two searches on one record.
// What is mounted is seen by this test alone and is gone with it.
func TestFaults(t *testing.T) {
	if testing.Short() {
		t.Skip("the program is built; run without -short")
	}
	if program := os.Getenv(ownMounts); program != "" {
		t.Run("full", func(t *testing.T) { fullDisk(t, program) })
		t.Run("read-only", func(t *testing.T) { readOnlyDisk(t, program) })
		t.Run("gone", goneDrive)
		return
	}
	program := builtProgram(t)
	t.Run("limit", func(t *testing.T) { fileLimit(t, program) })
	t.Run("two searches", func(t *testing.T) { twoSearches(t, program) })
	t.Run("disks", func(t *testing.T) { withOwnMounts(t, program) })
}

// withOwnMounts runs the test in a process with mounts of its own, or skips it in words.
func withOwnMounts(t *testing.T, program string) {
	t.Helper()
	me := syscall.SysProcIDMap{ContainerID: 0, HostID: os.Getuid(), Size: 1}
	group := syscall.SysProcIDMap{ContainerID: 0, HostID: os.Getgid(), Size: 1}
	for _, as := range []*syscall.SysProcAttr{
		{Unshareflags: syscall.CLONE_NEWNS},
		{Cloneflags: syscall.CLONE_NEWUSER, Unshareflags: syscall.CLONE_NEWNS,
			UidMappings: []syscall.SysProcIDMap{me}, GidMappings: []syscall.SysProcIDMap{group}},
	} {
		c := exec.Command(os.Args[0], "-test.run=^TestFaults$", "-test.v")
		c.Env = append(os.Environ(), ownMounts+"="+program)
		c.SysProcAttr = as
		var out bytes.Buffer
		c.Stdout, c.Stderr = &out, &out
		if err := c.Start(); err != nil {
			t.Logf("a process with mounts of its own: %v", err)
			continue
		}
		if err := c.Wait(); err != nil {
			t.Errorf("%v\n%s", err, out.String())
		} else {
			t.Log(strings.TrimSpace(out.String()))
		}
		return
	}
	t.Skip("this account may mount nothing, neither as root nor in a user namespace, so full and vanished disks are not tried")
}

// mounted mounts a small disk in memory.
func mounted(t *testing.T, options string) string {
	t.Helper()
	folder := t.TempDir()
	if err := syscall.Mount("tmpfs", folder, "tmpfs", 0, options); err != nil {
		t.Skip("mounting is not allowed here: ", err)
	}
	t.Cleanup(func() { syscall.Unmount(folder, syscall.MNT_DETACH) })
	return folder
}

// fill leaves so many bytes free on the disk.
func fill(t *testing.T, folder string, free int) (drain func()) {
	t.Helper()
	filler := filepath.Join(folder, "filler")
	f, err := os.Create(filler)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	size := 0
	for n := 0; err == nil; size += n {
		n, err = f.Write(make([]byte, 4096))
	}
	if !errors.Is(err, syscall.ENOSPC) {
		t.Fatal("filling the disk: ", err)
	}
	if err := f.Truncate(int64(size - free)); err != nil {
		t.Fatal(err)
	}
	return func() { os.Remove(filler) }
}

// desk is a bench whose work is done where it is called.
type desk struct {
	*model.Bench
	jobs chan func()
}

func newDesk(t *testing.T, path string) *desk {
	t.Helper()
	plan, err := facets.OpenPlan(path)
	if err != nil {
		t.Fatal(err)
	}
	d := &desk{jobs: make(chan func(), 100)}
	d.Bench, err = model.NewBench(model.NewDocument(plan, path), func(f func()) { d.jobs <- f }, func(model.Change) {}, func() {})
	if err != nil {
		t.Fatal(err)
	}
	return d
}

// edit makes the plan the nth stone of those that are told apart and fill some 50 kB.
func (d *desk) edit(n int) {
	d.Doc.Edit(words.Later("width"), "", func(p *facets.Plan) { number(p, n) })
}

func (d *desk) save(recovery *model.Recovery) (err error) {
	ended := false
	d.Save(d.Doc.Path, false, recovery, func(e error) { err, ended = e, true })
	for !ended {
		(<-d.jobs)()
	}
	return err
}

// refused checks that an error has words and a remedy, and that the file is as it was.
func refused(t *testing.T, what string, err error, path string, before []byte, says ...string) {
	t.Helper()
	if err == nil {
		t.Errorf("%s: no error", what)
		return
	}
	for _, word := range append(says, ";") {
		if !strings.Contains(err.Error(), word) {
			t.Errorf("%s: %q does not say %q", what, err, word)
		}
	}
	if now, _ := os.ReadFile(path); !bytes.Equal(now, before) {
		t.Errorf("%s: the file was %d bytes, now it is %d", what, len(before), len(now))
	}
	if left, _ := filepath.Glob(filepath.Join(filepath.Dir(path), ".*.new")); len(left) > 0 {
		t.Errorf("%s: left over: %v", what, left)
	}
}

// failing runs the program and checks that it ends in the status of a fault of the disk, with words.
func failing(t *testing.T, program string, args []string, says ...string) (stderr string) {
	t.Helper()
	c := exec.Command(program, args...)
	var said bytes.Buffer
	c.Stderr = &said
	c.Run()
	if got := c.ProcessState.ExitCode(); got != command.OwnFault {
		t.Errorf("%v: status %d: %s", args, got, said.String())
	}
	for _, word := range append(says, ";") {
		if !strings.Contains(said.String(), word) {
			t.Errorf("%v: does not say %q: %s", args[:1], word, said.String())
		}
	}
	return said.String()
}

// writers returns commands that write into the folder.
func writers(plan, folder string) map[string][]string {
	return map[string][]string{
		"cut":  {"cut", plan, "--no-maps", "--out", folder},
		"tell": {"tell", plan, "--in", "air", "--lights", "even", "--pixels", "48", "--error", "0.05", "--out", folder},
		"look": {"look", plan, "--in", "air", "--pixels", "48", "--error", "0.05", "--out", folder},
		"tune": tuneArgs(plan, "--write", filepath.Join(folder, "found.toml")),
	}
}

func fullDisk(t *testing.T, program string) {
	folder := mounted(t, "size=400k")
	path := filepath.Join(folder, "mine.toml")
	_, first := stoneNumber(1)
	if err := os.WriteFile(path, []byte(first), 0o600); err != nil {
		t.Fatal(err)
	}
	d := newDesk(t, path)
	recovery := model.NewRecovery(filepath.Join(folder, "unsaved"))
	d.edit(2)
	if err := recovery.Keep(recovery.Turn(), d.Doc.Work()); err != nil {
		t.Fatal(err)
	}
	d.edit(3)
	for name, free := range map[string]int{"full": 0, "full half-way": 8192} {
		drain := fill(t, folder, free)
		refused(t, name, d.save(recovery), path, []byte(first), "full", "make room")
		refused(t, name+", keeping", recovery.Keep(recovery.Turn(), d.Doc.Work()), path, []byte(first), "full", "make room")
		if !d.Doc.Modified() {
			t.Error("a plan that was not saved counts as saved")
		}
		plan := tent(t, t.TempDir(), "quartz", "")
		for _, args := range writers(plan, folder) {
			if free > 0 && args[0] == "tune" {
				continue // its plan is small
			}
			said := failing(t, program, args, "full")
			_, found, _ := strings.Cut(said, "so that it is not lost:\n")
			if found, _, _ = strings.Cut(found, "pavilight: "); args[0] == "tune" {
				if _, err := facets.ReadPlan(strings.NewReader(found), "printed"); err != nil {
					t.Errorf("the plan that was found is lost: %v\n%s", err, said)
				}
			}
			for _, pattern := range []string{"*.pdf", "*.html", "*.png", "found.toml", ".*.new"} {
				left, _ := filepath.Glob(filepath.Join(folder, pattern)) // the pattern is a good one
				for _, f := range left {
					if info, err := os.Stat(f); err != nil || info.Size() < 500 {
						t.Errorf("%s leaves %s half-written", args[0], f)
					}
					os.Remove(f) // a small one that had room
				}
			}
		}
		drain()
	}
	// The record of a search that has no more room: the search goes on and says so.
	const page = 4096 // of the record's first lines
	seen := filepath.Join(folder, "seen")
	args := tuneArgs(tent(t, t.TempDir(), "quartz", ""), "--keep", seen, "--step", "0.1")
	drain := fill(t, folder, 0)
	failing(t, program, args, "--keep", "full", "make room")
	drain()
	drain = fill(t, folder, page)
	c := exec.Command(program, args...)
	var said bytes.Buffer
	c.Stderr = &said
	out, err := c.Output()
	if err != nil || len(out) == 0 || !strings.Contains(said.String(), "not all that was seen could be remembered") {
		t.Errorf("a search whose record is full: %v, %d bytes: %s", err, len(out), said.String())
	}
	record := read(t, seen)
	if len(record) > page || !strings.HasSuffix(record, "\n") {
		t.Errorf("the record that was full has %d bytes, and ends in %.20q", len(record), record[max(0, len(record)-20):])
	}
	drain()
	again, err := exec.Command(program, args...).Output()
	if err != nil || answer(again) != answer(out) || len(read(t, seen)) <= page {
		t.Errorf("with room: %v, the same answer: %v", err, answer(again) == answer(out))
	}
	// What was kept before the disk was full is what the next start offers.
	recovery.Close()
	next := model.NewRecovery(filepath.Join(folder, "unsaved"))
	defer next.Close()
	if found, err := next.Find(); err != nil || len(found) != 1 || found[0].Plan.Name != "Stone 2" {
		t.Errorf("kept work: %v, %v", found, err)
	}
	// And with room it is saved.
	if err := d.save(next); err != nil || d.Doc.Modified() {
		t.Errorf("with room: %v", err)
	}
	if _, want := stoneNumber(3); want != read(t, path) {
		t.Error("with room the file holds something else")
	}
	// No room for one more name is a full disk, too.
	names := mounted(t, "size=400k,nr_inodes=3")
	path = filepath.Join(names, "mine.toml")
	if err := errors.Join(os.WriteFile(path, []byte(first), 0o600), os.WriteFile(filepath.Join(names, "other"), nil, 0o600)); err != nil {
		t.Fatal(err)
	}
	d = newDesk(t, path)
	d.edit(2)
	refused(t, "no more names", d.save(nil), path, []byte(first), "full", "make room")
}

func read(t *testing.T, path string) string {
	t.Helper()
	content, err := os.ReadFile(path)
	if err != nil {
		t.Fatal(err)
	}
	return string(content)
}

func readOnlyDisk(t *testing.T, program string) {
	folder := mounted(t, "size=400k")
	path := filepath.Join(folder, "mine.toml")
	_, first := stoneNumber(1)
	if err := os.WriteFile(path, []byte(first), 0o600); err != nil {
		t.Fatal(err)
	}
	d := newDesk(t, path)
	d.edit(2)
	if err := syscall.Mount("", folder, "", syscall.MS_REMOUNT|syscall.MS_RDONLY, ""); err != nil {
		t.Fatal(err)
	}
	refused(t, "saving", d.save(nil), path, []byte(first), "can only be read", "another folder")
	recovery := model.NewRecovery(filepath.Join(folder, "unsaved"))
	refused(t, "keeping", recovery.Keep(recovery.Turn(), d.Doc.Work()), path, []byte(first), "can only be read")
	if model.NewClaims(filepath.Join(folder, "unsaved")).Take(path) {
		t.Error("a file is told to be open elsewhere where no claim can be made")
	}
	plan := tent(t, t.TempDir(), "quartz", "")
	for _, args := range writers(plan, folder) {
		failing(t, program, args, "read-only")
	}
	failing(t, program, tuneArgs(plan, "--keep", filepath.Join(folder, "seen")), "can only be read")
	if err := syscall.Mount("", folder, "", syscall.MS_REMOUNT, ""); err != nil {
		t.Fatal(err)
	}
	if err := d.save(nil); err != nil {
		t.Errorf("when it may be written again: %v", err)
	}
}

func goneDrive(t *testing.T) {
	drive := mounted(t, "size=400k")
	place := filepath.Join(t.TempDir(), "drive")
	plug := func() {
		if err := errors.Join(os.Mkdir(place, 0o700), syscall.Mount(drive, place, "", syscall.MS_BIND, "")); err != nil {
			t.Fatal(err)
		}
	}
	pull := func() {
		if err := errors.Join(syscall.Unmount(place, syscall.MNT_DETACH), os.Remove(place)); err != nil {
			t.Fatal(err)
		}
	}
	plug()
	path := filepath.Join(place, "mine.toml")
	_, first := stoneNumber(1)
	if err := os.WriteFile(path, []byte(first), 0o600); err != nil {
		t.Fatal(err)
	}
	d := newDesk(t, path)
	home := t.TempDir()
	recovery := model.NewRecovery(home)
	pull()
	if got := d.Doc.Seen(disk.StampOf(path)); got != model.Gone || !d.Doc.Modified() {
		t.Errorf("a file whose drive is gone is told as %v, modified %v", got, d.Doc.Modified())
	}
	d.edit(2)
	if err := d.save(recovery); err == nil || !strings.Contains(err.Error(), "plug it in again") {
		t.Errorf("saving to a drive that is gone: %v", err)
	}
	if _, err := os.Stat(place); err == nil {
		t.Error("saving made a folder in the place of the drive")
	}
	d.Undo()
	plug()
	if got := d.Doc.Seen(disk.StampOf(path)); got != model.Back || d.Doc.Modified() {
		t.Errorf("a file whose drive is back is told as %v, modified %v", got, d.Doc.Modified())
	}
	d.Redo()
	// What could not be saved was kept at home, and a new start offers it.
	recovery.Close()
	next := model.NewRecovery(home)
	defer next.Close()
	if found, err := next.Find(); err != nil || len(found) != 1 || found[0].Plan.Name != "Stone 2" || found[0].Changed {
		t.Errorf("kept work: %v, %v", found, err)
	}
	if err := d.save(next); err != nil || d.Doc.Modified() {
		t.Errorf("with the drive back: %v", err)
	}
	if _, want := stoneNumber(2); want != read(t, path) {
		t.Error("with the drive back the file holds something else")
	}
	// A path that leads nowhere, as to a server that does not answer, is not taken for a
	// file that somebody removed.
	if err := os.WriteFile(filepath.Join(home, "no folder"), nil, 0o600); err != nil {
		t.Fatal(err)
	}
	if got := d.Doc.Seen(disk.StampOf(filepath.Join(home, "no folder", "mine.toml"))); got != model.Lost {
		t.Errorf("a file that cannot be asked after is told as %v", got)
	}
	pull()
}

// fileLimit writes where files may not grow beyond a limit, as on some old disks: it needs
// no mount.
func fileLimit(t *testing.T, program string) {
	folder := t.TempDir()
	for _, args := range writers(tent(t, t.TempDir(), "quartz", strings.Repeat("# A long remark.\n", 500)), folder) {
		limited := append([]string{"-c", `ulimit -f 4 && exec "$@"`, "sh", program}, args...)
		failing(t, "sh", limited, "larger than files may be")
		if left, _ := os.ReadDir(folder); len(left) > 0 {
			t.Errorf("%s leaves %v", args[0], left)
		}
	}
}

// twoSearches starts the program twice over the same record: the second is refused in
// words, and the first loses nothing.
func twoSearches(t *testing.T, program string) {
	folder := t.TempDir()
	plan, seen := tent(t, folder, "quartz", ""), filepath.Join(folder, "seen")
	first := exec.Command(program, tuneArgs(plan, "--keep", seen)...)
	if err := first.Start(); err != nil {
		t.Fatal(err)
	}
	for deadline := time.Now().Add(30 * time.Second); ; time.Sleep(time.Millisecond) {
		if content, _ := os.ReadFile(seen); bytes.Contains(content, []byte("\n")) {
			break
		}
		if time.Now().After(deadline) {
			first.Process.Kill()
			t.Fatal("the first search writes nothing")
		}
	}
	if err := first.Process.Signal(syscall.SIGSTOP); err != nil { // so that it does not end before the second begins
		t.Fatal(err)
	}
	failing(t, program, tuneArgs(plan, "--keep", seen), "another search is writing")
	if err := errors.Join(first.Process.Signal(syscall.SIGCONT), first.Wait()); err != nil {
		t.Errorf("the first search: %v", err)
	}
	again := exec.Command(program, tuneArgs(plan, "--keep", seen)...)
	before := read(t, seen)
	if err := again.Run(); err != nil || read(t, seen) != before {
		t.Errorf("shown again from its record: %v; the record is as it was: %v", err, read(t, seen) == before)
	}
	if n := strings.Count(before, "\n"); n < 10 {
		t.Errorf("the record has %d lines", n)
	}
}
