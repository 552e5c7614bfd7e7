package filter

import (
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"
	"unicode/utf8"
)

// A broken chain: the mark » stands before the place that the error must name
// (none: the error is about the whole file), and words are what it must say:
// what was read and what is allowed.
type broken struct {
	chain string
	words []string
}

const mark = "»"

// check parses the chain and compares place and words.
func (b broken) check(t *testing.T, file string) {
	t.Helper()
	before, after, marked := strings.Cut(b.chain, mark)
	line, column := 0, 0
	if marked {
		lastLine := before[strings.LastIndex(before, "\n")+1:]
		line, column = 1+strings.Count(before, "\n"), 1+utf8.RuneCountInString(lastLine)
	}
	_, err := Parse([]byte(before+after), file)
	var e *ChainError
	if !errors.As(err, &e) {
		t.Errorf("%s\ngave %v, want a ChainError", b.chain, err)
		return
	}
	if e.File != file || e.Line != line || e.Column != column {
		t.Errorf("%s\n%v\nis at %s:%d:%d, want line %d, column %d", b.chain, err, e.File, e.Line, e.Column, line, column)
	}
	for _, w := range b.words {
		if !strings.Contains(e.Msg, w) {
			t.Errorf("%s\n%v\nlacks the words %s", b.chain, err, w)
		}
	}
	if errors.Is(err, ErrForRecording) {
		t.Errorf("%s\n%v\nis laid to a recording", b.chain, err)
	}
}

// in puts a stage's text into a chain.
func in(stage string) string { return "stages:\n  - " + stage + "\n" }

func TestBrokenChains(t *testing.T) {
	for name, group := range map[string][]broken{
		"keys":       brokenKeys,
		"values":     brokenValues,
		"frequency":  brokenFrequencies,
		"masks":      brokenMasks,
		"conditions": brokenConditions,
		"top":        brokenTop,
		"yaml":       brokenYAML,
		"given":      brokenGiven,
		"limits":     brokenLimits,
	} {
		t.Run(name, func(t *testing.T) {
			for _, b := range group {
				b.check(t, "chain.yaml")
			}
		})
	}
}

