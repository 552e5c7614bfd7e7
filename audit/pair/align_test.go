package pair

import (
	"io"
	"math"
	"math/cmplx"
	"math/rand/v2"
	"testing"

	"fettle/audio"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
)

// aligner is an Alignment for a chain's path, and what the chain makes of a recording.
func aligner(t testing.TB, text string, rate int, x []float64) (*Alignment, []float64) {
	t.Helper()
	a, y, _ := aligned(t, text, rate, x)
	return a, y
}

// aligned gives the path's response too.
func aligned(t testing.TB, text string, rate int, x []float64) (a *Alignment, y []float64, known []complex128) {
	t.Helper()
	chain, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := chain.Realise(rate, filter.Written)
	if err != nil {
		t.Fatal(err)
	}
	out, err := f.Apply(audio.FromFrames(&goaudio.Format{SampleRate: rate, NumChannels: 1}, x))
	if err != nil {
		t.Fatal(err)
	}
	y = make([]float64, 0, len(x))
	for buf := make([]float64, 4096); ; {
		n, err := out.ReadFrames(buf)
		if err == io.EOF {
			break
		}
		if err != nil {
			t.Fatal(err)
		}
		y = append(y, buf[:n]...)
	}
	known = knownOf(f, f.Paths()[0])
	return NewAlignment(rate, int64(len(x)), known), y, known
}

// knownOf is a path's response as Apply leaves it: aligned.
func knownOf(f *filter.Filter, p *filter.Path) []complex128 {
	size := AlignmentSize
	for size < 2*len(p.System.Taps) {
		size *= 2
	}
	known, _ := p.Response(size)
	step := 2 * math.Pi / float64(size) * float64(f.Shift(p))
	for k := range known {
		known[k] *= cmplx.Rect(1, step*float64(k))
	}
	return known
}

// quantised is x in 16 bits with dither.
func quantised(x []float64, seed uint64) []float64 {
	r := rand.New(rand.NewPCG(seed, 16))
	y := make([]float64, len(x))
	for n, v := range x {
		y[n] = math.Round(v*32768+r.Float64()-r.Float64()) / 32768
	}
	return y
}

// fed gives an Alignment two signals in uneven pieces.
func fed(a *Alignment, x, y []float64) Placement {
	for at, n := 0, 1; at < len(x); n = n*7%4099 + 1 {
		end := min(at+n, len(x))
		a.Add(x[at:end], y[at:end])
		at = end
	}
	return a.Result()
}

var chains = map[string]string{
	"as it is":     "stages: []",
	"linear":       "phase: linear\nstages: [{highpass: {at: 80 Hz, order: 4}}, {lowpass: {at: 7 kHz, order: 4}}]",
	"minimum":      "phase: minimum\nstages: [{highpass: {at: 80 Hz, order: 4}}]",
	"recursive":    "phase: iir\nstages: [{highpass: {at: 70 Hz, order: 4}}, {bell: {at: 2 kHz, gain: 6 dB, q: 1}}]",
	"hum":          "phase: iir\nstages: [{hum: {mains: 50 Hz, harmonics: 6, width: 4 Hz}}]",
	"telephone":    "phase: iir\nstages: [{bandpass: {at: [300 Hz, 3400 Hz], order: 4}}]",
	"a long notch": "phase: linear\nstages: [{notch: {at: 100 Hz, width: 8 Hz}}]",
}

// An output of fettle's own chains, in 16 bits, stands where it should within 0.01
// samples, and one moved by part of a sample or by many is seen to be.
func TestAlignmentOfChains(t *testing.T) {
	const rate = 22050
	x := speechLike(rate, 11*rate, 3)
	for name, text := range chains {
		a, y, known := aligned(t, text, rate, x)
		p := fed(a, x, quantised(y, 1))
		t.Logf("%s: %.2g ± %.2g samples, coherence %.4f, %d stretches", name, p.Delay, p.Err, p.Coherence, p.Stretches)
		within(t, name, p.Delay, 0, 0.01)
		if p.NotStated != "" || p.Unrelated || p.Inverted || !(p.Err < 0.005) {
			t.Errorf("%s: %+v", name, p)
		}
		for _, moved := range []int{1, -3, 700} {
			a := NewAlignment(rate, int64(len(x)), known)
			z := make([]float64, len(y))
			for n := range z {
				if m := n - moved; m >= 0 && m < len(y) {
					z[n] = y[m]
				}
			}
			p := fed(a, x, z)
			within(t, name+" moved", p.Delay, float64(moved), 0.02)
		}
	}
}

// A short recording is looked at in less detail: it still shows whether it is in step, and if it
// is far out of step says so in one way or the other.
func TestAlignmentOfShortRecordings(t *testing.T) {
	const rate = 22050
	x := speechLike(rate, 3*rate, 3)
	for name, text := range chains {
		_, y, known := aligned(t, text, rate, x)
		for _, moved := range []int{0, 1, -3, 700} {
			z := make([]float64, len(y))
			for n := range z {
				if m := n - moved; m >= 0 && m < len(y) {
					z[n] = y[m]
				}
			}
			p := fed(NewAlignment(rate, int64(len(x)), known), x, quantised(z, 1))
			if moved < 700 {
				within(t, name+" moved", p.Delay, float64(moved), 0.02+p.Err)
			} else if !p.Unrelated && !(math.Abs(p.Delay) > 1) && p.NotStated == "" {
				t.Errorf("%s moved by %d: %+v", name, moved, p)
			}
		}
	}
}

