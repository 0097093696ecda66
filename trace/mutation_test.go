package trace

import (
	"encoding/json"
	"flag"
	"fmt"
	"os"
	"os/exec"
	"path/filepath"
	"regexp"
	"slices"
	"strings"
	"testing"
)

var mutate = flag.Bool("mutate", false, "try every mutation of the physics and write in CHECKS.md what caught it, which takes minutes")

// mutations are errors that one could make in the physics: a sign flipped, a factor
// dropped. old stands exactly once in the file.
var mutations = []struct{ what, file, old, new string }{
	{"reflectances of s and p exchanged in the amplitude of p", "fresnel.go", "rp := (n2*cosI - n1*cosT)",
		"rp := (n1*cosI - n2*cosT)"},
	{"phase of total reflection halved", "fresnel.go", "k := cosI / (eta * sin2I)",
		"k := cosI / (2 * eta * sin2I)"},
	{"sign of rs rp* below the critical angle", "fresnel.go", "InStep: rs * rp}", "InStep: -rs * rp}"},
	{"critical angle by the wrong ratio", "fresnel.go", "facets.Angle(math.Asin(n2 / n1))",
		"facets.Angle(math.Acos(n2 / n1))"},
	{"ratio of indices forgotten in refraction", "fresnel.go", "return d.scale(eta).plus(cosT-eta*cosI, n)",
		"return d.plus(cosT-cosI, n)"},
	{"axes turned by the wrong sine", "beam.go", "(nb*nb-na*na)/sin2I, -2*na*nb/sin2I",
		"(nb*nb-na*na)/sin2I, -na*nb/sin2I"},
	{"the half turn of phase on reflection dropped", "beam.go",
		"u, l.v = -at.InStep*u+at.Apart*l.v, -at.InStep*l.v-at.Apart*u",
		"u, l.v = at.InStep*u+at.Apart*l.v, at.InStep*l.v-at.Apart*u"},
	{"light that enters polarised the other way", "beam.go", "q: (at.Rp - at.Rs) / 2",
		"q: (at.Rs - at.Rp) / 2"},
	{"faint light decided the wrong way round", "beam.go", "if throw*all < through {",
		"if throw*all > through {"},
	{"power through a film without its indices", "crossing.go", "out := real(i2*c2) / (n1 * cosI)",
		"out := real(c2) / cosI"},
	{"the root that grows in an evanescent wave", "crossing.go", "if imag(n*c) < 0 {", "if imag(n*c) > 0 {"},
	{"a thick film's absorption on one pass for two", "crossing.go", "twice := square(once) * square(once)",
		"twice := square(once)"},
	{"coherence lost on the way through", "crossing.go", "tuv := c.ts*s, c.tp*p, c.tt*uv",
		"tuv := c.ts*s, c.tp*p, 0*c.tt*uv"},
	{"bent away from the normal on the way into a dish", "travel.go",
		"in := refract(d, n, 1/at.liquid, up, c.cosT)", "in := refract(d, n, at.liquid, up, c.cosT)"},
	{"absorption without the length of the way", "travel.go", "left := math.Exp(-j.absorb * s)",
		"left := math.Exp(-j.absorb)"},
	{"even instead of Lambert's scattering", "travel.go", "	u := j.dice.roll()\n",
		"	u := j.dice.roll()\n	u = 1 - u*u\n"},
	{"paper that also takes what it sends back", "travel.go", "kept.grow(l.light.i - sent.i)",
		"kept.grow(l.light.i)"},
	{"what the first surface mirrors lit as if returned", "travel.go", "		lit = litSurface\n",
		"		lit = litReturned\n"},
	{"direction beyond a facet without Snell's law", "follow.go",
		"up := eta*dir.dot(eye) + (at.CosT-eta*cosI)*t.toEye[j]",
		"up := dir.dot(eye) + 0*eta + (at.CosT-cosI)*t.toEye[j]"},
	{"reflected by half the normal part", "follow.go", "dir = dir.plus(-2*cosI, b.normal[j])",
		"dir = dir.plus(-cosI, b.normal[j])"},
	{"mirrored light from the wrong half of space", "follow.go",
		"	case up <= 0:\n		sums[mirrorsBelow] += r", "	case up > 0:\n		sums[mirrorsBelow] += r"},
	{"rocked the other way", "view.go", "mgl64.Vec3{-sin, cos, 0}", "mgl64.Vec3{sin, -cos, 0}"},
	{"picture turned by a quarter", "view.go", "turned.Rotate(mgl64.Vec3{1, 0, 0})",
		"turned.Rotate(mgl64.Vec3{0, 1, 0})"},
	{"spread of the means for the error of their mean", "sums.go",
		"math.Sqrt(spread / (met * (met - 1)))", "math.Sqrt(spread / (met - 1))"},
	{"light below not seen by mirroring", "sums.go", "s[mirrorsLight] + below*s[mirrorsBelow]",
		"s[mirrorsLight]"},
	{"ray on the wrong side of the wave's normal", "crystal_uniaxial.go",
		"k = k.scale(c.o).plus((c.e-c.o)*k.dot(c.axis), c.axis)",
		"k = k.scale(c.o).plus((c.o-c.e)*k.dot(c.axis), c.axis)"},
	{"tensor for its inverse", "crystal_uniaxial.go", "return d.plus((c.o/c.e-1)*d.dot(c.axis), c.axis)",
		"return d.plus((c.e/c.o-1)*d.dot(c.axis), c.axis)"},
	{"absorption counted along the wave's normal", "crystal_uniaxial.go", "return along * c.ray(k, true).dot(k) / n",
		"return along"},
	{"extraordinary wave leaning the wrong way", "crystal_uniaxial.go", "a, b := c.o+d*cv*cv, d*qc*cv",
		"a, b := c.o+d*cv*cv, -d*qc*cv"},
	{"optic axes at the wrong angle", "crystal_biaxial.go", "math.Sqrt((a-b)/(a-g)), math.Sqrt((b-g)/(a-g))",
		"math.Sqrt((b-g)/(a-g)), math.Sqrt((a-b)/(a-g))"},
	{"the faster wave's polarisation for the slower's", "crystal_biaxial.go", "	if sum == slower {\n		d = n.cross(d)",
		"	if sum != slower {\n		d = n.cross(d)"},
	{"second wave of a biaxial stone without the product of the roots", "crystal_biaxial.go",
		"(z2/z4 - product - 2*middle*sum)", "(z2/z4 - product)"},
	{"ray of a biaxial stone along the wave's normal", "crystal_biaxial.go", "ray: ray.scale(1 / ray.length()), extra: slower",
		"ray: k.scale(1 / (k.length() + 0*ray.x)), extra: slower"},
	{"evanescent wave of a biaxial stone with the other one's field", "crystal_biaxial.go",
		"	if sum == slower {\n		d = k.cross(d)", "	if sum != slower {\n		d = k.cross(d)"},
	{"absorption of a biaxial stone without the indices", "crystal_biaxial.go",
		"lost += c.index[i] * natural[i] * along * along", "lost += natural[i] * along * along"},
	{"fields beyond a facet that come instead of leave", "crystal.go",
		"return w.ht + z*w.es, z*w.hs - m2*w.et", "return w.ht - z*w.es, z*w.hs - m2*w.et"},
	{"power of a wave that goes in without the flux that comes", "crystal.go",
		"r.power[i] = w.flux / z * both", "r.power[i] = w.flux * both"},
	{"power by amplitude alone on reflection", "crystal.go",
		"r.power[i] = -square(amplitude[i]) * w.flux / in.flux", "r.power[i] = square(amplitude[i])"},
	{"grains that throw light forward only", "haze.go", "z := 2*j.dice.roll() - 1", "z := j.dice.roll()"},
	{"soil that takes by its thickness instead of the way", "haze.go", "math.Exp(-absorb*way)", "math.Exp(-absorb*way*way)"},
	{"light that slips out between the stone and a wall", "travel.go", "case !l.mirror && j.walled(k, l.x):", "case false:"},
	{"the other wave chosen", "travel_crystal.go", "j.dice.roll()*(power[0]+power[1]) >= power[0]",
		"j.dice.roll()*(power[0]+power[1]) < power[0]"},
	{"absorption of the two waves exchanged", "travel_crystal.go",
		"return c.absorption(k, extra, c.natural)",
		"return c.absorption(k, extra, [3]float64{c.natural[2], c.natural[1], c.natural[0]})"},
	{"a thin film's phase of one way for two", "crossing.go", "return (r1 + r2*once*once) / d, t1 * t2 * once / d",
		"return (r1 + r2*once) / d, t1 * t2 * once / d"},
	{"a thin film's phase by the wave in air", "crossing.go", "2*math.Pi*f.Thickness/wavelength) * nf * cf)",
		"2*math.Pi*f.Thickness/wavelength) * cf + 0*nf)"},
	{"light beyond a dish judged by its way in the liquid", "travel.go", "				j.count(left, out)\n",
		"				j.count(left, l.d)\n"},
	{"angle from the eye counted from the horizon", "follow.go", "sums[firstFrom+t.bins.of(up)] += through",
		"sums[firstFrom+t.bins.of(1-up)] += through"},
	{"overcast sky three times as bright at the horizon", "light_sky.go", "return (1 + 2*d[2]) / 3", "return (3 - 2*d[2]) / 3"},
	{"sunlight without the sun's height", "light_sky.go", "127.5 * math.Exp(-0.21/s) * s", "127.5 * math.Exp(-0.21/s)"},
	{"full radiator by the number of quanta", "illuminant.go", "math.Pow(560/l, 5) / math.Expm1(1.4388e7/(l*kelvin))",
		"math.Pow(560/l, 4) / math.Expm1(1.4388e7/(l*kelvin))"},
	{"dark counted as bright", "eye_measures.go", "if xyz[1] < darkBelow {", "if xyz[1] > darkBelow {"},
	{"contrast about zero instead of the mean", "eye_measures.go", "return squares.mean(of)/m - 1", "return squares.mean(of) / m"},
	{"fire not weighted by luminance", "eye_measures.go", "sum += xyz[1] * ((u-u0)", "sum += total[1] / float64(len(seen)) * ((u-u0)"},
	{"an eye that sees half as sharply", "eye.go", "2 * distance * math.Tan(eyeResolution.Radians()/2)",
		"2 * distance * math.Tan(eyeResolution.Radians())"},
	{"spectrum weighted by the observer's red for V(lambda)", "../gems/spectrum.go",
		"a, b := observer[spectrumFirst+i].y, observer[spectrumFirst+i+1].y", "a, b := observer[spectrumFirst+i].x, observer[spectrumFirst+i+1].x"},
	{"poles of a Sellmeier formula not squared", "../gems/formula.go", "c[i] * l2 / (l2 - c[i+1]*c[i+1])", "c[i] * l2 / (l2 - c[i+1])"},
	{"body colour run backwards between its knots", "../gems/absorption.go", "values[i] + t*(values[i+1]-values[i])",
		"values[i+1] + t*(values[i]-values[i+1])"},
	{"a carat of a tenth of a gram", "../facets/measure.go", "return m.VolumeMM3 * density / 200", "return m.VolumeMM3 * density / 100"},
	{"weight of a fitted stone by the square of its size", "tune/judge.go", "math.Pow(size.scale, 3)", "math.Pow(size.scale, 2)"},
	{"chance of a claim on both sides", "tune/search.go", "Quantile(1 - chance)", "Quantile(1 - 2*chance)"},
	{"margin under the critical angle for over", "tune/limits.go", "if slope < critical+margin {", "if slope < critical-margin {"},
	{"spread of an even error by its whole width", "tune/causes.go", "1.0/(12*float64(n))", "1.0/(3*float64(n))"},
	{"overcut that leaves more on", "tune/machine.go", "- m.OvercutMM*e.overcut[i][k]", "+ m.OvercutMM*e.overcut[i][k]"},
	{"stone tipped on the dop about the wrong point", "tune/machine.go", "d := p.Distance - p.Normal.Dot(b.about)", "d := p.Distance"},
}