var brokenKeys = []broken{
	{"»colour: red\nstages: []", []string{`"colour"`, "name, phase, tolerance, stages, align, edges"}},
	{"»stagez: []", []string{`no key "stagez"`, "stages"}}, // before: stages are missing
	{"»name: x", []string{"lacks 'stages'"}},
	{in("highpass: {at: 70 Hz, order: 4, »slope: 2}"), []string{"stage highpass", `"slope"`, "family, at, pass, order, phase, when, channels"}},
	{in("highpass:\n      at: 70 Hz\n      order: 4\n      »slope: 2"), []string{`"slope"`}},
	{in("highpass: {»att: 70 Hz, order: 4}"), []string{`"att"`, "at, pass, order"}},
	{in("»wobble: {at: 70 Hz}"), []string{`no stage "wobble"`, "allpass, bandpass, bandstop, bell, biquads, dc, delay, fir, gain, highpass, highshelf, hum, lowpass, lowshelf, notch, replay"}},
	{in("»replay: {inverse: true}"), []string{"'curve' or 'times'"}},
	{in("replay: {curve: »riaaa}"), []string{`"riaaa"`, "riaa,"}},
	{in("replay: {curve: riaa, inverse: »yes}"), []string{`"yes"`, "true, false"}},
	{in("replay: {times: »[3180 us, 318 us, 75 us, 3 us]}"), []string{"time"}},
	{in("replay: {times: [3180 us, »318, 75 us]}"), []string{"no unit"}},
	{in("bell: {at: 1 kHz, gain: 2 dB, q: 1, matched: »maybe}"), []string{`"maybe"`}},
	{in("»hum: {mains: 50 Hz}"), []string{"lacks 'harmonics'"}},
	{in("»hum: {mains: 50 Hz, harmonics: 8}"), []string{"'width' or 'ring'"}},
	{in("hum: {mains: 50 Hz, harmonics: 8, width: »0 %}"), []string{"0 % and 100 %"}},
	{in("hum: {mains: 50 Hz, harmonics: 8, ring: »500 Hz}"), []string{"ms"}},
	{in("»größe: {at: 70 Hz}"), []string{`"größe"`}},
	{"name: Überfahrt – Fähre\nstages: [{gain: {by: 1 dB, »größe: 2}}]", []string{`"größe"`, "by"}},
	{in("»highpass: {at: 70 Hz}"), []string{"lacks 'order'", "order: 4"}},
	{in("»highpass:\n      order: 4"), []string{"lacks 'at'", "at: 70 Hz"}},
	{in("»highpass:"), []string{"lacks 'at'"}},
	{in("»highpass: {}"), []string{"lacks 'at'"}},
	{in("»dc: null"), []string{"lacks 'at'"}},
	{in("»bell: {at: 1 kHz, gain: 3 dB}"), []string{"lacks 'q' or 'width'"}},
	{in("»bell: {at: 1 kHz, q: 3}"), []string{"lacks 'gain'", "-2.5 dB"}},
	{in("»notch: {at: 1 kHz}"), []string{"lacks 'q' or 'width'"}},
	{in("»gain: {}"), []string{"lacks 'by'"}},
	{in("»fir: {}"), []string{"lacks 'taps' or 'file'"}},
	{in("»biquads: {}"), []string{"lacks 'sections' or 'file'"}},
	{in("bell: {at: 1 kHz, gain: 3 dB, q: 1, »width: 1 oct}"), []string{"'q' and 'width'", "exclude"}},
	{in("notch: {at: 1 kHz, »width: 10 Hz, q: 1}"), []string{"'q' and 'width'"}},
	{in("lowshelf: {at: 1 kHz, gain: 3 dB, q: 1, »slope: 1}"), []string{"'q' and 'slope'"}},
	{in("allpass: {at: 1 kHz, q: 1, »order: 2}"), []string{"'q' and 'order'"}},
	{in("fir: {taps: [1], »file: a.txt}"), []string{"'taps' and 'file'"}},
	{in("highpass: {at: 70 Hz, »at: 80 Hz, order: 4}"), []string{`"at"`, "twice"}},
	{in("highpass:\n      at: 70 Hz\n      order: 4\n      »at: 80 Hz"), []string{"stage highpass", "twice"}},
	{"stages: []\n»stages: []", []string{"a chain", "twice"}},
	{in("»gain: {by: 1 dB}\n    delay: {by: 1 ms}"), []string{"one name", "2 names"}},
	{in("»{gain: {by: 1 dB}, delay: {by: 1 ms}}"), []string{"2 names"}},
	{in("»{}"), []string{"0 names"}},
	{in("»highpass"), []string{`"highpass"`, "mapping"}},
	{in("»[gain]"), []string{"a list", "mapping"}},
	{in("gain: »3 dB"), []string{"stage gain", `"3 dB"`, "mapping"}},
	{in("gain: »[3 dB]"), []string{"a list", "mapping"}},
	{"stages: [{»~: {by: 1 dB}}]", []string{"empty", "words"}},
}

