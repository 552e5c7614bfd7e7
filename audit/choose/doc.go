// Package choose compares realisations of a chain and recommends one.
//
// # Candidates
//
// A chain may be realised as written (as its file has it), linear, minimum,
// iir, zero, given, or mixed. Mixed gives each stage a phase of its own: one
// that rings for longer than [LongRing] runs recursively or as minimum phase,
// so that it rings after the sound; all others become one symmetric kernel. See
// [Mixed]. Candidates whose responses agree ([Candidate.Agrees]) share a row.
//
// With a recording, what each row makes of its onsets is measured too
// ([Candidate.Onsets]); no rule asks for that.
//
// # Rules
//
// What the output is for asks for limits, and says in which order candidates are
// tried; the first that keeps all limits is recommended. The user's own limits
// are kept too, and go before a rule's on the same measure.
//
//	for        limits                                          order
//	mix        sum-test -0.5 dB                                ring ahead last
//	master     audibility; pre-ring -60 dB beyond 5 ms         phase kept first
//	alignment  delay-spread 1 ms                               ring ahead last
//	live       latency 5 ms                                    ring ahead last
//	listening  audibility; pre-ring -60 dB beyond 20 ms        ring ahead last
//	(own)      the user's only                                 phase kept first
//
//	ring ahead last:    iir, minimum, mixed, given, written, linear, zero
//	phase kept first:   linear, mixed, minimum, iir, given, written, zero
//
// Under every rule the magnitude may stray from the chain's target by no more
// than [MagnitudeLimit], or the chain's tolerance if that is more: what strays
// further is another chain. A limit that cannot be judged is not kept. A set
// from memory gives advice and rules nothing out.
//
// Where the figures come from: 0.5 dB of loss in a sum is what the audit's words
// call small. 5 ms and 20 ms are the middle and the longest of the published
// pre-masking times (see package limits); narrow stages exceed both by far. A
// listener who hears himself is given 5 ms at most: common practice, no source.
// Programs that align speech step by 10 ms: common practice, no source; a tenth
// of that cannot move a boundary.
package choose
