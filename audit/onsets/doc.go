// Package onsets finds the onsets of a recording and says what a treatment did to
// each: how much later it happens, how much slower it rises, and how much energy
// arrives ahead of it that was not there before.
//
// Recordings are streams; less than two seconds of each are held. Each channel is
// taken by itself, through a first-order high-pass at 100 Hz, in the original and
// in the processed recording alike: rumble and offsets, which the treatment may
// have removed, would else govern power.
//
// # Detection
//
// Spectral flux: the spectrum under a Hann window every 10 ms is gathered into bands
// a semitone wide; the function is how many decibels they rise over 20 ms, falls
// not counted, in the mean over bands (Dixon 2006, "Onset detection revisited",
// DAFx-06, section on onset detection functions; logarithm and bands after Böck,
// Krebs and Schedl 2012, "Evaluating the online capabilities of onset detection
// methods", ISMIR). A band is compared with the largest of three neighbours of the
// earlier frame, so that a gliding partial is no onset (Böck and Widmer 2013,
// "Maximum filter vibrato suppression for onset detection", DAFx-13). A detection is
// a peak that stands out of a moving mean (Böck, Krebs and Schedl, section on
// peak picking). The papers' places and figures are from memory.
//
// # Onset
//
// A detection is an onset if the waveform shows one. The envelope is the power
// under a Hann window of 2 ms. It is read at shares of its peak over the mean power
// from 20 to 10 ms before; the peak is the first that nothing higher follows within
// 10 ms.
//
//   - The onset's time is when the envelope reaches a tenth of the peak,
//     and 0.48 ms for the window: a step in power is then timed exactly, a
//     click 0.31 ms early.
//   - Its rise is from a tenth to nine tenths, and 0.59 ms for a click.
//   - It is clear when for 20 ms before the envelope was under a twentieth of the
//     peak (13 dB) and went from there to a fifth within 10 ms, without turning back.
//     What rises for longer than 50 ms is read up to there.
//
// What is not clear is counted, not timed: fades, swells, notes over others that
// still sound, words within a phrase. Silence, offsets, steady tones and noise,
// and the two ends of a recording give none. A click is an onset, and so is a
// switched offset. An onset needs 20 ms of the recording before it.
//
// # Comparison
//
// In the processed recording the onset is read in the same way in the same place,
// or, where nothing stands there or 30 dB less than near it, where the correlation of
// envelopes puts it, up to 20 ms off. Where it does not stand 10 dB over what comes
// before, it is lost; where it is not clear, or over 20 ms off, blurred. Neither has
// a shift. A rise whose envelope turns back between 80 % and 97 % of the peak is not
// stated: a small change would make a large one of it.
//
// A shift is what the envelope shows: a treatment that delays nothing but changes
// the balance moves onsets too, by less than the attack is long. A treble shelf
// of +6 dB moved those of a speech-like signal by 0.07 ms in the median, 0.5 ms at the
// 95th percentile and 2.6 ms at worst; a linear-phase high-pass at 70 Hz by 0.0002,
// 0.03 and 0.3 ms.
//
// Early energy is what the processed recording holds in the 100 ms before its
// onset, up to 1, 2, 5 or 20 ms before, over its mean power in the 200 ms before
// those, as a share of the energy of the 50 ms from the onset on. What the
// original shows of the kind is subtracted, and three times as much must be exceeded
// (6 dB): a breath before a word is no pre-ring, nor in another balance. Where the
// original's rumble hides it, it counts against the treatment. Less than twice the
// largest deviation of four stretches of the background is not seen. The level of
// what must be exceeded is the floor; an onset whose floor is over -20 dB tells
// nothing.
//
// Pre-masking, which hides sound ahead of a louder one, is put at 1 to 2 ms (Spanias,
// Painter and Atti, Audio Signal Processing and Coding, 5.5, after Zwicker 1990),
// about 5 ms (Huang et al. 2001) and up to 20 ms (Zwicker and Fastl, Psychoacoustics,
// chapter 4, from memory). Early energy beyond 20 ms is masked by none of them.
//
// # Units
//
// Times are seconds from the first frame, levels decibels. NaN is not stated and
// comes with a reason; a level of figures.None is 'none seen'.
package onsets
