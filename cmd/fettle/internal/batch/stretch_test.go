package batch

import (
	"math"
	"strings"
	"testing"
)

func TestParseStretch(t *testing.T) {
	inf := math.Inf(1)
	tests := []struct {
		from, to string
		want     Stretch
	}{
		{"", "", Stretch{}},
		{"1:20", "1:50", Stretch{80, 110}},
		{"80", "110", Stretch{80, 110}},
		{"0:01:20.5", "1:00:00", Stretch{80.5, 3600}},
		{"", "2.25", Stretch{0, 2.25}},
		{"0", "", Stretch{0, inf}},
		{"90", "", Stretch{90, inf}},
		{"100:00", "", Stretch{6000, inf}}, // the first part may be any
		{"59.999", "1:00", Stretch{59.999, 60}},
	}
	for _, test := range tests {
		if got, err := ParseStretch(test.from, test.to); err != nil || got != test.want {
			t.Errorf("%q to %q: %v, %v", test.from, test.to, got, err)
		}
	}
	for _, bad := range []string{"x", "1:60", "1:2:60", "1:60:2", "-1", "1:-2", "1.5:20", "1::2", ":", "1:2:3:4", "Inf", "NaN", "1e400", " 1", "1 s", "1:"} {
		if got, err := ParseStretch(bad, ""); err == nil || !strings.Contains(err.Error(), "--from: ") || !strings.Contains(err.Error(), "such as 1:20") {
			t.Errorf("%q: %v, %v", bad, got, err)
		}
		if got, err := ParseStretch("", bad); err == nil || !strings.Contains(err.Error(), "--to: ") {
			t.Errorf("%q: %v, %v", bad, got, err)
		}
	}
	for _, bad := range [][2]string{{"2", "2"}, {"2", "1"}, {"", "0"}} {
		if got, err := ParseStretch(bad[0], bad[1]); err == nil || !strings.Contains(err.Error(), "is not after") {
			t.Errorf("%q: %v, %v", bad, got, err)
		}
	}
}

func TestStretchInFrames(t *testing.T) {
	inf := math.Inf(1)
	tests := []struct {
		s                Stretch
		rate             int
		length, from, to int64 // to 0: an error
	}{
		{Stretch{}, 8000, 100, 0, 100},
		{Stretch{}, 8000, 0, 0, 0},
		{Stretch{0.001, 0.002}, 8000, 100, 8, 16},
		{Stretch{0.001, 1}, 8000, 100, 8, 100},
		{Stretch{0.001, inf}, 8000, 100, 8, 100},
		{Stretch{1.0 / 3, 2.0 / 3}, 44100, 44100, 14700, 29400},
		{Stretch{1, 2}, 8000, 8000, 0, 0},
		{Stretch{1, inf}, 8000, 100, 0, 0},
		{Stretch{0.0001, 0.00011}, 8000, 100, 0, 0}, // less than half a frame
		{Stretch{0, 1e300}, 8000, 100, 0, 100},
		{Stretch{1e300, inf}, 8000, 100, 0, 0},
	}
	for _, test := range tests {
		from, to, err := test.s.frames(test.rate, test.length)
		if from != test.from || to != test.to || (err != nil) != (test.to == 0 && !test.s.none()) {
			t.Errorf("%+v: %d to %d, %v", test, from, to, err)
		}
	}
}

func TestRename(t *testing.T) {
	for rel, want := range map[string]string{"a.wav": "a.trial.wav", "deep/b.c.WAV": "deep/b.c.trial.WAV", "tape": "tape.trial", "d.e/tape": "d.e/tape.trial"} {
		if got := (Stretch{1, 2}).rename(rel); got != want {
			t.Errorf("%s became %s, want %s", rel, got, want)
		}
		if got := (Stretch{}).rename(rel); got != rel {
			t.Errorf("%s became %s without a stretch", rel, got)
		}
	}
}
