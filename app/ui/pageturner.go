package ui

import (
	"image"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/words"
)

// pageTurner is a page of a document with what turns and enlarges it.
type pageTurner struct {
	page  *pageView
	bar   *fyne.Container // the arrows, the place, the size
	back  *tipButton
	next  *tipButton
	at    *line
	zoom  *widget.Button
	words *words.Words
	last  int // page that was in view
}

// newPageTurner makes one; turn is asked for a page by how far it lies from the one in
// view, onWidth is told how wide a page is painted.
func (w *window) newPageTurner(turn func(by int), onWidth func(int)) *pageTurner {
	p := &pageTurner{words: w.words, page: newPageView(turn, w.strayKey)}
	p.page.onWidth = onWidth
	p.back = w.tips.button("", theme.NavigateBackIcon(), tipPageBack, func() { turn(-1) })
	p.next = w.tips.button("", theme.NavigateNextIcon(), tipPageNext, func() { turn(1) })
	p.at = newWord(colourDim, theme.SizeNameText, "")
	p.zoom = widget.NewButton(w.words.Say("Whole page"), func() {
		p.page.setWhole(!p.page.whole)
		p.zoom.SetText(w.words.Say(map[bool]words.Key{true: "Page width", false: "Whole page"}[p.page.whole]))
	})
	p.bar = container.NewHBox(p.back, p.at, p.next, gap(8), p.zoom)
	return p
}

// show puts page number, 0 for the first, of so many into view.
func (p *pageTurner) show(number, pages int, picture *image.RGBA, shape float64) {
	p.at.setText(p.words.Say("page %d of %d", number+1, pages))
	enable(&p.back.Button, number > 0)
	enable(&p.next.Button, number+1 < pages)
	p.page.show(picture, shape)
	if p.last != number {
		p.last = number
		p.page.scroll.ScrollToTop()
	}
}
