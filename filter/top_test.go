package filter

import (
	"bytes"
	"math"
	"testing"

	"github.com/google/go-cmp/cmp"
)

// What may stand on a chain and on any stage lands where it should, with
// remarks everywhere and the line ends of any system.
func TestTopOfAChain(t *testing.T) {
	const text = `# one
name: Überfahrt – Fähre # two
# three
phase: minimum
tolerance: 0.25 dB
stages: # four
  # five
  - gain: # six
      # seven
      by: 1 dB # eight
      channels: # nine
        - 2
        - 1 # ten
      when: rate >= 32 kHz # eleven
      phase: given
  # twelve
  - dc: {at: 2 Hz} # thirteen
align: # fourteen
  to: centroid
  fraction: true
edges: mirror # fifteen
# sixteen
`
	want := &Chain{
		File: "chain.yaml", Name: "Überfahrt – Fähre", Phase: Minimum, Tolerance: 0.25,
		Stages: []*Stage{
			{Kind: "gain", Text: "gain: by: 1 dB channels: - 2 - 1 when: rate >= 32 kHz phase: given", Phase: Given, Channels: []int{2, 1}, When: &Condition{">=", 32000}, at: place{8, 5}},
			{Kind: "dc", Text: "dc: {at: 2 Hz}", at: place{17, 5}},
		},
		Align: Align{To: AlignCentroid, Fraction: true}, Edges: Mirror,
	}
	for name, text := range map[string]string{"LF": text, "CR LF": crlf(text), "byte order mark": "\ufeff" + text} {
		got := parsed(t, text)
		got.SHA256 = want.SHA256
		for _, s := range got.Stages {
			s.kind, s.plan = kind{}, nil
		}
		if diff := cmp.Diff(want, got, cmp.AllowUnexported(Chain{}, Stage{}, place{}, kind{}, Condition{})); diff != "" {
			t.Errorf("%s: (-want +got)\n%s", name, diff)
		}
	}
	broken{crlf(in("delay:\n      by: 2 ms\n      »wrong: 1")), []string{`"wrong"`}}.check(t, "chain.yaml")
}

func crlf(text string) string {
	return string(bytes.ReplaceAll([]byte(text), []byte("\n"), []byte("\r\n")))
}

func TestDefaultsOfAChain(t *testing.T) {
	c, err := Parse([]byte("stages: []"), "some/dir/speech.v2.yaml")
	if err != nil {
		t.Fatal(err)
	}
	if c.Name != "speech.v2" || c.Phase != Written || c.Tolerance != 0.1 || c.Edges != Silence || c.Align != (Align{To: AlignAuto}) {
		t.Errorf("%+v", c)
	}
}

func TestAlignOfAChain(t *testing.T) {
	for text, want := range map[string]Align{
		"auto":                           {To: AlignAuto},
		"none":                           {To: AlignNone},
		"centroid":                       {To: AlignCentroid},
		"0":                              {To: AlignBy},
		"480":                            {To: AlignBy, By: 480},
		"-12 samples":                    {To: AlignBy, By: -12},
		"{to: none}":                     {To: AlignNone},
		"{to: -3}":                       {To: AlignBy, By: -3},
		"{to: auto, fraction: false}":    {To: AlignAuto},
		"\n  fraction: true\n  to: auto": {To: AlignAuto, Fraction: true},
	} {
		if got := parsed(t, "stages: []\nalign: "+text).Align; got != want {
			t.Errorf("align: %s is %+v, want %+v", text, got, want)
		}
	}
}

func TestConditions(t *testing.T) {
	for text, holds := range map[string][3]bool{ // at 16, 32 and 48 kHz
		"rate >= 32 kHz": {false, true, true},
		"rate > 32 kHz":  {false, false, true},
		"rate <= 32kHz":  {true, true, false},
		"rate<32000 Hz":  {true, false, false},
		"rate == 32 kHz": {false, true, false},
		"rate != 32 kHz": {true, false, true},
	} {
		when := parsed(t, in("gain: {by: 1 dB, when: '"+text+"'}")).Stages[0].When
		if got := [3]bool{when.Holds(16000), when.Holds(32000), when.Holds(48000)}; got != holds {
			t.Errorf("%s holds at 16, 32, 48 kHz: %v, want %v", text, got, holds)
		}
	}
}

func TestQuantitiesOfCommandLines(t *testing.T) {
	for text, want := range map[string]float64{"48k": 48000, "44100": 44100, "44.1 kHz": 44100, "96kHz": 96000, "-3 Hz": -3} {
		if got, err := ParseFrequency(text); err != nil || !(math.Abs(got-want) <= 1e-9) {
			t.Errorf("%q is %g Hz (%v), want %g", text, got, err, want)
		}
	}
	if got, err := ParseLevel("-3.5dB"); err != nil || got != -3.5 {
		t.Errorf("-3.5dB is %g (%v)", got, err)
	}
	for _, text := range []string{"", "k", "48 K", "48 kilo", "nan", "1e999", "4 8"} {
		if got, err := ParseFrequency(text); err == nil {
			t.Errorf("%q was read as %g Hz", text, got)
		}
	}
	if got, err := ParseLevel("3"); err == nil {
		t.Errorf("3 was read as %g dB", got)
	}
}