// aimed names, for some files, tests to try before any others: those of what is computed
// there, in the file's own package.
func aimed(file string) string {
	switch file {
	case "crossing.go":
		return "Film|MeetAgainst"
	case "light_sky.go":
		return "Sky|Sunlight"
	case "illuminant.go":
		return "Illuminant|Planck|Daylight"
	case "eye.go", "eye_measures.go":
		return "Eye|Averaging|Dark|Contrast|Fire|Sparkle"
	case "travel.go":
		return "Dish|TravellerAgrees"
	case "follow.go":
		return "TestPath|AgainstSlow|TravellerAgrees|UniformSurround"
	}
	switch filepath.Dir(file) {
	case "tune":
		return "Tolerance|Tolerate|Causes|CutWithOneError|Certain|Limits|KeepRatio|FromRough"
	case "../facets":
		return "Measure|Weight"
	case "../gems":
		return "."
	}
	return ""
}

// quickTests are tried first on a mutation.
const quickTests = "Fresnel|Critical|Retardance|Film|Slab|Prism|Roof|Minimum|Rod|AgainstSlow|TestPath|Frame|TestHead|MapIs|" +
	"Dish|MeetAgainst|BodyColour|Ground|ClosedWhite|Soil|Lambert|Walk|Calcite|Axis|Optic|Principal|Crystal|Berreman|" +
	"SmallBirefringence|Hollow|Denser|Absorption|Doubling|Limits|Harding|TravellerAgrees"

