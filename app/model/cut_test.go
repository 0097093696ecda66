package model

import (
	"bytes"
	"os"
	"path/filepath"
	"testing"
	"testing/synctest"

	"pavilight/gems"
)

func TestTheSheetIsMadeAndWritten(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		corundum, err := gems.Find("corundum")
		if err != nil {
			t.Fatal(err)
		}
		c := NewCut(p.window.do, func() {})
		c.Maps = false // they take a second
		c.Make(p.Doc.Plan(), corundum, p.Look.Around, 0, "test")
		if !c.Running || c.Ready() {
			t.Error("right after asking, the sheet counts as made")
		}
		p.window.settle()
		if !c.Ready() || len(c.Pages) < 2 {
			t.Fatalf("ready %v, %d pages, trouble %v", c.Ready(), len(c.Pages), c.Trouble)
		}
		path := filepath.Join(t.TempDir(), c.FileName())
		if err := c.Write(path); err != nil {
			t.Fatal(err)
		}
		if text, err := os.ReadFile(path); err != nil || !bytes.HasPrefix(text, []byte("%PDF-")) {
			t.Errorf("the file begins with %.8q, %v", text, err)
		}
		// A sheet on its way is left for the next one.
		c.Make(p.Doc.Plan(), corundum, p.Look.Around, 0, "test")
		c.Large = true
		c.Make(p.Doc.Plan(), corundum, p.Look.Around, 0, "test")
		p.window.settle()
		if !c.Ready() || !c.made.Large {
			t.Errorf("ready %v, large %v", c.Ready(), c.made.Large)
		}
		c.Wait()
	})
}
