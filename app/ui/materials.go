package ui

import (
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/gems"
)

// chooseMaterial lets the user pick what the stone is made of.
func (w *window) chooseMaterial() { w.pickMaterial("What the stone is made of", w.bench.SetMaterial) }

// pickMaterial lets the user pick a material from a list that narrows as they type.
func (w *window) pickMaterial(title words.Key, then func(*gems.Material)) {
	all := w.bench.Stock.Stones()
	shown := all
	var d *dialog.CustomDialog
	list := widget.NewList(
		func() int { return len(shown) },
		func() fyne.CanvasObject {
			l := widget.NewLabel("")
			l.Truncation = fyne.TextTruncateEllipsis
			return l
		},
		func(i widget.ListItemID, o fyne.CanvasObject) {
			if i < len(shown) {
				o.(*widget.Label).SetText(materialLine(w.words, shown[i]))
			}
		})
	take := func(m *gems.Material) {
		d.Hide()
		then(m)
	}
	list.OnSelected = func(i widget.ListItemID) {
		if i < len(shown) {
			take(shown[i])
		}
	}
	filter := w.newFormEntry()
	filter.SetPlaceHolder(w.words.Say("Type a name: ruby, citrine, glass"))
	filter.OnChanged = func(text string) {
		shown = matching(w.words, all, text)
		list.UnselectAll()
		list.Refresh()
		list.ScrollToTop()
	}
	filter.OnSubmitted = func(string) {
		if len(shown) > 0 {
			take(shown[0])
		}
	}
	size := fyne.NewSize(520, min(440, w.win.Canvas().Size().Height-200))
	d = dialog.NewCustom(w.words.Say(title), w.words.Say("Cancel"),
		container.NewGridWrap(size, container.NewBorder(filter, nil, nil, nil, list)), w.win)
	w.raise(d)
	w.win.Canvas().Focus(filter)
}

// materialLine names a material with its index and density.
func materialLine(w *words.Words, m *gems.Material) string {
	text := stock.NameOf(w, m)
	if n, err := m.Index(gems.LineD); err == nil {
		text += w.Say("   %.3f", n)
	}
	if m.Density > 0 {
		text += w.Say("   %.2f g/cm³", m.Density)
	}
	const most = 4 // names; more would not fit
	if len(m.Names) > 0 {
		text += "   " + strings.Join(m.Names[:min(most, len(m.Names))], ", ")
	}
	return text
}

// matching returns the materials that a text fits: by key, name, variety or trade name.
func matching(w *words.Words, all []*gems.Material, text string) []*gems.Material {
	text = strings.ToLower(strings.TrimSpace(text))
	if text == "" {
		return all
	}
	var found []*gems.Material
	for _, m := range all {
		for _, name := range append([]string{m.Key, m.Name, stock.NameOf(w, m)}, m.Names...) {
			if strings.Contains(strings.ToLower(name), text) {
				found = append(found, m)
				break
			}
		}
	}
	return found
}
