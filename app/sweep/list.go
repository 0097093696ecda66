package sweep

import (
	"bytes"
	"fmt"
	"io"
	"os"
	"strings"
)

// Line is a line of a list: the words that would stand on the command line.
type Line struct {
	Number int // from 1
	Words  []string
}

const mostList = 64 << 20 // bytes

// OpenList reads a list of jobs: a line for each, with blanks between the words and
// quotes, single or double, around a word that holds blanks. Empty lines and lines that
// begin with # are passed over.
func OpenList(path string) ([]Line, error) {
	f, err := os.Open(path)
	if err != nil {
		return nil, err
	}
	defer f.Close()
	return ReadList(f, path)
}

// ReadList reads a list; name stands in its faults.
func ReadList(r io.Reader, name string) ([]Line, error) {
	text, err := io.ReadAll(io.LimitReader(r, mostList+1))
	if err != nil {
		return nil, err
	}
	if len(text) > mostList {
		return nil, fmt.Errorf("%s: a list of more than %d MiB; cut it into several sweeps", name, mostList>>20)
	}
	text = bytes.TrimPrefix(text, []byte("\ufeff"))
	var lines []Line
	number := 0
	for row := range strings.Lines(string(text)) {
		number++
		row = strings.TrimSpace(row)
		if row == "" || row[0] == '#' {
			continue
		}
		words, err := split(row)
		if err != nil {
			return nil, fmt.Errorf("%s:%d: %w", name, number, err)
		}
		lines = append(lines, Line{number, words})
		if len(lines) > MostJobs {
			return nil, fmt.Errorf("%s: more than %d lines; cut it into several sweeps", name, MostJobs)
		}
	}
	if len(lines) == 0 {
		return nil, fmt.Errorf("%s: there is no job in it; write a line for each, such as: plan.toml --tilt 10", name)
	}
	return lines, nil
}

// split cuts a line into words.
func split(row string) (words []string, err error) {
	var word strings.Builder
	inWord, quote := false, rune(0)
	for _, c := range row {
		switch {
		case c == 0:
			return nil, fmt.Errorf("a NUL character; this is no text file")
		case quote != 0 && c == quote:
			quote = 0
		case quote == 0 && (c == '"' || c == '\''):
			quote, inWord = c, true
		case quote == 0 && (c == ' ' || c == '\t'):
			if inWord {
				words = append(words, word.String())
				word.Reset()
			}
			inWord = false
		default:
			word.WriteRune(c)
			inWord = true
		}
	}
	if quote != 0 {
		return nil, fmt.Errorf("a %c is opened and not closed", quote)
	}
	if inWord {
		words = append(words, word.String())
	}
	return words, nil
}

// Over is a setting and the values that it takes one after the other.
type Over struct {
	Name   string
	Values []string
}

// ParseOver reads NAME=V,V,... Where a value itself has commas, semicolons part the
// values instead. For a number, FROM..TO/STEP stands for values at equal steps.
func ParseOver(text string, isNumber func(name string) bool) (Over, error) {
	name, rest, ok := strings.Cut(text, "=")
	o := Over{Name: strings.TrimPrefix(strings.TrimSpace(name), "--")}
	if !ok || o.Name == "" || strings.TrimSpace(rest) == "" {
		return o, fmt.Errorf("--over %q: write a setting and its values, such as tilt=0,10,20", text)
	}
	separator := ","
	if strings.Contains(rest, ";") {
		separator = ";"
	}
	for value := range strings.SplitSeq(rest, separator) {
		value = strings.TrimSpace(value)
		if value == "" {
			return o, fmt.Errorf("--over %q: a value is missing", text)
		}
		if !isNumber(o.Name) || !strings.Contains(value, "..") {
			o.Values = append(o.Values, value)
			continue
		}
		steps, err := steps(value)
		if err != nil {
			return o, fmt.Errorf("--over %q: %w", text, err)
		}
		o.Values = append(o.Values, steps...)
	}
	return o, nil
}

// Product returns every combination of one value of each, the last changing fastest.
func Product(overs []Over) [][]string {
	all := [][]string{nil}
	for _, o := range overs {
		var next [][]string
		for _, head := range all {
			for _, v := range o.Values {
				next = append(next, append(head[:len(head):len(head)], v))
			}
		}
		all = next
	}
	return all
}
