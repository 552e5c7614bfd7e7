package filter

import (
	"bytes"
	"encoding/binary"
	"errors"
	"math"
	"os"
	"path/filepath"
	"strings"
	"testing"

	"fettle/filter/design"
	"fettle/filter/response"

	"github.com/google/go-cmp/cmp"
)

func writeFile(t testing.TB, path, content string) {
	t.Helper()
	if err := os.WriteFile(path, []byte(content), 0o644); err != nil {
		t.Fatal(err)
	}
}

// wavFile is a recording of 64-bit floats at 48 kHz, laid out as RIFF/WAVE
// has it (Microsoft and IBM, Multimedia Programming Interface and Data
// Specifications 1.0, 1991; format 3 is IEEE float).
func wavFile(channels int, samples []float64) string {
	var b bytes.Buffer
	put := func(values ...any) {
		for _, v := range values {
			if text, ok := v.(string); ok {
				v = []byte(text)
			}
			if err := binary.Write(&b, binary.LittleEndian, v); err != nil {
				panic(err)
			}
		}
	}
	size := uint32(8 * len(samples))
	put("RIFF", 36+size, "WAVE")
	put("fmt ", uint32(16), uint16(3), uint16(channels), uint32(48000), uint32(48000*8*channels), uint16(8*channels), uint16(64))
	put("data", size, samples)
	return b.String()
}

// section, two and row turn what design gives into what a stage holds.
func section(s response.Section, err error) []response.Section {
	if err != nil {
		panic(err)
	}
	return []response.Section{s}
}

func butterworth(k design.Kind, order int, edges ...float64) []response.Section {
	zpk, err := design.Butterworth(k, order, 48000, edges...)
	if err != nil {
		panic(err)
	}
	return zpk.Sections()
}

// Every recursive stage, in flow and in block style, has the sections of its
// design at 48 kHz.
func TestSectionsOfStages(t *testing.T) {
	for _, c := range []struct {
		flow, block string
		want        []response.Section
	}{
		{"highpass: {at: 70 Hz, order: 4}", "highpass:\n      at: 70 Hz\n      order: 4", butterworth(design.Highpass, 4, 70)},
		{"highpass: {at: 70 Hz, order: 1, depth: 30 dB}", "highpass:\n      order: 1\n      depth: 30 dB\n      at: 0.07 kHz", butterworth(design.Highpass, 1, 70)},
		{"lowpass: {at: 3.2 kHz, order: 3, family: butterworth}", "lowpass:\n      family: butterworth\n      at: 3200 Hz\n      order: 3", butterworth(design.Lowpass, 3, 3200)},
		{"bandpass: {at: [300 Hz, 3.4 kHz], order: 2}", "bandpass:\n      at:\n        - 300 Hz\n        - 3400 Hz\n      order: 2", butterworth(design.Bandpass, 2, 300, 3400)},
		{"bandstop: {at: [45 Hz, 55 Hz], order: 1}", "bandstop:\n      at: [45 Hz, 55 Hz]\n      order: 1", butterworth(design.Bandstop, 1, 45, 55)},
		{"bell: {at: 3.2 kHz, gain: -2.5 dB, q: 1.1}", "bell:\n      at: 3200Hz\n      gain: -2.5dB\n      q: 1.1", section(design.Bell(48000, 3200, -2.5, 1.1))},
		{"lowshelf: {at: 200 Hz, gain: 3 dB, q: 0.6}", "lowshelf:\n      q: .6\n      at: 2e2 Hz\n      gain: +3 dB", section(design.LowShelf(48000, 200, 3, 0.6))},
		{"lowshelf: {at: 200 Hz, gain: 3 dB}", "lowshelf:\n      at: 200 Hz\n      gain: 3 dB\n      slope: 1", section(design.LowShelfSlope(48000, 200, 3, 1))},
		{"highshelf: {at: 6 kHz, gain: -2 dB, slope: 0.5}", "highshelf:\n      at: \"6 kHz\"\n      gain: '-2 dB'\n      slope: 5e-1", section(design.HighShelfSlope(48000, 6000, -2, 0.5))},
		{"highshelf: {at: 6 kHz, gain: -2 dB, q: 0.9}", "highshelf:\n      at: 6 kHz\n      gain: -2 dB\n      q: 0.9", section(design.HighShelf(48000, 6000, -2, 0.9))},
		{"notch: {at: 50 Hz, width: 4 Hz}", "notch:\n      at: 50 Hz\n      q: 12.5", section(design.NotchWidth(48000, 50, 4))},
		{"allpass: {at: 500 Hz}", "allpass:\n      at: 500 Hz\n      order: 1", section(design.AllPassFirst(48000, 500))},
		{"allpass: {at: 500 Hz, order: 2}", "allpass:\n      at: 500 Hz\n      q: 0.7071067811865476", section(design.AllPass(48000, 500, math.Sqrt2/2))},
		{"dc: {at: 2 Hz}", "dc:\n      at: 2 Hz # depth is 40 dB", section(design.DC(48000, 2))},
		{"biquads: {sections: [[1, 2, 3, 2, -1, 0.5]]}", "biquads:\n      sections:\n        - [1, 2, 3, 2, -1, 0.5]", []response.Section{{B0: 0.5, B1: 1, B2: 1.5, A1: -0.5, A2: 0.25}}},
	} {
		for _, stage := range []string{c.flow, c.block} {
			if diff := cmp.Diff(plan{gain: 1, sections: c.want}, coefficientsOf(planned(t, in(stage), 48000)), cmp.AllowUnexported(plan{})); diff != "" {
				t.Errorf("%s: (-want +got)\n%s", stage, diff)
			}
		}
	}
}

