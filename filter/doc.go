// Package filter reads a chain from its file, realises it at a sample rate and
// applies it to a stream of frames.
//
// A chain is a list of stages. The product of what its stages do to magnitude
// is the chain's target; a realisation is one way to build it:
//
//   - Linear: one symmetric kernel of odd length. No phase distortion, half the
//     ring before the event, and a latency of half the kernel.
//   - Minimum: one kernel whose energy comes as early as the magnitude lets it.
//   - IIR: each stage's classical recursive design, as second-order sections.
//   - Zero: sections run forward and backward, each way half of the magnitude: no
//     phase, and a deviation from the target that is stated.
//   - Given: every stage as its coefficients say; a stage with a specification
//     takes its natural form, recursive for the classical families, a linear
//     kernel for a mask.
//
// All realisations but Zero meet the same target magnitude (see
// Path.TargetErrorDB), so a comparison between them changes phase only. Stages delay
// and allpass are intent: every realisation keeps them.
//
// A Filter is shared by all workers and does not change, but for memory that one
// stream leaves to the next; state lives in the Source that Apply returns. Apply is
// the one place where latency is removed. Slabs, of which it is made, let several
// goroutines filter one stream.
package filter
