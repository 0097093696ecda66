package command

import (
	"bytes"
	"context"
	"encoding/json"
	"image/png"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// ownSettings gives the test an empty folder of settings, on any system, and returns it.
func ownSettings(t *testing.T) string {
	t.Helper()
	folder := t.TempDir()
	for _, place := range []string{"XDG_CONFIG_HOME", "AppData", "HOME"} {
		t.Setenv(place, folder)
	}
	config, err := os.UserConfigDir()
	if err != nil {
		t.Fatal(err)
	}
	return config
}

// cutInto runs cut without maps, which cost most of its time, into a fresh folder.
func cutInto(t *testing.T, args ...string) (outcome, string) {
	t.Helper()
	ownSettings(t)
	folder := t.TempDir()
	return runCommand(append([]string{"cut", "--no-maps", "--out", folder}, args...)...), folder
}

func namesIn(t *testing.T, folder string) []string {
	t.Helper()
	entries, err := os.ReadDir(folder)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
	}
	return names
}

func TestCutWritesTheSheet(t *testing.T) {
	for _, row := range []struct {
		name string
		args []string
		want []string // files; a last * stands for any rest
	}{
		{"the bundled stone", nil, []string{"round-cut.pdf"}},
		{"a pupil's and a teacher's copy", []string{"--leave-out", "angles,stops"}, []string{"round-cut-pupil.pdf", "round-cut-teacher.pdf"}},
		{"both kinds of pictures", []string{"--as", "svg,png", "--paper", "a5"}, []string{"round-cut-1.png", "round-cut-1.svg", "*"}},
		{"measured proportions", []string{"--round", "table=56,crown=34,pavilion=40.5", "--material", "quartz"}, []string{"round-by-its-proportions-cut.pdf"}},
		{"a booklet", []string{file(t, "one.toml", sized(t)), file(t, "two.toml", sized(t))}, []string{"one-cut-booklet.pdf"}},
	} {
		o, folder := cutInto(t, row.args...)
		if o.status != Done {
			t.Errorf("%s: status %d: %s", row.name, o.status, o.stderr)
			continue
		}
		got := namesIn(t, folder)
		if n := len(row.want); row.want[n-1] == "*" {
			got = append(got[:0:0], slices.DeleteFunc(got, func(g string) bool { return !slices.Contains(row.want, g) })...)
			got = append(got, "*")
		}
		if !slices.Equal(got, row.want) {
			t.Errorf("%s: wrote %v, want %v", row.name, got, row.want)
		}
	}
}

// sized is a small plan that solves.
func sized(t *testing.T) string {
	t.Helper()
	return strings.NewReplacer("%s", "").Replace(strings.Replace(strings.Replace(cube, `material = "%s"`, `material = "quartz"`, 1), "angle = %s\nindex = [0]\n%s", "angle = 0\nindex = [0]\ndistance = 0.4", 1))
}

func TestCutTellsTheSteps(t *testing.T) {
	o, folder := cutInto(t, "--json")
	if o.status != Done {
		t.Fatal(o.stderr)
	}
	var r cutResult
	if err := json.Unmarshal([]byte(o.stdout), &r); err != nil {
		t.Fatal(err)
	}
	if len(r.Files) != 1 || r.Files[0] != filepath.Join(folder, "round-cut.pdf") || r.Pages < 4 || len(r.Sheets) != 1 {
		t.Errorf("files %v, %d pages, %d sheets", r.Files, r.Pages, len(r.Sheets))
	}
	s := r.Sheets[0]
	if len(s.Steps) == 0 || s.Gear != 96 || s.Carats == nil || s.Steps[0].Set[0] != "96" {
		t.Errorf("got %+v", s)
	}
}

