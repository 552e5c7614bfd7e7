package page

import (
	"bytes"
	"encoding/base64"
	"math"
	"math/rand/v2"
	"regexp"
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audit/hear"
	"fettle/filter"

	goaudio "github.com/go-audio/audio"
)

// memory is a recording in memory.
type memory struct {
	audio.Source
	format *goaudio.Format
	frames []float64
}

func newMemory(rate, channels int, frames []float64) *memory {
	format := &goaudio.Format{SampleRate: rate, NumChannels: channels}
	return &memory{audio.FromFrames(format, frames), format, frames}
}

func (m *memory) SeekFrame(frame int64) error {
	m.Source = audio.FromFrames(m.format, m.frames[frame*int64(m.format.NumChannels):])
	return nil
}

func (m *memory) Frames() int64 { return int64(len(m.frames) / m.format.NumChannels) }

// knock is faint noise with one decaying burst.
func knock(rate, channels int, seconds, at float64) *memory {
	rng := rand.New(rand.NewPCG(7, 8))
	x := make([]float64, int(seconds*float64(rate))*channels)
	for i := range x {
		x[i] = 1e-3 * rng.NormFloat64()
		if d := float64(i/channels)/float64(rate) - at; d >= 0 {
			x[i] += 0.4 * math.Exp(-d/0.03) * math.Sin(2*math.Pi*300*d)
		}
	}
	return newMemory(rate, channels, x)
}

// waysOf realises a chain to be heard, under the names of its realisations.
func waysOf(t testing.TB, text string, rate int, as ...filter.Realisation) []hear.Way {
	t.Helper()
	chain, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	var out []hear.Way
	for _, phase := range as {
		f, err := chain.Realise(rate, phase)
		if err != nil {
			t.Fatal(err)
		}
		out = append(out, hear.Way{Label: string(phase), Filter: f, Setup: f.Setup(), Lead: 0.02})
	}
	return out
}

func heardPage(t testing.TB, rec hear.Recording, ways []hear.Way) Page {
	t.Helper()
	_, p := rumblePage(t)
	room, err := p.Room(len(ways))
	if err != nil {
		t.Fatal(err)
	}
	if p.Hearing, err = hear.Take(rec, ways, hear.Options{Bytes: room}); err != nil {
		t.Fatal(err)
	}
	return p
}

var threeWays = []filter.Realisation{filter.Linear, filter.Minimum, filter.Zero}

func heardRumble(t testing.TB) Page {
	t.Helper()
	return heardPage(t, knock(16000, 2, 3, 1.2), waysOf(t, rumble, 16000, threeWays...))
}

// TestPlayersAreInThePage as the very files, with what a listener must know ahead of them.
func TestPlayersAreInThePage(t *testing.T) {
	p := heardRumble(t)
	text := written(t, p)
	var files [][]byte
	for _, m := range regexp.MustCompile(`src="data:audio/wav;base64,([^"]*)"`).FindAllStringSubmatch(text, -1) {
		file, err := base64.StdEncoding.DecodeString(m[1])
		if err != nil {
			t.Fatal(err)
		}
		files = append(files, file)
	}
	e := p.Hearing
	want := [][]byte{e.Original, e.Outputs[0].WAV, e.Outputs[1].WAV, e.Outputs[2].WAV}
	if len(files) != len(want) {
		t.Fatalf("%d players, want %d", len(files), len(want))
	}
	for i := range want {
		if !bytes.Equal(files[i], want[i]) {
			t.Errorf("player %d is not the file that was given", i)
		}
	}
	if at := strings.Index(text, "Start with the volume low"); at < 0 || at > strings.Index(text, "<audio") {
		t.Error("no word of caution stands ahead of the players")
	}
	_, without := rumblePage(t)
	if text := written(t, without); strings.Contains(text, `id="hearing"`) || strings.Contains(text, "<audio") || strings.Contains(text, "shuffle") {
		t.Error("a page without players speaks of them")
	}
}

