package version

import (
	"runtime/debug"
	"strings"
	"testing"
)

func TestRecordedCommit(t *testing.T) {
	const whole = "0123456789abcdef0123456789abcdef01234567"
	for _, test := range []struct {
		name     string
		settings []debug.BuildSetting
		want     string
	}{
		{"none written down", nil, ""},
		{"clean", []debug.BuildSetting{{Key: "vcs.revision", Value: whole}, {Key: "vcs.modified", Value: "false"}}, "0123456789ab"},
		{"files changed since", []debug.BuildSetting{{Key: "vcs.revision", Value: whole}, {Key: "vcs.modified", Value: "true"}}, "0123456789ab+"},
		{"too short to be one", []debug.BuildSetting{{Key: "vcs.revision", Value: "01"}}, ""},
	} {
		if got := recorded(test.settings); got != test.want {
			t.Errorf("%s: got %q, want %q", test.name, got, test.want)
		}
	}
}

func TestNameAndLines(t *testing.T) {
	b := Build{Version: "1.2.3", Commit: "0123456789ab", Go: "go1.26", System: "linux/amd64", Kernel: "float64",
		Libraries: []string{"a/b v1.0.0"}}
	if got, want := b.Name(), "Pavilight 1.2.3 0123456789ab"; got != want {
		t.Errorf("name: got %q, want %q", got, want)
	}
	want := "Pavilight 1.2.3 0123456789ab\ngo1.26 on linux/amd64, no window\nlight followed in float64\na/b v1.0.0"
	if got := b.String(); got != want {
		t.Errorf("lines: got\n%s\nwant\n%s", got, want)
	}
	b.Commit = ""
	if got, want := b.Name(), "Pavilight 1.2.3"; got != want {
		t.Errorf("name without a commit: got %q, want %q", got, want)
	}
	if now := Current(); now.Version != Number || now.Kernel == "" || !strings.Contains(now.System, "/") {
		t.Errorf("the running build is not told of: %+v", now)
	}
}
