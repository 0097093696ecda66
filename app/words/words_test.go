package words

import (
	"errors"
	"fmt"
	"io/fs"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"testing"
	"time"
)

// verb matches what fmt fills in: flags, width and precision, the number of the argument in
// brackets, and the letter.
var verb = regexp.MustCompile(`%[-+# 0]*\d*(?:\.\d*)?(?:\[(\d+)\])?[-+# 0]*\d*(?:\.\d*)?([a-zA-Z%])`)

// verbs returns the verb of each argument, in the arguments' order.
func verbs(text string) []string {
	var found []string
	next := 1
	for _, m := range verb.FindAllStringSubmatch(text, -1) {
		if m[2] == "%" {
			continue
		}
		if m[1] != "" {
			next, _ = strconv.Atoi(m[1]) // the expression lets digits through only
		}
		found = append(found, fmt.Sprintf("%02d%s", next, m[2]))
		next++
	}
	slices.Sort(found)
	return slices.Compact(found) // a text may say one twice
}

// sampleArgs returns something to fill each verb in with.
func sampleArgs(text string) (args []any) {
	for _, v := range verbs(text) {
		switch v[len(v)-1] {
		case 'd':
			args = append(args, 2)
		case 'f', 'g', 'e':
			args = append(args, 2.5)
		default:
			args = append(args, "two")
		}
	}
	return args
}

// TestCatalogsFillInAlike holds that a text has the same verbs for the same arguments in
// every language, and that no catalog says nothing.
func TestCatalogsFillInAlike(t *testing.T) {
	for _, language := range Languages()[1:] {
		says, err := readCatalog(language)
		if err != nil {
			t.Fatalf("%s.toml: %v", language, err)
		}
		for key, text := range says {
			if want, got := verbs(key.English()), verbs(text); !slices.Equal(want, got) {
				t.Errorf("%s.toml: %q is filled in with %v, in English with %v: give verbs that stand in another order numbers, as in %%[2]s or %%.1[2]f",
					language, text, got, want)
			}
			if filled := fmt.Sprintf(text, sampleArgs(key.English())...); strings.Contains(filled, "%!") {
				t.Errorf("%s.toml: %q cannot be filled in: %s", language, text, filled)
			}
			if strings.TrimSpace(text) == "" {
				t.Errorf("%s.toml: nothing is said for %q", language, key)
			}
			if strings.Contains(text, "|") && !strings.Contains(key.English(), "|") {
				t.Errorf("%s.toml: %q: the remark after the bar belongs to the key alone", language, text)
			}
		}
	}
}

func TestVerbs(t *testing.T) {
	if a, b := verbs("%s costs %.2f"), verbs("%.1[2]f kostet %[1]s"); !slices.Equal(a, b) {
		t.Errorf("the same verbs in another order are told apart: %v and %v", a, b)
	}
	if a, b := verbs("%s and %d"), verbs("%d and %s"); slices.Equal(a, b) {
		t.Errorf("verbs that changed places are told alike: %v", a)
	}
	if got := verbs("100 %% of %s"); len(got) != 1 {
		t.Errorf("a per cent sign counts as a verb: %v", got)
	}
}

// catalogOf makes words of a language out of its texts.
func catalogOf(language string, says map[Key]string) *Words { return &Words{language, says} }

