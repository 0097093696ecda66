package trace

import (
	"bufio"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/gems"
)

// Bounds on what is read. A picture wider than keptWide is averaged down as its rows
// come in, so a file claims no more memory than keptWide × keptWide/2 texels and one row.
const (
	mostHeader = 64 << 10 // bytes
	mostWide   = 16384    // texels
	keptWide   = 2048     // 0.18° a texel
)

// ReadPanorama reads the surroundings from a Radiance picture (.hdr: RGBE, run lengths
// new or old, or none) that unrolls the whole sphere, twice as wide as high. Its
// top row is the zenith, which is the eye unless one is given as to FindLight. Looking
// from the zenith, the middle column lies toward the top of the picture of the stone, and
// columns run clockwise.
//
// Red, green and blue are taken as those of sRGB and become smooth spectra, see
// primarySpectra; equal parts are D65. EXPOSURE and COLORCORR are left as they are in the
// pixels: the picture counts as it looks, and its level is set so that a white
// diffuser facing the eye has luminance 1. What lies below the picture's plane is cut off.
//
// Errors name the file, the line or the row, and what to do. A file cut short is an
// error that wraps io.ErrUnexpectedEOF.
func ReadPanorama(r io.Reader, file string, zenith ...mgl64.Vec3) (*Light, error) {
	up := mgl64.Vec3{0, 0, 1}
	if len(zenith) > 0 {
		up = zenith[0]
	}
	turned, err := zenithTo(up)
	if err != nil {
		return nil, fmt.Errorf("%s: %w", file, err)
	}
	p, err := readTexels(bufio.NewReaderSize(r, 1<<16))
	if err != nil {
		return nil, fmt.Errorf("%s: %w", file, err)
	}
	p.toSky = turned.Transpose()
	d65, err := FindIlluminant("D65")
	if err != nil {
		return nil, err
	}
	p.received = p.receive()
	p.luminances = primaryLuminances(&d65)
	l, err := newLight(file, "the user's panorama; its colours as smooth spectra", "D65", p)
	if err != nil {
		return nil, fmt.Errorf("%s: the picture is black above the plane of the stone's picture; "+
			"use another, or turn its zenith", file)
	}
	return l, nil
}

// panorama is a picture of the whole sphere, row 0 about the zenith.
type panorama struct {
	wide, high int
	texels     []float32  // red, green and blue in turn, row by row
	toSky      mgl64.Mat3 // from the viewer's frame to the panorama's, +Z its zenith, +Y its middle column
	received   [3]float64 // what a plane facing the eye receives of each primary, over π
	luminances [3]float64 // of the primaries
}

func (p *panorama) texel(d mgl64.Vec3) []float32 {
	row := int(math.Acos(max(-1, min(1, d[2]))) / math.Pi * float64(p.high))
	column := int((0.5 + math.Atan2(d[0], d[1])/(2*math.Pi)) * float64(p.wide))
	i := min(row, p.high-1)*p.wide + min(column, p.wide-1)
	return p.texels[3*i : 3*i+3]
}

func (p *panorama) luminance(from mgl64.Vec3) float64 {
	t := p.texel(p.toSky.Mul3x1(from))
	return float64(t[0])*p.luminances[0] + float64(t[1])*p.luminances[1] + float64(t[2])*p.luminances[2]
}

func (p *panorama) radiance(from mgl64.Vec3, w gems.Wavelength) float64 {
	t, primaries := p.texel(p.toSky.Mul3x1(from)), primariesAt(w)
	return float64(t[0])*primaries[0] + float64(t[1])*primaries[1] + float64(t[2])*primaries[2]
}

func (p *panorama) illuminance() float64 {
	return p.received[0]*p.luminances[0] + p.received[1]*p.luminances[1] + p.received[2]*p.luminances[2]
}

func (p *panorama) under(s *Illuminant) shape {
	other := *p
	other.luminances = primaryLuminances(s)
	return &other
}

