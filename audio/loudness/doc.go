// Package loudness measures how loud a stream is, after ITU-R BS.1770-4, Annex 1.
//
// Every channel goes through the K weighting, a shelf that lifts the treble by
// 4 dB and a high-pass at 38 Hz. The mean squares of blocks of 400 ms, three
// quarters of each shared with the next, are summed over channels:
//
//	l = -0.691 + 10 log10(Σ z)   LKFS
//
// The integrated loudness is that of the mean over all blocks that pass two gates:
// -70 LKFS, and 10 under the mean of the blocks that pass the first. A step of
// 1 LKFS, which others write LUFS, is a step of 1 dB.
//
// The standard weighs front channels alike, and those at the sides and behind by
// 1.41. A recording does not tell where its channels stand, so here each counts
// alike: what has more than two front channels, three counted, may read up to 1.5 dB
// lower than with a meter that knows.
//
// The standard's filters are for 48 kHz. At other rates they are those of the same
// analogue filters: a tone of 997 Hz then reads low by 0.2 dB at 8 kHz, 0.05 at
// 16 kHz and less than 0.01 from 32 kHz on.
package loudness
