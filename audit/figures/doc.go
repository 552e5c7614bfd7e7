// Package figures turns one impulse response into the figures of a phase
// audit: what a linear processor does to the timing of what passes through it.
//
// It knows numbers only: samples in, figures out. Files, chains and probes
// belong to the packages above it.
//
// # Vocabulary
//
// H(f) is the transform of the response h[n]; fs its sample rate in Hz.
//
//   - The aligned instant is the sample that a perfect delay-free processor
//     would put its impulse at, [Response.Origin]. Times are relative to it or to
//     the bulk latency, as each figure says.
//   - White weights are |H|²; pink weights are |H|²/f over 20 Hz to 0.45 fs. In
//     time, pink means h through a minimum-phase filter of magnitude 1/√f above
//     20 Hz (up to fs/2) that is flat below 20 Hz. Energy that is late is judged
//     through the same filter reversed in time, so that the weighting's own tail
//     never lies on the side that is read: an identity shows nothing on either
//     side and a symmetric kernel shows the same on both.
//   - Group delay is Re{DFT(n·h)/DFT(h)}/fs, never a difference of unwrapped
//     phase. N(f) stands for DFT((n-n̄)h).
//   - Bulk latency is the one delay that stands for the whole response: exactly
//     the middle of a symmetric or antisymmetric kernel, otherwise the lag of
//     the largest envelope of its correlation with pink noise. Its polarity is
//     the sign of that correlation.
//   - A band is one-third octave wide (IEC 61260-1:2014, base ten). It is carried
//     when its gain is within 20 dB of the strongest band's, unless the caller
//     says which bands are.
//   - Smear is the RMS duration. Its magnitude share comes from the shape of |H|
//     alone; its phase share is what phase adds (Cohen 1995, chapter 1).
//   - Early energy P(t) is the energy more than t before the peak of |h| over
//     all energy; pre-ring is P at the half width of the main lobe. Late energy
//     and post-ring are the same of the response reversed in time.
//   - Band ring is how long before (after) the peak a band still holds -60 dB
//     of its energy.
//
// # Units and absent figures
//
// Times are seconds, levels decibels, angles degrees, latency samples. A
// figure that cannot be stated is NaN and [Figures.NotStated] says why; a level
// under -200 dB is -200 and reads 'none'.
package figures
