package ui

import (
	"runtime"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/licences"
	"pavilight/app/version"
	"pavilight/app/words"
)

// about says what the program is, which versions it runs on and what it is not.
func (w *window) about() {
	text := widget.NewLabel(strings.Join([]string{
		w.words.Say("Where the light in a faceted gemstone goes, and how to cut it so that it comes back."),
		w.words.Say("A map is a model. It grades no stone and replaces no laboratory. Not modelled: inclusions, haze, " +
			"colour zones, fluorescence, fracture filling."),
		version.Current().String(),
	}, "\n\n"))
	text.Wrapping = fyne.TextWrapWord
	scroll := container.NewVScroll(text)
	scroll.SetMinSize(fyne.NewSize(440, 240))
	d := dialog.NewCustomWithoutButtons(w.words.Say("About Pavilight"), scroll, w.win)
	d.SetButtons([]fyne.CanvasObject{
		widget.NewButton(w.words.Say("Licences"), func() { d.Hide(); w.licences() }),
		widget.NewButton(w.words.Say("Close"), d.Hide),
	})
	w.raise(d)
}

// licences shows the licences of everything by others in the program. Only the lines
// in sight are laid out: all at once would hold the window up.
func (w *window) licences() {
	lines := strings.Split(licences.ThirdParty(), "\n")
	list := widget.NewList(
		func() int { return len(lines) },
		func() fyne.CanvasObject {
			return newLine(theme.ColorNameForeground, theme.SizeNameCaptionText).monospaced()
		},
		func(i widget.ListItemID, o fyne.CanvasObject) { o.(*line).setText(lines[i]) })
	list.HideSeparators = true
	list.OnSelected = list.Unselect
	size := w.win.Canvas().Size()
	room := container.NewGridWrap(fyne.NewSize(min(820, size.Width-80), min(520, size.Height-160)), list)
	w.raise(dialog.NewCustom(w.words.Say("Licences of what Pavilight is built with"), w.words.Say("Close"), room, w.win))
}

// diagnostics is what helps to find a fault of the program.
func (w *window) diagnostics() string {
	s := w.bench.Look.Settings()
	size := w.win.Canvas().Size()
	return w.words.Say("%s\nwindow %.0f x %.0f, scale %.2f, text %.1f, theme %s\n"+
		"processors %d, tracing on %d\nmaps of %d pixels\nplan %q: %s\nstate: %s\n",
		version.Current().String(), size.Width, size.Height, w.win.Canvas().Scale(), w.files.textScale(), w.files.brightness(),
		runtime.NumCPU(), s.Workers, s.Pixels, w.bench.Doc.Plan().Name, strings.Join(w.bench.Troubles(), "; "), w.bench.Look.Status()) + w.logged.String()
}

func (w *window) copyDiagnostics() {
	w.app.Clipboard().SetContent(w.diagnostics())
	w.report("The diagnostics are on the clipboard.")
}

// firstSteps gives three hints.
func (w *window) firstSteps() {
	hint := func(head, body words.Key, args ...any) fyne.CanvasObject {
		text := widget.NewLabel(w.words.Say(body, args...))
		text.Wrapping = fyne.TextWrapWord
		return container.NewBorder(newWord(theme.ColorNameForeground, theme.SizeNameText, w.words.Say(head)).bold(), nil, nil, nil, text)
	}
	all := container.NewVBox(
		hint("Move a slider", "Every tier has its angle at the left. All six maps follow while the slider moves, then they refine. "+
			"The ticks a, w and o on a pavilion tier are the critical angles in air, water and oil: below its tick a facet begins to leak."),
		hint("Point at a map", "The numbers under the pointer appear in all six maps at once. "+
			"Above, light that comes back; below, light that leaks. "+
			"Click to follow the ray there, facet by facet; a double click enlarges the map."),
		hint("Open your own plan", "Drop a plan or a scan on the window, or take one of the samples from the File menu. "+
			"What you change can be undone, step by step."),
	)
	w.raise(dialog.NewCustom(w.words.Say("First steps"), w.words.Say("Close"), container.NewGridWrap(fyne.NewSize(520, 280), all), w.win))
}
