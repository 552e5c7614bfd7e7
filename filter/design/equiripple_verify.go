package design

import (
	"fmt"
	"math"
	"math/cmplx"

	"fettle/filter/response"
)

// verify measures finished taps, by a road other than the exchange's, on a grid
// of at least 16 points to a tap's width of frequency: inside the bands the
// deviation must be the one claimed, between them the gain must not rise above
// the bands' highest by more than overshootDB.
func (s BandSpec) verify(taps []float64, deviation, overshootDB float64) error {
	k := response.NextPow2(16 * max(len(taps), 64))
	top := s.highest()
	for _, b := range s.Bands {
		top = math.Max(top, b.highest()+deviation/b.Weight)
	}
	for i, h := range response.Spectrum(taps, k) {
		hz := float64(i) / float64(k) * s.Rate
		gain := cmplx.Abs(h)
		if b, inside := s.bandAt(hz); inside {
			if err := b.holds(gain, hz, deviation); err != nil {
				return err
			}
		} else if !(gain <= top*fromDB(overshootDB)) {
			return fmt.Errorf("%w: at %.6g Hz it is %.1f dB above the highest gain in the bands, more than %g dB; make the transitions more alike or narrower, or use fewer taps",
				errOvershoot, hz, toDB(gain/top), overshootDB)
		}
	}
	return nil
}

func (s BandSpec) bandAt(hz float64) (Band, bool) {
	for _, b := range s.Bands {
		if hz >= b.From && hz <= b.To {
			return b, true
		}
	}
	return Band{}, false
}

// holds allows twice the claimed deviation: between the points of a coarse grid
// the error rises above it, but an exchange gone wrong is decades off.
func (b Band) holds(gain, hz, deviation float64) error {
	err := math.Abs(gain - math.Abs(b.gainAt(hz)))
	if !(err <= 2*deviation/b.Weight+1e-12*(1+b.highest())) {
		return fmt.Errorf("%w: at %.6g Hz the taps err by %.3g where %.3g was designed; use fewer taps, or the family kaiser", errStuck, hz, err, deviation/b.Weight)
	}
	return nil
}
