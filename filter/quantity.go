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
	units   map[string]float64 // factor to the first unit of example
	example string
}

var (
	frequency = dimension{"frequency", map[string]float64{"Hz": 1, "kHz": 1e3}, "70 Hz or 3.2 kHz"}
	level     = dimension{"level", map[string]float64{"dB": 1}, "-2.5 dB"}
	duration  = dimension{"duration", map[string]float64{"s": 1, "ms": 1e-3, "us": 1e-6}, "2 ms or 480 samples"}
	octaves   = dimension{"bandwidth", map[string]float64{"oct": 1}, "1.5 oct"}
)

var quantityForm = regexp.MustCompile(`^([+-]?(?:[0-9]+\.?[0-9]*|\.[0-9]+)(?:[eE][+-]?[0-9]+)?)\s*(.*)$`)

// splitQuantity cuts "3.2 kHz" into 3.2 and "kHz".
func splitQuantity(text string) (number float64, unit string, err error) {
	m := quantityForm.FindStringSubmatch(strings.TrimSpace(text))
	if m == nil {
		return 0, "", fmt.Errorf("%q is not a number with a unit", text)
	}
	number, err = strconv.ParseFloat(m[1], 64)
	if err != nil || math.IsInf(number, 0) {
		return 0, "", fmt.Errorf("%q is out of range", text)
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
	case unit == "":
		return 0, fmt.Errorf("%q has no unit; write a %s such as %s", text, d.name, d.example)
	default:
		return 0, fmt.Errorf("%q has the unit %q; a %s is written such as %s", text, unit, d.name, d.example)
	}
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

// ParseFrequency reads a frequency in Hz from text such as "48 kHz", or, as
// command lines have it, "48k" or "44100".
func ParseFrequency(text string) (float64, error) {
	number, unit, err := splitQuantity(text)
	if err == nil {
		switch unit {
		case "":
			return number, nil
		case "k":
			return number * 1e3, nil
		}
	}
	return frequency.parse(text)
}

// ParseLevel reads a level in dB from text such as "3 dB" or "3dB".
func ParseLevel(text string) (float64, error) { return level.parse(text) }
