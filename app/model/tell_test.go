package model

import (
	"bytes"
	"image"
	"image/png"
	"os"
	"path/filepath"
	"strings"
	"sync"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
)

// tellRoom returns a room that tells of the tent, coarsely; settle does the window's work
// until all is done.
func tellRoom(t *testing.T) (room *Tell, settle func()) {
	t.Helper()
	plan, err := facets.ReadPlan(strings.NewReader(tent), "tent.toml")
	if err != nil {
		t.Fatal(err)
	}
	var around []Around
	for _, name := range []string{"air", "water", "water"} {
		m, err := gems.Find(name)
		if err != nil {
			t.Fatal(err)
		}
		around = append(around, Around{Medium: m})
	}
	var mu sync.Mutex
	var queue []func()
	room = NewTell(func(f func()) {
		mu.Lock()
		defer mu.Unlock()
		queue = append(queue, f)
	}, func() {}, (&Bench{Stock: gems.Standard()}).MaterialOf)
	room.Pixels, room.Error = 48, 0.02
	room.Wish.Lights[1] = ""
	room.SetWidth(150)
	settle = func() {
		for {
			room.Wait()
			mu.Lock()
			all := queue
			queue = nil
			mu.Unlock()
			if len(all) == 0 {
				return
			}
			for _, f := range all {
				f()
			}
		}
	}
	t.Cleanup(func() { room.Stop(); settle() })
	room.SetSubject(plan, around, 10*facets.Degree, "test")
	return room, settle
}

func TestTheReportIsSetAndWritten(t *testing.T) {
	r, settle := tellRoom(t)
	if !r.Running || r.Ready() || len(r.subject.media) != 2 {
		t.Errorf("right after asking: running %v, ready %v, %d surroundings", r.Running, r.Ready(), len(r.subject.media))
	}
	settle()
	if !r.Ready() || r.Pages() < 2 || r.Picture == nil || r.Picture.Rect.Dx() != 150 {
		t.Fatalf("ready %v, %d pages, trouble %v", r.Ready(), r.Pages(), r.Trouble)
	}
	folder := t.TempDir()
	for ending, begins := range map[string]string{".pdf": "%PDF-", ".html": "<!doctype html>", ".doc": ""} {
		path := filepath.Join(folder, r.FileName(ending))
		var told error
		r.Write(path, func(err error) { told = err })
		settle()
		text, err := os.ReadFile(path)
		if begins == "" {
			if told == nil || err == nil {
				t.Errorf("%s is written: %v", path, told)
			}
			continue
		}
		if told != nil || !strings.HasPrefix(strings.ToLower(string(text)), strings.ToLower(begins)) {
			t.Errorf("%s begins with %.20q; told %v, %v", path, text, told, err)
		}
	}
}

// What does not change the light is set anew without tracing; what does is traced.
func TestTheReportIsTracedOnce(t *testing.T) {
	r, settle := tellRoom(t)
	settle()
	before, first := r.all[0], r.Picture
	r.Change(func(w *TellWish) { w.Language = "de" })
	r.Change(func(w *TellWish) { w.Language, w.Author = "fr", "A. Person" })
	if r.Running {
		t.Error("another language traces the light anew")
	}
	settle()
	if r.all[0] != before || r.Trouble != nil || bytes.Equal(r.Picture.Pix, first.Pix) {
		t.Errorf("in French: the picture stays %v, trouble %v", bytes.Equal(r.Picture.Pix, first.Pix), r.Trouble)
	}
	changed := r.subject.plan.Clone()
	changed.WidthMM = 9
	r.SetBeside(changed)
	if !r.Running {
		t.Fatal("another stone is not traced")
	}
	settle()
	if !r.Ready() || len(r.all) != 2 || r.all[0].Name == r.all[1].Name {
		t.Errorf("%d stones side by side, trouble %v", len(r.all), r.Trouble)
	}
	r.Change(func(w *TellWish) { w.Measured = "crown" })
	settle()
	if r.Ready() || r.Trouble == nil || !strings.Contains(r.Trouble.Error(), "crown=0.2") {
		t.Errorf("trouble %v", r.Trouble)
	}
}

func TestTheReportIsStoppedAndGoesOn(t *testing.T) {
	r, settle := tellRoom(t)
	r.Stop()
	settle()
	if !r.Stopped || r.Running || r.Trouble != nil || r.Ready() {
		t.Errorf("stopped %v, running %v, trouble %v", r.Stopped, r.Running, r.Trouble)
	}
	r.Again()
	settle()
	if !r.Ready() {
		t.Errorf("after going on: trouble %v", r.Trouble)
	}
}

// A letterhead that is no picture is told of, and taking it away mends it.
func TestALetterheadThatIsNoPicture(t *testing.T) {
	r, settle := tellRoom(t)
	settle()
	folder := t.TempDir()
	bad, good := filepath.Join(folder, "bad.png"), filepath.Join(folder, "good.png")
	if err := os.WriteFile(bad, []byte("no picture"), 0o600); err != nil {
		t.Fatal(err)
	}
	var b bytes.Buffer
	if err := png.Encode(&b, image.NewGray(image.Rect(0, 0, 40, 10))); err != nil {
		t.Fatal(err)
	}
	if err := os.WriteFile(good, b.Bytes(), 0o600); err != nil {
		t.Fatal(err)
	}
	for _, c := range []struct {
		path  string
		ready bool
	}{{bad, false}, {good, true}, {filepath.Join(folder, "none.png"), false}, {"", true}} {
		r.Change(func(w *TellWish) { w.Letterhead = c.path })
		settle()
		if r.Ready() != c.ready || (r.Trouble == nil) != c.ready {
			t.Errorf("letterhead %q: ready %v, trouble %v", filepath.Base(c.path), r.Ready(), r.Trouble)
		}
	}
	r.Change(func(w *TellWish) { w.Notes = strings.Repeat("n", mostNotes+1) })
	settle()
	if r.Trouble == nil || !strings.Contains(r.Trouble.Error(), "letters") {
		t.Errorf("notes beyond all bounds: %v", r.Trouble)
	}
}
