package gems

import (
	"bytes"
	"fmt"
	"maps"
	"math"
	"slices"
	"strings"

	"github.com/pelletier/go-toml/v2/unstable"
)

// document is a file of materials being read: what is wrong with it so far, and the
// line of every entry by its path, such as "material.0.ray.1.formula". The decoder
// reports one fault and stops; a cutter wants all of them at once, hence this reader.
type document struct {
	file   string
	lines  map[string]int
	faults Faults
	more   int // faults beyond mostFaults
}

// mostFaults is how many faults of one file are told; the rest are counted.
const mostFaults = 100

// table is one table of a document. Entries that were asked for are struck off; those
// left at close are unknown.
type table struct {
	doc   *document
	path  string // of the table; empty at the top
	name  string // key of the material it belongs to
	left  map[string]any
	wrong map[string]bool // fields with a fault
}

func (d *document) open(entries map[string]any, path, name string) *table {
	left := make(map[string]any, len(entries))
	for k, v := range entries {
		left[k] = v
	}
	return &table{doc: d, path: path, name: name, left: left, wrong: map[string]bool{}}
}

// fault notes a fault of the entry at path, or of the nearest table above it.
func (d *document) fault(path, name, field, got, why, remedy string) {
	if len(d.faults) == mostFaults {
		d.more++
		return
	}
	line := d.lines[path]
	for above := path; line == 0 && above != ""; line = d.lines[above] {
		above = above[:max(strings.LastIndexByte(above, '.'), 0)]
	}
	const most = 60 // letters of a piece that is quoted
	d.faults = append(d.faults, &Fault{
		File: d.file, Line: line, Material: shorten(name, most), Field: shorten(field, most), Got: shorten(got, most), Why: why, Remedy: remedy,
	})
}

// shorten cuts a piece of the user's text to what a message can hold, so many letters.
func shorten(s string, most int) string {
	if r := []rune(s); len(r) > most {
		return string(r[:most]) + "..."
	}
	return s
}

func (t *table) at(field string) string { return strings.TrimPrefix(t.path+"."+field, ".") }

func (t *table) fault(field, got, why, remedy string) {
	t.wrong[field] = true
	t.doc.fault(t.at(field), t.name, field, got, why, remedy)
}

func (t *table) missing(field, remedy string) { t.fault(field, "", "is missing", remedy) }

func (t *table) faulty(field string) bool { return t.wrong[field] }

func (t *table) anyFault() bool { return len(t.wrong) > 0 }

func (t *table) has(field string) bool {
	_, ok := t.left[field]
	return ok
}

// take strikes a field off and returns its value.
func (t *table) take(field string) (any, bool) {
	v, ok := t.left[field]
	delete(t.left, field)
	return v, ok
}

// close notes every entry that was not asked for.
func (t *table) close() {
	for _, field := range slices.Sorted(maps.Keys(t.left)) {
		got := ""
		if text, ok := t.left[field].(string); ok {
			got = text
		}
		t.fault(field, got, "is not known here", "see the spelling, or leave it out")
	}
}

func (t *table) text(field string) (string, bool) {
	v, ok := t.take(field)
	if !ok {
		return "", false
	}
	s, ok := v.(string)
	if !ok {
		t.fault(field, fmt.Sprint(v), "is not a text", "put it in quotes")
	}
	return s, ok
}

func (t *table) texts(field string) []string {
	v, ok := t.take(field)
	if !ok {
		return nil
	}
	var out []string
	list, ok := v.([]any)
	for _, item := range list {
		s, isText := item.(string)
		ok = ok && isText
		out = append(out, s)
	}
	if !ok {
		t.fault(field, fmt.Sprint(v), "is not a list of texts", `write it as ["one", "two"]`)
	}
	return out
}

func (t *table) flag(field string) bool {
	v, ok := t.take(field)
	if !ok {
		return false
	}
	b, ok := v.(bool)
	if !ok {
		t.fault(field, fmt.Sprint(v), "is neither true nor false", "write one of them, without quotes")
	}
	return b
}

