package ui

import (
	"os"
	"slices"

	"fyne.io/fyne/v2"

	"pavilight/app/model"
	"pavilight/app/words"
	"pavilight/facets"
)

// fileMemory is what the program remembers from one run to the next. Everything
// read back is checked: the file may have been damaged or edited.
type fileMemory struct{ prefs fyne.Preferences }

// Keys of the preferences.
const (
	widthKey     = "window.width"
	heightKey    = "window.height"
	themeKey     = "view.theme"
	scaleKey     = "view.text"
	planPaneKey  = "view.plan"
	stonePaneKey = "view.stone"
	recentKey    = "files.recent"
	hintsKey     = "hints.seen"
	languageKey  = "view.language"
	roomKey      = "view.room"
	rangeKey     = "look.range"  // of the strip, degrees
	lightsKey    = "look.lights" // of true colour, by column
)

// The size of the window when it is opened for the first time.
const (
	usualWidth  = 1360
	usualHeight = 860
)

func (m fileMemory) windowSize() fyne.Size {
	sound := func(v float64, usual, least, most float32) float32 {
		if f := float32(v); f >= least && f <= most { // false for NaN
			return f
		}
		return usual
	}
	return fyne.NewSize(sound(m.prefs.Float(widthKey), usualWidth, 640, 8000),
		sound(m.prefs.Float(heightKey), usualHeight, 480, 8000))
}

func (m fileMemory) keepWindowSize(s fyne.Size) {
	m.prefs.SetFloat(widthKey, float64(s.Width))
	m.prefs.SetFloat(heightKey, float64(s.Height))
}

// room is the one that was open last.
func (m fileMemory) room() room {
	if r := room(m.prefs.Int(roomKey)); r > lookRoom && r < rooms {
		return r
	}
	return lookRoom
}

// recall gives the Look room what was set there in an earlier run; what is not sound is left
// as it is.
func (m fileMemory) recall(look *model.Look) {
	if deg := m.prefs.Float(rangeKey); deg != 0 {
		look.SetStripRange(facets.Angle(deg) * facets.Degree) // refuses what no strip can rock by
	}
	if names := m.prefs.StringList(lightsKey); len(names) == columns {
		for j, name := range names {
			look.SetLight(name, j) // refuses a light that there is not
		}
	}
}

// keepLook remembers what is set in the Look room.
func (m fileMemory) keepLook(look *model.Look) {
	m.prefs.SetFloat(rangeKey, look.StripRange().Degrees())
	m.prefs.SetStringList(lightsKey, look.Lights())
}

func (m fileMemory) brightness() brightness {
	switch b := brightness(m.prefs.String(themeKey)); b {
	case inLight, inDark:
		return b
	}
	return asSystem
}

// language is the code of the language that the user chose, "" for that of the system.
func (m fileMemory) language() string {
	if code := m.prefs.String(languageKey); slices.Contains(words.Languages(), code) {
		return code
	}
	return ""
}

// words are those of the language that the window speaks; system is that of the system.
func (m fileMemory) words(system string) *words.Words {
	if code := m.language(); code != "" {
		return words.In(code)
	}
	return words.In(system)
}

// textScale is how much larger than drawn text is.
func (m fileMemory) textScale() float32 {
	if v := float32(m.prefs.FloatWithFallback(scaleKey, 1)); v >= leastScale && v <= mostScale { // false for NaN
		return v
	}
	return 1
}

// pane reports whether a side pane is shown: as the user decided, else as usual.
func (m fileMemory) pane(key string, usual bool) bool {
	switch m.prefs.String(key) {
	case "shown":
		return true
	case "folded":
		return false
	}
	return usual
}

func (m fileMemory) keepPane(key string, shown bool) {
	m.prefs.SetString(key, map[bool]string{true: "shown", false: "folded"}[shown])
}

// mostRecent is how many files are remembered.
const mostRecent = 8

func (m fileMemory) recent() []string {
	list := m.prefs.StringList(recentKey)
	return list[:min(len(list), mostRecent)]
}

func (m fileMemory) keepRecent(path string) {
	list := slices.DeleteFunc(slices.Clone(m.recent()), func(p string) bool { return p == path })
	list = append([]string{path}, list...)
	m.prefs.SetStringList(recentKey, list[:min(len(list), mostRecent)])
}

func (m fileMemory) forgetRecent(path string) {
	m.prefs.SetStringList(recentKey, slices.DeleteFunc(slices.Clone(m.recent()), func(p string) bool { return p == path }))
}

func exists(path string) bool {
	_, err := os.Stat(path)
	return err == nil
}
