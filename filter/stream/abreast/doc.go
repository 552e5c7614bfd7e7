// Package abreast runs the second-order sections of a cascade side by side, and
// channels beside them, in double precision.
//
// A recursive section waits for its own last output, so one section on one channel
// leaves most of a processor idle. Here the recurrences of several sections and
// channels fill the lanes of vector registers, one each, and take no longer
// together than one alone. A section is given
//
//	H(z) = B0 + z^-1 (C1 + C2 z^-1) / (1 + A1 z^-1 + A2 z^-2)
//	C1 = B1 - A1 B0,  C2 = B2 - A2 B0
//
// what passes straight through and what the past adds, r, a direct form I:
//
//	y[n]   = B0 x[n] + r[n]
//	r[n+1] = C1 x[n] + C2 x[n-1] - A2 r[n-1] - A1 r[n]
//
// so that from one sample to the next there is one multiplication, the last, and
// no output on the way. (The direct form is in Oppenheim and Schafer,
// "Discrete-Time Signal Processing", 3rd ed., section 6.3.) Where poles lie near
// zeros, as in high-passes, notches and all-passes with low or narrow corners, C1
// and C2 are small and so is what rounding does: there the error is a sixth to a
// third of that of transposed direct form II, elsewhere a half to three quarters; in
// plain Go a quarter to a half, elsewhere 0.9 to 1.3 times (a test of package stream
// measures it). A lane keeps r[n], r[n-1] as q and the product C2 x[n-1] as e.
//
// A [machine.Kernel] says who computes. In assembly, a chain takes a step at a
// time: in step t the section at place p of a chain has sample t - skew p, which
// the section before it has put out skew steps ago. Between two steps lanes move
// up by one section, the input comes in at one end and the output leaves at the
// other. When a call begins and when it ends, some sections have no sample; their
// lanes keep what they remember. So a sample undergoes the same in every lane and
// in every arrangement of lanes, whatever the calls, and AVX2 and AVX-512 give the
// same bits but for what is set to zero. Every multiplication but C2 x is fused
// with the sum it is part of. Plain Go takes the sections one or two at a time,
// without skew and without fused operations, so it differs by rounding.
//
// States below 1e-30, -600 dB full scale, are set to zero every [Period] samples,
// counted from Reset: the section at place p before every sample n for which
// n + skew p is a multiple (in plain Go, n itself). Left alone, a state that
// decays in silence ends among the denormal numbers, on which processors are many
// times slower; from 1e-30 no stable section gets there within 512 samples unless
// its poles are within 0.29 of the origin, and then it leaves them within some
// thirty.
//
// The assembly is written by the program in _asm, a module of its own: run go
// generate after changing it. With the build tag purego there is plain Go only.
//
// Values are not looked at. A NaN or an infinity stays in its channel for ever,
// but gets into no other.
package abreast