func coefficientsOf(p plan) plan {
	p.cusps, p.half = nil, nil
	return p
}

// planned is the last stage of a chain at a rate.
func planned(t testing.TB, text string, rate float64) plan {
	t.Helper()
	c := parsed(t, text)
	p, err := c.Stages[len(c.Stages)-1].plan(rate)
	if err != nil {
		t.Fatal(err)
	}
	return p
}

// Bandwidth in octaves, q and slope against the formulas of the Audio EQ
// Cookbook (Bristow-Johnson, W3C Note 2021), written out: 1e-12 is a thousand
// roundings of coefficients near 1.
func TestCookbookParameters(t *testing.T) {
	const rate, f0, db = 48000.0, 1200.0, 6.0
	a := math.Pow(10, db/40)
	sin, cos := math.Sincos(2 * math.Pi * f0 / rate)
	bell := func(alpha float64) response.Section {
		a0 := 1 + alpha/a
		return response.Section{B0: (1 + alpha*a) / a0, B1: -2 * cos / a0, B2: (1 - alpha*a) / a0, A1: -2 * cos / a0, A2: (1 - alpha/a) / a0}
	}
	lowshelf := func(alpha float64) response.Section {
		root := 2 * math.Sqrt(a) * alpha
		a0 := (a + 1) + (a-1)*cos + root
		return response.Section{
			B0: a * ((a + 1) - (a-1)*cos + root) / a0, B1: 2 * a * ((a - 1) - (a+1)*cos) / a0, B2: a * ((a + 1) - (a-1)*cos - root) / a0,
			A1: -2 * ((a - 1) + (a+1)*cos) / a0, A2: ((a + 1) + (a-1)*cos - root) / a0,
		}
	}
	w0 := 2 * math.Pi * f0 / rate
	for stage, want := range map[string]response.Section{
		"bell: {at: 1.2 kHz, gain: 6 dB, width: 1.5 oct}":   bell(sin * math.Sinh(math.Ln2/2*1.5*w0/sin)),
		"bell: {at: 1.2 kHz, gain: 6 dB, q: 3}":             bell(sin / 6),
		"lowshelf: {at: 1.2 kHz, gain: 6 dB, q: 0.8}":       lowshelf(sin / 1.6),
		"lowshelf: {at: 1.2 kHz, gain: 6 dB, slope: 0.6}":   lowshelf(sin / 2 * math.Sqrt((a+1/a)*(1/0.6-1)+2)),
		"lowshelf: {at: 1.2 kHz, gain: 6 dB}":               lowshelf(sin / 2 * math.Sqrt2),
		"lowshelf: {at: 1200 Hz, gain: 6dB, slope: 1}":      lowshelf(sin / 2 * math.Sqrt2),
		"lowshelf: {slope: 1, gain: +6.0 dB, at: 1.20 kHz}": lowshelf(sin / 2 * math.Sqrt2),
	} {
		got := planned(t, in(stage), rate).sections[0]
		d := worstDifference([]float64{got.B0, got.B1, got.B2, got.A1, got.A2}, []float64{want.B0, want.B1, want.B2, want.A1, want.A2})
		if !(d <= 1e-12) {
			t.Errorf("%s: %+v is %g from the cookbook's %+v, allowed 1e-12", stage, got, d, want)
		}
	}
}

