package facets

import (
	"bytes"
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"

	"github.com/go-gl/mathgl/mgl64"
)

// Layout of a binary STL file (3D Systems, StereoLithography Interface
// Specification, 1989): 80 bytes of anything, the number of triangles as a
// little-endian uint32, then for each the normal and three corners as float32
// and two bytes of attributes.
const (
	stlHeaderBytes   = 80
	stlTriangleBytes = 50
)

// readBinarySTL reads a binary STL. The written normals are not used: corners
// say more, and many programs leave the normals at zero.
func (s *scanReader) readBinarySTL() (*rawMesh, error) {
	m := &rawMesh{format: "binary STL", binary32: true}
	var head [stlHeaderBytes + 4]byte
	if err := s.readFull(head[:], "its 84-byte header"); err != nil {
		return nil, err
	}
	count := binary.LittleEndian.Uint32(head[stlHeaderBytes:])
	if count > MaxScanTriangles {
		return nil, s.faultAt(stlHeaderBytes, strconv.FormatUint(uint64(count), 10),
			fmt.Sprintf("the header claims more than %d triangles", MaxScanTriangles),
			"thin the mesh; if it is small, the file is damaged or not a binary STL")
	}
	var record [stlTriangleBytes]byte
	for i := range count {
		if err := s.readFull(record[:], fmt.Sprintf("triangle %d of the %d its header claims", i+1,
			count)); err != nil {
			return nil, err
		}
		base := int32(len(m.points))
		for corner := range 3 {
			var p mgl64.Vec3
			for axis := range 3 {
				at := 12 + 12*corner + 4*axis
				p[axis] = float64(math.Float32frombits(binary.LittleEndian.Uint32(record[at:])))
				if err := s.checkBinary(p[axis], s.offset-stlTriangleBytes+int64(at)); err != nil {
					return nil, err
				}
			}
			m.points = append(m.points, p)
		}
		m.triangles = append(m.triangles, [3]int32{base, base + 1, base + 2})
	}
	if _, err := s.buf.ReadByte(); err == nil {
		m.notes = append(m.notes, fmt.Sprintf("The file goes on after the %d triangles its header claims; the rest was not read.", count))
	}
	return m, nil
}

// readTextSTL reads the text form: facet normal / outer loop / three vertex
// lines / endloop / endfacet.
func (s *scanReader) readTextSTL() (*rawMesh, error) {
	m := &rawMesh{format: "text STL"}
	var loop []int32
	var inLoop, ended bool
	for {
		line, err := s.nextLine()
		if errors.Is(err, io.EOF) {
			break
		}
		if err != nil {
			return nil, err
		}
		word, rest := cutWord(line)
		switch {
		case len(word) == 0:
		case equalWord(word, "vertex"):
			if !inLoop {
				return nil, s.fault(string(line), "a vertex stands outside a loop",
					"put it between outer loop and endloop")
			}
			p, err := s.textPoint(m, rest, "vertex")
			if err != nil {
				return nil, err
			}
			if len(loop) == 3 {
				return nil, s.fault(string(line), "a loop has more than three vertices", "export the mesh as triangles")
			}
			loop = append(loop, int32(len(m.points)))
			m.points = append(m.points, p)
		case equalWord(word, "outer"):
			loop, inLoop = loop[:0], true
		case equalWord(word, "endloop"):
			if !inLoop || len(loop) != 3 {
				return nil, s.fault(string(line), fmt.Sprintf("a loop has %d vertices, not three", len(loop)),
					"export the mesh again")
			}
			if !m.polygon(loop) {
				return nil, s.fault("", whyTooMany(), remedyThin)
			}
			inLoop = false
		case equalWord(word, "endsolid"):
			ended = true
		case equalWord(word, "solid"):
			ended = false
		case equalWord(word, "facet"), equalWord(word, "endfacet"), equalWord(word, "color"):
		default:
			return nil, s.fault(string(line), "this line does not belong in a text STL", "export the mesh again")
		}
	}
	if !ended {
		return nil, s.fault("", "the line endsolid is missing at the end", remedyTruncated)
	}
	return m, nil
}

// textPoint parses three coordinates.
func (s *scanReader) textPoint(m *rawMesh, rest []byte, what string) (mgl64.Vec3, error) {
	var p mgl64.Vec3
	line := rest
	for axis := range 3 {
		var field []byte
		field, rest = cutWord(rest)
		if len(field) == 0 {
			return p, s.fault(string(line), fmt.Sprintf("a %s has three coordinates, here are %d", what, axis),
				remedyTruncated)
		}
		x, err := s.coordinate(m, field)
		if err != nil {
			return p, err
		}
		p[axis] = x
	}
	return p, nil
}

// cutWord splits off the first word of a line.
func cutWord(line []byte) (word, rest []byte) {
	i := 0
	for i < len(line) && (line[i] == ' ' || line[i] == '\t' || line[i] == '\r') {
		i++
	}
	line = line[i:]
	for i = 0; i < len(line); i++ {
		if line[i] == ' ' || line[i] == '\t' || line[i] == '\r' {
			return line[:i], line[i:]
		}
	}
	return line, nil
}

func equalWord(word []byte, want string) bool { return bytes.EqualFold(word, []byte(want)) }
