package sheet

import (
	"bytes"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata/budget"
)

func TestMachineTemplateReads(t *testing.T) {
	m, err := ReadMachine(strings.NewReader(MachineTemplate), "mine.toml")
	if err != nil {
		t.Fatal(err)
	}
	if m.Name != "my machine" || m.Gear != 96 || !m.CrownReversed || m.TransferIndex != 96 ||
		math.Abs(m.Cheater.Degrees()-4) > 1e-12 || math.Abs(m.AngleStep.Degrees()-0.1) > 1e-12 || math.Abs(m.TableAdapter.Degrees()-45) > 1e-12 {
		t.Errorf("read %+v", m)
	}
	for _, key := range machineKeys() {
		if !strings.Contains(MachineTemplate, key+" =") {
			t.Errorf("the template does not show %s", key)
		}
	}
}

func TestMachineFaults(t *testing.T) {
	for _, row := range []struct {
		name, text string
		want       []string // parts of the message, each fault its own
	}{
		{"empty", "", []string{"write machine = 1"}},
		{"all at once", "machine = 1\ngear = 2\nangle_step = 0\ncheater = -1\ncrown_numbers = \"mirrored\"\n",
			[]string{`:2: gear "2"`, `:3: angle_step "0"`, `:4: cheater "-1"`, `:5: crown_numbers "mirrored"`}},
		{"unknown key beside a bad value", "machine = 1\nteeth = 96\ncheater = 99\n", []string{":2: teeth: a machine has no such key", ":3: cheater"}},
		{"wrong type", "machine = 1\ngear = \"many\"\n", []string{":2: gear"}},
		{"not TOML", "machine = 1\ngear == 4\n", []string{":2:"}},
		{"no number", "machine = 1\ntransfer_index = nan\n", []string{":2: transfer_index"}},
		{"newer", "machine = 2\n", []string{`:1: machine "2"`}},
		{"too large", "machine = 1\n#" + strings.Repeat("x", mostMachineBytes), []string{"64 KiB"}},
	} {
		_, err := ReadMachine(strings.NewReader(row.text), "m.toml")
		var faults facets.Faults
		if !errors.As(err, &faults) {
			t.Errorf("%s: error %v is no Faults", row.name, err)
			continue
		}
		if len(faults) != len(row.want) {
			t.Errorf("%s: %d faults, want %d:\n%v", row.name, len(faults), len(row.want), err)
		}
		for _, part := range row.want {
			if !strings.Contains(err.Error(), part) {
				t.Errorf("%s: %q lacks %q", row.name, err, part)
			}
		}
	}
}

func TestMachinesByName(t *testing.T) {
	folder := Machines(t.TempDir())
	if err := os.WriteFile(filepath.Join(string(folder), "attic.toml"), []byte("machine = 1\ngear = 77\n"), 0o600); err != nil {
		t.Fatal(err)
	}
	if m, err := folder.Open("attic"); err != nil || m.Gear != 77 || m.Name != "attic" {
		t.Errorf("by name: %+v, %v", m, err)
	}
	if m, err := folder.Open(filepath.Join(string(folder), "attic.toml")); err != nil || m.Gear != 77 {
		t.Errorf("by file: %+v, %v", m, err)
	}
	for name, want := range map[string]string{"cellar": "known are attic", "a/b": "neither", "none.toml": "there is no such machine"} {
		_, err := folder.Open(name)
		var faults facets.Faults
		if !errors.As(err, &faults) || !strings.Contains(err.Error(), want) {
			t.Errorf("%s: %v, want %q in it", name, err, want)
		}
	}
	if names := Machines(filepath.Join(string(folder), "nowhere")).Names(); names != nil {
		t.Errorf("a folder that is not there holds %v", names)
	}
}

// cutOnMachine cuts what a sheet says on a model of a machine and returns the planes in
// the stone's frame. The quill turns by the number on the gear about its own axis, which
// points to the lap; the lap takes off what stands toward a fixed direction across the
// quill. While the pavilion faces the lap that axis is the stone's -z, on the transferred
// stone +z; the stone is keyed to the quill so that azimuth 0 stands toward the lap at
// number 0 on the pavilion, and at the transfer's number the same azimuth stands there on
// both sides. Nothing here is taken from Machine.Shown.
func cutOnMachine(s *Sheet) []facets.Plane {
	teeth := float64(s.Machine.Gear)
	key := func(toLap float64) float64 { // azimuth that stands toward the lap at number 0
		if toLap < 0 {
			return 0
		}
		return 2 * (2 * math.Pi * s.Machine.TransferIndex / teeth)
	}
	var planes []facets.Plane
	for i := range s.Rows {
		r := &s.Rows[i]
		toLap := -1.0
		if r.Facing == facets.Crown {
			toLap = 1
		}
		for _, set := range r.Settings {
			turned := 2 * math.Pi * (float64(set.Tooth) + set.Cheater.Degrees()/(360/teeth)) / teeth
			// Turning the quill about toLap*z carries the stone along; the direction to the
			// lap moves the other way in the stone's frame.
			rotation := mgl64.QuatRotate(-turned, mgl64.Vec3{0, 0, toLap})
			sin, cos := math.Sincos(key(toLap))
			across := rotation.Rotate(mgl64.Vec3{cos, sin, 0})
			angle := r.Reading.Radians()
			n := across.Mul(math.Sin(angle)).Add(mgl64.Vec3{0, 0, toLap * math.Cos(angle)})
			planes = append(planes, facets.Plane{Tier: r.Tier.Name, Index: math.NaN(), Side: r.Tier.Side, Normal: n.Normalize(),
				Distance: r.Solved.Distance * s.Solution.Scale})
		}
	}
	return planes
}

