package model

import (
	"fmt"
	"strings"
	"sync"
	"testing"

	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace/tune"
)

// tent is a plan of few facets, so that a search takes a second.
const tent = `plan = 1
name = "Small Tent"
material = "quartz"
width_mm = 6
gear = 96
[[tier]]
name = "G"
side = "girdle"
index = 0
fold = 4
distance = 1
[[tier]]
name = "P"
side = "pavilion"
angle = 40.0
index = 0
fold = 4
level = 0
[[tier]]
name = "C"
side = "crown"
angle = 40.0
index = 0
fold = 4
level = 0.06
[[tier]]
name = "T"
side = "table"
table = 0.6
`

// tuneRoom returns a room with the tent in it. What a run hands over is taken by settle,
// on the test's own goroutine, as a window does.
func tuneRoom(t *testing.T) (room *Tune, settle func()) {
	t.Helper()
	plan, err := facets.ReadPlan(strings.NewReader(tent), "tent.toml")
	if err != nil {
		t.Fatal(err)
	}
	quartz, err := gems.Find("quartz")
	if err != nil {
		t.Fatal(err)
	}
	air, err := gems.Find("air")
	if err != nil {
		t.Fatal(err)
	}
	var mu sync.Mutex
	var queue []func()
	room = NewTune(func(f func()) {
		mu.Lock()
		defer mu.Unlock()
		queue = append(queue, f)
	}, func() {})
	room.SetPlan(plan, quartz, []Around{{Medium: air}}, 10*facets.Degree)
	room.Step = 1
	return room, func() {
		for {
			room.Wait()
			mu.Lock()
			all := queue
			queue = nil
			mu.Unlock()
			if len(all) == 0 {
				return
			}
			for _, f := range all {
				f()
			}
		}
	}
}

// choice returns the number of a variable.
func choice(t *testing.T, room *Tune, name string) int {
	t.Helper()
	for i, c := range room.Choices {
		if c.Name == name {
			return i
		}
	}
	t.Fatalf("nothing named %s can be chosen", name)
	return 0
}

// The room finds a better plan by hand: its mains are chosen from the start, the best is
// shown beside the start, and what is kept is the plan that was found.
func TestTuneRoomFindsBetter(t *testing.T) {
	room, settle := tuneRoom(t)
	if p := room.Choices[choice(t, room, "P")]; !p.Chosen || room.Choices[choice(t, room, "T.table")].Chosen {
		t.Errorf("chosen at first: %+v", room.Choices)
	}
	room.Choose(choice(t, room, "C"), false)
	if err := room.SetLimits(choice(t, room, "P"), 39, 45); err != nil {
		t.Fatal(err)
	}
	if err := room.SetLimits(choice(t, room, "P"), 50, 45); err == nil {
		t.Error("limits the wrong way round pass")
	}
	room.Begin()
	if !room.Running {
		t.Fatal(room.Trouble)
	}
	settle()
	if room.Running || room.Trouble != nil || room.Outcome == nil || !room.Outcome.Better || room.Done != 1 {
		t.Fatalf("running %v, trouble %v, outcome %+v", room.Running, room.Trouble, room.Outcome)
	}
	if room.StartPicture == nil || room.BestPicture == nil {
		t.Error("a picture is missing")
	}
	plan, ok := room.Kept()
	if !ok || plan.Tiers[1].Angle.Degrees() != room.Best.Values[0] || room.plan.Tiers[1].Angle.Degrees() != 40 {
		t.Errorf("kept %v of %v", plan.Tiers[1].Angle, room.Best.Values)
	}
	lines := room.Changes()
	if len(lines) != 3 || lines[0][0] != "P" || !strings.HasPrefix(lines[0][1], "40.00° to ") || !strings.HasSuffix(lines[0][1], "steeper") {
		t.Errorf("%q", lines)
	}
	before, after := room.Bodies[0], room.Bodies[1]
	if after.DepthPercent <= before.DepthPercent { // a steeper pavilion is deeper
		t.Errorf("depth %v to %v", before.DepthPercent, after.DepthPercent)
	}
	density := room.material.Density
	want := fmt.Sprintf("%.3f to %.3f ct", before.Carats(density), after.Carats(density))
	if lines[1] != [2]string{"Weight", want} || lines[2][0] != "Depth" || !strings.HasSuffix(lines[2][1], "% of width") {
		t.Errorf("%q, want a weight of %s", lines[1:], want)
	}
}

