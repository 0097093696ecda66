package model

import (
	"math"
	"strings"
	"testing"

	"pavilight/facets"
)

func TestParseAngle(t *testing.T) {
	for _, c := range []struct {
		text    string
		degrees float64
	}{
		{"41.8", 41.8},
		{"41,8", 41.8},
		{" 41.8° ", 41.8},
		{"41.8 deg", 41.8},
		{"41°48'", 41.8},
		{"41° 48′", 41.8},
		{"41 deg 48 min", 41.8},
		{"41deg48min", 41.8},
		{"41° 48' 36\"", 41.81},
		{"41 degrees 48 minutes 36 seconds", 41.81},
		{"41°48.6'", 41.81},
		{"0", 0},
		{"90", 90},
		{"41", 41},
	} {
		got, err := ParseAngle(c.text)
		// The arithmetic of sixtieths rounds in the last digits of a float64.
		const rounding = 1e-12
		if err != nil || math.Abs(got.Degrees()-c.degrees) > rounding {
			t.Errorf("ParseAngle(%q) = %v, %v; want %v°", c.text, got.Degrees(), err, c.degrees)
		}
	}
}

func TestParseAngleRefuses(t *testing.T) {
	for _, text := range []string{
		"", " ", "abc", "41.8.2", "41,8,2", "1e3", "0x29", "NaN", "Inf", "-41", "+41", "41°60'", "41.5°30'",
		"41'", "41' 3°", "41 48", "41° 48' 3\" 7", "360", "99999999999999999999999999", "41°48'60\"",
		strings.Repeat("9", 4000), "41 mm", "４１",
	} {
		got, err := ParseAngle(text)
		if err == nil {
			t.Errorf("ParseAngle(%q) = %v, want an error", shorten(text), got.Degrees())
		} else if len(err.Error()) > 200 {
			t.Errorf("ParseAngle(%q): message of %d bytes, want a short one", shorten(text), len(err.Error()))
		}
	}
}

func TestFormatAngle(t *testing.T) {
	for _, c := range []struct {
		degrees float64
		want    string
	}{
		{41.5, "41.50"}, {0, "0.00"}, {90, "90.00"}, {41.8125, "41.8125"}, {41.8123456789, "41.8123"}, {40.000004, "40.00"}, {34.499, "34.499"},
	} {
		if got := FormatAngle(facets.Angle(c.degrees) * facets.Degree); got != c.want {
			t.Errorf("FormatAngle(%v°) = %q, want %q", c.degrees, got, c.want)
		}
	}
}

func TestParseNumber(t *testing.T) {
	for _, c := range []struct {
		text string
		want float64
		ok   bool
	}{
		{"8.5", 8.5, true}, {"8,5 mm", 8.5, true}, {"8.5mm", 8.5, true}, {"", 0, false}, {"8.5 ct", 0, false},
		{"8 5", 0, false}, {"8.5°", 0, false}, {"-5", -5, true}, {"−5,5", -5.5, true}, {"1e3", 1000, true}, {"0x10", 0, false},
		{"inf", 0, false}, {"NaN", 0, false}, {"1e999", 0, false}, {strings.Repeat("1", 25), 0, false}, {"1.2.3", 0, false},
	} {
		got, err := ParseNumber(c.text, "mm")
		if (err == nil) != c.ok || got != c.want {
			t.Errorf("ParseNumber(%q) = %v, %v; want %v, ok %v", c.text, got, err, c.want, c.ok)
		}
	}
}
