// Package limits judges an audit's figures by limits: by named sets from
// published tables, and by the user's own.
//
// It knows figures only. Verdicts speak of carried bands. What the figures do
// not state is 'not stated', what lies outside a table's range has 'no published
// limit', and neither is ever a pass. A measured figure is within a limit when
// its whole 95 % interval is, and exceeds it when its whole interval does;
// between the two it is not stated.
//
// # Writing limits
//
// A chain file lists sets by name and measures with their bound:
//
//	limits: [audibility, {pre-ring: -60 dB beyond 5 ms}, {delay-spread: 2 ms}]
//
// A command line gives the same one at a time, as "audibility",
// "pre-ring=-60 dB beyond 5 ms" or "delay spread=2 ms". Blanks and hyphens in a
// name are the same. The grammar:
//
//		limit  = set | measure "=" bound             (a command line)
//		       | set | "{" measure ":" bound "}"     (a chain file)
//		bound  = amount [ "beyond" time ] [ "white" | "pink" ]
//		amount = number ( "dB" | "degrees" | "s" | "ms" | "us" | "samples" )
//
//	  - pre-ring, post-ring: in dB, early (late) energy outside the main lobe, or
//	    beyond 2, 5 or 20 ms from the peak; in time, how long it takes to -60 dB.
//	  - smear, and phase-share, which is the part of it that phase adds: in time.
//	  - delay-spread, lead: in time.
//	  - latency: in time, how long a listener waits when the chain runs as the
//	    sound comes in: what it must look ahead, and what latency is left. What
//	    delay stages add on purpose does not count.
//	  - phase-deviation: in degrees, of the worst carried band.
//	  - sum-test: in dB, the deepest loss that is allowed, 0 dB or less.
//	  - target-error: in dB.
//
// A bound on rings and smear holds for white and pink weights alike, unless it
// names one. All bounds are inclusive.
//
// # Sets
//
// Each set has one measure (see [Limit.Measure]):
//
//   - audibility: a band's arrival less the median arrival of the carried bands
//     one to two octaves away, signed. Late bands are judged by thresholds for
//     late bands, early ones by those for early bands, where the study has them.
//   - circuits: a band's arrival less the least of the carried bands within the
//     table's range.
//   - masking: how long the early (late) energy of the whole response takes to
//     -60 dB. The sources give times and no level: the -60 dB are this package's.
//
// A band is judged by the table's value at the frequency, among those that the
// table states a limit for, that is nearest to the band's centre; it is outside
// the table's range when it holds no such frequency. Between the points of a
// table limits are linear in time over the logarithm of frequency: of J.21 that
// is remembered, for the others it is this package's choice. A mask's steps are
// taken as they are, the smaller of two that meet.
//
// A set whose figures are from memory gives advice: see [Verdict.Fails].
package limits
