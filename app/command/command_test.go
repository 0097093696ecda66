package command

import (
	"bytes"
	"context"
	"encoding/json"
	"errors"
	"fmt"
	"image/png"
	"io"
	"math"
	"os"
	"path/filepath"
	"slices"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/version"
	"pavilight/trace"
)

// outcome is what a command left behind.
type outcome struct {
	status         int
	stdout, stderr string
}

// runCommand runs the real command line in this process.
func runCommand(args ...string) outcome { return runIn(context.Background(), args...) }

func runIn(ctx context.Context, args ...string) outcome {
	var stdout, stderr bytes.Buffer
	status := Main(ctx, args, Environment{
		Stdout: &stdout,
		Stderr: &stderr,
		Window: func(context.Context, string) error { return errors.New("no window here") },
	})
	return outcome{status, stdout.String(), stderr.String()}
}

// quick makes a run of a few milliseconds.
func quick(args ...string) []string { return append(args, "--pixels", "20", "--samples", "4") }

// file writes a file for a test and returns its path.
func file(t *testing.T, name, text string) string {
	t.Helper()
	path := filepath.Join(t.TempDir(), name)
	if err := os.WriteFile(path, []byte(text), 0o644); err != nil {
		t.Fatal(err)
	}
	return path
}

// cube is a plan of a block, but for what a test writes into its gaps.
const cube = `plan = 1
name = "Block"
material = "%s"
width_mm = 5.0
gear = 96
[[tier]]
name = "G1"
side = "girdle"
angle = 90
index = [0, 24, 48, 72]
distance = 0.5
[[tier]]
name = "B1"
side = "pavilion"
angle = %s
index = [0]
%s
[[tier]]
name = "T"
side = "table"
angle = 0
index = [0]
distance = 0.4
`

