package report

import (
	"bytes"
	"context"
	"encoding/base64"
	"encoding/binary"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"hash/crc32"
	"image"
	"image/color"
	"image/png"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strconv"
	"strings"
	"sync"
	"testing"
	"time"

	"golang.org/x/net/html"

	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// A small report, traced once and looked at by many tests: a round quartz, measured.
var small3 = sync.OnceValues(func() (*Findings, error) { return gathered("quartz", "table=58,crown=34,pavilion=42.5", true) })

// other is the same cut of topaz, without stated errors.
var other = sync.OnceValues(func() (*Findings, error) { return gathered("topaz", "table=58,crown=34,pavilion=42.5", false) })

func gathered(material, values string, measured bool) (*Findings, error) {
	job := &Job{Head: 10 * facets.Degree, Pixels: 60, Error: 0.005, Seed: 1}
	for _, key := range []string{"air", "water"} {
		m, err := gems.Find(key)
		if err != nil {
			return nil, err
		}
		job.Media = append(job.Media, m)
	}
	light, err := trace.FindLight("overcast")
	if err != nil {
		return nil, err
	}
	job.Lights = append(job.Lights, light)
	if measured {
		job.Measured = Uncertainties{{"crown", 0.3}, {"pavilion", 0.2}}
	}
	stone, err := measuredStone(material, values, 8)
	if err != nil {
		return nil, err
	}
	return Gather(context.Background(), job, *stone, nil)
}

func measuredStone(material, values string, widthMM float64) (*Stone, error) {
	p, err := facets.ParseProportions("round", values)
	if err != nil {
		return nil, err
	}
	solid, err := p.Stone(widthMM)
	if err != nil {
		return nil, err
	}
	m, err := gems.Find(material)
	return &Stone{Name: "round", Solid: solid, Material: m, Measures: solid.Measure(), Origin: FromProportions, Proportions: p}, err
}

func findings(t *testing.T, of func() (*Findings, error)) *Findings {
	t.Helper()
	f, err := of()
	if err != nil {
		t.Fatal(err)
	}
	return f
}

func cover(language string) *Cover {
	return &Cover{
		Language: language, Date: time.Date(2026, time.March, 31, 0, 0, 0, 0, time.UTC), Program: "Pavilight test",
		Paper: Paper{210, 297}, Author: "M. Halder", Client: "R. Linde", Notes: "Seen <loose> & by day.",
	}
}

func written(t *testing.T, write func(io.Writer) error) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := write(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// TestWordsAreTheSameInEveryLanguage: the same keys with the same names to fill in, but
// for the names of materials, which a language may leave as they are.
func TestWordsAreTheSameInEveryLanguage(t *testing.T) {
	english, err := wordsOf("en")
	if err != nil {
		t.Fatal(err)
	}
	names := regexp.MustCompile(`\{[A-Za-z]+\}`)
	fill := func(text string) []string {
		all := names.FindAllString(text, -1)
		slices.Sort(all)
		return slices.Compact(all)
	}
	for _, language := range Languages() {
		w, err := wordsOf(language)
		if err != nil {
			t.Fatal(err)
		}
		for key, text := range english {
			if !w.has(key) {
				t.Errorf("%s lacks %s", language, key)
			} else if a, b := fill(text), fill(w[key]); !slices.Equal(a, b) {
				t.Errorf("%s: %s fills in %v, in English %v", language, key, b, a)
			}
		}
		for key := range w {
			if _, ok := english[key]; ok {
				continue
			}
			if _, err := gems.Find(strings.TrimPrefix(key, "material.")); !strings.HasPrefix(key, "material.") || err != nil {
				t.Errorf("%s has %s, which nothing asks for", language, key)
			}
		}
		if n := len(strings.Fields(w["months"])); n != 12 {
			t.Errorf("%s has %d months", language, n)
		}
	}
}

// TestNoWordsOfPraise: a report says numbers, not how good they are.
func TestNoWordsOfPraise(t *testing.T) {
	praise := regexp.MustCompile(`(?i)\b(excellent|very good|good|poor|ideal|perfect|superior|premium|score|rating|beautiful|` +
		`hervorragend|ausgezeichnet|sehr gut|gut|schlecht|schön|excellente?|très bon|bonne?|mauvaise?|belle?|beau)\b`)
	for _, language := range Languages() {
		w, err := wordsOf(language)
		if err != nil {
			t.Fatal(err)
		}
		for key, text := range w {
			if found := praise.FindString(text); found != "" {
				t.Errorf("%s: %s says %q: %s", language, key, found, text)
			}
		}
	}
}

// TestEveryReportCanBeWritten: no words are lacking in any language, for anybody, with and
// without measuring errors.
func TestEveryReportCanBeWritten(t *testing.T) {
	all := []*Findings{findings(t, small3), findings(t, other)}
	for _, language := range Languages() {
		for _, colleague := range []bool{false, true} {
			c := cover(language)
			c.Colleague = colleague
			for i, f := range all {
				if i == 1 {
					c.Paper = Paper{215.9, 279.4}
				}
				d, err := compose(f, c)
				if err != nil {
					t.Fatal(err)
				}
				if n := len(d.pages()); n < 2 || n > 4 {
					t.Errorf("%s, colleague %v: %d pages; a report has 2 to 4", language, colleague, n)
				}
			}
			if _, err := composeComparison(all, c); err != nil {
				t.Error(err)
			}
		}
	}
	if _, err := wordsOf("la"); err == nil || !strings.Contains(err.Error(), "de") {
		t.Errorf("an unknown language: %v", err)
	}
}

func TestEqualInputGivesEqualBytes(t *testing.T) {
	f := findings(t, small3)
	for name, write := range map[string]func(io.Writer) error{
		"PDF":  func(w io.Writer) error { return PDF(w, f, cover("en")) },
		"HTML": func(w io.Writer) error { return HTML(w, f, cover("en")) },
		"JSON": func(w io.Writer) error { return JSON(w, f) },
	} {
		if !bytes.Equal(written(t, write), written(t, write)) {
			t.Errorf("%s: two of the same report differ", name)
		}
	}
}

// page is what an HTML page asks for and shows.
type parsed struct {
	refers []string // every address it refers to
	text   strings.Builder
	open   []string
	images []image.Image
}

// parsePage reads a page with the standard's own rules (golang.org/x/net/html) and checks
// that every element that is opened is closed in its order.
func parsePage(t *testing.T, content []byte) *parsed {
	t.Helper()
	void := []string{"meta", "img", "br", "link"}
	p := &parsed{}
	z := html.NewTokenizer(bytes.NewReader(content))
	for {
		kind := z.Next()
		token := z.Token()
		switch kind {
		case html.ErrorToken:
			if len(p.open) > 0 {
				t.Errorf("never closed: %v", p.open)
			}
			return p
		case html.TextToken:
			p.text.WriteString(token.Data)
		case html.EndTagToken:
			if n := len(p.open); n == 0 || p.open[n-1] != token.Data {
				t.Fatalf("</%s> closes %v", token.Data, p.open)
			}
			p.open = p.open[:len(p.open)-1]
		case html.StartTagToken, html.SelfClosingTagToken:
			if kind == html.StartTagToken && !slices.Contains(void, token.Data) {
				p.open = append(p.open, token.Data)
			}
			if token.Data == "script" || token.Data == "iframe" || token.Data == "link" {
				t.Errorf("the page has a %s", token.Data)
			}
			for _, a := range token.Attr {
				if slices.Contains([]string{"src", "href", "xlink:href", "srcset", "action", "data"}, a.Key) {
					p.refers = append(p.refers, a.Val)
				}
				if code, ok := strings.CutPrefix(a.Val, "data:image/png;base64,"); ok {
					raw, err := base64.StdEncoding.DecodeString(code)
					if err != nil {
						t.Fatal(err)
					}
					img, err := png.Decode(bytes.NewReader(raw))
					if err != nil {
						t.Fatal(err)
					}
					p.images = append(p.images, img)
				}
			}
		}
	}
}

// TestHTMLAsksForNothing: the page is whole in itself, and its elements nest.
func TestHTMLAsksForNothing(t *testing.T) {
	c := cover("en")
	c.Letterhead = image.NewRGBA(image.Rect(0, 0, 30, 10))
	page := written(t, func(w io.Writer) error { return HTML(w, findings(t, small3), c) })
	p := parsePage(t, page)
	if len(p.refers) < 5 {
		t.Errorf("the page refers to %d things only: this test sees nothing", len(p.refers))
	}
	for _, address := range p.refers {
		if !strings.HasPrefix(address, "data:") {
			t.Errorf("the page asks for %.80s", address)
		}
	}
	for _, word := range []string{"http:", "https:", "@import", "url(//"} {
		if bytes.Contains(page, []byte(word)) {
			t.Errorf("the page holds %q", word)
		}
	}
	if n := bytes.Count(page, []byte("url(")) - bytes.Count(page, []byte("url(data:")); n != 0 {
		t.Errorf("%d styles ask for something", n)
	}
	if text := p.text.String(); !strings.Contains(text, "Seen <loose> & by day.") || !strings.Contains(text, "Round brilliant") {
		t.Error("the notes or the name do not come out as they were written")
	}
}

// mapColours is what a map of some findings should look like, worked out from the map.
func mapColours(f *Findings, column int, q trace.Quantity) *image.RGBA {
	m := f.Columns[column].Map
	cm := picture.Cividis()
	if q == trace.Leaked {
		cm = picture.Cubehelix()
	}
	img := image.NewRGBA(image.Rect(0, 0, m.Pixels, m.Pixels))
	for i, v := range m.Field(q) {
		c := color.RGBA{255, 255, 255, 255}
		if v == v {
			c = cm.At(float64(v))
		}
		img.SetRGBA(i%m.Pixels, i/m.Pixels, c)
	}
	return img
}

func sameColours(a image.Image, b *image.RGBA) bool {
	// A PDF's picture may have columns added on its right, which it clips away.
	if a.Bounds().Dy() != b.Rect.Dy() || a.Bounds().Dx() < b.Rect.Dx() {
		return false
	}
	for y := range b.Rect.Dy() {
		for x := range b.Rect.Dx() {
			r, g, bl, _ := a.At(a.Bounds().Min.X+x, a.Bounds().Min.Y+y).RGBA()
			if (color.RGBA{uint8(r >> 8), uint8(g >> 8), uint8(bl >> 8), 255}) != b.RGBAAt(x, y) {
				return false
			}
		}
	}
	return true
}

// TestMapsInTheFilesHaveTheComputedColours reads the maps back from the HTML and, by
// poppler's pdfimages, from the PDF.
func TestMapsInTheFilesHaveTheComputedColours(t *testing.T) {
	f := findings(t, small3)
	page := parsePage(t, written(t, func(w io.Writer) error { return HTML(w, f, cover("en")) }))
	inPDF := imagesOf(t, written(t, func(w io.Writer) error { return PDF(w, f, cover("en")) }))
	for k := range f.Columns {
		for _, q := range []trace.Quantity{trace.Returned, trace.Leaked} {
			want := mapColours(f, k, q)
			same := func(img image.Image) bool { return sameColours(img, want) }
			if !slices.ContainsFunc(page.images, same) {
				t.Errorf("column %d, %v: no picture of the HTML has the map's colours", k, q)
			}
			if inPDF != nil && !slices.ContainsFunc(inPDF, same) {
				t.Errorf("column %d, %v: no picture of the PDF has the map's colours", k, q)
			}
		}
	}
}

// imagesOf takes the pictures out of a PDF; nil where poppler is not installed.
func imagesOf(t *testing.T, pdf []byte) (all []image.Image) {
	t.Helper()
	tool, err := exec.LookPath("pdfimages")
	if err != nil {
		t.Log("pdfimages (poppler) is not installed: the PDF's pictures are not read back")
		return nil
	}
	folder := t.TempDir()
	file := filepath.Join(folder, "report.pdf")
	if err := os.WriteFile(file, pdf, 0o600); err != nil {
		t.Fatal(err)
	}
	if out, err := exec.Command(tool, "-png", file, filepath.Join(folder, "picture")).CombinedOutput(); err != nil || len(out) > 0 {
		t.Fatalf("pdfimages: %v %s", err, out)
	}
	names, _ := filepath.Glob(filepath.Join(folder, "picture*.png"))
	for _, name := range names {
		content, err := os.ReadFile(name)
		if err != nil {
			t.Fatal(err)
		}
		img, err := png.Decode(bytes.NewReader(content))
		if err != nil {
			t.Fatal(err)
		}
		all = append(all, img)
	}
	if len(all) == 0 {
		t.Error("pdfimages finds no picture")
	}
	return all
}

// TestPDFSaysItsLanguage: readers that speak a PDF aloud go by it (ISO 32000-1, 14.9.2).
func TestPDFSaysItsLanguage(t *testing.T) {
	f := findings(t, small3)
	for _, language := range Languages() {
		pdf := written(t, func(w io.Writer) error { return PDF(w, f, cover(language)) })
		if !bytes.Contains(pdf, []byte("/Lang ("+language+")")) {
			t.Errorf("a report in %s does not say so", language)
		}
	}
}

// TestPDFSaysTheNumbers: poppler reads the text back, with each figure and both errors.
func TestPDFSaysTheNumbers(t *testing.T) {
	tool, err := exec.LookPath("pdftotext")
	if err != nil {
		t.Skip("pdftotext (poppler) is not installed")
	}
	f := findings(t, small3)
	file := filepath.Join(t.TempDir(), "report.pdf")
	if err := os.WriteFile(file, written(t, func(w io.Writer) error { return PDF(w, f, cover("en")) }), 0o600); err != nil {
		t.Fatal(err)
	}
	out, err := exec.Command(tool, "-layout", file, "-").CombinedOutput()
	if err != nil {
		t.Fatal(err)
	}
	for k := range f.Columns {
		c := &f.Columns[k]
		up := func(v float64) float64 { return math.Ceil(v*1e4-1e-6) / 1e2 }
		want := fmt.Sprintf("%.2f ± %.2f ± %.2f", 100*c.Ledger.Returned, up(c.StandardError.Returned), up(c.Spread.Returned))
		if !strings.Contains(string(out), want) {
			t.Errorf("column %d: the PDF does not say %s", k, want)
		}
	}
	for _, want := range []string{"It grades nothing", "inclusions, haze", "crown angle ± 0.3°, pavilion angle ± 0.2°", "31 March 2026", "M. Halder"} {
		if !strings.Contains(strings.Join(strings.Fields(string(out)), " "), want) {
			t.Errorf("the PDF does not say %q", want)
		}
	}
}

// TestWithoutStatedErrors: nobody is led to think that the errors are all there is.
func TestWithoutStatedErrors(t *testing.T) {
	page := parsePage(t, written(t, func(w io.Writer) error { return HTML(w, findings(t, other), cover("en")) }))
	if n := strings.Count(strings.ToLower(page.text.String()), "measuring error not included"); n < 4 {
		t.Errorf("the page says %d times that measuring error is not included", n)
	}
}

// TestBarNoteSpeaksOfWhatIsShown: of liquids only where there are any, and that nothing is
// graded in every language.
func TestBarNoteSpeaksOfWhatIsShown(t *testing.T) {
	wet := findings(t, other)
	dry := *wet
	dry.Dish = nil // as with --in air
	for _, language := range Languages() {
		w, err := wordsOf(language)
		if err != nil {
			t.Fatal(err)
		}
		c := composer{words: w}
		for _, of := range []struct {
			name    string
			stones  []*Findings
			liquids bool
		}{{"in air", []*Findings{&dry}, false}, {"in water too", []*Findings{wet}, true}, {"compared", []*Findings{&dry, wet}, true}} {
			note := c.barNote(of.stones...).words
			if got := strings.Contains(note, w["bar.around"]); got != of.liquids {
				t.Errorf("%s, %s: the note speaks of liquids: %v, want %v\n%s", language, of.name, got, of.liquids, note)
			}
			if !strings.HasSuffix(note, w["bar.grade"]) {
				t.Errorf("%s, %s: the note does not end with %q", language, of.name, w["bar.grade"])
			}
		}
	}
}

// TestFiguresHoldTheirWords: what stands past the edge of a figure is cut off in a browser.
func TestFiguresHoldTheirWords(t *testing.T) {
	const rounding = 1e-6 // mm
	figures := 0
	var look func(language string, parts []part)
	look = func(language string, parts []part) {
		for _, one := range parts {
			switch p := one.(type) {
			case together:
				look(language, p.parts)
			case figure:
				figures++
				for _, m := range p.page.Marks {
					text, ok := m.(*drawing.Text)
					if !ok {
						continue
					}
					wide := text.Type.Width(text.Words)
					left := text.At.X - wide*float64(text.Align)/2 // Left, Middle, Right are 0, 1, 2
					if left < -rounding || left+wide > p.page.Width+rounding {
						t.Errorf("%s: %q reaches from %.2f to %.2f mm in a figure %.2f mm wide", language, text.Words, left, left+wide, p.page.Width)
					}
				}
			}
		}
	}
	for _, language := range Languages() {
		d, err := compose(findings(t, small3), cover(language))
		if err != nil {
			t.Fatal(err)
		}
		look(language, d.parts)
	}
	if figures < 4*len(Languages()) {
		t.Errorf("%d figures were looked at", figures)
	}
}

// TestMeasuringSpread holds the drawn spread against the law of propagation of uncertainty
// (JCGM 100:2008, equation 10) where errors are so small that all is straight. 64 draws
// know a standard deviation to 1/√126 = 9 %; four times that, and as much again for
// what is not straight, is allowed.
func TestMeasuringSpread(t *testing.T) {
	stone, err := measuredStone("topaz", "table=58,crown=34,pavilion=42.5", 8)
	if err != nil {
		t.Fatal(err)
	}
	base := findings(t, other)
	job := *base.Job
	job.Measured = Uncertainties{{"pavilion", 0.05}}
	f := &Findings{Stone: *stone, Job: &job, Around: base.Around, Dish: base.Dish}
	f.columns()
	ctx := context.Background()
	if err := f.spread(ctx, func(float64) {}); err != nil {
		t.Fatal(err)
	}
	var sides [2][]Shares
	for i, sign := range []float64{1, -1} {
		moved, err := f.moved(map[string]float64{"pavilion": sign * 0.05})
		if err != nil {
			t.Fatal(err)
		}
		if sides[i], err = f.shares(ctx, moved, trace.Around(job.Media...)); err != nil {
			t.Fatal(err)
		}
	}
	const tolerance = 0.45
	for k, name := range []string{"air", "water"} {
		slope := math.Abs(sides[0][k].Returned-sides[1][k].Returned) / 2
		if got := f.Columns[k].Spread.Returned; slope < 1e-5 || math.Abs(got/slope-1) > tolerance {
			t.Errorf("%s: 64 draws spread by %.6f, the law of propagation says %.6f", name, got, slope)
		}
	}
}

// TestSlantedStone: a side steeper by an angle has that angle, and the rest stays.
func TestSlantedStone(t *testing.T) {
	n := math.NaN()
	var planes []facets.Plane
	tilted := func(side facets.Side, angle, azimuth, distance float64) facets.Plane {
		sinA, cosA := math.Sincos(angle * math.Pi / 180)
		sinF, cosF := math.Sincos(azimuth * math.Pi / 180)
		if side == facets.Pavilion {
			cosA = -cosA
		}
		return facets.Plane{Index: n, Side: side, Normal: [3]float64{sinA * cosF, sinA * sinF, cosA}, Distance: distance}
	}
	for k := range 8 {
		planes = append(planes, tilted(facets.Pavilion, 41, float64(45*k), 3), tilted(facets.Crown, 34, float64(45*k), 3),
			tilted(facets.Girdle, 90, float64(45*k), 4))
	}
	planes = append(planes, facets.Plane{Index: n, Side: facets.Table, Normal: [3]float64{0, 0, 1}, Distance: 1.6})
	stone, err := facets.FromPlanes("eight", planes)
	if err != nil {
		t.Fatal(err)
	}
	moved, err := slanted(stone, 0, 0.5*facets.Degree)
	if err != nil {
		t.Fatal(err)
	}
	const tolerance = 1e-9 // degrees: rounding of tangents
	for _, f := range moved.Facets {
		want := map[facets.Side]float64{facets.Pavilion: 41.5, facets.Crown: 34, facets.Girdle: 90, facets.Table: 0}[f.Side]
		if got := math.Acos(math.Abs(f.Normal[2])) * 180 / math.Pi; math.Abs(got-want) > tolerance && f.Side != facets.Table {
			t.Errorf("%v: %.9f degrees, want %g", f.Side, got, want)
		}
	}
	a, b := stone.Measure(), moved.Measure()
	if math.Abs(a.TableWidthMM-b.TableWidthMM) > 1e-9 || math.Abs(a.WidthMM-b.WidthMM) > 1e-9 {
		t.Errorf("table %g and width %g were %g and %g", b.TableWidthMM, b.WidthMM, a.TableWidthMM, a.WidthMM)
	}
}

// TestRayShowsWhatTheTextSays: in a quartz brilliant light comes back in air and leaks in
// water; critical angles by Snell's law.
func TestRayShowsWhatTheTextSays(t *testing.T) {
	f := findings(t, small3)
	if f.Ray == nil {
		t.Fatal("no ray was found")
	}
	for i, want := range []trace.Quantity{trace.Returned, trace.Leaked} {
		p := f.Ray.Paths[i]
		exit := &p.Bounces[mainExit(p)]
		if exit.Goes != want || exit.Left < 0.5 {
			t.Errorf("path %d: %.2f goes to %v, want most of it to %v", i, exit.Left, exit.Goes, want)
		}
		critical := math.Asin(p.IndexMedium/p.IndexStone) * 180 / math.Pi
		if math.Abs(p.Critical.Degrees()-critical) > 1e-9 {
			t.Errorf("path %d: critical angle %v, by Snell's law %g", i, p.Critical, critical)
		}
		for _, b := range p.Bounces[:mainExit(p)] {
			if b.Total != (b.Incidence.Degrees() > critical) {
				t.Errorf("path %d: total reflection %v at %v", i, b.Total, b.Incidence)
			}
		}
	}
}

func TestWholePartsSumTo100(t *testing.T) {
	for _, l := range []trace.Ledger{
		{Surface: 0.0805, Returned: 0.6917, Head: 0.1991, Leaked: 0.0287},
		{Returned: 1.0 / 3, Leaked: 1.0 / 3, Head: 1.0 / 3},
		{Leaked: 1}, {Surface: 0.005, Returned: 0.995},
	} {
		sum := 0
		for q, n := range wholeParts(l) {
			sum += n
			if math.Abs(float64(n)-100*q.Of(l)) >= 1 {
				t.Errorf("%v of %v is shown as %d", q, l, n)
			}
		}
		if sum != 100 {
			t.Errorf("%v: the parts sum to %d", l, sum)
		}
	}
}

// TestDifferences: a stone does not differ from itself, nor from one that is as far as the
// errors; it does from one that is farther. The limit is that of Student's t with 30 degrees
// of freedom at 1 %: 2.750 (any printed table).
func TestDifferences(t *testing.T) {
	column := func(v, e float64) *Column {
		return &Column{Column: &trace.Column{Ledger: trace.Ledger{Returned: v}, StandardError: trace.Ledger{Returned: e}}}
	}
	apart := func(times float64) float64 { return times * math.Sqrt2 * 0.001 }
	for _, row := range []struct {
		name string
		b    *Column
		want bool
	}{
		{"itself", column(0.5, 0.001), false},
		{"just within", column(0.5+apart(2.70), 0.001), false},
		{"just beyond", column(0.5+apart(2.80), 0.001), true},
	} {
		d := difference(column(0.5, 0.001), row.b, trace.Returned)
		if d.Differs != row.want {
			t.Errorf("%s: differs %v (%.5f ± %.5f)", row.name, d.Differs, d.Value, d.Error)
		}
	}
	// A spread of the measures makes what chance alone would tell apart uncertain.
	a, b := column(0.5, 0.001), column(0.51, 0.001)
	if !difference(a, b, trace.Returned).Differs {
		t.Error("ten standard errors are no difference")
	}
	b.Spread = &Shares{Ledger: trace.Ledger{Returned: 0.02}}
	if difference(a, b, trace.Returned).Differs {
		t.Error("half a standard deviation of the measures is a difference")
	}
}

func TestComparisonNamesMaterials(t *testing.T) {
	all := []*Findings{findings(t, small3), findings(t, other)}
	page := parsePage(t, written(t, func(w io.Writer) error { return ComparisonHTML(w, all, cover("en")) }))
	if text := page.text.String(); !strings.Contains(text, "not made of the same material: Quartz, Topaz") {
		t.Error("a comparison of two materials does not say so")
	}
	if _, err := composeComparison(all[:1], cover("en")); err == nil {
		t.Error("one stone was compared")
	}
}

// TestNumbersInFiles reads CSV (RFC 4180), JSON and PFM back.
func TestNumbersInFiles(t *testing.T) {
	f := findings(t, small3)
	rows, err := csv.NewReader(bytes.NewReader(written(t, func(w io.Writer) error { return LedgerCSV(w, f) }))).ReadAll()
	if err != nil {
		t.Fatal(err)
	}
	if len(rows) != 1+8*len(f.Columns) {
		t.Errorf("%d rows", len(rows))
	}
	sums := map[string]float64{}
	for _, r := range rows[1:] {
		v, err := strconv.ParseFloat(r[4], 64)
		if err != nil {
			t.Fatal(err)
		}
		if !strings.HasSuffix(r[3], "_area") {
			sums[r[1]+r[2]] += v
		}
	}
	for column, sum := range sums {
		if math.Abs(sum-1) > 1e-6 { // what the ledger promises of a float32 kernel
			t.Errorf("%s: the shares sum to %.9f", column, sum)
		}
	}
	var n struct {
		Media []struct {
			Ledger trace.Ledger
			Spread *trace.Ledger `json:"measuring_spread"`
		}
	}
	if err := json.Unmarshal(written(t, func(w io.Writer) error { return JSON(w, f) }), &n); err != nil {
		t.Fatal(err)
	}
	for i := range n.Media {
		if n.Media[i].Ledger != f.Columns[i].Ledger || n.Media[i].Spread == nil {
			t.Errorf("JSON tells column %d otherwise", i)
		}
	}
	m := f.Tilts[0].Columns[0].Map // leaning, so that up and down differ
	field := m.Field(trace.Leaked)
	pfm := written(t, func(w io.Writer) error { return PFM(w, m, trace.Leaked) })
	var w, h int
	var order float64
	if _, err := fmt.Sscanf(string(pfm), "Pf\n%d %d\n%g\n", &w, &h, &order); err != nil || w != m.Pixels || h != m.Pixels || order != -1 {
		t.Fatalf("head of the float map: %d × %d, %g, %v", w, h, order, err)
	}
	raw := pfm[len(pfm)-4*w*h:]
	cells := strings.Split(strings.ReplaceAll(string(written(t, func(w io.Writer) error { return MapCSV(w, m, trace.Leaked) })), "\r\n", ","), ",")
	for i, want := range field {
		x, y := i%w, i/w
		got := math.Float32frombits(binary.LittleEndian.Uint32(raw[4*((h-1-y)*w+x):]))
		if got != want && !(got != got && want != want) {
			t.Fatalf("float map at %d, %d: %g, want %g", x, y, got, want)
		}
		if v, err := strconv.ParseFloat(cells[i], 32); want == want && (err != nil || float32(v) != want) || want != want && cells[i] != "" {
			t.Fatalf("CSV at %d, %d: %q, want %g", x, y, cells[i], want)
		}
	}
}

func TestReadUncertainties(t *testing.T) {
	u, err := ReadUncertainties(" crown=0.2, pavilion = 0.1 ")
	if err != nil || len(u) != 2 || u[1] != (Uncertainty{"pavilion", 0.1}) {
		t.Fatalf("%v, %v", u, err)
	}
	if with, err := ReadUncertainties("crown=0,2,pavilion=0,1"); err != nil || !slices.Equal(with, u) {
		t.Errorf("with decimal commas: %v, %v; want %v", with, err, u)
	}
	for _, text := range []string{"", "crown", "crown=", "crown=1,2,3", "crown=0", "crown=-1", "crown=NaN", "crown=Inf", "crown=1,crown=2", "=1"} {
		if _, err := ReadUncertainties(text); err == nil {
			t.Errorf("%q was taken", text)
		}
	}
	stone, err := measuredStone("topaz", "table=58", 8)
	if err != nil {
		t.Fatal(err)
	}
	for _, row := range []struct {
		u    Uncertainties
		want string // in the error; empty for none
	}{
		{Uncertainties{{"table", 0.5}, {"girdle", 0.2}}, ""},
		{Uncertainties{{"sparkle", 1}}, "table, crown"},
		{Uncertainties{{"crown", 40}}, "too large"},
	} {
		if err := row.u.Fits(stone); (err == nil) != (row.want == "") || err != nil && !strings.Contains(err.Error(), row.want) {
			t.Errorf("%v: %v", row.u, err)
		}
	}
	plan := *stone
	plan.Proportions = nil
	if err := (Uncertainties{{"table", 0.5}}).Fits(&plan); err == nil || !strings.Contains(err.Error(), "crown, pavilion") {
		t.Errorf("a plan's table: %v", err)
	}
}

func TestLetterhead(t *testing.T) {
	folder := t.TempDir()
	file := func(name string, content []byte) string {
		path := filepath.Join(folder, name)
		if err := os.WriteFile(path, content, 0o600); err != nil {
			t.Fatal(err)
		}
		return path
	}
	var b bytes.Buffer
	clear := image.NewNRGBA(image.Rect(0, 0, 40, 20)) // transparent
	clear.SetNRGBA(0, 0, color.NRGBA{255, 0, 0, 255})
	if err := png.Encode(&b, clear); err != nil {
		t.Fatal(err)
	}
	good := b.Bytes()
	img, err := OpenLetterhead(file("good.png", good))
	if err != nil {
		t.Fatal(err)
	}
	if c := img.At(39, 19).(color.RGBA); c != (color.RGBA{255, 255, 255, 255}) {
		t.Errorf("transparent is %v on paper", c)
	}
	large := file("large.png", good)
	if err := os.Truncate(large, 200<<20); err != nil {
		t.Fatal(err)
	}
	bomb := slices.Clone(good)
	binary.BigEndian.PutUint32(bomb[16:], 60000)
	binary.BigEndian.PutUint32(bomb[20:], 60000)
	// The header's check sum belongs to it.
	binary.BigEndian.PutUint32(bomb[29:], crc32.ChecksumIEEE(bomb[12:29]))
	for _, row := range []struct{ name, path, want string }{
		{"no file", filepath.Join(folder, "none.png"), "there is no such file"},
		{"a folder", folder, "this is no file"},
		{"no picture", file("words.png", []byte("no picture at all")), "no picture that can be read"},
		{"200 MB", large, "use one of at most 10 MB"},
		{"too many pixels", file("bomb.png", bomb), "60000 × 60000 pixels"},
		{"damaged", file("half.png", good[:len(good)-20]), "damaged"},
	} {
		if _, err := OpenLetterhead(row.path); err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %v", row.name, err)
		}
	}
}

// TestGatherStops: a cancelled report ends with the cause.
func TestGatherStops(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	cancel()
	f := findings(t, other)
	if _, err := Gather(ctx, f.Job, f.Stone, nil); err != context.Canceled {
		t.Errorf("a cancelled report: %v", err)
	}
}
