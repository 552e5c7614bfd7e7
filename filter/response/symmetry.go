package response

import "math"

// Kind is the linear-phase type of a kernel (Oppenheim & Schafer,
// Discrete-Time Signal Processing, section on generalised linear phase). The
// delay of every type but None is (N-1)/2 samples at all frequencies.
type Kind int

const (
	None    Kind = iota // neither symmetric nor antisymmetric
	TypeI               // symmetric, odd length: no forced zero
	TypeII              // symmetric, even length: zero at z = -1
	TypeIII             // antisymmetric, odd length: zeros at z = 1 and z = -1
	TypeIV              // antisymmetric, even length: zero at z = 1
)

// Symmetric reports types I and II.
func (k Kind) Symmetric() bool { return k == TypeI || k == TypeII }

// Antisymmetric reports types III and IV.
func (k Kind) Antisymmetric() bool { return k == TypeIII || k == TypeIV }

// String names the kind as a report does: "none", "type I" to "type IV".
func (k Kind) String() string {
	switch k {
	case TypeI:
		return "type I"
	case TypeII:
		return "type II"
	case TypeIII:
		return "type III"
	case TypeIV:
		return "type IV"
	}
	return "none"
}

// Symmetry classifies a kernel. Tap n counts as equal (opposite) to tap N-1-n
// if they differ (sum) to at most tol times the largest |tap|; tol is 0 or
// more, 1e-12 suits designed kernels. Empty and all-zero kernels are None.
func Symmetry(taps []float64, tol float64) Kind {
	largest, difference, sum := 0.0, 0.0, 0.0
	for n, h := range taps {
		mirror := taps[len(taps)-1-n]
		largest = math.Max(largest, math.Abs(h))
		difference = math.Max(difference, math.Abs(h-mirror))
		sum = math.Max(sum, math.Abs(h+mirror))
	}
	if !(largest > 0) {
		return None
	}
	odd := len(taps)%2 == 1
	switch {
	case difference <= tol*largest:
		return either(odd, TypeI, TypeII)
	case sum <= tol*largest:
		return either(odd, TypeIII, TypeIV)
	}
	return None
}

func either(first bool, a, b Kind) Kind {
	if first {
		return a
	}
	return b
}