func TestBadInput(t *testing.T) {
	missing := filepath.Join(t.TempDir(), "absent.toml")
	plan := func(material, angle, stop string) string {
		return file(t, "block.toml", fmt.Sprintf(cube, material, angle, stop))
	}
	open := file(t, "open.toml", strings.Split(fmt.Sprintf(cube, "quartz", "0", "distance = 0.4"), "[[tier]]\nname = \"B1\"")[0])
	tests := []struct {
		name   string
		args   []string
		status int
		words  []string // all of these must be in the message
	}{
		// The input is at fault.
		{"a missing file", []string{"look", missing}, InputFault, []string{"absent.toml"}},
		{"a missing scan", []string{"check", strings.TrimSuffix(missing, "toml") + "stl"}, InputFault, []string{"absent.stl"}},
		{"a folder", []string{"check", t.TempDir()}, InputFault, []string{"folder"}},
		{"an empty file", []string{"check", file(t, "empty.toml", "")}, InputFault, []string{"empty.toml"}},
		{"an empty scan", []string{"check", file(t, "empty.stl", "")}, InputFault, []string{"empty.stl"}},
		{"binary rubbish", []string{"check", file(t, "rubbish.toml", "\x00\xff\x1f\x8b\x08\x00rubbish")}, InputFault, []string{"rubbish.toml"}},
		{"binary rubbish as a scan", []string{"check", file(t, "rubbish.ply", "\x00\xff\x1f\x8b\x08\x00rubbish")}, InputFault, []string{"rubbish.ply"}},
		{"another kind of file", []string{"check", file(t, "picture.jpg", "x")}, InputFault, []string{"picture.jpg", ".toml", ".stl"}},
		{"an unknown material in the plan", []string{"look", plan("kryptonite", "0", "distance = 0.4")}, InputFault,
			[]string{"kryptonite", "block.toml:3: material", "diamond", "quartz"}},
		{"an unknown material on the line", []string{"look", "--material", "kryptonite"}, InputFault, []string{"kryptonite", "diamond"}},
		{"an unknown surrounding", []string{"look", "--in", "air,vinegar"}, InputFault, []string{"vinegar", "water"}},
		{"an unknown material asked about", []string{"gems", "kryptonite"}, InputFault, []string{"kryptonite", "diamond"}},
		{"an impossible angle", []string{"check", plan("quartz", "134", "distance = 0.4")}, InputFault, []string{"block.toml:", "B1", "134"}},
		{"two stop rules", []string{"check", plan("quartz", "0", "distance = 0.4\ncentre = 0.4")}, InputFault,
			[]string{"block.toml:", "B1", "distance", "centre"}},
		{"an open solid", []string{"check", open}, InputFault, []string{"open"}},

		// The command is at fault.
		{"an unknown command", []string{"polish"}, CommandFault, []string{"polish", "look", "check", "gems"}},
		{"a plan without a command", []string{"round.toml", "--json"}, CommandFault, []string{"a command must come before"}},
		{"proportions that are none", []string{"check", "--round", "56"}, CommandFault, []string{"56", "table=56"}},
		{"an impossible proportion", []string{"check", "--round", "table=56,crown=34,pavilion=400"}, CommandFault,
			[]string{"pavilion", "400", "20 to 65 degrees"}},
		{"an unknown proportion", []string{"check", "--round", "sparkle=56"}, CommandFault, []string{"sparkle", "table", "crown"}},
		{"an unknown outline", []string{"check", "--outline", "heart", "--proportions", "table=56"}, CommandFault, []string{"heart", "oval"}},
		{"proportions of nothing known", []string{"look", "--round", "table=56"}, CommandFault, []string{"--material"}},
		{"an unknown flag", []string{"look", "--sparkle"}, CommandFault, []string{"--sparkle"}},
		{"a flag of another command", []string{"check", "--tilt", "5"}, CommandFault, []string{"--tilt"}},
		{"two plans", []string{"check", "a.toml", "b.toml"}, CommandFault, []string{"b.toml"}},
		{"a value left out", []string{"look", "--out", "--json"}, CommandFault, []string{"--out", "value"}},
		{"a number left out", []string{"look", "--tilt"}, CommandFault, []string{"--tilt", "number"}},
		{"a tilt out of range", []string{"look", "--tilt", "95"}, CommandFault, []string{"--tilt", "95", "-89 to 89 degrees"}},
		{"a tilt that is no number", []string{"look", "--tilt", "NaN"}, CommandFault, []string{"--tilt", "NaN"}},
		{"a tilt in words", []string{"look", "--tilt", "a bit"}, CommandFault, []string{"--tilt", "a bit", "not a number"}},
		{"an endless turn", []string{"look", "--turn", "Inf"}, CommandFault, []string{"--turn"}},
		{"a turn beyond all numbers", []string{"look", "--turn", "1e999"}, CommandFault, []string{"--turn"}},
		{"a negative head", []string{"look", "--head", "-1"}, CommandFault, []string{"--head"}},
		{"paper whiter than white", []string{"look", "--below", "2"}, CommandFault, []string{"--below"}},
		{"a wavelength out of range", []string{"look", "--wavelength", "1200"}, CommandFault, []string{"--wavelength", "400 to 700 nm"}},
		{"no wavelength at all", []string{"look", "--wavelength", "0"}, CommandFault, []string{"--wavelength"}},
		{"negative pixels", []string{"look", "--pixels", "-1"}, CommandFault, []string{"--pixels", "-1"}},
		{"a thousand million pixels", []string{"look", "--pixels", "1000000000"}, CommandFault, []string{"--pixels"}},
		{"pixels as a power", []string{"look", "--pixels", "1e9"}, CommandFault, []string{"--pixels", "not a whole number"}},
		{"more pixels than memory", []string{"look", "--pixels", "2000"}, CommandFault, []string{"--pixels", "at most 1290"}},
		{"half a pixel", []string{"look", "--pixels", "20.5"}, CommandFault, []string{"--pixels", "not a whole number"}},
		{"no samples", []string{"look", "--samples", "0"}, CommandFault, []string{"--samples"}},
		{"an error of nothing", []string{"look", "--error", "0"}, CommandFault, []string{"--error"}},
		{"a negative seed", []string{"look", "--seed", "-1"}, CommandFault, []string{"--seed"}},
		{"a million workers", []string{"look", "--workers", "1000000"}, CommandFault, []string{"--workers"}},
		{"an unknown light", []string{"look", "--light", "moon"}, CommandFault, []string{"--light", "moon", "even"}},
		{"an impossible index", []string{"look", "--in", "0.5"}, CommandFault, []string{"--in", "0.5"}},
		{"no surroundings", []string{"look", "--in", ","}, CommandFault, []string{"--in"}},
		{"one surrounding twice", []string{"look", "--in", "air,water,Air"}, CommandFault, []string{"--in", "twice"}},
		{"a width of nothing", []string{"check", "--width", "0"}, CommandFault, []string{"--width"}},
		{"proportions without an outline", []string{"check", "--proportions", "table=56"}, CommandFault, []string{"--outline"}},
		{"an outline without proportions", []string{"check", "--outline", "round"}, CommandFault, []string{"--proportions"}},
		{"a plan and proportions", []string{"check", "a.toml", "--round", "table=56"}, CommandFault, []string{"--round"}},

		// The disk is at fault.
		{"a folder that cannot be", quick("look", "--out", filepath.Join(os.DevNull, "maps")), OwnFault, []string{"--out"}},
		{"a file in place of the folder", quick("look", "--out", file(t, "maps", "x")), OwnFault, []string{"--out"}},
		{"a window that cannot be", nil, OwnFault, []string{"no window here"}},
	}
	for _, tt := range tests {
		t.Run(tt.name, func(t *testing.T) {
			got := runCommand(tt.args...)
			if got.status != tt.status {
				t.Errorf("exit status %d, want %d", got.status, tt.status)
			}
			if got.stdout != "" {
				t.Errorf("a command that failed printed %q", got.stdout)
			}
			for _, word := range tt.words {
				if !strings.Contains(got.stderr, word) {
					t.Errorf("the message lacks %q", word)
				}
			}
			if strings.Contains(got.stderr, "goroutine") {
				t.Error("a panic")
			}
			if t.Failed() {
				t.Logf("pavilight %s\n%s", strings.Join(tt.args, " "), got.stderr)
			}
		})
	}
}

