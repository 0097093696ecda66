package trace

import "pavilight/gems"

// primarySpectra are the spectra, relative to D65, that stand for the red, the green and
// the blue primary of sRGB, from 400 to 700 nm in steps of 5 nm. Where a picture's red,
// green and blue are equal, the spectrum is that of D65 itself, since the three add
// up to 1; each is between 0 and 1 and gives the chromaticity of its primary in front of
// D65. Of all such spectra these have the least sum of squared steps. Many spectra have
// the same colour, so a panorama's are a stated choice, no measurement.
//
// Worked out for this project after the idea of I. Mallett & C. Yuksel, Spectral primary
// decomposition for rendering with sRGB reflectance, Eurographics Symposium on
// Rendering (2019). It is never written to.
var primarySpectra = [3][tracedSteps + 1]float64{
	{ // red
		0.0282357, 0.0282053, 0.0280855, 0.0278024, 0.027242, 0.0262615, 0.0247794, 0.022886, 0.020909,
		0.0195076, 0.0197013, 0.0228938, 0.0281762, 0.022603, 0.0116064, 0.0017393, 0, 0, 0, 0, 0, 0, 0, 0,
		0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0.0288743, 0.1024126, 0.2089445, 0.3364736, 0.4730501, 0.607973,
		0.7319909, 0.8375206, 0.9189465, 0.9728641, 0.9994022, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1, 1,
		1,
	},
	{ // green
		0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0.0051873, 0.0452874, 0.1133941, 0.200542, 0.2974087,
		0.4015757, 0.5087578, 0.6145718, 0.7150421, 0.8062458, 0.8841482, 0.9447288, 0.9843271, 1, 1, 1, 1,
		1, 1, 1, 0.9991135, 0.9797902, 0.9309027, 0.8480766, 0.7407231, 0.6184934, 0.490933, 0.3665656,
		0.2527883, 0.155643, 0.0795532, 0.0271359, 0.0005978, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0,
		0,
	},
	{ // blue
		0.9717643, 0.9717947, 0.9719145, 0.9721976, 0.972758, 0.9737385, 0.9752206, 0.977114, 0.979091,
		0.9804924, 0.9802987, 0.9771062, 0.9666365, 0.9321096, 0.8749995, 0.7977187, 0.7025913, 0.5984243,
		0.4912422, 0.3854282, 0.2849579, 0.1937542, 0.1158518, 0.0552712, 0.0156729, 0, 0, 0, 0, 0, 0, 0,
		0.0008865, 0.0202098, 0.0402229, 0.0495108, 0.0503323, 0.045033, 0.036017, 0.0254614, 0.0152207,
		0.0068364, 0.0015004, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0, 0,
	},
}

// primariesAt returns the three spectra at w, straight between steps, 0 outside 400 to
// 700 nm.
func primariesAt(w gems.Wavelength) (rgb [3]float64) {
	x := float64(w-tracedLo) / tableStep
	if !(x >= 0 && x <= float64(tracedSteps)) {
		return rgb
	}
	i := min(int(x), tracedSteps-1)
	t := x - float64(i)
	for k := range rgb {
		rgb[k] = primarySpectra[k][i] + t*(primarySpectra[k][i+1]-primarySpectra[k][i])
	}
	return rgb
}

// primaryLuminances returns the luminance of each primary in front of an illuminant.
func primaryLuminances(s *Illuminant) (y [3]float64) {
	for k := range y {
		lit := func(w gems.Wavelength) float64 { return primariesAt(w)[k] * s.At(w) }
		y[k] = tristimulus(tracedFrom, tracedTo, lit)[1]
	}
	return y
}
