package ui

import (
	"image/color"
	"math"
	"slices"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/container"
	"fyne.io/fyne/v2/layout"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
	"pavilight/facets"
)

// tierList is the plan as a list: its tiers by side, from the table down, each with
// a number field and a slider for its angle.
type tierList struct {
	tips  *tipLayer
	bench *model.Bench
	say   func(error)             // tells why an entry was refused; nil when all is well
	items func() []*fyne.MenuItem // about the tier that is picked
	stray func(*fyne.KeyEvent)    // takes keys that no row has a use for

	box    *fyne.Container
	scroll *container.Scroll
	shape  []string // what the rows were built for: see shapeOf
	rows   []*tierRow
}

func newTierList(bench *model.Bench, tips *tipLayer, say func(error), stray func(*fyne.KeyEvent)) *tierList {
	l := &tierList{bench: bench, tips: tips, say: say, stray: stray, box: container.New(layout.NewCustomPaddedVBoxLayout(2))}
	l.scroll = tips.scroll(container.New(layout.NewCustomPaddedLayout(0, 8, 0, 12), l.box))
	l.refresh()
	return l
}

// sideOrder is the order of the list: as one looks at a stone, from above.
func sideOrder() []facets.Side {
	return []facets.Side{facets.Table, facets.Crown, facets.Girdle, facets.Pavilion}
}

// shapeOf tells what makes the list be built anew: names, sides and what can be set.
func shapeOf(rows []model.TierRow) []string {
	shape := make([]string, len(rows))
	for i, r := range rows {
		shape[i] = r.Name + "\x00" + r.Side.String()
		if r.Slides {
			shape[i] += "\x00slides"
		}
	}
	return shape
}

func (l *tierList) refresh() {
	rows := l.bench.Tiers()
	if shape := shapeOf(rows); !slices.Equal(shape, l.shape) {
		l.shape = shape
		l.build(rows)
	}
	for _, r := range l.rows {
		r.show(rows[r.number], l.bench.Selected == rows[r.number].Name)
	}
}

func (l *tierList) build(rows []model.TierRow) {
	l.box.RemoveAll()
	l.rows = nil
	for _, side := range sideOrder() {
		heading := false
		for _, row := range rows {
			if row.Side != side {
				continue
			}
			if !heading {
				heading = true
				l.box.Add(container.New(layout.NewCustomPaddedLayout(8, 1, 8, 0),
					newWord(colourDim, theme.SizeNameCaptionText, l.bench.Words().Say(model.SideName(side))).bold()))
			}
			r := newTierRow(l, row)
			l.rows = append(l.rows, r)
			l.box.Add(r)
		}
	}
	l.box.Refresh()
}

// reveal scrolls the tier into sight.
func (l *tierList) reveal(tier string) {
	for i, r := range l.rows {
		if r.row.Name != tier || i >= len(l.rows) {
			continue
		}
		top, bottom := r.Position().Y, r.Position().Y+r.Size().Height
		switch view := l.scroll.Offset.Y; {
		case top < view:
			l.scroll.ScrollToOffset(fyne.NewPos(0, top))
		case bottom > view+l.scroll.Size().Height:
			l.scroll.ScrollToOffset(fyne.NewPos(0, bottom-l.scroll.Size().Height+8))
		}
		return
	}
}

// tierRow is one tier of the list.
type tierRow struct {
	widget.BaseWidget

	list     *tierList
	number   int
	row      model.TierRow
	selected bool

	name, detail *line
	field        *numberField
	slider       *tickSlider
	fixed        *line // the angle where it cannot be set
}

func newTierRow(l *tierList, row model.TierRow) *tierRow {
	r := &tierRow{
		list:   l,
		number: row.Number,
		name:   newLine(theme.ColorNameForeground, theme.SizeNameText).bold(),
		detail: newLine(colourDim, theme.SizeNameCaptionText),
		fixed:  newLine(colourDim, theme.SizeNameText),
	}
	pick := func() { l.bench.Select(r.row.Name) }
	if row.Slides {
		r.field = newNumberField(readDegrees, l.writeDegrees, 0.1)
		r.field.commit = func(v float64) error {
			return l.bench.SetAngle(r.number, facets.Angle(v)*facets.Degree, false)
		}
		r.field.tip = tip{l.tips, tipAngle}
		r.field.trouble, r.field.gained = l.say, pick
	}
	if row.Slides {
		r.slider = newTickSlider(0.05)
		r.slider.tip = tip{l.tips, tipSlider}
		r.slider.preview = func(v float64) {
			l.say(l.bench.SetAngle(r.number, facets.Angle(v)*facets.Degree, true))
		}
		r.slider.settled = func() { l.bench.Doc.Settle() } // of whatever document is open then
		r.slider.gained, r.slider.stray = pick, l.stray
	}
	r.ExtendBaseWidget(r)
	return r
}

func readDegrees(text string) (float64, error) {
	a, err := model.ParseAngle(text)
	return a.Degrees(), err
}

func (w *window) writeDegrees(v float64) string { return w.list.writeDegrees(v) }