// A notch by q is -3.01 dB at two points at/q Hz apart, whichever way it is
// asked for.
func TestNotchWidthIsWhatIsAsked(t *testing.T) {
	for _, stage := range []string{"notch: {at: 1 kHz, q: 10}", "notch: {at: 1 kHz, width: 100 Hz}"} {
		s := planned(t, in(stage), 48000).sections
		power := func(hz float64) float64 { return square(response.SectionsAt(s, 2*math.Pi*hz/48000)) }
		crossing := func(lo, hi float64) float64 { // of half power, rising from lo to hi
			for range 60 {
				if mid := (lo + hi) / 2; power(mid) < 0.5 {
					lo = mid
				} else {
					hi = mid
				}
			}
			return lo
		}
		if width := crossing(1000, 2000) - crossing(1000, 500); !(math.Abs(width-100) <= 1e-6) {
			t.Errorf("%s: half power points are %.9f Hz apart, want 100 within 1e-6", stage, width)
		}
	}
}

func square(z complex128) float64 { return real(z)*real(z) + imag(z)*imag(z) }

// A mask by its edges and by corner and width.
func TestMasksOfStages(t *testing.T) {
	lowpass := design.Mask{Kind: design.Lowpass, Pass: [2]float64{12000}, Stop: [2]float64{14000}, RippleDB: 0.1, RejectDB: 80, Rate: 48000}
	bandstop := design.Mask{Kind: design.Bandstop, Pass: [2]float64{800, 2200}, Stop: [2]float64{1000, 2000}, RippleDB: 0.5, RejectDB: 60, Rate: 48000}
	for stage, want := range map[string]design.Mask{
		"lowpass: {pass: 12 kHz, stop: 14 kHz, reject: 80 dB, family: kaiser}":                                                                           lowpass,
		"lowpass: {at: 13 kHz, width: 2 kHz, ripple: 0.1 dB, reject: 80 dB, family: kaiser}":                                                             lowpass,
		"bandstop: {pass: [800 Hz, 2.2 kHz], stop: [1 kHz, 2 kHz], ripple: 0.5 dB, reject: 60 dB, family: kaiser}":                                       bandstop,
		"bandstop:\n      at:\n        - 900 Hz\n        - 2.1 kHz\n      width: 200 Hz\n      ripple: .5 dB\n      reject: 60 dB\n      family: kaiser": bandstop,
	} {
		p := planned(t, in(stage), 48000)
		if diff := cmp.Diff(&want, p.mask); diff != "" || p.gain != 1 || p.sections != nil || p.taps != nil {
			t.Errorf("%s: gain %g; (-want +got)\n%s", stage, p.gain, diff)
		}
	}
}

