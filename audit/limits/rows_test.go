package limits

import (
	"math"
	"strings"
	"testing"

	"fettle/audit/figures"

	"github.com/google/go-cmp/cmp"
)

func TestRows(t *testing.T) {
	s := oneOff(1000, 2.0004)
	s.Figures.Bands[23].Carried = false // 4 kHz
	s.Figures.DelaySpread, s.Figures.SumTest = 1.25e-3, 0
	s.Figures.PreRing.White.Beyond[1], s.Figures.PreRing.Pink.Beyond[1] = figures.None, figures.None
	s.Figures.PostRing.White.Level, s.Figures.PostRing.Pink.Level = -38.84, -26.84
	s.Figures.NotStated["lead_ms"] = "noise hides it"
	got := Rows(Judge(s, must(t, "audibility", "g712", "delay spread=2 ms", "sum test=-3 dB", "pre-ring=-60 dB beyond 5 ms", "post-ring=-40 dB", "lead=1 ms")))
	low := "no published limit at 20 to 400, 16000 Hz"
	want := []Row{
		{"audibility", "exceeded", "2 ms at 1000 Hz", "2 ms", "-0.0004 ms", []string{low}},
		{"g712", "exceeded (advice)", "2 ms at 1000 Hz", "0.25 ms", "-1.75 ms", []string{
			"no published limit at 20 to 400, 3150, 5000 to 16000 Hz",
			"the figures of ITU-T G.712, analogue to analogue are from memory: advice, not a verdict",
		}},
		{"delay-spread 2 ms", "within", "1.25 ms at 1000 Hz", "2 ms", "+0.75 ms", nil},
		{"sum-test -3 dB", "within", "0 dB", "-3 dB", "+3 dB", nil},
		{"pre-ring -60 dB beyond 5 ms", "within", "none, white", "-60 dB", "+140 dB", nil},
		{"post-ring -40 dB", "exceeded", "-26.84 dB, pink", "-40 dB", "-13.16 dB", nil},
		{"lead 1 ms", "not stated", "-", "-", "-", []string{"not stated: noise hides it"}},
	}
	if diff := cmp.Diff(want, got); diff != "" {
		t.Errorf("(-want +got)\n%s", diff)
	}
}

// What is not stated or has no limit says so, and an interval shows.
func TestNotesOfRows(t *testing.T) {
	s := oneOff(0, 0)
	for i := range s.Figures.Bands {
		s.Figures.Bands[i].Carried = s.Figures.Bands[i].Nominal <= 80
	}
	r := Rows([]Verdict{verdict(t, s, "audibility")})[0]
	if r.Verdict != "no published limit" || r.Worst != "-" || r.Notes[0] != "no published limit at 20 to 80 Hz" {
		t.Errorf("%+v", r)
	}
	errs := make([]figures.BandFigures, len(s.Figures.Bands))
	m := OfBands(48000, s.Figures.Bands, errs, 1.9e-3, 0.2e-3, nil)
	r = Rows([]Verdict{verdict(t, m, "delay spread=2 ms")})[0]
	if r.Verdict != "not stated" || !strings.HasPrefix(r.Worst, "1.9 ±0.2 ms at") || r.Margin != "+0.1 ms" || !strings.Contains(r.Notes[0], "interval") {
		t.Errorf("%+v", r)
	}
	gone := oneOff(1000, 9)
	gone.Figures.Bands[20].Arrival = math.NaN() // 2 kHz
	gone.Figures.NotStated["bands[2000 Hz]"] = "noise"
	r = Rows([]Verdict{verdict(t, gone, "audibility")})[0]
	if r.Verdict != "exceeded" || r.Notes[0] != "not stated at 2000 Hz" {
		t.Errorf("%+v", r)
	}
	gone.Figures.Bands[17].Arrival = 0
	r = Rows([]Verdict{verdict(t, gone, "audibility")})[0]
	if r.Verdict != "not stated" || r.Notes[0] != "not stated: noise at 2000 Hz" {
		t.Errorf("%+v", r)
	}
}

func TestNoteOnEarlyBands(t *testing.T) {
	r := Rows([]Verdict{verdict(t, oneOff(630, -2), "audibility")})[0]
	want := []string{
		"no published limit at 20 to 400, 630, 16000 Hz",
		"among these, bands that arrive early where only late ones have a limit at 630 Hz",
	}
	if diff := cmp.Diff(want, r.Notes); r.Verdict != "within" || diff != "" {
		t.Errorf("%s (-want +got)\n%s", r.Verdict, diff)
	}
}

func TestSignificant(t *testing.T) {
	for x, want := range map[float64]string{
		0: "0", -1e-9: "0", 0.0004: "0.0004", 1.9996: "2", 12.346: "12.35", 255.34: "255.3", 12345.6: "12346", -0.5: "-0.5", 100: "100", 2000: "2000", 0.00123456: "0.001235",
	} {
		if got := significant(x); got != want {
			t.Errorf("%g is %q, want %q", x, got, want)
		}
	}
}
