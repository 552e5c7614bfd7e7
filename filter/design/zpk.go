package design

import (
	"math"
	"math/cmplx"
)

// ZPK is a digital filter as zeros, poles and gain in the z plane:
//
//	H(z) = K prod(z - Z[i]) / prod(z - P[i])
//
// Complex roots come in conjugate pairs. The designs of this package have as
// many zeros as poles.
type ZPK struct {
	Z, P []complex128
	K    float64
}

// At returns the complex response at omega, 0..pi radians per sample; math.Pi
// stands for z = -1 exactly. The gain is spread over the factors, so neither it
// nor a partial product runs out of range.
func (f ZPK) At(omega float64) complex128 {
	share := 1.0
	if len(f.P) > 0 {
		share = math.Pow(math.Abs(f.K), 1/float64(len(f.P)))
	}
	h := complex(math.Copysign(1, f.K), 0)
	if len(f.P) == 0 {
		h = complex(f.K, 0)
	}
	for i := 0; i < max(len(f.Z), len(f.P)); i++ {
		if i < len(f.P) {
			h *= complex(share, 0) / chord(omega, f.P[i])
		}
		if i < len(f.Z) {
			h *= chord(omega, f.Z[i])
		}
	}
	return h
}

// chord returns e^(j omega) - root without cancellation beside z = 1 or -1.
func chord(omega float64, root complex128) complex128 {
	if omega == math.Pi {
		return -1 - root
	}
	if omega > math.Pi/2 {
		half := math.Cos(omega / 2)
		return complex(2*half*half, math.Sin(omega)) - (1 + root)
	}
	half := math.Sin(omega / 2)
	return complex(-2*half*half, math.Sin(omega)) + (1 - root)
}

// analogue is a filter in the s plane. Zeros that are missing against the
// poles lie at infinity.
type analogue struct {
	zeros, poles []complex128
	gain         float64
}

// transformed moves a low-pass prototype with its edge at 1 rad/s to the
// prewarped edges. For the band kinds these are the lower and the upper one.
func (a analogue) transformed(kind Kind, edges []float64) analogue {
	switch kind {
	case Lowpass:
		return a.scaled(edges[0])
	case Highpass:
		return a.inverted().scaled(edges[0])
	case Bandpass:
		return a.banded(edges[0], edges[1])
	}
	return a.inverted().banded(edges[0], edges[1])
}

// scaled replaces s by s/w.
func (a analogue) scaled(w float64) analogue {
	zeros, poles := make([]complex128, len(a.zeros)), make([]complex128, len(a.poles))
	for i, z := range a.zeros {
		zeros[i] = z * complex(w, 0)
	}
	for i, p := range a.poles {
		poles[i] = p * complex(w, 0)
	}
	return analogue{zeros, poles, a.gain * math.Pow(w, float64(len(poles)-len(zeros)))}
}

// inverted replaces s by 1/s: the gain is what the roots had at s = 0, and
// zeros at infinity arrive at the origin.
func (a analogue) inverted() analogue {
	gain := complex(a.gain, 0)
	zeros, poles := make([]complex128, len(a.poles)), make([]complex128, len(a.poles))
	for i, z := range a.zeros {
		zeros[i] = 1 / z
		gain *= -z
	}
	for i, p := range a.poles {
		poles[i] = 1 / p
		gain /= -p
	}
	return analogue{zeros, poles, real(gain)}
}

// banded replaces s by (s^2 + lo hi)/(s (hi - lo)). Each zero at infinity
// leaves one at the origin and one at infinity.
func (a analogue) banded(lo, hi float64) analogue {
	missing := len(a.poles) - len(a.zeros)
	zeros, poles := splitAll(a.zeros, lo, hi), splitAll(a.poles, lo, hi)
	zeros = append(zeros, make([]complex128, missing)...)
	return analogue{zeros, poles, a.gain * math.Pow(hi-lo, float64(missing))}
}

func splitAll(roots []complex128, lo, hi float64) []complex128 {
	var all []complex128
	for _, root := range roots {
		far, near := split(root, lo, hi)
		all = append(all, far, near)
	}
	return all
}

// split solves s^2 - root (hi - lo) s + lo hi = 0. The root nearer the origin
// comes from the product of both, because the difference would cancel when the
// band is several decades wide. A real root that splits into a pair gives exact
// conjugates.
func split(root complex128, lo, hi float64) (far, near complex128) {
	half := root * complex((hi-lo)/2, 0)
	offset := cmplx.Sqrt(half*half - complex(lo*hi, 0))
	far = half + offset
	if imag(root) == 0 && imag(offset) != 0 {
		return far, cmplx.Conj(far)
	}
	if cmplx.Abs(half-offset) > cmplx.Abs(far) {
		far = half - offset
	}
	return far, complex(lo*hi, 0) / far
}

// digital applies the bilinear transform z = (1+s)/(1-s). Zeros at infinity
// arrive at z = -1; zeros on the imaginary axis arrive on the unit circle.
func (a analogue) digital() ZPK {
	gain := complex(a.gain, 0)
	zeros, poles := make([]complex128, len(a.poles)), make([]complex128, len(a.poles))
	for i, p := range a.poles {
		if i < len(a.zeros) {
			gain *= 1 - a.zeros[i]
			zeros[i] = bilinear(a.zeros[i])
		} else {
			zeros[i] = -1
		}
		gain /= 1 - p
		poles[i] = bilinear(p)
	}
	return ZPK{Z: zeros, P: poles, K: real(gain)}
}

func bilinear(s complex128) complex128 {
	if real(s) == 0 {
		w := imag(s)
		return complex((1-w)*(1+w)/(1+w*w), 2*w/(1+w*w))
	}
	return (1 + s) / (1 - s)
}
