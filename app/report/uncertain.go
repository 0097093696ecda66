package report

import (
	"context"
	"fmt"
	"math"
	"math/rand/v2"
	"slices"
	"strconv"
	"strings"

	"github.com/go-gl/mathgl/mgl64"

	texts "pavilight/app/words"
	"pavilight/facets"
	"pavilight/trace"
)

// Uncertainty is how exactly one proportion was measured: the standard deviation of the
// measurement, in the proportion's unit.
type Uncertainty struct {
	Name  string
	Sigma float64
}

// Uncertainties are the measuring errors of a stone, in the order in which they were given.
type Uncertainties []Uncertainty

// ReadUncertainties reads name=value pairs with commas between, such as
// "crown=0.2,pavilion=0.1,table=0.5". Decimals may have a comma, too.
func ReadUncertainties(text string) (Uncertainties, error) {
	var all Uncertainties
	for pair := range strings.SplitSeq(pointed(text), ",") {
		name, value, ok := strings.Cut(strings.TrimSpace(pair), "=")
		name = strings.TrimSpace(name)
		if !ok || name == "" {
			return nil, texts.Errorf("%q is no pair of name and value; write it like crown=0.2", pair)
		}
		v, err := strconv.ParseFloat(strings.TrimSpace(value), 64)
		if err != nil || !(v > 0) || math.IsInf(v, 0) {
			return nil, texts.Errorf("%s=%s: a measuring error is a number above 0, in the unit of the proportion", name, value)
		}
		if slices.ContainsFunc(all, func(u Uncertainty) bool { return u.Name == name }) {
			return nil, texts.Errorf("%s is given twice; leave one out", name)
		}
		all = append(all, Uncertainty{name, v})
	}
	return all, nil
}

// pointed gives decimals that have a comma a point: one between two digits separates no
// pairs, since each begins with a name.
func pointed(text string) string {
	digit := func(i int) bool { return i >= 0 && i < len(text) && text[i] >= '0' && text[i] <= '9' }
	b := []byte(text)
	for i := range b {
		if b[i] == ',' && digit(i-1) && digit(i+1) {
			b[i] = '.'
		}
	}
	return string(b)
}

// String returns the pairs as they were given.
func (u Uncertainties) String() string {
	var parts []string
	for _, one := range u {
		parts = append(parts, fmt.Sprintf("%s=%g", one.Name, one.Sigma))
	}
	return strings.Join(parts, ",")
}

// Fits checks that the stone has the proportions that errors are stated for. Of a plan and
// of a scan the angles of crown and pavilion can be in error.
func (u Uncertainties) Fits(s *Stone) error {
	known := []facets.Proportion{
		{Name: "crown", High: 60, Unit: "degrees"}, {Name: "pavilion", High: 65, Unit: "degrees"},
	}
	if s.Proportions != nil {
		known = facets.ProportionsOf(s.Proportions.Outline)
		known = slices.DeleteFunc(known, func(p facets.Proportion) bool { return p.Name == "steps" })
	}
	var names []string
	for _, k := range known {
		names = append(names, k.Name)
	}
	for _, one := range u {
		i := slices.Index(names, one.Name)
		if i < 0 {
			return texts.Errorf("the stone %q has no measured %q; use %s", s.Name, one.Name, strings.Join(names, ", "))
		}
		if most := (known[i].High - known[i].Low) / 4; one.Sigma > most {
			return texts.Errorf("a measuring error of %g for %s is too large to say anything; use at most %g", one.Sigma, one.Name, most)
		}
	}
	return nil
}

// How many stones are drawn for the spread, and how many draws may give no stone.
const (
	draws       = 64
	mostRefused = 64
)

// ErrNoStones tells that the measuring errors are so large that most stones within them
// cannot exist.
var ErrNoStones = texts.Errorf("most stones within the stated measuring errors cannot exist; state smaller ones")

