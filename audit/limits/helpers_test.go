package limits

import (
	"math"
	"slices"
	"sync"
	"testing"

	"fettle/audit/figures"
)

// bandAt is a narrow band at any frequency.
func bandAt(hz float64) figures.Band {
	return figures.Band{Nominal: hz, Centre: hz, Lower: hz * 0.9999, Upper: hz * 1.0001}
}

// subject has one carried band at each frequency, which arrives as given in ms.
func subject(hz, ms []float64) Subject {
	bands := make([]figures.BandFigures, len(hz))
	for i := range hz {
		bands[i] = figures.BandFigures{Band: bandAt(hz[i]), Carried: true, Arrival: ms[i] / 1e3}
	}
	return OfBands(48000, bands, nil, math.NaN(), math.NaN(), nil)
}

// thirds has the bands of 48 kHz, all carried, which arrive as given in ms at
// their nominal frequency.
func thirds(ms func(nominal float64) float64) Subject {
	var bands []figures.BandFigures
	for _, b := range figures.Bands(48000) {
		bands = append(bands, figures.BandFigures{Band: b, Carried: true, Arrival: ms(b.Nominal) / 1e3})
	}
	return OfBands(48000, bands, nil, math.NaN(), math.NaN(), nil)
}

// oneOff is on time but for one band.
func oneOff(hz, ms float64) Subject {
	return thirds(func(f float64) float64 {
		if f == hz {
			return ms
		}
		return 0
	})
}

// must resolves limits of a command line that are sound.
func must(t fataler, texts ...string) []Limit {
	t.Helper()
	l, err := Parse(texts...)
	if err != nil {
		t.Fatal(err)
	}
	return l
}

// verdict judges by one limit.
func verdict(t testing.TB, s Subject, text string) Verdict {
	t.Helper()
	return Judge(s, must(t, text))[0]
}

// at finds the point of a frequency.
func (v Verdict) at(hz float64) (Point, bool) {
	for _, p := range v.Points {
		if p.Hz == hz {
			return p, true
		}
	}
	return Point{}, false
}

func within(t testing.TB, what string, got, want, tol float64) {
	t.Helper()
	if !(math.Abs(got-want) <= tol) {
		t.Errorf("%s: %.9g, want %.9g within %g", what, got, want, tol)
	}
}

var measuredIdentity = sync.OnceValue(func() *figures.Figures {
	return figures.Measure(figures.Response{H: []float64{1, 0, 0, 0}, Rate: 48000})
})

// identity is a response that only passes what it is given.
func identity() Subject {
	f := *measuredIdentity()
	f.Bands = slices.Clone(f.Bands)
	s := Of(&f, 48000)
	s.Latency, s.TargetError = 0, 0
	return s
}

// fataler is a test, or one draw of a property.
type fataler interface {
	Helper()
	Fatal(args ...any)
}
