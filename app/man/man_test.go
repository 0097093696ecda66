package man_test

import (
	"bytes"
	"context"
	"flag"
	"os"
	"os/exec"
	"strings"
	"testing"

	"pavilight/app/command"
	"pavilight/app/man"
)

var update = flag.Bool("update", false, "write the page anew")

const file = "pavilight.1"

// TestPageIsFresh compares the page in the repository with what the command line takes.
func TestPageIsFresh(t *testing.T) {
	grammar, err := command.Grammar()
	if err != nil {
		t.Fatal(err)
	}
	page := man.Page(grammar)
	if *update {
		if err := os.WriteFile(file, page, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	have, err := os.ReadFile(file)
	if err != nil {
		t.Fatal(err)
	}
	if !bytes.Equal(have, page) {
		t.Errorf("%s is out of date: run go test ./app/man -update", file)
	}
	for _, c := range grammar.Children {
		for _, f := range c.Flags {
			if !strings.Contains(string(page), `\-\-`+strings.ReplaceAll(f.Name, "-", `\-`)) {
				t.Errorf("the page lacks --%s of %s", f.Name, c.Name)
			}
		}
	}
}

// TestPageSetsWithoutWarnings lets groff, where it is installed, judge the page.
func TestPageSetsWithoutWarnings(t *testing.T) {
	groff, err := exec.LookPath("groff")
	if err != nil {
		t.Skip("groff is not installed")
	}
	var complaints, set bytes.Buffer
	c := exec.Command(groff, "-man", "-Tutf8", "-Wbreak", "-z", file) // long flags cannot be broken
	c.Stderr, c.Stdout = &complaints, &set
	if err := c.Run(); err != nil || complaints.Len() > 0 {
		t.Errorf("groff: %v\n%s", err, complaints.String())
	}
}

// TestExamples runs the page's examples.
func TestExamples(t *testing.T) {
	t.Chdir(t.TempDir())
	for _, e := range man.Examples {
		var out, complaints bytes.Buffer
		env := command.Environment{Stdout: &out, Stderr: &complaints}
		if status := command.Main(context.Background(), e.Args, env); status != command.Done || out.Len() == 0 {
			t.Errorf("pavilight %s: exit status %d\n%s", strings.Join(e.Args, " "), status, complaints.String())
		}
	}
}
