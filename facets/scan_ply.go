package facets

import (
	"encoding/binary"
	"errors"
	"fmt"
	"io"
	"math"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"
)

// plyKind is a number type of the PLY format (Turk, The PLY Polygon File Format, 1994).
type plyKind int

const (
	plyInt8 plyKind = iota
	plyUint8
	plyInt16
	plyUint16
	plyInt32
	plyUint32
	plyFloat32
	plyFloat64
)

func (k plyKind) bytes() int { return [...]int{1, 1, 2, 2, 4, 4, 4, 8}[k] }

func plyKindOf(word string) (plyKind, bool) {
	switch word {
	case "char", "int8":
		return plyInt8, true
	case "uchar", "uint8":
		return plyUint8, true
	case "short", "int16":
		return plyInt16, true
	case "ushort", "uint16":
		return plyUint16, true
	case "int", "int32":
		return plyInt32, true
	case "uint", "uint32":
		return plyUint32, true
	case "float", "float32":
		return plyFloat32, true
	case "double", "float64":
		return plyFloat64, true
	}
	return 0, false
}

type plyProperty struct {
	name  string
	kind  plyKind
	list  bool
	count plyKind // type of a list's length
}

type plyElement struct {
	name       string
	number     uint64
	properties []plyProperty
}

// plyMaxList bounds one list: no polygon of a stone has more corners.
const plyMaxList = 10_000

// plyMaxHeader bounds the header in lines.
const plyMaxHeader = 1_000

// readPLY reads the polygons of a PLY file: text, or binary of either byte order.
func (s *scanReader) readPLY() (*rawMesh, error) {
	format, elements, err := s.plyHeader()
	if err != nil {
		return nil, err
	}
	m := &rawMesh{format: "text PLY"}
	var next plyNumber
	switch format {
	case "ascii":
		next = s.plyText()
	case "binary_little_endian":
		m.format, next = "binary PLY (little-endian)", s.plyBinary(binary.LittleEndian)
	case "binary_big_endian":
		m.format, next = "binary PLY (big-endian)", s.plyBinary(binary.BigEndian)
	}
	var faces bool
	for _, e := range elements {
		switch e.name {
		case "vertex":
			err = s.plyVertices(m, e, next)
		case "face":
			faces = true
			err = s.plyFaces(m, e, next)
		case "tristrips":
			err = s.fault(e.name, "triangle strips are not read", "export the mesh with a face element")
		default:
			err = plySkip(e, next)
		}
		if err != nil {
			return nil, err
		}
	}
	if !faces {
		return nil, s.fault("", "the header has no element face", "export the surface, not only its points")
	}
	return m, nil
}

// plyNumber returns the next number of the body, which belongs to what.
type plyNumber func(k plyKind, what string) (float64, error)

func (s *scanReader) plyHeader() (format string, elements []plyElement, err error) {
	for {
		line, err := s.nextLine()
		if errors.Is(err, io.EOF) {
			return "", nil, s.fault("", "the file ends within its header", remedyTruncated)
		}
		if err != nil {
			return "", nil, err
		}
		if s.line > plyMaxHeader {
			return "", nil, s.fault("", fmt.Sprintf("the header has more than %d lines", plyMaxHeader),
				"export the mesh again")
		}
		words := strings.Fields(string(line))
		if len(words) == 0 {
			continue
		}
		switch words[0] {
		case "ply", "comment", "obj_info":
		case "format":
			if len(words) < 3 || words[2] != "1.0" ||
				words[1] != "ascii" && words[1] != "binary_little_endian" && words[1] != "binary_big_endian" {
				return "", nil, s.fault(string(line), "this format is not known",
					"export as ascii, binary_little_endian or binary_big_endian, version 1.0")
			}
			format = words[1]
		case "element":
			e, err := s.plyElement(words)
			if err != nil {
				return "", nil, err
			}
			elements = append(elements, e)
		case "property":
			if len(elements) == 0 {
				return "", nil, s.fault(string(line), "a property stands before any element", "export the mesh again")
			}
			p, err := s.plyProperty(words)
			if err != nil {
				return "", nil, err
			}
			last := &elements[len(elements)-1]
			last.properties = append(last.properties, p)
		case "end_header":
			if format == "" {
				return "", nil, s.fault("", "the header has no format line", "export the mesh again")
			}
			return format, elements, nil
		default:
			return "", nil, s.fault(string(line), "this line does not belong in a PLY header", "export the mesh again")
		}
	}
}

func (s *scanReader) plyElement(words []string) (plyElement, error) {
	line := strings.Join(words, " ")
	if len(words) != 3 {
		return plyElement{}, s.fault(line, "an element line holds a name and a number", "export the mesh again")
	}
	n, err := strconv.ParseUint(words[2], 10, 64)
	if err != nil {
		return plyElement{}, s.fault(line, "the number of elements is not a whole number", "export the mesh again")
	}
	most := uint64(MaxScanTriangles)
	if words[1] == "vertex" {
		most *= 3
	}
	if n > most {
		return plyElement{}, s.fault(line, fmt.Sprintf("the header claims more than %d of them", most),
			"thin the mesh; if it is small, the file is damaged")
	}
	return plyElement{name: words[1], number: n}, nil
}

func (s *scanReader) plyProperty(words []string) (plyProperty, error) {
	line := strings.Join(words, " ")
	var p plyProperty
	known := true
	switch {
	case len(words) == 3:
		p.name = words[2]
		p.kind, known = plyKindOf(words[1])
	case len(words) == 5 && words[1] == "list":
		p.name, p.list = words[4], true
		var countKnown bool
		p.count, countKnown = plyKindOf(words[2])
		p.kind, known = plyKindOf(words[3])
		known = known && countKnown && p.count < plyFloat32
	default:
		known = false
	}
	if !known {
		return p, s.fault(line, "this property's type is not known",
			"use char, uchar, short, ushort, int, uint, float, double, or list of a whole-number type")
	}
	return p, nil
}