// receive adds up the texels times the cosine to the eye. Texels are split so that the
// cosine hardly changes over a part.
func (p *panorama) receive() (sum [3]float64) {
	const leastRows = 1024
	split := (leastRows + p.high - 1) / p.high
	rows, columns := p.high*split, p.wide*split
	eye := p.toSky.Mul3x1(mgl64.Vec3{0, 0, 1})
	across := make([]float64, columns) // the part of the cosine that turns with the column
	for j := range across {
		sin, cos := math.Sincos((float64(j)+0.5)/float64(columns)*2*math.Pi - math.Pi)
		across[j] = sin*eye[0] + cos*eye[1]
	}
	for i := range rows {
		a, b := math.Pi*float64(i)/float64(rows), math.Pi*float64(i+1)/float64(rows)
		sin, cos := math.Sincos((a + b) / 2)
		weight := (math.Cos(a) - math.Cos(b)) * 2 / float64(columns)
		for j, s := range across {
			if c := cos*eye[2] + sin*s; c > 0 {
				t := 3 * (i/split*p.wide + j/split)
				for k := range sum {
					sum[k] += weight * c * float64(p.texels[t+k])
				}
			}
		}
	}
	return sum
}

// readTexels reads a picture's header and rows.
func readTexels(r *bufio.Reader) (*panorama, error) {
	wide, high, err := readHeader(r)
	if err != nil {
		return nil, err
	}
	p := &panorama{wide: min(wide, keptWide), high: min(high, keptWide/2)}
	row := make([]byte, 4*wide)
	sums := make([]float64, 3*p.wide)
	counts := make([]float64, p.wide)
	kept := 0 // the row that is being averaged
	flush := func() {
		for i := range p.wide {
			for k := range 3 {
				p.texels = append(p.texels, float32(sums[3*i+k]/counts[i]))
			}
		}
		clear(sums)
		clear(counts)
	}
	for y := range high {
		if err := readRow(r, row); err != nil {
			return nil, fmt.Errorf("row %d of %d: %w", y+1, high, err)
		}
		if into := y * p.high / high; into != kept {
			flush()
			kept = into
		}
		for x := range wide {
			i := x * p.wide / wide
			rgb := decode(row[4*x : 4*x+4])
			for k, v := range rgb {
				sums[3*i+k] += v
			}
			counts[i]++
		}
	}
	flush()
	return p, nil
}

// decode returns the linear parts of a pixel: a mantissa each and a common exponent.
// G. Ward, Real pixels, in Graphics Gems II (1991).
func decode(p []byte) (rgb [3]float64) {
	if p[3] == 0 {
		return rgb
	}
	unit := math.Ldexp(1, int(p[3])-128-8)
	for k := range rgb {
		rgb[k] = (float64(p[k]) + 0.5) * unit
	}
	return rgb
}

// readHeader reads up to and with the line that gives the size.
func readHeader(r *bufio.Reader) (wide, high int, err error) {
	left := mostHeader
	for number := 1; ; number++ {
		line, err := readLine(r, &left)
		if err != nil {
			return 0, 0, fmt.Errorf("line %d: %w", number, err)
		}
		if number == 1 {
			if line != "#?RADIANCE" && line != "#?RGBE" {
				return 0, 0, errors.New(`line 1: this is no Radiance picture, which begins with "#?RADIANCE"; ` +
					"use a .hdr panorama")
			}
			continue
		}
		if line == "" {
			break
		}
		if err := checkHeaderLine(line); err != nil {
			return 0, 0, fmt.Errorf("line %d: %w", number, err)
		}
	}
	line, err := readLine(r, &left)
	if err != nil {
		return 0, 0, fmt.Errorf("size: %w", err)
	}
	words := strings.Fields(line)
	if len(words) != 4 || words[0] != "-Y" || words[2] != "+X" {
		return 0, 0, fmt.Errorf("size %q: not of the form \"-Y height +X width\"; "+
			"store the picture upright and unmirrored", clip(line))
	}
	high, errHigh := strconv.Atoi(words[1])
	wide, errWide := strconv.Atoi(words[3])
	switch {
	case errHigh != nil || errWide != nil || wide < 2 || high < 1:
		return 0, 0, fmt.Errorf("size %q: not two whole numbers over 0", clip(line))
	case wide > mostWide || high > mostWide:
		return 0, 0, fmt.Errorf("size %d × %d: over %d × %d; scale the picture down",
			wide, high, mostWide, mostWide/2)
	case wide != 2*high:
		return 0, 0, fmt.Errorf("size %d × %d: a panorama of the whole sphere is twice as wide as high; "+
			"use an equirectangular picture", wide, high)
	}
	return wide, high, nil
}

// checkHeaderLine refuses what would change the meaning of the pixels.
func checkHeaderLine(line string) error {
	key, value, ok := strings.Cut(line, "=")
	if !ok {
		return nil // a command that made the picture
	}
	value = strings.TrimSpace(value)
	switch strings.TrimSpace(key) {
	case "FORMAT":
		if value != "32-bit_rle_rgbe" {
			return fmt.Errorf("FORMAT %q is not read; store the picture as 32-bit_rle_rgbe", clip(value))
		}
	case "PRIMARIES":
		if !nearPrimaries(value) {
			return fmt.Errorf("PRIMARIES %q are not those of sRGB; convert the picture to sRGB", clip(value))
		}
	}
	return nil
}