var brokenValues = []broken{
	{in("highpass: {at: 70 Hz, order: »0}"), []string{`"0"`, "whole number from 1 to 32"}},
	{in("highpass: {at: 70 Hz, order: »2.5}"), []string{`"2.5"`, "1 to 32"}},
	{in("highpass: {at: 70 Hz, order: »99}"), []string{`"99"`, "1 to 32"}},
	{in("highpass: {at: 70 Hz, order: »-1}"), []string{`"-1"`, "1 to 32"}},
	{in("highpass: {at: 70 Hz, order: »4 Hz}"), []string{`"4 Hz"`, "without a unit"}},
	{in("highpass: {at: 70 Hz, order: »four}"), []string{`"four"`, "number"}},
	{in("highpass: {at: 70 Hz, order: 4, family: »cauer}"), []string{`"cauer"`, "butterworth, chebyshev1", "least-squares"}},
	{in("»highpass: {at: 70 Hz, order: 4, family: elliptic, ripple: 1 dB}"), []string{"family elliptic", "'reject'"}},
	{in("highpass: {at: 70 Hz, order: 4, family: chebyshev2, reject: 40 dB, »ripple: 1 dB}"), []string{"'ripple' describes a mask"}},
	{in("highpass: {at: 70 Hz, order: 4, family: bessel, scale: »both}"), []string{`"both"`, "corner, delay"}},
	{in("highpass: {at: 70 Hz, order: 4, »depth: 30 dB}"), []string{`"depth"`}}, // only order 1 has a one-sided part
	{in("bell: {at: 1 kHz, gain: 3 dB, q: »0}"), []string{`"0"`, "above 0"}},
	{in("bell: {at: 1 kHz, gain: 3 dB, q: »-1}"), []string{`"-1"`, "above 0"}},
	{in("bell: {at: 1 kHz, gain: »3, q: 1}"), []string{`"3"`, "no unit", "dB"}},
	{in("bell: {at: 1 kHz, gain: »3 Hz, q: 1}"), []string{`unit "Hz"`, "dB"}},
	{in("bell: {at: 1 kHz, gain: »300 dB, q: 1}"), []string{`"300 dB"`, "-200 dB and 200 dB"}},
	{in("bell: {at: 1 kHz, gain: »[3 dB], q: 1}"), []string{"a list", "one value"}},
	{in("bell: {at: 1 kHz, gain: 3 dB, width: »-1 oct}"), []string{`"-1 oct"`, "above 0 oct"}},
	{in("bell: {at: 1 kHz, gain: 3 dB, width: »20 Hz}"), []string{`unit "Hz"`, "1.5 oct"}},
	{in("»lowshelf: {at: 100 Hz, gain: 12 dB, slope: 9}"), []string{"stage lowshelf", "slope of 9", "12 dB", "limit is 5.029"}},
	{in("»highshelf: {at: 100 Hz, gain: -12 dB, slope: 9}"), []string{"too steep"}},
	{in("allpass: {at: 1 kHz, order: »3}"), []string{`"3"`, "1 to 2"}},
	{in("dc: {at: 2 Hz, depth: »0 dB}"), []string{`"0 dB"`, "above 0 dB"}},
	{in("gain: {by: »1e300 dB}"), []string{`"1e300 dB"`, "200 dB"}},
	{in("gain: {by: »1e999 dB}"), []string{"out of range"}},
	{in("gain: {by: »nan dB}"), []string{`"nan dB"`}},
	{in("gain: {by: ».inf}"), []string{`".inf"`}},
	{in("gain: {»by: }"), []string{"'by' is empty"}},
	{in("gain: {»by: ~}"), []string{"'by' is empty"}},
	{in("gain: {»by}"), []string{"'by' is empty"}},
	{in("delay: {by: »-1 ms}"), []string{`"-1 ms"`, "not negative"}},
	{in("delay: {by: »3}"), []string{`"3"`, "no unit", "2 ms or 480 samples"}},
	{in("delay: {by: »3 dB}"), []string{`unit "dB"`}},
	{in("delay: {by: »1e300 samples}"), []string{"at most 16777216 samples"}},
	{in("delay: {by: »1 h}"), []string{`unit "h"`}},
	{in("delay: {by: »61 s}"), []string{"at most 60 s"}},
	{in("gain: {by: 1 dB, phase: »mixed}"), []string{`"mixed"`, "linear, minimum, iir, zero, given"}},
}

