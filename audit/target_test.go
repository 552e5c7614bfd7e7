package audit

import (
	"math"
	"testing"

	"fettle/filter"
)

// A path that meets its tolerance lies between the bounds at every frequency of
// its curve, and what is aimed at lies there too.
func TestTargetBoundsTheCurve(t *testing.T) {
	for _, text := range sorts {
		for _, as := range []filter.Realisation{filter.Linear, filter.IIR} {
			r := audited(t, text, 16000, as)
			if r.TargetErrorDB > r.ToleranceDB {
				continue
			}
			for i, hz := range r.Figures.Curve.Hz {
				m := r.Figures.Curve.Magnitude[i]
				if !(m >= r.Target.Low[i]-1e-6 && m <= r.Target.High[i]+1e-6) || !(r.Target.Aim[i] >= r.Target.Low[i] && r.Target.Aim[i] <= r.Target.High[i]) {
					t.Errorf("%s %s at %g Hz: %g dB, aim %g, allowed %g to %g", text, as, hz, m, r.Target.Aim[i], r.Target.Low[i], r.Target.High[i])
				}
			}
		}
	}
}

// The target of a Butterworth high-pass is its closed form,
// 1/(1 + (tan(w0/2)/tan(w/2))^2n) (Oppenheim and Schafer, chapter 7).
func TestTargetIsTheClosedForm(t *testing.T) {
	r := audited(t, rumble, 16000, filter.Linear)
	for i, hz := range r.Figures.Curve.Hz {
		ratio := math.Tan(math.Pi*70/16000) / math.Tan(math.Pi*hz/16000)
		want := -10 * math.Log10(1+math.Pow(ratio, 8))
		if got := r.Target.Aim[i]; !(math.Abs(got-want) <= 1e-6) {
			t.Errorf("%g Hz: %g dB, want %g", hz, got, want)
		}
	}
}
