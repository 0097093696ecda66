package ui

import (
	"slices"

	"fyne.io/fyne/v2"
)

// area is a rectangle on the canvas.
type area struct{ x, y, wide, high float32 }

// meets reports whether two areas have more than an edge in common.
func (a area) meets(b area) bool {
	return a.x < b.x+b.wide && b.x < a.x+a.wide && a.y < b.y+b.high && b.y < a.y+a.high
}

// crossed reports whether the line from p to q comes into the area (Liang and Barsky 1984).
func (a area) crossed(p, q fyne.Position) bool {
	from, to := float32(0), float32(1) // of the line, that may be inside
	for _, edge := range [4][2]float32{
		{p.X - q.X, p.X - a.x}, {q.X - p.X, a.x + a.wide - p.X},
		{p.Y - q.Y, p.Y - a.y}, {q.Y - p.Y, a.y + a.high - p.Y},
	} {
		switch along, left := edge[0], edge[1]; {
		case along == 0 && left < 0:
			return false
		case along < 0:
			from = max(from, left/along)
		case along > 0:
			to = min(to, left/along)
		}
	}
	return from <= to
}

// spotAt returns where a name of that size stands at its own curve so that it lies on no
// curve and on no area that is taken: over or under a point of the curve, as near to its
// highest one as can be; where no place is free, where it lies on the least.
func spotAt(own int, size fyne.Size, curves [][]fyne.Position, taken []area, within area) fyne.Position {
	peak := 0
	for i, p := range curves[own] {
		if p.Y < curves[own][peak].Y {
			peak = i
		}
	}
	var spot fyne.Position
	least := -1
	for i, p := range curves[own] {
		for k, shift := range []fyne.Position{
			{X: -size.Width / 2, Y: -size.Height - 1}, {X: -size.Width / 2, Y: 2},
			{X: -size.Width - 4, Y: -size.Height - 1}, {X: 4, Y: -size.Height - 1},
			{X: -size.Width - 4, Y: -size.Height / 2}, {X: 4, Y: -size.Height / 2},
		} {
			at := p.Add(shift)
			at.X = min(max(at.X, within.x), within.x+within.wide-size.Width)
			at.Y = min(max(at.Y, within.y), within.y+within.high-size.Height)
			// What ink a name has keeps a little off the edges of its box.
			const air = 2
			box := area{at.X, at.Y + air, size.Width, size.Height - 2*air}
			cost := 2*max(i-peak, peak-i) + k
			const worse = 1000
			for _, t := range taken {
				if box.meets(t) {
					cost += worse
				}
			}
			for _, c := range curves {
				for n := range len(c) - 1 {
					if box.crossed(c[n], c[n+1]) {
						cost += worse
					}
				}
			}
			if least < 0 || cost < least {
				least, spot = cost, at
			}
		}
	}
	return spot
}

// spread moves heights apart by no more than it takes to have them so far from each other,
// and none beyond the ends unless there is no room.
func spread(heights []float32, apart, top, bottom float32) []float32 {
	order := make([]int, len(heights))
	for i := range order {
		order[i] = i
	}
	slices.SortStableFunc(order, func(a, b int) int {
		switch {
		case heights[a] < heights[b]:
			return -1
		case heights[a] > heights[b]:
			return 1
		}
		return 0
	})
	moved := slices.Clone(heights)
	edge := top
	for _, i := range order {
		moved[i] = max(moved[i], edge)
		edge = moved[i] + apart
	}
	edge = bottom
	for _, i := range slices.Backward(order) {
		moved[i] = min(moved[i], edge)
		edge = moved[i] - apart
	}
	return moved
}
