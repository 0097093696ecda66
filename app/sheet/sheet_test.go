package sheet

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"io/fs"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/drawing"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace"
)

// sampleJob is the usual job on a sample plan, without light.
func sampleJob(t testing.TB, name string) Job {
	t.Helper()
	f, err := testdata.Plans().Open(name)
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	plan, err := facets.ReadPlan(f, name)
	if err != nil {
		t.Fatal(err)
	}
	return jobOf(t, plan)
}

func jobOf(t testing.TB, plan *facets.Plan) Job {
	t.Helper()
	material, err := gems.Plain(plan.Material.Name, 1.6, plan.Material.Density)
	if plan.Material.Key != "" {
		material, err = gems.Find(plan.Material.Key)
	}
	if err != nil {
		t.Fatal(err)
	}
	paper, err := PaperNamed("a4")
	if err != nil {
		t.Fatal(err)
	}
	return Job{Plan: plan, Material: material, Machine: Plain(), Paper: paper, HeadDeg: 10, Program: "Pavilight test"}
}

// planOf reads a plan text.
func planOf(t testing.TB, text string) *facets.Plan {
	t.Helper()
	plan, err := facets.ReadPlan(strings.NewReader(text), "own.toml")
	if err != nil {
		t.Fatal(err)
	}
	return plan
}

func sheetOf(t testing.TB, job Job) *Sheet {
	t.Helper()
	s, err := New(job)
	if err != nil {
		t.Fatal(err)
	}
	return s
}

// lit adds small maps to a job.
func lit(t testing.TB, job Job) Job {
	t.Helper()
	stone, err := job.Plan.Solve()
	if err != nil {
		t.Fatal(err)
	}
	var media []*gems.Material
	for _, name := range []string{"air", "water", "oil"} {
		m, err := gems.Find(name)
		if err != nil {
			t.Fatal(err)
		}
		media = append(media, m)
	}
	job.Light, err = trace.Run(context.Background(), trace.Scene{Stone: stone, Material: job.Material, Surroundings: trace.Around(media...)},
		trace.Settings{Head: 10 * facets.Degree, Pixels: 24, Samples: 2, Seed: 1}, nil)
	if err != nil {
		t.Fatal(err)
	}
	return job
}

func samplePlans(t testing.TB) []string {
	t.Helper()
	names, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil || len(names) == 0 {
		t.Fatalf("no sample plans: %v", err)
	}
	return names
}

