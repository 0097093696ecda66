package trace

import (
	"cmp"
	"flag"
	"fmt"
	"maps"
	"math"
	"os"
	"path/filepath"
	"regexp"
	"runtime"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
)

var (
	update = flag.Bool("update", false, "write CHECKS.md anew from the checks of this run; with -long only its long forms")
	long   = flag.Bool("long", false, "run the long forms of the statistical checks, which take minutes")
)

// checksPage is the page that lists every check against a value from outside this code.
const checksPage = "CHECKS.md"

// checks gathers the comparisons that near and agree make, for the page.
var checks = recorder{rows: map[rowKey]*row{}}

type recorder struct {
	mutex sync.Mutex
	rows  map[rowKey]*row
}

// rowKey names a row of the page: comparisons alike in all three share it.
type rowKey struct{ test, what, source string }

// atWavelength ends the words of a comparison that is made at many wavelengths.
var atWavelength = regexp.MustCompile(` (at|of)? ?[0-9.]+ nm$`)

// row is what the comparisons of one key came to.
type row struct {
	file      string // in which the test stands
	times     int
	least     float64 // of the expected values
	most      float64
	worst     float64 // error over what is allowed
	got, want float64 // where it is worst
	allowed   string
	measured  bool // the expected value is measured too
}

// note takes a comparison into the page. allowed is how far got may lie from want.
func (r *recorder) note(t *testing.T, what string, got, want, allowed float64, words, source string,
	measured bool) {
	if i := strings.LastIndex(what, ": "); i >= 0 {
		what = what[i+2:] // what stands before names the stone or the row
	}
	what = atWavelength.ReplaceAllString(what, "")
	test, _, _ := strings.Cut(t.Name(), "/")
	key := rowKey{test, what, source}
	r.mutex.Lock()
	defer r.mutex.Unlock()
	w := r.rows[key]
	if w == nil {
		w = &row{file: caller(), least: math.Inf(1), most: math.Inf(-1), worst: -1, allowed: words,
			measured: measured}
		r.rows[key] = w
	}
	w.times++
	w.least, w.most = min(w.least, want), max(w.most, want)
	if bad := math.Abs(got-want) / max(allowed, math.SmallestNonzeroFloat64); bad > w.worst {
		w.worst, w.got, w.want = bad, got, want
	}
	if w.allowed != words {
		w.allowed = "see the test"
	}
}

// caller returns the test file from which a comparison was made.
func caller() string {
	for depth := 2; ; depth++ {
		_, file, _, ok := runtime.Caller(depth)
		if name := filepath.Base(file); !ok || strings.HasSuffix(name, "_test.go") &&
			name != "checks_test.go" {
			return name
		}
	}
}

// near fails the test where got lies further from want than tolerance, naming the
// source of want, and enters the comparison in the page.
func near(t *testing.T, what string, got, want, tolerance float64, source string) {
	t.Helper()
	checks.note(t, what, got, want, tolerance, fmt.Sprintf("%.1e", tolerance), source, false)
	if !(math.Abs(got-want) <= tolerance) {
		t.Errorf("%s: got %.9g, want %.9g within %g (%s)", what, got, want, tolerance, source)
	}
}

// agree fails the test where two numbers lie more than some standard errors apart; the
// error of want is 0 where it is exact.
func agree(t *testing.T, what string, got, gotError, want, wantError, errors float64, source string) {
	t.Helper()
	joint := math.Hypot(gotError, wantError)
	checks.note(t, what, got, want, errors*joint, fmt.Sprintf("%g standard errors", errors), source,
		wantError > 0)
	if !(math.Abs(got-want) <= errors*joint) {
		t.Errorf("%s: got %.6g ± %.1g, want %.6g ± %.1g, %.1f standard errors apart (%s)",
			what, got, gotError, want, wantError, math.Abs(got-want)/joint, source)
	}
}

// estimate is a mean with its standard error.
type estimate struct{ mean, error float64 }

// above fails the test where more is not greater than less by some standard errors.
func above(t *testing.T, what string, more, less estimate, errors float64, source string) {
	t.Helper()
	joint := math.Hypot(more.error, less.error)
	checks.note(t, what, more.mean, less.mean, math.Inf(1), fmt.Sprintf("more by %g standard errors", errors),
		source, true)
	if !(more.mean-less.mean > errors*joint) {
		t.Errorf("%s: %.5g ± %.1g is not more than %.5g ± %.1g, %.1f standard errors apart (%s)",
			what, more.mean, more.error, less.mean, less.error, (more.mean-less.mean)/joint, source)
	}
}

