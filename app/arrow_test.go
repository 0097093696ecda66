package main

import (
	"encoding/json"
	"errors"
	"io"
	"os/exec"
	"slices"
	"strings"
	"testing"
)

// listed is what go list tells about a package or a module.
type listed struct {
	ImportPath string
	Imports    []string // with those of test files
	Deps       []string

	TestImports, XTestImports []string

	Path, Version string

	Export, Dir string // compiled, and source
	GoFiles     []string
}

func goList(t *testing.T, args ...string) []listed {
	t.Helper()
	cmd := exec.Command("go", append([]string{"list"}, args...)...)
	cmd.Dir = ".."
	out, err := cmd.Output()
	if err != nil {
		var exit *exec.ExitError
		if errors.As(err, &exit) {
			t.Fatalf("go list: %v\n%s", err, exit.Stderr)
		}
		t.Fatal(err)
	}
	var all []listed
	for d := json.NewDecoder(strings.NewReader(string(out))); ; {
		var l listed
		if err := d.Decode(&l); errors.Is(err, io.EOF) {
			return all
		} else if err != nil {
			t.Fatal(err)
		}
		all = append(all, l)
	}
}

// TestImportArrow holds facets, gems <- trace <- app: what a package of ours may
// import of ours, in its code and in its tests.
func TestImportArrow(t *testing.T) {
	mayImport := map[string][]string{
		"pavilight/facets":          {},
		"pavilight/gems":            {},
		"pavilight/trace":           {"pavilight/facets", "pavilight/gems"},
		"pavilight/trace/tune":      {"pavilight/facets", "pavilight/gems", "pavilight/trace"},
		"pavilight/testdata":        {},
		"pavilight/testdata/budget": {},
	}
	found := map[string]bool{}
	for _, p := range goList(t, "-json=ImportPath,Imports,TestImports,XTestImports", "./...", "./testdata", "./testdata/budget") {
		found[p.ImportPath] = true
		if strings.HasPrefix(p.ImportPath, "pavilight/app") {
			continue
		}
		allowed, ok := mayImport[p.ImportPath]
		if !ok {
			t.Errorf("%s is a folder beyond app, trace, gems, facets and testdata", p.ImportPath)
		}
		check := func(imports []string, what string) {
			for _, i := range imports {
				if strings.HasPrefix(i, "pavilight/testdata") && what == "" {
					t.Errorf("%s imports %s outside its tests", p.ImportPath, i)
				} else if strings.HasPrefix(i, "pavilight/") && !strings.HasPrefix(i, "pavilight/testdata") &&
					i != p.ImportPath && !slices.Contains(allowed, i) {
					t.Errorf("%s imports %s%s", p.ImportPath, i, what)
				}
			}
		}
		check(p.Imports, "")
		check(p.TestImports, " in its tests")
		check(p.XTestImports, " in its tests")
	}
	for path := range mayImport {
		if !found[path] {
			t.Errorf("there is no package %s: the rule above checks nothing", path)
		}
	}
}

// TestWindowLibraryStaysInTheWindow: only the main package and app/ui may reach Fyne,
// so that everything else builds without a C compiler and OpenGL.
func TestWindowLibraryStaysInTheWindow(t *testing.T) {
	const library = "fyne.io/"
	reaches := 0
	for _, p := range goList(t, "-json=ImportPath,Deps", "./...", "./testdata") {
		if !slices.ContainsFunc(p.Deps, func(d string) bool { return strings.HasPrefix(d, library) }) {
			continue
		}
		reaches++
		if p.ImportPath != "pavilight/app" && p.ImportPath != "pavilight/app/ui" {
			t.Errorf("%s reaches %s", p.ImportPath, library)
		}
	}
	if reaches == 0 {
		t.Error("no package reaches the window's library: this test checks nothing")
	}
}

// TestPinnedVersions: the three libraries that the program is built on stay at the
// versions that it was measured with, whatever else asks for newer ones.
func TestPinnedVersions(t *testing.T) {
	pinned := map[string]string{
		"fyne.io/fyne/v2":         "v2.8.1",
		"github.com/go-gl/mathgl": "v1.2.0",
		"gonum.org/v1/gonum":      "v0.17.0",
	}
	for path, want := range pinned {
		modules := goList(t, "-m", "-json", path)
		if len(modules) != 1 || modules[0].Version != want {
			t.Errorf("%s: got %v, want %s", path, modules, want)
		}
	}
}