var brokenFrequencies = []broken{
	{in("highpass: {at: »70, order: 4}"), []string{`"70" has no unit`, "70 Hz or 3.2 kHz"}},
	{in("highpass: {at: »70 dB, order: 4}"), []string{`unit "dB"`, "Hz"}},
	{in("highpass: {at: »70 hz, order: 4}"), []string{`unit "hz"`, "Hz"}},
	{in("highpass: {at: »Hz, order: 4}"), []string{`"Hz" is not a number`}},
	{in("highpass: {at: »-70 Hz, order: 4}"), []string{`"-70 Hz"`, "above 0 Hz"}},
	{in("highpass: {at: »0 kHz, order: 4}"), []string{`"0 kHz"`, "above 0 Hz"}},
	{in("highpass: {at: »1e308 Hz, order: 4}"), []string{"no recording's rate"}},
	{in("highpass: {at: »[70 Hz], order: 4}"), []string{"a list", "one value"}},
	{in("highpass: {at: »{hz: 70}, order: 4}"), []string{"a mapping", "one value"}},
	{in("bandpass: {at: »70 Hz, order: 4}"), []string{`"70 Hz"`, "a list such as [300 Hz, 3400 Hz]"}},
	{in("bandpass: {at: »[300 Hz], order: 4}"), []string{"a list of 1", "two edges"}},
	{in("bandpass: {at: »[1 Hz, 2 Hz, 3 Hz], order: 4}"), []string{"a list of 3", "two edges"}},
	{in("bandpass: {at: [300 Hz, »3400], order: 4}"), []string{`"3400" has no unit`}},
	{in("bandpass: {at: »[3400 Hz, 300 Hz], order: 4}"), []string{"3400 Hz to 300 Hz", "lower edge comes first"}},
	{in("bandstop: {at: »[300 Hz, 300 Hz], order: 4}"), []string{"lower edge comes first"}},
	{in("bandstop:\n      order: 4\n      at:\n        »- 300 Hz\n        - 200 Hz"), []string{"lower edge comes first"}},
}

var brokenMasks = []broken{
	{in("»lowpass: {pass: 12 kHz, stop: 14 kHz, reject: 80 dB}"), []string{"order above 32", "elliptic (order"}},
	{in("lowpass: {at: 12 kHz, order: 4, »stop: 14 kHz}"), []string{"'stop' describes a mask", "'pass'"}},
	{in("lowpass: {»pass: 12 kHz, at: 13 kHz, stop: 14 kHz, reject: 80 dB}"), []string{"exclude each other"}},
	{in("»lowpass: {pass: 12 kHz, stop: 14 kHz, family: kaiser}"), []string{"lacks 'reject'", "80 dB"}},
	{in("»lowpass: {pass: 12 kHz, reject: 80 dB, family: kaiser}"), []string{"lacks 'stop'"}},
	{in("»lowpass: {reject: 80 dB, family: kaiser}"), []string{"lacks 'pass' or 'at'"}},
	{in("lowpass: {pass: 12 kHz, stop: 14 kHz, reject: 80 dB, family: kaiser, »order: 3}"), []string{"of family kaiser", `"order"`}},
	{in("lowpass: {pass: 12 kHz, stop: 14 kHz, »at: 13 kHz, reject: 80 dB, family: kaiser}"), []string{"'pass' and 'at'", "exclude"}},
	{in("»lowpass: {pass: 14 kHz, stop: 12 kHz, reject: 80 dB, family: kaiser}"), []string{"pass edge 14000 Hz must lie below the stop edge 12000 Hz"}},
	{in("»highpass: {pass: 60 Hz, stop: 90 Hz, reject: 80 dB, family: kaiser}"), []string{"stop edge 90 Hz must lie below the pass edge 60 Hz"}},
	{in("»bandpass: {pass: [300 Hz, 3 kHz], stop: [200 Hz, 2.4 kHz], reject: 40 dB, family: kaiser}"), []string{"pass edge 3000 Hz", "stop edge 2400 Hz"}},
	{in("»lowpass: {pass: 12 kHz, stop: 14 kHz, ripple: 1 dB, reject: 0.5 dB, family: kaiser}"), []string{"rejection of 0.5 dB", "ripple of 1 dB"}},
	{in("lowpass: {pass: 12 kHz, stop: 14 kHz, ripple: »0 dB, reject: 60 dB, family: kaiser}"), []string{`"0 dB"`, "above 0 dB"}},
	{in("lowpass: {pass: 12 kHz, stop: 14 kHz, reject: »-60 dB, family: kaiser}"), []string{`"-60 dB"`, "above 0 dB"}},
	{in("lowpass: {at: 12 kHz, width: »24 kHz, reject: 40 dB, family: kaiser}"), []string{"24000 Hz", "below 0 Hz"}},
	{in("»bandpass: {at: [300 Hz, 400 Hz], width: 200 Hz, reject: 40 dB, family: kaiser}"), []string{"lower edge 400 Hz is not below"}},
}

