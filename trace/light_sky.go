package trace

import (
	"fmt"
	"math"

	"github.com/go-gl/mathgl/mgl64"
	"gonum.org/v1/gonum/integrate/quad"

	"pavilight/facets"
)

// The sun of the lights that are named, as if the zenith were the eye.
const (
	usualSunElevation = 45 * facets.Degree
	usualSunAzimuth   = 30 * facets.Degree
)

// groundReflectance is the share of daylight that the ground below a sky scatters; the
// ground shows only where the zenith is not the eye. 0.2 is what solar engineers
// take (Liu & Jordan, Solar Energy 7 (1963) 53; from memory).
const groundReflectance = 0.2

const groundNote = "above a ground that scatters 0.2 of it"

const clearNote = "CIE standard clear sky of low turbidity (type 12 of ISO 15469/CIE S 011)"

// sunRadius is the half-angle over which the light of the sun is spread. The sun's own
// is 0.27°, which one backward ray in 90,000 would meet; 2.5° is the half-angle of
// the instruments that meteorologists measure direct sunlight with (WMO No. 8,
// chapter 7; from memory). Its fire is thus a little softer than true.
const sunRadius = 2.5 * facets.Degree

// leastSunElevation keeps the whole disc over the horizon.
const leastSunElevation = 5 * facets.Degree

// ClearSky returns the CIE standard clear sky of low turbidity (type 12 of ISO
// 15469/CIE S 011) for a zenith and a sun, both in the viewer's frame; the sun stands at
// least 5° over the sky's horizon. The standard's distribution leaves the disc of the sun
// out. With disc, sunlight is added in the ratio to the sky's that the IES
// gives, spread over 2.5° about the sun.
//
// Neither standard gives spectra: the sky alone has D75 (north sky), with the sun D65.
func ClearSky(zenith, sun mgl64.Vec3, disc bool) (*Light, error) {
	turned, err := zenithTo(zenith)
	if err != nil {
		return nil, fmt.Errorf("clear sky: %w", err)
	}
	length := sun.Len()
	if !(length > 0) || math.IsInf(length, 0) {
		return nil, fmt.Errorf("clear sky: sun %v is no direction; give an elevation and an azimuth", sun)
	}
	inSky := turned.Transpose().Mul3x1(sun.Mul(1 / length))
	elevation := facets.Angle(math.Asin(max(-1, min(1, inSky[2]))))
	if elevation < leastSunElevation-1e-9 {
		return nil, fmt.Errorf("clear sky: the sun stands %v over the horizon; %v is the least",
			elevation, leastSunElevation)
	}
	about := fmt.Sprintf("sun at %v elevation, %s", elevation, groundNote)
	sky := newClearSky(inSky)
	if !disc {
		return newLight("clear", clearNote+" without the sun's disc, "+about,
			"D75", newSky(sky, turned, nil))
	}
	return newLight("sun", clearNote+" with sunlight as the IES (1984) gives it, spread over 2.5° about the sun; "+
		about, "D65", newSky(sky, turned, &inSky))
}

// directToDiffuse returns how much sunlight falls on level ground under a clear sky,
// in units of the sky's own, for a sun whose elevation has the sine s: illuminances of
// 127.5 exp(-0.21/s) s and 0.8 + 15.5 √s klx.
//
// Recommended practice for the calculation of daylight availability, J. Illum. Eng.
// Soc. 13 (1984) 381.
func directToDiffuse(s float64) float64 {
	return 127.5 * math.Exp(-0.21/s) * s / (0.8 + 15.5*math.Sqrt(s))
}

// skyDistribution is the luminance of a sky by direction, in the sky's frame (+Z the
// zenith) and for directions above its horizon, relative to the zenith's.
type skyDistribution interface {
	luminance(d mgl64.Vec3) float64
}

// overcastSky is the CIE standard overcast sky. P. Moon & D. E. Spencer, Trans. Illum.
// Eng. Soc. 37 (1942) 707.
type overcastSky struct{}

func (overcastSky) luminance(d mgl64.Vec3) float64 { return (1 + 2*d[2]) / 3 }

