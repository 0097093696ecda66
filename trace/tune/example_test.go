package tune_test

import (
	"fmt"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/testdata"
	"pavilight/trace/tune"
)

// The bundled plan can vary in five angles and the sizes of its stop rules; its mains are
// offered first. In water its pavilion lies under the critical angle.
func Example() {
	file, err := testdata.Plans().Open(testdata.Bundled)
	if err != nil {
		fmt.Println(err)
		return
	}
	defer file.Close()
	plan, err := facets.ReadPlan(file, testdata.Bundled)
	if err != nil {
		fmt.Println(err)
		return
	}
	pattern := tune.PlanPattern{Plan: plan}
	mains, err := tune.Choose(pattern, tune.Mains(pattern)...)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, v := range mains {
		fmt.Printf("%s at %g %s, from %g to %g\n", v.Name, v.Now, v.Unit, v.Low, v.High)
	}
	stone, err := plan.Solve()
	if err != nil {
		fmt.Println(err)
		return
	}
	corundum, _ := gems.Find("corundum")
	water, _ := gems.Find("water")
	passed, err := tune.Passed(stone, corundum, water)
	if err != nil {
		fmt.Println(err)
		return
	}
	for _, p := range passed {
		fmt.Println(p)
	}
	// Output:
	// P1 at 41.5 degrees, from 35.5 to 47.5
	// C2 at 35 degrees, from 29 to 41
	// pavilion P1 at 41.50° lies under the critical angle 49.23° in Water
	// pavilion P2 at 42.70° lies under the critical angle 49.23° in Water
}
