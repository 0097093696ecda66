package facets

import (
	"io/fs"
	"math"
	"strings"
	"testing"

	"pavilight/testdata"
)

// samplePlans reads and solves every sample plan.
func samplePlans(t *testing.T, each func(t *testing.T, p *Plan, s *Solution)) {
	names, err := fs.Glob(testdata.Plans(), "*.toml")
	if err != nil || len(names) == 0 {
		t.Fatalf("no sample plans: %v", err)
	}
	for _, name := range names {
		t.Run(name, func(t *testing.T) {
			f, err := testdata.Plans().Open(name)
			if err != nil {
				t.Fatal(err)
			}
			defer f.Close()
			p, err := ReadPlan(f, name)
			if err != nil {
				t.Fatal(err)
			}
			s, err := p.Solution()
			if err != nil {
				t.Fatal(err)
			}
			each(t, p, s)
		})
	}
}

// stepTolerance is the share of a volume by which sums over the same corners, cut in
// another unit and order, may differ: a hundred times the weld tolerance.
const stepTolerance = 1e-8

// TestStepsEndInTheStone: cut from a block tier by tier, the plan gives the solid that
// solving gives, every tier takes something off, and the parts make up the whole.
func TestStepsEndInTheStone(t *testing.T) {
	samplePlans(t, func(t *testing.T, p *Plan, s *Solution) {
		steps, err := p.Steps(s, nil)
		if err != nil {
			t.Fatal(err)
		}
		if len(steps) != len(p.Tiers) {
			t.Fatalf("%d steps for %d tiers", len(steps), len(p.Tiers))
		}
		block := s.Stone.Block(BlockMargin).Volume()
		removed := 0.0
		for i, step := range steps {
			removed += step.Removed
			tier := &p.Tiers[step.Tier]
			if step.Tier != i {
				t.Errorf("step %d is of tier %d", i, step.Tier)
			}
			if tier.Temporary {
				continue
			}
			if step.Removed <= 0 || step.Depth <= 0 {
				t.Errorf("%s takes off %g mm³, %g mm", tier.Name, step.Removed, step.Depth)
			}
			if want := len(s.Tiers[i].Index); len(step.New) != want {
				t.Errorf("%s: %d new facets, want %d", tier.Name, len(step.New), want)
			}
			for _, f := range step.New {
				if got := step.Stone.Facets[f].Tier; got != tier.Name {
					t.Errorf("%s: a new facet is of tier %q", tier.Name, got)
				}
			}
		}
		last := steps[len(steps)-1].Stone
		if len(last.Facets) != len(s.Stone.Facets) {
			t.Fatalf("%d facets in the end, want %d", len(last.Facets), len(s.Stone.Facets))
		}
		whole := s.Stone.Volume()
		if d := math.Abs(last.Volume() - whole); d > stepTolerance*whole {
			t.Errorf("the last step has %.9f mm³, the stone %.9f", last.Volume(), whole)
		}
		if d := math.Abs(block - removed - whole); d > stepTolerance*block {
			t.Errorf("block %.9f less what was taken off %.9f is not the stone's %.9f", block, removed, whole)
		}
	})
}

const cubePlan = `
plan = 1
material = "quartz"
width_mm = 10
gear = 96
[[tier]]
name = "G"
side = "girdle"
index = [0, 24, 48, 72]
distance = 1
[[tier]]
name = "B"
side = "pavilion"
angle = 0
distance = 1
[[tier]]
name = "T"
side = "table"
distance = 1
`

// TestStepsOfACube compares with arithmetic by hand: a cube of 10 mm out of its block
// of 10.8 mm, of which every flat takes 0.4 mm.
func TestStepsOfACube(t *testing.T) {
	p, err := ReadPlan(strings.NewReader(cubePlan), "cube.toml")
	if err != nil {
		t.Fatal(err)
	}
	s, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	steps, err := p.Steps(s, nil)
	if err != nil {
		t.Fatal(err)
	}
	for i, want := range []float64{10.8*10.8*10.8 - 10*10*10.8, 10 * 10 * 0.4, 10 * 10 * 0.4} {
		if got := steps[i]; math.Abs(got.Removed-want) > 1e-9*want || math.Abs(got.Depth-0.4) > 1e-9 {
			t.Errorf("%s takes off %.9f mm³, %.9f mm deep; want %.9f and 0.4", p.Tiers[i].Name, got.Removed, got.Depth, want)
		}
	}
}

func TestStepsWithAnotherRough(t *testing.T) {
	p, _ := ReadPlan(strings.NewReader(cubePlan), "cube.toml")
	s, err := p.Solution()
	if err != nil {
		t.Fatal(err)
	}
	small := s.Stone.Block(-0.5) // half the size: no tier reaches it
	steps, err := p.Steps(s, small)
	if err != nil {
		t.Fatal(err)
	}
	for i, step := range steps {
		if len(step.New) != 0 || step.Removed != 0 || step.Depth != 0 {
			t.Errorf("%s takes %g mm³ off a rough that it does not touch", p.Tiers[i].Name, step.Removed)
		}
	}
	s.Tiers = s.Tiers[1:]
	if _, err := p.Steps(s, nil); err == nil || !strings.Contains(err.Error(), "solve the plan again") {
		t.Errorf("a solution of another plan gives %v", err)
	}
}