// generalSky is a CIE standard general sky, ISO 15469/CIE S 011.
type generalSky struct {
	a, b, c, d, e float64
	sun           mgl64.Vec3 // in the sky's frame, unit
	zenith        float64    // of the product below, at the zenith
}

func newGeneralSky(a, b, c, d, e float64, sun mgl64.Vec3) generalSky {
	s := generalSky{a: a, b: b, c: c, d: d, e: e, sun: sun, zenith: 1}
	s.zenith = s.luminance(mgl64.Vec3{0, 0, 1})
	return s
}

// newClearSky is type 12 of the standard.
func newClearSky(sun mgl64.Vec3) generalSky { return newGeneralSky(-1, -0.32, 10, -3, 0.45, sun) }

// luminance is the standard's gradation over the zenith angle times its indicatrix over
// the angle from the sun.
func (s generalSky) luminance(d mgl64.Vec3) float64 {
	gradation := 1 + s.a*math.Exp(s.b/d[2])
	cosChi := max(-1, min(1, d.Dot(s.sun)))
	indicatrix := 1 + s.c*(math.Exp(s.d*math.Acos(cosChi))-math.Exp(s.d*math.Pi/2)) + s.e*cosChi*cosChi
	return gradation * indicatrix / s.zenith
}

// skyShape is a sky about a zenith, above a ground that scatters evenly.
type skyShape struct {
	distribution skyDistribution
	inSky        mgl64.Mat3 // from the viewer's frame to the sky's
	ground       float64    // luminance
	level        float64    // illuminance of level ground by the sky, over π

	sun          mgl64.Vec3 // in the sky's frame
	sunLuminance float64    // 0 without a disc
	cosRadius    float64
}

// newSky places a sky by the turn of its zenith, with the disc of a sun where one is given
// in the sky's frame.
func newSky(distribution skyDistribution, turned mgl64.Mat3, sun *mgl64.Vec3) *skyShape {
	s := &skyShape{distribution: distribution, inSky: turned.Transpose()}
	s.level = s.overSky(mgl64.Vec3{0, 0, 1})
	onGround := s.level
	if sun != nil {
		direct := s.level * directToDiffuse(sun[2])
		s.sun, s.cosRadius = *sun, math.Cos(sunRadius.Radians())
		s.sunLuminance = direct / discShare(sun[2], sunRadius)
		onGround += direct
	}
	s.ground = groundReflectance * onGround
	return s
}

func (s *skyShape) luminance(from mgl64.Vec3) float64 {
	d := s.inSky.Mul3x1(from)
	if d[2] <= 0 {
		return s.ground
	}
	l := s.distribution.luminance(d)
	if s.sunLuminance > 0 && d.Dot(s.sun) >= s.cosRadius {
		l += s.sunLuminance
	}
	return l
}

func (s *skyShape) illuminance() float64 {
	eye := s.inSky.Mul3x1(mgl64.Vec3{0, 0, 1})
	// The plane sees a share (1 + cos)/2 of sky and the rest of ground, cosine-weighted,
	// where cos is that of the angle between zenith and eye.
	e := s.overSky(eye) + s.ground*(1-eye[2])/2
	if s.sunLuminance > 0 {
		e += s.sunLuminance * discShare(eye.Dot(s.sun), sunRadius)
	}
	return e
}

// overSky integrates the sky's luminance, without the sun's disc, times the cosine to a
// normal in the sky's frame, over π. With 96 nodes by Gauss and 384 azimuths the
// error is below 1e-5 of the result.
func (s *skyShape) overSky(normal mgl64.Vec3) float64 {
	const azimuths = 384
	var ring [azimuths]mgl64.Vec2
	for i := range ring {
		sin, cos := math.Sincos(2 * math.Pi * (float64(i) + 0.5) / azimuths)
		ring[i] = mgl64.Vec2{cos, sin}
	}
	return quad.Fixed(func(zenithAngle float64) float64 {
		sin, cos := math.Sincos(zenithAngle)
		sum := 0.0
		for _, r := range ring {
			d := mgl64.Vec3{sin * r[0], sin * r[1], cos}
			if c := d.Dot(normal); c > 0 {
				sum += s.distribution.luminance(d) * c
			}
		}
		return sum * sin * 2 / azimuths
	}, 0, math.Pi/2, 96, nil, 0)
}