// TestRoomForPlayers: with six realisations in stereo at 48 kHz the page is under 4 MB and
// uses what there is.
func TestRoomForPlayers(t *testing.T) {
	_, p := rumblePage(t)
	p.Subjects = append(append(p.Subjects, p.Subjects...), p.Subjects...)
	ways := waysOf(t, "stages: [{gain: {by: -1 dB}}]", 48000, "given", "given", "given", "given", "given", "given")
	for i := range ways {
		ways[i].Lead = 0.2
	}
	room, err := p.Room(len(ways))
	if err != nil {
		t.Fatal(err)
	}
	if p.Hearing, err = hear.Take(knock(48000, 2, 5, 2), ways, hear.Options{Bytes: room}); err != nil {
		t.Fatal(err)
	}
	size := len(written(t, p))
	t.Logf("%d bytes with %.2f s of each", size, p.Hearing.Length)
	if size > MostBytes || size < MostBytes*19/20 || p.Hearing.Length < 1 {
		t.Errorf("the page has %d bytes with %.2f s of each, allowed are %d", size, p.Hearing.Length, MostBytes)
	}
	if !strings.Contains(p.Hearing.Where(), "no more so that the page stays small") {
		t.Errorf("it is not said that there is more: %s", p.Hearing.Where())
	}
}

// TestOnsetPlots have the excerpt's own samples, the onset at 0.
func TestOnsetPlots(t *testing.T) {
	e := heardRumble(t).Hearing
	drawn := aboutOnset(e)
	if len(drawn) != 1+len(e.Outputs) {
		t.Fatalf("%d plots of %d outputs", len(drawn), len(e.Outputs))
	}
	for i, c := range drawn[1:] {
		for _, r := range c.rows {
			n := int(math.Round((r.at/toMS - e.Zoom.First) * e.Zoom.Rate))
			if !(math.Abs(r.cells[0].value-ms(e.Zoom, n)) <= 1e-6) ||
				!(math.Abs(r.cells[1].value-e.Zoom.Original[n]) <= waveStep) || !(math.Abs(r.cells[2].value-e.Zoom.Outputs[i].Samples[n]) <= waveStep) {
				t.Fatalf("%s at %g ms: %v", c.title, r.at, r.cells)
			}
		}
		if len(c.rows) < onsetReadings/2 || c.x.min != -25 || c.x.max != 15 {
			t.Errorf("%s: %d readings from %g to %g ms", c.title, len(c.rows), c.x.min, c.x.max)
		}
	}
	levels := drawn[0].rows
	top, quiet := math.Inf(-1), math.Inf(-1)
	for _, r := range levels {
		if r.at < -1 { // the onset is where a tenth of its power is reached
			quiet = max(quiet, r.cells[1].value)
		} else {
			top = max(top, r.cells[1].value)
		}
	}
	if top != 0 || !(quiet < -30) {
		t.Errorf("the original reaches %g dB after the onset and %g before it", top, quiet)
	}
	// The linear high-pass rings ahead of the onset; the minimum-phase one does not.
	last := levels[0]
	for _, r := range levels {
		if r.at < -1 {
			last = r
		}
	}
	if linear, minimum := last.cells[2].value, last.cells[3].value; !(linear > minimum+10) {
		t.Errorf("at %.2f ms linear is at %g dB, minimum at %g", last.at, linear, minimum)
	}
}

// TestSilentRecording has players and empty plots.
func TestSilentRecording(t *testing.T) {
	p := heardPage(t, newMemory(16000, 1, make([]float64, 16000)), waysOf(t, rumble, 16000, filter.Minimum))
	text := written(t, p)
	for _, want := range []string{"<td>none: silent</td><td>nothing</td>", `id="onset-levels"`, "not stated"} {
		if !strings.Contains(text, want) {
			t.Errorf("the page lacks %q", want)
		}
	}
	if strings.Contains(text, "NaN") {
		t.Error("the page says NaN")
	}
}

// TestSaidOfLevels: gain and level in words that a reader knows.
func TestSaidOfLevels(t *testing.T) {
	for want, o := range map[string]hear.Output{
		"+1.3 dB": {Gain: 1.34}, "−20.0 dB": {Gain: -20}, "0.0 dB": {Gain: 0.04}, "+2.0 dB, by energy": {Gain: 2, Match: hear.ByEnergy},
		"none: silent": {Match: hear.Unmatched},
	} {
		if got := gain(o); got != want {
			t.Errorf("gain %q, want %q", got, want)
		}
	}
	e := &hear.Excerpts{Name: "a.wav", Clear: true, At: 1, Channel: 1, Length: 2, Attenuation: 3.24, Outputs: []hear.Output{{Match: hear.ByEnergy}}, LeftOut: []string{"zero"}, Limited: true}
	text := strings.Join(said(e), " ")
	for _, want := range []string{"The onset at 1.000 s is the strongest of a.wav, on channel 1.", "the 2.00 s from 0.000 s on, no more so that the page stays small; there was no room for zero.",
		"too short or too faint", "lowered by a further 3.2 dB"} {
		if !strings.Contains(text, want) {
			t.Errorf("%q lacks %q", text, want)
		}
	}
}
