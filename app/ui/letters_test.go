package ui

import (
	"fmt"
	"go/ast"
	"go/parser"
	"go/token"
	"io/fs"
	"os"
	"path/filepath"
	"strconv"
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/theme"
	"golang.org/x/image/font/sfnt"

	"pavilight/app/guide"
	"pavilight/app/words"
	"pavilight/gems"
	"pavilight/testdata"
)

// TestLettersAreCarried holds every letter that the window may write to the fonts that the
// program carries: a system without fonts of its own shows a mark of doubt in its place.
func TestLettersAreCarried(t *testing.T) {
	fonts := func(all ...fyne.Resource) (list []*sfnt.Font) {
		for _, r := range append(all, theme.DefaultSymbolFont()) {
			f, err := sfnt.Parse(r.Content())
			if err != nil {
				t.Fatal(err)
			}
			list = append(list, f)
		}
		return list
	}
	plain := map[string][]*sfnt.Font{"regular": fonts(theme.DefaultTextFont()), "bold": fonts(theme.DefaultTextBoldFont())}
	mono := map[string][]*sfnt.Font{"monospaced": fonts(theme.DefaultTextMonospaceFont())}
	seen := map[string]bool{}
	carried := func(where, text string, in map[string][]*sfnt.Font) {
		var buffer sfnt.Buffer
		for style, list := range in {
			for _, letter := range text {
				has := letter < ' ' || letter == '−' // what people type; charts have a font of their own
				for _, f := range list {
					i, err := f.GlyphIndex(&buffer, letter)
					has = has || err == nil && i != 0
				}
				if key := style + string(letter); !has && !seen[key] {
					seen[key] = true
					t.Errorf("%s: %q is not in the %s font", where, letter, style)
				}
			}
		}
	}

	for _, folder := range []string{".", "../model", "../words"} {
		packages, err := parser.ParseDir(token.NewFileSet(), folder, func(f fs.FileInfo) bool { return !strings.HasSuffix(f.Name(), "_test.go") }, 0)
		if err != nil {
			t.Fatal(err)
		}
		literals := 0
		for _, p := range packages {
			ast.Inspect(p, func(n ast.Node) bool {
				if l, ok := n.(*ast.BasicLit); ok && l.Kind == token.STRING {
					text, err := strconv.Unquote(l.Value)
					if err != nil {
						t.Fatal(err)
					}
					literals++
					carried(folder, text, plain)
				}
				return true
			})
		}
		if literals == 0 {
			t.Errorf("%s holds no text", folder)
		}
	}
	catalogs, err := filepath.Glob("../words/*.toml")
	if err != nil || len(catalogs) != len(words.Languages())-1 {
		t.Fatalf("catalogs %q: %v", catalogs, err)
	}
	for _, path := range catalogs {
		text, err := os.ReadFile(path)
		if err != nil {
			t.Fatal(err)
		}
		carried(path, string(text), plain)
	}
	for _, page := range guide.Pages() {
		for _, part := range page.Parts {
			if part.Kind == "" {
				carried(page.File, part.Text, plain)
			} else {
				carried(page.File, part.Text, mono)
			}
		}
	}
	plans, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil || len(plans) == 0 {
		t.Fatalf("plans %q: %v", plans, err)
	}
	for _, m := range append(gems.Stones(), gems.Surroundings()...) {
		carried("materials", fmt.Sprint(m.Name, m.Cautions), plain)
	}
	for _, name := range plans {
		text, err := fs.ReadFile(testdata.Plans(), name)
		if err != nil {
			t.Fatal(err)
		}
		carried(name, string(text), plain)
	}
}