// drawn returns the stones that the measurements may equally well have come from: each
// proportion moved by a normal deviate of its standard deviation. The same seed draws the
// same stones.
func (f *Findings) drawn() ([]*facets.Stone, error) {
	rng := rand.New(rand.NewPCG(f.Job.Seed, 0x6d65617375726564))
	var stones []*facets.Stone
	for refused := 0; len(stones) < draws; {
		off := map[string]float64{}
		for _, u := range f.Job.Measured {
			off[u.Name] = u.Sigma * rng.NormFloat64()
		}
		stone, err := f.moved(off)
		if err != nil {
			if refused++; refused > mostRefused {
				return nil, texts.Errorf("%v (the last: %v)", ErrNoStones, err)
			}
			continue
		}
		stones = append(stones, stone)
	}
	return stones, nil
}

// moved returns the stone with its proportions moved.
func (f *Findings) moved(off map[string]float64) (*facets.Stone, error) {
	if f.Proportions != nil {
		return movedProportions(f.Proportions, off, f.Measures.WidthMM)
	}
	return slanted(f.Solid, facets.Angle(off["crown"])*facets.Degree, facets.Angle(off["pavilion"])*facets.Degree)
}

// movedProportions returns the stone with some proportions moved, kept within what an
// outline may have.
func movedProportions(p *facets.Proportions, off map[string]float64, widthMM float64) (*facets.Stone, error) {
	moved := &facets.Proportions{Outline: p.Outline, Values: map[string]facets.Spread{}}
	for name, v := range p.Values {
		moved.Values[name] = v
	}
	for _, k := range facets.ProportionsOf(p.Outline) {
		by, ok := off[k.Name]
		if !ok {
			continue
		}
		v, given := moved.Values[k.Name]
		if !given {
			v = facets.Spread{Min: k.Usual, Mean: k.Usual, Max: k.Usual}
		}
		by = min(max(by, k.Low-v.Min), k.High-v.Max)
		moved.Values[k.Name] = facets.Spread{Min: v.Min + by, Mean: v.Mean + by, Max: v.Max + by}
	}
	return moved.Stone(widthMM)
}

// slanted returns the stone with the crown and the pavilion steeper by about the given
// angles: stretched along the axis from the girdle's edge, by what the mean slope of the
// side needs for it. The view from above stays.
func slanted(s *facets.Stone, crown, pavilion facets.Angle) (*facets.Stone, error) {
	girdle := s.Measure().GirdleHeightMM
	planes := make([]facets.Plane, len(s.Facets))
	ratio := map[facets.Side]float64{facets.Crown: stretch(s, facets.Crown, crown), facets.Pavilion: stretch(s, facets.Pavilion, pavilion)}
	ratio[facets.Table] = ratio[facets.Crown]
	for i, f := range s.Facets {
		n, d, from := f.Normal, f.Distance, girdle.Max
		if f.Side == facets.Pavilion {
			from = girdle.Min
		}
		if k, ok := ratio[f.Side]; ok {
			// z' = from + k (z - from) takes n·x = d to the plane with the normal (nx, ny, nz/k).
			m := mgl64.Vec3{n[0], n[1], n[2] / k}
			l := m.Len()
			n, d = m.Mul(1/l), (d-n[2]*from+n[2]*from/k)/l
		}
		planes[i] = facets.Plane{Tier: f.Tier, Index: f.Index, Side: f.Side, Normal: n, Distance: d}
	}
	return facets.FromPlanes(s.Name, planes)
}

// stretch returns the ratio of a stretch along the axis that turns the mean angle of a
// side's facets, by area, by the given one.
func stretch(s *facets.Stone, side facets.Side, by facets.Angle) float64 {
	sum, area := 0.0, 0.0
	for _, f := range s.Facets {
		if f.Side == side {
			sum += f.Area * math.Acos(min(1, math.Abs(f.Normal[2])))
			area += f.Area
		}
	}
	if area == 0 || by == 0 {
		return 1
	}
	const least, most = 0.01, math.Pi/2 - 0.01
	mean := min(max(sum/area, least), most)
	return math.Tan(min(max(mean+by.Radians(), least), most)) / math.Tan(mean)
}