var brokenConditions = []broken{
	{in("gain: {by: 3 dB, when: »rate}"), []string{`"rate"`, "rate >= 32 kHz"}},
	{in("gain: {by: 3 dB, when: »rate >= 32}"), []string{`"32" has no unit`}},
	{in("gain: {by: 3 dB, when: »rate => 32 kHz}"), []string{`"rate => 32 kHz"`, "rate >= 32 kHz"}},
	{in("gain: {by: 3 dB, when: »rate = 32 kHz}"), []string{"rate >= 32 kHz"}},
	{in("gain: {by: 3 dB, when: »rates > 32 kHz}"), []string{"rate >= 32 kHz"}},
	{in("gain: {by: 3 dB, when: »length > 3 s}"), []string{"rate >= 32 kHz"}},
	{in("gain: {by: 3 dB, when: »rate > -1 Hz}"), []string{"above 0 Hz"}},
	{in("gain: {by: 3 dB, when: »[rate > 1 Hz]}"), []string{"a list", "one value"}},
	{in("gain: {by: 3 dB, »when: }"), []string{"'when' is empty"}},
	{in("gain: {by: 3 dB, channels: [»0]}"), []string{`"0"`, "from 1"}},
	{in("gain: {by: 3 dB, channels: [1, »1.5]}"), []string{`"1.5"`, "whole number"}},
	{in("gain: {by: 3 dB, channels: »[]}"), []string{"empty list", "leave it out for all"}},
	{in("gain: {by: 3 dB, channels: »all}"), []string{`"all"`, "a list such as [1, 2]"}},
	{in("gain: {by: 3 dB, channels: »1}"), []string{`"1"`, "a list such as [1, 2]"}},
	{in("gain: {by: 3 dB, channels: [2, 1, »2]}"), []string{"channel 2 twice"}},
}

var brokenTop = []broken{
	{"stages: []\nphase: »mixed", []string{`"mixed"`, "linear, minimum, iir, zero, given"}},
	{"stages: []\nphase: »Linear", []string{`"Linear"`, "linear"}},
	{"stages: []\n»phase:", []string{"'phase' is empty"}},
	{"stages: []\ntolerance: »0 dB", []string{`"0 dB"`, "above 0 dB"}},
	{"stages: []\ntolerance: »0.1", []string{"no unit"}},
	{"stages: []\ntolerance: »4 dB", []string{"4 dB", "at most 3 dB"}},
	{"stages: []\nedges: »mirrored", []string{`"mirrored"`, "silence, hold, mirror"}},
	{"stages: []\nedges: »holds", []string{`"holds"`, "silence, hold, mirror"}},
	{"stages: []\nedges: »[hold]", []string{"a list", "one value"}},
	{"stages: []\nalign: »sideways", []string{`"sideways"`, "auto, centroid, none"}},
	{"stages: []\nalign: »3 ms", []string{`"3 ms"`, "whole number of samples"}},
	{"stages: []\nalign: »3.5", []string{`"3.5"`, "whole number of samples"}},
	{"stages: []\nalign: »1e300", []string{`"1e300"`, "up to 16777216"}},
	{"stages: []\nalign: »[]", []string{"a list"}},
	{"stages: []\nalign: {to: none, fraction: »true}", []string{"to: auto or to: centroid"}},
	{"stages: []\nalign: {to: 12, fraction: »true}", []string{"to: auto or to: centroid"}},
	{"stages: []\nalign: {to: auto, fraction: »maybe}", []string{`"maybe"`, "true, false"}},
	{"stages: []\nalign: »{fraction: true}", []string{"lacks 'to'"}},
	{"stages: []\nalign: {to: auto, »by: 1}", []string{`"by"`, "to, fraction"}},
	{"stages: []\n»name:", []string{"'name' is empty"}},
	{"stages: []\nname: »[a]", []string{"a list", "one value"}},
	{"»stages:", []string{"'stages' is empty"}},
	{"stages: »gain", []string{`"gain"`, "must be a list"}},
	{"stages: »{gain: {by: 3 dB}}", []string{"a mapping", "must be a list"}},
	{"stages:\n  »gain: {by: 3 dB}", []string{"a mapping", "must be a list"}},
}

