package main

import (
	"bytes"
	"encoding/json"
	"errors"
	"fmt"
	"io"
	"io/fs"
	"maps"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
)

// module is one that is linked into a build, or Go's own library and runtime.
type module struct {
	path, version string
	folder        string
	systems       []string          // on whose builds it is linked
	linked        map[string]bool   // folders of its packages that are linked
	texts         map[string]string // licence texts by their path in the module
}

// ownLibrary stands for what every Go program is linked with. Its version is that of the
// Go at hand, so it is left out.
const ownLibrary = "Go: its library and runtime"

// systems are those that the program is built for with its window.
func systems() []string { return []string{"linux", "windows", "darwin"} }

// collect returns the licences of all that is linked into the program whose module
// lies in root, as app/licences holds them. It fails for a module without any.
func collect(root string) ([]byte, error) {
	modules, err := linkedModules(root)
	if err != nil {
		return nil, err
	}
	var b bytes.Buffer
	fmt.Fprintf(&b, "Pavilight is built with the work of others. These are the modules that are linked into it,\n"+
		"each with the licences that it comes with. Unless a line says otherwise a module is part of the\n"+
		"builds for %s.\n\n", strings.Join(systems(), ", "))
	for _, m := range modules {
		fmt.Fprintln(&b, m.heading())
	}
	for _, m := range modules {
		if err := m.readTexts(); err != nil {
			return nil, err
		}
		fmt.Fprintf(&b, "\n%s\n%s\n", strings.Repeat("=", 80), m.heading())
		for _, name := range slices.Sorted(maps.Keys(m.texts)) {
			fmt.Fprintf(&b, "\n-- %s\n\n%s\n", name, m.texts[name])
		}
	}
	return b.Bytes(), nil
}

// heading names the module, its version and, if it is not in all builds, those it is in.
func (m *module) heading() string {
	line := strings.TrimSpace(m.path + " " + m.version)
	if len(m.systems) < len(systems()) {
		line += " (" + strings.Join(m.systems, ", ") + " only)"
	}
	return line
}

// linkedModules lists the modules of the packages that the builds for all systems
// link, in the order of their paths, and Go itself.
func linkedModules(root string) ([]*module, error) {
	goRoot, err := goTool(root, "", "env", "GOROOT")
	if err != nil {
		return nil, err
	}
	goFolder := strings.TrimSpace(string(goRoot))
	all := map[string]*module{ownLibrary: {
		path: ownLibrary, folder: goFolder, systems: systems(),
		linked: map[string]bool{goFolder: true},
	}}
	for _, system := range systems() {
		out, err := goTool(root, system, "list", "-deps", "-json=Dir,Module", "./app")
		if err != nil {
			return nil, err
		}
		for d := json.NewDecoder(bytes.NewReader(out)); ; {
			var p struct {
				Dir    string
				Module *struct {
					Path, Version, Dir string
					Main               bool
				}
			}
			if err := d.Decode(&p); errors.Is(err, io.EOF) {
				break
			} else if err != nil {
				return nil, err
			}
			if p.Module == nil || p.Module.Main {
				continue
			}
			m := all[p.Module.Path]
			if m == nil {
				m = &module{path: p.Module.Path, version: p.Module.Version, folder: p.Module.Dir, linked: map[string]bool{}}
				all[m.path] = m
			}
			m.linked[p.Dir] = true
			if !slices.Contains(m.systems, system) {
				m.systems = append(m.systems, system)
			}
		}
	}
	modules := slices.SortedFunc(maps.Values(all), func(a, b *module) int { return strings.Compare(a.path, b.path) })
	return modules, nil
}

// goTool runs the go command in root for a system, for this one if it is empty.
func goTool(root, system string, args ...string) ([]byte, error) {
	cmd := exec.Command("go", args...)
	cmd.Dir = root
	cmd.Env = append(os.Environ(), "CGO_ENABLED=1", "GOFLAGS=")
	if system != "" {
		cmd.Env = append(cmd.Env, "GOOS="+system, "GOARCH=amd64")
	}
	out, err := cmd.Output()
	var exit *exec.ExitError
	if errors.As(err, &exit) {
		err = fmt.Errorf("go %s: %w\n%s", strings.Join(args, " "), err, exit.Stderr)
	}
	return out, err
}

// licenceName matches what files with licences, and with notices that must go along,
// are called.
var licenceName = regexp.MustCompile(`(?i)^(licen[cs]e|copying|notice|patents|ofl|third_party_licen)`)

// sourceName matches files of code that only begin with such a word.
var sourceName = regexp.MustCompile(`(?i)\.(go|c|h|py|sh)$`)

// readTexts reads the licences of the module: those at its top, and those that lie with
// a package that is linked or with what such a package embeds.
func (m *module) readTexts() error {
	m.texts = map[string]string{}
	err := filepath.WalkDir(m.folder, func(path string, entry fs.DirEntry, err error) error {
		if err != nil {
			return err
		}
		if entry.IsDir() {
			if m.path == ownLibrary && path != m.folder || entry.Name() == "testdata" {
				return fs.SkipDir
			}
			return nil
		}
		inside, err := filepath.Rel(m.folder, path)
		if err != nil {
			return err
		}
		parts := strings.Split(filepath.ToSlash(inside), "/")
		if !slices.ContainsFunc(parts, licenceName.MatchString) || sourceName.MatchString(entry.Name()) {
			return nil
		}
		if len(parts) > 1 && !licenceName.MatchString(parts[0]) && !m.linked[m.nearestPackage(filepath.Dir(path))] {
			return nil
		}
		text, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		m.texts[filepath.ToSlash(inside)] = tidy(text)
		return nil
	})
	if err == nil && len(m.texts) == 0 {
		err = fmt.Errorf("%s %s is linked and has no licence", m.path, m.version)
	}
	return err
}

// nearestPackage returns the folder at or above the given one that holds a package.
func (m *module) nearestPackage(folder string) string {
	for folder != m.folder {
		if files, err := filepath.Glob(filepath.Join(folder, "*.go")); err == nil && len(files) > 0 {
			return folder
		}
		folder = filepath.Dir(folder)
	}
	return folder
}

// textWidth is how many letters a line of the text may have.
const textWidth = 100

// tidy returns a text with plain line ends, without blanks at lines' ends, and with
// longer lines broken between words.
func tidy(text []byte) string {
	var lines []string
	for line := range strings.Lines(strings.TrimPrefix(string(text), "\ufeff")) {
		line = strings.TrimRight(line, " \t\r\f\n")
		for len([]rune(line)) > textWidth {
			letters := []rune(line)
			end := textWidth
			for end > 0 && letters[end] != ' ' {
				end--
			}
			if end == 0 { // one long word
				break
			}
			lines = append(lines, strings.TrimRight(string(letters[:end]), " "))
			line = string(letters[end+1:])
		}
		lines = append(lines, line)
	}
	return strings.Trim(strings.Join(lines, "\n"), "\n")
}
