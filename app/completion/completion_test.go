package completion_test

import (
	"bytes"
	"flag"
	"os"
	"os/exec"
	"slices"
	"strings"
	"testing"

	"github.com/alecthomas/kong"

	"pavilight/app/command"
	"pavilight/app/completion"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

var update = flag.Bool("update", false, "write the files anew")

// values are what can follow the flags that take names.
func values() completion.Values {
	var materials []string
	for _, m := range gems.Standard().Materials() {
		materials = append(materials, m.Key)
	}
	slices.Sort(materials)
	return completion.Values{
		"material": materials, "in": materials, "dish": materials, "gems": materials, "to": materials,
		"light": trace.LightNames(), "illuminant": trace.IlluminantNames(), "outline": facets.Outlines(),
		"paper": {"a4", "a5", "letter"}, "language": {"en", "de", "fr"}, "depth": {"client", "colleague"},
		"order": {"lap", "opposites"},
	}
}

func grammar(t *testing.T) *kong.Application {
	t.Helper()
	g, err := command.Grammar()
	if err != nil {
		t.Fatal(err)
	}
	return g
}

// TestFilesAreFresh compares the files in the repository with what the command line takes.
func TestFilesAreFresh(t *testing.T) {
	for name, write := range completion.Files {
		text := write(grammar(t), values())
		if *update {
			if err := os.WriteFile(name, text, 0o644); err != nil {
				t.Fatal(err)
			}
		}
		have, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		if !bytes.Equal(have, text) {
			t.Errorf("%s is out of date: run go test ./app/completion -update", name)
		}
	}
}

// TestShellsTakeThem lets each shell that is installed read its file.
func TestShellsTakeThem(t *testing.T) {
	for shell, name := range map[string]string{"bash": "pavilight.bash", "zsh": "_pavilight", "fish": "pavilight.fish"} {
		path, err := exec.LookPath(shell)
		if err != nil {
			t.Logf("%s is not installed: %s is not tried", shell, name)
			continue
		}
		if out, err := exec.Command(path, "-n", name).CombinedOutput(); err != nil || len(out) > 0 {
			t.Errorf("%s -n %s: %v\n%s", shell, name, err, out)
		}
	}
}

// TestBashCompletes asks bash what it would offer.
func TestBashCompletes(t *testing.T) {
	bash, err := exec.LookPath("bash")
	if err != nil {
		t.Skip("bash is not installed")
	}
	const ask = `source ./pavilight.bash; COMP_WORDS=("$@"); COMP_CWORD=$(($# - 1)); _pavilight; printf '%s\n' "${COMPREPLY[@]}"`
	for _, row := range []struct {
		typed string // the last word is being typed
		some  []string
		not   string
	}{
		{"pavilight lo", []string{"look"}, "gems"},
		{"pavilight look --ti", []string{"--tilt", "--tiers"}, "--vary"},
		{"pavilight --json look --light ov", []string{"overcast"}, "room"},
		{"pavilight look --material spess", []string{"spessartine"}, "quartz"},
		{"pavilight gems quar", []string{"quartz"}, "--json"},
		{"pavilight look comp", []string{"completion.go"}, "look"},
		{"pavilight look --tilt ", nil, "completion.go"},
	} {
		args := append([]string{"-c", ask, "bash"}, strings.Split(row.typed, " ")...)
		out, err := exec.Command(bash, args...).CombinedOutput()
		if err != nil {
			t.Fatalf("%s: %v\n%s", row.typed, err, out)
		}
		got := strings.Fields(string(out))
		for _, want := range row.some {
			if !slices.Contains(got, want) {
				t.Errorf("after %q bash offers %q, not %s", row.typed, got, want)
			}
		}
		if slices.Contains(got, row.not) {
			t.Errorf("after %q bash offers %s", row.typed, row.not)
		}
	}
}
