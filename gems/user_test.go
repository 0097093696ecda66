package gems

import (
	"bytes"
	"errors"
	"math"
	"os"
	"strconv"
	"strings"
	"testing"

	"pavilight/testdata/budget"
)

func TestReadSampleFile(t *testing.T) {
	f, err := os.Open("../testdata/gems/bench.toml")
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	ms, err := ReadMaterials(f, "bench.toml")
	if err != nil {
		t.Fatal(err)
	}
	l := Standard().With(ms...)
	melt, err := l.Find("melt twelve")
	if err != nil {
		t.Fatal(err)
	}
	n, err := melt.Index(LineD)
	if err != nil || math.Abs(n-1.62) > 1e-12 || melt.Density != 2.9 || melt.Hardness != (Span{5, 5.5}) || len(melt.Cautions) != 1 {
		t.Errorf("melt 12: index %v, %v, %+v", n, err, melt)
	}
	if melt.Rays[0].Source != "invented for this sample; given by the user" || !melt.Fitted() {
		t.Errorf("melt 12: source %q, fitted %v", melt.Rays[0].Source, melt.Fitted())
	}
	stone, err := l.Find("mine-tourmaline")
	if err != nil {
		t.Fatal(err)
	}
	if o, e := stone.Absorption.Coefficient(650); stone.Character() != UniaxialNegative || o <= e || e <= 0 {
		t.Errorf("tourmaline: %v, takes %g and %g per mm", stone.Character(), o, e)
	}
	plate, err := l.Find("window-plate")
	if err != nil {
		t.Fatal(err)
	}
	if o, _ := plate.Absorption.Coefficient(475); math.Abs(o-0.0025) > 1e-12 || plate.Fitted() {
		t.Errorf("plate takes %g per mm at 475 nm, fitted %v", o, plate.Fitted())
	}
	pale, err := l.Find("unknown-pale-stone")
	if err != nil {
		t.Fatal(err)
	}
	if n, err := pale.Index(450); err != nil || math.Abs(n-(1.612+1.615+1.623)/3) > 1e-12 || pale.Character() != BiaxialPositive {
		t.Errorf("pale stone: %g, %v, %v", n, err, pale.Character())
	}
	// Of yellow, light blue and deeper blue the first lets least blue light through, the last least red.
	if blue, red := pale.Absorption.Coefficients(450), pale.Absorption.Coefficients(650); !(blue[0] > blue[1] && red[2] > red[1] && red[1] > red[0]) {
		t.Errorf("pale stone: takes %v per mm of blue light, %v of red", blue, red)
	}
}

func TestReadMaterialsWithCRLFAndMark(t *testing.T) {
	text := "\ufeffmaterials = 1\r\n[[material]]\r\nkey = \"a\"\r\nsource = \"s\"\r\nindex = 1.5\r\n"
	ms, err := ReadMaterials(strings.NewReader(text), "a.toml")
	if err != nil || len(ms) != 1 || ms[0].Key != "a" {
		t.Errorf("%v, %v", ms, err)
	}
}

