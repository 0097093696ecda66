package drawing

import (
	"bytes"
	"encoding/xml"
	"errors"
	"image"
	"image/color"
	"image/png"
	"io"
	"math"
	"os"
	"os/exec"
	"path/filepath"
	"slices"
	"strings"
	"testing"
)

// samplePage holds every kind of mark.
func samplePage() *Page {
	p := &Page{Width: 100, Height: 80, Bookmark: "Sample"}
	ink := Style{Stroke: Grey(0), Width: 0.4}
	p.Polygon(Style{Fill: Grey(200), Stroke: Grey(0), Width: 0.3}, Point{10, 10}, Point{40, 12}, Point{30, 35})
	p.Line(ink, Point{5, 70}, Point{55, 70})
	p.Line(Style{Stroke: Grey(90), Width: 0.3, Dash: []float64{2, 1}}, Point{5, 74}, Point{55, 74})
	p.Circle(ink, Point{70, 25}, 12)
	p.Write(Type{12, true}, Grey(0), Left, Point{8, 50}, "41.50° ± 0.1 × 3 µm, −2")
	p.Write(Type{9, false}, Grey(0), Right, Point{95, 60}, "Größe Ωμέγα Жёлтый ≥ 4")
	img := image.NewPaletted(image.Rect(0, 0, 2, 2), color.Palette{color.White, color.Black})
	img.Pix = []uint8{0, 1, 1, 0}
	p.Place(img, Point{80, 64}, 10, 10)
	return p
}

func sampleDocument() *Document {
	return &Document{
		Title: "Sample", Creator: "test 1", Pages: []*Page{samplePage()},
		Attachments: []Attachment{{Name: "plan.toml", About: "the plan", Content: []byte("plan = 1\n")}},
	}
}

func pdfOf(t *testing.T, d *Document) []byte {
	t.Helper()
	var b bytes.Buffer
	if err := d.PDF(&b); err != nil {
		t.Fatal(err)
	}
	return b.Bytes()
}

// tool runs one of poppler's tools on a PDF, or skips the test where it is not installed.
func tool(t *testing.T, pdf []byte, name string, args func(file string) []string) []byte {
	t.Helper()
	path, err := exec.LookPath(name)
	if err != nil {
		t.Skipf("%s (poppler) is not installed", name)
	}
	file := filepath.Join(t.TempDir(), "page.pdf")
	if err := os.WriteFile(file, pdf, 0o600); err != nil {
		t.Fatal(err)
	}
	var complaints bytes.Buffer
	cmd := exec.Command(path, args(file)...)
	cmd.Stderr = &complaints
	out, err := cmd.Output()
	if err != nil {
		t.Fatalf("%s: %v\n%s", name, err, complaints.String())
	}
	if complaints.Len() > 0 {
		t.Errorf("%s complains: %s", name, complaints.String())
	}
	return out
}

func TestPDFIsTheSameTwice(t *testing.T) {
	if !bytes.Equal(pdfOf(t, sampleDocument()), pdfOf(t, sampleDocument())) {
		t.Error("two PDFs of the same pages differ")
	}
}

func TestPDFTextComesOutAgain(t *testing.T) {
	out := string(tool(t, pdfOf(t, sampleDocument()), "pdftotext", func(f string) []string { return []string{"-layout", f, "-"} }))
	for _, want := range []string{"41.50° ± 0.1 × 3 µm, −2", "Größe Ωμέγα Жёлтый ≥ 4"} {
		if !strings.Contains(out, want) {
			t.Errorf("pdftotext gives %q, without %q", out, want)
		}
	}
}

func TestPDFFontsAreEmbedded(t *testing.T) {
	out := string(tool(t, pdfOf(t, sampleDocument()), "pdffonts", func(f string) []string { return []string{f} }))
	lines := strings.Split(strings.TrimSpace(out), "\n")[2:]
	if len(lines) != 2 {
		t.Fatalf("want two fonts, got\n%s", out)
	}
	for _, line := range lines {
		fields := strings.Fields(line)
		if n := len(fields); n < 5 || fields[n-5] != "yes" {
			t.Errorf("not embedded: %s", line)
		}
	}
}

