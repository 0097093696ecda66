package facets

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"os"
	"slices"
	"strconv"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/testdata/budget"
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
		var p *Plan
		var err error
		budget.Hold(t, planMemory(len(data)), func() { p, err = ReadPlan(bytes.NewReader(data), "p.toml") })
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
		var stone *Stone
		budget.Hold(t, solveMemory, func() { stone, err = q.Solve() })
		if err != nil {
			wantFaults(t, err)
		} else if err := stone.sound(); err != nil {
			t.Error(err)
		}
	})
}

// planMemory is what reading a plan of so many bytes may set aside: the TOML package and
// the reader each keep a tree of what is written, and two bytes can be an entry of a list.
func planMemory(size int) int { return 1500 * size }

// solveMemory is what solving may set aside: a stone of MaxPlanFacets is cut facet by
// facet, and each cut leaves a new solid behind.
const solveMemory = 2 << 30

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

// Whatever is typed, a description of rough is refused or is what a plan can say: written
// into one it reads back as the same, and a stone fits into it or faults say why not.
func FuzzParseRough(f *testing.F) {
	for _, text := range []string{"box:12x11x9", "cylinder:10x12", "ellipsoid:12x11x9", "scan:rough.stl", "box",
		"box:1e308x1e-308x1", "box:infx1x1", "scan:../x.stl", "scan:", "cylinder:nanx1", "box:0x1p3x7x1"} {
		f.Add(text)
	}
	plan, err := ReadPlan(bytes.NewReader([]byte(barrel)), "barrel.toml")
	if err != nil {
		f.Fatal(err)
	}
	stone, err := plan.Solve()
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, text string) {
		q, err := ParseRough(text)
		if err != nil {
			var fault *Fault
			if !errors.As(err, &fault) || fault.Remedy == "" {
				t.Fatalf("%v is no fault with a remedy", err)
			}
			return
		}
		p := *plan
		p.Rough = q
		again, err := ReadPlan(bytes.NewReader([]byte(written(t, &p))), "p.toml")
		if q.Shape == Scanned.String() {
			return // files outside the plan's folder and odd names are for the command line alone
		}
		if err != nil || again.Rough.Shape != q.Shape || !slices.Equal(again.Rough.SizeMM, q.SizeMM) {
			t.Fatalf("%q in a plan: %v", text, err)
		}
		r, err := q.Rough("")
		if err != nil {
			t.Fatal(err)
		}
		if fit, err := r.Fit(stone); err == nil && !(fit.Scale > 0 && fit.Yield > 0 && fit.Yield < 1) {
			t.Errorf("%q: fit %+v", text, fit)
		}
	})
}

