package model

import (
	"image"
	"sync"
)

// buffers lends the pictures of frames. Three sets are in use at most: one shown,
// one on its way to the window, one being painted. A set that was given back is
// lent again, for the window no longer reads it: it was replaced there before.
type buffers struct {
	mu   sync.Mutex
	free []pictures
}

type pictures = [Rows][]*image.RGBA

// mostSets is how many sets are kept for later.
const mostSets = 3

// take returns opaque-or-clear pictures, whatever they hold, of the size asked for.
func (b *buffers) take(columns, pixels int) pictures {
	b.mu.Lock()
	defer b.mu.Unlock()
	for len(b.free) > 0 {
		set := b.free[len(b.free)-1]
		b.free = b.free[:len(b.free)-1]
		if len(set[0]) == columns && columns > 0 && set[0][0].Rect.Dx() == pixels {
			return set
		} // a set of another size is dropped
	}
	var set pictures
	for i := range set {
		set[i] = make([]*image.RGBA, columns)
		for j := range set[i] {
			set[i][j] = image.NewRGBA(image.Rect(0, 0, pixels, pixels))
		}
	}
	return set
}

// giveBack takes the pictures of a frame that is not shown, or no longer.
func (b *buffers) giveBack(f *Frame) {
	b.mu.Lock()
	defer b.mu.Unlock()
	if len(b.free) < mostSets {
		b.free = append(b.free, f.Pictures)
	}
}