// TestCutSpeaksTheLanguage reads sheets and a booklet's contents; what is told beside them
// stays English, for scripts read it.
func TestCutSpeaksTheLanguage(t *testing.T) {
	one, two := file(t, "one.toml", sized(t)), file(t, "two.toml", sized(t))
	for _, row := range []struct {
		language string
		words    []string // on the pages, beside the plan's own
	}{
		{"en", []string{"Cutting sheets, teacher", "Finished", "Quartz, refractive index 1.544 to 1.553"}},
		{"de", []string{"Schleifblätter, Blatt mit den Antworten", "Fertig", "Quarz, Brechzahl 1,544 bis 1,553"}},
		{"fr", []string{"Fiches de taille, copie du maître", "Finie", "Quartz, indice de réfraction 1,544 à 1,553"}},
	} {
		o, folder := cutInto(t, one, two, "--language", row.language, "--leave-out", "angles", "--as", "pdf,svg", "--json")
		if o.status != Done {
			t.Errorf("%s: status %d: %s", row.language, o.status, o.stderr)
			continue
		}
		if !strings.Contains(o.stdout, `"stop": "until `) {
			t.Errorf("%s: the steps are told as\n%s", row.language, o.stdout)
		}
		pdf, err := os.ReadFile(filepath.Join(folder, "one-cut-booklet-teacher.pdf"))
		if err != nil || !bytes.Contains(pdf, []byte("/Lang ("+row.language+")")) {
			t.Errorf("%s: the PDF does not say its language (%v)", row.language, err)
		}
		var pages strings.Builder
		for _, name := range namesIn(t, folder) {
			if strings.HasSuffix(name, ".svg") && strings.Contains(name, "teacher") {
				text, err := os.ReadFile(filepath.Join(folder, name))
				if err != nil {
					t.Fatal(err)
				}
				pages.Write(text)
			}
		}
		for _, w := range row.words[1:] {
			if !strings.Contains(pages.String(), w) {
				t.Errorf("%s: the pages lack %q", row.language, w)
			}
		}
		title := bytes.Buffer{} // as a PDF writes what is not ASCII
		title.WriteString("\xfe\xff")
		for _, r := range row.words[0] {
			title.Write([]byte{byte(r >> 8), byte(r)})
		}
		if !bytes.Contains(pdf, title.Bytes()) {
			t.Errorf("%s: the title of the PDF is not %s…", row.language, row.words[0])
		}
	}
}

func TestCutIsTheSameTwice(t *testing.T) {
	t.Setenv("SOURCE_DATE_EPOCH", "1700000000")
	read := func() []byte {
		folder := t.TempDir()
		if o := runCommand("cut", "--out", folder); o.status != Done {
			t.Fatal(o.stderr)
		}
		pdf, err := os.ReadFile(filepath.Join(folder, "round-cut.pdf"))
		if err != nil {
			t.Fatal(err)
		}
		return pdf
	}
	one := read()
	if !bytes.Equal(one, read()) {
		t.Error("the same plan gave two PDFs")
	}
	if !bytes.Contains(one, []byte("D:20231114221320")) { // date -u -d @1700000000
		t.Error("the PDF does not carry SOURCE_DATE_EPOCH")
	}
}

func TestCutPicturesOpen(t *testing.T) {
	o, folder := cutInto(t, "--as", "png")
	if o.status != Done {
		t.Fatal(o.stderr)
	}
	f, err := os.Open(filepath.Join(folder, "round-cut-1.png"))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	img, err := png.Decode(f)
	if err != nil {
		t.Fatal(err)
	}
	if size := img.Bounds().Size(); size.X != 1240 || size.Y != 1754 { // A4 at 150 dots an inch
		t.Errorf("the page is %v pixels", size)
	}
}

func TestCutForAMachine(t *testing.T) {
	config := ownSettings(t)
	machines := filepath.Join(config, "pavilight", "machines")
	if err := os.MkdirAll(machines, 0o755); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(filepath.Join(machines, "attic.toml"), []byte("machine = 1\ngear = 80\ncheater = 3\n"), 0o644); err != nil {
		t.Fatal(err)
	}
	o := runCommand("cut", "--no-maps", "--machine", "attic", "--out", t.TempDir())
	if o.status != Done || !strings.Contains(o.stdout, "gear of 80, attic") || !strings.Contains(o.stderr, "between the teeth of the gear of 80") {
		t.Errorf("status %d\n%s%s", o.status, o.stdout, o.stderr)
	}
	o = runCommand("cut", "--no-maps", "--machine", "cellar", "--out", t.TempDir())
	if o.status != InputFault || !strings.Contains(o.stderr, "known are attic") || !strings.Contains(o.stderr, "crown_numbers") {
		t.Errorf("status %d\n%s", o.status, o.stderr)
	}
}

