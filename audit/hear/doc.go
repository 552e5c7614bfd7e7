// Package hear makes short excerpts of a recording and of what realisations of a
// chain make of it, to be listened to side by side.
//
// # Where
//
// The excerpts are about the recording's strongest onset, where ringing is heard
// if it is heard anywhere; without a clear onset, about its largest sample. They begin
// and end at the same frames in all players. An output's excerpt is what a render of
// the whole recording has there, to rounding (a backward run: to -140 dB), though only
// that part is read and filtered, and as much on either side as the filter remembers.
//
// # Level
//
// What is louder is easily taken for better, so each output is brought to the loudness
// of the original's excerpt (loudness.Meter.Over), by the gain that is stated. If a
// player's true peak would then exceed [CeilingDB], all players are lowered alike.
//
// What was removed is the original less the output, as render writes it: aligned, of
// the same sign. It is to be played at its true level beside the original, so it is
// not matched. It needs no samples of its own: at every sample it is
//
//	removed = original - Ratio · output
//
// of the players' own, which halves what a page has to hold.
//
// The players are 16-bit WAV with TPDF dither, and fade in and out over 5 ms.
package hear