// nearPrimaries reports whether eight chromaticities name the primaries of sRGB, to
// within what the format's own older ones differ by. White is free: equal parts
// are white here.
func nearPrimaries(value string) bool {
	const slack = 0.011
	words := strings.Fields(value)
	if len(words) != 8 {
		return false
	}
	for i, want := range [...]float64{0.640, 0.330, 0.300, 0.600, 0.150, 0.060} {
		if v, err := strconv.ParseFloat(words[i], 64); err != nil || !(math.Abs(v-want) <= slack) {
			return false
		}
	}
	return true
}

// readLine reads a line without its end, taking its bytes from what is left of the
// header's bound.
func readLine(r *bufio.Reader, left *int) (string, error) {
	var line []byte
	for {
		b, err := r.ReadByte()
		if err != nil {
			return "", cutShort(err)
		}
		if *left--; *left < 0 {
			return "", fmt.Errorf("the header is longer than %d KiB; this is hardly a picture", mostHeader>>10)
		}
		if b == '\n' {
			return strings.TrimSuffix(string(line), "\r"), nil
		}
		line = append(line, b)
	}
}

// clip keeps what a file wrote short enough for a message.
func clip(s string) string {
	const most = 60
	if len(s) > most {
		return s[:most] + "..."
	}
	return s
}

// cutShort turns the end of the file into an error that says so.
func cutShort(err error) error {
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return fmt.Errorf("the file is cut short; fetch or store it anew: %w", io.ErrUnexpectedEOF)
	}
	return err
}

// The shortest and the longest row that may be stored with the newer run lengths.
const leastRuns, mostRuns = 8, 0x7fff

// readRow reads one row of pixels, four bytes each.
func readRow(r *bufio.Reader, row []byte) error {
	wide := len(row) / 4
	var first [4]byte
	if _, err := io.ReadFull(r, first[:]); err != nil {
		return cutShort(err)
	}
	if wide < leastRuns || wide > mostRuns || first[0] != 2 || first[1] != 2 || first[2] >= 0x80 {
		return readOldRow(r, row, first)
	}
	if stated := int(first[2])<<8 | int(first[3]); stated != wide {
		return fmt.Errorf("the row says it is %d pixels wide, the header %d; "+
			"the file is damaged, store it anew", stated, wide)
	}
	// The four parts of all pixels follow one another, each as runs and as plain stretches.
	for part := range 4 {
		for x := 0; x < wide; {
			count, err := r.ReadByte()
			if err != nil {
				return cutShort(err)
			}
			run := count > 128
			n := int(count)
			if run {
				n -= 128
			}
			if n == 0 || x+n > wide {
				return badRun(x, n)
			}
			var b byte
			for i := range n {
				if i == 0 || !run {
					if b, err = r.ReadByte(); err != nil {
						return cutShort(err)
					}
				}
				row[4*(x+i)+part] = b
			}
			x += n
		}
	}
	return nil
}

// badRun is the error of a run of n pixels from pixel x on that is empty or too long.
func badRun(x, n int) error {
	return fmt.Errorf("pixel %d: a run of %d pixels does not fit; the file is damaged, store it anew", x+1, n)
}

// readOldRow reads a row without runs, or with those of the format's first version: a
// pixel with mantissas of 1, which no other pixel has, repeats the one before it as
// often as its exponent says; several in turn are the digits of one number, base 256,
// lowest first.
func readOldRow(r *bufio.Reader, row []byte, first [4]byte) error {
	wide := len(row) / 4
	pixel, shift := first, 0
	for x := 0; ; {
		if pixel[0] == 1 && pixel[1] == 1 && pixel[2] == 1 {
			n := int(pixel[3]) << shift
			if x == 0 || x+n > wide {
				return badRun(x, n)
			}
			for range n {
				copy(row[4*x:4*x+4], row[4*x-4:4*x])
				x++
			}
			if shift < 16 {
				shift += 8
			}
		} else {
			copy(row[4*x:], pixel[:])
			x++
			shift = 0
		}
		if x == wide {
			return nil
		}
		if _, err := io.ReadFull(r, pixel[:]); err != nil {
			return cutShort(err)
		}
	}
}
