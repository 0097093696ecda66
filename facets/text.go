package facets

import (
	"bytes"
	"errors"
	"fmt"
	"slices"
	"strconv"
	"strings"

	"github.com/pelletier/go-toml/v2"
	"github.com/pelletier/go-toml/v2/unstable"
)

// The text of a plan file, cut into blocks. The decoder of the TOML package
// stops at the first wrong type and keeps neither order nor comments, so the
// file is checked by the decoder and then read from the package's syntax tree,
// which has the place of everything. That tree's package calls itself unstable;
// go.mod pins the version.

// layout is a plan's text: the keys at the head, then one block a table.
type layout struct {
	newline string
	bom     bool
	head    *block
	before  []*block // tables of the plan itself that stand before the first tier
	after   []*block // and after it
}

// block is one table of a plan file with the comments above it.
type block struct {
	header  []string // the table's name; empty for the head
	list    bool     // [[name]]
	line    int
	text    string // from the comments above to the next block
	lead    int    // length of the comments above the header
	odd     bool   // has dotted keys or tables of its own: not mended in place
	entries []entry
	subs    []*block
	wrote   []pair // what canonical writing gives for the values as read
}

// entry is a key with its value.
type entry struct {
	key   string
	line  int
	value item
	// Places in the block's text: of the value, and of the whole lines.
	from, to         int
	lineFrom, lineTo int
}

// item is a value with its text as written.
type item struct {
	kind    unstable.Kind
	written string
	text    string // decoded, of strings and booleans
	list    []item
	table   []entry
	line    int
}

// Limits on a plan's text, far above any plan's need. They keep the time to
// refuse a hostile file short: the decoder looks through all keys of a table for
// each new one.
const (
	mostKeys   = 100               // in one table
	mostParts  = 8                 // of a dotted key
	mostTables = 3 * MaxPlanFacets // in the file
)

// crowded reports the first place where a text goes beyond those limits. Faults
// of syntax are left to the decoder, which tells them better.
func crowded(data []byte) *Fault {
	p := unstable.Parser{}
	p.Reset(data)
	lines := newLines(data)
	keys, tables := 0, 0
	tooMany := func(n *unstable.Node, what string) *Fault {
		at := 0
		for it := n.Key(); it.Next() && at == 0; {
			at = int(it.Node().Raw.Offset)
		}
		return &Fault{Line: lines.number(at), Why: "the file has too many " + what, Remedy: "is this a cut plan?"}
	}
	for p.NextExpression() {
		e := p.Expression()
		inside, parts := 0, partsOf(e)
		if e.Kind == unstable.KeyValue {
			var deeper int
			inside, deeper = mostInside(e.Value())
			parts = max(parts, deeper)
		}
		switch {
		case parts > mostParts:
			return tooMany(e, "parts in a key")
		case e.Kind == unstable.KeyValue:
			if keys += 1 + inside; keys > mostKeys {
				return tooMany(e, "keys in one table")
			}
		default:
			keys = 0
			if tables++; tables > mostTables {
				return tooMany(e, "tables")
			}
		}
	}
	return nil
}

// partsOf returns how many parts the key of an expression has.
func partsOf(e *unstable.Node) (parts int) {
	for it := e.Key(); it.Next(); {
		parts++
	}
	return parts
}

// mostInside returns the number of keys of the largest inline table in a value, and of
// the parts of the longest key in it.
func mostInside(n *unstable.Node) (keys, parts int) {
	inner := 0
	for it := n.Children(); it.Next(); {
		c := it.Node()
		if c.Kind == unstable.KeyValue {
			keys++
			parts = max(parts, partsOf(c))
			c = c.Value()
		}
		if c.Kind == unstable.Array || c.Kind == unstable.InlineTable {
			k, p := mostInside(c)
			inner, parts = max(inner, k), max(parts, p)
		}
	}
	return max(keys, inner), parts
}

// splitBlocks parses a TOML text into its blocks. The error is a *Fault.
func splitBlocks(data []byte, file string) ([]*block, error) {
	if f := crowded(data); f != nil {
		f.File = file
		return nil, f
	}
	var whole map[string]any
	if err := toml.Unmarshal(data, &whole); err != nil {
		return nil, notTOML(data, file, err)
	}
	p := unstable.Parser{}
	p.Reset(data)
	blocks := []*block{{line: 1}}
	starts := []int{0} // of each block's header
	lines := newLines(data)
	for p.NextExpression() {
		e := p.Expression()
		switch e.Kind {
		case unstable.KeyValue:
			b := blocks[len(blocks)-1]
			en, dotted := readEntry(&p, e, lines)
			b.odd = b.odd || dotted
			b.entries = append(b.entries, en)
		case unstable.Table, unstable.ArrayTable:
			name, from, _ := keyOf(e)
			blocks = append(blocks, &block{header: name, list: e.Kind == unstable.ArrayTable,
				line: lines.number(from)})
			starts = append(starts, lines.start(from))
		}
	}
	if err := p.Error(); err != nil {
		return nil, notTOML(data, file, err)
	}
	shareText(data, lines, blocks, starts)
	return blocks, nil
}

