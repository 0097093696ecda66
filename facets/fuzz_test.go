package facets

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"os"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
)

// Whatever the bytes are, the reader gives a plan or faults; a plan is written
// to a text that reads back and is written to the same text again, and solving
// it gives a sound stone or faults.
func FuzzReadPlan(f *testing.F) {
	for _, file := range planFiles(f) {
		data, err := os.ReadFile(file)
		if err != nil {
			f.Fatal(err)
		}
		f.Add(data)
	}
	f.Add([]byte(barrel))
	f.Add([]byte("plan = 1\r\n[material]\r\nname='x'\r\nindex=1.6\r\n[[tier]]\r\n[tier.edge]\r\nwith='P'\r\n"))
	f.Add([]byte("\ufeffrough.avoid = [{point_mm=[1,2,3],radius_mm=1}]\naxis.tilt=1\n[[transfer]]\n[[transfer]]\n"))
	f.Add([]byte("[[tier]]\nmeet = [[], ['a@1','axis'], 3]\nindex = [nan, inf, 0x10, 1_0]\nfold = -1\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		p, err := ReadPlan(bytes.NewReader(data), "p.toml")
		if err != nil {
			wantFaults(t, err)
			return
		}
		if got := written(t, p); got != string(data) {
			t.Errorf("the text changed: %s", firstDifference(got, string(data)))
		}
		// Changed everywhere, it is written in other ways.
		p.Notes += "x\ny"
		p.WidthMM++
		for i := range p.Tiers {
			p.Tiers[i].Note += "\"\\z"
		}
		once := written(t, p)
		q, err := ReadPlan(bytes.NewReader([]byte(once)), "p.toml")
		if err != nil {
			t.Fatalf("what was written does not read: %v\n%s", err, once)
		}
		if q.Notes != p.Notes || q.WidthMM != p.WidthMM || len(q.Tiers) != len(p.Tiers) {
			t.Fatalf("notes or width changed:\n%s", once)
		}
		if again := written(t, q); again != once {
			t.Errorf("not a fixed point: %s", firstDifference(again, once))
		}
		if s, err := q.Solve(); err != nil {
			wantFaults(t, err)
		} else if err := s.sound(); err != nil {
			t.Error(err)
		}
	})
}

func wantFaults(t *testing.T, err error) {
	t.Helper()
	var fs Faults
	if !errors.As(err, &fs) || len(fs) == 0 {
		t.Fatalf("got %v, want faults", err)
	}
	for _, f := range fs {
		if f.Why == "" || f.Remedy == "" || f.File == "" {
			t.Errorf("fault %+v lacks file, reason or remedy", f)
		}
	}
}

// Whatever the planes are, FromPlanes gives a sound convex stone or one of its
// errors. The bytes are small numbers on a coarse grid, so that planes through
// common corners and edges are common, with now and then a small offset.
func FuzzFromPlanes(f *testing.F) {
	cube := []byte{9, 8, 8, 1, 0, 7, 8, 8, 1, 0, 8, 9, 8, 1, 0, 8, 7, 8, 1, 0, 8, 8, 9, 1, 0, 8, 8, 7, 1, 0}
	f.Add(cube)
	f.Add(append(bytes.Clone(cube), 9, 9, 8, 2, 0, 9, 9, 9, 2, 0, 9, 9, 9, 2, 1, 10, 9, 9, 3, 2))
	f.Add(append(bytes.Clone(cube), 9, 9, 8, 1, 0, 9, 7, 8, 1, 0, 7, 9, 8, 1, 0, 7, 7, 8, 1, 0, 9, 8, 9, 1, 0,
		9, 8, 7, 1, 3))
	f.Fuzz(func(t *testing.T, data []byte) {
		var planes []Plane
		for len(data) >= 5 && len(planes) < 60 {
			n := mgl64.Vec3{float64(data[0]) - 8, float64(data[1]) - 8, float64(data[2]) - 8}
			l := n.Len()
			if l > 0 {
				offset := math.Ldexp(float64(int8(data[4])), -30-int(data[4])%20)
				planes = append(planes, Plane{Normal: n.Mul(1 / l), Distance: float64(data[3])/l + offset})
			}
			data = data[5:]
		}
		s, err := FromPlanes("", planes)
		if err != nil {
			for _, known := range []error{ErrPlane, ErrOpen, ErrEmpty, ErrTangled} {
				if errors.Is(err, known) {
					return
				}
			}
			t.Fatal(err)
		}
		if len(s.Facets) > len(planes) {
			t.Errorf("%d planes made %d facets", len(planes), len(s.Facets))
		}
		// Welding moves corners along flat slopes; a millionth is far below what is seen.
		const visible = 1e-6
		checkStone(t, s, visible)
		m := s.Measure()
		if !(m.VolumeMM3 > 0) || math.IsNaN(m.GirdleMM.Mean) && len(s.Facets) == 0 {
			t.Errorf("measures %+v", m)
		}
	})
}

// Numbers at random in a plan that solves: a stone or faults, never a panic.
func FuzzSolve(f *testing.F) {
	file := "../testdata/plans/cushion.toml"
	f.Add(uint8(0), uint64(math.Float64bits(41)))
	f.Add(uint8(9), uint64(math.Float64bits(1e-300)))
	f.Add(uint8(40), uint64(math.Float64bits(-0.25)))
	f.Add(uint8(77), uint64(math.Float64bits(math.NaN())))
	f.Fuzz(func(t *testing.T, where uint8, bits uint64) {
		p, err := OpenPlan(file)
		if err != nil {
			t.Fatal(err)
		}
		value := math.Float64frombits(bits)
		tier := &p.Tiers[int(where/4)%len(p.Tiers)]
		switch where % 4 {
		case 0:
			tier.Angle, tier.HasAngle = Angle(value)*Degree, true
		case 1:
			tier.Stop.Value = value
		case 2:
			if len(tier.Index) > 0 {
				tier.Index[0] = value
			}
		default:
			var b [8]byte
			binary.LittleEndian.PutUint64(b[:], bits)
			tier.Fold, tier.Mirror, tier.Temporary = int(int8(b[0])), b[1]&1 > 0, b[1]&2 > 0
			tier.Side, tier.Stop.Rule = Side(b[2]%4), Rule(b[3]%9)
			p.Gear = int(int16(binary.LittleEndian.Uint16(b[4:])))
		}
		if s, err := p.Solve(); err != nil {
			wantFaults(t, err)
		} else if err := s.sound(); err != nil {
			t.Error(err)
		}
	})
}
