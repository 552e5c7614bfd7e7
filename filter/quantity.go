package filter

import (
	"fmt"
	"math"
	"regexp"
	"strconv"
	"strings"
)

// dimension is what a quantity measures, with the units it may be written in.
type dimension struct {
	name    string
	units   map[string]float64 // factor to Hz, dB, seconds, octaves
	example string
}

var (
	frequency = dimension{"frequency", map[string]float64{"Hz": 1, "kHz": 1e3}, "70 Hz or 3.2 kHz"}
	level     = dimension{"level", map[string]float64{"dB": 1}, "-2.5 dB"}
	duration  = dimension{"duration", map[string]float64{"s": 1, "ms": 1e-3, "us": 1e-6}, "2 ms or 480 samples"}
	octaves   = dimension{"bandwidth", map[string]float64{"oct": 1}, "1.5 oct"}
)

// What a chain may ask for at most: beyond it nothing is filtered, only memory
// or range used up.
const (
	maxHz      = 1 << 31 // half the highest rate that a recording's header can hold
	maxDB      = 200     // either way; 32-bit samples span 193 dB
	maxOctaves = 20      // twice the range of hearing
	maxQ       = 1e6
	maxShift   = 1 << 24 // samples of delay or alignment: 87 s at 192 kHz
	maxSeconds = 60
)

var quantityForm = regexp.MustCompile(`^([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)\s*(.*)$`)

// splitQuantity cuts "3.2 kHz" into 3.2 and "kHz". The number is finite.
func splitQuantity(text string) (number float64, unit string, err error) {
	m := quantityForm.FindStringSubmatch(strings.TrimSpace(text))
	if m == nil {
		return 0, "", fmt.Errorf("%s is not a number with a unit", quote(text))
	}
	number, err = strconv.ParseFloat(m[1], 64)
	if err != nil {
		return 0, "", fmt.Errorf("%s is out of range", quote(text))
	}
	return number, m[2], nil
}

// parse reads a quantity of this dimension.
func (d dimension) parse(text string) (float64, error) {
	number, unit, err := splitQuantity(text)
	if err != nil {
		return 0, fmt.Errorf("%w; write a %s such as %s", err, d.name, d.example)
	}
	factor, ok := d.units[unit]
	switch {
	case ok:
		return number * factor, nil
	case strings.Contains(text, ","):
		return 0, fmt.Errorf("%s has a comma; write a %s with a point, such as %s", quote(text), d.name, d.example)
	case unit == "":
		return 0, fmt.Errorf("%s has no unit; write a %s such as %s", quote(text), d.name, d.example)
	default:
		return 0, fmt.Errorf("%s has the unit %s; a %s is written such as %s", quote(text), quote(unit), d.name, d.example)
	}
}

func isWhole(v, lo, hi float64) bool { return v == math.Trunc(v) && v >= lo && v <= hi }

// checkHz refuses what is no frequency that any recording could hold.
func checkHz(hz float64) error {
	switch {
	case !(hz > 0):
		return fmt.Errorf("a frequency is above 0 Hz")
	case !(hz < maxHz):
		return fmt.Errorf("no recording's rate holds a frequency of %d Hz or more", maxHz)
	}
	return nil
}

// Span is a stretch of time, in seconds or in samples as it was written.
type Span struct {
	value   float64
	samples bool
}

// Samples is the span at a sample rate, fractions kept.
func (s Span) Samples(rate float64) float64 {
	if s.samples {
		return s.value
	}
	return s.value * rate
}

func parseSpan(text string) (Span, error) {
	if number, unit, err := splitQuantity(text); err == nil && (unit == "samples" || unit == "sample") {
		return Span{number, true}, nil
	}
	seconds, err := duration.parse(text)
	return Span{value: seconds}, err
}

// check refuses a delay that is negative or would hold a recording in memory.
func (s Span) check() error {
	most, unit := float64(maxSeconds), "s"
	if s.samples {
		most, unit = maxShift, "samples"
	}
	switch {
	case s.value < 0:
		return fmt.Errorf("a delay is not negative (to move a recording earlier, give 'align' a number of samples)")
	case !(s.value <= most):
		return fmt.Errorf("a delay is at most %.0f %s", most, unit)
	}
	return nil
}

// ParseFrequency reads a frequency in Hz from text such as "48 kHz", or, as
// command lines have it, "48k" or "44100"; a bare number under 1000 is more
// likely one of kHz, so it needs its unit. The error says what was read; the
// sign is the caller's to check.
func ParseFrequency(text string) (float64, error) {
	number, unit, err := splitQuantity(text)
	if err == nil {
		switch unit {
		case "":
			if number > 0 && number < 1000 {
				return 0, fmt.Errorf("%q has no unit; write %gk or %g Hz", text, number, number)
			}
			return number, nil
		case "k":
			return number * 1e3, nil
		}
	}
	return frequency.parse(text)
}

// ParseLevel reads a level in dB from text such as "3 dB" or "3dB".
func ParseLevel(text string) (float64, error) { return level.parse(text) }
