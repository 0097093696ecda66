package facets

import (
	"bytes"
	"errors"
	"fmt"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"
)

// barrel is a small plan that solves: a square block with a roof below.
const barrel = `plan = 1
name = "Barrel"
material = "quartz"
width_mm = 6
gear = 96

[[tier]]
name = "G1"
side = "girdle"
index = [0, 24, 48, 72]
distance = 1

[[tier]]
name = "P1"
side = "pavilion"
angle = 45
index = [0, 24, 48, 72]
centre = 1

[[transfer]]

[[tier]]
name = "C1"
side = "crown"
angle = 30
index = [0, 24, 48, 72]
level = 0.2

[[tier]]
name = "T"
side = "table"
distance = 0.5
`

// readText reads a plan from a text.
func readText(text string) (*Plan, error) { return ReadPlan(strings.NewReader(text), "p.toml") }

func solveText(t *testing.T, text string) *Solution {
	t.Helper()
	p, err := readText(text)
	if err != nil {
		t.Fatal(err)
	}
	sol, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	return sol
}

// Each bad input gives exactly the wanted faults: place, tier, and words of
// what is wrong.
func TestBadPlans(t *testing.T) {
	change := func(pairs ...string) string {
		text := barrel
		for i := 0; i < len(pairs); i += 2 {
			if !strings.Contains(text, pairs[i]) {
				t.Fatalf("the plan has no %q", pairs[i])
			}
			text = strings.Replace(text, pairs[i], pairs[i+1], 1)
		}
		return text
	}
	for _, row := range []struct {
		name, text string
		want       []string // one a fault: "line tier: words"
	}{
		{"as it is", barrel, nil},
		{"empty", "", []string{"0 : the file is empty"}},
		{"a byte-order mark alone", "\ufeff \n", []string{"0 : the file is empty"}},
		{"binary rubbish", "\x00\x01\x02\xff", []string{"0 : not text in UTF-8"}},
		{"not UTF-8", "plan = 1\nname = \"\xff\"\n", []string{"0 : not text in UTF-8"}},
		{"too long", "# " + strings.Repeat("x", MaxPlanBytes) + "\n", []string{"0 : larger than 1 MiB"}},
		{"not TOML", change("width_mm = 6", "width_mm = = 6"), []string{"4 : not TOML"}},
		{"a comma in a number", change("width_mm = 6", "width_mm = 6,5"), []string{"4 : number has a comma"}},
		{"a key twice", change("gear = 96", "gear = 96\ngear = 64"), []string{"6 : not TOML"}},
		{"a plan of another version", change("plan = 1", "plan = 2"),
			[]string{"1 : version of the plan file is not known"}},
		{"nothing but a name", "name = \"x\"\n", []string{"0 : no tier", "1 : does not say that it is a plan",
			"1 : the width is missing", "1 : the index gear is missing", "1 : the material is missing"}},
		{"unknown keys, each a fault", change("gear = 96", "gear = 96\ncolour = \"red\"", "angle = 45",
			"angel = 45\nangle = 45"),
			[]string{"6 : a plan has no such key", "17 P1: a tier has no such key"}},
		{"an unknown table", change("[[transfer]]", "[[turn]]"), []string{"20 : no such table"}},
		{"a tier in single brackets", strings.Replace(barrel[:strings.Index(barrel, "[[transfer]]")],
			"[[tier]]", "[tier]", 1)[:strings.Index(barrel, "[[tier]]\nname = \"P1\"")-2],
			[]string{"0 : no tier", "7 : brackets are single"}},
		{"an impossible angle", change("angle = 45", "angle = 134"),
			[]string{"16 P1: the angle is impossible"}},
		{"a negative angle", change("angle = 45", "angle = -3"), []string{"16 P1: the angle is impossible"}},
		{"an angle that is not a number", change("angle = 45", "angle = nan"),
			[]string{"16 P1: not a finite number"}},
		{"an angle in quotes", change("angle = 45", "angle = \"45\""), []string{"16 P1: not a number"}},
		{"an upright pavilion", change("angle = 45", "angle = 90"), []string{"16 P1: belongs to the girdle"}},
		{"a slanted girdle", change("distance = 1\n", "distance = 1\nangle = 80\n"),
			[]string{"12 G1: stands upright"}},
		{"a slanted table", change("distance = 0.5", "distance = 0.5\nangle = 3"),
			[]string{"33 T: a table is level"}},
		{"a level crown facet", change("angle = 30", "angle = 0"), []string{"25 C1: is the table"}},
		{"two stop rules", change("centre = 1", "centre = 1\ndistance = 0.7"),
			[]string{"19 P1: stops by centre already (line 18)"}},
		{"no stop rule", change("centre = 1\n", ""), []string{"13 P1: nothing says how deep"}},
		{"no angle", change("angle = 45\n", ""), []string{"13 P1: angle is missing"}},
		{"no index", change("angle = 45\nindex = [0, 24, 48, 72]\n", "angle = 45\n"),
			[]string{"13 P1: index is missing"}},
		{"no side", change("side = \"pavilion\"\n", ""), []string{"13 P1: side is missing"}},
		{"a side of another word", change("\"pavilion\"", "\"bottom\""), []string{"15 P1: no such side"}},
		{"a name twice", change("\"C1\"", "\"P1\""), []string{"22 P1: stands at line 13 already"}},
		{"a name with an @", change("\"C1\"", "\"C@1\""), []string{"22 C@1: may not have this name"}},
		{"an index beyond the gear", change("[0, 24, 48, 72]", "[0, 24, 48, 97]"),
			[]string{"10 G1: no such tooth"}},
		{"an infinite length", change("centre = 1", "centre = inf"), []string{"18 P1: not a finite number"}},
		{"a huge length", change("centre = 1", "centre = 1e300"), []string{"18 P1: not a finite number"}},
		{"a table wider than the stone", change("distance = 0.5", "table = 1.5"),
			[]string{"32 T: no share of the width"}},
		{"too many facets", change("index = [0, 24, 48, 72]", "index = 1\nfold = 2000\nmirror = true"),
			[]string{"7 G1: beyond 2000 facets"}},
		{"a corner of unknown and later tiers", change("centre = 1", "meet = [\"G9\", \"C1@0\", \"G1@0\"]"),
			[]string{"18 P1: no tier of this name", "18 P1: not cut yet"}},
		{"a corner of two planes", change("centre = 1", "meet = [\"G1@0\", \"G1@24\"]"),
			[]string{"18 P1: a corner needs three planes"}},
		{"a corner without an index", change("centre = 1", "meet = [\"G1@x\", \"G1@24\", \"G1@0\"]"),
			[]string{"18 P1: is no index"}},
		{"an edge without a height", change("level = 0.2", "edge = { with = \"P1\" }"),
			[]string{"27 C1: its height is missing"}},
		{"turned twice", change("[[transfer]]", "[[transfer]]\n[[transfer]]"), []string{"21 : turned twice"}},
		{"turned at the end", barrel + "\n[[transfer]]\n", []string{"34 : nothing is cut after it"}},
		{"a material of no index", change("material = \"quartz\"", "material = { name = \"x\" }"),
			[]string{"3 : refractive index is missing"}},
		{"a rough of unknown shape", change("gear = 96",
			"gear = 96\nrough = { shape = \"egg\", size_mm = [1, 2, 3] }"),
			[]string{"6 : this shape of rough"}},
		{"too many keys in a table", "x = 1\n" + numbered("k%d = 1\n", 200), []string{"101 : too many keys"}},
		{"too many keys in a small table", "a = [{" + strings.TrimSuffix(numbered("k%d = 1,", 200), ",") + "}]\n", []string{"1 : too many keys"}},
		{"too many parts in a key", "a.b.c.d.e.f.g.h.i.j = 1\n", []string{"1 : too many parts"}},
		{"too many tables", numbered("[[t%d]]\n", 7000), []string{"6001 : too many tables"}},
		// What only solving finds.
		{"open below",
			change("[[tier]]\nname = \"P1\"\nside = \"pavilion\"\nangle = 45\nindex = [0, 24, 48, 72]\ncentre = 1\n\n", ""),
			[]string{"0 : stays open toward -z (below)"}},
		{"open at a side", strings.ReplaceAll(barrel, "[0, 24, 48, 72]", "[0, 24, 48]"),
			[]string{"0 : stays open toward -y"}},
		{"a tier that never touches", change("distance = 0.5", "distance = 5"),
			[]string{"29 T: never touches the stone"}},
		{"a tier that touches a point only", change("distance = 0.5", "distance = 0.7773502691896257"),
			[]string{"29 T: touches a corner or an edge only"}},
		{"a tier cut twice", barrel + "[[tier]]\nname = \"U\"\nside = \"table\"\ndistance = 0.5\n",
			[]string{"33 U: lies on a facet that is there already"}},
		{"a tier that takes all", change("distance = 0.5", "distance = -9"),
			[]string{"29 T: would take the whole stone off"}},
		{"a finished tier that later cuts remove", change("distance = 0.5", "distance = 0.1"),
			[]string{"22 C1: is taken off by tier \"T\""}},
		{"a finished girdle cut to a knife edge and beyond", change("level = 0.2", "level = -0.2"),
			[]string{"7 G1: is taken off by tier \"C1\"", "29 T: never touches"}},
		{"no girdle at the index", change("index = [0, 24, 48, 72]\nlevel", "index = [5, 29, 53, 77]\nlevel"),
			[]string{"27 C1: no girdle facet stands at index 5"}},
		{"a corner that is not on the stone", change("level = 0.2",
			"meet = [\"P1@0\", \"P1@24\", \"G1@48\"]"), []string{"27 C1: share no corner on the stone"}},
		{"a table before the girdle", strings.Replace(barrel, "[[tier]]\nname = \"G1\"",
			"[[tier]]\nname = \"T0\"\nside = \"table\"\ntable = 0.5\n\n[[tier]]\nname = \"G1\"", 1),
			[]string{"10 T0: the outline is not cut yet"}},
		{"two faults of solving at once", change("level = 0.2", "meet = [\"P1@0\", \"P1@24\", \"G1@48\"]") +
			"\n[[tier]]\nname = \"P2\"\nside = \"pavilion\"\nangle = 45\nindex = 12\ndistance = 5\n",
			[]string{"27 C1: share no corner on the stone", "34 P2: never touches"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			p, err := readText(row.text)
			if err == nil {
				_, err = p.Solve()
			}
			if row.want == nil {
				if err != nil {
					t.Fatal(err)
				}
				return
			}
			var fs Faults
			if !errors.As(err, &fs) {
				t.Fatalf("got %v, want faults", err)
			}
			if len(fs) != len(row.want) {
				t.Fatalf("got %d faults, want %d:\n%v", len(fs), len(row.want), err)
			}
			for i, f := range fs {
				place, words, _ := strings.Cut(row.want[i], ": ")
				if got := fmt.Sprintf("%d %s", f.Line, f.Tier); got != place {
					t.Errorf("fault %d stands at %q, want %q: %v", i, got, place, f)
				}
				if !strings.Contains(f.Why, words) {
					t.Errorf("fault %d says %q, want %q", i, f.Why, words)
				}
				if f.Remedy == "" || f.File != "p.toml" {
					t.Errorf("fault %d lacks file or remedy: %v", i, f)
				}
			}
		})
	}
}

