package main

import (
	"fmt"
	"math"
	"path/filepath"
	"regexp"
	"testing"
)

const loudChain = "stages:\n  - gain: {by: 6 dB}\n"

// loud is a tone that 6 dB of gain would take beyond full scale, soft one that
// stays far below.
func (b *bench) loud(rel string) string {
	return b.recording(rel, "pcm16", rate, 1, tone(800, 0.9, 0.25, math.Pi/2))
}

func (b *bench) soft(rel string) string {
	return b.recording(rel, "pcm16", rate, 1, tone(800, 0.1, 0.25, math.Pi/2))
}

// TestOver: the recording that would exceed full scale fails and says what it
// needs, and exactly that is enough.
func TestOver(t *testing.T) {
	b := newBench(t)
	b.loud("in/loud.wav")
	b.soft("in/soft.wav")
	got := b.render(loudChain, b.path("in"))
	got.must(t, exitSomeFailed, "loud.wav", "exceed full scale", "--headroom fit", "--format float32")
	b.mustHold("soft.wav")

	named := regexp.MustCompile(`--headroom "([0-9.]+) dB"`).FindStringSubmatch(got.stderr)
	if named == nil {
		t.Fatalf("no level is named in %q", got.stderr)
	}
	// 0.9 raised by 6 dB is at 20 log10(0.9) + 6 = 5.085 dBFS.
	mustEqual(t, "headroom named", named[1], "5.1")
	b.render(loudChain, "--headroom", named[1]+" dB", b.path("in")).must(t, exitDone)
	b.mustHold("loud.wav", "soft.wav")

	// The level named is the whole of what is needed, also when some is given.
	got = b.render(loudChain, "--headroom", "2 dB", b.path("in"))
	got.must(t, exitSomeFailed, `--headroom "5.1 dB"`)
}

// TestHeadroomFit scales only the recording that needs it.
func TestHeadroomFit(t *testing.T) {
	b := newBench(t)
	b.loud("in/loud.wav")
	b.soft("in/soft.wav")
	b.render(loudChain, "--headroom", "fit", b.path("in")).must(t, exitDone)
	want := map[any][2]float64{
		"loud.wav": {5.1, 20*math.Log10(0.9) + 6 - 5.1},
		"soft.wav": {0, -20 + 6},
	}
	for _, entry := range b.record() {
		w := want[entry["output"]]
		mustBeNear(t, fmt.Sprint(entry["output"], ": headroom_db"), entry["headroom_db"], w[0], 0)
		mustBeNear(t, fmt.Sprint(entry["output"], ": peak_out_dbfs"), entry["peak_out_dbfs"], w[1], 0.01)
	}
}

// TestHeadroomForAll lowers every recording by the same: to half an LSB of
// 16 bits for rounding and one for dither.
func TestHeadroomForAll(t *testing.T) {
	const tolerance = 1.5 / 32768
	b := newBench(t)
	b.loud("in/loud.wav")
	b.soft("in/soft.wav")
	b.render(identityChain, "--headroom", "3 dB", b.path("in")).must(t, exitDone)
	for _, rel := range []string{"loud.wav", "soft.wav"} {
		x, y := samples(t, b.path("in/"+rel)), samples(t, filepath.Join(b.Out, rel))
		for i := range x {
			if want := x[i] * math.Pow(10, -3.0/20); !(math.Abs(y[i]-want) <= tolerance) {
				t.Fatalf("%s: sample %d is %g, want %g", rel, i, y[i], want)
			}
		}
	}
	for _, entry := range b.record() {
		mustBeNear(t, "headroom_db", entry["headroom_db"], 3, 0)
		mustEqual(t, "dither", entry["dither"], any("TPDF"))
	}
}

// TestFloatHoldsOvers: a float output is not limited to full scale.
func TestFloatHoldsOvers(t *testing.T) {
	b := newBench(t)
	b.render(loudChain, "--format", "float32", b.loud("loud.wav")).must(t, exitDone)
	entry := b.last()
	mustBeNear(t, "peak_out_dbfs", entry["peak_out_dbfs"], 20*math.Log10(0.9)+6, 0.01)
	mustEqual(t, "format_out", entry["format_out"], any("32-bit float"))
	if y := samples(t, filepath.Join(b.Out, "loud.wav")); !(y[0] > 1) {
		t.Errorf("first sample %g, want it above full scale", y[0])
	}
}

// TestLevels: peaks of tones that are known beforehand. A tone at a quarter of
// the rate, 45 degrees off, has samples 3.01 dB below its crest (ITU-R
// BS.1770-5, Annex 2), and the chain takes 6 dB.
func TestLevels(t *testing.T) {
	b := newBench(t)
	x := tone(8000, 0.5*math.Sqrt2, 0.25, math.Pi/4)
	fade(x, 500)
	b.render("stages:\n  - gain: {by: -6 dB}\n", b.recording("a.wav", "float64", rate, 1, x)).must(t, exitDone)
	entry := b.last()
	sample, crest := 20*math.Log10(0.5), 20*math.Log10(0.5*math.Sqrt2)
	mustBeNear(t, "peak_in_dbfs", entry["peak_in_dbfs"], sample, 0.01)
	mustBeNear(t, "peak_out_dbfs", entry["peak_out_dbfs"], sample-6, 0.01)
	// The meter's four points a sample include the crest of this tone; the
	// interpolator is good to 0.01 dB there (audio.Meter).
	mustBeNear(t, "true_peak_in_dbtp", entry["true_peak_in_dbtp"], crest, 0.02)
	mustBeNear(t, "true_peak_out_dbtp", entry["true_peak_out_dbtp"], crest-6, 0.02)
	mustEqual(t, "true_peak_oversampling", entry["true_peak_oversampling"], any(4.0))
}

// fade takes away the click that an abrupt beginning and end would be.
func fade(x []float64, n int) {
	for i := range n {
		w := 0.5 - 0.5*math.Cos(math.Pi*float64(i)/float64(n))
		x[i] *= w
		x[len(x)-1-i] *= w
	}
}

// TestFitOneAtATime: a second pass takes its turn among the others.
func TestFitOneAtATime(t *testing.T) {
	for _, jobs := range []string{"1", "2"} {
		b := newBench(t)
		for _, name := range []string{"in/a.wav", "in/b.wav", "in/c.wav", "in/d.wav"} {
			b.recording(name, "pcm16", rate, 1, tone(400, 0.9, 0.01, 0))
		}
		b.render(loudChain, "--headroom", "fit", "--jobs", jobs, b.path("in")).must(t, exitDone)
		b.mustHold("a.wav", "b.wav", "c.wav", "d.wav")
	}
}
