package model

import (
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
		room.Wait()
		mu.Lock()
		all := queue
		queue = nil
		mu.Unlock()
		for _, f := range all {
			f()
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
	if len(lines) != 1 || !strings.HasPrefix(lines[0], "P  40.00° → ") || !strings.HasSuffix(lines[0], "steeper") {
		t.Errorf("%q", lines)
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
	if plan := room.Picked(0); plan.Tiers[1].Angle.Degrees() != room.Front.Points[0].Values[0] {
		t.Errorf("picked %v of %v", plan.Tiers[1].Angle, room.Front.Points[0].Values)
	}
}
