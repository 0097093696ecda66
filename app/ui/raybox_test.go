package ui

import (
	"bytes"
	"encoding/xml"
	"image/png"
	"io"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pavilight/testdata"
)

func TestSecondRayStandsBesideTheFirst(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	r.bench.Look.Follow(0, 0.25, 0.35)
	if r.beside.box.Visible() {
		t.Error("a second list without a second ray")
	}
	drawn := len(r.solid.rays())
	choose(t, r.besideItems(), "the same in water")
	if !r.beside.box.Visible() || len(r.beside.list.lines) < 2 || !strings.HasPrefix(r.beside.title.text, "Ray in water") {
		t.Errorf("beside: %q with %d lines", r.beside.title.text, len(r.beside.list.lines))
	}
	if len(r.solid.rays()) <= drawn {
		t.Error("the second ray is not drawn in the stone")
	}
	folder := t.TempDir()
	page, text := r.bench.Look.Ray.Page(nil, "Harbour Eight"), r.bench.Look.Ray.Text(nil)
	for _, name := range []string{"ray.svg", "ray.PNG", "ray.txt"} {
		if err := writeRay(filepath.Join(folder, name), page, text); err != nil {
			t.Fatal(err)
		}
	}
	read := func(name string) []byte {
		b, err := os.ReadFile(filepath.Join(folder, name))
		if err != nil {
			t.Fatal(err)
		}
		return b
	}
	for d := xml.NewDecoder(bytes.NewReader(read("ray.svg"))); ; {
		if _, err := d.Token(); err == io.EOF {
			break
		} else if err != nil {
			t.Fatal("the SVG is not well formed: ", err)
		}
	}
	img, err := png.Decode(bytes.NewReader(read("ray.PNG")))
	if err != nil || colours(img) < 4 {
		t.Errorf("the PNG: %v", err)
	}
	if string(read("ray.txt")) != text {
		t.Error("the text differs")
	}
	if err := writeRay(filepath.Join(folder, "ray.bmp"), page, text); err == nil || !strings.Contains(err.Error(), ".svg") {
		t.Errorf("an unknown ending: %v", err)
	}
	choose(t, r.besideItems(), "no other ray")
	if r.beside.box.Visible() || len(r.solid.rays()) != drawn {
		t.Error("the second ray stays")
	}
}