// keys returns the keys of the JSON object in the order in which they stand.
func keys(t *testing.T, object json.RawMessage) []string {
	t.Helper()
	d := json.NewDecoder(bytes.NewReader(object))
	if token, err := d.Token(); err != nil || token != json.Delim('{') {
		t.Fatalf("no object: %v, %v", token, err)
	}
	var names []string
	for d.More() {
		name, err := d.Token()
		if err != nil {
			t.Fatal(err)
		}
		names = append(names, name.(string))
		var skipped json.RawMessage
		if err := d.Decode(&skipped); err != nil {
			t.Fatal(err)
		}
	}
	return names
}

func wantKeys(t *testing.T, what string, object json.RawMessage, want ...string) {
	t.Helper()
	if got := keys(t, object); !slices.Equal(got, want) {
		t.Errorf("keys of %s: %q, want %q", what, got, want)
	}
}

// decoded runs a command that must succeed and decodes its JSON.
func decoded[T any](t *testing.T, args ...string) (value T) {
	t.Helper()
	got := runCommand(append(args, "--json")...)
	if got.status != Done {
		t.Fatalf("pavilight %s: exit status %d\n%s", strings.Join(args, " "), got.status, got.stderr)
	}
	if err := json.Unmarshal([]byte(got.stdout), &value); err != nil {
		t.Fatal(err)
	}
	return value
}

// The keys that programs which read the output may count on.
func TestLookJSONKeys(t *testing.T) {
	object := decoded[json.RawMessage](t, quick("look")...)
	wantKeys(t, "look", object, "plan", "material", "body_colour", "width_mm", "view", "light", "head_deg",
		"wavelength_nm", "polarisation", "kernel", "media")
	var parts struct {
		View  json.RawMessage
		Media []json.RawMessage
	}
	if err := json.Unmarshal(object, &parts); err != nil {
		t.Fatal(err)
	}
	wantKeys(t, "view", parts.View, "tilt_deg", "turn_deg")
	if len(parts.Media) != 3 {
		t.Fatalf("%d media, want 3", len(parts.Media))
	}
	wantKeys(t, "a medium", parts.Media[0], "name", "arrangement", "index_medium", "index_stone", "critical_angle_deg",
		"ledger", "standard_error", "lit", "from", "leaky_area", "windowed_area", "segments", "seconds")
	var medium map[string]json.RawMessage
	if err := json.Unmarshal(parts.Media[0], &medium); err != nil {
		t.Fatal(err)
	}
	entries := []string{"surface", "returned", "head", "leaked", "absorbed", "unresolved"}
	wantKeys(t, "the ledger", medium["ledger"], entries...)
	wantKeys(t, "the errors", medium["standard_error"], entries...)
	wantKeys(t, "lit", medium["lit"], "surface", "returned", "leaked", "sum")
}

