package command

import (
	"encoding/json"
	"fmt"
	"io"
	"slices"
	"strconv"
	"strings"
	"text/tabwriter"

	"pavilight/app/sweep"
	"pavilight/trace/tune"
)

// print prints the results of a sweep for people: a line for each surrounding of a look,
// or for what each search found. Other answers of tune have no line each; they are
// printed as CSV.
func (s *sweeping) print(w io.Writer, results *sweep.Results) error {
	rows := make([]sweep.Row, results.Len()) // a sweep that is read on a screen is short
	for i := range rows {
		var err error
		if rows[i], err = results.Row(i); err != nil {
			return err
		}
	}
	if s.verb == "tune" && slices.ContainsFunc(rows, otherThanSearch) {
		return results.WriteTable(w)
	}
	settings, err := varied(rows)
	if err != nil {
		return err
	}
	tab := tabwriter.NewWriter(w, 0, 0, 3, ' ', 0)
	lines, columns := lookLines, []string{"in", "light return", "head", "leakage", "windowed area"}
	if s.verb == "tune" {
		lines, columns = tuneLines, []string{"change", "as it stands", "best", "gain"}
	}
	fmt.Fprintln(tab, strings.Join(slices.Concat([]string{"job", "plan"}, settings, columns), "\t"))
	for i := range rows {
		r := &rows[i]
		begin := []string{fmt.Sprint(r.Job), planWord(r.File)}
		var values map[string]any
		if err := json.Unmarshal(r.Settings, &values); err != nil {
			return err
		}
		for _, name := range settings {
			begin = append(begin, settingWord(values[name]))
		}
		if r.Result == nil {
			fmt.Fprintln(tab, strings.Join(append(begin, "no result"), "\t"))
			continue
		}
		ends, err := lines(r.Result)
		if err != nil {
			return fmt.Errorf("job %d: %w", r.Job, err)
		}
		for _, end := range ends {
			fmt.Fprintln(tab, strings.Join(append(begin, end...), "\t"))
		}
	}
	tab.Flush()
	_, err = fmt.Fprintln(w, "\n± is the standard error. --csv and --json tell all there is, --out DIR writes both.")
	return err
}

// otherThanSearch reports whether a row of tune answers something else than a search.
func otherThanSearch(r sweep.Row) bool {
	var asked struct{ Better *bool }
	return r.Result != nil && (json.Unmarshal(r.Result, &asked) != nil || asked.Better == nil)
}

// planWord says which stone a row is about.
func planWord(file string) string {
	if file == "" {
		return "–"
	}
	return file
}

// settingWord writes a setting; that of a row without it is the usual one.
func settingWord(value any) string {
	switch v := value.(type) {
	case nil:
		return "–"
	case float64:
		return strconv.FormatFloat(v, 'g', -1, 64)
	case []any:
		words := make([]string, len(v))
		for i := range v {
			words[i] = settingWord(v[i])
		}
		return strings.Join(words, " ")
	default:
		return fmt.Sprint(v)
	}
}

// varied returns the settings that are not the same in all rows, by name.
func varied(rows []sweep.Row) ([]string, error) {
	seen := map[string]map[string]bool{} // values, by setting; "" where it is not set
	every := make([]map[string]json.RawMessage, len(rows))
	for i := range rows {
		if err := json.Unmarshal(rows[i].Settings, &every[i]); err != nil {
			return nil, err
		}
		for name := range every[i] {
			seen[name] = map[string]bool{}
		}
	}
	var names []string
	for name, values := range seen {
		for _, settings := range every {
			values[string(settings[name])] = true
		}
		if len(values) > 1 {
			names = append(names, name)
		}
	}
	slices.Sort(names)
	return names, nil
}

// lookLines returns the ends of the lines of a look.
func lookLines(text []byte) (lines [][]string, err error) {
	var r lookResult
	if err := json.Unmarshal(text, &r); err != nil {
		return nil, err
	}
	for i := range r.Media {
		m := &r.Media[i]
		lines = append(lines, []string{m.Name + dishWord(m.Arrangement), withError(m.Ledger.Returned, m.StandardError.Returned),
			withError(m.Ledger.Head, m.StandardError.Head), withError(m.Ledger.Leaked, m.StandardError.Leaked), fmt.Sprintf("%.5f", m.WindowedArea)})
	}
	return lines, nil
}

// tuneLines returns the end of the line of a search.
func tuneLines(text []byte) ([][]string, error) {
	var r struct {
		Variables   []tuneVariable
		Start, Best tuneStone
		Gain        float64
		GainError   float64 `json:"gain_standard_error"`
		Better      bool
	}
	if err := json.Unmarshal(text, &r); err != nil {
		return nil, err
	}
	var changes []string
	for _, v := range r.Variables {
		changes = append(changes, fmt.Sprintf("%s %s → %s", v.Name, valueOf(tune.Variable(v), v.Now), valueOf(tune.Variable(v), r.Best.Values[v.Name])))
	}
	score := func(s *tuneStone) string {
		if s.Score == nil || s.Error == nil {
			return "–"
		}
		return withError(*s.Score, *s.Error)
	}
	gain := withError(r.Gain, r.GainError)
	if !r.Better {
		gain = "none"
	}
	return [][]string{{strings.Join(changes, ", "), score(&r.Start), score(&r.Best), gain}}, nil
}
