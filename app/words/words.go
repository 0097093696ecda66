// Package words says what people read in the window and on the sheet for the bench in
// their language. A text is written where it is used, in English; that text is its key,
// and a catalog per language, a TOML file beside this one, says it in the other languages.
// Numbers filled in have the decimal mark of the language.
package words

import (
	"embed"
	"fmt"
	"slices"
	"strconv"
	"strings"
	"time"
	"unicode"
	"unicode/utf8"

	"github.com/pelletier/go-toml/v2"
)

// Key is a text of the program in English, with verbs as fmt has them for what is filled
// in; a per cent sign is written twice. Where one English text has two meanings, what is
// meant follows after a bar: "Light|theme". That is not said.
//
// The catalogs say every constant of this type, which a test holds.
type Key string

// English returns the text without the remark after its bar.
func (k Key) English() string {
	text, _, _ := strings.Cut(string(k), "|")
	return text
}

//go:embed *.toml
var catalogs embed.FS

// Languages returns the codes of the languages that texts can be said in, English first.
func Languages() []string { return []string{"en", "de", "fr"} }

// NameOf returns what the speakers of a language call it, its code for an unknown one.
func NameOf(language string) string {
	switch language {
	case "en":
		return "English"
	case "de":
		return "Deutsch"
	case "fr":
		return "Français"
	}
	return language
}

// Words says texts in one language. It is not changed once it is made; nil says all in
// English.
type Words struct {
	language string
	says     map[Key]string
}

// In returns the words of a language, by its code or by the name of a locale, such as
// de, de-AT or de_CH.UTF-8; English for a language that there are no words for.
func In(locale string) *Words {
	language := strings.ToLower(locale)
	if end := strings.IndexFunc(language, func(r rune) bool { return !unicode.IsLetter(r) }); end >= 0 {
		language = language[:end]
	}
	says, err := readCatalog(language)
	if err != nil || language == "en" {
		return &Words{language: "en"}
	}
	return &Words{language, says}
}

// readCatalog reads what a language says for each key.
func readCatalog(language string) (map[Key]string, error) {
	content, err := catalogs.ReadFile(language + ".toml")
	if err != nil {
		return nil, err
	}
	says := map[Key]string{}
	return says, toml.Unmarshal(content, &says)
}

// Language returns the code of the language.
func (w *Words) Language() string {
	if w == nil {
		return "en"
	}
	return w.language
}

// Say says a text with what is filled in. A number is written as the language does, a Key,
// a Text or an error among args is said in the language, too.
func (w *Words) Say(k Key, args ...any) string {
	text, ok := "", false
	if w != nil {
		text, ok = w.says[k]
	}
	if !ok {
		text = k.English()
	}
	said := make([]any, len(args))
	for i, a := range args {
		switch a := a.(type) {
		case Key:
			said[i] = w.Say(a)
		case Text:
			said[i] = w.Text(a)
		case error:
			said[i] = w.Error(a)
		case float64:
			said[i] = number{a, w.decimal()}
		case float32:
			said[i] = number{float64(a), w.decimal()}
		default:
			said[i] = a
		}
	}
	return fmt.Sprintf(text, said...)
}

// Among says a text that comes from a package which speaks English, where it is among keys
// without their remarks; another stands as it is.
func (w *Words) Among(keys []Key, text string) string {
	if i := slices.IndexFunc(keys, func(k Key) bool { return k.English() == text }); i >= 0 {
		return w.Say(keys[i])
	}
	return text
}

// Like says a text that comes from a package which speaks English, where one of keys is
// what it was made from: each %s of a key stands for anything. Another stands as it is.
func (w *Words) Like(keys []Key, text string) string {
	for _, k := range keys {
		parts := strings.Split(k.English(), "%s")
		rest, ok := strings.CutPrefix(text, parts[0])
		var args []any
		for i, part := range parts[1:] {
			if !ok {
				break
			}
			end := strings.Index(rest, part)
			if i == len(parts)-2 && strings.HasSuffix(rest, part) { // the last takes what is left
				end = len(rest) - len(part)
			}
			if ok = end >= 0; ok {
				args = append(args, w.filled(rest[:end]))
				rest = rest[end+len(part):]
			}
		}
		if ok && rest == "" {
			return w.Say(k, args...)
		}
	}
	return text
}

