package solid

import (
	"image"
	"image/color"
	"math"
)

// fill paints the whole of dst.
func fill(dst *image.RGBA, c color.RGBA) {
	row := dst.Pix[:4*dst.Rect.Dx()]
	for i := 0; i < len(row); i += 4 {
		row[i], row[i+1], row[i+2], row[i+3] = c.R, c.G, c.B, 255
	}
	for y := 1; y < dst.Rect.Dy(); y++ {
		copy(dst.Pix[y*dst.Stride:], row)
	}
}

// fillConvex paints every pixel whose middle lies in the convex polygon, whose
// corners are in pixels and may lie outside dst.
func fillConvex(dst *image.RGBA, ring [][2]float64, c color.RGBA) {
	top, bottom := math.Inf(1), math.Inf(-1)
	for _, p := range ring {
		top, bottom = min(top, p[1]), max(bottom, p[1])
	}
	first := max(0, int(math.Ceil(top-0.5)))
	last := min(dst.Rect.Dy()-1, int(math.Floor(bottom-0.5)))
	for y := first; y <= last; y++ {
		// Where does the middle of the row enter and leave the polygon?
		level := float64(y) + 0.5
		left, right := math.Inf(1), math.Inf(-1)
		for k, a := range ring {
			b := ring[(k+1)%len(ring)]
			if (a[1] <= level) == (b[1] <= level) {
				continue
			}
			x := a[0] + (level-a[1])/(b[1]-a[1])*(b[0]-a[0])
			left, right = min(left, x), max(right, x)
		}
		if left > right {
			continue
		}
		from := max(0, int(math.Ceil(left-0.5)))
		to := min(dst.Rect.Dx()-1, int(math.Floor(right-0.5)))
		row := dst.Pix[y*dst.Stride:]
		for x := from; x <= to; x++ {
			p := row[4*x : 4*x+4 : 4*x+4]
			p[0], p[1], p[2], p[3] = c.R, c.G, c.B, 255
		}
	}
}

// stroke draws a straight line with soft edges. A pixel takes as much of the
// colour as its middle is inside the line, over one pixel at the border.
func stroke(dst *image.RGBA, x0, y0, x1, y1, width float64, c color.RGBA) {
	dx, dy := x1-x0, y1-y0
	length := math.Hypot(dx, dy)
	if length == 0 || math.IsNaN(length) || math.IsInf(length, 0) {
		return
	}
	dx, dy = dx/length, dy/length
	reach := width/2 + 0.5
	// Walk along the longer side and cover the few pixels across.
	if math.Abs(dx) >= math.Abs(dy) {
		from := max(0, int(math.Floor(min(x0, x1)-reach)))
		to := min(dst.Rect.Dx()-1, int(math.Ceil(max(x0, x1)+reach)))
		half := reach / math.Abs(dx)
		for x := from; x <= to; x++ {
			middle := y0 + (float64(x)+0.5-x0)*dy/dx
			low, high := max(0, int(middle-half-0.5)), min(dst.Rect.Dy()-1, int(middle+half+0.5))
			for y := low; y <= high; y++ {
				dab(dst, x, y, x0, y0, dx, dy, length, reach, c)
			}
		}
		return
	}
	from := max(0, int(math.Floor(min(y0, y1)-reach)))
	to := min(dst.Rect.Dy()-1, int(math.Ceil(max(y0, y1)+reach)))
	half := reach / math.Abs(dy)
	for y := from; y <= to; y++ {
		middle := x0 + (float64(y)+0.5-y0)*dx/dy
		low, high := max(0, int(middle-half-0.5)), min(dst.Rect.Dx()-1, int(middle+half+0.5))
		for x := low; x <= high; x++ {
			dab(dst, x, y, x0, y0, dx, dy, length, reach, c)
		}
	}
}

// dab lays the line's colour over one pixel by how near the line passes.
func dab(dst *image.RGBA, x, y int, x0, y0, dx, dy, length, reach float64, c color.RGBA) {
	px, py := float64(x)+0.5-x0, float64(y)+0.5-y0
	along, across := px*dx+py*dy, math.Abs(px*dy-py*dx)
	beyond := max(0, -along, along-length)
	cover := reach - math.Hypot(across, beyond)
	if cover <= 0 {
		return
	}
	part := uint32(min(1, cover) * float64(c.A))
	p := dst.Pix[y*dst.Stride+4*x:]
	p[0] = mix(p[0], c.R, part)
	p[1] = mix(p[1], c.G, part)
	p[2] = mix(p[2], c.B, part)
}

// mix lays part/255 of over on under.
func mix(under, over uint8, part uint32) uint8 {
	return uint8((uint32(under)*(255-part) + uint32(over)*part + 127) / 255)
}

// blend returns a share of to in from, opaque.
func blend(from, to color.RGBA, share float64) color.RGBA {
	part := uint32(min(1, max(0, share)) * 255)
	return color.RGBA{mix(from.R, to.R, part), mix(from.G, to.G, part), mix(from.B, to.B, part), 255}
}