// Plans that would take long or much memory, to read or to solve, are refused before.
func TestHostilePlans(t *testing.T) {
	head := "plan = 1\nname = \"x\"\nmaterial = \"quartz\"\nwidth_mm = 8\ngear = 96\n"
	tier := "[[tier]]\nname = \"P1\"\nside = \"pavilion\"\nangle = 41\n"
	numbered := func(line string) string {
		var b strings.Builder
		for i := 0; b.Len() < MaxPlanBytes-1000; i++ {
			b.WriteString(strings.ReplaceAll(line, "N", strconv.Itoa(i)))
		}
		return b.String()
	}
	long := MaxPlanBytes - 1000
	for _, row := range []struct{ name, text, want string }{
		{"keys", head + numbered("kN = 1\n"), "too many keys in one table"},
		{"keys in line", head + "a = {" + numbered("kN = 1,") + "z = 1}\n", "too many keys in one table"},
		{"tables", head + strings.Repeat("[[tier]]\n", long/9), "too many tables"},
		{"a long key", head + strings.Repeat("a.", 100) + "a = 1\n", "too many parts in a key"},
		{"a long key in line", head + "x = {" + strings.Repeat("a.", long/2) + "a = 1}\n", "too many parts in a key"},
		{"lists in lists", head + "x = " + strings.Repeat("[", long), "nested more than"},
		{"tables in tables", head + "x = " + strings.Repeat("{a=", long/3), "nested more than"},
		{"indices", head + tier + "distance = 1\nindex = [" + strings.Repeat("1,", long/2) + "]\n", "beyond 2000 facets"},
		{"a fold beyond count", head + tier + "distance = 1\nindex = 1\nfold = 9223372036854775807\n", "fold"},
		{"many folds", head + strings.ReplaceAll(strings.Repeat(tier+"distance = 1\nindex = 1\nfold = 1000\n", 100), "P1", "P"), "p.toml"},
		{"corners", head + tier + "meet = [" + strings.Repeat("['G','H','I'],", long/14) + "]\n", "p.toml"},
		{"planes of a corner", head + tier + "meet = [" + strings.Repeat("'a',", long/4) + "]\n", "p.toml"},
		{"a giant number", head + tier + "distance = 1e999999999\nindex = 1\n", "p.toml"},
		{"many digits", head + tier + "distance = " + strings.Repeat("9", long) + "\nindex = 1\n", "p.toml"},
		{"a giant width", strings.Replace(head, "= 8", "= 1e300", 1) + tier + "distance = 1\nindex = 1\n", "width_mm"},
		{"a hair of a width", strings.Replace(head, "= 8", "= 1e-300", 1) + tier + "distance = 1\nindex = 1\n", "width_mm"},
		{"a long name that many stop by", head + strings.Replace(tier, "P1", strings.Repeat("P", long/2), 1) + "distance = 1\nindex = 1\n" +
			numbered("[[tier]]\nname='N'\nside='crown'\nmeet=['x']\n")[:long/3], "p.toml"},
		{"many names", head + numbered(tier + "distance = 1\nindex = 1\n")[:long], "p.toml"},
		{"a long name", head + strings.Replace(tier, "P1", strings.Repeat("P", long), 1) + "distance = 1\n", "p.toml"},
		{"places to avoid", head + "[rough]\nshape = \"box\"\nsize_mm = [9, 9, 9]\navoid = [" +
			strings.Repeat("{point_mm=[1,1,1],radius_mm=1},", long/31) + "]\n", "p.toml"},
	} {
		var err error
		budget.Hold(t, planMemory(len(row.text)), func() {
			var p *Plan
			if p, err = ReadPlan(strings.NewReader(row.text), "p.toml"); err == nil {
				_, err = p.Solve()
			}
		})
		if err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %.300v, want %q in it", row.name, err, row.want)
			continue
		}
		wantFaults(t, err)
		if n := len(err.Error()); n > mostFaults*1000 {
			t.Errorf("%s: %d bytes of message", row.name, n)
		}
	}
}

// A plan names no scan outside its folder: neither a device, nor another user's files, nor
// another machine's.
func TestRoughStaysBesideThePlan(t *testing.T) {
	head := strings.Replace(barrel, "gear = 96", "gear = 96\nrough = { shape = \"scan\", file = 'FILE' }", 1)
	if head == barrel {
		t.Fatal("the plan has no place for rough")
	}
	for file, fine := range map[string]bool{
		"rough.stl": true, "scans/rough.stl": true, "./rough.stl": true,
		"../rough.stl": false, "scans/../../rough.stl": false, "/etc/passwd": false, "/dev/zero": false, "..": false,
		`\\there\\share\\rough.stl`: false, `C:\\rough.stl`: false, "C:rough.stl": false, `..\\rough.stl`: false,
	} {
		_, err := ReadPlan(strings.NewReader(strings.Replace(head, "FILE", file, 1)), "p.toml")
		if fine != (err == nil) || err != nil && !strings.Contains(err.Error(), "beside the plan") {
			t.Errorf("%s: %v", file, err)
		}
	}
	q := RoughRef{Shape: "scan", File: "."}
	if _, err := q.Rough(t.TempDir()); err == nil || !strings.Contains(err.Error(), "no file that holds a scan") {
		t.Errorf("a folder as a scan: %v", err)
	}
}
