package report

import (
	"bytes"
	"encoding/base64"
	"fmt"
	"html"
	"image"
	"image/png"
	"io"
	"strings"
	"unicode"

	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
)

// HTML writes a report of one stone as a page for a browser that asks for nothing from
// outside: pictures, drawings and typefaces are within it.
func HTML(w io.Writer, f *Findings, cover *Cover) error {
	d, err := compose(f, cover)
	if err != nil {
		return err
	}
	return d.html(w)
}

// look is the page's own style.
const look = `
:root{color-scheme:light}
body{margin:0;background:#fff;color:#1a1a1a;font:16px/1.5 Go,sans-serif}
main{max-width:54rem;margin:0 auto;padding:1.5rem 1.25rem 4rem}
h1{font-size:2.1rem;line-height:1.15;margin:.2rem 0 .4rem}
h2{font-size:1.25rem;margin:2.4rem 0 .6rem;padding-top:.7rem;border-top:1px solid #888}
p{margin:.5rem 0 .8rem;max-width:46rem}
p.line{color:#555;margin:.1rem 0}
p.small{font-size:.85rem;color:#555}
img.letterhead{max-width:100%;max-height:7rem;display:block;margin-bottom:1rem}
svg{width:100%;height:auto;display:block;margin:.6rem 0}
svg text{font-family:Go,sans-serif;white-space:pre;font-kerning:none}
.beside{display:flex;flex-wrap:wrap;gap:0 2rem}
.beside>div:first-child{flex:3 1 22rem}
.beside>.plates{flex:2 1 20rem;align-content:flex-start}
.columns{display:flex;flex-wrap:wrap;gap:0 2rem}
.columns>div{flex:1 1 20rem}
.plates{display:flex;flex-wrap:wrap;gap:1.2rem;margin:.8rem 0}
.plates figure{margin:0;flex:1 1 9rem;max-width:20rem}
.plates img{width:100%;height:auto;display:block}
figcaption{font-size:.85rem;color:#555}
figcaption b{display:block;color:#1a1a1a}
.wide{overflow-x:auto}
table{border-collapse:collapse;font-size:.9rem;margin:.6rem 0}
th,td{padding:.3rem .7rem .3rem 0;border-bottom:1px solid #ccc;text-align:right;vertical-align:bottom}
th:first-child,td:first-child{text-align:left;min-width:9rem}
td{font-variant-numeric:tabular-nums;white-space:nowrap}
td:first-child{white-space:normal}
dl{display:grid;grid-template-columns:minmax(8rem,14rem) 1fr;gap:.3rem 1rem;font-size:.9rem}
dt{font-weight:bold}dd{margin:0}
@media print{main{max-width:none;padding:0}h2{break-after:avoid}figure,svg,table{break-inside:avoid}}
@media (max-width:34rem){dl{grid-template-columns:1fr}dd{margin-bottom:.5rem}}
`

// escaped returns a text as it stands in the page: what a browser would take for code is
// escaped, and characters that are none, or that turn the direction of writing, are left
// out.
func escaped(text string) string {
	text = strings.Map(func(r rune) rune {
		switch {
		case unicode.IsSpace(r):
			return ' '
		case unicode.IsControl(r), unicode.Is(unicode.Bidi_Control, r), r == '\ufeff':
			return -1
		}
		return r
	}, strings.ToValidUTF8(text, "\ufffd"))
	return html.EscapeString(text)
}

// page writes HTML.
type page struct {
	bytes.Buffer
	err error
}

func (p *page) line(format string, args ...any) { fmt.Fprintf(p, format+"\n", args...) }

