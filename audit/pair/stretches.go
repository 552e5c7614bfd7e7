package pair

import (
	"math"
	"slices"

	"fettle/audit/estimate"
	"fettle/filter/response"

	"gonum.org/v1/gonum/dsp/fourier"
)

// stretch is a piece of the original and, with room at both ends, of the processed
// recording, of the loudest channel.
type stretch struct {
	at   int64 // frame of the original
	room int   // frames of y ahead of and behind where x should stand
	x, y []float64
}

const (
	stretchSeconds = 1.4
	mostStretches  = 15
	// widestPPM is the drift that stretches leave room for.
	widestPPM = 300
)

// stretches picks the loudest place of each of some parts of what both recordings
// hold, and reads them.
func (c *comparison) stretches() ([]*stretch, error) {
	size := c.stretchSize()
	list := c.places(size)
	for _, s := range list {
		away := math.Abs(float64(s.at - c.original.frames/2))
		s.room = size/2 + int(away*widestPPM*1e-6)
	}
	channel := c.original.loudest()
	err := readPieces(c.openOriginal, channel, len(list), func(i int) (int64, int) { return list[i].at, size },
		func(i int, x []float64) { list[i].x = x })
	if err != nil {
		return nil, err
	}
	err = readPieces(c.openProcessed, channel, len(list),
		func(i int) (int64, int) { return list[i].at + c.lag - int64(list[i].room), size + 2*list[i].room },
		func(i int, y []float64) { list[i].y = y })
	return list, err
}

func (c *comparison) stretchSize() int {
	return response.NextPow2(int(stretchSeconds*float64(c.rate)) / 2)
}

// places are the loudest steps of equal parts of what both recordings hold at the lag.
func (c *comparison) places(size int) []*stretch {
	from, to := c.overlap()
	step := int64(c.original.step)
	parts := max(min(mostStretches, (to-from)/int64(size)), 1)
	var list []*stretch
	for p := range parts {
		lo, hi := from+(to-from)*p/parts, from+(to-from)*(p+1)/parts-int64(size)
		best, most := max(lo, from), -1.0
		for at := lo; at <= hi; at += step {
			if e := c.original.between(at, at+int64(size)); e > most {
				best, most = at, e
			}
		}
		if most > 0 {
			list = append(list, &stretch{at: best})
		}
	}
	return list
}

// between is the energy of all bands from one frame to another.
func (e *envelope) between(from, to int64) float64 {
	var sum float64
	for _, x := range e.energy {
		for i := from / int64(e.step); i < to/int64(e.step) && i < int64(len(x)); i++ {
			sum += x[i]
		}
	}
	return sum
}

// readPieces reads pieces of one channel in one pass. The pieces begin in
// ascending order and may overlap; what lies outside the recording is zero.
func readPieces(o Opener, channel, count int, where func(int) (from int64, frames int), take func(int, []float64)) error {
	r, err := open(o)
	if err != nil {
		return err
	}
	defer r.close()
	channels := r.src.Format().NumChannels
	var last []float64 // the piece before, which may overlap
	lastFrom := int64(0)
	for i := range count {
		from, frames := where(i)
		x := make([]float64, frames)
		done := 0
		if from < r.at { // begins in the piece before, or ahead of the recording
			done = int(min(r.at-from, int64(frames)))
			for j := range done {
				if n := from + int64(j) - lastFrom; n >= 0 && n < int64(len(last)) {
					x[j] = last[n]
				}
			}
		}
		if err := r.skip(from + int64(done)); err != nil {
			return err
		}
		planes := newPlanes(channels, frames-done)
		if frames > done {
			if _, err := r.read(planes); err != nil {
				return err
			}
			copy(x[done:], planes[channel])
		}
		take(i, x)
		last, lastFrom = x, from
	}
	return nil
}

// offset is how a stretch lies.
type offset struct {
	at  float64 // frame, of its middle
	lag float64 // samples, in addition to the common lag
}

const (
	// standsOut is how far a whitened correlation's peak stands above its RMS
	// when it is one.
	standsOut = 9.0
	// alone is how far above the next largest: a tone has 1.
	alone = 1.1
)

// lagOf finds where a stretch lies. ok is false when nothing stands out, tone when
// several places fit alike.
func (s *stretch) lagOf() (o offset, ok, tone bool) {
	size := response.NextPow2(len(s.y))
	cross := whitened(s.x, s.y, size)
	r := fourier.NewFFT(size).Sequence(nil, slices.Clone(cross))
	var energy, peak float64
	for _, v := range r {
		energy += v * v
		peak = max(peak, math.Abs(v))
	}
	if !(peak > standsOut*math.Sqrt(energy/float64(size))) {
		return o, false, false
	}
	l := estimate.LagOf(cross, size)
	o = offset{float64(s.at) + float64(len(s.x))/2, l.Samples - float64(s.room)}
	return o, true, l.Clear < alone
}

// whitened is the cross-spectrum of two pieces, phases only, where both have energy.
func whitened(x, y []float64, size int) []complex128 {
	u, v := response.Spectrum(x, size), response.Spectrum(y, size)
	var most, mostY float64
	for k := range u {
		most, mostY = max(most, estimate.Power(u[k])), max(mostY, estimate.Power(v[k]))
	}
	const least = 1e-7
	for k, a := range u {
		b := v[k]
		p := estimate.Power(a) * estimate.Power(b)
		if estimate.Power(a) < least*most || estimate.Power(b) < least*mostY || p == 0 || k == 0 || k == len(u)-1 {
			u[k] = 0
			continue
		}
		u[k] = complex(real(a)*real(b)+imag(a)*imag(b), real(a)*imag(b)-imag(a)*real(b)) * complex(1/math.Sqrt(p), 0)
	}
	return u
}

// agreed is the straight line that most offsets lie on, and how many do: through the
// pair of offsets that has most others within a tolerance in samples.
func agreed(offsets []offset) (on []offset) {
	for i, a := range offsets {
		for _, b := range offsets[i:] {
			slope := 0.0
			if b.at != a.at {
				slope = (b.lag - a.lag) / (b.at - a.at)
			}
			if math.Abs(slope) > 4*widestPPM*1e-6 {
				continue
			}
			var near []offset
			for _, c := range offsets {
				if math.Abs(c.lag-a.lag-slope*(c.at-a.at)) <= tolerance {
					near = append(near, c)
				}
			}
			if len(near) > len(on) {
				on = near
			}
		}
	}
	return on
}

// tolerance is how many samples the lags of stretches may differ: a filter that
// disperses puts them where their spectra have most energy.
const tolerance = 8.0
