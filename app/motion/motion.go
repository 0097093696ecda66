package motion

import (
	"context"
	"errors"
	"fmt"
	"image"
	"image/color"
	"math"

	"github.com/go-gl/mathgl/mgl64"
	xdraw "golang.org/x/image/draw"

	"pavilight/app/drawing"
	"pavilight/app/picture"
	"pavilight/facets"
	"pavilight/gems"
	"pavilight/trace"
)

// Path is how the stone moves, once round and back to where it began.
type Path int

// The paths.
const (
	Rock   Path = iota // leans to one side and to the other, as a pendulum swings
	Circle             // leans all the time, and the direction in which it leans goes round
)

// Shows is what the pictures show.
type Shows int

// What pictures may show.
const (
	Colour Shows = iota // true colour under a light
	Return              // the map of light return
	Leakage
)

// Job is a moving picture to be made.
type Job struct {
	Stone    *facets.Stone
	Material *gems.Material
	Medium   *gems.Material // all around
	Light    *trace.Light   // of the true colour
	Head     facets.Angle
	Seed     uint64
	Workers  int

	Path      Path
	Most      facets.Angle // how far the stone leans at most
	Turn      facets.Angle // azimuth toward which it rocks; where a Circle begins
	Shows     Shows
	Frames    int // pictures of one round
	PerSecond int
	Size      int // pixels of a picture's edge
}

// Bounds of a moving picture. All frames are held in memory.
const (
	LeastFrames = 2
	MostFrames  = 720
	LeastSize   = 32
	MostSize    = 1600
	mostPixels  = 150e6 // of all frames together
)

// Check refuses a job that cannot be done.
func (j *Job) Check() error {
	switch {
	case j.Frames < LeastFrames || j.Frames > MostFrames:
		return fmt.Errorf("%d frames: use %d to %d", j.Frames, LeastFrames, MostFrames)
	case j.Size < LeastSize || j.Size > MostSize:
		return fmt.Errorf("%d pixels an edge: use %d to %d", j.Size, LeastSize, MostSize)
	case float64(j.Frames)*float64(j.Size)*float64(j.Size) > mostPixels:
		return fmt.Errorf("%d frames of %d × %d pixels do not fit into memory; use fewer or smaller ones", j.Frames, j.Size, j.Size)
	case !(j.Most > 0 && j.Most < 90*facets.Degree):
		return fmt.Errorf("a tilt of %v: use more than 0 and less than 90 degrees", j.Most)
	case j.PerSecond < 1 || j.PerSecond > 50:
		return fmt.Errorf("%d pictures a second: use 1 to 50", j.PerSecond)
	case j.Shows == Colour && j.Light == nil:
		return errors.New("true colour needs a light")
	}
	return nil
}

// tilt returns how far the stone leans in a frame, and toward which azimuth.
func (j *Job) tilt(frame int) (tilt, turn facets.Angle) {
	phase := 2 * math.Pi * float64(frame) / float64(j.Frames)
	if j.Path == Circle {
		return j.Most, j.Turn + facets.Angle(phase)
	}
	return j.Most * facets.Angle(math.Sin(phase)), j.Turn
}

// twin returns the earlier frame that shows the same, -1 for none: a rocking stone passes
// every place twice.
func (j *Job) twin(frame int) int {
	if j.Path != Rock || j.Frames%2 != 0 {
		return -1
	}
	other := (j.Frames/2 - frame + j.Frames) % j.Frames
	if other < frame {
		return other
	}
	return -1
}

// View returns the view of a stone that leans by an angle toward an azimuth; a negative
// angle leans the other way.
func View(tilt, turn facets.Angle) trace.View {
	if tilt < 0 {
		tilt, turn = -tilt, turn+180*facets.Degree
	}
	return trace.View{Tilt: tilt, Turn: turn}
}

// How finely pictures are traced: at two rays a pixel, the points of one pass of the
// tracer suffice for this share of a picture's edge, which is then enlarged.
const (
	tracedEdge = 0.89
	rays       = 2
	rim        = 1.05

	viewing      = 300 // mm, the distance of a stone held in the hand
	leastReaches = 5   // of a stone, from which it is seen as a whole
)