// A stone that shall forgive a slip counts as its worst neighbour does, and the answer
// says so; a trade-off and errors that are tried out ask for no such thing.
func TestTuneRoomForgives(t *testing.T) {
	room, settle := tuneRoom(t)
	room.Choose(choice(t, room, "C"), false)
	if err := room.SetLimits(choice(t, room, "P"), 39, 45); err != nil {
		t.Fatal(err)
	}
	room.Steady = 1
	room.Begin()
	settle()
	if room.Trouble != nil || room.Outcome == nil || room.Outcome.Start.Score >= room.Outcome.Start.Measures[0] {
		t.Fatalf("trouble %v, outcome %+v", room.Trouble, room.Outcome)
	}
	o := room.Outcome
	words := "With one angle off by up to 1° the goal is at worst " + room.withError(o.Start.Score, o.Start.Error) + " as it stands, " +
		room.withError(o.Best.Score, o.Best.Error) + " at the best."
	if all := strings.Join(room.Verdict(), "\n"); !strings.Contains(all, words) {
		t.Errorf("no word of %q in\n%s", words, all)
	}
	for task, want := range map[TuneTask]facets.Angle{FindBetter: facets.Degree, ShowField: facets.Degree, MoveMaterial: facets.Degree,
		TellErrors: 0, TradeTwo: 0} {
		room.Task = task
		if p, err := room.problem(); err != nil || p.Steady != want {
			t.Errorf("%s asks for %v, %v", task.Name(), p.Steady, err)
		}
	}
}

// A run that is stopped keeps what it found, and the late words of a run that another has
// followed are not taken.
func TestTuneRoomStops(t *testing.T) {
	room, settle := tuneRoom(t)
	room.Begin()
	room.Stop()
	settle()
	if room.Running || !room.Stopped || room.Trouble != nil {
		t.Errorf("running %v, stopped %v, trouble %v", room.Running, room.Stopped, room.Trouble)
	}
	room.Begin()
	first := room.number
	room.Stop()
	room.Wait()
	room.Begin()
	room.ended(first, nil, true)
	if !room.Running {
		t.Error("the end of an old run ended the new one")
	}
	room.Stop()
	settle()
}

// What cannot be asked is told in words.
func TestTuneRoomTrouble(t *testing.T) {
	room, _ := tuneRoom(t)
	begin := func(words string) {
		t.Helper()
		room.Begin()
		if room.Running || room.Trouble == nil || !strings.Contains(room.Trouble.Error(), words) {
			t.Errorf("%v, want words of %q", room.Trouble, words)
		}
	}
	room.Task = MoveMaterial
	begin("material to move to")
	room.Task = ShowField
	room.Choose(choice(t, room, "C"), false)
	begin("over two")
	room.Choose(choice(t, room, "P"), false)
	begin("nothing is chosen")
	empty := NewTune(func(f func()) { f() }, func() {})
	empty.Begin()
	if empty.Trouble == nil {
		t.Error("a room without a plan begins")
	}
}

// The other questions come to an answer too.
func TestTuneRoomTasks(t *testing.T) {
	room, settle := tuneRoom(t)
	room.Task, room.Draws = TellErrors, 20
	room.Begin()
	settle()
	if room.Trouble != nil || room.Tolerance == nil || len(room.Tolerance.Draws) != 20 {
		t.Errorf("tolerance %v, trouble %v", room.Tolerance, room.Trouble)
	}
	room.Task = TradeTwo
	room.Aims = []tune.Aim{{Measure: tune.LightReturn, Weight: 1}, {Measure: tune.Weight, Weight: 1}}
	room.Choose(choice(t, room, "C"), false)
	if err := room.SetLimits(choice(t, room, "P"), 40, 44); err != nil {
		t.Fatal(err)
	}
	room.Begin()
	settle()
	if room.Trouble != nil || room.Front == nil || len(room.Front.Points) == 0 {
		t.Fatalf("front %v, trouble %v", room.Front, room.Trouble)
	}
	room.PickNext(1, 0)
	if plan, ok := room.Kept(); !ok || plan.Tiers[1].Angle.Degrees() != room.Front.Points[0].Values[0] {
		t.Errorf("picked %v, kept %v", room.Pick, ok)
	}
}

