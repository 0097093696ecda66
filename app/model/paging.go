package model

import (
	"image"

	"pavilight/app/drawing"
)

// paging is pages that are laid out, as they are printed, and the picture of the one in
// view.
type paging struct {
	Page    int         // in view, 0 for the first
	Picture *image.RGBA // of it, as wide as SetWidth says; nil before the first

	pages    []*drawing.Page
	width    int // of the picture, pixels
	painter  painter
	repaints func() // is told of a new picture or page
}

// Pages returns how many pages there are, 0 before they are laid out.
func (p *paging) Pages() int { return len(p.pages) }

// Shape returns the height of the page in view over its width, that of A4 before there is
// one.
func (p *paging) Shape() float64 {
	if len(p.pages) == 0 {
		return 297.0 / 210
	}
	page := p.pages[p.Page]
	return page.Height / page.Width
}

// Turn brings another page into view; beyond the ends it stays.
func (p *paging) Turn(page int) {
	page = max(0, min(page, len(p.pages)-1))
	if page != p.Page {
		p.Page = page
		p.paint()
		p.repaints()
	}
}

// mostPageWidth bounds the picture of a page, pixels.
const mostPageWidth = 3000

// SetWidth says how many pixels of the screen the page takes across.
func (p *paging) SetWidth(pixels int) {
	p.width = max(1, min(pixels, mostPageWidth))
	p.paint()
}

// show takes pages in place of those that there were, and keeps to the page in view.
func (p *paging) show(pages []*drawing.Page) {
	p.pages = pages
	p.Page = max(0, min(p.Page, len(pages)-1))
	p.paint()
}

// clear lets the pages and the picture go.
func (p *paging) clear() {
	p.pages, p.Picture = nil, nil
	p.painter.forget()
}

// paint has the page in view painted.
func (p *paging) paint() {
	if len(p.pages) == 0 {
		return
	}
	page := p.pages[p.Page]
	p.painter.paint(painting{page, p.width, func() *drawing.Page { return page }, func(img *image.RGBA, _ *drawing.Page) {
		p.Picture = img
		p.repaints()
	}})
}
