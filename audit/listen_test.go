package audit

import (
	"strings"
	"testing"

	"fettle/audio"
	"fettle/audit/onsets"
	"fettle/filter"
	"fettle/filter/stream/machine"

	"github.com/google/go-cmp/cmp"
	"github.com/google/go-cmp/cmp/cmpopts"
)

const speech = "../samples/recordings/interviews/deckhand_side_a.wav" // 16 kHz, one channel

func realised(t *testing.T, text string, rate int) *filter.Filter {
	t.Helper()
	c, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	f, err := c.Realise(rate, filter.Written)
	if err != nil {
		t.Fatal(err)
	}
	return f
}

// TestListen: each filter's report is that of the recording and what the filter makes of it by itself, with the
// chain's edges.
func TestListen(t *testing.T) {
	filters := []*filter.Filter{
		realised(t, "phase: iir\nedges: hold\nstages: [highpass: {at: 80 Hz, order: 4}]", 16000),
		realised(t, "stages: [delay: {by: 4 ms}]", 16000),
	}
	got, err := Listen(speech, machine.Portable, filters...)
	if err != nil || len(got) != len(filters) {
		t.Fatal(len(got), err)
	}
	open := func() *audio.Recording {
		r, err := audio.Open(speech)
		if err != nil {
			t.Fatal(err)
		}
		t.Cleanup(func() { r.Close() })
		return r
	}
	for i, f := range filters {
		setup := f.Setup()
		setup.Kernel = machine.Portable
		after, err := f.ApplyWith(open(), setup)
		if err != nil {
			t.Fatal(err)
		}
		want, err := onsets.Measure(open(), after, onsets.Options{})
		if err != nil {
			t.Fatal(err)
		}
		if diff := cmp.Diff(want, got[i], cmpopts.EquateNaNs()); diff != "" {
			t.Errorf("filter %d: %s", i, diff)
		}
	}
	if late := got[1].Channels[0]; late.Onsets < 4 || !(late.Shift.Median > 3.99e-3 && late.Shift.Median < 4.01e-3) {
		t.Errorf("4 ms late: %+v", late)
	}
}

func TestListenErrors(t *testing.T) {
	for says, f := range map[string]*filter.Filter{
		"channel 2": realised(t, "stages: [highpass: {at: 80 Hz, order: 4, channels: [2]}]", 16000),
		"8000 Hz":   realised(t, "stages: [highpass: {at: 80 Hz, order: 4}]", 8000),
	} {
		if _, err := Listen(speech, machine.Portable, f); err == nil || !strings.Contains(err.Error(), says) || !strings.Contains(err.Error(), speech) {
			t.Errorf("%v; want %q", err, says)
		}
	}
	if _, err := Listen("none.wav", machine.Portable); err == nil || !strings.Contains(err.Error(), "none.wav") {
		t.Errorf("no recording: %v", err)
	}
}