// plyText reads numbers separated by blanks, across lines, and leaves the last
// one as it was written in s.field.
func (s *scanReader) plyText() plyNumber {
	var rest []byte
	return func(k plyKind, what string) (float64, error) {
		for {
			var field []byte
			if field, rest = cutWord(rest); len(field) > 0 {
				s.field = field
				v, err := strconv.ParseFloat(string(field), 64)
				if err != nil || k < plyFloat32 && v != math.Trunc(v) {
					return 0, s.fault(string(field), "this is not a number of the type its header promises",
						"export the mesh again")
				}
				return v, nil
			}
			var err error
			rest, err = s.nextLine()
			if errors.Is(err, io.EOF) {
				return 0, s.fault("", "the file ends within "+what, remedyTruncated)
			}
			if err != nil {
				return 0, err
			}
		}
	}
}

func (s *scanReader) plyBinary(order binary.ByteOrder) plyNumber {
	var room [8]byte
	return func(k plyKind, what string) (float64, error) {
		b := room[:k.bytes()]
		if err := s.readFull(b, what); err != nil {
			return 0, err
		}
		switch k {
		case plyInt8:
			return float64(int8(b[0])), nil
		case plyUint8:
			return float64(b[0]), nil
		case plyInt16:
			return float64(int16(order.Uint16(b))), nil
		case plyUint16:
			return float64(order.Uint16(b)), nil
		case plyInt32:
			return float64(int32(order.Uint32(b))), nil
		case plyUint32:
			return float64(order.Uint32(b)), nil
		case plyFloat32:
			return float64(math.Float32frombits(order.Uint32(b))), nil
		}
		return math.Float64frombits(order.Uint64(b)), nil
	}
}

func (s *scanReader) plyVertices(m *rawMesh, e plyElement, next plyNumber) error {
	axis := make([]int, len(e.properties))
	var found [3]bool
	for i, p := range e.properties {
		axis[i] = -1
		if at := strings.Index("xyz", p.name); len(p.name) == 1 && at >= 0 && !p.list {
			axis[i], found[at] = at, true
			m.binary32 = m.binary32 || p.kind == plyFloat32 && m.format != "text PLY"
		}
	}
	if found != [3]bool{true, true, true} {
		return s.fault("", "the element vertex lacks x, y or z", "export the mesh again")
	}
	for i := range e.number {
		var point mgl64.Vec3
		for j, p := range e.properties {
			if axis[j] < 0 {
				if err := plySkipProperty(p, next); err != nil {
					return err
				}
				continue
			}
			x, err := next(p.kind, "vertex "+strconv.FormatUint(i+1, 10))
			if err != nil {
				return err
			}
			if m.format == "text PLY" {
				if x, err = s.coordinate(m, s.field); err != nil {
					return err
				}
			} else if err := s.checkBinary(x, s.offset-int64(p.kind.bytes())); err != nil {
				return err
			}
			point[axis[j]] = x
		}
		m.points = append(m.points, point)
	}
	return nil
}

func (s *scanReader) plyFaces(m *rawMesh, e plyElement, next plyNumber) error {
	var corners []int32
	for i := range e.number {
		found := false
		for _, p := range e.properties {
			if !p.list || p.name != "vertex_indices" && p.name != "vertex_index" {
				if err := plySkipProperty(p, next); err != nil {
					return err
				}
				continue
			}
			found = true
			what := "face " + strconv.FormatUint(i+1, 10)
			n, err := next(p.count, what)
			if err != nil {
				return err
			}
			if n < 3 || n > plyMaxList {
				return s.plyFault(strconv.FormatFloat(n, 'f', -1, 64),
					fmt.Sprintf("%s claims this many corners; 3 to %d are read", what, plyMaxList), "export the mesh again")
			}
			corners = corners[:0]
			for range int(n) {
				v, err := next(p.kind, what)
				if err != nil {
					return err
				}
				if v < 0 || v >= float64(len(m.points)) || v != math.Trunc(v) {
					return s.plyFault(strconv.FormatFloat(v, 'f', -1, 64),
						fmt.Sprintf("%s names a vertex that is not among the %d of the file", what, len(m.points)),
						"export the mesh again, vertices before faces")
				}
				corners = append(corners, int32(v))
			}
			if !m.polygon(corners) {
				return s.plyFault("", whyTooMany(), remedyThin)
			}
		}
		if !found {
			return s.plyFault("", "the element face has no list vertex_indices",
				"export the surface, not only its points")
		}
	}
	return nil
}

// plyFault names both places, since the body may be text or binary.
func (s *scanReader) plyFault(got, why, remedy string) *Fault {
	f := s.faultAt(s.offset, got, why, remedy)
	f.Line = s.line
	return f
}

func plySkip(e plyElement, next plyNumber) error {
	if len(e.properties) == 0 {
		return nil
	}
	for range e.number {
		for _, p := range e.properties {
			if err := plySkipProperty(p, next); err != nil {
				return err
			}
		}
	}
	return nil
}

func plySkipProperty(p plyProperty, next plyNumber) error {
	n := 1.0
	if p.list {
		var err error
		if n, err = next(p.count, "a list"); err != nil {
			return err
		}
		if n < 0 {
			n = 0
		}
	}
	for range int64(n) {
		if _, err := next(p.kind, "the property "+p.name); err != nil {
			return err
		}
	}
	return nil
}
