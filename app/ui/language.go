package ui

import (
	"encoding/json"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/lang"

	"pavilight/app/model"
	"pavilight/app/words"
)

// setLanguage has the window speak a language from now on, "" for that of the system.
func (w *window) setLanguage(code string) {
	w.commitTyping()
	before := w.words.Language()
	w.app.Preferences().SetString(languageKey, code)
	w.words = w.files.words(w.system)
	w.speakToolkit()
	w.bench.SetWords(w.words)
	w.printIn(before)
	w.build()
	w.win.SetContent(w.content())
	w.win.SetMainMenu(w.buildMenu())
	w.refreshStone()
	w.onPlan()
	w.grid.refreshAll()
	w.grid.strip.show()
	w.refreshFrom()
	w.refreshRay()
	w.enter(w.room)
}

// printIn has sheet and report speak the window's language, too, unless another was chosen
// for them than the one that the window spoke before.
func (w *window) printIn(before string) {
	now := w.words.Language()
	if cut := w.cutting.cut; now != before && cut.Wish.Language == before {
		cut.Change(func(wish *model.CutWish) { wish.Language = now })
	}
	if tell := w.telling.tell; now != before && tell.Wish.Language == before {
		tell.Change(func(wish *model.TellWish) { wish.Language = now })
	}
}

// toolkitWords are the texts of the toolkit's own dialogs and menus, by its keys.
func toolkitWords() map[string]words.Key {
	return map[string]words.Key{
		"Advanced": "Advanced", "Cancel": "Cancel", "Confirm": "Confirm", "Copy": "Copy", "Create Folder": "Create folder",
		"Cut": "Cut|to the clipboard", "Enter filename": "Enter a file name", "Error": "Error", "Favourites": "Favourites",
		"File": "File", "Folder": "Folder", "New Folder": "New folder", "No": "No", "OK": "OK", "Open": "Open",
		"Paste": "Paste", "Quit": "Quit", "Redo": "Redo", "Save": "Save", "Select all": "Select all",
		"Show Hidden Files": "Show hidden files", "Undo": "Undo", "Yes": "Yes",
		"file.name": "Name", "file.parent": "Folder above",
	}
}

// speakToolkit has the toolkit's own dialogs say their texts in the window's language. The
// toolkit speaks the system's alone, so that is where it is told them.
func (w *window) speakToolkit() {
	texts := map[string]any{}
	for key, text := range toolkitWords() {
		texts[key] = map[string]string{"other": w.words.Say(text)}
	}
	content, err := json.Marshal(texts)
	if err == nil {
		err = lang.AddTranslationsForLocale(content, lang.SystemLocale())
	}
	if err != nil {
		fyne.LogError("the toolkit keeps its own words", err)
	}
}
