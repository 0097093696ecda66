package drawing

import (
	"strings"
	"sync"
	"unicode"

	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
	"golang.org/x/image/font/sfnt"
	"golang.org/x/image/math/fixed"
	"golang.org/x/text/unicode/norm"
)

// The typeface is Go (Bigelow & Holmes, BSD licence): Latin, Greek and Cyrillic with
// the signs of the Windows Glyph List 4. Other scripts are not covered.

// Missing stands for a letter that the typeface does not hold.
const Missing = '□'

// MMPerPoint is the size of a typographic point.
const MMPerPoint = 25.4 / 72

// typeface is one weight of the type.
type typeface struct {
	ttf      []byte
	font     *sfnt.Font
	em       fixed.Int26_6    // units per em, for measures free of rounding
	advances map[rune]float64 // of every letter that it holds, as a share of the size
}

// Both weights are parsed once, when first asked for. They are read only afterwards;
// sfnt.Font may be shared as long as each user brings a Buffer.
var (
	regular = sync.OnceValue(func() *typeface { return parse(goregular.TTF) })
	bold    = sync.OnceValue(func() *typeface { return parse(gobold.TTF) })
)

// parse reads a typeface of the basic multilingual plane.
func parse(ttf []byte) *typeface {
	f, err := sfnt.Parse(ttf)
	if err != nil {
		panic(err) // the bytes are part of the program
	}
	t := &typeface{ttf: ttf, font: f, em: fixed.I(int(f.UnitsPerEm())), advances: map[rune]float64{}}
	var b sfnt.Buffer
	for r := rune(0); r <= 0xffff; r++ {
		g, err := f.GlyphIndex(&b, r)
		if err != nil || g == 0 {
			continue
		}
		if a, err := f.GlyphAdvance(&b, g, t.em, font.HintingNone); err == nil {
			t.advances[r] = float64(a) / float64(t.em)
		}
	}
	return t
}

func (t Type) face() *typeface {
	if t.Bold {
		return bold()
	}
	return regular()
}

// holds reports whether the typeface has the letter.
func (f *typeface) holds(r rune) bool {
	_, ok := f.advances[r]
	return ok
}

// Width returns the width of a line of clean text, mm.
func (t Type) Width(words string) float64 {
	f := t.face()
	sum := 0.0
	for _, r := range words {
		sum += f.advances[r]
	}
	return sum * t.Size * MMPerPoint
}

// Height returns the height of a capital letter, mm.
func (t Type) Height() float64 {
	const capitals = 0.723 // of Go Regular and Go Bold: 1480 of 2048 units
	return capitals * t.Size * MMPerPoint
}

// Leading returns the distance between the baselines of running text, mm.
func (t Type) Leading() float64 { return 1.25 * t.Size * MMPerPoint }

// Clean makes a text fit to be set: one line, composed letters (Unicode
// normalisation form C), no control or formatting characters, and Missing for what
// the typeface does not hold. It reports whether anything was missing.
func Clean(words string) (clean string, missing bool) {
	var out strings.Builder
	lacked := false // the mark goes with the letter before it
	for _, r := range norm.NFC.String(strings.ToValidUTF8(words, "\ufffd")) {
		switch {
		case unicode.IsSpace(r):
			out.WriteByte(' ')
			lacked = false
		case unicode.IsControl(r) || unicode.Is(unicode.Cf, r):
		case r != unicode.ReplacementChar && regular().holds(r):
			out.WriteRune(r)
			lacked = false
		case unicode.IsMark(r) && lacked:
		default:
			out.WriteRune(Missing)
			missing, lacked = true, true
		}
	}
	return strings.TrimSpace(out.String()), missing
}

// units returns the words of a text, each with the signs that French sets a space before,
// or after, and that must not begin, or end, a line as long as both fit on one. The colon
// of a ratio, 10 : 1, is none.
func (t Type) units(text string, width float64) []string {
	var all []string
	opened := false
	words := strings.Fields(text)
	for i, word := range words {
		closes := word == ";" || word == "!" || word == "?" || strings.HasPrefix(word, "»") ||
			word == ":" && (i+1 == len(words) || !unicode.IsDigit(rune(words[i+1][0])))
		last := len(all) - 1
		if (closes || opened) && last >= 0 && t.Width(all[last]+" "+word) <= width {
			all[last] += " " + word
		} else {
			all = append(all, word)
		}
		opened = strings.HasSuffix(word, "«")
	}
	return all
}

// Wrap breaks a text between words into lines of at most width mm. A word that is
// wider is broken. Line ends of the text are kept; there is at least one line.
func (t Type) Wrap(words string, width float64) []string {
	var lines []string
	for paragraph := range strings.SplitSeq(strings.TrimSpace(words), "\n") {
		clean, _ := Clean(paragraph)
		line := ""
		for _, word := range t.units(clean, width) {
			longer := strings.TrimLeft(line+" "+word, " ")
			if t.Width(longer) <= width {
				line = longer
				continue
			}
			if line != "" {
				lines = append(lines, line)
			}
			for line = word; t.Width(line) > width; {
				head := t.fitting(line, width)
				lines, line = append(lines, line[:head]), line[head:]
			}
		}
		lines = append(lines, line)
	}
	return lines
}

// fitting returns how many bytes of the word fit into the width: at least one letter.
func (t Type) fitting(word string, width float64) int {
	last := 0
	for i := range word {
		if i > 0 && t.Width(word[:i]) > width {
			break
		}
		if i > 0 {
			last = i
		}
	}
	if last == 0 {
		for i := range word {
			if i > 0 {
				return i
			}
		}
		return len(word)
	}
	return last
}

// Cut shortens a text to at most width mm and marks the cut.
func (t Type) Cut(words string, width float64) string {
	clean, _ := Clean(words)
	if t.Width(clean) <= width {
		return clean
	}
	room := width - t.Width("…")
	end, used, f := 0, 0.0, t.face()
	for i, r := range clean {
		if used > room {
			break
		}
		end = i
		used += f.advances[r] * t.Size * MMPerPoint
	}
	return strings.TrimRight(clean[:end], " ") + "…"
}
