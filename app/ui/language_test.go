package ui

import (
	"fmt"
	"math"
	"strings"
	"testing"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/test"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/testdata"
)

// menuLabel returns the label of the first item of a menu, and the menu's own.
func menuLabels(m *fyne.MainMenu) (labels []string) {
	for _, menu := range m.Items {
		labels = append(labels, menu.Label, menu.Items[0].Label)
	}
	return labels
}

func TestTheLanguageIsChangedAtOnceAndRemembered(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	if err := r.bench.SetAngle(r.row(t, "P1").number, 42*facets.Degree, false); err != nil {
		t.Fatal(err)
	}
	r.refined(t)
	r.enter(cutRoom)
	for _, tt := range []struct{ code, room, file, open, undo string }{
		{"de", "Schleifen", "Datei", "Öffnen…", "Rückgängig: Winkel von P1"},
		{"fr", "Tailler", "Fichier", "Ouvrir…", "Annuler : angle de P1"},
		{"", "Cut", "File", "Open…", "Undo angle of P1"},
	} {
		r.setLanguage(tt.code)
		labels := menuLabels(r.win.MainMenu())
		if labels[0] != tt.file || labels[1] != tt.open || labels[3] != tt.undo {
			t.Errorf("in %q the menu says %q", tt.code, labels)
		}
		if r.doors[cutRoom].text != tt.room || !r.doors[cutRoom].open || !r.cutBox.Visible() || r.body.Visible() {
			t.Errorf("in %q the open room is not %s", tt.code, tt.room)
		}
		if got := r.files.language(); got != tt.code {
			t.Errorf("remembered is %q, want %q", got, tt.code)
		}
		if got := r.angle(t, "P1"); got != 42 {
			t.Errorf("in %q P1 stands at %v", tt.code, got)
		}
		if r.grid.maps[0][0].picture.Image == nil || r.solid.stone == nil || r.title.text == "" {
			t.Errorf("in %q the maps, the solid or the title are empty", tt.code)
		}
	}
}

// TestWhatIsPrintedFollowsTheWindow: sheet and report speak the window's language until
// another is chosen for them.
func TestWhatIsPrintedFollowsTheWindow(t *testing.T) {
	r := inCut(t, fyne.NewSize(usualWidth, usualHeight))
	cut, tell := r.cutting.cut, r.telling.tell
	speaks := func(sheet, report string) {
		t.Helper()
		r.until(t, "the sheet in "+sheet, func() bool { return cut.Ready() && cut.Sheet.Words.Language() == sheet })
		if cut.Wish.Language != sheet || tell.Wish.Language != report {
			t.Errorf("wanted are a sheet in %s and a report in %s, want %s and %s", cut.Wish.Language, tell.Wish.Language, sheet, report)
		}
	}
	speaks("en", "en")
	r.setLanguage("de")
	speaks("de", "de")
	cut.Change(func(w *model.CutWish) { w.Language = "fr" })
	r.setLanguage("en")
	speaks("fr", "en")
	r.setLanguage("fr")
	r.setLanguage("de")
	speaks("de", "de") // chosen was what the window came to speak, and it goes on from there
}

// cutWords returns what is written into less room than it takes, in what is seen of o.
func cutWords(o fyne.CanvasObject) (cut []string) {
	if !o.Visible() || o.Size().Width == 0 {
		return nil
	}
	narrow := func(text string) {
		const rounding = 0.5
		if o.Size().Width < o.MinSize().Width-rounding {
			cut = append(cut, text)
		}
	}
	switch o := o.(type) {
	case *fyne.Container:
		for _, child := range o.Objects {
			cut = append(cut, cutWords(child)...)
		}
	case *line:
		if shown := test.WidgetRenderer(o).(*lineRenderer).text.Text; shown != o.text {
			cut = append(cut, o.text)
		}
	case *wrapped:
		fits := func(s string) bool {
			return fyne.MeasureText(s, theme.Size(o.size), fyne.TextStyle{}).Width <= o.Size().Width
		}
		if o.high(o.Size().Width) > o.Size().Height+1 || len(breakLines(o.text, fits)) > mostLines {
			cut = append(cut, o.text)
		}
	case *tipButton:
		narrow(o.Text)
	case *widget.Button:
		narrow(o.Text)
	case *widget.Check:
		narrow(o.Text)
	case *tierRow: // what it tells of a tier may take any length
	case fyne.Widget:
		for _, child := range test.WidgetRenderer(o).Objects() {
			cut = append(cut, cutWords(child)...)
		}
	}
	return cut
}

// TestNothingIsCutInAnyLanguage looks at the rooms, as wide as they first open and as
// narrow as they must be usable.
func TestNothingIsCutInAnyLanguage(t *testing.T) {
	r := newRig(t, testdata.Bundled)
	r.refined(t)
	for _, code := range words.Languages() {
		r.setLanguage(code)
		r.fault.Show() // as where a plan makes no stone
		for _, size := range []fyne.Size{fyne.NewSize(usualWidth, usualHeight), fyne.NewSize(1024, 700)} {
			r.win.Resize(size)
			for room := range rooms {
				r.enter(room)
				r.drain()
				for _, text := range cutWords(r.win.Content()) {
					t.Errorf("%s at %v, %s: cut off is %q", code, size, room.name(), text)
				}
			}
		}
	}
	r.enter(lookRoom)
	if r.grid.meaning[0].setText(strings.Repeat("long ", 200)); len(cutWords(r.grid.meaning[0])) == 0 {
		t.Error("a text that is far too long is not seen to be cut off")
	}
}

// TestPlaceWordsNameTheSide: nobody has to read "right" with a minus before it.
func TestPlaceWordsNameTheSide(t *testing.T) {
	for _, of := range []struct {
		x, y float64
		want string
	}{
		{1.5, 0.25, "1.50 mm right, 0.25 mm up from the middle"},
		{1.5, -0.25, "1.50 mm right, 0.25 mm down from the middle"},
		{-1.5, 0.25, "1.50 mm left, 0.25 mm up from the middle"},
		{-1.5, -0.25, "1.50 mm left, 0.25 mm down from the middle"},
	} {
		if got := fmt.Sprintf(placeWords(of.x, of.y).English(), math.Abs(of.x), math.Abs(of.y)); got != of.want {
			t.Errorf("%g, %g: %q, want %q", of.x, of.y, got, of.want)
		}
	}
}