// Render makes the pictures. It calls report, which may be nil, with the share that is
// done. After ctx is cancelled it returns the cause.
func (j *Job) Render(ctx context.Context, report func(done float64)) ([]*image.RGBA, error) {
	if err := j.Check(); err != nil {
		return nil, err
	}
	frames := make([]*image.RGBA, j.Frames)
	var sheet *Sheet
	if j.Shows == Colour {
		var err error
		if sheet, err = j.sheet(ctx); err != nil {
			return nil, err
		}
	}
	done, total := 0, 0
	for i := range frames {
		if j.twin(i) < 0 {
			total++
		}
	}
	for i := range frames {
		if twin := j.twin(i); twin >= 0 {
			frames[i] = frames[twin]
			continue
		}
		img, err := j.frame(ctx, i, sheet)
		if err != nil {
			return nil, err
		}
		frames[i] = img
		if done++; report != nil {
			report(float64(done) / float64(total))
		}
	}
	return frames, nil
}

// ground is what lies around the stone.
func ground() color.RGBA { return color.RGBA{0x9c, 0x9c, 0x9c, 255} }

// frame makes one picture.
func (j *Job) frame(ctx context.Context, i int, sheet *Sheet) (*image.RGBA, error) {
	tilt, turn := j.tilt(i)
	settings := j.settings()
	settings.View = View(tilt, turn)
	edge := settings.Pixels
	scene := trace.Scene{Stone: j.Stone, Material: j.Material, Surroundings: trace.Around(j.Medium)}
	var traced *image.RGBA
	if j.Shows == Colour {
		settings.Colour = true
		r, err := trace.Run(ctx, scene, settings, nil)
		if err != nil {
			return nil, err
		}
		traced = sheet.against(r.Columns[0].Map, settings).Image(ground())
	} else {
		settings.Samples = 4 * rays
		r, err := trace.Run(ctx, scene, settings, nil)
		if err != nil {
			return nil, err
		}
		colours := *j.colours()
		colours.Outside = ground()
		traced = image.NewRGBA(image.Rect(0, 0, edge, edge))
		picture.Paint(traced, r.Columns[0].Map.Field(j.quantity()), edge, &colours)
	}
	img := image.NewRGBA(image.Rect(0, 0, j.Size, j.Size))
	// Colours of a map are numbers: they are not mixed.
	var scaler xdraw.Scaler = xdraw.NearestNeighbor
	if j.Shows == Colour {
		scaler = xdraw.CatmullRom
	}
	scaler.Scale(img, img.Rect, traced, traced.Rect, xdraw.Src, nil)
	j.legend(img, tilt, turn)
	return img, nil
}

// settings returns what is the same for all frames.
func (j *Job) settings() trace.Settings {
	s := trace.Settings{
		Head: j.Head, Seed: j.Seed, Workers: j.Workers,
		Pixels: max(16, int(tracedEdge*float64(j.Size))), Samples: rays, Square: rim * 2 * reach(j.Stone),
	}
	if j.Shows == Colour {
		s.Light, s.Distance = j.Light, Distance(j.Stone)
		s.Square *= s.Distance / (s.Distance - reach(j.Stone))
	}
	return s
}

// sheet returns the white sheet that all frames are held against. The rays of every frame
// cross the picture at the same points, with the same wavelengths; a block that fills the
// picture is met by all of them.
func (j *Job) sheet(ctx context.Context) (*Sheet, error) {
	settings := j.settings()
	var planes []facets.Plane
	for axis := range 3 {
		for _, sign := range []float64{-1, 1} {
			var n mgl64.Vec3
			n[axis] = sign
			planes = append(planes, facets.Plane{Normal: n, Distance: settings.Square})
			if axis == 2 {
				planes[len(planes)-1].Distance /= 10
			}
		}
	}
	block, err := facets.FromPlanes("sheet", planes)
	if err != nil {
		return nil, err
	}
	return NewSheet(ctx, block, settings)
}

