package ui

import (
	"fmt"
	"os"
	"time"
)

// stagesVariable makes the window print what it has reached, a line a stage, for
// scripts that drive it: "READY shown 412 ms".
const stagesVariable = "PAVILIGHT_STAGES"

// stages returns what tells a script of a stage; it is silent unless asked for.
func stages(started time.Time) func(string) {
	if os.Getenv(stagesVariable) == "" {
		return func(string) {}
	}
	return func(stage string) {
		fmt.Fprintf(os.Stderr, "READY %s %d ms\n", stage, time.Since(started).Milliseconds())
	}
}

// started is called once the window is on the screen.
func (w *window) started(path string) {
	w.once("shown")
	w.enter(lookRoom)
	if path != "" {
		w.open(path)
		if w.bench.Doc.Path == "" {
			w.bench.Begin() // something to look at while the plan is read
		}
		return
	}
	w.bench.Begin()
	if !w.app.Preferences().Bool(hintsKey) {
		w.app.Preferences().SetBool(hintsKey, true)
		w.firstSteps()
	}
}