// numbered repeats a text with the numbers from 0 on in it.
func numbered(format string, n int) string {
	var b strings.Builder
	for i := range n {
		fmt.Fprintf(&b, format, i)
	}
	return b.String()
}

// Of thousands of faults a hundred are told, then their number, last.
func TestManyFaults(t *testing.T) {
	_, err := readText(strings.Repeat("[[tier]]\n", 1000))
	var fs Faults
	if !errors.As(err, &fs) || len(fs) != mostFaults+1 || !strings.HasSuffix(fs[mostFaults].Why, "more faults") {
		t.Fatalf("got %d faults, the last %v", len(fs), fs[len(fs)-1])
	}
}

func TestOpenPlanThatIsNone(t *testing.T) {
	folder := t.TempDir()
	for _, row := range []struct{ name, path, want string }{
		{"missing", filepath.Join(folder, "none.toml"), "there is no such file"},
		{"folder", folder, "this is a folder"},
	} {
		_, err := OpenPlan(row.path)
		var fs Faults
		if !errors.As(err, &fs) || len(fs) != 1 || fs[0].Why != row.want || fs[0].File != row.path {
			t.Errorf("%s: got %v, want one fault: %s", row.name, err, row.want)
		}
	}
}

// What was not changed is written as it stood, to the byte; the sample plans
// are full of comments, and line ends and a byte-order mark are kept.
func TestWriteKeepsTheText(t *testing.T) {
	texts := map[string]string{"barrel": barrel, "no newline at the end": strings.TrimSuffix(barrel, "\n")}
	for _, file := range planFiles(t) {
		data, err := os.ReadFile(file)
		if err != nil {
			t.Fatal(err)
		}
		texts[filepath.Base(file)] = string(data)
	}
	for name, text := range texts {
		for variant, text := range map[string]string{
			"LF": text, "CRLF": strings.ReplaceAll(text, "\n", "\r\n"), "BOM": "\ufeff" + text,
		} {
			p, err := readText(text)
			if err != nil {
				t.Fatalf("%s, %s: %v", name, variant, err)
			}
			if got := written(t, p); got != text {
				t.Errorf("%s, %s: the text changed:\n%s", name, variant, firstDifference(got, text))
			}
		}
	}
}