// TestTheMachineCutsThePlan cuts a stone without mirror symmetry on the model of a
// machine with the sheet's numbers and gets the solver's stone; with the crown's numbers
// run the wrong way it gets another.
func TestTheMachineCutsThePlan(t *testing.T) {
	for _, row := range []struct {
		name     string
		transfer float64
		gear     int
		reversed bool
		same     bool // the stone is the plan's
	}{
		{"reversed about 96", 96, 96, true, true},
		{"reversed about 30", 30, 96, true, true},
		{"reversed on another gear", 15, 120, true, true},
		{"not reversed, wrongly", 96, 96, false, false},
	} {
		job := sampleJob(t, "twist.toml")
		job.Machine.Gear, job.Machine.TransferIndex, job.Machine.CrownReversed = row.gear, row.transfer, row.reversed
		job.Machine.AngleStep = 0.001 * facets.Degree
		s, err := New(job)
		if err != nil {
			t.Fatal(err)
		}
		cut, err := facets.FromPlanes("cut", cutOnMachine(s))
		if err != nil {
			t.Errorf("%s: %v", row.name, err)
			continue
		}
		// Angles are set to a thousandth of a degree: corners move by less than the reach
		// of 9 mm times that, some 2e-4 mm, and meet angles double it a few times.
		const tolerance = 2e-3 // mm
		if far := farthestCorner(s.Solution.Stone, cut); (far < tolerance) != row.same {
			t.Errorf("%s: corners of plan and cut stone lie %.5f mm apart; same stone wanted: %v", row.name, far, row.same)
		}
	}
}

// farthestCorner returns the largest distance of a corner of a to the nearest of b.
func farthestCorner(a, b *facets.Stone) float64 {
	most := 0.0
	for _, p := range a.Corners {
		near := math.Inf(1)
		for _, q := range b.Corners {
			near = min(near, p.Sub(q).Len())
		}
		most = max(most, near)
	}
	return most
}

// Whatever the text is, it is refused with remedies or describes a machine on which a
// sheet can be worked out.
func FuzzReadMachine(f *testing.F) {
	f.Add([]byte(MachineTemplate))
	f.Add([]byte("machine = 1\ngear = 3\npavilion_angle_offset = -90\ncrown_angle_offset = 90\nangle_step = 5\n"))
	f.Add([]byte("machine = 1\ngear = 1000\nangle_step = 0.001\ncheater = 60\ncrown_numbers = 'same'\ntransfer_index = 1000\n"))
	f.Add([]byte("\ufeffmachine = 1\r\nname = \"\\u0000\\u001b[2J\"\r\ngrit = ['']\r\n"))
	f.Add([]byte("machine = 1\ntable_adapter = inf\ncheater = -0.0\ntransfer_index = 1e-300\n"))
	plan, err := facets.OpenPlan("../../testdata/plans/rod.toml")
	if err != nil {
		f.Fatal(err)
	}
	material, err := gems.Standard().Find(plan.Material.Key)
	if err != nil {
		f.Fatal(err)
	}
	f.Fuzz(func(t *testing.T, data []byte) {
		var m Machine
		var err error
		budget.Hold(t, 2000*len(data), func() { m, err = ReadMachine(bytes.NewReader(data), "m.toml") })
		var faults facets.Faults
		if err != nil {
			if !errors.As(err, &faults) || len(faults) == 0 {
				t.Fatalf("%v is no fault", err)
			}
			for _, one := range faults {
				if one.Why == "" || one.Remedy == "" {
					t.Errorf("%v has no reason or remedy", one)
				}
				if n := len(one.Error()); n > 2000 {
					t.Errorf("%d bytes of message", n)
				}
			}
			return
		}
		s, err := New(Job{Plan: plan, Material: material, Machine: m, Paper: Papers()[0]})
		if err != nil {
			if !errors.As(err, &faults) {
				t.Fatalf("%v is no fault", err)
			}
			return
		}
		for i := range s.Rows {
			if a := s.Rows[i].Reading.Degrees(); math.IsNaN(a) || math.IsInf(a, 0) {
				t.Errorf("%s is set to %g", s.Rows[i].Tier.Name, a)
			}
			for _, set := range s.Rows[i].Settings {
				if set.Tooth < 0 || set.Tooth > s.Machine.Gear || math.IsNaN(set.Cheater.Degrees()) {
					t.Errorf("%s stands at %+v on a gear of %d", s.Rows[i].Tier.Name, set, s.Machine.Gear)
				}
			}
		}
		if pages := s.Pages(); len(pages) == 0 {
			t.Error("no page")
		}
	})
}
