package ui

import (
	"fmt"
	"os"
	"time"

	"fyne.io/fyne/v2"

	"pavilight/app/model"
)

// stagesVariable makes the window print to stderr what it has reached, a line a
// stage, for scripts that drive it: "READY refined 812 ms". With the value
// checkThreads the toolkit also reports calls from a wrong goroutine.
const (
	stagesVariable = "PAVILIGHT_STAGES"
	checkThreads   = "threads"
)

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
	last := w.files.room()
	w.enter(lookRoom)
	w.bench.Begin() // something to look at, also while another plan is read
	w.offerRecovered()
	if path != "" {
		w.open(path)
		return
	}
	w.enter(last)
	if !w.app.Preferences().Bool(hintsKey) {
		w.app.Preferences().SetBool(hintsKey, true)
		w.firstSteps()
	}
}

// tellOnceDrawn tells a stage, and the places, when what was just put up is drawn:
// only then has it a place.
func (w *window) tellOnceDrawn(stage string) {
	if os.Getenv(stagesVariable) == "" {
		w.tell(stage)
		return
	}
	const frames = 200 * time.Millisecond
	time.AfterFunc(frames, func() {
		w.do(func() {
			w.tellPlaces()
			w.tell(stage)
		})
	})
}

// tellPlaces prints where things are on the screen, in its pixels, for scripts that
// point at them: "PLACE field P1 48 439", the middle of each.
func (w *window) tellPlaces() {
	if os.Getenv(stagesVariable) == "" {
		return
	}
	scale := w.win.Canvas().Scale()
	tell := func(name string, o fyne.CanvasObject, shareX float32) {
		if o == nil || !o.Visible() || o.Size().Width == 0 {
			return
		}
		at := w.app.Driver().AbsolutePositionForObject(o).AddXY(o.Size().Width*shareX, o.Size().Height/2)
		fmt.Fprintf(os.Stderr, "PLACE %s %.0f %.0f\n", name, at.X*scale, at.Y*scale)
	}
	switch w.room { // what is in another has no place
	case lookRoom:
		w.tellLookPlaces(tell)
	case tuneRoom:
		tell("search", w.tuning.begin, 0.5)
		tell("take", w.tuning.take, 0.5)
	case cutRoom:
		tell("save sheet", w.cutting.write, 0.5)
	case tellRoom:
		tell("save report", w.telling.pdf, 0.5)
	}
	for r, d := range w.doors {
		tell("room "+string(room(r).name()), d, 0.5)
	}
	for name, b := range w.asked {
		tell("answer "+name, b, 0.5)
	}
}

func (w *window) tellLookPlaces(tell func(name string, o fyne.CanvasObject, shareX float32)) {
	for _, r := range w.list.rows {
		if r.field != nil {
			tell("field "+r.row.Name, r.field, 0.5)
		}
		if r.slider != nil {
			thumb := r.slider.place(r.slider.value, r.slider.Size().Width) / max(1, r.slider.Size().Width)
			tell("slider "+r.row.Name, r.slider, thumb)
		}
	}
	for i := range model.Rows {
		for j := range columns {
			tell(fmt.Sprintf("map %d %d", i, j), w.grid.maps[i][j], 0.5)
		}
	}
	for i, c := range w.grid.row {
		tell(fmt.Sprintf("row %d", i), c, 0.5)
	}
	for j, c := range w.grid.media {
		tell(fmt.Sprintf("medium %d", j), c, 0.5)
	}
	tell("solid", w.solid, 0.5)
	tell("strip", w.grid.strip, 0.5)
	if w.rayBox.Visible() {
		tell("beside", w.beside.chooser, 0.5)
	}
}
