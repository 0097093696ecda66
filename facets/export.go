package facets

import (
	"bufio"
	"encoding/binary"
	"fmt"
	"io"
	"math"

	"github.com/go-gl/mathgl/mgl64"
)

// WriteOBJ writes the stone as a Wavefront OBJ mesh in millimetres: one
// polygon a facet, one group a tier. The same stone gives the same bytes, and
// ReadScan gives the same solid back to the last digit.
func WriteOBJ(w io.Writer, s *Stone) error {
	b := bufio.NewWriter(w)
	fmt.Fprintf(b, "# %s\n# millimetres; z out of the table\n", oneLine(s.Name))
	for _, n := range s.Notes {
		fmt.Fprintf(b, "# note: %s\n", oneLine(n))
	}
	for _, c := range s.Corners {
		fmt.Fprintf(b, "v %s %s %s\n", decimal(c[0]), decimal(c[1]), decimal(c[2]))
	}
	group := ""
	for _, f := range s.Facets {
		name := f.Tier
		if name == "" {
			name = f.Side.String()
		}
		if name != group {
			fmt.Fprintf(b, "g %s\n", oneWord(name))
			group = name
		}
		b.WriteString("f")
		for _, c := range f.Corners {
			fmt.Fprintf(b, " %d", c+1)
		}
		b.WriteString("\n")
	}
	return b.Flush()
}

// decimal prints a coordinate with the fewest digits that read back to the same number.
func decimal(x float64) string {
	if x == 0 {
		return "0" // also for -0
	}
	return fmt.Sprintf("%g", x)
}

// oneLine keeps a name from breaking a line of the file.
func oneLine(s string) string {
	out := []rune(s)
	for i, r := range out {
		if r < ' ' || r == 0x7f {
			out[i] = ' '
		}
	}
	// A backslash at the end would join the next line.
	for len(out) > 0 && (out[len(out)-1] == '\\' || out[len(out)-1] == ' ') {
		out = out[:len(out)-1]
	}
	return string(out)
}

// oneWord keeps a tier's name one word.
func oneWord(s string) string {
	out := []rune(oneLine(s))
	for i, r := range out {
		if r == ' ' {
			out[i] = '_'
		}
	}
	return string(out)
}

// WriteSTL writes the stone as a binary STL mesh in millimetres, every facet
// as a fan of triangles. The same stone gives the same bytes. Corners are
// rounded to float32, about one part in ten million.
func WriteSTL(w io.Writer, s *Stone) error {
	b := bufio.NewWriter(w)
	var head [stlHeaderBytes]byte
	copy(head[:], "binary mesh, millimetres, z out of the table") // must not begin with the word of a text file
	b.Write(head[:])
	count := uint32(0)
	for _, f := range s.Facets {
		count += uint32(len(f.Corners) - 2)
	}
	binary.Write(b, binary.LittleEndian, count)
	var record [stlTriangleBytes]byte
	put := func(at int, v mgl64.Vec3) {
		for k := range 3 {
			binary.LittleEndian.PutUint32(record[at+4*k:], math.Float32bits(float32(v[k])))
		}
	}
	for _, f := range s.Facets {
		put(0, f.Normal)
		for j := 2; j < len(f.Corners); j++ {
			put(12, s.Corners[f.Corners[0]])
			put(24, s.Corners[f.Corners[j-1]])
			put(36, s.Corners[f.Corners[j]])
			b.Write(record[:])
		}
	}
	return b.Flush()
}
