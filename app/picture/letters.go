package picture

import (
	"fmt"
	"image"
	"image/draw"
	"strings"

	"golang.org/x/image/font"
	"golang.org/x/image/font/gofont/gobold"
	"golang.org/x/image/font/gofont/goregular"
	"golang.org/x/image/font/opentype"
	"golang.org/x/image/math/fixed"
)

// Sizes of letters, in pixels.
const (
	bodySize  = 14
	titleSize = 18
	lineStep  = 20 // from one line of body text to the next
)

// letters writes text into a picture.
type letters struct {
	dst         draw.Image
	body, title font.Face
}

func newLetters() (*letters, error) {
	body, err := face(goregular.TTF, bodySize)
	if err != nil {
		return nil, err
	}
	title, err := face(gobold.TTF, titleSize)
	if err != nil {
		return nil, err
	}
	return &letters{body: body, title: title}, nil
}

func face(ttf []byte, size float64) (font.Face, error) {
	parsed, err := opentype.Parse(ttf)
	if err != nil {
		return nil, fmt.Errorf("the font cannot be read: %w", err)
	}
	// At 72 dots an inch one point is one pixel.
	return opentype.NewFace(parsed, &opentype.FaceOptions{Size: size, DPI: 72, Hinting: font.HintingFull})
}

// align says which part of a text stands at the given place.
type align int

const (
	left align = iota
	middle
	right
)

// write sets s on the baseline y in the given level of grey.
func (l *letters) write(f font.Face, x, y int, a align, level uint8, s string) {
	width := font.MeasureString(f, s).Ceil()
	switch a {
	case middle:
		x -= width / 2
	case right:
		x -= width
	}
	drawer := font.Drawer{Dst: l.dst, Src: image.NewUniform(grey(level)), Face: f, Dot: fixed.P(x, y)}
	drawer.DrawString(s)
}

// cut shortens s until it is at most width pixels wide and marks the cut.
func cut(f font.Face, s string, width int) string {
	if font.MeasureString(f, s).Ceil() <= width {
		return s
	}
	runes := []rune(s)
	for len(runes) > 0 && font.MeasureString(f, string(runes)+"…").Ceil() > width {
		runes = runes[:len(runes)-1]
	}
	return string(runes) + "…"
}

// wrap breaks s between words into lines of at most width pixels. A word that is
// wider is cut.
func wrap(f font.Face, s string, width int) []string {
	var lines []string
	line := ""
	for word := range strings.FieldsSeq(s) {
		longer := strings.TrimLeft(line+" "+word, " ")
		if line != "" && font.MeasureString(f, longer).Ceil() > width {
			lines, line = append(lines, line), word
			continue
		}
		line = longer
	}
	if line != "" {
		lines = append(lines, line)
	}
	for i := range lines {
		lines[i] = cut(f, lines[i], width)
	}
	return lines
}
