package onsets

import "math"

const (
	// smoothing is the length of the window that power is smoothed by: about the
	// ear's integration time (Liski et al. 2021: 2 ms).
	smoothing = 2e-3
	// step is how far apart the envelope is looked at where it is searched.
	step = smoothing / 16
)

// envelope is the power of a stretch of signal, smoothed:
//
//	e(t) = 1/(W·fs) Σ x²[n]·(1 + cos(2π(t - n/fs)/W)),  |t - n/fs| < W/2
//
// It is defined at any time, not only at samples. Running sums of x², and of x²
// turned by the window's frequency, give any value in a few operations, whatever the
// rate. What lies outside the stretch is silence.
type envelope struct {
	rate            float64
	from            int64     // frame of the first sample
	power, cos, sin []float64 // sums over the samples before each
}

// read takes the samples from frame from on; the last stretch is forgotten.
func (e *envelope) read(x []float64, from int64, rate float64) {
	e.rate, e.from = rate, from
	power, inCos, inSin := append(e.power[:0], 0), append(e.cos[:0], 0), append(e.sin[:0], 0)
	turnSin, turnCos := math.Sincos(2 * math.Pi / (smoothing * rate))
	var sum, sumCos, sumSin float64
	cos, sin := 1.0, 0.0
	for _, v := range x {
		p := v * v
		sum, sumCos, sumSin = sum+p, sumCos+p*cos, sumSin+p*sin
		power, inCos, inSin = append(power, sum), append(inCos, sumCos), append(inSin, sumSin)
		cos, sin = cos*turnCos-sin*turnSin, cos*turnSin+sin*turnCos
	}
	e.power, e.cos, e.sin = power, inCos, inSin
}

// start is the time of the first sample.
func (e *envelope) start() float64 { return float64(e.from) / e.rate }

// index is the first sample at or after a time, or the end.
func (e *envelope) index(t float64) int {
	i := math.Ceil(t*e.rate - float64(e.from))
	return int(min(max(i, 0), float64(len(e.power)-1)))
}

// at is e(t).
func (e *envelope) at(t float64) float64 {
	lo, hi := e.index(t-smoothing/2), e.index(t+smoothing/2)
	sin, cos := math.Sincos(2 * math.Pi * (t - e.start()) / smoothing)
	sum := e.power[hi] - e.power[lo] + cos*(e.cos[hi]-e.cos[lo]) + sin*(e.sin[hi]-e.sin[lo])
	return max(0, sum/(smoothing*e.rate))
}

// mean is the power between two times, not smoothed.
func (e *envelope) mean(from, to float64) float64 {
	return (e.power[e.index(to)] - e.power[e.index(from)]) / ((to - from) * e.rate)
}

// grid is e at count times from one on, so far apart.
func (e *envelope) grid(from, apart float64, count int) []float64 {
	g := make([]float64, count)
	for i := range g {
		g[i] = e.at(from + float64(i)*apart)
	}
	return g
}

// most is the largest e between two times, 0 if the second is the earlier one. The
// grid finds it; parabolas through three points, ever closer, refine it.
func (e *envelope) most(from, to float64) float64 {
	at, top := from, 0.0
	for t := from; t <= to; t += step {
		if v := e.at(t); v > top {
			at, top = t, v
		}
	}
	for near := step; near > step/100; near /= 8 {
		before, after := e.at(at-near), e.at(at+near)
		bend := before - 2*top + after
		if !(bend < 0) || to < from {
			break
		}
		at = min(max(at+near*(before-after)/2/bend, from), to)
		top = max(top, e.at(at))
	}
	return top
}

// climbs is the first time between two at which e reaches a level from under it; NaN
// if it does not, or stands there at the start.
func (e *envelope) climbs(level, from, to float64) float64 {
	if e.at(from) >= level {
		return math.NaN()
	}
	for t := from + step; t <= to; t += step {
		if e.at(t) >= level {
			return e.crossing(level, t-step, t)
		}
	}
	return math.NaN()
}

// left is the last time between two at which e climbs to a level, over which it
// is at the second; NaN if it does not.
func (e *envelope) left(level, from, to float64) float64 {
	for t := to - step; t >= from; t -= step {
		if e.at(t) < level {
			return e.crossing(level, t, t+step)
		}
	}
	return math.NaN()
}

// crossing is where e reaches a level between two times, under it at the first.
func (e *envelope) crossing(level, under, over float64) float64 {
	for range 30 {
		middle := (under + over) / 2
		if e.at(middle) < level {
			under = middle
		} else {
			over = middle
		}
	}
	return (under + over) / 2
}
