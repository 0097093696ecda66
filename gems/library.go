package gems

import (
	"fmt"
	"slices"
	"strings"
)

// Library is a list of materials in a fixed order. The zero value is empty.
type Library struct {
	materials []*Material
}

// Standard returns the library of the bundled table. Each call makes fresh materials,
// so that no two callers share any.
func Standard() *Library {
	return &Library{materials: slices.Concat(Stones(), Surroundings())}
}

// With returns a library that holds l's materials and ms after them. A later material
// of the same key takes the earlier one's place.
func (l *Library) With(ms ...*Material) *Library {
	merged := slices.Clone(l.materials)
	for _, m := range ms {
		same := func(old *Material) bool { return old.Key == m.Key }
		if i := slices.IndexFunc(merged, same); i >= 0 {
			merged[i] = m
		} else {
			merged = append(merged, m)
		}
	}
	return &Library{materials: merged}
}

// Stones returns the materials that stones are cut of, in the library's order.
func (l *Library) Stones() []*Material {
	var stones []*Material
	for _, m := range l.materials {
		if m.Group != Gas && m.Group != Liquid && m.Group != Coating {
			stones = append(stones, m)
		}
	}
	return stones
}

// Materials returns all the materials in the library's order, in a fresh slice.
func (l *Library) Materials() []*Material { return slices.Clone(l.materials) }

// Find returns the material of the given key, name, variety or trade name, in any
// case. Keys are tried before names. Otherwise the error is an *UnknownError.
func (l *Library) Find(key string) (*Material, error) {
	wanted := strings.ToLower(strings.TrimSpace(key))
	for _, m := range l.materials {
		if m.Key == wanted {
			return m, nil
		}
	}
	for _, m := range l.materials {
		if m.called(wanted) {
			return m, nil
		}
	}
	return nil, l.unknown(key, wanted)
}

// called reports whether wanted, in lower case, is one of the material's names.
func (m *Material) called(wanted string) bool {
	if wanted == "" {
		return false
	}
	same := func(name string) bool { return strings.ToLower(name) == wanted }
	return same(m.Key) || same(m.Name) || slices.ContainsFunc(m.Names, same)
}

// UnknownError is a material that a library does not hold.
type UnknownError struct {
	Key     string   // as it was asked for
	Nearest string   // the key that a slip of the pen would explain; may be empty
	Known   []string // every key, in the library's order
}

// Error suggests the nearest key, or lists the known ones where none is near.
func (e *UnknownError) Error() string {
	if e.Nearest != "" {
		return fmt.Sprintf("unknown material %q; did you mean %q? the material table lists all", e.Key, e.Nearest)
	}
	return fmt.Sprintf("unknown material %q; known are %s", e.Key, strings.Join(e.Known, ", "))
}

// unknown makes the error for a key that was not found.
func (l *Library) unknown(key, wanted string) *UnknownError {
	e := &UnknownError{Key: key, Known: make([]string, len(l.materials))}
	nearest := max(2, len(wanted)/3) + 1 // more slips than these are another word
	if len(wanted) < 2 {
		nearest = 0 // anything could be meant
	}
	for i, m := range l.materials {
		e.Known[i] = m.Key
		for _, name := range slices.Concat([]string{m.Key, m.Name}, m.Names) {
			if slips := slipsBetween(wanted, strings.ToLower(name)); slips < nearest {
				nearest, e.Nearest = slips, m.Key
			}
		}
	}
	words := strings.Fields(wanted)
	for i := len(words) - 1; i >= 0 && len(words) > 1 && e.Nearest == ""; i-- { // a kind, such as white topaz
		for _, m := range l.materials {
			if m.called(words[i]) {
				e.Nearest = m.Key
				break
			}
		}
	}
	return e
}

// slipsBetween returns the least number of letters to insert, delete or replace to
// turn a into b (Levenshtein 1965).
func slipsBetween(a, b string) int {
	s, t := []rune(a), []rune(b)
	row := make([]int, len(t)+1)
	for j := range row {
		row[j] = j
	}
	for i, r := range s {
		diagonal := row[0]
		row[0] = i + 1
		for j, q := range t {
			replace := diagonal
			if r != q {
				replace++
			}
			diagonal = row[j+1]
			row[j+1] = min(replace, row[j]+1, row[j+1]+1)
		}
	}
	return row[len(t)]
}

// Find returns the bundled material of the given key, name, variety or trade name, in
// any case. The error for any other lists the known keys and suggests the nearest.
func Find(key string) (*Material, error) { return Standard().Find(key) }

// Stones returns the bundled materials that stones are cut of, in a fixed order. Slice
// and materials are fresh.
func Stones() []*Material {
	return slices.Concat(
		others(),
		oxides(),
		tectosilicates(),
		silicates(),
		garnets(),
		synthetics(),
		glasses(),
	)
}

// Surroundings returns the bundled gases, liquids and coatings, in a fixed order. Slice
// and materials are fresh.
func Surroundings() []*Material {
	return slices.Concat(
		liquids(),
		coatings(),
	)
}
