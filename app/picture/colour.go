// Package picture turns maps of light into pictures: colour maps, painted fields,
// and whole pictures with scale and legend.
//
// Pictures are opaque sRGB. Row 0 of a field is its top row. Values run from 0 to 1;
// NaN stands for a pixel outside the stone's outline.
package picture

import (
	"image/color"
	"math"
)

// ColourMap gives every value from 0 to 1 a colour, perceived lightness growing
// with the value.
type ColourMap struct {
	Name    string
	Table   [256]color.RGBA // opaque; 0 first, 1 last
	Outside color.RGBA      // of a pixel outside the outline, opaque
}

// outside is the neutral grey around a stone: neither colour map has a neutral
// colour of its lightness.
const outside = 0xc8

// grey returns the opaque neutral colour of that level.
func grey(level uint8) color.RGBA { return color.RGBA{R: level, G: level, B: level, A: 255} }

// At returns the colour of v. A value below 0 or above 1 takes the colour of that
// end, NaN the grey outside.
func (m *ColourMap) At(v float64) color.RGBA {
	if math.IsNaN(v) {
		return m.Outside
	}
	return m.Table[step(v)]
}

// step returns the entry of the 256 that v falls on, 0 and 1 on the middle of the
// first and the last.
func step(v float64) int { return int(min(max(v, 0), 1)*255 + 0.5) }

// Cubehelix returns the colour map of leakage: dark violet over blue to pale cyan,
// lightness growing all the way, with no hue in common with Cividis at the same
// lightness, so that the two quantities are told apart at a glance.
//
// Source: D. A. Green, "A colour scheme for the display of astronomical intensity
// images", Bulletin of the Astronomical Society of India 39, 289 (2011), equation 2,
// with start 0.5, -0.4 rotations, hue 1.1 and gamma 1; the lightness runs from 0.06
// to 0.96 of its full range, so that neither end is black or white.
func Cubehelix() *ColourMap {
	const (
		start, rotations, hue = 0.5, -0.4, 1.1
		darkest, lightest     = 0.06, 0.96
	)
	m := &ColourMap{Name: "cubehelix", Outside: grey(outside)}
	for i := range m.Table {
		lambda := darkest + (lightest-darkest)*float64(i)/255
		phi := 2 * math.Pi * (start/3 + 1 + rotations*lambda)
		a := hue * lambda * (1 - lambda) / 2
		sin, cos := math.Sincos(phi)
		m.Table[i] = color.RGBA{
			R: level(lambda + a*(-0.14861*cos+1.78277*sin)),
			G: level(lambda + a*(-0.29227*cos-0.90649*sin)),
			B: level(lambda + a*1.97294*cos),
			A: 255,
		}
	}
	return m
}

// level rounds a channel from 0 to 1 to 8 bits, cutting off what lies outside.
func level(v float64) uint8 { return uint8(min(max(v, 0), 1)*255 + 0.5) }
