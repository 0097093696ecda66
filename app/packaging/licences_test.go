package main

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pavilight/app/licences"
)

// TestLicencesAreThoseOfTheLinkedModules collects them anew. It fails for a module
// that comes with none, and when the modules or their licences have changed.
func TestLicencesAreThoseOfTheLinkedModules(t *testing.T) {
	want, err := collect(filepath.Join("..", ".."))
	if err != nil {
		t.Fatal(err)
	}
	got := licences.ThirdParty()
	if got != string(want) {
		t.Error("app/licences/third-party.txt is stale; run: go run ./app/packaging licences")
	}
	for _, line := range strings.Split(got, "\n") {
		if len([]rune(line)) > textWidth && strings.Contains(strings.TrimSpace(line), " ") {
			t.Errorf("a line is too long to be shown: %s", line)
		}
	}
}

// TestLinkedModules compares with what is known of the program from its design.
func TestLinkedModules(t *testing.T) {
	modules, err := linkedModules(filepath.Join("..", ".."))
	if err != nil {
		t.Fatal(err)
	}
	byPath := map[string]*module{}
	for _, m := range modules {
		byPath[m.path] = m
	}
	for _, path := range []string{ownLibrary, "fyne.io/fyne/v2", "github.com/go-gl/mathgl", "gonum.org/v1/gonum",
		"github.com/pelletier/go-toml/v2", "codeberg.org/go-pdf/fpdf", "github.com/go-gl/glfw/v3.4/glfw"} {
		if m := byPath[path]; m == nil || len(m.systems) != len(systems()) {
			t.Errorf("%s should be part of every build", path)
		}
	}
	// Needed by tests of other modules alone.
	for _, path := range []string{"github.com/stretchr/testify", "github.com/davecgh/go-spew"} {
		if byPath[path] != nil {
			t.Errorf("%s is not linked into the program", path)
		}
	}
}

func TestReadTexts(t *testing.T) {
	folder := t.TempDir()
	write := func(name, text string) {
		path := filepath.Join(folder, filepath.FromSlash(name))
		if err := os.MkdirAll(filepath.Dir(path), 0o755); err != nil {
			t.Fatal(err)
		}
		if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
			t.Fatal(err)
		}
	}
	m := &module{path: "example.org/m", version: "v1.0.0", folder: folder, linked: map[string]bool{folder: true,
		filepath.Join(folder, "shown"): true}}
	if err := m.readTexts(); err == nil || !strings.Contains(err.Error(), "example.org/m v1.0.0") {
		t.Errorf("a module without a licence was taken: %v", err)
	}
	write("LICENSE", "\ufeffAll  \r\nmay\r\n\r\n")
	write("license.go", "package m")
	write("shown/shown.go", "package shown")
	write("shown/font/OFL.txt", strings.Repeat("word ", 30))
	write("other/other.go", "package other")
	write("other/COPYING", "not linked")
	write("testdata/LICENSE", "of test data")
	write("THIRD_PARTY_LICENSES/one", "of code taken over")
	if err := m.readTexts(); err != nil {
		t.Fatal(err)
	}
	want := map[string]string{
		"LICENSE":                  "All\nmay",
		"shown/font/OFL.txt":       strings.TrimSpace(strings.Repeat("word ", 20)) + "\n" + strings.TrimSpace(strings.Repeat("word ", 10)),
		"THIRD_PARTY_LICENSES/one": "of code taken over",
	}
	for name, text := range want {
		if m.texts[name] != text {
			t.Errorf("%s: got %q, want %q", name, m.texts[name], text)
		}
	}
	if len(m.texts) != len(want) {
		t.Errorf("got %d texts, want %d", len(m.texts), len(want))
	}
}
