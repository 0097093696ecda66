package solid

import (
	"image"
	"image/color"
	"math"
	"testing"

	"github.com/go-gl/mathgl/mgl64"

	"pavilight/facets"
)

// box is a cuboid of edges 4 (x), 2 (y) and 1 (z) mm about the origin; the tier
// of each face is the direction it looks to.
func box() *facets.Stone {
	s := &facets.Stone{Name: "box"}
	for i := range 8 {
		s.Corners = append(s.Corners, mgl64.Vec3{
			2 * float64(i&1*2-1), float64(i>>1&1*2 - 1), 0.5 * float64(i>>2&1*2-1)})
	}
	add := func(tier string, side facets.Side, n mgl64.Vec3, distance float64, ring ...int) {
		s.Facets = append(s.Facets, facets.Facet{Tier: tier, Side: side, Normal: n, Distance: distance, Corners: ring})
	}
	add("+z", facets.Table, mgl64.Vec3{0, 0, 1}, 0.5, 4, 5, 7, 6)
	add("-z", facets.Pavilion, mgl64.Vec3{0, 0, -1}, 0.5, 0, 2, 3, 1)
	add("+x", facets.Girdle, mgl64.Vec3{1, 0, 0}, 2, 1, 3, 7, 5)
	add("-x", facets.Girdle, mgl64.Vec3{-1, 0, 0}, 2, 0, 4, 6, 2)
	add("+y", facets.Girdle, mgl64.Vec3{0, 1, 0}, 1, 2, 6, 7, 3)
	add("-y", facets.Girdle, mgl64.Vec3{0, -1, 0}, 1, 0, 1, 5, 4)
	for a := range s.Facets {
		for b := a + 1; b < len(s.Facets); b++ {
			var shared []int
			for _, c := range s.Facets[a].Corners {
				for _, d := range s.Facets[b].Corners {
					if c == d {
						shared = append(shared, c)
					}
				}
			}
			if len(shared) == 2 {
				s.Edges = append(s.Edges, facets.Edge{
					Corners: [2]int{min(shared[0], shared[1]), max(shared[0], shared[1])}, Facets: [2]int{a, b}})
			}
		}
	}
	return s
}

// share is that of a picture's edge which the stone takes in these tests.
const share = 0.88

func TestPoses(t *testing.T) {
	x, y, z := mgl64.Vec3{1, 0, 0}, mgl64.Vec3{0, 1, 0}, mgl64.Vec3{0, 0, 1}
	for _, c := range []struct {
		name  string
		pose  Pose
		of    mgl64.Vec3
		want  mgl64.Vec3
		frame string
	}{
		{"face-up, index 0", FaceUp(), x, mgl64.Vec3{0, 1, 0}, "points up the picture"},
		{"face-up, a quarter on", FaceUp(), y, mgl64.Vec3{-1, 0, 0}, "indices grow anticlockwise"},
		{"face-up, table", FaceUp(), z, mgl64.Vec3{0, 0, 1}, "looks at the eye"},
		{"profile, table", Profile(), z, mgl64.Vec3{0, 1, 0}, "is up"},
		{"profile, index 0", Profile(), x, mgl64.Vec3{0, 0, 1}, "looks at the eye"},
		{"profile, a quarter on", Profile(), y, mgl64.Vec3{1, 0, 0}, "right-handed with the two others"},
		{"face-down, culet", FaceDown(), z.Mul(-1), mgl64.Vec3{0, 0, 1}, "looks at the eye"},
		{"face-down, index 0", FaceDown(), x, mgl64.Vec3{0, 1, 0}, "points up the picture"},
		{"face-down, a quarter on", FaceDown(), y, mgl64.Vec3{1, 0, 0}, "indices grow clockwise from below"},
		{"turned right by a quarter", FaceUp().Turned(90*facets.Degree, 0), z, mgl64.Vec3{1, 0, 0}, "table looks right"},
		{"turned up by a quarter", FaceUp().Turned(0, 90*facets.Degree), z, mgl64.Vec3{0, 1, 0}, "table looks up"},
		{"spun by a quarter", FaceUp().Spun(90 * facets.Degree), x, mgl64.Vec3{-1, 0, 0}, "anticlockwise"},
	} {
		const rounding = 1e-12 // of a product of three unit quaternions
		if got := c.pose.View(c.of); got.Sub(c.want).Len() > rounding {
			t.Errorf("%s: %v, want %v (%s)", c.name, got, c.want, c.frame)
		}
	}
}

func TestFacetUnderPoint(t *testing.T) {
	d := Project(box(), FaceUp(), 200, 200, share)
	// The box is 4 mm along x, which is up the picture, and 2 mm across.
	for _, c := range []struct {
		name string
		x, y float64
		tier string
	}{
		{"middle", 100, 100, "+z"}, {"well up", 100, 25, "+z"}, {"right of it", 180, 100, ""}, {"corner of the picture", 1, 1, ""},
	} {
		i, ok := d.Facet(c.x, c.y)
		tier := ""
		if ok {
			tier = d.stone.Facets[i].Tier
		}
		if tier != c.tier {
			t.Errorf("%s: facet %q, want %q", c.name, tier, c.tier)
		}
	}
	if i, ok := Project(box(), Profile(), 200, 200, share).Facet(100, 100); !ok || box().Facets[i].Tier != "+x" {
		t.Errorf("profile shows facet %d, %v; want the one toward index 0", i, ok)
	}
}

