package gems

import (
	"encoding/json"
	"slices"
	"strings"
	"testing"
)

func TestDescriptionsCarryTheirSources(t *testing.T) {
	for _, m := range Standard().Materials() {
		d := m.Describe()
		if _, err := json.Marshal(d); err != nil {
			t.Errorf("%s: %v", m.Key, err)
		}
		if row := m.Row(); len(row) != len(Heading()) || slices.Contains(row, "") && m.Hardness != (Span{}) {
			t.Errorf("%s: row %q", m.Key, row)
		}
		for _, e := range d.Entries() {
			if e.Label == "" || e.Value == "" {
				t.Errorf("%s: empty entry %+v", m.Key, e)
			}
			numbers := !slices.Contains([]string{"name", "group", "optic character", "birefringence", "body colour", "note"}, e.Label)
			if numbers && e.Source.Mark() == "" {
				t.Errorf("%s: %s has no source", m.Key, e.Label)
			}
		}
	}
}

func TestPageOfTopaz(t *testing.T) {
	var page []string
	for _, e := range mustFind(t, "topaz").Describe().Entries() {
		page = append(page, e.Label+": "+e.Value)
	}
	for _, want := range []string{
		"optic character: biaxial positive", "alpha index: 1.61900 at the sodium D line, fitted over 400 to 700 nm",
		"dispersion: 0.0140 from B to G, Abbe number 75.7", "birefringence: 0.0080", "optic angle 2V: 60° between the optic axes, by the three indices", "density: 3.53 g/cm³ (3.5 to 3.57)",
		"hardness: 8 on Mohs's scale", "cleavage: perfect basal {001}", "body colour: as if colourless",
	} {
		if !slices.Contains(page, want) {
			t.Errorf("page lacks %q:\n%s", want, strings.Join(page, "\n"))
		}
	}
}

func TestHowAnIndexIsKnown(t *testing.T) {
	for key, want := range map[string]string{
		"diamond":     "published for 226 to 760 nm",
		"moissanite":  "published for 435.8 to 2325 nm, fitted from there to 400 nm",
		"sheet-glass": "published for 435.83 to 656.27 nm, fitted from there to 400 nm, fitted on to 700 nm",
		"amber":       "one value, taken as constant over 400 to 700 nm",
		"beryl":       "fitted over 400 to 700 nm",
	} {
		if got := mustFind(t, key).Describe().Rays[0].How; got != want {
			t.Errorf("%s: %q, want %q", key, got, want)
		}
	}
}

func TestDescriptionOfANarrowRange(t *testing.T) {
	m := &Material{Key: "x", Name: "x", Rays: []Dispersion{{Kind: Cauchy, Coefficients: []float64{1.5, 0.004}, Lo: 600, Hi: 700, Source: given}}}
	d := m.Describe()
	if d.Index != nil || d.Birefringence != nil || d.Rays[0].Index != nil || d.Rays[0].Dispersion != nil {
		t.Errorf("numbers from outside the range: %+v", d)
	}
	if _, err := json.Marshal(d); err != nil {
		t.Error(err)
	}
	if row := m.Row(); row[2] != "-" {
		t.Errorf("row %q", row)
	}
}

func TestSourceMarks(t *testing.T) {
	for source, want := range map[Source]Mark{
		"a book; read": Read, "a book; from memory, not checked": Memory, "both lines; computed": Computed,
		practice: Practice, given: Given, "my bench; given by the user": Given, "a book": "", "": "", "unread": "",
	} {
		if got := source.Mark(); got != want {
			t.Errorf("%q is marked %q, want %q", source, got, want)
		}
	}
}
