// Package audio brings recordings in and out as streams of frames.
//
// # Vocabulary
//
// A frame is one sample of every channel at one instant; streams are
// interleaved, frame after frame. Samples are float64 with full scale at 1.0;
// levels are in dB re full scale: dBFS for samples, dBTP for the true peak,
// which is the peak of the waveform between the samples as well. Frames and
// channels are counted from 0 in code, channels from 1 in what a user reads.
//
// A [Source] is pulled, a [Sink] takes. [Open] gives the Source of a WAV file,
// [FromFrames] that of a slice; [Create] gives the Sink that writes a WAV file.
// A [Meter] finds peaks in what goes by. No step holds a whole recording.
//
// # Promises
//
// An original is only ever opened for reading. An output appears under its name
// when it is whole and synced to disk, or not at all. Nothing is clipped in
// silence: what does not fit an integer format makes [Writer.Commit] fail with
// an [OverError]. A NaN or an infinity never passes in either direction.
//
// Package container knows the outside of a file, package pcm the samples.
package audio
