package hear

import (
	"bytes"
	"encoding/base64"
	"errors"
	"math"
	"slices"
	"strings"
	"sync"
	"testing"

	"fettle/audio"
	"fettle/audio/loudness"
	"fettle/audit/onsets"
	"fettle/filter"

	"github.com/go-audio/wav"
)

// player is a WAV file as an independent reader finds it.
type player struct {
	rate, channels int
	samples        []float64
}

func opened(t testing.TB, file []byte) player {
	t.Helper()
	d := wav.NewDecoder(bytes.NewReader(file))
	buf, err := d.FullPCMBuffer()
	if err != nil || d.BitDepth != 16 || d.WavAudioFormat != 1 {
		t.Fatalf("%d bits of format %d, %v", d.BitDepth, d.WavAudioFormat, err)
	}
	p := player{rate: buf.Format.SampleRate, channels: buf.Format.NumChannels}
	for _, v := range buf.Data {
		p.samples = append(p.samples, float64(v)/(1<<15))
	}
	return p
}

func (p player) meter(t testing.TB) *loudness.Meter {
	t.Helper()
	m, err := loudness.NewMeter(p.rate, p.channels)
	if err != nil {
		t.Fatal(err)
	}
	m.Add(p.samples)
	return m
}

// Three tests look at the same excerpts.
const heardRate = 8000

var (
	heardOnce sync.Once
	heardOf   *held
	heardAs   *Excerpts
)

func heardOnset(t testing.TB) (*held, *Excerpts) {
	t.Helper()
	heardOnce.Do(func() {
		heardOf = newHeld(heardRate, 2, knocks(heardRate, 2, 8, 1, 3, 5))
		heardAs = taken(t, heardOf, fourWays(t, heardRate), Options{Bytes: 3e6})
	})
	return heardOf, heardAs
}

// dithered is the most that a sample of 16 bits with TPDF dither is off.
const dithered = 1.5 / (1 << 15)

func fourWays(t testing.TB, rate int) []Way {
	t.Helper()
	return []Way{
		way(t, rumbleText, rate, filter.Linear, 0.050),
		way(t, rumbleText, rate, filter.Minimum, 0),
		way(t, rumbleText, rate, filter.IIR, math.NaN()),
		way(t, "stages: [{gain: {by: -20 dB}}]", rate, filter.Given, 0.001),
	}
}

func taken(t testing.TB, h *held, ways []Way, o Options) *Excerpts {
	t.Helper()
	e, err := Take(h, ways, o)
	if err != nil {
		t.Fatal(err)
	}
	return e
}

// TestPlayers hold what a full render has about the strongest onset, at the stated
// gain; the fades are left out.
func TestPlayers(t *testing.T) {
	const rate = heardRate
	h, e := heardOnset(t)
	ways := fourWays(t, rate)
	if !e.Clear || !(math.Abs(e.At-5) <= 1e-3) || e.Length != mostSeconds || e.Rate != rate || e.Limited {
		t.Errorf("%+.3f s from %g s, onset at %.4f s, clear: %t", e.Length, e.Start, e.At, e.Clear)
	}
	if want := e.At - ahead*e.Length; !(math.Abs(e.Start-want) <= 1.0/rate) {
		t.Errorf("begins at %g s, want %g", e.Start, want)
	}
	first, frames := int(math.Round(e.Start*rate)), int(math.Round(e.Length*rate))
	fade := int(fadeSeconds * rate)
	check := func(what string, file []byte, full []float64, gainDB float64) {
		p := opened(t, file)
		if p.rate != rate || p.channels != 2 || len(p.samples) != 2*frames {
			t.Fatalf("%s: %d samples in %d channels at %d Hz", what, len(p.samples), p.channels, p.rate)
		}
		want := scaled(full[2*first:2*(first+frames)], math.Pow(10, (gainDB-e.Attenuation)/20))
		inner := [2]int{2 * fade, 2 * (frames - fade)}
		compareSamples(t, what, p.samples[inner[0]:inner[1]], want[inner[0]:inner[1]], dithered)
		if begins := math.Abs(p.samples[0]); !(begins <= dithered+1e-2*math.Abs(want[0])) {
			t.Errorf("%s: begins at %g", what, begins)
		}
	}
	check("original", e.Original, h.frames, 0)
	for i, o := range e.Outputs {
		check(o.Label, o.WAV, rendered(t, h, ways[i]), o.Gain)
	}
}