func TestPDFCarriesTheAttachment(t *testing.T) {
	target := filepath.Join(t.TempDir(), "out")
	tool(t, pdfOf(t, sampleDocument()), "pdfdetach", func(f string) []string { return []string{"-save", "1", "-o", target, f} })
	got, err := os.ReadFile(target)
	if err != nil || string(got) != "plan = 1\n" {
		t.Errorf("got %q, %v", got, err)
	}
}

// TestRasterAgreesWithThePDF compares our picture of a page with poppler's of the same
// page's PDF: both draw the same marks in the same places.
func TestRasterAgreesWithThePDF(t *testing.T) {
	const dpi = 254 // ten pixels to the millimetre
	out := tool(t, pdfOf(t, sampleDocument()), "pdftoppm", func(f string) []string { return []string{"-r", "254", "-png", f} })
	theirs, err := png.Decode(bytes.NewReader(out))
	if err != nil {
		t.Fatal(err)
	}
	ours := samplePage().Raster(dpi / 25.4)
	if theirs.Bounds() != ours.Bounds() {
		t.Fatalf("sizes differ: %v and %v", theirs.Bounds(), ours.Bounds())
	}
	difference := func(ours *image.RGBA) float64 {
		sum := 0.0
		for y := range ours.Rect.Dy() {
			for x := range ours.Rect.Dx() {
				r, _, _, _ := theirs.At(x, y).RGBA()
				sum += math.Abs(float64(r>>8) - float64(ours.RGBAAt(x, y).R))
			}
		}
		return sum / float64(ours.Rect.Dx()*ours.Rect.Dy())
	}
	// Both smooth and place outlines in their own way, by less than a pixel of 0.1 mm
	// along some 6,000 of the 800,000 pixels. Everything 0.2 mm aside costs thrice that.
	const tolerance = 1.0 // levels of 255, in the mean of all pixels
	aside := difference((&Page{Width: 100, Height: 80, Marks: moved(samplePage().Marks, 0.2)}).Raster(dpi / 25.4))
	if aside < 2*tolerance {
		t.Errorf("a page moved by 0.2 mm differs by %.2f levels only: this test sees nothing", aside)
	}
	if d := difference(ours); d > tolerance {
		t.Errorf("the pictures differ by %.2f levels, more than %g", d, tolerance)
	}
}

// moved returns the marks moved to the right, mm.
func moved(marks []Mark, by float64) []Mark {
	for _, m := range marks {
		switch m := m.(type) {
		case *Path:
			for _, ring := range m.Rings {
				for i := range ring {
					ring[i].X += by
				}
			}
		case *Circle:
			m.Centre.X += by
		case *Text:
			m.At.X += by
		case *Picture:
			m.At.X += by
		}
	}
	return marks
}

func TestSVGIsWellFormedAndExact(t *testing.T) {
	var b bytes.Buffer
	if err := samplePage().SVG(&b); err != nil {
		t.Fatal(err)
	}
	d := xml.NewDecoder(bytes.NewReader(b.Bytes()))
	var words []string
	elements := map[string]int{}
	for {
		token, err := d.Token()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		switch e := token.(type) {
		case xml.StartElement:
			elements[e.Name.Local]++
		case xml.CharData:
			words = append(words, strings.TrimSpace(string(e)))
		}
	}
	if elements["path"] != 3 || elements["circle"] != 1 || elements["text"] != 2 || elements["image"] != 1 {
		t.Errorf("elements %v", elements)
	}
	if all := strings.Join(words, " "); !strings.Contains(all, "41.50° ± 0.1 × 3 µm, −2") {
		t.Errorf("text is %q", all)
	}
	if !strings.Contains(b.String(), `d="M10 10L40 12L30 35Z"`) {
		t.Error("the triangle is not where it was drawn")
	}
}

