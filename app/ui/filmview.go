package ui

import (
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/solid"
	"pavilight/app/words"
	"pavilight/facets"
)

// filmView goes through the steps of cutting: the stone as each leaves it, what the
// machine is set to, and what comes off.
type filmView struct {
	cut    *model.Cut
	words  *words.Words
	do     func(func())
	box    *fyne.Container
	solid  *solidView
	bar    *stepBar
	title  *line
	facts  *factTable
	none   *wrapped // why there is no film
	back   *widget.Button
	next   *widget.Button
	play   *widget.Button
	facing facets.Side
	shown  bool // a step is in view
	reel   int  // number of the showing that runs; 0 for none
	reels  int
}

// filmWords is the width of the words beside the stone.
const filmWords = 300

func newFilmView(in *words.Words, cut *model.Cut, do func(func()), stray func(*fyne.KeyEvent)) *filmView {
	f := &filmView{words: in, cut: cut, do: do}
	f.solid = newSolidView(func(string) {}, stray)
	f.bar = newStepBar(in, func(step int) { f.halt(); cut.GoTo(step) }, stray)
	f.title = newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, "").bold()
	f.facts = newFactTable()
	f.none = newWrapped(colourDim, theme.SizeNameText)
	f.back = widget.NewButtonWithIcon(in.Say("Back"), theme.NavigateBackIcon(), func() { f.halt(); cut.GoTo(cut.Step - 1) })
	f.next = widget.NewButtonWithIcon(in.Say("Next"), theme.NavigateNextIcon(), func() { f.halt(); cut.GoTo(cut.Step + 1) })
	f.play = widget.NewButtonWithIcon(in.Say("Run|a film"), theme.MediaPlayIcon(), f.run)
	told := container.New(layout.NewCustomPaddedLayout(14, 14, 8, 16), container.NewBorder(f.title,
		container.NewGridWithColumns(3, f.back, f.play, f.next), nil, nil,
		container.NewVScroll(container.New(layout.NewCustomPaddedLayout(8, 8, 0, 8), f.facts.box))))
	stage := container.NewBorder(nil, container.New(layout.NewCustomPaddedLayout(0, 10, 14, 14), f.bar), nil, nil, f.solid)
	f.box = container.NewStack(pane(container.New(&rightLayout{width: filmWords}, stage, told)),
		container.NewCenter(container.NewGridWrap(fyne.NewSize(420, 90), f.none)))
	return f
}

// lapPose looks at the stone as it hangs over the lap, a little from the side.
func lapPose(facing facets.Side) solid.Pose {
	const aside, above = 22 * facets.Degree, 42 * facets.Degree // three faces of a box are seen
	if facing == facets.Crown {
		return solid.FaceUp().Spun(aside).Turned(0, above)
	}
	return solid.FaceDown().Spun(aside).Turned(0, above)
}

func (f *filmView) refresh() {
	step, ok := f.cut.Film()
	setVisible(f.box.Objects[0], ok)
	setVisible(f.box.Objects[1], !ok)
	if !ok {
		f.none.setText("")
		if s := f.cut.Sheet; s != nil && s.LightModel {
			f.none.setText(f.words.Say("Diamond is worked with other machines and other training: its sheet shows light and shape, and gives no steps."))
		}
		f.shown = false
		return
	}
	f.solid.whole, f.solid.selected = step.Whole, step.Tier
	if !f.shown || f.facing != step.Facing {
		f.solid.pose = lapPose(step.Facing)
	}
	f.shown, f.facing = true, step.Facing
	if f.solid.stone != step.Stone {
		f.solid.show(step.Stone)
	} else {
		f.solid.redraw()
	}
	f.title.setText(step.Title)
	f.facts.show(step.Facts)
	names, shares := []string{f.words.Say("rough")}, []float64{0}
	for i := range f.cut.Steps() {
		names = append(names, f.cut.Sheet.Rows[i].Tier.Name)
		shares = append(shares, f.cut.Off(i+1)-f.cut.Off(i))
	}
	f.bar.show(names, shares, f.cut.Step)
	enable(f.back, f.cut.Step > 0)
	enable(f.next, f.cut.Step < f.cut.Steps())
	label, icon := f.words.Say("Run|a film"), theme.MediaPlayIcon()
	if f.reel != 0 {
		label, icon = f.words.Say("Halt"), theme.MediaPauseIcon()
	}
	if f.play.Text != label {
		f.play.SetText(label)
		f.play.SetIcon(icon)
	}
}

// stepPause is how long each step is shown while the film runs.
const stepPause = 1400 * time.Millisecond

// run runs through the film, from its start if it is at its end, or halts it.
func (f *filmView) run() {
	if f.reel != 0 {
		f.halt()
		f.refresh()
		return
	}
	if f.cut.Step >= f.cut.Steps() {
		f.cut.GoTo(0)
	}
	f.reels++
	f.reel = f.reels
	f.refresh()
	f.later(f.reel)
}

func (f *filmView) later(reel int) {
	time.AfterFunc(stepPause, func() {
		f.do(func() {
			if reel != f.reel {
				return
			}
			if f.cut.Step+1 >= f.cut.Steps() {
				f.reel = 0
			}
			f.cut.GoTo(f.cut.Step + 1)
			if f.reel != 0 {
				f.later(reel)
			}
		})
	})
}

// halt ends the showing.
func (f *filmView) halt() { f.reel = 0 }

// enable enables a button, or disables it.
func enable(b *widget.Button, on bool) {
	if b.Disabled() == on {
		if on {
			b.Enable()
		} else {
			b.Disable()
		}
	}
}

// rightLayout gives its second object a fixed width at the right, and the first the rest.
type rightLayout struct{ width float32 }

// MinSize is the side and a little beside it.
func (l *rightLayout) MinSize([]fyne.CanvasObject) fyne.Size { return fyne.NewSize(l.width+200, 200) }

// Layout sets the two side by side.
func (l *rightLayout) Layout(objects []fyne.CanvasObject, size fyne.Size) {
	place(objects[0], 0, 0, max(0, size.Width-l.width), size.Height)
	place(objects[1], size.Width-l.width, 0, l.width, size.Height)
}
