// Package pcm converts samples between the bytes of a WAV file and float64.
//
// # Vocabulary
//
// Full scale is 1.0. A PCM sample of B valid bits is a signed whole number, its
// code, from -2^(B-1) to 2^(B-1)-1; its value is code/2^(B-1), so that -1.0 can
// be written and +1.0 just not. The code stands left-justified in a container
// of whole bytes, little-endian; a container of one byte is unsigned, with 128
// for silence. One LSB is one step of the code, 2^(1-B).
//
// Every code of up to 32 bits is exact in float64 and comes back unchanged
// ([Decode], then [Quantiser.Encode] without dither). Float samples are copied
// as they are and may exceed full scale.
//
// To requantise is to round a value that is no code to one that is. The error
// made is part of the signal unless dither is added first: with triangular
// (TPDF) dither, two LSB peak to peak, the mean of the total error is 0 and its
// power LSB²/4 whatever the signal (Lipshitz, Wannamaker and Vanderkooy 1992,
// "Quantization and Dither: A Theoretical Survey", J. Audio Eng. Soc. 40(5)).
// It costs 4.8 dB of noise against no dither, and silence does not stay digital
// silence.
//
// # Kernels
//
// Where the processor has AVX2, samples are converted and dither is drawn eight at
// a time, by assembly that the program in ../_asm writes: run go generate after
// changing it. Plain Go does the rest: the ends, samples near or beyond full scale,
// other processors, and everything with the build tag purego. The bits are the same.
package pcm