// filled gives a number that stands in a text the mark of the language.
func (w *Words) filled(text string) string {
	if _, err := strconv.ParseFloat(text, 64); err == nil {
		return w.Decimal(text)
	}
	return text
}

// Count says one of two texts, by whether n counts as one thing in the language.
func (w *Words) Count(n int, one, many Key, args ...any) string {
	if n == 1 || n == 0 && w.Language() == "fr" {
		return w.Say(one, args...)
	}
	return w.Say(many, args...)
}

// decimal is the mark before a number's decimals.
func (w *Words) decimal() string {
	if w.Language() == "en" {
		return "."
	}
	return ","
}

// Decimal gives a number that was written with a decimal point the mark of the language.
func (w *Words) Decimal(number string) string { return strings.Replace(number, ".", w.decimal(), 1) }

// Within returns a name as it stands within a sentence: German keeps its nouns' capitals.
func (w *Words) Within(name string) string {
	r, n := utf8.DecodeRuneInString(name)
	if w.Language() == "de" || n == 0 {
		return name
	}
	return string(unicode.ToLower(r)) + name[n:]
}

// Upper returns a text with its first letter in upper case, as a sentence begins.
func Upper(text string) string {
	r, n := utf8.DecodeRuneInString(text)
	if n == 0 {
		return text
	}
	return string(unicode.ToUpper(r)) + text[n:]
}

// Moment writes a day and the time of the day, the year left out.
func (w *Words) Moment(t time.Time) string {
	months := strings.Fields(w.Say("January February March April May June July August September October November December"))
	return w.Say("%d %s %s|day, month, time", t.Day(), months[t.Month()-1], t.Format("15:04"))
}

// number is formatted with its own decimal mark.
type number struct {
	value float64
	mark  string
}

// Format writes the number as fmt would, but for the mark.
func (n number) Format(s fmt.State, verb rune) {
	text := fmt.Sprintf(fmt.FormatString(s, verb), n.value)
	fmt.Fprint(s, strings.Replace(text, ".", n.mark, 1))
}

// Text is a text to be said later, in the language that is spoken then.
type Text struct {
	key  Key
	args []any
}

// Later returns a text to be said later.
func Later(k Key, args ...any) Text { return Text{k, args} }

// Text says it.
func (w *Words) Text(t Text) string {
	if t.key == "" {
		return ""
	}
	return w.Say(t.key, t.args...)
}

// String says it in English.
func (t Text) String() string { return (*Words)(nil).Text(t) }

// Telling is an error that can be told in any language.
type Telling interface {
	error
	Saying() Text
}

// fault is what Errorf makes.
type fault struct{ Text }

// Errorf returns an error that can be told in any language; what it says of itself is
// English. It wraps the errors among args.
func Errorf(k Key, args ...any) error { return &fault{Text{k, args}} }

func (f *fault) Error() string { return f.String() }

// Saying returns what the error says, for any language.
func (f *fault) Saying() Text { return f.Text }

// Unwrap returns the errors that are filled in.
func (f *fault) Unwrap() []error {
	var inner []error
	for _, a := range f.args {
		if err, ok := a.(error); ok {
			inner = append(inner, err)
		}
	}
	return inner
}

// Error tells an error in the language, as far as it is one that can be told; "" for nil.
func (w *Words) Error(err error) string {
	switch f := err.(type) {
	case nil:
		return ""
	case Telling:
		return w.Text(f.Saying())
	case interface{ Unwrap() []error }: // errors that were joined
		var lines []string
		for _, one := range f.Unwrap() {
			lines = append(lines, w.Error(one))
		}
		return strings.Join(lines, "\n")
	}
	return err.Error()
}
