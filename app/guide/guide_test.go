// Package guide_test runs what the guide's pages tell people to type.
package guide_test

import (
	"bytes"
	"context"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strconv"
	"strings"
	"testing"

	"pavilight/app/command"
	"pavilight/app/guide"
)

// near is how far a number that is printed may lie from the one on a page: what is
// traced differs in its last digits between processors.
const (
	nearShare = 0.005
	nearUnits = 0.0025
)

// TestPages goes through each page from top to bottom in a folder of its own: it saves
// the files that the page says to save, runs the commands, and compares what they print.
func TestPages(t *testing.T) {
	for _, page := range guide.Pages() {
		t.Run(page.File, func(t *testing.T) {
			t.Chdir(t.TempDir())
			settings := t.TempDir()
			for _, place := range []string{"XDG_CONFIG_HOME", "AppData", "HOME"} { // by the system
				t.Setenv(place, settings)
			}
			commands := 0
			for _, part := range page.Parts {
				switch part.Kind {
				case "":
				case "toml":
					if err := os.WriteFile(part.File, []byte(part.Text), 0o644); err != nil {
						t.Fatal(err)
					}
				case "console":
					commands += console(t, part.Text)
				default:
					t.Errorf("nothing is done with a block of %q", part.Kind)
				}
			}
			if commands < 3 {
				t.Errorf("%d commands were run", commands)
			}
		})
	}
}

// TestFirstPageNamesAll holds the folder, its first page and the list of pages together,
// and what a page is taken apart into to what stands there.
func TestFirstPageNamesAll(t *testing.T) {
	first, err := os.ReadFile("README.md")
	if err != nil {
		t.Fatal(err)
	}
	files, err := filepath.Glob("*.md")
	if pages := guide.Pages(); err != nil || len(pages) != len(files)-1 {
		t.Errorf("%d pages of %q: %v", len(pages), files, err)
	}
	at := 0
	for _, page := range guide.Pages() {
		link := "- [" + page.Title + "](" + page.File + ")"
		i := strings.Index(string(first[at:]), link)
		if i < 0 {
			t.Errorf("the first page does not name %q, in order", link)
			continue
		}
		at += i
		text, err := os.ReadFile(page.File)
		if err != nil {
			t.Fatal(err)
		}
		words := page.Title
		for _, part := range page.Parts {
			words += " " + part.Kind + " " + part.File + " " + part.Text
		}
		whole := strings.Fields(strings.ReplaceAll(strings.TrimPrefix(string(text), "# "), "```", " "))
		if got := strings.Fields(words); !slices.Equal(got, whole) {
			t.Errorf("%s: of %d words %d are in its parts", page.File, len(whole), len(got))
		}
	}
}

// console runs the commands of a block and returns how many.
func console(t *testing.T, text string) (commands int) {
	t.Helper()
	for _, part := range strings.Split("\n"+text, "\n$ ")[1:] {
		line, shown, _ := strings.Cut(part, "\n")
		args := strings.Fields(line)
		if args[0] != "pavilight" {
			t.Errorf("%q does not call the program", line)
			continue
		}
		if args[1] == "tell" {
			args = append(args, "--pixels", "48") // the maps are not looked at here
		}
		var out, complaints bytes.Buffer
		env := command.Environment{Stdout: &out, Stderr: &complaints}
		if status := command.Main(context.Background(), args[1:], env); status != command.Done {
			t.Errorf("%s: exit status %d\n%s", line, status, complaints.String())
		}
		commands++
		compare(t, line, strings.Split(strings.TrimSpace(shown), "\n"), strings.Split(filepath.ToSlash(out.String()), "\n"))
	}
	return commands
}

// compare looks for each line that a page shows in what was printed, in the same order.
// Lines of three points stand for any others.
func compare(t *testing.T, line string, shown, printed []string) {
	t.Helper()
	at := 0
	for _, want := range shown {
		if want = strings.TrimSpace(want); want == "..." || want == "" {
			continue
		}
		from := at
		for ; at < len(printed) && !alike(want, printed[at]); at++ {
		}
		if at == len(printed) {
			t.Errorf("%s does not print\n%s\nbut\n%s", line, want, strings.Join(printed[from:], "\n"))
			return
		}
		at++
	}
}

// alike reports whether two lines are the same but for rounding and standard errors.
func alike(want, got string) bool {
	w, g := strings.Fields(want), strings.Fields(got)
	if len(w) != len(g) {
		return false
	}
	for i := range w {
		x, numberX := number(w[i])
		y, numberY := number(g[i])
		switch {
		case w[i] == g[i], w[i] == "...":
		case !numberX || !numberY:
			return false
		case i > 0 && w[i-1] == "±":
		case math.Abs(x-y) > nearUnits+nearShare*math.Abs(x):
			return false
		}
	}
	return true
}

// number reads a number with or without a unit or comma that sticks to it.
func number(word string) (float64, bool) {
	v, err := strconv.ParseFloat(strings.TrimRight(word, "°,%;"), 64)
	return v, err == nil
}
