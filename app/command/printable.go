package command

import (
	"bytes"
	"fmt"
	"io"
	"unicode"
	"unicode/utf8"
)

// printable is a writer to a terminal or a file on which names and notes from a stranger's
// file give no orders: a control character, or one that turns the direction of writing, is
// written as \u and its number. Line ends and tabs stay. In JSON that is the same text.
type printable struct{ w io.Writer }

// Write writes whole texts: a letter may not be split between two calls.
func (p printable) Write(text []byte) (int, error) {
	if _, err := p.w.Write(harmless(text)); err != nil {
		return 0, err
	}
	return len(text), nil
}

// harmless returns the text with its orders spelled out.
func harmless(text []byte) []byte {
	var out bytes.Buffer
	for i := 0; i < len(text); {
		r, size := utf8.DecodeRune(text[i:])
		crlf := r == '\r' && i+1 < len(text) && text[i+1] == '\n'
		switch {
		case r == utf8.RuneError && size == 1:
			out.WriteRune(utf8.RuneError)
		case r == '\n', r == '\t', crlf:
			out.WriteRune(r)
		case unicode.IsControl(r), unicode.Is(unicode.Bidi_Control, r), r == '\u2028', r == '\u2029':
			fmt.Fprintf(&out, `\u%04x`, r)
		default:
			out.Write(text[i : i+size])
		}
		i += size
	}
	return out.Bytes()
}
