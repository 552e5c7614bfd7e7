package design

import "fmt"

// MinimumPhaseMask returns a minimum-phase kernel that meets a mask: the
// magnitude of a linear-phase kernel that meets it, such as Kaiser designs,
// converted by the cepstrum. The conversion strays a little, so the kernel is
// designed for a mask tightened until the converted kernel, as measured, is
// within the mask asked for.
//
// Errors: those of linear and of MinimumPhase.
func MinimumPhaseMask(m Mask, linear func(Mask) ([]float64, error)) ([]float64, error) {
	var got Measured
	tight := m
	for range 12 {
		symmetric, err := linear(tight)
		if err != nil {
			return nil, err
		}
		taps, _, err := MinimumPhase(symmetric, m.RippleDB/20)
		if err != nil {
			return nil, err
		}
		if got = MeasureTaps(taps, m); got.Meets(m) {
			return taps, nil
		}
		tight.RippleDB *= 0.98
		tight.RejectDB += 0.1
	}
	return nil, fmt.Errorf("minimum phase %v: a ripple of %.4g dB and a rejection of %.4g dB were reached where %g dB and %g dB are asked; lower the rejection or widen the transition",
		m.Kind, got.RippleDB, got.RejectDB, m.RippleDB, m.RejectDB)
}
