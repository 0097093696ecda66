package model

import (
	"image"
	"sync"

	"pavilight/app/drawing"
)

// painter paints pages on another goroutine, one at a time. Of the pages that are wanted
// while one is painted only the newest is painted next. Its methods run on the window's
// goroutine.
type painter struct {
	do   func(func())
	open *sync.WaitGroup
	busy bool
	want painting
	done painting // the last that was painted
}

// painting is a page to be painted. Key and width tell one from another.
type painting struct {
	key   any
	width int                  // pixels
	draw  func() *drawing.Page // runs on the other goroutine
	took  func(img *image.RGBA, page *drawing.Page)
}

func (p painting) same(o painting) bool { return p.key == o.key && p.width == o.width }

// paint wants a picture, unless it is what was painted last or is on its way.
func (p *painter) paint(w painting) {
	if w.width <= 0 || w.same(p.want) {
		return
	}
	p.want = w
	p.next()
}

func (p *painter) next() {
	if p.busy || p.want.draw == nil || p.want.same(p.done) {
		return
	}
	p.busy = true
	now := p.want
	p.open.Go(func() {
		page := now.draw()
		img := page.Raster(float64(now.width) / page.Width)
		p.do(func() {
			p.busy, p.done = false, now
			if now.same(p.want) {
				now.took(img, page)
			}
			p.next()
		})
	})
}

// forget has the next wish painted whatever was painted before.
func (p *painter) forget() { p.want, p.done = painting{}, painting{} }
