package page

import (
	"errors"
	"io"
	"math"
	"slices"
	"sync"
	"testing"

	"fettle/audio"
	"fettle/audit"
	"fettle/audit/limits"
	"fettle/audit/report"
	"fettle/filter"
	"fettle/filter/stream/machine"

	goaudio "github.com/go-audio/audio"
)

// rumble is a Butterworth high-pass, whose target is known in closed form.
const rumble = `
name: rumble
limits: [audibility, {pre-ring: -60 dB beyond 5 ms}, {delay-spread: 2 ms}]
stages: [{highpass: {at: 70 Hz, order: 4}}]
`

// audited gives one result and subject for each realisation of a chain.
func audited(t testing.TB, text string, rate int, as ...filter.Realisation) ([]*audit.Result, []Subject) {
	t.Helper()
	chain, err := filter.Parse([]byte(text), "chain.yaml")
	if err != nil {
		t.Fatal(err)
	}
	sets, err := limits.Resolve(chain.Limits)
	if err != nil {
		t.Fatal(err)
	}
	var results []*audit.Result
	var subjects []Subject
	for _, phase := range as {
		f, err := chain.Realise(rate, phase)
		if err != nil {
			t.Fatal(err)
		}
		all, err := audit.Chain(f, machine.Best())
		if err != nil {
			t.Fatal(err)
		}
		r := all[0]
		r.Judge(sets)
		h, origin := impulse(t, f)
		results = append(results, r)
		subjects = append(subjects, Subject{
			Label: string(r.Phase), Summary: report.Words(r), Notes: r.Notes, Rate: float64(rate), Figures: r.Figures,
			Verdicts: r.Verdicts, Removed: r.Latency.Removed, Response: h, Origin: origin,
		})
	}
	return results, subjects
}

// impulse sends one sample of 1 through a filter of one path.
func impulse(t testing.TB, f *filter.Filter) (h []float64, origin int) {
	t.Helper()
	before, after := f.Reach(f.Paths()[0])
	x := make([]float64, before+1+after)
	x[before] = 1
	out, err := f.ApplyWith(audio.FromFrames(&goaudio.Format{SampleRate: f.Rate(), NumChannels: 1}, x), filter.Setup{Edges: filter.Silence, Kernel: machine.Best()})
	if err != nil {
		t.Fatal(err)
	}
	for buf := make([]float64, 4096); ; {
		n, err := out.ReadFrames(buf)
		if errors.Is(err, io.EOF) {
			return h, before
		}
		if err != nil {
			t.Fatal(err)
		}
		h = append(h, buf[:n]...)
	}
}

// butterworth is the target of a high-pass of the bilinear transform, in dB:
// |H|^2 = 1/(1 + (tan(w0/2)/tan(w/2))^2n) (Oppenheim and Schafer, chapter 7).
func butterworth(hz []float64, corner float64, order int, rate, tolerance float64) *Target {
	var t Target
	for _, f := range hz {
		ratio := math.Tan(math.Pi*corner/rate) / math.Tan(math.Pi*f/rate)
		aim := -10 * math.Log10(1+math.Pow(ratio, float64(2*order)))
		t.Aim, t.Low, t.High = append(t.Aim, aim), append(t.Low, aim-tolerance), append(t.High, aim+tolerance)
	}
	return &t
}

// rumblePage is the page of two realisations; what is measured is measured once.
func rumblePage(t testing.TB) ([]*audit.Result, Page) {
	t.Helper()
	measureOnce.Do(func() {
		measured.results, measured.subjects = audited(t, rumble, 16000, filter.Linear, filter.Minimum)
	})
	subjects := slices.Clone(measured.subjects)
	for i := range subjects {
		target := butterworth(subjects[i].Figures.Curve.Hz, 70, 4, 16000, 0.1)
		for k, hz := range subjects[i].Figures.Curve.Hz {
			if hz < 20 {
				target.Low[k] = math.Inf(-1) // deeper is free
			}
		}
		subjects[i].Target = target
	}
	return measured.results, Page{
		Title: "rumble at 16 kHz", Version: "1.2.3", Subjects: subjects,
		Summary: []string{"Two realisations of one chain, side by side."},
		Tables: []Table{{Caption: "Realisations", Head: []string{"", "delay spread", "smear, pink"}, Rows: [][]string{
			{"linear", "0.000 ms", "1.120 ms"}, {"minimum", "6.1 ms", "2.05 ms"}}}},
	}
}

var (
	measureOnce sync.Once
	measured    struct {
		results  []*audit.Result
		subjects []Subject
	}
)
