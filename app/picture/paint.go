package picture

import "image"

// Paint paints a square field of the given number of pixels an edge, row by row
// from the top left, into dst. Where dst has another size, every pixel takes the
// nearest one of the field, so a coarse field fills a large picture with squares.
// It paints nothing if the field has not pixels × pixels values.
func Paint(dst *image.RGBA, field []float32, pixels int, cm *ColourMap) {
	size := dst.Rect.Size()
	if pixels <= 0 || len(field) != pixels*pixels || size.X <= 0 || size.Y <= 0 {
		return
	}
	for y := range size.Y {
		from := field[(y*pixels/size.Y)*pixels:][:pixels]
		row := dst.Pix[y*dst.Stride:][:4*size.X]
		for x := range size.X {
			v := from[x*pixels/size.X]
			c := cm.Outside
			if v == v { // not NaN
				c = cm.Table[step(float64(v))]
			}
			p := row[4*x : 4*x+4 : 4*x+4]
			p[0], p[1], p[2], p[3] = c.R, c.G, c.B, 255
		}
	}
}