// Every fault names its line and the remedy, and all are told at once.
func TestReadMaterialsFaults(t *testing.T) {
	ray := func(coefficients, limits string) string {
		return "[[material.ray]]\nformula = \"cauchy\"\ncoefficients = " + coefficients + "\nrange_nm = " + limits + "\n"
	}
	const head = "materials = 1\n[[material]]\nkey = \"a\"\nsource = \"s\"\n" // four lines
	for _, row := range []struct {
		name, text string
		want       []string // a part of each line of the message, in order
	}{
		{"empty", "", []string{"x.toml: materials: is missing; write materials = 1"}},
		{"not TOML", "materials = 1\nkey = = 3\n", []string{"x.toml:2: this is not TOML"}},
		{"binary", "\x00\x01\x02", []string{"this is not TOML"}},
		{"other version", "materials = 2\n", []string{`x.toml:1: materials "2"`}},
		{"not a list", "materials = 1\nmaterial = 3\n", []string{`x.toml:2: material "3": is not a list of tables; write [[material]]`}},
		{"one table", "materials = 1\n[material]\nkey = \"a\"\n", []string{`is not a list of tables; write [[material]]`}},
		{"nothing in it", "materials = 1\n[[material]]\n", []string{
			`x.toml:2: key: is missing`, `x.toml:2: source: is missing`, `x.toml:2: index: is missing`}},
		{"bad key", "materials = 1\n[[material]]\nkey = \"My Glass\"\nsource = \"s\"\nindex = 1.5\n", []string{
			`x.toml:3: material "My Glass": key "My Glass": is not a key; use lower-case`}},
		{"key twice", head + "index = 1.5\n[[material]]\nkey = \"a\"\nsource = \"s\"\nindex = 1.6\n", []string{
			`x.toml:7: material "a": key "a": is used twice`}},
		{"index below air", head + "index = 0.9\n", []string{`x.toml:5: material "a": index "0.9"`}},
		{"absurd index", head + "index = 12\n", []string{`index "12": is not a number that can stand here; give one to three numbers from 1 (air) to 5`}},
		{"index in words", head + "index = \"high\"\n", []string{`index "high"`}},
		{"index nan", head + "index = nan\n", []string{`index "NaN"`}},
		{"four indices", head + "index = [1.5, 1.5, 1.5, 1.5]\n", []string{"has more than three rays"}},
		{"unsorted", head + "index = [1.62, 1.61, 1.63]\n", []string{"is not in ascending order"}},
		{"misspelt and impossible together", head + "indx = 1.5\ndensity = -1\nhardness = 11\n", []string{
			`x.toml:4: material "a": index: is missing`[10:], `x.toml:5: material "a": indx: is not known here`, `x.toml:6: material "a": density "-1"`,
			`x.toml:7: material "a": hardness "11"`}},
		{"index and ray", head + "index = 1.5\n[[material.ray]]\nformula = \"cauchy\"\ncoefficients = [1.5]\nrange_nm = [400, 700]\n",
			[]string{"stands beside index"}},
		{"ray without all", head + "[[material.ray]]\n", []string{"formula: is missing", "coefficients: is missing", "range_nm: is missing"}},
		{"unknown form", head + "[[material.ray]]\nformula = \"herzberger\"\ncoefficients = [1]\nrange_nm = [400, 700]\n",
			[]string{`x.toml:6: material "a": formula "herzberger": is not a form known here; use constant`}},
		{"odd pairs", head + "[[material.ray]]\nformula = \"sellmeier\"\ncoefficients = [1, 0.1, 2]\nrange_nm = [400, 700]\n",
			[]string{`x.toml:7: material "a": coefficients: come in pairs`}},
		{"coefficients for nm", head + "[[material.ray]]\nformula = \"cauchy\"\ncoefficients = [1.5, 4000]\nrange_nm = [400, 700]\n",
			[]string{"check them and their unit"}},
		{"rising index", head + "[[material.ray]]\nformula = \"cauchy\"\ncoefficients = [1.5, -0.004]\nrange_nm = [400, 700]\n",
			[]string{"make the index rise"}},
		{"reversed range", head + "[[material.ray]]\nformula = \"cauchy\"\ncoefficients = [1.5]\nrange_nm = [700, 400]\n",
			[]string{`range_nm "[700 400]": is not a range`}},
		{"points short of range", head + "[[material.ray]]\nformula = \"points\"\ncoefficients = [450, 1.51, 650, 1.50]\nrange_nm = [400, 700]\n",
			[]string{"do not reach over range_nm"}},
		{"dispersion too large", head + "index = 1.05\ndispersion = 0.9\n",
			[]string{`x.toml:6: material "a": dispersion "0.9": gives the index`}},
		{"rays that do not meet", head + ray("[1.5]", "[400, 500]") + ray("[1.6]", "[600, 700]"),
			[]string{"have ranges that do not meet"}},
		{"rays out of sight", head + ray("[1.5]", "[800, 900]"), []string{"say nothing about light that is seen"}},
		{"rays unsorted", head + ray("[1.6]", "[400, 700]") + ray("[1.5]", "[400, 700]") + ray("[1.7]", "[400, 700]"),
			[]string{"are not in ascending order"}},
		{"bad colour", head + "index = 1.5\n[material.colour]\nordinary = \"green\"\nthickness_mm = -2\n", []string{
			`x.toml:7: material "a": ordinary "green": is not a colour`, `x.toml:8: material "a": thickness_mm "-2"`}},
		{"three colours of one ray", head + "index = 1.5\n[material.colour]\nalpha = \"#111111\"\nbeta = \"#111111\"\ngamma = \"#111111\"\nthickness_mm = 2\n",
			[]string{`alpha: is for a material of three indices`}},
		{"a colour missing", head + "index = [1.5, 1.6, 1.7]\n[material.colour]\nalpha = \"#111111\"\ngamma = \"#111111\"\nthickness_mm = 2\n",
			[]string{`beta: is missing`}},
		{"two colours of three rays", head + "index = [1.5, 1.6, 1.7]\n[material.colour]\nordinary = \"#111111\"\nextraordinary = \"#222222\"\nthickness_mm = 2\n",
			[]string{`extraordinary: is not a ray of a material of three indices`}},
		{"a curve missing", head + "index = [1.5, 1.6, 1.7]\n[material.colour]\nwavelength_nm = [400, 700]\nalpha_per_mm = [0, 1]\ngamma_per_mm = [0, 1]\n",
			[]string{`beta_per_mm: has not one number`}},
		{"negative absorption", head + "index = 1.5\n[material.colour]\nwavelength_nm = [400, 700]\nordinary_per_mm = [0.1, -0.1]\n",
			[]string{`ordinary_per_mm "-0.1"`}},
		{"curves of two lengths", head + "index = 1.5\n[material.colour]\nwavelength_nm = [400, 700]\nordinary_per_mm = [0.1]\n",
			[]string{"has not one number for each wavelength"}},
		{"unsorted curve", head + "index = 1.5\n[material.colour]\nwavelength_nm = [700, 400]\nordinary_per_mm = [0.1, 0.1]\n",
			[]string{"in ascending order; sort it"}},
		{"texts", head + "index = 1.5\nname = 3\ncautions = \"lead\"\n", []string{
			`x.toml:6: material "a": name "3": is not a text`, `x.toml:7: material "a": cautions "lead": is not a list of texts`}},
		{"second of two", head + "index = 1.5\n[[material]]\nkey = \"b\"\nsource = \"s\"\nindex = 1.5\n[[material.ray]]\nformulae = 1\n",
			[]string{`stands beside index`, `formula: is missing`, `coefficients: is missing`, `range_nm: is missing`, `x.toml:11: material "b": formulae`}},
		{"too large", strings.Repeat("#", largestFile+1), []string{"x.toml: is larger than 1 MiB"}},
	} {
		t.Run(row.name, func(t *testing.T) {
			ms, err := ReadMaterials(strings.NewReader(row.text), "x.toml")
			var faults Faults
			if ms != nil || !errors.As(err, &faults) {
				t.Fatalf("no faults: %v, %v", ms, err)
			}
			if len(faults) != len(row.want) {
				t.Fatalf("%d faults, want %d:\n%v", len(faults), len(row.want), err)
			}
			for i, part := range row.want {
				if !strings.Contains(faults[i].Error(), part) {
					t.Errorf("fault %d is %q, want %q in it", i, faults[i].Error(), part)
				}
				if row.name != "binary" && faults[i].Remedy == "" {
					t.Errorf("fault %d has no remedy", i)
				}
			}
		})
	}
}

