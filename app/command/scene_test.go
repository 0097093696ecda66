package command

import (
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"pavilight/trace"
)

// TestLookSaysWhatIsArranged: two ledgers that differ by a flag must not look alike.
func TestLookSaysWhatIsArranged(t *testing.T) {
	got := runCommand(quick("look", "--in", "oil", "--wet", "P1,P2", "--film", "C1=1.48:20000", "--ground", "0.8", "--setting", "0.5,0.2",
		"--illuminant", "A", "--distance", "300", "--aside", "-30", "--below", "0.4")...)
	for _, want := range []string{"only P1,P2 wet and all else in air", "a film of index 1.48, 20000 nm thick on C1", "ground that sends back 0.8",
		"a wall behind the pavilion that sends back 0.5", "open over 0.2 of its depth", "spectrum A", "eye 300 mm away", "and -30 mm aside",
		"luminance 0.4 below"} {
		if !strings.Contains(got.stdout, want) {
			t.Errorf("%q is missing: %s%s", want, got.stdout, got.stderr)
		}
	}
	if bare := decoded[lookResult](t, quick("look", "--in", "air")...); len(bare.Arranged) != 0 {
		t.Errorf("a bare stone has %v", bare.Arranged)
	}
}

// TestScene tries every flag that puts something around the stone: each must change
// the ledger in the way that it can only change it.
func TestScene(t *testing.T) {
	look := func(flags ...string) lookMedium {
		t.Helper()
		return decoded[lookResult](t, quick(append([]string{"look", "--in", "air", "--wavelength", "550"}, flags...)...)...).Media[0]
	}
	bare := look()
	within := func(what string, got, want, tolerance float64) {
		t.Helper()
		if !(math.Abs(got-want) <= tolerance) {
			t.Errorf("%s: %v, want %v within %v", what, got, want, tolerance)
		}
	}
	// The same rays in the general tracer; the fast one counts in single precision.
	within("leaked with paths told", look("--paths").Ledger.Leaked, bare.Ledger.Leaked, 1e-3)
	if p := look("--paths").PathLengthMM; p == nil || *p < 5 || *p > 100 {
		t.Errorf("way inside an 8 mm stone: %v", p)
	}
	oil := look("--wet", "P1,P2", "--in", "oil")
	if !(oil.Ledger.Leaked > bare.Ledger.Leaked+0.3) {
		t.Errorf("an oiled pavilion leaks %v, a clean one %v", oil.Ledger.Leaked, bare.Ledger.Leaked)
	}
	within("surface with an oiled pavilion", oil.Ledger.Surface, bare.Ledger.Surface, 1e-3)
	film := look("--film", "P1,P2=1.48:20000")
	within("leaked under a clear film, which keeps the critical angle", film.Ledger.Leaked, bare.Ledger.Leaked, 0.02)
	dust := look("--film", "P1,P2=1.48:20000:0:0.5")
	if !(dust.Ledger.Leaked > film.Ledger.Leaked+0.05) {
		t.Errorf("leaked %v under dust and %v under a clear film: dust throws light out", dust.Ledger.Leaked, film.Ledger.Leaked)
	}
	soil := look("--film", "P1,P2=1.48:20000:0.01")
	if !(soil.Ledger.Absorbed > 0.1) {
		t.Errorf("a soiled pavilion absorbs %v", soil.Ledger.Absorbed)
	}
	within("leaked over white ground", look("--ground", "1").Ledger.Leaked, 0, 1e-9)
	dark, bright := look("--setting", "0.2"), look("--setting", "0.9")
	if !(bright.Ledger.Leaked < dark.Ledger.Leaked*0.6) {
		t.Errorf("%v are lost in a bright setting, %v in a dark one", bright.Ledger.Leaked, dark.Ledger.Leaked)
	}
	if body := look("--body", "#803060:5"); !(body.Ledger.Absorbed > 0.2) {
		t.Errorf("a deep body colour absorbs %v", body.Ledger.Absorbed)
	}
	dish := decoded[lookResult](t, quick("look", "--in", "air", "--dish", "water", "--wavelength", "550")...).Media[1]
	if dish.Arrangement != "dish" {
		t.Errorf("the arrangement is %q", dish.Arrangement)
	}
	within("mirrored by water", dish.Ledger.Surface, math.Pow(0.334/2.334, 2), 1e-3)
	near := look("--distance", "300")
	within("returned to an eye 300 mm away", near.Ledger.Returned, bare.Ledger.Returned, 0.05)
	if near.Ledger.Returned == bare.Ledger.Returned {
		t.Error("a near eye sees the very same")
	}
	doubly := look("--axis", "90,0")
	within("returned from both rays", doubly.Ledger.Returned, bare.Ledger.Returned, 0.05)
	if doubly.Ledger.Returned == bare.Ledger.Returned {
		t.Error("an optic axis changes nothing at all")
	}
	if text := runCommand(quick("look", "--axis", "90,0")...).stdout; !strings.Contains(text, "at its index 1.7600") || !strings.Contains(text, "34.62°") {
		t.Errorf("the critical angle of the lower index is not told: %s", text) // n_e 1.76000 of Malitson & Dodge 1972: asin(1/n)
	}
	three := func(flags ...string) string {
		t.Helper()
		return runCommand(quick(append([]string{"look", "--in", "air", "--material", "topaz"}, flags...)...)...).stdout
	}
	text := three("--axis", "90,10,35")
	for _, want := range []string{
		"acute bisectrix 90, 10 °, plane of the optic axes turned by 35 °, the two 60 ° apart",
		"at its index 1.6190", "at its index 1.6210", "at its index 1.6270", "38.15°", // asin(1/1.619), on which warnings rest
	} {
		if !strings.Contains(text, want) {
			t.Errorf("of topaz %q is not told: %s", want, text)
		}
	}
	if strings.Contains(text, "as if singly refracting") || !strings.Contains(three(), "as if singly refracting") {
		t.Error("whether topaz is followed as doubly refracting must be told right")
	}
	if text := three("--axis", "0,0", "--body", "#e0e0a0/#3030c0/#a040c0:4"); !strings.Contains(text, "#3030c0 along beta") {
		t.Errorf("three colours are not told: %s", text)
	}
	plan, err := os.ReadFile("../../testdata/plans/round.toml")
	if err != nil {
		t.Fatal(err)
	}
	oriented := file(t, "oriented.toml", strings.Replace(string(plan), "gear = 96\n", "gear = 96\naxis = { tilt = 90, azimuth = 10, spin = 35 }\n", 1))
	if text := three("--axis", "plan", oriented); !strings.Contains(text, "acute bisectrix 90, 10 °, plane of the optic axes turned by 35 °") {
		t.Errorf("the plan's axis is not taken: %s", text)
	}
	room := look("--light", "room", "--head", "0")
	if room.Lit.Sum == bare.Lit.Sum || !(room.Lit.Sum > 0) {
		t.Errorf("in a room %v is seen", room.Lit)
	}
	var byTier float64
	for _, tier := range look("--tiers").Tiers {
		byTier += tier.Leaked
	}
	within("leaked by all tiers", byTier, bare.Ledger.Leaked, 5e-3)
	chance := 5 * math.Hypot(room.StandardError.Leaked, bare.StandardError.Leaked)
	within("the ledger knows no light", room.Ledger.Leaked, bare.Ledger.Leaked, chance)
}