// number reads a number from lo to hi; wanted says which in words.
func (t *table) number(field string, lo, hi float64, wanted string) (float64, bool) {
	if _, list := t.left[field].([]any); list {
		v, _ := t.take(field)
		t.fault(field, fmt.Sprint(v), "is a list", "give "+wanted)
		return 0, false
	}
	ns := t.numbers(field, lo, hi, wanted)
	if len(ns) == 0 {
		return 0, false
	}
	return ns[0], true
}

// numbers reads one number or a list of them, each from lo to hi; empty where there is
// none or a fault was noted.
func (t *table) numbers(field string, lo, hi float64, wanted string) []float64 {
	v, ok := t.take(field)
	if !ok {
		return nil
	}
	list, ok := v.([]any)
	if !ok {
		list = []any{v}
	}
	var out []float64
	for _, item := range list {
		var n float64
		switch x := item.(type) {
		case float64:
			n = x
		case int64:
			n = float64(x)
		default:
			n = math.NaN()
		}
		if !(n >= lo && n <= hi) { // the negation catches NaN too
			t.fault(field, fmt.Sprint(item), "is not a number that can stand here", "give "+wanted)
			return nil
		}
		out = append(out, n)
	}
	return out
}

func (t *table) table(field string) *table {
	v, ok := t.take(field)
	if !ok {
		return nil
	}
	entries, ok := v.(map[string]any)
	if !ok {
		t.fault(field, fmt.Sprint(v), "is not a table", "write [material."+field+"] and its entries below")
		return nil
	}
	return t.doc.open(entries, t.at(field), t.name)
}

func (t *table) tables(field string) []*table {
	v, ok := t.take(field)
	if !ok {
		return nil
	}
	list, ok := v.([]any)
	var out []*table
	for i, item := range list {
		entries, isTable := item.(map[string]any)
		ok = ok && isTable
		out = append(out, t.doc.open(entries, fmt.Sprintf("%s.%d", t.at(field), i), t.name))
	}
	if !ok {
		t.fault(field, fmt.Sprint(v), "is not a list of tables",
			"write [["+strings.Join(slices.DeleteFunc(strings.Split(t.at(field), "."), isDigits), ".")+"]]")
		return nil
	}
	return out
}

func isDigits(s string) bool { return strings.Trim(s, "0123456789") == "" }

// lineNumbers returns the line of every table and entry of a TOML text by its path.
func lineNumbers(data []byte) map[string]int {
	lines := map[string]int{}
	counts := map[string]int{} // of the tables in each list so far
	prefix := ""
	line, upTo := 1, 0 // upTo is how far line has been counted
	p := unstable.Parser{}
	p.Reset(data)
	for p.NextExpression() {
		e := p.Expression()
		var parts []string
		offset := -1
		for it := e.Key(); it.Next(); {
			parts = append(parts, string(it.Node().Data))
			if offset < 0 {
				offset = int(it.Node().Raw.Offset)
			}
		}
		line += bytes.Count(data[upTo:max(offset, upTo)], []byte("\n"))
		upTo = max(offset, upTo)
		switch e.Kind {
		case unstable.KeyValue:
			lines[strings.TrimPrefix(prefix+"."+strings.Join(parts, "."), ".")] = line
		case unstable.Table, unstable.ArrayTable:
			// A header names lists of tables by their key alone and means the last of each.
			prefix = ""
			for i, part := range parts {
				prefix = strings.TrimPrefix(prefix+"."+part, ".")
				if e.Kind == unstable.ArrayTable && i == len(parts)-1 {
					counts[prefix]++
				}
				if n := counts[prefix]; n > 0 {
					prefix = fmt.Sprintf("%s.%d", prefix, n-1)
				}
			}
			lines[prefix] = line
		}
	}
	return lines
}