func written(t testing.TB, p *Plan) string {
	t.Helper()
	var b bytes.Buffer
	if err := p.Write(&b); err != nil {
		t.Fatal(err)
	}
	return b.String()
}

func firstDifference(a, b string) string {
	as, bs := strings.Split(a, "\n"), strings.Split(b, "\n")
	for i := range max(len(as), len(bs)) {
		x, y := "(end)", "(end)"
		if i < len(as) {
			x = as[i]
		}
		if i < len(bs) {
			y = bs[i]
		}
		if x != y {
			return fmt.Sprintf("line %d: got %q, want %q", i+1, x, y)
		}
	}
	return "none"
}

// A change mends its place only; comments beside it stay.
func TestWriteMendsInPlace(t *testing.T) {
	const before = `# my plan
plan = 1
name = "A" # the name
material = "quartz"
width_mm = 6 # mm
gear = 96

# the girdle
[[tier]]
name = "G1" # first
side = "girdle"
index = [0, 24,
  48, 72] # four
distance = 1 # deep

# the roof
[[tier]]
name = "P1"
side = "pavilion"
angle = 45 # steep
index = 0
fold = 4
centre = 1
note = "slowly"
`
	const after = `# my plan
plan = 1
name = "A" # the name
material = "quartz"
width_mm = 7.5 # mm
gear = 96
author = "me"

# the girdle
[[tier]]
name = "G1" # first
side = "girdle"
index = [0, 24, 48] # four
distance = 1 # deep

# the roof
[[tier]]
name = "P1"
side = "pavilion"
angle = 41.3 # steep
index = 0
fold = 4
centre = 1
temporary = true

[[transfer]]
note = "turn"

[[tier]]
name = "T"
side = "table"
distance = 0.25
note = """
two
"lines\\" """
`
	p, err := readText(before)
	if err != nil {
		t.Fatal(err)
	}
	p.WidthMM, p.Author = 7.5, "me"
	p.Tiers[0].Index = []float64{0, 24, 48}
	p.Tiers[1].Angle, p.Tiers[1].Note, p.Tiers[1].Temporary = 41.3*Degree, "", true
	p.Tiers = append(p.Tiers, Tier{Name: "T", Side: Table, Stop: Stop{Rule: StopDistance, Value: 0.25},
		Note: "two\n\"lines\\\" ", Transfer: &Transfer{Note: "turn"}})
	got := written(t, p)
	// Quotes are written with a backslash.
	want := strings.Replace(after, "\"lines\\\\\" \"\"\"", "\\\"lines\\\\\\\" \"\"\"", 1)
	if got != want {
		t.Errorf("%s\n%s", firstDifference(got, want), got)
	}
	// And it is a fixed point that reads back to the same.
	q, err := readText(got)
	if err != nil {
		t.Fatal(err)
	}
	if q.Tiers[2].Note != p.Tiers[2].Note || q.Tiers[2].Transfer == nil ||
		q.Tiers[1].Angle != p.Tiers[1].Angle {
		t.Errorf("read back %+v", q.Tiers)
	}
	if again := written(t, q); again != got {
		t.Errorf("not a fixed point: %s", firstDifference(again, got))
	}
}