// A delay of part of a sample is measured: 0.3 by a long sinc.
func TestAlignmentOfAFraction(t *testing.T) {
	const rate = 8000
	x := speechLike(rate, 8*rate, 1)
	y := make([]float64, len(x))
	for n := range y {
		for k := max(n-60, 0); k <= min(n+60, len(x)-1); k++ {
			u := float64(n-k) - 0.3
			y[n] += x[k] * math.Sin(math.Pi*u) / (math.Pi * u) * (0.5 + 0.5*math.Cos(math.Pi*u/61))
		}
	}
	a, _ := aligner(t, "stages: []", rate, x)
	p := fed(a, x, y)
	within(t, "delay", p.Delay, 0.3, 1e-3+p.Err)
}

// What cannot be told is not stated; what is wrong is.
func TestAlignmentVerdicts(t *testing.T) {
	const rate = 8000
	x := speechLike(rate, 20*rate, 2)
	silence := make([]float64, len(x))
	late := append(make([]float64, 5*rate), x[:15*rate]...) // far beyond a stretch
	other := musicLike(rate, 20*rate, 1)
	inverted, tone, mostly := make([]float64, len(x)), make([]float64, len(x)), make([]float64, len(x))
	for n, v := range x {
		inverted[n] = -v
		tone[n] = 0.5 * math.Sin(2*math.Pi*440*float64(n)/rate)
		if n > 18*rate {
			mostly[n] = v
		}
	}
	for _, c := range []struct {
		name                        string
		x, y                        []float64
		stated, unrelated, inverted bool
	}{
		{"the same", x, x, true, false, false},
		{"inverted", x, inverted, true, false, true},
		{"silence", silence, silence, false, false, false},
		{"silent output", x, silence, false, false, false},
		{"sound in one place only", mostly, mostly, false, false, false},
		{"a tone", tone, tone, false, false, false},
		{"seconds late", x, late, false, true, false},
		{"another recording", x, other, false, true, false},
		{"too short", x[:2000], x[:2000], false, false, false},
	} {
		a, _ := aligner(t, "stages: []", rate, c.x)
		p := fed(a, c.x, c.y)
		if stated := !math.IsNaN(p.Delay); stated != c.stated || p.Unrelated != c.unrelated || p.Inverted != c.inverted || stated == (p.NotStated != "") {
			t.Errorf("%s: %+v; want stated %t, unrelated %t, inverted %t", c.name, p, c.stated, c.unrelated, c.inverted)
		}
	}
	// A chain that leaves nothing: there is nothing to align.
	a := NewAlignment(rate, int64(len(x)), make([]complex128, AlignmentSize/2+1))
	if p := fed(a, x, silence); p.NotStated == "" || p.Unrelated {
		t.Errorf("a chain that leaves nothing: %+v", p)
	}
}

// However the frames come in, the result is the same.
func TestAlignmentInPieces(t *testing.T) {
	const rate = 8000
	x := speechLike(rate, 10*rate, 4)
	y := quantised(x, 2)
	whole, _ := aligner(t, "stages: []", rate, x)
	whole.Add(x, y)
	pieces, _ := aligner(t, "stages: []", rate, x)
	if a, b := whole.Result(), fed(pieces, x, y); a != b {
		t.Errorf("at once %+v, in pieces %+v", a, b)
	}
}

func BenchmarkAlignment(b *testing.B) {
	const rate = 48000
	x := speechLike(rate, 60*rate, 1)
	a, y := aligner(b, "phase: minimum\nstages: [{highpass: {at: 80 Hz, order: 4}}]", rate, x)
	known := a.known
	b.SetBytes(int64(len(x)))
	for b.Loop() {
		a := NewAlignment(rate, int64(len(x)), known)
		for at := 0; at < len(x); at += 4096 {
			end := min(at+4096, len(x))
			a.Add(x[at:end], y[at:end])
		}
		a.Result()
	}
}

// TestLowSoundsAreNotJudged: sound below what the stretches resolve, of which a chain that
// rings for longer leaves what cannot be foretold from them, is not called wrong.
func TestLowSoundsAreNotJudged(t *testing.T) {
	const chain = "phase: iir\nstages:\n  - highpass: {at: 60 Hz, order: 2}\n  - notch: {at: 50 Hz, q: 12}\n"
	const rate = 48000
	sweep := make([]float64, 16384) // 5 to 40 Hz
	for n := range sweep {
		at := float64(n) / float64(len(sweep))
		sweep[n] = 0.3 * math.Sin(2*math.Pi*(5*at+17.5*at*at)*float64(len(sweep))/rate)
	}
	a, y := aligner(t, chain, rate, sweep)
	if p := fed(a, sweep, y); p.Unrelated || p.NotStated == "" {
		t.Errorf("%+v", p)
	}
	// All of a chirp is seen as what it is: part of it is high enough.
	chirp := make([]float64, 10*rate)
	for n := range chirp {
		chirp[n] = 0.1 * math.Sin(2*math.Pi*5*1.25/math.Ln2*rate*(math.Exp2(float64(n)/rate/1.25)-1)/rate)
	}
	a, y = aligner(t, chain, rate, chirp)
	if p := fed(a, chirp, y); p.NotStated != "" || math.Abs(p.Delay) > 0.01+p.Err {
		t.Errorf("%+v", p)
	}
}
