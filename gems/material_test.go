package gems

import (
	"math"
	"slices"
	"strings"
	"testing"
)

func mustFind(t *testing.T, key string) *Material {
	t.Helper()
	m, err := Find(key)
	if err != nil {
		t.Fatal(err)
	}
	return m
}

// Every row must say where its numbers come from and cover the spectrum that pictures
// are traced with.
func TestRowsAreComplete(t *testing.T) {
	taken := map[string]string{} // keys and names, to the key that holds them
	for _, m := range Standard().Materials() {
		t.Run(m.Key, func(t *testing.T) {
			if !keyForm.MatchString(m.Key) || m.Name == "" {
				t.Errorf("key %q or name %q is not one", m.Key, m.Name)
			}
			own := map[string]bool{}
			for _, name := range append([]string{m.Key, m.Name}, m.Names...) {
				name = strings.ToLower(name)
				if other, ok := taken[name]; ok && !own[name] {
					t.Errorf("name %q belongs to %s already", name, other)
				}
				taken[name], own[name] = m.Key, true
			}
			checkRays(t, m)
			checkNumbers(t, m)
		})
	}
}

func checkRays(t *testing.T, m *Material) {
	if n := len(m.Rays); n < 1 || n > 3 {
		t.Fatalf("%d rays", n)
	}
	if lo, hi := m.Range(); lo > visibleLo || hi < visibleHi {
		t.Errorf("index known over %v to %v only", lo, hi)
	}
	for i := range m.Rays {
		r := &m.Rays[i]
		if !(r.Lo > 0 && r.Hi > r.Lo) {
			t.Errorf("ray %d has no range", i)
		}
		if r.Source.Mark() == "" {
			t.Errorf("ray %d has no source with a mark: %q", i, r.Source)
		}
		if r.Fitted && r.Kind == Cauchy && r.SpreadSource.Mark() == "" && r.Source.Mark() != Computed {
			t.Errorf("ray %d is fitted to a dispersion without a source", i)
		}
		if r.Continued && r.Lo <= visibleLo && r.Hi >= visibleHi {
			t.Errorf("ray %d is continued though its range holds the spectrum", i)
		}
		if why := r.misshapen(); why != "" {
			t.Errorf("coefficients of ray %d %s", i, why)
		}
	}
	if p, err := m.Indices(LineD); err != nil || len(m.Rays) == 3 && !slices.IsSorted(p[:]) {
		t.Errorf("indices at D %v: %v", p, err)
	}
}

func checkNumbers(t *testing.T, m *Material) {
	for _, group := range []struct {
		what   string
		given  bool
		source Source
	}{
		{"density", m.Density != 0, m.DensitySource},
		{"hardness and cleavage", m.Hardness != (Span{}) || m.Cleavage != "", m.WearSource},
		{"toughness", m.Toughness != "", m.ToughnessSource},
		{"cautions", len(m.Cautions) > 0, m.CautionSource},
	} {
		if group.given != (group.source.Mark() != "") {
			t.Errorf("%s given is %v, but its source is %q", group.what, group.given, group.source)
		}
	}
	if m.Density <= 0 {
		t.Error("no density")
	}
	if s := m.DensityRange; s != (Span{}) && (s.Lo > m.Density || m.Density > s.Hi) {
		t.Errorf("density %g outside its range %v", m.Density, s)
	}
	if m.Hardness.Lo > m.Hardness.Hi || m.Hardness.Hi > 10 {
		t.Errorf("hardness %v", m.Hardness)
	}
	solid := m.Group <= Organic
	if solid && (m.Hardness == Span{} || len(m.Cautions) == 0 || m.Toughness == "") {
		t.Error("a stone without hardness, toughness or cautions")
	}
}

// In a clear material the index falls from violet to red all over the range in which
// it transmits (normal dispersion; Born and Wolf, section 2.3.4).
func TestDispersionIsNormal(t *testing.T) {
	for _, m := range Standard().Materials() {
		if m.Rays[0].Kind == Constant {
			continue
		}
		lo, hi := m.Range()
		before := Principal{math.Inf(1), math.Inf(1), math.Inf(1)}
		for w := max(lo, 300); w <= min(hi, 1000); w++ {
			p, err := m.Indices(w)
			if err != nil {
				t.Fatal(err)
			}
			for axis := range p {
				if !(p[axis] < before[axis]) || p[axis] < 1 || p[axis] > greatestIndex {
					t.Errorf("%s, axis %d: index %g at %v after %g", m.Key, axis, p[axis], w, before[axis])
				}
			}
			before = p
		}
	}
}

