package ui

import (
	"image/color"

	"fyne.io/fyne/v2"
	"fyne.io/fyne/v2/canvas"
	"fyne.io/fyne/v2/driver/desktop"
	"fyne.io/fyne/v2/theme"
	"fyne.io/fyne/v2/widget"

	"pavilight/app/words"
)

// fromBins is how many bins of five degrees there are from the eye to the horizon.
const fromBins = 18

// fromPlot shows where the returned light comes from: its share by angle from the
// eye, a line a surrounding, with the viewer's head shaded.
type fromPlot struct {
	widget.BaseWidget
	tip    tip
	words  *words.Words
	curves [columns][fromBins]float64
	names  [columns]string
	head   float64 // degrees
	known  bool
}

func newFromPlot(in *words.Words) *fromPlot {
	p := &fromPlot{words: in}
	p.ExtendBaseWidget(p)
	return p
}

func (p *fromPlot) show(curves [columns][fromBins]float64, names [columns]string, head float64, known bool) {
	p.curves, p.names, p.head, p.known = curves, names, head, known
	p.Refresh()
}

// top returns the share at which the plot ends: the next of a few round ones.
func (p *fromPlot) top() (share float64, word string) {
	most := 0.0
	for _, c := range p.curves {
		for _, v := range c {
			most = max(most, v)
		}
	}
	for _, s := range []float64{0.05, 0.1, 0.2, 0.5} {
		if most <= s {
			return s, p.words.Say("%g", s)
		}
	}
	return 1, "1"
}

// MouseIn waits for the tip.
func (p *fromPlot) MouseIn(*desktop.MouseEvent) { p.tip.enter(p) }

// MouseMoved is not used.
func (p *fromPlot) MouseMoved(*desktop.MouseEvent) {}

// MouseOut takes the tip away.
func (p *fromPlot) MouseOut() { p.tip.leave() }

// CreateRenderer builds the frame, the curves and their names.
func (p *fromPlot) CreateRenderer() fyne.WidgetRenderer {
	r := &fromPlotRenderer{p: p}
	for i := range r.rules {
		r.rules[i] = canvas.NewRectangle(color.Transparent)
		r.objects = append(r.objects, r.rules[i])
	}
	for j := range columns {
		for i := range r.lines[j] {
			r.lines[j][i] = canvas.NewLine(color.Transparent)
			r.objects = append(r.objects, r.lines[j][i])
		}
		r.names[j] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.names[j])
	}
	for i := range r.words {
		r.words[i] = canvas.NewText("", color.Transparent)
		r.objects = append(r.objects, r.words[i])
	}
	r.Refresh()
	return r
}

type fromPlotRenderer struct {
	p       *fromPlot
	rules   [3]*canvas.Rectangle // the head, the ground line, the upright
	lines   [columns][fromBins - 1]*canvas.Line
	names   [columns]*canvas.Text
	words   [5]*canvas.Text // top of the scale, 0, 45 and 90 degrees, the head
	objects []fyne.CanvasObject
}

func (r *fromPlotRenderer) Destroy()                     {}
func (r *fromPlotRenderer) Objects() []fyne.CanvasObject { return r.objects }
func (r *fromPlotRenderer) MinSize() fyne.Size           { return fyne.NewSize(160, 114) }

func (r *fromPlotRenderer) Layout(size fyne.Size) {
	const left, right, below, above = 30, 10, 18, 14
	p := r.p
	wide, high := max(1, size.Width-left-right), max(1, size.Height-below-above)
	top, _ := p.top()
	x := func(deg float64) float32 { return left + wide*float32(deg/90) }
	y := func(share float64) float32 { return above + high*float32(1-share/top) }
	place(r.rules[0], x(0), above, wide*float32(min(90, p.head)/90), high)
	place(r.rules[1], left, above+high, wide, 1)
	place(r.rules[2], left, above, 1, high)
	curves := make([][]fyne.Position, columns)
	for j := range columns {
		for i, share := range p.curves[j] {
			curves[j] = append(curves[j], fyne.NewPos(x(float64(5*i)+2.5), y(share)))
		}
		for i, l := range r.lines[j] {
			l.Position1, l.Position2 = curves[j][i], curves[j][i+1]
			l.Hidden = !p.known
		}
	}
	taken := []area{{x(0), above - 13, 30, 12}} // the word over the head
	for j := range columns {
		text := r.names[j].MinSize()
		at := spotAt(j, text, curves, taken, area{left + 2, 0, wide - 2, above + high})
		taken = append(taken, area{at.X, at.Y, text.Width, text.Height})
		place(r.names[j], at.X, at.Y, text.Width, text.Height)
		r.names[j].Hidden = !p.known
	}
	for i, at := range []fyne.Position{
		{X: 0, Y: above - 8}, {X: x(0) - 4, Y: above + high + 2}, {X: x(45) - 8, Y: above + high + 2},
		{X: x(90) - 10, Y: above + high + 2}, {X: x(0) + 2, Y: above - 13},
	} {
		text := r.words[i].MinSize()
		place(r.words[i], at.X, at.Y, text.Width, text.Height)
	}
	r.words[4].Hidden = p.head < 9
}

func (r *fromPlotRenderer) Refresh() {
	_, top := r.p.top()
	for i, s := range []string{top, "0°", "45°", "90°", r.p.words.Say("head")} {
		r.words[i].Text, r.words[i].TextSize, r.words[i].Color = s, theme.CaptionTextSize(), themed(colourDim)
	}
	r.words[4].TextSize = theme.CaptionTextSize() - 2
	r.rules[0].FillColor = themed(colourLine)
	r.rules[1].FillColor, r.rules[2].FillColor = themed(colourDim), themed(colourDim)
	for j := range columns {
		for _, l := range r.lines[j] {
			l.StrokeColor, l.StrokeWidth = themed(theme.ColorNameForeground), []float32{2.2, 1.5, 0.9}[j]
		}
		r.names[j].Text, r.names[j].TextSize, r.names[j].Color = r.p.names[j], theme.CaptionTextSize(), themed(colourDim)
	}
	r.Layout(r.p.Size())
	canvas.Refresh(r.p)
}
