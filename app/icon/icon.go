// Package icon draws the program's icon: a stone with seven-fold crown seen from the
// table, and one path of light that comes in, is mirrored twice and comes back out.
//
// Frame. The drawing is a square of Side units; the origin is its upper left corner,
// +x runs right and +y down. What is not drawn on is transparent.
package icon

import (
	"bytes"
	"encoding/binary"
	"fmt"
	"image"
	"image/color"
	"image/png"
	"math"
	"strings"

	"golang.org/x/image/vector"
)

// Side is the side of the square that the icon is drawn in, in units of the drawing.
const Side = 64

type point struct{ x, y float64 }

// shape is a filled polygon.
type shape struct {
	ink     color.RGBA
	corners []point
}

const (
	folds       = 7
	middle      = Side / 2
	outlineSize = 30.0 // radius of the outline's corners
	tableSize   = 15.5 // radius of the table's corners
	edgeWidth   = 1.6  // of the line around the stone
	pathWidth   = 3.4  // of the light
	pathMargin  = 1.0  // of the dark line on both sides of the light
)

// shapes returns the drawing from back to front.
func shapes() []shape {
	outline, table := ring(outlineSize, 0), ring(tableSize, 0.5)
	all := []shape{{edgeInk(), outline}}
	inner := ring(outlineSize-edgeWidth, 0)
	for k := range folds {
		next := (k + 1) % folds
		all = append(all,
			facet(inner[k], inner[next], table[k]),
			facet(table[k], table[next], inner[next]))
	}
	all = append(all, shape{color.RGBA{0xb4, 0xc0, 0xc4, 255}, table})
	// In from the upper left, mirrored twice, out to the upper right.
	light := []point{{6, 3}, {26, 47}, {38, 47}, {58, 3}}
	return append(all,
		shape{edgeInk(), bent(light, pathWidth/2+pathMargin)},
		shape{color.RGBA{0xff, 0xd0, 0x5c, 255}, bent(light, pathWidth/2)})
}

func edgeInk() color.RGBA { return color.RGBA{0x1d, 0x26, 0x2a, 255} }

// ring returns the corners of a regular polygon around the middle, the first at the
// top turned by a share of one step.
func ring(radius, turned float64) []point {
	corners := make([]point, folds)
	for k := range corners {
		sin, cos := math.Sincos((float64(k) + turned) * 2 * math.Pi / folds)
		corners[k] = point{middle + radius*sin, middle - radius*cos}
	}
	return corners
}

// facet returns a crown facet, lighter the more it faces the upper left.
func facet(corners ...point) shape {
	var x, y float64
	for _, c := range corners {
		x, y = x+c.x/float64(len(corners)), y+c.y/float64(len(corners))
	}
	x, y = (x-middle)/outlineSize, (y-middle)/outlineSize
	facing := -(x*0.6 + y*0.8) / math.Hypot(x, y) // 1 toward the light, -1 away from it
	level := 0.5 + 0.36*facing
	between := func(dark, light float64) uint8 { return uint8(math.Round(dark + (light-dark)*level)) }
	return shape{color.RGBA{between(0x38, 0xd8), between(0x58, 0xe6), between(0x62, 0xea), 255}, corners}
}

// bent returns a line of the given half width through the points as one polygon, with
// mitred corners and square ends.
func bent(line []point, half float64) []point {
	var left, right []point
	for i, p := range line {
		before, after := line[max(i-1, 0)], line[min(i+1, len(line)-1)]
		if i == 0 {
			before = point{2*p.x - after.x, 2*p.y - after.y}
		}
		if i == len(line)-1 {
			after = point{2*p.x - before.x, 2*p.y - before.y}
		}
		n, m := across(before, p), across(p, after)
		// The mitre of two offset lines: (n+m)/(1+n.m), of unit length to either line.
		scale := half / (1 + n.x*m.x + n.y*m.y)
		d := point{(n.x + m.x) * scale, (n.y + m.y) * scale}
		left, right = append(left, point{p.x + d.x, p.y + d.y}), append(right, point{p.x - d.x, p.y - d.y})
	}
	for i := len(right) - 1; i >= 0; i-- {
		left = append(left, right[i])
	}
	return left
}

// across returns the unit vector across the way from a to b.
func across(a, b point) point {
	l := math.Hypot(b.x-a.x, b.y-a.y)
	return point{(a.y - b.y) / l, (b.x - a.x) / l}
}

// Image returns the icon with the given number of pixels to a side.
func Image(size int) *image.RGBA {
	img := image.NewRGBA(image.Rect(0, 0, size, size))
	scale := float32(size) / Side
	r := vector.NewRasterizer(size, size)
	for _, s := range shapes() {
		r.Reset(size, size)
		for i, c := range s.corners {
			x, y := float32(c.x)*scale, float32(c.y)*scale
			if i == 0 {
				r.MoveTo(x, y)
			} else {
				r.LineTo(x, y)
			}
		}
		r.ClosePath()
		r.Draw(img, img.Rect, image.NewUniform(s.ink), image.Point{})
	}
	return img
}

// PNG returns the icon as a PNG file with the given number of pixels to a side.
func PNG(size int) []byte {
	var b bytes.Buffer
	if err := png.Encode(&b, Image(size)); err != nil {
		panic(err) // neither the picture nor a write to memory can be at fault
	}
	return b.Bytes()
}

// SVG returns the icon as an SVG 1.1 file.
func SVG() []byte {
	var b bytes.Buffer
	fmt.Fprintf(&b, `<svg xmlns="http://www.w3.org/2000/svg" width="%[1]d" height="%[1]d" viewBox="0 0 %[1]d %[1]d">`+"\n", Side)
	for _, s := range shapes() {
		places := make([]string, len(s.corners))
		for i, c := range s.corners {
			places[i] = fmt.Sprintf("%.3f,%.3f", c.x, c.y)
		}
		fmt.Fprintf(&b, `<polygon fill="#%02x%02x%02x" points="%s"/>`+"\n", s.ink.R, s.ink.G, s.ink.B, strings.Join(places, " "))
	}
	b.WriteString("</svg>\n")
	return b.Bytes()
}

// ICO returns the icon as a Windows icon file that holds a PNG of each size, 256 at
// most. Layout: ICONDIR and ICONDIRENTRY of the Windows resource formats (little-endian).
func ICO(sizes ...int) []byte {
	var head, body bytes.Buffer
	write := func(values ...any) {
		for _, v := range values {
			binary.Write(&head, binary.LittleEndian, v) // cannot fail: memory, fixed sizes
		}
	}
	write(uint16(0), uint16(1), uint16(len(sizes))) // reserved; icons; how many
	offset := 6 + 16*len(sizes)
	for _, size := range sizes {
		picture := PNG(size)
		write(uint8(size), uint8(size), uint8(0), uint8(0)) // 256 wraps to 0, which means it
		write(uint16(1), uint16(32), uint32(len(picture)), uint32(offset+body.Len()))
		body.Write(picture)
	}
	return append(head.Bytes(), body.Bytes()...)
}
