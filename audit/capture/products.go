package capture

import (
	"fmt"
	"math"

	"fettle/audit/estimate"
	"fettle/filter/response"
)

// products measures what distortion makes of the chirp, against the linear response
// after cutting.
func (e *ensemble) products(linear []float64) []Product {
	var out []Product
	if e.p.OrderLead(2) == 0 {
		return nil // an impulse cannot tell
	}
	rate := float64(e.p.Rate)
	for order := 2; order <= ordersOf; order++ {
		lo, hi := float64(order)*e.p.From, e.p.To
		if lo >= hi/2 {
			break
		}
		reference := energyIn(linear, lo, hi, rate)
		share := func(h []float64) float64 { return energyIn(e.product(h, order), lo, hi, rate) / reference }
		var without []float64
		for g := range e.groups {
			without = append(without, share(e.without(g)))
		}
		p := Product{Order: order, Lead: e.p.OrderLead(float64(order)) / rate}
		energy, half := estimate.Jackknife(share(e.mean), without)
		p.Level, p.Err, p.NotStated = levelOf(energy, half, "noise")
		if len(without) < 2 {
			p.Level, p.NotStated = math.NaN(), needsRepeats
		}
		out = append(out, p)
	}
	return out
}

// needsRepeats is why one repeat leaves a figure out.
const needsRepeats = "one repeat cannot tell noise from response; use three or more"

// levelOf is a share of energy and its half width as a level in dB. Where the interval
// reaches 0, what makes it so wide hides the level.
func levelOf(share, half float64, what string) (level, err float64, why string) {
	if !(math.Abs(share) > negligible) && !(half > negligible) {
		return quietest, 0, ""
	}
	level, err, under, stated := estimate.Decibels(share, half)
	if !stated {
		why = fmt.Sprintf("%s hides what lies under %.0f dB", what, under)
	}
	return level, err, why
}

// negligible is -200 dB.
const negligible = 1e-20

// product is the product of an order, cut out of a sequence like mean.
func (e *ensemble) product(h []float64, order int) []float64 {
	from := e.ahead - int(e.p.OrderLead(orderSplit(order))*e.stretch)
	to := e.ahead - int(e.p.OrderLead(orderSplit(order-1))*e.stretch)
	fade := (to - from) / 10
	return faded(h[max(from, 0):to], fade, fade)
}

// energyIn is the energy of x between two frequencies in Hz.
func energyIn(x []float64, lo, hi, rate float64) float64 {
	size := response.NextPow2(2 * len(x))
	var energy float64
	for k, v := range response.Spectrum(x, size) {
		if f := float64(k) / float64(size) * rate; f >= lo && f <= hi {
			energy += estimate.Power(v)
		}
	}
	return energy / float64(size)
}
