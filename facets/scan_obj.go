package facets

import (
	"bytes"
	"errors"
	"fmt"
	"io"
	"strconv"
)

// readOBJ reads the polygons of a Wavefront OBJ file: v and f lines, with
// texture and normal indices allowed and passed over, negative indices counted
// back from the last vertex, and lines joined by a backslash. Groups, materials
// and names are passed over; so are points, lines and curves, which bound nothing.
func (s *scanReader) readOBJ() (*rawMesh, error) {
	m := &rawMesh{format: "OBJ"}
	var corners []int32
	for {
		line, err := s.nextLine()
		if errors.Is(err, io.EOF) {
			return m, nil
		}
		if err != nil {
			return nil, err
		}
		if line, err = s.joinLines(line); err != nil {
			return nil, err
		}
		word, rest := cutWord(line)
		switch string(word) {
		case "v":
			if len(m.points) >= 3*MaxScanTriangles {
				return nil, s.fault("", fmt.Sprintf("more than %d vertices", 3*MaxScanTriangles), remedyThin)
			}
			p, err := s.textPoint(m, rest, "v line")
			if err != nil {
				return nil, err
			}
			m.points = append(m.points, p)
		case "f":
			corners = corners[:0]
			for {
				var field []byte
				if field, rest = cutWord(rest); len(field) == 0 {
					break
				}
				corner, err := s.objIndex(field, len(m.points))
				if err != nil {
					return nil, err
				}
				corners = append(corners, corner)
			}
			if len(corners) < 3 {
				return nil, s.fault(string(line), fmt.Sprintf("a face has %d corners", len(corners)),
					"give it three or more")
			}
			if !m.polygon(corners) {
				return nil, s.fault("", whyTooMany(), remedyThin)
			}
		}
	}
}

// joinLines appends what follows a line that ends in a backslash.
func (s *scanReader) joinLines(line []byte) ([]byte, error) {
	if !bytes.HasSuffix(line, []byte(`\`)) {
		return line, nil
	}
	s.long = s.long[:0]
	for bytes.HasSuffix(line, []byte(`\`)) {
		s.long = append(append(s.long, line[:len(line)-1]...), ' ')
		if len(s.long) > maxScanLine {
			return nil, s.fault("", fmt.Sprintf("a joined line is longer than %d bytes", maxScanLine),
				"split the face")
		}
		next, err := s.nextLine()
		if errors.Is(err, io.EOF) {
			return nil, s.fault("", "the last line promises another", remedyTruncated)
		}
		if err != nil {
			return nil, err
		}
		line = next
	}
	s.long = append(s.long, line...)
	return s.long, nil
}

// objIndex resolves "7", "7/1", "7//3", "7/1/3" or "-1" against the n vertices read so far.
func (s *scanReader) objIndex(field []byte, n int) (int32, error) {
	number, _, _ := bytes.Cut(field, []byte("/"))
	i, err := strconv.Atoi(string(number))
	if err != nil {
		return 0, s.fault(string(field), "a face names a vertex by something that is no number", "write f 1 2 3")
	}
	switch {
	case i >= 1 && i <= n:
		return int32(i - 1), nil
	case i < 0 && -i <= n:
		return int32(n + i), nil
	}
	return 0, s.fault(string(field), fmt.Sprintf("a face names vertex %d, but %d are defined so far", i, n),
		"define the vertices before the faces that use them, counted from 1")
}