// mutated is how the page lists one.
func mutated(i int) string {
	m := mutations[i]
	return fmt.Sprintf("| `%s` | %s | `%s` | `%s` |", m.file, m.what, oneCell(m.old), oneCell(m.new))
}

// TestMutations holds that every mutation still can be made and is listed on the page
// with the test that caught it. With -mutate it makes them, or those that -run chooses,
// one by one, in an overlay of the source, and runs the tests on each; the page keeps
// what it says of the others.
func TestMutations(t *testing.T) {
	page, err := os.ReadFile(checksPage)
	if err != nil {
		t.Fatal(err)
	}
	caught := make([]string, len(mutations)) // what the page says, or was found now
	for i, m := range mutations {
		source, err := os.ReadFile(m.file)
		if err != nil {
			t.Fatal(err)
		}
		if n := strings.Count(string(source), m.old); n != 1 {
			t.Errorf("mutation %q: %q stands %d times in %s, must once", m.what, m.old, n, m.file)
			continue
		}
		if _, after, found := strings.Cut(string(page), mutated(i)); found {
			caught[i], _, _ = strings.Cut(strings.TrimPrefix(after, " "), " |\n")
		}
		if *mutate {
			t.Run(m.file+" "+m.what, func(t *testing.T) { // so that -run can choose some
				caught[i] = catch(t, m.file, strings.Replace(string(source), m.old, m.new, 1))
				t.Log(caught[i])
				if caught[i] == "" {
					t.Error("caught by no test")
				}
			})
		} else if caught[i] == "" {
			t.Errorf("mutation %q is not on the page: run go test ./trace -run Mutations -mutate -timeout 2h",
				m.what)
		}
	}
	if *mutate && !t.Failed() && !slices.Contains(caught, "") {
		var b strings.Builder
		fmt.Fprintf(&b, "%s\n\nErrors put into the physics on purpose (go test ./trace -run Mutations -mutate), and the tests that failed: of the quick\n"+
			"ones, or of the others where no quick one did.\n\n| file | error | instead of | written | caught by |\n|---|---|---|---|---|\n", mutationsHeading)
		for i := range mutations {
			fmt.Fprintf(&b, "%s %s |\n", mutated(i), caught[i])
		}
		if page, err = os.ReadFile(checksPage); err != nil { // other checks may have been written meanwhile
			t.Fatal(err)
		}
		text := string(page)
		if at := strings.Index(text, mutationsHeading); at >= 0 {
			text = text[:at]
		} else {
			text += "\n"
		}
		if err := os.WriteFile(checksPage, []byte(text+b.String()), 0o644); err != nil {
			t.Fatal(err)
		}
	}
}

