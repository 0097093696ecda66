package ui

import (
	"image"
	"image/color"
	"strconv"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/theme"

	"pavilight/app/model"
	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// columns is how many surroundings stand side by side.
const columns = 3

// grid is the heart of the Look room: a column a surrounding, two rows of maps, and
// the ledger under each column.
type grid struct {
	bench *model.Bench
	words *words.Words

	box      *fyne.Container
	media    [columns]*chooser
	indices  [columns]*line
	critical [columns]*line
	shining  [columns]*line // the light of true colour, where a row shows that
	row      [model.Rows]*chooser
	meaning  [model.Rows]*wrapped
	maps     [model.Rows][columns]*mapView
	scales   [model.Rows]*scaleBar
	bars     [columns]*shareBar
	ledger   ledger
	strip    *tiltStrip   // below the ledger, where there is room
	rocking  *line        // its name
	reach    *numberField // how far it rocks to either side
	rocked   *wrapped     // what it shows

	large    *[2]int // row and column of the map that fills the pane; nil for all six
	pixels   int     // of a map's edge on the screen, as last asked for
	onPixels func(int)
	onTilt   func(facets.Angle)
	onRow    func()                            // a row shows something else
	lights   func(column int) []*fyne.MenuItem // of true colour
	onReach  func()                            // the strip rocks as far as it was told
}

// newGrid builds the grid; stray takes the keys that it has no use for.
func newGrid(bench *model.Bench, stray func(*fyne.KeyEvent)) *grid {
	g := &grid{bench: bench, words: bench.Words()}
	g.box = container.NewWithoutLayout() // until all is in it
	for j := range columns {
		g.media[j] = newChooser(theme.SizeNameSubHeadingText, func() []*fyne.MenuItem { return g.mediaItems(j) })
		g.indices[j] = newLine(colourDim, theme.SizeNameText)
		g.critical[j] = newLine(colourDim, theme.SizeNameText)
		g.shining[j] = newLine(colourDim, theme.SizeNameCaptionText)
		g.add(g.media[j], g.indices[j], g.critical[j], g.shining[j])
	}
	for i := range model.Rows {
		g.row[i] = newChooser(theme.SizeNameText, func() []*fyne.MenuItem { return g.quantityItems(i) })
		g.meaning[i] = newWrapped(colourDim, theme.SizeNameCaptionText)
		g.scales[i] = newScaleBar(bench.Words())
		g.add(g.row[i], g.meaning[i])
		for j := range columns {
			g.maps[i][j] = newMapView(bench.Look.Point, bench.Look.PointAway,
				func(x, y float64) { bench.Look.Follow(j, x, y) })
			g.maps[i][j].stray = stray
			g.maps[i][j].enlarge = func() { g.toggle(i, j) }
			g.add(g.maps[i][j])
		}
		g.add(g.scales[i])
	}
	for j := range columns {
		g.bars[j] = newShareBar()
		g.add(g.bars[j])
	}
	g.ledger.addTo(g.box)
	g.strip = newTiltStrip(bench.Look, func(stop int) { g.onTilt(bench.Look.Strip.Tilts[stop]) })
	g.strip.stray = stray
	g.rocking = newLine(theme.ColorNameForeground, theme.SizeNameText).bold()
	g.rocking.setText(g.words.Say("Rocked ±"))
	g.reach = newNumberField(readDegrees, func(v float64) string { return g.words.Decimal(strconv.FormatFloat(v, 'f', -1, 64)) }, 1)
	g.reach.commit = func(v float64) error {
		err := bench.Look.SetStripRange(facets.Angle(v) * facets.Degree)
		if err == nil && g.onReach != nil {
			g.onReach()
		}
		return err
	}
	g.reach.show(bench.Look.StripRange().Degrees())
	g.rocked = newWrapped(colourDim, theme.SizeNameCaptionText)
	g.add(g.strip, g.rocking, g.reach, g.rocked)
	g.box.Layout = g
	g.refreshAll()
	return g
}

// toggle lets one map fill the pane, or brings all six back.
func (g *grid) toggle(row, column int) {
	if g.large != nil {
		g.enlarge(nil)
	} else {
		g.enlarge(&[2]int{row, column})
	}
}

func (g *grid) enlarge(which *[2]int) {
	g.large = which
	all := which == nil
	for j := range columns {
		mine := all || which[1] == j
		for _, o := range []fyne.CanvasObject{g.media[j], g.indices[j], g.critical[j], g.shining[j]} {
			setVisible(o, mine)
		}
		setVisible(g.bars[j], all)
	}
	for i := range model.Rows {
		mine := all || which[0] == i
		for _, o := range []fyne.CanvasObject{g.row[i], g.meaning[i], g.scales[i]} {
			setVisible(o, mine)
		}
		for j := range columns {
			setVisible(g.maps[i][j], all || which[0] == i && which[1] == j)
		}
	}
	g.ledger.setVisible(all)
	g.box.Refresh()
}

// layoutLarge gives the one map all of the pane.
func (g *grid) layoutLarge(size fyne.Size) {
	i, j := g.large[0], g.large[1]
	head := g.headHeight()
	edge := max(60, min(size.Width-gutter-scaleWide-16, size.Height-head-beneath))
	left := max(0, (size.Width-gutter-scaleWide-16-edge)/2)
	x := left + gutter
	name := g.media[j].MinSize()
	place(g.media[j], x-3, 0, name.Width, name.Height)
	place(g.indices[j], x+name.Width+4, 2, max(0, edge-name.Width-4), name.Height)
	under := g.critical[j].MinSize().Height
	place(g.critical[j], x, name.Height, edge, under)
	place(g.shining[j], x, name.Height+under, edge, g.shining[j].MinSize().Height)
	row := g.row[i].MinSize()
	place(g.row[i], left-3, head, min(row.Width, gutter), row.Height)
	place(g.meaning[i], left, head+row.Height+2, gutter-12, edge-row.Height-2)
	place(g.maps[i][j], x, head, edge, edge)
	place(g.scales[i], x+edge+10, head, scaleWide, edge)
	for _, o := range []fyne.CanvasObject{g.strip, g.rocking, g.reach, g.rocked} {
		setVisible(o, false)
	}
	g.tellPixels(edge)
}

func (g *grid) add(objects ...fyne.CanvasObject) {
	for _, o := range objects {
		g.box.Add(o)
	}
}

// mediaItems lists the surroundings that a column can take.
func (g *grid) mediaItems(column int) []*fyne.MenuItem {
	now := g.bench.Look.Around[column]
	var items []*fyne.MenuItem
	for _, m := range g.bench.Stock.Materials() {
		if m.Group != gems.Gas && m.Group != gems.Liquid {
			continue
		}
		item := fyne.NewMenuItem(stock.NameOf(g.words, m), func() {
			g.bench.SetAround(column, model.Around{Medium: m, Dish: now.Dish && m.Group == gems.Liquid})
		})
		item.Checked = m.Key == now.Medium.Key
		items = append(items, item)
	}
	dish := fyne.NewMenuItem(g.words.Say("In a dish, seen from air"), func() {
		g.bench.SetAround(column, model.Around{Medium: now.Medium, Dish: !now.Dish})
	})
	dish.Checked, dish.Disabled = now.Dish, now.Medium.Group != gems.Liquid
	items = append(items, fyne.NewMenuItemSeparator(), dish)
	if g.lights != nil {
		light := fyne.NewMenuItem(g.words.Say("Light of true colour"), nil)
		light.ChildMenu = fyne.NewMenu("", g.lights(column)...)
		items = append(items, light)
	}
	return items
}

// quantityItems lists what a row can show.
func (g *grid) quantityItems(row int) []*fyne.MenuItem {
	var items []*fyne.MenuItem
	for _, s := range model.Choices() {
		item := fyne.NewMenuItem(g.words.Say(model.ShownName(s)), func() { g.setRow(row, s) })
		item.Checked = s == g.bench.Look.Row[row]
		items = append(items, item)
	}
	return items
}

func (g *grid) setRow(row int, s model.Shown) {
	g.bench.Look.SetRow(row, s)
	g.refreshHeadings()
	g.onRow()
	g.strip.show()
}

func (g *grid) refreshAll() {
	g.refreshHeadings()
	g.refreshMaps()
	g.refreshLedger()
}

func (g *grid) refreshHeadings() {
	lights := g.bench.Look.Lights()
	for j := range columns {
		h := g.bench.Look.Heading(j)
		g.media[j].setText(h.Medium)
		g.indices[j].setText(h.Index)
		g.critical[j].setText(h.Critical)
		light := ""
		if g.bench.Look.ShowsColour() {
			light = g.words.Say(model.LightName(lights[j]))
		}
		g.shining[j].setText(light)
	}
	for i := range model.Rows {
		s := g.bench.Look.Row[i]
		g.row[i].setText(g.words.Say(model.ShownName(s)))
		g.meaning[i].setText(g.words.Say(model.ShownMeaning(s)))
		g.scales[i].show(g.bench.Look.Scale(i))
	}
	g.rocked.setText(g.bench.Look.StripMeaning())
	g.box.Refresh()
}

// refreshMaps puts the newest pictures on the screen.
func (g *grid) refreshMaps() {
	f := g.bench.Look.Frame
	for i := range model.Rows {
		for j := range columns {
			view := g.maps[i][j]
			var img image.Image
			if f != nil && j < len(f.Pictures[i]) {
				img = f.Pictures[i][j]
			}
			faded := 0.0
			if g.bench.Look.Late(i) {
				faded = lateFaded
			}
			if view.picture.Image != img || view.picture.Translucency != faded {
				view.picture.Image, view.picture.Translucency = img, faded
				view.picture.Refresh()
			}
		}
		g.scales[i].show(g.bench.Look.Scale(i))
	}
	g.refreshPointer()
}

// refreshRay marks where the followed ray enters, in the maps of its column.
func (g *grid) refreshRay() {
	r := g.bench.Look.Ray
	for i := range model.Rows {
		for j := range columns {
			if pinned := r != nil && r.Column == j; pinned {
				g.maps[i][j].showPin(true, r.X, r.Y)
			} else {
				g.maps[i][j].showPin(false, 0, 0)
			}
		}
	}
}

// refreshPointer moves the cross-hair in all maps and tells the numbers under it.
func (g *grid) refreshPointer() {
	p := g.bench.Look.Pointer
	for i := range model.Rows {
		var marks []float64
		for j := range columns {
			text := ""
			if v, ok := g.bench.Look.UnderPointer(i, j); ok {
				text = g.bench.Look.ValueText(i, v)
				marks = append(marks, v/g.bench.Look.Scale(i).Most)
			}
			g.maps[i][j].show(p.Over, p.X, p.Y, text)
		}
		g.scales[i].mark(marks)
	}
}

func (g *grid) refreshLedger() {
	rows := g.bench.Look.Ledger()
	if g.ledger.show(rows) {
		g.box.Refresh()
	}
	for j := range columns {
		var parts []sharePart
		for _, row := range rows {
			if !row.Area && j < len(row.Cells) {
				parts = append(parts, sharePart{row.Cells[j].Share, entryColour(row.Entry)})
			}
		}
		g.bars[j].show(parts)
	}
}

// entryColour is the colour of an entry in the stacked bar and beside its name.
// Lightness alone tells neighbours apart.
func entryColour(q trace.Quantity) color.NRGBA {
	switch q {
	case trace.Returned:
		return rgb(0xe9, 0xd3, 0x4c)
	case trace.Leaked:
		return rgb(0x2f, 0x6f, 0x9f)
	case trace.Head:
		return rgb(0xa8, 0xa8, 0xa8)
	case trace.Surface:
		return rgb(0x5c, 0x5c, 0x5c)
	case trace.Absorbed:
		return rgb(0xb5, 0x6b, 0x53)
	}
	return rgb(0xff, 0xff, 0xff)
}

// Measures of the grid.
const (
	gutter    = 122 // left of the maps, for names
	scaleWide = 40  // right of the maps, for the scale
	between   = 10  // columns
	beneath   = 8   // a row of maps
	mostEdge  = 420 // of a map

	lateFaded = 0.7 // how far maps fade that are not of the present stone

	leastWithStrip = 168 // edge of a map, below which the strip gives way
)

// MinSize is what the grid can be squeezed to.
func (g *grid) MinSize([]fyne.CanvasObject) fyne.Size {
	return fyne.NewSize(gutter+scaleWide+columns*(110+between), g.headHeight()+2*(110+beneath)+g.ledger.height()+g.barHeight())
}

func (g *grid) headHeight() float32 {
	high := g.media[0].MinSize().Height + g.critical[0].MinSize().Height + 8
	if g.bench.Look.ShowsColour() {
		high += g.shining[0].MinSize().Height
	}
	return high
}
func (g *grid) barHeight() float32 { return 16 }

// Layout gives the maps the largest squares that width and height allow.
func (g *grid) Layout(_ []fyne.CanvasObject, size fyne.Size) {
	if g.large != nil {
		g.layoutLarge(size)
		return
	}
	head, foot := g.headHeight(), g.ledger.height()+g.barHeight()
	wide := (size.Width-gutter-scaleWide)/columns - between
	high := func(taken float32) float32 { return (size.Height-head-foot-taken)/model.Rows - beneath }
	strip := g.strip.MinSize().Height + beneath
	if high(strip) < min(leastWithStrip, wide) { // the strip is not worth smaller maps than that
		strip = 0
	}
	setVisible(g.strip, strip > 0)
	setVisible(g.rocking, strip > 0)
	setVisible(g.rocked, strip > 0)
	setVisible(g.reach, strip > 0)
	edge := max(60, min(wide, high(strip), mostEdge))

	// What the maps leave free goes left and right of them, and between the columns.
	pitch := edge + between
	if spare := size.Width - gutter - scaleWide - columns*pitch; spare > 0 {
		pitch += min(36, spare/(columns+1))
	}
	left := max(0, (size.Width-gutter-scaleWide-columns*pitch)/2)
	x := func(j int) float32 { return left + gutter + float32(j)*pitch }

	for j := range columns {
		name := g.media[j].MinSize()
		name.Width = min(name.Width, edge)
		place(g.media[j], x(j)-3, 0, name.Width, name.Height)
		place(g.indices[j], x(j)+name.Width+4, 2, max(0, edge-name.Width-4), name.Height)
		under := g.critical[j].MinSize().Height
		place(g.critical[j], x(j), name.Height, edge, under)
		place(g.shining[j], x(j), name.Height+under, edge, g.shining[j].MinSize().Height)
	}
	y := head
	for i := range model.Rows {
		name := g.row[i].MinSize()
		place(g.row[i], left-3, y, min(name.Width, gutter), name.Height)
		place(g.meaning[i], left, y+name.Height+2, gutter-12, max(0, edge-name.Height-2))
		for j := range columns {
			place(g.maps[i][j], x(j), y, edge, edge)
		}
		place(g.scales[i], x(columns-1)+edge+10, y, scaleWide, edge)
		y += edge + beneath
	}
	for j := range columns {
		place(g.bars[j], x(j), y+2, edge, g.barHeight()-6)
	}
	g.ledger.layout(left, y+g.barHeight(), gutter, func(j int) float32 { return x(j) }, edge)
	if strip > 0 {
		top := y + foot + beneath
		name := fyne.MeasureText(g.rocking.text, theme.TextSize(), g.rocking.style).Width + 4
		field := fyne.MeasureText("00.00", theme.TextSize(), fyne.TextStyle{}).Width + 2*theme.InnerPadding()
		high := g.reach.MinSize().Height
		place(g.rocking, left, top+(high-lineHeight())/2-3, name, lineHeight())
		place(g.reach, left+name, top-3, min(field, gutter-name-4), high)
		place(g.rocked, left, top+high-3, gutter-10, strip-beneath-high+3)
		place(g.strip, x(0), top, float32(columns)*pitch-between+curveNames, strip-beneath)
	}
	g.tellPixels(edge)
}

func place(o fyne.CanvasObject, x, y, width, height float32) {
	o.Move(fyne.NewPos(x, y))
	o.Resize(fyne.NewSize(width, height))
}

// tellPixels asks for maps of the screen's own resolution.
func (g *grid) tellPixels(edge float32) {
	scale := float32(1)
	if c := fyne.CurrentApp().Driver().CanvasForObject(g.box); c != nil {
		scale = c.Scale()
	}
	if px := int(edge*scale + 0.5); px != g.pixels && px > 0 {
		g.pixels = px
		if g.onPixels != nil {
			g.onPixels(px)
		}
	}
}

var _ fyne.Layout = (*grid)(nil)
