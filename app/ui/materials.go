package ui

import (
	"fmt"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/widget"

	"pavilight/gems"
)

// chooseMaterial lets the user pick what the stone is made of.
func (w *window) chooseMaterial() { w.pickMaterial("What the stone is made of", w.bench.SetMaterial) }

// pickMaterial lets the user pick a material from a list that narrows as they type.
func (w *window) pickMaterial(title string, then func(*gems.Material)) {
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
				o.(*widget.Label).SetText(materialLine(shown[i]))
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
	filter.SetPlaceHolder("Type a name: ruby, citrine, glass")
	filter.OnChanged = func(text string) {
		shown = matching(all, text)
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
	d = dialog.NewCustom(title, "Cancel",
		container.NewGridWrap(size, container.NewBorder(filter, nil, nil, nil, list)), w.win)
	w.raise(d)
	w.win.Canvas().Focus(filter)
}

// materialLine names a material with its index and density.
func materialLine(m *gems.Material) string {
	text := m.Name
	if n, err := m.Index(gems.LineD); err == nil {
		text += fmt.Sprintf("   %.3f", n)
	}
	if m.Density > 0 {
		text += fmt.Sprintf("   %.2f g/cm³", m.Density)
	}
	const most = 4 // names; more would not fit
	if len(m.Names) > 0 {
		text += "   " + strings.Join(m.Names[:min(most, len(m.Names))], ", ")
	}
	return text
}

// matching returns the materials that a text fits: by key, name, variety or trade name.
func matching(all []*gems.Material, text string) []*gems.Material {
	text = strings.ToLower(strings.TrimSpace(text))
	if text == "" {
		return all
	}
	var found []*gems.Material
	for _, m := range all {
		for _, name := range append([]string{m.Key, m.Name}, m.Names...) {
			if strings.Contains(strings.ToLower(name), text) {
				found = append(found, m)
				break
			}
		}
	}
	return found
}
