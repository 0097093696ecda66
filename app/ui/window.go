package ui

import (
	"math"
	"slices"
	"strings"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/dialog"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/app/solid"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// window is the program's one window. All of its methods run on the toolkit's
// goroutine.
type window struct {
	app    fyne.App
	win    fyne.Window
	bench  *model.Bench
	words  *words.Words       // in which the window speaks
	system string             // locale of the system
	do     func(func())       // hands work to the toolkit's goroutine
	tell   func(stage string) // of interest to scripts that drive the window

	// header
	header   *fyne.Container
	headed   [4]int // letters of the words at its left when they were laid out
	title    *line
	material *chooser
	width    *numberField
	weight   *line
	index    *line // refractive, of the stone
	doors    [rooms]*roomButton
	state    *line
	progress *progressLine
	stop     *tipButton

	// rooms
	room  room
	panes *paneLayout
	body  *fyne.Container

	list     *tierList
	troubles *widget.Label
	fault    *fyne.Container
	grid     *grid
	tilt     *numberField
	turn     *numberField
	head     *numberField
	shines   *chooser        // the light of true colour
	shining  *fyne.Container // with its name, where a row shows colour
	solid    *solidView
	facts    *factTable
	from     *fromPlot
	factBox  *fyne.Container
	rayBox   *fyne.Container
	rayTitle *wrapped
	ray      *rayList
	beside   rayBeside

	tuning  tuneBench
	tuneBox fyne.CanvasObject
	cutting cutBench
	cutBox  fyne.CanvasObject
	telling tellBench
	tellBox fyne.CanvasObject

	tips    *tipLayer
	message *line
	light   *line

	menu     menus
	files    fileMemory
	keeper   keeper
	closed   bool
	ledgers  throttle
	told     *model.Frame // whose numbers the ledger shows
	stages   map[string]bool
	logged   *toolkitLog               // nil without one
	pointing bool                      // the pointer is over a map
	ready    map[room]bool             // whose answer was told of, until the next is asked for
	dialogs  []dialog.Dialog           // that are open, the top one last
	asked    map[string]*widget.Button // answers of the question that is open, by their label
}

// newWindow builds the window around a bench; nothing is shown yet. system is the locale of
// the system. do hands work to the toolkit's goroutine, in order, without waiting for it.
func newWindow(a fyne.App, doc *model.Document, system string, do func(func()), tell func(string)) (*window, error) {
	w := &window{app: a, do: do, tell: tell, system: system, stages: map[string]bool{}, ready: map[room]bool{}}
	w.files = fileMemory{a.Preferences()}
	w.words = w.files.words(system)
	bench, err := model.NewBench(doc, do, w.onLook, w.onPlan)
	if err != nil {
		return nil, err
	}
	w.bench = bench
	w.bench.SetWords(w.words)
	if w.files.language() != "" {
		w.speakToolkit()
	}
	w.win = a.NewWindow("Pavilight")
	w.build()
	w.win.SetContent(w.content())
	w.win.SetMainMenu(w.buildMenu())
	w.win.SetCloseIntercept(w.requestClose)
	w.win.SetOnDropped(w.dropped)
	w.win.Canvas().SetOnTypedKey(w.strayKey)
	w.win.Canvas().AddShortcut(redoToo(), func(fyne.Shortcut) { w.redo() })
	w.win.Resize(w.files.windowSize())
	w.onPlan()
	return w, nil
}

func (w *window) build() {
	w.tips = newTipLayer(w.do, w.words)
	w.tips.shown = func() { w.tell("tip") }
	w.title = newWord(theme.ColorNameForeground, theme.SizeNameSubHeadingText, "").bold()
	w.material = newChooser(theme.SizeNameText, nil)
	w.material.opens = w.chooseMaterial
	w.width = newNumberField(func(s string) (float64, error) { return model.ParseNumber(s, "mm") },
		func(v float64) string { return w.words.Say("%.2f", v) }, 0.1)
	w.width.commit, w.width.trouble = w.bench.SetWidth, w.say
	w.weight = newWord(colourDim, theme.SizeNameText, "")
	w.index = newWord(colourDim, theme.SizeNameText, "")
	for r := range rooms {
		w.doors[r] = newRoomButton(w.words.Say(r.name()), func() { w.enter(r) })
	}
	w.state = newLine(colourDim, theme.SizeNameText).aligned(fyne.TextAlignTrailing)
	w.progress = newProgressLine()
	w.stop = w.tips.button("Stop", nil, tipStop, w.stopOrResume)

	w.list = newTierList(w.bench, w.tips, w.say, w.strayKey)
	w.list.items = w.tierItems
	w.troubles = widget.NewLabel("")
	w.troubles.Wrapping = fyne.TextWrapWord
	w.fault = w.troubleBox()
	w.fault.Hide()

	w.files.recall(w.bench.Look)
	w.grid = newGrid(w.bench, w.strayKey)
	w.grid.onReach = func() { w.files.keepLook(w.bench.Look) }
	w.grid.onPixels = func(px int) { w.bench.Look.Adjust(func(s *trace.Settings) { s.Pixels = px }) }
	degrees := func(set func(*trace.Settings, facets.Angle), most float64, refused words.Key, step float64) *numberField {
		f := newNumberField(readDegrees, w.writeDegrees, step)
		f.commit = func(v float64) error {
			if !(v >= 0 && v <= most) {
				return words.Errorf(refused, most)
			}
			w.bench.Look.Adjust(func(s *trace.Settings) { set(s, facets.Angle(v)*facets.Degree) })
			w.refreshLight()
			return nil
		}
		f.trouble = w.say
		return f
	}
	w.tilt = degrees(func(s *trace.Settings, a facets.Angle) { s.View.Tilt = a }, 80, "the tilt goes from 0° to %g°", 1)
	w.tilt.read, w.tilt.commit = readTilt, w.setTilt
	w.grid.reach.trouble = w.say
	w.grid.onTilt = func(a facets.Angle) { w.say(w.setTilt(a.Degrees())) }
	w.head = degrees(func(s *trace.Settings, a facets.Angle) { s.Head = a }, 60, "the half-angle of the viewer's head goes from 0° to %g°", 1)
	w.shines = newChooser(theme.SizeNameText, func() []*fyne.MenuItem { return w.lightItems(0, 1, 2) })
	w.grid.lights = func(column int) []*fyne.MenuItem { return w.lightItems(column) }
	w.grid.onRow = w.refreshLight
	w.turn = newNumberField(func(s string) (float64, error) { return model.ParseNumber(s, "") },
		func(v float64) string { return w.words.Say("%.4g", v) }, 1)
	w.turn.commit = func(v float64) error {
		gear := float64(w.bench.Doc.Plan().Gear)
		if !(v >= 0 && v <= gear) {
			return words.Errorf("an index goes from 0 to %g on this gear", gear)
		}
		w.bench.Look.Adjust(func(s *trace.Settings) { s.View.Turn = facets.Angle(2 * math.Pi * v / gear) })
		w.refreshLight()
		return nil
	}
	w.turn.trouble = w.say

	w.solid = newSolidView(func(tier string) {
		w.bench.Select(tier)
		w.list.reveal(tier)
	}, w.strayKey)
	w.facts = newFactTable()
	w.from = newFromPlot(w.words)
	w.rayTitle = newWrapped(theme.ColorNameForeground, theme.SizeNameText)
	w.ray = newRayList(w.words, w.bench.Look.PickBounce, w.strayKey)
	w.giveTips()
	w.message = newLine(colourDim, theme.SizeNameCaptionText)
	w.light = newLine(colourDim, theme.SizeNameCaptionText).aligned(fyne.TextAlignTrailing)
}

// giveTips gives the choosers and fields that are terse their tips.
func (w *window) giveTips() {
	give := func(t *tip, words words.Key) { *t = tip{w.tips, words} }
	give(&w.material.tip, tipMaterial)
	give(&w.width.tip, tipWidth)
	give(&w.tilt.tip, tipTilt)
	give(&w.turn.tip, tipTurn)
	give(&w.head.tip, tipHead)
	give(&w.shines.tip, tipLight)
	give(&w.grid.reach.tip, tipRange)
	give(&w.grid.strip.tip, tipStrip)
	give(&w.from.tip, tipFrom)
	w.grid.ledger.tips = w.tips
	for r := range rooms {
		give(&w.doors[r].tip, tipRoom(r))
	}
	for j := range columns {
		give(&w.grid.media[j].tip, tipMedium)
	}
	for i := range w.grid.row {
		give(&w.grid.row[i].tip, tipRow)
	}
}

// readTilt reads an angle that may be negative: the stone rocked the other way.
func readTilt(text string) (float64, error) {
	for _, minus := range []string{"-", "−", "–"} {
		if rest, negative := strings.CutPrefix(strings.TrimSpace(text), minus); negative {
			deg, err := readDegrees(rest)
			return -deg, err
		}
	}
	return readDegrees(text)
}

func (w *window) setTilt(deg float64) error {
	const most = 80
	if !(deg >= -most && deg <= most) {
		return words.Errorf("the tilt goes from -%d° to %d°", most, most)
	}
	w.bench.Look.Adjust(func(s *trace.Settings) { s.View.Tilt = facets.Angle(deg) * facets.Degree })
	w.refreshLight()
	w.grid.strip.Refresh()
	return nil
}

// content puts the window together: header, panes, status line.
func (w *window) content() fyne.CanvasObject {
	w.panes = &paneLayout{files: w.files}
	w.body = container.New(w.panes, w.planPane(), w.lookPane(), w.stonePane())
	w.tuneBox, w.cutBox, w.tellBox = w.buildTuneRoom(), w.buildCutRoom(), w.buildTellRoom()
	w.tuneBox.Hide()
	w.cutBox.Hide()
	w.tellBox.Hide()
	status := container.New(layout.NewCustomPaddedLayout(2, 4, 12, 12), container.NewGridWithColumns(2, w.message, w.light))
	return container.NewStack(container.NewBorder(w.headerBar(), status, nil, nil,
		container.NewStack(w.body, w.tuneBox, w.cutBox, w.tellBox)), w.tips.box)
}

func (w *window) headerBar() fyne.CanvasObject {
	unit := newWord(colourDim, theme.SizeNameText, "mm")
	left := container.NewHBox(w.title, gap(6), w.material, w.index, gap(2),
		container.NewGridWrap(fyne.NewSize(58, w.width.MinSize().Height), w.width), unit, gap(4), w.weight)
	doors := container.New(layout.NewCustomPaddedHBoxLayout(2))
	for _, d := range w.doors {
		doors.Add(d)
	}
	right := container.New(&progressLayout{}, w.state, w.progress, w.stop)
	w.header, w.headed = container.New(&headerLayout{w.title, w.index, w.weight}, left, doors, right), [4]int{}
	return container.NewStack(ground(colourPane), container.New(layout.NewCustomPaddedLayout(4, 4, 14, 10), w.header))
}

// planPane is the left one: the tiers, and what is wrong with the plan if anything is.
func (w *window) planPane() fyne.CanvasObject {
	add := w.tips.button("Tier", theme.ContentAddIcon(), tipTier, w.addTier)
	add.Importance = widget.LowImportance
	foot := container.NewVBox(container.New(layout.NewCustomPaddedLayout(0, 4, 8, 8), container.NewHBox(add)), w.fault)
	return pane(container.NewBorder(nil, foot, nil, nil, w.list.scroll))
}

func (w *window) troubleBox() *fyne.Container {
	heading := newLine(theme.ColorNameError, theme.SizeNameText).bold()
	heading.setText(w.words.Say("This plan makes no stone"))
	warning := widget.NewIcon(theme.NewErrorThemedResource(theme.WarningIcon()))
	keeps := newLine(colourDim, theme.SizeNameCaptionText)
	keeps.setText(w.words.Say("The maps show the last stone it made."))
	scroll := container.NewVScroll(w.troubles)
	scroll.SetMinSize(fyne.NewSize(100, 110))
	return container.NewStack(ground(theme.ColorNameInputBackground),
		container.New(layout.NewCustomPaddedLayout(8, 8, 8, 8), container.NewBorder(
			container.New(layout.NewCustomPaddedVBoxLayout(2),
				container.NewBorder(nil, nil, warning, nil, heading), keeps), nil, nil, nil, scroll)))
}

// lookPane is the middle one: how the stone is looked at, and the grid of maps.
func (w *window) lookPane() fyne.CanvasObject {
	word := func(s words.Key) fyne.CanvasObject { return newWord(colourDim, theme.SizeNameText, w.words.Say(s)) }
	field := func(f *numberField) fyne.CanvasObject {
		return container.NewGridWrap(fyne.NewSize(58, f.MinSize().Height), f)
	}
	view := container.NewHBox(word("Tilted"), field(w.tilt), word("° toward index"), field(w.turn), gap(14),
		word("Viewer's head"), field(w.head), word("°"))
	w.shining = container.NewHBox(gap(14), word("Colour under"), w.shines)
	w.shining.Hide()
	view.Add(w.shining)
	return pane(container.New(layout.NewCustomPaddedLayout(8, 8, 14, 6),
		container.NewBorder(container.New(layout.NewCustomPaddedLayout(0, 8, 0, 0), view), nil, nil, nil, w.grid.box)))
}

// stonePane is the right one: the solid and its measures.
func (w *window) stonePane() fyne.CanvasObject {
	pose := func(name, tip words.Key, p func() solid.Pose) fyne.CanvasObject {
		b := w.tips.button(name, nil, tip, func() { w.solid.turnTo(p()) })
		b.Importance = widget.LowImportance
		return b
	}
	poses := container.NewGridWithColumns(4, pose("Table", tipFaceUp, solid.FaceUp), pose("Side", tipSide, solid.Profile),
		pose("Culet", tipFaceDown, solid.FaceDown), pose("Askew", tipAskew, restingPose))
	top := container.New(&squareLayout{}, w.solid, poses)
	whence := newWord(theme.ColorNameForeground, theme.SizeNameText, w.words.Say("Where it comes from")).bold()
	under := newLine(colourDim, theme.SizeNameCaptionText).with(w.words.Say("returned light by angle from the eye"))
	// The measures scroll where they need more room; the curve keeps its own.
	w.factBox = container.NewBorder(nil, container.New(layout.NewCustomPaddedLayout(2, 6, 14, 10),
		container.New(layout.NewCustomPaddedVBoxLayout(1), whence, under, w.from)), nil, nil,
		container.NewVScroll(container.New(layout.NewCustomPaddedLayout(8, 2, 14, 10), w.facts.box)))
	w.rayBox = w.buildRayBox()
	w.rayBox.Hide()
	return pane(container.NewBorder(top, nil, nil, nil, container.NewStack(w.factBox, w.rayBox)))
}

func ground(name fyne.ThemeColorName) fyne.CanvasObject { return newGround(name) }

func pane(content fyne.CanvasObject) fyne.CanvasObject {
	return container.NewStack(ground(colourPane), content)
}

func gap(width float32) fyne.CanvasObject {
	r := canvas.NewRectangle(nil)
	r.SetMinSize(fyne.NewSize(width, 1))
	return r
}

// enter opens a room.
func (w *window) enter(r room) {
	if r != w.room {
		w.win.Canvas().Unfocus() // what was typed there is taken; keys are the new room's
		w.tips.leave()
	}
	w.room = r
	w.cutting.toPrint = false
	w.app.Preferences().SetInt(roomKey, int(r))
	for k := range rooms {
		w.doors[k].setOpen(k == r)
	}
	setVisible(w.body, r == lookRoom)
	setVisible(w.tuneBox, r == tuneRoom)
	setVisible(w.cutBox, r == cutRoom)
	setVisible(w.tellBox, r == tellRoom)
	w.cutting.film.halt()
	w.followPlan()
	w.refreshProgress()
	w.tellOnceDrawn("entered")
}

// followPlan gives the open room the plan as it stands.
func (w *window) followPlan() {
	switch w.room {
	case tuneRoom:
		w.enterTune()
		w.refreshTune()
	case cutRoom:
		w.enterCut()
	case tellRoom:
		w.enterTell()
	}
}

// say tells why an entry was refused, and takes it back with nil.
func (w *window) say(err error) {
	if err == nil {
		w.message.setColour(colourDim)
		w.message.setText("")
		return
	}
	w.message.setColour(theme.ColorNameError)
	w.message.setText(w.words.Say("Not taken: %s", err))
}

// report says what was done.
func (w *window) report(text words.Key, args ...any) {
	w.message.setColour(colourDim)
	w.message.setText(w.words.Say(text, args...))
}

// onLook follows the maps.
func (w *window) onLook(c model.Change) {
	if w.grid == nil { // the bench tells of itself before the window is built
		return
	}
	switch c {
	case model.StoneChanged:
		w.refreshStone()
	case model.MapsChanged:
		w.grid.refreshMaps()
		f := w.bench.Look.Frame
		final := f != nil && f.Final
		// Numbers never stand beside maps of another stone or view.
		other := f != nil && (w.told == nil || w.told.Subject != f.Subject || w.told.Settings != f.Settings)
		if w.ledgers.due(final || other) {
			w.told = f
			w.index.setText(w.bench.Look.StoneIndex())
			w.fitHeader()
			w.grid.refreshHeadings()
			w.grid.refreshLedger()
			w.refreshFrom()
			w.refreshProgress()
		}
		w.once("coarse")
		if final {
			w.tellPlaces()
			w.tell("refined")
		}
	case model.StateChanged:
		w.refreshProgress()
	case model.RayChanged:
		w.refreshRay()
	case model.StripChanged:
		w.grid.strip.show()
		if w.bench.Look.Strip.Done {
			w.tell("rocked")
		}
	case model.PointerChanged:
		w.grid.refreshPointer()
		w.refreshPointer()
		if over := w.bench.Look.Pointer.Over; over != w.pointing {
			w.pointing = over
			if over {
				w.tell("pointed")
			}
		}
	}
}

// tellReady tells a stage whenever a room comes to its answer.
func (w *window) tellReady(r room, stage string, ready bool) {
	if ready && !w.ready[r] {
		w.tell(stage)
	}
	w.ready[r] = ready
}

// once tells a stage the first time it is reached.
func (w *window) once(stage string) {
	if !w.stages[stage] {
		w.stages[stage] = true
		w.tell(stage)
	}
}

// onPlan follows the plan, its history and what is selected.
func (w *window) onPlan() {
	if w.grid == nil {
		return
	}
	plan := w.bench.Doc.Plan()
	title := w.bench.Doc.Title(w.words)
	w.title.setText(title)
	w.win.SetTitle(title + " – Pavilight")
	w.width.show(plan.WidthMM)
	name := plan.Material.Name
	if m, err := w.bench.MaterialOf(plan.Material); err == nil {
		name = stock.NameOf(w.words, m)
	}
	w.material.setText(name)
	w.list.refresh()
	w.solid.selectTier(w.bench.Selected)
	w.grid.refreshHeadings()
	w.refreshLight()
	w.refreshFacts()
	w.refreshMenu()
	w.followPlan()
}

func (w *window) refreshStone() {
	lines := w.bench.Troubles()
	if len(lines) > 0 {
		w.troubles.SetText(strings.Join(lines, "\n"))
		w.fault.Show()
	} else if w.fault.Visible() {
		w.fault.Hide()
	}
	w.solid.show(w.bench.Look.Subject.Stone)
	w.list.refresh() // angles that the solver found
	w.refreshFacts()
}

func (w *window) refreshFacts() {
	facts := w.bench.Facts()
	w.facts.show(facts)
	w.weight.setText(w.bench.Weight())
	w.index.setText(w.bench.Look.StoneIndex())
	w.fitHeader()
}

// fitHeader lays the header out anew where its words have become longer or shorter.
func (w *window) fitHeader() {
	now := [4]int{len(w.title.text), len(w.material.text), len(w.index.text), len(w.weight.text)}
	if w.header != nil && now != w.headed {
		w.headed = now
		w.header.Refresh()
	}
}

// refreshFrom shows where the returned light comes from.
func (w *window) refreshFrom() {
	f := w.bench.Look.Frame
	if f == nil {
		return
	}
	var curves [columns][fromBins]float64
	var names [columns]string
	for j := range min(columns, len(f.Result.Columns)) {
		curves[j], names[j] = f.Result.Columns[j].From, w.bench.Look.NameOf(f.Around[j].Medium)
	}
	w.from.show(curves, names, f.Settings.Head.Degrees(), true)
}

// refreshRay shows the followed ray, in the maps, in the stone and as a list.
func (w *window) refreshRay() {
	r := w.bench.Look.Ray
	w.grid.refreshRay()
	w.solid.showRay(r)
	setVisible(w.rayBox, r != nil)
	setVisible(w.factBox, r == nil)
	if r == nil {
		return
	}
	w.showRayLists(r)
	w.tellOnceDrawn("followed")
}

func (w *window) refreshLight() {
	s := w.bench.Look.Settings()
	w.tilt.show(s.View.Tilt.Degrees())
	w.head.show(s.Head.Degrees())
	turn := s.View.Turn.Radians() / (2 * math.Pi) * float64(w.bench.Doc.Plan().Gear)
	w.turn.show(turn)
	w.light.setText(w.bench.Look.LightInWords())
	one, ok := w.bench.Look.OneLight()
	if ok {
		w.shines.setText(w.words.Say(model.LightName(one)))
	} else {
		w.shines.setText(w.words.Say("several lights"))
	}
	setVisible(w.shining, w.bench.Look.ShowsColour())
}

// lightItems lists the lights that the stone can be seen under in true colour, in the given
// columns.
func (w *window) lightItems(columns ...int) []*fyne.MenuItem {
	var items []*fyne.MenuItem
	now := w.bench.Look.Lights()
	for _, name := range model.LightNames() {
		item := w.item(model.LightName(name), nil, func() {
			w.say(w.bench.Look.SetLight(name, columns...))
			w.files.keepLook(w.bench.Look)
			w.refreshLight()
			w.grid.refreshHeadings()
		})
		item.Checked = !slices.ContainsFunc(columns, func(j int) bool { return now[j] != name })
		items = append(items, item)
	}
	return items
}

func (w *window) refreshPointer() {
	x, y, ok := w.bench.Look.Place()
	if !ok {
		w.report("")
		return
	}
	w.report(placeWords(x, y), math.Abs(x), math.Abs(y))
}

// placeWords says on which side of the map's middle a place lies.
func placeWords(x, y float64) words.Key {
	switch {
	case x < 0 && y < 0:
		return "%.2f mm left, %.2f mm down from the middle"
	case x < 0:
		return "%.2f mm left, %.2f mm up from the middle"
	case y < 0:
		return "%.2f mm right, %.2f mm down from the middle"
	}
	return "%.2f mm right, %.2f mm up from the middle"
}

// runState is what a room is at: shown in the header, and what its Stop button ends.
type runState struct {
	words           string
	share           float64
	active, stopped bool
}

// running returns what the open room is at.
func (w *window) running() runState {
	switch w.room {
	case tuneRoom:
		return w.tuning.at(w.words)
	case cutRoom:
		return w.cutting.at(w.words)
	case tellRoom:
		return w.telling.at(w.words)
	}
	p := w.bench.Look.Progress()
	return runState{w.bench.Look.Status(), p.Share, p.Active, p.Stopped}
}

func (w *window) refreshProgress() {
	p := w.running()
	w.state.setText(p.words)
	w.progress.show(p.share)
	setVisible(w.progress, p.active || p.stopped)
	text := w.words.Say("Stop")
	if p.stopped {
		text = w.words.Say("Go on")
	}
	if w.stop.Text != text {
		w.stop.SetText(text)
	}
	enable(&w.stop.Button, p.active || p.stopped)
}

// stopOrResume ends what runs in the open room, or goes on with it.
func (w *window) stopOrResume() {
	stopped := w.running().stopped
	switch {
	case w.room == cutRoom && stopped:
		w.cutting.cut.Again()
	case w.room == cutRoom:
		w.cutting.cut.Stop()
	case w.room == tellRoom && stopped:
		w.telling.tell.Again()
	case w.room == tellRoom:
		w.telling.tell.Stop()
	case w.room == tuneRoom:
		w.tuning.tune.Stop()
	case stopped:
		w.bench.Look.Resume()
	default:
		w.bench.Look.Stop()
	}
}

// strayKey takes keys that no widget wants.
func (w *window) strayKey(e *fyne.KeyEvent) {
	if e.Name != fyne.KeyEscape {
		return
	}
	switch {
	case w.escape():
	case w.grid.large != nil:
		w.grid.enlarge(nil)
	case w.bench.Look.Ray != nil:
		w.bench.Look.Unfollow()
	case w.running().active:
		w.stopOrResume()
	}
}
