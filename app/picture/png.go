package picture

import (
	"image"
	"image/png"
	"io"
)

// EncodePNG writes the picture as PNG, quickly rather than small.
func EncodePNG(w io.Writer, img image.Image) error {
	return (&png.Encoder{CompressionLevel: png.BestSpeed}).Encode(w, img)
}
