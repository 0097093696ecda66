package ui

import (
	"errors"
	"os"
	"path/filepath"
	"testing"
)

func TestSettingsCutShortComeBack(t *testing.T) {
	path := filepath.Join(t.TempDir(), "preferences.json")
	const first, second = `{"view.theme":"dark"}`, `{"view.theme":"light"}`
	for _, step := range []struct{ name, holds, want string }{
		{"whole", first, first},
		{"emptied, as by a kill", "", first},
		{"cut short, as on a full disk", `{"view.th`, first},
		{"whole again", second, second},
		{"no object", `[1, 2]`, second},
	} {
		if err := os.WriteFile(path, []byte(step.holds), 0o600); err != nil {
			t.Fatal(err)
		}
		mendSettings(path)
		if got, err := os.ReadFile(path); err != nil || string(got) != step.want {
			t.Errorf("%s: %q, %v; want %q", step.name, got, err, step.want)
		}
	}
	if err := os.Remove(path); err != nil {
		t.Fatal(err)
	}
	mendSettings(path)
	if _, err := os.Stat(path); !errors.Is(err, os.ErrNotExist) {
		t.Error("settings that the user removed are back")
	}
}