func TestCheckJSONKeys(t *testing.T) {
	object := decoded[json.RawMessage](t, "check")
	wantKeys(t, "check", object, "facets", "width_mm", "length_mm", "longest_mm", "depth_mm", "table_percent", "crown_height_percent",
		"pavilion_depth_percent", "girdle_percent", "girdle_height_mm", "volume_mm3", "carats")
	var parts struct {
		Facets []json.RawMessage
		Girdle json.RawMessage `json:"girdle_percent"`
		Height json.RawMessage `json:"girdle_height_mm"`
	}
	if err := json.Unmarshal(object, &parts); err != nil {
		t.Fatal(err)
	}
	wantKeys(t, "a facet", parts.Facets[0], "tier", "index", "side", "normal", "distance", "area_mm2", "corners")
	wantKeys(t, "the girdle's share", parts.Girdle, "min", "max")
	wantKeys(t, "the girdle's height", parts.Height, "min", "max", "middle")
}

// What check prints must be the stone: corners on their planes and on the right side of
// all others, areas and volume those of the polygons. Source: Gauss's theorem.
func TestCheckDescribesASolid(t *testing.T) {
	const tolerance = 1e-9 // mm: coordinates of some mm carry 1e-15 of themselves, corners at flat angles lose four digits
	for _, args := range [][]string{{"check"}, {"check", "--width", "3.5", "--material", "diamond"}} {
		r := decoded[checkResult](t, args...)
		volume := 0.0
		for i, f := range r.Facets {
			if n := f.Normal.Len(); math.Abs(n-1) > tolerance {
				t.Errorf("facet %d: a normal of length %v", i, n)
			}
			sum := mgl64.Vec3{}
			for j, p := range f.Corners {
				if off := f.Normal.Dot(p) - f.Distance; math.Abs(off) > tolerance {
					t.Errorf("facet %d: a corner lies %v mm off its plane", i, off)
				}
				sum = sum.Add(p.Cross(f.Corners[(j+1)%len(f.Corners)]))
				for k, g := range r.Facets {
					if over := g.Normal.Dot(p) - g.Distance; over > tolerance {
						t.Errorf("facet %d: a corner lies %v mm outside facet %d", i, over, k)
					}
				}
			}
			area := sum.Dot(f.Normal) / 2 // positive only if the corners run anticlockwise
			if math.Abs(area-f.AreaMM2) > tolerance*10 {
				t.Errorf("facet %d: area %v, its corners say %v", i, f.AreaMM2, area)
			}
			volume += area * f.Distance / 3
		}
		if math.Abs(volume-r.VolumeMM3) > 1e-6 {
			t.Errorf("volume %v, the facets say %v", r.VolumeMM3, volume)
		}
		if len(args) > 1 {
			if math.Abs(r.WidthMM-3.5) > tolerance {
				t.Errorf("asked for 3.5 mm, got %v", r.WidthMM)
			}
			// 3.515 g/cm3 of diamond, as the material table has it, at 0.2 g a carat.
			if want := volume / 1000 * 3.515 / 0.2; r.Carats == nil || math.Abs(*r.Carats-want) > 1e-6 {
				t.Errorf("weight %v, want %v", r.Carats, want)
			}
		}
	}
}

// Closed form: a round's crown height is (100 - table)/2 times the tangent of the crown
// angle, its pavilion depth 50 times that of the pavilion angle without a culet (any
// trade text on proportions).
func TestCheckProportions(t *testing.T) {
	r := decoded[checkResult](t, "check", "--width", "6.5", "--material", "diamond",
		"--round", "table=56,crown=34,pavilion=40.5,star=50,lower=75,girdle=3,culet=0")
	tangent := func(degrees float64) float64 { return math.Tan(degrees * math.Pi / 180) }
	tests := []struct {
		name              string
		got, want, within float64
	}{
		{"width", r.WidthMM, 6.5, 1e-9},
		{"table", r.TablePercent, 56, 1e-6},
		{"crown height", r.CrownHeightPercent, 44.0 / 2 * tangent(34), 1e-6},
		{"pavilion depth", r.PavilionDepthPercent, 50 * tangent(40.5), 1e-6},
		{"girdle at its thickest", r.GirdlePercent.Max, 3, 1e-6},
	}
	for _, tt := range tests {
		if !(math.Abs(tt.got-tt.want) < tt.within) {
			t.Errorf("%s: %v, want %v", tt.name, tt.got, tt.want)
		}
	}
}

