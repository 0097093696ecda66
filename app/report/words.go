package report

import (
	"embed"
	"fmt"
	"math"
	"slices"
	"strconv"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
)

//go:embed words/*.toml
var wordFiles embed.FS

// Languages returns the languages that a report can be written in.
func Languages() []string { return []string{"en", "de", "fr"} }

// words are the words of one language by their keys.
type words map[string]string

// wordsOf reads the words of a language.
func wordsOf(language string) (words, error) {
	if !slices.Contains(Languages(), language) {
		return nil, fmt.Errorf("language %q is not known; use one of %s", language, strings.Join(Languages(), ", "))
	}
	content, err := wordFiles.ReadFile("words/" + language + ".toml")
	if err != nil {
		return nil, err
	}
	w := words{}
	return w, toml.Unmarshal(content, &w)
}

// has reports whether there are words for the key.
func (w words) has(key string) bool { return w[key] != "" }

// say returns the words of a key with the names in braces filled in: fill holds names and
// values in turn. A key or a name that does not exist is a fault of the program.
func (w words) say(key string, fill ...string) string {
	text, ok := w[key]
	if !ok {
		panic("report: no words for " + key)
	}
	for i := 0; i+1 < len(fill); i += 2 {
		if !strings.Contains(text, "{"+fill[i]+"}") && !optional(fill[i]) {
			panic("report: the words for " + key + " have no {" + fill[i] + "}")
		}
		text = strings.ReplaceAll(text, "{"+fill[i]+"}", fill[i+1])
	}
	return text
}

// optional reports whether a translation may do without a name.
func optional(name string) bool { return name == "n" }

// number writes a value with so many decimals in the language's way.
func (w words) number(v float64, decimals int) string {
	text := strconv.FormatFloat(v, 'f', decimals, 64)
	if strings.Trim(text, "-0.") == "" {
		text = strings.TrimPrefix(text, "-")
	}
	if text[0] == '-' {
		text = "−" + text[1:]
	}
	return strings.Replace(text, ".", w["decimal"], 1)
}

// signed writes a value with its sign.
func (w words) signed(v float64, decimals int) string {
	text := w.number(v, decimals)
	if v > 0 && strings.Trim(text, "0.,") != "" {
		text = "+" + text
	}
	return text
}

// up writes an error with so many decimals, rounded up, so that it is never told smaller
// than it is.
func (w words) up(v float64, decimals int) string {
	scale := math.Pow10(decimals)
	return w.number(math.Ceil(v*scale-1e-6)/scale, decimals)
}

// degrees writes an angle in degrees.
func (w words) degrees(v float64, decimals int) string { return w.number(v, decimals) + "°" }

// date writes a day.
func (w words) date(t time.Time) string {
	months := strings.Fields(w["months"])
	return w.say("date", "day", strconv.Itoa(t.Day()), "month", months[t.Month()-1], "year", strconv.Itoa(t.Year()))
}

// upper returns the text with its first letter in upper case.
func upper(text string) string {
	r, n := utf8.DecodeRuneInString(text)
	return string(unicode.ToUpper(r)) + text[n:]
}
