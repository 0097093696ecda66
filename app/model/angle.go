package model

import (
	"math"
	"strconv"
	"strings"
	"unicode"

	"pavilight/app/words"
	"pavilight/facets"
)

// ParseAngle reads an angle as people write it: 41.8, 41,8, 41.8°, 41°48',
// 41 deg 48 min, 41° 48' 30". Degrees must be whole where minutes follow, and
// minutes whole where seconds follow. The error says what was expected.
func ParseAngle(text string) (facets.Angle, error) {
	const example words.Key = "write it as 41.8, 41,8 or 41°48'"
	parts, err := numbersWithUnits(text)
	if err != nil {
		return 0, words.Errorf("%v; %s", err, example)
	}
	if len(parts) == 0 {
		return 0, words.Errorf("no angle given; %s", example)
	}
	degrees := 0.0
	scale := 1.0 // degrees in one unit of the part
	for i, p := range parts {
		if got, want := p.unit, angleUnits[i]; got != want && !(got == "" && i == 0) {
			return 0, words.Errorf("%q is not an angle; %s", strings.TrimSpace(text), example)
		}
		if i > 0 && parts[i-1].value != math.Trunc(parts[i-1].value) {
			return 0, words.Errorf("a fraction of %s cannot be followed by %s; %s",
				angleWords[i-1], angleWords[i], example)
		}
		if i > 0 && p.value >= 60 {
			return 0, words.Errorf("%s go from 0 to 59; %s", angleWords[i], example)
		}
		degrees += p.value * scale
		scale /= 60
	}
	if degrees >= 360 {
		return 0, words.Errorf("an angle of a full turn or more; %s", example)
	}
	return facets.Angle(degrees) * facets.Degree, nil
}

// FormatAngle writes an angle in degrees with the two decimals that a cutter
// sets, and more, up to four, where the angle has them: a scan's have many.
func FormatAngle(a facets.Angle) string {
	deg := a.Degrees()
	const most, written = 4, 5e-5 // half of the last decimal that is ever written
	for decimals := 2; decimals < most; decimals++ {
		text := strconv.FormatFloat(deg, 'f', decimals, 64)
		if back, _ := strconv.ParseFloat(text, 64); math.Abs(back-deg) < written {
			return text
		}
	}
	return strconv.FormatFloat(deg, 'f', most, 64)
}

// ParseNumber reads a plain number, which may be negative, with a point or a comma before
// its decimals and with the unit after it or without.
func ParseNumber(text, unit string) (float64, error) {
	text = strings.TrimSpace(strings.TrimSuffix(strings.TrimSpace(text), unit))
	plain := strings.NewReplacer(",", ".", "−", "-", "–", "-").Replace(text)
	const letters, longest = "0123456789.+-eE", 24
	v, err := strconv.ParseFloat(plain, 64)
	if err != nil || strings.Trim(plain, letters) != "" || len(plain) > longest {
		return 0, words.Errorf("%q is not a number; write it as 8.5 or 8,5", shorten(text))
	}
	return v, nil
}

var (
	angleUnits = [...]string{"°", "'", `"`, ""}
	angleWords = [...]words.Key{"degrees", "minutes", "seconds", ""}
)

// quantity is one number and the unit that follows it, in the short form.
type quantity struct {
	value float64
	unit  string
}

// numbersWithUnits splits text into at most three numbers with their units.
func numbersWithUnits(text string) ([]quantity, error) {
	var parts []quantity
	rest := strings.TrimSpace(text)
	for rest != "" {
		end := strings.IndexFunc(rest, func(r rune) bool { return !unicode.IsDigit(r) && r != '.' && r != ',' })
		if end < 0 {
			end = len(rest)
		}
		digits := strings.ReplaceAll(rest[:end], ",", ".")
		value, err := strconv.ParseFloat(digits, 64)
		if err != nil || len(digits) > 24 || len(parts) == 3 {
			return nil, words.Errorf("%q is not a number", shorten(strings.TrimSpace(text)))
		}
		rest = strings.TrimSpace(rest[end:])
		end = strings.IndexFunc(rest, unicode.IsDigit)
		if end < 0 {
			end = len(rest)
		}
		unit, known := unitOf(strings.TrimSpace(rest[:end]))
		if !known {
			return nil, words.Errorf("%q is not a number", shorten(strings.TrimSpace(text)))
		}
		parts = append(parts, quantity{value, unit})
		rest = rest[end:]
	}
	return parts, nil
}

// unitOf returns the short form of a unit of angle, "" for none.
func unitOf(word string) (string, bool) {
	switch strings.ToLower(strings.TrimSuffix(word, ".")) {
	case "":
		return "", true
	case "°", "º", "deg", "degree", "degrees":
		return "°", true
	case "'", "′", "’", "min", "minute", "minutes":
		return "'", true
	case `"`, "″", "”", "''", "′′", "sec", "second", "seconds":
		return `"`, true
	}
	return "", false
}

// shorten keeps what was typed or pasted short enough to be shown in a message.
func shorten(text string) string {
	const most = 40
	if r := []rune(text); len(r) > most {
		return string(r[:most]) + "…"
	}
	return text
}
