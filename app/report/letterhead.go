package report

import (
	"errors"
	"image"
	_ "image/gif"  // kinds of picture
	_ "image/jpeg" // that a letterhead
	_ "image/png"  // may be
	"io"
	"io/fs"
	"os"

	xdraw "golang.org/x/image/draw"

	texts "pavilight/app/words"
)

// Bounds of a letterhead: of the file, and of what it unpacks to; and how many pixels an
// edge of it is printed with.
const (
	mostLetterheadBytes  = 10 << 20
	mostLetterheadPixels = 40e6
	printedLetterhead    = 1600
)

// OpenLetterhead reads a picture (PNG, JPEG or GIF) that heads a report. It looks at the
// file's size before it reads it, and at the picture's before it unpacks it.
func OpenLetterhead(path string) (image.Image, error) {
	f, err := os.Open(path)
	if errors.Is(err, fs.ErrNotExist) {
		return nil, texts.Errorf("%s: there is no such file; check the name and the folder", path)
	}
	if err != nil {
		return nil, err
	}
	defer f.Close()
	info, err := f.Stat()
	if err != nil {
		return nil, err
	}
	if !info.Mode().IsRegular() {
		return nil, texts.Errorf("%s: this is no file; name a picture (PNG, JPEG or GIF)", path)
	}
	if info.Size() > mostLetterheadBytes {
		return nil, texts.Errorf("%s: the picture takes %.1f MB; use one of at most %d MB", path, float64(info.Size())/(1<<20), mostLetterheadBytes>>20)
	}
	return readLetterhead(f, path)
}

// readLetterhead reads a picture of sensible size.
func readLetterhead(f io.ReadSeeker, path string) (image.Image, error) {
	config, _, err := image.DecodeConfig(f)
	if err != nil {
		return nil, texts.Errorf("%s: this is no picture that can be read (%v); use PNG, JPEG or GIF", path, err)
	}
	if config.Width < 1 || config.Height < 1 || float64(config.Width)*float64(config.Height) > mostLetterheadPixels {
		return nil, texts.Errorf("%s: the picture has %d × %d pixels; use one of at most %.0f million", path, config.Width, config.Height, mostLetterheadPixels/1e6)
	}
	if _, err := f.Seek(0, io.SeekStart); err != nil {
		return nil, err
	}
	img, _, err := image.Decode(f)
	if err != nil {
		return nil, texts.Errorf("%s: the picture is damaged (%v); use another copy of it", path, err)
	}
	return printed(img), nil
}

// printed returns a picture on white, without transparency, no larger than it is printed.
func printed(img image.Image) image.Image {
	b := img.Bounds()
	k := min(1, printedLetterhead/float64(max(b.Dx(), b.Dy())))
	out := image.NewRGBA(image.Rect(0, 0, max(1, int(k*float64(b.Dx()))), max(1, int(k*float64(b.Dy())))))
	for i := range out.Pix {
		out.Pix[i] = 255
	}
	xdraw.CatmullRom.Scale(out, out.Rect, img, b, xdraw.Over, nil)
	return out
}
