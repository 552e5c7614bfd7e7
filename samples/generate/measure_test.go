package main

import (
	"fmt"
	"math"
	"os"
	"path/filepath"
	"testing"

	"github.com/go-audio/wav"
	"gonum.org/v1/gonum/dsp/fourier"
)

// recordings is the folder of the committed files, seen from this package.
const recordings = "../recordings"

// A decoded recording, one signal a channel, full scale 1.0.
type decoded struct {
	rate, bits int
	channels   [][]float64
}

// files keeps what was decoded; no test writes to it.
var files = map[string]decoded{}

// decode returns the committed file of a scene, read by the go-audio decoder.
func decode(t *testing.T, s scene) decoded {
	t.Helper()
	if _, done := files[s.path]; !done {
		files[s.path] = read(t, s)
	}
	return files[s.path]
}

func read(t *testing.T, s scene) decoded {
	t.Helper()
	f, err := os.Open(filepath.Join(recordings, filepath.FromSlash(s.path)))
	if err != nil {
		t.Fatal(err)
	}
	defer f.Close()
	d := wav.NewDecoder(f)
	buf, err := d.FullPCMBuffer()
	if err != nil {
		t.Fatalf("%s: %v", s.path, err)
	}
	out := decoded{int(d.SampleRate), int(d.BitDepth), make([][]float64, d.NumChans)}
	for i, v := range buf.Data {
		c := i % len(out.channels)
		out.channels[c] = append(out.channels[c], math.Ldexp(float64(v), 1-out.bits))
	}
	return out
}

// A choice tells which channels a check is for.
type choice func(s scene, ch channel) bool

func every(scene, channel) bool          { return true }
func withHum(_ scene, ch channel) bool   { return ch.hum != 0 }
func noHum(_ scene, ch channel) bool     { return ch.hum == 0 }
func withSpeech(s scene, _ channel) bool { return len(s.phrases) > 0 }

// eachChannel runs a check on every chosen channel of the committed files. It
// fails if there is none.
func eachChannel(t *testing.T, chosen choice, check func(t *testing.T, s scene, ch channel, x []float64)) {
	t.Helper()
	checked := 0
	for _, s := range scenes {
		for c, x := range decode(t, s).channels {
			if !chosen(s, s.channels[c]) {
				continue
			}
			checked++
			t.Run(fmt.Sprintf("%s channel %d", s.path, c+1), func(t *testing.T) {
				check(t, s, s.channels[c], x)
			})
		}
	}
	if checked == 0 {
		t.Error("no channel to check")
	}
}

// within fails the test unless got lies within tol of want; NaN fails.
func within(t *testing.T, what string, got, want, tol float64) {
	t.Helper()
	t.Logf("%s: %.5g, want %.5g, off by %.2g (allowed %.2g)", what, got, want, math.Abs(got-want), tol)
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.5g, want %.5g within %.2g", what, got, want, tol)
	}
}

func dB(power float64) float64 { return 10 * math.Log10(power) }

// power is the mean square at a level in dB; the level 0 of an absent fault has none.
func power(level float64) float64 {
	if level == 0 {
		return 0
	}
	return math.Pow(10, level/10)
}

func mean(x []float64) float64 {
	var sum float64
	for _, v := range x {
		sum += v
	}
	return sum / float64(len(x))
}

// variance is the power of x without its offset.
func variance(x []float64) float64 {
	m, sum := mean(x), 0.0
	for _, v := range x {
		sum += (v - m) * (v - m)
	}
	return sum / float64(len(x))
}

// hann returns x without its offset under a Hann window whose mean square is 1.
func hann(x []float64) []float64 {
	m, y := mean(x), make([]float64, len(x))
	for n, v := range x {
		w := 0.5 - 0.5*math.Cos(2*math.Pi*float64(n)/float64(len(x)))
		y[n] = (v - m) * w / math.Sqrt(0.375)
	}
	return y
}

// line returns the mean square of a sine at hz in x, measured by G. Goertzel's
// recursion (Am. Math. Monthly 65, 1958) under a Hann window.
func line(x []float64, hz float64, rate int) float64 {
	k := 2 * math.Cos(2*math.Pi*hz/float64(rate))
	var s1, s2 float64
	for _, v := range hann(x) {
		s1, s2 = v+k*s1-s2, s1
	}
	// The window's mean is 0.5/√0.375, and a sine of amplitude a gives a/2 of it.
	amplitude := 2 * math.Sqrt(s1*s1+s2*s2-k*s1*s2) / float64(len(x)) / (0.5 / math.Sqrt(0.375))
	return amplitude * amplitude / 2
}

// band returns the power of x between two frequencies in Hz, by transform.
func band(x []float64, from, to float64, rate int) float64 {
	var sum float64
	for k, c := range fourier.NewFFT(len(x)).Coefficients(nil, hann(x)) {
		if hz := float64(k*rate) / float64(len(x)); hz >= from && hz < to {
			sum += 2 * (real(c)*real(c) + imag(c)*imag(c))
		}
	}
	return sum / float64(len(x)) / float64(len(x))
}

// The two measures of power, one by recursion and one by transform, give a sine
// its textbook power a²/2. Tolerance: the Hann window's side lobes at more than
// ten bins are below -90 dB, 1e-4 leaves room for the image at -hz.
func TestMeasures(t *testing.T) {
	const a, hz, rate = 0.3, 150.0, 16000
	x := make([]float64, 15600)
	for n := range x {
		x[n] = 0.1 + a*math.Sin(2*math.Pi*hz*float64(n)/rate+0.4)
	}
	within(t, "power of a line, dB", dB(line(x, hz, rate)), dB(a*a/2), 1e-3)
	within(t, "power in its band, dB", dB(band(x, 100, 200, rate)), dB(a*a/2), 1e-3)
	within(t, "power elsewhere", band(x, 200, 8000, rate), 0, 1e-4*a*a/2)
}