// catch names the tests that fail when a file of the package reads otherwise, none if all
// pass.
func catch(t *testing.T, file, source string) string {
	t.Helper()
	here, err := os.Getwd()
	if err != nil {
		t.Fatal(err)
	}
	dir := t.TempDir()
	other, overlay := filepath.Join(dir, filepath.Base(file)), filepath.Join(dir, "overlay.json")
	replace, err := json.Marshal(map[string]map[string]string{"Replace": {filepath.Join(here, file): other}})
	if err != nil {
		t.Fatal(err)
	}
	for name, content := range map[string][]byte{other: []byte(source), overlay: replace} {
		if err := os.WriteFile(name, content, 0o644); err != nil {
			t.Fatal(err)
		}
	}
	failed := regexp.MustCompile(`(?m)^--- FAIL: Test(\w+)`)
	tries := [][]string{{"-run", quickTests, "."}, {"-skip", "Mutations|" + quickTests, "."}}
	if tests := aimed(file); tests != "" {
		tries = append([][]string{{"-run", tests, "./" + filepath.Dir(file)}}, tries...)
	}
	for _, which := range tries {
		args := append([]string{"test", "-overlay", overlay, "-vet=off", "-count=1", "-timeout=20m"},
			which...)
		out, _ := exec.Command("go", args...).CombinedOutput()
		const most = 4 // of the tests that fail are named
		if found := failed.FindAllSubmatch(out, -1); found != nil {
			var names []string
			for _, f := range found[:min(most, len(found))] {
				names = append(names, string(f[1]))
			}
			if len(found) > most {
				names = append(names, fmt.Sprintf("and %d more", len(found)-most))
			}
			return strings.Join(names, ", ")
		}
		if strings.Contains(string(out), "[build failed]") {
			t.Fatalf("%s: the mutation does not compile:\n%s", file, out)
		}
		if strings.Contains(string(out), "panic: ") {
			return "a panic"
		}
	}
	return ""
}