// A scan of a block of 4 by 3 by 2 mm, written as text; its volume is the product.
func TestCheckScan(t *testing.T) {
	path := file(t, "block.obj", `v 0.000000 0.000000 0.000000
v 4.000000 0.000000 0.000000
v 4.000000 3.000000 0.000000
v 0.000000 3.000000 0.000000
v 0.000000 0.000000 2.000000
v 4.000000 0.000000 2.000000
v 4.000000 3.000000 2.000000
v 0.000000 3.000000 2.000000
f 1 4 3 2
f 5 6 7 8
f 1 2 6 5
f 2 3 7 6
f 3 4 8 7
f 4 1 5 8
`)
	r := decoded[checkResult](t, "check", path)
	if math.Abs(r.VolumeMM3-24) > 1e-6 || len(r.Facets) != 6 || r.Carats != nil || r.Facets[0].Tier != nil || r.Facets[0].Index != nil {
		t.Errorf("%+v", r)
	}
	r = decoded[checkResult](t, "check", path, "--width", "6", "--material", "quartz")
	if math.Abs(r.VolumeMM3-24*8) > 1e-6 || math.Abs(r.WidthMM-6) > 1e-9 || r.Carats == nil {
		t.Errorf("twice as wide: %+v", r)
	}
	if got := runCommand(quick("look", path)...); got.status != CommandFault || !strings.Contains(got.stderr, "--material") {
		t.Errorf("a scan of nothing known: exit status %d, %s", got.status, got.stderr)
	}
	if got := runCommand(quick("look", path, "--material", "quartz")...); got.status != Done {
		t.Error(got.stderr)
	}
}

func TestLook(t *testing.T) {
	r := decoded[lookResult](t, quick("look", "--in", "air,1.55,5", "--tilt", "-12.5", "--turn=40", "--head", "15",
		"--wavelength", "589.3", "--below", "1", "--unpolarised", "--material", "diamond")...)
	if r.View != (lookView{TiltDeg: -12.5, TurnDeg: 40}) || r.HeadDeg != 15 || r.Polarisation != "averaged" ||
		r.WavelengthNM == nil || *r.WavelengthNM != 589.3 || r.Material != "diamond" || r.Light != "even" {
		t.Errorf("what was asked for is told as %+v", r)
	}
	var names []string
	for _, m := range r.Media {
		names = append(names, m.Name)
		// Each ray's entries sum to 1 within 1e-6 where rays are followed in 32-bit
		// numbers, closer elsewhere; hence their mean too.
		if sum := m.Ledger.Sum(); !(math.Abs(sum-1) < 1e-6) {
			t.Errorf("%s: the ledger sums to %v", m.Name, sum)
		}
		if m.Arrangement != "around" || m.Segments <= 0 || len(m.From) != 18 || !(m.Seconds > 0) {
			t.Errorf("%s: %+v", m.Name, m)
		}
	}
	if want := []string{"air", "1.55", "5"}; !slices.Equal(names, want) {
		t.Fatalf("media %q, want %q", names, want)
	}
	if r.Media[1].IndexMedium != 1.55 {
		t.Errorf("a plain index became %v", r.Media[1].IndexMedium)
	}
	// Common practice, no source: 24.4 degrees for diamond in air, given to a tenth.
	if c := r.Media[0].CriticalDeg; c == nil || *c < 24.35 || *c > 24.45 {
		t.Errorf("critical angle of diamond in air: %v, want 24.4", c)
	}
	if c := r.Media[2].CriticalDeg; c != nil {
		t.Errorf("from the thin into the dense side there is no critical angle, not %v", *c)
	}
	spectrum := decoded[lookResult](t, quick("look")...)
	if spectrum.WavelengthNM != nil || spectrum.Polarisation != "full" || spectrum.HeadDeg != 10 {
		t.Errorf("the defaults are told as %+v", spectrum)
	}
}