// TestMatched: all players are as loud as the original's, so a chain that does nothing
// but turn down by 20 dB is turned up by 20.
func TestMatched(t *testing.T) {
	_, e := heardOnset(t)
	original := opened(t, e.Original).meter(t)
	for _, o := range e.Outputs {
		// The fades take 10 ms of 3 s.
		if by := opened(t, o.WAV).meter(t).Over(original); o.Match != ByLoudness || !(math.Abs(by) <= 0.03) {
			t.Errorf("%s: %.3f dB louder than the original; matched %d", o.Label, by, o.Match)
		}
	}
	if g := e.Outputs[3].Gain; !(math.Abs(g-20) <= 1e-9) {
		t.Errorf("20 dB down is brought up by %g dB", g)
	}
}

// TestRemoved: what the page makes of two players is the original less the output, as
// render has it, at the original's level.
func TestRemoved(t *testing.T) {
	const rate = heardRate
	h, e := heardOnset(t)
	ways := fourWays(t, rate)
	original := opened(t, e.Original).samples
	first, fade := 2*int(math.Round(e.Start*rate)), 2*int(fadeSeconds*rate)
	down := math.Pow(10, -e.Attenuation/20)
	for i, o := range e.Outputs {
		output, full := opened(t, o.WAV).samples, rendered(t, h, ways[i])
		var got, want []float64
		for n := fade; n < len(original)-fade; n++ {
			got = append(got, original[n]-o.Ratio*output[n])
			want = append(want, down*(h.frames[first+n]-full[first+n]))
		}
		compareSamples(t, o.Label, got, want, dithered*(1+o.Ratio))
	}
	// A tenth of the samples is left: nine tenths are removed.
	if got, want := e.Outputs[3].Removed, 20*math.Log10(0.9); !(math.Abs(got-want) <= 1e-9) {
		t.Errorf("what 20 dB take away is at %g dB, want %g", got, want)
	}
}

// TestNeverClipped: of a recording beyond full scale, what plays loudest, be it what was
// removed, reaches the ceiling.
func TestNeverClipped(t *testing.T) {
	const rate = 8000
	x := scaled(knocks(rate, 1, 3, 1), 40) // up to 4: a float recording may
	h := newHeld(rate, 1, x)
	e := taken(t, h, fourWays(t, rate), Options{Bytes: 3e6})
	if !(e.Attenuation > 6) {
		t.Errorf("lowered by %g dB only", e.Attenuation)
	}
	original := opened(t, e.Original).samples
	players := [][]float64{original}
	for _, o := range e.Outputs {
		p := opened(t, o.WAV).samples
		players = append(players, p, less(original, scaled(p, o.Ratio)))
	}
	top := 0.0
	for _, p := range players {
		top = max(top, peakOf(p, 1).TruePeak())
	}
	if got := 20 * math.Log10(top); !(math.Abs(got-CeilingDB) <= 0.02) {
		t.Errorf("the highest true peak is %.3f dBTP, want %g", got, CeilingDB)
	}
}

// TestRoom: six realisations of a long recording fit, with less of it, at a lower rate,
// and at last without some of the realisations.
func TestRoom(t *testing.T) {
	for _, c := range []struct {
		rate, channels, bytes, ways int
		playedRate                  int
		length                      float64 // s, at least
		played                      int
		limited                     bool
	}{
		{48000, 2, 2_400_000, 6, 48000, 1.3, 6, true},
		{48000, 1, 2_400_000, 6, 48000, 2.6, 6, true},
		{16000, 1, 2_400_000, 6, 16000, 3.0, 6, false},
		{192000, 2, 2_400_000, 6, 48000, 1.3, 6, true},
		{88200, 1, 2_400_000, 2, 88200, 3.0, 2, false},
		{96000, 2, 300_000, 6, 48000, 0.5, 1, true},
	} {
		h := newHeld(c.rate, c.channels, make([]float64, 5*c.rate*c.channels))
		ways := make([]Way, c.ways)
		for i := range ways {
			ways[i] = way(t, "stages: [{gain: {by: -1 dB}}]", c.rate, filter.Given, 0)
		}
		e := taken(t, h, ways, Options{Onset: &onsets.Onset{Channel: 1, Time: 2}, Bytes: c.bytes})
		total := base64.StdEncoding.EncodedLen(len(e.Original)) + around
		for _, o := range e.Outputs {
			total += base64.StdEncoding.EncodedLen(len(o.WAV)) + around
		}
		if total > c.bytes {
			t.Errorf("%+v: the players take %d bytes", c, total)
		}
		if e.Rate != c.playedRate || len(e.Outputs) != c.played || e.Limited != c.limited || !(e.Length >= c.length) || len(e.LeftOut) != c.ways-c.played {
			t.Errorf("%+v: %d players of %.2f s at %d Hz, limited: %t, left out: %v", c, len(e.Outputs), e.Length, e.Rate, e.Limited, e.LeftOut)
		}
		p := opened(t, e.Original)
		if got := float64(len(p.samples)/p.channels) / float64(p.rate); !(math.Abs(got-e.Length) <= 1/float64(p.rate)) {
			t.Errorf("%+v: the player lasts %g s, stated are %g", c, got, e.Length)
		}
	}
}

