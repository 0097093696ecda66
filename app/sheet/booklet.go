package sheet

import (
	"fmt"

	"pavilight/app/drawing"
	"pavilight/app/stock"
	"pavilight/app/words"
)

// BookletTitle is the title of a booklet that nobody named.
const BookletTitle words.Key = "Cutting sheets"

// Booklet binds several sheets, which share paper, size of type and language, into one document
// with a page of contents in front.
func Booklet(title string, sheets []*Sheet) (*drawing.Document, error) {
	if len(sheets) == 0 {
		return nil, fmt.Errorf("a booklet needs a sheet")
	}
	var bound [][]*drawing.Page
	for _, s := range sheets {
		bound = append(bound, s.Pages())
	}
	l := &press{sheet: sheets[0], k: 1}
	if sheets[0].Large {
		l.k = 1.25
	}
	// The contents are set twice: their own length moves the numbers in them.
	length := 1
	for range 2 {
		l.pages = nil
		l.contents(title, sheets, bound, length)
		length = len(l.pages)
	}
	pages := l.pages
	for _, p := range bound {
		pages = append(pages, p...)
	}
	t := l.body()
	for i, page := range pages {
		y := l.sheet.Paper.Height - l.margin() + t.Leading()
		page.Write(t, pale(), drawing.Middle, pt(l.sheet.Paper.Width/2, y), fmt.Sprint(i+1))
	}
	return document(sheets, pages, title)
}

// contents sets the table of contents; the sheets start after the given number of
// pages.
func (l *press) contents(title string, sheets []*Sheet, bound [][]*drawing.Page, length int) {
	model := l.sheet
	plain := *model
	plain.LightModel = false // the banner belongs to its own sheet
	l.sheet = &plain
	defer func() { l.sheet = model }()
	in := l.sheet.Words
	l.start("", in.Say("Contents"))
	l.y += l.lines(l.title(), black(), l.left(), l.y, l.width(), title) + 1
	l.rule(l.y)
	l.y += 3
	number := length + 1
	for i, s := range sheets {
		name := l.tier().Wrap(s.Plan.Name, l.width()-15*l.k)
		if len(name) > 2 {
			name = append(name[:1], l.tier().Cut(name[1]+" "+name[2], l.width()-15*l.k))
		}
		l.need(float64(len(name))*l.tier().Leading() + l.body().Leading() + 2)
		l.page.Write(l.tier(), black(), drawing.Right, pt(l.right(), l.y+0.78*l.tier().Leading()), fmt.Sprint(number))
		for _, line := range name {
			l.say(l.tier(), black(), l.left(), l.y+0.78*l.tier().Leading(), line)
			l.y += l.tier().Leading()
		}
		what := in.Say("%s, %s, gear of %d, %d steps", stock.NameOf(in, s.Material),
			sizes(s.Measures.LengthMM, s.Measures.WidthMM, s.Measures.DepthMM), s.Machine.Gear, len(s.Rows))
		l.y += l.lines(l.body(), pale(), l.left(), l.y, l.width()-15*l.k, what) + 2
		number += len(bound[i])
	}
}
