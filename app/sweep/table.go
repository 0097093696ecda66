package sweep

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"io"
	"slices"
	"strings"

	"pavilight/app/cell"
)

// cells are the cells of a line of the table by the names of their columns, which are
// in the order in which they were met.
type cells struct {
	names  []string
	values map[string]string
}

func (c *cells) put(name, value string) {
	if _, there := c.values[name]; !there {
		c.names = append(c.names, name)
	}
	c.values[name] = value
}

// makesLines reports whether a list in a result makes lines of its own: the surroundings
// of a look, the stones of a trade-off, the cells of a field.
func makesLines(name string) bool { return name == "media" || name == "points" || name == "cells" }

// WriteTable writes the results as CSV for people: a line a job, or one for each of the
// surroundings, stones or cells that it has. Columns are named as in the JSON lines,
// with points between the names of things that lie in each other; lists of numbers are
// left out. A text that a spreadsheet would take for a formula gets an apostrophe.
func (r *Results) WriteTable(w io.Writer) error {
	head, err := r.columns()
	if err != nil {
		return err
	}
	out := csv.NewWriter(w)
	if err := out.Write(head); err != nil {
		return err
	}
	record := make([]string, len(head))
	err = r.eachLine(func(l cells) error {
		for i, name := range head {
			record[i] = l.values[name]
		}
		return out.Write(record)
	})
	if err != nil {
		return err
	}
	out.Flush()
	return out.Error()
}

// columns returns the heads of the columns: the job, its settings, what results have in
// the order in which it is met, and what few have at the end.
func (r *Results) columns() ([]string, error) {
	var settings, found []string
	last := []string{"notes", "error", "key"}
	known := map[string]bool{"job": true, "file": true, "notes": true, "error": true, "key": true}
	err := r.eachLine(func(l cells) error {
		for name := range l.values {
			if strings.HasPrefix(name, settingPrefix) && !known[name] {
				known[name] = true
				settings = append(settings, name)
			}
		}
		for _, name := range l.names {
			if !known[name] {
				known[name] = true
				found = append(found, name)
			}
		}
		return nil
	})
	slices.Sort(settings)
	return slices.Concat([]string{"job", "file"}, settings, found, last), err
}

// settingPrefix begins the name of a setting's column.
const settingPrefix = "settings."

// eachLine hands on the lines of the table one after the other: all of them at once would
// take many times the memory of the rows.
func (r *Results) eachLine(do func(cells) error) error {
	for i := range r.lines {
		row, err := r.Row(i)
		if err != nil {
			return err
		}
		lines, err := tableLines(&row)
		if err != nil {
			return fmt.Errorf("job %d: %w", row.Job, err)
		}
		for _, l := range lines {
			if err := do(l); err != nil {
				return err
			}
		}
	}
	return nil
}

// tableLines returns the lines of the table for a row.
func tableLines(row *Row) ([]cells, error) {
	var settings map[string]json.RawMessage
	if err := json.Unmarshal(row.Settings, &settings); err != nil {
		return nil, err
	}
	about := cells{values: map[string]string{}}
	about.put("job", fmt.Sprint(row.Job))
	about.put("file", cell.Text(row.File))
	for name, value := range settings {
		if _, err := flatten(&about, settingPrefix+name, value); err != nil {
			return nil, err
		}
	}
	about.names = nil // their columns are placed by name
	about.put("notes", cell.Text(strings.Join(row.Notes, "; ")))
	about.put("error", cell.Text(strings.Join(strings.Split(row.Error, "\n"), "; ")))
	about.put("key", cell.Text(row.Key))
	if row.Result == nil {
		return []cells{about}, nil
	}
	many, err := flatten(&about, "", row.Result)
	if err != nil {
		return nil, err
	}
	if len(many) == 0 {
		return []cells{about}, nil
	}
	var lines []cells
	for _, each := range many {
		l := cells{slices.Clone(about.names), map[string]string{}}
		for name, value := range about.values {
			l.values[name] = value
		}
		if _, err := flatten(&l, "", each); err != nil {
			return nil, err
		}
		lines = append(lines, l)
	}
	return lines, nil
}

// flatten puts what a JSON value holds into cells, in its order, and returns the items
// of a list that makes lines of its own.
func flatten(c *cells, name string, text []byte) (many []json.RawMessage, err error) {
	text = bytes.TrimSpace(text)
	if len(text) == 0 {
		return nil, io.ErrUnexpectedEOF
	}
	switch text[0] {
	case '{':
		d := json.NewDecoder(bytes.NewReader(text))
		if _, err := d.Token(); err != nil {
			return nil, err
		}
		for d.More() {
			key, err := d.Token()
			if err != nil {
				return nil, err
			}
			var value json.RawMessage
			if err := d.Decode(&value); err != nil {
				return nil, err
			}
			inner, _ := key.(string)
			if name == "" && makesLines(inner) && json.Unmarshal(value, &many) == nil {
				continue
			}
			if name != "" {
				inner = name + "." + inner
			}
			if _, err := flatten(c, inner, value); err != nil {
				return nil, err
			}
		}
	case '[':
		var words []string
		if json.Unmarshal(text, &words) == nil && len(words) > 0 {
			c.put(name, cell.Text(strings.Join(words, "; ")))
		}
	case '"':
		var word string
		if err := json.Unmarshal(text, &word); err != nil {
			return nil, err
		}
		c.put(name, cell.Text(word))
	case 'n':
		c.put(name, "")
	default:
		c.put(name, string(text))
	}
	return many, nil
}
