package stock

import (
	"os"
	"path/filepath"
	"strings"
	"testing"
)

func TestOpen(t *testing.T) {
	config := t.TempDir()
	for _, place := range []string{"XDG_CONFIG_HOME", "AppData", "HOME"} { // by the system
		t.Setenv(place, config)
	}
	plain, err := Open("")
	if err != nil {
		t.Fatal(err)
	}
	if _, err := plain.Find("corundum"); err != nil {
		t.Error(err)
	}
	// The repository's own sample of such a file, named and then in its usual place.
	text, err := os.ReadFile("../../testdata/gems/bench.toml")
	if err != nil {
		t.Fatal(err)
	}
	named := filepath.Join(config, "named.toml")
	if err := os.WriteFile(named, text, 0o644); err != nil {
		t.Fatal(err)
	}
	if err := os.MkdirAll(filepath.Dir(OwnFile()), 0o755); err != nil {
		t.Fatal(err)
	}
	for _, path := range []string{named, ""} {
		if path == "" {
			if err := os.WriteFile(OwnFile(), text, 0o644); err != nil {
				t.Fatal(err)
			}
		}
		l, err := Open(path)
		if err != nil {
			t.Fatal(err)
		}
		if more := len(l.Materials()) - len(plain.Materials()); more < 1 {
			t.Errorf("%q: %d materials more than the bundled ones", path, more)
		}
	}
	if err := os.WriteFile(OwnFile(), []byte("nonsense = ["), 0o644); err != nil {
		t.Fatal(err)
	}
	if _, err := Open(""); err == nil || !strings.Contains(err.Error(), "materials.toml") {
		t.Errorf("a broken file: %v", err)
	}
	if _, err := Open(filepath.Join(config, "absent.toml")); err == nil || !strings.Contains(err.Error(), "absent.toml") {
		t.Errorf("an absent file that was named: %v", err)
	}
	if _, err := Open(config); err == nil {
		t.Error("a folder was taken for a file of materials")
	}
}