var brokenYAML = []broken{
	{"", []string{"empty", "'stages'"}},
	{"# nothing\n", []string{"empty"}},
	{"---\n", []string{"empty"}},
	{"»hello", []string{`"hello"`, "mapping"}},
	{"»[]", []string{"a list", "mapping"}},
	{"»null", []string{"lacks 'stages'"}},
	{"stages: »[", []string{"not YAML here"}},
	{"stages: »{", []string{"not YAML here"}},
	{"stages: »]", []string{"not YAML here"}},
	{"stages: »\"abc", []string{"not YAML here"}},
	{"name: b»: c", []string{"second ':'"}},
	{"stages:\n  - highpass: at»: 70 Hz\n", []string{"second ':'", "braces"}},
	{"stages:\n»\t- gain: {by: 1 dB}", []string{"not YAML here"}},
	{"stages:\n  - gain: {by: 1 dB}\n »- gain: {by: 1 dB}", []string{"not YAML here"}},
	{"---\nstages: []\n»---\nstages: []", []string{"second YAML document"}},
	{"stages: []\n»---\n", []string{"second YAML document"}},
	{"stages: []\n...\n»name: x", []string{"second YAML document"}},
	{"stages: »&x []", []string{"an anchor", `"&"`, "quotes"}},
	{"»&a stages: []", []string{"an anchor"}},
	{"stages: »*x", []string{"an alias"}},
	{"stages: »!!seq []", []string{"a tag"}},
	{"stages: []\nname: »!foo bar", []string{"a tag"}},
	{"»<<: {stages: []}", []string{"a merge key"}},
	{"»? stages\n: []", []string{"an explicit key"}},
	{"»%YAML 1.2\n---\nstages: []", []string{"a directive"}},
	{"stages: " + strings.Repeat("[", 16) + "»[", []string{"nested deeper"}},
	{"stages:\n  " + strings.Repeat("- ", 63) + "»- x", []string{"nested deeper"}},
	{"stages: []\n»# caf\xe9\n", []string{"not UTF-8"}},
	{"»\xff\xfes\x00t\x00", []string{"not UTF-8"}},
	{strings.Repeat("a:\n", 10000) + "a»:\n", []string{"more than 10000 keys"}},
	{"name: " + strings.Repeat("x", maxText), []string{"longer than the 1048576 bytes"}},
}

var brokenGiven = []broken{
	{in("»fir: {taps: []}"), []string{"no taps"}},
	{in("»fir: {taps: [0, 0]}"), []string{"0 only"}},
	{in("»fir: {taps: [1, 1e300]}"), []string{"1e+10"}},
	{in("fir: {taps: »1}"), []string{`"1"`, "a list such as [0.25, 0.5, 0.25]"}},
	{in("fir: {taps: [1, ».nan]}"), []string{`".nan"`, "finite number"}},
	{in("fir: {taps: [1, »-.inf]}"), []string{`"-.inf"`, "finite number"}},
	{in("fir: {taps: [1, »inf]}"), []string{`"inf"`, "finite number"}},
	{in("fir: {taps: [1, »1e999]}"), []string{`"1e999"`, "finite number"}},
	{in("fir: {taps: [1, »0x10]}"), []string{`"0x10"`}},
	{in("fir: {taps: [1, »half]}"), []string{`"half"`}},
	{in("fir: {taps: [1, »[2]]}"), []string{"a list", "one value"}},
	{in("fir: {file: »\"\"}"), []string{"empty text"}},
	{in("fir: {file: »[a.txt]}"), []string{"a list", "one value"}},
	{in("fir: {taps: [1,», 2]}"), []string{"before this comma"}},
	{in("»biquads: {sections: []}"), []string{"no sections"}},
	{in("biquads: {sections: [»1, 0, 0, 1, 0, 0]}"), []string{`"1"`, "a list such as [["}},
	{in("biquads: {sections: [»[1, 0, 0, 1, 0]]}"), []string{"section 1", "has 5 numbers", "b0 b1 b2 a0 a1 a2"}},
	{in("biquads: {sections: [»[1, 0, 0, 0, 0, 0]]}"), []string{"a0 of 0"}},
	{in("biquads: {sections: [»[1, 0, 0, 1e-320, 0, 0]]}"), []string{"1e+10"}},
	{in("biquads:\n      sections:\n        - [1, 0, 0, 1, 0, 0]\n        - »[1, 0, 0, 1, -2, 1]"), []string{"section 2", "unstable", "signs of a1 and a2"}},
	{in("biquads: {sections: [»[1, 0, 0, 1, -1.99, 0.99999999]]}"), []string{"too near the unit circle"}},
	{in("biquads: {file: »sections.wav}"), []string{`"sections.wav"`, "text or JSON"}},
}

