package main

import (
	"fmt"
	"go/ast"
	"go/constant"
	"go/importer"
	"go/parser"
	"go/token"
	"go/types"
	"io"
	"maps"
	"os"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
	"unicode"

	"github.com/pelletier/go-toml/v2"

	"pavilight/app/words"
)

// spoken is where the code says a key.
type spoken struct {
	key   string
	where string
}

// keyType is the type of the texts.
const keyType = "pavilight/app/words.Key"

// keysOf returns each constant of type words.Key in the packages of app, and reports texts
// that are filled in with too few or too many things.
func keysOf(t *testing.T) []spoken {
	t.Helper()
	packages := goList(t, "-export", "-deps", "-json=ImportPath,Export,Dir,GoFiles", "./app/ui")
	exports := map[string]string{}
	for _, p := range packages {
		exports[p.ImportPath] = p.Export
	}
	files := token.NewFileSet()
	compiled := importer.ForCompiler(files, "gc", func(path string) (io.ReadCloser, error) { return os.Open(exports[path]) })
	var found []spoken
	for _, p := range packages {
		if !strings.HasPrefix(p.ImportPath, "pavilight/app/") {
			continue
		}
		var parsed []*ast.File
		for _, name := range p.GoFiles {
			f, err := parser.ParseFile(files, filepath.Join(p.Dir, name), nil, 0)
			if err != nil {
				t.Fatal(err)
			}
			parsed = append(parsed, f)
		}
		info := &types.Info{Types: map[ast.Expr]types.TypeAndValue{}}
		if _, err := (&types.Config{Importer: compiled}).Check(p.ImportPath, files, parsed, info); err != nil {
			t.Fatal(err)
		}
		keyOf := func(e ast.Expr) (string, bool) {
			tv := info.Types[e]
			if tv.Value == nil || tv.Type.String() != keyType {
				return "", false
			}
			return constant.StringVal(tv.Value), true
		}
		where := func(e ast.Expr) string {
			at := files.Position(e.Pos())
			return fmt.Sprintf("%s:%d", filepath.Base(at.Filename), at.Line)
		}
		for e := range info.Types {
			if key, ok := keyOf(e); ok && key != "" {
				found = append(found, spoken{key, where(e)})
			}
		}
		for _, f := range parsed {
			ast.Inspect(f, func(n ast.Node) bool {
				if call, ok := n.(*ast.CallExpr); ok && info.Types[call.Fun].IsValue() {
					checkFilled(t, call, info, keyOf, where)
				}
				return true
			})
		}
	}
	return found
}

// alike reports whether a text is the same in every language: verbs, signs, units and
// names of tiers alone.
func alike(key string) bool {
	for _, pattern := range []string{`%[^a-zA-Z%]*[a-zA-Z]`, `\b(mm|ct|g|cm|Y)\b`, `\b[A-Z]\d+\b`} {
		key = regexp.MustCompile(pattern).ReplaceAllString(key, "")
	}
	return !strings.ContainsFunc(key, unicode.IsLetter)
}

// checkFilled reports a call that fills in a text with too few or too many things: one whose
// last arguments are any, with the text before.
func checkFilled(t *testing.T, call *ast.CallExpr, info *types.Info, keyOf func(ast.Expr) (string, bool), where func(ast.Expr) string) {
	t.Helper()
	s, ok := info.Types[call.Fun].Type.(*types.Signature)
	if !ok || !s.Variadic() || call.Ellipsis.IsValid() || s.Params().At(s.Params().Len()-1).Type().String() != "[]any" {
		return
	}
	texts := s.Params().Len() - 1
	for i, e := range call.Args[:texts] {
		key, ok := keyOf(e)
		if !ok {
			continue
		}
		if i+1 < texts && s.Params().At(i).Name() == "title" && s.Params().At(i+1).Type().String() == keyType {
			continue // filled in is the text that follows
		}
		verbs := regexp.MustCompile(`%[^a-zA-Z%]*[a-zA-Z]`).FindAllString(strings.ReplaceAll(words.Key(key).English(), "%%", ""), -1)
		if got, want := len(call.Args)-texts, len(verbs); got != want {
			t.Errorf("%s: %q is filled in with %d things and has verbs for %d", where(e), key, got, want)
		}
	}
}

// TestEveryTextIsSaid holds that the catalogs say every text of the window, and nothing
// that it does not have.
func TestEveryTextIsSaid(t *testing.T) {
	said := keysOf(t)
	if len(said) < 100 {
		t.Fatalf("only %d texts were found in the code", len(said))
	}
	for _, language := range words.Languages()[1:] {
		name := language + ".toml"
		content, err := os.ReadFile(filepath.Join("words", name))
		if err != nil {
			t.Fatal(err)
		}
		catalog := map[string]string{}
		if err := toml.Unmarshal(content, &catalog); err != nil {
			t.Fatalf("%s: %v", name, err)
		}
		missing, needless := map[string]string{}, maps.Clone(catalog)
		for _, s := range said {
			if _, ok := catalog[s.key]; !ok && !alike(s.key) {
				missing[s.key] = s.where
			}
			delete(needless, s.key)
		}
		for _, key := range slices.Sorted(maps.Keys(missing)) {
			t.Errorf("app/words/%s does not say this text of %s yet; add a line\n%q = \"…\"", name, missing[key], key)
		}
		for _, key := range slices.Sorted(maps.Keys(needless)) {
			t.Errorf("app/words/%s says %q, which the code does not have any more: take the line out, or mend its key", name, key)
		}
	}
}
