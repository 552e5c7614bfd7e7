// Package design turns specifications into coefficients: recursive filters as
// zeros, poles and gain, then second-order sections; kernels as taps. It knows
// numbers only: no files, no recordings, no chain.
//
// Vocabulary:
//
//   - Frequencies are in Hz and rates in samples a second unless a name says
//     otherwise. Every frequency must lie above 0 and below half the rate.
//   - Kind is the shape: Lowpass, Highpass, Bandpass or Bandstop.
//   - Family is a classical approximation: Butterworth, Chebyshev of the first
//     and second kind, elliptic, Bessel, Linkwitz-Riley. LeastOrder designs any
//     of them from a mask, in whose passband it reads ripple as the whole drop.
//   - A matched section keeps an analogue magnitude near half the rate, where
//     the bilinear transform compresses frequencies.
//   - order is the order of the low-pass prototype; a band filter has twice as
//     many poles.
//   - ripple of a mask is plus and minus about 0 dB; ripple of a classical
//     family, where a function says so, is the whole drop below its peak.
//   - A band (Band, BandSpec) is a stretch of frequency with a wanted gain and a
//     weight; a deviation is the amplitude's distance from that gain, times the
//     weight. Between the bands lie transitions, where nothing is wanted.
//   - The four linear-phase types are those of package response: I and II are
//     symmetric, III and IV antisymmetric; I and III have odd lengths.
//   - reject (rejection) is the attenuation in the stopband, positive dB.
//   - A mask holds pass and stop edges, ripple and rejection. A design for a
//     mask is measured after it is made, and made larger until it is met.
//   - Pole and zero positions are those of the z plane; internally the bilinear
//     transform is s = (z-1)/(z+1), so an analogue frequency is
//     tan(pi f/fs) (prewarping).
//
// No polynomial of more than second order is ever formed: with a 20 Hz corner
// an expanded sixth-order filter is already unstable at 192 kHz.
//
// Sources: Oppenheim & Schafer, Discrete-Time Signal Processing; Parks &
// Burrus, Digital Filter Design (1987); Lutovac, Tosic & Evans, Filter Design
// for Signal Processing (2001); Bristow-Johnson, Audio EQ Cookbook (W3C Note,
// 2021); Kaiser, Nonrecursive digital filter design using the I0-sinh window
// function (1974); Vicanek, Matched Second Order Digital Filters (2016).
package design