// themes are the page's headings in their order, by the file that holds the checks.
var themes = []struct{ file, title string }{
	{"fresnel_test.go", "A facet: reflection, refraction, critical angle, phase"},
	{"crossing_test.go", "Films on a facet"},
	{"haze_test.go", "Films with dust in them"},
	{"laws_test.go", "Light in a stone: plates, prisms, boxes, rods"},
	{"rhomb_test.go", "Polarisation from facet to facet"},
	{"slow_test.go", "The tracer against one written as on paper"},
	{"travel_test.go", "Dishes, body colour, paper"},
	{"run_test.go", "Whole runs"},
	{"path_length_test.go", "Way of the light inside, pixel by pixel"},
	{"doors_test.go", "By which facets light leaves"},
	{"crystal_test.go", "Double refraction at a facet"},
	{"crystal_biaxial_test.go", "Double refraction in biaxial crystals"},
	{"travel_crystal_test.go", "Double refraction in a stone"},
	{"reciprocity_test.go", "Light traced forward"},
	{"peer_test.go", "A general path tracer"},
	{"harding_test.go", "Plane theory of cut stones"},
	{"study_test.go", "A published study of cut stones, by its trends"},
	{"observer_test.go", "The observer"},
	{"illuminant_test.go", "Illuminants"},
	{"light_test.go", "Lights"},
	{"hdr_test.go", "Panoramas"},
	{"eye_test.go", "What an eye sees"},
	{"appearance_test.go", "Measures of appearance"},
}

// unlisted are the files whose comparisons are of one form of the code with another.
var unlisted = []string{"grid_test.go", "kernel_test.go", "symmetry_test.go"}

// TestMain writes the page, or fails where it is stale, after a run of all tests.
func TestMain(m *testing.M) {
	code := m.Run()
	whole := true
	for _, name := range []string{"run", "skip", "list", "bench", "fuzz"} {
		whole = whole && flag.Lookup("test."+name).Value.String() == ""
	}
	if code == 0 && (whole && flag.Lookup("test.count").Value.String() == "1" || *update && *long) {
		if err := checks.settle(); err != nil {
			fmt.Fprintln(os.Stderr, err)
			code = 1
		}
	}
	os.Exit(code)
}

// settle compares the page with the checks that were made, or writes it.
func (r *recorder) settle() error {
	old, err := os.ReadFile(checksPage)
	if err != nil && !*update {
		return fmt.Errorf("%s: %v; run go test ./trace -update", checksPage, err)
	}
	rows := r.lines()
	if *update {
		if *long {
			rows = append(rowsOf(string(old), false), merged(rowsOf(string(old), true), rows)...)
		} else {
			rows = append(rows, rowsOf(string(old), true)...)
		}
		return os.WriteFile(checksPage, []byte(r.page(rows, section(string(old), mutationsHeading))), 0o644)
	}
	if *long {
		return nil
	}
	have := map[string]string{}
	for _, l := range rowsOf(string(old), false) {
		have[check(l.text)] = l.text
	}
	for _, l := range rows {
		was, ok := have[check(l.text)]
		switch {
		case !ok:
			return fmt.Errorf("%s is stale: it lacks the check %s; run go test ./trace -update", checksPage,
				check(l.text))
		case !alikeRows(was, l.text):
			return fmt.Errorf("%s is stale:\n%s\nis now\n%s\nrun go test ./trace -update", checksPage, was,
				l.text)
		}
		delete(have, check(l.text))
	}
	for c := range have {
		return fmt.Errorf("%s is stale: the check %s is not made any more; run go test ./trace -update",
			checksPage, c)
	}
	return nil
}

// check is what names a row of the page: the check and its source.
func check(row string) string { return strings.Join(strings.Split(row, "|")[:3], "|") }

// alikeRows reports whether two rows of a check expect the same and allow the same error.
// What was got may differ, and so may the last digits of what is expected, from processor
// to processor; an expected value that is measured, and a large number of comparisons, too.
func alikeRows(a, b string) bool {
	x, y := strings.Split(a, "|"), strings.Split(b, "|")
	if len(x) != 9 || len(y) != 9 || x[6] != y[6] {
		return false
	}
	const many = 100
	times := func(s string) int { n, _ := strconv.Atoi(strings.TrimSpace(s)); return n }
	if n, m := times(x[7]), times(y[7]); n != m && min(n, m) < many {
		return false
	}
	if strings.HasPrefix(strings.TrimSpace(x[3]), measuredMark) {
		return true
	}
	allowed, _ := strconv.ParseFloat(strings.TrimSpace(x[6]), 64)
	v, w := strings.Fields(x[3]), strings.Fields(y[3]) // a number, or two and "to" between them
	digits := map[int]float64{1: 2e-6, 3: 2e-2}[len(v)]
	return len(v) == len(w) && !slices.ContainsFunc(v, func(s string) bool {
		t := w[slices.Index(v, s)]
		p, err := strconv.ParseFloat(s, 64)
		q, _ := strconv.ParseFloat(t, 64)
		return err != nil && s != t || err == nil && math.Abs(p-q) > allowed+digits*math.Abs(p)
	})
}