// A plan that is moved to another material is kept as a plan of that material.
func TestTuneRoomMovesToAnotherMaterial(t *testing.T) {
	room, settle := tuneRoom(t)
	var err error
	if room.To, err = gems.Find("topaz"); err != nil {
		t.Fatal(err)
	}
	room.Task, room.Step = MoveMaterial, 3
	room.Choose(choice(t, room, "C"), false)
	room.Begin()
	settle()
	plan, ok := room.Kept()
	if room.Trouble != nil || !ok || plan.Material.Key != "topaz" || room.plan.Material.Key != "quartz" {
		t.Fatalf("kept %v, trouble %v", ok, room.Trouble)
	}
	words := strings.Join(room.Verdict(), "\n")
	for _, part := range []string{"As it stands, in Quartz: light return", "By the tangent rule, in Topaz: ", "By search, in Topaz: "} {
		if !strings.Contains(words, part) {
			t.Errorf("no word of %q in\n%s", part, words)
		}
	}
}

// A field is shown as it is traced, a place of it is picked by pointer or keys, and what is
// kept stands on the machine's steps.
func TestTuneRoomField(t *testing.T) {
	room, settle := tuneRoom(t)
	room.Task, room.Step = ShowField, 0.1
	for name, limits := range map[string][2]float64{"P": {40, 44}, "C": {38, 42}} {
		room.Choices[choice(t, room, name)].Chosen = true
		if err := room.SetLimits(choice(t, room, name), limits[0], limits[1]); err != nil {
			t.Fatal(err)
		}
	}
	room.Cells = 6
	room.SetChartWidth(200)
	room.Begin()
	settle()
	if room.Trouble != nil || room.Field == nil || !room.Charted() || room.Chart == nil {
		t.Fatalf("field %v, chart %v, trouble %v", room.Field != nil, room.Chart != nil, room.Trouble)
	}
	best, _ := room.Field.Best()
	if room.Shown() == nil || room.Shown().Score != room.Field.Trials[best].Score {
		t.Error("before a place is picked, the best does not count")
	}
	// The lower left corner of the field is its first cell: the least of both. It lies right
	// of the numbers and over the words, by the chart's own measures.
	found := false
	for y := 1.0; y > 0 && !found; y -= 0.01 {
		for x := 0.0; x < 1 && !found; x += 0.01 {
			room.PickAt(x, y)
			found = room.Pick != nil
		}
	}
	if !found || room.Pick.Values[0] != 40 || room.Pick.Values[1] != 38 {
		t.Fatalf("lower left: %+v", room.Pick)
	}
	room.PickNext(1, 0)
	if v := room.Pick.Values; v[0] <= 40 || v[0] > 40+4.0/5+1e-9 || v[1] != 38 {
		t.Errorf("one to the right: %v", v)
	}
	plan, ok := room.Kept()
	if room.Pick.Fit != ok {
		t.Errorf("kept %v of a stone that fits %v", ok, room.Pick.Fit)
	}
	if ok && plan.Tiers[1].Angle.Degrees() != 40.8 {
		t.Errorf("kept P at %v, want it on steps of 0.1°", plan.Tiers[1].Angle)
	}
	room.PickAt(0, 0)
	if room.Pick != nil {
		t.Error("beside the field something is picked")
	}
}

// What was found for a plan is not taken into another one; limits of a tier do not
// outlive the plan that they were set for.
func TestTuneRoomFollowsThePlan(t *testing.T) {
	room, settle := tuneRoom(t)
	p := choice(t, room, "P")
	if err := room.SetLimits(p, 39, 45); err != nil {
		t.Fatal(err)
	}
	room.Choose(choice(t, room, "C"), false)
	room.Step = 3
	room.Begin()
	settle()
	if _, ok := room.Kept(); !ok {
		t.Fatal("nothing is kept")
	}
	changed := room.plan.Clone()
	changed.WidthMM = 7
	room.SetPlan(changed, room.material, []Around{room.Seen[0].Around}, room.head)
	if _, ok := room.Kept(); ok {
		t.Error("what was found for the old plan can be taken into the new one")
	}
	if room.Choices[p].Low != 39 {
		t.Errorf("the limits of the same plan are lost: %v", room.Choices[p])
	}
	other := room.plan.Clone()
	other.Name = "Another"
	room.SetPlan(other, room.material, []Around{room.Seen[0].Around}, room.head)
	if room.Choices[p].Low == 39 || !room.Choices[p].Chosen {
		t.Errorf("the limits of another plan are kept: %v", room.Choices[p])
	}
	room.SeeIn(0, false)
	room.Begin()
	if room.Running || room.Trouble == nil || !strings.Contains(room.Trouble.Error(), "surrounding") {
		t.Errorf("seen in nothing: %v", room.Trouble)
	}
}
