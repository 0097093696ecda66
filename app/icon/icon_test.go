package icon

import (
	"bytes"
	"encoding/binary"
	"encoding/xml"
	"image/color"
	"image/png"
	"strings"
	"testing"
)

// TestPNG looks at places whose colour the drawing fixes, at several sizes.
func TestPNG(t *testing.T) {
	for _, size := range []int{16, 48, 256} {
		img, err := png.Decode(bytes.NewReader(PNG(size)))
		if err != nil {
			t.Fatal(err)
		}
		if got := img.Bounds().Size(); got.X != size || got.Y != size {
			t.Fatalf("got %v pixels, want %d on each side", got, size)
		}
		at := func(x, y float64) color.RGBA {
			c := color.RGBAModel.Convert(img.At(int(x*float64(size)/Side), int(y*float64(size)/Side)))
			return c.(color.RGBA)
		}
		if c := at(1, 62); c.A != 0 {
			t.Errorf("%d pixels: the corner is not transparent: %v", size, c)
		}
		if c := at(32, 30); c.A != 255 || c.R < 0xa0 || c.B < c.R {
			t.Errorf("%d pixels: the table is not a light, cool grey: %v", size, c)
		}
		if c := at(32, 47); c.A != 255 || int(c.R) < int(c.B)+0x30 {
			t.Errorf("%d pixels: the light is not yellow between its two mirrors: %v", size, c)
		}
	}
}

// TestSVG: the file is sound XML and holds every shape inside its square.
func TestSVG(t *testing.T) {
	var file struct {
		ViewBox  string `xml:"viewBox,attr"`
		Polygons []struct {
			Points string `xml:"points,attr"`
		} `xml:"polygon"`
	}
	if err := xml.Unmarshal(SVG(), &file); err != nil {
		t.Fatal(err)
	}
	if file.ViewBox != "0 0 64 64" || len(file.Polygons) != len(shapes()) {
		t.Errorf("got %d shapes in %q, want %d", len(file.Polygons), file.ViewBox, len(shapes()))
	}
	for i, s := range shapes() {
		if got := len(strings.Fields(file.Polygons[i].Points)); got != len(s.corners) {
			t.Errorf("shape %d has %d corners, want %d", i, got, len(s.corners))
		}
		for _, c := range s.corners {
			if c.x < 0 || c.y < 0 || c.x > Side || c.y > Side {
				t.Errorf("shape %d reaches out of the square: %v", i, c)
			}
		}
	}
}

// TestICO reads the file back by the published layout of Windows icon files.
func TestICO(t *testing.T) {
	sizes := []int{16, 256}
	file := ICO(sizes...)
	word := func(at int) int { return int(binary.LittleEndian.Uint16(file[at:])) }
	long := func(at int) int { return int(binary.LittleEndian.Uint32(file[at:])) }
	if word(0) != 0 || word(2) != 1 || word(4) != len(sizes) {
		t.Fatalf("head % x", file[:6])
	}
	for i, size := range sizes {
		entry := 6 + 16*i
		if int(file[entry]) != size%256 || int(file[entry+1]) != size%256 {
			t.Errorf("entry %d is of %d x %d", i, file[entry], file[entry+1])
		}
		length, offset := long(entry+8), long(entry+12)
		if offset+length > len(file) || !bytes.Equal(file[offset:offset+length], PNG(size)) {
			t.Errorf("entry %d does not hold the picture of %d pixels", i, size)
		}
	}
	if last := 6 + 16*(len(sizes)-1); long(last+12)+long(last+8) != len(file) {
		t.Error("the file does not end with its last picture")
	}
}