// Coefficient files: the error is at the key's value and names the file, and
// the line where there is one.
func TestBrokenCoefficientFiles(t *testing.T) {
	dir := t.TempDir()
	stereo := wavFile(2, []float64{1, 0, 0.5, 0.5})
	nan := wavFile(1, []float64{1, math.NaN()})
	for _, c := range []struct {
		stage, file, content string
		words                []string
	}{
		{"fir", "absent.txt", "", []string{"no such file"}},
		{"fir", "sub", "", []string{"directory"}},
		{"fir", "words.txt", "0.25\n# remark\n0.5 x\n", []string{`words.txt:3: "x" is not a finite number`}},
		{"fir", "nan.txt", "0.25\nnan\n", []string{`nan.txt:2: "nan"`}},
		{"fir", "huge.txt", "1e999", []string{`huge.txt:1: "1e999"`}},
		{"biquads", "five.txt", "# b and a\r\n1 0 0 1 0 0\r\n1 0 0 1 0\r\n", []string{"five.txt:3:", "5 numbers", "b0 b1 b2 a0 a1 a2"}},
		{"biquads", "unstable.txt", "1, 0, 0, 1, 0, 1.5", []string{"unstable.txt:1:", "unstable"}},
		{"fir", "string.json", "[0.5,\n\"x\"]", []string{"string.json:2: string", "[0.25, 0.5, 0.25]"}},
		{"fir", "inside.json", "{\"rate\": 1,\n\"taps\": [1,\n[2]]}", []string{"inside.json:3: array"}},
		{"fir", "huge.json", "[1e999]", []string{"huge.json:1:", "1e999", "out of range"}},
		{"fir", "syntax.json", "[1,\n2,,]", []string{"syntax.json:2: is not JSON"}},
		{"fir", "null.json", "[1, null]", []string{"value 2", "null"}},
		{"fir", "key.json", `{"tapz": [1]}`, []string{`no key "taps"`}},
		{"biquads", "rows.json", `{"sections": [[1,0,0,1,0,0],[1,0,0,1,0]]}`, []string{"section 2 has 5 numbers"}},
		{"biquads", "flat.json", "[1,0,0,1,0,0]", []string{"flat.json:1: number", "[["}},
		{"fir", "stereo.wav", stereo, []string{"stereo.wav", "2 channels", "has 1"}},
		{"fir", "nan.wav", nan, []string{"nan.wav"}},
		{"fir", "not.wav", "no recording", []string{"not.wav"}},
	} {
		if c.content != "" {
			writeFile(t, filepath.Join(dir, c.file), c.content)
		}
		if c.file == "sub" {
			if err := os.Mkdir(filepath.Join(dir, c.file), 0o755); err != nil {
				t.Fatal(err)
			}
		}
		broken{in(c.stage + ": {file: »" + c.file + "}"), c.words}.check(t, filepath.Join(dir, "chain.yaml"))
	}
}

// What contains nothing gives a kernel without taps, complained of at the stage.
func TestEmptyCoefficientFile(t *testing.T) {
	dir := t.TempDir()
	writeFile(t, filepath.Join(dir, "none.txt"), "# nothing\n")
	file := filepath.Join(dir, "chain.yaml")
	broken{in("»fir: {file: none.txt}"), []string{"no taps"}}.check(t, file)
	broken{in("»biquads: {file: none.txt}"), []string{"no sections"}}.check(t, file)
}
