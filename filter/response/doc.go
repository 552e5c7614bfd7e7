// Package response turns filter coefficients into what they do: magnitude,
// phase, group delay, poles and zeros, linear-phase type.
//
// Vocabulary, used alike by every function here:
//
//   - omega is the angular frequency in radians per sample, 0 to pi; a
//     frequency of f Hz at a rate of fs Hz is 2 pi f / fs.
//   - taps h[0..N-1] are the coefficients of a kernel (FIR filter),
//     H(omega) = sum over n of h[n] e^(-j omega n).
//   - a section is a recursive filter of second order (see Section); a cascade
//     is a slice of them, its response the product of theirs.
//   - group delay is -d(arg H)/d(omega), in samples. It is computed from the
//     coefficients, never from a difference of unwrapped phase. Where it does
//     not exist it is NaN, never 0.
//
// All coefficients are real and all arithmetic is float64. Nothing here knows
// rates in Hz, files or recordings.
package response