// notTOML turns the decoder's error into a fault.
func notTOML(data []byte, file string, err error) *Fault {
	f := &Fault{File: file, Why: "this is not TOML: " + shortenTo(mostWhy, strings.TrimPrefix(err.Error(), "toml: ")),
		Remedy: "see the sample plans for how one is written"}
	var de *toml.DecodeError
	if errors.As(err, &de) {
		f.Line, _ = de.Position()
		f.Field, f.Got = "line", lineOf(data, f.Line)
		f.Remedy = "correct this line"
		if decimalComma(f.Got) {
			f.Why, f.Remedy = "this number has a comma", "write decimals with a point, as in 41.5"
		}
	}
	return f
}

// decimalComma reports whether a line gives a number as 41,5.
func decimalComma(line string) bool {
	_, value, _ := strings.Cut(line, "=")
	value, _, _ = strings.Cut(value, "#")
	whole, part, ok := strings.Cut(strings.TrimSpace(value), ",")
	_, err := strconv.Atoi(whole)
	_, errPart := strconv.ParseUint(part, 10, 64)
	return ok && err == nil && errPart == nil
}

// shareText gives each block its part of the text. The comments right above a
// header belong to its block.
func shareText(data []byte, lines *lines, blocks []*block, starts []int) {
	tops := slices.Clone(starts)
	for i := 1; i < len(blocks); i++ {
		floor := starts[i-1]
		if es := blocks[i-1].entries; len(es) > 0 {
			floor = es[len(es)-1].lineTo
		} else if i > 1 {
			floor = lines.end(starts[i-1])
		}
		for tops[i] > floor {
			above := lines.start(tops[i] - 1)
			if !bytes.HasPrefix(bytes.TrimSpace(data[above:tops[i]]), []byte("#")) {
				break
			}
			tops[i] = above
		}
	}
	for i, b := range blocks {
		to := len(data)
		if i+1 < len(blocks) {
			to = tops[i+1]
		}
		b.text, b.lead = string(data[tops[i]:to]), starts[i]-tops[i]
		for j := range b.entries {
			e := &b.entries[j]
			e.from, e.to = e.from-tops[i], e.to-tops[i]
			e.lineFrom, e.lineTo = e.lineFrom-tops[i], e.lineTo-tops[i]
		}
	}
}

// keyOf returns the parts of an expression's key and where it stands.
func keyOf(e *unstable.Node) (parts []string, from, to int) {
	for it := e.Key(); it.Next(); {
		if len(parts) == 0 {
			from = int(it.Node().Raw.Offset)
		}
		parts = append(parts, string(it.Node().Data))
		to = int(it.Node().Raw.Offset + it.Node().Raw.Length)
	}
	return parts, from, to
}

// readEntry copies a key and its value out of the parser, and tells whether
// the key is dotted.
func readEntry(p *unstable.Parser, e *unstable.Node, lines *lines) (entry, bool) {
	parts, at, keyEnd := keyOf(e)
	line := lines.number(at)
	en := entry{key: strings.Join(parts, "."), line: line, value: readItem(p, e.Value(), line, lines)}
	if e.Raw.Length > 0 { // keys inside of inline tables have no place of their own
		data := p.Data()
		en.to = int(e.Raw.Offset + e.Raw.Length)
		en.from = keyEnd + bytes.IndexByte(data[keyEnd:], '=') + 1
		for en.from < en.to && (data[en.from] == ' ' || data[en.from] == '\t') {
			en.from++
		}
		en.lineFrom, en.lineTo = lines.start(at), lines.end(en.to)
		en.value.written = string(data[en.from:en.to])
	}
	return en, len(parts) > 1
}

func readItem(p *unstable.Parser, n *unstable.Node, line int, lines *lines) item {
	it := item{kind: n.Kind, line: line}
	if n.Raw.Length > 0 {
		it.line = lines.number(int(n.Raw.Offset))
	}
	switch n.Kind {
	case unstable.Array:
		for c := n.Children(); c.Next(); {
			it.list = append(it.list, readItem(p, c.Node(), it.line, lines))
		}
		it.written = "[" + joinWritten(it.list) + "]"
	case unstable.InlineTable:
		for c := n.Children(); c.Next(); {
			en, _ := readEntry(p, c.Node(), lines)
			it.table = append(it.table, en)
		}
		it.written = "{...}"
	default:
		it.text = string(n.Data)
		it.written = it.text
	}
	return it
}

func joinWritten(list []item) string {
	words := make([]string, len(list))
	for i, v := range list {
		words[i] = v.written
	}
	return strings.Join(words, ", ")
}

// number returns the value of a TOML integer or float.
func (it *item) number() (float64, bool) {
	if it.kind != unstable.Integer && it.kind != unstable.Float {
		return 0, false
	}
	s := strings.ReplaceAll(it.text, "_", "")
	if it.kind == unstable.Integer {
		v, err := strconv.ParseInt(strings.TrimPrefix(s, "+"), 0, 64)
		if err != nil { // TOML allows no octal by a leading zero, so 0 finds 0x, 0o and 0b only
			return 0, false
		}
		return float64(v), true
	}
	v, err := strconv.ParseFloat(s, 64)
	return v, err == nil
}