func (j *Job) quantity() trace.Quantity {
	if j.Shows == Leakage {
		return trace.Leaked
	}
	return trace.Returned
}

func (j *Job) colours() *picture.ColourMap {
	if j.Shows == Leakage {
		return picture.Cubehelix()
	}
	return picture.Cividis()
}

// Distance returns how far the eye is from a stone in pictures in true colour, mm: that of
// a stone held in the hand, and of a large one so much that all of it is seen.
func Distance(s *facets.Stone) float64 { return max(viewing, leastReaches*reach(s)) }

// reach returns the radius of the sphere about the mean of the stone's corners that holds
// it, mm: the middle about which trace takes a picture.
func reach(s *facets.Stone) float64 {
	middle := s.Corners[0].Mul(0)
	for _, c := range s.Corners {
		middle = middle.Add(c.Mul(1 / float64(len(s.Corners))))
	}
	most := 0.0
	for _, c := range s.Corners {
		most = max(most, c.Sub(middle).Len())
	}
	return most
}

// legend writes into the corners how the stone leans and, on maps, what the colours mean.
func (j *Job) legend(img *image.RGBA, tilt, turn facets.Angle) {
	const least = 160 // pixels, below which there is no room for letters
	if j.Size < least {
		return
	}
	letter := drawing.Type{Size: 0.034 * float64(j.Size) / drawing.MMPerPoint}
	edge, m := float64(j.Size), 0.02*float64(j.Size)
	high := 0.07 * edge
	// A strip in pixels: one mm of the page is one pixel.
	p := &drawing.Page{Width: edge, Height: high}
	g := ground()
	plain := image.NewRGBA(image.Rect(0, 0, 1, 1))
	plain.SetRGBA(0, 0, g)
	p.Place(plain, drawing.Point{}, edge, high)
	words := fmt.Sprintf("%.0f°", math.Abs(tilt.Degrees()))
	if j.Path == Rock {
		words = fmt.Sprintf("%+.0f°", tilt.Degrees())
		if math.Abs(tilt.Degrees()) < 0.5 {
			words = "0°"
		}
		words = replaceMinus(words)
	} else {
		words += fmt.Sprintf(" → %.0f°", math.Mod(turn.Degrees(), 360))
	}
	p.Write(letter, drawing.Grey(0x18), drawing.Left, drawing.Point{X: m, Y: high - m}, words)
	wide := [2]float64{p.Marks[len(p.Marks)-1].(*drawing.Text).At.X + letter.Width(words) + m, edge}
	if j.Shows != Colour {
		strip := image.NewRGBA(image.Rect(0, 0, 64, 1))
		for x := range 64 {
			strip.SetRGBA(x, 0, j.colours().At(float64(x)/63))
		}
		long := 0.16 * edge
		left := edge - m - long - letter.Width("1") - 0.01*edge
		p.Place(strip, drawing.Point{X: left, Y: high - m - letter.Height()}, long, letter.Height())
		p.Write(letter, drawing.Grey(0x18), drawing.Right, drawing.Point{X: left - 0.01*edge, Y: high - m}, "0")
		p.Write(letter, drawing.Grey(0x18), drawing.Left, drawing.Point{X: left + long + 0.01*edge, Y: high - m}, "1")
		wide[1] = left - m - letter.Width("0")
	}
	strip := p.Raster(1)
	top := j.Size - strip.Rect.Dy()
	for _, part := range [][2]int{{0, int(wide[0])}, {int(wide[1]), j.Size}} {
		box := image.Rect(part[0], top, part[1], j.Size)
		for y := box.Min.Y; y < box.Max.Y; y++ {
			for x := box.Min.X; x < box.Max.X; x++ {
				if img.RGBAAt(x, y) == g { // beside the stone only
					img.SetRGBA(x, y, strip.RGBAAt(x, y-top))
				}
			}
		}
	}
}

// replaceMinus sets the sign of a negative number as a minus, not a hyphen.
func replaceMinus(s string) string {
	if len(s) > 0 && s[0] == '-' {
		return "−" + s[1:]
	}
	return s
}
