package response

// Section is one second-order recursive section with a0 normalised to 1:
//
//	H(z) = (B0 + B1 z^-1 + B2 z^-2) / (1 + A1 z^-1 + A2 z^-2)
//
// A first-order section has B2 = A2 = 0. Coefficients are float64 everywhere:
// a 20 Hz corner at 192 kHz is 0.9 dB wrong in single precision.
type Section struct {
	B0, B1, B2 float64
	A1, A2     float64
}
