package model

import (
	"math"
	"strings"
	"testing"

	"pavilight/app/drawing"
	"pavilight/trace"
)

// followedTwice follows a ray in air with the same in water beside it.
func followedTwice(t *testing.T) *place {
	p := newPlace(t)
	subject, err := p.subject(p.Doc.Plan())
	if err != nil {
		t.Fatal(err)
	}
	p.Look.Frame = &Frame{Subject: subject, Settings: p.Look.Settings(), Around: p.Look.Around}
	p.Look.Follow(0, 0.2, 0.35) // on the crown: straight onto the table nothing is bent
	p.Look.FollowBeside(1)
	if r := p.Look.Ray; r.Path == nil || r.Beside == nil || r.Beside.Path == nil {
		t.Fatalf("not two paths: %+v", r)
	}
	return p
}

// The two rays enter at one place and are refracted by their own medium. Source: Snell's
// law, n sin = m sin, at the facet where they enter.
func TestRayBesideIsRefractedByItsOwnMedium(t *testing.T) {
	p := followedTwice(t)
	r := p.Look.Ray
	a, b := r.Path, r.Beside.Path
	if a.Entry != b.Entry || a.Facet != b.Facet || a.Incidence != b.Incidence {
		t.Errorf("the rays enter at %v and %v", a.Entry, b.Entry)
	}
	for _, path := range []*trace.Path{a, b} {
		in := path.Bounces[0].At.Sub(path.Entry).Normalize()
		normal := r.Stone.Facets[path.Facet].Normal
		sin := in.Cross(normal).Len()
		want := path.IndexMedium / path.IndexStone * math.Sin(path.Incidence.Radians())
		if want < 0.1 || math.Abs(sin-want) > 1e-9 {
			t.Errorf("in %.3f the ray is refracted to sine %v, want %v", path.IndexMedium, sin, want)
		}
	}
	if got := r.Text(nil); strings.Count(got, "wavelength") != 2 {
		t.Errorf("the text does not tell both:\n%s", got)
	}
	p.Look.Follow(0, 0.6, 0.35)
	if again := p.Look.Ray; again.Beside == nil || again.Beside.Path.Entry != again.Path.Entry {
		t.Error("the ray beside does not come along")
	}
	p.Look.Follow(1, 0.6, 0.35)
	if p.Look.Ray.Beside != nil {
		t.Error("a ray stands beside itself")
	}
	p.Look.FollowBeside(2)
	p.Look.FollowBeside(-1)
	if p.Look.Ray.Beside != nil {
		t.Error("the ray beside stays")
	}
}

// The page shows all that there is, within its edges.
func TestRayPage(t *testing.T) {
	p := followedTwice(t)
	page := p.Look.Ray.Page(nil, "Harbour Eight")
	words, dashed := "", 0
	for _, m := range page.Marks {
		var points []drawing.Point
		switch m := m.(type) {
		case *drawing.Text:
			words += m.Words + "\n"
			points = append(points, m.At)
		case *drawing.Path:
			for _, r := range m.Rings {
				points = append(points, r...)
			}
			if m.Dash != nil {
				dashed++
			}
		}
		for _, q := range points {
			if q.X < 0 || q.Y < 0 || q.X > page.Width || q.Y > page.Height {
				t.Fatalf("%+v lies beyond the page of %v x %v", m, page.Width, page.Height)
			}
		}
	}
	for _, want := range []string{"Harbour Eight", "Ray in air", "Ray in water", "(dashed)", "from the side"} {
		if !strings.Contains(words, want) {
			t.Errorf("the page does not say %q", want)
		}
	}
	if dashed == 0 {
		t.Error("the ray beside is not drawn")
	}
	// The side view looks across the ray: its first level step runs to the right.
	r := p.Look.Ray
	step := r.sidePose().View(r.Path.Bounces[0].At.Sub(r.Path.Entry))
	if step[0] <= 0 || math.Abs(step[2]) > 1e-6*step[0] {
		t.Errorf("seen from the side the first step is %v", step)
	}
}