func TestSay(t *testing.T) {
	german := catalogOf("de", map[Key]string{
		"%s to %.2f %%":   "bis %.2[2]f %% aus %[1]s",
		"Light|theme":     "Hell",
		"Light":           "Licht",
		"water":           "Wasser",
		"%d facet":        "%d Facette",
		"%d facets":       "%d Facetten",
		"%s is gone (%v)": "%s ist weg (%v)",
		"no room":         "kein Platz",
	})
	french := catalogOf("fr", nil)
	var english *Words
	for _, row := range []struct{ name, got, want string }{
		{"order, Key and decimal", german.Say("%s to %.2f %%", Key("water"), 1.5), "bis 1,50 % aus Wasser"},
		{"English", english.Say("%s to %.2f %%", Key("water"), 1.5), "water to 1.50 %"},
		{"meaning of two", german.Say("Light|theme") + german.Say("Light"), "HellLicht"},
		{"remark is not said", english.Say("Light|theme"), "Light"},
		{"no catalog", french.Say("%g of %v", 2.25, 7), "2,25 of 7"},
		{"signs stay", french.Say("%+.1f", -0.5), "-0,5"},
		{"one", german.Count(1, "%d facet", "%d facets", 1), "1 Facette"},
		{"none", german.Count(0, "%d facet", "%d facets", 0), "0 Facetten"},
		{"none in French counts as one", french.Count(0, "%d facet", "%d facets", 0), "0 facet"},
		{"later", german.Say("%s to %.2f %%", Later("%d facets", 8), 0.0), "bis 0,00 % aus 8 Facetten"},
		{"nothing later", german.Text(Text{}), ""},
		{"within", german.Within("Wasser") + english.Within("Water") + french.Within("Eau"), "Wasserwatereau"},
		{"decimal", french.Decimal("41.80") + english.Decimal("41.80"), "41,8041.80"},
	} {
		if row.got != row.want {
			t.Errorf("%s: said %q, want %q", row.name, row.got, row.want)
		}
	}
}

func TestTextsFromElsewhere(t *testing.T) {
	german := catalogOf("de", map[Key]string{
		"%s never touches the stone":            "%s berührt den Stein nie",
		"at index %s the facet misses %s by %s": "bei %s verfehlt sie %s um %s",
		"cut it first":                          "zuerst schleifen",
	})
	keys := []Key{"%s never touches the stone", "at index %s the facet misses %s by %s", "cut it first"}
	for _, row := range []struct{ text, want string }{
		{"P1@6, P1@18 never touches the stone", "P1@6, P1@18 berührt den Stein nie"},
		{"at index 12.5 the facet misses P1 by 0.2 mm", "bei 12,5 verfehlt sie P1 um 0.2 mm"},
		{"cut it first", "zuerst schleifen"},
		{"cut it first, then", "cut it first, then"},
		{"P1 never touches the stone here", "P1 never touches the stone here"},
	} {
		if got := german.Like(keys, row.text); got != row.want {
			t.Errorf("%q is said as %q, want %q", row.text, got, row.want)
		}
	}
}

func TestErrorsAreToldInTheLanguage(t *testing.T) {
	german := catalogOf("de", map[Key]string{"%s is gone (%v)": "%s ist weg (%v)", "no room": "kein Platz"})
	inner := Errorf("no room")
	err := Errorf("%s is gone (%v)", "a.toml", inner)
	if got, want := err.Error(), "a.toml is gone (no room)"; got != want {
		t.Errorf("of itself it says %q, want %q", got, want)
	}
	if got, want := german.Error(err), "a.toml ist weg (kein Platz)"; got != want {
		t.Errorf("in German it says %q, want %q", got, want)
	}
	if !errors.Is(err, inner) {
		t.Error("it does not wrap what is filled in")
	}
	if got, want := german.Error(errors.Join(inner, fs.ErrNotExist)), "kein Platz\nfile does not exist"; got != want {
		t.Errorf("joined they say %q, want %q", got, want)
	}
	if got := german.Error(nil); got != "" {
		t.Errorf("no error says %q", got)
	}
}

func TestIn(t *testing.T) {
	for _, row := range []struct{ locale, want string }{
		{"de", "de"}, {"de_AT.UTF-8", "de"}, {"fr-CA", "fr"}, {"FR", "fr"}, {"en_GB", "en"},
		{"", "en"}, {"C", "en"}, {"it_IT", "en"}, {"../words", "en"}, {"deutsch", "en"},
	} {
		if got := In(row.locale).Language(); got != row.want {
			t.Errorf("In(%q) speaks %s, want %s", row.locale, got, row.want)
		}
	}
}

func TestMoment(t *testing.T) {
	at := time.Date(2026, time.March, 9, 7, 5, 0, 0, time.UTC)
	for language, want := range map[string]string{"en": "9 March 07:05", "de": "9. März 07:05", "fr": "9 mars 07:05"} {
		if got := In(language).Moment(at); got != want {
			t.Errorf("%s: %q, want %q", language, got, want)
		}
	}
}
