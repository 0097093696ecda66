package ui

import (
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/guide"
)

// showGuide shows a page of the guide. What is to be typed or saved can be marked and
// copied, and a plan that the page has people save opens at once.
func (w *window) showGuide(page guide.Page) {
	var d *dialog.CustomDialog
	all := container.NewVBox()
	for _, part := range page.Parts {
		if part.Kind == "" {
			text := widget.NewRichTextFromMarkdown(part.Text)
			text.Wrapping = fyne.TextWrapWord
			all.Add(text)
			continue
		}
		lines := widget.NewLabelWithStyle(strings.TrimSuffix(part.Text, "\n"), fyne.TextAlignLeading, fyne.TextStyle{Monospace: true})
		lines.Selectable = true
		lines.SizeName = theme.SizeNameCaptionText
		lines.Wrapping = fyne.TextWrapWord // one that slides sideways would keep the wheel for itself
		all.Add(container.New(layout.NewCustomPaddedLayout(0, 0, 18, 0), lines))
		if part.Kind == "toml" {
			open := widget.NewButton(w.words.Say("Open this plan"), func() {
				w.unlessUnsaved("Save them before you open another plan?", func() {
					d.Hide()
					w.openText([]byte(part.Text), part.File)
				})
			})
			all.Add(container.New(layout.NewCustomPaddedLayout(0, 6, 24, 0), container.NewHBox(open)))
		}
	}
	size := w.win.Canvas().Size()
	room := container.NewGridWrap(fyne.NewSize(min(900, size.Width-80), min(640, size.Height-200)), container.NewVScroll(all))
	note := widget.NewLabel(w.words.Say("What follows a $ is typed in a terminal, in the folder of your plans. " +
		"Where app/start built the program, write .build/pavilight with its folder before it, or put that folder into PATH."))
	note.Wrapping, note.SizeName, note.Importance = fyne.TextWrapWord, theme.SizeNameCaptionText, widget.LowImportance
	d = dialog.NewCustom(page.Title, w.words.Say("Close"), container.NewBorder(nil, note, nil, nil, room), w.win)
	w.raise(d)
}