func TestClean(t *testing.T) {
	for _, row := range []struct {
		name, words, want string
		missing           bool
	}{
		{"plain", "Harbour Eight", "Harbour Eight", false},
		{"composed", "e\u0301tude", "étude", false},
		{"signs of the bench", "41.5° ± × µ ² ³ − – …", "41.5° ± × µ ² ³ − – …", false},
		{"Greek and Cyrillic", "Ω Жар-птица", "Ω Жар-птица", false},
		{"Chinese", "港八", "□□", true},
		{"Devanagari with vowel signs", "हीरा", "□□", true},
		{"Arabic", "ماس", "□□□", true},
		{"emoji", "a💎b", "a□b", true},
		{"control and line end", "a\x00\tb\nc\u200b", "a b c", false},
		{"broken UTF-8", "a\xffb", "a□b", true},
		{"empty", "", "", false},
	} {
		got, missing := Clean(row.words)
		if got != row.want || missing != row.missing {
			t.Errorf("%s: Clean(%q) = %q, %v; want %q, %v", row.name, row.words, got, missing, row.want, row.missing)
		}
	}
}

func TestWrapAndCut(t *testing.T) {
	body := Type{9, false}
	long := strings.Repeat("x", 300)
	for _, words := range []string{"one two three four five six seven", long, "a " + long + " b", "", "p\nq"} {
		lines := body.Wrap(words, 30)
		if got, want := strings.Join(strings.Fields(strings.Join(lines, "")), ""), strings.Join(strings.Fields(words), ""); got != want {
			t.Errorf("Wrap(%.20q) loses letters: %q", words, got)
		}
		for _, l := range lines {
			if w := body.Width(l); w > 30 {
				t.Errorf("Wrap(%.20q): line %q is %.1f mm wide", words, l, w)
			}
		}
		if c := body.Cut(words, 30); body.Width(c) > 30 {
			t.Errorf("Cut(%.20q) is %.1f mm wide", words, body.Width(c))
		}
	}
	french := "coupe à 30° : « un » ; reste 10 : 1 !"
	for width := 15.0; width < 60; width += 0.5 {
		for _, l := range body.Wrap(french, width) {
			if strings.HasPrefix(l, ": «") || strings.HasPrefix(l, ";") || strings.HasPrefix(l, "»") || strings.HasPrefix(l, "!") ||
				strings.HasSuffix(l, "«") {
				t.Errorf("at %g mm a line reads %q", width, l)
			}
		}
	}
	if got := body.Wrap("p\nq", 30); len(got) != 2 {
		t.Errorf("a line end is lost: %q", got)
	}
}

// TestRasterCutsAtTheEdge fills shapes that reach beyond the page on every side.
func TestRasterCutsAtTheEdge(t *testing.T) {
	black := Ink{A: 255}
	for _, at := range []Point{{-5, -5}, {5, 5}, {-5, 5}, {5, -5}, {0, 0}, {20, 20}, {-40, 2}} {
		page := &Page{Width: 10, Height: 10}
		page.Rectangle(Style{Fill: black}, at, 10, 10)
		page.Circle(Style{Stroke: black, Width: 1}, at, 5)
		img := page.Raster(4)
		for y := range 40 {
			for x := range 40 {
				mm := Point{(float64(x) + 0.5) / 4, (float64(y) + 0.5) / 4}
				inside := mm.X > at.X+0.3 && mm.X < at.X+9.7 && mm.Y > at.Y+0.3 && mm.Y < at.Y+9.7
				if got := img.RGBAAt(x, y); inside && got.R != 0 {
					t.Fatalf("a square from %v: pixel %d, %d is %v", at, x, y, got)
				}
				far := math.Abs(math.Hypot(mm.X-at.X, mm.Y-at.Y)-5) > 1 &&
					(mm.X < at.X-0.3 || mm.X > at.X+10.3 || mm.Y < at.Y-0.3 || mm.Y > at.Y+10.3)
				if got := img.RGBAAt(x, y); far && got.R != 255 {
					t.Fatalf("a square from %v: pixel %d, %d outside is %v", at, x, y, got)
				}
			}
		}
	}
}