// A plan that was never read is written, read and written to the same text,
// and solves to the same stone.
func TestWriteAFreshPlan(t *testing.T) {
	for _, file := range planFiles(t) {
		p, sol := solveFile(t, file)
		fresh := p.Clone()
		fresh.layout = nil
		fresh.Rough = &RoughRef{Shape: "box", SizeMM: []float64{12, 11.5, 9}, AllowanceMM: 0.3,
			HasAllowance: true,
			Avoid:        []RoughFlaw{{PointMM: [3]float64{1, 2, 3}, RadiusMM: 0.5}, {Normal: [3]float64{0, 0, 1}}}}
		fresh.Axis = &Axis{Tilt: 12.5 * Degree, Azimuth: 30 * Degree}
		fresh.Polish = []string{"cerium oxide", "then \"clean\""}
		for i := range fresh.Tiers {
			fresh.Tiers[i].block = nil
			if fresh.Tiers[i].Transfer != nil {
				fresh.Tiers[i].Transfer.block = nil
			}
		}
		text := written(t, fresh)
		back, err := readText(text)
		if err != nil {
			t.Fatalf("%s: %v\n%s", file, err, text)
		}
		if again := written(t, back); again != text {
			t.Errorf("%s: %s", file, firstDifference(again, text))
		}
		s, err := back.Solve()
		if err != nil {
			t.Fatal(err)
		}
		if s.Volume() != sol.Stone.Volume() {
			t.Errorf("%s: the stone changed by %g mm³", file, s.Volume()-sol.Stone.Volume())
		}
	}
}

