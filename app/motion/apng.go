package motion

import (
	"bytes"
	"encoding/binary"
	"errors"
	"hash/crc32"
	"image"
	"image/png"
	"io"
)

// APNG writes the pictures as an animated PNG that goes on for ever, in all their colours.
// A program that knows no animation shows the first one. Source of the form: PNG
// Specification, third edition (W3C 2025), acTL, fcTL and fdAT.
func APNG(w io.Writer, frames []*image.RGBA, perSecond int) error {
	if len(frames) == 0 {
		return errors.New("an animation needs a picture")
	}
	out := &chunkWriter{w: w}
	sequence := uint32(0)
	parts := map[*image.RGBA]*pngParts{}
	for i, f := range frames {
		p := parts[f]
		if p == nil {
			var err error
			if p, err = split(f); err != nil {
				return err
			}
			parts[f] = p
		}
		if i == 0 {
			out.raw([]byte("\x89PNG\r\n\x1a\n"))
			out.chunk("IHDR", p.header)
			out.chunk("acTL", binary.BigEndian.AppendUint32(binary.BigEndian.AppendUint32(nil, uint32(len(frames))), 0))
		}
		control := binary.BigEndian.AppendUint32(nil, sequence)
		sequence++
		control = binary.BigEndian.AppendUint32(control, uint32(f.Rect.Dx()))
		control = binary.BigEndian.AppendUint32(control, uint32(f.Rect.Dy()))
		control = append(control, make([]byte, 8)...) // at the upper left corner
		control = binary.BigEndian.AppendUint16(control, 1)
		control = binary.BigEndian.AppendUint16(control, uint16(perSecond))
		out.chunk("fcTL", append(control, 0, 0)) // left as it is, and taking the place of the one before
		if i == 0 {
			out.chunk("IDAT", p.data)
			continue
		}
		out.chunk("fdAT", append(binary.BigEndian.AppendUint32(nil, sequence), p.data...))
		sequence++
	}
	out.chunk("IEND", nil)
	return out.err
}

// pngParts is what an animation takes from a single PNG.
type pngParts struct{ header, data []byte }

// split encodes a picture and takes the PNG apart. Every picture is opaque and of one
// size, so all have the same header.
func split(f *image.RGBA) (*pngParts, error) {
	var b bytes.Buffer
	if err := (&png.Encoder{CompressionLevel: png.DefaultCompression}).Encode(&b, f); err != nil {
		return nil, err
	}
	p := &pngParts{}
	rest := b.Bytes()[8:]
	for len(rest) >= 12 {
		n := binary.BigEndian.Uint32(rest)
		body := rest[8 : 8+n]
		switch string(rest[4:8]) {
		case "IHDR":
			p.header = body
		case "IDAT":
			p.data = append(p.data, body...)
		}
		rest = rest[12+n:]
	}
	return p, nil
}

// chunkWriter writes the chunks of a PNG.
type chunkWriter struct {
	w   io.Writer
	err error
}

func (c *chunkWriter) raw(b []byte) {
	if c.err == nil {
		_, c.err = c.w.Write(b)
	}
}

func (c *chunkWriter) chunk(kind string, body []byte) {
	c.raw(binary.BigEndian.AppendUint32(nil, uint32(len(body))))
	named := append([]byte(kind), body...)
	c.raw(named)
	c.raw(binary.BigEndian.AppendUint32(nil, crc32.ChecksumIEEE(named)))
}
