package model

import (
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace/tune"
)

func TestFaultsAreToldInTheLanguage(t *testing.T) {
	fault := &facets.Fault{File: "/home/plans/a.toml", Line: 12, Tier: "P1", Why: "P1@6, P1@18 never touches the stone", Remedy: "cut it deeper or delete it"}
	other := &facets.Fault{File: "/home/plans/a.toml", Field: "gear", Got: "0", Why: "the gear has no teeth", Remedy: "give the number of teeth"}
	for _, row := range []struct {
		language string
		err      error
		want     []string
	}{
		{"en", fault, []string{`a.toml:12: tier "P1": P1@6, P1@18 never touches the stone; cut it deeper or delete it`}},
		{"de", facets.Faults{fault, other}, []string{
			`a.toml:12: Reihe "P1": P1@6, P1@18 berührt den Stein nie; schleifen Sie sie tiefer, oder löschen Sie sie`,
			`a.toml: gear "0": the gear has no teeth; give the number of teeth`}},
		{"fr", words.Errorf("a plan needs a tier"), []string{"il faut un rang à un plan"}},
		{"fr", nil, nil},
	} {
		got := InWords(words.In(row.language), row.err)
		if strings.Join(got, "\n") != strings.Join(row.want, "\n") {
			t.Errorf("%s: %q, want %q", row.language, got, row.want)
		}
	}
}

// TestTextsOfOtherPackages holds that what is translated of packages that speak English is
// what they say: each piece stands in their sources.
func TestTextsOfOtherPackages(t *testing.T) {
	source := func(folder string) string {
		files, err := filepath.Glob(filepath.Join("..", "..", folder, "*.go"))
		if err != nil || len(files) == 0 {
			t.Fatal("no sources in "+folder, err)
		}
		var all strings.Builder
		for _, f := range files {
			if !strings.HasSuffix(f, "_test.go") {
				text, err := os.ReadFile(f)
				if err != nil {
					t.Fatal(err)
				}
				all.Write(text)
			}
		}
		return all.String()
	}
	for folder, keys := range map[string][]words.Key{"facets": commonFaults(), filepath.Join("trace", "tune"): append(searchPhases(), causes()...)} {
		text := source(folder)
		for _, k := range keys {
			for _, piece := range strings.Split(k.English(), "%s") {
				if !strings.Contains(text, strings.TrimSpace(piece)) {
					t.Errorf("%s does not say %q any more: mend %q", folder, piece, k)
				}
			}
		}
	}
	if string(MachineSource) != tune.UsualMachineSource {
		t.Errorf("the usual machine's source is %q here, %q there", MachineSource, tune.UsualMachineSource)
	}
	for _, m := range tune.Measures() {
		if string(MeasureName(m)) != m.Name() {
			t.Errorf("measure %v is called %q here, %q there", m, MeasureName(m), m.Name())
		}
	}
}
