package response

import "math/cmplx"

// MinimumPhase returns the first n samples of the minimum-phase sequence whose natural
// log|H| at omega = 2 pi k/K, k = 0 to K/2, is logs; K = 2(len(logs)-1) is at least n.
// The part at negative times of the sequence's real cepstrum is folded onto positive
// ones, and the result exponentiated. What of the cepstrum, or of the sequence, is longer
// than K samples wraps round. Panics for fewer than two logs.
//
// Source: Oppenheim & Schafer, chapter on cepstrum analysis.
func MinimumPhase(logs []float64, n int) []float64 {
	half := len(logs) - 1
	size := 2 * half
	// An even sequence is the real part of the transform of half of its spectrum, each
	// bin but the ends for two.
	cepstrum := make([]float64, len(logs))
	spectrum := Sequence{X: make([]float64, len(logs))}
	weight := func(k int) float64 {
		if k == 0 || k == half {
			return 1
		}
		return 2
	}
	for k, v := range logs {
		spectrum.X[k] = weight(k) * v / float64(size)
	}
	transform := NewTransform(size, len(logs))
	transform.Each(func(i int, v []complex128) { cepstrum[i] = weight(i) * real(v[0]) }, spectrum)
	return transform.Map(cepstrum, cmplx.Exp, n)
}