// TestLowered: at a lower rate a tone keeps its level and place, and one that no ear
// hears does not fold down.
func TestLowered(t *testing.T) {
	const rate = 192000
	x := make([]float64, 2*rate)
	for n := range x {
		at := float64(n) / rate
		x[n] = 0.25*math.Sin(2*math.Pi*1000*at) + 0.25*math.Sin(2*math.Pi*24500*at)
	}
	e := taken(t, newHeld(rate, 1, x), []Way{way(t, "stages: [{gain: {by: 0 dB}}]", rate, filter.Given, 0)},
		Options{Onset: &onsets.Onset{Channel: 1, Time: 1}, Bytes: 400_000})
	p := opened(t, e.Original)
	if w := e.Where(); p.rate != 48000 || !strings.Contains(w, "Players have 48 kHz for want of room, the recording has 192.") {
		t.Fatalf("played at %d Hz: %s", p.rate, w)
	}
	first := int(math.Round(e.Start * rate))
	var got, want []float64
	for n := 480; n < len(p.samples)-480; n++ {
		got = append(got, p.samples[n])
		want = append(want, 0.25*math.Sin(2*math.Pi*1000*float64(first+4*n)/rate))
	}
	compareSamples(t, "tone", got, want, dithered+0.25*0.0012+0.25e-5) // 0.01 dB of ripple, 100 dB of rejection
}

// TestUnclear: where nothing begins, the largest sample is in the middle of it.
func TestUnclear(t *testing.T) {
	x := make([]float64, 2*5*8000)
	for i := range x {
		x[i] = 0.1 * math.Sin(2*math.Pi*100*float64(i/2)/8000)
	}
	x[2*8123+1] = -0.12
	e := taken(t, newHeld(8000, 2, x), fourWays(t, 8000)[:1], Options{Name: "hum.wav", Bytes: 1e6})
	if e.Clear || e.Channel != 2 || e.At != 8123.0/8000 {
		t.Errorf("clear: %t, channel %d at %g s", e.Clear, e.Channel, e.At)
	}
	if w := e.Where(); !strings.Contains(w, "No onset of hum.wav is clear; it is loudest at 1.015 s, on channel 2.") {
		t.Error(w)
	}
}

// TestShort recordings are played whole, matched by energy where they have no loudness;
// silence is left as it is.
func TestShort(t *testing.T) {
	const rate = 8000
	ways := fourWays(t, rate)
	e := taken(t, newHeld(rate, 1, knocks(rate, 1, 0.3, 0.1)), ways, Options{Bytes: 1e6})
	if o := e.Outputs[3]; e.Length != 0.3 || o.Match != ByEnergy || !(math.Abs(o.Gain-20) <= 1e-9) {
		t.Errorf("%g s, %g dB by %d", e.Length, o.Gain, o.Match)
	}
	e = taken(t, newHeld(rate, 1, make([]float64, rate)), ways, Options{Bytes: 1e6})
	for _, o := range e.Outputs {
		if o.Match != Unmatched || o.Gain != 0 || !math.IsInf(o.Removed, -1) || e.Attenuation != 0 {
			t.Errorf("silence: %s by %g dB, %d, removed %g", o.Label, o.Gain, o.Match, o.Removed)
		}
	}
	if _, err := Take(newHeld(rate, 1, nil), ways, Options{Bytes: 1e6}); err == nil || !strings.Contains(err.Error(), "nothing to hear") {
		t.Errorf("no frames: %v", err)
	}
	for _, bytes := range []int{-1, 0, 2000, 12_000} {
		if e, err := Take(newHeld(rate, 1, knocks(rate, 1, 2, 1)), ways, Options{Bytes: bytes}); !errors.Is(err, ErrNoRoom) {
			t.Errorf("in %d bytes: %v, %v", bytes, e, err)
		}
	}
}

