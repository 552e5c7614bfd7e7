package capture

import (
	"math"
	"math/rand/v2"

	"fettle/audit/probe"
	"fettle/filter/response"
	"fettle/filter/stream"
	"fettle/filter/stream/machine"
)

// device is an outside device whose truth is known: a clock, a polynomial, a filter,
// a delay, a level, noise, a word length.
type device struct {
	ppm      float64 // how much faster the recording clock runs
	offset   float64 // samples of the capture before the probe's frame 0; may be negative
	gain     float64 // with its sign
	square   float64 // y = x + square·x² + cube·x³
	cube     float64
	sections []response.Section
	noise    float64 // RMS
	bits     int     // 0: none
	tail     int     // frames recorded after the probe
}

// record plays a probe through the device: the clock first, so that the filter is
// what it is at the capture's rate.
func (d device) record(p probe.Parameters, seed uint64) []float64 {
	x := samplesOf(p)
	y := resampled(x, 1+d.ppm*1e-6, d.offset, int(float64(len(x))*(1+d.ppm*1e-6)+d.offset)+d.tail)
	for i, v := range y {
		y[i] = v + d.square*v*v + d.cube*v*v*v
	}
	if d.sections != nil {
		stream.NewCascade(d.sections, 1, machine.Best()).Process([][]float64{y}, [][]float64{y})
	}
	r := rand.New(rand.NewPCG(seed, 7))
	for i := range y {
		y[i] = d.gain*y[i] + d.noise*r.NormFloat64()
		if d.bits > 0 {
			step := math.Exp2(float64(1 - d.bits))
			y[i] = step * math.Round(y[i]/step+r.Float64()-r.Float64())
		}
	}
	return y
}

// pass sends samples through the device's filter, in place.
func (d device) pass(y []float64) []float64 {
	if d.sections != nil {
		stream.NewCascade(d.sections, 1, machine.Portable).Process([][]float64{y}, [][]float64{y})
	}
	return y
}

func samplesOf(p probe.Parameters) []float64 {
	src := p.Source()
	x := make([]float64, int(p.Frames())*p.Channels)
	for done := 0; done < len(x); {
		n, err := src.ReadFrames(x[done:])
		if err != nil {
			panic(err)
		}
		done += n * p.Channels
	}
	return x
}

// resampled is x as a clock sees it that takes stretch samples to one, frame 0 of x
// at offset: a sinc of 257 points under a Kaiser window (β 12), more than 110 dB true up to
// 0.48 of the rate.
func resampled(x []float64, stretch, offset float64, frames int) []float64 {
	const half = 128
	const beta = 12
	window := make([]float64, 64*(half+1)+2)
	for i := range window {
		u := float64(i) / float64(64*(half+1))
		window[i] = besselI0(beta*math.Sqrt(max(0, 1-u*u))) / besselI0(beta)
	}
	y := make([]float64, frames)
	for n := range y {
		at := (float64(n) - offset) / stretch
		base := int(math.Floor(at))
		frac := at - float64(base)
		if frac < 1e-12 {
			if base >= 0 && base < len(x) {
				y[n] = x[base]
			}
			continue
		}
		sin := math.Sin(math.Pi * frac)
		var sum float64
		for k := max(base-half+1, 0); k <= min(base+half, len(x)-1); k++ {
			u := at - float64(k)
			w := math.Abs(u) * 64
			i := int(w)
			window := window[i] + (w-float64(i))*(window[i+1]-window[i])
			sign := sin
			if (base-k)&1 != 0 {
				sign = -sin
			}
			sum += x[k] * sign / (math.Pi * u) * window
		}
		y[n] = sum
	}
	return y
}

func besselI0(x float64) float64 {
	sum, term := 1.0, 1.0
	for k := 1.0; term > 1e-18*sum; k++ {
		term *= x * x / (4 * k * k)
		sum += term
	}
	return sum
}