// spread finds what the measuring errors do to every figure. All stones are traced at the
// same sample points, so that little but the shape differs.
//
// All around, the drawn stones are traced and the standard deviation is taken. In a dish,
// where tracing takes longer, each proportion is moved alone by its error, and the changes
// add by their squares: the law of propagation of uncertainty (JCGM 100:2008, equation 10).
func (f *Findings) spread(ctx context.Context, tell func(float64)) error {
	if err := f.Job.Measured.Fits(&f.Stone); err != nil {
		return err
	}
	stones, err := f.drawn()
	if err != nil {
		return err
	}
	const dishShare = 0.4 // of the time
	around := len(f.Job.Media)
	all := make([][]Shares, around)
	for i, stone := range stones {
		shares, err := f.shares(ctx, stone, trace.Around(f.Job.Media...))
		if err != nil {
			return err
		}
		for k := range shares {
			all[k] = append(all[k], shares[k])
		}
		tell((1 - dishShare) * float64(i+1) / draws)
	}
	for k := range all {
		f.Columns[k].Spread = deviation(all[k])
	}
	dishes := f.Job.dishes()
	if len(dishes) == 0 {
		return nil
	}
	base, err := f.shares(ctx, f.Solid, dishes)
	if err != nil {
		return err
	}
	changes := make([][]Shares, len(dishes)) // by each proportion
	for i, u := range f.Job.Measured {
		stone, err := f.moved(map[string]float64{u.Name: u.Sigma})
		if err != nil {
			stone, err = f.moved(map[string]float64{u.Name: -u.Sigma})
		}
		if err != nil {
			return texts.Errorf("%v (%s moved by %g: %v)", ErrNoStones, u.Name, u.Sigma, err)
		}
		moved, err := f.shares(ctx, stone, dishes)
		if err != nil {
			return err
		}
		for k := range dishes {
			changes[k] = append(changes[k], combined(func(of func(*Shares) float64) float64 { return of(&moved[k]) - of(&base[k]) }))
		}
		tell(1 - dishShare + dishShare*float64(i+1)/float64(len(f.Job.Measured)))
	}
	for k := range dishes {
		joint := combined(func(of func(*Shares) float64) float64 {
			sum := 0.0
			for i := range changes[k] {
				sum += math.Pow(of(&changes[k][i]), 2)
			}
			return math.Sqrt(sum)
		})
		f.Columns[around+k].Spread = &joint
	}
	return nil
}

// shares traces a stone with few rays.
func (f *Findings) shares(ctx context.Context, stone *facets.Stone, surroundings []trace.Surrounding) ([]Shares, error) {
	settings := f.Job.settings()
	settings.Pixels, settings.Samples, settings.Error = 16, 1, 0
	scene := f.scene(surroundings...)
	scene.Stone = stone
	r, err := trace.Run(ctx, scene, settings, nil)
	if err != nil {
		return nil, err
	}
	all := make([]Shares, len(r.Columns))
	for k := range r.Columns {
		c := &r.Columns[k]
		all[k] = Shares{c.Ledger, c.LeakyArea, c.WindowedArea}
	}
	return all, nil
}

// deviation returns the standard deviation of each figure.
func deviation(all []Shares) *Shares {
	one := combined(func(of func(*Shares) float64) float64 {
		mean, square := 0.0, 0.0
		for i := range all {
			mean += of(&all[i]) / float64(len(all))
		}
		for i := range all {
			square += math.Pow(of(&all[i])-mean, 2) / float64(len(all)-1)
		}
		return math.Sqrt(square)
	})
	return &one
}

// combined returns shares of which each figure is worked out by the same rule; the rule is
// given what reads the figure from other shares.
func combined(rule func(of func(*Shares) float64) float64) Shares {
	return Shares{
		Ledger: trace.Ledger{
			Surface:    rule(func(s *Shares) float64 { return s.Surface }),
			Returned:   rule(func(s *Shares) float64 { return s.Returned }),
			Head:       rule(func(s *Shares) float64 { return s.Head }),
			Leaked:     rule(func(s *Shares) float64 { return s.Leaked }),
			Absorbed:   rule(func(s *Shares) float64 { return s.Absorbed }),
			Unresolved: rule(func(s *Shares) float64 { return s.Unresolved }),
		},
		Leaky:    rule(func(s *Shares) float64 { return s.Leaky }),
		Windowed: rule(func(s *Shares) float64 { return s.Windowed }),
	}
}
