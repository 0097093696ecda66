//go:build cgo

// Package ui is the program's window. It is the only package beside main that
// knows the toolkit; what it shows is computed in package model.
package ui

import (
	"context"
	"os"
	"path/filepath"
	"sync/atomic"
	"time"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/app"
	"fyne.io/fyne/v2/lang"
	"fyne.io/fyne/v2/storage/repository"

	"pavilight/app/icon"
	"pavilight/app/model"
	"pavilight/app/stock"
	"pavilight/app/version"
	"pavilight/facets"
	"pavilight/testdata"
)

// Options say what the window opens with.
type Options struct {
	Path string // of a plan or scan; empty for the bundled stone
}

const appID = "org.pavilight"

// iconPixels is the side of the icon that the window system gets; it makes its own
// smaller ones.
const iconPixels = 128

// Run opens the window and returns when it was closed. A plan that cannot be opened
// is told of in the window, which then shows the bundled stone. When ctx is
// cancelled the window closes; unsaved work is kept for the next start.
func Run(ctx context.Context, o Options) error {
	started := time.Now()
	app.SetMetadata(fyne.AppMetadata{
		ID: appID, Name: "Pavilight", Version: version.Number,
		// All of our goroutines come in by post; the toolkit checks that where it is asked to.
		Migrations: map[string]bool{"fyneDo": os.Getenv(stagesVariable) != checkThreads},
	})
	logged := takeToolkitLog()
	makeFolders()
	mendSettings(settingsFile())
	a := app.NewWithID(appID)
	a.SetIcon(fyne.NewStaticResource("pavilight.png", icon.PNG(iconPixels)))
	if files, err := repository.ForScheme("file"); err == nil {
		repository.Register("file", writeLater(files))
	}
	a.Settings().SetTheme(newGreys(fileMemory{a.Preferences()}.brightness(), fileMemory{a.Preferences()}.textScale()))
	doc, err := bundledDocument()
	if err != nil {
		return err
	}
	w, err := newWindow(a, doc, lang.SystemLocale().LanguageString(), watched(post), stages(started))
	if err != nil {
		return err
	}
	materials, materialsErr := stock.Open("")
	if materialsErr == nil {
		w.bench.Stock = materials
	}
	a.Lifecycle().SetOnStarted(func() {
		w.beginKeeping(filepath.Join(a.Storage().RootURI().Path(), "unsaved"))
		w.started(o.Path)
		if materialsErr != nil {
			w.explain("Materials of your own", materialsErr)
		}
	})
	// The toolkit hears signals, too, and may have ended its loop by the time that ctx tells
	// of one; nothing may be asked of its windows then.
	var over atomic.Bool
	saveSettings := takeLastHook(a.Lifecycle())
	stop := context.AfterFunc(ctx, func() {
		post(func() {
			if !over.Load() {
				w.closeKept()
			}
		})
	})
	defer stop()
	w.logged = logged
	endWatch := beginWatch(post)
	w.win.ShowAndRun()
	endWatch()
	over.Store(true)
	if !w.closed { // a signal ended the toolkit's loop
		w.keepNow()
	}
	w.endKeeping()
	w.stopRooms()
	w.keeper.recovery.Close()
	w.keeper.claims.Release()
	saveSettings()
	return nil
}

// takeLastHook takes from the toolkit what it does when its loop has ended, which is to
// save the settings, and returns it, to be called then. The toolkit hands it to the loop
// that is closing, and panics where the two meet.
func takeLastHook(l fyne.Lifecycle) func() {
	toolkits, ok := l.(interface {
		OnStopped() func()
		SetOnStoppedHookExecuted(func())
	})
	if !ok || toolkits.OnStopped() == nil {
		return func() {}
	}
	hook := toolkits.OnStopped()
	toolkits.SetOnStoppedHookExecuted(nil)
	return hook
}

// bundledDocument is the stone that the window opens with when none is named.
func bundledDocument() (*model.Document, error) {
	file, err := testdata.Plans().Open(testdata.Bundled)
	if err != nil {
		return nil, err
	}
	defer file.Close()
	plan, err := facets.ReadPlan(file, testdata.Bundled)
	if err != nil {
		return nil, err
	}
	return model.NewDocument(plan, ""), nil
}

// makeFolders makes the user's folders for settings and caches where a fresh
// account has none yet; the toolkit expects them. Where that fails the toolkit
// says so, and the program works without memory.
func makeFolders() {
	for _, find := range []func() (string, error){os.UserConfigDir, os.UserCacheDir} {
		if folder, err := find(); err == nil {
			os.MkdirAll(folder, 0o700)
		}
	}
}