// Whatever the bytes, reading ends in materials that can be used or in faults.
func FuzzReadMaterials(f *testing.F) {
	sample, err := os.ReadFile("../testdata/gems/bench.toml")
	if err != nil {
		f.Fatal(err)
	}
	f.Add(sample)
	f.Add([]byte("materials = 1\n[[material]]\nkey = \"a\"\nsource = \"s\"\nindex = [1.5, 1.6]\ndispersion = 0.02\n"))
	f.Add([]byte("materials = 1\nmaterial = [{key = \"a\", source = \"s\", index = 1.5, colour = {ordinary = \"#123456\", thickness_mm = 1}}]\n"))
	f.Add([]byte("[[material]]\n[material.colour]\n[[material.ray]]\n\"\" = 1\na.b = 2\n"))
	f.Fuzz(func(t *testing.T, data []byte) {
		var ms []*Material
		var err error
		budget.Hold(t, materialsMemory(len(data)), func() { ms, err = ReadMaterials(bytes.NewReader(data), "fuzz.toml") })
		var faults Faults
		if err != nil && (!errors.As(err, &faults) || len(faults) == 0 || ms != nil) {
			t.Fatalf("not faults: %v", err)
		}
		if len(faults) > mostFaults+1 || err != nil && len(err.Error()) > 1000*len(faults) {
			t.Errorf("%d faults, %d bytes in words", len(faults), len(err.Error()))
		}
		if l := Standard().With(ms...); len(l.Materials()) < len(Standard().Materials()) {
			t.Error("bundled materials are gone")
		}
		for _, m := range ms {
			lo, hi := m.Range()
			for _, w := range []Wavelength{lo, (lo + hi) / 2, hi} {
				if n, err := m.Index(w); err != nil || !(n >= leastIndex && n <= greatestIndex) {
					t.Fatalf("%s: index %g at %v, %v", m.Key, n, w, err)
				}
				if o, e := m.Absorption.Coefficient(w); !(o >= 0 && e >= 0) || math.IsInf(o+e, 0) {
					t.Fatalf("%s: takes %g and %g per mm at %v", m.Key, o, e, w)
				}
			}
			m.Describe().Entries()
			m.Row()
		}
	})
}