func TestCutRefuses(t *testing.T) {
	plan := sized(t)
	off := file(t, "off.toml", strings.Replace(plan, "index = [0, 24, 48, 72]", "index = [0.5, 24.5, 48.5, 72.5]", 1))
	for _, row := range []struct {
		name   string
		args   []string
		status int
		words  []string
	}{
		{"paper", []string{"--paper", "a3"}, CommandFault, []string{"--paper", "a3", "letter"}},
		{"language", []string{"--language", "la"}, CommandFault, []string{"--language", "la", "en, de, fr"}},
		{"order", []string{"--order", "random"}, CommandFault, []string{"--order", "random", "opposites"}},
		{"kind", []string{"--as", "pdf,doc"}, CommandFault, []string{"--as", "doc", "svg"}},
		{"parts", []string{"--leave-out", "names"}, CommandFault, []string{"--leave-out", "names", "indices"}},
		{"gears", []string{"--gears", "64,x"}, CommandFault, []string{"--gears", "x", "3 to 1000"}},
		{"proportions beside a plan", []string{off, "--round", "table=56"}, CommandFault, []string{"leave one out"}},
		{"a scan without a material", []string{file(t, "a.stl", "")}, InputFault, []string{"a.stl"}},
		{"no cheater", []string{off, "--machine", file(t, "bare.toml", "machine = 1\n")}, InputFault, []string{"off.toml", "G1", "no cheater", "0.5 24.5"}},
		{"a machine's fault", []string{"--machine", file(t, "bad.toml", "machine = 1\ngear = 1\n")}, InputFault, []string{"bad.toml:2", "gear"}},
		{"two bad plans at once", []string{file(t, "p.toml", "plan = 1\n"), file(t, "q.toml", "plan = 1\n")}, InputFault, []string{"p.toml:1: width_mm", "q.toml:1: width_mm"}},
		{"an unknown material in a plan", []string{file(t, "m.toml", strings.Replace(plan, "quartz", "kryptonite", 1))}, InputFault, []string{"m.toml:3: material", "kryptonite"}},
	} {
		o, folder := cutInto(t, row.args...)
		if o.status != row.status || o.stdout != "" {
			t.Errorf("%s: status %d, want %d\n%s%s", row.name, o.status, row.status, o.stdout, o.stderr)
		}
		for _, w := range row.words {
			if !strings.Contains(o.stderr, w) {
				t.Errorf("%s: the message lacks %q:\n%s", row.name, w, o.stderr)
			}
		}
		if names := namesIn(t, folder); len(names) > 0 {
			t.Errorf("%s: left %v behind", row.name, names)
		}
	}
	t.Setenv("SOURCE_DATE_EPOCH", "yesterday")
	if o, _ := cutInto(t); o.status != CommandFault || !strings.Contains(o.stderr, "yesterday") {
		t.Errorf("a wrong date: status %d\n%s", o.status, o.stderr)
	}
}

// TestCutLeavesNoHalfFile: what cannot be written is told, and what stood there stays.
func TestCutLeavesNoHalfFile(t *testing.T) {
	folder := t.TempDir()
	target := filepath.Join(folder, "round-cut.pdf")
	if err := os.MkdirAll(filepath.Join(target, "in the way"), 0o755); err != nil {
		t.Fatal(err)
	}
	o := runCommand("cut", "--no-maps", "--out", folder)
	if o.status != OwnFault || !strings.Contains(o.stderr, "round-cut.pdf") || !strings.Contains(o.stderr, "is a folder") {
		t.Errorf("status %d\n%s", o.status, o.stderr)
	}
	if names := namesIn(t, folder); !slices.Equal(names, []string{"round-cut.pdf"}) {
		t.Errorf("left %v behind", names)
	}
	blocked := file(t, "blocked", "")
	if o := runCommand("cut", "--no-maps", "--out", blocked); o.status != OwnFault || !strings.Contains(o.stderr, "blocked") {
		t.Errorf("a file for a folder: status %d\n%s", o.status, o.stderr)
	}
}

func TestCutStops(t *testing.T) {
	folder := t.TempDir()
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	o := runIn(ctx, "cut", "--out", folder)
	if o.status != Stopped || len(namesIn(t, folder)) > 0 {
		t.Errorf("status %d, left %v behind\n%s", o.status, namesIn(t, folder), o.stderr)
	}
}