func (l *tierList) writeDegrees(v float64) string {
	return l.bench.Words().Decimal(model.FormatAngle(facets.Angle(v) * facets.Degree))
}

func (r *tierRow) show(row model.TierRow, selected bool) {
	mark := selected != r.selected
	r.row, r.selected = row, selected
	r.name.setText(row.Name)
	r.detail.setText(row.Detail)
	if r.field != nil {
		r.field.show(row.Angle.Degrees())
	}
	if r.slider != nil {
		ticks := make([]tick, 0, len(row.Ticks))
		for _, t := range row.Ticks {
			ticks = append(ticks, tick{t.Letter, t.Angle.Degrees()})
		}
		r.slider.show(row.Low.Degrees(), row.High.Degrees(), row.Angle.Degrees(), ticks)
	}
	if !row.Slides {
		r.fixed.setText(r.list.fixedAngle(row))
	}
	if mark {
		r.Refresh()
	}
}

// fixedAngle writes an angle that cannot be set.
func (l *tierList) fixedAngle(row model.TierRow) string {
	deg := row.Angle.Degrees()
	switch {
	case math.IsNaN(deg):
		return l.bench.Words().Say("angle not found")
	case row.Own:
		return l.writeDegrees(deg) + "°"
	}
	return l.bench.Words().Say("%s°, found", l.writeDegrees(math.Round(deg*100)/100))
}

// Tapped selects the tier.
func (r *tierRow) Tapped(*fyne.PointEvent) { r.list.bench.Select(r.row.Name) }

// TappedSecondary picks the tier and offers what can be done with it.
func (r *tierRow) TappedSecondary(e *fyne.PointEvent) {
	r.list.bench.Select(r.row.Name)
	if c := fyne.CurrentApp().Driver().CanvasForObject(r); c != nil && r.list.items != nil {
		widget.ShowPopUpMenuAtPosition(fyne.NewMenu("", r.list.items()...), c, e.AbsolutePosition)
	}
}

// CreateRenderer lays name and remark above field and slider.
func (r *tierRow) CreateRenderer() fyne.WidgetRenderer {
	d := &tierRowRenderer{r: r, ground: canvas.NewRectangle(color.Transparent), bar: canvas.NewRectangle(color.Transparent)}
	d.ground.CornerRadius = 4
	d.objects = []fyne.CanvasObject{d.ground, d.bar, r.name, r.detail}
	if r.field != nil {
		d.objects = append(d.objects, r.field)
	} else {
		d.objects = append(d.objects, r.fixed)
	}
	if r.slider != nil {
		d.objects = append(d.objects, r.slider)
	}
	d.Refresh()
	return d
}

type tierRowRenderer struct {
	r           *tierRow
	ground, bar *canvas.Rectangle
	objects     []fyne.CanvasObject
}

func (d *tierRowRenderer) Destroy()                     {}
func (d *tierRowRenderer) Objects() []fyne.CanvasObject { return d.objects }

const (
	rowInset   = 8
	fieldWide  = 72
	rowPadding = 3
)

func (d *tierRowRenderer) MinSize() fyne.Size {
	size := fyne.NewSize(fieldWide+100, 2*rowPadding+lineHeight())
	if d.r.field != nil {
		size.Height += d.r.field.MinSize().Height + 1
	}
	return size
}

func (d *tierRowRenderer) Layout(size fyne.Size) {
	r := d.r
	place(d.ground, 0, 0, size.Width, size.Height)
	place(d.bar, 0, 4, 3, max(0, size.Height-8))
	wide := size.Width - 2*rowInset
	measure := func(text string, style fyne.TextStyle) float32 {
		return fyne.MeasureText(text, theme.TextSize(), style).Width + 1
	}
	x := float32(rowInset)
	name := min(wide/2, measure(r.row.Name, fyne.TextStyle{Bold: true}))
	place(r.name, x, rowPadding, name, lineHeight())
	x += name + 8
	if r.field == nil { // what cannot be set takes one line
		angle := measure(r.fixed.text, fyne.TextStyle{})
		place(r.fixed, x, rowPadding, angle, lineHeight())
		x += angle + 8
	}
	place(r.detail, x, rowPadding+1, max(0, rowInset+wide-x), lineHeight())
	if r.field == nil {
		return
	}
	y, high := rowPadding+lineHeight()+1, r.field.MinSize().Height
	place(r.field, rowInset, y, fieldWide, high)
	place(r.slider, rowInset+fieldWide+8, y+(high-sliderHeight)/2-3, max(0, wide-fieldWide-8), sliderHeight)
}

func (d *tierRowRenderer) Refresh() {
	d.ground.FillColor, d.bar.FillColor = color.Transparent, color.Transparent
	if d.r.selected {
		d.ground.FillColor, d.bar.FillColor = themed(theme.ColorNameSelection), themed(theme.ColorNamePrimary)
	}
	d.Layout(d.r.Size())
	d.ground.Refresh()
	canvas.Refresh(d.r)
}