// materialsMemory is what reading a file of so many bytes may set aside: the TOML package
// keeps a tree of what is written, in which an entry of two bytes takes a few hundred.
func materialsMemory(size int) int { return 1000 * size }

// Files that would take long or much memory are refused before they do.
func TestHostileMaterials(t *testing.T) {
	head := "materials = 1\n"
	numbered := func(line string) string {
		var b strings.Builder
		for i := 0; b.Len() < largestFile-100; i++ {
			b.WriteString(strings.ReplaceAll(line, "N", strconv.Itoa(i)))
		}
		return b.String()
	}
	for _, row := range []struct{ name, text, want string }{
		{"a hundred thousand keys", head + numbered("kN = 1\n"), "x.toml:101: the file has too many keys in one table; keep to 100"},
		{"keys in line", head + "a = {" + numbered("kN = 1,") + "z = 1}\n", "too many keys in one table"},
		{"tables", head + numbered("[kN]\n"), "too many tables"},
		{"a long key", head + strings.Repeat("a.", 100) + "a = 1\n", "too many parts in a key"},
		{"a long key in line", head + "x = {" + strings.Repeat("a.", largestFile/2-100) + "a = 1}\n", "too many parts in a key"},
		{"lists in lists", head + "x = " + strings.Repeat("[", largestFile-100), "nested more than"},
		{"tables in tables", head + "x = " + strings.Repeat("{a=", largestFile/3-100), "nested more than"},
		{"materials", head + strings.Repeat("[[material]]\n", mostTables), "5000 of them; keep at most 1000"},
		{"a long text", head + "x = \"" + strings.Repeat("y", largestFile-100) + "\"\n", "..."},
		{"a giant number", head + "[[material]]\nkey = \"a\"\nsource = \"s\"\nindex = 1e999999999\n", "x.toml"},
		{"many digits", head + "[[material]]\nkey = \"a\"\nsource = \"s\"\nindex = " + strings.Repeat("9", largestFile/2) + "\n", "x.toml"},
	} {
		var err error
		budget.Hold(t, materialsMemory(len(row.text)), func() { _, err = ReadMaterials(strings.NewReader(row.text), "x.toml") })
		if err == nil || !strings.Contains(err.Error(), row.want) {
			t.Errorf("%s: %.200v, want %q in it", row.name, err, row.want)
		} else if len(err.Error()) > 2000 {
			t.Errorf("%s: %d bytes of message", row.name, len(err.Error()))
		}
	}
}