// The other ways in which TOML writes tables mean the same.
func TestTablesAnyWay(t *testing.T) {
	inline := strings.Replace(barrel, "material = \"quartz\"",
		"material = { name = \"x\", index = 1.6, density = 2.9 }", 1)
	dotted := strings.Replace(barrel, "material = \"quartz\"",
		"material.name = \"x\"\nmaterial.index = 1.6\nmaterial.density = 2.9", 1)
	table := strings.Replace(strings.Replace(barrel, "material = \"quartz\"\n", "", 1), "gear = 96\n",
		"gear = 0x60\n\n[material]\nname = \"x\"\nindex = 1.6\ndensity = 2.9\n", 1)
	edge := strings.Replace(inline, "level = 0.2", "edge = { with = \"G1\", height = 0.2 }", 1)
	edgeTable := strings.Replace(inline, "level = 0.2", "[tier.edge]\nwith = \"G1\"\nheight = 0.2", 1)
	want := MaterialRef{Name: "x", Index: 1.6, Density: 2.9}
	for name, text := range map[string]string{"inline": inline, "dotted": dotted, "table": table,
		"edge": edge, "edge table": edgeTable} {
		p, err := readText(text)
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		want.Line = 3 // of barrel's material; a table of its own stands under the gear
		if name == "table" {
			want.Line = 6
		}
		if p.Material != want || p.Gear != 96 {
			t.Errorf("%s: got %+v, gear %d", name, p.Material, p.Gear)
		}
		s, err := p.Solve()
		if err != nil {
			t.Errorf("%s: %v", name, err)
			continue
		}
		closeTo(t, name+": volume", s.Volume(), solveText(t, barrel).Stone.Volume(), 1e-12,
			"the same plan written plainly")
		if got := written(t, p); got != text {
			t.Errorf("%s: %s", name, firstDifference(got, text))
		}
		p.WidthMM, p.Material.Density = 3, 3.1
		p.Tiers[2].Stop.Value = 0.25
		q, err := readText(written(t, p))
		if err != nil {
			t.Errorf("%s, changed: %v\n%s", name, err, written(t, p))
			continue
		}
		if q.Material.Density != 3.1 || q.Tiers[2].Stop.Value != 0.25 || q.WidthMM != 3 {
			t.Errorf("%s: the change was lost:\n%s", name, written(t, p))
		}
	}
}