func TestSpeciesAndSurroundings(t *testing.T) {
	const fewest = 40 // species that cutters use
	minerals := 0
	for _, m := range Stones() {
		if m.Group == Mineral {
			minerals++
		}
	}
	if minerals < fewest {
		t.Errorf("%d minerals, want at least %d", minerals, fewest)
	}
	for i, key := range []string{"air", "water", "oil", "immersion-oil", "glycerol"} {
		if got := Surroundings()[i].Key; got != key {
			t.Errorf("surrounding %d is %s, want %s", i, got, key)
		}
	}
	first, second := Stones(), Stones()
	first[0].Rays[0].Coefficients[0] = 99
	first[0].Cautions[0] = "changed"
	if second[0].Rays[0].Coefficients[0] == 99 || second[0].Cautions[0] == "changed" || first[1].Key != second[1].Key {
		t.Error("two calls share their materials or differ in order")
	}
}

func TestOutsideTheRangeIsAnError(t *testing.T) {
	for _, row := range []struct {
		key string
		w   Wavelength
	}{
		{"diamond", 225}, {"diamond", 761}, {"topaz", 399.9}, {"topaz", 700.1}, {"moissanite", 399},
		{"water", Wavelength(math.NaN())}, {"air", 0}, {"quartz", -1},
	} {
		m := mustFind(t, row.key)
		n, err := m.Index(row.w)
		if err == nil || n != 0 {
			t.Errorf("%s at %v: index %g, no error", row.key, row.w, n)
			continue
		}
		if text := err.Error(); !strings.Contains(text, m.Name) || !strings.Contains(text, "choose") {
			t.Errorf("error does not say what and how to mend it: %v", text)
		}
	}
}

// Where a formula ends inside the spectrum it is carried on without a jump or a kink.
func TestContinuationIsSmooth(t *testing.T) {
	const (
		step      = 0.05 // nm
		tolerance = 1e-5 // of the second difference; the formulas' own is below
	)
	edges := 0
	for _, m := range Standard().Materials() {
		for i := range m.Rays {
			r := &m.Rays[i]
			if !r.Continued || r.Kind == Points { // straight pieces have kinks anyway
				continue
			}
			for _, edge := range []Wavelength{r.Lo, r.Hi} {
				if edge <= visibleLo || edge >= visibleHi {
					continue
				}
				edges++
				second := r.at(edge+step) - 2*r.at(edge) + r.at(edge-step)
				if math.Abs(second) > tolerance {
					t.Errorf("%s: index bends by %g at %v", m.Key, second, edge)
				}
			}
		}
	}
	if edges == 0 {
		t.Error("no edge was looked at")
	}
}

func TestFittedSaysSo(t *testing.T) {
	for key, want := range map[string]bool{
		"diamond": false, "corundum": false, "quartz": false, "water": false, "air": false, "chrysoberyl": false,
		"topaz": true, "oil": true, "immersion-oil": true, "moissanite": true, "rutile": true, "amber": true,
	} {
		if got := mustFind(t, key).Fitted(); got != want {
			t.Errorf("%s: fitted %v, want %v", key, got, want)
		}
	}
}

func TestPlain(t *testing.T) {
	m, err := Plain("check glass", 1.6, 2.9)
	if err != nil {
		t.Fatal(err)
	}
	n, err := m.Index(LineG)
	if err != nil || n != 1.6 || m.Density != 2.9 || m.Character() != Isotropic {
		t.Errorf("plain 1.6: %v, %v, density %g, %v", n, err, m.Density, m.Character())
	}
	for _, bad := range [][2]float64{
		{0.9, 1}, {5.1, 1}, {math.NaN(), 1}, {math.Inf(1), 1}, {-1.5, 1}, {1.5, -1}, {1.5, 26}, {1.5, math.NaN()},
	} {
		if m, err := Plain("x", bad[0], bad[1]); err == nil || m != nil || !strings.Contains(err.Error(), "use") {
			t.Errorf("index %g, density %g: %v, %v", bad[0], bad[1], m, err)
		}
	}
}
