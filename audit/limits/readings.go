package limits

import (
	"fmt"
	"math"

	"fettle/audit/figures"
	"fettle/filter"
)

// reading is one figure of the whole response.
type reading struct {
	key     string // under which it may be not stated
	weights filter.Weights
	// get reads it, in s, dB or degrees, with the half width of its interval.
	get func(s Subject) (value, half float64)
	at  func(s Subject) float64 // the band that decides it, nominal Hz; nil: the whole
}

// judgeReadings holds figures against one limit in the verdict's unit; scale
// takes them to that unit. The limit may depend on the rate in Hz.
func judgeReadings(readings []reading, scale float64, limit func(rate float64) float64) func(s Subject, v *Verdict) {
	return func(s Subject, v *Verdict) {
		for _, r := range readings {
			value, half := r.get(s)
			if math.IsNaN(value) {
				v.Reason = s.reason(r.key)
				continue
			}
			p := Point{Hz: math.NaN(), Weights: string(r.weights), Value: scale * value, Limit: limit(s.Rate), Half: scale * half}
			if r.at != nil {
				p.Hz = r.at(s)
			}
			v.Points = append(v.Points, p)
		}
	}
}

// of reads a number of the figures.
func of(key string, get func(f *figures.Figures) float64) reading {
	return reading{key: key, get: func(s Subject) (value, half float64) { return s.figure(get) }}
}

// decidedBy is a reading that is decided by one band.
func (r reading) decidedBy(at func(s Subject) float64) reading {
	r.at = at
	return r
}

// weighted is a reading under given weights.
func weighted(w filter.Weights, key string, get func(f *figures.Figures) float64) reading {
	r := of(key, get)
	r.weights = w
	return r
}

// both weights count unless a bound names one.
const both filter.Weights = ""

func eachOf(w filter.Weights) []filter.Weights {
	if w == both {
		return []filter.Weights{filter.White, filter.Pink}
	}
	return []filter.Weights{w}
}

// ringOf is early or late energy.
type ringOf struct {
	name, sort string // "pre-ring", "early"
	key        string // "pre_ring"
	of         func(f *figures.Figures) figures.Ring
}

var (
	preRing  = ringOf{"pre-ring", "early", "pre_ring", func(f *figures.Figures) figures.Ring { return f.PreRing }}
	postRing = ringOf{"post-ring", "late", "post_ring", func(f *figures.Figures) figures.Ring { return f.PostRing }}
)

func (r ringOf) lengthMeasure() string { return "time until " + r.sort + " energy is 60 dB under all" }

// column is the ring under one weighting.
func (r ringOf) column(f *figures.Figures, w filter.Weights) figures.RingColumn {
	if w == filter.Pink {
		return r.of(f).Pink
	}
	return r.of(f).White
}

func (r ringOf) each(w filter.Weights, key func(w filter.Weights) string, get func(c figures.RingColumn) float64) []reading {
	var out []reading
	for _, w := range eachOf(w) {
		out = append(out, weighted(w, r.key+"."+key(w), func(f *figures.Figures) float64 { return get(r.column(f, w)) }))
	}
	return out
}

func (r ringOf) length(w filter.Weights) []reading {
	return r.each(w, func(w filter.Weights) string { return string(w) + "_ms" }, func(c figures.RingColumn) float64 { return c.Length })
}

func (r ringOf) level(w filter.Weights) []reading {
	return r.each(w, func(w filter.Weights) string { return string(w) + "_db" }, func(c figures.RingColumn) float64 { return c.Level })
}

// beyond is the energy beyond one of figures.BeyondTimes.
func (r ringOf) beyond(i int, w filter.Weights) []reading {
	key := func(w filter.Weights) string {
		at := fmt.Sprintf("beyond_db[%g]", toMS*figures.BeyondTimes[i])
		if w == filter.Pink {
			return "pink_" + at
		}
		return at
	}
	return r.each(w, key, func(c figures.RingColumn) float64 { return c.Beyond[i] })
}

// smear reads the whole smear or a share of it.
func smear(w filter.Weights, share string, get func(m figures.Smear) float64) []reading {
	var out []reading
	for _, w := range eachOf(w) {
		out = append(out, weighted(w, fmt.Sprintf("smear.%s.%s_ms", w, share), func(f *figures.Figures) float64 {
			if w == filter.Pink {
				return get(f.Pink)
			}
			return get(f.White)
		}))
	}
	return out
}

// worstBy names the carried band for which a figure is largest; NaN: none.
func worstBy(figure func(b timed) float64) func(s Subject) float64 {
	return func(s Subject) float64 {
		hz, largest := math.NaN(), math.Inf(-1)
		for _, b := range s.carried() {
			if x := figure(b); x > largest {
				hz, largest = b.Nominal, x
			}
		}
		return hz
	}
}

// bandKey is the key under which a band may be not stated.
func bandKey(b timed) string { return fmt.Sprintf("bands[%g Hz]", b.Nominal) }
