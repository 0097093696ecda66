package ui

import (
	"path/filepath"
	"sync"
	"sync/atomic"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/disk"
	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
)

// keeper keeps unsaved work against a crash and notices when the plan's file is
// changed by other hands or opened in another window.
type keeper struct {
	recovery *model.Recovery
	claims   *model.Claims
	kept     *facets.Plan // the last that was kept
	keptAt   time.Time
	taken    []model.Recovered // was taken up, and stays on the disk until it is kept anew
	keeping  atomic.Bool       // unsaved work is being written
	looking  atomic.Bool       // the file is being asked after
	told     bool              // that keeping fails
	asking   bool              // what to do with a file that was changed
	shared   string            // the file that is open in another window, too, once that is told

	stop chan struct{}
	done sync.WaitGroup
}

// How often the file is looked at, and how often unsaved work is kept.
const (
	lookEvery = 2 * time.Second
	keepEvery = 30 * time.Second
)

// beginKeeping starts the keeper's clock; endKeeping stops it and waits for it.
func (w *window) beginKeeping(folder string) {
	k := &w.keeper
	k.recovery, k.claims = model.NewRecovery(folder), model.NewClaims(folder)
	stop := make(chan struct{})
	k.stop = stop
	k.done.Go(func() {
		clock := time.NewTicker(lookEvery)
		defer clock.Stop()
		for {
			select {
			case <-stop:
				return
			case <-clock.C:
				w.do(w.keep)
				w.do(w.look)
			}
		}
	})
}

// endKeeping stops the clock and waits for what is being kept. It does not wait for a
// drive that does not answer.
func (w *window) endKeeping() {
	if w.keeper.stop != nil {
		close(w.keeper.stop)
		w.keeper.stop = nil
		w.keeper.done.Wait()
	}
}

// keep looks after the unsaved work, the slow part elsewhere.
func (w *window) keep() {
	k, doc := &w.keeper, w.bench.Doc
	if k.stop == nil || !k.keeping.CompareAndSwap(false, true) {
		return
	}
	work := doc.Work()
	save := doc.Modified() && work.Plan != k.kept && time.Since(k.keptAt) >= keepEvery
	drop := !doc.Modified() && k.kept != nil
	if !save && !drop {
		k.keeping.Store(false)
		return
	}
	turn := k.recovery.Turn()
	if k.kept, k.keptAt = work.Plan, time.Now(); drop {
		k.kept = nil
	}
	k.done.Go(func() {
		var err error
		if save {
			err = k.recovery.Keep(turn, work)
		} else {
			k.recovery.Drop(turn)
		}
		k.keeping.Store(false)
		w.do(func() { w.keptWork(err) })
	})
}

// keptWork takes note of how it went.
func (w *window) keptWork(err error) {
	k := &w.keeper
	if err == nil {
		k.told = false
		k.forgetTaken()
		return
	}
	k.kept = nil // tried again
	if !k.told {
		k.told = true
		w.say(words.Errorf("unsaved work cannot be kept against a crash: %v", err))
	}
}

// forgetTaken forgets the files of work that was taken up: it lies elsewhere by now, or is
// not wanted.
func (k *keeper) forgetTaken() {
	for _, work := range k.taken {
		k.recovery.Discard(work)
	}
	k.taken = nil
}

// look looks at the plan's file, on another goroutine: its drive may be slow to answer, or
// gone.
func (w *window) look() {
	k, doc := &w.keeper, w.bench.Doc
	if k.stop == nil || k.asking || w.bench.Saving() || !k.looking.CompareAndSwap(false, true) {
		return
	}
	work, claims := doc.Work(), k.claims
	go func() {
		elsewhere := claims.Take(work.Path)
		stamp := disk.StampOf(work.Path)
		k.looking.Store(false)
		w.do(func() {
			// Not if another document or a save came between.
			if doc == w.bench.Doc && k.stop != nil && !w.bench.Saving() && work.Path == doc.Path && work.Known == doc.Work().Known {
				w.looked(stamp, elsewhere)
			}
		})
	}()
}

