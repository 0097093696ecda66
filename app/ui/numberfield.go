package ui

import (
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/widget"
)

// numberField takes one number. Enter and leaving the field commit what was
// typed; Escape takes it back; arrow keys and, while it has the focus, the wheel
// step it (ten times as far with Shift, a tenth with Alt). What cannot be read
// stays in the field, marked, with the reason told, and the plan keeps its number.
type numberField struct {
	widget.Entry

	read  func(text string) (float64, error)
	write func(float64) string
	step  float64

	// commit takes a number that was read, and answers why it cannot be had.
	commit func(float64) error
	// trouble is told why the text was refused, and nil once all is well.
	trouble func(error)
	// gained is told when the field takes the focus; may be nil.
	gained func()

	value   float64 // the last that was shown or committed
	focused bool
	entered bool // the press under way marks all: the focus came with it, or the number was just taken
	taken   bool // the number was taken by Enter, and the field has not been clicked since
	doubled time.Time
	tip     tip
}

var (
	_ fyne.Scrollable   = (*numberField)(nil)
	_ desktop.Hoverable = (*numberField)(nil)
	_ fyne.Focusable    = (*numberField)(nil)
	_ desktop.Keyable   = (*numberField)(nil)
	_ fyne.Shortcutable = (*numberField)(nil)
)

func newNumberField(read func(string) (float64, error), write func(float64) string, step float64) *numberField {
	f := &numberField{read: read, write: write, step: step}
	f.ExtendBaseWidget(f)
	f.Scroll = fyne.ScrollNone // never scroll sideways inside the field
	f.OnSubmitted = func(string) {
		f.settle()
		if !f.pending() {
			f.taken = true
			f.markAll() // typing on replaces it
		}
	}
	return f
}

// MouseIn waits for the tip.
func (f *numberField) MouseIn(*desktop.MouseEvent) { f.tip.enter(f) }

// MouseMoved is not used.
func (f *numberField) MouseMoved(*desktop.MouseEvent) {}

// MouseOut takes the tip away.
func (f *numberField) MouseOut() { f.tip.leave() }

// show puts a number into the field unless the user is typing another one.
func (f *numberField) show(v float64) {
	typing := f.focused && f.pending()
	f.value = v
	if !typing {
		f.put(v)
		f.mark(nil)
	}
}

func (f *numberField) put(v float64) {
	if text := f.write(v); f.Text != text {
		f.SetText(text)
	}
}

// pending reports whether the text is not the number that the field stands for.
func (f *numberField) pending() bool { return f.Text != f.write(f.value) }

// settle commits what was typed, if anything was.
func (f *numberField) settle() {
	if !f.pending() {
		f.tell(nil)
		return
	}
	v, err := f.read(f.Text)
	if err == nil {
		err = f.commit(v)
	}
	if err == nil {
		f.value = v
		f.put(v)
	}
	f.tell(err)
}

// revert takes back what was typed.
func (f *numberField) revert() {
	f.put(f.value)
	f.tell(nil)
}

func (f *numberField) tell(err error) {
	f.mark(err)
	if f.trouble != nil {
		f.trouble(err)
	}
}

// refused reports whether what stands in the field was not taken.
func (f *numberField) refused() bool { return f.Validator != nil }

// mark marks the field, or takes the mark away. The toolkit marks only what a validator
// refuses, and gives a tick to what one does not.
func (f *numberField) mark(err error) {
	if err == nil && !f.refused() {
		return
	}
	f.Validator = nil
	if err != nil {
		f.Validator = func(string) error { return err }
	}
	f.AlwaysShowValidationError = err != nil
	f.SetValidationError(err)
}

// nudge moves the number by so many steps.
func (f *numberField) nudge(steps float64) {
	from := f.value
	if f.pending() {
		if v, err := f.read(f.Text); err == nil {
			from = v
		}
	}
	size := f.step
	if d, ok := fyne.CurrentApp().Driver().(desktop.Driver); ok {
		switch mods := d.CurrentKeyModifiers(); {
		case mods&fyne.KeyModifierShift != 0:
			size *= 10
		case mods&fyne.KeyModifierAlt != 0:
			size /= 10
		}
	}
	v := onStep(from+steps*size, size)
	if err := f.commit(v); err != nil {
		f.tell(err)
		return
	}
	f.value = v
	f.put(v)
	f.tell(nil)
}

// TypedKey adds stepping and taking back to what an entry does.
func (f *numberField) TypedKey(key *fyne.KeyEvent) {
	switch key.Name {
	case fyne.KeyUp:
		f.nudge(1)
	case fyne.KeyDown:
		f.nudge(-1)
	case fyne.KeyEscape:
		f.revert()
	default:
		f.Entry.TypedKey(key)
	}
}

// Scrolled steps the number while the field has the focus.
func (f *numberField) Scrolled(e *fyne.ScrollEvent) {
	if !f.focused {
		return
	}
	switch {
	case e.Scrolled.DY > 0:
		f.nudge(1)
	case e.Scrolled.DY < 0:
		f.nudge(-1)
	}
}

// MouseDown notes whether it brings the focus, or is the first after Enter.
func (f *numberField) MouseDown(e *desktop.MouseEvent) {
	f.entered = !f.focused || f.taken && !f.pending()
	f.taken = false
	f.Entry.MouseDown(e)
}

// thirdClick is how soon after a double click another one belongs to it.
const thirdClick = 500 * time.Millisecond

// MouseUp marks all of the text if this click brought the focus, or came after Enter, and
// marked nothing itself, so that typing replaces the number; a second click sets the
// cursor, and quick ones mark all.
func (f *numberField) MouseUp(e *desktop.MouseEvent) {
	f.Entry.MouseUp(e)
	if f.entered && f.SelectedText() == "" || time.Since(f.doubled) < thirdClick {
		f.markAll()
	}
	f.entered = false
}

// DoubleTapped marks all of the text, not the word beside the decimal point.
func (f *numberField) DoubleTapped(*fyne.PointEvent) {
	f.doubled = time.Now()
	f.markAll()
}

// TypedShortcut leaves redoing to the window, which asks back where something is being typed.
func (f *numberField) TypedShortcut(s fyne.Shortcut) {
	if s.ShortcutName() != redoToo().ShortcutName() {
		f.Entry.TypedShortcut(s)
		return
	}
	if all, ok := fyne.CurrentApp().Driver().CanvasForObject(f).(fyne.Shortcutable); ok {
		all.TypedShortcut(s)
	}
}

func (f *numberField) markAll() { f.Entry.TypedShortcut(&fyne.ShortcutSelectAll{}) }

// FocusGained marks all of the text, so that typing replaces it.
func (f *numberField) FocusGained() {
	f.tip.leave()
	f.focused = true
	f.Entry.FocusGained()
	f.markAll()
	if f.gained != nil {
		f.gained()
	}
}

// FocusLost commits what was typed.
func (f *numberField) FocusLost() {
	f.focused = false
	f.Entry.FocusLost()
	f.settle()
}