// TestAxisDirections turns the axes by hand and reads a spin back.
func TestAxisDirections(t *testing.T) {
	half := math.Sqrt2 / 2
	for _, row := range []struct {
		name                string
		tilt, azimuth, spin Angle
		axis, plane         mgl64.Vec3
	}{
		{"upright", 0, 30, 60, mgl64.Vec3{0, 0, 1}, mgl64.Vec3{0, 1, 0}},
		{"lying", 90, 0, 0, mgl64.Vec3{1, 0, 0}, mgl64.Vec3{0, 0, -1}},
		{"lying, spun by a quarter", 90, 0, 90, mgl64.Vec3{1, 0, 0}, mgl64.Vec3{0, 1, 0}},
		{"lying toward y, spun by a quarter", 90, 90, 90, mgl64.Vec3{0, 1, 0}, mgl64.Vec3{-1, 0, 0}},
		{"half way", 45, 180, 0, mgl64.Vec3{-half, 0, half}, mgl64.Vec3{-half, 0, -half}},
	} {
		axis, plane := Axis{row.tilt * Degree, row.azimuth * Degree, row.spin * Degree}.Directions()
		if axis.Sub(row.axis).Len() > 1e-15 || plane.Sub(row.plane).Len() > 1e-15 {
			t.Errorf("%s: %v and %v, want %v and %v (turned by hand)", row.name, axis, plane, row.axis, row.plane)
		}
	}
	for line, want := range map[string]Axis{
		"axis = { tilt = 90, azimuth = 10 }":            {90 * Degree, 10 * Degree, 0},
		"axis = { tilt = 90, azimuth = 10, spin = 35 }": {90 * Degree, 10 * Degree, 35 * Degree},
	} {
		p, err := readText(strings.Replace(barrel, "gear = 96\n", "gear = 96\n"+line+"\n", 1))
		if err != nil || p.Axis == nil || *p.Axis != want {
			t.Fatalf("%s: read %v, error %v", line, p.Axis, err)
		}
		p.Axis.Tilt = 80 * Degree // so that it is written anew
		if text := written(t, p); !strings.Contains(text, strings.Replace(line, "90", "80", 1)) {
			t.Errorf("%s with a tilt of 80 is written as\n%s", line, text)
		}
	}
}

func TestDegreesReadBack(t *testing.T) {
	for _, deg := range []float64{0, 0.1, 41.5, 34.55, 89.99, 42.013412345678, 1.0 / 3} {
		a := Angle(deg) * Degree
		for range 2 {
			var v float64
			if _, err := fmt.Sscan(degrees(a), &v); err != nil {
				t.Fatal(err)
			}
			if Angle(v)*Degree != a {
				t.Errorf("%v is written as %s and read as another angle", deg, degrees(a))
			}
		}
	}
	if got := degrees(41.5 * Degree); got != "41.5" {
		t.Errorf("41.5 degrees are written as %s", got)
	}
}

func TestFileStem(t *testing.T) {
	for path, want := range map[string]string{
		"stones/oval.plan.toml": "oval",
		"oval.Plan.TOML":        "oval",
		"oval.toml":             "oval",
		"oval.7.stl":            "oval.7",
		".plan.toml":            ".plan",
		"":                      "",
	} {
		if got := FileStem(path); got != want {
			t.Errorf("%q: got %q, want %q", path, got, want)
		}
	}
}
