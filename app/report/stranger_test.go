package report

import (
	"bytes"
	"errors"
	"image"
	"image/color"
	"image/gif"
	"image/jpeg"
	"image/png"
	"io"
	"slices"
	"strings"
	"testing"

	"golang.org/x/net/html"

	"pavilight/testdata/budget"
)

// strangers are names that take themselves for code of one kind or another.
func strangers() []string {
	return []string{
		"<script>alert(1)</script>",
		"\"><img src=x onerror=alert(1)>",
		"' onmouseover='alert(1)",
		"</title></style></svg></p><iframe src=javascript:alert(1)>",
		"]]><!--<![CDATA[",
		"&lt;b&gt;&#x3c;script&#x3e;",
		"javascript:alert(1) data:text/html,<script>",
		"url(http://there) @import 'x'; }</style>",
		"%s%n%[1]d{{.}}${x}",
		"\x00\x1b[2J\u2028\u202e\ufeff\xff\xc3",
		strings.Repeat("<b>", 300),
	}
}

// skeleton returns what a page is made of besides words and pictures: its tags and their
// attributes in order, words within style among them.
func skeleton(t *testing.T, page []byte) []string {
	t.Helper()
	var all []string
	inStyle := false
	z := html.NewTokenizer(bytes.NewReader(page))
	for {
		kind := z.Next()
		token := z.Token()
		switch kind {
		case html.ErrorToken:
			if !errors.Is(z.Err(), io.EOF) {
				t.Error(z.Err())
			}
			return all
		case html.StartTagToken, html.SelfClosingTagToken:
			inStyle = token.Data == "style"
			words := token.Data
			for _, a := range token.Attr {
				words += " " + a.Key
				if a.Key != "alt" && a.Key != "aria-label" && !strings.HasPrefix(a.Val, "data:image/png;base64,") && token.Data == "meta" {
					words += "=" + a.Val
				}
			}
			all = append(all, words)
		case html.EndTagToken:
			inStyle = false
			all = append(all, "/"+token.Data)
		case html.CommentToken, html.DoctypeToken:
			all = append(all, "!"+token.Data)
		case html.TextToken:
			if inStyle {
				all = append(all, token.Data)
			}
		}
	}
}

// A report is the same page with other words, whatever the stone, its maker and the
// client are called.
func TestNamesAreNoCode(t *testing.T) {
	plain := *findings(t, small3)
	page := func(f *Findings, name string) []byte {
		c := cover("en")
		c.Author, c.Client, c.Notes, c.Program = name, name, name, name
		c.Letterhead = image.NewRGBA(image.Rect(0, 0, 3, 1))
		f.Name = name
		material := *f.Material
		material.Name = name
		f.Material = &material
		return written(t, func(w io.Writer) error { return HTML(w, f, c) })
	}
	// Lines in drawings break where words do, so a drawing's texts are compared as one.
	squeeze := func(list []string) []string {
		list = slices.DeleteFunc(list, func(s string) bool { return strings.HasPrefix(s, "text ") || s == "/text" })
		for i, s := range list {
			if strings.HasPrefix(s, "meta ") && strings.Contains(s, "generator") {
				list[i] = "meta generator"
			}
		}
		return list
	}
	want := squeeze(skeleton(t, page(&plain, "Harbour Eight")))
	if len(want) < 100 {
		t.Fatalf("a page of %d parts only: this test sees nothing", len(want))
	}
	for _, name := range strangers() {
		f := *findings(t, small3)
		text := page(&f, name)
		if got := squeeze(skeleton(t, text)); !slices.Equal(got, want) {
			i := 0
			for i < min(len(got), len(want)) && got[i] == want[i] {
				i++
			}
			t.Errorf("%q: part %d is %.200q", name, i, got[i:min(i+3, len(got))])
		}
		if bytes.ContainsAny(text, "\x00\x1b") || strings.ContainsRune(string(text), '\u202e') {
			t.Errorf("%q leaves control characters in the page", name)
		}
	}
}

// Whatever the file holds, it is refused with words or is a picture of printed size.
func FuzzReadLetterhead(f *testing.F) {
	picture := image.NewPaletted(image.Rect(0, 0, 3, 2), color.Palette{color.White, color.Transparent, color.Black})
	for _, encode := range []func(io.Writer) error{
		func(w io.Writer) error { return png.Encode(w, picture) },
		func(w io.Writer) error { return jpeg.Encode(w, picture, nil) },
		func(w io.Writer) error { return gif.Encode(w, picture, nil) },
	} {
		var b bytes.Buffer
		if err := encode(&b); err != nil {
			f.Fatal(err)
		}
		f.Add(b.Bytes())
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		config, _, err := image.DecodeConfig(bytes.NewReader(data))
		if size := float64(config.Width) * float64(config.Height); err == nil && size > 1e6 && size <= mostLetterheadPixels {
			return // it would be read; that takes a second, and shows nothing that small ones do not
		}
		var img image.Image
		budget.Hold(t, 64<<20, func() { img, err = readLetterhead(bytes.NewReader(data), "head.png") })
		if err != nil {
			if !strings.HasPrefix(err.Error(), "head.png: ") || len(err.Error()) > 500 {
				t.Errorf("error %q", err)
			}
			return
		}
		if b := img.Bounds(); b.Dx() < 1 || b.Dy() < 1 || max(b.Dx(), b.Dy()) > printedLetterhead {
			t.Errorf("a picture of %v", b)
		}
	})
}
