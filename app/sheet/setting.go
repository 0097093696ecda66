package sheet

import (
	"fmt"
	"math"
	"slices"
	"strconv"

	"pavilight/app/words"
	"pavilight/facets"
)

// Setting is where the index gear stands for a facet.
type Setting struct {
	Tooth   int          // 1 to the number of teeth, as the gear shows it
	Part    float64      // of a tooth to add with the cheater, -0.5 to 0.5; 0 on a tooth
	Cheater facets.Angle // the same as an angle, toward higher numbers
}

// nearTooth is how near to a tooth, in teeth, an index is that stands on it: plans
// write four decimals, and the rounding of a change of gear is far below.
const nearTooth = 5e-5

// String returns what the cutter sets, in English: 12, or 12+1.50° with a cheater.
func (s Setting) String() string {
	if s.Cheater == 0 {
		return strconv.Itoa(s.Tooth)
	}
	return fmt.Sprintf("%d%s", s.Tooth, signed(nil, s.Cheater.Degrees(), 2)+"°")
}

// In returns what the cutter sets as a language writes it.
func (s Setting) In(in *words.Words) string { return in.Decimal(s.String()) }

// Words returns the setting in full: 12 + 0.4 tooth = 1.50 degrees.
func (s Setting) Words(in *words.Words) string {
	if s.Cheater == 0 {
		return strconv.Itoa(s.Tooth)
	}
	sign := "+"
	if s.Part < 0 {
		sign = "−"
	}
	part := strconv.FormatFloat(math.Round(math.Abs(s.Part)*100)/100, 'f', -1, 64)
	return in.Say("%d %s %s tooth = %s degrees", s.Tooth, sign, in.Decimal(part),
		in.Decimal(rounded(math.Abs(s.Cheater.Degrees()), 2)))
}

// signed writes a number with its sign, a true minus for negative ones.
func signed(in *words.Words, v float64, decimals int) string {
	text := in.Decimal(rounded(math.Abs(v), decimals))
	if v < 0 {
		return "−" + text
	}
	return "+" + text
}

// rounded writes a number that is not negative, halves rounded up also where their
// binary form lies a little below.
func rounded(v float64, decimals int) string {
	return strconv.FormatFloat(v+1e-9, 'f', decimals, 64)
}

// ToGear returns where an index of one gear falls on another, in [0, to).
func ToGear(index float64, from, to int) float64 {
	i := math.Mod(index*float64(to)/float64(from), float64(to))
	if i < 0 {
		i += float64(to)
	}
	if r := math.Round(i); math.Abs(i-r) < 1e-9*float64(to) {
		i = r
	}
	if i >= float64(to) {
		i -= float64(to)
	}
	return i
}

// Shown returns the number that the machine's gear stands at for an index of a
// plan's gear, in [0, teeth): while the crown faces the lap of a machine that
// reverses, the numbers run back from the index of the transfer.
func (m *Machine) Shown(index float64, planGear int, facing facets.Side) float64 {
	i := ToGear(index, planGear, m.Gear)
	if facing == facets.Crown && m.CrownReversed {
		i = ToGear(2*m.TransferIndex-i, m.Gear, m.Gear)
	}
	return i
}

// Setting returns the tooth and the cheater for a number on the machine's gear.
// Midway between two teeth it is the lower one and half a tooth.
func (m *Machine) Setting(shown float64) Setting {
	tooth := math.Ceil(shown - 0.5)
	part := shown - tooth
	if math.Abs(part) < nearTooth {
		part = 0
	}
	n := int(tooth) % m.Gear
	if n <= 0 {
		n += m.Gear
	}
	return Setting{Tooth: n, Part: part, Cheater: facets.Angle(part*360/float64(m.Gear)) * facets.Degree}
}

// reaches reports whether the machine can make the setting.
func (m *Machine) reaches(s Setting) bool {
	const slack = 1e-9 // of the division 360/teeth
	return math.Abs(s.Cheater.Degrees()) <= m.Cheater.Degrees()+slack
}

// Reading returns what the angle scale is set to for an angle of the plan, to the
// machine's smallest step, and by how much that misses the plan's angle.
func (m *Machine) Reading(angle facets.Angle, facing facets.Side) (reading, miss facets.Angle) {
	step := m.AngleStep.Degrees()
	if step <= 0 {
		step = 0.01
	}
	wanted := (angle + m.offset(facing)).Degrees()
	shown := math.Round(wanted/step) * step
	return facets.Angle(shown) * facets.Degree, facets.Angle(shown-wanted) * facets.Degree
}

// decimals returns how many decimals the angle scale is read to.
func (m *Machine) decimals() int {
	step := m.AngleStep.Degrees()
	for d := 1; d <= 2; d++ {
		if scaled := step * math.Pow10(d); step > 0 && math.Abs(scaled-math.Round(scaled)) < 1e-6 {
			return d
		}
	}
	return 2
}

// lapOrder puts settings into the order of the numbers on the gear, from the first
// one on.
func lapOrder(settings []Setting, gear int) []Setting {
	out := slices.Clone(settings)
	slices.SortStableFunc(out, func(a, b Setting) int {
		return compare(a.place(gear), b.place(gear))
	})
	return out
}

// place returns the setting as a number in [0, gear): the last tooth stands for 0 and
// comes first.
func (s Setting) place(gear int) float64 { return ToGear(float64(s.Tooth)+s.Part, gear, gear) }

func compare(a, b float64) int {
	switch {
	case a < b:
		return -1
	case a > b:
		return 1
	default:
		return 0
	}
}

// oppositesFirst orders settings so that each is followed by the one opposite, and
// every further pair lies as far from those before as can be: the stone keeps its
// middle while it is cut.
func oppositesFirst(settings []Setting, gear int) []Setting {
	left := lapOrder(settings, gear)
	g := float64(gear)
	apart := func(a, b Setting) float64 {
		d := math.Mod(math.Abs(a.place(gear)-b.place(gear)), g)
		return min(d, g-d)
	}
	var out []Setting
	take := func(k int) {
		out = append(out, left[k])
		left = slices.Delete(left, k, k+1)
	}
	for len(left) > 0 {
		best, far := 0, -1.0
		for k, s := range left {
			near := math.Inf(1)
			for _, o := range out {
				near = min(near, apart(s, o))
			}
			if near > far+nearTooth {
				best, far = k, near
			}
		}
		last := left[best]
		take(best)
		for k, s := range left {
			if math.Abs(apart(last, s)-g/2) < nearTooth {
				take(k)
				break
			}
		}
	}
	return out
}

// settingWords writes settings, each for itself.
func settingWords(in *words.Words, settings []Setting) []string {
	var told []string
	for _, s := range settings {
		told = append(told, s.In(in))
	}
	return told
}