// TestTrueColour writes pictures and tells measures with what they hold for.
func TestTrueColour(t *testing.T) {
	out := t.TempDir()
	r := decoded[lookResult](t, "look", "--in", "air", "--pixels", "20", "--samples", "8", "--colour", "--light", "lamps",
		"--distance", "3000", "--out", out)
	seen := r.Media[0].Seen
	if seen == nil || seen.Light != "lamps" || seen.DistanceMM != 3000 || seen.WidthMM != r.WidthMM {
		t.Fatalf("seen: %+v", seen)
	}
	for name, e := range map[string]trace.Estimate{"contrast": seen.Contrast, "dark area": seen.DarkArea, "luminance": seen.Luminance} {
		if !(e.Value > 0 && e.Error > 0) {
			t.Errorf("%s: %v", name, e)
		}
	}
	if info, err := os.Stat(filepath.Join(out, "colour-air.png")); err != nil || info.Size() < 500 {
		t.Errorf("the picture: %v", err)
	}
}

func TestSceneFaults(t *testing.T) {
	for _, row := range []struct {
		flags []string
		words string
	}{
		{[]string{"--light", "moon"}, "even, overcast"},
		{[]string{"--light", "overcast", "--illuminant", "Z9"}, "--illuminant"},
		{[]string{"--light", "overcast", "--zenith", "high"}, "--zenith"},
		{[]string{"--film", "P1"}, "P1,P2=1.48:20000"},
		{[]string{"--film", "X9=1.4:300"}, "no facet of that tier"},
		{[]string{"--film", "P1=0.2:300"}, "index 0.2"},
		{[]string{"--film", "P1=1.5:300:0:1"}, "thicker than 5000 nm"},
		{[]string{"--film", "P1=1.5:30000:0:-1"}, "scattering -1 of a film"},
		{[]string{"--wet", "X9"}, "no facet of that tier"},
		{[]string{"--wet", "P1", "--dish", "water", "--in", "oil", "--ground", "2"}, "outside 0 to 1"},
		{[]string{"--setting", "0.5,0.5,0.5"}, "1 or 2 numbers"},
		{[]string{"--body", "purple:3"}, "#rrggbb"},
		{[]string{"--body", "#102030"}, "millimetres"},
		{[]string{"--body", "#102030/#203040/#304050:4"}, "give one colour, or two"},
		{[]string{"--body", "#102030/#203040:4", "--material", "topaz"}, "or three with slashes between"},
		{[]string{"--body", "#102030/#203040:4", "--material", "spinel"}, "give one colour"},
		{[]string{"--body", "#102030/#203040/#1:4", "--material", "topaz"}, "#rrggbb"},
		{[]string{"--axis", "10"}, "2 or 3 numbers"},
		{[]string{"--axis", "1,2,3,4"}, "2 or 3 numbers"},
		{[]string{"--axis", "90,1e9"}, "-360 to 360"},
		{[]string{"--axis", "90,inf"}, "-360 to 360"},
		{[]string{"--axis", "plan"}, "names no axis"},
		{[]string{"--colour", "--wavelength", "500"}, "colour"},
		{[]string{"--distance", "2"}, "too close"},
		{[]string{"--dish", "water,"}, "--dish"},
	} {
		got := runCommand(quick(append([]string{"look"}, row.flags...)...)...)
		if got.status != CommandFault || !strings.Contains(got.stderr, row.words) || strings.Contains(got.stderr, "goroutine") {
			t.Errorf("%v: exit status %d, %s; want words %q", row.flags, got.status, got.stderr, row.words)
		}
	}
	if got := runCommand(quick("look", "--light", "absent.hdr")...); got.status != InputFault {
		t.Errorf("an absent panorama: exit status %d, %s", got.status, got.stderr)
	}
}

// TestOwnMaterials takes a material of the user's own, for stone and surrounding.
func TestOwnMaterials(t *testing.T) {
	ownSettings(t)
	own := file(t, "own.toml", `materials = 1

[[material]]
key = "dream"
name = "Dreamstone"
index = 2.0
density = 3.0
source = "our own bench, refractometer"
`)
	r := decoded[lookResult](t, quick("look", "--materials", own, "--material", "dream", "--in", "air")...)
	if got := r.Media[0].IndexStone; got != 2 {
		t.Errorf("index %v, want 2", got)
	}
	if got := runCommand("gems", "dream", "--materials", own); got.status != Done || !strings.Contains(got.stdout, "Dreamstone") {
		t.Errorf("exit status %d, %s%s", got.status, got.stdout, got.stderr)
	}
	if got := runCommand(quick("look", "--materials", "absent.toml")...); got.status != InputFault || !strings.Contains(got.stderr, "absent.toml") {
		t.Errorf("an absent file: exit status %d, %s", got.status, got.stderr)
	}
}
