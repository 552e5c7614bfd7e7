package figures

import (
	"math"
	"testing"

	"fettle/filter/response"
)

// The phase of a first-order all-pass is known, so the deviation can be fitted on a grid of
// logarithmic frequency (pink weights are even there), in closed form all through.
func TestPhaseDeviationOfAllpass(t *testing.T) {
	const c, points = -0.9, 50000
	f := at8(allpass(c, 600), 0)
	// arg of (c + z)/(1 + c·z), z = e^-jw, and the linear phase of the latency.
	phase := func(hz float64) float64 {
		w := 2 * math.Pi * hz / rate8
		return -w + 2*math.Atan2(c*math.Sin(w), 1+c*math.Cos(w)) + w*f.Latency
	}
	var wf, wff, wp, wfp float64
	span := math.Log(response.TopOfBand * rate8 / response.PinkFrom)
	for i := range points {
		hz := response.PinkFrom * math.Exp(span*(float64(i)+0.5)/points)
		wf += hz
		wff += hz * hz
		wp += phase(hz)
		wfp += hz * phase(hz)
	}
	turns := math.Round((wp*wff - wfp*wf) / (points*wff - wf*wf) / math.Pi)
	slope := (wfp - math.Pi*turns*wf) / wff
	worst := 0.0
	for _, b := range f.Bands {
		want := meanAbsolute(b.Band, func(hz float64) float64 { return phase(hz) - math.Pi*turns - slope*hz })
		within(t, "phase deviation, degrees", b.PhaseDeviation, want, 1e-3)
		worst = max(worst, b.PhaseDeviation)
	}
	within(t, "worst", f.PhaseDeviation, worst, 0)
	if worst < 10 {
		t.Errorf("the worst deviation is %g degrees: too little to tell", worst)
	}
}

// meanAbsolute averages |phase| over a band in logarithmic frequency, in degrees.
func meanAbsolute(b Band, phase func(hz float64) float64) float64 {
	const points = 2000
	sum := 0.0
	for i := range points {
		sum += math.Abs(phase(b.Lower * math.Pow(b.Upper/b.Lower, (float64(i)+0.5)/points)))
	}
	return sum / points * 180 / math.Pi
}

// One sample late, a mix has |1 + e^-jw|² = 2 + 2cos w against 4: the mean over the highest
// band, where it is deepest.
func TestSumTestOfOneSample(t *testing.T) {
	f := at8(delta(1, 2), 0)
	top := f.Bands[len(f.Bands)-1]
	lo, hi := 2*math.Pi*top.Lower/rate8, 2*math.Pi*top.Upper/rate8
	want := 10 * math.Log10(0.5+(math.Sin(hi)-math.Sin(lo))/(2*(hi-lo)))
	within(t, "sum test", f.SumTest, want, 1e-6)
	within(t, "aligned", at8(delta(1, 2), 1).SumTest, 0, 1e-12)
	within(t, "inverted", at8([]float64{-1}, 0).SumTest, None, 0)
	within(t, "half", at8([]float64{-0.5}, 0).SumTest, 20*math.Log10(0.5/1.5), 1e-9)
}

// An inverted response deviates as little as an upright one.
func TestPhaseDeviationIgnoresPolarity(t *testing.T) {
	h := allpass(-0.5, 600)
	up, down := at8(h, 0), at8(scaled(h, -1), 0)
	within(t, "phase deviation", down.PhaseDeviation, up.PhaseDeviation, 1e-9)
	if up.Polarity != 1 || down.Polarity != -1 {
		t.Errorf("polarities %d and %d, want 1 and -1", up.Polarity, down.Polarity)
	}
}