// rowsOf returns the rows that a page has, of long forms or of others.
func rowsOf(page string, longForms bool) (rows []line) {
	file := ""
	page, _, _ = strings.Cut(page, mutationsHeading)
	for _, text := range strings.Split(page, "\n") {
		if name := strings.Trim(text, "`"); strings.HasSuffix(name, "_test.go") {
			file = name
		}
		if strings.HasPrefix(text, "| `") && strings.Contains(text, longForm) == longForms {
			rows = append(rows, line{file, text})
		}
	}
	return rows
}

// merged returns a page's long forms with those of this run in place of their like.
func merged(old, fresh []line) []line {
	fresh = slices.DeleteFunc(fresh, func(l line) bool { return !strings.Contains(l.text, longForm) })
	for _, l := range old {
		if !slices.ContainsFunc(fresh, func(f line) bool { return check(f.text) == check(l.text) }) {
			fresh = append(fresh, l)
		}
	}
	return fresh
}

// line is a row as the page shows it.
type line struct{ file, text string }

// lines returns the rows in the page's order.
func (r *recorder) lines() (all []line) {
	keys := slices.SortedFunc(maps.Keys(r.rows), func(a, b rowKey) int {
		return cmp.Or(cmp.Compare(a.test, b.test), cmp.Compare(a.what, b.what),
			cmp.Compare(a.source, b.source))
	})
	for _, k := range keys {
		w := r.rows[k]
		if slices.Contains(unlisted, w.file) {
			continue
		}
		expected := fmt.Sprintf("%.6g", w.want)
		switch {
		case w.measured:
			expected = fmt.Sprintf("%s%.5f", measuredMark, w.want)
		case w.least != w.most:
			expected = fmt.Sprintf("%.3g to %.3g", w.least, w.most)
		}
		got := fmt.Sprintf("%.6g", w.got)
		if w.times > 1 && w.least != w.most {
			got = fmt.Sprintf("%.6g for %.6g", w.got, w.want)
		}
		check := fmt.Sprintf("| `%s` %s | %s |", strings.TrimPrefix(k.test, "Test"), oneCell(k.what), oneCell(k.source))
		all = append(all, line{w.file, fmt.Sprintf("%s %s | %s | %.1e | %s | %d |",
			check, expected, got, math.Abs(w.got-w.want), w.allowed, w.times)})
	}
	return all
}

// oneCell keeps a text within one cell of a table.
func oneCell(s string) string {
	return strings.Join(strings.Fields(strings.ReplaceAll(s, "|", "/")), " ")
}

const (
	measuredMark     = "≈ "
	mutationsHeading = "## Mutations"
	tableHead        = "| check | source | expected | got | error | allowed | times |\n" +
		"|---|---|---|---|---|---|---|\n"
	longForm = "(long form)" // ends the words of a check that only -long makes
)

// section returns a heading's part of the page, up to the next, or nothing.
func section(page, heading string) string {
	i := strings.Index(page, heading)
	if i < 0 {
		return ""
	}
	rest := page[i+len(heading):]
	if j := strings.Index(rest, "\n## "); j >= 0 {
		rest = rest[:j]
	}
	return heading + strings.TrimRight(rest, "\n") + "\n"
}

// page lays the rows out.
func (r *recorder) page(rows []line, kept ...string) string {
	var b strings.Builder
	b.WriteString(`# Checks

Every comparison that the tests of this package make with a value from outside it: a closed form, a law, a published
table or paper, a reference library. The page is written by the tests themselves (go test ./trace -update), and a run of
all tests fails where it is stale. Each row names its test, the source of the expected value, the value got and the
greatest error met, the error allowed, and how often the comparison was made; where it was made for many values their
range stands under "expected" and the worst under "got". Materials, standard spectra and solids are checked by the tests
of gems and facets.

`)
	title := func(file string) string {
		for _, t := range themes {
			if t.file == file {
				return t.title
			}
		}
		return "Others (" + file + ")"
	}
	files := []string{}
	for _, t := range themes {
		files = append(files, t.file)
	}
	for _, l := range rows {
		if !slices.Contains(files, l.file) {
			files = append(files, l.file)
		}
	}
	for _, f := range files {
		head := true
		for _, l := range rows {
			if l.file != f {
				continue
			}
			if head {
				fmt.Fprintf(&b, "## %s\n\n`%s`\n\n%s", title(f), f, tableHead)
				head = false
			}
			b.WriteString(l.text + "\n")
		}
		if !head {
			b.WriteString("\n")
		}
	}
	for _, k := range kept {
		if k != "" {
			b.WriteString(k + "\n")
		}
	}
	return strings.TrimRight(b.String(), "\n") + "\n"
}