func pdfOf(t testing.TB, s *Sheet) []byte {
	t.Helper()
	d, err := s.Document()
	if err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := d.PDF(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// poppler runs one of poppler's tools on a PDF, or skips the test where it is not
// installed.
func poppler(t *testing.T, pdf []byte, name string, args ...string) string {
	t.Helper()
	path, err := exec.LookPath(name)
	if err != nil {
		t.Skipf("%s (poppler) is not installed", name)
	}
	file := filepath.Join(t.TempDir(), "sheet.pdf")
	if err := os.WriteFile(file, pdf, 0o600); err != nil {
		t.Fatal(err)
	}
	for i, a := range args {
		if a == "FILE" {
			args[i] = file
		}
	}
	var complaints bytes.Buffer
	cmd := exec.Command(path, args...)
	cmd.Stderr = &complaints
	out, err := cmd.Output()
	if err != nil || complaints.Len() > 0 {
		t.Fatalf("%s: %v\n%s", name, err, complaints.String())
	}
	return string(out)
}

// tierLine is a line of the table of steps as pdftotext lays it out: number, tier,
// angle, and what follows.
var tierLine = regexp.MustCompile(`^\s*(\d+)\s+(\S+)\s+([0-9.]+)°\s+(.*)$`)

// TestTextIsThePlan reads the steps back from the PDF with poppler's pdftotext and finds
// the plan's tiers, angles and indices, in cutting order.
func TestTextIsThePlan(t *testing.T) {
	for _, name := range samplePlans(t) {
		t.Run(name, func(t *testing.T) {
			t.Parallel()
			job := sampleJob(t, name)
			job.Machine.CrownReversed = false // then the machine shows the plan's own numbers
			s := sheetOf(t, job)
			lines := strings.Split(poppler(t, pdfOf(t, s), "pdftotext", "-layout", "FILE", "-"), "\n")
			next := 0
			for i, line := range lines {
				found := tierLine.FindStringSubmatch(line)
				if found == nil || next == len(s.Rows) || found[1] != fmt.Sprint(next+1) {
					continue
				}
				tier, solved := &job.Plan.Tiers[next], &s.Solution.Tiers[next]
				if found[2] != tier.Name || found[3] != fmt.Sprintf("%.2f", solved.Angle.Degrees()) {
					t.Errorf("step %d is %s at %s, want %s at %.2f", next+1, found[2], found[3], tier.Name, solved.Angle.Degrees())
				}
				next++
				if solved.Angle == 0 {
					if !strings.Contains(found[4], fmt.Sprintf("any, as %d ", job.Plan.Gear)) {
						t.Errorf("%s: %q names no index for the flat", tier.Name, found[4])
					}
					continue
				}
				var want []float64
				for _, index := range solved.Index {
					want = append(want, ToGear(index, job.Plan.Gear, job.Plan.Gear))
				}
				slices.Sort(want)
				var got []float64
				for rest, more := found[4], lines[i+1:]; ; rest, more = more[0], more[1:] {
					for _, word := range strings.Fields(rest) {
						if v, ok := readSetting(word, job.Plan.Gear); ok && len(got) < len(want) {
							got = append(got, v)
						} else {
							break
						}
					}
					if len(got) >= len(want) || len(more) == 0 {
						break
					}
				}
				const tolerance = 0.005 // teeth: cheaters are printed to a hundredth of a degree
				same := slices.EqualFunc(got, want, func(a, b float64) bool { return math.Abs(a-b) < tolerance })
				if !same {
					t.Errorf("%s: the text has indices %v, the plan %v", tier.Name, got, want)
				}
			}
			if next != len(s.Rows) {
				t.Errorf("the text has %d steps, the plan %d tiers", next, len(s.Rows))
			}
		})
	}
}

// readSetting reads 12 or 12+1.50° as a place on the gear, in [0, gear).
func readSetting(word string, gear int) (float64, bool) {
	word = strings.Replace(strings.TrimSuffix(word, "°"), "−", "-", 1)
	var tooth int
	var cheater float64
	if n, _ := fmt.Sscanf(word, "%d%f", &tooth, &cheater); n == 0 || tooth < 1 || tooth > gear {
		return 0, false
	}
	if strings.Trim(word, "0123456789+-.") != "" {
		return 0, false
	}
	return ToGear(float64(tooth)+cheater*float64(gear)/360, gear, gear), true
}

// hardest are the plans that are set on every paper and in every language, the others on
// one each, in turn:
// the usual round, the most facets, the most tiers, the deepest, the longest, no stone.
var hardest = []string{"round.toml", "round-star.toml", "pear.toml", "round-step.toml", "marquise.toml", "rod.toml"}

// TestEveryPageIsSound looks at every mark of every sheet: on the paper, in grey, of
// readable size, and no words on other words.
func TestEveryPageIsSound(t *testing.T) {
	t.Parallel()
	for i, name := range samplePlans(t) {
		job := lit(t, sampleJob(t, name))
		job.Gears = []int{64, 77}
		s := sheetOf(t, job)
		turn := 0
		for _, paper := range Papers() {
			for _, large := range []bool{false, true} {
				turn++
				if i%6 != turn%6 && !slices.Contains(hardest, name) {
					continue
				}
				s.Paper, s.Large = paper, large
				for k, language := range words.Languages() {
					if k != (i+turn)%3 && !slices.Contains(hardest, name) {
						continue
					}
					s.Words = words.In(language)
					for n, page := range s.Pages() {
						where := fmt.Sprintf("%s, %s, %s, large %v, page %d", language, name, paper.Name, large, n+1)
						checkPage(t, where, page)
					}
				}
			}
		}
	}
}

// checkPage looks at the marks of one page.
func checkPage(t *testing.T, where string, page *drawing.Page) {
	t.Helper()
	type box struct {
		words                    string
		left, top, right, bottom float64
	}
	var boxes []box
	out := func(p drawing.Point) bool {
		return p.X < 0 || p.Y < 0 || p.X > page.Width || p.Y > page.Height || math.IsNaN(p.X+p.Y)
	}
	grey := func(i drawing.Ink) bool { return i.R == i.G && i.G == i.B }
	for _, m := range page.Marks {
		switch m := m.(type) {
		case *drawing.Text:
			if m.Type.Size < 9 || strings.HasSuffix(m.Words, "°") && m.Type.Bold && m.Type.Size > 11 && m.Type.Size < 12 {
				t.Errorf("%s: %q is set in %g points", where, m.Words, m.Type.Size)
			}
			if m.Ink.R > 0x60 || !grey(m.Ink) {
				t.Errorf("%s: %q is set in ink %v", where, m.Words, m.Ink)
			}
			w := m.Type.Width(m.Words)
			left := m.At.X
			switch m.Align {
			case drawing.Middle:
				left -= w / 2
			case drawing.Right:
				left -= w
			}
			b := box{m.Words, left, m.At.Y - m.Type.Height(), left + w, m.At.Y}
			if out(pt(b.left, b.top)) || out(pt(b.right, b.bottom)) {
				t.Errorf("%s: %q runs off the paper", where, m.Words)
			}
			for _, o := range boxes {
				const touch = 0.15 // mm
				if min(b.right, o.right)-max(b.left, o.left) > touch && min(b.bottom, o.bottom)-max(b.top, o.top) > touch {
					t.Errorf("%s: %q runs into %q", where, m.Words, o.words)
				}
				const apart = 0.5 // mm, between words on one line
				if gap := max(b.left, o.left) - min(b.right, o.right); math.Abs(b.bottom-o.bottom) < 0.01 && gap > -touch && gap < apart {
					t.Errorf("%s: %q stands hard by %q", where, m.Words, o.words)
				}
			}
			boxes = append(boxes, b)
		case *drawing.Path:
			if !grey(m.Fill) || !grey(m.Stroke) {
				t.Errorf("%s: a path is in colour", where)
			}
			for _, ring := range m.Rings {
				if slices.ContainsFunc(ring, out) {
					t.Errorf("%s: a path runs off the paper", where)
				}
			}
		case *drawing.Circle:
			if out(pt(m.Centre.X-m.Radius, m.Centre.Y-m.Radius)) ||
				out(pt(m.Centre.X+m.Radius, m.Centre.Y+m.Radius)) {
				t.Errorf("%s: a circle runs off the paper", where)
			}
		case *drawing.Picture:
			if out(m.At) || out(pt(m.At.X+m.Width, m.At.Y+m.Height)) {
				t.Errorf("%s: a picture runs off the paper", where)
			}
		}
	}
}

// exact is how near a drawing lies to the solid, mm on paper.
const exact = 0.01

// TestDrawingsAreTheSolid compares the polygons of the ring drawing with the solver's
// corners: seen from above x runs up the paper and y to the left, from below to the right.
func TestDrawingsAreTheSolid(t *testing.T) {
	for _, name := range samplePlans(t) {
		s := sheetOf(t, sampleJob(t, name))
		for _, side := range []facets.Side{facets.Crown, facets.Pavilion} {
			toRight, up := -1.0, 1.0
			if side == facets.Pavilion {
				toRight, up = 1, -1
			}
			page := &drawing.Page{Width: 300, Height: 300}
			d := ringDrawing{sheet: s, facing: side, type_: drawing.Type{Size: 9}}
			scale, _ := d.draw(page, pt(150, 150), 120)
			var drawn [][]drawing.Point
			for _, m := range page.Marks {
				if p, ok := m.(*drawing.Path); ok && p.Closed {
					drawn = append(drawn, p.Rings[0])
				}
			}
			seen := 0
			for i := range s.Solution.Stone.Facets {
				f := &s.Solution.Stone.Facets[i]
				if f.Normal[2]*up < 1e-6 {
					continue
				}
				seen++
				var want []drawing.Point
				for _, c := range f.Corners {
					p := s.Solution.Stone.Corners[c]
					want = append(want, pt(150+scale*toRight*p[1], 150-scale*p[0]))
				}
				if !slices.ContainsFunc(drawn, func(ring []drawing.Point) bool { return near(ring, want, exact) }) {
					t.Errorf("%s from %v: facet %s at %g is not drawn where it is", name, side, f.Tier, f.Index)
				}
			}
			if seen != len(drawn) {
				t.Errorf("%s from %v: %d facets drawn, %d face the viewer", name, side, len(drawn), seen)
			}
		}
	}
}

func near(a, b []drawing.Point, tolerance float64) bool {
	return slices.EqualFunc(a, b, func(p, q drawing.Point) bool { return math.Hypot(p.X-q.X, p.Y-q.Y) <= tolerance })
}

// svgNumbers are the numbers of a path in what pdftocairo writes.
var svgPath = regexp.MustCompile(`<path [^>]*d="([^"]*)"`)

// TestThePDFIsToScale reads the drawings back from the PDF through poppler's pdftocairo:
// the ruler is 50 mm long, and the table's flat has the shape that the solver gives it,
// at the scale that the sheet names.
func TestThePDFIsToScale(t *testing.T) {
	s := sheetOf(t, sampleJob(t, "round.toml"))
	out := filepath.Join(t.TempDir(), "page.svg")
	pdf := pdfOf(t, s)
	paths := func(page int) [][]drawing.Point {
		poppler(t, pdf, "pdftocairo", "-svg", "-f", fmt.Sprint(page), "-l", fmt.Sprint(page), "FILE", out)
		text, err := os.ReadFile(out)
		if err != nil {
			t.Fatal(err)
		}
		var all [][]drawing.Point
		for _, found := range svgPath.FindAllStringSubmatch(string(text), -1) {
			var ring []drawing.Point
			for part := range strings.FieldsFuncSeq(found[1], func(r rune) bool { return r == 'M' || r == 'L' || r == 'Z' }) {
				var x, y float64
				if n, _ := fmt.Sscan(part, &x, &y); n == 2 {
					ring = append(ring, pt(x*drawing.MMPerPoint, y*drawing.MMPerPoint))
				}
			}
			all = append(all, ring)
		}
		return all
	}
	pages := s.Pages()
	if !slices.ContainsFunc(paths(len(pages)), func(p []drawing.Point) bool {
		return len(p) == 2 && math.Abs(math.Hypot(p[1].X-p[0].X, p[1].Y-p[0].Y)-50) < exact
	}) {
		t.Error("no line of 50 mm on the last page")
	}
	stone := s.Solution.Stone
	table := stone.Facets[slices.IndexFunc(stone.Facets, func(f facets.Facet) bool { return f.Side == facets.Table })]
	var want []drawing.Point
	for _, c := range table.Corners {
		p := stone.Corners[c]
		want = append(want, pt(-10*p[1], 10*p[0])) // 10 : 1; a PDF's y runs up
	}
	if !slices.ContainsFunc(paths(3), func(ring []drawing.Point) bool {
		if len(ring) > len(want) {
			ring = ring[:len(want)] // the closing stroke comes back as a point
		}
		if len(ring) != len(want) {
			return false
		}
		dx, dy := ring[0].X-want[0].X, ring[0].Y-want[0].Y
		moved := make([]drawing.Point, len(want))
		for i, p := range want {
			moved[i] = pt(p.X+dx, p.Y+dy)
		}
		return near(ring, moved, 2*exact) // either end of each distance is exact to 0.01 mm
	}) {
		t.Error("the table is not drawn 10 : 1 on the crown's page")
	}
	if text := poppler(t, pdf, "pdftotext", "-f", "3", "-l", "3", "FILE", "-"); !strings.Contains(text, "drawn 10 : 1") {
		t.Error("the crown's page names another scale")
	}
}

// TestPDFIsSound asks poppler's pdfinfo.
func TestPDFIsSound(t *testing.T) {
	s := sheetOf(t, lit(t, sampleJob(t, "round.toml")))
	info := poppler(t, pdfOf(t, s), "pdfinfo", "-isodates", "FILE")
	for _, want := range []string{"Title:           Harbour Eight", "Creator:         Pavilight test", "Encrypted:       no",
		fmt.Sprintf("Pages:           %d", len(s.Pages())), "A4", "2000-01-01"} {
		if !strings.Contains(info, want) {
			t.Errorf("pdfinfo lacks %q:\n%s", want, info)
		}
	}
}

func TestThePlanTravelsInThePDF(t *testing.T) {
	job := sampleJob(t, "round.toml")
	target := filepath.Join(t.TempDir(), "plan.toml")
	poppler(t, pdfOf(t, sheetOf(t, job)), "pdfdetach", "-save", "1", "-o", target, "FILE")
	back, err := facets.OpenPlan(target)
	if err != nil {
		t.Fatal(err)
	}
	again := sheetOf(t, jobOf(t, back))
	if far := farthestCorner(again.Solution.Stone, sheetOf(t, job).Solution.Stone); far != 0 {
		t.Errorf("the plan from the PDF solves to corners %g mm away", far)
	}
}

func TestEqualJobsGiveEqualBytes(t *testing.T) {
	a := pdfOf(t, sheetOf(t, lit(t, sampleJob(t, "twist.toml"))))
	b := pdfOf(t, sheetOf(t, lit(t, sampleJob(t, "twist.toml"))))
	if !bytes.Equal(a, b) {
		t.Error("two PDFs of one job differ")
	}
}

// mostBytes is what a sheet may weigh.
const mostBytes = 1 << 20

// TestSheetsAreSmall weighs the sheet of the plan with the most tiers, maps in full.
func TestSheetsAreSmall(t *testing.T) {
	var longest Job
	for _, name := range samplePlans(t) {
		if job := sampleJob(t, name); longest.Plan == nil || len(job.Plan.Tiers) > len(longest.Plan.Tiers) {
			longest = job
		}
	}
	var media []*gems.Material
	for _, name := range []string{"air", "water", "oil"} {
		m, err := gems.Find(name)
		if err != nil {
			t.Fatal(err)
		}
		media = append(media, m)
	}
	if err := Trace(context.Background(), &longest, media, nil); err != nil {
		t.Fatal(err)
	}
	pdf := pdfOf(t, sheetOf(t, longest))
	if len(longest.Plan.Tiers) < 12 || len(pdf) > mostBytes {
		t.Errorf("%s of %d tiers: %d bytes, more than %d", longest.Plan.Name, len(longest.Plan.Tiers), len(pdf), mostBytes)
	}
}

// TestPupilsCopyTellsNothing looks for the answers in all that a PDF holds.
func TestPupilsCopyTellsNothing(t *testing.T) {
	job := lit(t, sampleJob(t, "twist.toml"))
	job.LeaveOut = LeaveOut{Angles: true, Indices: true, Stops: true}
	job.Copy = PupilsCopy
	job.Gears = []int{64}
	s := sheetOf(t, job)
	pdf := pdfOf(t, s)
	text := poppler(t, pdf, "pdftotext", "-layout", "FILE", "-")
	for i := range s.Rows {
		r := &s.Rows[i]
		if angle := fmt.Sprintf("%.2f°", r.Solved.Angle.Degrees()); strings.Contains(text, angle) {
			t.Errorf("the text tells the angle %s of %s", angle, r.Tier.Name)
		}
		if strings.Contains(text, s.StopIn(nil, r)) || r.Tier.Note != "" && strings.Contains(text, r.Tier.Note) {
			t.Errorf("the text tells when to stop %s", r.Tier.Name)
		}
	}
	if strings.Contains(text, "until") || strings.Contains(text, "43.5") || regexp.MustCompile(`\b22 +38 +54\b`).MatchString(text) {
		t.Error("the text tells of angles, indices or stops")
	}
	if list := poppler(t, pdf, "pdfdetach", "-list", "FILE"); !strings.HasPrefix(list, "0 ") {
		t.Errorf("a plan is attached: %s", list)
	}
	if info := poppler(t, pdf, "pdfinfo", "FILE"); strings.Contains(info, "43.5") {
		t.Errorf("pdfinfo tells: %s", info)
	}
	// Each part can be left out alone.
	for _, one := range []LeaveOut{{Angles: true}, {Indices: true}, {Stops: true}} {
		job.LeaveOut = one
		text := poppler(t, pdfOf(t, sheetOf(t, job)), "pdftotext", "-layout", "FILE", "-")
		if got := strings.Contains(text, "43.50°"); got == one.Angles {
			t.Errorf("%+v: angles told: %v", one, got)
		}
		if got := regexp.MustCompile(`\b22 +38 +54\b`).MatchString(text); got == one.Indices {
			t.Errorf("%+v: indices told: %v", one, got)
		}
		if got := strings.Contains(text, "until"); got == one.Stops {
			t.Errorf("%+v: stops told: %v", one, got)
		}
	}
}

// TestWeights compares with a formula of the trade: carats = diameter² × depth × specific
// gravity × 0.0018 for any round species, all in mm. Source: the usual estimation formula
// as gemmology handbooks print it. Its factor is rounded up from 0.00173 for a 3 percent
// girdle (from the diamond formula D² H 0.0061), so it lies 4 percent high, up to 8 for a
// thin girdle; cuts with fewer facets lie nearer or below.
func TestWeights(t *testing.T) {
	// Specific gravities: R. Webster, Gems, as quoted by the material tables of the trade.
	for _, row := range []struct {
		name, species string
		density       float64
	}{
		{"round.toml", "corundum", 4.00},
		{"twist.toml", "topaz", 3.53},
	} {
		s := sheetOf(t, sampleJob(t, row.name))
		m := s.Measures
		carats, ok := s.Carats(m.VolumeMM3)
		rule := m.WidthMM * m.WidthMM * m.DepthMM * row.density * 0.0018
		if !ok || math.Abs(carats/rule-0.96) > 0.06 {
			t.Errorf("%s: %.3f ct, the rule for %s gives %.3f", row.name, carats, row.species, rule)
		}
	}
}

const gappedPlan = `
plan = 1
name = "Between"
material = "quartz"
width_mm = 10
gear = 96
[[tier]]
name = "G"
side = "girdle"
index = [12.4, 36.4, 60.4, 84.4]
distance = 1
[[tier]]
name = "P"
side = "pavilion"
angle = 45
index = [12.4, 36.4, 60.4, 84.4]
level = -0.1
[[transfer]]
[[tier]]
name = "T"
side = "table"
distance = 0.2
`

func TestBetweenTeeth(t *testing.T) {
	job := jobOf(t, planOf(t, gappedPlan))
	s := sheetOf(t, job)
	if got := strings.Join(settingWords(nil, s.Rows[0].Settings), " "); got != "12+1.50° 36+1.50° 60+1.50° 84+1.50°" {
		t.Errorf("settings are %q", got)
	}
	text := poppler(t, pdfOf(t, s), "pdftotext", "-layout", "FILE", "-")
	if !strings.Contains(text, "12 + 0.4 tooth = 1.50 degrees") || !strings.Contains(text, "Mind the cheater") {
		t.Error("no caution about facets between teeth")
	}
	for _, row := range []struct {
		name    string
		cheater float64
		want    string
	}{
		{"no cheater", 0, "has no cheater"},
		{"short cheater", 1, "1.50 degrees from a tooth of the gear of 96, and the cheater of"},
	} {
		job.Machine.Cheater = facets.Angle(row.cheater) * facets.Degree
		_, err := New(job)
		var faults facets.Faults
		if !errors.As(err, &faults) || len(faults) != 2 {
			t.Fatalf("%s: %v, want a fault for each tier", row.name, err)
		}
		if f := faults[0]; f.Tier != "G" || f.Line != 7 || f.Got != "12.4 36.4 60.4 84.4" || !strings.Contains(f.Why, row.want) {
			t.Errorf("%s: %v", row.name, f)
		}
	}
	job.Machine.Cheater = 1.5 * facets.Degree
	if _, err := New(job); err != nil {
		t.Errorf("a cheater of just 1.5 degrees: %v", err)
	}
}

func TestTableAdapter(t *testing.T) {
	job := sampleJob(t, "round.toml")
	job.Machine.TableAdapter = 45 * facets.Degree
	job.Machine.CrownOffset = 0.5 * facets.Degree
	s := sheetOf(t, job)
	table := s.Rows[len(s.Rows)-1]
	if math.Abs(table.Reading.Degrees()-45.5) > 1e-9 || table.Settings[0].Tooth != 96 {
		t.Errorf("the table is set to %v at %v", table.Reading, table.Settings)
	}
	text := poppler(t, pdfOf(t, s), "pdftotext", "-layout", "FILE", "-")
	if !strings.Contains(text, "45.50°") || !strings.Contains(text, "with the") {
		t.Error("the sheet does not name the adapter")
	}
}

// TestCannotBeCut: a tier that touches nothing is an error of the plan, with its place.
func TestCannotBeCut(t *testing.T) {
	plan := planOf(t, strings.Replace(gappedPlan, "distance = 0.2", "distance = 0.2\n[[tier]]\nname = \"C\"\nside = \"crown\"\nangle = 30\nindex = 0\ndistance = 9", 1))
	_, err := New(jobOf(t, plan))
	var faults facets.Faults
	if !errors.As(err, &faults) || !strings.Contains(err.Error(), `tier "C"`) || !strings.Contains(err.Error(), "never touches the stone") {
		t.Errorf("got %v", err)
	}
}

func TestNamesOfAllSorts(t *testing.T) {
	for _, row := range []struct {
		name, text string
		lacking    bool
	}{
		{"300 letters", strings.Repeat("n", 300), false},
		{"300 words", strings.Repeat("stone ", 300), false},
		{"Greek", "Λιμάνι οκτώ", false},
		{"Chinese", "港湾八号", true},
		{"Arabic", "ميناء", true},
		{"emoji", "💎 Harbour", true},
		{"line ends and tabs", "Harbour\n\tEight", false},
		{"markup", `<b>"Harbour" & (Eight)\</b>`, false},
	} {
		plan := planOf(t, gappedPlan)
		plan.Name, plan.Author = row.text, row.text
		plan.Tiers[0].Note = row.text
		for _, paper := range Papers() {
			job := jobOf(t, plan)
			job.Paper = paper
			s := sheetOf(t, job)
			for n, page := range s.Pages() {
				checkPage(t, fmt.Sprintf("%s on %s, page %d", row.name, paper.Name, n+1), page)
			}
		}
		pdf := pdfOf(t, sheetOf(t, jobOf(t, plan)))
		text := poppler(t, pdf, "pdftotext", "-layout", "FILE", "-")
		if got := strings.Contains(text, "stands for a letter"); got != row.lacking {
			t.Errorf("%s: told that letters are missing: %v", row.name, got)
		}
		// The PDF's own title is Unicode and loses nothing but what lies beyond its first plane.
		info := poppler(t, pdf, "pdfinfo", "FILE")
		fields := strings.Fields(row.text)
		if first := strings.TrimSuffix(fields[len(fields)-1], "💎"); !strings.Contains(info, first) {
			t.Errorf("%s: the title lost %q:\n%s", row.name, first, info)
		}
	}
}

// TestManyFacets: a tier with more indices than a page holds goes on over the next.
func TestManyFacets(t *testing.T) {
	plan := planOf(t, strings.NewReplacer("[12.4, 36.4, 60.4, 84.4]", "0\nfold = 300", "gear = 96", "gear = 1000").Replace(gappedPlan))
	s := sheetOf(t, jobOf(t, plan))
	for _, paper := range Papers() {
		s.Paper = paper
		found := map[string]bool{}
		for n, page := range s.Pages() {
			checkPage(t, fmt.Sprintf("%s, page %d", paper.Name, n+1), page)
			for _, m := range page.Marks {
				if text, ok := m.(*drawing.Text); ok {
					found[text.Words] = true
				}
			}
		}
		for _, want := range []string{"1000", "3+0.12°", "997−0.12°", "500"} {
			if !found[want] {
				t.Errorf("%s: index %s is not on the sheet", paper.Name, want)
			}
		}
	}
}

// TestNoDensity: a material of the plan's own may have none.
func TestNoDensity(t *testing.T) {
	plan := planOf(t, strings.Replace(gappedPlan, `material = "quartz"`, `material = { name = "melt", index = 1.6 }`, 1))
	text := poppler(t, pdfOf(t, sheetOf(t, jobOf(t, plan))), "pdftotext", "-layout", "FILE", "-")
	if !strings.Contains(text, "density is not known") || strings.Contains(text, "NaN") || strings.Contains(text, " ct") {
		t.Error("a weight is told without a density, or not said to be missing")
	}
}

func TestDiamondIsALightModel(t *testing.T) {
	job := sampleJob(t, "round.toml")
	var err error
	if job.Material, err = gems.Find("diamond"); err != nil {
		t.Fatal(err)
	}
	s := sheetOf(t, job)
	pages := s.Pages()
	for n, page := range pages {
		if !slices.ContainsFunc(page.Marks, func(m drawing.Mark) bool {
			text, ok := m.(*drawing.Text)
			return ok && strings.Contains(text.Words, "not cutting instructions")
		}) {
			t.Errorf("page %d does not say that it gives no instructions", n+1)
		}
	}
	text := poppler(t, pdfOf(t, s), "pdftotext", "-layout", "FILE", "-")
	for _, word := range []string{"until", "transfer", "Polish powder", "cheater", "Laps and grits"} {
		if strings.Contains(text, word) {
			t.Errorf("the sheet still says %q", word)
		}
	}
	if !strings.Contains(text, "Written for corundum, not for this material") {
		t.Error("the notes of a plan for corundum stand beside diamond as if they spoke of it")
	}
}

func TestBooklet(t *testing.T) {
	var sheets []*Sheet
	for _, name := range []string{"round.toml", "twist.toml", "oval.toml"} {
		sheets = append(sheets, sheetOf(t, sampleJob(t, name)))
	}
	d, err := Booklet("Three stones", sheets)
	if err != nil {
		t.Fatal(err)
	}
	if len(d.Attachments) != 3 {
		t.Errorf("%d plans attached", len(d.Attachments))
	}
	var b bytes.Buffer
	if err := d.PDF(&b); err != nil {
		t.Fatal(err)
	}
	contents := poppler(t, b.Bytes(), "pdftotext", "-layout", "-l", "1", "FILE", "-")
	page := 2
	for _, s := range sheets {
		if !regexp.MustCompile(fmt.Sprintf(`(?m)^\s*%s\s+%d$`, s.Plan.Name, page)).MatchString(contents) {
			t.Errorf("the contents do not have %s on page %d:\n%s", s.Plan.Name, page, contents)
		}
		first := poppler(t, b.Bytes(), "pdftotext", "-f", fmt.Sprint(page), "-l", fmt.Sprint(page), "FILE", "-")
		if !strings.HasPrefix(first, s.Plan.Name) {
			t.Errorf("page %d begins %.30q", page, first)
		}
		page += len(s.Pages())
	}
	if _, err := Booklet("none", nil); err == nil {
		t.Error("a booklet of nothing is no error")
	}
}

func TestOtherGears(t *testing.T) {
	job := sampleJob(t, "twist.toml")
	job.Gears = []int{96, 32}
	text := poppler(t, pdfOf(t, sheetOf(t, job)), "pdftotext", "-layout", "FILE", "-")
	if !strings.Contains(text, "Gear of 96, 3.75° a tooth: every facet fits") {
		t.Error("the plan's own gear does not fit")
	}
	// By hand, 32 teeth: of 96ths only multiples of 3 are teeth. P1 0 16 32 48 64 80: two
	// fit. G1 and C1 0 8 16 ... 88: four of twelve. P2 6 22 38 54 70 86: two. C2 5 21 37
	// 53 69 85: two, C3 as the plan has it.
	misfit := 4 + 8 + 4 + 8 + 4
	for _, i := range sheetOf(t, job).Rows[5].Solved.Index {
		if math.Mod(i, 3) != 0 {
			misfit++
		}
	}
	if want := fmt.Sprintf("Gear of 32, 11.25° a tooth: %d facets do not fit", misfit); !strings.Contains(text, want) {
		t.Errorf("the text lacks %q", want)
	}
}

// TestSizesByHand: a square of 10 mm, pavilion at 45 degrees from 1 unit (5 mm) out, its
// edge on the girdle 0.5 mm below z = 0, table 1 mm above.
func TestSizesByHand(t *testing.T) {
	s := sheetOf(t, jobOf(t, planOf(t, gappedPlan)))
	want := map[string]float64{
		"G, across opposite facets":                          10,
		"girdle, length":                                     10,
		"girdle, width":                                      10,
		"culet to the girdle's lower line":                   5,
		"rough left above the girdle's lower line, at least": 1.5 + usualAllowance,
		"culet to the dop side, at least":                    6.5 + usualAllowance,
	}
	got := s.Sizes(facets.Pavilion)
	for _, z := range got {
		if w, ok := want[z.What]; !ok || math.Abs(z.MM-w) > 1e-9 {
			t.Errorf("%s is %.9f, want %g", z.What, z.MM, w)
		}
	}
	if len(got) != len(want) {
		t.Errorf("%d sizes, want %d", len(got), len(want))
	}
	// 0.05 mm too deep: a girdle of 10 mm loses 0.1 mm of width; at 45 degrees 0.05 √2 mm
	// of the height of 6.5 mm.
	for i, want := range []struct{ mm, percent float64 }{
		{0.1, 100 * (1 - math.Pow(9.9/10, 3))},
		{0.05 * math.Sqrt2, 100 * (1 - math.Pow(1-0.05*math.Sqrt2/6.5, 3))},
		{0.05, 100 * (1 - math.Pow(1-0.05/6.5, 3))},
	} {
		r := &s.Rows[i]
		if math.Abs(r.TooDeepMM-want.mm) > 1e-9 || math.Abs(r.TooDeepPct-want.percent) > 1e-9 {
			t.Errorf("%s too deep costs %.6f mm and %.6f %%, want %.6f and %.6f", r.Tier.Name, r.TooDeepMM, r.TooDeepPct, want.mm, want.percent)
		}
	}
}

func TestRough(t *testing.T) {
	for _, row := range []struct {
		name, rough string
		volume      float64 // mm³
		holds       bool
	}{
		{"box on its edge", "shape = \"box\"\nsize_mm = [7, 15, 15]", 7 * 15 * 15, true},
		{"box too low", "shape = \"box\"\nsize_mm = [15, 6, 15]\n", 15 * 6 * 15, false},
		{"upright cylinder", "shape = \"cylinder\"\nsize_mm = [15, 7]", math.Pi * 7.5 * 7.5 * 7, true},
		{"thin cylinder", "shape = \"cylinder\"\nsize_mm = [9, 30]", math.Pi * 4.5 * 4.5 * 30, false},
		{"ellipsoid", "shape = \"ellipsoid\"\nsize_mm = [22, 22, 16]", math.Pi / 6 * 22 * 22 * 16, true},
	} {
		plan := planOf(t, gappedPlan+"\n[rough]\n"+row.rough+"\nallowance_mm = 0.2\n")
		s := sheetOf(t, jobOf(t, plan))
		if math.Abs(s.Rough.VolumeMM3-row.volume) > 1e-9*row.volume || s.Rough.TooSmall == row.holds || (s.Rough.Stone != nil) != row.holds {
			t.Errorf("%s: %.3f mm³, too small %v; want %.3f, holds %v", row.name, s.Rough.VolumeMM3, s.Rough.TooSmall, row.volume, row.holds)
		}
		if row.holds {
			removed := 0.0
			for i := range s.Rows {
				removed += s.Rows[i].Step.Removed
			}
			// The film starts from flats about the rough: no less than the rough itself, and
			// for round ones at most a tenth more.
			begin := removed + s.Measures.VolumeMM3
			if begin < row.volume*(1-1e-9) || begin > row.volume*1.1 {
				t.Errorf("%s: the steps start from %.3f mm³, the rough has %.3f", row.name, begin, row.volume)
			}
		}
	}
}

// TestViewsTurnTheRightWay holds every view's handedness: right, up and to the viewer
// make a right-handed frame, and the viewer looks from where the view says.
func TestViewsTurnTheRightWay(t *testing.T) {
	for _, row := range []struct {
		name   string
		axes   func() (mgl64.Vec3, mgl64.Vec3)
		toward mgl64.Vec3 // rough direction of the viewer
	}{
		{"above", fromAbove, mgl64.Vec3{0, 0, 1}},
		{"below", fromBelow, mgl64.Vec3{0, 0, -1}},
		{"side", func() (mgl64.Vec3, mgl64.Vec3) { return fromSide(0) }, mgl64.Vec3{1, 0, 0}},
		{"lap, crown", func() (mgl64.Vec3, mgl64.Vec3) { return fromLap(facets.Crown) }, mgl64.Vec3{-0.6, -0.2, 0.77}},
		{"lap, pavilion", func() (mgl64.Vec3, mgl64.Vec3) { return fromLap(facets.Pavilion) }, mgl64.Vec3{-0.6, -0.2, -0.77}},
	} {
		right, up := row.axes()
		if math.Abs(right.Len()-1) > 1e-12 || math.Abs(up.Len()-1) > 1e-12 || math.Abs(right.Dot(up)) > 1e-12 {
			t.Errorf("%s: %v and %v are no axes", row.name, right, up)
		}
		v := View{Right: right, Up: up}
		if v.toward().Dot(row.toward) < 0.99*row.toward.Len() {
			t.Errorf("%s: the viewer is toward %v, want %v", row.name, v.toward(), row.toward)
		}
	}
}

func BenchmarkSheet(b *testing.B) {
	job := lit(b, sampleJob(b, "cushion.toml"))
	b.ReportAllocs()
	for b.Loop() {
		s, err := New(job)
		if err != nil {
			b.Fatal(err)
		}
		d, err := s.Document()
		if err != nil {
			b.Fatal(err)
		}
		if err := d.PDF(&bytes.Buffer{}); err != nil {
			b.Fatal(err)
		}
	}
}

// TestBlanksAreFree holds that a pupil finds nothing on the lines to write on.
func TestBlanksAreFree(t *testing.T) {
	job := sampleJob(t, "oval.toml") // with preforms, of which the table says so
	job.LeaveOut = LeaveOut{Angles: true, Indices: true, Stops: true}
	blanks := 0
	for n, page := range sheetOf(t, job).Pages() {
		for _, m := range page.Marks {
			line, ok := m.(*drawing.Path)
			if !ok || line.Stroke != drawing.Grey(0x60) || len(line.Rings[0]) != 2 || line.Rings[0][0].Y != line.Rings[0][1].Y {
				continue
			}
			blanks++
			from, to := line.Rings[0][0], line.Rings[0][1]
			for _, m := range page.Marks {
				text, ok := m.(*drawing.Text)
				if ok && text.Align == drawing.Left && text.At.X < to.X && text.At.X+text.Type.Width(text.Words) > from.X &&
					math.Abs(text.At.Y-from.Y) < text.Type.Height() {
					t.Errorf("page %d: %q stands on a line to write on", n+1, text.Words)
				}
			}
		}
	}
	if blanks < 3*len(job.Plan.Tiers) {
		t.Errorf("%d lines to write on, want three for each of %d tiers", blanks, len(job.Plan.Tiers))
	}
}
