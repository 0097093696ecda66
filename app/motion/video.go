package motion

import (
	"bytes"
	"context"
	"errors"
	"fmt"
	"image"
	"image/png"
	"os"
	"os/exec"
	"path/filepath"
	"strconv"
	"strings"
)

// ErrNoEncoder tells that no program is installed that makes films.
var ErrNoEncoder = errors.New("the program ffmpeg is not installed; install it, or make a gif, an apng or numbered png")

// Encoder returns the path of the installed ffmpeg, or ErrNoEncoder.
func Encoder() (string, error) {
	path, err := exec.LookPath("ffmpeg")
	if err != nil {
		return "", ErrNoEncoder
	}
	return path, nil
}

// Video returns the pictures as a film of the kind "mp4" (H.264) or "webm" (VP9), made by
// an installed ffmpeg. After ctx is cancelled it returns the cause.
func Video(ctx context.Context, frames []*image.RGBA, perSecond int, kind string) ([]byte, error) {
	encoder, err := Encoder()
	if err != nil {
		return nil, err
	}
	folder, err := os.MkdirTemp("", "pavilight-film-")
	if err != nil {
		return nil, err
	}
	defer os.RemoveAll(folder)
	for i, f := range frames {
		if err := context.Cause(ctx); err != nil {
			return nil, err
		}
		var b bytes.Buffer
		if err := (&png.Encoder{CompressionLevel: png.BestSpeed}).Encode(&b, f); err != nil {
			return nil, err
		}
		if err := os.WriteFile(filepath.Join(folder, fmt.Sprintf("%04d.png", i)), b.Bytes(), 0o600); err != nil {
			return nil, err
		}
	}
	target := filepath.Join(folder, "film."+kind)
	args := []string{"-hide_banner", "-loglevel", "error", "-framerate", strconv.Itoa(perSecond), "-i", filepath.Join(folder, "%04d.png"),
		"-vf", "pad=ceil(iw/2)*2:ceil(ih/2)*2", "-pix_fmt", "yuv420p"} // what every player shows
	switch kind {
	case "mp4":
		args = append(args, "-c:v", "libx264", "-crf", "18", "-movflags", "+faststart")
	case "webm":
		args = append(args, "-c:v", "libvpx-vp9", "-crf", "24", "-b:v", "0")
	default:
		return nil, fmt.Errorf("films of the kind %q are not made; use mp4 or webm", kind)
	}
	cmd := exec.CommandContext(ctx, encoder, append(args, target)...)
	var said bytes.Buffer
	cmd.Stderr = &said
	if err := cmd.Run(); err != nil {
		if cause := context.Cause(ctx); cause != nil {
			return nil, cause
		}
		return nil, fmt.Errorf("ffmpeg could not make the %s: %w: %s", kind, err, strings.TrimSpace(said.String()))
	}
	return os.ReadFile(target)
}
