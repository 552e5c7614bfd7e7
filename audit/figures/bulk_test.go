package figures

import (
	"math"
	"testing"

	"fettle/filter/response"
)

func TestBulkLatencyOfSymmetricKernels(t *testing.T) {
	for _, c := range []struct {
		name     string
		h        []float64
		d        float64
		polarity int
	}{
		{"identity", []float64{1}, 0, 1},
		{"inverted", []float64{0, -2}, 1, -1},
		{"type I", []float64{0, 0, 1, 2, 3, 2, 1, 0}, 4, 1},
		{"type II", []float64{1, 2, 2, 1}, 1.5, 1},
		{"type III", []float64{1, 2, 0, -2, -1}, 2, 0},
		{"type IV", []float64{1, 3, -3, -1}, 1.5, 0},
	} {
		d, polarity := response.BulkLatency(c.h, 0, rate8)
		if d != c.d || polarity != c.polarity {
			t.Errorf("%s: %v samples, polarity %d; want %v, %d", c.name, d, polarity, c.d, c.polarity)
		}
	}
}

// A kernel symmetric to rounding of its samples only is not 'symmetric': the
// estimator must find the same middle by itself.
func TestBulkLatencyOfNearlySymmetricKernel(t *testing.T) {
	h := zeroPhase(butterworth(4, 300, 3400, rate48, 1<<12), 2000)
	h[1500] += 1e-9
	d, polarity := response.BulkLatency(h, 1990, rate48)
	within(t, "latency", d, 10, 1e-5)
	if polarity != 1 {
		t.Errorf("polarity %d, want 1", polarity)
	}
}

// The integer shift and the sign of a response pass through exactly.
func TestBulkLatencyShiftAndSign(t *testing.T) {
	h := powers(1, 0.5, 200)
	d, polarity := response.BulkLatency(h, 0, rate8)
	if polarity != 1 {
		t.Errorf("polarity %d, want 1", polarity)
	}
	for _, shift := range []int{1, 777, 30000} {
		moved, p := response.BulkLatency(append(make([]float64, shift), scaled(h, -0.01)...), 5, rate8)
		within(t, "shifted", moved, d+float64(shift-5), 1e-7)
		if p != -1 {
			t.Errorf("polarity %d of the inverted response, want -1", p)
		}
	}
}

// Fractional delays by a windowed sinc (Kaiser, β 10, 401 taps): its passband error is under
// 1e-5 up to 0.45 fs.
func TestBulkLatencyFraction(t *testing.T) {
	for _, d := range []float64{-0.45, -0.1, 0.1, 0.25, 0.4999} {
		got, _ := response.BulkLatency(fractionalDelay(d, 200), 200, rate8)
		within(t, "fraction", got, d, 1e-4)
	}
}

func fractionalDelay(d float64, half int) []float64 {
	h := make([]float64, 2*half+1)
	for i := range h {
		x := float64(i-half) - d
		h[i] = math.Sin(math.Pi*x) / (math.Pi * x) * kaiser(x/float64(half+1), 10)
	}
	return h
}

func kaiser(x, beta float64) float64 {
	return besselI0(beta*math.Sqrt(1-x*x)) / besselI0(beta)
}

func besselI0(x float64) float64 {
	sum, term := 1.0, 1.0
	for k := 1.0; term > 1e-18*sum; k++ {
		term *= x * x / (4 * k * k)
		sum += term
	}
	return sum
}

// The lag that scipy 1.10.1 finds by the same definition: signal.butter(..., output='sos'), sosfilt
// of an impulse in 2^19 samples, rfft, bounded scalar minimisation of -|Σ H/f e^(j2πft)|. An earlier
// trial searched in steps of 0.05 samples and gave 0.35, 6.25, 12.35, 17.6, 22.6.
func TestBulkLatencyOfButterworth(t *testing.T) {
	const step = 0.05
	for _, c := range []struct {
		order         int
		lo, hi        float64
		scipy, coarse float64
		polarity      int // scipy: modulus and angle 0.79, 33°; 0.84, 71°; 0.785, 122°; 0.738, 164°; 0.70, -157°
	}{
		{4, 70, openTop, 0.3736138, 0.35, 1},
		{2, 300, 3400, 6.2408095, 6.25, 0},
		{4, 300, 3400, 12.3279545, 12.35, 0},
		{6, 300, 3400, 17.5905381, 17.6, 0},
		{8, 300, 3400, 22.5724168, 22.6, 0},
	} {
		d, polarity := response.BulkLatency(butterworth(c.order, c.lo, c.hi, rate48, 1<<14), 0, rate48)
		if polarity != c.polarity {
			t.Errorf("order %d: polarity %d, want %d", c.order, polarity, c.polarity)
		}
		t.Logf("order %d, %g..%g Hz: %.4f samples", c.order, c.lo, c.hi, d)
		// Cells of 1/f against its values at bins of 0.09 Hz: 4e-6 samples measured.
		within(t, "latency against scipy", d, c.scipy, 2e-5)
		within(t, "latency against the coarse trial", d, c.coarse, max(step/2, 0.02*c.coarse))
	}
}

// A response without a common phase has no polarity: the audit must not invent one.
func TestPolarityNotStated(t *testing.T) {
	f := at48(butterworth(4, 300, 3400, rate48, 1<<13), 0) // its phase at the latency is 122°
	if f.Polarity != 0 || f.NotStated["polarity"] == "" {
		t.Errorf("polarity %d, reasons %v; want 0 and a reason", f.Polarity, f.NotStated)
	}
}
