package estimate

import (
	"math"
	"math/cmplx"

	"fettle/audit/figures"
	"fettle/filter/response"
)

// Spectrum is a response on a grid. Not for concurrent use.
type Spectrum struct {
	rate   float64 // Hz
	h      []float64
	origin int
	size   int          // of the transform
	bins   []complex128 // DFT(h), bins 0 to size/2
	moment []complex128 // DFT((n-origin)·h), when it was asked for
}

// GridFor is a transform's size for a response of the given length: at least four
// times that, and ten bins to a hertz, so that 1/f weights and the narrowest band
// see smooth functions.
func GridFor(length int, rate float64) int {
	return response.NextPow2(max(4*length, int(10*rate)))
}

// Transform takes a response to the grid of GridFor; origin is the index in h that
// times are relative to, rate is in Hz.
func Transform(h []float64, origin int, rate float64) *Spectrum {
	size := GridFor(len(h), rate)
	return &Spectrum{rate: rate, h: h, origin: origin, size: size, bins: response.Spectrum(h, size)}
}

// moments is DFT((n-origin)·h).
func (s *Spectrum) moments() []complex128 {
	if s.moment == nil {
		x := make([]float64, len(s.h))
		for n, v := range s.h {
			x[n] = float64(n-s.origin) * v
		}
		s.moment = response.Spectrum(x, s.size)
	}
	return s.moment
}

// Latency is the bulk latency after the origin, in samples, and the polarity
// (response.BulkLatencyOf).
func (s *Spectrum) Latency() (samples float64, polarity int) {
	t, polarity := response.BulkLatencyOf(s.h, s.bins, s.size, s.rate)
	return t - float64(s.origin), polarity
}

// Band is what a response does in one band.
type Band struct {
	Power   float64 // mean of |H|² over the band
	Arrival float64 // s after the origin, |H|²-weighted mean of the group delay
	// Spread2 is the |H|²-weighted mean square of what is left, s².
	Spread2 float64
}

// Band measures one band, times relative to the origin.
func (s *Spectrum) Band(b figures.Band) Band {
	var energy, delayed, squared float64
	moments := s.moments()
	response.EachBin(s.rate/float64(s.size), b.Lower, b.Upper, func(k int, width float64) {
		h, n := s.bins[k], moments[k]
		hh := Power(h)
		inPhase := real(n)*real(h) + imag(n)*imag(h)
		energy += width * hh
		delayed += width * inPhase
		if hh > 0 {
			squared += width * inPhase * inPhase / hh
		}
	})
	mean := delayed / energy
	return Band{
		Power:   energy / (b.Upper - b.Lower),
		Arrival: mean / s.rate,
		Spread2: (squared/energy - mean*mean) / (s.rate * s.rate),
	}
}

// Power is the mean of |H|² over a band.
func (s *Spectrum) Power(b figures.Band) float64 {
	var energy float64
	response.EachBin(s.rate/float64(s.size), b.Lower, b.Upper, func(k int, width float64) {
		energy += width * Power(s.bins[k])
	})
	return energy / (b.Upper - b.Lower)
}

// Rate is the sample rate in Hz.
func (s *Spectrum) Rate() float64 { return s.rate }

// At is the response at the bin nearest to a frequency in Hz, as if the origin stood
// at index 0, and its group delay after the origin in samples.
func (s *Spectrum) At(hz float64) (h complex128, delay float64) {
	k := min(int(math.Round(hz/s.rate*float64(s.size))), len(s.bins)-1)
	v, n := s.bins[k], s.moments()[k]
	turn := 2 * math.Pi * float64(k) / float64(s.size) * float64(s.origin)
	return v * cmplx.Rect(1, turn), (real(n)*real(v) + imag(n)*imag(v)) / Power(v)
}

// Power is |c|² without the square root of cmplx.Abs.
func Power(c complex128) float64 { return real(c)*real(c) + imag(c)*imag(c) }
