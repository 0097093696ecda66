package drawing

import (
	"bytes"
	"cmp"
	"fmt"
	"image"
	"image/draw"
	"image/png"
	"io"
	"strings"
	"time"

	"codeberg.org/go-pdf/fpdf"
)

// Document is pages to be put out together, with what a PDF says about itself.
type Document struct {
	Title, Author, Subject string
	Language               string    // of its texts, as BCP 47 has it; empty for English
	Creator                string    // the program and its version
	Date                   time.Time // of the document; the zero Date stands for 1 January 2000, UTC
	Pages                  []*Page
	Attachments            []Attachment
}

// Attachment is a file that travels inside a PDF.
type Attachment struct {
	Name    string
	About   string
	Content []byte
}

// undated is the date of a document that has none: equal input gives equal bytes.
func undated() time.Time { return time.Date(2000, time.January, 1, 0, 0, 0, 0, time.UTC) }

// PDF writes the document as PDF: typeface embedded, text selectable, attachments
// included. Equal documents give equal bytes.
func (d *Document) PDF(w io.Writer) error {
	f := fpdf.NewCustom(&fpdf.InitType{UnitStr: "mm", Size: fpdf.SizeType{Wd: 210, Ht: 297}})
	date := d.Date
	if date.IsZero() {
		date = undated()
	}
	date = date.UTC()
	f.SetCreationDate(date)
	f.SetModificationDate(date)
	f.SetCatalogSort(true)
	f.SetLang(cmp.Or(d.Language, "en"))
	f.SetTitle(plane0(d.Title), true)
	f.SetAuthor(plane0(d.Author), true)
	f.SetSubject(plane0(d.Subject), true)
	f.SetCreator(plane0(d.Creator), true)
	f.SetProducer(plane0(d.Creator), true)
	f.SetMargins(0, 0, 0)
	f.SetAutoPageBreak(false, 0)
	f.SetCellMargin(0)
	f.AddUTF8FontFromBytes(family, "", bytes.Clone(regular().ttf)) // the library changes what it is given
	f.AddUTF8FontFromBytes(family, "B", bytes.Clone(bold().ttf))
	f.SetLineCapStyle("round")
	f.SetLineJoinStyle("round")
	var files []fpdf.Attachment
	for _, a := range d.Attachments {
		files = append(files, fpdf.Attachment{Content: a.Content, Filename: plane0(a.Name), Description: plane0(a.About)})
	}
	f.SetAttachments(files)
	out := &pdfPainter{f: f}
	for _, page := range d.Pages {
		f.AddPageFormat("P", fpdf.SizeType{Wd: page.Width, Ht: page.Height})
		if page.Bookmark != "" {
			clean, _ := Clean(page.Bookmark)
			f.Bookmark(clean, page.Level, 0)
		}
		page.paintAll(out)
	}
	if out.err != nil {
		return out.err
	}
	return f.Output(w)
}

// family is the name under which the typeface is known to the PDF and the SVG.
const family = "Go"

// pdfPainter draws on the current page of a PDF.
type pdfPainter struct {
	f      *fpdf.Fpdf
	widths map[int]bool // of the pictures so far, pixels
	err    error
}

// style sets colours and line and returns the library's word for what to draw.
func (p *pdfPainter) style(s *Style) string {
	word := ""
	if !s.Fill.none() {
		p.f.SetFillColor(int(s.Fill.R), int(s.Fill.G), int(s.Fill.B))
		word = "F"
	}
	if !s.Stroke.none() && s.Width > 0 {
		p.f.SetDrawColor(int(s.Stroke.R), int(s.Stroke.G), int(s.Stroke.B))
		p.f.SetLineWidth(s.Width)
		p.f.SetDashPattern(append([]float64{}, s.Dash...), 0)
		word += "D"
	}
	return word
}

func (p *pdfPainter) path(m *Path) {
	word := p.style(&m.Style)
	if word == "" {
		return
	}
	for _, ring := range m.Rings {
		for i, at := range ring {
			if i == 0 {
				p.f.MoveTo(at.X, at.Y)
			} else {
				p.f.LineTo(at.X, at.Y)
			}
		}
		if m.Closed {
			p.f.ClosePath()
		}
	}
	p.f.DrawPath(word)
}

func (p *pdfPainter) circle(m *Circle) {
	if word := p.style(&m.Style); word != "" {
		p.f.Circle(m.Centre.X, m.Centre.Y, m.Radius, word)
	}
}

func (p *pdfPainter) text(m *Text) {
	weight := ""
	if m.Type.Bold {
		weight = "B"
	}
	p.f.SetFont(family, weight, m.Type.Size)
	p.f.SetTextColor(int(m.Ink.R), int(m.Ink.G), int(m.Ink.B))
	p.f.Text(m.left(), m.At.Y, m.Words)
}

func (p *pdfPainter) picture(m *Picture) {
	img, grown := p.unique(m.Image)
	var b bytes.Buffer
	if err := (&png.Encoder{CompressionLevel: png.BestCompression}).Encode(&b, img); err != nil {
		p.err = err
		return
	}
	name := fmt.Sprintf("picture%d", len(p.widths))
	options := fpdf.ImageOptions{ImageType: "PNG"}
	p.f.RegisterImageOptionsReader(name, options, &b)
	p.f.ClipRect(m.At.X, m.At.Y, m.Width, m.Height, false)
	p.f.ImageOptions(name, m.At.X, m.At.Y, m.Width*grown, m.Height, false, options, 0, "")
	p.f.ClipEnd()
}

// unique returns the picture with columns added on its right until no picture before has
// its width, and by what factor that made it wider. The library writes pictures in the
// order of their widths, and those of one width in the random order of a map; the added
// columns are clipped away.
func (p *pdfPainter) unique(img image.Image) (image.Image, float64) {
	if p.widths == nil {
		p.widths = map[int]bool{}
	}
	from := img.Bounds()
	width := from.Dx()
	for p.widths[width] {
		width++
	}
	p.widths[width] = true
	if width == from.Dx() {
		return img, 1
	}
	box := image.Rect(0, 0, width, from.Dy())
	var wider draw.Image = image.NewNRGBA(box)
	if of, ok := img.(*image.Paletted); ok {
		wider = image.NewPaletted(box, of.Palette)
	}
	draw.Draw(wider, image.Rect(0, 0, from.Dx(), from.Dy()), img, from.Min, draw.Src)
	return wider, float64(width) / float64(from.Dx())
}

// plane0 replaces what the library cannot write in a document's own texts: characters
// beyond the basic multilingual plane.
func plane0(text string) string {
	return strings.Map(func(r rune) rune {
		if r > 0xffff {
			return '\ufffd'
		}
		return r
	}, text)
}
