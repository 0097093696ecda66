// Package cell is a cell of a table that people open in a spreadsheet.
package cell

import (
	"strconv"
	"strings"
	"unicode"
)

// Text returns a text as a cell holds it. A spreadsheet would take one that begins with an
// equals sign, a plus, a minus or an at, wide ones and blanks before them included, for a
// formula, which may run programs; it gets an apostrophe in front, as spreadsheets
// themselves mark text. Numbers stay as they are. Source of the signs: OWASP, CSV Injection.
func Text(text string) string {
	if _, err := strconv.ParseFloat(text, 64); err == nil {
		return text
	}
	bare := strings.TrimLeftFunc(text, func(r rune) bool { return unicode.IsSpace(r) || unicode.IsControl(r) })
	for _, first := range bare {
		if strings.ContainsRune("=+-@＝＋－＠", first) {
			return "'" + text
		}
		break
	}
	return text
}