func TestGainAndDelayOfStages(t *testing.T) {
	for _, c := range []struct {
		stage       string
		gain, delay float64 // factor and samples at 48 kHz
	}{
		{"gain: {by: -20 dB}", 0.1, 0},
		{"gain: {by: 0 dB}", 1, 0},
		{"gain:\n      by: 40 dB", 100, 0},
		{"delay: {by: 2 ms}", 1, 96},
		{"delay: {by: 2500 us}", 1, 120},
		{"delay: {by: 1.5 s}", 1, 72000},
		{"delay: {by: 480 samples}", 1, 480},
		{"delay: {by: 1 sample}", 1, 1},
		{"delay:\n      by: 0.5 samples", 1, 0.5},
	} {
		p := planned(t, in(c.stage), 48000)
		if !(math.Abs(p.gain/c.gain-1) <= 1e-15) || !(math.Abs(p.delay-c.delay) <= 1e-11) || p.taps != nil || p.sections != nil {
			t.Errorf("%s: %+v, want a gain of %g and a delay of %g", c.stage, p, c.gain, c.delay)
		}
	}
}

// Taps and sections from every kind of file are those written inline.
func TestCoefficientsFromFiles(t *testing.T) {
	dir := t.TempDir()
	for file, content := range map[string]string{
		"taps.txt":      "# a kernel\n0.25 0.5 # first two\n\n-0.25\n",
		"commas.TXT":    "\ufeff0.25,0.5;\t-0.25\r\n",
		"bare.json":     "\n[0.25, 5e-1, -0.25]\n",
		"object.json":   `{"sections": null, "rate": 48000, "taps": [0.25, 0.5, -0.25]}`,
		"taps.wav":      wavFile(1, []float64{0.25, 0.5, -0.25}),
		"sections.txt":  "1 2 3 2 -1 .5\n# second\n1,0,0,1,0,0",
		"sections.json": `[[1, 2, 3, 2, -1, 0.5], [1, 0, 0, 1, 0, 0]]`,
		"named.json":    `{"sections": [[1, 2, 3, 2, -1, 0.5], [1, 0, 0, 1, 0, 0]]}`,
	} {
		writeFile(t, filepath.Join(dir, file), content)
	}
	taps := plan{gain: 1, taps: []float64{0.25, 0.5, -0.25}}
	sections := plan{gain: 1, sections: []response.Section{{B0: 0.5, B1: 1, B2: 1.5, A1: -0.5, A2: 0.25}, {B0: 1}}}
	for stage, want := range map[string]plan{
		"fir: {taps: [0.25, 0.5, -0.25]}":                                   taps,
		"fir:\n      taps:\n        - 0.25\n        - .5\n        - -25e-2": taps,
		"fir: {file: taps.txt}":                                             taps,
		"fir: {file: commas.TXT}":                                           taps,
		"fir: {file: bare.json}":                                            taps,
		"fir:\n      file: object.json":                                     taps,
		"fir: {file: taps.wav}":                                             taps,
		"fir: {file: " + filepath.Join(dir, "taps.wav") + "}":               taps,
		"biquads: {sections: [[1, 2, 3, 2, -1, 0.5], [1, 0, 0, 1, 0, 0]]}":  sections,
		"biquads: {file: sections.txt}":                                     sections,
		"biquads: {file: sections.json}":                                    sections,
		"biquads: {file: named.json}":                                       sections,
	} {
		c, err := Parse([]byte(in(stage)), filepath.Join(dir, "chain.yaml"))
		if err != nil {
			t.Errorf("%s: %v", stage, err)
			continue
		}
		got, err := c.Stages[0].plan(48000)
		if diff := cmp.Diff(want, got, cmp.AllowUnexported(plan{})); diff != "" || err != nil {
			t.Errorf("%s: %v (-want +got)\n%s", stage, err, diff)
		}
	}
}

