package model

import (
	"fmt"
	"math"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/app/stock"
	"pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// Ray is one viewing ray that is being followed: where it was asked for, and its
// path through the stone that the maps show.
type Ray struct {
	Column int
	X, Y   float64 // shares of the picture from its top left corner
	Around Around
	Stone  *facets.Stone
	Path   *trace.Path // nil where there is none
	Why    error       // there is no path
	Step   int         // the bounce picked in the list; -1 for none
	Beside *Ray        // from the same place in another column's surrounding; nil for none
}

// Follow follows the ray through a place of the maps in one column's surrounding.
func (l *Look) Follow(column int, x, y float64) {
	if l.Frame == nil || column >= len(l.Frame.Around) {
		return
	}
	beside := (*Ray)(nil)
	if l.Ray != nil && l.Ray.Beside != nil && l.Ray.Beside.Column != column {
		beside = l.Ray.Beside
	}
	l.Ray = &Ray{Column: column, X: min(1, max(0, x)), Y: min(1, max(0, y)), Step: -1, Beside: beside}
	l.followAgain()
}

// FollowBeside follows a second ray from the same place in another column's
// surrounding; the ray's own column, or a negative one, lets the second go.
func (l *Look) FollowBeside(column int) {
	if l.Ray == nil || l.Frame == nil || column >= len(l.Frame.Around) {
		return
	}
	r := *l.Ray
	r.Beside = nil
	if column >= 0 && column != r.Column {
		r.Beside = &Ray{Column: column, Step: -1}
	}
	l.Ray = &r
	l.followAgain()
}

// Unfollow lets the ray go.
func (l *Look) Unfollow() {
	if l.Ray != nil {
		l.Ray = nil
		l.onChange(RayChanged)
	}
}

// PickBounce picks a bounce of the ray, within those that there are; -1 picks none.
func (l *Look) PickBounce(step int) {
	if l.Ray == nil || l.Ray.Path == nil {
		return
	}
	r := *l.Ray
	r.Step = min(len(r.Path.Bounces)-1, max(-1, step))
	if r.Step != l.Ray.Step {
		l.Ray = &r
		l.onChange(RayChanged)
	}
}

// followAgain follows the ray through the stone that the maps show now.
func (l *Look) followAgain() {
	if l.Ray == nil || l.Frame == nil {
		return
	}
	r := l.followed(*l.Ray)
	if r.Beside != nil {
		beside := *r.Beside
		beside.X, beside.Y, beside.Step = r.X, r.Y, -1
		beside = l.followed(beside)
		r.Beside = &beside
	}
	l.Ray = &r
	l.onChange(RayChanged)
}

// followed returns a ray with its path through the stone that the maps show now.
func (l *Look) followed(r Ray) Ray {
	f := l.Frame
	r.Around, r.Stone, r.Path, r.Why = f.Around[r.Column], f.Subject.Stone, nil, nil
	scene := trace.Scene{Stone: f.Subject.Stone, Material: f.Subject.Material, Surroundings: surroundings(f.Around)}
	switch path, ok, err := trace.Follow(scene, r.Column, f.Settings, r.X, r.Y); {
	case err != nil:
		r.Why = err
	case !ok:
		r.Why = words.Errorf("it passes beside the stone")
	default:
		r.Path = path
		r.Step = min(r.Step, len(path.Bounces)-1)
	}
	return r
}

// Title says what is followed, in which surrounding, against which critical angle.
func (r *Ray) Title(w *words.Words) string {
	medium := w.Within(stock.ShortOf(w, r.Around.Medium))
	if r.Around.Dish {
		medium = w.Say("a dish of %s", medium)
	}
	switch {
	case r.Path == nil:
		return w.Say("Ray in %s: %s", medium, r.Why)
	case r.Path.HasCritical:
		return w.Say("Ray in %s, critical angle %.2f°", medium, r.Path.Critical.Degrees())
	}
	return w.Say("Ray in %s, no critical angle", medium)
}

// RayLine is one line of the list of a ray: its entry, or a bounce.
type RayLine struct {
	Number string // of the bounce; empty for the entry
	Facet  string
	Angle  string // of incidence
	Stayed string // share that goes on inside
	Left   string // share that leaves here; empty under total reflection
	Goes   string // where that share goes, in a word
	Entry  trace.Quantity
}

// mostRayLines is how many bounces the list tells; later ones carry next to nothing.
const mostRayLines = 24

// Lines tells the ray bounce by bounce, and how many bounces more there are.
func (r *Ray) Lines(w *words.Words) (lines []RayLine, more int) {
	if r.Path == nil {
		return nil, 0
	}
	p := r.Path
	lines = append(lines, RayLine{
		Facet:  facetName(w, r.Stone, p.Facet),
		Angle:  w.Say("%.1f°", p.Incidence.Degrees()),
		Stayed: w.Say("%.3f", 1-p.Liquid-p.Surface),
		Left:   w.Say("%.3f", p.Surface),
		Goes:   w.Say("mirror|noun"),
		Entry:  trace.Surface,
	})
	for i, b := range p.Bounces[:min(len(p.Bounces), mostRayLines)] {
		line := RayLine{
			Number: fmt.Sprint(i + 1),
			Facet:  facetName(w, r.Stone, b.Facet),
			Angle:  w.Say("%.1f°", b.Incidence.Degrees()),
			Stayed: w.Say("%.3f", b.Stayed),
			Goes:   w.Say("total|reflection"),
		}
		if !b.Total {
			line.Left = w.Say("%.3f", b.Left)
			line.Goes = w.Say(map[trace.Quantity]words.Key{trace.Returned: "up", trace.Head: "head", trace.Leaked: "down",
				trace.Unresolved: "back"}[b.Goes])
			line.Entry = b.Goes
		}
		lines = append(lines, line)
	}
	return lines, max(0, len(p.Bounces)-mostRayLines)
}

// facetName names a facet by its tier and tooth: P1@12, or its number in a scan.
func facetName(w *words.Words, stone *facets.Stone, facet int) string {
	f := &stone.Facets[facet]
	switch {
	case f.Tier == "":
		return w.Say("facet %d", facet+1)
	case math.IsNaN(f.Index):
		return f.Tier
	}
	return w.Say("%s@%g", f.Tier, math.Round(f.Index*100)/100)
}

// Text tells the whole ray as a table for the clipboard or a file, columns apart by
// tabs, and after it the one beside.
func (r *Ray) Text(w *words.Words) string {
	if r.Beside != nil {
		return r.write(w) + "\n" + r.Beside.write(w)
	}
	return r.write(w)
}

func (r *Ray) write(w *words.Words) string {
	var b strings.Builder
	fmt.Fprintln(&b, r.Title(w))
	if r.Path == nil {
		return b.String()
	}
	p := r.Path
	fmt.Fprintln(&b, w.Say("wavelength %v, index %.4f in %.4f", p.Wavelength, p.IndexStone, p.IndexMedium))
	if p.Dish {
		fmt.Fprintln(&b, w.Say("mirrored by the liquid's surface: %.6f", p.Liquid))
	}
	fmt.Fprintln(&b, w.Say("bounce\tfacet\tincidence in degrees\tstayed\tleft\tgoes\tdegrees from the eye"))
	fmt.Fprintln(&b, w.Say("entry\t%s\t%.3f\t%.6f\t%.6f\tmirrored\t", facetName(w, r.Stone, p.Facet), p.Incidence.Degrees(), 1-p.Liquid-p.Surface, p.Surface))
	for i, s := range p.Bounces {
		goes, from := w.Say("total reflection"), ""
		if !s.Total {
			goes = w.Say(map[trace.Quantity]words.Key{trace.Returned: "returned", trace.Head: "head", trace.Leaked: "leaked"}[s.Goes])
			from = w.Say("%.3f", s.FromEye.Degrees())
			switch {
			case s.Goes == trace.Unresolved:
				goes, from = w.Say("sent back by the liquid's surface"), ""
			case s.Back > 0:
				goes = w.Say("%s, %.6f of it sent back by the liquid's surface", goes, s.Back)
			}
		}
		fmt.Fprintln(&b, w.Say("%d\t%s\t%.3f\t%.6f\t%.6f\t%s\t%s",
			i+1, facetName(w, r.Stone, s.Facet), s.Incidence.Degrees(), s.Stayed, s.Left, goes, from))
	}
	return b.String()
}

// Stretch is a straight piece of a drawn ray, in the stone's frame in mm.
type Stretch struct {
	From, To mgl64.Vec3
	Share    float64        // of the viewing ray that it carries
	Inside   bool           // within the stone
	Goes     trace.Quantity // outside: the entry of the ledger that it counts in
	Bounce   int            // the bounce that it leads to or leaves from; -1 for the way in
}

// Stretches returns the ray as it is drawn: the way in, the pieces inside, and what
// leaves at each facet that is worth a line. reach is how far outside pieces go, mm.
func (r *Ray) Stretches(reach float64) []Stretch {
	if r.Path == nil {
		return nil
	}
	p := r.Path
	const faint = 0.01 // a share too small to be drawn
	eye := r.eye()
	drawn := []Stretch{
		{From: p.Entry.Add(eye.Mul(reach)), To: p.Entry, Share: 1, Bounce: -1, Goes: trace.Unresolved},
	}
	if p.Surface > faint {
		away := p.Entry.Add(p.Mirrored.Mul(reach / 2))
		drawn = append(drawn, Stretch{From: p.Entry, To: away, Share: p.Surface, Goes: trace.Surface, Bounce: -1})
	}
	from := p.Entry
	for i, b := range p.Bounces {
		if b.Arrived < faint {
			break
		}
		drawn = append(drawn, Stretch{From: from, To: b.At, Share: b.Arrived, Inside: true, Bounce: i})
		if !b.Total && b.Left > faint {
			drawn = append(drawn, Stretch{From: b.At, To: b.At.Add(b.Leaving.Mul(reach)), Share: b.Left, Goes: b.Goes, Bounce: i})
		}
		from = b.At
	}
	return drawn
}

// eye returns the direction to the eye, which the mirrored light and the facet's
// normal give: the normal halves the angle between the two.
func (r *Ray) eye() mgl64.Vec3 {
	n := r.Stone.Facets[r.Path.Facet].Normal
	m := r.Path.Mirrored
	return n.Mul(2 * n.Dot(m)).Sub(m)
}
