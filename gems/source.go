package gems

import "strings"

// Source says where a number comes from and how it came here. Its text ends with one
// of three marks: "read" (in a copy of the named source), "from memory, not checked"
// (of the named source) or "computed" (from inputs that it names).
type Source string

// Mark is how a number came here.
type Mark string

// The marks.
const (
	Read     Mark = "read"
	Memory   Mark = "from memory, not checked"
	Computed Mark = "computed"
	Given    Mark = "given by the user"
)

// Mark returns the mark at the end of the source's text, or "" where it has none.
func (s Source) Mark() Mark {
	for _, m := range []Mark{Read, Memory, Computed, Given} {
		if strings.HasSuffix(string(s), "; "+string(m)) || string(s) == string(m) {
			return m
		}
	}
	return ""
}

// given is the source of numbers that a user wrote.
const given Source = Source(Given)

// openData is where most published formulas were read.
const openData = ", in the open data set refractiveindex.info (CC0); read"
