// Package audit measures what a chain does to time, through the very path that
// renders recordings.
//
// Two probes go two independent roads. An impulse is read in time: what comes
// out is the response, aligned as recordings are. An exponential chirp (Farina
// 2000) is deconvolved in frequency. A third road is the analytic response of
// the realised coefficients. The audit says how far they disagree; in float64
// they should not.
//
// The figures themselves are defined and computed in package figures.
package audit
