// Package probe makes the signals by which an outside device or program is
// audited, and keeps their parameters with them.
//
// A probe is silence, then the same signal several times at even distances, the
// same in every channel. The signal is one of two:
//
//   - Chirp: an exponential sweep, x(t) = sin(2πf₁L(e^(t/L) - 1)), L = T/ln(f₂/f₁)
//     (Farina 2000, AES 108th Convention, preprint 5093), with a squared sine as taper at
//     both ends. From its From to its To it stands at full level; the tapers lie
//     outside: half an octave below, 0.12 octaves above. A distortion product of
//     order k comes L·ln k before the linear response and can be told from it.
//   - Impulse: one sample. For paths with few bits it can carry dither of its own, so
//     that the path's quantiser is linear in the mean, and many repeats.
//
// The distance between repeats is chosen so that mains hum of 50 or 60 Hz meets
// every repeat in another phase, and averages out instead of passing for response.
//
// The parameters travel in the file, in a chunk called [ChunkID]; see
// [Parameters.Encode].
//
// Probes can do harm: print [Caution] wherever one is made.
package probe

// Caution is what must be said to whoever makes or plays a probe.
const Caution = "Probes can hurt ears and loudspeakers. Start with the volume at its minimum and raise it slowly; " +
	"never play a probe over headphones that are worn; high frequencies at the end of a chirp can burn out a tweeter " +
	"before anyone hears that something is wrong. The program cannot know how loud it gets: follow local rules for exposure to noise."
