package hear

import (
	"fmt"
	"math"
	"slices"
	"strings"
	"testing"

	"fettle/audit/onsets"
	"fettle/filter"
)

const rumbleText = `
name: rumble
stages: [{highpass: {at: 70 Hz, order: 4}}, {bell: {at: 1 kHz, gain: 3 dB, q: 2}}]
`

const humText = `
name: hum
edges: %s
stages: [{hum: {mains: 50 Hz, harmonics: 3, width: 8 Hz}}, {delay: {by: 3 ms, channels: [2]}}]
`

// TestExcerptOfFullRender: wherever it is cut and whatever stands at the edges, an
// excerpt is that part of the whole render. Blocks are cut elsewhere, so sums of
// thousands of products are rounded in another order; a backward run loses, wherever
// it is cut, up to 1e-7 of the peak in either (stream.LookAhead).
func TestExcerptOfFullRender(t *testing.T) {
	const rate = 8000
	h := newHeld(rate, 2, knocks(rate, 2, 9, 1, 4, 8))
	var ways []Way
	for _, as := range []filter.Realisation{filter.Linear, filter.Minimum, filter.IIR, filter.Zero} {
		ways = append(ways, way(t, rumbleText, rate, as, 0))
	}
	for _, edges := range []filter.Edges{filter.Silence, filter.Hold, filter.Mirror} {
		for _, as := range []filter.Realisation{filter.Linear, filter.IIR} {
			ways = append(ways, way(t, fmt.Sprintf(humText, edges), rate, as, 0))
		}
	}
	for _, w := range ways {
		whole := rendered(t, h, w)
		allowed := 1e-13
		if w.Label == string(filter.Zero) {
			allowed = 2 * 1e-7 * slices.Max(h.frames)
		}
		for _, cut := range [][2]int64{{0, 1000}, {3, 4000}, {31000, 34000}, {68000, h.Frames()}, {0, h.Frames()}} {
			c, err := render(h, cut[0], cut[1], []Way{w})
			if err != nil {
				t.Fatal(err)
			}
			compareSamples(t, fmt.Sprintf("%s, %s, %v", w.Filter.Chain().Name, w.Label, cut), c.outputs[0], whole[2*cut[0]:2*cut[1]], allowed)
			compareSamples(t, "original", c.original, h.frames[2*cut[0]:2*cut[1]], 0)
		}
	}
}

func compareSamples(t *testing.T, what string, got, want []float64, tolerance float64) {
	t.Helper()
	if len(got) != len(want) {
		t.Fatalf("%s: %d samples, want %d", what, len(got), len(want))
	}
	worst := 0.0
	for i := range got {
		worst = max(worst, math.Abs(got[i]-want[i]))
	}
	if !(worst <= tolerance) {
		t.Errorf("%s: off by %g, allowed %g", what, worst, tolerance)
	}
}

// TestReadsNoMore of a long recording than an excerpt needs, when its onset is known.
func TestReadsNoMore(t *testing.T) {
	const rate = 8000
	h := newHeld(rate, 1, knocks(rate, 1, 60, 30))
	w := way(t, rumbleText, rate, filter.Linear, 0)
	e, err := Take(h, []Way{w}, Options{Onset: &onsets.Onset{Channel: 1, Time: 30}, Bytes: 1e6})
	if err != nil {
		t.Fatal(err)
	}
	most := int64(e.Length*rate) + 2*memory([]Way{w})
	if h.read != most || most > h.Frames()/4 {
		t.Errorf("%d frames were read, want %d of %d", h.read, most, h.Frames())
	}
}

// TestDoesNotGoTogether says which realisation is at fault, and why.
func TestDoesNotGoTogether(t *testing.T) {
	h := newHeld(8000, 1, knocks(8000, 1, 3, 1))
	for want, w := range map[string]Way{
		"16000 Hz":        way(t, rumbleText, 16000, filter.IIR, 0),
		"names channel 2": way(t, fmt.Sprintf(humText, filter.Hold), 8000, filter.IIR, 0),
	} {
		_, err := Take(h, []Way{w}, Options{Bytes: 1e6})
		if err == nil || !strings.Contains(err.Error(), "iir: ") || !strings.Contains(err.Error(), want) {
			t.Errorf("the error is %v, want %q in it", err, want)
		}
	}
}

// TestOnsetElsewhere is refused.
func TestOnsetElsewhere(t *testing.T) {
	h := newHeld(8000, 2, knocks(8000, 2, 3, 1))
	for _, o := range []onsets.Onset{{Channel: 1, Time: 3}, {Channel: 1, Time: -0.1}, {Channel: 3, Time: 1}, {Channel: 0, Time: 1}, {Channel: 1, Time: math.NaN()}} {
		if _, err := Take(h, nil, Options{Onset: &o, Bytes: 1e6}); err == nil || !strings.Contains(err.Error(), "is not in this recording") {
			t.Errorf("channel %d at %g s: %v", o.Channel, o.Time, err)
		}
	}
}
