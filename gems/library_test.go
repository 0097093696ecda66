package gems

import (
	"errors"
	"fmt"
	"strings"
	"testing"
)

func TestFind(t *testing.T) {
	for asked, want := range map[string]string{
		"corundum": "corundum", "Corundum": "corundum", " RUBY ": "corundum", "sapphire": "corundum", "amethyst": "quartz",
		"emerald": "beryl", "demantoid": "andradite", "tsavorite": "grossular", "cubic zirconia": "zirconia",
		"glass": "crown-glass", "paste": "flint-glass", "mineral oil": "oil", "methylene iodide": "diiodomethane",
		"moonstone": "orthoclase", "titanite": "sphene", "glycerin": "glycerol", "air": "air", "zircon": "zircon",
	} {
		m, err := Find(asked)
		if err != nil {
			t.Errorf("%q: %v", asked, err)
		} else if m.Key != want {
			t.Errorf("%q found %s, want %s", asked, m.Key, want)
		}
	}
}

func TestFindUnknown(t *testing.T) {
	for asked, nearest := range map[string]string{
		"corndum": "corundum", "daimond": "diamond", "qartz": "quartz", "saphire": "corundum", "tourmalin": "tourmaline",
		"wter": "water", "white topaz": "topaz", "Paraiba tourmaline": "tourmaline", "unobtainium": "", "": "", "###": "",
	} {
		m, err := Find(asked)
		var unknown *UnknownError
		if m != nil || !errors.As(err, &unknown) {
			t.Fatalf("%q: %v, %v", asked, m, err)
		}
		if unknown.Nearest != nearest {
			t.Errorf("%q: nearest is %q, want %q", asked, unknown.Nearest, nearest)
		}
		text := err.Error()
		suggests := nearest != "" && strings.Contains(text, fmt.Sprintf("did you mean %q", nearest))
		lists := strings.Contains(text, "diamond, ") && strings.Contains(text, ", water, ")
		if suggests == lists || suggests != (nearest != "") {
			t.Errorf("%q: message suggests %v, lists %v, want one of them: %s", asked, suggests, lists, text)
		}
	}
}

func TestLibraryWith(t *testing.T) {
	own, err := Plain("corundum", 1.7, 4)
	if err != nil {
		t.Fatal(err)
	}
	extra, err := Plain("melt-12", 1.62, 2.9)
	if err != nil {
		t.Fatal(err)
	}
	standard := Standard()
	l := standard.With(own, extra)
	if m, err := l.Find("corundum"); err != nil || m != own {
		t.Errorf("own corundum is not found: %v, %v", m, err)
	}
	if m, err := l.Find("melt-12"); err != nil || m != extra {
		t.Errorf("own glass is not found: %v, %v", m, err)
	}
	if m, err := standard.Find("corundum"); err != nil || m == own {
		t.Errorf("the standard library was changed: %v, %v", m, err)
	}
	if got, want := len(l.Materials()), len(standard.Materials())+1; got != want {
		t.Errorf("%d materials, want %d", got, want)
	}
	if _, err := (&Library{}).Find("air"); err == nil {
		t.Error("an empty library knows air")
	}
}

func TestSlips(t *testing.T) {
	for _, row := range []struct {
		a, b string
		want int
	}{ // the first three are the textbook examples of Levenshtein's distance
		{"kitten", "sitting", 3}, {"saturday", "sunday", 3}, {"flaw", "lawn", 2}, {"", "air", 3}, {"air", "", 3}, {"öl", "ol", 1},
	} {
		if got := slipsBetween(row.a, row.b); got != row.want {
			t.Errorf("%q to %q: %d, want %d", row.a, row.b, got, row.want)
		}
	}
}

func ExampleFind() {
	ruby, _ := Find("ruby")
	n, _ := ruby.Indices(LineD)
	fmt.Printf("%s, %v: %.3f and %.3f\n", ruby.Name, ruby.Character(), n.Ordinary(), n.Extraordinary())
	_, err := ruby.Index(150)
	fmt.Println(err)
	// Output:
	// Corundum, uniaxial negative: 1.768 and 1.760
	// Corundum: 150 nm is outside the range of its refractive index, 200 to 5000 nm; choose a wavelength inside
}

func BenchmarkFind(b *testing.B) {
	b.ReportAllocs()
	for b.Loop() {
		if _, err := Find("demantoid"); err != nil {
			b.Fatal(err)
		}
	}
}

func BenchmarkIndices(b *testing.B) {
	m, err := Find("corundum")
	if err != nil {
		b.Fatal(err)
	}
	b.ReportAllocs()
	for b.Loop() {
		if _, err := m.Indices(LineD); err != nil {
			b.Fatal(err)
		}
	}
}