// A document's names are text whatever they say: poppler reads them back letter for
// letter, and finds no script, form or second attachment.
func TestNamesInThePDFAreNoCode(t *testing.T) {
	for _, name := range []string{
		`) /OpenAction << /S /JavaScript /JS (app.alert\(1\)) >> (`,
		`\) >> endobj 1 0 obj << /JS (x) >>`,
		"endstream\nendobj\n%%EOF\nxref",
		`((((`, `))))`, `\`, `ends in \`,
		// Letters whose halves in UTF-16 are ")/JS" and "\)>>" as bytes.
		"\u292f\u4a53", "\u5c29\u3e3e", "\u5c5c\u2929", "\u0d0a\u0d29\u280d",
	} {
		d := sampleDocument()
		d.Title, d.Author, d.Subject, d.Creator = name, name, name, name
		d.Pages[0].Bookmark = name
		d.Pages[0].Write(Type{9, false}, Grey(0), Left, Point{8, 60}, Type{9, false}.Cut(name, 80))
		d.Attachments[0].Name, d.Attachments[0].About = name+".toml", name
		pdf := pdfOf(t, d)
		info := string(tool(t, pdf, "pdfinfo", func(f string) []string { return []string{f} }))
		for _, want := range []string{"JavaScript:      no", "Form:            none", "Pages:           1"} {
			if !strings.Contains(info, want) {
				t.Errorf("%q: no %q in\n%s", name, want, info)
			}
		}
		// pdfinfo prints control characters as they are.
		if title, _, _ := strings.Cut(strings.TrimPrefix(info, "Title:"), "Subject:"); strings.TrimSpace(title) != strings.TrimSpace(name) {
			t.Errorf("%q came out as %q", name, title)
		}
		list := string(tool(t, pdf, "pdfdetach", func(f string) []string { return []string{"-list", f} }))
		if !strings.HasPrefix(list, "1 embedded file") {
			t.Errorf("%q: attachments %s", name, list)
		}
		target := filepath.Join(t.TempDir(), "out")
		tool(t, pdf, "pdfdetach", func(f string) []string { return []string{"-save", "1", "-o", target, f} })
		if got, err := os.ReadFile(target); err != nil || string(got) != "plan = 1\n" {
			t.Errorf("%q: the attachment is %q, %v", name, got, err)
		}
	}
}

// A name in a picture is text too: the picture is well-formed and has the same elements.
func TestNamesInTheSVGAreNoCode(t *testing.T) {
	elements := func(name string) (kinds []string, words string) {
		p := samplePage()
		clean, _ := Clean(name)
		p.Write(Type{9, false}, Grey(0), Left, Point{8, 60}, clean)
		p.Write(Type{9, false}, Grey(0), Left, Point{8, 60}, name) // also where nobody cleaned it
		var b bytes.Buffer
		if err := p.SVG(&b); err != nil {
			t.Fatal(err)
		}
		d := xml.NewDecoder(&b)
		for {
			token, err := d.Token()
			if errors.Is(err, io.EOF) {
				return kinds, words
			}
			if err != nil {
				t.Fatalf("%q: %v", name, err)
			}
			switch token := token.(type) {
			case xml.StartElement:
				kinds = append(kinds, token.Name.Local)
				for _, a := range token.Attr {
					kinds = append(kinds, a.Name.Local)
				}
			case xml.CharData:
				words += string(token)
			case xml.Comment, xml.Directive:
				kinds = append(kinds, "comment")
			}
		}
	}
	want, _ := elements("Harbour Eight")
	for _, name := range []string{
		"<script>alert(1)</script>", "</text><a xlink:href='javascript:1'>", "]]>", "<!-- -->", "&#x3c;b&#x3e; &amp;", "\x00\x1b\xff\ufffe",
		`" onload="alert(1)`,
	} {
		kinds, words := elements(name)
		if !slices.Equal(kinds, want) {
			t.Errorf("%q makes other elements: %v", name, kinds)
		}
		if clean, _ := Clean(name); !strings.Contains(words, clean) {
			t.Errorf("%q is not among the words", clean)
		}
	}
}