// Coefficients belong to the rate that their file tells.
func TestCoefficientsOfAnotherRate(t *testing.T) {
	dir := t.TempDir()
	writeFile(t, filepath.Join(dir, "taps.wav"), wavFile(1, []float64{0.25, 0.5}))
	writeFile(t, filepath.Join(dir, "taps.txt"), "# a chain\n# rate_hz 48000\n0.25\n0.5\n")
	writeFile(t, filepath.Join(dir, "taps.json"), `{"rate_hz": 48000, "taps": [0.25, 0.5]}`)
	writeFile(t, filepath.Join(dir, "rows.txt"), "# rate_hz 48000\n# b0 b1 b2 a0 a1 a2\n1 0 0 1 0 0\n")
	writeFile(t, filepath.Join(dir, "rows.json"), `{"rate_hz": 48000, "sections": [[1, 0, 0, 1, 0, 0]]}`)
	for _, stage := range []string{"fir: {file: taps.wav}", "fir: {file: taps.txt}", "fir: {file: taps.json}", "biquads: {file: rows.txt}", "biquads: {file: rows.json}"} {
		c, err := Parse([]byte("stages: [{"+stage+"}]"), filepath.Join(dir, "chain.yaml"))
		if err != nil {
			t.Fatal(err)
		}
		if _, err := c.Realise(16000, Written); !errors.Is(err, ErrForRecording) || !strings.Contains(err.Error(), "for 48000 Hz, and at 16000 Hz") {
			t.Errorf("%s realised at 16000 Hz: %v", stage, err)
		}
		if _, err := c.Realise(48000, Written); err != nil {
			t.Errorf("%s realised at 48000 Hz: %v", stage, err)
		}
	}
	if _, err := Parse([]byte("stages: [{fir: {file: rows.txt}}]"), filepath.Join(dir, "chain.yaml")); err == nil || !strings.Contains(err.Error(), "stage biquads") {
		t.Errorf("biquads read as taps: %v", err)
	}
}

// The hash of a chain changes with its text and with the bytes of every file
// that it names, and with nothing else.
func TestHashOfAChain(t *testing.T) {
	dir := t.TempDir()
	path := filepath.Join(dir, "chain.yaml")
	hash := func(text, taps string, wav float64) [32]byte {
		t.Helper()
		writeFile(t, filepath.Join(dir, "taps.txt"), taps)
		writeFile(t, filepath.Join(dir, "taps.wav"), wavFile(1, []float64{1, wav}))
		writeFile(t, path, text)
		c, err := Load(path)
		if err != nil {
			t.Fatal(err)
		}
		return c.SHA256
	}
	const text = "stages: [{fir: {file: taps.txt}}, {fir: {file: taps.wav}}]\n"
	first := hash(text, "1 2", 0.5)
	if again := hash(text, "1 2", 0.5); again != first {
		t.Error("the same chain has two hashes")
	}
	seen := map[[32]byte]string{first: "the first"}
	for name, h := range map[string][32]byte{
		"a remark in the chain":     hash(text+"# remark\n", "1 2", 0.5),
		"another number":            hash(text, "1 3", 0.5),
		"a blank in the file":       hash(text, "1  2", 0.5),
		"another sample":            hash(text, "1 2", 0.25),
		"files in the other order":  hash("stages: [{fir: {file: taps.wav}}, {fir: {file: taps.txt}}]\n", "1 2", 0.5),
		"a file that is not named":  hash("stages: [{fir: {file: taps.txt}}]\n", "1 2", 0.5),
		"nothing but text":          hash("stages: []\n", "1 2", 0.5),
		"nothing but text, a blank": hash("stages: [ ]\n", "1 2", 0.5),
	} {
		if before, ok := seen[h]; ok {
			t.Errorf("%s has the hash of %s", name, before)
		}
		seen[h] = name
	}
}
