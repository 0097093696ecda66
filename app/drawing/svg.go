package drawing

import (
	"bytes"
	"encoding/base64"
	"encoding/xml"
	"fmt"
	"image/png"
	"io"
	"strconv"
	"strings"
)

// SVG writes the page as a self-contained SVG picture (SVG 1.1) at its size on
// paper, the typeface embedded.
func (p *Page) SVG(w io.Writer) error {
	out := &svgPainter{}
	fmt.Fprintf(&out.b, `<?xml version="1.0" encoding="UTF-8"?>`+"\n"+
		`<svg xmlns="http://www.w3.org/2000/svg" xmlns:xlink="http://www.w3.org/1999/xlink" version="1.1" `+
		`width="%[1]smm" height="%[2]smm" viewBox="0 0 %[1]s %[2]s">`+"\n", length(p.Width), length(p.Height))
	out.typefaces(p)
	fmt.Fprintf(&out.b, `<rect width="%s" height="%s" fill="#ffffff"/>`+"\n", length(p.Width), length(p.Height))
	p.paintAll(out)
	out.b.WriteString("</svg>\n")
	if out.err != nil {
		return out.err
	}
	_, err := w.Write(out.b.Bytes())
	return err
}

type svgPainter struct {
	b   bytes.Buffer
	err error
}

// typefaces embeds the weights that the page uses.
func (s *svgPainter) typefaces(p *Page) {
	used := map[bool]bool{}
	for _, m := range p.Marks {
		if t, ok := m.(*Text); ok {
			used[t.Type.Bold] = true
		}
	}
	s.b.WriteString("<style>text{font-family:" + family + ";font-kerning:none;white-space:pre}\n")
	for _, heavy := range []bool{false, true} {
		if !used[heavy] {
			continue
		}
		weight := "normal"
		if heavy {
			weight = "bold"
		}
		fmt.Fprintf(&s.b, "@font-face{font-family:%s;font-weight:%s;src:url(data:font/ttf;base64,%s)}\n",
			family, weight, base64.StdEncoding.EncodeToString(Type{Bold: heavy}.face().ttf))
	}
	s.b.WriteString("</style>\n")
}

// length writes mm to a tenth of a micrometre.
func length(v float64) string {
	text := strings.TrimRight(strings.TrimRight(strconv.FormatFloat(v, 'f', 4, 64), "0"), ".")
	if text == "-0" {
		return "0"
	}
	return text
}

func (i Ink) hex() string {
	if i.none() {
		return "none"
	}
	return fmt.Sprintf("#%02x%02x%02x", i.R, i.G, i.B)
}

// attributes writes a style.
func (s *Style) attributes() string {
	text := fmt.Sprintf(`fill="%s"`, s.Fill.hex())
	if !s.Stroke.none() && s.Width > 0 {
		text += fmt.Sprintf(` stroke="%s" stroke-width="%s" stroke-linecap="round" stroke-linejoin="round"`,
			s.Stroke.hex(), length(s.Width))
	}
	if len(s.Dash) > 0 {
		var parts []string
		for _, d := range s.Dash {
			parts = append(parts, length(d))
		}
		text += fmt.Sprintf(` stroke-dasharray="%s"`, strings.Join(parts, " "))
	}
	return text
}

func (s *svgPainter) path(m *Path) {
	var d []string
	for _, ring := range m.Rings {
		for i, at := range ring {
			letter := "L"
			if i == 0 {
				letter = "M"
			}
			d = append(d, letter+length(at.X)+" "+length(at.Y))
		}
		if m.Closed {
			d = append(d, "Z")
		}
	}
	fmt.Fprintf(&s.b, `<path d="%s" %s/>`+"\n", strings.Join(d, ""), m.attributes())
}

func (s *svgPainter) circle(m *Circle) {
	fmt.Fprintf(&s.b, `<circle cx="%s" cy="%s" r="%s" %s/>`+"\n",
		length(m.Centre.X), length(m.Centre.Y), length(m.Radius), m.attributes())
}

func (s *svgPainter) text(m *Text) {
	weight := ""
	if m.Type.Bold {
		weight = ` font-weight="bold"`
	}
	fmt.Fprintf(&s.b, `<text x="%s" y="%s" font-size="%s"%s fill="%s">`,
		length(m.left()), length(m.At.Y), length(m.Type.Size*MMPerPoint), weight, m.Ink.hex())
	if err := xml.EscapeText(&s.b, []byte(m.Words)); err != nil {
		s.err = err
	}
	s.b.WriteString("</text>\n")
}

func (s *svgPainter) picture(m *Picture) {
	var b bytes.Buffer
	if err := (&png.Encoder{CompressionLevel: png.BestCompression}).Encode(&b, m.Image); err != nil {
		s.err = err
		return
	}
	fmt.Fprintf(&s.b, `<image x="%s" y="%s" width="%s" height="%s" preserveAspectRatio="none" `+
		`xlink:href="data:image/png;base64,%s"/>`+"\n",
		length(m.At.X), length(m.At.Y), length(m.Width), length(m.Height), base64.StdEncoding.EncodeToString(b.Bytes()))
}
