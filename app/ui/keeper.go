package ui

import (
	"fmt"
	"path/filepath"
	"sync"
	"sync/atomic"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/facets"
)

// keeper keeps unsaved work against a crash and notices when the plan's file is
// changed by other hands.
type keeper struct {
	recovery *model.Recovery
	kept     *facets.Plan // the last that was kept
	keptAt   time.Time
	busy     atomic.Bool // a file is being written or asked after
	told     bool        // that keeping fails

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
	k.recovery = model.NewRecovery(folder)
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
			}
		}
	})
}

func (w *window) endKeeping() {
	if w.keeper.stop != nil {
		close(w.keeper.stop)
		w.keeper.stop = nil
		w.keeper.done.Wait()
	}
}

// keep looks after the file and the unsaved work, the slow part elsewhere.
func (w *window) keep() {
	k, doc := &w.keeper, w.bench.Doc
	if k.stop == nil || !k.busy.CompareAndSwap(false, true) {
		return
	}
	plan, path := doc.Plan(), doc.Path
	save := doc.Modified() && plan != k.kept && time.Since(k.keptAt) >= keepEvery
	drop := !doc.Modified() && k.kept != nil
	if save {
		k.kept, k.keptAt = plan, time.Now()
	}
	if drop {
		k.kept = nil
	}
	k.done.Go(func() {
		var err error
		if save {
			err = k.recovery.Keep(plan, path)
		}
		if drop {
			k.recovery.Drop()
		}
		stamp := model.StampOf(path)
		k.busy.Store(false)
		w.do(func() { w.looked(doc, path, stamp, err) })
	})
}

// looked takes what the keeper found.
func (w *window) looked(doc *model.Document, path string, stamp model.Stamp, err error) {
	if err != nil && !w.keeper.told {
		w.keeper.told = true
		w.say(fmt.Errorf("unsaved work cannot be kept against a crash: %w", err))
	}
	if doc != w.bench.Doc || path != doc.Path || w.keeper.stop == nil {
		return
	}
	switch doc.Seen(stamp) {
	case model.Gone:
		w.onPlan()
		w.say(fmt.Errorf("%s is gone from its folder; save the plan to write it again", filepath.Base(path)))
	case model.Changed:
		w.askReload(path)
	}
}

// askReload asks what to do with a file that other hands changed.
func (w *window) askReload(path string) {
	text := filepath.Base(path) + " was changed by another program.\nRead it again?"
	if w.bench.Doc.Modified() {
		text += " Your own changes would be lost."
	}
	d := dialog.NewConfirm("The file has changed", text, func(again bool) {
		if again {
			w.open(path)
		}
	}, w.win)
	d.SetConfirmText("Read again")
	d.SetDismissText("Keep mine")
	w.raise(d)
}

// keepNow keeps unsaved work before the program ends without asking.
func (w *window) keepNow() {
	if w.keeper.recovery == nil {
		return
	}
	if w.bench.Doc.Modified() {
		w.keeper.recovery.Keep(w.bench.Doc.Plan(), w.bench.Doc.Path) // nobody is left to be told
	} else {
		w.keeper.recovery.Drop()
	}
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
	text := widget.NewLabel(fmt.Sprintf("An earlier run ended before “%s” was saved.\nIts changes up to %s were kept.",
		name, work.Saved.Format("2 January 15:04")))
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
	take := widget.NewButton("Take them up", func() {
		d.Hide()
		w.bench.Recover(work)
		w.keeper.kept, w.keeper.keptAt = nil, time.Time{} // kept anew, under this program's name
		w.keep()
		w.keeper.recovery.Discard(work)
		w.afterOpening()
	})
	take.Importance = widget.HighImportance
	d = dialog.NewCustomWithoutButtons("Unsaved work", text, w.win)
	d.SetButtons([]fyne.CanvasObject{
		widget.NewButton("Discard them", next(func() { w.keeper.recovery.Discard(work) })),
		widget.NewButton("Later", next(func() {})),
		take,
	})
	w.raise(d)
	w.tell("offered")
}
