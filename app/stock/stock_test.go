package stock

import (
	"maps"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"pavilight/app/words"
	"pavilight/gems"
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

// TestTheTableIsSaid holds that the languages have words for all that the table says of
// stones, and for the names of all that it holds.
func TestTheTableIsSaid(t *testing.T) {
	said := map[string]bool{}
	for _, keys := range [][]words.Key{names(), cautions(), toughness(), cleavage()} {
		for _, k := range keys {
			said[k.English()] = true
		}
	}
	needless := maps.Clone(said)
	said[""] = true // what is not known
	look := func(m *gems.Material, texts ...string) {
		for _, text := range texts {
			if !said[text] {
				t.Errorf("%s: %q is said in English alone: add it to the keys in words.go", m.Key, text)
			}
			delete(needless, text)
		}
	}
	for _, m := range gems.Standard().Materials() {
		look(m, m.Name)
		if m.Key != "" {
			delete(needless, titled(m.Key))
		}
	}
	for _, m := range gems.Stones() {
		look(m, slices.Concat(m.Cautions, []string{m.Toughness, m.Cleavage})...)
	}
	for text := range needless {
		t.Errorf("the table does not say %q any more: take it out of words.go", text)
	}
}

func TestKeyOf(t *testing.T) {
	for _, row := range []struct{ language, key, want string }{
		{"en", "immersion-oil", "immersion-oil"},
		{"de", "immersion-oil", "Immersionsöl"},
		{"fr", "immersion-oil", "huile à immersion"},
		{"de", "sheet-glass", "Kronglas B 270"},
		{"fr", "water", "eau"},
		{"fr", "workshop-wax", "workshop-wax"},
		{"de", "citrine", "citrine"}, // a variety is no key
		{"de", "", ""},
	} {
		if got := KeyOf(words.In(row.language), row.key); got != row.want {
			t.Errorf("%s: %q is called %q, want %q", row.language, row.key, got, row.want)
		}
	}
}
