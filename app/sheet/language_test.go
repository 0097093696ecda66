package sheet

import (
	"bytes"
	"flag"
	"fmt"
	"maps"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"unicode"

	"github.com/pelletier/go-toml/v2"

	"pavilight/app/drawing"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// lettersOf returns the words of a text: its runs of letters.
func lettersOf(text string) []string {
	return strings.FieldsFunc(text, func(r rune) bool { return !unicode.IsLetter(r) })
}

// vocabulary returns every word that a language's catalog knows; of English the words
// that a catalog has its own for.
func vocabulary(t *testing.T, language string) map[string]bool {
	t.Helper()
	file := language
	if language == "en" {
		file = words.Languages()[1]
	}
	content, err := os.ReadFile(filepath.Join("..", "words", file+".toml"))
	if err != nil {
		t.Fatal(err)
	}
	catalog := map[string]string{}
	if err := toml.Unmarshal(content, &catalog); err != nil {
		t.Fatal(err)
	}
	known := map[string]bool{}
	for key, text := range catalog {
		if language == "en" {
			text = words.Key(key).English()
		}
		for _, word := range lettersOf(text) {
			known[word] = true
		}
	}
	return known
}

// wordless returns a plan without what its author wrote.
func wordless(plan *facets.Plan) *facets.Plan {
	p := plan.Clone()
	p.Name, p.Author, p.Notes, p.Polish = "P1", "", "", nil
	for i := range p.Tiers {
		p.Tiers[i].Note = ""
		if x := p.Tiers[i].Transfer; x != nil {
			quiet := *x
			quiet.Note = ""
			p.Tiers[i].Transfer = &quiet
		}
	}
	return p
}

// told fills in what is told of light, in numbers that follow from no machine's rounding.
// The maps are those of another job.
func told(t *testing.T, job Job, maps *trace.Result, media ...string) Job {
	t.Helper()
	job.Light = &trace.Result{}
	for i, key := range media {
		m, err := gems.Find(key)
		if err != nil {
			t.Fatal(err)
		}
		share := 0.1 + 0.1*float64(i)
		c := maps.Columns[0]
		c.Medium, c.WindowedArea = m, share
		c.HasCritical, c.Critical = i < 2, facets.Angle(34.4+14*float64(i))*facets.Degree
		c.Ledger = trace.Ledger{Surface: 0.08, Returned: 0.8 - share, Head: 0.1, Leaked: share, Absorbed: 0.02}
		c.StandardError = trace.Ledger{Returned: 0.0004}
		job.Light.Columns = append(job.Light.Columns, c)
	}
	job.Miscuts = nil
	for i, m := range miscutPlans(job.Plan) {
		job.Miscuts = append(job.Miscuts, Miscut{m.side, m.by, 0.69 + 0.01*float64(i), 0.0012})
	}
	return job
}

// oldRed is a machine that needs every word that is told of machines.
func oldRed() Machine {
	return Machine{Name: "P1", Gear: 80, PavilionOffset: 0.3 * facets.Degree, CrownOffset: -1.25 * facets.Degree,
		AngleStep: 0.1 * facets.Degree, Cheater: 5.5 * facets.Degree, TransferIndex: 20, TableAdapter: 45 * facets.Degree}
}

// rarePlan says what no sample plan does: a preform that takes nothing off the rough, a girdle
// for now, stages, a culet flat.
const rarePlan = `
plan = 1
name = "P1"
material = "quartz"
width_mm = 10
gear = 96
polish = ["P1"]
[[tier]]
name = "X1"
side = "pavilion"
angle = 10
index = [0, 24, 48, 72]
distance = 5
temporary = true
stage = "preform"
[[tier]]
name = "X2"
side = "girdle"
index = [12, 36, 60, 84]
distance = 1.01
temporary = true
stage = "polish"
[[tier]]
name = "G1"
side = "girdle"
index = [12, 36, 60, 84]
distance = 1
[[tier]]
name = "P1"
side = "pavilion"
angle = 45
index = [12, 36, 60, 84]
level = -0.1
[[tier]]
name = "K1"
side = "pavilion"
index = [0]
angle = 0
culet = 0.1
[[transfer]]
[[tier]]
name = "T1"
side = "table"
distance = 0.2
`

// everyKind returns jobs that together need every word that a sheet may say, without any
// of an author's.
func everyKind(t *testing.T) map[string]Job {
	t.Helper()
	jobs := map[string]Job{}
	maps := lit(t, sampleJob(t, "round.toml")).Light
	add := func(name string, job Job, change func(*Job)) {
		job.Plan = wordless(job.Plan)
		job = told(t, job, maps, "air", "water", "oil")
		job.Program = ""
		if change != nil {
			change(&job)
		}
		jobs[name] = job
	}
	for _, name := range samplePlans(t) {
		add(name, sampleJob(t, name), func(j *Job) { j.Gears = []int{64, 77} })
	}
	round, twist := sampleJob(t, "round.toml"), sampleJob(t, "twist.toml")
	for _, m := range gems.Stones() {
		add("of "+m.Key, round, func(j *Job) { j.Material = m })
	}
	add("pupil", twist, func(j *Job) {
		j.LeaveOut, j.Copy = LeaveOut{Angles: true, Indices: true, Stops: true}, PupilsCopy
	})
	add("pupil without stops", twist, func(j *Job) { j.LeaveOut, j.Copy = LeaveOut{Indices: true}, PupilsCopy })
	add("teacher", twist, func(j *Job) { j.Copy = TeachersCopy })
	add("machine", twist, func(j *Job) { j.Machine = oldRed() })
	add("dish", twist, func(j *Job) { j.Light.Columns[1].Dish = true })
	scan := round
	scan.Plan = facets.PlanOf(sheetOf(t, round).Solution.Stone, 96)
	scan.Plan.Material.Key = "quartz"
	add("scan", scan, func(j *Job) { j.Plan.Notes = ShapeAlone.English() })
	for _, shape := range []string{"\"box\"\nsize_mm = [7, 15, 15]", "\"box\"\nsize_mm = [15, 6, 15]", "\"cylinder\"\nsize_mm = [15, 7]",
		"\"ellipsoid\"\nsize_mm = [22, 22, 16]"} {
		add("rough "+shape, jobOf(t, planOf(t, gappedPlan+"\n[rough]\nshape = "+shape+"\n")), nil)
	}
	add("rare", jobOf(t, planOf(t, rarePlan)), func(j *Job) {
		j.Plan.Polish = []string{"P1"}
		j.Plan.Tiers[3].Note = strings.Repeat("P1 ", 200)
		j.Plan.Notes = strings.Repeat("P1 ", 800)
	})
	melt := strings.Replace(gappedPlan, `material = "quartz"`, `material = { name = "P1", index = 1.6 }`, 1)
	add("no density", jobOf(t, planOf(t, melt)), func(j *Job) { j.Plan.Name, j.Plan.Author = "漢字", "P1" })
	return jobs
}

// wordsOn returns what is written on pages, and checks that nothing on them is cut short,
// lacks a letter, or runs out of the margins.
func wordsOn(t *testing.T, where string, pages []*drawing.Page) []string {
	t.Helper()
	var all []string
	for n, page := range pages {
		margin := (&press{sheet: &Sheet{Job: Job{Paper: Paper{Width: page.Width}}}}).margin()
		for _, m := range page.Marks {
			text, ok := m.(*drawing.Text)
			if !ok {
				continue
			}
			all = append(all, text.Words)
			left, right := text.At.X, text.At.X+text.Type.Width(text.Words)
			switch text.Align {
			case drawing.Middle:
				left, right = left-(right-left)/2, left+(right-left)/2
			case drawing.Right:
				left, right = left-(right-left), left
			}
			const rounding = 0.01 // mm
			if left < margin-rounding || right > page.Width-margin+rounding {
				t.Errorf("%s, page %d: %q runs out of the margins", where, n+1, text.Words)
			}
			if strings.HasSuffix(text.Words, "…") && !strings.HasPrefix(text.Words, "P1 P1") { // an author's may be
				t.Errorf("%s, page %d: %q is cut short", where, n+1, text.Words)
			}
		}
		all = append(all, page.Bookmark)
	}
	return all
}

// TestEveryWordIsOfTheLanguage makes sheets that say all there is to say, on every paper,
// and looks up every word in the language's catalog: an English word that was left over is
// none of its words, and neither is one that was broken for want of room.
func TestEveryWordIsOfTheLanguage(t *testing.T) {
	t.Parallel()
	type tongue struct {
		in     *words.Words
		known  map[string]bool
		others *regexp.Regexp // decimal marks of other languages
	}
	var tongues []tongue
	for _, language := range words.Languages() {
		in := words.In(language)
		known := vocabulary(t, language)
		for _, own := range []string{"P", "漢字", stock.KeyOf(in, "quartz")} { // what everyKind calls things
			known[own] = true
		}
		others := regexp.MustCompile(`\d\.\d`)
		if language == "en" {
			others = regexp.MustCompile(`\d,\d`)
		}
		tongues = append(tongues, tongue{in, known, others})
	}
	jobs := everyKind(t)
	turn := 0
	for _, name := range slices.Sorted(maps.Keys(jobs)) {
		s := sheetOf(t, jobs[name])
		tiers := map[string]bool{}
		for i := range s.Rows {
			for _, word := range lettersOf(s.Rows[i].Tier.Name) {
				tiers[word] = true
			}
		}
		for _, paper := range Papers() {
			for _, large := range []bool{false, true} {
				for _, tongue := range tongues {
					if turn++; turn%7 != 0 && !slices.Contains(hardest, name) {
						continue
					}
					s.Paper, s.Large, s.Words = paper, large, tongue.in
					where := fmt.Sprintf("%s, %s, %s, large %v", tongue.in.Language(), name, paper.Name, large)
					document, err := s.Document()
					if err != nil {
						t.Fatal(err)
					}
					texts := wordsOn(t, where, document.Pages)
					for _, a := range document.Attachments {
						texts = append(texts, a.About)
					}
					for _, text := range append(texts, document.Title, document.Subject) {
						for _, word := range lettersOf(text) {
							if !tongue.known[word] && !tiers[word] {
								t.Errorf("%s: %q stands in %q and nowhere in the catalog", where, word, text)
							}
						}
						if tongue.others.MatchString(text) {
							t.Errorf("%s: %q has the decimal mark of another language", where, text)
						}
					}
				}
			}
		}
	}
}

var update = flag.Bool("update", false, "write testdata/english.txt anew")

// TestLongNamesOfSurroundings: heads of maps and ledger keep to their columns.
func TestLongNamesOfSurroundings(t *testing.T) {
	round := sampleJob(t, "round.toml")
	s := sheetOf(t, told(t, round, lit(t, round).Light, "air", "immersion-oil", "diiodomethane-sulfur", "carbon-tetrachloride"))
	for _, language := range words.Languages() {
		for _, paper := range Papers() {
			for _, large := range []bool{false, true} {
				s.Words, s.Paper, s.Large = words.In(language), paper, large
				for n, page := range s.Pages() {
					checkPage(t, fmt.Sprintf("%s, %s, large %v, page %d", language, paper.Name, large, n+1), page)
				}
			}
		}
	}
}

// TestEnglishStaysAsItIs holds the sheet's English, word for word, each line of each sheet
// once: nobody who said nothing of languages is to find another sheet. After a change that
// is meant, write the file anew with -update.
func TestEnglishStaysAsItIs(t *testing.T) {
	jobs := everyKind(t)
	var out strings.Builder
	for _, name := range []string{"round.toml", "pupil", "machine", "of diamond", "scan"} {
		fmt.Fprintf(&out, "== %s\n", name)
		s := sheetOf(t, jobs[name])
		document, err := s.Document()
		if err != nil {
			t.Fatal(err)
		}
		told := map[string]bool{}
		for _, text := range append(wordsOn(t, name, document.Pages), document.Title, document.Subject) {
			if !told[text] && strings.ContainsFunc(text, unicode.IsLower) {
				fmt.Fprintln(&out, text)
			}
			told[text] = true
		}
		english := jobs[name]
		english.Words = words.In("en")
		if !bytes.Equal(pdfOf(t, s), pdfOf(t, sheetOf(t, english))) {
			t.Errorf("%s: a sheet of no language and one in English differ", name)
		}
	}
	file := filepath.Join("testdata", "english.txt")
	if *update {
		if err := os.WriteFile(file, []byte(out.String()), 0o600); err != nil {
			t.Fatal(err)
		}
	}
	want, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	for i, line := range strings.Split(out.String(), "\n") {
		before, rest, _ := strings.Cut(string(want), "\n")
		if want = []byte(rest); line != before {
			t.Fatalf("line %d of %s reads\n%s\nand the sheet says\n%s", i+1, file, before, line)
		}
	}
}

// TestABookletSpeaksOneLanguage looks at the pages of contents.
func TestABookletSpeaksOneLanguage(t *testing.T) {
	for _, language := range words.Languages()[1:] {
		in := words.In(language)
		var sheets []*Sheet
		for _, name := range []string{"round.toml", "oval.toml"} {
			job := sampleJob(t, name)
			job.Plan, job.Words, job.Program = wordless(job.Plan), in, ""
			sheets = append(sheets, sheetOf(t, job))
		}
		document, err := Booklet(in.Say(BookletTitle), sheets)
		if err != nil {
			t.Fatal(err)
		}
		known := vocabulary(t, language)
		for _, text := range append(wordsOn(t, language, document.Pages[:1]), document.Title, document.Subject) {
			for _, word := range lettersOf(text) {
				if !known[word] && word != "P" { // as the plans are called
					t.Errorf("%s: %q stands in %q and nowhere in %s.toml", language, word, text, language)
				}
			}
		}
		if document.Language != language {
			t.Errorf("the booklet says that it is in %q, and is in %s", document.Language, language)
		}
	}
}
