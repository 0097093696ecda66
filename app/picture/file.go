package picture

import (
	"image"
	"image/png"
	"os"
	"path/filepath"
)

// WritePNG writes the picture to a file that is either complete or, after an error,
// what it was before: it writes beside it and renames.
func WritePNG(path string, img image.Image) (err error) {
	f, err := os.CreateTemp(filepath.Dir(path), "."+filepath.Base(path)+".*")
	if err != nil {
		return err
	}
	defer func() {
		if err != nil {
			f.Close()
			os.Remove(f.Name())
		}
	}()
	if err = (&png.Encoder{CompressionLevel: png.BestSpeed}).Encode(f, img); err != nil {
		return err
	}
	if err = f.Chmod(0o644); err != nil {
		return err
	}
	if err = f.Sync(); err != nil {
		return err
	}
	if err = f.Close(); err != nil {
		return err
	}
	return os.Rename(f.Name(), path)
}
