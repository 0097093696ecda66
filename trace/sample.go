package trace

import "math/bits"

// scramblings is how many independent scramblings of the sample points a run
// traces: the standard error is taken from the spread of their means.
const scramblings = 16

// points is one scrambling of a three-dimensional low-discrepancy sequence: two
// dimensions for the place in the picture, one for the wavelength. Its points
// fill the unit cube evenly from the first on; different scramblings are
// independent, and the mean over scramblings is unbiased.
//
// Sobol', USSR Comput. Math. Math. Phys. 7 (1967) 86, with the direction numbers
// of Joe & Kuo, SIAM J. Sci. Comput. 30 (2008) 2635; nested uniform scrambling of
// Owen (1995) by hashing, Burley, J. Comput. Graph. Tech. 9(4) (2020).
type points struct{ key [3]uint32 }

// newPoints returns scrambling number r of the seed.
func newPoints(seed uint64, r int) points {
	k := mix(seed ^ mix(uint64(r)+1))
	return points{[3]uint32{uint32(k), uint32(k >> 32), uint32(mix(k))}}
}

// place returns the place of point i in the picture, and wavelength that in the
// spectrum; each coordinate is in [0, 1).
func (p points) place(i uint32) (x, y float64) {
	return float64(scramble(bits.Reverse32(i), p.key[0])) * unit32,
		float64(scramble(sobol(i, &direction2), p.key[1])) * unit32
}

func (p points) wavelength(i uint32) float64 {
	return float64(scramble(sobol(i, &direction3), p.key[2])) * unit32
}

const unit32 = 1.0 / (1 << 32)

// direction2 and direction3 are the direction numbers of the second and third
// dimension of the sequence (the first is bit reversal): primitive polynomials
// x + 1 with m = 1, and x^2 + x + 1 with m = 1, 3.
var (
	direction2 = directionNumbers(1, 0, 1)
	direction3 = directionNumbers(2, 1, 1, 3)
)

// directionNumbers runs Sobol's recurrence for a primitive polynomial of the given
// degree whose inner coefficients are the bits of a, from the first numbers m.
func directionNumbers(degree int, a uint32, m ...uint32) (v [32]uint32) {
	for i, mi := range m {
		v[i] = mi << (31 - i)
	}
	for i := degree; i < 32; i++ {
		v[i] = v[i-degree] ^ v[i-degree]>>degree
		for k := 1; k < degree; k++ {
			if a>>(degree-1-k)&1 != 0 {
				v[i] ^= v[i-k]
			}
		}
	}
	return v
}

func sobol(i uint32, v *[32]uint32) (x uint32) {
	for ; i != 0; i &= i - 1 {
		x ^= v[bits.TrailingZeros32(i)]
	}
	return x
}

// scramble permutes x at every node of its binary tree, by a hash in which a bit
// depends on higher bits only. Laine & Karras, Computer Graphics Forum 30 (2011)
// 1265; the constants are those of a published improvement of their hash.
func scramble(x, key uint32) uint32 {
	x = bits.Reverse32(x)
	x ^= x * 0x3d20adea
	x += key
	x *= key>>16 | 1
	x ^= x * 0x05526c56
	x ^= x * 0x53a22864
	return bits.Reverse32(x)
}

// mix is the finaliser of a 64-bit hash: every bit of the result depends on every
// bit of x. Steele, Lea & Flood, OOPSLA 2014 (SplitMix64).
func mix(x uint64) uint64 {
	x += 0x9e3779b97f4a7c15
	x = (x ^ x>>30) * 0xbf58476d1ce4e5b9
	x = (x ^ x>>27) * 0x94d049bb133111eb
	return x ^ x>>31
}

// dice is the stream of random numbers that one ray may draw in the end-game. It
// depends on nothing but its start, so a ray's ledger is the same wherever and
// whenever it is traced. It is a counter, hashed: 32 bits, so that vectors of eight
// can throw it (the hash is one of a published search for short ones that mix well).
type dice uint32

func newDice(p points, i uint32, column int) dice {
	return dice(mix(uint64(p.key[0])<<32 | uint64(i) ^ uint64(p.key[1])<<7 ^ uint64(column)<<56))
}

// The steps of the counter and of its hash; the fast tracer has them too.
const (
	dieStep  = 0x9e3779b9
	dieHash1 = 0x21f0aaad
	dieHash2 = 0x735a2d97
)

// roll returns the next number, uniform in [0, 1), a multiple of 2^-24.
func (d *dice) roll() float64 {
	*d += dieStep
	x := uint32(*d)
	x = (x ^ x>>16) * dieHash1
	x = (x ^ x>>15) * dieHash2
	x ^= x >> 15
	return float64(x>>8) / (1 << 24)
}