// TestPaintCoversOutline holds the painted area against the projected area of
// the box, known in closed form, and no pixel of the ground may shine through
// between neighbouring facets.
func TestPaintCoversOutline(t *testing.T) {
	ground := color.RGBA{1, 2, 3, 255}
	style := Style{Colours: Colours{Ground: ground, Body: color.RGBA{200, 200, 200, 255},
		Shade: color.RGBA{90, 90, 90, 255}}, Width: 1e-9}
	for _, pose := range []Pose{FaceUp(), Profile(), FaceUp().Turned(0.5, 0.7), FaceDown().Turned(1, -0.3)} {
		const size = 400
		stone := box()
		dst := image.NewRGBA(image.Rect(0, 0, size, size))
		d := Project(stone, pose, size, size, share)
		d.Paint(dst, style)
		covered := 0
		for i := 0; i < len(dst.Pix); i += 4 {
			if dst.Pix[i] != ground.R || dst.Pix[i+1] != ground.G || dst.Pix[i+2] != ground.B {
				covered++
			}
			if dst.Pix[i+3] != 255 {
				t.Fatalf("pixel %d is not opaque", i/4)
			}
		}
		// Projected area of a box: the sum of face areas times the cosine to the eye.
		faces := map[string]float64{"+z": 8, "-z": 8, "+x": 2, "-x": 2, "+y": 4, "-y": 4} // mm²
		want, rim := 0.0, 0.0
		_, radius := bounds(stone.Corners)
		scale := share * size / 2 / radius
		for i, f := range stone.Facets {
			if d.front[i] {
				want += faces[f.Tier] * pose.View(f.Normal)[2] * scale * scale
			}
		}
		rim = 2 * (4 + 2 + 1) * scale // pixels along an outline that is never longer
		if math.Abs(float64(covered)-want) > rim/2 {
			t.Errorf("%d pixels painted, want %.0f within half a pixel along the outline", covered, want)
		}
	}
}

func TestLabelsNameEachTierSeenOnce(t *testing.T) {
	d := Project(box(), FaceUp().Turned(0.4, 0.4), 200, 200, share)
	labels := d.Labels(4, 1, 1, "")
	if len(labels) != 3 || labels[0].Tier != "+z" {
		t.Fatalf("labels %v, want the three faces seen, the largest first", labels)
	}
	seen := map[string]bool{}
	for _, l := range labels {
		if seen[l.Tier] {
			t.Errorf("tier %s labelled twice", l.Tier)
		}
		seen[l.Tier] = true
	}
	if crowded := d.Labels(4, 1000, 1000, labels[2].Tier); len(crowded) != 1 || crowded[0] != labels[2] {
		t.Errorf("where there is room for one label, %v, want that of the tier called first", crowded)
	}
	if none := d.Labels(1e9, 1, 1, ""); len(none) != 0 {
		t.Errorf("facets too small for a name are named: %v", none)
	}
}

// A ray's ends are drawn where the drawing says that its points fall.
func TestRaysAreDrawnOnTop(t *testing.T) {
	red := color.RGBA{255, 0, 0, 255}
	from, to := mgl64.Vec3{0, 0, 0}, mgl64.Vec3{1.5, 0, 0}
	dst := image.NewRGBA(image.Rect(0, 0, 200, 200))
	d := Project(box(), FaceUp(), 200, 200, share)
	d.Paint(dst, Style{Rays: []Ray{{From: from, To: to, Colour: red, Width: 3}}})
	for _, v := range []mgl64.Vec3{from, from.Add(to).Mul(0.5), to} {
		p := d.Point(v)
		if got := dst.RGBAAt(int(p[0]), int(p[1])); got != red {
			t.Errorf("at %v the picture is %v, want the ray's red", v, got)
		}
	}
	if p := d.Point(to); !(p[1] < d.Point(from)[1]) {
		t.Error("index 0 does not point up the picture")
	}
}

func TestDegenerateStoneDoesNotPanic(t *testing.T) {
	dst := image.NewRGBA(image.Rect(0, 0, 3, 2))
	Project(&facets.Stone{}, FaceUp(), 3, 2, share).Paint(dst, Style{})
	Project(box(), FaceUp(), 1, 1, share).Paint(image.NewRGBA(image.Rect(0, 0, 1, 1)), Style{})
}

func BenchmarkPaint(b *testing.B) {
	d := Project(box(), FaceUp().Turned(0.4, 0.4), 600, 600, share)
	dst := image.NewRGBA(image.Rect(0, 0, 600, 600))
	style := Style{Colours: Colours{Edge: color.RGBA{255, 255, 255, 255}, Hidden: color.RGBA{99, 99, 99, 255}}}
	b.ReportAllocs()
	for b.Loop() {
		d.Paint(dst, style)
	}
}