// The same seed gives the same numbers for any number of workers, another seed others.
func TestLookRepeats(t *testing.T) {
	run := func(args ...string) []lookMedium {
		media := decoded[lookResult](t, quick(append([]string{"look"}, args...)...)...).Media
		for i := range media {
			media[i].Seconds = 0
		}
		return media
	}
	one, eight, other := run("--workers", "1"), run("--workers", "8"), run("--seed", "2")
	text := func(m []lookMedium) string { b, _ := json.Marshal(m); return string(b) }
	if text(one) != text(eight) {
		t.Error("one worker and eight found different numbers")
	}
	if text(one) == text(other) {
		t.Error("another seed changed nothing: the comparison above sees nothing")
	}
}

func TestLookText(t *testing.T) {
	got := runCommand(quick("look", "--in", "air,5")...)
	if got.status != Done {
		t.Fatal(got.stderr)
	}
	for _, words := range []string{"critical angle", "there is none", "surface", "returned", "head", "leaked", "absorbed",
		"unresolved", "leaky area", "windowed area", "±", "polarisation tracked in full"} {
		if !strings.Contains(got.stdout, words) {
			t.Errorf("the table lacks %q:\n%s", words, got.stdout)
		}
	}
}

func TestLookWritesMaps(t *testing.T) {
	dir := filepath.Join(t.TempDir(), "new", "maps")
	got := runCommand(quick("look", "--in", "air,water,1.55", "--out", dir)...)
	if got.status != Done {
		t.Fatal(got.stderr)
	}
	want := []string{"leakage-1.55.png", "leakage-air.png", "leakage-water.png", "maps.png",
		"return-1.55.png", "return-air.png", "return-water.png"}
	entries, err := os.ReadDir(dir)
	if err != nil {
		t.Fatal(err)
	}
	var names []string
	for _, e := range entries {
		names = append(names, e.Name())
		data, err := os.ReadFile(filepath.Join(dir, e.Name()))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := png.Decode(bytes.NewReader(data)); err != nil {
			t.Errorf("%s: %v", e.Name(), err)
		}
		if !strings.Contains(got.stdout, e.Name()) {
			t.Errorf("%s is not named among what was written", e.Name())
		}
	}
	if !slices.Equal(names, want) {
		t.Errorf("files %q, want %q", names, want)
	}
}

// stopper cancels the run at its first word of progress.
type stopper struct {
	io.Writer
	cancel context.CancelFunc
}

func (s *stopper) Write(p []byte) (int, error) {
	s.cancel()
	return s.Writer.Write(p)
}

func TestStopped(t *testing.T) {
	ctx, cancel := context.WithCancel(context.Background())
	var stdout, stderr bytes.Buffer
	dir := filepath.Join(t.TempDir(), "maps")
	status := Main(ctx, []string{"look", "--error", "0.00001", "--out", dir}, Environment{
		Stdout:   &stdout,
		Stderr:   &stopper{&stderr, cancel},
		Terminal: true, // where the bar is drawn from the first pass on
	})
	if status != Stopped || stdout.Len() != 0 || !strings.Contains(stderr.String(), "stopped") {
		t.Errorf("exit status %d, stdout %q, stderr %q", status, stdout.String(), stderr.String())
	}
	if entries, _ := os.ReadDir(dir); len(entries) != 0 {
		t.Errorf("a stopped run wrote %v", entries)
	}
}

// full is a disk with no room left.
type full struct{}

func (full) Write([]byte) (int, error) { return 0, errors.New("no space left on device") }

func TestResultsThatCannotBeWritten(t *testing.T) {
	var stderr bytes.Buffer
	status := Main(context.Background(), []string{"gems"}, Environment{Stdout: full{}, Stderr: &stderr})
	if status != OwnFault || !strings.Contains(stderr.String(), "no space left") {
		t.Errorf("exit status %d, %q", status, stderr.String())
	}
}

