// Package capture measures an outside device or program by what it made of a
// probe.
//
// The capture may begin anywhere, at any level and polarity, with any noise before
// the probe. The way from it to the figures:
//
//   - The probe is found by dividing the capture's spectrum by one repeat's: every
//     repeat becomes a short pulse, and pulses at the probe's distances are it.
//   - The distance between repeats gives the drift of the recording clock against
//     the playing one (straight line through the repeats' delays). The chirp is then
//     computed as that clock sees it, so that drift is corrected without
//     interpolating anything.
//   - Each repeat's spectrum is divided by the chirp's. Inside the probe's band
//     nothing is added to the divisor. Outside, where the tapers have left no energy,
//     the response is continued from the band's edges instead, with the slope and
//     towards the phase that it has there. So a device that does nothing has a response of
//     one sample, and the probe's own edges ring nowhere. How far a figure differs when
//     the edges are read further inside the band counts in its interval.
//   - The products of distortion arrive before the linear response, the k-th order by
//     L·ln k (Farina 2000); they are cut off and measured apart.
//   - Harmonics that a digital device has folded over half the rate cannot be cut off: they
//     cross the response. They are known by their trace over frequency and time, and the
//     user is warned.
//   - The response is cut, octave by octave, to twice the stretch in which it
//     stands above the noise (after Lundeby, Vigran, Bietz and Vorländer 1995,
//     Acustica 81, who cut decays so), and ten periods more.
//   - The figures are taken of the mean of the repeats, and again with each of them
//     left out: the jackknife (see package estimate) takes out what noise adds to
//     energies and gives each figure its 95 % interval.
//
// What noise still swamps is NaN, and figures.Figures.NotStated says why. With one
// repeat noise and response cannot be told apart: intervals, drift, and whatever
// noise adds to, are not stated.
package capture