// lines finds line numbers by place.
type lines struct {
	data   []byte
	starts []int
}

func newLines(data []byte) *lines {
	l := &lines{data: data, starts: []int{0}}
	for i, c := range data {
		if c == '\n' {
			l.starts = append(l.starts, i+1)
		}
	}
	return l
}

// number returns the 1-based line of a place.
func (l *lines) number(at int) int {
	n, found := slices.BinarySearch(l.starts, at)
	if found {
		return n + 1
	}
	return n
}

// start returns where the line of a place begins.
func (l *lines) start(at int) int { return l.starts[l.number(at)-1] }

// end returns where the line after that of a place begins.
func (l *lines) end(at int) int {
	if n := l.number(at); n < len(l.starts) {
		return l.starts[n]
	}
	return len(l.data)
}

// lineOf returns a line of the text, shortened, for a message.
func lineOf(data []byte, number int) string {
	all := bytes.Split(data, []byte("\n"))
	if number < 1 || number > len(all) {
		return ""
	}
	return shorten(strings.TrimSpace(string(all[number-1])))
}

// shorten cuts a piece of the user's text to what a message can hold, and
// makes it printable.
func shorten(s string) string { return shortenTo(60, s) }

// mostWhy is how many letters of the TOML package's own words a message can hold: it may
// quote a whole line.
const mostWhy = 200

func shortenTo(most int, s string) string {
	r := []rune(strings.ToValidUTF8(s, "?"))
	if len(r) > most {
		r = append(r[:most], []rune("...")...)
	}
	return strings.Map(func(c rune) rune {
		if c < ' ' || c == 0x7f {
			return ' '
		}
		return c
	}, string(r))
}

// pair is a key and its value as TOML writes it.
type pair struct{ key, text string }

// render returns the block with the wanted values. What did not change stays
// as the user wrote it, comments and all.
func (b *block) render(header string, want []pair, newline string) string {
	if b != nil && slices.Equal(b.wrote, want) {
		text := b.text
		for _, sub := range b.subs {
			text += sub.text
		}
		return text
	}
	if b == nil || b.odd || len(b.subs) > 0 {
		return canonical(b, header, want, newline)
	}
	old := map[string]string{}
	for _, w := range b.wrote {
		old[w.key] = w.text
	}
	wanted := map[string]string{}
	for _, w := range want {
		wanted[w.key] = w.text
	}
	var out strings.Builder
	at, seen := 0, map[string]bool{}
	place := b.lead // where new keys go: after the last key, or the header
	if n := strings.IndexByte(b.text[b.lead:], '\n'); len(b.header) > 0 && n >= 0 {
		place += n + 1
	} else if len(b.header) > 0 {
		place = len(b.text)
	}
	type insertion struct {
		at   int
		text string
	}
	for _, e := range b.entries {
		seen[e.key] = true
		place = max(place, e.lineTo)
		text, ok := wanted[e.key]
		switch {
		case !ok:
			out.WriteString(b.text[at:e.lineFrom])
			at = e.lineTo
		case text != old[e.key]:
			out.WriteString(b.text[at:e.from] + strings.ReplaceAll(text, "\n", newline))
			at = e.to
		}
	}
	if place > at {
		out.WriteString(b.text[at:place])
		at = place
	}
	for _, w := range want {
		if !seen[w.key] {
			if s := out.String(); s != "" && !strings.HasSuffix(s, "\n") {
				out.WriteString(newline)
			}
			out.WriteString(w.key + " = " + strings.ReplaceAll(w.text, "\n", newline) + newline)
		}
	}
	out.WriteString(b.text[at:])
	return out.String()
}

// canonical writes a block afresh, keeping the comments above it.
func canonical(b *block, header string, want []pair, newline string) string {
	var out strings.Builder
	if b != nil {
		out.WriteString(b.text[:b.lead])
	}
	if header != "" {
		out.WriteString(header + newline)
	}
	for _, w := range want {
		out.WriteString(w.key + " = " + strings.ReplaceAll(w.text, "\n", newline) + newline)
	}
	return out.String()
}

// quote writes a string as TOML: on one line, or on several where it has
// several.
func quote(s string) string {
	var b strings.Builder
	many := strings.Contains(s, "\n")
	if many {
		b.WriteString("\"\"\"\n")
	} else {
		b.WriteByte('"')
	}
	for _, c := range s {
		switch {
		case c == '"' || c == '\\':
			b.WriteByte('\\')
			b.WriteRune(c)
		case c == '\n':
			b.WriteByte('\n')
		case c == '\t':
			b.WriteString("\\t")
		case c < ' ' || c == 0x7f:
			fmt.Fprintf(&b, "\\u%04X", c)
		default:
			b.WriteRune(c)
		}
	}
	if many {
		b.WriteString("\"\"\"")
	} else {
		b.WriteByte('"')
	}
	return b.String()
}