// TestManyChannels: of more than two the onset's is played.
func TestManyChannels(t *testing.T) {
	const rate = 8000
	x := make([]float64, 6*2*rate)
	for i := range 2 * rate {
		x[6*i+3] = 0.1 * math.Sin(float64(i))
	}
	h := newHeld(rate, 6, x)
	e := taken(t, h, fourWays(t, rate)[3:], Options{Onset: &onsets.Onset{Channel: 4, Time: 1}, Bytes: 1e6})
	if p := opened(t, e.Original); !slices.Equal(e.Channels, []int{4}) || p.channels != 1 || !(slices.Max(p.samples) > 0.09) {
		t.Errorf("channels %v are played, in %d", e.Channels, p.channels)
	}
	if w := e.Where(); !strings.Contains(w, "on channel 4.") || !strings.Contains(w, "That channel alone is played.") {
		t.Error(w)
	}
}

// TestSample: of a recording on disk, whose generator says at which frame its last knock
// begins, that is found and played as the file has it.
func TestSample(t *testing.T) {
	const rate, knock = 48000, 103007
	rec, err := audio.Open("../../samples/recordings/deck/slate_and_gangway.wav")
	if err != nil {
		t.Fatal(err)
	}
	defer rec.Close()
	e, err := Take(rec, []Way{way(t, rumbleText, rate, filter.Linear, 0)}, Options{Bytes: 1e6})
	if err != nil {
		t.Fatal(err)
	}
	if !e.Clear || e.Channel != 1 || !(math.Abs(e.At*rate-knock) <= 0.0005*rate) {
		t.Errorf("the onset is at frame %.1f of channel %d, the generator has %d", e.At*rate, e.Channel, knock)
	}
	got := opened(t, e.Original).samples
	want := make([]float64, len(got))
	if err := rec.SeekFrame(int64(math.Round(e.Start * rate))); err != nil {
		t.Fatal(err)
	}
	if err := readAll(rec, want); err != nil {
		t.Fatal(err)
	}
	fade := int(2 * fadeSeconds * rate)
	compareSamples(t, "original", got[fade:len(got)-fade], scaled(want, fromDB(-e.Attenuation))[fade:len(got)-fade], dithered)
}

// TestSame recording and ways make the same bytes.
func TestSame(t *testing.T) {
	h := newHeld(8000, 2, knocks(8000, 2, 5, 2))
	a, b := taken(t, h, fourWays(t, 8000), Options{Bytes: 1e6}), taken(t, h, fourWays(t, 8000), Options{Bytes: 1e6})
	if !bytes.Equal(a.Original, b.Original) || !bytes.Equal(a.Outputs[0].WAV, b.Outputs[0].WAV) {
		t.Error("the players differ from run to run")
	}
	if bytes.Equal(a.Outputs[0].WAV, a.Outputs[1].WAV) {
		t.Error("the players of two realisations are the same")
	}
}

// TestZoom has the onset's channel about the onset, at true level, as far ahead as the
// filter rings.
func TestZoom(t *testing.T) {
	const rate = 8000
	h := newHeld(rate, 2, knocks(rate, 2, 3, 1))
	ways := fourWays(t, rate)
	ways[0].Lead = 0.2
	e := taken(t, h, ways, Options{Bytes: 3e6})
	z := e.Zoom
	for i, want := range [][2]float64{{0.25, 0.125}, {0.015, 0.015}, {0.015, 0.015}, {0.015, 0.015}} {
		if o := z.Outputs[i]; o.Before != want[0] || o.After != want[1] {
			t.Errorf("%s is shown from %g s before to %g s after, want %v", ways[i].Label, o.Before, o.After, want)
		}
	}
	first := int(math.Round((e.At + z.First) * rate))
	if !(z.First >= -0.25 && z.First < -0.25+1.0/rate) || len(z.Original) != int(0.375*rate) {
		t.Errorf("%d samples from %g s on", len(z.Original), z.First)
	}
	full := rendered(t, h, ways[0])
	for n := range z.Original {
		at := 2*(first+n) + e.Channel - 1
		if z.Original[n] != h.frames[at] || !(math.Abs(z.Outputs[0].Samples[n]-full[at]) <= 1e-13) {
			t.Fatalf("sample %d: %g and %g, want %g and %g", n, z.Original[n], z.Outputs[0].Samples[n], h.frames[at], full[at])
		}
	}
}
