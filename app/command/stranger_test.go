package command

import (
	"bytes"
	"encoding/csv"
	"encoding/json"
	"fmt"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"
	"unicode"
)

// hostileName gives orders to whatever takes it for more than a name: terminals (titles,
// clearing, C1 controls, writing from right to left), spreadsheets, browsers, and paths.
const hostileName = "=cmd|'/C x'!A1 \x1b]0;owned\x07\x1b[2J\u009b31m\u202egnp.\u2066 </script><script>alert(1)</script> ../../../x \x7f"

// hostilePlan is the block with that name wherever a plan has room for words.
func hostilePlan(t *testing.T) string {
	quoted, err := json.Marshal(hostileName)
	if err != nil {
		t.Fatal(err)
	}
	name := strings.ReplaceAll(string(quoted), "\x7f", `\u007f`)
	text := fmt.Sprintf(cube, "quartz", "0", "distance = 0.4")
	text = strings.Replace(text, `"Block"`, name+"\nauthor = "+name+"\nnotes = "+name, 1)
	text = strings.Replace(text, "name = \"B1\"", "note = "+name+"\nname = \"=B\\u001b[2J\"", 1)
	return file(t, "stranger.toml", text)
}

// wantHarmless fails where a text gives a terminal orders.
func wantHarmless(t *testing.T, what, text string) {
	t.Helper()
	for _, r := range text {
		if r != '\n' && r != '\t' && (unicode.IsControl(r) || unicode.Is(unicode.Bidi_Control, r) || r == unicode.ReplacementChar) {
			t.Fatalf("%s: %q in %.300q", what, r, text)
		}
	}
}

// Names and notes from a stranger's plan are text and nothing else, on the terminal, in
// JSON and in tables, and no file is written but where it was asked for.
func TestStrangersNames(t *testing.T) {
	plan := hostilePlan(t)
	folder := t.TempDir()
	out := filepath.Join(folder, "a", "b")
	for _, args := range [][]string{
		{"check", plan},
		{"check", plan, "--json"},
		quick("look", plan),
		quick("look", plan, "--json"),
		quick("look", plan, "--out", out),
		{"check", plan, "--solid", filepath.Join(out, "solid.obj")},
		{"cut", plan, "--no-maps", "--out", out, "--as", "pdf,svg"},
		{"tell", plan, "--pixels", "48", "--error", "0.1", "--lights", "overcast", "--in", "air", "--as", "html,csv,json", "--out", out, "--json"},
	} {
		got := runCommand(args...)
		if got.status != Done {
			t.Errorf("%v ends with %d: %s", args, got.status, got.stderr)
		}
		wantHarmless(t, args[0]+" to stdout", got.stdout)
		wantHarmless(t, args[0]+" to stderr", got.stderr)
		if slices.Contains(args, "--json") {
			var value map[string]any
			if err := json.Unmarshal([]byte(got.stdout), &value); err != nil {
				t.Errorf("%v: %v", args, err)
			} else if name, ok := value["plan"]; ok && name != hostileName {
				t.Errorf("%v: the plan's name became %q", args, name)
			}
		}
	}
	got := runCommand("check", file(t, "broken.toml", "\"\x1b[2J\u009b\" = 1\n\x1b[2J"))
	if wantHarmless(t, "a broken file", got.stderr); got.status != InputFault {
		t.Errorf("a broken file ends with %d", got.status)
	}
	written := 0
	err := filepath.WalkDir(folder, func(path string, entry os.DirEntry, err error) error {
		if err != nil || entry.IsDir() {
			return err
		}
		written++
		if filepath.Dir(path) != out {
			t.Errorf("%s was written", path)
		}
		wantHarmless(t, "a file's name", path)
		text, err := os.ReadFile(path)
		if err != nil {
			return err
		}
		if filepath.Ext(path) == ".csv" && strings.Contains(path, "ledger") {
			rows, err := csv.NewReader(strings.NewReader(string(text))).ReadAll()
			if err != nil || len(rows) < 2 || !strings.HasPrefix(rows[1][0], "'=cmd") {
				t.Errorf("%s: %v, %.1q", path, err, rows)
			}
		}
		if kind := filepath.Ext(path); (kind == ".html" || kind == ".svg") && strings.Contains(string(text), "<script") {
			t.Errorf("%s holds a script", path)
		}
		return nil
	})
	if err != nil || written < 8 {
		t.Errorf("%d files, %v", written, err)
	}
}

func TestTablesHoldNoFormulas(t *testing.T) {
	var b bytes.Buffer
	if err := printCSV(&b, [][]string{{"=P1", "-2.5"}, {"P1", "-x"}}); err != nil || b.String() != "'=P1,-2.5\nP1,'-x\n" {
		t.Errorf("%q, %v", b.String(), err)
	}
}

func TestHarmless(t *testing.T) {
	for text, want := range map[string]string{
		"Grüße, 石\tP1\n":       "Grüße, 石\tP1\n",
		"a\r\nb\rc":            "a\r\nb\\u000dc",
		"\x1b[2J\x00\x7f":      `\u001b[2J\u0000\u007f`,
		"\u009b2J\u202e\u2066": `\u009b2J\u202e\u2066`,
		"cut \xff\xc3":         "cut \ufffd\ufffd",
	} {
		if got := string(harmless([]byte(text))); got != want {
			t.Errorf("%q became %q, want %q", text, got, want)
		}
	}
}
