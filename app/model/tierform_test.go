package model

import (
	"io/fs"
	"reflect"
	"strings"
	"testing"
	"testing/synctest"

	"pavilight/facets"
	"pavilight/testdata"
)

// Every tier of every bundled plan goes into a form and comes back as it was.
func TestFormsHoldEveryTier(t *testing.T) {
	entries, err := readPlans()
	if err != nil {
		t.Fatal(err)
	}
	for name, plan := range entries {
		for i := range plan.Tiers {
			var back facets.Tier
			want := plan.Tiers[i]
			if err := FormOf(nil, &want).fill(&back); err != nil {
				t.Errorf("%s, tier %s: %v", name, want.Name, err)
				continue
			}
			same := back.Name == want.Name && back.Side == want.Side && back.HasAngle == want.HasAngle &&
				back.Mirror == want.Mirror && max(1, back.Fold) == max(1, want.Fold) && back.Note == strings.TrimSpace(want.Note) &&
				back.Stop.Rule == want.Stop.Rule && back.Stop.Value == want.Stop.Value && back.Stop.With == want.Stop.With &&
				reflect.DeepEqual(back.Stop.Corners, want.Stop.Corners) && indexWords(nil, back.Index) == indexWords(nil, want.Index)
			if !same {
				t.Errorf("%s, tier %s came back as %+v, want %+v", name, want.Name, back, want)
			}
		}
	}
}

func readPlans() (map[string]*facets.Plan, error) {
	plans := map[string]*facets.Plan{}
	files, err := fs.ReadDir(testdata.Plans(), ".")
	if err != nil {
		return nil, err
	}
	for _, f := range files {
		file, err := testdata.Plans().Open(f.Name())
		if err != nil {
			return nil, err
		}
		plan, err := facets.ReadPlan(file, f.Name())
		file.Close()
		if err != nil {
			return nil, err
		}
		plans[f.Name()] = plan
	}
	return plans, nil
}

func TestFormsRefuseInWords(t *testing.T) {
	good := TierForm{Name: "P9", Side: facets.Pavilion, Angle: "41", Index: "0 12", Rule: facets.StopDistance, Stop: "0.7"}
	for field, spoil := range map[string]func(*TierForm){
		"name":      func(f *TierForm) { f.Name = "P 9" },
		"angle":     func(f *TierForm) { f.Angle = "steep" },
		"index":     func(f *TierForm) { f.Index = "0 twelve" },
		"repeated":  func(f *TierForm) { f.Fold = "0" },
		"cut until": func(f *TierForm) { f.Stop = "" },
	} {
		form := good
		spoil(&form)
		var tier facets.Tier
		if err := form.fill(&tier); err == nil || !strings.HasPrefix(err.Error(), field+":") {
			t.Errorf("%s: error %v", field, err)
		}
	}
	for _, corners := range []string{"", ";", "P1@", "@3", "P1@x"} {
		form := good
		form.Rule, form.Stop = facets.StopMeet, corners
		var tier facets.Tier
		if err := form.fill(&tier); err == nil {
			t.Errorf("corners %q are taken", corners)
		}
	}
}

func TestTiersAreAddedMovedRenamedAndRemoved(t *testing.T) {
	synctest.Test(t, func(t *testing.T) {
		p := newPlace(t)
		names := func() string {
			var s []string
			for _, r := range p.Tiers() {
				s = append(s, r.Name)
			}
			return strings.Join(s, " ")
		}
		must := func(err error) {
			t.Helper()
			if err != nil {
				t.Fatal(err)
			}
		}
		start := names()
		turned := -1
		for i, tier := range p.Doc.Plan().Tiers {
			if tier.Transfer != nil {
				turned = i
			}
		}
		form := FormOf(nil, &p.Doc.Plan().Tiers[0])
		form.Name = "Main"
		must(p.EditTier(0, form))
		for _, tier := range p.Doc.Plan().Tiers {
			for _, marks := range tier.Stop.Corners {
				for _, m := range marks {
					if m.Tier == "P1" {
						t.Errorf("tier %s still meets P1", tier.Name)
					}
				}
			}
		}
		if _, err := p.Bench.solve(p.Doc.Plan()); err != nil {
			t.Errorf("after renaming: %v", err)
		}
		must(p.MoveTier(1, 1))
		must(p.MoveTier(2, -1))
		if got, want := names(), strings.Replace(start, "P1", "Main", 1); got != want {
			t.Errorf("moved there and back: %s, want %s", got, want)
		}
		must(p.InsertTier(1, p.NewForm(0)))
		if got := p.Doc.Plan().Tiers[1].Name; got != "Main1" {
			t.Errorf("the new tier is called %q", got)
		}
		if err := p.InsertTier(1, form); err == nil {
			t.Error("two tiers of one name")
		}
		must(p.RemoveTier(1))
		if got := p.Doc.Plan().Tiers[turned].Transfer; got == nil {
			t.Error("the stone is no longer turned where it was")
		}
		for range 5 {
			p.Undo()
		}
		if got := names(); got != start || p.Doc.Modified() {
			t.Errorf("all undone: %s, want %s", got, start)
		}
		p.Look.Close()
		p.window.settle()
	})
}
