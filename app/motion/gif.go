package motion

import (
	"image"
	"image/color"
	"image/gif"
	"io"
	"sort"
)

// GIF writes the pictures as a GIF that goes on for ever. GIF knows 256 colours: those of
// all pictures are gathered into that many, each pixel takes the nearest, and nothing is
// dithered, so that places which stand still do not flicker.
func GIF(w io.Writer, frames []*image.RGBA, perSecond int) error {
	palette := gathered(frames)
	nearest := map[color.RGBA]uint8{}
	out := &gif.GIF{}
	done := map[*image.RGBA]*image.Paletted{}
	for i, f := range frames {
		p := done[f]
		if p == nil {
			p = image.NewPaletted(f.Rect, palette)
			for k := range p.Pix {
				c := color.RGBA{f.Pix[4*k], f.Pix[4*k+1], f.Pix[4*k+2], 255}
				index, ok := nearest[c]
				if !ok {
					index = uint8(palette.Index(c))
					nearest[c] = index
				}
				p.Pix[k] = index
			}
			done[f] = p
		}
		out.Image = append(out.Image, p)
		// Hundredths of a second, so that all together last as long as they should.
		out.Delay = append(out.Delay, (i+1)*100/perSecond-i*100/perSecond)
	}
	return gif.EncodeAll(w, out)
}

// mostColours is what a GIF holds.
const mostColours = 256

// coloursAt counts the pixels of a colour, the sums of its parts.
type colourCount struct {
	c color.RGBA
	n int
}

// gathered returns at most 256 colours for all pictures: all of them where they are no
// more, else the means of boxes of colours, of which the one with the most pixels times
// length is cut at its median until there are as many (median cut: P. Heckbert, "Color
// image quantization for frame buffer display", SIGGRAPH 1982).
func gathered(frames []*image.RGBA) color.Palette {
	counts := map[color.RGBA]int{}
	seen := map[*image.RGBA]bool{}
	for _, f := range frames {
		if seen[f] {
			continue
		}
		seen[f] = true
		for k := 0; k < len(f.Pix); k += 4 {
			counts[color.RGBA{f.Pix[k], f.Pix[k+1], f.Pix[k+2], 255}]++
		}
	}
	all := make([]colourCount, 0, len(counts))
	for c, n := range counts {
		all = append(all, colourCount{c, n})
	}
	sort.Slice(all, func(i, j int) bool { return key(all[i].c) < key(all[j].c) }) // a map has no order
	boxes := [][]colourCount{all}
	for len(boxes) < mostColours {
		best, worst := -1, 0.0
		for i, b := range boxes {
			if _, length := longest(b); len(b) > 1 && float64(length)*float64(pixels(b)) > worst {
				best, worst = i, float64(length)*float64(pixels(b))
			}
		}
		if best < 0 {
			break
		}
		a, b := cut(boxes[best])
		boxes[best] = a
		boxes = append(boxes, b)
	}
	var palette color.Palette
	for _, b := range boxes {
		palette = append(palette, mean(b))
	}
	return palette
}

func key(c color.RGBA) uint32 { return uint32(c.R)<<16 | uint32(c.G)<<8 | uint32(c.B) }

func channel(c color.RGBA, i int) int { return int([3]uint8{c.R, c.G, c.B}[i]) }

// longest returns the channel in which a box is longest, and its length.
func longest(box []colourCount) (which, length int) {
	for i := range 3 {
		low, high := 255, 0
		for _, c := range box {
			low, high = min(low, channel(c.c, i)), max(high, channel(c.c, i))
		}
		if high-low > length {
			which, length = i, high-low
		}
	}
	return which, length
}

func pixels(box []colourCount) (n int) {
	for _, c := range box {
		n += c.n
	}
	return n
}

// cut cuts a box of more than one colour across its longest channel, so that both parts
// have about as many pixels.
func cut(box []colourCount) (a, b []colourCount) {
	which, _ := longest(box)
	sort.SliceStable(box, func(i, j int) bool { return channel(box[i].c, which) < channel(box[j].c, which) })
	half, sum := pixels(box)/2, 0
	for i := range box[:len(box)-1] {
		if sum += box[i].n; sum >= half {
			return box[:i+1], box[i+1:]
		}
	}
	return box[:len(box)-1], box[len(box)-1:]
}

func mean(box []colourCount) color.RGBA {
	var sum [3]int
	n := pixels(box)
	for _, c := range box {
		for i := range sum {
			sum[i] += channel(c.c, i) * c.n
		}
	}
	return color.RGBA{uint8((sum[0] + n/2) / n), uint8((sum[1] + n/2) / n), uint8((sum[2] + n/2) / n), 255}
}
