// Package pair compares a processed recording with its original: what was done to
// it, seen as a linear filter, and whether it can be seen as one.
//
// Recordings are streams and need not fit in memory; each is read a few times.
//
//  1. Envelopes: the log energy of four bands in steps of 10 ms. Their correlation
//     finds a delay of any size to a step, and tells a copy at another speed.
//  2. Stretches: some seconds, spread over the recording, are correlated with their
//     spectra whitened (Knapp and Carter 1976, "The generalized correlation method for
//     estimation of time delay": phase transform). Their lags must agree, or lie on
//     a line: then one clock ran faster.
//  3. Spectra: at the lag found, auto- and cross-spectra are averaged over overlapping
//     segments under a Hann window (Welch 1967), in groups. Of a long recording
//     some minutes are looked at: the loudest of each of its parts.
//  4. What is left: the processed recording is predicted by the response found, and what
//     that leaves is explained in the same way, until nothing more comes of it.
//
// With Sxx, Syy and Sxy = E{conj(X)·Y} the transfer function is H = Sxy/Sxx and the coherence
// γ² = |Sxy|²/(Sxx·Syy) (Bendat and Piersol, Random Data, chapters on single-input
// single-output relations): the share of the output that is a linear function of the
// original. The rest is noise, distortion, or a filter that changes. Coherence is
// taken from the averages as they are. The response is the least-squares solution of the
// same equation for a response of limited length, since the quotient alone is biased
// where the original's spectrum is steep; see channel.
//
// Intervals are the jackknife's over the groups (package estimate). A figure is
// stated where coherence allows; elsewhere it is NaN with a reason. The delay, and
// arrivals, which are relative to it, rest on the frequencies that are coherent.
//
// Alignment is the light form: for an output whose response is known, it fits a delay to
// what goes by.
package pair