// html writes the document as a page for a browser.
func (d *document) html(w io.Writer) error {
	p := &page{}
	p.line("<!DOCTYPE html>")
	p.line(`<html lang="%s">`, d.cover.Language)
	p.line(`<head>`)
	p.line(`<meta charset="utf-8">`)
	p.line(`<meta name="viewport" content="width=device-width, initial-scale=1">`)
	p.line(`<meta name="generator" content="%s">`, escaped(d.cover.Program))
	// What follows forbids the browser every request: the page must do without.
	p.line(`<meta http-equiv="Content-Security-Policy" content="default-src 'none'; img-src data:; font-src data:; style-src 'unsafe-inline'">`)
	p.line(`<title>%s</title>`, escaped(d.fileTitle()))
	p.line(`<style>%s%s%s</style>`, fontFace("normal", goregular.TTF), fontFace("bold", gobold.TTF), look)
	p.line(`</head>`)
	p.line(`<body>`)
	p.line(`<main>`)
	if img := d.cover.Letterhead; img != nil {
		p.line(`<img class="letterhead" alt="%s" src="%s">`, escaped(d.cover.Author), p.data(img))
	}
	p.line(`<h1>%s</h1>`, escaped(d.title))
	for _, l := range d.lines {
		p.line(`<p class="line">%s</p>`, escaped(l))
	}
	for _, one := range d.parts {
		p.part(one)
	}
	p.line(`</main>`)
	p.line(`</body>`)
	p.line(`</html>`)
	if p.err != nil {
		return p.err
	}
	_, err := w.Write(p.Bytes())
	return err
}

func fontFace(weight string, ttf []byte) string {
	return fmt.Sprintf("@font-face{font-family:Go;font-weight:%s;src:url(data:font/ttf;base64,%s)}\n",
		weight, base64.StdEncoding.EncodeToString(ttf))
}

// part writes one part.
func (p *page) part(one part) {
	switch one := one.(type) {
	case together:
		for _, each := range one.parts {
			p.part(each)
		}
	case heading:
		p.line(`<h2>%s</h2>`, escaped(one.words))
	case text:
		class := ""
		if one.small {
			class = ` class="small"`
		}
		line := escaped(one.words)
		if one.bold {
			line = "<b>" + line + "</b>"
		}
		p.line(`<p%s>%s</p>`, class, line)
	case beside:
		p.line(`<div class="beside"><div>`)
		for _, t := range one.texts {
			p.part(t)
		}
		p.line(`</div>`)
		p.part(one.plates)
		p.line(`</div>`)
	case columnsOf:
		p.line(`<div class="columns">`)
		for _, column := range one {
			p.line(`<div>`)
			for _, one := range column {
				p.line(`<p>%s</p>`, escaped(one))
			}
			p.line(`</div>`)
		}
		p.line(`</div>`)
	case plates:
		p.line(`<div class="plates">`)
		for _, item := range one.items {
			p.line(`<figure><img alt="%s" src="%s"><figcaption><b>%s</b>%s</figcaption></figure>`,
				escaped(item.title), p.data(item.image), escaped(item.title), escaped(item.caption))
		}
		p.line(`</div>`)
	case figure:
		p.line(`<div role="img" aria-label="%s">`, escaped(one.alt))
		if err := one.page.Inline(p); err != nil {
			p.err = err
		}
		p.line(`</div>`)
	case table:
		p.table(one)
	case list:
		p.line(`<dl>`)
		for _, item := range one.items {
			p.line(`<dt>%s</dt><dd>%s</dd>`, escaped(item.term), escaped(item.meaning))
		}
		p.line(`</dl>`)
	}
}

func (p *page) table(t table) {
	row := func(cell string, cells []string) {
		p.WriteString("<tr>")
		for _, c := range cells {
			fmt.Fprintf(p, "<%s>%s</%[1]s>", cell, escaped(c))
		}
		p.line("</tr>")
	}
	p.line(`<div class="wide"><table>`)
	p.line("<thead>")
	row("th", t.head)
	p.line("</thead><tbody>")
	for _, r := range t.rows {
		row("td", r)
	}
	p.line("</tbody></table></div>")
}

// data returns a picture as a data address.
func (p *page) data(img image.Image) string {
	var b bytes.Buffer
	if err := (&png.Encoder{CompressionLevel: png.DefaultCompression}).Encode(&b, img); err != nil {
		p.err = err
	}
	return "data:image/png;base64," + base64.StdEncoding.EncodeToString(b.Bytes())
}