func TestWindow(t *testing.T) {
	tests := []struct {
		args []string
		path string
		asks bool
	}{
		{nil, "", true},
		{[]string{"My Stone.TOML"}, "My Stone.TOML", true},
		{[]string{"scan.ply"}, "scan.ply", true},
		{[]string{"gems"}, "", false},
		{[]string{"--help"}, "", false},
	}
	for _, tt := range tests {
		opened, path := false, ""
		status := Main(context.Background(), tt.args, Environment{
			Stdout: io.Discard,
			Stderr: io.Discard,
			Window: func(_ context.Context, p string) error {
				opened, path = true, p
				return nil
			},
		})
		if status != Done || opened != tt.asks || path != tt.path {
			t.Errorf("%q: exit status %d, window %v on %q", tt.args, status, opened, path)
		}
	}
}

func TestHelp(t *testing.T) {
	for _, args := range [][]string{{"--help"}, {"-h"}, {"look", "--help"}, {"look", "-h", "--tilt", "4"}, {"gems", "--help"}} {
		got := runCommand(args...)
		if got.status != Done || !strings.Contains(got.stdout, "Usage: pavilight") || got.stderr != "" {
			t.Errorf("%q: exit status %d\n%s%s", args, got.status, got.stdout, got.stderr)
		}
	}
}

func TestVersion(t *testing.T) {
	for _, args := range [][]string{{"--version"}, {"look", "--version", "--tilt", "4"}} {
		got := runCommand(args...)
		if got.status != Done || !strings.HasPrefix(got.stdout, "Pavilight "+version.Number) ||
			!strings.Contains(got.stdout, trace.Kernel()) || got.stderr != "" {
			t.Errorf("%q: exit status %d\n%s%s", args, got.status, got.stdout, got.stderr)
		}
	}
	if b := decoded[version.Build](t, "--version"); b.Version != version.Number || b.Kernel != trace.Kernel() {
		t.Errorf("as JSON: %+v", b)
	}
}

func TestGems(t *testing.T) {
	table := runCommand("gems")
	rows := decoded[[]gemRow](t, "gems")
	if len(rows) == 0 {
		t.Fatal("the table is empty")
	}
	for _, r := range rows {
		if !strings.Contains(table.stdout, r.Key) {
			t.Errorf("the table lacks %s", r.Key)
		}
		if len(r.Rays) == 0 || r.Rays[0].Source == "" {
			t.Errorf("%s has no source", r.Key)
		}
		one := runCommand("gems", r.Key)
		if one.status != Done || !strings.Contains(one.stdout, string(r.Rays[0].Source)) {
			t.Errorf("%s: exit status %d, %s%s", r.Key, one.status, one.stdout, one.stderr)
		}
		again := decoded[gemRow](t, "gems", r.Key)
		if again.Index == nil || *again.Index != *r.Index {
			t.Errorf("%s: asked alone it has another index", r.Key)
		}
	}
}

func TestProgress(t *testing.T) {
	var b strings.Builder
	p := newProgress(&b, false)
	for _, done := range []float64{0, 0.04, 0.1, 0.15, 0.3, 0.25, 0.999, 1, 1} {
		p.show(done)
	}
	p.clear()
	if want := "traced 10 %\ntraced 30 %\ntraced 90 %\ntraced 100 %\n"; b.String() != want {
		t.Errorf("elsewhere: %q, want %q", b.String(), want)
	}
	b.Reset()
	p = newProgress(&b, true)
	for _, done := range []float64{0, 0.5, 0.4, 1} {
		p.show(done)
	}
	p.clear()
	if n := strings.Count(b.String(), "\r["); n != 3 || strings.Contains(b.String(), "\n") || !strings.Contains(b.String(), " 50 %") {
		t.Errorf("on a terminal: %q", b.String())
	}
}

func TestWithError(t *testing.T) {
	tests := []struct {
		value, standardError float64
		want                 string
	}{
		{0.661234, 0.000401, "0.66123 ± 0.00041"},
		{0.5, 0.0004, "0.50000 ± 0.00040"},
		{0.5, 1e-9, "0.50000 ± 0.00001"},
		{0, 0, "0.00000 ± 0.00000"},
	}
	for _, tt := range tests {
		if got := withError(tt.value, tt.standardError); got != tt.want {
			t.Errorf("%v, %v: %q, want %q", tt.value, tt.standardError, got, tt.want)
		}
	}
}