// looked takes what was seen of the plan's file.
func (w *window) looked(stamp disk.Stamp, elsewhere bool) {
	doc := w.bench.Doc
	name := filepath.Base(doc.Path)
	if elsewhere && w.keeper.shared != doc.Path {
		w.keeper.shared = doc.Path
		w.notice("Open in two windows", "“%s” is open in another window of Pavilight, too.\n"+
			"What is saved there is told here. Neither window writes\nover what the other has saved without asking.", name)
		w.tell("shared")
	}
	switch doc.Seen(stamp) {
	case model.Gone:
		w.onPlan()
		w.say(words.Errorf("%s is gone from its folder; save the plan to write it again", name))
	case model.Lost:
		w.onPlan()
		w.say(words.Errorf("%s does not answer; if its drive was taken out, plug it in again, or save the plan elsewhere", name))
	case model.Back:
		w.onPlan()
		w.say(nil)
		w.report("%s is back in its folder.", name)
	case model.Changed:
		w.askReload(doc.Path)
	}
}

// askReload asks what to do with a file that other hands changed.
func (w *window) askReload(path string) {
	text := w.words.Say("%s was changed by another program.\nRead it again?", filepath.Base(path))
	if w.bench.Doc.Modified() {
		text += " " + w.words.Say("Your own changes would be lost.")
	}
	w.keeper.asking = true
	d := dialog.NewConfirm(w.words.Say("The file has changed"), text, func(again bool) {
		w.keeper.asking = false
		if again {
			w.open(path)
			return
		}
		w.bench.KeepMine()
	}, w.win)
	d.SetConfirmText(w.words.Say("Read again"))
	d.SetDismissText(w.words.Say("Keep mine"))
	w.raise(d)
	w.tell("changed")
}

// keepNow keeps unsaved work before the program ends without asking.
func (w *window) keepNow() {
	k := &w.keeper
	if k.recovery == nil {
		return
	}
	turn := k.recovery.Turn()
	if w.bench.Doc.Modified() {
		if k.recovery.Keep(turn, w.bench.Doc.Work()) == nil { // else nobody is left to be told
			k.forgetTaken()
		}
	} else {
		k.recovery.Drop(turn)
	}
}

// dropKept forgets what was kept: it is not wanted.
func (w *window) dropKept() {
	k := &w.keeper
	if k.recovery == nil {
		return
	}
	k.recovery.Drop(k.recovery.Turn())
	k.forgetTaken()
}

// offerRecovered offers the unsaved work that an earlier run left behind.
func (w *window) offerRecovered() {
	found, err := w.keeper.recovery.Find()
	if err != nil {
		w.explain("Unsaved work is damaged", err)
	}
	if len(found) > 0 {
		w.offer(found)
	}
}

func (w *window) offer(found []model.Recovered) {
	work := found[0]
	name := work.Plan.Name
	if work.Path != "" {
		name += " (" + filepath.Base(work.Path) + ")"
	}
	told := w.words.Say("An earlier run ended before “%s” was saved.\nIts changes up to %s were kept.",
		name, w.words.Moment(work.Saved))
	if work.Changed {
		told += "\n" + w.words.Say("Its file was written to since; it is left alone until you save.")
	}
	text := widget.NewLabel(told)
	var d *dialog.CustomDialog
	next := func(do func()) func() {
		return func() {
			d.Hide()
			do()
			if len(found) > 1 {
				w.offer(found[1:])
			}
		}
	}
	take := widget.NewButton(w.words.Say("Take them up"), func() {
		d.Hide()
		w.take(work)
	})
	take.Importance = widget.HighImportance
	w.asked = map[string]*widget.Button{"Take them up": take}
	d = dialog.NewCustomWithoutButtons(w.words.Say("Unsaved work"), text, w.win)
	d.SetButtons([]fyne.CanvasObject{
		widget.NewButton(w.words.Say("Discard them"), next(func() { w.keeper.recovery.Discard(work) })),
		widget.NewButton(w.words.Say("Later"), next(func() {})),
		take,
	})
	w.raise(d)
	w.tellOnceDrawn("offered")
}

// take takes unsaved work up.
func (w *window) take(work model.Recovered) {
	w.bench.Recover(work)
	w.keeper.taken = append(w.keeper.taken, work)
	w.keeper.kept, w.keeper.keptAt = nil, time.Time{} // kept anew, under this program's name
	w.keep()
	w.afterOpening()
}
