package gems

import (
	"bytes"
	"fmt"

	"github.com/pelletier/go-toml/v2/unstable"
)

// Limits on the text of a file of materials, far above any use. They keep the time short
// in which a hostile file is refused: the decoder looks through all keys of a table for
// each new one.
const (
	mostKeys   = 100               // in one table
	mostParts  = 8                 // of a dotted key
	mostTables = 5 * mostMaterials // in the file: a material, three rays and a colour
)

// crowded returns the first place where a text goes beyond those limits, nil for none.
// Faults of syntax are left to the decoder, which tells them better.
func crowded(data []byte) *Fault {
	p := unstable.Parser{}
	p.Reset(data)
	keys, tables := 0, 0
	tooMany := func(n *unstable.Node, what string, most int) *Fault {
		at := 0
		if it := n.Key(); it.Next() {
			at = int(it.Node().Raw.Offset)
		}
		return &Fault{Line: 1 + bytes.Count(data[:at], []byte("\n")), Why: "the file has too many " + what,
			Remedy: fmt.Sprintf("keep to %d; is this a file of materials?", most)}
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
			return tooMany(e, "parts in a key", mostParts)
		case e.Kind == unstable.KeyValue:
			if keys += 1 + inside; keys > mostKeys {
				return tooMany(e, "keys in one table", mostKeys)
			}
		case e.Kind == unstable.Table || e.Kind == unstable.ArrayTable:
			keys = 0
			if tables++; tables > mostTables {
				return tooMany(e, "tables", mostTables)
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
