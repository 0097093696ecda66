package facets

import (
	"bufio"
	"bytes"
	"errors"
	"fmt"
	"io"
	"math"
	"path/filepath"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// Limits of a scan file, checked before anything is set aside for what a header promises.
const (
	// MaxScanTriangles is the largest mesh that is read: five times a fine scan of a stone.
	MaxScanTriangles = 1_000_000
	// maxScanBytes bounds a text scan: some 250 bytes a triangle in the wordiest format.
	maxScanBytes = 256 << 20
	// maxScanLine bounds one line of a text format.
	maxScanLine = 64 << 10
	// maxCoordinate, in file units: beyond it the differences of float32 numbers say nothing about a stone.
	maxCoordinate = 1e6
)

// rawMesh is what a file holds: corners as written and triangles between them.
type rawMesh struct {
	format    string // in words, for the report
	points    []mgl64.Vec3
	triangles [][3]int32
	binary32  bool // coordinates were stored as float32
	digits    int  // most significant digits seen in a text coordinate
	notes     []string
}

// resolution returns the step between neighbouring numbers of the file at its
// largest coordinate, in file units: one unit in the last place of what was
// stored or, in a text file, of what was printed.
func (m *rawMesh) resolution() float64 {
	largest := 0.0
	for _, p := range m.points {
		largest = max(largest, math.Abs(p[0]), math.Abs(p[1]), math.Abs(p[2]))
	}
	if largest == 0 {
		return 0
	}
	// A float32 has a 24-bit significand, a float64 one of 53 bits.
	ulp := math.Ldexp(largest, -52)
	if m.binary32 || m.digits >= digitsOfFloat32 && m.holdsFloat32() {
		ulp = math.Ldexp(largest, -23)
	} else if m.digits > 0 && m.digits < 16 && !m.plainNumbers() {
		ulp = math.Pow(10, math.Floor(math.Log10(largest))+1-float64(m.digits))
	}
	return ulp
}

// plainNumbers reports whether the file's numbers are so short, as in a block of 4 by
// 3 by 2.5, that they are the corners themselves: nobody rounds a measurement to two
// digits, or a whole one to three.
func (m *rawMesh) plainNumbers() bool {
	if m.digits > 3 {
		return false
	}
	for _, p := range m.points {
		for _, x := range p {
			if m.digits == 3 && x != math.Trunc(x) {
				return false
			}
		}
	}
	return true
}

// digitsOfFloat32 is the number of digits that print every float32 apart (IEEE 754-2019, 5.12.2).
const digitsOfFloat32 = 9

// holdsFloat32 reports whether every coordinate is a float32 that was printed
// with more digits than it has, as many programs do.
func (m *rawMesh) holdsFloat32() bool {
	for _, p := range m.points {
		for _, x := range p {
			// Nine digits leave up to 5e-9 of the number, a hundredth of a float32's step.
			if math.Abs(float64(float32(x))-x) > 5e-9*math.Abs(x) {
				return false
			}
		}
	}
	return true
}

// scanReader reads one scan, counting bytes and lines so that a fault can name its place.
type scanReader struct {
	buf    *bufio.Reader
	file   string
	offset int64
	line   int
	long   []byte // room for a line joined from several
	field  []byte // last number of a text PLY as written
}

func newScanReader(r io.Reader, file string) *scanReader {
	return &scanReader{buf: bufio.NewReaderSize(r, maxScanLine), file: file}
}

// fault names a place by line in a text file.
func (s *scanReader) fault(got, why, remedy string) *Fault {
	return &Fault{File: s.file, Line: s.line, Field: "scan", Got: clip(got), Why: why, Remedy: remedy}
}

// faultAt names a place by byte in a binary file.
func (s *scanReader) faultAt(offset int64, got, why, remedy string) *Fault {
	return &Fault{File: s.file, Field: "byte " + strconv.FormatInt(offset, 10), Got: clip(got), Why: why,
		Remedy: remedy}
}

// clip shortens what is quoted from a file to what a person reads.
func clip(s string) string {
	const most = 60
	if len(s) > most {
		return s[:most] + "..."
	}
	return s
}

const remedyTruncated = "the file is cut short: copy or export it again"

// nextLine returns the next line without its line ending and surrounding
// blanks, valid until the next call; io.EOF after the last.
func (s *scanReader) nextLine() ([]byte, error) {
	text, err := s.buf.ReadSlice('\n')
	s.offset += int64(len(text))
	if len(text) > 0 {
		s.line++
	}
	switch {
	case errors.Is(err, bufio.ErrBufferFull):
		return nil, s.fault("", fmt.Sprintf("a line is longer than %d bytes", maxScanLine),
			"this is not a text scan; give the file the ending of its format (.stl, .obj, .ply)")
	case err != nil && !errors.Is(err, io.EOF):
		return nil, fmt.Errorf("%s: %w", s.file, err)
	case len(text) == 0:
		return nil, io.EOF
	case s.offset > maxScanBytes:
		return nil, s.fault("", fmt.Sprintf("the file is larger than %d MiB", maxScanBytes>>20),
			"thin the mesh or export it as binary")
	}
	return bytes.TrimSpace(text), nil
}

// readFull fills b or returns a fault that names the byte at which the file ended.
func (s *scanReader) readFull(b []byte, what string) error {
	n, err := io.ReadFull(s.buf, b)
	s.offset += int64(n)
	if errors.Is(err, io.EOF) || errors.Is(err, io.ErrUnexpectedEOF) {
		return s.faultAt(s.offset, "", "the file ends within "+what, remedyTruncated)
	}
	if err != nil {
		return fmt.Errorf("%s: %w", s.file, err)
	}
	if s.offset > maxScanBytes {
		return s.faultAt(s.offset, "", fmt.Sprintf("the file is larger than %d MiB", maxScanBytes>>20),
			"thin the mesh")
	}
	return nil
}

// coordinate parses one number of a text format and remembers how finely it was printed.
func (s *scanReader) coordinate(m *rawMesh, field []byte) (float64, error) {
	v, err := strconv.ParseFloat(string(field), 64)
	if err != nil || math.IsNaN(v) || math.IsInf(v, 0) {
		return 0, s.fault(string(field), "this is not a number",
			"write the coordinate as a decimal number such as 1.25")
	}
	if math.Abs(v) > maxCoordinate {
		return 0, s.fault(string(field), fmt.Sprintf("a coordinate beyond %g cannot belong to a stone",
			maxCoordinate),
			"export the mesh in millimetres")
	}
	if m.digits < 17 {
		m.digits = max(m.digits, significantDigits(field))
	}
	return v, nil
}

// significantDigits counts the digits of a decimal number from its first that is not zero, exponent aside.
func significantDigits(field []byte) int {
	n := 0
	for _, c := range field {
		switch {
		case c == 'e' || c == 'E':
			return n
		case c >= '1' && c <= '9', c == '0' && n > 0:
			n++
		}
	}
	return n
}

// checkBinary refuses what no stone holds; x is one coordinate that stood at offset.
func (s *scanReader) checkBinary(x float64, offset int64) error {
	if math.IsNaN(x) || math.IsInf(x, 0) {
		return s.faultAt(offset, strconv.FormatFloat(x, 'g', -1, 64), "a coordinate is not a number",
			"export the mesh again; the file is damaged or of another format")
	}
	if math.Abs(x) > maxCoordinate {
		return s.faultAt(offset, strconv.FormatFloat(x, 'g', 6, 64),
			fmt.Sprintf("a coordinate beyond %g cannot belong to a stone", maxCoordinate),
			"export the mesh in millimetres; the file may be damaged or of another format")
	}
	return nil
}

// polygon adds a polygon of the file as a fan of triangles.
func (m *rawMesh) polygon(corners []int32) bool {
	for i := 2; i < len(corners); i++ {
		if len(m.triangles) >= MaxScanTriangles {
			return false
		}
		m.triangles = append(m.triangles, [3]int32{corners[0], corners[i-1], corners[i]})
	}
	return true
}

const remedyThin = "thin the mesh; a scan of a cut stone needs far fewer"

func whyTooMany() string { return fmt.Sprintf("more than %d triangles", MaxScanTriangles) }

// readMesh finds out the format, by content first and by the file's ending
// where the content leaves it open, and reads the mesh.
func readMesh(r io.Reader, file string) (*rawMesh, error) {
	s := newScanReader(r, file)
	head, err := s.buf.Peek(1024)
	if err != nil && !errors.Is(err, io.EOF) {
		return nil, fmt.Errorf("%s: %w", file, err)
	}
	if len(head) == 0 {
		return nil, &Fault{File: file, Field: "scan", Why: "the file is empty", Remedy: "export the mesh again"}
	}
	ending := strings.ToLower(filepath.Ext(file))
	trimmed := bytes.TrimLeft(head, " \t\r\n")
	text := bytes.IndexByte(head, 0) < 0
	switch {
	case bytes.HasPrefix(head, []byte("ply\n")), bytes.HasPrefix(head, []byte("ply\r")):
		return s.readPLY()
	case ending == ".ply":
		return nil, &Fault{File: file, Line: 1, Field: "scan", Got: clip(firstLine(head)),
			Why:    "a PLY file begins with the line ply",
			Remedy: "give the file the ending of its true format (.stl, .obj)"}
	case ending == ".obj":
		return s.readOBJ()
	case text && bytes.HasPrefix(trimmed, []byte("solid")) && (len(head) < 1024 || bytes.Contains(head,
		[]byte("facet"))):
		return s.readTextSTL()
	case ending == ".stl":
		return s.readBinarySTL()
	case text && (bytes.HasPrefix(trimmed, []byte("v ")) || bytes.Contains(head, []byte("\nv "))):
		return s.readOBJ()
	case !text:
		return s.readBinarySTL()
	}
	return nil, &Fault{File: file, Line: 1, Field: "scan", Got: clip(firstLine(head)),
		Why:    "this is no STL, OBJ or PLY mesh",
		Remedy: "export the scan as one of these"}
}

func firstLine(b []byte) string {
	line, _, _ := bytes.Cut(b, []byte("\n"))
	return strings.TrimSpace(string(line))
}
