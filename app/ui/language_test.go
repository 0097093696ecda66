package ui

import (
	"testing"

	"fyne.io/fyne/v2"

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
