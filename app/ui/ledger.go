package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/model"
)

// ledger is the table of numbers under the maps: a name at the left, a number with
// its standard error under each column.
type ledger struct {
	box   *fyne.Container
	lines []*ledgerLine
	shown int
	away  bool      // none is to be seen
	tips  *tipLayer // nil before the window has one
}

type ledgerLine struct {
	swatch *canvas.Rectangle
	name   *line
	tip    *tipArea // over the name: what it means
	value  [columns]*line
	error  [columns]*line
}

func (l *ledger) addTo(box *fyne.Container) { l.box = box }

// show writes the numbers, and reports whether the number of lines changed.
func (l *ledger) show(rows []model.LedgerRow) (changed bool) {
	for len(l.lines) < len(rows) {
		l.lines = append(l.lines, l.newLine())
	}
	for k, row := range rows {
		t := l.lines[k]
		t.name.setText(row.Name)
		t.tip.tip = tip{l.tips, row.Meaning}
		t.swatch.FillColor = entryColour(row.Entry)
		if row.Area {
			t.swatch.FillColor = color.Transparent
		}
		t.swatch.Refresh()
		t.embolden(row.Main)
		for j := range columns {
			if j >= len(row.Cells) {
				continue
			}
			t.value[j].setText(row.Cells[j].Value)
			t.error[j].setText(row.Cells[j].Error)
		}
	}
	for k, t := range l.lines {
		for _, o := range t.objects() {
			setVisible(o, k < len(rows) && !l.away)
		}
	}
	changed = l.shown != len(rows)
	l.shown = len(rows)
	return changed
}

// setVisible shows the whole table or hides it.
func (l *ledger) setVisible(visible bool) {
	l.away = !visible
	for k, t := range l.lines {
		for _, o := range t.objects() {
			setVisible(o, visible && k < l.shown)
		}
	}
}

func (l *ledger) newLine() *ledgerLine {
	t := &ledgerLine{swatch: canvas.NewRectangle(color.Transparent), name: newLine(theme.ColorNameForeground, theme.SizeNameText), tip: newTipArea(tip{})}
	t.swatch.CornerRadius = 2
	for j := range columns {
		t.value[j] = newLine(theme.ColorNameForeground, theme.SizeNameText)
		t.error[j] = newLine(colourDim, theme.SizeNameCaptionText)
	}
	for _, o := range t.objects() {
		l.box.Add(o)
	}
	return t
}

// embolden sets what one looks for first apart.
func (t *ledgerLine) embolden(main bool) {
	for _, l := range append(t.value[:], t.name) {
		if l.style.Bold != main {
			l.style.Bold = main
			l.Refresh()
		}
	}
}

func (t *ledgerLine) objects() []fyne.CanvasObject {
	all := []fyne.CanvasObject{t.swatch, t.name, t.tip}
	for j := range columns {
		all = append(all, t.value[j], t.error[j])
	}
	return all
}

// lineHeight is that of one line of the table.
func lineHeight() float32 { return fyne.MeasureText("M", theme.TextSize(), fyne.TextStyle{}).Height }

// height is what the table needs; before the first numbers it keeps the room that
// they will take, so that the maps do not jump.
func (l *ledger) height() float32 {
	const usual = 6
	return lineHeight() * float32(max(usual, l.shown))
}

func (l *ledger) layout(left, top, gutter float32, x func(int) float32, edge float32) {
	high := lineHeight()
	for k, t := range l.lines[:min(l.shown, len(l.lines))] {
		y := top + float32(k)*high
		const swatch = 9
		place(t.swatch, left, y+(high-swatch)/2, swatch, swatch)
		place(t.name, left+swatch+6, y, gutter-swatch-8, high)
		place(t.tip, left, y, gutter-2, high)
		for j := range columns {
			wide := fyne.MeasureText("0.0000", theme.TextSize(), fyne.TextStyle{Bold: true}).Width
			place(t.value[j], x(j), y, wide+2, high)
			place(t.error[j], x(j)+wide+8, y, max(0, edge-wide-8), high)
		}
	}
}

// sharePart is one part of a stacked bar.
type sharePart struct {
	share  float64
	colour color.NRGBA
}

// mostParts is how many parts a bar has: the six entries of the ledger.
const mostParts = 6

// shareBar shows shares of one unit side by side.
type shareBar struct {
	widget.BaseWidget
	parts []sharePart
}

func newShareBar() *shareBar {
	b := &shareBar{}
	b.ExtendBaseWidget(b)
	return b
}

func (b *shareBar) show(parts []sharePart) {
	b.parts = parts
	b.Refresh()
}

// CreateRenderer builds the parts.
func (b *shareBar) CreateRenderer() fyne.WidgetRenderer {
	r := &shareBarRenderer{b: b, ground: canvas.NewRectangle(color.Transparent)}
	r.objects = []fyne.CanvasObject{r.ground}
	for i := range r.parts {
		r.parts[i] = canvas.NewRectangle(color.Transparent)
		r.objects = append(r.objects, r.parts[i])
	}
	r.Refresh()
	return r
}

type shareBarRenderer struct {
	b       *shareBar
	ground  *canvas.Rectangle
	parts   [mostParts]*canvas.Rectangle
	objects []fyne.CanvasObject
}

func (r *shareBarRenderer) Destroy()                     {}
func (r *shareBarRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *shareBarRenderer) MinSize() fyne.Size           { return fyne.NewSize(60, 8) }

func (r *shareBarRenderer) Layout(size fyne.Size) {
	r.ground.Resize(size)
	at := 0.0
	for i, p := range r.parts {
		share := 0.0
		if i < len(r.b.parts) {
			share = r.b.parts[i].share
		}
		const gap = 1
		width := float32(share)*size.Width - gap
		p.Hidden = width <= 0
		p.Move(fyne.NewPos(float32(at)*size.Width, 0))
		p.Resize(fyne.NewSize(max(0, width), size.Height))
		at += share
	}
}

func (r *shareBarRenderer) Refresh() {
	r.ground.FillColor = themed(colourLine)
	for i, p := range r.parts {
		if i < len(r.b.parts) {
			p.FillColor = r.b.parts[i].colour
		}
	}
	r.Layout(r.b.Size())
	canvas.Refresh(r.b)
}
