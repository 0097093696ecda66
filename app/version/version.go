// Package version tells which Pavilight this is: its number, the commit it was built
// from where that is known, and what it runs on.
package version

import (
	"fmt"
	"runtime"
	"runtime/debug"
	"slices"
	"strings"

	"pavilight/trace"
)

// Number is the version that the sources are on their way to; app/package takes it
// from this line.
const Number = "0.1.0"

// commit is written by the linker where the sources' history is not at hand to the
// build (-X pavilight/app/version.commit=...).
var commit string

// commitDigits is how much of a commit's name is told.
const commitDigits = 12

// Build is one build of the program.
type Build struct {
	Version string `json:"version"`
	Commit  string `json:"commit,omitempty"` // first twelve digits, "+" after them if files were changed since; empty if unknown
	Go      string `json:"go"`
	System  string `json:"system"` // as in "linux/amd64"
	Window  bool   `json:"window"` // whether this build has one
	Kernel  string `json:"kernel"` // how light is followed on this machine

	// Libraries are those of the window and of the numbers, each as path and version.
	Libraries []string `json:"libraries"`
}

// Current returns the build that is running.
func Current() Build {
	info, ok := debug.ReadBuildInfo()
	if !ok {
		info = &debug.BuildInfo{}
	}
	b := Build{
		Version: Number, Commit: commit, Go: runtime.Version(), System: runtime.GOOS + "/" + runtime.GOARCH,
		Kernel: trace.Kernel(), Libraries: []string{},
	}
	if b.Commit == "" {
		b.Commit = recorded(info.Settings)
	}
	for _, d := range info.Deps {
		switch d.Path {
		case "fyne.io/fyne/v2":
			b.Window = true
			fallthrough
		case "github.com/go-gl/mathgl", "gonum.org/v1/gonum", "github.com/pelletier/go-toml/v2":
			b.Libraries = append(b.Libraries, d.Path+" "+d.Version)
		}
	}
	return b
}

// recorded returns the commit that the go command wrote down, empty if it did not.
func recorded(settings []debug.BuildSetting) string {
	of := func(key string) string {
		i := slices.IndexFunc(settings, func(s debug.BuildSetting) bool { return s.Key == key })
		if i < 0 {
			return ""
		}
		return settings[i].Value
	}
	revision := of("vcs.revision")
	if len(revision) < commitDigits {
		return ""
	}
	revision = revision[:commitDigits]
	if of("vcs.modified") == "true" {
		revision += "+"
	}
	return revision
}

// Name is the program's name, version and commit, as sheets and reports print it.
func (b Build) Name() string {
	return strings.TrimSpace("Pavilight " + b.Version + " " + b.Commit)
}

// String tells all of it, a line each.
func (b Build) String() string {
	window := "no window"
	if b.Window {
		window = "with the window"
	}
	lines := append([]string{
		b.Name(),
		fmt.Sprintf("%s on %s, %s", b.Go, b.System, window),
		"light followed in " + b.Kernel,
	}, b.Libraries...)
	return strings.Join(lines, "\n")
}
